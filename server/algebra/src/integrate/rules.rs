//! Antiderivatives in closed form, as far as gauge terms need them.
//!
//! Rules, by name: *power*, *table* (functions of an argument linear in the variable), *parts* (powers of the variable
//! times sine, cosine, exponential), *products to sums* (of sines and cosines), *substitution* (f(u) u' for a factor's
//! own base or argument u), *lowering* (A U⁽ᵏ⁾ = (A U⁽ᵏ⁻¹⁾)' − A' U⁽ᵏ⁻¹⁾ for unspecified functions). Whoever uses a result
//! differentiates it and compares: a rule that does not fit costs an answer, never a wrong one.

use crate::arena::{Arena, Expr, Node};
use crate::budget::{Budget, Stopped};
use crate::function::Function;
use crate::rational::Rational;

/// How often *lowering* is repeated.
const ROUNDS: usize = 24;

/// An antiderivative by the atom `x`, or `None` where no rule fits. Other atoms count as independent of `x`.
pub fn antiderivative(arena: &mut Arena, e: Expr, x: Expr, budget: &mut Budget) -> Result<Option<Expr>, Stopped> {
    let mut rest = arena.expand(e, budget)?;
    let mut done = Arena::ZERO;
    for _ in 0..ROUNDS {
        let mut open = Vec::new();
        for (term, c) in arena.summands(rest) {
            budget.charge(1)?;
            match integrate_term(arena, term, x, 0, budget)? {
                Some(f) => {
                    let f = arena.scale(f, &c);
                    done = arena.add(done, f);
                }
                None => open.push((term, c)),
            }
        }
        if open.is_empty() {
            return Ok(Some(done));
        }
        // *Lowering* of the first term that has an unspecified function's derivative.
        let lowered = open.iter().find_map(|(t, c)| lower(arena, *t, x).map(|f| (f, c.clone())));
        let Some((f, c)) = lowered else { return Ok(None) };
        let f = arena.scale(f, &c);
        let df = arena.partial(f, x, budget)?;
        done = arena.add(done, f);
        let open = arena.linear(&open);
        let left = arena.sub(open, df);
        rest = arena.expand(left, budget)?;
    }
    Ok(None)
}

fn depends(arena: &Arena, e: Expr, x: Expr) -> bool {
    arena.may_contain(e, x) && arena.atoms(e).contains(&x)
}

/// `a` and `b` with e = a x + b, both free of `x`.
fn linear(arena: &mut Arena, e: Expr, x: Expr, budget: &mut Budget) -> Result<Option<Expr>, Stopped> {
    let a = arena.partial(e, x, budget)?;
    let a = arena.expand(a, budget)?;
    Ok((a != Arena::ZERO && !depends(arena, a, x)).then_some(a))
}

fn integrate_term(
    arena: &mut Arena,
    term: Expr,
    x: Expr,
    level: u32,
    budget: &mut Budget,
) -> Result<Option<Expr>, Stopped> {
    if level > 40 {
        return Ok(None);
    }
    budget.charge(4)?;
    let mut outside = Vec::new();
    let mut inside: Vec<(Expr, Rational)> = Vec::new();
    for (b, n) in arena.factors(term) {
        if depends(arena, b, x) { inside.push((b, n)) } else { outside.push((b, n)) }
    }
    let constant = arena.monomial(&outside);
    let Some(f) = integrate_factors(arena, &inside, x, level, budget)? else { return Ok(None) };
    Ok(Some(arena.mul(constant, f)))
}

