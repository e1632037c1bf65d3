//! Findings from verdicts: broken claims, wrong constants, singular mass matrices. Each lies on the text that causes it.

mod claims;
mod coordinates;
mod system;

use crate::checked::Checked;
use crate::derive::Derived;
use crate::mends;
use crate::report::{Finding, Fix, Related};
use crate::sheet::Maker;
use claims::{no_generator, symmetry};
use coordinates::{cyclic, periodicity};
use leastwise_algebra::{Arena, Verdict};
use leastwise_grammar::tree::Severity;
use leastwise_mechanics::verdicts::Culprit;
use std::ops::Range;
use system::{explicit_time, mass};

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
            crate::near::cyclic(maker, checked, derived, &mut out);
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
    for (k, (claim, answer)) in checked.symmetries().iter().zip(&derived.symmetries).enumerate() {
        match answer {
            Ok(a) => {
                let first = out.len();
                symmetry(maker, checked, claim, a, &mut out);
                crate::near::symmetry(maker, checked, derived, k, &mut out[first..]);
            }
            Err(why) => no_generator(maker, checked, claim, why, &mut out),
        }
    }
    for (k, (claim, answer)) in checked.conserved().iter().zip(&derived.conserved).enumerate() {
        let name = &claim.name;
        match answer {
            Ok(c) => match &c.verdict {
                Ok(Verdict::Proved) => {}
                Ok(Verdict::Refuted(_)) => {
                    let rate = maker.prints.text(maker.arena, c.rate);
                    let mut f = finding(
                        "not-conserved",
                        Severity::Warning,
                        claim.range.clone(),
                        format!("`{name}` is not conserved: its rate {} does not vanish on motions", one_line(&rate)),
                    );
                    crate::amends::mend(maker, checked, derived, k, &mut f);
                    crate::near::conserved(maker, checked, derived, k, &mut f);
                    out.push(f);
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
pub(crate) fn one_line(text: &str) -> String {
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
