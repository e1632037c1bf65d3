//! Random expressions: what equals by construction is never refuted, what differs at a point is never proved.

use super::*;
use proptest::prelude::*;

/// A recipe for an expression, built by the constructors or in another, equal way.
#[derive(Clone, Debug)]
enum Recipe {
    Number(i64, i64),
    Atom(u8),
    Add(Box<Recipe>, Box<Recipe>),
    Mul(Box<Recipe>, Box<Recipe>),
    Div(Box<Recipe>, Box<Recipe>),
    Square(Box<Recipe>),
    Call(u8, Box<Recipe>),
    Root(Box<Recipe>),
    Function(u8, Box<Recipe>),
}

const CALLS: [Function; 7] =
    [Function::Sin, Function::Cos, Function::Tan, Function::Exp, Function::Tanh, Function::Abs, Function::Atan];

fn recipe(functions: bool) -> impl Strategy<Value = Recipe> {
    let leaf = prop_oneof![
        (-5i64..6, 1i64..5).prop_map(|(n, d)| Recipe::Number(n, d)),
        (0u8..4).prop_map(Recipe::Atom),
        (0u8..4).prop_map(Recipe::Atom),
    ];
    leaf.prop_recursive(5, 24, 2, move |inner| {
        let two = || (inner.clone(), inner.clone());
        let top = if functions { 7u8 } else { 3 };
        prop_oneof![
            3 => two().prop_map(|(a, b)| Recipe::Add(a.into(), b.into())),
            3 => two().prop_map(|(a, b)| Recipe::Mul(a.into(), b.into())),
            1 => two().prop_map(|(a, b)| Recipe::Div(a.into(), b.into())),
            1 => inner.clone().prop_map(|a| Recipe::Square(a.into())),
            2 => (0..top, inner.clone()).prop_map(|(k, a)| Recipe::Call(k, a.into())),
            u32::from(functions) => inner.clone().prop_map(|a| Recipe::Root(a.into())),
            u32::from(functions) => (0u8..2, inner).prop_map(|(k, a)| Recipe::Function(k, a.into())),
        ]
    })
}

/// Builds a recipe; `other` takes another way to the same value wherever there is one.
fn build(l: &mut Lab, r: &Recipe, other: bool) -> Expr {
    match r {
        Recipe::Number(n, d) => l.arena.number(Rational::new(*n, *d).unwrap()),
        Recipe::Atom(k) => l.x(["x", "y", "z", "w"][*k as usize]),
        Recipe::Add(a, b) => {
            let (a, b) = (build(l, a, other), build(l, b, other));
            l.arena.add(a, b)
        }
        Recipe::Mul(a, b) => {
            let (a, b) = (build(l, a, other), build(l, b, other));
            if other {
                // ((a + b)² − a² − b²)/2.
                let s = l.arena.add(a, b);
                let (s2, a2, b2) = (l.arena.pow(s, 2), l.arena.pow(a, 2), l.arena.pow(b, 2));
                let half = Rational::HALF;
                l.arena.linear(&[(s2, half.clone()), (a2, half.neg()), (b2, half.neg())])
            } else {
                l.arena.mul(a, b)
            }
        }
        Recipe::Div(a, b) => {
            let (a, b) = (build(l, a, other), build(l, b, other));
            l.arena.div(a, b)
        }
        Recipe::Square(a) => {
            let a = build(l, a, other);
            let p = l.arena.pow(a, 2);
            if other { l.arena.expand(p, &mut Budget::new(400)).unwrap_or(p) } else { p }
        }
        Recipe::Call(k, a) => {
            let a = build(l, a, other);
            let f = CALLS[*k as usize];
            if !other {
                return l.call(f, a);
            }
            match f {
                Function::Sin => {
                    let h = l.over(a, 2);
                    let (s, c) = (l.call(Function::Sin, h), l.call(Function::Cos, h));
                    let p = l.arena.mul(s, c);
                    l.times(2, p)
                }
                Function::Cos => {
                    let h = l.over(a, 2);
                    let s = l.call(Function::Sin, h);
                    let s2 = l.arena.pow(s, 2);
                    let t = l.times(2, s2);
                    l.arena.sub(Arena::ONE, t)
                }
                Function::Tan => {
                    let (s, c) = (l.call(Function::Sin, a), l.call(Function::Cos, a));
                    l.arena.div(s, c)
                }
                Function::Exp => {
                    let h = l.over(a, 3);
                    let e = l.call(f, h);
                    l.arena.pow(e, 3)
                }
                Function::Abs => {
                    let s = l.call(Function::Sign, a);
                    l.arena.mul(a, s)
                }
                _ => l.call(f, a),
            }
        }
        Recipe::Root(a) => {
            let a = build(l, a, other);
            l.arena.sqrt(a)
        }
        Recipe::Function(k, a) => {
            let a = build(l, a, other);
            l.function("U", *k as u16, a)
        }
    }
}

