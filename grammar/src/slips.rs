//! Slips as they are made, in a few words each.

use crate::tree::{Mend, Severity, Slip, Span};

/// At most so many slips per item: beyond, more messages help nobody.
pub const MOST_SLIPS: usize = 32;

/// The slips of an item while it is read.
#[derive(Default)]
pub struct Slips {
    list: Vec<Slip>,
}

impl Slips {
    /// Adds an error and returns it for help and mends.
    pub fn error(&mut self, code: &'static str, span: Span, message: impl Into<String>) -> &mut Slip {
        self.add(code, Severity::Error, span, message.into())
    }

    /// Adds a hint and returns it for help and mends.
    pub fn hint(&mut self, code: &'static str, span: Span, message: impl Into<String>) -> &mut Slip {
        self.add(code, Severity::Hint, span, message.into())
    }

    fn add(&mut self, code: &'static str, severity: Severity, span: Span, message: String) -> &mut Slip {
        if self.list.len() >= MOST_SLIPS {
            // The last place is overwritten, so that callers need not ask.
            self.list.truncate(MOST_SLIPS - 1);
        }
        self.list.push(Slip { code, severity, message, help: None, span, mends: Vec::new() });
        let last = self.list.len() - 1;
        &mut self.list[last]
    }

    /// Makes the last slip's place longer.
    pub fn extend_last(&mut self, end: u32) {
        if let Some(last) = self.list.last_mut() {
            last.span.end = last.span.end.max(end);
        }
    }

    /// Whether an error touches this place.
    pub fn touches(&self, span: Span) -> bool {
        self.list.iter().any(|s| s.severity == Severity::Error && s.span.start <= span.end && span.start <= s.span.end)
    }

    /// Whether there is an error of this code.
    pub fn has(&self, code: &str) -> bool {
        self.list.iter().any(|s| s.code == code)
    }

    /// Whether there is an error.
    pub fn any_error(&self) -> bool {
        self.list.iter().any(|s| s.severity == Severity::Error)
    }

    /// All slips, in the order of the text.
    pub fn finish(mut self) -> Vec<Slip> {
        self.list.sort_by_key(|s| (s.span.start, s.span.end));
        self.list
    }
}

/// Shorthands to complete a slip.
pub trait Completed {
    /// What to do.
    fn help(&mut self, help: impl Into<String>) -> &mut Self;
    /// A mend that replaces one place.
    fn mend(&mut self, title: impl Into<String>, span: Span, text: impl Into<String>) -> &mut Self;
    /// A mend of several places.
    fn mends(&mut self, title: impl Into<String>, edits: Vec<(Span, String)>) -> &mut Self;
}

impl Completed for Slip {
    fn help(&mut self, help: impl Into<String>) -> &mut Slip {
        self.help = Some(help.into());
        self
    }

    fn mend(&mut self, title: impl Into<String>, span: Span, text: impl Into<String>) -> &mut Slip {
        self.mends(title, vec![(span, text.into())])
    }

    fn mends(&mut self, title: impl Into<String>, edits: Vec<(Span, String)>) -> &mut Slip {
        self.mends.push(Mend { title: title.into(), edits });
        self
    }
}

/// A place of no length.
pub fn point(at: u32) -> Span {
    Span { start: at, end: at }
}
