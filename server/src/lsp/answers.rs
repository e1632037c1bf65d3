//! What is asked of a document, answered: features of the analysis in the protocol's types.

use super::positions::Positions;
use super::worker::View;
use super::{convert, found};
use leastwise_analysis::features::hover::Block;
use leastwise_analysis::features::inlay::{self, Inlay, InlayKind};
use leastwise_analysis::features::{actions, navigation, outline, rename};
use leastwise_analysis::report::Finding;
use leastwise_analysis::{Derived, codes};
use leastwise_grammar::tree::Severity;
use std::ops::Range;
use std::path::Path;
use tower_lsp::jsonrpc::{Error, ErrorCode, Result};
use tower_lsp::ls_types as lsp;

/// The finding in place of all others where a text is too large.
pub fn too_large() -> Finding {
    let message = format!("this file is larger than {} MiB, the most that is read", super::worker::MAX_TEXT >> 20);
    plain(codes::TOO_LARGE, message)
}

/// The finding in place of all others after a defect of the program.
pub fn defect() -> Finding {
    let message = "nothing could be found out: an internal error, which the log tells; please report it with the file";
    plain(crate::engine::INTERNAL, message.into())
}

fn plain(code: &'static str, message: String) -> Finding {
    Finding {
        code,
        severity: Severity::Error,
        message,
        help: None,
        range: 0..0,
        related: Vec::new(),
        fixes: Vec::new(),
    }
}

/// The name of the document's file in commands that are shown.
fn file_name(view: &View<'_>) -> String {
    let name = view.document.path.rsplit(['/', '\\']).next().unwrap_or("FILE");
    if name.contains(' ') { format!("'{name}'") } else { name.to_string() }
}

/// A hover.
pub fn hover(view: &mut View<'_>, derived: &Derived, position: lsp::Position) -> Result<Option<lsp::Hover>> {
    let offset = view.positions.offset(position);
    let Some(mut said) = view.session.hover(view.checked, derived, offset) else { return Ok(None) };
    said.blocks.extend(said.quantity.take().map(Block::Prose));
    said.blocks.extend(found::hover(view, offset));
    let lines = view.shared.settings().hover_lines;
    let content = convert::hover(&said, view.shared.abilities().markdown_hover, lines, &file_name(view));
    Ok(Some(lsp::Hover {
        contents: lsp::HoverContents::Markup(content),
        range: Some(view.positions.range(&said.range)),
    }))
}

/// The hints of a part of the text. While the text is broken, those of the last whole one stay.
pub fn hints(view: &mut View<'_>, derived: &Derived, range: lsp::Range) -> Result<Option<Vec<lsp::InlayHint>>> {
    let wanted = view.positions.bytes(range);
    let search = found::inlay(view, &wanted);
    let mut list = inlays(view, derived, wanted);
    list.extend(search);
    let settings = view.shared.settings();
    let on = |h: &Inlay| match h.kind {
        InlayKind::Momentum => settings.momentum_hints,
        InlayKind::Claim => settings.claim_hints,
        InlayKind::Summary => settings.summary_hint,
        InlayKind::Search => settings.search_hint,
        InlayKind::Quantity => settings.quantity_hints,
    };
    let resolves = view.shared.abilities().resolves_hints;
    let hint = |h: &Inlay| {
        lsp::InlayHint {
        position: view.positions.position(h.offset),
        label: lsp::InlayHintLabel::String(cut(&h.label, settings.hint_length)),
        kind: (h.kind == InlayKind::Quantity).then_some(lsp::InlayHintKind::TYPE),
        text_edits: None,
        tooltip: None,
        padding_left: Some(h.kind != InlayKind::Quantity),
        padding_right: None,
        data: resolves.then(|| {
            let at = view.positions.position(h.offset);
            serde_json::json!({ "uri": view.document.uri, "line": at.line, "character": at.character, "kind": number(h.kind) })
        }),
    }
    };
    Ok(Some(list.iter().filter(|h| on(h)).map(hint).collect()))
}

fn number(kind: InlayKind) -> u64 {
    match kind {
        InlayKind::Momentum => 0,
        InlayKind::Claim => 1,
        InlayKind::Summary => 2,
        InlayKind::Search => 3,
        InlayKind::Quantity => 4,
    }
}

