//! The energy function h = Σ pᵢ q̇ⁱ − L and its rate dh/dt = −∂L/∂t + Σ 𝒬ᵢ q̇ⁱ [GPS §2.7].

use crate::context::{Context, Parts};
use crate::lagrange::signed_parts;
use crate::model::{Model, TermKind};
use crate::symmetry::{charge, delay, taken, variations};
use leastwise_algebra::{Expr, Rational, Stopped, Verdict};

/// The energy function, its rate, and what it is.
#[derive(Clone, PartialEq, Debug)]
pub struct Energy {
    /// h.
    pub function: Expr,
    /// −∂L/∂t, one for each additive part of L, and the power of each force, unsummed.
    pub rate: Parts,
    /// Whether the rate vanishes identically.
    pub conserved: Verdict,
    /// Whether ∂L/∂t vanishes identically.
    pub autonomous: Verdict,
}

/// Derives h and its rate.
pub fn energy(cx: &mut Context<'_>, model: &Model) -> Result<Energy, Stopped> {
    let g = delay(model);
    let function = charge(cx, model, &g)?;
    let function = cx.arena.neg(function);
    let signed: Parts = signed_parts(model).concat();
    let flat: Vec<Expr> = signed.iter().map(|p| p.0).collect();
    let explicit = variations(cx, &model.coordinates, &g, &flat)?;
    let mut rate: Parts = explicit.into_iter().zip(&signed).map(|(v, (_, c))| (v, c.neg())).collect();
    rate.retain(|p| p.0 != leastwise_algebra::Arena::ZERO);
    let autonomous = cx.vanishes(&rate);
    // The charge of a delay is −h: what the forces take from it they give to h.
    for p in taken(cx, model, &g)? {
        rate.push((p, Rational::MINUS_ONE));
    }
    rate.retain(|p| p.0 != leastwise_algebra::Arena::ZERO);
    let conserved = cx.vanishes(&rate);
    Ok(Energy { function, rate, conserved, autonomous })
}

/// Whether h is the sum of the kinetic and potential terms. Terms declared `lagrangian` may drop out of h, as those
/// linear in the velocities do.
pub fn is_total_energy(cx: &mut Context<'_>, model: &Model, function: Expr) -> Verdict {
    let mut parts: Parts = vec![(function, Rational::MINUS_ONE)];
    for t in model.terms.iter().filter(|t| t.kind != TermKind::Lagrangian) {
        parts.extend(t.parts.iter().map(|&p| (p, Rational::ONE)));
    }
    cx.vanishes(&parts)
}
