//! Hints as they stand in the text.

use super::*;
use crate::include::Files;

/// The site that examples include.
struct Site;

impl Files for Site {
    fn read(&self, _: &str, include: &str) -> Result<(String, String), String> {
        match include {
            "site.least" => {
                Ok(("site.least".into(), include_str!("../../../../../grammar/examples/site.least").into()))
            }
            _ => Err("there is no such file".into()),
        }
    }
}

pub(super) fn hints(session: &mut Session, text: &str) -> Vec<Inlay> {
    let checked = session.check("model.least", text, &Site);
    let derived = session.derive(&checked);
    session.inlays(&checked, &derived, 0..text.len())
}

/// The lines with hints, each hint in ⟦…⟧ where it stands; `→` what it points to.
fn shown(text: &str) -> String {
    let mut out = String::new();
    let hints = hints(&mut Session::new(), text);
    let mut start = 0;
    for line in text.split_inclusive('\n') {
        let here: Vec<&Inlay> = hints.iter().filter(|h| start <= h.offset && h.offset < start + line.len()).collect();
        if let Some(first) = here.first() {
            out.push_str(&text[start..first.offset]);
            for h in here {
                let target = h.target.as_ref().map_or(String::new(), |t| format!(" → {}", &text[t.clone()]));
                out.push_str(&format!(" ⟦{}{target}⟧", h.label));
            }
            out.push('\n');
        }
        start += line.len();
    }
    out
}

/// One line of the model with its hints.
#[track_caller]
fn check(model: &str, line: &str) {
    let all = shown(model);
    assert!(all.lines().any(|l| l == line), "no line\n{line}\nin\n{all}");
}

macro_rules! example {
    ($test:ident, $file:literal) => {
        #[test]
        fn $test() {
            insta::assert_snapshot!(shown(include_str!(concat!("../../../../../grammar/examples/", $file, ".least"))));
        }
    };
}

example!(ballistic_gravimeter, "ballistic_gravimeter");
example!(buoy_chain, "buoy_chain");
example!(charged_drop, "charged_drop");
example!(elastic_gravimeter, "elastic_gravimeter");
example!(gimballed_rotor, "gimballed_rotor");
example!(moving_coil_geophone, "moving_coil_geophone");
example!(sampling_arm, "sampling_arm");
example!(seismometer, "seismometer");
example!(shaft_winch, "shaft_winch");
example!(tethered_buoys, "tethered_buoys");

const SWING: &str = "\
coordinate x, y: length
parameter m: mass, k: stiffness, c: damping, F: force
input u: force
assume m > 0, k > 0, c > 0
kinetic T = 1/2 m (x'^2 + y'^2)
";

/// Lines after the swing's, of which one is looked at.
#[track_caller]
fn swing(more: &str, line: &str) {
    check(&format!("{SWING}{more}"), line);
}

#[test]
fn momenta_say_what_acts_on_them() {
    swing("", "coordinate x, y: length ⟦cyclic: p_x = m ẋ, p_y = m ẏ⟧");
    swing("potential U = 1/2 k x^2\n", "coordinate x, y: length ⟦p_x = m ẋ; cyclic: p_y = m ẏ⟧");
    swing(
        "force brake on y = -c y'\n",
        "coordinate x, y: length ⟦cyclic: p_x = m ẋ; cyclic, but brake acts: p_y = m ẏ → brake⟧",
    );
    swing(
        "potential U = F x\nforce hand on x = F\n",
        "coordinate x, y: length ⟦conserved: p_x = m ẋ; cyclic: p_y = m ẏ⟧",
    );
    // The multiplier of x = 0 is zero on every motion.
    swing("constraint wall: x = 0\n", "coordinate x, y: length ⟦cyclic: p_x = m ẋ, p_y = m ẏ⟧");
    swing(
        "constraint rod: x^2 + y^2 = 4\n",
        "coordinate x, y: length ⟦cyclic, but rod acts: p_x = m ẋ, p_y = m ẏ → constraint rod: x^2 + y^2 = 4⟧",
    );
    check("coordinate x,\n    y\nkinetic 1/2 (x'^2 + y'^2)\n", "coordinate x, ⟦cyclic: p = ẋ⟧");
    check("coordinate x\nparameter p\nkinetic 1/2 p x'^2\n", "coordinate x ⟦cyclic: p_x = p ẋ⟧");
}

