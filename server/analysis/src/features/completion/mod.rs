//! What can be typed at a cursor. Reads the text alone, so that it never waits for the algebra.

use crate::checked::SymbolRow;
use std::ops::Range;

/// Something that can be typed.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Completion {
    /// What is shown.
    pub label: String,
    /// What it is.
    pub kind: CompletionKind,
    /// A short remark beside it.
    pub detail: String,
    /// The comment that describes it, or what the word means.
    pub documentation: Option<String>,
    /// The text that is put in.
    pub insert: String,
    /// What an editor compares with what was typed.
    pub filter: String,
}

/// What a completion is.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum CompletionKind {
    /// A keyword.
    Keyword,
    /// A coordinate, or a derivative of one.
    Coordinate,
    /// A parameter.
    Parameter,
    /// An input.
    Input,
    /// An index.
    Index,
    /// A definition.
    Definition,
    /// A function.
    Function,
    /// A constant of the language.
    Constant,
    /// A quantity.
    Quantity,
    /// A unit.
    Unit,
    /// A letter typed by its name.
    Letter,
    /// A file.
    File,
}

/// What can be typed at a place, best first.
#[derive(Clone, PartialEq, Eq, Default, Debug)]
pub struct Completions {
    /// The part of the text that is replaced: bytes in the file.
    pub range: Range<usize>,
    /// In the order in which they are to be shown.
    pub list: Vec<Completion>,
}

/// What can be typed at an offset. `included` are the names that the last check took from other files.
pub fn complete(text: &str, offset: usize, included: &[SymbolRow]) -> Completions {
    let _ = (text, offset, included);
    Completions::default()
}
