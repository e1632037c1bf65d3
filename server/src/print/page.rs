//! `sheet` for a terminal, set like a page: sections, formulas aligned at their equals signs, no boxes.

mod found;
pub mod insights;

use crate::lines::Lines;
use crate::output::Page;
use crate::print::break_lines::{Line, lines, prose, width};
use crate::print::letters::Letters;
use crate::print::{counts, paragraphs, severity_word};
use leastwise_analysis::report::{Answer, CoordinateRow, Finding, Formula, Sheet, Status, SymmetryRow};
use leastwise_grammar::tree::Severity;
use std::fmt::Write;

/// Columns before a formula's head.
const INDENT: usize = 4;
/// Heads wider than this don't widen the column of the equals signs.
const WIDEST_HEAD: usize = 24;
/// A mass matrix wider than the page is listed entry by entry, at most so many.
const MOST_ENTRIES: usize = 400;
/// Columns for a finding's line and column.
const PLACE: usize = 6;
/// A generator with wider heads is aligned for itself.
const NARROW: usize = 10;
/// Equal lines of a generator are drawn together from so many on.
const MANY_ALIKE: usize = 3;

/// The whole page.
pub fn sheet(sheet: &Sheet, findings: &[Finding], source: &Lines<'_>, page: Page) -> String {
    let mut p = Setter { out: String::new(), page, letters: Letters::of(sheet) };
    p.title(sheet);
    if findings.iter().any(|f| f.severity == Severity::Error) {
        p.gap();
        p.prose(0, "The model has errors, listed at the end; what depends on them is missing.");
    }
    p.lagrangian(sheet);
    p.equations(&sheet.coordinates);
    p.momenta(&sheet.coordinates);
    p.mass_matrix(sheet);
    if !sheet.coordinates.is_empty() {
        p.energy(sheet);
    }
    p.symmetries(&sheet.symmetries);
    p.constants(sheet);
    p.found(sheet.found.as_ref());
    p.insights(&sheet.insights);
    p.findings(findings, source);
    p.out
}

/// A line of a section: `head = formula tail   (remark)`.
struct Row {
    head: String,
    sign: &'static str,
    formula: String,
    tail: String,
    remark: String,
}

impl Row {
    fn new(head: impl Into<String>, formula: &Formula) -> Row {
        Row { head: head.into(), sign: "=", formula: formula.text.clone(), tail: String::new(), remark: String::new() }
    }

    fn remark(mut self, remark: impl Into<String>) -> Row {
        self.remark = remark.into();
        self
    }
}

struct Setter {
    out: String,
    page: Page,
    letters: Letters,
}

impl Setter {
    fn line(&mut self, indent: usize, text: &str) {
        let _ = writeln!(self.out, "{:indent$}{text}", "");
    }

    fn gap(&mut self) {
        self.out.push('\n');
    }

    fn prose(&mut self, indent: usize, text: &str) {
        for l in prose(text, self.page.width.saturating_sub(indent)) {
            self.line(indent, &l);
        }
    }

    fn section(&mut self, name: &str) {
        self.gap();
        let name = self.page.bold(name);
        self.line(0, &name);
        self.gap();
    }

    fn title(&mut self, sheet: &Sheet) {
        let name = self.page.bold(&sheet.system);
        self.line(0, &name);
        if let Some(description) = &sheet.description {
            for p in paragraphs(description) {
                let hanging = if p.indent > 0 { p.indent + 2 } else { 0 };
                for (i, l) in prose(&p.text, self.page.width.saturating_sub(hanging)).iter().enumerate() {
                    self.line(if i == 0 { p.indent } else { hanging }, l);
                }
            }
        }
    }

    /// Rows aligned at their signs.
    fn rows(&mut self, indent: usize, rows: &[Row]) {
        let column = rows.iter().map(|r| width(&r.head)).filter(|w| *w <= WIDEST_HEAD).max().unwrap_or(0);
        for r in rows {
            self.row(indent, column, r);
        }
    }

