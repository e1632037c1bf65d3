//! Findings of the mechanics, each at its place.

use crate::fixture::judge;

#[test]
fn a_part_of_a_term_breaks_a_cyclic_claim() {
    judge(
        "
coordinate θ
cyclic coordinate φ
parameter m, l, g, b
kinetic   bob   = 1/2 m l^2 (θ'^2 + sin² θ φ'^2)
potential pulls = m l (g (1 - cos θ) - b sin θ cos φ)
#                                      ^^^^^^^^^^^^^ not-cyclic: `pulls` depends on φ, which is claimed cyclic
",
    );
}

#[test]
fn a_broken_symmetry_is_laid_on_the_part_that_breaks_it() {
    judge(
        "
coordinate x, y
parameter m, k, a
kinetic   bob  = 1/2 m (x'^2 + y'^2)
potential both = 1/2 k (x^2 + y^2) + a x
#                                    ^^^ symmetry-broken: `both` breaks the symmetry `turn`: L changes at the rate a y
symmetry turn: (x, y) -> (x cos ε - y sin ε, x sin ε + y cos ε)
symmetry delay: t -> t + ε
",
    );
}

#[test]
fn the_generalised_force_is_said_where_one_coordinate_moves() {
    judge(
        "
coordinate x
parameter m, k
kinetic   bob    = 1/2 m x'^2
potential spring = 1/2 k x^2
#                  ^^^^^^^^^ symmetry-broken: `spring` breaks the symmetry `shift`: generalised force -k x along x
symmetry shift: x -> x + ε
",
    );
}

#[test]
fn terms_that_cancel_are_not_blamed() {
    judge(
        "
coordinate x, y
parameter m, k
kinetic   bob = 1/2 m (x'^2 + y'^2)
potential a   = 1/2 k x^2
potential b   = 1/2 k y^2
symmetry turn: (x, y) -> (x cos ε - y sin ε, x sin ε + y cos ε)
",
    );
}

#[test]
fn a_wrong_constant_comes_with_its_rate() {
    judge(
        "
coordinate z
parameter m, g
kinetic   stone  = 1/2 m z'^2
potential weight = m g z
conserved rise = z' + g t
conserved fall = z' - g t
^^^^^^^^^^^^^^^^^^^^^^^^^ not-conserved: `fall` is not conserved: its rate z̈ - g does not vanish on motions
",
    );
}

#[test]
fn a_broken_symmetry_that_holds() {
    judge(
        "
coordinate x
parameter m
kinetic bob = 1/2 m x'^2
broken symmetry shift: x -> x + ε
^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^^ broken-symmetry-holds: `shift` is declared broken, but its charge m ẋ is conserved
",
    );
}

#[test]
fn a_force_takes_the_charge_of_an_exact_symmetry() {
    judge(
        "
coordinate x
parameter m, c
kinetic     bob  = 1/2 m x'^2
dissipation drag = 1/2 c x'^2
symmetry shift: x -> x + ε
^^^^^^^^^^^^^^^^^^^^^^^^^^ charge-taken: L is invariant under `shift`, but `drag` changes the charge at the rate -c ẋ
",
    );
}

#[test]
fn a_coordinate_without_inertia_is_named() {
    judge(
        "
coordinate x, y
#             ^ singular-mass-matrix: no term is quadratic in y', so that y has no inertia
parameter m
kinetic   bob = 1/2 m x'^2
potential u   = x y
",
    );
}

#[test]
fn a_mass_matrix_singular_without_a_zero_in_it() {
    judge(
        "
coordinate x, y
^^^^^^^^^^ singular-mass-matrix: the mass matrix is singular everywhere
kinetic bob = 1/2 (x' + y')^2
",
    );
}

#[test]
fn a_mass_that_is_negative() {
    judge(
        "
coordinate x
#          ^ mass-matrix-not-positive: the mass matrix is not positive definite under the assumptions
parameter m
assume m > 0
kinetic bob = -1/2 m x'^2
",
    );
}

