//! Identities, each proved, and near misses, each refuted with a point: the traps of the zero test.

use super::super::field;
use super::*;

#[test]
fn polynomials_unexpanded() {
    let l = &mut Lab::new();
    let (x, y) = (l.x("x"), l.x("y"));
    let (s, d) = (l.arena.add(x, y), l.arena.sub(x, y));
    let p = l.arena.mul(s, d);
    let (x2, y2) = (l.arena.pow(x, 2), l.arena.pow(y, 2));
    let q = l.arena.sub(x2, y2);
    equal(l, p, q);
    different(l, p, x2);
    let (l1, l2) = (l.arena.div(Arena::ONE, s), l.arena.div(Arena::ONE, d));
    let sum = l.arena.add(l1, l2);
    let quotient = l.arena.div(x, q);
    let quotient = l.times(2, quotient);
    equal(l, sum, quotient);
}

#[test]
fn cos_120_degrees_and_root_3() {
    let l = &mut Lab::new();
    let (x, pi) = (l.x("x"), l.arena.pi());
    // cos(x + 2π/3) = −cos(x)/2 − √3 sin(x)/2.
    let shift = l.arena.scale(pi, &Rational::new(2, 3).unwrap());
    let arg = l.arena.add(x, shift);
    let left = l.call(Function::Cos, arg);
    let (s, c, three) = (l.call(Function::Sin, x), l.call(Function::Cos, x), l.n(3));
    let r = l.arena.sqrt(three);
    let rs = l.arena.mul(r, s);
    let right = l.arena.add(c, rs);
    let right = l.arena.scale(right, &Rational::new(-1, 2).unwrap());
    equal(l, left, right);
    let wrong = l.arena.sub(rs, c);
    let wrong = l.over(wrong, 2);
    different(l, left, wrong);
    // The three phases of a winding add up to zero.
    let back = l.arena.sub(x, shift);
    let third = l.call(Function::Cos, back);
    let sum = l.arena.sum(&[left, c, third]);
    equal(l, sum, Arena::ZERO);
}

#[test]
fn cos_36_degrees() {
    let l = &mut Lab::new();
    let (x, pi) = (l.x("x"), l.arena.pi());
    let shift = l.over(pi, 5);
    let arg = l.arena.add(x, shift);
    let left = l.call(Function::Sin, arg);
    let (s, c) = (l.call(Function::Sin, x), l.call(Function::Cos, x));
    let (cs, ss) = (l.call(Function::Cos, shift), l.call(Function::Sin, shift));
    let (a, b) = (l.arena.mul(s, cs), l.arena.mul(c, ss));
    let right = l.arena.add(a, b);
    equal(l, left, right);
    let wrong = l.arena.sub(a, b);
    different(l, left, wrong);
    // cos 36° cos 72° = 1/4, and a seventh of a turn: Σ cos = −1/2.
    let two = l.arena.scale(shift, &Rational::integer(2));
    let c2 = l.call(Function::Cos, two);
    let p = l.arena.mul(cs, c2);
    let quarter = l.over(Arena::ONE, 4);
    equal(l, p, quarter);
    let mut sum = Arena::ZERO;
    for k in [2, 4, 6] {
        let a = l.arena.scale(pi, &Rational::new(k, 7).unwrap());
        let c = l.call(Function::Cos, a);
        sum = l.arena.add(sum, c);
    }
    let half = l.arena.number(Rational::new(-1, 2).unwrap());
    equal(l, sum, half);
}

#[test]
fn root_of_xy_under_assumptions() {
    let l = &mut Lab::new();
    let (x, y) = (l.x("x"), l.x("y"));
    let xy = l.arena.mul(x, y);
    let left = l.arena.sqrt(xy);
    let (a, b) = (l.arena.sqrt(x), l.arena.sqrt(y));
    let right = l.arena.mul(a, b);
    undecided(l, left, right, Reason::SignsUnknown);
    let minus = l.arena.neg(right);
    different(l, left, minus);
    l.positive(x);
    equal(l, left, right);
    different(l, left, minus);
    l.positive(y);
    equal(l, left, right);
}

