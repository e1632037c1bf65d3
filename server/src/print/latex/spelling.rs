//! Names and text in LaTeX.

use std::fmt::Write;
use unicode_normalization::UnicodeNormalization;

/// Text for LaTeX: special signs escaped, Greek letters and signs as mathematics.
///
/// What stands between two backquotes is set as code.
pub fn escape(text: &str) -> String {
    let mut out = String::new();
    let mut quotes = text.matches('`').count();
    let mut code = false;
    let mut chars = text.nfd().peekable();
    while let Some(c) = chars.next() {
        if let Some(accent) = chars.peek().and_then(|mark| accent(c, *mark)) {
            chars.next();
            let base = sign(c).map_or_else(|| c.to_string(), String::from);
            let _ = write!(out, "\\ensuremath{{{accent}{{{base}}}}}");
            continue;
        }
        // The decomposed sign of what is not equal.
        if c == '=' && chars.next_if_eq(&'\u{338}').is_some() {
            out.push_str("\\ensuremath{\\ne}");
            continue;
        }
        match c {
            '`' if code || quotes > 1 => {
                out.push_str(if code { "}" } else { "\\texttt{" });
                code = !code;
                quotes -= 1;
            }
            '\\' => out.push_str("\\textbackslash{}"),
            '{' | '}' | '$' | '&' | '#' | '_' | '%' => {
                out.push('\\');
                out.push(c);
            }
            '^' => out.push_str("\\textasciicircum{}"),
            '~' => out.push_str("\\textasciitilde{}"),
            '`' => out.push_str("\\textquoteleft{}"),
            '"' => out.push_str("''"),
            '<' => out.push_str("\\ensuremath{<}"),
            '>' => out.push_str("\\ensuremath{>}"),
            '|' => out.push_str("\\textbar{}"),
            c if c.is_control() => out.push(' '),
            c => match sign(c) {
                Some(command) => {
                    let _ = write!(out, "\\ensuremath{{{command}}}");
                }
                None => out.push(c),
            },
        }
    }
    out.nfc().collect()
}

/// Newton's dots, which few fonts have on every letter; other marks, and those of `ä` or `ö`, stay text.
fn accent(letter: char, mark: char) -> Option<&'static str> {
    match mark {
        '\u{307}' => Some("\\dot"),
        '\u{308}' if !"aeiouyAEIOUY".contains(letter) => Some("\\ddot"),
        _ => None,
    }
}

/// A coordinate's name as a symbol: `θ₁`, `x[3]`, `m_cart`.
pub fn symbol(name: &str) -> String {
    let (name, index) = match name.split_once('[') {
        Some((name, index)) => (name, Some(index.trim_end_matches(']'))),
        None => (name, None),
    };
    let mut letters = name.chars().peekable();
    let (mut base, mut below) = (String::new(), String::new());
    while let Some(c) = letters.next_if(|c| !is_below(*c)) {
        base.push(c);
    }
    for c in letters {
        match subscript(c) {
            Some(d) => below.push(d),
            None if c == '_' && below.is_empty() => {}
            None => below.push(c),
        }
    }
    let spelled = |text: &str| -> String {
        let mut out = String::new();
        for c in text.chars() {
            match sign(c) {
                Some(command) => {
                    let _ = write!(out, "{command} ");
                }
                None if c == '_' => out.push_str("\\_"),
                None => out.push(c),
            }
        }
        out.trim_end().to_string()
    };
    let word = |text: &str| {
        let letters = text.chars().filter(|c| !c.is_numeric()).count();
        if letters > 1 { format!("\\mathrm{{{}}}", spelled(text)) } else { spelled(text) }
    };
    let parts: Vec<String> =
        [(!below.is_empty()).then(|| word(&below)), index.map(spelled)].into_iter().flatten().collect();
    if parts.is_empty() { word(&base) } else { format!("{}_{{{}}}", word(&base), parts.join(",")) }
}

fn is_below(c: char) -> bool {
    c == '_' || c.is_ascii_digit() || subscript(c).is_some()
}

fn subscript(c: char) -> Option<char> {
    let code = c as u32;
    (0x2080..=0x2089).contains(&code).then(|| char::from(b'0' + (code - 0x2080) as u8))
}

