//! How items are read: one test per row of the language's table.

mod common;

use common::{item, read_all};

#[track_caller]
fn check(text: &str, expected: &str) {
    let items = read_all(text);
    assert_eq!(items.len(), 1, "{text}");
    let (_, parsed) = &items[0];
    assert_eq!(parsed.slips, [], "{text}");
    assert_eq!(item(&parsed.item.kind), expected, "{text}");
}

#[test]
fn system() {
    check("system shaft_winch", "system shaft_winch");
    check("system a, dimensionless", "system a, dimensionless");
    check("system a, with c = 1, ħ = 1", "system a, with c, ħ");
    check("system a, with c = 1, dimensionless", "system a, with c, dimensionless");
}

#[test]
fn coordinate() {
    check("coordinate x, y: length", "coordinate x, y: length");
    check("cyclic coordinate φ: angle # azimuth", "coordinate cyclic φ: angle");
    check("coordinate x[i]: length", "coordinate x[i]: length");
    check("coordinate x", "coordinate x");
    check("coordinate mass, spin, on: N/m", "coordinate mass, spin, on: N m^-1");
}

#[test]
fn parameter() {
    check("parameter m: mass = 42 kg", "parameter m: mass = 42 {kg}");
    check("parameter m₁, m₂: mass = 1 kg", "parameter m₁: mass = 1 {kg}, m₂: mass = 1 {kg}");
    check(
        "parameter F0: force = 20 N, v0: velocity = 0.05 m/s",
        "parameter F0: force = 20 {N}, v0: velocity = 5e-2 {m s^-1}",
    );
    check("parameter K: V s/m = 28 V s/m", "parameter K: V s m^-1 = 28 {V s m^-1}");
    check("parameter m[i] = (1, 2, 3) kg", "parameter m[i] = <1, 2, 3> {kg}");
    check("parameter k, l", "parameter k, l");
    check("parameter q = -1.6e-19 C", "parameter q = (-16e-20) {C}");
    check("parameter a = 1/2 m", "parameter a = (1 / 2) {m}");
    check("parameter a = 3·10^-3 m, b = 2 × 10² m", "parameter a = (3 * (10 ^ (-3))) {m}, b = (2 * (10 ^ 2)) {m}");
    check("parameter U0 = 3 min, R = 2 Ω", "parameter U0 = 3 {min}, R = 2 {Ω}");
}

#[test]
fn units() {
    check("parameter J = 0.9 kg m^2", "parameter J = 9e-1 {kg m^2}");
    check("parameter g = 9.81 m/s²", "parameter g = 981e-2 {m s^-2}");
    check("parameter Ω = 9 s^-1, ω = 9 s⁻¹", "parameter Ω = 9 {s^-1}, ω = 9 {s^-1}");
    check("parameter k = 2 N/(m s)", "parameter k = 2 {N m^-1 s^-1}");
    check("parameter k = 2 V/m^(1/2)", "parameter k = 2 {V m^(-1/2)}");
    check("parameter ν: 1/s = 3 1/s, μ = 4/s", "parameter ν: s^-1 = 3 {s^-1}, μ = 4 {s^-1}");
    check("parameter k = 3 1/(m s), l = 4/(m s)", "parameter k = 3 {m^-1 s^-1}, l = 4 {m^-1 s^-1}");
    check("parameter k = 3 (N m)/s", "parameter k = 3 {N m s^-1}");
    check("parameter l = 3 µm", "parameter l = 3 {μm}");
    check("parameter T = 21 °C", "parameter T = 21 {°C}");
    check("parameter n: 1 = 3", "parameter n:  = 3");
    check("parameter a = 2 N·m", "parameter a = 2 {N m}");
}

#[test]
fn arcs_are_units_behind_a_number_in_a_value() {
    check("parameter α = 30°", "parameter α = 30 {°}");
    check("parameter α = 30′, β = 10″", "parameter α = 30 {′}, β = 10 {″}");
    check("parameter α = 4° 30′ 10″", "parameter α = ((4 + (30 / 60)) + (10 / 3600)) {°}");
    check("parameter α = -4°30′", "parameter α = (-(4 + (30 / 60))) {°}");
}

#[test]
fn input_index_include() {
    check("input u: torque", "input u: torque");
    check("input u, v[i]", "input u, v[i]");
    check("index i: 1..8", "index i: 1..8");
    check("index i, j: 1..2 N", "index i, j: 1..(2 N)");
    check("include \"site #2.least\" # all", "include site #2.least");
}

