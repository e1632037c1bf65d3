//! Gauge terms that are known: F is drawn, V = dF/dt is disguised, and F is found back.

use super::*;
use crate::fixture::Fixture;
use crate::symmetry::euler_vanishes;
use leastwise_algebra::{DisplayOptions, Relation, textbook};

/// A stream of numbers, the same in every run.
struct Draw(u64);

impl Draw {
    fn below(&mut self, n: u64) -> u64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        (z ^ (z >> 31)) % n
    }
}

#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Class {
    Polynomial,
    Rational,
    Root,
    Angle,
    AngleBelow,
    Exponential,
    Hyperbolic,
    Logarithm,
    Inverse,
    Given,
    Absolute,
    Signal,
    Mixed,
}

const CLASSES: [Class; 13] = [
    Class::Polynomial,
    Class::Rational,
    Class::Root,
    Class::Angle,
    Class::AngleBelow,
    Class::Exponential,
    Class::Hyperbolic,
    Class::Logarithm,
    Class::Inverse,
    Class::Given,
    Class::Absolute,
    Class::Signal,
    Class::Mixed,
];

struct World {
    f: Fixture,
    x: Expr,
    y: Expr,
    phi: Expr,
    theta: Expr,
    t: Expr,
    /// Two lengths, a rate, a stiffness; the lengths are positive.
    a: Expr,
    b: Expr,
    w: Expr,
    k: Expr,
}

fn world() -> World {
    let mut f = Fixture::new();
    let (x, _) = f.coordinate("x");
    let (y, _) = f.coordinate("y");
    let (phi, _) = f.coordinate("φ");
    let (theta, _) = f.coordinate("θ");
    let t = f.time();
    let [a, b, w, k] = ["a", "b", "ω", "k"].map(|n| f.parameter(n));
    let mut facts = leastwise_algebra::Assumptions::new();
    for p in [a, b, w] {
        facts.assume(&mut f.arena, p, Relation::Greater);
    }
    f.zero.set_assumptions(facts);
    f.budget = Budget::new(40_000_000);
    World { f, x, y, phi, theta, t, a, b, w, k }
}

impl World {
    fn call(&mut self, f: Function, e: Expr) -> Expr {
        self.f.arena.call(f, &[e])
    }

    fn mul(&mut self, list: &[Expr]) -> Expr {
        self.f.arena.product(list)
    }

    fn sum(&mut self, list: &[Expr]) -> Expr {
        self.f.arena.sum(list)
    }

    fn squares(&mut self, list: &[Expr]) -> Expr {
        let list: Vec<Expr> = list.iter().map(|e| self.f.arena.pow(*e, 2)).collect();
        self.sum(&list)
    }

    fn root(&mut self, e: Expr, n: i64) -> Expr {
        self.f.arena.pow_rational(e, &Rational::new(n, 2).unwrap())
    }

    /// A power product of coordinates and time.
    fn power(&mut self, d: &mut Draw) -> Expr {
        let atom = [self.x, self.y, self.t, self.x][d.below(4) as usize];
        let n = d.below(3) as i64;
        self.f.arena.pow(atom, n)
    }

    fn constant(&mut self, d: &mut Draw) -> Expr {
        let n = self.f.arena.number(Rational::new(d.below(5) as i64 + 1, d.below(3) as i64 + 1).unwrap());
        match d.below(5) {
            0 => n,
            1 => self.mul(&[n, self.k]),
            2 => self.mul(&[n, self.a]),
            3 => self.mul(&[n, self.b, self.w]),
            _ => {
                let s = self.sum(&[self.a, self.b]);
                self.mul(&[n, s])
            }
        }
    }

    fn angle(&mut self, d: &mut Draw) -> Expr {
        match d.below(6) {
            0 => self.phi,
            1 => self.theta,
            2 => self.f.arena.scale(self.phi, &Rational::integer(2)),
            3 => self.f.arena.sub(self.phi, self.theta),
            4 => self.mul(&[self.w, self.t]),
            _ => self.phi,
        }
    }

