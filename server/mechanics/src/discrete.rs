//! Discrete symmetries: reversal of time, reflections, half turns.
//!
//! A map of curves σ leaves the equations as they are where L∘σ − L is zero or a total time derivative dF/dt. Reversal of
//! time takes q(t) to q(−t): t ↦ −t, q⁽ⁿ⁾ ↦ (−1)ⁿ q⁽ⁿ⁾ [LL §5; GPS §13.7 for L up to dF/dt]. A reflection takes q⁽ⁿ⁾ to
//! −q⁽ⁿ⁾, a half turn an angle q to q + π.
//!
//! Forces beside L must be taken along: 𝒬ᵢ∘σ = ± 𝒬ᵢ with the sign that qⁱ gets; constraints to ± themselves.

use crate::blame::blame;
use crate::context::{Context, Parts};
use crate::forms::aligned;
use crate::gauge::gauge_term;
use crate::lagrange::{generalised, questions, residual, signed_parts};
use crate::model::{Coordinate, Model};
use crate::symmetry::euler_vanishes;
use leastwise_algebra::{Expr, Node, Rational, Reason, Role, Stopped, Verdict};

/// What is done to curves.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Discrete {
    /// t → −t.
    TimeReversal,
    /// One coordinate, or all members of a large family, changes sign.
    Reflection(usize),
    /// All coordinates change sign.
    Inversion,
    /// An angle q → q + π.
    HalfTurn(usize),
    /// t → −t, and one coordinate changes sign: as in a magnetic field.
    ReversalWithReflection(usize),
}

/// Whether it leaves the equations of motion as they are.
#[derive(Clone, PartialEq, Debug)]
pub enum Holds {
    /// L is the same.
    Exactly,
    /// L changes by a total time derivative: F, where a closed form was found.
    UpToDerivative(Option<Expr>),
    /// It does not.
    Broken,
    /// Not decided.
    Undecided(String),
}

/// One discrete symmetry's answer.
#[derive(Clone, PartialEq, Debug)]
pub struct DiscreteAnswer {
    /// What is done.
    pub kind: Discrete,
    /// The verdict on L.
    pub lagrangian: Holds,
    /// Whether forces and constraints are taken along; `Proved` where there are none.
    pub rest: Verdict,
    /// Terms, by number, without whose change of L the rest would change by a total time derivative at most; empty where L
    /// is not broken.
    pub broken_by: Vec<usize>,
    /// Forces, by number, that are not taken along by themselves; empty where `rest` is not refuted.
    pub forces: Vec<usize>,
}

/// The discrete symmetries of a model: reversal of time, each reflection, all at once, half turns of those `angles` (numbers
/// of coordinates) on which L depends, and reversal with one reflection where neither holds by itself. Costs one
/// substitution into each part, and a zero test, for each.
pub fn discrete(cx: &mut Context<'_>, model: &Model, angles: &[usize]) -> Result<Vec<DiscreteAnswer>, Stopped> {
    let n = model.coordinates.len();
    let mut kinds = vec![Discrete::TimeReversal];
    kinds.extend((0..n).map(Discrete::Reflection));
    if n > 1 {
        kinds.push(Discrete::Inversion);
    }
    for &i in angles.iter().filter(|&&i| i < n) {
        let q = model.coordinates[i].clone();
        let all: Parts = signed_parts(model).concat();
        let force = crate::lagrange::force(cx, &all, &q)?;
        let lists = questions(cx, &q, &force)?;
        if !cx.all_vanish(&lists).is_proved() {
            kinds.push(Discrete::HalfTurn(i));
        }
    }
    let mut out = Vec::new();
    for kind in kinds {
        out.push(examine(cx, model, kind)?);
    }
    if out.first().is_some_and(|a| a.lagrangian == Holds::Broken) {
        for i in 0..n {
            if out[1 + i].lagrangian == Holds::Broken {
                let answer = examine(cx, model, Discrete::ReversalWithReflection(i))?;
                if answer.lagrangian != Holds::Broken {
                    out.push(answer);
                }
            }
        }
    }
    Ok(out)
}

