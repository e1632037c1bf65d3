//! Plain data to the protocol's types, and nothing that the client did not say it can take.

use super::abilities::Abilities;
use super::positions::Positions;
use super::shared::Shared;
use leastwise_analysis::features::hover::{Block, Hover};
use leastwise_analysis::features::outline::{OutlineKind, OutlineRow};
use leastwise_analysis::report::Finding;
use leastwise_grammar::tree::Severity;
use std::ops::Range;
use tower_lsp::ls_types as lsp;

/// The name under which diagnostics are shown.
const SOURCE: &str = "leastwise";

/// Findings as diagnostics, as many as the settings allow.
pub fn diagnostics(
    findings: &[Finding],
    positions: &Positions,
    shared: &Shared,
    uri: &lsp::Uri,
) -> Vec<lsp::Diagnostic> {
    let (settings, abilities) = (shared.settings(), shared.abilities());
    let shown: Vec<&Finding> = findings.iter().filter(|f| settings.readings || f.severity != Severity::Hint).collect();
    let left_out = shown.len().saturating_sub(settings.max_findings);
    let mut kept: Vec<&Finding> = shown.clone();
    if left_out > 0 {
        // The gravest ones.
        kept.sort_by_key(|f| f.severity);
        kept.truncate(settings.max_findings);
        kept.sort_by_key(|f| (f.range.start, f.range.end));
    }
    let mut list: Vec<lsp::Diagnostic> = kept.iter().map(|f| diagnostic(f, positions, abilities, uri)).collect();
    if left_out > 0 {
        list.push(lsp::Diagnostic {
            range: lsp::Range::default(),
            severity: Some(lsp::DiagnosticSeverity::INFORMATION),
            code: Some(lsp::NumberOrString::String(leastwise_analysis::codes::MORE_FINDINGS.into())),
            source: Some(SOURCE.into()),
            message: format!(
                "there are {left_out} more findings; the setting leastwise.diagnostics.max says how many are shown"
            ),
            ..lsp::Diagnostic::default()
        });
    }
    list
}

/// A finding as a diagnostic.
pub fn diagnostic(f: &Finding, positions: &Positions, abilities: &Abilities, uri: &lsp::Uri) -> lsp::Diagnostic {
    let severity = match f.severity {
        Severity::Error => lsp::DiagnosticSeverity::ERROR,
        Severity::Warning => lsp::DiagnosticSeverity::WARNING,
        Severity::Information => lsp::DiagnosticSeverity::INFORMATION,
        Severity::Hint => lsp::DiagnosticSeverity::HINT,
    };
    let mut message = f.message.clone();
    if let Some(help) = &f.help {
        message.push_str("\nhelp: ");
        message.push_str(help);
    }
    let related: Vec<lsp::DiagnosticRelatedInformation> = f
        .related
        .iter()
        .map(|r| lsp::DiagnosticRelatedInformation {
            location: lsp::Location { uri: uri.clone(), range: positions.range(&r.range) },
            message: r.message.clone(),
        })
        .collect();
    let unnecessary = abilities.unnecessary && matches!(f.code, "unused-name" | "idle-term");
    lsp::Diagnostic {
        range: positions.range(&f.range),
        severity: Some(severity),
        code: Some(lsp::NumberOrString::String(f.code.into())),
        code_description: None,
        source: Some(SOURCE.into()),
        message,
        related_information: (abilities.related && !related.is_empty()).then_some(related),
        tags: unnecessary.then(|| vec![lsp::DiagnosticTag::UNNECESSARY]),
        data: None,
    }
}

/// A hover as Markdown or plain text, no longer than allowed.
pub fn hover(hover: &Hover, markdown: bool, max_lines: usize, file: &str) -> lsp::MarkupContent {
    let mut lines: Vec<String> = Vec::new();
    // A cut inside of a code block must close it.
    let mut open = Vec::new();
    for (k, block) in hover.blocks.iter().enumerate() {
        if k > 0 {
            lines.push(String::new());
            open.push(false);
        }
        match block {
            Block::Prose(text) => {
                lines.push(if markdown { escaped(text) } else { text.clone() });
                open.push(false);
            }
            Block::Formulas(formulas) => {
                let formulas = formulas.iter().flat_map(|f| f.lines());
                if markdown {
                    lines.push("```leastwise".into());
                    open.push(false);
                    for f in formulas {
                        lines.push(f.to_string());
                        open.push(true);
                    }
                    lines.push("```".into());
                    open.push(false);
                } else {
                    for f in formulas {
                        lines.push(format!("    {f}"));
                        open.push(false);
                    }
                }
            }
        }
    }
    if lines.len() > max_lines {
        let left = lines.len() - max_lines;
        lines.truncate(max_lines);
        if lines.last().is_some_and(|l| l == "```leastwise") {
            lines.pop();
        } else if open[max_lines - 1] {
            lines.push("```".into());
        }
        lines.push(String::new());
        let all = format!("leastwise sheet {file}");
        lines.push(if markdown {
            format!("… and {left} lines more: `{all}`")
        } else {
            format!("… and {left} lines more: {all}")
        });
    }
    let kind = if markdown { lsp::MarkupKind::Markdown } else { lsp::MarkupKind::PlainText };
    lsp::MarkupContent { kind, value: lines.join("\n") }
}

