//! Where a constant of the motion comes from.
//!
//! A constant C linear in the velocities belongs to the generator ηⁱ = (M⁻¹)ⁱʲ ∂C/∂q̇ʲ, τ = 0; it is a symmetry of L up to a
//! gauge term F = p·η − C where V = dF/dt [O §5.3]. One that is quadratic belongs to a hidden symmetry.

use crate::claims::is_multiple;
use crate::context::{Context, Parts};
use crate::lagrange::{depends_on_velocities, jet_order, signed_parts};
use crate::mass::{MassRows, blocks, coasting, dense, right_sides};
use crate::model::Model;
use crate::symmetry::{self, Generator};
use leastwise_algebra::{Arena, Expr, Rational, Role, Stopped};

/// What a constant of the motion comes from.
#[derive(Clone, PartialEq, Debug)]
pub enum Source {
    /// A point symmetry of L, perhaps up to a gauge term.
    Symmetry(Generator),
    /// L does not depend on the time.
    Energy,
    /// A combination of known constants and their products.
    Composed,
    /// No point symmetry: polynomial in the velocities of this degree.
    Hidden(u32),
    /// Not told.
    Unknown,
}

/// Systems of more coupled coordinates are not solved in closed form.
const MAX_BLOCK: usize = 3;
/// Polynomials in the velocities of a higher degree are not told.
const MAX_DEGREE: u32 = 4;
/// Larger expressions are not looked into.
const MAX_NODES: usize = 4000;

/// Where a proved constant comes from. `known` are constants of the motion with their sources; `energy` is the energy
/// function.
pub fn source(
    cx: &mut Context<'_>,
    model: &Model,
    rows: Option<&MassRows>,
    energy: Expr,
    known: &[(Expr, Source)],
    claim: Expr,
) -> Result<Source, Stopped> {
    if is_multiple(cx, claim, energy) {
        return Ok(Source::Energy);
    }
    for (charge, source) in known {
        if is_multiple(cx, claim, *charge) {
            return Ok(source.clone());
        }
    }
    let Some(rows) = rows.filter(|_| model.constraints.is_empty() && cx.arena.size(claim) <= MAX_NODES) else {
        return Ok(Source::Unknown);
    };
    if jet_order(cx.arena, claim) > 1 {
        return Ok(Source::Unknown);
    }
    match degree(cx, model, claim, MAX_DEGREE)? {
        Some(0) | None => Ok(Source::Unknown),
        Some(1) => Ok(from_symmetry(cx, model, rows, claim)?.map_or(Source::Unknown, Source::Symmetry)),
        Some(d) => {
            let mut constants: Vec<Expr> = known.iter().map(|k| k.0).collect();
            constants.push(energy);
            Ok(if is_composed(cx, claim, &constants)? { Source::Composed } else { Source::Hidden(d) })
        }
    }
}

/// The degree of a polynomial in the velocities, from its derivatives in an arbitrary direction; `None` where it is none
/// up to `most`.
pub(super) fn degree(cx: &mut Context<'_>, model: &Model, e: Expr, most: u32) -> Result<Option<u32>, Stopped> {
    let mut ways = Vec::new();
    for (i, q) in model.coordinates.iter().enumerate() {
        let w = cx.arena.symbol(&format!("direction {i}"), None, Role::Parameter);
        ways.push((q.jet(cx.arena, 1), cx.arena.sym(w)));
    }
    let mut at = e;
    for d in 0..=most {
        let mut slope = Vec::new();
        for &(v, w) in &ways {
            let p = cx.arena.partial(at, v, cx.budget)?;
            slope.push(cx.arena.mul(w, p));
        }
        at = cx.arena.sum(&slope);
        if cx.vanishes(&[(at, Rational::ONE)]).is_proved() {
            return Ok(Some(d));
        }
    }
    Ok(None)
}

