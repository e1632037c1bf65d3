//! Hovers of parameters, inputs, indices, definitions, functions, bound names, runs and includes.

use super::writer::{SHOWN, Writer, counted, item_name, keyword_text, labelled, quoted, title, written};
use crate::checked::{Measure, ParameterValue, SymbolRow};
use crate::features::place::{Binder, Bound};
use crate::scope::SymbolKind;
use crate::values::Value;
use leastwise_algebra::Arena;
use leastwise_grammar::tree::*;

/// Says what is known of a declared name that is no coordinate.
pub(super) fn name(w: &mut Writer<'_, '_>, row: &SymbolRow) {
    match row.kind {
        SymbolKind::Definition => definition(w, row),
        SymbolKind::Function => function(w, row),
        SymbolKind::Index => index(w, row),
        _ => constant(w, row),
    }
    if let Some((path, _)) = &row.origin {
        let file = path.rsplit(['/', '\\']).next().unwrap_or(path);
        w.prose(format!("From `{file}`."));
    }
    enters(w, row);
    w.missing();
}

/// `m[i]`, `f(x)`, `θ`.
fn spelled(row: &SymbolRow) -> String {
    let index = row.index.as_ref().map_or(String::new(), |i| format!("[{i}]"));
    let formals = if row.formals.is_empty() { String::new() } else { format!("({})", row.formals.join(", ")) };
    format!("{}{index}{formals}", row.name)
}

/// A parameter or input, in the words of its declaration.
fn constant(w: &mut Writer<'_, '_>, row: &SymbolRow) {
    let what = match row.kind {
        SymbolKind::Input => "input",
        SymbolKind::Undeclared => {
            return w.prose(format!("`{}` is not declared: it is taken for a parameter", row.name));
        }
        _ => "parameter",
    };
    let quantity = row.quantity.as_ref().map_or(String::new(), |q| format!(": {q}"));
    let value = row.value.as_ref().map_or(String::new(), |v| format!(" = {}", value(w, row, v)));
    let none = if row.value.is_none() && row.kind == SymbolKind::Parameter { ", no value given" } else { "" };
    w.titled(format!("{what} `{}{quantity}{value}`{none}", spelled(row)), row.description.as_deref());
    if row.kind == SymbolKind::Input {
        w.prose("A signal from outside: a given function of time, the same whatever the motion.");
    }
    members(w, row);
}

fn members(w: &mut Writer<'_, '_>, row: &SymbolRow) {
    if let (Some(i), Some((a, b))) = (&row.index, row.members) {
        w.prose(format!("Family of {}, {i} = {a} … {b}.", counted(b - a + 1, "member", "members")));
    }
}

/// A value in its unit: as it is written, where it stands in the model's file.
fn value(w: &mut Writer<'_, '_>, row: &SymbolRow, v: &ParameterValue) -> String {
    if let Some(item) = row.item
        && let ItemKind::Parameter(list) = &w.checked.items[item].parsed.item.kind
        && let Some(at) = list.iter().position(|d| d.declared.name.text == *row.name)
        && let Some(found) = list[at..].iter().find_map(|d| d.value.as_ref())
    {
        return written(w.checked, item, found.span);
    }
    let numbers: Vec<String> = v.numbers.iter().take(SHOWN).map(|&n| w.number(n)).collect();
    let unit = v.unit.as_ref().map_or(String::new(), |u| format!(" {}", unit_text(u)));
    match numbers.as_slice() {
        [one] => format!("{one}{unit}"),
        many => format!("({}){unit}", many.join(", ")),
    }
}

/// A unit as one writes it, from its factors.
fn unit_text(unit: &UnitText) -> String {
    let power = |n: i32, d: u32| match (n, d) {
        (1, 1) => String::new(),
        (n, 1) => format!("^{n}"),
        (n, d) => format!("^({n}/{d})"),
    };
    let of = |sign: i32| -> Vec<String> {
        let own = unit.factors.iter().filter(|f| f.exponent.0 * sign > 0);
        own.map(|f| format!("{}{}", f.symbol.text, power(f.exponent.0 * sign, f.exponent.1))).collect()
    };
    let (above, below) = (of(1).join(" "), of(-1));
    match below.as_slice() {
        [] => above,
        [one] => format!("{above}/{one}"),
        many => format!("{above}/({})", many.join(" ")),
    }
}

fn index(w: &mut Writer<'_, '_>, row: &SymbolRow) {
    let range = row
        .members
        .map_or(String::new(), |(a, b)| format!(": {a}..{b}`, {}", counted((b - a + 1).max(0), "value", "values")));
    let title = match range.is_empty() {
        true => format!("index `{}`", row.name),
        false => format!("index `{}{range}", row.name),
    };
    w.titled(title, row.description.as_deref());
    let families = w.checked.symbols.iter().filter(|s| s.index.as_deref() == Some(&*row.name));
    let names: Vec<String> = families.map(|s| s.name.to_string()).collect();
    if !names.is_empty() {
        w.prose(format!("Families over it: {}.", quoted(&names)));
    }
}

