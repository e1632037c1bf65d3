//! The names of a model, ranked by what its place in a formula wants.

use super::context::{Place, Wanted};
use super::{Completion, CompletionKind, plain};
use crate::checked::SymbolRow;
use crate::features::outline::one_line;
use crate::scope::SymbolKind;
use crate::uses::uses;
use leastwise_grammar::tree::*;
use leastwise_grammar::{CallableNames, RawItem, callable_names, parse_item, read_name};
use std::collections::HashSet;

/// A name and what is written of it.
struct Known {
    name: String,
    kind: SymbolKind,
    detail: String,
    description: Option<String>,
    is_function: bool,
    family: bool,
}

/// The declared names, in the order of the file, included ones last.
fn known(items: &[RawItem], included: &[SymbolRow]) -> Vec<Known> {
    let callable = callable_names(items.iter());
    let mut out = Vec::new();
    for item in items {
        if declares(&item.text) {
            declared(item, &callable, &mut out);
        }
    }
    for s in included {
        let value = s.quantity.clone().unwrap_or_default();
        let signature = if s.formals.is_empty() { value } else { format!("({})", s.formals.join(", ")) };
        out.push(Known {
            name: s.name.to_string(),
            kind: s.kind,
            detail: signature,
            description: s.description.clone(),
            is_function: s.kind == SymbolKind::Function || !s.formals.is_empty(),
            family: s.index.is_some(),
        });
    }
    let mut seen = HashSet::new();
    out.retain(|k| seen.insert(k.name.clone()));
    out
}

fn declares(text: &str) -> bool {
    ["coordinate", "cyclic", "parameter", "input", "index", "let", "function"].iter().any(|k| text.starts_with(k))
}

fn declared(item: &RawItem, callable: &CallableNames, out: &mut Vec<Known>) {
    let callable = callable.occurring_in(&item.text);
    let tree = parse_item(&item.text, &callable).item;
    let text = |span: Span| item.text.get(span.range()).unwrap_or_default();
    let mut add = |d: &Declared, kind, detail: String, is_function| {
        if d.name.text.is_empty() {
            return;
        }
        let own = leastwise_grammar::description_at(&item.text, d.name.span.start as usize);
        out.push(Known {
            name: d.name.text.clone(),
            kind,
            detail: one_line(detail.trim()),
            description: own.or_else(|| item.description.clone()),
            is_function,
            family: d.index.is_some(),
        });
    };
    let quantity = |q: &Option<UnitText>| q.as_ref().map_or("", |q| text(q.span)).to_string();
    let formals = |list: &[Name]| list.iter().map(|n| n.text.as_str()).collect::<Vec<_>>().join(", ");
    match &tree.kind {
        ItemKind::Coordinate { declared, quantity: q, .. } => {
            declared.iter().for_each(|d| add(d, SymbolKind::Coordinate, quantity(q), false));
        }
        ItemKind::Input { declared, quantity: q } => {
            declared.iter().for_each(|d| add(d, SymbolKind::Input, quantity(q), false));
        }
        ItemKind::Parameter(list) => {
            for d in list {
                let value = d.value.as_ref().map_or(String::new(), |v| format!(" = {}", text(v.span)));
                add(&d.declared, SymbolKind::Parameter, format!("{}{value}", quantity(&d.quantity)), false);
            }
        }
        ItemKind::Index { names, lower, upper } => {
            for name in names {
                let d = Declared { name: name.clone(), index: None };
                add(&d, SymbolKind::Index, format!("{}..{}", text(lower.span), text(upper.span)), false);
            }
        }
        ItemKind::Let { declared, formals: list, body } => {
            let is_function = !list.is_empty();
            let head = if is_function { format!("({}) = ", formals(list)) } else { "= ".into() };
            add(declared, SymbolKind::Definition, format!("{head}{}", text(body.span)), is_function);
        }
        ItemKind::Function { declared, formals: list, quantity: q } => {
            add(declared, SymbolKind::Function, format!("({}) {}", formals(list), quantity(q)), true);
        }
        _ => {}
    }
}

fn kind_of(k: &Known) -> CompletionKind {
    match k.kind {
        _ if k.is_function => CompletionKind::Function,
        SymbolKind::Coordinate => CompletionKind::Coordinate,
        SymbolKind::Parameter | SymbolKind::Undeclared => CompletionKind::Parameter,
        SymbolKind::Input => CompletionKind::Input,
        SymbolKind::Index => CompletionKind::Index,
        SymbolKind::Definition => CompletionKind::Definition,
        SymbolKind::Function => CompletionKind::Function,
    }
}

