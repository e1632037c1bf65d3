"""Gauge terms against numbers and against SymPy's integrals.

    gauges.py PROGRAM [--seed N] [--draws N]

`lagrangian W = z V` changes under z -> z + ε by V, so that its gauge term F has dF/dt = V. Checked at random points, with
40 digits: the table and drawn V = dF/dt, for which some F must be found. Of the table's integrands, whatever SymPy
integrates in closed form must be found too.
"""
import argparse
import multiprocessing
import os
import random
import sys
import tempfile

import mpmath as mp
import sympy as sp

import program
import sheets

HEAD = """coordinate x, y, z
coordinate φ: angle
parameter a, b, k
function U(r)
assume a > 0, b > a
kinetic T = 1/2*(x'^2 + y'^2 + z'^2 + φ'^2)
"""
RANGES = {"a": (0.5, 0.9), "b": (2.0, 3.0), "x": (1.0, 1.4), "y": (0.3, 0.9), "φ": (0.2, 1.2)}

# What stands before x', for SymPy in real x > 0.
TABLE = [
    "1/(x^2 + a^2)", "1/(x^2 + a^2)^2", "x/(x^2 + a^2)^2", "1/(x^2 - b^2)", "x^2/(x + a)", "1/(x*(x + a)^2)",
    "1/(x^3 + x)", "(x + 1)/(x^2 + x + 1)", "1/((x + a)*(x + b))", "x^3/(x^4 + 1)", "1/sqrt(x^2 + a^2)", "1/sqrt(b^2 - x^2)",
    "sqrt(x^2 + a^2)", "sqrt(b^2 - x^2)", "x^2/sqrt(x^2 + a^2)", "1/(x^2*sqrt(x^2 + a^2))", "x/(x^2 + a^2)^(3/2)",
    "1/(x^2 + a^2)^(3/2)", "sqrt(x + a)", "x*sqrt(x + a)", "1/(sqrt(x)*(x + a))", "x^2*exp(-a*x)", "x*exp(-x^2)",
    "exp(-a*x)*sin(b*x)", "x*cos(k*x)", "x^2*sin(x)", "sin(x)^3", "sin(x)^2*cos(x)^2", "cos(a*x)*cos(b*x)", "tan(x)",
    "tan(x)^2", "1/cos(x)^2", "1/sin(x)", "sin(x)/(2 + cos(x))", "log(x)", "x*log(x)", "log(x)/x", "log(x)^2", "1/(x*log(x))",
    "x*atan(x)", "atan(x/a)", "asin(x/b)", "x*asin(x/b)", "cosh(x)^2", "x*sinh(a*x)", "tanh(x)", "1/(1 + exp(x))",
    "exp(x)/(1 + exp(2*x))", "exp(-x^2)", "sin(x)/x", "exp(x)/x", "1/log(x)", "sqrt(1 + x^3)", "x^k", "exp(sin(x))*cos(x)",
    "cos(log(x))", "sqrt(x)*log(x)",
]

BLOCKS = [
    "x", "y", "x*y", "t*x", "1/(x + a)", "1/(x^2 + y^2)", "sqrt(x^2 + y^2)", "(x^2 + y^2)^(-3/2)", "sin(φ)", "cos(2*φ)",
    "sin(φ - a*t)", "exp(-a*t)", "exp(x/a)", "log(x^2 + y^2)", "atan(x/a)", "atan2(y, x)", "cosh(y)", "U(x)",
    "U(sqrt(x^2 + y^2))", "asin(x/b)", "tan(φ)", "sqrt(x)", "x^k",
]


def model(v):
    return HEAD + f"lagrangian W = z*({v})\nsymmetry lift: z -> z + ε\n"


def gauge(prog, v, folder):
    path = os.path.join(folder, "model.least")
    with open(path, "w", encoding="utf-8") as f:
        f.write(model(v))
    sheet = prog.sheet(path)
    bad = program.errors(sheet)
    if bad:
        raise program.NoSheet("; ".join(bad)[:300])
    s = program.by_name(sheet["symmetries"])["lift"]
    return s["status"], s.get("gauge")


def compare(report, v, status, f, must):
    if not report.check(status in ("up_to_gauge", "exact"), f"status for V = {v}", status):
        return
    if f is None or status == "exact":
        report.check(not must or status == "exact", f"F for V = {v}", "no closed form found")
        return
    points = [sheets.Point(f"gauge {k}", RANGES) for k in range(3)]
    F, V = sheets.Formula.of(f), sheets.Formula.of(v)
    for p in points:
        got, want = F.rate(p, ["x", "y", "z", "φ"]), V(p)
        if not abs(got - want) <= mp.mpf(10)**-25 * (1 + abs(want)):
            report.check(False, f"F for V = {v}", f"'{sheets.short(F.text)}' has the rate {mp.nstr(got, 8)}, not {mp.nstr(want, 8)}")
            return
    report.check(True, f"F for V = {v}")


