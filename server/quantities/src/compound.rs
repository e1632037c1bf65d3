//! Compound units: products of powers of units.

use crate::units::{Mark, Symbol, unit};
use crate::{Dimension, Exact, Exponent};
use leastwise_algebra::Rational;
use std::fmt;
use std::sync::OnceLock;

/// A product of powers of units as it was written, with what it comes to.
#[derive(Clone, Debug)]
pub struct Compound {
    factors: Vec<(Symbol, Exponent)>,
    dimension: Dimension,
    angle: Exponent,
    /// Told when it is asked for: a dimension is wanted at every keystroke, a factor only to be shown.
    factor: OnceLock<Option<Exact>>,
}

/// Why a unit or a conversion cannot be told.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum UnitError {
    /// The symbol of one factor is not known.
    Unknown {
        /// Which factor, from 0.
        at: usize,
        /// Its symbol.
        symbol: String,
    },
    /// Exponents or digits grow beyond bounds.
    TooLarge,
    /// A level, in nepers or bels, is no multiple of a unit.
    Level,
    /// The two units are not of the same dimension.
    Dimensions(Dimension, Dimension),
    /// The text of a unit cannot be read, and why.
    Spelling(String),
}

impl fmt::Display for UnitError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            UnitError::Unknown { symbol, .. } => write!(f, "`{symbol}` is not known as a unit"),
            UnitError::TooLarge => f.write_str("the unit's exponents or digits are too large"),
            UnitError::Level => f.write_str("a level in nepers or bels is a logarithm, not a multiple of a unit"),
            UnitError::Dimensions(one, other) => {
                write!(f, "{} and {} are not of the same dimension", one.base_units(), other.base_units())
            }
            UnitError::Spelling(why) => f.write_str(why),
        }
    }
}

impl std::error::Error for UnitError {}

impl Compound {
    /// From symbols and their exponents, as the grammar delivers them.
    pub fn new<S: AsRef<str>>(factors: &[(S, Exponent)]) -> Result<Compound, UnitError> {
        let known = factors.iter().enumerate().map(|(at, (symbol, exponent))| {
            let symbol = symbol.as_ref();
            let found = unit(symbol).ok_or_else(|| UnitError::Unknown { at, symbol: symbol.to_owned() })?;
            Ok((found, *exponent))
        });
        Compound::of(known.collect::<Result<_, _>>()?).ok_or(UnitError::TooLarge)
    }

    /// From text, as it is printed: `N·m/s²`, `kg m^2`, `W/(m^2 K^4)`.
    pub fn read(text: &str) -> Result<Compound, UnitError> {
        Compound::new(&crate::spelling::read(text).map_err(UnitError::Spelling)?)
    }

    fn of(factors: Vec<(Symbol, Exponent)>) -> Option<Compound> {
        let mut out = Compound::one();
        for (symbol, exponent) in &factors {
            out.dimension = out.dimension.times(symbol.unit.dimension.pow(*exponent)?)?;
            out.angle = out.angle.plus(symbol.unit.angle.times(*exponent)?)?;
        }
        out.factors = factors;
        Some(out)
    }

    /// The unit one.
    pub fn one() -> Compound {
        Compound { factors: Vec::new(), dimension: Dimension::ONE, angle: Exponent::ZERO, factor: OnceLock::new() }
    }

    /// The units and their exponents as written.
    pub fn factors(&self) -> &[(Symbol, Exponent)] {
        &self.factors
    }

    /// Its dimension.
    pub fn dimension(&self) -> Dimension {
        self.dimension
    }

    /// The power of the radian in it: 1 for `°` and `r/min`, 0 for `Hz`.
    pub fn angle(&self) -> Exponent {
        self.angle
    }

    /// How many coherent SI units it is; an error for a level, or where it has too many digits.
    pub fn factor(&self) -> Result<&Exact, UnitError> {
        if self.has(Mark::Level) {
            return Err(UnitError::Level);
        }
        let factor = self.factor.get_or_init(|| {
            self.factors.iter().try_fold(Exact::ONE, |product, (s, e)| product.times(&s.factor().pow(*e)?))
        });
        factor.as_ref().ok_or(UnitError::TooLarge)
    }