    /// A function of a class.
    fn block(&mut self, class: Class, d: &mut Draw) -> Expr {
        use Function::*;
        match class {
            Class::Polynomial => self.power(d),
            Class::Rational => {
                let one = Arena::ONE;
                let e = match d.below(7) {
                    0 => self.x,
                    1 => self.sum(&[self.x, self.a]),
                    2 => self.squares(&[self.x, self.y]),
                    3 => self.squares(&[self.x, self.a]),
                    4 => self.sum(&[self.x, self.y, self.b]),
                    5 => self.squares(&[self.t, one]),
                    _ => self.f.arena.sub(self.x, self.y),
                };
                self.f.arena.pow(e, -1 - (d.below(2) as i64))
            }
            Class::Root => {
                let e = match d.below(4) {
                    0 => self.squares(&[self.x, self.y]),
                    1 => self.squares(&[self.x, self.a]),
                    2 => self.squares(&[self.x, self.y, self.b]),
                    _ => self.x,
                };
                let n = [1, -1, -3, 3][d.below(4) as usize];
                self.root(e, n)
            }
            Class::Angle => {
                let u = self.angle(d);
                let f = if d.below(2) == 0 { Sin } else { Cos };
                let e = self.call(f, u);
                let n = 1 + d.below(2) as i64;
                self.f.arena.pow(e, n)
            }
            Class::AngleBelow => {
                let u = [self.phi, self.theta][d.below(2) as usize];
                match d.below(4) {
                    0 => self.call(Tan, u),
                    1 => {
                        let c = self.call(Cos, u);
                        self.f.arena.pow(c, -1)
                    }
                    2 => {
                        let s = self.call(Sin, u);
                        self.f.arena.pow(s, -1)
                    }
                    _ => {
                        let (s, c) = (self.call(Sin, u), self.call(Cos, u));
                        let two = self.f.arena.integer(2);
                        let e = self.sum(&[two, c]);
                        self.f.arena.div(s, e)
                    }
                }
            }
            Class::Exponential => {
                let u = match d.below(4) {
                    0 => self.f.arena.div(self.x, self.a),
                    1 => self.mul(&[self.w, self.t]),
                    2 => self.f.arena.neg(self.y),
                    _ => self.squares(&[self.x]),
                };
                self.call(Exp, u)
            }
            Class::Hyperbolic => {
                let u = [self.x, self.f.arena.div(self.y, self.b)][d.below(2) as usize];
                let f = [Sinh, Cosh, Tanh][d.below(3) as usize];
                self.call(f, u)
            }
            Class::Logarithm => {
                let u = match d.below(5) {
                    0 => self.f.arena.call(Abs, &[self.x]),
                    1 => self.squares(&[self.x, self.y]),
                    2 => self.squares(&[self.x, self.a]),
                    3 => {
                        let c = self.call(Cos, self.phi);
                        self.call(Abs, c)
                    }
                    _ => {
                        let r = self.squares(&[self.x, self.y]);
                        let r = self.root(r, 1);
                        self.sum(&[r, self.b])
                    }
                };
                self.call(Log, u)
            }
            Class::Inverse => match d.below(4) {
                0 => self.f.arena.call(Atan2, &[self.y, self.x]),
                1 => {
                    let u = self.f.arena.div(self.x, self.a);
                    self.call(Asin, u)
                }
                2 => {
                    let u = self.f.arena.div(self.y, self.b);
                    self.call(Atan, u)
                }
                _ => self.call(Atan, self.x),
            },
            Class::Given => {
                let s = self.f.arena.symbol("U", None, Role::Function);
                let order = d.below(2) as u16;
                match d.below(4) {
                    0 => self.f.arena.unspecified(s, None, &[order], &[self.x]),
                    1 => {
                        let r = self.squares(&[self.x, self.y]);
                        let r = self.root(r, 1);
                        self.f.arena.unspecified(s, None, &[0], &[r])
                    }
                    2 => {
                        let s = self.f.arena.symbol("W", None, Role::Function);
                        self.f.arena.unspecified(s, None, &[0, 0], &[self.x, self.phi])
                    }
                    _ => {
                        let u = self.f.arena.sub(self.phi, self.theta);
                        self.f.arena.unspecified(s, None, &[0], &[u])
                    }
                }
            }
            Class::Absolute => {
                let u = [self.x, self.f.arena.sub(self.x, self.y)][d.below(2) as usize];
                self.call(Abs, u)
            }
            Class::Signal => {
                let u = self.f.arena.symbol("u", None, Role::Input);
                let order = d.below(2) as u16;
                self.f.arena.jet(u, order)
            }
            Class::Mixed => {
                let one = CLASSES[d.below(12) as usize];
                self.block(one, d)
            }
        }
    }

