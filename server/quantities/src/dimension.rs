//! Dimensions: products of rational powers of the seven base quantities (ISO 80000-1, 5; SI Brochure, 9th ed., 2.3.3).

use crate::Exponent;
use std::fmt;

/// A base quantity of the International System of Quantities.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Base {
    /// L, in metres.
    Length,
    /// M, in kilograms.
    Mass,
    /// T, in seconds.
    Time,
    /// I, in amperes.
    Current,
    /// Θ, in kelvins.
    Temperature,
    /// N, in moles.
    Amount,
    /// J, in candelas.
    LuminousIntensity,
}

impl Base {
    /// All, in the order in which a dimension lists them.
    pub const ALL: [Base; 7] =
        [Base::Length, Base::Mass, Base::Time, Base::Current, Base::Temperature, Base::Amount, Base::LuminousIntensity];

    /// The symbol of its dimension.
    pub fn symbol(self) -> &'static str {
        ["L", "M", "T", "I", "Θ", "N", "J"][self as usize]
    }

    /// The symbol of its unit.
    pub fn unit(self) -> &'static str {
        ["m", "kg", "s", "A", "K", "mol", "cd"][self as usize]
    }

    /// Its name among the quantities.
    pub fn name(self) -> &'static str {
        ["length", "mass", "time", "current", "temperature", "amount", "luminous_intensity"][self as usize]
    }
}

/// The exponents of length, mass, time, electric current, temperature, amount of substance, luminous intensity.
///
/// Operations answer `None` where an exponent would leave two machine words.
#[derive(Clone, Copy, PartialEq, Eq, Hash)]
pub struct Dimension([Exponent; 7]);

impl Dimension {
    /// The dimension of a number.
    pub const ONE: Dimension = Dimension([Exponent::ZERO; 7]);

    /// From the exponents, in the order of [`Base::ALL`].
    pub const fn new(exponents: [Exponent; 7]) -> Dimension {
        Dimension(exponents)
    }

    /// From whole exponents, in the order of [`Base::ALL`].
    pub fn whole(exponents: [i16; 7]) -> Dimension {
        Dimension(exponents.map(Exponent::whole))
    }

    /// The dimension of a base quantity.
    pub fn of(base: Base) -> Dimension {
        let mut out = Dimension::ONE;
        out.0[base as usize] = Exponent::ONE;
        out
    }

    /// The exponents, in the order of [`Base::ALL`].
    pub fn exponents(self) -> [Exponent; 7] {
        self.0
    }

    /// The exponent of one base quantity.
    pub fn exponent(self, base: Base) -> Exponent {
        self.0[base as usize]
    }

    /// Whether it is that of a number.
    pub fn is_one(self) -> bool {
        self == Dimension::ONE
    }

    /// The dimension of a product.
    pub fn times(self, other: Dimension) -> Option<Dimension> {
        self.zip(other, Exponent::plus)
    }

    /// The dimension of a quotient.
    pub fn over(self, other: Dimension) -> Option<Dimension> {
        self.zip(other, Exponent::minus)
    }

    /// The dimension of a power.
    pub fn pow(self, exponent: Exponent) -> Option<Dimension> {
        self.zip(self, |e, _| e.times(exponent))
    }

    fn zip(self, other: Dimension, f: impl Fn(Exponent, Exponent) -> Option<Exponent>) -> Option<Dimension> {
        let mut out = Dimension::ONE;
        for k in 0..7 {
            out.0[k] = f(self.0[k], other.0[k])?;
        }
        Some(out)
    }

    /// In base units, mass first as in the SI Brochure: `kg·m²·s⁻²`; `1` for a number.
    pub fn base_units(self) -> String {
        // A charge is A·s, but a voltage is kg·m²·s⁻³·A⁻¹.
        let charge = !self.exponent(Base::Time).is_negative() && !self.exponent(Base::Current).is_negative();
        let order = if charge { [1, 0, 3, 2, 4, 5, 6] } else { [1, 0, 2, 3, 4, 5, 6] };
        self.product(order, Base::unit, "·")
    }

    fn product(self, order: [usize; 7], symbol: fn(Base) -> &'static str, sign: &str) -> String {
        let there = order.iter().filter(|&&k| !self.0[k].is_zero());
        let list: Vec<String> = there.map(|&k| format!("{}{}", symbol(Base::ALL[k]), self.0[k].raised())).collect();
        if list.is_empty() { "1".to_owned() } else { list.join(sign) }
    }
}

/// In the symbols of dimensions, `L² M T⁻²`; `1` for a number.
impl fmt::Display for Dimension {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.product([0, 1, 2, 3, 4, 5, 6], Base::symbol, " "))
    }
}

impl fmt::Debug for Dimension {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{self}")
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn printed_in_symbols_and_base_units() {
        let check = |exponents, symbols: &str, units: &str| {
            let d = Dimension::whole(exponents);
            assert_eq!((d.to_string().as_str(), d.base_units().as_str()), (symbols, units));
        };
        check([0; 7], "1", "1");
        check([2, 1, -2, 0, 0, 0, 0], "L² M T⁻²", "kg·m²·s⁻²");
        check([0, 0, 1, 1, 0, 0, 0], "T I", "A·s");
        check([2, 1, -3, -1, 0, 0, 0], "L² M T⁻³ I⁻¹", "kg·m²·s⁻³·A⁻¹");
        check([-2, 0, 0, 0, 1, 1, 1], "L⁻² Θ N J", "m⁻²·K·mol·cd");
        let root = Dimension::of(Base::Length).pow(Exponent::HALF);
        assert_eq!(root.map(|d| d.to_string()).as_deref(), Some("L^(1/2)"));
    }

    #[test]
    fn an_overflow_is_none() {
        let big = Exponent::new(i32::MAX as i64, 1).and_then(|e| Dimension::of(Base::Time).pow(e));
        assert_eq!(big.and_then(|d| d.times(Dimension::of(Base::Time))), None);
        assert_eq!(big.and_then(|d| d.over(d)), Some(Dimension::ONE));
    }

    fn any_dimension() -> impl Strategy<Value = Dimension> {
        proptest::array::uniform7((-9i64..9, 1i64..7))
            .prop_map(|list| Dimension::new(list.map(|(n, d)| Exponent::new(n, d).unwrap_or(Exponent::ZERO))))
    }

    proptest! {
        /// Dimensions are a vector space over the rationals, written as products and powers.
        #[test]
        fn vector_space(a in any_dimension(), b in any_dimension(), n in -9i64..9, d in 1i64..7) {
            let e = Exponent::new(n, d).unwrap_or(Exponent::ONE);
            prop_assert_eq!(a.times(b), b.times(a));
            prop_assert_eq!(a.times(b).and_then(|c| c.over(b)), Some(a));
            prop_assert_eq!(a.times(b).and_then(|c| c.pow(e)),
                a.pow(e).zip(b.pow(e)).and_then(|(x, y)| x.times(y)));
            prop_assert_eq!(a.pow(Exponent::ZERO), Some(Dimension::ONE));
            prop_assert_eq!(a.pow(Exponent::ONE), Some(a));
        }
    }
}
