//! Hostile input: a verdict within the budget, never a crash.

use super::*;

/// Every verdict that is honest about an expression of which nothing is expected.
fn check(l: &mut Lab, e: Expr) -> Verdict {
    let mut test = ZeroTest::new(l.facts.clone());
    test.is_zero(&mut l.arena, e, &mut Budget::new(300_000))
}

#[test]
fn deep_nesting() {
    let l = &mut Lab::new();
    let x = l.x("x");
    let (mut sines, mut roots, mut powers, mut abs) = (x, x, x, x);
    for k in 0..3000 {
        let s = l.arena.add(sines, x);
        sines = l.call(Function::Sin, s);
        let r = l.arena.add(roots, Arena::ONE);
        roots = l.arena.sqrt(r);
        let p = l.arena.pow(powers, 3);
        powers = l.arena.sub(p, x);
        let a = l.arena.sub(abs, x);
        let a = l.call(Function::Abs, a);
        abs = if k % 2 == 0 { l.arena.mul(a, x) } else { a };
    }
    for e in [sines, roots, powers, abs] {
        let v = check(l, e);
        assert!(!v.is_proved(), "{v:?}");
        let y = l.x("y");
        let p = l.arena.mul(e, y);
        assert!(!check(l, p).is_proved());
    }
}

#[test]
fn wide_sums() {
    let l = &mut Lab::new();
    let (mut abs, mut roots, mut logs) = (Vec::new(), Vec::new(), Vec::new());
    for k in 0..3000 {
        let x = l.x(&format!("x{k}"));
        abs.push(l.call(Function::Abs, x));
        let x2 = l.arena.pow(x, 2);
        let s = l.arena.add(x2, Arena::ONE);
        roots.push(l.arena.sqrt(s));
        logs.push(l.call(Function::Log, s));
    }
    for list in [abs, roots, logs] {
        let s = l.arena.sum(&list);
        assert!(check(l, s).is_refuted());
        // Σ (Σ + a) = Σ² + a Σ, unexpanded: free roots prove it.
        let wide = l.arena.add(s, list[0]);
        let left = l.arena.mul(s, wide);
        let (square, p) = (l.arena.pow(s, 2), l.arena.mul(s, list[0]));
        let d = l.arena.linear(&[(left, Rational::ONE), (square, Rational::MINUS_ONE), (p, Rational::MINUS_ONE)]);
        assert_ne!(d, Arena::ZERO);
        assert!(check(l, d).is_proved());
        let r2 = l.arena.pow(list[0], 2);
        let p = l.arena.mul(s, r2);
        assert!(check(l, p).is_refuted());
    }
}

#[test]
fn huge_exponents() {
    let l = &mut Lab::new();
    let x = l.x("x");
    let e = l.arena.pow(x, 1_000_000_000);
    assert!(!check(l, e).is_proved());
    let huge = l.arena.pow_rational(x, &Rational::from_decimal("1", 40, 100).unwrap());
    let d = l.arena.sub(huge, e);
    assert!(!check(l, d).is_proved());
    let wild = l.arena.pow_rational(x, &Rational::new(1_234_567, 7_654_321).unwrap());
    let d = l.arena.sub(wild, x);
    assert!(check(l, d).is_refuted());
    let angle = l.times(i64::MAX / 3, x);
    let s = l.call(Function::Sin, angle);
    let d = l.arena.sub(s, x);
    assert!(check(l, d).is_refuted());
    let fine = l.over(x, i64::MAX / 7);
    let c = l.call(Function::Cos, fine);
    let d = l.arena.sub(c, x);
    assert!(check(l, d).is_refuted());
}

#[test]
fn a_budget_that_is_too_small() {
    let l = &mut Lab::new();
    let mut sum = Arena::ZERO;
    for k in 0..500 {
        let x = l.x(&format!("x{k}"));
        let s = l.call(Function::Sin, x);
        sum = l.arena.add(sum, s);
    }
    let mut test = ZeroTest::new(Assumptions::new());
    let v = test.is_zero(&mut l.arena, sum, &mut Budget::new(100));
    assert_eq!(v, Verdict::Undecided(Reason::TooLarge));
    // What was stopped goes on where it was.
    assert!(test.is_zero(&mut l.arena, sum, &mut Budget::new(100_000)).is_refuted());
}

#[test]
fn many_contradictory_assumptions() {
    let l = &mut Lab::new();
    let x: Vec<Expr> = (0..100).map(|k| l.x(&format!("x{k}"))).collect();
    for k in 0..100 {
        let d = l.arena.sub(x[k], x[(k + 1) % 100]);
        l.positive(d);
    }
    let d = l.arena.sub(x[0], x[50]);
    assert!(!check(l, d).is_proved());
}