/// A row of masses, few of which are written out and many of which are not.
#[track_caller]
fn row(n: usize, more: &str, hint: &str) {
    let model =
        format!("index i: 1..{n}\ncoordinate x[i]\nparameter m[i], k\nkinetic T = sum(i: 1/2 m[i] x[i]'^2)\n{more}\n");
    check(&model, &format!("coordinate x[i] ⟦{hint}⟧"));
}

#[test]
fn families_have_one_form_where_there_is_one() {
    row(1, "", "cyclic: p[1] = m[1] x[1]'");
    for n in [5, 400] {
        row(n, "", "cyclic: p[i] = m[i] x[i]'");
        let push = format!("cyclic: p[1] = m[1] x[1]' + k, p[i] = m[i] x[i]' for i = 2..{n}");
        row(n, "lagrangian push = k x[1]'", &push);
        let hung = format!("cyclic: p[1] = m[1] x[1]'; p[2] = m[2] x[2]'; cyclic: p[i] = m[i] x[i]' for i = 3..{n}");
        row(n, "potential U = k x[2]^2", &hung);
        let braked = format!(
            "cyclic: p[1] = m[1] x[1]'; cyclic, but D acts: p[2] = m[2] x[2]'; \
             cyclic: p[i] = m[i] x[i]' for i = 3..{n} → D"
        );
        row(n, "dissipation D = k x[2]'^2", &braked);
        let coupled = format!(
            "cyclic: p[1] = x[2]' + m[1] x[1]', p[i] = x[i - 1]' + x[i + 1]' + m[i] x[i]' for i = 2..3, \
             p[4] = x[3]' + m[4] x[4]', p[{0}] = m[{0}] x[{0}]'{1}",
            if n == 5 { "5" } else { "i" },
            if n == 5 { "" } else { " for i = 5..400" },
        );
        row(n, "kinetic c = sum(i in 1..3: x[i]' x[i+1]')", &coupled);
    }
    // Two bound masses coast: the reaction does nothing. Of a large family that is not asked.
    row(5, "constraint rod: x[1] = x[2]", "cyclic: p[i] = m[i] x[i]'");
    row(
        400,
        "constraint rod: x[1] = x[2]",
        "cyclic, but rod may act: p[i] = m[i] x[i]' for i = 1..2; cyclic: p[i] = m[i] x[i]' for i = 3..400 \
         → constraint rod: x[1] = x[2]",
    );
}

