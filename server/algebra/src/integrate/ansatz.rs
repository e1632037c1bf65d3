//! The ansatz F = Σ cₘ m/q + Σ dⱼ eⱼ: monomials m that could give what is in the integrand, over a denominator q that
//! derivation would make the integrand's, and logarithms and inverse tangents eⱼ; its coefficients by a linear system.

use super::polynomial::{Monomial, Poly, exponent, power_of, times, trim};
use super::solve::{Coefficient, Column};
use super::special::Extra;
use super::tower::{Fail, Frac, Kind, Res, Tower};
use crate::arena::{Arena, Expr, Node};
use crate::budget::Stopped;
use crate::function::Function;
use crate::rational::Rational;
use std::collections::{BTreeMap, BTreeSet};

/// How many unknown coefficients there may be.
const MAX_UNKNOWNS: usize = 360;
/// How often the monomials are completed by those that would cancel what they bring.
const ROUNDS: usize = 7;

/// What one group of summands may cost, in nodes.
const GROUP_NODES: u64 = 1_000_000;

/// The monomials over one denominator.
struct Family {
    /// The denominator in F.
    below: Vec<u16>,
    /// The largest that its derivatives have.
    den: Vec<u16>,
    /// The generators in the monomials.
    usable: Vec<usize>,
    /// What derivation multiplies a monomial by.
    steps: BTreeSet<Monomial>,
    /// Monomials over `den` that are to be made or to be cancelled, and those that have been looked at.
    targets: BTreeSet<Monomial>,
    done: BTreeSet<Monomial>,
    /// Lowest and highest exponents.
    bounds: Vec<(i16, i16)>,
}

fn same(a: &Frac, b: &Frac) -> bool {
    (0..a.den.len().max(b.den.len())).all(|k| a.power_of_factor(k) == b.power_of_factor(k))
}

fn fits(a: &[u16], b: &[u16]) -> bool {
    a.iter().zip(b).all(|(x, y)| x <= y)
}

impl Tower<'_, '_> {
    /// F with DF = the sum of the integrand's summands.
    pub fn integrate(&mut self, integrand: Expr) -> Res<Option<Expr>> {
        // Summands over one denominator make one part.
        let mut parts: Vec<Frac> = Vec::new();
        for (e, c) in self.arena.summands(integrand) {
            let f = self.read(e, 0)?.scale(&c);
            let f = self.cancel(f)?;
            match parts.iter().position(|g| self.moving_factors(g) == self.moving_factors(&f) && same(g, &f)) {
                Some(k) => parts[k] = self.add(&parts[k].clone(), &f)?,
                None => parts.push(f),
            }
        }
        // Parts whose denominators share a factor belong together.
        let mut groups: Vec<Vec<Frac>> = Vec::new();
        for f in parts {
            let f = self.cancel(f)?;
            if f.is_zero() {
                continue;
            }
            let (joined, apart): (Vec<_>, Vec<_>) =
                groups.into_iter().partition(|g| g.iter().any(|p| self.share_a_factor(p, &f)));
            groups = apart;
            let mut whole: Vec<Frac> = joined.into_iter().flatten().collect();
            whole.push(f);
            groups.push(whole);
        }
        let mut out = Vec::new();
        let mut open: Vec<Frac> = Vec::new();
        for g in &groups {
            match self.try_group(g)? {
                Some(f) => out.push(f),
                None => open.extend(g.iter().cloned()),
            }
        }
        // What has no integral alone may have one together: term by term, over a common denominator, all at once.
        if !open.is_empty() {
            let mut found = if groups.len() > 1 { self.try_group(&open)? } else { None };
            if found.is_none() && open.len() > 1 {
                found = self.try_whole(&open)?;
            }
            match found {
                Some(f) => out.push(f),
                None if groups.len() > 1 => return self.try_whole(&groups.concat()),
                None => return Ok(None),
            }
        }
        Ok(Some(self.arena.sum(&out)))
    }

    fn try_whole(&mut self, parts: &[Frac]) -> Res<Option<Expr>> {
        let mut whole = Frac::zero();
        for p in parts {
            whole = self.add(&whole, p)?;
        }
        let whole = self.cancel(whole)?;
        if whole.is_zero() { Ok(Some(Arena::ZERO)) } else { self.try_group(&[whole]) }
    }

    /// One group has a share of the budget: others may still be done when it is spent.
    fn try_group(&mut self, parts: &[Frac]) -> Res<Option<Expr>> {
        let mut own = self.budget.part(GROUP_NODES);
        let before = own.left();
        std::mem::swap(self.budget, &mut own);
        let result = self.solve_group(parts);
        std::mem::swap(self.budget, &mut own);
        // `own` is the share again.
        let spent = before - own.left();
        self.budget.charge(spent as usize)?;
        match result {
            Err(Fail::Unsupported | Fail::Stopped(Stopped::TooLarge)) => Ok(None),
            other => other,
        }
    }

