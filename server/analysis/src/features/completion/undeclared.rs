//! Names that are used and nowhere declared: what is declared next is probably one of them.

use super::heads::Known;
use super::words::item_keyword;
use super::{Completion, CompletionKind, plain};
use crate::uses::uses;
use leastwise_grammar::{
    CallableNames, RawItem, WordKind, callable_names, continues_name, fold_name, keywords, parse_item, words,
};
use std::collections::HashSet;

/// No more text than this is read with the grammar.
const READ: usize = 64 * 1024;

/// A name that nobody declares.
struct Missing {
    name: String,
    /// Where it is used first.
    used_in: String,
    called: bool,
    primed: bool,
    index: bool,
}

/// The names that an item with this keyword may declare, best first.
pub(super) fn names(items: &[RawItem], known: &[Known], keyword: &str, own: Option<usize>) -> Vec<Completion> {
    let mut list = missing(items, known, own);
    list.retain(|m| m.index == (keyword == "index"));
    list.sort_by_key(|m| match keyword {
        "coordinate" | "input" => (!m.primed, m.called),
        "function" | "let" => (!m.called, m.primed),
        _ => (m.primed, m.called),
    });
    let kind = match keyword {
        "coordinate" => CompletionKind::Coordinate,
        "input" => CompletionKind::Input,
        "index" => CompletionKind::Index,
        "let" => CompletionKind::Definition,
        "function" => CompletionKind::Function,
        _ => CompletionKind::Parameter,
    };
    list.into_iter().map(|m| plain(&m.name, kind, &format!("used in {}, nowhere declared", m.used_in), None)).collect()
}

fn missing(items: &[RawItem], known: &[Known], own: Option<usize>) -> Vec<Missing> {
    let known: HashSet<&str> = known.iter().map(|k| k.name.as_str()).collect();
    let callable = callable_names(items.iter());
    let mut list: Vec<Missing> = Vec::new();
    let mut left = READ;
    for (k, item) in items.iter().enumerate() {
        // The grammar is slow beside a look at the words, and most items have all their names declared.
        if own == Some(k) || !may_miss(&item.text, &known) {
            continue;
        }
        let Some(rest) = left.checked_sub(item.text.len()) else { break };
        left = rest;
        add(item, &known, &callable, &mut list);
    }
    list
}

fn add(item: &RawItem, known: &HashSet<&str>, callable: &CallableNames, list: &mut Vec<Missing>) {
    let tree = parse_item(&item.text, &callable.occurring_in(&item.text)).item;
    for used in uses(&tree).names {
        if used.name.is_empty() || known.contains(used.name.as_str()) {
            continue;
        }
        let called = used.called
            || used.spans.iter().any(|s| item.text.get(s.end as usize..).is_some_and(|rest| rest.starts_with('(')));
        match list.iter_mut().find(|m| m.name == used.name) {
            Some(m) => {
                m.called |= called;
                m.primed |= used.primed;
                m.index |= used.index;
            }
            None => {
                let used_in = title(&item.text);
                list.push(Missing { name: used.name, used_in, called, primed: used.primed, index: used.index });
            }
        }
    }
}

/// Whether an item has words that may be names which nobody declares.
fn may_miss(text: &str, known: &HashSet<&str>) -> bool {
    let mut list = words(text).map(|(span, kind)| (&text[span.range()], kind)).peekable();
    let keyword = list.next().and_then(|(word, _)| item_keyword(word));
    if matches!(keyword, None | Some("system" | "include")) {
        return false;
    }
    // Of what is declared and given a quantity, only the index can be missing.
    let declares = matches!(keyword, Some("coordinate" | "cyclic" | "parameter" | "input" | "function"));
    if declares && !text.contains('[') {
        return false;
    }
    let mut first = true;
    while let Some((word, kind)) = list.next() {
        let title =
            std::mem::take(&mut first) && list.peek().is_some_and(|(next, _)| matches!(*next, "=" | ":" | "on"));
        if kind != WordKind::Word || title {
            continue;
        }
        let name = fold_name(word);
        if !known.contains(name.as_str()) && !keywords().iter().any(|k| k.name == name) {
            return true;
        }
    }
    false
}

/// The keyword of an item, and the name behind it.
fn title(text: &str) -> String {
    let mut parts = text.split(|c: char| !continues_name(c)).filter(|w| !w.is_empty());
    let keyword = parts.next().unwrap_or("an item");
    let named = text.get(keyword.len()..).is_some_and(|rest| rest.starts_with([' ', '\t']));
    match parts.next().filter(|_| named && keyword != "assume") {
        Some(name) => format!("{keyword} {name}"),
        None => keyword.to_owned(),
    }
}
