//! The words of a text as somebody sees them who only looks at it.

use leastwise_grammar::{WordKind, words};
use proptest::prelude::*;

#[track_caller]
fn check(text: &str, expected: &[(&str, WordKind)]) {
    let found: Vec<(&str, WordKind)> = words(text).map(|(span, kind)| (&text[span.range()], kind)).collect();
    assert_eq!(found, expected);
}

#[test]
fn each_piece_has_its_kind() {
    use WordKind::*;
    check(
        "let ẋ₁ = 1.2e-3 θ̇² sin'' # two'",
        &[
            ("let", Word),
            ("ẋ₁", Word),
            ("=", Sign),
            ("1.2e-3", Number),
            ("θ̇", Word),
            ("²", Raised),
            ("sin", Word),
            ("''", Prime),
            ("# two'", Comment),
        ],
    );
    check("include \"a b\"", &[("include", Word), ("\"a b\"", Text)]);
    check("1..7", &[("1", Number), ("..", Sign), ("7", Number)]);
    check("2𝑥 -> y", &[("2", Number), ("𝑥", Word), ("->", Sign), ("y", Word)]);
}

#[test]
fn nothing_goes_over_the_end_of_a_line() {
    use WordKind::*;
    check("# a\r\nx\ry", &[("# a", Comment), ("x", Word), ("y", Word)]);
    check("include \"a\nb", &[("include", Word), ("\"a", Text), ("b", Word)]);
}

proptest! {
    /// In order, within lines, and nothing but spaces in between.
    #[test]
    fn words_cover_whatever_is_written(text in "[a-zθ𝑥\u{307}0-9²'\"#()+.§\\r\\n \u{2009}]{0,80}") {
        let mut end = 0;
        for (span, _) in words(&text) {
            let range = span.range();
            prop_assert!(end <= range.start && range.start < range.end);
            prop_assert!(text[end..range.start].chars().all(char::is_whitespace), "{:?}", &text[end..range.start]);
            prop_assert!(!text[range.clone()].contains(['\n', '\r']));
            end = range.end;
        }
        prop_assert!(text[end..].chars().all(char::is_whitespace));
    }
}
