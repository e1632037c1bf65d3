"""Hostile input: whatever the file holds, the program ends by itself, soon, in bounded memory, with a message.

    hostile.py PROGRAM [--only CASE] [--list]

Each case is run with `check`, `sheet --as json`, `sheet` and `format --check`. Required: exit code 0, 1 or 2 (2 only where
the file itself cannot be read), a message unless it is 0, at most 20 CPU seconds and 1 GiB of memory, no signal, no panic.
"""
import argparse
import os
import resource
import signal
import subprocess
import sys
import tempfile
import time

import program
import sheets

SECONDS, BYTES = 20, 1 << 30
HEAD = "coordinate x, y\nparameter a, b, m, k\n"
KINETIC = "kinetic T = 1/2 m x'^2 + 1/2 m y'^2\n"


def model(text):
    return HEAD + KINETIC + text


def nested(opening, middle, closing, n):
    return model("potential V = " + opening * n + middle + closing * n + "\n")


def joined(n, form, glue):
    return glue.join(form.format(i=i) for i in range(1, n + 1))


def doubling(n, form):
    lines = [f"let d{i} = " + form.format(p=f"d{i - 1}") for i in range(1, n + 1)]
    return model("let d0 = sin(x) + y\n" + "\n".join(lines) + f"\npotential V = d{n}\nsymmetry s: x -> x + ε\n")


def family(n, more=""):
    return (f"index i: 1..{n}\ncoordinate x[i]\nparameter m, k\nkinetic T = sum(i: 1/2 m x[i]'^2)\n"
            f"potential V = sum(i in 1..{n}-1: 1/2 k (x[i+1] - x[i])^2)\nsymmetry s: x[i] -> x[i] + ε\n" + more)


