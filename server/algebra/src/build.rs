//! The constructors: sums, products and powers in canonical form. They know no assumptions.
//!
//! Rules, by name, with their side conditions:
//! - *collect*: equal terms of a sum add their coefficients, equal bases of a product their exponents. Always valid.
//! - *flatten*: a sum in a sum, a product in a product under an integer exponent. Always valid.
//! - *number over sum*: c (a + b) = c a + c b for a number c.
//! - *content*: (c a + c b)^n = cⁿ (a + b)^n for integer n; the first coefficient is made positive.
//! - *content of roots*: (c a)^(p/q) = c^(p/q) a^(p/q) only for positive c with rational c^(p/q).
//! - *power of a power*: (x^a)^n = x^(a n) only for integer n. √(x²) stays.
//! - *numeric roots*: squares are taken out of √n; radicals of integers stay as factors.

use crate::arena::{Arena, Expr, Node, Symbol};
use crate::rational::Rational;
use smallvec::SmallVec;
use std::sync::Arc;

/// Numbers with more bits than this stay symbolic powers.
pub const MAX_BITS: usize = 8192;

type Factors = SmallVec<[(Expr, Rational); 6]>;

impl Arena {
    /// A rational number.
    pub fn number(&mut self, r: Rational) -> Expr {
        self.intern(Node::Number(r))
    }

    /// An integer.
    pub fn integer(&mut self, n: i64) -> Expr {
        self.number(Rational::integer(n))
    }

    /// π.
    pub fn pi(&mut self) -> Expr {
        self.intern(Node::Pi)
    }

    /// A symbol as an expression.
    pub fn sym(&mut self, s: Symbol) -> Expr {
        self.intern(Node::Symbol(s))
    }

    /// The time derivative of order `order` of a coordinate or an input; the symbol itself for order 0.
    pub fn jet(&mut self, s: Symbol, order: u16) -> Expr {
        if order == 0 { self.sym(s) } else { self.intern(Node::Jet(s, order)) }
    }

    /// The member of a family at `index`, differentiated `order` times. At a number it is that member's own symbol.
    pub fn member(&mut self, family: Symbol, index: Expr, order: u16) -> Expr {
        if let Some(k) = self.as_i64(index) {
            let info = self.info(family).clone();
            let s = self.symbol(&info.name, Some(k), info.role);
            return self.jet(s, order);
        }
        self.intern(Node::Member { family, index, order })
    }

    /// The value of a numeric expression.
    pub fn as_number(&self, e: Expr) -> Option<&Rational> {
        match self.node(e) {
            Node::Number(r) => Some(r),
            _ => None,
        }
    }

    /// The value of an integer expression that fits a word.
    pub fn as_i64(&self, e: Expr) -> Option<i64> {
        self.as_number(e)?.to_i64()
    }

    /// Splits `c · rest` where `rest` is a single term: the coefficient of a one-term sum, of a number itself, else one.
    pub fn split_coefficient(&self, e: Expr) -> (Rational, Expr) {
        match self.node(e) {
            Node::Number(r) => (r.clone(), Self::ONE),
            Node::Sum(c, terms) if c.is_zero() && terms.len() == 1 => (terms[0].1.clone(), terms[0].0),
            _ => (Rational::ONE, e),
        }
    }

    /// The summands as (term, coefficient), the constant as (1, constant).
    pub fn summands(&self, e: Expr) -> Vec<(Expr, Rational)> {
        match self.node(e) {
            Node::Number(r) if r.is_zero() => Vec::new(),
            Node::Number(r) => vec![(Self::ONE, r.clone())],
            Node::Sum(c, terms) => {
                let mut v: Vec<_> = terms.to_vec();
                if !c.is_zero() {
                    v.push((Self::ONE, c.clone()));
                }
                v
            }
            _ => vec![(e, Rational::ONE)],
        }
    }

