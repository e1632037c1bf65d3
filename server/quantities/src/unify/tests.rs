use super::*;
use crate::Exponent;
use proptest::prelude::*;

fn dim(l: i16, m: i16, t: i16) -> Dimension {
    Dimension::whole([l, m, t, 0, 0, 0, 0])
}

fn energy() -> Dimension {
    dim(2, 1, -2)
}

/// The product of powers of unknowns.
fn product(of: &[(usize, i16)]) -> Form {
    let times = |f: Form, (u, n): &(usize, i16)| f.times_power(&Form::unknown(*u), Exponent::whole(*n));
    of.iter().try_fold(Form::one(), times).expect("small exponents")
}

fn is(form: Form, dimension: Dimension) -> Demand {
    Demand { gap: form.over(&dimension.into()).expect("small exponents"), firm: false }
}

/// The values of the unknowns that are known, and the demands to blame.
fn check(n: usize, demands: &[Demand], values: &[Option<Dimension>], blamed: &[usize]) {
    let s = solve(n, demands);
    let got: Vec<_> = s.values.iter().map(|f| f.known()).collect();
    assert_eq!(got, values);
    assert_eq!(s.slips.iter().map(|s| s.demand).collect::<Vec<_>>(), blamed);
    assert!(s.fewest);
}

const X: usize = 0;
const K: usize = 1;

#[test]
fn a_stiffness_is_inferred() {
    // x: length; k x² is an energy.
    let demands = [is(product(&[(X, 1)]), dim(1, 0, 0)), is(product(&[(K, 1), (X, 2)]), energy())];
    check(2, &demands, &[Some(dim(1, 0, 0)), Some(dim(0, 1, -2))], &[]);
}

#[test]
fn an_unknown_may_depend_on_another() {
    // k x² is an energy, and nothing says what x is.
    let s = solve(2, &[is(product(&[(K, 1), (X, 2)]), energy())]);
    assert_eq!(s.values[X], Form::unknown(X));
    assert_eq!(Some(&s.values[K]), Form::from(energy()).times_power(&Form::unknown(X), Exponent::whole(-2)).as_ref());
}

#[test]
fn the_only_wrong_place_is_blamed() {
    // k: stiffness; k x² twice, and k x at last.
    let demands = [
        is(product(&[(X, 1)]), dim(1, 0, 0)),
        is(product(&[(K, 1)]), dim(0, 1, -2)),
        is(product(&[(K, 1), (X, 2)]), energy()),
        is(product(&[(K, 1), (X, 2)]), energy()),
        is(product(&[(K, 1), (X, 1)]), energy()),
    ];
    check(2, &demands, &[Some(dim(1, 0, 0)), Some(dim(0, 1, -2))], &[4]);
}

#[test]
fn a_wrong_guess_early_does_not_blame_the_innocent_end() {
    // k is declared a force; every use wants a stiffness.
    let demands = [
        is(product(&[(X, 1)]), dim(1, 0, 0)),
        is(product(&[(K, 1)]), dim(1, 1, -2)),
        is(product(&[(K, 1), (X, 2)]), energy()),
        is(product(&[(K, 1), (X, 2)]), energy()),
        is(product(&[(K, 1), (X, 2)]), energy()),
    ];
    check(2, &demands, &[Some(dim(1, 0, 0)), Some(dim(0, 1, -2))], &[1]);
    let slip = &solve(2, &demands).slips[0];
    assert_eq!(slip.gap, dim(-1, 0, 0));
    assert_eq!(slip.because, [0, 2]);
}

#[test]
fn of_two_equally_short_ones_the_later_is_blamed() {
    let demands = [is(product(&[(X, 1)]), dim(1, 0, 0)), is(product(&[(X, 1)]), dim(0, 0, 1))];
    check(1, &demands, &[Some(dim(1, 0, 0))], &[1]);
}

#[test]
fn a_firm_demand_is_not_blamed() {
    let mut demands = [is(product(&[(X, 1)]), dim(1, 0, 0)), is(product(&[(X, 1)]), dim(0, 0, 1))];
    demands[1].firm = true;
    check(1, &demands, &[Some(dim(0, 0, 1))], &[0]);
}

#[test]
fn slips_far_from_each_other_are_two() {
    let demands = [
        is(product(&[(X, 1)]), dim(1, 0, 0)),
        is(product(&[(K, 1)]), dim(0, 1, 0)),
        is(product(&[(X, 1)]), dim(0, 0, 1)),
        is(product(&[(K, 1)]), dim(0, 0, 1)),
    ];
    check(2, &demands, &[Some(dim(1, 0, 0)), Some(dim(0, 1, 0))], &[2, 3]);
}

fn demands() -> impl Strategy<Value = Vec<Demand>> {
    let demand = (prop::collection::vec((0usize..5, -2i16..3), 1..4), -2i16..3, -2i16..3)
        .prop_map(|(of, l, m)| is(product(&of), dim(l, m, 0)));
    prop::collection::vec(demand, 1..9)
}

proptest! {
    /// Without the blamed demands the rest holds, and no smaller set would do.
    #[test]
    fn the_rest_is_consistent(list in demands()) {
        let s = solve(5, &list);
        let consistent = |without: &dyn Fn(usize) -> bool| {
            let rest: Vec<Demand> = list.iter().enumerate().filter(|(k, _)| !without(*k)).map(|p| p.1.clone()).collect();
            solve(5, &rest).slips.is_empty()
        };
        let blamed: Vec<usize> = s.slips.iter().map(|x| x.demand).collect();
        prop_assert!(consistent(&|k| blamed.contains(&k)));
        if s.fewest {
            for mask in 0u32..1 << list.len() {
                if (mask.count_ones() as usize) < blamed.len() {
                    prop_assert!(!consistent(&|k| mask & (1 << k) != 0), "{:b} would do for {:?}", mask, blamed);
                }
            }
        }
    }

    /// The order of the demands changes no value.
    #[test]
    fn the_order_does_not_matter(list in demands()) {
        let s = solve(5, &list);
        if s.slips.is_empty() {
            let back: Vec<Demand> = list.iter().rev().cloned().collect();
            prop_assert_eq!(s.values, solve(5, &back).values);
        }
    }
}
