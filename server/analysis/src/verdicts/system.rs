//! The mass matrix, and the energy function of a system that depends on the time.

use super::{Finding, culprit_names, finding, list, one_line, places, related_parts};
use crate::checked::Checked;
use crate::derive::total;
use crate::sheet::Maker;
use leastwise_grammar::tree::Severity;
use leastwise_mechanics::verdicts::{Answers, MassVerdict};

pub(super) fn mass(maker: &mut Maker<'_>, checked: &Checked, answers: &Answers, out: &mut Vec<Finding>) {
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

pub(super) fn explicit_time(maker: &mut Maker<'_>, checked: &Checked, answers: &Answers, out: &mut Vec<Finding>) {
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
