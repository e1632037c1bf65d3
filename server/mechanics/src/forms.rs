//! Derivatives by the members of a family: one derivation per form, ends and coincidences as their own forms.
//!
//! ∂x[j]/∂x[k] = δⱼₖ. The derivative by the member `x[k]` at a free index `k` is built with δ and with steps as marks,
//! then resolved: a δ with a summation index in it ends that sum, a step with one narrows its range, and what is left
//! is a condition on `k` alone, which holds or fails on a whole range of members, or splits the range.

use crate::model::{Coordinate, Members};
use leastwise_algebra::{Arena, Budget, Derivation, Expr, Node, Rational, Role, Stopped, Symbol};
use std::collections::HashMap;

/// An expression that holds for all members in a range, in the family's free index; or for a single coordinate.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub struct Form {
    /// First and last member, both included; `None` for a single coordinate.
    pub range: Option<(i64, i64)>,
    /// The expression.
    pub expr: Expr,
}

/// More pieces than this are not followed.
const MAX_FORMS: usize = 64;

enum Fail {
    Stopped(Stopped),
    /// The condition changes between `at - 1` and `at`.
    Split(i64),
}

impl From<Stopped> for Fail {
    fn from(s: Stopped) -> Fail {
        Fail::Stopped(s)
    }
}

/// ∂e/∂q⁽ⁿ⁾ for a coordinate's time derivative of order `order`, form by form. Costs as [`Arena::partial`], times the
/// number of forms for a family. Errors: [`Stopped`].
pub fn derivative(
    arena: &mut Arena,
    e: Expr,
    q: &Coordinate,
    order: u16,
    budget: &mut Budget,
) -> Result<Vec<Form>, Stopped> {
    let Some(members) = q.members else {
        let atom = q.jet(arena, order);
        return Ok(vec![Form { range: None, expr: arena.partial(e, atom, budget)? }]);
    };
    let marked = mark(arena, e, q.symbol, order, members.index, budget)?;
    let mut out = Vec::new();
    let mut open = vec![(members.lower, members.upper)];
    while let Some((a, b)) = open.pop() {
        let mut ctx = Resolver { index: members.index, lower: a, upper: b };
        match ctx.resolve(arena, marked, &[], budget) {
            Ok(expr) => {
                // At a single member the free index is a number.
                let expr = if a == b { at_member(arena, expr, members.index, a, budget)? } else { expr };
                out.push(Form { range: Some((a, b)), expr });
            }
            Err(Fail::Split(at)) if a < at && at <= b => {
                if open.len() + out.len() >= MAX_FORMS {
                    return Err(Stopped::TooLarge);
                }
                open.push((at, b));
                open.push((a, at - 1));
            }
            Err(Fail::Split(_)) => return Err(Stopped::FreeIndex),
            Err(Fail::Stopped(s)) => return Err(s),
        }
    }
    Ok(merge(out))
}

/// Neighbouring ranges with the same form are one, unless the form was specialised to a member.
fn merge(forms: Vec<Form>) -> Vec<Form> {
    let mut out: Vec<Form> = Vec::new();
    for f in forms {
        if let (Some(last), Some((a, b))) = (out.last_mut(), f.range)
            && let Some((c, d)) = last.range
            && d + 1 == a
            && last.expr == f.expr
        {
            last.range = Some((c, b));
        } else {
            out.push(f);
        }
    }
    out
}

/// The expression with the free index set to a number.
pub fn at_member(arena: &mut Arena, e: Expr, index: Symbol, k: i64, budget: &mut Budget) -> Result<Expr, Stopped> {
    let i = arena.sym(index);
    let k = arena.integer(k);
    arena.substitute(e, &[(i, k)].into_iter().collect(), budget)
}