#[test]
fn definitions_and_functions() {
    check("let P = (r sin θ, -r cos θ)", "let P = <(r sin(θ)), ((-r) cos(θ))>");
    check("let f(x, y) = x f(y, x)", "let f(x, y) = (x f(y, x))");
    check("let X[i] = sum(j in 1..i: l[j] sin θ[j])", "let X[i] = sum(j in 1..i: (l[j] sin(θ[j])))");
    check("let f[i](x) = x[i]", "let f[i](x) = x[i]");
    check("function U(r): energy", "function U(r): energy");
    check("function u[i](t)", "function u[i](t)");
    check("function V(x, y): N m", "function V(x, y): N m");
}

#[test]
fn assume() {
    check("assume m > 0, 0 < e < 1, r >= 0", "assume m Greater 0, 0 Less e Less 1, r GreaterEqual 0");
    check("assume a ≠ b, a <= 2 b, k₁ = k₂", "assume a NotEqual b, a LessEqual (2 b), k₁ Equal k₂");
}

#[test]
fn terms_with_and_without_a_name() {
    check("kinetic bob = 1/2 m x'^2", "Kinetic bob = (((1 / 2) m) (x' ^ 2))");
    check("kinetic 1/2 m x'^2", "Kinetic = (((1 / 2) m) (x' ^ 2))");
    check("kinetic x", "Kinetic = x");
    check("potential spin = m g z", "Potential spin = ((m g) z)");
    check("lagrangian -q x", "Lagrangian = ((-q) x)");
    check("dissipation losses = c", "dissipation losses = c");
    check("conserved turn = energy", "conserved turn = energy");
    check("conserved momentum(q) + energy", "conserved = (momentum(q) + energy)");
}

#[test]
fn force() {
    check("force brake on r = -F0 tanh(r'/v0)", "force brake on r = ((-F0) tanh((r' / v0)))");
    check("force on r = F", "force on r = F");
    check("force motor on θ₂ - θ₁ = u", "force motor on (θ₂ - θ₁) = u");
    check("force on on = F", "force on on = F");
    check("force on on x = F", "force on on x = F");
}

#[test]
fn constraint() {
    check("constraint rod: x^2 + y^2 = l^2", "constraint rod: ((x ^ 2) + (y ^ 2)) = (l ^ 2)");
    check("constraint x = l", "constraint x = l");
    check("constraint rod[i]: |X[i] - X[i+1]| = l", "constraint rod[i]: |(X[i] - X[(i + 1)])| = l");
    check("constraint roll: (x', y') = (a, b)", "constraint roll: <x', y'> = <a, b>");
}

#[test]
fn symmetry() {
    check("symmetry slide: x -> x + ε, t → t + eps", "symmetry slide x -> (x + ε), t -> (t + ε)");
    check("symmetry x -> x exp(ε)", "symmetry x -> (x exp(ε))");
    check("broken symmetry a: x[i] -> x[i] + ε", "symmetry broken a x[i] -> (x[i] + ε)");
    check(
        "symmetry turn:\n    (x, y) -> (x cos ε, y),\n    (u, v) -> (u, v)",
        "symmetry turn x; y -> (x cos(ε)); y, u; v -> u; v",
    );
}

#[test]
fn run() {
    check(
        "run sway: from r = 30 m, θ = 4°, φ' = 0.2 rad/s, over 60 s",
        "run sway from r = 30 {m}; from θ = 4 {°}; from φ' = 2e-1 {rad s^-1}; over 60 {s}",
    );
    check(
        "run a: from x[1] = 0, until r < 2 a, with u = 3 sin(t), v = 2",
        "run a from x[1] = 0; until r Less (2 a); with u = (3 sin(t)); with v = 2",
    );
    check("run over 3 s", "run over 3 {s}");
    check("run from: from from = 3 m, over 1 s", "run from from from = 3 {m}; over 1 {s}");
    check("run a:\n    from x = 1 m,\n    over 3 s # long", "run a from x = 1 {m}; over 3 {s}");
}

#[test]
fn the_sample_of_the_language_and_other_models_have_no_slips() {
    for model in MODELS {
        let items = read_all(model);
        assert!(items.len() > 5);
        for (text, parsed) in items {
            assert_eq!(parsed.slips, [], "{text}");
        }
    }
}

const MODELS: &[&str] = &[
    include_str!("models/shaft_winch.least"),
    include_str!("models/heavy_top.least"),
    include_str!("models/mass_chain.least"),
    include_str!("models/geophone.least"),
    include_str!("models/two_body_plane.least"),
    include_str!("models/mass_pair.least"),
];
