//! Units with their symbols, prefixes and exact factors (SI Brochure, 9th ed.; the table is `tables/units.tsv`).

use crate::{Compound, Dimension, Exact, Exponent, Prefix, prefixes, table};
use leastwise_algebra::Rational;
use std::fmt;
use std::sync::OnceLock;

/// Where a unit belongs in the SI Brochure, 9th ed.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Group {
    /// Base units, and the gram.
    Base,
    /// Derived units with special names, table 4.
    Derived,
    /// Non-SI units that are accepted for use with the SI, table 8.
    Accepted,
    /// The revolution, per cent, and another name of the dalton.
    Other,
}

/// What has to be minded with a unit.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Mark {
    /// Nothing.
    None,
    /// Counts events or turns in a time: not for angular velocities.
    Cycle,
    /// A logarithmic quantity, which is not converted by a factor.
    Level,
    /// A difference of two temperatures.
    Difference,
}

/// Which prefixes a unit takes.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Prefixes {
    /// All.
    All,
    /// Those with these symbols; none where there are none.
    Only(&'static [&'static str]),
}

impl Prefixes {
    /// Whether this one is among them.
    pub fn take(&self, prefix: &Prefix) -> bool {
        match self {
            Prefixes::All => true,
            Prefixes::Only(list) => list.contains(&prefix.symbol),
        }
    }
}

/// A unit without prefix.
#[derive(Debug)]
pub struct Unit {
    /// As the SI Brochure writes it: `Ω`.
    pub symbol: &'static str,
    /// Other spellings of the symbol.
    pub aliases: &'static [&'static str],
    /// `ohm`.
    pub name: &'static str,
    /// Where it belongs.
    pub group: Group,
    /// Its dimension.
    pub dimension: Dimension,
    /// The power of the radian in it. An angle is of dimension one, and yet told apart.
    pub angle: Exponent,
    /// The prefixes that it takes.
    pub prefixes: Prefixes,
    /// What has to be minded.
    pub mark: Mark,
    /// Where the factor comes from, or another remark; may be empty.
    pub remark: &'static str,
    /// The number of the table, and what it is multiplied with.
    given: &'static str,
    of: &'static str,
    value: OnceLock<Value>,
}

/// A unit with its prefix, or without one: `kg`, `mm`, `Hz`.
#[derive(Clone, Copy)]
pub struct Symbol {
    /// The prefix.
    pub prefix: Option<&'static Prefix>,
    /// The unit.
    pub unit: &'static Unit,
    /// The unit's symbol as it was written: an alias stays.
    written: &'static str,
}

impl fmt::Debug for Symbol {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.text())
    }
}

impl PartialEq for Symbol {
    fn eq(&self, other: &Symbol) -> bool {
        self.prefix == other.prefix && self.unit.symbol == other.unit.symbol
    }
}

impl Symbol {
    /// As written: `mm`.
    pub fn text(&self) -> String {
        format!("{}{}", self.prefix.map_or("", |p| p.symbol), self.written)
    }

    /// `millimetre`.
    pub fn name(&self) -> String {
        format!("{}{}", self.prefix.map_or("", |p| p.name), self.unit.name)
    }

    /// How many coherent SI units it is.
    pub fn factor(&self) -> Exact {
        match self.prefix {
            // A prefix and a factor of the table are far from the bounds.
            Some(p) => p.factor().times(self.unit.factor()).unwrap_or(Exact::ONE),
            None => self.unit.factor().clone(),
        }
    }
}

// `UNITS` and `SYMBOLS`, their symbols and aliases with their places, from `tables/units.tsv`.
include!(concat!(env!("OUT_DIR"), "/units.rs"));

/// What a row says of the factor.
#[derive(Debug)]
struct Value {
    factor: Exact,
    uncertainty: Option<Rational>,
    definition: String,
}

impl Unit {
    /// How many coherent SI units it is.
    pub fn factor(&self) -> &Exact {
        &self.value().factor
    }

    /// The standard uncertainty of the factor, where it is measured.
    pub fn uncertainty(&self) -> Option<&Rational> {
        self.value().uncertainty.as_ref()
    }