/// Prose as Markdown: what stands in backquotes is code, everything else is text.
pub fn escaped(text: &str) -> String {
    let mut out = String::with_capacity(text.len() + 8);
    let mut code = false;
    let closed = text.matches('`').count().is_multiple_of(2);
    for c in text.chars() {
        match c {
            '`' if closed => {
                code = !code;
                out.push(c);
            }
            '\\' | '`' | '*' | '_' | '[' | ']' | '<' | '>' | '#' | '|' | '~' | '$' | '&' if !code => {
                out.push('\\');
                out.push(c);
            }
            _ => out.push(c),
        }
    }
    out
}

/// A row's name. An empty one is refused by some clients.
fn named(row: &OutlineRow) -> String {
    if row.name.trim().is_empty() { "—".into() } else { row.name.clone() }
}

/// The outline as a tree.
#[allow(deprecated)]
pub fn symbols(rows: &[OutlineRow], positions: &Positions, abilities: &Abilities) -> Vec<lsp::DocumentSymbol> {
    rows.iter()
        .map(|row| lsp::DocumentSymbol {
            name: named(row),
            detail: (!row.detail.is_empty()).then(|| row.detail.clone()),
            kind: abilities.symbol_kind(symbol_kind(row.kind)),
            tags: None,
            deprecated: None,
            range: positions.range(&row.range),
            selection_range: positions.range(&row.selection),
            children: (!row.children.is_empty()).then(|| symbols(&row.children, positions, abilities)),
        })
        .collect()
}

/// The outline as a list.
#[allow(deprecated)]
pub fn flat_symbols(
    rows: &[OutlineRow],
    positions: &Positions,
    abilities: &Abilities,
    uri: &lsp::Uri,
    container: Option<&str>,
    out: &mut Vec<lsp::SymbolInformation>,
) {
    for row in rows {
        out.push(lsp::SymbolInformation {
            name: named(row),
            kind: abilities.symbol_kind(symbol_kind(row.kind)),
            tags: None,
            deprecated: None,
            location: lsp::Location { uri: uri.clone(), range: positions.range(&row.range) },
            container_name: container.map(Into::into),
        });
        flat_symbols(&row.children, positions, abilities, uri, Some(&row.name), out);
    }
}

fn symbol_kind(kind: OutlineKind) -> lsp::SymbolKind {
    match kind {
        OutlineKind::System => lsp::SymbolKind::MODULE,
        OutlineKind::Coordinate => lsp::SymbolKind::VARIABLE,
        OutlineKind::Parameter => lsp::SymbolKind::CONSTANT,
        OutlineKind::Input => lsp::SymbolKind::EVENT,
        OutlineKind::Index => lsp::SymbolKind::ENUM_MEMBER,
        OutlineKind::Definition => lsp::SymbolKind::PROPERTY,
        OutlineKind::Function => lsp::SymbolKind::FUNCTION,
        OutlineKind::Term => lsp::SymbolKind::CLASS,
        OutlineKind::Force => lsp::SymbolKind::INTERFACE,
        OutlineKind::Constraint => lsp::SymbolKind::STRUCT,
        OutlineKind::Claim => lsp::SymbolKind::BOOLEAN,
        OutlineKind::Run => lsp::SymbolKind::METHOD,
        OutlineKind::Include => lsp::SymbolKind::FILE,
    }
}

/// Edits of one document.
pub fn edits(list: &[(Range<usize>, String)], positions: &Positions) -> Vec<lsp::TextEdit> {
    let edit = |(range, text): &(Range<usize>, String)| lsp::TextEdit {
        range: positions.range(range),
        new_text: text.clone(),
    };
    list.iter().map(edit).collect()
}

