//! A mechanical system for the tests: its Lagrangian's terms and what follows from them.

use super::reader::{Names, read};
use crate::arena::{Arena, Expr, Node, Role};
use crate::budget::Budget;
use crate::display::{DisplayOptions, Layout, textbook, verbatim};
use crate::rational::Rational;
use crate::zero::{Assumptions, Verdict, ZeroTest};
use std::fmt::Write;

pub struct System {
    pub arena: Arena,
    pub names: Names,
    terms: Vec<(String, Expr)>,
    pub lagrangian: Expr,
    coordinates: Vec<Expr>,
}

pub fn budget() -> Budget {
    Budget::new(50_000_000)
}

impl System {
    /// Terms are `kinetic …`, `potential …` or `lagrangian …`.
    pub fn new(coordinates: &str, functions: &str, terms: &[&str]) -> System {
        let mut arena = Arena::new();
        let names = Names::new(coordinates, functions);
        let mut lagrangian = Arena::ZERO;
        let mut list = Vec::new();
        for t in terms {
            let (kind, formula) = t.split_once(' ').unwrap();
            let e = read(&mut arena, &names, formula);
            list.push((kind.to_string(), e));
            lagrangian = if kind == "potential" { arena.sub(lagrangian, e) } else { arena.add(lagrangian, e) };
        }
        let coordinates = arena
            .atoms(lagrangian)
            .into_iter()
            .filter_map(|a| match arena.node(a) {
                Node::Symbol(s) | Node::Jet(s, _) if arena.info(*s).role == Role::Coordinate => Some(*s),
                _ => None,
            })
            .collect::<hashbrown::HashSet<_>>();
        let mut coordinates: Vec<_> = coordinates.into_iter().map(|s| arena.sym(s)).collect();
        coordinates.sort_by_key(|c| match arena.node(*c) {
            Node::Symbol(s) => arena.name(*s),
            _ => String::new(),
        });
        System { arena, names, terms: list, lagrangian, coordinates }
    }

    pub fn velocity(&mut self, q: Expr) -> Expr {
        match self.arena.node(q) {
            Node::Symbol(s) => {
                let s = *s;
                self.arena.jet(s, 1)
            }
            _ => unreachable!(),
        }
    }

    pub fn momentum(&mut self, q: Expr) -> Expr {
        let v = self.velocity(q);
        self.arena.partial(self.lagrangian, v, &mut budget()).unwrap()
    }

    pub fn force(&mut self, q: Expr) -> Expr {
        self.arena.partial(self.lagrangian, q, &mut budget()).unwrap()
    }

    pub fn equation(&mut self, q: Expr) -> Expr {
        let p = self.momentum(q);
        let rate = self.arena.total(p, &mut budget()).unwrap();
        let force = self.force(q);
        self.arena.sub(rate, force)
    }

    pub fn energy(&mut self) -> Expr {
        let mut list = vec![(self.lagrangian, Rational::MINUS_ONE)];
        for q in self.coordinates.clone() {
            let v = self.velocity(q);
            let p = self.momentum(q);
            list.push((self.arena.mul(p, v), Rational::ONE));
        }
        self.arena.linear(&list)
    }

    pub fn equations(&mut self) -> Vec<Expr> {
        self.coordinates.clone().into_iter().map(|q| self.equation(q)).collect()
    }

    /// Prints, proves the print equal, and checks that all spellings read back.
    pub fn print(&mut self, e: Expr) -> Layout {
        let layout = textbook(&mut self.arena, e, &DisplayOptions::default(), &mut budget());
        let back = layout.to_expr(&mut self.arena).unwrap();
        assert!(equal(&mut self.arena, e, back), "not equal to its source: {}", layout.text());
        let verdict = verdict(&mut self.arena, e, back);
        assert!(verdict.is_proved(), "not proved equal to its source: {}: {verdict:?}", layout.text());
        let plain = read(&mut self.arena, &self.names, &layout.plain());
        assert_eq!(plain, back, "{}", layout.plain());
        if layout.abbreviations.is_empty() {
            let text = read(&mut self.arena, &self.names, &layout.text());
            assert_eq!(text, back, "{}", layout.text());
        }
        layout
    }

