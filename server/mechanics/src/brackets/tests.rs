//! Textbook algebras, with signs worked by hand.

use super::*;
use crate::fixture::{Fixture, double_pendulum, kepler, rod};
use crate::lagrange::lagrangian;
use crate::model::TermKind;

fn charges(list: &[(&str, Expr)]) -> Vec<Charge> {
    list.iter().map(|&(name, value)| Charge { name: name.into(), value }).collect()
}

fn examine(f: &mut Fixture, list: &[(&str, Expr)]) -> ChargeAlgebra {
    let model = f.model.clone();
    charge_algebra(&mut f.cx(), &model, &charges(list)).unwrap().expect("brackets")
}

/// That {left, right} was found to be `want`, and is not minus that, nor half of it.
fn check(f: &mut Fixture, list: &[(&str, Expr)], a: &ChargeAlgebra, (left, right): (usize, usize), want: Expr) {
    let b = a.brackets.iter().find(|b| (b.left, b.right) == (left, right)).expect("the pair");
    let Outcome::Closed(found) = &b.outcome else { panic!("{:?}", b.outcome) };
    let values: Vec<Expr> = list.iter().map(|c| c.1).collect();
    let got = value(&mut f.cx(), &values, found).unwrap();
    assert!(f.cx().vanishes(&[(got, Rational::ONE), (want, Rational::MINUS_ONE)]).is_proved());
    if want != Arena::ZERO {
        assert!(f.cx().vanishes(&[(got, Rational::ONE), (want, Rational::ONE)]).is_refuted());
        assert!(f.cx().vanishes(&[(got, Rational::ONE), (want, Rational::HALF.neg())]).is_refuted());
    }
}

fn names(a: &ChargeAlgebra) -> Vec<Option<&str>> {
    a.named.iter().map(|n| n.name.as_deref()).collect()
}

/// Free motion in `axes`: positions, velocities, and the mass.
fn free(axes: &[&str]) -> (Fixture, Vec<(Expr, Expr)>, Expr) {
    let mut f = Fixture::new();
    let q: Vec<(Expr, Expr)> = axes.iter().map(|a| f.coordinate(a)).collect();
    let m = f.parameter("m");
    let parts: Vec<Expr> = q.iter().map(|q| f.half_square(m, q.1)).collect();
    f.term(TermKind::Kinetic, "body", &parts);
    (f, q, m)
}

/// m (a ḃ − b ȧ).
fn angular(f: &mut Fixture, m: Expr, a: (Expr, Expr), b: (Expr, Expr)) -> Expr {
    let (x, y) = (f.arena.mul(a.0, b.1), f.arena.mul(b.0, a.1));
    let l = f.arena.sub(x, y);
    f.arena.mul(m, l)
}

#[test]
fn a_charge_in_a_uniform_field() {
    // L = ½ m v² + ½ q B (x ẏ − y ẋ): {m ẋ, m ẏ} = q B; ∂L/∂ẋ and ∂L/∂ẏ themselves commute [GPS §9.7; LL §42].
    let (mut f, q, m) = free(&["x", "y"]);
    let qb = {
        let (e, b) = (f.parameter("q"), f.parameter("B"));
        f.arena.mul(e, b)
    };
    let area = angular(&mut f, qb, q[0], q[1]);
    let half = f.arena.scale(area, &Rational::HALF);
    f.term(TermKind::Lagrangian, "field", &[half]);
    let (px, py) = (f.arena.mul(m, q[0].1), f.arena.mul(m, q[1].1));
    let list = [("m vx", px), ("m vy", py)];
    let a = examine(&mut f, &list);
    check(&mut f, &list, &a, (0, 1), qb);
    assert_eq!(a.central_constants, [qb]);
    assert_eq!(names(&a), [Some("Heisenberg algebra")]);
    // The charges of the translations, m ẋ − q B y and m ẏ + q B x: the bracket has the other sign.
    let (by, bx) = (f.arena.mul(qb, q[1].0), f.arena.mul(qb, q[0].0));
    let (tx, ty) = (f.arena.sub(px, by), f.arena.add(py, bx));
    let list = [("tx", tx), ("ty", ty), ("m vx", px)];
    let a = examine(&mut f, &list);
    let minus = f.arena.neg(qb);
    check(&mut f, &list, &a, (0, 1), minus);
    // Guiding centre and velocity do not see each other.
    check(&mut f, &list, &a, (1, 2), Arena::ZERO);
    // All charges of the plane: with L_z = m (x ẏ − y ẋ) + ½ q B r² as {L_z, tx} = ty, and the energy aside.
    let l = angular(&mut f, m, q[0], q[1]);
    let (x2, y2) = (f.half_square(qb, q[0].0), f.half_square(qb, q[1].0));
    let lz = f.arena.sum(&[l, x2, y2]);
    let (hx, hy) = (f.half_square(m, q[0].1), f.half_square(m, q[1].1));
    let h = f.arena.add(hx, hy);
    let list = [("tx", tx), ("ty", ty), ("Lz", lz), ("energy", h)];
    let a = examine(&mut f, &list);
    let minus = f.arena.neg(ty);
    check(&mut f, &list, &a, (0, 2), minus);
    assert_eq!(a.central, [3]);
    assert_eq!(names(&a), [Some("oscillator algebra ⊕ ℝ")]);
}