    /// The factors of a term as (base, exponent).
    pub fn factors(&self, e: Expr) -> Vec<(Expr, Rational)> {
        match self.node(e) {
            Node::Product(f) => f.to_vec(),
            _ if e == Self::ONE => Vec::new(),
            _ => vec![(e, Rational::ONE)],
        }
    }

    /// `a + b`.
    pub fn add(&mut self, a: Expr, b: Expr) -> Expr {
        if a == Self::ZERO {
            return b;
        }
        if b == Self::ZERO {
            return a;
        }
        self.linear(&[(a, Rational::ONE), (b, Rational::ONE)])
    }

    /// `a - b`.
    pub fn sub(&mut self, a: Expr, b: Expr) -> Expr {
        self.linear(&[(a, Rational::ONE), (b, Rational::MINUS_ONE)])
    }

    /// `-a`.
    pub fn neg(&mut self, a: Expr) -> Expr {
        self.scale(a, &Rational::MINUS_ONE)
    }

    /// The sum of all.
    pub fn sum(&mut self, terms: &[Expr]) -> Expr {
        match terms {
            [] => Self::ZERO,
            [a] => *a,
            _ => {
                let list: SmallVec<[(Expr, Rational); 8]> = terms.iter().map(|&t| (t, Rational::ONE)).collect();
                self.linear(&list)
            }
        }
    }

    /// `c · a` for a number `c`.
    pub fn scale(&mut self, a: Expr, c: &Rational) -> Expr {
        if c.is_one() { a } else { self.linear(&[(a, c.clone())]) }
    }

    /// `Σ coefficient · expression`. Costs the number of summands times its logarithm.
    pub fn linear(&mut self, list: &[(Expr, Rational)]) -> Expr {
        let mut constant = Rational::ZERO;
        let mut terms: SmallVec<[(Expr, Rational); 16]> = SmallVec::new();
        for (e, c) in list {
            if c.is_zero() {
                continue;
            }
            match self.node(*e) {
                Node::Number(r) => constant = constant.add(&r.mul(c)),
                Node::Undefined => return Self::UNDEFINED,
                Node::Sum(k, inner) => {
                    if !k.is_zero() {
                        constant = constant.add(&k.mul(c));
                    }
                    if c.is_one() {
                        terms.extend(inner.iter().cloned());
                    } else {
                        terms.extend(inner.iter().map(|(x, d)| (*x, d.mul(c))));
                    }
                }
                _ => terms.push((*e, c.clone())),
            }
        }
        if terms.len() > 1 {
            terms.sort_by(|a, b| self.order(a.0, b.0));
            let mut kept = 0;
            for i in 1..terms.len() {
                if terms[i].0 == terms[kept].0 {
                    terms[kept].1 = terms[kept].1.add(&terms[i].1);
                } else {
                    if !terms[kept].1.is_zero() {
                        kept += 1;
                    }
                    terms.swap(kept, i);
                }
            }
            if !terms[kept].1.is_zero() {
                kept += 1;
            }
            terms.truncate(kept);
        }
        if terms.is_empty() {
            return self.number(constant);
        }
        if terms.len() == 1 && constant.is_zero() && terms[0].1.is_one() {
            return terms[0].0;
        }
        let terms: Arc<[_]> = terms.into_iter().collect();
        self.intern(Node::Sum(constant, terms))
    }

    /// `a · b`.
    pub fn mul(&mut self, a: Expr, b: Expr) -> Expr {
        if a == Self::ONE {
            return b;
        }
        if b == Self::ONE {
            return a;
        }
        self.monomial(&[(a, Rational::ONE), (b, Rational::ONE)])
    }

    /// The product of all.
    pub fn product(&mut self, factors: &[Expr]) -> Expr {
        let list: Factors = factors.iter().map(|&t| (t, Rational::ONE)).collect();
        self.monomial(&list)
    }

    /// `a / b`; [`Arena::UNDEFINED`] where `b` is the number zero.
    pub fn div(&mut self, a: Expr, b: Expr) -> Expr {
        self.monomial(&[(a, Rational::ONE), (b, Rational::MINUS_ONE)])
    }

