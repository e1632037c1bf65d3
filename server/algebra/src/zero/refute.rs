//! Refutation: a real point where the value is not zero, or atoms without relations.

use super::notes::{Note, Notes};
use super::signs::Relation;
use super::target::Target;
use super::test::ZeroTest;
use super::verdict::{Reason, Verdict};
use super::witness::{ATTEMPTS, Witness};
use crate::arena::{Arena, Node};
use crate::budget::{Budget, Stopped};

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
        if let Some(w) = self.witness(arena, target, budget)? {
            return Ok(Verdict::Refuted(Some(w)));
        }
        if reason == Reason::NoWitness {
            if self.atoms_are_independent(note) {
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

    /// Whether a value that is nonzero in a field is nonzero: the atoms satisfy no relation but those in use.
    fn atoms_are_independent(&self, note: &Note) -> bool {
        let related = Notes::EXPONENTIAL
            | Notes::ANGLE
            | Notes::ROOT
            | Notes::SIGN
            | Notes::OPAQUE
            | Notes::HIDDEN
            | Notes::INCOMPLETE
            | Notes::SYMBOLIC
            | Notes::CONSTANTS
            | Notes::TOO_LARGE
            | Notes::UNSPECIFIED;
        note.flags & related == 0 && note.lcm == 1
    }

    /// A real point that satisfies the assumptions and where the value is enclosed away from zero.
    fn witness(
        &mut self,
        arena: &mut Arena,
        target: &Target<'_>,
        budget: &mut Budget,
    ) -> Result<Option<Witness>, Stopped> {
        for k in 0..ATTEMPTS {
            if !self.point_fits(arena, k, budget)? {
                continue;
            }
            let v = target.enclosure(self, arena, k, budget)?;
            if v.excludes_zero() {
                return Ok(Some(Witness { point: k, lower: v.lo, upper: v.hi }));
            }
        }
        Ok(None)
    }

    /// Whether a real point satisfies the assumptions for certain.
    pub(super) fn point_fits(&mut self, arena: &mut Arena, k: u32, budget: &mut Budget) -> Result<bool, Stopped> {
        if let Some(fits) = self.fits[k as usize] {
            return Ok(fits);
        }
        let mut fits = true;
        for (e, relation) in self.facts.facts().to_vec() {
            self.notes.analyse(arena, &self.facts, e, budget)?;
            let v = self.real_value(arena, e, k, budget)?;
            // A member at a symbolic index stands for all of them, which are drawn inside their bounds.
            let family = matches!(arena.node(e), Node::Member { .. });
            fits &= family
                || v.exists()
                    && match relation {
                        Relation::Greater => v.lo > 0.0,
                        Relation::GreaterEqual => v.lo >= 0.0,
                        Relation::Less => v.hi < 0.0,
                        Relation::LessEqual => v.hi <= 0.0,
                        Relation::NotEqual => v.lo > 0.0 || v.hi < 0.0,
                    };
            if !fits {
                break;
            }
        }
        self.fits[k as usize] = Some(fits);
        Ok(fits)
    }
}