/// Combines forms of one coordinate: `Σ coefficient · form`, on the common refinement of their ranges.
pub fn combine(
    arena: &mut Arena,
    q: &Coordinate,
    lists: &[(&[Form], Rational)],
    budget: &mut Budget,
) -> Result<Vec<Form>, Stopped> {
    let Some(Members { index, lower, upper }) = q.members else {
        let terms: Vec<(Expr, Rational)> =
            lists.iter().flat_map(|(fs, c)| fs.iter().map(|f| (f.expr, c.clone()))).collect();
        budget.charge(terms.len())?;
        return Ok(vec![Form { range: None, expr: arena.linear(&terms) }]);
    };
    let mut cuts: Vec<i64> = vec![lower, upper + 1];
    for (fs, _) in lists {
        for (a, b) in fs.iter().filter_map(|f| f.range) {
            cuts.extend([a, b + 1]);
        }
    }
    cuts.sort_unstable();
    cuts.dedup();
    let mut out = Vec::new();
    for w in cuts.windows(2) {
        let (a, b) = (w[0], w[1] - 1);
        let mut terms = Vec::new();
        for (fs, c) in lists {
            for f in fs.iter().filter(|f| f.range.is_some_and(|(x, y)| x <= a && b <= y)) {
                let e = if a == b { at_member(arena, f.expr, index, a, budget)? } else { f.expr };
                terms.push((e, c.clone()));
            }
        }
        budget.charge(terms.len())?;
        out.push(Form { range: Some((a, b)), expr: arena.linear(&terms) });
    }
    Ok(merge(out))
}

/// Ranges of members, and for each list one expression on each range.
pub type Aligned = (Vec<Option<(i64, i64)>>, Vec<Vec<Expr>>);

/// Sums of forms of one coordinate, each list on the same ranges, so that they can be compared place by place.
pub fn aligned(
    arena: &mut Arena,
    q: &Coordinate,
    lists: &[Vec<(Vec<Form>, Rational)>],
    budget: &mut Budget,
) -> Result<Aligned, Stopped> {
    let ranges: Vec<Option<(i64, i64)>> = match q.members {
        None => vec![None],
        Some(m) => {
            let mut cuts = vec![m.lower, m.upper + 1];
            for f in lists.iter().flatten().flat_map(|(fs, _)| fs) {
                if let Some((a, b)) = f.range {
                    cuts.extend([a, b + 1]);
                }
            }
            cuts.sort_unstable();
            cuts.dedup();
            cuts.windows(2).map(|w| Some((w[0], w[1] - 1))).collect()
        }
    };
    let mut out = Vec::with_capacity(lists.len());
    for list in lists {
        let mut row = Vec::with_capacity(ranges.len());
        for range in &ranges {
            let mut terms = Vec::new();
            for (fs, c) in list {
                for f in fs {
                    let e = match (range, f.range, q.members) {
                        (Some((a, b)), Some((x, y)), Some(m)) if x <= *a && *b <= y => {
                            if a == b {
                                at_member(arena, f.expr, m.index, *a, budget)?
                            } else {
                                f.expr
                            }
                        }
                        (None, None, _) => f.expr,
                        _ => continue,
                    };
                    terms.push((e, c.clone()));
                }
            }
            budget.charge(1 + terms.len())?;
            row.push(arena.linear(&terms));
        }
        out.push(row);
    }
    Ok((ranges, out))
}

/// Applies `f` to each form.
pub fn map(forms: &[Form], mut f: impl FnMut(Expr) -> Result<Expr, Stopped>) -> Result<Vec<Form>, Stopped> {
    forms.iter().map(|form| Ok(Form { range: form.range, expr: f(form.expr)? })).collect()
}

fn delta_symbol(arena: &mut Arena) -> Symbol {
    arena.symbol("#δ", None, Role::Function)
}

fn step_symbol(arena: &mut Arena) -> Symbol {
    arena.symbol("#step", None, Role::Function)
}

