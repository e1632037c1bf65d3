//! The sheets of known systems, each to be read as a physicist reads.

use super::system::System;

fn check(name: &str, coordinates: &str, functions: &str, terms: &[&str]) {
    let sheet = System::new(coordinates, functions, terms).sheet();
    insta::assert_snapshot!(name, sheet);
}

#[test]
fn pendulum() {
    check("pendulum", "θ", "", &["kinetic 1/2 m ((l sin θ)'^2 + (-l cos θ)'^2)", "potential -m g l cos θ"]);
}

#[test]
fn atwood() {
    check("atwood", "x", "", &["kinetic 1/2 (m₁ + m₂) x'^2", "kinetic 1/2 J (x'/R)^2", "potential -m₁ g x + m₂ g x"]);
}

#[test]
fn central_force() {
    check("central_force", "r φ", "U", &["kinetic 1/2 m (r'^2 + r^2 φ'^2)", "potential U(r)"]);
}

#[test]
fn double_pendulum() {
    check(
        "double_pendulum",
        "θ₁ θ₂",
        "",
        &[
            "kinetic 1/2 m₁ ((l₁ sin θ₁)'^2 + (-l₁ cos θ₁)'^2)",
            "kinetic 1/2 m₂ ((l₁ sin θ₁ + l₂ sin θ₂)'^2 + (-l₁ cos θ₁ - l₂ cos θ₂)'^2)",
            "potential m₁ g (-l₁ cos θ₁) + m₂ g (-l₁ cos θ₁ - l₂ cos θ₂)",
        ],
    );
}

#[test]
fn elastic_pendulum() {
    check(
        "elastic_pendulum",
        "r θ",
        "",
        &["kinetic 1/2 m ((r sin θ)'^2 + (-r cos θ)'^2)", "potential 1/2 k (r - l₀)^2", "potential -m g r cos θ"],
    );
}

#[test]
fn fields() {
    check("field_landau", "x y", "", &["kinetic 1/2 m (x'^2 + y'^2)", "lagrangian q B x y'"]);
    check("field_symmetric", "x y", "", &["kinetic 1/2 m (x'^2 + y'^2)", "lagrangian q 1/2 B (-y x' + x y')"]);
}

#[test]
fn geophone() {
    check(
        "geophone",
        "z q",
        "a",
        &["kinetic 1/2 m z'^2", "kinetic 1/2 L_c q'^2", "potential 1/2 k z^2", "lagrangian K z q'"],
    );
}

#[test]
fn gusty_swing() {
    check(
        "gusty_swing",
        "θ φ",
        "",
        &["kinetic 1/2 m l^2 (θ'^2 + sin² θ φ'^2)", "potential m l (g (1 - cos θ) - b sin θ cos φ)"],
    );
}

#[test]
fn half_plane() {
    check("half_plane", "x y", "", &["kinetic 1/2 (x'^2 + y'^2)/y^2"]);
}

#[test]
fn heavy_top() {
    check(
        "heavy_top",
        "φ θ ψ",
        "",
        &["kinetic 1/2 I₁ (θ'^2 + φ'^2 sin² θ)", "kinetic 1/2 I₃ (ψ' + φ' cos θ)^2", "potential m g l cos θ"],
    );
}

#[test]
fn henon_heiles() {
    check(
        "henon_heiles",
        "x y",
        "",
        &["kinetic 1/2 (x'^2 + y'^2)", "potential 1/2 (x^2 + y^2)", "potential x^2 y - y^3/3"],
    );
}

#[test]
fn hoop_bead() {
    check(
        "hoop_bead",
        "θ",
        "",
        &["kinetic 1/2 m ((R sin θ cos(ω t))'^2 + (R sin θ sin(ω t))'^2 + (R cos θ)'^2)", "potential -m g R cos θ"],
    );
}

#[test]
fn idle_term() {
    check(
        "idle_term",
        "x",
        "",
        &["kinetic 1/2 m x'^2", "potential 1/2 k x^2", "lagrangian b x x' cos(Ω t) - 1/2 b Ω x^2 sin(Ω t)"],
    );
}

#[test]
fn kepler_plane() {
    check("kepler_plane", "x y", "", &["kinetic 1/2 m (x'^2 + y'^2)", "potential -k/sqrt(x^2 + y^2)"]);
}

#[test]
fn lc_pair() {
    check(
        "lc_pair",
        "q₁ q₂",
        "",
        &[
            "kinetic 1/2 L₁ q₁'^2",
            "kinetic 1/2 L₂ q₂'^2",
            "kinetic M q₁' q₂'",
            "potential q₁^2/(2 C₁)",
            "potential q₂^2/(2 C₂)",
        ],
    );
}

#[test]
fn mass_chain() {
    let mut kinetic = Vec::new();
    let mut springs = Vec::new();
    for i in 1..=6 {
        kinetic.push(format!("1/2 m x[{i}]'^2"));
        if i < 6 {
            springs.push(format!("1/2 k (x[{}] - x[{i}])^2", i + 1));
        }
    }
    check(
        "mass_chain",
        "x",
        "",
        &[
            &format!("kinetic {}", kinetic.join(" + ")),
            &format!("potential {}", springs.join(" + ")),
            "potential 1/2 k (x[1]^2 + x[6]^2)",
        ],
    );
}