/// The symmetry of L whose charge is a constant that is linear in the velocities, proved.
fn from_symmetry(
    cx: &mut Context<'_>,
    model: &Model,
    rows: &MassRows,
    claim: Expr,
) -> Result<Option<Generator>, Stopped> {
    let mut slopes = Vec::new();
    for q in &model.coordinates {
        let v = q.jet(cx.arena, 1);
        slopes.push(cx.arena.partial(claim, v, cx.budget)?);
    }
    let Some(eta) = solved(cx, rows, &slopes)? else { return Ok(None) };
    if eta.iter().any(|&e| depends_on_velocities(cx.arena, e)) {
        return Ok(None);
    }
    let g = Generator { tau: Arena::ZERO, eta };
    let found = symmetry::examine(cx, model, g)?;
    // dF/dt = V for F = p·η − C.
    let charge = symmetry::charge(cx, model, &found.generator)?;
    let f = cx.arena.sub(charge, claim);
    let mut gap: Parts = found.variations.concat();
    gap.push((cx.arena.total(f, cx.budget)?, Rational::MINUS_ONE));
    Ok(cx.vanishes(&gap).is_proved().then_some(found.generator))
}

/// M⁻¹ s, block by block; `None` where a block is too large.
fn solved(cx: &mut Context<'_>, rows: &MassRows, s: &[Expr]) -> Result<Option<Vec<Expr>>, Stopped> {
    let block = blocks(rows);
    let mut out = vec![Arena::ZERO; s.len()];
    for b in 0..s.len() {
        let of: Vec<usize> = (0..s.len()).filter(|&i| block[i] == b).collect();
        if of.iter().all(|&i| s[i] == Arena::ZERO) {
            continue;
        }
        if of.len() > MAX_BLOCK {
            return Ok(None);
        }
        let mut m = dense(cx, rows, &of)?;
        let whole = determinant(cx.arena, &m);
        if cx.vanishes(&[(whole, Rational::ONE)]).is_proved() {
            return Ok(None);
        }
        for (k, &i) in of.iter().enumerate() {
            // Cramer's rule.
            let column: Vec<Expr> = m.iter().map(|r| r[k]).collect();
            for (row, &j) in m.iter_mut().zip(&of) {
                row[k] = s[j];
            }
            let d = determinant(cx.arena, &m);
            out[i] = simplified(cx, d, whole)?;
            for (row, c) in m.iter_mut().zip(column) {
                row[k] = c;
            }
        }
    }
    Ok(Some(out))
}

/// d / whole, a number where it is one.
fn simplified(cx: &mut Context<'_>, d: Expr, whole: Expr) -> Result<Expr, Stopped> {
    if cx.vanishes(&[(d, Rational::ONE)]).is_proved() {
        return Ok(Arena::ZERO);
    }
    for c in [Rational::ONE, Rational::MINUS_ONE] {
        if cx.vanishes(&[(d, Rational::ONE), (whole, c.neg())]).is_proved() {
            return Ok(cx.arena.number(c));
        }
    }
    let wide = cx.arena.expand(d, cx.budget)?;
    let d = if cx.arena.size(wide) < cx.arena.size(d) { wide } else { d };
    Ok(cx.arena.div(d, whole))
}

fn determinant(arena: &mut Arena, m: &[Vec<Expr>]) -> Expr {
    let mut minor = |a: usize, b: usize, c: usize, d: usize| {
        let (p, q) = (arena.mul(m[a][c], m[b][d]), arena.mul(m[a][d], m[b][c]));
        arena.sub(p, q)
    };
    match m.len() {
        0 => Arena::ONE,
        1 => m[0][0],
        2 => minor(0, 1, 0, 1),
        _ => {
            let minors = [minor(1, 2, 1, 2), minor(1, 2, 0, 2), minor(1, 2, 0, 1)];
            let p: Vec<Expr> = (0..3).map(|k| arena.mul(m[0][k], minors[k])).collect();
            let first = arena.sub(p[0], p[1]);
            arena.add(first, p[2])
        }
    }
}

