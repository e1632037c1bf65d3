//! Sparse polynomials over the rationals in numbered variables; negative exponents are allowed where it is said.

use crate::budget::{Budget, Stopped};
use crate::rational::Rational;
use smallvec::SmallVec;
use std::collections::BTreeMap;

/// Exponents by variable, without trailing zeros.
pub(super) type Monomial = SmallVec<[i16; 12]>;

/// Exponents are kept below this.
pub(super) const MAX_EXPONENT: i16 = 200;
/// Greatest common divisors of longer polynomials are not looked for: 1 divides everything.
const MAX_GCD: usize = 120;

/// A polynomial: coefficients by monomial, none zero.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub(super) struct Poly(pub BTreeMap<Monomial, Rational>);

pub(super) fn exponent(m: &Monomial, k: usize) -> i16 {
    m.get(k).copied().unwrap_or(0)
}

pub(super) fn trim(mut m: Monomial) -> Monomial {
    while m.last() == Some(&0) {
        m.pop();
    }
    m
}

/// a · b^n.
pub(super) fn times(a: &Monomial, b: &Monomial, n: i16) -> Monomial {
    let mut out = a.clone();
    if out.len() < b.len() {
        out.resize(b.len(), 0);
    }
    for (x, y) in out.iter_mut().zip(b) {
        *x = x.saturating_add(y.saturating_mul(n));
    }
    trim(out)
}

pub(super) fn power_of(k: usize, n: i16) -> Monomial {
    let mut m = Monomial::from_elem(0, k + 1);
    m[k] = n;
    trim(m)
}

impl Poly {
    pub fn zero() -> Poly {
        Poly::default()
    }

    pub fn one() -> Poly {
        Poly::number(Rational::ONE)
    }

    pub fn number(r: Rational) -> Poly {
        Poly::monomial(Monomial::new(), r)
    }

    pub fn monomial(m: Monomial, r: Rational) -> Poly {
        let mut p = Poly::default();
        p.push(m, r);
        p
    }

    pub fn variable(k: usize) -> Poly {
        Poly::monomial(power_of(k, 1), Rational::ONE)
    }

    pub fn is_zero(&self) -> bool {
        self.0.is_empty()
    }

    pub fn is_one(&self) -> bool {
        self.as_number().is_some_and(|r| r.is_one())
    }

    pub fn as_number(&self) -> Option<Rational> {
        match self.0.len() {
            0 => Some(Rational::ZERO),
            1 => self.0.get(&Monomial::new()).cloned(),
            _ => None,
        }
    }

    /// Its only term.
    pub fn as_monomial(&self) -> Option<(&Monomial, &Rational)> {
        if self.0.len() == 1 { self.0.iter().next() } else { None }
    }

    pub fn push(&mut self, m: Monomial, r: Rational) {
        if r.is_zero() {
            return;
        }
        match self.0.entry(m) {
            std::collections::btree_map::Entry::Vacant(v) => {
                v.insert(r);
            }
            std::collections::btree_map::Entry::Occupied(mut o) => {
                let sum = o.get().add(&r);
                if sum.is_zero() {
                    o.remove();
                } else {
                    *o.get_mut() = sum;
                }
            }
        }
    }

    pub fn add(&self, other: &Poly) -> Poly {
        self.plus(other, &Rational::ONE)
    }

    pub fn sub(&self, other: &Poly) -> Poly {
        self.plus(other, &Rational::MINUS_ONE)
    }

    /// self + c · other.
    pub fn plus(&self, other: &Poly, c: &Rational) -> Poly {
        let mut out = self.clone();
        for (m, r) in &other.0 {
            out.push(m.clone(), r.mul(c));
        }
        out
    }

    pub fn scale(&self, c: &Rational) -> Poly {
        if c.is_zero() {
            return Poly::zero();
        }
        Poly(self.0.iter().map(|(m, r)| (m.clone(), r.mul(c))).collect())
    }

    pub fn neg(&self) -> Poly {
        self.scale(&Rational::MINUS_ONE)
    }

