//! What a model declares, read from the heads of its items alone.

use super::pieces::{Piece, find, parts, read, written};
use super::words::item_keyword;
use crate::checked::SymbolRow;
use crate::features::outline::one_line;
use crate::scope::SymbolKind;
use leastwise_grammar::{RawItem, continues_name, description_at, read_name};
use std::collections::HashSet;

/// A definition is looked through for names only so far.
const LOOKED_THROUGH: usize = 4096;

/// A declared name and what is written of it.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Known {
    /// The folded name.
    pub name: String,
    /// As it is declared.
    pub written: String,
    pub kind: SymbolKind,
    /// Of a family.
    pub index: Option<String>,
    /// Of a function, with or without a formula.
    pub formals: Vec<String>,
    pub quantity: String,
    /// A parameter's value, an index' range, a definition's formula.
    pub value: String,
    /// The words of a definition's formula, folded.
    pub mentions: Vec<String>,
    pub description: Option<String>,
    /// Where it is declared: the item in the file, or the other file.
    pub origin: Origin,
}

#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) enum Origin {
    Item(usize),
    File(String),
}

impl Known {
    pub fn is_function(&self) -> bool {
        self.kind == SymbolKind::Function || !self.formals.is_empty()
    }

    /// Quantity and value, formula or signature.
    pub fn detail(&self) -> String {
        let index = self.index.as_ref().map_or(String::new(), |i| format!("[{i}]"));
        let formals = match self.formals.is_empty() {
            true => String::new(),
            false => format!("({})", self.formals.join(", ")),
        };
        let mut text = if index.is_empty() && formals.is_empty() {
            String::new()
        } else {
            format!("{}{index}{formals}", self.written)
        };
        if !self.quantity.is_empty() {
            let colon = if text.is_empty() { "" } else { ": " };
            text.push_str(&format!("{colon}{}", self.quantity));
        }
        if !self.value.is_empty() {
            let sign = if self.kind == SymbolKind::Index { "" } else { "= " };
            let space = if text.is_empty() { "" } else { " " };
            text.push_str(&format!("{space}{sign}{}", self.value));
        }
        if text.is_empty() {
            let described = self.kind.described();
            text = described.split_once(' ').map_or(described, |(_, word)| word).to_owned();
        }
        if let Origin::File(file) = &self.origin {
            text.push_str(&format!(", from {file}"));
        }
        one_line(&text)
    }
}

/// The declared names in the order of the file, those of other files last. What is declared at the word under the cursor is
/// only being typed.
pub(super) fn known(items: &[RawItem], included: &[SymbolRow], cursor: usize) -> Vec<Known> {
    let mut out = Vec::new();
    for (k, item) in items.iter().enumerate() {
        let own = cursor.checked_sub(item.range.start);
        declared(item, k, own, &mut out);
    }
    out.extend(included.iter().map(of_other_file));
    let mut seen = HashSet::new();
    out.retain(|k| seen.insert(k.name.clone()));
    out
}

fn of_other_file(s: &SymbolRow) -> Known {
    let path = s.origin.as_ref().map_or("", |(path, _)| path);
    Known {
        name: s.name.to_string(),
        written: s.name.to_string(),
        kind: s.kind,
        index: s.index.as_ref().map(|i| i.to_string()),
        formals: s.formals.iter().map(|f| f.to_string()).collect(),
        quantity: s.quantity.clone().unwrap_or_default(),
        value: String::new(),
        mentions: Vec::new(),
        description: s.description.clone(),
        origin: Origin::File(path.rsplit(['/', '\\']).next().unwrap_or_default().to_owned()),
    }
}

/// The keyword of an item, and where its text goes on behind it.
fn keyword(text: &str) -> Option<(&'static str, usize)> {
    let word = |from: usize| {
        let rest = &text[from..];
        let start = from + (rest.len() - rest.trim_start_matches([' ', '\t']).len());
        let end = text[start..].find(|c| !continues_name(c)).map_or(text.len(), |at| start + at);
        (&text[start..end], end)
    };
    let (first, end) = word(0);
    match item_keyword(first)? {
        "cyclic" => {
            let (second, after) = word(end);
            Some(("coordinate", if item_keyword(second) == Some("coordinate") { after } else { end }))
        }
        other => Some((other, end)),
    }
}