fn integrate_factors(
    arena: &mut Arena,
    inside: &[(Expr, Rational)],
    x: Expr,
    level: u32,
    budget: &mut Budget,
) -> Result<Option<Expr>, Stopped> {
    if inside.is_empty() {
        return Ok(Some(x));
    }
    if let Some(sum) = products_to_sums(arena, inside, x)? {
        let sum = arena.expand(sum, budget)?;
        let mut out = Vec::new();
        for (t, c) in arena.summands(sum) {
            match integrate_term(arena, t, x, level + 1, budget)? {
                Some(f) => out.push((f, c)),
                None => return Ok(None),
            }
        }
        return Ok(Some(arena.linear(&out)));
    }
    if let [(b, n)] = inside
        && let Some(a) = linear(arena, *b, x, budget)?
    {
        return Ok(Some(power_rule(arena, *b, n, a)));
    }
    if let [(b, n)] = inside
        && let Some(u) = inner(arena, *b)
        && let Some(a) = linear(arena, u, x, budget)?
        && let Some(f) = table(arena, *b, n)
    {
        return Ok(Some(arena.div(f, a)));
    }
    // *Parts*: xⁿ g(a x + b).
    let power = inside.iter().position(|(b, n)| *b == x && n.to_i64().is_some_and(|n| (1..=30).contains(&n)));
    if let (Some(k), 2) = (power, inside.len()) {
        let (g, m) = inside[1 - k].clone();
        let repeats = matches!(
            arena.node(g),
            Node::Call(Function::Sin | Function::Cos | Function::Exp | Function::Sinh | Function::Cosh, _)
        );
        if m.is_one()
            && repeats
            && let Some(u) = inner(arena, g)
            && let Some(a) = linear(arena, u, x, budget)?
            && let Some(big) = table(arena, g, &m)
        {
            let big = arena.div(big, a);
            let n = inside[k].1.clone();
            let xn = arena.pow_rational(x, &n);
            let first = arena.mul(xn, big);
            let lower = arena.monomial(&[(x, n.sub(&Rational::ONE)), (big, Rational::ONE)]);
            let lower = arena.expand(lower, budget)?;
            let mut out = vec![(first, Rational::ONE)];
            for (t, c) in arena.summands(lower) {
                match integrate_term(arena, t, x, level + 1, budget)? {
                    Some(f) => out.push((f, c.mul(&n).neg())),
                    None => return Ok(None),
                }
            }
            return Ok(Some(arena.linear(&out)));
        }
    }
    substitution(arena, inside, x, budget)
}

/// *Power*: ∫ (a x + b)ⁿ dx.
fn power_rule(arena: &mut Arena, base: Expr, n: &Rational, a: Expr) -> Expr {
    let up = n.add(&Rational::ONE);
    let f = if up.is_zero() {
        let m = arena.call(Function::Abs, &[base]);
        arena.call(Function::Log, &[m])
    } else {
        let p = arena.pow_rational(base, &up);
        arena.scale(p, &up.recip().unwrap_or(Rational::ONE))
    };
    arena.div(f, a)
}

/// The last argument that a table entry is a function of.
fn inner(arena: &Arena, b: Expr) -> Option<Expr> {
    match arena.node(b) {
        Node::Call(_, args) if args.len() == 1 => Some(args[0]),
        Node::Unspecified { args, .. } if args.len() == 1 => Some(args[0]),
        _ => None,
    }
}

/// ∫ g(u)ⁿ du for a known or unspecified function g of one argument u.
fn table(arena: &mut Arena, g: Expr, n: &Rational) -> Option<Expr> {
    use Function::*;
    let u = inner(arena, g)?;
    if let Node::Unspecified { function, index, orders, args } = arena.node(g).clone() {
        if !n.is_one() || orders[0] == 0 {
            return None;
        }
        return Some(arena.unspecified(function, index, &[orders[0] - 1], &args));
    }
    let Node::Call(f, _) = *arena.node(g) else { return None };
    let log_of = |arena: &mut Arena, h: Function| {
        let v = arena.call(h, &[u]);
        let m = arena.call(Abs, &[v]);
        arena.call(Log, &[m])
    };
    Some(match (f, n.to_i64()) {
        (Exp, _) => arena.pow_rational(g, n).pipe(|p| arena.scale(p, &n.recip().unwrap_or(Rational::ONE))),
        (Sin, Some(1)) => arena.call(Cos, &[u]).pipe(|e| arena.neg(e)),
        (Cos, Some(1)) => arena.call(Sin, &[u]),
        (Sinh, Some(1)) => arena.call(Cosh, &[u]),
        (Cosh, Some(1)) => arena.call(Sinh, &[u]),
        (Tanh, Some(1)) => log_of(arena, Cosh),
        (Tan, Some(1)) => log_of(arena, Cos).pipe(|e| arena.neg(e)),
        (Cos, Some(-2)) => arena.call(Tan, &[u]),
        (Cosh, Some(-2)) => arena.call(Tanh, &[u]),
        (Tan, Some(2)) => arena.sub(g, u),
        (Log, Some(1)) => {
            let p = arena.mul(u, g);
            arena.sub(p, u)
        }
        _ => return None,
    })
}