fn function(w: &mut Writer<'_, '_>, row: &SymbolRow) {
    let quantity = row.quantity.as_ref().map_or(String::new(), |q| format!(": {q}"));
    w.titled(format!("function `{}{quantity}`, unspecified and smooth", spelled(row)), row.description.as_deref());
    let index = row.index.as_ref().map_or(String::new(), |i| format!("[{i}]"));
    let (name, formals) = (format!("{}{index}", row.name), row.formals.join(", "));
    let derivatives = match row.formals.len() {
        0 | 1 => format!("`{name}'({formals})` and `{name}''({formals})`"),
        _ => {
            format!("`{name}'[1]({formals})` by the first argument, `{name}'[1,2]({formals})` by the first and second")
        }
    };
    w.prose(format!("Its derivatives are {derivatives}; `{name}({formals})'` is the time derivative."));
    members(w, row);
}

/// A definition: its value with all definitions in it expanded, and its time derivative.
fn definition(w: &mut Writer<'_, '_>, row: &SymbolRow) {
    let spelled = spelled(row);
    let source = row.item.and_then(|item| match &w.checked.items[item].parsed.item.kind {
        ItemKind::Let { body, .. } => Some(written(w.checked, item, body.span)),
        _ => None,
    });
    let Some(value) = row.definition.clone().filter(|v| !v.is_missing()) else {
        match source {
            Some(text) => w.formulas(vec![format!("{spelled} = {text}")]),
            None => w.prose(format!("Definition `{spelled}`")),
        }
        let title = match row.formals.is_empty() {
            true => "Definition, as it is written".to_owned(),
            false => format!("Function of {}, as it is written", quoted(&strings(&row.formals))),
        };
        w.titled(title, row.description.as_deref());
        return members(w, row);
    };
    let lines = components(w, &row.name, "", &value);
    w.formulas(lines);
    let shape = match value.shape() {
        Some(crate::values::Shape::Number) | None => String::new(),
        Some(shape) => format!(", {shape}"),
    };
    w.titled(format!("Definition{shape}"), row.description.as_deref());
    let rate = {
        let maker = &mut *w.maker;
        let (arena, budget) = (&mut *maker.arena, &mut *maker.budget);
        value.map(&mut |e| arena.total(e, budget))
    };
    match rate {
        Ok(rate) if rate.flat().iter().all(|&e| e == Arena::ZERO) => w.prose("It does not depend on time."),
        Ok(rate) => {
            w.prose("Time derivative:");
            let lines = components(w, &row.name, "'", &rate);
            w.formulas(lines);
        }
        Err(why) => w.stopped("Time derivative", why),
    }
}

fn strings(names: &[std::sync::Arc<str>]) -> Vec<String> {
    names.iter().map(|n| n.to_string()).collect()
}

/// `P[1] = …` for each component; a number on one line.
fn components(w: &mut Writer<'_, '_>, name: &str, prime: &str, value: &Value) -> Vec<String> {
    let mut flat: Vec<(String, leastwise_algebra::Expr)> = Vec::new();
    match value {
        Value::Scalar(e) => flat.push((format!("{name}{prime}"), *e)),
        Value::Missing => {}
        Value::Vector(v) => {
            for (i, item) in v.items.iter().enumerate() {
                match item {
                    Value::Scalar(e) => flat.push((format!("{name}{prime}[{}]", i + 1), *e)),
                    Value::Missing => {}
                    Value::Vector(row) => {
                        let inner = row.items.iter().enumerate();
                        let inner = inner.filter_map(|(j, x)| Some((j, x.scalar()?)));
                        flat.extend(inner.map(|(j, e)| (format!("{name}{prime}[{}, {}]", i + 1, j + 1), e)));
                    }
                }
            }
        }
    }
    let mut lines = Vec::new();
    for (label, e) in flat.iter().take(SHOWN) {
        let text = w.text(*e);
        lines.extend(labelled(&format!("{label} = "), &text, ""));
    }
    if flat.len() > SHOWN {
        lines.push(format!("and {} more components", flat.len() - SHOWN));
    }
    lines
}