    fn row(&mut self, indent: usize, column: usize, row: &Row) {
        let mut text = row.formula.lines();
        let formula = format!("{}{}", text.next().unwrap_or_default(), row.tail);
        // `head = `; the lines that follow hang below the formula's begin.
        let begin = indent + column + 3;
        let room = self.page.width.saturating_sub(begin).max(20);
        let head = match row.sign {
            ":" => format!("{}:", row.head),
            sign => format!("{}{} {sign}", row.head, " ".repeat(column.saturating_sub(width(&row.head)))),
        };
        let set = |l: Line<'_>| format!("{:1$}{2}", "", l.inset, l.text);
        let mut broken: Vec<String> = lines(&formula, room).into_iter().map(set).collect();
        // What is written apart (`where A = …`) gets lines of its own.
        for more in text {
            broken.extend(lines(more.trim_start(), room).into_iter().map(set));
        }
        if !row.remark.is_empty() {
            let remark = format!("({})", row.remark);
            match broken.last_mut() {
                Some(last) if width(last) + 3 + width(&remark) <= room => {
                    let _ = write!(last, "   {}", self.page.dim(&remark));
                }
                _ => broken.extend(prose(&remark, room).iter().map(|l| self.page.dim(l))),
            }
        }
        let mut broken = broken.into_iter();
        if width(&head) + 1 > begin - indent {
            self.line(indent, &head);
        } else {
            let pad = " ".repeat(begin - indent - width(&head));
            let first = broken.next().unwrap_or_default();
            self.line(indent, &format!("{head}{pad}{first}"));
        }
        for l in broken {
            self.line(begin, &l);
        }
    }

    fn lagrangian(&mut self, sheet: &Sheet) {
        if sheet.terms.is_empty() {
            return;
        }
        self.section("Lagrangian");
        self.rows(INDENT, &[Row::new(self.letters.lagrangian, &sheet.lagrangian)]);
        self.gap();
        let kinds = sheet.terms.iter().map(|t| t.kind.len()).max().unwrap_or(0);
        let head = |t: &leastwise_analysis::report::TermRow| format!("{:kinds$} {}", t.kind, t.name);
        let rows: Vec<Row> = sheet.terms.iter().map(|t| Row::new(head(t), &t.formula)).collect();
        self.rows(INDENT, &rows);
    }

    fn equations(&mut self, coordinates: &[CoordinateRow]) {
        if coordinates.is_empty() {
            return;
        }
        self.section("Equations of motion");
        let row = |c: &CoordinateRow| Row {
            sign: ":",
            tail: match &c.reaction {
                Some(r) => format!(" = {}", r.text),
                None => " = 0".to_string(),
            },
            ..Row::new(c.name.clone(), &c.equation).remark(members(c))
        };
        let rows: Vec<Row> = coordinates.iter().map(row).collect();
        self.rows(INDENT, &rows);
    }

    fn momenta(&mut self, coordinates: &[CoordinateRow]) {
        if coordinates.is_empty() {
            return;
        }
        self.section("Momenta and cyclic coordinates");
        let rows: Vec<Row> = coordinates
            .iter()
            .map(|c| {
                let p = format!("p_{}", c.name);
                let remark = cyclic_remark(c, &p);
                Row::new(p, &c.momentum).remark(remark)
            })
            .collect();
        self.rows(INDENT, &rows);
    }

    fn mass_matrix(&mut self, sheet: &Sheet) {
        if sheet.coordinates.is_empty() {
            return;
        }
        self.section("Mass matrix");
        let m = &sheet.mass_matrix;
        let mass = self.letters.mass;
        if !sheet.mass_entries.is_empty() {
            let row = |e: &leastwise_analysis::report::MassEntry| {
                Row::new(format!("{mass}[{}, {}]", e.row, e.column), &e.formula)
            };
            let rows: Vec<Row> = sheet.mass_entries.iter().take(MOST_ENTRIES).map(row).collect();
            self.rows(INDENT, &rows);
            self.line(INDENT, "All other entries are zero.");
        } else if !self.grid(m) {
            let names: Vec<&str> = sheet.coordinates.iter().map(|c| c.name.as_str()).collect();
            self.entries(m, &names);
        }
    }

