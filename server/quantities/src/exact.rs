//! Exact values: a rational number, or a root of one, times a power of π. Conversion factors and values are of this form.

use crate::Exponent;
use dashu_int::UBig;
use leastwise_algebra::{Arena, Expr, MAX_BITS, Rational};
use std::fmt;

/// ± p^(1/n) · π^k, with rational p and k. The form is unique: n is as small as it can be, and 1 for zero.
#[derive(Clone, PartialEq, Eq, Hash)]
pub struct Exact {
    /// p with the sign of the value.
    power: Rational,
    root: u32,
    pi: Exponent,
}

impl Exact {
    /// Zero.
    pub const ZERO: Exact = Exact { power: Rational::ZERO, root: 1, pi: Exponent::ZERO };
    /// One.
    pub const ONE: Exact = Exact { power: Rational::ONE, root: 1, pi: Exponent::ZERO };
    /// π.
    pub const PI: Exact = Exact { power: Rational::ONE, root: 1, pi: Exponent::ONE };

    /// A rational number.
    pub fn rational(r: Rational) -> Exact {
        Exact { power: r, root: 1, pi: Exponent::ZERO }
    }

    /// An integer.
    pub fn integer(n: i64) -> Exact {
        Exact::rational(Rational::integer(n))
    }

    /// r · π^k.
    pub fn with_pi(r: Rational, k: Exponent) -> Exact {
        let pi = if r.is_zero() { Exponent::ZERO } else { k };
        Exact { power: r, root: 1, pi }
    }

    /// ±p with the sign of the value, and n and k: the value is ± p^(1/n) · π^k.
    pub fn parts(&self) -> (&Rational, u32, Exponent) {
        (&self.power, self.root, self.pi)
    }

    /// The rational number that it is, if it is one.
    pub fn to_rational(&self) -> Option<&Rational> {
        (self.root == 1 && self.pi.is_zero()).then_some(&self.power)
    }

    /// Whether it is one.
    pub fn is_one(&self) -> bool {
        *self == Exact::ONE
    }

    /// Whether it is zero.
    pub fn is_zero(&self) -> bool {
        self.power.is_zero()
    }

    /// −1, 0 or 1.
    pub fn signum(&self) -> i32 {
        self.power.signum()
    }

    /// The product; `None` where its digits or exponents grow beyond bounds.
    pub fn times(&self, other: &Exact) -> Option<Exact> {
        if self.is_zero() || other.is_zero() {
            return Some(Exact::ZERO);
        }
        let pi = self.pi.plus(other.pi)?;
        if self.root == 1 && other.root == 1 {
            let power = self.power.mul(&other.power);
            return (power.bits() <= MAX_BITS).then_some(Exact { power, root: 1, pi });
        }
        let common = self.root / gcd(self.root, other.root);
        let root = common.checked_mul(other.root)?;
        let raise = |x: &Exact| x.power.abs().pow((root / x.root) as i64, MAX_BITS);
        let power = raise(self)?.mul(&raise(other)?);
        let negative = self.power.is_negative() != other.power.is_negative();
        (power.bits() <= MAX_BITS).then(|| Exact::lowest(power, root, negative, pi))
    }

    /// The quotient; `None` for a zero divisor or beyond bounds.
    pub fn over(&self, other: &Exact) -> Option<Exact> {
        self.times(&other.reciprocal()?)
    }

    /// The reciprocal, `None` of zero.
    pub fn reciprocal(&self) -> Option<Exact> {
        Some(Exact { power: self.power.recip()?, root: self.root, pi: self.pi.negative() })
    }

    /// The power; `None` of zero to a negative one, of a negative number to a broken one, or beyond bounds.
    pub fn pow(&self, exponent: Exponent) -> Option<Exact> {
        if self.is_zero() {
            return match exponent.num() {
                0 => Some(Exact::ONE),
                n if n > 0 => Some(Exact::ZERO),
                _ => None,
            };
        }
        let (num, den) = (exponent.num(), exponent.den() as u32);
        if self.power.is_negative() && den != 1 {
            return None;
        }
        let pi = self.pi.times(exponent)?;
        let power = self.power.abs().pow(num as i64, MAX_BITS)?;
        let negative = self.power.is_negative() && num % 2 != 0;
        Some(Exact::lowest(power, self.root.checked_mul(den)?, negative, pi))
    }