/// Where a name enters, directly or through definitions.
pub(super) fn enters(w: &mut Writer<'_, '_>, row: &SymbolRow) {
    let checked = w.checked;
    let uses = |name: &str| -> Vec<usize> {
        let own = checked.symbol(name).and_then(|s| s.item);
        let names = |k: usize| checked.items[k].parsed.uses.names.iter().any(|u| u.name == name);
        (0..checked.items.len()).filter(|&k| Some(k) != own && names(k)).collect()
    };
    let (assumed, direct): (Vec<usize>, Vec<usize>) =
        uses(&row.name).into_iter().partition(|&k| matches!(checked.items[k].parsed.item.kind, ItemKind::Assume(_)));
    assumptions(w, &row.name, &assumed);
    let mut reached = direct.clone();
    // The definitions that need it lead further.
    let mut through: Vec<(String, Vec<usize>)> = Vec::new();
    let mut at = 0;
    while let Some(&k) = reached.get(at) {
        at += 1;
        let Some(name) = defined(w, k) else { continue };
        let fresh = uses(&name).into_iter().filter(|u| !reached.contains(u) && !is_assumption(w, *u));
        let fresh: Vec<usize> = fresh.collect();
        reached.extend(&fresh);
        if !fresh.is_empty() {
            through.push((name, fresh));
        }
    }
    if direct.is_empty() {
        return w.prose("It enters nowhere.");
    }
    w.prose(format!("Enters {}.", listed(w, &direct)));
    let further: Vec<String> =
        through.iter().take(SHOWN).map(|(name, items)| format!("through `{name}` {}", listed(w, items))).collect();
    if !further.is_empty() {
        w.prose(format!("And {}.", further.join("; ")));
    }
}

fn is_assumption(w: &Writer<'_, '_>, item: usize) -> bool {
    matches!(w.checked.items[item].parsed.item.kind, ItemKind::Assume(_))
}

/// What is assumed of a name, as it is written.
pub(super) fn assumptions(w: &mut Writer<'_, '_>, name: &str, items: &[usize]) {
    let mut found = Vec::new();
    for &k in items {
        let ItemKind::Assume(list) = &w.checked.items[k].parsed.item.kind else { continue };
        for c in list {
            let formulas = || std::iter::once(&c.first).chain(c.rest.iter().map(|r| &r.1));
            if formulas().any(|f| crate::uses::mentions(f, name)) {
                let span = formulas().fold(c.first.span, |whole, f| whole.to(f.span));
                found.push(written(w.checked, k, span));
            }
        }
    }
    if !found.is_empty() {
        w.prose(format!("Assumed: {}.", quoted(&found)));
    }
}

/// The name that a `let` defines.
fn defined(w: &Writer<'_, '_>, item: usize) -> Option<String> {
    match &w.checked.items[item].parsed.item.kind {
        ItemKind::Let { declared, .. } => Some(declared.name.text.clone()),
        _ => None,
    }
}

/// Items in a few words: kinetic `package`, potential `weight`.
fn listed(w: &Writer<'_, '_>, items: &[usize]) -> String {
    let entry = |&k: &usize| {
        let row = &w.checked.items[k];
        match item_name(w.checked, k) {
            Some(name) => format!("{} `{name}`", keyword_text(w.checked, row)),
            None => title(w.checked, k),
        }
    };
    let mut shown: Vec<String> = items.iter().map(entry).collect();
    shown.dedup();
    let more = shown.len().saturating_sub(SHOWN);
    shown.truncate(SHOWN);
    if more > 0 {
        shown.push(format!("{more} more"));
    }
    match shown.as_slice() {
        [rest @ .., last] if !rest.is_empty() => format!("{} and {last}", rest.join(", ")),
        all => all.join(""),
    }
}

/// Says what binds a name inside its item.
pub(super) fn bound(w: &mut Writer<'_, '_>, bound: &Bound, item: usize) {
    let what = title(w.checked, item);
    let name = &bound.name;
    match bound.kind {
        Binder::Formal => {
            w.prose(format!("`{name}` is an argument of {what}"));
            w.prose("It stands for whatever is put in, and inherits nothing from a name declared elsewhere.");
        }
        Binder::Transformation => {
            w.prose(format!("`{name}` is the parameter of the transformations {what}"));
            w.prose("At ε = 0 they are the identity; their derivative by ε there is the generator.");
        }
        Binder::Sum => {
            let range = bound.declared.as_ref().and_then(|at| range_of(w, item, at.start));
            let range = range.map_or(String::new(), |r| format!(", from `{}` to `{}`", r.0, r.1));
            w.prose(format!("`{name}` is the index of this sum{range}"));
        }
        Binder::Member => {
            let members = w.checked.symbol(name).and_then(|s| s.members);
            let range = members.map_or(String::new(), |(a, b)| format!(", {a}..{b}"));
            let head = match &w.checked.items[item].parsed.item.kind {
                ItemKind::Let { declared, .. } => declared.index.as_ref(),
                ItemKind::Constraint { declared, .. } => declared.as_ref().and_then(|d| d.index.as_ref()),
                _ => None,
            };
            let start = w.checked.items[item].range.start;
            let of_head = |at: usize| head.is_some_and(|i| start + i.span.start as usize == at);
            w.prose(match bound.declared.as_ref().is_some_and(|d| of_head(d.start)) {
                true => format!("`{name}` is the index of the family {what}{range}"),
                false => format!("`{name}` is the index of this sum{range}"),
            });
            let description = w.checked.symbol(name).and_then(|s| s.description.clone());
            w.description(description.as_deref());
        }
    }
}

