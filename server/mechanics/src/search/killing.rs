//! Killing tensors of the kinetic energy: what is quadratic in the velocities and constant along the geodesics of M.
//!
//! Where M is constant the geodesics are straight, and q̇ⁱ and qⁱ q̇ʲ − qʲ q̇ⁱ generate all of them by products; so do the
//! n(n + 1)/2 Killing fields of a space of constant curvature [Thompson, J. Math. Phys. 27 (1986) 2693]. Other spaces have
//! some that are no such products: these are looked for with components Kᵢⱼ in the ansatz of the search.

use super::Scope;
use super::kernel::{Halt, dependent, kernel};
use super::kinetic::Kinetic;
use crate::context::Context;
use leastwise_algebra::{Arena, Expr, Function, Rational, Stopped};

/// With more unknown coefficients no system is set up.
pub(super) const MAX_UNKNOWNS: usize = 240;

/// Functions of the ansatz: monomials up to a total degree, times trigonometric polynomials of degree 2 in each angle.
pub(super) fn functions(cx: &mut Context<'_>, positions: &[Expr], angles: &[usize], degree: u32) -> Vec<Expr> {
    ansatz(cx, positions, angles, &[], degree)
}

/// The same, of degree 1 in some of the angles.
fn ansatz(cx: &mut Context<'_>, positions: &[Expr], angles: &[usize], plain: &[usize], degree: u32) -> Vec<Expr> {
    let mut out: Vec<(Expr, u32)> = vec![(Arena::ONE, 0)];
    for (i, &q) in positions.iter().enumerate() {
        let mut next = Vec::new();
        for &(f, d) in &out {
            if angles.contains(&i) {
                let (s, c) = (cx.arena.call(Function::Sin, &[q]), cx.arena.call(Function::Cos, &[q]));
                let shapes = [vec![], vec![c], vec![s], vec![s, s], vec![s, c]];
                let count = if plain.contains(&i) { 3 } else { shapes.len() };
                for factors in shapes.into_iter().take(count) {
                    let g = cx.arena.product(&factors);
                    next.push((cx.arena.mul(f, g), d));
                }
            } else {
                for k in 0..=degree - d {
                    let g = cx.arena.pow(q, k as i64);
                    next.push((cx.arena.mul(f, g), d + k));
                }
            }
        }
        out = next;
        // That many are not used: with more coordinates there are only more.
        if out.len() > MAX_UNKNOWNS {
            break;
        }
    }
    out.into_iter().map(|(f, _)| f).collect()
}

/// Σ cₐ vₐ.
pub(super) fn combination(cx: &mut Context<'_>, coefficients: &[Expr], values: &[Expr]) -> Result<Expr, Stopped> {
    let mut parts = Vec::new();
    for (&c, &v) in coefficients.iter().zip(values) {
        if c != Arena::ZERO && v != Arena::ZERO {
            parts.push((cx.arena.mul(c, v), Rational::ONE));
        }
    }
    cx.build(&parts)
}

/// The coefficients ∂²C/∂q̇ⁱ∂q̇ʲ, i ≤ j.
pub(super) fn quadratic_part(cx: &mut Context<'_>, velocities: &[Expr], e: Expr) -> Result<Vec<Expr>, Stopped> {
    let mut out = Vec::new();
    for (i, &v) in velocities.iter().enumerate() {
        let slope = cx.arena.partial(e, v, cx.budget)?;
        for &w in &velocities[i..] {
            out.push(cx.arena.partial(slope, w, cx.budget)?);
        }
    }
    Ok(out)
}

/// The rate along geodesics.
fn geodesic_rate(cx: &mut Context<'_>, kinetic: &Kinetic, e: Expr) -> Result<Expr, Stopped> {
    let mut parts = Vec::new();
    for i in 0..kinetic.positions.len() {
        let d = cx.arena.partial(e, kinetic.positions[i], cx.budget)?;
        parts.push((cx.arena.mul(d, kinetic.velocities[i]), Rational::ONE));
        let d = cx.arena.partial(e, kinetic.velocities[i], cx.budget)?;
        parts.push((cx.arena.mul(d, kinetic.geodesic[i]), Rational::ONE));
    }
    parts.retain(|p| p.0 != Arena::ZERO);
    cx.build(&parts)
}

/// Those combinations of some functions of (q, q̇) that are constant along geodesics.
fn constant_along_geodesics(cx: &mut Context<'_>, kinetic: &Kinetic, list: &[Expr]) -> Result<Vec<Expr>, Halt> {
    let mut columns = Vec::new();
    for &e in list {
        columns.push(vec![geodesic_rate(cx, kinetic, e)?]);
    }
    let mut out = Vec::new();
    for c in kernel(cx, &columns)? {
        out.push(combination(cx, &c, list)?);
    }
    Ok(out)
}

