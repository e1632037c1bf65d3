//! The pen of all hovers: blocks, formulas with their labels, lists that end in time.

use super::Block;
use crate::checked::{Checked, Contents, ItemRow};
use crate::derive::{Derived, total};
use crate::features::place;
use crate::sheet::Maker;
use leastwise_algebra::{Arena, Expr, Rational, Stopped};
use leastwise_grammar::tree::*;
use leastwise_mechanics::context::{Context, Parts};
use leastwise_mechanics::forms::aligned;
use leastwise_mechanics::lagrange::FormParts;
use leastwise_mechanics::model::Coordinate;

/// Lists are cut after so many entries.
pub(super) const SHOWN: usize = 12;
/// A formula stands in a sentence up to so many characters.
const SHORT: usize = 72;

/// Writes one hover.
pub(super) struct Writer<'a, 'm> {
    pub maker: &'a mut Maker<'m>,
    pub checked: &'a Checked,
    pub derived: &'a Derived,
    pub blocks: Vec<Block>,
}

impl<'a, 'm> Writer<'a, 'm> {
    pub fn new(maker: &'a mut Maker<'m>, checked: &'a Checked, derived: &'a Derived) -> Writer<'a, 'm> {
        Writer { maker, checked, derived, blocks: Vec::new() }
    }

    pub fn cx(&mut self) -> Context<'_> {
        Context { arena: self.maker.arena, zero: self.maker.zero, budget: self.maker.budget, memory: self.maker.memory }
    }

    /// The textbook form of an expression.
    pub fn text(&mut self, e: Expr) -> String {
        self.maker.prints.text(self.maker.arena, e)
    }

    /// A number as one writes a value: 0.15, not 3/20.
    pub fn number(&mut self, e: Expr) -> String {
        let small = self.maker.arena.as_number(e).and_then(Rational::small);
        small.and_then(|(n, d)| decimal(n, d)).unwrap_or_else(|| self.text(e))
    }

    pub fn total(&mut self, parts: &Parts) -> Expr {
        total(self.maker.arena, parts)
    }

    pub fn prose(&mut self, text: impl Into<String>) {
        self.blocks.push(Block::Prose(text.into()));
    }

    /// Lines of formulas; nothing where there are none.
    pub fn formulas(&mut self, lines: Vec<String>) {
        if !lines.is_empty() {
            self.blocks.push(Block::Formulas(lines));
        }
    }

    /// The comment that describes something.
    pub fn description(&mut self, text: Option<&str>) {
        if let Some(text) = text.map(str::trim).filter(|t| !t.is_empty()) {
            self.prose(flowing(text));
        }
    }

    /// A sentence, with the comment that describes the thing behind it.
    pub fn titled(&mut self, text: impl Into<String>, description: Option<&str>) {
        let mut text = text.into();
        if let Some(more) = description.map(flowing).filter(|d| !d.is_empty()) {
            text.push_str(": ");
            text.push_str(&more);
        }
        self.prose(text);
    }

    /// Says what is missing from the model, as the second line of the hover.
    pub fn missing(&mut self) {
        let Some(text) = missing(self.checked) else { return };
        let rest = match self.blocks.first_mut() {
            Some(Block::Formulas(lines)) if lines.len() > 1 => Some(lines.split_off(1)),
            _ => None,
        };
        let at = self.blocks.len().min(1);
        self.blocks.splice(at..at, std::iter::once(Block::Prose(text)).chain(rest.map(Block::Formulas)));
    }

    /// Says that something was not derived.
    pub fn stopped(&mut self, what: &str, why: Stopped) {
        self.prose(format!("{what}: not derived, {why}"));
    }

    /// Whether an expression vanishes, proved.
    pub fn vanishes(&mut self, e: Expr) -> bool {
        e == Arena::ZERO || self.cx().vanishes(&[(e, Rational::ONE)]).is_proved()
    }
}

/// A list that ends in time: after so many entries, or when some entries have filled a screen.
pub(super) struct List {
    pub lines: Vec<String>,
    shown: usize,
    letters: usize,
    more: usize,
}

impl List {
    /// So many letters fill a screen.
    const SCREEN: usize = 3000;
    /// So many entries are shown in any case.
    const LEAST: usize = 3;

    pub fn new() -> List {
        List { lines: Vec::new(), shown: 0, letters: 0, more: 0 }
    }

    /// Whether one more entry is to be shown; else it is counted.
    pub fn wants(&mut self) -> bool {
        let full = self.shown >= SHOWN || self.shown >= List::LEAST && self.letters > List::SCREEN;
        if full {
            self.more += 1;
        } else {
            self.shown += 1;
        }
        !full
    }

