//! Assumptions, families, long ranges.

use super::*;

#[test]
fn sums_over_families() {
    let l = &mut Lab::new();
    let family = l.arena.symbol("x", None, Role::Coordinate);
    let i = l.arena.symbol("i", None, Role::Index);
    let ie = l.arena.sym(i);
    let xi = l.arena.member(family, ie, 0);
    let x2 = l.arena.pow(xi, 2);
    let (one, n) = (l.n(1), l.n(5));
    let sum = l.arena.bound(i, one, n, x2, &mut Budget::new(1000)).unwrap();
    let mut unrolled = Arena::ZERO;
    for k in 1..=5 {
        let s = l.arena.symbol("x", Some(k), Role::Coordinate);
        let x = l.arena.sym(s);
        let x2 = l.arena.pow(x, 2);
        unrolled = l.arena.add(unrolled, x2);
    }
    equal(l, sum, unrolled);
    let less = l.arena.sub(unrolled, one);
    different(l, sum, less);
    // Σᵢ Σⱼ xᵢ xⱼ = (Σ xᵢ)².
    let j = l.arena.symbol("j", None, Role::Index);
    let je = l.arena.sym(j);
    let xj = l.arena.member(family, je, 0);
    let up = l.arena.add(ie, one);
    let six = l.n(6);
    let p = l.arena.mul(xi, xj);
    let inner = l.arena.bound(j, up, six, p, &mut Budget::new(1000)).unwrap();
    let pairs = l.arena.bound(i, one, n, inner, &mut Budget::new(1000)).unwrap();
    let all = l.arena.bound(i, one, six, xi, &mut Budget::new(1000)).unwrap();
    let squares = l.arena.bound(i, one, six, x2, &mut Budget::new(1000)).unwrap();
    let all2 = l.arena.pow(all, 2);
    let twice = l.times(2, pairs);
    let right = l.arena.add(twice, squares);
    equal(l, all2, right);
    // A member at a free index is what it is.
    let k = l.arena.add(ie, one);
    let next = l.arena.member(family, k, 0);
    different(l, xi, next);
}

#[test]
fn assumptions_narrow_the_witness() {
    let l = &mut Lab::new();
    let e = l.x("e");
    // 0 < e < 1 makes |1 − e| equal to 1 − e.
    l.positive(e);
    let gap = l.arena.sub(Arena::ONE, e);
    l.positive(gap);
    let abs = l.call(Function::Abs, gap);
    equal(l, abs, gap);
    let square = l.arena.pow(e, 2);
    let inner = l.arena.sub(Arena::ONE, square);
    let r = l.arena.sqrt(inner);
    let wide = l.arena.add(Arena::ONE, e);
    let (a, b) = (l.arena.sqrt(gap), l.arena.sqrt(wide));
    let p = l.arena.mul(a, b);
    equal(l, r, p);
    different(l, r, a);
}

#[test]
fn refuted_without_a_real_point() {
    // No real point satisfies x² < −1, yet different atoms stay different.
    let l = &mut Lab::new();
    let (x, y) = (l.x("x"), l.x("y"));
    let x2 = l.arena.pow(x, 2);
    let never = l.arena.linear(&[(x2, Rational::MINUS_ONE), (Arena::ONE, Rational::MINUS_ONE)]);
    l.positive(never);
    let (s, c) = (l.call(Function::Sin, x), l.call(Function::Cos, x));
    let (u, r) = (l.function("U", 0, y), l.arena.sqrt(y));
    for (a, b) in [(x, y), (s, c), (u, r), (s, u)] {
        assert_eq!(l.difference(a, b), Verdict::Refuted(None));
    }
    let (s2, c2) = (l.arena.pow(s, 2), l.arena.pow(c, 2));
    let one = l.arena.add(s2, c2);
    equal(l, one, Arena::ONE);
    let log = l.call(Function::Log, y);
    undecided(l, log, y, Reason::Functions);
}

#[test]
fn assumptions_that_force_an_equality() {
    // a ≥ b and b ≥ a leave a = b only: no refutation.
    let l = &mut Lab::new();
    let (a, b) = (l.x("a"), l.x("b"));
    let d = l.arena.sub(a, b);
    l.facts.assume(&mut l.arena, d, Relation::GreaterEqual);
    assert!(l.difference(a, b).is_refuted());
    l.facts.assume(&mut l.arena, d, Relation::LessEqual);
    undecided(l, a, b, Reason::NoWitness);
}

