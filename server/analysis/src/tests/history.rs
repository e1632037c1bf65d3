//! Whatever was typed before: a session that has lived says what a new one says of the same text.

use crate::database::Session;
use crate::include::NoFiles;
use crate::report::{Finding, Sheet};
use std::sync::atomic::Ordering;

const MODELS: [&str; 3] = [
    "\
system swing
coordinate r: length
coordinate θ: angle
cyclic coordinate φ: angle
parameter m, k, l, g
assume m > 0, r > 0
let P = (r sin θ cos φ, r sin θ sin φ, -r cos θ)
kinetic   bob    = 1/2 m |P'|^2
potential weight = m g P[3]
potential spring = 1/2 k (r - l)^2
dissipation air  = 1/2 k r'^2
symmetry azimuth: φ -> φ + ε
symmetry delay: t -> t + ε
broken symmetry drop: r -> r + 2 ε
conserved spin = m r^2 sin² θ φ'
conserved total = energy
",
    "\
index i: 1..5
coordinate x[i]
parameter m[i], k, c
input u
kinetic   masses  = sum(i: 1/2 m[i] x[i]'^2)
potential springs = sum(i in 1..4: 1/2 k (x[i+1] - x[i])^2)
lagrangian push   = c t x[1]' + u x[5]
symmetry shift: x[i] -> x[i] + ε
symmetry boost: x[i] -> x[i] + 3 ε t
conserved p = sum(i: m[i] x[i]')
",
    "\
index i: 1..100
coordinate x[i]
coordinate 𝑦, θ̂
parameter m, k
kinetic   masses  = sum(i: 1/2 m x[i]'^2) + 1/2 m (𝑦'^2 + θ̂'^2)
potential springs = sum(i in 1..99: 1/2 k (x[i+1] - x[i])^2) + 1/4 k x[7]^4
potential rest    = k sqrt(𝑦^2 + θ̂^2)
symmetry shift: x[i] -> x[i] + ε
symmetry turn: (𝑦, θ̂) -> (𝑦 cos ε - θ̂ sin ε, 𝑦 sin ε + θ̂ cos ε)
conserved h = energy
",
];

fn all(session: &mut Session, text: &str) -> (Vec<Finding>, Sheet) {
    let checked = session.check("model.least", text, &NoFiles);
    let derived = session.derive(&checked);
    (session.findings(&checked, &derived), session.sheet(&checked, &derived))
}

/// The next number of a fixed sequence, below `n`.
fn draw(state: &mut u64, n: usize) -> usize {
    *state = state.wrapping_mul(6364136223846793005).wrapping_add(1442695040888963407);
    (*state >> 33) as usize % n
}

/// One thing that a hand does: take a line out, put one in twice, change a character, undo everything, change line ends.
fn edited(text: &str, original: &str, state: &mut u64) -> String {
    let mut lines: Vec<&str> = text.lines().collect();
    let at = draw(state, lines.len().max(1)).min(lines.len().saturating_sub(1));
    match draw(state, 8) {
        0 => drop(lines.remove(at)),
        1 => lines.insert(at, lines[draw(state, lines.len())]),
        2 => return original.to_string(),
        3 => return text.replace('\n', "\r\n"),
        4 => return text.replace("\r\n", "\n"),
        kind => {
            let new = [["2", "θ", "-"], ["'", " ", "m"], ["x", ")", "k"]][kind - 5][draw(state, 3)];
            let places: Vec<usize> = text.char_indices().map(|c| c.0).collect();
            let Some(&place) = places.get(draw(state, places.len().max(1))) else { return original.to_string() };
            let end = text[place..].chars().next().map_or(place, |c| place + c.len_utf8());
            return format!("{}{new}{}", &text[..place], &text[end..]);
        }
    }
    lines.join("\n") + "\n"
}

fn check(original: &str, seed: u64, steps: usize) {
    let mut session = Session::new();
    let (mut text, mut state) = (original.to_string(), seed);
    for step in 0..steps {
        let lived = all(&mut session, &text);
        let fresh = all(&mut Session::new(), &text);
        assert_eq!(lived.0, fresh.0, "findings after step {step} of\n{text}");
        assert_eq!(lived.1, fresh.1, "the sheet after step {step} of\n{text}");
        text = edited(&text, original, &mut state);
    }
}

#[test]
fn a_swing_edited_at_random() {
    check(MODELS[0], 1, 120);
}

#[test]
fn a_chain_edited_at_random() {
    check(MODELS[1], 2, 120);
}

#[test]
fn a_large_family_edited_at_random() {
    check(MODELS[2], 3, 120);
}

/// A generator's shift of the second coordinate is another one when the coordinates have changed places.
#[test]
fn coordinates_change_their_places() {
    let model = |first: &str, second: &str| {
        format!(
            "coordinate {first}\ncoordinate {second}\nparameter m, k, c\nkinetic T = 1/2 m (x'^2 + y'^2 + x' y')\n\
             potential U = 1/2 k x^2\ndissipation D = 1/2 c y'^2\nsymmetry a: y -> y + ε\nsymmetry b: x -> x + ε\n\
             symmetry d: t -> t + ε\nconserved p = momentum(y)\n"
        )
    };
    let mut session = Session::new();
    for (first, second) in [("x", "y"), ("y", "x"), ("x", "y"), ("x, y", "z"), ("z", "y, x")] {
        let text = model(first, second);
        assert!(all(&mut session, &text) == all(&mut Session::new(), &text), "{text}");
    }
}

/// Derivations that were cut short leave nothing wrong behind.
#[test]
fn a_derivation_cut_short_is_made_good() {
    for model in MODELS {
        let fresh = all(&mut Session::new(), model);
        let mut session = Session::new();
        let mut nodes = 1;
        while nodes < 2_000_000 {
            let checked = session.check("model.least", model, &NoFiles);
            session.derive_within(&checked, nodes);
            session.interrupt.store(true, Ordering::Relaxed);
            let derived = session.derive(&checked);
            session.findings(&checked, &derived);
            session.sheet(&checked, &derived);
            session.interrupt.store(false, Ordering::Relaxed);
            assert!(all(&mut session, model) == fresh, "after {nodes} nodes of\n{model}");
            nodes = nodes * 3 / 2 + 7;
            // A new text, lest all is known already.
            let other = model.replace("1/2", &format!("{}/2", nodes % 1000 + 2));
            let checked = session.check("model.least", &other, &NoFiles);
            session.derive_within(&checked, nodes / 2);
            assert!(all(&mut session, &other) == all(&mut Session::new(), &other), "after {nodes} nodes of\n{other}");
        }
    }
}
