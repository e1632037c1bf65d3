//! Findings from verdicts: broken claims, wrong constants, singular mass matrices. Each lies on the text that causes it.

use crate::checked::Checked;
use crate::derive::{Derived, total};
use crate::mends;
use crate::report::{Finding, Fix, Related};
use crate::sheet::Maker;
use leastwise_algebra::{Arena, Expr, Function, Node, Rational, Verdict};
use leastwise_grammar::tree::Severity;
use leastwise_mechanics::context::{Context, Parts};
use leastwise_mechanics::gauge::{self, Winding};
use leastwise_mechanics::model::TermKind;
use leastwise_mechanics::symmetry::{NoGenerator, Status};
use leastwise_mechanics::verdicts::{Answers, Culprit, MassVerdict, SymmetryAnswer, dependent_parts};
use std::ops::Range;

fn finding(code: &'static str, severity: Severity, range: Range<usize>, message: String) -> Finding {
    Finding { code, severity, message, help: None, range, related: Vec::new(), fixes: Vec::new() }
}

fn fix(title: impl Into<String>, edits: Option<mends::Edits>) -> Option<Fix> {
    edits.map(|edits| Fix { title: title.into(), edits })
}

/// All findings that need the mechanics.
pub(crate) fn findings(maker: &mut Maker<'_>, checked: &Checked, derived: &Derived) -> Vec<Finding> {
    let mut out = Vec::new();
    match &derived.answers {
        Ok(answers) => {
            cyclic(maker, checked, answers, &mut out);
            mass(maker, checked, answers, &mut out);
            // A claimed delay says it already.
            let claimed = derived.symmetries.iter().flatten().any(|a| {
                let g = &a.symmetry.generator;
                g.tau == Arena::ONE && g.eta.iter().all(|&e| e == Arena::ZERO)
            });
            if !claimed {
                explicit_time(maker, checked, answers, &mut out);
            }
        }
        Err(stopped) => out.push(finding(
            "too-large",
            Severity::Warning,
            checked.system_range(),
            format!("the equations of motion are not derived: {stopped}"),
        )),
    }
    for (claim, answer) in checked.symmetries().iter().zip(&derived.symmetries) {
        match answer {
            Ok(a) => symmetry(maker, checked, claim, a, &mut out),
            Err(why) => no_generator(maker, checked, claim, why, &mut out),
        }
    }
    for (claim, answer) in checked.conserved().iter().zip(&derived.conserved) {
        let name = &claim.name;
        match answer {
            Ok(c) => match &c.verdict {
                Ok(Verdict::Proved) => {}
                Ok(Verdict::Refuted(_)) => {
                    let rate = maker.prints.text(maker.arena, c.rate);
                    out.push(finding(
                        "not-conserved",
                        Severity::Warning,
                        claim.range.clone(),
                        format!("`{name}` is not conserved: its rate {} does not vanish on motions", one_line(&rate)),
                    ));
                }
                Ok(Verdict::Undecided(reason)) => out.push(undecided(claim.range.clone(), name, &reason.to_string())),
                Err(reason) => out.push(undecided(claim.range.clone(), name, &reason.to_string())),
            },
            Err(stopped) => out.push(undecided(claim.range.clone(), name, &stopped.to_string())),
        }
    }
    periodicity(maker, checked, &mut out);
    if !checked.complete {
        // What a broken item says is missing: whatever it might still change is not told.
        out.retain(|f| matches!(f.code, "not-cyclic" | "symmetry-broken" | "not-periodic" | "not-the-identity"));
    }
    out
}

fn undecided(range: Range<usize>, name: &str, reason: &str) -> Finding {
    finding("undecided", Severity::Information, range, format!("whether `{name}` is conserved is undecided: {reason}"))
}

/// Long formulas are cut: the sheet has them in full.
fn one_line(text: &str) -> String {
    const LONGEST: usize = 160;
    let line = text.lines().next().unwrap_or_default();
    if line.chars().count() <= LONGEST {
        return line.to_string();
    }
    let cut: String = line.chars().take(LONGEST).collect();
    format!("{cut} …")
}

/// The ranges of all culprit parts, the first as the place of the finding.
fn places(checked: &Checked, culprits: &[Culprit]) -> Vec<(usize, Range<usize>)> {
    let mut out = Vec::new();
    for c in culprits {
        if c.parts.is_empty() {
            out.push((c.term, checked.term_range(c.term)));
        }
        for &p in &c.parts {
            out.push((c.term, checked.part_range(c.term, p)));
        }
    }
    out
}

