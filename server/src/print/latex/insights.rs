//! The algebra of charges, discrete symmetries, similarity, idle terms: in the article.

use super::spelling::{escape, symbol};
use super::{Article, Row};
use crate::print::page::insights::{alike, capitalised, scaled};
use crate::print::page::listed;
use leastwise_analysis::insights::{Algebra, AlgebraReport, BracketRow, BracketStatus, Insights};
use std::fmt::Write;

impl Article {
    /// All that was not asked.
    pub(super) fn insights(&mut self, insights: &Insights) {
        if let Some(report) = insights.algebra.as_ref().filter(|a| a.charges.len() > 1) {
            self.algebra(report);
        }
        if !insights.discrete.rows.is_empty() {
            self.section("Discrete symmetries");
            let list = alike(&insights.discrete.rows);
            self.items(list.iter().map(|(maps, answer)| format!("{maps}: {answer}")));
        }
        let sentences = scaled(&insights.similarity);
        if !sentences.is_empty() {
            self.section("Mechanical similarity");
            self.items(sentences.into_iter());
        }
        if !insights.idle.is_empty() {
            self.section("Idle terms");
            self.items(insights.idle.iter().map(|row| format!("In {}: {}.", listed(&row.terms), row.why)));
            self.out.push_str("They change no equation of motion.\n");
        }
    }

    fn items(&mut self, list: impl Iterator<Item = String>) {
        self.out.push_str("\\begin{itemize}\n");
        for text in list {
            let _ = writeln!(self.out, "  \\item {}", raised(&escape(&text)));
        }
        self.out.push_str("\\end{itemize}\n");
    }

    fn algebra(&mut self, report: &AlgebraReport) {
        self.section("Algebra of charges");
        let names: Vec<String> = report.basis().map(|c| format!("${}$", charge(&c.name))).collect();
        let algebra = match &report.algebra {
            Ok(algebra) => algebra,
            Err(why) => {
                let _ = writeln!(self.out, "{}.", escape(&capitalised(why)));
                return;
            }
        };
        let _ = writeln!(self.out, "Independent: {}.", listed(&names));
        let dependent =
            |c: &leastwise_analysis::insights::Constant| Some(Row::new(&charge(&c.name), c.dependent.as_ref()?));
        self.align(&report.charges.iter().filter_map(dependent).collect::<Vec<Row>>());
        if names.len() > 1 {
            self.brackets(algebra);
        }
    }

    fn brackets(&mut self, algebra: &Algebra) {
        if algebra.brackets.is_empty() {
            self.out.push_str("All Poisson brackets vanish.\n\n");
        } else {
            self.out.push_str("Poisson brackets, $\\{q, p\\} = 1$; those not listed vanish:\n");
            let row = |b: &BracketRow| {
                let row = Row::new(&format!("\\{{{}, {}\\}}", charge(&b.left), charge(&b.right)), &b.value);
                let remark = match &b.status {
                    BracketStatus::Closed => "",
                    BracketStatus::Open => " \\quad \\text{(no combination of them)}",
                    BracketStatus::Undecided(_) => " \\quad \\text{(not decided)}",
                };
                Row { tail: remark.into(), ..row }
            };
            self.align(&algebra.brackets.iter().map(row).collect::<Vec<Row>>());
            if !algebra.central.is_empty() {
                let names: Vec<String> = algebra.central.iter().map(|n| format!("${}$", charge(n))).collect();
                let _ = writeln!(self.out, "Centre: {}.\n", listed(&names));
            }
            let constants: Vec<String> = algebra.central_constants.iter().map(|f| format!("${}$", f.latex)).collect();
            if !constants.is_empty() {
                let what = if constants.len() == 1 { "Central charge" } else { "Central charges" };
                let _ = writeln!(self.out, "{what}: {}.\n", listed(&constants));
            }
        }
        if let Some(sentence) = algebra.sentence() {
            let _ = writeln!(self.out, "{}\n", escape(&sentence));
        }
        if algebra.forced {
            self.out.push_str("The brackets are those of $L$; forces act beside it.\n");
        }
    }
}

/// Exponents in parentheses, `λ^(3/2)`, raised.
fn raised(text: &str) -> String {
    let mut pieces = text.split("\\textasciicircum{}(");
    let mut out = pieces.next().unwrap_or_default().to_owned();
    for piece in pieces {
        match piece.split_once(')') {
            Some((exponent, rest)) => {
                let _ = write!(out, "\\ensuremath{{^{{{exponent}}}}}{rest}");
            }
            None => {
                let _ = write!(out, "\\textasciicircum{{}}({piece}");
            }
        }
    }
    out
}

/// A charge's name: that of a momentum as the symbol it is.
fn charge(name: &str) -> String {
    match name.strip_prefix("p_") {
        Some(q) => format!("p_{{{}}}", symbol(q)),
        None => symbol(name),
    }
}
