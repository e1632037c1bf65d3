//! Findings while they are made: positions relative to their item, so that an item that moves keeps its findings.

use leastwise_grammar::tree::{Severity, Slip, Span};
use std::sync::Arc;

/// A place in the item itself or in the item that declares a name.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) enum Place {
    /// In the same item.
    Here(Span),
    /// In the item that declares this name.
    Declaring(Arc<str>, Span),
    /// Where this name is declared.
    Declaration(Arc<str>),
    /// In another entry.
    Entry(usize, Span),
}

/// A finding in one item.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) struct LocalFinding {
    pub code: &'static str,
    pub severity: Severity,
    pub message: String,
    pub help: Option<String>,
    pub span: Span,
    pub related: Vec<(Place, String)>,
    pub fixes: Vec<LocalFix>,
}

/// A mend.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) struct LocalFix {
    pub title: String,
    pub change: Change,
}

/// What a mend changes.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) enum Change {
    /// Places of the item and their new texts.
    Edits(Vec<(Span, String)>),
    /// A declaration on a line of its own, beside others of its kind, or else before the item.
    Declare(String),
    /// The item goes, or of several names that it declares the one with this number.
    Remove(usize),
    /// The item goes to the top of the file.
    MoveFirst,
}

impl LocalFinding {
    pub fn new(code: &'static str, severity: Severity, span: Span, message: impl Into<String>) -> LocalFinding {
        LocalFinding {
            code,
            severity,
            message: message.into(),
            help: None,
            span,
            related: Vec::new(),
            fixes: Vec::new(),
        }
    }

    pub fn error(code: &'static str, span: Span, message: impl Into<String>) -> LocalFinding {
        LocalFinding::new(code, Severity::Error, span, message)
    }

    pub fn help(mut self, help: impl Into<String>) -> LocalFinding {
        self.help = Some(help.into());
        self
    }

    pub fn related(mut self, place: Place, message: impl Into<String>) -> LocalFinding {
        self.related.push((place, message.into()));
        self
    }

    pub fn fix(self, title: impl Into<String>, span: Span, text: impl Into<String>) -> LocalFinding {
        self.fixes(title, vec![(span, text.into())])
    }

    pub fn fixes(self, title: impl Into<String>, edits: Vec<(Span, String)>) -> LocalFinding {
        self.change(title, Change::Edits(edits))
    }

    pub fn declare(self, line: impl Into<String>) -> LocalFinding {
        let line = line.into();
        self.change(format!("declare `{line}`"), Change::Declare(line))
    }

    pub fn change(mut self, title: impl Into<String>, change: Change) -> LocalFinding {
        self.fixes.push(LocalFix { title: title.into(), change });
        self
    }
}

impl From<&Slip> for LocalFinding {
    fn from(slip: &Slip) -> LocalFinding {
        LocalFinding {
            code: slip.code,
            severity: slip.severity,
            message: slip.message.clone(),
            help: slip.help.clone(),
            span: slip.span,
            related: Vec::new(),
            fixes: slip
                .mends
                .iter()
                .map(|m| LocalFix { title: m.title.clone(), change: Change::Edits(m.edits.clone()) })
                .collect(),
        }
    }
}
