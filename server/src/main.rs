//! The program.

mod arguments;
mod commands;
mod engine;
mod files;
mod help;
mod lines;
mod output;
mod print;

use output::{Page, Quiet, Streams};
use std::io::{self, BufWriter, Write};
use std::process::ExitCode;
use std::thread;

/// Bytes of stack for the analysis: models may nest 256 levels deep, and the algebra recurses.
const STACK: usize = 256 << 20;
/// Exit status where the program could not run.
const COULD_NOT_RUN: u8 = 2;

fn main() -> ExitCode {
    // A panic is reported below, in words.
    std::panic::set_hook(Box::new(|_| ()));
    let worker = thread::Builder::new().stack_size(STACK).spawn(run);
    let done = worker.map(thread::JoinHandle::join);
    match done {
        Ok(Ok(code)) => ExitCode::from(code),
        Ok(Err(panic)) => {
            let what = panic.downcast_ref::<String>().map(String::as_str);
            let what = what.or_else(|| panic.downcast_ref::<&str>().copied()).unwrap_or("no details");
            complain(&format!(
                "internal error: {what}\nThis is a defect of leastwise, not of the model; please report it with the file."
            ))
        }
        Err(error) => complain(&format!("no thread for the analysis: {error}")),
    }
}

fn complain(message: &str) -> ExitCode {
    // Nobody is left to tell when even this fails.
    let _ = writeln!(io::stderr(), "leastwise: {message}");
    ExitCode::from(COULD_NOT_RUN)
}

/// Reads the command line and does what it says. The exit status.
fn run() -> u8 {
    let mut out = BufWriter::new(Quiet::new(io::stdout()));
    let mut streams =
        Streams { input: &mut io::stdin(), out: &mut out, err: &mut Quiet::new(io::stderr()), page: Page::of_stdout() };
    let code = arguments::read(std::env::args_os().skip(1))
        .and_then(|command| commands::run(command, &mut streams).map_err(|e| format!("cannot write: {e}")));
    let code = code.unwrap_or_else(|message| {
        let _ = writeln!(streams.err, "leastwise: {message}");
        COULD_NOT_RUN
    });
    match out.flush() {
        Ok(()) => code,
        Err(_) => COULD_NOT_RUN,
    }
}
