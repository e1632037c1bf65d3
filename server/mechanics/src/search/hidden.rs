//! Names of hidden symmetries, given only where the shape is proved.

use crate::context::Context;
use crate::lagrange::lagrangian;
use crate::mass::{dense, mass_rows};
use crate::model::Model;
use leastwise_algebra::{Arena, Expr, Rational, Stopped};

/// A known integral quadratic in the velocities, of a body in Cartesian coordinates.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Hidden {
    /// A component, along this coordinate, of the Laplace–Runge–Lenz vector m v × (r × v) + U r, U ∝ 1/r [GPS §3.9].
    LaplaceVector(usize),
    /// An element of the Fradkin tensor m vᵢ vⱼ + k xᵢ xⱼ, or half of it [Fradkin, Am. J. Phys. 33 (1965) 207].
    FradkinTensor(usize, usize),
}

impl Hidden {
    /// What it is called.
    pub fn name(self) -> &'static str {
        match self {
            Hidden::LaplaceVector(_) => "Laplace–Runge–Lenz vector",
            Hidden::FradkinTensor(..) => "Fradkin tensor",
        }
    }
}

/// Which known integral a charge is, up to a factor ±1, ±½, ±2; `None` where it is none or the shape is not proved. Costs
/// a few zero tests for each pair of coordinates.
pub fn hidden(cx: &mut Context<'_>, model: &Model, charge: Expr) -> Result<Option<Hidden>, Stopped> {
    let n = model.coordinates.len();
    if !(2..=6).contains(&n) || !model.constraints.is_empty() || model.coordinates.iter().any(|q| q.members.is_some()) {
        return Ok(None);
    }
    let rows = mass_rows(cx, model)?;
    let all: Vec<usize> = (0..n).collect();
    let mass = dense(cx, &rows, &all)?;
    let m = mass[0][0];
    for (i, row) in mass.iter().enumerate() {
        if row.iter().enumerate().any(|(j, &e)| e != if i == j { m } else { Arena::ZERO }) {
            return Ok(None);
        }
    }
    let q: Vec<Expr> = model.coordinates.iter().map(|q| q.jet(cx.arena, 0)).collect();
    let v: Vec<Expr> = model.coordinates.iter().map(|q| q.jet(cx.arena, 1)).collect();
    let l = lagrangian(cx, model)?;
    let mut parts = vec![(l, Rational::MINUS_ONE)];
    for &v in &v {
        let v2 = cx.arena.pow(v, 2);
        parts.push((cx.arena.mul(m, v2), Rational::HALF));
    }
    // L = ½ m v² − U with U free of velocities.
    let u = cx.build(&parts)?;
    let u = cx.arena.expand(u, cx.budget)?;
    if crate::lagrange::jet_order(cx.arena, u) > 0 || cx.arena.atoms(m).iter().any(|a| q.contains(a)) {
        return Ok(None);
    }
    if inverse_distance(cx, &q, u)? {
        for k in 0..n {
            let component = laplace(cx, &q, &v, m, u, k)?;
            if multiple(cx, charge, component)? {
                return Ok(Some(Hidden::LaplaceVector(k)));
            }
        }
    }
    let slope = cx.arena.partial(u, q[0], cx.budget)?;
    let stiffness = cx.arena.partial(slope, q[0], cx.budget)?;
    let mut gap = vec![(u, Rational::integer(2))];
    for &q in &q {
        let q2 = cx.arena.pow(q, 2);
        gap.push((cx.arena.mul(stiffness, q2), Rational::MINUS_ONE));
    }
    if stiffness != Arena::ZERO && cx.vanishes(&gap).is_proved() {
        for i in 0..n {
            for j in i..n {
                let (t, w) = (cx.arena.product(&[m, v[i], v[j]]), cx.arena.product(&[stiffness, q[i], q[j]]));
                let element = cx.arena.add(t, w);
                if multiple(cx, charge, element)? {
                    return Ok(Some(Hidden::FradkinTensor(i, j)));
                }
            }
        }
    }
    Ok(None)
}

