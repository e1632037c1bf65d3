use super::*;
use crate::features::models::{broken, with_models};

const MODEL: &str = "\
system swing
coordinate θ: angle
coordinate x₁: length           # along the rail
parameter m: mass = 2 kg        # bob
parameter l = 1 m
index i: 1..3
coordinate y[i]: length
let P = (l sin θ, -l cos θ)
function U(r): energy
input u: force
kinetic bob = 1/2 m l^2 θ'^2
";

/// The first labels at `$0`.
#[track_caller]
fn check(fixture: &str, expected: &[&str]) {
    let labels = labels(fixture);
    assert_eq!(&labels[..expected.len().min(labels.len())], expected, "{labels:?}");
}

fn labels(fixture: &str) -> Vec<String> {
    complete_at(fixture).list.into_iter().map(|c| c.label).collect()
}

fn complete_at(fixture: &str) -> Completions {
    let offset = fixture.find("$0").expect("a cursor");
    complete(&fixture.replace("$0", ""), offset, &[])
}

fn with(line: &str) -> String {
    format!("{MODEL}{line}")
}

#[test]
fn items_begin_with_keywords() {
    check("$0", &["system", "coordinate", "cyclic coordinate", "parameter"]);
    check(&with("po$0"), &["coordinate", "cyclic coordinate", "parameter"]);
    assert!(!labels(&with("$0")).contains(&"system".to_string()), "it stands once");
    check(&with("cyclic $0"), &["coordinate"]);
    check(&with("broken sy$0"), &["symmetry"]);
}

#[test]
fn potentials_are_made_of_coordinates() {
    check(&with("potential V = $0"), &["θ", "θ'", "θ̇", "x₁", "x₁'", "ẋ₁", "y", "m", "l", "P", "U", "u"]);
    check(&with("kinetic T = 1/2 $0"), &["m", "l", "θ", "θ'"]);
    check(&with("potential V = 1/2 m$0 x₁^2"), &["θ"]);
}

#[test]
fn details_and_descriptions() {
    let list = complete_at(&with("potential V = $0")).list;
    let of = |label: &str| list.iter().find(|c| c.label == label).expect("a completion");
    assert_eq!((of("m").detail.as_str(), of("m").documentation.as_deref()), ("mass = 2 kg", Some("bob")));
    assert_eq!(of("P").detail, "= (l sin θ, -l cos θ)");
    assert_eq!(of("U").detail, "(r) energy");
    assert_eq!(of("x₁").documentation.as_deref(), Some("along the rail"));
}

#[test]
fn bound_names_come_first() {
    check(&with("let f(a, b) = a + $0"), &["a", "b", "θ"]);
    check(&with("kinetic T = sum(j in 1..3: $0"), &["j", "m"]);
    check(&with("symmetry s: θ -> $0"), &["ε", "θ"]);
    check(&with("symmetry s: $0"), &["θ", "x₁", "y", "t"]);
    check(&with("kinetic T = y[$0]"), &["i"]);
    check(&with("kinetic T = sum($0"), &["i"]);
    check(&with("kinetic T = sum(j $0"), &["in"]);
}

#[test]
fn claims_and_runs() {
    assert!(labels(&with("conserved h = $0")).contains(&"energy".into()));
    assert!(!labels(&with("potential h = $0")).contains(&"energy".into()));
    check(&with("force push $0"), &["on"]);
    check(&with("run a: $0"), &["from", "over", "until", "with"]);
    check(&with("run a: from $0"), &["θ", "θ'", "θ̇", "x₁"]);
    check(&with("run a: from θ = 4 $0"), &["m"]);
    check(&with("run a: over 2 s, with $0"), &["U", "u"]);
}

#[test]
fn quantities_and_units() {
    check(&with("parameter k: $0"), &["length", "angle", "mass"]);
    check(&with("parameter M: mass = 3 $0"), &["kg", "t"]);
    check(&with("coordinate z: le$0"), &["length"]);
    assert_eq!(labels(&with("parameter M: mass = $0")), [""; 0]);
    assert_eq!(labels(&with("parameter M: mass = 3$0")), [""; 0]);
}

#[test]
fn a_new_name_is_one_that_is_missing() {
    check(&with("potential V = k x₁^2 + c\nparameter $0"), &["k", "c"]);
    assert_eq!(labels(&with("coordinate $0")), [""; 0]);
}

#[test]
fn letters_by_their_names() {
    let found = complete_at(&with("coordinate \\thet$0"));
    let theta = found.list.iter().find(|c| c.filter == "\\theta").expect("theta");
    assert_eq!((theta.insert.as_str(), found.range.len()), ("θ", 5));
    check(&with("potential V = thet$0"), &["θ", "θ'"]);
    assert_eq!(complete_at(&with("potential V = thet$0")).list[0].filter, "theta");
}

#[test]
fn nothing_in_comments_and_texts() {
    assert_eq!(labels(&with("potential V = m # $0")), [""; 0]);
    assert_eq!(labels("include \"si$0"), [""; 0]);
}

#[test]
fn a_definition_over_several_lines() {
    check(&with("potential V = m\n    + $0"), &["θ"]);
}

#[test]
fn the_word_under_the_cursor_is_replaced() {
    let range = |fixture: &str| {
        let text = fixture.replace("$0", "");
        text[complete_at(fixture).range].to_string()
    };
    assert_eq!(range(&with("potential V = m$0ass")), "mass");
    assert_eq!(range(&with("potential V = 2x$0")), "x");
    assert_eq!(range(&with("potential V = $0")), "");
    assert_eq!(range(&with("potential V = θ̇$0")), "θ̇");
}

#[test]
fn every_place_of_every_text_has_an_answer() {
    with_models(|text| {
        for text in broken(text).iter().take(8) {
            for (offset, _) in text.char_indices().step_by(3) {
                let found = complete(text, offset, &[]);
                assert!(found.range.start <= offset && offset <= found.range.end.max(offset), "{offset}");
                let word = &text[found.range.clone()];
                assert!(!word.contains(['\n', '\r', ' ']), "{word:?}");
                assert!(found.list.len() <= MOST);
            }
        }
    });
}
