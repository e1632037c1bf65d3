//! What is said of the thing under a cursor.
//!
//! The first line says what matters most: some editors show no more. A hover prints only what it shows; whatever it lists
//! is bounded, however large the model.

mod charge;
mod claim;
mod coordinate;
mod name;
mod quantity;
mod system;
mod term;
mod word;
mod writer;

use crate::checked::{Checked, Contents};
use crate::database::Session;
use crate::derive::Derived;
use crate::features::place::{self, Place, Thing, formulas_at, item_at, place_at};
use crate::sheet::Maker;
use leastwise_grammar::tree::*;
use leastwise_mechanics::verdicts::SymmetryAnswer;
use std::ops::Range;
use writer::Writer;

/// What is said of a place. What matters most stands first.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Hover {
    /// Bytes in the file that it is about.
    pub range: Range<usize>,
    /// Paragraphs and formulas in order.
    pub blocks: Vec<Block>,
    /// What the smallest formula at the place is: its quantity and unit. It comes last.
    pub quantity: Option<String>,
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
        let place = place_at(checked, offset).or_else(|| enclosing(checked, offset))?;
        let range = place.range.clone();
        let (blocks, quantity) = self.with_maker(checked, |maker| {
            let mut w = Writer::new(maker, checked, derived);
            describe(&mut w, &place);
            let quantity = quantity::quantity(&w, offset);
            (w.blocks, quantity)
        });
        (!blocks.is_empty()).then_some(Hover { range, blocks, quantity })
    }
}

/// What the charge of a symmetry is called in the trade: `energy`, `angular momentum`, …; `charge` where it has no such name.
pub(crate) fn charge_name(
    maker: &mut Maker<'_>,
    checked: &Checked,
    derived: &Derived,
    answer: &SymmetryAnswer,
) -> &'static str {
    charge::charge(&mut Writer::new(maker, checked, derived), answer).name
}

/// Writes about a place.
fn describe(w: &mut Writer<'_, '_>, place: &Place<'_>) {
    match &place.thing {
        Thing::Symbol(row) => match row.kind {
            crate::scope::SymbolKind::Coordinate => coordinate::coordinate(w, row, place),
            _ => name::name(w, row),
        },
        Thing::Bound(bound) => name::bound(w, bound, place.item),
        Thing::Term(k) => term::term(w, *k),
        Thing::Force(k) => term::force(w, *k),
        Thing::Constraint(k) => term::constraint(w, *k),
        Thing::Symmetry(k) => claim::symmetry(w, *k),
        Thing::Conserved(k) => claim::conserved(w, *k),
        Thing::Run(k) => name::run(w, *k),
        Thing::System => system::system(w),
        Thing::Include => name::include(w, place.item),
        Thing::Unit(symbol) => word::unit(w, symbol),
        Thing::Word(keyword) => word::keyword(w, keyword, place.item),
        Thing::Broken => broken(w, place.item),
    }
}

/// Says what is wrong with an item that has no meaning.
fn broken(w: &mut Writer<'_, '_>, item: usize) {
    let row = &w.checked.items[item];
    w.prose(format!("{} has an error and is left out of the model", writer::title(w.checked, item)));
    let inside = |f: &&crate::report::Finding| {
        f.severity == Severity::Error && row.range.start <= f.range.start && f.range.start <= row.range.end
    };
    if let Some(finding) = w.checked.findings.iter().find(inside) {
        w.prose(sentence(&finding.message));
    }
    w.description(row.description.as_deref());
}

/// A message as a sentence.
fn sentence(message: &str) -> String {
    let mut letters = message.chars();
    let first: String = letters.next().into_iter().flat_map(char::to_uppercase).collect();
    format!("{first}{}.", letters.as_str())
}

/// Where no name stands: the innermost call, derivative, member or name around the offset, and at last the item itself.
fn enclosing(checked: &Contents, offset: usize) -> Option<Place<'_>> {
    let text = &*checked.text;
    let c = text.get(offset..)?.chars().next().filter(|c| !c.is_whitespace() && *c != '#')?;
    let sign = offset..offset + c.len_utf8();
    let item = item_at(checked, offset)?;
    let row = &checked.items[item];
    let local = offset - row.range.start;
    if place::within_comment(&text[row.range.start..offset]) {
        return None;
    }
    let kind = &row.parsed.item.kind;
    let range = |span: Span| row.range.start + span.start as usize..row.range.start + span.end as usize;
    let path = formulas_at(kind, local);
    let around = |f: &&&Formula| f.span.range().contains(&local);
    for f in path.iter().filter(around) {
        if let Some(span) = named(f)
            && let Some(found) = place_at(checked, row.range.start + span.start as usize)
        {
            return Some(Place { range: range(f.span), ..found });
        }
    }
    let whole = path.iter().rev().find(around).map_or(sign, |f| range(f.span));
    let thing = match place::head(checked, item) {
        Some(thing) => thing,
        None if place::head_name(kind).is_some() || matches!(kind, ItemKind::Broken) => Thing::Broken,
        None => Thing::Symbol(declared_before(checked, item, offset)?),
    };
    Some(Place { range: whole, item, thing })
}

/// The name that a formula is about, where it is one thing with a name.
fn named(f: &Formula) -> Option<Span> {
    match &f.kind {
        FormulaKind::Name(_) => Some(f.span),
        FormulaKind::Call { function, .. } => Some(function.span),
        FormulaKind::Prime { base, .. } | FormulaKind::Index { base, .. } => named(base),
        FormulaKind::Paren(inner) => named(inner),
        _ => None,
    }
}

/// The last name that an item declares before an offset.
fn declared_before(checked: &Contents, item: usize, offset: usize) -> Option<&crate::checked::SymbolRow> {
    let own = checked.symbols.iter().filter(|s| s.item == Some(item));
    own.filter(|s| s.range.as_ref().is_some_and(|r| r.start <= offset))
        .max_by_key(|s| s.range.as_ref().map(|r| r.start))
}

#[cfg(test)]
mod tests;
