//! Additive parts of a formula, each with the place of its sub-formula: a sum is split at its signs, a product with one
//! sum among its factors is multiplied out over it, a sum over an index is split in its summand.

use super::products::{Operator, Product, factors, summands};
use super::sums::Range;
use super::{Lowerer, Part};
use crate::values::Value;
use leastwise_algebra::Expr;
use leastwise_grammar::tree::*;

/// A formula with more parts than this is kept whole.
const MAX_PARTS: usize = 64;

impl Lowerer<'_> {
    /// The parts of a formula whose value is a number; `None` where it has no value.
    pub fn parts(&mut self, f: &Formula, what: &str) -> Option<Vec<Part>> {
        let count = count(f);
        if count > 1 && count <= MAX_PARTS {
            let before = self.findings.len();
            if let Some(parts) = self.split(f) {
                return Some(parts.into_iter().map(|(expr, span)| Part { expr, span }).collect());
            }
            if self.findings.len() > before || self.failed {
                // What hinders the parts hinders the whole, except that a sum of vectors is no number.
                self.scalar(f, what);
                return None;
            }
        }
        let expr = self.scalar(f, what)?;
        Some(vec![Part { expr, span: f.span }])
    }

    /// The parts as (value, place); `None` where one of them has no value or is no number.
    fn split(&mut self, f: &Formula) -> Option<Vec<(Expr, Span)>> {
        match &f.kind {
            _ if count(f) == 1 => Some(vec![(self.lower(f).scalar()?, f.span)]),
            FormulaKind::Paren(inner) => self.split(inner),
            FormulaKind::Neg(inner) => {
                let parts = self.split(inner)?;
                Some(parts.into_iter().map(|(e, s)| (self.arena.neg(e), s)).collect())
            }
            FormulaKind::Add(..) | FormulaKind::Sub(..) => {
                let mut out = Vec::new();
                for (minus, operand) in summands(f) {
                    for (e, s) in self.split(operand)? {
                        out.push((if minus { self.arena.neg(e) } else { e }, s));
                    }
                }
                Some(out)
            }
            FormulaKind::Mul { .. } | FormulaKind::Div(..) => self.split_product(f),
            FormulaKind::Sum { index, range, body } => self.split_sum(index, range.as_ref(), body, f.span),
            _ => Some(vec![(self.lower(f).scalar()?, f.span)]),
        }
    }

    /// The one factor that is a sum is split, the others are multiplied into each of its parts.
    fn split_product(&mut self, f: &Formula) -> Option<Vec<(Expr, Span)>> {
        let list = factors(f);
        let at = splittable(&list)?;
        let mut others = Product::default();
        let mut previous = None;
        for (k, (operator, operand)) in list.iter().enumerate() {
            if k != at {
                let value = self.lower(operand);
                value.scalar()?;
                self.take(&mut others, *operator, value, previous, operand);
            }
            previous = Some(*operand);
        }
        let Value::Scalar(prefactor) = self.finish(others, f.span) else { return None };
        let parts = self.split(list[at].1)?;
        Some(parts.into_iter().map(|(e, s)| (self.arena.mul(prefactor, e), s)).collect())
    }

    fn split_sum(
        &mut self,
        index: &Name,
        range: Option<&(Box<Formula>, Box<Formula>)>,
        body: &Formula,
        span: Span,
    ) -> Option<Vec<(Expr, Span)>> {
        let range: Range = self.sum_range(index, range, body)?;
        let mut spans: Vec<Span> = Vec::new();
        // The parts of the summand are the components of a vector while they are summed.
        let value = self.summed(index, range, span, &mut |l| match l.split(body) {
            Some(parts) => {
                spans = parts.iter().map(|p| p.1).collect();
                Value::numbers(parts.into_iter().map(|p| p.0))
            }
            None => Value::Missing,
        });
        match value.components() {
            Some(sums) => Some(sums.into_iter().zip(spans).collect()),
            // An empty sum.
            None => Some(vec![(value.scalar()?, span)]),
        }
    }
}

/// The position of the only factor that has several parts, where the product may be multiplied out over it.
fn splittable(list: &[(Operator, &Formula)]) -> Option<usize> {
    let mut found = None;
    for (k, (operator, operand)) in list.iter().enumerate() {
        if count(operand) > 1 {
            if found.is_some() || *operator == Operator::Over || *operator == Operator::Times(Times::Cross) {
                return None;
            }
            found = Some(k);
        }
    }
    found
}

/// How many parts a formula has, from its form alone. Recursion follows the tree.
fn count(f: &Formula) -> usize {
    match &f.kind {
        FormulaKind::Paren(inner) | FormulaKind::Neg(inner) => count(inner),
        FormulaKind::Add(..) | FormulaKind::Sub(..) => {
            summands(f).iter().fold(0usize, |n, (_, s)| n.saturating_add(count(s)))
        }
        FormulaKind::Mul { .. } | FormulaKind::Div(..) => {
            let list = factors(f);
            splittable(&list).map_or(1, |k| count(list[k].1))
        }
        FormulaKind::Sum { body, .. } => count(body),
        _ => 1,
    }
}
