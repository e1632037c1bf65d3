//! From entries and their meanings to a checked model: positions become those of the file.

use crate::checked::*;
use crate::codes;
use crate::database::Reading;
use crate::finding::{LocalFinding, Place};
use crate::include::shortened;
use crate::lower::{Definitions, Lowered, Meaning, Part, UNROLLED};
use crate::mends;
use crate::names::{is_dimensionless, title};
use crate::report::{Finding, Fix, Related};
use crate::scope::{Decl, Entry, SymbolKind};
use leastwise_algebra::{Arena, Expr, Relation as ZeroRelation, Role};
use leastwise_grammar::tree::*;
use leastwise_mechanics::model::{Action, Constraint, Coordinate, Force, Model, Term};
use std::collections::HashMap;
use std::ops::Range;
use std::sync::Arc;

/// At most so many findings are told.
const MOST_FINDINGS: usize = 1000;
/// At most so many findings of an included file are told.
const SHOWN: usize = 3;

fn at(entry: &Entry, span: Span) -> Range<usize> {
    entry.offset + span.start as usize..entry.offset + span.end as usize
}

fn parts_at(entry: &Entry, parts: &[Part]) -> Vec<Range<usize>> {
    parts.iter().map(|p| at(entry, p.span)).collect()
}

/// Puts everything together.
pub(crate) fn assemble(arena: &mut Arena, epoch: u64, definitions: &Definitions, reading: Reading) -> Checked {
    let mut out = Builder { arena, reading: &reading, own: Vec::new() };
    out.own = reading.entries.iter().enumerate().filter(|(_, e)| e.file == 0).map(|(k, _)| k).collect();
    let items = out.items();
    let (model, places) = out.model();
    let symbols = out.symbols(definitions);
    let contents = Contents {
        path: reading.sources[0].path.clone(),
        text: reading.sources[0].text.clone(),
        epoch,
        included: reading.included.clone(),
        symbols,
        model,
        coordinates: places.coordinates,
        terms: places.terms,
        forces: places.forces,
        constraints: places.constraints,
        assumptions: out.assumptions(),
        symmetries: out.symmetries(),
        conserved: out.conserved(),
        runs: out.runs(),
        system: out.system(),
        findings: findings(&reading),
        dimensions: reading.dimensions.clone(),
        complete: !items.iter().any(|i| i.failed),
        items,
    };
    Checked(Arc::new(contents))
}

#[derive(Default)]
struct Places {
    coordinates: Vec<CoordinatePlace>,
    terms: Vec<TermPlace>,
    forces: Vec<TermPlace>,
    constraints: Vec<Range<usize>>,
}

struct Builder<'a> {
    arena: &'a mut Arena,
    reading: &'a Reading,
    own: Vec<usize>,
}

impl<'a> Builder<'a> {
    fn items(&self) -> Vec<ItemRow> {
        let row = |&k: &usize| {
            let e = &self.reading.entries[k];
            ItemRow {
                range: e.offset..e.offset + e.text.len(),
                parsed: e.parsed.clone(),
                description: e.description.clone(),
                failed: self.reading.failed[k],
            }
        };
        self.own.iter().map(row).collect()
    }

    /// The own entries with their meanings, each with its name: the given one, or keyword and number.
    fn named(&self) -> Vec<(&'a Entry, &'a Lowered, String)> {
        let mut count: HashMap<&str, usize> = HashMap::new();
        let mut out = Vec::new();
        for &k in &self.own {
            let entry = &self.reading.entries[k];
            let keyword = match &entry.parsed.item.kind {
                ItemKind::Term { kind: TermKind::Kinetic, .. } => "kinetic",
                ItemKind::Term { kind: TermKind::Potential, .. } => "potential",
                ItemKind::Term { kind: TermKind::Lagrangian, .. } => "lagrangian",
                ItemKind::Dissipation { .. } => "dissipation",
                ItemKind::Force { .. } => "force",
                ItemKind::Constraint { .. } => "constraint",
                ItemKind::Symmetry { .. } => "symmetry",
                ItemKind::Conserved { .. } => "conserved",
                ItemKind::Run { .. } => "run",
                _ => "",
            };
            let number = count.entry(keyword).or_default();
            *number += 1;
            let name = match title(&entry.parsed.item.kind) {
                Some((_, name)) => name.text.clone(),
                None => format!("{keyword} {number}"),
            };
            if let Some(lowered) = &self.reading.meanings[k]
                && !self.reading.failed[k]
            {
                out.push((entry, &**lowered, name));
            }
        }
        out
    }

