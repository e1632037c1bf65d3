//! Functions as fractions over generators: atoms, sines and cosines, exponentials, logarithms, roots, …, on which the
//! derivation is closed. The relations between them (sin² = 1 − cos², √f² = f) reduce every numerator.

use super::polynomial::{Monomial, Poly, exponent, power_of, times, trim};
use crate::arena::{Arena, Expr, Symbol};
use crate::budget::{Budget, Stopped};
use crate::rational::Rational;
use crate::zero::Sign;
use hashbrown::HashMap;

/// More generators than this are not handled.
pub(super) const MAX_GENERATORS: usize = 60;

/// Why a function is not integrated this way.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Fail {
    /// It is made of what the method does not know.
    Unsupported,
    /// A bound was reached.
    Stopped(Stopped),
}

impl From<Stopped> for Fail {
    fn from(s: Stopped) -> Fail {
        Fail::Stopped(s)
    }
}

pub(super) type Res<T> = Result<T, Fail>;

/// num / Π factorₖ^denₖ.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Frac {
    pub num: Poly,
    pub den: Vec<u16>,
}

impl Frac {
    pub fn of(num: Poly) -> Frac {
        Frac { num, den: Vec::new() }
    }

    pub fn zero() -> Frac {
        Frac::of(Poly::zero())
    }

    pub fn one() -> Frac {
        Frac::of(Poly::one())
    }

    pub fn is_zero(&self) -> bool {
        self.num.is_zero()
    }

    pub fn power_of_factor(&self, k: usize) -> u16 {
        self.den.get(k).copied().unwrap_or(0)
    }

    pub fn neg(&self) -> Frac {
        self.scale(&Rational::MINUS_ONE)
    }

    pub fn scale(&self, c: &Rational) -> Frac {
        Frac { num: self.num.scale(c), den: self.den.clone() }
    }
}

/// What a generator is.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) enum Kind {
    /// Whatever has derivative zero by nature.
    Constant,
    /// The rate of a variable, in which the integrand is linear: not in F.
    Rate,
    /// A variable.
    Base,
    /// sin, cos of an argument: the pair's number.
    Sine(usize),
    Cosine(usize),
    /// sinh, cosh.
    Sinh(usize),
    Cosh(usize),
    /// An exponential or a power with a symbolic exponent.
    Exponential,
    /// A root times a denominator: with `relation`.
    Root,
    /// |u| times a denominator.
    Absolute,
    /// A logarithm, an inverse function.
    Other,
    /// An unspecified function.
    Unspecified {
        function: Symbol,
        index: Option<Expr>,
        orders: Vec<u16>,
    },
}

/// A generator.
#[derive(Clone, Debug)]
pub(super) struct Generator {
    pub expr: Expr,
    pub kind: Kind,
    /// Its derivative; `None` where it is not a generator's: then it is not in F.
    pub rate: Option<Frac>,
    /// xⁿ = a polynomial of other generators.
    pub relation: Option<(i16, Poly)>,
    /// For a root or an absolute value: what it is of, and the index of the root.
    pub inside: Option<(Frac, i64)>,
}

/// A factor of denominators.
#[derive(Clone, Debug)]
pub(super) struct Factor {
    pub poly: Poly,
    /// Whether its derivative is zero.
    pub constant: bool,
}

/// The argument of a pair of functions, and the pair.
#[derive(Clone, Debug)]
pub(super) struct Pair {
    pub argument: Expr,
    /// sin or sinh, or the exponential.
    pub first: usize,
    /// cos or cosh; for an exponential the same as `first`.
    pub second: usize,
    pub rate: Frac,
}

/// How signs are asked for.
pub(super) type Signs<'a> = dyn FnMut(&mut Arena, Expr, &mut Budget) -> Sign + 'a;

/// All generators of one integral.
pub(super) struct Tower<'a, 'b> {
    pub arena: &'a mut Arena,
    pub budget: &'a mut Budget,
    pub signs: &'a mut Signs<'b>,
    pub generators: Vec<Generator>,
    pub factors: Vec<Factor>,
    pub circular: Vec<Option<Pair>>,
    pub hyperbolic: Vec<Option<Pair>>,
    pub spans: [super::span::Span; 2],
    /// Arguments of the tangents in the integrand.
    pub tangents: Vec<Expr>,
    /// Which exponentials are written with sinh and cosh.
    pub paired: Vec<bool>,
    pub atoms: HashMap<Expr, usize>,
    pub memo: HashMap<Expr, Frac>,
    /// Highest total order of each unspecified function.
    pub orders: HashMap<(Symbol, Option<Expr>), u16>,
}

