//! `sheet --as latex`: a complete article. Needs amsmath; pdfLaTeX, XeLaTeX and LuaLaTeX all take it.

use crate::print::letters::Letters;
use crate::print::page::{acting, listed};
use crate::print::paragraphs;
use leastwise_analysis::report::{Answer, CoordinateRow, Finding, Formula, Sheet, Status, SymmetryRow};
use leastwise_grammar::tree::Severity;
use std::fmt::Write;
use unicode_normalization::UnicodeNormalization;

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
            let _ = writeln!(self.out, "It is {}.\n", kept(&c.holds));
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

/// A formula's lines, broken before the signs outside braces, at the outermost sign that leaves a line at least a third
/// full; brackets that are cut get invisible partners.
fn broken(latex: &str, room: f64) -> Vec<String> {
    let pieces = pieces(latex);
    let mut out = Vec::new();
    // The first piece of the line, and the brackets open before it.
    let (mut from, mut before) = (0, 0);
    while from < pieces.len() {
        let inset = if from > 0 { 4.0 } else { 0.0 };
        let mut columns = inset;
        let mut best: Option<usize> = None;
        let mut fits = true;
        for (k, piece) in pieces.iter().enumerate().skip(from) {
            columns += piece.width;
            if columns > room && k > from {
                fits = false;
                break;
            }
            let full = columns >= room / 3.0;
            let outer = best.is_none_or(|b| piece.open <= pieces[b].open || columns - piece.width < room / 3.0);
            if outer || !full {
                best = Some(k);
            }
        }
        let last = if fits { pieces.len() - 1 } else { best.unwrap_or(from) };
        let text: String = pieces[from..=last].iter().map(|p| p.text).collect();
        let open = if last + 1 < pieces.len() { pieces[last].open } else { 0 };
        let lead = "\\left. ".repeat(before);
        out.push(format!("{lead}{}{}", if open > 0 { text.trim_end() } else { &text }, " \\right.".repeat(open)));
        (from, before) = (last + 1, open);
    }
    out
}

struct Piece<'a> {
    text: &'a str,
    /// How many `\left` are open at its end.
    open: usize,
    /// About how wide it is.
    width: f64,
}

fn pieces(latex: &str) -> Vec<Piece<'_>> {
    let mut out = Vec::new();
    let (mut braces, mut open, mut from) = (0usize, 0usize, 0);
    let bytes = latex.as_bytes();
    let mut i = 0;
    while i < bytes.len() {
        let rest = &latex[i..];
        match bytes[i] {
            b'{' => braces += 1,
            b'}' => braces = braces.saturating_sub(1),
            b'\\' if rest.starts_with("\\left") && !starts_word(rest, 5) => open += 1,
            b'\\' if rest.starts_with("\\right") && !starts_word(rest, 6) => open = open.saturating_sub(1),
            b' ' if braces == 0 && i > from && is_sign(rest) => {
                out.push(Piece { text: &latex[from..i], open, width: glyphs(&latex[from..i]) });
                from = i;
            }
            _ => {}
        }
        // The character behind a backslash is part of the command: `\{` opens nothing.
        i += if bytes[i] == b'\\' { 2 } else { 1 };
        while i < bytes.len() && !latex.is_char_boundary(i) {
            i += 1;
        }
    }
    let rest = &latex[from.min(latex.len())..];
    out.push(Piece { text: rest, open, width: glyphs(rest) });
    out
}

fn starts_word(rest: &str, at: usize) -> bool {
    rest[at..].starts_with(|c: char| c.is_ascii_alphabetic())
}

fn is_sign(rest: &str) -> bool {
    rest != " = 0" && [" + ", " - ", " = ", " \\quad "].iter().any(|s| rest.starts_with(s))
}

/// About how wide a formula is, in widths of a letter: the larger part of a fraction, scripts at seven tenths.
fn glyphs(latex: &str) -> f64 {
    let mut reader = Glyphs { rest: latex, depth: 0 };
    reader.until_brace()
}