#[test]
fn explicit_time_without_a_claim_about_it() {
    judge(
        "
coordinate x
parameter m, F, Ω
kinetic   bob  = 1/2 m x'^2
potential push = -F x cos(Ω t)
#                ^^^^^^^^^^^^^ explicit-time: `push` depends on the time explicitly
",
    );
}

#[test]
fn a_torsion_spring_on_an_angle() {
    judge(
        "
coordinate θ: angle
coordinate ψ: twist
parameter J: moment_of_inertia, κ: torque
kinetic   disc   = 1/2 J (θ'^2 + ψ'^2)
potential spring = 1/2 κ θ^2 + 1/2 κ ψ^2 - κ cos θ
#                  ^^^^^^^^^ not-periodic: `spring` changes when θ turns by 2π
",
    );
}

#[test]
fn a_family_that_does_not_begin_at_the_identity() {
    judge(
        "
coordinate x
kinetic bob = 1/2 x'^2
symmetry scale: x -> x ε
#               ^ not-the-identity: at ε = 0 the image of x is not x
",
    );
}

#[test]
fn what_a_broken_item_might_change_is_not_told() {
    judge(
        "
coordinate x, y
kinetic bob = 1/2 x'^2
kinetic rest = 1/2 y'^2 + (
#                         ^ unbalanced-bracket
broken symmetry shift: y -> y + ε
conserved p = y'
",
    );
}

#[test]
fn a_gauge_term_that_grows_with_an_angle() {
    judge(
        "
coordinate x: length
coordinate φ: angle
parameter a: N s, m: mass, J: moment_of_inertia
kinetic    body  = 1/2 m x'^2 + 1/2 J φ'^2
lagrangian twine = a x φ'
symmetry shift: x -> x + ε
^^^^^^^^^^^^^^^^^^^^^^^^^^ gauge-multivalued: `shift` holds up to d/dt of a φ, which changes when φ turns by 2π
",
    );
}

#[test]
fn a_gauge_term_that_winds_around_an_axis() {
    // The flux line of strength b z along the third axis: F is the polar angle, in Cartesian coordinates.
    judge(
        "
coordinate x, y, z
parameter m, b
kinetic    body = 1/2 m (x'^2 + y'^2 + z'^2)
lagrangian flux = b z (x y' - y x')/(x^2 + y^2)
symmetry lift: z -> z + ε
^^^^^^^^^^^^^^^^^^^^^^^^^ gauge-multivalued: `lift` holds up to d/dt of b atan2(y, x), which changes on a way around the axis x = 0, y = 0
",
    );
}

#[test]
fn a_disc_that_rolls_upright_keeps_its_two_rates() {
    // [GPS §1.3 for the constraints]: spin and steering rates are constant, though steering leaves the constraints.
    judge(
        "
coordinate x, y
coordinate φ, ψ: angle
parameter m, J, I, R
kinetic disc = 1/2 m (x'^2 + y'^2) + 1/2 J ψ'^2 + 1/2 I φ'^2
constraint a: x' = R ψ' cos φ
constraint b: y' = R ψ' sin φ
symmetry steer: φ -> φ + ε
conserved turning = φ'
conserved rolling = ψ'
conserved total = energy
conserved drift = x'
^^^^^^^^^^^^^^^^^^^^ not-conserved: `drift` is not conserved
",
    );
}

#[test]
fn a_rod_that_is_drawn_in_does_work() {
    judge(
        "
coordinate x, y
parameter m, l, v
kinetic bob = 1/2 m (x'^2 + y'^2)
constraint rod: x^2 + y^2 = (l - v t)^2
conserved spin = m (x y' - y x')
conserved total = energy
^^^^^^^^^^^^^^^^^^^^^^^^ not-conserved: `total` is not conserved
",
    );
}

#[test]
fn a_constraint_that_cannot_be_solved_leaves_claims_open() {
    judge(
        "
coordinate x, y
kinetic bob = 1/2 (x'^2 + y'^2)
constraint track: sin x + exp(y) x^3 + sin(y) + y^5 = 1
conserved drift = x'
^^^^^^^^^^^^^^^^^^^^ undecided: whether `drift` is conserved is undecided: the constraints are not solved
conserved total = energy
",
    );
}