/// Decides one.
pub fn examine(cx: &mut Context<'_>, model: &Model, kind: Discrete) -> Result<DiscreteAnswer, Stopped> {
    let mut gaps: Vec<Parts> = Vec::new();
    let mut driven = false;
    for parts in &signed_parts(model) {
        let mut gap = Parts::new();
        for (part, c) in parts {
            let (image, input) = mapped(cx, model, kind, *part)?;
            driven |= input;
            if image != *part {
                gap.push((image, c.clone()));
                gap.push((*part, c.neg()));
            }
        }
        gaps.push(gap);
    }
    let gap: Parts = gaps.concat();
    let lagrangian = if driven {
        Holds::Undecided("an input drives it, and its own behaviour under t → −t is not known".into())
    } else {
        match cx.vanishes(&gap) {
            Verdict::Proved => Holds::Exactly,
            _ => match euler_vanishes(cx, model, &gap)? {
                Verdict::Proved => Holds::UpToDerivative(gauge_term(cx, model, &gap)?),
                Verdict::Refuted(_) => Holds::Broken,
                Verdict::Undecided(r) => Holds::Undecided(r.to_string()),
            },
        }
    };
    let broken_by = if lagrangian == Holds::Broken { breakers(cx, model, &gaps)? } else { Vec::new() };
    let all: Vec<usize> = (0..model.forces.len()).collect();
    let rest = rest(cx, model, kind, &all)?;
    let mut forces = Vec::new();
    if rest.is_refuted() {
        for k in all {
            if !self::rest(cx, model, kind, &[k])?.is_proved() {
                forces.push(k);
            }
        }
    }
    Ok(DiscreteAnswer { kind, lagrangian, rest, broken_by, forces })
}

/// Whether L itself, the forces and the constraints are kept: one zero test and no blame, for where only that is told.
pub fn keeps(cx: &mut Context<'_>, model: &Model, kind: Discrete) -> Result<bool, Stopped> {
    let mut gap = Parts::new();
    for (part, c) in signed_parts(model).concat() {
        let (image, driven) = mapped(cx, model, kind, part)?;
        if driven {
            return Ok(false);
        }
        if image != part {
            gap.push((image, c.clone()));
            gap.push((part, c.neg()));
        }
    }
    if !cx.vanishes(&gap).is_proved() {
        return Ok(false);
    }
    if model.forces.is_empty() && model.constraints.is_empty() {
        return Ok(true);
    }
    let all: Vec<usize> = (0..model.forces.len()).collect();
    Ok(rest(cx, model, kind, &all)?.is_proved())
}

/// A smallest set of terms to blame, the latest where there are several [see `blame`].
fn breakers(cx: &mut Context<'_>, model: &Model, gaps: &[Parts]) -> Result<Vec<usize>, Stopped> {
    let mut guilty = Vec::new();
    for (t, gap) in gaps.iter().enumerate() {
        if !gap.is_empty() && !euler_vanishes(cx, model, gap)?.is_proved() {
            guilty.push(t);
        }
    }
    if guilty.len() < 2 {
        return Ok(guilty);
    }
    let mut rows: Vec<Vec<Expr>> = vec![Vec::new(); guilty.len()];
    for q in &model.coordinates {
        let mut lists = Vec::new();
        for &t in &guilty {
            lists.push(residual(cx, &gaps[t], q)?);
        }
        for (row, more) in rows.iter_mut().zip(aligned(cx.arena, q, &lists, cx.budget)?.1) {
            row.extend(more);
        }
    }
    let length = (guilty.len() + 4).div_ceil(rows[0].len().max(1)).max(2);
    match cx.zero.residue_vectors(cx.arena, &rows, length, cx.budget) {
        Ok(residues) => Ok(blame(&residues).culprits.into_iter().map(|k| guilty[k]).collect()),
        Err(Reason::TooLarge) => Err(Stopped::TooLarge),
        Err(Reason::Cancelled) => Err(Stopped::Cancelled),
        Err(_) => Ok(guilty),
    }
}

