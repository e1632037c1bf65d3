//! `leastwise explain`: what a finding's code stands for.

use crate::engine::{self, Engine};
use crate::lines::Lines;
use crate::output::Streams;
use crate::print::break_lines::prose;
use crate::print::excerpt;
use leastwise_analysis::pages::Page;
use leastwise_grammar::nearest;
use std::io;

/// How the example is called.
const EXAMPLE: &str = "example.least";

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
        if let Some(page) = engine::page(name) {
            example(name, page, streams)?;
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

/// A model with such a finding, as `check` shows it, and what to do.
fn example(code: &str, page: Page, streams: &mut Streams<'_>) -> io::Result<()> {
    let indented = |text: &str| text.lines().map(|l| format!("    {l}").trim_end().to_string()).collect::<Vec<_>>();
    if !page.example.is_empty() {
        let findings = Engine::new().findings(EXAMPLE, page.example);
        let lines = Lines::new(page.example);
        let plain =
            crate::output::Page { width: streams.page.width.saturating_sub(4).max(40), ..crate::output::Page::PLAIN };
        writeln!(streams.out, "\nAn example:\n")?;
        indented(page.example).iter().try_for_each(|l| writeln!(streams.out, "{l}"))?;
        if let Some(finding) = findings.iter().find(|f| f.code == code) {
            writeln!(streams.out, "\n`leastwise check` says:\n")?;
            let shown = excerpt::finding(finding, EXAMPLE, &lines, plain);
            indented(shown.trim_end()).iter().try_for_each(|l| writeln!(streams.out, "{l}"))?;
        }
    }
    if let Some((title, after)) = page.mended {
        writeln!(streams.out, "\nA mend that editors offer: {title}\n")?;
        indented(after).iter().try_for_each(|l| writeln!(streams.out, "{l}"))?;
    }
    if !page.advice.is_empty() {
        writeln!(streams.out)?;
        for line in prose(&format!("What to do: {}.", page.advice), streams.page.width) {
            writeln!(streams.out, "{line}")?;
        }
    }
    Ok(())
}