/// The derivative with δ(index − k) for each member's.
fn mark(
    arena: &mut Arena,
    e: Expr,
    family: Symbol,
    order: u16,
    index: Symbol,
    budget: &mut Budget,
) -> Result<Expr, Stopped> {
    let delta = delta_symbol(arena);
    let k = arena.sym(index);
    let info = arena.info(family).clone();
    let mut rule = |arena: &mut Arena, x: Expr| {
        let (at, n) = match *arena.node(x) {
            Node::Member { family: f, index, order } if f == family => (index, order),
            Node::Symbol(s) | Node::Jet(s, _) => {
                let i = arena.info(s);
                let Some(m) = i.member.filter(|_| i.name == info.name && i.role == info.role) else {
                    return Ok(Arena::ZERO);
                };
                let n = if let Node::Jet(_, n) = arena.node(x) { *n } else { 0 };
                (arena.integer(m), n)
            }
            _ => return Ok(Arena::ZERO),
        };
        if n != order {
            return Ok(Arena::ZERO);
        }
        let gap = arena.sub(at, k);
        Ok(if gap == Arena::ZERO { Arena::ONE } else { arena.unspecified(delta, None, &[0], &[gap]) })
    };
    let mut d = Derivation::new(&mut rule);
    arena.derive(e, &mut d, budget)
}

/// An affine expression in indices: constant and coefficients.
fn affine(arena: &Arena, e: Expr) -> Option<(i64, Vec<(Symbol, i64)>)> {
    let mut constant = 0;
    let mut out = Vec::new();
    for (t, c) in arena.summands(e) {
        let c = c.to_i64()?;
        match arena.node(t) {
            Node::Symbol(s) if arena.info(*s).role == Role::Index => out.push((*s, c)),
            _ if t == Arena::ONE => constant = c,
            _ => return None,
        }
    }
    Some((constant, out))
}

/// Whether a δ or a step is inside.
fn is_marked(arena: &Arena, e: Expr) -> bool {
    let mut found = false;
    arena.visit(e, &mut |_, node| {
        if let Node::Unspecified { function, .. } = node {
            found |= arena.info(*function).name.starts_with('#');
        }
    });
    found
}

struct Resolver {
    index: Symbol,
    lower: i64,
    upper: i64,
}

impl Resolver {
    /// Removes the marks. `open` are the indices of the sums around.
    fn resolve(&mut self, arena: &mut Arena, e: Expr, open: &[Symbol], budget: &mut Budget) -> Result<Expr, Fail> {
        budget.charge(1)?;
        match arena.node(e).clone() {
            Node::Sum(c, terms) => {
                let mut out = vec![(Arena::ONE, c)];
                for (t, k) in terms.iter() {
                    out.push((self.resolve(arena, *t, open, budget)?, k.clone()));
                }
                Ok(arena.linear(&out))
            }
            Node::Product(factors) => {
                let mut out = Vec::with_capacity(factors.len());
                for (b, n) in factors.iter() {
                    // The derivation is linear in the marks: they are never under a power.
                    let r = if n.is_one() { self.resolve(arena, *b, open, budget)? } else { *b };
                    if r == Arena::ZERO {
                        return Ok(Arena::ZERO);
                    }
                    out.push((r, n.clone()));
                }
                // A sum of marks is multiplied out, so that each mark is a factor of its summand.
                let marked = out
                    .iter()
                    .position(|(b, n)| n.is_one() && matches!(arena.node(*b), Node::Sum(..)) && is_marked(arena, *b));
                let Some(at) = marked else { return Ok(arena.monomial(&out)) };
                let (sum, _) = out.remove(at);
                let rest = arena.monomial(&out);
                let mut terms = Vec::new();
                for (t, c) in arena.summands(sum) {
                    budget.charge(1)?;
                    let product = arena.mul(t, rest);
                    terms.push((self.resolve(arena, product, open, budget)?, c));
                }
                Ok(arena.linear(&terms))
            }
            Node::Unspecified { function, args, .. } => {
                let name = arena.info(function).name.clone();
                if &*name == "#δ" {
                    self.delta(arena, e, args[0], open)
                } else if &*name == "#step" {
                    self.step(arena, e, args[0], open)
                } else {
                    Ok(e)
                }
            }
            Node::Bound { index, lower, upper, body } => self.bound(arena, index, lower, upper, body, open, budget),
            _ => Ok(e),
        }
    }

