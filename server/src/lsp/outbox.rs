//! What the server tells without being asked, one after the other, never from inside of a handler.

use super::documents::{Document, lock};
use super::searches::{Search, narrate};
use super::shared::Shared;
use std::sync::atomic::Ordering;
use std::sync::{Arc, Mutex};
use std::time::Duration;
use tokio::sync::mpsc;
use tower_lsp::Client;
use tower_lsp::ls_types as lsp;

/// How long the client is waited for.
const PATIENCE: Duration = Duration::from_secs(10);

/// Something to tell.
enum News {
    /// A document has new diagnostics.
    Diagnostics(Arc<Document>),
    /// A document is closed: it has none any more.
    Closed(lsp::Uri),
    /// For the client's log.
    Log(lsp::MessageType, String),
    /// A search has begun.
    Search(Search),
    /// A search has found something out.
    Found,
    /// What was asked for earlier may have changed without a change of the text.
    Refresh,
}

/// Diagnostics that wait to be told; newer ones take the place of older ones.
#[derive(Default)]
pub struct Waiting(Mutex<Option<(u64, i32, Vec<lsp::Diagnostic>)>>);

/// Where news are put.
#[derive(Clone)]
pub struct Outbox(mpsc::UnboundedSender<News>);

/// Where they are taken from.
pub struct Letters(mpsc::UnboundedReceiver<News>);

/// A new outbox.
pub fn outbox() -> (Outbox, Letters) {
    let (sender, receiver) = mpsc::unbounded_channel();
    (Outbox(sender), Letters(receiver))
}

impl Outbox {
    /// Tells a document's diagnostics, found for one change of it.
    pub fn diagnostics(&self, document: &Arc<Document>, change: u64, version: i32, list: Vec<lsp::Diagnostic>) {
        // One letter per document waits, whatever a slow client lets pile up.
        if lock(&document.waiting.0).replace((change, version, list)).is_none() {
            let _ = self.0.send(News::Diagnostics(document.clone()));
        }
    }

    /// Tells that a document has no diagnostics any more.
    pub fn closed(&self, uri: lsp::Uri) {
        let _ = self.0.send(News::Closed(uri));
    }

    /// Writes into the client's log.
    pub fn log(&self, kind: lsp::MessageType, text: impl Into<String>) {
        let _ = self.0.send(News::Log(kind, text.into()));
    }

    /// Tells how a search goes on.
    pub fn search(&self, search: Search) {
        let _ = self.0.send(News::Search(search));
    }

    /// Tells the client to ask again for what shows the finds of a search.
    pub fn found(&self) {
        let _ = self.0.send(News::Found);
    }

    /// Tells the client to ask again.
    pub fn refresh(&self) {
        let _ = self.0.send(News::Refresh);
    }
}

/// Carries the letters out until there is nobody left to write any.
pub async fn carry(mut letters: Letters, client: Client, shared: Arc<Shared>) {
    while let Some(news) = letters.0.recv().await {
        // After `shutdown` nothing is told any more.
        if shared.shut.load(Ordering::Relaxed) {
            continue;
        }
        match news {
            News::Diagnostics(document) => {
                let Some((change, version, list)) = lock(&document.waiting.0).take() else { continue };
                let open = shared.documents.get(&document.uri).is_some_and(|d| Arc::ptr_eq(&d, &document));
                // What is old is not told; what is new will be.
                if open && document.change() == change {
                    let version = shared.abilities().versions.then_some(version);
                    client.publish_diagnostics(document.uri.clone(), list, version).await;
                }
            }
            News::Closed(uri) => client.publish_diagnostics(uri, Vec::new(), None).await,
            News::Log(kind, text) => client.log_message(kind, text).await,
            News::Search(search) => {
                if shared.abilities().shows_progress {
                    tokio::spawn(narrate(search, client.clone(), shared.clone()));
                }
            }
            News::Found => {
                let client = client.clone();
                let abilities = shared.abilities().clone();
                tokio::spawn(async move {
                    let asked = async {
                        if abilities.refreshes_hints {
                            let _ = client.inlay_hint_refresh().await;
                        }
                        if abilities.refreshes_lenses {
                            let _ = client.code_lens_refresh().await;
                        }
                    };
                    let _ = tokio::time::timeout(PATIENCE, asked).await;
                });
            }
            News::Refresh => {
                let client = client.clone();
                let abilities = shared.abilities().clone();
                tokio::spawn(async move {
                    let asked = async {
                        if abilities.pulls && abilities.refreshes_diagnostics {
                            let _ = client.workspace_diagnostic_refresh().await;
                        }
                        if abilities.refreshes_hints {
                            let _ = client.inlay_hint_refresh().await;
                        }
                        if abilities.refreshes_tokens {
                            let _ = client.semantic_tokens_refresh().await;
                        }
                    };
                    let _ = tokio::time::timeout(PATIENCE, asked).await;
                });
            }
        }
    }
}
