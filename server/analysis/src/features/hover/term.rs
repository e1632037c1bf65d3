//! Hovers of terms, forces, dissipations and constraints: what each adds to the equations of motion.

use super::writer::{List, SHOWN, Writer, forms, labelled, plural, quoted, short, with_kind};
use leastwise_algebra::{Arena, Expr, Rational, Stopped, Verdict};
use leastwise_mechanics::context::Parts;
use leastwise_mechanics::lagrange::{self, FormParts};
use leastwise_mechanics::model::{Action, Coordinate, TermKind};
use leastwise_mechanics::{surface, symmetry};

/// Says what a term of the Lagrangian is and does.
pub(super) fn term(w: &mut Writer<'_, '_>, k: usize) {
    let checked = w.checked;
    let (term, place) = (&checked.model.terms[k], &checked.terms[k]);
    let parts: Parts = term.parts.iter().map(|&p| (p, Rational::ONE)).collect();
    let whole = w.total(&parts);
    let text = w.text(whole);
    let (kind, sign) = match term.kind {
        TermKind::Kinetic => ("kinetic", "Kinetic energy, counted with + in L"),
        TermKind::Potential => ("potential", "Potential energy, counted with − in L"),
        TermKind::Lagrangian => ("lagrangian", "Term of the Lagrangian, counted with +"),
    };
    w.formulas(labelled(&format!("{} = ", with_kind(kind, &term.name)), &text, ""));
    w.titled(sign, place.description.as_deref());
    let signed: Parts = term.parts.iter().map(|&p| (p, Rational::integer(term.sign()))).collect();
    match shares(w, |cx, q| lagrange::residual(cx, &signed, q)) {
        Ok(shares) if shares.is_empty() => w.prose("It changes no equation of motion."),
        Ok(shares) => {
            w.prose("Adds to the left sides of the equations of motion:");
            w.formulas(shares);
        }
        Err(why) => w.stopped("What it adds to the equations of motion", why),
    }
    claims(w, k);
    w.missing();
}

fn capital(word: &str) -> String {
    let mut letters = word.chars();
    letters.next().map_or(String::new(), |c| c.to_uppercase().chain(letters).collect())
}