fn inlays(view: &mut View<'_>, derived: &Derived, wanted: Range<usize>) -> Vec<Inlay> {
    let text = view.positions.text().clone();
    let carried = match view.kept.inlays.take() {
        Some((before, old)) if before == text => (before, old.clone(), old),
        Some((before, old)) => {
            let moved = inlay::carried(&old, &before, &text);
            (before, old, moved)
        }
        None => (text.clone(), Vec::new(), Vec::new()),
    };
    let (before, old, mut moved) = carried;
    let inside = |h: &Inlay| wanted.start <= h.offset && h.offset <= wanted.end;
    if !view.checked.complete {
        view.kept.inlays = Some((before, old));
        moved.retain(inside);
        return moved;
    }
    let fresh = view.session.inlays(view.checked, derived, wanted.clone());
    moved.retain(|h| !inside(h));
    moved.extend(fresh.iter().cloned());
    moved.sort_by_key(|h| h.offset);
    view.kept.inlays = Some((text, moved));
    fresh
}

/// A hint with the text that its label may have cut.
pub fn resolved(view: &mut View<'_>, derived: &Derived, mut hint: lsp::InlayHint, kind: u64) -> Result<lsp::InlayHint> {
    let offset = view.positions.offset(hint.position);
    let mut list = inlays(view, derived, offset..offset);
    list.extend(found::inlay(view, &(offset..offset)));
    if let Some(found) = list.iter().find(|h| h.offset == offset && number(h.kind) == kind) {
        hint.tooltip = Some(lsp::InlayHintTooltip::String(found.label.clone()));
    }
    Ok(hint)
}

fn cut(label: &str, most: usize) -> String {
    if label.chars().count() <= most {
        return label.to_string();
    }
    let kept: String = label.chars().take(most.saturating_sub(1)).collect();
    format!("{}…", kept.trim_end())
}

/// The outline.
pub fn symbols(view: &mut View<'_>) -> Result<Option<lsp::DocumentSymbolResponse>> {
    let rows = outline::outline(view.checked);
    let abilities = view.shared.abilities();
    if abilities.tree {
        return Ok(Some(lsp::DocumentSymbolResponse::Nested(convert::symbols(&rows, view.positions, abilities))));
    }
    let mut flat = Vec::new();
    convert::flat_symbols(&rows, view.positions, abilities, &view.document.uri, None, &mut flat);
    Ok(Some(lsp::DocumentSymbolResponse::Flat(flat)))
}

/// Where a name is declared.
pub fn definition(view: &mut View<'_>, position: lsp::Position) -> Result<Option<lsp::GotoDefinitionResponse>> {
    let offset = view.positions.offset(position);
    let Some(target) = navigation::definition(view.checked, offset) else { return Ok(None) };
    let (uri, range) = match &target.file {
        None => (view.document.uri.clone(), view.positions.range(&target.range)),
        Some(file) => {
            let path = Path::new(&**file);
            let open = view.shared.documents.of_file(path).map(|d| d.uri.clone());
            let Some(uri) = open.or_else(|| lsp::Uri::from_file_path(path)) else { return Ok(None) };
            let Ok(text) = view.overlay.text(path) else { return Ok(None) };
            let positions = Positions::new(text, view.shared.abilities().encoding);
            (uri, positions.range(&target.range))
        }
    };
    if view.shared.abilities().links {
        let link = lsp::LocationLink {
            origin_selection_range: Some(view.positions.range(&target.origin)),
            target_uri: uri,
            target_range: range,
            target_selection_range: range,
        };
        return Ok(Some(lsp::GotoDefinitionResponse::Link(vec![link])));
    }
    Ok(Some(lsp::GotoDefinitionResponse::Scalar(lsp::Location { uri, range })))
}

/// All places of a name.
pub fn references(
    view: &mut View<'_>,
    position: lsp::Position,
    declaration: bool,
) -> Result<Option<Vec<lsp::Location>>> {
    let places = navigation::references(view.checked, view.positions.offset(position));
    let location = |(range, _): &(Range<usize>, bool)| lsp::Location {
        uri: view.document.uri.clone(),
        range: view.positions.range(range),
    };
    Ok(Some(places.iter().filter(|(_, declared)| declaration || !declared).map(location).collect()))
}

/// All places of a name, to be shown.
pub fn highlights(view: &mut View<'_>, position: lsp::Position) -> Result<Option<Vec<lsp::DocumentHighlight>>> {
    let places = navigation::references(view.checked, view.positions.offset(position));
    let highlight = |(range, declared): &(Range<usize>, bool)| lsp::DocumentHighlight {
        range: view.positions.range(range),
        kind: Some(if *declared { lsp::DocumentHighlightKind::WRITE } else { lsp::DocumentHighlightKind::READ }),
    };
    Ok(Some(places.iter().map(highlight).collect()))
}

/// A refusal, with its reason.
pub fn refused(why: String) -> Error {
    // RequestFailed, of the protocol.
    Error { code: ErrorCode::ServerError(-32803), message: why.into(), data: None }
}

