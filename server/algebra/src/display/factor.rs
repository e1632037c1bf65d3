//! Collecting and taking out factors.
//!
//! First what multiplies the same motion is collected, then the factor that removes most operations is taken out,
//! again and again, until none does.

use crate::arena::{Arena, Expr, Node};
use crate::budget::{Budget, Stopped};
use crate::display::cost::Costs;
use crate::display::form::coefficient_cost;
use crate::display::order::Keys;
use crate::display::polynomial::{Kind, Monomial, Polynomial, Table, Term, gather, over};
use crate::rational::Rational;
use hashbrown::HashMap;

/// How much is collected before factors are taken out.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) enum Collect {
    /// Nothing.
    Nothing,
    /// What multiplies the same acceleration.
    Accelerations,
    /// Parameters that multiply the same thing.
    Parameters,
    /// Parameters, then also what the same parameters multiply.
    Coefficients,
    /// Parameters, then also what multiplies the same acceleration, then the same velocities.
    Motion,
}

/// Turns polynomials into expressions with few operations.
pub(crate) struct Factoriser<'a> {
    pub arena: &'a mut Arena,
    pub table: &'a mut Table,
    pub keys: &'a mut Keys,
    pub costs: &'a mut Costs,
    /// Whether there are accelerations in the whole.
    pub accelerated: bool,
    /// The highest degree in the velocities in the whole.
    pub degree: i32,
}

/// A factor to be taken out of some terms.
struct Candidate {
    saving: isize,
    terms: Vec<usize>,
    factor: Monomial,
    content: Rational,
}

