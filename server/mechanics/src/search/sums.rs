//! Coefficients such as (m₁ − m₂)/m₂: a sum of two monomials in the parameters, times a monomial, told from its values at
//! two sets of primes.

use crate::context::Context;
use leastwise_algebra::{Expr, Rational};

/// Coefficients of the two monomials.
const COEFFICIENTS: [(i64, i64); 6] = [(1, -1), (1, 1), (1, -2), (1, 2), (2, -1), (2, 1)];
/// What is left of a monomial's value without its primes is a small number.
const SMALL: i64 = 16;

/// The places of the primes in a product of two at most.
type Monomial = Vec<usize>;

fn value(monomial: &Monomial, primes: &[i64]) -> i64 {
    monomial.iter().map(|&k| primes[k]).product()
}

/// The sum of two monomials without a common factor, times a monomial, that has these values at the two sets of primes;
/// one prime for each of the parameters. Costs a few thousand divisions.
pub(super) fn sum_of_two(
    cx: &mut Context<'_>,
    parameters: &[Expr],
    primes: [&[i64]; 2],
    values: [&Rational; 2],
) -> Option<Expr> {
    let n = parameters.len();
    let single: Vec<Monomial> = (0..n).map(|k| vec![k]).collect();
    let double: Vec<Monomial> = (0..n).flat_map(|k| (k..n).map(move |l| vec![k, l])).collect();
    for list in [single, double] {
        for (i, first) in list.iter().enumerate() {
            for second in list[i + 1..].iter().filter(|m| !m.iter().any(|k| first.contains(k))) {
                for (a, b) in COEFFICIENTS {
                    let at = |k: usize| a * value(first, primes[k]) + b * value(second, primes[k]);
                    let Some((powers, scale)) = monomial(values[0], at(0), primes[0]) else { continue };
                    // The same at the other primes.
                    let there =
                        powers.iter().zip(primes[1]).try_fold(scale.mul(&Rational::integer(at(1))), |v, (&e, &p)| {
                            Some(v.mul(&Rational::integer(p).pow(e, 4096)?))
                        });
                    if there.as_ref() != Some(values[1]) {
                        continue;
                    }
                    let product = |cx: &mut Context<'_>, of: &Monomial| {
                        let list: Vec<Expr> = of.iter().map(|&k| parameters[k]).collect();
                        cx.arena.product(&list)
                    };
                    let (first, second) = (product(cx, first), product(cx, second));
                    let sum = cx.arena.linear(&[(first, Rational::integer(a)), (second, Rational::integer(b))]);
                    let mut factors = vec![(sum, Rational::ONE)];
                    factors.extend(parameters.iter().zip(&powers).map(|(&p, &e)| (p, Rational::integer(e))));
                    factors.retain(|f| !f.1.is_zero());
                    let out = cx.arena.monomial(&factors);
                    return Some(cx.arena.scale(out, &scale));
                }
            }
        }
    }
    None
}

/// value/divisor as powers of the primes and a small number.
fn monomial(value: &Rational, divisor: i64, primes: &[i64]) -> Option<(Vec<i64>, Rational)> {
    let (mut n, mut d) = value.div(&Rational::integer(divisor))?.small()?;
    let mut powers = Vec::with_capacity(primes.len());
    for &p in primes {
        let mut e = 0;
        while n != 0 && n % p == 0 {
            n /= p;
            e += 1;
        }
        while d % p == 0 {
            d /= p;
            e -= 1;
        }
        powers.push(e);
    }
    (n != 0 && n.abs() <= SMALL && d <= SMALL).then(|| Rational::new(n, d)).flatten().map(|scale| (powers, scale))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::fixture::Fixture;

    #[test]
    fn differences_of_masses() {
        let mut f = Fixture::new();
        let [a, b, c] = ["a", "b", "c"].map(|p| f.parameter(p));
        let difference = f.arena.sub(a, c);
        let coefficient = f.arena.monomial(&[(difference, Rational::integer(1)), (b, Rational::integer(-2))]);
        let of = |v: [i64; 3]| Rational::new(v[0] - v[2], v[1] * v[1]).unwrap();
        let primes = [[11, 13, 17], [101, 67, 97]];
        let values = primes.map(of);
        let found = sum_of_two(&mut f.cx(), &[a, b, c], [&primes[0], &primes[1]], [&values[0], &values[1]]);
        assert_eq!(found, Some(coefficient));
        // No such sum.
        let none = sum_of_two(&mut f.cx(), &[a, b, c], [&primes[0], &primes[1]], [&values[0], &Rational::HALF]);
        assert_eq!(none, None);
    }
}
