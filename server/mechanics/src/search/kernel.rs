//! Relations among columns of expressions with coefficients that are monomials in the parameters.
//!
//! Parameters take the values of primes, residues tell the relations [SZ], and prime factors tell the monomials. What comes
//! out is to be confirmed.

use crate::context::Context;
use leastwise_algebra::{Arena, Expr, Node, Rational, Reason, Role, Stopped};

/// Why a search ends.
pub(super) enum Halt {
    /// A bound was reached.
    Stopped(Stopped),
    /// A linear system was not solved, and why.
    Unsolved(String),
}

impl From<Stopped> for Halt {
    fn from(s: Stopped) -> Halt {
        Halt::Stopped(s)
    }
}

/// Values of parameters.
const PRIMES: [i64; 12] = [11, 13, 17, 19, 23, 29, 31, 37, 41, 43, 47, 53];

/// A basis, in echelon form by the last columns, of all c with Σⱼ cⱼ columns[j][i] ≡ 0 for each i. Costs an elimination in
/// the number of columns.
pub(super) fn kernel(cx: &mut Context<'_>, columns: &[Vec<Expr>]) -> Result<Vec<Vec<Expr>>, Halt> {
    if columns.is_empty() {
        return Ok(Vec::new());
    }
    let mut of: Vec<(Expr, i64)> = Vec::new();
    let mut values = hashbrown::HashMap::new();
    for e in columns.iter().flatten() {
        for a in cx.arena.atoms(*e) {
            let parameter = matches!(cx.arena.node(a), Node::Symbol(s) if cx.arena.info(*s).role == Role::Parameter);
            if parameter && !values.contains_key(&a) {
                let Some(&p) = PRIMES.get(of.len()) else {
                    return Err(Halt::Unsolved("there are too many parameters".into()));
                };
                values.insert(a, cx.arena.integer(p));
                of.push((a, p));
            }
        }
    }
    let mut parts = Vec::new();
    for c in columns {
        parts.push(c.iter().map(|&e| cx.arena.substitute(e, &values, cx.budget)).collect::<Result<Vec<_>, _>>()?);
    }
    let (n, rows) = (columns.len(), columns[0].len().max(1));
    cx.budget.charge(n * n * n / 4 + n)?;
    let residues = match cx.zero.residue_vectors(cx.arena, &parts, n / rows + 6, cx.budget) {
        Ok(residues) => residues,
        Err(Reason::Cancelled) => return Err(Stopped::Cancelled.into()),
        Err(Reason::TooLarge) => return Err(Stopped::TooLarge.into()),
        Err(reason) => return Err(Halt::Unsolved(reason.to_string())),
    };
    let Some(relations) = residues.relations() else {
        return Err(Halt::Unsolved("coefficients are no small numbers".into()));
    };
    Ok(relations.iter().map(|r| r.iter().map(|c| decode(cx, &of, c)).collect()).collect())
}

/// The monomial that a value stands for.
fn decode(cx: &mut Context<'_>, of: &[(Expr, i64)], value: &Rational) -> Expr {
    let (Some((mut n, mut d)), false) = (value.small(), value.is_zero()) else { return Arena::ZERO };
    let mut factors = Vec::new();
    for &(a, p) in of {
        let mut e = 0;
        while n % p == 0 {
            n /= p;
            e += 1;
        }
        while d % p == 0 {
            d /= p;
            e -= 1;
        }
        factors.push((a, Rational::integer(e)));
    }
    let product = cx.arena.monomial(&factors);
    cx.arena.scale(product, &Rational::new(n, d).unwrap_or(Rational::ZERO))
}
