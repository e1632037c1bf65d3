//! The pieces of an item's text around a cursor, read without the grammar: the item is nearly always broken while it is
//! typed.

use leastwise_grammar::{WordKind, fold_name, read_name, words};
use std::ops::Range;

/// A word, number or sign.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Piece<'t> {
    pub kind: WordKind,
    pub text: &'t str,
    pub range: Range<usize>,
}

impl Piece<'_> {
    pub fn is_word(&self) -> bool {
        self.kind == WordKind::Word
    }

    pub fn is_number(&self) -> bool {
        self.kind == WordKind::Number
    }
}

/// The pieces of a text, comments left out.
pub(super) fn read(text: &str) -> Vec<Piece<'_>> {
    all(text).filter(|p| p.kind != WordKind::Comment).collect()
}

fn all(text: &str) -> impl Iterator<Item = Piece<'_>> {
    words(text).map(|(span, kind)| Piece { kind, text: &text[span.range()], range: span.range() })
}

/// The pieces before a cursor; `None` where it is in a comment or in quotes.
pub(super) fn before_cursor(text: &str) -> Option<Vec<Piece<'_>>> {
    let mut list: Vec<Piece<'_>> = all(text).collect();
    let last = list.last().filter(|p| p.range.end == text.len());
    if last.is_some_and(|p| matches!(p.kind, WordKind::Comment | WordKind::Text)) {
        return None;
    }
    list.retain(|p| p.kind != WordKind::Comment);
    Some(list)
}

/// The text of some pieces as it is written, from the first to the last.
pub(super) fn written<'t>(text: &'t str, pieces: &[Piece<'_>]) -> &'t str {
    match (pieces.first(), pieces.last()) {
        (Some(first), Some(last)) => text.get(first.range.start..last.range.end).unwrap_or_default(),
        _ => "",
    }
}

/// The places in the list of the brackets that are open at its end, the outermost first.
pub(super) fn open_brackets(pieces: &[Piece<'_>]) -> Vec<usize> {
    let mut open = Vec::new();
    for (k, p) in pieces.iter().enumerate() {
        match p.text {
            "(" | "[" => open.push(k),
            ")" | "]" => drop(open.pop()),
            _ => {}
        }
    }
    open
}

/// The first piece outside of brackets with one of these texts.
pub(super) fn find(pieces: &[Piece<'_>], texts: &[&str]) -> Option<usize> {
    let mut open = 0_usize;
    pieces.iter().position(|p| {
        match p.text {
            "(" | "[" => open += 1,
            ")" | "]" => open = open.saturating_sub(1),
            text => return open == 0 && texts.contains(&text),
        }
        false
    })
}

/// The parts between commas outside of brackets; the last may be empty.
pub(super) fn parts<'p, 't>(pieces: &'p [Piece<'t>]) -> Vec<&'p [Piece<'t>]> {
    let mut rest = pieces;
    let mut out = Vec::new();
    while let Some(comma) = find(rest, &[","]) {
        out.push(&rest[..comma]);
        rest = &rest[comma + 1..];
    }
    out.push(rest);
    out
}

/// The words that stand outside of square brackets, folded.
pub(super) fn names(pieces: &[Piece<'_>]) -> Vec<String> {
    let mut open = 0_usize;
    let mut out = Vec::new();
    for p in pieces {
        match p.text {
            "[" => open += 1,
            "]" => open = open.saturating_sub(1),
            text if open == 0 && p.is_word() => out.push(fold_name(text)),
            _ => {}
        }
    }
    out
}

/// The words that stand within square brackets, folded.
pub(super) fn indices(pieces: &[Piece<'_>]) -> Vec<String> {
    let mut open = 0_usize;
    let mut out = Vec::new();
    for p in pieces {
        match p.text {
            "[" => open += 1,
            "]" => open = open.saturating_sub(1),
            text if open > 0 && p.is_word() => out.push(fold_name(text)),
            _ => {}
        }
    }
    out
}

/// A name with its time derivatives, primes and dots told alike: `ẋ` is `x'`.
pub(super) fn derivative(pieces: &[Piece<'_>]) -> Option<String> {
    let name = pieces.iter().find(|p| p.is_word())?;
    let (folded, dots) = read_name(name.text);
    let primes = pieces.iter().filter(|p| p.kind == WordKind::Prime).map(|p| primes(p.text)).sum::<u32>();
    Some(primed(&folded, dots.saturating_add(primes)))
}

/// A name with so many primes.
pub(super) fn primed(name: &str, order: u32) -> String {
    format!("{name}{}", "'".repeat(order.min(9) as usize))
}

fn primes(text: &str) -> u32 {
    let of = |c: char| match c {
        '″' => 2,
        '‴' => 3,
        '⁗' => 4,
        _ => 1,
    };
    text.chars().map(of).sum()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_cursor_in_a_comment_or_in_quotes_is_in_no_formula() {
        for text in ["m # mass", "m #", "include \"si", "include \"site.least\""] {
            assert_eq!(before_cursor(text), None, "{text}");
        }
        assert_eq!(before_cursor("m # mass\n  + ").map(|list| list.len()), Some(2));
    }

    #[test]
    fn parts_lie_between_outer_commas() {
        let text = "(x, y) -> (a, b), z[1";
        let list = read(text);
        let found: Vec<&str> = parts(&list).into_iter().map(|part| written(text, part)).collect();
        assert_eq!(found, ["(x, y) -> (a, b)", "z[1"]);
        assert_eq!(open_brackets(&list).len(), 1);
        assert_eq!(names(&list), ["x", "y", "a", "b", "z"]);
        assert_eq!(indices(&read("x[i + 1] θ[j]")), ["i", "j"]);
    }

    #[test]
    fn velocities_are_told_alike_in_all_spellings() {
        for text in ["x'", "ẋ", "x\u{307}", "x[3]'", "x′"] {
            assert_eq!(derivative(&read(text)).as_deref(), Some("x'"), "{text}");
        }
        assert_eq!(derivative(&read("x″")).as_deref(), Some("x''"));
    }
}