/// The Killing fields Bᵢ(q) q̇ⁱ.
pub(super) fn fields(cx: &mut Context<'_>, kinetic: &Kinetic, scope: &Scope) -> Result<Vec<Expr>, Halt> {
    let (q, v) = (&kinetic.positions, &kinetic.velocities);
    let n = q.len();
    if kinetic.flat {
        let mut out = v.clone();
        for i in 0..n {
            // An angle enters by its sine and cosine only, and these don't occur here.
            for j in (i + 1..n).filter(|j| !scope.angles.contains(j) && !scope.angles.contains(&i)) {
                let (a, b) = (cx.arena.mul(q[i], v[j]), cx.arena.mul(q[j], v[i]));
                out.push(cx.arena.sub(a, b));
            }
        }
        return Ok(out);
    }
    let mut list = Vec::new();
    // Of an angle that M does not contain e^{iφ} is enough for rotations.
    let within = cx.arena.atoms(kinetic.energy);
    let cyclic: Vec<usize> = scope.angles.iter().copied().filter(|&i| !within.contains(&q[i])).collect();
    // One degree more than is asked for: rotations in parabolic coordinates have degree 3.
    for degree in (0..=scope.degree.max(2) + 1).rev() {
        let f = ansatz(cx, q, &scope.angles, &cyclic, degree);
        list = products(cx, &f, v);
        if list.len() <= MAX_UNKNOWNS {
            break;
        }
    }
    if list.len() > MAX_UNKNOWNS {
        return Ok(Vec::new());
    }
    constant_along_geodesics(cx, kinetic, &list)
}

fn products(cx: &mut Context<'_>, left: &[Expr], right: &[Expr]) -> Vec<Expr> {
    left.iter().flat_map(|&f| right.iter().map(move |&v| (f, v))).map(|(f, v)| cx.arena.mul(f, v)).collect()
}

/// The Killing tensors Kᵢⱼ(q) q̇ⁱ q̇ʲ, independent, and why there may be others.
pub(super) fn tensors(
    cx: &mut Context<'_>,
    kinetic: &Kinetic,
    scope: &Scope,
    fields: &[Expr],
) -> Result<(Vec<Expr>, Option<String>), Halt> {
    let v = &kinetic.velocities;
    let n = v.len();
    let mut list = Vec::new();
    for (k, &a) in fields.iter().enumerate() {
        for &b in &fields[k..] {
            list.push(cx.arena.mul(a, b));
        }
    }
    let maximal = fields.len() == n * (n + 1) / 2;
    let mut incomplete = None;
    if !kinetic.flat && !maximal {
        list.push(kinetic.energy);
        let least = scope.degree.max(2);
        let squares: Vec<Expr> =
            (0..n).flat_map(|i| (i..n).map(move |j| (i, j))).map(|(i, j)| cx.arena.mul(v[i], v[j])).collect();
        let mut unknown = Vec::new();
        for degree in (least..=least + 2).rev() {
            let f = functions(cx, &kinetic.positions, &scope.angles, degree);
            unknown = products(cx, &f, &squares);
            if unknown.len() <= MAX_UNKNOWNS {
                break;
            }
        }
        if unknown.len() <= MAX_UNKNOWNS {
            // Without what is known already.
            let new: Vec<Expr> = independent(cx, v, 2, &list, &unknown)?.into_iter().map(|k| unknown[k]).collect();
            list.extend(constant_along_geodesics(cx, kinetic, &new)?);
        } else {
            let why = "of the kinetic energy's Killing tensors only products of Killing fields were looked at: their ansatz has too many coefficients";
            incomplete = Some(why.into());
        }
    }
    let kept = independent(cx, v, 2, &[], &list)?;
    Ok((kept.into_iter().map(|k| list[k]).collect(), incomplete))
}

/// Which of the functions have parts of the given degree, 1 or 2, in the velocities that are no combinations, with constant
/// coefficients, of those before and of the `known` ones. Of equal ones the first is kept.
pub(super) fn independent(
    cx: &mut Context<'_>,
    velocities: &[Expr],
    degree: u32,
    known: &[Expr],
    list: &[Expr],
) -> Result<Vec<usize>, Halt> {
    let mut columns = Vec::new();
    for &e in known.iter().chain(list) {
        columns.push(if degree == 2 {
            quadratic_part(cx, velocities, e)?
        } else {
            velocities.iter().map(|&v| cx.arena.partial(e, v, cx.budget)).collect::<Result<_, Stopped>>()?
        });
    }
    let dependent = dependent(cx, &columns)?;
    Ok((0..list.len()).filter(|k| !dependent.contains(&(known.len() + k))).collect())
}
