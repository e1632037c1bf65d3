//! `check --as sarif`: SARIF 2.1.0 (OASIS Standard, errata 01), for services that collect findings.

use crate::lines::Lines;
use crate::print::Outcome;
use leastwise_analysis::report::Finding;
use leastwise_grammar::tree::Severity;
use serde_json::{Map, Value, json};
use std::collections::HashMap;
use std::fmt::Write;
use std::ops::Range;
use std::path::Path;

const SCHEMA: &str = "https://docs.oasis-open.org/sarif/sarif/v2.1.0/errata01/os/schemas/sarif-schema-2.1.0.json";

/// The log of one run. `rules` are all codes with their explanations; `folder` is where the run was started.
pub fn log(outcomes: &[Outcome], rules: &[(&'static str, &'static str)], folder: Option<&Path>) -> Value {
    let places: HashMap<&str, usize> = rules.iter().enumerate().map(|(i, (code, _))| (*code, i)).collect();
    let mut results = Vec::new();
    for (k, o) in outcomes.iter().enumerate() {
        let file = Artifact { uri: uri(&o.path, folder), index: k, lines: Lines::new(&o.text) };
        results.extend(o.findings.iter().map(|f| result(f, &file, places.get(f.code).copied())));
    }
    let notes: Vec<Value> = outcomes.iter().filter_map(|o| note(o, folder)).collect();
    json!({
        "$schema": SCHEMA,
        "version": "2.1.0",
        "runs": [{
            "tool": { "driver": {
                "name": "leastwise",
                "version": env!("CARGO_PKG_VERSION"),
                "semanticVersion": env!("CARGO_PKG_VERSION"),
                "rules": rules.iter().map(|(code, text)| rule(code, text)).collect::<Vec<Value>>(),
            }},
            "invocations": [{ "executionSuccessful": notes.is_empty(), "toolExecutionNotifications": notes }],
            "columnKind": "utf16CodeUnits",
            "artifacts": outcomes.iter().map(|o| json!({
                "location": { "uri": uri(&o.path, folder) },
                "sourceLanguage": "leastwise",
            })).collect::<Vec<Value>>(),
            "results": results,
        }],
    })
}

fn rule(code: &str, text: &str) -> Value {
    json!({ "id": code, "shortDescription": { "text": sentence(text) } })
}

/// A file that could not be read, as a notification.
fn note(outcome: &Outcome, folder: Option<&Path>) -> Option<Value> {
    outcome.unreadable.as_ref().map(|reason| {
        json!({
            "level": "error",
            "message": { "text": format!("{}: {reason}", outcome.path) },
            "locations": [{ "physicalLocation": { "artifactLocation": { "uri": uri(&outcome.path, folder) } } }],
        })
    })
}

struct Artifact<'a> {
    uri: String,
    index: usize,
    lines: Lines<'a>,
}

impl Artifact<'_> {
    fn location(&self) -> Value {
        json!({ "uri": self.uri, "index": self.index })
    }

    /// Lines and columns from one; the end column is one past the last.
    fn region(&self, range: &Range<usize>) -> Value {
        let (a, b) = (self.lines.position(range.start), self.lines.position(range.end.max(range.start)));
        json!({ "startLine": a.line + 1, "startColumn": a.column + 1, "endLine": b.line + 1, "endColumn": b.column + 1 })
    }

    fn physical(&self, range: &Range<usize>) -> Value {
        json!({ "artifactLocation": self.location(), "region": self.region(range) })
    }
}