#[test]
fn root_of_x_squared() {
    let l = &mut Lab::new();
    let x = l.x("x");
    let x2 = l.arena.pow(x, 2);
    let r = l.arena.sqrt(x2);
    let abs = l.call(Function::Abs, x);
    equal(l, r, abs);
    different(l, r, x);
    let mut negative = Lab::new();
    std::mem::swap(&mut negative.arena, &mut l.arena);
    negative.facts.assume(&mut negative.arena, x, Relation::Less);
    let minus = negative.arena.neg(x);
    equal(&mut negative, r, minus);
    std::mem::swap(&mut negative.arena, &mut l.arena);
    l.positive(x);
    equal(l, r, x);
    equal(l, abs, x);
}

#[test]
fn hidden_square_under_a_root() {
    let l = &mut Lab::new();
    let (x, y) = (l.x("x"), l.x("y"));
    let s = l.arena.add(x, y);
    let s2 = l.arena.pow(s, 2);
    let expanded = l.arena.expand(s2, &mut Budget::new(1000)).unwrap();
    let r = l.arena.sqrt(expanded);
    // |x + y| is neither x + y nor −x − y.
    different(l, r, s);
    let minus = l.arena.neg(s);
    different(l, r, minus);
    // Its square is known without any sign.
    let r2 = l.arena.pow(r, 2);
    equal(l, r2, s2);
}

#[test]
fn absolute_values() {
    let l = &mut Lab::new();
    let (x, y) = (l.x("x"), l.x("y"));
    let (ax, ay) = (l.call(Function::Abs, x), l.call(Function::Abs, y));
    let (x2, ax2) = (l.arena.pow(x, 2), l.arena.pow(ax, 2));
    equal(l, ax2, x2);
    let xy = l.arena.mul(x, y);
    let axy = l.call(Function::Abs, xy);
    let p = l.arena.mul(ax, ay);
    equal(l, axy, p);
    let sx = l.call(Function::Sign, x);
    let xs = l.arena.mul(x, sx);
    equal(l, ax, xs);
    different(l, ax, x);
    // max(x, y) + min(x, y) = x + y, max − min = |x − y|.
    let (hi, lo) = (l.arena.call(Function::Max, &[x, y]), l.arena.call(Function::Min, &[x, y]));
    let (sum, s) = (l.arena.add(hi, lo), l.arena.add(x, y));
    equal(l, sum, s);
    let (gap, d) = (l.arena.sub(hi, lo), l.arena.sub(x, y));
    let ad = l.call(Function::Abs, d);
    equal(l, gap, ad);
    different(l, hi, x);
}

#[test]
fn unspecified_functions_of_equal_arguments() {
    let l = &mut Lab::new();
    let x = l.x("x");
    let s = l.arena.add(x, Arena::ONE);
    let s2 = l.arena.pow(s, 2);
    let expanded = l.arena.expand(s2, &mut Budget::new(1000)).unwrap();
    let (a, b) = (l.function("f", 0, s2), l.function("f", 0, expanded));
    assert_ne!(a, b);
    equal(l, a, b);
    let (d, g) = (l.function("f", 1, s2), l.function("g", 0, s2));
    different(l, a, d);
    different(l, a, g);
    let at = l.function("f", 0, x);
    different(l, a, at);
}

#[test]
fn derivative_of_a_function_and_rate() {
    // U'(r) against U(r)'.
    let l = &mut Lab::new();
    let r = l.x("r");
    let s = l.arena.symbol("r", None, Role::Coordinate);
    let v = l.arena.jet(s, 1);
    let (u, du) = (l.function("U", 0, r), l.function("U", 1, r));
    let rate = l.arena.total(u, &mut Budget::new(1000)).unwrap();
    let p = l.arena.mul(du, v);
    equal(l, rate, p);
    different(l, rate, du);
}

