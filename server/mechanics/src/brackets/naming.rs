//! From structure constants to names: parameters and the central charge on whose level sets the algebra closes are
//! scaled away, as far as their signs allow; what is left is a Lie algebra over ℚ.
//!
//! With Q′ = |β|^σ Q for a base β of the coefficients, a constant r β^e becomes r sign(β)^e where
//! σᵢ + σⱼ − σₖ = −e for all of them. On the level sets of a central charge Z the coefficient Z is such a base, with three
//! cases: for Kepler's problem Z is the energy, and {A, A} = −2 (E/m) L is so(4) for E < 0 [GPS §9.7].

use super::closure::factored;
use super::lie::Lie;
use super::rows::{Vector, solve};
use super::{Bracket, Outcome};
use crate::context::Context;
use leastwise_algebra::{Expr, Rational, Stopped};

/// The sign that a condition demands.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Sign {
    /// < 0
    Negative,
    /// = 0
    Zero,
    /// > 0
    Positive,
}

/// A condition on a name.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Condition {
    /// A central charge, by number, has this sign: the name holds on its level sets.
    Charge(usize, Sign),
    /// An expression of the parameters has this sign.
    Parameter(Expr, Sign),
}

/// What the charges form, wherever the coefficients of their brackets are not zero.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Named {
    /// All must hold; none for a name without condition.
    pub conditions: Vec<Condition>,
    /// The algebra's name, where its invariants determine it: `so(4)`, `e(2) ⊕ ℝ`.
    pub name: Option<String>,
    /// What can be said in any case: `solvable`, `semidirect sum of so(2,1) and …`.
    pub kind: String,
    /// The dimension, of the constants too where brackets have constant values.
    pub dimension: usize,
    /// The charge that is a number on the level sets, not counted in the dimension.
    pub on_level_sets_of: Option<usize>,
}

/// A factor of structure constants.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Base {
    Charge(usize),
    Parameter(Expr),
}

/// A structure constant: [i, j] contains r Π β^e times the element k.
struct Constant {
    place: (usize, usize, usize),
    number: Rational,
    bases: Vec<(Base, Rational)>,
}

/// More signs that are not known give no names.
const MAX_UNKNOWN: usize = 3;

/// Names of the algebra, by conditions; empty where brackets are open, quadratic in general, or where parameters cannot be
/// scaled away.
pub(super) fn named(
    cx: &mut Context<'_>,
    basis: &[usize],
    central: &[usize],
    brackets: &[Bracket],
) -> Result<Vec<Named>, Stopped> {
    let Some(level) = level(central, brackets) else { return Ok(Vec::new()) };
    let elements: Vec<usize> = basis.iter().copied().filter(|k| Some(*k) != level).collect();
    let unit = elements.len();
    let mut constants = Vec::new();
    for b in brackets {
        let Outcome::Closed(list) = &b.outcome else { return Ok(Vec::new()) };
        let place = |k: usize| elements.iter().position(|&e| e == k);
        for s in list {
            let (Some(i), Some(j)) = (place(b.left), place(b.right)) else { return Ok(Vec::new()) };
            let (number, found) = factored(cx, s.coefficient);
            let mut bases: Vec<(Base, Rational)> = found.into_iter().map(|(e, n)| (Base::Parameter(e), n)).collect();
            let mut rest = s.charges.clone();
            let powers = level.map_or(0, |z| rest.iter().filter(|&&k| k == z).count());
            if let (Some(z), true) = (level, powers > 0) {
                rest.retain(|&k| k != z);
                bases.push((Base::Charge(z), Rational::integer(powers as i64)));
            }
            let k = match rest[..] {
                [] => unit,
                [k] => place(k).unwrap_or(unit),
                _ => return Ok(Vec::new()),
            };
            constants.push(Constant { place: (i, j, k), number, bases });
        }
    }
    let n = unit + constants.iter().any(|c| c.place.2 == unit) as usize;
    if n == 0 || !scales_away(&constants, n) {
        return Ok(Vec::new());
    }
    cx.budget.charge(n * n * n * n)?;
    // Signs that matter.
    let mut open: Vec<(Base, Vec<Sign>)> = level.map(|z| (Base::Charge(z), vec![])).into_iter().collect();
    for (base, exponent) in constants.iter().flat_map(|c| &c.bases) {
        if !open.iter().any(|o| o.0 == *base) && !exponent.is_even_integer() {
            open.push((*base, vec![]));
        }
    }
    for (base, signs) in &mut open {
        *signs = match base {
            Base::Charge(_) => vec![Sign::Negative, Sign::Zero, Sign::Positive],
            Base::Parameter(e) => {
                let known = cx.zero.sign_of(cx.arena, *e, cx.budget);
                // A root of the base is a number only where it is not negative.
                let root = constants.iter().flat_map(|c| &c.bases).any(|(b, n)| b == base && !n.is_integer());
                if known.is_nonnegative() || root {
                    vec![Sign::Positive]
                } else if known.is_nonpositive() {
                    vec![Sign::Negative]
                } else {
                    vec![Sign::Negative, Sign::Positive]
                }
            }
        };
    }
    let unknown = open.iter().filter(|o| matches!(o.0, Base::Parameter(_)) && o.1.len() > 1).count();
    if unknown > MAX_UNKNOWN {
        return Ok(Vec::new());
    }
    let mut out: Vec<Named> = Vec::new();
    let mut cases: Vec<Vec<(Base, Sign)>> = vec![Vec::new()];
    for (base, signs) in &open {
        cases = cases
            .iter()
            .flat_map(|c| signs.iter().map(move |&s| c.iter().copied().chain([(*base, s)]).collect()))
            .collect();
    }
    for case in cases {
        let Some(g) = algebra(&constants, n, &case) else { return Ok(Vec::new()) };
        let conditions = case
            .iter()
            .filter(|(b, _)| open.iter().any(|o| o.0 == *b && o.1.len() > 1))
            .map(|&(b, s)| match b {
                Base::Charge(z) => Condition::Charge(z, s),
                Base::Parameter(e) => Condition::Parameter(e, s),
            })
            .collect();
        out.push(Named { conditions, name: g.name(), kind: g.kind(), dimension: n, on_level_sets_of: level });
    }
    Ok(without_idle_conditions(out))
}

