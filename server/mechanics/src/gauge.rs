//! The gauge term: F(t, q) with V = dF/dt, in closed form: by named rules over one coordinate after the other, in
//! whatever order it can be done, else by parallel integration over all at once.

use crate::context::{Context, Parts};
use crate::model::{Model, time};
use leastwise_algebra::{
    Arena, Budget, Expr, Function, Node, Rational, Role, Stopped, Symbol, Verdict, antiderivative, primitive,
};

#[cfg(test)]
mod tests;

/// F with dF/dt = V, proved; `None` where no closed form was found. V's Euler operator must vanish: then F exists
/// locally. Costs an expansion of V, and at most n antiderivatives for each of n coordinates.
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
    if !is_primitive(cx, f, variation)? {
        return Ok(None);
    }
    without_bars(cx, f).map(Some)
}

/// log r for log|r| where r is known to be positive.
fn without_bars(cx: &mut Context<'_>, f: Expr) -> Result<Expr, Stopped> {
    let mut logs = Vec::new();
    cx.arena.visit(f, &mut |e, node| {
        if let Node::Call(Function::Log, args) = node {
            logs.push((e, args[0]));
        }
    });
    let mut plain = hashbrown::HashMap::new();
    for (log, inside) in logs {
        let Node::Call(Function::Abs, args) = cx.arena.node(inside) else { continue };
        let u = args[0];
        let sign = cx.zero.sign_of(cx.arena, u, cx.budget);
        if sign.is_nonnegative() {
            plain.insert(log, cx.arena.call(Function::Log, &[u]));
        } else if sign.is_nonpositive() {
            let minus = cx.arena.neg(u);
            plain.insert(log, cx.arena.call(Function::Log, &[minus]));
        }
    }
    if plain.is_empty() { Ok(f) } else { cx.arena.substitute(f, &plain, cx.budget) }
}

