//! From fractions over generators back to expressions, as one writes them.

use super::polynomial::{Monomial, Poly, exponent};
use super::tower::{Frac, Kind, Res, Tower};
use crate::arena::{Expr, Node};
use crate::function::Function;
use crate::rational::Rational;

impl Tower<'_, '_> {
    fn write_monomial(&mut self, m: &Monomial) -> Expr {
        let mut factors = Vec::new();
        let mut used = m.clone();
        // sin/cos is tan where the integrand has it.
        for (list, f) in [(0, Function::Tan), (1, Function::Tanh)] {
            let pairs = if list == 0 { self.circular.clone() } else { self.hyperbolic.clone() };
            for pair in pairs.iter().flatten() {
                let n = exponent(m, pair.first).min(-exponent(m, pair.second));
                if pair.first != pair.second && n > 0 && self.tangents.contains(&pair.argument) {
                    used[pair.first] -= n;
                    used[pair.second] += n;
                    factors.push((self.arena.call(f, &[pair.argument]), Rational::integer(n.into())));
                }
            }
        }
        // x x^k is x^(k + 1).
        for k in 0..used.len() {
            let Node::Power(b, x) = *self.arena.node(self.generators[k].expr) else { continue };
            let base = self.atoms.get(&b).copied().filter(|&j| used.get(j).is_some_and(|&e| e != 0));
            if let (1, Some(j)) = (used[k], base) {
                let n = self.arena.integer(used[j].into());
                let x = self.arena.add(x, n);
                factors.push((self.arena.power(b, x), Rational::ONE));
                (used[k], used[j]) = (0, 0);
            }
        }
        for (k, &e) in used.iter().enumerate() {
            if e != 0 {
                factors.push((self.generators[k].expr, Rational::integer(e.into())));
            }
        }
        self.arena.monomial(&factors)
    }

    pub fn write_poly(&mut self, p: &Poly) -> Res<Expr> {
        self.budget.charge(p.0.len())?;
        let mut list = Vec::with_capacity(p.0.len());
        for (m, r) in &p.0 {
            list.push((self.write_monomial(m), r.clone()));
        }
        Ok(self.arena.linear(&list))
    }

    /// A fraction, sin² for (1 − cos)(1 + cos) in denominators.
    pub fn write(&mut self, f: &Frac) -> Res<Expr> {
        let mut den = f.den.clone();
        let mut factors = Vec::new();
        let mut sign = Rational::ONE;
        for g in 0..self.generators.len() {
            let (function, pair) = match self.generators[g].kind {
                Kind::Cosine(i) => (Function::Sin, &self.circular[i]),
                Kind::Cosh(i) => (Function::Sinh, &self.hyperbolic[i]),
                _ => continue,
            };
            let Some(argument) = pair.as_ref().map(|p| p.argument) else { continue };
            let c = Poly::variable(g);
            let place = |p: &Poly| self.factors.iter().position(|f| f.poly == *p);
            let (Some(a), Some(b)) = (place(&c.sub(&Poly::one())), place(&c.add(&Poly::one()))) else { continue };
            if den.len() <= a.max(b) {
                continue;
            }
            let n = den[a].min(den[b]);
            if n > 0 {
                den[a] -= n;
                den[b] -= n;
                if n % 2 == 1 && function == Function::Sin {
                    sign = sign.neg();
                }
                let s = self.arena.call(function, &[argument]);
                factors.push((s, Rational::integer(-2 * i64::from(n))));
            }
        }
        for (k, &n) in den.iter().enumerate() {
            if n > 0 {
                let p = self.factors[k].poly.clone();
                factors.push((self.write_poly(&p)?, Rational::integer(-i64::from(n))));
            }
        }
        let num = self.write_poly(&f.num)?;
        if factors.is_empty() {
            return Ok(num);
        }
        factors.push((num, Rational::ONE));
        let e = self.arena.monomial(&factors);
        Ok(self.arena.scale(e, &sign))
    }
}
