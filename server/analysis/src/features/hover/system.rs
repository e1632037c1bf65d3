//! Hovers of the system's name: degrees of freedom, L, energy function, what is conserved.

use super::charge::energy_name;
use super::writer::{SHOWN, Writer, counted, labelled, plural, quoted};
use crate::insights;
use leastwise_algebra::{Arena, Expr, Verdict};
use leastwise_mechanics::energy::is_total_energy;
use leastwise_mechanics::lagrange;
use leastwise_mechanics::model::TermKind;
use leastwise_mechanics::symmetry;
use leastwise_mechanics::verdicts::MassVerdict;

/// Says what the whole model is.
pub(super) fn system(w: &mut Writer<'_, '_>) {
    let checked = w.checked;
    let freedom = freedom(w);
    let energy = match (&w.derived.answers, checked.complete) {
        (Ok(_), true) => energy(w).map_or(String::new(), |e| format!(", {e}")),
        _ => String::new(),
    };
    w.prose(format!("`{}`: {freedom}{energy}", checked.system_name()));
    w.missing();
    w.description(checked.description().as_deref());
    let model = &checked.model;
    match lagrange::lagrangian(&mut w.cx(), model) {
        Ok(l) => {
            let text = w.text(l);
            w.prose("Lagrangian:");
            w.formulas(labelled("L = ", &text, ""));
        }
        Err(why) => w.stopped("Lagrangian", why),
    }
    let answers = match &w.derived.answers {
        Ok(answers) => answers,
        Err(why) => return w.stopped("Equations of motion", *why),
    };
    let h = answers.energy.function;
    let name = energy_name(w, h);
    let text = w.text(h);
    let declared = model.terms.iter().all(|t| t.kind != TermKind::Lagrangian);
    let heading = match name {
        "energy" => "Energy, kinetic + potential:",
        // A term declared `lagrangian` may hold either energy: then there is nothing to compare h with.
        _ if !declared => "Energy function:",
        _ if is_total_energy(&mut w.cx(), model, h).is_refuted() => {
            "Energy function, which is not kinetic + potential energy:"
        }
        _ => "Energy function:",
    };
    w.prose(heading);
    let mut lines = labelled("h = ", &text, "");
    if checked.complete {
        let rate = match &answers.energy_conserved {
            Ok(Verdict::Proved) => Arena::ZERO,
            _ => w.total(&answers.energy.rate),
        };
        let text = w.text(rate);
        lines.extend(labelled("dh/dt = ", &text, ""));
    }
    w.formulas(lines);
    if checked.complete {
        conserved(w, name);
        nature(w);
    }
    if checked.complete && matches!(answers.mass, MassVerdict::Singular(_)) {
        w.prose("The mass matrix is singular: the kinetic terms do not determine all accelerations.");
    }
}

/// What the charges form, and whether time can be reversed.
fn nature(w: &mut Writer<'_, '_>) {
    let report = insights::algebra(w.maker, w.checked, w.derived).filter(|a| a.basis().count() > 1);
    if let Some(sentence) = report.and_then(|a| a.algebra.as_ref().ok()?.sentence()) {
        w.prose(sentence);
    }
    if let Some(row) = insights::reversal(w.maker, w.checked) {
        w.prose(format!("Time reversal: {}.", row.words()));
    }
}

/// What becomes of the energy.
fn energy(w: &mut Writer<'_, '_>) -> Option<String> {
    let model = &w.checked.model;
    let answers = w.derived.answers.as_ref().ok()?;
    let name = energy_name(w, answers.energy.function);
    Some(match &answers.energy_conserved {
        Ok(Verdict::Proved) => format!("{name} conserved"),
        Ok(Verdict::Undecided(_)) | Err(_) => format!("whether the {name} is conserved is undecided"),
        Ok(Verdict::Refuted(_)) => {
            let timely: Vec<String> = answers.timely.iter().map(|c| model.terms[c.term].name.clone()).collect();
            let powers = symmetry::taken(&mut w.cx(), model, &symmetry::delay(model)).unwrap_or_default();
            let acting: Vec<String> =
                model.forces.iter().zip(powers).filter(|(_, e)| !w.vanishes(*e)).map(|(f, _)| f.name.clone()).collect();
            let mut why = Vec::new();
            if !timely.is_empty() {
                why.push(format!("{} {} on the time", quoted(&timely), plural(timely.len(), "depends", "depend")));
            }
            if !acting.is_empty() {
                why.push(format!("{} {} it", quoted(&acting), plural(acting.len(), "changes", "change")));
            }
            if why.is_empty() {
                why.push("moving constraints do work".into());
            }
            format!("{name} not conserved: {}", why.join(", "))
        }
    })
}

