//! Deciding that something is zero: Proved, Refuted with a witness, or Undecided with a reason; never wrong.
//!
//! Expressions are mapped to finite fields and evaluated there at random points [Schwartz 1980, Zippel 1979].
//! A value that is not zero at a real point, by interval arithmetic, refutes.

mod assumptions;
mod bounds;
mod evaluate;
mod field;
mod interval;
mod linear;
mod notes;
mod plan;
mod points;
mod ranges;
mod rates;
mod refute;
mod roots;
mod sample;
mod signs;
mod table;
mod target;
mod test;
#[cfg(test)]
mod tests;
mod verdict;
mod witness;

pub use assumptions::{Assumptions, Relation};
pub use linear::Residues;
pub use rates::Rate;
pub use signs::Sign;
pub use target::Motion;
pub use test::ZeroTest;
pub use verdict::{Reason, Verdict};
pub use witness::Witness;