/// `a`, `a` and `b`, `a`, `b` and `c`.
fn list(names: &[String]) -> String {
    const NAMED: usize = 5;
    let mut quoted: Vec<String> = names.iter().take(NAMED).map(|n| format!("`{n}`")).collect();
    if names.len() > NAMED {
        quoted.push(format!("{} more", names.len() - NAMED));
    }
    match quoted.as_slice() {
        [] => String::new(),
        [one] => one.clone(),
        [rest @ .., last] => format!("{} and {last}", rest.join(", ")),
    }
}

fn culprit_names(checked: &Checked, culprits: &[Culprit]) -> Vec<String> {
    culprits.iter().map(|c| checked.model().terms[c.term].name.clone()).collect()
}

fn related_parts(checked: &Checked, rest: &[(usize, Range<usize>)]) -> Vec<Related> {
    const SHOWN: usize = 8;
    rest.iter()
        .take(SHOWN)
        .map(|(t, range)| Related {
            range: range.clone(),
            message: format!("`{}` has a part in it", checked.model().terms[*t].name),
        })
        .collect()
}

fn cyclic(maker: &mut Maker<'_>, checked: &Checked, answers: &Answers, out: &mut Vec<Finding>) {
    for (i, range) in checked.cyclic_claims() {
        let verdict = &answers.cyclic[i];
        let q = checked.model().coordinates[i].label(maker.arena);
        match &verdict.cyclic {
            Verdict::Proved => {}
            Verdict::Undecided(reason) => out.push(finding(
                "undecided",
                Severity::Information,
                range,
                format!("whether `{q}` is cyclic is undecided: {reason}"),
            )),
            Verdict::Refuted(_) => {
                let mut cx =
                    Context { arena: maker.arena, zero: maker.zero, budget: maker.budget, memory: maker.memory };
                let culprits = dependent_parts(&mut cx, checked.model(), i).unwrap_or_default();
                let mut places = places(checked, &culprits);
                if places.is_empty() {
                    places.push((0, range.clone()));
                }
                let names = culprit_names(checked, &culprits);
                let force = culprit_force(maker, checked, i, &culprits);
                let force = force.map_or(String::new(), |f| format!(": it exerts the generalised force {f}"));
                let verb = if names.len() == 1 { "depends" } else { "depend" };
                let Some((_, at)) = places.first() else { continue };
                let mut f = finding(
                    "not-cyclic",
                    Severity::Warning,
                    at.clone(),
                    format!("{} {verb} on {q}, which is claimed cyclic{force}", list(&names)),
                );
                f.help = Some(format!("drop `cyclic` before {q}, or the part of the term that depends on it"));
                f.related = related_parts(checked, &places[1..]);
                f.fixes.extend(fix("take `cyclic` away: the claim is dropped", mends::without_cyclic(checked, &range)));
                f.related.push(Related { range, message: format!("{q} is claimed cyclic here") });
                out.push(f);
            }
        }
    }
}

/// −∂U/∂q or ∂L/∂q of the culprit parts.
fn culprit_force(maker: &mut Maker<'_>, checked: &Checked, i: usize, culprits: &[Culprit]) -> Option<String> {
    let model = checked.model();
    let q = &model.coordinates[i];
    if q.members.is_some() {
        return None;
    }
    let atom = q.jet(maker.arena, 0);
    let mut parts = Parts::new();
    for c in culprits {
        let term = &model.terms[c.term];
        for &p in &c.parts {
            let d = maker.arena.partial(term.parts[p], atom, maker.budget).ok()?;
            parts.push((d, Rational::integer(term.sign())));
        }
    }
    let e = total(maker.arena, &parts);
    Some(one_line(&maker.prints.text(maker.arena, e)))
}

