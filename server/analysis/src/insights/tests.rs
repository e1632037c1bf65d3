//! Textbook cases: what is said, and that what is offered keeps the equations of motion.

use crate::Session;
use crate::features::actions::actions;
use crate::features::rename::edited;
use crate::include::NoFiles;
use crate::report::Sheet;
use leastwise_grammar::tree::Severity;

fn sheet(text: &str) -> Sheet {
    let mut session = Session::new();
    let checked = session.check("model.least", text, &NoFiles);
    let derived = session.derive(&checked);
    let errors: Vec<_> = checked.findings.iter().filter(|f| f.severity == Severity::Error).collect();
    assert!(errors.is_empty(), "{errors:?}");
    session.sheet(&checked, &derived)
}

/// The brackets that do not vanish, then what the charges form.
fn algebra(text: &str) -> Vec<String> {
    let report = sheet(text).insights.algebra.expect("charges");
    let algebra = report.algebra.expect("brackets");
    let brackets = algebra.brackets.iter().map(|b| format!("{{{}, {}}} = {}", b.left, b.right, b.value.text));
    brackets.chain(algebra.sentence()).collect()
}

const ORBIT: &str = "coordinate x, y\nparameter m, k\nassume m > 0, k > 0\nkinetic 1/2 m (x'^2 + y'^2)\n\
    potential -k/sqrt(x^2 + y^2)\nconserved L_z = m (x y' - y x')\n\
    conserved A_x = m^2 y' (x y' - y x') - m k x/sqrt(x^2 + y^2)\n\
    conserved A_y = -m^2 x' (x y' - y x') - m k y/sqrt(x^2 + y^2)\n";

#[test]
fn bound_orbits_turn_like_a_sphere() {
    assert_eq!(
        algebra(ORBIT),
        [
            "{L_z, A_x} = A_y",
            "{L_z, A_y} = -A_x",
            "{A_x, A_y} = -2 m h L_z",
            "On the level sets of h the other charges form so(3) where the energy is negative; e(2) where the energy is \
             zero; so(2,1) where the energy is positive.",
        ]
    );
}

#[test]
fn the_mass_is_central_and_momenta_are_found_unclaimed() {
    assert_eq!(
        algebra("coordinate x\nparameter m\nkinetic 1/2 m x'^2\nsymmetry boost: x -> x + ε t\n"),
        [
            "{h, boost} = p_x",
            "{p_x, boost} = m",
            "The charges form the Galilei algebra of the line, centrally extended, for m ≠ 0."
        ]
    );
}

#[test]
fn an_inverse_square_is_conformal() {
    let list = algebra(
        "coordinate x\nparameter m, g\nkinetic 1/2 m x'^2\npotential g/x^2\n\
         symmetry dilation: t -> t + 2 ε t, x -> x + ε x\nsymmetry expansion: t -> t + ε t^2, x -> x + ε t x\n",
    );
    assert_eq!(list.last().map(String::as_str), Some("The charges form sl(2,ℝ)."));
}

#[test]
fn a_field_is_the_centre_of_its_translations() {
    let list = algebra(
        "coordinate x, y\nparameter m, q, B\nkinetic 1/2 m (x'^2 + y'^2)\nlagrangian 1/2 q B (x y' - y x')\n\
         symmetry sx: x -> x + ε\nsymmetry sy: y -> y + ε\n",
    );
    assert_eq!(
        list,
        ["{sx, sy} = -q B", "The charges form Heisenberg algebra ⊕ ℝ, for q B ≠ 0."]
            .map(|s| { s.replace("form Heisenberg", "form the Heisenberg") })
    );
}

#[test]
fn only_what_is_proved_takes_part() {
    // The broken claim and the wrong constant are no charges; a duplicate is told as what it is.
    let report = sheet(
        "coordinate x, y\nparameter m, g\nkinetic 1/2 m (x'^2 + y'^2)\npotential m g y\nsymmetry push: x -> x + ε\n\
         broken symmetry lift: y -> y + ε t^3\nconserved wrong = m y'\nconserved twice = 2 m x'\n",
    )
    .insights
    .algebra
    .expect("charges");
    let names: Vec<(&str, Option<&str>)> =
        report.charges.iter().map(|c| (c.name.as_str(), c.dependent.as_ref().map(|f| f.text.as_str()))).collect();
    assert_eq!(names, [("h", None), ("p_x", None), ("push", Some("p_x")), ("twice", Some("2 p_x"))]);
}

#[test]
fn no_brackets_on_the_surface_of_a_constraint() {
    let report = sheet(
        "coordinate x, y, z\nparameter m, l\nkinetic 1/2 m (x'^2 + y'^2 + z'^2)\nconstraint rod: x^2 + y^2 = l^2\n",
    )
    .insights
    .algebra
    .expect("charges");
    assert_eq!(report.algebra.err().as_deref(), Some("no brackets: the motions lie on the surface of the constraints"));
}

#[test]
fn a_name_of_the_model_goes_first() {
    // h is a height and p_x a parameter.
    let report =
        sheet("coordinate x\nparameter h, p_x\nkinetic 1/2 h x'^2 + p_x x'\n").insights.algebra.expect("charges");
    let names: Vec<&str> = report.charges.iter().map(|c| c.name.as_str()).collect();
    assert_eq!(names, ["energy", "Q_p_x"]);
}

fn discrete(text: &str) -> Vec<String> {
    sheet(text).insights.discrete.rows.iter().map(|r| format!("{}: {}", r.map.words(), r.words())).collect()
}

