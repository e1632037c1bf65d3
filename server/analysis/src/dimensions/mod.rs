//! The dimensions of all formulas of a model: inferred, compared, and told where they do not agree.
//!
//! Each item asks something of its formulas, in unknowns of its own numbering; that is kept as long as neither it nor
//! what it names changes. All that is asked makes one system: see `leastwise_quantities::unify`.

mod derived;
mod items;
mod size;
#[cfg(test)]
mod slips;
#[cfg(test)]
mod tests;
mod told;
mod units;
mod walk;

use crate::database::Reading;
use crate::finding::LocalFinding;
use crate::report::Measured;
use crate::scope::{Parsed, SymbolKind};
use leastwise_algebra::{Arena, Expr};
use leastwise_grammar::tree::*;
use leastwise_quantities::unify::{Demand, Form, Unknown, solve};
use leastwise_quantities::{Dimension, Exponent};
use size::Size;
use std::collections::HashMap;
use std::sync::Arc;
use units::Units;

/// The dimension of an energy.
pub(crate) fn energy() -> Dimension {
    Dimension::whole([2, 1, -2, 0, 0, 0, 0])
}

/// What has an unknown dimension.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub(crate) enum Key {
    /// A name, or a component of a vector that it stands for.
    Name(Arc<str>, u32),
    /// The Lagrangian: an energy, as far as the model does not agree on something else.
    Lagrangian,
    /// An argument of an unspecified function.
    Argument(Arc<str>, u32),
    /// An unknown of one item: a sum, the parameter of a transformation.
    Local(u32),
}

/// Why two sizes are alike.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) enum Why {
    /// A summand is like its sum.
    Summand { span: Span, sum: Span },
    /// Components that are added without being written.
    Components { span: Span },
    /// The argument of a function.
    Argument { span: Span, function: Arc<str> },
    /// An exponent is a number.
    Exponent { span: Span },
    /// A term is like L, a dissipation function like L over time.
    Is { span: Span, what: &'static str },
    /// L is an energy.
    Energy,
    /// A force times what it acts on is an energy, or with velocities a power.
    Force { span: Span, on: Span, velocities: bool },
    /// Two sides of an equation or comparison.
    Sides { span: Span, left: Span },
    /// An image is like its source.
    Image { span: Span, source: Span },
    /// A call of a definition does not fit the definition.
    Call { span: Span, name: Arc<str> },
    /// A name is what its definition is.
    Definition { span: Span, name: Arc<str> },
    /// The argument of a function of `t` is the time.
    Time,
    /// A declaration says so.
    Declared { span: Span, name: Arc<str> },
}

impl Why {
    /// Where it is asked.
    pub fn span(&self) -> Option<Span> {
        match self {
            Why::Summand { span, .. }
            | Why::Components { span }
            | Why::Argument { span, .. }
            | Why::Exponent { span }
            | Why::Is { span, .. }
            | Why::Force { span, .. }
            | Why::Sides { span, .. }
            | Why::Image { span, .. }
            | Why::Call { span, .. }
            | Why::Definition { span, .. }
            | Why::Declared { span, .. } => Some(*span),
            Why::Time | Why::Energy => None,
        }
    }
}

/// That a form is a number.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) struct Wish {
    pub gap: Form,
    pub firm: bool,
    pub why: Why,
}

/// What an item asks, in its own numbering of unknowns.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) struct Asked {
    pub keys: Vec<Key>,
    pub wishes: Vec<Wish>,
    /// Sub-formulas, outer ones first.
    pub places: Vec<(Span, Form)>,
    /// What its declarations say: a name, what it is, where it says so.
    declared: Vec<(Arc<str>, Dimension, Span)>,
    /// Of a definition: the shape of its value.
    shape: Size,
}

/// What items ask, by fingerprint, with the check that last used it.
pub(crate) type Kept = HashMap<u64, (Arc<Asked>, u64)>;

/// The dimensions of a model.
#[derive(Clone, Default, Debug)]
pub(crate) struct Dimensions {
    /// What each entry asks, with the numbers of its unknowns.
    entries: Vec<Entry>,
    /// The unknowns.
    keys: Vec<(Option<usize>, Key)>,
    numbers: HashMap<(Option<usize>, Key), Unknown>,
    /// Each unknown in the free ones.
    values: Vec<Form>,
    units: Units,
    /// The first entry of the model's own file.
    own: usize,
}

/// An entry in the system.
#[derive(Clone, Debug)]
struct Entry {
    at: usize,
    asked: Arc<Asked>,
    numbers: Vec<Unknown>,
}

