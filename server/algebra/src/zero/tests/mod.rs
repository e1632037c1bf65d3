//! A bench for the tests: an arena with assumptions.

mod assumptions;
mod branches;
mod hostile;
mod identities;
mod models;
mod motions;
mod random;

use super::{Assumptions, Reason, Relation, Verdict, ZeroTest};
use crate::arena::{Arena, Expr, Node, Role};
use crate::budget::Budget;
use crate::function::Function;
use crate::rational::Rational;

struct Lab {
    arena: Arena,
    facts: Assumptions,
}

impl Lab {
    fn new() -> Lab {
        Lab { arena: Arena::new(), facts: Assumptions::new() }
    }

    fn x(&mut self, name: &str) -> Expr {
        let s = self.arena.symbol(name, None, Role::Coordinate);
        self.arena.sym(s)
    }

    fn parameter(&mut self, name: &str) -> Expr {
        let s = self.arena.symbol(name, None, Role::Parameter);
        self.arena.sym(s)
    }

    fn n(&mut self, n: i64) -> Expr {
        self.arena.integer(n)
    }

    fn times(&mut self, n: i64, e: Expr) -> Expr {
        self.arena.scale(e, &Rational::integer(n))
    }

    fn over(&mut self, e: Expr, d: i64) -> Expr {
        self.arena.scale(e, &Rational::new(1, d).unwrap())
    }

    fn call(&mut self, f: Function, x: Expr) -> Expr {
        self.arena.call(f, &[x])
    }

    fn function(&mut self, name: &str, order: u16, x: Expr) -> Expr {
        let f = self.arena.symbol(name, None, Role::Function);
        self.arena.unspecified(f, None, &[order], &[x])
    }

    fn positive(&mut self, e: Expr) {
        self.facts.assume(&mut self.arena, e, Relation::Greater);
    }

    fn difference(&mut self, a: Expr, b: Expr) -> Verdict {
        let e = self.arena.sub(a, b);
        self.verdict(e)
    }

    fn verdict(&mut self, e: Expr) -> Verdict {
        let mut test = ZeroTest::new(self.facts.clone());
        test.is_zero(&mut self.arena, e, &mut Budget::new(3_000_000))
    }
}

fn equal(lab: &mut Lab, a: Expr, b: Expr) {
    assert_eq!(lab.difference(a, b), Verdict::Proved);
}

fn different(lab: &mut Lab, a: Expr, b: Expr) {
    let v = lab.difference(a, b);
    assert!(matches!(v, Verdict::Refuted(Some(_))), "{v:?}");
}

fn undecided(lab: &mut Lab, a: Expr, b: Expr, reason: Reason) {
    assert_eq!(lab.difference(a, b), Verdict::Undecided(reason));
}

/// The value at a real point, in doubles.
fn value(l: &Lab, e: Expr, at: &[(Expr, f64)]) -> f64 {
    let v = |x: Expr| value(l, x, at);
    match l.arena.node(e) {
        Node::Number(r) => r.to_f64(),
        Node::Sum(k, t) => k.to_f64() + t.iter().map(|(x, c)| v(*x) * c.to_f64()).sum::<f64>(),
        Node::Product(f) => f.iter().map(|(x, r)| v(*x).powf(r.to_f64())).product(),
        Node::Call(f, args) => {
            let x = v(args[0]);
            match f {
                Function::Sin => x.sin(),
                Function::Cos => x.cos(),
                Function::Tan => x.tan(),
                Function::Exp => x.exp(),
                Function::Tanh => x.tanh(),
                Function::Abs => x.abs(),
                Function::Sign => x.signum(),
                Function::Atan => x.atan(),
                Function::Max => args.iter().map(|a| v(*a)).fold(f64::NEG_INFINITY, f64::max),
                Function::Min => args.iter().map(|a| v(*a)).fold(f64::INFINITY, f64::min),
                _ => f64::NAN,
            }
        }
        _ => at.iter().find(|p| p.0 == e).map_or(f64::NAN, |p| p.1),
    }
}