trait Pipe: Sized {
    fn pipe<T>(self, f: impl FnOnce(Self) -> T) -> T {
        f(self)
    }
}

impl Pipe for Expr {}

/// *Products to sums*, where there are two sines and cosines or more, counted with positive powers.
fn products_to_sums(arena: &mut Arena, inside: &[(Expr, Rational)], x: Expr) -> Result<Option<Expr>, Stopped> {
    let mut trig: Vec<(bool, Expr)> = Vec::new();
    let mut rest = Vec::new();
    for (b, n) in inside {
        match (arena.node(*b), n.to_i64()) {
            (Node::Call(f @ (Function::Sin | Function::Cos), args), Some(k)) if (1..=24).contains(&k) => {
                trig.extend(std::iter::repeat_n((*f == Function::Sin, args[0]), k as usize));
            }
            _ => rest.push((*b, n.clone())),
        }
    }
    // A lone factor with a clean rest is left to the table and to substitution.
    let powers_only = rest.iter().all(|(b, n)| *b == x && n.to_i64().is_some_and(|n| n > 0));
    if trig.len() < 2 || !powers_only {
        return Ok(None);
    }
    let (first, second) = (trig[0], trig[1]);
    let (sum, gap) = (arena.add(first.1, second.1), arena.sub(first.1, second.1));
    let half = Rational::HALF;
    let minus = Rational::HALF.neg();
    let (a, b) = match (first.0, second.0) {
        // sin a sin b, cos a cos b, sin a cos b, cos a sin b.
        (true, true) => {
            ((arena.call(Function::Cos, &[gap]), half.clone()), (arena.call(Function::Cos, &[sum]), minus.clone()))
        }
        (false, false) => {
            ((arena.call(Function::Cos, &[gap]), half.clone()), (arena.call(Function::Cos, &[sum]), half.clone()))
        }
        (true, false) => {
            ((arena.call(Function::Sin, &[sum]), half.clone()), (arena.call(Function::Sin, &[gap]), half.clone()))
        }
        (false, true) => ((arena.call(Function::Sin, &[sum]), half), (arena.call(Function::Sin, &[gap]), minus)),
    };
    let pair = arena.linear(&[a, b]);
    for (sine, u) in &trig[2..] {
        let f = if *sine { Function::Sin } else { Function::Cos };
        rest.push((arena.call(f, &[*u]), Rational::ONE));
    }
    rest.push((pair, Rational::ONE));
    Ok(Some(arena.monomial(&rest)))
}

/// *Substitution*: ∏ = c · g(u)ⁿ · ∂u/∂x with c free of x.
fn substitution(
    arena: &mut Arena,
    inside: &[(Expr, Rational)],
    x: Expr,
    budget: &mut Budget,
) -> Result<Option<Expr>, Stopped> {
    for (k, (b, n)) in inside.iter().enumerate() {
        let rest: Vec<_> = inside.iter().enumerate().filter(|(i, _)| *i != k).map(|(_, f)| f.clone()).collect();
        let rest = arena.monomial(&rest);
        for own_base in [true, false] {
            let u = if own_base { Some(*b) } else { inner(arena, *b) };
            let Some(u) = u.filter(|u| *u != x) else { continue };
            let du = arena.partial(u, x, budget)?;
            let du = arena.expand(du, budget)?;
            if du == Arena::ZERO {
                continue;
            }
            let c = arena.div(rest, du);
            if depends(arena, c, x) {
                continue;
            }
            let f = if own_base { Some(power_rule(arena, u, n, Arena::ONE)) } else { table(arena, *b, n) };
            if let Some(f) = f {
                return Ok(Some(arena.mul(c, f)));
            }
        }
    }
    Ok(None)
}

