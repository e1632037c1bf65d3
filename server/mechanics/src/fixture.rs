//! Small models for the tests, built by hand.

use crate::context::{Context, Memory};
use crate::model::{Coordinate, Image, Model, Term, TermKind, epsilon, time};
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
    fn new() -> Fixture {
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
