//! Inlay hints: short results beside the text.
//!
//! A hint stands behind the code of a line, before its comment: of a coordinate on the line of its name, of a claim on the
//! last line of its item, of the whole on the last line of the last term. Names of one line share a hint.

mod carry;
mod claims;
mod momenta;
mod quantities;
mod summary;

pub use carry::carried;

use crate::checked::{Checked, Contents};
use crate::database::Session;
use crate::derive::Derived;
use crate::sheet::Maker;
use leastwise_algebra::{Expr, Reason, Verdict};
use leastwise_grammar::{WordKind, words};
use leastwise_mechanics::context::Context;
use leastwise_mechanics::energy::is_total_energy;
use leastwise_mechanics::model::TermKind;
use std::ops::Range;

/// A hint beside the text.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Inlay {
    /// Where it stands: right before this byte of the file.
    pub offset: usize,
    /// What it is about.
    pub kind: InlayKind,
    /// The whole text, not yet cut; one line.
    pub label: String,
    /// What is to be looked at, where the hint names it: bytes in the file.
    pub target: Option<Range<usize>>,
}

/// What a hint is about; each can be switched off by itself.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum InlayKind {
    /// A coordinate's momentum, and whether it is conserved.
    Momentum,
    /// A claim's verdict.
    Claim,
    /// Degrees of freedom and energy, behind the last term.
    Summary,
    /// What a search found, behind the last term.
    Search,
    /// The unit of a name whose quantity is not declared.
    Quantity,
}

impl Session {
    /// The hints in a part of the file, its ends included, in the order of the file. Prints what it shows and no more.
    /// Empty while an item has no meaning: what it might still say is not known. The model must be of the session's last
    /// epoch.
    pub fn inlays(&mut self, checked: &Checked, derived: &Derived, range: Range<usize>) -> Vec<Inlay> {
        if !checked.complete {
            return Vec::new();
        }
        let mut out = self.with_maker(checked, |maker| {
            let mut desk = Desk { maker, checked, range, out: Vec::new() };
            momenta::hints(&mut desk, derived);
            claims::hints(&mut desk, derived);
            summary::hint(&mut desk, derived);
            quantities::hints(&mut desk);
            desk.out
        });
        out.sort_by_key(|h| h.offset);
        out
    }
}

/// Nodes that the print of one formula may visit or make: what takes more is too long for a hint.
const NODES: u64 = 10_000;

/// Stands for what is too long.
const MORE: &str = "…";

/// Where hints are made.
struct Desk<'m, 'a, 'c> {
    maker: &'m mut Maker<'a>,
    checked: &'c Checked,
    range: Range<usize>,
    out: Vec<Inlay>,
}

impl Desk<'_, '_, '_> {
    fn cx(&mut self) -> Context<'_> {
        let m = &mut *self.maker;
        Context { arena: m.arena, zero: m.zero, budget: m.budget, memory: m.memory }
    }

    /// Whether a function is the sum of the kinetic and potential terms, where there are any.
    fn is_energy(&mut self, h: Expr) -> Verdict {
        let model = self.checked.model();
        if model.terms.iter().all(|t| t.kind == TermKind::Lagrangian) {
            return Verdict::Undecided(Reason::Degenerate);
        }
        is_total_energy(&mut self.cx(), model, h)
    }

    fn wants(&self, offset: usize) -> bool {
        self.range.start <= offset && offset <= self.range.end
    }

    fn push(&mut self, offset: usize, kind: InlayKind, label: String, target: Option<Range<usize>>) {
        self.out.push(Inlay { offset, kind, label, target });
    }

    /// A formula on one line; an ellipsis for one that is too large to be read in a hint.
    fn print(&mut self, e: Expr) -> String {
        let Some(f) = self.maker.prints.within(self.maker.arena, e, NODES) else { return MORE.to_string() };
        f.text.lines().map(str::trim).collect::<Vec<_>>().join(", ")
    }

    /// A letter for a result; another where the model has that name for something else.
    fn letter(&self, letter: &str, other: &str) -> String {
        if self.checked.symbol(letter).is_some() { other.to_string() } else { letter.to_string() }
    }

    /// The place of a force: its name, or its keyword.
    fn force_place(&self, force: usize) -> Option<Range<usize>> {
        let place = self.checked.forces.get(force)?;
        Some(place.name.clone().unwrap_or_else(|| place.keyword.clone()))
    }

    /// Constraints by name, members of one item once.
    fn constraint_names(&self, of: impl Iterator<Item = usize>) -> Vec<String> {
        let mut out: Vec<String> = Vec::new();
        for k in of {
            let name = &self.checked.model().constraints[k].name;
            let name = name.split('[').next().unwrap_or(name);
            if !out.iter().any(|n| n == name) {
                out.push(name.to_string());
            }
        }
        out
    }
}

/// `a, b, c`; of many the first three and how many more.
fn list(names: &[String]) -> String {
    const NAMED: usize = 4;
    if names.len() <= NAMED {
        return names.join(", ");
    }
    format!("{} and {} more", names[..NAMED - 1].join(", "), names.len() - NAMED + 1)
}

/// One does, several do.
fn verb<'w>(names: &[String], one: &'w str, several: &'w str) -> &'w str {
    if names.len() == 1 { one } else { several }
}

/// Where the code of a line ends: behind its last word or sign, before a comment. `at` is a place in that line, outside a
/// comment.
fn code_end(checked: &Contents, at: usize) -> usize {
    let rest = &checked.text[at..];
    let line = &rest[..rest.find(['\n', '\r']).unwrap_or(rest.len())];
    let last = words(line).filter(|(_, kind)| *kind != WordKind::Comment).last();
    last.map_or(at, |(span, _)| at + span.range().end)
}

#[cfg(test)]
mod tests;
