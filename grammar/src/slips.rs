//! Slips as they are made, in a few words each.

use crate::codes;
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
            // A mend that takes the place away takes all of it away; another was of the first character alone.
            last.mends.retain(|m| m.edits.iter().all(|(_, text)| text.is_empty()));
            last.mends.iter_mut().flat_map(|m| &mut m.edits).for_each(|(span, _)| span.end = span.end.max(end));
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

    /// All slips, in the order of the text; those that only follow from another are left out.
    ///
    /// `text` is the item's text.
    pub fn finish(mut self, text: &str) -> Vec<Slip> {
        self.list.sort_by_key(|s| (s.span.start, s.span.end));
        let mut kept: Vec<Slip> = Vec::with_capacity(self.list.len());
        // Behind these the rest of the item is read by guess.
        let unknown = self.has(codes::UNKNOWN_CHARACTER);
        let guessed = unknown || self.has(codes::UNBALANCED_BRACKET);
        for slip in self.list {
            let follows = match slip.code {
                codes::UNBALANCED_BRACKET => unknown || kept.iter().any(|s| s.code == slip.code),
                codes::NESTED_BARS => guessed,
                code if structural(code) => guessed || kept.iter().any(|before| follows(&slip, before, text)),
                _ => false,
            };
            if !follows {
                kept.push(slip);
            }
        }
        kept
    }
}

/// Whether a slip is likely to come from one before it.
fn follows(slip: &Slip, before: &Slip, text: &str) -> bool {
    if before.severity != Severity::Error {
        return false;
    }
    let of_the_whole = matches!(slip.code, codes::TRANSFORMATION_COUNT | codes::MISSING_EQUALS);
    if of_the_whole && structural(before.code) {
        return true;
    }
    let between = text.get(before.span.end as usize..slip.span.start as usize).unwrap_or("");
    between.chars().filter(|c| !c.is_whitespace()).take(2).count() <= 1
}

/// Whether the slip is in how an item is put together, not in a single sign of it.
fn structural(code: &str) -> bool {
    matches!(
        code,
        codes::MISSING_OPERAND
            | codes::MISSING_EQUALS
            | codes::MISSING_NAME
            | codes::MISSING_PART
            | codes::MISSING_SEPARATOR
            | codes::UNEXPECTED
            | codes::VALUE_FORM
            | codes::HEAD_NAME
            | codes::UNIT_IN_FORMULA
            | codes::FUNCTION_ARGUMENT
            | codes::FUNCTION_POWER
            | codes::DERIVATIVE_MARK
            | codes::TRANSFORMATION_COUNT
            | codes::TRANSFORMATION_SOURCE
            | codes::QUOTIENT_UNIT
    )
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
