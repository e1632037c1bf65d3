//! The ansatz F = Σ cₘ m/q + Σ dⱼ eⱼ: monomials m that could give what is in the integrand, over a denominator q that
//! derivation would make the integrand's, and logarithms and inverse tangents eⱼ; its coefficients by a linear system.

use super::polynomial::{Monomial, Poly, exponent, times, trim};
use super::solve::{Coefficient, Column};
use super::special::Extra;
use super::tower::{Fail, Frac, Kind, Res, Tower};
use crate::arena::{Arena, Expr, Node};
use crate::rational::Rational;
use std::collections::{BTreeMap, BTreeSet};

/// How many unknown coefficients there may be.
const MAX_UNKNOWNS: usize = 360;
/// How often the monomials are completed by those that would cancel what they bring.
const ROUNDS: usize = 7;

impl Tower<'_, '_> {
    /// F with DF = the sum of the integrand's summands.
    pub fn integrate(&mut self, integrand: Expr) -> Res<Option<Expr>> {
        // Summands whose denominators share a factor belong together.
        let mut groups: Vec<Frac> = Vec::new();
        for (e, c) in self.arena.summands(integrand) {
            let f = self.read(e, 0)?.scale(&c);
            let mut whole = self.cancel(f)?;
            let (joined, apart): (Vec<Frac>, Vec<Frac>) =
                groups.into_iter().partition(|g| self.share_a_factor(g, &whole));
            groups = apart;
            for g in joined {
                whole = self.add(&whole, &g)?;
            }
            groups.push(whole);
        }
        let mut out = Vec::new();
        let mut open: Vec<Frac> = Vec::new();
        for g in groups {
            let g = self.cancel(g)?;
            if g.is_zero() {
                continue;
            }
            match self.solve_group(&g)? {
                Some(f) => out.push(f),
                None => open.push(g),
            }
        }
        if !open.is_empty() {
            if open.len() == 1 && out.is_empty() {
                return Ok(None);
            }
            // What has no integral alone may have one together with the rest.
            let mut whole = self.read(integrand, 0)?;
            whole = self.cancel(whole)?;
            return self.solve_group(&whole);
        }
        Ok(Some(self.arena.sum(&out)))
    }

    fn share_a_factor(&self, a: &Frac, b: &Frac) -> bool {
        let moving = |f: &Frac| -> BTreeSet<usize> {
            (0..f.den.len()).filter(|&k| f.den[k] > 0 && !self.factors[k].constant).collect()
        };
        let (a, b) = (moving(a), moving(b));
        a == b || a.iter().any(|k| b.contains(k))
    }

    /// Whether factor k is 1 ± cos or cosh ± 1: its derivative has a root of it.
    fn is_ramified(&self, k: usize) -> bool {
        let p = &self.factors[k].poly;
        (0..self.generators.len()).any(|g| {
            matches!(self.generators[g].kind, Kind::Cosine(_) | Kind::Cosh(_))
                && (*p == Poly::variable(g).add(&Poly::one()) || *p == Poly::variable(g).sub(&Poly::one()))
        })
    }

    fn moving_part(&self, m: &Monomial) -> Monomial {
        trim(m.iter().enumerate().map(|(k, &e)| if self.is_constant_number(k) { 0 } else { e }).collect())
    }

    /// Whether generator k is a coefficient to the system: constant and no rate.
    pub fn is_constant_number(&self, k: usize) -> bool {
        self.generators[k].kind != Kind::Rate && self.is_constant(k)
    }

    fn moving_monomials(&self, p: &Poly) -> BTreeSet<Monomial> {
        p.0.keys().map(|m| self.moving_part(m)).collect()
    }

