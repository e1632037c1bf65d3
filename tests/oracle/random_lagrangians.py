"""Random Lagrangians, derived by the program and by SymPy's core, compared at random points with 40 digits.

    random_lagrangians.py PROGRAM [--count 500] [--seed 1] [--only N] [--keep FOLDER]

Each model is one tree, written once in the model language (with its juxtaposition, dots, superscripts and unparenthesised
functions) and once built in SymPy. Compared: momenta, ∂L/∂q, equations with forces and dissipation, mass matrix, energy
function and its rate, which coordinates are cyclic, whether the energy function is conserved, the verdicts on symmetries,
and the laws between each symmetry's charge, gauge term and rate.
"""
import argparse
import multiprocessing
import os
import random
import sys
import tempfile
from fractions import Fraction

import mpmath as mp
import sympy as sp

import plain
import program
import sheets
from kernel import Motion, add, applied, coordinates, rayleigh, t

SUPER = str.maketrans("0123456789", "⁰¹²³⁴⁵⁶⁷⁸⁹")
NAMES = ["x", "y", "z", "r", "θ", "φ", "ψ", "x₁", "x₂", "q_a", "θ₃", "ξ"]
PARAMETERS = ["a", "b", "c", "m", "k", "l", "Ω", "γ", "m₁", "k_2"]


# ---------------------------------------------------------------- trees
# ("n", Fraction) ("q", name) ("v", name) ("p", parameter) ("t",) ("+", …) ("*", …) ("^", base, Fraction) ("f", name, arg)
# ("U", arg) an unspecified function, ("D", arg) a time derivative, ("let", name, tree) a definition
def num(x):
    return ("n", Fraction(x))


class Writer:
    """Writes a tree in the model language, varying among the spellings that mean the same."""

    def __init__(self, rng):
        self.rng = rng

    def often(self, p=0.5):
        return self.rng.random() < p

    def sum(self, e):
        if e[0] == "+":
            out = ""
            for x in e[1:]:
                sign, body = self.signed(x)
                out += f" {sign} {body}" if out else ("-" if sign == "-" else "") + body
            return out
        sign, body = self.signed(e)
        return ("-" if sign == "-" else "") + body

    def signed(self, e):
        if e[0] == "n" and e[1] < 0:
            return "-", self.factor(num(-e[1]), True)
        if e[0] == "*" and e[1][0] == "n" and e[1][1] < 0:
            c = -e[1][1]
            rest = e[2:] if c == 1 and len(e) > 2 else (num(c),) + e[2:]
            return "-", self.product(rest)
        return "+", self.product(e[1:]) if e[0] == "*" else self.factor(e, True) if e[0] != "+" else f"({self.sum(e)})"

    def product(self, factors):
        out, loose = "", False           # loose: the text ends with an unparenthesised function's argument
        for i, x in enumerate(factors):
            text = self.factor(x, i == 0)
            if not out:
                out = text
            elif loose and text[0] == "(" or text[0].isdigit() or self.often(0.3):
                out += self.rng.choice(["*", " * "]) + text
            else:
                out += " " + text
            loose = x[0] == "f" and not text.endswith(")") or x[0] == "^" and x[1][0] == "f" and text[-1] != ")"
        return out

    def factor(self, e, first=False):
        kind = e[0]
        if kind == "n":
            n = e[1]
            if n < 0:
                return f"({n})"
            if n.denominator in (2, 4, 5, 10) and n.denominator != 1 and self.often(0.3):
                return f"{float(n)}"
            return str(n) if n.denominator == 1 or first else f"({n})"
        if kind in ("q", "p"):
            return e[1]
        if kind == "let":
            return e[1]
        if kind == "t":
            return "t"
        if kind == "v":
            return self.velocity(e[1])
        if kind == "f":
            return self.call(e[1], e[2])
        if kind == "U":
            return f"U({self.sum(e[1])})"
        if kind == "D":
            return f"({self.sum(e[1])})'" if e[1][0] != "let" else e[1][1] + "'"
        if kind == "^":
            return self.power(e[1], e[2])
        return f"({self.sum(e)})"

    def velocity(self, name):
        if self.often(0.4):
            return name[0] + "\u0307" + name[1:]
        return name + "'"

    def call(self, name, arg, mark=""):
        if name == "sqrt" and self.often():
            name = "√"
        if arg[0] == "q" and name != "√" and self.often(0.6):
            return f"{name}{mark} {arg[1]}"
        return f"{name}{mark}({self.sum(arg)})"

    def power(self, base, n):
        if base[0] == "f" and base[1] != "sqrt" and n.denominator == 1 and n > 0 and self.often():
            return self.call(base[1], base[2], str(n).translate(SUPER) if self.often() else f"^{n}")
        atomic = base[0] in ("q", "p", "t", "let", "v")
        text = self.factor(base) if atomic else f"({self.sum(base)})"
        if n == Fraction(1, 2):
            return f"sqrt({self.sum(base)})"
        if n.denominator == 1 and n > 0 and self.often():
            return text + str(n).translate(SUPER)
        return f"{text}^{n}" if n.denominator == 1 and n > 0 else f"{text}^({n})"


