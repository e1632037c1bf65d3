//! Factors of denominators: content, squares, linear factors of quadratics, rational roots. What is not split further may
//! still be reducible: then a logarithm is missed, never a wrong one made.

use super::polynomial::{Monomial, Poly, content, exponent, power_of};
use super::tower::{Res, Tower};
use crate::rational::Rational;

/// Roots of polynomials in one variable are tried up to this numerator and denominator.
const MAX_ROOT: i64 = 12;
/// The same for factors of two variables.
const MAX_PAIR: i64 = 3;

impl Tower<'_, '_> {
    /// A number and the factors with their powers. No negative exponents.
    pub fn factorise(&mut self, p: &Poly) -> Res<(Rational, Vec<(usize, u16)>)> {
        let mut out: Vec<(usize, u16)> = Vec::new();
        let mut rest = p.clone();
        for k in 0..self.factors.len() {
            let f = self.factors[k].poly.clone();
            let mut n = 0;
            while let Some(q) = rest.divide(&f, self.budget)? {
                if rest.as_number().is_some() {
                    break;
                }
                rest = q;
                n += 1;
            }
            if n > 0 {
                out.push((k, n));
            }
        }
        if rest.as_number().is_none() {
            let mut pieces = Vec::new();
            self.split(rest.clone(), &mut pieces, 0)?;
            for piece in pieces {
                let k = self.factor(&piece)?;
                match out.iter_mut().find(|f| f.0 == k) {
                    Some(f) => f.1 += 1,
                    None => out.push((k, 1)),
                }
            }
        }
        // The number is what the product lacks.
        let mut product = Poly::one();
        for &(k, n) in &out {
            let f = self.factors[k].poly.pow(n.into(), self.budget)?;
            product = product.mul(&f, self.budget)?;
        }
        let ratio = p.divide(&product, self.budget)?.and_then(|q| q.as_number());
        ratio.map(|r| (r, out)).ok_or(super::tower::Fail::Unsupported)
    }

    fn split(&mut self, p: Poly, out: &mut Vec<Poly>, level: u32) -> Res<()> {
        let p = p.primitive().1;
        if p.as_number().is_some() {
            return Ok(());
        }
        // A monomial is no factor: it belongs to the numerator; here it is one of several.
        let low = p.lowest();
        if low.iter().any(|&e| e != 0) {
            for (k, &e) in low.iter().enumerate() {
                out.extend((0..e).map(|_| Poly::variable(k)));
            }
            let back = low.iter().map(|e| -e).collect();
            return self.split(p.shift(&back, &Rational::ONE), out, level + 1);
        }
        if level > 24 {
            out.push(p);
            return Ok(());
        }
        let variables = p.variables();
        for &k in &variables {
            let c = content(&p, k, self.budget)?;
            if !c.is_one()
                && let Some(q) = p.divide(&c, self.budget)?
            {
                self.split(c, out, level + 1)?;
                return self.split(q, out, level + 1);
            }
        }
        if variables.iter().any(|&k| p.degree(k) == 1) {
            out.push(p);
            return Ok(());
        }
        for &k in &variables {
            let g = p.gcd(&p.derivative(k), self.budget)?;
            if !g.is_one()
                && let Some(q) = p.divide(&g, self.budget)?
            {
                self.split(g, out, level + 1)?;
                return self.split(q, out, level + 1);
            }
        }
        for &k in &variables {
            if p.degree(k) == 2 {
                return match self.linear_factor(&p, k)? {
                    Some((a, b)) => {
                        self.split(a, out, level + 1)?;
                        self.split(b, out, level + 1)
                    }
                    None => {
                        out.push(p);
                        Ok(())
                    }
                };
            }
        }
        for &k in &variables {
            if let Some((a, b)) = self.even_factor(&p, k)? {
                self.split(a, out, level + 1)?;
                return self.split(b, out, level + 1);
            }
        }
        for &k in &variables {
            if let Some((a, b)) = self.binomial_factor(&p, k)? {
                self.split(a, out, level + 1)?;
                return self.split(b, out, level + 1);
            }
        }
        if let Some((a, b)) = self.rational_root(&p, &variables)? {
            self.split(a, out, level + 1)?;
            return self.split(b, out, level + 1);
        }
        out.push(p);
        Ok(())
    }

