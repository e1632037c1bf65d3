//! Renaming: every place of a name, and the promise that the model stays the same.

use super::navigation::references;
use super::place::{Binder, Thing, binders, head_name, place_at};
use crate::checked::{Checked, Contents};
use crate::codes;
use crate::database::Session;
use crate::include::{Files, shortened};
use crate::names::{likeness, title};
use crate::scope::SymbolKind;
use crate::uses::is_built_in;
use leastwise_grammar::{WordKind, begins_name, builtin, continues_name, fold_name, read_name, words};
use std::collections::HashMap;
use std::ops::Range;
use unicode_normalization::UnicodeNormalization;
use unicode_normalization::char::is_combining_mark;

/// What would be renamed.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Renamable {
    /// The name at the cursor without primes: bytes in the file. Newton's dots are in it.
    pub range: Range<usize>,
    /// The name as it is now, without dots.
    pub name: String,
}

/// What a name names, as far as its new name must be checked.
enum Named {
    /// A symbol of the whole model.
    Symbol,
    /// A name bound in one item, with its places.
    Bound(Vec<Range<usize>>),
    /// The name of the item itself.
    Head,
}

/// What can be renamed at an offset.
///
/// # Errors
/// Why nothing can, as a sentence.
pub fn prepare(checked: &Checked, offset: usize) -> Result<Renamable, String> {
    named(checked, offset).map(|(renamable, _)| renamable)
}

fn named(checked: &Contents, offset: usize) -> Result<(Renamable, Named), String> {
    let nothing = || "there is no name here".to_owned();
    let Some(place) = place_at(checked, offset) else {
        let twice = declared_twice(checked).find(|r| r.start <= offset && offset <= r.end);
        return Err(twice.map_or_else(nothing, |r| twice_declared(&fold_name(&checked.text[r]))));
    };
    let word = &checked.text[place.range.clone()];
    let row = &checked.items[place.item];
    let keyword = row.parsed.item.keyword.range();
    if place.range.start < row.range.start + keyword.end {
        return Err(format!("`{word}` is a keyword of the language"));
    }
    let renamable = Renamable { range: place.range.clone(), name: fold_name(word) };
    let of_symbol = |name: &str| match checked.symbol(name) {
        Some(s) if s.origin.is_some() => {
            let file = s.origin.as_ref().map_or("", |o| &o.0);
            let file = shortened(file.rsplit(['/', '\\']).next().unwrap_or(file));
            Err(format!("`{name}` is declared in `{file}`: rename it there"))
        }
        Some(_) if declared_twice(checked).any(|f| fold_name(&checked.text[f]) == name) => Err(twice_declared(name)),
        Some(_) => Ok(()),
        None => Err(nothing()),
    };
    match &place.thing {
        Thing::Symbol(s) => {
            of_symbol(&s.name)?;
            Ok((renamable, Named::Symbol))
        }
        Thing::Bound(b) if b.kind == Binder::Transformation => {
            Err("`ε` is the parameter of every transformation, and has no other name".into())
        }
        Thing::Bound(b) if b.kind == Binder::Member => {
            of_symbol(&b.name)?;
            Ok((renamable, Named::Symbol))
        }
        Thing::Bound(b) => Ok((renamable, Named::Bound(b.places.clone()))),
        Thing::Unit(_) => Err(format!("`{word}` is a quantity or unit of the language")),
        Thing::Word(_) => Err(format!("`{word}` is a word of the language")),
        Thing::Include => Err("a file is renamed where it is stored, not here".into()),
        _ => Ok((renamable, Named::Head)),
    }
}

/// The places of second declarations.
fn declared_twice(checked: &Contents) -> impl Iterator<Item = Range<usize>> + '_ {
    let twice = checked.findings.iter().filter(|f| f.code == codes::DECLARED_TWICE);
    twice.map(|f| f.range.clone())
}

fn twice_declared(name: &str) -> String {
    format!("`{name}` is declared twice: first take one of the declarations out")
}

