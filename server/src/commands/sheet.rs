//! `leastwise sheet`: all that is derived of a model.

use crate::arguments::{SheetForm, Source};
use crate::engine::Engine;
use crate::files::Content;
use crate::lines::Lines;
use crate::output::Streams;
use crate::print::{latex, page, sheet_json};
use leastwise_grammar::tree::Severity;
use std::io;

/// Derives the model and prints the sheet; with a degree, what a search finds, too.
pub fn run(source: &Source, form: SheetForm, search: Option<u32>, streams: &mut Streams<'_>) -> io::Result<u8> {
    let mut engine = Engine::new();
    let (path, content) = super::read(source, &engine, streams);
    let text = match content {
        Ok(Content::Text(text)) => text,
        Ok(Content::Broken(broken)) => {
            writeln!(streams.err, "leastwise: {path}: {}; {}", broken.message, broken.help)?;
            return Ok(2);
        }
        Err(reason) => {
            writeln!(streams.err, "leastwise: {path}: {reason}")?;
            return Ok(2);
        }
    };
    let (mut sheet, findings) = engine.sheet(&path, &text);
    sheet.found = search.and_then(|degree| engine.search(&path, &text, degree));
    let lines = Lines::new(&text);
    match form {
        SheetForm::Text => write!(streams.out, "{}", page::sheet(&sheet, &findings, &lines, streams.page))?,
        SheetForm::Latex => write!(streams.out, "{}", latex::sheet(&sheet, &findings))?,
        SheetForm::Json => {
            serde_json::to_writer_pretty(&mut *streams.out, &sheet_json::sheet(&sheet, &findings, &lines))?;
            writeln!(streams.out)?;
        }
    }
    Ok(u8::from(findings.iter().any(|f| f.severity == Severity::Error)))
}
