"""Comparing a sheet with numbers: random points, motions, and the laws that a symmetry's lines must obey."""
import random

import mpmath as mp

import plain

DIGITS = 40
mp.mp.dps = DIGITS + 20          # the last twenty are for cancellation and difference quotients
NUMBERS = plain.Digits()
TOLERANCE = mp.mpf(10)**-(DIGITS - 2)
STEP = mp.mpf(10)**-20           # of difference quotients: their error is about STEP²


def unknown(name, orders, args):
    return plain.smooth_value(name, orders, args, mp)


class Point(dict):
    """Values by (name, order); what is not there yet is drawn, the same for the same seed and name."""

    def __init__(self, seed, ranges=None):
        super().__init__()
        self.seed, self.ranges = seed, ranges or {}

    def __missing__(self, key):
        r = random.Random(f"{self.seed}:{key[0]}:{key[1]}")
        low, high = self.ranges.get(key[0], (0.3, 1.4)) if key[1] == 0 else (-0.9, 1.1)
        self[key] = mp.mpf(r.randint(int(low * 10**6), int(high * 10**6))) / 10**6
        return self[key]

    def moved(self, s, coordinates, signals=()):
        """The point a time s later on a path with these derivatives; `signals` are inputs."""
        p = Point(self.seed, self.ranges)
        p.update(self)
        p["t", 0] = self["t", 0] + s
        for name in coordinates:
            p[name, 0] = self[name, 0] + s * self[name, 1] + s * s / 2 * self[name, 2]
            p[name, 1] = self[name, 1] + s * self[name, 2]
        for name in signals:
            for k in range(3):
                p[name, k] = self[name, k] + s * self[name, k + 1]
        return p


class Formula:
    """One formula of the sheet as a function of a Point."""
    cache = {}

    def __init__(self, text):
        self.text = text["plain"] if isinstance(text, dict) else text
        self.function = plain.Function([plain.read(self.text)], NUMBERS)

    @classmethod
    def of(cls, text):
        key = text["plain"] if isinstance(text, dict) else text
        if key not in cls.cache:
            if len(cls.cache) > 4000:
                cls.cache.clear()
            cls.cache[key] = cls(key)
        return cls.cache[key]

    def __call__(self, point):
        return self.function([point[key] for key in self.function.leaves], unknown)[0]

    def order(self, names):
        """The highest time derivative of the given names in it."""
        return max((k for n, k in self.function.leaves if n in names), default=-1)

    def rate(self, point, coordinates, signals=()):
        """Its time derivative along the path through the point."""
        return (self(point.moved(STEP, coordinates, signals)) - self(point.moved(-STEP, coordinates, signals))) / (2 * STEP)


def close(a, b):
    return abs(a - b) <= TOLERANCE * (1 + abs(a) + abs(b))


def on_motion(sheet, point):
    """Sets the point's accelerations to those of the motion, from the sheet's own equations and mass matrix.

    Returns False where the mass matrix is singular. No constraints."""
    rows = sheet["coordinates"]
    names = [r["name"] for r in rows]
    for n in names:
        point[n, 2] = mp.mpf(0)
    M = mp.matrix([[Formula.of(x)(point) for x in row] for row in dense(sheet)])
    if abs(mp.det(M)) < mp.mpf(10)**-12:
        return False
    rhs = mp.matrix([-Formula.of(r["equation"])(point) for r in rows])
    for n, a in zip(names, mp.lu_solve(M, rhs)):
        point[n, 2] = a
    return True


def dense(sheet):
    M = sheet["mass_matrix"]
    if M and isinstance(M[0], dict):
        n = len(sheet["coordinates"])
        rows = [["0"] * n for _ in range(n)]
        for e in M:
            rows[e["row"]][e["column"]] = e["formula"]
        return rows
    return M


class Report:
    """Counts what was compared and keeps the lines of what failed."""

    def __init__(self, name):
        self.name, self.passed, self.failed, self.lines, self.notes = name, 0, 0, [], []

    def check(self, good, what, why=""):
        if good:
            self.passed += 1
        else:
            self.failed += 1
            self.lines.append(f"FAIL {self.name}: {what}{': ' + str(why) if why else ''}")
        return bool(good)

    def same(self, what, formula, values, points):
        """The formula of the sheet against the expected values at the points."""
        if formula is None:
            return self.check(False, what, "missing")
        try:
            f = Formula.of(formula)
            for p, v in zip(points, values):
                got = f(p)
                if not close(got, v):
                    return self.check(False, what, f"'{short(f.text)}' gives {mp.nstr(got, 12)} instead of {mp.nstr(v, 12)}")
            return self.check(True, what)
        except (plain.Unreadable, ArithmeticError, ValueError, TypeError, KeyError) as x:
            return self.check(False, what, f"{type(x).__name__} {x} in '{short(str(formula))}'")


def short(text):
    text = text if isinstance(text, str) else str(text)
    return text if len(text) < 100 else text[:97] + "..."


def noether(report, sheet, s, points, signals=()):
    """What must hold between a symmetry's charge, gauge term and rate, whatever the Lagrangian.

    The points must be on motions. dQ/dt along the motion is the rate; Q + F is Σ p (η − q' τ) + L τ up to a constant."""
    what = f"symmetry {s['name']}"
    rows = sheet["coordinates"]
    names = [r["name"] for r in rows]
    try:
        charge, rate = Formula.of(s["charge"]), Formula.of(s["rate"])
        gauge = Formula.of(s["gauge"]) if s.get("gauge") else None
        tau = Formula.of(s["generator"].get("t", "0"))
        eta = [Formula.of(s["generator"].get(n, "0")) for n in names]
        lagrangian = Formula.of(sheet["lagrangian"])
        momenta = [Formula.of(r["momentum"]) for r in rows]
        rests = []
        for p in points:
            got = charge.rate(p, names, signals)
            if not close_rate(got, rate(p)):
                return report.check(False, f"{what} rate", f"dQ/dt is {mp.nstr(got, 12)}, '{short(rate.text)}' is {mp.nstr(rate(p), 12)}")
            whole = lagrangian(p) * tau(p) + sum(m(p) * (n(p) - p[q, 1] * tau(p)) for m, n, q in zip(momenta, eta, names))
            rests.append(whole - charge(p) - (gauge(p) if gauge else 0))
        report.check(True, f"{what} rate")
        report.check(all(close(r, rests[0]) for r in rests), f"{what} charge", f"'{short(charge.text)}' with gauge '{short(gauge.text) if gauge else 0}'")
        if gauge:
            report.check(gauge.order(names) <= 0, f"{what} gauge", f"'{short(gauge.text)}' depends on velocities")
        return True
    except (plain.Unreadable, ArithmeticError, ValueError, TypeError, KeyError) as x:
        return report.check(False, what, f"{type(x).__name__} {x}")


def close_rate(a, b):
    return abs(a - b) <= mp.mpf(10)**-28 * (1 + abs(a) + abs(b))