/// One line for each coordinate where something is added; a long list ends with a count.
fn shares(
    w: &mut Writer<'_, '_>,
    mut of: impl FnMut(&mut leastwise_mechanics::context::Context<'_>, &Coordinate) -> Result<FormParts, Stopped>,
) -> Result<Vec<String>, Stopped> {
    let mut list = List::new();
    for q in &w.checked.model.coordinates {
        let parts = of(&mut w.cx(), q)?;
        if parts.is_empty() {
            continue;
        }
        for row in forms(w, q, std::slice::from_ref(&parts))? {
            if w.vanishes(row.values[0]) || !list.wants() {
                continue;
            }
            let text = w.text(row.values[0]);
            list.add(labelled(&format!("{}: ", row.name), &text, &row.suffix));
        }
    }
    Ok(list.done())
}

/// Which claims a term respects and which it breaks.
fn claims(w: &mut Writer<'_, '_>, k: usize) {
    let checked = w.checked;
    let (mut respected, mut up_to, mut cancelled, mut undecided) = (Vec::new(), Vec::new(), Vec::new(), Vec::new());
    let mut broken: Vec<(String, Expr)> = Vec::new();
    for (claim, answer) in checked.symmetries.iter().zip(&w.derived.symmetries) {
        let Ok(a) = answer else { continue };
        let Some(parts) = a.symmetry.variations.get(k) else { continue };
        let parts: Parts = parts.iter().filter(|p| p.0 != Arena::ZERO).cloned().collect();
        if w.cx().vanishes(&parts).is_proved() {
            respected.push(claim.name.clone());
            continue;
        }
        match symmetry::euler_vanishes(&mut w.cx(), &checked.model, &parts) {
            Ok(Verdict::Proved) => up_to.push(claim.name.clone()),
            Ok(Verdict::Refuted(_)) => {
                let blamed = a.culprits.iter().any(|c| c.term == k);
                if !blamed && checked.complete {
                    cancelled.push(claim.name.clone());
                }
                let e = w.total(&parts);
                broken.push((claim.name.clone(), e));
            }
            Ok(Verdict::Undecided(_)) | Err(_) => undecided.push(claim.name.clone()),
        }
    }
    if !respected.is_empty() {
        w.prose(format!("Respects {}.", quoted(&respected)));
    }
    if !up_to.is_empty() {
        w.prose(format!("Respects {} up to a total time derivative.", quoted(&up_to)));
    }
    let (own, others): (Vec<_>, Vec<_>) = broken.into_iter().partition(|b| !cancelled.contains(&b.0));
    variations(w, "Breaks", own);
    variations(w, "Changes, and other terms take the change back, under", others);
    if !undecided.is_empty() {
        w.prose(format!("Whether it respects {} is undecided.", quoted(&undecided)));
    }
    let depends: Vec<String> = checked
        .cyclic_claims()
        .filter_map(|(i, _)| {
            let q = &checked.model.coordinates[i];
            let term = &checked.model.terms[k];
            let parts: Parts = term.parts.iter().map(|&p| (p, Rational::ONE)).collect();
            let force = lagrange::force(&mut w.cx(), &parts, q).ok()?;
            let lists = lagrange::questions(&mut w.cx(), q, &force).ok()?;
            w.cx().all_vanish(&lists).is_refuted().then(|| q.label(w.maker.arena))
        })
        .collect();
    if !depends.is_empty() {
        w.prose(format!(
            "Depends on {}, which {} claimed cyclic.",
            quoted(&depends),
            plural(depends.len(), "is", "are")
        ));
    }
}

/// Claims with the change of L that the term makes under each.
fn variations(w: &mut Writer<'_, '_>, how: &str, list: Vec<(String, Expr)>) {
    if list.is_empty() {
        return;
    }
    let names: Vec<String> = list.iter().map(|b| b.0.clone()).collect();
    w.prose(format!("{how} {}; its share in δL:", quoted(&names)));
    let mut lines = Vec::new();
    for (name, e) in list.iter().take(SHOWN) {
        let text = w.text(*e);
        lines.extend(labelled(&format!("{name}: "), &text, ""));
    }
    w.formulas(lines);
}

/// Says what a force or dissipation is and does.
pub(super) fn force(w: &mut Writer<'_, '_>, k: usize) {
    let checked = w.checked;
    let (force, place) = (&checked.model.forces[k], &checked.forces[k]);
    match &force.action {
        Action::Dissipation(parts) => {
            let parts: Parts = parts.iter().map(|&p| (p, Rational::ONE)).collect();
            let whole = w.total(&parts);
            let text = w.text(whole);
            w.formulas(labelled(&format!("{} = ", with_kind("dissipation", &force.name)), &text, ""));
            w.titled("Rayleigh dissipation function ℱ", place.description.as_deref());
        }
        Action::Applied(pairs) => {
            let mut lines = Vec::new();
            for (on, value) in pairs.iter().take(SHOWN) {
                let (on, value) = (w.text(*on), w.text(*value));
                lines.extend(labelled(&format!("{} on {on} = ", with_kind("force", &force.name)), &value, ""));
            }
            w.formulas(lines);
            w.titled("Applied force", place.description.as_deref());
        }
    }
    let model = &checked.model;
    match shares(w, |cx, q| lagrange::generalised(cx, force, q)) {
        Ok(shares) if shares.is_empty() => w.prose("It changes no equation of motion."),
        Ok(shares) => {
            w.prose(match force.action {
                Action::Dissipation(_) => "Generalised forces −∂ℱ/∂q̇, on the right sides of the equations of motion:",
                Action::Applied(_) => "Generalised forces, on the right sides of the equations of motion:",
            });
            w.formulas(shares);
        }
        Err(why) => w.stopped("What it adds to the equations of motion", why),
    }
    // A delay's charge is −h: what a force takes from it is its power with the other sign.
    if let Ok(taken) = symmetry::taken(&mut w.cx(), model, &symmetry::delay(model))
        && let Some(&e) = taken.get(k)
    {
        let power = w.maker.arena.neg(e);
        let text = w.text(power);
        match short(&text) {
            Some(text) => w.prose(format!("Power: `{text}`")),
            None => {
                w.prose("Power:");
                w.formulas(labelled("", &text, ""));
            }
        }
    }
    let (mut idle, mut names, mut lines) = (Vec::new(), Vec::new(), Vec::new());
    for (claim, answer) in checked.symmetries.iter().zip(&w.derived.symmetries) {
        let Ok(a) = answer else { continue };
        let Some(&e) = a.taken.get(k) else { continue };
        if w.vanishes(e) {
            idle.push(claim.name.clone());
            continue;
        }
        if names.len() < SHOWN {
            let (symbol, share) = super::claim::share(w, a, e);
            let text = w.text(share);
            lines.extend(labelled(&format!("{}, d{symbol}/dt: ", claim.name), &text, ""));
        }
        names.push(claim.name.clone());
    }
    if !idle.is_empty() {
        w.prose(format!("Takes nothing from the {} of {}.", plural(idle.len(), "charge", "charges"), quoted(&idle)));
    }
    if !names.is_empty() {
        let charges = plural(names.len(), "charge", "charges");
        w.prose(format!("Acts on the {charges} of {}; its share in the balance law:", quoted(&names)));
        w.formulas(lines);
    }
    w.missing();
}

/// Says what a constraint is and which reactions it exerts.
pub(super) fn constraint(w: &mut Writer<'_, '_>, first: usize) {
    let checked = w.checked;
    let model = &checked.model;
    let start = checked.constraints[first].start;
    let own: Vec<usize> = (0..model.constraints.len()).filter(|&k| checked.constraints[k].start == start).collect();
    let mut lines = Vec::new();
    for &k in own.iter().take(SHOWN) {
        let text = w.text(model.constraints[k].f);
        lines.extend(labelled(&format!("{}: ", with_kind("constraint", &model.constraints[k].name)), &text, " = 0"));
    }
    if own.len() > SHOWN {
        lines.push(format!("and {} more", own.len() - SHOWN));
    }
    w.formulas(lines);
    let velocities = own.iter().any(|&k| lagrange::depends_on_velocities(w.maker.arena, model.constraints[k].f));
    let (kind, more) = match velocities {
        true => ("", " linear in the velocities; whether it can be integrated is not asked here"),
        false => ("holonomic ", ""),
    };
    let title = match own.len() {
        1 => capital(&format!("{kind}constraint{more}")),
        n => format!("{n} {kind}constraints{more}"),
    };
    let item = crate::features::place::item_at(checked, start);
    w.titled(title, item.and_then(|k| checked.items[k].description.as_deref()));
    let part = leastwise_mechanics::model::Model {
        constraints: own.iter().take(SHOWN).map(|&k| model.constraints[k].clone()).collect(),
        coordinates: model.coordinates.clone(),
        terms: Vec::new(),
        forces: Vec::new(),
    };
    match shares(w, |cx, q| lagrange::reaction(cx, &part, q)) {
        Ok(shares) => {
            w.prose("Reactions, on the right sides of the equations of motion:");
            w.formulas(shares);
        }
        Err(why) => w.stopped("Reactions", why),
    }
    claims_on_constraint(w, &own);
    w.missing();
}

/// Whether the reactions of some constraints do work on the charges.
fn claims_on_constraint(w: &mut Writer<'_, '_>, own: &[usize]) {
    let model = &w.checked.model;
    let none = vec![Arena::ZERO; model.coordinates.len()];
    let (mut idle, mut working) = (Vec::new(), Vec::new());
    for (claim, answer) in w.checked.symmetries.iter().zip(&w.derived.symmetries) {
        let Ok(a) = answer else { continue };
        let Ok(mut work) = symmetry::reaction_work(&mut w.cx(), model, &a.symmetry.generator) else { continue };
        for (k, e) in work.iter_mut().enumerate() {
            if !own.contains(&k) || w.vanishes(*e) {
                *e = Arena::ZERO;
            }
        }
        if work.iter().all(|&e| e == Arena::ZERO) {
            idle.push(claim.name.clone());
            continue;
        }
        // Off the surface it is no question.
        match surface::rate_is_zero(&mut w.cx(), model, Arena::ZERO, &none, &work) {
            Ok(Some(Verdict::Proved)) => idle.push(claim.name.clone()),
            Ok(Some(Verdict::Refuted(_))) => working.push(claim.name.clone()),
            _ => {}
        }
    }
    if !idle.is_empty() {
        let charges = plural(idle.len(), "charge", "charges");
        w.prose(format!("Its reactions do no work on the {charges} of {}.", quoted(&idle)));
    }
    if !working.is_empty() {
        let charges = plural(working.len(), "charge", "charges");
        w.prose(format!("Its reactions change the {charges} of {}.", quoted(&working)));
    }
}
