//! Sums over an index: written out where they are short, kept as one node where they are long.

use super::{Lowerer, UNROLLED};
use crate::codes;
use crate::finding::{LocalFinding, Place};
use crate::scope::SymbolKind;
use crate::uses;
use crate::values::{Value, combined, scaled};
use leastwise_algebra::{Arena, Expr, Role};
use leastwise_grammar::tree::*;

/// The range of a sum.
#[derive(Clone, Copy)]
pub(super) enum Range {
    /// From a number to a number: written out.
    Written(i64, i64),
    /// Kept as a node.
    Bound(Expr, Expr),
    /// The summand does not name the index: so many times the summand.
    Times(Expr),
}

impl Lowerer<'_> {
    pub(super) fn sum(
        &mut self,
        index: &Name,
        range: Option<&(Box<Formula>, Box<Formula>)>,
        body: &Formula,
        span: Span,
    ) -> Value {
        let Some(range) = self.sum_range(index, range, body) else {
            self.failed = true;
            return Value::Missing;
        };
        self.summed(index, range, span, &mut |l| l.lower(body))
    }

    /// The sum of what `body` gives.
    pub(super) fn summed(
        &mut self,
        index: &Name,
        range: Range,
        span: Span,
        body: &mut dyn FnMut(&mut Self) -> Value,
    ) -> Value {
        match range {
            Range::Times(count) => {
                let value = self.with_index(&index.text, 0, |l| body(l));
                scaled(self.arena, &value, count)
            }
            Range::Written(lower, upper) => {
                let mut terms = Vec::new();
                for k in lower..=upper {
                    let value = self.with_index(&index.text, k, |l| body(l));
                    let cost = self.width(&value);
                    if value.is_missing() || !self.charge(cost, span) {
                        return Value::Missing;
                    }
                    terms.push((false, value));
                }
                // An empty sum is zero whatever its summand's shape, which nothing tells.
                if terms.is_empty() { Value::Scalar(Arena::ZERO) } else { combined(self.arena, &terms) }
            }
            Range::Bound(lower, upper) => {
                // A name of its own at each depth: what is expanded inside may have an index of the same name.
                let symbol = self.arena.symbol(&format!("{}~{}", index.text, self.open.len()), None, Role::Index);
                let e = self.arena.sym(symbol);
                let value = self.with_open(&index.text, e, (lower, upper), |l| body(l));
                let (arena, budget) = (&mut *self.arena, &mut *self.budget);
                let result = value.map(&mut |x| arena.bound(symbol, lower, upper, x, budget));
                self.checked(result, span)
            }
        }
    }

    /// The range of a sum and how it is treated.
    pub(super) fn sum_range(
        &mut self,
        index: &Name,
        range: Option<&(Box<Formula>, Box<Formula>)>,
        body: &Formula,
    ) -> Option<Range> {
        let (lower, upper) = match range {
            Some((lower, upper)) => (self.bound_value(lower)?, self.bound_value(upper)?),
            None => {
                let decl = self.scope.get(&index.text)?;
                if decl.kind != SymbolKind::Index {
                    let message = format!("`{}` is {}, not an index", decl.name, decl.kind.described());
                    let finding = LocalFinding::error(codes::UNDECLARED_INDEX, index.span, message)
                        .help(format!("write the range: sum({} in 1..8: …), or declare an index", index.text))
                        .related(Place::Declaration(decl.name.clone()), "declared here");
                    self.report(finding);
                    return None;
                }
                let (a, b) = decl.range?;
                (self.arena.integer(a), self.arena.integer(b))
            }
        };
        let gap = self.arena.sub(upper, lower);
        if self.arena.as_i64(gap).is_none() && self.extreme(gap, false).is_some_and(|least| least < -1) {
            let span = range.map_or(index.span, |(a, b)| a.span.to(b.span));
            let finding = LocalFinding::error(
                codes::EMPTY_SUM,
                span,
                "this range runs backwards for some values of the outer index",
            )
            .help("restrict the outer sum to where the range is not empty");
            self.report(finding);
            return None;
        }
        if !uses::mentions(body, &index.text) {
            let count = self.arena.add(gap, Arena::ONE);
            if self.arena.as_i64(count).is_none_or(|n| n > 0) {
                return Some(Range::Times(count));
            }
        }
        match (self.arena.as_i64(lower), self.arena.as_i64(upper)) {
            (Some(a), Some(b)) => {
                let count = b.checked_sub(a)?.checked_add(1)?;
                let large = uses::names_in(body).iter().any(|n| self.scope.get(n).is_some_and(|d| d.large));
                if count <= 4 || (count <= UNROLLED && !large) {
                    Some(Range::Written(a, b))
                } else {
                    Some(Range::Bound(lower, upper))
                }
            }
            _ => Some(Range::Bound(lower, upper)),
        }
    }

    /// A bound of a sum: a whole number, or whole multiples of the indices outside plus a whole number.
    fn bound_value(&mut self, f: &Formula) -> Option<Expr> {
        let before = self.findings.len();
        let value = self.index_value(f);
        // The same as for an index, said of a range.
        for finding in &mut self.findings[before..] {
            if finding.code == codes::INDEX_FORM {
                finding.code = codes::SUM_RANGE;
                finding.message = "the range of a sum goes from a whole number to a whole number".into();
                finding.help = Some("an outer index or an integer definition may stand in it".into());
            }
        }
        value
    }
}
