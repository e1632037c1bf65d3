//! The search for constants of the motion that nobody claimed: one thread for all documents, a while after the last key.
//! A change of the document ends its search; what takes long is told of as it goes.

use super::documents::{Document, lock};
use super::overlay::Overlay;
use super::shared::Shared;
use leastwise_analysis::search::{SearchReport, Stage, search};
use std::collections::HashMap;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::sync::atomic::{AtomicBool, AtomicU64, Ordering};
use std::sync::mpsc::{self, RecvTimeoutError};
use std::sync::{Arc, Mutex};
use std::thread;
use std::time::{Duration, Instant};
use tokio::sync::mpsc::{UnboundedReceiver, UnboundedSender, unbounded_channel};
use tower_lsp::Client;
use tower_lsp::ls_types as lsp;

/// How long a document rests before it is searched.
const REST: Duration = Duration::from_millis(400);
/// Searches that are over sooner are not told of.
const QUIET: Duration = Duration::from_millis(300);
/// How long the client is waited for.
const PATIENCE: Duration = Duration::from_secs(10);

/// What was found in one text of a document.
pub struct Found {
    /// The document's change whose text was searched.
    pub change: u64,
    /// What was found.
    pub report: SearchReport,
}

/// A document to be searched, unless it changes before.
struct Order {
    document: Arc<Document>,
    change: u64,
    due: Instant,
}

/// Where searches are ordered.
pub struct Searches {
    orders: mpsc::Sender<Order>,
    /// The searches that the client is told of, by their tokens, with what ends them.
    told: Mutex<HashMap<String, Arc<AtomicBool>>>,
    tokens: AtomicU64,
    /// Raised by tests, it keeps searches from going on.
    pub hold: AtomicBool,
}

/// Where orders are taken from.
pub struct Orders(mpsc::Receiver<Order>);

/// A new desk for orders.
pub fn searches() -> (Searches, Orders) {
    let (orders, receiver) = mpsc::channel();
    (
        Searches { orders, told: Mutex::default(), tokens: AtomicU64::new(0), hold: AtomicBool::new(false) },
        Orders(receiver),
    )
}

/// How a search goes on.
pub enum Told {
    /// It has come so far.
    Stage(Stage),
    /// It has ended with this.
    End(String),
}

/// A search, for the one who tells the client of it.
pub struct Search {
    flag: Arc<AtomicBool>,
    name: String,
    told: UnboundedReceiver<Told>,
}

impl Searches {
    /// Has a document searched when it has rested for a while.
    pub fn order(&self, document: &Arc<Document>, change: u64) {
        let _ = self.orders.send(Order { document: document.clone(), change, due: Instant::now() + REST });
    }

    /// Ends the search that the client knows under this token.
    pub fn cancel(&self, token: &str) {
        if let Some(flag) = lock(&self.told).get(token) {
            flag.store(true, Ordering::Relaxed);
        }
    }

    /// Waits until the client has been told the end of all that it was told the beginning of.
    pub async fn quiet(&self) {
        for _ in 0..100 {
            if lock(&self.told).is_empty() {
                return;
            }
            tokio::time::sleep(Duration::from_millis(5)).await;
        }
    }
}

/// Starts the thread.
///
/// # Errors
/// Where there is no thread to be had.
pub fn start(orders: Orders, shared: Arc<Shared>) -> std::io::Result<()> {
    thread::Builder::new()
        .name("search".into())
        .stack_size(super::worker::STACK)
        .spawn(move || run(&orders, &shared))
        .map(drop)
}

fn run(orders: &Orders, shared: &Arc<Shared>) {
    let mut waiting: Vec<Order> = Vec::new();
    loop {
        waiting.sort_by_key(|o| o.due);
        let order = match waiting.first().map(|o| o.due.saturating_duration_since(Instant::now())) {
            None => match orders.0.recv() {
                Ok(order) => order,
                Err(_) => return,
            },
            Some(rest) => match orders.0.recv_timeout(rest) {
                Ok(order) => order,
                Err(RecvTimeoutError::Timeout) => {
                    look(&waiting.remove(0), shared);
                    continue;
                }
                Err(RecvTimeoutError::Disconnected) => return,
            },
        };
        // The newest text of each document counts.
        waiting.retain(|o| !Arc::ptr_eq(&o.document, &order.document));
        waiting.push(order);
    }
}

