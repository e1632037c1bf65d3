"""The example models, each Lagrangian written down again by hand, and every claim in them checked by SymPy alone.

    python examples.py            what the comments and claims of grammar/examples say, without the program
    python examples.py PROGRAM    also compares the program's sheets with it
"""
import os
import sys

import sympy as sp
from sympy.core.function import AppliedUndef

import plain
import program
import sheets
from kernel import Motion, add, coordinates, rayleigh, t
from random_lagrangians import evaluate

EXAMPLES = os.path.join(os.path.dirname(os.path.abspath(__file__)), "..", "..", "grammar", "examples")
half = sp.Rational(1, 2)
S = sp.Symbol


def sym(text):
    return sp.symbols(text)


def motion(names, build):
    """build(q, v) gives (L, Q) or L."""
    c = coordinates(names)
    r = build(c[0], c[1])
    L, Q = r if isinstance(r, tuple) else (r, None)
    return Motion(c, L, Q)


def of_time(name):
    return sp.Function(name)(t)


def seismometer():
    m, k, c = sym("m k c")
    M = motion("z", lambda q, v: (half * m * v[0]**2 - half * k * q[0]**2, [-m * of_time("a") - c * v[0]]))
    return M, dict(delay=(1, [0], "exact"), lift=(0, [1], ["spring"])), {}


def shaft_winch():
    m, J, a, g, c, F0, v0 = sym("m J a g c F0 v0")

    def build(q, v):
        (r, th, ph), (dr, dth, dph) = q, v
        L = half * m * (dr**2 + r**2 * dth**2 + r**2 * sp.sin(th)**2 * dph**2) + half * J * dr**2 / a**2 + m * g * r * sp.cos(th)
        return L, [-c * dr - F0 * sp.tanh(dr / v0), 0, 0]
    M = motion("r θ φ", build)
    return M, dict(azimuth=(0, [0, 0, 1], "exact"), delay=(1, [0] * 3, "exact"), drop=(0, [1, 0, 0], ["package", "weight"])), dict(
        spin=m * M.q[0]**2 * sp.sin(M.q[1])**2 * M.v[2])


def elastic_gravimeter():
    m, b, p, h, k, l0, c, g = sym("m b p h k l₀ c g")

    def build(q, v):
        s = sp.sqrt((p * sp.cos(q[0]))**2 + (h - p * sp.sin(q[0]))**2)     # foot to head
        return half * m * b**2 * v[0]**2 - half * k * (s - l0)**2 - m * (g + of_time("tide")) * b * sp.sin(q[0]), [-c * v[0]]
    M = motion("θ", build)
    return M, dict(delay=(1, [0], ["weight"]), tilt=(0, [1], ["spring", "weight"])), {}


def gimballed_rotor():
    A, C, Ag, Bg, J, m, d, g = sym("A C A_g B_g J m d g")

    def build(q, v):
        (al, be, ga), (da, db, dg) = q, v
        # angular velocity of the inner gimbal in its own axes, by adding the three rotations' axes by hand
        w1, w2, w3 = da * sp.cos(be), db, da * sp.sin(be)
        T = half * (A * (w1**2 + w2**2) + C * (w3 + dg)**2 + Ag * (w1**2 + w3**2) + Bg * w2**2 + J * da**2)
        return T + m * g * d * sp.cos(al) * sp.cos(be)
    M = motion("α β γ", build)
    return M, dict(run_on=(0, [0, 0, 1], "exact"), delay=(1, [0] * 3, "exact"), roll=(0, [1, 0, 0], ["weight"])), dict(
        axial=C * (M.v[2] + M.v[0] * sp.sin(M.q[1])), total=M.energy())


def moving_coil_geophone():
    m, k, c, L, R, Sh, K = sym("m k c L R S K")
    M = motion("z q", lambda q, v: (half * m * v[0]**2 + half * L * v[1]**2 - half * k * q[0]**2 + K * q[0] * v[1],
                                    [-c * v[0] - m * of_time("a"), -(R + Sh) * v[1]]))
    return M, dict(recharge=(0, [0, 1], "exact"), delay=(1, [0, 0], "exact"), lift=(0, [1, 0], ["spring"])), {}


def buoy_chain():
    k, km, c = sym("k k_m c")
    names = [f"x[{i}]" for i in range(1, 7)]

    def build(q, v):
        L = sum(half * S(f"m[{i + 1}]") * v[i]**2 for i in range(6))
        L -= sum(half * k * (q[i + 1] - q[i])**2 for i in range(5)) + half * km * (q[0]**2 + q[5]**2)
        return L, add([-c * x for x in v], [of_time("swell")] + [0] * 5)
    M = motion(names, build)
    return M, dict(delay=(1, [0] * 6, "exact"), drift=(0, [1] * 6, ["moorings"])), {}


