//! What each word of a file is, for colours.

use crate::checked::Contents;
use std::ops::Range;

/// A word, number, comment or sign with its kind.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Token {
    /// Bytes in the file; within one line.
    pub range: Range<usize>,
    /// What it is.
    pub kind: TokenKind,
    /// More about it.
    pub modifiers: Modifiers,
}

/// What a word is.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum TokenKind {
    /// A keyword.
    Keyword,
    /// A coordinate, or time.
    Coordinate,
    /// A parameter, or a formal argument.
    Parameter,
    /// A definition.
    Definition,
    /// A function.
    Function,
    /// An input.
    Input,
    /// An index.
    Index,
    /// A quantity or unit.
    Unit,
    /// The system's name.
    System,
    /// The name of a term, force or constraint.
    Term,
    /// The name of a claim or run.
    Claim,
    /// A number.
    Number,
    /// The name of a file.
    Text,
    /// A comment.
    Comment,
    /// A sign.
    Operator,
}

/// More about a word.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Default, Debug)]
pub struct Modifiers {
    /// It is declared here.
    pub declaration: bool,
    /// It never changes: a parameter, a constant.
    pub readonly: bool,
    /// It is a time derivative.
    pub derivative: bool,
    /// It belongs to the language.
    pub built_in: bool,
}

/// Every word of the file, in order, not overlapping.
pub fn tokens(checked: &Contents) -> Vec<Token> {
    let _ = checked;
    Vec::new()
}