    /// `base ^ r` for a rational exponent.
    pub fn pow_rational(&mut self, base: Expr, r: &Rational) -> Expr {
        if r.is_one() { base } else { self.monomial(&[(base, r.clone())]) }
    }

    /// `base ^ n`.
    pub fn pow(&mut self, base: Expr, n: i64) -> Expr {
        self.pow_rational(base, &Rational::integer(n))
    }

    /// `√a`.
    pub fn sqrt(&mut self, a: Expr) -> Expr {
        self.pow_rational(a, &Rational::HALF)
    }

    /// `base ^ exponent` for any exponent.
    pub fn power(&mut self, base: Expr, exponent: Expr) -> Expr {
        if let Some(r) = self.as_number(exponent) {
            let r = r.clone();
            return self.pow_rational(base, &r);
        }
        if base == Self::ONE {
            return Self::ONE;
        }
        if base == Self::UNDEFINED || exponent == Self::UNDEFINED {
            return Self::UNDEFINED;
        }
        self.intern(Node::Power(base, exponent))
    }

    /// `Π base^exponent`. Costs the number of factors times its logarithm.
    pub fn monomial(&mut self, list: &[(Expr, Rational)]) -> Expr {
        let mut coefficient = Rational::ONE;
        let mut factors: Factors = SmallVec::new();
        let mut powers: SmallVec<[(Expr, Expr); 2]> = SmallVec::new();
        let mut zero = false;
        for (base, exponent) in list {
            if !exponent.is_zero() {
                self.push_factor(*base, exponent, &mut coefficient, &mut factors, &mut powers, &mut zero, 0);
            }
        }
        for (b, e) in std::mem::take(&mut powers) {
            // Powers of one base under symbolic exponents add their exponents.
            let mut total = e;
            factors.retain(|(f, r)| {
                let same = match self.nodes_of_power(*f) {
                    Some((b2, e2)) if b2 == b => {
                        total = {
                            let e2 = self.scale(e2, r);
                            self.add(total, e2)
                        };
                        true
                    }
                    _ => false,
                };
                !same
            });
            let p = self.power(b, total);
            if self.nodes_of_power(p).is_some() {
                factors.push((p, Rational::ONE));
            } else {
                let mut none = SmallVec::new();
                self.push_factor(p, &Rational::ONE, &mut coefficient, &mut factors, &mut none, &mut zero, 0);
            }
        }
        if coefficient.is_zero() || factors.iter().any(|f| f.0 == Self::UNDEFINED) || zero {
            let undefined = factors.iter().any(|f| f.0 == Self::UNDEFINED);
            return if undefined { Self::UNDEFINED } else { Self::ZERO };
        }
        self.collect_factors(&mut factors, &mut coefficient);
        let core = match factors.len() {
            0 => return self.number(coefficient),
            1 if factors[0].1.is_one() => factors[0].0,
            _ => {
                let list: Arc<[_]> = factors.into_iter().collect();
                self.intern(Node::Product(list))
            }
        };
        self.scale(core, &coefficient)
    }

    fn nodes_of_power(&self, e: Expr) -> Option<(Expr, Expr)> {
        match self.node(e) {
            Node::Power(b, x) => Some((*b, *x)),
            _ => None,
        }
    }

