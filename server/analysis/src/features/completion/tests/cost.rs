//! Large models: lists stay short, and what is begun is found among thousands.

use super::super::order::MOST;
use super::*;

fn large() -> String {
    let parameters: String = (0..5_000).map(|k| format!("parameter k_{k}: stiffness = {k} N/m\n")).collect();
    format!("system s\nindex i: 1..10000\ncoordinate x[i]: length\n{parameters}potential V = ")
}

#[test]
fn a_family_is_one_name() {
    let text = format!("{}sum(i: k_1 ", large());
    let labels: Vec<String> = complete(&text, text.len(), &[]).list.into_iter().map(|c| c.label).collect();
    assert_eq!(labels[..3], ["i", "x[i]", "x"]);
    assert!(!labels.contains(&"x[1]".to_owned()));
}

#[test]
fn thousands_of_names_leave_room_for_functions() {
    let text = large();
    let found = complete(&text, text.len(), &[]);
    assert!(found.list.len() <= MOST && found.incomplete);
    assert!(found.list.iter().any(|c| c.label == "sin"));
}

#[test]
fn what_is_begun_is_found_among_thousands() {
    let text = format!("{}k_4321", large());
    let found = complete(&text, text.len(), &[]);
    assert_eq!(found.list[0].label, "k_4321");
}

#[test]
fn a_long_sum_and_deep_brackets_end() {
    for text in [
        format!("system s\nkinetic T = {}", "x + ".repeat(20_000)),
        format!("system s\nkinetic T = {}", "(".repeat(20_000)),
        format!("system s\nkinetic T = {}", "sum(i: x[".repeat(3_000)),
        format!("system s\nlet a = {}\nkinetic T = ", "b + ".repeat(50_000)),
        format!("system s\nparameter {}", "a, ".repeat(20_000)),
        format!("system s\nrun a: from {}", "x = 1, ".repeat(10_000)),
    ] {
        let found = complete(&text, text.len(), &[]);
        assert!(found.list.len() <= MOST);
    }
}
