//! Hovers of claims: the verdict with its grade, the generator, the charge, the balance law term by term.

use super::charge::{Charge, charge, energy_name};
use super::writer::{List, SHOWN, Writer, labelled, plural, quoted, short, with_kind, witness};
use crate::insights::{self, BracketRow, BracketStatus};
use crate::report::Answer;
use crate::trade::windings;
use leastwise_algebra::{Arena, Expr, Node, Rational, Verdict};
use leastwise_mechanics::context::Parts;
use leastwise_mechanics::lagrange::multiplier;
use leastwise_mechanics::model::{Action, TermKind};
use leastwise_mechanics::symmetry::{self, NoGenerator, Status};
use leastwise_mechanics::verdicts::SymmetryAnswer;

/// More known charges than this a claimed constant is not compared with.
const COMPARED: usize = 24;

/// The verdict on a symmetry in a few words. Of an incomplete model only what breaks it is told.
pub(super) fn verdict(w: &Writer<'_, '_>, a: &SymmetryAnswer) -> String {
    let complete = w.checked.complete;
    match &a.symmetry.status {
        Status::Broken => match breakers(w, a) {
            names if names.is_empty() => "broken".into(),
            names => format!("broken by {}", quoted(&names)),
        },
        _ if !complete => "not judged, the model is incomplete".into(),
        Status::Exact => "exact symmetry".into(),
        Status::UpToGauge => "symmetry up to a gauge term".into(),
        Status::Undecided(why) => format!("undecided: {why}"),
    }
}

/// The terms to blame for a broken claim.
fn breakers(w: &Writer<'_, '_>, a: &SymmetryAnswer) -> Vec<String> {
    a.culprits.iter().map(|c| w.checked.model.terms[c.term].name.clone()).collect()
}

/// The symbol of a claim's charge, and a share in its rate with the sign that goes with it.
pub(super) fn share(w: &mut Writer<'_, '_>, a: &SymmetryAnswer, e: Expr) -> (String, Expr) {
    let charge = charge(w, a);
    let e = if charge.sign < 0 { w.maker.arena.neg(e) } else { e };
    (charge.symbol, e)
}

/// Says what is known of a claimed symmetry.
pub(super) fn symmetry(w: &mut Writer<'_, '_>, k: usize) {
    let checked = w.checked;
    let claim = &checked.symmetries[k];
    let name = &claim.name;
    let a = match &w.derived.symmetries[k] {
        Ok(a) => a,
        Err(why) => {
            let why = no_generator(w, k, why);
            w.prose(format!("`{name}` is no family of transformations: {why}"));
            w.description(claim.description.as_deref());
            return w.missing();
        }
    };
    let charge = charge(w, a);
    let value = w.text(charge.value);
    let named = match (charge.name, short(&value)) {
        ("charge", Some(v)) => format!("`Q = {v}`"),
        (what, Some(v)) => format!("the {what} `{} = {v}`", charge.symbol),
        (what, None) => format!("the {what} `{}`", charge.symbol),
    };
    let rate = total_rate(w, a, &charge);
    let answer = match &a.conserved {
        Ok(v) => w.maker.answer(rate, &signed(*v, &charge)),
        Err(why) => Answer::Undecided(why.to_string()),
    };
    let first = first_line(w, k, &charge, &named, rate, &answer);
    w.prose(first);
    w.missing();
    w.description(claim.description.as_deref());
    let mut lines = generator(w, a);
    lines.extend(labelled(&format!("{} = ", charge.symbol), &value, ""));
    if let Some(f) = a.gauge {
        let f = w.text(f);
        let of = if a.symmetry.status == Status::Broken { ", for the terms not to blame" } else { "" };
        lines.extend(labelled("F = ", &f, &format!("   (δL = dF/dt{of})")));
    }
    let law = balance(w, a, &charge, rate, &answer);
    let gauge = if a.gauge.is_some() { ", gauge term" } else { "" };
    let what = match (law.is_empty(), checked.complete) {
        (true, _) => "",
        (false, true) => ", balance law",
        (false, false) => ", balance law of what is left of the model",
    };
    lines.extend(law);
    w.prose(format!("Generator, {}{gauge}{what}:", charge.name));
    w.formulas(lines);
    if checked.complete
        && !a.gauge_unknown
        && let Answer::No(Some(at)) = &answer
    {
        w.prose(format!("Refuted: d{}/dt is {}.", charge.symbol, witness(at)));
    }
    for when in a.gauge.map_or_else(Vec::new, |f| windings(w.maker, w.checked, f)) {
        w.prose(format!("F changes {when}: the charge is not single-valued."));
    }
    if a.gauge_unknown {
        w.prose(
            "L changes by a total time derivative dF/dt, of which no closed form was found: F is not in the charge.",
        );
    }
    if !a.smallest {
        w.prose("The set of terms to blame is minimal, perhaps not a smallest one.");
    }
    if checked.complete && answer == Answer::Yes {
        brackets(w, name);
    }
    match a.respects_constraints {
        Some(true) => w.prose("The flow preserves the constraints."),
        Some(false) => w.prose("The flow leaves the surface of the constraints."),
        None if !checked.model.constraints.is_empty() => {
            w.prose("Whether the flow preserves the constraints is undecided.");
        }
        None => {}
    }
}

