//! The outline of a file: its items, with the names that they declare.

use crate::checked::Contents;
use std::ops::Range;

/// A row of the outline.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct OutlineRow {
    /// The name; `kinetic 1` for an item without one.
    pub name: String,
    /// A short remark: the quantity and value, the formula as written.
    pub detail: String,
    /// What it is.
    pub kind: OutlineKind,
    /// The whole item, or declaration: bytes in the file.
    pub range: Range<usize>,
    /// The name: bytes in the file, within `range`.
    pub selection: Range<usize>,
    /// What belongs to it.
    pub children: Vec<OutlineRow>,
}

/// What a row of the outline is.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum OutlineKind {
    /// The system.
    System,
    /// A coordinate.
    Coordinate,
    /// A parameter.
    Parameter,
    /// An input.
    Input,
    /// An index.
    Index,
    /// A definition.
    Definition,
    /// A function, unspecified or defined.
    Function,
    /// A term of the Lagrangian.
    Term,
    /// A force or dissipation.
    Force,
    /// A constraint.
    Constraint,
    /// A symmetry or conserved claim.
    Claim,
    /// A run.
    Run,
    /// An included file.
    Include,
}

/// The outline, in the order of the file.
pub fn outline(checked: &Contents) -> Vec<OutlineRow> {
    let _ = checked;
    Vec::new()
}
