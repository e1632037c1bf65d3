//! Exact rational numbers: two machine words while they fit, a big rational behind them.

use dashu_int::{IBig, UBig};
use dashu_ratio::RBig;
use std::cmp::Ordering;
use std::fmt;

/// An exact rational number in lowest terms with a positive denominator.
///
/// Numbers whose numerator and denominator fit into `i64` are always stored small, so that equal numbers are equal
/// structures. Every small operation is checked for overflow.
#[derive(Clone, PartialEq, Eq, Hash)]
pub struct Rational(Repr);

#[derive(Clone, PartialEq, Eq, Hash)]
enum Repr {
    Small(i64, i64),
    Big(Box<RBig>),
}

impl Rational {
    /// Zero.
    pub const ZERO: Rational = Rational(Repr::Small(0, 1));
    /// One.
    pub const ONE: Rational = Rational(Repr::Small(1, 1));
    /// Minus one.
    pub const MINUS_ONE: Rational = Rational(Repr::Small(-1, 1));
    /// One half.
    pub const HALF: Rational = Rational(Repr::Small(1, 2));

    /// The integer `n`.
    pub const fn integer(n: i64) -> Rational {
        if n == i64::MIN { Rational(Repr::Small(i64::MIN + 1, 1)) } else { Rational(Repr::Small(n, 1)) }
    }

    /// `num / den`, or `None` for a zero denominator.
    pub fn new(num: i64, den: i64) -> Option<Rational> {
        if den == 0 { None } else { Some(Self::from_wide(num as i128, den as i128)) }
    }

    /// `digits · 10^exponent`, or `None` when it is no number or has more than `max_digits` digits.
    pub fn from_decimal(digits: &str, exponent: i32, max_digits: usize) -> Option<Rational> {
        let zeros = exponent.unsigned_abs() as usize;
        if digits.is_empty() || digits.len() + zeros > max_digits || !digits.bytes().all(|b| b.is_ascii_digit()) {
            return None;
        }
        let n: IBig = digits.parse().ok()?;
        let ten = UBig::from(10u8).pow(zeros);
        Some(Self::from_big(if exponent < 0 { RBig::from_parts(n, ten) } else { RBig::from(n * IBig::from(ten)) }))
    }

    fn from_wide(mut num: i128, mut den: i128) -> Rational {
        debug_assert!(den != 0);
        if den < 0 {
            num = -num;
            den = -den;
        }
        let g = gcd(num.unsigned_abs(), den.unsigned_abs()) as i128;
        if g > 1 {
            num /= g;
            den /= g;
        }
        match (i64::try_from(num), i64::try_from(den)) {
            // The most negative word is left to the big numbers, so that negation never overflows.
            (Ok(n), Ok(d)) if n != i64::MIN => Rational(Repr::Small(n, d)),
            _ => Rational(Repr::Big(Box::new(RBig::from_parts(IBig::from(num), UBig::from(den as u128))))),
        }
    }

    fn from_big(r: RBig) -> Rational {
        if let (Ok(n), Ok(d)) = (i64::try_from(r.numerator()), i64::try_from(r.denominator()))
            && n != i64::MIN
        {
            return Rational(Repr::Small(n, d));
        }
        Rational(Repr::Big(Box::new(r)))
    }

    fn to_big(&self) -> RBig {
        match &self.0 {
            Repr::Small(n, d) => RBig::from_parts(IBig::from(*n), UBig::from(*d as u64)),
            Repr::Big(r) => (**r).clone(),
        }
    }

    /// Numerator and denominator where both fit into a word.
    pub fn small(&self) -> Option<(i64, i64)> {
        match self.0 {
            Repr::Small(n, d) => Some((n, d)),
            Repr::Big(_) => None,
        }
    }

    /// The value as a word, where it is an integer that fits.
    pub fn to_i64(&self) -> Option<i64> {
        match self.0 {
            Repr::Small(n, 1) => Some(n),
            _ => None,
        }
    }

    /// Numerator and denominator as decimal digits (the numerator with its sign).
    pub fn digits(&self) -> (String, String) {
        match &self.0 {
            Repr::Small(n, d) => (n.to_string(), d.to_string()),
            Repr::Big(r) => (r.numerator().to_string(), r.denominator().to_string()),
        }
    }

    /// The residue modulo an odd prime below 2⁶³, or `None` where the prime divides the denominator.
    pub fn modulo(&self, p: u64) -> Option<(u64, u64)> {
        let (n, d) = match &self.0 {
            Repr::Small(n, d) => ((*n as i128).rem_euclid(p as i128) as u64, (*d as i128).rem_euclid(p as i128) as u64),
            Repr::Big(r) => {
                let m = IBig::from(p);
                let n = ((r.numerator() % &m) + &m) % &m;
                let d = IBig::from(r.denominator().clone()) % &m;
                (u64::try_from(n).ok()?, u64::try_from(d).ok()?)
            }
        };
        if d == 0 { None } else { Some((n, d)) }
    }

