//! Names: how they are compared, and which of them are functions.

use std::sync::Arc;

use unicode_normalization::UnicodeNormalization;
use unicode_normalization::char::is_combining_mark;

use crate::keywords::builtin;

/// Whether a name may begin with this character.
pub fn begins_name(c: char) -> bool {
    c.is_alphabetic() && !is_combining_mark(c) && !matches!(c, 'ⁿ' | 'ⁱ' | 'ª' | 'º' | '\u{02b9}'..='\u{02bc}')
}

/// Whether a name may go on with this character.
pub fn continues_name(c: char) -> bool {
    begins_name(c) || c.is_ascii_digit() || c == '_' || ('₀'..='₉').contains(&c) || is_combining_mark(c)
}

/// The name as it is compared: NFC, look-alikes folded, Newton's dots taken off where they are derivatives.
///
/// `µ` is `μ`, `ϕ` is `φ`, `ϵ` is `ε`, `ϑ` is `θ`; `pi` is `π` and `eps` is `ε`.
pub fn fold_name(text: &str) -> String {
    read_name(text).0
}

/// The folded name and the order of the time derivative that its Newton's dots mean.
pub fn read_name(text: &str) -> (String, u32) {
    if text.is_ascii() {
        let folded = match text {
            "pi" => "π",
            "eps" => "ε",
            _ => text,
        };
        return (folded.to_owned(), 0);
    }
    let decomposed: Vec<char> = text.nfd().collect();
    let marks_end = decomposed.iter().skip(1).position(|c| !is_combining_mark(*c)).map_or(decomposed.len(), |n| n + 1);
    let order: u32 = decomposed[1.min(marks_end)..marks_end].iter().map(|c| dots(*c)).sum();
    if order > 0 && only_a_suffix(&decomposed[marks_end..]) {
        let kept = decomposed.iter().enumerate().filter(|(at, c)| *at >= marks_end || dots(**c) == 0);
        return (kept.map(|(_, c)| *c).nfc().map(fold_letter).collect(), order);
    }
    (fold_letters(text), 0)
}

/// NFC with look-alikes folded, marks kept: for units and quantities.
pub fn fold_letters(text: &str) -> String {
    if text.is_ascii() { text.to_owned() } else { text.nfc().map(fold_letter).collect() }
}

fn fold_letter(c: char) -> char {
    match c {
        'µ' => 'μ',
        'ϕ' => 'φ',
        'ϵ' => 'ε',
        'ϑ' => 'θ',
        c => c,
    }
}

/// How many of Newton's dots a combining mark shows.
fn dots(c: char) -> u32 {
    match c {
        '\u{0307}' => 1,
        '\u{0308}' => 2,
        '\u{20db}' => 3,
        '\u{20dc}' => 4,
        _ => 0,
    }
}

/// Digits and subscript digits, then nothing or `_…`.
fn only_a_suffix(rest: &[char]) -> bool {
    rest.iter().find(|c| !(c.is_ascii_digit() || ('₀'..='₉').contains(*c))).is_none_or(|c| *c == '_')
}

/// The names that are functions: `function U(…)`, `let f(…)` and the language's own.
///
/// Cheap to clone. Two sets with the same names are equal and have the same fingerprint, in every process.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct CallableNames {
    names: Arc<[String]>,
    fingerprint: u64,
}

impl CallableNames {
    /// The set of these declared functions, folded names in any order.
    pub fn new(mut names: Vec<String>) -> CallableNames {
        names.sort_unstable();
        names.dedup();
        // FNV-1a, because the hashes of the standard library may change between releases.
        let mut fingerprint = 0xcbf2_9ce4_8422_2325_u64;
        for name in &names {
            for byte in name.bytes().chain([0xff]) {
                fingerprint = (fingerprint ^ u64::from(byte)).wrapping_mul(0x0000_0100_0000_01b3);
            }
        }
        CallableNames { names: names.into(), fingerprint }
    }

    /// Whether the model declares this folded name as a function.
    pub fn declares(&self, name: &str) -> bool {
        self.names.binary_search_by(|known| known.as_str().cmp(name)).is_ok()
    }

    /// Whether this folded name is a function, the language's own included.
    pub fn contains(&self, name: &str) -> bool {
        builtin(name).is_some() || self.declares(name)
    }

    /// The declared functions' names, sorted.
    pub fn names(&self) -> &[String] {
        &self.names
    }

    /// A number that is the same for equal sets, in every process.
    pub fn fingerprint(&self) -> u64 {
        self.fingerprint
    }

    /// The declared functions that occur in `text`: an item's parse depends on no others.
    ///
    /// Linear in the text.
    pub fn occurring_in(&self, text: &str) -> CallableNames {
        if self.names.is_empty() {
            return self.clone();
        }
        CallableNames::new(words(text).map(fold_name).filter(|word| self.declares(word)).collect())
    }
}

impl Default for CallableNames {
    fn default() -> CallableNames {
        CallableNames::new(Vec::new())
    }
}

/// The maximal runs of name characters.
fn words(text: &str) -> impl Iterator<Item = &str> {
    text.split(|c: char| !continues_name(c))
        .map(|word| word.trim_start_matches(|c: char| !begins_name(c)))
        .filter(|word| !word.is_empty())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn check(text: &str, name: &str, order: u32) {
        assert_eq!(read_name(text), (name.to_owned(), order), "{text}");
    }

    #[test]
    fn newtons_dots_precomposed_and_combining() {
        check("ẋ", "x", 1);
        check("ẍ", "x", 2);
        check("x\u{0307}", "x", 1);
        check("x\u{0307}\u{0307}", "x", 2);
        check("x\u{20db}", "x", 3);
        check("θ\u{0307}₁", "θ₁", 1);
        check("ẋ_cart", "x_cart", 1);
        check("ẋ12", "x12", 1);
        check("𝑥\u{0308}", "𝑥", 2);
    }

    #[test]
    fn elsewhere_a_mark_is_part_of_the_letter() {
        check("länge", "länge", 0);
        check("ärea", "ärea", 0);
        check("la\u{0308}nge", "länge", 0);
        check("x\u{0302}", "x\u{0302}", 0);
        check("x_ẏ", "x_ẏ", 0);
    }

    #[test]
    fn a_hat_stays_under_the_dot() {
        check("x\u{0302}\u{0307}", "x\u{0302}", 1);
    }

    #[test]
    fn look_alikes_are_folded() {
        check("µ", "μ", 0);
        check("ϕ₁", "φ₁", 0);
        check("ϵ", "ε", 0);
        check("ϑ", "θ", 0);
        check("\u{2126}", "Ω", 0);
        check("pi", "π", 0);
        check("eps", "ε", 0);
        check("theta", "theta", 0);
    }

    #[test]
    fn equal_sets_are_equal_whatever_their_order() {
        let one = CallableNames::new(vec!["U".into(), "V".into()]);
        let other = CallableNames::new(vec!["V".into(), "U".into(), "V".into()]);
        assert_eq!(one, other);
        assert_eq!(one.fingerprint(), other.fingerprint());
        assert_ne!(one.fingerprint(), CallableNames::default().fingerprint());
        assert_eq!(one.occurring_in("kinetic U(r) + 2V̇").names(), ["U", "V"]);
        assert_eq!(one.occurring_in("kinetic UV").names(), [""; 0]);
        assert!(one.contains("sin") && one.contains("U") && !one.contains("k"));
    }
}
