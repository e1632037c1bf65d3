//! Where programs of this kind go wrong, each trap with what has to come out. Expected values are derived by hand.

use crate::support::Folder;
use serde_json::Value;

/// What a model's sheet says at places like `/symmetries/0/status`, formulas in the spelling `plain`.
#[track_caller]
fn check(model: &str, expected: &[(&str, &str)]) {
    let sheet = Folder::with("m.least", model).run(&["sheet", "m.least", "--as", "json"]).json();
    for (place, words) in expected {
        let value = sheet.pointer(place).unwrap_or(&Value::Null);
        let said = match value.get("plain").unwrap_or(value) {
            Value::String(s) => s.clone(),
            other => other.to_string(),
        };
        assert_eq!(said, *words, "{place} of\n{model}");
    }
}

/// A mass on a line with this potential, and whether a shift is `exact`, `broken`, ….
#[track_caller]
fn check_shift(declared: &str, potential: &str, status: &str) {
    let model = format!(
        "coordinate q\nparameter m\n{declared}\nkinetic bob = 1/2 m q'^2\npotential it = {potential}\nsymmetry shift: q -> q + ε\n"
    );
    check(&model, &[("/symmetries/0/status", status)]);
}

#[test]
fn the_cosine_of_120_degrees() {
    check_shift("", "q^2 (cos(2 π/3) + 1/2)", "exact");
    check_shift("", "q^2 (cos(2 π/3) - 1/2)", "broken");
}

#[test]
fn the_root_of_three() {
    check_shift("", "q^2 (√(3) - 2 sin(π/3))", "exact");
    check_shift("", "q^2 (√(3) - 2 cos(π/3))", "broken");
}

#[test]
fn a_root_of_a_product_under_assumptions() {
    let term = "q^2 (√(x y) - √(x) √(y))";
    check_shift("parameter x, y\nassume x > 0, y > 0", term, "exact");
    // For negative x and y the right side is not real: nothing may be claimed.
    check_shift("parameter x, y\nassume x < 0, y < 0", term, "undecided");
}

#[test]
fn equal_arguments_of_an_unspecified_function() {
    check_shift("function f(u)", "f((q + 1)^2) - f(q^2 + 2 q + 1)", "exact");
    check_shift("function f(u)", "f((q + 1)^2) - f(q^2 + 2 q + 2)", "broken");
}

#[test]
fn the_primes_of_the_zero_test() {
    let [first, second] = [(1u128 << 62) - 755_532_545, (1 << 62) - 2_650_814_465];
    for p in [(1 << 61) - 1, first, second] {
        check_shift("", &format!("{p} q^2"), "broken");
        check_shift("", &format!("{p} q^2 - {p} q q"), "exact");
        // The force q^p − q is 0 at every point of the field.
        check_shift("", &format!("1/{} q^{} - 1/2 q^2", p + 1, p + 1), "broken");
    }
    check_shift("", &format!("{} q^2", first * second), "broken");
}

#[test]
fn a_rolling_disc() {
    // m ẍ = λ₁, m ÿ = λ₂, A θ̈ = −R (λ₁ cos φ + λ₂ sin φ), B φ̈ = 0: θ̇ is constant, ẋ is not [NF].
    check(
        "coordinate x, y, θ, φ
parameter m, A, B, R
kinetic centre = 1/2 m (x'^2 + y'^2)
kinetic spin   = 1/2 A θ'^2 + 1/2 B φ'^2
constraint along: x' = R θ' cos φ
constraint across: y' = R θ' sin φ
conserved roll = θ'
conserved run = x'
",
        &[
            ("/coordinates/0/equation", "m*x''"),
            ("/coordinates/0/reaction", "λ_along"),
            ("/coordinates/1/reaction", "λ_across"),
            ("/coordinates/2/equation", "A*θ''"),
            ("/coordinates/2/reaction", "-R*(λ_across*sin(φ) + λ_along*cos(φ))"),
            ("/coordinates/3/equation", "B*φ''"),
            ("/coordinates/3/reaction", "0"),
            ("/energy/conserved", "true"),
        ],
    );
}