/// The names that can stand in a formula, best first.
pub(super) fn in_formula(items: &[RawItem], included: &[SymbolRow], place: &Place) -> Vec<Completion> {
    let all = known(items, included);
    let mut list: Vec<Completion> = Vec::new();
    for name in &place.bound {
        let (kind, detail) = match (name.as_str(), place.wanted) {
            ("ε", Wanted::Moved | Wanted::Index) => continue,
            ("ε", _) => (CompletionKind::Constant, "the parameter of the transformation"),
            _ => (CompletionKind::Index, "bound in this item"),
        };
        list.push(plain(name, kind, detail, None));
    }
    let shown =
        |k: &Known| Completion { detail: k.detail.clone(), ..plain(&k.name, kind_of(k), "", k.description.clone()) };
    let of = |kind: SymbolKind| all.iter().filter(move |k| k.kind == kind);
    let bound = |k: &&Known| !place.bound.contains(&k.name);
    match place.wanted {
        Wanted::Index => {
            list.extend(of(SymbolKind::Index).filter(bound).map(shown));
            return list;
        }
        Wanted::SumIndex => {
            list.clear();
            list.extend(of(SymbolKind::Index).map(shown));
            return list;
        }
        Wanted::Moved => {
            list.extend(of(SymbolKind::Coordinate).map(shown));
            list.push(plain("t", CompletionKind::Constant, "time", None));
            return list;
        }
        Wanted::State => {
            for k in of(SymbolKind::Coordinate) {
                list.push(shown(k));
                list.extend(velocities(k));
            }
            return list;
        }
        Wanted::Signal => {
            list.extend(all.iter().filter(|k| matches!(k.kind, SymbolKind::Input | SymbolKind::Function)).map(shown));
            return list;
        }
        Wanted::Anything => {}
    }
    use SymbolKind::{Coordinate, Definition, Function, Index, Input, Parameter};
    // What this kind of item is usually made of.
    let order: [SymbolKind; 6] = match place.item {
        "kinetic" => [Parameter, Coordinate, Definition, Function, Input, Index],
        "assume" => [Parameter, Coordinate, Definition, Function, Input, Index],
        "force" | "dissipation" => [Coordinate, Input, Parameter, Definition, Function, Index],
        _ => [Coordinate, Parameter, Definition, Function, Input, Index],
    };
    for kind in order {
        for k in of(kind).filter(bound) {
            list.push(shown(k));
            if kind == Coordinate && place.item != "assume" {
                list.extend(velocities(k));
            }
        }
    }
    list
}

/// The velocity in both spellings: `x'`, and `ẋ` where the name can bear the dot.
fn velocities(k: &Known) -> Vec<Completion> {
    let detail = format!("velocity of {}", k.name);
    // Of a family the prime stands behind the index.
    if k.family {
        return Vec::new();
    }
    let primed = format!("{}'", k.name);
    let mut list = vec![plain(&primed, CompletionKind::Coordinate, &detail, None)];
    if let Some(dotted) = dotted(&k.name) {
        list.push(Completion { filter: primed, ..plain(&dotted, CompletionKind::Coordinate, &detail, None) });
    }
    list
}

/// The name with Newton's dot, where the language reads it so.
fn dotted(name: &str) -> Option<String> {
    use unicode_normalization::UnicodeNormalization;
    let first = name.chars().next()?;
    let spelt: String = format!("{first}{}{}", '\u{307}', &name[first.len_utf8()..]).nfc().collect();
    (read_name(&spelt) == (name.to_string(), 1)).then_some(spelt)
}

/// Names that are used and nowhere declared: what is declared next is probably one of them.
pub(super) fn undeclared(items: &[RawItem], included: &[SymbolRow]) -> Vec<Completion> {
    let known: HashSet<String> = known(items, included).into_iter().map(|k| k.name).collect();
    let callable = callable_names(items.iter());
    let mut list: Vec<Completion> = Vec::new();
    for item in items {
        let tree = parse_item(&item.text, &callable.occurring_in(&item.text)).item;
        for used in uses(&tree).names {
            if !known.contains(&used.name) && !used.name.is_empty() && list.iter().all(|c| c.label != used.name) {
                let detail = "used, and nowhere declared";
                list.push(plain(&used.name, CompletionKind::Parameter, detail, None));
            }
        }
    }
    list
}