    /// The nearest double, not rounded correctly in the last place for big numbers.
    pub fn to_f64(&self) -> f64 {
        match &self.0 {
            Repr::Small(n, d) => *n as f64 / *d as f64,
            Repr::Big(r) => r.to_f64().value(),
        }
    }

    /// Bits of numerator and denominator together.
    pub fn bits(&self) -> usize {
        use dashu_int::ops::BitTest;
        match &self.0 {
            Repr::Small(n, d) => (128 - n.unsigned_abs().leading_zeros() - d.leading_zeros()) as usize,
            Repr::Big(r) => r.numerator().bit_len() + r.denominator().bit_len(),
        }
    }

    /// Whether it is zero.
    pub fn is_zero(&self) -> bool {
        matches!(self.0, Repr::Small(0, _))
    }

    /// Whether it is one.
    pub fn is_one(&self) -> bool {
        matches!(self.0, Repr::Small(1, 1))
    }

    /// Whether it is an integer.
    pub fn is_integer(&self) -> bool {
        match &self.0 {
            Repr::Small(_, d) => *d == 1,
            Repr::Big(r) => r.denominator().is_one(),
        }
    }

    /// Whether it is an even integer.
    pub fn is_even_integer(&self) -> bool {
        match &self.0 {
            Repr::Small(n, d) => *d == 1 && n % 2 == 0,
            Repr::Big(r) => r.denominator().is_one() && (r.numerator() % IBig::from(2)) == IBig::ZERO,
        }
    }

    /// −1, 0 or 1.
    pub fn signum(&self) -> i32 {
        match &self.0 {
            Repr::Small(n, _) => n.signum() as i32,
            Repr::Big(r) => {
                if *r.numerator() < IBig::ZERO {
                    -1
                } else {
                    1
                }
            }
        }
    }

    /// Whether it is below zero.
    pub fn is_negative(&self) -> bool {
        self.signum() < 0
    }

    /// The sum.
    pub fn add(&self, other: &Rational) -> Rational {
        if let (Repr::Small(a, b), Repr::Small(c, d)) = (&self.0, &other.0) {
            if *b == 1
                && *d == 1
                && let Some(n) = a.checked_add(*c)
                && n != i64::MIN
            {
                return Rational(Repr::Small(n, 1));
            }
            // |a d + c b| < 2·2¹²⁶ fits into i128.
            return Self::from_wide(*a as i128 * *d as i128 + *c as i128 * *b as i128, *b as i128 * *d as i128);
        }
        Self::from_big(self.to_big() + other.to_big())
    }

    /// The difference.
    pub fn sub(&self, other: &Rational) -> Rational {
        self.add(&other.neg())
    }

    /// The product.
    pub fn mul(&self, other: &Rational) -> Rational {
        if let (Repr::Small(a, b), Repr::Small(c, d)) = (&self.0, &other.0) {
            if *b == 1
                && *d == 1
                && let Some(n) = a.checked_mul(*c)
                && n != i64::MIN
            {
                return Rational(Repr::Small(n, 1));
            }
            return Self::from_wide(*a as i128 * *c as i128, *b as i128 * *d as i128);
        }
        Self::from_big(self.to_big() * other.to_big())
    }

    /// The quotient, or `None` for a zero divisor.
    pub fn div(&self, other: &Rational) -> Option<Rational> {
        Some(self.mul(&other.recip()?))
    }

    /// The reciprocal, or `None` of zero.
    pub fn recip(&self) -> Option<Rational> {
        match &self.0 {
            Repr::Small(0, _) => None,
            Repr::Small(n, d) => Some(Self::from_wide(*d as i128, *n as i128)),
            Repr::Big(r) => Some(Self::from_big(RBig::ONE / &**r)),
        }
    }

    /// The negative.
    pub fn neg(&self) -> Rational {
        match &self.0 {
            Repr::Small(n, d) => Rational(Repr::Small(-n, *d)),
            Repr::Big(r) => Self::from_big(-(**r).clone()),
        }
    }

    /// The absolute value.
    pub fn abs(&self) -> Rational {
        if self.is_negative() { self.neg() } else { self.clone() }
    }

    /// The power with an integer exponent, or `None` for 0 to a negative one or a result of more than `max_bits` bits.
    pub fn pow(&self, exponent: i64, max_bits: usize) -> Option<Rational> {
        if exponent == 0 || self.is_one() {
            return Some(Rational::ONE);
        }
        if self.is_zero() {
            return if exponent > 0 { Some(Rational::ZERO) } else { None };
        }
        let n = usize::try_from(exponent.unsigned_abs()).ok()?;
        if *self == Rational::MINUS_ONE {
            return Some(if n % 2 == 0 { Rational::ONE } else { Rational::MINUS_ONE });
        }
        if self.bits().checked_mul(n)? > max_bits {
            return None;
        }
        let base = self.to_big();
        let (num, den) = (base.numerator().pow(n), base.denominator().pow(n));
        let power = Self::from_big(RBig::from_parts(num, den));
        if exponent < 0 { power.recip() } else { Some(power) }
    }

