//! What each word of a file is, for colours.

use super::place::{Binder, binders, head_name, unit_factors};
use crate::checked::Contents;
use crate::scope::SymbolKind;
use leastwise_grammar::tree::ItemKind;
use leastwise_grammar::{KeywordRole, WordKind, keywords, read_name, words};
use std::collections::HashMap;
use std::ops::Range;

/// A word, number, comment or sign with its kind.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Token {
    /// Bytes in the file; within one line.
    pub range: Range<usize>,
    /// What it is.
    pub kind: TokenKind,
    /// More about it.
    pub modifiers: Modifiers,
}

/// What a word is.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum TokenKind {
    /// A keyword.
    Keyword,
    /// A coordinate, or time.
    Coordinate,
    /// A parameter, or a formal argument.
    Parameter,
    /// A definition.
    Definition,
    /// A function.
    Function,
    /// An input.
    Input,
    /// An index.
    Index,
    /// A quantity or unit.
    Unit,
    /// The system's name.
    System,
    /// The name of a term, force or constraint.
    Term,
    /// The name of a claim or run.
    Claim,
    /// A number.
    Number,
    /// The name of a file.
    Text,
    /// A comment.
    Comment,
    /// A sign.
    Operator,
}

/// More about a word.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Default, Debug)]
pub struct Modifiers {
    /// It is declared here.
    pub declaration: bool,
    /// It never changes: a parameter, a constant.
    pub readonly: bool,
    /// It is a time derivative.
    pub derivative: bool,
    /// It belongs to the language.
    pub built_in: bool,
}

/// Every word of the file, in order, not overlapping. Linear in the text.
pub fn tokens(checked: &Contents) -> Vec<Token> {
    let known = Known::of(checked);
    let text = &*checked.text;
    let mut out: Vec<Token> = Vec::new();
    let mut item = 0;
    let mut list = words(text).peekable();
    while let Some((span, kind)) = list.next() {
        let range = span.range();
        while checked.items.get(item).is_some_and(|i| i.range.end <= range.start) {
            item += 1;
        }
        let inside = checked.items.get(item).is_some_and(|i| i.range.start <= range.start).then_some(item);
        let plain = |kind| Some((kind, Modifiers::default()));
        let found = match kind {
            WordKind::Number | WordKind::Raised => plain(TokenKind::Number),
            WordKind::Text => plain(TokenKind::Text),
            WordKind::Comment => plain(TokenKind::Comment),
            WordKind::Prime => plain(TokenKind::Operator),
            WordKind::Sign => known
                .sign(&range)
                .or_else(|| is_operator(&text[range.clone()]).then_some(TokenKind::Operator))
                .and_then(plain),
            WordKind::Word => {
                let primed = list.peek().is_some_and(|(next, k)| *k == WordKind::Prime && next.start == span.end);
                known.word(checked, &text[range.clone()], &range, inside, primed)
            }
        };
        if let Some((kind, modifiers)) = found {
            out.push(Token { range, kind, modifiers });
        }
    }
    out
}

/// Brackets and commas are no operators; arrows and signs of arithmetic are.
fn is_operator(sign: &str) -> bool {
    !matches!(sign, "(" | ")" | "[" | "]" | "," | ":" | "{" | "}" | ";" | ".")
}

/// What is known of places, by where they begin.
#[derive(Default)]
struct Known<'c> {
    symbols: HashMap<usize, (SymbolKind, bool)>,
    by_name: HashMap<&'c str, SymbolKind>,
    bound: HashMap<usize, (Binder, bool)>,
    units: HashMap<usize, usize>,
}

