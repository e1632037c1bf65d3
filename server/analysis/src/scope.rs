//! What a model declares: the names, who declares them, and what each of them needs.

use crate::codes;
use crate::finding::{Change, LocalFinding, Place};
use crate::uses::{Uses, is_built_in};
use leastwise_grammar::tree::*;
use std::collections::HashMap;
use std::sync::Arc;

/// An item's text, read: kept as long as the text stays.
#[derive(Debug)]
pub struct Parsed {
    /// A number of its own.
    pub(crate) id: u64,
    /// The item.
    pub item: Item,
    /// What is wrong with the text.
    pub slips: Vec<Slip>,
    /// The names that it mentions.
    pub uses: Uses,
}

impl Parsed {
    /// Whether the text could not be read as written.
    pub fn is_faulty(&self) -> bool {
        self.slips.iter().any(|s| s.severity == Severity::Error)
    }
}

/// An item in its place.
#[derive(Clone, Debug)]
pub(crate) struct Entry {
    /// 0 for the model's own file.
    pub file: usize,
    /// Where the item begins in its file.
    pub offset: usize,
    /// What it says.
    pub parsed: Arc<Parsed>,
    /// The comment that describes it.
    pub description: Option<Arc<str>>,
    /// Its text.
    pub text: Arc<str>,
    /// The `include` of the model's own file by which it came.
    pub via: Option<usize>,
}

/// What a name is.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum SymbolKind {
    /// A generalised coordinate.
    Coordinate,
    /// A constant.
    Parameter,
    /// A signal from outside.
    Input,
    /// An index.
    Index,
    /// A definition.
    Definition,
    /// An unspecified function.
    Function,
    /// A name that is nowhere declared, taken for a constant.
    Undeclared,
}

impl SymbolKind {
    /// With its article, for messages.
    pub fn described(self) -> &'static str {
        match self {
            SymbolKind::Coordinate => "a coordinate",
            SymbolKind::Parameter | SymbolKind::Undeclared => "a parameter",
            SymbolKind::Input => "an input",
            SymbolKind::Index => "an index",
            SymbolKind::Definition => "a definition",
            SymbolKind::Function => "a function",
        }
    }
}

/// A declared name.
#[derive(Clone, Debug)]
pub(crate) struct Decl {
    pub name: Arc<str>,
    pub kind: SymbolKind,
    /// The item that declares it; `None` for a name that nobody declares.
    pub entry: Option<usize>,
    pub span: Span,
    /// Of a family: the name of its index.
    pub index: Option<Name>,
    pub formals: Vec<Arc<str>>,
    /// Whether its quantity is an angle.
    pub angle: bool,
    /// Of a coordinate: its dimension in sixtieths, where a quantity is declared.
    pub dimension: Option<[i64; 7]>,
    /// Which of several names of one item it is.
    pub place: usize,
    // Known after the names it needs.
    /// First and last member of a family; of an index, its range.
    pub range: Option<(i64, i64)>,
    /// Whether it is a large family, or made from one.
    pub large: bool,
    pub fingerprint: u64,
    pub failed: bool,
    /// Whether it is declared again elsewhere.
    pub disputed: bool,
}

impl Decl {
    pub fn is_family(&self) -> bool {
        self.index.is_some()
    }
}

/// All declared names.
#[derive(Default)]
pub(crate) struct Scope {
    pub decls: Vec<Decl>,
    pub by_name: HashMap<Arc<str>, usize>,
    /// Findings with the item in which they are.
    pub findings: Vec<(usize, LocalFinding)>,
}

impl Scope {
    pub fn get(&self, name: &str) -> Option<&Decl> {
        self.by_name.get(name).map(|&i| &self.decls[i])
    }

