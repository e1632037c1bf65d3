//! Textbook systems and all that the search finds in them.

use super::super::{Found, Origin, Scope, search};
use crate::fixture::{Fixture, kepler};
use crate::model::TermKind;
use leastwise_algebra::{Arena, Budget, DisplayOptions, Expr, Function, Rational, textbook};

fn text(f: &mut Fixture, e: Expr) -> String {
    textbook(&mut f.arena, e, &DisplayOptions::default(), &mut Budget::new(1 << 22)).text()
}

/// The generators that are found, and their charges: `x → 1, y → 0: m ẋ`; what is not moved is left out.
#[track_caller]
fn check(f: &mut Fixture, angles: &[usize], degree: u32, expected: &[&str]) -> Found {
    let scope = Scope { degree, angles: angles.to_vec(), quadratic: false };
    f.budget = Budget::new(200_000_000);
    let before = f.budget.left();
    let model = std::mem::replace(&mut f.model, Fixture::new().model);
    let found = search(&mut f.cx(), &model, &scope, &[], &mut |_| {}).expect("within the budget");
    f.model = model;
    let spent = before - f.budget.left();
    assert!(spent < 20_000_000, "{spent} nodes");
    let mut told = Vec::new();
    for item in &found.items {
        let Origin::Symmetry { generator, .. } = &item.origin else { panic!("a quadratic integral") };
        let mut parts = Vec::new();
        if generator.tau != Arena::ZERO {
            parts.push(format!("t → {}", text(f, generator.tau)));
        }
        for (i, &eta) in generator.eta.iter().enumerate() {
            if eta != Arena::ZERO {
                let q = f.arena.name(f.model.coordinates[i].symbol);
                parts.push(format!("{q} → {}", text(f, eta)));
            }
        }
        told.push(format!("{}: {}", parts.join(", "), text(f, item.charge)));
    }
    assert_eq!(told, expected, "incomplete: {:?}, {spent} nodes", found.incomplete);
    found
}

fn particle(of: &[&str]) -> (Fixture, Vec<(Expr, Expr)>, Expr) {
    let mut f = Fixture::new();
    let m = f.parameter("m");
    let list: Vec<(Expr, Expr)> = of.iter().map(|q| f.coordinate(q)).collect();
    let parts: Vec<Expr> = list.iter().map(|&(_, v)| f.half_square(m, v)).collect();
    f.term(TermKind::Kinetic, "motion", &parts);
    (f, list, m)
}

/// c (x² + y² + …)^n.
fn power(f: &mut Fixture, c: Expr, of: &[(Expr, Expr)], n: Rational) -> Expr {
    let squares: Vec<Expr> = of.iter().map(|&(q, _)| f.arena.pow(q, 2)).collect();
    let r2 = f.arena.sum(&squares);
    f.arena.monomial(&[(c, Rational::ONE), (r2, n)])
}

/// The Schrödinger algebra with the mass as its centre [Niederer, Helv. Phys. Acta 45 (1972) 802].
#[test]
fn a_free_particle_in_the_plane() {
    let (mut f, ..) = particle(&["x", "y"]);
    check(
        &mut f,
        &[],
        2,
        &[
            "x → 1: m ẋ",
            "y → 1: m ẏ",
            "x → -y, y → x: m (x ẏ - y ẋ)",
            "t → 1: -1/2 m (ẋ² + ẏ²)",
            "x → t: m (t ẋ - x)",
            "y → t: m (t ẏ - y)",
            "t → 2 t, x → x, y → y: m (x ẋ + y ẏ) - m t (ẋ² + ẏ²)",
            "t → t², x → t x, y → t y: m t (x ẋ + y ẏ) - 1/2 m (t² (ẋ² + ẏ²) + x² + y²)",
        ],
    );
}

