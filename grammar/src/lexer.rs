//! Characters to lexemes. Never fails: what the language does not use becomes a lexeme of its own.

use logos::Logos;

use crate::names::{begins_name, continues_name};
use crate::tree::Span;

/// A piece of text with its kind.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Lexeme {
    /// What it is.
    pub kind: Kind,
    /// Where it stands.
    pub span: Span,
}

/// The kinds of lexeme. The wrong signs are signs of other languages, kept to say what is written instead.
#[derive(Logos, Clone, Copy, PartialEq, Eq, Debug)]
#[logos(skip r"[ \t\x0b\x0c]+")]
pub enum Kind {
    #[regex("[A-Za-z]", word)]
    Word,
    #[regex(r"[0-9]+(\.[0-9]+)?([eE][+-]?[0-9]+)?")]
    Number,
    #[regex(r#""[^"\r\n]*""#)]
    Text,
    #[regex(r#""[^"\r\n]*"#)]
    OpenText,
    #[regex(r"#[^\r\n]*", allow_greedy = true)]
    Comment,
    #[regex(r"\r\n|\n|\r")]
    Newline,
    /// A run of superscript digits and signs.
    Superscript,
    /// So many primes.
    #[regex("'+", |lex| u32::try_from(lex.slice().len()).unwrap_or(u32::MAX))]
    Prime(u32),
    #[token("+")]
    Plus,
    #[token("-")]
    Minus,
    #[token("*")]
    Star,
    #[token("/")]
    Slash,
    #[token("^")]
    Caret,
    /// `·`
    Dot,
    /// `×`
    Cross,
    #[token("=")]
    Equals,
    #[token("->")]
    Arrow,
    #[token("<")]
    Less,
    #[token("<=")]
    LessEqual,
    #[token(">")]
    Greater,
    #[token(">=")]
    GreaterEqual,
    #[token("!=")]
    NotEqual,
    #[token(",")]
    Comma,
    #[token(":")]
    Colon,
    #[token("..")]
    Range,
    #[token(".")]
    Point,
    #[token("(")]
    Open,
    #[token(")")]
    Close,
    #[token("[")]
    OpenIndex,
    #[token("]")]
    CloseIndex,
    #[token("{")]
    OpenBrace,
    #[token("}")]
    CloseBrace,
    /// A bar before its side is known.
    #[token("|")]
    Bar,
    OpenBar,
    CloseBar,
    /// `√`
    Root,
    /// A unit's sign: `°`, `°C`, `%`
    #[token("%")]
    Degree,
    #[token("==")]
    #[token("===")]
    EqualsEquals,
    #[token(":=")]
    ColonEquals,
    #[token("**")]
    StarStar,
    #[token("=>")]
    FatArrow,
    #[token("=<")]
    EqualLess,
    #[token("<>")]
    LessGreater,
    #[token(";")]
    Semicolon,
    Unknown,
    /// A place that was cut out, or where something is missing.
    Gap,
    Space,
    #[regex(r"[^\x00-\x7f]", foreign, priority = 1)]
    Foreign(Foreign),
}

/// What a character outside of ASCII turned out to be.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Foreign {
    Word,
    Superscript,
    Prime(u32),
    Minus,
    Slash,
    Dot,
    Cross,
    Arrow,
    LessEqual,
    GreaterEqual,
    NotEqual,
    Root,
    Degree,
    Space,
    Unknown,
}

/// Takes the rest of a name.
fn word(lexer: &mut logos::Lexer<Kind>) {
    let rest = lexer.remainder();
    lexer.bump(rest.find(|c| !continues_name(c)).unwrap_or(rest.len()));
}

fn foreign(lexer: &mut logos::Lexer<Kind>) -> Foreign {
    let c = lexer.slice().chars().next().unwrap_or('\0');
    match c {
        c if begins_name(c) => {
            word(lexer);
            Foreign::Word
        }
        c if superscript(c).is_some() => {
            let rest = lexer.remainder();
            lexer.bump(rest.find(|c| superscript(c).is_none()).unwrap_or(rest.len()));
            Foreign::Superscript
        }
        '′' => Foreign::Prime(1),
        '″' => Foreign::Prime(2),
        '‴' => Foreign::Prime(3),
        '⁗' => Foreign::Prime(4),
        '−' => Foreign::Minus,
        '⁄' | '∕' => Foreign::Slash,
        '·' | '⋅' => Foreign::Dot,
        '×' => Foreign::Cross,
        '→' => Foreign::Arrow,
        '≤' => Foreign::LessEqual,
        '≥' => Foreign::GreaterEqual,
        '≠' => Foreign::NotEqual,
        '√' => Foreign::Root,
        '°' => {
            let mut rest = lexer.remainder().chars();
            if rest.next() == Some('C') && !rest.next().is_some_and(continues_name) {
                lexer.bump(1);
            }
            Foreign::Degree
        }
        '\u{85}' | '\u{2028}' | '\u{2029}' => Foreign::Space,
        '\u{feff}' => Foreign::Space,
        c if c.is_whitespace() => Foreign::Space,
        _ => Foreign::Unknown,
    }
}