    /// How it is defined, `60 min`; empty for base units.
    pub fn definition(&self) -> &str {
        &self.value().definition
    }

    fn value(&self) -> &Value {
        self.value.get_or_init(|| self.read().unwrap_or_else(|e| panic!("units.tsv: {}: {e}", self.symbol)))
    }

    fn read(&self) -> Result<Value, String> {
        let (number, uncertainty) = table::value(self.given, |_| None)?;
        if self.of.starts_with('[') {
            return Ok(Value { factor: number, uncertainty, definition: String::new() });
        }
        let of = Compound::read(self.of).map_err(|e| e.to_string())?;
        if of.dimension() != self.dimension {
            return Err(format!("{of} is not of dimension {}", self.dimension));
        }
        let scale = of.factor().map_err(|e| e.to_string())?;
        let uncertainty = match (uncertainty, scale.to_rational()) {
            (Some(u), Some(scale)) => Some(u.mul(scale)),
            (Some(_), None) => return Err("a measured multiple of an irrational unit".to_owned()),
            // A multiple of a measured unit is as uncertain.
            (None, _) => of.uncertainty().zip(number.to_rational()).map(|(u, n)| u.mul(n)),
        };
        let shown = number.decimal().unwrap_or_else(|| number.to_string());
        let definition = match (number.is_one(), of.factors().is_empty()) {
            (_, true) => shown,
            (true, _) => of.to_string(),
            _ => format!("{shown} {of}"),
        };
        Ok(Value { factor: scale.times(&number).ok_or("too large")?, uncertainty, definition })
    }
}

fn plain(symbol: &str) -> Option<(&'static Unit, &'static str)> {
    let at = SYMBOLS.binary_search_by(|(s, _)| (*s).cmp(symbol)).ok()?;
    let (written, row) = SYMBOLS[at];
    Some((&UNITS[row], written))
}

fn lookup(symbol: &str) -> Option<Symbol> {
    if let Some((unit, written)) = plain(symbol) {
        return Some(Symbol { prefix: None, unit, written });
    }
    prefixes().iter().find_map(|prefix| {
        let (unit, written) = plain(symbol.strip_prefix(prefix.symbol)?)?;
        unit.prefixes.take(prefix).then_some(Symbol { prefix: Some(prefix), unit, written })
    })
}

/// The unit that a symbol stands for, with or without a prefix. Look-alikes are the same letter: the ohm sign and Ω, the
/// micro sign and μ, the kelvin sign and K.
pub fn unit(symbol: &str) -> Option<Symbol> {
    if symbol.is_ascii() {
        return lookup(symbol);
    }
    let folded: String = symbol.chars().map(fold).collect();
    lookup(&folded)
}

fn fold(c: char) -> char {
    match c {
        '\u{2126}' => 'Ω',
        'µ' => 'μ',
        '\u{212a}' => 'K',
        c => c,
    }
}