/// Whether a function stands inside another.
fn nested(r: &Recipe, inside: bool) -> bool {
    match r {
        Recipe::Number(..) | Recipe::Atom(_) => false,
        Recipe::Add(a, b) | Recipe::Mul(a, b) | Recipe::Div(a, b) => nested(a, inside) || nested(b, inside),
        Recipe::Square(a) => nested(a, inside),
        Recipe::Call(_, a) | Recipe::Root(a) | Recipe::Function(_, a) => inside || nested(a, true),
    }
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 400, failure_persistence: None, ..ProptestConfig::default() })]

    /// What is equal by construction is never refuted.
    #[test]
    fn equals_are_never_refuted(r in recipe(true)) {
        let l = &mut Lab::new();
        let (a, b) = (build(l, &r, false), build(l, &r, true));
        let v = l.difference(a, b);
        prop_assert!(!v.is_refuted(), "{v:?}");
    }

    /// Rational and trigonometric identities are all proved, unless they divide by zero or by far too much.
    #[test]
    fn rational_and_trigonometric_equals_are_proved(r in recipe(false)) {
        prop_assume!(!nested(&r, false));
        let l = &mut Lab::new();
        let (a, b) = (build(l, &r, false), build(l, &r, true));
        match l.difference(a, b) {
            Verdict::Proved => {}
            Verdict::Undecided(
                Reason::Undefined | Reason::DenominatorsVanish | Reason::DegreeTooHigh
            ) => {}
            v => prop_assert!(false, "{v:?}"),
        }
    }

    /// What differs at a real point is never proved; a refutation's enclosure holds the value at its point.
    #[test]
    fn differences_are_never_proved(r in recipe(true), s in recipe(true), n in 1i64..1000) {
        let l = &mut Lab::new();
        let (a, b) = (build(l, &r, false), build(l, &s, true));
        let e = l.arena.sub(a, b);
        let at: Vec<(Expr, f64)> = ["x", "y", "z", "w"]
            .iter()
            .enumerate()
            .map(|(k, name)| (l.x(name), 0.3 + ((n * (k as i64 + 3) * 37) % 101) as f64 / 47.0))
            .collect();
        let here = value(l, e, &at);
        let scale = value(l, a, &at).abs() + value(l, b, &at).abs();
        let mut test = ZeroTest::new(Assumptions::new());
        let verdict = test.is_zero(&mut l.arena, e, &mut Budget::new(1_000_000));
        if here.is_finite() && here.abs() > 1e-6 * (1.0 + scale) && scale < 1e12 {
            prop_assert!(!verdict.is_proved(), "differs by {here}");
        }
        if let Verdict::Refuted(Some(w)) = verdict {
            let point = test.witness_values(&l.arena, e, &w);
            let at: Vec<(Expr, f64)> = point.iter().map(|(x, r)| (*x, r.to_f64())).collect();
            let v = value(l, e, &at);
            if v.is_finite() {
                let slack = 1e-9 * (1.0 + v.abs());
                prop_assert!(w.lower - slack <= v && v <= w.upper + slack, "{v} outside {w:?}");
            }
        }
    }

    /// A sign that is inferred holds at every point inside the assumptions.
    #[test]
    fn inferred_signs_hold(r in recipe(true), n in 1i64..1000) {
        use super::super::Sign;
        let l = &mut Lab::new();
        let e = build(l, &r, false);
        // x > 0, 0 < y < 1, z ≤ −1/2, nothing of w.
        let (x, y, z, w) = (l.x("x"), l.x("y"), l.x("z"), l.x("w"));
        l.positive(x);
        l.positive(y);
        let below = l.arena.sub(Arena::ONE, y);
        l.positive(below);
        let up = l.arena.add(z, Arena::ONE);
        let half = l.arena.number(Rational::HALF);
        let up = l.arena.sub(up, half);
        l.facts.assume(&mut l.arena, up, Relation::LessEqual);
        let mut test = ZeroTest::new(l.facts.clone());
        let sign = test.sign_of(&mut l.arena, e, &mut Budget::new(100_000));
        for k in 0..6 {
            let u = |j: i64| ((n * (j + 3) * 37 + k * 53) % 101) as f64 / 101.0 + 0.001;
            let at = [(x, 3.0 * u(0)), (y, u(1).min(0.999)), (z, -0.5 - 2.0 * u(2)), (w, 4.0 * u(3) - 2.0)];
            let v = value(l, e, &at);
            let tiny = 1e-9;
            let holds = match sign {
                Sign::Positive => v > -tiny,
                Sign::NonNegative => v >= -tiny,
                Sign::Negative => v < tiny,
                Sign::NonPositive => v <= tiny,
                Sign::Zero => v.abs() < tiny,
                _ => true,
            };
            prop_assert!(holds || !v.is_finite() || v.abs() > 1e12, "{sign:?} but {v}");
        }
    }
}
