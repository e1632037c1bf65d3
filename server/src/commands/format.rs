//! `leastwise format`: models laid out in the one usual way.

use crate::arguments::Source;
use crate::engine::{self, Engine};
use crate::files::{self, Content, STDIN};
use crate::output::Streams;
use std::io;

/// Formats the files in place, or with `check` names those that would change.
pub fn run(sources: &[Source], check: bool, streams: &mut Streams<'_>) -> io::Result<u8> {
    let engine = Engine::new();
    let (mut failed, mut changes) = (false, false);
    for source in sources {
        let (path, content) = super::read(source, &engine, streams);
        let done = match content {
            Ok(Content::Text(text)) => {
                let formatted = engine::format(&text);
                changes |= formatted != text;
                put(source, &text, &formatted, check, streams)?
            }
            Ok(Content::Broken(broken)) => Err(format!("{}; left as it is", broken.message)),
            Err(reason) => Err(reason),
        };
        if let Err(reason) = done {
            failed = true;
            writeln!(streams.err, "leastwise: {path}: {reason}")?;
        }
    }
    Ok(match (failed, check && changes) {
        (true, _) => 2,
        (false, changed) => u8::from(changed),
    })
}

/// Writes one result where it belongs.
fn put(source: &Source, text: &str, new: &str, check: bool, out: &mut Streams<'_>) -> io::Result<Result<(), String>> {
    match source {
        Source::Stdin if check && new != text => writeln!(out.out, "{STDIN}")?,
        Source::Stdin if check => {}
        Source::Stdin => write!(out.out, "{new}")?,
        Source::File(_) if new == text => {}
        Source::File(path) if check => writeln!(out.out, "{}", path.display())?,
        Source::File(path) => return Ok(files::replace(path, new)),
    }
    Ok(Ok(()))
}
