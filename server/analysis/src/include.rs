//! Included files: read through an interface that the program provides, each once, within bounds.

use crate::codes;
use crate::finding::{Change, LocalFinding};
use leastwise_grammar::tree::{ItemKind, Span};
use std::sync::Arc;

/// Included files are nested at most so deeply.
pub(crate) const MAX_DEPTH: usize = 32;
/// A model takes in at most so many files,
pub(crate) const MAX_FILES: usize = 256;
/// with so many bytes in all.
pub(crate) const MAX_BYTES: usize = 16 << 20;

/// Reads included files.
pub trait Files {
    /// The canonical path and the text of the file that `from` includes as `include`; a message where it cannot be
    /// read. Two includes of one file give the same path.
    fn read(&self, from: &str, include: &str) -> Result<(String, String), String>;
}

/// There are no files.
pub struct NoFiles;

impl Files for NoFiles {
    fn read(&self, _: &str, include: &str) -> Result<(String, String), String> {
        Err(format!("`{include}` is not there"))
    }
}

/// A file that takes part in a model.
#[derive(Clone, Debug)]
pub(crate) struct Source {
    pub path: Arc<str>,
    pub text: Arc<str>,
    /// The file that includes it; 0 for the model's own, which has no other.
    pub parent: usize,
    pub depth: usize,
}

/// What becomes of an `include`.
pub(crate) enum Inclusion {
    /// A file that is new.
    New(Source),
    /// A file that is taken in already: its path.
    Known(Arc<str>),
    /// A finding.
    Refused(LocalFinding),
}

/// Reads what the file `from` includes.
pub(crate) fn include(sources: &[Source], from: usize, file: &str, span: Span, files: &dyn Files) -> Inclusion {
    let refuse =
        |code, message: String, help: &str| Inclusion::Refused(LocalFinding::error(code, span, message).help(help));
    if file.is_empty() {
        return refuse(codes::INCLUDE_FILE, "no file is named".into(), "write include \"FILE.least\"");
    }
    let shown = shortened(file);
    if file.contains('\0') || file.len() > 4096 {
        return refuse(codes::INCLUDE_FILE, format!("`{shown}` is no file name"), "write the name of a model file");
    }
    let source = &sources[from];
    if source.depth >= MAX_DEPTH || sources.len() > MAX_FILES {
        let message = format!("`{shown}` is not taken in: the included files are too many or too deeply nested");
        return refuse(codes::INCLUDE_SIZE, message, "at most 256 files, 32 deep");
    }
    let (path, text) = match files.read(&source.path, file) {
        Ok(read) => read,
        Err(why) => {
            return refuse(
                codes::INCLUDE_FILE,
                format!("`{shown}` cannot be read: {why}"),
                "the name is relative to this file",
            );
        }
    };
    let mut at = from;
    loop {
        if *sources[at].path == *path {
            let message = if at == from {
                format!("`{shown}` includes itself")
            } else {
                format!("`{shown}` includes this file, so this would never end")
            };
            let finding = LocalFinding::error(codes::INCLUDE_CIRCLE, span, message)
                .help("move what both need into a file of its own")
                .change("remove this line", Change::Remove(0));
            return Inclusion::Refused(finding);
        }
        if at == 0 {
            break;
        }
        at = sources[at].parent;
    }
    if let Some(known) = sources.iter().find(|s| *s.path == *path) {
        return Inclusion::Known(known.path.clone());
    }
    let bytes: usize = sources.iter().map(|s| s.text.len()).sum::<usize>() + text.len();
    if bytes > MAX_BYTES {
        let message = format!("`{shown}` is not taken in: the files are too large together");
        return refuse(codes::INCLUDE_SIZE, message, "at most 16 MB");
    }
    Inclusion::New(Source { path: path.into(), text: text.into(), parent: from, depth: source.depth + 1 })
}

/// Whether an item of an included file is taken in.
pub(crate) fn is_taken_in(kind: &ItemKind) -> bool {
    matches!(
        kind,
        ItemKind::Parameter(_)
            | ItemKind::Let { .. }
            | ItemKind::Function { .. }
            | ItemKind::Index { .. }
            | ItemKind::Assume(_)
            | ItemKind::Include { .. }
            | ItemKind::Broken
    )
}

pub(crate) fn shortened(text: &str) -> String {
    if text.chars().count() <= 60 {
        return text.to_owned();
    }
    let head: String = text.chars().take(57).collect();
    format!("{head}…")
}
