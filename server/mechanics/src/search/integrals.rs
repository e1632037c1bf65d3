//! First integrals quadratic in the velocities: C = Kᵢⱼ(q) q̇ⁱ q̇ʲ + Bᵢ(q) q̇ⁱ + W(q).
//!
//! By degree in the velocities, with q̈ = a₀ + a₁ + a₂ as in `kinetic`, dC/dt = 0 says: K is a Killing tensor (degree 3);
//! ∂₍ᵢBⱼ₎ and K a₁ cancel (degree 2); ∂W/∂qⁱ = −2 Kᵢⱼ a₀ʲ − (B a₁)ᵢ, which is to be free of curl (degree 1); B a₀ = 0
//! (degree 0) [LL §48; Whittaker, Analytical Dynamics, §152]. All are linear in the coefficients of K and B. W is found by integration.
//! Products of integrals linear in the velocities, and the energy, are no news: these are taken out.

use super::kernel::{Halt, kernel};
use super::killing::{MAX_UNKNOWNS, combination, fields, functions, independent, quadratic_part, tensors};
use super::kinetic::{Kinetic, raise};
use super::primitive::{Ground, primitive};
use super::{Item, Origin, Scope};
use crate::claims;
use crate::context::Context;
use crate::lagrange::{jet_order, lagrangian};
use crate::model::Model;
use crate::symmetry::Generator;
use leastwise_algebra::{Arena, Expr, Node, Rational, Role, Stopped, Verdict};

/// The degree of B, where there are gyroscopic forces.
const GYROSCOPIC_DEGREE: u32 = 3;
/// Products of more linear integrals are not formed.
const MAX_LINEAR: usize = 24;

/// The integrals quadratic in the velocities that are no combinations of products of the linear ones among `points`, of
/// the quadratic ones among them, and of the energy; and why there may be others in the ansatz. Each is proved.
pub(super) fn integrals(
    cx: &mut Context<'_>,
    model: &Model,
    scope: &Scope,
    points: &[Item],
) -> Result<(Vec<Item>, Option<String>), Stopped> {
    if !scope.quadratic || model.coordinates.is_empty() {
        return Ok((Vec::new(), None));
    }
    match look(cx, model, scope, points) {
        Ok(found) => Ok(found),
        Err(Halt::Stopped(s)) => Err(s),
        Err(Halt::Unsolved(why)) => {
            Ok((Vec::new(), Some(format!("integrals quadratic in the velocities were not found: {why}"))))
        }
    }
}