#[test]
fn claims_have_their_verdicts() {
    swing("symmetry s: x -> x + ε\n", "symmetry s: x -> x + ε ⟦exact: p = m ẋ⟧");
    swing("symmetry s: x -> x + 2 ε  # twice\n", "symmetry s: x -> x + 2 ε ⟦exact: Q = 2 m ẋ⟧");
    swing("symmetry s: x -> x + ε t\n", "symmetry s: x -> x + ε t ⟦up to d/dt(m x): Q = m (t ẋ - x)⟧");
    swing(
        "potential spring = 1/2 k x^2\nsymmetry s: x -> x + ε\n",
        "symmetry s: x -> x + ε ⟦broken by spring: force -k x along x → 1/2 k x^2⟧",
    );
    swing(
        "potential spring = 1/2 k x^2\nbroken symmetry s: x -> x + ε\n",
        "broken symmetry s: x -> x + ε ⟦broken by spring, as declared → 1/2 k x^2⟧",
    );
    swing("broken symmetry s: x -> x + ε\n", "broken symmetry s: x -> x + ε ⟦not broken, exact: p = m ẋ⟧");
    swing(
        "force brake on x = -c x'\nsymmetry s: x -> x + ε\n",
        "symmetry s: x -> x + ε ⟦exact, but brake takes p = m ẋ → brake⟧",
    );
    swing(
        "constraint rod: x^2 + y^2 = 4\nsymmetry s: x -> x + ε\n",
        "symmetry s: x -> x + ε ⟦exact, but rod takes p = m ẋ → constraint rod: x^2 + y^2 = 4⟧",
    );
    swing("symmetry s: x -> 2 x + ε\n", "symmetry s: x -> 2 x + ε ⟦not the identity at ε = 0 → x⟧");
    swing("conserved p = m x'\n", "conserved p = m x' ⟦conserved⟧");
    swing("potential U = 1/2 k x^2\nconserved p = m x'\n", "conserved p = m x' ⟦not conserved: rate -k x⟧");
    swing("dissipation D = 1/2 c x'^2\nconserved h = energy\n", "conserved h = energy ⟦not conserved: rate -c ẋ²⟧");
    swing(
        "constraint rod: x^2 + y^2 = 4\nconserved p = momentum(x)\n",
        "conserved p = momentum(x) ⟦not conserved: rate 2 λ_rod x⟧",
    );
    swing("potential U = k x^2\nconserved v = x'\n", "conserved v = x' ⟦not conserved: rate ẍ⟧");
    swing("conserved P = (x', x)\n", "conserved P = (x', x) ⟦P[1] conserved; P[2] not conserved: rate ẋ⟧");
    check(
        "cyclic coordinate x\nparameter k\nkinetic 1/2 x'^2\npotential spring = 1/2 k x^2\n",
        "cyclic coordinate x ⟦not cyclic: spring → 1/2 k x^2⟧ ⟦p = ẋ⟧",
    );
    check(
        "cyclic coordinate x, y\nparameter k\nkinetic 1/2 (x'^2 + y'^2)\npotential spring = 1/2 k y^2\n",
        "cyclic coordinate x, y ⟦y is not cyclic: spring → 1/2 k y^2⟧ ⟦cyclic: p_x = ẋ; p_y = ẏ⟧",
    );
}

#[test]
fn charges_have_the_names_of_the_trade() {
    let turn = "symmetry s: x -> x cos ε - y sin ε, y -> x sin ε + y cos ε";
    swing(&format!("{turn}\n"), &format!("{turn} ⟦exact: angular momentum = m (x ẏ - y ẋ)⟧"));
    let back = "symmetry s: x -> x + ε y, y -> y - ε x";
    swing(&format!("{back}\n"), &format!("{back} ⟦exact: angular momentum = m (y ẋ - x ẏ)⟧"));
    // Canonical, not mechanical: a field has its share.
    swing(
        &format!("lagrangian magnet = F (x y' - y x')\n{turn}\n"),
        &format!("{turn} ⟦exact: Q = m (x ẏ - y ẋ) + F (x² + y²)⟧"),
    );
    swing("symmetry s: x -> x + ε, y -> y + ε\n", "symmetry s: x -> x + ε, y -> y + ε ⟦exact: Q = m (ẋ + ẏ)⟧");
    check(
        "index i: 1..2\ncoordinate x[i]: length\nparameter m[i]\nkinetic T = sum(i: 1/2 m[i] x[i]'^2)\n\
         symmetry s: x[i] -> x[i] + ε\n",
        "symmetry s: x[i] -> x[i] + ε ⟦exact: momentum = m[1] x[1]' + m[2] x[2]'⟧",
    );
    check(
        "coordinate α, β: angle\nparameter J\nkinetic T = 1/2 J (α'^2 + β'^2)\nsymmetry s: α -> α + ε, β -> β + ε\n",
        "symmetry s: α -> α + ε, β -> β + ε ⟦exact: Q = J (α̇ + β̇)⟧",
    );
    // The charge of a turn in a constant torque grows with the angle.
    check(
        "coordinate φ: angle\nparameter J, M\nkinetic T = 1/2 J φ'^2\nlagrangian U = M φ\nsymmetry s: t -> t + ε\n\
         symmetry l: φ -> φ + ε t\n",
        "symmetry l: φ -> φ + ε t ⟦up to d/dt(J φ + 1/2 M t²), not single-valued: Q = J (t φ̇ - φ) - 1/2 M t²⟧",
    );
    check(
        "coordinate x\nparameter Q\nkinetic T = 1/2 Q x'^2\nsymmetry s: x -> x + 2 ε\n",
        "symmetry s: x -> x + 2 ε ⟦exact: charge = 2 Q ẋ⟧",
    );
}

