//! Where a cursor is, told from the pieces of its item: the item is nearly always broken while it is typed.

use super::pieces::{Piece, before_cursor, find, indices, names, open_brackets, parts, written};
use super::run;
use super::units::{Fitting, Units, behind_colon, in_value};
use super::words::item_keyword;
use leastwise_grammar::{WordKind, fold_name, words};

/// What can stand at the cursor.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) enum Context {
    /// Nothing.
    Nothing,
    /// One of these words.
    Words(Vec<&'static str>),
    /// A new name, declared by an item with this keyword: what is used and nowhere declared.
    NewName(&'static str),
    /// A quantity or a unit, behind a colon.
    Quantity,
    /// A unit.
    Unit(Units),
    /// A unit in an initial value.
    InitialUnit {
        /// The coordinate or velocity that the value is of, with its primes.
        of: String,
        /// The value so far.
        value: String,
    },
    /// A formula.
    Formula(Place),
}

/// What kind of formula.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Place {
    /// The item's keyword.
    pub item: &'static str,
    /// What is wanted most.
    pub wanted: Wanted,
    /// The names that the item binds here, the innermost first.
    pub bound: Vec<Bound>,
    /// Names that stand already, and should not stand again.
    pub taken: Vec<String>,
    /// Names that are wanted before the others.
    pub first: Vec<String>,
    /// Keywords that can stand here too.
    pub words: Vec<&'static str>,
}

/// A name that an item binds.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Bound {
    /// The folded name.
    pub name: String,
    /// What binds it.
    pub binder: Binder,
}

/// What binds a name.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Binder {
    /// The head of a function or definition.
    Formal,
    /// A sum, or the head of a family.
    Index,
    /// A transformation: ε.
    Transformation,
}

/// What a formula wants most at its place.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Wanted {
    /// What its item is usually made of.
    Anything,
    /// What a force acts on: coordinates.
    ActedOn,
    /// An index, between square brackets.
    Index,
    /// The index of a family in the head of its declaration.
    FamilyIndex,
    /// A declared index, right behind `sum(`.
    SumIndex,
    /// A whole number: the bound of a range.
    Whole,
    /// A coordinate or the time, on the left of an arrow.
    Moved,
    /// What it goes over into, on the right.
    Image,
    /// A coordinate or velocity, which begins a run.
    State,
    /// An input or function.
    Signal,
    /// The formula of an input or function.
    SignalValue,
    /// A coordinate: the argument of `momentum`.
    Coordinate,
    /// A unit vector: the axis of a turn.
    Axis,
    /// A rotation or another matrix: the argument of `spin` and `transpose`.
    Matrix,
    /// A constant, set to one for the whole system.
    Constant,
}

impl Place {
    pub(super) fn of(item: &'static str, wanted: Wanted) -> Place {
        Place { item, wanted, bound: Vec::new(), taken: Vec::new(), first: Vec::new(), words: Vec::new() }
    }
}

/// Where the cursor is: `before` is the item's text up to the word that is being typed, `typed` that word up to the
/// cursor, `after` what follows the word.
pub(super) fn context(before: &str, typed: &str, after: &str) -> Context {
    let Some(pieces) = before_cursor(before) else { return Context::Nothing };
    if pieces.last().is_some_and(|last| last.range.end == before.len() && is_closed(&pieces, last, typed)) {
        return Context::Nothing;
    }
    let Some((head, mut rest)) = pieces.split_first() else { return Context::Nothing };
    let Some(mut item) = item_keyword(head.text).filter(|_| head.is_word()) else { return Context::Nothing };
    if matches!(item, "cyclic" | "broken") {
        let wanted = if item == "cyclic" { "coordinate" } else { "symmetry" };
        match rest.split_first() {
            Some((next, more)) if item_keyword(next.text) == Some(wanted) => (item, rest) = (wanted, more),
            None => return Context::Words(vec![wanted]),
            _ => return Context::Nothing,
        }
    }
    let context = match item {
        "system" => system(rest),
        "coordinate" | "input" | "function" | "index" => declaration(item, rest),
        "parameter" => parameter(before, rest),
        "let" => definition(rest),
        "assume" => Context::Formula(Place::of(item, Wanted::Anything)),
        "kinetic" | "potential" | "lagrangian" | "dissipation" | "conserved" => titled(item, rest),
        "force" => force(rest),
        "constraint" => constraint(rest),
        "symmetry" => symmetry(rest),
        "run" => run::context(before, rest, after),
        _ => Context::Nothing,
    };
    match context {
        Context::Formula(place) => within(place, rest),
        // A quantity stands alone; what goes on is a product of units.
        Context::Quantity if goes_on(after) => Context::Unit(Units::default()),
        other => other,
    }
}