/// Whether some forces and all constraints are taken along.
fn rest(cx: &mut Context<'_>, model: &Model, kind: Discrete, forces: &[usize]) -> Result<Verdict, Stopped> {
    let mut lists: Vec<Parts> = Vec::new();
    for (i, q) in model.coordinates.iter().enumerate() {
        let sign = if flips(kind, i) { Rational::ONE } else { Rational::MINUS_ONE };
        let mut forms = Vec::new();
        for &f in forces {
            forms.extend(generalised(cx, &model.forces[f], q)?);
        }
        for mut parts in questions(cx, q, &forms)? {
            let mut images = Parts::new();
            for (e, c) in &parts {
                images.push((mapped(cx, model, kind, *e)?.0, c.clone()));
            }
            for p in &mut parts {
                p.1 = p.1.mul(&sign);
            }
            images.extend(parts);
            lists.push(images);
        }
    }
    let mut verdict = cx.all_vanish(&lists);
    for c in &model.constraints {
        let (image, _) = mapped(cx, model, kind, c.f)?;
        let even = cx.vanishes(&[(image, Rational::ONE), (c.f, Rational::MINUS_ONE)]).is_proved();
        if !even && !cx.vanishes(&[(image, Rational::ONE), (c.f, Rational::ONE)]).is_proved() {
            // Other functions may have the same zeros.
            if verdict.is_proved() {
                verdict = Verdict::Undecided(Reason::Constraints);
            }
        }
    }
    Ok(verdict)
}

/// Whether a coordinate changes sign.
fn flips(kind: Discrete, i: usize) -> bool {
    match kind {
        Discrete::Reflection(k) | Discrete::ReversalWithReflection(k) => k == i,
        Discrete::Inversion => true,
        Discrete::TimeReversal | Discrete::HalfTurn(_) => false,
    }
}

/// The image of an expression, and whether an input's reversal would have to be known.
fn mapped(cx: &mut Context<'_>, model: &Model, kind: Discrete, e: Expr) -> Result<(Expr, bool), Stopped> {
    let reversed = matches!(kind, Discrete::TimeReversal | Discrete::ReversalWithReflection(_));
    let mut map = hashbrown::HashMap::new();
    let mut driven = false;
    for a in cx.arena.atoms(e) {
        let (symbol, order) = match *cx.arena.node(a) {
            Node::Symbol(s) => (s, 0),
            Node::Jet(s, n) => (s, n),
            Node::Member { family, order, .. } => (family, order),
            _ => continue,
        };
        match cx.arena.info(symbol).role {
            Role::Time if reversed => {
                map.insert(a, cx.arena.neg(a));
            }
            Role::Input if reversed => driven = true,
            Role::Coordinate => {
                let Some(i) = owner(cx, &model.coordinates, symbol) else { continue };
                if kind == Discrete::HalfTurn(i) {
                    if order == 0 {
                        let half = cx.arena.pi();
                        map.insert(a, cx.arena.add(a, half));
                    }
                } else if flips(kind, i) ^ (reversed && order % 2 == 1) {
                    map.insert(a, cx.arena.neg(a));
                }
            }
            _ => {}
        }
    }
    if map.is_empty() {
        return Ok((e, driven));
    }
    Ok((cx.arena.substitute(e, &map, cx.budget)?, driven))
}

