//! Idle terms: parts of L that are total time derivatives, and so change no equation of motion.
//!
//! The Euler operator of a function vanishes identically exactly where it is dF/dt, locally [O §4.2, Theorem 4.7; LL §2].
//! What is idle may be left out: the equations stay the same, which is proved; momenta and the energy function may change,
//! by ∂F/∂q and −∂F/∂t.

use crate::blame::blame;
use crate::context::{Context, Parts};
use crate::forms::{aligned, derivative};
use crate::gauge::gauge_term;
use crate::lagrange::{depends_on_velocities, residual, signed_parts};
use crate::model::Model;
use crate::symmetry::euler_vanishes;
use leastwise_algebra::{Arena, Expr, Node, Rational, Reason, Role, Stopped, Verdict};

/// Parts that are idle together and not in smaller groups.
#[derive(Clone, PartialEq, Debug)]
pub struct Idle {
    /// Term and part, by number.
    pub parts: Vec<(usize, usize)>,
    /// F with dF/dt = their sum in L, signs included; `None` where it exists, locally, but no closed form was found.
    pub gauge: Option<Expr>,
    /// Whether the sum is zero: the parts cancel each other.
    pub cancel: bool,
}

/// More parts than this are looked at one by one, not in groups.
const MAX_COMPARED: usize = 256;

/// What a part is, as far as that decides whether it can be idle.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) enum Shape {
    /// Free of coordinates and velocities.
    Mute,
    /// Free of velocities.
    Position,
    /// Linear in the velocities; whether its coefficients depend on time or on inputs.
    Affine(bool),
    /// Not linear in the velocities.
    Busy,
}

/// The idle parts, each group proved. dF/dt = ∂F/∂t + Σ q̇ ∂F/∂q is linear in the velocities, so most parts are left out for
/// their form, which is remembered; parts that are not linear in them are told where they cancel each other as they
/// stand. Costs the residuals of the rest and the elimination of their residues.
pub fn idle(cx: &mut Context<'_>, model: &Model) -> Result<Vec<Idle>, Stopped> {
    let signed = signed_parts(model);
    let mut places: Vec<(usize, usize)> =
        signed.iter().enumerate().flat_map(|(t, p)| (0..p.len()).map(move |k| (t, k))).collect();
    let mut flat: Parts = signed.concat();
    let chosen = chosen(cx, model, &flat)?;
    if !chosen.contains(&true) {
        return Ok(Vec::new());
    }
    let mut keep = chosen.iter();
    places.retain(|_| *keep.next().unwrap_or(&false));
    let mut keep = chosen.iter();
    flat.retain(|_| *keep.next().unwrap_or(&false));
    let mut rows: Vec<Vec<Expr>> = vec![Vec::new(); flat.len()];
    for q in &model.coordinates {
        let mut lists = Vec::new();
        for part in &flat {
            lists.push(residual(cx, &vec![part.clone()], q)?);
        }
        if lists.iter().all(Vec::is_empty) {
            continue;
        }
        for (row, more) in rows.iter_mut().zip(aligned(cx.arena, q, &lists, cx.budget)?.1) {
            row.extend(more);
        }
    }
    let mut groups: Vec<Vec<usize>> = Vec::new();
    let mut busy = Vec::new();
    for (k, row) in rows.iter().enumerate() {
        let lists: Vec<Parts> = row.iter().filter(|&&e| e != Arena::ZERO).map(|&e| vec![(e, Rational::ONE)]).collect();
        if cx.all_vanish(&lists).is_proved() { groups.push(vec![k]) } else { busy.push(k) }
    }
    if busy.len() <= MAX_COMPARED && busy.len() > 1 {
        let summands: Vec<Vec<Expr>> = busy.iter().map(|&k| rows[k].clone()).collect();
        let length = (busy.len() + 4).div_ceil(summands[0].len().max(1)).max(2);
        match cx.zero.residue_vectors(cx.arena, &summands, length, cx.budget) {
            Ok(residues) => {
                let culprits = blame(&residues).culprits;
                let rest: Vec<usize> = (0..busy.len()).filter(|k| !culprits.contains(k)).collect();
                if !rest.is_empty() {
                    let kept: Vec<Vec<Expr>> = rest.iter().map(|&k| summands[k].clone()).collect();
                    let parts = match cx.zero.residue_vectors(cx.arena, &kept, length, cx.budget) {
                        Ok(r) => r.components(),
                        Err(_) => vec![(0..rest.len()).collect()],
                    };
                    groups.extend(parts.into_iter().map(|g| g.into_iter().map(|k| busy[rest[k]]).collect()));
                }
            }
            Err(Reason::TooLarge) => return Err(Stopped::TooLarge),
            Err(Reason::Cancelled) => return Err(Stopped::Cancelled),
            Err(_) => {}
        }
    }
    let mut out = Vec::new();
    for group in groups {
        let sum: Parts = group.iter().map(|&k| flat[k].clone()).collect();
        let cancel = cx.vanishes(&sum).is_proved();
        if !cancel && !matches!(euler_vanishes(cx, model, &sum)?, Verdict::Proved) {
            continue;
        }
        let gauge = if cancel { Some(Arena::ZERO) } else { gauge_term(cx, model, &sum)? };
        out.push(Idle { parts: group.into_iter().map(|k| places[k]).collect(), gauge, cancel });
    }
    out.sort_by(|a, b| a.parts.cmp(&b.parts));
    Ok(out)
}

