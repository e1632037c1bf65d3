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

/// A mend with its edits.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) struct LocalFix {
    pub title: String,
    pub edits: Vec<(Span, String)>,
    /// A line to put in before the item.
    pub line_before: Option<String>,
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

    pub fn fix(mut self, title: impl Into<String>, span: Span, text: impl Into<String>) -> LocalFinding {
        self.fixes.push(LocalFix { title: title.into(), edits: vec![(span, text.into())], line_before: None });
        self
    }

    pub fn line(mut self, title: impl Into<String>, line: impl Into<String>) -> LocalFinding {
        self.fixes.push(LocalFix { title: title.into(), edits: Vec::new(), line_before: Some(line.into()) });
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
                .map(|m| LocalFix { title: m.title.clone(), edits: m.edits.clone(), line_before: None })
                .collect(),
        }
    }
}
