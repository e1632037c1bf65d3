//! Declarations: definitions, ranges of indices, values of parameters.

use super::{Lowerer, Meaning, UNROLLED};
use crate::codes;
use crate::finding::LocalFinding;
use crate::values::Value;
use leastwise_algebra::{Arena, Expr, Role};
use leastwise_grammar::tree::*;

impl<'a> Lowerer<'a> {
    /// The number of a value: arithmetic without names.
    pub fn constant(&mut self, f: &Formula) -> Option<Expr> {
        let e = self.scalar(f, "a value")?;
        if self.arena.atoms(e).is_empty() {
            return Some(e);
        }
        self.error(codes::VALUE_NUMBER, f.span, "a value is a number");
        None
    }

    /// Checks a definition, and gives its value where it is a plain one. Of a family each member is looked at.
    pub fn definition(&mut self, decl: &'a crate::scope::Decl) -> Option<Value> {
        let source = self.sources.get(decl.entry?)?.clone()?;
        let ItemKind::Let { body, .. } = &source.item.kind else { return None };
        if decl.formals.is_empty() && measure_like(body) && self.all_declared(body) {
            let finding = LocalFinding::new(
                leastwise_grammar::codes::UNIT_IN_FORMULA,
                Severity::Hint,
                body.span,
                "this multiplies and divides by declared names; units do not stand in formulas",
            )
            .help(format!("for a value with a unit write: parameter {} = …", decl.name));
            self.report(if decl.is_family() {
                finding
            } else {
                finding.fix("make it a parameter with this value", source.item.keyword, "parameter")
            });
        }
        // The shapes of the arguments are known at the calls only.
        for formal in &decl.formals {
            self.bindings.push(super::Binding { name: formal.clone(), value: Value::Missing, index: false });
        }
        let value = match (&decl.index, decl.range) {
            (Some(index), Some((lower, upper))) if upper - lower < UNROLLED => {
                for k in lower..=upper {
                    let value = self.with_index(&index.text, k, |l| l.lower(body));
                    if self.failed || self.stopped {
                        break;
                    }
                    let at = self.arena.integer(k);
                    if decl.formals.is_empty()
                        && let Some(d) = self.definitions.get_mut(&decl.fingerprint)
                    {
                        d.calls.insert((Some(at), Vec::new()), value);
                    }
                }
                None
            }
            (Some(index), Some((lower, upper))) => {
                let symbol = self.arena.symbol(&index.text, None, Role::Index);
                let e = self.arena.sym(symbol);
                let bounds = (self.arena.integer(lower), self.arena.integer(upper));
                self.with_open(&index.text, e, bounds, |l| l.lower(body));
                None
            }
            (Some(_), None) => None,
            (None, _) => Some(self.lower(body)).filter(|_| decl.formals.is_empty()),
        };
        self.bindings.clear();
        value
    }

    fn all_declared(&self, f: &Formula) -> bool {
        crate::uses::names_in(f).iter().all(|n| self.scope.get(n).is_some_and(|d| d.entry.is_some()))
    }

    /// A whole number.
    pub fn whole_number(&mut self, f: &Formula) -> Option<i64> {
        let value = self.lower(f);
        if value.is_missing() {
            return None;
        }
        let n = value.scalar().and_then(|e| self.arena.as_i64(e));
        if n.is_none() {
            let finding = LocalFinding::error(
                codes::SUM_RANGE,
                f.span,
                "the range of an index goes from a whole number to a whole number",
            )
            .help("write numbers, or an integer definition such as let N = 8");
            self.report(finding);
        }
        n
    }

    /// The values of parameters, with what is wrong in them.
    pub(super) fn values(&mut self, list: &[Declaration], dimensionless: bool) -> Meaning {
        let mut out = Vec::with_capacity(list.len());
        for (k, d) in list.iter().enumerate() {
            let shared = k > 0 && d.value == list[k - 1].value;
            out.push(d.value.as_ref().and_then(|v| self.parameter_value(d, v, dimensionless, shared)));
        }
        Meaning::Values(out)
    }