def charged_drop():
    m, q_, B, V0, d, E, g = sym("m q B V₀ d E g")
    kappa = q_ * V0 / d**2

    def build(q, v):
        (x, y, z), (dx, dy, dz) = q, v
        return (half * m * (dx**2 + dy**2 + dz**2) + half * q_ * B * (x * dy - y * dx)
                - half * kappa * (z**2 - (x**2 + y**2) / 2) + q_ * E * z - m * g * z)
    M = motion("x y z", build)
    (x, y, z), (dx, dy, dz) = M.q, M.v
    return M, dict(turn=(0, [-y, x, 0], "exact"), delay=(1, [0] * 3, "exact"), slide=(0, [1, 0, 0], ["trap"], half * q_ * B * y)), dict(
        angular=m * (x * dy - y * dx) + half * q_ * B * (x**2 + y**2),
        bounce=half * m * dz**2 + half * kappa * z**2 + (m * g - q_ * E) * z)


def sampling_arm():
    Mc, m1, m2, l1, a1, a2, J1, J2, b, c, g = sym("M m₁ m₂ l₁ a₁ a₂ J₁ J₂ b c g")

    def build(q, v):
        (x, th1, th2), (dx, d1, d2) = q, v
        v1 = dx**2 + a1**2 * d1**2 + 2 * a1 * dx * d1 * sp.cos(th1)
        v2 = (dx**2 + l1**2 * d1**2 + a2**2 * d2**2 + 2 * l1 * dx * d1 * sp.cos(th1) + 2 * a2 * dx * d2 * sp.cos(th2)
              + 2 * l1 * a2 * d1 * d2 * sp.cos(th1 - th2))
        L = half * (Mc * dx**2 + m1 * v1 + m2 * v2 + J1 * d1**2 + J2 * d2**2)
        L += m1 * g * a1 * sp.cos(th1) + m2 * g * (l1 * sp.cos(th1) + a2 * sp.cos(th2))
        loss = half * b * dx**2 + half * c * d1**2 + half * c * (d2 - d1)**2
        u1, u2 = of_time("u₁"), of_time("u₂")
        return L, add(rayleigh(loss, v), [of_time("F"), u1 - u2, u2])
    M = motion("x θ₁ θ₂", build)
    return M, dict(along=(0, [1, 0, 0], "exact"), delay=(1, [0] * 3, "exact"),
                   swing=(0, [0, 1, 1], ["fore", "upper", "weights"])), {}


def tethered_buoys():
    m1, m2 = sym("m₁ m₂")
    U = sp.Function("U")

    def build(q, v):
        return (half * m1 * (v[0]**2 + v[1]**2) + half * m2 * (v[2]**2 + v[3]**2)
                - U(sp.sqrt((q[2] - q[0])**2 + (q[3] - q[1])**2)))
    M = motion("x₁ y₁ x₂ y₂", build)
    (x1, y1, x2, y2), (dx1, dy1, dx2, dy2) = M.q, M.v
    return M, dict(east=(0, [1, 0, 1, 0], "exact"), turn=(0, [-y1, x1, -y2, x2], "exact"),
                   boost=(0, [t, 0, t, 0], "up_to_gauge", m1 * x1 + m2 * x2), delay=(1, [0] * 4, "exact"),
                   push=(0, [1, 0, 0, 0], ["tether"])), dict(
        swirl=m1 * (x1 * dy1 - y1 * dx1) + m2 * (x2 * dy2 - y2 * dx2),
        centre=m1 * x1 + m2 * x2 - t * (m1 * dx1 + m2 * dx2))


def ballistic_gravimeter():
    m, g = sym("m g")
    M = motion("x y z", lambda q, v: half * m * (v[0]**2 + v[1]**2 + v[2]**2) - m * g * q[2])
    (x, y, z), (dx, dy, dz) = M.q, M.v
    return M, dict(slide=(0, [1, 0, 0], "exact"), turn=(0, [-y, x, 0], "exact"), lift=(0, [0, 0, 1], "up_to_gauge", -m * g * t),
                   hurry=(0, [0, 0, t], "up_to_gauge", m * z - half * m * g * t**2),
                   glide=(0, [t, 0, 0], "up_to_gauge", m * x), delay=(1, [0] * 3, "exact")), dict(
        start_speed=dz + g * t, start_height=z - dz * t - half * g * t**2, start_place=x - dx * t)


ALL = [seismometer, shaft_winch, elastic_gravimeter, gimballed_rotor, moving_coil_geophone, buoy_chain, charged_drop,
       sampling_arm, tethered_buoys, ballistic_gravimeter]


def zero(e):
    e = sp.sympify(e)
    return e == 0 or sp.simplify(sp.expand(e.doit())) == 0


