//! What every derivation works with: the arena, the zero test with its tables, a budget, and memory across edits.

use crate::mass::MassRows;
use crate::model::Coordinate;
use crate::symmetry::Generator;
use crate::verdicts::MassVerdict;
use leastwise_algebra::{Arena, Budget, Expr, Rational, Stopped, Verdict, ZeroTest};
use std::collections::HashMap;

/// Results that outlive an edit, keyed by the expressions they are of. Valid as long as the arena.
#[derive(Default)]
pub struct Memory {
    /// The coordinates that the generators move, in their order: ηⁱ alone does not say which one it moves.
    coordinates: Vec<Coordinate>,
    /// For each generator: the prolonged derivation's results.
    pub(crate) variations: HashMap<Generator, MemoMap>,
    /// For each generator and order of the jets: the derivation of charges and of works.
    pub(crate) flows: HashMap<(Generator, u16), MemoMap>,
    /// The last verdict on a mass matrix, with the assumptions and the matrix that it is of.
    pub(crate) mass: Option<(u64, MassRows, MassVerdict)>,
    /// Velocity derivatives along motions without acceleration.
    pub(crate) coasting: MemoMap,
    /// What parts are as regards total time derivatives.
    pub(crate) shapes: HashMap<Expr, crate::idle::Shape>,
}

impl Memory {
    /// Forgets what was derived for other coordinates, or for the same ones in another order.
    pub(crate) fn keep_only(&mut self, coordinates: &[Coordinate]) {
        if self.coordinates != coordinates {
            self.coordinates = coordinates.to_vec();
            self.variations.clear();
            self.flows.clear();
            self.shapes.clear();
        }
    }
}

/// A derivation's results.
pub(crate) type MemoMap = hashbrown::HashMap<Expr, Expr>;

/// The means of a derivation.
pub struct Context<'a> {
    /// Where expressions live.
    pub arena: &'a mut Arena,
    /// The zero test under the model's assumptions.
    pub zero: &'a mut ZeroTest,
    /// What may still be spent.
    pub budget: &'a mut Budget,
    /// Results of earlier edits.
    pub memory: &'a mut Memory,
}

/// A sum that is not built: expressions with coefficients.
pub type Parts = Vec<(Expr, Rational)>;

impl Context<'_> {
    /// Whether the sum of the parts vanishes identically.
    pub fn vanishes(&mut self, parts: &[(Expr, Rational)]) -> Verdict {
        match parts {
            [] => Verdict::Proved,
            // With its factor, so that a witness shows the value of the whole.
            [(e, c)] => {
                let e = self.arena.scale(*e, c);
                self.zero.is_zero(self.arena, e, self.budget)
            }
            _ => self.zero.sum_is_zero(self.arena, parts, self.budget),
        }
    }

    /// Whether all vanish: the first that does not decides.
    pub fn all_vanish(&mut self, lists: &[Parts]) -> Verdict {
        let mut result = Verdict::Proved;
        for parts in lists {
            match self.vanishes(parts) {
                Verdict::Proved => {}
                Verdict::Undecided(r) => result = Verdict::Undecided(r),
                refuted => return refuted,
            }
        }
        result
    }

    /// The sum of the parts as one expression.
    pub fn build(&mut self, parts: &[(Expr, Rational)]) -> Result<Expr, Stopped> {
        self.budget.charge(parts.len())?;
        Ok(self.arena.linear(parts))
    }
}