    /// The largest integer not above it, as a word.
    pub fn floor(&self) -> Option<i64> {
        match &self.0 {
            Repr::Small(n, d) => Some(n.div_euclid(*d)),
            Repr::Big(_) => None,
        }
    }

    /// The greatest rational that divides both to integers: gcd of the numerators over lcm of the denominators.
    pub fn content(&self, other: &Rational) -> Rational {
        if let (Repr::Small(a, b), Repr::Small(c, d)) = (&self.0, &other.0) {
            let num = gcd(a.unsigned_abs() as u128, c.unsigned_abs() as u128);
            let lcm = *b as u128 / gcd(*b as u128, *d as u128) * *d as u128;
            if lcm < i128::MAX as u128 {
                return Self::from_wide(num as i128, lcm as i128);
            }
        }
        Rational::ONE
    }
}

fn gcd(mut a: u128, mut b: u128) -> u128 {
    // The machine word suffices nearly always and is several times faster.
    while b != 0 {
        if let (Ok(x), Ok(y)) = (u64::try_from(a), u64::try_from(b)) {
            return gcd64(x, y) as u128;
        }
        (a, b) = (b, a % b);
    }
    a
}

fn gcd64(mut a: u64, mut b: u64) -> u64 {
    if a == 0 {
        return b;
    }
    if b == 0 {
        return a;
    }
    let shift = (a | b).trailing_zeros();
    a >>= a.trailing_zeros();
    while b != 0 {
        b >>= b.trailing_zeros();
        if a > b {
            std::mem::swap(&mut a, &mut b);
        }
        b -= a;
    }
    a << shift
}

impl Ord for Rational {
    fn cmp(&self, other: &Rational) -> Ordering {
        match (&self.0, &other.0) {
            (Repr::Small(a, b), Repr::Small(c, d)) => (*a as i128 * *d as i128).cmp(&(*c as i128 * *b as i128)),
            _ => self.to_big().cmp(&other.to_big()),
        }
    }
}

impl PartialOrd for Rational {
    fn partial_cmp(&self, other: &Rational) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl fmt::Display for Rational {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let (n, d) = self.digits();
        if d == "1" { write!(f, "{n}") } else { write!(f, "{n}/{d}") }
    }
}

impl fmt::Debug for Rational {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{self}")
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn r(n: i64, d: i64) -> Rational {
        Rational::new(n, d).expect("a denominator")
    }

    #[test]
    fn lowest_terms_and_sign() {
        assert_eq!(r(6, -4), r(-3, 2));
        assert_eq!(r(0, -7), Rational::ZERO);
        assert_eq!(r(6, -4).to_string(), "-3/2");
        assert_eq!(Rational::from_decimal("15", -2, 50), Some(r(3, 20)));
        assert_eq!(Rational::from_decimal("1", 99_999_999, 5000), None);
        assert_eq!(r(6, 4).content(&r(9, 8)), r(3, 8));
    }

    #[test]
    fn powers_are_bounded() {
        assert_eq!(r(2, 3).pow(-3, 1000), Some(r(27, 8)));
        assert_eq!(r(2, 1).pow(1_000_000_000, 4096), None);
        assert_eq!(r(-1, 1).pow(1_000_000_001, 4096), Some(Rational::MINUS_ONE));
        assert_eq!(Rational::ZERO.pow(-1, 4096), None);
    }

    proptest! {
        /// The fast path and the big numbers give the same field.
        #[test]
        fn field_axioms(a in any::<(i64, i64)>(), b in any::<(i64, i64)>(), c in -9i64..9) {
            prop_assume!(a.1 != 0 && b.1 != 0);
            let (a, b, c) = (r(a.0, a.1), r(b.0, b.1), Rational::integer(c));
            prop_assert_eq!(a.add(&b), b.add(&a));
            prop_assert_eq!(a.mul(&b), b.mul(&a));
            prop_assert_eq!(a.add(&b).mul(&c), a.mul(&c).add(&b.mul(&c)));
            prop_assert_eq!(a.sub(&b).add(&b), a.clone());
            if !b.is_zero() {
                prop_assert_eq!(a.div(&b).unwrap().mul(&b), a.clone());
            }
            prop_assert_eq!(Rational::from_big(a.to_big() * b.to_big()), a.mul(&b));
            prop_assert_eq!(a.cmp(&b), a.sub(&b).signum().cmp(&0));
        }
    }
}
