//! What a search found, in the article.

use super::spelling::{escape, symbol};
use super::{Article, Letters, Row, letter};
use leastwise_analysis::search::SearchReport;
use std::fmt::Write;

impl Article {
    /// What is new, then what the search covered.
    pub(super) fn found(&mut self, found: Option<&SearchReport>, letters: &Letters) {
        let Some(found) = found else { return };
        self.section("Also conserved");
        for row in found.news() {
            let _ = writeln!(self.out, "\\textbf{{{}}}: {}.", escape(&row.name), escape(&row.title));
            let mut rows = Vec::new();
            for (name, f) in row.generator.iter().filter(|(_, f)| f.plain != "0") {
                let head = if name == "t" { "\\tau".to_string() } else { format!("\\eta_{{{}}}", symbol(name)) };
                rows.push(Row::new(&head, f));
            }
            rows.extend(row.gauge.as_ref().map(|f| Row::new(&letter(letters.gauge), f)));
            rows.push(Row::new(&letter(letters.charge), &row.charge));
            self.align(&rows);
        }
        let ansatz = escape(&found.ansatz());
        let _ = match &found.incomplete {
            None => writeln!(self.out, "None other in this ansatz: {ansatz}."),
            Some(why) => writeln!(
                self.out,
                "There may be others in this ansatz: {ansatz}. It was not searched through: {}.",
                escape(why)
            ),
        };
    }
}

#[cfg(test)]
mod tests {
    use crate::print::fixture;

    #[test]
    fn what_is_new_and_what_was_searched() {
        let mut sheet = fixture::sheet();
        sheet.found = Some(fixture::found());
        let article = super::super::sheet(&sheet, &[]);
        let section = article.split_once("\\section*{Also conserved}\n").map(|(_, rest)| rest).unwrap_or_default();
        let begin =
            "\\textbf{boost\\_x}: charge of boost\\_x.\n\\begin{align*}\n  \\eta_{x} &= t \\\\\n  F &= m \\, x \\\\\n";
        assert!(section.starts_with(begin), "{section}");
        assert!(section.contains("None other in this ansatz: point symmetries of degree 2"), "{section}");
    }
}
