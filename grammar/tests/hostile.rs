//! Hostile texts: read without a crash, in bounded depth, with a slip at the place.

mod common;

use common::read_all;
use leastwise_grammar::tree::Severity;
use leastwise_grammar::{CallableNames, format, parse_formula, parse_item, split};
use proptest::prelude::*;

/// Reads and formats a text; gives the codes of all slips.
fn check(text: &str) -> Vec<&'static str> {
    let slips = read_all(text).into_iter().flat_map(|(item, parsed)| {
        assert!(parsed.slips.iter().all(|s| item.get(s.span.range()).is_some()), "slips are in the text");
        parsed.slips.into_iter().map(|s| s.code)
    });
    let codes = slips.collect();
    let formatted = format(text);
    assert!(format(&formatted) == formatted, "formatting is idempotent");
    codes
}

#[test]
fn empty() {
    assert_eq!(check(""), [""; 0]);
    assert_eq!(check("\u{feff}"), [""; 0]);
    assert_eq!(check("\r"), [""; 0]);
    assert_eq!(parse_formula("", &CallableNames::default()).1.len(), 1);
    assert_eq!(parse_item("", &CallableNames::default()).slips.len(), 1);
}

#[test]
fn a_hundred_thousand_parentheses() {
    let deep = "(".repeat(100_000);
    assert_eq!(check(&format!("kinetic a = {deep}")), ["nesting"]);
    assert_eq!(check(&format!("kinetic a = {deep}x{}", ")".repeat(100_000))), ["nesting"]);
    assert_eq!(check(&format!("kinetic a = {}", ")".repeat(100_000)))[0], "unbalanced-bracket");
    assert_eq!(check(&format!("kinetic a = x{}", "[1".repeat(100_000))), ["nesting"]);
    assert!(check(&format!("kinetic a = {}", "|(".repeat(50_000))).contains(&"nesting"));
    assert!(!check(&format!("function U{deep}")).is_empty());
    assert!(!check(&format!("parameter m: {deep} = {deep}")).is_empty());
}

#[test]
fn long_chains() {
    let chain = |link: &str| format!("kinetic a = {}x", link.repeat(100_000));
    assert_eq!(check(&chain("-")), ["nesting"]);
    assert_eq!(check(&chain("x^")), ["nesting"]);
    assert_eq!(check(&chain("x + ")), [""; 0]);
    assert_eq!(check(&chain("x - ")), [""; 0]);
    assert_eq!(check(&chain("x ")), ["nesting"]);
    assert_eq!(check(&chain("x/")), ["nesting"]);
    assert_eq!(check(&format!("kinetic a = x{}", "'".repeat(100_000))), ["nesting"]);
    assert_eq!(check(&format!("kinetic a = x{}", "′".repeat(100_000))), ["nesting"]);
    assert_eq!(check(&format!("kinetic a = x{}", "[1]".repeat(100_000))), ["nesting"]);
    assert!(!check(&chain("sin ")).is_empty());
    assert!(!check(&chain("sum(i: ")).is_empty());
    assert!(!check(&chain("x²")).is_empty());
    assert!(!check(&chain("√")).is_empty());
    assert!(!check(&chain("a\n + * b")).is_empty());
}

#[test]
fn a_sum_of_many_terms_can_be_copied_compared_and_dropped() {
    let text = format!("kinetic a = {}", vec!["m x'^2"; 5_000].join(" - "));
    let item = parse_item(&text, &CallableNames::default());
    assert_eq!(item.clone(), item);
    assert!(format!("{:?}", item.item).len() > 5_000);
}

#[test]
fn five_megabytes() {
    let size = 5 << 20;
    assert_eq!(check(&"kinetic a = x\n".repeat(size / 140)), [""; 0]);
    assert_eq!(check(&"#".repeat(size)), [""; 0]);
    assert_eq!(check(&"a".repeat(size)), ["no-keyword"]);
    assert_eq!(check(&format!("let a = {}", "9".repeat(size))), ["number-size"]);
    assert!(!check(&"§ ".repeat(size / 3)).is_empty());
    assert!(!check(&format!("let a = {}", "§ ".repeat(size / 30))).is_empty());
    assert!(!check(&"garbage line\n".repeat(size / 130)).is_empty());
    assert!(!check(&format!("parameter {}", "a, ".repeat(size / 30))).is_empty());
}

#[test]
fn letters_of_every_kind() {
    assert_eq!(check("coordinate 𝑥, 𝜃̇a: length\nkinetic 1/2 𝑥̇² + 𝑥'"), [""; 0]);
    assert_eq!(check("kinetic a = \u{307}"), ["unknown-character"]);
    assert_eq!(check("let a = b\r\nlet c = d\r  + e"), [""; 0]);
    assert_eq!(check("let a = \0 b"), ["unknown-character"]);
    assert_eq!(check("let a\u{a0}= b"), [""; 0]);
    // Overlong runs of marks are one name.
    assert_eq!(check(&format!("let x{} = b", "\u{301}".repeat(10_000))), [""; 0]);
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 300, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn any_text_is_read(text in "[ -~\n\t′″°θẋ²⁻√·×→≤§|()\\[\\]]{0,120}") {
        check(&text);
    }

    #[test]
    fn any_change_of_a_model_is_read(at in 0..600_usize, cut in 0..12_usize, new in "[ -~\n²θ]{0,4}") {
        let model = include_str!("models/shaft_winch.least");
        let floor = |at: usize| (0..=at.min(model.len())).rev().find(|at| model.is_char_boundary(*at)).unwrap_or(0);
        let text = format!("{}{new}{}", &model[..floor(at)], &model[floor(at + cut)..]);
        check(&text);
        // An error is in one item, or in two that were joined.
        let broken = read_all(&text).iter().filter(|(_, p)| p.slips.iter().any(|s| s.severity == Severity::Error)).count();
        prop_assert!(broken <= 2 + new.matches('\n').count(), "{text}");
        prop_assert!(split(&text).len() > 10);
    }
}
