//! What each word of a file is, for colours.

use super::place::{Binder, binders, head_name, unit_factors};
use crate::checked::Contents;
use crate::quantities;
use crate::scope::SymbolKind;
use leastwise_grammar::tree::ItemKind;
use leastwise_grammar::{KeywordRole, WordKind, keywords, read_name, words};
use std::collections::HashMap;
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

/// Every word of the file, in order, not overlapping. Linear in the text.
pub fn tokens(checked: &Contents) -> Vec<Token> {
    let known = Known::of(checked);
    let text = &*checked.text;
    let mut out: Vec<Token> = Vec::new();
    let mut item = 0;
    let mut list = words(text).peekable();
    let mut before = "";
    // The names before the brackets that are open, and the one before the last that was closed, with its end.
    let (mut open, mut closed): (Vec<Option<usize>>, Option<(usize, usize)>) = (Vec::new(), None);
    while let Some((span, kind)) = list.next() {
        let range = span.range();
        while checked.items.get(item).is_some_and(|i| i.range.end <= range.start) {
            item += 1;
            open.clear();
        }
        let inside = checked.items.get(item).is_some_and(|i| i.range.start <= range.start).then_some(item);
        let plain = |kind| Some((kind, Modifiers::default()));
        let found = match kind {
            WordKind::Number | WordKind::Raised => plain(TokenKind::Number),
            WordKind::Text => plain(TokenKind::Text),
            WordKind::Comment => plain(TokenKind::Comment),
            WordKind::Prime => {
                // Of a member, `x[i]'`, it is the family's name that stands for the derivative.
                if let Some((end, name)) = closed
                    && end == range.start
                {
                    out[name].modifiers.derivative = true;
                }
                // Minutes and seconds of arc stand behind a number.
                let arc = before.ends_with(|c: char| c.is_ascii_digit());
                plain(if arc { TokenKind::Unit } else { TokenKind::Operator })
            }
            WordKind::Sign => known
                .sign(&range)
                .or_else(|| is_operator(&text[range.clone()]).then_some(TokenKind::Operator))
                .and_then(plain),
            WordKind::Word => {
                let primed = list.peek().is_some_and(|(next, k)| *k == WordKind::Prime && next.start == span.end);
                known
                    .word(checked, &text[range.clone()], &range, inside, primed)
                    .or_else(|| plain(guess(before, &text[range.clone()])))
            }
        };
        before = &text[range.clone()];
        match before {
            "[" => open.push(out.len().checked_sub(1).filter(|&k| out[k].range.end == range.start)),
            "]" => closed = open.pop().flatten().map(|name| (range.end, name)),
            _ => {}
        }
        if let Some((kind, modifiers)) = found {
            out.push(Token { range, kind, modifiers });
        }
    }
    out
}

/// Brackets and commas are no operators; arrows and signs of arithmetic are.
fn is_operator(sign: &str) -> bool {
    !matches!(sign, "(" | ")" | "[" | "]" | "," | ":" | "{" | "}" | ";" | ".")
}

/// What a word of an item that could not be read is most likely: a quantity behind a colon, a unit behind a number, else a
/// constant, as names that are not declared are.
fn guess(before: &str, word: &str) -> TokenKind {
    let quantity = || quantities::quantity(word).is_some() || quantities::unit(word).is_some();
    let behind_number = before.ends_with(|c: char| c.is_ascii_digit()) && quantities::unit(word).is_some();
    if before == ":" && quantity() || behind_number { TokenKind::Unit } else { TokenKind::Parameter }
}

/// What is known of places, by where they begin.
#[derive(Default)]
struct Known<'c> {
    symbols: HashMap<usize, (SymbolKind, bool)>,
    by_name: HashMap<&'c str, SymbolKind>,
    bound: HashMap<usize, (Binder, bool)>,
    units: HashMap<usize, usize>,
}