/// The brackets of a claim's charge with the others.
fn brackets(w: &mut Writer<'_, '_>, claim: &str) {
    const SHOWN: usize = 4;
    let Some(report) = insights::algebra(w.maker, w.checked, w.derived) else { return };
    let (Some(own), Ok(algebra)) = (report.of_symmetry(claim), &report.algebra) else { return };
    if report.basis().count() < 2 {
        return;
    }
    let rows: Vec<&BracketRow> =
        algebra.brackets.iter().filter(|b| b.left == own.name || b.right == own.name).collect();
    if rows.is_empty() {
        return w.prose("Its Poisson brackets with the other charges vanish.");
    }
    let closed = |b: &&&BracketRow| b.status == BracketStatus::Closed && short(&b.value.text).is_some();
    let mut lines: Vec<String> = rows
        .iter()
        .filter(closed)
        .take(SHOWN)
        .map(|b| format!("{{{}, {}}} = {}", b.left, b.right, b.value.text))
        .collect();
    if lines.is_empty() {
        return;
    }
    if rows.len() > lines.len() {
        lines.push(format!("and {} more", rows.len() - lines.len()));
    }
    w.prose("Poisson brackets that do not vanish:");
    w.formulas(lines);
}

/// The witness of the presented charge's rate has its own sign only where the sign is +.
fn signed(v: Verdict, charge: &Charge) -> Verdict {
    match v {
        Verdict::Refuted(Some(w)) if charge.sign < 0 => {
            Verdict::Refuted(Some(leastwise_algebra::Witness { lower: -w.upper, upper: -w.lower, ..w }))
        }
        v => v,
    }
}

/// The rate of what is presented.
fn total_rate(w: &mut Writer<'_, '_>, a: &SymmetryAnswer, charge: &Charge) -> Expr {
    let rate = w.total(&a.rate);
    if charge.sign < 0 { w.maker.arena.neg(rate) } else { rate }
}

