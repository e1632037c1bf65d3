//! Mends of findings, as an editor offers them.

use crate::checked::Contents;
use crate::report::Finding;
use std::ops::Range;

/// A mend that can be applied.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Action {
    /// What it does, in the imperative.
    pub title: String,
    /// Byte ranges in the file and their new texts, in order, not overlapping.
    pub edits: Vec<(Range<usize>, String)>,
    /// The finding that it mends: its number in the list.
    pub mends: usize,
    /// Whether it is the one to be taken without a choice.
    pub preferred: bool,
}

/// The mends of findings that touch a range, in the order of the findings.
pub fn actions(checked: &Contents, findings: &[Finding], range: Range<usize>) -> Vec<Action> {
    let _ = (checked, findings, range);
    Vec::new()
}