    /// δ(gap) with no open index in it is one or zero on the whole range, or splits it.
    fn delta(&mut self, arena: &Arena, mark: Expr, gap: Expr, open: &[Symbol]) -> Result<Expr, Fail> {
        let (c, terms) = affine(arena, gap).ok_or(Fail::Stopped(Stopped::FreeIndex))?;
        if terms.iter().any(|(s, _)| open.contains(s)) {
            return Ok(mark);
        }
        let zero_at = match terms[..] {
            [] => return Ok(if c == 0 { Arena::ONE } else { Arena::ZERO }),
            [(s, k)] if s == self.index && k.abs() == 1 => -c * k,
            _ => return Err(Fail::Stopped(Stopped::FreeIndex)),
        };
        if zero_at < self.lower || zero_at > self.upper {
            Ok(Arena::ZERO)
        } else if self.lower == self.upper {
            Ok(Arena::ONE)
        } else if zero_at > self.lower {
            Err(Fail::Split(zero_at))
        } else {
            Err(Fail::Split(zero_at + 1))
        }
    }

    /// step(x) is one where x ≥ 0.
    fn step(&mut self, arena: &Arena, mark: Expr, x: Expr, open: &[Symbol]) -> Result<Expr, Fail> {
        let (_, terms) = affine(arena, x).ok_or(Fail::Stopped(Stopped::FreeIndex))?;
        if terms.iter().any(|(s, _)| open.contains(s)) {
            return Ok(mark);
        }
        Ok(if self.at_least_zero(arena, x)? { Arena::ONE } else { Arena::ZERO })
    }

    /// Whether an affine expression in the free index alone is ≥ 0 on the whole range.
    fn at_least_zero(&self, arena: &Arena, x: Expr) -> Result<bool, Fail> {
        let (c, terms) = affine(arena, x).ok_or(Fail::Stopped(Stopped::FreeIndex))?;
        let k = match terms[..] {
            [] => return Ok(c >= 0),
            [(s, k)] if s == self.index && k.abs() == 1 => k,
            _ => return Err(Fail::Stopped(Stopped::FreeIndex)),
        };
        let at = |i: i64| k * i + c >= 0;
        match (at(self.lower), at(self.upper)) {
            (true, true) => Ok(true),
            (false, false) => Ok(false),
            // k i + c changes sign between the ends: at i = −c for rising, behind i = c for falling.
            _ => Err(Fail::Split(if k == 1 { -c } else { c + 1 })),
        }
    }