fn first_line(w: &mut Writer<'_, '_>, k: usize, charge: &Charge, named: &str, rate: Expr, answer: &Answer) -> String {
    let Ok(a) = &w.derived.symmetries[k] else { return String::new() };
    let claim = &w.checked.symmetries[k];
    let name = &claim.name;
    if a.symmetry.status == Status::Broken {
        let how = verdict(w, a);
        let meant = if claim.expected_broken { ", as declared" } else { "" };
        if w.checked.complete && *answer == Answer::Yes {
            return format!("`{name}` is no symmetry of L ({how}), yet {named} is conserved (proved)");
        }
        let text = w.text(rate);
        let law = short(&text).map_or(String::new(), |r| format!(": `d{}/dt = {r}`", charge.symbol));
        return format!("`{name}` is {how}{meant} (refuted){law}");
    }
    if !w.checked.complete {
        return format!("`{name}` is not judged: the model is incomplete");
    }
    let what = match &a.symmetry.status {
        Status::Exact => "an exact symmetry",
        Status::UpToGauge => "a symmetry up to a gauge term",
        Status::Broken | Status::Undecided(_) => {
            let why = match &a.symmetry.status {
                Status::Undecided(why) => why.clone(),
                _ => String::new(),
            };
            return format!("Whether `{name}` is a symmetry is undecided: {why}");
        }
    };
    if a.gauge_unknown {
        return format!("`{name}` is {what} (proved), of which no closed form was found: its constant is not known");
    }
    let takers = takers(w, a);
    let unexpected = if claim.expected_broken { ", though it is declared broken" } else { "" };
    match answer {
        Answer::Yes => format!("`{name}` is {what} (proved){unexpected}: {named} is conserved"),
        Answer::No(_) if takers.is_empty() => {
            format!("`{name}` is {what} of L (proved), but reactions change {named}")
        }
        Answer::No(_) => {
            let verb = plural(takers.len(), "changes", "change");
            format!("`{name}` is {what} of L (proved), but {} {verb} {named}", quoted(&takers))
        }
        Answer::Undecided(why) => {
            format!("`{name}` is {what} of L (proved); whether {named} is conserved is undecided: {why}")
        }
    }
}

/// The forces that change the charge.
fn takers(w: &mut Writer<'_, '_>, a: &SymmetryAnswer) -> Vec<String> {
    let forces = w.checked.model.forces.iter().zip(&a.taken);
    let acting: Vec<_> = forces.filter(|(_, e)| **e != Arena::ZERO).map(|(f, e)| (f.name.clone(), *e)).collect();
    acting.into_iter().filter(|(_, e)| !w.vanishes(*e)).map(|f| f.0).collect()
}

/// τ and the ηⁱ that are not zero.
fn generator(w: &mut Writer<'_, '_>, a: &SymmetryAnswer) -> Vec<String> {
    let g = &a.symmetry.generator;
    let mut list = List::new();
    if g.tau != Arena::ZERO && list.wants() {
        let text = w.text(g.tau);
        list.add(labelled("τ = ", &text, ""));
    }
    for (q, &eta) in w.checked.model.coordinates.iter().zip(&g.eta) {
        if eta != Arena::ZERO && list.wants() {
            let (name, text) = (q.label(w.maker.arena), w.text(eta));
            list.add(labelled(&format!("η_{name} = "), &text, ""));
        }
    }
    let lines = list.done();
    if lines.is_empty() { vec!["τ = 0, η = 0".into()] } else { lines }
}

/// d/dt of the charge on motions, with who contributes what. Of an incomplete model no conservation is told.
fn balance(w: &mut Writer<'_, '_>, a: &SymmetryAnswer, charge: &Charge, rate: Expr, answer: &Answer) -> Vec<String> {
    let symbol = &charge.symbol;
    if *answer == Answer::Yes {
        return if w.checked.complete { vec![format!("d{symbol}/dt = 0")] } else { Vec::new() };
    }
    let shares = shares(w, a, charge);
    let text = w.text(rate);
    let mut lines = labelled(&format!("d{symbol}/dt = "), &text, "");
    if let [(name, _)] = &shares[..]
        && let Some(line) = lines.last_mut()
    {
        line.push_str(&format!("   ({name})"));
        return lines;
    }
    let mut list = List::new();
    for (name, e) in shares {
        if list.wants() {
            let text = w.text(e);
            list.add(labelled(&format!("    {name}: "), &text, ""));
        }
    }
    lines.extend(list.done());
    lines
}