#[test]
fn multiples_of_the_primes_in_use() {
    for c in field::FIRST {
        let p = (1i64 << 62) - c as i64;
        let l = &mut Lab::new();
        let x = l.x("x");
        let px = l.times(p, x);
        different(l, px, Arena::ZERO);
        let q = (1i64 << 62) - field::FIRST[0] as i64;
        let both = l.times(q, px);
        different(l, both, Arena::ZERO);
        // x^(p−1) − 1 vanishes at every point of the field.
        let e = l.arena.pow(x, p - 1);
        different(l, e, Arena::ONE);
    }
    // (x + p y)(x + q y) − x² − (p + q) x y = p q y² vanishes over both primes.
    let [p, q] = field::FIRST.map(|c| (1i64 << 62) - c as i64);
    let l = &mut Lab::new();
    let (x, y) = (l.x("x"), l.x("y"));
    let (py, qy) = (l.times(p, y), l.times(q, y));
    let (a, b) = (l.arena.add(x, py), l.arena.add(x, qy));
    let product = l.arena.mul(a, b);
    let (x2, xy) = (l.arena.pow(x, 2), l.arena.mul(x, y));
    let (pxy, qxy) = (l.times(p, xy), l.times(q, xy));
    let rest = l.arena.sum(&[x2, pxy, qxy]);
    different(l, product, rest);
    // The same hidden in an argument.
    let hidden = l.arena.sub(product, rest);
    let arg = l.arena.add(x, hidden);
    let (a, b) = (l.function("U", 0, arg), l.function("U", 0, x));
    different(l, a, b);
    let (a, b) = (l.call(Function::Atan, arg), l.call(Function::Atan, x));
    different(l, a, b);
    let inverse = l.arena.pow(arg, -1);
    let (c, d) = (l.call(Function::Cos, inverse), l.arena.pow(x, -1));
    let d = l.call(Function::Cos, d);
    assert!(!l.difference(c, d).is_proved());
}

#[test]
fn double_and_triple_angles() {
    let l = &mut Lab::new();
    let x = l.x("x");
    let (s, c) = (l.call(Function::Sin, x), l.call(Function::Cos, x));
    let x2 = l.times(2, x);
    let left = l.call(Function::Sin, x2);
    let right = l.arena.mul(s, c);
    let right = l.times(2, right);
    equal(l, left, right);
    different(l, left, s);
    // cos x = 4 cos³(x/3) − 3 cos(x/3).
    let third = l.over(x, 3);
    let c3 = l.call(Function::Cos, third);
    let cube = l.arena.pow(c3, 3);
    let right = l.arena.linear(&[(cube, Rational::integer(4)), (c3, Rational::integer(-3))]);
    equal(l, c, right);
    // 2 sin²(x/2) = 1 − cos x, and tan.
    let half = l.over(x, 2);
    let sh = l.call(Function::Sin, half);
    let sh2 = l.arena.pow(sh, 2);
    let left = l.times(2, sh2);
    let right = l.arena.sub(Arena::ONE, c);
    equal(l, left, right);
    let t = l.call(Function::Tan, x);
    let q = l.arena.div(s, c);
    equal(l, t, q);
    // A denominator for which the fields have no special room.
    let elevenths = l.arena.scale(x, &Rational::new(2, 11).unwrap());
    let eleventh = l.over(x, 11);
    let (s2, s1, c1) =
        (l.call(Function::Sin, elevenths), l.call(Function::Sin, eleventh), l.call(Function::Cos, eleventh));
    let right = l.arena.mul(s1, c1);
    let right = l.times(2, right);
    equal(l, s2, right);
}

