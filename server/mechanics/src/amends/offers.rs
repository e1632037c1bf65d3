//! Quantities of which a missing term may be a multiple.

use crate::context::{Context, Parts};
use crate::energy::energy;
use crate::lagrange::{jet_order, lagrangian, signed_parts};
use crate::model::{Model, time};
use leastwise_algebra::{Arena, Expr, Rational, Stopped};

/// Products of coordinates and momenta are formed up to so many coordinates.
const MAX_PRODUCTS: usize = 4;
/// Larger quantities are not taken apart.
const MAX_NODES: usize = 2000;

/// Terms of the known constants, of the energy function, of L and of momenta, then positions, velocities and momenta
/// with their products, and these times t. Without repetition, free of accelerations, numbers taken away.
pub(super) fn offers(cx: &mut Context<'_>, model: &Model, known: &[Expr]) -> Result<Vec<Expr>, Stopped> {
    let mut list = Vec::new();
    let mut sums = known.to_vec();
    sums.push(energy(cx, model)?.function);
    sums.push(lagrangian(cx, model)?);
    for t in &model.terms {
        sums.extend(&t.parts);
    }
    let parts: Parts = signed_parts(model).concat();
    let whole = cx.build(&parts)?;
    let (mut places, mut velocities, mut momenta) = (Vec::new(), Vec::new(), Vec::new());
    for q in model.coordinates.iter().filter(|q| q.members.is_none()) {
        let v = q.jet(cx.arena, 1);
        places.push(q.jet(cx.arena, 0));
        velocities.push(v);
        momenta.push(cx.arena.partial(whole, v, cx.budget)?);
    }
    sums.extend(&momenta);
    for &e in &sums {
        list.push(e);
        take_apart(cx, e, &mut list)?;
    }
    let t = time(cx.arena);
    let t = cx.arena.sym(t);
    let mut factors: Vec<Expr> = places.iter().chain(&velocities).copied().collect();
    factors.push(t);
    list.extend(&factors);
    if places.len() <= MAX_PRODUCTS {
        let mut ends = Vec::new();
        for &p in &momenta {
            take_apart(cx, p, &mut ends)?;
        }
        ends.extend(&velocities);
        for &a in &factors {
            for &b in &ends {
                list.push(cx.arena.mul(a, b));
            }
        }
        for (i, &a) in places.iter().enumerate() {
            for &b in &places[i..] {
                list.push(cx.arena.mul(a, b));
            }
        }
    }
    let mut seen = hashbrown::HashSet::new();
    let mut out = Vec::new();
    for e in list {
        let (_, e) = cx.arena.split_coefficient(e);
        if cx.arena.as_number(e).is_none() && seen.insert(e) && jet_order(cx.arena, e) <= 1 {
            out.push(e);
        }
    }
    Ok(out)
}

/// What a claim lacks to be a multiple of a known constant, where it has at least as many summands itself; the shortest.
pub(super) fn rest(cx: &mut Context<'_>, claim: &Parts, known: &[Expr]) -> Result<Option<Expr>, Stopped> {
    let claim = cx.build(claim)?;
    let mut best: Option<(usize, Expr)> = None;
    for &k in known {
        if cx.arena.size(k) > MAX_NODES || cx.arena.size(claim) > MAX_NODES {
            continue;
        }
        let wide = cx.arena.expand(k, cx.budget)?;
        let all = cx.arena.summands(wide).len();
        for (n, d) in [(1, 1), (-1, 1), (2, 1), (-2, 1), (1, 2), (-1, 2)] {
            let Some(c) = Rational::new(n, d) else { continue };
            let gap = cx.arena.linear(&[(k, c), (claim, Rational::MINUS_ONE)]);
            let gap = cx.arena.expand(gap, cx.budget)?;
            let left = cx.arena.summands(gap).len();
            if left > 0 && 2 * left <= all && best.is_none_or(|b| left < b.0) {
                best = Some((left, gap));
            }
        }
    }
    Ok(best.map(|b| b.1))
}

/// The summands of an expression, multiplied out where it is small.
fn take_apart(cx: &mut Context<'_>, e: Expr, out: &mut Vec<Expr>) -> Result<(), Stopped> {
    if cx.arena.size(e) > MAX_NODES || e == Arena::UNDEFINED {
        return Ok(());
    }
    for (s, _) in cx.arena.summands(e) {
        out.push(s);
    }
    let wide = cx.arena.expand(e, cx.budget)?;
    for (s, _) in cx.arena.summands(wide) {
        out.push(s);
    }
    Ok(())
}
