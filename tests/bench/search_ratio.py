"""CPU time of SymPy and of the program for the same search, in the same run.

    search_ratio.py PROGRAM [--most 0.01] [--reps 3]

Unknown generators, polynomial in t and in four coordinates up to degree 2: 105 unknowns. SymPy sets up the determining
equations (the Euler operator of the variation, split into coefficients of the jets by `Poly`) and solves them by `linsolve`;
for comparison also with its fastest polynomials, `sympy.polys.rings`, and `DomainMatrix.nullspace`. The program's search
runs the whole way: ansatz, nullspace, confirmation by the zero test, charges, and the integrals quadratic in the velocities;
the same sheet without the search is taken off. All find the same number of symmetries. The machine is shared: only ratios
within one run mean anything.
"""
import argparse
import itertools
import json
import os
import resource
import statistics
import subprocess
import sys
import tempfile
import time

MODELS = {
    # Two buoys in the plane, joined by a line.
    "pair": ("""system pair
parameter m₁, m₂, k
coordinate x, y, u, v
kinetic first = 1/2 m₁ (x'² + y'²)
kinetic second = 1/2 m₂ (u'² + v'²)
potential line = 1/2 k ((x − u)² + (y − v)²)
""", ["x", "y", "u", "v"],
        "(m1*(x1**2 + y1**2) + m2*(u1**2 + v1**2) - k*((x - u)**2 + (y - v)**2))/2", ["m1", "m2", "k"]),
    # Four equal gauges, each with a spring of its own kind.
    "gauges": ("""system gauges
parameter m, k
coordinate x, y, u, v
kinetic motion = 1/2 m (x'² + y'² + u'² + v'²)
potential springs = 1/2 k (x² + y² + u² + v²)
""", ["x", "y", "u", "v"],
        "(m*(x1**2 + y1**2 + u1**2 + v1**2) - k*(x**2 + y**2 + u**2 + v**2))/2", ["m", "k"]),
}


def by_equations(coordinates, lagrangian, parameters, degree):
    """The numbers of unknowns and of independent generators, as one would ask SymPy."""
    from sympy import Add, Mul, Poly, Symbol, expand, linsolve, symbols, sympify

    t = Symbol("t")
    q, v, a = (symbols([c + mark for c in coordinates]) for mark in ("", "1", "2"))
    L = sympify(lagrangian)
    powers = [p for p in itertools.product(range(degree + 1), repeat=len(q) + 1) if sum(p) <= degree]
    unknowns, components = [], []
    for i in range(len(q) + 1):
        c = symbols(f"c{i}_0:{len(powers)}")
        unknowns += c
        components.append(Add(*[k * Mul(*[x**n for x, n in zip([t, *q], p)]) for k, p in zip(c, powers)]))
    tau, eta = components[0], components[1:]

    def rate(f):
        return f.diff(t) + Add(*[f.diff(x) * w + f.diff(w) * b for x, w, b in zip(q, v, a)])

    V = L.diff(t) * tau + L * rate(tau)
    V += Add(*[L.diff(x) * e + L.diff(w) * (rate(e) - w * rate(tau)) for x, w, e in zip(q, v, eta)])
    equations = []
    for x, w in zip(q, v):
        equations += Poly(expand(V.diff(x) - rate(V.diff(w))), t, *q, *v, *a).coeffs()
    (solution,) = linsolve(equations, unknowns)
    return len(unknowns), len(set().union(*[e.free_symbols for e in solution]) & set(unknowns))


