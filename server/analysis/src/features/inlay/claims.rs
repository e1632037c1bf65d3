//! Behind a claim: its verdict.

use super::{Desk, InlayKind, list, verb};
use crate::checked::Contents;
use crate::derive::{Derived, total};
use crate::trade::windings;
use crate::trade::{blamed_share, effect};
use leastwise_algebra::{Arena, Expr, Node, Rational, Role, Stopped, Verdict};
use leastwise_mechanics::claims::Claim;
use leastwise_mechanics::context::Parts;
use leastwise_mechanics::lagrange::{self, FormParts, multiplier, signed_parts};
use leastwise_mechanics::symmetry::{Generator, NoGenerator, Status};
use leastwise_mechanics::verdicts::{Answers, Culprit, SymmetryAnswer};
use std::ops::Range;

/// What breaks a claim is told where the label stays within this many characters.
const LONGEST: usize = 60;

pub(super) fn hints(desk: &mut Desk<'_, '_, '_>, derived: &Derived) {
    let checked = desk.checked;
    for (claim, answer) in checked.symmetries().iter().zip(&derived.symmetries) {
        if !desk.wants(claim.range.end) {
            continue;
        }
        let (label, target) = match answer {
            Ok(a) => symmetry(desk, claim.expected_broken, a),
            Err(why) => no_generator(desk, claim, why),
        };
        desk.push(claim.range.end, InlayKind::Claim, label, target);
    }
    let claims: Vec<_> = checked.conserved().iter().zip(&derived.conserved).collect();
    // The components of a vector are claims of one item.
    for group in claims.chunk_by(|a, b| a.0.range == b.0.range) {
        let at = group[0].0.range.end;
        if !desk.wants(at) {
            continue;
        }
        let labels: Vec<String> = group.iter().map(|(c, a)| conserved(desk, derived, c.expr, a)).collect();
        let label = if labels.iter().all(|l| *l == labels[0]) {
            labels[0].clone()
        } else {
            let named = group.iter().zip(&labels).map(|((c, _), label)| format!("{} {label}", c.name));
            named.collect::<Vec<_>>().join("; ")
        };
        desk.push(at, InlayKind::Claim, label, None);
    }
}

/// The first place of those to blame.
pub(super) fn first_place(checked: &Contents, culprits: &[Culprit]) -> Option<Range<usize>> {
    let first = culprits.first()?;
    Some(match first.parts.first() {
        Some(&part) => checked.part_range(first.term, part),
        None => checked.term_range(first.term),
    })
}

/// The charge by the trade's name: p where one coordinate is shifted, the energy or h where time is, the momentum or
/// angular momentum where it is that, else Q.
fn charge(desk: &mut Desk<'_, '_, '_>, a: &SymmetryAnswer) -> (String, Expr) {
    let g = &a.symmetry.generator;
    let model = desk.checked.model();
    let moved: Vec<usize> = (0..g.eta.len()).filter(|&i| g.eta[i] != Arena::ZERO).collect();
    if a.gauge.is_none() && g.tau == Arena::ONE && moved.is_empty() {
        let h = desk.maker.arena.neg(a.charge);
        if desk.is_energy(h).is_proved() {
            return ("energy".to_string(), h);
        }
        return (desk.letter("h", "energy function"), h);
    }
    if let [i] = moved[..]
        && a.gauge.is_none()
        && g.tau == Arena::ZERO
        && g.eta[i] == Arena::ONE
        && model.coordinates[i].members.is_none()
    {
        let q = model.coordinates[i].label(desk.maker.arena);
        let other = desk.letter(&format!("p_{q}"), "momentum");
        return (desk.letter("p", &other), a.charge);
    }
    if a.gauge.is_none()
        && g.tau == Arena::ZERO
        && let Some(name) = mechanical_name(desk, g)
    {
        return (name.to_string(), a.charge);
    }
    (desk.letter("Q", "charge"), a.charge)
}

