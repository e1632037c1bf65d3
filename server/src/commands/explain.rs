//! `leastwise explain`: what a finding's code stands for.

use crate::engine;
use crate::output::Streams;
use crate::print::break_lines::prose;
use leastwise_grammar::nearest;
use std::io;

/// Explains a code, or lists all of them.
pub fn run(code: Option<&str>, streams: &mut Streams<'_>) -> io::Result<u8> {
    let codes = engine::all_codes();
    let Some(code) = code else {
        let column = codes.iter().map(|(name, _)| name.len()).max().unwrap_or(0) + 2;
        for (name, text) in &codes {
            let first = text.split_terminator("\n\n").next().unwrap_or_default();
            for (i, line) in prose(first, streams.page.width.saturating_sub(column).max(20)).iter().enumerate() {
                let head = if i == 0 { name } else { "" };
                writeln!(streams.out, "{head:column$}{line}")?;
            }
        }
        return Ok(0);
    };
    // People copy the brackets along.
    let wanted = code.trim_matches(['[', ']']);
    if let Some((name, text)) = codes.iter().find(|(name, _)| *name == wanted) {
        writeln!(streams.out, "{}\n", streams.page.bold(name))?;
        for paragraph in text.split("\n\n") {
            for line in prose(paragraph, streams.page.width) {
                writeln!(streams.out, "{line}")?;
            }
        }
        return Ok(0);
    }
    let shown: String = wanted.chars().take(60).collect();
    match nearest(&shown, codes.iter().map(|(name, _)| *name)) {
        Some(near) => writeln!(streams.err, "leastwise: no code `{shown}`; did you mean `{near}`?")?,
        None => writeln!(streams.err, "leastwise: no code `{shown}`; `leastwise explain` lists all of them")?,
    }
    Ok(2)
}