    /// A sum of products with blocks of a class.
    fn function(&mut self, class: Class, d: &mut Draw) -> Expr {
        let mut out = Vec::new();
        for _ in 0..1 + d.below(3) {
            let mut list = vec![self.constant(d), self.block(class, d)];
            if d.below(2) == 0 {
                list.push(self.power(d));
            }
            if d.below(3) == 0 {
                list.push(self.block(class, d));
            }
            out.push(self.mul(&list));
        }
        self.sum(&out)
    }

    /// V = dF/dt: as it comes, expanded, or as it is printed.
    fn disguised(&mut self, f: Expr, how: u64) -> Expr {
        let v = self.f.arena.total(f, &mut self.f.budget).unwrap();
        match how {
            0 => v,
            1 => self.f.arena.expand(v, &mut self.f.budget).unwrap(),
            _ => {
                let layout = textbook(&mut self.f.arena, v, &DisplayOptions::default(), &mut Budget::new(1 << 22));
                layout.to_expr(&mut self.f.arena).unwrap()
            }
        }
    }

    fn shown(&mut self, e: Expr) -> String {
        textbook(&mut self.f.arena, e, &DisplayOptions::default(), &mut Budget::new(1 << 22)).text()
    }
}

/// How many of so many are found, and the first that are not.
fn score(class: Class, draws: u64) -> (u64, Vec<String>) {
    let mut found = 0;
    let mut missed = Vec::new();
    for seed in 0..draws {
        let mut w = world();
        let mut d = Draw(seed * 1000 + class as u64);
        let f = w.function(class, &mut d);
        let v = w.disguised(f, seed % 3);
        let model = w.f.model.clone();
        let got = gauge_term(&mut w.f.cx(), &model, &vec![(v, Rational::ONE)]);
        if let Ok(Some(_)) = got {
            found += 1;
        } else {
            // What the Euler operator does not tell is no miss of the integration.
            let euler = euler_vanishes(&mut w.f.cx(), &model, &vec![(v, Rational::ONE)]);
            let f = w.shown(f);
            missed.push(format!("{seed}: {f}   [{got:?}, Euler {euler:?}]"));
        }
    }
    (found, missed)
}

#[test]
#[ignore = "prints the scores"]
#[allow(clippy::print_stderr)]
fn scores() {
    let draws = std::env::var("DRAWS").ok().and_then(|s| s.parse().ok()).unwrap_or(30);
    let only = std::env::var("CLASS").ok();
    for class in CLASSES {
        if only.as_ref().is_some_and(|o| *o != format!("{class:?}")) {
            continue;
        }
        let start = std::time::Instant::now();
        let (found, missed) = score(class, draws);
        eprintln!("{class:?}: {found} of {draws} in {:?}", start.elapsed());
        for m in missed.iter().take(12) {
            eprintln!("    {m}");
        }
    }
}

#[test]
fn what_is_derived_is_integrated_again() {
    for class in CLASSES {
        let (found, missed) = score(class, 30);
        assert_eq!((found, missed), (30, Vec::new()), "{class:?}");
    }
}

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
    fn rate(&mut self, q: Expr) -> Expr {
        self.f.arena.total(q, &mut self.f.budget).unwrap()
    }

    /// q̇ e^(n/2).
    fn along(&mut self, q: Expr, e: Expr, n: i64) -> Expr {
        let v = self.rate(q);
        self.f.arena.monomial(&[(v, Rational::ONE), (e, Rational::new(n, 2).unwrap())])
    }

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
