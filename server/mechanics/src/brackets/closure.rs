//! A bracket as a combination of charges: found by residues, coefficients lifted to rationals times monomials in the
//! parameters, each relation to be confirmed by the zero test.

use crate::context::Context;
use leastwise_algebra::{Expr, Node, Rational, Reason, Role, Stopped};

/// One summand of a combination: coefficient, which is constant, times the charges in the list; none for a constant.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Summand {
    /// Free of coordinates, velocities and time.
    pub coefficient: Expr,
    /// Numbers of charges, ascending; two for a product.
    pub charges: Vec<usize>,
}

/// Values of parameters: their prime factors tell the monomial.
const PRIMES: [i64; 12] = [11, 13, 17, 19, 23, 29, 31, 37, 41, 43, 47, 53];

/// The parameters by number, with the values that tell them apart.
pub(super) struct Values {
    of: Vec<(Expr, i64)>,
    square: bool,
    map: hashbrown::HashMap<Expr, Expr>,
    /// The state at which coefficients that are no monomials are read off, one map for each row.
    states: Vec<hashbrown::HashMap<Expr, Expr>>,
}

impl Values {
    /// For the parameters and the state in some expressions; squares of primes where roots of parameters occur.
    pub fn new(cx: &mut Context<'_>, list: &[Expr], square: bool) -> Values {
        let mut atoms: Vec<Expr> = Vec::new();
        for &e in list {
            atoms.extend(cx.arena.atoms(e));
        }
        atoms.sort_by_key(|a| (cx.arena.key(*a), a.index()));
        atoms.dedup();
        let (mut of, mut state) = (Vec::new(), Vec::new());
        for a in atoms {
            let symbol = match cx.arena.node(a) {
                Node::Symbol(s) | Node::Jet(s, _) => Some(*s),
                _ => None,
            };
            match symbol.map(|s| cx.arena.info(s).role) {
                Some(Role::Parameter) => {
                    // With more parameters than primes the last ones are not told apart.
                    let p = PRIMES[of.len().min(PRIMES.len() - 1)];
                    of.push((a, p));
                }
                Some(Role::Coordinate | Role::Time | Role::Input) => state.push(a),
                _ => {}
            }
        }
        let mut map = hashbrown::HashMap::new();
        for &(a, p) in &of {
            map.insert(a, cx.arena.integer(if square { p * p } else { p }));
        }
        let mut states = Vec::new();
        for row in 0..3i64 {
            let mut at = hashbrown::HashMap::new();
            for (k, &a) in state.iter().enumerate() {
                at.insert(a, cx.arena.integer(2 + (k as i64 * 7 + row * 5) % 23));
            }
            states.push(at);
        }
        Values { of, square, map, states }
    }

    fn put(&self, cx: &mut Context<'_>, e: Expr) -> Result<Expr, Stopped> {
        cx.arena.substitute(e, &self.map, cx.budget)
    }

    /// The monomial that a value stands for.
    fn decode(&self, cx: &mut Context<'_>, value: &Rational) -> Expr {
        let Some((mut n, mut d)) = value.small() else { return cx.arena.number(value.clone()) };
        let mut factors = Vec::new();
        for &(a, p) in &self.of {
            let mut e = 0;
            while n % p == 0 && n != 0 {
                n /= p;
                e += 1;
            }
            while d % p == 0 {
                d /= p;
                e -= 1;
            }
            let power = Rational::new(e, if self.square { 2 } else { 1 }).unwrap_or(Rational::ZERO);
            if !power.is_zero() {
                factors.push((a, power));
            }
        }
        let product = cx.arena.monomial(&factors);
        cx.arena.scale(product, &Rational::new(n, d).unwrap_or(Rational::ZERO))
    }
}

/// What residues could tell.
pub(super) enum Found {
    /// Σ of candidates, by number, with values at the parameters' values.
    Combination(Vec<(usize, Rational)>),
    /// None of small height.
    Nothing,
    /// Residues are not to be had.
    Untold,
}

