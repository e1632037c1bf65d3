//! `leastwise check`: what is wrong or worth knowing.

use crate::arguments::{CheckForm, Source};
use crate::engine::{self, Engine, NOT_UTF8};
use crate::files::Content;
use crate::output::Streams;
use crate::print::{Outcome, excerpt, findings_json, sarif};
use leastwise_analysis::report::Finding;
use leastwise_grammar::tree::Severity;
use std::io;

/// Checks the files and prints what was found.
pub fn run(sources: &[Source], form: CheckForm, streams: &mut Streams<'_>) -> io::Result<u8> {
    let mut engine = Engine::new();
    let outcomes: Vec<Outcome> = sources.iter().map(|s| check(s, &mut engine, streams)).collect();
    for o in &outcomes {
        if let Some(reason) = &o.unreadable {
            writeln!(streams.err, "leastwise: {}: {reason}", o.path)?;
        }
    }
    match form {
        CheckForm::Text => {
            for o in outcomes.iter().filter(|o| o.unreadable.is_none()) {
                write!(streams.out, "{}", excerpt::findings(o, streams.page))?;
            }
            if outcomes.iter().any(|o| o.unreadable.is_none()) {
                write!(streams.out, "{}", excerpt::summary(&outcomes))?;
            }
        }
        CheckForm::Json => {
            serde_json::to_writer_pretty(&mut *streams.out, &findings_json::report(&outcomes))?;
            writeln!(streams.out)?;
        }
        CheckForm::Sarif => {
            let folder = std::env::current_dir().ok();
            let log = sarif::log(&outcomes, &engine::all_codes(), folder.as_deref());
            serde_json::to_writer_pretty(&mut *streams.out, &log)?;
            writeln!(streams.out)?;
        }
    }
    Ok(status(&outcomes))
}

fn status(outcomes: &[Outcome]) -> u8 {
    let grave = |f: &Finding| matches!(f.severity, Severity::Error | Severity::Warning);
    if outcomes.iter().any(|o| o.unreadable.is_some()) {
        2
    } else if outcomes.iter().flat_map(|o| &o.findings).any(grave) {
        1
    } else {
        0
    }
}

fn check(source: &Source, engine: &mut Engine, streams: &mut Streams<'_>) -> Outcome {
    let (path, content) = super::read(source, engine, streams);
    let (text, findings, unreadable) = match content {
        Ok(Content::Text(text)) => {
            let findings = engine.findings(&path, &text);
            (text, findings, None)
        }
        Ok(Content::Broken(broken)) => {
            let finding = Finding {
                code: NOT_UTF8,
                severity: Severity::Error,
                message: broken.message,
                help: Some(broken.help.to_string()),
                range: broken.offset..broken.offset + char::REPLACEMENT_CHARACTER.len_utf8(),
                related: Vec::new(),
                fixes: Vec::new(),
            };
            (broken.lossy, vec![finding], None)
        }
        Err(reason) => (String::new(), Vec::new(), Some(reason)),
    };
    Outcome { path, text, findings, unreadable }
}
