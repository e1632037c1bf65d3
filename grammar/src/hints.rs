//! Hints on how a formula was read, where a colleague may hesitate: `a/b c`, `a/2b`, `cos θ/2`.

use crate::codes;
use crate::slips::{Completed, Slips};
use crate::tree::*;

/// Adds the hints of a formula.
///
/// `text` is the item's text.
pub fn hints(text: &str, formula: &Formula, slips: &mut Slips) {
    Hints { text, slips }.walk(formula);
}

/// Adds the hints of all formulas of an item.
pub fn item_hints(text: &str, kind: &ItemKind, slips: &mut Slips) {
    let mut all = |formulas: &[&Formula]| formulas.iter().for_each(|f| hints(text, f, slips));
    match kind {
        ItemKind::Let { body, .. }
        | ItemKind::Term { body, .. }
        | ItemKind::Dissipation { body, .. }
        | ItemKind::Conserved { body, .. } => all(&[body]),
        ItemKind::Force { on, body, .. } => all(&[on, body]),
        ItemKind::Constraint { left, right, .. } => all(&[left, right]),
        ItemKind::Index { lower, upper, .. } => all(&[lower, upper]),
        ItemKind::Symmetry { arrows, .. } => arrows.iter().flat_map(|a| &a.targets).for_each(|f| all(&[f])),
        ItemKind::Assume(comparisons) => comparisons.iter().for_each(|c| {
            all(&[&c.first]);
            c.rest.iter().for_each(|(_, f)| all(&[f]));
        }),
        ItemKind::Run { until, with, .. } => {
            with.iter().for_each(|(_, f)| all(&[f]));
            if let Some(c) = until {
                all(&[&c.first]);
                c.rest.iter().for_each(|(_, f)| all(&[f]));
            }
        }
        _ => {}
    }
}

struct Hints<'h> {
    text: &'h str,
    slips: &'h mut Slips,
}

impl Hints<'_> {
    fn walk(&mut self, formula: &Formula) {
        if let FormulaKind::Mul { .. } | FormulaKind::Div(..) = formula.kind {
            return self.product(formula);
        }
        for part in formula.parts() {
            self.walk(part);
        }
    }

    /// A product or quotient from its last factor back to its first.
    fn product(&mut self, formula: &Formula) {
        // The factors behind the quotient below, as far as they stand side by side.
        let mut beside: Option<Span> = None;
        let mut at = formula;
        loop {
            match &at.kind {
                FormulaKind::Mul { left, right, times } => {
                    self.walk(right);
                    beside = (*times == Times::Juxtaposed).then(|| right.span.to(beside.unwrap_or(right.span)));
                    at = left;
                }
                FormulaKind::Div(left, right) => {
                    self.walk(right);
                    self.quotient(left, right, beside.take());
                    at = left;
                }
                _ => return self.walk(at),
            }
        }
    }

    fn quotient(&mut self, left: &Formula, right: &Formula, beside: Option<Span>) {
        let last = match &left.kind {
            FormulaKind::Mul { right, .. } | FormulaKind::Div(_, right) => right,
            _ => left,
        };
        let bare = match &last.kind {
            FormulaKind::Call { parenthesised: false, args, .. } => args.first().map(|argument| (last, argument)),
            FormulaKind::Neg(inner) => match &inner.kind {
                FormulaKind::Call { parenthesised: false, args, .. } => {
                    args.first().map(|argument| (&**inner, argument))
                }
                _ => None,
            },
            _ => None,
        };
        if let Some((call, argument)) = bare
            && !(is_constant(argument) && is_constant(right))
        {
            return self.function(call, argument, right);
        }
        let Some(beside) = beside else { return };
        if is_constant(left) && is_constant(right) {
            return;
        }
        let text = |span: Span| &self.text[span.range()];
        let (above, below) = (text(left.span.to(right.span)), text(right.span.to(beside)));
        let whole = left.span.to(beside);
        let (first, second) = (format!("({above}) {}", text(beside)), format!("{}/({below})", text(left.span)));
        self.slips
            .hint(codes::READ_QUOTIENT, whole, format!("read as {}", one_line(&first)))
            .mend(format!("write {}", one_line(&first)), whole, first)
            .mend(format!("write {}", one_line(&second)), whole, second);
    }

    fn function(&mut self, call: &Formula, argument: &Formula, below: &Formula) {
        let text = |span: Span| &self.text[span.range()];
        let whole = call.span.to(below.span);
        let name = text(Span { start: call.span.start, end: argument.span.start }).trim_end();
        let (call, argument, below) = (text(call.span), text(argument.span), text(below.span));
        let (first, second) = (format!("({call})/{below}"), format!("{name}({argument}/{below})"));
        self.slips
            .hint(codes::READ_FUNCTION, whole, format!("read as {}", one_line(&first)))
            .mend(format!("write {}", one_line(&first)), whole, first)
            .mend(format!("write {}", one_line(&second)), whole, second);
    }
}

/// Whether a formula is arithmetic of numbers.
fn is_constant(formula: &Formula) -> bool {
    match &formula.kind {
        FormulaKind::Number(_) => true,
        FormulaKind::Neg(_)
        | FormulaKind::Mul { .. }
        | FormulaKind::Div(..)
        | FormulaKind::Paren(_)
        | FormulaKind::Pow(..) => formula.parts().into_iter().all(is_constant),
        _ => false,
    }
}

/// A formula of several lines on one, and not too long for a message.
fn one_line(text: &str) -> String {
    let joined = text.split_whitespace().collect::<Vec<_>>().join(" ");
    if joined.chars().count() <= 60 {
        return joined;
    }
    format!("{}…", joined.chars().take(59).collect::<String>())
}
