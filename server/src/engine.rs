//! The one place where the program meets the analysis: model texts in, findings and sheets out.

use crate::files::Disk;
use leastwise_analysis::report::{Finding, Sheet};
use leastwise_analysis::search::{self, SearchReport};
use leastwise_analysis::{Files, Session, codes};
use std::sync::Arc;

/// The analysis with the files that models include.
pub struct Engine {
    session: Session,
    disk: Disk,
}

impl Files for Disk {
    fn read(&self, from: &str, include: &str) -> Result<(String, String), String> {
        self.include(from, include)
    }
}

impl Engine {
    /// Nothing read yet.
    pub fn new() -> Engine {
        Engine { session: Session::new(), disk: Disk::default() }
    }

    /// The files.
    pub fn disk(&self) -> &Disk {
        &self.disk
    }

    /// What is found in a model, in the order of its text.
    pub fn findings(&mut self, path: &str, text: &str) -> Vec<Finding> {
        let checked = self.session.check(path, text, &self.disk);
        let derived = self.session.derive(&checked);
        self.session.findings(&checked, &derived)
    }

    /// All that is derived of a model, and what is found in it.
    pub fn sheet(&mut self, path: &str, text: &str) -> (Sheet, Vec<Finding>) {
        let checked = self.session.check(path, text, &self.disk);
        let derived = self.session.derive(&checked);
        let findings = self.session.findings(&checked, &derived);
        (self.session.sheet(&checked, &derived), findings)
    }

    /// What a search finds in a model; nothing where it has errors.
    pub fn search(&mut self, path: &str, text: &str, degree: u32) -> Option<SearchReport> {
        // The search has a session of its own: two would take twice the memory.
        self.session = Session::new();
        search::search(path, text, &self.disk, degree, &Arc::default(), &mut |_| ())
    }
}

/// The text in the one usual layout.
pub fn format(text: &str) -> String {
    leastwise_grammar::format(text)
}

/// The code of a file that is no text.
pub const NOT_UTF8: &str = "not-utf8";

/// The code of a defect of the program itself, told by the language server.
pub const INTERNAL: &str = "internal-error";

/// What is told of a code beside its explanation; nothing of the program's own codes.
pub fn page(code: &str) -> Option<leastwise_analysis::pages::Page> {
    leastwise_analysis::pages::page(code)
}

/// All codes of findings with their explanations, in alphabetical order.
pub fn all_codes() -> Vec<(&'static str, &'static str)> {
    let own = [
        (NOT_UTF8, "a file that is not UTF-8 text"),
        (INTERNAL, "a defect of the program itself; please report it with the file"),
    ];
    let mut list: Vec<_> = codes::all().map(|c| (c.name, c.explanation)).chain(own).collect();
    list.sort_unstable();
    list
}