    /// Whether one of its units has this mark.
    pub fn has(&self, mark: Mark) -> bool {
        self.factors.iter().any(|(s, _)| s.unit.mark == mark)
    }

    /// Whether it counts events or turns in a time, as hertz do: not for angular velocities.
    pub fn counts_cycles(&self) -> bool {
        self.has(Mark::Cycle)
    }

    /// What a value of 0 is as a thermodynamic temperature in kelvins, where the unit is the degree Celsius alone. As a
    /// unit it is read as a difference of temperatures, 1 K.
    pub fn zero_point(&self) -> Option<Rational> {
        match self.factors.as_slice() {
            [(s, e)] if s.unit.mark == Mark::Difference && *e == Exponent::ONE => Rational::new(27315, 100),
            _ => None,
        }
    }

    /// Whether one of its units is measured: the dalton.
    pub fn is_measured(&self) -> bool {
        self.factors.iter().any(|(s, e)| s.unit.uncertainty().is_some() && !e.is_zero())
    }

    /// The standard uncertainty of the factor, to first order; `None` where it is exact or irrational. All measured units
    /// are multiples of the dalton, so that their uncertainties add up with their signs.
    pub fn uncertainty(&self) -> Option<Rational> {
        let mut relative = Rational::ZERO;
        for (s, e) in self.factors.iter().filter(|(s, _)| s.unit.uncertainty().is_some()) {
            let own = s.unit.uncertainty()?.div(s.unit.factor().to_rational()?)?;
            relative = relative.add(&own.mul(&e.to_rational()));
        }
        (!relative.is_zero()).then(|| Some(relative.abs().mul(self.factor().ok()?.to_rational()?)))?
    }

    /// The product.
    pub fn times(&self, other: &Compound) -> Option<Compound> {
        Compound::of(self.factors.iter().chain(&other.factors).copied().collect())
    }

    /// The power.
    pub fn pow(&self, exponent: Exponent) -> Option<Compound> {
        let raised = self.factors.iter().map(|(s, e)| Some((*s, e.times(exponent)?)));
        Compound::of(raised.collect::<Option<_>>()?)
    }

    /// The quotient.
    pub fn over(&self, other: &Compound) -> Option<Compound> {
        self.times(&other.pow(Exponent::whole(-1))?)
    }

    /// In ASCII operators, as the language reads it: `N m/s^2`.
    pub fn plain(&self) -> String {
        self.spell(" ", Exponent::plain)
    }

    fn spell(&self, sign: &str, raise: fn(Exponent) -> String) -> String {
        let part = |negative: bool| {
            let there = self.factors.iter().filter(|(_, e)| e.is_negative() == negative && !e.is_zero());
            there.map(|(s, e)| format!("{}{}", s.text(), raise(e.abs()))).collect::<Vec<_>>()
        };
        let (above, below) = (part(false), part(true));
        let head = if above.is_empty() { "1".to_owned() } else { above.join(sign) };
        match below.as_slice() {
            [] => head,
            [one] => format!("{head}/{one}"),
            more => format!("{head}/({})", more.join(sign)),
        }
    }
}

