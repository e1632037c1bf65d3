"""CPU time of SymEngine and of the program on the same problems, in the same run.

    symengine_ratio.py --program PROGRAM [--only NAME]... [--reps 5] [--command check|sheet] [--bench BENCH]

SymEngine (PyPI) parses strings, builds L, derives momenta, residuals, mass matrix and energy function, then tests each claim
by expansion of the variation under its generator. The program runs from text to verdicts, its start on an empty model taken
off. With the bench binary of `leastwise-analysis` also edits in a live session, each text never seen before. User and system time of the process, medians. The machine is shared: only ratios within one run mean anything.
"""
import argparse
import json
import os
import resource
import statistics
import subprocess
import sys
import tempfile
import time

from problems import problems

SKIP_ABOVE = 1000          # coordinates: SymEngine's time grows with the square
BASE = 20                  # runs of the empty model
SMALLEST = 1e-4            # seconds: below, the difference to the empty model is noise


# ---------------------------------------------------------------- SymEngine
class Library:
    def __init__(self):
        import symengine
        self.se = symengine
        x, y = symengine.symbols("x y")
        ((x + y)**2).expand().diff(x)                     # warm

    def read(self, text):
        return self.se.Symbol(text) if text.isidentifier() else self.se.sympify(text)

    def derive(self, p):
        """Everything but the verdicts."""
        se = self.se
        q, v, a = ([self.read(mark + c) for c in p.coordinates] for mark in ("", "v_", "a_"))
        pairs = list(zip(q, v))
        L = self.read(p.kinetic) - self.read(p.potential)
        for mass, position in p.points:
            L += se.Rational(1, 2) * self.read(mass) * se.Add(*[self.rate(self.read(x), pairs)**2 for x in position])
        momenta = [L.diff(x) for x in v]
        residuals = []
        for m, x in zip(momenta, q):
            symbols = m.free_symbols
            parts = [m.diff(y) * w for y, w in pairs if y in symbols] + [m.diff(w) * b for w, b in zip(v, a) if w in symbols]
            residuals.append(se.Add(*parts) - L.diff(x))
        matrix = [[m.diff(w) for w in v] for m in momenta]
        energy = se.Add(*[w * m for w, m in zip(v, momenta)]) - L
        return L, q, v, a, residuals, matrix, energy

    def rate(self, x, pairs):
        symbols = x.free_symbols
        return self.se.Add(*[x.diff(y) * w for y, w in pairs if y in symbols])

    def holds(self, p, claim, L, q, v, a):
        se, t = self.se, self.se.Symbol("t")
        pairs = list(zip(q, v))
        if claim.without:
            L = L.subs({self.read(x): 0 for x in claim.without})
        parts = []
        for name, text in claim.generator.items():
            eta = self.read(text)
            i = p.coordinates.index(name)
            parts.append(L.diff(q[i]) * eta)
            slope = self.rate(eta, pairs) + eta.diff(t)
            if slope != 0:
                parts.append(L.diff(v[i]) * slope)
        V = se.Add(*parts)
        if not claim.gauge:
            return self.zero(V, q)
        V = V.expand()
        for x, w in pairs:                                # the Euler operator of V
            m = V.diff(w)
            e = [m.diff(t), -V.diff(x)] + [m.diff(y) * u for y, u in pairs] + [m.diff(u) * b for u, b in zip(v, a)]
            if not self.zero(se.Add(*e), q):
                return False
        return True

    def zero(self, e, q):
        """Whether e vanishes by expansion, and by cos² = 1 − sin² if need be."""
        e = e.expand()
        if e == 0:
            return True
        se = self.se
        marks = {f(x): se.Symbol(f"{n}__{x}") for x in q for n, f in (("S", se.sin), ("C", se.cos))}
        e = e.subs(marks)
        for x in q:
            S, C = marks[se.sin(x)], marks[se.cos(x)]
            e = (e * S**2).expand()
            for k in (4, 3, 2):
                e = e.subs({C**k: (1 - S**2) * C**(k - 2)}).expand()
            e = e.subs({C**2: 1 - S**2}).expand()
        return e == 0


def in_child(work):
    """Runs work() in a forked process and returns its answer: the library's caches are empty in each."""
    reading, writing = os.pipe()
    pid = os.fork()
    if pid == 0:
        status = 1
        try:
            os.write(writing, json.dumps(work()).encode())
            status = 0
        finally:
            os._exit(status)
    os.close(writing)
    with os.fdopen(reading) as f:
        text = f.read()
    os.waitpid(pid, 0)
    return json.loads(text) if text else None


