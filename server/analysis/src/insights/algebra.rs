//! The algebra of the charges in print: brackets, centre, names with their conditions.

use super::asked;
use super::charges::{Charge, Source, charges, symbol};
use crate::checked::Checked;
use crate::derive::Derived;
use crate::report::Formula;
use crate::sheet::Maker;
use leastwise_algebra::{Arena, Expr, Rational, Stopped};
use leastwise_mechanics::brackets::{self, ChargeAlgebra, Condition, Outcome, Sign, charge_algebra};
use leastwise_mechanics::energy::is_total_energy;

/// A proved constant on the sheet.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Constant {
    /// Its name in the brackets: `h`, `p_φ`, or that of the claim.
    pub name: String,
    /// Where it comes from.
    pub source: Source,
    /// Its value.
    pub formula: Formula,
    /// For a constant that is a combination of those before it: which.
    pub dependent: Option<Formula>,
}

/// A structure constant with the charges that it multiplies; none for a number.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Summand {
    /// Free of coordinates, velocities and time.
    pub coefficient: Formula,
    /// Names of charges.
    pub charges: Vec<String>,
}

/// How far a bracket is known.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum BracketStatus {
    /// A combination of the charges, proved.
    Closed,
    /// None was found: the bracket itself is shown.
    Open,
    /// A combination was found and not proved.
    Undecided(String),
}

/// {left, right}, where it is not proved to vanish.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct BracketRow {
    /// Name of the first charge.
    pub left: String,
    /// Name of the second.
    pub right: String,
    /// The combination in names of charges, or the bracket itself; `undefined` where it is undecided.
    pub value: Formula,
    /// The structure constants, of a closed bracket.
    pub summands: Vec<Summand>,
    /// How far it is known.
    pub status: BracketStatus,
}

/// A sign on which a name depends.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct ConditionRow {
    /// What has the sign: a charge's name, or an expression of the parameters.
    pub of: Formula,
    /// `<`, `=` or `>`, compared with 0.
    pub relation: &'static str,
    /// The same in words: `the energy is negative`, `k > 0`.
    pub words: String,
}

/// What the charges form, where the coefficients of their brackets do not vanish.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct NamedRow {
    /// The algebra's name, where it is determined: `so(4)`, `e(2) ⊕ ℝ`.
    pub name: Option<String>,
    /// What can be said in any case: `solvable`.
    pub kind: String,
    /// The dimension, central constants counted, the charge of the level sets not.
    pub dimension: usize,
    /// All must hold; none for a name without condition.
    pub conditions: Vec<ConditionRow>,
    /// The charge that is a number there: the name holds on its level sets.
    pub on_level_sets_of: Option<String>,
}

/// The brackets of the basis.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Algebra {
    /// Brackets that are not proved to vanish.
    pub brackets: Vec<BracketRow>,
    /// Names of charges whose brackets with all others vanish.
    pub central: Vec<String>,
    /// Constants among the brackets' values: central charges.
    pub central_constants: Vec<Formula>,
    /// Whether every bracket is a combination of the charges.
    pub closed: bool,
    /// Names, by conditions.
    pub named: Vec<NamedRow>,
    /// Coefficients of brackets that the names take not to vanish, and of which it is not known.
    pub not_zero: Vec<Formula>,
    /// Whether forces beside L act: then a bracket of two constants need not be a third one.
    pub forced: bool,
}

/// The proved constants and their algebra.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct AlgebraReport {
    /// All constants in order, those that depend on earlier ones among them.
    pub charges: Vec<Constant>,
    /// The brackets, or why there are none.
    pub algebra: Result<Algebra, String>,
}

impl AlgebraReport {
    /// Names of the independent charges.
    pub fn basis(&self) -> impl Iterator<Item = &Constant> {
        self.charges.iter().filter(|c| c.dependent.is_none())
    }

