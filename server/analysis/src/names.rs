//! Checks of names across items: undeclared, unused, twice, look-alike; the place of `system`; quantities.

use crate::codes;
use crate::database::Reading;
use crate::finding::{Change, LocalFinding, Place};
use crate::include::is_taken_in;
use crate::quantities;
use crate::scope::{Entry, Scope, SymbolKind};
use leastwise_grammar::nearest;
use leastwise_grammar::tree::*;
use std::collections::{HashMap, HashSet};
use std::sync::Arc;

/// At most so many further uses are shown.
const SHOWN_USES: usize = 8;

/// Checks names before anything is lowered, and takes undeclared ones for parameters.
pub(crate) fn check(reading: &mut Reading) {
    undeclared(reading);
    look_alikes(reading);
    systems(reading);
    titles(reading);
    for at in 0..reading.entries.len() {
        let entry = &reading.entries[at];
        if entry.file != 0 && !is_taken_in(&entry.parsed.item.kind) {
            let finding = LocalFinding::new(
                codes::INCLUDED_ITEM,
                Severity::Warning,
                entry.parsed.item.keyword,
                format!("`{}` is not taken in", keyword_of(entry)),
            )
            .help("parameters, definitions, functions, indices and assumptions are");
            reading.findings.push((at, finding));
            continue;
        }
        if let ItemKind::Symmetry { .. } = entry.parsed.item.kind
            && let Some(d) = reading.scope.get("ε")
        {
            let finding = LocalFinding::new(
                codes::SHADOWED_EPSILON,
                Severity::Warning,
                entry.parsed.item.keyword,
                "in a transformation ε is its parameter, not the declared one",
            )
            .help("give the declared one another name")
            .related(Place::Declaration(d.name.clone()), "`ε` is declared here");
            reading.findings.push((at, finding));
        }
        family_indices(&reading.scope, at, entry, &mut reading.findings);
        quantities_of(at, entry, &mut reading.findings);
    }
}

/// The keyword as written, for messages.
pub(crate) fn keyword_of(entry: &Entry) -> &str {
    let keyword = entry.parsed.item.keyword.range();
    entry.text.get(keyword).unwrap_or("item")
}

/// Names that nobody declares: one finding each, and a constant in their place.
fn undeclared(reading: &mut Reading) {
    struct Seen {
        entry: usize,
        span: Span,
        index: bool,
        primed: bool,
        further: Vec<(usize, Span)>,
        sound: bool,
    }
    let mut order: Vec<String> = Vec::new();
    let mut seen: HashMap<String, Seen> = HashMap::new();
    for (at, entry) in reading.entries.iter().enumerate() {
        if entry.file != 0 && !is_taken_in(&entry.parsed.item.kind) {
            continue;
        }
        let sound = !reading.failed[at];
        for used in &entry.parsed.uses.names {
            if reading.scope.get(&used.name).is_some() || used.name.is_empty() {
                continue;
            }
            let first = used.spans[0];
            let new = || Seen { entry: at, span: first, index: false, primed: false, further: Vec::new(), sound };
            let known = seen.contains_key(&used.name);
            let one = seen.entry(used.name.clone()).or_insert_with(new);
            if !known {
                order.push(used.name.clone());
            } else if sound && !one.sound {
                // A name in an item that could not be read may be anything: the first sound place counts.
                (one.entry, one.span, one.sound) = (at, first, true);
            }
            one.index |= used.index;
            one.primed |= used.primed;
            let rest = used.spans.iter().filter(|s| (at, **s) != (one.entry, one.span));
            one.further.extend(rest.take(SHOWN_USES).map(|s| (at, *s)));
        }
    }
    let guessed = words_of_faulty(reading);
    for name in order {
        let one = &seen[&name];
        if one.index {
            let near = near_name(&reading.scope, &name, Some(SymbolKind::Index));
            let mut finding = LocalFinding::error(
                codes::UNDECLARED_INDEX,
                one.span,
                format!("the index `{name}` is not declared{}", meant(near.as_deref())),
            )
            .help(format!("declare its range: index {name}: 1..8"));
            if let Some(near) = near {
                finding = finding.fix(format!("write {near}"), one.span, near.to_string());
            }
            finding = finding.declare(format!("index {name}: 1..3"));
            reading.findings.push((one.entry, finding));
            continue;
        }
        reading.scope.declare_implicit(&name);
        // It may be declared where the text could not be read; that is told already.
        if !one.sound || guessed.contains(&name) {
            continue;
        }
        let entry = &reading.entries[one.entry];
        let near = near_name(&reading.scope, &name, None);
        let unit = behind_number(&entry.text, one.span) && quantities::unit(&name).is_some();
        let mut finding = LocalFinding::error(
            codes::UNDECLARED_NAME,
            one.span,
            format!("`{name}` is not declared{}", meant(near.as_deref())),
        );
        let called = called_at(&entry.text, one.span);
        finding = finding.help(if unit {
            format!(
                "units do not stand in formulas: declare a parameter with this value, such as parameter a = 1 {name}"
            )
        } else if let Some(argument) = &called {
            format!("declare it: function {name}({argument}), or parameter {name} for a product")
        } else if one.primed {
            format!("declare it: coordinate {name}, or let {name} = …")
        } else {
            format!(
                "declare it: parameter {name}, coordinate {name}, or let {name} = …; it is taken for a parameter here"
            )
        });
        if let Some(near) = near {
            finding = finding.fix(format!("write {near}"), one.span, near.to_string());
        }
        let value = match &entry.parsed.item.kind {
            // `let g = 9.81 m/s^2`.
            ItemKind::Let { declared, formals, body } => {
                unit && declared.index.is_none() && formals.is_empty() && crate::lower::declarations::measure_like(body)
            }
            _ => false,
        };
        if value {
            finding = finding.fix("make it a parameter with this value", entry.parsed.item.keyword, "parameter");
        }
        finding = match called {
            Some(argument) => {
                finding.declare(format!("function {name}({argument})")).declare(format!("parameter {name}"))
            }
            None if one.primed => finding.declare(format!("coordinate {name}")).declare(format!("input {name}")),
            None => finding.declare(format!("parameter {name}")),
        };
        for (at, span) in one.further.iter().filter(|(at, s)| (*at, *s) != (one.entry, one.span)).take(SHOWN_USES) {
            let place = if *at == one.entry { Place::Here(*span) } else { Place::Entry(*at, *span) };
            finding = finding.related(place, format!("`{name}` is used here too"));
        }
        reading.findings.push((one.entry, finding));
    }
}

