//! Which demands to blame: the sparsest δ with Σ λ_c δ_c = ε in each relation, of equally sparse ones the latest.
//!
//! To blame a demand is to eliminate its column: one relation then says by how much it is wrong, and the others hold
//! without it. A set of demands explains everything when no relation that is left contradicts itself.

use super::eliminate::Relation;
use super::form::combine;
use super::{Demand, Slip};
use crate::{Dimension, Exponent};
use std::collections::BTreeSet;
use std::rc::Rc;

/// More sets of demands than this are not looked at in one cluster.
const VISITS: usize = 3000;
/// Up to so many contradictions are looked at together if any demands connect them; more only if they share some.
const TOGETHER: usize = 6;

/// Blames. Also whether the sets are known to be smallest.
pub(super) fn repair(relations: Vec<Relation>, demands: &[Demand]) -> (Vec<Slip>, bool) {
    let relations: Vec<Rc<Relation>> = relations.into_iter().map(Rc::new).collect();
    let mut open: BTreeSet<usize> = (0..relations.len()).filter(|&r| relations[r].contradicts()).collect();
    let together = open.len() <= TOGETHER;
    let mut slips = Vec::new();
    let mut fewest = together;
    while let Some(&first) = open.first() {
        let members = cluster(&relations, if together { None } else { Some(&open) }, first);
        let own: Vec<Rc<Relation>> = relations
            .iter()
            .enumerate()
            .filter(|(r, x)| members.contains(r) || !x.contradicts())
            .map(|x| x.1.clone())
            .collect();
        let mut search = Search { demands, visits: 0, best: None };
        let (blamed, least) = search.blame(&own);
        fewest &= least;
        for (demand, gap) in blamed {
            let because = because(&own, demand);
            slips.push(Slip { demand, gap, because });
        }
        open.retain(|r| !members.contains(r));
    }
    slips.sort_by_key(|s| s.demand);
    slips.dedup_by_key(|s| s.demand);
    (slips, fewest)
}

/// The relations that share demands with one, directly or by others: of all, or of some.
fn cluster(relations: &[Rc<Relation>], of: Option<&BTreeSet<usize>>, first: usize) -> BTreeSet<usize> {
    let mut members = BTreeSet::from([first]);
    let mut columns: BTreeSet<usize> = relations[first].demands.iter().map(|p| p.0).collect();
    loop {
        let before = members.len();
        for (r, relation) in relations.iter().enumerate() {
            let there = of.is_none_or(|of| of.contains(&r)) && !members.contains(&r);
            if there && relation.demands.iter().any(|p| columns.contains(&p.0)) {
                members.insert(r);
                columns.extend(relation.demands.iter().map(|p| p.0));
            }
        }
        if members.len() == before {
            return members;
        }
    }
}

/// The other demands of the shortest contradiction that a demand is in.
fn because(relations: &[Rc<Relation>], demand: usize) -> Vec<usize> {
    let own = relations.iter().filter(|r| r.contradicts() && r.coefficient(demand).is_some());
    let shortest = own.min_by_key(|r| r.demands.len());
    shortest.map_or_else(Vec::new, |r| r.demands.iter().map(|p| p.0).filter(|&d| d != demand).collect())
}

impl Relation {
    fn contradicts(&self) -> bool {
        !self.rest.is_one()
    }

    fn coefficient(&self, demand: usize) -> Option<Exponent> {
        self.demands.binary_search_by_key(&demand, |p| p.0).ok().map(|k| self.demands[k].1)
    }

    /// The relation without a column of another one.
    fn without(&self, demand: usize, pivot: &Relation) -> Option<Relation> {
        let factor = self.coefficient(demand)?.over(pivot.coefficient(demand)?)?.negative();
        let demands = combine(&self.demands, &pivot.demands, factor)?;
        Some(Relation { demands, rest: self.rest.times(pivot.rest.pow(factor)?)? })
    }
}

/// A demand that is blamed, and the relation that says by how much it is wrong once the later ones are known.
type Choice = (usize, Rc<Relation>);

struct Search<'a> {
    demands: &'a [Demand],
    visits: usize,
    best: Option<Vec<Choice>>,
}