    fn model(&mut self) -> (Model, Places) {
        let mut model =
            Model { coordinates: Vec::new(), terms: Vec::new(), forces: Vec::new(), constraints: Vec::new() };
        let mut places = Places::default();
        for k in self.own.clone() {
            let entry = &self.reading.entries[k];
            let ItemKind::Coordinate { cyclic, declared, quantity } = &entry.parsed.item.kind else { continue };
            for (place, d) in declared.iter().enumerate() {
                let decl = self.reading.scope.get(&d.name.text);
                let Some(decl) = decl.filter(|d| d.entry == Some(k) && d.place == place && !d.failed) else { continue };
                let quantity_text = quantity.as_ref().and_then(|q| entry.text.get(q.span.range())).map(str::to_owned);
                let angle = is_named(quantity, "angle");
                let place = |symbol| CoordinatePlace {
                    symbol,
                    range: at(entry, d.name.span),
                    quantity: quantity_text.clone(),
                    cyclic: *cyclic,
                    angle,
                };
                for coordinate in self.coordinates(decl) {
                    places.coordinates.push(place(coordinate.symbol));
                    model.coordinates.push(coordinate);
                }
            }
        }
        for (entry, lowered, name) in self.named() {
            let kind = &entry.parsed.item.kind;
            let body = match kind {
                ItemKind::Term { body, .. } | ItemKind::Dissipation { body, .. } | ItemKind::Force { body, .. } => {
                    body.span
                }
                _ => entry.parsed.item.span,
            };
            let place = |parts: &[Part]| TermPlace {
                range: at(entry, entry.parsed.item.span),
                keyword: at(entry, entry.parsed.item.keyword),
                name: title(kind).map(|(_, n)| at(entry, n.span)),
                body: at(entry, body),
                parts: parts_at(entry, parts),
                description: entry.description.clone(),
            };
            let exprs = |parts: &[Part]| parts.iter().map(|p| p.expr).collect();
            match &lowered.meaning {
                Meaning::Term { kind, parts } => {
                    places.terms.push(place(parts));
                    model.terms.push(Term { name, kind: *kind, parts: exprs(parts) });
                }
                Meaning::Dissipation { parts } => {
                    places.forces.push(place(parts));
                    model.forces.push(Force { name, action: Action::Dissipation(exprs(parts)) });
                }
                Meaning::Force { pairs, parts } => {
                    places.forces.push(place(parts));
                    model.forces.push(Force { name, action: Action::Applied(pairs.clone()) });
                }
                Meaning::Constraint(list) => {
                    for (suffix, f) in list {
                        places.constraints.push(at(entry, entry.parsed.item.span));
                        model.constraints.push(Constraint { name: format!("{name}{suffix}"), f: *f });
                    }
                }
                _ => {}
            }
        }
        (model, places)
    }

    fn coordinates(&mut self, decl: &Decl) -> Vec<Coordinate> {
        match (&decl.index, decl.range) {
            (Some(index), Some((lower, upper))) if upper - lower >= UNROLLED => {
                let family = self.arena.symbol(&decl.name, None, Role::Coordinate);
                let index = self.arena.symbol(&index.text, None, Role::Index);
                vec![Coordinate::family(family, index, lower, upper)]
            }
            (Some(_), Some((lower, upper))) => (lower..=upper)
                .map(|k| Coordinate::single(self.arena.symbol(&decl.name, Some(k), Role::Coordinate)))
                .collect(),
            (Some(_), None) => Vec::new(),
            (None, _) => vec![Coordinate::single(self.arena.symbol(&decl.name, None, Role::Coordinate))],
        }
    }