class Builder:
    """Builds the same tree in SymPy."""

    def __init__(self, names):
        self.q, self.v, self.a = coordinates(names)
        self.q_of, self.v_of = dict(zip(names, self.q)), dict(zip(names, self.v))

    def __call__(self, e):
        kind = e[0]
        if kind == "n":
            return sp.Rational(e[1].numerator, e[1].denominator)
        if kind == "q":
            return self.q_of[e[1]]
        if kind == "v":
            return self.v_of[e[1]]
        if kind == "p":
            return sp.Symbol(e[1])
        if kind == "t":
            return t
        if kind == "+":
            return sp.Add(*map(self, e[1:]))
        if kind == "*":
            return sp.Mul(*map(self, e[1:]))
        if kind == "^":
            return self(e[1])**sp.Rational(e[2].numerator, e[2].denominator)
        if kind == "f":
            return getattr(sp, e[1])(self(e[2]))
        if kind == "U":
            return plain.smooth_value("U", (0,), (self(e[1]),), sp)
        if kind == "let":
            return self(e[2])
        x = self(e[1])                                       # "D"
        return sp.diff(x, t) + sum(sp.diff(x, q) * v for q, v in zip(self.q, self.v))


# ---------------------------------------------------------------- what is drawn
class Model:
    def __init__(self, seed, number):
        self.rng = r = random.Random(f"{seed}/{number}")
        self.name = f"random_{number}"
        self.coords = r.sample(NAMES, r.choice([2, 2, 3, 3, 4]))
        self.params = r.sample(PARAMETERS, r.randint(2, 4))
        self.timed = r.random() < 0.3
        self.unknown = r.random() < 0.25
        self.relative = r.random() < 0.35          # the potentials know only differences of the first two coordinates
        self.lets = []
        self.terms, self.forces, self.losses, self.symmetries = [], [], [], []
        self.draw()

    def coefficient(self):
        n = Fraction(self.rng.choice([1, 1, 2, 3, 5, -1, -2]), self.rng.choice([1, 1, 2, 3, 4, 5]))
        return num(n)

    def parameter(self):
        return ("p", self.rng.choice(self.params))

    def place(self):
        """Something of dimension one that depends on the coordinates."""
        r = self.rng
        if self.relative:
            pair = ("+", ("q", self.coords[0]), ("*", num(-1), ("q", self.coords[1])))
            return pair if len(self.coords) < 3 or r.random() < 0.6 else ("q", r.choice(self.coords[2:]))
        return r.choice([("q", r.choice(self.coords)), ("q", r.choice(self.coords)),
                         ("+", ("q", r.choice(self.coords)), ("*", self.coefficient(), ("q", r.choice(self.coords)))),
                         ("*", self.parameter(), ("q", r.choice(self.coords)))])

    def positive(self, x):
        return ("+", num(self.rng.randint(1, 3)), ("^", x, Fraction(2)))

    def function(self, depth=2):
        """A random smooth function of coordinates, parameters and, where the model is timed, t."""
        r, x = self.rng, self.place()
        kind = r.randrange(9 if depth else 6)
        if kind == 0:
            return ("f", r.choice(["sin", "cos"]), x)
        if kind == 1:
            return ("^", ("f", r.choice(["sin", "cos"]), x), Fraction(r.choice([1, 2, 3])))
        if kind == 2:
            return ("^", x, Fraction(r.choice([2, 3, 4])))
        if kind == 3:
            return ("^", self.positive(x), Fraction(r.choice([-1, -2, Fraction(1, 2), Fraction(-1, 2), Fraction(3, 2)])))
        if kind == 4:
            return ("f", r.choice(["sqrt", "log"]), self.positive(x))
        if kind == 5:
            return ("f", r.choice(["exp", "tanh", "sinh", "atan", "cosh"]), x)
        if kind == 6:
            return ("*", self.function(depth - 1), self.function(depth - 1))
        if kind == 7:
            return ("+", self.function(depth - 1), ("*", self.coefficient(), self.function(depth - 1)))
        if self.timed:
            return ("f", r.choice(["sin", "cos"]), ("+", ("*", self.parameter(), ("t",)), x))
        return ("U", x) if self.unknown else ("f", "sin", ("+", x, ("*", self.parameter(), self.function(0))))

    def speed(self):
        r = self.rng
        one = ("v", r.choice(self.coords))
        return r.choice([one, one, ("+", one, ("*", self.coefficient(), ("v", r.choice(self.coords)))),
                         ("D", self.function(1)), ("*", self.function(0), one)])

    def hidden_zero(self):
        """An identity, all on one side."""
        r = self.rng
        x, y = ("q", r.choice(self.coords)), r.choice([("q", r.choice(self.coords)), self.parameter()])
        minus, two, p = num(-1), Fraction(2), self.positive(("q", r.choice(self.coords)))
        sin, cos = (lambda a: ("f", "sin", a)), (lambda a: ("f", "cos", a))
        return r.choice([
            ("+", ("^", sin(x), two), ("^", cos(x), two), minus),
            ("+", sin(("+", x, y)), ("*", minus, sin(x), cos(y)), ("*", minus, cos(x), sin(y))),
            ("+", cos(("*", num(2), x)), minus, ("*", num(2), ("^", sin(x), two))),
            ("+", ("^", ("f", "cosh", x), two), ("*", minus, ("^", ("f", "sinh", x), two)), minus),
            ("+", ("*", ("f", "exp", x), ("f", "exp", ("*", minus, x))), minus),
            ("+", ("^", ("f", "sqrt", p), two), ("*", minus, p)),
            ("+", ("^", p, Fraction(3, 2)), ("*", minus, p, ("f", "sqrt", p))),
            ("+", ("^", ("+", x, y), two), ("*", minus, ("^", x, two)), ("*", num(-2), x, y), ("*", minus, ("^", y, two))),
            ("+", ("f", "tan", x), ("*", minus, sin(x), ("^", cos(x), Fraction(-1)))),
            ("+", ("*", p, ("^", p, Fraction(-1))), minus)])

    def draw(self):
        r = self.rng
        for i, q in enumerate(self.coords):
            mass = r.choice([self.parameter(), num(r.randint(1, 4))])
            self.terms.append(("kinetic", f"T_{i + 1}", ("*", num(Fraction(1, 2)), mass, ("^", ("v", q), Fraction(2)))))
        for i in range(r.randint(1, 2)):
            self.terms.append(("kinetic", f"mixed_{i + 1}", r.choice([
                ("*", num(Fraction(1, r.randint(4, 9))), self.function(1), ("v", r.choice(self.coords)), ("v", r.choice(self.coords))),
                ("*", num(Fraction(1, r.randint(4, 9))), ("^", self.speed(), Fraction(2)), ("^", self.positive(self.place()), Fraction(-1))),
                ("*", num(Fraction(1, r.randint(9, 20))), ("^", self.speed(), Fraction(r.choice([3, 4])))),
                ("*", self.parameter(), ("^", self.positive(self.speed()), Fraction(1, 2)))])))
        if r.random() < 0.4:
            name = "X" if "X" not in self.coords else "Y"
            body = ("+", self.function(1), ("*", self.parameter(), ("q", r.choice(self.coords))))
            self.lets.append((name, body))
            self.terms.append(("kinetic", "point", ("*", num(Fraction(1, 8)), ("^", ("D", ("let", name, body)), Fraction(2)))))
        for i in range(r.randint(1, 3)):
            self.terms.append(("potential", f"V_{i + 1}", ("*", self.coefficient(), self.parameter(), self.function(2))))
        if r.random() < 0.5:
            f = self.function(1)
            exact = r.random() < 0.4
            self.terms.append(("lagrangian", "gyro", ("D", f) if exact else ("*", self.coefficient(), f, ("v", r.choice(self.coords)))))
        if r.random() < 0.35:
            on = r.choice([("q", self.coords[0]), ("+", ("q", self.coords[1]), ("*", num(-1), ("q", self.coords[0]))),
                           ("f", "sin", ("q", self.coords[0])), ("v", self.coords[-1]),
                           ("+", ("v", self.coords[0]), ("*", num(-2), ("v", self.coords[1])))])
            self.forces.append(("push", on, ("*", self.coefficient(), self.parameter(), r.choice([self.function(1), ("f", "tanh", ("v", self.coords[0]))]))))
        if r.random() < 0.35:
            self.losses.append(("drag", r.choice([
                ("*", num(Fraction(1, 2)), self.parameter(), ("^", self.speed(), Fraction(2))),
                ("*", num(Fraction(1, 4)), ("^", ("v", self.coords[0]), Fraction(4))),
                ("*", self.parameter(), ("f", "sqrt", self.positive(("v", self.coords[-1]))))])))
        if r.random() < 0.3:                       # a term that is zero, whatever it depends on
            self.terms.append((r.choice(["kinetic", "potential", "lagrangian"]), "nothing",
                               ("*", self.parameter(), r.choice([("q", r.choice(self.coords)), ("v", r.choice(self.coords)), self.function(0)]), self.hidden_zero())))
        zero, one = num(0), num(1)
        eta = dict.fromkeys(self.coords, zero)
        self.symmetries.append(("delay", one, eta))
        self.symmetries.append(("both", zero, {**eta, self.coords[0]: one, self.coords[1]: one}))
        self.symmetries.append(("last", zero, {**eta, self.coords[-1]: r.choice([one, ("q", self.coords[-1]), ("t",)])}))

    # -------------------------------------------------------- in the model language
    def text(self):
        w = Writer(self.rng)
        lines = [f"system {self.name}, dimensionless", f"coordinate {', '.join(self.coords)}", f"parameter {', '.join(self.params)}"]
        lines += ["function U(s)"] if self.unknown else []
        lines += [f"let {n} = {w.sum(e)}" for n, e in self.lets]
        lines += [f"{k} {n} = {w.sum(e)}" for k, n, e in self.terms]
        lines += [f"dissipation {n} = {w.sum(e)}" for n, e in self.losses]
        lines += [f"force {n} on {w.sum(on)} = {w.sum(e)}" for n, on, e in self.forces]
        for name, tau, eta in self.symmetries:
            arrows = [f"{q} -> {q} + ε{'' if e == num(1) else ' ' + w.sum(e)}" for q, e in eta.items() if e != num(0)]
            arrows += ["t -> t + ε"] if tau == num(1) else []
            lines.append(f"symmetry {name}: {', '.join(arrows)}")
        return "\n".join(lines) + "\n"

    # -------------------------------------------------------- in SymPy
    def derive(self):
        build = Builder(self.coords)
        sign = {"kinetic": 1, "potential": -1, "lagrangian": 1}
        L = sp.Add(*[sign[k] * build(e) for k, _, e in self.terms])
        Q = [sp.Integer(0)] * len(self.coords)
        for _, on, e in self.forces:
            E = build(on)
            slots = build.v if E.has(*build.v) else build.q
            Q = add(Q, applied(build(e), E, slots))
        for _, e in self.losses:
            Q = add(Q, rayleigh(build(e), build.v))
        M = Motion((build.q, build.v, build.a), L, Q)
        parts = dict(momentum=M.momenta(), force=M.slopes(), equation=M.equations(),
                     mass=[x for row in M.mass_matrix() for x in row], energy=[M.energy()], energy_rate=[M.energy_rate()])
        for name, tau, eta in self.symmetries:
            V = M.variation(build(tau), [build(eta[q]) for q in self.coords])
            parts["variation " + name], parts["euler " + name] = [V], M.euler(V)
        return M, parts