#[test]
fn mirrors_and_clocks() {
    assert_eq!(
        discrete(
            "coordinate r: length\ncoordinate θ: angle\nparameter m: mass, g: acceleration, c: damping\nassume r > 0\n\
             kinetic bob = 1/2 m (r'^2 + r^2 θ'^2)\npotential weight = -m g r cos θ\ndissipation air = 1/2 c r'^2\n"
        ),
        ["time reversal: holds for L, broken by air", "θ → −θ: yes", "θ → θ + π: broken by weight",]
    );
    let field =
        discrete("coordinate x, y\nparameter m, b\nkinetic 1/2 m (x'^2 + y'^2)\nlagrangian field = b (x y' - y x')\n");
    assert!(field.contains(&"time reversal: broken by field".into()), "{field:?}");
    assert!(field.contains(&"time reversal with x → −x: yes".into()), "{field:?}");
}

fn similar(text: &str) -> (Vec<String>, Option<String>) {
    let report = sheet(text).insights.similarity;
    let words = |s: &super::Scaling| match &s.implies {
        Some(what) => format!("{}: {what}", s.words()),
        None => s.words(),
    };
    (report.scalings.iter().map(words).collect(), report.relation())
}

#[test]
fn the_third_law_and_isochrony() {
    let line = |u: &str| similar(&format!("coordinate x\nparameter m, k\nkinetic 1/2 m x'^2\npotential {u}\n"));
    let (words, virial) = similar(ORBIT);
    assert_eq!(
        words,
        ["x → λ x, y → λ y, t → λ^(3/2) t multiplies L by λ⁻¹: periods of similar orbits scale as (size)^(3/2)"]
    );
    assert_eq!(virial.as_deref(), Some("2⟨T⟩ = −⟨U⟩"));
    let (words, virial) = line("1/2 k x^2");
    assert_eq!(words, ["x → λ x multiplies L by λ²: periods of similar orbits do not depend on their size"]);
    assert_eq!(virial.as_deref(), Some("⟨T⟩ = ⟨U⟩"));
    assert_eq!(line("1/4 k x^4").1.as_deref(), Some("⟨T⟩ = 2⟨U⟩"));
    assert_eq!(line("k x").1.as_deref(), Some("2⟨T⟩ = ⟨U⟩"));
    // A constant changes neither, nor does it let the potential pass as homogeneous.
    assert_eq!(
        line("k x^4 + m").0,
        ["x → λ x, t → λ⁻¹ t multiplies L by λ⁴: periods of similar orbits scale as (size)⁻¹"]
    );
    assert_eq!(line("k x^4 + m x^2").0, [""; 0]);
}

/// The mend of the first idle term of a text, and the equations before and after.
#[track_caller]
fn removed(text: &str, after: &str) {
    let mut session = Session::new();
    let checked = session.check("model.least", text, &NoFiles);
    let derived = session.derive(&checked);
    let findings = session.findings(&checked, &derived);
    let list = actions(&checked, &findings, 0..text.len());
    let action = list.iter().find(|a| findings[a.mends].code == "idle-term").expect("a mend");
    assert!(!action.preferred);
    let new = edited(text, &action.edits);
    assert_eq!(new, after);
    let equations =
        |text: &str| -> Vec<String> { sheet(text).coordinates.iter().map(|c| c.equation.plain.clone()).collect() };
    assert_eq!(equations(text), equations(&new));
    assert!(!equations(text).is_empty());
}

#[test]
fn an_idle_part_goes_and_the_equations_stay() {
    let model = |body: &str| format!("coordinate x, y\nparameter m, a, b\n{body}");
    let check = |body: &str, after: &str| removed(&model(body), &model(after));
    check("kinetic 1/2 m x'^2 + b x x'\n", "kinetic 1/2 m x'^2\n");
    check("kinetic b x x' + 1/2 m x'^2\n", "kinetic 1/2 m x'^2\n");
    check("kinetic m x'^2\npotential b x x' - a x^2\n", "kinetic m x'^2\npotential -a x^2\n");
    check("kinetic m x'^2\npotential 2 (a x^2 + b x' + a x)\n", "kinetic m x'^2\npotential 2 (a x^2 + a x)\n");
    check("kinetic m x'^2\nlagrangian b cos(t)  # drive\npotential a x\n", "kinetic m x'^2\npotential a x\n");
    // Two parts that are idle together, in one term and in two.
    check("kinetic m x'^2 + m y'^2\nlagrangian b x y' + a x + b y x'\n", "kinetic m x'^2 + m y'^2\nlagrangian a x\n");
    check(
        "kinetic m x'^2 + m y'^2\nlagrangian b x y'\nlagrangian b y x' - a x\n",
        "kinetic m x'^2 + m y'^2\nlagrangian -a x\n",
    );
}

#[test]
fn a_comment_is_not_cut_and_a_zero_of_energy_is_no_fault() {
    let found = |text: &str| {
        let mut session = Session::new();
        let checked = session.check("model.least", text, &NoFiles);
        let derived = session.derive(&checked);
        let list = session.findings(&checked, &derived);
        list.into_iter().filter(|f| f.code == "idle-term").map(|f| (f.message, f.fixes.len())).collect::<Vec<_>>()
    };
    let commented = "coordinate x\nparameter m, b\nkinetic 1/2 m x'^2  # the body\n    + b x x'\n";
    assert_eq!(
        found(commented),
        [("this part of `kinetic 1` adds nothing to the equations of motion: it is d/dt(1/2 b x²)".into(), 0)]
    );
    assert_eq!(found("coordinate θ: angle\nparameter m, g\nkinetic m θ'^2\npotential m g (1 - cos θ)\n"), []);
}