#[test]
fn a_free_particle_in_space() {
    let (mut f, ..) = particle(&["x", "y", "z"]);
    check(
        &mut f,
        &[],
        2,
        &[
            "x → 1: m ẋ",
            "y → 1: m ẏ",
            "z → 1: m ż",
            "x → -y, y → x: m (x ẏ - y ẋ)",
            "x → z, z → -x: m (z ẋ - x ż)",
            "y → -z, z → y: m (y ż - z ẏ)",
            "t → 1: -1/2 m (ẋ² + ẏ² + ż²)",
            "x → t: m (t ẋ - x)",
            "y → t: m (t ẏ - y)",
            "z → t: m (t ż - z)",
            "t → 2 t, x → x, y → y, z → z: m (x ẋ + y ẏ + z ż) - m t (ẋ² + ẏ² + ż²)",
            "t → t², x → t x, y → t y, z → t z: m t (x ẋ + y ẏ + z ż) - 1/2 m (t² (ẋ² + ẏ² + ż²) + x² + y² + z²)",
        ],
    );
}

#[test]
fn an_isotropic_oscillator() {
    let (mut f, list, _) = particle(&["x", "y"]);
    let k = f.parameter("k");
    let u = power(&mut f, k, &list, Rational::ONE);
    f.term(TermKind::Potential, "spring", &[u]);
    check(&mut f, &[], 2, &["x → -y, y → x: m (x ẏ - y ẋ)", "t → 1: -1/2 m (ẋ² + ẏ²) - k (x² + y²)"]);
}

#[test]
fn a_planet() {
    let mut f = kepler();
    check(&mut f, &[], 2, &["x → -y, y → x: m (x ẏ - y ẋ)", "t → 1: k/√(x² + y²) - 1/2 m (ẋ² + ẏ²)"]);
}

#[test]
fn a_planet_in_space() {
    let (mut f, list, _) = particle(&["x", "y", "z"]);
    let k = f.parameter("k");
    let u = power(&mut f, k, &list, Rational::HALF.neg());
    f.term(TermKind::Lagrangian, "gravity", &[u]);
    check(
        &mut f,
        &[],
        2,
        &[
            "x → -y, y → x: m (x ẏ - y ẋ)",
            "x → z, z → -x: m (z ẋ - x ż)",
            "y → -z, z → y: m (y ż - z ẏ)",
            "t → 1: k/√(x² + y² + z²) - 1/2 m (ẋ² + ẏ² + ż²)",
        ],
    );
}

#[test]
fn a_planet_in_polar_coordinates() {
    let mut f = Fixture::new();
    let (r, vr) = f.coordinate("r");
    let (_, vp) = f.coordinate("φ");
    let (m, k) = (f.parameter("m"), f.parameter("k"));
    let r2 = f.arena.pow(r, 2);
    let mr2 = f.arena.mul(m, r2);
    let parts = [f.half_square(m, vr), f.half_square(mr2, vp)];
    f.term(TermKind::Kinetic, "motion", &parts);
    let u = f.arena.div(k, r);
    f.term(TermKind::Lagrangian, "gravity", &[u]);
    check(&mut f, &[1], 2, &["φ → 1: m r² φ̇", "t → 1: k/r - 1/2 m (ṙ² + r² φ̇²)"]);
}

#[test]
fn a_free_particle_in_polar_coordinates() {
    let mut f = Fixture::new();
    let (r, vr) = f.coordinate("r");
    let (_, vp) = f.coordinate("φ");
    let m = f.parameter("m");
    let r2 = f.arena.pow(r, 2);
    let mr2 = f.arena.mul(m, r2);
    let parts = [f.half_square(m, vr), f.half_square(mr2, vp)];
    f.term(TermKind::Kinetic, "motion", &parts);
    check(
        &mut f,
        &[1],
        2,
        &[
            "φ → 1: m r² φ̇",
            "r → sin φ, φ → cos φ/r: m (sin φ ṙ + r cos φ φ̇)",
            "r → cos φ, φ → -sin φ/r: m (cos φ ṙ - r sin φ φ̇)",
            "t → 1: -1/2 m (ṙ² + r² φ̇²)",
            "r → t sin φ, φ → t cos φ/r: m (sin φ (t ṙ - r) + t r cos φ φ̇)",
            "r → t cos φ, φ → -t sin φ/r: m (cos φ (t ṙ - r) - t r sin φ φ̇)",
            "t → 2 t, r → r: m r ṙ - m t (ṙ² + r² φ̇²)",
            "t → t², r → t r: m t r ṙ - 1/2 m (t² (ṙ² + r² φ̇²) + r²)",
        ],
    );
}