fn mass(maker: &mut Maker<'_>, checked: &Checked, answers: &Answers, out: &mut Vec<Finding>) {
    let name = |maker: &Maker<'_>, i: usize| checked.model().coordinates[i].label(maker.arena);
    match &answers.mass {
        MassVerdict::Regular | MassVerdict::NotAsked => {}
        MassVerdict::Undecided(reason) => out.push(finding(
            "undecided",
            Severity::Information,
            checked.system_range(),
            format!("whether the mass matrix is singular is undecided: {reason}"),
        )),
        MassVerdict::Singular(idle) if idle.is_empty() => out.push(finding(
            "singular-mass-matrix",
            Severity::Warning,
            checked.system_range(),
            "the mass matrix is singular everywhere: the kinetic terms do not determine all accelerations".into(),
        )),
        MassVerdict::Singular(idle) => {
            for &i in idle {
                let q = name(maker, i);
                let mut f = finding(
                    "singular-mass-matrix",
                    Severity::Warning,
                    checked.coordinate_range(i),
                    format!("the mass matrix is singular: no term is quadratic in {q}', so that {q} has no inertia"),
                );
                f.help = Some(format!("add a kinetic term with {q}', or replace the coordinate by a constraint"));
                out.push(f);
            }
        }
        MassVerdict::NotPositive(of) => {
            let names: Vec<String> = of.iter().map(|&i| name(maker, i)).collect();
            let at = of.last().map_or_else(|| checked.system_range(), |&i| checked.coordinate_range(i));
            out.push(finding(
                "mass-matrix-not-positive",
                Severity::Warning,
                at,
                format!("the mass matrix is not positive definite under the assumptions: see {}", list(&names)),
            ));
        }
    }
}

fn explicit_time(maker: &mut Maker<'_>, checked: &Checked, answers: &Answers, out: &mut Vec<Finding>) {
    if answers.timely.is_empty() {
        return;
    }
    let places = places(checked, &answers.timely);
    let names = culprit_names(checked, &answers.timely);
    let verb = if names.len() == 1 { "depends" } else { "depend" };
    let Some((_, at)) = places.first() else { return };
    let rate = total(maker.arena, &answers.energy.rate);
    let rate = one_line(&maker.prints.text(maker.arena, rate));
    let mut f = finding(
        "explicit-time",
        Severity::Information,
        at.clone(),
        format!(
            "the energy function is not conserved: {} {verb} on the time explicitly; its rate is {rate}",
            list(&names)
        ),
    );
    f.related = related_parts(checked, &places[1..]);
    out.push(f);
}

fn symmetry(
    maker: &mut Maker<'_>,
    checked: &Checked,
    claim: &crate::checked::SymmetryClaim,
    a: &SymmetryAnswer,
    out: &mut Vec<Finding>,
) {
    let name = &claim.name;
    match &a.symmetry.status {
        Status::Undecided(reason) => out.push(finding(
            "undecided",
            Severity::Information,
            claim.range.clone(),
            format!("whether `{name}` is a symmetry is undecided: {reason}"),
        )),
        Status::Broken if claim.expected_broken => {
            if matches!(a.conserved, Ok(Verdict::Proved)) {
                holds_after_all(maker, checked, claim, a, out);
            }
        }
        Status::Broken => {
            let places = places(checked, &a.culprits);
            let names = culprit_names(checked, &a.culprits);
            let mut parts = Parts::new();
            for c in &a.culprits {
                parts.extend(a.symmetry.variations[c.term].iter().cloned());
            }
            let share = total(maker.arena, &parts);
            let share = one_line(&maker.prints.text(maker.arena, share));
            let verb = if names.len() == 1 { "breaks" } else { "break" };
            let effect = effect(maker, checked, a, &share);
            let at = places.first().map_or_else(|| claim.range.clone(), |p| p.1.clone());
            let mut f = finding(
                "symmetry-broken",
                Severity::Warning,
                at,
                format!("{} {verb} the symmetry `{name}`: {effect}", list(&names)),
            );
            if !a.smallest {
                f.message.push_str(" (a minimal set of terms to blame, perhaps not a smallest one)");
            }
            f.help = Some(format!("write `broken symmetry {name}` if this is meant"));
            f.related = related_parts(checked, places.get(1..).unwrap_or_default());
            f.related.push(Related { range: claim.range.clone(), message: format!("`{name}` is claimed here") });
            let title = format!("declare `{name}` broken: it is known to give no constant of the motion");
            f.fixes.extend(fix(title, mends::broken(checked, &claim.range, true)));
            out.push(f);
        }
        Status::Exact | Status::UpToGauge => {
            if claim.expected_broken {
                if matches!(a.conserved, Ok(Verdict::Proved)) {
                    holds_after_all(maker, checked, claim, a, out);
                }
                return;
            }
            if a.gauge_unknown {
                out.push(finding(
                    "gauge-not-found",
                    Severity::Information,
                    claim.range.clone(),
                    format!("`{name}` holds up to a total time derivative, of which no closed form was found"),
                ));
            }
            multivalued(maker, checked, claim, a, out);
            if matches!(a.conserved, Ok(Verdict::Refuted(_))) {
                let forces: Vec<String> = checked
                    .model()
                    .forces
                    .iter()
                    .zip(&a.taken)
                    .filter(|(_, e)| **e != Arena::ZERO)
                    .map(|(f, _)| f.name.clone())
                    .collect();
                if forces.is_empty() {
                    return;
                }
                let rate = total(maker.arena, &a.rate);
                let rate = one_line(&maker.prints.text(maker.arena, rate));
                let verb = if forces.len() == 1 { "changes" } else { "change" };
                out.push(finding(
                    "charge-taken",
                    Severity::Information,
                    claim.range.clone(),
                    format!(
                        "L is invariant under `{name}`, but {} {verb} the charge at the rate {rate}",
                        list(&forces)
                    ),
                ));
            }
        }
    }
}