/// Whether and what can be renamed.
pub fn prepare_rename(view: &mut View<'_>, position: lsp::Position) -> Result<Option<lsp::PrepareRenameResponse>> {
    let found = rename::prepare(view.checked, view.positions.offset(position)).map_err(refused)?;
    let range = view.positions.range(&found.range);
    Ok(Some(lsp::PrepareRenameResponse::RangeWithPlaceholder { range, placeholder: found.name }))
}

/// The edits of a renaming.
pub fn renamed(view: &mut View<'_>, position: lsp::Position, name: &str) -> Result<Option<lsp::WorkspaceEdit>> {
    let offset = view.positions.offset(position);
    let list = view.session.rename(view.checked, offset, name, view.overlay).map_err(refused)?;
    let list = convert::edits(&list, view.positions);
    Ok(Some(convert::workspace_edit(list, &view.document.uri, view.version, view.shared.abilities())))
}

/// The mends of findings in a range.
pub fn code_actions(view: &mut View<'_>, params: &lsp::CodeActionParams) -> Result<Option<lsp::CodeActionResponse>> {
    let abilities = view.shared.abilities();
    // A kind is wanted where it, or what it belongs to, is named.
    let wanted = |kind: lsp::CodeActionKind| {
        let covers = |asked: &lsp::CodeActionKind| {
            let rest = kind.as_str().strip_prefix(asked.as_str());
            asked.as_str().is_empty() || rest.is_some_and(|r| r.is_empty() || r.starts_with('.'))
        };
        abilities.code_actions && params.context.only.as_ref().is_none_or(|only| only.iter().any(covers))
    };
    let range = view.positions.bytes(params.range);
    let written = if wanted(found::KIND) { found::actions(view, &range) } else { Vec::new() };
    let list = if wanted(lsp::CodeActionKind::QUICKFIX) {
        actions::actions(view.checked, view.findings, range)
    } else {
        Vec::new()
    };
    let action = |a: actions::Action| {
        let diagnostics = view
            .findings
            .get(a.mends)
            .map(|f| vec![convert::diagnostic(f, view.positions, abilities, &view.document.uri)]);
        let edits = convert::edits(&a.edits, view.positions);
        lsp::CodeActionOrCommand::CodeAction(lsp::CodeAction {
            title: a.title,
            kind: Some(lsp::CodeActionKind::QUICKFIX),
            diagnostics,
            edit: Some(convert::workspace_edit(edits, &view.document.uri, view.version, abilities)),
            is_preferred: (abilities.preferred && a.preferred).then_some(true),
            ..lsp::CodeAction::default()
        })
    };
    Ok(Some(list.into_iter().map(action).chain(written).collect()))
}

/// The diagnostics, where the client asks for them.
pub fn diagnostics(view: &mut View<'_>, previous: Option<&str>) -> Result<lsp::DocumentDiagnosticReportResult> {
    let items = convert::diagnostics(view.findings, view.positions, view.shared, &view.document.uri);
    let id = fingerprint(&items);
    let report = if previous == Some(id.as_str()) {
        lsp::DocumentDiagnosticReport::Unchanged(lsp::RelatedUnchangedDocumentDiagnosticReport {
            related_documents: None,
            unchanged_document_diagnostic_report: lsp::UnchangedDocumentDiagnosticReport { result_id: id },
        })
    } else {
        lsp::DocumentDiagnosticReport::Full(lsp::RelatedFullDocumentDiagnosticReport {
            related_documents: None,
            full_document_diagnostic_report: lsp::FullDocumentDiagnosticReport { result_id: Some(id), items },
        })
    };
    Ok(lsp::DocumentDiagnosticReportResult::Report(report))
}

fn fingerprint(items: &[lsp::Diagnostic]) -> String {
    use std::hash::{DefaultHasher, Hash, Hasher};
    let mut hasher = DefaultHasher::new();
    serde_json::to_string(items).unwrap_or_default().hash(&mut hasher);
    format!("{:016x}", hasher.finish())
}

/// The sheet as text.
pub fn sheet(view: &mut View<'_>, derived: &Derived) -> Result<Option<lsp::LSPAny>> {
    let mut sheet = view.session.sheet(view.checked, derived);
    sheet.found = found::current(view).map(|f| f.report.clone());
    let text = view.positions.text();
    let lines = crate::lines::Lines::new(text);
    let page = crate::print::page::sheet(&sheet, view.findings, &lines, crate::output::Page::PLAIN);
    Ok(Some(lsp::LSPAny::String(page)))
}