/// Edits of one document as a change of the workspace.
pub fn workspace_edit(
    list: Vec<lsp::TextEdit>,
    uri: &lsp::Uri,
    version: i32,
    abilities: &Abilities,
) -> lsp::WorkspaceEdit {
    if abilities.document_changes {
        let document = lsp::OptionalVersionedTextDocumentIdentifier { uri: uri.clone(), version: Some(version) };
        let edits = list.into_iter().map(lsp::OneOf::Left).collect();
        let changes = lsp::DocumentChanges::Edits(vec![lsp::TextDocumentEdit { text_document: document, edits }]);
        return lsp::WorkspaceEdit { document_changes: Some(changes), ..lsp::WorkspaceEdit::default() };
    }
    lsp::WorkspaceEdit { changes: Some([(uri.clone(), list)].into()), ..lsp::WorkspaceEdit::default() }
}

/// What turns one text into another: whole lines that differ, so that cursors elsewhere stay where they are.
pub fn line_edits(before: &str, after: &str) -> Vec<(Range<usize>, String)> {
    if before == after {
        return Vec::new();
    }
    let (a, b) = (pieces(before), pieces(after));
    if a.len() == b.len() {
        let mut at = 0;
        let mut out: Vec<(Range<usize>, String)> = Vec::new();
        for (old, new) in a.iter().zip(&b) {
            if old != new {
                out.push((at..at + old.len(), new.to_string()));
            }
            at += old.len();
        }
        return out;
    }
    let front = a.iter().zip(&b).take_while(|(x, y)| x == y).count();
    let back = a[front..].iter().rev().zip(b[front..].iter().rev()).take_while(|(x, y)| x == y).count();
    let start: usize = a[..front].iter().map(|l| l.len()).sum();
    let end = before.len() - a[a.len() - back..].iter().map(|l| l.len()).sum::<usize>();
    vec![(start..end, b[front..b.len() - back].concat())]
}

fn pieces(text: &str) -> Vec<&str> {
    let starts = crate::lines::starts(text);
    let end = |k: usize| starts.get(k + 1).copied().unwrap_or(text.len());
    starts.iter().enumerate().map(|(k, &s)| &text[s..end(k)]).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn edited(before: &str, after: &str, expected: usize) {
        let list = line_edits(before, after);
        assert_eq!(list.len(), expected, "{list:?}");
        let mut text = before.to_string();
        for (range, new) in list.into_iter().rev() {
            text.replace_range(range, &new);
        }
        assert_eq!(text, after);
    }

    #[test]
    fn only_lines_that_differ_are_edited() {
        edited("a\nb\nc\n", "a\nb\nc\n", 0);
        edited("a\nb\nc\n", "x\nb\nz\n", 2);
        edited("a\r\nb\r\n", "a\r\n\r\nb\r\n", 1);
        edited("a\n\n\nb", "a\nb\n", 1);
        edited("", "a\n", 1);
        edited("a", "", 1);
    }

    fn hovered(markdown: bool, lines: usize) -> String {
        let blocks = vec![
            Block::Prose("cyclic: `p_φ` is conserved [m_1 * 2]".into()),
            Block::Formulas(vec!["p_φ = m r² φ̇".into(), "F = 0".into()]),
            Block::Prose("azimuth".into()),
        ];
        hover(&Hover { range: 0..1, blocks, quantity: None }, markdown, lines, "swing.least").value
    }

    #[test]
    fn hovers_in_both_forms() {
        assert_eq!(
            hovered(true, 40),
            "cyclic: `p_φ` is conserved \\[m\\_1 \\* 2\\]\n\n```leastwise\np_φ = m r² φ̇\nF = 0\n```\n\nazimuth"
        );
        assert_eq!(
            hovered(false, 40),
            "cyclic: `p_φ` is conserved [m_1 * 2]\n\n    p_φ = m r² φ̇\n    F = 0\n\nazimuth"
        );
    }

    #[test]
    fn a_cut_hover_closes_its_code_and_says_what_shows_all() {
        let cut = hovered(true, 4);
        assert!(cut.ends_with("p_φ = m r² φ̇\n```\n\n… and 4 lines more: `leastwise sheet swing.least`"), "{cut}");
        assert!(!hovered(true, 3).contains("```"));
        assert!(hovered(false, 3).ends_with("… and 3 lines more: leastwise sheet swing.least"));
    }
}
