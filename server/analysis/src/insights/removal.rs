//! Additive parts taken out of the text of their terms, so that the rest stays a formula.

use crate::checked::Checked;
use crate::mends::{self, Edits};
use leastwise_grammar::tree::*;
use std::ops::Range;

/// The edits that take parts, by term and part, out of the model; `None` where the text does not allow it without
/// touching a comment or a sign twice.
pub(super) fn without(checked: &Checked, parts: &[(usize, usize)]) -> Option<Edits> {
    let mut out = Edits::new();
    let mut terms: Vec<usize> = parts.iter().map(|p| p.0).collect();
    terms.dedup();
    for t in terms {
        let place = &checked.terms[t];
        let row = checked.items.iter().find(|i| i.range.start == place.range.start)?;
        let ItemKind::Term { body, .. } = &row.parsed.item.kind else { return None };
        let gone: Vec<Range<usize>> = parts.iter().filter(|p| p.0 == t).map(|p| checked.part_range(t, p.1)).collect();
        let knife = Knife { text: &checked.text, offset: row.range.start, gone };
        match knife.cut(body)? {
            Cut::All => out.extend(mends::without_item(checked, &row.range)),
            Cut::Edits(edits) if !edits.is_empty() => out.extend(edits),
            Cut::Edits(_) => return None,
        }
    }
    Some(out)
}

struct Knife<'a> {
    text: &'a str,
    offset: usize,
    gone: Vec<Range<usize>>,
}

/// What is left of a formula.
enum Cut {
    /// Nothing.
    All,
    /// The formula after these edits; none for the formula itself.
    Edits(Edits),
}

impl Knife<'_> {
    fn range(&self, span: Span) -> Range<usize> {
        self.offset + span.start as usize..self.offset + span.end as usize
    }

    fn cut(&self, f: &Formula) -> Option<Cut> {
        let range = self.range(f.span);
        if self.gone.contains(&range) {
            return Some(Cut::All);
        }
        if !self.gone.iter().any(|g| range.start <= g.start && g.end <= range.end) {
            return Some(Cut::Edits(Edits::new()));
        }
        match &f.kind {
            FormulaKind::Paren(inner) | FormulaKind::Neg(inner) | FormulaKind::Sum { body: inner, .. } => {
                self.cut(inner)
            }
            FormulaKind::Mul { left: a, right: b, .. } | FormulaKind::Div(a, b) => {
                let (Cut::Edits(mut edits), Cut::Edits(more)) = (self.cut(a)?, self.cut(b)?) else {
                    return Some(Cut::All);
                };
                edits.extend(more);
                Some(Cut::Edits(edits))
            }
            FormulaKind::Add(..) | FormulaKind::Sub(..) => {
                let operands = summands(f);
                self.cut_sum(&operands)
            }
            _ => None,
        }
    }

    /// Leading operands go with the sign behind them, where it is a plus; others with the sign before them.
    fn cut_sum(&self, operands: &[(bool, &Formula)]) -> Option<Cut> {
        let mut out = Edits::new();
        let mut kept: Option<usize> = None;
        for (k, (minus, operand)) in operands.iter().enumerate() {
            let here = self.range(operand.span);
            match self.cut(operand)? {
                Cut::All if kept.is_some() => {
                    let before = self.range(operands[k - 1].1.span).end;
                    out.push((self.plain(before..here.end)?, String::new()));
                }
                Cut::All => {}
                Cut::Edits(edits) => {
                    if kept.is_none() && k > 0 {
                        if *minus && matches!(operand.kind, FormulaKind::Neg(_)) {
                            return None;
                        }
                        let first = self.range(operands[0].1.span).start;
                        let sign = if *minus { "-" } else { "" };
                        out.push((self.plain(first..here.start)?, sign.to_owned()));
                    }
                    kept = Some(k);
                    out.extend(edits);
                }
            }
        }
        Some(if kept.is_none() { Cut::All } else { Cut::Edits(out) })
    }

    /// A range without a comment in it.
    fn plain(&self, range: Range<usize>) -> Option<Range<usize>> {
        (!self.text.get(range.clone())?.contains('#')).then_some(range)
    }
}

/// The operands of a sum with their signs. Sums lean to the left.
fn summands(f: &Formula) -> Vec<(bool, &Formula)> {
    let mut out = Vec::new();
    let mut at = f;
    loop {
        let (minus, left, right) = match &at.kind {
            FormulaKind::Add(a, b) => (false, a, b),
            FormulaKind::Sub(a, b) => (true, a, b),
            _ => break,
        };
        out.push((minus, &**right));
        at = left;
    }
    out.push((false, at));
    out.reverse();
    out
}