CASES = {
    # bytes
    "empty": "",
    "one newline": "\n",
    "only comments": "# nothing\n# more of it",
    "not utf-8": b"coordinate x\nkinetic T = 1/2 \xff\xfe x'^2\n",
    "latin-1": "coordinate länge\nkinetic T = 1/2 länge'^2\n".encode("latin-1"),
    "utf-16": "coordinate x\nkinetic T = 1/2 x'^2\n".encode("utf-16"),
    "byte order mark": "\ufeffcoordinate x\nkinetic T = 1/2 x'^2\n",
    "nul bytes": model("potential V = \0 x^2 \0\n\0\0\0"),
    "only nul bytes": b"\0" * 100_000,
    "control characters": model("potential V = \x1b[31m x \x07 \x0c \x0b\n"),
    "carriage returns": model("potential V = 1/2 k x^2\n").replace("\n", "\r"),
    "crlf": model("potential V = 1/2 k x^2\n").replace("\n", "\r\n"),
    "right to left": model("potential V = \u202e x \u202c k \u2066 y\n"),
    "a million combining marks": model("potential V = x" + "\u0307" * 1_000_000 + "\n"),
    "half a surrogate": b"coordinate x\nkinetic T = x'^2 # \xed\xa0\x80\n",
    # size
    "5 MB of comment": "# " + "c" * 5_000_000 + "\n" + model(""),
    "5 MB of one line": model("potential V = " + "x + " * 1_250_000 + "x\n"),
    "5 MB of letters": "z" * 5_000_000,
    "5 MB of items": HEAD + KINETIC + joined(160_000, "potential V{i} = 1/2 k x^2", "\n"),
    "5 MB of broken items": "potential = = =\n" * 330_000,
    "5 MB of digits": model("potential V = x " + "7" * 5_000_000 + "\n"),
    "5 MB of quotes": 'include "' * 600_000,
    "names of 1 MB": "coordinate " + "x" * 1_000_000 + "\nkinetic T = 1/2 " + "x" * 1_000_000 + "'^2\n",
    "5 000 summands": model("potential V = " + joined(5000, "{i} x^2 cos({i} y)", " + ") + "\nsymmetry s: y -> y + ε\n"),
    "5 000 terms": HEAD + KINETIC + joined(5000, "potential V{i} = {i} k x^2", "\n") + "\nbroken symmetry s: x -> x + ε\n",
    "3 000 factors": model("potential V = " + joined(3000, "(x + {i})", " ") + "\n"),
    "3 000 sines": model("potential V = " + joined(3000, "sin({i} x)", " ") + "\nsymmetry s: x -> x + ε\n"),
    "3 000 coordinates": "coordinate " + joined(3000, "q{i}", ", ") + "\nkinetic T = " + joined(3000, "q{i}'^2", " + ") + "\n",
    "2 000 claims": model(joined(2000, "symmetry s{i}: x -> x + {i} ε", "\n") + "\n"),
    "40 breakers": model(joined(40, "potential V{i} = k cos({i} x) y^{i}", "\n") + "\nbroken symmetry s: x -> x + ε, y -> y + ε x\n"),
    # depth
    "100 000 parentheses": nested("(", "x", ")", 100_000),
    "100 000 open parentheses": model("potential V = " + "(" * 100_000 + "\n"),
    "100 000 closing parentheses": model("potential V = " + ")" * 100_000 + "\n"),
    "100 000 brackets": nested("x[", "1", "]", 100_000),
    "100 000 bars": model("potential V = " + "|" * 100_000 + "x\n"),
    "100 000 minus signs": model("potential V = " + "-" * 100_000 + "x\n"),
    "100 000 powers": model("potential V = " + "x^" * 100_000 + "2\n"),
    "100 000 primes": model("potential V = x" + "'" * 100_000 + "\n"),
    "100 000 sines of sines": nested("sin(", "x", ")", 100_000),
    "250 parentheses": nested("(", "x", ")", 250),
    "250 sines of sines": nested("sin(", "x", ")", 250),
    "250 roots of roots": nested("sqrt(1 + x ", "y", ")", 250),
    "250 divisions": nested("1/(x + ", "y", ")", 250),
    "20 sums in sums": "index i: 1..9\ncoordinate x[i]\nkinetic T = sum(i: x[i]'^2)\npotential V = "
                       + "".join(f"sum(j{n} in 1..9: " for n in range(20)) + "x[1]" + ")" * 20 + "\n",
    "a chain of 2 000 lets": model("let c0 = x\n" + "\n".join(f"let c{i} = sin(c{i - 1}) + y" for i in range(1, 2001)) + "\npotential V = c2000\n"),
    # blow-up
    "lets that double": doubling(60, "{p} + {p}^2"),
    "lets that square": doubling(40, "{p} * {p}"),
    "lets that nest powers": doubling(30, "({p} + 1)^3"),
    "lets that divide": doubling(40, "{p}/(1 + {p})"),
    "lets of roots": doubling(40, "sqrt(1 + {p}^2)"),
    "a power of a long sum": model("potential V = (" + joined(30, "{i} x^{i} y", " + ") + ")^200\n"),
    "power 10^9": model("potential V = x^(10^9)\n"),
    "number to 10^9": model("potential V = x 2^(10^9)\n"),
    "tower of powers": model("potential V = x 9^9^9^9^9\n"),
    "sum to 10^9": model("potential V = (x + y)^(10^9)\n"),
    "rational power of a large number": model("potential V = x 7^(1/1000000007)\n"),
    "sine of a large multiple": model("potential V = sin(1000000000 x) - sin(999999999 x) cos(x)\nsymmetry s: x -> x + ε\n"),
    "spin of 12 turns": "coordinate " + joined(12, "q{i}", ", ") + "\nlet R = "
                        + joined(12, "turn(({i}/13, sqrt(1 - {i}^2/169), 0), q{i})", "·") + "\nkinetic T = 1/2 spin(R)·spin(R)\nsymmetry s: q1 -> q1 + ε\n",
    # numbers
    "1e999999999": model("potential V = 1e999999999 x\n"),
    "1e-999999999": model("potential V = 1e-999999999 x\n"),
    "exponent of 30 digits": model("potential V = 1e" + "9" * 30 + " x\n"),
    "1e999999999 kg": "coordinate x: length\nparameter m: mass = 1e999999999 kg\nkinetic T = 1/2 m x'^2\n",
    "division by zero": model("potential V = x/0\n"),
    "division by a hidden zero": model("potential V = x/(y - y) + 1/(sin(x)^2 + cos(x)^2 - 1)\n"),
    "zero by zero": model("potential V = 0/0\n"),
    "zero to a negative power": model("potential V = 0^(-1) x\n"),
    "value divided by zero": "coordinate x: length\nparameter m: mass = 1/0 kg\nkinetic T = 1/2 m x'^2\n",
    "log of zero": model("potential V = log(0) x + sqrt(-1) y + asin(2)\n"),
    # families
    "a million members": family(1_000_000),
    "10^18 members": family(10**18),
    "an index that is no number": family("x"),
    "an empty index": family(0),
    "an index from a let in a circle": "let N = N\n" + family("N"),
    "a sum to 10^12": model("potential V = sum(i in 1..10^12: i x^2)\n"),
    "a sum of sums": model("potential V = sum(i in 1..100000: sum(j in i+1..100000: i j x^2))\n"),
    "an index out of range": family(4, "potential W = x[5] + x[0] + x[10^30]\n"),
    "64 members with pairs": "index i: 1..64\ncoordinate x[i], y[i]\nkinetic T = sum(i: x[i]'^2 + y[i]'^2)\n"
                             "potential V = sum(i in 1..63: sum(j in i+1..64: 1/sqrt((x[i] - x[j])^2 + (y[i] - y[j])^2)))\n"
                             "symmetry s: x[i] -> x[i] + ε\n",
    # meaning
    "circular lets": model("let c = d + x\nlet d = e\nlet e = c\npotential V = c\n"),
    "a let of itself": model("let c = c\npotential V = c\n"),
    "a let function of itself": model("let f(s) = f(s - 1) + s\npotential V = f(x)\n"),
    "lets that call each other": model("let f(s) = g(s)\nlet g(s) = f(s)\npotential V = f(x)\n"),
    "no kinetic term": "coordinate x\npotential V = x\nsymmetry s: x -> x + ε\nconserved c = x'\n",
    "no coordinate": "parameter m\nkinetic T = m\n",
    "everything named alike": "coordinate x\nparameter x\nlet x = x\nfunction x(x)\nindex x: 1..3\nkinetic x = x'^2\nsymmetry x: x -> x + ε\n",
    "keywords only": "\n".join(["system", "coordinate", "cyclic", "parameter", "input", "index", "let", "function", "assume", "kinetic", "potential",
                                "lagrangian", "dissipation", "force", "constraint", "symmetry", "broken", "conserved", "run", "include"]),
    "derivative of order 10 000": model("function U(s)\npotential V = U" + "'" * 10_000 + "(x)\n"),
    "derivative by the 99th argument": model("function U(s)\npotential V = U'[99,0,-1](x)\n"),
    "a run for ever": model("run r: from x = 1e300, over 1e300\n"),
    "a family that is not the identity": model("symmetry s: x -> 2 x + 1/ε\n"),
    "a million commas": "coordinate " + "," * 1_000_000 + "\n",
    "essential singularity": model("potential V = exp(1/x) + sin(1/(x - x + 0))\nsymmetry s: x -> x/ε\n"),
    # includes
    "include of itself": 'include "model.least"\n' + model(""),
    "include circle": 'include "ring_1.least"\n' + model(""),
    "include of a device": 'include "/dev/zero"\n' + model(""),
    "include of random bytes": 'include "/dev/urandom"\n' + model(""),
    "include of a pipe": 'include "pipe.least"\n' + model(""),
    "include of a folder": 'include "folder.least"\n' + model(""),
    "include of a missing file": 'include "missing.least"\n' + model(""),
    "include of nothing": 'include ""\ninclude\ninclude "\n' + model(""),
    "include with a nul": 'include "a\0b.least"\n' + model(""),
    "include of a long name": f'include "{"n" * 100_000}.least"\n' + model(""),
    "include a chain of 3 000": 'include "chain_1.least"\n' + model(""),
    "include a tree of 2^40": 'include "tree_1.least"\n' + model(""),
    "include not utf-8": 'include "latin.least"\n' + model(""),
}