    /// Collects the declarations of all items.
    pub fn collect(entries: &[Entry], files: &[Arc<str>]) -> Scope {
        let mut scope = Scope::default();
        for (at, entry) in entries.iter().enumerate() {
            if entry.file != 0 && !crate::include::is_taken_in(&entry.parsed.item.kind) {
                continue;
            }
            match &entry.parsed.item.kind {
                ItemKind::Coordinate { declared, quantity, .. } => {
                    let first = scope.decls.len();
                    for (place, d) in declared.iter().enumerate() {
                        scope.declare(entries, files, at, place, SymbolKind::Coordinate, d, &[], is_angle(quantity));
                    }
                    let dimension = quantity.as_ref().and_then(crate::quantities::dimension);
                    scope.decls[first..].iter_mut().for_each(|d| d.dimension = dimension);
                }
                ItemKind::Parameter(list) => {
                    for (place, d) in list.iter().enumerate() {
                        let angle = is_angle(&d.quantity) || d.value.as_ref().is_some_and(|v| is_angle(&v.unit));
                        scope.declare(entries, files, at, place, SymbolKind::Parameter, &d.declared, &[], angle);
                    }
                }
                ItemKind::Input { declared, .. } => {
                    for (place, d) in declared.iter().enumerate() {
                        scope.declare(entries, files, at, place, SymbolKind::Input, d, &[], false);
                    }
                }
                ItemKind::Index { names, .. } => {
                    for (place, name) in names.iter().enumerate() {
                        let d = Declared { name: name.clone(), index: None };
                        scope.declare(entries, files, at, place, SymbolKind::Index, &d, &[], false);
                    }
                }
                ItemKind::Let { declared, formals, .. } => {
                    scope.formals(at, formals);
                    scope.declare(entries, files, at, 0, SymbolKind::Definition, declared, formals, false);
                }
                ItemKind::Function { declared, formals, .. } => {
                    scope.formals(at, formals);
                    scope.declare(entries, files, at, 0, SymbolKind::Function, declared, formals, false);
                }
                _ => {}
            }
        }
        scope
    }

    /// Formal arguments have different names.
    fn formals(&mut self, at: usize, formals: &[Name]) {
        for (k, name) in formals.iter().enumerate() {
            if formals[..k].iter().any(|f| f.text == name.text) {
                let message = format!("`{}` stands twice among the arguments", name.text);
                self.findings.push((at, LocalFinding::error(codes::DECLARED_TWICE, name.span, message)));
            }
        }
    }

    #[allow(clippy::too_many_arguments)]
    fn declare(
        &mut self,
        entries: &[Entry],
        files: &[Arc<str>],
        entry: usize,
        place: usize,
        kind: SymbolKind,
        declared: &Declared,
        formals: &[Name],
        angle: bool,
    ) {
        let (name, span) = (&declared.name.text, declared.name.span);
        if name.is_empty() {
            return;
        }
        if is_built_in(name) || leastwise_grammar::builtin(name).is_some() || name == "sum" {
            let what = match name.as_str() {
                "t" => "the time",
                "π" => "the number π",
                "ex" | "ey" | "ez" => "a unit vector",
                _ => "a function of the language",
            };
            let message = format!("`{name}` is {what} and is not declared");
            let finding = LocalFinding::error(codes::RESERVED_NAME, span, message).help("choose another name");
            self.findings.push((entry, finding));
            return;
        }
        if let Some(&first) = self.by_name.get(name.as_str()) {
            self.decls[first].disputed = true;
            let first = &self.decls[first];
            let mut finding = LocalFinding::error(codes::DECLARED_TWICE, span, format!("`{name}` is declared twice"))
                .help("a name is declared once; choose another name, or take one declaration out")
                .change("remove this declaration", Change::Remove(place));
            match first.entry {
                Some(e) if entries[e].file == 0 => {
                    finding = finding
                        .related(Place::Declaration(first.name.clone()), format!("`{name}` is first declared here"));
                }
                Some(e) => {
                    finding.message = format!("`{name}` is declared in `{}` already", files[entries[e].file]);
                }
                None => {}
            }
            self.findings.push((entry, finding));
            return;
        }
        let name: Arc<str> = name.as_str().into();
        self.by_name.insert(name.clone(), self.decls.len());
        self.decls.push(Decl {
            name,
            kind,
            entry: Some(entry),
            span,
            index: declared.index.clone(),
            formals: formals.iter().map(|n| n.text.as_str().into()).collect(),
            angle,
            dimension: None,
            place,
            range: None,
            large: false,
            fingerprint: 0,
            failed: false,
            disputed: false,
        });
    }

