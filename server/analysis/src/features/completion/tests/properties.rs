//! What holds of every list, at every place of whole and broken models.

use super::super::order::MOST;
use super::*;
use crate::Session;
use crate::checked::Checked;
use crate::features::models::{broken, edited, with_models};
use crate::fixture::Folder;
use leastwise_grammar::tree::Severity;
use std::collections::HashSet;

const SITE: Folder = Folder(&[("site.least", include_str!("../../../../../../grammar/examples/site.least"))]);

fn checked(text: &str) -> Checked {
    Session::new().check("folder/model.least", text, &SITE)
}

fn foreign(checked: &Checked) -> Vec<SymbolRow> {
    checked.symbols.iter().filter(|s| s.origin.is_some()).cloned().collect()
}

/// The list at a place is in order in itself.
fn sound(text: &str, offset: usize) {
    let found = complete(text, offset, &[]);
    let Range { start, end } = found.range.clone();
    assert!(start <= offset && offset <= end && end <= text.len(), "{:?} at {offset}", found.range);
    let word = &text[start..end];
    let letters = word.strip_prefix('\\').map(|w| w.chars().all(|c| c.is_ascii_alphanumeric() || "^_-".contains(c)));
    assert!(letters.unwrap_or_else(|| word.chars().all(continues_name)), "{word:?}");
    assert!(found.list.len() <= MOST);
    let labels: HashSet<&str> = found.list.iter().map(|c| c.label.as_str()).collect();
    let twice = found.list.iter().filter(|c| c.kind != CompletionKind::Letter).count();
    assert!(labels.len() >= twice, "one thing stands once at {offset} of {text}");
    for c in &found.list {
        assert!(!c.insert.is_empty() && !c.filter.is_empty() && !c.insert.contains(['\n', '\r']), "{c:?}");
    }
}

#[test]
fn every_place_of_every_text_has_an_answer() {
    let mut state = 7;
    with_models(|text| {
        let mut lived = text.to_owned();
        for text in broken(text).into_iter().take(6) {
            (0..=text.len()).step_by(5).for_each(|offset| sound(&text, text.floor_char_boundary(offset)));
        }
        for _ in 0..12 {
            lived = edited(&lived, text, &mut state);
            (0..=lived.len()).step_by(41).for_each(|offset| sound(&lived, lived.floor_char_boundary(offset)));
        }
    });
}

#[test]
fn offsets_are_clamped() {
    for text in ["", "θ", "\u{feff}", "\u{feff}ki", "\r\n", "𝑥\u{307}"] {
        for offset in 0..8 {
            let found = complete(text, offset, &[]);
            assert!(found.range.end <= text.len());
        }
    }
    assert_eq!(complete("\u{feff}ki", 5, &[]).list[0].label, "kinetic");
}

/// Findings which say that a word is not known where it stands.
const UNKNOWN: [&str; 8] = [
    "undeclared-name",
    "undeclared-index",
    "unknown-quantity",
    "unknown-unit",
    "only-in-conserved",
    "unknown-keyword",
    "system-option",
    "transformation-source",
];

/// What is put in at `offset` is known there; of a long list every seventh is tried. Gives how many were.
fn known_when_put_in(text: &str, offset: usize, foreign: &[SymbolRow]) -> usize {
    let found = complete(text, offset, foreign);
    // Between two words something else is typed than in place of a word, or at the end of a line.
    let behind = text[found.range.end..].trim_start_matches(' ').chars().next();
    if found.range.is_empty() && !matches!(behind, None | Some('\r' | '\n' | '#' | ')' | ']' | ',')) {
        return 0;
    }
    let mut tried = 0;
    let chosen = found.list.iter().enumerate().filter(|(k, _)| *k < 3 || k % 7 == offset % 7);
    for (_, c) in chosen {
        // Arguments follow a function; those of a sum are not made up here. A letter only begins a name.
        let function = c.kind == CompletionKind::Function && behind != Some('(');
        if function && c.label == "sum" || c.kind == CompletionKind::Letter {
            continue;
        }
        let arguments = if function { "(1)" } else { "" };
        let rest = &text[found.range.end..];
        let after = format!("{}{}{arguments}{rest}", &text[..found.range.start], c.insert);
        let put_in = found.range.start..found.range.start + c.insert.len();
        let checked = checked(&after);
        let wrong = checked.findings.iter().find(|f| {
            let there = f.range.start < put_in.end && put_in.start < f.range.end;
            there && f.severity == Severity::Error && UNKNOWN.contains(&f.code)
        });
        assert!(wrong.is_none(), "{} put in at {offset} of\n{after}\n{wrong:?}", c.insert);
        tried += 1;
    }
    tried
}

#[test]
fn what_is_offered_is_known_where_it_is_put_in() {
    let mut tried = 0;
    with_models(|text| {
        let foreign = foreign(&checked(text));
        // Lists are asked for where a word begins, in a line that is there and in one that ends there.
        let signs = text.match_indices([' ', '(', '[']).map(|(at, sign)| at + sign.len());
        for at in signs.filter(|at| at % 5 == 0) {
            tried += known_when_put_in(text, at, &foreign);
            let end = text[at..].find(['\r', '\n']).map_or(text.len(), |end| at + end);
            tried += known_when_put_in(&format!("{}{}", &text[..at], &text[end..]), at, &foreign);
        }
    });
    assert!(tried > 2000, "{tried}");
}

#[test]
fn a_list_is_the_same_each_time() {
    with_models(|text| {
        for offset in (0..text.len()).step_by(97).map(|o| text.floor_char_boundary(o)) {
            assert_eq!(complete(text, offset, &[]), complete(text, offset, &[]));
        }
    });
}
