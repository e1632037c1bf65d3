//! What a search found, where the editor shows it: a hint, a lens, actions that write it into the file.

use super::convert;
use super::searches::{Found, more};
use super::server::WRITE_FOUND;
use super::worker::View;
use leastwise_analysis::features::hover::Block;
use leastwise_analysis::features::inlay::Inlay;
use leastwise_analysis::search::{SearchRow, insertion};
use std::ops::Range;
use std::sync::Arc;
use tower_lsp::jsonrpc::Result;
use tower_lsp::ls_types as lsp;

/// The kind of the actions: they write what was not asked for.
pub const KIND: lsp::CodeActionKind = lsp::CodeActionKind::REFACTOR_REWRITE;
/// So many constants have an action of their own.
const SINGLE: usize = 12;

/// What was found in the text as it is now; never in an older one.
pub fn current(view: &View<'_>) -> Option<Arc<Found>> {
    let found = super::documents::lock(&view.document.found).clone()?;
    (found.change == view.change && view.shared.settings().search_run && view.checked.complete).then_some(found)
}

/// What a hover on the system's name says of it.
pub fn hover(view: &View<'_>, offset: usize) -> Vec<Block> {
    let place = view.checked.system_range();
    let Some(found) = current(view).filter(|_| place.start <= offset && offset <= place.end) else { return Vec::new() };
    let rows: Vec<&SearchRow> = found.report.news().collect();
    if rows.is_empty() {
        return Vec::new();
    }
    let line = |row: &&SearchRow| format!("{} = {}", row.name, row.charge.text);
    vec![
        Block::Prose(format!("A search found {}, which nobody claimed:", more(rows.len()))),
        Block::Formulas(rows.iter().map(line).collect()),
    ]
}

/// The hint behind the last term.
pub fn inlay(view: &View<'_>, wanted: &Range<usize>) -> Option<Inlay> {
    let hint = current(view)?.report.inlay(view.checked)?;
    (wanted.start <= hint.offset && hint.offset <= wanted.end).then_some(hint)
}

/// The lens above the system's name.
pub fn lenses(view: &mut View<'_>) -> Result<Option<Vec<lsp::CodeLens>>> {
    let Some(found) = current(view).filter(|f| !f.report.offers().is_empty()) else { return Ok(Some(Vec::new())) };
    let command = lsp::Command {
        title: format!("{}: write into the file", more(found.report.offers().len())),
        command: WRITE_FOUND.into(),
        arguments: Some(vec![serde_json::json!(view.document.uri)]),
    };
    let range = view.positions.range(&view.checked.system_range());
    Ok(Some(vec![lsp::CodeLens { range, command: Some(command), data: None }]))
}

/// The change of the file that writes all of it; nothing where there is nothing to be written.
pub fn all(view: &mut View<'_>) -> Option<lsp::WorkspaceEdit> {
    let found = current(view)?;
    let offers = found.report.offers();
    (!offers.is_empty()).then(|| edit(view, &offers))
}

/// Actions at the system's name, the last term or a claim: all, and each.
pub fn actions(view: &View<'_>, range: &Range<usize>) -> Vec<lsp::CodeActionOrCommand> {
    let Some(found) = current(view).filter(|_| is_near(view, range)) else { return Vec::new() };
    let offers = found.report.offers();
    let action = |title: String, rows: &[&SearchRow]| {
        lsp::CodeActionOrCommand::CodeAction(lsp::CodeAction {
            title,
            kind: Some(KIND),
            edit: Some(edit(view, rows)),
            ..lsp::CodeAction::default()
        })
    };
    let mut out = Vec::new();
    if offers.len() > 1 {
        out.push(action(format!("write {} into the file", more(offers.len())), &offers));
    }
    for row in offers.iter().take(SINGLE) {
        out.push(action(format!("write `{}` into the file: {}", row.name, row.title), &[row]));
    }
    out
}

fn is_near(view: &View<'_>, range: &Range<usize>) -> bool {
    let checked = view.checked;
    let claims = checked.symmetries.iter().map(|c| &c.range).chain(checked.conserved.iter().map(|c| &c.range));
    let places = claims.cloned().chain(checked.terms.last().map(|t| t.range.clone())).chain([checked.system_range()]);
    places.into_iter().any(|p| p.start <= range.end && range.start <= p.end)
}

fn edit(view: &View<'_>, rows: &[&SearchRow]) -> lsp::WorkspaceEdit {
    let sources: Vec<&str> = rows.iter().filter_map(|row| row.source.as_deref()).collect();
    let (at, text) = insertion(view.checked, &sources);
    let edits = convert::edits(&[(at..at, text)], view.positions);
    convert::workspace_edit(edits, &view.document.uri, view.version, view.shared.abilities())
}