/// A demand with its reason and its item.
pub(super) struct Reason {
    entry: usize,
    why: Why,
}

/// The whole system.
pub(super) struct System {
    numbers: HashMap<(Option<usize>, Key), Unknown>,
    keys: Vec<(Option<usize>, Key)>,
    demands: Vec<Demand>,
    reasons: Vec<Reason>,
    entries: Vec<Entry>,
}

impl System {
    fn number(&mut self, entry: usize, key: &Key) -> Unknown {
        let owner = matches!(key, Key::Local(_)).then_some(entry);
        let next = self.keys.len();
        let number = *self.numbers.entry((owner, key.clone())).or_insert(next);
        if number == next {
            self.keys.push((owner, key.clone()));
        }
        number
    }

    fn ask(&mut self, entry: usize, gap: Form, firm: bool, why: Why) {
        self.demands.push(Demand { gap, firm });
        self.reasons.push(Reason { entry, why });
    }
}

/// Infers and compares. `None` where the model says nothing of quantities, or that it has none.
pub(crate) fn check(
    reading: &mut Reading,
    kept: &mut Kept,
    generation: u64,
    fingerprint: &dyn Fn(&Reading, usize) -> u64,
    on_velocities: &dyn Fn(&Reading, usize) -> bool,
) -> Option<Dimensions> {
    if Units::are_off(reading) {
        return None;
    }
    let sources: Vec<Arc<Parsed>> = reading.entries.iter().map(|e| e.parsed.clone()).collect();
    let mut shapes: HashMap<Arc<str>, Size> = HashMap::new();
    let mut asked: Vec<(usize, Arc<Asked>)> = Vec::new();
    // Definitions after those that they need, then all others.
    let definitions = reading.order.iter().map(|&d| &reading.scope.decls[d]);
    let definitions: Vec<usize> =
        definitions.filter(|d| d.kind == SymbolKind::Definition && !d.failed).filter_map(|d| d.entry).collect();
    let others = (0..reading.entries.len()).filter(|&k| {
        let kind = &reading.entries[k].parsed.item.kind;
        let needed = reading.entries[k].file == 0 && !reading.failed[k] || items::declares(kind);
        needed && !matches!(kind, ItemKind::Let { .. })
    });
    for at in definitions.into_iter().chain(others) {
        let key = fingerprint(reading, at);
        let known = kept.get_mut(&key).map(|(a, used)| {
            *used = generation;
            a.clone()
        });
        let result = known.unwrap_or_else(|| {
            let parsed = &reading.entries[at].parsed;
            let result = Arc::new(items::ask(&reading.scope, &sources, &shapes, parsed, on_velocities(reading, at)));
            kept.insert(key, (result.clone(), generation));
            result
        });
        if let ItemKind::Let { declared, formals, .. } = &reading.entries[at].parsed.item.kind
            && formals.is_empty()
        {
            shapes.insert(declared.name.text.as_str().into(), result.shape.clone());
        }
        asked.push((at, result));
    }
    if asked.iter().all(|(_, a)| a.declared.is_empty()) {
        return None;
    }
    let units = Units::of(reading, &asked);
    // In the order of the file: what is asked later is blamed first.
    asked.sort_by_key(|(at, _)| *at);
    let system = system(reading, asked, &units);
    let solution = solve(system.keys.len(), &system.demands);
    if !solution.slips.is_empty() {
        told::tell(reading, &system, &solution, &units);
    }
    let own = reading.entries.iter().position(|e| e.file == 0).unwrap_or(0);
    let System { numbers, keys, entries, .. } = system;
    Some(Dimensions { entries, keys, numbers, values: solution.values, units, own })
}