impl<'c> Known<'c> {
    fn of(checked: &'c Contents) -> Known<'c> {
        let mut known = Known::default();
        for s in &checked.symbols {
            // A definition with formal arguments is a function to whoever calls it.
            let kind = if s.formals.is_empty() { s.kind } else { SymbolKind::Function };
            known.by_name.insert(&s.name, kind);
            known.symbols.extend(s.uses.iter().map(|r| (r.start, (kind, false))));
            known.symbols.extend(s.range.iter().map(|r| (r.start, (kind, true))));
        }
        let mut list = Vec::new();
        for row in &checked.items {
            let start = row.range.start;
            binders(&row.parsed.item.kind, start, &mut list);
            for f in unit_factors(&row.parsed.item.kind) {
                let at = f.symbol.span.range();
                known.units.insert(start + at.start, start + at.end);
            }
        }
        for b in list {
            for place in &b.places {
                known
                    .bound
                    .insert(place.start, (b.kind, b.kind != Binder::Member && b.declared.as_ref() == Some(place)));
            }
        }
        known
    }

    fn sign(&self, range: &Range<usize>) -> Option<TokenKind> {
        self.units.get(&range.start).map(|_| TokenKind::Unit)
    }

    fn word(
        &self,
        checked: &Contents,
        word: &str,
        range: &Range<usize>,
        item: Option<usize>,
        primed: bool,
    ) -> Option<(TokenKind, Modifiers)> {
        let (name, dots) = read_name(word);
        let derivative = primed || dots > 0;
        if let Some(row) = item.map(|k| &checked.items[k]) {
            let local = range.start - row.range.start..range.end - row.range.start;
            let keyword = row.parsed.item.keyword.range();
            if keyword.start <= local.start && local.end <= keyword.end {
                return Some((TokenKind::Keyword, Modifiers::default()));
            }
            if head_name(&row.parsed.item.kind).is_some_and(|n| n.span.range() == local) {
                let kind = match &row.parsed.item.kind {
                    ItemKind::System { .. } => TokenKind::System,
                    ItemKind::Symmetry { .. } | ItemKind::Conserved { .. } | ItemKind::Run { .. } => TokenKind::Claim,
                    _ => TokenKind::Term,
                };
                return Some((kind, Modifiers { declaration: true, ..Modifiers::default() }));
            }
        }
        if let Some((binder, declaration)) = self.bound.get(&range.start) {
            let kind = match binder {
                Binder::Formal | Binder::Transformation => TokenKind::Parameter,
                Binder::Sum | Binder::Member => TokenKind::Index,
            };
            return Some((kind, Modifiers { declaration: *declaration, derivative, ..Modifiers::default() }));
        }
        if self.units.contains_key(&range.start) {
            return Some((TokenKind::Unit, Modifiers::default()));
        }
        if let Some((kind, declaration)) = self.symbols.get(&range.start) {
            return Some(symbol(*kind, *declaration, derivative));
        }
        if let Some(k) = keywords().iter().find(|k| k.name == name) {
            let built_in = Modifiers { built_in: true, derivative, ..Modifiers::default() };
            return Some(match k.role {
                KeywordRole::Item | KeywordRole::Modifier | KeywordRole::Clause => {
                    (TokenKind::Keyword, Modifiers::default())
                }
                KeywordRole::Function => (TokenKind::Function, built_in),
                KeywordRole::Constant if k.name == "t" => (TokenKind::Coordinate, built_in),
                KeywordRole::Constant => (TokenKind::Parameter, Modifiers { readonly: true, ..built_in }),
            });
        }
        // In an item that could not be read a name is known by its letters alone.
        self.by_name.get(name.as_str()).map(|kind| symbol(*kind, false, derivative))
    }
}

fn symbol(kind: SymbolKind, declaration: bool, derivative: bool) -> (TokenKind, Modifiers) {
    let token = match kind {
        SymbolKind::Coordinate => TokenKind::Coordinate,
        SymbolKind::Parameter | SymbolKind::Undeclared => TokenKind::Parameter,
        SymbolKind::Input => TokenKind::Input,
        SymbolKind::Index => TokenKind::Index,
        SymbolKind::Definition => TokenKind::Definition,
        SymbolKind::Function => TokenKind::Function,
    };
    let readonly = token == TokenKind::Parameter;
    (token, Modifiers { declaration, readonly, derivative, built_in: false })
}

#[cfg(test)]
mod tests;