    fn solve_group(&mut self, v: &Frac) -> Res<Option<Expr>> {
        let extras = self.extras(v)?;
        let mut below = vec![0u16; self.factors.len()];
        for (k, b) in below.iter_mut().enumerate() {
            let n = v.power_of_factor(k);
            if n > 0 && !self.factors[k].constant {
                *b = if self.is_ramified(k) { n } else { n - 1 };
            }
        }
        let usable: Vec<usize> = (0..self.generators.len())
            .filter(|&k| {
                self.generators[k].kind != Kind::Rate && !self.is_constant(k) && self.generators[k].rate.is_some()
            })
            .collect();
        let usable = self.relevant(v, &usable);
        // Logarithmic rates of what a candidate is made of.
        let mut logs = Vec::new();
        for &k in &usable {
            let rate = self.generators[k].rate.clone().ok_or(Fail::Unsupported)?;
            let mut list = Monomial::from_elem(0, k + 1);
            list[k] = -1;
            logs.push(Frac { num: rate.num.shift(&list, &Rational::ONE), den: rate.den });
        }
        for (k, &n) in below.iter().enumerate() {
            if n > 0 {
                logs.push(self.rate_of_log_factor(k)?);
            }
        }
        let mut den = vec![0u16; self.factors.len()];
        below.resize(den.len(), 0);
        for f in &logs {
            for (k, d) in den.iter_mut().enumerate() {
                *d = (*d).max(f.power_of_factor(k));
            }
        }
        for (k, d) in den.iter_mut().enumerate() {
            *d = (*d + below[k]).max(v.power_of_factor(k));
        }
        let gap: Vec<u16> = den.iter().zip(&below).map(|(d, b)| d - b).collect();
        let mut steps: BTreeSet<Monomial> = BTreeSet::new();
        for f in &logs {
            let raised = self.raise(f, &gap)?;
            steps.extend(self.moving_monomials(&raised));
        }
        // What a relation makes of a step: sin² is 1 − cos².
        for &k in &usable {
            let Some((n, by)) = &self.generators[k].relation else { continue };
            let down = super::polynomial::power_of(k, -*n);
            let reduced: Vec<Monomial> = by.0.keys().map(|b| self.moving_part(&times(b, &down, 1))).collect();
            let more: Vec<Monomial> = steps
                .iter()
                .filter(|s| exponent(s, k) > 0)
                .flat_map(|s| reduced.iter().map(|b| times(s, b, 1)))
                .collect();
            steps.extend(more);
        }
        self.budget.charge(steps.len())?;
        let raised = self.raise(v, &den)?;
        let mut targets = self.moving_monomials(&raised);
        let bounds = self.bounds(v, &raised);
        // The columns of logarithms and inverse tangents, over a denominator common to all.
        let mut common = den.clone();
        common.resize(self.factors.len(), 0);
        for x in &extras {
            for (k, d) in common.iter_mut().enumerate() {
                *d = (*d).max(x.rate.power_of_factor(k));
            }
        }
        let wanted = self.raise(v, &common)?;
        let mut extra_columns = Vec::new();
        for x in &extras {
            extra_columns.push(self.raise(&x.rate, &common)?);
        }
        let mut seen: BTreeMap<Monomial, Poly> = BTreeMap::new();
        let mut done: BTreeSet<Monomial> = BTreeSet::new();
        for round in 0..ROUNDS {
            let mut fresh: BTreeSet<Monomial> = BTreeSet::new();
            for t in targets.difference(&done) {
                self.budget.charge(steps.len())?;
                for s in &steps {
                    let m = times(t, s, -1);
                    if !m.is_empty() && !seen.contains_key(&m) && self.allowed(&m, &bounds, &usable) {
                        fresh.insert(m);
                    }
                }
            }
            done.extend(targets.iter().cloned());
            if fresh.is_empty() && round > 0 {
                return Ok(None);
            }
            for m in fresh {
                let f = Frac { num: Poly::monomial(m.clone(), Rational::ONE), den: below.clone() };
                let image = self.rate(&f)?;
                let image = self.raise(&image, &common)?;
                let lower = self.rate_over(&f, &den)?;
                targets.extend(self.moving_monomials(&lower));
                seen.insert(m, image);
                if seen.len() + extras.len() > MAX_UNKNOWNS {
                    break;
                }
            }
            let mut columns: Vec<Column> =
                seen.iter().map(|(m, p)| Column { of: Some(m.clone()), image: p.clone() }).collect();
            // Few factors first: of several integrals the simplest is taken.
            columns
                .sort_by_key(|c| c.of.as_ref().map_or(0, |m| m.iter().map(|e| e.unsigned_abs() as u32).sum::<u32>()));
            columns.extend(extra_columns.iter().map(|p| Column { of: None, image: p.clone() }));
            if let Some(found) = self.solve(&columns, &wanted)? {
                return Ok(Some(self.assemble(&columns, &found, &extras, &below)?));
            }
            if seen.len() + extras.len() > MAX_UNKNOWNS {
                return Ok(None);
            }
        }
        Ok(None)
    }