def by_hand(build):
    """Checks the claims with SymPy alone. Yields (what, good)."""
    M, symmetries, conserved = build()
    for name, (tau, eta, status, *gauge) in symmetries.items():
        eta, tau = [sp.sympify(x) for x in eta], sp.sympify(tau)
        V = M.variation(tau, eta)
        if status == "exact":
            yield f"{name} is exact", zero(V)
        elif status == "up_to_gauge":
            yield f"{name} is a symmetry up to a gauge term", not zero(V) and zero(V - M.dt(gauge[0]))
        else:
            yield f"{name} is broken", any(not zero(e) for e in M.euler(V))
    for name, formula in conserved.items():
        yield f"{name} is conserved", zero(M.on_motion(formula))


def numbers(e):
    """Signals and their derivatives become symbols, U the fixed smooth function."""
    e = sp.sympify(e).replace(sp.Function("U"), lambda s: plain.smooth_value("U", (0,), (s,), sp)).doit()
    for f in sorted(e.atoms(sp.Function), key=str):
        if f.args == (t,) and isinstance(f, AppliedUndef):
            name = f.func.__name__
            e = e.subs(sp.diff(f, t, 2), S(name + "''")).subs(sp.diff(f, t), S(name + "'")).subs(f, S(name))
    return e


def against(program_, build):
    """The program's sheet of one example against the same by hand."""
    name = build.__name__
    report = sheets.Report(name)
    M, symmetries, conserved = build()
    try:
        sheet = program_.sheet(os.path.join(EXAMPLES, name + ".least"))
    except program.NoSheet as x:
        report.check(False, "sheet", x)
        return report
    loud = [f["message"] for f in sheet.get("findings", []) if f.get("severity") in ("error", "warning")]
    report.check(not loud, "no warning", loud[:3])
    names = [str(q) for q in M.q]
    signals = sorted({f.func.__name__ for e in [M.L] + M.Q for f in sp.sympify(e).atoms(AppliedUndef) if f.args == (t,)})
    parts = dict(momentum=M.momenta(), force=M.slopes(), equation=M.equations(), lagrangian=[M.L], energy=[M.energy()],
                 energy_rate=[M.energy_rate()], mass=[x for row in M.mass_matrix() for x in row])
    parts = {k: [numbers(e) for e in group] for k, group in parts.items()}
    points = [sheets.Point(f"{name}/{k}", {"h": (2, 3), "p": (0.5, 1)}) for k in range(3)]
    want = evaluate(M, parts, points)
    rows = program.by_name(sheet.get("coordinates"))
    if not report.check(list(rows) == names, "coordinates", f"{list(rows)} instead of {names}"):
        return report
    for i, n in enumerate(names):
        for field in ("momentum", "force", "equation"):
            report.same(f"{field} of {n}", rows[n].get(field), [w[field][i] for w in want], points)
        for j in range(len(names)):
            report.same(f"mass matrix {i + 1},{j + 1}", sheets.dense(sheet)[i][j], [w["mass"][i * len(names) + j] for w in want], points)
    report.same("lagrangian", sheet["lagrangian"], [w["lagrangian"][0] for w in want], points)
    report.same("energy function", sheet["energy"]["formula"], [w["energy"][0] for w in want], points)
    report.same("energy rate", sheet["energy"].get("rate"), [w["energy_rate"][0] for w in want], points)
    claims, held = program.by_name(sheet["symmetries"]), program.by_name(sheet["conserved"])
    moving = all(sheets.on_motion(sheet, p) for p in points)
    for key, (_, _, status, *gauge) in symmetries.items():
        s = claims.get(key, {})
        report.check(s.get("status") == (status if isinstance(status, str) else "broken"), f"symmetry {key} status", s.get("status"))
        blamed = sorted(b["term"] for b in s.get("broken_by") or [])
        report.check(blamed == (sorted(status) if isinstance(status, list) else []), f"symmetry {key} broken_by", blamed)
        if gauge:
            gauges = evaluate(M, {"gauge": [numbers(gauge[0])]}, points)
            got = sheets.Formula.of(s["gauge"]) if s.get("gauge") else None
            off = [got(p) - g["gauge"][0] for p, g in zip(points, gauges)] if got else [0, 1]
            report.check(all(sheets.close(x, off[0]) for x in off), f"symmetry {key} gauge", s.get("gauge"))
        if moving and s:
            sheets.noether(report, sheet, s, points, signals)
    for key in conserved:
        report.check(held.get(key, {}).get("holds") is True, f"conserved {key}", held.get(key))
    return report


def main(arguments=None):
    arguments = sys.argv[1:] if arguments is None else arguments
    good = bad = 0
    for build in ALL:
        if arguments:
            report = against(program.Program(arguments[0]), build)
            good, bad = good + report.passed, bad + report.failed
            print("\n".join(report.lines), end="\n" if report.lines else "")
            continue
        for what, ok in by_hand(build):
            good, bad = good + ok, bad + (not ok)
            if not ok:
                print(f"FAIL {build.__name__}: {what}")
    print(f"{len(ALL)} examples: {good} passed, {bad} failed")
    return good, bad


if __name__ == "__main__":
    sys.exit(1 if main()[1] else 0)