/// The LaTeX command of a Greek letter or a sign.
fn sign(c: char) -> Option<&'static str> {
    Some(match c {
        'α' => "\\alpha",
        'β' => "\\beta",
        'γ' => "\\gamma",
        'δ' => "\\delta",
        'ε' => "\\varepsilon",
        'ζ' => "\\zeta",
        'η' => "\\eta",
        'θ' => "\\theta",
        'ι' => "\\iota",
        'κ' => "\\kappa",
        'λ' => "\\lambda",
        'μ' | 'µ' => "\\mu",
        'ν' => "\\nu",
        'ξ' => "\\xi",
        'ο' => "o",
        'π' => "\\pi",
        'ρ' => "\\rho",
        'σ' | 'ς' => "\\sigma",
        'τ' => "\\tau",
        'υ' => "\\upsilon",
        'φ' => "\\varphi",
        'χ' => "\\chi",
        'ψ' => "\\psi",
        'ω' => "\\omega",
        'ϕ' => "\\phi",
        'ϑ' => "\\vartheta",
        'ϵ' => "\\epsilon",
        'Γ' => "\\Gamma",
        'Δ' => "\\Delta",
        'Θ' => "\\Theta",
        'Λ' => "\\Lambda",
        'Ξ' => "\\Xi",
        'Π' => "\\Pi",
        'Σ' => "\\Sigma",
        'Υ' => "\\Upsilon",
        'Φ' => "\\Phi",
        'Ψ' => "\\Psi",
        'Ω' => "\\Omega",
        'Α' => "A",
        'Β' => "B",
        'Ε' => "E",
        'Ζ' => "Z",
        'Η' => "H",
        'Ι' => "I",
        'Κ' => "K",
        'Μ' => "M",
        'Ν' => "N",
        'Ο' => "O",
        'Ρ' => "P",
        'Τ' => "T",
        'Χ' => "X",
        '∂' => "\\partial",
        '→' => "\\to",
        '≥' => "\\ge",
        '≤' => "\\le",
        '≠' => "\\ne",
        '√' => "\\surd",
        '·' => "\\cdot",
        '×' => "\\times",
        '°' => "^\\circ",
        '′' => "'",
        '″' => "''",
        '−' => "-",
        '∞' => "\\infty",
        '±' => "\\pm",
        '²' => "^2",
        '³' => "^3",
        '¹' => "^1",
        '₀' => "_0",
        '₁' => "_1",
        '₂' => "_2",
        '₃' => "_3",
        '₄' => "_4",
        '₅' => "_5",
        '₆' => "_6",
        '₇' => "_7",
        '₈' => "_8",
        '₉' => "_9",
        '⁰' => "^0",
        '⁴' => "^4",
        '⁵' => "^5",
        '⁶' => "^6",
        '⁷' => "^7",
        '⁸' => "^8",
        '⁹' => "^9",
        '⁻' => "^-",
        'ħ' => "\\hbar",
        'ℝ' => "\\mathbf{R}",
        '⊕' => "\\oplus",
        '⟨' => "\\langle",
        '⟩' => "\\rangle",
        'ℱ' => "\\mathcal{F}",
        _ => return None,
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_become_symbols() {
        for (name, expected) in [
            ("x", "x"),
            ("θ₁", "\\theta_{1}"),
            ("x[3]", "x_{3}"),
            ("m_cart", "m_{\\mathrm{cart}}"),
            ("v0", "v_{0}"),
            ("länge", "\\mathrm{länge}"),
            ("x₁[i + 1]", "x_{1,i + 1}"),
            ("φ", "\\varphi"),
            ("k_m", "k_{m}"),
        ] {
            assert_eq!(symbol(name), expected, "{name}");
        }
    }

    #[test]
    fn text_is_escaped() {
        assert_eq!(escape("a_b & 50 % of $θ$"), "a\\_b \\& 50 \\% of \\$\\ensuremath{\\theta}\\$");
        assert_eq!(escape("ẋ₁, θ̈, ä"), "\\ensuremath{\\dot{x}}\\ensuremath{_1}, \\ensuremath{\\ddot{\\theta}}, ä");
        assert_eq!(escape("`a_b` and `"), "\\texttt{a\\_b} and \\textquoteleft{}");
        assert_eq!(escape("q ≠ 0"), "q \\ensuremath{\\ne} 0");
        assert_eq!(escape("\\input{x}"), "\\textbackslash{}input\\{x\\}");
    }
}
