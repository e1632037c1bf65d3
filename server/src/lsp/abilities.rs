//! What the client can take. Nothing else is sent.

use super::positions::Encoding;
use tower_lsp::ls_types as lsp;

/// What the client said of itself, as far as the server asks.
#[derive(Clone, PartialEq, Debug)]
pub struct Abilities {
    /// How columns are counted.
    pub encoding: Encoding,
    /// It asks for diagnostics itself.
    pub pulls: bool,
    /// It is told when to ask for diagnostics again.
    pub refreshes_diagnostics: bool,
    /// It is told when to ask for hints again.
    pub refreshes_hints: bool,
    /// It is told when to ask for lenses again.
    pub refreshes_lenses: bool,
    /// It shows lenses.
    pub lenses: bool,
    /// It shows how what takes long goes on.
    pub shows_progress: bool,
    /// The server may ask for edits.
    pub applies_edits: bool,
    /// It is told when to ask for tokens again.
    pub refreshes_tokens: bool,
    /// Diagnostics may have related places.
    pub related: bool,
    /// Diagnostics may say that something is not needed.
    pub unnecessary: bool,
    /// Pushed diagnostics may have a version.
    pub versions: bool,
    /// Hovers may be Markdown.
    pub markdown_hover: bool,
    /// Documentation of completions may be Markdown.
    pub markdown_completion: bool,
    /// Completions may have details beside the label.
    pub label_details: bool,
    /// It shows the function around the cursor.
    pub signatures: bool,
    /// Documentation of functions may be Markdown.
    pub markdown_signature: bool,
    /// Arguments in a label may be named by their places.
    pub label_offsets: bool,
    /// Code actions may be more than commands.
    pub code_actions: bool,
    /// One code action may be the preferred one.
    pub preferred: bool,
    /// Edits may name the version that they are for.
    pub document_changes: bool,
    /// Links may have an origin.
    pub links: bool,
    /// The outline may be a tree.
    pub tree: bool,
    /// Settings may be asked for.
    pub configuration: bool,
    /// The server may ask to be told of new settings.
    pub registers_configuration: bool,
    /// The server may ask to be told of changed files.
    pub registers_files: bool,
    /// Renaming can be asked about beforehand.
    pub prepares_rename: bool,
    /// Tooltips of hints may come later.
    pub resolves_hints: bool,
    /// The kinds of completions that it knows, where it says.
    completion_kinds: Option<Vec<lsp::CompletionItemKind>>,
    /// The kinds of symbols that it knows, where it says.
    symbol_kinds: Option<Vec<lsp::SymbolKind>>,
}

/// Kinds that a client knows only if it says so: the protocol's first version had the others.
const LATER_COMPLETIONS: [lsp::CompletionItemKind; 7] = [
    lsp::CompletionItemKind::FOLDER,
    lsp::CompletionItemKind::ENUM_MEMBER,
    lsp::CompletionItemKind::CONSTANT,
    lsp::CompletionItemKind::STRUCT,
    lsp::CompletionItemKind::EVENT,
    lsp::CompletionItemKind::OPERATOR,
    lsp::CompletionItemKind::TYPE_PARAMETER,
];
const LATER_SYMBOLS: [lsp::SymbolKind; 8] = [
    lsp::SymbolKind::OBJECT,
    lsp::SymbolKind::KEY,
    lsp::SymbolKind::NULL,
    lsp::SymbolKind::ENUM_MEMBER,
    lsp::SymbolKind::STRUCT,
    lsp::SymbolKind::EVENT,
    lsp::SymbolKind::OPERATOR,
    lsp::SymbolKind::TYPE_PARAMETER,
];

impl Default for Abilities {
    fn default() -> Abilities {
        Abilities::of(&lsp::ClientCapabilities::default())
    }
}

fn yes(flag: Option<bool>) -> bool {
    flag == Some(true)
}

fn markdown(list: Option<&Vec<lsp::MarkupKind>>) -> bool {
    // The first that is known is preferred.
    list.and_then(|l| l.first()) == Some(&lsp::MarkupKind::Markdown)
}

