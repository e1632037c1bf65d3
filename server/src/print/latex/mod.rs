//! `sheet --as latex`: a complete article. Needs amsmath; pdfLaTeX, XeLaTeX and LuaLaTeX all take it.

mod breaking;
mod found;
mod insights;
mod spelling;

use crate::print::letters::Letters;
use crate::print::page::{acting, listed};
use crate::print::paragraphs;
use breaking::{broken, glyphs};
use leastwise_analysis::report::{Answer, CoordinateRow, Finding, Formula, Sheet, Status, SymmetryRow};
use leastwise_grammar::tree::Severity;
use spelling::{escape, symbol};
use std::fmt::Write;

/// What fits on a line, in widths of a letter.
const LINE: f64 = 70.0;
/// A matrix with more columns is listed entry by entry.
const MOST_COLUMNS: usize = 8;
/// Entries that are listed at most.
const MOST_ENTRIES: usize = 400;

const PREAMBLE: &str = r"\documentclass[11pt,a4paper]{article}
\usepackage{iftex}
\ifPDFTeX
  \usepackage[T1]{fontenc}
  \usepackage[utf8]{inputenc}
\else
  \usepackage{fontspec}
\fi
\usepackage[margin=25mm]{geometry}
\usepackage{amsmath}
\allowdisplaybreaks
\setlength{\parindent}{0pt}
\setlength{\parskip}{4pt}
\begin{document}
";

/// The article.
pub fn sheet(sheet: &Sheet, findings: &[Finding]) -> String {
    let mut a = Article { out: PREAMBLE.to_string() };
    let _ = writeln!(a.out, "\\begin{{center}}\n{{\\Large {}}}\n\\end{{center}}", escape(&sheet.system));
    if let Some(description) = &sheet.description {
        a.text(description);
    }
    a.warning(findings);
    if !sheet.terms.is_empty() {
        a.section("Lagrangian");
        let l = letter(Letters::of(sheet).lagrangian);
        a.align(&[Row::new(&l, &sheet.lagrangian)]);
        let term = |t: &leastwise_analysis::report::TermRow| {
            Row::new(&format!("\\text{{{} \\textit{{{}}}}}", t.kind, escape(&t.name)), &t.formula)
        };
        a.align(&sheet.terms.iter().map(term).collect::<Vec<Row>>());
    }
    if !sheet.coordinates.is_empty() {
        a.section("Equations of motion");
        a.align(&sheet.coordinates.iter().map(equation).collect::<Vec<Row>>());
        a.section("Momenta and cyclic coordinates");
        a.align(&sheet.coordinates.iter().map(momentum).collect::<Vec<Row>>());
        a.cyclic(&sheet.coordinates);
        a.section("Mass matrix");
        a.mass_matrix(sheet);
        a.energy(sheet);
    }
    a.symmetries(&sheet.symmetries, &Letters::of(sheet));
    a.constants(sheet);
    a.found(sheet.found.as_ref(), &Letters::of(sheet));
    a.insights(&sheet.insights);
    a.out.push_str("\\end{document}\n");
    a.out
}

/// `head = formula tail`, aligned at the sign.
struct Row {
    head: String,
    sign: &'static str,
    formula: String,
    tail: String,
}

impl Row {
    fn new(head: &str, formula: &Formula) -> Row {
        Row { head: head.to_string(), sign: "=", formula: formula.latex.clone(), tail: String::new() }
    }
}

/// An equation of motion: the sign stands at its end, so that only the left side is aligned.
fn equation(c: &CoordinateRow) -> Row {
    let right = c.reaction.as_ref().map_or("0", |r| r.latex.as_str());
    Row {
        head: format!("{}\\colon\\quad", symbol(&c.name)),
        sign: "",
        formula: c.equation.latex.clone(),
        tail: format!(" = {right}"),
    }
}

fn momentum(c: &CoordinateRow) -> Row {
    Row::new(&format!("p_{{{}}}", symbol(&c.name)), &c.momentum)
}

struct Article {
    out: String,
}

impl Article {
    fn section(&mut self, name: &str) {
        let _ = writeln!(self.out, "\n\\section*{{{name}}}");
    }