def surroundings(folder):
    """The files that the include cases name."""
    def write(name, data):
        with open(os.path.join(folder, name), "wb") as f:
            f.write(data.encode() if isinstance(data, str) else data)
    for i in range(1, 4):
        write(f"ring_{i}.least", f'include "ring_{i % 3 + 1}.least"\n')
    for i in range(1, 3001):
        write(f"chain_{i}.least", f'include "chain_{i + 1}.least"\nlet c_{i} = {i}\n')
    write("chain_3001.least", "let c_end = 0\n")
    for i in range(1, 41):
        write(f"tree_{i}.least", f'include "tree_{i + 1}.least"\ninclude "./tree_{i + 1}.least"\n')
    write("tree_41.least", "let leaf = 1\n")
    write("latin.least", "let länge = 1\n".encode("latin-1"))
    os.mkfifo(os.path.join(folder, "pipe.least"))
    os.mkdir(os.path.join(folder, "folder.least"))


class Outcome:
    def __init__(self, code, out, err, cpu, rss, late):
        self.code, self.out, self.err, self.cpu, self.rss, self.late = code, out, err, cpu, rss, late

    def complaint(self, may_fail):
        """What is wrong with it, or nothing."""
        if self.late:
            return "did not end in time"
        if program.crashed(self.code, self.err):
            return f"crashed ({self.code}): {self.err.strip()[:200]}"
        if self.code not in (0, 1, 2):
            return f"exit code {self.code}"
        if self.code == 2 and not may_fail:
            return f"could not run (2): {(self.err + self.out).strip()[:200]}"
        if self.code and not (self.out + self.err).strip():
            return f"exit code {self.code} without a message"
        if self.cpu > SECONDS:
            return f"{self.cpu:.1f} CPU seconds"
        if self.rss > BYTES:
            return f"{self.rss >> 20} MiB of memory"
        return None


