//! Rates on the surface of the constraints.
//!
//! Motions satisfy f = 0 and df/dt = 0. Each holonomic constraint is solved for a coordinate in which it is affine or
//! quadratic (both roots are looked at), each one that is linear in the velocities for a velocity; what is solved for is
//! put in, with its time derivative. Accelerations and multipliers come from d'Alembert–Lagrange's equations with the
//! constraints differentiated once more [GPS §2.4, NF]:
//!
//! M a − Aᵀ λ = b,  A a = −γ,  with A = ∂f/∂q (∂f/∂q̇ where f is linear in the velocities)
//!
//! so that a rate c₀ + Σ cᵢ aᵢ + Σ dₐ λₐ is tested like one without constraints.

use crate::context::Context;
use crate::lagrange::depends_on_velocities;
use crate::mass::{coasting, dense, mass_rows, right_sides};
use crate::model::Model;
use leastwise_algebra::{Arena, Expr, Motion, Node, Rate, Rational, Residues, Sign, Stopped, Verdict};

/// What is put in for atoms, each expression free of all the atoms.
type Solved = Vec<(Expr, Expr)>;

/// More signs of roots than this are not tried.
const MAX_BRANCHES: usize = 8;
/// Larger systems are not solved.
const MAX_UNKNOWNS: usize = 64;

/// Whether c₀ + Σ cᵢ aᵢ + Σ dₐ λₐ vanishes on all motions; `None` where the constraints are not solved for coordinates.
/// `accelerations` holds the cᵢ, `multipliers` the dₐ, one for each constraint.
pub fn rate_is_zero(
    cx: &mut Context<'_>,
    model: &Model,
    still: Expr,
    accelerations: &[Expr],
    multipliers: &[Expr],
) -> Result<Option<Verdict>, Stopped> {
    let (n, m) = (model.coordinates.len(), model.constraints.len());
    debug_assert!(accelerations.len() == n && multipliers.len() == m);
    if n + m > MAX_UNKNOWNS || model.coordinates.iter().any(|q| q.members.is_some()) {
        return Ok(None);
    }
    let Some(branches) = branches(cx, model)? else { return Ok(None) };
    let motion = motion(cx, model)?;
    let slopes: Vec<Expr> = accelerations.iter().chain(multipliers).copied().collect();
    let mut result = Verdict::Proved;
    for solved in &branches {
        let map: hashbrown::HashMap<Expr, Expr> = solved.iter().copied().collect();
        let put = |cx: &mut Context<'_>, e: Expr| cx.arena.substitute(e, &map, cx.budget);
        let still = put(cx, still)?;
        let slopes = slopes.iter().map(|&e| put(cx, e)).collect::<Result<Vec<_>, _>>()?;
        let mut here = Motion::default();
        for row in &motion.mass {
            here.mass.push(row.iter().map(|&e| put(cx, e)).collect::<Result<_, _>>()?);
        }
        here.rhs = motion.rhs.iter().map(|&e| put(cx, e)).collect::<Result<_, _>>()?;
        match cx.zero.rate_is_zero(cx.arena, still, &slopes, &here, cx.budget) {
            Verdict::Proved => {}
            // The witness names atoms that are solved for on the surface only: it is not shown.
            Verdict::Refuted(_) => return Ok(Some(Verdict::Refuted(None))),
            undecided => result = undecided,
        }
    }
    Ok(Some(result))
}

/// The residues of rates c₀ + Σ cᵢ aᵢ at points of the surface, on one branch of it; `None` where there are none. What is
/// found there is to be confirmed.
pub fn rate_residues(
    cx: &mut Context<'_>,
    model: &Model,
    rates: &[Rate],
    length: usize,
) -> Result<Option<Residues>, Stopped> {
    let (n, m) = (model.coordinates.len(), model.constraints.len());
    if n + m > MAX_UNKNOWNS || model.coordinates.iter().any(|q| q.members.is_some()) {
        return Ok(None);
    }
    let Some(solved) = branches(cx, model)?.and_then(|b| b.into_iter().next()) else { return Ok(None) };
    let map: hashbrown::HashMap<Expr, Expr> = solved.into_iter().collect();
    let everywhere = motion(cx, model)?;
    let mut put = |e: Expr| cx.arena.substitute(e, &map, cx.budget);
    let mut here = Motion::default();
    for row in &everywhere.mass {
        here.mass.push(row.iter().map(|&e| put(e)).collect::<Result<_, _>>()?);
    }
    here.rhs = everywhere.rhs.iter().map(|&e| put(e)).collect::<Result<_, _>>()?;
    let mut on_it = Vec::with_capacity(rates.len());
    for (still, slopes) in rates {
        let mut slopes = slopes.iter().map(|&e| put(e)).collect::<Result<Vec<_>, _>>()?;
        // Multipliers take no part in a rate.
        slopes.resize(n + m, Arena::ZERO);
        on_it.push((put(*still)?, slopes));
    }
    Ok(cx.zero.rate_residues(cx.arena, &on_it, &here, length, cx.budget).ok())
}