    fn assumptions(&mut self) -> Vec<(Expr, ZeroRelation)> {
        let mut out = Vec::new();
        for (k, lowered) in self.reading.meanings.iter().enumerate() {
            let Some(lowered) = lowered.as_ref().filter(|_| !self.reading.failed[k]) else { continue };
            let Meaning::Assume(list) = &lowered.meaning else { continue };
            out.extend(list.iter().map(|(e, relation, _)| compared(self.arena, *e, *relation)));
        }
        out
    }

    fn symmetries(&self) -> Vec<SymmetryClaim> {
        let mut out = Vec::new();
        for (entry, lowered, name) in self.named() {
            let Meaning::Symmetry(images) = &lowered.meaning else { continue };
            let ItemKind::Symmetry { broken, .. } = &entry.parsed.item.kind else { continue };
            out.push(SymmetryClaim {
                name,
                expected_broken: *broken,
                images: images.iter().map(|(image, _)| image.clone()).collect(),
                image_ranges: images.iter().map(|(_, span)| at(entry, *span)).collect(),
                range: at(entry, entry.parsed.item.span),
                keyword_start: Some(at(entry, entry.parsed.item.keyword).start),
                description: entry.description.clone(),
            });
        }
        out
    }

    fn conserved(&self) -> Vec<ConservedClaim> {
        let mut out = Vec::new();
        for (entry, lowered, name) in self.named() {
            let Meaning::Conserved(list) = &lowered.meaning else { continue };
            for (suffix, expr, parts) in list {
                out.push(ConservedClaim {
                    name: format!("{name}{suffix}"),
                    expr: *expr,
                    parts: parts.iter().map(|p| (p.expr, at(entry, p.span))).collect(),
                    range: at(entry, entry.parsed.item.span),
                    description: entry.description.clone(),
                });
            }
        }
        out
    }

    fn runs(&mut self) -> Vec<Run> {
        let mut out = Vec::new();
        for (entry, lowered, name) in self.named() {
            let Meaning::Run(run) = &lowered.meaning else { continue };
            let measure = |number: &Expr, unit: &Option<UnitText>| Measure { number: *number, unit: unit.clone() };
            out.push(Run {
                name,
                from: run.from.iter().map(|(e, n, u, _)| (*e, measure(n, u))).collect(),
                over: run.over.as_ref().map(|(n, u)| measure(n, u)),
                until: run.until.map(|(e, relation)| compared(self.arena, e, relation)),
                with: run.with.clone(),
                range: at(entry, entry.parsed.item.span),
            });
        }
        out
    }

    fn system(&self) -> Option<System> {
        self.own.iter().find_map(|&k| {
            let entry = &self.reading.entries[k];
            let ItemKind::System { name, options } = &entry.parsed.item.kind else { return None };
            let unity = options.iter().flat_map(|o| match o {
                SystemOption::With(names) => names.iter().map(|n| n.text.clone()).collect(),
                SystemOption::Dimensionless(_) => Vec::new(),
            });
            Some(System {
                name: name.text.clone(),
                range: at(entry, name.span),
                description: entry.description.as_deref().map(str::to_owned),
                dimensionless: is_dimensionless(self.reading),
                unity: unity.collect(),
            })
        })
    }