    /// The derivative's numerator over a given denominator.
    fn rate_over(&mut self, f: &Frac, den: &[u16]) -> Res<Poly> {
        let r = self.rate(f)?;
        let fits = r.den.iter().enumerate().all(|(k, &e)| e <= den.get(k).copied().unwrap_or(0));
        if fits { self.raise(&r, den) } else { Ok(r.num) }
    }

    /// The generators that F may be made of: those of the integrand, and of their derivatives.
    fn relevant(&self, v: &Frac, usable: &[usize]) -> Vec<usize> {
        let mut have: BTreeSet<usize> = v.num.variables().into_iter().collect();
        for (k, f) in self.factors.iter().enumerate() {
            if v.power_of_factor(k) > 0 {
                have.extend(f.poly.variables());
            }
        }
        loop {
            let mut more = Vec::new();
            for &k in usable {
                if have.contains(&k) {
                    continue;
                }
                let g = &self.generators[k];
                let partner = match g.kind {
                    Kind::Base => true,
                    // The pair's other function.
                    Kind::Sine(_) | Kind::Cosine(_) | Kind::Sinh(_) | Kind::Cosh(_) => {
                        g.rate.as_ref().is_some_and(|r| {
                            r.num.variables().iter().any(|x| {
                                have.contains(x)
                                    && !matches!(self.generators[*x].kind, Kind::Base | Kind::Rate | Kind::Constant)
                            })
                        })
                    }
                    // U where U' is there.
                    Kind::Unspecified { .. } => g.rate.as_ref().is_some_and(|r| {
                        r.num
                            .variables()
                            .iter()
                            .any(|x| have.contains(x) && matches!(self.generators[*x].kind, Kind::Unspecified { .. }))
                    }),
                    _ => false,
                };
                if partner {
                    more.push(k);
                }
            }
            if more.is_empty() {
                break;
            }
            have.extend(more);
        }
        usable.iter().copied().filter(|k| have.contains(k)).collect()
    }

    /// The lowest and the highest exponents of a candidate.
    fn bounds(&self, v: &Frac, raised: &Poly) -> Vec<(i16, i16)> {
        let low = v.num.lowest();
        (0..self.generators.len())
            .map(|k| {
                let g = &self.generators[k];
                match &g.relation {
                    Some((n, _)) => (0, n - 1),
                    None => (exponent(&low, k).min(0), raised.degree(k).max(0) + 1),
                }
            })
            .collect()
    }

    fn allowed(&self, m: &Monomial, bounds: &[(i16, i16)], usable: &[usize]) -> bool {
        m.iter().enumerate().all(|(k, &e)| e == 0 || usable.contains(&k) && (bounds[k].0..=bounds[k].1).contains(&e))
    }

    /// F from its coefficients.
    fn assemble(
        &mut self,
        columns: &[Column],
        found: &[(usize, Coefficient)],
        extras: &[Extra],
        below: &[u16],
    ) -> Res<Expr> {
        let first_extra = columns.len() - extras.len();
        let mut parts = Vec::new();
        // What has a common denominator of constants is one fraction.
        let mut plain: Vec<(Poly, Poly)> = Vec::new();
        for (i, c) in found {
            match &columns[*i].of {
                Some(m) => {
                    let num = self.mul_poly(&c.num, &Poly::monomial(m.clone(), Rational::ONE))?;
                    match plain.iter_mut().find(|(d, _)| *d == c.den) {
                        Some((_, n)) => *n = n.add(&num),
                        None => plain.push((c.den.clone(), num)),
                    }
                }
                None => {
                    let x = &extras[*i - first_extra];
                    let (num, den) = (self.write_poly(&c.num)?, self.write_poly(&c.den)?);
                    let ratio = self.arena.div(num, den);
                    // log√f is half of log f.
                    parts.push(self.arena.mul(ratio, x.expr));
                }
            }
        }
        for (den, num) in plain {
            let f = self.cancel(Frac { num, den: below.to_vec() })?;
            let num = self.write(&f)?;
            let single = den.as_monomial().is_some();
            let den = self.write_poly(&den)?;
            let inverse = self.arena.pow(den, -1);
            parts.push(if single && matches!(self.arena.node(num), Node::Sum(..)) {
                let mut out = Vec::new();
                for (t, c) in self.arena.summands(num) {
                    out.push((self.arena.mul(t, inverse), c));
                }
                self.arena.linear(&out)
            } else {
                self.arena.mul(num, inverse)
            });
        }
        if parts.contains(&Arena::UNDEFINED) {
            return Err(Fail::Unsupported);
        }
        Ok(self.arena.sum(&parts))
    }
}