/// As in print: `N·m/s²`, `W/(m²·K⁴)`, `1/s`.
impl fmt::Display for Compound {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.spell("·", Exponent::raised))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::{prefixes, units};
    use proptest::prelude::*;

    #[track_caller]
    fn check(text: &str, shown: &str, factor: &str, dimension: &str) {
        let c = Compound::read(text).unwrap_or_else(|e| panic!("{text}: {e}"));
        let of = c.factor().map(|f| f.decimal().unwrap_or_else(|| f.to_string()));
        let got = (c.to_string(), of, c.dimension().to_string());
        assert_eq!(got, (shown.to_owned(), Ok(factor.to_owned()), dimension.to_owned()));
    }

    #[test]
    fn products_of_powers() {
        check("N m/s^2", "N·m/s²", "1", "L² M T⁻⁴");
        check("kg cm^2", "kg·cm²", "0.0001", "L² M");
        check("r/min", "r/min", "π/30", "T⁻¹");
        check("km/h", "km/h", "5/18", "L T⁻¹");
        check("W/(m²·K⁴)", "W/(m²·K⁴)", "1", "M T⁻³ Θ⁻⁴");
        check("mm^(1/2)", "mm^(1/2)", "√(1/1000)", "L^(1/2)");
        check("V/m^(1/2)", "V/m^(1/2)", "1", "L^(3/2) M T⁻³ I⁻¹");
        check("1/s", "1/s", "1", "T⁻¹");
        check("s^-1", "1/s", "1", "T⁻¹");
        check("kW h", "kW·h", "3600000", "L² M T⁻²");
        check("°/s²", "°/s²", "π/180", "T⁻²");
        check("1", "1", "1", "1");
    }

    #[test]
    fn errors_say_what_to_look_at() {
        let check = |text: &str, message: &str| {
            assert_eq!(Compound::read(text).map_err(|e| e.to_string()).err().as_deref(), Some(message));
        };
        check("N/ft", "`ft` is not known as a unit");
        check("m^2147483647 m", "the unit's exponents or digits are too large");
        let large = Compound::read("km^2147483647").expect("its dimension is known");
        assert_eq!(large.factor(), Err(UnitError::TooLarge));
        let unknown = Compound::new(&[("m", Exponent::ONE), ("foo", Exponent::ONE)]).map(|_| ());
        assert_eq!(unknown, Err(UnitError::Unknown { at: 1, symbol: "foo".to_owned() }));
    }

    #[test]
    fn what_has_to_be_minded() {
        let read = |text| Compound::read(text).expect("a unit");
        assert!(read("kHz").counts_cycles() && !read("rad/s").counts_cycles());
        assert_eq!(
            (read("r/min").angle(), read("Hz").angle(), read("N m/rad").angle().to_string().as_str()),
            (Exponent::ONE, Exponent::ZERO, "-1")
        );
        assert_eq!(read("dB").factor(), Err(UnitError::Level));
        assert_eq!(read("°C").zero_point(), Rational::new(27315, 100));
        assert_eq!(read("J/°C").zero_point(), None);
        assert!(read("kDa").is_measured() && !read("eV").is_measured());
        assert_eq!(read("u").uncertainty(), read("Da").uncertainty());
        assert_eq!(read("u/Da").uncertainty(), None);
        assert_eq!(read("1/s").plain(), "1/s");
        assert_eq!(read("W/(m²·K⁴)").plain(), "W/(m^2 K^4)");
    }

    fn any_unit() -> impl Strategy<Value = Compound> {
        let factor = (0..units().len(), 0..prefixes().len() + 1, -4i64..5, 1i64..3);
        proptest::collection::vec(factor, 0..4).prop_filter_map("levels are not converted", |list| {
            let factors = list.into_iter().filter_map(|(u, p, n, d)| {
                let (unit, prefix) = (&units()[u], prefixes().get(p));
                let prefix = prefix.filter(|p| unit.prefixes.take(p)).map_or("", |p| p.symbol);
                Some((format!("{prefix}{}", unit.symbol), Exponent::new(n, d)?)).filter(|f| !f.1.is_zero())
            });
            Compound::new(&factors.collect::<Vec<_>>()).ok().filter(|c| c.factor().is_ok())
        })
    }

    proptest! {
        /// Both prints read back as the same unit.
        #[test]
        fn print_then_read(a in any_unit()) {
            for text in [a.to_string(), a.plain()] {
                let b = Compound::read(&text).expect("a unit");
                prop_assert_eq!(b.to_string(), a.to_string());
                prop_assert_eq!(b.factor(), a.factor());
                prop_assert_eq!((b.dimension(), b.angle()), (a.dimension(), a.angle()));
            }
        }

        /// Factor and dimension are those of the product, exactly.
        #[test]
        fn products_multiply(a in any_unit(), b in any_unit()) {
            let c = a.times(&b).expect("small");
            prop_assert_eq!(c.factor().ok().cloned(), a.factor().ok().zip(b.factor().ok()).and_then(|(x, y)| x.times(y)));
            prop_assert_eq!(Some(c.dimension()), a.dimension().times(b.dimension()));
            prop_assert_eq!(c.over(&b).and_then(|q| q.factor().ok().cloned()), a.factor().ok().cloned());
        }
    }
}