def by_rings(coordinates, lagrangian, parameters, degree):
    """The same with SymPy's fastest polynomials."""
    from sympy import QQ, Poly, symbols, sympify
    from sympy.polys.matrices import DomainMatrix
    from sympy.polys.rings import ring

    n = len(coordinates)
    names = ["t", *coordinates, *(q + "1" for q in coordinates), *(q + "2" for q in coordinates)]
    field = QQ.frac_field(*symbols(parameters))
    jets, *generators = ring(names, field)
    t, q, v, a = generators[0], generators[1:n + 1], generators[n + 1:2 * n + 1], generators[2 * n + 1:]
    L = jets.from_dict(dict(Poly(sympify(lagrangian), *symbols(names), domain=field).rep.to_dict()))

    def rate(f):
        out = f.diff(t)
        for x, dx, ddx in zip(q, v, a):
            out += f.diff(x) * dx + f.diff(dx) * ddx
        return out

    slopes, momenta = [L.diff(x) for x in q], [L.diff(w) for w in v]
    columns = []
    powers = [p for p in itertools.product(range(degree + 1), repeat=n + 1) if sum(p) <= degree]
    for p in powers:
        f = jets.one
        for x, k in zip([t, *q], p):
            f *= x**k
        for i in range(-1, n):
            if i < 0:
                stretch = rate(f)
                V = L.diff(t) * f + L * stretch
                for w, m in zip(v, momenta):
                    V -= m * w * stretch
            else:
                V = slopes[i] * f + momenta[i] * rate(f)
            column = {}
            for k in range(n):
                residual = V.diff(q[k]) - rate(V.diff(v[k]))
                column.update({(k, monomial): c for monomial, c in residual.items()})
            columns.append(column)
    rows = {key: r for r, key in enumerate(dict.fromkeys(key for c in columns for key in c))}
    entries = {}
    for j, column in enumerate(columns):
        for key, c in column.items():
            entries.setdefault(rows[key], {})[j] = c
    matrix = DomainMatrix(entries, (len(rows), len(columns)), field)
    return len(columns), matrix.nullspace().shape[0]


def spent(work):
    before = resource.getrusage(resource.RUSAGE_CHILDREN)
    result = work()
    after = resource.getrusage(resource.RUSAGE_CHILDREN)
    return after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime, result


def in_child(work):
    """Runs work() in a forked process: the library's caches are empty in each."""
    reading, writing = os.pipe()
    pid = os.fork()
    if pid == 0:
        status = 1
        try:
            begin = time.process_time()
            result = work()
            os.write(writing, json.dumps([time.process_time() - begin, result]).encode())
            status = 0
        finally:
            os._exit(status)
    os.close(writing)
    with os.fdopen(reading) as f:
        text = f.read()
    os.waitpid(pid, 0)
    return json.loads(text)


def searched(program, path, degree, runs):
    """CPU seconds of one run, the mean of several; and the sheet."""
    command = [program, "sheet", "--as", "json", "--search", degree, path]
    seconds, sheet = 0.0, None
    for _ in range(runs):
        once, done = spent(lambda: subprocess.run(command, check=True, capture_output=True))
        seconds += once
        sheet = json.loads(done.stdout)
    return seconds / runs, sheet


def main():
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("program")
    parser.add_argument("--most", type=float, help="fail where the ratio to the equations of SymPy is larger")
    parser.add_argument("--reps", type=int, default=3)
    parser.add_argument("--runs", type=int, default=25)
    arguments = parser.parse_args()
    passed = failed = 0
    for name, (text, coordinates, lagrangian, parameters) in MODELS.items():
        with tempfile.NamedTemporaryFile("w", suffix=".least", delete=False) as f:
            f.write(text)
        ways = {}
        for way in (by_equations, by_rings):
            found = [in_child(lambda: way(coordinates, lagrangian, parameters, 2)) for _ in range(arguments.reps)]
            ways[way.__name__] = statistics.median(s for s, _ in found), found[0][1]
        own = []
        for _ in range(arguments.reps):
            whole, sheet = searched(arguments.program, f.name, "2", arguments.runs)
            without, _ = searched(arguments.program, f.name, "no", arguments.runs)
            own.append(whole - without)
        os.unlink(f.name)
        own = statistics.median(own)
        symmetries = sum(1 for item in sheet["found"]["items"] if item["generator"])
        (plain, (unknowns, n)), (rings, (_, m)) = ways["by_equations"], ways["by_rings"]
        ratio = own / plain
        right = n == m == symmetries and (arguments.most is None or ratio <= arguments.most)
        passed, failed = passed + right, failed + (not right)
        print(
            f"{name}: {unknowns} unknowns, {n} symmetries, {symmetries} found; SymPy {plain * 1e3:.0f} ms, its rings"
            f" {rings * 1e3:.0f} ms, leastwise {own * 1e3:.1f} ms with quadratic integrals: 1/{1 / ratio:.0f}"
            f" and 1/{rings / own:.0f}"
        )
    print(f"{passed} passed, {failed} failed")
    return 1 if failed else 0


if __name__ == "__main__":
    sys.exit(main())