fn is_primitive(cx: &mut Context<'_>, f: Expr, variation: &Parts) -> Result<bool, Stopped> {
    let rate = cx.arena.total(f, cx.budget)?;
    let mut gap = variation.clone();
    gap.push((rate, Rational::MINUS_ONE));
    Ok(matches!(cx.vanishes(&gap), Verdict::Proved))
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

/// The signals in an expression with their rates, up to the one below the highest.
fn inputs_in(cx: &mut Context<'_>, e: Expr) -> Vec<(Expr, Expr)> {
    let mut orders: Vec<(Symbol, u16)> = Vec::new();
    for a in cx.arena.atoms(e) {
        let (Node::Symbol(s), n) = (match *cx.arena.node(a) {
            Node::Symbol(s) => (Node::Symbol(s), 0),
            Node::Jet(s, n) => (Node::Symbol(s), n),
            _ => continue,
        }) else {
            continue;
        };
        if cx.arena.info(s).role != Role::Input {
            continue;
        }
        match orders.iter_mut().find(|o| o.0 == s) {
            Some(o) => o.1 = o.1.max(n),
            None => orders.push((s, n)),
        }
    }
    let mut out = Vec::new();
    for (s, n) in orders {
        for k in 0..n {
            out.push((cx.arena.jet(s, k), cx.arena.jet(s, k + 1)));
        }
    }
    out
}

fn potential(cx: &mut Context<'_>, v: Expr, pairs: &[(Expr, Expr)]) -> Result<Option<Expr>, Stopped> {
    let whole = vec![(v, Rational::ONE)];
    let inputs = inputs_in(cx, v);
    if inputs.is_empty() {
        // The rules have half of what there is: where they swell the ansatz may still do.
        let (mut rest, mut half) = (cx.budget.clone(), cx.budget.part(cx.budget.left() / 2));
        let before = half.left();
        let mut own =
            Context { arena: &mut *cx.arena, zero: &mut *cx.zero, budget: &mut half, memory: &mut *cx.memory };
        let found = match by_rules(&mut own, v, pairs) {
            Err(Stopped::TooLarge) => None,
            other => other?,
        };
        let proved = match found {
            Some(f) => is_primitive(&mut own, f, &whole)?.then_some(f),
            None => None,
        };
        rest.charge((before - half.left()) as usize)?;
        *cx.budget = rest;
        if proved.is_some() {
            return Ok(proved);
        }
    }
    let t = time(cx.arena);
    let mut variables = vec![(cx.arena.sym(t), Arena::ONE)];
    variables.extend(inputs);
    variables.extend_from_slice(pairs);
    let zero = &mut *cx.zero;
    let mut signs = |arena: &mut Arena, e: Expr, budget: &mut Budget| zero.sign_of(arena, e, budget);
    let Some(f) = primitive(cx.arena, v, &variables, &mut signs, cx.budget)? else { return Ok(None) };
    Ok(is_primitive(cx, f, &whole)?.then_some(f))
}

/// By rules, over one coordinate after the other: whichever can be done comes next.
fn by_rules(cx: &mut Context<'_>, v: Expr, pairs: &[(Expr, Expr)]) -> Result<Option<Expr>, Stopped> {
    let mut rest = cx.arena.expand(v, cx.budget)?;
    let mut f = Vec::new();
    let mut open: Vec<(Expr, Expr)> = pairs.to_vec();
    while !open.is_empty() {
        let mut next = None;
        for (k, &(q, velocity)) in open.iter().enumerate() {
            let b = cx.arena.partial(rest, velocity, cx.budget)?;
            if cx.arena.as_number(b).is_some_and(Rational::is_zero) || cx.vanishes(&[(b, Rational::ONE)]).is_proved() {
                next = Some((k, None));
                break;
            }
            if let Some(g) = antiderivative(cx.arena, b, q, cx.budget)? {
                next = Some((k, Some(g)));
                break;
            }
        }
        let Some((k, g)) = next else { return Ok(None) };
        open.remove(k);
        if let Some(g) = g {
            let rate = cx.arena.total(g, cx.budget)?;
            let left = cx.arena.sub(rest, rate);
            rest = cx.arena.expand(left, cx.budget)?;
            f.push((g, Rational::ONE));
        }
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

/// Where a function of the positions is not single-valued.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Winding {
    /// It changes when the coordinate of that number makes a full turn.
    Turn(usize),
    /// It changes on a way around the place where both expressions vanish: the arguments y, x of an atan2.
    Axis(Expr, Expr),
}

/// Where a function is multivalued: on which of the `angles` (numbers of coordinates), and around which axes. Proved;
/// unspecified functions of an angle count as periodic. Costs a zero test for each angle and each atan2.
pub fn multivalued(cx: &mut Context<'_>, model: &Model, f: Expr, angles: &[usize]) -> Result<Vec<Winding>, Stopped> {
    let mut out = Vec::new();
    let pi = cx.arena.pi();
    let moving: Vec<Expr> = {
        let mut list = Vec::new();
        for q in &model.coordinates {
            list.push(q.jet(cx.arena, 0));
        }
        list
    };
    for &i in angles {
        let q = moving[i];
        if model.coordinates[i].members.is_some() || !cx.arena.atoms(f).contains(&q) {
            continue;
        }
        // What unspecified functions of it do is not known.
        let mut e = f;
        for (u, c) in cx.arena.summands(f) {
            let mut unknown = false;
            cx.arena.visit(u, &mut |_, node| unknown |= matches!(node, Node::Unspecified { .. }));
            if unknown {
                let u = cx.arena.scale(u, &c);
                e = cx.arena.sub(e, u);
            }
        }
        let turned = cx.arena.linear(&[(q, Rational::ONE), (pi, Rational::integer(2))]);
        let after = cx.arena.substitute(e, &[(q, turned)].into_iter().collect(), cx.budget)?;
        if cx.vanishes(&[(after, Rational::ONE), (e, Rational::MINUS_ONE)]).is_refuted() {
            out.push(Winding::Turn(i));
        }
    }
    let mut around = Vec::new();
    cx.arena.visit(f, &mut |e, node| {
        if matches!(node, Node::Call(Function::Atan2, _)) {
            around.push(e);
        }
    });
    around.sort_by_key(|e| cx.arena.key(*e));
    for e in around {
        let Node::Call(_, args) = cx.arena.node(e) else { continue };
        let (y, x) = (args[0], args[1]);
        let atoms = [cx.arena.atoms(y), cx.arena.atoms(x)].concat();
        if atoms.iter().any(|a| moving.contains(a)) {
            out.push(Winding::Axis(y, x));
        }
    }
    Ok(out)
}