/// *Lowering*: A U⁽ᵏ⁾(…x…) gives A U⁽ᵏ⁻¹⁾ over the inner derivative, where that is free of x.
fn lower(arena: &mut Arena, term: Expr, x: Expr) -> Option<Expr> {
    let factors = arena.factors(term);
    for (k, (b, n)) in factors.iter().enumerate() {
        let Node::Unspecified { function, index, orders, args } = arena.node(*b).clone() else { continue };
        if !n.is_one() {
            continue;
        }
        let moved: Vec<usize> = (0..args.len()).filter(|&i| depends(arena, args[i], x)).collect();
        let [i] = moved[..] else { continue };
        if orders[i] == 0 {
            continue;
        }
        let mut fewer = orders.to_vec();
        fewer[i] -= 1;
        let mut small = Budget::new(10_000);
        let slope = arena.partial(args[i], x, &mut small).ok()?;
        if slope == Arena::ZERO || depends(arena, slope, x) {
            continue;
        }
        let lowered = arena.unspecified(function, index, &fewer, &args);
        let mut list = factors.clone();
        list[k] = (lowered, Rational::ONE);
        list.push((slope, Rational::MINUS_ONE));
        return Some(arena.monomial(&list));
    }
    None
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::arena::Role;

    struct Fixture {
        a: Arena,
        b: Budget,
        x: Expr,
        y: Expr,
    }

    fn fixture() -> Fixture {
        let mut a = Arena::new();
        let (x, y) = (a.symbol("x", None, Role::Coordinate), a.symbol("y", None, Role::Coordinate));
        let (x, y) = (a.sym(x), a.sym(y));
        Fixture { a, b: Budget::new(1 << 20), x, y }
    }

    /// The derivative of the antiderivative, expanded, is the expanded original.
    fn check(f: &mut Fixture, e: Expr) {
        let g = antiderivative(&mut f.a, e, f.x, &mut f.b).unwrap().expect("a closed form");
        let d = f.a.partial(g, f.x, &mut f.b).unwrap();
        let gap = f.a.sub(d, e);
        let gap = f.a.expand(gap, &mut f.b).unwrap();
        assert_eq!(gap, Arena::ZERO, "{:?}", f.a.node(gap));
    }

    #[test]
    fn polynomials_and_roots() {
        let mut f = fixture();
        let (x, y) = (f.x, f.y);
        let x3 = f.a.pow(x, 3);
        let e = f.a.mul(x3, y);
        check(&mut f, e);
        // x/(x² + y²)^(3/2).
        let (x2, y2) = (f.a.pow(x, 2), f.a.pow(y, 2));
        let r2 = f.a.add(x2, y2);
        let e = f.a.monomial(&[(x, Rational::ONE), (r2, Rational::new(-3, 2).unwrap())]);
        check(&mut f, e);
    }

    #[test]
    fn parts_and_exponentials() {
        let mut f = fixture();
        let (x, y) = (f.x, f.y);
        let u = f.a.mul(x, y);
        let (s, g) = (f.a.call(Function::Sin, &[u]), f.a.call(Function::Exp, &[u]));
        let x2 = f.a.pow(x, 2);
        let (p, q) = (f.a.mul(x2, s), f.a.mul(x2, g));
        let e = f.a.add(p, q);
        check(&mut f, e);
    }

    #[test]
    fn products_of_unspecified_functions() {
        let mut f = fixture();
        let x = f.x;
        let s = f.a.symbol("U", None, Role::Function);
        let (u, du) = (f.a.unspecified(s, None, &[0], &[x]), f.a.unspecified(s, None, &[1], &[x]));
        let p = f.a.mul(x, du);
        let e = f.a.add(p, u);
        check(&mut f, e);
    }

    #[test]
    fn no_rule_no_answer() {
        let mut f = fixture();
        let x = f.x;
        let x2 = f.a.pow(x, 2);
        let e = f.a.call(Function::Exp, &[x2]);
        assert_eq!(antiderivative(&mut f.a, e, x, &mut f.b), Ok(None));
    }
}
