//! A basis of arguments over the rationals, so that sin(2θ), sin θ and cos(θ − φ) share their generators.

use crate::arena::{Arena, Expr};
use crate::budget::{Budget, Stopped};
use crate::rational::Rational;
use hashbrown::HashMap;

/// Multiples above this are not written out.
const MAX_MULTIPLE: i64 = 24;

/// The basis, and each argument in it with integer coefficients.
#[derive(Default, Debug)]
pub(super) struct Span {
    pub basis: Vec<Expr>,
    coordinates: HashMap<Expr, Vec<i64>>,
}

impl Span {
    /// The span of some arguments; `None` where multiples are too large.
    pub fn of(arena: &mut Arena, arguments: &[Expr], budget: &mut Budget) -> Result<Option<Span>, Stopped> {
        let mut terms: Vec<Expr> = Vec::new();
        let mut vectors: Vec<(Expr, Vec<(usize, Rational)>)> = Vec::new();
        let mut list = arguments.to_vec();
        list.sort_by(|a, b| arena.summands(*a).len().cmp(&arena.summands(*b).len()).then_with(|| arena.order(*a, *b)));
        list.dedup();
        for a in list {
            let wide = arena.expand(a, budget)?;
            let mut v = Vec::new();
            for (t, c) in arena.summands(wide) {
                let k = terms.iter().position(|x| *x == t).unwrap_or_else(|| {
                    terms.push(t);
                    terms.len() - 1
                });
                v.push((k, c));
            }
            vectors.push((a, v));
        }
        // Rows in echelon form: pivot, vector, and the same in the basis.
        let n = terms.len();
        let mut rows: Vec<(usize, Vec<Rational>, Vec<Rational>)> = Vec::new();
        let mut basis: Vec<Expr> = Vec::new();
        let mut found: Vec<(Expr, Vec<Rational>)> = Vec::new();
        for (a, sparse) in &vectors {
            let mut v = vec![Rational::ZERO; n];
            for (k, c) in sparse {
                v[*k] = c.clone();
            }
            let mut combination = vec![Rational::ZERO; vectors.len()];
            for (pivot, row, own) in &rows {
                let c = v[*pivot].clone();
                if !c.is_zero() {
                    v.iter_mut().zip(row).for_each(|(x, y)| *x = x.sub(&c.mul(y)));
                    combination.iter_mut().zip(own).for_each(|(x, y)| *x = x.add(&c.mul(y)));
                }
            }
            match v.iter().position(|c| !c.is_zero()) {
                None => found.push((*a, combination)),
                Some(pivot) => {
                    let scale = v[pivot].recip().unwrap_or(Rational::ONE);
                    let i = basis.len();
                    basis.push(*a);
                    let mut unit = vec![Rational::ZERO; vectors.len()];
                    unit[i] = Rational::ONE;
                    let own = unit.iter().zip(&combination).map(|(u, c)| u.sub(c).mul(&scale)).collect();
                    rows.push((pivot, v.iter().map(|x| x.mul(&scale)).collect(), own));
                    found.push((*a, unit));
                }
            }
        }
        // The basis is divided by what makes all coefficients whole.
        let mut out = Span::default();
        let mut scales = Vec::new();
        for (i, b) in basis.iter().enumerate() {
            let mut unit = Rational::ONE;
            found.iter().filter(|f| !f.1[i].is_zero()).for_each(|f| unit = unit.content(&f.1[i]));
            out.basis.push(arena.scale(*b, &unit));
            scales.push(unit.recip().unwrap_or(Rational::ONE));
        }
        for (a, c) in found {
            let mut whole = Vec::new();
            for (x, s) in c.iter().zip(&scales) {
                match x.mul(s).to_i64() {
                    Some(k) if k.abs() <= MAX_MULTIPLE => whole.push(k),
                    _ => return Ok(None),
                }
            }
            out.coordinates.insert(a, whole);
        }
        Ok(Some(out))
    }

    /// An argument's multiples of the basis.
    pub fn multiples(&self, argument: Expr) -> Option<&[i64]> {
        self.coordinates.get(&argument).map(Vec::as_slice)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::arena::Role;

    #[test]
    fn halves_and_sums_share_a_basis() {
        let mut a = Arena::new();
        let (x, y) = (a.symbol("x", None, Role::Coordinate), a.symbol("y", None, Role::Coordinate));
        let (x, y) = (a.sym(x), a.sym(y));
        let half = a.scale(x, &Rational::HALF);
        let gap = a.sub(x, y);
        let span = Span::of(&mut a, &[gap, x, y, half], &mut Budget::new(1000)).unwrap().unwrap();
        assert_eq!(span.basis.len(), 2);
        // Whatever the basis is: the multiples give the argument back.
        for e in [gap, x, y, half] {
            let m = span.multiples(e).unwrap().to_vec();
            let parts: Vec<_> = span.basis.iter().zip(m).map(|(b, k)| (*b, Rational::integer(k))).collect();
            assert_eq!(a.linear(&parts), e);
        }
    }
}