fn look(
    cx: &mut Context<'_>,
    model: &Model,
    scope: &Scope,
    points: &[Item],
) -> Result<(Vec<Item>, Option<String>), Halt> {
    let kinetic = match Kinetic::new(cx, model)? {
        Ok(k) => k,
        Err(why) => return Ok((Vec::new(), Some(why))),
    };
    let fields = fields(cx, &kinetic, scope)?;
    let (tensors, mut incomplete) = tensors(cx, &kinetic, scope, &fields)?;
    let mut candidates = Vec::new();
    if !kinetic.gyroscopic.is_empty() {
        let list = functions(cx, &kinetic.positions, &scope.angles, GYROSCOPIC_DEGREE);
        if list.len() * kinetic.velocities.len() > MAX_UNKNOWNS {
            return Err(Halt::Unsolved("with gyroscopic forces there are too many unknown coefficients".into()));
        }
        for f in list {
            for i in 0..kinetic.velocities.len() {
                let value = cx.arena.mul(f, kinetic.velocities[i]);
                candidates.push(Candidate::new(cx, &kinetic, value, false)?);
            }
        }
    }
    let (mut linear, mut known) = (Vec::new(), vec![kinetic.energy]);
    for item in points {
        if jet_order(cx.arena, item.charge) != 1 {
            continue;
        }
        let second = quadratic_part(cx, &kinetic.velocities, item.charge)?;
        if second.iter().all(|&e| e == Arena::ZERO) { linear.push(item.charge) } else { known.push(item.charge) }
    }
    let at_rest = kinetic.velocities.iter().map(|&v| (v, Arena::ZERO)).collect();
    let potential = lagrangian(cx, model)?;
    let potential = cx.arena.substitute(potential, &at_rest, cx.budget)?;
    let degree = scope.degree + 2;
    let (positions, velocities, angles) = (&kinetic.positions, &kinetic.velocities, &scope.angles);
    let ground = Ground { model, positions, velocities, angles, potential, degree };
    let mut found = Vec::new();
    let no_closed_form = "the velocity-free part of a first integral exists, but no closed form was found";
    let more = if kinetic.gyroscopic.is_empty() {
        // Those that are known need not be found again.
        let new = independent(cx, &kinetic.velocities, 1, &linear, &fields)?;
        let fields: Vec<Expr> = new.into_iter().map(|k| fields[k]).collect();
        untouched(cx, &kinetic, &fields)?
    } else {
        solve(cx, &kinetic, &candidates)?
    };
    let values: Vec<Expr> = more.iter().map(|s| s.value).collect();
    for k in independent(cx, &kinetic.velocities, 1, &linear, &values)? {
        match primitive(cx, &ground, &more[k].slopes)? {
            Some(w) => found.push(symmetry(cx, model, &kinetic, values[k], w)?),
            None => incomplete = incomplete.or(Some(no_closed_form.into())),
        }
        linear.push(values[k]);
    }
    linear.truncate(MAX_LINEAR);
    for (k, &a) in linear.iter().enumerate() {
        for &b in &linear[k..] {
            known.push(cx.arena.mul(a, b));
        }
    }
    // Tensors of what is known are no part of the ansatz. The others come last, so that solutions without them are told
    // apart.
    for k in independent(cx, &kinetic.velocities, 2, &known, &tensors)? {
        candidates.push(Candidate::new(cx, &kinetic, tensors[k], true)?);
    }
    if candidates.len() > MAX_UNKNOWNS {
        return Err(Halt::Unsolved("there are too many unknown coefficients".into()));
    }
    for s in solve(cx, &kinetic, &candidates)?.into_iter().filter(|s| !s.linear) {
        match primitive(cx, &ground, &s.slopes)? {
            Some(w) => {
                let charge = textbook_multiple(cx, &kinetic, s.value, w)?;
                found.push(Item { charge, origin: Origin::Quadratic, known: false });
            }
            None => incomplete = incomplete.or(Some(no_closed_form.into())),
        }
    }
    let mut out = Vec::new();
    for item in found {
        match claims::examine(cx, model, Some(&kinetic.rows), item.charge)?.verdict {
            Ok(Verdict::Proved) => out.push(item),
            _ => {
                incomplete.get_or_insert("a first integral was found but not proved".into());
            }
        }
    }
    Ok((out, incomplete))
}

/// A term of the ansatz, with what it contributes to the conditions.
struct Candidate {
    /// Kᵢⱼ q̇ⁱ q̇ʲ or Bᵢ q̇ⁱ.
    value: Expr,
    /// Which of the two.
    tensor: bool,
    /// The contribution to ∂W/∂qⁱ.
    slopes: Vec<Expr>,
    /// The contributions to what is to vanish.
    conditions: Vec<Expr>,
}