    /// *Collect* for products; radicals of integers that became whole go to the coefficient.
    fn collect_factors(&mut self, factors: &mut Factors, coefficient: &mut Rational) {
        // Each round removes a factor that can flatten; a content too large to be taken out would come back forever.
        for _ in 0..16 {
            if factors.len() > 1 {
                factors.sort_by(|a, b| self.order(a.0, b.0));
                let mut kept = 0;
                for i in 1..factors.len() {
                    if factors[i].0 == factors[kept].0 {
                        factors[kept].1 = factors[kept].1.add(&factors[i].1);
                    } else {
                        if !factors[kept].1.is_zero() {
                            kept += 1;
                        }
                        factors.swap(kept, i);
                    }
                }
                if !factors[kept].1.is_zero() {
                    kept += 1;
                }
                factors.truncate(kept);
            }
            // A base whose exponent became an integer by collecting may flatten further.
            let again = factors.iter().position(|(b, e)| match self.node(*b) {
                Node::Number(r) => {
                    let whole = e.floor().unwrap_or(i64::MAX);
                    whole != 0 && r.pow(whole, MAX_BITS).is_some() && r.small().is_some()
                }
                Node::Product(_) => e.is_integer(),
                Node::Sum(k, terms) => {
                    (k.is_zero() && terms.len() == 1 || !self.meta(*b).primitive)
                        && (factors.len() > 1 || !e.is_one())
                        && e.to_i64().is_some_and(|n| n.unsigned_abs() < 64)
                }
                _ => false,
            });
            let Some(i) = again else { return };
            let (b, e) = factors.remove(i);
            let mut powers = SmallVec::new();
            let mut zero = false;
            let alone = factors.is_empty() && e.is_one();
            if alone {
                factors.push((b, e));
                return;
            }
            self.push_factor(b, &e, coefficient, factors, &mut powers, &mut zero, 0);
            debug_assert!(!zero && powers.is_empty());
        }
    }

    #[allow(clippy::too_many_arguments)]
    fn push_factor(
        &mut self,
        base: Expr,
        exponent: &Rational,
        coefficient: &mut Rational,
        factors: &mut Factors,
        powers: &mut SmallVec<[(Expr, Expr); 2]>,
        zero: &mut bool,
        level: u32,
    ) {
        match self.node(base) {
            Node::Undefined => factors.push((base, Rational::ONE)),
            Node::Number(r) => {
                let r = r.clone();
                self.push_number(&r, exponent, coefficient, factors, zero);
            }
            Node::Product(inner) if exponent.is_integer() => {
                let inner = inner.clone();
                for (b, e) in inner.iter() {
                    let e = e.mul(exponent);
                    // A radical raised to an integer may become whole: √x ^ 2 = x.
                    if level < 64 {
                        self.push_factor(*b, &e, coefficient, factors, powers, zero, level + 1);
                    } else {
                        factors.push((*b, e));
                    }
                }
            }
            Node::Power(b, x) if exponent.is_integer() => {
                let (b, x) = (*b, *x);
                let x = self.scale(x, exponent);
                powers.push((b, x));
            }
            Node::Sum(k, terms) => {
                let single = k.is_zero() && terms.len() == 1;
                if single && exponent.is_integer() {
                    let (inner, c) = terms[0].clone();
                    self.push_number(&c, exponent, coefficient, factors, zero);
                    self.push_factor(inner, exponent, coefficient, factors, powers, zero, level + 1);
                    return;
                }
                if self.meta(base).primitive && !single || exponent.to_i64().is_some_and(|n| n.unsigned_abs() >= 64) {
                    factors.push((base, exponent.clone()));
                    return;
                }
                let mut content = k.abs();
                for (_, c) in terms.iter() {
                    content = if content.is_zero() { c.abs() } else { content.content(c) };
                }
                if exponent.is_integer() && terms[0].1.is_negative() {
                    content = content.neg();
                }
                if exponent.is_integer() {
                    match content.pow(exponent.to_i64().unwrap_or(i64::MAX), MAX_BITS) {
                        Some(c) => *coefficient = coefficient.mul(&c),
                        None => return factors.push((base, exponent.clone())),
                    }
                } else {
                    // *content of roots*.
                    match rational_root(&content, exponent) {
                        Some(c) if !content.is_one() => *coefficient = coefficient.mul(&c),
                        _ => return factors.push((base, exponent.clone())),
                    }
                }
                let inverse = content.recip().unwrap_or(Rational::ONE);
                let primitive = self.scale(base, &inverse);
                if exponent.is_integer() && !matches!(self.node(primitive), Node::Sum(..)) {
                    self.push_factor(primitive, exponent, coefficient, factors, powers, zero, level + 1);
                } else {
                    factors.push((primitive, exponent.clone()));
                }
            }
            _ => factors.push((base, exponent.clone())),
        }
    }

