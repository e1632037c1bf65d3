//! Near misses: conditions on parameters under which a broken claim holds.
//!
//! The claim holds where certain expressions vanish identically. Each parameter in them is put to zero, each two
//! comparable ones are made equal, and where all coefficients have one polynomial in the parameters in common, that is
//! put to zero; then pairs of zeros and equalities, if no single one does. Residues decide first, then the zero test.

use crate::context::{Context, Parts};
use crate::mass::{MassRows, dense};
use leastwise_algebra::{Arena, Expr, Node, Rational, Role, Sign, Stopped, Verdict};
use std::collections::BTreeMap;

/// A condition on parameters.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Condition {
    /// The parameter is zero.
    Zero(Expr),
    /// The first parameter is equal to the second.
    Equal(Expr, Expr),
    /// The parameter is this expression of others.
    Solved(Expr, Expr),
}

impl Condition {
    /// What stands for which parameter.
    fn put(self) -> (Expr, Expr) {
        match self {
            Condition::Zero(k) => (k, Arena::ZERO),
            Condition::Equal(a, b) | Condition::Solved(a, b) => (a, b),
        }
    }
}

/// Conditions that together make a claim true.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Near {
    /// One or two.
    pub conditions: Vec<Condition>,
}

/// Of more parameters than this only the first are tried.
const MAX_PARAMETERS: usize = 10;
/// So many alternatives are told.
const MAX_NEAR: usize = 3;
/// The determinant of the mass matrix is looked at for so many coordinates.
pub const MAX_DENSE: usize = 24;
/// Larger expressions have their coefficients not compared.
const MAX_NODES: usize = 2000;

/// The conditions under which all the expressions vanish; equalities and zeros first, only minimal ones. None that
/// contradicts the assumptions, makes the mass matrix `rows` singular or compares what `comparable` does not let.
pub fn near(
    cx: &mut Context<'_>,
    rows: Option<&MassRows>,
    questions: &[Expr],
    comparable: &dyn Fn(&Arena, Expr, Expr) -> bool,
) -> Result<Vec<Near>, Stopped> {
    let mut parameters = Vec::new();
    for &e in questions {
        for a in cx.arena.atoms(e) {
            let own = matches!(cx.arena.node(a), Node::Symbol(s) if cx.arena.info(*s).role == Role::Parameter);
            if own && !parameters.contains(&a) {
                parameters.push(a);
            }
        }
    }
    parameters.sort_by_cached_key(|&k| name(cx.arena, k));
    parameters.truncate(MAX_PARAMETERS);
    let mut single = Vec::new();
    for (i, &a) in parameters.iter().enumerate() {
        for &b in &parameters[i + 1..] {
            if comparable(cx.arena, a, b) {
                single.push(Condition::Equal(a, b));
            }
        }
    }
    single.extend(parameters.iter().map(|&k| Condition::Zero(k)));
    let mut possible = Vec::new();
    for c in single {
        if is_possible(cx, c)? {
            possible.push(c);
        }
    }
    let mut out = Vec::new();
    for &c in &possible {
        try_out(cx, rows, questions, &[c], &mut out)?;
    }
    if out.is_empty()
        && let Some(c) = common_factor(cx, questions)?
        && is_possible(cx, c)?
    {
        try_out(cx, rows, questions, &[c], &mut out)?;
    }
    if out.is_empty() {
        for (i, &a) in possible.iter().enumerate() {
            for &b in &possible[i + 1..] {
                if out.len() < MAX_NEAR {
                    try_out(cx, rows, questions, &[a, b], &mut out)?;
                }
            }
        }
    }
    out.truncate(MAX_NEAR);
    Ok(out)
}

impl Near {
    /// Whether a condition changes one of these parameters.
    pub fn changes(&self, parameters: &[Expr]) -> bool {
        self.conditions.iter().any(|c| parameters.contains(&c.put().0))
    }
}

