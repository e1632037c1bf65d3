"""Motions integrated by SciPy from the sheets: what is called conserved stays, the rest changes as its balance law says.

    motions.py PROGRAM [--only MODEL]

The accelerations come from the sheet's equations and mass matrix, DOP853 integrates them together with every rate on the
sheet. Checked, relative to the size of the quantity's summands: charges, energy function, momenta, `conserved` claims, and what a
search found.
"""
import argparse
import math
import os
import sys

import numpy as np
from scipy.integrate import solve_ivp

import plain
import program
import sheets
from model_file import ModelFile

HERE = os.path.dirname(os.path.abspath(__file__))
EXAMPLES = os.path.join(HERE, "..", "..", "grammar", "examples")
MODELS = os.path.join(HERE, "models")
LIMIT = 1e-8


def wave(amplitude, omega):
    """amplitude * sin(ω t + 0.4) and its derivatives."""
    return lambda t, order: amplitude * omega**order * math.sin(omega * t + 0.4 + order * math.pi / 2)


def tether(orders, args):
    """U(s) = 1/2 k (s - l)^2 with k = 60, l = 8."""
    s, n = args[0], orders[0]
    return [30 * (s - 8)**2, 60 * (s - 8), 60.0][n] if n < 3 else 0.0


# folder, model, run, seconds, further initial values, signals, functions, the claims' formulas in the plain form
RUNS = [
    (EXAMPLES, "seismometer", "release", 5, {}, {"a": wave(0.02, 2)}, {}, {}),
    (EXAMPLES, "shaft_winch", "sway", 4, {("θ", 1): 0.1, ("r", 1): -0.3}, {}, {}, {"spin": "m*r^2*sin(θ)^2*φ'"}),
    (EXAMPLES, "elastic_gravimeter", "settle", 60, {}, {"tide": wave(1e-3, 0.1)}, {}, {}),
    (EXAMPLES, "gimballed_rotor", "circle", 0.1, {("β", 0): 0.2, ("α", 1): 3.0, ("β", 1): -2.0}, {}, {},
     {"axial": "C*(γ' + α'*sin(β))"}),
    (EXAMPLES, "moving_coil_geophone", "tap", 0.05, {("z", 0): 1e-3, ("q", 1): 1e-5}, {"a": wave(0.05, 40)}, {}, {}),
    (EXAMPLES, "buoy_chain", "tug", 20, {("x[1]", 1): 0.2, ("x[5]", 0): -0.3}, {"swell": wave(150, 0.7)}, {}, {}),
    (EXAMPLES, "charged_drop", "orbit", 5, {("y", 1): 2e-3, ("x", 1): 1e-3}, {}, {},
     {"angular": "m*(x*y' - y*x') + q*B*(x^2 + y^2)/2", "bounce": "m*z'^2/2 + q*V₀/d^2*z^2/2 + (m*g - q*E)*z"}),
    (EXAMPLES, "sampling_arm", "lift", 3, {("x", 1): 0.1}, {"F": wave(30, 2), "u₁": wave(10, 3), "u₂": wave(4, 5)}, {}, {}),
    (EXAMPLES, "tethered_buoys", "whirl", 20, {("x₁", 1): 0.3, ("y₁", 0): -0.5}, {}, {"U": tether},
     {"swirl": "m₁*(x₁*y₁' - y₁*x₁') + m₂*(x₂*y₂' - y₂*x₂')", "centre": "m₁*x₁ + m₂*x₂ - t*(m₁*x₁' + m₂*x₂')"}),
    (EXAMPLES, "ballistic_gravimeter", "drop", 0.3, {("x", 1): 0.01, ("y", 0): 0.02, ("y", 1): -0.03, ("x", 0): 0.01}, {}, {},
     {"start_speed": "z' + g*t", "start_height": "z - z'*t - g*t^2/2", "start_place": "x - x'*t"}),
    (MODELS, "kepler_orbit", "ellipse", 20, {("x", 1): 0.2}, {}, {},
     {"A_x": "y'*m^2*(x*y' - y*x') - m*k*x/sqrt(x^2 + y^2)", "A_y": "-x'*m^2*(x*y' - y*x') - m*k*y/sqrt(x^2 + y^2)",
      "angular": "m*(x*y' - y*x')"}),
    (MODELS, "symmetric_top", "fast", 0.5, {("φ", 1): 2.0, ("θ", 1): 1.0}, {}, {},
     {"p_ψ": "I₃*(ψ' + φ'*cos(θ))", "p_φ": "(I₁*sin(θ)^2 + I₃*cos(θ)^2)*φ' + I₃*ψ'*cos(θ)"}),
    (MODELS, "two_link_pendulum", "swing", 3, {}, {}, {}, {}),
    (MODELS, "turning_ground", "swing", 60, {("y", 1): 0.1}, {}, {}, {}),
    (MODELS, "drifting_float", "drift", 10, {}, {}, {}, {}),
    (MODELS, "comet_in_space", "pass", 10, {}, {}, {}, {}),
    (MODELS, "gimballed_spring", "swing", 5, {}, {}, {}, {}),
    (MODELS, "rayleigh_drag", "apart", 10, {("y", 1): 0.3}, {}, {}, {}),
]


