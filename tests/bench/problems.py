"""The speed problems, each as a model and as strings for a general-purpose library.

    problems.py FOLDER        writes NAME.least for each

Chains of n links (distinct masses and lengths), masses on a line with springs, gravitating bodies in space, the heavy top,
a central field in spherical coordinates. Strings: velocity of q is `v_q`, acceleration `a_q`; `^` is a power.
"""
import os
import sys


class Problem:
    """points: (mass, position components); kinetic: what is not a point's; claims: name → generator {q: η}, with `gauge`
    where L may change by a total derivative; `without` names parameters that are zero for the claim."""

    def __init__(self, name, coordinates, parameters, points, kinetic, potential, claims, model, statuses):
        self.statuses = dict(statuses, delay="exact")          # what the model's claims must come out as
        self.name, self.coordinates, self.parameters = name, coordinates, parameters
        self.points, self.kinetic, self.potential, self.claims, self.model = points, kinetic, potential, claims, model


class Claim:
    def __init__(self, name, generator, gauge=False, without=()):
        self.name, self.generator, self.gauge, self.without = name, generator, gauge, without


def plus(parts):
    return " + ".join(parts)


def links(n):
    one = range(1, n + 1)
    x = {i: plus(f"l{j}*sin(q{j})" for j in range(1, i + 1)) for i in one}
    y = {i: plus(f"-l{j}*cos(q{j})" for j in range(1, i + 1)) for i in one}
    model = f"""# A chain of {n} links in a plane.
system links_{n}, dimensionless
index i: 1..{n}
coordinate θ[i]: angle
parameter m[i], l[i], g
let P[i] = (sum(j in 1..i: l[j] sin θ[j]), -sum(j in 1..i: l[j] cos θ[j]))
kinetic   bobs   = sum(i: 1/2 m[i] |P[i]'|^2)
potential weight = sum(i: m[i] g P[i][2])
broken symmetry turn: θ[i] -> θ[i] + ε
symmetry delay: t -> t + ε
"""
    return Problem(f"links_{n}", [f"q{i}" for i in one], [f"m{i}" for i in one] + [f"l{i}" for i in one] + ["g"],
                   [(f"m{i}", (x[i], y[i])) for i in one], "0", plus(f"m{i}*g*({y[i]})" for i in one),
                   [Claim("turn", {f"q{i}": "1" for i in one}, without=["g"])], model, {"turn": "broken"})


def line(n):
    one = range(1, n + 1)
    model = f"""# {n} masses on a line, springs between neighbours.
system line_{n}, dimensionless
index i: 1..{n}
coordinate x[i]
parameter m[i], k[i]
kinetic   masses  = sum(i: 1/2 m[i] x[i]'^2)
potential springs = sum(i in 1..{n - 1}: 1/2 k[i] (x[i+1] - x[i])^2)
symmetry shift: x[i] -> x[i] + ε
symmetry delay: t -> t + ε
"""
    return Problem(f"line_{n}", [f"q{i}" for i in one], [f"m{i}" for i in one] + [f"k{i}" for i in range(1, n)],
                   [(f"m{i}", (f"q{i}",)) for i in one], "0", plus(f"1/2*k{i}*(q{i + 1} - q{i})^2" for i in range(1, n)),
                   [Claim("shift", {f"q{i}": "1" for i in one})], model, {"shift": "exact"})


