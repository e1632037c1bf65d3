//! The gauge term: F(t, q) with V = dF/dt, in closed form by integration over one coordinate after the other.

use crate::context::{Context, Parts};
use crate::model::{Model, time};
use leastwise_algebra::{Arena, Expr, Node, Rational, Role, Stopped, Verdict, antiderivative};

/// F with dF/dt = V, proved; `None` where no closed form was found. V's Euler operator must vanish: then F exists
/// locally. Costs an expansion of V and one antiderivative for each coordinate.
pub fn gauge_term(cx: &mut Context<'_>, model: &Model, variation: &Parts) -> Result<Option<Expr>, Stopped> {
    let v = cx.build(variation)?;
    let mut out = Vec::new();
    let mut plain = Vec::new();
    for (term, c) in cx.arena.summands(v) {
        // A sum over a large family is integrated under the sum.
        let bound = cx.arena.factors(term).into_iter().find(|(b, _)| matches!(cx.arena.node(*b), Node::Bound { .. }));
        let Some((sum, n)) = bound else {
            plain.push((term, c));
            continue;
        };
        let Node::Bound { index, lower, upper, body } = *cx.arena.node(sum) else { continue };
        if !n.is_one() {
            return Ok(None);
        }
        let outside = cx.arena.div(term, sum);
        let pairs = pairs_in(cx, body)?;
        if cx.arena.atoms(outside).iter().any(|a| pairs.iter().any(|p| p.0 == *a || p.1 == *a)) {
            return Ok(None);
        }
        let inside = cx.arena.mul(outside, body);
        let Some(f) = potential(cx, inside, &pairs)? else { return Ok(None) };
        out.push((cx.arena.bound(index, lower, upper, f, cx.budget)?, c));
    }
    let rest = cx.build(&plain)?;
    let mut pairs = Vec::new();
    for q in model.coordinates.iter().filter(|q| q.members.is_none()) {
        pairs.push((q.jet(cx.arena, 0), q.jet(cx.arena, 1)));
    }
    for p in pairs_in(cx, rest)? {
        if !pairs.contains(&p) {
            pairs.push(p);
        }
    }
    let Some(f) = potential(cx, rest, &pairs)? else { return Ok(None) };
    out.push((f, Rational::ONE));
    let f = cx.build(&out)?;
    let rate = cx.arena.total(f, cx.budget)?;
    let mut gap = variation.clone();
    gap.push((rate, Rational::MINUS_ONE));
    Ok(matches!(cx.vanishes(&gap), Verdict::Proved).then_some(f))
}

/// The positions in an expression with their velocities.
fn pairs_in(cx: &mut Context<'_>, e: Expr) -> Result<Vec<(Expr, Expr)>, Stopped> {
    let mut out: Vec<(Expr, Expr)> = Vec::new();
    for a in cx.arena.atoms(e) {
        let q = match *cx.arena.node(a) {
            Node::Symbol(s) | Node::Jet(s, _) if cx.arena.info(s).role == Role::Coordinate => cx.arena.sym(s),
            Node::Member { family, index, .. } if cx.arena.info(family).role == Role::Coordinate => {
                cx.arena.member(family, index, 0)
            }
            _ => continue,
        };
        let v = cx.arena.total(q, cx.budget)?;
        if !out.contains(&(q, v)) {
            out.push((q, v));
        }
    }
    Ok(out)
}

fn potential(cx: &mut Context<'_>, v: Expr, pairs: &[(Expr, Expr)]) -> Result<Option<Expr>, Stopped> {
    let mut rest = cx.arena.expand(v, cx.budget)?;
    let mut f = Vec::new();
    for &(q, velocity) in pairs {
        let b = cx.arena.partial(rest, velocity, cx.budget)?;
        if cx.arena.as_number(b).is_some_and(Rational::is_zero) {
            continue;
        }
        if cx.vanishes(&[(b, Rational::ONE)]).is_proved() {
            continue;
        }
        let Some(g) = antiderivative(cx.arena, b, q, cx.budget)? else { return Ok(None) };
        let rate = cx.arena.total(g, cx.budget)?;
        let left = cx.arena.sub(rest, rate);
        rest = cx.arena.expand(left, cx.budget)?;
        f.push((g, Rational::ONE));
    }
    let t = time(cx.arena);
    let t = cx.arena.sym(t);
    let moving =
        |cx: &Context<'_>, e: Expr| cx.arena.atoms(e).iter().any(|a| pairs.iter().any(|p| p.0 == *a || p.1 == *a));
    if moving(cx, rest) {
        // What is left depends on the time alone, whatever it looks like: its value at rest, anywhere, is all of it.
        let mut anywhere = hashbrown::HashMap::new();
        for (k, &(q, velocity)) in pairs.iter().enumerate() {
            anywhere.insert(q, cx.arena.integer(k as i64 + 2));
            anywhere.insert(velocity, Arena::ZERO);
        }
        rest = cx.arena.substitute(rest, &anywhere, cx.budget)?;
    }
    if rest == Arena::UNDEFINED {
        return Ok(None);
    }
    let Some(g) = antiderivative(cx.arena, rest, t, cx.budget)? else { return Ok(None) };
    f.push((g, Rational::ONE));
    Ok(Some(cx.build(&f)?))
}
