//! The call around a cursor: which function, and which of its arguments is being typed.

use super::heads::known;
use super::pieces::{Piece, before_cursor, find, open_brackets};
use super::words::item_keyword;
use crate::checked::SymbolRow;
use leastwise_grammar::{KeywordRole, WordKind, fold_name, keywords, split};
use std::ops::Range;

/// A function with its arguments.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Signature {
    /// What is shown: `atan2(y, x)`, `U(r): energy`.
    pub label: String,
    /// What the function is, or the comment that describes it.
    pub documentation: Option<String>,
    /// The arguments: bytes in the label.
    pub arguments: Vec<Range<usize>>,
    /// Which of them is being typed; the last one, where there are more.
    pub active: usize,
}

/// The innermost call that is open at an offset; `None` outside of calls, in comments, and in the head of the function's own
/// declaration. Reads the text alone, as completion does; `included` are the names that come from other files.
pub fn signature(text: &str, offset: usize, included: &[SymbolRow]) -> Option<Signature> {
    let offset = text.floor_char_boundary(offset.min(text.len()));
    let items = split(text);
    let item = items.iter().rev().find(|i| i.range.start < offset)?;
    let pieces = before_cursor(&text[item.range.start..offset])?;
    let in_head =
        matches!(item_keyword(pieces.first()?.text), Some("let" | "function")) && find(&pieces, &["="]).is_none();
    if in_head {
        return None;
    }
    for at in open_brackets(&pieces).into_iter().rev().filter(|&at| pieces[at].text == "(") {
        let Some(function) = called(&pieces[..at]) else { continue };
        let name = fold_name(function.text);
        let inside = &pieces[at + 1..];
        let own = known(&items, included, usize::MAX).into_iter().find(|k| k.name == name);
        let (label, documentation) = match own {
            Some(k) if k.is_function() => (k.detail(), k.description),
            // A product: a parameter before a bracket.
            Some(_) => continue,
            None => {
                let Some(k) = keywords().iter().find(|k| k.role == KeywordRole::Function && k.name == name) else {
                    continue;
                };
                let ranged = inside.iter().any(|p| p.text == "in");
                let mut shapes = k.follows.split(" | ");
                let shape = shapes.clone().nth(usize::from(ranged)).or_else(|| shapes.next()).unwrap_or_default();
                (format!("{}{shape}", k.name), Some(k.explanation.to_owned()))
            }
        };
        let arguments = arguments(&label);
        let active = commas(inside).min(arguments.len().saturating_sub(1));
        return Some(Signature { label, documentation, arguments, active });
    }
    None
}

/// The function whose bracket opens behind these pieces: `U`, `U'`, `u[i]`, `sin²`, `sin^2`.
fn called<'p, 't>(before: &'p [Piece<'t>]) -> Option<&'p Piece<'t>> {
    let mut rest = before;
    loop {
        rest = match rest {
            [.., last] if last.is_word() => return rest.last(),
            [before @ .., last] if matches!(last.kind, WordKind::Prime | WordKind::Raised) => before,
            [before @ .., power, last] if power.text == "^" && last.is_number() => before,
            [.., last] if last.text == "]" => &rest[..rest.iter().rposition(|p| p.text == "[")?],
            _ => return None,
        };
    }
}

/// How many arguments are complete.
fn commas(inside: &[Piece<'_>]) -> usize {
    let mut open = 0_usize;
    let mut count = 0;
    for p in inside {
        match p.text {
            "(" | "[" => open += 1,
            ")" | "]" => open = open.saturating_sub(1),
            "," if open == 0 => count += 1,
            _ => {}
        }
    }
    count
}

/// The places of the arguments in `f(x, y): energy`.
fn arguments(label: &str) -> Vec<Range<usize>> {
    let Some(open) = label.find('(').map(|at| at + 1) else { return Vec::new() };
    let close = label[open..].find(')').map_or(label.len(), |at| open + at);
    let mut start = open;
    let mut out = Vec::new();
    for part in label[open..close].split(',') {
        let leading = part.len() - part.trim_start().len();
        out.push(start + leading..start + part.trim_end().len().max(leading));
        start += part.len() + 1;
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::features::models::{broken, with_models};

    const MODEL: &str = "\
coordinate θ: angle
parameter k
function U(r, φ): energy    # of the tether
function u[i](t): force
let f(x) = x^2
";

    /// The function at `$0`, the argument that is being typed in bars.
    #[track_caller]
    fn check(line: &str, expected: Option<&str>) {
        let fixture = format!("{MODEL}{line}");
        let offset = fixture.find("$0").expect("a cursor");
        let shown = signature(&fixture.replace("$0", ""), offset, &[]).map(|s| {
            let Range { start, end } = s.arguments[s.active].clone();
            format!("{}|{}|{}", &s.label[..start], &s.label[start..end], &s.label[end..])
        });
        assert_eq!(shown.as_deref(), expected, "{line}");
    }

    #[test]
    fn functions_of_the_model() {
        check("potential V = U($0", Some("U(|r|, φ): energy"));
        check("potential V = U(r, $0", Some("U(r, |φ|): energy"));
        check("potential V = U(r, φ, $0", Some("U(r, |φ|): energy"));
        check("potential V = U'[1](r$0, φ)", Some("U(|r|, φ): energy"));
        check("potential V = f(θ + $0", Some("f(|x|) = x^2"));
        check("force a on θ = u[1]'($0)", Some("u[i](|t|): force"));
    }

    #[test]
    fn functions_of_the_language() {
        check("potential V = atan2((θ, k), $0", Some("atan2(y, |x|)"));
        check("potential V = sin²($0", Some("sin(|x|)"));
        check("potential V = sin^2($0", Some("sin(|x|)"));
        check("potential V = sum($0", Some("sum(|i: …|)"));
        check("potential V = sum(j in $0", Some("sum(|i in 1..7: …|)"));
        check("potential V = max(θ, k, 1, $0", Some("max(x, y, |…|)"));
    }

    #[test]
    fn the_innermost_call_is_meant() {
        check("potential V = U(sin($0", Some("sin(|x|)"));
        check("potential V = U(sin(θ), ($0", Some("U(r, |φ|): energy"));
        check("potential V = U(k ($0", Some("U(|r|, φ): energy"));
    }

    #[test]
    fn no_call() {
        for line in [
            "potential V = k ($0",
            "potential V = U(r, φ)$0",
            "potential V = sin θ $0",
            "potential V = U(r # $0",
            "function W(r$0",
            "let g(r$0) = 1",
            "$0",
        ] {
            check(line, None);
        }
    }

    #[test]
    fn the_comment_of_the_function_is_told() {
        let text = format!("{MODEL}potential V = U(");
        let found = signature(&text, text.len(), &[]).expect("a call");
        assert_eq!(found.documentation.as_deref(), Some("of the tether"));
    }

    #[test]
    fn every_place_of_every_text_has_an_answer() {
        with_models(|text| {
            for text in broken(text).iter().take(6) {
                for offset in (0..=text.len() + 2).step_by(7) {
                    if let Some(s) = signature(text, offset, &[]) {
                        let inside = |r: &Range<usize>| s.label.get(r.clone()).is_some_and(|a| !a.contains(','));
                        assert!(s.active < s.arguments.len() && s.arguments.iter().all(inside), "{s:?}");
                    }
                }
            }
        });
    }
}
