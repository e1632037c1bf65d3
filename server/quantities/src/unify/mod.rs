//! Dimensions by unification: all demands of a model form one linear system over ℚ for the exponents of what is unknown
//! [Kennedy 1996, "Programming Languages and Dimensions"]. Where the demands contradict each other, the fewest are blamed,
//! of equally few the latest.
//!
//! A demand asks that a form is a pure number. Elimination in the order of the file makes of each demand either a row
//! that determines an unknown, or a relation Σ λ_c g_c = ε between demands, ε a known dimension. If demand c is wrong by
//! the dimension δ_c, then Σ λ_c δ_c = ε in each relation: the repair is the sparsest δ.

mod eliminate;
mod form;
mod repair;

pub use form::{Form, Unknown};

use crate::Dimension;
use eliminate::Rows;

/// A form that has to be a pure number.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Demand {
    /// What is asked to be a number: the quotient of two sides.
    pub gap: Form,
    /// Whether it can be wrong. A firm demand is not blamed as long as another one can be.
    pub firm: bool,
}

/// A demand that is not met.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Slip {
    /// The number of the demand.
    pub demand: usize,
    /// What its gap is instead of a number.
    pub gap: Dimension,
    /// The demands that tell so: a short list, ascending.
    pub because: Vec<usize>,
}

/// What the demands say of the unknowns.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Solution {
    /// For each unknown its form in the free ones; a free one is itself.
    pub values: Vec<Form>,
    /// What contradicts the rest, ascending.
    pub slips: Vec<Slip>,
    /// Whether no smaller set of demands could be blamed.
    pub fewest: bool,
}

/// Solves for the unknowns 0…n−1 from demands in the order of the file. Of an unknown that is not determined by the
/// others, the earlier one stays free. Costs one sparse elimination; with contradictions a second one and a bounded search.
pub fn solve(n: usize, demands: &[Demand]) -> Solution {
    let mut rows = Rows::new(n);
    let consistent = demands.iter().all(|d| rows.take(&d.gap).is_none_or(Dimension::is_one));
    if consistent {
        return Solution { values: rows.values(), slips: Vec::new(), fewest: true };
    }
    let relations = eliminate::relations(n, demands);
    let (slips, fewest) = repair::repair(relations, demands);
    let mut rows = Rows::new(n);
    for (k, d) in demands.iter().enumerate() {
        if !slips.iter().any(|s| s.demand == k) {
            rows.take(&d.gap);
        }
    }
    Solution { values: rows.values(), slips, fewest }
}

#[cfg(test)]
mod tests;
