//! Mends of findings, as an editor offers them.

use crate::checked::Contents;
use crate::report::{Finding, Fix};
use leastwise_grammar::tree::Severity;
use std::ops::Range;

/// A mend that can be applied.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Action {
    /// What it does, in the imperative.
    pub title: String,
    /// Byte ranges in the file and their new texts, in order, not overlapping.
    pub edits: Vec<(Range<usize>, String)>,
    /// The finding that it mends: its number in the list.
    pub mends: usize,
    /// Whether it is the one to be taken without a choice.
    pub preferred: bool,
}

/// Mends of these drop what the writer has said or claimed: they are offered, and never taken without a choice.
const CHOICES: &[&str] = &[
    "declared-twice",
    "idle-term",
    "include-circle",
    "missing-operand",
    "named-twice",
    "no-keyword",
    "not-cyclic",
    "not-periodic",
    "prime-of-constant",
    "symmetry-broken",
    "unbalanced-bracket",
    "unknown-character",
    "unit-in-formula",
    "value-form",
];

/// The mends of findings that touch a range, in the order of the findings; where the same can be done for others of the
/// file, that comes last.
pub fn actions(checked: &Contents, findings: &[Finding], range: Range<usize>) -> Vec<Action> {
    let end = range.end.min(checked.text.len());
    let mut out = Vec::new();
    let mut codes: Vec<(&str, usize)> = Vec::new();
    for (mends, f) in findings.iter().enumerate() {
        if f.range.start > end || range.start > f.range.end {
            continue;
        }
        for fix in f.fixes.iter().filter(|fix| !fix.edits.is_empty()) {
            let preferred = preferred(f).is_some_and(|best| std::ptr::eq(best, fix));
            out.push(Action { title: capitalised(&fix.title), edits: in_order(&fix.edits), mends, preferred });
        }
        if !codes.iter().any(|(code, _)| *code == f.code) {
            codes.push((f.code, mends));
        }
    }
    for (code, mends) in codes {
        let (count, edits) = all(findings, code);
        if count > 1 {
            out.push(Action { title: format!("Mend {count} of `{code}` at once"), edits, mends, preferred: false });
        }
    }
    out
}

/// The one mend that is clearly the best.
fn preferred(f: &Finding) -> Option<&Fix> {
    // A hint tells how something was read: both readings are right for somebody.
    if f.severity > Severity::Warning || CHOICES.contains(&f.code) {
        return None;
    }
    match f.fixes.as_slice() {
        [one] => Some(one),
        // What was probably meant comes before a declaration.
        [best, ..] if matches!(f.code, "undeclared-name" | "undeclared-index" | "called-name") => Some(best),
        _ => None,
    }
}

/// How many findings of a code have a best mend, and the edits of all of those that don't overlap.
fn all(findings: &[Finding], code: &str) -> (usize, Vec<(Range<usize>, String)>) {
    let mut edits: Vec<(Range<usize>, String)> = Vec::new();
    let mut count = 0;
    for fix in findings.iter().filter(|f| f.code == code).filter_map(preferred) {
        let apart = |a: &Range<usize>, b: &Range<usize>| a.end <= b.start || b.end <= a.start;
        if fix.edits.iter().all(|(range, _)| edits.iter().all(|(other, _)| apart(range, other))) {
            edits.extend(fix.edits.iter().cloned());
            count += 1;
        }
    }
    (count, in_order(&edits))
}

fn in_order(edits: &[(Range<usize>, String)]) -> Vec<(Range<usize>, String)> {
    let mut edits = edits.to_vec();
    edits.sort_by_key(|(range, _)| (range.start, range.end));
    edits
}

