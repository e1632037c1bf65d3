"""Main results against published worked examples.

    textbook.py PROGRAM [--only MODEL]

Each entry names the source, the model in models/, and what the source says, rewritten in the names of the model and the
plain form. Formulas are compared at random points with 40 digits; a charge up to a constant factor.
[GPS] Goldstein, Poole, Safko, Classical Mechanics, 3rd ed. [LL] Landau, Lifshitz, Mechanics, 3rd ed.
"""
import argparse
import os
import sys

import mpmath as mp

import program
import sheets

MODELS = os.path.join(os.path.dirname(os.path.abspath(__file__)), "models")

TEXTBOOK = [
    ("symmetric_top", "GPS section 5.7", {
        "lagrangian": "I₁*(θ'^2 + φ'^2*sin(θ)^2)/2 + I₃*(ψ' + φ'*cos(θ))^2/2 - m*g*l*cos(θ)",
        "momentum ψ": "I₃*(ψ' + φ'*cos(θ))",
        "momentum φ": "(I₁*sin(θ)^2 + I₃*cos(θ)^2)*φ' + I₃*ψ'*cos(θ)",
        "energy": "I₁*(θ'^2 + φ'^2*sin(θ)^2)/2 + I₃*(ψ' + φ'*cos(θ))^2/2 + m*g*l*cos(θ)",
        "cyclic": "φ ψ", "energy conserved": True, "holds p_ψ": True, "holds p_φ": True,
        "status nodding": "broken"}),
    ("two_link_pendulum", "LL section 5, problem 1", {
        "lagrangian": "(m₁ + m₂)*l₁^2*φ₁'^2/2 + m₂*l₂^2*φ₂'^2/2 + m₂*l₁*l₂*φ₁'*φ₂'*cos(φ₁ - φ₂)"
                      " + (m₁ + m₂)*g*l₁*cos(φ₁) + m₂*g*l₂*cos(φ₂)",
        "equation φ₂": "m₂*l₂^2*φ₂'' + m₂*l₁*l₂*(φ₁''*cos(φ₁ - φ₂) - φ₁'^2*sin(φ₁ - φ₂)) + m₂*g*l₂*sin(φ₂)",
        "energy conserved": True}),
    ("sliding_support", "LL section 5, problem 2", {
        "lagrangian": "(m₁ + m₂)*x'^2/2 + m₂*(l^2*φ'^2 + 2*l*x'*φ'*cos(φ))/2 + m₂*g*l*cos(φ)",
        "status slide": "exact", "holds push": True}),
    ("sliding_support", "LL section 14, problem 3: the momentum along x", {
        "charge slide": "(m₁ + m₂)*x' + m₂*l*φ'*cos(φ)", "rate slide": "0"}),
    ("circling_support", "LL section 5, problem 3 (a), less a total derivative: the equation of motion", {
        "equation φ": "m*l^2*φ'' - m*l*a*γ^2*cos(φ - γ*t) + m*g*l*sin(φ)", "status delay": "broken", "energy conserved": False}),
    ("governor", "LL section 5, problem 4", {
        "lagrangian": "m₁*a^2*(θ'^2 + Ω^2*sin(θ)^2) + 2*m₂*a^2*θ'^2*sin(θ)^2 + 2*(m₁ + m₂)*g*a*cos(θ)",
        "energy conserved": True}),
    ("rod_pendulum", "LL section 14, problem 1", {
        "energy": "m*l^2*(θ'^2 + φ'^2*sin(θ)^2)/2 - m*g*l*cos(θ)", "momentum φ": "m*l^2*φ'*sin(θ)^2",
        "charge azimuth": "m*l^2*φ'*sin(θ)^2", "energy conserved": True}),
    ("cone_slider", "LL section 14, problem 2", {
        "energy": "m*(r'^2 + r^2*φ'^2*sin(α)^2)/2 + m*g*r*cos(α)", "momentum φ": "m*r^2*sin(α)^2*φ'",
        "energy conserved": True}),
    ("field_charge", "GPS section 1.5, equations 1.63 to 1.66, and section 8.1: the canonical momentum m v + q A", {
        "momentum x": "m*x' - q*B*y/2", "momentum y": "m*y' + q*B*x/2",
        "equation x": "m*x'' - q*B*y' + q*V'[1](x, y, z)", "equation y": "m*y'' + q*B*x' + q*V'[2](x, y, z)",
        "energy": "m*(x'^2 + y'^2 + z'^2)/2 + q*V(x, y, z)", "energy conserved": True}),
    ("uniform_field", "LL (Classical Theory of Fields, 4th ed.) section 21: the constants of a uniform magnetic field", {
        "status east": "up_to_gauge", "charge east": "m*x' - q*B*y", "gauge east": "q*B*y/2",
        "status north": "up_to_gauge", "charge north": "m*y' + q*B*x",
        "status turn": "exact", "charge turn": "m*(x*y' - y*x') + q*B*(x^2 + y^2)/2",
        "holds centre_x": True, "holds centre_y": True}),
    ("kepler_orbit", "GPS section 3.9, equation 3.82: the Laplace-Runge-Lenz vector", {
        "holds A_x": True, "holds A_y": True, "holds angular": True, "status turn": "exact",
        "charge turn": "m*(x*y' - y*x')"}),
    ("kepler_orbit", "LL section 10: lengths times a², times times a³ leaves the equations, not the action", {
        "status dilate": "broken", "status shift": "broken"}),
    ("central_motion", "GPS section 3.2, equations 3.6 to 3.12", {
        "momentum θ": "m*r^2*θ'", "equation r": "m*r'' - m*r*θ'^2 + V'(r)", "holds areal": True,
        "equation θ": "m*r^2*θ'' + 2*m*r*r'*θ'", "energy": "m*(r'^2 + r^2*θ'^2)/2 + V(r)"}),
    ("rotating_wire", "GPS section 1.6, example 3, and section 2.7: the energy function is not the energy", {
        "lagrangian": "m*(r'^2 + r^2*ω^2)/2", "equation r": "m*r'' - m*r*ω^2",
        "energy": "m*r'^2/2 - m*r^2*ω^2/2", "energy conserved": True}),
    ("pulley_pair", "GPS section 1.6, example 2, equation for Atwood's machine", {
        "equation x": "(M₁ + M₂)*x'' - (M₁ - M₂)*g"}),
    ("moving_cart", "GPS section 2.7, the spring on the moving cart", {
        "energy": "m*x'^2/2 + k*(x - v₀*t)^2/2", "energy conserved": False, "energy rate": "-k*v₀*(x - v₀*t)",
        "equation x": "m*x'' + k*(x - v₀*t)", "status ride": "exact", "rate ride": "0",
        "charge ride": "m*v₀*x' - m*x'^2/2 - k*(x - v₀*t)^2/2"}),
    ("turning_ground", "LL section 39, problem 3", {
        "equation x": "m*(x'' + ω^2*x - 2*Ω*y')", "equation y": "m*(y'' + ω^2*y + 2*Ω*x')", "status turn": "exact"}),
    ("rotating_frame", "LL section 39, equations 39.6 to 39.11", {
        "lagrangian": "m*(x'^2 + y'^2 + z'^2)/2 + m*Ω*(x*y' - y*x') + m*Ω^2*(x^2 + y^2)/2 - U(x, y, z)",
        "equation x": "m*x'' + U'[1](x, y, z) - 2*m*Ω*y' - m*Ω^2*x",
        "energy": "m*(x'^2 + y'^2 + z'^2)/2 - m*Ω^2*(x^2 + y^2)/2 + U(x, y, z)", "energy conserved": True}),
    ("coupled_pair", "LL section 23, problem 1", {
        "equation x": "x'' + ω₀^2*x - α*y", "equation y": "y'' + ω₀^2*y - α*x"}),
    ("helix_field", "LL section 9, problem 3 (i), the homogeneous helix: M_z + P_z h/2π", {
        "status screw": "exact", "charge screw": "m*r^2*φ' + m*z'*h/(2*pi)", "rate screw": "0", "status lift": "broken"}),
    ("relativistic", "GPS section 7.9", {
        "momentum x": "m*x'/sqrt(1 - x'^2/c^2)", "energy": "m*c^2/sqrt(1 - x'^2/c^2) + V(x)", "energy conserved": True}),
    ("rolling_cylinder", "LL section 32, problem 6", {
        "lagrangian": "3/4*μ*(R - a)^2*φ'^2 + μ*g*(R - a)*cos(φ)"}),
    ("sliding_top", "LL section 35, the top on a smooth plane: kinetic energy by Koenig's theorem", {
        "momentum θ": "(I₁ + μ*l^2*sin(θ)^2)*θ'", "momentum ψ": "I₃*(ψ' + φ'*cos(θ))", "status slide": "exact",
        "momentum φ": "(I₁*sin(θ)^2 + I₃*cos(θ)^2)*φ' + I₃*ψ'*cos(θ)", "cyclic": "x y φ ψ"}),
    ("growing_lagrangian", "GPS, exercises to chapter 2: damping from a factor exp(γ t)", {
        "equation q": "exp(γ*t)*(m*q'' + m*γ*q' + k*q)", "status shrink": "exact", "rate shrink": "0",
        "charge shrink": "-exp(γ*t)*(m*q'^2/2 + k*q^2/2 + m*γ*q*q'/2)", "status delay": "broken"}),
    ("rayleigh_drag", "GPS section 1.5, equation 1.70 and after: the energy is lost at the rate 2ℱ", {
        "energy rate": "-a*(x'^2 + y'^2) - b*(x' - y')^2", "equation x": "m*x'' + k*(x - y) + a*x' + b*(x' - y')",
        "rate shift": "-a*(x' + y')", "status shift": "exact", "energy conserved": False}),
]