impl Tower<'_, '_> {
    pub fn push(&mut self, g: Generator) -> Res<usize> {
        if self.generators.len() >= MAX_GENERATORS {
            return Err(Fail::Unsupported);
        }
        self.generators.push(g);
        Ok(self.generators.len() - 1)
    }

    pub fn is_constant(&self, k: usize) -> bool {
        self.generators[k].rate.as_ref().is_some_and(Frac::is_zero)
    }

    /// Applies the relations.
    pub fn reduce(&mut self, mut p: Poly) -> Res<Poly> {
        for _ in 0..64 {
            let hit = (0..self.generators.len()).rev().find(|&k| {
                let Some((n, _)) = &self.generators[k].relation else { return false };
                p.0.keys().any(|m| exponent(m, k) >= *n)
            });
            let Some(k) = hit else { return Ok(p) };
            let Some((n, by)) = self.generators[k].relation.clone() else { return Ok(p) };
            let mut groups: HashMap<u32, Poly> = HashMap::new();
            let mut out = Poly::zero();
            for (m, r) in &p.0 {
                let e = exponent(m, k);
                if e >= n {
                    let q = e / n;
                    groups.entry(q as u32).or_default().push(times(m, &power_of(k, n * q), -1), r.clone());
                } else {
                    out.push(m.clone(), r.clone());
                }
            }
            let mut groups: Vec<_> = groups.into_iter().collect();
            groups.sort_by_key(|g| g.0);
            for (q, part) in groups {
                let power = by.pow(q, self.budget)?;
                out = out.add(&part.mul(&power, self.budget)?);
            }
            p = out;
        }
        Ok(p)
    }

    pub fn mul_poly(&mut self, a: &Poly, b: &Poly) -> Res<Poly> {
        let p = a.mul(b, self.budget)?;
        self.reduce(p)
    }

    pub fn mul(&mut self, a: &Frac, b: &Frac) -> Res<Frac> {
        let num = self.mul_poly(&a.num, &b.num)?;
        let n = a.den.len().max(b.den.len());
        let den = (0..n).map(|k| a.power_of_factor(k).saturating_add(b.power_of_factor(k))).collect();
        Ok(self.lowest(Frac { num, den }))
    }

    /// Without denominators where the numerator is zero.
    fn lowest(&mut self, f: Frac) -> Frac {
        if f.is_zero() { Frac::zero() } else { f }
    }

    pub fn pow(&mut self, a: &Frac, n: u32) -> Res<Frac> {
        let mut out = Frac::one();
        for _ in 0..n {
            out = self.mul(&out, a)?;
        }
        Ok(out)
    }

    /// The numerator over a larger denominator.
    pub fn raise(&mut self, a: &Frac, den: &[u16]) -> Res<Poly> {
        let mut num = a.num.clone();
        for (k, &e) in den.iter().enumerate() {
            for _ in a.power_of_factor(k)..e {
                let f = self.factors[k].poly.clone();
                num = self.mul_poly(&num, &f)?;
            }
        }
        Ok(num)
    }

    pub fn add(&mut self, a: &Frac, b: &Frac) -> Res<Frac> {
        if a.is_zero() {
            return Ok(b.clone());
        }
        if b.is_zero() {
            return Ok(a.clone());
        }
        let n = a.den.len().max(b.den.len());
        let den: Vec<u16> = (0..n).map(|k| a.power_of_factor(k).max(b.power_of_factor(k))).collect();
        let num = self.raise(a, &den)?.add(&self.raise(b, &den)?);
        Ok(self.lowest(Frac { num, den }))
    }

    pub fn sub(&mut self, a: &Frac, b: &Frac) -> Res<Frac> {
        self.add(a, &b.neg())
    }

    /// Divides common factors out.
    pub fn cancel(&mut self, mut f: Frac) -> Res<Frac> {
        for k in 0..f.den.len() {
            while f.den[k] > 0 {
                let low = f.num.lowest();
                let back: Monomial = low.iter().map(|&e| e.min(0)).collect();
                let back = trim(back);
                let shifted = f.num.shift(&times(&Monomial::new(), &back, -1), &Rational::ONE);
                let Some(q) = shifted.divide(&self.factors[k].poly, self.budget)? else { break };
                f.num = q.shift(&back, &Rational::ONE);
                f.den[k] -= 1;
            }
        }
        Ok(f)
    }

