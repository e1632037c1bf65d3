//! From a name to where it is declared, and to all its places.

use super::place::{Thing, place_at};
use crate::checked::{Contents, SymbolRow};
use std::ops::Range;
use std::sync::Arc;

/// A place in the model's file or in one that it includes.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Target {
    /// The included file; `None` for the model's own.
    pub file: Option<Arc<str>>,
    /// Bytes in that file.
    pub range: Range<usize>,
    /// What the link is on: bytes in the model's file.
    pub origin: Range<usize>,
}

/// Where the name at an offset is declared; of an `include`, the beginning of the file.
pub fn definition(checked: &Contents, offset: usize) -> Option<Target> {
    let place = place_at(checked, offset)?;
    let origin = place.range.clone();
    let here = |range: Range<usize>| Some(Target { file: None, range, origin: origin.clone() });
    let of_symbol = |s: &SymbolRow| match (&s.range, &s.origin) {
        (Some(range), _) => here(range.clone()),
        (None, Some((file, range))) => {
            Some(Target { file: Some(file.clone()), range: range.clone(), origin: origin.clone() })
        }
        (None, None) => None,
    };
    match place.thing {
        Thing::Symbol(s) => of_symbol(s),
        // The index of a family is declared by an item of its own.
        Thing::Bound(b) if b.kind == super::place::Binder::Member => match checked.symbol(&b.name) {
            Some(s) => of_symbol(s),
            None => here(b.declared?),
        },
        Thing::Bound(b) => here(b.declared?),
        Thing::Include => {
            let start = checked.items[place.item].range.start;
            let (_, file) = checked.included.iter().find(|(at, _)| *at == start)?;
            Some(Target { file: Some(file.clone()), range: 0..0, origin })
        }
        Thing::Unit(_) | Thing::Word(_) => None,
        // The name of an item stands in its head only.
        _ => here(head_range(checked, &place)),
    }
}

/// Every place in the model's file of the name at an offset, in order, each with whether it is the declaration.
pub fn references(checked: &Contents, offset: usize) -> Vec<(Range<usize>, bool)> {
    let Some(place) = place_at(checked, offset) else { return Vec::new() };
    let mut places: Vec<(Range<usize>, bool)> = match place.thing {
        Thing::Symbol(s) => symbol_places(s),
        Thing::Bound(b) if b.kind == super::place::Binder::Member => {
            // The declared index is one name wherever it is bound.
            let mut all: Vec<_> = checked.symbol(&b.name).map(symbol_places).unwrap_or_default();
            all.extend(member_places(checked, &b.name));
            all
        }
        Thing::Bound(b) => b.places.iter().map(|p| (p.clone(), b.declared.as_ref() == Some(p))).collect(),
        Thing::Unit(_) | Thing::Word(_) | Thing::Include => Vec::new(),
        _ => vec![(head_range(checked, &place), true)],
    };
    if let Some(s) = places.first().and_then(|(r, _)| super::place::symbol_at(checked, r))
        && s.kind == crate::scope::SymbolKind::Index
    {
        places.extend(member_places(checked, &s.name));
    }
    places.sort_by_key(|(r, declared)| (r.start, !declared));
    places.dedup_by(|a, b| a.0 == b.0);
    places
}

/// Where the name of an item stands, also for a cursor on its keyword.
fn head_range(checked: &Contents, place: &super::place::Place<'_>) -> Range<usize> {
    let row = &checked.items[place.item];
    let name = super::place::head_name(&row.parsed.item.kind).map(|n| n.span.range());
    name.map_or(place.range.clone(), |n| row.range.start + n.start..row.range.start + n.end)
}

fn symbol_places(s: &SymbolRow) -> Vec<(Range<usize>, bool)> {
    s.range.iter().map(|r| (r.clone(), true)).chain(s.uses.iter().map(|r| (r.clone(), false))).collect()
}

