//! Quantities (ISO 80000) and units (SI Brochure, 9th ed.): their names and dimensions.

use leastwise_grammar::nearest;
use leastwise_grammar::tree::UnitText;

/// Exponents of length, mass, time, current, temperature, amount, luminous intensity.
pub type Dimension = [i8; 7];

/// A number without dimension.
pub const ONE: Dimension = [0; 7];

/// Quantity names with their dimensions.
const QUANTITIES: &[(&str, Dimension)] = &[
    ("acceleration", [1, 0, -2, 0, 0, 0, 0]),
    ("action", [2, 1, -1, 0, 0, 0, 0]),
    ("amount", [0, 0, 0, 0, 0, 1, 0]),
    ("angle", ONE),
    ("angular_acceleration", [0, 0, -2, 0, 0, 0, 0]),
    ("angular_frequency", [0, 0, -1, 0, 0, 0, 0]),
    ("angular_momentum", [2, 1, -1, 0, 0, 0, 0]),
    ("angular_velocity", [0, 0, -1, 0, 0, 0, 0]),
    ("area", [2, 0, 0, 0, 0, 0, 0]),
    ("capacitance", [-2, -1, 4, 2, 0, 0, 0]),
    ("charge", [0, 0, 1, 1, 0, 0, 0]),
    ("conductance", [-2, -1, 3, 2, 0, 0, 0]),
    ("current", [0, 0, 0, 1, 0, 0, 0]),
    ("curvature", [-1, 0, 0, 0, 0, 0, 0]),
    ("damping", [0, 1, -1, 0, 0, 0, 0]),
    ("density", [-3, 1, 0, 0, 0, 0, 0]),
    ("dimensionless", ONE),
    ("electric_field", [1, 1, -3, -1, 0, 0, 0]),
    ("energy", [2, 1, -2, 0, 0, 0, 0]),
    ("force", [1, 1, -2, 0, 0, 0, 0]),
    ("frequency", [0, 0, -1, 0, 0, 0, 0]),
    ("heat_capacity", [2, 1, -2, 0, -1, 0, 0]),
    ("impulse", [1, 1, -1, 0, 0, 0, 0]),
    ("inductance", [2, 1, -2, -2, 0, 0, 0]),
    ("jerk", [1, 0, -3, 0, 0, 0, 0]),
    ("length", [1, 0, 0, 0, 0, 0, 0]),
    ("linear_density", [-1, 1, 0, 0, 0, 0, 0]),
    ("luminous_intensity", [0, 0, 0, 0, 0, 0, 1]),
    ("magnetic_flux", [2, 1, -2, -1, 0, 0, 0]),
    ("magnetic_flux_density", [0, 1, -2, -1, 0, 0, 0]),
    ("magnetic_moment", [2, 0, 0, 1, 0, 0, 0]),
    ("mass", [0, 1, 0, 0, 0, 0, 0]),
    ("moment_of_inertia", [2, 1, 0, 0, 0, 0, 0]),
    ("momentum", [1, 1, -1, 0, 0, 0, 0]),
    ("power", [2, 1, -3, 0, 0, 0, 0]),
    ("pressure", [-1, 1, -2, 0, 0, 0, 0]),
    ("resistance", [2, 1, -3, -2, 0, 0, 0]),
    ("rotational_damping", [2, 1, -1, 0, 0, 0, 0]),
    ("rotational_stiffness", [2, 1, -2, 0, 0, 0, 0]),
    ("speed", [1, 0, -1, 0, 0, 0, 0]),
    ("stiffness", [0, 1, -2, 0, 0, 0, 0]),
    ("temperature", [0, 0, 0, 0, 1, 0, 0]),
    ("time", [0, 0, 1, 0, 0, 0, 0]),
    ("torque", [2, 1, -2, 0, 0, 0, 0]),
    ("torsional_damping", [2, 1, -1, 0, 0, 0, 0]),
    ("torsional_stiffness", [2, 1, -2, 0, 0, 0, 0]),
    ("twist", ONE),
    ("velocity", [1, 0, -1, 0, 0, 0, 0]),
    ("viscosity", [-1, 1, -1, 0, 0, 0, 0]),
    ("voltage", [2, 1, -3, -1, 0, 0, 0]),
    ("volume", [3, 0, 0, 0, 0, 0, 0]),
    ("wavenumber", [-1, 0, 0, 0, 0, 0, 0]),
    ("work", [2, 1, -2, 0, 0, 0, 0]),
];

