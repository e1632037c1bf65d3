//! Familiar names for a dimension: the quantity it is taken for, and a unit that a mechanic would write.

use crate::{Base, Compound, Dimension, Exponent, Quantity, quantities, quantity};

/// How a dimension is told.
#[derive(Clone, Debug)]
pub struct Familiar {
    /// The quantity that it is taken for, where one is.
    pub quantity: Option<&'static Quantity>,
    /// A fitting coherent unit.
    pub unit: Compound,
}

/// Units of which others are made, the most familiar first.
const UNITS: &[&str] = &["N", "J", "W", "C", "V", "Ω", "H", "Wb", "F"];

/// Quantities in whose names others are told, the most familiar first.
const NAMES: &[&str] = &["force", "energy", "power", "charge", "voltage"];

/// Tells a dimension in which the radian has the power `angle`. `hint` is the name of a quantity that it should be, such
/// as that of a declaration: it counts where it is of this dimension, and so tells a torque from an energy.
///
/// Without a hint the reciprocal of a time is `1/s`, not Hz, unless it is known to be an angle's rate (`rad/s`).
pub fn familiar(dimension: Dimension, angle: Exponent, hint: Option<&str>) -> Familiar {
    let hinted = hint.and_then(quantity).filter(|q| q.dimension == dimension);
    let first =
        |angle: Exponent| quantities().iter().find(|q| q.first && q.dimension == dimension && q.angle() == angle);
    // An angle is of dimension one: where no quantity has it, it is left out.
    let found = hinted.or_else(|| first(angle)).or_else(|| first(Exponent::ZERO));
    let unit = match found {
        Some(q) => q.usual().clone(),
        None => compose_unit(dimension),
    };
    Familiar { quantity: found, unit }
}

/// A dimension in words: the name of a quantity, else a product of names such as `energy/length²`.
pub fn in_words(dimension: Dimension, angle: Exponent, hint: Option<&str>) -> String {
    match familiar(dimension, angle, hint).quantity {
        Some(q) => q.words(),
        None => {
            let parts = NAMES.iter().filter_map(|n| Some((*n, quantity(n)?.dimension)));
            let product = shortest(dimension, parts, Base::name);
            spell(&product, |name| name.replace('_', " "))
        }
    }
}

/// A coherent unit of any dimension, with few symbols and small exponents: `N·m²/kg²`.
fn compose_unit(dimension: Dimension) -> Compound {
    let parts = UNITS.iter().filter_map(|u| Some((*u, Compound::read(u).ok()?.dimension())));
    let product = shortest(dimension, parts, Base::unit);
    Compound::new(&product).unwrap_or_else(|_| Compound::one())
}

/// The shortest of the products of one part, to the power 1 or −1, and base quantities.
fn shortest<'a>(
    dimension: Dimension,
    parts: impl Iterator<Item = (&'a str, Dimension)>,
    base: fn(Base) -> &'static str,
) -> Vec<(&'a str, Exponent)> {
    let rest = |d: Dimension| -> Vec<(&'a str, Exponent)> {
        // Mass before length before time, as in kg·m²/s.
        let order = [
            Base::Mass,
            Base::Length,
            Base::Current,
            Base::Time,
            Base::Temperature,
            Base::Amount,
            Base::LuminousIntensity,
        ];
        order.into_iter().map(|b| (base(b), d.exponent(b))).filter(|(_, e)| !e.is_zero()).collect()
    };
    // Motions alone are told in metres and seconds: m²/s², not J/kg.
    let has = |d: Dimension, b: Base| !d.exponent(b).is_zero();
    let fits = |part: &Dimension| [Base::Mass, Base::Current].into_iter().all(|b| has(dimension, b) || !has(*part, b));
    let mut best = rest(dimension);
    for (name, part) in parts.filter(|(_, part)| fits(part)) {
        for power in [Exponent::ONE, Exponent::whole(-1)] {
            let Some(remainder) = part.pow(power).and_then(|p| dimension.over(p)) else { continue };
            let mut list = rest(remainder);
            // Behind a force or voltage stand the lengths and times that it is multiplied with.
            list.insert(0, (name, power));
            if cost(&list) < cost(&best) {
                best = list;
            }
        }
    }
    best
}

