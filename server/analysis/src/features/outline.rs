//! The outline of a file: its items, with the names that they declare.

use super::place::head_name;
use crate::checked::{Contents, ItemRow};
use leastwise_grammar::tree::*;
use leastwise_grammar::{WordKind, begins_name, words};
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
    let mut counts: HashMap<&'static str, usize> = HashMap::new();
    for item in &checked.items {
        rows_of(checked, item, &mut counts, &mut rows);
    }
    rows
}

fn rows_of(checked: &Contents, item: &ItemRow, counts: &mut HashMap<&'static str, usize>, rows: &mut Vec<OutlineRow>) {
    let start = item.range.start;
    let at = |span: Span| start + span.start as usize..start + span.end as usize;
    let tree = &item.parsed.item;
    // An item's last line may end in a comment; the item itself ends before.
    let whole = at(tree.span);
    let text = |span: Span| checked.text.get(at(span)).unwrap_or_default();
    let keyword = text(tree.keyword);
    let mut push = |name: String, selection: Range<usize>, detail: String, kind: OutlineKind, range: Range<usize>| {
        let start = selection.start.clamp(range.start, range.end);
        let selection = start..selection.end.clamp(start, range.end);
        // A name that is not typed yet: its item has one at least.
        let name = if name.is_empty() { one_line(keyword) } else { name };
        rows.push(OutlineRow { name, detail: one_line(&detail), kind, range, selection, children: Vec::new() });
    };
    // What follows a name to the end of the item.
    let rest = |name: Span| {
        text(Span { start: name.end, end: tree.span.end.max(name.end) }).trim_start_matches([':', ',', ' '])
    };
    let declared = |d: &Declared| match &d.index {
        Some(i) => format!("{}[{}]", d.name.text, i.text),
        None => d.name.text.clone(),
    };
    let body = |f: &Formula| text(f.span).to_string();
    match &tree.kind {
        ItemKind::System { name, .. } => {
            push(name.text.clone(), at(name.span), rest(name.span).to_string(), OutlineKind::System, whole)
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
                let ends = d.quantity.iter().map(|q| q.span.end).chain(d.value.iter().map(|v| v.span.end));
                let all = Span { start: name.start, end: ends.fold(name.end, u32::max) };
                let range = if list.len() == 1 { whole.clone() } else { at(all) };
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
        ItemKind::Assume(_) => {
            push(keyword.to_string(), at(tree.keyword), rest(tree.keyword).to_string(), OutlineKind::Constraint, whole)
        }
        ItemKind::Broken if !keyword.starts_with(begins_name) => {}
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
                ItemKind::Symmetry { arrows, broken, .. } => {
                    let list: Vec<&str> = arrows.iter().map(|a| text(a.span)).collect();
                    let broken = if *broken { "broken: " } else { "" };
                    (OutlineKind::Claim, format!("{broken}{}", list.join(", ")))
                }
                ItemKind::Conserved { body: f, .. } => (OutlineKind::Claim, body(f)),
                ItemKind::Run { name, .. } => {
                    (OutlineKind::Run, rest(name.as_ref().map_or(tree.keyword, |n| n.span)).to_string())
                }
                _ => (by_keyword(keyword), rest(tree.keyword).to_string()),
            };
            // Numbered as the model numbers them.
            let number = match numbered(kind) {
                Some(word) => {
                    let count = counts.entry(word).or_default();
                    *count += 1;
                    format!("{word} {count}")
                }
                None => one_line(keyword),
            };
            let (name, selection) = match kind {
                ItemKind::Constraint { declared: Some(d), .. } => (declared(d), at(d.name.span)),
                kind => match head_name(kind) {
                    Some(name) => (name.text.clone(), at(name.span)),
                    None => (number, at(tree.keyword)),
                },
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

/// The word before the number of an item without a name.
fn numbered(kind: &ItemKind) -> Option<&'static str> {
    Some(match kind {
        ItemKind::Term { kind: TermKind::Kinetic, .. } => "kinetic",
        ItemKind::Term { kind: TermKind::Potential, .. } => "potential",
        ItemKind::Term { kind: TermKind::Lagrangian, .. } => "lagrangian",
        ItemKind::Dissipation { .. } => "dissipation",
        ItemKind::Force { .. } => "force",
        ItemKind::Constraint { .. } => "constraint",
        ItemKind::Symmetry { .. } => "symmetry",
        ItemKind::Conserved { .. } => "conserved",
        ItemKind::Run { .. } => "run",
        _ => return None,
    })
}

/// What an item without a meaning was to be.
fn by_keyword(keyword: &str) -> OutlineKind {
    match keyword.rsplit(' ').next().unwrap_or(keyword) {
        "system" => OutlineKind::System,
        "coordinate" => OutlineKind::Coordinate,
        "parameter" => OutlineKind::Parameter,
        "input" => OutlineKind::Input,
        "index" => OutlineKind::Index,
        "let" => OutlineKind::Definition,
        "function" => OutlineKind::Function,
        "dissipation" | "force" => OutlineKind::Force,
        "constraint" | "assume" => OutlineKind::Constraint,
        "symmetry" | "conserved" => OutlineKind::Claim,
        "run" => OutlineKind::Run,
        "include" => OutlineKind::Include,
        _ => OutlineKind::Term,
    }
}

/// On one line without comments, and no longer than a line of an outline can be.
pub(crate) fn one_line(text: &str) -> String {
    const MOST: usize = 60;
    let mut joined = String::new();
    let mut end = 0;
    for (span, kind) in words(text) {
        let range = span.range();
        if kind != WordKind::Comment {
            if range.start > end && !joined.is_empty() {
                joined.push(' ');
            }
            joined.push_str(&text[range.clone()]);
        }
        end = range.end;
        if joined.len() > 8 * MOST {
            break;
        }
    }
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
        let row = |r: &OutlineRow| {
            let lines = checked.text[r.range.clone()].matches('\n').count();
            let more = if lines > 0 { format!(" ({} lines)", lines + 1) } else { String::new() };
            format!("{:?} {}: {}{more}", r.kind, r.name, r.detail).trim_end().to_string()
        };
        outline(&checked).iter().map(row).collect::<Vec<_>>().join("\n")
    }

    #[test]
    fn rows_say_what_is_written() {
        insta::assert_snapshot!(shown(
            "system swing, with c = 1\n\
             cyclic coordinate φ: angle  # comment\n\
             coordinate x, y: length\n\
             parameter m: mass = 2 kg, l = 1 m\n\
             index i: 1..3\n\
             input u: torque\n\
             function U(s): energy\n\
             let f(x) = x²\n\
             let X[i] = i x\n\
             assume m > 0, l > 0\n\
             include \"site.least\"\n\
             kinetic bob = 1/2 m l^2 (φ'^2 # turning\n   + x'^2) # the bob\n\
             potential -m l\n\
             dissipation air = 1/2 m (x'^2 + y'^2 + l^2 φ'^2 + 2 x' y' + 2 x' l φ' + 2 y' l φ')\n\
             force push on x = -m x'\n\
             constraint rod[i]: x = y\n\
             broken symmetry turn: x -> x + ε,\n  y -> y + ε\n\
             conserved energy\n\
             run sway: from φ = 4°, over 60 s\n"
        ));
    }

    #[test]
    fn broken_items_are_shown_by_their_keyword() {
        insta::assert_snapshot!(shown(
            "coordinate x y: length\nparameter : mass\nkinetic (\nkinetic 1/2 x'^2\nsymmetry\nknietic a = 1\n§ nothing\nlet = 2\ninclude\nforce on\n\
             system\nconstraint r: x =\nindex i: 1..\nrun\nassume\ncyclic coordinate\nfunction (x)\n"
        ));
    }

    #[test]
    fn the_winch() {
        insta::assert_snapshot!(shown(include_str!("../../../../grammar/examples/shaft_winch.least")));
    }

    #[test]
    fn rows_are_in_order_and_selections_within_them() {
        let mut session = crate::Session::new();
        with_models(|text| {
            for text in broken(text) {
                let checked = session.check("model.least", &text, &crate::include::NoFiles);
                let mut last = 0;
                for row in outline(&checked) {
                    assert!(row.range.start <= row.selection.start && row.selection.end <= row.range.end, "{row:?}");
                    assert!(
                        text.get(row.range.clone()).is_some() && text.get(row.selection.clone()).is_some(),
                        "{row:?}"
                    );
                    assert!(last <= row.selection.start, "{row:?} in\n{text}");
                    assert!(
                        !row.name.is_empty() && row.detail.chars().count() <= 60 && !row.detail.contains('\n'),
                        "{row:?}"
                    );
                    last = row.selection.start;
                }
                let fresh = crate::Session::new().check("model.least", &text, &crate::include::NoFiles);
                assert_eq!(outline(&checked), outline(&fresh), "{text}");
            }
        });
    }
}