fn result(f: &Finding, file: &Artifact<'_>, rule: Option<usize>) -> Value {
    let text = match &f.help {
        Some(help) => format!("{} {}", sentence(&f.message), sentence(help)),
        None => sentence(&f.message),
    };
    let mut object = Map::new();
    object.insert("ruleId".into(), json!(f.code));
    if let Some(rule) = rule {
        object.insert("ruleIndex".into(), json!(rule));
    }
    object.insert("level".into(), json!(level(f.severity)));
    object.insert("message".into(), json!({ "text": text }));
    object.insert("locations".into(), json!([{ "physicalLocation": file.physical(&f.range) }]));
    if !f.related.is_empty() {
        let place = |(i, r): (usize, &leastwise_analysis::report::Related)| {
            json!({
                "id": i + 1,
                "physicalLocation": file.physical(&r.range),
                "message": { "text": sentence(&r.message) },
            })
        };
        object.insert("relatedLocations".into(), f.related.iter().enumerate().map(place).collect());
    }
    let fixes: Vec<Value> = f.fixes.iter().filter(|x| !x.edits.is_empty()).map(|x| fix(x, file)).collect();
    if !fixes.is_empty() {
        object.insert("fixes".into(), Value::Array(fixes));
    }
    Value::Object(object)
}

fn fix(fix: &leastwise_analysis::report::Fix, file: &Artifact<'_>) -> Value {
    let edit = |(range, text): &(Range<usize>, String)| json!({ "deletedRegion": file.region(range), "insertedContent": { "text": text } });
    json!({
        "description": { "text": sentence(&fix.title) },
        "artifactChanges": [{
            "artifactLocation": file.location(),
            "replacements": fix.edits.iter().map(edit).collect::<Vec<Value>>(),
        }],
    })
}

fn level(severity: Severity) -> &'static str {
    match severity {
        Severity::Error => "error",
        Severity::Warning => "warning",
        Severity::Information | Severity::Hint => "note",
    }
}

/// A message as the standard wants it: ended by a full stop.
fn sentence(text: &str) -> String {
    let text = text.trim_end();
    if text.ends_with(['.', '!', '?']) { text.to_string() } else { format!("{text}.") }
}

/// A path as a URI reference: relative to the folder where the path lies in it, percent-encoded.
fn uri(path: &str, folder: Option<&Path>) -> String {
    let whole = Path::new(path);
    let relative = folder.and_then(|f| whole.strip_prefix(f).ok()).unwrap_or(whole);
    let mut out = String::new();
    if relative.is_absolute() {
        out.push_str("file://");
    }
    let path = relative.to_string_lossy();
    let path = if cfg!(windows) { path.replace('\\', "/") } else { path.into_owned() };
    for byte in path.strip_prefix("./").unwrap_or(&path).bytes() {
        match byte {
            b'a'..=b'z' | b'A'..=b'Z' | b'0'..=b'9' | b'-' | b'.' | b'_' | b'~' | b'/' => out.push(byte as char),
            _ => {
                let _ = write!(out, "%{byte:02X}");
            }
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::print::fixture;

    #[track_caller]
    fn check_uri(path: &str, expected: &str) {
        assert_eq!(uri(path, Some(Path::new("/pier/models"))), expected);
    }

    #[test]
    fn paths_become_relative_references() {
        check_uri("winch.least", "winch.least");
        check_uri("./a b/θ.least", "a%20b/%CE%B8.least");
        check_uri("../site.least", "../site.least");
        check_uri("/pier/models/x.least", "x.least");
        check_uri("/elsewhere/x.least", "file:///elsewhere/x.least");
        check_uri("a:b#c?.least", "a%3Ab%23c%3F.least");
        check_uri("<stdin>", "%3Cstdin%3E");
    }

    #[test]
    fn regions_count_from_one_in_utf16_units() {
        let log = log(&[fixture::outcome()], &[("other", "other"), ("cyclic-claim", "a claim")], None);
        let run = &log["runs"][0];
        let result = &run["results"][0];
        assert_eq!(result["ruleIndex"], 1);
        assert_eq!(run["tool"]["driver"]["rules"][1]["id"], result["ruleId"]);
        let region = &result["locations"][0]["physicalLocation"]["region"];
        assert_eq!(region, &json!({ "startLine": 2, "startColumn": 25, "endLine": 2, "endColumn": 26 }));
        assert_eq!(result["level"], "warning");
        assert_eq!(result["relatedLocations"][0]["id"], 1);
        assert_eq!(run["columnKind"], "utf16CodeUnits");
        assert_eq!(run["invocations"][0]["executionSuccessful"], true);
    }
}