    #[allow(clippy::too_many_arguments)]
    fn bound(
        &mut self,
        arena: &mut Arena,
        index: Symbol,
        lower: Expr,
        upper: Expr,
        body: Expr,
        open: &[Symbol],
        budget: &mut Budget,
    ) -> Result<Expr, Fail> {
        let mut inner = open.to_vec();
        inner.push(index);
        let body = self.resolve(arena, body, &inner, budget)?;
        let mut out = Vec::new();
        for (term, c) in arena.summands(body) {
            let (mut lo, mut hi) = (lower, upper);
            let mut rest: Vec<(Expr, Rational)> = Vec::new();
            let mut pinned: Option<Expr> = None;
            let mut narrowing = Vec::new();
            for (b, n) in arena.factors(term) {
                let Node::Unspecified { function, args, .. } = arena.node(b) else {
                    rest.push((b, n));
                    continue;
                };
                let (name, arg) = (arena.info(*function).name.clone(), args[0]);
                let slope = if &*name == "#δ" || &*name == "#step" {
                    let (_, terms) = affine(arena, arg).ok_or(Fail::Stopped(Stopped::FreeIndex))?;
                    terms.iter().find(|(s, _)| *s == index).map(|t| t.1)
                } else {
                    None
                };
                match slope {
                    None => rest.push((b, n)),
                    Some(k) if k.abs() != 1 => return Err(Fail::Stopped(Stopped::FreeIndex)),
                    Some(k) => {
                        // k i + r with the index i: its root is −k r.
                        let i = arena.sym(index);
                        let r = arena.linear(&[(arg, Rational::ONE), (i, Rational::integer(-k))]);
                        let root = arena.scale(r, &Rational::integer(-k));
                        if &*name == "#δ" && pinned.is_none() {
                            pinned = Some(root);
                        } else if &*name == "#δ" {
                            rest.push((b, n));
                        } else {
                            narrowing.push((k, root, (b, n)));
                        }
                    }
                }
            }
            let value = match pinned {
                Some(root) => {
                    rest.extend(narrowing.into_iter().map(|x| x.2));
                    let step = step_symbol(arena);
                    let (above, below) = (arena.sub(root, lo), arena.sub(hi, root));
                    let (s1, s2) =
                        (arena.unspecified(step, None, &[0], &[above]), arena.unspecified(step, None, &[0], &[below]));
                    let core = arena.monomial(&rest);
                    let i = arena.sym(index);
                    let core = arena.substitute(core, &[(i, root)].into_iter().collect(), budget)?;
                    let all = arena.product(&[s1, s2, core]);
                    self.resolve(arena, all, open, budget)?
                }
                None => {
                    for (k, root, _) in narrowing {
                        if k == 1 {
                            let gap = arena.sub(root, lo);
                            if self.at_least_zero(arena, gap)? {
                                lo = root;
                            }
                        } else {
                            let gap = arena.sub(hi, root);
                            if self.at_least_zero(arena, gap)? {
                                hi = root;
                            }
                        }
                    }
                    let core = arena.monomial(&rest);
                    // An empty range is told by its length where that is decided.
                    let length = arena.sub(hi, lo);
                    match affine(arena, length) {
                        Some((_, t)) if t.iter().all(|(s, _)| *s == self.index) => {
                            if self.at_least_zero(arena, length)? {
                                arena.bound(index, lo, hi, core, budget)?
                            } else {
                                Arena::ZERO
                            }
                        }
                        _ => arena.bound(index, lo, hi, core, budget)?,
                    }
                }
            };
            out.push((value, c));
        }
        Ok(arena.linear(&out))
    }
}

/// All coordinates' expressions as a map from free index to member, for a quick look-up of η at a member.
pub fn at_index(arena: &mut Arena, e: Expr, q: &Coordinate, index: Expr, budget: &mut Budget) -> Result<Expr, Stopped> {
    match q.members {
        None => Ok(e),
        Some(m) => {
            let i = arena.sym(m.index);
            arena.substitute(e, &[(i, index)].into_iter().collect(), budget)
        }
    }
}