def limited():
    resource.setrlimit(resource.RLIMIT_AS, (6 << 30, 6 << 30))
    resource.setrlimit(resource.RLIMIT_CPU, (SECONDS + 5, SECONDS + 10))


def run(command, folder, stdin=subprocess.DEVNULL):
    """Runs the command, its output in files so that nothing can block it."""
    with tempfile.TemporaryFile() as out, tempfile.TemporaryFile() as err:
        p = subprocess.Popen(command, cwd=folder, stdin=stdin, stdout=out, stderr=err, preexec_fn=limited, start_new_session=True)
        end, late, usage = time.monotonic() + 4 * SECONDS, False, None
        while True:
            pid, status, usage = os.wait4(p.pid, os.WNOHANG)
            if pid:
                break
            if time.monotonic() > end and not late:
                late = True
                os.kill(p.pid, signal.SIGKILL)
            time.sleep(0.005)
        code = os.waitstatus_to_exitcode(status)
        p.returncode = code
        late = late or code == -signal.SIGXCPU
        text = []
        for f in (out, err):
            f.seek(0)
            text.append(f.read(2_000_000).decode("utf-8", "replace"))
        return Outcome(code, *text, usage.ru_utime + usage.ru_stime, usage.ru_maxrss * 1024, late)


# In these something is wrong that the program has to find.
MUST_COMPLAIN = {"nul bytes", "5 MB of letters", "5 MB of broken items", "5 MB of quotes", "100 000 parentheses", "100 000 open parentheses",
                 "100 000 closing parentheses", "100 000 brackets", "100 000 bars", "100 000 sines of sines", "division by zero", "zero by zero",
                 "value divided by zero", "10^18 members", "an index that is no number", "an empty index", "an index out of range", "circular lets",
                 "a let of itself", "a let function of itself", "lets that call each other", "no kinetic term", "everything named alike",
                 "keywords only", "derivative by the 99th argument", "a family that is not the identity", "a million commas",
                 "include of itself", "include circle", "include of a device", "include of random bytes", "include of a pipe",
                 "include of a folder", "include of a missing file", "include of nothing", "include with a nul", "include of a long name",
                 "include not utf-8", "an index from a let in a circle", "1e999999999 kg"}
