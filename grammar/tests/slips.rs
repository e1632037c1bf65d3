//! One slip has one message, at its place, with what to do. In the fixtures `⟦…⟧` is the place.

mod common;

use common::{marked, read_all};
use leastwise_grammar::tree::Severity;

/// Checks the only slip of a text: its place, its code, and what its first mend makes of the text (`-`: no mend).
#[track_caller]
fn check(fixture: &str, code: &str, mended: &str) {
    let (text, places) = marked(fixture);
    let mut found = Vec::new();
    let mut start = 0;
    for (item, parsed) in read_all(&text) {
        let offset = start + text[start..].find(&item).expect("items are parts of the text");
        start = offset + item.len();
        for slip in parsed.slips {
            let place = slip.span.start as usize + offset..slip.span.end as usize + offset;
            let first = slip.mends.first().map(|mend| {
                let mut text = text.clone();
                for (span, new) in mend.edits.iter().rev() {
                    text.replace_range(span.start as usize + offset..span.end as usize + offset, new);
                }
                text
            });
            assert!(!slip.message.ends_with('.') && !slip.message.is_empty());
            found.push((place, slip.code, first));
        }
    }
    let expected = (places[0].clone(), code, (mended != "-").then(|| mended.to_owned()));
    assert_eq!(found, [expected], "{text}");
    if mended != "-" {
        for (item, parsed) in read_all(mended) {
            assert!(parsed.slips.iter().all(|s| s.severity != Severity::Error), "mended to {item}: {:?}", parsed.slips);
        }
    }
}

#[test]
fn keywords() {
    check("⟦hello world⟧", "no-keyword", "# hello world");
    check("kinetic a = b\n⟦+ c⟧", "no-keyword", "kinetic a = b\n    + c");
    check("⟦potental⟧ a = b", "unknown-keyword", "potential a = b");
    check("⟦Kinetic⟧ a = b", "unknown-keyword", "kinetic a = b");
    check("⟦cyclic⟧ x: length", "missing-part", "cyclic coordinate x: length");
    check("broken ⟦symetry⟧ a: x -> x", "unknown-keyword", "broken symmetry a: x -> x");
    check("kinetic a = x\n  ⟦potential⟧ b = y", "indented-keyword", "kinetic a = x\npotential b = y");
    check("parameter m = 3 kg\n\t⟦let⟧ b = y", "indented-keyword", "parameter m = 3 kg\nlet b = y");
}

#[test]
fn a_misspelt_keyword_still_declares() {
    let (_, parsed) = read_all("cordinate x: length").swap_remove(0);
    assert_eq!(common::item(&parsed.item.kind), "coordinate x: length");
}

#[test]
fn characters_and_signs() {
    check("kinetic a = x ⟦§⟧ + y", "unknown-character", "kinetic a = x  + y");
    check("kinetic a = x ⟦§§⟧ + y", "unknown-character", "kinetic a = x  + y");
    check("kinetic a = x ⟦’§⟧ + y", "unknown-character", "-");
    check("kinetic a = x⟦’⟧", "unknown-character", "kinetic a = x'");
    check("kinetic a = x⟦ⁿ⟧", "unknown-character", "kinetic a = x^n");
    check("kinetic a ⟦==⟧ b", "wrong-sign", "kinetic a = b");
    check("let a ⟦:=⟧ b", "wrong-sign", "let a = b");
    check("kinetic a = b⟦**⟧2", "wrong-sign", "kinetic a = b^2");
    check("symmetry a: x ⟦=>⟧ x", "wrong-sign", "symmetry a: x -> x");
    check("symmetry a: x ⟦=⟧ x + ε", "wrong-sign", "symmetry a: x -> x + ε");
    check("assume a > 0⟦;⟧ b > 0", "wrong-sign", "assume a > 0, b > 0");
    check("kinetic a = 2 ⟦{⟧b + c}", "wrong-sign", "kinetic a = 2 (b + c)");
    check("include ⟦\"a.least⟧", "unterminated-text", "include \"a.least\"");
    check("include ⟦a.least⟧", "missing-part", "include \"a.least\"");
}