impl Candidate {
    fn new(cx: &mut Context<'_>, kinetic: &Kinetic, value: Expr, tensor: bool) -> Result<Candidate, Stopped> {
        let (q, v) = (&kinetic.positions, &kinetic.velocities);
        let n = q.len();
        let mut gradient = Vec::new();
        for &v in v {
            gradient.push(cx.arena.partial(value, v, cx.budget)?);
        }
        let pushed = |cx: &mut Context<'_>, by: &[Expr]| {
            let list: Vec<_> = gradient.iter().zip(by).map(|(&g, &a)| (cx.arena.mul(g, a), Rational::ONE)).collect();
            cx.build(&list)
        };
        let at_rest = pushed(cx, &kinetic.rest)?;
        let gyroscopic = !kinetic.gyroscopic.is_empty();
        let turned = if gyroscopic { pushed(cx, &kinetic.gyroscopic)? } else { Arena::ZERO };
        let mut conditions = Vec::new();
        // The rate's part of degree 1 is minus that of W.
        let (first, second) = if tensor { (at_rest, turned) } else { (turned, Arena::ZERO) };
        let mut second = vec![(second, Rational::ONE)];
        if !tensor {
            conditions.push(at_rest);
            for i in 0..n {
                let d = cx.arena.partial(value, q[i], cx.budget)?;
                second.push((cx.arena.mul(d, v[i]), Rational::ONE));
                second.push((cx.arena.mul(gradient[i], kinetic.geodesic[i]), Rational::ONE));
            }
        } else if gyroscopic {
            conditions.push(Arena::ZERO);
        }
        let mut slopes = Vec::new();
        for &v in v {
            let d = cx.arena.partial(first, v, cx.budget)?;
            slopes.push(cx.arena.neg(d));
        }
        if gyroscopic {
            let second = cx.build(&second)?;
            conditions.extend(quadratic_part(cx, v, second)?);
        }
        for i in 0..n {
            for j in 0..i {
                let (a, b) =
                    (cx.arena.partial(slopes[i], q[j], cx.budget)?, cx.arena.partial(slopes[j], q[i], cx.budget)?);
                conditions.push(cx.arena.sub(a, b));
            }
        }
        Ok(Candidate { value, tensor, slopes, conditions })
    }
}

/// An integral without its part free of velocities.
#[derive(Clone)]
struct Solution {
    value: Expr,
    slopes: Vec<Expr>,
    linear: bool,
    /// Fewest terms first, then by the coordinates in the trace of K.
    order: (usize, Vec<usize>),
}

/// The combinations of the candidates that satisfy the conditions.
fn solve(cx: &mut Context<'_>, kinetic: &Kinetic, candidates: &[Candidate]) -> Result<Vec<Solution>, Halt> {
    let columns: Vec<Vec<Expr>> = candidates.iter().map(|c| c.conditions.clone()).collect();
    let values: Vec<Expr> = candidates.iter().map(|c| c.value).collect();
    let mut out = Vec::new();
    for c in kernel(cx, &columns)? {
        let value = combination(cx, &c, &values)?;
        let mut slopes = Vec::new();
        for i in 0..kinetic.positions.len() {
            let column: Vec<Expr> = candidates.iter().map(|c| c.slopes[i]).collect();
            slopes.push(combination(cx, &c, &column)?);
        }
        let linear = !c.iter().zip(candidates).any(|(&x, c)| c.tensor && x != Arena::ZERO);
        let trace = trace(cx, kinetic, value)?;
        let atoms = cx.arena.atoms(trace);
        let within = (0..kinetic.positions.len()).filter(|&i| atoms.contains(&kinetic.positions[i])).collect();
        let terms = c.iter().filter(|&&x| x != Arena::ZERO).count();
        out.push(Solution { value, slopes, linear, order: (terms, within) });
    }
    out.sort_by(|a, b| a.order.cmp(&b.order));
    Ok(out)
}

/// Σ M⁻¹ⁱʲ ∂²C/∂q̇ⁱ∂q̇ʲ, expanded.
fn trace(cx: &mut Context<'_>, kinetic: &Kinetic, value: Expr) -> Result<Expr, Stopped> {
    let mut parts = Vec::new();
    for (i, &v) in kinetic.velocities.iter().enumerate() {
        let slope = cx.arena.partial(value, v, cx.budget)?;
        for (j, &u) in kinetic.velocities.iter().enumerate() {
            let k = cx.arena.partial(slope, u, cx.budget)?;
            parts.push((cx.arena.mul(k, kinetic.inverse[i][j]), Rational::ONE));
        }
    }
    let sum = cx.build(&parts)?;
    cx.arena.expand(sum, cx.budget)
}

