//! What a model has beyond what was asked: the algebra of its charges, discrete symmetries, similarity, idle terms.
//!
//! Each costs more than a verdict, so each is derived where the sheet or a hover asks for it and not before; idle terms
//! alone are cheap enough to be told with every change.

mod algebra;
mod charges;
mod discrete;
mod idle;
mod removal;
mod similarity;

pub use algebra::{Algebra, AlgebraReport, BracketRow, BracketStatus, ConditionRow, Constant, NamedRow, Summand};
pub use charges::Source;
pub use discrete::{DiscreteReport, DiscreteRow, Holds, Map};
pub use idle::IdleRow;
pub use similarity::{Scaling, SimilarityReport};

pub(crate) use algebra::algebra;
pub(crate) use discrete::{discrete, even, reversal};
pub(crate) use idle::findings;

use crate::checked::Checked;
use crate::derive::Derived;
use crate::sheet::Maker;
use leastwise_algebra::{Budget, Stopped};
use leastwise_mechanics::context::Context;
use std::sync::OnceLock;

/// All of it, printed.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Insights {
    /// What the proved constants form; `None` where there is none.
    pub algebra: Option<AlgebraReport>,
    /// Reversal of time, reflections, half turns.
    pub discrete: DiscreteReport,
    /// Changes of scale that take motions to motions.
    pub similarity: SimilarityReport,
    /// Parts of L that change no equation of motion.
    pub idle: Vec<IdleRow>,
}

/// What has been derived already.
#[derive(Default)]
pub(crate) struct Memo {
    algebra: OnceLock<Option<AlgebraReport>>,
}

/// Nodes that one of them may visit or make.
const NODES: u64 = 8_000_000;

/// All of it. A derivation that was cancelled leaves its part empty: the whole is thrown away then.
pub(crate) fn insights(maker: &mut Maker<'_>, checked: &Checked, derived: &Derived) -> Insights {
    let idle = idle::rows(maker, checked);
    Insights {
        algebra: algebra(maker, checked, derived).cloned(),
        discrete: discrete(maker, checked),
        similarity: similarity::similarity(maker, checked, &idle),
        idle: idle.into_iter().filter(|found| found.told).map(|found| found.row).collect(),
    }
}

/// Asks the mechanics within a budget of its own, so that nothing else goes without.
fn asked<T>(
    maker: &mut Maker<'_>,
    question: impl FnOnce(&mut Context<'_>) -> Result<T, Stopped>,
) -> Result<T, Stopped> {
    let mut budget: Budget = maker.budget.part(NODES);
    let mut cx = Context { arena: maker.arena, zero: maker.zero, budget: &mut budget, memory: maker.memory };
    question(&mut cx)
}

#[cfg(test)]
mod tests;
