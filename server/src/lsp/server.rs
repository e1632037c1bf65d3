//! The handlers. Each takes what it needs before it first waits, hands the work to the document's thread, and waits for
//! the answer; none computes, and none waits for the client.

use super::abilities::Abilities;
use super::documents::Document;
use super::settings::{SECTION, Settings};
use super::shared::Shared;
use super::worker::{self, Job, about_names, about_verdicts, ask};
use super::{answers, completions, convert, found, signatures, tokens};
use std::sync::Arc;
use std::sync::atomic::Ordering;
use std::time::Duration;
use tower_lsp::jsonrpc::{Error, ErrorCode, Result};
use tower_lsp::ls_types::*;
use tower_lsp::{Client, LanguageServer};

/// How long the client is waited for.
const PATIENCE: Duration = Duration::from_secs(10);
/// The command that gives the sheet of a document.
pub const SHEET: &str = "leastwise.sheet";
/// The command that writes into a document what a search found.
pub const WRITE_FOUND: &str = "leastwise.writeFound";

/// The language server.
pub struct Backend {
    client: Client,
    shared: Arc<Shared>,
}

impl Backend {
    /// A server that talks to this client.
    pub fn new(client: Client, shared: Arc<Shared>) -> Backend {
        Backend { client, shared }
    }

    fn document(&self, uri: &Uri) -> Result<Arc<Document>> {
        self.shared
            .documents
            .get(uri)
            .ok_or_else(|| Error::invalid_params(format!("no document is open at {}", uri.as_str())))
    }

    fn open(&self, item: &TextDocumentItem) {
        let (document, jobs) = Document::new(item.uri.clone(), &item.text, item.version);
        let document = Arc::new(document);
        if let Some(old) = self.shared.documents.insert(document.clone()) {
            close(&old);
        }
        if let Err(error) = worker::start(document.clone(), jobs, self.shared.clone()) {
            let text = format!("no thread for {}: {error}", item.uri.as_str());
            self.shared.outbox.log(MessageType::ERROR, text);
        }
        self.shared.touch_dependents(&document);
    }

    /// Takes settings as a client gives them.
    fn configure(shared: &Shared, value: &serde_json::Value) {
        let (settings, wrong) = Settings::read(value);
        for complaint in wrong {
            shared.outbox.log(MessageType::WARNING, format!("setting left out: {complaint}"));
        }
        if shared.set_settings(settings) {
            shared.touch_all();
            shared.outbox.refresh();
        }
    }

    /// Asks the client for the settings, in a task of its own.
    fn pull_settings(&self) {
        let (client, shared) = (self.client.clone(), self.shared.clone());
        tokio::spawn(async move {
            let item = ConfigurationItem { scope_uri: None, section: Some(SECTION.into()) };
            let asked = tokio::time::timeout(PATIENCE, client.configuration(vec![item])).await;
            if let Ok(Ok(values)) = asked
                && let Some(value) = values.first()
                && !value.is_null()
            {
                Backend::configure(&shared, value);
            }
        });
    }

    /// Registers what only some clients can take, in a task of its own.
    fn register(&self) {
        let abilities = self.shared.abilities();
        let mut list = Vec::new();
        if abilities.registers_configuration {
            list.push(Registration {
                id: "configuration".into(),
                method: "workspace/didChangeConfiguration".into(),
                register_options: Some(serde_json::json!({ "section": SECTION })),
            });
        }
        if abilities.registers_files {
            list.push(Registration {
                id: "files".into(),
                method: "workspace/didChangeWatchedFiles".into(),
                register_options: Some(serde_json::json!({ "watchers": [{ "globPattern": "**/*.least" }] })),
            });
        }
        if list.is_empty() {
            return;
        }
        let client = self.client.clone();
        tokio::spawn(async move {
            // A client that refuses says so; the server works without.
            let _ = tokio::time::timeout(PATIENCE, client.register_capability(list)).await;
        });
    }

    /// The client does not want what takes long any more.
    pub async fn cancel_progress(&self, params: WorkDoneProgressCancelParams) {
        if let ProgressToken::String(token) = &params.token {
            self.shared.searches.cancel(token);
        }
    }

    /// Only with the environment variable that tests set: searches wait for the next `false`.
    pub async fn test_hold(&self, params: [bool; 1]) -> Result<()> {
        self.shared.searches.hold.store(params[0], Ordering::Relaxed);
        Ok(())
    }

