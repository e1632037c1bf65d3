//! Quantities (ISO 80000) and units (SI Brochure, 9th ed.): their names and dimensions.

use leastwise_grammar::nearest;
use leastwise_grammar::tree::UnitText;
use leastwise_quantities as table;
use leastwise_quantities::{Compound, Exponent, Mark};
use std::sync::LazyLock;

/// Exponents of length, mass, time, current, temperature, amount, luminous intensity.
pub type Dimension = [i8; 7];

/// A number without dimension.
pub const ONE: Dimension = [0; 7];

/// The dimension of a quantity.
pub fn quantity(name: &str) -> Option<Dimension> {
    whole(table::quantity(name)?.dimension)
}

/// The dimension of a unit, with or without a prefix. Levels (Np, dB) are left out: no formula takes a logarithm of a
/// quotient for a number.
pub fn unit(symbol: &str) -> Option<Dimension> {
    whole(table::unit(symbol).filter(|s| s.unit.mark != Mark::Level)?.unit.dimension)
}

fn whole(d: table::Dimension) -> Option<Dimension> {
    let mut out = ONE;
    for (n, e) in out.iter_mut().zip(d.exponents()) {
        *n = i8::try_from(e.to_integer()?).ok()?;
    }
    Some(out)
}

/// The dimension of a unit as written, or of a quantity's name where it stands alone; exponents in sixtieths. `None`
/// where a name is not known or an exponent is no multiple of 1/60.
pub fn dimension(unit_text: &UnitText) -> Option<[i64; 7]> {
    if let [one] = unit_text.factors.as_slice()
        && one.exponent == (1, 1)
        && let Some(d) = quantity(&one.symbol.text)
    {
        return Some(d.map(|n| n as i64 * 60));
    }
    let mut out = table::Dimension::ONE;
    for factor in &unit_text.factors {
        let (n, d) = factor.exponent;
        unit(&factor.symbol.text)?;
        let of = table::unit(&factor.symbol.text)?.unit.dimension;
        out = out.times(of.pow(Exponent::new(n.into(), d.into())?)?)?;
    }
    sixtieths(out)
}

fn sixtieths(d: table::Dimension) -> Option<[i64; 7]> {
    let mut out = [0_i64; 7];
    for (n, e) in out.iter_mut().zip(d.exponents()) {
        *n = (60 % e.den() == 0).then(|| i64::from(e.num()) * i64::from(60 / e.den()))?;
    }
    Some(out)
}

/// The unit in which a quantity of this name, or else of this dimension (in sixtieths), is usually given.
pub fn usual_unit(name: &str, dimension: [i64; 7]) -> Option<String> {
    if dimension == [0; 7] {
        return None;
    }
    let mut exponents = [Exponent::ZERO; 7];
    for (e, n) in exponents.iter_mut().zip(dimension) {
        *e = Exponent::new(n, 60)?;
    }
    let d = table::Dimension::new(exponents);
    if let Some(q) = table::quantity(name).filter(|q| q.dimension == d) {
        return Some(q.usual().plain());
    }
    let found = USUAL.iter().find(|(_, of)| *of == d).map(|(unit, _)| (*unit).to_owned());
    found.or_else(|| Some(table::familiar(d, Exponent::ZERO, None).unit.plain()))
}

/// Units in which values are given, the most usual of each dimension first, where they are not those that a bare
/// dimension is taken for.
static USUAL: LazyLock<Vec<(&str, table::Dimension)>> = LazyLock::new(|| {
    let units = ["N s", "J s", "N s/m", "Hz", "V s/m"];
    units.into_iter().filter_map(|u| Some((u, Compound::read(u).ok()?.dimension()))).collect()
});

/// The names of quantities in everyday use, sorted.
pub fn quantity_names() -> impl Iterator<Item = &'static str> {
    static NAMES: LazyLock<Vec<&str>> = LazyLock::new(|| {
        let mut names: Vec<&str> = table::quantities().iter().filter(|q| q.everyday).map(|q| q.name).collect();
        names.sort_unstable();
        names
    });
    NAMES.iter().copied()
}

/// All unit symbols without prefixes, as they can be typed.
pub fn unit_symbols() -> impl Iterator<Item = &'static str> {
    let units = table::units().iter().filter(|u| u.mark != Mark::Level);
    units.flat_map(|u| {
        let typed = u.aliases.iter().copied().filter(|a| a.is_ascii());
        std::iter::once(u.symbol).chain(typed)
    })
}

/// What was probably meant by a quantity name that is not known.
pub fn near_quantity(name: &str) -> Option<&'static str> {
    let spoken = match name.to_lowercase().as_str() {
        "inertia" | "momentofinertia" => Some("moment_of_inertia"),
        "position" => Some("length"),
        "weight" => Some("mass"),
        "moment" => Some("torque"),
        "spring_constant" | "spring" => Some("stiffness"),
        "damping_coefficient" | "damping_constant" => Some("damping"),
        "rate" => Some("frequency"),
        "magnetic_field" => Some("magnetic_flux_density"),
        "electric_charge" => Some("charge"),
        "electric_current" => Some("current"),
        "heat" => Some("energy"),
        "duration" => Some("time"),
        "phase" | "rotation" => Some("angle"),
        _ => None,
    };
    spoken.or_else(|| nearest(name, table::quantities().iter().map(|q| q.name)))
}