fn meant(near: Option<&str>) -> String {
    near.map_or_else(String::new, |n| format!("; did you mean `{n}`?"))
}

/// The declared name that was probably meant.
fn near_name(scope: &Scope, name: &str, kind: Option<SymbolKind>) -> Option<Arc<str>> {
    let fits = |k: SymbolKind| kind.map_or(k != SymbolKind::Undeclared && k != SymbolKind::Index, |wanted| k == wanted);
    let declared = || scope.decls.iter().filter(|d| fits(d.kind));
    // Look-alikes first: `m1` for `m₁`, `theta` for `θ`.
    let key = likeness(name);
    if let Some(d) = declared().find(|d| likeness(&d.name) == key) {
        return Some(d.name.clone());
    }
    if let Some(d) = declared().find(|d| d.name.chars().count() > 1 && d.name.to_lowercase() == name.to_lowercase()) {
        return Some(d.name.clone());
    }
    // One letter of another is no slip of the pen.
    if name.chars().count() < 3 || scope.decls.len() > 2000 {
        return None;
    }
    let near = nearest(name, declared().map(|d| &*d.name).filter(|n| n.chars().count() > 2))?;
    Some(near.into())
}

/// Whether a number stands right before this place that is no denominator: behind `1/2` stands a factor, not a unit.
fn behind_number(text: &str, span: Span) -> bool {
    let Some(before) = text.get(..span.start as usize) else { return false };
    let rest = before.trim_end().trim_end_matches(|c: char| c.is_ascii_digit() || c == '.');
    rest.len() < before.trim_end().len() && !rest.trim_end().ends_with('/')
}

/// The name in parentheses right behind this place: `U(r)`.
fn called_at(text: &str, span: Span) -> Option<String> {
    let rest = text.get(span.end as usize..)?.strip_prefix('(')?;
    let inner = rest[..rest.find(')')?].trim();
    let name = !inner.is_empty() && inner.chars().all(|c| c.is_alphanumeric() || c == '_' || ('₀'..='₉').contains(&c));
    (name && inner.starts_with(char::is_alphabetic)).then(|| leastwise_grammar::fold_name(inner))
}

