//! `check --as json`: findings for programs.
//!
//! ```text
//! { "format": "leastwise-findings", "version": 1,
//!   "files": [{ "path", "unreadable": REASON (only then), "findings": [
//!     { "code", "severity": "error|warning|information|hint", "message",
//!       "range": {"start": {"line", "character"}, "end": {…}}, "help" (where there is one),
//!       "related": [{"message", "range"}],
//!       "fixes": [{"title", "edits": [{"range", "text"}]}] }] }] }
//! ```
//! Lines count from zero, characters are UTF-16 code units. Later fields are only ever added.

use crate::lines::Lines;
use crate::print::{Outcome, severity_word};
use leastwise_analysis::report::Finding;
use serde_json::{Map, Value, json};
use std::ops::Range;

/// The object of a whole run.
pub fn report(outcomes: &[Outcome]) -> Value {
    let file = |o: &Outcome| {
        let mut object = Map::new();
        object.insert("path".into(), json!(o.path));
        if let Some(reason) = &o.unreadable {
            object.insert("unreadable".into(), json!(reason));
        }
        object.insert("findings".into(), list(&o.findings, &Lines::new(&o.text)));
        Value::Object(object)
    };
    json!({
        "format": "leastwise-findings",
        "version": 1,
        "files": outcomes.iter().map(file).collect::<Vec<Value>>(),
    })
}

/// The findings of one file.
pub fn list(findings: &[Finding], lines: &Lines<'_>) -> Value {
    findings.iter().map(|f| finding(f, lines)).collect()
}

fn finding(f: &Finding, lines: &Lines<'_>) -> Value {
    let mut object = Map::new();
    object.insert("code".into(), json!(f.code));
    object.insert("severity".into(), json!(severity_word(f.severity)));
    object.insert("message".into(), json!(f.message));
    object.insert("range".into(), range(&f.range, lines));
    if let Some(help) = &f.help {
        object.insert("help".into(), json!(help));
    }
    let related = f.related.iter().map(|r| json!({ "message": r.message, "range": range(&r.range, lines) }));
    object.insert("related".into(), related.collect());
    let edit = |(place, text): &(Range<usize>, String)| json!({ "range": range(place, lines), "text": text });
    let fix = |title: &str, edits: &[(Range<usize>, String)]| json!({ "title": title, "edits": edits.iter().map(edit).collect::<Vec<Value>>() });
    object.insert("fixes".into(), f.fixes.iter().map(|x| fix(&x.title, &x.edits)).collect());
    Value::Object(object)
}

/// A range as the protocol writes it.
pub fn range(bytes: &Range<usize>, lines: &Lines<'_>) -> Value {
    let place = |offset| {
        let p = lines.position(offset);
        json!({ "line": p.line, "character": p.column })
    };
    json!({ "start": place(bytes.start), "end": place(bytes.end.max(bytes.start)) })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::print::fixture;

    #[test]
    fn a_run_with_a_file_that_cannot_be_read() {
        let missing = Outcome {
            path: "none.least".into(),
            text: String::new(),
            findings: Vec::new(),
            unreadable: Some("no such file".into()),
        };
        let report = report(&[fixture::outcome(), missing]);
        assert_eq!(report["version"], 1);
        let first = &report["files"][0]["findings"][0];
        assert_eq!(first["code"], "cyclic-claim");
        assert_eq!(first["severity"], "warning");
        // `φ` behind `𝑚`, which takes two units.
        assert_eq!(first["range"]["start"], json!({ "line": 1, "character": 24 }));
        assert_eq!(first["related"][0]["range"]["start"], json!({ "line": 0, "character": 0 }));
        assert_eq!(first["fixes"][0]["edits"][0]["text"], "");
        assert_eq!(report["files"][1]["unreadable"], "no such file");
        assert!(report["files"][0].get("unreadable").is_none());
    }
}
