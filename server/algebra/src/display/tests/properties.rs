//! Random expressions: what is printed is equal to its source, never longer, and reads back.

use super::reader::{Names, read};
use super::system::{budget, equal, verdict};
use crate::arena::{Arena, Expr, Role};
use crate::display::{DisplayOptions, textbook, verbatim};
use crate::function::Function;
use crate::rational::Rational;
use proptest::prelude::*;

/// A recipe for an expression.
#[derive(Clone, Debug)]
enum Recipe {
    Number(i64, i64),
    Name(usize),
    Jet(usize, u16),
    Sum(Vec<Recipe>),
    Product(Vec<Recipe>),
    Power(Box<Recipe>, i64, i64),
    Call(usize, Box<Recipe>),
    Unspecified(u16, Box<Recipe>),
    Bound(Box<Recipe>),
    Member,
}

const PARAMETERS: [&str; 6] = ["m", "g", "l₁", "l₂", "J", "Ω"];
const COORDINATES: [&str; 4] = ["x₁", "x₂", "θ", "länge"];
const FUNCTIONS: [Function; 8] = [
    Function::Sin,
    Function::Cos,
    Function::Sin,
    Function::Cos,
    Function::Tanh,
    Function::Exp,
    Function::Abs,
    Function::Atan,
];

fn recipes() -> impl Strategy<Value = Recipe> {
    let leaf = prop_oneof![
        (-6i64..7, 1i64..5).prop_map(|(n, d)| Recipe::Number(n, d)),
        (0usize..10).prop_map(Recipe::Name),
        (0usize..4, 1u16..4).prop_map(|(k, n)| Recipe::Jet(k, n)),
    ];
    leaf.prop_recursive(5, 40, 4, |inner| {
        let list = prop::collection::vec(inner.clone(), 2..5);
        prop_oneof![
            3 => list.clone().prop_map(Recipe::Sum),
            4 => list.prop_map(Recipe::Product),
            2 => (inner.clone(), -3i64..4, 1i64..3).prop_map(|(b, n, d)| Recipe::Power(Box::new(b), n, d)),
            2 => (0usize..8, inner.clone()).prop_map(|(f, x)| Recipe::Call(f, Box::new(x))),
            1 => (0u16..3, inner.clone()).prop_map(|(n, x)| Recipe::Unspecified(n, Box::new(x))),
            1 => inner.prop_map(|x| Recipe::Bound(Box::new(x))),
        ]
    })
}

fn build(a: &mut Arena, r: &Recipe, index: Option<Expr>) -> Expr {
    match r {
        Recipe::Number(n, d) => a.number(Rational::new(*n, *d).unwrap()),
        Recipe::Name(k) if *k < PARAMETERS.len() => {
            let s = a.symbol(PARAMETERS[*k], None, Role::Parameter);
            a.sym(s)
        }
        Recipe::Name(k) => {
            let s = a.symbol(COORDINATES[*k - PARAMETERS.len()], None, Role::Coordinate);
            a.sym(s)
        }
        Recipe::Jet(k, n) => {
            let s = a.symbol(COORDINATES[*k], None, Role::Coordinate);
            a.jet(s, *n)
        }
        Recipe::Sum(list) => {
            let list: Vec<Expr> = list.iter().map(|r| build(a, r, index)).collect();
            a.sum(&list)
        }
        Recipe::Product(list) => {
            let list: Vec<Expr> = list.iter().map(|r| build(a, r, index)).collect();
            a.product(&list)
        }
        Recipe::Power(b, n, d) => {
            let b = build(a, b, index);
            if b == Arena::ZERO { b } else { a.pow_rational(b, &Rational::new(*n, *d).unwrap()) }
        }
        Recipe::Call(f, x) => {
            let x = build(a, x, index);
            a.call(FUNCTIONS[*f], &[x])
        }
        Recipe::Unspecified(n, x) => {
            let x = build(a, x, index);
            let f = a.symbol("U", None, Role::Function);
            a.unspecified(f, None, &[*n], &[x])
        }
        Recipe::Bound(x) if index.is_none() => {
            let s = a.symbol("@0", None, Role::Index);
            let i = a.sym(s);
            let member = build(a, &Recipe::Member, Some(i));
            let x = build(a, x, Some(i));
            let body = a.mul(x, member);
            let (one, three) = (Arena::ONE, a.integer(3));
            a.bound(s, one, three, body, &mut budget()).unwrap()
        }
        Recipe::Bound(x) => build(a, x, index),
        Recipe::Member => {
            let s = a.symbol("q", None, Role::Coordinate);
            let next = a.add(index.unwrap(), Arena::ONE);
            a.member(s, next, 1)
        }
    }
}