/// The integrals linear in the velocities among the Killing fields: those that no force acts on.
fn untouched(cx: &mut Context<'_>, kinetic: &Kinetic, fields: &[Expr]) -> Result<Vec<Solution>, Halt> {
    let (mut columns, mut out) = (Vec::new(), Vec::new());
    if !kinetic.gyroscopic.is_empty() {
        return Ok(out);
    }
    for &b in fields {
        let mut work = Vec::new();
        for (&v, &a) in kinetic.velocities.iter().zip(&kinetic.rest) {
            let slope = cx.arena.partial(b, v, cx.budget)?;
            work.push((cx.arena.mul(slope, a), Rational::ONE));
        }
        columns.push(vec![cx.build(&work)?]);
    }
    for c in kernel(cx, &columns)? {
        let value = combination(cx, &c, fields)?;
        let slopes = vec![Arena::ZERO; kinetic.positions.len()];
        out.push(Solution { value, slopes, linear: true, order: (0, Vec::new()) });
    }
    Ok(out)
}

/// An integral linear in the velocities as the charge of a point symmetry: ηⁱ = M⁻¹ B.
fn symmetry(cx: &mut Context<'_>, model: &Model, kinetic: &Kinetic, value: Expr, w: Expr) -> Result<Item, Stopped> {
    let whole = cx.arena.add(value, w);
    let mut scale = plain(cx, whole)?;
    scale = with_inertia(cx, kinetic, whole, scale)?;
    let mut charge = times(cx, whole, scale)?;
    let moved = |cx: &mut Context<'_>, charge: Expr| {
        let mut slopes = Vec::new();
        for &v in &kinetic.velocities {
            slopes.push(cx.arena.partial(charge, v, cx.budget)?);
        }
        let mut eta = raise(cx, &kinetic.inverse, &slopes)?;
        // Shifts and what stays often don't look it.
        let minus = cx.arena.number(Rational::MINUS_ONE);
        for e in &mut eta {
            for plain in [Arena::ZERO, Arena::ONE, minus] {
                if *e != plain && cx.vanishes(&[(*e, Rational::ONE), (plain, Rational::MINUS_ONE)]).is_proved() {
                    *e = plain;
                }
            }
        }
        Ok::<_, Stopped>(eta)
    };
    let mut eta = moved(cx, charge)?;
    // Forwards, and counter-clockwise: y → y + ε x in a plane.
    let mut telling = eta.iter().filter(|&&e| e != Arena::ZERO);
    if let Some(&telling) = if kinetic.flat { telling.next_back() } else { telling.next() } {
        let telling = cx.arena.expand(telling, cx.budget)?;
        if cx.arena.summands(telling).iter().all(|t| t.1.is_negative()) {
            let minus = cx.arena.number(Rational::MINUS_ONE);
            charge = times(cx, charge, minus)?;
            eta = moved(cx, charge)?;
        }
    }
    let generator = Generator { tau: Arena::ZERO, eta };
    // What L has more, such as A η, is a gauge term.
    let full = crate::symmetry::charge(cx, model, &generator)?;
    let gap = cx.arena.sub(full, charge);
    let gap = cx.arena.expand(gap, cx.budget)?;
    let mut gauge = None;
    if gap != Arena::ZERO && !cx.vanishes(&[(gap, Rational::ONE)]).is_proved() {
        let atoms = cx.arena.atoms(gap);
        if kinetic.positions.iter().any(|q| atoms.contains(q)) {
            gauge = Some(gap);
        } else {
            charge = full;
        }
    }
    Ok(Item { charge, origin: Origin::Symmetry { generator, gauge }, known: false })
}

