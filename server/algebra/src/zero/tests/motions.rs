//! Rates along motions, determinants, ranks, parts that cancel.

use super::super::{Motion, Reason};
use super::*;

/// A plane oscillator with masses as given: m x'' = −k x and m y'' = −k y.
struct Plane {
    lab: Lab,
    x: [Expr; 2],
    v: [Expr; 2],
    m: Expr,
    motion: Motion,
}

fn plane() -> Plane {
    let mut l = Lab::new();
    let (m, k) = (l.x("m"), l.x("k"));
    let x = ["x", "y"].map(|n| l.x(n));
    let v = ["x", "y"].map(|n| {
        let s = l.arena.symbol(n, None, Role::Coordinate);
        l.arena.jet(s, 1)
    });
    let rhs = x.map(|x| {
        let f = l.arena.mul(k, x);
        l.arena.neg(f)
    });
    let motion = Motion { mass: vec![vec![m, Arena::ZERO], vec![Arena::ZERO, m]], rhs: rhs.to_vec() };
    Plane { lab: l, x, v, m, motion }
}

fn check(p: &mut Plane, c0: Expr, c: [Expr; 2]) -> Verdict {
    let mut test = ZeroTest::new(p.lab.facts.clone());
    test.rate_is_zero(&mut p.lab.arena, c0, &c, &p.motion, &mut Budget::new(1_000_000))
}

#[test]
fn angular_momentum_is_conserved() {
    let p = &mut plane();
    // d(x y' − y x')/dt = 0·… + x a_y − y a_x.
    let minus = p.lab.arena.neg(p.x[1]);
    let (x, y) = (p.x[0], p.x[1]);
    assert_eq!(check(p, Arena::ZERO, [minus, x]), Verdict::Proved);
    assert!(matches!(check(p, Arena::ZERO, [y, x]), Verdict::Refuted(Some(_))));
}

#[test]
fn energy_is_conserved() {
    let p = &mut plane();
    let k = p.lab.x("k");
    let (m, v, x) = (p.m, p.v, p.x);
    let a = &mut p.lab.arena;
    let c = [a.mul(m, v[0]), a.mul(m, v[1])];
    let (u, w) = (a.product(&[k, x[0], v[0]]), a.product(&[k, x[1], v[1]]));
    let c0 = a.add(u, w);
    let half = a.scale(c0, &Rational::HALF);
    assert_eq!(check(p, c0, c), Verdict::Proved);
    assert!(check(p, half, c).is_refuted());
}

#[test]
fn a_singular_mass_matrix() {
    let p = &mut plane();
    // L with (x' + y')² only.
    let m = p.m;
    p.motion.mass = vec![vec![m, m], vec![m, m]];
    let (x, y) = (p.x[0], p.x[1]);
    assert_eq!(check(p, Arena::ZERO, [y, x]), Verdict::Undecided(Reason::Degenerate));
    // The rate that needs no acceleration is decided all the same.
    assert_eq!(check(p, Arena::ZERO, [Arena::ZERO; 2]), Verdict::Proved);
    let mut test = ZeroTest::new(Assumptions::new());
    let mut b = Budget::new(1_000_000);
    assert_eq!(test.determinant_is_zero(&mut p.lab.arena, &p.motion.mass, &mut b), Verdict::Proved);
    assert_eq!(test.rank(&mut p.lab.arena, &p.motion.mass, &mut b), Ok(1));
}

#[test]
fn a_mass_matrix_singular_by_an_identity() {
    let l = &mut Lab::new();
    let (x, m) = (l.x("x"), l.x("m"));
    let (s, c) = (l.call(Function::Sin, x), l.call(Function::Cos, x));
    // m (x' cos θ + y' sin θ)²: the determinant is cos² sin² − (sin cos)².
    let (c2, s2, sc) = (l.arena.pow(c, 2), l.arena.pow(s, 2), l.arena.mul(s, c));
    let (a, b, d) = (l.arena.mul(m, c2), l.arena.mul(m, sc), l.arena.mul(m, s2));
    let rows = vec![vec![a, b], vec![b, d]];
    let mut test = ZeroTest::new(Assumptions::new());
    let mut budget = Budget::new(1_000_000);
    assert_eq!(test.determinant_is_zero(&mut l.arena, &rows, &mut budget), Verdict::Proved);
    let full = vec![vec![a, b], vec![b, m]];
    let v = test.determinant_is_zero(&mut l.arena, &full, &mut budget);
    assert!(matches!(v, Verdict::Refuted(Some(_))), "{v:?}");
    assert_eq!(test.rank(&mut l.arena, &full, &mut budget), Ok(2));
    assert_eq!(test.rank(&mut l.arena, &rows, &mut budget), Ok(1));
}