fn names() -> Names {
    Names::new("x₁ x₂ θ länge q", "U")
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 400, ..ProptestConfig::default() })]

    #[test]
    fn verbatim_reads_back(recipe in recipes()) {
        let mut a = Arena::new();
        let e = build(&mut a, &recipe, None);
        let layout = verbatim(&a, e, &DisplayOptions::default());
        prop_assert_eq!(layout.to_expr(&mut a).unwrap(), e, "{}", layout.text());
        for spelling in [layout.text(), layout.plain()] {
            let back = read(&mut a, &names(), &spelling);
            prop_assert_eq!(back, e, "{}", spelling);
        }
        prop_assert!(!layout.latex().is_empty());
    }

    #[test]
    fn textbook_is_equal_and_not_longer(recipe in recipes()) {
        let mut a = Arena::new();
        let e = build(&mut a, &recipe, None);
        let source = verbatim(&a, e, &DisplayOptions::default());
        let layout = textbook(&mut a, e, &DisplayOptions::default(), &mut budget());
        prop_assert!(layout.operations() <= source.operations(), "{} from {}", layout.text(), source.text());
        let shown = layout.to_expr(&mut a).unwrap();
        prop_assert!(equal(&mut a, e, shown), "{} from {}", layout.text(), source.text());
        prop_assert!(!verdict(&mut a, e, shown).is_refuted(), "{} from {}", layout.text(), source.text());
        for spelling in [layout.text(), layout.plain()] {
            let back = read(&mut a, &names(), &spelling);
            prop_assert_eq!(back, shown, "{}", spelling);
        }
    }

    /// Neither earlier expressions in the arena nor the order of building change a print.
    #[test]
    fn history_does_not_matter(first in recipes(), second in recipes()) {
        let mut a = Arena::new();
        let _ = build(&mut a, &first, None);
        let warm = build(&mut a, &second, None);
        let _ = textbook(&mut a, warm, &DisplayOptions::default(), &mut budget());
        let warm = textbook(&mut a, warm, &DisplayOptions::default(), &mut budget());
        let mut b = Arena::new();
        let cold = build(&mut b, &second, None);
        let cold = textbook(&mut b, cold, &DisplayOptions::default(), &mut budget());
        prop_assert_eq!(warm.printed(), cold.printed());
    }
}

/// Hostile shapes end at once and stay bounded.
#[test]
fn large_and_deep() {
    let mut a = Arena::new();
    let x = a.symbol("x", None, Role::Coordinate);
    let (v, x) = (a.jet(x, 1), a.sym(x));
    // A tree of 2^200 leaves on 400 nodes.
    let mut e = a.add(x, v);
    for _ in 0..200 {
        let s = a.call(Function::Exp, &[e]);
        let c = a.call(Function::Tanh, &[e]);
        let p = a.mul(s, v);
        e = a.add(p, c);
    }
    let layout = textbook(&mut a, e, &DisplayOptions::default(), &mut budget());
    assert!(!layout.abbreviations.is_empty());
    assert!(layout.text().len() < 100_000);
    assert_eq!(layout.plain(), "too large to print");
    assert_eq!(layout.to_expr(&mut a), Ok(e));
    // Very deep.
    let mut e = x;
    for _ in 0..15_000 {
        e = a.call(Function::Atan, &[e]);
    }
    let layout = textbook(&mut a, e, &DisplayOptions::default(), &mut budget());
    assert_eq!(layout.to_expr(&mut a), Ok(e));
    assert!(layout.text().len() < 1_000_000);
    // Many monomials.
    let list: Vec<Expr> = (0..40)
        .map(|k| {
            let s = a.symbol(&format!("q{k}"), None, Role::Coordinate);
            a.jet(s, 1)
        })
        .collect();
    let s = a.sum(&list);
    let p = a.pow(s, 10);
    let layout = textbook(&mut a, p, &DisplayOptions::default(), &mut budget());
    assert_eq!(layout.to_expr(&mut a), Ok(p));
    // No budget: as it is.
    let two = a.add(x, v);
    let q = a.pow(two, 2);
    let layout = textbook(&mut a, q, &DisplayOptions::default(), &mut crate::budget::Budget::new(0));
    assert_eq!(layout.text(), "(ẋ + x)²");
}

/// A rewriting that would grow past the cap is left out; the rest is still collected.
#[test]
fn close_to_the_cap() {
    let mut a = Arena::new();
    let names = Names::new("x0 x1 x2 x3 x4 x5 x6", "");
    let terms: Vec<String> =
        (0..200).map(|i| format!("a{} sin(x{}) cos(x{}) x{}'", i % 41, i % 7, i % 5, i % 3)).collect();
    let e = read(&mut a, &names, &terms.join(" + "));
    let options = DisplayOptions { monomials: 250, ..DisplayOptions::default() };
    let source = verbatim(&a, e, &options).operations();
    let layout = textbook(&mut a, e, &options, &mut budget());
    assert!(2 * layout.operations() < source, "{} of {source}", layout.operations());
    let shown = layout.to_expr(&mut a).unwrap();
    assert!(equal(&mut a, e, shown));
}