/// Who changes the charge: terms, forces, dissipations, reactions.
fn shares(w: &mut Writer<'_, '_>, a: &SymmetryAnswer, charge: &Charge) -> Vec<(String, Expr)> {
    let model = &w.checked.model;
    let mut out: Vec<(String, Expr)> = Vec::new();
    // Where F is known, the terms that are not to blame have their whole variation in it.
    let settled = !a.gauge_unknown && matches!(a.symmetry.status, Status::Exact | Status::UpToGauge | Status::Broken);
    for (t, parts) in a.symmetry.variations.iter().enumerate() {
        let blamed = a.culprits.iter().any(|c| c.term == t);
        if settled && !blamed {
            continue;
        }
        let parts: Parts = parts.iter().filter(|p| p.0 != Arena::ZERO).cloned().collect();
        let e = w.total(&parts);
        let term = &model.terms[t];
        let kind = match term.kind {
            TermKind::Kinetic => "kinetic",
            TermKind::Potential => "potential",
            TermKind::Lagrangian => "lagrangian",
        };
        out.push((with_kind(kind, &term.name), e));
    }
    for (f, &e) in model.forces.iter().zip(&a.taken) {
        let kind = match f.action {
            Action::Applied(_) => "force",
            Action::Dissipation(_) => "dissipation",
        };
        out.push((with_kind(kind, &f.name), e));
    }
    for c in &model.constraints {
        let lambda = multiplier(w.maker.arena, &c.name);
        let holds = |p: &&(Expr, Rational)| factor(w, p.0, lambda);
        let parts: Parts = a.rate.iter().filter(holds).cloned().collect();
        let e = w.total(&parts);
        out.push((format!("reaction of {}", c.name), e));
    }
    out.retain(|(_, e)| *e != Arena::ZERO);
    let mut kept = Vec::new();
    for (name, e) in out {
        if !w.vanishes(e) {
            kept.push((name, if charge.sign < 0 { w.maker.arena.neg(e) } else { e }));
        }
    }
    kept
}

/// Whether an expression is a product with this factor.
fn factor(w: &Writer<'_, '_>, e: Expr, of: Expr) -> bool {
    e == of
        || matches!(w.maker.arena.node(e), Node::Product(_)) && w.maker.arena.factors(e).iter().any(|f| f.0 == of)
        || matches!(w.maker.arena.node(e), Node::Sum(..)) && w.maker.arena.atoms(e).contains(&of)
}

/// Why there is no generator, in words.
fn no_generator(w: &mut Writer<'_, '_>, k: usize, why: &NoGenerator) -> String {
    let claim = &w.checked.symmetries[k];
    let mut source = |k: &usize| claim.images.get(*k).map_or("it".into(), |i| w.text(i.source));
    match why {
        NoGenerator::NotTheIdentity(k) => {
            let x = source(k);
            format!("at ε = 0 the image of {x} is not {x}")
        }
        NoGenerator::Velocities(k) => format!("the image of {} contains velocities", source(k)),
        NoGenerator::NoCoordinate(k) => format!("{} is neither a coordinate nor the time", source(k)),
        NoGenerator::SingleMember(k) => format!("{} is one member of a family of more than 64", source(k)),
        NoGenerator::Stopped(s) => s.to_string(),
    }
}

/// Says what is known of a claimed constant, or of its components.
pub(super) fn conserved(w: &mut Writer<'_, '_>, first: usize) {
    let checked = w.checked;
    let start = checked.conserved[first].range.start;
    let own: Vec<usize> = (0..checked.conserved.len()).filter(|&k| checked.conserved[k].range.start == start).collect();
    for &k in own.iter().take(SHOWN) {
        constant(w, k);
    }
    if own.len() > SHOWN {
        w.prose(format!("and {} more components", own.len() - SHOWN));
    }
    w.description(checked.conserved[first].description.as_deref());
    w.missing();
}