struct Glyphs<'a> {
    rest: &'a str,
    depth: usize,
}

impl Glyphs<'_> {
    fn until_brace(&mut self) -> f64 {
        let mut sum = 0.0;
        while let Some(c) = self.rest.chars().next() {
            match c {
                '}' => break,
                '{' => sum += self.group(),
                '^' | '_' => {
                    self.rest = &self.rest[1..];
                    sum += 0.7 * self.argument();
                }
                '\\' => sum += self.command(),
                ' ' => self.rest = &self.rest[1..],
                '+' | '-' | '=' => {
                    self.rest = &self.rest[1..];
                    sum += 2.2;
                }
                _ => {
                    self.rest = &self.rest[c.len_utf8()..];
                    sum += 1.0;
                }
            }
        }
        sum
    }

    fn group(&mut self) -> f64 {
        self.rest = &self.rest[1..];
        self.depth += 1;
        // Nesting is bounded by the printer; past that the width does not matter.
        let w = if self.depth < 400 {
            self.until_brace()
        } else {
            self.rest = "";
            0.0
        };
        self.depth -= 1;
        self.rest = self.rest.strip_prefix('}').unwrap_or(self.rest);
        w
    }

    fn argument(&mut self) -> f64 {
        match self.rest.chars().next() {
            Some('{') => self.group(),
            Some('\\') => self.command(),
            Some(c) => {
                self.rest = &self.rest[c.len_utf8()..];
                1.0
            }
            None => 0.0,
        }
    }

    fn command(&mut self) -> f64 {
        let name: usize = self.rest[1..].chars().take_while(char::is_ascii_alphabetic).count();
        let end = 1 + name.max(self.rest[1..].chars().next().map_or(0, char::len_utf8));
        let word = &self.rest[..end];
        self.rest = &self.rest[end..];
        match word {
            "\\frac" => {
                let top = self.argument();
                top.max(self.argument()) + 0.5
            }
            "\\sqrt" => self.argument() + 1.5,
            "\\," | "\\;" | "\\:" | "\\ " => 0.3,
            "\\quad" => 2.0,
            "\\left" | "\\right" => 0.0,
            "\\text" | "\\mathrm" | "\\mathit" | "\\dot" | "\\ddot" | "\\mathbf" | "\\operatorname" => self.argument(),
            "\\sum" => 2.5,
            "\\sin" | "\\cos" | "\\tan" | "\\exp" | "\\ln" => 3.0,
            "\\arcsin" | "\\arccos" | "\\arctan" | "\\sinh" | "\\cosh" | "\\tanh" => 4.5,
            _ => 1.2,
        }
    }
}

/// Text for LaTeX: special signs escaped, Greek letters and signs as mathematics.
///
/// What stands between two backquotes is set as code.
pub fn escape(text: &str) -> String {
    let mut out = String::new();
    let mut quotes = text.matches('`').count();
    let mut code = false;
    let mut chars = text.nfd().peekable();
    while let Some(c) = chars.next() {
        if let Some(accent) = chars.peek().and_then(|mark| accent(c, *mark)) {
            chars.next();
            let base = sign(c).map_or_else(|| c.to_string(), String::from);
            let _ = write!(out, "\\ensuremath{{{accent}{{{base}}}}}");
            continue;
        }
        match c {
            '`' if code || quotes > 1 => {
                out.push_str(if code { "}" } else { "\\texttt{" });
                code = !code;
                quotes -= 1;
            }
            '\\' => out.push_str("\\textbackslash{}"),
            '{' | '}' | '$' | '&' | '#' | '_' | '%' => {
                out.push('\\');
                out.push(c);
            }
            '^' => out.push_str("\\textasciicircum{}"),
            '~' => out.push_str("\\textasciitilde{}"),
            '`' => out.push_str("\\textquoteleft{}"),
            '"' => out.push_str("''"),
            '<' => out.push_str("\\ensuremath{<}"),
            '>' => out.push_str("\\ensuremath{>}"),
            '|' => out.push_str("\\textbar{}"),
            c if c.is_control() => out.push(' '),
            c => match sign(c) {
                Some(command) => {
                    let _ = write!(out, "\\ensuremath{{{command}}}");
                }
                None => out.push(c),
            },
        }
    }
    out.nfc().collect()
}

