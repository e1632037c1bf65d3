//! Where a cursor is, told from the signs before it alone: the item is nearly always broken while it is typed.

use leastwise_grammar::{WordKind, words};
use std::ops::Range;

/// What can stand at the cursor.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) enum Context {
    /// An item begins: keywords; behind these modifiers only some.
    Item(Option<&'static str>),
    /// A new name: what is used and nowhere declared.
    NewName,
    /// A quantity or unit, behind a colon.
    Quantity,
    /// A unit, behind a number; the quantity that was declared.
    Unit(Option<String>),
    /// One of these words.
    Words(&'static [&'static str]),
    /// A formula.
    Formula(Place),
    /// Nothing.
    Nothing,
}

/// What kind of formula.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Place {
    /// The item's keyword.
    pub item: &'static str,
    /// What is wanted most.
    pub wanted: Wanted,
    /// Names that the item binds so far: formal arguments, indices, ε.
    pub bound: Vec<String>,
}

/// What a formula wants most at its place.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Wanted {
    /// Anything.
    Anything,
    /// An index, between square brackets.
    Index,
    /// A declared index, right behind `sum(`.
    SumIndex,
    /// A coordinate or the time, on the left of an arrow.
    Moved,
    /// A coordinate or velocity, that begins a run.
    State,
    /// An input or function.
    Signal,
}

/// A piece before the cursor.
struct Piece<'t> {
    kind: WordKind,
    text: &'t str,
    range: Range<usize>,
}

/// The keywords that begin an item.
const ITEMS: [&str; 20] = [
    "system",
    "coordinate",
    "parameter",
    "input",
    "index",
    "let",
    "function",
    "assume",
    "kinetic",
    "potential",
    "lagrangian",
    "dissipation",
    "force",
    "constraint",
    "symmetry",
    "conserved",
    "run",
    "include",
    "cyclic",
    "broken",
];

/// Where the cursor is: `before` is the item's text up to the word that is being typed.
pub(super) fn context(before: &str, first_column: bool) -> Context {
    if first_column {
        return Context::Item(None);
    }
    let pieces: Vec<Piece<'_>> =
        words(before).map(|(s, kind)| Piece { kind, text: &before[s.range()], range: s.range() }).collect();
    let open_comment = pieces.last().is_some_and(|p| p.kind == WordKind::Comment && p.range.end == before.len());
    let open_text =
        pieces.last().is_some_and(|p| p.kind == WordKind::Text && !(p.text.len() > 1 && p.text.ends_with('"')));
    // A digit right before the cursor belongs to a number.
    let in_number = pieces.last().is_some_and(|p| {
        p.kind == WordKind::Number && p.range.end == before.len() && before.ends_with(|c: char| c.is_ascii_digit())
    });
    if open_comment || open_text {
        return Context::Nothing;
    }
    let pieces: Vec<Piece<'_>> = pieces.into_iter().filter(|p| p.kind != WordKind::Comment).collect();
    let Some((head, mut rest)) = pieces.split_first() else { return Context::Item(None) };
    let Some(mut item) = ITEMS.iter().copied().find(|k| *k == head.text) else { return Context::Nothing };
    if matches!(item, "cyclic" | "broken") {
        let wanted = if item == "cyclic" { "coordinate" } else { "symmetry" };
        match rest.split_first() {
            Some((next, more)) if next.text == wanted => (item, rest) = (wanted, more),
            _ => return Context::Item(Some(wanted)),
        }
    }
    let bound = bound(item, rest);
    let formula = |wanted| Context::Formula(Place { item, wanted, bound: bound.clone() });
    let depth = depth(rest);
    if let Some(b'[') = depth.last() {
        // The head of a family names its index; elsewhere a member is chosen.
        return formula(Wanted::Index);
    }
    let last = rest.last().map_or("", |p| p.text);
    let before_last = rest.len().checked_sub(2).and_then(|k| rest.get(k)).map_or("", |p| p.text);
    if last == "(" && before_last == "sum" {
        return formula(Wanted::SumIndex);
    }
    let sum_head = rest.len() >= 3 && rest[rest.len() - 3].text == "sum" && before_last == "(";
    if sum_head && rest.last().is_some_and(|p| p.kind == WordKind::Word) {
        return Context::Words(&["in"]);
    }
    let has = |sign: &str| rest.iter().any(|p| p.text == sign);
    match item {
        "system" => match (rest.len(), last) {
            (0, _) => Context::Nothing,
            (_, ",") => Context::Words(&["dimensionless", "with"]),
            _ => Context::Nothing,
        },
        "coordinate" | "input" => {
            if !has(":") {
                // A name is followed by a sign, not by another name.
                return if rest.is_empty() || last == "," { Context::NewName } else { Context::Nothing };
            }
            if matches!(last, ":" | "/" | "*" | "·") { Context::Quantity } else { Context::Nothing }
        }
        "parameter" => parameter(rest, &depth, in_number),
        "index" => {
            if has(":") {
                formula(Wanted::Anything)
            } else {
                Context::NewName
            }
        }
        "let" if !has("=") => Context::NewName,
        "function" => {
            if matches!(last, ":") {
                Context::Quantity
            } else {
                Context::NewName
            }
        }
        "let" | "assume" => formula(Wanted::Anything),
        "kinetic" | "potential" | "lagrangian" | "dissipation" | "conserved" => {
            // The first word may be a name; a sign behind it makes it a formula.
            if has("=") || rest.len() > 1 || rest.first().is_some_and(|p| p.kind != WordKind::Word) {
                formula(Wanted::Anything)
            } else {
                Context::Nothing
            }
        }
        "force" => {
            if has("=") || has("on") {
                formula(Wanted::Anything)
            } else if rest.is_empty() {
                Context::Nothing
            } else {
                Context::Words(&["on"])
            }
        }
        "constraint" => {
            if has(":") {
                formula(Wanted::Anything)
            } else {
                Context::Nothing
            }
        }
        "symmetry" => symmetry(rest, &depth, &formula),
        "run" => run(rest, in_number, &formula),
        _ => Context::Nothing,
    }
}