#[test]
fn parts_that_cancel() {
    let l = &mut Lab::new();
    let (x, y) = (l.x("x"), l.x("y"));
    let s = l.arena.add(x, y);
    let s2 = l.arena.pow(s, 2);
    let (x2, y2, xy) = (l.arena.pow(x, 2), l.arena.pow(y, 2), l.arena.mul(x, y));
    let minus = l.arena.neg(s2);
    let squares = l.arena.add(x2, y2);
    let twice = l.times(2, xy);
    let sine = l.call(Function::Sin, x);
    let parts: Vec<Vec<Expr>> = [minus, squares, sine, twice].iter().map(|e| vec![*e]).collect();
    let mut test = ZeroTest::new(Assumptions::new());
    let r = test.residue_vectors(&mut l.arena, &parts, 6, &mut Budget::new(100_000)).unwrap();
    assert!(r.sum_vanishes(&[0, 1, 3]));
    assert!(!r.sum_vanishes(&[0, 1]));
    assert_eq!(r.components(), vec![vec![0, 1, 3], vec![2]]);
    assert_eq!(r.relations().map(|v| v.len()), Some(1));
}

#[test]
fn an_edit_evaluates_new_nodes_only() {
    let l = &mut Lab::new();
    let x: Vec<Expr> = (0..40).map(|k| l.x(&format!("x{k}"))).collect();
    let mut sum = Arena::ZERO;
    for k in 1..40 {
        let d = l.arena.sub(x[k], x[k - 1]);
        let s = l.call(Function::Sin, d);
        let s2 = l.arena.pow(s, 2);
        sum = l.arena.add(sum, s2);
    }
    let mut test = ZeroTest::new(Assumptions::new());
    let cost = |test: &mut ZeroTest, arena: &mut Arena, e: Expr| {
        let mut b = Budget::new(1_000_000);
        assert!(test.is_zero(arena, e, &mut b).is_refuted());
        1_000_000 - b.left()
    };
    let first = cost(&mut test, &mut l.arena, sum);
    let edited = l.arena.add(sum, x[7]);
    let second = cost(&mut test, &mut l.arena, edited);
    assert!(second * 20 < first, "{second} of {first}");
}

#[test]
fn signs_under_assumptions() {
    use super::super::Sign;
    let l = &mut Lab::new();
    let (m, n, e, x) = (l.x("m"), l.x("n"), l.x("e"), l.x("x"));
    l.positive(m);
    l.positive(e);
    let below = l.arena.sub(Arena::ONE, e);
    l.positive(below);
    let more = l.arena.sub(n, m);
    l.positive(more);
    let (s, c) = (l.call(Function::Sin, x), l.call(Function::Cos, x));
    let (s2, ec, x2) = (l.arena.pow(s, 2), l.arena.mul(e, c), l.arena.pow(x, 2));
    let (ns, me, x3) = (l.arena.mul(n, s2), l.arena.mul(m, e), l.arena.pow(x, 3));
    let e2 = l.arena.pow(e, 2);
    let root = l.arena.sqrt(x2);
    let ch = l.call(Function::Cosh, x);
    let cases = [
        (l.arena.add(m, ns), Sign::Positive),
        (ns, Sign::NonNegative),
        (n, Sign::Positive),
        (l.arena.sub(m, n), Sign::Negative),
        (l.arena.sub(Arena::ONE, ec), Sign::Positive),
        (l.arena.add(Arena::ONE, c), Sign::NonNegative),
        (l.arena.sub(Arena::ONE, e2), Sign::Positive),
        (l.arena.neg(me), Sign::Negative),
        (l.arena.add(x2, m), Sign::Positive),
        (x3, Sign::Unknown),
        (root, Sign::NonNegative),
        (l.arena.neg(ch), Sign::Negative),
        (l.arena.sub(m, e), Sign::Unknown),
        (l.arena.pow(n, -3), Sign::Positive),
    ];
    let mut test = ZeroTest::new(l.facts.clone());
    for (e, sign) in cases {
        assert_eq!(test.sign_of(&mut l.arena, e, &mut Budget::new(1000)), sign, "{:?}", l.arena.node(e));
    }
}