    /// Times a monomial.
    pub fn shift(&self, by: &Monomial, c: &Rational) -> Poly {
        Poly(self.0.iter().map(|(m, r)| (times(m, by, 1), r.mul(c))).collect())
    }

    pub fn mul(&self, other: &Poly, budget: &mut Budget) -> Result<Poly, Stopped> {
        budget.charge(1 + self.0.len() * other.0.len())?;
        let mut out = Poly::zero();
        for (m, r) in &self.0 {
            for (n, s) in &other.0 {
                let product = times(m, n, 1);
                if product.iter().any(|e| e.unsigned_abs() > MAX_EXPONENT as u16) {
                    return Err(Stopped::TooLarge);
                }
                out.push(product, r.mul(s));
            }
        }
        Ok(out)
    }

    pub fn pow(&self, n: u32, budget: &mut Budget) -> Result<Poly, Stopped> {
        let mut out = Poly::one();
        for _ in 0..n {
            out = out.mul(self, budget)?;
        }
        Ok(out)
    }

    /// The highest exponent of a variable; 0 of zero.
    pub fn degree(&self, k: usize) -> i16 {
        self.0.keys().map(|m| exponent(m, k)).max().unwrap_or(0)
    }

    pub fn has(&self, k: usize) -> bool {
        self.0.keys().any(|m| exponent(m, k) != 0)
    }

    /// The variables, in order.
    pub fn variables(&self) -> Vec<usize> {
        let n = self.0.keys().map(|m| m.len()).max().unwrap_or(0);
        (0..n).filter(|&k| self.has(k)).collect()
    }

    /// The lowest exponents in all variables: what can be taken out.
    pub fn lowest(&self) -> Monomial {
        let mut list = self.0.keys();
        let Some(first) = list.next() else { return Monomial::new() };
        let mut out = first.clone();
        for m in list {
            if out.len() < m.len() {
                out.resize(m.len(), 0);
            }
            for (k, x) in out.iter_mut().enumerate() {
                *x = (*x).min(exponent(m, k));
            }
        }
        trim(out)
    }

    /// ∂/∂xₖ.
    pub fn derivative(&self, k: usize) -> Poly {
        let mut out = Poly::zero();
        for (m, r) in &self.0 {
            let n = exponent(m, k);
            if n != 0 {
                out.push(times(m, &power_of(k, 1), -1), r.mul(&Rational::integer(n.into())));
            }
        }
        out
    }

    /// Coefficients of the powers of a variable, by exponent. No negative exponents of it.
    pub fn coefficients(&self, k: usize) -> Vec<Poly> {
        let mut out = vec![Poly::zero(); self.degree(k).max(0) as usize + 1];
        for (m, r) in &self.0 {
            let n = exponent(m, k);
            if n >= 0 {
                out[n as usize].push(times(m, &power_of(k, n), -1), r.clone());
            }
        }
        out
    }

    /// The term of the highest monomial.
    fn leading(&self) -> Option<(&Monomial, &Rational)> {
        self.0.last_key_value()
    }

    /// self = content · primitive: integer coefficients without a common factor, the leading one positive.
    pub fn primitive(&self) -> (Rational, Poly) {
        let mut content = Rational::ZERO;
        for r in self.0.values() {
            content = if content.is_zero() { r.abs() } else { content.content(r) };
        }
        if self.leading().is_some_and(|l| l.1.is_negative()) {
            content = content.neg();
        }
        match content.recip() {
            Some(inverse) => (content, self.scale(&inverse)),
            None => (Rational::ONE, self.clone()),
        }
    }

