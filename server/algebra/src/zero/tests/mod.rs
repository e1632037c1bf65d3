//! A bench for the tests: an arena with assumptions.

mod branches;
mod hostile;
mod identities;
mod models;
mod motions;
mod random;

use super::{Assumptions, Reason, Relation, Verdict, ZeroTest};
use crate::arena::{Arena, Expr, Role};
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
