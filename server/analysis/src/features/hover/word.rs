//! Hovers of the language's own words: keywords, functions, constants, quantities and units.

use super::writer::{SHOWN, Writer, labelled};
use crate::quantities;
use leastwise_grammar::{Keyword, KeywordRole};

/// Explains a keyword, function or constant.
pub(super) fn keyword(w: &mut Writer<'_, '_>, word: &'static Keyword, item: usize) {
    if word.name == "energy"
        && w.checked.complete
        && let Ok(answers) = &w.derived.answers
    {
        let h = answers.energy.function;
        let (text, name) = (w.text(h), super::charge::energy_name(w, h));
        w.formulas(labelled("h = ", &text, ""));
        return w.prose(if name == "energy" {
            "The energy function h = Σ p q̇ − L; here it is kinetic + potential energy"
        } else {
            "The energy function h = Σ p q̇ − L; here it is not kinetic + potential energy"
        });
    }
    let signature = match (word.role, word.follows) {
        (KeywordRole::Modifier, follows) => format!("{} {follows} …", word.name),
        (KeywordRole::Function, follows) => format!("{}{follows}", word.name),
        (_, "") => word.name.to_owned(),
        (_, follows) => format!("{} {follows}", word.name),
    };
    w.prose(format!("`{}`: {}", word.name, explanation(word)));
    if signature != word.name {
        w.formulas(
            signature.split(" | ").enumerate().map(|(k, s)| if k == 0 { s.into() } else { again(word, s) }).collect(),
        );
    }
    if let Some(more) = more(word.name) {
        w.prose(more);
    }
    if word.role == KeywordRole::Item && w.checked.items.get(item).is_some_and(|i| i.failed) {
        w.prose("This item has an error and is left out of the model.");
    }
}

/// A second form of what follows a word, with the word before it.
fn again(word: &Keyword, form: &str) -> String {
    match word.role {
        KeywordRole::Function => format!("{}{form}", word.name),
        _ => format!("{} {form}", word.name),
    }
}

fn explanation(word: &Keyword) -> &'static str {
    word.explanation
}

/// What a physicist may want to know beyond one line.
fn more(name: &str) -> Option<&'static str> {
    Some(match name {
        "kinetic" | "potential" | "lagrangian" => "L = Σ kinetic − Σ potential + Σ lagrangian.",
        "dissipation" => "Adds −∂ℱ/∂q̇ to the generalised forces.",
        "force" => "The generalised force along q is F ∂E/∂q for E(q, t), F ∂E/∂q̇ for E linear in the velocities.",
        "constraint" => {
            "Reactions Σ λ ∂f/∂q (∂f/∂q̇ where f is linear in the velocities) stand on the right side of the equations of motion."
        }
        "symmetry" => "At ε = 0 the family is the identity. What is not named stays as it is.",
        "broken" => "A warning says so if its charge is conserved after all.",
        "cyclic" => "∂L/∂q = 0: without forces along it the momentum ∂L/∂q̇ is conserved.",
        "conserved" => "`momentum(q)` and `energy` may be used in it.",
        "coordinate" => "`angle` also means the period 2π; `twist` is an angle that counts its turns.",
        "assume" => "Verdicts and prints hold under the assumptions, for example √(x²) = x where x > 0.",
        "sin" => "Derivative: cos x.",
        "cos" => "Derivative: −sin x.",
        "tan" => "Derivative: 1 + tan² x.",
        "asin" => "Derivative: 1/√(1 − x²).",
        "acos" => "Derivative: −1/√(1 − x²).",
        "atan" => "Derivative: 1/(1 + x²).",
        "atan2" => "Between −π and π; its derivative is (x dy − y dx)/(x² + y²).",
        "sinh" => "Derivative: cosh x.",
        "cosh" => "Derivative: sinh x.",
        "tanh" => "Derivative: 1 − tanh² x.",
        "exp" => "Derivative: exp x. There is no built-in e.",
        "log" => "To the base e. Derivative: 1/x.",
        "sqrt" => "Derivative: 1/(2 √x).",
        "abs" => "Derivative: sign x, where x is not 0.",
        "turn" => {
            "The columns of the matrix are the turned unit vectors; products of turns are from the outer to the inner."
        }
        "spin" => "It is the ω with ω × v = Rᵀ Ṙ v for every v.",
        "momentum" => "∂L/∂q̇.",
        "ε" => "The derivative of the family by ε, at ε = 0, is its generator.",
        _ => return None,
    })
}

/// Explains a quantity or a unit.
pub(super) fn unit(w: &mut Writer<'_, '_>, symbol: &str) {
    if let Some(d) = quantities::quantity(symbol) {
        let sixtieths = d.map(|n| n as i64 * 60);
        let usual = quantities::usual_unit(symbol, sixtieths).filter(|u| *u != base(d));
        let usual = usual.map_or(String::new(), |u| format!(", usually given in {u}"));
        w.prose(format!("Quantity `{symbol}`: {}{usual}", dimension(d)));
        match symbol {
            "angle" => w.prose("An angle has the period 2π; one that counts its turns is a `twist`."),
            "twist" => w.prose("An angle that counts its turns."),
            _ => {}
        }
        return same(w, symbol, d);
    }
    let Some(d) = quantities::unit(symbol) else {
        return w.prose(format!("`{symbol}` is not known as a quantity or unit"));
    };
    let name = unit_name(symbol).map_or(String::new(), |n| format!(", {n}"));
    w.prose(format!("Unit `{symbol}`{name}: {}", dimension(d)));
    same(w, symbol, d);
}