fn constant(w: &mut Writer<'_, '_>, k: usize) {
    let checked = w.checked;
    let claim = &checked.conserved[k];
    let name = &claim.name;
    let known = if checked.complete { equals(w, claim.expr) } else { Vec::new() };
    let (answer, rate) = match &w.derived.conserved[k] {
        Ok(c) => {
            // The rate of a known charge is free of accelerations.
            let rate = known.iter().find_map(|k| k.1).unwrap_or(c.rate);
            let answer = match &c.verdict {
                Ok(v) => {
                    let of = w.maker.along_motions(&checked.model, rate);
                    w.maker.answer(of, v)
                }
                Err(why) => Answer::Undecided(why.to_string()),
            };
            (answer, Some(rate))
        }
        Err(why) => (Answer::Undecided(why.to_string()), None),
    };
    let equal: Vec<String> = known.into_iter().map(|k| k.0).collect();
    let equal = equal.join(", which is ");
    let it_is = if equal.is_empty() { String::new() } else { format!(": it is {equal}") };
    let which = if equal.is_empty() { String::new() } else { format!(", which is {equal},") };
    w.prose(match &answer {
        _ if !checked.complete => format!("`{name}` is not judged: the model is incomplete"),
        Answer::Yes => format!("`{name}` is conserved (proved){it_is}"),
        Answer::No(_) => format!("`{name}` is not conserved (refuted){it_is}"),
        Answer::Undecided(why) => format!("Whether `{name}`{which} is conserved is undecided: {why}"),
    });
    let text = w.text(claim.expr);
    let mut lines = labelled(&format!("{name} = "), &text, "");
    if checked.complete {
        if answer == Answer::Yes {
            lines.push(format!("d/dt {name} = 0"));
        } else if let Some(rate) = rate {
            let rate = w.text(rate);
            lines.extend(labelled(&format!("d/dt {name} = "), &rate, ""));
        }
    }
    w.formulas(lines);
    if checked.complete {
        let more = match &answer {
            Answer::Yes => match crate::amends::origin(w.maker, checked, w.derived, k) {
                origin if origin.is_empty() => None,
                origin => Some(format!("It comes {origin}.").replace("comes a ", "is a ")),
            },
            Answer::No(_) => crate::amends::fixes(w.maker, checked, w.derived, k).into_iter().next().map(|f| {
                let said = f.0;
                let mut letters = said.chars();
                letters.next().map_or(String::new(), |c| format!("{}{}.", c.to_uppercase(), letters.as_str()))
            }),
            Answer::Undecided(_) => None,
        };
        if let Some(more) = more {
            w.prose(more);
        }
    }
    // A verdict that was taken from a known charge has that one's witness.
    let own = checked.model.constraints.is_empty() && w.derived.answers.as_ref().is_ok_and(|a| a.rows.is_some());
    if checked.complete
        && own
        && let Answer::No(Some(at)) = &answer
    {
        w.prose(format!("For instance d/dt {name} is {}.", witness(at)));
    }
}

/// The known charges that a claimed constant is, with their sign, and the constant's rate where it is known from them.
fn equals(w: &mut Writer<'_, '_>, claim: Expr) -> Vec<(String, Option<Expr>)> {
    let model = &w.checked.model;
    let mut known: Vec<(String, Expr, Option<Expr>)> = Vec::new();
    if let Ok(answers) = &w.derived.answers {
        let h = answers.energy.function;
        let (name, rate) = (energy_name(w, h), w.total(&answers.energy.rate));
        known.push((format!("the {name}"), h, Some(rate)));
        for (i, q) in model.coordinates.iter().enumerate() {
            if q.members.is_none()
                && answers.cyclic[i].cyclic.is_proved()
                && let Ok(p) = symmetry::charge(&mut w.cx(), model, &symmetry::shift(model, i))
            {
                known.push((format!("the canonical momentum `p_{}`", q.label(w.maker.arena)), p, None));
            }
        }
    }
    for (symmetry, answer) in w.checked.symmetries.iter().zip(&w.derived.symmetries) {
        let Ok(a) = answer else { continue };
        let g = &a.symmetry.generator;
        if g.tau != Arena::ONE || g.eta.iter().any(|&e| e != Arena::ZERO) {
            let rate = w.total(&a.rate);
            known.push((format!("the charge of `{}`", symmetry.name), a.charge, Some(rate)));
        }
    }
    let mut out = Vec::new();
    for (name, e, rate) in known.into_iter().take(COMPARED) {
        let (gap, sum) = (w.maker.arena.sub(claim, e), w.maker.arena.add(claim, e));
        if claim == Arena::ZERO {
            continue;
        }
        if w.vanishes(gap) {
            out.push((name, rate));
        } else if w.vanishes(sum) {
            let rate = rate.map(|r| w.maker.arena.neg(r));
            out.push((format!("minus {name}"), rate));
        }
    }
    out
}