/// What was probably meant by a unit that is not known.
pub fn near_unit(symbol: &str) -> Option<&'static str> {
    // A level is known, and no other unit was meant.
    if table::unit(symbol).is_some() {
        return None;
    }
    let spoken = match symbol {
        "sec" | "second" | "seconds" => Some("s"),
        "meter" | "metre" | "meters" | "metres" => Some("m"),
        "kilogram" | "kilograms" | "Kg" | "KG" | "kilo" => Some("kg"),
        "ohm" | "Ohm" | "ohms" => Some("Ω"),
        "degree" | "degrees" => Some("°"),
        "radian" | "radians" | "rads" => Some("rad"),
        "newton" | "Newton" | "newtons" => Some("N"),
        "joule" | "Joule" | "joules" => Some("J"),
        "volt" | "Volt" | "volts" => Some("V"),
        "watt" | "Watt" | "watts" => Some("W"),
        "hour" | "hours" | "hr" => Some("h"),
        "minute" | "minutes" => Some("min"),
        "rpm" | "rev" => Some("r/min"),
        "hz" | "HZ" => Some("Hz"),
        "gram" | "grams" | "gr" => Some("g"),
        _ => None,
    };
    let other_case = || unit_symbols().find(|u| u.to_lowercase() == symbol.to_lowercase());
    spoken.or_else(other_case).or_else(|| nearest(symbol, unit_symbols().filter(|u| u.len() > 1)))
}

#[cfg(test)]
mod tests {
    use super::*;
    use leastwise_grammar::tree::ItemKind;

    #[test]
    fn names_stand_once_and_are_sorted() {
        let names: Vec<&str> = quantity_names().collect();
        assert!(names.windows(2).all(|w| w[0] < w[1]));
        let symbols: Vec<&str> = unit_symbols().collect();
        for (k, u) in symbols.iter().enumerate() {
            assert!(unit(u).is_some() && !symbols[..k].contains(u), "{u} stands twice");
        }
    }

    #[test]
    fn prefixes_go_with_the_units_that_take_them() {
        assert_eq!(unit("mm"), unit("m"));
        assert_eq!(unit("μΩ"), unit("Ω"));
        assert_eq!(unit("kg"), quantity("mass"));
        assert_eq!(unit("kmin"), None);
        assert_eq!(unit("mh"), None);
        assert_eq!(unit("min"), quantity("time"));
        assert_eq!(unit("cd"), quantity("luminous_intensity"));
    }

    /// The unit of a declaration as the grammar reads it.
    fn read(unit: &str) -> UnitText {
        let text = format!("parameter a: {unit}");
        let parsed = leastwise_grammar::parse_item(&text, &leastwise_grammar::callable_names(std::iter::empty()));
        match parsed.item.kind {
            ItemKind::Parameter(list) => list[0].quantity.clone().unwrap_or_else(|| panic!("{unit}: no unit")),
            other => panic!("{unit}: {other:?}"),
        }
    }

    #[test]
    fn the_grammar_reads_what_is_printed() {
        for q in table::quantities() {
            for text in [q.unit().to_string(), q.unit().plain(), q.usual().to_string(), q.usual().plain()] {
                assert_eq!(dimension(&read(&text)), sixtieths(q.dimension), "{} in {text}", q.name);
            }
        }
        for (text, expected) in [
            ("N·m/s²", [120, 60, -240, 0, 0, 0, 0]),
            ("m^(1/2)", [30, 0, 0, 0, 0, 0, 0]),
            ("V/m^(-1/3)", [140, 60, -180, -60, 0, 0, 0]),
            ("1/(m s)", [-60, 0, -60, 0, 0, 0, 0]),
            ("k\u{2126} µF", [0, 0, 60, 0, 0, 0, 0]),
        ] {
            assert_eq!(dimension(&read(text)), Some(expected), "{text}");
        }
        assert_eq!(dimension(&read("m^(1/7)")), None);
        assert_eq!(dimension(&read("ft")), None);
    }

    #[test]
    fn the_grammar_reads_the_constants() {
        let none = leastwise_grammar::callable_names(std::iter::empty());
        for c in table::constants() {
            let text = format!("parameter {} = {}", c.symbol, c.written().0);
            let parsed = leastwise_grammar::parse_item(&text, &none);
            let ItemKind::Parameter(list) = &parsed.item.kind else { panic!("{text}") };
            assert!(parsed.slips.is_empty(), "{text}: {:?}", parsed.slips);
            assert_eq!(list[0].declared.name.text, c.symbol);
            let unit = list[0].value.as_ref().and_then(|v| v.unit.as_ref());
            assert_eq!(unit.map_or(Some([0; 7]), dimension), sixtieths(c.unit.dimension()), "{text}");
        }
    }

    #[test]
    fn usual_units() {
        let check = |name: &str, d: [i64; 7], unit: Option<&str>| {
            assert_eq!(usual_unit(name, d.map(|n| n * 60)).as_deref(), unit, "{name}");
        };
        check("torque", [2, 1, -2, 0, 0, 0, 0], Some("N m"));
        check("", [2, 1, -2, 0, 0, 0, 0], Some("J"));
        check("angular_velocity", [0, 0, -1, 0, 0, 0, 0], Some("rad/s"));
        check("momentum", [1, 1, -1, 0, 0, 0, 0], Some("N s"));
        check("", [3, 1, -2, 0, 0, 0, 0], Some("N m^2"));
        check("angle", [0; 7], None);
        assert_eq!(usual_unit("", [30, 0, 0, 0, 0, 0, 0]).as_deref(), Some("m^(1/2)"));
    }

    #[test]
    fn what_was_meant() {
        assert_eq!(near_quantity("lenght"), Some("length"));
        assert_eq!(near_quantity("inertia"), Some("moment_of_inertia"));
        assert_eq!(near_unit("sec"), Some("s"));
        assert_eq!(near_unit("hz"), Some("Hz"));
        assert_eq!(near_unit("n"), Some("N"));
        assert_eq!(near_unit("dB"), None);
    }
}
