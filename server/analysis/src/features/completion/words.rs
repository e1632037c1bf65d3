//! The words of the language: keywords where they can stand, functions, constants.

use super::pieces::read;
use super::{Completion, CompletionKind, plain};
use leastwise_grammar::{Keyword, KeywordRole, RawItem, keywords, nearest};

/// The keywords that begin an item, modifiers among them.
fn item_keywords() -> impl Iterator<Item = &'static Keyword> {
    keywords().iter().filter(|k| matches!(k.role, KeywordRole::Item | KeywordRole::Modifier))
}

/// The keyword or modifier that an item begins with; a misspelt one is read as what was meant.
pub(super) fn item_keyword(word: &str) -> Option<&'static str> {
    let names = || item_keywords().map(|k| k.name);
    names().find(|name| *name == word).or_else(|| nearest(word, names()))
}

/// A keyword with its shape.
pub(super) fn keyword(name: &str) -> Option<Completion> {
    let clause = |k: &&Keyword| !matches!(k.role, KeywordRole::Function | KeywordRole::Constant);
    let k = keywords().iter().filter(clause).find(|k| k.name == name)?;
    let shape = format!("{} {}", k.name, k.follows);
    Some(plain(k.name, CompletionKind::Keyword, shape.trim_end(), Some(k.explanation.to_owned())))
}

/// What can begin an item, in the order in which a model is written. `above` are the items before it, `below` those behind;
/// `follows` is what stands behind the cursor.
pub(super) fn items(above: &[RawItem], below: &[RawItem], follows: &str) -> Vec<Completion> {
    let is_system =
        |item: &RawItem| read(item.text.lines().next().unwrap_or_default()).first().is_some_and(|p| p.text == "system");
    let first = above.is_empty() && !below.iter().any(is_system);
    let mut list = Vec::new();
    let modifiers: Vec<&Keyword> = item_keywords().filter(|k| k.role == KeywordRole::Modifier).collect();
    for k in item_keywords().filter(|k| k.role == KeywordRole::Item && (k.name != "system" || first)) {
        list.extend(keyword(k.name));
        // A modifier stands beside what it modifies, and brings it along where it is not there yet.
        for m in modifiers.iter().filter(|m| m.follows == k.name) {
            let there = follows.trim_start().starts_with(k.name);
            let both = if there { m.name.to_owned() } else { format!("{} {}", m.name, k.name) };
            let shape = format!("{} {} {}", m.name, k.name, k.follows);
            list.push(plain(&both, CompletionKind::Keyword, &shape, Some(m.explanation.to_owned())));
        }
    }
    list
}

/// Functions of the language that can stand in a formula, `sum` first where there are families.
pub(super) fn functions(families: bool) -> Vec<Completion> {
    let mut list: Vec<Completion> = of(KeywordRole::Function).filter(|c| c.label != "momentum").collect();
    list.sort_by_key(|c| !(families && c.label == "sum"));
    list
}

/// `t`, `π` and the unit vectors.
pub(super) fn constants() -> Vec<Completion> {
    of(KeywordRole::Constant).filter(|c| !matches!(c.label.as_str(), "ε" | "energy")).collect()
}

/// What a claimed constant alone may speak of.
pub(super) fn of_claims() -> Vec<Completion> {
    let both = ["energy", "momentum"];
    let all = || of(KeywordRole::Constant).chain(of(KeywordRole::Function));
    both.into_iter().filter_map(|name| all().find(|c| c.label == name)).collect()
}

/// A constant of the language.
pub(super) fn constant(name: &str) -> Option<Completion> {
    of(KeywordRole::Constant).find(|c| c.label == name)
}

fn of(role: KeywordRole) -> impl Iterator<Item = Completion> {
    keywords().iter().filter(move |k| k.role == role).map(|k| {
        let (kind, detail) = match k.role {
            KeywordRole::Function => {
                (CompletionKind::Function, k.follows.split(" | ").map(|f| format!("{}{f}", k.name)).collect::<Vec<_>>())
            }
            _ => (CompletionKind::Constant, Vec::new()),
        };
        // A constant has no arguments to show, so that it shows what it is.
        let detail = if detail.is_empty() { k.explanation.to_owned() } else { detail.join(" | ") };
        plain(k.name, kind, &detail, Some(k.explanation.to_owned()))
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn misspelt_keywords_are_read_as_what_was_meant() {
        assert_eq!(item_keyword("potental"), Some("potential"));
        assert_eq!(item_keyword("broken"), Some("broken"));
        assert_eq!(item_keyword("mass"), None);
        assert_eq!(item_keyword(""), None);
    }

    #[test]
    fn every_modifier_stands_beside_its_keyword() {
        let labels: Vec<String> = items(&[], &[], "").into_iter().map(|c| c.label).collect();
        for both in ["cyclic coordinate", "broken symmetry"] {
            assert!(labels.iter().any(|l| l == both), "{labels:?}");
        }
    }

    #[test]
    fn shapes_say_what_follows() {
        assert_eq!(keyword("kinetic").map(|c| c.detail).as_deref(), Some("kinetic NAME = FORMULA"));
        assert_eq!(keyword("dimensionless").map(|c| c.detail).as_deref(), Some("dimensionless"));
        assert_eq!(constant("π").map(|c| c.detail).as_deref(), Some("the number π, also pi"));
    }
}
