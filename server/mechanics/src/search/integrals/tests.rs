//! Textbook systems.

use super::integrals;
use crate::fixture::{Fixture, double_pendulum, kepler};
use crate::model::{Action, Force, TermKind};
use crate::search::{Item, Origin, Scope};
use crate::symmetry::{Status, delay, examine};
use leastwise_algebra::{Arena, DisplayOptions, Expr, Function, Rational, Role, textbook};

/// Exactly these are found, and all of the ansatz was searched through. Symmetries are marked with a star; each is one.
fn check(f: Fixture, angles: &[usize], expected: &[&str]) {
    check_beside(f, angles, &[], expected);
}

/// The same, where some charges are known from point symmetries.
fn check_beside(mut f: Fixture, angles: &[usize], charges: &[Expr], expected: &[&str]) {
    let (texts, incomplete) = found(&mut f, angles, charges);
    assert_eq!(incomplete, None);
    assert_eq!(texts, expected);
}

fn found(f: &mut Fixture, angles: &[usize], charges: &[Expr]) -> (Vec<String>, Option<String>) {
    let model = f.model.clone();
    let known = |&charge: &Expr| {
        let generator = delay(&model);
        Item { charge, origin: Origin::Symmetry { generator, gauge: None }, known: false }
    };
    let points: Vec<Item> = charges.iter().map(known).collect();
    let scope = Scope { degree: 2, angles: angles.to_vec(), quadratic: true };
    let mut cx = f.cx();
    let (items, incomplete) = integrals(&mut cx, &model, &scope, &points).unwrap();
    let mut texts = Vec::new();
    for i in items {
        let text = textbook(cx.arena, i.charge, &DisplayOptions::default(), cx.budget).text();
        let star = match i.origin {
            Origin::Quadratic => "",
            Origin::Symmetry { generator, gauge } => {
                let status = examine(&mut cx, &model, generator).unwrap().status;
                assert_eq!(status, if gauge.is_none() { Status::Exact } else { Status::UpToGauge });
                "* "
            }
        };
        texts.push(format!("{star}{text}"));
    }
    (texts, incomplete)
}

/// The search is not made, and this is why.
fn refused(mut f: Fixture, why: &str) {
    let (texts, incomplete) = found(&mut f, &[], &[]);
    assert_eq!(texts, [""; 0]);
    assert_eq!(incomplete, Some(format!("integrals quadratic in the velocities were not looked for: {why}")));
}

/// A body of mass m in Cartesian coordinates; positions and velocities.
fn body(names: &[&str]) -> (Fixture, Vec<Expr>, Vec<Expr>) {
    let mut f = Fixture::new();
    let m = f.parameter("m");
    let (mut at, mut speed) = (Vec::new(), Vec::new());
    for name in names {
        let (x, v) = f.coordinate(name);
        let t = f.half_square(m, v);
        f.term(TermKind::Kinetic, name, &[t]);
        at.push(x);
        speed.push(v);
    }
    (f, at, speed)
}

fn potential(f: &mut Fixture, parts: &[Expr]) {
    f.term(TermKind::Potential, "field", parts);
}

/// −k/√(Σ (q − a)²).
fn attraction(f: &mut Fixture, k: &str, list: &[(Expr, Expr)]) -> Expr {
    let k = f.parameter(k);
    let mut parts = Vec::new();
    for &(q, a) in list {
        let d = f.arena.sub(q, a);
        parts.push(f.arena.pow(d, 2));
    }
    let r2 = f.arena.sum(&parts);
    let u = f.arena.monomial(&[(k, Rational::ONE), (r2, Rational::HALF.neg())]);
    f.arena.neg(u)
}

/// m (q v' − q' v) for two places.
fn angular_momentum(f: &mut Fixture, at: &[Expr], speed: &[Expr], i: usize, j: usize) -> Expr {
    let m = f.parameter("m");
    let (a, b) = (f.arena.product(&[m, at[i], speed[j]]), f.arena.product(&[m, at[j], speed[i]]));
    f.arena.sub(a, b)
}

