//! Dimensions with unknowns in them: a known dimension times powers of unknown ones.

use crate::{Dimension, Exponent};

/// The number of an unknown dimension.
pub type Unknown = usize;

/// A dimension that may depend on unknown ones: known · Π uᵢ^aᵢ.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Form {
    known: Dimension,
    /// Ascending, without zeros.
    unknowns: Vec<(Unknown, Exponent)>,
}

impl From<Dimension> for Form {
    fn from(known: Dimension) -> Form {
        Form { known, unknowns: Vec::new() }
    }
}

impl Form {
    /// The dimension of a number.
    pub fn one() -> Form {
        Dimension::ONE.into()
    }

    /// An unknown dimension.
    pub fn unknown(u: Unknown) -> Form {
        Form { known: Dimension::ONE, unknowns: vec![(u, Exponent::ONE)] }
    }

    /// The dimension, where nothing in it is unknown.
    pub fn known(&self) -> Option<Dimension> {
        self.unknowns.is_empty().then_some(self.known)
    }

    /// What stands beside the unknowns.
    pub fn factor(&self) -> Dimension {
        self.known
    }

    /// The unknowns with their exponents, ascending.
    pub fn unknowns(&self) -> &[(Unknown, Exponent)] {
        &self.unknowns
    }

    /// The exponent of an unknown.
    pub fn exponent(&self, u: Unknown) -> Exponent {
        self.unknowns.binary_search_by_key(&u, |p| p.0).map_or(Exponent::ZERO, |k| self.unknowns[k].1)
    }

    /// The product with the power of another. This and the others: `None` where an exponent leaves two machine words.
    pub fn times_power(&self, other: &Form, exponent: Exponent) -> Option<Form> {
        if exponent.is_zero() {
            return Some(self.clone());
        }
        let unknowns = combine(&self.unknowns, &other.unknowns, exponent)?;
        let known = match other.known.is_one() {
            true => self.known,
            false if exponent == Exponent::ONE => self.known.times(other.known)?,
            false if exponent == Exponent::whole(-1) => self.known.over(other.known)?,
            false => self.known.times(other.known.pow(exponent)?)?,
        };
        Some(Form { known, unknowns })
    }

    /// The product.
    pub fn times(&self, other: &Form) -> Option<Form> {
        self.times_power(other, Exponent::ONE)
    }

    /// The quotient.
    pub fn over(&self, other: &Form) -> Option<Form> {
        self.times_power(other, Exponent::ONE.negative())
    }

    /// A power.
    pub fn power(&self, exponent: Exponent) -> Option<Form> {
        Form::one().times_power(self, exponent)
    }
}

impl Form {
    /// The same with other numbers for the unknowns, all different.
    pub fn renumbered(&self, numbers: &[Unknown]) -> Form {
        let mut unknowns: Vec<(Unknown, Exponent)> = self.unknowns.iter().map(|(u, a)| (numbers[*u], *a)).collect();
        unknowns.sort_unstable_by_key(|p| p.0);
        debug_assert!(unknowns.windows(2).all(|w| w[0].0 < w[1].0));
        Form { known: self.known, unknowns }
    }

    /// The same with forms for the unknowns.
    pub fn substituted(&self, values: &[Form]) -> Option<Form> {
        let known = Form { known: self.known, unknowns: Vec::new() };
        self.unknowns.iter().try_fold(known, |f, (u, a)| f.times_power(values.get(*u)?, *a))
    }
}

/// a + c b for sparse vectors, ascending and without zeros.
pub(super) fn combine(a: &[(usize, Exponent)], b: &[(usize, Exponent)], c: Exponent) -> Option<Vec<(usize, Exponent)>> {
    let mut out = Vec::with_capacity(a.len() + b.len());
    let (mut i, mut j) = (0, 0);
    loop {
        let (left, right) = (a.get(i).map(|p| p.0), b.get(j).map(|p| p.0));
        let at = match (left, right) {
            (Some(l), Some(r)) => l.min(r),
            (Some(l), None) => l,
            (None, Some(r)) => r,
            (None, None) => return Some(out),
        };
        let mut value = Exponent::ZERO;
        if left == Some(at) {
            value = a[i].1;
            i += 1;
        }
        if right == Some(at) {
            value = value.plus(b[j].1.times(c)?)?;
            j += 1;
        }
        if !value.is_zero() {
            out.push((at, value));
        }
    }
}
