//! Letters and signs by their names: `\theta` is θ, as in typesetting.

use super::heads::Known;
use super::{Completion, CompletionKind, plain};
use unicode_normalization::UnicodeNormalization;

/// Names of letters, without the backslash.
const LETTERS: &[(&str, &str)] = &[
    ("alpha", "α"),
    ("beta", "β"),
    ("gamma", "γ"),
    ("delta", "δ"),
    ("epsilon", "ε"),
    ("varepsilon", "ε"),
    ("zeta", "ζ"),
    ("eta", "η"),
    ("theta", "θ"),
    ("vartheta", "θ"),
    ("iota", "ι"),
    ("kappa", "κ"),
    ("lambda", "λ"),
    ("mu", "μ"),
    ("nu", "ν"),
    ("xi", "ξ"),
    ("pi", "π"),
    ("varpi", "ϖ"),
    ("rho", "ρ"),
    ("varrho", "ϱ"),
    ("sigma", "σ"),
    ("varsigma", "ς"),
    ("tau", "τ"),
    ("upsilon", "υ"),
    ("phi", "φ"),
    ("varphi", "φ"),
    ("chi", "χ"),
    ("psi", "ψ"),
    ("omega", "ω"),
    ("Gamma", "Γ"),
    ("Delta", "Δ"),
    ("Theta", "Θ"),
    ("Lambda", "Λ"),
    ("Xi", "Ξ"),
    ("Pi", "Π"),
    ("Sigma", "Σ"),
    ("Upsilon", "Υ"),
    ("Phi", "Φ"),
    ("Psi", "Ψ"),
    ("Omega", "Ω"),
    ("hbar", "ħ"),
    ("ell", "ℓ"),
];

/// Names of signs, and of what stands above or below a letter.
const SIGNS: &[(&str, &str)] = &[
    ("cdot", "·"),
    ("times", "×"),
    ("to", "→"),
    ("rightarrow", "→"),
    ("sqrt", "√"),
    ("le", "≤"),
    ("leq", "≤"),
    ("ge", "≥"),
    ("geq", "≥"),
    ("ne", "≠"),
    ("neq", "≠"),
    ("degree", "°"),
    ("prime", "′"),
    ("dot", "\u{307}"),
    ("ddot", "\u{308}"),
    ("hat", "\u{302}"),
    ("tilde", "\u{303}"),
    ("bar", "\u{304}"),
    ("_0", "₀"),
    ("_1", "₁"),
    ("_2", "₂"),
    ("_3", "₃"),
    ("_4", "₄"),
    ("_5", "₅"),
    ("_6", "₆"),
    ("_7", "₇"),
    ("_8", "₈"),
    ("_9", "₉"),
    ("^2", "²"),
    ("^3", "³"),
    ("^4", "⁴"),
    ("^5", "⁵"),
    ("^6", "⁶"),
    ("^7", "⁷"),
    ("^8", "⁸"),
    ("^9", "⁹"),
    ("^0", "⁰"),
    ("^1", "¹"),
    ("^-1", "⁻¹"),
    ("^-2", "⁻²"),
];

/// All letters and signs. The filter is the name with its backslash, as it is typed.
pub(super) fn all() -> Vec<Completion> {
    LETTERS.iter().chain(SIGNS).map(|(name, sign)| letter(sign, &format!("\\{name}"))).collect()
}

fn letter(sign: &str, typed: &str) -> Completion {
    // A mark alone would stand on the quote or space before it.
    let shown = if sign.starts_with(is_mark) { format!("◌{sign}") } else { sign.to_owned() };
    Completion {
        insert: sign.to_owned(),
        filter: typed.to_owned(),
        ..plain(&shown, CompletionKind::Letter, typed, None)
    }
}

fn is_mark(c: char) -> bool {
    ('\u{300}'..='\u{36f}').contains(&c)
}