#[test]
fn a_pendulum_on_a_rod() {
    // f = x² + y² − l²: R = λ ∂f/∂q [GPS §2.4].
    check(
        "coordinate x, y
parameter m, g, l
kinetic bob = 1/2 m (x'^2 + y'^2)
potential weight = m g y
constraint rod: x^2 + y^2 = l^2
",
        &[
            ("/coordinates/0/equation", "m*x''"),
            ("/coordinates/0/reaction", "2*λ_rod*x"),
            ("/coordinates/1/equation", "m*(y'' + g)"),
            ("/coordinates/1/reaction", "2*λ_rod*y"),
            ("/energy/conserved", "true"),
        ],
    );
}

#[test]
fn the_circular_orbit() {
    // What is conserved is p = m r² φ̇, not φ̇ [LL §14].
    check(
        "coordinate r
cyclic coordinate φ
parameter m, k
assume r > 0
kinetic body = 1/2 m (r'^2 + r^2 φ'^2)
potential gravity = -k/r
conserved turning = m r^2 φ'
conserved rate = φ'
",
        &[
            ("/coordinates/0/equation", "m*(r'' - r*φ'^2) + k/r^2"),
            ("/coordinates/1/momentum_conserved", "true"),
            ("/conserved/0/holds", "true"),
            ("/conserved/1/holds", "false"),
        ],
    );
}