#[test]
fn sums_of_angles_unexpanded() {
    let l = &mut Lab::new();
    let (x, y, w) = (l.x("x"), l.x("y"), l.x("ω"));
    // sin(ω (x + y)) = sin ωx cos ωy + cos ωx sin ωy.
    let s = l.arena.add(x, y);
    let ws = l.arena.mul(w, s);
    let left = l.call(Function::Sin, ws);
    let (wx, wy) = (l.arena.mul(w, x), l.arena.mul(w, y));
    let (sx, cx, sy, cy) =
        (l.call(Function::Sin, wx), l.call(Function::Cos, wx), l.call(Function::Sin, wy), l.call(Function::Cos, wy));
    let (a, b) = (l.arena.mul(sx, cy), l.arena.mul(cx, sy));
    let right = l.arena.add(a, b);
    equal(l, left, right);
    different(l, left, a);
}

#[test]
fn hyperbolic_functions_and_exponentials() {
    let l = &mut Lab::new();
    let (x, y) = (l.x("x"), l.x("y"));
    let s = l.arena.add(x, y);
    let (tx, ty, ts) = (l.call(Function::Tanh, x), l.call(Function::Tanh, y), l.call(Function::Tanh, s));
    let num = l.arena.add(tx, ty);
    let p = l.arena.mul(tx, ty);
    let den = l.arena.add(Arena::ONE, p);
    let right = l.arena.div(num, den);
    equal(l, ts, right);
    let (ch, sh) = (l.call(Function::Cosh, x), l.call(Function::Sinh, x));
    let (c2, s2) = (l.arena.pow(ch, 2), l.arena.pow(sh, 2));
    let d = l.arena.sub(c2, s2);
    equal(l, d, Arena::ONE);
    let e = l.call(Function::Exp, x);
    let sum = l.arena.add(ch, sh);
    equal(l, e, sum);
    // √exp x = exp(x/2).
    let half = l.over(x, 2);
    let (r, eh) = (l.arena.sqrt(e), l.call(Function::Exp, half));
    equal(l, r, eh);
    different(l, e, eh);
}

#[test]
fn logarithms() {
    let l = &mut Lab::new();
    let (x, y) = (l.x("x"), l.x("y"));
    let xy = l.arena.mul(x, y);
    let (lx, ly, lxy) = (l.call(Function::Log, x), l.call(Function::Log, y), l.call(Function::Log, xy));
    let sum = l.arena.add(lx, ly);
    undecided(l, lxy, sum, Reason::Functions);
    different(l, lxy, lx);
    l.positive(x);
    l.positive(y);
    equal(l, lxy, sum);
    let x2 = l.arena.pow(x, 2);
    let (lx2, twice) = (l.call(Function::Log, x2), l.times(2, lx));
    equal(l, lx2, twice);
    // exp(2 log x) = x².
    let e = l.call(Function::Exp, twice);
    equal(l, e, x2);
}

#[test]
fn inverse_functions() {
    let l = &mut Lab::new();
    let (x, y) = (l.x("x"), l.x("y"));
    let (s, d) = (l.arena.add(x, y), l.arena.sub(x, y));
    let p = l.arena.mul(s, d);
    let expanded = l.arena.expand(p, &mut Budget::new(1000)).unwrap();
    let (a, b) = (l.call(Function::Atan, p), l.call(Function::Atan, expanded));
    equal(l, a, b);
    different(l, a, x);
    // asin x + acos x = π/2.
    let (a, b, pi) = (l.call(Function::Asin, x), l.call(Function::Acos, x), l.arena.pi());
    let (sum, half) = (l.arena.add(a, b), l.over(pi, 2));
    equal(l, sum, half);
    // 2 atan x = atan(2x/(1 − x²)) only for |x| < 1: refuted by a point beyond.
    let x2 = l.arena.pow(x, 2);
    let den = l.arena.sub(Arena::ONE, x2);
    let q = l.arena.div(x, den);
    let q = l.times(2, q);
    let (left, right) = (l.call(Function::Atan, x), l.call(Function::Atan, q));
    let left = l.times(2, left);
    different(l, left, right);
}