    /// The matrix with its brackets, where it fits on the page.
    fn grid(&mut self, m: &[Vec<Formula>]) -> bool {
        let columns = m.first().map_or(0, Vec::len);
        let widest = |k: usize| m.iter().filter_map(|r| r.get(k)).map(|f| width(&f.text)).max().unwrap_or(0);
        let widths: Vec<usize> = (0..columns).map(widest).collect();
        let whole = widths.iter().sum::<usize>() + 3 * columns.saturating_sub(1) + 8 + INDENT;
        if whole > self.page.width || m.iter().flatten().any(|f| f.text.contains('\n')) {
            return false;
        }
        if let [row] = m {
            self.rows(INDENT, &[Row::new(self.letters.mass, &row[0])]);
            return true;
        }
        for (i, row) in m.iter().enumerate() {
            let cells: Vec<String> = row.iter().zip(&widths).map(|(f, w)| centred(&f.text, *w)).collect();
            let (left, right) = match i {
                0 => ('⎡', '⎤'),
                i if i + 1 == m.len() => ('⎣', '⎦'),
                _ => ('⎢', '⎥'),
            };
            let head = if i == (m.len() - 1) / 2 { format!("{} = ", self.letters.mass) } else { "    ".into() };
            self.line(INDENT, &format!("{head}{left} {} {right}", cells.join("   ")));
        }
        true
    }

    /// The entries that are not zero, on and above the diagonal.
    fn entries(&mut self, m: &[Vec<Formula>], names: &[&str]) {
        let mut rows = Vec::new();
        for (i, row) in m.iter().enumerate() {
            for (j, f) in row.iter().enumerate().skip(i) {
                if !is_zero(f) && rows.len() < MOST_ENTRIES {
                    rows.push(Row::new(format!("{}[{}, {}]", self.letters.mass, names[i], names[j]), f));
                }
            }
        }
        self.rows(INDENT, &rows);
        self.line(INDENT, "The matrix is symmetric; entries not listed are zero.");
    }

    fn energy(&mut self, sheet: &Sheet) {
        let energy = &sheet.energy;
        self.section("Energy");
        let verdict = match &energy.conserved {
            Answer::Yes => "conserved".to_string(),
            Answer::No(_) => "not conserved".to_string(),
            Answer::Undecided(reason) => format!("not decided whether it is conserved: {reason}"),
        };
        self.rows(
            INDENT,
            &[
                Row::new(self.letters.energy, &energy.formula),
                Row::new(self.letters.energy_rate, &energy.rate).remark(verdict),
            ],
        );
        self.gap();
        let (h, l) = (self.letters.energy, self.letters.lagrangian);
        let kind = match (energy.is_total_energy, sheet.terms.iter().any(|t| t.kind == "lagrangian")) {
            (true, _) => format!("{h} is kinetic + potential energy."),
            (false, true) => format!("{h} is the energy function Σ p q' - {l}."),
            (false, false) => format!("{h} is the energy function Σ p q' - {l}; it is not kinetic + potential energy."),
        };
        self.prose(INDENT, &kind);
    }

    fn symmetries(&mut self, symmetries: &[SymmetryRow]) {
        if symmetries.is_empty() {
            return;
        }
        self.section("Symmetries");
        for (i, s) in symmetries.iter().enumerate() {
            if i > 0 {
                self.gap();
            }
            self.prose(INDENT, &format!("{}: {}", s.name, status(s)));
            let mut rows = generator(&s.generator);
            if rows.iter().any(|r| width(&r.head) > NARROW) {
                self.rows(2 * INDENT, &std::mem::take(&mut rows));
            }
            if let Some(f) = &s.gauge {
                rows.push(Row::new(self.letters.gauge, f).remark("gauge term"));
            }
            rows.push(Row::new(self.letters.charge, &s.charge));
            rows.push(Row::new(self.letters.charge_rate, &s.rate).remark(kept(&s.conserved)));
            self.rows(2 * INDENT, &rows);
            if let Some(reason) = &s.gauge_unknown {
                self.prose(2 * INDENT, &format!("The gauge term exists, but not in closed form: {reason}."));
            }
            self.blame(s);
        }
    }