#[test]
fn kepler_orbits_keep_the_laplace_vector() {
    // v × M + α r/r, reversed [LL §15, (15.17)].
    let plane = ["* m (x ẏ - y ẋ)", "m ẏ (x ẏ - y ẋ) - k x/√(x² + y²)", "m ẋ (y ẋ - x ẏ) - k y/√(x² + y²)"];
    check(kepler(), &[], &plane);
    let (mut f, at, speed) = body(&["x", "y", "z"]);
    let u = attraction(&mut f, "k", &[(at[0], Arena::ZERO), (at[1], Arena::ZERO), (at[2], Arena::ZERO)]);
    potential(&mut f, &[u]);
    let charges = [(1, 2), (2, 0), (0, 1)].map(|(i, j)| angular_momentum(&mut f, &at, &speed, i, j));
    let space = [
        "m (x (ẏ² + ż²) - y ẋ ẏ - z ẋ ż) - k x/√(x² + y² + z²)",
        "m (y (ẋ² + ż²) - x ẋ ẏ - z ẏ ż) - k y/√(x² + y² + z²)",
        "m (z (ẋ² + ẏ²) - x ẋ ż - y ẏ ż) - k z/√(x² + y² + z²)",
    ];
    check_beside(f, &[], &charges, &space);
}

/// ½ m v² − k/r in polar or spherical coordinates; without the field where `free`.
fn polar(spherical: bool, free: bool) -> Fixture {
    let mut f = Fixture::new();
    let (m, k) = (f.parameter("m"), f.parameter("k"));
    let (r, vr) = f.coordinate("r");
    let mut parts = vec![f.half_square(m, vr)];
    let r2 = f.arena.pow(r, 2);
    let mut inertia = f.arena.mul(m, r2);
    if spherical {
        let (theta, w) = f.coordinate("θ");
        parts.push(f.half_square(inertia, w));
        let s = f.arena.call(Function::Sin, &[theta]);
        let s2 = f.arena.pow(s, 2);
        inertia = f.arena.mul(inertia, s2);
    }
    let (_, w) = f.coordinate("φ");
    parts.push(f.half_square(inertia, w));
    f.term(TermKind::Kinetic, "body", &parts);
    if !free {
        let u = f.arena.div(k, r);
        let u = f.arena.neg(u);
        potential(&mut f, &[u]);
    }
    f
}

#[test]
fn the_laplace_vector_is_found_in_curvilinear_coordinates() {
    let plane = ["* m r² φ̇", "m r² φ̇ (sin φ ṙ + r cos φ φ̇) - k cos φ", "m r² φ̇ (r sin φ φ̇ - cos φ ṙ) - k sin φ"];
    check(polar(false, false), &[1], &plane);
    let (texts, incomplete) = found(&mut polar(true, false), &[1, 2], &[]);
    assert_eq!(incomplete, None);
    assert_eq!(texts.iter().filter(|t| t.starts_with('*')).count(), 3, "angular momentum");
    let ends = [" - k sin θ cos φ", " - k sin θ sin φ", " - k cos θ"];
    assert!(texts.len() == 6 && texts[3..].iter().zip(ends).all(|(t, e)| t.ends_with(e)), "{texts:?}");
}

#[test]
fn the_laplace_vector_is_found_in_parabolic_coordinates() {
    // ½ m (u² + v²)(u̇² + v̇²) − 2 k/(u² + v²).
    let mut f = Fixture::new();
    let (m, k) = (f.parameter("m"), f.parameter("k"));
    let ((u, a), (v, b)) = (f.coordinate("u"), f.coordinate("v"));
    let (u2, v2) = (f.arena.pow(u, 2), f.arena.pow(v, 2));
    let r = f.arena.add(u2, v2);
    let inertia = f.arena.mul(m, r);
    let parts = [f.half_square(inertia, a), f.half_square(inertia, b)];
    f.term(TermKind::Kinetic, "body", &parts);
    let p = f.arena.div(k, r);
    let p = f.arena.scale(p, &Rational::integer(-2));
    potential(&mut f, &[p]);
    let (texts, incomplete) = found(&mut f, &[], &[]);
    assert_eq!(incomplete, None);
    let starred: Vec<bool> = texts.iter().map(|t| t.starts_with('*')).collect();
    assert_eq!(starred, [true, false, false], "{texts:?}");
}

