//! W with given ∂W/∂q: by integration over one coordinate after the other, in whatever order it can be done; or else as
//! a combination, with polynomials as coefficients, of what the potential energy is made of; or else as a gauge term.

use super::kernel::{Halt, kernel};
use super::killing::{MAX_UNKNOWNS, functions};
use crate::context::Context;
use crate::gauge::gauge_term;
use crate::model::Model;
use leastwise_algebra::{Arena, Expr, Function, Node, Rational, Stopped, antiderivative};

/// What the search for W starts from.
pub(super) struct Ground<'a> {
    /// The model.
    pub model: &'a Model,
    /// q̇.
    pub velocities: &'a [Expr],
    /// q.
    pub positions: &'a [Expr],
    /// Which of them are angles.
    pub angles: &'a [usize],
    /// The potential energy.
    pub potential: Expr,
    /// The highest degree of a polynomial coefficient.
    pub degree: u32,
}

/// W with ∂W/∂qⁱ = `slopes`[i], proved; `None` where no closed form was found. Costs an expansion and at most n
/// antiderivatives for each of the n coordinates.
pub(super) fn primitive(cx: &mut Context<'_>, ground: &Ground<'_>, slopes: &[Expr]) -> Result<Option<Expr>, Stopped> {
    for attempt in [integrated, fitted, parallel] {
        let Some(w) = attempt(cx, ground, slopes)? else { continue };
        let mut proved = true;
        for (&q, &f) in ground.positions.iter().zip(slopes) {
            let d = cx.arena.partial(w, q, cx.budget)?;
            proved &= cx.vanishes(&[(d, Rational::ONE), (f, Rational::MINUS_ONE)]).is_proved();
        }
        if proved {
            return Ok(Some(w));
        }
    }
    Ok(None)
}

/// W by integration; to be confirmed.
fn integrated(cx: &mut Context<'_>, ground: &Ground<'_>, slopes: &[Expr]) -> Result<Option<Expr>, Stopped> {
    let positions = ground.positions;
    let mut rest = Vec::new();
    for &f in slopes {
        rest.push(cx.arena.expand(f, cx.budget)?);
    }
    let mut open: Vec<usize> = (0..positions.len()).collect();
    let mut out = Vec::new();
    while !open.is_empty() {
        let mut still = Vec::new();
        for &i in &open {
            if rest[i] != Arena::ZERO && !cx.vanishes(&[(rest[i], Rational::ONE)]).is_proved() {
                still.push(i);
            }
        }
        open = still;
        let mut step = None;
        for &i in &open {
            if let Some(g) = antiderivative(cx.arena, rest[i], positions[i], cx.budget)? {
                step = Some((i, g));
                break;
            }
        }
        let Some((i, g)) = step else {
            if open.is_empty() {
                break;
            }
            return Ok(None);
        };
        open.retain(|&j| j != i);
        for &j in &open {
            let d = cx.arena.partial(g, positions[j], cx.budget)?;
            let left = cx.arena.sub(rest[j], d);
            let left = cx.arena.expand(left, cx.budget)?;
            rest[j] = without(cx, left, positions[i])?;
        }
        out.push((g, Rational::ONE));
    }
    cx.build(&out).map(Some)
}

/// W with dW/dt = Σ ∂W/∂q q̇, as a gauge term is found.
fn parallel(cx: &mut Context<'_>, ground: &Ground<'_>, slopes: &[Expr]) -> Result<Option<Expr>, Stopped> {
    let parts: Vec<_> =
        slopes.iter().zip(ground.velocities).map(|(&f, &v)| (cx.arena.mul(f, v), Rational::ONE)).collect();
    gauge_term(cx, ground.model, &parts)
}

/// W by a linear system for its coefficients; to be confirmed.
fn fitted(cx: &mut Context<'_>, ground: &Ground<'_>, slopes: &[Expr]) -> Result<Option<Expr>, Stopped> {
    let mut shapes = vec![Arena::ONE];
    let potential = cx.arena.expand(ground.potential, cx.budget)?;
    for (term, _) in cx.arena.summands(potential) {
        let mut factors = cx.arena.factors(term);
        factors.retain(|(base, n)| {
            let polynomial = match cx.arena.node(*base) {
                Node::Call(Function::Sin | Function::Cos, args) => ground.positions.contains(&args[0]),
                _ => ground.positions.contains(base),
            };
            let moving = cx.arena.atoms(*base).iter().any(|a| ground.positions.contains(a));
            moving && !(polynomial && n.to_i64().is_some_and(|n| n > 0))
        });
        let shape = cx.arena.monomial(&factors);
        if !shapes.contains(&shape) {
            shapes.push(shape);
        }
    }
    let mut list = Vec::new();
    for degree in (0..=ground.degree).rev() {
        list = functions(cx, ground.positions, ground.angles, degree);
        if list.len() * shapes.len() < MAX_UNKNOWNS {
            break;
        }
    }
    if list.len() * shapes.len() >= MAX_UNKNOWNS {
        return Ok(None);
    }
    let (mut terms, mut columns) = (Vec::new(), Vec::new());
    for &shape in &shapes {
        for &f in &list {
            let w = cx.arena.mul(f, shape);
            let mut column = Vec::new();
            for &q in ground.positions {
                column.push(cx.arena.partial(w, q, cx.budget)?);
            }
            // Constants tell nothing.
            if column.iter().any(|&d| d != Arena::ZERO) {
                terms.push(w);
                columns.push(column);
            }
        }
    }
    columns.push(slopes.to_vec());
    let last = terms.len();
    let relations = match kernel(cx, &columns) {
        Ok(relations) => relations,
        Err(Halt::Stopped(s)) => return Err(s),
        Err(Halt::Unsolved(_)) => return Ok(None),
    };
    for c in relations {
        if c[last] == Arena::ZERO {
            continue;
        }
        let mut parts = Vec::new();
        for (&c, &w) in c.iter().zip(&terms) {
            parts.push((cx.arena.mul(c, w), Rational::ONE));
        }
        let w = cx.build(&parts)?;
        let w = cx.arena.div(w, c[last]);
        let w = cx.arena.neg(w);
        return cx.arena.expand(w, cx.budget).map(Some);
    }
    Ok(None)
}

/// What is left does not depend on a coordinate that is done, whatever it looks like: its value at 0 or 1, where proved.
fn without(cx: &mut Context<'_>, e: Expr, q: Expr) -> Result<Expr, Stopped> {
    if !cx.arena.atoms(e).contains(&q) {
        return Ok(e);
    }
    for value in [Arena::ZERO, Arena::ONE] {
        let at = [(q, value)].into_iter().collect();
        let there = cx.arena.substitute(e, &at, cx.budget)?;
        if there != Arena::UNDEFINED && cx.vanishes(&[(e, Rational::ONE), (there, Rational::MINUS_ONE)]).is_proved() {
            return Ok(there);
        }
    }
    Ok(e)
}
