//! Hovers over texts with a cursor.

mod examples;
mod history;
mod kinds;
mod names;
mod places;

use super::{Block, Hover};
use crate::database::Session;
use crate::fixture::Folder;
use std::fmt::Write;

const SITE: Folder = Folder(&[("site.least", include_str!("../../../../../../grammar/examples/site.least"))]);

/// A hover as a reader sees it: the text that it is about, then its blocks.
fn shown(text: &str, hover: Option<Hover>) -> String {
    let Some(hover) = hover else { return "nothing".into() };
    let mut out = format!("`{}`", &text[hover.range]);
    for block in hover.blocks {
        match block {
            Block::Prose(text) => write!(out, "\n{text}").unwrap(),
            Block::Formulas(lines) => lines.iter().for_each(|l| write!(out, "\n    {l}").unwrap()),
        }
    }
    out
}

/// The hover at `$0`, in a session that knows nothing else.
fn check(fixture: &str) -> String {
    let offset = fixture.find("$0").expect("a cursor");
    let text = fixture.replace("$0", "");
    let mut session = Session::new();
    let checked = session.check("folder/model.least", &text, &SITE);
    let derived = session.derive(&checked);
    shown(&text, session.hover(&checked, &derived, offset))
}

/// The hover at `$0` in a piece of a model.
#[track_caller]
fn within(model: &str, piece: &str) -> String {
    let plain = piece.replace("$0", "");
    assert_eq!(model.matches(&plain).count(), 1, "{plain}");
    check(&model.replace(&plain, piece))
}