/// The range of the sum whose index stands at an offset.
fn range_of(w: &Writer<'_, '_>, item: usize, offset: usize) -> Option<(String, String)> {
    let row = &w.checked.items[item];
    let local = offset.checked_sub(row.range.start)?;
    let path = crate::features::place::formulas_at(&row.parsed.item.kind, local);
    path.into_iter().find_map(|f| match &f.kind {
        FormulaKind::Sum { index, range: Some((lower, upper)), .. } if index.span.range().start == local => {
            Some((written(w.checked, item, lower.span), written(w.checked, item, upper.span)))
        }
        _ => None,
    })
}

/// Says what a run starts from.
pub(super) fn run(w: &mut Writer<'_, '_>, k: usize) {
    let run = &w.checked.runs[k];
    let over = run.over.as_ref().map(|m| measure(w, m));
    let over = over.map_or(String::new(), |m| format!(" over {m}"));
    let item = w.checked.items.iter().find(|i| i.range.start == run.range.start);
    w.titled(format!("Initial-value run `{}`{over}", run.name), item.and_then(|i| i.description.as_deref()));
    let mut lines = Vec::new();
    for (what, value) in run.from.iter().take(SHOWN) {
        let (what, value) = (w.text(*what), measure(w, value));
        lines.push(format!("{what} = {value}"));
    }
    if run.from.len() > SHOWN {
        lines.push(format!("and {} more", run.from.len() - SHOWN));
    }
    if lines.is_empty() {
        w.prose("It starts from rest at the origin of the coordinates.");
    } else {
        w.prose("It starts from these values; the other coordinates and velocities start at 0:");
        w.formulas(lines);
    }
    let mut lines = Vec::new();
    for (what, formula) in run.with.iter().take(SHOWN) {
        let (what, text) = (w.text(*what), w.text(*formula));
        lines.extend(labelled(&format!("{what} = "), &text, ""));
    }
    if !lines.is_empty() {
        w.prose("With:");
        w.formulas(lines);
    }
    if let Some((difference, relation)) = run.until {
        let text = w.text(difference);
        let sign = match relation {
            leastwise_algebra::Relation::Less => "<",
            leastwise_algebra::Relation::LessEqual => "≤",
            leastwise_algebra::Relation::Greater => ">",
            leastwise_algebra::Relation::GreaterEqual => "≥",
            leastwise_algebra::Relation::NotEqual => "≠",
        };
        w.prose("Until:");
        w.formulas(labelled("", &text, &format!(" {sign} 0")));
    }
    w.missing();
}

fn measure(w: &mut Writer<'_, '_>, m: &Measure) -> String {
    let number = w.number(m.number);
    match &m.unit {
        Some(u) if u.factors.first().is_some_and(|f| matches!(f.symbol.text.as_str(), "°" | "′" | "″")) => {
            format!("{number}{}", unit_text(u))
        }
        Some(u) => format!("{number} {}", unit_text(u)),
        None => number,
    }
}

/// Says what an included file brings.
pub(super) fn include(w: &mut Writer<'_, '_>, item: usize) {
    let checked = w.checked;
    let start = checked.items[item].range.start;
    let ItemKind::Include { file, .. } = &checked.items[item].parsed.item.kind else { return };
    let path = checked.included.iter().find(|(at, _)| *at == start).map(|(_, path)| path.clone());
    let Some(path) = path else {
        return w.prose("The file is not taken in: see the error at its name");
    };
    let brought: Vec<&SymbolRow> =
        checked.symbols.iter().filter(|s| s.origin.as_ref().is_some_and(|o| o.0 == path)).collect();
    w.prose(format!("Takes in `{file}`: {}", counted(brought.len() as i64, "name", "names")));
    let mut lines = Vec::new();
    for row in brought.iter().take(SHOWN) {
        let quantity = row.quantity.as_ref().map_or(String::new(), |q| format!(": {q}"));
        let value = row.value.as_ref().map_or(String::new(), |v| format!(" = {}", value(w, row, v)));
        let kind = row.kind.described().split_once(' ').map_or("", |k| k.1);
        lines.push(format!("{kind} {}{quantity}{value}", spelled(row)));
    }
    if brought.len() > SHOWN {
        lines.push(format!("and {} more", brought.len() - SHOWN));
    }
    w.formulas(lines);
    w.prose("Its assumptions hold here too.");
}
