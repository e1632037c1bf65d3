//! How many operations an expression takes to write, without laying it out.

use crate::arena::{Arena, Expr, Node};
use crate::display::form::coefficient_cost;
use crate::rational::Rational;
use hashbrown::HashMap;

/// Operations by expression, kept for one print.
#[derive(Default)]
pub(crate) struct Costs {
    known: HashMap<Expr, usize>,
}

impl Costs {
    /// The operations in writing an expression. Costs one visit per distinct node, once.
    pub fn of(&mut self, arena: &Arena, e: Expr) -> usize {
        if let Some(&n) = self.known.get(&e) {
            return n;
        }
        let n = match arena.node(e) {
            Node::Number(r) => usize::from(!r.is_integer()),
            Node::Pi | Node::Undefined | Node::Symbol(_) | Node::Jet(..) => 0,
            Node::Member { index, .. } => self.of(arena, *index),
            Node::Sum(c, terms) => {
                let mut n = terms.len() + usize::from(!c.is_zero()) - 1;
                let mut content = c.abs();
                let mut bare = 0usize;
                for (t, k) in terms.iter() {
                    let with = self.scaled(arena, k, *t);
                    let without = self.scaled(arena, &Rational::ONE, *t);
                    n = n.saturating_add(without);
                    bare += with - without.min(with);
                    content = if content.is_zero() { k.abs() } else { content.content(k) };
                }
                // One number in front of all may be shorter.
                let inverse = content.recip().unwrap_or(Rational::ONE);
                let taken: usize = terms.iter().map(|t| coefficient_cost(&t.1.mul(&inverse))).sum::<usize>()
                    + coefficient_cost(&content);
                n.saturating_add(bare.min(taken))
            }
            Node::Product(_) => self.scaled(arena, &Rational::ONE, e),
            Node::Power(b, x) => self.of(arena, *b).saturating_add(self.of(arena, *x)) + 1,
            Node::Call(_, args) => args.iter().fold(1usize, |n, a| n.saturating_add(self.of(arena, *a))),
            Node::Unspecified { index, args, .. } => {
                index.iter().chain(args.iter()).fold(1usize, |n, a| n.saturating_add(self.of(arena, *a)))
            }
            Node::Bound { lower, upper, body, .. } => {
                [lower, upper, body].iter().fold(1usize, |n, a| n.saturating_add(self.of(arena, **a)))
            }
        };
        self.known.insert(e, n);
        n
    }

    /// The operations in `c · core`, signs aside.
    fn scaled(&mut self, arena: &Arena, c: &Rational, core: Expr) -> usize {
        let (n, d) = match c.small() {
            Some((n, d)) => (n.unsigned_abs() != 1, d != 1),
            None => (true, true),
        };
        let (mut above, mut below) = (usize::from(n), usize::from(d));
        let mut inner = 0usize;
        for (b, e) in arena.factors(core) {
            inner = inner.saturating_add(self.of(arena, b));
            let size = e.abs();
            inner += usize::from(!size.is_one()) + usize::from(!size.is_integer() && size != Rational::HALF);
            if e.is_negative() { below += 1 } else { above += 1 }
        }
        inner.saturating_add(above.saturating_sub(1) + below.saturating_sub(1) + usize::from(below > 0))
    }
}