    pub fn add(&mut self, lines: Vec<String>) {
        self.letters += lines.iter().map(|l| l.chars().count()).sum::<usize>();
        self.lines.extend(lines);
    }

    /// The lines, with the count of what is left out.
    pub fn done(mut self) -> Vec<String> {
        if self.more > 0 {
            self.lines.push(format!("and {} more", self.more));
        }
        self.lines
    }
}

/// One form of a coordinate: its name, the members for which it holds, and the expressions.
pub(super) struct FormRow {
    /// `θ`, `x[3]`, `x[i]`.
    pub name: String,
    /// First and last member, for a part of a large family.
    pub range: Option<(i64, i64)>,
    /// `   (i = 2 … 199)`, for a part of a large family.
    pub suffix: String,
    pub values: Vec<Expr>,
}

/// Lists of parts, summed and brought to common forms of one coordinate.
pub(super) fn forms(w: &mut Writer<'_, '_>, q: &Coordinate, lists: &[FormParts]) -> Result<Vec<FormRow>, Stopped> {
    let maker = &mut *w.maker;
    let (ranges, rows) = aligned(maker.arena, q, lists, maker.budget)?;
    let mut out = Vec::new();
    for (k, range) in ranges.into_iter().enumerate() {
        let (name, suffix) = match (range, q.members) {
            (Some((a, b)), Some(_)) if a == b => (format!("{}[{a}]", maker.arena.name(q.symbol)), String::new()),
            (Some((a, b)), Some(m)) => {
                (q.label(maker.arena), format!("   ({} = {a} … {b})", maker.arena.name(m.index)))
            }
            _ => (q.label(maker.arena), String::new()),
        };
        out.push(FormRow { name, range, suffix, values: rows.iter().map(|list| list[k]).collect() });
    }
    Ok(out)
}

/// A formula with its label; what is written apart, `where A = …`, follows on lines of its own.
pub(super) fn labelled(label: &str, text: &str, suffix: &str) -> Vec<String> {
    let mut lines = text.lines();
    let first = lines.next().unwrap_or_default();
    let mut out = vec![format!("{label}{first}{suffix}")];
    out.extend(lines.map(|l| format!("    {l}")));
    out
}

/// The formula where it is short enough for a sentence.
pub(super) fn short(text: &str) -> Option<&str> {
    (!text.contains('\n') && text.chars().count() <= SHORT).then_some(text)
}

/// The first paragraph of a comment, on one line. Its first letter is left alone: it may be a name of the model.
fn flowing(text: &str) -> String {
    let lines = text.trim().lines().map(str::trim).take_while(|l| !l.is_empty());
    lines.collect::<Vec<_>>().join(" ")
}

/// A witness with so many values as are worth reading; what stands for the index of a sum has no name to be told by.
pub(super) fn witness(text: &str) -> String {
    let (value, at) = text.split_once(" at ").unwrap_or((text, ""));
    let values: Vec<&str> = at.split(", ").filter(|v| !v.is_empty() && !v.contains('#')).collect();
    match values.len() {
        0 => value.to_owned(),
        n if n <= SHOWN => format!("{value} at {}", values.join(", ")),
        n => format!("{value} at {} and {} more values", values[..SHOWN].join(", "), n - SHOWN),
    }
}

/// Names in backquotes: `a`, `a` and `b`, `a`, `b` and 4 more.
pub(super) fn quoted(names: &[String]) -> String {
    let mut shown: Vec<String> = names.iter().take(SHOWN).map(|n| format!("`{n}`")).collect();
    if names.len() > SHOWN {
        shown.push(format!("{} more", names.len() - SHOWN));
    }
    match shown.as_slice() {
        [] => String::new(),
        [one] => one.clone(),
        [rest @ .., last] => format!("{} and {last}", rest.join(", ")),
    }
}

/// `one` or `many`, by number.
pub(super) fn plural(n: usize, one: &'static str, many: &'static str) -> &'static str {
    if n == 1 { one } else { many }
}

/// `1 coordinate`, `3 coordinates`.
pub(super) fn counted(n: i64, one: &str, many: &str) -> String {
    if n == 1 { format!("1 {one}") } else { format!("{n} {many}") }
}

/// What is missing from an incomplete model.
pub(super) fn missing(checked: &Contents) -> Option<String> {
    if checked.complete {
        return None;
    }
    let failed: Vec<usize> = (0..checked.items.len()).filter(|&k| checked.items[k].failed).collect();
    let mut names: Vec<String> = failed.iter().take(3).map(|&k| title(checked, k)).collect();
    if failed.len() > 3 {
        names.push(format!("{} more items", failed.len() - 3));
    }
    let list = match names.as_slice() {
        [] => "a part of the model".to_owned(),
        [one] => one.clone(),
        [rest @ .., last] => format!("{} and {last}", rest.join(", ")),
    };
    let verb = plural(failed.len().max(1), "has an error", "have errors");
    Some(format!("without {list}, which {verb}"))
}

