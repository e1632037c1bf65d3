//! Quantities behind a colon, units behind a number.

use super::{Completion, CompletionKind, plain};
use crate::quantities::{quantity, quantity_names, unit, unit_symbols};

/// Units with a prefix that are in everyday use, and products that are.
const USUAL: &[&str] = &[
    "kg", "mm", "cm", "km", "ms", "μs", "mg", "kN", "mN", "kHz", "MHz", "GPa", "MPa", "kPa", "kJ", "mJ", "MJ", "kW",
    "mW", "MW", "mA", "kV", "mV", "μF", "nF", "mH", "mT", "kΩ", "MΩ", "mrad", "MeV", "keV",
];

/// Products and quotients, with the quantities that have no unit of their own.
const COMPOUND: &[(&str, &str)] = &[
    ("velocity", "m/s"),
    ("speed", "m/s"),
    ("acceleration", "m/s^2"),
    ("jerk", "m/s^3"),
    ("angular_velocity", "rad/s"),
    ("angular_velocity", "r/min"),
    ("angular_velocity", "°/s"),
    ("angular_frequency", "rad/s"),
    ("angular_acceleration", "rad/s^2"),
    ("momentum", "kg m/s"),
    ("impulse", "N s"),
    ("angular_momentum", "kg m^2/s"),
    ("moment_of_inertia", "kg m^2"),
    ("stiffness", "N/m"),
    ("damping", "N s/m"),
    ("torque", "N m"),
    ("torsional_stiffness", "N m/rad"),
    ("rotational_stiffness", "N m/rad"),
    ("torsional_damping", "N m s/rad"),
    ("rotational_damping", "N m s/rad"),
    ("area", "m^2"),
    ("volume", "m^3"),
    ("density", "kg/m^3"),
    ("linear_density", "kg/m"),
    ("electric_field", "V/m"),
    ("viscosity", "Pa s"),
    ("action", "J s"),
    ("wavenumber", "1/m"),
    ("curvature", "1/m"),
];

/// All quantities, and units for those who think in units.
pub(super) fn quantities() -> Vec<Completion> {
    // What mechanics needs most stands first.
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
    let mut list: Vec<Completion> = FIRST
        .into_iter()
        .chain(rest)
        .map(|q| plain(q, CompletionKind::Quantity, usual_unit(q).unwrap_or_default(), None))
        .collect();
    list.extend(symbols().map(|u| plain(u, CompletionKind::Unit, "unit", None)));
    list
}

/// All unit symbols, the everyday ones with prefixes among them.
fn symbols() -> impl Iterator<Item = &'static str> {
    unit_symbols().chain(USUAL.iter().copied())
}

fn usual_unit(name: &str) -> Option<&'static str> {
    let compound = COMPOUND.iter().find(|(q, _)| *q == name).map(|(_, u)| *u);
    let dimension = quantity(name)?;
    compound.or_else(|| {
        let own = ["m", "kg", "s", "A", "K", "N", "J", "W", "Hz", "C", "V", "Ω", "F", "H", "Wb", "T", "Pa", "rad"];
        own.into_iter().find(|u| unit(u) == Some(dimension))
    })
}

/// The units of a value, those of its quantity first.
pub(super) fn fitting(declared: Option<&str>) -> Vec<Completion> {
    let wanted = declared.and_then(|name| quantity(name).map(|d| (name, d)));
    let mut list = Vec::new();
    if let Some((name, dimension)) = wanted {
        let own = COMPOUND.iter().filter(|(q, _)| *q == name).map(|(_, u)| *u);
        let same = symbols().filter(|u| unit(u) == Some(dimension));
        for u in own.chain(same) {
            list.push(plain(u, CompletionKind::Unit, name, None));
        }
        // The base unit of a mass is the one with a prefix.
        list.sort_by_key(|c| c.label == "g");
        list.sort_by_key(|c| Some(c.label.as_str()) != usual_unit(name));
    }
    for u in symbols() {
        if list.iter().all(|c| c.label != u) {
            list.push(plain(u, CompletionKind::Unit, "unit", None));
        }
    }
    list
}

#[cfg(test)]
mod tests {
    use super::*;

    fn first(of: &str, n: usize) -> Vec<String> {
        fitting(Some(of)).into_iter().take(n).map(|c| c.label).collect()
    }

    #[test]
    fn units_of_the_quantity_come_first() {
        assert_eq!(first("mass", 2), ["kg", "t"]);
        assert_eq!(first("velocity", 1), ["m/s"]);
        assert_eq!(first("angular_velocity", 3), ["rad/s", "r/min", "°/s"]);
        assert_eq!(first("length", 1), ["m"]);
    }

    #[test]
    fn all_units_of_the_tables_are_known() {
        for u in USUAL {
            assert!(unit(u).is_some(), "{u}");
        }
        for (q, _) in COMPOUND {
            assert!(quantity(q).is_some(), "{q}");
        }
    }
}