/// The letters' English names beside the letters themselves.
const GREEK: [(&str, char); 24] = [
    ("alpha", 'α'),
    ("beta", 'β'),
    ("gamma", 'γ'),
    ("delta", 'δ'),
    ("epsilon", 'ε'),
    ("zeta", 'ζ'),
    ("eta", 'η'),
    ("theta", 'θ'),
    ("iota", 'ι'),
    ("kappa", 'κ'),
    ("lambda", 'λ'),
    ("mu", 'μ'),
    ("nu", 'ν'),
    ("xi", 'ξ'),
    ("omicron", 'ο'),
    ("pi", 'π'),
    ("rho", 'ρ'),
    ("sigma", 'σ'),
    ("tau", 'τ'),
    ("upsilon", 'υ'),
    ("phi", 'φ'),
    ("chi", 'χ'),
    ("psi", 'ψ'),
    ("omega", 'ω'),
];

/// Names that read alike have the same likeness: Greek letters written out, raised and lowered digits.
pub(crate) fn likeness(name: &str) -> String {
    let mut out = String::with_capacity(name.len());
    let end = name.find(|c: char| !c.is_alphabetic()).unwrap_or(name.len());
    let (word, rest) = name.split_at(end);
    let greek = GREEK.iter().find(|(w, _)| *w == word.to_lowercase());
    match greek {
        Some((_, letter)) if word.starts_with(char::is_uppercase) => out.extend(letter.to_uppercase()),
        Some((_, letter)) => out.push(*letter),
        None => out.push_str(word),
    }
    let mut underscore = false;
    for c in rest.chars() {
        if c == '_' {
            underscore = true;
            continue;
        }
        let plain = match c {
            '₀'..='₉' => char::from_digit(c as u32 - '₀' as u32, 10).unwrap_or(c),
            c => c,
        };
        // An underscore before a digit is how a subscript is typed; elsewhere it tells names apart.
        if std::mem::take(&mut underscore) && !plain.is_ascii_digit() {
            out.push('_');
        }
        out.push(plain);
    }
    out
}

fn look_alikes(reading: &mut Reading) {
    let mut first: HashMap<String, usize> = HashMap::new();
    for (k, d) in reading.scope.decls.iter().enumerate() {
        let Some(entry) = d.entry else { continue };
        match first.entry(likeness(&d.name)) {
            std::collections::hash_map::Entry::Vacant(slot) => {
                slot.insert(k);
            }
            std::collections::hash_map::Entry::Occupied(slot) => {
                let other = &reading.scope.decls[*slot.get()];
                let finding = LocalFinding::new(
                    codes::LOOK_ALIKE_NAMES,
                    Severity::Warning,
                    d.span,
                    format!("`{}` and `{}` are two names", d.name, other.name),
                )
                .help("readers will take them for one: rename one of them")
                .related(Place::Declaration(other.name.clone()), format!("`{}` is declared here", other.name));
                reading.findings.push((entry, finding));
            }
        }
    }
}

/// `system` stands once and first.
fn systems(reading: &mut Reading) {
    let mut first: Option<(usize, Span)> = None;
    let mut before: Option<(usize, Span)> = None;
    for (at, entry) in reading.entries.iter().enumerate().filter(|(_, e)| e.file == 0) {
        let keyword = entry.parsed.item.keyword;
        if !matches!(entry.parsed.item.kind, ItemKind::System { .. }) {
            if before.is_none() && first.is_none() && !matches!(entry.parsed.item.kind, ItemKind::Broken) {
                before = Some((at, keyword));
            }
            continue;
        }
        let finding = match (first, before) {
            (Some((e, s)), _) => LocalFinding::error(codes::SYSTEM_PLACE, keyword, "a model has one `system`")
                .help("take one of them out")
                .related(Place::Entry(e, s), "the first is here")
                .change("remove this one", Change::Remove(0)),
            (None, Some((e, s))) => {
                LocalFinding::error(codes::SYSTEM_PLACE, keyword, "`system` stands before all other items")
                    .help("move it to the top of the file")
                    .related(Place::Entry(e, s), "this stands before it")
                    .change("move it to the top", Change::MoveFirst)
            }
            (None, None) => {
                first = Some((at, keyword));
                continue;
            }
        };
        first.get_or_insert((at, keyword));
        reading.findings.push((at, finding));
    }
}

/// The name of an item, for the kinds whose names may not repeat, with their kind.
pub(crate) fn title(kind: &ItemKind) -> Option<(u8, &Name)> {
    match kind {
        ItemKind::Term { name: Some(n), .. }
        | ItemKind::Dissipation { name: Some(n), .. }
        | ItemKind::Force { name: Some(n), .. } => Some((0, n)),
        ItemKind::Symmetry { name: Some(n), .. } => Some((1, n)),
        ItemKind::Conserved { name: Some(n), .. } => Some((2, n)),
        ItemKind::Constraint { declared: Some(d), .. } => Some((3, &d.name)),
        ItemKind::Run { name: Some(n), .. } => Some((4, n)),
        _ => None,
    }
}

