//! The one place where the program meets the analysis: model texts in, findings and sheets out.

use crate::files::Disk;
use leastwise_analysis::report::{Answer, EnergyRow, Finding, Formula, Sheet};

/// The analysis with the files that models include.
pub struct Engine {
    disk: Disk,
}

impl Engine {
    /// Nothing read yet.
    pub fn new() -> Engine {
        Engine { disk: Disk::default() }
    }

    /// The files.
    pub fn disk(&self) -> &Disk {
        &self.disk
    }

    /// What is found in a model.
    pub fn findings(&mut self, _path: &str, _text: &str) -> Vec<Finding> {
        Vec::new()
    }

    /// All that is derived of a model, and what is found in it.
    pub fn sheet(&mut self, _path: &str, _text: &str) -> (Sheet, Vec<Finding>) {
        let zero = Formula { text: "0".into(), plain: "0".into(), latex: "0".into() };
        let energy =
            EnergyRow { formula: zero.clone(), conserved: Answer::Yes, rate: zero.clone(), is_total_energy: false };
        let sheet = Sheet {
            system: "model".into(),
            description: None,
            lagrangian: zero,
            terms: Vec::new(),
            coordinates: Vec::new(),
            mass_matrix: Vec::new(),
            mass_entries: Vec::new(),
            energy,
            symmetries: Vec::new(),
            conserved: Vec::new(),
        };
        (sheet, Vec::new())
    }
}

/// The text in the one usual layout.
pub fn format(text: &str) -> String {
    text.to_string()
}

/// All codes of findings with their explanations, in alphabetical order.
pub fn codes() -> Vec<(&'static str, String)> {
    let mut list: Vec<(&'static str, String)> =
        leastwise_grammar::codes::CODES.iter().map(|c| (c.name, c.explanation.to_string())).collect();
    list.push((NOT_UTF8, "a file that is not UTF-8 text".to_string()));
    list.sort();
    list.dedup_by(|a, b| a.0 == b.0);
    list
}

/// The code of a file that is no text.
pub const NOT_UTF8: &str = "not-utf8";