    fn symbols(&self, definitions: &Definitions) -> Vec<SymbolRow> {
        let mut uses: HashMap<&str, Vec<Range<usize>>> = HashMap::new();
        let mut position = HashMap::new();
        for (row, &k) in self.own.iter().enumerate() {
            position.insert(k, row);
            let entry = &self.reading.entries[k];
            for used in &entry.parsed.uses.names {
                uses.entry(&used.name).or_default().extend(used.spans.iter().map(|s| at(entry, *s)));
            }
            if let ItemKind::System { options, .. } = &entry.parsed.item.kind {
                // The constants set to one.
                for option in options {
                    let SystemOption::With(names) = option else { continue };
                    names.iter().for_each(|n| uses.entry(&n.text).or_default().push(at(entry, n.span)));
                }
            }
        }
        let mut out = Vec::with_capacity(self.reading.scope.decls.len());
        for d in &self.reading.scope.decls {
            let entry = d.entry.map(|k| (k, &self.reading.entries[k]));
            let own = entry.filter(|(_, e)| e.file == 0);
            let description = entry.and_then(|(_, e)| {
                let of_name = leastwise_grammar::description_at(&e.text, d.span.start as usize);
                of_name.or_else(|| e.description.as_deref().map(str::to_owned))
            });
            out.push(SymbolRow {
                name: d.name.clone(),
                kind: d.kind,
                range: own.map(|(_, e)| at(e, d.span)),
                item: own.and_then(|(k, _)| position.get(&k).copied()),
                origin: entry
                    .filter(|(_, e)| e.file != 0)
                    .map(|(_, e)| (self.reading.sources[e.file].path.clone(), at(e, d.span))),
                description,
                quantity: entry.and_then(|(_, e)| quantity_text(e, d)),
                value: entry.and_then(|(k, _)| self.value(k, d)),
                index: d.index.as_ref().map(|i| i.text.as_str().into()),
                members: d.range,
                formals: d.formals.clone(),
                definition: definitions.get(&d.fingerprint).and_then(|d| d.value.clone()),
                uses: uses.remove(&*d.name).unwrap_or_default(),
            });
        }
        out
    }

    fn value(&self, k: usize, d: &Decl) -> Option<ParameterValue> {
        let Meaning::Values(values) = &self.reading.meanings[k].as_ref()?.meaning else { return None };
        let (numbers, unit) = values.get(d.place)?.clone()?;
        Some(ParameterValue { numbers, unit })
    }
}

fn quantity_text(entry: &Entry, d: &Decl) -> Option<String> {
    let quantity = match &entry.parsed.item.kind {
        ItemKind::Coordinate { quantity, .. }
        | ItemKind::Input { quantity, .. }
        | ItemKind::Function { quantity, .. } => quantity,
        ItemKind::Parameter(list) => &list.get(d.place)?.quantity,
        _ => return None,
    };
    entry.text.get(quantity.as_ref()?.span.range()).map(str::to_owned)
}

fn is_named(quantity: &Option<UnitText>, name: &str) -> bool {
    quantity.as_ref().is_some_and(|q| q.factors.len() == 1 && q.factors[0].symbol.text == name)
}

/// A comparison of a difference with zero; an equality is kept as `≤` of minus the square, which says the same.
fn compared(arena: &mut Arena, difference: Expr, relation: Relation) -> (Expr, ZeroRelation) {
    match relation {
        Relation::Less => (difference, ZeroRelation::Less),
        Relation::LessEqual => (difference, ZeroRelation::LessEqual),
        Relation::Greater => (difference, ZeroRelation::Greater),
        Relation::GreaterEqual => (difference, ZeroRelation::GreaterEqual),
        Relation::NotEqual => (difference, ZeroRelation::NotEqual),
        Relation::Equal => {
            let square = arena.pow(difference, 2);
            (square, ZeroRelation::LessEqual)
        }
    }
}

/// All findings with positions in the model's file, in its order.
fn findings(reading: &Reading) -> Vec<Finding> {
    let mut own: Vec<Finding> = Vec::new();
    let mut foreign: HashMap<usize, Vec<(usize, &LocalFinding)>> = HashMap::new();
    let slips: Vec<(usize, LocalFinding)> = reading
        .entries
        .iter()
        .enumerate()
        .flat_map(|(k, e)| e.parsed.slips.iter().map(move |s| (k, LocalFinding::from(s))))
        .collect();
    let lowered = reading
        .meanings
        .iter()
        .enumerate()
        .flat_map(|(k, m)| m.iter().flat_map(move |l| l.findings.iter().map(move |f| (k, f))));
    let local = reading.findings.iter().chain(&reading.scope.findings).chain(&slips).map(|(k, f)| (*k, f));
    for (k, f) in local.chain(lowered) {
        let entry = &reading.entries[k];
        match (entry.file, entry.via) {
            (0, _) => own.push(finding(reading, entry, f)),
            (_, Some(via)) if f.severity <= Severity::Warning && f.code != codes::UNUSED_NAME => {
                foreign.entry(via).or_default().push((k, f));
            }
            _ => {}
        }
    }
    for (via, list) in foreign {
        own.extend(included(reading, via, &list));
    }
    own.sort_by(|a, b| (a.range.start, a.range.end, a.code).cmp(&(b.range.start, b.range.end, b.code)));
    own.dedup_by(|a, b| a.code == b.code && a.range == b.range && a.message == b.message);
    shortened_list(own)
}