    /// The unique form: takes exact roots until none is left.
    fn lowest(mut power: Rational, mut root: u32, negative: bool, pi: Exponent) -> Exact {
        if power.is_one() {
            root = 1;
        }
        let mut prime = 2;
        // A number of b bits is no p-th power for p > b, unless it is one.
        while root > 1 && prime as usize <= power.bits() && prime <= root {
            if root.is_multiple_of(prime)
                && let Some(taken) = exact_root(&power, prime)
            {
                (power, root) = (taken, root / prime);
            } else {
                prime += 1;
            }
        }
        Exact { power: if negative { power.neg() } else { power }, root, pi }
    }

    /// The nearest double, up to a few units in the last place.
    pub fn to_f64(&self) -> f64 {
        let size = self.power.abs().to_f64();
        let size = if self.root == 1 { size } else { size.powf(1.0 / self.root as f64) };
        let pi = match self.pi.to_integer() {
            Some(n) => std::f64::consts::PI.powi(n),
            None => std::f64::consts::PI.powf(self.pi.num() as f64 / self.pi.den() as f64),
        };
        self.signum() as f64 * size * pi
    }

    /// Rounded to so many significant digits, at most 15: `0.0698132`, `1.05457182e-34`.
    pub fn rounded(&self, digits: usize) -> String {
        let text = format!("{:.*e}", digits.clamp(1, 15) - 1, self.to_f64());
        let Some((mantissa, exponent)) = text.split_once('e') else { return text };
        let (sign, mantissa) = mantissa.strip_prefix('-').map_or(("", mantissa), |m| ("-", m));
        let digits = mantissa.replacen('.', "", 1);
        let exponent: i64 = exponent.parse().unwrap_or(0);
        format!("{sign}{}", decimal_text(&digits, exponent))
    }

    /// The same as an expression, with π as itself.
    pub fn expr(&self, arena: &mut Arena) -> Expr {
        let mut out = arena.number(self.power.abs());
        if self.root != 1 {
            let exponent = Rational::new(1, self.root as i64).unwrap_or(Rational::ONE);
            out = arena.pow_rational(out, &exponent);
        }
        let pi = arena.pi();
        let pi = arena.pow_rational(pi, &self.pi.to_rational());
        out = arena.mul(out, pi);
        if self.power.is_negative() { arena.neg(out) } else { out }
    }

    /// The finite decimal number that it is, if it is one: `0.0001`, `1.602176634e-19`.
    pub fn decimal(&self) -> Option<String> {
        let (num, den) = self.to_rational()?.digits();
        let (mut rest, mut places) = (den.parse::<UBig>().ok()?, 0_usize);
        let mut numerator: UBig = num.trim_start_matches('-').parse().ok()?;
        // One decimal place for each pair of a two and a five, or for the one that has no partner.
        while rest > UBig::ONE {
            let (two, five) = ((&rest % 2_u8) == 0, (&rest % 5_u8) == 0);
            match (two, five) {
                (true, true) => rest /= UBig::from(10_u8),
                (true, false) => (rest, numerator) = (rest / UBig::from(2_u8), numerator * UBig::from(5_u8)),
                (false, true) => (rest, numerator) = (rest / UBig::from(5_u8), numerator * UBig::from(2_u8)),
                (false, false) => return None,
            }
            places += 1;
        }
        let sign = if num.starts_with('-') { "-" } else { "" };
        let digits = numerator.to_string();
        let first = digits.len() as i64 - 1 - places as i64;
        Some(format!("{sign}{}", decimal_text(&digits, first)))
    }
}

