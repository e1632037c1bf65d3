//! The session: texts in, checked models out, and only what changed is read and lowered anew.
//!
//! An item's tree is kept by its text and the functions in it; its meaning by its tree and the fingerprints of what it
//! names. A fingerprint covers what a name needs in turn, so an edited definition reaches all that depend on it, and
//! nothing else.

use crate::assemble;
pub use crate::checked::*;
use crate::codes;
use crate::dimensions::{self, Dimensions};
use crate::finding::LocalFinding;
use crate::include::{self, Files, Inclusion, Source};
use crate::lower::{Definition, Definitions, Lowered, Lowerer, Meaning, Motion, UNROLLED};
use crate::names;
use crate::scope::{Entry, Parsed, Scope, SymbolKind};
use crate::uses::uses;
use leastwise_algebra::{Arena, Budget, Expr};
use leastwise_grammar::tree::*;
use leastwise_grammar::{CallableNames, RawItem, callable_names, parse_item, split};
use leastwise_mechanics::lagrange;
use std::collections::HashMap;
use std::hash::{DefaultHasher, Hash, Hasher};
use std::sync::Arc;
use std::sync::atomic::AtomicBool;

/// Nodes that the formula of one item may visit or make.
const ITEM_NODES: u64 = 2_000_000;
/// Nodes that all formulas of a model may visit or make.
const MODEL_NODES: u64 = 40_000_000;
/// A new epoch begins when the arena has more nodes than this, and many times those that it began with.
const EPOCH_NODES: usize = 300_000;
const EPOCH_GROWTH: usize = 4;
/// Indices have at most so many values.
const MAX_MEMBERS: i64 = 1_000_000_000;
/// Results are kept for so many checks after their last use.
const KEPT: u64 = 16;

/// Texts, trees, meanings: all that is kept between two checks.
pub struct Session {
    /// The expressions of this epoch.
    pub(crate) arena: Arena,
    /// The number of this epoch; all expressions die with it.
    pub(crate) epoch: u64,
    /// Whether this epoch has had a check.
    begun: bool,
    /// The nodes of this epoch after its first check.
    base: Option<usize>,
    generation: u64,
    ids: u64,
    parsed: HashMap<(Arc<str>, u64), (Arc<Parsed>, u64)>,
    definitions: Definitions,
    sizes: crate::dimensions::Kept,
    lowered: HashMap<u64, (Arc<Lowered>, u64)>,
    /// Items parsed and lowered by the last check, for tests of incrementality.
    pub(crate) work: (usize, usize),
    /// Raised from outside, it ends what is being derived.
    pub(crate) interrupt: Arc<AtomicBool>,
    /// What derivations leave behind for the next edit.
    pub(crate) desk: Option<Box<crate::derive::Desk>>,
}

impl Default for Session {
    fn default() -> Session {
        Session::new()
    }
}

/// Everything of one check, on its way to [`Checked`].
pub(crate) struct Reading {
    pub sources: Vec<Source>,
    /// The files that the model's own file includes, by where the `include` begins.
    pub included: Vec<(usize, Arc<str>)>,
    pub entries: Vec<Entry>,
    pub scope: Scope,
    /// The meaning of each entry, where it has one.
    pub meanings: Vec<Option<Arc<Lowered>>>,
    /// Entries that cannot be taken as written.
    pub failed: Vec<bool>,
    /// Findings with their entries.
    pub findings: Vec<(usize, LocalFinding)>,
    /// The dimensions of names and formulas, where the model speaks of quantities.
    pub dimensions: Option<Dimensions>,
    /// All names, each after those that it needs.
    pub order: Vec<usize>,
}

impl Session {
    /// A session that knows nothing.
    pub fn new() -> Session {
        Session {
            arena: Arena::new(),
            epoch: 0,
            begun: false,
            base: None,
            generation: 0,
            ids: 0,
            parsed: HashMap::new(),
            definitions: HashMap::new(),
            sizes: HashMap::new(),
            lowered: HashMap::new(),
            work: (0, 0),
            interrupt: Arc::default(),
            desk: None,
        }
    }