/// The gravest findings where there are too many to be read, with one that says so.
fn shortened_list(mut all: Vec<Finding>) -> Vec<Finding> {
    if all.len() <= MOST_FINDINGS {
        return all;
    }
    let left_out = all.len() - MOST_FINDINGS;
    all.sort_by_key(|f| f.severity);
    all.truncate(MOST_FINDINGS);
    all.sort_by(|a, b| (a.range.start, a.range.end, a.code).cmp(&(b.range.start, b.range.end, b.code)));
    let range = all.last().map_or(0..0, |f| f.range.clone());
    all.push(Finding {
        code: codes::MORE_FINDINGS,
        severity: Severity::Information,
        message: format!("there are {left_out} more findings"),
        help: None,
        range,
        related: Vec::new(),
        fixes: Vec::new(),
    });
    all
}

/// What is wrong in an included file, told at its `include`.
fn included(reading: &Reading, via: usize, list: &[(usize, &LocalFinding)]) -> Vec<Finding> {
    let entry = &reading.entries[via];
    let span = match &entry.parsed.item.kind {
        ItemKind::Include { span, .. } => *span,
        _ => entry.parsed.item.span,
    };
    let mut out = Vec::new();
    for (k, f) in list.iter().take(SHOWN) {
        let inner = &reading.entries[*k];
        let source = &reading.sources[inner.file];
        let place = at(inner, f.span).start.min(source.text.len());
        let line = source.text.as_bytes()[..place].iter().filter(|b| **b == b'\n').count() + 1;
        let message = format!("`{}`, line {line}: {}", shortened(&source.path), f.message);
        let mut told = LocalFinding::new(codes::INCLUDED_FINDING, f.severity, span, message);
        told.help = f.help.clone();
        out.push(finding(reading, entry, &told));
    }
    if list.len() > SHOWN {
        let message = format!("there are {} more findings in the included files", list.len() - SHOWN);
        out.push(finding(
            reading,
            entry,
            &LocalFinding::new(codes::INCLUDED_FINDING, Severity::Information, span, message),
        ));
    }
    out
}

fn finding(reading: &Reading, entry: &Entry, f: &LocalFinding) -> Finding {
    let mut related = Vec::new();
    for (place, message) in &f.related {
        let found = match place {
            Place::Here(span) => Some((entry, *span)),
            Place::Entry(k, span) => Some((&reading.entries[*k], *span)),
            Place::Declaring(name, span) => declaring(reading, name).map(|(e, _)| (e, *span)),
            Place::Declaration(name) => declaring(reading, name),
        };
        if let Some((e, span)) = found.filter(|(e, _)| e.file == 0) {
            related.push(Related { range: at(e, span), message: message.clone() });
        }
    }
    let fixes = f
        .fixes
        .iter()
        .filter(|_| entry.file == 0)
        .map(|fix| Fix { title: fix.title.clone(), edits: mends::edits(reading, entry, &fix.change) });
    Finding {
        code: f.code,
        severity: f.severity,
        message: f.message.clone(),
        help: f.help.clone(),
        range: at(entry, f.span),
        related,
        fixes: fixes.collect(),
    }
}

fn declaring<'a>(reading: &'a Reading, name: &str) -> Option<(&'a Entry, Span)> {
    let d = reading.scope.get(name).filter(|d| d.kind != SymbolKind::Undeclared)?;
    Some((&reading.entries[d.entry?], d.span))
}