    fn blame(&mut self, s: &SymmetryRow) {
        if !s.broken_by.is_empty() {
            let more = if s.smallest { "" } else { " (none of them can be left out; a smaller set may exist)" };
            self.prose(2 * INDENT, &format!("Broken by the variations of{more}"));
            let rows: Vec<Row> = s.broken_by.iter().map(|b| Row::new(b.term.clone(), &b.variation)).collect();
            self.rows(3 * INDENT, &rows);
        }
        if !s.taken_by.is_empty() {
            let verb = if s.taken_by.len() == 1 { "acts" } else { "act" };
            self.prose(2 * INDENT, &format!("{} {verb} on the charge.", listed(&s.taken_by)));
        }
        match s.respects_constraints {
            Some(true) => self.prose(2 * INDENT, "The transformation keeps to the constraints."),
            Some(false) => self.prose(2 * INDENT, "The transformation leaves the constraints."),
            None => {}
        }
    }

    fn constants(&mut self, sheet: &Sheet) {
        if sheet.conserved.is_empty() {
            return;
        }
        self.section("Constants of the motion");
        let mut rows = Vec::new();
        for c in &sheet.conserved {
            let mut remark = kept(&c.holds);
            if !c.origin.is_empty() {
                remark = format!("{remark}, {}", c.origin);
            }
            rows.push(Row::new(c.name.clone(), &c.formula).remark(remark));
            if let Answer::No(witness) = &c.holds {
                let at = witness.as_ref().map(|w| format!("so {w}")).unwrap_or_default();
                rows.push(Row::new(format!("d{}/dt", c.name), &c.rate).remark(at));
            }
        }
        self.rows(INDENT, &rows);
    }

    fn findings(&mut self, findings: &[Finding], source: &Lines<'_>) {
        let Some(count) = counts(findings.iter()) else { return };
        self.section("Findings");
        for f in findings.iter().take(100) {
            let place = format!("{}:{}", source.line_of(f.range.start) + 1, source.character(f.range.start) + 1);
            let text = format!("{}[{}]: {}", severity_word(f.severity), f.code, f.message);
            let begin = INDENT + PLACE + 2;
            for (i, l) in prose(&text, self.page.width.saturating_sub(begin)).iter().enumerate() {
                match i {
                    0 => self.line(INDENT, &format!("{place:>PLACE$}  {l}")),
                    _ => self.line(begin, l),
                }
            }
        }
        self.gap();
        self.line(INDENT, &format!("{count}."));
    }
}

fn is_zero(f: &Formula) -> bool {
    f.plain == "0"
}

/// `i = 1 … 200` for a coordinate that stands for many.
fn members(c: &CoordinateRow) -> String {
    c.members.as_ref().map(|m| format!("{} = {} … {}", m.index, m.range.0, m.range.1)).unwrap_or_default()
}

/// What changes the momentum of a cyclic coordinate.
pub fn acting(c: &CoordinateRow) -> &'static str {
    if c.reaction.as_ref().is_some_and(|r| !is_zero(r)) { "reactions" } else { "forces" }
}

fn cyclic_remark(c: &CoordinateRow, p: &str) -> String {
    match (&c.cyclic_undecided, c.cyclic, c.momentum_conserved) {
        (Some(reason), _, _) => format!("not decided whether {} is cyclic: {reason}", c.name),
        (None, true, true) => format!("{} is cyclic, {p} is conserved", c.name),
        (None, true, false) => format!("{} is cyclic, but {} act on {p}", c.name, acting(c)),
        (None, false, true) => format!("{p} is conserved"),
        (None, false, false) => String::new(),
    }
}

fn status(s: &SymmetryRow) -> String {
    match (s.status, s.expected_broken) {
        (Status::Exact, false) => "exact symmetry".into(),
        (Status::UpToGauge, false) => "symmetry up to a gauge term".into(),
        (Status::Exact, true) => "exact symmetry of L, though declared broken".into(),
        (Status::UpToGauge, true) => "symmetry of L up to a gauge term, though declared broken".into(),
        (Status::Broken, true) => "broken, as declared".into(),
        (Status::Broken, false) => "broken".into(),
        (Status::Undecided, _) => match &s.undecided {
            Some(reason) => format!("not decided: {reason}"),
            None => "not decided".into(),
        },
    }
}

