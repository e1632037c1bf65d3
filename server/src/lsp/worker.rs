//! One thread for each open document. It alone has the document's session: it checks and derives the newest text, tells
//! what it found, and answers what was asked of that text. A change ends what is being derived.

use super::documents::{Document, Snapshot, lock};
use super::overlay::Overlay;
use super::positions::Positions;
use super::shared::Shared;
use super::{answers, convert};
use leastwise_analysis::features::inlay::Inlay;
use leastwise_analysis::report::Finding;
use leastwise_analysis::{Checked, Derived, Session};
use leastwise_grammar::tree::Severity;
use std::collections::VecDeque;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::{Arc, mpsc};
use std::thread;
use tokio::sync::oneshot;
use tower_lsp::jsonrpc::{Error, ErrorCode, Result};
use tower_lsp::ls_types as lsp;

/// Bytes of stack for the analysis: models may nest 256 levels deep, and the algebra recurses.
pub const STACK: usize = 256 << 20;
/// The largest text that is analysed, in bytes.
pub const MAX_TEXT: usize = 16 << 20;

/// What a worker is told.
pub enum Job {
    /// The text has changed, or something that it depends on.
    Changed,
    /// Something is asked of a text.
    Ask(Ask),
    /// The document is closed.
    Close,
}

/// A question.
pub struct Ask {
    /// The change of the document that it is about.
    pub change: u64,
    /// Raised where nobody waits for the answer any more.
    pub cancelled: Arc<AtomicBool>,
    /// What is asked.
    pub question: Question,
}