/// The central charge with which products occur, if any: `Some(None)` where all brackets are linear, `None` where they
/// are quadratic otherwise.
fn level(central: &[usize], brackets: &[Bracket]) -> Option<Option<usize>> {
    let products = || {
        brackets.iter().filter_map(|b| match &b.outcome {
            Outcome::Closed(list) => Some(list),
            _ => None,
        })
    };
    let quadratic: Vec<&Vec<usize>> = products().flatten().map(|s| &s.charges).filter(|c| c.len() > 1).collect();
    if quadratic.is_empty() {
        return Some(None);
    }
    central.iter().copied().find(|z| quadratic.iter().all(|c| c.contains(z))).map(Some)
}

/// Whether real rescalings make all constants numbers, for each base.
fn scales_away(constants: &[Constant], n: usize) -> bool {
    let mut bases: Vec<Base> = Vec::new();
    for (b, _) in constants.iter().flat_map(|c| &c.bases) {
        if !bases.contains(b) {
            bases.push(*b);
        }
    }
    bases.into_iter().all(|base| {
        let mut rows: Vec<Vector> = Vec::new();
        let mut right = Vec::new();
        for c in constants {
            let (i, j, k) = c.place;
            let mut row = vec![Rational::ZERO; n];
            for (at, s) in [(i, Rational::ONE), (j, Rational::ONE), (k, Rational::MINUS_ONE)] {
                row[at] = row[at].add(&s);
            }
            rows.push(row);
            let e = c.bases.iter().find(|x| x.0 == base).map_or(Rational::ZERO, |x| x.1.clone());
            right.push(e.neg());
        }
        solve(&rows, &right, n).is_some()
    })
}

/// The algebra of the rescaled charges for given signs of the bases.
fn algebra(constants: &[Constant], n: usize, case: &[(Base, Sign)]) -> Option<Lie> {
    let mut brackets: Vec<(usize, usize, Vector)> = Vec::new();
    for c in constants {
        let mut number = c.number.clone();
        for (base, exponent) in &c.bases {
            match case.iter().find(|x| x.0 == *base).map(|x| x.1) {
                Some(Sign::Zero) => number = Rational::ZERO,
                Some(Sign::Negative) if !exponent.is_even_integer() => number = number.neg(),
                _ => {}
            }
        }
        let (i, j, k) = c.place;
        let at = brackets.iter().position(|b| (b.0, b.1) == (i, j)).unwrap_or_else(|| {
            brackets.push((i, j, vec![Rational::ZERO; n]));
            brackets.len() - 1
        });
        brackets[at].2[k] = brackets[at].2[k].add(&number);
    }
    Lie::new(n, &brackets)
}

/// Conditions on parameters that do not change the name are left out.
fn without_idle_conditions(list: Vec<Named>) -> Vec<Named> {
    let on_charges =
        |c: &[Condition]| c.iter().filter(|c| matches!(c, Condition::Charge(..))).cloned().collect::<Vec<_>>();
    let mut out: Vec<Named> = Vec::new();
    for named in &list {
        let charges = on_charges(&named.conditions);
        let alike = list
            .iter()
            .filter(|o| on_charges(&o.conditions) == charges)
            .all(|o| (&o.name, &o.kind) == (&named.name, &named.kind));
        let one = if alike { Named { conditions: charges, ..named.clone() } } else { named.clone() };
        if !out.contains(&one) {
            out.push(one);
        }
    }
    out
}