#[test]
fn sines_of_inverse_functions() {
    let l = &mut Lab::new();
    let (x, y) = (l.x("x"), l.x("y"));
    // cos(atan2(y, x)) = x/r, sin(2 atan2(y, x)) = 2 x y/r², cos(atan x) = 1/√(1 + x²).
    let phi = l.arena.call(Function::Atan2, &[y, x]);
    let (x2, y2, xy) = (l.arena.pow(x, 2), l.arena.pow(y, 2), l.arena.mul(x, y));
    let r2 = l.arena.add(x2, y2);
    let r = l.arena.sqrt(r2);
    let (c, s) = (l.call(Function::Cos, phi), l.call(Function::Sin, phi));
    let (xr, yr) = (l.arena.div(x, r), l.arena.div(y, r));
    equal(l, c, xr);
    equal(l, s, yr);
    different(l, c, yr);
    let twice = l.times(2, phi);
    let s2 = l.call(Function::Sin, twice);
    let q = l.arena.div(xy, r2);
    let q = l.times(2, q);
    equal(l, s2, q);
    // sin(θ − φ) with another angle beside it.
    let theta = l.x("θ");
    let gap = l.arena.sub(theta, phi);
    let (sg, st, ct) = (l.call(Function::Sin, gap), l.call(Function::Sin, theta), l.call(Function::Cos, theta));
    let (a, b) = (l.arena.mul(st, xr), l.arena.mul(ct, yr));
    let right = l.arena.sub(a, b);
    equal(l, sg, right);
    let wrong = l.arena.add(a, b);
    different(l, sg, wrong);
    let atan = l.call(Function::Atan, x);
    let c = l.call(Function::Cos, atan);
    let sum = l.arena.add(Arena::ONE, x2);
    let right = l.arena.pow_rational(sum, &Rational::HALF.neg());
    equal(l, c, right);
    let (acos, asin) = (l.call(Function::Acos, x), l.call(Function::Asin, x));
    let sine = l.call(Function::Sin, acos);
    let cosine = l.call(Function::Cos, asin);
    equal(l, sine, cosine);
    let double = l.times(2, asin);
    let c2 = l.call(Function::Cos, double);
    let right = l.arena.linear(&[(Arena::ONE, Rational::ONE), (x2, Rational::integer(-2))]);
    equal(l, c2, right);
}

#[test]
fn symbolic_exponents() {
    let l = &mut Lab::new();
    let (x, n) = (l.x("x"), l.x("n"));
    let up = l.arena.add(n, Arena::ONE);
    let (a, b) = (l.arena.power(x, up), l.arena.power(x, n));
    let right = l.arena.mul(x, b);
    equal(l, a, right);
    different(l, a, b);
    let twice = l.times(2, n);
    let (c, b2) = (l.arena.power(x, twice), l.arena.pow(b, 2));
    equal(l, c, b2);
    l.positive(x);
    let y = l.x("y");
    l.positive(y);
    let xy = l.arena.mul(x, y);
    let (p, q) = (l.arena.power(xy, n), l.arena.power(y, n));
    let right = l.arena.mul(b, q);
    equal(l, p, right);
}

#[test]
fn other_roots() {
    let l = &mut Lab::new();
    let (x, y) = (l.x("x"), l.x("y"));
    l.positive(x);
    l.positive(y);
    let third = Rational::new(1, 3).unwrap();
    let xy = l.arena.mul(x, y);
    let (a, b, c) =
        (l.arena.pow_rational(x, &third), l.arena.pow_rational(y, &third), l.arena.pow_rational(xy, &third));
    let p = l.arena.mul(a, b);
    equal(l, c, p);
    different(l, c, a);
    // (x^(1/6))³ = √x.
    let sixth = l.arena.pow_rational(x, &Rational::new(1, 6).unwrap());
    let (cube, r) = (l.arena.pow(sixth, 3), l.arena.sqrt(x));
    equal(l, cube, r);
}

