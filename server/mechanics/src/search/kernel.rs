//! Relations among columns of expressions, with functions of the parameters as coefficients.
//!
//! Parameters take the values of primes, residues tell the relations [SZ], and prime factors tell coefficients that are
//! monomials in the parameters. These are compared at other primes; where they differ the coefficients are quotients of
//! determinants, of the columns' values at numeric states (Cramer's rule). What comes out is to be confirmed.

use crate::context::Context;
use leastwise_algebra::{
    Arena, Expr, Function, Node, Rational, Reason, Residues, Role, Stopped, without_common_factor,
};

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

/// Values of parameters, and others.
const PRIMES: [[i64; 12]; 2] =
    [[11, 13, 17, 19, 23, 29, 31, 37, 41, 43, 47, 53], [101, 67, 97, 71, 89, 103, 83, 79, 107, 73, 61, 59]];
/// Determinants of more rows are not expanded.
const MAX_ROWS: usize = 6;
/// States that are tried for the rows of a determinant.
const STATES: i64 = 16;

/// Values of atoms.
type Values = hashbrown::HashMap<Expr, Expr>;

/// A basis, in echelon form by the last columns, of all c with Σⱼ cⱼ columns[j][i] ≡ 0 for each i. Costs two eliminations
/// in the number of columns.
pub(super) fn kernel(cx: &mut Context<'_>, columns: &[Vec<Expr>]) -> Result<Vec<Vec<Expr>>, Halt> {
    if columns.is_empty() {
        return Ok(Vec::new());
    }
    let (parameters, state) = atoms(cx, columns)?;
    let [first, second] = values(cx, &parameters);
    let numbers = relations(cx, columns, &first)?;
    if parameters.is_empty() {
        return Ok(numbers.iter().map(|r| r.iter().map(|c| cx.arena.number(c.clone())).collect()).collect());
    }
    let others = relations(cx, columns, &second)?;
    if numbers.len() != others.len() {
        return Err(Halt::Unsolved("it depends on the values of parameters".into()));
    }
    let mut out = Vec::new();
    for (r, other) in numbers.iter().zip(&others) {
        let guess: Vec<Expr> = r.iter().map(|c| decode(cx, &parameters, c)).collect();
        let mut fits = true;
        for (&g, c) in guess.iter().zip(other) {
            let there = cx.arena.substitute(g, &second, cx.budget)?;
            fits &= cx.arena.as_number(there) == Some(c);
        }
        out.push(if fits { guess } else { quotients(cx, columns, r, &state, &first)? });
    }
    Ok(out)
}

/// Which columns are combinations of those before them, with functions of the parameters as coefficients.
pub(super) fn dependent(cx: &mut Context<'_>, columns: &[Vec<Expr>]) -> Result<Vec<usize>, Halt> {
    if columns.is_empty() {
        return Ok(Vec::new());
    }
    let (parameters, _) = atoms(cx, columns)?;
    let [first, _] = values(cx, &parameters);
    // What does not depend at some values does not depend at all.
    Ok(residues(cx, columns, &first)?.dependent())
}

/// The relations where the parameters have some values.
fn relations(cx: &mut Context<'_>, columns: &[Vec<Expr>], values: &Values) -> Result<Vec<Vec<Rational>>, Halt> {
    let found = residues(cx, columns, values)?.relations();
    found.ok_or_else(|| Halt::Unsolved("coefficients are no small numbers".into()))
}

fn residues(cx: &mut Context<'_>, columns: &[Vec<Expr>], values: &Values) -> Result<Residues, Halt> {
    let mut parts = Vec::new();
    for c in columns {
        parts.push(c.iter().map(|&e| cx.arena.substitute(e, values, cx.budget)).collect::<Result<Vec<_>, _>>()?);
    }
    let (n, rows) = (columns.len(), columns[0].len().max(1));
    cx.budget.charge(n * n * n / 4 + n)?;
    match cx.zero.residue_vectors(cx.arena, &parts, n / rows + 6, cx.budget) {
        Ok(residues) => Ok(residues),
        Err(Reason::Cancelled) => Err(Stopped::Cancelled.into()),
        Err(Reason::TooLarge) => Err(Stopped::TooLarge.into()),
        Err(reason) => Err(Halt::Unsolved(reason.to_string())),
    }
}

/// The parameters in some columns, and the atoms of the state.
fn atoms(cx: &Context<'_>, columns: &[Vec<Expr>]) -> Result<(Vec<Expr>, Vec<Expr>), Halt> {
    let mut atoms: Vec<Expr> = columns.iter().flatten().flat_map(|&e| cx.arena.atoms(e)).collect();
    atoms.sort_by_key(|a| (cx.arena.key(*a), a.index()));
    atoms.dedup();
    let (mut parameters, mut state) = (Vec::new(), Vec::new());
    for a in atoms {
        match cx.arena.node(a) {
            Node::Symbol(s) | Node::Jet(s, _) => match cx.arena.info(*s).role {
                Role::Parameter => parameters.push(a),
                Role::Coordinate | Role::Time => state.push(a),
                _ => {}
            },
            _ => {}
        }
    }
    if parameters.len() > PRIMES[0].len() {
        return Err(Halt::Unsolved("there are too many parameters".into()));
    }
    Ok((parameters, state))
}