/// Digits as a person writes the number, `first` being the exponent of ten of the first digit.
fn decimal_text(digits: &str, first: i64) -> String {
    let kept = digits.trim_end_matches('0');
    if kept.is_empty() {
        return "0".to_owned();
    }
    match first {
        0..16 => {
            let whole = first as usize + 1;
            let zeros = "0".repeat(whole.saturating_sub(kept.len()));
            let (head, tail) = kept.split_at(whole.min(kept.len()));
            if tail.is_empty() { format!("{head}{zeros}") } else { format!("{head}.{tail}") }
        }
        -5..0 => format!("0.{}{kept}", "0".repeat((-first - 1) as usize)),
        _ => {
            let (head, tail) = kept.split_at(1);
            if tail.is_empty() { format!("{head}e{first}") } else { format!("{head}.{tail}e{first}") }
        }
    }
}

fn exact_root(r: &Rational, n: u32) -> Option<Rational> {
    let (num, den) = r.digits();
    let root = |digits: &str| {
        let whole: UBig = digits.parse().ok()?;
        let root = whole.nth_root(n as usize);
        (root.pow(n as usize) == whole).then(|| root.to_string())
    };
    let number = |digits: String| Rational::from_decimal(&digits, 0, MAX_BITS);
    number(root(&num)?)?.div(&number(root(&den)?)?)
}

fn gcd(mut a: u32, mut b: u32) -> u32 {
    while b != 0 {
        (a, b) = (b, a % b);
    }
    a
}

/// As the language reads it: `3/20`, `π/180`, `180/π`, `3/(2π)`, `√1000`, `-2π²`.
impl fmt::Display for Exact {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let sign = if self.power.is_negative() { "-" } else { "" };
        let size = self.power.abs();
        let (num, den) = size.digits();
        let pi = |k: Exponent| if k.is_zero() { String::new() } else { format!("π{}", k.raised()) };
        let (above, below) =
            if self.pi.is_negative() { (String::new(), pi(self.pi.negative())) } else { (pi(self.pi), String::new()) };
        if self.root != 1 {
            let radicand = if den == "1" { num } else { format!("({num}/{den})") };
            let root = match self.root {
                2 => format!("√{radicand}"),
                n => format!("{radicand}^(1/{n})"),
            };
            let times = if above.is_empty() { String::new() } else { format!("·{above}") };
            let over = if below.is_empty() { String::new() } else { format!("/{below}") };
            return write!(f, "{sign}{root}{times}{over}");
        }
        let num = if num == "1" && !above.is_empty() { String::new() } else { num };
        match (den.as_str(), below.as_str()) {
            ("1", "") => write!(f, "{sign}{num}{above}"),
            ("1", below) => write!(f, "{sign}{num}{above}/{below}"),
            (den, "") => write!(f, "{sign}{num}{above}/{den}"),
            (den, below) => write!(f, "{sign}{num}{above}/({den}{below})"),
        }
    }
}

impl fmt::Debug for Exact {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{self}")
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn r(n: i64, d: i64) -> Exact {
        Exact::rational(Rational::new(n, d).expect("a denominator"))
    }

    fn e(n: i64, d: i64) -> Exponent {
        Exponent::new(n, d).expect("small")
    }

    #[test]
    fn printed_as_the_language_reads_it() {
        let check = |x: Option<Exact>, shown: &str| assert_eq!(x.map(|x| x.to_string()).as_deref(), Some(shown));
        check(Some(r(3, 20)), "3/20");
        check(Exact::PI.over(&r(180, 1)), "π/180");
        check(r(180, 1).over(&Exact::PI), "180/π");
        check(r(-3, 2).over(&Exact::PI), "-3/(2π)");
        check(Exact::PI.pow(e(2, 1)).and_then(|x| x.times(&r(-2, 1))), "-2π²");
        check(r(1000, 1).pow(Exponent::HALF), "√1000");
        check(r(1, 1000).pow(e(1, 3)), "1/10");
        check(r(1, 100).pow(e(1, 3)), "(1/100)^(1/3)");
        check(r(2, 1).pow(e(-1, 2)), "√(1/2)");
        check(Exact::PI.times(&r(2, 1)).and_then(|x| x.pow(e(1, 2))), "√2·π^(1/2)");
        check(Some(Exact::ZERO), "0");
    }