/// Whether the assumptions leave room for a condition.
fn is_possible(cx: &mut Context<'_>, c: Condition) -> Result<bool, Stopped> {
    let (a, b) = c.put();
    let gap = cx.arena.sub(a, b);
    let sign = cx.zero.sign_of(cx.arena, gap, cx.budget);
    if !matches!(sign, Sign::Unknown | Sign::NonNegative | Sign::NonPositive) {
        return Ok(false);
    }
    // What is put in for a parameter must have its sign.
    let (own, new) = (cx.zero.sign_of(cx.arena, a, cx.budget), cx.zero.sign_of(cx.arena, b, cx.budget));
    let against = matches!(
        (own, new),
        (Sign::Positive, Sign::Negative | Sign::NonPositive) | (Sign::Negative, Sign::Positive | Sign::NonNegative)
    );
    Ok(!against && cx.budget.left() > 0)
}

fn try_out(
    cx: &mut Context<'_>,
    rows: Option<&MassRows>,
    questions: &[Expr],
    conditions: &[Condition],
    out: &mut Vec<Near>,
) -> Result<(), Stopped> {
    let mut here = questions.to_vec();
    for e in &mut here {
        *e = put_in(cx, *e, conditions)?;
        if *e == Arena::UNDEFINED {
            return Ok(());
        }
    }
    here.retain(|&e| e != Arena::ZERO);
    if !here.is_empty() {
        match cx.zero.residue_vectors(cx.arena, std::slice::from_ref(&here), 2, cx.budget) {
            Ok(r) if r.vanishes(0) => {}
            _ => return Ok(()),
        }
        let lists: Vec<Parts> = here.iter().map(|&e| vec![(e, Rational::ONE)]).collect();
        if !cx.all_vanish(&lists).is_proved() {
            return Ok(());
        }
    }
    if let Some(rows) = rows.filter(|r| r.len() <= MAX_DENSE) {
        let all: Vec<usize> = (0..rows.len()).collect();
        let mut mass = dense(cx, rows, &all)?;
        for e in mass.iter_mut().flatten() {
            *e = put_in(cx, *e, conditions)?;
        }
        if !matches!(cx.zero.determinant_is_zero(cx.arena, &mass, cx.budget), Verdict::Refuted(_)) {
            return Ok(());
        }
    }
    out.push(Near { conditions: conditions.to_vec() });
    Ok(())
}

fn put_in(cx: &mut Context<'_>, e: Expr, conditions: &[Condition]) -> Result<Expr, Stopped> {
    let mut e = e;
    for c in conditions {
        e = cx.arena.substitute(e, &[c.put()].into_iter().collect(), cx.budget)?;
    }
    Ok(e)
}

/// The polynomial in the parameters that all coefficients have in common, solved for a parameter that it is linear in.
fn common_factor(cx: &mut Context<'_>, questions: &[Expr]) -> Result<Option<Condition>, Stopped> {
    let mut found: Option<(Expr, Expr)> = None;
    for &e in questions {
        if cx.arena.size(e) > MAX_NODES {
            return Ok(None);
        }
        let wide = cx.arena.expand(e, cx.budget)?;
        let mut groups: BTreeMap<usize, (Expr, Vec<(Expr, Rational)>)> = BTreeMap::new();
        for (term, c) in cx.arena.summands(wide) {
            let (mut own, mut rest) = (Vec::new(), Vec::new());
            for (base, exponent) in cx.arena.factors(term) {
                let list = if is_parameter(cx.arena, base) { &mut own } else { &mut rest };
                list.push((base, exponent));
            }
            let (own, rest) = (cx.arena.monomial(&own), cx.arena.monomial(&rest));
            groups.entry(rest.index()).or_insert((rest, Vec::new())).1.push((own, c));
        }
        for (_, (_, coefficient)) in groups {
            let Some(first) = coefficient.first().cloned() else { continue };
            // Up to the first term the polynomials of all groups must be the same.
            let mut parts = Vec::new();
            for (m, c) in &coefficient {
                parts.push((cx.arena.div(*m, first.0), c.div(&first.1).unwrap_or(Rational::ONE)));
            }
            let polynomial = cx.arena.linear(&parts);
            match found {
                None => found = Some((polynomial, cx.arena.linear(&coefficient))),
                Some((p, _)) if p == polynomial => {}
                Some((p, _)) => {
                    let gap = cx.arena.sub(p, polynomial);
                    if !cx.vanishes(&[(gap, Rational::ONE)]).is_proved() {
                        return Ok(None);
                    }
                }
            }
        }
    }
    let Some((_, p)) = found.filter(|f| cx.arena.as_number(f.0).is_none()) else { return Ok(None) };
    let mut best: Option<((bool, usize, String), Condition)> = None;
    for k in cx.arena.atoms(p) {
        let slope = cx.arena.partial(p, k, cx.budget)?;
        let again = cx.arena.partial(slope, k, cx.budget)?;
        if slope == Arena::ZERO || again != Arena::ZERO {
            continue;
        }
        let at_zero = cx.arena.substitute(p, &[(k, Arena::ZERO)].into_iter().collect(), cx.budget)?;
        let root = cx.arena.div(at_zero, slope);
        let root = cx.arena.neg(root);
        let root = cx.arena.expand(root, cx.budget)?;
        if root == Arena::ZERO || root == Arena::UNDEFINED {
            continue;
        }
        // Whole numbers read better: k₁ = 2 k₂, not k₂ = k₁/2.
        let broken = cx.arena.summands(root).iter().any(|(_, c)| !c.is_integer());
        let rank = (broken, cx.arena.size(root), name(cx.arena, k));
        if best.as_ref().is_none_or(|b| rank < b.0) {
            best = Some((rank, Condition::Solved(k, root)));
        }
    }
    Ok(best.map(|b| b.1))
}