/// Which parts may be idle, alone or with others.
fn chosen(cx: &mut Context<'_>, model: &Model, flat: &Parts) -> Result<Vec<bool>, Stopped> {
    let mut shapes = Vec::with_capacity(flat.len());
    let mut alike: hashbrown::HashMap<Expr, Vec<(usize, Rational)>> = hashbrown::HashMap::new();
    for (k, (e, c)) in flat.iter().enumerate() {
        shapes.push(shape(cx, model, *e)?);
        let (number, base) = cx.arena.split_coefficient(*e);
        alike.entry(base).or_default().push((k, number.mul(c)));
    }
    // Without a clock in what is linear in the velocities F = U(q) + G(t), and forces from positions stay alone.
    let driven = shapes.contains(&Shape::Affine(true));
    let mut out: Vec<bool> = shapes
        .iter()
        .map(|s| match s {
            Shape::Mute | Shape::Affine(_) => true,
            Shape::Position => driven,
            Shape::Busy => false,
        })
        .collect();
    for group in alike.into_values().filter(|g| g.len() > 1) {
        let sum = group.iter().fold(Rational::ZERO, |s, (_, c)| s.add(c));
        if sum.is_zero() {
            for (k, _) in group {
                out[k] = true;
            }
        }
    }
    Ok(out)
}

