//! Signs, and what follows for an expression from those of its children.

use super::assumptions::Assumptions;
use super::ranges::{Range, range};
use crate::arena::{Arena, Expr, Node};
use crate::function::Function;
use crate::rational::Rational;

/// What is known of the sign of a real number.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Sign {
    /// > 0
    Positive,
    /// = 0
    Zero,
    /// ≥ 0
    NonNegative,
    /// < 0
    Negative,
    /// ≠ 0
    NonZero,
    /// ≤ 0
    NonPositive,
    /// Nothing is known.
    Unknown,
}

impl Sign {
    // The set of possible signs: bit 0 positive, bit 1 zero, bit 2 negative.
    const fn bits(self) -> u8 {
        match self {
            Sign::Positive => 1,
            Sign::Zero => 2,
            Sign::NonNegative => 3,
            Sign::Negative => 4,
            Sign::NonZero => 5,
            Sign::NonPositive => 6,
            Sign::Unknown => 7,
        }
    }

    const fn from_bits(b: u8) -> Sign {
        match b {
            1 => Sign::Positive,
            2 => Sign::Zero,
            3 => Sign::NonNegative,
            4 => Sign::Negative,
            5 => Sign::NonZero,
            6 => Sign::NonPositive,
            _ => Sign::Unknown,
        }
    }

    /// The sign of a number.
    pub fn of_number(r: &Rational) -> Sign {
        match r.signum() {
            1 => Sign::Positive,
            0 => Sign::Zero,
            _ => Sign::Negative,
        }
    }

    /// Whether it is > 0 for certain.
    pub fn is_positive(self) -> bool {
        self == Sign::Positive
    }

    /// Whether it is ≥ 0 for certain.
    pub fn is_nonnegative(self) -> bool {
        self.bits() & 4 == 0
    }

    /// Whether it is < 0 for certain.
    pub fn is_negative(self) -> bool {
        self == Sign::Negative
    }

    /// Whether it is ≤ 0 for certain.
    pub fn is_nonpositive(self) -> bool {
        self.bits() & 1 == 0
    }

    /// Whether it is ≠ 0 for certain.
    pub fn is_nonzero(self) -> bool {
        self.bits() & 2 == 0
    }

    /// The sign of the negative.
    pub fn negate(self) -> Sign {
        let b = self.bits();
        Sign::from_bits(b & 2 | (b & 1) << 2 | b >> 2)
    }

    /// The sign, when the value is known to be not zero.
    pub fn without_zero(self) -> Sign {
        if self == Sign::Zero { Sign::Unknown } else { Sign::from_bits(self.bits() & 5) }
    }

    /// What both facts together say.
    pub fn and(self, other: Sign) -> Sign {
        match self.bits() & other.bits() {
            0 => self,
            b => Sign::from_bits(b),
        }
    }

    /// The sign of a sum.
    pub fn plus(self, other: Sign) -> Sign {
        let (a, b) = (self.bits(), other.bits());
        if a == 2 {
            return other;
        }
        if b == 2 {
            return self;
        }
        let both = a | b;
        if both & 4 == 0 {
            // One that is surely positive makes the sum positive.
            return if a & 2 == 0 || b & 2 == 0 { Sign::Positive } else { Sign::NonNegative };
        }
        if both & 1 == 0 {
            return if a & 2 == 0 || b & 2 == 0 { Sign::Negative } else { Sign::NonPositive };
        }
        Sign::Unknown
    }

    /// The sign of a product.
    pub fn times(self, other: Sign) -> Sign {
        let (a, b) = (self.bits(), other.bits());
        let mut r = (a | b) & 2;
        if a & 1 != 0 && b & 1 != 0 || a & 4 != 0 && b & 4 != 0 {
            r |= 1;
        }
        if a & 1 != 0 && b & 4 != 0 || a & 4 != 0 && b & 1 != 0 {
            r |= 4;
        }
        Sign::from_bits(r)
    }