/// Whether U depends on the distance from the origin only, and is homogeneous of degree −1.
fn inverse_distance(cx: &mut Context<'_>, q: &[Expr], u: Expr) -> Result<bool, Stopped> {
    let mut slopes = Vec::new();
    for &q in q {
        slopes.push(cx.arena.partial(u, q, cx.budget)?);
    }
    if slopes.iter().all(|&s| s == Arena::ZERO) {
        return Ok(false);
    }
    let mut gap = vec![(u, Rational::ONE)];
    for (&q, &s) in q.iter().zip(&slopes) {
        gap.push((cx.arena.mul(q, s), Rational::ONE));
    }
    let mut proved = cx.vanishes(&gap).is_proved();
    for j in 1..q.len() {
        let (a, b) = (cx.arena.mul(q[0], slopes[j]), cx.arena.mul(q[j], slopes[0]));
        proved = proved && cx.vanishes(&[(a, Rational::ONE), (b, Rational::MINUS_ONE)]).is_proved();
    }
    Ok(proved)
}

/// m (xₖ v² − vₖ x·v) + U xₖ.
fn laplace(cx: &mut Context<'_>, q: &[Expr], v: &[Expr], m: Expr, u: Expr, k: usize) -> Result<Expr, Stopped> {
    let mut parts = vec![(cx.arena.mul(u, q[k]), Rational::ONE)];
    for j in 0..q.len() {
        let v2 = cx.arena.pow(v[j], 2);
        parts.push((cx.arena.product(&[m, q[k], v2]), Rational::ONE));
        parts.push((cx.arena.product(&[m, v[k], q[j], v[j]]), Rational::MINUS_ONE));
    }
    cx.build(&parts)
}

/// Whether a charge is ±1, ±½ or ±2 times another.
fn multiple(cx: &mut Context<'_>, charge: Expr, other: Expr) -> Result<bool, Stopped> {
    for (a, b) in [(1, 1), (1, -1), (2, 1), (2, -1), (1, 2), (1, -2)] {
        if cx.vanishes(&[(charge, Rational::integer(a)), (other, Rational::integer(b))]).is_proved() {
            return Ok(true);
        }
    }
    Ok(false)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::fixture::{Fixture, kepler};
    use crate::model::TermKind;

    fn check(f: &mut Fixture, charge: Expr, expected: Option<Hidden>) {
        let model = f.model.clone();
        assert_eq!(hidden(&mut f.cx(), &model, charge).unwrap(), expected);
    }

    #[test]
    fn names_are_given_by_shape() {
        let mut f = kepler();
        let model = f.model.clone();
        let [q, v] = [0, 1].map(|n| model.coordinates.iter().map(|q| q.jet(&mut f.arena, n)).collect::<Vec<_>>());
        let (m, k) = (f.parameter("m"), f.parameter("k"));
        let (x2, y2) = (f.arena.pow(q[0], 2), f.arena.pow(q[1], 2));
        let r2 = f.arena.add(x2, y2);
        let u = f.arena.monomial(&[(k, Rational::ONE), (r2, Rational::HALF.neg())]);
        let u = f.arena.neg(u);
        let a = laplace(&mut f.cx(), &q, &v, m, u, 1).unwrap();
        check(&mut f, a, Some(Hidden::LaplaceVector(1)));
        let b = f.arena.neg(a);
        check(&mut f, b, Some(Hidden::LaplaceVector(1)));
        let c = f.arena.add(a, m);
        check(&mut f, c, None);
        // Another force: the same expression is nothing known.
        f.term(TermKind::Potential, "more", &[x2]);
        check(&mut f, a, None);
    }

    #[test]
    fn elements_of_fradkins_tensor() {
        let mut f = Fixture::new();
        let ((x, a), (y, b)) = (f.coordinate("x"), f.coordinate("y"));
        let (m, k) = (f.parameter("m"), f.parameter("k"));
        let parts = [f.half_square(m, a), f.half_square(m, b)];
        f.term(TermKind::Kinetic, "body", &parts);
        let parts = [f.half_square(k, x), f.half_square(k, y)];
        f.term(TermKind::Potential, "springs", &parts);
        let (t, w) = (f.half_square(m, a), f.half_square(k, x));
        let energy = f.arena.add(t, w);
        check(&mut f, energy, Some(Hidden::FradkinTensor(0, 0)));
        let (t, w) = (f.arena.product(&[m, a, b]), f.arena.product(&[k, x, y]));
        let mixed = f.arena.add(t, w);
        check(&mut f, mixed, Some(Hidden::FradkinTensor(0, 1)));
        let wrong = f.arena.sub(t, w);
        check(&mut f, wrong, None);
    }
}
