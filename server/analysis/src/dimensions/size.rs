//! What is known of a formula's dimension: of a number, or of each component of a vector.

use leastwise_quantities::Exponent;
use leastwise_quantities::unify::Form;

/// The dimension of a formula's value.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) enum Size {
    /// A number of this dimension.
    Number(Form),
    /// Zero: of any dimension.
    Zero,
    /// A vector, or a matrix as a vector of rows.
    Vector(Vec<Size>),
    /// Nothing is known, and nothing is asked.
    Open,
}

impl Size {
    pub(super) fn one() -> Size {
        Size::Number(Form::one())
    }

    /// From an operation that may leave all measure.
    pub(super) fn of(form: Option<Form>) -> Size {
        form.map_or(Size::Open, Size::Number)
    }

    /// All numbers in it, row by row.
    pub(super) fn flat(&self) -> Vec<&Size> {
        match self {
            Size::Vector(list) => list.iter().flat_map(Size::flat).collect(),
            one => vec![one],
        }
    }

    /// The size of each component changed by a power of a number's.
    pub(super) fn times_power(&self, other: &Size, exponent: Exponent) -> Size {
        match (self, other) {
            (Size::Vector(list), _) => Size::Vector(list.iter().map(|s| s.times_power(other, exponent)).collect()),
            (_, Size::Vector(_)) => Size::Open,
            (Size::Zero, _) => Size::Zero,
            (_, Size::Zero) if !exponent.is_negative() => Size::Zero,
            (Size::Number(a), Size::Number(b)) => Size::of(a.times_power(b, exponent)),
            _ => Size::Open,
        }
    }

    pub(super) fn times(&self, other: &Size) -> Size {
        match (self, other) {
            (Size::Number(_) | Size::Zero, Size::Vector(_)) => other.times(self),
            _ => self.times_power(other, Exponent::ONE),
        }
    }

    pub(super) fn over(&self, other: &Size) -> Size {
        self.times_power(other, Exponent::ONE.negative())
    }

    pub(super) fn power(&self, exponent: Exponent) -> Size {
        match self {
            Size::Number(f) => Size::of(f.power(exponent)),
            Size::Zero => Size::Zero,
            _ => Size::Open,
        }
    }
}
