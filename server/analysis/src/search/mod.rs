//! What nobody claimed: a search for constants of the motion, and the items that claim them.
//!
//! A search takes longer than a keystroke. It has a session of its own, with an arena of its own, so that it can run beside
//! the one that follows the text; what it hands back is printed and belongs to no arena. Each item that it offers is put
//! into the text and checked: only claims that are proved there are offered.

mod hidden;
mod naming;
mod source;

pub use leastwise_mechanics::search::Stage;
pub use source::insertion;

use crate::checked::Checked;
use crate::database::Session;
use crate::derive::{Derived, total};
use crate::features::inlay::{Inlay, InlayKind};
use crate::include::Files;
use crate::report::Formula;
use crate::sheet::Maker;
use leastwise_algebra::{Budget, Expr, Stopped, Verdict};
use leastwise_grammar::tree::Severity;
use leastwise_mechanics::context::{Context, Parts};
use leastwise_mechanics::lagrange::{momentum, signed_parts};
use leastwise_mechanics::model::Model;
use leastwise_mechanics::search::{Found, Item, Origin, Scope};
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

/// The total degree of the generators in t and q, where nobody says otherwise.
pub const DEGREE: u32 = 2;
/// The largest degree that may be asked for.
pub const MAX_DEGREE: u32 = 4;
/// Nodes that a search may visit or make. Of the example models the winch takes most, between 4 and 20 millions.
const NODES: u64 = 20_000_000;

/// A constant of the motion that was found.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct SearchRow {
    /// A name for it that the model does not have yet.
    pub name: String,
    /// What it is called in the trade, where it is that; else `charge of NAME` or `quadratic integral`.
    pub title: String,
    /// Whether it follows from what is claimed, from cyclic coordinates and from the energy.
    pub known: bool,
    /// τ first (`t`), then η for each coordinate that is moved; empty for a hidden symmetry.
    pub generator: Vec<(String, Formula)>,
    /// F with V = dF/dt, where it is not zero.
    pub gauge: Option<Formula>,
    /// The constant.
    pub charge: Formula,
    /// The item that claims it, proved in this model; `None` where none was.
    pub source: Option<String>,
}

/// What a search found.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct SearchReport {
    /// The degree that was asked for.
    pub degree: u32,
    /// Independent constants, the simplest first.
    pub items: Vec<SearchRow>,
    /// Why there may be others in the ansatz; `None` where it was searched through.
    pub incomplete: Option<String>,
}

impl SearchReport {
    /// What does not follow from what the model has.
    pub fn news(&self) -> impl Iterator<Item = &SearchRow> {
        self.items.iter().filter(|row| !row.known)
    }

    /// Whether there is nothing new, and the ansatz was searched through.
    pub fn none_other(&self) -> bool {
        self.incomplete.is_none() && self.news().next().is_none()
    }

    /// What is offered to be written into the file: the new ones with an item.
    pub fn offers(&self) -> Vec<&SearchRow> {
        self.news().filter(|row| row.source.is_some()).collect()
    }

    /// The ansatz, in words.
    pub fn ansatz(&self) -> String {
        format!(
            "point symmetries of degree {} in t and the coordinates, trigonometric in angles; integrals quadratic in the velocities",
            self.degree
        )
    }

    /// The hint behind the last term: `2 more: rotation_xy, boost_x`.
    pub fn inlay(&self, checked: &Checked) -> Option<Inlay> {
        let names: Vec<&str> = self.news().map(|row| row.name.as_str()).collect();
        let offset = checked.terms.last()?.range.end;
        if names.is_empty() {
            return None;
        }
        let label = format!("{} more: {}", names.len(), names.join(", "));
        Some(Inlay { offset, kind: InlayKind::Search, label, target: None })
    }
}

