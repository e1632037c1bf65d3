//! Where a cursor is in a run: its clauses, initial values, signals.

use super::context::{Binder, Bound, Context, Place, Wanted};
use super::pieces::{Piece, derivative, find, names, parts, read, written};
use super::units::{Fitting, in_value};
use leastwise_grammar::WordKind;

/// The words that begin a clause, in their usual order.
const CLAUSES: [&str; 4] = ["from", "over", "until", "with"];

/// What can stand behind these pieces of a run; `after` is the item's text behind the cursor.
pub(super) fn context(before: &str, rest: &[Piece<'_>], after: &str) -> Context {
    let behind = match find(rest, &[":"]) {
        Some(colon) => &rest[colon + 1..],
        None if rest.first().is_some_and(|p| CLAUSES.contains(&p.text)) => rest,
        None => return Context::Nothing,
    };
    let after = read(after);
    let is_name = after.first().is_some_and(|p| matches!(p.text, "=" | "[") || p.kind == WordKind::Prime);
    let all = parts(behind);
    let (mut clause, mut taken) = ("", Vec::new());
    let mut used: Vec<&str> = Vec::new();
    for part in &all {
        let body = match part.split_first() {
            Some((word, body)) if begins_clause(word, body) => {
                clause = word.text;
                used.push(clause);
                body
            }
            _ => part,
        };
        if let Some(equals) = find(body, &["="]) {
            taken.extend(derivative(&body[..equals]));
        }
    }
    // What stands behind the cursor is given too.
    for part in parts(&after) {
        let body = match part.split_first() {
            Some((word, body)) if begins_clause(word, body) => {
                used.push(word.text);
                body
            }
            _ => part,
        };
        if let Some(equals) = find(body, &["="]).filter(|at| *at > 0) {
            taken.extend(derivative(&body[..equals]));
        }
    }
    let unused: Vec<&'static str> = CLAUSES.into_iter().filter(|word| !used.contains(word)).collect();
    let part = all.last().copied().unwrap_or_default();
    let own = match part.split_first() {
        Some((word, body)) if begins_clause(word, body) => body,
        _ => part,
    };
    // Behind a comma the clause goes on, or another one begins.
    let words = if part.is_empty() && !is_name { unused } else { Vec::new() };
    let equals = find(own, &["="]);
    let place = |wanted| Place { taken: taken.clone(), words: words.clone(), ..Place::of("run", wanted) };
    match (clause, equals) {
        ("", _) if part.is_empty() => Context::Words(words),
        ("from", Some(equals)) => {
            let of = derivative(&own[..equals]).unwrap_or_default();
            Context::InitialUnit { of, value: written(before, &own[equals + 1..]).to_owned() }
        }
        ("from", None) if own.is_empty() => Context::Formula(place(Wanted::State)),
        ("from", None) if own.iter().any(|p| p.text == "[") => Context::Formula(place(Wanted::State)),
        ("over", _) if part.is_empty() => Context::Words(words),
        ("over", _) => in_value(own, Fitting::of("time")),
        ("until", _) if part.is_empty() => Context::Words(words),
        ("until", _) => Context::Formula(place(Wanted::Anything)),
        ("with", None) if own.is_empty() => Context::Formula(place(Wanted::Signal)),
        ("with", None) if own.iter().any(|p| p.text == "[") => Context::Formula(place(Wanted::Signal)),
        ("with", Some(equals)) => {
            let formals = names(&own[..equals]).into_iter().skip(1);
            let bound = formals.map(|name| Bound { name, binder: Binder::Formal }).collect();
            Context::Formula(Place { bound, ..place(Wanted::SignalValue) })
        }
        _ => Context::Nothing,
    }
}

/// Whether a clause begins with this word: `from = 1 m` is the initial value of a coordinate called `from`.
fn begins_clause(word: &Piece<'_>, behind: &[Piece<'_>]) -> bool {
    let sign = behind.first().is_some_and(|p| matches!(p.text, "=" | "," | "[" | "'"));
    CLAUSES.contains(&word.text) && !sign
}
