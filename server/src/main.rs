//! The program.

mod arguments;
mod commands;
mod engine;
mod files;
mod help;
mod lines;
mod lsp;
mod output;
mod print;

use output::{Page, Quiet, Streams};
use std::io::{self, BufWriter, Write};
use std::process::ExitCode;
use std::sync::Mutex;
use std::thread;

/// Bytes of stack for the analysis: models may nest 256 levels deep, and the algebra recurses.
const STACK: usize = 256 << 20;
/// Exit status where the program could not run.
const COULD_NOT_RUN: u8 = 2;

/// What a panic said and where, for the report below.
static PANIC: Mutex<String> = Mutex::new(String::new());

fn main() -> ExitCode {
    std::panic::set_hook(Box::new(|panic| {
        if let Ok(mut text) = PANIC.lock() {
            let place = panic.location().map(|l| format!(" ({}:{})", l.file(), l.line())).unwrap_or_default();
            *text = format!("{}{place}", panic.payload_as_str().unwrap_or("no details"));
        }
    }));
    let worker = thread::Builder::new().stack_size(STACK).spawn(run);
    match worker.map(thread::JoinHandle::join) {
        Ok(Ok(code)) => ExitCode::from(code),
        Ok(Err(_)) => {
            let what = last_panic();
            complain(&format!(
                "internal error: {what}\nThis is a defect of leastwise, not of the model; please report it with the file."
            ))
        }
        Err(error) => complain(&format!("no thread for the analysis: {error}")),
    }
}

/// What the last panic said, and where.
fn last_panic() -> String {
    PANIC.lock().map(|text| text.clone()).unwrap_or_default()
}

fn complain(message: &str) -> ExitCode {
    // Nobody is left to tell when even this fails.
    let _ = writeln!(io::stderr(), "leastwise: {message}");
    ExitCode::from(COULD_NOT_RUN)
}

/// Reads the command line and does what it says. The exit status.
fn run() -> u8 {
    let mut out = BufWriter::new(Quiet::new(io::stdout()));
    let mut err = Quiet::new(io::stderr());
    let mut streams = Streams { input: &mut io::stdin(), out: &mut out, err: &mut err, page: Page::of_stdout() };
    let unwritten = |e: io::Error| format!("cannot write: {e}");
    let done = arguments::read(std::env::args_os().skip(1)).and_then(|command| {
        let code = commands::run(command, &mut streams).map_err(unwritten)?;
        streams.out.flush().map_err(unwritten).map(|()| code)
    });
    done.unwrap_or_else(|message| {
        // Nobody is left to tell when even this fails.
        let _ = writeln!(err, "leastwise: {message}");
        COULD_NOT_RUN
    })
}