/// Searches a model for constants of the motion. `None` where the flag was raised meanwhile, or where the model has errors,
/// so that what it might still say is not known, no coordinates or terms, or more than a mebibyte of text.
pub fn search(
    path: &str,
    text: &str,
    files: &dyn Files,
    degree: u32,
    interrupt: &Arc<AtomicBool>,
    progress: &mut dyn FnMut(Stage),
) -> Option<SearchReport> {
    search_with(path, text, files, degree, interrupt, progress, &mut leastwise_mechanics::search::search)
}

/// Longer texts are not searched, in bytes: reading one a second time costs more than it finds.
const MAX_TEXT: usize = 1 << 20;

/// What looks for the constants: the mechanics, or a test.
type Finder<'f> =
    dyn FnMut(&mut Context<'_>, &Model, &Scope, &[Expr], &mut dyn FnMut(Stage)) -> Result<Found, Stopped> + 'f;

fn search_with(
    path: &str,
    text: &str,
    files: &dyn Files,
    degree: u32,
    interrupt: &Arc<AtomicBool>,
    progress: &mut dyn FnMut(Stage),
    finder: &mut Finder<'_>,
) -> Option<SearchReport> {
    if text.len() > MAX_TEXT {
        return None;
    }
    let mut session = Session::new();
    session.set_interrupt(interrupt.clone());
    let checked = session.check(path, text, files);
    let nothing_moves = checked.model().coordinates.is_empty() || checked.model().terms.is_empty();
    if nothing_moves || !checked.complete || checked.findings.iter().any(|f| f.severity == Severity::Error) {
        return None;
    }
    let derived = session.derive(&checked);
    let scope = Scope { degree: degree.min(MAX_DEGREE), angles: checked.angles().collect(), quadratic: true };
    let mut budget = Budget::cancellable(NODES, interrupt.clone());
    let report = session.with_maker(&checked, |maker| {
        let known = known(maker, &checked, &derived);
        let mut cx = Context { arena: maker.arena, zero: maker.zero, budget: &mut budget, memory: maker.memory };
        let found = match finder(&mut cx, checked.model(), &scope, &known, progress) {
            Ok(found) => found,
            Err(Stopped::Cancelled) => return None,
            Err(stopped) => Found { items: Vec::new(), incomplete: Some(format!("the search ended early: {stopped}")) },
        };
        let mut names = naming::Names::new(&checked);
        let items = found.items.iter().map(|item| row(maker, &checked, &derived, item, &mut names)).collect();
        Some((SearchReport { degree: scope.degree, items, incomplete: found.incomplete }, spare(maker, &found.items)))
    });
    let (mut report, spare) = report?;
    prove(&mut session, path, text, files, &mut report, &spare);
    (!interrupt.load(Ordering::Relaxed)).then_some(report)
}

/// The charges that the model has without a search: of the energy, of momenta, of claims that hold.
fn known(maker: &mut Maker<'_>, checked: &Checked, derived: &Derived) -> Vec<Expr> {
    let model = checked.model();
    let mut out = Vec::new();
    if let Ok(answers) = &derived.answers {
        if matches!(answers.energy_conserved, Ok(Verdict::Proved)) {
            out.push(answers.energy.function);
        }
        let all: Parts = signed_parts(model).concat();
        for (q, verdict) in model.coordinates.iter().zip(&answers.cyclic) {
            if q.members.is_some() || !verdict.momentum.is_proved() || !model.constraints.is_empty() {
                continue;
            }
            let mut cx = Context { arena: maker.arena, zero: maker.zero, budget: maker.budget, memory: maker.memory };
            let Ok(forms) = momentum(&mut cx, &all, q) else { continue };
            let parts: Parts = forms.iter().flat_map(|(f, c)| f.iter().map(|f| (f.expr, c.clone()))).collect();
            out.push(total(maker.arena, &parts));
        }
    }
    let holds = |s: &&leastwise_mechanics::verdicts::SymmetryAnswer| matches!(s.conserved, Ok(Verdict::Proved));
    out.extend(derived.symmetries.iter().flatten().filter(holds).map(|s| s.charge));
    let claims = checked.conserved().iter().zip(&derived.conserved);
    out.extend(
        claims.filter(|(_, c)| matches!(c, Ok(c) if matches!(c.verdict, Ok(Verdict::Proved)))).map(|c| c.0.expr),
    );
    out
}

fn row(
    maker: &mut Maker<'_>,
    checked: &Checked,
    derived: &Derived,
    item: &Item,
    names: &mut naming::Names,
) -> SearchRow {
    let model = checked.model();
    let (word, title) = naming::named(maker, checked, derived, item);
    let name = names.fresh(&word);
    let title = title.unwrap_or_else(|| match item.origin {
        Origin::Symmetry { .. } => format!("charge of {name}"),
        Origin::Quadratic => "quadratic integral".to_string(),
    });
    let charge = maker.prints.formula(maker.arena, item.charge);
    let (mut generator, mut gauge_term) = (Vec::new(), None);
    if let Origin::Symmetry { generator: g, gauge } = &item.origin {
        generator.push(("t".to_string(), maker.prints.formula(maker.arena, g.tau)));
        for (q, &eta) in model.coordinates.iter().zip(&g.eta) {
            if eta != leastwise_algebra::Arena::ZERO {
                generator.push((q.label(maker.arena), maker.prints.formula(maker.arena, eta)));
            }
        }
        gauge_term = gauge.map(|f| maker.prints.formula(maker.arena, f));
    }
    let source = match &item.origin {
        Origin::Symmetry { generator, .. } => source::symmetry(maker, model, &name, generator),
        Origin::Quadratic => source::conserved(maker, &name, item.charge),
    };
    SearchRow { name, title, known: item.known, generator, gauge: gauge_term, charge, source }
}

/// What is written where a symmetry is not proved in the text: its charge.
fn spare(maker: &mut Maker<'_>, items: &[Item]) -> Vec<Option<String>> {
    items.iter().map(|item| source::formula(maker, item.charge)).collect()
}

/// Puts the items of what is new into the text and keeps those that are proved there without a new finding.
fn prove(
    session: &mut Session,
    path: &str,
    text: &str,
    files: &dyn Files,
    report: &mut SearchReport,
    spare: &[Option<String>],
) {
    for round in 0..2 {
        let sources: Vec<&str> = report.news().filter_map(|row| row.source.as_deref()).collect();
        if sources.is_empty() {
            return;
        }
        let checked = session.check(path, text, files);
        let (at, inserted) = insertion(&checked, &sources);
        let with = format!("{}{inserted}{}", &text[..at], &text[at..]);
        let checked = session.check(path, &with, files);
        let derived = session.derive(&checked);
        let findings = session.findings(&checked, &derived);
        let clean = |range: &std::ops::Range<usize>| {
            let inside = |f: &crate::report::Finding| f.range.start < range.end && range.start < f.range.end;
            !findings.iter().any(|f| f.severity <= Severity::Warning && inside(f))
        };
        for (row, formula) in report.items.iter_mut().zip(spare).filter(|(row, _)| !row.known) {
            let symmetry = checked.symmetries().iter().zip(&derived.symmetries).any(|(claim, answer)| {
                let proved = matches!(answer, Ok(a) if matches!(a.conserved, Ok(Verdict::Proved)));
                claim.name == row.name && proved && clean(&claim.range)
            });
            let constant = checked.conserved().iter().zip(&derived.conserved).any(|(claim, answer)| {
                let proved = matches!(answer, Ok(c) if matches!(c.verdict, Ok(Verdict::Proved)));
                claim.name == row.name && proved && clean(&claim.range)
            });
            if !symmetry && !constant {
                let other = formula.as_ref().map(|f| format!("conserved {} = {f}", row.name));
                row.source = other.filter(|other| round == 0 && row.source.as_ref() != Some(other));
            }
        }
    }
}

#[cfg(test)]
mod tests;