class Balance:
    """A quantity and its rate: the quantity must change by the integral of the rate."""

    def __init__(self, what, quantity, rate, conserved):
        self.what, self.tree, self.conserved = what, plain.read(quantity), conserved
        self.rate = plain.read(rate if rate is not None else "0")
        self.size = size_of(self.tree)


def size_of(tree):
    """The formula with every sum made a sum of absolute values: how large its parts are where they cancel."""
    if tree[0] == "add":
        return ("add", *[(1, size_of(x)) for _, x in tree[1:]])
    if tree[0] == "mul":
        return ("mul", *[(power, size_of(x) if power > 0 else x) for power, x in tree[1:]])
    if tree[0] == "neg":
        return size_of(tree[1])
    return ("call", "abs", (tree,))


def balances(sheet, claims):
    """All that the sheet says about constancy."""
    out = [Balance("energy function", sheet["energy"]["formula"], sheet["energy"].get("rate"), sheet["energy"]["conserved"])]
    for s in sheet["symmetries"]:
        rate = s["rate"]["plain"]
        out.append(Balance(f"charge of {s['name']}", s["charge"], s["rate"], rate == "0"))
    for c in sheet["coordinates"]:
        if c["momentum_conserved"]:
            out.append(Balance(f"momentum of {c['name']}", c["momentum"], None, True))
    for c in sheet["conserved"]:
        formula = c.get("formula") or claims.get(c["name"])
        if formula:
            out.append(Balance(f"claim {c['name']}", formula, c.get("rate"), c.get("holds")))
    for item in (sheet.get("found") or {}).get("items", []):
        out.append(Balance(f"found {item['name']}", item["charge"], None, True))
    return out