/// The rate of a quantity with the accelerations put in; `None` where they have no short closed form.
pub fn rate_on_motions(
    cx: &mut Context<'_>,
    model: &Model,
    rows: &MassRows,
    claim: &Parts,
) -> Result<Option<Expr>, Stopped> {
    let claim = cx.build(claim)?;
    let block = blocks(rows);
    let mut slopes = Vec::new();
    for q in &model.coordinates {
        let v = q.jet(cx.arena, 1);
        slopes.push(cx.arena.partial(claim, v, cx.budget)?);
    }
    let needed = |i: usize| (0..slopes.len()).any(|j| block[j] == block[i] && slopes[j] != Arena::ZERO);
    let of: Vec<usize> = (0..slopes.len()).filter(|&i| needed(i)).collect();
    let mut forces = vec![Arena::ZERO; slopes.len()];
    for (&i, parts) in of.iter().zip(right_sides(cx, model, &of)?) {
        forces[i] = cx.build(&parts)?;
    }
    let Some(a) = solved(cx, rows, &forces)? else { return Ok(None) };
    let mut parts = vec![coasting(cx, claim)?];
    for (&s, &a) in slopes.iter().zip(&a) {
        parts.push(cx.arena.mul(s, a));
    }
    let rate = cx.arena.sum(&parts);
    if cx.arena.size(rate) > MAX_NODES {
        return Ok(None);
    }
    Ok(Some(cx.arena.expand(rate, cx.budget)?))
}

/// Whether a constant is a combination, with numbers, of known ones and of their products in pairs.
fn is_composed(cx: &mut Context<'_>, claim: Expr, known: &[Expr]) -> Result<bool, Stopped> {
    const MOST: usize = 8;
    let mut list = vec![Arena::ONE];
    for (i, &a) in known.iter().enumerate().take(MOST) {
        list.push(a);
        for &b in &known[i..known.len().min(MOST)] {
            list.push(cx.arena.mul(a, b));
        }
    }
    // Common factors such as a mass stand beside the products.
    let scales: Vec<Expr> = cx.arena.atoms(claim).into_iter().filter(|&a| is_parameter(cx.arena, a)).take(2).collect();
    for &m in &scales {
        for e in list.clone().into_iter().take(MOST * 4) {
            list.push(cx.arena.mul(m, e));
            list.push(cx.arena.div(e, m));
        }
    }
    list.push(claim);
    let rows: Vec<Vec<Expr>> = list.iter().map(|&e| vec![e]).collect();
    let Ok(residues) = cx.zero.residue_vectors(cx.arena, &rows, list.len() + 4, cx.budget) else { return Ok(false) };
    let Some(relations) = residues.relations() else { return Ok(false) };
    let last = list.len() - 1;
    for r in relations.iter().filter(|r| !r[last].is_zero()) {
        let parts: Parts = list.iter().copied().zip(r.iter().cloned()).filter(|p| !p.1.is_zero()).collect();
        if cx.vanishes(&parts).is_proved() {
            return Ok(true);
        }
    }
    Ok(false)
}

fn is_parameter(arena: &Arena, e: Expr) -> bool {
    matches!(arena.node(e), leastwise_algebra::Node::Symbol(s) if arena.info(*s).role == Role::Parameter)
}

/// The momenta of cyclic coordinates with the shifts that they come from.
pub fn momenta(cx: &mut Context<'_>, model: &Model, cyclic: &[bool]) -> Result<Vec<(Expr, Source)>, Stopped> {
    let mut out = Vec::new();
    let parts: Parts = signed_parts(model).concat();
    if parts.is_empty() || model.coordinates.iter().any(|q| q.members.is_some()) {
        return Ok(out);
    }
    for (i, _) in cyclic.iter().enumerate().filter(|(_, c)| **c) {
        let g = symmetry::shift(model, i);
        out.push((symmetry::charge(cx, model, &g)?, Source::Symmetry(g)));
    }
    Ok(out)
}