def by_sympy(text, pipe):
    x, a, b = sp.symbols("x a b", positive=True)
    k = sp.Symbol("k", real=True)
    try:
        F = sp.integrate(sp.sympify(text.replace("^", "**"), locals={"x": x, "a": a, "b": b, "k": k}), x)
        known = (sp.sin, sp.cos, sp.tan, sp.asin, sp.acos, sp.atan, sp.atan2, sp.sinh, sp.cosh, sp.tanh, sp.exp, sp.log,
                 sp.Abs, sp.asinh, sp.acosh, sp.atanh, sp.acoth, sp.acsc, sp.asec)
        closed = not F.has(sp.Integral, sp.Piecewise, sp.I, sp.RootSum) and all(isinstance(f, known) for f in F.atoms(sp.Function))
        pipe.send(bool(closed))
    except Exception:                                   # SymPy's own failure is no verdict
        pipe.send(False)


def sympy_finds(text, seconds=8):
    ours, theirs = multiprocessing.Pipe()
    p = multiprocessing.Process(target=by_sympy, args=(text, theirs))
    p.start()
    found = ours.recv() if ours.poll(seconds) else False
    p.kill()
    p.join()
    return found


def drawn(rng):
    """V = dF/dt of a sum of products, written by SymPy: expanded or as it comes."""
    names = ["x", "y", "φ", "t"]
    symbols = {n: sp.Symbol(n, positive=n in "xy") for n in names + ["a", "b", "k"]}
    U = sp.Function("U")
    F = 0
    for _ in range(rng.randint(1, 3)):
        term = rng.choice([sp.Integer(2), sp.Rational(1, 3), symbols["k"], symbols["a"] / 2])
        for _ in range(rng.randint(1, 2)):
            term *= sp.sympify(rng.choice(BLOCKS).replace("^", "**"), locals={**symbols, "U": U})
        F += term
    F = F.subs(symbols["y"], symbols["y"])
    parts = []
    for n in names:
        d = sp.diff(F, symbols[n]).doit()
        if d != 0:
            if rng.random() < 0.5:
                d = sp.expand(d)
            text = plain_text(d)
            if text is None:
                return None
            parts.append(f"({text})" + ("" if n == "t" else f"*{n}'"))
    return " + ".join(parts) or None


def plain_text(e):
    r = sp.Wild("r")
    # U'(…) is a Subs or a Derivative: a name of its own keeps it printable.
    marks = {}
    for d in list(e.atoms(sp.Subs)) + list(e.atoms(sp.Derivative)):
        inner = d.point[0] if isinstance(d, sp.Subs) else d.expr.args[0]
        marks[d] = sp.Function("U_prime")(inner)
    e = e.xreplace(marks)
    if e.has(sp.Subs, sp.Derivative, r):
        return None
    return str(e).replace("**", "^").replace("U_prime(", "U'(")


def main(arguments=None):
    ap = argparse.ArgumentParser(description=__doc__.split("\n")[0])
    ap.add_argument("program")
    ap.add_argument("--seed", type=int, default=1)
    ap.add_argument("--draws", type=int, default=60)
    o = ap.parse_args(arguments)
    prog = program.Program(o.program)
    rng = random.Random(o.seed)
    table, draws = sheets.Report("table of integrals"), sheets.Report("drawn gauge terms")
    ours = theirs = 0
    with tempfile.TemporaryDirectory() as folder:
        for f in TABLE:
            v = f"({f})*x'"
            try:
                status, got = gauge(prog, v, folder)
            except program.NoSheet as x:
                table.check(False, v, x)
                continue
            must = sympy_finds(f)
            ours, theirs = ours + (got is not None), theirs + must
            compare(table, v, status, got, must)
        for _ in range(o.draws):
            v = drawn(rng)
            if v is None:
                continue
            try:
                compare(draws, v, *gauge(prog, v, folder), True)
            except program.NoSheet as x:
                draws.check(False, v, x)
    for r in (table, draws):
        print("\n".join(r.lines), end="\n" if r.lines else "")
    print(f"of {len(TABLE)} integrals {ours} found, {theirs} by SymPy")
    return table.passed + draws.passed, table.failed + draws.failed


if __name__ == "__main__":
    sys.exit(1 if main()[1] else 0)
