//! No text makes a hover panic, and a session that has lived says what a new one says.

use super::SITE;
use super::kinds::{DISC, ROD, ROW};
use crate::database::Session;
use crate::features::hover::Hover;
use crate::features::models::{broken, with_models};
use std::sync::atomic::Ordering;

/// The hovers at every `stride`-th letter.
fn all(session: &mut Session, text: &str, stride: usize) -> Vec<Option<Hover>> {
    let checked = session.check("folder/model.least", text, &SITE);
    let derived = session.derive(&checked);
    let hovered = |offset: usize| {
        let hover = session.hover(&checked, &derived, offset)?;
        assert!(text.get(hover.range.clone()).is_some(), "{hover:?} in\n{text}");
        let offset = text.floor_char_boundary(offset);
        assert!(hover.range.start <= offset && offset <= hover.range.end, "{hover:?} at {offset} of\n{text}");
        assert!(!hover.blocks.is_empty());
        Some(hover)
    };
    (0..text.len() + 2).step_by(stride).map(hovered).collect()
}

#[test]
fn every_place_of_every_example_may_be_asked_for() {
    let mut told = 0;
    with_models(|text| told += all(&mut Session::new(), text, 1).iter().flatten().count());
    assert!(told > 7_000, "{told}");
}

#[test]
fn texts_that_are_cut_off_may_be_asked_for() {
    with_all(|text| {
        let mut session = Session::new();
        for text in broken(text) {
            all(&mut session, &text, 5);
        }
    });
}

/// The example models, one with a large family and two with constraints.
fn with_all(mut f: impl FnMut(&str)) {
    [ROD, DISC, ROW].into_iter().for_each(&mut f);
    with_models(f);
}

/// The next number of a fixed sequence, below `n`.
fn draw(state: &mut u64, n: usize) -> usize {
    *state = state.wrapping_mul(6364136223846793005).wrapping_add(1442695040888963407);
    (*state >> 33) as usize % n.max(1)
}

/// One thing that a hand does: a line lost, doubled or moved, a letter changed, everything undone.
fn edited(text: &str, original: &str, state: &mut u64) -> String {
    let mut lines: Vec<&str> = text.lines().collect();
    let at = draw(state, lines.len());
    match draw(state, 7) {
        0 if lines.len() > 1 => drop(lines.remove(at)),
        1 if !lines.is_empty() => lines.insert(at, lines[draw(state, lines.len())]),
        2 if !lines.is_empty() => {
            let line = lines.remove(at);
            lines.insert(draw(state, lines.len() + 1), line);
        }
        3 => return original.to_string(),
        _ => {
            let new = ["2", "θ", "-", "'", " ", "m", "x", ")", "k", "θ̇", "𝑥"][draw(state, 11)];
            let places: Vec<usize> = text.char_indices().map(|c| c.0).collect();
            let Some(&place) = places.get(draw(state, places.len())) else { return original.to_string() };
            let end = text[place..].chars().next().map_or(place, |c| place + c.len_utf8());
            return format!("{}{new}{}", &text[..place], &text[end..]);
        }
    }
    lines.join("\n") + "\n"
}

#[test]
fn a_session_that_has_lived_says_what_a_new_one_says() {
    let mut state = 11;
    let mut session = Session::new();
    with_all(|original| {
        let mut text = original.to_string();
        for step in 0..12 {
            let lived = all(&mut session, &text, 17);
            let fresh = all(&mut Session::new(), &text, 17);
            for (lived, fresh) in lived.iter().zip(&fresh) {
                assert_eq!(lived, fresh, "after step {step} of\n{text}");
            }
            text = edited(&text, original, &mut state);
        }
    });
}

/// What was cut short says little, and leaves nothing wrong behind.
#[test]
fn a_hover_cut_short_is_made_good() {
    with_all(|text| {
        let fresh = all(&mut Session::new(), text, 7);
        let mut session = Session::new();
        let checked = session.check("folder/model.least", text, &SITE);
        for nodes in [0, 10, 300, 5_000] {
            let derived = session.derive_within(&checked, nodes);
            for offset in (0..text.len()).step_by(7) {
                session.hover(&checked, &derived, offset);
            }
        }
        session.interrupt.store(true, Ordering::Relaxed);
        all(&mut session, text, 7);
        session.interrupt.store(false, Ordering::Relaxed);
        assert!(all(&mut session, text, 7) == fresh, "{text}");
    });
}

/// The nodes that all hovers of a model make in one session.
fn nodes(text: &str) -> usize {
    let mut session = Session::new();
    let checked = session.check("folder/model.least", text, &SITE);
    let derived = session.derive(&checked);
    let before = session.arena.len();
    text.char_indices().for_each(|c| drop(session.hover(&checked, &derived, c.0)));
    session.arena.len() - before
}

#[test]
fn hovers_of_a_chain_print_what_they_show() {
    let made = nodes(
        "\
index i: 1..10
coordinate θ[i]: angle
parameter m[i], l[i], g
let P[i] = (sum(j in 1..i: l[j] sin θ[j]), -sum(j in 1..i: l[j] cos θ[j]))
kinetic   bobs   = sum(i: 1/2 m[i] |P[i]'|^2)
potential weight = sum(i: m[i] g P[i][2])
broken symmetry turn: θ[i] -> θ[i] + ε
conserved h = energy
",
    );
    assert!(made < 6_000, "{made}");
}

#[test]
fn hovers_of_a_long_row_cost_as_much_as_those_of_a_short_one() {
    let row = |n: usize| {
        format!(
            "\
index i: 1..{n}
coordinate x[i]
parameter m, k
kinetic   masses  = sum(i: 1/2 m x[i]'^2)
potential springs = sum(i in 1..{}: 1/2 k (x[i+1] - x[i])^2)
symmetry shift: x[i] -> x[i] + ε
conserved h = energy
",
            n - 1
        )
    };
    let (short, long) = (nodes(&row(100)), nodes(&row(10_000)));
    assert!(long <= short + short / 10 && long < 1_000, "{short} and {long}");
}