#[test]
fn mass_pair() {
    check(
        "mass_pair",
        "x₁ x₂",
        "",
        &["kinetic 1/2 m₁ ẋ₁² + 1/2 m₂ ẋ₂²", "potential 1/2 k (x₂ - x₁ - l)^2", "potential 1/2 κ x₁²"],
    );
}

#[test]
fn shaft_winch() {
    check(
        "shaft_winch",
        "r θ φ",
        "",
        &[
            "kinetic 1/2 m ((r sin θ cos φ)'^2 + (r sin θ sin φ)'^2 + (-r cos θ)'^2)",
            "kinetic 1/2 J (r'/a)^2",
            "potential -m g r cos θ",
        ],
    );
}

#[test]
fn shaken_pendulum() {
    check(
        "shaken_pendulum",
        "θ",
        "",
        &["kinetic 1/2 m ((l sin θ)'^2 + (A cos(Ω t) - l cos θ)'^2)", "potential m g (A cos(Ω t) - l cos θ)"],
    );
}

#[test]
fn spherical_pendulum() {
    check(
        "spherical_pendulum",
        "θ φ",
        "",
        &["kinetic 1/2 m ((l sin θ cos φ)'^2 + (l sin θ sin φ)'^2 + (-l cos θ)'^2)", "potential -m g l cos θ"],
    );
}

#[test]
fn table_oscillator() {
    check(
        "table_oscillator",
        "x y",
        "",
        &["kinetic 1/2 m (x'^2 + y'^2)", "potential 1/2 k₁ x^2", "potential 1/2 k₂ y^2"],
    );
}

#[test]
fn thrown_stone() {
    check("thrown_stone", "x y z", "", &["kinetic 1/2 m (x'^2 + y'^2 + z'^2)", "potential m g z"]);
}

#[test]
fn turntable_puck() {
    check("turntable_puck", "x y", "", &["kinetic 1/2 m ((x' - Ω y)^2 + (y' + Ω x)^2)", "potential 1/2 k (x^2 + y^2)"]);
}

#[test]
fn two_body_plane() {
    check(
        "two_body_plane",
        "x₁ x₂ y₁ y₂",
        "",
        &[
            "kinetic 1/2 m₁ (x₁'^2 + y₁'^2)",
            "kinetic 1/2 m₂ (x₂'^2 + y₂'^2)",
            "potential -G m₁ m₂/sqrt((x₁ - x₂)^2 + (y₁ - y₂)^2)",
        ],
    );
}

#[test]
fn wedge_block() {
    check(
        "wedge_block",
        "X s",
        "",
        &["kinetic 1/2 M X'^2", "kinetic 1/2 m ((X + s cos α)'^2 + (-s sin α)'^2)", "potential -m g s sin α"],
    );
}

#[test]
fn pendulum_on_a_cart() {
    check(
        "pendulum_on_a_cart",
        "x θ",
        "",
        &["kinetic 1/2 M x'^2 + 1/2 m ((x + l sin θ)'^2 + (l cos θ)'^2)", "potential 1/2 k x^2 - m g l cos θ"],
    );
}

#[test]
fn two_spherical_pendulums() {
    check(
        "two_spherical_pendulums",
        "θ₁ φ₁ θ₂ φ₂",
        "",
        &[
            "kinetic 1/2 m₁ ((l₁ sin θ₁ cos φ₁)'^2 + (l₁ sin θ₁ sin φ₁)'^2 + (l₁ cos θ₁)'^2)",
            "kinetic 1/2 m₂ ((l₁ sin θ₁ cos φ₁ + l₂ sin θ₂ cos φ₂)'^2 + (l₁ sin θ₁ sin φ₁ + l₂ sin θ₂ sin φ₂)'^2 + (l₁ cos θ₁ + l₂ cos θ₂)'^2)",
            "potential -m₁ g l₁ cos θ₁ - m₂ g (l₁ cos θ₁ + l₂ cos θ₂)",
        ],
    );
}

#[test]
fn asymmetric_top() {
    check(
        "asymmetric_top",
        "φ θ ψ",
        "",
        &[
            "kinetic 1/2 A (φ' sin θ sin ψ + θ' cos ψ)^2 + 1/2 B (φ' sin θ cos ψ - θ' sin ψ)^2",
            "kinetic 1/2 C (φ' cos θ + ψ')^2",
            "potential m g l cos θ",
        ],
    );
}

#[test]
fn fast_charge() {
    check("fast_charge", "x y", "", &["lagrangian -m c^2 sqrt(1 - (x'^2 + y'^2)/c^2)", "lagrangian q A y x' - q V"]);
}

/// The equations in LaTeX.
#[test]
fn typeset() {
    let mut s = System::new(
        "θ₁ θ₂",
        "",
        &[
            "kinetic 1/2 m₁ ((l₁ sin θ₁)'^2 + (-l₁ cos θ₁)'^2)",
            "kinetic 1/2 m₂ ((l₁ sin θ₁ + l₂ sin θ₂)'^2 + (-l₁ cos θ₁ - l₂ cos θ₂)'^2)",
            "potential -m₁ g l₁ cos θ₁ - m₂ g (l₁ cos θ₁ + l₂ cos θ₂)",
        ],
    );
    let equations = s.equations();
    let lines: Vec<String> = equations.into_iter().map(|e| s.print(e).latex()).collect();
    insta::assert_snapshot!("typeset", lines.join("\n"));
}