    /// Takes a flag that ends derivations and prints when it is raised. What they then return says nothing and is to be
    /// thrown away; what they leave in the session's memory is whole.
    pub fn set_interrupt(&mut self, flag: Arc<AtomicBool>) {
        self.interrupt = flag;
    }

    /// The arena of this epoch.
    pub fn arena(&mut self) -> &mut Arena {
        &mut self.arena
    }

    /// Reads and lowers a model. Costs what has changed since the last check, plus one look at every item.
    pub fn check(&mut self, path: &str, text: &str, files: &dyn Files) -> Checked {
        self.generation += 1;
        self.work = (0, 0);
        // What the model needs is known after its first check and derivation.
        if self.begun && self.base.is_none() {
            self.base = Some(self.arena.len());
        }
        self.begun = true;
        let needed = self.base.unwrap_or(0).saturating_mul(EPOCH_GROWTH);
        if self.arena.len() > EPOCH_NODES.max(needed) {
            self.arena = Arena::new();
            self.epoch += 1;
            (self.begun, self.base) = (true, None);
            self.definitions.clear();
            self.lowered.clear();
        }
        let mut reading = self.read(path, text, files);
        names::check(&mut reading);
        let mut budget = Budget::new(MODEL_NODES);
        self.resolve(&mut reading, &mut budget);
        self.lower(&mut reading, &mut budget);
        self.measure(&mut reading);
        names::unused(&mut reading);
        let checked = assemble::assemble(&mut self.arena, self.epoch, &self.definitions, reading);
        self.forget();
        checked
    }

    /// Splits and parses the model's file and those it includes.
    fn read(&mut self, path: &str, text: &str, files: &dyn Files) -> Reading {
        let own = Source { path: path.into(), text: text.into(), parent: 0, depth: 0 };
        let mut sources = vec![own];
        // Of each file: its items, each with the `include` of the model's own file by which it came.
        let mut raw: Vec<(Vec<RawItem>, Option<usize>)> = Vec::new();
        let mut refused: Vec<(usize, usize, LocalFinding)> = Vec::new();
        let mut file = 0;
        let mut included = Vec::new();
        let mut vias: Vec<Option<usize>> = vec![None];
        while file < sources.len() {
            let items = split(&sources[file].text);
            for (k, item) in items.iter().enumerate() {
                if !item.text.starts_with("include") {
                    continue;
                }
                let parsed = self.parse(item, &CallableNames::default());
                let ItemKind::Include { file: name, span } = &parsed.item.kind else { continue };
                if parsed.is_faulty() {
                    continue;
                }
                let mut note = |path: &Arc<str>| {
                    if file == 0 {
                        included.push((item.range.start, path.clone()));
                    }
                };
                match include::include(&sources, file, name, *span, files) {
                    Inclusion::New(source) => {
                        note(&source.path);
                        sources.push(source);
                        vias.push(vias[file].or(Some(k)));
                    }
                    Inclusion::Known(path) => note(&path),
                    Inclusion::Refused(finding) => refused.push((file, k, finding)),
                }
            }
            raw.push((items, vias[file]));
            file += 1;
        }
        let callable = callable_names(raw.iter().flat_map(|(items, _)| items));
        // Included names come first, so that a second declaration is found in the model's own file.
        let first_own: usize = raw[1..].iter().map(|(items, _)| items.len()).sum();
        let order: Vec<usize> = (1..raw.len()).chain([0]).collect();
        let mut entries = Vec::with_capacity(first_own + raw[0].0.len());
        let mut starts = vec![0; raw.len()];
        for file in order {
            starts[file] = entries.len();
            let via = raw[file].1.map(|k| first_own + k);
            for item in &raw[file].0 {
                let parsed = self.parse(item, &callable);
                entries.push(Entry {
                    file,
                    offset: item.range.start,
                    parsed,
                    description: item.description.as_deref().map(Into::into),
                    text: item.text.as_str().into(),
                    via,
                });
            }
        }
        let mut findings = Vec::new();
        let paths: Vec<Arc<str>> = sources.iter().map(|s| s.path.clone()).collect();
        let scope = Scope::collect(&entries, &paths);
        let mut failed: Vec<bool> = entries.iter().map(|e| e.parsed.is_faulty()).collect();
        for (file, k, finding) in refused {
            failed[starts[file] + k] = true;
            findings.push((starts[file] + k, finding));
        }
        let meanings = vec![None; entries.len()];
        Reading { sources, included, entries, scope, meanings, failed, findings, dimensions: None, order: Vec::new() }
    }

