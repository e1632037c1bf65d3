//! Rewriting of trigonometric factors, group by group: a group is what multiplies one non-trigonometric monomial.
//!
//! Identities: cos² = 1 − sin², sin² = 1 − cos²; cos a cos b = ½ cos(a−b) + ½ cos(a+b),
//! sin a sin b = ½ cos(a−b) − ½ cos(a+b), sin a cos b = ½ sin(a+b) + ½ sin(a−b).

use crate::arena::{Arena, Expr};
use crate::budget::{Budget, Stopped};
use crate::display::polynomial::{Kind, Monomial, Polynomial, Table, Term, gather, multiply, over, times};
use crate::function::Function;
use crate::rational::Rational;
use hashbrown::HashMap;
use smallvec::SmallVec;

/// Groups with more terms than this keep their products.
const MAX_GROUP: usize = 64;

/// Longer polynomials are not rewritten in ways that a reader does not expect.
const MAX_UNEXPECTED: usize = 400;

/// A rewriting that may be left out where it grows too large; the end of the budget is the end.
fn optional(result: Result<Polynomial, Stopped>, budget: &Budget) -> Result<Option<Polynomial>, Stopped> {
    match result {
        Ok(p) => Ok(Some(p)),
        Err(Stopped::TooLarge) if budget.left() > 0 => Ok(None),
        Err(other) => Err(other),
    }
}

/// Rewrites polynomials.
pub(crate) struct Rewriter<'a> {
    pub arena: &'a mut Arena,
    pub table: &'a mut Table,
    pub cap: usize,
}

/// Terms by their non-trigonometric part, in order.
fn groups(table: &Table, p: &Polynomial) -> Vec<(Monomial, Polynomial)> {
    let mut map: HashMap<Monomial, Polynomial> = HashMap::new();
    for t in p {
        let (trig, other): (Monomial, Monomial) =
            t.monomial.iter().copied().partition(|(a, _)| matches!(table.kind(*a), Kind::Sine(_) | Kind::Cosine(_)));
        map.entry(other).or_default().push(Term { coefficient: t.coefficient.clone(), monomial: trig });
    }
    let mut out: Vec<_> = map.into_iter().collect();
    out.sort_by(|a, b| a.0.cmp(&b.0));
    out
}

fn ungroup(list: Vec<(Monomial, Polynomial)>) -> Polynomial {
    gather(list.into_iter().flat_map(|(other, group)| {
        group
            .into_iter()
            .filter_map(move |t| Some(Term { coefficient: t.coefficient, monomial: times(&t.monomial, &other)? }))
    }))
}