/// The quantities of a dimension.
fn same(w: &mut Writer<'_, '_>, but: &str, d: quantities::Dimension) {
    if d == quantities::ONE {
        return;
    }
    let names = quantities::quantity_names().filter(|n| *n != but && quantities::quantity(n) == Some(d));
    let names: Vec<String> = names.take(SHOWN).map(|n| n.replace('_', " ")).collect();
    if !names.is_empty() {
        w.prose(format!("Quantities of the same dimension: {}.", names.join(", ")));
    }
}

const BASE: [&str; 7] = ["m", "kg", "s", "A", "K", "mol", "cd"];

/// In base units, as `usual_unit` would spell it.
fn base(d: quantities::Dimension) -> String {
    let factor = |(unit, n): (&&str, i8)| match n {
        0 => None,
        1 => Some(unit.to_string()),
        n => Some(format!("{unit}^{n}")),
    };
    BASE.iter().zip(d).filter_map(factor).collect::<Vec<_>>().join(" ")
}

/// `kg m² s⁻²`, or `a number`.
fn dimension(d: quantities::Dimension) -> String {
    let raised = |n: i8| -> String {
        let digit = |c: char| match c {
            '-' => '⁻',
            '1' => '¹',
            '2' => '²',
            '3' => '³',
            c => c.to_digit(10).and_then(|n| char::from_u32(0x2070 + n)).unwrap_or(c),
        };
        if n == 1 { String::new() } else { n.to_string().chars().map(digit).collect() }
    };
    // Mass first, as in kg m² s⁻²; A s.
    let order = if d[2] > 0 && d[3] > 0 { [1, 0, 3, 2, 4, 5, 6] } else { [1, 0, 2, 3, 4, 5, 6] };
    let out: Vec<String> =
        order.iter().filter(|&&k| d[k] != 0).map(|&k| format!("{}{}", BASE[k], raised(d[k]))).collect();
    if out.is_empty() { "a number, without dimension".into() } else { out.join(" ") }
}

/// Names of units; for those outside the SI what they are in it (SI Brochure, 9th ed., tables 2, 4, 7 and 8).
const UNIT_NAMES: &[(&str, &str)] = &[
    ("m", "metre"),
    ("g", "gram"),
    ("s", "second"),
    ("A", "ampere"),
    ("K", "kelvin"),
    ("mol", "mole"),
    ("cd", "candela"),
    ("rad", "radian"),
    ("sr", "steradian"),
    ("Hz", "hertz"),
    ("N", "newton"),
    ("Pa", "pascal"),
    ("J", "joule"),
    ("W", "watt"),
    ("C", "coulomb"),
    ("V", "volt"),
    ("F", "farad"),
    ("Ω", "ohm"),
    ("S", "siemens"),
    ("Wb", "weber"),
    ("T", "tesla"),
    ("H", "henry"),
    ("lm", "lumen"),
    ("lx", "lux"),
    ("Bq", "becquerel"),
    ("Gy", "gray"),
    ("Sv", "sievert"),
    ("kat", "katal"),
    ("eV", "electronvolt, 1.602176634 × 10⁻¹⁹ J"),
    ("t", "tonne, 1000 kg"),
    ("L", "litre, 10⁻³ m³"),
    ("l", "litre, 10⁻³ m³"),
    ("min", "minute, 60 s"),
    ("h", "hour, 3600 s"),
    ("d", "day, 86 400 s"),
    ("°", "degree, π/180 rad"),
    ("deg", "degree, π/180 rad"),
    ("′", "minute of arc, π/10 800 rad"),
    ("″", "second of arc, π/648 000 rad"),
    ("r", "revolution, 2π rad"),
    ("u", "unified atomic mass unit"),
    ("Da", "dalton"),
    ("au", "astronomical unit, 149 597 870 700 m"),
    ("ha", "hectare, 10⁴ m²"),
    ("°C", "degree Celsius"),
    ("%", "per cent, 1/100"),
];

const PREFIX_NAMES: &[(&str, &str)] = &[
    ("da", "deca"),
    ("h", "hecto"),
    ("k", "kilo"),
    ("M", "mega"),
    ("G", "giga"),
    ("T", "tera"),
    ("P", "peta"),
    ("E", "exa"),
    ("Z", "zetta"),
    ("Y", "yotta"),
    ("R", "ronna"),
    ("Q", "quetta"),
    ("d", "deci"),
    ("c", "centi"),
    ("m", "milli"),
    ("μ", "micro"),
    ("n", "nano"),
    ("p", "pico"),
    ("f", "femto"),
    ("a", "atto"),
    ("z", "zepto"),
    ("y", "yocto"),
    ("r", "ronto"),
    ("q", "quecto"),
];

fn unit_name(symbol: &str) -> Option<String> {
    let plain = |s: &str| UNIT_NAMES.iter().find(|u| u.0 == s).map(|u| u.1);
    if let Some(name) = plain(symbol) {
        return Some(name.to_owned());
    }
    PREFIX_NAMES.iter().find_map(|(prefix, name)| {
        let rest = symbol.strip_prefix(prefix)?;
        // What a prefixed unit is elsewhere would have to be scaled.
        let unit = plain(rest)?.split(',').next()?;
        quantities::unit(symbol).map(|_| format!("{name}{unit}"))
    })
}
