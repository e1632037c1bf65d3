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
    /// Parameters that multiply the same thing.
    Parameters,
    /// Also what multiplies the same acceleration, then the same velocities.
    Motion,
}

/// Turns polynomials into expressions with few operations.
pub(crate) struct Factoriser<'a> {
    pub arena: &'a mut Arena,
    pub table: &'a mut Table,
    pub keys: &'a mut Keys,
    pub costs: &'a mut Costs,
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
        if collect != Collect::Nothing {
            terms = self.collect(
                terms,
                &|table, m| m.iter().copied().filter(|f| table.kind(f.0) != Kind::Parameter).collect(),
                budget,
            )?;
        }
        if collect == Collect::Motion {
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
            for (set, clear) in options {
                if tried.iter().any(|t| t.0 == set && (t.1 == clear && !clear)) {
                    continue;
                }
                let factor = common(terms, &set, clear.then_some(atom));
                let candidate = self.weigh(terms, &costs, set.clone(), factor);
                tried.push((set, clear));
                if candidate.saving <= 0 {
                    continue;
                }
                let better = match &best {
                    None => true,
                    Some((b, _)) if candidate.saving != b.saving => candidate.saving > b.saving,
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