impl Abilities {
    /// Reads what the client says.
    pub fn of(client: &lsp::ClientCapabilities) -> Abilities {
        let text = client.text_document.clone().unwrap_or_default();
        let work = client.workspace.clone().unwrap_or_default();
        let general = client.general.clone().unwrap_or_default();
        let push = text.publish_diagnostics.clone().unwrap_or_default();
        let item = text.completion.as_ref().and_then(|c| c.completion_item.clone()).unwrap_or_default();
        let action = text.code_action.clone().unwrap_or_default();
        let hints = text.inlay_hint.clone().unwrap_or_default();
        let signature = text.signature_help.as_ref().and_then(|s| s.signature_information.clone()).unwrap_or_default();
        let completion_kinds = text.completion.as_ref().and_then(|c| c.completion_item_kind.clone()?.value_set);
        let symbol_kinds = text.document_symbol.as_ref().and_then(|d| d.symbol_kind.clone()?.value_set);
        Abilities {
            encoding: Encoding::agreed(general.position_encodings.as_deref()),
            pulls: text.diagnostic.is_some(),
            refreshes_diagnostics: yes(work.diagnostics.and_then(|d| d.refresh_support)),
            refreshes_hints: yes(work.inlay_hint.and_then(|d| d.refresh_support)),
            refreshes_lenses: yes(work.code_lens.and_then(|d| d.refresh_support)),
            lenses: text.code_lens.is_some(),
            shows_progress: yes(client.window.as_ref().and_then(|w| w.work_done_progress)),
            applies_edits: yes(work.apply_edit),
            refreshes_tokens: yes(work.semantic_tokens.and_then(|d| d.refresh_support)),
            related: yes(push.related_information),
            unnecessary: push.tag_support.is_some_and(|t| t.value_set.contains(&lsp::DiagnosticTag::UNNECESSARY)),
            versions: yes(push.version_support),
            markdown_hover: markdown(text.hover.and_then(|h| h.content_format).as_ref()),
            markdown_completion: markdown(item.documentation_format.as_ref()),
            label_details: yes(item.label_details_support),
            signatures: text.signature_help.is_some(),
            markdown_signature: markdown(signature.documentation_format.as_ref()),
            label_offsets: yes(signature.parameter_information.and_then(|p| p.label_offset_support)),
            code_actions: action.code_action_literal_support.is_some(),
            preferred: yes(action.is_preferred_support),
            document_changes: yes(work.workspace_edit.and_then(|e| e.document_changes)),
            links: yes(text.definition.and_then(|d| d.link_support)),
            tree: yes(text.document_symbol.and_then(|d| d.hierarchical_document_symbol_support)),
            configuration: yes(work.configuration),
            registers_configuration: yes(work.did_change_configuration.and_then(|d| d.dynamic_registration)),
            registers_files: yes(work.did_change_watched_files.and_then(|d| d.dynamic_registration)),
            prepares_rename: yes(text.rename.and_then(|r| r.prepare_support)),
            resolves_hints: hints.resolve_support.is_some_and(|r| r.properties.iter().any(|p| p == "tooltip")),
            completion_kinds,
            symbol_kinds,
        }
    }

    /// The kind, or none where the client does not know it.
    pub fn completion_kind(&self, kind: lsp::CompletionItemKind) -> Option<lsp::CompletionItemKind> {
        let known = self.completion_kinds.as_ref().map_or(!LATER_COMPLETIONS.contains(&kind), |k| k.contains(&kind));
        known.then_some(kind)
    }

    /// The kind, or that of a variable where the client does not know it.
    pub fn symbol_kind(&self, kind: lsp::SymbolKind) -> lsp::SymbolKind {
        let known = self.symbol_kinds.as_ref().map_or(!LATER_SYMBOLS.contains(&kind), |k| k.contains(&kind));
        if known { kind } else { lsp::SymbolKind::VARIABLE }
    }
}