/// A particle on a sphere, and its three angular momenta [LL §9].
#[test]
fn a_sphere() {
    let mut f = Fixture::new();
    let (th, vt) = f.coordinate("θ");
    let (_, vp) = f.coordinate("φ");
    let m = f.parameter("m");
    let s = f.arena.call(Function::Sin, &[th]);
    let s2 = f.arena.pow(s, 2);
    let ms2 = f.arena.mul(m, s2);
    let parts = [f.half_square(m, vt), f.half_square(ms2, vp)];
    f.term(TermKind::Kinetic, "motion", &parts);
    check(
        &mut f,
        &[0, 1],
        2,
        &[
            "φ → 1: m sin² θ φ̇",
            "θ → sin φ, φ → cos θ cos φ/sin θ: m (sin φ θ̇ + sin θ cos θ cos φ φ̇)",
            "θ → cos φ, φ → -cos θ sin φ/sin θ: m (cos φ θ̇ - sin θ cos θ sin φ φ̇)",
            "t → 1: -1/2 m (θ̇² + sin² θ φ̇²)",
        ],
    );
}

/// In the potential k/r² dilation and expansion hold, too [Jackiw, Physics Today 25 (1972) 23].
#[test]
fn the_inverse_square() {
    let (mut f, list, _) = particle(&["x", "y"]);
    let k = f.parameter("k");
    let u = power(&mut f, k, &list, Rational::MINUS_ONE);
    f.term(TermKind::Potential, "core", &[u]);
    check(
        &mut f,
        &[],
        2,
        &[
            "x → -y, y → x: m (x ẏ - y ẋ)",
            "t → 1: -1/2 m (ẋ² + ẏ²) - k/(x² + y²)",
            "t → 2 t, x → x, y → y: m (x ẋ + y ẏ) - m t (ẋ² + ẏ²) - 2 k t/(x² + y²)",
            "t → t², x → t x, y → t y: m t (x ẋ + y ẏ) - 1/2 m (t² (ẋ² + ẏ²) + x² + y²) - k t²/(x² + y²)",
        ],
    );
}

fn charge_in_a_field(landau: bool) -> Fixture {
    let (mut f, list, _) = particle(&["x", "y"]);
    let [(x, vx), (y, vy)] = list[..] else { unreachable!() };
    let (q, b) = (f.parameter("q"), f.parameter("B"));
    let qb = f.arena.mul(q, b);
    let first = f.arena.product(&[qb, x, vy]);
    if landau {
        f.term(TermKind::Lagrangian, "field", &[first]);
    } else {
        let second = f.arena.product(&[qb, y, vx]);
        let parts = [(first, Rational::HALF), (second, Rational::HALF.neg())];
        let parts = parts.map(|(e, c)| f.arena.scale(e, &c));
        f.term(TermKind::Lagrangian, "field", &parts);
    }
    f
}

/// Both translations, the rotation and the energy hold in either gauge [LL2 §21].
#[test]
fn a_charge_in_a_uniform_field() {
    check(
        &mut charge_in_a_field(false),
        &[],
        2,
        &[
            "x → 1: m ẋ - q B y",
            "y → 1: m ẏ + q B x",
            "x → -y, y → x: m (x ẏ - y ẋ) + 1/2 q B (x² + y²)",
            "t → 1: -1/2 m (ẋ² + ẏ²)",
        ],
    );
}

#[test]
fn a_charge_in_the_landau_gauge() {
    check(
        &mut charge_in_a_field(true),
        &[],
        2,
        &[
            "x → 1: m ẋ - q B y",
            "y → 1: m ẏ + q B x",
            "x → -y, y → x: m (x ẏ - y ẋ) + 1/2 q B (x² + y²)",
            "t → 1: -1/2 m (ẋ² + ẏ²)",
        ],
    );
}

/// [Hénon & Heiles, Astron. J. 69 (1964) 73].
#[test]
fn henon_heiles() {
    let (mut f, list, _) = particle(&["x", "y"]);
    let [(x, _), (y, _)] = list[..] else { unreachable!() };
    let (k, a) = (f.parameter("k"), f.parameter("a"));
    let u = power(&mut f, k, &list, Rational::ONE);
    let (x2, y3) = (f.arena.pow(x, 2), f.arena.pow(y, 3));
    let (first, second) = (f.arena.product(&[a, x2, y]), f.arena.mul(a, y3));
    let second = f.arena.scale(second, &Rational::new(-1, 3).unwrap());
    f.term(TermKind::Potential, "well", &[u, first, second]);
    check(&mut f, &[], 2, &["t → 1: 1/3 a y³ - 1/2 m (ẋ² + ẏ²) - k (x² + y²) - a x² y"]);
}