#[test]
fn free_bodies_have_products_only() {
    check(body(&["x", "y"]).0, &[], &["* m ẋ", "* m ẏ", "* m (x ẏ - y ẋ)"]);
    // Momenta in polar coordinates, which no generator with polynomial components has.
    let plane = ["* m (sin φ ṙ + r cos φ φ̇)", "* m (cos φ ṙ - r sin φ φ̇)", "* m r² φ̇"];
    check(polar(false, true), &[1], &plane);
    let (texts, incomplete) = found(&mut polar(true, true), &[1, 2], &[]);
    assert_eq!(incomplete, None);
    assert!(texts.len() == 6 && texts.iter().all(|t| t.starts_with('*')), "{texts:?}");
}

#[test]
fn uniform_gravity_has_products_only() {
    let (mut f, at, speed) = body(&["x", "y"]);
    let (m, g, t) = (f.parameter("m"), f.parameter("g"), f.time());
    let u = f.arena.product(&[m, g, at[1]]);
    potential(&mut f, &[u]);
    // Seen from a falling frame the body is free: η = y + ½ g t², p_η = m (ẏ + g t).
    let t2 = f.arena.pow(t, 2);
    let (gt, gt2) = (f.arena.mul(g, t), f.arena.mul(g, t2));
    let fallen = f.arena.linear(&[(at[1], Rational::ONE), (gt2, Rational::HALF)]);
    let rate = f.arena.add(speed[1], gt);
    let mut charges = Vec::new();
    for (q, v) in [(at[0], speed[0]), (fallen, rate)] {
        charges.push(f.arena.mul(m, v));
        let way = f.arena.mul(v, t);
        let start = f.arena.sub(q, way);
        charges.push(f.arena.mul(m, start));
    }
    charges.push(angular_momentum(&mut f, &[at[0], fallen], &[speed[0], rate], 0, 1));
    check_beside(f, &[], &charges, &[]);
}

/// Oscillators of stiffness k.
fn oscillator(names: &[&str]) -> Fixture {
    let (mut f, at, _) = body(names);
    let k = f.parameter("k");
    let parts: Vec<Expr> = at.iter().map(|&x| f.half_square(k, x)).collect();
    potential(&mut f, &parts);
    f
}

#[test]
fn isotropic_oscillators_have_fradkins_tensor() {
    // [Fradkin, Am. J. Phys. 33 (1965) 207]; one diagonal element follows from the energy.
    check(oscillator(&["x", "y"]), &[], &["* m (x ẏ - y ẋ)", "1/2 m ẋ² + 1/2 k x²", "m ẋ ẏ + k x y"]);
    let space = [
        "* m (x ẏ - y ẋ)",
        "* m (x ż - z ẋ)",
        "* m (y ż - z ẏ)",
        "1/2 m ẋ² + 1/2 k x²",
        "m ẋ ẏ + k x y",
        "m ẋ ż + k x z",
        "1/2 m ẏ² + 1/2 k y²",
        "m ẏ ż + k y z",
    ];
    check(oscillator(&["x", "y", "z"]), &[], &space);
    // so(4) and su(4): 6 rotations, 9 more.
    let (texts, incomplete) = found(&mut oscillator(&["x", "y", "u", "v"]), &[], &[]);
    assert_eq!((texts.len(), incomplete), (15, None));
}