    /// a x² + b x + c with a discriminant that is a square: 2 a x + b − s is a factor.
    fn linear_factor(&mut self, p: &Poly, k: usize) -> Res<Option<(Poly, Poly)>> {
        let parts = p.coefficients(k);
        let Some(s) = self.discriminant(&parts)?.sqrt(self.budget)? else { return Ok(None) };
        let two_a = parts[2].scale(&Rational::integer(2));
        let line = two_a.mul(&Poly::variable(k), self.budget)?.add(&parts[1]).sub(&s);
        let c = content(&line, k, self.budget)?;
        let line = line.divide(&c, self.budget)?.unwrap_or(line).primitive().1;
        Ok(p.divide(&line, self.budget)?.map(|q| (line, q)))
    }

    /// b² − 4 a c.
    pub fn discriminant(&mut self, parts: &[Poly]) -> Res<Poly> {
        let ac = self.mul_poly(&parts[2], &parts[0])?;
        let b2 = self.mul_poly(&parts[1], &parts[1])?;
        Ok(b2.plus(&ac, &Rational::integer(-4)))
    }

    /// A quadratic in xₖ² that splits.
    fn even_factor(&mut self, p: &Poly, k: usize) -> Res<Option<(Poly, Poly)>> {
        let parts = p.coefficients(k);
        if parts.len() != 5 || !parts[1].is_zero() || !parts[3].is_zero() {
            return Ok(None);
        }
        let halves = [parts[0].clone(), parts[2].clone(), parts[4].clone()];
        let Some(s) = self.discriminant(&halves)?.sqrt(self.budget)? else { return Ok(None) };
        let square = Poly::monomial(power_of(k, 2), Rational::ONE);
        let line = halves[2].scale(&Rational::integer(2)).mul(&square, self.budget)?.add(&halves[1]).sub(&s);
        let c = content(&line, k, self.budget)?;
        let line = line.divide(&c, self.budget)?.unwrap_or(line).primitive().1;
        Ok(p.divide(&line, self.budget)?.map(|q| (line, q)))
    }

    /// xₖⁿ ± bⁿ: xₖ ± b is a factor, for odd n or the lower sign.
    fn binomial_factor(&mut self, p: &Poly, k: usize) -> Res<Option<(Poly, Poly)>> {
        let n = p.degree(k);
        if p.0.len() != 2 {
            return Ok(None);
        }
        for (m, r) in &p.0 {
            let (Some((num, den)), false) = (r.small(), exponent(m, k) == n) else { continue };
            if m.iter().any(|e| e % n != 0) {
                continue;
            }
            let base: Monomial = m.iter().map(|e| e / n).collect();
            for a in 1..=MAX_ROOT {
                let (root, power) = (Rational::integer(a), Rational::integer(a).pow(n.into(), 512));
                if den != 1 || power != Some(Rational::integer(num.abs())) {
                    continue;
                }
                for sign in [root.clone(), root.neg()] {
                    let line = Poly::variable(k).add(&Poly::monomial(base.clone(), sign));
                    if let Some(q) = p.divide(&line, self.budget)? {
                        return Ok(Some((line, q)));
                    }
                }
            }
        }
        Ok(None)
    }

    /// d x − n, or d x − n y: with small numbers.
    fn rational_root(&mut self, p: &Poly, variables: &[usize]) -> Res<Option<(Poly, Poly)>> {
        let mut pairs: Vec<(usize, Poly, i64)> = Vec::new();
        if let [k] = variables {
            pairs.push((*k, Poly::one(), MAX_ROOT));
        } else {
            for (i, &k) in variables.iter().enumerate() {
                pairs.extend(variables[i + 1..].iter().map(|&j| (k, Poly::variable(j), MAX_PAIR)));
            }
        }
        for (k, other, most) in pairs {
            for d in 1..=most {
                for n in -most..=most {
                    let line = Poly::variable(k).scale(&Rational::integer(d)).plus(&other, &Rational::integer(-n));
                    if line.primitive().1 == line
                        && let Some(q) = p.divide(&line, self.budget)?
                    {
                        return Ok(Some((line, q)));
                    }
                }
            }
        }
        Ok(None)
    }
}