/// The ASCII character that a superscript raises.
pub fn superscript(c: char) -> Option<char> {
    Some(match c {
        '⁰' => '0',
        '¹' => '1',
        '²' => '2',
        '³' => '3',
        '⁴'..='⁹' => char::from(b'4' + (c as u32 - '⁴' as u32) as u8),
        '⁻' => '-',
        '⁺' => '+',
        _ => return None,
    })
}

/// What a piece of text is to somebody who only looks at it.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum WordKind {
    /// A name, keyword, function or unit.
    Word,
    /// A number.
    Number,
    /// A text in quotes.
    Text,
    /// A comment, its mark included.
    Comment,
    /// A raised number.
    Raised,
    /// Primes.
    Prime,
    /// Any other sign.
    Sign,
}

/// The pieces of a text, in order, with their places; spaces and line ends are left out. None goes over a line's end.
/// Linear in the text.
pub fn words(text: &str) -> impl Iterator<Item = (Span, WordKind)> + '_ {
    lex(text).filter_map(|l| {
        let kind = match l.kind {
            Kind::Newline | Kind::Space => return None,
            Kind::Word => WordKind::Word,
            Kind::Number => WordKind::Number,
            Kind::Text | Kind::OpenText => WordKind::Text,
            Kind::Comment => WordKind::Comment,
            Kind::Superscript => WordKind::Raised,
            Kind::Prime(_) => WordKind::Prime,
            _ => WordKind::Sign,
        };
        Some((l.span, kind))
    })
}

/// The lexemes of a text, comments and line ends included, spaces left out.
pub fn lex(text: &str) -> impl Iterator<Item = Lexeme> + '_ {
    Kind::lexer(text).spanned().filter_map(|(kind, range)| {
        let kind = match kind.unwrap_or(Kind::Unknown) {
            Kind::Foreign(foreign) => foreign.kind(),
            kind => kind,
        };
        (kind != Kind::Space).then(|| Lexeme { kind, span: Span::new(range.start, range.end) })
    })
}

impl Foreign {
    fn kind(self) -> Kind {
        match self {
            Foreign::Word => Kind::Word,
            Foreign::Superscript => Kind::Superscript,
            Foreign::Prime(order) => Kind::Prime(order),
            Foreign::Minus => Kind::Minus,
            Foreign::Slash => Kind::Slash,
            Foreign::Dot => Kind::Dot,
            Foreign::Cross => Kind::Cross,
            Foreign::Arrow => Kind::Arrow,
            Foreign::LessEqual => Kind::LessEqual,
            Foreign::GreaterEqual => Kind::GreaterEqual,
            Foreign::NotEqual => Kind::NotEqual,
            Foreign::Root => Kind::Root,
            Foreign::Degree => Kind::Degree,
            Foreign::Space => Kind::Space,
            Foreign::Unknown => Kind::Unknown,
        }
    }
}

impl Kind {
    /// Whether a formula may end with it.
    pub fn ends_operand(self) -> bool {
        use Kind::*;
        matches!(
            self,
            Word | Number
                | Superscript
                | Prime(_)
                | Close
                | CloseIndex
                | CloseBar
                | Degree
                | Text
                | OpenText
                | Gap
                | Unknown
        )
    }

    /// Whether a formula may begin with it, unary minus aside.
    pub fn begins_operand(self) -> bool {
        use Kind::*;
        matches!(self, Word | Number | Open | OpenBar | Root | Degree | Gap | Unknown)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn check(text: &str, expected: &[(Kind, &str)]) {
        let found: Vec<(Kind, &str)> = lex(text).map(|l| (l.kind, &text[l.span.range()])).collect();
        assert_eq!(found, expected);
    }

    #[test]
    fn names_in_every_plane() {
        use Kind::*;
        check(
            "θ₁ m_cart 𝑥\u{307}2 länge ℓ",
            &[(Word, "θ₁"), (Word, "m_cart"), (Word, "𝑥\u{307}2"), (Word, "länge"), (Word, "ℓ")],
        );
    }

    #[test]
    fn a_decimal_point_is_followed_by_a_digit() {
        use Kind::*;
        check("1..7", &[(Number, "1"), (Range, ".."), (Number, "7")]);
        check(
            "0.15 1.2e-3 5. .5",
            &[(Number, "0.15"), (Number, "1.2e-3"), (Number, "5"), (Point, "."), (Point, "."), (Number, "5")],
        );
        check("2e 2em 3e4x", &[(Number, "2"), (Word, "e"), (Number, "2"), (Word, "em"), (Number, "3e4"), (Word, "x")]);
    }

    #[test]
    fn superscripts_are_not_letters() {
        use Kind::*;
        check("r²x⁻¹'", &[(Word, "r"), (Superscript, "²"), (Word, "x"), (Superscript, "⁻¹"), (Prime(1), "'")]);
        check("xⁿ", &[(Word, "x"), (Unknown, "ⁿ")]);
    }

    #[test]
    fn all_else_is_a_lexeme() {
        use Kind::*;
        check(
            "§\u{0}\u{1}\"a # b\n#\"",
            &[
                (Unknown, "§"),
                (Unknown, "\0"),
                (Unknown, "\u{1}"),
                (OpenText, "\"a # b"),
                (Newline, "\n"),
                (Comment, "#\""),
            ],
        );
        check(
            "4°30′ 21°C",
            &[(Number, "4"), (Degree, "°"), (Number, "30"), (Prime(1), "′"), (Number, "21"), (Degree, "°C")],
        );
    }
}
