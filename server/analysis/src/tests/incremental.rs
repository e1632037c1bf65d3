//! An edit reads and lowers what it changes and what depends on that, nothing else.

use crate::database::Session;
use crate::include::NoFiles;

const MODEL: &str = "\
coordinate x, y
parameter m: mass = 1 kg
let P = (x, y)
let v = |P'|
kinetic T = 1/2 m v^2
potential V = 1/2 m x^2
potential W = P[2]
conserved h = energy
";

/// The items parsed and lowered again after an edit.
fn check(from: &str, to: &str, expected: (usize, usize)) {
    let mut session = Session::new();
    session.check("a", MODEL, &NoFiles);
    let edited = MODEL.replacen(from, to, 1);
    assert_ne!(edited, MODEL);
    let checked = session.check("a", &edited, &NoFiles);
    assert_eq!(session.work, expected, "{from} -> {to}");
    let fresh = Session::new().check("a", &edited, &NoFiles);
    assert_eq!(checked.findings, fresh.findings);
}

#[test]
fn nothing_changes_where_an_item_only_moves() {
    check("kinetic", "\n# a comment\n\nkinetic", (0, 0));
}

#[test]
fn a_value_changes_no_formula() {
    check("1 kg", "2 kg", (1, 1));
}

#[test]
fn a_term_changes_itself_and_claims_about_the_motion() {
    check("1/2 m x^2", "1/3 m x^2", (1, 2));
}

#[test]
fn a_definition_changes_what_uses_it() {
    // P, v, T, W and the claim.
    check("(x, y)", "(x, 2 y)", (1, 5));
    check("|P'|", "2 |P'|", (1, 3));
}

#[test]
fn a_declaration_changes_what_names_it() {
    // The parameter itself, T, V and the claim.
    check("parameter m: mass = 1 kg", "input m", (1, 3));
}

#[test]
fn an_edit_gives_what_a_new_session_gives() {
    let mut session = Session::new();
    let steps = ["let P = (x, y)", "let P = (x, y", "let P = (x, z)", "let P = x", "let P = (y, x)"];
    for step in steps {
        let text = MODEL.replacen("let P = (x, y)", step, 1);
        let checked = session.check("a", &text, &NoFiles);
        let fresh = Session::new().check("a", &text, &NoFiles);
        assert_eq!(checked.findings, fresh.findings, "{step}");
        assert_eq!(checked.model().terms.len(), fresh.model().terms.len());
    }
}

#[test]
fn the_arena_does_not_grow_without_end() {
    let mut session = Session::new();
    let mut largest = 0;
    for k in 0..3000 {
        let text = MODEL.replacen("1/2 m x^2", &format!("m sum(i in 1..60: sin({k} x + i y)^2)"), 1);
        let checked = session.check("a", &text, &NoFiles);
        assert!(checked.complete);
        largest = largest.max(session.arena.len());
    }
    assert!(session.epoch > 0);
    assert!(largest < 400_000, "{largest}");
}

#[test]
fn derivations_do_not_pile_up_either() {
    let mut session = Session::new();
    let (mut largest, mut epochs) = (0, 0);
    for k in 0..400 {
        let text = MODEL.replacen("1/2 m x^2", &format!("m sum(i in 1..60: sin({k} x + i y)^2)"), 1);
        let checked = session.check("a", &text, &NoFiles);
        let derived = session.derive(&checked);
        assert!(derived.answers.is_ok());
        largest = largest.max(session.arena.len());
        epochs = session.epoch;
    }
    assert!(epochs > 0);
    assert!(largest < 600_000, "{largest}");
}

#[test]
fn a_second_declaration_reaches_what_uses_the_name() {
    let mut session = Session::new();
    let twice = "coordinate x\nparameter m\nkinetic T = 1/2 x'^2 + m'\nparameter m\n";
    for text in ["coordinate x\nparameter m\nkinetic T = 1/2 x'^2 + m'\n", twice] {
        let checked = session.check("a", text, &NoFiles);
        assert_eq!(checked.findings, Session::new().check("a", text, &NoFiles).findings);
    }
}
