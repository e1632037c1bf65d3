"""Lagrangian mechanics with SymPy, as plainly as possible: the other side of the comparisons.

Coordinates are plain symbols; the velocity of `q` is the symbol `q'`, the acceleration `q''`. Nothing is simplified:
expressions are compared as numbers. Formulas: Goldstein, Poole, Safko, Classical Mechanics, 3rd ed., chapters 1, 2, 8
and, for the variation and the charge of a symmetry, Olver, Applications of Lie Groups, 2nd ed., sections 4.2 and 4.4.
"""
import sympy as sp

t = sp.Symbol("t")


def coordinates(names):
    """Three lists of symbols: coordinates, velocities, accelerations."""
    names = names.split() if isinstance(names, str) else list(names)
    return tuple([sp.Symbol(n + dots) for n in names] for dots in ("", "'", "''"))


class Motion:
    """What follows from L, generalised forces Q(q, q', t) and coordinates: momenta, equations, energy, rates."""

    def __init__(self, names, lagrangian, forces=None):
        self.q, self.v, self.a = names if isinstance(names, tuple) else coordinates(names)
        self.L = lagrangian
        self.Q = list(forces) if forces is not None else [sp.Integer(0)] * len(self.q)

    def dt(self, e):
        """The total time derivative."""
        return sp.diff(e, t) + sum(sp.diff(e, q) * v for q, v in zip(self.q, self.v)) + sum(
            sp.diff(e, v) * a for v, a in zip(self.v, self.a))

    def momenta(self):
        return [sp.diff(self.L, v) for v in self.v]

    def slopes(self):
        """∂L/∂q, without the applied forces."""
        return [sp.diff(self.L, q) for q in self.q]

    def equations(self):
        """d/dt ∂L/∂q' − ∂L/∂q − Q: zero on a motion."""
        return [self.dt(p) - f - Q for p, f, Q in zip(self.momenta(), self.slopes(), self.Q)]

    def mass_matrix(self):
        return [[sp.diff(self.L, a, b) for b in self.v] for a in self.v]

    def energy(self):
        return sum(p * v for p, v in zip(self.momenta(), self.v)) - self.L

    def energy_rate(self):
        return -sp.diff(self.L, t) + sum(Q * v for Q, v in zip(self.Q, self.v))

    def accelerations(self):
        """The rules q'' → expression that hold on motions."""
        zero = {a: 0 for a in self.a}
        rest = [e.subs(zero) for e in self.equations()]
        solved = sp.Matrix(self.mass_matrix()).LUsolve(-sp.Matrix(rest))
        return dict(zip(self.a, solved))

    def on_motion(self, e):
        return self.dt(e).subs(self.accelerations())

    def variation(self, tau, eta, L=None):
        """∂L/∂t τ + Σ ∂L/∂q η + Σ ∂L/∂q' (η' − q' τ') + L τ'."""
        L = self.L if L is None else L
        return (sp.diff(L, t) * tau + L * self.dt(tau) + sum(
            sp.diff(L, q) * n + sp.diff(L, v) * (self.dt(n) - v * self.dt(tau)) for q, v, n in zip(self.q, self.v, eta)))

    def charge(self, tau, eta, gauge=0):
        return sum(p * (n - v * tau) for p, n, v in zip(self.momenta(), eta, self.v)) + self.L * tau - gauge

    def euler(self, e):
        """The Euler operator of e(q, q', t): zero exactly for a total time derivative."""
        return [self.dt(sp.diff(e, v)) - sp.diff(e, q) for q, v in zip(self.q, self.v)]


def rayleigh(dissipation, velocities):
    return [-sp.diff(dissipation, v) for v in velocities]


def applied(force, on, q):
    """Generalised forces of `force … on E` for E(q, t)."""
    return [force * sp.diff(on, x) for x in q]


def add(*lists):
    return [sum(x) for x in zip(*lists)]