/// `3 degrees of freedom`; with constraints the independent ones are taken off where their independence is known.
pub(super) fn freedom(w: &mut Writer<'_, '_>) -> String {
    let model = &w.checked.model;
    let n: i64 = model.coordinates.iter().map(|q| q.members.map_or(1, |m| m.upper - m.lower + 1)).sum();
    let k = model.constraints.len() as i64;
    let regular = match &w.derived.answers {
        Ok(a) => matches!(a.mass, MassVerdict::Regular) || k == 0 && matches!(a.mass, MassVerdict::NotPositive(_)),
        Err(_) => false,
    };
    // A large family's mass matrix may be left unasked.
    let unasked = w.derived.answers.as_ref().is_ok_and(|a| matches!(a.mass, MassVerdict::NotAsked));
    if k == 0 && (!w.checked.complete || !regular && !unasked) {
        return counted(n, "coordinate", "coordinates");
    }
    if k == 0 {
        return counted(n, "degree of freedom", "degrees of freedom");
    }
    let both = format!("{}, {}", counted(n, "coordinate", "coordinates"), counted(k, "constraint", "constraints"));
    if !w.checked.complete {
        return both;
    }
    let independent = leastwise_mechanics::surface::are_independent(&mut w.cx(), model).unwrap_or(false);
    if !independent || !regular || k > n {
        return both;
    }
    let moving = model.constraints.iter().any(|c| lagrange::depends_on_velocities(w.maker.arena, c.f));
    if moving {
        // Constraints on velocities leave the positions free where they cannot be integrated.
        return format!("{both}, {}", counted(n - k, "independent velocity", "independent velocities"));
    }
    format!("{} ({both})", counted(n - k, "degree of freedom", "degrees of freedom"))
}

/// Everything that is known to be conserved.
fn conserved(w: &mut Writer<'_, '_>, energy: &str) {
    let checked = w.checked;
    let model = &checked.model;
    let Ok(answers) = &w.derived.answers else { return };
    let mut lines: Vec<String> = Vec::new();
    let mut known: Vec<Expr> = Vec::new();
    if matches!(answers.energy_conserved, Ok(Verdict::Proved)) {
        lines.push(format!("h   ({energy})"));
    }
    for (i, q) in model.coordinates.iter().enumerate() {
        if q.members.is_some() || !answers.cyclic[i].momentum.is_proved() {
            continue;
        }
        if !lagrange::reaction(&mut w.cx(), model, q).is_ok_and(|r| r.is_empty()) {
            continue;
        }
        let Ok(p) = symmetry::charge(&mut w.cx(), model, &symmetry::shift(model, i)) else { continue };
        if p == Arena::ZERO {
            continue;
        }
        if lines.len() < SHOWN {
            let (name, text) = (q.label(w.maker.arena), w.text(p));
            let cyclic = answers.cyclic[i].cyclic.is_proved();
            let why = if cyclic { format!("   ({name} is cyclic)") } else { String::new() };
            lines.extend(labelled(&format!("p_{name} = "), &text, &why));
        } else {
            lines.push(String::new());
        }
        known.push(p);
    }
    for (claim, answer) in checked.symmetries.iter().zip(&w.derived.symmetries) {
        let Ok(a) = answer else { continue };
        let g = &a.symmetry.generator;
        let delay = g.tau == Arena::ONE && g.eta.iter().all(|&e| e == Arena::ZERO);
        let proved = matches!(a.conserved, Ok(Verdict::Proved));
        if delay || !proved || is_known(w, a.charge, answers.energy.function, &known) {
            continue;
        }
        known.push(a.charge);
        if lines.len() < SHOWN {
            let text = w.text(a.charge);
            lines.extend(labelled("", &text, &format!("   (charge of {})", claim.name)));
        } else {
            lines.push(String::new());
        }
    }
    for (claim, answer) in checked.conserved.iter().zip(&w.derived.conserved) {
        let proved = answer.as_ref().is_ok_and(|c| matches!(c.verdict, Ok(Verdict::Proved)));
        if !proved || is_known(w, claim.expr, answers.energy.function, &known) {
            continue;
        }
        known.push(claim.expr);
        if lines.len() < SHOWN {
            let text = w.text(claim.expr);
            lines.extend(labelled("", &text, &format!("   (claimed as {})", claim.name)));
        } else {
            lines.push(String::new());
        }
    }
    let more = lines.iter().filter(|l| l.is_empty()).count();
    lines.retain(|l| !l.is_empty());
    if more > 0 {
        lines.push(format!("and {more} more"));
    }
    if lines.is_empty() {
        return w.prose("Nothing is known to be conserved.");
    }
    w.prose("Conserved:");
    w.formulas(lines);
}

/// Whether a constant is one of those that are told already, or its negative.
fn is_known(w: &mut Writer<'_, '_>, e: Expr, h: Expr, known: &[Expr]) -> bool {
    const COMPARED: usize = 24;
    let list: Vec<Expr> = std::iter::once(h).chain(known.iter().copied()).take(COMPARED).collect();
    list.into_iter().any(|k| {
        let (gap, sum) = (w.maker.arena.sub(e, k), w.maker.arena.add(e, k));
        w.vanishes(gap) || w.vanishes(sum)
    })
}
