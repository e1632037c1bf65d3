//! What can be typed at a cursor. Reads the text alone, so that it never waits for the algebra.

mod context;
mod letters;
mod names;
mod units;

use crate::checked::SymbolRow;
use context::{Context, Wanted, context};
use leastwise_grammar::{KeywordRole, begins_name, continues_name, keywords, split};
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

/// No longer list is shown.
const MOST: usize = 400;

/// What can be typed at an offset. `included` are the names that the last check took from other files. Reads the heads of
/// all items and the signs before the cursor; derives nothing.
pub fn complete(text: &str, offset: usize, included: &[SymbolRow]) -> Completions {
    let offset = text.floor_char_boundary(offset);
    let before = &text[..offset];
    let line = before.rfind(['\n', '\r']).map_or(0, |at| at + 1);
    let backslash = letters::begun(&before[line..]).map(|at| line + at);
    let word = word_around(text, offset);
    let start = backslash.unwrap_or(word.start);
    let range = start..if backslash.is_some() { offset } else { word.end };
    let items = split(text);
    // The item that the cursor is in or behind: an indented line goes on with the one above.
    let first_column = start == line;
    let item = items.iter().rposition(|i| i.range.start <= start);
    let item = item.filter(|&k| items[k].range.start != start && !first_column);
    let head = match item {
        Some(k) => &text[items[k].range.start..start],
        None => &text[line..start],
    };
    let first = first_column || (item.is_none() && head.trim().is_empty());
    let mut list = Vec::new();
    let place = context(head, first);
    if backslash.is_some() {
        let allowed = !matches!(place, Context::Nothing) || !in_comment(&before[line..]);
        if allowed {
            list.extend(letters::all().map(|(name, sign)| letter(name, sign)));
        }
        return Completions { range, list };
    }
    // Behind a number without a space stands nothing that the number would swallow.
    let typed = &text[start..offset];
    match place {
        Context::Nothing => {}
        Context::Item(None) => list.extend(item_keywords(&items)),
        Context::Item(Some(only)) => list.extend(keyword(only)),
        Context::Words(words) => list.extend(words.iter().filter_map(|w| keyword(w))),
        Context::NewName => list.extend(names::undeclared(&items, included)),
        Context::Quantity => list.extend(units::quantities()),
        Context::Unit(quantity) => list.extend(units::fitting(quantity.as_deref())),
        Context::Formula(place) => {
            let wanted = place.wanted;
            list.extend(names::in_formula(&items, included, &place));
            if wanted == Wanted::Anything {
                list.extend(functions(place.item));
            }
            if wanted == Wanted::State {
                list.extend(["over", "until", "with", "from"].iter().filter_map(|w| keyword(w)));
            }
        }
    }
    spelt_letters(&mut list, typed);
    list.truncate(MOST);
    Completions { range, list }
}

/// The name around a cursor, empty where there is none.
fn word_around(text: &str, offset: usize) -> Range<usize> {
    let end = offset + text[offset..].find(|c| !continues_name(c)).unwrap_or(text.len() - offset);
    let start = text[..offset].rfind(|c| !continues_name(c));
    let start = start.map_or(0, |at| at + text[at..].chars().next().map_or(1, char::len_utf8));
    // `2x` is two and x; a cursor in the number is in no name.
    let begins = text[start..end].find(begins_name).map_or(end, |at| start + at);
    if begins <= offset { begins..end } else { offset..offset }
}

fn in_comment(line: &str) -> bool {
    let mut quoted = false;
    line.chars().any(|c| {
        quoted ^= c == '"';
        c == '#' && !quoted
    })
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

fn keyword(name: &str) -> Option<Completion> {
    let k = keywords().iter().find(|k| {
        k.name == name && matches!(k.role, KeywordRole::Item | KeywordRole::Modifier | KeywordRole::Clause)
    })?;
    Some(plain(k.name, CompletionKind::Keyword, k.follows, Some(k.explanation.to_string())))
}

/// The keywords that begin an item, in the order in which a model is written.
fn item_keywords(items: &[leastwise_grammar::RawItem]) -> Vec<Completion> {
    let named = items.iter().any(|i| i.text.starts_with("system"));
    let mut list = Vec::new();
    for k in keywords().iter().filter(|k| matches!(k.role, KeywordRole::Item | KeywordRole::Modifier)) {
        if k.name == "system" && named {
            continue;
        }
        list.extend(keyword(k.name));
        // The modifiers stand beside what they modify.
        let with = match k.name {
            "coordinate" => Some("cyclic coordinate"),
            "symmetry" => Some("broken symmetry"),
            _ => None,
        };
        if let Some(both) = with {
            let explanation = if both.starts_with("cyclic") {
                "a coordinate that no term depends on: claimed, and checked"
            } else {
                "a symmetry known not to give a constant of the motion"
            };
            list.push(plain(both, CompletionKind::Keyword, k.follows, Some(explanation.into())));
        }
    }
    list.retain(|c| !matches!(c.label.as_str(), "cyclic" | "broken"));
    list
}

/// The functions and constants of the language.
fn functions(item: &str) -> Vec<Completion> {
    let mut list = Vec::new();
    for k in keywords() {
        let only_claims = matches!(k.name, "momentum" | "energy");
        if (only_claims && item != "conserved") || k.name == "ε" {
            continue;
        }
        let kind = match k.role {
            KeywordRole::Function => CompletionKind::Function,
            KeywordRole::Constant => CompletionKind::Constant,
            _ => continue,
        };
        list.push(plain(k.name, kind, k.follows, Some(k.explanation.to_string())));
    }
    if item == "conserved" {
        // What only a claim knows comes first.
        list.sort_by_key(|c| !matches!(c.label.as_str(), "momentum" | "energy"));
    }
    list
}

fn letter(name: &str, sign: &str) -> Completion {
    let shown = if sign.starts_with(['\u{0307}', '\u{0308}']) { format!("◌{sign}") } else { sign.to_string() };
    Completion {
        label: shown,
        kind: CompletionKind::Letter,
        detail: format!("\\{name}"),
        documentation: None,
        insert: sign.into(),
        filter: format!("\\{name}"),
    }
}

/// A Greek name can also be typed by the letters' names.
fn spelt_letters(list: &mut Vec<Completion>, typed: &str) {
    if typed.len() < 2 || !typed.is_ascii() {
        return;
    }
    let spelt: Vec<Completion> = list
        .iter()
        .filter_map(|c| {
            let filter = letters::spelt(&c.filter)?;
            filter.starts_with(typed).then(|| Completion { filter, ..c.clone() })
        })
        .collect();
    list.splice(0..0, spelt);
}

#[cfg(test)]
mod tests;