/// Looks for `target` as a combination of `candidates` at the parameters' values.
pub(super) fn search(
    cx: &mut Context<'_>,
    values: &Values,
    candidates: &[Expr],
    target: Expr,
) -> Result<Found, Stopped> {
    let mut parts = Vec::with_capacity(candidates.len() + 1);
    for &e in candidates.iter().chain([&target]) {
        parts.push(vec![values.put(cx, e)?]);
    }
    let n = parts.len();
    cx.budget.charge(n * n * n / 4 + n)?;
    let residues = match cx.zero.residue_vectors(cx.arena, &parts, n + 4, cx.budget) {
        Ok(r) => r,
        Err(Reason::Cancelled) => return Err(Stopped::Cancelled),
        Err(Reason::TooLarge) => return Err(Stopped::TooLarge),
        Err(_) => return Ok(Found::Untold),
    };
    let Some(relations) = residues.relations() else { return Ok(Found::Nothing) };
    // The target is the last: it takes part in a relation only where it depends on what comes before.
    let Some(r) = relations.iter().find(|r| !r[n - 1].is_zero()) else { return Ok(Found::Nothing) };
    Ok(Found::Combination((0..n - 1).filter(|&k| !r[k].is_zero()).map(|k| (k, r[k].neg())).collect()))
}

/// Coefficients as expressions, in two ways: as monomials in the parameters, and as quotients read off at numeric states.
pub(super) fn coefficients(
    cx: &mut Context<'_>,
    values: &Values,
    candidates: &[Expr],
    target: Expr,
    found: &[(usize, Rational)],
) -> Result<Vec<Vec<Expr>>, Stopped> {
    let mut out = vec![found.iter().map(|(_, r)| values.decode(cx, r)).collect::<Vec<_>>()];
    let m = found.len();
    if m == 0 || m > 2 {
        return Ok(out);
    }
    let mut rows = Vec::new();
    for at in values.states.iter().take(m) {
        let mut row = Vec::new();
        for e in found.iter().map(|(k, _)| candidates[*k]).chain([target]) {
            let e = cx.arena.substitute(e, at, cx.budget)?;
            row.push(cx.arena.expand(e, cx.budget)?);
        }
        rows.push(row);
    }
    let quotient = |cx: &mut Context<'_>, top: Expr, below: Expr| -> Result<Expr, Stopped> {
        let top = cx.arena.expand(top, cx.budget)?;
        let below = cx.arena.expand(below, cx.budget)?;
        let q = cx.arena.div(top, below);
        cx.arena.expand(q, cx.budget)
    };
    if m == 1 {
        out.push(vec![quotient(cx, rows[0][1], rows[0][0])?]);
    } else {
        let det = |cx: &mut Context<'_>, a: usize, b: usize| {
            let (p, q) = (cx.arena.mul(rows[0][a], rows[1][b]), cx.arena.mul(rows[0][b], rows[1][a]));
            cx.arena.sub(p, q)
        };
        let (below, first, second) = (det(cx, 0, 1), det(cx, 2, 1), det(cx, 0, 2));
        out.push(vec![quotient(cx, first, below)?, quotient(cx, second, below)?]);
    }
    Ok(out)
}

/// The combination as one expression.
pub(super) fn value(cx: &mut Context<'_>, charges: &[Expr], list: &[Summand]) -> Result<Expr, Stopped> {
    let mut parts = Vec::new();
    for s in list {
        let mut factors = vec![s.coefficient];
        factors.extend(s.charges.iter().map(|&k| charges[k]));
        parts.push((cx.arena.product(&factors), Rational::ONE));
    }
    cx.build(&parts)
}

/// A coefficient as a number times powers of bases: parameters, sums of them, roots of numbers.
pub(super) fn factored(cx: &mut Context<'_>, e: Expr) -> (Rational, Vec<(Expr, Rational)>) {
    let mut number = Rational::ONE;
    let mut bases = Vec::new();
    let (c, rest) = cx.arena.split_coefficient(e);
    number = number.mul(&c);
    for (base, exponent) in cx.arena.factors(rest) {
        let mut base = base;
        // Sums that differ by a rational factor are one base.
        let lead = cx.arena.summands(base).first().map(|s| s.1.clone());
        if let (Node::Sum(..), Some(lead), Some(n)) = (cx.arena.node(base), lead, exponent.to_i64())
            && let (Some(inverse), Some(power)) = (lead.recip(), lead.pow(n, 4096))
        {
            number = number.mul(&power);
            base = cx.arena.scale(base, &inverse);
        }
        bases.push((base, exponent));
    }
    (number, bases)
}