def library_times(library, p, reps):
    """Median seconds for the derivation and for derivation and verdicts."""
    def work():
        begin = time.process_time()
        L, q, v, a, *_ = library.derive(p)
        middle = time.process_time()
        answers = [library.holds(p, c, L, q, v, a) for c in p.claims]
        return middle - begin, time.process_time() - begin, all(answers)
    runs = [in_child(work) for _ in range(reps)]
    if any(r is None or not r[2] for r in runs):
        return None
    return statistics.median(r[0] for r in runs), statistics.median(r[1] for r in runs)


# ---------------------------------------------------------------- the program
def cpu_of(command):
    before = resource.getrusage(resource.RUSAGE_CHILDREN)
    p = subprocess.run(command, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
    after = resource.getrusage(resource.RUSAGE_CHILDREN)
    if p.returncode not in (0, 1):
        return None
    return after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime


def program_time(words, command, path, reps):
    full = words + ([command, path] if command == "check" else ["sheet", path, "--as", "json"])
    runs = [cpu_of(full) for _ in range(reps)]
    return None if None in runs else statistics.median(runs)


def verdicts_right(words, path, statuses):
    """Whether the sheet's claims are what they must be; untimed."""
    p = subprocess.run(words + ["sheet", path, "--as", "json"], stdout=subprocess.PIPE, stderr=subprocess.DEVNULL)
    try:
        return {s["name"]: s["status"] for s in json.loads(p.stdout)["symmetries"]} == statuses
    except (ValueError, KeyError, TypeError):
        return False


def milliseconds(x):
    return "failed" if x is None else f"{1000 * x:.2f}"


EDITS = ["links_10 potential edited", "links_10 kinetic edited", "links_10 definition edited", "bodies_4 potential edited"]


def edits(bench, library, reps):
    """An edit, from changed text to new verdicts, against SymEngine from scratch on the same problem."""
    print("\n| edit | SymEngine from scratch (ms) | leastwise (ms) | ratio |\n|---|---|---|---|")
    for case in EDITS:
        name = case.split()[0]
        p = next(p for p in problems() if p.name == name)
        theirs = library_times(library, p, reps)
        out = subprocess.run([bench, "--median", case], stdout=subprocess.PIPE, stderr=subprocess.DEVNULL)
        ours = float(out.stdout or "nan") / 1e6
        print(f"| {case} | {milliseconds(theirs[1])} | {1000 * ours:.3f} | {theirs[1] / ours:.0f} |", flush=True)


def main():
    ap = argparse.ArgumentParser(description=__doc__.split("\n")[0])
    ap.add_argument("--program", required=True)
    ap.add_argument("--only", action="append")
    ap.add_argument("--reps", type=int, default=5)
    ap.add_argument("--command", choices=["check", "sheet"], default="check")
    ap.add_argument("--bench")
    o = ap.parse_args()
    try:
        library = Library()
    except ImportError:
        print("not run: SymEngine ratios (needs symengine)")
        return 1 if os.environ.get("LEASTWISE_REQUIRE_ALL") == "1" else 0
    words = [os.path.abspath(w) if os.path.exists(w) else w for w in o.program.split()]
    print(f"| problem | SymEngine, derived (ms) | with verdicts (ms) | leastwise {o.command} (ms) | SymEngine : leastwise |")
    print("|---|---|---|---|---|")
    wrong = 0
    with tempfile.TemporaryDirectory() as folder:
        empty = os.path.join(folder, "empty.least")
        with open(empty, "w", encoding="utf-8") as f:
            f.write("system empty\ncoordinate x\nkinetic T = x'^2\n")
        start = program_time(words, o.command, empty, BASE)
        for p in problems():
            if o.only and p.name not in o.only:
                continue
            path = os.path.join(folder, p.name + ".least")
            with open(path, "w", encoding="utf-8") as f:
                f.write(p.model)
            ours = program_time(words, o.command, path, o.reps)
            ours = None if ours is None or start is None else max(ours - start, 1e-6)
            theirs = library_times(library, p, o.reps if len(p.coordinates) < 100 else 1) if len(p.coordinates) <= SKIP_ABOVE else ()
            derived, whole = (None, None) if theirs is None else theirs or ("—", "—")
            ratio = "—"
            if isinstance(whole, float) and ours:
                ratio = f"{whole / ours:.1f}" if ours > SMALLEST else f"> {whole / SMALLEST:.0f}"
            if not verdicts_right(words, path, p.statuses):
                ratio, wrong = "wrong verdicts", wrong + 1
            cells = [x if isinstance(x, str) else milliseconds(x) for x in (derived, whole)]
            print(f"| {p.name} | {cells[0]} | {cells[1]} | {milliseconds(ours)} | {ratio} |", flush=True)
    print(f"\nleastwise starts in {milliseconds(start)} ms of CPU time; it is taken off.")
    if o.bench:
        edits(o.bench, library, o.reps)
    return 1 if wrong else 0


if __name__ == "__main__":
    sys.exit(main())