fn capitalised(title: &str) -> String {
    let mut letters = title.chars();
    letters.next().map_or(String::new(), |c| c.to_uppercase().chain(letters).collect())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::features::rename::edited;

    fn found(text: &str) -> (crate::Checked, Vec<Finding>) {
        let mut session = crate::Session::new();
        let checked = session.check("swing.least", text, &crate::include::NoFiles);
        let derived = session.derive(&checked);
        let findings = session.findings(&checked, &derived);
        (checked, findings)
    }

    /// Applies the mend with this title at the finding on the cursor; the finding goes, and no error comes.
    #[track_caller]
    fn check(fixture: &str, title: &str, expected: &str) {
        let offset = fixture.find("$0").expect("a cursor");
        let text = fixture.replace("$0", "");
        let (checked, findings) = found(&text);
        let list = actions(&checked, &findings, offset..offset);
        let titles: Vec<&str> = list.iter().map(|a| a.title.as_str()).collect();
        let action = list.iter().find(|a| a.title == title).unwrap_or_else(|| panic!("no `{title}` in {titles:?}"));
        let after = edited(&text, &action.edits);
        assert_eq!(after, expected);
        let code = findings[action.mends].code;
        let count = |list: &[Finding], code: &str| list.iter().filter(|f| f.code == code).count();
        let (_, later) = found(&after);
        assert!(count(&later, code) < count(&findings, code), "{code} is still there: {later:?}");
        let errors = |list: &[Finding]| list.iter().filter(|f| f.severity == Severity::Error).count();
        assert!(errors(&later) <= errors(&findings), "{later:?}");
    }

    /// The titles at the cursor, the preferred ones with a star.
    #[track_caller]
    fn titles(fixture: &str, expected: &[&str]) {
        let offset = fixture.find("$0").expect("a cursor");
        let (checked, findings) = found(&fixture.replace("$0", ""));
        let list = actions(&checked, &findings, offset..offset);
        let shown: Vec<String> =
            list.iter().map(|a| format!("{}{}", a.title, if a.preferred { " *" } else { "" })).collect();
        assert_eq!(shown, expected);
    }

    #[test]
    fn a_declaration_goes_beside_others_of_its_kind() {
        let declare = "Declare `parameter m`";
        check(
            "coordinate x\n# the bob\nkinetic 1/2 $0m x'^2\n",
            declare,
            "coordinate x\nparameter m\n# the bob\nkinetic 1/2 m x'^2\n",
        );
        check(
            "coordinate x\r\nkinetic 1/2 $0m x'^2\r\n",
            declare,
            "coordinate x\r\nparameter m\r\nkinetic 1/2 m x'^2\r\n",
        );
        check(
            "parameter k = 1,  # stiff\n    l = 2  # long\n\ncoordinate x\nkinetic 1/2 $0m x'^2 k l",
            declare,
            "parameter k = 1,  # stiff\n    l = 2  # long\nparameter m\n\ncoordinate x\nkinetic 1/2 m x'^2 k l",
        );
        check(
            "coordinate x\nkinetic x'^2 + V$0(x)\n",
            "Declare `function V(x)`",
            "coordinate x\nfunction V(x)\nkinetic x'^2 + V(x)\n",
        );
        check("kinetic x$0'^2\n", "Declare `coordinate x`", "coordinate x\nkinetic x'^2\n");
    }

    #[test]
    fn what_nothing_uses_goes_and_nothing_else() {
        let rest = "coordinate x\nkinetic x'^2\n";
        let k = "potential k x\n";
        let m = "Remove `m`";
        check(&format!("parameter $0m = 1 kg  # no use\n{rest}"), m, rest);
        check(&format!("parameter $0m, k\n{rest}{k}"), m, &format!("parameter k\n{rest}{k}"));
        check(&format!("parameter k = 1, $0m = 2 kg\n{rest}{k}"), m, &format!("parameter k = 1\n{rest}{k}"));
        check(
            &format!("parameter k, $0m: mass = 2 kg  # both\n{rest}{k}"),
            m,
            &format!("parameter k: mass = 2 kg  # both\n{rest}{k}"),
        );
        check(
            &format!(
                "parameter k: mass = 1 kg,\n    $0m: mass = 2 kg,  # no use\n    n: mass = 3 kg\n{rest}{k}potential n"
            ),
            m,
            &format!("parameter k: mass = 1 kg,\n    n: mass = 3 kg\n{rest}{k}potential n"),
        );
        check(
            &format!(
                "parameter k: mass = 1 kg,  # of use\r\n    $0m[i] = 2 kg  # no use\r\nindex i: 1..2\r\ncoordinate y[i]\r\n{rest}{k}"
            ),
            m,
            &format!("parameter k: mass = 1 kg  # of use\r\nindex i: 1..2\r\ncoordinate y[i]\r\n{rest}{k}"),
        );
        check(
            &format!("input u, $0m: force\n{rest}force on x = u\n"),
            m,
            &format!("input u: force\n{rest}force on x = u\n"),
        );
        check(&format!("{rest}let $0m = 3 +\n    4  # seven"), m, rest.trim_end());
    }

    #[test]
    fn a_claim_of_several_coordinates() {
        check(
            "cyclic coordinate x, y: length  # on the ice\nkinetic x'^2 + y'^2\npotential $0x\n",
            "Take `cyclic` away: the claim is dropped",
            "cyclic coordinate y: length  # on the ice\ncoordinate x: length\nkinetic x'^2 + y'^2\npotential x\n",
        );
    }

    #[test]
    fn the_best_mend_is_preferred() {
        titles("coordinate x\nkinetic $0m x'^2\n", &["Declare `parameter m` *"]);
        titles(
            "coordinate x\nparameter mass1\nkinetic $0mas1 x'^2 mass1\n",
            &["Write mass1 *", "Declare `parameter mas1`"],
        );
        titles("coordinate x\nparameter a, b\nkinetic x'^2 + a/$0b x\n", &["Write (a/b) x", "Write a/(b x)"]);
        titles("coordinate x, y\nkinetic T = x'^2 + y'^2 + sin $02x\n", &["Write sin(2x)", "Write sin(2) x"]);
        titles(
            "coordinate x\nkinetic x'^2\npotential $0x^2\nsymmetry s: x -> x + ε\n",
            &["Declare `s` broken: it is known to give no constant of the motion"],
        );
        titles("coordinate x\nkinetic x'^2\nbroken $0symmetry s: x -> x + ε\n", &["Take `broken` away *"]);
    }

    #[test]
    fn all_of_a_kind_at_once() {
        check(
            "parameter $0m = 1\nparameter q  # two\ncoordinate x\nkinetic x'^2\n",
            "Mend 2 of `unused-name` at once",
            "coordinate x\nkinetic x'^2\n",
        );
        check(
            "coordinate x\nkinetic $0m x'^2 + k\n",
            "Mend 2 of `undeclared-name` at once",
            "coordinate x\nparameter m\nparameter k\nkinetic m x'^2 + k\n",
        );
    }

    #[test]
    fn nothing_to_mend_and_places_past_the_end() {
        titles("coordinate x\nkinetic x'^2\n$0", &[]);
        let (checked, findings) = found("coordinate x\nkinetic m x'^2");
        assert_eq!(actions(&checked, &findings, 0..usize::MAX).len(), 1);
        assert_eq!(actions(&checked, &findings, usize::MAX..usize::MAX).len(), 0);
    }
}