    /// 1/a. Factors of the numerator become factors of denominators.
    pub fn invert(&mut self, a: &Frac) -> Res<Frac> {
        if a.is_zero() {
            return Err(Fail::Unsupported);
        }
        let mut out = Frac::one();
        for (k, &e) in a.den.iter().enumerate() {
            if e > 0 {
                let p = self.factors[k].poly.clone();
                let p = self.pow(&Frac::of(p), e.into())?;
                out = self.mul(&out, &p)?;
            }
        }
        let low = a.num.lowest();
        let rest = a.num.shift(&times(&Monomial::new(), &low, -1), &Rational::ONE);
        // The monomial: generators with a relation move to the numerator.
        let mut inverse = Monomial::from_elem(0, low.len());
        for (k, &e) in low.iter().enumerate() {
            if self.generators[k].kind == Kind::Rate && e != 0 {
                return Err(Fail::Unsupported);
            }
            match (&self.generators[k].relation, e > 0) {
                (Some((n, by)), true) => {
                    let (n, by) = (*n, by.clone());
                    let q = (e + n - 1) / n;
                    inverse[k] = n * q - e;
                    let by = self.invert(&Frac::of(by))?;
                    let by = self.pow(&by, q as u32)?;
                    out = self.mul(&out, &by)?;
                }
                _ => inverse[k] = -e,
            }
        }
        out = self.mul(&out, &Frac::of(Poly::monomial(trim(inverse), Rational::ONE)))?;
        if let Some(c) = rest.as_number() {
            return Ok(out.scale(&c.recip().ok_or(Fail::Unsupported)?));
        }
        let (c, pieces) = self.factorise(&rest)?;
        out = out.scale(&c.recip().ok_or(Fail::Unsupported)?);
        for (k, n) in pieces {
            if out.den.len() <= k {
                out.den.resize(k + 1, 0);
            }
            out.den[k] = out.den[k].saturating_add(n);
        }
        self.cancel(out)
    }

    /// The number of a factor, new or known.
    pub fn factor(&mut self, poly: &Poly) -> Res<usize> {
        if let Some(k) = self.factors.iter().position(|f| f.poly == *poly) {
            return Ok(k);
        }
        if poly.variables().iter().any(|&k| self.generators[k].kind == Kind::Rate) || self.factors.len() >= 24 {
            return Err(Fail::Unsupported);
        }
        let constant = poly.variables().iter().all(|&k| self.is_constant(k));
        self.factors.push(Factor { poly: poly.clone(), constant });
        Ok(self.factors.len() - 1)
    }

    /// The derivative of a polynomial.
    pub fn rate_of_poly(&mut self, p: &Poly) -> Res<Frac> {
        let mut out = Frac::zero();
        for k in p.variables() {
            if self.is_constant(k) {
                continue;
            }
            let rate = self.generators[k].rate.clone().ok_or(Fail::Unsupported)?;
            let d = self.reduce(p.derivative(k))?;
            let term = self.mul(&Frac::of(d), &rate)?;
            out = self.add(&out, &term)?;
        }
        self.cancel(out)
    }

    /// The derivative of a fraction.
    pub fn rate(&mut self, f: &Frac) -> Res<Frac> {
        let d = self.rate_of_poly(&f.num)?;
        let under = Frac { num: Poly::one(), den: f.den.clone() };
        let mut out = self.mul(&d, &under)?;
        for (k, &e) in f.den.iter().enumerate() {
            if e == 0 || self.factors[k].constant {
                continue;
            }
            let log = self.rate_of_log_factor(k)?;
            let term = self.mul(&log, f)?;
            out = self.add(&out, &term.scale(&Rational::integer(-i64::from(e))))?;
        }
        self.cancel(out)
    }

    /// D f / f for a factor.
    pub fn rate_of_log_factor(&mut self, k: usize) -> Res<Frac> {
        let p = self.factors[k].poly.clone();
        let d = self.rate_of_poly(&p)?;
        let mut den = vec![0; k + 1];
        den[k] = 1;
        let f = self.mul(&d, &Frac { num: Poly::one(), den })?;
        self.cancel(f)
    }

    /// Whether it has derivative zero.
    pub fn is_constant_poly(&self, p: &Poly) -> bool {
        p.variables().iter().all(|&k| self.is_constant(k))
    }

    /// The sign of a polynomial under the assumptions.
    pub fn sign(&mut self, p: &Poly) -> Res<Sign> {
        let e = self.write_poly(p)?;
        Ok((self.signs)(self.arena, e, self.budget))
    }
}