fn kept(answer: &Answer) -> String {
    match answer {
        Answer::Yes => "conserved".into(),
        Answer::No(_) => "not conserved".into(),
        Answer::Undecided(reason) => format!("not decided: {reason}"),
    }
}

/// τ and η; a run of equal ones, such as those of a family, on one line.
fn generator(list: &[(String, Formula)]) -> Vec<Row> {
    let label = |name: &str| if name == "t" { "τ".to_string() } else { format!("η_{name}") };
    let moved: Vec<&(String, Formula)> = list.iter().filter(|(_, f)| !is_zero(f)).collect();
    let mut rows = Vec::new();
    for run in moved.chunk_by(|a, b| a.1 == b.1) {
        match run {
            [first, .., last] if run.len() >= MANY_ALIKE => {
                rows.push(Row::new(format!("{} = … = {}", label(&first.0), label(&last.0)), &first.1));
            }
            _ => rows.extend(run.iter().map(|(name, f)| Row::new(label(name), f))),
        }
    }
    rows
}

/// `a, b and c`.
pub fn listed(names: &[String]) -> String {
    match names {
        [] => String::new(),
        [one] => one.clone(),
        [rest @ .., last] => format!("{} and {last}", rest.join(", ")),
    }
}

fn centred(text: &str, room: usize) -> String {
    let free = room.saturating_sub(width(text));
    format!("{}{text}{}", " ".repeat(free / 2), " ".repeat(free - free / 2))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::print::fixture;

    fn printed(columns: usize, color: bool) -> String {
        let outcome = fixture::outcome();
        let page = Page { color, width: columns };
        sheet(&fixture::sheet(), &outcome.findings, &Lines::new(&outcome.text), page)
    }

    #[test]
    fn the_page() {
        insta::assert_snapshot!(printed(100, false));
    }

    #[test]
    fn a_narrow_page_keeps_to_its_width() {
        let page = printed(50, false);
        assert!(page.lines().all(|l| width(l) <= 50), "{page}");
        insta::assert_snapshot!(page);
    }

    #[test]
    fn colours_change_no_word() {
        let plain = printed(80, true).replace("\x1b[0m", "").replace("\x1b[1m", "").replace("\x1b[2m", "");
        assert_eq!(plain, printed(80, false));
        assert!(printed(80, true).contains("\x1b[1mLagrangian\x1b[0m"));
    }

    #[test]
    fn errors_are_announced_at_the_top() {
        let mut found = fixture::outcome().findings;
        let text = |found: &[Finding]| sheet(&fixture::sheet(), found, &Lines::new(""), Page::PLAIN);
        assert!(!text(&found).contains("has errors"));
        found[0].severity = Severity::Error;
        assert!(text(&found).contains("The model has errors"));
    }

    #[test]
    fn reactions_act_on_cyclic_momenta() {
        let mut row = fixture::sheet().coordinates.remove(1);
        row.momentum_conserved = false;
        assert_eq!(cyclic_remark(&row, "p_φ"), "φ is cyclic, but forces act on p_φ");
        row.reaction = Some(fixture::formula("λ_rod", "λ_rod", ""));
        assert_eq!(cyclic_remark(&row, "p_φ"), "φ is cyclic, but reactions act on p_φ");
    }

    #[test]
    fn equal_members_of_a_generator_share_a_line() {
        let one = fixture::formula("1", "1", "1");
        let list: Vec<(String, Formula)> = (1..=6).map(|i| (format!("x[{i}]"), one.clone())).collect();
        let rows = generator(&list);
        assert_eq!(rows.len(), 1);
        assert_eq!(rows[0].head, "η_x[1] = … = η_x[6]");
    }

    #[test]
    fn a_name_without_end_moves_its_formula_down() {
        let mut derived = fixture::sheet();
        derived.coordinates[0].name = "x".repeat(300);
        let text = sheet(&derived, &[], &Lines::new(""), Page::PLAIN);
        assert!(text.contains(&format!("    p_{} =\n          (m + J/a²) r'\n", "x".repeat(300))), "{text}");
    }
}