/// The multiple of an integral that is printed in books: no parameter below a line or common to all terms, K of positive
/// trace, ½ before sums of squares of velocities.
fn textbook_multiple(cx: &mut Context<'_>, kinetic: &Kinetic, value: Expr, w: Expr) -> Result<Expr, Stopped> {
    let whole = cx.arena.add(value, w);
    let mut scale = plain(cx, whole)?;
    let trace = trace(cx, kinetic, value)?;
    let lead = if trace == Arena::ZERO { cx.arena.expand(value, cx.budget)? } else { trace };
    if cx.arena.summands(lead).first().is_some_and(|t| t.1.is_negative()) {
        scale = cx.arena.neg(scale);
    }
    let flat = cx.arena.expand(value, cx.budget)?;
    let squares = cx.arena.summands(flat).iter().all(|(t, _)| {
        let own = cx.arena.factors(*t);
        own.iter().all(|(b, n)| constant(cx, *b) || kinetic.velocities.contains(b) && n.to_i64() == Some(2))
    });
    scale = with_inertia(cx, kinetic, flat, scale)?;
    if squares {
        scale = cx.arena.scale(scale, &Rational::HALF);
    }
    let (value, w) = (times(cx, value, scale)?, times(cx, w, scale)?);
    Ok(cx.arena.add(value, w))
}

/// Where there is no mass in the multiple: times the mass, as an energy or a product of a momentum and a velocity.
fn with_inertia(cx: &mut Context<'_>, kinetic: &Kinetic, e: Expr, scale: Expr) -> Result<Expr, Stopped> {
    let scaled = times(cx, e, scale)?;
    let atoms = cx.arena.atoms(scaled);
    if kinetic.inertia.iter().any(|m| atoms.contains(&m.0)) {
        return Ok(scale);
    }
    let inertia = cx.arena.monomial(&kinetic.inertia);
    Ok(cx.arena.mul(scale, inertia))
}

/// A product, summand by summand: factored terms stay factored, and parameters cancel.
pub(super) fn times(cx: &mut Context<'_>, e: Expr, scale: Expr) -> Result<Expr, Stopped> {
    let mut out = Vec::new();
    for (term, c) in cx.arena.summands(e) {
        out.push((cx.arena.mul(term, scale), c));
    }
    cx.build(&out)
}

/// A factor that takes parameters from below lines and those common to all terms, and makes the numbers before
/// velocities whole.
pub(super) fn plain(cx: &mut Context<'_>, whole: Expr) -> Result<Expr, Stopped> {
    let flat = cx.arena.expand(whole, cx.budget)?;
    let terms = cx.arena.summands(flat);
    let mut factors: Vec<(Expr, Rational)> = Vec::new();
    let mut content = Rational::ZERO;
    for (k, (term, c)) in terms.iter().enumerate() {
        if jet_order(cx.arena, *term) > 0 {
            content = content.content(c);
        }
        let own = cx.arena.factors(*term);
        for (base, n) in &own {
            if !factors.iter().any(|f| f.0 == *base) {
                // What an earlier term lacks is there with exponent 0.
                let least = if k == 0 || n.is_negative() { n.clone() } else { Rational::ZERO };
                factors.push((*base, least));
            }
        }
        for (base, least) in &mut factors {
            let n = own.iter().find(|f| f.0 == *base).map_or(Rational::ZERO, |f| f.1.clone());
            if n.sub(least).is_negative() {
                *least = n;
            }
        }
    }
    factors.retain(|(base, n)| n.is_integer() && constant(cx, *base));
    for f in &mut factors {
        f.1 = f.1.neg();
    }
    let common = cx.arena.monomial(&factors);
    let number = content.recip().map_or(Rational::ONE, |r| r.abs());
    Ok(cx.arena.scale(common, &number))
}

/// Whether an expression contains parameters and numbers only.
fn constant(cx: &Context<'_>, e: Expr) -> bool {
    cx.arena.atoms(e).into_iter().all(|a| match cx.arena.node(a) {
        Node::Symbol(s) => cx.arena.info(*s).role == Role::Parameter,
        Node::Jet(..) | Node::Member { .. } => false,
        _ => true,
    })
}

#[cfg(test)]
mod tests;