#[test]
fn angular_momentum_is_so3() {
    let (mut f, q, m) = free(&["x", "y", "z"]);
    let l: Vec<Expr> = (0..3).map(|i| angular(&mut f, m, q[(i + 1) % 3], q[(i + 2) % 3])).collect();
    // {L_x, L_y} = L_z [GPS §9.7].
    let list = [("Lx", l[0]), ("Ly", l[1]), ("Lz", l[2])];
    let a = examine(&mut f, &list);
    check(&mut f, &list, &a, (0, 1), l[2]);
    let minus = f.arena.neg(l[1]);
    check(&mut f, &list, &a, (0, 2), minus);
    assert_eq!(names(&a), [Some("so(3)")]);
    assert!(a.central.is_empty() && a.closed());
    // {L_z, p_x} = p_y; with p_x, p_y it is the plane's motions.
    let (px, py) = (f.arena.mul(m, q[0].1), f.arena.mul(m, q[1].1));
    let list = [("Lz", l[2]), ("px", px), ("py", py)];
    let a = examine(&mut f, &list);
    check(&mut f, &list, &a, (0, 1), py);
    assert_eq!(names(&a), [Some("e(2)")]);
    // Two components alone do not close, and it is said.
    let a = examine(&mut f, &[("Lx", l[0]), ("Ly", l[1])]);
    assert!(matches!(a.brackets[0].outcome, Outcome::NotClosed(_)) && a.named.is_empty());
}

/// Momenta, boosts m q − p t, energy, and the rotations of a free particle.
fn galilei(axes: &[&str]) -> (Fixture, Vec<(String, Expr)>, Expr) {
    let (mut f, q, m) = free(axes);
    let t = f.time();
    let mut list = Vec::new();
    let (mut momenta, mut boosts, mut energy) = (Vec::new(), Vec::new(), Vec::new());
    for (k, axis) in axes.iter().enumerate() {
        let p = f.arena.mul(m, q[k].1);
        let (mx, pt) = (f.arena.mul(m, q[k].0), f.arena.mul(p, t));
        momenta.push((format!("p{axis}"), p));
        boosts.push((format!("g{axis}"), f.arena.sub(mx, pt)));
        energy.push(f.half_square(m, q[k].1));
    }
    let h = f.arena.sum(&energy);
    list.extend(momenta);
    list.extend(boosts);
    list.push(("energy".into(), h));
    for k in 0..axes.len() {
        for l in 0..k {
            list.push((format!("L{l}{k}"), angular(&mut f, m, q[l], q[k])));
        }
    }
    (f, list, m)
}

#[test]
fn the_mass_is_the_central_charge_of_boosts() {
    for (axes, name) in [
        (&["x"][..], "Galilei algebra of the line, centrally extended"),
        (&["x", "y"], "Galilei algebra of the plane, centrally extended"),
        (&["x", "y", "z"], "Galilei algebra of space, centrally extended"),
    ] {
        let (mut f, list, m) = galilei(axes);
        let list: Vec<(&str, Expr)> = list.iter().map(|(n, e)| (n.as_str(), *e)).collect();
        let a = examine(&mut f, &list);
        let n = axes.len();
        // {p, m x − p t} = −m; {m x − p t, p²/2m} = p [Lévy-Leblond 1971].
        let minus = f.arena.neg(m);
        check(&mut f, &list, &a, (0, n), minus);
        check(&mut f, &list, &a, (n, 2 * n), list[0].1);
        check(&mut f, &list, &a, (0, 2 * n), Arena::ZERO);
        assert_eq!(a.central_constants, [m]);
        assert_eq!(names(&a), [Some(name)]);
    }
}

