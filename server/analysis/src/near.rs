//! Near misses in words: the conditions on parameters under which a broken claim holds, and a comment that says so.

use crate::checked::Checked;
use crate::derive::Derived;
use crate::mends::line_end;
use crate::report::{Finding, Fix};
use crate::sheet::Maker;
use leastwise_algebra::{Arena, Expr, Node, Rational};
use leastwise_mechanics::amends::rate_on_motions;
use leastwise_mechanics::context::{Context, Parts};
use leastwise_mechanics::lagrange::{depends_on_velocities, force, questions, residual, signed_parts};
use leastwise_mechanics::near::{Condition, MAX_DENSE, Near, near};
use leastwise_mechanics::symmetry::Status;
use leastwise_mechanics::verdicts::Culprit;
use std::ops::Range;

/// Nodes that one claim's near misses may visit or make: they are looked for with every change of the text.
const NODES: u64 = 2_000_000;

/// `holds if k₁ = k₂, or if B = 0` for a broken symmetry claim.
pub(crate) fn of_symmetry(maker: &mut Maker<'_>, checked: &Checked, derived: &Derived, k: usize) -> Option<String> {
    let answer = derived.symmetries[k].as_ref().ok()?;
    if answer.symmetry.status != Status::Broken || checked.symmetries[k].expected_broken {
        return None;
    }
    let blamed = blamed(&answer.symmetry.variations, &answer.culprits);
    told(maker, checked, derived, |cx| {
        let mut out = Vec::new();
        for q in &checked.model().coordinates {
            let forms = residual(cx, &blamed, q).ok()?;
            for parts in questions(cx, q, &forms).ok()? {
                out.push(cx.build(&parts).ok()?);
            }
        }
        Some(out)
    })
}

/// The same for a coordinate that is claimed cyclic and is not.
pub(crate) fn of_cyclic(maker: &mut Maker<'_>, checked: &Checked, derived: &Derived, i: usize) -> Option<String> {
    let answers = derived.answers.as_ref().ok()?;
    if !answers.cyclic[i].cyclic.is_refuted() || !checked.coordinates[i].cyclic {
        return None;
    }
    let model = checked.model();
    told(maker, checked, derived, |cx| {
        let forms = force(cx, &signed_parts(model).concat(), &model.coordinates[i]).ok()?;
        let mut out = Vec::new();
        for parts in questions(cx, &model.coordinates[i], &forms).ok()? {
            out.push(cx.build(&parts).ok()?);
        }
        Some(out)
    })
}

/// The same for a claimed constant that is none, where the accelerations are known in closed form.
pub(crate) fn of_conserved(maker: &mut Maker<'_>, checked: &Checked, derived: &Derived, k: usize) -> Option<String> {
    let model = checked.model();
    let rows = derived.answers.as_ref().ok()?.rows.as_ref()?;
    let wrong = derived.conserved[k].as_ref().is_ok_and(|c| c.verdict.is_ok_and(|v| v.is_refuted()));
    if !wrong || !model.constraints.is_empty() || rows.len() > MAX_DENSE {
        return None;
    }
    let claim: Parts = vec![(checked.conserved()[k].expr, Rational::ONE)];
    told(maker, checked, derived, |cx| Some(vec![rate_on_motions(cx, model, rows, &claim).ok()??]))
}

/// The variations of the parts to blame.
fn blamed(variations: &[Parts], culprits: &[Culprit]) -> Parts {
    let mut out = Parts::new();
    for c in culprits {
        let of = &variations[c.term];
        match c.parts.is_empty() {
            true => out.extend(of.iter().cloned()),
            false => out.extend(c.parts.iter().filter_map(|&p| of.get(p).cloned())),
        }
    }
    out
}

/// The atoms of the parts that depend on velocities.
fn inertia(arena: &Arena, checked: &Checked) -> Vec<Expr> {
    let parts = checked.model().terms.iter().flat_map(|t| &t.parts);
    parts.filter(|p| depends_on_velocities(arena, **p)).flat_map(|p| arena.atoms(*p)).collect()
}

