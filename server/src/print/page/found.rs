//! What a search found, on the page.

use super::{INDENT, NARROW, Row, Setter, generator};
use crate::print::break_lines::width;
use leastwise_analysis::search::{SearchReport, SearchRow};

impl Setter {
    /// What is new, each with the item that claims it; then what the search covered.
    pub(super) fn found(&mut self, found: Option<&SearchReport>) {
        let Some(found) = found else { return };
        self.section("Also conserved");
        for row in found.news() {
            self.prose(INDENT, &format!("{}: {}", row.name, row.title));
            self.found_row(row);
            self.gap();
        }
        let ansatz = found.ansatz();
        let end = match &found.incomplete {
            None => format!("None other in this ansatz: {ansatz}."),
            Some(why) => format!("There may be others in this ansatz: {ansatz}. It was not searched through: {why}."),
        };
        self.prose(INDENT, &end);
    }

    fn found_row(&mut self, row: &SearchRow) {
        let mut rows = generator(&row.generator);
        if rows.iter().any(|r| width(&r.head) > NARROW) {
            self.rows(2 * INDENT, &std::mem::take(&mut rows));
        }
        rows.extend(row.gauge.as_ref().map(|f| Row::new(self.letters.gauge, f).remark("gauge term")));
        rows.push(Row::new(self.letters.charge, &row.charge));
        self.rows(2 * INDENT, &rows);
        if let Some(source) = &row.source {
            self.prose(2 * INDENT, source);
        }
    }
}

#[cfg(test)]
mod tests {
    use crate::lines::Lines;
    use crate::output::Page;
    use crate::print::fixture;
    use leastwise_analysis::search::SearchReport;

    fn printed(found: SearchReport) -> String {
        let mut sheet = fixture::sheet();
        sheet.found = Some(found);
        let page = super::super::sheet(&sheet, &[], &Lines::new(""), Page::PLAIN);
        page.split_once("Also conserved\n\n").map(|(_, rest)| rest.to_string()).unwrap_or_default()
    }

    #[test]
    fn what_is_new_and_what_was_searched() {
        let expected = "    boost_x: charge of boost_x
        η_x = t
        F   = m x   (gauge term)
        Q   = m (t x' - x)
        symmetry boost_x: x -> x + ε t

    None other in this ansatz: point symmetries of degree 2 in t and the coordinates, trigonometric
    in angles; integrals quadratic in the velocities.
";
        assert_eq!(printed(fixture::found()), expected);
    }

    #[test]
    fn an_empty_search_says_no_more_than_it_knows() {
        let none = SearchReport { items: Vec::new(), ..fixture::found() };
        assert!(printed(none.clone()).starts_with("    None other in this ansatz: "));
        let cut = printed(SearchReport { incomplete: Some("too many unknowns".into()), ..none });
        assert!(
            cut.starts_with("    There may be others") && cut.contains("searched through: too\n    many unknowns."),
            "{cut}"
        );
    }
}
