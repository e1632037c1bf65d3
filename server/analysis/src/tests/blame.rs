//! Which part of which term breaks a claim, and what that is in the words of the trade.

use crate::fixture::judge;

#[test]
fn a_force_along_a_length() {
    judge(
        "
coordinate x, z: length
parameter m: mass, k: stiffness, g: acceleration
kinetic motion = 1/2 m (x'^2 + z'^2)
potential spring = 1/2 k z^2 + m g z
#                  ^^^^^^^^^ symmetry-broken: potential `spring` breaks the symmetry `lift`: force -k z along z
symmetry lift: z -> z + ε
symmetry along: x -> x + ε
",
    );
}

#[test]
fn a_torque_about_the_axis_of_an_angle() {
    judge(
        "
coordinate r: length
coordinate φ: angle
parameter m: mass, k: force, a: length, l: length, c: stiffness
kinetic motion = 1/2 m (r'^2 + r^2 φ'^2)
potential spring = 1/2 c (r - l)^2
potential stop = k a cos φ + 1/2 c r^2
#                ^^^^^^^^^ symmetry-broken: potential `stop` breaks the symmetry `azimuth`: torque k a sin φ about the axis of φ
symmetry azimuth: φ -> φ + ε
",
    );
}

#[test]
fn a_torque_about_an_axis_of_space() {
    judge(
        "
coordinate x, y, z: length
parameter m: mass, k: stiffness, g: acceleration
kinetic motion = 1/2 m (x'^2 + y'^2 + z'^2)
potential bowl = 1/2 k (x^2 + y^2) + m g z
#                       ^^^ symmetry-broken: potential `bowl` breaks the symmetry `tilt`: torque m g x - k x z about the y axis
#                             ^^^ symmetry-broken: potential `bowl` breaks the symmetry `roll`: torque k y z - m g y about the x axis
symmetry about_z: (x, y) -> (x cos ε - y sin ε, x sin ε + y cos ε)
symmetry tilt: z -> z + ε x, x -> x - ε z
symmetry roll: y -> y - ε z, z -> z + ε y
",
    );
}

#[test]
fn power_of_what_depends_on_the_time() {
    judge(
        "
coordinate x: length
parameter m: mass, F: force, Ω: angular_velocity
kinetic motion = 1/2 m x'^2
potential drive = F x cos(Ω t)
#                 ^^^^^^^^^^^^ symmetry-broken: potential `drive` breaks the symmetry `delay`: power -F Ω x sin(Ω t)
symmetry delay: t -> t + ε
",
    );
}

#[test]
fn the_summand_in_a_product_is_told() {
    judge(
        "
coordinate x, y: length
parameter m: mass, k: stiffness, l: length
kinetic motion = 1/2 m (x'^2 + y'^2)
potential spring = 1/2 k (x^2 + y^2 + l x)
#                                     ^^^ symmetry-broken: about the z axis
symmetry turn: (x, y) -> (x cos ε - y sin ε, x sin ε + y cos ε)
",
    );
}

#[test]
fn terms_that_cancel_each_other_are_not_blamed() {
    judge(
        "
coordinate x, y: length
parameter m: mass, k: stiffness, c: stiffness, l: length
kinetic motion = 1/2 m (x'^2 + y'^2)
potential first = 1/2 k x^2
potential second = -1/2 k x^2 + c x^3/l
#                               ^^^^^^^ symmetry-broken: potential `second` breaks the symmetry `along`: force -3 c x²/l along x
symmetry along: x -> x + ε
",
    );
}

#[test]
fn of_two_masses_together() {
    judge(
        "
coordinate x₁, x₂: length
parameter m: mass, k: stiffness
kinetic motion = 1/2 m (x₁'^2 + x₂'^2)
potential line = 1/2 k (x₁ - x₂)^2
potential anchor = 1/2 k x₂^2
#                  ^^^^^^^^^^ symmetry-broken: potential `anchor` breaks the symmetry `together`: force -k x₂ along x₁ + x₂
symmetry together: x₁ -> x₁ + ε, x₂ -> x₂ + ε
",
    );
}

#[test]
fn without_quantities_no_word_is_chosen() {
    judge(
        "
coordinate x
parameter k
kinetic motion = x'^2
potential spring = k x^2
#                  ^^^^^ symmetry-broken: potential `spring` breaks the symmetry `shift`: generalised force -2 k x along x
symmetry shift: x -> x + ε
",
    );
}

#[test]
fn a_claimed_cyclic_coordinate_feels_a_torque() {
    judge(
        "
coordinate r: length
cyclic coordinate φ: angle
parameter m: mass, k: energy
kinetic motion = 1/2 m (r'^2 + r^2 φ'^2)
potential stop = k cos φ
#                ^^^^^^^ not-cyclic: `stop` depends on φ, which is claimed cyclic: torque k sin φ about the axis of φ
",
    );
}

#[test]
fn claims_that_nothing_depends_on_are_fine() {
    judge(
        "
coordinate x, y: length
parameter m: mass
kinetic motion = 1/2 m (x'^2 + y'^2)
symmetry along: x -> x + ε
broken symmetry across: y -> y + ε
^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^ broken-symmetry-holds: is declared broken, but its charge m ẏ is conserved
",
    );
}

#[test]
fn members_of_a_family_at_their_ends() {
    judge(
        "
index i: 1..3
coordinate x[i]: length
parameter m: mass, k: stiffness
kinetic motion = sum(i: 1/2 m x[i]'^2)
potential chain = sum(i in 1..2: 1/2 k (x[i+1] - x[i])^2)
potential wall = 1/2 k x[1]^2
#                ^^^^^^^^^^^^ symmetry-broken: potential `wall` breaks the symmetry `all`: force -k x[1] along x[1] + x[2] + x[3]
symmetry all: x[i] -> x[i] + ε
",
    );
}

#[test]
fn a_gauge_term_breaks_nothing_though_declared_broken() {
    judge(
        "
coordinate z: length
parameter m: mass, g: acceleration
kinetic motion = 1/2 m z'^2
potential weight = m g z
broken symmetry drop: z -> z + ε
^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^ broken-symmetry-holds: `drop` is declared broken
",
    );
}

#[test]
fn turns_of_two_bodies_are_not_about_one_axis() {
    judge(
        "
coordinate x₁, y₂: length
parameter m: mass, k: stiffness
kinetic motion = 1/2 m (x₁'^2 + y₂'^2)
potential spring = 1/2 k x₁^2
#                  ^^^^^^^^^^ symmetry-broken: torque k x₁ y₂ about the origin
symmetry turn: (x₁, y₂) -> (x₁ cos ε - y₂ sin ε, x₁ sin ε + y₂ cos ε)
",
    );
}
