//! The open documents: their texts, as the editor has them.

use super::outbox::Waiting;
use super::positions::Encoding;
use super::searches::Found;
use super::worker::Job;
use leastwise_analysis::checked::SymbolRow;
use ropey::Rope;
use std::collections::{HashMap, HashSet};
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::{Arc, Mutex, MutexGuard, PoisonError, mpsc};
use tower_lsp::ls_types::{self as lsp, Uri};

/// Locks; what a panic left behind is taken as it is.
pub fn lock<T>(mutex: &Mutex<T>) -> MutexGuard<'_, T> {
    mutex.lock().unwrap_or_else(PoisonError::into_inner)
}

/// An open document.
pub struct Document {
    /// Its address.
    pub uri: Uri,
    /// Its file's path; the address itself where it is no file.
    pub path: String,
    /// The same without symbolic links, where there is a file.
    pub real: Option<PathBuf>,
    state: Mutex<State>,
    /// Ends what is being derived.
    pub interrupt: Arc<AtomicBool>,
    inbox: mpsc::Sender<Job>,
    /// The files that the last check looked for.
    pub needed: Mutex<HashSet<PathBuf>>,
    /// The names that the last check took from other files.
    pub included: Mutex<Arc<[SymbolRow]>>,
    /// Diagnostics that wait to be told.
    pub waiting: Waiting,
    /// The flag of the question that is being answered.
    pub answering: Mutex<Option<Arc<AtomicBool>>>,
    /// The flag of the search that is under way.
    pub searching: Mutex<Option<Arc<AtomicBool>>>,
    /// What the last search found.
    pub found: Mutex<Option<Arc<Found>>>,
}

struct State {
    rope: Rope,
    version: i32,
    /// Grows with every change of the text and of what it depends on.
    change: u64,
    text: Option<Arc<str>>,
}

/// A document's text at one moment.
#[derive(Clone)]
pub struct Snapshot {
    /// The text.
    pub text: Arc<str>,
    /// The version that the editor gave it.
    pub version: i32,
    /// The number of the change.
    pub change: u64,
}

impl Document {
    /// A document that was just opened, and what its worker listens to.
    pub fn new(uri: Uri, text: &str, version: i32) -> (Document, mpsc::Receiver<Job>) {
        let file = file_of(&uri);
        let path = file.as_ref().map_or_else(|| uri.as_str().to_string(), |p| p.to_string_lossy().into_owned());
        let (inbox, jobs) = mpsc::channel();
        let document = Document {
            real: file.and_then(|p| std::fs::canonicalize(p).ok()),
            uri,
            path,
            state: Mutex::new(State { rope: Rope::from_str(text), version, change: 0, text: None }),
            interrupt: Arc::new(AtomicBool::new(false)),
            inbox,
            needed: Mutex::default(),
            included: Mutex::new(Arc::new([])),
            waiting: Waiting::default(),
            answering: Mutex::default(),
            searching: Mutex::default(),
            found: Mutex::default(),
        };
        (document, jobs)
    }

    /// Applies an editor's changes in order.
    pub fn edit(&self, version: i32, changes: &[lsp::TextDocumentContentChangeEvent], encoding: Encoding) {
        let mut state = lock(&self.state);
        for change in changes {
            match change.range {
                None => state.rope = Rope::from_str(&change.text),
                Some(range) => {
                    let (a, b) = (at(&state.rope, range.start, encoding), at(&state.rope, range.end, encoding));
                    let (start, end) = (a.min(b), a.max(b));
                    state.rope.remove(start..end);
                    state.rope.insert(start, &change.text);
                }
            }
        }
        state.version = version;
        state.text = None;
        state.change += 1;
        drop(state);
        self.wake();
    }

    /// Has it looked at anew because something that it depends on has changed.
    pub fn touch(&self) {
        lock(&self.state).change += 1;
        self.wake();
    }

    /// Ends the search that is under way.
    pub fn end_search(&self) {
        if let Some(flag) = &*lock(&self.searching) {
            flag.store(true, Ordering::Relaxed);
        }
    }

    fn wake(&self) {
        self.interrupt.store(true, Ordering::Relaxed);
        self.end_search();
        self.send(Job::Changed);
    }

    /// Gives the worker a job. Whether there is a worker.
    pub fn send(&self, job: Job) -> bool {
        self.inbox.send(job).is_ok()
    }

    /// The text as it is now.
    pub fn snapshot(&self) -> Snapshot {
        let mut state = lock(&self.state);
        let text = match &state.text {
            Some(text) => text.clone(),
            None => {
                let text: Arc<str> = state.rope.to_string().into();
                state.text = Some(text.clone());
                text
            }
        };
        Snapshot { text, version: state.version, change: state.change }
    }

    /// The number of the last change.
    pub fn change(&self) -> u64 {
        lock(&self.state).change
    }
}

/// The file that an address names.
pub fn file_of(uri: &Uri) -> Option<PathBuf> {
    let is_file = uri.as_str().get(..5).is_some_and(|scheme| scheme.eq_ignore_ascii_case("file:"));
    is_file.then(|| uri.to_file_path().map(|p| p.into_owned())).flatten()
}