#[test]
fn numbers() {
    check("kinetic a = ⟦.5⟧ x", "number-form", "kinetic a = 0.5 x");
    check("kinetic a = ⟦5.⟧ x", "number-form", "kinetic a = 5 x");
    check("kinetic a = 1.5⟦.⟧2 x", "number-form", "-");
    check("parameter m = ⟦1,5⟧ kg", "decimal-comma", "parameter m = 1.5 kg");
    check("kinetic a = ⟦0,5⟧ m x'^2", "decimal-comma", "kinetic a = 0.5 m x'^2");
    check("let a = ⟦1e1000000000⟧", "number-size", "-");
    check("let a = ⟦1e99999999999999⟧", "number-size", "-");
    check("let a = x⟦²⁻⟧", "number-form", "-");
}

#[test]
fn brackets() {
    check("kinetic a = ⟦(⟧b + c", "unbalanced-bracket", "kinetic a = (b + c)");
    check("kinetic a = b + c⟦)⟧", "unbalanced-bracket", "kinetic a = b + c");
    check("kinetic a = (b + c⟦]⟧", "unbalanced-bracket", "kinetic a = (b + c)");
    check("kinetic a = ⟦|⟧b", "unbalanced-bracket", "kinetic a = |b|");
    check("kinetic a = (⟦|⟧b) c", "unbalanced-bracket", "kinetic a = (|b|) c");
    check("function U⟦(⟧r: energy", "unbalanced-bracket", "function U(r): energy");
    check("let f⟦(⟧x, y = x", "unbalanced-bracket", "let f(x, y) = x");
}

#[test]
fn operands() {
    check("kinetic a = b ⟦+⟧", "missing-operand", "kinetic a = b ");
    check("kinetic a = ⟦*⟧ b", "missing-operand", "kinetic a =  b");
    check("kinetic a = ⟦+⟧ b", "missing-operand", "kinetic a =  b");
    check("kinetic a = b ⟦+ *⟧ c", "missing-operand", "kinetic a = b +  c");
    check("kinetic a = 2 (b ⟦+⟧ ) c", "missing-operand", "kinetic a = 2 (b  ) c");
    check("kinetic a = ⟦()⟧", "missing-operand", "-");
    check("kinetic a ⟦=⟧", "missing-operand", "-");
    check("kinetic a = f(b⟦,⟧)", "missing-operand", "kinetic a = f(b)");
    check("kinetic a = b⟦,⟧ c", "unexpected", "-");
    check("kinetic a = b ⟦<⟧ c", "unexpected", "-");
    check("kinetic a = b ⟦=⟧ c", "unexpected", "-");
    check("assume m ⟦>⟧", "missing-operand", "-");
    check("assume ⟦m⟧", "missing-part", "-");
    check("kinetic a = b⟦²^⟧3", "unexpected", "-");
    check("kinetic a = ⟦sum⟧(i, x)", "missing-part", "-");
    check("kinetic a = sum(i in 1⟦..⟧: x)", "missing-operand", "-");
}

#[test]
fn two_slips_have_two_messages() {
    let (_, parsed) = read_all("let a = (b + , c *)").swap_remove(0);
    let codes: Vec<&str> = parsed.slips.iter().map(|s| s.code).collect();
    assert_eq!(codes, ["missing-operand", "missing-operand"]);
    assert_eq!(common::item(&parsed.item.kind), "let a = <?, ?>");
}

#[test]
fn a_product_ends_with_its_line() {
    check("kinetic a = b\n    ⟦c⟧", "missing-operator", "kinetic a = b\n    + c");
    check("kinetic a = 1/2 m x'^2\n    ⟦1⟧/2 m y'^2", "missing-operator", "kinetic a = 1/2 m x'^2\n    + 1/2 m y'^2");
}