/// Newton's dots, which few fonts have on every letter; other marks, and those of `ä` or `ö`, stay text.
fn accent(letter: char, mark: char) -> Option<&'static str> {
    match mark {
        '\u{307}' => Some("\\dot"),
        '\u{308}' if !"aeiouyAEIOUY".contains(letter) => Some("\\ddot"),
        _ => None,
    }
}

/// A coordinate's name as a symbol: `θ₁`, `x[3]`, `m_cart`.
pub fn symbol(name: &str) -> String {
    let (name, index) = match name.split_once('[') {
        Some((name, index)) => (name, Some(index.trim_end_matches(']'))),
        None => (name, None),
    };
    let mut letters = name.chars().peekable();
    let (mut base, mut below) = (String::new(), String::new());
    while let Some(c) = letters.next_if(|c| !is_below(*c)) {
        base.push(c);
    }
    for c in letters {
        match subscript(c) {
            Some(d) => below.push(d),
            None if c == '_' && below.is_empty() => {}
            None => below.push(c),
        }
    }
    let spelled = |text: &str| -> String {
        let mut out = String::new();
        for c in text.chars() {
            match sign(c) {
                Some(command) => {
                    let _ = write!(out, "{command} ");
                }
                None if c == '_' => out.push_str("\\_"),
                None => out.push(c),
            }
        }
        out.trim_end().to_string()
    };
    let word = |text: &str| {
        let letters = text.chars().filter(|c| !c.is_numeric()).count();
        if letters > 1 { format!("\\mathrm{{{}}}", spelled(text)) } else { spelled(text) }
    };
    let parts: Vec<String> =
        [(!below.is_empty()).then(|| word(&below)), index.map(spelled)].into_iter().flatten().collect();
    if parts.is_empty() { word(&base) } else { format!("{}_{{{}}}", word(&base), parts.join(",")) }
}

fn is_below(c: char) -> bool {
    c == '_' || c.is_ascii_digit() || subscript(c).is_some()
}

fn subscript(c: char) -> Option<char> {
    let code = c as u32;
    (0x2080..=0x2089).contains(&code).then(|| char::from(b'0' + (code - 0x2080) as u8))
}

