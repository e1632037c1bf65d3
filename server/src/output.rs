//! Where a command writes, and what its reader can show. Nothing else in the program touches a standard stream.

use std::io::{self, IsTerminal, Read, Write};

/// Columns where the output is not a terminal.
pub const DEFAULT_WIDTH: usize = 100;
/// Narrower pages than this cannot be set.
const LEAST_WIDTH: usize = 40;

/// What the reader of an output can show.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Page {
    /// Whether colours may be used.
    pub color: bool,
    /// Columns.
    pub width: usize,
}

impl Page {
    /// A file or a pipe.
    pub const PLAIN: Page = Page { color: false, width: DEFAULT_WIDTH };

    /// The page behind an output: colours only on a terminal that has them, and never with NO_COLOR.
    pub fn of(terminal: bool, columns: Option<usize>, variable: impl Fn(&str) -> Option<String>) -> Page {
        if !terminal {
            return Page::PLAIN;
        }
        let refused = variable("NO_COLOR").is_some_and(|v| !v.is_empty());
        let dumb = variable("TERM").is_some_and(|v| v == "dumb");
        let width = columns.filter(|c| *c > 0).unwrap_or(DEFAULT_WIDTH).max(LEAST_WIDTH);
        Page { color: !refused && !dumb, width }
    }

    /// The page behind this process's standard output.
    pub fn of_stdout() -> Page {
        let stdout = io::stdout();
        let columns = terminal_size::terminal_size_of(&stdout).map(|(w, _)| usize::from(w.0));
        Page::of(stdout.is_terminal(), columns, |name| std::env::var(name).ok())
    }

    /// The text, emphasised where the page can.
    pub fn bold(&self, text: &str) -> String {
        if self.color { format!("\x1b[1m{text}\x1b[0m") } else { text.to_string() }
    }

    /// The text, held back where the page can.
    pub fn dim(&self, text: &str) -> String {
        if self.color { format!("\x1b[2m{text}\x1b[0m") } else { text.to_string() }
    }
}

/// The streams of one run.
pub struct Streams<'a> {
    /// Standard input.
    pub input: &'a mut dyn Read,
    /// Results.
    pub out: &'a mut dyn Write,
    /// Complaints about the run itself.
    pub err: &'a mut dyn Write,
    /// The page behind `out`.
    pub page: Page,
}

/// A writer that falls silent when nobody reads any more: a closed pipe is no error of ours.
pub struct Quiet<W: Write> {
    inner: W,
    closed: bool,
}

impl<W: Write> Quiet<W> {
    /// Wraps a stream.
    pub fn new(inner: W) -> Quiet<W> {
        Quiet { inner, closed: false }
    }

    fn settle(&mut self, result: io::Result<usize>, whole: usize) -> io::Result<usize> {
        match result {
            Err(e) if e.kind() == io::ErrorKind::BrokenPipe => {
                self.closed = true;
                Ok(whole)
            }
            other => other,
        }
    }
}

impl<W: Write> Write for Quiet<W> {
    fn write(&mut self, bytes: &[u8]) -> io::Result<usize> {
        if self.closed {
            return Ok(bytes.len());
        }
        let result = self.inner.write(bytes);
        self.settle(result, bytes.len())
    }

    fn flush(&mut self) -> io::Result<()> {
        if self.closed {
            return Ok(());
        }
        let result = self.inner.flush().map(|()| 0);
        self.settle(result, 0).map(|_| ())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(terminal: bool, variables: &[(&str, &str)], color: bool) {
        let page =
            Page::of(terminal, Some(80), |name| variables.iter().find(|(n, _)| *n == name).map(|(_, v)| v.to_string()));
        assert_eq!(page.color, color);
        assert_eq!(page.width, if terminal { 80 } else { DEFAULT_WIDTH });
    }

    #[test]
    fn colours_are_for_terminals_that_want_them() {
        check(true, &[("TERM", "xterm-256color")], true);
        check(true, &[("NO_COLOR", "")], true);
        check(true, &[("NO_COLOR", "1")], false);
        check(true, &[("TERM", "dumb")], false);
        check(false, &[("TERM", "xterm-256color")], false);
    }

    #[test]
    fn a_narrow_or_unknown_terminal_still_gets_a_page() {
        assert_eq!(Page::of(true, Some(3), |_| None).width, LEAST_WIDTH);
        assert_eq!(Page::of(true, None, |_| None).width, DEFAULT_WIDTH);
    }

    struct Closed;

    impl Write for Closed {
        fn write(&mut self, _: &[u8]) -> io::Result<usize> {
            Err(io::ErrorKind::BrokenPipe.into())
        }
        fn flush(&mut self) -> io::Result<()> {
            Err(io::ErrorKind::BrokenPipe.into())
        }
    }

    #[test]
    fn a_closed_pipe_is_no_error() {
        let mut out = Quiet::new(Closed);
        assert!(writeln!(out, "a line").is_ok());
        assert!(writeln!(out, "another").is_ok());
        assert!(out.flush().is_ok());
    }
}
