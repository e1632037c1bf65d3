//! Tests of findings: model texts with the expected findings written under the lines that they concern.

use crate::checked::Checked;
use crate::codes;
use crate::database::Session;
use crate::include::{Files, NoFiles};
use crate::report::Finding;
use leastwise_grammar::tree::Severity;

/// Files of a test.
pub(crate) struct Folder(pub &'static [(&'static str, &'static str)]);

impl Files for Folder {
    fn read(&self, _: &str, include: &str) -> Result<(String, String), String> {
        let found = self.0.iter().find(|(name, _)| *name == include.trim_start_matches("./"));
        found.map(|(name, text)| (name.to_string(), text.to_string())).ok_or_else(|| "there is no such file".to_owned())
    }
}

/// Checks a model. Under a line stand the findings on it: `#   ^^^ code: words` with the carets under their range; the message has the words. Hints and warnings are findings like all others.
pub(crate) fn check(text: &str) -> Checked {
    check_in(text, &NoFiles)
}

/// The same with files to include.
pub(crate) fn check_in(text: &str, files: &dyn Files) -> Checked {
    let mut session = Session::new();
    check_with(&mut session, text, files)
}

/// The same in a session.
pub(crate) fn check_with(session: &mut Session, text: &str, files: &dyn Files) -> Checked {
    let (model, expected) = marked(text);
    let checked = session.check("folder/model.least", &model, files);
    compare(&model, &expected, &checked.findings);
    checked
}

/// The same with the findings of the mechanics.
pub(crate) fn judge(text: &str) -> Checked {
    let mut session = Session::new();
    let (model, expected) = marked(text);
    let checked = session.check("folder/model.least", &model, &NoFiles);
    let derived = session.derive(&checked);
    compare(&model, &expected, &session.findings(&checked, &derived));
    checked
}

/// A place and what is expected there.
type Expected = (usize, usize, String);

/// Parts the model from what is written under its lines.
fn marked(text: &str) -> (String, Vec<Expected>) {
    let mut model = String::new();
    let mut expected: Vec<Expected> = Vec::new();
    let mut line_start = 0;
    for line in text.lines() {
        let marked = line.trim_start();
        let rest = marked.strip_prefix('#').unwrap_or(marked).trim_start();
        match rest.starts_with('^').then_some(()) {
            Some(()) => {
                let carets_at = line.chars().take_while(|c| *c != '^').count();
                let carets = line.chars().filter(|c| *c == '^').count();
                let source = model[line_start..].trim_end().to_owned();
                let byte =
                    |column: usize| line_start + source.char_indices().nth(column).map_or(source.len(), |(b, _)| b);
                let message = line[line.rfind('^').map_or(0, |k| k + 1)..].trim().to_owned();
                expected.push((byte(carets_at), byte(carets_at + carets), message));
            }
            None => {
                line_start = model.len();
                model.push_str(line);
                model.push('\n');
            }
        }
    }
    (model, expected)
}

fn compare(model: &str, expected: &[Expected], findings: &[Finding]) {
    // Most fixtures are about something else than quantities, and not careful with them.
    let told = |f: &&Finding| f.code != codes::UNLIKE_QUANTITIES || expected.iter().any(|e| e.2.starts_with(f.code));
    let mut left: Vec<_> = findings.iter().filter(told).collect();
    let shown = |f: &Finding| {
        format!("{:?} {} at {:?} `{}`: {}", f.severity, f.code, f.range, &model[f.range.clone()], f.message)
    };
    for (start, end, message) in expected {
        let (code, words) = message.split_once(':').unwrap_or((message, ""));
        let found =
            left.iter().position(|f| f.range == (*start..*end) && f.code == code && f.message.contains(words.trim()));
        match found {
            Some(k) => drop(left.remove(k)),
            None => panic!(
                "no finding `{message}` at {start}..{end} `{}`; there are\n{}",
                &model[*start..*end],
                findings.iter().map(shown).collect::<Vec<_>>().join("\n")
            ),
        }
    }
    assert!(left.is_empty(), "unexpected findings\n{}", left.into_iter().map(shown).collect::<Vec<_>>().join("\n"));
    for f in findings {
        assert!(crate::codes::explanation(f.code).is_some(), "{} is not in the table of codes", f.code);
        assert!(!f.message.ends_with('.'), "{}", f.message);
    }
}

/// Whether a model has no error.
pub(crate) fn errors(checked: &Checked) -> Vec<String> {
    let wrong = checked.findings.iter().filter(|f| f.severity == Severity::Error);
    wrong.map(|f| format!("{} `{}`: {}", f.code, &checked.text[f.range.clone()], f.message)).collect()
}