fn told(
    maker: &mut Maker<'_>,
    checked: &Checked,
    derived: &Derived,
    ask: impl FnOnce(&mut Context<'_>) -> Option<Vec<Expr>>,
) -> Option<String> {
    let rows = derived.answers.as_ref().ok()?.rows.as_ref();
    let mut budget = maker.budget.part(NODES);
    let mut cx = maker.cx();
    cx.budget = &mut budget;
    let mut expressions = ask(&mut cx)?;
    expressions.retain(|&e| e != Arena::ZERO);
    let quantity = |arena: &Arena, e: Expr| {
        let Node::Symbol(s) = arena.node(e) else { return None };
        let name = arena.name(*s);
        let family = name.split('[').next().unwrap_or_default().to_owned();
        checked.symbol(&name).or_else(|| checked.symbol(&family)).map(|row| row.quantity.clone())
    };
    // Where no determinant is looked at, what stands before velocities stays as it is.
    let judged = rows.is_some_and(|r| r.len() <= MAX_DENSE);
    let inertia = if judged { Vec::new() } else { inertia(cx.arena, checked) };
    let mut found = near(&mut cx, rows, &expressions, &|arena, a, b| quantity(arena, a) == quantity(arena, b)).ok()?;
    found.retain(|n| !n.changes(&inertia));
    let said: Vec<String> = found.iter().map(|n| conditions(maker, n)).collect();
    (!said.is_empty()).then(|| format!("holds if {}", said.join(", or if ")))
}

/// `k₁ = k₂ and B = 0`.
fn conditions(maker: &mut Maker<'_>, near: &Near) -> String {
    let said: Vec<String> = near
        .conditions
        .iter()
        .map(|c| {
            let (Condition::Zero(a) | Condition::Equal(a, _) | Condition::Solved(a, _)) = *c;
            let name = maker.prints.text(maker.arena, a);
            match *c {
                Condition::Zero(_) => format!("{name} = 0"),
                Condition::Equal(_, b) | Condition::Solved(_, b) => {
                    format!("{name} = {}", crate::verdicts::one_line(&maker.prints.text(maker.arena, b)))
                }
            }
        })
        .collect();
    said.join(" and ")
}

/// Says it in a finding about the claim that stands at `claim`, and offers a comment line before it.
pub(crate) fn tell(checked: &Checked, said: Option<String>, claim: &Range<usize>, finding: &mut Finding) {
    let Some(said) = said.filter(|_| checked.complete) else { return };
    let text = &*checked.text;
    let help = finding.help.take().map_or(String::new(), |h| format!("; {h}"));
    finding.help = Some(format!("the claim {said}{help}"));
    let start = text[..claim.start].rfind(['\n', '\r']).map_or(0, |k| k + 1);
    // A comment in the first column does not part an item from what follows it.
    let edits = vec![(start..start, format!("# {said}{}", line_end(text)))];
    finding.fixes.push(Fix { title: format!("write a comment: {said}"), edits });
}

/// Says it in the finding about a broken symmetry claim.
pub(crate) fn symmetry(maker: &mut Maker<'_>, checked: &Checked, derived: &Derived, k: usize, out: &mut [Finding]) {
    if let Some(f) = out.iter_mut().find(|f| f.code == "symmetry-broken") {
        let said = of_symmetry(maker, checked, derived, k);
        tell(checked, said, &checked.symmetries[k].range, f);
    }
}

/// Says it in the finding on a claimed constant.
pub(crate) fn conserved(maker: &mut Maker<'_>, checked: &Checked, derived: &Derived, k: usize, f: &mut Finding) {
    let said = of_conserved(maker, checked, derived, k);
    tell(checked, said, &checked.conserved()[k].range, f);
}

/// Says it in the findings about coordinates that are claimed cyclic and are not.
pub(crate) fn cyclic(maker: &mut Maker<'_>, checked: &Checked, derived: &Derived, out: &mut [Finding]) {
    for (i, range) in checked.cyclic_claims() {
        let own = |f: &&mut Finding| f.code == "not-cyclic" && f.related.iter().any(|r| r.range == range);
        if let Some(f) = out.iter_mut().find(own) {
            let said = of_cyclic(maker, checked, derived, i);
            tell(checked, said, &range, f);
        }
    }
}

#[cfg(test)]
mod tests {
    use crate::Session;
    use crate::features::rename::edited;
    use crate::include::NoFiles;

    /// The help of the only finding with a fix that writes a comment, and the line that it writes.
    fn check(text: &str, help: &str, comment: &str) {
        let mut session = Session::new();
        let checked = session.check("model.least", text, &NoFiles);
        let derived = session.derive(&checked);
        let findings = session.findings(&checked, &derived);
        let told = findings.iter().find_map(|f| {
            let fix = f.fixes.iter().find(|x| x.title.starts_with("write a comment"))?;
            Some((f.help.clone().unwrap_or_default(), edited(text, &fix.edits)))
        });
        let Some((said, after)) = told else { panic!("nothing is told: {findings:?}") };
        assert!(said.starts_with(help), "{said}");
        let added: Vec<&str> = after.lines().filter(|l| !text.lines().any(|t| t == *l)).collect();
        assert_eq!(added, [comment]);
        // The model is as it was.
        let later = session.check("model.least", &after, &NoFiles);
        assert_eq!(later.model(), checked.model());
    }

    #[test]
    fn an_angular_momentum_is_conserved_on_equal_springs() {
        check(
            "coordinate x, y\nparameter m, k₁, k₂\nkinetic 1/2 m (x'^2 + y'^2)\npotential 1/2 (k₁ x^2 + k₂ y^2)\nconserved spin = m (x y' - y x')\n",
            "the claim holds if k₁ = k₂",
            "# holds if k₁ = k₂",
        );
    }

    #[test]
    fn no_mass_of_a_large_system_is_put_to_zero() {
        for n in [30, 100] {
            check(
                &format!(
                    "index i: 1..{n}\ncoordinate x[i]\nparameter m, w\nkinetic sum(i: 1/2 m x[i]'^2)\npotential sum(i: 1/2 m w^2 x[i]^2)\nsymmetry slide: x[i] -> x[i] + ε\n"
                ),
                "the claim holds if w = 0;",
                "# holds if w = 0",
            );
        }
    }

    #[test]
    fn a_table_on_equal_springs_may_be_turned() {
        check(
            "coordinate x, y\nparameter m, k₁, k₂\nkinetic 1/2 m (x'^2 + y'^2)\npotential 1/2 (k₁ x^2 + k₂ y^2)\nsymmetry turn: (x, y) -> (x cos ε - y sin ε, x sin ε + y cos ε)\n",
            "the claim holds if k₁ = k₂",
            "# holds if k₁ = k₂",
        );
        // One spring at half its stiffness.
        check(
            "coordinate x, y\nparameter m, k₁, k₂\nkinetic 1/2 m (x'^2 + y'^2)\npotential 1/2 k₁ x^2 + k₂ y^2\nsymmetry turn: (x, y) -> (x cos ε - y sin ε, x sin ε + y cos ε)\n",
            "the claim holds if k₁ = 2 k₂",
            "# holds if k₁ = 2 k₂",
        );
    }

    #[test]
    fn without_a_field_the_angle_is_cyclic() {
        check(
            "cyclic coordinate φ\nparameter J, B\nkinetic 1/2 J φ'^2\npotential B cos φ\n",
            "the claim holds if B = 0",
            "# holds if B = 0",
        );
    }

    #[test]
    fn what_the_assumptions_exclude_is_not_told() {
        let text = "cyclic coordinate φ\nparameter J, B\nassume B > 0\nkinetic 1/2 J φ'^2\npotential B cos φ\n";
        let mut session = Session::new();
        let checked = session.check("model.least", text, &NoFiles);
        let derived = session.derive(&checked);
        let findings = session.findings(&checked, &derived);
        assert!(findings.iter().any(|f| f.code == "not-cyclic"));
        assert!(!findings.iter().any(|f| f.help.as_ref().is_some_and(|h| h.contains("holds if"))));
    }
}