/// Adds the names that an item declares.
fn declared(item: &RawItem, number: usize, cursor: Option<usize>, out: &mut Vec<Known>) {
    let Some((keyword, start)) = keyword(&item.text) else { return };
    let kind = match keyword {
        "coordinate" => SymbolKind::Coordinate,
        "parameter" => SymbolKind::Parameter,
        "input" => SymbolKind::Input,
        "index" => SymbolKind::Index,
        "let" => SymbolKind::Definition,
        "function" => SymbolKind::Function,
        _ => return,
    };
    // Of a definition the head is read, and of its formula what is shown.
    let end = match kind {
        SymbolKind::Definition => item.text.floor_char_boundary(LOOKED_THROUGH.min(item.text.len())).max(start),
        _ => item.text.len(),
    };
    let text = &item.text[start..end];
    let pieces = read(text);
    let first = out.len();
    let mut add = |name: &Piece<'_>, index: Option<&str>, formals: Vec<String>, quantity: &str, value: &str| {
        let (folded, dots) = read_name(name.text);
        let at = start + name.range.start;
        if cursor == Some(at) {
            return;
        }
        out.push(Known {
            written: if dots == 0 { name.text.to_owned() } else { folded.clone() },
            name: folded,
            kind,
            index: index.map(|i| read_name(i).0),
            formals,
            quantity: one_line(quantity),
            value: one_line(value),
            mentions: Vec::new(),
            description: description_at(&item.text, at).or_else(|| item.description.clone()),
            origin: Origin::Item(number),
        });
    };
    match kind {
        SymbolKind::Parameter => {
            for part in parts(&pieces) {
                let Some((name, index, _)) = head(part) else { continue };
                let equals = find(part, &["="]).unwrap_or(part.len());
                let colon = find(&part[..equals], &[":"]).unwrap_or(equals);
                let quantity = written(text, part.get(colon + 1..equals).unwrap_or_default());
                add(name, index, Vec::new(), quantity, written(text, part.get(equals + 1..).unwrap_or_default()));
            }
            shared(&mut out[first..]);
        }
        SymbolKind::Definition | SymbolKind::Function => {
            let Some((name, index, rest)) = head(&pieces) else { return };
            let formals = formals(rest);
            let behind = |sign| find(rest, &[sign]).map_or("", |at| written(text, &rest[at + 1..]));
            if kind == SymbolKind::Function {
                add(name, index, formals, behind(":"), "");
            } else {
                add(name, index, formals, "", behind("="));
                let formula = find(rest, &["="]).map_or(&[][..], |at| &rest[at + 1..]);
                out[first..].iter_mut().for_each(|k| k.mentions = words(formula));
            }
        }
        _ => {
            let colon = find(&pieces, &[":"]).unwrap_or(pieces.len());
            let behind = written(text, pieces.get(colon + 1..).unwrap_or_default());
            let (quantity, value) = if kind == SymbolKind::Index { ("", behind) } else { (behind, "") };
            for part in parts(&pieces[..colon]) {
                if let Some((name, index, _)) = head(part) {
                    add(name, index, Vec::new(), quantity, value);
                }
            }
        }
    }
}

/// A name, the index of a family, and what follows.
fn head<'p, 't>(pieces: &'p [Piece<'t>]) -> Option<(&'p Piece<'t>, Option<&'t str>, &'p [Piece<'t>])> {
    let (name, rest) = pieces.split_first().filter(|(name, _)| name.is_word())?;
    match rest {
        [open, index, close, rest @ ..] if open.text == "[" && index.is_word() && close.text == "]" => {
            Some((name, Some(index.text), rest))
        }
        _ => Some((name, None, rest)),
    }
}

/// The formal arguments that a head goes on with.
fn formals(rest: &[Piece<'_>]) -> Vec<String> {
    if rest.first().is_none_or(|p| p.text != "(") {
        return Vec::new();
    }
    rest.iter().take_while(|p| p.text != ")").filter(|p| p.is_word()).map(|p| read_name(p.text).0).collect()
}

fn words(formula: &[Piece<'_>]) -> Vec<String> {
    formula.iter().filter(|p| p.is_word()).map(|p| read_name(p.text).0).collect()
}

/// A name with neither quantity nor value shares those of the next.
fn shared(list: &mut [Known]) {
    for k in (1..list.len()).rev() {
        let [one, next] = &mut list[k - 1..=k] else { continue };
        if one.quantity.is_empty() && one.value.is_empty() {
            (one.quantity, one.value) = (next.quantity.clone(), next.value.clone());
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use leastwise_grammar::split;

    /// The declared names with their details.
    #[track_caller]
    fn check(text: &str, expected: &[(&str, &str)]) {
        let found = known(&split(text), &[], usize::MAX);
        let found: Vec<(&str, String)> = found.iter().map(|k| (k.written.as_str(), k.detail())).collect();
        let found: Vec<(&str, &str)> = found.iter().map(|(name, detail)| (*name, detail.as_str())).collect();
        assert_eq!(found, expected);
    }

    #[test]
    fn what_is_written_of_a_name() {
        check("parameter m: mass = 42 kg, g = 9.81 m/s^2", &[("m", "mass = 42 kg"), ("g", "= 9.81 m/s^2")]);
        check("parameter m₁, m₂: mass = 1 kg", &[("m₁", "mass = 1 kg"), ("m₂", "mass = 1 kg")]);
        check("parameter m[i] = (1, 2) kg, k", &[("m", "m[i] = (1, 2) kg"), ("k", "parameter")]);
        check("cyclic coordinate φ: angle", &[("φ", "angle")]);
        check("coordinate x, y[i]: length", &[("x", "length"), ("y", "y[i]: length")]);
        check("index i: 1..N", &[("i", "1..N")]);
        check("let P = (r sin θ, # x\n  r)", &[("P", "= (r sin θ, r)")]);
        check("let f(x, y) = x y", &[("f", "f(x, y) = x y")]);
        check("function u[i](t): force", &[("u", "u[i](t): force")]);
        check("input a", &[("a", "input")]);
    }

    #[test]
    fn what_is_broken_is_read_as_far_as_it_goes() {
        check(
            "paramter k: \nlet \nlet f(\ncoordinate x,",
            &[("k", "parameter"), ("f", "definition"), ("x", "coordinate")],
        );
        check("coordinate", &[]);
        check("parameter = 3 kg, [", &[]);
    }
}
