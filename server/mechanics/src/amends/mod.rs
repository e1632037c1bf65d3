//! How a wrong claimed constant can be put right, and where a right one comes from.
//!
//! The claim is C = Σ Pₖ with rates rₖ along motions. One factor λ at a part mends it where Σ r + (λ − 1) rₖ = 0: λ is
//! read off the residues of the rates at several points of a finite field, with M a = b solved at each, and the claim so
//! changed is then decided like any other. A missing term is a multiple of a quantity of the model whose rate is
//! parallel to that of the claim, or a function of place and time found by integration.

mod offers;
mod source;

pub use source::{Source, momenta, rate_on_motions, source};

use crate::claims;
use crate::context::{Context, Parts};
use crate::gauge::gauge_term;
use crate::lagrange::jet_order;
use crate::mass::{MassRows, coasting};
use crate::model::Model;
use crate::surface;
use leastwise_algebra::{Arena, Expr, Motion, Rate, Rational, Reason, Residues, Stopped, Verdict};

/// A change of a claim that makes it true, proved.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Amend {
    /// The sign of a group of parts, by its place in the list of groups.
    Sign(usize),
    /// A factor at a group of parts.
    Factor(usize, Rational),
    /// A group of parts is too much.
    Without(usize),
    /// A term to be added.
    Missing(Expr),
}

/// More groups, and more quantities for a missing term, than this are not looked at.
const MAX_RATES: usize = 160;
/// Residues of one rate.
const POINTS: usize = 6;
/// So many changes of one kind are tried by the zero test.
const MAX_TRIED: usize = 4;

/// The changes that make the claim Σ `parts` true, the best of each kind first: a sign, a factor, a part too much; only
/// where there is none of these a missing term. `groups` are the sums of parts that have one place in the text. `known`
/// are constants of the motion. Empty where the claim is not to be mended, or accelerations are not solved for.
pub fn amends(
    cx: &mut Context<'_>,
    model: &Model,
    rows: Option<&MassRows>,
    parts: &[Expr],
    groups: &[Vec<usize>],
    known: &[Expr],
) -> Result<Vec<Amend>, Stopped> {
    let Some(rows) = rows else { return Ok(Vec::new()) };
    if parts.len() > MAX_RATES || parts.iter().any(|&p| jet_order(cx.arena, p) > 1) {
        return Ok(Vec::new());
    }
    let Some(residues) = residues(cx, model, rows, parts)? else { return Ok(Vec::new()) };
    let all: Vec<usize> = (0..parts.len()).collect();
    let mut factors = Vec::new();
    for (g, group) in groups.iter().enumerate() {
        // r + (λ − 1) rₖ = 0.
        let Some(ratio) = residues.ratio(&all, group) else { continue };
        let lambda = Rational::ONE.sub(&ratio);
        let rest: Vec<usize> = all.iter().copied().filter(|k| !group.contains(k)).collect();
        // What is left must be a constant that says something.
        if lambda.is_zero() && rest.iter().all(|&k| residues.vanishes(k)) {
            continue;
        }
        factors.push((g, lambda));
    }
    let rank = |lambda: &Rational| match lambda {
        l if *l == Rational::MINUS_ONE => (0, 0),
        l if l.is_zero() => (2, 0),
        l => {
            let size = l.small().map_or(u64::MAX, |(n, d)| n.unsigned_abs().saturating_add(d.unsigned_abs()));
            (1, size.saturating_add(if l.is_negative() { 8 } else { 0 }))
        }
    };
    // Of equal factors the one at more parts, which counts them alike; then the later: what stands first is the quantity
    // that was meant.
    let width = |g: usize, lambda: &Rational| if rank(lambda).0 == 1 { groups[g].len() } else { 0 };
    factors.sort_by_key(|(g, lambda)| (rank(lambda), std::cmp::Reverse((width(*g, lambda), *g))));
    let mut out = Vec::new();
    for (g, lambda) in factors.into_iter().take(MAX_TRIED) {
        let step = lambda.sub(&Rational::ONE);
        let mut changed: Parts = parts.iter().map(|&p| (p, Rational::ONE)).collect();
        changed.extend(groups[g].iter().map(|&k| (parts[k], step.clone())));
        if is_conserved(cx, model, rows, &changed)? {
            out.push(match lambda {
                l if l == Rational::MINUS_ONE => Amend::Sign(g),
                l if l.is_zero() => Amend::Without(g),
                l => Amend::Factor(g, l),
            });
        }
    }
    if out.is_empty() || matches!(out[0], Amend::Without(_)) {
        let missing = missing(cx, model, rows, parts, known)?;
        out.splice(0..0, missing.map(Amend::Missing));
    }
    Ok(out)
}

fn is_conserved(cx: &mut Context<'_>, model: &Model, rows: &MassRows, parts: &Parts) -> Result<bool, Stopped> {
    let claim = cx.build(parts)?;
    let judged = claims::examine(cx, model, Some(rows), claim)?;
    Ok(matches!(judged.verdict, Ok(Verdict::Proved)))
}