    fn moving_factors(&self, f: &Frac) -> BTreeSet<usize> {
        (0..f.den.len()).filter(|&k| f.den[k] > 0 && !self.factors[k].constant).collect()
    }

    /// Whether the derivatives of one may bring what is in the other: factors of denominators, those of the derivatives of
    /// logarithms and the like included.
    fn share_a_factor(&self, a: &Frac, b: &Frac) -> bool {
        let reach = |f: &Frac| {
            let mut out = self.moving_factors(f);
            for k in f.num.variables() {
                if matches!(
                    self.generators[k].kind,
                    Kind::Other | Kind::Root | Kind::Absolute | Kind::Unspecified { .. }
                ) && let Some(rate) = &self.generators[k].rate
                {
                    out.extend(self.moving_factors(rate));
                }
            }
            out
        };
        let (a, b) = (reach(a), reach(b));
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

    /// F with DF = Σ parts. The parts' denominators tell the denominators of F: each factor's power lowered by one.
    fn solve_group(&mut self, parts: &[Frac]) -> Res<Option<Expr>> {
        let mut whole = Frac::zero();
        for p in parts {
            whole = self.add(&whole, p)?;
        }
        let mut extras: Vec<Extra> = Vec::new();
        for p in parts {
            for x in self.extras(p)? {
                if !extras.iter().any(|y| y.expr == x.expr) {
                    extras.push(x);
                }
            }
        }
        let mut families: Vec<Family> = Vec::new();
        for p in parts {
            for below in self.lowered(p, parts.len() > 1) {
                if !families.iter().any(|f| f.below == below && p.den.len() <= f.den.len() && fits(&p.den, &f.den)) {
                    families.push(self.family(below, &whole, &p.den)?);
                }
            }
        }
        // Over a denominator common to all.
        let mut common = whole.den.clone();
        common.resize(self.factors.len(), 0);
        let dens = families.iter().map(|f| &f.den).chain(extras.iter().map(|x| &x.rate.den));
        for den in dens {
            for (c, d) in common.iter_mut().zip(den) {
                *c = (*c).max(*d);
            }
        }
        let wanted = self.raise(&whole, &common)?;
        let mut extra_columns = Vec::new();
        for x in &extras {
            extra_columns.push(self.raise(&x.rate, &common)?);
        }
        for f in &mut families {
            for p in parts {
                self.aim(f, p)?;
            }
            f.bounds = self.bounds(&whole, &f.targets);
        }
        let mut seen: BTreeMap<(Vec<u16>, Monomial), Poly> = BTreeMap::new();
        for round in 0..ROUNDS {
            let mut fresh: BTreeSet<(Vec<u16>, Monomial)> = BTreeSet::new();
            for f in &mut families {
                for t in f.targets.difference(&f.done) {
                    self.budget.charge(f.steps.len())?;
                    for s in &f.steps {
                        let m = times(t, s, -1);
                        let known = m.is_empty() && f.below.iter().all(|&n| n == 0);
                        if !known && self.allowed(&m, f) {
                            let candidate = (f.below.clone(), m);
                            if !seen.contains_key(&candidate) {
                                fresh.insert(candidate);
                            }
                        }
                    }
                }
                f.done = f.targets.clone();
            }
            if fresh.is_empty() && round > 0 {
                return Ok(None);
            }
            for (below, m) in fresh {
                let f = Frac { num: Poly::monomial(m.clone(), Rational::ONE), den: below.clone() };
                let image = self.rate(&f)?;
                for family in &mut families {
                    self.aim(family, &image)?;
                }
                seen.insert((below, m), self.raise(&image, &common)?);
                if seen.len() + extras.len() > MAX_UNKNOWNS {
                    break;
                }
            }
            let mut columns: Vec<Column> =
                seen.iter().map(|(of, p)| Column { of: Some(of.clone()), image: p.clone() }).collect();
            // Few factors first: of several integrals the simplest is taken.
            columns.sort_by_key(|c| {
                c.of.as_ref().map_or(0, |(below, m)| {
                    let up: u32 = m.iter().map(|e| u32::from(e.unsigned_abs())).sum();
                    up + below.iter().map(|n| 4 * u32::from(*n)).sum::<u32>()
                })
            });
            columns.extend(extra_columns.iter().map(|p| Column { of: None, image: p.clone() }));
            if let Some(found) = self.solve(&columns, &wanted)? {
                return Ok(Some(self.assemble(&columns, &found, &extras)?));
            }
            if seen.len() + extras.len() > MAX_UNKNOWNS {
                return Ok(None);
            }
        }
        Ok(None)
    }

    /// The denominators that F may have so that V has this one: all powers lowered by one; where there are other parts
    /// also one power alone.
    fn lowered(&self, v: &Frac, each: bool) -> Vec<Vec<u16>> {
        let down = |k: usize, n: u16| if n == 0 || self.factors[k].constant { 0 } else { n - 1 };
        let same = |k: usize, n: u16| if self.factors[k].constant { 0 } else { n };
        let all: Vec<u16> =
            v.den.iter().enumerate().map(|(k, &n)| if self.is_ramified(k) { n } else { down(k, n) }).collect();
        let mut out = vec![all];
        let moving: Vec<usize> = (0..v.den.len()).filter(|&k| same(k, v.den[k]) > 0 && !self.is_ramified(k)).collect();
        if each && moving.len() > 1 {
            for &j in &moving {
                let one = v.den.iter().enumerate().map(|(k, &n)| if k == j { n - 1 } else { same(k, n) }).collect();
                out.push(one);
            }
        }
        for den in &mut out {
            while den.last() == Some(&0) {
                den.pop();
            }
        }
        out
    }

    /// The monomials over a denominator: by which steps derivation changes them.
    fn family(&mut self, below: Vec<u16>, whole: &Frac, part: &[u16]) -> Res<Family> {
        let usable: Vec<usize> = (0..self.generators.len())
            .filter(|&k| {
                self.generators[k].kind != Kind::Rate && !self.is_constant(k) && self.generators[k].rate.is_some()
            })
            .collect();
        let usable = self.relevant(whole, &usable);
        // Logarithmic rates of what a candidate is made of.
        let mut logs = Vec::new();
        for &k in &usable {
            let rate = self.generators[k].rate.clone().ok_or(Fail::Unsupported)?;
            logs.push(Frac { num: rate.num.shift(&power_of(k, -1), &Rational::ONE), den: rate.den });
        }
        for (k, &n) in below.iter().enumerate() {
            if n > 0 {
                logs.push(self.rate_of_log_factor(k)?);
            }
        }
        let mut gap = vec![0u16; self.factors.len()];
        for f in &logs {
            for (k, d) in gap.iter_mut().enumerate() {
                *d = (*d).max(f.power_of_factor(k));
            }
        }
        for (k, d) in gap.iter_mut().enumerate() {
            let below = below.get(k).copied().unwrap_or(0);
            let wanted = if self.factors[k].constant { 0 } else { part.get(k).copied().unwrap_or(0) };
            *d = (*d).max(wanted.saturating_sub(below));
        }
        let mut steps: BTreeSet<Monomial> = BTreeSet::new();
        for f in &logs {
            let raised = self.raise(f, &gap)?;
            steps.extend(self.moving_monomials(&raised));
        }
        // What a relation makes of a step: sin² is 1 − cos².
        for &k in &usable {
            let Some((n, by)) = &self.generators[k].relation else { continue };
            let down = power_of(k, -*n);
            let reduced: Vec<Monomial> = by.0.keys().map(|b| self.moving_part(&times(b, &down, 1))).collect();
            let more: Vec<Monomial> = steps
                .iter()
                .filter(|s| exponent(s, k) > 0)
                .flat_map(|s| reduced.iter().map(|b| times(s, b, 1)))
                .collect();
            steps.extend(more);
        }
        self.budget.charge(steps.len())?;
        let den = gap.iter().enumerate().map(|(k, d)| d + below.get(k).copied().unwrap_or(0)).collect();
        Ok(Family { below, den, usable, steps, targets: BTreeSet::new(), done: BTreeSet::new(), bounds: Vec::new() })
    }

    /// Takes the monomials of a part among a family's targets, where its derivatives can have that denominator.
    fn aim(&mut self, family: &mut Family, part: &Frac) -> Res<()> {
        let fits = part
            .den
            .iter()
            .enumerate()
            .all(|(k, &n)| n == 0 || self.factors[k].constant || n <= family.den.get(k).copied().unwrap_or(0));
        if fits {
            let mut free = part.clone();
            for (k, n) in free.den.iter_mut().enumerate() {
                if self.factors[k].constant {
                    *n = 0;
                }
            }
            let raised = self.raise(&free, &family.den)?;
            family.targets.extend(self.moving_monomials(&raised));
        }
        Ok(())
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
                    // The root in an inverse sine's derivative.
                    Kind::Root => have.iter().any(|&h| {
                        let below = &self.generators[h];
                        below.kind == Kind::Other && below.rate.as_ref().is_some_and(|r| r.num.has(k))
                    }),
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
    fn bounds(&self, v: &Frac, targets: &BTreeSet<Monomial>) -> Vec<(i16, i16)> {
        let low = v.num.lowest();
        (0..self.generators.len())
            .map(|k| match &self.generators[k].relation {
                Some((n, _)) => (0, n - 1),
                None => {
                    let high = targets.iter().map(|m| exponent(m, k)).max().unwrap_or(0);
                    (exponent(&low, k).min(0), high.max(0) + 1)
                }
            })
            .collect()
    }

    fn allowed(&self, m: &Monomial, family: &Family) -> bool {
        m.iter().enumerate().all(|(k, &e)| {
            e == 0 || family.usable.contains(&k) && (family.bounds[k].0..=family.bounds[k].1).contains(&e)
        })
    }

    /// F from its coefficients.
    fn assemble(&mut self, columns: &[Column], found: &[(usize, Coefficient)], extras: &[Extra]) -> Res<Expr> {
        let first_extra = columns.len() - extras.len();
        let mut parts = Vec::new();
        let mut others: Vec<(Coefficient, Expr)> = Vec::new();
        // What has a common denominator of constants is one fraction.
        let mut plain: Vec<((Vec<u16>, Poly), Poly)> = Vec::new();
        for (i, c) in found {
            match &columns[*i].of {
                Some((below, m)) => {
                    let num = self.mul_poly(&c.num, &Poly::monomial(m.clone(), Rational::ONE))?;
                    match plain.iter_mut().find(|(d, _)| d.0 == *below && d.1 == c.den) {
                        Some((_, n)) => *n = n.add(&num),
                        None => plain.push(((below.clone(), c.den.clone()), num)),
                    }
                }
                None => {
                    let x = &extras[*i - first_extra];
                    // log a − log b is log(a/b).
                    let minus = Coefficient { num: c.num.neg(), den: c.den.clone() };
                    let partner = others.iter().position(|o| o.0 == minus && is_log(self.arena, o.1));
                    match partner.filter(|_| is_log(self.arena, x.expr)) {
                        Some(k) => others[k].1 = self.log_of_ratio(others[k].1, x.expr),
                        None => others.push((c.clone(), x.expr)),
                    }
                }
            }
        }
        for (mut c, mut e) in others {
            // −log(a/b) is log(b/a).
            if c.num.primitive().0.is_negative()
                && let Some(inverse) = self.log_of_inverse(e)
            {
                e = inverse;
                c.num = c.num.neg();
            }
            let (num, den) = (self.write_poly(&c.num)?, self.write_poly(&c.den)?);
            let ratio = self.arena.div(num, den);
            parts.push(self.arena.mul(ratio, e));
        }
        for ((below, den), num) in plain {
            let f = self.cancel(Frac { num, den: below })?;
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

    /// −log where it is of a quotient.
    fn log_of_inverse(&mut self, e: Expr) -> Option<Expr> {
        let Node::Call(Function::Log, args) = self.arena.node(e).clone() else { return None };
        let (inner, absolute) = match self.arena.node(args[0]) {
            Node::Call(Function::Abs, args) => (args[0], true),
            _ => (args[0], false),
        };
        let below = self.arena.factors(inner).iter().any(|f| f.1.is_negative());
        if !below {
            return None;
        }
        let mut inverse = self.arena.pow(inner, -1);
        if absolute {
            inverse = self.arena.call(Function::Abs, &[inverse]);
        }
        Some(self.arena.call(Function::Log, &[inverse]))
    }

    fn log_of_ratio(&mut self, a: Expr, b: Expr) -> Expr {
        let inner = |e: Expr, arena: &Arena| match arena.node(e) {
            Node::Call(_, args) => args[0],
            _ => e,
        };
        let (a, b) = (inner(a, self.arena), inner(b, self.arena));
        let absolute = |e: Expr, arena: &Arena| match arena.node(e) {
            Node::Call(Function::Abs, args) => Some(args[0]),
            _ => None,
        };
        let e = match (absolute(a, self.arena), absolute(b, self.arena)) {
            (None, None) => self.arena.div(a, b),
            (x, y) => {
                let e = self.arena.div(x.unwrap_or(a), y.unwrap_or(b));
                self.arena.call(Function::Abs, &[e])
            }
        };
        self.arena.call(Function::Log, &[e])
    }
}

fn is_log(arena: &Arena, e: Expr) -> bool {
    matches!(arena.node(e), Node::Call(Function::Log, _))
}