    fn text(&mut self, text: &str) {
        let list = paragraphs(text);
        for group in list.chunk_by(|a, b| (a.indent > 0) == (b.indent > 0)) {
            if group[0].indent == 0 {
                for p in group.iter().filter(|p| !p.text.is_empty()) {
                    let _ = writeln!(self.out, "{}\n", escape(&p.text));
                }
                continue;
            }
            self.out.push_str("\\begin{itemize}\n");
            for p in group {
                let _ = writeln!(self.out, "  \\item {}", escape(&p.text));
            }
            self.out.push_str("\\end{itemize}\n");
        }
    }

    fn align(&mut self, rows: &[Row]) {
        if rows.is_empty() {
            return;
        }
        self.out.push_str("\\begin{align*}\n");
        for (i, r) in rows.iter().enumerate() {
            let head = glyphs(&r.head);
            let formula = format!("{}{}", r.formula, r.tail);
            let _ = write!(self.out, "  {} &{} ", r.head, r.sign);
            for (k, line) in broken(&formula, LINE - head - 2.0).iter().enumerate() {
                if k > 0 {
                    self.out.push_str(" \\\\\n    &\\quad {}");
                }
                self.out.push_str(line);
            }
            self.out.push_str(if i + 1 < rows.len() { " \\\\\n" } else { "\n" });
        }
        self.out.push_str("\\end{align*}\n");
    }

    /// A model with errors may lack parts on the sheet: said at the top.
    fn warning(&mut self, findings: &[Finding]) {
        let errors: Vec<&Finding> = findings.iter().filter(|f| f.severity == Severity::Error).collect();
        if errors.is_empty() {
            return;
        }
        self.out.push_str("\\textbf{The model has errors; parts may be missing.}\n\\begin{itemize}\n");
        for f in errors.iter().take(20) {
            let _ = writeln!(self.out, "  \\item {}", escape(&f.message));
        }
        self.out.push_str("\\end{itemize}\n");
    }

    fn cyclic(&mut self, coordinates: &[CoordinateRow]) {
        for c in coordinates.iter().filter(|c| c.cyclic) {
            let q = symbol(&c.name);
            let _ = match c.momentum_conserved {
                true => writeln!(self.out, "${q}$ is cyclic; $p_{{{q}}}$ is conserved.\n"),
                false => writeln!(self.out, "${q}$ is cyclic, but {} act on $p_{{{q}}}$.\n", acting(c)),
            };
        }
    }

    fn mass_matrix(&mut self, sheet: &Sheet) {
        let m = &sheet.mass_matrix;
        let widest: f64 = (0..m.len())
            .map(|k| m.iter().filter_map(|r| r.get(k)).map(|f| glyphs(&f.latex)).fold(0.0, f64::max) + 2.0)
            .sum();
        if sheet.mass_entries.is_empty() && m.len() <= MOST_COLUMNS && widest < LINE - 4.0 {
            self.out.push_str("\\[\n  \\begin{pmatrix}\n");
            for row in m {
                let cells: Vec<&str> = row.iter().map(|f| f.latex.as_str()).collect();
                let _ = writeln!(self.out, "    {} \\\\", cells.join(" & "));
            }
            self.out.push_str("  \\end{pmatrix}\n\\]\n");
            return;
        }
        let head = |a: &str, b: &str| format!("{}_{{{}, {}}}", letter(Letters::of(sheet).mass), symbol(a), symbol(b));
        let mut rows = Vec::new();
        for e in &sheet.mass_entries {
            rows.push(Row::new(&head(&e.row, &e.column), &e.formula));
        }
        for (i, row) in m.iter().enumerate() {
            for (j, f) in row.iter().enumerate().skip(i).filter(|(_, f)| f.plain != "0") {
                let name = |k: usize| sheet.coordinates.get(k).map_or("", |c| c.name.as_str());
                rows.push(Row::new(&head(name(i), name(j)), f));
            }
        }
        rows.truncate(MOST_ENTRIES);
        self.align(&rows);
        self.out.push_str("The matrix is symmetric; entries not listed are zero.\n");
    }