#[test]
fn dilation_and_expansion_of_the_plane() {
    // With D = 2 t E − x·p and K = t² E − t x·p + ½ m x² beside Galilei's: sl(2,ℝ) on what is solvable [Niederer 1972].
    let (mut f, list, m) = galilei(&["x", "y"]);
    let mut list: Vec<(&str, Expr)> = list.iter().map(|(n, e)| (n.as_str(), *e)).collect();
    let t = f.time();
    let (x, y) =
        (f.model.coordinates[0].clone().jet(&mut f.arena, 0), f.model.coordinates[1].clone().jet(&mut f.arena, 0));
    let (a, b) = (f.arena.mul(x, list[0].1), f.arena.mul(y, list[1].1));
    let xp = f.arena.add(a, b);
    let te = f.arena.mul(t, list[4].1);
    let d = f.arena.linear(&[(te, Rational::integer(2)), (xp, Rational::MINUS_ONE)]);
    let (tte, txp) = (f.arena.mul(t, te), f.arena.mul(t, xp));
    let (hx, hy) = (f.half_square(m, x), f.half_square(m, y));
    let k =
        f.arena.linear(&[(tte, Rational::ONE), (txp, Rational::MINUS_ONE), (hx, Rational::ONE), (hy, Rational::ONE)]);
    list.extend([("dilation", d), ("expansion", k)]);
    let got = examine(&mut f, &list);
    // {E, K} = D: {p²/2m, m x²/2} = −x·p at t = 0.
    check(&mut f, &list, &got, (4, 7), d);
    assert!(got.closed());
    assert_eq!(got.named[0].name, None);
    assert_eq!(got.named[0].kind, "semidirect sum of sl(2,ℝ) and a solvable radical of dimension 6");
    // Energy, dilation and expansion alone: the conformal algebra of the clock, not called so(2,1) as that of orbits is.
    let alone = examine(&mut f, &[list[4], ("dilation", d), ("expansion", k)]);
    assert_eq!(names(&alone), [Some("sl(2,ℝ)")]);
}

#[test]
fn two_bodies_have_the_total_mass_as_central_charge() {
    let (mut f, q, m1) = free(&["x₁"]);
    let (x2, v2) = f.coordinate("x₂");
    let m2 = f.parameter("m₂");
    let part = f.half_square(m2, v2);
    f.term(TermKind::Kinetic, "second", &[part]);
    let t = f.time();
    let (p1, p2) = (f.arena.mul(m1, q[0].1), f.arena.mul(m2, v2));
    let p = f.arena.add(p1, p2);
    let (a, b, c) = (f.arena.mul(m1, q[0].0), f.arena.mul(m2, x2), f.arena.mul(p, t));
    let sum = f.arena.add(a, b);
    let g = f.arena.sub(sum, c);
    let list = [("g", g), ("p", p)];
    let found = examine(&mut f, &list);
    let total = f.arena.add(m1, m2);
    check(&mut f, &list, &found, (0, 1), total);
    assert_eq!(names(&found), [Some("Heisenberg algebra")]);
}