impl Session {
    /// The edits of the model's own file, in order, that give the name at an offset a new one. Dots stay dots where the
    /// new name can bear them, and become primes where it can't. Both texts are read anew, so that nothing but the name
    /// changes; this session keeps what it knows.
    ///
    /// # Errors
    /// Why it can't be called so, as a sentence: the name is taken, reserved, no name, or would change what is found.
    pub fn rename(
        &mut self,
        checked: &Checked,
        offset: usize,
        name: &str,
        files: &dyn Files,
    ) -> Result<Vec<(Range<usize>, String)>, String> {
        let (old, kind) = named(checked, offset)?;
        let new = valid(name)?;
        if new == old.name {
            return Ok(Vec::new());
        }
        let mut places: Vec<Range<usize>> = references(checked, offset).into_iter().map(|(range, _)| range).collect();
        if matches!(kind, Named::Head) {
            places = vec![old.range.clone()];
        }
        free(checked, &old, &kind, &places, &new)?;
        let edits: Vec<(Range<usize>, String)> =
            places.iter().map(|range| (range.clone(), written(&checked.text, range, &new))).collect();
        same_model(checked, &edits, &old.name, &new, files)?;
        Ok(edits)
    }
}

/// The name as the language compares it, or why it is none.
fn valid(name: &str) -> Result<String, String> {
    let name = name.trim();
    let Some(first) = name.chars().next() else { return Err("a name has at least one letter".into()) };
    if name.contains(['\'', '′', '″']) {
        return Err("a name is given without primes: they stay where they are".into());
    }
    if !begins_name(first) {
        return Err(format!("a name begins with a letter, and `{first}` is none"));
    }
    if let Some(wrong) = name.chars().find(|c| !continues_name(*c)) {
        let shown = if wrong.is_whitespace() { "a space".to_owned() } else { format!("`{wrong}`") };
        return Err(format!(
            "behind its first letter a name has letters, digits, `_` and subscript digits, not {shown}"
        ));
    }
    let (folded, dots) = read_name(name);
    if dots > 0 {
        return Err(format!("`{name}` is a time derivative of `{folded}`: a name is given without dots"));
    }
    Ok(folded)
}

/// Whether nothing else has the name.
fn free(checked: &Contents, old: &Renamable, kind: &Named, places: &[Range<usize>], new: &str) -> Result<(), String> {
    if let Named::Head = kind {
        let heads = checked.items.iter().filter_map(|row| title(&row.parsed.item.kind).map(|t| (row, t)));
        let range = |start: usize, span: std::ops::Range<usize>| start + span.start..start + span.end;
        let own = |row: &crate::checked::ItemRow, t: &(u8, &leastwise_grammar::tree::Name)| {
            range(row.range.start, t.1.span.range()) == old.range
        };
        let class = heads.clone().find(|(row, t)| own(row, t)).map(|(_, t)| t.0);
        if heads.into_iter().any(|(row, t)| !own(row, &t) && Some(t.0) == class && t.1.text == new) {
            return Err(format!("another item of this kind is named `{new}` already"));
        }
        return Ok(());
    }
    if is_built_in(new) || builtin(new).is_some() || matches!(new, "sum" | "ε") {
        return Err(format!("`{new}` is a name of the language"));
    }
    let mut bound = Vec::new();
    let mut near = Vec::new();
    for row in &checked.items {
        if places.iter().any(|p| row.range.start <= p.start && p.end <= row.range.end) {
            near.push(row);
            binders(&row.parsed.item.kind, row.range.start, &mut bound);
        }
    }
    let own: &[Range<usize>] = if let Named::Bound(places) = kind { places } else { &[] };
    if bound.iter().any(|b| b.name == new && b.places != own && b.kind != Binder::Member) {
        return Err(format!("`{new}` is an argument or index in an item where `{}` stands", old.name));
    }
    match kind {
        Named::Symbol => {
            if let Some(s) = checked.symbol(new) {
                return Err(match s.kind {
                    SymbolKind::Undeclared => format!("`{new}` is used already, though it is nowhere declared"),
                    kind => format!("`{new}` is {} already", kind.described()),
                });
            }
            let like = |s: &&crate::checked::SymbolRow| {
                s.kind != SymbolKind::Undeclared && *s.name != *old.name && likeness(&s.name) == likeness(new)
            };
            if let Some(s) = checked.symbols.iter().find(like) {
                return Err(format!("`{new}` reads like `{}`, which is {} already", s.name, s.kind.described()));
            }
        }
        _ => {
            if near.iter().any(|row| row.parsed.uses.names.iter().any(|u| u.name == new)) {
                return Err(format!("`{new}` is used in the same item already, and means something else there"));
            }
        }
    }
    // What cannot be read cannot be renamed.
    for row in checked.items.iter().filter(|row| row.parsed.is_faulty()) {
        let start = row.range.start;
        for (span, word) in words(&checked.text[row.range.clone()]) {
            let at = start + span.start as usize..start + span.end as usize;
            let name = fold_name(&checked.text[at.clone()]);
            if word == WordKind::Word && matches!(kind, Named::Symbol) && !places.contains(&at) {
                let head = head_name(&row.parsed.item.kind).is_some_and(|n| n.span == span);
                if !head && (name == old.name || name == new) {
                    return Err(format!("`{name}` stands in an item with an error: mend that first"));
                }
            }
        }
    }
    Ok(())
}