/// All demands in one numbering.
fn system(reading: &Reading, asked: Vec<(usize, Arc<Asked>)>, units: &Units) -> System {
    let mut system = System {
        numbers: HashMap::new(),
        keys: Vec::new(),
        demands: Vec::new(),
        reasons: Vec::new(),
        entries: Vec::new(),
    };
    // L comes first: it is blamed only where that spares more than one term.
    let lagrangian = system.number(0, &Key::Lagrangian);
    if let Some(gap) = Form::unknown(lagrangian).over(&units.project(energy()).into()) {
        system.ask(0, gap, false, Why::Energy);
    }
    // Names come first, in the order of their declarations.
    for decl in &reading.scope.decls {
        if !matches!(decl.kind, SymbolKind::Index) {
            system.number(0, &Key::Name(decl.name.clone(), 0));
        }
    }
    for (at, asked) in asked {
        for (name, dimension, span) in &asked.declared {
            let own = reading.scope.get(name).is_some_and(|d| d.entry == Some(at));
            let number = system.number(at, &Key::Name(name.clone(), 0));
            if let Some(gap) = Form::unknown(number).over(&units.project(*dimension).into()).filter(|_| own) {
                system.ask(at, gap, false, Why::Declared { span: *span, name: name.clone() });
            }
        }
        if let ItemKind::Function { declared, formals, .. } = &reading.entries[at].parsed.item.kind {
            let names: Vec<Arc<str>> = formals.iter().map(|f| f.text.as_str().into()).collect();
            if let Some(form) = items::of_time(&names) {
                let name: Arc<str> = declared.name.text.as_str().into();
                let number = system.number(at, &Key::Argument(name, 0));
                if let Some(gap) = Form::unknown(number).over(&units.form(&form)) {
                    system.ask(at, gap, true, Why::Time);
                }
            }
        }
        let numbers: Vec<Unknown> = asked.keys.iter().map(|k| system.number(at, k)).collect();
        for wish in &asked.wishes {
            let gap = units.form(&wish.gap.renumbered(&numbers));
            system.ask(at, gap, wish.firm, wish.why.clone());
        }
        system.entries.push(Entry { at, asked, numbers });
    }
    system
}

/// The dimension of a sub-formula, with the values of the unknowns.
fn place(entry: &Entry, form: &Form, values: &[Form], units: &Units) -> Option<Form> {
    units.form(&form.renumbered(&entry.numbers)).substituted(values)
}

impl Dimensions {
    /// The dimension of a name, where it is known.
    pub fn of_name(&self, name: &str) -> Option<Dimension> {
        self.form_of_name(name)?.known()
    }

    /// The dimension of a name, with what it depends on; of a vector that of its first component.
    pub fn form_of_name(&self, name: &str) -> Option<&Form> {
        self.values.get(*self.numbers.get(&(None, Key::Name(name.into(), 0)))?)
    }

    /// What an unknown is.
    pub fn key(&self, unknown: Unknown) -> Option<&Key> {
        self.keys.get(unknown).map(|k| &k.1)
    }

    /// The smallest sub-formula of one of the model's own items around an offset in it, and its dimension.
    pub fn at(&self, item: usize, offset: usize) -> Option<(Span, Form)> {
        let entry = self.entries.iter().find(|e| e.at == self.own + item)?;
        let around = entry.asked.places.iter();
        let around = around.filter(|(s, _)| s.range().contains(&offset) || s.end as usize == offset);
        let (span, form) = around.min_by_key(|(s, _)| s.end - s.start)?;
        Some((*span, place(entry, form, &self.values, &self.units)?))
    }

    /// A dimension in words: `a stiffness (N/m)`; where it is not determined, what it depends on.
    pub fn words(&self, form: &Form, hint: Option<&str>) -> String {
        let Some(known) = form.known() else {
            let names: Vec<String> = form.unknowns().iter().filter_map(|(u, _)| self.name_of(*u)).collect();
            return match names.is_empty() {
                true => "of a quantity that nothing determines".to_owned(),
                false => format!("of a quantity that depends on {}", names.join(", ")),
            };
        };
        told::words(self.units.project(known), hint)
    }

    /// The unit in which a known dimension is usually given; nothing for a number.
    pub fn unit(&self, form: &Form, hint: Option<&str>) -> Option<String> {
        let known = self.units.project(form.known()?);
        let unit = leastwise_quantities::familiar(known, Exponent::ZERO, hint).unit;
        (!known.is_one()).then(|| unit.to_string())
    }

    /// The quantity and unit of a derived expression: `energy` and `J`. Nothing where they are not known.
    pub fn measured(&self, arena: &Arena, e: Expr, hint: Option<&str>) -> Option<Measured> {
        let known = derived::dimension(self, arena, e)?;
        let familiar = leastwise_quantities::familiar(known, Exponent::ZERO, hint);
        let unit = if known.is_one() { "1".to_owned() } else { familiar.unit.to_string() };
        Some(Measured { quantity: familiar.quantity.map(|q| q.name.to_owned()), unit })
    }

    fn name_of(&self, unknown: Unknown) -> Option<String> {
        match self.key(unknown)? {
            Key::Name(name, _) => Some(format!("`{name}`")),
            Key::Argument(function, _) => Some(format!("the argument of `{function}`")),
            Key::Lagrangian => Some("L".to_owned()),
            Key::Local(_) => None,
        }
    }
}

/// Adds a finding to an entry.
fn report(reading: &mut Reading, entry: usize, finding: LocalFinding) {
    reading.findings.push((entry, finding));
}
