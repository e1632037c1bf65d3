//! Assumptions: comparisons with zero, for all values of free indices.

use super::{Lowerer, Meaning, UNROLLED};
use crate::codes;
use crate::finding::LocalFinding;
use crate::scope::SymbolKind;
use leastwise_algebra::{Expr, Role};
use leastwise_grammar::tree::*;

impl Lowerer<'_> {
    pub(super) fn assume(&mut self, list: &[Comparison]) -> Option<Meaning> {
        let mut out = Vec::new();
        for comparison in list {
            // Indices that are free here run over their whole range.
            let mut free: Vec<String> = Vec::new();
            let formulas = std::iter::once(&comparison.first).chain(comparison.rest.iter().map(|(_, f)| f));
            for name in formulas.flat_map(crate::uses::names_in) {
                if self.scope.get(&name).is_some_and(|d| d.kind == SymbolKind::Index) && !free.contains(&name) {
                    free.push(name);
                }
            }
            self.for_all(&free, &mut |l| l.compare(comparison, &mut out))?;
        }
        Some(Meaning::Assume(out))
    }

    fn compare(&mut self, comparison: &Comparison, out: &mut Vec<(Expr, Relation, Span)>) -> Option<()> {
        let mut left = &comparison.first;
        let mut a = self.scalar(left, "what is compared")?;
        for (relation, right) in &comparison.rest {
            let b = self.scalar(right, "what is compared")?;
            let span = left.span.to(right.span);
            if *relation == Relation::Equal {
                let finding =
                    LocalFinding::error(codes::ASSUMED_EQUALITY, span, "an assumption compares with <, ≤, >, ≥ or ≠")
                        .help("for an equality write a definition: let a = b");
                self.report(finding);
                return None;
            }
            let difference = self.arena.sub(a, b);
            if let Some(r) = self.arena.as_number(difference) {
                let sign = r.signum();
                let holds = match relation {
                    Relation::Less => sign < 0,
                    Relation::LessEqual => sign <= 0,
                    Relation::Greater => sign > 0,
                    Relation::GreaterEqual => sign >= 0,
                    Relation::NotEqual => sign != 0,
                    Relation::Equal => sign == 0,
                };
                if !holds {
                    self.error(codes::CONTRADICTION, span, "this assumption cannot hold");
                    return None;
                }
            } else {
                out.push((difference, *relation, span));
            }
            (left, a) = (right, b);
        }
        Some(())
    }

    /// Does something for all values of these indices: one by one in small ranges, once with the index open in large ones.
    fn for_all(&mut self, names: &[String], f: &mut dyn FnMut(&mut Self) -> Option<()>) -> Option<()> {
        let Some((name, rest)) = names.split_first() else { return f(self) };
        let (lower, upper) = self.scope.get(name).and_then(|d| d.range)?;
        if upper - lower < UNROLLED {
            for k in lower..=upper {
                self.with_index(name, k, |l| l.for_all(rest, f))?;
            }
            return Some(());
        }
        let symbol = self.arena.symbol(name, None, Role::Index);
        let e = self.arena.sym(symbol);
        let bounds = (self.arena.integer(lower), self.arena.integer(upper));
        self.with_open(name, e, bounds, |l| l.for_all(rest, f))
    }
}
