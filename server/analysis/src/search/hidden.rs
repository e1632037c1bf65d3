//! Names for integrals quadratic in the velocities, each only where the integral is that, up to a constant factor.
//!
//! Of a particle of mass m with U(q) in Cartesian coordinates: the Laplace–Runge–Lenz vector over m,
//! A = m (q̇² q − (q·q̇) q̇) + U q [GPS §3.9], with U = −k/r; the Fradkin tensor F = m q̇ q̇ + κ q q of an isotropic oscillator
//! [D. M. Fradkin, Am. J. Phys. 33 (1965) 207]. In any coordinates: the energy of one of them alone.

use super::naming::{is_constant, suffixed};
use crate::checked::Checked;
use crate::derive::{Derived, total};
use crate::sheet::Maker;
use leastwise_algebra::{Arena, Expr, Rational};
use leastwise_mechanics::context::{Context, Parts};
use leastwise_mechanics::lagrange::{momentum, signed_parts};

/// A word for an integral, and its title.
pub(super) fn named(
    maker: &mut Maker<'_>,
    checked: &Checked,
    derived: &Derived,
    integral: Expr,
) -> Option<(String, String)> {
    let model = checked.model();
    if model.coordinates.iter().any(|q| q.members.is_some()) {
        return None;
    }
    let labels: Vec<String> = model.coordinates.iter().map(|q| q.label(maker.arena)).collect();
    let q: Vec<Expr> = model.coordinates.iter().map(|q| q.jet(maker.arena, 0)).collect();
    let v: Vec<Expr> = model.coordinates.iter().map(|q| q.jet(maker.arena, 1)).collect();
    let n = q.len();
    if let Some(i) = alone(maker, integral, &q, &v) {
        let name = suffixed("energy", &labels[i..=i]);
        return Some((name, format!("energy of {} alone", labels[i])));
    }
    let mass = particle(maker, checked, &v)?;
    let at_rest = v.iter().map(|&v| (v, Arena::ZERO)).collect();
    let h = derived.answers.as_ref().ok()?.energy.function;
    let potential = maker.arena.substitute(h, &at_rest, maker.budget).ok()?;
    for i in 0..n {
        for j in 0..n {
            if i == j {
                if let Some(a) = runge_lenz(maker, mass, potential, &q, &v, i)
                    && is_multiple_of(maker, integral, a, v[(i + 1) % n])
                {
                    let title = format!("Laplace–Runge–Lenz vector, component along {}", labels[i]);
                    return Some((suffixed("runge_lenz", &labels[i..=i]), title));
                }
            } else if i < j {
                let stiffness = maker.arena.partial(potential, q[i], maker.budget).ok()?;
                let stiffness = maker.arena.partial(stiffness, q[i], maker.budget).ok()?;
                let (kinetic, elastic) =
                    (maker.arena.product(&[mass, v[i], v[j]]), maker.arena.product(&[stiffness, q[i], q[j]]));
                let f = maker.arena.add(kinetic, elastic);
                if is_constant(maker, stiffness) && stiffness != Arena::ZERO && is_multiple_of(maker, integral, f, v[i])
                {
                    let pair = [labels[i].clone(), labels[j].clone()];
                    let title = format!("Fradkin tensor, component {} {}", pair[0], pair[1]);
                    return Some((suffixed("fradkin", &pair), title));
                }
            }
        }
    }
    None
}

/// m where the momenta are m q̇ⁱ for all coordinates, which are at least two lengths or have no quantity.
fn particle(maker: &mut Maker<'_>, checked: &Checked, v: &[Expr]) -> Option<Expr> {
    let model = checked.model();
    let straight = |quantity: &Option<String>| quantity.as_deref().is_none_or(|q| q.trim() == "length");
    if v.len() < 2 || !checked.coordinates.iter().all(|c| straight(&c.quantity) && !c.angle) {
        return None;
    }
    let all: Parts = signed_parts(model).concat();
    let mut mass = None;
    for (q, &v) in model.coordinates.iter().zip(v) {
        let forms = momentum(&mut context(maker), &all, q).ok()?;
        let parts: Parts = forms.iter().flat_map(|(f, c)| f.iter().map(|f| (f.expr, c.clone()))).collect();
        let p = total(maker.arena, &parts);
        let m = maker.arena.partial(p, v, maker.budget).ok()?;
        let straight = maker.arena.mul(m, v);
        let same = mass.is_none_or(|known| known == m);
        let plain = context(maker).vanishes(&[(p, Rational::ONE), (straight, Rational::MINUS_ONE)]).is_proved();
        if !same || !plain || !is_constant(maker, m) {
            return None;
        }
        mass = Some(m);
    }
    mass
}

fn context<'m>(maker: &'m mut Maker<'_>) -> Context<'m> {
    Context { arena: maker.arena, zero: maker.zero, budget: maker.budget, memory: maker.memory }
}

/// m (q̇² qⁱ − (q·q̇) q̇ⁱ) + U qⁱ, where there is a potential.
fn runge_lenz(maker: &mut Maker<'_>, mass: Expr, potential: Expr, q: &[Expr], v: &[Expr], i: usize) -> Option<Expr> {
    if is_constant(maker, potential) {
        return None;
    }
    let arena = &mut *maker.arena;
    let mut parts = vec![(arena.mul(potential, q[i]), Rational::ONE)];
    for (&x, &u) in q.iter().zip(v) {
        parts.push((arena.product(&[mass, u, u, q[i]]), Rational::ONE));
        parts.push((arena.product(&[mass, x, u, v[i]]), Rational::MINUS_ONE));
    }
    Some(arena.linear(&parts))
}

/// Whether an integral is a constant times another expression; the factor is read off at the velocity `v`.
fn is_multiple_of(maker: &mut Maker<'_>, integral: Expr, other: Expr, v: Expr) -> bool {
    let factor = |maker: &mut Maker<'_>| {
        let mut slopes = Vec::new();
        for e in [integral, other] {
            let once = maker.arena.partial(e, v, maker.budget).ok()?;
            let once = maker.arena.expand(once, maker.budget).ok()?;
            let twice = maker.arena.partial(once, v, maker.budget).ok()?;
            slopes.push(if twice == Arena::ZERO { once } else { twice });
        }
        let ratio = maker.arena.div(slopes[0], slopes[1]);
        (slopes[1] != Arena::ZERO && ratio != Arena::ZERO && is_constant(maker, ratio)).then_some(ratio)
    };
    let Some(factor) = factor(maker) else { return false };
    let multiple = maker.arena.mul(factor, other);
    context(maker).vanishes(&[(integral, Rational::ONE), (multiple, Rational::MINUS_ONE)]).is_proved()
}

/// The coordinate that alone occurs in an integral.
fn alone(maker: &mut Maker<'_>, integral: Expr, q: &[Expr], v: &[Expr]) -> Option<usize> {
    let flat = maker.arena.expand(integral, maker.budget).ok()?;
    let atoms = maker.arena.atoms(flat);
    let mut occur = (0..q.len()).filter(|&i| atoms.contains(&q[i]) || atoms.contains(&v[i]));
    match (occur.next(), occur.next()) {
        (Some(i), None) if q.len() > 1 => Some(i),
        _ => None,
    }
}
