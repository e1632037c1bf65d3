//! Reports of searches whose finds are made by hand.

use super::*;
use crate::include::NoFiles;
use leastwise_algebra::{Arena, Rational};
use leastwise_mechanics::model::time;
use leastwise_mechanics::symmetry::{Generator, charge};

const PLANE: &str = "\
coordinate x, y: length
parameter m: mass
kinetic T = 1/2 m (x'^2 + y'^2)
";

/// What is found: names of generators, as `generator` knows them.
type Names<'n> = &'n [&'n str];

fn generator(cx: &mut Context<'_>, model: &Model, name: &str) -> (Generator, Option<Expr>) {
    let t = time(cx.arena);
    let t = cx.arena.sym(t);
    let q: Vec<Expr> = model.coordinates.iter().map(|q| q.jet(cx.arena, 0)).collect();
    let (mut tau, mut eta, mut gauge) = (Arena::ZERO, vec![Arena::ZERO; q.len()], None);
    let mass = |cx: &mut Context<'_>, e: Expr| {
        let m = cx.arena.symbol("m", None, leastwise_algebra::Role::Parameter);
        let m = cx.arena.sym(m);
        cx.arena.mul(m, e)
    };
    let twice = Rational::integer(2);
    match name {
        "shift" => eta[0] = Arena::ONE,
        "turn" => (eta[0], eta[1]) = (cx.arena.neg(q[1]), q[0]),
        "boost" => (eta[0], gauge) = (t, Some(mass(cx, q[0]))),
        "dilation" => (tau, eta) = (cx.arena.scale(t, &twice), q),
        "expansion" => {
            tau = cx.arena.pow(t, 2);
            let mut squares = Vec::new();
            for (slot, q) in eta.iter_mut().zip(q) {
                *slot = cx.arena.mul(t, q);
                squares.push((cx.arena.pow(q, 2), Rational::HALF));
            }
            let half = cx.arena.linear(&squares);
            gauge = Some(mass(cx, half));
        }
        "mixed" => (eta[0], eta[1]) = (cx.arena.mul(t, q[1]), cx.arena.add(q[0], q[1])),
        _ => tau = Arena::ONE,
    }
    (Generator { tau, eta }, gauge)
}

/// The charge that belongs to it; conserved or not.
fn item(cx: &mut Context<'_>, model: &Model, name: &str) -> Item {
    let (generator, gauge) = generator(cx, model, name);
    let whole = charge(cx, model, &generator).expect("a charge");
    let charge = gauge.map_or(whole, |f| cx.arena.sub(whole, f));
    Item { charge, origin: Origin::Symmetry { generator, gauge }, known: name == "delay" }
}

fn run(text: &str, mut finder: impl FnMut(&mut Context<'_>, &Model, &[Expr]) -> Vec<Item>) -> Option<SearchReport> {
    let mut stages = Vec::new();
    let mut finder = |cx: &mut Context<'_>, model: &Model, _: &Scope, known: &[Expr], tell: &mut dyn FnMut(Stage)| {
        tell(Stage::Symmetries);
        Ok(Found { items: finder(cx, model, known), incomplete: None })
    };
    let flag = Arc::new(AtomicBool::new(false));
    let report = search_with("swing.least", text, &NoFiles, 2, &flag, &mut |s| stages.push(s), &mut finder);
    assert_eq!(report.is_some(), stages == [Stage::Symmetries]);
    report
}

fn report(text: &str, names: Names<'_>) -> SearchReport {
    run(text, |cx, model, _| names.iter().map(|name| item(cx, model, name)).collect()).expect("a report")
}

/// Titles with the items that are offered.
#[track_caller]
fn check(text: &str, names: Names<'_>, expected: &[(&str, &str)]) {
    let report = report(text, names);
    let shown: Vec<(&str, &str)> =
        report.items.iter().map(|r| (r.title.as_str(), r.source.as_deref().unwrap_or("—"))).collect();
    assert_eq!(shown, expected);
}

#[test]
fn what_a_free_particle_has() {
    check(
        PLANE,
        &["delay", "shift", "turn", "boost", "dilation", "expansion"],
        &[
            ("energy", "symmetry delay: t -> t + ε"),
            ("canonical momentum p_x", "symmetry translation_x: x -> x + ε"),
            ("angular momentum about z", "symmetry rotation_xy: (x, y) -> (x cos ε - y sin ε, x sin ε + y cos ε)"),
            ("charge of boost_x", "symmetry boost_x: x -> x + ε t"),
            ("charge of dilation", "symmetry dilation: t -> t + 2 ε t, x -> x + ε x, y -> y + ε y"),
            ("charge of expansion", "symmetry expansion: t -> t + ε t², x -> x + ε t x, y -> y + ε t y"),
        ],
    );
}

