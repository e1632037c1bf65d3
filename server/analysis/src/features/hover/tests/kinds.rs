//! One hover of each kind.

use super::{check, within};

/// A bob on a stiff rod in the plane, which may slide along the axis.
pub(super) const ROD: &str = "\
system rod_pendulum      # a bob on a stiff rod
coordinate x, y: length
coordinate z: length     # along the axis
parameter m: mass = 1 kg, l: length = 1 m, g = 9.81 m/s^2
assume m > 0, l > 0
kinetic T = 1/2 m (x'^2 + y'^2 + z'^2)
potential U = m g y
constraint rod: x^2 + y^2 = l^2   # stiff
symmetry delay: t -> t + ε
symmetry turn: (x, y) -> (x cos ε - y sin ε, x sin ε + y cos ε)
symmetry side: x -> x + ε
conserved p = momentum(z)
";

/// A disc that rolls down a slope.
pub(super) const DISC: &str = "\
system disc
coordinate x: length
coordinate ψ: twist
parameter m, J, R, a
kinetic disc = 1/2 m x'^2 + 1/2 J ψ'^2
potential slope = -m a x
constraint roll: x' = R ψ'
symmetry both: x -> x + R ε, ψ -> ψ + ε
conserved c = x - R ψ
";

/// A long row of masses.
pub(super) const ROW: &str = "\
system row, dimensionless
index i: 1..10000
coordinate x[i]          # along the row
parameter m[i], k, c
let D[i] = x[i]^2
let f(u) = 1/2 k u^2
kinetic masses = sum(i: 1/2 m[i] x[i]'^2)
potential springs = sum(j in 1..9999: 1/2 k (x[j+1] - x[j])^2)
potential pin = f(x[7])
dissipation drag = 1/2 c x[1]'^2
symmetry shift: x[i] -> x[i] + ε
";

/// Nine coordinates and more.
const MANY: &str = "\
index i: 1..40
coordinate x[i]
parameter m, k
kinetic masses = sum(i: 1/2 m x[i]'^2)
potential wells = sum(i: 1/2 k x[i]^2)
broken symmetry shift: x[i] -> x[i] + ε
";

/// A model with an error.
const BROKEN: &str = "\
system swing
cyclic coordinate φ: angle
coordinate r: length
parameter m: mass = 1 kg, k
kinetic bob = 1/2 m (r'^2 + r^2 φ'^2
potential spring = 1/2 k r^2
kinetic more = 1/2 m r'^2 + m φ'^2
symmetry turn: φ -> φ + ε
symmetry out: r -> r + ε
conserved h = energy
";

#[test]
fn coordinates_with_constraints() {
    insta::assert_snapshot!(within(ROD, "coordinate $0x, y"), @r#"
    `x`
    `x` is cyclic, but reactions act along it: `p_x = m ẋ` changes at the rate `R_x`
    Coordinate `x: length`
        m ẍ = R_x
        p_x = m ẋ
        ∂L/∂x = 0
        R_x = 2 λ_rod x
    Moved by `turn` (broken by `U`), `side` (exact symmetry).
    L is even under x → −x.
    "#);
    insta::assert_snapshot!(within(ROD, "momentum($0z)"), @r#"
    `z`
    `z` is cyclic: `p_z = m ż` is conserved (proved)
    Coordinate `z: length`: along the axis
        m z̈ = 0
        p_z = m ż
        ∂L/∂z = 0
    L is even under z → −z.
    "#);
    insta::assert_snapshot!(within(DISC, "coordinate $0ψ"), @r#"
    `ψ`
    `ψ` is cyclic, but reactions act along it: `p_ψ = J ψ̇` changes at the rate `R_ψ`
    Coordinate `ψ: twist`
        J ψ̈ = R_ψ
        p_ψ = J ψ̇
        ∂L/∂ψ = 0
        R_ψ = -R λ_roll
    Moved by `both` (symmetry up to a gauge term).
    "#);
}

#[test]
fn families_by_forms_and_by_members() {
    insta::assert_snapshot!(within(ROW, "coordinate $0x[i]"), @r#"
    `x`
        m[1] x[1]'' + c x[1]' + k (x[1] - x[2]) = 0
        m[i] x[i]'' + k (2 x[i] - x[i - 1] - x[i + 1]) = 0   (i = 2 … 6)
        m[7] x[7]'' + k (3 x[7] - x[6] - x[8]) = 0
        m[i] x[i]'' + k (2 x[i] - x[i - 1] - x[i + 1]) = 0   (i = 8 … 9999)
        m[10000] x[10000]'' + k (x[10000] - x[9999]) = 0
    Family `x[i]`, i = 1 … 10000, 10000 coordinates: along the row
        p_x[1] = m[1] x[1]'
        ∂L/∂x[1] = k (x[2] - x[1])
        Q_x[1] = -c x[1]'   (drag)
        p_x[i] = m[i] x[i]'   (i = 2 … 6)
        ∂L/∂x[i] = k (x[i - 1] - 2 x[i] + x[i + 1])   (i = 2 … 6)
        p_x[7] = m[7] x[7]'
        ∂L/∂x[7] = k (x[6] - 3 x[7] + x[8])
        p_x[i] = m[i] x[i]'   (i = 8 … 9999)
        ∂L/∂x[i] = k (x[i - 1] - 2 x[i] + x[i + 1])   (i = 8 … 9999)
        p_x[10000] = m[10000] x[10000]'
        ∂L/∂x[10000] = k (x[9999] - x[10000])
    Moved by `shift` (broken by `pin`).
    "#);
    insta::assert_snapshot!(within(ROW, "f($0x[7])"), @r#"
    `x`
        m[7] x[7]'' + k (3 x[7] - x[6] - x[8]) = 0
    Family `x[i]`, i = 1 … 10000, 10000 coordinates: along the row
        p_x[7] = m[7] x[7]'
        ∂L/∂x[7] = k (x[6] - 3 x[7] + x[8])
    Moved by `shift` (broken by `pin`).
    "#);
    insta::assert_snapshot!(within(MANY, "coordinate $0x[i]"), @r#"
    `x`
    Family `x[i]`, i = 1 … 40, 40 coordinates
    Equations of motion:
        x[1]: m x[1]'' + k x[1] = 0
        x[2]: m x[2]'' + k x[2] = 0
        x[3]: m x[3]'' + k x[3] = 0
        x[4]: m x[4]'' + k x[4] = 0
        x[5]: m x[5]'' + k x[5] = 0
        x[6]: m x[6]'' + k x[6] = 0
        x[7]: m x[7]'' + k x[7] = 0
        x[8]: m x[8]'' + k x[8] = 0
        x[9]: m x[9]'' + k x[9] = 0
        x[10]: m x[10]'' + k x[10] = 0
        x[11]: m x[11]'' + k x[11] = 0
        x[12]: m x[12]'' + k x[12] = 0
        and 28 more
    Canonical momenta:
        p_x[1] = m x[1]'
        p_x[2] = m x[2]'
        p_x[3] = m x[3]'
        p_x[4] = m x[4]'
        p_x[5] = m x[5]'
        p_x[6] = m x[6]'
        p_x[7] = m x[7]'
        p_x[8] = m x[8]'
        p_x[9] = m x[9]'
        p_x[10] = m x[10]'
        p_x[11] = m x[11]'
        p_x[12] = m x[12]'
        and 28 more
    Moved by `shift` (broken by `wells`).
    "#);
}

#[test]
fn terms_of_large_families() {
    insta::assert_snapshot!(within(ROW, "potential $0springs"), @r#"
    `springs`
        potential springs = 1/2 k sum(i in 1..9999: (x[i + 1] - x[i])²)
    Potential energy, counted with − in L
    Adds to the left sides of the equations of motion:
        x[1]: k (x[1] - x[2])
        x[i]: k (2 x[i] - x[i - 1] - x[i + 1])   (i = 2 … 9999)
        x[10000]: k (x[10000] - x[9999])
    Respects `shift`.
    "#);
    insta::assert_snapshot!(within(ROW, "potential $0pin"), @r#"
    `pin`
        potential pin = 1/2 k x[7]²
    Potential energy, counted with − in L
    Adds to the left sides of the equations of motion:
        x[7]: k x[7]
    Breaks `shift`; its share in δL:
        shift: -k x[7]
    "#);
    insta::assert_snapshot!(within(MANY, "$0kinetic masses"), @r#"
    `kinetic`
        kinetic masses = 1/2 m (x[1]'² + x[2]'² + x[3]'² + x[4]'² + x[5]'² + x[6]'² + x[7]'² + x[8]'² + x[9]'² + x[10]'² + x[11]'² + x[12]'² + x[13]'² + x[14]'² + x[15]'² + x[16]'² + x[17]'² + x[18]'² + x[19]'² + x[20]'² + x[21]'² + x[22]'² + x[23]'² + x[24]'² + x[25]'² + x[26]'² + x[27]'² + x[28]'² + x[29]'² + x[30]'² + x[31]'² + x[32]'² + x[33]'² + x[34]'² + x[35]'² + x[36]'² + x[37]'² + x[38]'² + x[39]'² + x[40]'²)
    Kinetic energy, counted with + in L
    Adds to the left sides of the equations of motion:
        x[1]: m x[1]''
        x[2]: m x[2]''
        x[3]: m x[3]''
        x[4]: m x[4]''
        x[5]: m x[5]''
        x[6]: m x[6]''
        x[7]: m x[7]''
        x[8]: m x[8]''
        x[9]: m x[9]''
        x[10]: m x[10]''
        x[11]: m x[11]''
        x[12]: m x[12]''
        and 28 more
    Respects `shift`.
    "#);
}

#[test]
fn a_total_time_derivative_changes_nothing() {
    insta::assert_snapshot!(check("coordinate θ\nkinetic T = θ'^2\nlagrangian $0idle = sin θ θ'\nsymmetry s: θ -> θ + ε"), @r#"
    `idle`
        lagrangian idle = sin θ θ̇
    Term of the Lagrangian, counted with +
    It changes no equation of motion.
    Respects `s` up to a total time derivative.
    "#);
}

#[test]
fn terms_whose_changes_cancel() {
    insta::assert_snapshot!(check("coordinate x, y\nkinetic T = x'^2 + y'^2\npotential $0a = x^2 + y\npotential b = -x^2\nsymmetry s: x -> x + ε"), @r#"
    `a`
        potential a = y + x²
    Potential energy, counted with − in L
    Adds to the left sides of the equations of motion:
        x: 2 x
        y: 1
    Changes, and other terms take the change back, under `s`; its share in δL:
        s: -2 x
    "#);
}

#[test]
fn constraints_and_their_reactions() {
    insta::assert_snapshot!(within(ROD, "constraint $0rod"), @r#"
    `rod`
        constraint rod: x² + y² - l² = 0
    Holonomic constraint: stiff
    Reactions, on the right sides of the equations of motion:
        x: 2 λ_rod x
        y: 2 λ_rod y
    Its reactions do no work on the charges of `delay` and `turn`.
    Its reactions change the charge of `side`.
    "#);
    insta::assert_snapshot!(within(DISC, "$0constraint roll"), @r#"
    `constraint`
        constraint roll: ẋ - R ψ̇ = 0
    Constraint linear in the velocities; whether it can be integrated is not asked here
    Reactions, on the right sides of the equations of motion:
        x: λ_roll
        ψ: -R λ_roll
    Its reactions do no work on the charge of `both`.
    "#);
}

#[test]
fn claims_with_constraints() {
    insta::assert_snapshot!(within(ROD, "symmetry $0turn"), @r#"
    `turn`
    `turn` is broken by `U` (refuted): `dQ/dt = -m g x`
    Generator, angular momentum, balance law:
        η_x = -y
        η_y = x
        Q = m (x ẏ - y ẋ)
        dQ/dt = -m g x   (potential U)
    The flow preserves the constraints.
    "#);
    insta::assert_snapshot!(within(ROD, "symmetry $0side"), @r#"
    `side`
    `side` is an exact symmetry of L (proved), but reactions change the canonical momentum `p_x = m ẋ`
    Generator, canonical momentum, balance law:
        η_x = 1
        p_x = m ẋ
        dp_x/dt = 2 λ_rod x   (reaction of rod)
    The flow leaves the surface of the constraints.
    "#);
    insta::assert_snapshot!(within(DISC, "symmetry $0both"), @r#"
    `both`
    `both` is a symmetry up to a gauge term (proved): `Q = J ψ̇ + m R (ẋ - a t)` is conserved
    Generator, charge, gauge term, balance law:
        η_x = R
        η_ψ = 1
        Q = J ψ̇ + m R (ẋ - a t)
        F = m a R t   (δL = dF/dt)
        dQ/dt = 0
    The flow preserves the constraints.
    "#);
    insta::assert_snapshot!(within(DISC, "conserved $0c"), @r#"
    `c`
    `c` is conserved (proved)
        c = x - R ψ
        d/dt c = 0
    "#);
    insta::assert_snapshot!(within(ROD, "conserved $0p"), @r#"
    `p`
    `p` is conserved (proved): it is the canonical momentum `p_z`
        p = m ż
        d/dt p = 0
    "#);
}

#[test]
fn claims_that_fail() {
    insta::assert_snapshot!(check("coordinate x\nparameter m, k\nkinetic T = 1/2 m x'^2\npotential U = 1/2 k x^2\nconserved $0p = m x'"), @r#"
    `p`
    `p` is not conserved (refuted)
        p = m ẋ
        d/dt p = m ẍ
    For instance d/dt p is -0.111111 at m = 4/3, x = 1/3, k = 1/3.
    "#);
    insta::assert_snapshot!(check("coordinate x\nkinetic T = 1/2 x'^2\nsymmetry $0s: x -> 2 x + ε"), @r#"
    `s`
    `s` is no family of transformations: at ε = 0 the image of x is not x
    "#);
    insta::assert_snapshot!(check("coordinate x\nkinetic T = 1/2 x'^2\nbroken symmetry $0s: x -> x + ε"), @r#"
    `s`
    `s` is an exact symmetry (proved), though it is declared broken: the canonical momentum `p_x = ẋ` is conserved
    Generator, canonical momentum, balance law:
        η_x = 1
        p_x = ẋ
        dp_x/dt = 0
    Its Poisson brackets with the other charges vanish.
    "#);
}

/// Nobody solves this for a coordinate.
const TRACK: &str = "\
coordinate x, y
kinetic bob = 1/2 (x'^2 + y'^2)
constraint track: sin x + exp(y) x^3 + sin(y) + y^5 = 1
symmetry slide: x -> x + ε
conserved drift = x'
";

#[test]
fn claims_that_are_not_decided() {
    insta::assert_snapshot!(within(TRACK, "symmetry $0slide"), @r#"
    `slide`
    `slide` is an exact symmetry of L (proved); whether the canonical momentum `p_x = ẋ` is conserved is undecided: the constraints are not solved for coordinates, so that states on their surface are not known
    Generator, canonical momentum, balance law:
        η_x = 1
        p_x = ẋ
        dp_x/dt = λ_track (cos x + 3 x² exp(y))   (reaction of track)
    Whether the flow preserves the constraints is undecided.
    "#);
    insta::assert_snapshot!(within(TRACK, "conserved $0drift"), @r#"
    `drift`
    Whether `drift`, which is the canonical momentum `p_x`, which is the charge of `slide`, is conserved is undecided: the constraints are not solved for coordinates, so that states on their surface are not known
        drift = ẋ
        d/dt drift = λ_track (cos x + 3 x² exp(y))
    "#);
    insta::assert_snapshot!(within(TRACK, "constraint $0track"), @r#"
    `track`
        constraint track: y⁵ - 1 + sin x + sin y + x³ exp(y) = 0
    Holonomic constraint
    Reactions, on the right sides of the equations of motion:
        x: λ_track (cos x + 3 x² exp(y))
        y: λ_track (5 y⁴ + cos y + x³ exp(y))
    "#);
}

#[test]
fn charges_by_their_names() {
    // A field makes it canonical, two masses too; a gauge term may count the turns of an angle.
    insta::assert_snapshot!(check("coordinate x, y: length\nparameter m, B\nkinetic T = 1/2 m (x'^2 + y'^2)\nlagrangian A = 1/2 B (x y' - y x')\nsymmetry $0turn: (x, y) -> (x cos ε - y sin ε, x sin ε + y cos ε)"), @r#"
    `turn`
    `turn` is an exact symmetry (proved): the canonical angular momentum `Q = m (x ẏ - y ẋ) + 1/2 B (x² + y²)` is conserved
    Generator, canonical angular momentum, balance law:
        η_x = -y
        η_y = x
        Q = m (x ẏ - y ẋ) + 1/2 B (x² + y²)
        dQ/dt = 0
    Its Poisson brackets with the other charges vanish.
    "#);
    insta::assert_snapshot!(check("index i: 1..3\ncoordinate x[i]: length\nparameter m\nkinetic T = sum(i: 1/2 m x[i]'^2)\nsymmetry $0shift: x[i] -> x[i] + ε"), @r#"
    `shift`
    `shift` is an exact symmetry (proved): the total momentum `Q = m (x[1]' + x[2]' + x[3]')` is conserved
    Generator, total momentum, balance law:
        η_x[1] = 1
        η_x[2] = 1
        η_x[3] = 1
        Q = m (x[1]' + x[2]' + x[3]')
        dQ/dt = 0
    "#);
    insta::assert_snapshot!(check("coordinate φ: angle\nparameter J, M\nkinetic T = 1/2 J φ'^2\nlagrangian A = M t φ'\nsymmetry $0delay: t -> t + ε"), @r#"
    `delay`
    `delay` is a symmetry up to a gauge term (proved): `Q = -1/2 J φ̇² - M φ` is conserved
    Generator, charge, gauge term, balance law:
        τ = 1
        Q = -1/2 J φ̇² - M φ
        F = M φ   (δL = dF/dt)
        dQ/dt = 0
    F changes when `φ` turns by 2π: the charge is not single-valued.
    Poisson brackets that do not vanish:
        {p_φ, delay} = M
    "#);
}

#[test]
fn claims_about_vectors() {
    insta::assert_snapshot!(check("coordinate x, y\nkinetic T = x'^2 + y'^2\npotential U = x\nconserved $0p = (x', y')"), @r#"
    `p`
    `p[1]` is not conserved (refuted)
        p[1] = ẋ
        d/dt p[1] = ẍ
    For instance d/dt p[1] is -0.500000.
    `p[2]` is conserved (proved)
        p[2] = ẏ
        d/dt p[2] = 0
    It comes from the symmetry y → y + ε.
    "#);
}

#[test]
fn systems() {
    insta::assert_snapshot!(within(ROD, "system $0rod"), @r#"
    `rod_pendulum`
    `rod_pendulum`: 2 degrees of freedom (3 coordinates, 1 constraint), energy conserved
    a bob on a stiff rod
    Lagrangian:
        L = 1/2 m (ẋ² + ẏ² + ż²) - m g y
    Energy, kinetic + potential:
        h = 1/2 m (ẋ² + ẏ² + ż²) + m g y
        dh/dt = 0
    Conserved:
        h   (energy)
        p_z = m ż   (z is cyclic)
    Time reversal: yes.
    "#);
    insta::assert_snapshot!(within(DISC, "system $0disc"), @r#"
    `disc`
    `disc`: 2 coordinates, 1 constraint, 1 independent velocity, energy conserved
    Lagrangian:
        L = 1/2 m ẋ² + 1/2 J ψ̇² + m a x
    Energy, kinetic + potential:
        h = 1/2 m ẋ² + 1/2 J ψ̇² - m a x
        dh/dt = 0
    Conserved:
        h   (energy)
        J ψ̇ + m R (ẋ - a t)   (charge of both)
        x - R ψ   (claimed as c)
    Time reversal: yes.
    "#);
    insta::assert_snapshot!(within(ROW, "system $0row"), @r#"
    `row`
    `row`: 10000 degrees of freedom, energy not conserved: `drag` changes it
    Lagrangian:
        L = 1/2 sum(i in 1..10000: m[i] x[i]'²) - 1/2 k (sum(i in 1..9999: (x[i + 1] - x[i])²) + x[7]²)
    Energy, kinetic + potential:
        h = 1/2 sum(i in 1..10000: m[i] x[i]'²) + 1/2 k (sum(i in 1..9999: (x[i + 1] - x[i])²) + x[7]²)
        dh/dt = -c x[1]'²
    Nothing is known to be conserved.
    Time reversal: holds for L, broken by drag.
    "#);
    insta::assert_snapshot!(check("system $0bead\ncoordinate θ: angle\nparameter m, R, g, Ω\nkinetic T = 1/2 m R^2 (θ'^2 + Ω^2 sin(θ)^2)\npotential U = -m g R cos θ"), @r#"
    `bead`
    `bead`: 1 degree of freedom, energy function conserved
    Lagrangian:
        L = 1/2 m R² (θ̇² + Ω² sin² θ) + m g R cos θ
    Energy function, which is not kinetic + potential energy:
        h = 1/2 m R² (θ̇² - Ω² sin² θ) - m g R cos θ
        dh/dt = 0
    Conserved:
        h   (energy function)
    Time reversal: yes.
    "#);
    insta::assert_snapshot!(check("system $0driven\ncoordinate x, y\nparameter k\nkinetic T = 1/2 x'^2\npotential U = 1/2 k x^2 cos t"), @r#"
    `driven`
    `driven`: 2 coordinates, whether the energy is conserved is undecided
    Lagrangian:
        L = 1/2 ẋ² - 1/2 k x² cos t
    Energy, kinetic + potential:
        h = 1/2 ẋ² + 1/2 k x² cos t
        dh/dt = -1/2 k x² sin t
    Nothing is known to be conserved.
    Time reversal: yes.
    The mass matrix is singular: the kinetic terms do not determine all accelerations.
    "#);
}

#[test]
fn what_is_left_of_a_broken_model() {
    insta::assert_snapshot!(within(BROKEN, "system $0swing"), @r#"
    `swing`
    `swing`: 2 coordinates
    without `kinetic bob`, which has an error
    Lagrangian:
        L = 1/2 m ṙ² + m φ̇² - 1/2 k r²
    Energy, kinetic + potential:
        h = 1/2 m ṙ² + m φ̇² + 1/2 k r²
    "#);
    insta::assert_snapshot!(within(BROKEN, "coordinate $0φ"), @r#"
    `φ`
        2 m φ̈ = 0
    without `kinetic bob`, which has an error
    Coordinate `φ: angle`
        p_φ = 2 m φ̇
        ∂L/∂φ = 0
    Moved by `turn` (not judged, the model is incomplete).
    "#);
    insta::assert_snapshot!(within(BROKEN, "kinetic $0bob"), @r#"
    `bob`
    `kinetic bob` has an error and is left out of the model
    This `(` is never closed.
    "#);
    insta::assert_snapshot!(within(BROKEN, "kinetic $0more"), @r#"
    `more`
        kinetic more = 1/2 m ṙ² + m φ̇²
    without `kinetic bob`, which has an error
    Kinetic energy, counted with + in L
    Adds to the left sides of the equations of motion:
        φ: 2 m φ̈
        r: m r̈
    Respects `turn` and `out`.
    "#);
    insta::assert_snapshot!(within(BROKEN, "symmetry $0turn"), @r#"
    `turn`
    `turn` is not judged: the model is incomplete
    without `kinetic bob`, which has an error
    Generator, canonical momentum:
        η_φ = 1
        p_φ = 2 m φ̇
    "#);
    insta::assert_snapshot!(within(BROKEN, "symmetry $0out"), @r#"
    `out`
    `out` is broken by `spring` (refuted): `dp_r/dt = -k r`
    without `kinetic bob`, which has an error
    Generator, canonical momentum, balance law of what is left of the model:
        η_r = 1
        p_r = m ṙ
        dp_r/dt = -k r   (potential spring)
    "#);
    insta::assert_snapshot!(within(BROKEN, "conserved $0h"), @r#"
    `h`
    `h` is not judged: the model is incomplete
    without `kinetic bob`, which has an error
        h = 1/2 m ṙ² + m φ̇² + 1/2 k r²
    "#);
}