/// The new name in place of a word, with the word's dots, or primes for them.
fn written(text: &str, range: &Range<usize>, new: &str) -> String {
    let word = &text[range.clone()];
    let (_, order) = read_name(word);
    // `2x` is two factors, `2e3` would be a number.
    let number = text[..range.start].ends_with(|c: char| c.is_ascii_digit())
        && new.starts_with(['e', 'E'])
        && new[1..].starts_with(|c: char| c.is_ascii_digit());
    let space = if number { " " } else { "" };
    if order == 0 {
        return format!("{space}{new}");
    }
    let decomposed: Vec<char> = new.nfd().collect();
    let marks = decomposed.iter().skip(1).take_while(|c| is_combining_mark(**c)).count();
    let (letter, rest) = decomposed.split_at((1 + marks).min(decomposed.len()));
    let dots = ["", "\u{307}", "\u{308}", "\u{20db}", "\u{20dc}"].get(order as usize).copied().unwrap_or_default();
    let dotted: String = letter.iter().copied().chain(dots.chars()).chain(rest.iter().copied()).nfc().collect();
    if !dots.is_empty() && read_name(&dotted) == (new.to_owned(), order) {
        format!("{space}{dotted}")
    } else {
        format!("{space}{new}{}", "'".repeat(order as usize))
    }
}

/// Applies edits that are in order and don't overlap.
pub(crate) fn edited(text: &str, edits: &[(Range<usize>, String)]) -> String {
    let mut out = String::with_capacity(text.len());
    let mut done = 0;
    for (range, new) in edits {
        out.push_str(&text[done..range.start]);
        out.push_str(new);
        done = range.end;
    }
    out.push_str(&text[done..]);
    out
}

/// Reads both texts and compares them: the same items, the same findings, and only this name is another.
fn same_model(
    checked: &Checked,
    edits: &[(Range<usize>, String)],
    old: &str,
    new: &str,
    files: &dyn Files,
) -> Result<(), String> {
    let after = edited(&checked.text, edits);
    let after = Session::new().check(&checked.path, &after, files);
    let otherwise = |why: &str| Err(format!("with the name `{new}` the model would not be read as it is now: {why}"));
    let mut count: HashMap<&str, isize> = HashMap::new();
    for f in &checked.findings {
        *count.entry(f.code).or_default() -= 1;
    }
    for f in &after.findings {
        *count.entry(f.code).or_default() += 1;
    }
    if let Some(f) = after.findings.iter().find(|f| count[f.code] > 0) {
        return otherwise(&f.message);
    }
    if count.values().any(|n| *n != 0) {
        return otherwise("a finding would go away");
    }
    if checked.items.len() != after.items.len() || checked.symbols.len() != after.symbols.len() {
        return otherwise("it would have other items or names");
    }
    // The same trees, and the name changed as often as it was edited.
    let mut changed = 0;
    for (a, b) in checked.items.iter().zip(&after.items) {
        match differences(&a.parsed.item.kind, &b.parsed.item.kind, old, new) {
            Some(n) => changed += n,
            None => return otherwise("one of its items would say something else"),
        }
    }
    if changed != edits.len() {
        return otherwise("the name would be lost at one of its places");
    }
    // The same bindings: nothing is captured.
    for s in &checked.symbols {
        let renamed = s.name.as_ref() == old && after.symbol(old).is_none();
        let same = after.symbol(if renamed { new } else { &s.name });
        if same.is_none_or(|b| b.kind != s.kind || b.uses.len() != s.uses.len() || b.members != s.members) {
            return otherwise(&format!("`{}` would be used elsewhere", s.name));
        }
    }
    Ok(())
}

