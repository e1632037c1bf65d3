//! Conflicts of dimensions in words: at the smallest formula that is wrong, both sides named, where each comes from.

use super::units::Units;
use super::{Key, System, Why, place, report};
use crate::codes;
use crate::database::Reading;
use crate::finding::{LocalFinding, Place};
use crate::scope::SymbolKind;
use leastwise_grammar::tree::*;
use leastwise_quantities::unify::{Slip, Solution};
use leastwise_quantities::{Base, Dimension, Exponent, familiar, in_words};

/// Reasons that are shown beside a conflict.
const SHOWN: usize = 4;

/// A dimension as it is told: `a force (N)`, `a number`. `hint` names the quantity that it is declared as.
pub(super) fn words(dimension: Dimension, hint: Option<&str>) -> String {
    if dimension.is_one() {
        let angle = matches!(hint, Some("angle" | "twist"));
        return if angle { "an angle" } else { "a number" }.to_owned();
    }
    let name = in_words(dimension, Exponent::ZERO, hint);
    let unit = familiar(dimension, Exponent::ZERO, hint).unit.to_string();
    let article = if name.starts_with(['a', 'e', 'i', 'o', 'u']) { "an" } else { "a" };
    // Products of names are no quantities with an article.
    let name = if name.contains(['/', '·', '⁻', '²', '³']) { name } else { format!("{article} {name}") };
    if name == unit { name } else { format!("{name} ({unit})") }
}

/// Adds one finding for each slip.
pub(super) fn tell(reading: &mut Reading, system: &System, solution: &Solution, units: &Units) {
    let mut found = Vec::new();
    for slip in &solution.slips {
        let teller = Teller { reading, system, solution, units };
        if let Some(f) = teller.finding(slip) {
            found.push(f);
        }
    }
    for (entry, finding) in found {
        report(reading, entry, finding);
    }
}

struct Teller<'a> {
    reading: &'a Reading,
    system: &'a System,
    solution: &'a Solution,
    units: &'a Units,
}

