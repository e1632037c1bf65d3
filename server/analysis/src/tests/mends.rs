//! Every code has a mend, or a reason why it has none.

use crate::Session;
use crate::features::actions::{Action, actions};
use crate::features::models::{broken, with_models};
use crate::fixture::Folder;
use crate::pages::{MENDED, WITHOUT};
use crate::report::Finding;
use leastwise_grammar::tree::Severity;
use std::collections::HashSet;

const FILES: Folder = Folder(&[("a.least", "parameter unused_here\n"), ("folder/model.least", "")]);

fn found(text: &str) -> (Vec<Finding>, Vec<Action>) {
    let mut session = Session::new();
    let checked = session.check("folder/model.least", text, &FILES);
    let derived = session.derive(&checked);
    let findings = session.findings(&checked, &derived);
    let list = actions(&checked, &findings, 0..text.len());
    (findings, list)
}

#[test]
fn a_mend_takes_its_finding_away_and_adds_no_error() {
    let mut wrong = Vec::new();
    for (code, text, title, expected) in MENDED {
        for crlf in [false, true] {
            let ends = |text: &str| if crlf { text.replace('\n', "\r\n") } else { text.to_string() };
            let (text, expected) = (ends(text), ends(expected));
            let (findings, list) = found(&text);
            let Some(action) = list.iter().find(|a| a.title == *title && findings[a.mends].code == *code) else {
                let codes: Vec<&str> = findings.iter().map(|f| f.code).collect();
                let titles: Vec<&str> = list.iter().map(|a| a.title.as_str()).collect();
                wrong.push(format!("{code}: no `{title}` in {titles:?} of {codes:?}"));
                continue;
            };
            let after = crate::features::rename::edited(&text, &action.edits);
            if after != expected {
                wrong.push(format!("{code}: {after:?}, not {expected:?}"));
            }
            let (later, _) = found(&after);
            let count = |list: &[Finding]| list.iter().filter(|f| f.code == *code).count();
            let errors = |list: &[Finding]| list.iter().filter(|f| f.severity == Severity::Error).count();
            if count(&later) >= count(&findings) {
                wrong.push(format!("{code}: still there in {after:?}: {later:?}"));
            }
            if errors(&later) > errors(&findings) {
                wrong.push(format!("{code}: new errors in {after:?}: {later:?}"));
            }
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

#[test]
fn every_code_has_a_mend_or_a_reason_for_none() {
    let mended: HashSet<&str> = MENDED.iter().map(|m| m.0).collect();
    let without: HashSet<&str> = WITHOUT.iter().map(|m| m.0).collect();
    for code in crate::codes::all() {
        let (a, b) = (mended.contains(code.name), without.contains(code.name));
        assert!(a != b, "{}: {}", code.name, if a { "has a mend and a reason" } else { "has neither mend nor reason" });
    }
    let known: HashSet<&str> = crate::codes::all().map(|c| c.name).collect();
    assert!(mended.iter().chain(&without).all(|code| known.contains(code)));
    assert_eq!(without.len(), WITHOUT.len());
}

/// All mends of a text can be applied.
#[track_caller]
fn apply(text: &str) -> usize {
    let (_, list) = found(text);
    for action in &list {
        let mut end = 0;
        for (range, _) in &action.edits {
            assert!(end <= range.start && range.start <= range.end && range.end <= text.len(), "{action:?} of {text}");
            assert!(text.is_char_boundary(range.start) && text.is_char_boundary(range.end), "{action:?} of {text}");
            end = range.end;
        }
        assert!(action.title.starts_with(char::is_uppercase), "{}", action.title);
    }
    list.len()
}

#[test]
fn edits_are_in_order_and_within_the_text() {
    for (_, text, ..) in MENDED {
        assert!(apply(text) > 0);
        // Whatever stands around it, and however it is cut off.
        apply(&format!("\u{feff}# A model.\r{}", text.replace('\n', "\r")));
        for (at, _) in text.char_indices() {
            apply(&text[..at]);
        }
    }
    with_models(|text| {
        for text in broken(text) {
            apply(&text);
        }
    });
}