    fn energy(&mut self, sheet: &Sheet) {
        self.section("Energy");
        let e = &sheet.energy;
        let letters = Letters::of(sheet);
        let h = letter(letters.energy);
        self.align(&[Row::new(&h, &e.formula), Row::new(&rate(&h), &e.rate)]);
        let kind = match (e.is_total_energy, sheet.terms.iter().any(|t| t.kind == "lagrangian")) {
            (true, _) => "is kinetic + potential energy",
            (false, true) => "is the energy function",
            (false, false) => "is the energy function, not kinetic + potential energy",
        };
        let _ = writeln!(self.out, "${h}$ {kind}. It is {}.", kept(&e.conserved));
    }

    fn symmetries(&mut self, symmetries: &[SymmetryRow], letters: &Letters) {
        if symmetries.is_empty() {
            return;
        }
        self.section("Symmetries");
        for s in symmetries {
            let status = match s.status {
                Status::Exact => "exact symmetry".to_string(),
                Status::UpToGauge => "symmetry up to a gauge term".to_string(),
                Status::Broken if s.expected_broken => "broken, as declared".to_string(),
                Status::Broken => "broken".to_string(),
                Status::Undecided => format!("not decided ({})", escape(s.undecided.as_deref().unwrap_or("no reason"))),
            };
            let _ =
                writeln!(self.out, "\\textbf{{{}}}: {status}; its charge is {}.", escape(&s.name), kept(&s.conserved));
            let mut rows = Vec::new();
            for (name, f) in s.generator.iter().filter(|(_, f)| f.plain != "0") {
                let head = if name == "t" { "\\tau".to_string() } else { format!("\\eta_{{{}}}", symbol(name)) };
                rows.push(Row::new(&head, f));
            }
            rows.extend(s.gauge.as_ref().map(|f| Row::new(&letter(letters.gauge), f)));
            let q = letter(letters.charge);
            rows.push(Row::new(&q, &s.charge));
            rows.push(Row::new(&rate(&q), &s.rate));
            self.align(&rows);
            if !s.broken_by.is_empty() {
                self.out.push_str("Broken by the variations of\n");
                let row = |b: &leastwise_analysis::report::BreakerRow| {
                    Row::new(&format!("\\textit{{{}}}", escape(&b.term)), &b.variation)
                };
                self.align(&s.broken_by.iter().map(row).collect::<Vec<Row>>());
            }
            if !s.taken_by.is_empty() {
                let verb = if s.taken_by.len() == 1 { "acts" } else { "act" };
                let _ = writeln!(self.out, "{} {verb} on the charge.\n", escape(&listed(&s.taken_by)));
            }
        }
    }

    fn constants(&mut self, sheet: &Sheet) {
        if sheet.conserved.is_empty() {
            return;
        }
        self.section("Constants of the motion");
        for c in &sheet.conserved {
            let name = format!("\\textit{{{}}}", escape(&c.name));
            let mut rows = vec![Row::new(&name, &c.formula)];
            if c.holds != Answer::Yes {
                rows.push(Row::new(&format!("\\frac{{d}}{{dt}} {name}"), &c.rate));
            }
            self.align(&rows);
            let origin = if c.origin.is_empty() { String::new() } else { format!(", {}", escape(&c.origin)) };
            let _ = writeln!(self.out, "It is {}{origin}.\n", kept(&c.holds));
        }
    }
}

/// A letter of the page: a word stays upright.
fn letter(name: &str) -> String {
    match name {
        "ℒ" => "\\mathcal{L}".into(),
        "ℳ" => "\\mathcal{M}".into(),
        word if word.len() > 1 => format!("\\text{{{word}}}"),
        letter => letter.into(),
    }
}

/// The time derivative of a letter.
fn rate(letter: &str) -> String {
    if letter.len() > 1 { format!("\\frac{{d}}{{dt}} {letter}") } else { format!("\\frac{{d{letter}}}{{dt}}") }
}

fn kept(answer: &Answer) -> String {
    match answer {
        Answer::Yes => "conserved".into(),
        Answer::No(_) => "not conserved".into(),
        Answer::Undecided(reason) => format!("conserved or not, which is not decided ({})", escape(reason)),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::print::fixture;

    #[test]
    fn the_article() {
        let mut derived = fixture::sheet();
        derived.system = "shaft_winch & more".into();
        insta::assert_snapshot!(sheet(&derived, &[]));
    }
}