    #[test]
    fn roots_are_taken_as_far_as_they_go() {
        assert_eq!(r(1_000_000, 1).pow(Exponent::HALF), Some(r(1000, 1)));
        assert_eq!(r(4, 9).pow(e(1, 4)), r(2, 3).pow(Exponent::HALF));
        let root = r(1000, 1).pow(Exponent::HALF).expect("small");
        assert_eq!(root.times(&root), Some(r(1000, 1)));
        assert_eq!(r(-8, 1).pow(e(1, 3)), None);
        assert_eq!(r(-2, 1).pow(e(3, 1)), Some(r(-8, 1)));
    }

    #[test]
    fn bounded() {
        assert_eq!(r(10, 1).pow(e(1_000_000, 1)), None);
        assert_eq!(Exact::ONE.pow(e(1_000_000, 1)), Some(Exact::ONE));
        assert_eq!(Exact::ZERO.pow(e(-1, 1)), None);
        assert_eq!(Exact::ONE.over(&Exact::ZERO), None);
        let deep = r(1000, 1).pow(e(1, 2_000_000_011)).expect("a root costs nothing");
        assert_eq!(deep.times(&r(10, 1)), None);
    }

    #[test]
    fn decimals() {
        let check = |n, d, shown: Option<&str>| assert_eq!(r(n, d).decimal().as_deref(), shown, "{n}/{d}");
        check(1, 10_000, Some("0.0001"));
        check(3, 20, Some("0.15"));
        check(-5, 4, Some("-1.25"));
        check(1200, 1, Some("1200"));
        check(2401, 2, Some("1200.5"));
        check(1, 3, None);
        check(0, 1, Some("0"));
        check(1, 640_000_000, Some("1.5625e-9"));
        check(10_000_000_000_000_000, 1, Some("1e16"));
        assert_eq!(Exact::PI.decimal(), None);
    }

    #[test]
    fn rounded_to_digits() {
        let check = |x: Exact, digits, shown: &str| assert_eq!(x.rounded(digits), shown);
        check(Exact::PI.over(&r(45, 1)).expect("not zero"), 6, "0.0698132");
        check(Exact::PI, 3, "3.14");
        check(r(-2, 3), 4, "-0.6667");
        check(r(1_999_999, 1), 3, "2000000");
        check(r(1, 3_000_000_000), 2, "3.3e-10");
        check(Exact::ZERO, 5, "0");
        check(Exact::PI, 99, "3.14159265358979");
    }

    #[test]
    fn as_an_expression() {
        let mut arena = Arena::new();
        let (pi, expected) = (arena.pi(), Rational::new(1, 180).expect("a denominator"));
        let expected = arena.scale(pi, &expected);
        let degree = Exact::PI.over(&r(180, 1)).expect("not zero");
        assert_eq!(degree.expr(&mut arena), expected);
    }

    fn any_exact() -> impl Strategy<Value = Exact> {
        (1i64..200, 1i64..200, 1i64..5, -3i64..4, 1i64..3).prop_filter_map("fits", |(n, d, root, k, l)| {
            r(n, d).pow(e(1, root))?.times(&Exact::with_pi(Rational::ONE, e(k, l)))
        })
    }

    proptest! {
        /// The form is unique, so that equal values are equal structures, and it is the field's.
        #[test]
        fn field(a in any_exact(), b in any_exact(), n in -4i64..5, d in 1i64..4) {
            let product = a.times(&b);
            prop_assert_eq!(&product, &b.times(&a));
            prop_assert_eq!(product.as_ref().and_then(|p| p.over(&b)), Some(a.clone()));
            let power = |x: &Exact| x.pow(e(n, d));
            prop_assert_eq!(product.as_ref().and_then(power), power(&a).and_then(|x| x.times(&power(&b)?)));
            let near = product.expect("fits").to_f64() / (a.to_f64() * b.to_f64());
            prop_assert!((near - 1.0).abs() < 1e-12);
        }

        /// A finite decimal reads back as the same number.
        #[test]
        fn decimal_round_trip(n in -1_000_000i64..1_000_000, places in 0i32..30) {
            let digits = n.unsigned_abs().to_string();
            let x = Rational::from_decimal(&digits, -places, 100).expect("short");
            let text = Exact::rational(x.clone()).decimal().expect("finite");
            prop_assert_eq!(crate::table::number(&text).map(|(v, _)| v), Some(x));
        }
    }
}