    /// Adds a name that nobody declares, as a constant.
    pub fn declare_implicit(&mut self, name: &str) {
        let name: Arc<str> = name.into();
        self.by_name.insert(name.clone(), self.decls.len());
        self.decls.push(Decl {
            name,
            kind: SymbolKind::Undeclared,
            entry: None,
            span: Span::default(),
            index: None,
            formals: Vec::new(),
            angle: false,
            dimension: None,
            place: 0,
            range: None,
            large: false,
            fingerprint: 1,
            failed: false,
            disputed: false,
        });
    }

    /// An order in which each name comes after those that it needs. Names in a circle, and no others, are marked as
    /// failed, with one finding per circle.
    pub fn order(&mut self, entries: &[Entry]) -> Vec<usize> {
        #[derive(Clone, Copy, PartialEq)]
        enum State {
            New,
            Open,
            Done,
        }
        let needs: Vec<Vec<usize>> = self.decls.iter().map(|d| self.needs(entries, d)).collect();
        let mut state = vec![State::New; self.decls.len()];
        let mut order = Vec::with_capacity(self.decls.len());
        let mut circles = Vec::new();
        for root in 0..self.decls.len() {
            if state[root] != State::New {
                continue;
            }
            state[root] = State::Open;
            let mut path = vec![(root, 0)];
            while let Some((at, next)) = path.last_mut() {
                let Some(&need) = needs[*at].get(*next) else {
                    state[*at] = State::Done;
                    order.push(*at);
                    path.pop();
                    continue;
                };
                *next += 1;
                match state[need] {
                    State::New => {
                        state[need] = State::Open;
                        path.push((need, 0));
                    }
                    State::Open => {
                        let from = path.iter().position(|(n, _)| *n == need).unwrap_or(0);
                        circles.push(path[from..].iter().map(|(n, _)| *n).collect::<Vec<_>>());
                    }
                    State::Done => {}
                }
            }
        }
        for circle in circles {
            self.circle(circle);
        }
        order
    }

    fn needs(&self, entries: &[Entry], d: &Decl) -> Vec<usize> {
        let Some(entry) = d.entry else { return Vec::new() };
        match d.kind {
            SymbolKind::Definition | SymbolKind::Index => {
                let uses = &entries[entry].parsed.uses.names;
                uses.iter().filter_map(|u| self.by_name.get(u.name.as_str()).copied()).collect()
            }
            _ => d.index.iter().filter_map(|i| self.by_name.get(i.text.as_str()).copied()).collect(),
        }
    }

    fn circle(&mut self, circle: Vec<usize>) {
        let known = circle.iter().any(|&n| self.decls[n].failed);
        for &n in &circle {
            self.decls[n].failed = true;
        }
        if known {
            return;
        }
        let names: Vec<Arc<str>> = circle.iter().map(|&n| self.decls[n].name.clone()).collect();
        let shown = names.len().min(8);
        let mut chain: Vec<String> = names[..shown].iter().map(|n| n.to_string()).collect();
        if shown < names.len() {
            chain.push("…".into());
        }
        chain.push(names[0].to_string());
        let message = if names.len() == 1 {
            format!("`{}` is defined by itself", names[0])
        } else {
            format!("these definitions need each other: {}", chain.join(" → "))
        };
        let first = &self.decls[circle[0]];
        let Some(entry) = first.entry else { return };
        let mut finding = LocalFinding::error(codes::CIRCULAR_DEFINITION, first.span, message);
        for name in names[..shown].iter().skip(1) {
            finding = finding.related(Place::Declaration(name.clone()), format!("`{name}` is defined here"));
        }
        self.findings.push((entry, finding));
    }
}

fn is_angle(unit: &Option<UnitText>) -> bool {
    unit.as_ref().is_some_and(|u| {
        u.factors.len() == 1
            && matches!(u.factors[0].symbol.text.as_str(), "angle" | "twist" | "rad" | "°" | "′" | "″" | "deg" | "mrad")
    })
}
