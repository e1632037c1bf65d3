//! The roots and unknown signs in an expression, and whether the roots are related.
//!
//! Roots √f₁, √f₂, … satisfy no relation but their squares exactly if no product of some f is a constant times a
//! square. A product that is one has a constant Legendre symbol at all points; so full rank over GF(2) of the symbols
//! at some points, beside a row of ones, proves that there is no relation.

use super::notes::Notes;
use super::plan::{Kind, Plan};
use super::points;
use super::test::ZeroTest;
use super::verdict::Reason;
use crate::arena::{Arena, Expr, Node};
use crate::budget::{Budget, Stopped};
use crate::function::Function;
use hashbrown::{HashMap, HashSet};

/// Roots and signs inside some expressions.
#[derive(Default)]
pub(super) struct Radicals {
    /// What stands under square roots, numbers excepted.
    pub roots: Vec<Expr>,
    /// What stands in absolute values and signs, with unknown sign.
    pub signs: Vec<Expr>,
    /// Nested roots and roots of constants: each may hide a relation.
    pub hidden: usize,
    /// Those among them that are constants: what stands under the roots.
    pub constants: Vec<Expr>,
}

/// Ranks that have been found, by the sorted roots and the field.
pub(super) type RankMemo = HashMap<(Vec<Expr>, u32), usize>;

/// Roots beyond which no relation is looked for.
const MAX_ROOTS: usize = 200;

/// Summands up to which a range with roots inside is written out.
const UNROLLED: i64 = 64;

impl Radicals {
    /// Collects from nodes that have notes. Visits only nodes with roots or signs inside.
    pub fn collect(
        test: &mut ZeroTest,
        arena: &mut Arena,
        list: &[Expr],
        budget: &mut Budget,
    ) -> Result<Result<Radicals, Reason>, Stopped> {
        let mut out = Radicals::default();
        let mut seen = HashSet::new();
        let mut stack = list.to_vec();
        let mut roots = HashSet::new();
        let mut signs = HashSet::new();
        let mut constants = HashSet::new();
        while let Some(x) = stack.pop() {
            let note = test.notes.note(x);
            let interesting = Notes::ROOT | Notes::SIGN | Notes::HIDDEN;
            if note.flags & interesting == 0 || !seen.insert(x) {
                continue;
            }
            budget.charge(1)?;
            if let Node::Bound { index, lower, upper, body } = *arena.node(x) {
                // The roots of each summand are roots of their own.
                let range = (arena.as_i64(lower), arena.as_i64(upper));
                let (Some(a), Some(b)) = range else { return Ok(Err(Reason::SymbolicRange)) };
                if b.saturating_sub(a) >= UNROLLED {
                    return Ok(Err(Reason::RelatedRoots));
                }
                let i = arena.sym(index);
                for v in a..=b {
                    let v = arena.integer(v);
                    let term = arena.substitute(body, &HashMap::from_iter([(i, v)]), budget)?;
                    test.notes.analyse(arena, &test.facts, term, budget)?;
                    stack.push(term);
                }
                continue;
            }
            if let Node::Call(Function::Min | Function::Max, args) = arena.node(x)
                && let [a, b] = **args
            {
                let gap = arena.sub(a, b);
                test.notes.analyse(arena, &test.facts, gap, budget)?;
                signs.insert(gap);
            }
            if let Some(p) = test.notes.plan(x) {
                for f in p.factors() {
                    let constant = test.notes.note(f.base).flags & Notes::ATOMS == 0;
                    match &f.kind {
                        Kind::Absolute(_) | Kind::Signum => {
                            signs.insert(f.base);
                        }
                        // A root of a number, or one that the field knows, hides nothing.
                        Kind::Root(_) if constant => {
                            let hides = test.notes.note(x).flags & Notes::HIDDEN != 0;
                            if hides && arena.as_number(f.base).is_none() {
                                constants.insert(f.base);
                            }
                        }
                        Kind::Root(_) => {
                            roots.insert(f.base);
                            if test.notes.note(f.base).flags & Notes::ROOT != 0 {
                                constants.insert(f.base);
                            }
                        }
                        Kind::Other(r) if r.small().is_none_or(|(_, d)| d % 2 == 0) => {
                            roots.insert(f.base);
                            if r.small().is_none_or(|(_, d)| d % 4 == 0) {
                                constants.insert(f.base);
                            }
                        }
                        _ => {}
                    }
                }
                match p {
                    Plan::Bound { .. } => {}
                    p => p.for_needs(&mut |c| stack.push(c)),
                }
            } else {
                arena.for_children(x, &mut |c| stack.push(c));
            }
        }
        out.hidden = constants.len();
        out.constants = constants.iter().copied().filter(|e| test.notes.note(*e).flags & Notes::ATOMS == 0).collect();
        out.constants.sort_by_key(|e| (arena.key(*e), e.index()));
        if out.hidden == 0 && list.iter().any(|e| test.notes.note(*e).flags & Notes::HIDDEN != 0) {
            out.hidden = 1;
        }
        let sorted = |set: HashSet<Expr>| {
            let mut v: Vec<Expr> = set.into_iter().collect();
            v.sort_by_key(|e| (arena.key(*e), e.index()));
            v
        };
        out.roots = sorted(roots);
        out.signs = sorted(signs);
        Ok(Ok(out))
    }
}