/// The character at a position. Past the end of a line it is the line's end, past the last line the end of the text.
fn at(rope: &Rope, position: lsp::Position, encoding: Encoding) -> usize {
    let line = position.line as usize;
    if line >= rope.len_lines() {
        return rope.len_chars();
    }
    let slice = rope.line(line);
    let mut length = slice.len_chars();
    while length > 0 && matches!(slice.char(length - 1), '\n' | '\r') {
        length -= 1;
    }
    let content = slice.slice(..length);
    let column = position.character as usize;
    rope.line_to_char(line)
        + match encoding {
            Encoding::Utf8 => content.byte_to_char(column.min(content.len_bytes())),
            Encoding::Utf16 => content.utf16_cu_to_char(column.min(content.len_utf16_cu())),
            Encoding::Utf32 => column.min(length),
        }
}

/// All open documents.
#[derive(Default)]
pub struct Documents(Mutex<HashMap<Uri, Arc<Document>>>);

impl Documents {
    /// The document at an address.
    pub fn get(&self, uri: &Uri) -> Option<Arc<Document>> {
        lock(&self.0).get(uri).cloned()
    }

    /// Adds a document; the one that was there.
    pub fn insert(&self, document: Arc<Document>) -> Option<Arc<Document>> {
        lock(&self.0).insert(document.uri.clone(), document)
    }

    /// Takes a document out.
    pub fn remove(&self, uri: &Uri) -> Option<Arc<Document>> {
        lock(&self.0).remove(uri)
    }

    /// All of them.
    pub fn all(&self) -> Vec<Arc<Document>> {
        lock(&self.0).values().cloned().collect()
    }

    /// The open document of a file.
    pub fn of_file(&self, path: &Path) -> Option<Arc<Document>> {
        let documents = lock(&self.0);
        let same = documents.values().find(|d| Path::new(&d.path) == path);
        let real = || {
            let real = std::fs::canonicalize(path).ok()?;
            documents.values().find(|d| d.real.as_ref() == Some(&real))
        };
        same.or_else(real).cloned()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn uri() -> Uri {
        "untitled:swing".parse().expect("an address")
    }

    fn position(line: u32, character: u32) -> lsp::Position {
        lsp::Position { line, character }
    }

    /// Replaces the text between two positions.
    #[track_caller]
    fn check(text: &str, from: (u32, u32), to: (u32, u32), new: &str, encoding: Encoding, expected: &str) {
        let (document, _jobs) = Document::new(uri(), text, 1);
        let range = Some(lsp::Range { start: position(from.0, from.1), end: position(to.0, to.1) });
        let change = lsp::TextDocumentContentChangeEvent { range, range_length: None, text: new.into() };
        document.edit(2, &[change], encoding);
        let snapshot = document.snapshot();
        assert_eq!((&*snapshot.text, snapshot.version, snapshot.change), (expected, 2, 1));
    }

    #[test]
    fn edits_in_each_encoding() {
        check("θ̇𝑥y", (0, 4), (0, 5), "z", Encoding::Utf16, "θ̇𝑥z");
        check("θ̇𝑥y", (0, 8), (0, 9), "z", Encoding::Utf8, "θ̇𝑥z");
        check("θ̇𝑥y", (0, 3), (0, 4), "z", Encoding::Utf32, "θ̇𝑥z");
        // Half of a pair is its beginning.
        check("𝑥y", (0, 1), (0, 2), "z", Encoding::Utf16, "zy");
    }

    #[test]
    fn edits_across_lines() {
        check("a\r\nb\r\nc", (0, 1), (1, 0), " ", Encoding::Utf16, "a b\r\nc");
        check("a\rb\nc", (1, 1), (2, 0), "", Encoding::Utf16, "a\rbc");
        check("a\u{2028}b", (0, 2), (0, 3), "", Encoding::Utf16, "a\u{2028}");
        check("a\r\nb", (0, 1), (0, 1), "\r", Encoding::Utf16, "a\r\r\nb");
    }

    #[test]
    fn positions_are_clamped() {
        check("ab\ncd", (0, 99), (0, 100), "!", Encoding::Utf16, "ab!\ncd");
        check("ab", (7, 1), (8, 1), "!", Encoding::Utf8, "ab!");
        check("ab", (0, 2), (0, 1), "", Encoding::Utf32, "a");
        check("a\r\nb", (0, 9), (0, 9), "!", Encoding::Utf8, "a!\r\nb");
    }

    #[test]
    fn several_changes_are_applied_in_order() {
        let (document, _jobs) = Document::new(uri(), "", 1);
        let change = |range: Option<lsp::Range>, text: &str| lsp::TextDocumentContentChangeEvent {
            range,
            range_length: None,
            text: text.into(),
        };
        let here = lsp::Range { start: position(0, 1), end: position(0, 2) };
        document.edit(5, &[change(None, "xyz"), change(Some(here), "—")], Encoding::Utf16);
        assert_eq!(&*document.snapshot().text, "x—z");
    }
}