#[test]
fn separated_systems_have_an_energy_each() {
    let (mut f, at, _) = body(&["x", "y"]);
    let mut parts = Vec::new();
    for (name, &q) in ["U", "V"].iter().zip(&at) {
        let s = f.arena.symbol(name, None, Role::Function);
        parts.push(f.arena.unspecified(s, None, &[0], &[q]));
    }
    potential(&mut f, &parts);
    check(f, &[], &["1/2 m ẋ² + U(x)"]);
    let (mut f, at, _) = body(&["x", "y"]);
    springs(&mut f, &at);
    check(f, &[], &["1/2 m ẋ² + 1/2 k₁ x²"]);
}

/// ½ k₁ x² + ½ k₂ y².
fn springs(f: &mut Fixture, at: &[Expr]) {
    let (k1, k2) = (f.parameter("k₁"), f.parameter("k₂"));
    let parts = [f.half_square(k1, at[0]), f.half_square(k2, at[1])];
    potential(f, &parts);
}

#[test]
fn two_centres_have_one_more() {
    // [Whittaker, Analytical Dynamics, §53]: product of the angular momenta about the centres, and what belongs to it.
    let (mut f, at, _) = body(&["x", "y"]);
    let a = f.parameter("a");
    let minus = f.arena.neg(a);
    let parts = [("k₁", a), ("k₂", minus)].map(|(k, c)| attraction(&mut f, k, &[(at[0], c), (at[1], Arena::ZERO)]));
    potential(&mut f, &parts);
    let expected = "m (a² ẋ² + (y ẋ - x ẏ)²) + 2 a x (k₂/√(2 a x + x² + y² + a²) - k₁/√(x² - 2 a x + y² + a²))";
    check(f, &[], &[expected]);
}

#[test]
fn a_uniform_force_leaves_one_component_of_the_laplace_vector() {
    // [Redmond, Phys. Rev. 133 (1964) B1352].
    let (mut f, at, _) = body(&["x", "y", "z"]);
    let u = attraction(&mut f, "k", &[(at[0], Arena::ZERO), (at[1], Arena::ZERO), (at[2], Arena::ZERO)]);
    let force = f.parameter("F");
    let w = f.arena.mul(force, at[2]);
    potential(&mut f, &[u, w]);
    let expected = ["* m (x ẏ - y ẋ)", "m (z (ẋ² + ẏ²) - x ẋ ż - y ẏ ż) - k z/√(x² + y² + z²) - 1/2 F (x² + y²)"];
    check(f, &[], &expected);
}

#[test]
fn chaotic_systems_have_none() {
    // [Hénon, Heiles, Astron. J. 69 (1964) 73].
    let (mut f, at, _) = body(&["x", "y"]);
    let (x2, y2, y3) = (f.arena.pow(at[0], 2), f.arena.pow(at[1], 2), f.arena.pow(at[1], 3));
    let x2y = f.arena.mul(x2, at[1]);
    let third = Rational::new(-1, 3).unwrap();
    let u = f.arena.linear(&[(x2, Rational::HALF), (y2, Rational::HALF), (x2y, Rational::ONE), (y3, third)]);
    potential(&mut f, &[u]);
    check(f, &[], &[]);
    check(double_pendulum(), &[0, 1], &[]);
}

#[test]
fn spherical_pendulum_has_none() {
    let mut f = Fixture::new();
    let (m, l, g) = (f.parameter("m"), f.parameter("l"), f.parameter("g"));
    let (theta, a) = f.coordinate("θ");
    let (_, b) = f.coordinate("φ");
    let (s, c) = (f.arena.call(Function::Sin, &[theta]), f.arena.call(Function::Cos, &[theta]));
    let l2 = f.arena.pow(l, 2);
    let s2 = f.arena.pow(s, 2);
    let inertia = f.arena.mul(m, l2);
    let about = f.arena.mul(inertia, s2);
    let parts = [f.half_square(inertia, a), f.half_square(about, b)];
    f.term(TermKind::Kinetic, "bob", &parts);
    let u = f.arena.product(&[m, g, l, c]);
    f.term(TermKind::Lagrangian, "weight", &[u]);
    check(f, &[0, 1], &["* m l² sin² θ φ̇"]);
}

