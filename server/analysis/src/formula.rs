//! Printing with a memory: a formula that is the same expression is printed once.

use crate::report::Formula;
use leastwise_algebra::{Arena, Budget, DisplayOptions, Expr, textbook};
use std::collections::HashMap;

/// Nodes that one print may visit or make.
const NODES: u64 = 4_000_000;

/// Prints of the arena's expressions, kept as long as the arena.
#[derive(Default)]
pub(crate) struct Prints {
    known: HashMap<Expr, Formula>,
    options: DisplayOptions,
}

impl Prints {
    /// The textbook form.
    pub fn formula(&mut self, arena: &mut Arena, e: Expr) -> Formula {
        if let Some(f) = self.known.get(&e) {
            return f.clone();
        }
        let layout = textbook(arena, e, &self.options, &mut Budget::new(NODES));
        let f = Formula { text: layout.text(), plain: layout.plain(), latex: layout.latex() };
        self.known.insert(e, f.clone());
        f
    }

    /// The textbook form in Unicode.
    pub fn text(&mut self, arena: &mut Arena, e: Expr) -> String {
        self.formula(arena, e).text
    }
}
