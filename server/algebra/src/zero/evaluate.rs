//! Evaluation of nodes at points of a finite field. Residues are kept, so that an edit evaluates new nodes only.

use super::field::{Element, Field, TURN, inverse_modulo, mul_modulo};
use super::plan::{Factor, Kind, LogTerm, Plan};
use super::points::{Env, Index, Point, atom, atom_value, draw, index, level, shared};
use super::table::{Domain, Place, Values};
use crate::arena::{Expr, Node};
use crate::function::Function;
use crate::rational::Rational;
use std::sync::Arc;

/// A point with its field; the values are residues.
pub(crate) struct FieldPoint {
    pub point: Point,
    pub field: Arc<Field>,
    /// What stands under the roots that take their other value.
    pub negated: Vec<Expr>,
}

impl Domain for FieldPoint {
    type Value = Element;
    const UNSET: Element = Element { re: u64::MAX, im: 0 };
    // A denominator vanishes, or the field lacks the root.
    const NOWHERE: Element = Element { re: u64::MAX - 1, im: 0 };
    const PLANNED: bool = true;
    const ZERO: Element = Element::ZERO;

    #[inline]
    fn exists(v: Element) -> bool {
        v.re < u64::MAX - 1
    }

    fn plus(&self, a: Element, b: Element) -> Element {
        self.field.add2(a, b)
    }

    fn times(&self, a: Element, count: i64) -> Element {
        if count == 1 { a } else { self.field.scale2(a, self.field.residue(count.unsigned_abs())) }
    }

    fn near(&self) -> bool {
        self.point.near
    }

    fn symbolic_sum(&self, at: Place<'_>, e: Expr) -> Element {
        if at.notes.note(e).free != 0 {
            return NOWHERE;
        }
        self.seeded(&[at.arena.key(e), 0x5])
    }

    fn compute(&self, at: Place<'_>, values: &Values<Element>, e: Expr, env: &Env) -> Element {
        let f = &*self.field;
        if let Some(p) = at.notes.plan(e) {
            return self.planned(at, values, e, p).unwrap_or(NOWHERE);
        }
        match at.arena.node(e) {
            Node::Number(r) => number(f, r),
            Node::Pi => self.pi(),
            Node::Undefined => NOWHERE,
            Node::Symbol(s) => match level(at.arena, *s).and_then(|k| env[k]) {
                Some(v) => number(f, &Rational::integer(v)),
                None => self.atom(at, e, env),
            },
            Node::Jet(..) | Node::Member { .. } => self.atom(at, e, env),
            Node::Sum(k, terms) => {
                let mut s = if k.is_zero() { Element::ZERO } else { number(f, k) };
                for (x, c) in terms.iter() {
                    let v = values.get(*x);
                    if !exists(v) || !exists(s) {
                        return NOWHERE;
                    }
                    s = match c.to_i64() {
                        Some(1) => f.add2(s, v),
                        Some(-1) => f.sub2(s, v),
                        _ => match residue(f, c) {
                            Some(c) => f.add2(s, f.scale2(v, c)),
                            None => return NOWHERE,
                        },
                    };
                }
                s
            }
            Node::Product(list) => {
                let (mut num, mut den) = (Element::ONE, Element::ONE);
                let mut inverted = false;
                for (b, r) in list.iter() {
                    let v = values.get(*b);
                    let Some(k) = r.to_i64().filter(|_| exists(v)) else { return NOWHERE };
                    let power = f.pow2(v, k.unsigned_abs());
                    if k < 0 {
                        den = f.mul2(den, power);
                        inverted = true;
                    } else {
                        num = f.mul2(num, power);
                    }
                }
                if !inverted {
                    num
                } else if den.is_zero() {
                    NOWHERE
                } else {
                    f.mul2(num, f.inv2(den))
                }
            }
            Node::Call(g, args) => self.call(values, *g, args).unwrap_or(NOWHERE),
            Node::Unspecified { function, index: i, orders, args } => {
                let name = super::assumptions::atom_key;
                let near = |k: Option<i64>| if self.point.near { shared(at.arena, *function, k) } else { k };
                let key = match i.map(|i| index(at.arena, i, env)) {
                    None => name(at.arena, *function, near(None), 0),
                    Some(Index::At(k)) => name(at.arena, *function, near(Some(k)), 0),
                    Some(Index::Free(k)) => k ^ name(at.arena, *function, None, 0).rotate_left(7),
                };
                let mut words = vec![key, 0xF];
                words.extend(orders.iter().map(|o| *o as u64));
                for a in args.iter() {
                    let v = values.get(*a);
                    if !exists(v) {
                        return NOWHERE;
                    }
                    words.extend([v.re, v.im]);
                }
                self.seeded(&words)
            }
            // A power always has a plan.
            Node::Power(..) => NOWHERE,
            Node::Bound { .. } => self.symbolic_sum(at, e),
        }
    }
}