#[test]
fn a_surface_of_liouville_has_one() {
    // T = ½ (U(x) + V(y)) (ẋ² + ẏ²) [Whittaker, Analytical Dynamics, §43], with U = x², V = 2 y².
    let mut f = Fixture::new();
    let ((x, a), (y, b)) = (f.coordinate("x"), f.coordinate("y"));
    let (x2, y2) = (f.arena.pow(x, 2), f.arena.pow(y, 2));
    let u = f.arena.linear(&[(x2, Rational::ONE), (y2, Rational::integer(2))]);
    let parts = [f.half_square(u, a), f.half_square(u, b)];
    f.term(TermKind::Kinetic, "body", &parts);
    let (texts, incomplete) = found(&mut f, &[], &[]);
    assert_eq!((texts.len(), incomplete), (1, None), "{texts:?}");
}

/// q B (x ẏ − y ẋ)/2.
fn magnetic(f: &mut Fixture, at: &[Expr], speed: &[Expr]) {
    let (q, b) = (f.parameter("q"), f.parameter("B"));
    let (s, t) = (f.arena.mul(at[0], speed[1]), f.arena.mul(at[1], speed[0]));
    let turn = f.arena.sub(s, t);
    let half = f.arena.number(Rational::HALF);
    let u = f.arena.product(&[half, q, b, turn]);
    f.term(TermKind::Lagrangian, "field", &[u]);
}

#[test]
fn a_charge_in_a_uniform_field_has_products_only() {
    let (mut f, at, speed) = body(&["x", "y"]);
    magnetic(&mut f, &at, &speed);
    check(f, &[], &["* m ẋ - q B y", "* m ẏ + q B x", "* m (x ẏ - y ẋ) + 1/2 q B (x² + y²)"]);
}

#[test]
fn a_charge_on_two_springs_has_one_more() {
    let (mut f, at, speed) = body(&["x", "y"]);
    magnetic(&mut f, &at, &speed);
    springs(&mut f, &at);
    let expected = "m² (k₁ - k₂) ẋ² + 2 m q B (k₂ y ẋ - k₁ x ẏ) + (m (k₁ - k₂) - q² B²) k₁ x² - k₂ q² B² y²";
    check(f, &[], &[expected]);
}

/// Two masses on a line with a spring between them.
fn pair() -> (Fixture, Vec<Expr>) {
    let mut f = Fixture::new();
    let (m1, m2, k) = (f.parameter("m₁"), f.parameter("m₂"), f.parameter("k"));
    let ((x, a), (y, b)) = (f.coordinate("x"), f.coordinate("y"));
    let parts = [f.half_square(m1, a), f.half_square(m2, b)];
    f.term(TermKind::Kinetic, "masses", &parts);
    let d = f.arena.sub(x, y);
    let spring = f.half_square(k, d);
    f.term(TermKind::Potential, "spring", &[spring]);
    (f, vec![x, y])
}

#[test]
fn coupled_masses_have_the_energies_of_their_modes() {
    // The energy of the relative motion is the whole energy less that of the centre of mass.
    check(pair().0, &[], &["* m₁ ẋ + m₂ ẏ"]);
    // On walls there are two modes.
    let (mut f, at) = pair();
    springs(&mut f, &at);
    let (texts, incomplete) = found(&mut f, &[], &[]);
    assert_eq!(incomplete, None);
    assert!(texts.len() == 1 && texts[0].starts_with("m₁ (m₂ (k + k₁) - m₁ (k + k₂)) ẋ² - 2 m₁ m₂ k ẋ ẏ"), "{texts:?}");
}