/// Answers from names and meanings, or is told why it can't.
type AboutNames = Box<dyn FnOnce(Result<&mut View<'_>>) + Send>;
/// Answers from verdicts, or is told why it can't.
type AboutVerdicts = Box<dyn FnOnce(Result<(&mut View<'_>, &Derived)>) + Send>;

/// A question, by what must be known before.
pub enum Question {
    /// Names and meanings.
    Checked(AboutNames),
    /// Verdicts.
    Derived(AboutVerdicts),
}

impl Question {
    fn fail(self, error: Error) {
        match self {
            Question::Checked(answer) => answer(Err(error)),
            Question::Derived(answer) => answer(Err(error)),
        }
    }
}

/// What an answer is made from.
pub struct View<'a> {
    /// The document.
    pub document: &'a Document,
    /// The session that checked it.
    pub session: &'a mut Session,
    /// The model.
    pub checked: &'a Checked,
    /// What was found in its text; with verdicts where they are known.
    pub findings: &'a [Finding],
    /// Its lines.
    pub positions: &'a Positions,
    /// The version of its text.
    pub version: i32,
    /// The number of its change.
    pub change: u64,
    /// What answers leave for later ones.
    pub kept: &'a mut Kept,
    /// The files beside it.
    pub overlay: &'a Overlay,
    /// Settings and abilities.
    pub shared: &'a Shared,
}

/// What answers leave for later ones.
#[derive(Default)]
pub struct Kept {
    /// The hints of the last text that had no error, with that text.
    pub inlays: Option<(Arc<str>, Vec<Inlay>)>,
    /// The last tokens, with their number.
    pub tokens: Option<(u64, Vec<u32>)>,
}

/// Asks a question about the document as it is now. The answer is dropped where the document changes meanwhile.
pub fn ask<T: Send + 'static, Q: FnOnce(oneshot::Sender<Result<T>>) -> Question>(
    document: &Arc<Document>,
    level: Q,
) -> impl Future<Output = Result<T>> + Send + use<T, Q> {
    let (sender, receiver) = oneshot::channel();
    let cancelled = Arc::new(AtomicBool::new(false));
    let question = level(sender);
    let sent = document.send(Job::Ask(Ask { change: document.change(), cancelled: cancelled.clone(), question }));
    let guard = Guard { cancelled, document: document.clone(), armed: true };
    async move {
        let mut guard = guard;
        let answer = if sent { receiver.await.ok() } else { None };
        guard.armed = false;
        answer.unwrap_or_else(|| Err(internal()))
    }
}

/// Raises the flag where the answer is not waited for any more.
struct Guard {
    cancelled: Arc<AtomicBool>,
    document: Arc<Document>,
    armed: bool,
}

impl Drop for Guard {
    fn drop(&mut self) {
        if self.armed {
            self.cancelled.store(true, Ordering::Relaxed);
            // Its answer, should it be under way, ends; another one is begun anew.
            if lock(&self.document.answering).as_ref().is_some_and(|a| Arc::ptr_eq(a, &self.cancelled)) {
                self.document.interrupt.store(true, Ordering::Relaxed);
            }
        }
    }
}

/// A question that needs names and meanings.
pub fn about_names<T: Send + 'static>(
    answer: impl FnOnce(&mut View<'_>) -> Result<T> + Send + 'static,
) -> impl FnOnce(oneshot::Sender<Result<T>>) -> Question {
    move |sender| Question::Checked(Box::new(move |view| drop(sender.send(view.and_then(answer)))))
}

/// A question that needs verdicts.
pub fn about_verdicts<T: Send + 'static>(
    answer: impl FnOnce(&mut View<'_>, &Derived) -> Result<T> + Send + 'static,
) -> impl FnOnce(oneshot::Sender<Result<T>>) -> Question {
    move |sender| {
        Question::Derived(Box::new(move |view| {
            drop(sender.send(view.and_then(|(view, derived)| answer(view, derived))))
        }))
    }
}

/// Starts the thread of a document.
///
/// # Errors
/// Where there is no thread to be had.
pub fn start(document: Arc<Document>, jobs: mpsc::Receiver<Job>, shared: Arc<Shared>) -> std::io::Result<()> {
    let worker = Worker {
        overlay: Overlay::new(shared.documents.clone()),
        session: new_session(&document),
        document,
        shared,
        known: None,
        failed: None,
        kept: Kept::default(),
        asks: VecDeque::new(),
    };
    thread::Builder::new().name("document".into()).stack_size(STACK).spawn(move || worker.run(&jobs)).map(drop)
}

fn new_session(document: &Document) -> Session {
    let mut session = Session::new();
    session.set_interrupt(document.interrupt.clone());
    session
}

/// What is known of a text.
struct Known {
    snapshot: Snapshot,
    positions: Positions,
    checked: Checked,
    derived: Option<Derived>,
    findings: Vec<Finding>,
}

struct Worker {
    document: Arc<Document>,
    shared: Arc<Shared>,
    overlay: Overlay,
    session: Session,
    known: Option<Known>,
    /// The change that could not be looked at.
    failed: Option<u64>,
    kept: Kept,
    asks: VecDeque<Ask>,
}

impl Worker {
    fn run(mut self, jobs: &mpsc::Receiver<Job>) {
        self.round();
        while let Ok(job) = jobs.recv() {
            let mut next = Some(job);
            while let Some(job) = next {
                match job {
                    Job::Changed => {}
                    Job::Ask(ask) => self.asks.push_back(ask),
                    Job::Close => return self.close(),
                }
                next = jobs.try_recv().ok();
            }
            self.round();
        }
    }

    fn close(mut self) {
        for ask in self.asks.drain(..) {
            ask.question.fail(Error::content_modified());
        }
    }

    /// Looks at the newest text, tells what was found and answers what was asked.
    fn round(&mut self) {
        loop {
            let change = self.document.change();
            if self.failed != Some(change) {
                if self.known.as_ref().is_none_or(|k| k.snapshot.change != change) {
                    self.guarded(change, Worker::check);
                    self.answer(false);
                }
                // Lowered before the last look at the change, the flag tells of every later one.
                self.document.interrupt.store(false, Ordering::Relaxed);
                if self.document.change() != change {
                    continue;
                }
                if self.known.as_ref().is_some_and(|k| k.derived.is_none()) {
                    self.guarded(change, Worker::derive);
                }
            }
            self.answer(true);
            let settled = self.known.is_some() || self.failed == Some(change);
            if settled && self.asks.is_empty() && self.document.change() == change {
                return;
            }
        }
    }

    /// Does a step. After a panic nothing is known of this text, and the session begins anew.
    fn guarded(&mut self, change: u64, step: fn(&mut Worker)) {
        if catch_unwind(AssertUnwindSafe(|| step(self))).is_ok() {
            return;
        }
        self.broken();
        self.failed = Some(change);
        if !self.shared.abilities().pulls {
            let snapshot = self.document.snapshot();
            let positions = Positions::new(snapshot.text.clone(), self.shared.abilities().encoding);
            let list = convert::diagnostics(&[answers::defect()], &positions, &self.shared, &self.document.uri);
            self.shared.outbox.diagnostics(&self.document, snapshot.change, snapshot.version, list);
        }
    }

    fn broken(&mut self) {
        let what = crate::last_panic();
        let text = format!("internal error: {what}; this is a defect of leastwise, please report it with the file");
        self.shared.outbox.log(lsp::MessageType::ERROR, text);
        self.session = new_session(&self.document);
        self.known = None;
        self.kept = Kept::default();
    }

    fn check(&mut self) {
        let snapshot = self.document.snapshot();
        // The one before is not needed any more, and takes memory.
        self.known = None;
        let encoding = self.shared.abilities().encoding;
        let text = if snapshot.text.len() > MAX_TEXT { "".into() } else { snapshot.text.clone() };
        let checked = self.session.check(&self.document.path, &text, &self.overlay);
        *lock(&self.document.needed) = self.overlay.take_needed();
        let foreign: Vec<_> = checked.symbols.iter().filter(|s| s.origin.is_some()).cloned().collect();
        *lock(&self.document.included) = foreign.into();
        let positions = Positions::new(snapshot.text.clone(), encoding);
        let mut findings = checked.findings.clone();
        if snapshot.text.len() > MAX_TEXT {
            findings = vec![answers::too_large()];
        }
        self.known = Some(Known { snapshot, positions, checked, derived: None, findings });
    }

    fn derive(&mut self) {
        let Some(known) = &mut self.known else { return };
        let derived = self.session.derive(&known.checked);
        if known.snapshot.text.len() <= MAX_TEXT {
            known.findings = self.session.findings(&known.checked, &derived);
        }
        if self.document.interrupt.load(Ordering::Relaxed) {
            // Half a derivation says nothing. What it left in the memory is whole.
            self.known = None;
            return;
        }
        known.derived = Some(derived);
        let sound = known.checked.complete && !known.findings.iter().any(|f| f.severity == Severity::Error);
        if sound && self.shared.settings().search_run {
            self.shared.searches.order(&self.document, known.snapshot.change);
        }
        if !self.shared.abilities().pulls {
            let list = convert::diagnostics(&known.findings, &known.positions, &self.shared, &self.document.uri);
            self.shared.outbox.diagnostics(&self.document, known.snapshot.change, known.snapshot.version, list);
        }
    }

    /// Answers what can be answered, in the order of asking.
    fn answer(&mut self, derived: bool) {
        let mut later = VecDeque::new();
        while let Some(ask) = self.asks.pop_front() {
            if ask.cancelled.load(Ordering::Relaxed) {
                ask.question.fail(Error::request_cancelled());
                continue;
            }
            if matches!(ask.question, Question::Derived(_)) && !derived {
                later.push_back(ask);
                continue;
            }
            self.document.interrupt.store(false, Ordering::Relaxed);
            let now = self.document.change();
            if ask.change < now {
                ask.question.fail(Error::content_modified());
                continue;
            }
            if self.failed == Some(now) {
                ask.question.fail(internal());
                continue;
            }
            if self.known.as_ref().is_none_or(|k| k.snapshot.change != now) {
                // There will be another round.
                later.push_back(ask);
                continue;
            }
            *lock(&self.document.answering) = Some(ask.cancelled.clone());
            let question = ask.question;
            let done = catch_unwind(AssertUnwindSafe(|| self.tell(question)));
            *lock(&self.document.answering) = None;
            if done.is_err() {
                // The one who asked is told by the lost sender.
                self.broken();
            }
        }
        self.asks = later;
    }

    fn tell(&mut self, question: Question) {
        let Some(known) = &mut self.known else {
            return question.fail(internal());
        };
        let mut view = View {
            document: &self.document,
            session: &mut self.session,
            checked: &known.checked,
            findings: &known.findings,
            positions: &known.positions,
            version: known.snapshot.version,
            change: known.snapshot.change,
            kept: &mut self.kept,
            overlay: &self.overlay,
            shared: &self.shared,
        };
        match (question, &known.derived) {
            (Question::Checked(answer), _) => answer(Ok(&mut view)),
            (Question::Derived(answer), Some(derived)) => answer(Ok((&mut view, derived))),
            (question, None) => question.fail(internal()),
        }
    }
}

/// Something that should not have happened.
pub fn internal() -> Error {
    Error { code: ErrorCode::InternalError, message: "internal error, see the log".into(), data: None }
}