    /// *Numeric roots.* Pushes the radicals of r^exponent and multiplies the rational part into the coefficient.
    fn push_number(
        &mut self,
        r: &Rational,
        exponent: &Rational,
        coefficient: &mut Rational,
        factors: &mut Factors,
        zero: &mut bool,
    ) {
        if r.is_zero() {
            if exponent.is_negative() {
                factors.push((Self::UNDEFINED, Rational::ONE));
            } else {
                *zero = true;
            }
            return;
        }
        if exponent.is_integer() {
            match exponent.to_i64().and_then(|n| r.pow(n, MAX_BITS)) {
                Some(c) => *coefficient = coefficient.mul(&c),
                None => {
                    let base = self.number(r.clone());
                    factors.push((base, exponent.clone()));
                }
            }
            return;
        }
        let whole = exponent.floor().unwrap_or(0);
        let fraction = exponent.sub(&Rational::integer(whole));
        let (Some(c), Some((num, den))) = (r.pow(whole, MAX_BITS), r.small()) else {
            let base = self.number(r.clone());
            factors.push((base, exponent.clone()));
            return;
        };
        *coefficient = coefficient.mul(&c);
        // (a/b)^f = a^f b^(1-f) / b.
        if num < 0 {
            // The principal root of −1; a product of two of them is −1 again.
            let base = self.integer(-1);
            factors.push((base, fraction.clone()));
        }
        self.push_integer_root(num.unsigned_abs(), &fraction, coefficient, factors);
        if den > 1 {
            let rest = Rational::ONE.sub(&fraction);
            self.push_integer_root(den as u64, &rest, coefficient, factors);
            *coefficient = coefficient.mul(&Rational::new(1, den).unwrap_or(Rational::ONE));
        }
    }

    fn push_integer_root(&mut self, n: u64, f: &Rational, coefficient: &mut Rational, factors: &mut Factors) {
        let mut rest = n;
        let mut push = |arena: &mut Arena, p: u64, k: i64| {
            let e = f.mul(&Rational::integer(k));
            let whole = e.floor().unwrap_or(0);
            let Ok(base) = i64::try_from(p) else { return };
            if let Some(c) = Rational::integer(base).pow(whole, MAX_BITS) {
                *coefficient = coefficient.mul(&c);
            }
            let e = e.sub(&Rational::integer(whole));
            if !e.is_zero() {
                let b = arena.integer(base);
                factors.push((b, e));
            }
        };
        let mut p = 2u64;
        while p * p <= rest && p < 2000 {
            let mut k = 0;
            while rest.is_multiple_of(p) {
                rest /= p;
                k += 1;
            }
            if k > 0 {
                push(self, p, k);
            }
            p += if p == 2 { 1 } else { 2 };
        }
        if rest > 1 {
            // What trial division left may still be a square.
            let root = rest.isqrt();
            if root * root == rest { push(self, root, 2) } else { push(self, rest, 1) }
        }
    }
}

/// c^(p/q) where it is rational: numerator and denominator are perfect q-th powers. Positive c only.
fn rational_root(c: &Rational, exponent: &Rational) -> Option<Rational> {
    if c.signum() <= 0 {
        return None;
    }
    let (n, d) = c.small()?;
    let (p, q) = exponent.small()?;
    let root = |x: i64| {
        let guess = (x as f64).powf(1.0 / q as f64).round() as i64;
        (guess.checked_pow(u32::try_from(q).ok()?)? == x).then_some(guess)
    };
    Rational::new(root(n)?, root(d)?)?.pow(p, MAX_BITS)
}