/// Units with their dimensions, and whether they take prefixes.
const UNITS: &[(&str, Dimension, bool)] = &[
    ("m", [1, 0, 0, 0, 0, 0, 0], true),
    ("g", [0, 1, 0, 0, 0, 0, 0], true),
    ("s", [0, 0, 1, 0, 0, 0, 0], true),
    ("A", [0, 0, 0, 1, 0, 0, 0], true),
    ("K", [0, 0, 0, 0, 1, 0, 0], true),
    ("mol", [0, 0, 0, 0, 0, 1, 0], true),
    ("cd", [0, 0, 0, 0, 0, 0, 1], true),
    ("rad", ONE, true),
    ("sr", ONE, true),
    ("Hz", [0, 0, -1, 0, 0, 0, 0], true),
    ("N", [1, 1, -2, 0, 0, 0, 0], true),
    ("Pa", [-1, 1, -2, 0, 0, 0, 0], true),
    ("J", [2, 1, -2, 0, 0, 0, 0], true),
    ("W", [2, 1, -3, 0, 0, 0, 0], true),
    ("C", [0, 0, 1, 1, 0, 0, 0], true),
    ("V", [2, 1, -3, -1, 0, 0, 0], true),
    ("F", [-2, -1, 4, 2, 0, 0, 0], true),
    ("Ω", [2, 1, -3, -2, 0, 0, 0], true),
    ("S", [-2, -1, 3, 2, 0, 0, 0], true),
    ("Wb", [2, 1, -2, -1, 0, 0, 0], true),
    ("T", [0, 1, -2, -1, 0, 0, 0], true),
    ("H", [2, 1, -2, -2, 0, 0, 0], true),
    ("lm", [0, 0, 0, 0, 0, 0, 1], true),
    ("lx", [-2, 0, 0, 0, 0, 0, 1], true),
    ("Bq", [0, 0, -1, 0, 0, 0, 0], true),
    ("Gy", [2, 0, -2, 0, 0, 0, 0], true),
    ("Sv", [2, 0, -2, 0, 0, 0, 0], true),
    ("kat", [0, 0, -1, 0, 0, 1, 0], true),
    ("eV", [2, 1, -2, 0, 0, 0, 0], true),
    ("t", [0, 1, 0, 0, 0, 0, 0], true),
    ("L", [3, 0, 0, 0, 0, 0, 0], true),
    ("l", [3, 0, 0, 0, 0, 0, 0], true),
    ("min", [0, 0, 1, 0, 0, 0, 0], false),
    ("h", [0, 0, 1, 0, 0, 0, 0], false),
    ("d", [0, 0, 1, 0, 0, 0, 0], false),
    ("°", ONE, false),
    ("deg", ONE, false),
    ("′", ONE, false),
    ("″", ONE, false),
    ("r", ONE, false),
    ("u", [0, 1, 0, 0, 0, 0, 0], false),
    ("Da", [0, 1, 0, 0, 0, 0, 0], true),
    ("au", [1, 0, 0, 0, 0, 0, 0], false),
    ("ha", [2, 0, 0, 0, 0, 0, 0], false),
    ("°C", [0, 0, 0, 0, 1, 0, 0], false),
    ("%", ONE, false),
];

/// The prefixes of the SI.
const PREFIXES: &[&str] = &[
    "da", "h", "k", "M", "G", "T", "P", "E", "Z", "Y", "R", "Q", "d", "c", "m", "μ", "n", "p", "f", "a", "z", "y", "r",
    "q",
];

/// The dimension of a quantity.
pub fn quantity(name: &str) -> Option<Dimension> {
    QUANTITIES.iter().find(|q| q.0 == name).map(|q| q.1)
}

/// The dimension of a unit, with or without a prefix.
pub fn unit(symbol: &str) -> Option<Dimension> {
    let plain = |s: &str, prefixed: bool| UNITS.iter().find(|u| u.0 == s && (u.2 || !prefixed)).map(|u| u.1);
    plain(symbol, false)
        .or_else(|| PREFIXES.iter().find_map(|p| symbol.strip_prefix(p).and_then(|rest| plain(rest, true))))
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
    let mut out = [0i64; 7];
    for factor in &unit_text.factors {
        let (n, d) = factor.exponent;
        let sixtieths = (d != 0 && 60 % d == 0).then(|| n as i64 * (60 / d as i64))?;
        for (sum, exponent) in out.iter_mut().zip(unit(&factor.symbol.text)?) {
            *sum = sum.checked_add(sixtieths.checked_mul(exponent as i64)?)?;
        }
    }
    Some(out)
}