#[test]
fn the_summary_tells_of_the_energy() {
    let last = "kinetic T = 1/2 m (x'^2 + y'^2)";
    swing("", &format!("{last} ⟦2 degrees of freedom, energy conserved⟧"));
    swing("dissipation D = 1/2 c x'^2\n", &format!("{last} ⟦2 degrees of freedom, energy dissipated by D → D⟧"));
    swing("dissipation D = 1/2 F x'^2\n", &format!("{last} ⟦2 degrees of freedom, energy not conserved: D → D⟧"));
    swing(
        "dissipation D = 1/2 c x'^2\nforce hand on x = F\n",
        &format!("{last} ⟦2 degrees of freedom, energy not conserved: D, hand → D⟧"),
    );
    swing(
        "potential push = F x sin(t) + u y\n",
        "potential push = F x sin(t) + u y ⟦2 degrees of freedom, energy not conserved: t, u in push → F x sin(t)⟧",
    );
    swing(
        "constraint rod: x^2 + y^2 = 4\n",
        &format!("{last} ⟦1 degree of freedom with 1 constraint, energy conserved⟧"),
    );
    swing(
        "constraint rod: x^2 + y^2 = 4 + t\n",
        &format!("{last} ⟦1 degree of freedom with 1 constraint, energy not conserved: moving constraints⟧"),
    );
    // Twice the same takes one degree of freedom only.
    swing(
        "constraint a: x = y\nconstraint b: 2 x = 2 y\n",
        &format!("{last} ⟦2 coordinates, 2 constraints, energy conserved⟧"),
    );
    swing("constraint a: x^2 + y^2 = -1\n", &format!("{last} ⟦2 coordinates, 1 constraint, energy conserved⟧"));
    check("coordinate x, y\nlagrangian y x'\n", "lagrangian y x' ⟦2 coordinates, singular mass matrix, h conserved⟧");
    // A bead on a turning wire: h is not the energy [GPS §2.7].
    check(
        "coordinate r\nparameter m, Ω\nkinetic T = 1/2 m (r'^2 + r^2 Ω^2)\n",
        "kinetic T = 1/2 m (r'^2 + r^2 Ω^2) ⟦1 degree of freedom, h conserved, not the total energy⟧",
    );
}

#[test]
fn nothing_is_said_while_an_item_has_no_meaning() {
    assert_eq!(hints(&mut Session::new(), &format!("{SWING}potential U = (\n")), []);
    assert_eq!(hints(&mut Session::new(), ""), []);
}

#[test]
fn only_what_is_asked_for() {
    let mut session = Session::new();
    let text = include_str!("../../../../../grammar/examples/shaft_winch.least");
    let checked = session.check("model.least", text, &Site);
    let derived = session.derive(&checked);
    let all = session.inlays(&checked, &derived, 0..text.len());
    assert!(all.len() > 7);
    for h in &all {
        let some = session.inlays(&checked, &derived, h.offset..h.offset);
        assert!(some.contains(h) && some.iter().all(|s| s.offset == h.offset), "{h:?}");
    }
    let parted: Vec<Inlay> =
        [0..900, 901..text.len()].into_iter().flat_map(|part| session.inlays(&checked, &derived, part)).collect();
    assert_eq!(parted, all);
}