    fn parse(&mut self, item: &RawItem, callable: &CallableNames) -> Arc<Parsed> {
        let callable = callable.occurring_in(&item.text);
        let key = (Arc::from(item.text.as_str()), callable.fingerprint());
        if let Some((parsed, used)) = self.parsed.get_mut(&key) {
            *used = self.generation;
            return parsed.clone();
        }
        self.work.0 += 1;
        let read = parse_item(&item.text, &callable);
        let uses = uses(&read.item);
        self.ids += 1;
        let parsed = Arc::new(Parsed { id: self.ids, item: read.item, slips: read.slips, uses });
        self.parsed.insert(key, (parsed.clone(), self.generation));
        parsed
    }

    /// Ranges, fingerprints and values of all names, each after those that it needs.
    fn resolve(&mut self, reading: &mut Reading, budget: &mut Budget) {
        let order = reading.scope.order(&reading.entries);
        reading.order = order.clone();
        let parsed: Vec<Option<Arc<Parsed>>> = reading.entries.iter().map(|e| Some(e.parsed.clone())).collect();
        for at in order {
            let decl = &reading.scope.decls[at];
            let faulty = decl
                .entry
                .is_some_and(|e| reading.failed[e] && matches!(decl.kind, SymbolKind::Definition | SymbolKind::Index));
            let mut failed = decl.failed || faulty;
            let mut range = None;
            let mut large = false;
            if let Some(index) = &decl.index {
                match reading.scope.get(&index.text) {
                    Some(d) if d.kind == SymbolKind::Index && !d.failed => {
                        range = d.range;
                        large = range.is_some_and(|(a, b)| b - a >= UNROLLED);
                    }
                    _ => failed = true,
                }
            }
            if decl.kind == SymbolKind::Index && !failed {
                match self.index_range(reading, at, budget, &parsed) {
                    Ok(r) => range = Some(r),
                    Err(findings) => {
                        failed = true;
                        let entry = decl.entry.unwrap_or(0);
                        // Several names of one item have one range.
                        if decl.place == 0 {
                            reading.findings.extend(findings.into_iter().map(|f| (entry, f)));
                        }
                    }
                }
            }
            let mut hasher = DefaultHasher::new();
            let decl = &reading.scope.decls[at];
            (decl.kind, &decl.name, range, decl.formals.len(), failed, decl.angle, decl.dimension).hash(&mut hasher);
            if let (SymbolKind::Definition, Some(entry)) = (decl.kind, decl.entry) {
                let parsed = &reading.entries[entry].parsed;
                large |= fingerprint(&reading.scope, parsed, &mut hasher);
            }
            let decl = &mut reading.scope.decls[at];
            (decl.range, decl.large, decl.failed) = (range, large, failed);
            decl.fingerprint = hasher.finish();
            if decl.kind == SymbolKind::Definition && !failed {
                self.define(reading, at, budget, &parsed);
            }
        }
    }

