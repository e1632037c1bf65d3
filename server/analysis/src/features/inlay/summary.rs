//! Behind the last term: degrees of freedom, and what becomes of the energy.

use super::{Desk, InlayKind, list};
use crate::derive::Derived;
use leastwise_algebra::{Arena, Node, Rational, Role, Sign, Stopped, Verdict};
use leastwise_mechanics::lagrange::constraints_at_rest;
use leastwise_mechanics::model::{TermKind, time};
use leastwise_mechanics::surface;
use leastwise_mechanics::symmetry::{delay, taken};
use leastwise_mechanics::verdicts::{Answers, Culprit, MassVerdict};
use std::ops::Range;

pub(super) fn hint(desk: &mut Desk<'_, '_, '_>, derived: &Derived) {
    let checked = desk.checked;
    let Some(offset) = checked.terms.last().map(|t| t.range.end) else { return };
    if !desk.wants(offset) || checked.model().coordinates.is_empty() {
        return;
    }
    match &derived.answers {
        Ok(answers) => {
            let freedom = freedom(desk, answers);
            let (energy, target) = energy(desk, answers);
            desk.push(offset, InlayKind::Summary, format!("{freedom}, {energy}"), target);
        }
        Err(stopped) => desk.push(offset, InlayKind::Summary, format!("not derived: {stopped}"), None),
    }
}

fn counted(n: i64, one: &str, several: &str) -> String {
    if n == 1 { format!("1 {one}") } else { format!("{n} {several}") }
}

/// Coordinates less independent constraints; where the latter is not known, or not all coordinates have inertia, both are
/// counted by themselves.
fn freedom(desk: &mut Desk<'_, '_, '_>, answers: &Answers) -> String {
    let model = desk.checked.model();
    let members = |q: &leastwise_mechanics::model::Coordinate| q.members.map_or(1, |m| m.upper - m.lower + 1);
    let coordinates: i64 = model.coordinates.iter().map(members).sum();
    let constraints = model.constraints.len() as i64;
    let bound = counted(constraints, "constraint", "constraints");
    let regular = match answers.mass {
        MassVerdict::Regular => true,
        MassVerdict::NotPositive(_) => constraints == 0,
        _ => false,
    };
    let independent = regular && (constraints == 0 || surface::are_independent(&mut desk.cx(), model).unwrap_or(false));
    let mut out = if independent {
        counted(coordinates - constraints, "degree of freedom", "degrees of freedom")
    } else {
        counted(coordinates, "coordinate", "coordinates")
    };
    if constraints > 0 {
        out.push_str(if independent { " with " } else { ", " });
        out.push_str(&bound);
    }
    if matches!(answers.mass, MassVerdict::Singular(_)) {
        out.push_str(", singular mass matrix");
    }
    out
}

fn energy(desk: &mut Desk<'_, '_, '_>, answers: &Answers) -> (String, Option<Range<usize>>) {
    let model = desk.checked.model();
    let whole = desk.is_energy(answers.energy.function);
    let what = if whole.is_proved() { "energy".to_string() } else { desk.letter("h", "energy function") };
    match &answers.energy_conserved {
        Ok(Verdict::Proved) => {
            // Terms declared `lagrangian` may belong to either: then h is not compared.
            let declared = model.terms.iter().all(|t| t.kind != TermKind::Lagrangian);
            let label = match (whole.is_proved(), whole.is_refuted() && declared) {
                (false, true) => format!("{what} conserved, not the total energy"),
                _ => format!("{what} conserved"),
            };
            (label, None)
        }
        Ok(Verdict::Refuted(_)) => match causes(desk, answers) {
            Ok((names, true, target)) if whole.is_proved() => {
                (format!("energy dissipated by {}", list(&names)), target)
            }
            Ok((names, _, target)) if !names.is_empty() => (format!("{what} not conserved: {}", list(&names)), target),
            _ => (format!("{what} not conserved"), None),
        },
        Ok(Verdict::Undecided(reason)) => (format!("undecided whether {what} is conserved: {reason}"), None),
        Err(reason) => (format!("undecided whether {what} is conserved: {reason}"), None),
    }
}

type Causes = (Vec<String>, bool, Option<Range<usize>>);

/// What changes the energy function, whether it does nothing but take, and where the first stands.
fn causes(desk: &mut Desk<'_, '_, '_>, answers: &Answers) -> Result<Causes, Stopped> {
    let model = desk.checked.model();
    let mut target = super::claims::first_place(desk.checked, &answers.timely);
    let mut names: Vec<String> = Vec::new();
    for c in &answers.timely {
        let signals = signals(desk, c);
        names.push(format!("{} in {}", signals.join(", "), model.terms[c.term].name));
    }
    let mut only_takes = names.is_empty();
    // Against the flow of a delay: what a force takes from h.
    let powers = taken(&mut desk.cx(), model, &delay(model))?;
    for (k, &power) in powers.iter().enumerate() {
        if power == Arena::ZERO || desk.cx().vanishes(&[(power, Rational::ONE)]).is_proved() {
            continue;
        }
        let sign = desk.maker.zero.sign_of(desk.maker.arena, power, desk.maker.budget);
        only_takes &= matches!(sign, Sign::Positive | Sign::NonNegative);
        names.push(model.forces[k].name.clone());
        target = target.or_else(|| desk.force_place(k));
    }
    if !constraints_at_rest(&mut desk.cx(), model)? {
        only_takes = false;
        names.push("moving constraints".to_string());
    }
    only_takes &= !names.is_empty();
    Ok((names, only_takes, target))
}

/// What depends on the time in a term: `t`, inputs.
fn signals(desk: &mut Desk<'_, '_, '_>, culprit: &Culprit) -> Vec<String> {
    let arena = &mut *desk.maker.arena;
    let t = time(arena);
    let mut out: Vec<String> = Vec::new();
    let term = &desk.checked.model().terms[culprit.term];
    let parts = term.parts.iter().enumerate().filter(|(k, _)| culprit.parts.is_empty() || culprit.parts.contains(k));
    for (_, &part) in parts {
        for atom in arena.atoms(part) {
            let s = match *arena.node(atom) {
                Node::Symbol(s) | Node::Jet(s, _) => s,
                Node::Member { family, .. } => family,
                _ => continue,
            };
            let info = arena.info(s);
            if (s == t || info.role == Role::Input) && !out.iter().any(|n| **n == *info.name) {
                out.push(info.name.to_string());
            }
        }
    }
    out.sort_by_key(|n| (n != "t", n.clone()));
    if out.is_empty() {
        out.push("t".to_string());
    }
    out
}