/// The unit in which a quantity of this name, or else of this dimension (in sixtieths), is usually given.
pub fn usual_unit(name: &str, dimension: [i64; 7]) -> Option<String> {
    let written = match name {
        "angular_velocity" | "angular_frequency" => "rad/s",
        "angular_acceleration" => "rad/s^2",
        "torque" | "rotational_stiffness" | "torsional_stiffness" => "N m",
        "momentum" | "impulse" => "N s",
        "moment_of_inertia" => "kg m^2",
        _ => "",
    };
    let units: Vec<&str> = std::iter::once(written).chain(USUAL.iter().copied()).filter(|u| !u.is_empty()).collect();
    let found = units.into_iter().find(|u| spelled_dimension(u) == Some(dimension)).map(str::to_owned);
    found.or_else(|| {
        let base = ["m", "kg", "s", "A", "K", "mol", "cd"];
        let mut out: Vec<String> = Vec::new();
        for (symbol, sixtieths) in base.iter().zip(dimension) {
            match sixtieths {
                0 => {}
                60 => out.push((*symbol).to_owned()),
                n if n % 60 == 0 => out.push(format!("{symbol}^{}", n / 60)),
                n => out.push(format!("{symbol}^({n}/60)")),
            }
        }
        (!out.is_empty()).then(|| out.join(" "))
    })
}

/// Units in which values are given, the most usual of each dimension first.
const USUAL: &[&str] = &[
    "m", "kg", "s", "A", "K", "m/s", "m/s^2", "N", "J", "W", "N s", "J s", "kg m^2", "N/m", "N s/m", "Hz", "C", "V",
    "Ω", "H", "F", "Wb", "T", "Pa", "m^2", "m^3", "kg/m", "kg/m^3", "kg/s", "V s/m", "V/m", "mol", "cd",
];

/// The dimension of a unit that is spelled with at most one `/` and whole exponents, in sixtieths.
fn spelled_dimension(text: &str) -> Option<[i64; 7]> {
    let mut out = [0i64; 7];
    for (k, product) in text.split('/').enumerate() {
        for factor in product.split(' ') {
            let (symbol, power) = factor.split_once('^').unwrap_or((factor, "1"));
            let power = power.parse::<i64>().ok()? * if k == 0 { 60 } else { -60 };
            for (sum, exponent) in out.iter_mut().zip(unit(symbol)?) {
                *sum += power * exponent as i64;
            }
        }
    }
    Some(out)
}

/// All quantity names.
pub fn quantity_names() -> impl Iterator<Item = &'static str> {
    QUANTITIES.iter().map(|q| q.0)
}

/// All unit symbols without prefixes.
pub fn unit_symbols() -> impl Iterator<Item = &'static str> {
    UNITS.iter().map(|u| u.0)
}

/// What was probably meant by a quantity name that is not known.
pub fn near_quantity(name: &str) -> Option<&'static str> {
    let spoken = match name.to_lowercase().as_str() {
        "inertia" | "momentofinertia" => Some("moment_of_inertia"),
        "distance" | "position" | "displacement" | "radius" | "height" | "width" => Some("length"),
        "weight" => Some("mass"),
        "moment" => Some("torque"),
        "spring_constant" | "spring" => Some("stiffness"),
        "rate" => Some("frequency"),
        "magnetic_field" => Some("magnetic_flux_density"),
        "electric_charge" => Some("charge"),
        "electric_current" => Some("current"),
        "potential_energy" | "kinetic_energy" | "heat" => Some("energy"),
        "duration" => Some("time"),
        "phase" | "rotation" => Some("angle"),
        _ => None,
    };
    spoken.or_else(|| nearest(name, quantity_names()))
}

/// What was probably meant by a unit that is not known.
pub fn near_unit(symbol: &str) -> Option<&'static str> {
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

    #[test]
    fn names_stand_once_and_are_sorted() {
        assert!(QUANTITIES.windows(2).all(|w| w[0].0 < w[1].0));
        for (k, u) in UNITS.iter().enumerate() {
            assert!(UNITS[..k].iter().all(|v| v.0 != u.0), "{} stands twice", u.0);
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

    #[test]
    fn what_was_meant() {
        assert_eq!(near_quantity("lenght"), Some("length"));
        assert_eq!(near_quantity("inertia"), Some("moment_of_inertia"));
        assert_eq!(near_unit("sec"), Some("s"));
        assert_eq!(near_unit("hz"), Some("Hz"));
        assert_eq!(near_unit("n"), Some("N"));
    }
}
