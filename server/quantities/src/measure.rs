//! Exact values with the unit in which they were written.

use crate::{Compound, Exact, UnitError};
use std::fmt;

/// A value and its unit, as written: `4°`, `0.1 mm`.
#[derive(Clone, Debug)]
pub struct Measure {
    /// The number before the unit.
    pub value: Exact,
    /// The unit.
    pub unit: Compound,
}

impl Measure {
    /// A value with its unit.
    pub fn new(value: Exact, unit: Compound) -> Measure {
        Measure { value, unit }
    }

    /// The number of coherent SI units, exactly. A value in °C counts as a difference of temperatures.
    pub fn si(&self) -> Result<Exact, UnitError> {
        self.value.times(self.unit.factor()?).ok_or(UnitError::TooLarge)
    }

    /// The same quantity in another unit of its dimension, exactly.
    pub fn in_unit(&self, unit: &Compound) -> Result<Measure, UnitError> {
        if unit.dimension() != self.unit.dimension() {
            return Err(UnitError::Dimensions(self.unit.dimension(), unit.dimension()));
        }
        let value = self.si()?.over(unit.factor()?).ok_or(UnitError::TooLarge)?;
        Ok(Measure { value, unit: unit.clone() })
    }

    /// From the number of coherent SI units: a result in the unit that was written.
    pub fn from_si(value: &Exact, unit: &Compound) -> Result<Measure, UnitError> {
        let value = value.over(unit.factor()?).ok_or(UnitError::TooLarge)?;
        Ok(Measure { value, unit: unit.clone() })
    }
}

/// `0.1 mm`, `1/3 m`, `π/45 rad`, `4°`: a finite decimal where it is one.
impl fmt::Display for Measure {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let value = self.value.decimal().unwrap_or_else(|| self.value.to_string());
        let unit = self.unit.to_string();
        match unit.as_str() {
            "1" => f.write_str(&value),
            "°" | "′" | "″" => write!(f, "{value}{unit}"),
            // `2 1/s` would be read as a product of numbers.
            _ if unit.starts_with("1/") => write!(f, "{value} {}", &unit[1..]),
            _ => write!(f, "{value} {unit}"),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::table;
    use leastwise_algebra::Rational;
    use proptest::prelude::*;

    fn measure(value: &str, unit: &str) -> Measure {
        let (value, _) = table::value(value, |_| None).expect("a number");
        Measure::new(value, Compound::read(unit).expect("a unit"))
    }

    #[test]
    fn to_si_and_into_other_units() {
        let check = |value: &str, unit: &str, written: &str, si: &str, other: &str, there: &str| {
            let m = measure(value, unit);
            let into = m.in_unit(&Compound::read(other).expect("a unit")).expect("same dimension");
            assert_eq!(
                (m.to_string().as_str(), m.si().map(|x| x.to_string()).as_deref(), into.to_string().as_str()),
                (written, Ok(si), there)
            );
        };
        check("0.1", "mm", "0.1 mm", "1/10000", "μm", "100 μm");
        check("4", "°", "4°", "π/45", "mrad", "200π/9 mrad");
        check("90", "°", "90°", "π/2", "r", "0.25 r");
        check("1500", "r/min", "1500 r/min", "50π", "rad/s", "50π rad/s");
        check("36", "km/h", "36 km/h", "10", "m/s", "10 m/s");
        check("2", "1/min", "2 /min", "1/30", "1/h", "120 /h");
        check("1", "eV", "1 eV", "801088317/5000000000000000000000000000", "J", "1.602176634e-19 J");
        check("20", "°C", "20 °C", "20", "K", "20 K");
        check("5", "%", "5 %", "1/20", "1", "0.05");
        check("1", "L", "1 L", "1/1000", "cm^3", "1000 cm³");
    }

    #[test]
    fn refusals() {
        let second = Compound::read("s").expect("a unit");
        let error = measure("1", "m").in_unit(&second).map(|m| m.to_string()).map_err(|e| e.to_string());
        assert_eq!(error, Err("m and s are not of the same dimension".to_owned()));
        assert_eq!(measure("3", "dB").si(), Err(UnitError::Level));
    }

    proptest! {
        /// Into another unit and back is the same value, exactly.
        #[test]
        fn round_trip(n in -10_000i64..10_000, d in 1i64..500, k in 0usize..6) {
            let pairs = [("mm", "km"), ("°", "rad"), ("km/h", "mm/s"), ("kW h", "eV"), ("r/min", "°/s"), ("g cm^2", "kg m^2")];
            let (one, other) = pairs[k];
            let value = Exact::rational(Rational::new(n, d).expect("a denominator"));
            let (one, other) = (Compound::read(one).expect("a unit"), Compound::read(other).expect("a unit"));
            let m = Measure::new(value.clone(), one.clone());
            let back = m.in_unit(&other).and_then(|there| there.in_unit(&one)).expect("same dimension");
            prop_assert_eq!(back.value, value.clone());
            let si = m.si().expect("small");
            prop_assert_eq!(Measure::from_si(&si, &one).map(|m| m.value), Ok(value));
        }
    }
}