/// The system for accelerations and multipliers, anywhere.
fn motion(cx: &mut Context<'_>, model: &Model) -> Result<Motion, Stopped> {
    let (n, m) = (model.coordinates.len(), model.constraints.len());
    let rows = mass_rows(cx, model)?;
    let all: Vec<usize> = (0..n).collect();
    let mut mass = dense(cx, &rows, &all)?;
    let mut rhs = Vec::with_capacity(n + m);
    for b in right_sides(cx, model, &all)? {
        rhs.push(cx.build(&b)?);
    }
    for row in &mut mass {
        row.resize(n + m, Arena::ZERO);
    }
    for (k, c) in model.constraints.iter().enumerate() {
        let order = depends_on_velocities(cx.arena, c.f) as u16;
        let mut row = vec![Arena::ZERO; n + m];
        for (i, q) in model.coordinates.iter().enumerate() {
            let atom = q.jet(cx.arena, order);
            let a = cx.arena.partial(c.f, atom, cx.budget)?;
            row[i] = a;
            mass[i][n + k] = cx.arena.neg(a);
        }
        mass.push(row);
        let rate = if order == 0 { cx.arena.total(c.f, cx.budget)? } else { c.f };
        let rest = coasting(cx, rate)?;
        rhs.push(cx.arena.neg(rest));
    }
    Ok(Motion { mass, rhs })
}

/// The constraints solved, once for each choice of roots.
fn branches(cx: &mut Context<'_>, model: &Model) -> Result<Option<Vec<Solved>>, Stopped> {
    let mut out: Vec<Solved> = vec![Vec::new()];
    let (fast, slow): (Vec<Expr>, Vec<Expr>) =
        model.constraints.iter().map(|c| c.f).partition(|&f| depends_on_velocities(cx.arena, f));
    for (f, order) in slow.into_iter().map(|f| (f, 0)).chain(fast.into_iter().map(|f| (f, 1))) {
        let mut next = Vec::new();
        for solved in out {
            let here = put_in(cx, f, &solved)?;
            let Some(roots) = solve(cx, model, here, order)? else { return Ok(None) };
            for (atom, root) in roots {
                let mut more = solved.clone();
                extend(cx, &mut more, atom, root)?;
                if order == 0 {
                    let velocity = cx.arena.total(atom, cx.budget)?;
                    let rate = cx.arena.total(root, cx.budget)?;
                    let rate = put_in(cx, rate, &more)?;
                    extend(cx, &mut more, velocity, rate)?;
                }
                next.push(more);
            }
        }
        if next.len() > MAX_BRANCHES {
            return Ok(None);
        }
        out = next;
    }
    Ok(Some(out))
}

fn put_in(cx: &mut Context<'_>, e: Expr, solved: &Solved) -> Result<Expr, Stopped> {
    if solved.is_empty() {
        return Ok(e);
    }
    cx.arena.substitute(e, &solved.iter().copied().collect(), cx.budget)
}

/// Adds an atom's expression and puts it into the others.
fn extend(cx: &mut Context<'_>, solved: &mut Solved, atom: Expr, value: Expr) -> Result<(), Stopped> {
    let one: hashbrown::HashMap<Expr, Expr> = [(atom, value)].into_iter().collect();
    for (_, e) in solved.iter_mut() {
        *e = cx.arena.substitute(*e, &one, cx.budget)?;
    }
    solved.push((atom, value));
    Ok(())
}