/// Whether there is a value.
pub(crate) fn exists(v: Element) -> bool {
    FieldPoint::exists(v)
}

const NOWHERE: Element = FieldPoint::NOWHERE;

impl FieldPoint {
    /// A residue drawn from words.
    fn seeded(&self, words: &[u64]) -> Element {
        Element::real(self.drawn(words))
    }

    fn drawn(&self, words: &[u64]) -> u64 {
        let mut all: smallvec::SmallVec<[u64; 12]> = smallvec::smallvec![self.point.seed, self.field.p];
        all.extend_from_slice(words);
        draw(&self.field, &all)
    }

    fn pi(&self) -> Element {
        let u = self.drawn(&[0x314159]);
        Element::real(self.field.mul(u, u))
    }

    fn atom(&self, at: Place<'_>, e: Expr, env: &Env) -> Element {
        let (key, sign) = atom(at.arena, at.facts, e, env, self.point.near);
        atom_value(&self.field, &self.point, key, sign)
    }

    fn planned(&self, at: Place<'_>, values: &Values<Element>, e: Expr, p: &Plan) -> Option<Element> {
        let f = &*self.field;
        match p {
            Plan::Angle { terms, turn, known } => {
                let mut z = self.turned(turn)?;
                for k in known.iter() {
                    let (c, s) = (defined(values, k.cosine)?, defined(values, k.sine)?);
                    if !c.is_real() || !s.is_real() {
                        return None;
                    }
                    let s = if k.times < 0 { f.neg(s.re) } else { s.re };
                    z = f.mul2(z, f.pow2(Element { re: c.re, im: s }, k.times.unsigned_abs()));
                }
                for (m, r) in terms.iter() {
                    z = f.mul2(z, self.on_circle(defined(values, *m)?, r)?);
                }
                let Node::Call(g, _) = at.arena.node(e) else { return None };
                match g {
                    Function::Sin => Some(Element::real(z.im)),
                    Function::Cos => Some(Element::real(z.re)),
                    _ if z.re == 0 => None,
                    _ => Some(Element::real(f.mul(z.im, f.inv(z.re)))),
                }
            }
            Plan::Exponential { terms, factors } => {
                let mut x = self.factors(values, factors)?;
                for (m, r) in terms.iter() {
                    x = f.mul2(x, Element::real(self.exponential(defined(values, *m)?, r)?));
                }
                let Node::Call(g, _) = at.arena.node(e) else { return None };
                if x.is_zero() {
                    return if *g == Function::Exp { Some(x) } else { None };
                }
                let y = || f.inv2(x);
                let half = f.inv(2);
                match g {
                    Function::Exp => Some(x),
                    Function::Sinh => Some(f.scale2(f.sub2(x, y()), half)),
                    Function::Cosh => Some(f.scale2(f.add2(x, y()), half)),
                    _ => {
                        let (s, c) = (f.sub2(x, y()), f.add2(x, y()));
                        if c.is_zero() { None } else { Some(f.mul2(s, f.inv2(c))) }
                    }
                }
            }
            Plan::Power { factors, terms, logs } => {
                let mut x = self.factors(values, factors)?;
                for (m, r) in terms.iter() {
                    let m = defined(values, *m)?;
                    for l in logs.iter() {
                        let v = f.mul2(m, self.logarithm(values, l)?);
                        x = f.mul2(x, Element::real(self.exponential(v, &r.mul(&l.coefficient))?));
                    }
                }
                Some(x)
            }
            Plan::Product(factors) => self.factors(values, factors),
            Plan::Log(logs) => {
                let mut s = Element::ZERO;
                for l in logs.iter() {
                    s = f.add2(s, f.mul2(number_opt(f, &l.coefficient)?, self.logarithm(values, l)?));
                }
                Some(s)
            }
            Plan::Bound { .. } => None,
        }
    }

    /// The logarithm of the base: an atom drawn from the base's residue.
    fn logarithm(&self, values: &Values<Element>, l: &LogTerm) -> Option<Element> {
        let v = defined(values, l.base)?;
        if l.plain {
            return Some(v);
        }
        if v.is_zero() {
            return None;
        }
        if v == Element::ONE {
            return Some(Element::ZERO);
        }
        Some(self.seeded(&[v.re, v.im, 0x10C]))
    }

