//! Hovers of names, and of the language's own words.

use super::kinds::ROW;
use super::{check, within};

#[test]
fn definitions() {
    insta::assert_snapshot!(within(ROW, "let $0D[i]"), @r#"
    `D`
        D[i] = x[i]^2
    Definition, as it is written
    Family of 10000 members, i = 1 … 10000.
    It enters nowhere.
    "#);
    insta::assert_snapshot!(within(ROW, "let $0f(u)"), @r#"
    `f`
        f(u) = 1/2 k u^2
    Function of `u`, as it is written
    Enters potential `pin`.
    "#);
    insta::assert_snapshot!(check("parameter a\ncoordinate x\nlet $0b = 2 a\nlet c = b x\nkinetic T = c'^2"), @r#"
    `b`
        b = 2 a
    Definition
    It does not depend on time.
    Enters let `c`.
    And through `c` kinetic `T`.
    "#);
}

#[test]
fn bound_names() {
    insta::assert_snapshot!(within(ROW, "let f($0u)"), @r#"
    `u`
    `u` is an argument of `let f`
    It stands for whatever is put in, and inherits nothing from a name declared elsewhere.
    "#);
    insta::assert_snapshot!(within(ROW, "sum($0j in"), @r#"
    `j`
    `j` is the index of this sum, from `1` to `9999`
    "#);
    insta::assert_snapshot!(within(ROW, "sum($0i: 1/2 m"), @r#"
    `i`
    `i` is the index of this sum, 1..10000
    "#);
    insta::assert_snapshot!(within(ROW, "D[$0i]"), @r#"
    `i`
    `i` is the index of the family `let D`, 1..10000
    "#);
    insta::assert_snapshot!(within(ROW, "+ $0ε"), @r#"
    `ε`
    `ε` is the parameter of the transformations `symmetry shift`
    At ε = 0 they are the identity; their derivative by ε there is the generator.
    "#);
}

#[test]
fn parameters_and_names_nobody_declares() {
    insta::assert_snapshot!(check("coordinate x\nparameter m₁, $0m₂: mass = 3/2 kg\nkinetic T = 1/2 (m₁ + m₂) x'^2"), @r#"
    `m₂`
    parameter `m₂: mass = 3/2 kg`
    Enters kinetic `T`.
    "#);
    insta::assert_snapshot!(check("coordinate x\nkinetic T = 1/2 $0m x'^2"), @r#"
    `m`
    `m` is not declared: it is taken for a parameter
    Enters kinetic `T`.
    "#);
}

#[test]
fn words_explain_themselves() {
    insta::assert_snapshot!(check("coordinate x\nkinetic T = $0atan2(x, 1) x'^2"), @r#"
    `atan2`
    `atan2`: angle of the point (x, y)
        atan2(y, x)
    Between −π and π; its derivative is (x dy − y dx)/(x² + y²).
    "#);
    insta::assert_snapshot!(check("$0cyclic coordinate x\nkinetic T = x'^2"), @r#"
    `cyclic`
    `cyclic`: claims that no term depends on the coordinate
        cyclic coordinate …
    ∂L/∂q = 0: without forces along it the momentum ∂L/∂q̇ is conserved.
    "#);
    insta::assert_snapshot!(check("$0function U(s)\ncoordinate x\npotential P = U(x)"), @r#"
    `function`
    `function`: an unspecified smooth function
        function NAME(x, …): QUANTITY
    "#);
    insta::assert_snapshot!(check("coordinate x\nkinetic T = x'^2\nconserved h = $0energy"), @r#"
    `energy`
        h = ẋ²
    The energy function h = Σ p q̇ − L; here it is kinetic + potential energy
    "#);
    insta::assert_snapshot!(check("parameter a: torque = 1 $0mN m"), @r#"
    `mN`
    Unit `mN`, millinewton: kg m s⁻²
    Quantities of the same dimension: force.
    "#);
    insta::assert_snapshot!(check("parameter a: $0torque = 1 mN m"), @r#"
    `torque`
    Quantity `torque`: kg m² s⁻², usually given in N m
    Quantities of the same dimension: energy, rotational stiffness, torsional stiffness, work.
    "#);
    insta::assert_snapshot!(check("parameter a: charge = 1 $0C"), @r#"
    `C`
    Unit `C`, coulomb: A s
    Quantities of the same dimension: charge.
    "#);
    insta::assert_snapshot!(check("parameter a: time = 1 $0min"), @r#"
    `min`
    Unit `min`, minute, 60 s: s
    Quantities of the same dimension: time.
    "#);
    insta::assert_snapshot!(check("include \"$0none.least\""), @r#"
    `"none.least"`
    The file is not taken in: see the error at its name
    "#);
}