/// Solves f = 0 for a jet of the order: the first in which it is affine, else the first in which it is quadratic.
fn solve(cx: &mut Context<'_>, model: &Model, f: Expr, order: u16) -> Result<Option<Vec<(Expr, Expr)>>, Stopped> {
    let f = cx.arena.expand(f, cx.budget)?;
    let mut quadratic = None;
    for q in &model.coordinates {
        let x = q.jet(cx.arena, order);
        let slope = cx.arena.partial(f, x, cx.budget)?;
        let slope = cx.arena.expand(slope, cx.budget)?;
        if slope == Arena::ZERO {
            continue;
        }
        let curvature = cx.arena.partial(slope, x, cx.budget)?;
        let curvature = cx.arena.expand(curvature, cx.budget)?;
        let at_zero = [(x, Arena::ZERO)].into_iter().collect();
        if curvature == Arena::ZERO {
            let rest = cx.arena.substitute(f, &at_zero, cx.budget)?;
            let root = cx.arena.div(rest, slope);
            return Ok(Some(vec![(x, cx.arena.neg(root))]));
        }
        if quadratic.is_none() && !cx.arena.atoms(curvature).contains(&x) && order == 0 {
            quadratic = Some((x, slope, curvature));
        }
    }
    let Some((x, slope, curvature)) = quadratic else { return Ok(None) };
    // f = ½ k x² + b x + c: x = (−b ± √(b² − 2 k c))/k.
    let at_zero = [(x, Arena::ZERO)].into_iter().collect();
    let c = cx.arena.substitute(f, &at_zero, cx.budget)?;
    let b = cx.arena.substitute(slope, &at_zero, cx.budget)?;
    let (b2, kc) = (cx.arena.pow(b, 2), cx.arena.mul(curvature, c));
    let inside = cx.arena.linear(&[(b2, Rational::ONE), (kc, Rational::integer(-2))]);
    let inside = cx.arena.expand(inside, cx.budget)?;
    let root = cx.arena.sqrt(inside);
    let mut out = Vec::new();
    for sign in [Rational::ONE, Rational::MINUS_ONE] {
        let above = cx.arena.linear(&[(root, sign), (b, Rational::MINUS_ONE)]);
        out.push((x, cx.arena.div(above, curvature)));
    }
    Ok(Some(out))
}

/// Whether each constraint takes a degree of freedom: all are solved, one after the other, for coordinates or velocities
/// of their own, and no root is known to be of a negative number. `false` says that this is not known.
pub fn are_independent(cx: &mut Context<'_>, model: &Model) -> Result<bool, Stopped> {
    let (n, m) = (model.coordinates.len(), model.constraints.len());
    if n + m > MAX_UNKNOWNS || m > n || model.coordinates.iter().any(|q| q.members.is_some()) {
        return Ok(false);
    }
    let Some(branches) = branches(cx, model)? else { return Ok(false) };
    let mut radicands = Vec::new();
    for (_, value) in branches.iter().flatten() {
        cx.arena.visit(*value, &mut |_, node| {
            if let Node::Product(factors) = node {
                radicands.extend(factors.iter().filter(|(_, n)| !n.is_integer()).map(|(b, _)| *b));
            }
        });
    }
    let real =
        |e: Expr| !matches!(cx.zero.sign_of(cx.arena, e, cx.budget), Sign::Negative | Sign::NonPositive | Sign::Zero);
    Ok(radicands.into_iter().all(real))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::fixture::{rod, sleigh};
    use crate::model::Constraint;

    #[test]
    fn constraints_are_independent_where_each_takes_a_coordinate() {
        let (mut f, _) = rod(false);
        let mut model = f.model.clone();
        assert_eq!(are_independent(&mut f.cx(), &model), Ok(true));
        // The same once more, and one that no real point satisfies.
        let first = model.constraints[0].clone();
        model.constraints.push(Constraint { name: "again".into(), ..first.clone() });
        assert_eq!(are_independent(&mut f.cx(), &model), Ok(false));
        let squares: Vec<Expr> = model
            .coordinates
            .iter()
            .map(|q| q.jet(&mut f.arena, 0))
            .collect::<Vec<_>>()
            .into_iter()
            .map(|x| f.arena.pow(x, 2))
            .collect();
        let sum =
            f.arena.linear(&[(squares[0], Rational::ONE), (squares[1], Rational::ONE), (Arena::ONE, Rational::ONE)]);
        model.constraints = vec![Constraint { name: "nowhere".into(), f: sum }];
        assert_eq!(are_independent(&mut f.cx(), &model), Ok(false));
        let (mut f, ..) = sleigh();
        let model = f.model.clone();
        assert_eq!(are_independent(&mut f.cx(), &model), Ok(true));
    }
}
