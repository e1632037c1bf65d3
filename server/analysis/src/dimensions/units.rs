//! What a model's options make of dimensions: nothing, or dimensions modulo some that are set to one.

use super::Asked;
use crate::database::Reading;
use leastwise_grammar::tree::*;
use leastwise_quantities::unify::Form;
use leastwise_quantities::{Dimension, Exponent};
use std::sync::Arc;

/// The dimensions that are set to one, in echelon form: each with the base quantity that it replaces.
#[derive(Clone, PartialEq, Eq, Default, Debug)]
pub(crate) struct Units {
    ones: Vec<(usize, Dimension)>,
}

impl Units {
    /// Whether the model says that it has no quantities.
    pub fn are_off(reading: &Reading) -> bool {
        options(reading).any(|o| matches!(o, SystemOption::Dimensionless(_)))
    }

    /// What a model's options set to one.
    pub fn of(reading: &Reading, asked: &[(usize, Arc<Asked>)]) -> Units {
        let mut units = Units::default();
        for option in options(reading) {
            if let SystemOption::With(names) = option {
                names.iter().for_each(|name| units.set(asked, name));
            }
        }
        units
    }

    /// Sets a quantity to one: a declared parameter, or else a constant of nature by its usual symbol.
    fn set(&mut self, asked: &[(usize, Arc<Asked>)], name: &Name) {
        let own = asked.iter().flat_map(|(_, a)| &a.declared).find(|(n, ..)| **n == *name.text);
        let dimension = own.map(|(_, d, _)| *d).or_else(|| constant(&name.text));
        let Some(d) = dimension.map(|d| self.project(d)) else { return };
        let Some(at) = (0..7).rev().find(|&k| !d.exponents()[k].is_zero()) else { return };
        // The earlier ones are freed from the new one's base quantity.
        self.ones.push((at, d));
        let last = Units { ones: vec![(at, d)] };
        let n = self.ones.len() - 1;
        for (_, earlier) in &mut self.ones[..n] {
            *earlier = last.project(*earlier);
        }
    }

    /// The dimension without the base quantities that are replaced.
    pub fn project(&self, dimension: Dimension) -> Dimension {
        let mut out = dimension;
        for (at, one) in &self.ones {
            let (e, own) = (out.exponents()[*at], one.exponents()[*at]);
            let share = e.over(own).and_then(|n| one.pow(n)).and_then(|d| out.over(d));
            out = share.unwrap_or(out);
        }
        out
    }

    /// The same of a form.
    pub fn form(&self, form: &Form) -> Form {
        if self.ones.is_empty() {
            return form.clone();
        }
        let change = self.project(form.factor()).over(form.factor());
        change.and_then(|d| form.times(&d.into())).unwrap_or_else(|| form.clone())
    }
}

/// The options of the model's own `system` items.
fn options(reading: &Reading) -> impl Iterator<Item = &SystemOption> {
    let own = reading.entries.iter().filter(|e| e.file == 0);
    own.flat_map(|e| match &e.parsed.item.kind {
        ItemKind::System { options, .. } => options.as_slice(),
        _ => &[],
    })
}

/// The dimensions of the constants that are commonly set to one.
fn constant(symbol: &str) -> Option<Dimension> {
    let whole = match symbol {
        "c" => [1, 0, -1, 0, 0, 0, 0],
        "ħ" | "h" | "hbar" => [2, 1, -1, 0, 0, 0, 0],
        "G" => [3, -1, -2, 0, 0, 0, 0],
        "e" => [0, 0, 1, 1, 0, 0, 0],
        "k_B" | "kB" => [2, 1, -2, 0, -1, 0, 0],
        "ε₀" => [-3, -1, 4, 2, 0, 0, 0],
        "μ₀" => [1, 1, -2, -2, 0, 0, 0],
        _ => return None,
    };
    Some(Dimension::new(whole.map(Exponent::whole)))
}