    /// e^{iπr}: an exact root of unity as far as the field has it; a part with other denominators is drawn.
    fn turned(&self, r: &Rational) -> Option<Element> {
        let f = &*self.field;
        if r.is_zero() {
            return Some(Element::ONE);
        }
        let (n, d) = r.small()?;
        let half_turn = TURN as i64 / 2;
        // d = known · rest; 1/d = u/known + v/rest.
        let mut rest = d;
        for q in [2, 3, 5, 7] {
            while rest % q == 0 {
                rest /= q;
            }
        }
        let mut known = d / rest;
        if half_turn % known != 0 {
            // Too high a power of 2, 3, 5 or 7: all of it is drawn.
            (known, rest) = (1, d);
        }
        let n = n.rem_euclid(2 * d);
        if rest == 1 {
            return Some(f.unit((n * (half_turn / known)) as u64));
        }
        let v = inverse_modulo((known % rest) as u64, rest as u64)? as i64;
        let u = (1 - v as i128 * known as i128) / rest as i128;
        let turns =
            (u.rem_euclid(2 * known as i128) * n as i128 * (half_turn / known) as i128).rem_euclid(TURN as i128) as u64;
        let z = f.on_circle(self.drawn(&[rest as u64, 0x2C]));
        let power = (v as i128 * n as i128).rem_euclid(2 * rest as i128) as u64;
        Some(f.mul2(f.unit(turns), f.pow2(z, power)))
    }

    /// e^{i r m} for a base monomial of residue m.
    fn on_circle(&self, m: Element, r: &Rational) -> Option<Element> {
        let f = &*self.field;
        if m.is_zero() {
            return Some(Element::ONE);
        }
        let z = f.on_circle(self.drawn(&[m.re, m.im, 0xC]));
        Some(f.pow2(z, fraction(r, TURN, f.p + 1)?))
    }

    /// e^{r m}, a square, for a base monomial of residue m.
    fn exponential(&self, m: Element, r: &Rational) -> Option<u64> {
        let f = &*self.field;
        if m.is_zero() {
            return Some(1);
        }
        let u = self.drawn(&[m.re, m.im, 0xE]);
        // The squares have odd order: every power of two divides.
        Some(f.pow(f.mul(u, u), fraction(r, 1, (f.p - 1) / 2)?))
    }

    fn factors(&self, values: &Values<Element>, factors: &[Factor]) -> Option<Element> {
        let f = &*self.field;
        let (mut num, mut den) = (Element::ONE, Element::ONE);
        let power = |v: Element, k: i64, num: &mut Element, den: &mut Element| {
            let p = f.pow2(v, k.unsigned_abs());
            if k < 0 { *den = f.mul2(*den, p) } else { *num = f.mul2(*num, p) }
        };
        for t in factors {
            let v = defined(values, t.base)?;
            match &t.kind {
                Kind::Integer(k) => power(v, *k, &mut num, &mut den),
                Kind::Absolute(k) if self.point.loose => power(self.drawn_of(v, 0xAB), *k, &mut num, &mut den),
                Kind::Signum if self.point.loose => {
                    // sign x = |x|/x.
                    num = f.mul2(num, self.drawn_of(v, 0xAB));
                    power(v, -1, &mut num, &mut den);
                }
                Kind::Root(k) if self.point.loose => {
                    num = f.mul2(num, self.seeded(&[v.re, v.im, 0x2007]));
                    power(v, *k, &mut num, &mut den);
                }
                Kind::Absolute(k) => {
                    let v = if real_sign(f, v)? < 0 { f.neg2(v) } else { v };
                    power(v, *k, &mut num, &mut den);
                }
                Kind::Signum => match real_sign(f, v)? {
                    0 => num = Element::ZERO,
                    1 => {}
                    _ => num = f.neg2(num),
                },
                Kind::Root(k) => {
                    if !v.is_real() || v.is_zero() {
                        return None;
                    }
                    num = f.mul2(num, f.sqrt(v.re));
                    if self.negated.contains(&t.base) {
                        num = f.neg2(num);
                    }
                    power(v, *k, &mut num, &mut den);
                }
                Kind::Other(r) if self.point.loose && r.small().is_none_or(|(_, d)| d % 2 == 0) => {
                    let (n, d) = r.small()?;
                    power(self.seeded(&[v.re, v.im, d as u64, 0x2008]), n, &mut num, &mut den);
                }
                Kind::Other(r) => num = f.mul2(num, root(f, v, r)?),
            }
        }
        if den == Element::ONE {
            Some(num)
        } else if den.is_zero() {
            None
        } else {
            Some(f.mul2(num, f.inv2(den)))
        }
    }

    /// A residue drawn from v or from −v, the same for both.
    fn drawn_of(&self, v: Element, tag: u64) -> Element {
        let minus = self.field.neg2(v);
        let w = if (v.re, v.im) <= (minus.re, minus.im) { v } else { minus };
        self.seeded(&[w.re, w.im, tag])
    }