fn titles(reading: &mut Reading) {
    let mut first: HashMap<(u8, &str), (usize, Span)> = HashMap::new();
    let mut found = Vec::new();
    let own = || reading.entries.iter().enumerate().filter(|(_, e)| e.file == 0);
    let taken: HashSet<(u8, &str)> = own()
        .filter_map(|(_, e)| title(&e.parsed.item.kind))
        .map(|(class, name)| (class, name.text.as_str()))
        .collect();
    for (at, entry) in own() {
        let Some((class, name)) = title(&entry.parsed.item.kind) else { continue };
        let what = ["term or force", "symmetry", "claim", "constraint", "run"][class as usize];
        match first.entry((class, &name.text)) {
            std::collections::hash_map::Entry::Vacant(slot) => {
                slot.insert((at, name.span));
            }
            std::collections::hash_map::Entry::Occupied(slot) => {
                let (e, s) = *slot.get();
                let message = format!("another {what} is named `{}` already", name.text);
                let mut finding = LocalFinding::error(codes::NAMED_TWICE, name.span, message)
                    .help("results are told apart by these names: choose another")
                    .related(Place::Entry(e, s), "the first is here");
                let numbered = |n: &usize| format!("{}_{n}", name.text);
                if let Some(n) = (2..100).find(|n| !taken.contains(&(class, numbered(n).as_str()))) {
                    finding = finding.fix(format!("call it {}", numbered(&n)), name.span, numbered(&n));
                }
                found.push((at, finding));
            }
        }
    }
    reading.findings.extend(found);
}

/// The index of a declared family is an index.
fn family_indices(scope: &Scope, at: usize, entry: &Entry, out: &mut Vec<(usize, LocalFinding)>) {
    let mut check = |declared: &Declared| {
        let Some(index) = &declared.index else { return };
        let Some(d) = scope.get(&index.text).filter(|d| d.kind != SymbolKind::Index) else { return };
        if d.kind == SymbolKind::Undeclared {
            return;
        }
        let message = format!("`{}` is {}, not an index", d.name, d.kind.described());
        let finding = LocalFinding::error(codes::UNDECLARED_INDEX, index.span, message)
            .help(format!("declare an index: index i: 1..8, and write {}[i]", declared.name.text))
            .related(Place::Declaration(d.name.clone()), format!("`{}` is declared here", d.name));
        out.push((at, finding));
    };
    match &entry.parsed.item.kind {
        ItemKind::Coordinate { declared, .. } | ItemKind::Input { declared, .. } => declared.iter().for_each(check),
        ItemKind::Parameter(list) => list.iter().for_each(|d| check(&d.declared)),
        ItemKind::Let { declared, .. } | ItemKind::Function { declared, .. } => check(declared),
        ItemKind::Constraint { declared: Some(declared), .. } => check(declared),
        _ => {}
    }
}

/// Quantity and unit names are known ones.
fn quantities_of(at: usize, entry: &Entry, out: &mut Vec<(usize, LocalFinding)>) {
    let mut check = |unit: Option<&UnitText>, declared: bool| {
        if let Some(unit) = unit
            && let Some(finding) = unknown_unit(unit, declared)
        {
            out.push((at, finding));
        }
    };
    match &entry.parsed.item.kind {
        ItemKind::Coordinate { quantity, .. }
        | ItemKind::Input { quantity, .. }
        | ItemKind::Function { quantity, .. } => {
            check(quantity.as_ref(), true);
        }
        ItemKind::Parameter(list) => {
            for (k, d) in list.iter().enumerate() {
                // `m₁, m₂: mass` is one place.
                if k == 0 || d.quantity != list[k - 1].quantity {
                    check(d.quantity.as_ref(), true);
                }
                let value = |d: &Declaration| d.value.as_ref().and_then(|v| v.unit.clone());
                if k == 0 || value(d) != value(&list[k - 1]) {
                    check(value(d).as_ref(), false);
                }
            }
        }
        ItemKind::Run { from, over, .. } => {
            from.iter().for_each(|(_, v)| check(v.unit.as_ref(), false));
            check(over.as_ref().and_then(|v| v.unit.as_ref()), false);
        }
        _ => {}
    }
}