    /// The charge of a claimed symmetry, or that to which it is equal up to its sign, among the independent ones.
    pub fn of_symmetry(&self, claim: &str) -> Option<&Constant> {
        let own = self.charges.iter().find(|c| c.source == Source::Symmetry(claim.to_owned()))?;
        let Some(other) = &own.dependent else { return Some(own) };
        let name = other.text.strip_prefix('-').unwrap_or(&other.text);
        self.basis().find(|c| c.name == name)
    }
}

impl Algebra {
    /// What the charges form: `The charges form so(3) ⊕ ℝ.`; nothing where that is not known.
    pub fn sentence(&self) -> Option<String> {
        let words: Vec<String> = self.named.iter().map(NamedRow::words).collect();
        if words.is_empty() {
            return None;
        }
        let words = words.join("; ");
        let assumed: Vec<String> = self.not_zero.iter().map(|f| format!("{} ≠ 0", f.text)).collect();
        let generic = if assumed.is_empty() { String::new() } else { format!(", for {}", assumed.join(", ")) };
        Some(match self.named.iter().find_map(|n| n.on_level_sets_of.as_ref()) {
            Some(level) => format!("On the level sets of {level} the other charges form {words}{generic}."),
            None => format!("The charges form {words}{generic}."),
        })
    }
}

impl NamedRow {
    /// `so(4) where the energy is negative`, `the Heisenberg algebra`.
    pub fn words(&self) -> String {
        let name = match &self.name {
            Some(name) => match name.strip_prefix("abelian, ") {
                Some(power) => format!("the abelian algebra {power}"),
                None if name.contains("algebra") => format!("the {name}"),
                None => name.clone(),
            },
            None => format!("a Lie algebra of dimension {}, {}", self.dimension, self.kind),
        };
        let conditions: Vec<&str> = self.conditions.iter().map(|c| c.words.as_str()).collect();
        if conditions.is_empty() { name } else { format!("{name} where {}", conditions.join(" and ")) }
    }
}

/// The algebra of the model's proved constants, derived once; `None` where there is none, where the model is incomplete, or
/// where the derivation was cancelled.
pub(crate) fn algebra<'d>(maker: &mut Maker<'_>, checked: &Checked, derived: &'d Derived) -> Option<&'d AlgebraReport> {
    if let Some(known) = derived.insights.algebra.get() {
        return known.as_ref();
    }
    if !checked.complete {
        return None;
    }
    let found = report(maker, checked, derived).ok()?;
    derived.insights.algebra.get_or_init(|| found).as_ref()
}

/// Errors: [`Stopped::Cancelled`] only.
fn report(maker: &mut Maker<'_>, checked: &Checked, derived: &Derived) -> Result<Option<AlgebraReport>, Stopped> {
    let list = charges(maker, checked, derived);
    if list.is_empty() {
        return Ok(None);
    }
    let model = checked.model();
    let asking: Vec<brackets::Charge> =
        list.iter().map(|c| brackets::Charge { name: c.name.clone(), value: c.value }).collect();
    let answer = match asked(maker, |cx| charge_algebra(cx, model, &asking)) {
        Ok(Ok(found)) => Ok(found),
        Ok(Err(refusal)) => Err(refusal.to_string()),
        Err(Stopped::Cancelled) => return Err(Stopped::Cancelled),
        Err(stopped) => Err(format!("no brackets: {stopped}")),
    };
    let symbols: Vec<Expr> = list.iter().map(|c| symbol(maker.arena, &c.name)).collect();
    let mut charges = Vec::new();
    for (k, c) in list.iter().enumerate() {
        let combination = answer.as_ref().ok().and_then(|a| a.dependent.iter().find(|d| d.charge == k));
        let dependent = combination.map(|d| {
            let e = sum(maker.arena, &symbols, &d.combination);
            maker.print(e)
        });
        let formula = maker.print(c.value);
        charges.push(Constant { name: c.name.clone(), source: c.source.clone(), formula, dependent });
    }
    let algebra = match answer {
        Ok(found) => Ok(printed(maker, checked, &list, &symbols, &found)),
        Err(why) => Err(why),
    };
    Ok(Some(AlgebraReport { charges, algebra }))
}

