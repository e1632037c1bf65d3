//! The outline of a file: its items, with the names that they declare.

use super::place::head_name;
use crate::checked::{Contents, ItemRow};
use leastwise_grammar::tree::*;
use std::collections::HashMap;
use std::ops::Range;

/// A row of the outline.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct OutlineRow {
    /// The name; `kinetic 1` for an item without one.
    pub name: String,
    /// A short remark: the quantity and value, the formula as written.
    pub detail: String,
    /// What it is.
    pub kind: OutlineKind,
    /// The whole item, or declaration: bytes in the file.
    pub range: Range<usize>,
    /// The name: bytes in the file, within `range`.
    pub selection: Range<usize>,
    /// What belongs to it.
    pub children: Vec<OutlineRow>,
}

/// What a row of the outline is.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum OutlineKind {
    /// The system.
    System,
    /// A coordinate.
    Coordinate,
    /// A parameter.
    Parameter,
    /// An input.
    Input,
    /// An index.
    Index,
    /// A definition.
    Definition,
    /// A function, unspecified or defined.
    Function,
    /// A term of the Lagrangian.
    Term,
    /// A force or dissipation.
    Force,
    /// A constraint.
    Constraint,
    /// A symmetry or conserved claim.
    Claim,
    /// A run.
    Run,
    /// An included file.
    Include,
}

/// The outline, in the order of the file.
pub fn outline(checked: &Contents) -> Vec<OutlineRow> {
    let mut rows = Vec::new();
    let mut counts: HashMap<String, usize> = HashMap::new();
    for item in &checked.items {
        rows_of(checked, item, &mut counts, &mut rows);
    }
    rows
}

fn rows_of(checked: &Contents, item: &ItemRow, counts: &mut HashMap<String, usize>, rows: &mut Vec<OutlineRow>) {
    let start = item.range.start;
    let at = |span: Span| start + span.start as usize..start + span.end as usize;
    let tree = &item.parsed.item;
    // An item's last line may end in a comment; the item itself ends before.
    let whole = at(tree.span);
    let text = |span: Span| checked.text.get(at(span)).unwrap_or_default();
    let keyword = text(tree.keyword);
    let mut push = |name: String, selection: Range<usize>, detail: String, kind: OutlineKind, range: Range<usize>| {
        let selection = selection.start.max(range.start)..selection.end.min(range.end).max(range.start);
        rows.push(OutlineRow { name, detail: one_line(&detail), kind, range, selection, children: Vec::new() });
    };
    let declared = |d: &Declared| match &d.index {
        Some(i) => format!("{}[{}]", d.name.text, i.text),
        None => d.name.text.clone(),
    };
    let body = |f: &Formula| text(f.span).to_string();
    match &tree.kind {
        ItemKind::System { name, .. } => {
            push(name.text.clone(), at(name.span), String::new(), OutlineKind::System, whole)
        }
        ItemKind::Coordinate { declared: list, quantity, cyclic } => {
            for d in list {
                let what = quantity.as_ref().map_or("", |q| text(q.span));
                let detail = if *cyclic { format!("cyclic {what}") } else { what.to_string() };
                let range = if list.len() == 1 { whole.clone() } else { at(d.name.span) };
                push(declared(d), at(d.name.span), detail, OutlineKind::Coordinate, range);
            }
        }
        ItemKind::Input { declared: list, quantity } => {
            for d in list {
                let detail = quantity.as_ref().map_or("", |q| text(q.span)).to_string();
                let range = if list.len() == 1 { whole.clone() } else { at(d.name.span) };
                push(declared(d), at(d.name.span), detail, OutlineKind::Input, range);
            }
        }
        ItemKind::Parameter(list) => {
            for d in list {
                let quantity = d.quantity.as_ref().map_or("", |q| text(q.span));
                let value = d.value.as_ref().map_or(String::new(), |v| format!("= {}", text(v.span)));
                let name = d.declared.name.span;
                let range = if list.len() == 1 { whole.clone() } else { at(name) };
                let detail = format!("{quantity} {value}");
                push(declared(&d.declared), at(name), detail, OutlineKind::Parameter, range);
            }
        }
        ItemKind::Index { names, lower, upper } => {
            for name in names {
                let range = if names.len() == 1 { whole.clone() } else { at(name.span) };
                let detail = format!("{}..{}", text(lower.span), text(upper.span));
                push(name.text.clone(), at(name.span), detail, OutlineKind::Index, range);
            }
        }
        ItemKind::Let { declared: d, formals, body: f } => {
            let kind = if formals.is_empty() { OutlineKind::Definition } else { OutlineKind::Function };
            push(called(&declared(d), formals), at(d.name.span), body(f), kind, whole);
        }
        ItemKind::Function { declared: d, formals, quantity } => {
            let detail = quantity.as_ref().map_or("", |q| text(q.span)).to_string();
            push(called(&declared(d), formals), at(d.name.span), detail, OutlineKind::Function, whole);
        }
        ItemKind::Include { file, span } => push(file.clone(), at(*span), String::new(), OutlineKind::Include, whole),
        ItemKind::Assume(_) => {}
        ItemKind::Broken if keyword.is_empty() => {}
        kind => {
            let (outline, detail) = match kind {
                ItemKind::Term { body: f, .. } => (OutlineKind::Term, body(f)),
                ItemKind::Dissipation { body: f, .. } => (OutlineKind::Force, body(f)),
                ItemKind::Force { on, body: f, .. } => {
                    (OutlineKind::Force, format!("on {} = {}", text(on.span), body(f)))
                }
                ItemKind::Constraint { left, right, .. } => {
                    (OutlineKind::Constraint, format!("{} = {}", text(left.span), text(right.span)))
                }
                ItemKind::Symmetry { arrows, .. } => {
                    let list: Vec<&str> = arrows.iter().map(|a| text(a.span)).collect();
                    (OutlineKind::Claim, list.join(", "))
                }
                ItemKind::Conserved { body: f, .. } => (OutlineKind::Claim, body(f)),
                ItemKind::Run { .. } => (OutlineKind::Run, String::new()),
                _ => (OutlineKind::Term, String::new()),
            };
            let short = keyword.rsplit(' ').next().unwrap_or(keyword).to_string();
            let count = counts.entry(short.clone()).or_default();
            *count += 1;
            let (name, selection) = match head_name(kind) {
                Some(name) => (name.text.clone(), at(name.span)),
                None => (format!("{short} {count}"), at(tree.keyword)),
            };
            push(name, selection, detail, outline, whole);
        }
    }
}

