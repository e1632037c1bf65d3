//! Small models for the tests, built by hand.

use crate::context::{Context, Memory};
use crate::model::{Constraint, Coordinate, Image, Model, Term, TermKind, epsilon, time};
use leastwise_algebra::{Arena, Assumptions, Budget, Expr, Function, Rational, Role, ZeroTest};

/// A model with everything that a derivation needs.
pub(crate) struct Fixture {
    pub arena: Arena,
    pub zero: ZeroTest,
    pub budget: Budget,
    pub memory: Memory,
    pub model: Model,
}

impl Fixture {
    pub fn new() -> Fixture {
        Fixture {
            arena: Arena::new(),
            zero: ZeroTest::new(Assumptions::new()),
            budget: Budget::new(10_000_000),
            memory: Memory::default(),
            model: Model { coordinates: Vec::new(), terms: Vec::new(), forces: Vec::new(), constraints: Vec::new() },
        }
    }

    pub fn cx(&mut self) -> Context<'_> {
        Context { arena: &mut self.arena, zero: &mut self.zero, budget: &mut self.budget, memory: &mut self.memory }
    }

    /// Declares a coordinate; gives position and velocity.
    pub fn coordinate(&mut self, name: &str) -> (Expr, Expr) {
        let s = self.arena.symbol(name, None, Role::Coordinate);
        self.model.coordinates.push(Coordinate::single(s));
        (self.arena.sym(s), self.arena.jet(s, 1))
    }

    pub fn parameter(&mut self, name: &str) -> Expr {
        let s = self.arena.symbol(name, None, Role::Parameter);
        self.arena.sym(s)
    }

    pub fn time(&mut self) -> Expr {
        let t = time(&mut self.arena);
        self.arena.sym(t)
    }

    pub fn epsilon(&mut self) -> Expr {
        let e = epsilon(&mut self.arena);
        self.arena.sym(e)
    }

    pub fn term(&mut self, kind: TermKind, name: &str, parts: &[Expr]) {
        self.model.terms.push(Term { name: name.into(), kind, parts: parts.to_vec() });
    }

    /// ½ c v².
    pub fn half_square(&mut self, c: Expr, v: Expr) -> Expr {
        let half = self.arena.number(Rational::HALF);
        let v2 = self.arena.pow(v, 2);
        self.arena.product(&[half, c, v2])
    }

    /// `x -> x + ε f` for each pair.
    pub fn shifts(&mut self, pairs: &[(Expr, Expr)]) -> Vec<Image> {
        let eps = self.epsilon();
        pairs
            .iter()
            .map(|&(source, f)| {
                let step = self.arena.mul(eps, f);
                Image { source, target: self.arena.add(source, step) }
            })
            .collect()
    }
}

/// The double pendulum with unit lengths and masses m₁, m₂ [LL §5, problem 1].
pub(crate) fn double_pendulum() -> Fixture {
    let mut f = Fixture::new();
    let (a, _) = f.coordinate("θ₁");
    let (b, _) = f.coordinate("θ₂");
    let (m1, m2, g) = (f.parameter("m₁"), f.parameter("m₂"), f.parameter("g"));
    let mut at = Vec::new();
    for angle in [a, b] {
        let (s, c) = (f.arena.call(Function::Sin, &[angle]), f.arena.call(Function::Cos, &[angle]));
        at.push((s, f.arena.neg(c)));
    }
    let second = (f.arena.add(at[0].0, at[1].0), f.arena.add(at[0].1, at[1].1));
    for (name, m, p) in [("upper", m1, at[0]), ("lower", m2, second)] {
        let (vx, vy) = (f.arena.total(p.0, &mut f.budget).unwrap(), f.arena.total(p.1, &mut f.budget).unwrap());
        let (x, y) = (f.half_square(m, vx), f.half_square(m, vy));
        f.term(TermKind::Kinetic, name, &[x, y]);
        let w = f.arena.product(&[m, g, p.1]);
        f.term(TermKind::Potential, &format!("weight of {name}"), &[w]);
    }
    f
}

/// A body in the plane in the field −k/r [GPS §3.7].
pub(crate) fn kepler() -> Fixture {
    let mut f = Fixture::new();
    let (x, vx) = f.coordinate("x");
    let (y, vy) = f.coordinate("y");
    let (m, k) = (f.parameter("m"), f.parameter("k"));
    let (tx, ty) = (f.half_square(m, vx), f.half_square(m, vy));
    f.term(TermKind::Kinetic, "planet", &[tx, ty]);
    let (x2, y2) = (f.arena.pow(x, 2), f.arena.pow(y, 2));
    let r2 = f.arena.add(x2, y2);
    let u = f.arena.monomial(&[(k, Rational::ONE), (r2, Rational::HALF.neg())]);
    let u = f.arena.neg(u);
    f.term(TermKind::Potential, "gravity", &[u]);
    f
}

/// A free mass on a rod of unit length, or of length t: x² + y² = 1 or t². With its momentum along x.
pub(crate) fn rod(growing: bool) -> (Fixture, Expr) {
    let mut f = Fixture::new();
    let (x, vx) = f.coordinate("x");
    let (y, vy) = f.coordinate("y");
    let m = f.parameter("m");
    let (tx, ty) = (f.half_square(m, vx), f.half_square(m, vy));
    f.term(TermKind::Kinetic, "bob", &[tx, ty]);
    let length = if growing { f.time() } else { Arena::ONE };
    let squares: Vec<Expr> = [x, y, length].iter().map(|&e| f.arena.pow(e, 2)).collect();
    let rod =
        f.arena.linear(&[(squares[0], Rational::ONE), (squares[1], Rational::ONE), (squares[2], Rational::MINUS_ONE)]);
    f.model.constraints.push(Constraint { name: "rod".into(), f: rod });
    let px = f.arena.mul(m, vx);
    (f, px)
}

/// A body on a blade: ẋ sin φ = ẏ cos φ. With its speed along the blade, its velocity along x, and its turning rate.
pub(crate) fn sleigh() -> (Fixture, Expr, Expr, Expr) {
    let mut f = Fixture::new();
    let (_, vx) = f.coordinate("x");
    let (_, vy) = f.coordinate("y");
    let (phi, w) = f.coordinate("φ");
    let (m, j) = (f.parameter("m"), f.parameter("J"));
    let parts = [f.half_square(m, vx), f.half_square(m, vy), f.half_square(j, w)];
    f.term(TermKind::Kinetic, "body", &parts);
    let (s, c) = (f.arena.call(Function::Sin, &[phi]), f.arena.call(Function::Cos, &[phi]));
    let (a, b) = (f.arena.mul(vx, s), f.arena.mul(vy, c));
    let blade = f.arena.sub(a, b);
    f.model.constraints.push(Constraint { name: "blade".into(), f: blade });
    let (a, b) = (f.arena.mul(vx, c), f.arena.mul(vy, s));
    let along = f.arena.add(a, b);
    (f, along, vx, w)
}