/// Whether nothing can go on right behind a piece: a number, a name with its primes, a closed bracket. What is typed there is
/// a factor, unless it belongs to the number.
fn is_closed(pieces: &[Piece<'_>], last: &Piece<'_>, typed: &str) -> bool {
    if last.is_number() && typed.strip_prefix(['e', 'E']).is_some_and(|rest| rest.chars().all(|c| c.is_ascii_digit())) {
        return true;
    }
    let bars = || pieces.iter().filter(|p| p.text == "|").count();
    let closes = match last.kind {
        WordKind::Sign => {
            matches!(last.text, ")" | "]" | "." | "°" | "%" | "°C") || last.text == "|" && bars() % 2 == 0
        }
        _ => true,
    };
    typed.is_empty() && closes
}

/// Whether a unit goes on behind the word under the cursor.
fn goes_on(after: &str) -> bool {
    let next = words(after).find(|(_, kind)| *kind != WordKind::Comment).map(|(span, _)| &after[span.range()]);
    next.is_some_and(|text| !matches!(text, "," | "="))
}

fn system(rest: &[Piece<'_>]) -> Context {
    let parts = parts(rest);
    let Some((part, named)) = parts.split_last().filter(|(_, named)| !named.is_empty()) else {
        return Context::Nothing;
    };
    let with = named.iter().any(|p| p.first().is_some_and(|p| p.text == "with"));
    match part {
        [] if with => Context::Formula(Place::of("system", Wanted::Constant)),
        [] => Context::Words(vec!["dimensionless", "with"]),
        [word] if word.text == "with" => Context::Formula(Place::of("system", Wanted::Constant)),
        _ => Context::Nothing,
    }
}

/// `coordinate x[i], y: length`, `input u: torque`, `function U(r): energy`, `index i: 1..8`.
fn declaration(item: &'static str, rest: &[Piece<'_>]) -> Context {
    match find(rest, &[":"]) {
        Some(_) if item == "index" => Context::Formula(Place::of(item, Wanted::Whole)),
        Some(colon) => behind_colon(&rest[colon + 1..]),
        None => new_name(item, rest),
    }
}

/// The head of a declaration.
fn new_name(item: &'static str, rest: &[Piece<'_>]) -> Context {
    let lists = !matches!(item, "function" | "let");
    match open_brackets(rest).last() {
        Some(&open) if rest[open].text == "[" => Context::Formula(Place::of(item, Wanted::FamilyIndex)),
        Some(_) => Context::Nothing,
        None if rest.is_empty() || lists && rest.last().is_some_and(|p| p.text == ",") => Context::NewName(item),
        None => Context::Nothing,
    }
}