/// Symbols count, and so do exponents. A force is preferred: N·m²/kg², not J·m/kg².
fn cost(list: &[(&str, Exponent)]) -> i64 {
    let one = |(name, e): &(&str, Exponent)| {
        let size = 1 + e.num().unsigned_abs() as i64 + 2 * (e.den() as i64 - 1);
        size - i64::from(matches!(*name, "N" | "force") && !e.is_negative())
    };
    list.iter().map(one).sum()
}

fn spell(list: &[(&str, Exponent)], name: impl Fn(&str) -> String) -> String {
    let part = |negative: bool| -> Vec<String> {
        let there = list.iter().filter(|(_, e)| e.is_negative() == negative);
        there.map(|(n, e)| format!("{}{}", name(n), e.abs().raised())).collect()
    };
    let (above, below) = (part(false), part(true));
    let head = if above.is_empty() { "1".to_owned() } else { above.join("·") };
    match below.as_slice() {
        [] => head,
        [one] => format!("{head}/{one}"),
        more => format!("{head}/({})", more.join("·")),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[track_caller]
    fn check(unit: &str, hint: Option<&str>, shown: &str, words: &str) {
        let c = Compound::read(unit).expect("a unit");
        let f = familiar(c.dimension(), c.angle(), hint);
        let told = in_words(c.dimension(), c.angle(), hint);
        assert_eq!((f.unit.to_string().as_str(), told.as_str()), (shown, words), "{unit}");
    }

    #[test]
    fn named() {
        check("kg m^2/s^2", None, "J", "energy");
        check("kg m^2/s^2", Some("torque"), "N·m", "torque");
        check("kg m^2/s^2", Some("velocity"), "J", "energy");
        check("kg/s^2", None, "N/m", "stiffness");
        check("kg/s^2", Some("surface_tension"), "N/m", "surface tension");
        check("kg/s", None, "N·s/m", "damping");
        check("kg/s", Some("mass_flow_rate"), "kg/s", "mass flow rate");
        check("kg m^2", None, "kg·m²", "moment of inertia");
        check("kg m/s", None, "N·s", "momentum");
        check("J s", None, "kg·m²/s", "angular momentum");
        check("J s", Some("action"), "J·s", "action");
        check("rad/s", None, "rad/s", "angular velocity");
        check("rad/s^2", None, "rad/s²", "angular acceleration");
        check("N m/rad", None, "N·m/rad", "torsional stiffness");
        check("m rad/s", None, "m/s", "velocity");
        check("°", None, "rad", "angle");
        check("Wb/m", None, "Wb/m", "magnetic vector potential");
        check("%", None, "1", "dimensionless");
    }

    #[test]
    fn composed() {
        check("1/s", None, "1/s", "1/time");
        check("1/s", Some("frequency"), "Hz", "frequency");
        check("1/s^2", None, "1/s²", "1/time²");
        check("N m^2/kg^2", None, "N·m²/kg²", "force·length²/mass²");
        check("N m^2", None, "N·m²", "force·length²");
        check("m^2/s^2", None, "m²/s²", "length²/time²");
        check("J m/K", None, "N·m²/K", "force·length²/temperature");
        check("N/m^3", None, "N/m³", "force/length³");
        check("V/m^2", None, "V/m²", "voltage/length²");
        check("C m^2", None, "C·m²", "charge·length²");
        check("m^(1/2)", None, "m^(1/2)", "length^(1/2)");
        check("m^3/s^2", None, "m³/s²", "length³/time²");
    }

    proptest! {
        /// Whatever the dimension, the unit is coherent and of it.
        #[test]
        fn of_the_dimension(list in proptest::array::uniform7((-5i64..6, 1i64..4))) {
            let d = Dimension::new(list.map(|(n, d)| Exponent::new(n, d).unwrap_or(Exponent::ZERO)));
            let unit = familiar(d, Exponent::ZERO, None).unit;
            prop_assert_eq!(unit.dimension(), d);
            prop_assert!(unit.factor().is_ok_and(|f| f.is_one()));
            prop_assert_eq!(Compound::read(&unit.plain()).map(|c| c.dimension()), Ok(d));
        }
    }
}