    /// Only with the environment variable that tests set.
    pub async fn test_panic(&self, params: TextDocumentPositionParams) -> Result<()> {
        let document = self.document(&params.text_document.uri)?;
        #[allow(clippy::panic)]
        let answer = about_names(|_: &mut worker::View<'_>| -> Result<()> { panic!("a planted panic") });
        ask(&document, answer).await
    }
}

fn close(document: &Document) {
    document.interrupt.store(true, Ordering::Relaxed);
    document.end_search();
    document.send(Job::Close);
}

fn capabilities(abilities: &Abilities, offered: bool) -> ServerCapabilities {
    let sync = TextDocumentSyncOptions {
        open_close: Some(true),
        change: Some(TextDocumentSyncKind::INCREMENTAL),
        ..TextDocumentSyncOptions::default()
    };
    let rename = if abilities.prepares_rename {
        OneOf::Right(RenameOptions { prepare_provider: Some(true), work_done_progress_options: Default::default() })
    } else {
        OneOf::Left(true)
    };
    let pull = DiagnosticOptions {
        identifier: Some(SECTION.into()),
        inter_file_dependencies: true,
        workspace_diagnostics: false,
        work_done_progress_options: Default::default(),
    };
    let actions = CodeActionOptions {
        code_action_kinds: Some(vec![CodeActionKind::QUICKFIX, found::KIND]),
        ..CodeActionOptions::default()
    };
    let mut commands = vec![SHEET.into()];
    if abilities.applies_edits {
        commands.push(WRITE_FOUND.into());
    }
    ServerCapabilities {
        position_encoding: offered.then(|| PositionEncodingKind::new(abilities.encoding.name())),
        text_document_sync: Some(TextDocumentSyncCapability::Options(sync)),
        hover_provider: Some(HoverProviderCapability::Simple(true)),
        completion_provider: Some(CompletionOptions {
            trigger_characters: Some(["\\", ":", "["].map(String::from).to_vec()),
            ..CompletionOptions::default()
        }),
        signature_help_provider: abilities.signatures.then(|| SignatureHelpOptions {
            trigger_characters: Some(["(", ","].map(String::from).to_vec()),
            ..SignatureHelpOptions::default()
        }),
        definition_provider: Some(OneOf::Left(true)),
        references_provider: Some(OneOf::Left(true)),
        document_highlight_provider: Some(OneOf::Left(true)),
        document_symbol_provider: Some(OneOf::Left(true)),
        code_action_provider: abilities.code_actions.then_some(CodeActionProviderCapability::Options(actions)),
        code_lens_provider: (abilities.lenses && abilities.applies_edits)
            .then_some(CodeLensOptions { resolve_provider: None }),
        document_formatting_provider: Some(OneOf::Left(true)),
        rename_provider: Some(rename),
        execute_command_provider: Some(ExecuteCommandOptions {
            commands,
            work_done_progress_options: Default::default(),
        }),
        semantic_tokens_provider: Some(SemanticTokensServerCapabilities::SemanticTokensOptions(
            SemanticTokensOptions {
                legend: tokens::legend(),
                range: Some(true),
                full: Some(SemanticTokensFullOptions::Delta { delta: Some(true) }),
                work_done_progress_options: Default::default(),
            },
        )),
        inlay_hint_provider: Some(OneOf::Right(InlayHintServerCapabilities::Options(InlayHintOptions {
            resolve_provider: abilities.resolves_hints.then_some(true),
            work_done_progress_options: Default::default(),
        }))),
        diagnostic_provider: abilities.pulls.then_some(DiagnosticServerCapabilities::Options(pull)),
        ..ServerCapabilities::default()
    }
}

impl LanguageServer for Backend {
    async fn initialize(&self, params: InitializeParams) -> Result<InitializeResult> {
        let abilities = Abilities::of(&params.capabilities);
        let offered = params.capabilities.general.and_then(|g| g.position_encodings).is_some();
        let result = InitializeResult {
            capabilities: capabilities(&abilities, offered),
            server_info: Some(ServerInfo {
                name: env!("CARGO_PKG_NAME").into(),
                version: Some(env!("CARGO_PKG_VERSION").into()),
            }),
            ..InitializeResult::default()
        };
        self.shared.set_abilities(abilities);
        if let Some(options) = &params.initialization_options {
            Backend::configure(&self.shared, options);
        }
        Ok(result)
    }

    async fn initialized(&self, _: InitializedParams) {
        self.register();
        if self.shared.abilities().configuration {
            self.pull_settings();
        }
    }

