//! From a name to where it is declared, and to all its places.

use crate::checked::Contents;
use std::ops::Range;
use std::sync::Arc;

/// A place in the model's file or in one that it includes.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Target {
    /// The included file; `None` for the model's own.
    pub file: Option<Arc<str>>,
    /// Bytes in that file.
    pub range: Range<usize>,
    /// What the link is on: bytes in the model's file.
    pub origin: Range<usize>,
}

/// Where the name at an offset is declared; of an `include`, the beginning of the file.
pub fn definition(checked: &Contents, offset: usize) -> Option<Target> {
    let _ = (checked, offset);
    None
}

/// Every place in the model's file of the name at an offset, in order, each with whether it is the declaration.
pub fn references(checked: &Contents, offset: usize) -> Vec<(Range<usize>, bool)> {
    let _ = (checked, offset);
    Vec::new()
}