#[test]
fn of_many_forms_the_first_are_said() {
    row(
        5,
        "lagrangian g = sum(i: i^2 x[i]')",
        &(1..=5)
            .map(|k| format!("p[{k}] = m[{k}] x[{k}]' + {}", k * k))
            .fold("cyclic: ".to_string(), |all, p| if all.ends_with(": ") { all + &p } else { all + ", " + &p }),
    );
    row(
        9,
        "lagrangian g = sum(i: i^2 x[i]')",
        "cyclic: p[1] = m[1] x[1]' + 1, p[2] = m[2] x[2]' + 4, \
        p[3] = m[3] x[3]' + 9, p[4] = m[4] x[4]' + 16, p[5] = m[5] x[5]' + 25, …",
    );
}

/// Of a chain that is too long to be printed behind a name, the hint says that there is more.
#[test]
fn long_momenta_end_somewhere() {
    let links = "index i: 1..10\ncoordinate θ[i]: angle\nparameter m[i], l[i]\n\
        let P[i] = (sum(j in 1..i: l[j] sin θ[j]), -sum(j in 1..i: l[j] cos θ[j]))\n\
        kinetic bobs = sum(i: 1/2 m[i] |P[i]'|^2)\n";
    let hints = hints(&mut Session::new(), links);
    let label = &hints[0].label;
    assert!(label.starts_with("p[1] = ") && label.ends_with(", …"), "{label}");
    assert!(label.chars().count() < 4000, "{label}");
    assert_eq!(hints[1].label, "10 degrees of freedom, energy conserved");
}

#[test]
fn no_text_makes_hints_fail() {
    let mut session = Session::new();
    crate::features::models::with_models(|text| {
        for text in crate::features::models::broken(text) {
            let mut last = 0;
            for h in hints(&mut session, &text) {
                assert!(text.is_char_boundary(h.offset) && last <= h.offset, "{h:?} in\n{text}");
                assert!(!h.label.is_empty() && !h.label.contains(['\n', '\r']), "{h:?}");
                assert!(h.target.is_none_or(|t| text.get(t).is_some()));
                let line = text[h.offset..].split(['\n', '\r']).next().unwrap_or_default().trim_start();
                assert!(line.is_empty() || line.starts_with('#'), "{} stands before {line}", h.label);
                last = h.offset;
            }
        }
    });
}

