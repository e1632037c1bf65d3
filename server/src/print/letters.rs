//! The letters of the page, where the model leaves them free: a model may well call an inductance L or a height h.

use leastwise_analysis::report::{Formula, Sheet};
use std::collections::HashSet;

/// What the derived quantities are called on a page.
pub struct Letters {
    /// The Lagrangian.
    pub lagrangian: &'static str,
    /// The energy function.
    pub energy: &'static str,
    /// Its rate.
    pub energy_rate: &'static str,
    /// A charge.
    pub charge: &'static str,
    /// Its rate.
    pub charge_rate: &'static str,
    /// A gauge term.
    pub gauge: &'static str,
    /// The mass matrix.
    pub mass: &'static str,
}

impl Letters {
    /// Those that no name of the model takes.
    pub fn of(sheet: &Sheet) -> Letters {
        let taken = names(sheet);
        let free = |letter: &'static str, other: &'static str| if taken.contains(letter) { other } else { letter };
        Letters {
            lagrangian: free("L", "ℒ"),
            energy: free("h", "energy"),
            energy_rate: if taken.contains("h") { "its rate" } else { "dh/dt" },
            charge: free("Q", "charge"),
            charge_rate: if taken.contains("Q") { "its rate" } else { "dQ/dt" },
            gauge: free("F", "gauge"),
            mass: free("M", "ℳ"),
        }
    }
}

/// The names in the Lagrangian, the equations and the symmetries.
fn names(sheet: &Sheet) -> HashSet<&str> {
    let equations = sheet.coordinates.iter().map(|c| &c.equation);
    let charges = sheet.symmetries.iter().flat_map(|s| [&s.charge, &s.rate]);
    let claims = sheet.conserved.iter().map(|c| &c.formula);
    let terms = sheet.terms.iter().map(|t| &t.formula);
    let formulas: Vec<&Formula> = equations.chain(charges).chain(claims).chain(terms).collect();
    let word = |c: char| c.is_alphanumeric() || c == '_';
    formulas.into_iter().flat_map(|f| f.plain.split(move |c| !word(c))).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::print::fixture;

    #[test]
    fn a_name_of_the_model_goes_first() {
        let mut sheet = fixture::sheet();
        assert_eq!(Letters::of(&sheet).lagrangian, "L");
        sheet.terms[1].formula = fixture::formula("1/2 L q̇²", "1/2*L*q'^2", "");
        sheet.coordinates[0].equation = fixture::formula("h + F0", "h + F0", "");
        let letters = Letters::of(&sheet);
        assert_eq!((letters.lagrangian, letters.energy, letters.energy_rate), ("ℒ", "energy", "its rate"));
        assert_eq!((letters.gauge, letters.charge), ("F", "Q"), "F0 is not F");
    }
}