/// A gauge term that changes when an angle makes a full turn, or on a way around an axis: the charge is a function on the
/// covering space only.
fn multivalued(
    maker: &mut Maker<'_>,
    checked: &Checked,
    claim: &crate::checked::SymmetryClaim,
    a: &SymmetryAnswer,
    out: &mut Vec<Finding>,
) {
    let Some(gauge) = a.gauge else { return };
    let model = checked.model();
    let angles: Vec<usize> = checked.angles().collect();
    let mut cx = Context { arena: maker.arena, zero: maker.zero, budget: maker.budget, memory: maker.memory };
    let Ok(windings) = gauge::multivalued(&mut cx, model, gauge, &angles) else { return };
    let gauge = one_line(&maker.prints.text(maker.arena, gauge));
    for winding in windings {
        let when = match winding {
            Winding::Turn(i) => format!("when {} turns by 2π", model.coordinates[i].label(maker.arena)),
            Winding::Axis(y, x) => {
                let (x, y) = (maker.prints.text(maker.arena, x), maker.prints.text(maker.arena, y));
                format!("on a way around the axis {} = 0, {} = 0", one_line(&x), one_line(&y))
            }
        };
        out.push(finding(
            "gauge-multivalued",
            Severity::Information,
            claim.range.clone(),
            format!(
                "`{}` holds up to d/dt of {gauge}, which changes {when}: its charge is not single-valued",
                claim.name
            ),
        ));
    }
}

/// What the variation is in the trade's words: a generalised force along one coordinate, else a change of L.
fn effect(maker: &mut Maker<'_>, checked: &Checked, a: &SymmetryAnswer, share: &str) -> String {
    let g = &a.symmetry.generator;
    let moved: Vec<usize> = (0..g.eta.len()).filter(|&i| g.eta[i] != Arena::ZERO).collect();
    if g.tau == Arena::ZERO
        && let [i] = moved[..]
        && g.eta[i] == Arena::ONE
        && checked.model().coordinates[i].members.is_none()
    {
        let q = checked.model().coordinates[i].label(maker.arena);
        return format!("generalised force {share} along {q}");
    }
    format!("L changes at the rate {share}")
}

fn holds_after_all(
    maker: &mut Maker<'_>,
    checked: &Checked,
    claim: &crate::checked::SymmetryClaim,
    a: &SymmetryAnswer,
    out: &mut Vec<Finding>,
) {
    let charge = one_line(&maker.prints.text(maker.arena, a.charge));
    let mut f = finding(
        "broken-symmetry-holds",
        Severity::Warning,
        claim.range.clone(),
        format!("`{}` is declared broken, but its charge {charge} is conserved", claim.name),
    );
    f.help = Some("write `symmetry` without `broken`".into());
    f.fixes.extend(fix("take `broken` away", mends::broken(checked, &claim.range, false)));
    out.push(f);
}

fn no_generator(
    maker: &mut Maker<'_>,
    checked: &Checked,
    claim: &crate::checked::SymmetryClaim,
    why: &NoGenerator,
    out: &mut Vec<Finding>,
) {
    let source = |maker: &mut Maker<'_>, k: usize| maker.prints.text(maker.arena, claim.images[k].source);
    let place = |k: usize| claim.image_ranges.get(k).cloned().unwrap_or_else(|| claim.range.clone());
    let (code, severity, range, message, help) = match why {
        NoGenerator::NotTheIdentity(k) => {
            let x = source(maker, *k);
            (
                "not-the-identity",
                Severity::Error,
                place(*k),
                format!("at ε = 0 the image of {x} is not {x}: the family must begin at the identity"),
                Some(format!("write {x} -> {x} + ε (…), or another image that becomes {x} at ε = 0")),
            )
        }
        NoGenerator::Velocities(k) => (
            "transformation-of-velocities",
            Severity::Error,
            place(*k),
            "the image contains velocities: only transformations of positions and time are read".to_string(),
            None,
        ),
        NoGenerator::NoCoordinate(k) => {
            let x = source(maker, *k);
            (
                "no-coordinate",
                Severity::Error,
                place(*k),
                format!("{x} is neither a coordinate nor the time, and is not transformed"),
                None,
            )
        }
        NoGenerator::SingleMember(k) => {
            let x = source(maker, *k);
            (
                "single-member",
                Severity::Warning,
                place(*k),
                format!("{x} is one member of a family of more than 64: its own transformation is not derived"),
                Some("transform the whole family with an index, x[i] -> …".to_string()),
            )
        }
        NoGenerator::Stopped(s) => (
            "too-large",
            Severity::Warning,
            claim.range.clone(),
            format!("the symmetry `{}` is not derived: {s}", claim.name),
            None,
        ),
    };
    let mut f = finding(code, severity, range, message);
    f.help = help;
    if let NoGenerator::NotTheIdentity(k) = why
        && vanishes_at_zero(maker, claim.images[*k].target)
        && let Some((title, edits)) = mends::with_source(checked, &claim.range, &f.range)
    {
        f.fixes.push(Fix { title, edits });
    }
    out.push(f);
}

