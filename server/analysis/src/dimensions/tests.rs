//! What is inferred, and which place is told.

use super::Key;
use crate::database::Session;
use crate::fixture::check;
use crate::include::NoFiles;

/// The inferred dimensions of names: `m = M, k = M T⁻²`; with what they depend on where they are not determined.
#[track_caller]
fn infers(text: &str, expected: &str) {
    let checked = Session::new().check("folder/model.least", text, &NoFiles);
    let dimensions = checked.dimensions.as_ref().expect("the model speaks of quantities");
    let told: Vec<String> = expected
        .split(", ")
        .map(|e| {
            let name = e.split(" = ").next().unwrap_or_default();
            let form = dimensions.form_of_name(name).expect("a name");
            let mut out = form.factor().to_string();
            for (u, a) in form.unknowns() {
                let Some(Key::Name(of, 0)) = dimensions.key(*u) else { panic!("of {u}") };
                out.push_str(&format!(" · {of}{}", a.raised()));
            }
            format!("{name} = {out}")
        })
        .collect();
    assert_eq!(told.join(", "), expected);
}

const LENGTH: &str = "coordinate x: length\nparameter m: mass\nkinetic 1/2 m x'^2\n";

#[test]
fn parameters_are_inferred() {
    infers(&format!("{LENGTH}parameter k, g\npotential 1/2 k x^2 + m g x\n"), "k = M T⁻², g = L T⁻²");
    infers(&format!("{LENGTH}parameter a\npotential a^2 x^4\n"), "a = L⁻¹ M^(1/2) T⁻¹");
    infers(&format!("{LENGTH}parameter κ, b\npotential b cos(κ x)\n"), "κ = L⁻¹, b = L² M T⁻²");
    infers(&format!("{LENGTH}parameter c\ndissipation 1/2 c x'^2\n"), "c = M T⁻¹");
    infers(&format!("{LENGTH}input u\nforce push on x = u\n"), "u = L M T⁻²");
    infers(&format!("{LENGTH}input u\nforce push on x' = u\n"), "u = L M T⁻²");
    infers(&format!("{LENGTH}function U(r)\npotential U(x) + x U'(x)\n"), "U = L² M T⁻²");
    infers(&format!("{LENGTH}let v = (x, 0)'\nlet w = v·v\npotential m w\n"), "w = L² T⁻²");
    infers(
        &format!("{LENGTH}parameter Ω\nlet R = turn(ez, Ω t)\nlet P = R·(x, 0, 0)\nkinetic 1/2 m P'·P'\n"),
        "Ω = T⁻¹, P = L",
    );
}

#[test]
fn what_is_not_determined_depends_on_an_earlier_name() {
    infers(&format!("{LENGTH}parameter a, b\npotential a b x\n"), "a = 1 · a, b = L M T⁻² · a⁻¹");
    infers(&format!("{LENGTH}parameter k, n\npotential k/x^n\n"), "n = 1");
}

#[test]
fn energies_of_the_model_are_what_its_terms_agree_on() {
    check(
        "
coordinate x, y: length
lagrangian 1/2 (x'^2 + y'^2) - x' y'
#          ^^^^^^^^^^^^^^^^^^^^^^^^^ unlike-quantities: not energies: length²/time² (m²/s²)
",
    );
}

#[test]
fn a_summand_is_unlike_the_rest() {
    check(
        "
coordinate x: length
parameter m: mass, k: stiffness, g: acceleration
kinetic 1/2 m x'^2 + 1/2 k x
#                    ^^^^^^^ unlike-quantities: `1/2 k x` is a force (N), and the rest of the sum is an energy (J)
potential m g
#         ^^^ unlike-quantities: a potential term is an energy (J), and `m g` is a force (N)
",
    );
}

#[test]
fn an_argument_is_a_number() {
    check(
        "
coordinate x: length
coordinate θ: angle
parameter m: mass, l: length, b: energy
kinetic 1/2 m x'^2 + 1/2 m l^2 θ'^2
potential b cos x + b sin(θ + x^2/l^2) + b sin(θ + x)
#               ^ unlike-quantities: the argument of `cos` is a number, and `x` is a length (m)
#                                                  ^ unlike-quantities: `x` is a length (m), and the rest of the sum is a number
",
    );
}

#[test]
fn sides_images_forces() {
    check(
        "
coordinate x, y: length
coordinate φ: angle
parameter m: mass, J: moment_of_inertia, r: length, k: stiffness
input u: torque
kinetic 1/2 m (x'^2 + y'^2) + 1/2 J φ'^2
constraint rope: x = r φ
constraint rod: y = φ
#                   ^ unlike-quantities: `φ` is an angle, and `y` is a length (m)
force motor on φ = u
force brake on x = u
#                  ^ unlike-quantities: a force on `x` is a force (N), so that their product is an energy, and `u` is a torque (N·m)
symmetry slide: x -> x + ε, φ -> φ + ε/r
symmetry odd: x -> x + ε, φ -> φ + ε
#                                  ^ unlike-quantities: `ε` is a length (m)
dissipation 1/2 k x'^2
#           ^^^^^^^^^^ unlike-quantities: a dissipation function is a power (W)
",
    );
}

#[test]
fn the_fewest_are_blamed() {
    // A stiffness that is declared as a force, and used as a stiffness twice.
    check(
        "
coordinate x, y: length
parameter m: mass, k: force
#                     ^^^^^ unlike-quantities: `k` is declared as a force (N), and everywhere used as a stiffness (N/m)
kinetic 1/2 m (x'^2 + y'^2)
potential 1/2 k x^2
potential 1/2 k y^2 + k x y
",
    );
}

#[test]
fn a_definition_is_blamed_where_its_uses_agree() {
    check(
        "
coordinate θ: angle
parameter m: mass, l: length, g: acceleration
let P = (l sin θ, -cos θ)
#                 ^^^^^^ unlike-quantities: `P` is everywhere used as a length (m), and `-cos θ` is a number
kinetic 1/2 m P'·P'
potential m g P[2]
",
    );
}

#[test]
fn a_model_may_have_no_quantities() {
    check("coordinate x\nparameter k\nkinetic x'^2 + x' + x\npotential k sin x\n");
    check("system s, dimensionless\ncoordinate x: length\nkinetic x'^2 + x' + x\n");
}

#[test]
fn quantities_may_be_one() {
    check(
        "
system s, with c = 1
coordinate x: length
parameter m: mass
lagrangian -m sqrt(1 - x'^2)
potential x
#         ^ unlike-quantities: a potential term is a mass (kg), and `x` is a length (m)
",
    );
    check("system s, with c = 1, ħ = 1\ncoordinate x: length\nparameter m: mass\nlagrangian -m sqrt(1 - x'^2) + 1/x\n");
}
