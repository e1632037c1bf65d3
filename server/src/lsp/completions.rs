//! Completions, made from the text alone: they never wait for the algebra.

use super::abilities::Abilities;
use super::convert::escaped;
use super::documents::{Document, lock};
use super::positions::Positions;
use leastwise_analysis::features::completion::{Completion, CompletionKind, complete};
use tower_lsp::ls_types as lsp;

/// What can be typed at a position of the newest text.
pub fn answer(document: &Document, abilities: &Abilities, position: lsp::Position) -> lsp::CompletionResponse {
    let snapshot = document.snapshot();
    if snapshot.text.len() > super::worker::MAX_TEXT {
        return lsp::CompletionResponse::List(lsp::CompletionList::default());
    }
    let included = lock(&document.included).clone();
    let positions = Positions::new(snapshot.text.clone(), abilities.encoding);
    let offset = positions.offset(position);
    let found = complete(&snapshot.text, offset, &included);
    let range = positions.range(&found.range);
    let items = found.list.into_iter().enumerate().map(|(k, c)| item(k, c, range, abilities)).collect();
    lsp::CompletionResponse::List(lsp::CompletionList { is_incomplete: found.incomplete, items })
}

fn item(k: usize, c: Completion, range: lsp::Range, abilities: &Abilities) -> lsp::CompletionItem {
    let documentation = c.documentation.map(|text| {
        lsp::Documentation::MarkupContent(if abilities.markdown_completion {
            lsp::MarkupContent { kind: lsp::MarkupKind::Markdown, value: escaped(&text) }
        } else {
            lsp::MarkupContent { kind: lsp::MarkupKind::PlainText, value: text }
        })
    });
    lsp::CompletionItem {
        filter_text: (c.filter != c.label).then_some(c.filter),
        kind: abilities.completion_kind(kind(c.kind)),
        detail: (!c.detail.is_empty()).then_some(c.detail),
        documentation,
        // The order of the list is the one to be shown.
        sort_text: Some(format!("{k:05}")),
        text_edit: Some(lsp::CompletionTextEdit::Edit(lsp::TextEdit { range, new_text: c.insert })),
        label: c.label,
        ..lsp::CompletionItem::default()
    }
}

fn kind(kind: CompletionKind) -> lsp::CompletionItemKind {
    match kind {
        CompletionKind::Keyword => lsp::CompletionItemKind::KEYWORD,
        CompletionKind::Coordinate => lsp::CompletionItemKind::VARIABLE,
        CompletionKind::Parameter => lsp::CompletionItemKind::CONSTANT,
        CompletionKind::Input => lsp::CompletionItemKind::EVENT,
        CompletionKind::Index => lsp::CompletionItemKind::ENUM_MEMBER,
        CompletionKind::Definition => lsp::CompletionItemKind::PROPERTY,
        CompletionKind::Function => lsp::CompletionItemKind::FUNCTION,
        CompletionKind::Constant => lsp::CompletionItemKind::VALUE,
        CompletionKind::Quantity => lsp::CompletionItemKind::TYPE_PARAMETER,
        CompletionKind::Unit => lsp::CompletionItemKind::UNIT,
        CompletionKind::Letter => lsp::CompletionItemKind::TEXT,
        CompletionKind::File => lsp::CompletionItemKind::FILE,
    }
}
