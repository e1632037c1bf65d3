//! What terms, forces and constraints may be made from: positions, velocities and time, forces on quantities and
//! constraints linear in the velocities.

use super::{Lowerer, Part};
use crate::codes;
use crate::finding::LocalFinding;
use leastwise_algebra::{Arena, Assumptions, Expr, Node, Role, Stopped, Verdict, ZeroTest};
use leastwise_grammar::tree::Span;

/// Linearity is looked at in so many velocities at most.
const MAX_VELOCITIES: usize = 64;

impl Lowerer<'_> {
    /// Whether an expression names a coordinate or velocity.
    pub(super) fn moves(&self, e: Expr) -> bool {
        self.arena.atoms(e).into_iter().any(|a| order(self.arena, a).is_some())
    }

    /// A finding where one of the parts contains an acceleration. Whether none does.
    pub(super) fn without_accelerations(&mut self, parts: &[Part], what: &str) -> bool {
        for part in parts {
            if self.has_acceleration(part.expr) {
                let finding = LocalFinding::error(
                    codes::ACCELERATION,
                    part.span,
                    format!("{what} does not contain accelerations"),
                )
                .help("accelerations follow from the equations of motion; write positions and velocities");
                self.report(finding);
                return false;
            }
        }
        true
    }

    fn has_acceleration(&self, e: Expr) -> bool {
        self.arena.atoms(e).into_iter().any(|a| order(self.arena, a).is_some_and(|n| n > 1))
    }

    /// A finding where an expression depends on velocities and not linearly. Whether there is none.
    pub(super) fn linear_in_velocities(&mut self, e: Expr, span: Span, what: &str) -> bool {
        if self.has_acceleration(e) {
            let part = Part { expr: e, span };
            return self.without_accelerations(&[part], what);
        }
        match self.is_linear(e) {
            Ok(true) => true,
            Ok(false) => {
                let finding = LocalFinding::error(
                    codes::NOT_LINEAR,
                    span,
                    format!("{what} is linear in the velocities, and this is not"),
                )
                .help("it depends on positions and time, or is a sum of velocities with such factors");
                self.report(finding);
                false
            }
            Err(why) => {
                self.stop(why, span);
                false
            }
        }
    }

    /// Whether no second derivative by velocities is proved to be other than zero.
    fn is_linear(&mut self, e: Expr) -> Result<bool, Stopped> {
        let atoms = self.arena.atoms(e);
        let velocities: Vec<Expr> = atoms.into_iter().filter(|a| order(self.arena, *a) == Some(1)).collect();
        let mut test = ZeroTest::new(Assumptions::new());
        for (k, v) in velocities.iter().take(MAX_VELOCITIES).enumerate() {
            let first = match self.arena.partial(e, *v, self.budget) {
                // Members of large families are not told apart here.
                Err(Stopped::FreeIndex) => continue,
                other => other?,
            };
            for w in velocities[k..].iter().take(MAX_VELOCITIES) {
                let second = match self.arena.partial(first, *w, self.budget) {
                    Err(Stopped::FreeIndex) => continue,
                    other => other?,
                };
                if second != Arena::ZERO && matches!(test.is_zero(self.arena, second, self.budget), Verdict::Refuted(_))
                {
                    return Ok(false);
                }
            }
        }
        Ok(true)
    }
}

/// The order of the time derivative, of an atom that belongs to a coordinate.
fn order(arena: &Arena, atom: Expr) -> Option<u16> {
    let (s, n) = match *arena.node(atom) {
        Node::Symbol(s) => (s, 0),
        Node::Jet(s, n) => (s, n),
        Node::Member { family, order, .. } => (family, order),
        _ => return None,
    };
    (arena.info(s).role == Role::Coordinate).then_some(n)
}