#[test]
fn free_roots_and_signs() {
    // Σ |xₖ| − Σ |xₖ| in another order of many unknown signs; the same with roots that are related.
    let l = &mut Lab::new();
    let (mut sum, mut other) = (Arena::ZERO, Arena::ZERO);
    for k in 0..12 {
        let x = l.x(&format!("x{k}"));
        let (abs, x2) = (l.call(Function::Abs, x), l.arena.pow(x, 2));
        let wide = l.arena.add(x2, Arena::ONE);
        let r = l.arena.sqrt(wide);
        let t = l.arena.mul(abs, r);
        sum = l.arena.add(sum, t);
        let (w2, half) = (l.arena.mul(wide, abs), l.arena.pow_rational(wide, &Rational::HALF.neg()));
        let t = l.arena.mul(w2, half);
        other = l.arena.add(other, t);
        let minus = l.arena.neg(x);
        let again = l.call(Function::Abs, minus);
        let t = l.arena.mul(again, Arena::ONE);
        sum = l.arena.add(sum, t);
        other = l.arena.add(other, abs);
    }
    equal(l, sum, other);
    let half = l.over(other, 2);
    different(l, sum, half);
}

#[test]
fn long_ranges() {
    let l = &mut Lab::new();
    let family = l.arena.symbol("x", None, Role::Coordinate);
    let i = l.arena.symbol("i", None, Role::Index);
    let ie = l.arena.sym(i);
    let next = l.arena.add(ie, Arena::ONE);
    let (xi, xn) = (l.arena.member(family, ie, 0), l.arena.member(family, next, 0));
    let (d, s) = (l.arena.sub(xn, xi), l.arena.add(xn, xi));
    let p = l.arena.mul(d, s);
    let (a2, b2) = (l.arena.pow(xn, 2), l.arena.pow(xi, 2));
    let zero = l.arena.linear(&[(p, Rational::ONE), (a2, Rational::MINUS_ONE), (b2, Rational::ONE)]);
    let n = l.n(1_000_000_000);
    let body = l.arena.mul(xi, zero);
    let sum = l.arena.bound(i, Arena::ONE, n, body, &mut Budget::new(1000)).unwrap();
    assert!(sum != Arena::ZERO);
    equal(l, sum, Arena::ZERO);
    // A telescope of a thousand members, and one that is out of all budgets.
    for (last, proved) in [(1000, true), (1_000_000_000, false)] {
        let n = l.n(last);
        let sum = l.arena.bound(i, Arena::ONE, n, d, &mut Budget::new(1000)).unwrap();
        let mut member = |k: i64| {
            let s = l.arena.symbol("x", Some(k), Role::Coordinate);
            l.arena.sym(s)
        };
        let (first, end) = (member(1), member(last + 1));
        let ends = l.arena.sub(end, first);
        if proved {
            equal(l, sum, ends);
        } else {
            undecided(l, sum, ends, Reason::TooLarge);
        }
    }
}

#[test]
fn ordered_parameters_have_a_witness() {
    let l = &mut Lab::new();
    let m: Vec<Expr> = (0..5).map(|k| l.x(&format!("m{k}"))).collect();
    for k in 1..5 {
        let gap = l.arena.sub(m[k], m[k - 1]);
        l.positive(gap);
    }
    l.positive(m[0]);
    different(l, m[3], m[1]);
    let gap = l.arena.sub(m[1], m[0]);
    let abs = l.call(Function::Abs, gap);
    equal(l, abs, gap);
}

#[test]
fn a_long_sum_that_is_not_zero_costs_as_much_as_a_short_one() {
    let mut cost = Vec::new();
    for last in [1000, 1_000_000_000] {
        let l = &mut Lab::new();
        let family = l.arena.symbol("x", None, Role::Coordinate);
        let i = l.arena.symbol("i", None, Role::Index);
        let ie = l.arena.sym(i);
        let next = l.arena.add(ie, Arena::ONE);
        let (xi, xn) = (l.arena.member(family, ie, 0), l.arena.member(family, next, 0));
        let d = l.arena.sub(xn, xi);
        let (d2, x2) = (l.arena.pow(d, 2), l.arena.pow(xi, 2));
        let body = l.arena.add(d2, x2);
        let n = l.n(last);
        let sum = l.arena.bound(i, Arena::ONE, n, body, &mut Budget::new(1000)).unwrap();
        let mut test = ZeroTest::new(Assumptions::new());
        let mut budget = Budget::new(1_000_000);
        let verdict = test.is_zero(&mut l.arena, sum, &mut budget);
        assert!(matches!(verdict, Verdict::Refuted(Some(w)) if w.lower > 0.0), "{verdict:?}");
        cost.push(1_000_000 - budget.left());
        // A bound on a far member alone makes the members differ.
        let far = l.arena.symbol("x", Some(500), Role::Coordinate);
        let far = l.arena.sym(far);
        let high = l.arena.sub(far, n);
        l.positive(high);
        let verdict = l.verdict(sum);
        assert_eq!(verdict.is_refuted(), last == 1000, "{verdict:?}");
    }
    assert_eq!(cost[0], cost[1]);
}