    fn parameter_value(
        &mut self,
        d: &Declaration,
        value: &leastwise_grammar::tree::Value,
        dimensionless: bool,
        shared: bool,
    ) -> Option<(Vec<Expr>, Option<UnitText>)> {
        let numbers = match &value.number.kind {
            FormulaKind::Tuple(items) => {
                let range = d.declared.index.as_ref().and_then(|i| self.scope.get(&i.text)).and_then(|d| d.range);
                let members = range.map(|(a, b)| b - a + 1);
                match (&d.declared.index, members) {
                    (None, _) => {
                        let message = format!("`{}` is one parameter and has one value", d.declared.name.text);
                        let finding = LocalFinding::error(codes::FAMILY_VALUES, value.number.span, message)
                            .help(format!("a family has an index: parameter {}[i] = (…)", d.declared.name.text));
                        self.report(finding);
                        return None;
                    }
                    (Some(_), Some(n)) if n != items.len() as i64 => {
                        let message = format!(
                            "`{}` has {n} members, and here stand {} values",
                            d.declared.name.text,
                            items.len()
                        );
                        self.error(codes::FAMILY_VALUES, value.number.span, message);
                        return None;
                    }
                    _ => items.iter().map(|f| self.constant(f)).collect::<Option<Vec<_>>>()?,
                }
            }
            FormulaKind::Missing => return None,
            _ => vec![self.constant(&value.number)?],
        };
        let shown = d.quantity.as_ref().map_or("", |q| q.factors.first().map_or("", |f| f.symbol.text.as_str()));
        if !dimensionless
            && !shared
            && let Some(quantity) = &d.quantity
        {
            let dimension = crate::quantities::dimension(quantity);
            let zero = numbers.iter().all(|n| *n == Arena::ZERO);
            self.unit_of(&d.declared.name.text, shown, dimension, zero, value);
        }
        Some((numbers, value.unit.clone()))
    }
}

fn article(name: &str) -> &'static str {
    if name.starts_with(['a', 'e', 'i', 'o', 'u']) { "an" } else { "a" }
}

impl Lowerer<'_> {
    /// The unit of a value fits the quantity `shown` with this dimension.
    pub(super) fn unit_of(
        &mut self,
        name: &str,
        shown: &str,
        dimension: Option<[i64; 7]>,
        zero: bool,
        value: &leastwise_grammar::tree::Value,
    ) {
        let Some(dimension) = dimension else { return };
        let is_quantity = crate::quantities::quantity(shown).is_some();
        let what =
            if is_quantity { format!("{} {shown}", article(shown)) } else { "a quantity with a unit".to_owned() };
        let Some(unit) = &value.unit else {
            if dimension != [0; 7] && !zero {
                let finding = LocalFinding::error(
                    codes::MISSING_UNIT,
                    value.span,
                    format!("`{name}` is {what}: its value needs a unit"),
                )
                .help("write the unit behind the number, or name the system `dimensionless`");
                let end = Span { start: value.span.end, end: value.span.end };
                self.report(match crate::quantities::usual_unit(shown, dimension) {
                    Some(unit) => finding.fix(format!("write the unit {unit}"), end, format!(" {unit}")),
                    None => finding,
                });
            }
            return;
        };
        // A unit that is not known has a finding of its own.
        let Some(given) = crate::quantities::dimension(unit) else { return };
        if given != dimension {
            let message = format!("`{name}` is {what}, and this is no unit of it");
            self.report(LocalFinding::error(codes::UNIT_MISMATCH, unit.span, message));
        } else if matches!(shown, "angular_velocity" | "angular_frequency")
            && unit.factors.iter().any(|f| f.symbol.text.ends_with("Hz"))
        {
            let finding = LocalFinding::new(
                codes::HERTZ,
                Severity::Warning,
                unit.span,
                "Hz counts turns: 1 Hz is 2π rad/s, and is read as 1/s here",
            )
            .help("write rad/s, or declare a frequency and multiply by 2 π");
            // `50 Hz` alone; of kHz the number would be another.
            let plain = matches!(&*unit.factors, [f] if f.symbol.text == "Hz" && f.exponent == (1, 1));
            self.report(if plain {
                finding.fix("write r/s, turns per second", unit.span, "r/s").fix("write rad/s", unit.span, "rad/s")
            } else {
                finding
            });
        }
    }
}

/// A hint at a definition that looks like a number with its unit: `let g = 9.81 m/s^2`.
pub(crate) fn measure_like(body: &Formula) -> bool {
    let list = super::products::factors(body);
    let number = matches!(list.first(), Some((_, f)) if matches!(f.kind, FormulaKind::Number(_)));
    let unit = |f: &Formula| match &f.kind {
        FormulaKind::Name(name) => crate::quantities::unit(name).is_some(),
        FormulaKind::Pow(base, power) => {
            matches!(&base.kind, FormulaKind::Name(name) if crate::quantities::unit(name).is_some())
                && matches!(power.kind, FormulaKind::Number(_))
        }
        _ => false,
    };
    let quotient = list.iter().any(|(operator, _)| *operator == super::products::Operator::Over);
    number && quotient && list.len() > 2 && list[1..].iter().all(|(_, f)| unit(f))
}