def bodies(n):
    one = range(1, n + 1)
    pairs = [(i, j) for i in one for j in range(i + 1, n + 1)]
    model = f"""# {n} gravitating bodies in space.
system bodies_{n}, dimensionless
index i: 1..{n}
coordinate x[i], y[i], z[i]
parameter m[i], G
kinetic   bodies  = sum(i: 1/2 m[i] (x[i]'^2 + y[i]'^2 + z[i]'^2))
potential gravity = -sum(i in 1..{n - 1}: sum(j in i+1..{n}: G m[i] m[j]/sqrt((x[i] - x[j])^2 + (y[i] - y[j])^2 + (z[i] - z[j])^2)))
symmetry turn: (x[i], y[i]) -> (x[i] cos ε - y[i] sin ε, x[i] sin ε + y[i] cos ε)
symmetry east: x[i] -> x[i] + ε
symmetry north: y[i] -> y[i] + ε
symmetry up: z[i] -> z[i] + ε
symmetry boost: x[i] -> x[i] + ε t
symmetry delay: t -> t + ε
"""
    claims = [Claim("turn", {**{f"x{i}": f"-y{i}" for i in one}, **{f"y{i}": f"x{i}" for i in one}})]
    claims += [Claim("shift " + c, {f"{c}{i}": "1" for i in one}) for c in "xyz"]
    claims += [Claim("boost", {f"x{i}": "t" for i in one}, gauge=True)]
    return Problem(f"bodies_{n}", [f"{c}{i}" for i in one for c in "xyz"], [f"m{i}" for i in one] + ["G"],
                   [(f"m{i}", (f"x{i}", f"y{i}", f"z{i}")) for i in one], "0",
                   plus(f"-G*m{i}*m{j}/sqrt((x{i} - x{j})^2 + (y{i} - y{j})^2 + (z{i} - z{j})^2)" for i, j in pairs), claims, model,
                   dict(turn="exact", east="exact", north="exact", up="exact", boost="up_to_gauge"))


def top():
    model = """# The heavy symmetric top.
system top, dimensionless
coordinate φ, θ, ψ: angle
parameter I₁, I₃, m, l, g
kinetic   tilt   = 1/2 I₁ (θ'^2 + φ'^2 sin² θ)
kinetic   roll   = 1/2 I₃ (ψ' + φ' cos θ)^2
potential weight = m g l cos θ
symmetry precession: φ -> φ + ε
symmetry rolling: ψ -> ψ + ε
symmetry delay: t -> t + ε
"""
    return Problem("top", ["f", "h", "p"], ["I1", "I3", "m", "l", "g"], [],
                   "1/2*I1*(v_h^2 + v_f^2*sin(h)^2) + 1/2*I3*(v_p + v_f*cos(h))^2", "m*g*l*cos(h)",
                   [Claim("precession", {"f": "1"}), Claim("rolling", {"p": "1"})], model, dict(precession="exact", rolling="exact"))


def field():
    model = """# A particle in a central field, spherical coordinates.
system field, dimensionless
coordinate r
coordinate θ, φ: angle
parameter m, k, b
assume r > 0
let P = (r sin θ cos φ, r sin θ sin φ, r cos θ)
kinetic   body    = 1/2 m |P'|^2
potential central = -k/r + b r^2
symmetry azimuth: φ -> φ + ε
symmetry tip: θ -> θ - ε sin φ, φ -> φ - ε cos θ cos φ/sin θ
symmetry delay: t -> t + ε
"""
    return Problem("field", ["r", "h", "f"], ["m", "k", "b"], [("m", ("r*sin(h)*cos(f)", "r*sin(h)*sin(f)", "r*cos(h)"))], "0", "-k/r + b*r^2",
                   [Claim("azimuth", {"f": "1"}), Claim("tip", {"h": "-sin(f)", "f": "-cos(h)*cos(f)/sin(h)"})], model, dict(azimuth="exact", tip="exact"))


def problems():
    return ([links(n) for n in (2, 3, 4, 5, 6, 8, 10, 16, 24)] + [line(n) for n in (10, 100, 1000, 10_000)]
            + [bodies(n) for n in (2, 3, 4, 6, 8)] + [top(), field()])


def write(folder):
    os.makedirs(folder, exist_ok=True)
    for p in problems():
        with open(os.path.join(folder, p.name + ".least"), "w", encoding="utf-8") as f:
            f.write(p.model)


if __name__ == "__main__":
    write(sys.argv[1])