/// `kinetic bob`; of a term without a name its number, `kinetic 1`.
pub(super) fn with_kind(kind: &str, name: &str) -> String {
    let numbered = name.strip_prefix(kind).is_some_and(|n| n.trim_start().parse::<usize>().is_ok());
    if numbered { name.to_owned() } else { format!("{kind} {name}") }
}

/// An item in a few words: `kinetic bob` in backquotes.
pub(super) fn title(checked: &Contents, item: usize) -> String {
    let row = &checked.items[item];
    let keyword = keyword_text(checked, row);
    match item_name(checked, item) {
        Some(name) => format!("`{keyword} {name}`"),
        None if keyword.is_empty() => {
            let line = checked.text[row.range.start..].lines().next().unwrap_or_default();
            let head: String = line.chars().take(30).collect();
            format!("`{}`", head.trim_end())
        }
        None => format!("`{keyword}`"),
    }
}

/// An item's keyword as it is written, modifiers left out.
pub(super) fn keyword_text<'c>(checked: &'c Contents, row: &ItemRow) -> &'c str {
    let keyword = row.parsed.item.keyword.range();
    let text = checked.text.get(row.range.start + keyword.start..row.range.start + keyword.end).unwrap_or_default();
    text.split_whitespace().last().unwrap_or_default()
}

/// The name of an item, or of what it declares; numbered where the model gives none.
pub(super) fn item_name(checked: &Contents, item: usize) -> Option<String> {
    use place::Thing;
    let kind = &checked.items[item].parsed.item.kind;
    if let Some(name) = place::head_name(kind) {
        return Some(name.text.clone());
    }
    let model = &checked.model;
    let numbered = |name: &String, keyword: &str| name.strip_prefix(keyword).map_or(name.clone(), |n| n.trim().into());
    Some(match place::head(checked, item) {
        Some(Thing::Term(k)) => {
            let name = &model.terms[k].name;
            name.rsplit(' ').next().unwrap_or(name).to_owned()
        }
        Some(Thing::Force(k)) => numbered(&model.forces[k].name, keyword_text(checked, &checked.items[item])),
        Some(Thing::Constraint(k)) => numbered(&model.constraints[k].name, "constraint"),
        Some(Thing::Symmetry(k)) => numbered(&checked.symmetries[k].name, "symmetry"),
        Some(Thing::Conserved(k)) => numbered(&checked.conserved[k].name, "conserved"),
        Some(Thing::Run(k)) => numbered(&checked.runs[k].name, "run"),
        _ => {
            let names: Vec<&str> =
                checked.symbols.iter().filter(|s| s.item == Some(item)).map(|s| &*s.name).take(4).collect();
            if names.is_empty() {
                return None;
            }
            names.join(", ")
        }
    })
}

/// A formula of the model as it is written, on one line.
pub(super) fn written(checked: &Contents, item: usize, span: Span) -> String {
    let row = &checked.items[item];
    let text = checked.text.get(row.range.start + span.start as usize..row.range.start + span.end as usize);
    let mut out: Vec<&str> = Vec::new();
    for line in text.unwrap_or_default().lines() {
        let code = line.split('#').next().unwrap_or_default();
        out.extend(code.split_whitespace());
    }
    out.join(" ")
}

/// A fraction as a decimal number, where that is exact and short.
fn decimal(numerator: i64, denominator: i64) -> Option<String> {
    let (mut scale, mut digits) = (1_i64, 0);
    while digits < 15 && scale % denominator != 0 {
        (scale, digits) = (scale.checked_mul(10)?, digits + 1);
    }
    if scale % denominator != 0 {
        return None;
    }
    let n = numerator.checked_mul(scale / denominator)?;
    let (sign, n) = (if n < 0 { "-" } else { "" }, n.unsigned_abs());
    if digits == 0 {
        return Some(format!("{sign}{n}"));
    }
    let scale = scale.unsigned_abs();
    Some(format!("{sign}{}.{:0width$}", n / scale, n % scale, width = digits))
}

#[cfg(test)]
mod tests {
    use super::decimal;

    #[test]
    fn fractions_are_decimals_where_they_end() {
        let shown = |n, d| decimal(n, d).unwrap_or_else(|| "no".into());
        assert_eq!(shown(3, 20), "0.15");
        assert_eq!(shown(-98123, 10000), "-9.8123");
        assert_eq!(shown(12, 1), "12");
        assert_eq!(shown(1, 3), "no");
        assert_eq!(shown(1, i64::MAX), "no");
    }
}