    async fn shutdown(&self) -> Result<()> {
        self.shared.shut.store(true, Ordering::Relaxed);
        self.shared.stop();
        self.shared.searches.quiet().await;
        Ok(())
    }

    async fn did_open(&self, params: DidOpenTextDocumentParams) {
        self.open(&params.text_document);
    }

    async fn did_change(&self, params: DidChangeTextDocumentParams) {
        let Ok(document) = self.document(&params.text_document.uri) else { return };
        document.edit(params.text_document.version, &params.content_changes, self.shared.abilities().encoding);
        self.shared.touch_dependents(&document);
    }

    async fn did_close(&self, params: DidCloseTextDocumentParams) {
        let Some(document) = self.shared.documents.remove(&params.text_document.uri) else { return };
        close(&document);
        if !self.shared.abilities().pulls {
            self.shared.outbox.closed(params.text_document.uri);
        }
        // From now on the file on the disk counts.
        self.shared.touch_dependents(&document);
    }

    async fn did_change_configuration(&self, params: DidChangeConfigurationParams) {
        if self.shared.abilities().configuration {
            self.pull_settings();
        } else if !params.settings.is_null() {
            Backend::configure(&self.shared, &params.settings);
        }
    }

    async fn did_change_watched_files(&self, params: DidChangeWatchedFilesParams) {
        let shared = self.shared.clone();
        let changed: Vec<_> = params.changes.iter().filter_map(|c| super::documents::file_of(&c.uri)).collect();
        // Looking for links touches the disk.
        tokio::task::spawn_blocking(move || shared.touch_users_of(&changed));
    }

    async fn hover(&self, params: HoverParams) -> Result<Option<Hover>> {
        let place = params.text_document_position_params;
        let document = self.document(&place.text_document.uri)?;
        ask(&document, about_verdicts(move |view, derived| answers::hover(view, derived, place.position))).await
    }

    async fn inlay_hint(&self, params: InlayHintParams) -> Result<Option<Vec<InlayHint>>> {
        let document = self.document(&params.text_document.uri)?;
        ask(&document, about_verdicts(move |view, derived| answers::hints(view, derived, params.range))).await
    }

    async fn inlay_hint_resolve(&self, hint: InlayHint) -> Result<InlayHint> {
        let (uri, kind) = {
            let data = hint.data.as_ref();
            let uri = data.and_then(|d| d.get("uri")).and_then(|u| serde_json::from_value::<Uri>(u.clone()).ok());
            let kind = data.and_then(|d| d.get("kind")).and_then(serde_json::Value::as_u64);
            let (Some(uri), Some(kind)) = (uri, kind) else { return Ok(hint) };
            (uri, kind)
        };
        let Ok(document) = self.document(&uri) else { return Ok(hint) };
        ask(&document, about_verdicts(move |view, derived| answers::resolved(view, derived, hint, kind))).await
    }

    async fn document_symbol(&self, params: DocumentSymbolParams) -> Result<Option<DocumentSymbolResponse>> {
        let document = self.document(&params.text_document.uri)?;
        ask(&document, about_names(answers::symbols)).await
    }

    async fn goto_definition(&self, params: GotoDefinitionParams) -> Result<Option<GotoDefinitionResponse>> {
        let place = params.text_document_position_params;
        let document = self.document(&place.text_document.uri)?;
        ask(&document, about_names(move |view| answers::definition(view, place.position))).await
    }

    async fn references(&self, params: ReferenceParams) -> Result<Option<Vec<Location>>> {
        let place = params.text_document_position;
        let declaration = params.context.include_declaration;
        let document = self.document(&place.text_document.uri)?;
        ask(&document, about_names(move |view| answers::references(view, place.position, declaration))).await
    }

    async fn document_highlight(&self, params: DocumentHighlightParams) -> Result<Option<Vec<DocumentHighlight>>> {
        let place = params.text_document_position_params;
        let document = self.document(&place.text_document.uri)?;
        ask(&document, about_names(move |view| answers::highlights(view, place.position))).await
    }

    async fn semantic_tokens_full(&self, params: SemanticTokensParams) -> Result<Option<SemanticTokensResult>> {
        let document = self.document(&params.text_document.uri)?;
        ask(&document, about_names(tokens::full)).await
    }

    async fn semantic_tokens_full_delta(
        &self,
        params: SemanticTokensDeltaParams,
    ) -> Result<Option<SemanticTokensFullDeltaResult>> {
        let document = self.document(&params.text_document.uri)?;
        let previous = params.previous_result_id;
        ask(&document, about_names(move |view| tokens::delta(view, &previous))).await
    }