    /// The sheet in Unicode.
    pub fn sheet(&mut self) -> String {
        let mut out = String::new();
        for (kind, e) in self.terms.clone() {
            let shown = verbatim(&self.arena, e, &DisplayOptions::default());
            let _ = writeln!(out, "{kind} {}", shown.text());
            let shown = self.print(e);
            let _ = writeln!(out, "     {}", shown.text());
        }
        let _ = writeln!(out, "L = {}", self.print(self.lagrangian).text());
        for q in self.coordinates.clone() {
            let name = verbatim(&self.arena, q, &DisplayOptions::default()).text();
            let p = self.momentum(q);
            let _ = writeln!(out, "p_{name} = {}", self.print(p).text());
            let f = self.force(q);
            let _ = writeln!(out, "Q_{name} = {}", self.print(f).text());
        }
        for q in self.coordinates.clone() {
            let e = self.equation(q);
            let shown = self.print(e);
            let _ = writeln!(out, "{} = 0    [{}]", shown.text(), shown.operations());
        }
        let h = self.energy();
        let _ = writeln!(out, "h = {}", self.print(h).text());
        out
    }
}

/// What the zero test says of the difference.
pub fn verdict(arena: &mut Arena, a: Expr, b: Expr) -> Verdict {
    let gap = arena.sub(a, b);
    ZeroTest::new(Assumptions::new()).is_zero(arena, gap, &mut budget())
}

/// Compares values at random points.
pub fn equal(arena: &mut Arena, a: Expr, b: Expr) -> bool {
    (0..6).all(|seed| {
        let (x, y) = (value(arena, a, seed), value(arena, b, seed));
        if !x.is_finite() || !y.is_finite() {
            return x.is_finite() == y.is_finite();
        }
        (x - y).abs() <= 1e-8 * (1.0 + x.abs().max(y.abs()))
    })
}

/// The value at a random point between 0.3 and 1.4, by names.
pub fn value(arena: &mut Arena, e: Expr, seed: u64) -> f64 {
    use crate::function::Function::*;
    let hash = |x: u64| {
        0.3 + 1.1 * ((x.wrapping_mul(0x9E37_79B9_7F4A_7C15).wrapping_add(seed * 77_777) >> 11) % 100_000) as f64 / 1e5
    };
    match arena.node(e).clone() {
        Node::Number(r) => r.to_f64(),
        Node::Pi => std::f64::consts::PI,
        Node::Undefined => f64::NAN,
        Node::Symbol(_) | Node::Jet(..) => hash(arena.key(e)),
        Node::Member { index, .. } => hash(arena.key(e) ^ value(arena, index, seed).to_bits()),
        Node::Sum(c, terms) => {
            let mut out = c.to_f64();
            for (t, k) in terms.iter() {
                out += k.to_f64() * value(arena, *t, seed);
            }
            out
        }
        Node::Product(factors) => {
            let mut out = 1.0;
            for (b, x) in factors.iter() {
                let b = value(arena, *b, seed);
                out *= match x.to_i64() {
                    Some(n) => b.powi(n as i32),
                    None => b.powf(x.to_f64()),
                };
            }
            out
        }
        Node::Power(b, x) => value(arena, b, seed).powf(value(arena, x, seed)),
        Node::Call(f, args) => {
            let v: Vec<f64> = args.iter().map(|a| value(arena, *a, seed)).collect();
            match f {
                Sin => v[0].sin(),
                Cos => v[0].cos(),
                Tan => v[0].tan(),
                Asin => v[0].asin(),
                Acos => v[0].acos(),
                Atan => v[0].atan(),
                Atan2 => v[0].atan2(v[1]),
                Sinh => v[0].sinh(),
                Cosh => v[0].cosh(),
                Tanh => v[0].tanh(),
                Exp => v[0].exp(),
                Log => v[0].ln(),
                Abs => v[0].abs(),
                Sign => v[0].signum(),
                Min => v.into_iter().fold(f64::INFINITY, f64::min),
                Max => v.into_iter().fold(f64::NEG_INFINITY, f64::max),
            }
        }
        Node::Unspecified { function, orders, args, .. } => {
            let mut h = arena.info(function).name.bytes().fold(7u64, |h, b| h.wrapping_mul(31) + b as u64);
            for o in orders.iter() {
                h = h.wrapping_mul(131) + *o as u64;
            }
            // Smooth in the arguments, so that rounding does not matter.
            let inner: f64 =
                args.iter().map(|a| value(arena, *a, seed)).enumerate().map(|(k, v)| v * (k + 1) as f64).sum();
            (hash(h) * inner).sin()
        }
        Node::Bound { index, lower, upper, body } => {
            let (a, b) = (arena.as_i64(lower), arena.as_i64(upper));
            let (Some(a), Some(b)) = (a, b) else { return f64::NAN };
            let mut out = 0.0;
            let i = arena.sym(index);
            for k in a..=b {
                let k = arena.integer(k);
                let term = arena.substitute(body, &[(i, k)].into_iter().collect(), &mut budget()).unwrap();
                out += value(arena, term, seed);
            }
            out
        }
    }
}
