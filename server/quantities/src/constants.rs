//! Physical constants with value, unit, uncertainty and source (the table is `tables/constants.tsv`).

use crate::{Compound, Exact, Quantity, quantity, table};
use leastwise_algebra::Rational;
use std::collections::HashMap;
use std::sync::LazyLock;

/// A physical constant.
#[derive(Debug)]
pub struct Constant {
    /// Its symbol as a name of the language: `m_e`.
    pub symbol: &'static str,
    /// `electron mass`.
    pub name: &'static str,
    /// Its value in the unit, exact or as recommended.
    pub value: Exact,
    /// The standard uncertainty of the value in the same unit; `None` where it is exact.
    pub uncertainty: Option<Rational>,
    /// How the table gives the value: `1.380649e-23`, `6.67430(15)e-11`, `h / 2 / π`.
    pub given: &'static str,
    /// Its unit.
    pub unit: Compound,
    /// Its quantity, where it has a name.
    pub quantity: Option<&'static Quantity>,
    /// `CODATA 2022`, `SI 2019`, …
    pub source: &'static str,
    /// Its name in the CODATA list; empty where it is not in it.
    pub codata: &'static str,
}

impl Constant {
    /// Whether it has no uncertainty.
    pub fn is_exact(&self) -> bool {
        self.uncertainty.is_none()
    }

    /// The value with its unit as a parameter of a model takes it, `6.67430e-11 m^3/(kg s^2)`, and whether it is rounded:
    /// no value of a model has a π or endless digits.
    pub fn written(&self) -> (String, bool) {
        let digits = match (self.given.split_once('('), self.value.decimal()) {
            // The last zero of a measured value says how well it is known.
            (Some((head, tail)), _) => Some(format!("{head}{}", tail.split_once(')').map_or("", |(_, e)| e))),
            (None, decimal) => decimal.filter(|d| d.len() <= 24),
        };
        let rounded = digits.is_none();
        let number = digits.unwrap_or_else(|| self.value.rounded(10));
        let unit = self.unit.plain();
        // Behind a number a quotient begins with its sign.
        let unit = unit.strip_prefix("1/").map_or(unit.clone(), |below| format!("/{below}"));
        (if self.unit.factors().is_empty() { number } else { format!("{number} {unit}") }, rounded)
    }
}

struct Constants {
    list: Vec<Constant>,
    symbols: HashMap<&'static str, usize>,
}

static CONSTANTS: LazyLock<Constants> =
    LazyLock::new(|| read(include_str!("../tables/constants.tsv")).unwrap_or_else(|e| panic!("constants.tsv: {e}")));

fn read(text: &'static str) -> Result<Constants, String> {
    let mut out = Constants { list: Vec::<Constant>::new(), symbols: HashMap::new() };
    for [symbol, name, given, unit, kind, source, codata] in table::rows(text)? {
        let about = |e: &dyn std::fmt::Display| format!("{symbol}: {e}");
        // Only products of exact constants are formed, so that no uncertainty is lost.
        let known = |s: &str| Some(&out.list[*out.symbols.get(s)?]).filter(|c| c.is_exact()).map(|c| c.value.clone());
        let (value, uncertainty) = table::value(given, known).map_err(|e| about(&e))?;
        let unit = Compound::read(unit).map_err(|e| about(&e))?;
        let quantity = match kind {
            "" => None,
            kind => Some(quantity(kind).ok_or_else(|| about(&format!("quantity `{kind}`")))?),
        };
        if quantity.is_some_and(|q| q.dimension != unit.dimension()) {
            return Err(about(&format!("{unit} is no unit of {kind}")));
        }
        if out.symbols.insert(symbol, out.list.len()).is_some() {
            return Err(about(&"stands twice"));
        }
        out.list.push(Constant { symbol, name, value, uncertainty, given, unit, quantity, source, codata });
    }
    Ok(out)
}

/// All constants, in the order of the table.
pub fn constants() -> &'static [Constant] {
    &CONSTANTS.list
}

/// The constant of a symbol.
pub fn constant(symbol: &str) -> Option<&'static Constant> {
    let table = &*CONSTANTS;
    table.list.get(*table.symbols.get(symbol)?)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(symbol: &str, value: &str, uncertainty: Option<&str>, unit: &str) {
        let c = constant(symbol).unwrap_or_else(|| panic!("{symbol} is not in the table"));
        let shown = |x: &Exact| x.decimal().unwrap_or_else(|| x.to_string());
        let u = c.uncertainty.clone().map(|u| shown(&Exact::rational(u)));
        assert_eq!((shown(&c.value).as_str(), u.as_deref(), c.unit.to_string().as_str()), (value, uncertainty, unit));
    }

    #[test]
    fn exact_ones_are_exact() {
        check("c", "299792458", None, "m/s");
        check("e", "1.602176634e-19", None, "C");
        check("R", "8.31446261815324", None, "J/(mol·K)");
        check("F", "96485.3321233100184", None, "C/mol");
        check("g_n", "9.80665", None, "m/s²");
        check("G", "6.6743e-11", Some("1.5e-15"), "m³/(kg·s²)");
        check("m_e", "9.1093837139e-31", Some("2.8e-40"), "kg");
        check("μ_e", "-9.2847646917e-24", Some("2.9e-33"), "J/T");
        let ħ = constant("ħ").expect("in the table");
        assert_eq!(
            ħ.value.times(&Exact::PI).and_then(|x| x.times(&Exact::integer(2))),
            Some(constant("h").expect("in the table").value.clone())
        );
    }

    #[test]
    fn written_as_a_value() {
        let check = |symbol: &str, text: &str, rounded: bool| {
            assert_eq!(constant(symbol).map(Constant::written), Some((text.to_owned(), rounded)));
        };
        check("G", "6.67430e-11 m^3/(kg s^2)", false);
        check("c", "299792458 m/s", false);
        check("ħ", "1.054571818e-34 J s", true);
        check("R", "8.31446261815324 J/(mol K)", false);
        check("α", "7.2973525643e-3", false);
        check("R_inf", "10973731.568157 /m", false);
        check("g_e", "-2.00231930436092", false);
        check("N_A", "6.02214076e23 /mol", false);
    }

    #[test]
    fn relations_between_constants() {
        let f = |s: &str| constant(s).expect("in the table").value.to_f64();
        let check = |one: f64, other: f64| assert!((one / other - 1.0).abs() < 1e-9, "{one} {other}");
        check(f("ε₀") * f("μ₀") * f("c") * f("c"), 1.0);
        check(f("α"), f("e") * f("e") / (2.0 * f("ε₀") * f("h") * f("c")));
        check(f("a₀"), f("ħ") / (f("m_e") * f("c") * f("α")));
        check(f("R_inf"), f("m_e") * f("c") * f("α") * f("α") / (2.0 * f("h")));
        check(f("μ_B"), f("e") * f("ħ") / (2.0 * f("m_e")));
        check(f("λ_C"), f("h") / (f("m_e") * f("c")));
        check(f("Z₀"), f("μ₀") * f("c"));
        check(f("r_e"), f("α") * f("α") * f("a₀"));
        check(f("E_h"), f("e") * f("e") / (4.0 * std::f64::consts::PI * f("ε₀") * f("a₀")));
    }

    #[test]
    fn sources() {
        for c in constants() {
            assert_eq!(c.source == "CODATA 2022", !c.is_exact(), "{}", c.symbol);
            assert_eq!(c.source.starts_with("IAU"), c.codata.is_empty(), "{}", c.symbol);
        }
        assert!(constants().len() > 40);
    }
}
