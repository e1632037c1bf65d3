//! Letters and signs by their names: `\theta` is θ, as in typesetting.

/// Names of letters and signs, without the backslash.
const NAMES: &[(&str, &str)] = &[
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
    ("rho", "ρ"),
    ("varrho", "ϱ"),
    ("sigma", "σ"),
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
    ("cdot", "·"),
    ("times", "×"),
    ("to", "→"),
    ("sqrt", "√"),
    ("le", "≤"),
    ("ge", "≥"),
    ("ne", "≠"),
    ("degree", "°"),
    ("dot", "\u{0307}"),
    ("ddot", "\u{0308}"),
    ("0", "₀"),
    ("1", "₁"),
    ("2", "₂"),
    ("3", "₃"),
    ("4", "₄"),
    ("5", "₅"),
    ("6", "₆"),
    ("7", "₇"),
    ("8", "₈"),
    ("9", "₉"),
    ("^2", "²"),
    ("^3", "³"),
    ("^4", "⁴"),
];

/// All names with what they stand for.
pub(super) fn all() -> impl Iterator<Item = (&'static str, &'static str)> {
    NAMES.iter().copied()
}

/// The Greek letter that is called so.
pub(super) fn greek(name: &str) -> Option<&'static str> {
    all().find(|(n, s)| *n == name && s.chars().all(|c| ('Α'..='ω').contains(&c))).map(|(_, s)| s)
}

/// How a letter is typed on a keyboard that lacks it.
pub(super) fn spelt(name: &str) -> Option<String> {
    let mut letters = name.chars();
    let first = letters.next()?.to_string();
    let (word, _) = all().find(|(n, s)| *s == first && greek(n).is_some())?;
    Some(format!("{word}{}", letters.as_str()))
}

/// A name that begins with a backslash and ends at the cursor: where the backslash stands.
pub(super) fn begun(before: &str) -> Option<usize> {
    let at = before.rfind('\\')?;
    let typed = &before[at + 1..];
    let good = typed.chars().all(|c| c.is_ascii_alphanumeric() || c == '^');
    (good && typed.len() <= 12).then_some(at)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_stand_once() {
        for (k, (name, _)) in NAMES.iter().enumerate() {
            assert!(NAMES[..k].iter().all(|(n, _)| n != name), "{name}");
        }
    }

    #[test]
    fn letters_and_their_names() {
        assert_eq!(greek("theta"), Some("θ"));
        assert_eq!(greek("cdot"), None);
        assert_eq!(spelt("θ₁"), Some("theta₁".into()));
        assert_eq!(spelt("x"), None);
        assert_eq!(begun("1/2 \\the"), Some(4));
        assert_eq!(begun("\\ x"), None);
    }
}