/// The coordinate to which a symbol belongs: itself, or the family of which it is a member.
fn owner(cx: &Context<'_>, coordinates: &[Coordinate], symbol: leastwise_algebra::Symbol) -> Option<usize> {
    let info = cx.arena.info(symbol);
    coordinates.iter().position(|q| {
        q.symbol == symbol || q.members.is_some() && info.member.is_some() && cx.arena.info(q.symbol).name == info.name
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::fixture::{Fixture, double_pendulum, kepler};
    use crate::model::{Action, Force, TermKind};
    use leastwise_algebra::Arena;

    fn check(f: &mut Fixture, angles: &[usize], want: &[(Discrete, Holds)]) -> Vec<DiscreteAnswer> {
        let model = f.model.clone();
        let got = discrete(&mut f.cx(), &model, angles).unwrap();
        for (kind, holds) in want {
            let answer = got.iter().find(|a| a.kind == *kind).unwrap_or_else(|| panic!("{kind:?} in {got:?}"));
            assert_eq!(answer.lagrangian, *holds, "{kind:?}");
        }
        got
    }

    #[test]
    fn an_orbit_may_be_run_backwards_and_mirrored() {
        let mut f = kepler();
        let kinds = [Discrete::TimeReversal, Discrete::Reflection(0), Discrete::Reflection(1), Discrete::Inversion];
        check(&mut f, &[], &kinds.map(|k| (k, Holds::Exactly)));
        // A slope along x breaks the reflection of x, and of all, and nothing else.
        let (x, k) = (f.model.coordinates[0].clone().jet(&mut f.arena, 0), f.parameter("k"));
        let slope = f.arena.mul(k, x);
        f.term(TermKind::Potential, "slope", &[slope]);
        let want = [Holds::Exactly, Holds::Broken, Holds::Exactly, Holds::Broken];
        let got = check(&mut f, &[], &kinds.into_iter().zip(want.clone()).collect::<Vec<_>>());
        assert_eq!(got.iter().map(|a| a.broken_by.len()).collect::<Vec<_>>(), [0, 1, 0, 1]);
        assert_eq!(got[1].broken_by, [2]);
        // A second slope that takes the first away: neither breaks anything.
        let back = f.arena.neg(slope);
        f.term(TermKind::Potential, "counter", &[back]);
        check(&mut f, &[], &kinds.map(|k| (k, Holds::Exactly)));
        // Of three slopes two cancel each other, and the earlier ones are excused.
        f.term(TermKind::Potential, "third", &[slope]);
        let got = check(&mut f, &[], &kinds.into_iter().zip(want).collect::<Vec<_>>());
        assert_eq!(got[1].broken_by, [4]);
    }

    #[test]
    fn a_double_pendulum_swings_alike_on_both_sides() {
        // cos(θ₁ − θ₂) is even in both angles together only; a half turn turns the weights over.
        let mut f = double_pendulum();
        check(
            &mut f,
            &[0, 1],
            &[
                (Discrete::TimeReversal, Holds::Exactly),
                (Discrete::Reflection(0), Holds::Broken),
                (Discrete::Inversion, Holds::Exactly),
                (Discrete::HalfTurn(1), Holds::Broken),
            ],
        );
    }

    #[test]
    fn a_magnetic_field_is_reversed_with_time() {
        // ½ m v² + b x ẏ [LL § 46 problems; Onsager's rule]: time and one axis together.
        let mut f = Fixture::new();
        let (x, vx) = f.coordinate("x");
        let (_, vy) = f.coordinate("y");
        let (m, b) = (f.parameter("m"), f.parameter("b"));
        let parts = [f.half_square(m, vx), f.half_square(m, vy)];
        f.term(TermKind::Kinetic, "body", &parts);
        let field = f.arena.product(&[b, x, vy]);
        f.term(TermKind::Lagrangian, "field", &[field]);
        let got = check(
            &mut f,
            &[],
            &[
                (Discrete::TimeReversal, Holds::Broken),
                (Discrete::Reflection(0), Holds::Broken),
                (Discrete::Inversion, Holds::Exactly),
                (Discrete::ReversalWithReflection(0), Holds::Exactly),
                (Discrete::ReversalWithReflection(1), Holds::Exactly),
            ],
        );
        assert!(got.iter().all(|a| a.rest.is_proved()));
    }

    #[test]
    fn a_total_derivative_does_not_count() {
        // ½ m v² + b x ẋ changes by −2 b x ẋ = d(−b x²)/dt under t → −t.
        let mut f = Fixture::new();
        let (x, v) = f.coordinate("x");
        let (m, b) = (f.parameter("m"), f.parameter("b"));
        let part = f.half_square(m, v);
        f.term(TermKind::Kinetic, "body", &[part]);
        let idle = f.arena.product(&[b, x, v]);
        f.term(TermKind::Lagrangian, "idle", &[idle]);
        let x2 = f.arena.pow(x, 2);
        let bx2 = f.arena.mul(b, x2);
        let want = f.arena.neg(bx2);
        check(&mut f, &[], &[(Discrete::TimeReversal, Holds::UpToDerivative(Some(want)))]);
    }

    #[test]
    fn damping_tells_past_from_future() {
        let mut f = kepler();
        let v = f.model.coordinates[0].clone().jet(&mut f.arena, 1);
        let c = f.parameter("c");
        let loss = f.half_square(c, v);
        f.model.forces.push(Force { name: "drag".into(), action: Action::Dissipation(vec![loss]) });
        let got = check(&mut f, &[], &[(Discrete::TimeReversal, Holds::Exactly)]);
        assert!(got[0].rest.is_refuted(), "time");
        assert!(got[1].rest.is_proved() && got[2].rest.is_proved(), "reflections");
    }

    #[test]
    fn a_long_chain_is_mirrored_as_a_whole() {
        // Σ ½ m ẋᵢ² − Σ ½ k (xᵢ₊₁ − xᵢ)² over 10 000 masses; a weight on all of them breaks it.
        let mut f = Fixture::new();
        let (x, k) = (f.arena.symbol("x", None, Role::Coordinate), f.arena.symbol("k", None, Role::Index));
        f.model.coordinates.push(Coordinate::family(x, k, 1, 10_000));
        let i = f.arena.symbol("i", None, Role::Index);
        let ie = f.arena.sym(i);
        let next = f.arena.add(ie, Arena::ONE);
        let (v, here, there) = (f.arena.member(x, ie, 1), f.arena.member(x, ie, 0), f.arena.member(x, next, 0));
        let (m, c) = (f.parameter("m"), f.parameter("c"));
        let gap = f.arena.sub(there, here);
        let (one, last) = (Arena::ONE, f.arena.integer(10_000));
        let before = f.arena.integer(9_999);
        let (t, u) = (f.half_square(m, v), f.half_square(c, gap));
        let t = f.arena.bound(i, one, last, t, &mut f.budget).unwrap();
        let u = f.arena.bound(i, one, before, u, &mut f.budget).unwrap();
        f.term(TermKind::Kinetic, "masses", &[t]);
        f.term(TermKind::Potential, "springs", &[u]);
        let kinds = [Discrete::TimeReversal, Discrete::Reflection(0)];
        check(&mut f, &[], &kinds.map(|k| (k, Holds::Exactly)));
        let w = f.arena.mul(m, here);
        let w = f.arena.bound(i, one, last, w, &mut f.budget).unwrap();
        f.term(TermKind::Potential, "weights", &[w]);
        check(&mut f, &[], &[(kinds[0], Holds::Exactly), (kinds[1], Holds::Broken)]);
    }

    #[test]
    fn an_angle_with_two_equal_minima_is_turned() {
        // ½ J φ̇² − k cos 2φ: the half turn holds; with cos φ it does not.
        for (times, want) in [(2, Holds::Exactly), (1, Holds::Broken)] {
            let mut f = Fixture::new();
            let (phi, w) = f.coordinate("φ");
            let (j, k) = (f.parameter("J"), f.parameter("k"));
            let part = f.half_square(j, w);
            f.term(TermKind::Kinetic, "rotor", &[part]);
            let angle = f.arena.scale(phi, &Rational::integer(times));
            let c = f.arena.call(leastwise_algebra::Function::Cos, &[angle]);
            let u = f.arena.mul(k, c);
            f.term(TermKind::Potential, "cogging", &[u]);
            check(&mut f, &[0], &[(Discrete::HalfTurn(0), want), (Discrete::Reflection(0), Holds::Exactly)]);
        }
    }
}
