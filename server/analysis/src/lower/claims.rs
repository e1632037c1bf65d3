//! `momentum(q)` and `energy`, which claims may name.

use super::{Lowerer, UNROLLED};
use crate::codes;
use crate::finding::LocalFinding;
use crate::values::Value;
use leastwise_algebra::{Arena, Derivation, Expr, Node, Rational, Role, Stopped, Symbol};
use leastwise_grammar::tree::*;
use leastwise_mechanics::forms::{at_member, derivative};
use leastwise_mechanics::model::Coordinate;

impl Lowerer<'_> {
    /// p = ∂L/∂q̇, summed over the terms.
    pub(super) fn momentum(&mut self, q: &Formula, span: Span) -> Value {
        let Some(motion) = self.motion.filter(|_| self.foreign.is_empty()) else {
            let finding =
                LocalFinding::error(codes::ONLY_IN_CONSERVED, span, "`momentum` stands in a `conserved` claim only")
                    .help("elsewhere write the momentum out");
            self.report(finding);
            return Value::Missing;
        };
        let value = self.lower(q);
        let atom = value.scalar().and_then(|e| match *self.arena.node(e) {
            Node::Symbol(s) if self.arena.info(s).role == Role::Coordinate => Some(self.arena.jet(s, 1)),
            _ => None,
        });
        let Some(atom) = atom else {
            if !value.is_missing() {
                let finding = LocalFinding::error(codes::NOT_A_COORDINATE, q.span, "`momentum` takes a coordinate")
                    .help("write momentum(x); for another quantity write its momentum out");
                self.report(finding);
            }
            return Value::Missing;
        };
        let family = self.large_family(atom);
        let result = linear_in_parts(self.arena, motion.parts, &mut |arena, part| match &family {
            None => arena.partial(part, atom, self.budget),
            // One form holds for the member: the one whose range it is in.
            Some((coordinate, index, k)) => {
                let forms = derivative(arena, part, coordinate, 1, self.budget)?;
                let form = forms.iter().find(|f| f.range.is_none_or(|(a, b)| (a..=b).contains(k)));
                form.map_or(Ok(Arena::ZERO), |f| at_member(arena, f.expr, *index, *k, self.budget))
            }
        });
        self.checked(result.map(Value::Scalar), span)
    }

    /// The large family that a velocity belongs to, its index, and which member it is.
    fn large_family(&mut self, velocity: Expr) -> Option<(Coordinate, Symbol, i64)> {
        let Node::Jet(s, _) = *self.arena.node(velocity) else { return None };
        let info = self.arena.info(s).clone();
        let decl = self.scope.get(&info.name)?;
        let ((lower, upper), index) = (decl.range?, decl.index.as_ref()?);
        if upper - lower < UNROLLED {
            return None;
        }
        let family = self.arena.symbol(&info.name, None, Role::Coordinate);
        let index = self.arena.symbol(&index.text, None, Role::Index);
        Some((Coordinate::family(family, index, lower, upper), index, info.member?))
    }

    /// h = Σ q̇ ∂L/∂q̇ − L. Σ q̇ ∂/∂q̇ is itself a derivation, the one that leaves each velocity as it is.
    pub(super) fn energy(&mut self, span: Span) -> Value {
        let Some(motion) = self.motion else { return Value::Missing };
        let mut rule = |arena: &mut Arena, x: Expr| {
            let velocity = match *arena.node(x) {
                Node::Jet(s, 1) => arena.info(s).role == Role::Coordinate,
                Node::Member { family, order: 1, .. } => arena.info(family).role == Role::Coordinate,
                _ => false,
            };
            Ok(if velocity { x } else { Arena::ZERO })
        };
        let mut euler = Derivation::new(&mut rule);
        let result = linear_in_parts(self.arena, motion.parts, &mut |arena, part| {
            let scaled = arena.derive(part, &mut euler, self.budget)?;
            Ok(arena.sub(scaled, part))
        });
        self.checked(result.map(Value::Scalar), span)
    }
}

fn linear_in_parts(
    arena: &mut Arena,
    parts: &[(Expr, i64)],
    f: &mut dyn FnMut(&mut Arena, Expr) -> Result<Expr, Stopped>,
) -> Result<Expr, Stopped> {
    let mut out = Vec::with_capacity(parts.len());
    for (part, sign) in parts {
        out.push((f(arena, *part)?, Rational::integer(*sign)));
    }
    Ok(arena.linear(&out))
}