impl ZeroTest {
    /// How many relations the roots may have, as seen over one field; 0 is a proof that there are none.
    pub(super) fn dependent_roots(
        &mut self,
        arena: &mut Arena,
        roots: &[Expr],
        field: u32,
        budget: &mut Budget,
    ) -> Result<usize, Stopped> {
        // Roots of different atoms are independent.
        if roots.iter().all(|r| matches!(arena.node(*r), Node::Symbol(_) | Node::Jet(..))) {
            return Ok(0);
        }
        if roots.len() > MAX_ROOTS {
            return Ok(roots.len());
        }
        let key = (roots.to_vec(), field);
        if let Some(&d) = self.ranks.get(&key) {
            return Ok(d);
        }
        // One row of ones and one of symbols for each root; columns are points.
        let words = (roots.len() + 24).div_ceil(64);
        let mut rows = vec![vec![0u64; words]; roots.len() + 1];
        rows[0].fill(u64::MAX);
        let mut column = 0;
        let mut k = 0;
        let f = self.fields.get(field);
        while column < words * 64 && k < 64 * words as u32 + 256 {
            // Points of one parity belong to one field.
            let point = points::unconstrained(2 * k + field);
            k += 1;
            let mut bits = Vec::with_capacity(roots.len());
            for r in roots {
                match self.value_at(arena, *r, point, budget)? {
                    Some(v) if v.is_real() && !v.is_zero() => bits.push(f.chi(v.re) < 0),
                    _ => break,
                }
            }
            if bits.len() < roots.len() {
                continue;
            }
            for (row, bit) in rows[1..].iter_mut().zip(&bits) {
                row[column / 64] |= (*bit as u64) << (column % 64);
            }
            column += 1;
        }
        for row in &mut rows {
            for (w, word) in row.iter_mut().enumerate() {
                let kept = column.saturating_sub(w * 64).min(64);
                *word &= if kept == 64 { u64::MAX } else { (1u64 << kept) - 1 };
            }
        }
        let missing = rows.len() - rank(rows);
        self.ranks.insert(key, missing);
        Ok(missing)
    }
}

/// The rank over GF(2).
fn rank(mut rows: Vec<Vec<u64>>) -> usize {
    let mut rank = 0;
    let columns = rows.first().map_or(0, |r| r.len() * 64);
    for c in 0..columns {
        let bit = |r: &Vec<u64>| r[c / 64] >> (c % 64) & 1 == 1;
        let Some(p) = (rank..rows.len()).find(|&i| bit(&rows[i])) else { continue };
        rows.swap(rank, p);
        let pivot = rows[rank].clone();
        for r in rows.iter_mut().skip(rank + 1).filter(|r| bit(r)) {
            r.iter_mut().zip(&pivot).for_each(|(a, b)| *a ^= b);
        }
        rank += 1;
        if rank == rows.len() {
            break;
        }
    }
    rank
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn rank_over_gf2() {
        assert_eq!(rank(vec![vec![0b11], vec![0b101], vec![0b110]]), 2);
        assert_eq!(rank(vec![vec![0b1], vec![0b10], vec![0b100]]), 3);
    }
}
