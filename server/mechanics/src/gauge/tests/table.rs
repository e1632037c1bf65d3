//! Integrals as a table has them, and where they wind.

use super::*;

/// An integrand.
type Make = fn(&mut World) -> Expr;

/// F of each V, as it is printed; `none` where no closed form is found.
fn check(list: &[(Make, &str)]) {
    let mut got = Vec::new();
    for (make, _) in list {
        let mut w = world();
        let v = make(&mut w);
        let model = w.f.model.clone();
        let f = gauge_term(&mut w.f.cx(), &model, &vec![(v, Rational::ONE)]).unwrap();
        got.push(f.map_or("none".to_string(), |f| w.shown(f)));
    }
    let want: Vec<&str> = list.iter().map(|l| l.1).collect();
    assert_eq!(got, want);
}

impl World {
    fn minus_square(&mut self, p: Expr, q: Expr) -> Expr {
        let (p, q) = (self.f.arena.pow(p, 2), self.f.arena.pow(q, 2));
        self.f.arena.sub(p, q)
    }

    /// ẋ over x² + a².
    fn with_sum(&mut self, n: i64) -> Expr {
        let e = self.squares(&[self.x, self.a]);
        self.along(self.x, e, n)
    }

    /// ẋ over x² − a², a² − x².
    fn with_gap(&mut self, first_x: bool, n: i64) -> Expr {
        let e = if first_x { self.minus_square(self.x, self.a) } else { self.minus_square(self.a, self.x) };
        self.along(self.x, e, n)
    }

    fn of_angle(&mut self, f: Function, n: i64) -> Expr {
        let e = self.call(f, self.phi);
        self.along(self.phi, e, 2 * n)
    }

    /// φ̇/(m + n cos φ).
    fn turning(&mut self, m: i64, n: i64) -> Expr {
        let c = self.call(Function::Cos, self.phi);
        let m = self.f.arena.integer(m);
        let e = self.f.arena.linear(&[(m, Rational::ONE), (c, Rational::integer(n))]);
        self.along(self.phi, e, -2)
    }
}

#[test]
fn integrals_of_a_table() {
    // Quadratics below and under roots [Abramowitz, Stegun, Handbook of Mathematical Functions, §3.3].
    check(&[
        (|w| w.with_sum(-2), "atan(x/a)/a"),
        (|w| w.with_gap(true, -2), "log(abs((a - x)/(x + a)))/(2 a)"),
        (|w| w.with_sum(-4), "(a x/(x² + a²) + atan(x/a))/(2 a³)"),
        (|w| w.with_sum(-1), "log(√(x² + a²) + x)"),
        (|w| w.with_sum(1), "1/2 x √(x² + a²) + 1/2 a² log(√(x² + a²) + x)"),
        (|w| w.with_gap(true, -1), "log(abs(√(x² - a²) + x))"),
        (|w| w.with_gap(false, -1), "asin(x/a)"),
        (|w| w.with_gap(false, 1), "1/2 x √(a² - x²) + 1/2 a² asin(x/a)"),
        (
            |w| {
                let e = w.with_sum(-1);
                w.f.arena.div(e, w.x)
            },
            "log(abs(x/(√(x² + a²) + a)))/a",
        ),
        (
            |w| {
                let e = w.with_gap(true, -1);
                w.f.arena.div(e, w.x)
            },
            "-atan(a/√(x² - a²))/a",
        ),
        (
            |w| {
                let x4 = w.f.arena.pow(w.x, 4);
                let e = w.sum(&[x4, Arena::ONE]);
                w.along(w.x, e, -2)
            },
            "none",
        ),
        (
            |w| {
                let (x3, b) = (w.f.arena.pow(w.x, 3), w.f.arena.pow(w.b, 3));
                let e = w.f.arena.sub(x3, b);
                w.along(w.x, e, -2)
            },
            "(2 (log(abs(x - b)) - √(3) atan(√(3) (2 x + b)/(3 b))) - log(b x + x² + b²))/(6 b²)",
        ),
        (
            |w| {
                let e = w.f.arena.sub(w.x, w.a);
                let e = w.mul(&[e, w.x]);
                w.along(w.x, e, -2)
            },
            "log(abs((a - x)/x))/a",
        ),
    ]);
}