def integrate(sheet, file, run, seconds, extra, signals, functions, rows):
    """Returns, for each balance, the largest drift over size, and how far the quantity itself went over size."""
    names = [c["name"] for c in sheet["coordinates"]]
    n = len(names)
    matrix = plain.Function([plain.read(x) for row in sheets.dense(sheet) for x in row], plain.Floats)
    force = plain.Function([plain.read(c["equation"]) for c in sheet["coordinates"]], plain.Floats)
    rates = plain.Function([b.rate for b in rows], plain.Floats)
    values = plain.Function([b.tree for b in rows] + [b.size for b in rows], plain.Floats)

    def unknown(name, orders, args):
        return functions[name](orders, args)

    def leaf(key, t, y, a):
        name, order = key
        if name == "t":
            return t
        if name in signals:
            return signals[name](t, order)
        if name in names:
            i = names.index(name)
            return y[i] if order == 0 else y[n + i] if order == 1 else a[i]
        return file.parameters[name]

    def call(f, t, y, a):
        return f([leaf(key, t, y, a) for key in f.leaves], unknown)

    still = [0.0] * n

    def accelerations(t, y):
        M = np.array(call(matrix, t, y, still), dtype=float).reshape(n, n)
        return np.linalg.solve(M, -np.array(call(force, t, y, still), dtype=float))

    def right(t, y):
        a = accelerations(t, y)
        return np.concatenate([y[n:2 * n], a, call(rates, t, y, a)])

    start, _ = file.runs[run]
    y0 = np.zeros(2 * n)
    for (name, order), v in {**start, **extra}.items():
        if name in names:
            y0[names.index(name) + n * order] = v
    times = np.linspace(0, seconds, 40)

    def solve(fun, y, size):
        end = solve_ivp(fun, (0, seconds), y, method="DOP853", rtol=1e-12, atol=1e-13 * size, t_eval=times)
        if not end.success:
            raise ArithmeticError(end.message)
        return end

    # A first pass finds how large everything becomes, so that the second can be as accurate in each unit.
    rough = solve(lambda t, y: right(t, y)[:2 * n], y0, np.full(2 * n, 1e-3 * max(np.max(np.abs(y0)), 1e-3)))
    state = np.maximum(np.max(np.abs(rough.y), axis=1), 1e-3 * np.max(np.abs(y0)) + 1e-12)
    samples = [call(values, t, y, accelerations(t, y)) for t, y in zip(rough.t, rough.y.T)]
    weight = np.maximum.reduce([np.abs(v[len(rows):]) for v in samples]) + 1e-300
    end = solve(right, np.concatenate([y0, np.zeros(len(rows))]), np.concatenate([state, weight]))
    drift, went, first = np.zeros(len(rows)), np.zeros(len(rows)), np.array(samples[0][:len(rows)])
    for t, y in zip(end.t, end.y.T):
        change = np.array(call(values, t, y, accelerations(t, y))[:len(rows)]) - first
        drift = np.maximum(drift, np.abs(change - y[2 * n:]))
        went = np.maximum(went, np.abs(change))
    return drift / weight, went / weight


def check(prog, entry):
    folder, model, run, seconds, extra, signals, functions, claims = entry
    report = sheets.Report(model)
    path = os.path.join(folder, model + ".least")
    try:
        sheet = prog.sheet(path, search="2")
        wrong = program.errors(sheet)
        if not report.check(not wrong, "no error", wrong[:2]):
            return report
        rows = balances(sheet, claims)
        drift, went = integrate(sheet, ModelFile(path), run, seconds, extra, signals, functions, rows)
        for b, d, w in zip(rows, drift, went):
            if b.conserved:
                report.check(w < LIMIT, f"{b.what} is called conserved", f"it changes by {w:.2e} of its size")
            report.check(d < LIMIT, f"{b.what} follows its balance law", f"off by {d:.2e} of its size")
    except program.NoSheet as x:
        report.check(False, "sheet", x)
    except (plain.Unreadable, ArithmeticError, KeyError, ValueError, TypeError, IndexError, np.linalg.LinAlgError) as x:
        report.check(False, "the motion", f"{type(x).__name__} {x}")
    return report


def main(arguments=None):
    ap = argparse.ArgumentParser(description=__doc__.split("\n")[0])
    ap.add_argument("program")
    ap.add_argument("--only")
    o = ap.parse_args(arguments)
    prog = program.Program(o.program)
    reports = [check(prog, e) for e in RUNS if o.only in (None, e[1])]
    for r in reports:
        for line in r.lines:
            print(line)
    passed, failed = sum(r.passed for r in reports), sum(r.failed for r in reports)
    print(f"{len(reports)} motions: {passed} passed, {failed} failed")
    return passed, failed


if __name__ == "__main__":
    sys.exit(1 if main()[1] else 0)
