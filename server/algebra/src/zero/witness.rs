//! Real points: where interval arithmetic encloses no zero, a value is proved to be different from zero.

use super::assumptions::{Assumptions, atom_key};
use super::interval::{Interval, combine};
use super::plan::Plan;
use super::points::{Env, Index, hash, index, level, shared};
use super::ranges::Range;
use super::table::{Domain, Place, Values};
use crate::arena::{Arena, Expr, Node, Role, Symbol};
use crate::rational::Rational;

/// A real point at which a value is proved to be different from zero.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Witness {
    /// Which of the points that are tried; [`super::ZeroTest::witness_values`] lists its coordinates.
    pub point: u32,
    /// A lower bound of the value there.
    pub lower: f64,
    /// An upper bound of the value there.
    pub upper: f64,
}

/// The point number `attempt` of those that are tried, in this order.
pub(crate) struct RealPoint {
    pub attempt: u32,
    /// What stands under the roots that take their other value.
    pub negated: Vec<Expr>,
}

/// How many points are looked at, for one that satisfies the assumptions.
pub(crate) const ATTEMPTS: u32 = 1000;

/// At how many of them a value is enclosed.
pub(crate) const TRIES: u32 = 20;

impl RealPoint {
    /// A short rational for an atom, inside its bounds.
    pub fn choose(&self, range: &Range, key: u64) -> Rational {
        const NICE: [(i64, i64); 16] = [
            (1, 2),
            (3, 4),
            (5, 4),
            (3, 2),
            (2, 3),
            (7, 4),
            (4, 3),
            (2, 1),
            (5, 3),
            (1, 3),
            (1, 4),
            (3, 1),
            (5, 2),
            (7, 3),
            (2, 5),
            (7, 5),
        ];
        let h = hash(&[key, self.attempt as u64, 0x17]);
        let (n, d) =
            if self.attempt < 3 { NICE[(h % 16) as usize] } else { (1 + (h % 29) as i64, 2 + (h >> 8) as i64 % 11) };
        // Later points are also tried near zero and far out.
        let d = if self.attempt % 4 == 3 { d * 8 } else { d };
        let size = Rational::new(n, d).unwrap_or(Rational::ONE);
        let lower = range.lower.as_ref().map(|b| &b.0);
        let upper = range.upper.as_ref().map(|b| &b.0);
        match (lower, upper) {
            (Some(l), Some(u)) => {
                let k = 2 + (h >> 20) as i64 % 7;
                let j = 1 + (h >> 30) as i64 % (k - 1);
                let part = Rational::new(j, k).unwrap_or(Rational::HALF);
                l.add(&u.sub(l).mul(&part))
            }
            (Some(l), None) => l.add(&size),
            (None, Some(u)) => u.sub(&size),
            (None, None) if self.attempt == 0 || h >> 40 & 1 == 0 => size,
            (None, None) => size.neg(),
        }
    }

    /// The value of an atom outside of sums.
    pub fn atom(&self, arena: &Arena, facts: &Assumptions, e: Expr, env: &Env) -> Option<Rational> {
        let of = |s: Symbol, member: Option<i64>, order: u16| {
            if arena.info(s).role == Role::Index {
                return Rational::integer(2 + (atom_key(arena, s, member, order) % 5) as i64);
            }
            // All far members have the same value, so that long sums are short.
            let name = shared(arena, s, member).filter(|_| !facts.tell_members_apart()).or(member);
            self.choose(&facts.range(arena, s, member, order), atom_key(arena, s, name, order))
        };
        match arena.node(e) {
            Node::Symbol(s) => Some(match level(arena, *s).and_then(|k| env[k]) {
                Some(v) => Rational::integer(v),
                None => of(*s, None, 0),
            }),
            Node::Jet(s, n) => Some(of(*s, None, *n)),
            Node::Member { family, index: i, order } => Some(match index(arena, *i, env) {
                Index::At(k) => of(*family, Some(k), *order),
                Index::Free(key) => {
                    let name = hash(&[atom_key(arena, *family, None, *order), key]);
                    self.choose(&facts.range(arena, *family, None, *order), name)
                }
            }),
            _ => None,
        }
    }