/// The finding about the first factor that is not known.
fn unknown_unit(unit: &UnitText, declared: bool) -> Option<LocalFinding> {
    let alone = unit.factors.len() == 1 && unit.factors[0].exponent == (1, 1);
    if declared && alone && quantities::quantity(&unit.factors[0].symbol.text).is_some() {
        return None;
    }
    let wrong =
        unit.factors.iter().find(|f| quantities::unit(&f.symbol.text).is_none() && !f.symbol.text.is_empty())?;
    let (name, span) = (&wrong.symbol.text, wrong.symbol.span);
    let long = name.chars().count() > 3;
    let near = if declared && alone {
        let quantity = quantities::near_quantity(name);
        if long { quantity } else { quantities::near_unit(name).or(quantity) }
    } else {
        quantities::near_unit(name)
    };
    let (code, what) =
        if declared && alone { (codes::UNKNOWN_QUANTITY, "quantity or unit") } else { (codes::UNKNOWN_UNIT, "unit") };
    let mut finding = LocalFinding::error(code, span, format!("`{name}` is no known {what}{}", meant(near)));
    if quantities::quantity(name).is_some() {
        finding.message = format!("`{name}` is a quantity; here stands a unit");
    }
    if let Some(near) = near {
        finding = finding.fix(format!("write {near}"), span, near);
    } else {
        finding = finding.help(if declared {
            "write a quantity such as length, or a unit such as N/m"
        } else {
            "write a unit of the SI, such as kg m^2"
        });
    }
    Some(finding)
}

/// Whether quantities are switched off.
pub(crate) fn is_dimensionless(reading: &Reading) -> bool {
    reading.entries.iter().any(|e| match &e.parsed.item.kind {
        ItemKind::System { options, .. } => {
            e.file == 0 && options.iter().any(|o| matches!(o, SystemOption::Dimensionless(_)))
        }
        _ => false,
    })
}

/// The words of items that could not be read: they may be uses or declarations of names.
fn words_of_faulty(reading: &Reading) -> HashSet<String> {
    let mut out = HashSet::new();
    for entry in reading.entries.iter().filter(|e| e.parsed.is_faulty()) {
        let word = |c: char| {
            c.is_alphanumeric() || c == '_' || ('₀'..='₉').contains(&c) || !c.is_ascii() && !c.is_whitespace()
        };
        out.extend(entry.text.split(|c| !word(c)).filter(|w| !w.is_empty()).map(leastwise_grammar::fold_name));
    }
    out
}

/// Whether units are not looked at: quantities are switched off, or taken modulo constants set to one.
pub(crate) fn has_own_units(reading: &Reading) -> bool {
    reading.entries.iter().any(|e| match &e.parsed.item.kind {
        ItemKind::System { options, .. } => e.file == 0 && !options.is_empty(),
        _ => false,
    })
}

/// Names that nothing uses. A file without terms, claims or runs is there to be included: others use its names.
pub(crate) fn unused(reading: &mut Reading) {
    let model = |e: &Entry| e.file == 0 && !is_taken_in(&e.parsed.item.kind);
    if !reading.entries.iter().any(model) {
        return;
    }
    let mut used: HashSet<&str> = HashSet::new();
    let guessed = words_of_faulty(reading);
    used.extend(guessed.iter().map(String::as_str));
    for entry in &reading.entries {
        used.extend(entry.parsed.uses.names.iter().map(|u| u.name.as_str()));
        if let ItemKind::System { options, .. } = &entry.parsed.item.kind {
            for option in options {
                if let SystemOption::With(names) = option {
                    used.extend(names.iter().map(|n| n.text.as_str()));
                }
            }
        }
    }
    let mut found = Vec::new();
    for d in &reading.scope.decls {
        let Some(at) = d.entry else { continue };
        let entry = &reading.entries[at];
        // A coordinate that nothing uses makes the mass matrix singular, and that is said there.
        if entry.file != 0 || used.contains(&*d.name) || d.kind == SymbolKind::Coordinate {
            continue;
        }
        let message =
            format!("{} `{}` is not used", d.kind.described().split_once(' ').map_or("name", |p| p.1), d.name);
        let mut finding = LocalFinding::new(codes::UNUSED_NAME, Severity::Warning, d.span, message);
        finding.message = format!("the {}", finding.message);
        found.push((at, finding.change(format!("remove `{}`", d.name), Change::Remove(d.place))));
    }
    reading.findings.extend(found);
}
