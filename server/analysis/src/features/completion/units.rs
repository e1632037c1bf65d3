//! Quantities behind a colon, units behind a number.

use super::context::Context;
use super::pieces::{Piece, read};
use super::{Completion, CompletionKind, plain};
use crate::quantities::{quantity, quantity_names, unit, unit_symbols};
use leastwise_grammar::{WordKind, fold_letters};

/// Exponents of length, mass, time, current, temperature, amount, luminous intensity.
type Exponents = [i64; 7];

/// A unit's place in a value or behind a colon.
#[derive(Clone, PartialEq, Eq, Default, Debug)]
pub(super) struct Units {
    /// What the value is of, where it is known.
    pub fitting: Option<Fitting>,
    /// What the next factor should be, where it is known.
    need: Option<Exponents>,
    /// Whether a factor stands already, so that no product is wanted.
    begun: bool,
    /// Behind degrees: minutes and seconds of arc.
    arc: bool,
}

/// What a value is of.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Fitting {
    /// The quantity's name, or the unit that stands in its place.
    name: String,
    exponents: Exponents,
}

impl Fitting {
    /// What is declared by a quantity's name or a unit; `None` where it is not known.
    pub fn of(declared: &str) -> Option<Fitting> {
        let name = fold_letters(declared.trim());
        let exponents = match quantity(&name) {
            Some(d) => d.map(i64::from),
            None => reach(&read(&name)).exponents.filter(|_| !name.is_empty())?,
        };
        Some(Fitting { name, exponents })
    }

    /// The same, of the time derivative of this order.
    pub fn rate(&self, order: u32) -> Fitting {
        let mut exponents = self.exponents;
        exponents[2] -= i64::from(order);
        let name = match (self.name.as_str(), order) {
            (_, 0) => &self.name,
            ("length", 1) => "velocity",
            ("length", 2) => "acceleration",
            ("angle" | "twist", 1) => "angular_velocity",
            ("angle" | "twist", 2) => "angular_acceleration",
            _ => "",
        };
        Fitting { name: name.to_owned(), exponents }
    }

    /// Whether it is a mass or another coefficient of squared velocities: a moment of inertia, an inductance.
    pub fn is_inertia(&self) -> bool {
        matches!(self.exponents, [0, 1, 0, 0, 0, 0, 0] | [2, 1, 0, 0, 0, 0, 0] | [2, 1, -2, -2, 0, 0, 0])
    }

    /// Whether it is a coefficient of losses: a damping, a rotational one, a resistance.
    pub fn is_damping(&self) -> bool {
        matches!(self.exponents, [0, 1, -1, 0, 0, 0, 0] | [2, 1, -1, 0, 0, 0, 0] | [2, 1, -3, -2, 0, 0, 0])
    }
}

/// What a value as written is of, told from its unit.
pub(super) fn of_value(value: &str) -> Option<Fitting> {
    let pieces = read(value);
    let start = begins_unit(&pieces)?;
    let exponents = reach(&pieces[start..]).exponents?;
    Some(Fitting { name: String::new(), exponents })
}

/// How far a unit goes.
struct Reached {
    /// What its factors make, where all are known.
    exponents: Option<Exponents>,
    /// 1, and −1 behind a `/`.
    sign: i64,
    next: Next,
}

/// What can follow in a unit.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Next {
    /// A factor has to.
    Factor,
    /// A factor may.
    Perhaps,
    /// No factor.
    Nothing,
}