#[test]
fn moving_constraints() {
    // A bead on a wire that turns: h = ½m(ẋ² − Ω²x²) is constant, T is not [GPS §2.7].
    check(
        "coordinate x
parameter m, Ω
kinetic bead = 1/2 m (x'^2 + Ω^2 x^2)
conserved T = 1/2 m (x'^2 + Ω^2 x^2)
",
        &[
            ("/energy/formula", "1/2*m*(x'^2 - Ω^2*x^2)"),
            ("/energy/conserved", "true"),
            ("/energy/is_total_energy", "false"),
            ("/conserved/0/holds", "false"),
        ],
    );
    // The same motion held by a constraint: L knows no time, the reaction does work.
    let lift = "coordinate x, y\nparameter m, v\nkinetic bob = 1/2 m (x'^2 + y'^2)\nconstraint lift: y = v t^2\n";
    let sheet = Folder::with("m.least", lift).run(&["sheet", "m.least", "--as", "json"]).json();
    assert_ne!(sheet["energy"]["conserved"], true);
}

#[test]
fn a_constraint_that_is_integrable_only_with_another() {
    // dx = y dφ; with dy = 0 it is d(x − y φ) = 0.
    let alone = "coordinate x, y, φ
parameter m, J
kinetic body = 1/2 m (x'^2 + y'^2) + 1/2 J φ'^2
conserved c = x - y φ
constraint a: x' - y φ' = 0
";
    let sheet = Folder::with("m.least", alone).run(&["sheet", "m.least", "--as", "json"]).json();
    assert_ne!(sheet["conserved"][0]["holds"], true);
    check(
        &format!("{alone}constraint b: y' = 0\n"),
        &[("/coordinates/2/reaction", "-λ_a*y"), ("/coordinates/1/reaction", "λ_b")],
    );
}

#[test]
fn a_rolling_constant_is_not_zero() {
    // ẋ = R ψ̇ integrates to x − R ψ = c. A spring in x − R ψ must not vanish.
    check(
        "coordinate x, ψ
parameter m, J, R, k
kinetic body = 1/2 m x'^2 + 1/2 J ψ'^2
potential spring = 1/2 k (x - R ψ)^2
constraint roll: x' = R ψ'
",
        &[("/coordinates/0/equation", "m*x'' + k*(x - R*ψ)"), ("/coordinates/1/reaction", "-R*λ_roll")],
    );
}

#[test]
fn a_gauge_term_that_grows_with_an_angle() {
    // V = F: the charge J φ̇ − F t is a constant, J φ̇ is none.
    check(
        "coordinate φ: angle
parameter J: moment_of_inertia, F: torque
kinetic rotor = 1/2 J φ'^2
potential drive = -F φ
symmetry turn: φ -> φ + ε
",
        &[
            ("/symmetries/0/status", "up_to_gauge"),
            ("/symmetries/0/gauge", "F*t"),
            ("/symmetries/0/charge", "J*φ' - F*t"),
            ("/coordinates/0/cyclic", "false"),
            ("/findings/0/code", "not-periodic"),
        ],
    );
}

#[test]
fn dry_friction() {
    // The loss is q̇ ∂ℱ/∂q̇ = ℱ for ℱ = μ |ẋ|, and 2ℱ for ½ c ẋ².
    let model = |f: &str| format!("coordinate x\nparameter m, c\nkinetic bob = 1/2 m x'^2\ndissipation drag = {f}\n");
    check(&model("c abs(x')"), &[("/energy/rate", "-c*sign(x')*x'"), ("/energy/conserved", "false")]);
    check(&model("1/2 c x'^2"), &[("/energy/rate", "-c*x'^2"), ("/energy/conserved", "false")]);
}

#[test]
fn derivatives_by_argument_and_by_time() {
    // U(r)′ as a term changes no equation; U′(r) is the force.
    check(
        "coordinate r
parameter m
function U(s)
kinetic bob = 1/2 m r'^2
potential well = U(r)
lagrangian gauge = U(r)'
conserved E = 1/2 m r'^2 + U(r)
",
        &[
            ("/coordinates/0/equation", "m*r'' + U'(r)"),
            ("/coordinates/0/momentum", "m*r' + U'(r)"),
            ("/conserved/0/holds", "true"),
        ],
    );
}

fn chain(n: usize, sum: &str) -> String {
    format!(
        "index i: 1..{n}\ncoordinate x[i]\nparameter m, k\nkinetic bobs = sum(i: 1/2 m x[i]'^2)\npotential springs = {sum}\nsymmetry shift: x[i] -> x[i] + ε\n"
    )
}

#[test]
fn ends_of_chains() {
    check(
        &chain(5, "sum(i in 1..4: 1/2 k (x[i+1] - x[i])^2)"),
        &[
            ("/coordinates/0/equation", "m*x[1]'' + k*(x[1] - x[2])"),
            ("/coordinates/2/equation", "m*x[3]'' + k*(2*x[3] - x[2] - x[4])"),
            ("/coordinates/4/equation", "m*x[5]'' + k*(x[5] - x[4])"),
            ("/symmetries/0/status", "exact"),
        ],
    );
    check(
        &chain(100, "sum(i in 1..99: 1/2 k (x[i+1] - x[i])^2)"),
        &[
            ("/coordinates/0/equation", "m*x[1]'' + k*(x[1] - x[2])"),
            ("/coordinates/1/equation", "m*x[i]'' + k*(2*x[i] - x[i - 1] - x[i + 1])"),
            ("/coordinates/1/members/first", "2"),
            ("/coordinates/1/members/last", "99"),
            ("/coordinates/2/equation", "m*x[100]'' + k*(x[100] - x[99])"),
            ("/symmetries/0/status", "exact"),
        ],
    );
}

#[test]
fn pairs_with_themselves() {
    // Σᵢⱼ ¼k (xᵢ − xⱼ)²: the pair (i, i) gives nothing, each other pair counts twice.
    let sum = |n| chain(n, &format!("sum(i: sum(j in 1..{n}: 1/4 k (x[i] - x[j])^2))"));
    check(&sum(3), &[("/coordinates/0/equation", "m*x[1]'' + k*(2*x[1] - x[2] - x[3])")]);
    check(
        &sum(100),
        &[
            ("/coordinates/0/equation", "m*x[i]'' + k*(100*x[i] - sum(j in 1..100: x[j]))"),
            ("/symmetries/0/status", "exact"),
        ],
    );
}

#[test]
fn a_singular_mass_matrix() {
    // ẋ + ẏ alone has inertia: accelerations are not determined, no claim is refuted by chance.
    check(
        "coordinate x, y
parameter m, k
kinetic bob = 1/2 m (x' + y')^2
potential spring = 1/2 k x^2
conserved speed = x'
",
        &[
            ("/findings/0/code", "singular-mass-matrix"),
            ("/conserved/0/holds", "null"),
            ("/coordinates/1/cyclic", "true"),
        ],
    );
}

#[test]
fn a_witness_has_the_value_of_the_rate() {
    // −c ẋ² = −(7/3)·9; F ẋ is positive at the points tried first.
    let bob = "coordinate x, y\nparameter m, c, F\nkinetic bob = 1/2 m (x'^2 + y'^2)\n";
    check(&format!("{bob}dissipation drag = 1/2 c x'^2\n"), &[("/energy/witness", "-21.000000 at ẋ = 3, c = 7/3")]);
    let sheet = Folder::with("m.least", format!("{bob}force pull on x = F\n"))
        .run(&["sheet", "m.least", "--as", "json"])
        .json();
    assert!(!sheet["energy"]["witness"].as_str().unwrap_or("-").starts_with('-'), "{}", sheet["energy"]);
}