#[test]
fn arguments_without_parentheses() {
    check("kinetic a = ⟦sin 2θ⟧", "function-argument", "kinetic a = sin(2θ)");
    check("kinetic a = ⟦sin 2 θ⟧ cos φ", "function-argument", "kinetic a = sin(2 θ) cos φ");
    check("kinetic a = ⟦sin θ²⟧", "function-power", "kinetic a = sin(θ²)");
    check("kinetic a = ⟦sin θ^2⟧ b", "function-power", "kinetic a = sin(θ^2) b");
    check("kinetic a = ⟦sin cos θ⟧", "function-argument", "kinetic a = sin(cos θ)");
    check("kinetic a = ⟦sin -θ⟧", "function-argument", "kinetic a = sin(-θ)");
    check("kinetic a = ⟦sin |b|⟧", "function-argument", "kinetic a = sin(|b|)");
    check("kinetic a = ⟦sin⟧ + b", "function-argument", "-");
    check("kinetic a = ⟦atan2 b⟧", "function-argument", "kinetic a = atan2(b)");
    check("kinetic a = ⟦√2x⟧", "function-argument", "kinetic a = √(2x)");
    check("kinetic a = ⟦√x²⟧", "function-power", "kinetic a = √(x²)");
    check("kinetic a = ⟦sin⁻¹⟧ θ", "inverse-or-reciprocal", "kinetic a = asin θ");
    check("kinetic a = ⟦sin^-1⟧ θ", "inverse-or-reciprocal", "kinetic a = asin θ");
}

#[test]
fn both_readings_are_offered() {
    let (text, parsed) = read_all("kinetic a = sin θ²").swap_remove(0);
    let readings: Vec<String> = parsed.slips[0]
        .mends
        .iter()
        .map(|mend| {
            let (span, new) = &mend.edits[0];
            let mut text = text.clone();
            text.replace_range(span.range(), new);
            text
        })
        .collect();
    assert_eq!(readings, ["kinetic a = sin(θ²)", "kinetic a = sin(θ)²"]);
}

#[test]
fn derivatives() {
    check("kinetic a = r^⟦2'⟧", "prime-on-power", "kinetic a = (r^2)'");
    check("kinetic a = r⟦²'⟧", "prime-on-power", "kinetic a = (r²)'");
    check("kinetic a = ⟦2'⟧", "prime-on-power", "-");
    check("kinetic a = ⟦sin'⟧(x)", "derivative-mark", "-");
    check("kinetic a = ⟦U̇⟧(x)\nfunction U(x)", "dotted-function", "kinetic a = U'(x)\nfunction U(x)");
    check("kinetic a = U⟦'[x]⟧(x)\nfunction U(x)", "derivative-mark", "-");
    check("coordinate ⟦ẋ⟧: length", "declared-derivative", "coordinate x: length");
    check("coordinate ⟦x'⟧: length", "declared-derivative", "coordinate x: length");
}

#[test]
fn heads() {
    check("coordinate ⟦x y⟧: length", "missing-separator", "coordinate x, y: length");
    check("coordinate ⟦x length⟧", "missing-separator", "coordinate x: length");
    check("coordinate x⟦:⟧", "missing-part", "-");
    check("coordinate x: length⟦,⟧ y: angle", "unexpected", "coordinate x: length\ncoordinate y: angle");
    check("coordinate ⟦2⟧x: length", "missing-name", "-");
    check("coordinate ⟦:⟧ length", "missing-name", "-");
    check("⟦coordinate⟧", "missing-name", "-");
    check("kinetic bob ⟦1⟧/2 m", "missing-equals", "kinetic bob = 1/2 m");
    check("kinetic ⟦bob two⟧ = m", "head-name", "kinetic bob_two = m");
    check("kinetic ⟦m[i]⟧ = x[i]", "head-name", "-");
    check("kinetic ⟦=⟧ x", "missing-name", "kinetic  x");
    check("let P ⟦(⟧r sin θ, r)", "missing-equals", "let P = (r sin θ, r)");
    check("let f(x) ⟦x⟧", "missing-equals", "let f(x) = x");
    check("function ⟦U⟧: energy", "missing-part", "-");
    check("system ⟦a b⟧", "head-name", "system a_b");
    check("symmetry ⟦a b⟧: x -> x", "head-name", "symmetry a_b: x -> x");
    check("system a, ⟦dimensionles⟧", "system-option", "system a, dimensionless");
    check("system a, with c = ⟦2⟧", "system-option", "-");
    check("⟦index i⟧", "missing-part", "-");
}