def look(sheet, what):
    """The field of the sheet that the entry speaks of."""
    kind, _, name = what.partition(" ")
    if what == "lagrangian":
        return sheet["lagrangian"]
    if kind == "cyclic":
        return " ".join(c["name"] for c in sheet["coordinates"] if c["cyclic"])
    if kind == "energy":
        return sheet["energy"][name or "formula"]
    if kind in ("momentum", "equation", "force"):
        return program.by_name(sheet["coordinates"])[name][kind]
    if kind == "holds":
        return program.by_name(sheet["conserved"])[name].get("holds", "undecided")
    return program.by_name(sheet["symmetries"])[name][kind]


def check(report, sheet, expected, names):
    """One entry. A charge's factor is taken from the first point and has to fit its rate's and the other points."""
    points = [sheets.Point(f"{report.name}/{k}", {"x'": (0.1, 0.4), "c": (2, 3)}) for k in range(4)]
    for what, value in expected.items():
        try:
            got = look(sheet, what)
        except (KeyError, TypeError) as x:
            report.check(False, what, f"missing ({x})")
            continue
        if not isinstance(value, str) or what.startswith(("cyclic", "status")):
            report.check(got == value, what, f"{got} instead of {value}")
            continue
        want = [sheets.Formula.of(value)(p) for p in points]
        if what.startswith("charge"):
            factor = sheets.Formula.of(got)(points[0]) / want[0]
            want = [factor * w for w in want]
            report.check(abs(mp.im(factor)) < sheets.TOLERANCE and factor != 0 and constant(got, value, names), f"{what}: constant factor")
        report.same(what, got, want, points)