impl<'c> Known<'c> {
    fn of(checked: &'c Contents) -> Known<'c> {
        let mut known = Known::default();
        for s in &checked.symbols {
            // A definition with formal arguments is a function to whoever calls it.
            let kind = if s.formals.is_empty() { s.kind } else { SymbolKind::Function };
            known.by_name.insert(&s.name, kind);
            known.symbols.extend(s.uses.iter().map(|r| (r.start, (kind, false))));
            known.symbols.extend(s.range.iter().map(|r| (r.start, (kind, true))));
        }
        let mut list = Vec::new();
        for row in &checked.items {
            let start = row.range.start;
            binders(&row.parsed.item.kind, start, &mut list);
            for f in unit_factors(&row.parsed.item.kind) {
                let at = f.symbol.span.range();
                known.units.insert(start + at.start, start + at.end);
            }
        }
        for b in list {
            for place in &b.places {
                known.bound.insert(place.start, (b.kind, b.declared.as_ref() == Some(place)));
            }
        }
        known
    }

    fn sign(&self, range: &Range<usize>) -> Option<TokenKind> {
        self.units.get(&range.start).map(|_| TokenKind::Unit)
    }

    fn word(
        &self,
        checked: &Contents,
        word: &str,
        range: &Range<usize>,
        item: Option<usize>,
        primed: bool,
    ) -> Option<(TokenKind, Modifiers)> {
        let (name, dots) = read_name(word);
        let derivative = primed || dots > 0;
        if let Some(row) = item.map(|k| &checked.items[k]) {
            let local = range.start - row.range.start..range.end - row.range.start;
            let keyword = row.parsed.item.keyword.range();
            if keyword.start <= local.start && local.end <= keyword.end {
                return Some((TokenKind::Keyword, Modifiers::default()));
            }
            if head_name(&row.parsed.item.kind).is_some_and(|n| n.span.range() == local) {
                let kind = match &row.parsed.item.kind {
                    ItemKind::System { .. } => TokenKind::System,
                    ItemKind::Symmetry { .. } | ItemKind::Conserved { .. } | ItemKind::Run { .. } => TokenKind::Claim,
                    _ => TokenKind::Term,
                };
                return Some((kind, Modifiers { declaration: true, ..Modifiers::default() }));
            }
        }
        if let Some((binder, declaration)) = self.bound.get(&range.start) {
            let kind = match binder {
                Binder::Formal | Binder::Transformation => TokenKind::Parameter,
                Binder::Sum | Binder::Member => TokenKind::Index,
            };
            return Some((kind, Modifiers { declaration: *declaration, derivative, ..Modifiers::default() }));
        }
        if self.units.contains_key(&range.start) {
            return Some((TokenKind::Unit, Modifiers::default()));
        }
        if let Some((kind, declaration)) = self.symbols.get(&range.start) {
            return Some(symbol(*kind, *declaration, derivative));
        }
        if let Some(k) = keywords().iter().find(|k| k.name == name) {
            let built_in = Modifiers { built_in: true, derivative, ..Modifiers::default() };
            return Some(match k.role {
                KeywordRole::Item | KeywordRole::Modifier | KeywordRole::Clause => {
                    (TokenKind::Keyword, Modifiers::default())
                }
                KeywordRole::Function => (TokenKind::Function, built_in),
                KeywordRole::Constant if k.name == "t" => (TokenKind::Coordinate, built_in),
                KeywordRole::Constant => (TokenKind::Parameter, Modifiers { readonly: true, ..built_in }),
            });
        }
        // In an item that could not be read a name is known by its letters alone.
        self.by_name.get(name.as_str()).map(|kind| symbol(*kind, false, derivative))
    }
}

fn symbol(kind: SymbolKind, declaration: bool, derivative: bool) -> (TokenKind, Modifiers) {
    let token = match kind {
        SymbolKind::Coordinate => TokenKind::Coordinate,
        SymbolKind::Parameter | SymbolKind::Undeclared => TokenKind::Parameter,
        SymbolKind::Input => TokenKind::Input,
        SymbolKind::Index => TokenKind::Index,
        SymbolKind::Definition => TokenKind::Definition,
        SymbolKind::Function => TokenKind::Function,
    };
    let readonly = token == TokenKind::Parameter;
    (token, Modifiers { declaration, readonly, derivative, built_in: false })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::features::models::{broken, with_models};

    /// The tokens of a text, one on a line.
    fn shown(text: &str) -> String {
        let checked = crate::Session::new().check("swing.least", text, &crate::include::NoFiles);
        let mut out = String::new();
        for t in tokens(&checked) {
            let m = t.modifiers;
            let marks = [(m.declaration, "declared"), (m.derivative, "derivative"), (m.built_in, "built in")];
            let marks: Vec<&str> = marks.iter().filter(|(on, _)| *on).map(|(_, w)| *w).collect();
            out.push_str(&format!("{:<10} {:?} {}\n", &text[t.range], t.kind, marks.join(", ")).replace(" \n", "\n"));
        }
        out
    }

    #[test]
    fn a_small_model() {
        insta::assert_snapshot!(shown(
            "system swing  # a swing\n\
             coordinate θ: angle\n\
             parameter m: mass = 2 kg, l = 1 m\n\
             let f(x) = x² sin x\n\
             kinetic bob = 1/2 m l^2 θ̇^2 + f(θ') t\n\
             force push on θ = -m θ'\n\
             symmetry turn: θ -> θ + ε\n\
             conserved h = energy\n"
        ));
    }

    #[test]
    fn words_of_a_broken_item_keep_their_kinds() {
        let text = "coordinate θ\nparameter m\nkinetic bob = 1/2 m θ'^2 + (\n";
        assert!(shown(text).contains("θ          Coordinate derivative\n"), "{}", shown(text));
        assert!(shown(text).contains("m          Parameter\n"));
    }

    #[test]
    fn tokens_are_in_order_and_within_lines() {
        with_models(|text| {
            for text in broken(text) {
                let checked = crate::Session::new().check("model.least", &text, &crate::include::NoFiles);
                let mut end = 0;
                for t in tokens(&checked) {
                    assert!(end <= t.range.start && t.range.start < t.range.end, "{t:?}");
                    let word = &text[t.range.clone()];
                    assert!(!word.contains(['\n', '\r']), "{word:?}");
                    end = t.range.end;
                }
            }
        });
    }
}