/// The trade's word for the charge of a shift or rotation: where coordinates are lengths and each momentum is mass times
/// velocity, with one mass for both coordinates of a rotation, it is the momentum or the angular momentum.
fn mechanical_name(desk: &mut Desk<'_, '_, '_>, g: &Generator) -> Option<&'static str> {
    let checked = desk.checked;
    let model = checked.model();
    let moved: Vec<usize> = (0..g.eta.len()).filter(|&i| g.eta[i] != Arena::ZERO).collect();
    let mut masses = Vec::with_capacity(moved.len());
    for &i in &moved {
        let place = &checked.coordinates[i];
        if place.quantity.as_deref().is_none_or(|q| q.trim() != "length") {
            return None;
        }
        masses.push(mass_of(desk, i)?);
    }
    if moved.iter().all(|&i| g.eta[i] == Arena::ONE) {
        // Members of one family lie along one axis; of other coordinates that is not known.
        let infos: Vec<_> = moved.iter().map(|&i| desk.maker.arena.info(model.coordinates[i].symbol)).collect();
        let family = infos.windows(2).all(|w| w[0].name == w[1].name) && infos.iter().all(|s| s.member.is_some());
        return family.then_some("momentum");
    }
    // Pairs with ηˣ = −y, ηʸ = x.
    for (&i, mass) in moved.iter().zip(&masses) {
        let turned = moved.iter().zip(&masses).any(|(&j, other)| {
            let arena = &mut *desk.maker.arena;
            let (x, y) = (model.coordinates[i].jet(arena, 0), model.coordinates[j].jet(arena, 0));
            let (minus_x, minus_y) = (arena.neg(x), arena.neg(y));
            let pair = (g.eta[i], g.eta[j]);
            other == mass && (pair == (minus_y, x) || pair == (y, minus_x))
        });
        if !turned {
            return None;
        }
    }
    (!moved.is_empty()).then_some("angular momentum")
}

/// m where p = m q̇ and m is made from constants.
fn mass_of(desk: &mut Desk<'_, '_, '_>, i: usize) -> Option<Expr> {
    let model = desk.checked.model();
    let q = &model.coordinates[i];
    if q.members.is_some() {
        return None;
    }
    let p = momentum(desk, i).ok()?;
    let velocity = q.jet(desk.maker.arena, 1);
    let mass = desk.maker.arena.partial(p, velocity, desk.maker.budget).ok()?;
    let arena = &mut *desk.maker.arena;
    let constant = arena.atoms(mass).into_iter().all(|a| match arena.node(a) {
        Node::Symbol(s) => arena.info(*s).role == Role::Parameter,
        _ => false,
    });
    let rest = [(p, Rational::ONE), (arena.mul(mass, velocity), Rational::MINUS_ONE)];
    (constant && desk.cx().vanishes(&rest).is_proved()).then_some(mass)
}

/// ∂L/∂q̇ of a coordinate that is no family.
fn momentum(desk: &mut Desk<'_, '_, '_>, i: usize) -> Result<Expr, Stopped> {
    let model = desk.checked.model();
    let all: Parts = signed_parts(model).concat();
    let parts = lagrange::momentum(&mut desk.cx(), &all, &model.coordinates[i])?;
    Ok(sum(desk, &parts))
}

fn sum(desk: &mut Desk<'_, '_, '_>, parts: &FormParts) -> Expr {
    let parts: Parts = parts.iter().flat_map(|(f, c)| f.iter().map(|f| (f.expr, c.clone()))).collect();
    total(desk.maker.arena, &parts)
}

/// Whether a gauge term changes on a way that comes back.
fn is_multivalued(desk: &mut Desk<'_, '_, '_>, gauge: Expr) -> bool {
    !windings(desk.maker, desk.checked, gauge).is_empty()
}

fn charge_text(desk: &mut Desk<'_, '_, '_>, a: &SymmetryAnswer) -> String {
    let (name, value) = charge(desk, a);
    format!("{name} = {}", desk.print(value))
}

fn symmetry(desk: &mut Desk<'_, '_, '_>, expected_broken: bool, a: &SymmetryAnswer) -> (String, Option<Range<usize>>) {
    let model = desk.checked.model();
    let stays = matches!(a.conserved, Ok(Verdict::Proved));
    let holds = match &a.symmetry.status {
        Status::Undecided(reason) => return (format!("undecided: {reason}"), None),
        Status::Broken => {
            let names: Vec<String> = a.culprits.iter().map(|c| model.terms[c.term].name.clone()).collect();
            let by = if names.is_empty() { String::new() } else { format!(" by {}", list(&names)) };
            let target = first_place(desk.checked, &a.culprits);
            return match (expected_broken, stays) {
                (_, true) => {
                    let charge = charge_text(desk, a);
                    (format!("broken{by}, yet conserved: {charge}"), target)
                }
                (true, false) => (format!("broken{by}, as declared"), target),
                (false, false) => {
                    let label = format!("broken{by}");
                    let share = blamed_share(desk.maker, a);
                    let effect = effect(desk.maker, desk.checked, &a.symmetry.generator, share);
                    let whole = format!("{label}: {effect}");
                    (if whole.chars().count() <= LONGEST { whole } else { label }, target)
                }
            };
        }
        Status::Exact => "exact".to_string(),
        Status::UpToGauge => match a.gauge {
            Some(f) => {
                let single = if is_multivalued(desk, f) { ", not single-valued" } else { "" };
                format!("up to d/dt({}){single}", desk.print(f))
            }
            None => {
                let what = "up to a total time derivative, not found in closed form";
                return (what.to_string(), None);
            }
        },
    };
    let declared = if expected_broken && stays { "not broken, " } else { "" };
    match &a.conserved {
        Ok(Verdict::Proved) => {
            let charge = charge_text(desk, a);
            (format!("{declared}{holds}: {charge}"), None)
        }
        Ok(Verdict::Refuted(_)) => {
            let mut names = Vec::new();
            let mut target = None;
            for (k, &e) in a.taken.iter().enumerate() {
                if e != Arena::ZERO && !desk.cx().vanishes(&[(e, Rational::ONE)]).is_proved() {
                    names.push(model.forces[k].name.clone());
                    target = target.or_else(|| desk.force_place(k));
                }
            }
            // Reactions that act on the charge stand in its rate with their multipliers.
            let mut reacting = Vec::new();
            for (k, c) in model.constraints.iter().enumerate() {
                let lambda = multiplier(desk.maker.arena, &c.name);
                if a.rate.iter().any(|(e, _)| desk.maker.arena.atoms(*e).contains(&lambda)) {
                    reacting.push(k);
                }
            }
            target = target.or_else(|| desk.checked.constraints.get(*reacting.first()?).cloned());
            names.extend(desk.constraint_names(reacting.into_iter()));
            let verb = verb(&names, "takes", "take");
            let what = match charge(desk, a) {
                (name, _) if name == "energy" => "the energy".to_string(),
                (name, value) => format!("{name} = {}", desk.print(value)),
            };
            (format!("{holds}, but {} {verb} {what}", list(&names)), target)
        }
        Ok(Verdict::Undecided(reason)) => {
            (format!("{holds}; undecided whether the charge is conserved: {reason}"), None)
        }
        Err(reason) => (format!("{holds}; undecided whether the charge is conserved: {reason}"), None),
    }
}

fn no_generator(
    desk: &mut Desk<'_, '_, '_>,
    claim: &crate::checked::SymmetryClaim,
    why: &NoGenerator,
) -> (String, Option<Range<usize>>) {
    let (label, image) = match why {
        NoGenerator::NotTheIdentity(k) => ("not the identity at ε = 0".to_string(), Some(*k)),
        NoGenerator::Velocities(k) => ("not examined: the image contains velocities".to_string(), Some(*k)),
        NoGenerator::NoCoordinate(k) => {
            let x = desk.print(claim.images[*k].source);
            (format!("not examined: {x} is neither a coordinate nor the time"), Some(*k))
        }
        NoGenerator::SingleMember(k) => {
            let x = desk.print(claim.images[*k].source);
            (format!("not examined: {x} is one member of a large family"), Some(*k))
        }
        NoGenerator::Stopped(s) => (format!("undecided: {s}"), None),
    };
    (label, image.and_then(|k| claim.image_ranges.get(k).cloned()))
}

fn conserved(desk: &mut Desk<'_, '_, '_>, derived: &Derived, expr: Expr, answer: &Result<Claim, Stopped>) -> String {
    match answer {
        Ok(c) => match &c.verdict {
            Ok(Verdict::Proved) => "conserved".to_string(),
            Ok(Verdict::Refuted(_)) => {
                let rate = known_rate(desk, derived, expr).unwrap_or(c.rate);
                format!("not conserved: rate {}", desk.print(rate))
            }
            Ok(Verdict::Undecided(reason)) => format!("undecided: {reason}"),
            Err(reason) => format!("undecided: {reason}"),
        },
        Err(stopped) => format!("undecided: {stopped}"),
    }
}

/// The rate on motions, without accelerations, where the claim is the energy function, a charge or a momentum.
fn known_rate(desk: &mut Desk<'_, '_, '_>, derived: &Derived, claim: Expr) -> Option<Expr> {
    let answers: &Answers = derived.answers.as_ref().ok()?;
    if claim == answers.energy.function {
        return Some(total(desk.maker.arena, &answers.energy.rate));
    }
    if let Some(known) = derived.symmetries.iter().flatten().find(|a| a.charge == claim) {
        return Some(total(desk.maker.arena, &known.rate));
    }
    let model = desk.checked.model();
    let single = |i: &usize| model.coordinates[*i].members.is_none();
    let i = (0..model.coordinates.len()).filter(single).find(|&i| momentum(desk, i) == Ok(claim))?;
    // dp/dt = ∂L/∂q + 𝒬 + R.
    let q = &model.coordinates[i];
    let all: Parts = signed_parts(model).concat();
    let mut parts = lagrange::force(&mut desk.cx(), &all, q).ok()?;
    for f in &model.forces {
        parts.extend(lagrange::generalised(&mut desk.cx(), f, q).ok()?);
    }
    parts.extend(lagrange::reaction(&mut desk.cx(), model, q).ok()?);
    Some(sum(desk, &parts))
}