fn printed(
    maker: &mut Maker<'_>,
    checked: &Checked,
    list: &[Charge],
    symbols: &[Expr],
    found: &ChargeAlgebra,
) -> Algebra {
    let name = |k: usize| list[k].name.clone();
    let mut brackets = Vec::new();
    for b in &found.brackets {
        let (value, summands, status) = match &b.outcome {
            Outcome::Closed(sum) if sum.is_empty() => continue,
            Outcome::Closed(list) => {
                let summands = list
                    .iter()
                    .map(|s| Summand {
                        coefficient: maker.print(s.coefficient),
                        charges: s.charges.iter().map(|&k| name(k)).collect(),
                    })
                    .collect();
                (sum(maker.arena, symbols, list), summands, BracketStatus::Closed)
            }
            Outcome::NotClosed(e) => (*e, Vec::new(), BracketStatus::Open),
            Outcome::Undecided(why) => (Arena::UNDEFINED, Vec::new(), BracketStatus::Undecided(why.clone())),
        };
        let value = maker.print(value);
        brackets.push(BracketRow { left: name(b.left), right: name(b.right), value, summands, status });
    }
    let total = list.first().is_some_and(|c| {
        c.source == Source::Energy && is_total_energy(&mut maker.cx(), checked.model(), c.value).is_proved()
    });
    let mut not_zero: Vec<Expr> = Vec::new();
    for b in &found.brackets {
        let Outcome::Closed(sum) = &b.outcome else { continue };
        for s in sum {
            let (_, base) = maker.arena.split_coefficient(s.coefficient);
            let known = maker.zero.sign_of(maker.arena, base, maker.budget).is_nonzero();
            // What the names distinguish by its sign is told with them.
            let told = found
                .named
                .iter()
                .flat_map(|n| &n.conditions)
                .any(|c| *c == Condition::Parameter(base, Sign::Positive));
            if !known && !told && !not_zero.contains(&base) {
                not_zero.push(base);
            }
        }
    }
    let mut named = Vec::new();
    for n in &found.named {
        let mut conditions = Vec::new();
        for c in &n.conditions {
            let (of, sign) = match c {
                Condition::Charge(k, sign) => (symbols[*k], *sign),
                Condition::Parameter(e, sign) => (*e, *sign),
            };
            let (relation, word) = match sign {
                Sign::Negative => ("<", "negative"),
                Sign::Zero => ("=", "zero"),
                Sign::Positive => (">", "positive"),
            };
            let of = maker.print(of);
            let words = match c {
                Condition::Charge(0, _) if total => format!("the energy is {word}"),
                _ => format!("{} {relation} 0", of.text),
            };
            conditions.push(ConditionRow { of, relation, words });
        }
        named.push(NamedRow {
            name: n.name.clone(),
            kind: n.kind.clone(),
            dimension: n.dimension,
            conditions,
            on_level_sets_of: n.on_level_sets_of.map(name),
        });
    }
    Algebra {
        brackets,
        central: found.central.iter().map(|&k| name(k)).collect(),
        central_constants: found.central_constants.iter().map(|&e| maker.print(e)).collect(),
        closed: found.closed(),
        named,
        not_zero: not_zero.into_iter().map(|e| maker.print(e)).collect(),
        forced: found.forced,
    }
}

/// A combination in names of charges.
fn sum(arena: &mut Arena, symbols: &[Expr], list: &[brackets::Summand]) -> Expr {
    let mut parts = Vec::new();
    for s in list {
        let mut factors = vec![s.coefficient];
        factors.extend(s.charges.iter().map(|&k| symbols[k]));
        parts.push((arena.product(&factors), Rational::ONE));
    }
    arena.linear(&parts)
}
