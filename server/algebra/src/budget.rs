//! Budgets in nodes, and cancellation. Never in time, so that a result does not depend on load.

use std::fmt;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

/// Why an operation stopped before its end. No partial result is kept.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Stopped {
    /// More nodes than the budget allows.
    TooLarge,
    /// Nested more deeply than recursion allows.
    TooDeep,
    /// The text has changed meanwhile.
    Cancelled,
    /// A member at a symbolic index cannot be told from the member in question.
    FreeIndex,
}

impl fmt::Display for Stopped {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Stopped::TooLarge => "the expression is too large",
            Stopped::TooDeep => "the expression is nested too deeply",
            Stopped::Cancelled => "the derivation was cancelled",
            Stopped::FreeIndex => "a member at a symbolic index cannot be told apart",
        })
    }
}

impl std::error::Error for Stopped {}

/// Expressions nested more deeply are not derived.
pub const MAX_DEPTH: u32 = 20_000;

/// A number of nodes that may still be visited or made.
#[derive(Clone, Debug)]
pub struct Budget {
    left: u64,
    cancelled: Option<Arc<AtomicBool>>,
}

impl Budget {
    /// A budget of `nodes`.
    pub fn new(nodes: u64) -> Budget {
        Budget { left: nodes, cancelled: None }
    }

    /// A budget that ends at once when the flag is raised.
    pub fn cancellable(nodes: u64, flag: Arc<AtomicBool>) -> Budget {
        Budget { left: nodes, cancelled: Some(flag) }
    }

    /// Takes `nodes` away. Errors: [`Stopped::TooLarge`], [`Stopped::Cancelled`].
    pub fn charge(&mut self, nodes: usize) -> Result<(), Stopped> {
        let Some(left) = self.left.checked_sub(nodes as u64) else {
            self.left = 0;
            return Err(Stopped::TooLarge);
        };
        // The flag is looked at every few hundred nodes: an atomic load is dearer than a subtraction.
        if (left ^ self.left) & !0xff != 0
            && let Some(flag) = &self.cancelled
            && flag.load(Ordering::Relaxed)
        {
            return Err(Stopped::Cancelled);
        }
        self.left = left;
        Ok(())
    }

    /// A budget of at most `nodes` of what is left, which ends with the same flag. Whoever uses it charges what it spent.
    pub fn part(&self, nodes: u64) -> Budget {
        Budget { left: self.left.min(nodes), cancelled: self.cancelled.clone() }
    }

    /// What is left.
    pub fn left(&self) -> u64 {
        self.left
    }
}