/// The coordinate to which an atom belongs, by symbol.
pub fn index_of(coordinates: &[Coordinate]) -> HashMap<Symbol, usize> {
    coordinates.iter().enumerate().map(|(i, q)| (q.symbol, i)).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    struct Chain {
        arena: Arena,
        x: Symbol,
        q: Coordinate,
        k: Symbol,
        budget: Budget,
    }

    fn chain(n: i64) -> Chain {
        let mut arena = Arena::new();
        let x = arena.symbol("x", None, Role::Coordinate);
        let k = arena.symbol("k", None, Role::Index);
        Chain { x, k, q: Coordinate::family(x, k, 1, n), arena, budget: Budget::new(1 << 20) }
    }

    impl Chain {
        fn at(&mut self, i: Expr, shift: i64) -> Expr {
            let s = self.arena.integer(shift);
            let i = self.arena.add(i, s);
            self.arena.member(self.x, i, 0)
        }

        /// The sum over `i` from 1 to n − 1 of (x[i+1] − x[i])²/2.
        fn springs(&mut self, n: i64) -> Expr {
            let i = self.arena.symbol("i", None, Role::Index);
            let ie = self.arena.sym(i);
            let (a, b) = (self.at(ie, 1), self.at(ie, 0));
            let d = self.arena.sub(a, b);
            let d = self.arena.pow(d, 2);
            let d = self.arena.scale(d, &Rational::HALF);
            let (lo, hi) = (self.arena.integer(1), self.arena.integer(n - 1));
            self.arena.bound(i, lo, hi, d, &mut self.budget).unwrap()
        }
    }

    #[test]
    fn a_chain_has_three_forms() {
        let mut c = chain(10_000);
        let e = c.springs(10_000);
        let forms = derivative(&mut c.arena, e, &c.q.clone(), 0, &mut c.budget).unwrap();
        let ranges: Vec<_> = forms.iter().map(|f| f.range.unwrap()).collect();
        assert_eq!(ranges, [(1, 1), (2, 9999), (10_000, 10_000)]);
        // Inside: 2 x[k] − x[k−1] − x[k+1].
        let k = c.arena.sym(c.k);
        let (l, m, r) = (c.at(k, -1), c.at(k, 0), c.at(k, 1));
        let want = c.arena.linear(&[(m, Rational::integer(2)), (l, Rational::MINUS_ONE), (r, Rational::MINUS_ONE)]);
        assert_eq!(forms[1].expr, want);
        // The first: x[1] − x[2].
        let (one, two) = (c.arena.integer(1), c.arena.integer(2));
        let (x1, x2) = (c.at(one, 0), c.at(two, 0));
        let want = c.arena.sub(x1, x2);
        assert_eq!(forms[0].expr, want);
    }

    #[test]
    fn a_single_member_is_its_own_form() {
        let mut c = chain(100);
        let five = c.arena.integer(5);
        let x5 = c.at(five, 0);
        let e = c.arena.pow(x5, 2);
        let forms = derivative(&mut c.arena, e, &c.q.clone(), 0, &mut c.budget).unwrap();
        let ranges: Vec<_> = forms.iter().map(|f| f.range.unwrap()).collect();
        assert_eq!(ranges, [(1, 4), (5, 5), (6, 100)]);
        assert_eq!(forms[0].expr, Arena::ZERO);
        let want = c.arena.scale(x5, &Rational::integer(2));
        assert_eq!(forms[1].expr, want);
    }

    #[test]
    fn pairs_keep_sums_on_both_sides() {
        // Σᵢ Σⱼ>ᵢ x[i] x[j]: the derivative by x[k] is the sum of all others.
        let mut c = chain(100);
        let (i, j) = (c.arena.symbol("i", None, Role::Index), c.arena.symbol("j", None, Role::Index));
        let (ie, je) = (c.arena.sym(i), c.arena.sym(j));
        let (xi, xj) = (c.at(ie, 0), c.at(je, 0));
        let p = c.arena.mul(xi, xj);
        let one = c.arena.integer(1);
        let lo = c.arena.add(ie, one);
        let (n, n1) = (c.arena.integer(100), c.arena.integer(99));
        let inner = c.arena.bound(j, lo, n, p, &mut c.budget).unwrap();
        let e = c.arena.bound(i, one, n1, inner, &mut c.budget).unwrap();
        let forms = derivative(&mut c.arena, e, &c.q.clone(), 0, &mut c.budget).unwrap();
        let first = forms.iter().find(|f| f.range == Some((1, 1))).expect("the first end");
        let two = c.arena.integer(2);
        let body = c.at(ie, 0);
        let want = c.arena.bound(i, two, n, body, &mut c.budget).unwrap();
        assert_eq!(first.expr, want);
        let middle = forms.iter().find(|f| f.range.is_some_and(|(a, b)| a < 50 && 50 < b)).expect("the middle");
        assert_eq!(arena_sums(&c.arena, middle.expr), 2);
    }

    fn arena_sums(arena: &Arena, e: Expr) -> usize {
        let mut n = 0;
        arena.visit(e, &mut |_, node| n += matches!(node, Node::Bound { .. }) as usize);
        n
    }
}