    fn index_range(
        &mut self,
        reading: &Reading,
        at: usize,
        budget: &mut Budget,
        parsed: &[Option<Arc<Parsed>>],
    ) -> Result<(i64, i64), Vec<LocalFinding>> {
        let decl = &reading.scope.decls[at];
        let Some(entry) = decl.entry else { return Err(Vec::new()) };
        let ItemKind::Index { lower, upper, .. } = &reading.entries[entry].parsed.item.kind else {
            return Err(Vec::new());
        };
        let mut item = Budget::new(ITEM_NODES.min(budget.left()));
        let mut lowerer = Lowerer::new(&mut self.arena, &reading.scope, parsed, &mut self.definitions, &mut item);
        let (a, b) = (lowerer.whole_number(lower), lowerer.whole_number(upper));
        let mut findings = lowerer.findings;
        match (a, b) {
            (Some(a), Some(b)) if a <= b && b.checked_sub(a).is_some_and(|n| n < MAX_MEMBERS) => return Ok((a, b)),
            (Some(a), Some(b)) => {
                let span = lower.span.to(upper.span);
                findings.push(if a > b {
                    LocalFinding::error(codes::SUM_RANGE, span, format!("no index runs from {a} to {b}"))
                        .help("write the smaller bound first")
                        .fixes(format!("write {b}..{a}"), vec![(span, format!("{b}..{a}"))])
                } else {
                    LocalFinding::error(codes::TOO_LARGE, span, "this range has too many values")
                        .help(format!("an index has at most {MAX_MEMBERS} values"))
                });
            }
            _ => {}
        }
        Err(findings)
    }

    /// Lowers a definition, unless its value is known.
    fn define(&mut self, reading: &mut Reading, at: usize, budget: &mut Budget, parsed: &[Option<Arc<Parsed>>]) {
        let decl = &reading.scope.decls[at];
        let fingerprint = decl.fingerprint;
        let entry = decl.entry.unwrap_or(0);
        let known = self.definitions.contains_key(&fingerprint);
        if !known {
            self.work.1 += 1;
            self.definitions.insert(fingerprint, Definition::default());
            let left = budget.left();
            let mut item = Budget::new(ITEM_NODES.min(left));
            let before = item.left();
            let mut lowerer = Lowerer::new(&mut self.arena, &reading.scope, parsed, &mut self.definitions, &mut item);
            let value = lowerer.definition(decl);
            let findings = lowerer.findings;
            let _ = budget.charge((before - item.left()) as usize);
            if let Some(d) = self.definitions.get_mut(&fingerprint) {
                (d.value, d.findings) = (value, findings);
            }
        }
        if let Some(d) = self.definitions.get_mut(&fingerprint) {
            d.generation = self.generation;
            let errors = d.findings.iter().any(|f| f.severity == Severity::Error);
            reading.findings.extend(d.findings.iter().cloned().map(|f| (entry, f)));
            if errors {
                reading.failed[entry] = true;
                reading.scope.decls[at].failed = true;
            }
        }
    }

    /// The meaning of all other items; claims about the motion after the terms.
    fn lower(&mut self, reading: &mut Reading, budget: &mut Budget) {
        let parsed: Vec<Option<Arc<Parsed>>> = reading.entries.iter().map(|e| Some(e.parsed.clone())).collect();
        let dimensionless = names::has_own_units(reading);
        let mut later = Vec::new();
        let mut motion = DefaultHasher::new();
        let mut parts: Vec<(Expr, i64)> = Vec::new();
        for at in 0..reading.entries.len() {
            let entry = &reading.entries[at];
            let needed = match entry.parsed.item.kind {
                ItemKind::Parameter(_) => true,
                ItemKind::Assume(_) => !reading.failed[at],
                _ => entry.file == 0 && !reading.failed[at] && has_meaning(&entry.parsed.item.kind),
            };
            if !needed {
                continue;
            }
            if entry.parsed.uses.motion {
                later.push(at);
                continue;
            }
            let mut hasher = DefaultHasher::new();
            dimensionless.hash(&mut hasher);
            let lowered = self.lower_item(reading, at, hasher, None, budget, &parsed, dimensionless);
            if let Meaning::Term { kind, parts: own, .. } = &lowered.meaning {
                let sign = if *kind == leastwise_mechanics::model::TermKind::Potential { -1 } else { 1 };
                for part in own {
                    (part.expr, sign).hash(&mut motion);
                    parts.push((part.expr, sign));
                }
            }
            reading.failed[at] |= lowered.failed;
            reading.meanings[at] = Some(lowered);
        }
        let motion = motion.finish();
        for at in later {
            let mut hasher = DefaultHasher::new();
            motion.hash(&mut hasher);
            let lowered =
                self.lower_item(reading, at, hasher, Some(Motion { parts: &parts }), budget, &parsed, dimensionless);
            reading.failed[at] |= lowered.failed;
            reading.meanings[at] = Some(lowered);
        }
    }