#[test]
fn names_that_are_taken_are_left_alone() {
    let text = format!("{PLANE}parameter boost_x\nsymmetry rotation_xy: x -> x + ε\n");
    let report = report(&text, &["turn", "boost"]);
    let names: Vec<&str> = report.items.iter().map(|r| r.name.as_str()).collect();
    assert_eq!(names, ["rotation_xy_2", "boost_x_2"]);
}

#[test]
fn an_item_that_is_not_proved_is_not_offered() {
    // The mechanics would not find it: no symmetry.
    check(PLANE, &["mixed"], &[("charge of family_1", "—")]);
}

/// The title and the item of an integral, which the text claims, so that the search knows it.
#[track_caller]
fn check_hidden(rest: &str, claim: &str, title: &str, name: &str) {
    let text = format!("{PLANE}{rest}conserved claim = {claim}\n");
    let found = run(&text, |_, _, known| {
        let charge = *known.last().expect("a claim that holds");
        vec![Item { charge, origin: Origin::Quadratic, known: false }]
    });
    let found = found.expect("a report");
    let [row] = &found.items[..] else { panic!("{found:?}") };
    assert_eq!((row.title.as_str(), row.name.as_str()), (title, name));
    let source = row.source.as_deref().unwrap_or("—");
    assert!(source.starts_with(&format!("conserved {name} = ")), "{source}");
    assert!(!found.none_other());
}

#[test]
fn hidden_symmetries_by_their_names() {
    let spring = "parameter k: stiffness\npotential V = 1/2 k (x^2 + y^2)\n";
    check_hidden(spring, "m x' y' + k x y", "Fradkin tensor, component x y", "fradkin_xy");
    check_hidden(spring, "1/2 m y'^2 + 1/2 k y^2", "energy of y alone", "energy_y");
    check_hidden(spring, "m x' y' + k x y + m x'^2 + k x^2", "quadratic integral", "integral_1");
    let kepler = "parameter k\nassume k > 0, m > 0\npotential V = -k / sqrt(x^2 + y^2)\n";
    let title = "Laplace–Runge–Lenz vector, component along x";
    check_hidden(kepler, "m (x y'^2 - y x' y') - k x / sqrt(x^2 + y^2)", title, "runge_lenz_x");
    check_hidden(kepler, "k x / sqrt(x^2 + y^2) - m y' (x y' - y x')", title, "runge_lenz_x");
    // Of a free particle the same form is no such vector.
    check_hidden("", "m x y'^2 - m y x' y'", "quadratic integral", "integral_1");
    check_hidden("", "m x' y'", "quadratic integral", "integral_1");
}

/// Where items go, marked by `$0`.
#[track_caller]
fn check_place(text: &str, expected: &str) {
    let mut session = Session::new();
    let checked = session.check("swing.least", text, &NoFiles);
    let (at, new) = insertion(&checked, &["symmetry a: x -> x + ε"]);
    assert_eq!(format!("{}{new}{}", &text[..at], &text[at..]), expected);
}

#[test]
fn items_go_below_the_last_claim_or_the_last_item() {
    check_place(
        "coordinate x\nkinetic T = x'^2\nsymmetry s: t -> t + ε   # always\n# a run\nrun r: over 1 s\n",
        "coordinate x\nkinetic T = x'^2\nsymmetry s: t -> t + ε   # always\nsymmetry a: x -> x + ε\n# a run\nrun r: over 1 s\n",
    );
    check_place("coordinate x\r\nkinetic T = x'^2", "coordinate x\r\nkinetic T = x'^2\r\n\r\nsymmetry a: x -> x + ε");
    check_place(
        "coordinate x\nkinetic T = x'^2  # end\n\n",
        "coordinate x\nkinetic T = x'^2  # end\n\nsymmetry a: x -> x + ε\n\n",
    );
}

#[test]
fn a_model_with_errors_is_not_searched() {
    assert_eq!(run("coordinate x\nkinetic T = x'^2 + b\n", |_, _, _| Vec::new()), None);
}