#[test]
fn refusals_say_why() {
    let (mut f, at, _) = body(&["x"]);
    let t = f.time();
    let u = f.arena.mul(at[0], t);
    potential(&mut f, &[u]);
    refused(f, "the equations of motion depend on the time");
    let (mut f, at, _) = body(&["x"]);
    let force = f.parameter("F");
    f.model.forces.push(Force { name: "pull".into(), action: Action::Applied(vec![(at[0], force)]) });
    refused(f, "forces or dissipation act beside L");
    refused(crate::fixture::rod(false).0, "there are constraints");
    let mut f = Fixture::new();
    let (x, _) = f.coordinate("x");
    potential(&mut f, &[x]);
    refused(f, "the mass matrix is not known to be regular");
    let mut f = Fixture::new();
    let (_, v) = f.coordinate("x");
    let v4 = f.arena.pow(v, 4);
    f.term(TermKind::Kinetic, "body", &[v4]);
    refused(f, "the kinetic energy is not quadratic in the velocities");
}

/// ½ Σ m v² for bodies in the plane with masses of their own, −g mᵢ mⱼ/r between them.
fn bodies(n: usize) -> Fixture {
    let mut f = Fixture::new();
    let g = f.parameter("g");
    let mut list: Vec<(Expr, Expr, Expr)> = Vec::new();
    for i in 1..=n {
        let m = f.parameter(&format!("m{i}"));
        let ((x, a), (y, b)) = (f.coordinate(&format!("x{i}")), f.coordinate(&format!("y{i}")));
        let parts = [f.half_square(m, a), f.half_square(m, b)];
        f.term(TermKind::Kinetic, "body", &parts);
        for &(w, u, v) in &list {
            let (u, v) = (f.arena.sub(x, u), f.arena.sub(y, v));
            let (u2, v2) = (f.arena.pow(u, 2), f.arena.pow(v, 2));
            let r2 = f.arena.add(u2, v2);
            let factors = [(g, Rational::ONE), (m, Rational::ONE), (w, Rational::ONE), (r2, Rational::HALF.neg())];
            let u = f.arena.monomial(&factors);
            f.term(TermKind::Lagrangian, "gravity", &[u]);
        }
        list.push((m, x, y));
    }
    f
}

#[test]
fn bodies_that_attract_each_other_have_linear_ones_only() {
    // Momentum, angular momentum, and that of the centre of mass [Julliard-Tosel, C. R. Acad. Sci. 327 (1998) 387].
    let (texts, incomplete) = found(&mut bodies(3), &[], &[]);
    assert_eq!(incomplete, None);
    assert!(texts.len() == 4 && texts.iter().all(|t| t.starts_with('*')), "{texts:?}");
}

#[test]
fn two_bodies_have_the_laplace_vector_of_the_relative_motion() {
    let (texts, incomplete) = found(&mut bodies(2), &[], &[]);
    assert_eq!(incomplete, None);
    let hidden = texts.iter().filter(|t| !t.starts_with('*')).count();
    assert_eq!((texts.len(), hidden), (6, 2), "{texts:?}");
}

#[test]
fn pendulums_have_none() {
    // On a cart; the momentum is known to be conserved.
    let mut f = Fixture::new();
    let [m, cart, l, g] = ["m", "M", "l", "g"].map(|p| f.parameter(p));
    let ((_, a), (theta, b)) = (f.coordinate("x"), f.coordinate("θ"));
    let (s, c) = (f.arena.call(Function::Sin, &[theta]), f.arena.call(Function::Cos, &[theta]));
    let (across, down) = (f.arena.product(&[l, c, b]), f.arena.product(&[l, s, b]));
    let across = f.arena.add(a, across);
    let parts = [f.half_square(cart, a), f.half_square(m, across), f.half_square(m, down)];
    f.term(TermKind::Kinetic, "motion", &parts);
    let u = f.arena.product(&[m, g, l, c]);
    f.term(TermKind::Lagrangian, "weight", &[u]);
    check(f, &[1], &["* (M + m) ẋ + m l cos θ θ̇"]);
    // On a spring.
    let mut f = polar(false, true);
    let [m, k, l, g] = ["m", "k", "l", "g"].map(|p| f.parameter(p));
    let [r, angle] = [0, 1].map(|i| f.model.coordinates[i].jet(&mut f.arena, 0));
    let c = f.arena.call(Function::Cos, &[angle]);
    let d = f.arena.sub(r, l);
    let (weight, spring) = (f.arena.product(&[m, g, r, c]), f.half_square(k, d));
    f.term(TermKind::Lagrangian, "weight", &[weight]);
    potential(&mut f, &[spring]);
    check(f, &[1], &[]);
}

