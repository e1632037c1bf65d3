//! Rational bounds of atoms, and what follows for expressions.

use super::assumptions::Assumptions;
use super::signs::Sign;
use crate::arena::{Arena, Expr, Node};
use crate::function::Function;
use crate::rational::Rational;

/// Lower and upper bounds, each with whether it is strict.
#[derive(Clone, Default, PartialEq, Eq, Hash, Debug)]
pub(crate) struct Range {
    /// The greatest known lower bound.
    pub lower: Option<(Rational, bool)>,
    /// The least known upper bound.
    pub upper: Option<(Rational, bool)>,
    /// Known to be not zero.
    pub nonzero: bool,
}

impl Range {
    pub fn exactly(r: &Rational) -> Range {
        Range { lower: Some((r.clone(), false)), upper: Some((r.clone(), false)), nonzero: !r.is_zero() }
    }

    pub fn raise(&mut self, r: Rational, strict: bool) {
        if self.lower.as_ref().is_none_or(|(l, s)| r > *l || r == *l && strict && !s) {
            self.lower = Some((r, strict));
        }
    }

    pub fn cut(&mut self, r: Rational, strict: bool) {
        if self.upper.as_ref().is_none_or(|(u, s)| r < *u || r == *u && strict && !s) {
            self.upper = Some((r, strict));
        }
    }

    pub fn meet(&mut self, other: &Range) {
        if let Some((r, s)) = &other.lower {
            self.raise(r.clone(), *s);
        }
        if let Some((r, s)) = &other.upper {
            self.cut(r.clone(), *s);
        }
        self.nonzero |= other.nonzero;
    }

    /// The sign that the bounds leave.
    pub fn sign(&self) -> Sign {
        let mut s = if self.nonzero { Sign::NonZero } else { Sign::Unknown };
        if let Some((l, strict)) = &self.lower {
            s = s.and(match l.signum() {
                1 => Sign::Positive,
                0 if *strict => Sign::Positive,
                0 => Sign::NonNegative,
                _ => Sign::Unknown,
            });
        }
        if let Some((u, strict)) = &self.upper {
            s = s.and(match u.signum() {
                -1 => Sign::Negative,
                0 if *strict => Sign::Negative,
                0 => Sign::NonPositive,
                _ => Sign::Unknown,
            });
        }
        s
    }

    pub fn scale(&self, c: &Rational) -> Range {
        let map = |b: &Option<(Rational, bool)>| b.as_ref().map(|(r, s)| (r.mul(c), *s));
        let (lower, upper) = (map(&self.lower), map(&self.upper));
        if c.is_negative() {
            Range { lower: upper, upper: lower, nonzero: self.nonzero }
        } else {
            Range { lower, upper, nonzero: self.nonzero }
        }
    }

    pub fn plus(&self, other: &Range) -> Range {
        let sum = |a: &Option<(Rational, bool)>, b: &Option<(Rational, bool)>| match (a, b) {
            (Some((x, s)), Some((y, t))) => Some((x.add(y), *s || *t)),
            _ => None,
        };
        Range { lower: sum(&self.lower, &other.lower), upper: sum(&self.upper, &other.upper), nonzero: false }
    }
}

/// Bounds of an expression, from those of its atoms. Shallow: deep nesting is unknown.
pub(crate) fn range(arena: &Arena, facts: &Assumptions, e: Expr, of: &dyn Fn(Expr) -> Sign, level: u32) -> Range {
    let unit =
        || Range { lower: Some((Rational::MINUS_ONE, false)), upper: Some((Rational::ONE, false)), nonzero: false };
    if level > 4 {
        return Range::default();
    }
    let mut r = match arena.node(e) {
        Node::Number(r) => Range::exactly(r),
        Node::Symbol(s) => facts.range(arena, *s, None, 0),
        Node::Jet(s, n) => facts.range(arena, *s, None, *n),
        Node::Call(Function::Sin | Function::Cos | Function::Tanh | Function::Sign, _) => unit(),
        Node::Sum(k, terms) if terms.len() <= 32 => {
            let mut sum = Range::exactly(k);
            for (x, c) in terms.iter() {
                sum = sum.plus(&range(arena, facts, *x, of, level + 1).scale(c));
                if sum.lower.is_none() && sum.upper.is_none() {
                    break;
                }
            }
            sum
        }
        Node::Product(factors) => factors
            .iter()
            .map(|(b, n)| monotone_power(&range(arena, facts, *b, of, level + 1), n))
            .reduce(|a, b| range_product(&a, &b))
            .unwrap_or_default(),
        _ => Range::default(),
    };
    let s = of(e);
    if level > 0 {
        if s.is_nonnegative() {
            r.raise(Rational::ZERO, s.is_positive());
        }
        if s.is_nonpositive() {
            r.cut(Rational::ZERO, s.is_negative());
        }
    }
    r
}

fn monotone_power(r: &Range, n: &Rational) -> Range {
    let (Some(k), bits) = (n.to_i64(), 512) else { return Range::default() };
    if !(1..=64).contains(&k) {
        return Range::default();
    }
    let raise = |b: &Option<(Rational, bool)>| b.as_ref().and_then(|(x, s)| Some((x.pow(k, bits)?, *s)));
    let nonnegative = r.lower.as_ref().is_some_and(|(l, _)| !l.is_negative());
    if nonnegative || k % 2 == 1 {
        return Range { lower: raise(&r.lower), upper: raise(&r.upper), nonzero: r.nonzero };
    }
    // An even power of a range around zero.
    let upper = match (&r.lower, &r.upper) {
        (Some((l, s)), Some((u, t))) => {
            let (m, strict) =
                if l.abs() > u.abs() { (l.abs(), *s) } else { (u.abs(), *t && (l.abs() != u.abs() || *s)) };
            m.pow(k, bits).map(|m| (m, strict))
        }
        _ => None,
    };
    Range { lower: Some((Rational::ZERO, r.nonzero)), upper, nonzero: r.nonzero }
}

/// The product of two ranges; known only where both are not negative or both bounded.
fn range_product(a: &Range, b: &Range) -> Range {
    let nonnegative = |r: &Range| r.lower.as_ref().is_some_and(|(l, _)| !l.is_negative());
    if nonnegative(a) && nonnegative(b) {
        let both = |x: &Option<(Rational, bool)>, y: &Option<(Rational, bool)>| match (x, y) {
            (Some((p, s)), Some((q, t))) => Some((p.mul(q), *s && *t)),
            _ => None,
        };
        let lower = match both(&a.lower, &b.lower) {
            Some((r, s)) => Some((r, s)),
            None => Some((Rational::ZERO, false)),
        };
        return Range { lower, upper: both(&a.upper, &b.upper), nonzero: a.nonzero && b.nonzero };
    }
    let (Some(al), Some(au), Some(bl), Some(bu)) = (&a.lower, &a.upper, &b.lower, &b.upper) else {
        return Range::default();
    };
    let mut out = Range::default();
    let corner = |x: &(Rational, bool), y: &(Rational, bool)| (x.0.mul(&y.0), x.1 || y.1);
    let corners = [corner(al, bl), corner(al, bu), corner(au, bl), corner(au, bu)];
    // An extreme value other than zero is taken at corners only.
    let strict = |v: &Rational| !v.is_zero() && corners.iter().all(|c| c.0 != *v || c.1);
    let (lo, hi) = (corners.iter().map(|c| &c.0).min(), corners.iter().map(|c| &c.0).max());
    if let (Some(lo), Some(hi)) = (lo, hi) {
        out.raise(lo.clone(), strict(lo));
        out.cut(hi.clone(), strict(hi));
    }
    out
}
