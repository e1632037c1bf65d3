//! Claims about coordinates: cyclic ones, and angles in which a potential is periodic.

use super::{Finding, culprit_names, finding, fix, list, places, related_parts};
use crate::checked::Checked;
use crate::derive::total;
use crate::mends;
use crate::report::Related;
use crate::sheet::Maker;
use crate::trade::effect;
use leastwise_algebra::{Expr, Function, Node, Rational, Verdict};
use leastwise_grammar::tree::Severity;
use leastwise_mechanics::context::{Context, Parts};
use leastwise_mechanics::model::TermKind;
use leastwise_mechanics::symmetry::shift;
use leastwise_mechanics::verdicts::{Answers, Culprit, dependent_parts};

pub(super) fn cyclic(maker: &mut Maker<'_>, checked: &Checked, answers: &Answers, out: &mut Vec<Finding>) {
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
                let force = culprit_force(maker, checked, i, &culprits).map(|f| {
                    let along = shift(checked.model(), i);
                    effect(maker, checked, &along, f)
                });
                let force = force.map_or(String::new(), |f| format!(": {f}"));
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
fn culprit_force(maker: &mut Maker<'_>, checked: &Checked, i: usize, culprits: &[Culprit]) -> Option<Expr> {
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
    Some(total(maker.arena, &parts))
}

/// A potential that is not 2π-periodic in an angle.
pub(super) fn periodicity(maker: &mut Maker<'_>, checked: &Checked, out: &mut Vec<Finding>) {
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
fn turned_once(maker: &mut Maker<'_>, e: Expr, atom: Expr, pi: Expr) -> Option<Parts> {
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
