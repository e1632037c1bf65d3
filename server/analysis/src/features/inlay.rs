//! Inlay hints: short results beside the text.

use crate::checked::Checked;
use crate::database::Session;
use crate::derive::Derived;
use std::ops::Range;

/// A hint beside the text.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Inlay {
    /// Where it stands: right before this byte of the file.
    pub offset: usize,
    /// What it is about.
    pub kind: InlayKind,
    /// The whole text, not yet cut.
    pub label: String,
    /// What is to be looked at, where the hint names it: bytes in the file.
    pub target: Option<Range<usize>>,
}

/// What a hint is about; each can be switched off by itself.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum InlayKind {
    /// A coordinate's momentum, and whether it is conserved.
    Momentum,
    /// A claim's verdict.
    Claim,
    /// Degrees of freedom and energy, behind the last term.
    Summary,
}

impl Session {
    /// The hints in a part of the file, in the order of the file. Prints what it shows and no more.
    pub fn inlays(&mut self, checked: &Checked, derived: &Derived, range: Range<usize>) -> Vec<Inlay> {
        let _ = (checked, derived, range);
        Vec::new()
    }
}

/// Hints of an earlier text at their places in a later one. Those in what was changed are dropped.
pub fn carried(hints: &[Inlay], before: &str, after: &str) -> Vec<Inlay> {
    let _ = (hints, before, after);
    Vec::new()
}
