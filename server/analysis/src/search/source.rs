//! The items that claim what was found, and where they go in the text.

use crate::checked::Checked;
use crate::sheet::Maker;
use leastwise_algebra::{Arena, Expr};
use leastwise_grammar::{WordKind, words};
use leastwise_mechanics::model::{Model, epsilon};
use leastwise_mechanics::symmetry::Generator;

/// Longer formulas are not written into a file.
const MAX_FORMULA: usize = 1000;

/// A formula on one line, in the letters that people read; `None` where it is too long to be written into a file.
pub(super) fn formula(maker: &mut Maker<'_>, e: Expr) -> Option<String> {
    let f = maker.prints.formula(maker.arena, e);
    // Abbreviations stand on lines of their own; without them there is the plain form.
    let one = if f.text.contains('\n') { f.plain } else { f.text };
    (one.len() <= MAX_FORMULA).then_some(one)
}

/// `symmetry NAME: x -> x + ε η, …`.
pub(super) fn symmetry(maker: &mut Maker<'_>, model: &Model, name: &str, g: &Generator) -> Option<String> {
    if let Some(turn) = turn(maker, model, g) {
        return Some(format!("symmetry {name}: {turn}"));
    }
    let eps = epsilon(maker.arena);
    let eps = maker.arena.sym(eps);
    let mut moved = vec![("t".to_string(), g.tau)];
    for (q, &eta) in model.coordinates.iter().zip(&g.eta) {
        moved.push((q.label(maker.arena), eta));
    }
    moved.retain(|m| m.1 != Arena::ZERO);
    let mut images = Vec::new();
    for (label, rate) in moved {
        let step = maker.arena.mul(eps, rate);
        let step = formula(maker, step)?;
        // What does not move comes first, as it is written by hand.
        images.push(match step.strip_prefix('-').map(str::trim_start) {
            Some(rest) if !is_sum(rest) => format!("{label} -> {label} - {rest}"),
            None if !is_sum(&step) => format!("{label} -> {label} + {step}"),
            _ => format!("{label} -> {label} + ({step})"),
        });
    }
    (!images.is_empty()).then(|| format!("symmetry {name}: {}", images.join(", ")))
}

/// Whether a printed formula is a sum.
fn is_sum(formula: &str) -> bool {
    let mut depth = 0;
    let outside = |c: char| {
        match c {
            '(' | '[' => depth += 1,
            ')' | ']' => depth -= 1,
            _ => {}
        }
        if depth == 0 { c } else { '_' }
    };
    let outside: String = formula.chars().map(outside).collect();
    outside.contains(" + ") || outside.contains(" - ")
}

/// The finite rotation of one pair of coordinates.
fn turn(maker: &mut Maker<'_>, model: &Model, g: &Generator) -> Option<String> {
    if g.tau != Arena::ZERO {
        return None;
    }
    let moved: Vec<usize> = (0..g.eta.len()).filter(|&i| g.eta[i] != Arena::ZERO).collect();
    let [i, j] = moved[..] else { return None };
    let (x, y) = (model.coordinates[i].jet(maker.arena, 0), model.coordinates[j].jet(maker.arena, 0));
    let (minus_x, minus_y) = (maker.arena.neg(x), maker.arena.neg(y));
    let (a, b) = (model.coordinates[i].label(maker.arena), model.coordinates[j].label(maker.arena));
    match (g.eta[i], g.eta[j]) {
        (e, f) if e == minus_y && f == x => {
            Some(format!("({a}, {b}) -> ({a} cos ε - {b} sin ε, {a} sin ε + {b} cos ε)"))
        }
        (e, f) if e == y && f == minus_x => {
            Some(format!("({a}, {b}) -> ({a} cos ε + {b} sin ε, {b} cos ε - {a} sin ε)"))
        }
        _ => None,
    }
}

/// `conserved NAME = …`.
pub(super) fn conserved(maker: &mut Maker<'_>, name: &str, charge: Expr) -> Option<String> {
    formula(maker, charge).map(|f| format!("conserved {name} = {f}"))
}

/// Where items go, and the text that puts them there: below the last claim, else below the last item.
pub fn insertion(checked: &Checked, sources: &[&str]) -> (usize, String) {
    let text = &*checked.text;
    let newline = if text.contains("\r\n") { "\r\n" } else { "\n" };
    let claims = checked.symmetries.iter().map(|c| c.range.end);
    let claims = claims.chain(checked.conserved.iter().map(|c| c.range.end));
    let (at, gap) = match claims.max() {
        Some(end) => (line_end(text, end), ""),
        None => {
            // Behind the last sign or comment.
            let last = words(text).last().map_or(0, |(span, kind)| match kind {
                WordKind::Comment => line_end(text, span.range().start),
                _ => line_end(text, span.range().end),
            });
            (last, newline)
        }
    };
    let list: String = sources.iter().map(|s| format!("{newline}{s}")).collect();
    (at, format!("{gap}{list}"))
}

fn line_end(text: &str, at: usize) -> usize {
    text[at..].find(['\n', '\r']).map_or(text.len(), |k| at + k)
}