impl Search<'_> {
    fn blame(&mut self, relations: &[Rc<Relation>]) -> (Vec<(usize, Dimension)>, bool) {
        let contradictions = relations.iter().filter(|r| r.contradicts()).count();
        for size in 1..=contradictions {
            self.search(relations, size, &mut Vec::new());
            if let Some(best) = self.best.take() {
                return (amounts(&best), self.visits < VISITS);
            }
            if self.visits >= VISITS {
                break;
            }
        }
        (amounts(&self.greedy(relations)), false)
    }

    /// The demands that may be blamed for a relation, the latest first. A firm one only where there is no other.
    fn suspects(&self, relation: &Relation) -> Vec<usize> {
        let all = || relation.demands.iter().rev().map(|p| p.0);
        let soft: Vec<usize> = all().filter(|&d| !self.demands[d].firm).collect();
        if soft.is_empty() { all().take(1).collect() } else { soft }
    }

    /// All ways to explain what contradicts itself by so many demands; keeps the latest.
    fn search(&mut self, relations: &[Rc<Relation>], left: usize, chosen: &mut Vec<Choice>) {
        self.visits += 1;
        let Some(relation) = narrowest(relations) else {
            let places = |list: &[Choice]| {
                let mut places: Vec<usize> = list.iter().map(|c| c.0).collect();
                places.sort_unstable_by(|a, b| b.cmp(a));
                places
            };
            if self.best.as_ref().is_none_or(|best| places(chosen) > places(best)) {
                self.best = Some(chosen.clone());
            }
            return;
        };
        if left == 0 {
            return;
        }
        for demand in self.suspects(relation) {
            if self.visits >= VISITS {
                return;
            }
            let Some(rest) = excused(relations, demand, relation) else { continue };
            chosen.push((demand, relation.clone()));
            self.search(&rest, left - 1, chosen);
            chosen.pop();
        }
    }

    /// One demand after the other, each time the one that leaves the fewest contradictions.
    fn greedy(&self, relations: &[Rc<Relation>]) -> Vec<Choice> {
        let mut relations = relations.to_vec();
        let mut chosen: Vec<Choice> = Vec::new();
        while let Some(relation) = narrowest(&relations).cloned() {
            let ways = self.suspects(&relation).into_iter();
            let ways = ways.filter_map(|d| excused(&relations, d, &relation).map(|rest| (d, rest)));
            let best = ways.min_by_key(|(_, rest)| rest.iter().filter(|r| r.contradicts()).count());
            match best {
                Some((demand, rest)) => {
                    chosen.push((demand, relation));
                    relations = rest;
                }
                // Exponents beyond all measure: the relation says nothing.
                None => relations.retain(|r| !Rc::ptr_eq(r, &relation)),
            }
        }
        chosen
    }
}

/// The contradiction with the fewest demands.
fn narrowest(relations: &[Rc<Relation>]) -> Option<&Rc<Relation>> {
    relations.iter().filter(|r| r.contradicts()).min_by_key(|r| r.demands.len())
}

/// The relations that hold whatever is wrong with a demand, which stands in `pivot`.
fn excused(relations: &[Rc<Relation>], demand: usize, pivot: &Rc<Relation>) -> Option<Vec<Rc<Relation>>> {
    let mut out = Vec::with_capacity(relations.len());
    for r in relations {
        if Rc::ptr_eq(r, pivot) {
            continue;
        }
        out.push(if r.coefficient(demand).is_some() { Rc::new(r.without(demand, pivot)?) } else { r.clone() });
    }
    Some(out)
}

/// By how much each of the blamed demands is wrong: the last one is known from its relation alone.
fn amounts(chosen: &[Choice]) -> Vec<(usize, Dimension)> {
    let mut out: Vec<(usize, Dimension)> = Vec::new();
    for (demand, relation) in chosen.iter().rev() {
        let amount = (|| {
            let mut rest = relation.rest;
            for (d, delta) in &out {
                if let Some(c) = relation.coefficient(*d) {
                    rest = rest.over(delta.pow(c)?)?;
                }
            }
            rest.pow(Exponent::ONE.over(relation.coefficient(*demand)?)?)
        })();
        out.push((*demand, amount.unwrap_or(Dimension::ONE)));
    }
    out
}