/// Whether an image is zero at ε = 0: then the coordinate itself was forgotten.
fn vanishes_at_zero(maker: &mut Maker<'_>, target: Expr) -> bool {
    let epsilon = leastwise_mechanics::model::epsilon(maker.arena);
    let map = [(maker.arena.sym(epsilon), Arena::ZERO)].into_iter().collect();
    maker.arena.substitute(target, &map, maker.budget).is_ok_and(|e| e == Arena::ZERO)
}

/// A potential that is not 2π-periodic in an angle.
fn periodicity(maker: &mut Maker<'_>, checked: &Checked, out: &mut Vec<Finding>) {
    let model = checked.model();
    let pi = maker.arena.pi();
    for i in checked.angles() {
        let q = &model.coordinates[i];
        if q.members.is_some() {
            continue;
        }
        let atom = q.jet(maker.arena, 0);
        for (t, term) in model.terms.iter().enumerate() {
            if term.kind != TermKind::Potential {
                continue;
            }
            let mut changes: Vec<(usize, Parts)> = Vec::new();
            for (p, &part) in term.parts.iter().enumerate() {
                if let Some(parts) = turned_once(maker, part, atom, pi) {
                    changes.push((p, parts));
                }
            }
            let all: Parts = changes.iter().flat_map(|(_, c)| c.iter().cloned()).collect();
            if all.is_empty() {
                continue;
            }
            let mut cx = Context { arena: maker.arena, zero: maker.zero, budget: maker.budget, memory: maker.memory };
            if !matches!(cx.vanishes(&all), Verdict::Refuted(_)) {
                continue;
            }
            let name = q.label(cx.arena);
            let guilty = changes
                .iter()
                .find(|(_, c)| matches!(cx.vanishes(c), Verdict::Refuted(_)))
                .map_or_else(|| checked.term_range(t), |(p, _)| checked.part_range(t, *p));
            let mut f = finding(
                "not-periodic",
                Severity::Warning,
                guilty,
                format!("`{}` changes when {name} turns by 2π, though {name} is an angle", term.name),
            );
            f.help = Some(format!("declare {name} as `twist` if it counts its turns"));
            let title = format!("declare {name} as `twist`: it counts its turns");
            f.fixes.extend(fix(title, mends::twisted(checked, &checked.coordinate_range(i))));
            f.related.push(Related {
                range: checked.coordinate_range(i),
                message: format!("{name} is an angle, the same after a full turn"),
            });
            out.push(f);
        }
    }
}

/// What a full turn of `atom` adds to `e`, as parts; `None` where it stands in sines and cosines only, with integers.
pub(crate) fn turned_once(maker: &mut Maker<'_>, e: Expr, atom: Expr, pi: Expr) -> Option<Parts> {
    if !maker.arena.atoms(e).contains(&atom) {
        return None;
    }
    let turned = maker.arena.linear(&[(atom, Rational::ONE), (pi, Rational::integer(2))]);
    let map = [(atom, turned)].into_iter().collect();
    let after = maker.arena.substitute(e, &map, maker.budget).ok()?;
    // Unspecified functions of the angle may have its period: nothing is known of them.
    let mut unknown = false;
    maker.arena.visit(e, &mut |_, node| {
        unknown |= matches!(node, Node::Unspecified { .. } | Node::Call(Function::Atan2, _));
    });
    (after != e && !unknown).then(|| vec![(after, Rational::ONE), (e, Rational::MINUS_ONE)])
}