def constant(got, value, names):
    """The factor between both stays when all parameters are drawn anew."""
    pair = [sheets.Formula.of(got), sheets.Formula.of(value)]
    ratios = [pair[0](p) / pair[1](p) for p in (sheets.Point(k) for k in "ab")]
    return sheets.close(ratios[0], ratios[1])


def run(command, only=None):
    prog, reports = program.Program(command), []
    known = {}
    for model, source, expected in TEXTBOOK:
        if only and only != model:
            continue
        report = sheets.Report(f"{model} [{source}]")
        reports.append(report)
        if model not in known:
            try:
                known[model] = prog.sheet(os.path.join(MODELS, model + ".least"))
            except program.NoSheet as x:
                known[model] = str(x)
        sheet = known[model]
        if isinstance(sheet, str):
            report.check(False, "sheet", sheet)
            continue
        wrong = program.errors(sheet)
        if report.check(not wrong, "no error", wrong[:2]):
            try:
                check(report, sheet, expected, [c["name"] for c in sheet["coordinates"]])
            except (KeyError, TypeError, AttributeError) as x:
                report.check(False, "the sheet's form", f"{type(x).__name__} {x}")
    return reports


def main(arguments=None):
    ap = argparse.ArgumentParser(description=__doc__.split("\n")[0])
    ap.add_argument("program")
    ap.add_argument("--only")
    o = ap.parse_args(arguments)
    reports = run(o.program, o.only)
    for r in reports:
        for line in r.lines:
            print(line)
    passed, failed = sum(r.passed for r in reports), sum(r.failed for r in reports)
    print(f"{len(reports)} worked examples: {passed} passed, {failed} failed")
    return passed, failed


if __name__ == "__main__":
    sys.exit(1 if main()[1] else 0)