    /// An unspecified function is replaced by a sum of two products of polynomials, one for each argument.
    fn unspecified(&self, name: u64, orders: &[u16], args: &[Interval]) -> Interval {
        let mut sum = Interval::exactly(0.0);
        for s in 0..2u64 {
            let mut product = Interval::exactly(1.0);
            for (j, (x, order)) in args.iter().zip(orders).enumerate() {
                product = product.times(polynomial(hash(&[name, s, j as u64]), *order, *x));
            }
            sum = sum.plus(product);
        }
        sum
    }
}

/// The derivative of the given order of a polynomial of degree eight with coefficients drawn from a name.
fn polynomial(name: u64, order: u16, x: Interval) -> Interval {
    const DEGREE: u64 = 8;
    let mut r = Interval::exactly(0.0);
    for k in (order as u64..=DEGREE).rev() {
        let h = hash(&[name, k]);
        // Quarters, so that the coefficients are exact; smaller towards the end.
        let mut c = (1 + h % 7) as f64 / (4 << (k / 2)) as f64;
        if h >> 20 & 1 == 1 {
            c = -c;
        }
        for j in 0..order as u64 {
            c *= (k - j) as f64;
        }
        r = r.times(x).plus(Interval::exactly(c));
    }
    r
}

impl Domain for RealPoint {
    type Value = Interval;
    const UNSET: Interval = Interval { lo: f64::INFINITY, hi: f64::NEG_INFINITY };
    const NOWHERE: Interval = Interval::NONE;
    const PLANNED: bool = false;
    const ZERO: Interval = Interval { lo: 0.0, hi: 0.0 };

    fn exists(v: Interval) -> bool {
        v.exists()
    }

    fn plus(&self, a: Interval, b: Interval) -> Interval {
        a.plus(b)
    }

    fn times(&self, a: Interval, count: i64) -> Interval {
        if count == 1 { a } else { a.times(Interval::of(&Rational::integer(count))) }
    }

    fn near(&self) -> bool {
        true
    }

    fn symbolic_sum(&self, _: Place<'_>, _: Expr) -> Interval {
        Interval::NONE
    }

    fn compute(&self, at: Place<'_>, values: &Values<Interval>, e: Expr, env: &Env) -> Interval {
        match at.arena.node(e) {
            Node::Symbol(_) | Node::Jet(..) | Node::Member { .. } => {
                self.atom(at.arena, at.facts, e, env).map_or(Interval::NONE, |r| Interval::of(&r))
            }
            Node::Unspecified { function, index: i, orders, args } => {
                let name = |k: Option<i64>| {
                    let near = shared(at.arena, *function, k).filter(|_| !at.facts.tell_members_apart());
                    atom_key(at.arena, *function, near.or(k), 0)
                };
                let key = match i.map(|i| index(at.arena, i, env)) {
                    None => name(None),
                    Some(Index::At(k)) => name(Some(k)),
                    Some(Index::Free(k)) => hash(&[k, atom_key(at.arena, *function, None, 0)]),
                };
                let args: Vec<Interval> = args.iter().map(|x| values.get(*x)).collect();
                self.unspecified(key, orders, &args)
            }
            _ => {
                let v = combine(at.arena, e, &mut |x| values.get(x));
                let turned = |p: &Plan| p.factors().iter().filter(|f| self.negated.contains(&f.base)).count();
                match at.notes.plan(e) {
                    Some(p) if !self.negated.is_empty() && turned(p) % 2 == 1 => v.negate(),
                    _ => v,
                }
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn derivatives_of_the_polynomials_are_consistent() {
        for order in 0..4 {
            let (x, h) = (0.7, 1e-5);
            let at = |x: f64, order| polynomial(42, order, Interval::exactly(x)).lo;
            let slope = (at(x + h, order) - at(x - h, order)) / (2.0 * h);
            assert!((slope - at(x, order + 1)).abs() < 1e-6, "order {order}");
        }
    }

    #[test]
    fn choices_respect_bounds() {
        let r = |n, d| Some((Rational::new(n, d).unwrap(), true));
        for attempt in 0..100 {
            for key in 0..50 {
                let p = RealPoint { attempt, negated: Vec::new() };
                let v = p.choose(&Range { lower: r(0, 1), upper: r(1, 3), nonzero: false }, key);
                assert!(v > Rational::ZERO && v < Rational::new(1, 3).unwrap());
                assert!(p.choose(&Range { lower: r(0, 1), upper: None, nonzero: false }, key).signum() > 0);
                assert!(p.choose(&Range { lower: None, upper: r(0, 1), nonzero: false }, key).signum() < 0);
            }
        }
    }
}