/// The LaTeX command of a Greek letter or a sign.
fn sign(c: char) -> Option<&'static str> {
    Some(match c {
        'α' => "\\alpha",
        'β' => "\\beta",
        'γ' => "\\gamma",
        'δ' => "\\delta",
        'ε' => "\\varepsilon",
        'ζ' => "\\zeta",
        'η' => "\\eta",
        'θ' => "\\theta",
        'ι' => "\\iota",
        'κ' => "\\kappa",
        'λ' => "\\lambda",
        'μ' | 'µ' => "\\mu",
        'ν' => "\\nu",
        'ξ' => "\\xi",
        'ο' => "o",
        'π' => "\\pi",
        'ρ' => "\\rho",
        'σ' | 'ς' => "\\sigma",
        'τ' => "\\tau",
        'υ' => "\\upsilon",
        'φ' => "\\varphi",
        'χ' => "\\chi",
        'ψ' => "\\psi",
        'ω' => "\\omega",
        'ϕ' => "\\phi",
        'ϑ' => "\\vartheta",
        'ϵ' => "\\epsilon",
        'Γ' => "\\Gamma",
        'Δ' => "\\Delta",
        'Θ' => "\\Theta",
        'Λ' => "\\Lambda",
        'Ξ' => "\\Xi",
        'Π' => "\\Pi",
        'Σ' => "\\Sigma",
        'Υ' => "\\Upsilon",
        'Φ' => "\\Phi",
        'Ψ' => "\\Psi",
        'Ω' => "\\Omega",
        'Α' => "A",
        'Β' => "B",
        'Ε' => "E",
        'Ζ' => "Z",
        'Η' => "H",
        'Ι' => "I",
        'Κ' => "K",
        'Μ' => "M",
        'Ν' => "N",
        'Ο' => "O",
        'Ρ' => "P",
        'Τ' => "T",
        'Χ' => "X",
        '∂' => "\\partial",
        '→' => "\\to",
        '≥' => "\\ge",
        '≤' => "\\le",
        '≠' => "\\ne",
        '√' => "\\surd",
        '·' => "\\cdot",
        '×' => "\\times",
        '°' => "^\\circ",
        '′' => "'",
        '″' => "''",
        '−' => "-",
        '∞' => "\\infty",
        '±' => "\\pm",
        '²' => "^2",
        '³' => "^3",
        '¹' => "^1",
        '₀' => "_0",
        '₁' => "_1",
        '₂' => "_2",
        '₃' => "_3",
        '₄' => "_4",
        '₅' => "_5",
        '₆' => "_6",
        '₇' => "_7",
        '₈' => "_8",
        '₉' => "_9",
        'ħ' => "\\hbar",
        'ℱ' => "\\mathcal{F}",
        _ => return None,
    })
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

    #[test]
    fn names_become_symbols() {
        for (name, expected) in [
            ("x", "x"),
            ("θ₁", "\\theta_{1}"),
            ("x[3]", "x_{3}"),
            ("m_cart", "m_{\\mathrm{cart}}"),
            ("v0", "v_{0}"),
            ("länge", "\\mathrm{länge}"),
            ("x₁[i + 1]", "x_{1,i + 1}"),
            ("φ", "\\varphi"),
            ("k_m", "k_{m}"),
        ] {
            assert_eq!(symbol(name), expected, "{name}");
        }
    }

    #[test]
    fn text_is_escaped() {
        assert_eq!(escape("a_b & 50 % of $θ$"), "a\\_b \\& 50 \\% of \\$\\ensuremath{\\theta}\\$");
        assert_eq!(escape("ẋ₁, θ̈, ä"), "\\ensuremath{\\dot{x}}\\ensuremath{_1}, \\ensuremath{\\ddot{\\theta}}, ä");
        assert_eq!(escape("`a_b` and `"), "\\texttt{a\\_b} and \\textquoteleft{}");
        assert_eq!(escape("\\input{x}"), "\\textbackslash{}input\\{x\\}");
    }

    #[test]
    fn long_equations_are_broken_outside_braces() {
        assert_eq!(broken("a + \\frac{b + c}{d} - e", 10.0), ["a + \\frac{b + c}{d}", " - e"]);
    }

    #[test]
    fn an_argument_is_not_cut_where_the_line_can_end_before_it() {
        let cosine = " + i j \\cos\\left(g - h\\right)";
        assert_eq!(broken(&format!("a b c d e f g h{cosine}"), 18.0), ["a b c d e f g h", cosine]);
    }

    #[test]
    fn a_bracket_that_is_cut_gets_partners() {
        let lines = broken("m \\left(a + b + c\\right) + d", 6.0);
        for line in &lines {
            assert_eq!(line.matches("\\left").count(), line.matches("\\right").count(), "{line}");
        }
        assert!(lines.len() > 1, "{lines:?}");
        assert_eq!(lines[0], "m \\left(a \\right.");
    }

    #[test]
    fn widths_are_about_right() {
        assert!((glyphs("a b") - 2.0).abs() < 0.01);
        assert!(glyphs("\\frac{a}{b + c + d}") < 8.5);
        assert!(glyphs("\\frac{") >= 0.0, "broken input ends");
        assert!(glyphs(&"{".repeat(100_000)) >= 0.0);
    }
}