    /// self / other where that is a polynomial. No negative exponents.
    pub fn divide(&self, other: &Poly, budget: &mut Budget) -> Result<Option<Poly>, Stopped> {
        let Some((lead, c)) = other.leading() else { return Ok(None) };
        let Some(inverse) = c.recip() else { return Ok(None) };
        for k in 0..lead.len() {
            if other.degree(k) > self.degree(k) {
                return Ok(if self.is_zero() { Some(Poly::zero()) } else { None });
            }
        }
        let (mut rest, mut out) = (self.clone(), Poly::zero());
        while let Some((m, r)) = rest.leading() {
            budget.charge(other.0.len())?;
            let q = times(m, lead, -1);
            if q.iter().any(|&e| e < 0) {
                return Ok(None);
            }
            let c = r.mul(&inverse);
            rest = rest.sub(&other.shift(&q, &c));
            out.push(q, c);
        }
        Ok(Some(out))
    }

    /// A common divisor, the greatest unless the polynomials are too long. No negative exponents.
    pub fn gcd(&self, other: &Poly, budget: &mut Budget) -> Result<Poly, Stopped> {
        if self.is_zero() {
            return Ok(other.primitive().1);
        }
        if other.is_zero() {
            return Ok(self.primitive().1);
        }
        let (low, low2) = (self.lowest(), other.lowest());
        let n = low.len().min(low2.len());
        let common = trim((0..n).map(|k| low[k].min(low2[k])).collect());
        let a = self.shift(&times(&Monomial::new(), &low, -1), &Rational::ONE).primitive().1;
        let b = other.shift(&times(&Monomial::new(), &low2, -1), &Rational::ONE).primitive().1;
        let inner = gcd_without_monomials(a, b, budget)?;
        Ok(inner.shift(&common, &Rational::ONE))
    }

    /// The square root where it is a polynomial.
    pub fn sqrt(&self, budget: &mut Budget) -> Result<Option<Poly>, Stopped> {
        let Some((lead, c)) = self.leading() else { return Ok(Some(Poly::zero())) };
        let half = |m: &Monomial| {
            let out: Monomial = m.iter().map(|e| e / 2).collect();
            m.iter().all(|e| e % 2 == 0).then_some(out)
        };
        let (Some(m), Some(c)) = (half(lead), root(c)) else { return Ok(None) };
        let (lead, double) = (m.clone(), c.mul(&Rational::integer(2)));
        let mut out = Poly::monomial(m, c);
        let mut rest = self.sub(&out.mul(&out, budget)?);
        for _ in 0..self.0.len() {
            let Some((m, r)) = rest.leading() else { return Ok(Some(out)) };
            let q = times(m, &lead, -1);
            let Some(c) = r.div(&double) else { return Ok(None) };
            if q.iter().any(|&e| e < 0) {
                return Ok(None);
            }
            let term = Poly::monomial(q, c);
            // (s + u)² = s² + (2 s + u) u.
            let twice = out.scale(&Rational::integer(2)).add(&term);
            rest = rest.sub(&twice.mul(&term, budget)?);
            out = out.add(&term);
        }
        Ok(rest.is_zero().then_some(out))
    }
}

/// The square root of a rational, where it is rational.
fn root(c: &Rational) -> Option<Rational> {
    let (n, d) = c.small()?;
    let whole = |x: i64| {
        let r = u64::try_from(x).ok()?.isqrt() as i64;
        (r * r == x).then_some(r)
    };
    Rational::new(whole(n)?, whole(d)?)
}