#[test]
fn a_denominator_that_vanishes_everywhere() {
    let l = &mut Lab::new();
    let x = l.x("x");
    let (s, c) = (l.call(Function::Sin, x), l.call(Function::Cos, x));
    let (s2, c2) = (l.arena.pow(s, 2), l.arena.pow(c, 2));
    let d = l.arena.sum(&[s2, c2]);
    let d = l.arena.sub(d, Arena::ONE);
    let q = l.arena.div(x, d);
    undecided(l, q, Arena::ZERO, Reason::DenominatorsVanish);
}

#[test]
fn known_probes() {
    let l = &mut Lab::new();
    let (x, pi, one) = (l.x("x"), l.arena.pi(), Arena::ONE);
    // tan(x/2) = sin x/(1 + cos x).
    let half = l.over(x, 2);
    let (t, s, c) = (l.call(Function::Tan, half), l.call(Function::Sin, x), l.call(Function::Cos, x));
    let den = l.arena.add(one, c);
    let q = l.arena.div(s, den);
    equal(l, t, q);
    // cos(π/7) − cos(2π/7) + cos(3π/7) = 1/2.
    let cosine = |l: &mut Lab, k: i64| {
        let a = l.arena.scale(pi, &Rational::new(k, 7).unwrap());
        l.call(Function::Cos, a)
    };
    let (a, b, d) = (cosine(l, 1), cosine(l, 2), cosine(l, 3));
    let sum = l.arena.linear(&[(a, Rational::ONE), (b, Rational::MINUS_ONE), (d, Rational::ONE)]);
    let want = l.over(one, 2);
    equal(l, sum, want);
    // asin(sin x) = x and atan x + atan(1/x) = π/2 on a part of the line only.
    let back = l.call(Function::Asin, s);
    different(l, back, x);
    let inverse = l.arena.pow(x, -1);
    let (a, b) = (l.call(Function::Atan, x), l.call(Function::Atan, inverse));
    let (sum, quarter) = (l.arena.add(a, b), l.over(pi, 2));
    different(l, sum, quarter);
    // 10⁻⁶⁰ x + sin² x + cos² x − 1: too small for a double, yet not zero.
    let (s2, c2) = (l.arena.pow(s, 2), l.arena.pow(c, 2));
    let tiny = l.arena.scale(x, &Rational::from_decimal("1", -60, 100).unwrap());
    let sum = l.arena.sum(&[tiny, s2, c2]);
    assert!(l.difference(sum, one).is_refuted());
    // exp(π √163) is no integer; doubles cannot tell, so nothing is said.
    let (n, root) = (l.n(262_537_412_640_768_744), l.n(163));
    let root = l.arena.sqrt(root);
    let p = l.arena.mul(pi, root);
    let e = l.call(Function::Exp, p);
    undecided(l, e, n, Reason::Functions);
}

#[test]
fn nested_roots_of_numbers() {
    let l = &mut Lab::new();
    let (two, three, six) = (l.n(2), l.n(3), l.n(6));
    let (r2, r3, r6) = (l.arena.sqrt(two), l.arena.sqrt(three), l.arena.sqrt(six));
    // √(5 + 2√6) = √2 + √3, √(5 − 2√6) = √3 − √2.
    let five = l.n(5);
    let twice = l.times(2, r6);
    let (plus, minus) = (l.arena.add(five, twice), l.arena.sub(five, twice));
    let (a, b) = (l.arena.sqrt(plus), l.arena.sqrt(minus));
    let (sum, gap, wrong) = (l.arena.add(r2, r3), l.arena.sub(r3, r2), l.arena.sub(r2, r3));
    equal(l, a, sum);
    equal(l, b, gap);
    different(l, b, wrong);
    let product = l.arena.mul(a, b);
    equal(l, product, Arena::ONE);
    // With names beside them.
    let x = l.x("x");
    let (ax, sx) = (l.arena.mul(a, x), l.arena.mul(sum, x));
    equal(l, ax, sx);
    // Independent: √(1 + √2).
    let inner = l.arena.add(Arena::ONE, r2);
    let r = l.arena.sqrt(inner);
    let s = l.arena.pow(r, 2);
    equal(l, s, inner);
    different(l, r, inner);
}
