//! From a checked model to its derivation: the mechanics is asked. Printing comes after, where somebody looks.

use crate::checked::Checked;
use crate::database::Session;
use crate::formula::Prints;
use crate::insights::{self, Memo};
use crate::report::{Finding, Sheet};
use crate::sheet::Maker;
use crate::verdicts as told;
use leastwise_algebra::{Arena, Assumptions, Budget, Expr, Stopped, ZeroTest};
use leastwise_mechanics::claims::Claim;
use leastwise_mechanics::context::{Context, Memory, Parts};
use leastwise_mechanics::symmetry::NoGenerator;
use leastwise_mechanics::verdicts::{self, Answers, SymmetryAnswer};

/// Nodes that one model's derivation may visit or make.
const NODES: u64 = 60_000_000;

/// All verdicts on a model.
pub struct Derived {
    /// The model's own answers, or why there are none.
    pub answers: Result<Answers, Stopped>,
    /// One for each symmetry claim.
    pub symmetries: Vec<Result<SymmetryAnswer, NoGenerator>>,
    /// One for each claimed constant.
    pub conserved: Vec<Result<Claim, Stopped>>,
    /// What was derived where somebody looked.
    pub(crate) insights: Memo,
}

/// What the derivations of an epoch leave behind for the next edit.
pub(crate) struct Desk {
    epoch: u64,
    zero: ZeroTest,
    memory: Memory,
    prints: Prints,
}

impl Default for Desk {
    fn default() -> Desk {
        Desk { epoch: 0, zero: ZeroTest::new(Assumptions::new()), memory: Memory::default(), prints: Prints::default() }
    }
}

impl Session {
    /// Takes the desk out, cleared where the epoch has changed, under the model's assumptions.
    fn desk_for(&mut self, checked: &Checked) -> Box<Desk> {
        let mut desk = self.desk.take().unwrap_or_default();
        if desk.epoch != checked.epoch {
            desk = Box::new(Desk { epoch: checked.epoch, ..Desk::default() });
        }
        let mut facts = Assumptions::new();
        for (difference, relation) in checked.assumptions() {
            facts.assume(&mut self.arena, *difference, *relation);
        }
        desk.zero.set_assumptions(facts);
        desk.prints.set_interrupt(self.interrupt.clone());
        desk
    }

    /// Derives everything that verdicts need; prints nothing. The model must be of the session's last epoch.
    pub fn derive(&mut self, checked: &Checked) -> Derived {
        self.derive_within(checked, NODES)
    }

    /// The same with so many nodes to visit or make.
    pub(crate) fn derive_within(&mut self, checked: &Checked, nodes: u64) -> Derived {
        let mut desk = self.desk_for(checked);
        let mut budget = Budget::cancellable(nodes, self.interrupt.clone());
        let mut cx =
            Context { arena: &mut self.arena, zero: &mut desk.zero, budget: &mut budget, memory: &mut desk.memory };
        let derived = derive(&mut cx, checked);
        self.desk = Some(desk);
        derived
    }

    /// All findings: of the text and of the mechanics, in the order of the file.
    pub fn findings(&mut self, checked: &Checked, derived: &Derived) -> Vec<Finding> {
        let mut out = checked.findings.clone();
        self.with_maker(checked, |maker| {
            out.extend(told::findings(maker, checked, derived));
            out.extend(insights::findings(maker, checked));
        });
        out.sort_by_key(|f| (f.range.start, f.range.end));
        out
    }

    /// The sheet. Of a model that is too large to be derived it has the terms only; a finding says so.
    pub fn sheet(&mut self, checked: &Checked, derived: &Derived) -> Sheet {
        self.with_maker(checked, |maker| maker.make(checked, derived).unwrap_or_else(|_| maker.terms_only(checked)))
    }

    pub(crate) fn with_maker<T>(&mut self, checked: &Checked, f: impl FnOnce(&mut Maker<'_>) -> T) -> T {
        let mut desk = self.desk_for(checked);
        let mut budget = Budget::cancellable(NODES, self.interrupt.clone());
        let mut maker = Maker {
            arena: &mut self.arena,
            zero: &mut desk.zero,
            memory: &mut desk.memory,
            prints: &mut desk.prints,
            budget: &mut budget,
            dimensions: checked.dimensions.as_ref(),
        };
        let result = f(&mut maker);
        self.desk = Some(desk);
        result
    }
}

fn derive(cx: &mut Context<'_>, checked: &Checked) -> Derived {
    let model = checked.model();
    let answers = verdicts::answer(cx, model);
    let regular = answers.as_ref().is_ok_and(|a| a.mass.is_regular());
    let mut symmetries = Vec::new();
    for claim in checked.symmetries() {
        symmetries.push(verdicts::answer_symmetry(cx, model, regular, &claim.images));
    }
    let mut known = Vec::new();
    for s in symmetries.iter().flatten() {
        if let Ok(verdict) = &s.conserved {
            known.push((s.charge, *verdict));
        }
    }
    let mut conserved = Vec::new();
    for claim in checked.conserved() {
        conserved.push(match &answers {
            Ok(a) => verdicts::answer_claim(cx, model, a, &known, claim.expr),
            Err(s) => Err(*s),
        });
    }
    Derived { answers, symmetries, conserved, insights: Memo::default() }
}

/// The sum of unsummed parts.
pub(crate) fn total(arena: &mut Arena, parts: &Parts) -> Expr {
    arena.linear(parts)
}
