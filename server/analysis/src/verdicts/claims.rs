//! Claimed symmetries: broken ones, those that hold against a claim, and what the charge's constancy meets.

use super::{Finding, culprit_names, finding, fix, list, one_line, places, related_parts};
use crate::checked::Checked;
use crate::derive::total;
use crate::mends;
use crate::report::{Fix, Related};
use crate::sheet::Maker;
use crate::trade::{blamed_share, effect, windings};
use leastwise_algebra::{Arena, Expr, Verdict};
use leastwise_grammar::tree::Severity;
use leastwise_mechanics::symmetry::{NoGenerator, Status};
use leastwise_mechanics::verdicts::{Culprit, SymmetryAnswer};

pub(super) fn symmetry(
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
            let share = blamed_share(maker, a);
            let verb = if names.len() == 1 { "breaks" } else { "break" };
            let effect = effect(maker, checked, &a.symmetry.generator, share);
            let at = places.first().map_or_else(|| claim.range.clone(), |p| p.1.clone());
            let mut f = finding(
                "symmetry-broken",
                Severity::Warning,
                at,
                format!("{} {verb} the symmetry `{name}`: {effect}", breakers(checked, &a.culprits, &names)),
            );
            if !a.smallest {
                f.message.push_str(" (of many sets of terms to blame, perhaps not a smallest one)");
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
    let Some(f) = a.gauge else { return };
    let gauge = one_line(&maker.prints.text(maker.arena, f));
    for when in windings(maker, checked, f) {
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

/// The terms to blame: one with its keyword, of several the names.
fn breakers(checked: &Checked, culprits: &[Culprit], names: &[String]) -> String {
    let ([one], [name]) = (culprits, names) else { return list(names) };
    let kind = crate::sheet::kind_name(checked.model().terms[one.term].kind);
    if name.starts_with(kind) { list(names) } else { format!("{kind} {}", list(names)) }
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

pub(super) fn no_generator(
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