/// Primitive remainder sequence in a variable that both have [Knuth, The Art of Computer Programming 2, §4.6.1].
fn gcd_without_monomials(a: Poly, b: Poly, budget: &mut Budget) -> Result<Poly, Stopped> {
    if a == b {
        return Ok(a);
    }
    if a.as_number().is_some() || b.as_number().is_some() || a.0.len() > MAX_GCD || b.0.len() > MAX_GCD {
        return Ok(Poly::one());
    }
    let (va, vb) = (a.variables(), b.variables());
    // A variable that one alone has: the divisor divides each of its coefficients.
    if let Some(&k) = va.iter().find(|k| !vb.contains(k)) {
        let c = content(&a, k, budget)?;
        return c.gcd(&b, budget);
    }
    if let Some(&k) = vb.iter().find(|k| !va.contains(k)) {
        let c = content(&b, k, budget)?;
        return c.gcd(&a, budget);
    }
    let Some(&k) = va.iter().min_by_key(|&&k| (a.degree(k).min(b.degree(k)), k)) else { return Ok(Poly::one()) };
    let (ca, cb) = (content(&a, k, budget)?, content(&b, k, budget)?);
    let outer = ca.gcd(&cb, budget)?;
    let mut p = a.divide(&ca, budget)?.unwrap_or(a);
    let mut q = b.divide(&cb, budget)?.unwrap_or(b);
    if p.degree(k) < q.degree(k) {
        std::mem::swap(&mut p, &mut q);
    }
    loop {
        let r = pseudo_remainder(&p, &q, k, budget)?;
        if r.is_zero() {
            break;
        }
        if r.degree(k) == 0 {
            q = Poly::one();
            break;
        }
        if r.0.len() > 4 * MAX_GCD {
            return Ok(Poly::one());
        }
        let c = content(&r, k, budget)?;
        p = q;
        q = r.divide(&c, budget)?.unwrap_or(r).primitive().1;
    }
    Ok(outer.mul(&q, budget)?.primitive().1)
}

/// The common divisor of the coefficients of a variable's powers.
pub(super) fn content(p: &Poly, k: usize, budget: &mut Budget) -> Result<Poly, Stopped> {
    let mut out = Poly::zero();
    for c in p.coefficients(k) {
        if c.is_zero() {
            continue;
        }
        out = out.gcd(&c, budget)?;
        if out.is_one() {
            break;
        }
    }
    Ok(out)
}

fn pseudo_remainder(p: &Poly, q: &Poly, k: usize, budget: &mut Budget) -> Result<Poly, Stopped> {
    let n = q.degree(k);
    let lead = q.coefficients(k).pop().unwrap_or_default();
    let mut rest = p.clone();
    while !rest.is_zero() && rest.degree(k) >= n {
        let d = rest.degree(k);
        let top = rest.coefficients(k).pop().unwrap_or_default();
        let minus = q.mul(&top, budget)?.shift(&power_of(k, d - n), &Rational::ONE);
        rest = rest.mul(&lead, budget)?.sub(&minus);
    }
    Ok(rest)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn x() -> Poly {
        Poly::variable(0)
    }

    fn y() -> Poly {
        Poly::variable(1)
    }

    fn budget() -> Budget {
        Budget::new(1 << 20)
    }

    #[test]
    fn the_greatest_common_divisor() {
        // (x + y)²(x − 2y) and (x + y)(x + 1).
        let b = &mut budget();
        let s = x().add(&y());
        let u = s.pow(2, b).unwrap().mul(&x().plus(&y(), &Rational::integer(-2)), b).unwrap();
        let v = s.mul(&x().add(&Poly::one()), b).unwrap();
        assert_eq!(u.gcd(&v, b).unwrap(), s.primitive().1);
        // With a variable that one alone has, and a monomial.
        let w = v.mul(&Poly::variable(3), b).unwrap();
        assert_eq!(w.gcd(&u, b).unwrap(), s.primitive().1);
        assert_eq!(x().mul(&w, b).unwrap().gcd(&x().mul(&u, b).unwrap(), b).unwrap(), x().mul(&s, b).unwrap());
    }

    #[test]
    fn square_roots() {
        let b = &mut budget();
        let s = x().plus(&y(), &Rational::integer(3)).add(&Poly::number(Rational::HALF));
        let square = s.mul(&s, b).unwrap();
        let root = square.sqrt(b).unwrap().unwrap();
        assert!(root == s || root == s.neg());
        assert_eq!(square.add(&x()).sqrt(b).unwrap(), None);
        assert_eq!(square.add(&Poly::one()).sqrt(b).unwrap(), None);
    }

    #[test]
    fn exact_division() {
        let b = &mut budget();
        let (s, d) = (x().add(&y()), x().sub(&y()));
        let p = s.mul(&d, b).unwrap();
        assert_eq!(p.divide(&s, b).unwrap(), Some(d));
        assert_eq!(p.add(&Poly::one()).divide(&s, b).unwrap(), None);
    }
}