impl Factoriser<'_> {
    /// The whole job.
    pub fn run(&mut self, p: &Polynomial, collect: Collect, budget: &mut Budget) -> Result<Expr, Stopped> {
        let mut terms = p.clone();
        if matches!(collect, Collect::Parameters | Collect::Coefficients | Collect::Motion) {
            terms = self.collect(
                terms,
                &|table, m| m.iter().copied().filter(|f| table.kind(f.0) != Kind::Parameter).collect(),
                budget,
            )?;
        }
        if collect == Collect::Coefficients {
            terms = self.collect(
                terms,
                &|table, m| m.iter().copied().filter(|f| table.kind(f.0) == Kind::Parameter).collect(),
                budget,
            )?;
        }
        if matches!(collect, Collect::Accelerations | Collect::Motion) {
            let accelerations = self.present(&terms, Kind::Acceleration);
            for a in accelerations {
                terms = self.collect(terms, &|_, m| m.iter().copied().filter(|f| f.0 == a).collect(), budget)?;
            }
            terms = self.collect(
                terms,
                &|table, m| {
                    if m.iter().any(|f| table.kind(f.0) == Kind::Acceleration) {
                        return Monomial::new();
                    }
                    m.iter().copied().filter(|f| table.kind(f.0) == Kind::Velocity).collect()
                },
                budget,
            )?;
        }
        self.take_out(terms, budget)
    }

    /// Atoms of a kind, in the order of their names.
    fn present(&mut self, terms: &[Term], kind: Kind) -> Vec<u32> {
        let mut out: Vec<u32> =
            terms.iter().flat_map(|t| t.monomial.iter()).map(|f| f.0).filter(|a| self.table.kind(*a) == kind).collect();
        out.sort_unstable();
        out.dedup();
        out.sort_by_cached_key(|a| self.keys.factor(self.arena, self.table.atoms[*a as usize].base));
        out
    }

    /// Terms with the same part are added and their common part taken out.
    fn collect(
        &mut self,
        terms: Vec<Term>,
        part: &dyn Fn(&Table, &Monomial) -> Monomial,
        budget: &mut Budget,
    ) -> Result<Vec<Term>, Stopped> {
        let mut order: Vec<Monomial> = Vec::new();
        let mut groups: HashMap<Monomial, Vec<Term>> = HashMap::new();
        let mut out = Vec::new();
        for t in terms {
            budget.charge(1)?;
            let k = part(self.table, &t.monomial);
            if k.is_empty() {
                out.push(t);
                continue;
            }
            let rest = Term { coefficient: t.coefficient, monomial: over(&t.monomial, &k) };
            let group = groups.entry(k.clone()).or_default();
            if group.is_empty() {
                order.push(k);
            }
            group.push(rest);
        }
        for k in order {
            let Some(group) = groups.remove(&k) else { continue };
            if let [t] = group.as_slice() {
                let monomial = crate::display::polynomial::times(&t.monomial, &k).ok_or(Stopped::TooLarge)?;
                out.push(Term { coefficient: t.coefficient.clone(), monomial });
                continue;
            }
            let inner = self.take_out(gather(group), budget)?;
            out.push(self.product(&k, &Rational::ONE, inner)?);
        }
        Ok(out)
    }

    /// `content · factor · e` as a term.
    fn product(&mut self, factor: &Monomial, content: &Rational, e: Expr) -> Result<Term, Stopped> {
        let f = self.table.to_expr(self.arena, content, factor);
        let e = self.arena.mul(f, e);
        self.table.split(self.arena, e).ok_or(Stopped::TooLarge)
    }

    /// Takes out, greedily, the factor that removes most operations.
    fn take_out(&mut self, terms: Vec<Term>, budget: &mut Budget) -> Result<Expr, Stopped> {
        let mut terms = gather(terms);
        while terms.len() > 1 {
            let Some(best) = self.best(&terms, budget)? else { break };
            let mut quotient = Vec::with_capacity(best.terms.len());
            for &i in &best.terms {
                let c = terms[i].coefficient.div(&best.content).ok_or(Stopped::TooLarge)?;
                quotient.push(Term { coefficient: c, monomial: over(&terms[i].monomial, &best.factor) });
            }
            let inner = self.take_out(quotient, budget)?;
            let product = self.product(&best.factor, &best.content, inner)?;
            let mut rest: Vec<Term> = Vec::with_capacity(terms.len());
            for (i, t) in terms.into_iter().enumerate() {
                if best.terms.binary_search(&i).is_err() {
                    rest.push(t);
                }
            }
            rest.push(product);
            terms = gather(rest);
        }
        Ok(self.table.sum(self.arena, &terms))
    }

    fn best(&mut self, terms: &[Term], budget: &mut Budget) -> Result<Option<Candidate>, Stopped> {
        // For each atom the terms that have it above and below the line.
        let mut uses: HashMap<(u32, bool), Vec<usize>> = HashMap::new();
        for (i, t) in terms.iter().enumerate() {
            budget.charge(t.monomial.len())?;
            for (a, e) in &t.monomial {
                uses.entry((*a, *e < 0)).or_default().push(i);
            }
        }
        let costs: Vec<usize> = terms.iter().map(|t| self.term_cost(&t.coefficient, &t.monomial)).collect();
        let mut tried: Vec<(Vec<usize>, bool)> = Vec::new();
        let mut best: Option<(Candidate, Vec<std::sync::Arc<crate::display::order::FactorKey>>)> = None;
        let mut list: Vec<_> = uses.into_iter().filter(|(_, s)| s.len() > 1).collect();
        list.sort();
        for ((atom, below), set) in list {
            budget.charge(set.len())?;
            let mut options = vec![(set.clone(), false)];
            if below {
                // The common denominator of all terms that have one, and of all terms at all.
                options.push((set.clone(), true));
                if set.len() < terms.len() {
                    options.push(((0..terms.len()).collect(), true));
                }
            }
            options.extend(self.parts(terms, &set).into_iter().map(|s| (s, false)));
            for (set, clear) in options {
                if tried.iter().any(|t| t.0 == set && (t.1 == clear && !clear)) {
                    continue;
                }
                let factor = common(terms, &set, clear.then_some(atom));
                let candidate = self.weigh(terms, &costs, set.clone(), factor);
                tried.push((set, clear));
                let free = candidate.saving == 0 && (clear || self.is_versine(terms, &candidate));
                if candidate.saving <= 0 && !free || !self.suits(terms, &candidate) {
                    continue;
                }
                let better = match &best {
                    None => true,
                    Some((b, _)) if candidate.saving != b.saving => candidate.saving > b.saving,
                    // A denominator that goes leaves no fraction in a fraction.
                    Some((b, _)) if clear && b.terms == candidate.terms => true,
                    Some((b, _)) if candidate.terms.len() != b.terms.len() => candidate.terms.len() > b.terms.len(),
                    Some((_, key)) => self.names(&candidate.factor) < *key,
                };
                if better {
                    let key = self.names(&candidate.factor);
                    best = Some((candidate, key));
                }
            }
        }
        Ok(best.map(|b| b.0))
    }

    /// Smaller sets that belong together: by the degree in the velocities and by the number in front, or inertial terms
    /// and forces.
    fn parts(&self, terms: &[Term], set: &[usize]) -> Vec<Vec<usize>> {
        let mut parts: Vec<((i32, Rational), Vec<usize>)> = Vec::new();
        let mut whole: Vec<(i32, Vec<usize>)> = Vec::new();
        for &i in set {
            let (degree, accelerated) = self.table.motion(&terms[i].monomial);
            let (kind, number) = match self.accelerated {
                true => (i32::from(degree > 0 || accelerated), Rational::ONE),
                false => (degree, terms[i].coefficient.abs()),
            };
            match whole.iter_mut().find(|p| p.0 == kind) {
                Some(p) => p.1.push(i),
                None => whole.push((kind, vec![i])),
            }
            let key = (kind, number);
            match parts.iter_mut().find(|p| p.0 == key) {
                Some(p) => p.1.push(i),
                None => parts.push((key, vec![i])),
            }
        }
        let mut out: Vec<Vec<usize>> = whole.into_iter().map(|p| p.1).collect();
        out.extend(parts.into_iter().map(|p| p.1));
        if !self.accelerated {
            let number = |i: usize| terms[i].coefficient.abs();
            let first = number(set[0]);
            let (same, other): (Vec<usize>, Vec<usize>) = set.iter().partition(|&&i| number(i) == first);
            out.extend([same, other]);
        }
        out.retain(|p| p.len() > 1 && p.len() < set.len());
        out.dedup();
        out
    }

    /// Whether a physicist would take that factor out.
    ///
    /// - A velocity is taken out of what multiplies it, not out of a quadratic form; likewise a coordinate out of a potential.
    /// - Without accelerations, parts of different degree in the velocities (kinetic, potential) stay apart, unless what
    ///   remains of the kinetic part has no parameters: 1/2 m R² (θ̇² + ω² sin² θ). Parts of the kinetic energy with
    ///   different numbers stay apart, unless the factor goes through it all.
    /// - With accelerations, a sine alone is taken out of different motions only for much; inertial terms and forces are joined only together with an acceleration, or for much.
    fn suits(&self, terms: &[Term], c: &Candidate) -> bool {
        let quotients: Vec<Monomial> = c.terms.iter().map(|&i| over(&terms[i].monomial, &c.factor)).collect();
        let motion = |m: &Monomial| self.table.motion(m);
        let is_sum = |f: &(u32, i32)| self.table.kind(f.0) == Kind::Other && self.table.motion(&[*f][..].into()).0 != 0;
        if c.factor.iter().any(is_sum) {
            // A whole sum with velocities, kept from the source: what is left may be that sum again.
            return true;
        }
        if motion(&c.factor).0 != 0 && quotients.iter().any(|q| motion(q).0 != 0 || motion(q).1) {
            return false;
        }
        let nested = |q: &Monomial| q.iter().any(|f| f.1 < 0 && c.factor.iter().any(|g| g.0 == f.0 && g.1 < 0));
        if quotients.iter().any(nested) {
            // No fraction in a fraction.
            return false;
        }
        let first = terms[c.terms[0]].coefficient.abs();
        let equal = c.terms.iter().all(|&i| terms[i].coefficient.abs() == first);
        let coordinate = |f: &(u32, i32)| self.table.kind(f.0) == Kind::Coordinate && f.1 > 0;
        let again = |f: &(u32, i32)| coordinate(f) && quotients.iter().any(|q| q.iter().any(|g| g.0 == f.0));
        let other = c.factor.iter().any(coordinate) && quotients.iter().any(|q| q.iter().any(coordinate));
        let at_rest = c.terms.iter().all(|&i| motion(&terms[i].monomial).0 == 0);
        if !self.accelerated && (other && at_rest || c.factor.iter().any(again) && !equal) {
            return false;
        }
        let same = |q: &Monomial| c.factor.iter().any(|f| f.1 > 0 && q.iter().any(|g| g.0 == f.0));
        if !self.accelerated && c.saving == 1 && (quotients.iter().all(|q| q.len() > 2) || quotients.iter().any(same)) {
            // One operation is no reason to take two long products apart, or h² − 2 h p.
            return false;
        }
        let degrees: Vec<(i32, bool)> = c.terms.iter().map(|&i| motion(&terms[i].monomial)).collect();
        let mixed = degrees.iter().any(|d| *d != degrees[0]);
        if self.accelerated {
            let trig = |f: &(u32, i32)| matches!(self.table.kind(f.0), Kind::Sine(_) | Kind::Cosine(_));
            let still = degrees.iter().any(|d| d.0 == 0 && !d.1);
            let forces = mixed && still && !degrees.iter().any(|d| d.1);
            let alone = mixed && c.factor.iter().all(trig) && c.terms.len() < terms.len();
            return !(alone && (forces || c.saving < 5) || forces && c.saving < 4);
        }
        if self.degree < 2 {
            return true;
        }
        let highest = degrees.iter().map(|d| d.0).max().unwrap_or(0);
        if mixed {
            let bare = |q: &Monomial| q.iter().all(|f| self.table.kind(f.0) != Kind::Parameter);
            return equal && !first.is_one() && quotients.iter().zip(&degrees).all(|(q, d)| d.0 < highest || bare(q));
        }
        highest < 2 || equal || c.terms.len() == terms.iter().filter(|t| motion(&t.monomial).0 == highest).count()
    }

    /// Whether g (1 − cos θ) is in the making.
    fn is_versine(&self, terms: &[Term], c: &Candidate) -> bool {
        let quotients: Vec<Monomial> = c.terms.iter().map(|&i| over(&terms[i].monomial, &c.factor)).collect();
        let cosine = |q: &Monomial| matches!(q.as_slice(), [(a, 1)] if matches!(self.table.kind(*a), Kind::Cosine(_)));
        quotients.len() == 2
            && quotients.iter().any(|q| q.is_empty())
            && quotients.iter().any(cosine)
            && c.terms.iter().all(|&i| terms[i].coefficient.abs() == c.content.abs())
    }

    fn names(&mut self, m: &Monomial) -> Vec<std::sync::Arc<crate::display::order::FactorKey>> {
        let mut out: Vec<_> =
            m.iter().map(|f| self.keys.factor(self.arena, self.table.atoms[f.0 as usize].base)).collect();
        out.sort();
        out
    }

    /// How many operations a factor saves.
    fn weigh(&mut self, terms: &[Term], costs: &[usize], set: Vec<usize>, factor: Monomial) -> Candidate {
        let mut content = terms[set[0]].coefficient.abs();
        for &i in &set {
            content = content.content(&terms[i].coefficient);
        }
        let before: usize = set.iter().map(|i| costs[*i]).sum::<usize>() + set.len() - 1;
        let mut inside = set.len() - 1;
        let mut signs = [0usize; 2];
        for &i in &set {
            let c = terms[i].coefficient.div(&content).unwrap_or(Rational::ONE);
            signs[usize::from(c.is_negative())] += 1;
            let q = over(&terms[i].monomial, &factor);
            inside += self.term_cost(&c, &q);
        }
        let after = self.factored_cost(&content, &factor, inside);
        if signs[0] == 0 {
            content = content.neg();
        }
        Candidate { saving: before as isize - after as isize, terms: set, factor, content }
    }

    /// Operations in `c · m`.
    fn term_cost(&mut self, c: &Rational, m: &Monomial) -> usize {
        self.written(c, m, None)
    }

    fn factored_cost(&mut self, c: &Rational, m: &Monomial, inside: usize) -> usize {
        self.written(c, m, Some(inside))
    }

    fn written(&mut self, c: &Rational, m: &Monomial, sum: Option<usize>) -> usize {
        let (n, d) = match c.small() {
            Some((n, d)) => (n.unsigned_abs() != 1, d != 1),
            None => (true, true),
        };
        let mut above = usize::from(n) + usize::from(sum.is_some());
        let mut below = usize::from(d);
        let mut inner = sum.unwrap_or(0);
        for (a, e) in m {
            let atom = &self.table.atoms[*a as usize];
            let (base, root) = (atom.base, atom.root);
            inner += self.costs.of(self.arena, base);
            inner += usize::from(e.unsigned_abs() != 1 || root != 1);
            inner += usize::from(root != 1 && !(root == 2 && e.unsigned_abs() == 1));
            if *e > 0 { above += 1 } else { below += 1 }
        }
        if above == 0 && m.is_empty() {
            return coefficient_cost(c).min(1) * usize::from(d);
        }
        inner + above.saturating_sub(1) + below.saturating_sub(1) + usize::from(below > 0)
    }
}

/// The greatest common factor of some terms; with `clear` also the whole denominator in that atom.
fn common(terms: &[Term], set: &[usize], clear: Option<u32>) -> Monomial {
    let mut out = terms[set[0]].monomial.clone();
    for &i in &set[1..] {
        let m = &terms[i].monomial;
        out.retain(|(a, e)| {
            let other = m.iter().find(|f| f.0 == *a).map_or(0, |f| f.1);
            *e = if (*e > 0) != (other > 0) {
                0
            } else if *e > 0 {
                (*e).min(other)
            } else {
                (*e).max(other)
            };
            *e != 0
        });
    }
    if let Some(atom) = clear {
        let lowest =
            set.iter().map(|&i| terms[i].monomial.iter().find(|f| f.0 == atom).map_or(0, |f| f.1)).min().unwrap_or(0);
        out.retain(|f| f.0 != atom);
        if lowest != 0 {
            out.push((atom, lowest));
            out.sort_unstable();
        }
    }
    out
}

/// Whether something is a sum of two terms or more.
pub(crate) fn is_proper_sum(arena: &Arena, e: Expr) -> bool {
    match arena.node(e) {
        Node::Sum(c, terms) => terms.len() + usize::from(!c.is_zero()) > 1,
        _ => false,
    }
}