UNREADABLE = {"not utf-8", "latin-1", "utf-16", "half a surrogate"}
COMMANDS = [["check"], ["sheet", "--as", "json"], ["sheet"], ["format", "--check"]]


def try_case(prog, name, folder):
    report = sheets.Report(name)
    data = CASES[name]
    path = os.path.join(folder, "model.least")
    with open(path, "wb") as f:
        f.write(data.encode("utf-8", "surrogatepass") if isinstance(data, str) else data)
    for command in COMMANDS:
        full = prog.command + command[:1] + ["model.least"] + command[1:]
        o = run(full, folder)
        why = o.complaint(name in UNREADABLE)
        if why is None and command == ["check"] and o.code == 0 and name in MUST_COMPLAIN | UNREADABLE:
            why = "no complaint"
        report.check(why is None, " ".join(command), why)
        if why and o.late:
            break
    return report


def pipes(prog, folder):
    """What concerns the program's own files and streams."""
    good = os.path.join(folder, "model.least")
    with open(good, "w", encoding="utf-8") as f:
        f.write(model("potential V = 1/2 k x^2\n"))
    for name, args, wanted in (("a missing model", ["check", "nowhere.least"], (2,)), ("a folder as model", ["check", "folder.least"], (2,)),
                               ("a device as model", ["check", "/dev/zero"], (1, 2)), ("an unknown command", ["frobnicate"], (2,)),
                               ("an unknown format", ["sheet", "model.least", "--as", "poem"], (2,)), ("no file", ["check"], (2,)),
                               ("standard input", ["check", "-"], (0, 1))):
        report = sheets.Report(name)
        o = run(prog.command + args, folder)
        why = o.complaint(True)
        report.check(why is None and o.code in wanted, " ".join(args), why or f"exit code {o.code}, expected one of {wanted}")
        yield report
    for args in (["sheet", "model.least"], ["check", "model.least", "--as", "json"]):
        report = sheets.Report("output that nobody reads")
        reading, writing = os.pipe()
        os.close(reading)
        p = subprocess.run(prog.command + args, cwd=folder, stdin=subprocess.DEVNULL, stdout=writing, stderr=subprocess.PIPE, timeout=4 * SECONDS)
        os.close(writing)
        report.check(b"panicked" not in p.stderr and p.returncode not in (101, 134), " ".join(args), f"{p.returncode} {p.stderr[:200]}")
        yield report


def main(arguments=None):
    ap = argparse.ArgumentParser(description=__doc__.split("\n")[0])
    ap.add_argument("program")
    ap.add_argument("--only")
    ap.add_argument("--list", action="store_true", help="print each case's time and memory")
    o = ap.parse_args(arguments)
    prog = program.Program(o.program)
    reports = []
    with tempfile.TemporaryDirectory() as folder:
        surroundings(folder)
        for name in CASES:
            if o.only in (None, name):
                begin = time.monotonic()
                reports.append(try_case(prog, name, folder))
                if o.list:
                    print(f"{time.monotonic() - begin:6.2f} s  {name}", flush=True)
        if o.only is None:
            reports += pipes(prog, folder)
    for r in reports:
        for line in r.lines:
            print(line)
    passed, failed = sum(r.passed for r in reports), sum(r.failed for r in reports)
    print(f"{len(reports)} hostile inputs: {passed} passed, {failed} failed")
    return passed, failed


if __name__ == "__main__":
    sys.exit(1 if main()[1] else 0)