#[test]
fn integrals_of_angles() {
    check(&[
        (|w| w.of_angle(Function::Sin, -1), "log(abs(tan(1/2 φ)))"),
        (|w| w.of_angle(Function::Cos, -1), "1/2 log((1 + sin φ)/(1 - sin φ))"),
        (|w| w.of_angle(Function::Tan, 1), "-log(abs(cos φ))"),
        (|w| w.of_angle(Function::Tan, 2), "tan φ - φ"),
        (|w| w.of_angle(Function::Sin, -2), "-cos φ/sin φ"),
        (|w| w.of_angle(Function::Cos, -3), "1/4 log((1 + sin φ)/(1 - sin φ)) + sin φ/(2 cos² φ)"),
        (|w| w.of_angle(Function::Sin, 4), "1/32 (12 φ + sin(4 φ) - 8 sin(2 φ))"),
        (|w| w.turning(5, 3), "1/4 φ - 1/2 atan(sin φ/(3 + cos φ))"),
        (|w| w.turning(1, 2), "1/3 √(3) log(abs((2 + cos φ + √(3) sin φ)/(1 + 2 cos φ)))"),
        (|w| w.turning(2, 1), "1/3 √(3) (φ - 2 atan(sin φ/(2 + √(3) + cos φ)))"),
        (|w| w.turning(1, 1), "sin φ/(1 + cos φ)"),
        (|w| w.of_angle(Function::Cosh, -1), "atan(sinh φ)"),
        (|w| w.of_angle(Function::Sinh, -1), "log(abs(tanh(1/2 φ)))"),
        (|w| w.of_angle(Function::Tanh, 1), "log(cosh φ)"),
        (
            |w| {
                // exp(−k t) sin(ω t).
                let (u, v) = (w.mul(&[w.w, w.t]), w.mul(&[w.k, w.t]));
                let v = w.f.arena.neg(v);
                let (s, e) = (w.call(Function::Sin, u), w.call(Function::Exp, v));
                w.mul(&[s, e])
            },
            "-exp(-k t) (k sin(ω t) + ω cos(ω t))/(k² + ω²)",
        ),
        (
            |w| {
                // t² cos(ω t).
                let u = w.mul(&[w.w, w.t]);
                let c = w.call(Function::Cos, u);
                w.mul(&[w.t, w.t, c])
            },
            "((ω² t² - 2) sin(ω t) + 2 ω t cos(ω t))/ω³",
        ),
        (
            |w| {
                // 1/(1 + exp(x)).
                let e = w.call(Function::Exp, w.x);
                let e = w.sum(&[Arena::ONE, e]);
                w.along(w.x, e, -2)
            },
            "x - log(1 + exp(x))",
        ),
    ]);
}

#[test]
fn around_an_axis() {
    check(&[
        (
            |w| {
                // k (x ẏ − y ẋ)/(x² + y²).
                let (vx, vy) = (w.rate(w.x), w.rate(w.y));
                let (a, b) = (w.mul(&[w.x, vy]), w.mul(&[w.y, vx]));
                let (top, r2) = (w.f.arena.sub(a, b), w.squares(&[w.x, w.y]));
                let e = w.f.arena.div(top, r2);
                w.mul(&[w.k, e])
            },
            "k atan2(y, x)",
        ),
        (
            |w| {
                // Around x = a, y = b.
                let (x, y) = (w.f.arena.sub(w.x, w.a), w.f.arena.sub(w.y, w.b));
                let e = w.f.arena.call(Function::Atan2, &[y, x]);
                let e = w.rate(e);
                w.f.arena.expand(e, &mut w.f.budget).unwrap()
            },
            "atan2(y - b, x - a)",
        ),
    ]);
}

#[test]
fn what_has_no_closed_form() {
    check(&[
        (
            |w| {
                let x2 = w.squares(&[w.x]);
                let e = w.call(Function::Exp, x2);
                w.along(w.x, e, 2)
            },
            "none",
        ),
        (
            |w| {
                let s = w.call(Function::Sin, w.x);
                let e = w.f.arena.div(s, w.x);
                w.along(w.x, e, 2)
            },
            "none",
        ),
        (
            |w| {
                // The sign of k is not known: an inverse tangent or a logarithm.
                let x2 = w.squares(&[w.x]);
                let e = w.sum(&[x2, w.k]);
                w.along(w.x, e, -2)
            },
            "none",
        ),
    ]);
}

#[test]
fn a_positive_argument_needs_no_bars() {
    let mut w = world();
    let mut facts = w.f.zero.assumptions().clone();
    facts.assume(&mut w.f.arena, w.x, Relation::Greater);
    w.f.zero.set_assumptions(facts);
    let (over_x, over_y) = (w.along(w.x, w.x, -2), w.along(w.y, w.y, -2));
    let v = w.sum(&[over_x, over_y]);
    let model = w.f.model.clone();
    let f = gauge_term(&mut w.f.cx(), &model, &vec![(v, Rational::ONE)]).unwrap().unwrap();
    assert_eq!(w.shown(f), "log x + log(abs(y))");
}

#[test]
fn where_it_is_multivalued() {
    let mut w = world();
    let model = w.f.model.clone();
    let s = w.call(Function::Sin, w.phi);
    let around = w.f.arena.call(Function::Atan2, &[w.y, w.x]);
    let twice = w.mul(&[w.k, w.phi, s]);
    let list = [
        (s, vec![]),
        (w.mul(&[w.k, w.phi]), vec![Winding::Turn(2)]),
        (w.f.arena.add(twice, w.theta), vec![Winding::Turn(2), Winding::Turn(3)]),
        (w.f.arena.add(around, s), vec![Winding::Axis(w.y, w.x)]),
    ];
    for (f, want) in list {
        assert_eq!(multivalued(&mut w.f.cx(), &model, f, &[2, 3]).unwrap(), want);
    }
}