impl Rewriter<'_> {
    /// All versions worth to be looked at, equal ones once; `true` marks those that a reader expects: the original and
    /// the one with every group shortened.
    pub fn versions(&mut self, p: &Polynomial, budget: &mut Budget) -> Result<Vec<(Polynomial, bool)>, Stopped> {
        let mut out = vec![(p.clone(), true)];
        if !p.iter().any(|t| t.monomial.iter().any(|(a, _)| self.is_trig(*a))) {
            return Ok(out);
        }
        let list = groups(self.table, p);
        let mut best = Vec::with_capacity(list.len());
        for (other, group) in &list {
            let shorter = self.best(group, budget);
            best.push((other.clone(), optional(shorter, budget)?.unwrap_or_else(|| group.clone())));
        }
        let mut push = |p: Polynomial, expected: bool| {
            if !out.iter().any(|x| x.0 == p) {
                out.push((p, expected));
            }
        };
        let best = ungroup(best);
        if 2 * best.len() <= p.len() {
            // Nothing that begins with so many more terms ends up shorter.
            return Ok(vec![(best, true)]);
        }
        push(best.clone(), true);
        if p.len() > MAX_UNEXPECTED {
            return Ok(out);
        }
        for sine in [true, false] {
            let mut q = Ok(best.clone());
            for angle in 0..self.table.angles.len() as u32 {
                q = q.and_then(|q| self.pythagoras(&q, angle, sine, budget));
            }
            if let Some(q) = optional(q, budget)? {
                push(q, false);
            }
        }
        let sums = self.sums(p, true, budget);
        if let Some(q) = optional(sums, budget)? {
            push(q, false);
        }
        Ok(out)
    }

    fn is_trig(&self, a: u32) -> bool {
        matches!(self.table.kind(a), Kind::Sine(_) | Kind::Cosine(_))
    }

    /// What a group costs to write, roughly.
    fn cost(&self, p: &Polynomial) -> usize {
        let mut n = p.len().saturating_sub(1);
        for t in p {
            n += t.monomial.len().saturating_sub(1) + usize::from(!t.coefficient.abs().is_one());
            for (a, e) in &t.monomial {
                let inner = match self.table.kind(*a) {
                    Kind::Sine(k) | Kind::Cosine(k) => {
                        self.arena.summands(self.table.angles[k as usize]).len().saturating_sub(1)
                    }
                    _ => 0,
                };
                n += 1 + inner + usize::from(*e != 1);
            }
        }
        n
    }

    fn angles(&self, p: &Polynomial) -> Vec<u32> {
        let mut out: Vec<u32> = p
            .iter()
            .flat_map(|t| t.monomial.iter())
            .filter_map(|(a, _)| match self.table.kind(*a) {
                Kind::Sine(k) | Kind::Cosine(k) => Some(k),
                _ => None,
            })
            .collect();
        out.sort_unstable();
        out.dedup();
        out
    }

    /// The shortest version of a group.
    fn best(&mut self, group: &Polynomial, budget: &mut Budget) -> Result<Polynomial, Stopped> {
        let mut best = group.clone();
        if group.len() < 2 || group.len() > MAX_GROUP {
            return Ok(best);
        }
        best = self.shorten(best, budget)?;
        if best.len() > 1 {
            let sums = self.sums(group, false, budget)?;
            let sums = self.shorten(sums, budget)?;
            if self.cost(&sums) < self.cost(&best) {
                best = sums;
            }
        }
        Ok(best)
    }

    /// cos² + sin² = 1, angle by angle, and addition theorems, what shortens most first.
    fn shorten(&mut self, mut best: Polynomial, budget: &mut Budget) -> Result<Polynomial, Stopped> {
        loop {
            let mut cost = self.cost(&best);
            let mut shorter = None;
            let mut versions = Vec::new();
            versions.extend(self.contract(&best, budget)?);
            for angle in self.angles(&best) {
                for sine in [true, false] {
                    versions.push(self.pythagoras(&best, angle, sine, budget)?);
                }
            }
            for q in versions {
                if self.cost(&q) < cost {
                    cost = self.cost(&q);
                    shorter = Some(q);
                }
            }
            match shorter {
                Some(q) => best = q,
                None => return Ok(best),
            }
        }
    }

    /// One pair of terms by an addition theorem: cos a cos b + sin a sin b = cos(a − b) and its like, whatever else
    /// multiplies both. With a = b: cos² − sin² of the doubled angle.
    fn contract(&mut self, p: &Polynomial, budget: &mut Budget) -> Result<Option<Polynomial>, Stopped> {
        budget.charge(p.len() * p.len())?;
        for (i, t) in p.iter().enumerate() {
            for (j, u) in p.iter().enumerate() {
                if i == j || t.coefficient.abs() != u.coefficient.abs() {
                    continue;
                }
                let Some(sum) = self.addition(t, u) else { continue };
                let mut out: Vec<Term> = Vec::with_capacity(p.len());
                out.extend(p.iter().enumerate().filter(|(k, _)| *k != i && *k != j).map(|(_, x)| x.clone()));
                out.extend(sum);
                return Ok(Some(gather(out)));
            }
        }
        Ok(None)
    }

    /// `t + u` where `t` has cos a cos b or sin a cos b and `u` has sin a sin b or cos a sin b in its place.
    fn addition(&mut self, t: &Term, u: &Term) -> Option<Vec<Term>> {
        let quotient = over(&t.monomial, &u.monomial);
        let equal = t.coefficient == u.coefficient;
        let mut above: SmallVec<[Kind; 4]> = SmallVec::new();
        let mut below: SmallVec<[Kind; 4]> = SmallVec::new();
        let mut taken = Monomial::new();
        for (a, e) in &quotient {
            let place = if *e > 0 { &mut above } else { &mut below };
            for _ in 0..e.unsigned_abs().min(3) {
                place.push(self.table.kind(*a));
            }
            if *e > 0 {
                taken.push((*a, *e));
            }
        }
        let ([a, b], [c, d]) = (above.as_slice(), below.as_slice()) else { return None };
        let has = |x: Kind, y: Kind| (*c == x && *d == y) || (*c == y && *d == x);
        let (f, x, y) = match (*a, *b) {
            (Kind::Cosine(x), Kind::Cosine(y)) if has(Kind::Sine(x), Kind::Sine(y)) => (Function::Cos, x, y),
            (Kind::Sine(x), Kind::Cosine(y)) | (Kind::Cosine(y), Kind::Sine(x))
                if x != y && has(Kind::Cosine(x), Kind::Sine(y)) =>
            {
                (Function::Sin, x, y)
            }
            _ => return None,
        };
        if x == y && equal {
            return None;
        }
        let (x, y) = (self.table.angles[x as usize], self.table.angles[y as usize]);
        // cos(x − y) = cos cos + sin sin; sin(x + y) = sin cos + cos sin.
        let minus = equal == (f == Function::Cos);
        let argument = if minus { self.arena.sub(x, y) } else { self.arena.add(x, y) };
        let value = self.arena.call(f, &[argument]);
        let rest = over(&t.monomial, &taken);
        let mut out = Vec::with_capacity(1);
        for (core, k) in self.arena.summands(value) {
            let inner = self.split(core)?;
            let coefficient = t.coefficient.mul(&k).mul(&inner.coefficient);
            out.push(Term { coefficient, monomial: times(&rest, &inner.monomial)? });
        }
        Some(out)
    }

    /// Replaces squares of the cosine (or of the sine where `sine` is false) of one angle.
    fn pythagoras(
        &mut self,
        p: &Polynomial,
        angle: u32,
        sine: bool,
        budget: &mut Budget,
    ) -> Result<Polynomial, Stopped> {
        let from = if sine { Kind::Cosine(angle) } else { Kind::Sine(angle) };
        let square = |t: &Term, table: &Table| t.monomial.iter().any(|(a, e)| *e >= 2 && table.kind(*a) == from);
        if !p.iter().any(|t| square(t, self.table)) {
            return Ok(p.clone());
        }
        let f = if sine { Function::Sin } else { Function::Cos };
        let argument = self.table.angles[angle as usize];
        let other = self.arena.call(f, &[argument]);
        let other = self.table.atom(self.arena, other, 1);
        // 1 − other².
        let one = Term { coefficient: Rational::ONE, monomial: Monomial::new() };
        let minus = Term { coefficient: Rational::MINUS_ONE, monomial: SmallVec::from_slice(&[(other, 2)]) };
        let replacement = gather([one, minus]);
        let mut out = Vec::new();
        for t in p {
            if !square(t, self.table) {
                out.push(t.clone());
                continue;
            }
            let mut rest = t.clone();
            let mut power = 0;
            for (a, e) in &mut rest.monomial {
                if self.table.kind(*a) == from {
                    power = *e / 2;
                    *e %= 2;
                }
            }
            rest.monomial.retain(|f| f.1 != 0);
            let mut q = vec![rest];
            for _ in 0..power {
                q = multiply(&q, &replacement, self.cap, budget)?;
            }
            out.extend(q);
        }
        Ok(gather(out))
    }

    /// Products of two to sums: of different angles, or of equal ones as well where `all`.
    fn sums(&mut self, p: &Polynomial, all: bool, budget: &mut Budget) -> Result<Polynomial, Stopped> {
        let mut done = Vec::new();
        let mut work = p.clone();
        while let Some(t) = work.pop() {
            budget.charge(1)?;
            if done.len() + work.len() > self.cap {
                return Err(Stopped::TooLarge);
            }
            match self.pair(&t, all) {
                Some((a, b)) => work.extend(self.product_to_sum(&t, a, b).ok_or(Stopped::TooLarge)?),
                None => done.push(t),
            }
        }
        Ok(gather(done))
    }

    /// Two factors of a term to be turned into a sum.
    fn pair(&self, t: &Term, all: bool) -> Option<(u32, u32)> {
        let trig: Vec<(u32, i32)> = t.monomial.iter().copied().filter(|(a, e)| *e > 0 && self.is_trig(*a)).collect();
        let angle = |a: u32| match self.table.kind(a) {
            Kind::Sine(k) | Kind::Cosine(k) => k,
            _ => u32::MAX,
        };
        if all {
            if let Some((a, _)) = trig.iter().find(|(_, e)| *e >= 2) {
                return Some((*a, *a));
            }
            return (trig.len() >= 2).then(|| (trig[0].0, trig[1].0));
        }
        // A square or a further function of one of the angles would only grow.
        if trig.len() != 2 || trig.iter().any(|(_, e)| *e != 1) || angle(trig[0].0) == angle(trig[1].0) {
            return None;
        }
        Some((trig[0].0, trig[1].0))
    }

    fn product_to_sum(&mut self, t: &Term, a: u32, b: u32) -> Option<Vec<Term>> {
        let (ka, kb) = (self.table.kind(a), self.table.kind(b));
        let mut rest = t.monomial.clone();
        for x in [a, b] {
            let f = rest.iter_mut().find(|f| f.0 == x)?;
            f.1 -= 1;
        }
        rest.retain(|f| f.1 != 0);
        let (f, x, y, sign) = match (ka, kb) {
            (Kind::Cosine(x), Kind::Cosine(y)) => (Function::Cos, x, y, 1),
            (Kind::Sine(x), Kind::Sine(y)) => (Function::Cos, x, y, -1),
            (Kind::Sine(x), Kind::Cosine(y)) | (Kind::Cosine(y), Kind::Sine(x)) => (Function::Sin, x, y, 1),
            _ => return None,
        };
        let (x, y) = (self.table.angles[x as usize], self.table.angles[y as usize]);
        let minus = self.arena.sub(x, y);
        let plus = self.arena.add(x, y);
        let half = t.coefficient.mul(&Rational::HALF);
        let mut out = Vec::with_capacity(2);
        for (argument, c) in [(minus, half.clone()), (plus, half.mul(&Rational::integer(sign)))] {
            let value = self.arena.call(f, &[argument]);
            for (core, k) in self.arena.summands(value) {
                let inner: Term = self.split(core)?;
                out.push(Term {
                    coefficient: c.mul(&k).mul(&inner.coefficient),
                    monomial: times(&rest, &inner.monomial)?,
                });
            }
        }
        Some(out)
    }

    fn split(&mut self, e: Expr) -> Option<Term> {
        self.table.split(self.arena, e)
    }
}