    async fn semantic_tokens_range(
        &self,
        params: SemanticTokensRangeParams,
    ) -> Result<Option<SemanticTokensRangeResult>> {
        let document = self.document(&params.text_document.uri)?;
        ask(&document, about_names(move |view| tokens::range(view, params.range))).await
    }

    async fn completion(&self, params: CompletionParams) -> Result<Option<CompletionResponse>> {
        let place = params.text_document_position;
        let document = self.document(&place.text_document.uri)?;
        let shared = self.shared.clone();
        let work = move || completions::answer(&document, shared.abilities(), place.position);
        tokio::task::spawn_blocking(work).await.map(Some).map_err(|_| worker::internal())
    }

    async fn signature_help(&self, params: SignatureHelpParams) -> Result<Option<SignatureHelp>> {
        let place = params.text_document_position_params;
        let document = self.document(&place.text_document.uri)?;
        let shared = self.shared.clone();
        let work = move || signatures::answer(&document, shared.abilities(), place.position);
        tokio::task::spawn_blocking(work).await.map_err(|_| worker::internal())
    }

    async fn formatting(&self, params: DocumentFormattingParams) -> Result<Option<Vec<TextEdit>>> {
        let document = self.document(&params.text_document.uri)?;
        let encoding = self.shared.abilities().encoding;
        let snapshot = document.snapshot();
        let work = move || {
            if snapshot.text.len() > worker::MAX_TEXT {
                return Vec::new();
            }
            let list = convert::line_edits(&snapshot.text, &crate::engine::format(&snapshot.text));
            convert::edits(&list, &super::positions::Positions::new(snapshot.text.clone(), encoding))
        };
        tokio::task::spawn_blocking(work).await.map(Some).map_err(|_| worker::internal())
    }

    async fn code_action(&self, params: CodeActionParams) -> Result<Option<CodeActionResponse>> {
        let document = self.document(&params.text_document.uri)?;
        ask(&document, about_verdicts(move |view, _| answers::code_actions(view, &params))).await
    }

    async fn code_lens(&self, params: CodeLensParams) -> Result<Option<Vec<CodeLens>>> {
        let document = self.document(&params.text_document.uri)?;
        ask(&document, about_verdicts(|view, _| found::lenses(view))).await
    }

    async fn prepare_rename(&self, params: TextDocumentPositionParams) -> Result<Option<PrepareRenameResponse>> {
        let document = self.document(&params.text_document.uri)?;
        ask(&document, about_names(move |view| answers::prepare_rename(view, params.position))).await
    }

    async fn rename(&self, params: RenameParams) -> Result<Option<WorkspaceEdit>> {
        let place = params.text_document_position;
        let document = self.document(&place.text_document.uri)?;
        ask(&document, about_names(move |view| answers::renamed(view, place.position, &params.new_name))).await
    }

    async fn diagnostic(&self, params: DocumentDiagnosticParams) -> Result<DocumentDiagnosticReportResult> {
        let document = self.document(&params.text_document.uri)?;
        let previous = params.previous_result_id;
        ask(&document, about_verdicts(move |view, _| answers::diagnostics(view, previous.as_deref()))).await
    }

    async fn execute_command(&self, params: ExecuteCommandParams) -> Result<Option<LSPAny>> {
        let writes = params.command == WRITE_FOUND && self.shared.abilities().applies_edits;
        if params.command != SHEET && !writes {
            let message = format!("there is no command `{}`", params.command);
            return Err(Error { code: ErrorCode::InvalidParams, message: message.into(), data: None });
        }
        let uri = params.arguments.first().and_then(|u| serde_json::from_value::<Uri>(u.clone()).ok());
        let uri = uri.ok_or_else(|| Error::invalid_params("the command needs the address of a document"))?;
        let document = self.document(&uri)?;
        if !writes {
            return ask(&document, about_verdicts(answers::sheet)).await;
        }
        let edit = ask(&document, about_verdicts(|view, _| Ok(found::all(view)))).await?;
        let edit = edit.ok_or_else(|| answers::refused("nothing was found in the text as it is now".into()))?;
        let client = self.client.clone();
        tokio::spawn(async move {
            // A client that refuses says so.
            let _ = tokio::time::timeout(PATIENCE, client.apply_edit(edit)).await;
        });
        Ok(None)
    }
}