def evaluate(M, parts, points):
    """The values of all parts at the points, from SymPy through one compiled function."""
    flat = [e for group in parts.values() for e in group]
    symbols = sorted(set().union(*[e.free_symbols for e in flat]), key=str)
    f = sp.lambdify(symbols, flat, modules="mpmath", cse=True)
    out = []
    for p in points:
        values = f(*[p[str(s).rstrip("'"), len(str(s)) - len(str(s).rstrip("'"))] for s in symbols])
        it = iter(values)
        out.append({k: [mp.mpmathify(next(it)) for _ in group] for k, group in parts.items()})
    return out


# ---------------------------------------------------------------- comparing
def vanishes(values):
    return all(abs(x) < sheets.TOLERANCE for group in values for x in group)


def compare(model, sheet, report):
    M, parts = model.derive()
    points = [sheets.Point(f"{model.name}/{k}") for k in range(3)]
    want = evaluate(M, parts, points)
    names = [str(q) for q in M.q]
    rows = program.by_name(sheet["coordinates"])
    if not report.check(list(rows) == names, "coordinates", f"{list(rows)} instead of {names}"):
        return
    for i, n in enumerate(names):
        for field in ("momentum", "force", "equation"):
            report.same(f"{field} of {n}", rows[n].get(field), [w[field][i] for w in want], points)
        cyclic = vanishes([[w["force"][i]] for w in want])
        report.check(rows[n].get("cyclic") == cyclic, f"cyclic {n}", f"{rows[n].get('cyclic')} instead of {cyclic}")
    for i in range(len(names)):
        for j in range(len(names)):
            report.same(f"mass matrix {i + 1},{j + 1}", sheet["mass_matrix"][i][j], [w["mass"][i * len(names) + j] for w in want], points)
    energy = sheet["energy"]
    report.same("energy function", energy.get("formula"), [w["energy"][0] for w in want], points)
    report.same("energy rate", energy.get("rate"), [w["energy_rate"][0] for w in want], points)
    kept = vanishes([w["energy_rate"] for w in want])
    report.check(energy.get("conserved") == kept or "undecided" in energy, "energy conserved", f"{energy.get('conserved')} instead of {kept}")
    verdicts(model, sheet, report, want, points)