#[test]
fn a_raised_flag_ends_the_search() {
    let flag = Arc::new(AtomicBool::new(false));
    let mut finder = |_: &mut Context<'_>, _: &Model, _: &Scope, _: &[Expr], _: &mut dyn FnMut(Stage)| {
        flag.store(true, Ordering::Relaxed);
        Ok(Found::default())
    };
    assert_eq!(search_with("swing.least", PLANE, &NoFiles, 2, &flag, &mut |_| (), &mut finder), None);
}

#[test]
fn an_empty_search_says_that_there_is_none_other() {
    let nothing = report(PLANE, &[]);
    assert!(nothing.none_other() && nothing.ansatz().contains("degree 2"), "{nothing:?}");
    assert!(report(PLANE, &["delay"]).none_other(), "the energy is known");
}

/// All that is found, as `name: title`; each is written into the text and proved there.
#[track_caller]
fn check_search(text: &str, expected: &[&str]) {
    let flag = Arc::new(AtomicBool::new(false));
    let report = search("swing.least", text, &NoFiles, DEGREE, &flag, &mut |_| ()).expect("a report");
    assert_eq!(report.incomplete, None);
    let shown: Vec<String> = report.news().map(|r| format!("{}: {}", r.name, r.title)).collect();
    assert_eq!(shown, expected);
    let offers = report.offers();
    assert_eq!(offers.len(), expected.len(), "{report:?}");
    let sources: Vec<&str> = offers.iter().filter_map(|r| r.source.as_deref()).collect();
    let mut session = Session::new();
    let (at, new) = insertion(&session.check("swing.least", text, &NoFiles), &sources);
    let checked = session.check("swing.least", &format!("{}{new}{}", &text[..at], &text[at..]), &NoFiles);
    let derived = session.derive(&checked);
    assert_eq!(session.findings(&checked, &derived), []);
    assert!(derived.symmetries.iter().all(|s| matches!(s, Ok(a) if matches!(a.conserved, Ok(Verdict::Proved)))));
    assert!(derived.conserved.iter().all(|c| matches!(c, Ok(a) if matches!(a.verdict, Ok(Verdict::Proved)))));
    assert_eq!(derived.symmetries.len() + derived.conserved.len(), expected.len());
    // What is written is not found again.
    let again = search("swing.least", &checked.text, &NoFiles, DEGREE, &flag, &mut |_| ()).expect("a report");
    assert!(again.none_other(), "{again:?}");
}

#[test]
fn a_free_particle_in_the_plane() {
    check_search(
        PLANE,
        &[
            "rotation_xy: angular momentum about z",
            "boost_x: charge of boost_x",
            "boost_y: charge of boost_y",
            "dilation: charge of dilation",
            "expansion: charge of expansion",
        ],
    );
}

#[test]
fn two_equal_springs() {
    check_search(
        &format!("{PLANE}parameter k: stiffness\nassume m > 0\npotential V = 1/2 k (x^2 + y^2)\n"),
        &[
            "rotation_xy: angular momentum about z",
            "energy_x: energy of x alone",
            "fradkin_xy: Fradkin tensor, component x y",
        ],
    );
}

#[test]
fn a_planet_in_space() {
    check_search(
        "coordinate x, y, z: length\nparameter m: mass, k: N m^2\nassume m > 0, k > 0\n\
         kinetic T = 1/2 m (x'^2 + y'^2 + z'^2)\npotential V = -k / sqrt(x^2 + y^2 + z^2)\n",
        &[
            "rotation_xy: angular momentum about z",
            "rotation_xz: angular momentum about y",
            "rotation_yz: angular momentum about x",
            "runge_lenz_x: Laplace–Runge–Lenz vector, component along x",
            "runge_lenz_y: Laplace–Runge–Lenz vector, component along y",
            "runge_lenz_z: Laplace–Runge–Lenz vector, component along z",
        ],
    );
}

/// In the symmetric gauge the shifts are symmetries up to gauge terms [LL2 §21].
#[test]
fn a_charge_in_a_uniform_field() {
    check_search(
        &format!("{PLANE}parameter q: charge, B: T\nassume m > 0, B > 0\nlagrangian A = 1/2 q B (x y' - y x')\n"),
        &[
            "translation_x: charge of translation_x",
            "translation_y: charge of translation_y",
            "rotation_xy: canonical angular momentum",
        ],
    );
}

#[test]
fn nothing_but_the_energy() {
    check_search(
        "coordinate x, y\nkinetic T = 1/2 (x'^2 + y'^2)\npotential V = 1/2 (x^2 + y^2) + x^2 y - 1/3 y^3\n",
        &[],
    );
}
