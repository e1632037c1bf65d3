//! Findings for people: the message, the lines of the file that it is about, what to do.

use crate::lines::Lines;
use crate::output::Page;
use crate::print::{Outcome, counts};
use annotate_snippets::{Annotation, AnnotationKind, Element, Group, Level, Origin, Renderer, Snippet};
use leastwise_analysis::report::Finding;
use leastwise_grammar::tree::Severity;
use std::fmt::Write;
use std::ops::Range;

/// So many findings of one file are shown; a file with more has one cause or no meaning.
const MOST: usize = 100;
/// A line longer than this is shown in part, in bytes.
const LONG_LINE: usize = 600;
/// Of a long line so much is shown before and behind the place, in bytes.
const AROUND: usize = 100;
/// Places further apart than this are shown apart, in lines.
const NEAR: usize = 200;
/// A place that spans more lines than this is marked at its first line.
const TALL: usize = 8;

/// All findings of a file, one after the other.
pub fn findings(outcome: &Outcome, page: Page) -> String {
    let lines = Lines::new(&outcome.text);
    let mut out = String::new();
    for f in shown(&outcome.findings) {
        out.push_str(&finding(f, &outcome.path, &lines, page));
        out.push_str("\n\n");
    }
    if outcome.findings.len() > MOST {
        let _ = writeln!(out, "… and {} more in {}\n", outcome.findings.len() - MOST, outcome.path);
    }
    out
}

/// The line that ends a check.
pub fn summary(outcomes: &[Outcome]) -> String {
    let read = outcomes.iter().filter(|o| o.unreadable.is_none()).count();
    let files = if read == 1 { "1 file".to_string() } else { format!("{read} files") };
    match counts(outcomes.iter().flat_map(|o| &o.findings)) {
        Some(list) => format!("{list} in {files}\n"),
        None => format!("nothing found in {files}\n"),
    }
}

/// The worst ones where there are too many, in the order of the text.
fn shown(all: &[Finding]) -> Vec<&Finding> {
    let mut list: Vec<(usize, &Finding)> = all.iter().enumerate().collect();
    if list.len() > MOST {
        list.sort_by_key(|(i, f)| (f.severity, *i));
        list.truncate(MOST);
        list.sort_by_key(|(i, _)| *i);
    }
    list.into_iter().map(|(_, f)| f).collect()
}

fn level(severity: Severity) -> Level<'static> {
    match severity {
        Severity::Error => Level::ERROR,
        Severity::Warning => Level::WARNING,
        Severity::Information => Level::INFO,
        Severity::Hint => Level::NOTE.with_name("hint"),
    }
}

/// One finding, without a line break at the end.
pub fn finding(finding: &Finding, path: &str, lines: &Lines<'_>, page: Page) -> String {
    let mut group = level(finding.severity)
        .primary_title(&*finding.message)
        .id(finding.code)
        .elements(excerpts(finding, path, lines));
    if let Some(help) = finding.help.as_deref().or_else(|| finding.fixes.first().map(|f| f.title.as_str())) {
        group = group.element(Level::HELP.message(help));
    }
    render(&[group], page)
}

fn render(report: &[Group<'_>], page: Page) -> String {
    let renderer = if page.color { Renderer::styled() } else { Renderer::plain() };
    renderer.term_width(page.width).render(report)
}

/// A marked place of the text.
struct Mark<'a> {
    range: Range<usize>,
    label: Option<&'a str>,
    primary: bool,
}

impl<'a> Mark<'a> {
    /// The mark in a window of the text.
    fn within(&self, window: &Range<usize>) -> Annotation<'a> {
        let kind = if self.primary { AnnotationKind::Primary } else { AnnotationKind::Context };
        let place = |offset: usize| offset.clamp(window.start, window.end) - window.start;
        kind.span(place(self.range.start)..place(self.range.end)).label(self.label)
    }
}

/// The lines around the finding and its related places: together where they are near, else apart.
fn excerpts<'a>(finding: &'a Finding, path: &'a str, lines: &Lines<'a>) -> Vec<Element<'a>> {
    let first = Mark { range: marked(&finding.range, lines), label: None, primary: true };
    let others = finding.related.iter().map(|r| Mark {
        range: marked(&r.range, lines),
        label: Some(&r.message),
        primary: false,
    });
    let marks: Vec<Mark<'a>> = std::iter::once(first).chain(others).collect();
    let top = marks.iter().map(|m| lines.line_of(m.range.start)).min().unwrap_or(0);
    let bottom = marks.iter().map(|m| lines.line_of(m.range.end)).max().unwrap_or(0);
    let wide = |k: usize| lines.range_of(k).len() > LONG_LINE;
    if bottom - top > NEAR || (top..=bottom).any(wide) {
        return marks.iter().flat_map(|m| apart(m, path, lines)).collect();
    }
    let window = lines.range_of(top).start..lines.range_of(bottom).end;
    let snippet = Snippet::source(&lines.text()[window.clone()]).line_start(top + 1).path(path);
    vec![snippet.annotations(marks.iter().map(|m| m.within(&window))).into()]
}

