//! Rules about quantities, units and values.

use crate::fixture::check;

#[test]
fn quantities_and_units_are_known_ones() {
    let checked = check(
        "
coordinate x: lenght
#             ^^^^^^ unknown-quantity: `lenght` is no known quantity or unit; did you mean `length`?
parameter m: mass = 3 Kg, J: inertia = 2 kg m^2
#                     ^^ unknown-unit: `Kg` is no known unit; did you mean `kg`?
#                            ^^^^^^^ unknown-quantity: did you mean `moment_of_inertia`?
parameter k: N/m = 3 N/foo
#                      ^^^ unknown-unit: `foo` is no known unit
kinetic T = 1/2 m x'^2 + J k
run a: from x = 3 meters, over 2 s
#                 ^^^^^^ unknown-unit: did you mean `m`?
",
    );
    assert_eq!(checked.findings[0].fixes[0].edits[0].1, "length");
}

#[test]
fn a_dimensioned_quantity_has_a_unit() {
    check(
        "
coordinate x: length
parameter m: mass = 3, α: angle = 3, n = 4, z: mass = 0
#                   ^ missing-unit: `m` is a mass: its value needs a unit
kinetic T = 1/2 m x'^2 + α n z
",
    );
    check("system a, dimensionless\ncoordinate x\nparameter m: mass = 3\nkinetic T = 1/2 m x'^2\n");
}

#[test]
fn values_of_families() {
    let checked = check(
        "
index i: 1..3
coordinate x[i]: length
parameter m[i] = (1, 2, 3) kg, k[i] = (1, 2) N/m, c = (1, 2) kg
#                                     ^^^^^^ family-values: `k` has 3 members, and here stand 2 values
#                                                     ^^^^^^ family-values: `c` is one parameter and has one value
kinetic T = sum(i: 1/2 m[i] x[i]'^2 + k[i] c)
",
    );
    assert_eq!(checked.symbol("m").unwrap().value.as_ref().unwrap().numbers.len(), 3);
}

#[test]
fn values_exist() {
    check(
        "
coordinate x: length
parameter m: mass = 3/0 kg
#                   ^^^ division-by-zero: this divides by zero
kinetic T = 1/2 m x'^2
",
    );
}

#[test]
fn an_index_runs_upwards() {
    check(
        "
index i: 4..1
#        ^^^^ sum-range: no index runs from 4 to 1
index j: 1..10^18
#        ^^^^^^^^ too-large: this range has too many values
index k: 1..1/2
#           ^^^ sum-range: the range of an index goes from a whole number to a whole number
coordinate x[i], y[j], z[k]
kinetic T = 3
",
    );
}

#[test]
fn units_fit_their_quantities() {
    check(
        "
coordinate x: length
coordinate θ: angle
parameter m: mass = 3 g m
#                     ^^^ unit-mismatch: `m` is a mass, and this is no unit of it
parameter k: N/m = 3 kg/s^2, α: angle = 3°, ω: angular_velocity = 20 r/min
parameter f: angular_velocity = 3 kHz
#                                 ^^^ hertz: Hz counts turns
kinetic T = 1/2 m x'^2 + k α ω f θ'^2
run a: from x = 1 mm, x' = 3, θ = 2, θ' = 1 m, over 3 kg
#                          ^ missing-unit: `x'` is a quantity with a unit: its value needs a unit
#                                           ^ unit-mismatch: `θ'`
#                                                     ^^ unit-mismatch: a run goes over a time
",
    );
    check("system a, with c = 1\ncoordinate x: length\nparameter v: velocity = 0.5\nkinetic T = v x'^2\n");
}
