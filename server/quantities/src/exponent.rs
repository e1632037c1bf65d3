//! Exponents of dimensions and units: small exact rationals.

use leastwise_algebra::Rational;
use std::cmp::Ordering;
use std::fmt;

/// A rational exponent in lowest terms, in two machine words. Operations that leave them answer `None`.
#[derive(Clone, Copy, PartialEq, Eq, Hash)]
pub struct Exponent {
    num: i32,
    den: i32,
}

impl Exponent {
    /// Zero.
    pub const ZERO: Exponent = Exponent { num: 0, den: 1 };
    /// One.
    pub const ONE: Exponent = Exponent { num: 1, den: 1 };
    /// One half.
    pub const HALF: Exponent = Exponent { num: 1, den: 2 };

    /// A whole exponent.
    pub const fn whole(n: i16) -> Exponent {
        Exponent { num: n as i32, den: 1 }
    }

    /// `num / den` in lowest terms, or `None` for a zero denominator or what does not fit.
    pub fn new(num: i64, den: i64) -> Option<Exponent> {
        if den == 0 {
            return None;
        }
        let divisor = gcd(num.unsigned_abs(), den.unsigned_abs()) as i128;
        let sign = den.signum() as i128;
        let num = i32::try_from(sign * num as i128 / divisor).ok()?;
        let den = i32::try_from(sign * den as i128 / divisor).ok()?;
        // The most negative word has no negative.
        (num != i32::MIN).then_some(Exponent { num, den })
    }

    /// The numerator, with the sign.
    pub fn num(self) -> i32 {
        self.num
    }

    /// The denominator, at least 1.
    pub fn den(self) -> i32 {
        self.den
    }

    /// Whether it is zero.
    pub fn is_zero(self) -> bool {
        self.num == 0
    }

    /// Whether it is below zero.
    pub fn is_negative(self) -> bool {
        self.num < 0
    }

    /// The integer that it is.
    pub fn to_integer(self) -> Option<i32> {
        (self.den == 1).then_some(self.num)
    }

    /// The sum.
    pub fn plus(self, other: Exponent) -> Option<Exponent> {
        if self.den == 1 && other.den == 1 {
            let num = self.num.checked_add(other.num).filter(|n| *n != i32::MIN)?;
            return Some(Exponent { num, den: 1 });
        }
        let (a, b, c, d) = (self.num as i64, self.den as i64, other.num as i64, other.den as i64);
        Exponent::new((a * d).checked_add(c * b)?, b * d)
    }

    /// The difference.
    pub fn minus(self, other: Exponent) -> Option<Exponent> {
        self.plus(other.negative())
    }

    /// The product.
    pub fn times(self, other: Exponent) -> Option<Exponent> {
        if self.den == 1 && other.den == 1 {
            let num = self.num.checked_mul(other.num).filter(|n| *n != i32::MIN)?;
            return Some(Exponent { num, den: 1 });
        }
        Exponent::new(self.num as i64 * other.num as i64, self.den as i64 * other.den as i64)
    }

    /// The quotient, `None` for a zero divisor.
    pub fn over(self, other: Exponent) -> Option<Exponent> {
        Exponent::new(self.num as i64 * other.den as i64, self.den as i64 * other.num as i64)
    }

    /// The negative.
    pub fn negative(self) -> Exponent {
        Exponent { num: -self.num, den: self.den }
    }

    /// The absolute value.
    pub fn abs(self) -> Exponent {
        Exponent { num: self.num.abs(), den: self.den }
    }

    /// The same as a number of the algebra.
    pub fn to_rational(self) -> Rational {
        Rational::new(self.num as i64, self.den as i64).unwrap_or(Rational::ZERO)
    }

    /// From a number of the algebra, where it fits.
    pub fn from_rational(r: &Rational) -> Option<Exponent> {
        let (num, den) = r.small()?;
        Exponent::new(num, den)
    }

    /// As it stands behind a unit: nothing for 1, `²`, `⁻¹`, `^(1/2)`.
    pub fn raised(self) -> String {
        match (self.num, self.den) {
            (1, 1) => String::new(),
            (n, 1) => n.to_string().chars().map(raised_digit).collect(),
            (n, d) => format!("^({n}/{d})"),
        }
    }