/// Reads the factors of a unit.
fn reach(pieces: &[Piece<'_>]) -> Reached {
    let mut out = Reached { exponents: Some([0; 7]), sign: 1, next: Next::Nothing };
    let (mut open, mut k) = (0_usize, 0);
    while let Some(p) = pieces.get(k) {
        k += 1;
        match p.text {
            "/" => (out.sign, out.next) = (-1, Next::Factor),
            "(" => (open, out.next) = (open + 1, Next::Factor),
            ")" => {
                open = open.saturating_sub(1);
                out.next = if out.sign < 0 && open == 0 { Next::Nothing } else { Next::Perhaps };
            }
            "·" | "*" => out.next = Next::Factor,
            "1" if k == 1 => out.next = Next::Nothing,
            _ if p.is_word() || matches!(p.text, "°" | "°C" | "%") => {
                let (power, used) = exponent(&pieces[k..]);
                k += used;
                let dimension = unit(&fold_letters(p.text));
                out.exponents = match (out.exponents, dimension, power) {
                    (Some(sum), Some(d), Some(power)) => {
                        let sign = out.sign.saturating_mul(power);
                        Some(std::array::from_fn(|at| sum[at].saturating_add(i64::from(d[at]).saturating_mul(sign))))
                    }
                    _ => None,
                };
                // Behind `/` a product needs parentheses; behind `^` a number is wanted.
                let ends = out.sign < 0 && open == 0 || pieces[k - 1].text == "^" || pieces[k - 1].text == "-";
                out.next = if ends { Next::Nothing } else { Next::Perhaps };
            }
            _ => (out.exponents, out.next) = (None, Next::Nothing),
        }
    }
    out
}

/// A whole exponent, and how many pieces it takes; `None` for one that cannot be told.
fn exponent(pieces: &[Piece<'_>]) -> (Option<i64>, usize) {
    let Some(first) = pieces.first() else { return (Some(1), 0) };
    if first.kind == WordKind::Raised {
        let digits: String = first.text.chars().filter_map(lowered).collect();
        return (digits.parse().ok(), 1);
    }
    if first.text != "^" {
        return (Some(1), 0);
    }
    let number = |p: &Piece<'_>| p.text.parse::<i64>().ok();
    match &pieces[1..] {
        [sign, n, ..] if matches!(sign.text, "-" | "−") => (number(n).map(|n| -n), 3),
        [sign] if matches!(sign.text, "-" | "−") => (None, 2),
        [open, rest @ ..] if open.text == "(" => {
            let end = rest.iter().position(|p| p.text == ")").map_or(rest.len(), |at| at + 1);
            (None, 2 + end)
        }
        [n, ..] => (number(n), 2),
        [] => (None, 1),
    }
}

fn lowered(c: char) -> Option<char> {
    match c {
        '⁻' => Some('-'),
        _ => "⁰¹²³⁴⁵⁶⁷⁸⁹".chars().position(|r| r == c).and_then(|n| char::from_digit(n as u32, 10)),
    }
}

/// A place behind the colon of a declaration.
pub(super) fn behind_colon(pieces: &[Piece<'_>]) -> Context {
    match pieces {
        [] => Context::Quantity,
        [only] if quantity(only.text).is_some() => Context::Nothing,
        _ => next_unit(pieces, None),
    }
}

/// A place in a value: behind its number stands the unit.
pub(super) fn in_value(pieces: &[Piece<'_>], fitting: Option<Fitting>) -> Context {
    let need = fitting.as_ref().map(|f| f.exponents);
    let whole = || Units { fitting: fitting.clone(), need, ..Units::default() };
    if let Some(start) = begins_unit(pieces) {
        let arc = pieces[start].text == "°" && pieces.last().is_some_and(Piece::is_number);
        return if arc { Context::Unit(Units { arc, ..whole() }) } else { next_unit(&pieces[start..], fitting) };
    }
    let open = super::pieces::open_brackets(pieces);
    match pieces.last() {
        Some(last) if open.is_empty() && (last.is_number() || last.text == ")" || last.kind == WordKind::Raised) => {
            Context::Unit(whole())
        }
        // `3 /` goes on with a number, or with a unit.
        Some(last) if open.is_empty() && last.text == "/" => next_unit(std::slice::from_ref(last), fitting),
        _ => Context::Nothing,
    }
}

/// Where the unit of a value begins.
fn begins_unit(pieces: &[Piece<'_>]) -> Option<usize> {
    let mut open = 0_usize;
    let at = pieces.iter().enumerate().position(|(k, p)| {
        let word = |p: &Piece<'_>| p.is_word() || matches!(p.text, "°" | "°C" | "%");
        match p.text {
            "(" if open == 0 && pieces.get(k + 1).is_some_and(word) => return true,
            "(" => open += 1,
            ")" => open = open.saturating_sub(1),
            _ => return open == 0 && word(p),
        }
        false
    })?;
    let quotient = at.checked_sub(1).filter(|k| pieces[*k].text == "/");
    Some(quotient.unwrap_or(at))
}

/// What can follow the factors of a unit.
fn next_unit(pieces: &[Piece<'_>], fitting: Option<Fitting>) -> Context {
    let reached = reach(pieces);
    let need = match (&fitting, reached.exponents) {
        (Some(f), Some(sum)) => Some(std::array::from_fn(|k| f.exponents[k].saturating_sub(sum[k]) * reached.sign)),
        _ => None,
    };
    let complete = need == Some([0; 7]) && reached.next == Next::Perhaps;
    if reached.next == Next::Nothing || complete {
        return Context::Nothing;
    }
    Context::Unit(Units { fitting, need, begun: true, arc: false })
}

/// The units in which values of a quantity are given, the most usual first.
const OWN: &[(&str, &[&str])] = &[
    ("length", &["m", "mm", "cm", "km", "μm", "nm"]),
    ("angle", &["°", "rad", "mrad"]),
    ("twist", &["rad", "°", "r"]),
    ("mass", &["kg", "g", "t", "mg", "u"]),
    ("time", &["s", "ms", "min", "h", "μs", "d"]),
    ("velocity", &["m/s", "km/h", "mm/s"]),
    ("acceleration", &["m/s^2"]),
    ("force", &["N", "kN", "mN", "MN"]),
    ("torque", &["N m", "kN m", "mN m"]),
    ("energy", &["J", "kJ", "mJ", "MJ", "eV"]),
    ("moment_of_inertia", &["kg m^2", "g m^2", "kg cm^2"]),
    ("stiffness", &["N/m", "kN/m", "N/mm"]),
    ("damping", &["N s/m", "kN s/m", "kg/s"]),
    ("angular_velocity", &["rad/s", "r/min", "°/s"]),
    ("frequency", &["Hz", "kHz", "MHz", "1/s"]),
    ("speed", &["m/s", "km/h", "mm/s"]),
    ("angular_frequency", &["rad/s"]),
    ("angular_acceleration", &["rad/s^2", "°/s^2"]),
    ("momentum", &["kg m/s", "N s"]),
    ("impulse", &["N s", "kg m/s"]),
    ("angular_momentum", &["kg m^2/s", "N m s"]),
    ("power", &["W", "kW", "mW", "MW"]),
    ("work", &["J", "kJ", "MJ"]),
    ("torsional_stiffness", &["N m/rad", "N m"]),
    ("rotational_stiffness", &["N m/rad", "N m"]),
    ("torsional_damping", &["N m s/rad", "N m s"]),
    ("rotational_damping", &["N m s/rad", "N m s"]),
    ("charge", &["C", "mC", "μC", "nC"]),
    ("current", &["A", "mA", "μA"]),
    ("voltage", &["V", "mV", "kV"]),
    ("resistance", &["Ω", "kΩ", "MΩ"]),
    ("inductance", &["H", "mH", "μH"]),
    ("capacitance", &["F", "μF", "nF", "pF"]),
    ("magnetic_flux", &["Wb"]),
    ("magnetic_flux_density", &["T", "mT"]),
    ("electric_field", &["V/m", "kV/m"]),
    ("pressure", &["Pa", "kPa", "MPa", "GPa"]),
    ("temperature", &["K", "°C"]),
    ("area", &["m^2", "cm^2", "mm^2"]),
    ("volume", &["m^3", "L", "cm^3"]),
    ("density", &["kg/m^3", "g/cm^3"]),
    ("linear_density", &["kg/m", "g/m"]),
    ("viscosity", &["Pa s"]),
    ("action", &["J s"]),
    ("wavenumber", &["1/m"]),
    ("curvature", &["1/m"]),
    ("jerk", &["m/s^3"]),
];

/// Powers of units, of which products are made.
const POWERS: [&str; 5] = ["m^2", "s^2", "m^3", "s^3", "rad^2"];

fn own(name: &str) -> &'static [&'static str] {
    OWN.iter().find(|(q, _)| *q == name).map_or(&[], |(_, list)| list)
}

/// All single symbols: those in everyday use with their prefixes first, then all others.
fn symbols() -> Vec<&'static str> {
    let usual = OWN.iter().flat_map(|(_, list)| list.iter().copied()).filter(|u| unit(u).is_some());
    // Minutes and seconds of arc are units behind degrees only; elsewhere they are primes.
    let others = unit_symbols().filter(|u| !matches!(*u, "′" | "″"));
    let mut list = Vec::new();
    for u in usual.chain(others) {
        if !list.contains(&u) {
            list.push(u);
        }
    }
    list
}

fn exponents(text: &str) -> Option<Exponents> {
    reach(&read(text.strip_prefix('1').unwrap_or(text))).exponents
}

/// The unit in which a quantity is usually given, as in a detail.
fn usual(name: &str) -> String {
    match (own(name).first(), quantity(name)) {
        (Some(first), _) => (*first).to_owned(),
        (None, Some(d)) => crate::quantities::usual_unit(name, d.map(|n| i64::from(n) * 60)).unwrap_or_default(),
        _ => String::new(),
    }
}

/// All quantities, those that mechanics needs most first, and units for those who think in units.
pub(super) fn quantities() -> Vec<Completion> {
    const FIRST: [&str; 14] = [
        "length",
        "angle",
        "mass",
        "time",
        "velocity",
        "acceleration",
        "force",
        "torque",
        "energy",
        "moment_of_inertia",
        "stiffness",
        "damping",
        "angular_velocity",
        "frequency",
    ];
    let rest = quantity_names().filter(|q| !FIRST.contains(q));
    let named = FIRST.into_iter().chain(rest);
    let mut list: Vec<Completion> = named.map(|q| plain(q, CompletionKind::Quantity, &usual(q), None)).collect();
    list.extend(symbols().into_iter().map(|u| plain(u, CompletionKind::Unit, kind_of(u), None)));
    list
}

/// The quantity that a unit is usually given for.
fn kind_of(symbol: &str) -> &'static str {
    OWN.iter().find(|(_, list)| list.contains(&symbol)).map_or("unit", |(name, _)| name)
}

/// The units at a place, those that fit first.
pub(super) fn at(place: &Units) -> Vec<Completion> {
    let mut list: Vec<String> = Vec::new();
    if place.arc {
        list.extend(["′", "″"].map(str::to_owned));
    }
    let all = symbols();
    if let (Some(f), false) = (&place.fitting, place.begun) {
        list.extend(own(&f.name).iter().map(|u| (*u).to_owned()));
        // Where a unit stands in the quantity's place, it is the one that was thought of.
        if quantity(&f.name).is_none() && !f.name.is_empty() {
            list.push(f.name.clone());
        }
    }
    if let Some(need) = place.need {
        // Turns in a time are no plain frequency.
        let counted = |u: &&str| {
            !matches!(*u, "Hz" | "kHz" | "MHz" | "Bq") || place.fitting.as_ref().is_some_and(|f| f.name == "frequency")
        };
        let compound = OWN.iter().flat_map(|(_, list)| list.iter().copied()).filter(|_| !place.begun);
        let parts = POWERS.into_iter().filter(|_| place.begun);
        let fits = |u: &&str| exponents(u) == Some(need);
        list.extend(parts.chain(all.iter().copied()).chain(compound).filter(fits).filter(counted).map(str::to_owned));
    }
    if !place.begun && place.fitting.is_none() {
        list.extend(OWN.iter().flat_map(|(_, list)| list.iter().map(|u| (*u).to_owned())));
    }
    list.extend(all.iter().map(|u| (*u).to_owned()));
    let mut out: Vec<Completion> = Vec::new();
    for u in list {
        if out.iter().all(|c| c.label != u) {
            out.push(plain(&u, CompletionKind::Unit, kind_of(&u), None));
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The first units at the end of a value.
    #[track_caller]
    fn check(quantity: &str, value: &str, expected: &[&str]) {
        let found = match in_value(&read(value), Fitting::of(quantity)) {
            Context::Unit(units) => at(&units),
            Context::Nothing => Vec::new(),
            other => panic!("{other:?}"),
        };
        let labels: Vec<&str> = found.iter().map(|c| c.label.as_str()).take(expected.len().max(1)).collect();
        assert_eq!(labels, expected, "{quantity} = {value}");
    }

    #[test]
    fn units_of_the_quantity_come_first() {
        check("mass", "2", &["kg", "g", "t", "mg"]);
        check("length", "2", &["m", "mm", "cm", "km"]);
        check("velocity", "(1, 2)", &["m/s", "km/h"]);
        check("angular_velocity", "3", &["rad/s", "r/min", "°/s", "1/s", "m"]);
        check("N/m", "3·10^-3", &["N/m", "kN/m"]);
        check("V/m", "4.12", &["V/m", "kV/m"]);
        check("heat_capacity", "1", &["m", "mm"]);
        check("", "9.81", &["m", "mm"]);
    }

    #[test]
    fn a_product_goes_on_with_the_factor_that_it_lacks() {
        check("moment_of_inertia", "0.9 kg", &["m^2"]);
        check("velocity", "2 m/", &["s", "ms", "min"]);
        check("damping", "15 N s/", &["m", "mm"]);
        check("stiffness", "15 N/(", &["m"]);
        check("frequency", "3 /", &["s", "ms"]);
        check("acceleration", "9.8 m/", &["s^2"]);
    }

    #[test]
    fn a_complete_unit_goes_on_with_nothing() {
        check("mass", "2 kg", &[]);
        check("velocity", "2 m/s", &[]);
        check("acceleration", "2 m s⁻²", &[]);
        check("", "2 m/s", &[]);
        check("area", "2 m^", &[]);
        check("mass", "", &[]);
        check("mass", "(1, 2", &[]);
    }

    #[test]
    fn degrees_go_on_with_minutes() {
        check("angle", "4", &["°", "rad", "mrad"]);
        check("angle", "4° 30", &["′", "″"]);
    }

    #[test]
    fn rates_of_coordinates_have_their_own_units() {
        let rate = |q: &str| {
            Fitting::of(q)
                .map(|f| f.rate(1))
                .map(|f| at(&Units { need: Some(f.exponents), fitting: Some(f), ..Units::default() }))
        };
        let first = |q: &str| rate(q).and_then(|list| list.first().map(|c| c.label.clone()));
        assert_eq!(first("length").as_deref(), Some("m/s"));
        assert_eq!(first("twist").as_deref(), Some("rad/s"));
        assert_eq!(first("charge").as_deref(), Some("A"));
    }

    #[test]
    fn all_units_of_the_table_are_of_their_quantity() {
        for (name, list) in OWN {
            let d = quantity(name).unwrap_or_else(|| panic!("{name} is no quantity"));
            for u in *list {
                assert_eq!(exponents(u), Some(d.map(i64::from)), "{name} in {u}");
            }
        }
    }
}