/// All units without prefixes, in the order of the table.
pub fn units() -> &'static [Unit] {
    &UNITS
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::collections::HashMap;

    #[track_caller]
    fn check(symbol: &str, name: &str, factor: &str, dimension: &str) {
        let s = unit(symbol).unwrap_or_else(|| panic!("{symbol} is not known"));
        let shown =
            (s.name(), s.factor().decimal().unwrap_or_else(|| s.factor().to_string()), s.unit.dimension.to_string());
        assert_eq!(shown, (name.to_owned(), factor.to_owned(), dimension.to_owned()), "{symbol}");
        assert_eq!(unit(&s.text()), Some(s), "{symbol}");
    }

    #[test]
    fn factors_are_exact() {
        check("kg", "kilogram", "1", "M");
        check("mm", "millimetre", "0.001", "L");
        check("°", "degree", "π/180", "1");
        check("deg", "degree", "π/180", "1");
        check("″", "second of arc", "π/648000", "1");
        check("d", "day", "86400", "T");
        check("mL", "millilitre", "1e-6", "L³");
        check("ml", "millilitre", "1e-6", "L³");
        check("ℓ", "litre", "0.001", "L³");
        check("keV", "kiloelectronvolt", "1.602176634e-16", "L² M T⁻²");
        check("au", "astronomical unit", "149597870700", "L");
        check("Mt", "megatonne", "1000000000", "M");
        check("u", "unified atomic mass unit", "1.66053906892e-27", "M");
        check("r", "revolution", "2π", "1");
        check("ha", "hectare", "10000", "L²");
    }

    #[test]
    fn letters_that_look_alike() {
        for (one, other) in [("µm", "μm"), ("k\u{2126}", "kΩ"), ("\u{212a}", "K"), ("℃", "°C")] {
            assert_eq!(unit(one), unit(other), "{one}");
            assert!(unit(one).is_some(), "{one}");
        }
    }

    #[test]
    fn what_is_no_unit() {
        for symbol in [
            "", "k", "kkg", "mkg", "kmin", "mh", "kd", "mau", "m°", "ft", "pt", "in", "lb", "bar", "cmin", "kB", "k%",
            "Kg", "Mm2",
        ] {
            assert_eq!(unit(symbol), None, "{symbol}");
        }
    }

    #[test]
    fn a_symbol_has_one_reading() {
        let mut seen: HashMap<String, String> = HashMap::new();
        for u in units() {
            for spelled in std::iter::once(u.symbol).chain(u.aliases.iter().copied()) {
                let with = prefixes().iter().filter(|p| u.prefixes.take(p)).map(|p| format!("{}{spelled}", p.symbol));
                for symbol in with.chain([spelled.to_owned()]) {
                    let other = seen.insert(symbol.clone(), u.name.to_owned());
                    assert_eq!(other, None, "{symbol} is {}", u.name);
                }
            }
        }
        // What could be read as a product or with a prefix is the unit of that symbol.
        for (symbol, name) in
            [("min", "minute"), ("cd", "candela"), ("Pa", "pascal"), ("au", "astronomical unit"), ("Gy", "gray")]
        {
            assert_eq!(seen[symbol], name);
        }
    }

    #[test]
    fn measured_and_marked() {
        let measured: Vec<&str> = units().iter().filter(|u| u.uncertainty().is_some()).map(|u| u.symbol).collect();
        assert_eq!(measured, ["Da", "u"]);
        let marked = |mark| units().iter().filter(|u| u.mark == mark).map(|u| u.symbol).collect::<Vec<_>>();
        assert_eq!(marked(Mark::Cycle), ["Hz", "Bq"]);
        assert_eq!(marked(Mark::Level), ["Np", "B"]);
        let angles: Vec<&str> = units().iter().filter(|u| u.angle == Exponent::ONE).map(|u| u.symbol).collect();
        assert_eq!(angles, ["rad", "°", "′", "″", "r"]);
        assert_eq!(unit("h").map(|s| s.unit.definition()), Some("60 min"));
        assert_eq!(unit("W").map(|s| s.unit.definition()), Some("J/s"));
        assert_eq!(unit("%").map(|s| s.unit.definition()), Some("0.01"));
    }

    #[test]
    fn dimensions_and_angles_are_those_of_the_definitions() {
        for u in units().iter().filter(|u| !u.of.starts_with('[')) {
            let of = Compound::read(u.of).unwrap_or_else(|e| panic!("{}: {e}", u.symbol));
            let angle = if u.symbol == "rad" { Exponent::ONE } else { of.angle() };
            assert_eq!((u.dimension, u.angle), (of.dimension(), angle), "{}", u.symbol);
            assert!(u.factor().signum() > 0, "{}", u.symbol);
        }
    }

    #[test]
    fn prefixes_multiply() {
        for p in prefixes() {
            for q in prefixes() {
                if let Some(r) = prefixes().iter().find(|r| r.exponent == p.exponent + q.exponent) {
                    assert_eq!(p.factor().times(&q.factor()), Some(r.factor()));
                }
                if p.exponent == -q.exponent {
                    assert_eq!(p.factor().times(&q.factor()), Some(Exact::ONE));
                }
            }
        }
    }
}