    /// The same in ASCII: nothing for 1, `^2`, `^-1`, `^(1/2)`.
    pub fn plain(self) -> String {
        match (self.num, self.den) {
            (1, 1) => String::new(),
            (n, 1) => format!("^{n}"),
            (n, d) => format!("^({n}/{d})"),
        }
    }
}

fn raised_digit(c: char) -> char {
    match c {
        '-' => '⁻',
        '1' => '¹',
        '2' => '²',
        '3' => '³',
        c => c.to_digit(10).and_then(|n| char::from_u32(0x2070 + n)).unwrap_or(c),
    }
}

/// The digit or sign that a raised one shows.
pub(crate) fn lowered_digit(c: char) -> Option<char> {
    match c {
        '⁻' => Some('-'),
        _ => "⁰¹²³⁴⁵⁶⁷⁸⁹".chars().position(|r| r == c).and_then(|n| char::from_digit(n as u32, 10)),
    }
}

fn gcd(mut a: u64, mut b: u64) -> u64 {
    while b != 0 {
        (a, b) = (b, a % b);
    }
    a
}

impl Ord for Exponent {
    fn cmp(&self, other: &Exponent) -> Ordering {
        (self.num as i64 * other.den as i64).cmp(&(other.num as i64 * self.den as i64))
    }
}

impl PartialOrd for Exponent {
    fn partial_cmp(&self, other: &Exponent) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl fmt::Display for Exponent {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if self.den == 1 { write!(f, "{}", self.num) } else { write!(f, "{}/{}", self.num, self.den) }
    }
}

impl fmt::Debug for Exponent {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{self}")
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn e(num: i64, den: i64) -> Exponent {
        Exponent::new(num, den).expect("small")
    }

    #[test]
    fn lowest_terms_and_spelling() {
        let check = |num, den, shown: &str, raised: &str, plain: &str| {
            let x = e(num, den);
            assert_eq!((x.to_string().as_str(), x.raised().as_str(), x.plain().as_str()), (shown, raised, plain));
        };
        check(6, -4, "-3/2", "^(-3/2)", "^(-3/2)");
        check(2, 2, "1", "", "");
        check(-12, 1, "-12", "⁻¹²", "^-12");
        check(34567890, 1, "34567890", "³⁴⁵⁶⁷⁸⁹⁰", "^34567890");
    }

    #[test]
    fn what_does_not_fit_is_none() {
        let most = e(i32::MAX as i64, 1);
        assert_eq!(Exponent::new(1, 0), None);
        assert_eq!(Exponent::new(i64::MIN, -1), None);
        assert_eq!(Exponent::new(i32::MIN as i64, 1), None);
        assert_eq!(most.plus(Exponent::ONE), None);
        assert_eq!(most.negative().minus(Exponent::ONE), None);
        assert_eq!(e(1, i32::MAX as i64).plus(Exponent::HALF), None);
        assert_eq!(Exponent::ONE.over(Exponent::ZERO), None);
        assert_eq!(most.plus(most.negative()), Some(Exponent::ZERO));
    }

    proptest! {
        /// The same field as the algebra's numbers.
        #[test]
        fn agrees_with_the_algebra(a in -99i64..99, b in 1i64..40, c in -99i64..99, d in 1i64..40) {
            let (x, y) = (e(a, b), e(c, d));
            let (p, q) = (x.to_rational(), y.to_rational());
            prop_assert_eq!(x.plus(y).map(Exponent::to_rational), Some(p.add(&q)));
            prop_assert_eq!(x.minus(y).map(Exponent::to_rational), Some(p.sub(&q)));
            prop_assert_eq!(x.times(y).map(Exponent::to_rational), Some(p.mul(&q)));
            prop_assert_eq!(x.over(y).map(Exponent::to_rational), p.div(&q));
            prop_assert_eq!(x.cmp(&y), p.cmp(&q));
            prop_assert_eq!(Exponent::from_rational(&p), Some(x));
        }
    }
}