def verdicts(model, sheet, report, want, points):
    claims = program.by_name(sheet["symmetries"])
    regular = all(sheets.on_motion(sheet, p) for p in points)
    for name, _, _ in model.symmetries:
        s = claims.get(name)
        if not report.check(s is not None, f"symmetry {name}", "missing"):
            continue
        V, E = (vanishes([w[f"{kind} {name}"] for w in want]) for kind in ("variation", "euler"))
        status = "exact" if V else "up_to_gauge" if E else "broken"
        if s["status"] == "undecided" or "undecided" in s:
            report.notes.append(f"{name} of {model.name}: undecided ({s.get('undecided')}), it is {status}")
            continue
        report.check(s["status"] == status, f"symmetry {name} status", f"{s['status']} instead of {status}")
        if regular:
            sheets.noether(report, sheet, s, points)


def one(job):
    command, seed, number, folder = job
    model = Model(seed, number)
    report = sheets.Report(model.name)
    path = os.path.join(folder, model.name + ".least")
    text = model.text()
    with open(path, "w", encoding="utf-8") as f:
        f.write(text)
    try:
        sheet = program.Program(command).sheet(path)
        wrong = program.errors(sheet)
        if report.check(not wrong, "no error", wrong[:2]):
            compare(model, sheet, report)
    except program.NoSheet as x:
        report.check(False, "sheet", x)
    except (KeyError, IndexError, TypeError, AttributeError) as x:
        report.check(False, "the sheet's form", f"{type(x).__name__} {x}")
    if report.failed:
        report.lines += ["    " + line for line in text.splitlines()]
    return report.passed, report.failed, report.lines, report.notes