    /// The sign of a rational power, which is assumed to exist.
    pub fn power(self, exponent: &Rational) -> Sign {
        let base = if exponent.is_negative() { self.without_zero() } else { self };
        if !exponent.is_integer() {
            // The base of a root is not negative, or the value would not exist.
            return if base.is_nonzero() { Sign::Positive } else { base.and(Sign::NonNegative) };
        }
        if exponent.is_even_integer() {
            return if base.is_nonzero() {
                Sign::Positive
            } else if base == Sign::Zero {
                Sign::Zero
            } else {
                Sign::NonNegative
            };
        }
        base
    }
}

/// The sign of a node whose children's signs are known.
pub(crate) fn infer(arena: &mut Arena, facts: &Assumptions, e: Expr, of: &dyn Fn(Expr) -> Sign) -> Sign {
    let known = facts.known(arena, e);
    let own = match arena.node(e) {
        Node::Number(r) => Sign::of_number(r),
        Node::Pi => Sign::Positive,
        Node::Undefined => Sign::Unknown,
        Node::Symbol(s) => facts.range(arena, *s, None, 0).sign(),
        Node::Jet(s, n) => facts.range(arena, *s, None, *n).sign(),
        Node::Member { family, order, .. } => facts.family(arena, *family, *order).map_or(Sign::Unknown, Range::sign),
        Node::Sum(k, terms) => {
            let mut s = Sign::of_number(k);
            for (x, c) in terms.iter() {
                s = s.plus(of(*x).times(Sign::of_number(c)));
            }
            if matches!(s, Sign::Unknown | Sign::NonNegative | Sign::NonPositive) {
                s = s.and(range(arena, facts, e, of, 0).sign());
            }
            s
        }
        Node::Product(factors) => factors.iter().fold(Sign::Positive, |s, (b, r)| s.times(of(*b).power(r))),
        Node::Power(b, _) => {
            if of(*b).is_positive() {
                Sign::Positive
            } else {
                Sign::Unknown
            }
        }
        Node::Call(f, args) => {
            let s = of(args[0]);
            match f {
                Function::Exp | Function::Cosh => Sign::Positive,
                Function::Abs => {
                    if s.is_nonzero() {
                        Sign::Positive
                    } else {
                        Sign::NonNegative
                    }
                }
                Function::Acos => Sign::NonNegative,
                Function::Sinh | Function::Tanh | Function::Atan | Function::Asin | Function::Sign => s,
                Function::Min | Function::Max => {
                    let all = |t: fn(Sign) -> bool| args.iter().all(|x| t(of(*x)));
                    if all(Sign::is_positive) {
                        Sign::Positive
                    } else if all(Sign::is_nonnegative) {
                        Sign::NonNegative
                    } else if all(Sign::is_negative) {
                        Sign::Negative
                    } else if all(Sign::is_nonpositive) {
                        Sign::NonPositive
                    } else {
                        Sign::Unknown
                    }
                }
                _ => Sign::Unknown,
            }
        }
        Node::Unspecified { .. } => Sign::Unknown,
        Node::Bound { lower, upper, body, .. } => {
            let s = of(*body);
            match (arena.as_i64(*lower), arena.as_i64(*upper)) {
                (Some(a), Some(b)) if a <= b && (s.is_nonnegative() || s.is_nonpositive()) => s,
                _ if s.is_nonnegative() => Sign::NonNegative,
                _ if s.is_nonpositive() => Sign::NonPositive,
                _ => Sign::Unknown,
            }
        }
    };
    own.and(known)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn arithmetic_of_signs() {
        use Sign::*;
        assert_eq!(Positive.plus(NonNegative), Positive);
        assert_eq!(NonNegative.plus(NonNegative), NonNegative);
        assert_eq!(Positive.plus(Negative), Unknown);
        assert_eq!(Negative.times(Negative), Positive);
        assert_eq!(NonZero.power(&Rational::integer(2)), Positive);
        assert_eq!(Unknown.power(&Rational::HALF), NonNegative);
        assert_eq!(Unknown.power(&Rational::HALF.neg()), Positive);
        assert_eq!(NonPositive.negate(), NonNegative);
    }
}