/// A family that is not written out, with ends, damping and a constraint.
const LONG_ROW: &str = "\
index i: 1..100
coordinate x[i], y: length
parameter m, k, c
kinetic masses = sum(i: 1/2 m x[i]'^2) + 1/2 m y'^2
potential springs = sum(i in 1..99: 1/2 k (x[i+1] - x[i])^2)
dissipation drag = 1/2 c (x[7]'^2 + y'^2)
constraint rod: x[1] = x[2]
symmetry shift: x[i] -> x[i] + ε
symmetry up: y -> y + ε
conserved h = energy
";

#[test]
fn a_session_that_has_lived_shows_what_a_new_one_shows() {
    let mut session = Session::new();
    let mut state = 11;
    let mut live = |original: &str| {
        let mut text = original.to_string();
        for step in 0..40 {
            let lived = hints(&mut session, &text);
            assert_eq!(lived, hints(&mut Session::new(), &text), "after step {step} of\n{text}");
            text = crate::features::models::edited(&text, original, &mut state);
        }
    };
    crate::features::models::with_models(&mut live);
    live(LONG_ROW);
}

/// Hints of the first text, carried to the second: as they stand in it.
#[track_caller]
fn carry(before: &str, after: &str) {
    let mut plain = String::new();
    let mut old = Vec::new();
    let mut rest = before;
    while let Some((head, tail)) = rest.split_once('⟦') {
        plain.push_str(head);
        let (label, tail) = tail.split_once('⟧').expect("a hint");
        old.push(Inlay { offset: plain.len(), kind: InlayKind::Claim, label: label.into(), target: None });
        rest = tail;
    }
    plain.push_str(rest);
    let text: String = {
        let mut out = String::new();
        let mut inside = false;
        for c in after.chars() {
            inside |= c == '⟦';
            if !inside {
                out.push(c);
            }
            inside &= c != '⟧';
        }
        out
    };
    let mut shown = String::new();
    let mut at = 0;
    for h in carried(&old, &plain, &text) {
        shown.push_str(&text[at..h.offset]);
        shown.push_str(&format!("⟦{}⟧", h.label));
        at = h.offset;
    }
    shown.push_str(&text[at..]);
    assert_eq!(shown, after);
}

#[test]
fn hints_stay_with_their_lines() {
    let before = "kinetic a = x⟦A⟧  # of x\npotential b = y⟦B⟧\nsymmetry c: t -> t⟦C⟧\n";
    carry(before, before);
    // Typing in a line, at its end, in its comment.
    carry(before, "kinetic a = 2 x⟦A⟧  # of x\npotential b = y⟦B⟧\nsymmetry c: t -> t⟦C⟧\n");
    carry(before, "kinetic a = x + (⟦A⟧  # of x\npotential b = y⟦B⟧\nsymmetry c: t -> t⟦C⟧\n");
    carry(before, "kinetic a = x⟦A⟧  # of θ̇\npotential b = y⟦B⟧\nsymmetry c: t -> t⟦C⟧\n");
    carry(before, "kinetic a = x⟦A⟧  # of x\npotential b = y + 𝑥⟦B⟧\nsymmetry c: t -> t⟦C⟧\n");
    carry(before, "kinetic a = x⟦A⟧  # of x\npotential b =⟦B⟧ \nsymmetry c: t -> t⟦C⟧\n");
    // Lines put in, taken out, moved.
    carry(before, "\nkinetic a = x⟦A⟧  # of x\nk\npotential b = y⟦B⟧\nsymmetry c: t -> t⟦C⟧\n");
    carry(before, "kinetic a = x⟦A⟧  # of x\nsymmetry c: t -> t⟦C⟧\n");
    carry(before, "potential b = y⟦B⟧\nkinetic a = x⟦A⟧  # of x\nsymmetry c: t -> t⟦C⟧\nlet d = (\n");
    carry(before, "kinetic a = x⟦A⟧  # of x\npotential b =⟦B⟧\n  y\nsymmetry c: t -> t⟦C⟧\n");
    carry(before, "kinetic a = x⟦A⟧  # of x\npotential b = y symmetry c: t -> t⟦B⟧\n");
    // Another line has come in its place.
    carry(before, "kinetic a = x⟦A⟧  # of x\nforce u on q = 1\nsymmetry c: t -> t⟦C⟧\n");
    carry(before, "");
    // Line ends changed.
    carry(before, &before.replace('\n', "\r\n"));
    carry(&before.replace('\n', "\r"), before);
}

proptest::proptest! {
    /// Wherever hints stood and whatever the text has become: they stand between characters, in order, and stay where the
    /// text is the same.
    #[test]
    fn carried_hints_stand_in_the_text(
        before in "[a-cθ𝑥\u{307}# \r\n]{0,60}", after in "[a-cθ𝑥\u{307}# \r\n]{0,60}", head in 0usize..60, places in proptest::collection::vec(0usize..60, 0..8)
    ) {
        let whole = |text: &str, n: usize| text.char_indices().map(|c| c.0).nth(n).unwrap_or(text.len());
        // The two share what they begin with.
        let after = format!("{}{after}", &before[..whole(&before, head)]);
        let mut hints: Vec<Inlay> = places
            .iter()
            .map(|&n| whole(&before, n))
            .map(|offset| Inlay { offset, kind: InlayKind::Claim, label: offset.to_string(), target: Some(0..offset) })
            .collect();
        hints.sort_by_key(|h| h.offset);
        let moved = carried(&hints, &before, &after);
        let mut last = 0;
        for h in &moved {
            proptest::prop_assert!(last <= h.offset && after.is_char_boundary(h.offset), "{h:?}");
            if let Some(t) = &h.target {
                proptest::prop_assert!(after.get(t.clone()).is_some(), "{h:?}");
            }
            last = h.offset;
        }
        proptest::prop_assert_eq!(carried(&hints, &before, &before), hints);
    }
}