fn name(arena: &Arena, e: Expr) -> String {
    match arena.node(e) {
        Node::Symbol(s) => arena.name(*s),
        _ => String::new(),
    }
}

fn is_parameter(arena: &Arena, e: Expr) -> bool {
    matches!(arena.node(e), Node::Symbol(s) if arena.info(*s).role == Role::Parameter)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::fixture::Fixture;
    use crate::mass::mass_rows;
    use crate::model::TermKind;

    /// A mass in the plane, with the torque that breaks its rotation.
    fn bound() -> Fixture {
        let mut f = Fixture::new();
        let (_, vx) = f.coordinate("x");
        let (_, vy) = f.coordinate("y");
        let m = f.parameter("m");
        let (a, b) = (f.half_square(m, vx), f.half_square(m, vy));
        f.term(TermKind::Kinetic, "mass", &[a, b]);
        f
    }

    fn check(f: &mut Fixture, question: Expr, want: &[&[Condition]]) {
        let model = f.model.clone();
        let rows = mass_rows(&mut f.cx(), &model).unwrap();
        let got = near(&mut f.cx(), Some(&rows), &[question], &|_, _, _| true).unwrap();
        let got: Vec<&[Condition]> = got.iter().map(|n| n.conditions.as_slice()).collect();
        assert_eq!(got, want);
    }

    #[test]
    fn two_springs_are_round_where_they_are_equal() {
        // The torque (k₁ − k₂) x y.
        let mut f = bound();
        let (a, b) = (f.parameter("k₁"), f.parameter("k₂"));
        let gap = f.arena.sub(a, b);
        let x = f.model.coordinates[0].clone().jet(&mut f.arena, 0);
        let torque = f.arena.mul(gap, x);
        check(&mut f, torque, &[&[Condition::Equal(a, b)]]);
        // And (k₁ − 2 k₂) x.
        let gap = f.arena.linear(&[(a, Rational::ONE), (b, Rational::integer(-2))]);
        let torque = f.arena.mul(gap, x);
        let twice = f.arena.scale(b, &Rational::integer(2));
        check(&mut f, torque, &[&[Condition::Solved(a, twice)]]);
    }

    #[test]
    fn a_mass_is_not_put_to_zero_but_gravity_is() {
        let mut f = bound();
        let (m, g) = (f.parameter("m"), f.parameter("g"));
        let weight = f.arena.mul(m, g);
        check(&mut f, weight, &[&[Condition::Zero(g)]]);
    }

    #[test]
    fn two_conditions_where_no_single_one_does() {
        // a x + b, of different dimensions.
        let mut f = bound();
        let (a, b) = (f.parameter("a"), f.parameter("b"));
        let x = f.model.coordinates[0].clone().jet(&mut f.arena, 0);
        let first = f.arena.mul(a, x);
        let sum = f.arena.add(first, b);
        let model = f.model.clone();
        let rows = mass_rows(&mut f.cx(), &model).unwrap();
        let got = near(&mut f.cx(), Some(&rows), &[sum], &|_, _, _| false).unwrap();
        assert_eq!(got, [Near { conditions: vec![Condition::Zero(a), Condition::Zero(b)] }]);
    }
}
