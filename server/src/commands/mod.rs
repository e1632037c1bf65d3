//! The commands. Each takes its words and the streams, and returns the exit status.

mod check;
mod explain;
mod format;
mod sheet;

use crate::arguments::{Command, Source};
use crate::engine::Engine;
use crate::files::{self, Content, STDIN};
use crate::output::Streams;
use std::io;

/// Does what the command line says.
///
/// # Errors
/// Where an output cannot be written.
pub fn run(command: Command, streams: &mut Streams<'_>) -> io::Result<u8> {
    match command {
        Command::Check { sources, form } => check::run(&sources, form, streams),
        Command::Sheet { source, form, search } => sheet::run(&source, form, search, streams),
        Command::Format { sources, check } => format::run(&sources, check, streams),
        Command::Explain(code) => explain::run(code.as_deref(), streams),
        Command::Lsp => crate::lsp::run(),
        Command::Help(page) => write!(streams.out, "{page}").map(|()| 0),
        Command::Version => writeln!(streams.out, "leastwise {}", env!("CARGO_PKG_VERSION")).map(|()| 0),
    }
}

/// The name under which a source is shown, and what it holds.
fn read(source: &Source, engine: &Engine, streams: &mut Streams<'_>) -> (String, Result<Content, String>) {
    match source {
        Source::Stdin => (STDIN.to_string(), files::read_stream(streams.input).map(files::decode)),
        Source::File(path) => (engine.disk().show(path), files::read(path).map(files::decode)),
    }
}
