//! How results look: plain data in, text out.

pub mod break_lines;
pub mod excerpt;
pub mod findings_json;
pub mod latex;
pub mod letters;
pub mod page;
pub mod sarif;
pub mod sheet_json;

use leastwise_analysis::report::Finding;
use leastwise_grammar::tree::Severity;

/// A file that was checked, or could not be.
pub struct Outcome {
    /// The name under which it is shown.
    pub path: String,
    /// Its text.
    pub text: String,
    /// What was found, in the order of the text.
    pub findings: Vec<Finding>,
    /// Why it could not be read; then there is no text.
    pub unreadable: Option<String>,
}

/// The word for a severity, as it stands in JSON.
pub fn severity_word(severity: Severity) -> &'static str {
    match severity {
        Severity::Error => "error",
        Severity::Warning => "warning",
        Severity::Information => "information",
        Severity::Hint => "hint",
    }
}

/// `2 errors, 1 warning`, worst first; nothing where there is nothing.
pub fn counts<'a>(findings: impl Iterator<Item = &'a Finding>) -> Option<String> {
    let mut count = [0usize; 4];
    for f in findings {
        count[f.severity as usize] += 1;
    }
    let words = [("error", "errors"), ("warning", "warnings"), ("information", "informations"), ("hint", "hints")];
    let list: Vec<String> = count
        .iter()
        .zip(words)
        .filter(|(n, _)| **n > 0)
        .map(|(n, (one, many))| match (*n, one) {
            (n, "information") => format!("{n} for information"),
            (1, one) => format!("1 {one}"),
            (n, _) => format!("{n} {many}"),
        })
        .collect();
    (!list.is_empty()).then(|| list.join(", "))
}

/// A paragraph of a description.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Paragraph {
    /// Columns that it is set in; a line that the author set in is a paragraph of its own.
    pub indent: usize,
    /// Its words; none for a blank line.
    pub text: String,
}

/// The paragraphs of a comment: lines that were only broken for the file's width are joined.
pub fn paragraphs(description: &str) -> Vec<Paragraph> {
    let mut out: Vec<Paragraph> = Vec::new();
    for line in description.lines() {
        let text = line.trim();
        let indent = (line.chars().count() - line.trim_start().chars().count()).min(8);
        match out.last_mut() {
            Some(last) if indent == 0 && last.indent == 0 && !text.is_empty() && !last.text.is_empty() => {
                last.text.push(' ');
                last.text.push_str(text);
            }
            _ => out.push(Paragraph { indent, text: text.to_string() }),
        }
    }
    out
}

#[cfg(test)]
pub mod fixture;

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn descriptions_are_set_anew() {
        let list = paragraphs("A mass on\na spring.\n\nLook at\n  the first;\n  the second.");
        let texts: Vec<(usize, &str)> = list.iter().map(|p| (p.indent, p.text.as_str())).collect();
        let expected = [(0, "A mass on a spring."), (0, ""), (0, "Look at"), (2, "the first;"), (2, "the second.")];
        assert_eq!(texts, expected);
    }

    #[test]
    fn counts_say_the_worst_first() {
        let finding = |severity| Finding {
            code: "a",
            severity,
            message: String::new(),
            help: None,
            range: 0..0,
            related: Vec::new(),
            fixes: Vec::new(),
        };
        let list = [Severity::Hint, Severity::Error, Severity::Information, Severity::Error].map(finding);
        assert_eq!(counts(list.iter()).as_deref(), Some("2 errors, 1 for information, 1 hint"));
        assert_eq!(counts([].iter()), None);
    }
}
