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
    known: HashMap<Expr, Formula>,
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
        if let Some(f) = self.known.get(&e) {
            return f.clone();
        }
        let layout = textbook(arena, e, &self.options, &mut Budget::cancellable(NODES, self.interrupt.clone()));
        let f = Formula { text: layout.text(), plain: layout.plain(), latex: layout.latex() };
        // A print that was cut short is not the one that is wanted next time.
        if !self.interrupt.load(Ordering::Relaxed) {
            self.known.insert(e, f.clone());
        }
        f
    }

    /// The textbook form in Unicode.
    pub fn text(&mut self, arena: &mut Arena, e: Expr) -> String {
        self.formula(arena, e).text
    }
}