/// The rates of quantities, with the factors of all accelerations.
fn rates(cx: &mut Context<'_>, model: &Model, of: &[Expr]) -> Result<Vec<Rate>, Stopped> {
    let mut out = Vec::with_capacity(of.len());
    for &e in of {
        let still = coasting(cx, e)?;
        let mut slopes = Vec::with_capacity(model.coordinates.len());
        for q in &model.coordinates {
            let v = q.jet(cx.arena, 1);
            slopes.push(cx.arena.partial(e, v, cx.budget)?);
        }
        out.push((still, slopes));
    }
    Ok(out)
}

/// The residues of the rates along motions; `None` where they cannot be told.
fn residues(cx: &mut Context<'_>, model: &Model, rows: &MassRows, of: &[Expr]) -> Result<Option<Residues>, Stopped> {
    let mut rates = rates(cx, model, of)?;
    if !model.constraints.is_empty() {
        return surface::rate_residues(cx, model, &rates, POINTS);
    }
    let asked: Vec<bool> =
        (0..model.coordinates.len()).map(|i| rates.iter().any(|(_, c)| c[i] != Arena::ZERO)).collect();
    let (solved, motion): (Vec<usize>, Motion) = claims::motion(cx, model, rows, &asked)?;
    for (_, slopes) in &mut rates {
        *slopes = solved.iter().map(|&i| slopes[i]).collect();
    }
    match cx.zero.rate_residues(cx.arena, &rates, &motion, POINTS, cx.budget) {
        Ok(residues) => Ok(Some(residues)),
        Err(Reason::TooLarge) => Err(Stopped::TooLarge),
        Err(Reason::Cancelled) => Err(Stopped::Cancelled),
        Err(_) => Ok(None),
    }
}

/// One term that makes the claim true: a multiple of a quantity of the model, else a function of place and time.
fn missing(
    cx: &mut Context<'_>,
    model: &Model,
    rows: &MassRows,
    parts: &[Expr],
    known: &[Expr],
) -> Result<Option<Expr>, Stopped> {
    let claim: Parts = parts.iter().map(|&p| (p, Rational::ONE)).collect();
    let mut list = parts.to_vec();
    // What stands in the claim already is not missing.
    let own: Vec<Expr> = parts.iter().map(|&p| cx.arena.split_coefficient(p).1).collect();
    list.extend(offers::offers(cx, model, known)?.into_iter().filter(|e| !own.contains(e)));
    list.truncate(MAX_RATES);
    if let Some(residues) = residues(cx, model, rows, &list)? {
        let own: Vec<usize> = (0..parts.len()).collect();
        let mut tried = 0;
        for (k, &offer) in list.iter().enumerate().skip(parts.len()) {
            let Some(ratio) = residues.ratio(&own, &[k]) else { continue };
            let term = cx.arena.scale(offer, &ratio.neg());
            let mut whole = claim.clone();
            whole.push((term, Rational::ONE));
            let sum = cx.build(&whole)?;
            if is_trivial(cx, sum)? {
                continue;
            }
            if is_conserved(cx, model, rows, &whole)? {
                return Ok(Some(term));
            }
            tried += 1;
            if tried == MAX_TRIED {
                break;
            }
        }
    }
    if let Some(term) = offers::rest(cx, &claim, known)? {
        let mut whole = claim.clone();
        whole.push((term, Rational::ONE));
        if is_conserved(cx, model, rows, &whole)? {
            return Ok(Some(term));
        }
    }
    if !model.constraints.is_empty() {
        return Ok(None);
    }
    let Some(rate) = source::rate_on_motions(cx, model, rows, &claim)? else { return Ok(None) };
    if source::degree(cx, model, rate, 1)?.is_none() {
        return Ok(None);
    }
    let minus = cx.arena.neg(rate);
    for q in &model.coordinates {
        let gap = crate::lagrange::residual(cx, &vec![(minus, Rational::ONE)], q)?;
        let lists = crate::lagrange::questions(cx, q, &gap)?;
        if !cx.all_vanish(&lists).is_proved() {
            return Ok(None);
        }
    }
    let Some(term) = gauge_term(cx, model, &vec![(minus, Rational::ONE)])? else { return Ok(None) };
    let mut whole = claim;
    whole.push((term, Rational::ONE));
    let sum = cx.build(&whole)?;
    let good = !is_trivial(cx, sum)? && is_conserved(cx, model, rows, &whole)?;
    Ok(good.then_some(term))
}

/// Whether a quantity is constant on every curve, so that its constancy says nothing.
fn is_trivial(cx: &mut Context<'_>, e: Expr) -> Result<bool, Stopped> {
    let rate = cx.arena.total(e, cx.budget)?;
    Ok(cx.vanishes(&[(rate, Rational::ONE)]).is_proved())
}

#[cfg(test)]
mod tests;