fn values(cx: &mut Context<'_>, parameters: &[Expr]) -> [Values; 2] {
    PRIMES.map(|primes| parameters.iter().zip(primes).map(|(&a, p)| (a, cx.arena.integer(p))).collect())
}

/// The monomial that a value stands for.
fn decode(cx: &mut Context<'_>, parameters: &[Expr], value: &Rational) -> Expr {
    let (Some((mut n, mut d)), false) = (value.small(), value.is_zero()) else { return Arena::ZERO };
    let mut factors = Vec::new();
    for (&a, p) in parameters.iter().zip(PRIMES[0]) {
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

/// A relation whose support is known, by Cramer's rule: its coefficients are determinants, polynomials in the parameters
/// where the columns are rational in the state.
fn quotients(
    cx: &mut Context<'_>,
    columns: &[Vec<Expr>],
    relation: &[Rational],
    state: &[Expr],
    values: &Values,
) -> Result<Vec<Expr>, Halt> {
    let unsolved = || Halt::Unsolved("coefficients depend on the parameters in a way that was not found".into());
    let support: Vec<usize> = (0..relation.len()).filter(|&j| !relation[j].is_zero()).collect();
    let n = support.len() - 1;
    if n == 0 || n > MAX_ROWS {
        return Err(unsolved());
    }
    // Sine and cosine are rational at quarters of a turn.
    let mut angles = Vec::new();
    for &e in support.iter().flat_map(|&j| &columns[j]) {
        let mut arguments = Vec::new();
        cx.arena.visit(e, &mut |_, node| {
            if let Node::Call(Function::Sin | Function::Cos | Function::Tan, list) = node {
                arguments.extend(list.iter().copied());
            }
        });
        for a in arguments {
            angles.extend(cx.arena.atoms(a));
        }
    }
    let quarter = cx.arena.pi();
    let quarter = cx.arena.scale(quarter, &Rational::HALF);
    let lines: Vec<Vec<Expr>> =
        (0..columns[0].len()).map(|i| support.iter().map(|&j| columns[j][i]).collect()).collect();
    let mut rows: Vec<Vec<Expr>> = Vec::new();
    let mut reduced: Vec<Vec<Rational>> = Vec::new();
    'states: for k in 0..STATES {
        let mut at = Values::new();
        for (i, &a) in state.iter().enumerate() {
            let number = Rational::integer(2 + (i as i64 * 7 + k * 5) % 23);
            let value = if angles.contains(&a) { cx.arena.scale(quarter, &number) } else { cx.arena.number(number) };
            at.insert(a, value);
        }
        for line in &lines {
            let (mut row, mut numbers) = (Vec::new(), Vec::new());
            for &e in line {
                let e = cx.arena.substitute(e, &at, cx.budget)?;
                let e = cx.arena.expand(e, cx.budget)?;
                let number = cx.arena.substitute(e, values, cx.budget)?;
                numbers.extend(cx.arena.as_number(number).cloned());
                row.push(e);
            }
            // Roots and sines of numbers are left out.
            if numbers.len() == row.len() && adds_rank(&mut reduced, numbers) {
                rows.push(row);
                if rows.len() == n {
                    break 'states;
                }
            }
        }
    }
    if rows.len() < n {
        return Err(unsolved());
    }
    let mut minors = Vec::new();
    for left_out in 0..=n {
        let columns: Vec<usize> = (0..=n).filter(|&c| c != left_out).collect();
        let d = determinant(cx, &rows, &columns)?;
        minors.push(if left_out % 2 == 0 { d } else { cx.arena.neg(d) });
    }
    let mut out = vec![Arena::ZERO; relation.len()];
    for (j, c) in support.into_iter().zip(without_common_factor(cx.arena, &minors, cx.budget)?) {
        out[j] = c;
    }
    Ok(out)
}

/// Whether a row is independent of others; it is added to them, reduced.
fn adds_rank(rows: &mut Vec<Vec<Rational>>, mut row: Vec<Rational>) -> bool {
    for r in rows.iter() {
        let Some(p) = r.iter().position(|x| !x.is_zero()) else { continue };
        let Some(c) = row[p].div(&r[p]) else { continue };
        row.iter_mut().zip(r).for_each(|(x, y)| *x = x.sub(&c.mul(y)));
    }
    let adds = row.iter().any(|x| !x.is_zero());
    if adds {
        rows.push(row);
    }
    adds
}

/// The determinant of the last rows in some columns, expanded by the first of these.
fn determinant(cx: &mut Context<'_>, rows: &[Vec<Expr>], columns: &[usize]) -> Result<Expr, Stopped> {
    let Some((first, below)) = rows.split_first() else { return Ok(Arena::ONE) };
    let mut parts = Vec::new();
    for (k, &c) in columns.iter().enumerate() {
        if first[c] != Arena::ZERO {
            let others: Vec<usize> = columns.iter().copied().filter(|&x| x != c).collect();
            let minor = determinant(cx, below, &others)?;
            let sign = if k % 2 == 0 { Rational::ONE } else { Rational::MINUS_ONE };
            parts.push((cx.arena.mul(first[c], minor), sign));
        }
    }
    let sum = cx.build(&parts)?;
    cx.arena.expand(sum, cx.budget)
}