#[test]
fn a_stone() {
    let (mut f, list, m) = particle(&["x", "z"]);
    let g = f.parameter("g");
    let u = f.arena.product(&[m, g, list[1].0]);
    f.term(TermKind::Potential, "weight", &[u]);
    check(
        &mut f,
        &[],
        2,
        &[
            "x → 1: m ẋ",
            "z → 1: m (ż + g t)",
            "t → 1: -1/2 m (ẋ² + ż²) - m g z",
            "x → t: m (t ẋ - x)",
            "z → t: m (t ż - z) + 1/2 m g t²",
            "x → -2 z - g t², z → 2 x: m (2 x (ż + g t) - (2 z + g t²) ẋ)",
            "t → 4 t, x → 2 x, z → 2 z - 3 g t²: 2 m (x ẋ - t (ẋ² + ż²) + g t z) + m (2 z - 3 g t²) ż - m g² t³",
        ],
    );
}

#[test]
fn two_bodies_on_a_line() {
    let mut f = Fixture::new();
    let ((x, vx), (y, vy)) = (f.coordinate("x₁"), f.coordinate("x₂"));
    let (m1, m2, k) = (f.parameter("m₁"), f.parameter("m₂"), f.parameter("k"));
    let parts = [f.half_square(m1, vx), f.half_square(m2, vy)];
    f.term(TermKind::Kinetic, "motion", &parts);
    let d = f.arena.sub(x, y);
    let u = f.half_square(k, d);
    f.term(TermKind::Potential, "spring", &[u]);
    check(
        &mut f,
        &[],
        2,
        &[
            "x₁ → 1, x₂ → 1: m₁ ẋ₁ + m₂ ẋ₂",
            "t → 1: -1/2 m₁ ẋ₁² - 1/2 m₂ ẋ₂² - 1/2 k (x₂ - x₁)²",
            "x₁ → t, x₂ → t: m₁ (t ẋ₁ - x₁) + m₂ (t ẋ₂ - x₂)",
        ],
    );
}

/// The Lorentz boost moves the time with the position [LL2 §8].
#[test]
fn a_relativistic_particle() {
    let mut f = Fixture::new();
    let (_, v) = f.coordinate("x");
    let (m, c) = (f.parameter("m"), f.parameter("c"));
    let (c2, v2) = (f.arena.pow(c, 2), f.arena.pow(v, 2));
    let ratio = f.arena.div(v2, c2);
    let rest = f.arena.sub(Arena::ONE, ratio);
    let root = f.arena.sqrt(rest);
    let e = f.arena.product(&[m, c2, root]);
    let e = f.arena.neg(e);
    f.term(TermKind::Lagrangian, "free", &[e]);
    check(
        &mut f,
        &[],
        1,
        &[
            "t → 1: -m ẋ²/√(1 - ẋ²/c²) - m c² √(1 - ẋ²/c²)",
            "x → 1: m ẋ/√(1 - ẋ²/c²)",
            "t → x, x → c² t: m ẋ (c² t - x ẋ)/√(1 - ẋ²/c²) - m c² x √(1 - ẋ²/c²)",
        ],
    );
}

/// A symmetric top with one point fixed [LL §35].
#[test]
fn a_heavy_top() {
    let mut f = Fixture::new();
    let (th, vt) = f.coordinate("θ");
    let ((_, vp), (_, vs)) = (f.coordinate("φ"), f.coordinate("ψ"));
    let (a, c, w) = (f.parameter("A"), f.parameter("C"), f.parameter("w"));
    let (s, co) = (f.arena.call(Function::Sin, &[th]), f.arena.call(Function::Cos, &[th]));
    let s2 = f.arena.pow(s, 2);
    let as2 = f.arena.mul(a, s2);
    let along = f.arena.mul(vp, co);
    let along = f.arena.add(vs, along);
    let parts = [f.half_square(a, vt), f.half_square(as2, vp), f.half_square(c, along)];
    f.term(TermKind::Kinetic, "top", &parts);
    let u = f.arena.mul(w, co);
    f.term(TermKind::Potential, "weight", &[u]);
    check(
        &mut f,
        &[0, 1, 2],
        1,
        &[
            "φ → 1: A sin² θ φ̇ + C cos θ (ψ̇ + cos θ φ̇)",
            "ψ → 1: C (ψ̇ + cos θ φ̇)",
            "t → 1: -1/2 A (θ̇² + sin² θ φ̇²) - 1/2 C (ψ̇ + cos θ φ̇)² - w cos θ",
        ],
    );
}

