//! The algebra of charges, discrete symmetries, similarity, idle terms: on the page.

use super::{INDENT, Row, Setter, listed};
use leastwise_analysis::insights::{
    Algebra, AlgebraReport, BracketStatus, DiscreteReport, DiscreteRow, IdleRow, Insights, Map, SimilarityReport,
};

/// The brackets that are listed at most.
const MOST_BRACKETS: usize = 120;

impl Setter {
    /// All that was not asked.
    pub(super) fn insights(&mut self, insights: &Insights) {
        if let Some(report) = insights.algebra.as_ref().filter(|a| a.charges.len() > 1) {
            self.algebra(report);
        }
        self.discrete(&insights.discrete);
        self.similarity(&insights.similarity);
        self.idle(&insights.idle);
    }

    fn algebra(&mut self, report: &AlgebraReport) {
        self.section("Algebra of charges");
        let names: Vec<String> = report.basis().map(|c| c.name.clone()).collect();
        let algebra = match &report.algebra {
            Ok(algebra) => algebra,
            Err(why) => {
                self.prose(INDENT, &format!("{}.", capitalised(why)));
                return;
            }
        };
        self.prose(INDENT, &format!("Independent: {}.", listed(&names)));
        let rows: Vec<Row> =
            report.charges.iter().filter_map(|c| Some(Row::new(c.name.clone(), c.dependent.as_ref()?))).collect();
        if !rows.is_empty() {
            self.gap();
            self.rows(INDENT, &rows);
        }
        if names.len() > 1 {
            self.gap();
            self.brackets(algebra);
        }
    }

    fn brackets(&mut self, algebra: &Algebra) {
        if algebra.brackets.is_empty() {
            self.prose(INDENT, "All Poisson brackets vanish.");
        } else {
            self.prose(INDENT, "Poisson brackets, {q, p} = 1; those not listed vanish:");
            self.gap();
            let row = |b: &leastwise_analysis::insights::BracketRow| {
                let row = Row::new(format!("{{{}, {}}}", b.left, b.right), &b.value);
                match &b.status {
                    BracketStatus::Closed => row,
                    BracketStatus::Open if algebra.forced => row.remark("no combination of them"),
                    BracketStatus::Open => row.remark("no combination of them; conserved too, by Poisson's theorem"),
                    BracketStatus::Undecided(why) => row.remark(format!("not decided: {why}")),
                }
            };
            let rows: Vec<Row> = algebra.brackets.iter().take(MOST_BRACKETS).map(row).collect();
            self.rows(INDENT, &rows);
            if algebra.brackets.len() > MOST_BRACKETS {
                self.line(INDENT, &format!("and {} more", algebra.brackets.len() - MOST_BRACKETS));
            }
            self.gap();
            if !algebra.central.is_empty() {
                self.prose(INDENT, &format!("Centre: {}.", listed(&algebra.central)));
            }
            let constants: Vec<String> = algebra.central_constants.iter().map(|f| f.text.clone()).collect();
            if !constants.is_empty() {
                let what = if constants.len() == 1 { "Central charge" } else { "Central charges" };
                self.prose(INDENT, &format!("{what}: {}.", listed(&constants)));
            }
        }
        if let Some(sentence) = algebra.sentence() {
            self.prose(INDENT, &sentence);
        }
        if algebra.forced {
            self.prose(INDENT, "The brackets are those of L; forces act beside it.");
        }
    }

    fn discrete(&mut self, report: &DiscreteReport) {
        if report.rows.is_empty() && report.stopped.is_none() {
            return;
        }
        self.section("Discrete symmetries");
        for (maps, answer) in alike(&report.rows) {
            self.prose(INDENT, &format!("{maps}: {answer}"));
        }
        if let Some(why) = &report.stopped {
            self.prose(INDENT, &format!("Not derived: {why}."));
        }
    }

    fn similarity(&mut self, report: &SimilarityReport) {
        let relation = report.relation();
        if report.scalings.is_empty() && relation.is_none() && report.undecided.is_none() {
            return;
        }
        self.section("Mechanical similarity");
        for sentence in scaled(report) {
            self.prose(INDENT, &sentence);
        }
    }

    fn idle(&mut self, rows: &[IdleRow]) {
        if rows.is_empty() {
            return;
        }
        self.section("Idle terms");
        for row in rows {
            self.prose(INDENT, &format!("In {}: {}.", listed(&row.terms), row.why));
        }
        self.prose(INDENT, "They change no equation of motion.");
    }
}

/// Maps with the same answer on one line, in the order of the first of each; single reflections apart from what reverses
/// all.
pub fn alike(rows: &[DiscreteRow]) -> Vec<(String, String)> {
    let mut out: Vec<(Vec<&DiscreteRow>, String)> = Vec::new();
    for row in rows {
        let answer = row.words();
        let single = |r: &DiscreteRow| matches!(r.map, Map::Reflection(_));
        match out.iter_mut().find(|(list, a)| *a == answer && single(row) && list.iter().all(|r| single(r))) {
            Some((list, _)) => list.push(row),
            None => out.push((vec![row], answer)),
        }
    }
    out.into_iter()
        .map(|(list, answer)| {
            let maps: Vec<String> = list.iter().map(|r| r.map.words()).collect();
            let each = if maps.len() > 1 { ", each by itself" } else { "" };
            (format!("{}{each}", maps.join("; ")), answer)
        })
        .collect()
}

/// Scalings, what they imply, and the virial relation, in sentences.
pub fn scaled(report: &SimilarityReport) -> Vec<String> {
    let mut out = Vec::new();
    for s in &report.scalings {
        out.push(match &s.implies {
            Some(what) => format!("{}: {what}.", s.words()),
            None => format!("{}.", s.words()),
        });
    }
    if let Some(why) = &report.undecided {
        out.push(format!("There may be others: {why}."));
    }
    if let Some(relation) = report.relation() {
        out.push(format!(
            "Virial relation of the time averages: {relation}, if the motion is bounded, which is not derived."
        ));
    }
    out
}

/// The first letter as a capital.
pub fn capitalised(text: &str) -> String {
    let mut letters = text.chars();
    let first: String = letters.next().into_iter().flat_map(char::to_uppercase).collect();
    format!("{first}{}", letters.as_str())
}