#[test]
fn forces_constraints_symmetries() {
    check("force ⟦brake at⟧ r = F", "missing-part", "force brake on r = F");
    check("force ⟦brake r⟧ = F", "missing-part", "force brake on r = F");
    check("force ⟦r⟧ = F", "missing-part", "force on r = F");
    check("force ⟦on⟧ = F", "missing-part", "-");
    check("⟦constraint rod: x^2⟧", "missing-equals", "-");
    check("⟦symmetry a: x⟧", "missing-part", "-");
    check("symmetry a: (x, y) -> ⟦(x, y, z)⟧", "transformation-count", "-");
    check("symmetry a: ⟦x'⟧ -> x", "transformation-source", "-");
    check("symmetry a: x ⟦->⟧", "missing-operand", "-");
}

#[test]
fn values_and_units() {
    check("parameter ⟦m 3⟧ kg", "missing-equals", "parameter m = 3 kg");
    check("parameter m: mass ⟦=⟧", "missing-operand", "-");
    check("parameter m = ⟦kg⟧", "value-form", "-");
    check("parameter α = ⟦π⟧/4 rad", "value-form", "-");
    check("parameter m = ⟦3 4⟧ kg", "value-form", "parameter m = 3 * 4 kg");
    check("parameter b = 3 ⟦N/m s⟧", "quotient-unit", "parameter b = 3 N/(m s)");
    check("parameter b: ⟦N/m/s⟧ = 2", "quotient-unit", "parameter b: N/(m s) = 2");
    check("parameter b = 3 ⟦/m s⟧", "quotient-unit", "parameter b = 3 /(m s)");
    check("parameter b = 30⟦'⟧", "value-form", "parameter b = 30′");
    check("let a = 30⟦°⟧", "unit-in-formula", "let a = (30 π/180)");
}

#[test]
fn runs() {
    check("run ⟦a⟧", "missing-part", "-");
    check("run ⟦a⟧ from x = 1 m", "missing-separator", "run a: from x = 1 m");
    check("run a: from x = 3 m ⟦over⟧ 2 s", "missing-separator", "run a: from x = 3 m, over 2 s");
    check("run a: ⟦form⟧ x = 3 m", "unknown-keyword", "run a: from x = 3 m");
    check("run a: over 3 s, ⟦over 3 s⟧", "clause-twice", "-");
    check("run a: from x ⟦3⟧, over 3 s", "missing-equals", "-");
}

#[test]
fn nesting_beyond_256_levels() {
    for (open, close) in [("(", ")"), ("-", ""), ("2^", ""), ("|x + norm(", ")|")] {
        let text = format!("kinetic a = {}x{}", open.repeat(300), close.repeat(300));
        let (_, parsed) = read_all(&text).swap_remove(0);
        let codes: Vec<&str> = parsed.slips.iter().map(|s| s.code).filter(|c| *c != "nested-bars").collect();
        assert_eq!(codes, ["nesting"], "{open}");
    }
    let text = format!("kinetic a = {}x{}", "(".repeat(256), ")".repeat(256));
    assert_eq!(read_all(&text)[0].1.slips, []);
}

#[test]
fn what_follows_from_a_slip_is_not_told() {
    let codes: Vec<&str> = read_all("kinetic a = 1/2 m §P'|^2")[0].1.slips.iter().map(|s| s.code).collect();
    assert_eq!(codes, ["unknown-character"]);
    check("kinetic a = |⟦(⟧r'|^2", "unbalanced-bracket", "kinetic a = |(r')|^2");
    check("kinetic a = |(⟦|⟧b|)|", "nested-bars", "-");
    check("kinetic ⟦=⟧ a = b", "missing-name", "kinetic  a = b");
    check("symmetry a: (x, y) -> (x ⟦+⟧, y)", "missing-operand", "symmetry a: (x, y) -> (x , y)");
    check("force a on r ⟦,⟧ F", "unexpected", "-");
    check("let a = b ⟦cos ^⟧ φ", "function-power", "-");
}
