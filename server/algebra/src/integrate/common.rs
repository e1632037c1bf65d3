//! Common factors of polynomials.

use super::polynomial::{MAX_EXPONENT, Poly, power_of, times};
use crate::arena::{Arena, Expr};
use crate::budget::{Budget, Stopped};
use crate::rational::Rational;

/// Expressions divided by their greatest common divisor as polynomials in what occurs in their factors, expanded; negative
/// powers are taken out, too. The expressions themselves where an exponent is no small integer. A common factor may be left
/// where the polynomials are long. Costs an expansion and a few divisions for each.
pub fn without_common_factor(arena: &mut Arena, list: &[Expr], budget: &mut Budget) -> Result<Vec<Expr>, Stopped> {
    let mut bases: Vec<Expr> = Vec::new();
    let mut polynomials = Vec::new();
    for &e in list {
        let e = arena.expand(e, budget)?;
        let mut p = Poly::zero();
        for (term, c) in arena.summands(e) {
            let mut m = Default::default();
            for (base, n) in arena.factors(term) {
                let Some(n) = n.to_i64().filter(|n| n.abs() < MAX_EXPONENT.into()) else { return Ok(list.to_vec()) };
                let k = bases.iter().position(|&b| b == base).unwrap_or_else(|| {
                    bases.push(base);
                    bases.len() - 1
                });
                m = times(&m, &power_of(k, n as i16), 1);
            }
            p.push(m, c);
        }
        polynomials.push(p);
    }
    // The lowest exponents of all terms together come out first.
    let mut all = Poly::zero();
    for p in &polynomials {
        p.0.keys().for_each(|m| all.push(m.clone(), Rational::ONE));
    }
    let low = all.lowest();
    for p in &mut polynomials {
        *p = p.shift(&times(&Default::default(), &low, -1), &Rational::ONE);
    }
    let mut common = Poly::zero();
    for p in &polynomials {
        common = common.gcd(p, budget)?;
    }
    let mut out = Vec::new();
    for p in &polynomials {
        let Some(q) = p.divide(&common, budget)? else { return Ok(list.to_vec()) };
        let mut terms = Vec::new();
        for (m, c) in &q.0 {
            let factors: Vec<_> = bases.iter().zip(m).map(|(&b, &n)| (b, Rational::integer(n.into()))).collect();
            terms.push((arena.monomial(&factors), c.clone()));
        }
        out.push(arena.linear(&terms));
    }
    Ok(out)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::arena::Role;

    #[test]
    fn common_factors_come_out() {
        let (mut a, mut b) = (Arena::new(), Budget::new(100_000));
        let [x, y] = ["x", "y"].map(|n| a.symbol(n, None, Role::Parameter)).map(|s| a.sym(s));
        let (sum, gap) = (a.add(x, y), a.sub(x, y));
        let over = a.pow(x, -2);
        // (x² − y²)/x², (x + y) y/x, 0.
        let first = a.product(&[sum, gap, over]);
        let second = a.product(&[sum, y]);
        let second = a.div(second, x);
        let out = without_common_factor(&mut a, &[first, second, Arena::ZERO], &mut b).unwrap();
        let xy = a.mul(x, y);
        assert_eq!(out, [gap, xy, Arena::ZERO]);
        let root = a.sqrt(x);
        assert_eq!(without_common_factor(&mut a, &[root, x], &mut b).unwrap(), [root, x]);
    }
}
