//! Idle terms: parts of L that are total time derivatives, told on their text with the edit that takes them out.

use super::asked;
use super::removal::without;
use crate::checked::Checked;
use crate::report::{Finding, Fix, Formula, Related};
use crate::sheet::Maker;
use leastwise_algebra::{Arena, Node, Role};
use leastwise_grammar::tree::Severity;
use leastwise_mechanics::idle::{Idle, idle};
use std::ops::Range;

/// Parts of L that change no equation of motion, alone or together.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct IdleRow {
    /// The terms to which they belong, each once.
    pub terms: Vec<String>,
    /// The parts: byte ranges in the file.
    pub parts: Vec<Range<usize>>,
    /// F with dF/dt = their sum in L; `None` where no closed form was found.
    pub derivative_of: Option<Formula>,
    /// Why they are idle: `it is d/dt(m x)`.
    pub why: String,
}

/// A row with the parts by number of term and part.
pub(super) struct Found {
    pub row: IdleRow,
    pub parts: Vec<(usize, usize)>,
    /// Whether it is worth a word: in 1 − cos θ the constant chooses the zero of an energy, and is not.
    pub told: bool,
    /// Whether the parts cancel each other.
    cancel: bool,
}

/// The idle parts in the order of the file; none where the derivation ended early.
pub(super) fn rows(maker: &mut Maker<'_>, checked: &Checked) -> Vec<Found> {
    let model = checked.model();
    let groups = asked(maker, |cx| idle(cx, model)).unwrap_or_default();
    groups.into_iter().map(|group| row(maker, checked, group)).collect()
}

fn row(maker: &mut Maker<'_>, checked: &Checked, group: Idle) -> Found {
    let model = checked.model();
    let mut terms: Vec<String> = Vec::new();
    for &(t, _) in &group.parts {
        if !terms.contains(&model.terms[t].name) {
            terms.push(model.terms[t].name.clone());
        }
    }
    let mut told = true;
    let why = match (group.parts.as_slice(), group.gauge) {
        _ if group.cancel => "they cancel each other".to_owned(),
        (&[(t, p)], gauge) => {
            let (placed, timely) = depends(maker.arena, model.terms[t].parts[p]);
            match gauge {
                _ if !placed && !timely => {
                    told = model.terms[t].parts.len() == 1;
                    "it is constant".to_owned()
                }
                _ if !placed => "it depends on the time alone".to_owned(),
                Some(f) => {
                    // As the term is written: a potential is subtracted in L.
                    let f = if model.terms[t].sign() < 0 { maker.arena.neg(f) } else { f };
                    let text = maker.print(f).text;
                    derivative("it is", &text)
                }
                None => "it is a total time derivative, of which no closed form was found".to_owned(),
            }
        }
        (_, Some(f)) => {
            let text = maker.print(f).text;
            derivative("their sum in L is", &text)
        }
        (_, None) => "their sum in L is a total time derivative, of which no closed form was found".to_owned(),
    };
    let parts = group.parts.iter().map(|&(t, p)| checked.part_range(t, p)).collect();
    let derivative_of = group.gauge.map(|f| maker.print(f));
    Found { row: IdleRow { terms, parts, derivative_of, why }, parts: group.parts, told, cancel: group.cancel }
}

fn derivative(what: &str, f: &str) -> String {
    // A long formula is in the sheet.
    const LONGEST: usize = 120;
    if f.contains('\n') || f.chars().count() > LONGEST {
        return format!("{what} a total time derivative");
    }
    format!("{what} d/dt({f})")
}

/// Whether an expression depends on coordinates, and whether on time or inputs.
fn depends(arena: &Arena, e: leastwise_algebra::Expr) -> (bool, bool) {
    let (mut placed, mut timely) = (false, false);
    for a in arena.atoms(e) {
        let symbol = match *arena.node(a) {
            Node::Symbol(s) | Node::Jet(s, _) => s,
            Node::Member { family, .. } => family,
            _ => continue,
        };
        placed |= arena.info(symbol).role == Role::Coordinate;
        timely |= matches!(arena.info(symbol).role, Role::Time | Role::Input);
    }
    (placed, timely)
}

/// Hints on idle parts. Terms that cancel each other may be meant so, as in a gauge that is compared: they are told on the
/// sheet only.
pub(crate) fn findings(maker: &mut Maker<'_>, checked: &Checked) -> Vec<Finding> {
    let mut out = Vec::new();
    for Found { row, parts, told, cancel } in rows(maker, checked) {
        if !told || cancel {
            continue;
        }
        let Some((&(t, _), range)) = parts.first().zip(row.parts.first()) else { continue };
        let name = &checked.model().terms[t].name;
        let whole = checked.terms[t].parts.len() == 1;
        let this = if whole { format!("`{name}`") } else { format!("this part of `{name}`") };
        let others = match parts.len() - 1 {
            0 => String::new(),
            1 => " with one other part".to_owned(),
            n => format!(" with {n} other parts"),
        };
        let message = format!("{this} adds nothing to the equations of motion{others}: {}", row.why);
        let related = row.parts[1..].iter().map(|r| Related { range: r.clone(), message: "together with this".into() });
        let title = format!(
            "remove {}: the equations of motion stay the same",
            if parts.len() > 1 { "these parts" } else { "it" }
        );
        let fixes = without(checked, &parts).map(|edits| Fix { title, edits });
        out.push(Finding {
            code: "idle-term",
            severity: Severity::Hint,
            message,
            help: Some("leave it out, or keep it for what it adds to momenta and energy".into()),
            range: range.clone(),
            related: related.collect(),
            fixes: fixes.into_iter().collect(),
        });
    }
    out
}