def main(arguments=None):
    ap = argparse.ArgumentParser(description=__doc__.split("\n")[0])
    ap.add_argument("program")
    ap.add_argument("--count", type=int, default=500)
    ap.add_argument("--seed", default="1")
    ap.add_argument("--only", type=int)
    ap.add_argument("--keep", help="folder for the models")
    ap.add_argument("--show", type=int, default=5, help="how many failed models to print")
    o = ap.parse_args(arguments)
    numbers = [o.only] if o.only is not None else range(o.count)
    with tempfile.TemporaryDirectory() as scratch:
        folder = o.keep or scratch
        os.makedirs(folder, exist_ok=True)
        with multiprocessing.Pool(2) as pool:
            results = list(pool.imap(one, [(o.program, o.seed, k, folder) for k in numbers], chunksize=4))
    passed, failed = sum(r[0] for r in results), sum(r[1] for r in results)
    bad = [r for r in results if r[1]]
    for r in bad[:o.show]:
        print("\n".join(r[2]))
    if len(bad) > o.show:
        print(f"… and {len(bad) - o.show} more models with failures")
    notes = [n for r in results for n in r[3]]
    if notes:
        print(f"note: {len(notes)} verdicts undecided, such as {notes[0]}")
    print(f"{len(results)} models: {passed} passed, {failed} failed")
    return passed, failed


if __name__ == "__main__":
    sys.exit(1 if main()[1] else 0)