#[test]
fn a_heavy_top_is_searched_through_in_part() {
    // Two spins and the energy; the ansatz for Killing tensors in three angles is too large.
    let mut f = Fixture::new();
    let [across, along, w] = ["A", "C", "w"].map(|p| f.parameter(p));
    let ((theta, a), (_, b), (_, c)) = (f.coordinate("θ"), f.coordinate("φ"), f.coordinate("ψ"));
    let (s, co) = (f.arena.call(Function::Sin, &[theta]), f.arena.call(Function::Cos, &[theta]));
    let (sb, cb) = (f.arena.mul(s, b), f.arena.mul(co, b));
    let spin = f.arena.add(c, cb);
    let parts = [f.half_square(across, a), f.half_square(across, sb), f.half_square(along, spin)];
    f.term(TermKind::Kinetic, "top", &parts);
    let u = f.arena.mul(w, co);
    potential(&mut f, &[u]);
    let (texts, incomplete) = found(&mut f, &[0, 1, 2], &[]);
    assert_eq!(texts, ["* ψ̇ + cos θ φ̇", "* (C + (A - C) sin² θ) φ̇ + C cos θ ψ̇"]);
    assert!(incomplete.unwrap().contains("products of Killing fields"));
}

#[test]
fn the_search_ends_with_its_budget() {
    // Four coordinates take some hundred thousand nodes; with fewer it stops, and nothing is told.
    let mut f = oscillator(&["x", "y", "u", "v"]);
    let before = f.budget.left();
    found(&mut f, &[], &[]);
    let spent = before - f.budget.left();
    assert!(spent < 300_000, "{spent}");
    let mut f = oscillator(&["x", "y", "u", "v"]);
    f.budget = leastwise_algebra::Budget::new(spent / 4);
    let model = f.model.clone();
    let scope = Scope { degree: 2, angles: Vec::new(), quadratic: true };
    assert_eq!(integrals(&mut f.cx(), &model, &scope, &[]), Err(leastwise_algebra::Stopped::TooLarge));
}

#[test]
fn functions_of_parameters_are_constants() {
    // A block on a wedge falls evenly in both coordinates: all follows from momenta and boosts.
    let mut f = Fixture::new();
    let [m, wedge, slope, g] = ["m", "M", "α", "g"].map(|p| f.parameter(p));
    let ((x, a), (s, b)) = (f.coordinate("X"), f.coordinate("s"));
    let (sin, cos) = (f.arena.call(Function::Sin, &[slope]), f.arena.call(Function::Cos, &[slope]));
    let (across, down) = (f.arena.mul(cos, b), f.arena.mul(sin, b));
    let across = f.arena.add(a, across);
    let parts = [f.half_square(wedge, a), f.half_square(m, across), f.half_square(m, down)];
    f.term(TermKind::Kinetic, "motion", &parts);
    let u = f.arena.product(&[m, g, sin, s]);
    f.term(TermKind::Lagrangian, "weight", &[u]);
    let model = f.model.clone();
    let scope = Scope { degree: 2, angles: Vec::new(), quadratic: true };
    let found = crate::search::search(&mut f.cx(), &model, &scope, &[], &mut |_| ()).unwrap();
    assert_eq!(found.incomplete, None);
    assert!(found.items.iter().all(|i| i.origin != Origin::Quadratic), "{:?}", found.items.len());
    let _ = x;
}