/// Where a declared index is bound once more, by the head of a family or a sum without a range.
fn member_places(checked: &Contents, name: &str) -> Vec<(Range<usize>, bool)> {
    let mut list = Vec::new();
    for row in &checked.items {
        super::place::binders(&row.parsed.item.kind, row.range.start, &mut list);
    }
    let bound = list.into_iter().filter(|b| b.kind == super::place::Binder::Member && b.name == name);
    bound.flat_map(|b| b.places).map(|p| (p, false)).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::fixture::Folder;

    /// The name at `$0` and its places: `^` under uses, `v` under the declaration.
    #[track_caller]
    fn check(fixture: &str) {
        let (mut text, mut expected, mut offset) = (String::new(), Vec::new(), 0);
        let (mut start, mut cursor) = (0, usize::MAX);
        for line in fixture.lines() {
            if line.trim_start().starts_with(['^', 'v']) {
                let shown: String = text[start..].trim_end().to_string();
                // The cursor's mark takes two columns.
                let byte = |k: usize| {
                    let k = if k > cursor { k - 2 } else { k };
                    start + shown.char_indices().nth(k).map_or(shown.len(), |c| c.0)
                };
                let marks: Vec<char> = line.chars().collect();
                let mut at = 0;
                while at < marks.len() {
                    let end = at + marks[at..].iter().take_while(|c| **c == marks[at]).count();
                    if marks[at] != ' ' {
                        expected.push((byte(at)..byte(end), marks[at] == 'v'));
                    }
                    at = end;
                }
                continue;
            }
            start = text.len();
            let plain = line.replace("$0", "");
            cursor = usize::MAX;
            if let Some(at) = line.find("$0") {
                offset = start + at;
                cursor = line[..at].chars().count();
            }
            text.push_str(&plain);
            text.push('\n');
        }
        let checked = crate::Session::new().check("swing.least", &text, &crate::include::NoFiles);
        assert_eq!(references(&checked, offset), expected, "{text}");
        if let Some((range, _)) = expected.iter().find(|(_, declared)| *declared) {
            let target = definition(&checked, offset).expect("a declaration");
            assert_eq!((target.file, target.range), (None, range.clone()));
        }
    }

    #[test]
    fn uses_of_a_coordinate() {
        check(
            "\
coordinate x: length
           v
parameter m: mass
kinetic bob = 1/2 m ẋ^2 + x$0'^2 - x  # x
                    ^     ^        ^
symmetry s: x -> x + ε
            ^    ^
conserved p = momentum(x)
                       ^
run a: from x = 1 m, x' = 0, over 1 s
            ^        ^
",
        );
    }

    #[test]
    fn bound_names_stay_in_their_scope() {
        check(
            "\
parameter k
let f(x$0) = k x^2 + sum(j in 1..3: j x)
      v        ^                      ^
let g(x) = x
",
        );
        check(
            "\
let f(x) = x^2 + sum(j$0 in 1..3: j x) + sum(j in 1..2: j)
                     v            ^
",
        );
    }

    #[test]
    fn an_index_is_one_name() {
        check(
            "\
index i: 1..3
      v
coordinate x[i$0]
             ^
kinetic T = sum(i: 1/2 x[i]'^2)
                ^        ^
let X[i] = x[i]
      ^      ^
",
        );
    }

    #[test]
    fn included_names_are_found_in_their_file() {
        let files = Folder(&[("site.least", "# the site\nparameter g = 9.81 m/s^2\n")]);
        let text = "include \"site.least\"\ncoordinate x: length\npotential weight = g x\n";
        let checked = crate::Session::new().check("swing.least", text, &files);
        let at = |word: &str| definition(&checked, text.find(word).expect("a word")).expect("a target");
        assert_eq!(at("site").file.as_deref(), Some("site.least"));
        let target = at("g x");
        assert_eq!((target.file.as_deref(), target.range), (Some("site.least"), 21..22));
    }
}
