//! What is said of the thing under a cursor.

use crate::checked::Checked;
use crate::database::Session;
use crate::derive::Derived;
use std::ops::Range;

/// What is said of a place. What matters most stands first.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Hover {
    /// Bytes in the file that it is about.
    pub range: Range<usize>,
    /// Paragraphs and formulas in order.
    pub blocks: Vec<Block>,
}

/// A piece of a hover.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Block {
    /// Prose in one paragraph; words in backquotes are text of the model.
    Prose(String),
    /// Lines of formulas, one below the other.
    Formulas(Vec<String>),
}

impl Session {
    /// What is said of the thing at an offset; nothing where there is nothing to say. Prints what it shows and no more.
    /// The model must be of the session's last epoch.
    pub fn hover(&mut self, checked: &Checked, derived: &Derived, offset: usize) -> Option<Hover> {
        let _ = (checked, derived, offset);
        None
    }
}