/// One place with its line, cut where the line is long.
fn apart<'a>(mark: &Mark<'a>, path: &'a str, lines: &Lines<'a>) -> Vec<Element<'a>> {
    let (top, bottom) = (lines.line_of(mark.range.start), lines.line_of(mark.range.end));
    let window = lines.range_of(top).start..lines.range_of(bottom).end;
    if window.len() <= LONG_LINE {
        let snippet = Snippet::source(&lines.text()[window.clone()]).line_start(top + 1).path(path);
        return vec![snippet.annotation(mark.within(&window)).into()];
    }
    let text = lines.text();
    let row = lines.range_of(top);
    let from = text.floor_char_boundary(mark.range.start.saturating_sub(AROUND).max(row.start));
    let to = text.floor_char_boundary(mark.range.end.min(mark.range.start + AROUND) + AROUND).min(row.end);
    let origin = Origin::path(path).line(top + 1).char_column(lines.character(mark.range.start) + 1);
    let snippet = Snippet::source(&text[from..to]).line_start(top + 1);
    vec![origin.into(), snippet.annotation(mark.within(&(from..to))).into()]
}

/// The part of a range that is marked: at least its first line, without the line break.
fn marked(range: &Range<usize>, lines: &Lines<'_>) -> Range<usize> {
    let text = lines.text();
    let start = text.floor_char_boundary(range.start);
    let end = text.floor_char_boundary(range.end.max(range.start));
    let first = lines.line_of(start);
    if lines.line_of(end) - first < TALL {
        return start..end;
    }
    let line = lines.range_of(first);
    start..line.start + text[line.clone()].trim_end().len().max(start - line.start)
}

#[cfg(test)]
mod tests {
    use super::*;
    use leastwise_analysis::report::{Fix, Related};

    /// A finding between the first two `$`, related to what lies between the next two.
    fn fixture(text: &str, help: Option<&str>) -> (String, Finding) {
        let mut places = Vec::new();
        let mut plain = String::new();
        for c in text.chars() {
            if c == '$' { places.push(plain.len()) } else { plain.push(c) }
        }
        let related =
            places.chunks_exact(2).skip(1).map(|p| Related { range: p[0]..p[1], message: "claimed here".into() });
        let found = Finding {
            code: "cyclic-claim",
            severity: Severity::Warning,
            message: "`weight` depends on φ".into(),
            help: help.map(String::from),
            range: places[0]..places[1],
            related: related.collect(),
            fixes: vec![Fix { title: "delete `cyclic`".into(), edits: Vec::new() }],
        };
        (plain, found)
    }

    #[track_caller]
    fn check(text: &str, help: Option<&str>, expected: &str) {
        let (text, found) = fixture(text, help);
        let printed = finding(&found, "tower.least", &Lines::new(&text), Page::PLAIN);
        assert_eq!(printed, expected.trim_start_matches('\n').trim_end(), "\n{printed}\n");
    }

    #[test]
    fn a_finding_shows_its_place_and_the_claim() {
        check(
            "$cyclic coordinate φ$: angle\npotential weight = m g $φ$\n",
            Some("leave `cyclic` out"),
            "
warning[cyclic-claim]: `weight` depends on φ
 --> tower.least:1:1
  |
1 | cyclic coordinate φ: angle
  | ^^^^^^^^^^^^^^^^^^^
2 | potential weight = m g φ
  |                        - claimed here
  |
  = help: leave `cyclic` out",
        );
    }

    #[test]
    fn the_first_fix_is_the_help_where_there_is_none() {
        check(
            "x\n  $θ̇₁$\n",
            None,
            "
warning[cyclic-claim]: `weight` depends on φ
 --> tower.least:2:3
  |
2 |   θ̇₁
  |   ^^
  |
  = help: delete `cyclic`",
        );
    }

    #[test]
    fn an_endless_line_is_cut() {
        let text = format!("potential V = {}$x$ + {}", "x + ".repeat(100_000), "x + ".repeat(100_000));
        let (text, found) = fixture(&text, None);
        let printed = finding(&found, "tower.least", &Lines::new(&text), Page::PLAIN);
        assert!(printed.contains("--> tower.least:1:400015"), "{printed}");
        assert!(printed.len() < 2000, "{}", printed.len());
    }

    #[test]
    fn a_place_at_the_end_and_in_an_empty_file() {
        check(
            "x =$$",
            None,
            "
warning[cyclic-claim]: `weight` depends on φ
 --> tower.least:1:4
  |
1 | x =
  |    ^
  |
  = help: delete `cyclic`",
        );
        let (text, found) = fixture("$$", None);
        assert!(finding(&found, "tower.least", &Lines::new(&text), Page::PLAIN).contains("tower.least"));
    }

    #[test]
    fn too_many_findings_are_counted() {
        let (text, found) = fixture("$x$", None);
        let mut list = vec![found; 150];
        list[149].severity = Severity::Error;
        let outcome = Outcome { path: "a".into(), text, findings: list, unreadable: None };
        let printed = findings(&outcome, Page::PLAIN);
        assert!(printed.contains("… and 50 more in a"), "{printed}");
        assert!(printed.contains("error[cyclic-claim]"), "the worst are among those shown");
        assert_eq!(summary(&[outcome]), "1 error, 149 warnings in 1 file\n");
    }
}
