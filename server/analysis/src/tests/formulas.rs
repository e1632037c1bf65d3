//! Rules about formulas.

use crate::codes;
use crate::fixture::check;

/// The rest of a model around one formula.
fn formula(text: &str) {
    check(&format!(
        "coordinate x, y, θ: angle\nkinetic T = 1/2 m x'^2 + y'^2 + θ'^2\nparameter m, k\nassume k > 0\n{text}"
    ));
}

#[test]
fn names_are_not_called() {
    formula(
        "
potential A = m θ(t)
#               ^^^^ called-name: `θ` depends on time already: write θ
potential B = m(t) x
#             ^^^^ called-name: the parameter `m` is a constant, not a function of time
potential C = k x(0)
#               ^^^^ called-name: `x` at a point of time has no value in a formula
potential D = k (x - y) x (m + 1)
",
    );
}

#[test]
fn functions_need_their_arguments() {
    formula(
        "
function U(r)
let f(a, b) = a b
potential A = U x + U(x)
#             ^ function-without-arguments: the function `U` stands here without its arguments
potential B = f(x) + f(x, y)
#             ^^^^ argument-count: `f` has 2 arguments, and here stand 1
potential C = U(x, y)
#             ^^^^^^^ argument-count: `U` has one argument, and here stand 2
potential D = atan2(x) + sin(x, y)
#             ^^^^^^^^ argument-count: `atan2` has 2 arguments, and here stand 1
#                        ^^^^^^^^^ argument-count: `sin` has one argument, and here stand 2
",
    );
}

#[test]
fn derivatives_by_arguments() {
    formula(
        "
function W(r, s)
potential A = W'(x, y) + W'[1,2](x, y)
#             ^ function-derivative: `W` has 2 arguments: by which of them is it differentiated?
potential B = W'[3](x, y)
#             ^ function-derivative: `W` has no argument number 3
",
    );
}

#[test]
fn vectors_and_numbers() {
    formula(
        "
let P = (x, y)
let Q = (x, y, 1)
let bad = P + x
#             ^ shape-mismatch: a number cannot be added to a vector of 2 components
let worse = P - Q
#               ^ shape-mismatch: a vector of 3 components cannot be taken from a vector of 2 components
potential A = P
#             ^ not-a-number: a potential energy is a number, and this is a vector of 2 components
potential B = sin(P)
#                 ^ not-a-number: `sin` takes a number, and this is a vector
potential C = x/P
#               ^ shape-mismatch: a divisor is a number, and this is a vector
potential D = P·Q
#             ^^^ shape-mismatch: a vector of 2 components and a vector of 3 components have no product
potential E = |P| + |x| + P·P + norm(Q) + (Q×Q)[1] + bad + worse
potential F = x × y
#             ^^^^^ shape-mismatch: `×` is the product of two vectors in space
",
    );
}

#[test]
fn products_of_vectors_say_which() {
    let checked = check(
        "
coordinate x, y
kinetic T = 1/2 x'^2 + 1/2 y'^2
let P = (x, y)
let Q = (x, y, 1)
potential A = P P
#             ^^^ two-vectors: stand side by side: which product is meant?
potential B = P²
#             ^^ two-vectors: a power of a vector of 2 components is not defined
potential C = Q * Q
#             ^^^^^ two-vectors: which product is meant?
",
    );
    let fix = &checked.findings[0].fixes[0];
    assert_eq!(fix.edits[0].1, "·");
    assert_eq!(&checked.text[fix.edits[0].0.clone()], " ");
    let titles: Vec<_> = checked.findings[1].fixes.iter().map(|f| f.title.as_str()).collect();
    assert_eq!(titles, ["write |…|²", "write P·P"]);
    assert_eq!(checked.findings[2].fixes.len(), 2);
}

