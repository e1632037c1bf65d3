//! What the grammar reads: pieces whose role is known.

use crate::tree::{Number, Relation, Span, TermKind};

/// A token. Those of no length were put in by the reading: markers, or what a slip misses.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Token {
    /// In place of an item: a formula alone.
    FormulaAlone,
    /// `system`
    System,
    /// `coordinate`, `cyclic coordinate`
    Coordinate(bool),
    /// `parameter`
    Parameter,
    /// `input`
    Input,
    /// `index`
    Index,
    /// `let`
    Let,
    /// `function`
    Function,
    /// `assume`
    Assume,
    /// `kinetic`, `potential`, `lagrangian`
    Term(TermKind),
    /// `dissipation`
    Dissipation,
    /// `force`
    Force,
    /// `constraint`
    Constraint,
    /// `symmetry`, `broken symmetry`
    Symmetry(bool),
    /// `conserved`
    Conserved,
    /// `run`
    Run,
    /// `include`
    Include,
    /// Marks that the item's name follows.
    Named,
    /// Marks that a unit follows.
    Unit,
    /// `dimensionless`
    Dimensionless,
    /// `on`
    On,
    /// `from`
    From,
    /// `over`
    Over,
    /// `until`
    Until,
    /// `with`
    With,
    /// `in`
    In,
    /// A name, folded.
    Name(String),
    /// A number.
    Number(Number),
    /// A text in quotes, as written.
    Text(String),
    /// A function whose arguments follow in parentheses.
    Call(String),
    /// A function of the language whose argument follows without parentheses.
    Bare(String),
    /// `sum` before its parenthesis.
    Sum,
    /// So many primes or dots.
    Prime(u32),
    /// A raised integer.
    Superscript(Option<i32>),
    /// `+`
    Plus,
    /// `-` between two operands.
    Minus,
    /// `-` before an operand.
    Negative,
    /// `*`
    Star,
    /// `/`
    Slash,
    /// `·`
    Dot,
    /// `×`
    Cross,
    /// `^`
    Caret,
    /// `=`
    Equals,
    /// `->`
    Arrow,
    /// A comparison.
    Relation(Relation),
    /// `,`
    Comma,
    /// `:`
    Colon,
    /// `..`
    Range,
    /// `(`
    Open,
    /// `)`
    Close,
    /// `[`
    OpenIndex,
    /// `]`
    CloseIndex,
    /// `|`
    OpenBar,
    /// `|`
    CloseBar,
    /// A place where something is missing, of which a slip tells.
    Gap,
    /// A piece that cannot stand anywhere.
    Stray,
}

impl Token {
    /// Whether a formula may end with it.
    pub fn ends_operand(&self) -> bool {
        matches!(
            self,
            Token::Name(_)
                | Token::Number(_)
                | Token::Prime(_)
                | Token::Superscript(_)
                | Token::Close
                | Token::CloseIndex
                | Token::CloseBar
                | Token::Gap
        )
    }
}

/// A token with its place.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Spanned {
    /// The token.
    pub token: Token,
    /// Where it stands.
    pub span: Span,
}