/// The brackets that are open at the end.
fn depth(pieces: &[Piece<'_>]) -> Vec<u8> {
    let mut open = Vec::new();
    for p in pieces {
        match p.text {
            "(" | "[" => open.push(p.text.as_bytes()[0]),
            ")" | "]" => drop(open.pop()),
            _ => {}
        }
    }
    open
}

/// What stands behind the last comma outside of brackets.
fn last_part<'p, 't>(pieces: &'p [Piece<'t>]) -> &'p [Piece<'t>] {
    let (mut open, mut start) = (0_usize, 0);
    for (k, p) in pieces.iter().enumerate() {
        match p.text {
            "(" | "[" => open += 1,
            ")" | "]" => open = open.saturating_sub(1),
            "," if open == 0 => start = k + 1,
            _ => {}
        }
    }
    &pieces[start..]
}

fn parameter(rest: &[Piece<'_>], open: &[u8], in_number: bool) -> Context {
    let part = last_part(rest);
    let last = part.last().map_or("", |p| p.text);
    let equals = part.iter().position(|p| p.text == "=");
    let colon = part.iter().position(|p| p.text == ":");
    if let Some(equals) = equals {
        let number = part[equals..].iter().any(|p| p.kind == WordKind::Number);
        let quantity = colon.and_then(|c| part.get(c + 1)).filter(|p| p.kind == WordKind::Word);
        let unit_follows =
            matches!(last, "/" | "*" | "·") || part.last().is_some_and(|p| p.kind == WordKind::Number || p.text == ")");
        let more = part[equals..].iter().any(|p| p.kind == WordKind::Word);
        return if number && open.is_empty() && !in_number && (unit_follows || more) {
            Context::Unit(quantity.map(|p| p.text.to_owned()))
        } else {
            Context::Nothing
        };
    }
    match colon {
        Some(_) if matches!(last, ":" | "/" | "*" | "·") => Context::Quantity,
        Some(_) => Context::Nothing,
        None if part.is_empty() => Context::NewName,
        None => Context::Nothing,
    }
}

fn symmetry(rest: &[Piece<'_>], open: &[u8], formula: &dyn Fn(Wanted) -> Context) -> Context {
    if !rest.iter().any(|p| p.text == ":") {
        return Context::Nothing;
    }
    let is_arrow = |p: &Piece<'_>| matches!(p.text, "->" | "→");
    // Within a bracket on the left the names of a tuple are listed.
    let part = if open.is_empty() { last_part(rest) } else { rest };
    let arrow = part.iter().rposition(is_arrow);
    let left = match arrow {
        None => true,
        Some(at) => {
            let behind = &part[at..];
            let opened = behind.iter().filter(|p| p.text == "(").count();
            let closed = behind.iter().filter(|p| p.text == ")").count();
            opened <= closed && behind.last().is_some_and(|p| p.text == ",") && open.is_empty()
        }
    };
    formula(if left { Wanted::Moved } else { Wanted::Anything })
}

const CLAUSES: &[&str] = &["from", "over", "until", "with"];

fn run(rest: &[Piece<'_>], in_number: bool, formula: &dyn Fn(Wanted) -> Context) -> Context {
    if !rest.iter().any(|p| p.text == ":") {
        return Context::Nothing;
    }
    let last = rest.last().map_or("", |p| p.text);
    if last == ":" {
        return Context::Words(CLAUSES);
    }
    let clause = rest.iter().rev().find(|p| CLAUSES.contains(&p.text)).map_or("", |p| p.text);
    let part = last_part(rest);
    let equals = part.iter().any(|p| p.text == "=");
    let number = part.last().is_some_and(|p| p.kind == WordKind::Number) && !in_number;
    match (clause, last) {
        ("from", "from" | ",") => formula(Wanted::State),
        ("from", _) if equals && (number || matches!(last, "/" | "*" | "·")) => Context::Unit(None),
        ("over", _) if number || matches!(last, "/") => Context::Unit(Some("time".into())),
        ("over", ",") => Context::Words(CLAUSES),
        ("with", "with" | ",") => formula(Wanted::Signal),
        ("with", _) if equals => formula(Wanted::Anything),
        ("until", _) => formula(Wanted::Anything),
        _ => Context::Nothing,
    }
}

/// The names that the item binds before the cursor.
fn bound(item: &str, rest: &[Piece<'_>]) -> Vec<String> {
    let mut out: Vec<String> = Vec::new();
    let mut add = |name: &str| {
        let name = leastwise_grammar::fold_name(name);
        if !out.contains(&name) {
            out.push(name);
        }
    };
    let head_end = rest.iter().position(|p| matches!(p.text, "=" | ":")).unwrap_or(rest.len());
    if matches!(item, "let" | "constraint") && head_end < rest.len() {
        rest[..head_end].iter().skip(1).filter(|p| p.kind == WordKind::Word).for_each(|p| add(p.text));
    }
    if item == "symmetry" {
        add("ε");
    }
    // A sum whose bracket is still open binds its index.
    let mut open: Vec<Option<&str>> = Vec::new();
    for (k, p) in rest.iter().enumerate() {
        match p.text {
            "(" | "[" => {
                let is_sum = p.text == "(" && k > 0 && rest[k - 1].text == "sum";
                open.push(rest.get(k + 1).filter(|n| is_sum && n.kind == WordKind::Word).map(|n| n.text));
            }
            ")" | "]" => drop(open.pop()),
            _ => {}
        }
    }
    open.into_iter().flatten().for_each(add);
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(before: &str, expected: Context) {
        assert_eq!(context(before, false), expected, "{before}");
    }

    #[track_caller]
    fn formula(before: &str, wanted: Wanted, bound: &[&str]) {
        match context(before, false) {
            Context::Formula(place) => assert_eq!(
                (place.wanted, place.bound.as_slice()),
                (wanted, bound.iter().map(|b| b.to_string()).collect::<Vec<_>>().as_slice()),
                "{before}"
            ),
            other => panic!("{before}: {other:?}"),
        }
    }

    #[test]
    fn items_begin_in_the_first_column() {
        assert_eq!(context("", true), Context::Item(None));
        check("cyclic ", Context::Item(Some("coordinate")));
        check("broken ", Context::Item(Some("symmetry")));
    }

    #[test]
    fn declarations() {
        check("coordinate ", Context::NewName);
        check("coordinate x, ", Context::NewName);
        check("coordinate x ", Context::Nothing);
        check("cyclic coordinate φ: ", Context::Quantity);
        check("parameter m: ", Context::Quantity);
        check("parameter k: N/", Context::Quantity);
        check("parameter m: mass = ", Context::Nothing);
        check("parameter m: mass = 2", Context::Nothing);
        check("parameter m: mass = 2 ", Context::Unit(Some("mass".into())));
        check("parameter m: mass = 2 kg m/", Context::Unit(Some("mass".into())));
        check("parameter m: mass = 2 kg, ", Context::NewName);
        check("function U(r): ", Context::Quantity);
    }

    #[test]
    fn formulas() {
        formula("kinetic T = ", Wanted::Anything, &[]);
        formula("kinetic 1/2 ", Wanted::Anything, &[]);
        check("kinetic ", Context::Nothing);
        formula("let f(x, y) = x + ", Wanted::Anything, &["x", "y"]);
        formula("let X[i] = sum(j in 1..i: ", Wanted::Anything, &["i", "j"]);
        formula("kinetic T = sum(j in 1..3: m[j]) + ", Wanted::Anything, &[]);
        formula("kinetic T = m[", Wanted::Index, &[]);
        formula("kinetic T = sum(", Wanted::SumIndex, &[]);
        check("kinetic T = sum(j ", Context::Words(&["in"]));
        check("force brake ", Context::Words(&["on"]));
        formula("force brake on ", Wanted::Anything, &[]);
        check("kinetic T = x # ", Context::Nothing);
        check("include \"", Context::Nothing);
    }

    #[test]
    fn claims_and_runs() {
        formula("symmetry s: ", Wanted::Moved, &["ε"]);
        formula("symmetry s: x -> ", Wanted::Anything, &["ε"]);
        formula("symmetry s: x -> x + ε, ", Wanted::Moved, &["ε"]);
        formula("symmetry s: (x, ", Wanted::Moved, &["ε"]);
        formula("symmetry s: (x, y) -> (x cos ε, ", Wanted::Anything, &["ε"]);
        check("symmetry s", Context::Nothing);
        check("run a: ", Context::Words(CLAUSES));
        formula("run a: from ", Wanted::State, &[]);
        check("run a: from x = 1 ", Context::Unit(None));
        check("run a: from x = 1 m, over 20 ", Context::Unit(Some("time".into())));
        formula("run a: over 20 s, with ", Wanted::Signal, &[]);
        check("system s, ", Context::Words(&["dimensionless", "with"]));
    }
}