/// The names of letters that `typed` begins, digits behind them as subscripts: θ for `the`, θ₁ for `theta1`. Not those of
/// names that the model has.
pub(super) fn begun(typed: &str, known: &[Known]) -> Vec<Completion> {
    let word = typed.trim_end_matches(|c: char| c.is_ascii_digit() || c == '_');
    let digits = typed[word.len()..].trim_start_matches('_');
    if word.len() < 2 || !word.chars().all(|c| c.is_ascii_alphabetic()) {
        return Vec::new();
    }
    let mut list: Vec<Completion> = Vec::new();
    for (name, sign) in LETTERS {
        let fits = if word.len() == typed.len() { name.starts_with(word) } else { *name == word };
        let sign = format!("{sign}{}", digits.chars().filter_map(subscript).collect::<String>());
        let there = known.iter().any(|k| k.written == sign) || matches!(sign.as_str(), "π" | "ε");
        if fits && !there && list.iter().all(|c| c.insert != sign) {
            let typed = if word.len() == typed.len() { (*name).to_owned() } else { typed.to_owned() };
            list.push(letter(&sign, &typed));
        }
    }
    list
}

/// How a name is typed on a keyboard without its letters: `theta1` for θ₁, `x'` for ẋ is told elsewhere. `None` for a name
/// that every keyboard has.
pub(super) fn spelt(name: &str) -> Option<String> {
    if name.is_ascii() {
        return None;
    }
    let mut out = String::new();
    for c in name.nfd().filter(|c| !is_mark(*c)) {
        match (c, LETTERS.iter().find(|(_, sign)| sign.starts_with(c))) {
            (_, Some((name, _))) => out.push_str(name),
            ('₀'..='₉', _) => out.extend(char::from_digit(c as u32 - '₀' as u32, 10)),
            _ => out.push(c),
        }
    }
    out.is_ascii().then_some(out)
}

fn subscript(digit: char) -> Option<char> {
    char::from_u32('₀' as u32 + digit.to_digit(10)?)
}

/// A name that begins with a backslash and ends at the cursor: where the backslash stands.
pub(super) fn backslash(before: &str) -> Option<usize> {
    let at = before.rfind('\\')?;
    let typed = &before[at + 1..];
    let good = typed.chars().all(|c| c.is_ascii_alphanumeric() || matches!(c, '^' | '_' | '-'));
    (good && typed.len() <= 12).then_some(at)
}

/// Where the name of a letter ends that begins at a backslash with `typed` and goes on with `after`: at the cursor, unless
/// both together are the name of a letter.
pub(super) fn rest(typed: &str, after: &str) -> usize {
    let more = after.find(|c: char| !c.is_ascii_alphabetic()).unwrap_or(after.len());
    let whole = format!("{}{}", typed.trim_start_matches('\\'), &after[..more]);
    if LETTERS.iter().chain(SIGNS).any(|(name, _)| *name == whole) { more } else { 0 }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_stand_once() {
        let all: Vec<&str> = LETTERS.iter().chain(SIGNS).map(|(name, _)| *name).collect();
        for (k, name) in all.iter().enumerate() {
            assert!(!all[..k].contains(name), "{name}");
        }
    }

    #[test]
    fn letters_are_those_of_names() {
        for (name, sign) in LETTERS {
            assert!(sign.chars().all(leastwise_grammar::begins_name), "{name}");
            assert_eq!(leastwise_grammar::fold_letters(sign), *sign, "{name} is told apart from its look-alike");
        }
    }

    #[test]
    fn how_names_are_typed() {
        assert_eq!(spelt("θ₁").as_deref(), Some("theta1"));
        assert_eq!(spelt("k_θ'").as_deref(), Some("k_theta'"));
        assert_eq!(spelt("Ωₘ"), None);
        assert_eq!(spelt("x₁").as_deref(), Some("x1"));
        assert_eq!(spelt("θ̂").as_deref(), Some("theta"));
        assert_eq!(spelt("m"), None);
    }

    #[test]
    fn a_backslash_begins_a_name() {
        assert_eq!(backslash("1/2 \\the"), Some(4));
        assert_eq!(backslash("r\\^2"), Some(1));
        assert_eq!(backslash("\\ x"), None);
        assert_eq!((rest("\\the", "ta x"), rest("\\Delta", "x"), rest("\\", "")), (2, 0, 0));
    }

    #[test]
    fn names_of_letters_can_be_typed_without_a_backslash() {
        let found = |typed| begun(typed, &[]).into_iter().map(|c| c.insert).collect::<Vec<_>>();
        assert_eq!(found("the"), ["θ"]);
        assert_eq!(found("theta_12"), ["θ₁₂"]);
        assert_eq!(found("t"), [""; 0]);
        assert_eq!(found("ph"), ["φ"]);
        assert_eq!(found("x1"), [""; 0]);
    }
}