/// In how many places two trees have the one name for the other; nothing where they differ in more than that.
fn differences<T: std::fmt::Debug>(a: &T, b: &T, old: &str, new: &str) -> Option<usize> {
    // All texts of a tree are names and numbers, which have no quotes in them; everything between them is structure.
    let (a, b) = (format!("{a:?}"), format!("{b:?}"));
    let (old, new) = (format!("{old:?}"), format!("{new:?}"));
    let (old, new) = (old.trim_matches('"'), new.trim_matches('"'));
    let (mut left, mut right) = (a.split('"'), b.split('"'));
    let mut changed = 0;
    for k in 0.. {
        match (left.next(), right.next()) {
            (None, None) => break,
            (Some(x), Some(y)) if k % 2 == 1 => {
                if x != y {
                    (x == old && y == new).then_some(())?;
                    changed += 1;
                }
            }
            (Some(x), Some(y)) if without_places(x) == without_places(y) => {}
            _ => return None,
        }
    }
    Some(changed)
}

/// Structure without `12..15`.
fn without_places(structure: &str) -> String {
    let mut out = String::with_capacity(structure.len());
    let mut pieces = structure.split("..").peekable();
    while let Some(piece) = pieces.next() {
        let more = pieces.peek().is_some();
        let piece = if out.is_empty() { piece } else { piece.trim_start_matches(|c: char| c.is_ascii_digit()) };
        let piece = if more { piece.trim_end_matches(|c: char| c.is_ascii_digit()) } else { piece };
        out.push_str(piece);
        out.push(if more { '~' } else { ' ' });
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::features::models::{broken, with_models};
    use crate::fixture::Folder;
    use crate::include::NoFiles;

    fn renamed(fixture: &str, name: &str, files: &dyn Files) -> Result<String, String> {
        let offset = fixture.find("$0").expect("a cursor");
        let text = fixture.replacen("$0", "", 1);
        let mut session = Session::new();
        let checked = session.check("swing.least", &text, files);
        prepare(&checked, offset)?;
        session.rename(&checked, offset, name, files).map(|edits| edited(&text, &edits))
    }

    /// The text with the name at `$0` replaced.
    #[track_caller]
    fn check(fixture: &str, name: &str, expected: &str) {
        assert_eq!(renamed(fixture, name, &NoFiles).as_deref(), Ok(expected));
    }

    /// Why the name at `$0` is not renamed so.
    #[track_caller]
    fn refuse(fixture: &str, name: &str, why: &str) {
        let said = renamed(fixture, name, &NoFiles).expect_err("a refusal");
        assert!(said.contains(why), "{said}");
    }

    const MODEL: &str = "\
coordinate x, y: length  # x and y
parameter m: mass = 1 kg, k: N/m
let f(s) = k s^2 + sum(j in 1..2: j s)
kinetic T = 1/2 m (x'^2 + ẏ²)
potential U = f(x) + 2k y^2
symmetry s: x -> x + ε
run a: from x = 1 m, x' = 0, over 1 s
";

    fn at(line: &str) -> String {
        let plain = line.replace("$0", "");
        assert!(MODEL.contains(&plain), "{plain}");
        MODEL.replacen(&plain, line, 1)
    }

    #[test]
    fn a_coordinate_everywhere_but_in_comments() {
        check(
            &at("f($0x)"),
            "ξ",
            "\
coordinate ξ, y: length  # x and y
parameter m: mass = 1 kg, k: N/m
let f(s) = k s^2 + sum(j in 1..2: j s)
kinetic T = 1/2 m (ξ'^2 + ẏ²)
potential U = f(ξ) + 2k y^2
symmetry s: ξ -> ξ + ε
run a: from ξ = 1 m, ξ' = 0, over 1 s
",
        );
    }

    #[test]
    fn dots_stay_where_the_name_bears_them() {
        let model = |y: &str, dotted: &str| format!("coordinate {y}\nkinetic T = {dotted}² + {dotted}^2 + y_0\n");
        let from = "coordinate y$0\nkinetic T = ẏ² + ẏ^2 + y_0\n";
        check(from, "θ", &model("θ", "θ̇"));
        check(from, "x_cart", &model("x_cart", "ẋ_cart"));
        check(from, "height", &model("height", "height'"));
        check("coordinate x$0\nkinetic T = ẍ' x\nkinetic ẋ²\n", "𝑥", "coordinate 𝑥\nkinetic T = 𝑥̈' 𝑥\nkinetic 𝑥̇²\n");
        check("coordinate x$0\nkinetic ẋ² sin ẋ ẋ'\n", "up", "coordinate up\nkinetic up'² sin up' up''\n");
        check(
            "index i: 1..3\ncoordinate x[i]\nkinetic sum(i: $0ẋ[i]^2) + ẋ[3](ẋ[1])\n",
            "len",
            "index i: 1..3\ncoordinate len[i]\nkinetic sum(i: len'[i]^2) + len'[3](len'[1])\n",
        );
    }

    #[test]
    fn bound_names_in_their_scope() {
        check(&at("f(s$0)"), "u", &MODEL.replace("f(s) = k s^2", "f(u) = k u^2").replace("j s)", "j u)"));
        check(&at("(j in 1..2: j$0 s)"), "n", &MODEL.replace("(j in 1..2: j s)", "(n in 1..2: n s)"));
        refuse(&at("f(s$0)"), "k", "`k` is used in the same item already");
        refuse(&at("f(s$0)"), "j", "`j` is an argument or index");
        refuse(&at("$0k s^2"), "s", "`s` is an argument or index");
        refuse(&at("x + $0ε"), "a", "`ε` is the parameter of every transformation");
    }

    #[test]
    fn an_index_with_its_families() {
        check(
            "index $0i: 1..3\ncoordinate x[i]\nkinetic sum(i: x'[i]^2)\nlet X[i] = x[i]\nconstraint c[i]: X[i] = i\n",
            "n",
            "index n: 1..3\ncoordinate x[n]\nkinetic sum(n: x'[n]^2)\nlet X[n] = x[n]\nconstraint c[n]: X[n] = n\n",
        );
    }

    #[test]
    fn names_of_items() {
        check(&at("kinetic $0T"), "bob", &MODEL.replace("kinetic T", "kinetic bob"));
        check(&at("run $0a:"), "sway", &MODEL.replace("run a", "run sway"));
        check("system $0swing\ncoordinate x\nkinetic x'^2\n", "sway", "system sway\ncoordinate x\nkinetic x'^2\n");
        refuse(&at("kinetic $0T"), "U", "another item of this kind is named `U`");
    }

    #[test]
    fn what_has_no_name() {
        refuse(&at("# $0x and"), "z", "there is no name here");
        refuse(&at("kin$0etic"), "z", "`kinetic` is a keyword");
        refuse(&at(": ma$0ss"), "z", "`mass` is a quantity or unit");
        refuse(&at("su$0m("), "z", "`sum` is a word of the language");
        refuse("include \"a$0.least\"\n", "b.least", "a file is renamed where it is stored");
        refuse("coordinate x\nparameter x$0\n", "z", "is declared twice");
    }

    #[test]
    fn what_is_no_name() {
        for (name, why) in [
            ("", "at least one letter"),
            ("2x", "begins with a letter"),
            ("_x", "begins with a letter"),
            ("x y", "not a space"),
            ("x+y", "not `+`"),
            ("x'", "without primes"),
            ("ẋ", "is a time derivative of `x`"),
            ("sin", "is a name of the language"),
            ("pi", "`π` is a name of the language"),
            ("t", "is a name of the language"),
            ("k", "`k` is a parameter already"),
            ("f", "`f` is a definition already"),
        ] {
            refuse(&at("f($0x)"), name, why);
        }
        refuse("coordinate θ\ncoordinate x$0\nkinetic x'^2 + θ'^2\n", "theta", "`theta` reads like `θ`");
        refuse("coordinate x$0\nkinetic q x'^2\n", "q", "`q` is used already");
    }

    #[test]
    fn what_would_be_read_otherwise() {
        refuse("coordinate x$0\nkinetic x'^2\nconserved x\n", "energy", "would not be read as it is now");
        refuse("coordinate x\nkinetic a = x'^2\nkinetic b = x'^2\nforce $0a on x = 1\n", "b", "is named `b` already");
        check("coordinate x$0\nkinetic 2x'^2\n", "e3", "coordinate e3\nkinetic 2 e3'^2\n");
    }

    #[test]
    fn a_name_in_an_item_that_cannot_be_read() {
        refuse("coordinate x$0\nkinetic x'^2\nwhat x = 1\n", "z", "stands in an item with an error");
        refuse("coordinate x$0\nkinetic x'^2\nwhat z = 1\n", "z", "stands in an item with an error");
        check("coordinate x$0\nkinetic x'^2\npotential (\n", "z", "coordinate z\nkinetic z'^2\npotential (\n");
    }

    #[test]
    fn an_undeclared_name() {
        check("coordinate x\nkinetic $0m x'^2 + m\n", "M", "coordinate x\nkinetic M x'^2 + M\n");
    }

    #[test]
    fn look_alikes_and_constants_set_to_one() {
        check("coordinate x\nkinetic µ$0 x'^2\nparameter μ\n", "ϕ", "coordinate x\nkinetic φ x'^2\nparameter φ\n");
        check(
            "system s, with c = 1\nparameter c\ncoordinate x\nkinetic $0c x'^2\n",
            "v",
            "system s, with v = 1\nparameter v\ncoordinate x\nkinetic v x'^2\n",
        );
    }

    #[test]
    fn names_of_other_files() {
        let files = Folder(&[("site.least", "parameter g = 9.81 m/s^2\nlet G = g h\n")]);
        let text = "include \"site.least\"\ncoordinate x: length\nparameter h\npotential weight = g x h G\n";
        let said = renamed(&text.replace("= g x", "= g$0 x"), "gravity", &files).expect_err("a refusal");
        assert_eq!(said, "`g` is declared in `site.least`: rename it there");
        // Another file uses it.
        let said = renamed(&text.replace("parameter h", "parameter $0h"), "height", &files).expect_err("a refusal");
        assert!(said.contains("would not be read as it is now"), "{said}");
    }

    /// While somebody types, a renaming gives the same model or a reason.
    #[test]
    fn texts_with_errors() {
        let mut done = 0;
        with_models(|text| {
            for text in broken(text) {
                let mut session = Session::new();
                let checked = session.check("model.least", &text, &NoFiles);
                for (span, _) in words(&text).step_by(3) {
                    for name in ["ζ", "e1", "on", "sum"] {
                        let Ok(edits) = session.rename(&checked, span.start as usize, name, &NoFiles) else { continue };
                        let after = edited(&text, &edits);
                        assert_eq!(after.lines().count(), text.lines().count());
                        done += 1;
                    }
                }
            }
        });
        assert!(done > 1000, "{done}");
    }

    /// Every name of every example goes to a fresh name and back.
    #[test]
    fn there_and_back() {
        let mut names = 0;
        with_models(|text| {
            let mut session = Session::new();
            let found = |session: &mut Session, text: &str| {
                let checked = session.check("model.least", text, &NoFiles);
                let derived = session.derive(&checked);
                let mut codes: Vec<&str> = session.findings(&checked, &derived).iter().map(|f| f.code).collect();
                codes.sort_unstable();
                (checked, codes)
            };
            let (checked, codes) = found(&mut session, text);
            let mut seen = std::collections::HashSet::new();
            for (span, kind) in words(text) {
                let offset = span.start as usize;
                let Ok(old) = prepare(&checked, offset) else { continue };
                let places = references(&checked, offset);
                if kind != WordKind::Word || !seen.insert(places.first().map_or(offset, |p| p.0.start)) {
                    continue;
                }
                names += 1;
                for fresh in ["ζ₁₇", "fresh"] {
                    let edits = session.rename(&checked, offset, fresh, &NoFiles).expect("a new name");
                    let there = edited(text, &edits);
                    let (after, later) = found(&mut session, &there);
                    assert_eq!(later, codes, "{there}");
                    let edits = session.rename(&after, edits[0].0.start, &old.name, &NoFiles).expect("the old name");
                    let back = edited(&there, &edits);
                    if fresh == "fresh" {
                        // Dots have become primes.
                        let (again, _) = found(&mut session, &back);
                        for (a, b) in checked.items.iter().zip(&again.items) {
                            assert_eq!(differences(&a.parsed.item.kind, &b.parsed.item.kind, "", ""), Some(0));
                        }
                    } else {
                        assert_eq!(back, text, "{}", old.name);
                    }
                }
            }
        });
        assert!(names > 150, "{names}");
    }
}