fn shape(cx: &mut Context<'_>, model: &Model, e: Expr) -> Result<Shape, Stopped> {
    if let Some(&known) = cx.memory.shapes.get(&e) {
        return Ok(known);
    }
    let (mut placed, mut timely) = (false, false);
    for a in cx.arena.atoms(e) {
        let symbol = match *cx.arena.node(a) {
            Node::Symbol(s) | Node::Jet(s, _) => s,
            Node::Member { family, .. } => family,
            _ => continue,
        };
        match cx.arena.info(symbol).role {
            Role::Coordinate => placed = true,
            Role::Time | Role::Input => timely = true,
            _ => {}
        }
    }
    let mut found = if !placed {
        Shape::Mute
    } else if depends_on_velocities(cx.arena, e) {
        Shape::Affine(timely)
    } else {
        Shape::Position
    };
    if matches!(found, Shape::Affine(_)) {
        for q in &model.coordinates {
            let momentum = derivative(cx.arena, e, q, 1, cx.budget)?;
            if momentum.iter().any(|f| depends_on_velocities(cx.arena, f.expr)) {
                found = Shape::Busy;
                break;
            }
        }
    }
    cx.memory.shapes.insert(e, found);
    Ok(found)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::fixture::{Fixture, kepler};
    use crate::model::TermKind;
    use leastwise_algebra::Function;

    /// Term and part of each in a group, and F.
    type Group<'a> = (&'a [(usize, usize)], Option<Expr>);

    fn check(f: &mut Fixture, want: &[Group<'_>]) {
        let model = f.model.clone();
        let got = idle(&mut f.cx(), &model).unwrap();
        let got: Vec<Group<'_>> = got.iter().map(|i| (i.parts.as_slice(), i.gauge)).collect();
        assert_eq!(got, want);
    }

    #[test]
    fn a_uniform_potential_of_velocities_is_idle() {
        // b x ẋ is d(½ b x²)/dt; b x ẏ is a magnetic field and is not idle [LL §2].
        let mut f = kepler();
        check(&mut f, &[]);
        let q: Vec<(Expr, Expr)> = {
            let list = f.model.coordinates.clone();
            list.iter().map(|q| (q.jet(&mut f.arena, 0), q.jet(&mut f.arena, 1))).collect()
        };
        let b = f.parameter("b");
        let (xx, xy) = (f.arena.product(&[b, q[0].0, q[0].1]), f.arena.product(&[b, q[0].0, q[1].1]));
        f.term(TermKind::Lagrangian, "mixed", &[xx, xy]);
        let x2 = f.arena.pow(q[0].0, 2);
        let half = f.arena.mul(b, x2);
        let half = f.arena.scale(half, &leastwise_algebra::Rational::HALF);
        check(&mut f, &[(&[(2, 0)], Some(half))]);
        // b y ẋ makes a derivative of it, as part of another term.
        let yx = f.arena.product(&[b, q[1].0, q[0].1]);
        f.term(TermKind::Lagrangian, "completed", &[yx]);
        let bxy = f.arena.product(&[b, q[0].0, q[1].0]);
        check(&mut f, &[(&[(2, 0)], Some(half)), (&[(2, 1), (3, 0)], Some(bxy))]);
        // With the other sign it is a field of twice the strength.
        f.model.terms[3].kind = TermKind::Potential;
        check(&mut f, &[(&[(2, 0)], Some(half))]);
    }

    #[test]
    fn what_depends_on_time_alone_is_idle() {
        // A drive a cos t beside one that acts, a x cos t.
        let mut f = kepler();
        let t = f.time();
        let a = f.parameter("a");
        let (c, s) = (f.arena.call(Function::Cos, &[t]), f.arena.call(Function::Sin, &[t]));
        let x = f.model.coordinates[0].clone().jet(&mut f.arena, 0);
        let (alone, acting) = (f.arena.mul(a, c), f.arena.product(&[a, x, c]));
        f.term(TermKind::Potential, "drive", &[alone, acting]);
        let want = f.arena.mul(a, s);
        let want = f.arena.neg(want);
        check(&mut f, &[(&[(2, 0)], Some(want))]);
    }

    #[test]
    fn a_force_from_a_clock_is_seen_with_its_counterpart() {
        // a x ẋ t is no derivative, ½ a x² beside it makes it d(½ a x² t)/dt; the other way round it does not.
        let mut f = kepler();
        let x = f.model.coordinates[0].clone();
        let (x, v) = (x.jet(&mut f.arena, 0), x.jet(&mut f.arena, 1));
        let (t, a) = (f.time(), f.parameter("a"));
        let moving = f.arena.product(&[a, x, v, t]);
        let at = f.half_square(a, x);
        f.term(TermKind::Lagrangian, "moving", &[moving]);
        f.term(TermKind::Lagrangian, "at", &[at]);
        let want = f.arena.mul(at, t);
        check(&mut f, &[(&[(2, 0), (3, 0)], Some(want))]);
        f.model.terms[3].kind = TermKind::Potential;
        check(&mut f, &[]);
    }

    #[test]
    fn kinetic_parts_are_told_only_where_they_cancel() {
        let mut f = kepler();
        let part = f.model.terms[0].parts[0];
        let less = f.arena.neg(part);
        f.term(TermKind::Lagrangian, "less", &[less]);
        check(&mut f, &[(&[(0, 0), (2, 0)], Some(Arena::ZERO))]);
    }

    #[test]
    fn what_cancels_is_said() {
        let mut f = kepler();
        let x = f.model.coordinates[0].clone().jet(&mut f.arena, 0);
        let (k, x2) = (f.parameter("k"), f.arena.pow(x, 4));
        let u = f.arena.mul(k, x2);
        f.term(TermKind::Potential, "spring", &[u]);
        f.term(TermKind::Lagrangian, "its counterpart", &[u]);
        let model = f.model.clone();
        let got = idle(&mut f.cx(), &model).unwrap();
        assert_eq!(got, [Idle { parts: vec![(2, 0), (3, 0)], gauge: Some(Arena::ZERO), cancel: true }]);
    }
}