fn parameter(before: &str, rest: &[Piece<'_>]) -> Context {
    let part = parts(rest).pop().unwrap_or_default();
    let equals = find(part, &["="]);
    let head = &part[..equals.unwrap_or(part.len())];
    let quantity = find(head, &[":"]).map(|colon| &head[colon + 1..]);
    match (equals, quantity) {
        (Some(equals), quantity) => {
            in_value(&part[equals + 1..], quantity.and_then(|q| Fitting::of(written(before, q))))
        }
        (None, Some(quantity)) => behind_colon(quantity),
        // An index in brackets is no part of its own.
        (None, None) if open_brackets(rest).is_empty() && part.is_empty() => Context::NewName("parameter"),
        (None, None) if part.is_empty() => Context::Nothing,
        (None, None) => new_name("parameter", part),
    }
}

fn definition(rest: &[Piece<'_>]) -> Context {
    match find(rest, &["="]) {
        Some(equals) => {
            let mut place = Place::of("let", Wanted::Anything);
            place.bound = bound_by_head(&rest[..equals]);
            Context::Formula(place)
        }
        None => new_name("let", rest),
    }
}

/// The formal arguments and the index that a head binds.
fn bound_by_head(head: &[Piece<'_>]) -> Vec<Bound> {
    let formals = names(head).into_iter().skip(1).map(|name| Bound { name, binder: Binder::Formal });
    formals.chain(indices(head).into_iter().map(|name| Bound { name, binder: Binder::Index })).collect()
}

/// A term or claim: the first word is probably its name, until a sign tells that it is the formula.
fn titled(item: &'static str, rest: &[Piece<'_>]) -> Context {
    let formula = match rest {
        [] => false,
        [only] => !only.is_word(),
        _ => true,
    };
    if formula { Context::Formula(Place::of(item, Wanted::Anything)) } else { Context::Nothing }
}

fn force(rest: &[Piece<'_>]) -> Context {
    if find(rest, &["="]).is_some() {
        return Context::Formula(Place::of("force", Wanted::Anything));
    }
    let on = |at: usize| rest.get(at).is_some_and(|p| p.text == "on");
    match rest {
        [] => Context::Nothing,
        _ if on(0) || on(1) => Context::Formula(Place::of("force", Wanted::ActedOn)),
        [name] if name.is_word() => Context::Words(vec!["on"]),
        _ => Context::Nothing,
    }
}

fn constraint(rest: &[Piece<'_>]) -> Context {
    let mut place = Place::of("constraint", Wanted::Anything);
    match find(rest, &[":"]) {
        Some(colon) => place.bound = bound_by_head(&rest[..colon]),
        // Without a name the equation begins at once; `link[` is the head of a family.
        None => match rest {
            [] => return Context::Nothing,
            [name, ..] if name.is_word() && rest.iter().skip(1).all(|p| p.is_word() || matches!(p.text, "[" | "]")) => {
                match rest.last() {
                    Some(open) if open.text == "[" => place.wanted = Wanted::FamilyIndex,
                    _ => return Context::Nothing,
                }
            }
            _ => {}
        },
    }
    Context::Formula(place)
}

fn symmetry(rest: &[Piece<'_>]) -> Context {
    let arrows = ["->", "→"];
    let behind = match find(rest, &[":"]) {
        Some(colon) => &rest[colon + 1..],
        None if find(rest, &arrows).is_some() || rest.first().is_some_and(|p| p.text == "(") => rest,
        None => return Context::Nothing,
    };
    let all = parts(behind);
    let part = *all.last().unwrap_or(&behind);
    let arrow = find(part, &arrows);
    let mut place = Place::of("symmetry", if arrow.is_some() { Wanted::Image } else { Wanted::Moved });
    let sources: Vec<&[Piece<'_>]> = all.iter().map(|p| &p[..find(p, &arrows).unwrap_or(p.len())]).collect();
    place.taken = sources.iter().flat_map(|s| names(s)).collect();
    match arrow {
        Some(arrow) => {
            place.first = names(&part[..arrow]);
            let index = indices(&part[..arrow]).into_iter().map(|name| Bound { name, binder: Binder::Index });
            place.bound =
                std::iter::once(Bound { name: "ε".into(), binder: Binder::Transformation }).chain(index).collect();
            Context::Formula(place)
        }
        None => {
            let begins = part.last().is_none_or(|p| matches!(p.text, "," | "(" | "["));
            let inside = open_brackets(part).last().is_some_and(|&open| part[open].text == "[");
            if begins || inside { Context::Formula(place) } else { Context::Nothing }
        }
    }
}

/// A place in a formula, with what its brackets say: indices, sums, arguments.
fn within(mut place: Place, rest: &[Piece<'_>]) -> Context {
    let open = open_brackets(rest);
    let function = |at: usize| at.checked_sub(1).and_then(|k| rest.get(k)).map_or("", |p| p.text);
    let mut bound: Vec<Bound> = Vec::new();
    for &at in open.iter().rev().filter(|&&at| rest[at].text == "(" && function(at) == "sum") {
        let inside = &rest[at + 1..];
        match inside {
            [] => place.wanted = Wanted::SumIndex,
            [index] if index.is_word() => return Context::Words(vec!["in"]),
            [index, ..] if index.is_word() && find(inside, &[":"]).is_some() => {
                bound.push(Bound { name: fold_name(index.text), binder: Binder::Index });
            }
            // Inside its range the index is not bound yet.
            [_, word, ..] if word.text == "in" => place.wanted = Wanted::Whole,
            _ => {}
        }
    }
    for b in place.bound {
        if bound.iter().all(|other| other.name != b.name) {
            bound.push(b);
        }
    }
    place.bound = bound;
    if place.wanted == Wanted::FamilyIndex {
        return Context::Formula(place);
    }
    if let Some(&at) = open.last() {
        let first_argument = rest[at..].iter().all(|p| p.text != ",");
        match function(at) {
            "momentum" if place.item == "conserved" => place.wanted = Wanted::Coordinate,
            "turn" if first_argument => place.wanted = Wanted::Axis,
            "spin" | "transpose" => place.wanted = Wanted::Matrix,
            _ => {}
        }
    }
    if open.iter().any(|&at| rest[at].text == "[") {
        place.wanted = Wanted::Index;
    }
    Context::Formula(place)
}