#[test]
fn indices_stay_in_range() {
    check(
        "
index i: 1..4
coordinate x[i]
let P = (x[1], x[2])
kinetic T = sum(i: x[i]'^2)
potential A = x[5]
#               ^ index-out-of-range: `x[5]` does not exist: the index of `x` runs from 1 to 4
potential B = sum(i: x[i+1])
#                      ^^^ index-out-of-range: `x[5]` does not exist: the index of `x` runs from 1 to 4 (i = 4)
potential C = P[3]
#               ^ index-out-of-range: there is no component 3: this has 2 components
potential D = sum(i in 1..3: x[i+1] - x[i])
potential E = x[1.5]
#               ^^^ index-form: an index is a whole number
potential F = x[x[1]]
#               ^^^^ index-form: an index is a whole number
",
    );
}

#[test]
fn large_families_are_checked_over_their_whole_range() {
    check(
        "
index i: 1..1000
coordinate x[i]
kinetic T = sum(i: x[i]'^2)
potential A = sum(i: x[i+1])
#                      ^^^ index-out-of-range: `x[…]` does not exist: the index of `x` runs from 1 to 1000; the index here runs from 2 to 1001
potential B = sum(i in 1..999: sum(j in i+1..1000: x[j-i]))
potential C = sum(i in 1..999: sum(j in i+1..1000: x[j-i-1]))
#                                                    ^^^^^ index-out-of-range: the index here runs from 0 to 998
",
    );
}

#[test]
fn families_need_an_index_and_sums() {
    check(
        "
index i: 1..4
coordinate x[i], y
kinetic T = sum(i: x[i]'^2) + y'^2
potential A = x
#             ^ family-without-index: `x` has members, and none is chosen
potential B = x[i]
#               ^ free-index: the index `i` is free here
potential C = y[2]
#               ^ no-family: a number has no components
potential D = sum(i: i x[i]) + sum(j in 1..4: x[j])
potential E = sum(j in 1..y: j)
#                         ^ sum-range: the range of a sum goes from a whole number to a whole number
",
    );
}

#[test]
fn primes() {
    formula(
        "
input u
potential A = (3)' x
#             ^^^^ prime-of-number: this differentiates a number
potential B = m' x + u' x
#             ^^ prime-of-constant: `m` does not depend on time: its derivative is zero
potential C = (m x)' + (r^2)'
#                       ^ undeclared-name: `r` is not declared
",
    );
}

#[test]
fn nothing_is_divided_by_zero() {
    formula(
        "
potential A = m + k x/0 + y
#                   ^^^ division-by-zero: this divides by zero
potential B = x/(y - y)
#             ^^^^^^^^^ division-by-zero: this divides by zero
potential C = 0^(-1) + log(0)
#             ^^^^^^ division-by-zero: this has no value
#                      ^^^^^^ division-by-zero: this has no value
let z = 1/0
#       ^^^ division-by-zero: this divides by zero
potential D = z x
",
    );
}

#[test]
fn how_functions_before_products_are_read() {
    let checked = check(
        "
coordinate x: length
parameter Ω: frequency, k: force, α: angle
kinetic T = 1/2 x'^2
potential A = k x cos Ω t
#                 ^^^^^^^ read-function-of-parameter: `cos Ω` is read first
potential B = k x cos α t + cos Ω sin α + cos(Ω t)
",
    );
    let reading = checked.findings.iter().find(|f| f.code == codes::READ_FUNCTION_OF_PARAMETER).expect("a reading");
    let fix = &reading.fixes[0];
    assert_eq!((fix.edits[0].1.as_str(), fix.edits[1].1.as_str()), ("(", ")"));
}

#[test]
fn momentum_and_energy_stand_in_claims() {
    formula(
        "
potential A = momentum(x)
#             ^^^^^^^^^^^ only-in-conserved: `momentum` stands in a `conserved` claim only
conserved a = momentum(x) + energy
conserved b = momentum(x + y)
#                      ^^^^^ not-a-coordinate: `momentum` takes a coordinate
",
    );
}

#[test]
fn turns_are_about_unit_vectors() {
    formula(
        "
let R = turn((1, 1, 0), θ)
#            ^^^^^^^^^ unit-vector: the axis of a turn has length one
let S = turn(x, θ)
#            ^ shape-mismatch: the axis of a turn is a unit vector in space, and this is a number
potential A = spin(turn(ez, θ))[3] + R[1, 1] + S[1, 1]
potential B = spin((x, y))[1]
#                  ^^^^^^ shape-mismatch: `spin` takes a rotation
",
    );
}

#[test]
fn what_is_wrong_in_a_definition_is_told_there() {
    formula(
        "
let f(P) = P[3]
let g(a) = q a
#          ^ undeclared-name: `q` is not declared
potential A = f((x, y, 1))
potential B = f((x, y))
#             ^^^^^^^^^ index-out-of-range: there is no component 3: this has 2 components, in `f`
potential C = g(x)
",
    );
}

#[test]
fn forces_act_on_what_moves() {
    formula(
        "
input F
force a on x = F
force b on (x, y) = (F, 0)
force c on (x, y) = F
#                   ^ shape-mismatch: the force is a number, what it acts on is a vector of 2 components
force d on m = F
#          ^ force-target: a force acts on a coordinate, and this does not move
force e on θ - x' = F
",
    );
}

#[test]
fn constraints_have_two_sides_alike() {
    formula(
        "
constraint a: (x, y) = (1, 2)
constraint b: (x, y) = 0
constraint c: (x, y) = 1
#                      ^ shape-mismatch: the left side is a vector of 2 components, the right side is a number
",
    );
}

#[test]
fn assumptions_compare() {
    formula(
        "
assume 0 < m < 1, x != 0
assume m = k
#      ^^^^^ assumed-equality: an assumption compares with <, ≤, >, ≥ or ≠
assume 2 < 1
#      ^^^^^ contradiction: this assumption cannot hold
",
    );
}

#[test]
fn transformations_change_coordinates_once() {
    formula(
        "
symmetry a: x -> x + ε, x -> x - ε
#                       ^ transformed-twice: this is transformed twice
symmetry b: m -> m + ε
#           ^ not-a-coordinate: `m` is a parameter: a transformation changes coordinates and the time
symmetry c: (x, y) -> (x + ε, y), t -> t (1 + ε)
let P = (x, y)
symmetry d: x -> P
#                ^ not-a-number: the image of a coordinate is a number
",
    );
}

#[test]
fn runs_begin_from_coordinates() {
    formula(
        "
input u
function U(s)
potential A = u x + U(y)
run a: from x = 1, x' = 0, over 3, with u = k sin(t), U(s) = k s^2
run b: from m = 1, over 3
#           ^ not-a-coordinate: a run begins from coordinates and velocities
run c: from x = 1, x = 2, over 3
#                  ^ run-value: this initial value is given twice
run d: from x = 1, over 3, with y = 2
#                               ^ run-value: behind `with` stand formulas of inputs and functions
run e: from x = 1, over 0
#                       ^ run-value: a run goes over a time longer than zero
",
    );
}

#[test]
fn too_large_is_a_finding_and_the_rest_is_derived() {
    let checked = check(
        "
coordinate x
kinetic T = 1/2 x'^2
potential A = sum(i in 1..60: sum(j in 1..60: sum(k in 1..60: sum(l in 1..60: sin(i x + j x + k x + l x)))))
#             ^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^ too-large: this is too large
",
    );
    assert_eq!(checked.model().terms.len(), 1);
}

#[test]
fn accelerations_follow_from_the_equations() {
    formula(
        "
input u
potential A = m x + k x x''
#                   ^^^^^^^ acceleration: a potential energy does not contain accelerations
force b on x = m y''
#              ^^^^^ acceleration: a force does not contain accelerations
conserved c = x''
#             ^^^ acceleration: a claimed constant does not contain accelerations
force d on x = u''
",
    );
}

#[test]
fn constraints_and_targets_are_linear_in_the_velocities() {
    formula(
        "
constraint a: x'^2 = y'
#             ^^^^^^^^^ not-linear: a constraint is linear in the velocities
constraint b: x' cos θ + y' sin θ = 0
constraint c: (x' + y')^2 - (x' - y')^2 - 4 x' y' = x'
force d on x' y' = m
#          ^^^^^ not-linear: what a force acts on is linear in the velocities
",
    );
}

#[test]
fn ranges_do_not_run_backwards() {
    check(
        "
index i: 1..100
coordinate x[i]
kinetic T = sum(i: x[i]'^2)
potential A = sum(i: sum(j in i+1..100: x[i] x[j]))
potential B = sum(i: sum(j in i+2..100: x[i] x[j]))
#                             ^^^^^^^^ empty-sum: this range runs backwards
",
    );
}

#[test]
fn numbers_with_units_in_definitions() {
    check(
        "
coordinate s
parameter m
let g = 9.81 m/s^2
#       ^^^^^^^^^^ unit-in-formula: units do not stand in formulas
kinetic T = 1/2 m s'^2 + g
",
    );
}