    #[allow(clippy::too_many_arguments)]
    fn lower_item(
        &mut self,
        reading: &Reading,
        at: usize,
        mut hasher: DefaultHasher,
        motion: Option<Motion<'_>>,
        budget: &mut Budget,
        parsed: &[Option<Arc<Parsed>>],
        dimensionless: bool,
    ) -> Arc<Lowered> {
        let entry = &reading.entries[at];
        fingerprint(&reading.scope, &entry.parsed, &mut hasher);
        let key = hasher.finish();
        if let Some((lowered, used)) = self.lowered.get_mut(&key) {
            *used = self.generation;
            return lowered.clone();
        }
        self.work.1 += 1;
        let mut item = Budget::new(ITEM_NODES.min(budget.left()));
        let before = item.left();
        let mut lowerer = Lowerer::new(&mut self.arena, &reading.scope, parsed, &mut self.definitions, &mut item);
        lowerer.motion = motion;
        let lowered = Arc::new(lowerer.item(&entry.parsed, dimensionless));
        let _ = budget.charge((before - item.left()) as usize);
        self.lowered.insert(key, (lowered.clone(), self.generation));
        lowered
    }

    /// Infers and compares dimensions.
    fn measure(&mut self, reading: &mut Reading) {
        let key = |reading: &Reading, at: usize| {
            let mut hasher = DefaultHasher::new();
            fingerprint(&reading.scope, &reading.entries[at].parsed, &mut hasher);
            hasher.finish()
        };
        let arena = &self.arena;
        let on_velocities = |reading: &Reading, at: usize| match reading.meanings[at].as_deref().map(|l| &l.meaning) {
            Some(Meaning::Force { pairs, .. }) => {
                pairs.iter().any(|(on, _)| lagrange::depends_on_velocities(arena, *on))
            }
            _ => false,
        };
        reading.dimensions = dimensions::check(reading, &mut self.sizes, self.generation, &key, &on_velocities);
    }

    /// Forgets what has not been used for a while.
    fn forget(&mut self) {
        if !self.generation.is_multiple_of(KEPT) {
            return;
        }
        let oldest = self.generation.saturating_sub(KEPT);
        self.parsed.retain(|_, (_, used)| *used >= oldest);
        self.lowered.retain(|_, (_, used)| *used >= oldest);
        self.sizes.retain(|_, (_, used)| *used >= oldest);
        self.definitions.retain(|_, d| d.generation >= oldest);
    }
}

/// Whether an item means more than the names that it declares.
fn has_meaning(kind: &ItemKind) -> bool {
    !matches!(
        kind,
        ItemKind::System { .. }
            | ItemKind::Coordinate { .. }
            | ItemKind::Input { .. }
            | ItemKind::Index { .. }
            | ItemKind::Let { .. }
            | ItemKind::Function { .. }
            | ItemKind::Include { .. }
            | ItemKind::Broken
    )
}

/// Adds the identity of an item and of all that it names. Whether one of the names is a large family.
fn fingerprint(scope: &Scope, parsed: &Parsed, hasher: &mut DefaultHasher) -> bool {
    parsed.id.hash(hasher);
    let mut large = false;
    for used in &parsed.uses.names {
        match scope.get(&used.name) {
            Some(d) => {
                (d.fingerprint, d.failed, d.disputed).hash(hasher);
                large |= d.large;
            }
            None => used.name.hash(hasher),
        }
    }
    large
}
