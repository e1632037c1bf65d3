//! Bounds on degree and height of sums, products and functions.

use super::notes::Note;
use super::points::NEAR;
use crate::arena::{Arena, Expr, Node, Symbol};
use crate::rational::Rational;

/// The value of the index from which on all members in a summand are far, where the index stands in members only.
pub(super) fn far_start(arena: &Arena, order: &[Expr], index: Symbol) -> Option<i64> {
    // The offset c of a member's index i + c.
    let offset = |e: Expr| match arena.node(e) {
        Node::Symbol(s) => (*s == index).then_some(0),
        Node::Sum(k, terms) => match terms.as_ref() {
            [(x, c)] if c.is_one() && matches!(arena.node(*x), Node::Symbol(s) if *s == index) => k.to_i64(),
            _ => None,
        },
        _ => None,
    };
    let mut start = i64::MIN;
    for &x in order {
        let at = match arena.node(x) {
            Node::Member { index, .. } => Some(*index),
            Node::Unspecified { index, .. } => *index,
            // The index itself, or an inner sum.
            Node::Symbol(_) | Node::Bound { .. } => return None,
            _ => None,
        };
        if let Some(i) = at {
            start = start.max((NEAR + 1).checked_sub(offset(i)?)?);
        }
    }
    (start > i64::MIN).then_some(start)
}

/// 10 ± 2√5 and 2 ± √2 up to a positive factor, whose roots are the sines of 36°, 72° and 22.5°: the field knows them.
pub(super) fn is_standard_root(arena: &Arena, e: Expr) -> bool {
    let Node::Sum(k, terms) = arena.node(e) else { return false };
    let [(x, c)] = terms.as_ref() else { return false };
    let Node::Product(f) = arena.node(*x) else { return false };
    let [(b, r)] = f.as_ref() else { return false };
    if *r != Rational::HALF || k.signum() <= 0 {
        return false;
    }
    let ratio = k.div(&c.abs()).and_then(|r| r.to_i64());
    matches!((arena.as_i64(*b), ratio), (Some(5), Some(5)) | (Some(2), Some(2)))
}

pub(super) fn rational_height(r: &Rational) -> (f32, f32) {
    match r.small() {
        Some((n, d)) => ((n.unsigned_abs().max(1) as f32).log2(), (d as f32).log2()),
        None => (r.bits() as f32, r.bits() as f32),
    }
}

/// Bounds of constant + Σ coefficient · summand.
pub(super) fn sum_bounds<'a>(n: &mut Note, k: &Rational, list: impl Iterator<Item = (Note, &'a Rational)>) {
    let (mut gain, mut gain_tall, mut count) = (0.0f32, 0.0f32, 1.0f32);
    let (mut num, mut den) = (0.0f32, 0.0f32);
    let (mut deep, mut lcd) = (0.0f32, 1u64);
    let (a, b) = rational_height(k);
    (gain_tall, deep) = (f32::max(gain_tall, a), deep + b);
    for (x, c) in list {
        // Over the common denominator each numerator is multiplied with the other denominators.
        den += x.den;
        gain = gain.max(x.num - x.den);
        let (a, b) = rational_height(c);
        deep += x.deep;
        match c.small() {
            Some((_, d)) if lcd < 1 << 40 && d < 1 << 20 => lcd = lcd / gcd(lcd, d as u64) * d as u64,
            _ => deep += b,
        }
        gain_tall = gain_tall.max(a + x.tall - x.deep);
        count += 1.0;
        num = num.max(x.num);
    }
    deep += (lcd as f32).log2();
    n.den = den;
    n.num = den + gain;
    n.deep = deep;
    n.tall = deep + gain_tall + count.log2();
}

/// Two arguments of a function differ by a fraction of at most the sum of their heights.
pub(super) fn within(n: &mut Note, argument: &Note) {
    n.inner = n.inner.max(argument.inner).max(2.0 * (argument.tall + argument.deep));
}

/// sin, cos of d times a base angle are polynomials of degree d in its sine and cosine, with coefficients whose sum is
/// at most 2^(d−1); powers of the cosine are reduced by cos² = 1 − sin², which doubles the sum for every two of them.
/// The same for cosh and sinh, of which exp is the sum.
pub(super) fn angle_bounds(n: &mut Note, d: f32, quotient: bool) {
    (n.num, n.den) = (d, if quotient { d } else { 0.0 });
    (n.tall, n.deep) = (1.5 * d, if quotient { 1.5 * d } else { 0.0 });
}

pub(super) fn factor_bounds(n: &mut Note, b: &Note, k: f32) {
    let a = k.abs();
    if k >= 0.0 {
        n.num += a * b.num;
        n.den += a * b.den;
        n.tall += a * b.tall;
        n.deep += a * b.deep;
    } else {
        n.num += a * b.den;
        n.den += a * b.num;
        n.tall += a * b.deep;
        n.deep += a * b.tall;
    }
}

fn gcd(a: u64, b: u64) -> u64 {
    if b == 0 { a } else { gcd(b, a % b) }
}

/// The least common multiple, saturating.
pub(super) fn lcm(a: u32, b: u32) -> u32 {
    let l = a as u64 / gcd(a as u64, b as u64).max(1) * b as u64;
    u32::try_from(l).unwrap_or(u32::MAX)
}