/// Two masses in the plane on a line between them: all of the centre, and two rotations.
#[test]
fn a_pair_in_the_plane() {
    let mut f = Fixture::new();
    let q: Vec<(Expr, Expr)> = ["x", "y", "u", "v"].iter().map(|n| f.coordinate(n)).collect();
    let (m1, m2, k) = (f.parameter("m₁"), f.parameter("m₂"), f.parameter("k"));
    let parts: Vec<Expr> = q.iter().zip([m1, m1, m2, m2]).map(|(q, m)| f.half_square(m, q.1)).collect();
    f.term(TermKind::Kinetic, "motion", &parts);
    let d = [f.arena.sub(q[0].0, q[2].0), f.arena.sub(q[1].0, q[3].0)];
    let parts = d.map(|d| f.half_square(k, d));
    f.term(TermKind::Potential, "line", &parts);
    check(
        &mut f,
        &[],
        2,
        &[
            "x → 1, u → 1: m₂ u̇ + m₁ ẋ",
            "y → 1, v → 1: m₂ v̇ + m₁ ẏ",
            "x → -y, y → x, u → -v, v → u: m₂ (u v̇ - v u̇) + m₁ (x ẏ - y ẋ)",
            "x → (m₂ - m₁) y - m₂ v, y → m₂ u + (m₁ - m₂) x, u → -m₁ y, v → m₁ x: m₁ (m₂ (x v̇ - y u̇) - (m₂ v + (m₁ - m₂) y) ẋ + (m₂ u + (m₁ - m₂) x) ẏ)",
            "t → 1: -1/2 m₂ (u̇² + v̇²) - 1/2 m₁ (ẋ² + ẏ²) - 1/2 k ((u - x)² + (v - y)²)",
            "x → t, u → t: m₂ (t u̇ - u) + m₁ (t ẋ - x)",
            "y → t, v → t: m₂ (t v̇ - v) + m₁ (t ẏ - y)",
        ],
    );
}

/// L = b x ẏ − ½ k x² is of first order: p_y = b x and ½ k x² are constants, and nothing moves.
#[test]
fn a_degenerate_lagrangian() {
    let mut f = Fixture::new();
    let ((x, _), (_, vy)) = (f.coordinate("x"), f.coordinate("y"));
    let (b, k) = (f.parameter("b"), f.parameter("k"));
    let part = f.arena.product(&[b, x, vy]);
    f.term(TermKind::Lagrangian, "drift", &[part]);
    let u = f.half_square(k, x);
    f.term(TermKind::Potential, "spring", &[u]);
    let expected = [
        "t → 1: -1/2 k x²",
        "t → x: -1/3 k x³",
        "y → 1: b x",
        "x → b, y → k t: k b t x - b² y",
        "t → 2 t, x → -x, y → y: b x y - k t x²",
    ];
    let found = check(&mut f, &[], 1, &expected);
    assert!(found.incomplete.is_some());
}

/// ½ m (ẋ − ẏ)²: the shifts of x and of y have one charge.
#[test]
fn a_difference_alone() {
    let mut f = Fixture::new();
    let ((_, vx), (_, vy)) = (f.coordinate("x"), f.coordinate("y"));
    let m = f.parameter("m");
    let v = f.arena.sub(vx, vy);
    let part = f.half_square(m, v);
    f.term(TermKind::Kinetic, "relative", &[part]);
    let expected = [
        "t → 1: -1/2 m (ẋ - ẏ)²",
        "x → 1: m (ẋ - ẏ)",
        "x → t: m (t (ẋ - ẏ) - x + y)",
        "t → 2 t, x → x - y: m (t (ẏ - ẋ) + x - y) (ẋ - ẏ)",
    ];
    let found = check(&mut f, &[], 1, &expected);
    assert!(found.incomplete.is_some());
}