/// A = p × L − m k r̂ in the plane of motion, with L = m (x ẏ − y ẋ).
fn orbit() -> (Fixture, Vec<(&'static str, Expr)>, Expr) {
    let mut f = kepler();
    let q: Vec<(Expr, Expr)> = {
        let list = f.model.coordinates.clone();
        list.iter().map(|q| (q.jet(&mut f.arena, 0), q.jet(&mut f.arena, 1))).collect()
    };
    let (m, k) = (f.parameter("m"), f.parameter("k"));
    let l = angular(&mut f, m, q[0], q[1]);
    let (x2, y2) = (f.arena.pow(q[0].0, 2), f.arena.pow(q[1].0, 2));
    let r2 = f.arena.add(x2, y2);
    let over_r = |f: &mut Fixture, e: Expr| f.arena.monomial(&[(e, Rational::ONE), (r2, Rational::HALF.neg())]);
    let potential = over_r(&mut f, k);
    let (tx, ty) = (f.half_square(m, q[0].1), f.half_square(m, q[1].1));
    let kinetic = f.arena.add(tx, ty);
    let energy = f.arena.sub(kinetic, potential);
    let mut out = vec![("energy", energy), ("L", l)];
    for (name, at, along, sign) in [("Ax", q[0].0, q[1].1, 1), ("Ay", q[1].0, q[0].1, -1)] {
        let first = f.arena.product(&[m, along, l]);
        let first = f.arena.scale(first, &Rational::integer(sign));
        let second = f.arena.product(&[m, k, at]);
        let second = over_r(&mut f, second);
        out.push((name, f.arena.sub(first, second)));
    }
    (f, out, m)
}

#[test]
fn an_orbit_in_the_plane_closes_with_the_energy() {
    // {L, A_x} = A_y, {A_x, A_y} = −2 m E L [GPS §9.7, there on bound orbits].
    let (mut f, list, m) = orbit();
    let a = examine(&mut f, &list);
    check(&mut f, &list, &a, (1, 2), list[3].1);
    let product = f.arena.product(&[m, list[0].1, list[1].1]);
    let want = f.arena.scale(product, &Rational::integer(-2));
    check(&mut f, &list, &a, (2, 3), want);
    assert_eq!(a.central, [0]);
    // The sign of m is not known: for E < 0 and E > 0 each sign has its name, for E = 0 it does not matter.
    assert_eq!(names(&a), [Some("so(2,1)"), Some("so(3)"), Some("e(2)"), Some("so(3)"), Some("so(2,1)")]);
    assert_eq!(a.named[2].conditions, [Condition::Charge(0, Sign::Zero)]);
    assert_eq!(a.named[0].conditions[1], Condition::Parameter(m, Sign::Negative));
    let (mut f, list, m) = orbit();
    let mut facts = leastwise_algebra::Assumptions::new();
    facts.assume(&mut f.arena, m, leastwise_algebra::Relation::Greater);
    f.zero.set_assumptions(facts);
    let a = examine(&mut f, &list);
    let want = [(Sign::Negative, "so(3)"), (Sign::Zero, "e(2)"), (Sign::Positive, "so(2,1)")];
    let got: Vec<(Vec<Condition>, Option<&str>)> =
        a.named.iter().map(|n| (n.conditions.clone(), n.name.as_deref())).collect();
    assert_eq!(got, want.map(|(s, n)| (vec![Condition::Charge(0, s)], Some(n))));
    // A vector with a wrong sign of k is not conserved, and its bracket does not close.
    let shifted = f.arena.scale(list[2].1, &Rational::integer(2));
    let first = f.arena.product(&[m, list[1].1]);
    let v = f.model.coordinates[1].clone().jet(&mut f.arena, 1);
    let first = f.arena.mul(first, v);
    let wrong = f.arena.linear(&[(shifted, Rational::HALF.neg()), (first, Rational::integer(2))]);
    let a = examine(&mut f, &[list[0], list[1], ("wrong", wrong), list[3]]);
    assert!(!a.closed() && a.named.is_empty());
}

#[test]
fn orbits_in_space_are_so4_below_zero_energy() {
    let (mut f, q, m) = free(&["x", "y", "z"]);
    let k = f.parameter("k");
    let squares: Vec<Expr> = q.iter().map(|q| f.arena.pow(q.0, 2)).collect();
    let r2 = f.arena.sum(&squares);
    let u = f.arena.monomial(&[(k, Rational::ONE), (r2, Rational::HALF.neg())]);
    let minus = f.arena.neg(u);
    f.term(TermKind::Potential, "gravity", &[minus]);
    let l: Vec<Expr> = (0..3).map(|i| angular(&mut f, m, q[(i + 1) % 3], q[(i + 2) % 3])).collect();
    let kinetic: Vec<Expr> = q.iter().map(|q| f.half_square(m, q.1)).collect();
    let kinetic = f.arena.sum(&kinetic);
    let energy = f.arena.sub(kinetic, u);
    let mut list = vec![("energy", energy), ("Lx", l[0]), ("Ly", l[1]), ("Lz", l[2])];
    for (i, name) in ["Ax", "Ay", "Az"].into_iter().enumerate() {
        // v × L − k r̂: {A_i, A_j} = −2 (E/m) ε L.
        let (j, n) = ((i + 1) % 3, (i + 2) % 3);
        let (a, b) = (f.arena.mul(q[j].1, l[n]), f.arena.mul(q[n].1, l[j]));
        let c = f.arena.mul(u, q[i].0);
        list.push((name, f.arena.linear(&[(a, Rational::ONE), (b, Rational::MINUS_ONE), (c, Rational::MINUS_ONE)])));
    }
    let mut facts = leastwise_algebra::Assumptions::new();
    facts.assume(&mut f.arena, m, leastwise_algebra::Relation::Greater);
    f.zero.set_assumptions(facts);
    let before = f.budget.left();
    let a = examine(&mut f, &list);
    assert!(before - f.budget.left() < 2_000_000, "{}", before - f.budget.left());
    check(&mut f, &list, &a, (1, 5), list[6].1);
    let product = f.arena.mul(energy, l[2]);
    let over_m = f.arena.div(product, m);
    let want = f.arena.scale(over_m, &Rational::integer(-2));
    check(&mut f, &list, &a, (4, 5), want);
    assert_eq!(names(&a), [Some("so(4)"), Some("e(3)"), Some("so(3,1)")]);
    assert_eq!(a.named[0].conditions, [Condition::Charge(0, Sign::Negative)]);
}

#[test]
fn a_curved_mass_matrix_is_solved() {
    // The sphere [LL §14 with r = 1]: L_z = p_φ and the two others, m = 1: L_x = −sin φ p_θ − cot θ cos φ p_φ, and cyclic.
    let mut f = Fixture::new();
    let (th, vt) = f.coordinate("θ");
    let (ph, vp) = f.coordinate("φ");
    let call = |f: &mut Fixture, name, e| f.arena.call(name, &[e]);
    use leastwise_algebra::Function::{Cos, Sin};
    let (s, c) = (call(&mut f, Sin, th), call(&mut f, Cos, th));
    let (sp, cp) = (call(&mut f, Sin, ph), call(&mut f, Cos, ph));
    let s2 = f.arena.pow(s, 2);
    let (a, b) = (f.half_square(Arena::ONE, vt), f.half_square(s2, vp));
    f.term(TermKind::Kinetic, "point", &[a, b]);
    let lz = f.arena.mul(s2, vp);
    let (u, w) = (f.arena.mul(sp, vt), f.arena.product(&[s, c, cp, vp]));
    let lx = f.arena.linear(&[(u, Rational::MINUS_ONE), (w, Rational::MINUS_ONE)]);
    let (u, w) = (f.arena.mul(cp, vt), f.arena.product(&[s, c, sp, vp]));
    let ly = f.arena.sub(u, w);
    let list = [("Lx", lx), ("Ly", ly), ("Lz", lz)];
    let got = examine(&mut f, &list);
    check(&mut f, &list, &got, (0, 1), lz);
    assert_eq!(names(&got), [Some("so(3)")]);
}

#[test]
fn an_isotropic_oscillator_and_what_depends_on_what() {
    // L and the Fradkin tensor's traceless part close to so(3), the energy is central [GPS §9.7 with ω = √(k/m)].
    let (mut f, q, m) = free(&["x", "y"]);
    let k = f.parameter("k");
    let (ux, uy) = (f.half_square(k, q[0].0), f.half_square(k, q[1].0));
    f.term(TermKind::Potential, "spring", &[ux, uy]);
    let (tx, ty) = (f.half_square(m, q[0].1), f.half_square(m, q[1].1));
    let (fx, fy) = (f.arena.add(tx, ux), f.arena.add(ty, uy));
    let (a, b) = (f.arena.product(&[m, q[0].1, q[1].1]), f.arena.product(&[k, q[0].0, q[1].0]));
    let fxy = f.arena.add(a, b);
    let l = angular(&mut f, m, q[0], q[1]);
    let energy = f.arena.add(fx, fy);
    let mut facts = leastwise_algebra::Assumptions::new();
    for p in [m, k] {
        facts.assume(&mut f.arena, p, leastwise_algebra::Relation::Greater);
    }
    f.zero.set_assumptions(facts);
    let list = [("energy", energy), ("L", l), ("Fxx", fx), ("Fxy", fxy), ("Fyy", fy)];
    let got = examine(&mut f, &list);
    // F_yy = E − F_xx.
    assert_eq!(got.basis, [0, 1, 2, 3]);
    assert_eq!(got.dependent.len(), 1);
    assert_eq!(got.dependent[0].combination.len(), 2);
    assert_eq!(names(&got), [Some("so(3) ⊕ ℝ")]);
}

#[test]
fn what_has_no_brackets_is_refused() {
    let (mut f, px) = rod(false);
    let model = f.model.clone();
    let got = charge_algebra(&mut f.cx(), &model, &charges(&[("p", px)])).unwrap();
    assert_eq!(got, Err(Refusal::Constraints));
    // L = y ẋ.
    let mut f = Fixture::new();
    let (x, vx) = f.coordinate("x");
    let (y, _) = f.coordinate("y");
    let l = f.arena.mul(y, vx);
    f.term(TermKind::Lagrangian, "first order", &[l]);
    let model = f.model.clone();
    let got = charge_algebra(&mut f.cx(), &model, &charges(&[("x", x), ("y", y)])).unwrap();
    assert_eq!(got, Err(Refusal::Singular));
}

/// Coordinates and momenta are canonical pairs, and {p, h} = ∂L/∂q [GPS §9.5], whatever couples the velocities.
fn check_canonical(mut f: Fixture) {
    let model = f.model.clone();
    let mut cx = f.cx();
    let rows = mass_rows(&mut cx, &model).unwrap();
    let phase = Phase::new(&mut cx, &model, &rows).unwrap().expect("a regular matrix");
    let l = lagrangian(&mut cx, &model).unwrap();
    let (mut q, mut p, mut h, mut forces) = (Vec::new(), Vec::new(), vec![(l, Rational::MINUS_ONE)], Vec::new());
    for c in &model.coordinates {
        let (x, v) = (c.jet(cx.arena, 0), c.jet(cx.arena, 1));
        let momentum = cx.arena.partial(l, v, cx.budget).unwrap();
        h.push((cx.arena.mul(momentum, v), Rational::ONE));
        q.push(phase.flow(&mut cx, x).unwrap());
        p.push(phase.flow(&mut cx, momentum).unwrap());
        forces.push(cx.arena.partial(l, x, cx.budget).unwrap());
    }
    let h = cx.arena.linear(&h);
    let h = phase.flow(&mut cx, h).unwrap();
    for i in 0..q.len() {
        for j in 0..q.len() {
            let delta = if i == j { Arena::ONE } else { Arena::ZERO };
            assert!(phase.equals(&mut cx, &q[i], &p[j], delta).is_proved());
            assert!(phase.equals(&mut cx, &p[i], &p[j], Arena::ZERO).is_proved());
            assert!(phase.equals(&mut cx, &q[i], &q[j], Arena::ZERO).is_proved());
            // The inverse on the graph says the same.
            let built = phase.bracket(&mut cx, &q[i], &p[j]).unwrap();
            assert!(cx.vanishes(&[(built, Rational::ONE), (delta, Rational::MINUS_ONE)]).is_proved());
        }
        assert!(phase.equals(&mut cx, &p[i], &h, forces[i]).is_proved());
        let minus = cx.arena.neg(forces[i]);
        assert!(phase.equals(&mut cx, &p[i], &h, minus).is_refuted());
    }
}

#[test]
fn momenta_of_coupled_coordinates_are_canonical() {
    check_canonical(double_pendulum());
    // Three coordinates, all coupled, with a gyroscopic term and a mass that moves.
    let mut f = Fixture::new();
    let q: Vec<(Expr, Expr)> = ["x", "y", "z"].iter().map(|a| f.coordinate(a)).collect();
    let m = f.parameter("m");
    for i in 0..3 {
        let sum = f.arena.add(q[i].1, q[(i + 1) % 3].1);
        let x2 = f.arena.pow(q[i].0, 2);
        let heavy = f.arena.add(m, x2);
        let part = f.half_square(heavy, sum);
        let turning = f.arena.product(&[m, q[i].0, q[(i + 2) % 3].1]);
        f.term(TermKind::Lagrangian, "pair", &[part, turning]);
        let u = f.arena.product(&[m, q[i].0, q[(i + 1) % 3].0]);
        f.term(TermKind::Potential, "spring", &[u]);
    }
    check_canonical(f);
}

#[test]
fn a_spent_budget_stops() {
    let (mut f, list, _) = orbit();
    f.budget = leastwise_algebra::Budget::new(500);
    let model = f.model.clone();
    assert_eq!(charge_algebra(&mut f.cx(), &model, &charges(&list)), Err(Stopped::TooLarge));
}
