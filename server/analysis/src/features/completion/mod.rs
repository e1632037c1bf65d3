//! What can be typed at a cursor. Reads the text alone, so that it never waits for the algebra.

mod context;
mod heads;
mod letters;
mod names;
mod order;
mod pieces;
mod run;
pub mod signature;
mod undeclared;
mod units;
mod words;

use crate::checked::SymbolRow;
use context::{Context, context};
use heads::{Known, known};
use leastwise_grammar::{begins_name, continues_name, split};
use names::Model;
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
    /// The part of the text that is replaced: bytes in the file. The word that is being typed, or a backslash and the letters
    /// behind it.
    pub range: Range<usize>,
    /// In the order in which they are to be shown.
    pub list: Vec<Completion>,
    /// Whether another list is due when another letter is typed: this one was cut, or begins too early to know in which
    /// spelling names are typed.
    pub incomplete: bool,
}

/// What can be typed at an offset. `included` are the names that the last check took from other files.
///
/// Reads the words of the item at the cursor and the heads of all items, and with the grammar only items that use names which
/// nobody declares, where a new name begins. Linear in the text; derives nothing.
pub fn complete(text: &str, offset: usize, included: &[SymbolRow]) -> Completions {
    let offset = text.floor_char_boundary(offset.min(text.len()));
    let line = line_start(text, offset);
    if let Some(at) = letters::backslash(&text[line..offset]) {
        return letters_at(text, line, line + at, offset);
    }
    let range = word_around(text, offset);
    let typed = &text[range.start..offset];
    let items = split(text);
    let follows = text[range.end..].chars().next();
    let mut early = false;
    let groups = if range.start == line {
        let above = items.partition_point(|i| i.range.start < range.start);
        let below = items.partition_point(|i| i.range.start <= range.start);
        let line_end = text[range.end..].find(['\n', '\r']).map_or(text.len(), |at| range.end + at);
        vec![words::items(&items[..above], &items[below..], &text[range.end..line_end])]
    } else {
        // An indented line goes on with the item above it.
        let item = items.iter().rposition(|i| i.range.start < range.start);
        let Some(item) = item else { return Completions { range, ..Completions::default() } };
        let Range { start, end } = items[item].range;
        let place = context(&text[start..range.start], typed, &text[range.end..end.max(range.end)]);
        let known = match &place {
            Context::Formula(_) | Context::NewName(_) | Context::InitialUnit { .. } => {
                known(&items, included, range.start)
            }
            _ => Vec::new(),
        };
        early = typed.chars().nth(1).is_none() && matches!(place, Context::Formula(_) | Context::NewName(_));
        let model = Model { items: &items, known: &known, item: Some(item), follows };
        at_place(&place, &model, typed)
    };
    let (list, cut) = order::ordered(groups, typed);
    Completions { range, list, incomplete: cut || early }
}

/// What can stand at a place, in groups.
fn at_place(place: &Context, model: &Model<'_>, typed: &str) -> Vec<Vec<Completion>> {
    let letters = || letters::begun(typed, model.known);
    match place {
        Context::Nothing => Vec::new(),
        Context::Words(list) => vec![keywords(list)],
        Context::NewName(keyword) => {
            vec![undeclared::names(model.items, model.known, keyword, model.item), letters()]
        }
        Context::Quantity => vec![units::quantities()],
        Context::Unit(units) => vec![units::at(units)],
        Context::InitialUnit { of, value } => vec![initial_unit(of, value, model.known)],
        Context::Formula(place) => {
            let mut groups = names::in_formula(model, place);
            groups.push(keywords(&place.words));
            groups.push(letters());
            groups
        }
    }
}

fn keywords(list: &[&str]) -> Vec<Completion> {
    list.iter().filter_map(|word| words::keyword(word)).collect()
}

/// The units of an initial value of a coordinate or velocity.
fn initial_unit(of: &str, value: &str, known: &[Known]) -> Vec<Completion> {
    let name = of.trim_end_matches('\'');
    let order = u32::try_from(of.len() - name.len()).unwrap_or(0);
    let coordinate = known.iter().find(|k| k.name == name);
    let fitting = coordinate.and_then(|k| units::Fitting::of(&k.quantity)).map(|f| f.rate(order));
    match units::in_value(&pieces::read(value), fitting) {
        Context::Unit(place) => units::at(&place),
        _ => Vec::new(),
    }
}

/// Letters and signs behind a backslash; nothing in a comment or in quotes.
fn letters_at(text: &str, line: usize, start: usize, offset: usize) -> Completions {
    let typed = &text[start..offset];
    let range = start..offset + letters::rest(typed, &text[offset..]);
    // Neither goes over a line's end.
    let groups = match pieces::before_cursor(&text[line..start]) {
        Some(_) => vec![letters::all()],
        None => Vec::new(),
    };
    let (list, incomplete) = order::ordered(groups, typed);
    Completions { range, list, incomplete }
}

/// Where the line of an offset begins, behind a byte order mark.
fn line_start(text: &str, offset: usize) -> usize {
    let start = text[..offset].rfind(['\n', '\r']).map_or(0, |at| at + 1);
    let mark = '\u{feff}';
    if start == 0 && offset > 0 && text.starts_with(mark) { mark.len_utf8() } else { start }
}

/// The name around a cursor, empty where there is none.
fn word_around(text: &str, offset: usize) -> Range<usize> {
    let end = text[offset..].find(|c| !continues_name(c)).map_or(text.len(), |at| offset + at);
    let before = text[..offset].char_indices().rev().take_while(|(_, c)| continues_name(*c));
    let start = before.last().map_or(offset, |(at, _)| at);
    // `2x` is two and x; a cursor in the number is in no name.
    let begins = text[start..end].find(begins_name).map_or(end, |at| start + at);
    if begins <= offset { begins..end } else { offset..offset }
}

fn plain(label: &str, kind: CompletionKind, detail: &str, documentation: Option<String>) -> Completion {
    Completion {
        label: label.into(),
        kind,
        detail: detail.into(),
        documentation,
        insert: label.into(),
        filter: label.into(),
    }
}

#[cfg(test)]
mod tests;