fn called(name: &str, formals: &[Name]) -> String {
    if formals.is_empty() {
        return name.to_string();
    }
    let list: Vec<&str> = formals.iter().map(|f| f.text.as_str()).collect();
    format!("{name}({})", list.join(", "))
}

/// On one line, and no longer than a line of an outline can be.
pub(crate) fn one_line(text: &str) -> String {
    const MOST: usize = 60;
    let joined = text.split_whitespace().collect::<Vec<_>>().join(" ");
    if joined.chars().count() <= MOST {
        return joined;
    }
    let cut: String = joined.chars().take(MOST - 1).collect();
    format!("{}…", cut.trim_end())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::features::models::{broken, with_models};

    fn shown(text: &str) -> String {
        let checked = crate::Session::new().check("swing.least", text, &crate::include::NoFiles);
        let row = |r: &OutlineRow| format!("{:?} {} — {}", r.kind, r.name, r.detail);
        outline(&checked).iter().map(row).collect::<Vec<_>>().join("\n")
    }

    #[test]
    fn rows_say_what_is_written() {
        insta::assert_snapshot!(shown(
            "system swing\n\
             cyclic coordinate φ: angle\n\
             coordinate x, y: length\n\
             parameter m: mass = 2 kg, l = 1 m\n\
             index i: 1..3\n\
             let f(x) = x²\n\
             kinetic bob = 1/2 m l^2 (φ'^2\n   + x'^2) # the bob\n\
             potential -m l\n\
             force push on x = -m x'\n\
             broken symmetry turn: x -> x + ε\n\
             kinetic (\n"
        ), @r"
        System swing — 
        Coordinate φ — cyclic angle
        Coordinate x — length
        Coordinate y — length
        Parameter m — mass = 2 kg
        Parameter l — = 1 m
        Index i — 1..3
        Function f(x) — x²
        Term bob — 1/2 m l^2 (φ'^2 + x'^2)
        Term potential 1 — -m l
        Force push — on x = -m x'
        Claim turn — x -> x + ε
        Term kinetic 2 — (
        ");
    }

    #[test]
    fn selections_are_within_their_rows() {
        with_models(|text| {
            for text in broken(text) {
                let checked = crate::Session::new().check("model.least", &text, &crate::include::NoFiles);
                for row in outline(&checked) {
                    assert!(row.range.start <= row.selection.start && row.selection.end <= row.range.end, "{row:?}");
                    assert!(text.is_char_boundary(row.range.start) && text.is_char_boundary(row.range.end), "{row:?}");
                    assert!(!row.name.is_empty());
                }
            }
        });
    }
}