impl Teller<'_> {
    /// The dimension of a sub-formula, where it is known.
    fn at(&self, entry: usize, span: Span) -> Option<Dimension> {
        let entry = self.system.entries.iter().find(|e| e.at == entry)?;
        let (_, form) = entry.asked.places.iter().find(|(s, _)| *s == span)?;
        place(entry, form, &self.solution.values, self.units)?.known()
    }

    fn words(&self, dimension: Dimension, hint: Option<&str>) -> String {
        words(self.units.project(dimension), hint)
    }

    /// The quantity that a name is declared as.
    fn declared(&self, name: &str) -> Option<&str> {
        let entry = self.reading.scope.get(name)?.entry?;
        let parsed = &self.reading.entries[entry].parsed;
        let quantity = match &parsed.item.kind {
            ItemKind::Coordinate { quantity, .. } | ItemKind::Input { quantity, .. } => quantity.as_ref(),
            ItemKind::Function { quantity, .. } => quantity.as_ref(),
            ItemKind::Parameter(list) => list.iter().find(|d| d.declared.name.text == name)?.quantity.as_ref(),
            _ => None,
        };
        match quantity?.factors.as_slice() {
            [one] => Some(&one.symbol.text),
            _ => None,
        }
    }

    /// The same of a formula that is a name.
    fn hint(&self, entry: usize, span: Span) -> Option<&str> {
        self.declared(self.reading.entries[entry].text.get(span.range())?)
    }

    fn text(&self, entry: usize, span: Span) -> &str {
        const LONGEST: usize = 40;
        let text = self.reading.entries[entry].text.get(span.range()).unwrap_or_default();
        if text.chars().count() > LONGEST || text.contains('\n') { "this" } else { text }
    }

    fn quoted(&self, entry: usize, span: Span) -> String {
        match self.text(entry, span) {
            "this" => "this".to_owned(),
            text => format!("`{text}`"),
        }
    }

    fn finding(&self, slip: &Slip) -> Option<(usize, LocalFinding)> {
        let reason = &self.system.reasons[slip.demand];
        let entry = reason.entry;
        if reason.why == Why::Energy {
            return self.other_than_energy(slip);
        }
        let span = reason.why.span()?;
        let here = self.quoted(entry, span);
        // What stands here, and what was asked: here = asked · gap.
        let is = self.at(entry, span);
        let asked = is.and_then(|d| d.over(slip.gap));
        let (is, asked) = match (is, asked) {
            (Some(is), Some(asked)) => (self.words(is, self.hint(entry, span)), self.words(asked, None)),
            // Only their quotient is known.
            _ => ("something else".to_owned(), format!("a quantity smaller by {}", words(slip.gap, None))),
        };
        let message = match &reason.why {
            Why::Summand { sum, .. } => {
                let others =
                    if self.is_comparison(entry, *sum) { "the other argument is" } else { "the rest of the sum is" };
                format!("{here} is {is}, and {others} {asked}")
            }
            Why::Components { .. } => format!("the products that are added in {here} are not alike"),
            Why::Argument { function, .. } => format!("the argument of `{function}` is {asked}, and {here} is {is}"),
            Why::Exponent { .. } => format!("an exponent is a number, and {here} is {is}"),
            Why::Is { what, .. } => format!("{what} is {asked}, and {here} is {is}"),
            Why::Force { on, velocities, .. } => {
                let on = self.quoted(entry, *on);
                let product = if *velocities { "a power" } else { "an energy" };
                format!("a force on {on} is {asked}, so that their product is {product}, and {here} is {is}")
            }
            Why::Sides { left, .. } => {
                let left = self.quoted(entry, *left);
                format!("{here} is {is}, and {left} is {asked}")
            }
            Why::Image { source, .. } => {
                let source = self.quoted(entry, *source);
                format!("the image of {source} is {asked}, and {here} is {is}")
            }
            Why::Call { name, .. } => format!("the arguments in {here} do not fit the definition of `{name}`"),
            Why::Declared { name, .. } => {
                let number = self.number(name)?;
                let value = self.solution.values[number].known();
                let meant = value.map_or_else(|| "something else".to_owned(), |d| self.words(d, None));
                // The name is the declared one times the gap.
                let declared = value.and_then(|d| d.over(slip.gap));
                let declared = declared.map_or_else(|| here.clone(), |d| self.words(d, self.declared(name)));
                format!("`{name}` is declared as {declared}, and everywhere used as {meant}")
            }
            Why::Definition { name, .. } => format!("`{name}` is everywhere used as {asked}, and {here} is {is}"),
            Why::Time | Why::Energy => return None,
        };
        let mut finding = LocalFinding::new(codes::UNLIKE_QUANTITIES, Severity::Warning, span, message);
        for &other in slip.because.iter().rev() {
            if finding.related.len() == SHOWN {
                break;
            }
            if let Some((place, text)) = self.reason(entry, other) {
                finding = finding.related(place, text);
            }
        }
        Some((entry, self.mended(entry, span, slip, finding, &reason.why)))
    }

    /// All terms agree on something that is no energy: one finding, at the first of them.
    fn other_than_energy(&self, slip: &Slip) -> Option<(usize, LocalFinding)> {
        let is_term = |e: &crate::scope::Entry| e.file == 0 && matches!(e.parsed.item.kind, ItemKind::Term { .. });
        let entry = self.reading.entries.iter().position(is_term)?;
        let ItemKind::Term { body, .. } = &self.reading.entries[entry].parsed.item.kind else { return None };
        let is = self.words(super::energy().times(slip.gap)?, None);
        let message = format!("the terms of L are alike, and not energies: {is}");
        let finding = LocalFinding::new(codes::UNLIKE_QUANTITIES, Severity::Warning, body.span, message).help(
            "multiply by what was set to one, or name it: `system NAME, with …`, or `system NAME, dimensionless`",
        );
        Some((entry, finding))
    }

    fn number(&self, name: &str) -> Option<usize> {
        self.system.numbers.get(&(None, Key::Name(name.into(), 0))).copied()
    }

    fn is_comparison(&self, entry: usize, sum: Span) -> bool {
        let text = self.reading.entries[entry].text.get(sum.range()).unwrap_or_default();
        ["min", "max", "atan2"].iter().any(|f| text.starts_with(f))
    }

    /// Where a side of a conflict comes from.
    fn reason(&self, entry: usize, demand: usize) -> Option<(Place, String)> {
        let reason = &self.system.reasons[demand];
        let place =
            |span: Span| if reason.entry == entry { Place::Here(span) } else { Place::Entry(reason.entry, span) };
        let span = reason.why.span()?;
        let shown = |span: Span| self.at(reason.entry, span).map(|d| self.words(d, self.hint(reason.entry, span)));
        let text = match &reason.why {
            Why::Declared { name, .. } => {
                let value = self.solution.values[self.number(name)?].known()?;
                format!("`{name}` is declared as {}", self.words(value, self.declared(name)))
            }
            Why::Is { what, .. } if what.starts_with("a diss") => format!("{what} is a power"),
            Why::Is { what, .. } => format!("{what} is an energy"),
            Why::Time | Why::Energy => return None,
            _ => format!("this is {}", shown(span)?),
        };
        Some((place(span), text))
    }

    /// The factors that would mend it: a name of the model to multiply or divide by, or a forgotten prime.
    fn mended(&self, entry: usize, span: Span, slip: &Slip, mut finding: LocalFinding, why: &Why) -> LocalFinding {
        if matches!(why, Why::Declared { .. } | Why::Call { .. } | Why::Components { .. }) {
            return finding;
        }
        let text = self.reading.entries[entry].text.get(span.range()).unwrap_or_default();
        let time = Dimension::of(Base::Time);
        for used in &self.reading.entries[entry].parsed.uses.names {
            let moves = self.reading.scope.get(&used.name).is_some_and(|d| d.kind == SymbolKind::Coordinate);
            for place in used.spans.iter().filter(|p| moves && span.start <= p.start && p.end <= span.end) {
                // How often the name counts in what stands here.
                let after = self.reading.entries[entry].text.get(place.end as usize..).unwrap_or_default();
                let after = after.trim_start_matches('\'');
                let power = match after.chars().next() {
                    Some('²') => 2,
                    Some('³') => 3,
                    Some('^') => after[1..].chars().next().and_then(|c| c.to_digit(10)).unwrap_or(1) as i16,
                    _ => 1,
                };
                if time.pow(Exponent::whole(power)) == Some(slip.gap) {
                    let end = Span { start: place.end, end: place.end };
                    finding = finding.fix(format!("write {}', its time derivative", used.name), end, "'");
                }
            }
        }
        let lone = !text.contains(['+', '-', '−']) || text.starts_with('(');
        let (open, close) = if lone { ("", "") } else { ("(", ")") };
        let factors = |gap: Dimension| {
            let names = self.reading.entries[entry].parsed.uses.names.iter().map(|u| u.name.as_str());
            let all = self.reading.scope.decls.iter().map(|d| &*d.name);
            let mut out: Vec<&str> = Vec::new();
            for name in names.chain(all) {
                let plain = self.reading.scope.get(name).is_some_and(|d| {
                    !d.is_family() && matches!(d.kind, SymbolKind::Coordinate | SymbolKind::Parameter)
                });
                let fits = || self.number(name).and_then(|n| self.solution.values[n].known()) == Some(gap);
                if plain && !out.contains(&name) && fits() && out.len() < 2 {
                    out.push(name);
                }
            }
            out
        };
        let (start, end) = (Span { start: span.start, end: span.start }, Span { start: span.end, end: span.end });
        if let Some(inverse) = slip.gap.pow(Exponent::whole(-1)) {
            for name in factors(inverse) {
                let edits = vec![(start, format!("{name} {open}")), (end, close.to_owned())];
                finding = finding.fixes(format!("multiply by {name}"), edits);
            }
        }
        for name in factors(slip.gap) {
            let edits = vec![(start, open.to_owned()), (end, format!("{close}/{name}"))];
            finding = finding.fixes(format!("divide by {name}"), edits);
        }
        finding
    }
}
