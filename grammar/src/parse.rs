//! One item, or one formula, from text to tree.

use crate::build::{Builder, Entry};
use crate::hints::{hints, item_hints};
use crate::messages::report;
use crate::model::EntryParser;
use crate::names::CallableNames;
use crate::reading::{Reading, read_formula, read_item};
use crate::slips::Slips;
use crate::token::Spanned;
use crate::tree::{Formula, FormulaKind, Item, ItemKind, Slip, Span};

/// An item as read, with all that is to be said about its text.
///
/// Where a slip is an error, the item holds what was probably meant: good for names, not for derivations.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct ParsedItem {
    /// The item; spans are relative to its text.
    pub item: Item,
    /// Slips in the order of the text.
    pub slips: Vec<Slip>,
}

/// Reads one item.
///
/// Linear in the text; the tree is at most [`crate::NESTING`] levels deep.
pub fn parse_item(text: &str, callable: &CallableNames) -> ParsedItem {
    parse_with_tokens(text, callable).0
}

/// Reads one item and keeps its tokens.
pub(crate) fn parse_with_tokens(text: &str, callable: &CallableNames) -> (ParsedItem, Vec<Spanned>) {
    let mut slips = Slips::default();
    let reading = read_item(text, callable, &mut slips);
    let kind = if reading.tokens.is_empty() {
        ItemKind::Broken
    } else {
        match parse(text, &reading, &mut slips) {
            Some(Entry::Item(kind)) => *kind,
            _ => ItemKind::Broken,
        }
    };
    if !slips.any_error() {
        item_hints(text, &kind, &mut slips);
    }
    let item = Item { kind, keyword: reading.keyword, span: reading.span };
    (ParsedItem { item, slips: slips.finish(text) }, reading.tokens)
}

/// Reads a formula alone.
pub fn parse_formula(text: &str, callable: &CallableNames) -> (Formula, Vec<Slip>) {
    let mut slips = Slips::default();
    let reading = read_formula(text, callable, &mut slips);
    let formula = match parse(text, &reading, &mut slips) {
        Some(Entry::Formula(formula)) => formula,
        _ => Formula { kind: FormulaKind::Missing, span: Span::new(0, text.len()) },
    };
    if !slips.any_error() {
        hints(text, &formula, &mut slips);
    }
    (formula, slips.finish(text))
}

fn parse(text: &str, reading: &Reading, slips: &mut Slips) -> Option<Entry> {
    let mut builder = Builder { slips: std::mem::take(slips), failures: Vec::new() };
    let tokens = reading.tokens.iter().map(|s| (s.span.start as usize, s.token.clone(), s.span.end as usize));
    let parsed = EntryParser::new().parse(&mut builder, tokens.map(Ok::<_, std::convert::Infallible>));
    let Builder { slips: said, mut failures } = builder;
    *slips = said;
    let entry = match parsed {
        Ok(entry) => Some(entry),
        Err(failure) => {
            failures.push(failure);
            None
        }
    };
    report(text, &reading.tokens, &failures, slips);
    entry
}
