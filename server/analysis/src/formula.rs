//! Printing with a memory: a formula that is the same expression is printed once.

use crate::report::Formula;
use leastwise_algebra::{Arena, Budget, DisplayOptions, Expr, textbook};
use std::collections::HashMap;
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

/// Nodes that one print may visit or make.
const NODES: u64 = 4_000_000;

/// Prints of the arena's expressions, kept as long as the arena.
#[derive(Default)]
pub(crate) struct Prints {
    /// With the nodes that each took.
    known: HashMap<Expr, (Formula, u64)>,
    /// What would have taken more than so many.
    refused: HashMap<Expr, u64>,
    options: DisplayOptions,
    /// Raised from outside, it ends a print.
    interrupt: Arc<AtomicBool>,
}

impl Prints {
    /// Takes a flag that ends prints when it is raised.
    pub fn set_interrupt(&mut self, flag: Arc<AtomicBool>) {
        self.interrupt = flag;
    }

    /// The textbook form.
    pub fn formula(&mut self, arena: &mut Arena, e: Expr) -> Formula {
        if let Some((f, _)) = self.known.get(&e) {
            return f.clone();
        }
        self.print(arena, e, NODES).0
    }

    /// The textbook form, where it can be had within so many nodes, whatever was printed before.
    pub fn within(&mut self, arena: &mut Arena, e: Expr, nodes: u64) -> Option<Formula> {
        if let Some((f, taken)) = self.known.get(&e) {
            return (*taken <= nodes).then(|| f.clone());
        }
        if self.refused.get(&e).is_some_and(|n| *n >= nodes) {
            return None;
        }
        let (f, taken) = self.print(arena, e, nodes);
        (taken <= nodes).then_some(f)
    }

    /// The form, and the nodes that it took; more than given where they did not suffice.
    fn print(&mut self, arena: &mut Arena, e: Expr, nodes: u64) -> (Formula, u64) {
        let mut budget = Budget::cancellable(nodes, self.interrupt.clone());
        let layout = textbook(arena, e, &self.options, &mut budget);
        let taken = if budget.left() == 0 { nodes + 1 } else { nodes - budget.left() };
        if taken > nodes && nodes < NODES {
            self.refused.insert(e, nodes);
            return (
                Formula { text: layout.text(), plain: String::new(), latex: String::new(), measured: None },
                taken,
            );
        }
        let f = Formula { text: layout.text(), plain: layout.plain(), latex: layout.latex(), measured: None };
        // A print that was cut short is not the one that is wanted next time.
        if !self.interrupt.load(Ordering::Relaxed) {
            self.known.insert(e, (f.clone(), taken));
        }
        (f, taken)
    }

    /// The textbook form in Unicode.
    pub fn text(&mut self, arena: &mut Arena, e: Expr) -> String {
        self.formula(arena, e).text
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use leastwise_algebra::Role;

    /// (x + y)³ sin y: what a print takes decides, not what was printed before.
    #[test]
    fn a_print_has_no_more_nodes_than_it_is_given() {
        let mut arena = Arena::new();
        let mut symbol = |name: &str| {
            let s = arena.symbol(name, None, Role::Coordinate);
            arena.sym(s)
        };
        let (x, y) = (symbol("x"), symbol("y"));
        let sum = arena.add(x, y);
        let power = arena.pow(sum, 3);
        let sine = arena.call(leastwise_algebra::Function::Sin, &[y]);
        let e = arena.mul(power, sine);
        let mut prints = Prints::default();
        assert_eq!(prints.within(&mut arena, e, 3), None);
        assert_eq!(prints.within(&mut arena, e, 3), None);
        let whole = prints.formula(&mut arena, e);
        assert_eq!(prints.within(&mut arena, e, 3), None);
        assert_eq!(prints.within(&mut arena, e, 100_000), Some(whole.clone()));
        assert_eq!(Prints::default().within(&mut arena, e, 100_000), Some(whole));
    }
}
