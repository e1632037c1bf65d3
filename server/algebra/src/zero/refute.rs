//! Refutation: a real point where the value is not zero, or atoms without relations.

use super::assumptions::{Assumptions, Relation};
use super::notes::{Note, Notes};
use super::plan::Plan;
use super::roots::Radicals;
use super::table::{Place, Table};
use super::target::Target;
use super::test::ZeroTest;
use super::verdict::{Reason, Verdict};
use super::witness::{ATTEMPTS, RealPoint, TRIES, Witness};
use crate::arena::{Arena, Expr, Node};
use crate::budget::{Budget, Stopped};
use hashbrown::HashSet;

/// How a real point lies to the assumptions.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Fit {
    /// It violates one, or may.
    Outside,
    /// It satisfies all, one of them perhaps with equality.
    Edge,
    /// It satisfies all strictly.
    Inside,
}

impl ZeroTest {
    /// A real point where the value is not zero, or another proof that it is not.
    pub(super) fn refute(
        &mut self,
        arena: &mut Arena,
        target: &Target<'_>,
        note: &Note,
        reason: Reason,
        budget: &mut Budget,
    ) -> Result<Verdict, Stopped> {
        if let Some(w) = self.witness(arena, target, 0, budget)? {
            return Ok(Verdict::Refuted(Some(w)));
        }
        if reason == Reason::NoWitness {
            if self.atoms_are_independent(arena, target, note, budget)? {
                return Ok(Verdict::Refuted(None));
            }
            let named = [
                (Notes::SYMBOLIC, Reason::SymbolicRange),
                (Notes::OPAQUE | Notes::INCOMPLETE, Reason::Functions),
                (Notes::SIGN, Reason::SignsUnknown),
                (Notes::HIDDEN, Reason::RelatedRoots),
                (Notes::ROOT, Reason::SignsUnknown),
                (Notes::ANGLE | Notes::EXPONENTIAL, Reason::Functions),
            ];
            for (flags, reason) in named {
                if note.flags & flags != 0 {
                    return Ok(Verdict::Undecided(reason));
                }
            }
        }
        Ok(Verdict::Undecided(reason))
    }

    /// Whether a value that is nonzero in a field is nonzero: its atoms satisfy no relation but those in use. These
    /// are names; sines and exponentials of different monomials in names, which are independent over the rationals
    /// modulo constants; values of unspecified functions; roots without relations.
    fn atoms_are_independent(
        &mut self,
        arena: &mut Arena,
        target: &Target<'_>,
        note: &Note,
        budget: &mut Budget,
    ) -> Result<bool, Stopped> {
        let related = Notes::SIGN
            | Notes::OPAQUE
            | Notes::HIDDEN
            | Notes::INCOMPLETE
            | Notes::SYMBOLIC
            | Notes::CONSTANTS
            | Notes::TOO_LARGE;
        if note.flags & related != 0 || !self.region_is_open(arena, budget)? {
            return Ok(false);
        }
        let list = target.expressions();
        if note.flags & (Notes::ANGLE | Notes::EXPONENTIAL) != 0 {
            let name = |e: Expr| matches!(arena.node(e), Node::Symbol(_) | Node::Jet(..));
            let monomial = |e: Expr| match arena.node(e) {
                Node::Product(f) => f.iter().all(|(b, r)| name(*b) && r.is_integer()),
                _ => name(e),
            };
            let mut pure = true;
            let mut seen = HashSet::new();
            let mut stack = list.clone();
            while let Some(x) = stack.pop() {
                if self.notes.note(x).flags & (Notes::ANGLE | Notes::EXPONENTIAL) == 0 || !seen.insert(x) {
                    continue;
                }
                budget.charge(1)?;
                if let Some(Plan::Angle { terms, .. } | Plan::Exponential { terms, .. }) = self.notes.plan(x) {
                    pure &= terms.iter().all(|t| monomial(t.0));
                }
                arena.for_children(x, &mut |c| stack.push(c));
            }
            if !pure {
                return Ok(false);
            }
        }
        if note.flags & Notes::ROOT != 0 {
            let Ok(found) = Radicals::collect(self, arena, &list, budget)? else { return Ok(false) };
            return Ok(self.relations(arena, &found, budget)? == 0);
        }
        Ok(true)
    }

    /// A real point that satisfies the assumptions and where the value is enclosed away from zero.
    pub(super) fn witness(
        &mut self,
        arena: &mut Arena,
        target: &Target<'_>,
        flips: u16,
        budget: &mut Budget,
    ) -> Result<Option<Witness>, Stopped> {
        let mut tries = 0;
        for k in 0..ATTEMPTS {
            if tries == TRIES {
                break;
            }
            if self.point_fits(arena, k, budget)? == Fit::Outside {
                continue;
            }
            tries += 1;
            let v = target.enclosure(self, arena, (k, flips), budget)?;
            if v.excludes_zero() {
                return Ok(Some(Witness { point: k, lower: v.lo, upper: v.hi }));
            }
        }
        Ok(None)
    }

    /// Whether a real point satisfies the assumptions for certain.
    fn point_fits(&mut self, arena: &mut Arena, k: u32, budget: &mut Budget) -> Result<Fit, Stopped> {
        if let Some(fit) = self.fits[k as usize] {
            return Ok(fit);
        }
        let mut fit = Fit::Inside;
        let mut table = Table::sparse(RealPoint { attempt: k, negated: Vec::new() });
        for (e, relation) in self.facts.facts().to_vec() {
            self.notes.analyse(arena, &self.facts, e, budget)?;
            let at = Place { arena, notes: &self.notes, facts: &self.facts };
            let v = table.value(at, e, budget)?;
            let up = match relation {
                Relation::Less | Relation::LessEqual => v.negate(),
                _ => v,
            };
            // A member at a symbolic index stands for all of them, which are drawn inside their bounds. Other
            // comparisons of such members cannot be checked.
            let symbolic = self.notes.note(e).flags & Notes::SYMBOLIC != 0;
            let drawn = symbolic && Assumptions::bounds_one_atom(arena, e) && relation != Relation::NotEqual;
            let inside = drawn || !symbolic && (up.lo > 0.0 || relation == Relation::NotEqual && v.hi < 0.0);
            let closed = matches!(relation, Relation::GreaterEqual | Relation::LessEqual);
            if !inside {
                fit = if closed && !symbolic && up.lo >= 0.0 { Fit::Edge } else { Fit::Outside };
            }
            if fit == Fit::Outside {
                break;
            }
        }
        self.fits[k as usize] = Some(fit);
        Ok(fit)
    }

    /// Whether the assumptions leave an open region, where what vanishes vanishes everywhere: strict ones do, if any
    /// point at all; others do around a point inside.
    fn region_is_open(&mut self, arena: &mut Arena, budget: &mut Budget) -> Result<bool, Stopped> {
        let closed = |r: Relation| matches!(r, Relation::GreaterEqual | Relation::LessEqual);
        if !self.facts.facts().iter().any(|f| closed(f.1)) {
            return Ok(true);
        }
        for k in 0..ATTEMPTS {
            if self.point_fits(arena, k, budget)? == Fit::Inside {
                return Ok(true);
            }
        }
        Ok(false)
    }
}