    fn call(&self, values: &Values<Element>, g: Function, args: &[Expr]) -> Option<Element> {
        let f = &*self.field;
        let x = defined(values, args[0])?;
        // Odd functions of x and −x are drawn from the same of the two.
        let odd = |tag: u64, v: Element| {
            let minus = f.neg2(v);
            if v.is_zero() {
                Element::ZERO
            } else if (v.re, v.im) <= (minus.re, minus.im) {
                self.seeded(&[v.re, v.im, tag])
            } else {
                f.neg2(self.seeded(&[minus.re, minus.im, tag]))
            }
        };
        match g {
            Function::Asin => Some(odd(0xA5, x)),
            // acos x = π/2 − asin x.
            Function::Acos => Some(f.sub2(f.scale2(self.pi(), f.inv(2)), odd(0xA5, x))),
            Function::Atan => Some(odd(0xA7, x)),
            Function::Atan2 => {
                let y = defined(values, args[1])?;
                Some(self.seeded(&[x.re, x.im, y.re, y.im, 0xA2]))
            }
            Function::Min | Function::Max => {
                let list: Option<Vec<Element>> = args.iter().map(|a| defined(values, *a)).collect();
                let mut list = list?;
                if let [a, b] = list.as_slice() {
                    if self.point.loose {
                        // (a + b ± |a − b|)/2.
                        let gap = self.drawn_of(f.sub2(*a, *b), 0xAB);
                        let sum = f.add2(*a, *b);
                        let s = if g == Function::Max { f.add2(sum, gap) } else { f.sub2(sum, gap) };
                        return Some(f.scale2(s, f.inv(2)));
                    }
                    // max(a, b) = a where a − b is positive.
                    let first = (real_sign(f, f.sub2(*a, *b))? >= 0) == (g == Function::Max);
                    return Some(if first { *a } else { *b });
                }
                list.sort_by_key(|v| (v.re, v.im));
                list.dedup();
                let mut words = vec![0xE7 + (g == Function::Max) as u64];
                words.extend(list.iter().flat_map(|v| [v.re, v.im]));
                Some(self.seeded(&words))
            }
            _ => None,
        }
    }
}

fn defined(values: &Values<Element>, e: Expr) -> Option<Element> {
    Some(values.get(e)).filter(|v| exists(*v))
}

fn real_sign(f: &Field, v: Element) -> Option<i32> {
    v.is_real().then(|| f.chi(v.re))
}

/// The residue of a rational number.
fn residue(f: &Field, r: &Rational) -> Option<u64> {
    match r.small() {
        Some((n, d)) => {
            let u = f.residue(n.unsigned_abs());
            let u = if n < 0 { f.neg(u) } else { u };
            match d {
                1 => Some(u),
                _ => match f.residue(d as u64) {
                    0 => None,
                    d => Some(f.mul(u, f.inv(d))),
                },
            }
        }
        None => {
            let (n, d) = r.modulo(f.p)?;
            Some(f.mul(n, f.inv(d)))
        }
    }
}

fn number_opt(f: &Field, r: &Rational) -> Option<Element> {
    residue(f, r).map(Element::real)
}

/// The residue of a rational number as an element.
pub(crate) fn number(f: &Field, r: &Rational) -> Element {
    number_opt(f, r).unwrap_or(NOWHERE)
}

/// `reserve` · r modulo the order of a cyclic group, where the denominator divides exactly: a part of it divides the
/// reserve, the rest has an inverse.
fn fraction(r: &Rational, reserve: u64, order: u64) -> Option<u64> {
    let (n, d) = r.small()?;
    let mut d = d as u64;
    let mut reserve = reserve;
    loop {
        let g = gcd(reserve, d);
        if g == 1 {
            break;
        }
        reserve /= g;
        d /= g;
    }
    let inverse = if d == 1 { 1 } else { inverse_modulo(d % order, order)? };
    let n = (n as i128).rem_euclid(order as i128) as u64;
    Some(mul_modulo(mul_modulo(n, reserve % order, order), inverse, order))
}

/// v^r for other exponents, where the field has exactly one such root or a positive one.
fn root(f: &Field, v: Element, r: &Rational) -> Option<Element> {
    let (n, d) = r.small()?;
    if !v.is_real() || v.is_zero() {
        return None;
    }
    let twos = d.trailing_zeros();
    let odd = (d >> twos) as u64;
    // x ↦ x^odd permutes the group when odd and p − 1 have no common divisor.
    let inverse = inverse_modulo(odd, f.p - 1)?;
    let n = (n as i128).rem_euclid(f.p as i128 - 1) as u64;
    let mut x = f.pow(v.re, mul_modulo(n, inverse, f.p - 1));
    if twos == 0 {
        return Some(Element::real(x));
    }
    for _ in 1..twos {
        let s = f.sqrt(x);
        if !s.is_real() {
            return None;
        }
        x = s.re;
    }
    Some(f.sqrt(x))
}

fn gcd(a: u64, b: u64) -> u64 {
    if b == 0 { a } else { gcd(b, a % b) }
}
