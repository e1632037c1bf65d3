//! Deciding that something is zero: Proved, Refuted with a witness, or Undecided with a reason; never wrong.
//!
//! Expressions are mapped to finite fields and evaluated there at random points [Schwartz 1980, Zippel 1979].
//! A value that is not zero at a real point, by interval arithmetic, refutes.

mod evaluate;
mod field;
mod interval;
mod notes;
mod plan;
mod points;
mod roots;
mod signs;
mod table;
#[cfg(test)]
mod tests;
mod verdict;
mod witness;

pub use signs::{Assumptions, Relation, Sign};
pub use verdict::{Reason, Verdict, ZeroTest};
pub use witness::Witness;
