//! Lies planted into claimed constants of all models: a wrong sign, a wrong factor, a missing term. Every one is refuted,
//! and the mend that is offered makes nearly all of them true again.

use crate::amends::{follower, multiplied, operands, turned, without};
use crate::checked::Checked;
use crate::database::Session;
use crate::features::rename::edited;
use crate::models::{Disk, models};
use leastwise_algebra::{Rational, Verdict};
use std::ops::Range;
use std::path::{Path, PathBuf};

/// The verdict on the claim with this name, in a text.
fn verdict(session: &mut Session, path: &str, text: &str, name: &str) -> Option<Verdict> {
    let checked = session.check(path, text, &Disk);
    let derived = session.derive(&checked);
    let k = checked.conserved().iter().position(|c| c.name == name)?;
    derived.conserved[k].as_ref().ok()?.verdict.ok()
}

#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Lie {
    Sign,
    Factor,
    Missing,
}

type Edits = Vec<(Range<usize>, String)>;

/// All single lies about a claim.
fn lies(checked: &Checked, k: usize) -> Vec<(Lie, Edits)> {
    let list = operands(checked, &checked.conserved()[k]);
    let text = &*checked.text;
    let mut out = Vec::new();
    for (at, operand) in list.iter().enumerate() {
        out.push((Lie::Sign, turned(text, operand)));
        for by in [Rational::new(2, 1), Rational::new(1, 2), Rational::new(3, 1)].into_iter().flatten() {
            out.push((Lie::Factor, multiplied(text, operand, &by)));
        }
        out.extend(without(text, operand, follower(&list, at)).map(|e| (Lie::Missing, e)));
    }
    out
}

/// Planted, still true, refuted, undecided, mended; and what was not mended.
#[derive(Default, Debug)]
struct Score {
    planted: usize,
    true_still: usize,
    undecided: usize,
    refuted: usize,
    mended: usize,
    left: Vec<String>,
}

/// The model with the constants that are proved but not claimed, written out as claims.
fn with_charges(session: &mut Session, path: &str, text: &str) -> (String, Vec<String>) {
    let checked = session.check(path, text, &Disk);
    let derived = session.derive(&checked);
    let mut names: Vec<String> = checked.conserved().iter().map(|c| c.name.clone()).collect();
    let mut out = text.trim_end().to_owned();
    let mut charges = Vec::new();
    for a in derived.symmetries.iter().flatten() {
        if matches!(a.conserved, Ok(Verdict::Proved)) && !a.gauge_unknown {
            charges.push(a.charge);
        }
    }
    let mut printed = Vec::new();
    session.with_maker(&checked, |maker| printed.extend(charges.iter().map(|&c| maker.print(c).plain)));
    let sheet = session.sheet(&checked, &derived);
    let cyclic = sheet.coordinates.iter().filter(|c| c.momentum_conserved && c.members.is_none());
    printed.extend(cyclic.map(|c| c.momentum.plain.clone()));
    if sheet.energy.conserved == crate::report::Answer::Yes {
        printed.push(sheet.energy.formula.plain.clone());
    }
    printed.retain(|p| p != "0" && !p.contains('\n'));
    for (k, formula) in printed.iter().enumerate() {
        let name = format!("planted_{k}");
        out.push_str(&format!("\nconserved {name} = {formula}"));
        names.push(name);
    }
    out.push('\n');
    (out, names)
}

fn plant(session: &mut Session, path: &Path, scores: &mut [Score; 3]) {
    let place = path.to_string_lossy().into_owned();
    let Ok(text) = std::fs::read_to_string(path) else { return };
    let (text, names) = with_charges(session, &place, &text);
    for name in names {
        let checked = session.check(&place, &text, &Disk);
        let Some(k) = checked.conserved().iter().position(|c| c.name == name) else { continue };
        if verdict(session, &place, &text, &name) != Some(Verdict::Proved) {
            continue;
        }
        for (lie, edits) in lies(&checked, k) {
            let score = &mut scores[lie as usize];
            let wrong = edited(&text, &edits);
            score.planted += 1;
            let shown = |why: &str, text: &str| {
                let model = path.file_stem().unwrap_or_default().to_string_lossy();
                let line = text.lines().find(|l| l.contains(&format!("conserved {name} "))).unwrap_or_default();
                format!("{model}, {why}: {line}")
            };
            match verdict(session, &place, &wrong, &name) {
                Some(Verdict::Proved) => score.true_still += 1,
                Some(Verdict::Refuted(_)) => {
                    score.refuted += 1;
                    let checked = session.check(&place, &wrong, &Disk);
                    let derived = session.derive(&checked);
                    let k = checked.conserved().iter().position(|c| c.name == name).unwrap_or_default();
                    let fixes =
                        session.with_maker(&checked, |maker| crate::amends::fixes(maker, &checked, &derived, k));
                    let Some((_, fix)) = fixes.first() else {
                        score.left.push(shown("no mend", &wrong));
                        continue;
                    };
                    let right = edited(&wrong, &fix.edits);
                    match verdict(session, &place, &right, &name) {
                        Some(Verdict::Proved) => score.mended += 1,
                        other => score.left.push(shown(&format!("{} gives {other:?}", fix.title), &right)),
                    }
                }
                other => {
                    score.undecided += 1;
                    score.left.push(shown(&format!("{other:?}"), &wrong));
                }
            }
        }
    }
}

#[test]
fn every_lie_is_refuted_and_nearly_all_are_mended() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("../..");
    let mut folders: Vec<PathBuf> =
        ["grammar/examples", "grammar/tests/models", "tests/oracle/models"].into_iter().map(|f| root.join(f)).collect();
    folders.extend(std::env::var_os("LEASTWISE_SHARED").map(|s| Path::new(&s).join("cases")));
    let mut scores: [Score; 3] = Default::default();
    for path in folders.iter().flat_map(|f| models(f)) {
        // One session for each model: arenas are kept small.
        plant(&mut Session::new(), &path, &mut scores);
    }
    for (lie, s) in [Lie::Sign, Lie::Factor, Lie::Missing].iter().zip(&scores) {
        let said = format!(
            "{lie:?}: {} planted, {} still true, {} undecided, {} refuted, {} mended",
            s.planted, s.true_still, s.undecided, s.refuted, s.mended
        );
        #[allow(clippy::print_stdout)]
        {
            println!("{said}\n  {}", s.left.join("\n  "));
        }
        assert_eq!(s.undecided, 0, "{said}");
        assert!(s.planted > 20, "{said}");
    }
    for s in &scores[..2] {
        assert!(s.mended * 10 >= s.refuted * 9, "{} of {}", s.mended, s.refuted);
    }
}