/// Searches a document, unless it has changed.
fn look(order: &Order, shared: &Arc<Shared>) {
    let document = &order.document;
    let flag = Arc::new(AtomicBool::new(false));
    // Every later change raises the flag; an earlier one is seen now.
    *lock(&document.searching) = Some(flag.clone());
    let snapshot = document.snapshot();
    let open = shared.documents.get(&document.uri).is_some_and(|d| Arc::ptr_eq(&d, document));
    let known = lock(&document.found).as_ref().is_some_and(|f| f.change == order.change);
    if open && !known && snapshot.change == order.change && !shared.shut.load(Ordering::Relaxed) {
        let (teller, told) = unbounded_channel();
        let name = document.path.rsplit(['/', '\\']).next().unwrap_or_default().to_string();
        shared.outbox.search(Search { flag: flag.clone(), name, told });
        let degree = u32::try_from(shared.settings().search_degree).unwrap_or(leastwise_analysis::search::DEGREE);
        let overlay = Overlay::new(shared.documents.clone());
        let mut tell = |stage| drop(teller.send(Told::Stage(stage)));
        let done = catch_unwind(AssertUnwindSafe(|| {
            while shared.searches.hold.load(Ordering::Relaxed) && !flag.load(Ordering::Relaxed) {
                thread::sleep(Duration::from_millis(1));
            }
            search(&document.path, &snapshot.text, &overlay, degree, &flag, &mut tell)
        }));
        settle(done, &flag, &teller, order, shared);
    }
    *lock(&document.searching) = None;
}

/// Keeps what was found, and has the client ask for it.
fn settle(
    done: thread::Result<Option<SearchReport>>,
    flag: &AtomicBool,
    teller: &UnboundedSender<Told>,
    order: &Order,
    shared: &Shared,
) {
    let end = match done {
        Err(_) => {
            let what = crate::last_panic();
            let text = format!(
                "internal error in a search: {what}; this is a defect of leastwise, please report it with the file"
            );
            shared.outbox.log(lsp::MessageType::ERROR, text);
            "internal error, see the log".to_string()
        }
        Ok(Some(report)) if !flag.load(Ordering::Relaxed) => {
            let end = match report.news().count() {
                0 if report.incomplete.is_some() => "nothing found, not searched through".to_string(),
                0 => "none other in this ansatz".to_string(),
                n => more(n),
            };
            *lock(&order.document.found) = Some(Arc::new(Found { change: order.change, report }));
            shared.outbox.found();
            end
        }
        Ok(_) => "ended".to_string(),
    };
    let _ = teller.send(Told::End(end));
}

/// `3 more constants of the motion`.
pub fn more(n: usize) -> String {
    if n == 1 { "1 more constant of the motion".into() } else { format!("{n} more constants of the motion") }
}

/// Tells the client how a search goes on, where it can take that. Every beginning has an end.
pub async fn narrate(mut search: Search, client: Client, shared: Arc<Shared>) {
    let quiet = tokio::time::sleep(QUIET);
    tokio::pin!(quiet);
    let mut stage = Stage::Symmetries;
    loop {
        tokio::select! {
            told = search.told.recv() => match told {
                Some(Told::Stage(s)) => stage = s,
                _ => return,
            },
            () = &mut quiet => break,
        }
    }
    let number = shared.searches.tokens.fetch_add(1, Ordering::Relaxed);
    let token = format!("leastwise/search/{number}");
    lock(&shared.searches.told).insert(token.clone(), search.flag.clone());
    let asked = client.create_work_done_progress(lsp::ProgressToken::String(token.clone()));
    let allowed = matches!(tokio::time::timeout(PATIENCE, asked).await, Ok(Ok(())));
    if allowed && !shared.shut.load(Ordering::Relaxed) {
        let title = format!("Searching {}", search.name);
        let progress = client
            .progress(lsp::ProgressToken::String(token.clone()), title)
            .with_message(words(stage))
            .with_cancel_button()
            .begin()
            .await;
        let end = loop {
            match search.told.recv().await {
                Some(Told::Stage(s)) => progress.report_with_message(words(s), Some(true)).await,
                Some(Told::End(end)) => break end,
                None => break "ended".to_string(),
            }
        };
        progress.finish_with_message(end).await;
    }
    lock(&shared.searches.told).remove(&token);
}

fn words(stage: Stage) -> String {
    match stage {
        Stage::Symmetries => "point symmetries".into(),
        Stage::Integrals => "integrals quadratic in the velocities".into(),
        Stage::Confirming(k, n) => format!("proving {k} of {n}"),
    }
}
