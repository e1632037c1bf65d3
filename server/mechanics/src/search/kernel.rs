//! Relations among columns of expressions, with functions of the parameters as coefficients.
//!
//! Parameters take the values of primes, residues tell the relations [SZ], and prime factors tell coefficients that are
//! monomials in the parameters. These are compared at other primes; where they differ the coefficients are quotients of
//! determinants, of the columns' values at numeric states (Cramer's rule). What comes out is to be confirmed.

use super::sums::sum_of_two;
use crate::context::{Context, Parts};
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
/// Half-angle tangents of constant angles, small, so that what comes out can be read.
const TANGENTS: [[i64; 4]; 2] = [[2, 3, 5, 7], [4, 6, 8, 9]];
/// Determinants of more rows are not expanded.
const MAX_ROWS: usize = 12;
/// States that are tried for the rows of a determinant.
const STATES: i64 = 12;

/// Values of atoms.
type Values = hashbrown::HashMap<Expr, Expr>;

/// A basis, in echelon form by the last columns, of all c with Σⱼ cⱼ columns[j][i] ≡ 0 for each i. Costs two eliminations
/// in the number of columns.
pub(super) fn kernel(cx: &mut Context<'_>, columns: &[Vec<Expr>]) -> Result<Vec<Vec<Expr>>, Halt> {
    if columns.is_empty() {
        return Ok(Vec::new());
    }
    let (constants, state) = atoms(cx, columns)?;
    let [first, second] = [0, 1].map(|k| constants.values(cx, k));
    let numbers = relations(cx, columns, &first)?;
    if first.is_empty() {
        return Ok(numbers.iter().map(|r| r.iter().map(|c| cx.arena.number(c.clone())).collect()).collect());
    }
    let others = relations(cx, columns, &second)?;
    if numbers.len() != others.len() {
        return Err(Halt::Unsolved("it depends on the values of parameters".into()));
    }
    let mut out = Vec::new();
    for (r, other) in numbers.iter().zip(&others) {
        let mut guess: Vec<Expr> = r.iter().map(|c| decode(cx, &constants, c)).collect();
        let mut fits = true;
        for (g, (here, c)) in guess.iter_mut().zip(r.iter().zip(other)) {
            let there = cx.arena.substitute(*g, &second, cx.budget)?;
            if cx.arena.as_number(there) == Some(c) {
                continue;
            }
            let n = constants.list.len();
            let primes = PRIMES.each_ref().map(|p| &p[..n]);
            let sum = if constants.roots { None } else { sum_of_two(cx, &constants.list, primes, [here, c]) };
            match sum {
                Some(sum) => *g = sum,
                None => {
                    fits = false;
                    break;
                }
            }
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
    let (constants, _) = atoms(cx, columns)?;
    let first = constants.values(cx, 0);
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
    if parts.iter().flatten().any(|&e| hides_a_constant(cx, e)) {
        return Err(Halt::Unsolved("a function has a constant within its argument".into()));
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

/// What is constant in some columns, and the atoms of the state.
fn atoms(cx: &mut Context<'_>, columns: &[Vec<Expr>]) -> Result<(Constants, Vec<Expr>), Halt> {
    let mut atoms: Vec<Expr> = columns.iter().flatten().flat_map(|&e| cx.arena.atoms(e)).collect();
    atoms.sort_by_key(|a| (cx.arena.key(*a), a.index()));
    atoms.dedup();
    let mut out = Constants::default();
    let mut state = Vec::new();
    for a in atoms {
        match cx.arena.node(a) {
            Node::Symbol(s) | Node::Jet(s, _) => match cx.arena.info(*s).role {
                Role::Parameter => out.list.push(a),
                Role::Coordinate | Role::Time => state.push(a),
                _ => {}
            },
            _ => {}
        }
    }
    // Functions of constants, such as the cosine of a slope, are constants, too; and so is π.
    let mut nodes = Vec::new();
    for &e in columns.iter().flatten() {
        cx.arena.visit(e, &mut |e, node| match node {
            Node::Call(f, args) => nodes.push((e, Some(*f), args[0])),
            Node::Unspecified { .. } | Node::Pi => nodes.push((e, None, e)),
            Node::Product(factors) => {
                let root = |(base, n): &(Expr, Rational)| !n.is_integer() && out.list.contains(base);
                out.roots |= factors.iter().any(root);
            }
            _ => {}
        });
    }
    nodes.sort_by_key(|n| (cx.arena.key(n.0), n.0.index()));
    nodes.dedup();
    for (e, f, argument) in nodes {
        if cx.arena.atoms(e).iter().any(|a| state.contains(a)) {
            continue;
        }
        match f {
            Some(Function::Sin | Function::Cos | Function::Tan) => {
                if !out.angles.contains(&argument) {
                    out.angles.push(argument);
                }
            }
            _ => out.list.push(e),
        }
    }
    // Values are told apart as if functions of different arguments had nothing to do with each other.
    let mut arguments: Vec<Expr> = out.angles.clone();
    for &e in &out.list {
        if let Node::Call(_, args) = cx.arena.node(e) {
            arguments.extend(args.iter().copied());
        }
    }
    arguments.sort_by_key(|a| a.index());
    arguments.dedup();
    let mut within: Vec<Expr> = arguments.iter().flat_map(|&a| cx.arena.atoms(a)).collect();
    within.sort_by_key(|a| a.index());
    if within.windows(2).any(|w| w[0] == w[1]) {
        return Err(Halt::Unsolved("there are several functions of one parameter".into()));
    }
    if out.list.len() > PRIMES[0].len() || out.angles.len() > TANGENTS[0].len() {
        return Err(Halt::Unsolved("there are too many parameters".into()));
    }
    Ok((out, state))
}

/// Constants, which take values of primes.
#[derive(Default)]
struct Constants {
    /// Parameters, and functions of parameters.
    list: Vec<Expr>,
    /// Whether there are square roots of them: then the values are squares.
    roots: bool,
    /// Constants whose sine and cosine occur.
    angles: Vec<Expr>,
}

impl Constants {
    fn values(&self, cx: &mut Context<'_>, k: usize) -> Values {
        let mut out = Values::new();
        for (&a, p) in self.list.iter().zip(PRIMES[k]) {
            out.insert(a, cx.arena.integer(if self.roots { p * p } else { p }));
        }
        // (1 − p²)/(1 + p²) and 2 p/(1 + p²) are the cosine and the sine of an angle.
        for (&a, p) in self.angles.iter().zip(TANGENTS[k]) {
            let pairs = [
                (2 * p, 1 + p * p, Function::Sin),
                (1 - p * p, 1 + p * p, Function::Cos),
                (2 * p, 1 - p * p, Function::Tan),
            ];
            for (n, d, f) in pairs {
                let value = cx.arena.number(Rational::new(n, d).unwrap_or(Rational::ZERO));
                let call = cx.arena.call(f, &[a]);
                out.insert(call, value);
            }
        }
        out
    }
}

/// Whether a function has a constant within its argument that stands for an unknown number: cos(φ + 11). Such numbers are
/// different at each point.
fn hides_a_constant(cx: &Context<'_>, e: Expr) -> bool {
    let mut hidden = false;
    cx.arena.visit(e, &mut |_, node| {
        let Node::Call(f, args) = node else { return };
        let periodic = matches!(
            f,
            Function::Sin
                | Function::Cos
                | Function::Tan
                | Function::Exp
                | Function::Sinh
                | Function::Cosh
                | Function::Tanh
        );
        hidden |= args.iter().all(|&a| cx.arena.as_number(a).is_some());
        hidden |= periodic && matches!(cx.arena.node(args[0]), Node::Sum(c, _) if !c.is_zero());
    });
    hidden
}

/// The monomial that a value stands for.
fn decode(cx: &mut Context<'_>, constants: &Constants, value: &Rational) -> Expr {
    let (Some((mut n, mut d)), false) = (value.small(), value.is_zero()) else { return Arena::ZERO };
    let mut factors = Vec::new();
    for (&a, p) in constants.list.iter().zip(PRIMES[0]) {
        let mut e = 0;
        while n % p == 0 {
            n /= p;
            e += 1;
        }
        while d % p == 0 {
            d /= p;
            e -= 1;
        }
        factors.push((a, Rational::new(e, if constants.roots { 2 } else { 1 }).unwrap_or(Rational::ZERO)));
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
    // Sine and cosine have roots only at twelfths of a turn.
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
    let half_turn = cx.arena.pi();
    let twelfth = cx.arena.scale(half_turn, &Rational::new(1, 6).unwrap_or(Rational::ONE));
    let lines: Vec<Vec<Expr>> =
        (0..columns[0].len()).map(|i| support.iter().map(|&j| columns[j][i]).collect()).collect();
    let mut equations = Vec::new();
    for k in 0..STATES {
        let mut at = Values::new();
        for (i, &a) in state.iter().enumerate() {
            // Every other state has zeros: its equations are short.
            let number = if k % 2 == 1 && (i as i64 + k / 2) % 3 == 0 { 0 } else { 2 + (i as i64 * 7 + k * 5) % 23 };
            let number = Rational::integer(number);
            let value = if angles.contains(&a) { cx.arena.scale(twelfth, &number) } else { cx.arena.number(number) };
            at.insert(a, value);
        }
        for line in &lines {
            split_by_roots(cx, line, &at, &mut equations)?;
        }
    }
    equations.sort_by_key(|row: &Vec<Expr>| row.iter().map(|&e| cx.arena.size(e)).sum::<usize>());
    let (mut rows, mut reduced) = (Vec::new(), Vec::new());
    for row in equations {
        let mut numbers = Vec::new();
        for &e in &row {
            let number = cx.arena.substitute(e, values, cx.budget)?;
            numbers.extend(cx.arena.as_number(number).cloned());
        }
        if rows.len() < n && numbers.len() == row.len() && adds_rank(&mut reduced, numbers) {
            rows.push(row);
        }
    }
    if rows.len() < n {
        return Err(unsolved());
    }
    let mut known = hashbrown::HashMap::new();
    let mut minors = Vec::new();
    for left_out in 0..=n {
        let d = determinant(cx, &rows, ((1 << (n + 1)) - 1) & !(1 << left_out), &mut known)?;
        minors.push(if left_out % 2 == 0 { d } else { cx.arena.neg(d) });
    }
    let mut out = vec![Arena::ZERO; relation.len()];
    for (j, c) in support.into_iter().zip(without_common_factor(cx.arena, &minors, cx.budget)?) {
        out[j] = c;
    }
    Ok(out)
}

/// The values of some columns at a state, one row for each product of roots of numbers in them: these are independent
/// over the functions of the parameters.
fn split_by_roots(
    cx: &mut Context<'_>,
    line: &[Expr],
    at: &Values,
    equations: &mut Vec<Vec<Expr>>,
) -> Result<(), Stopped> {
    let mut by_root: Vec<(Expr, Vec<Parts>)> = Vec::new();
    for (j, &e) in line.iter().enumerate() {
        let e = cx.arena.substitute(e, at, cx.budget)?;
        let e = cx.arena.expand(e, cx.budget)?;
        for (term, c) in cx.arena.summands(e) {
            let (mut root, mut rest) = (Vec::new(), Vec::new());
            for (base, n) in cx.arena.factors(term) {
                // π comes from the states only, or what is found will not be confirmed.
                let number = cx.arena.as_number(base).is_some() || matches!(cx.arena.node(base), Node::Pi);
                if number { root.push((base, n)) } else { rest.push((base, n)) }
            }
            let (root, rest) = (cx.arena.monomial(&root), cx.arena.monomial(&rest));
            let k = by_root.iter().position(|r| r.0 == root).unwrap_or_else(|| {
                by_root.push((root, vec![Parts::new(); line.len()]));
                by_root.len() - 1
            });
            by_root[k].1[j].push((rest, c));
        }
    }
    for (_, parts) in by_root {
        equations.push(parts.iter().map(|p| cx.build(p)).collect::<Result<_, _>>()?);
    }
    Ok(())
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

/// The determinant of the last rows in some columns, a set of bits, expanded by the first of these rows. Costs a sum for
/// each set.
fn determinant(
    cx: &mut Context<'_>,
    rows: &[Vec<Expr>],
    columns: u32,
    known: &mut hashbrown::HashMap<u32, Expr>,
) -> Result<Expr, Stopped> {
    let Some((first, below)) = rows.split_first() else { return Ok(Arena::ONE) };
    if let Some(&d) = known.get(&columns) {
        return Ok(d);
    }
    let mut parts = Vec::new();
    let mut sign = Rational::ONE;
    for c in (0..first.len()).filter(|c| columns >> c & 1 == 1) {
        if first[c] != Arena::ZERO {
            let minor = determinant(cx, below, columns & !(1 << c), known)?;
            parts.push((cx.arena.mul(first[c], minor), sign.clone()));
        }
        sign = sign.neg();
    }
    let sum = cx.build(&parts)?;
    let d = cx.arena.expand(sum, cx.budget)?;
    known.insert(columns, d);
    Ok(d)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::fixture::Fixture;

    /// The only relation of some columns of one row, with its last coefficient divided out.
    fn check(f: &mut Fixture, columns: &[Expr], expected: &[Expr]) {
        let columns: Vec<Vec<Expr>> = columns.iter().map(|&e| vec![e]).collect();
        let mut cx = f.cx();
        let Ok(found) = kernel(&mut cx, &columns) else { panic!("unsolved") };
        assert_eq!(found.len(), 1);
        let last = *found[0].last().unwrap();
        for (&c, &e) in found[0].iter().zip(expected) {
            let product = cx.arena.mul(e, last);
            let gap = cx.arena.sub(c, product);
            assert!(cx.vanishes(&[(gap, Rational::ONE)]).is_proved());
        }
        let dependent = dependent(&mut cx, &columns);
        assert!(matches!(dependent, Ok(list) if list == [columns.len() - 1]));
    }

    #[test]
    fn coefficients_are_functions_of_the_parameters() {
        let mut f = Fixture::new();
        let (x, v) = f.coordinate("x");
        let [a, b] = ["a", "b"].map(|p| f.parameter(p));
        // a² x/b, with x: a monomial.
        let c = f.arena.monomial(&[(a, Rational::integer(2)), (b, Rational::MINUS_ONE)]);
        let (first, minus) = (f.arena.mul(c, x), f.arena.pow(c, -1));
        let minus = f.arena.neg(minus);
        check(&mut f, &[first, x], &[minus, Arena::ONE]);
        // (a + b) x + v sin x and both: quotients.
        let sine = f.arena.call(Function::Sin, &[x]);
        let (sum, turned) = (f.arena.add(a, b), f.arena.mul(v, sine));
        let first = f.arena.mul(sum, x);
        let first = f.arena.add(first, turned);
        let one = Arena::ONE;
        let inverse = f.arena.pow(sum, -1);
        let negative = f.arena.neg(inverse);
        check(&mut f, &[first, turned, x], &[negative, inverse, one]);
        // Roots and sines of parameters.
        let root = f.arena.sqrt(a);
        let first = f.arena.mul(root, x);
        let negative = f.arena.neg(root);
        check(&mut f, &[x, first], &[negative, one]);
        let s = f.arena.call(Function::Sin, &[b]);
        let first = f.arena.mul(s, x);
        let negative = f.arena.neg(s);
        check(&mut f, &[x, first], &[negative, one]);
    }

    #[test]
    fn constants_within_functions_are_not_guessed() {
        let mut f = Fixture::new();
        let (x, _) = f.coordinate("x");
        let a = f.parameter("a");
        let sum = f.arena.add(x, a);
        // cos(x + a) = cos a cos x − sin a sin x.
        let columns = [sum, x].map(|e| vec![f.arena.call(Function::Cos, &[e])]);
        assert!(matches!(kernel(&mut f.cx(), &columns), Err(Halt::Unsolved(_))));
        let double = f.arena.scale(a, &Rational::integer(2));
        let columns = [a, double].map(|e| vec![f.arena.call(Function::Cos, &[e])]);
        assert!(matches!(kernel(&mut f.cx(), &columns), Err(Halt::Unsolved(_))));
    }
}
