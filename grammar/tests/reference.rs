//! The reference says what the language is: its examples are sound, its grammar is the grammar, its codes are the codes.

mod common;

use std::collections::BTreeMap;

use common::read_all;
use leastwise_grammar::codes::CODES;
use leastwise_grammar::tree::Severity;
use leastwise_grammar::{KeywordRole, format, keywords};

const REFERENCE: &str = include_str!("../REFERENCE.md");
const GRAMMAR: &str = include_str!("../src/model.lalrpop");

/// The contents of the reference's blocks of one kind.
fn blocks(kind: &str) -> Vec<&'static str> {
    let start = format!("```{kind}\n");
    let blocks: Vec<&str> =
        REFERENCE.split(start.as_str()).skip(1).map(|rest| &rest[..rest.find("```").expect("a block ends")]).collect();
    assert!(!blocks.is_empty());
    blocks
}

#[test]
fn its_examples_are_sound_and_formatted() {
    for block in blocks("least") {
        for (text, parsed) in read_all(block) {
            assert!(parsed.slips.iter().all(|s| s.severity != Severity::Error), "{text}: {:?}", parsed.slips);
        }
        assert_eq!(format(block), block);
    }
}

#[test]
fn every_item_has_an_example() {
    let all = blocks("least").concat();
    for keyword in keywords().iter().filter(|k| k.role == KeywordRole::Item) {
        assert!(all.lines().any(|line| line.starts_with(keyword.name)), "{}", keyword.name);
    }
}

#[test]
fn it_lists_all_codes() {
    for code in CODES {
        assert!(REFERENCE.contains(&format!("| `{}` | {} |", code.name, code.explanation)), "{}", code.name);
    }
}

/// How many productions each part of the grammar has.
#[test]
fn its_grammar_is_the_grammar() {
    let mut listed: BTreeMap<&str, usize> = BTreeMap::new();
    let mut part = "";
    for line in blocks("grammar").concat().leak().lines() {
        if let Some((name, _)) = line.split_once(" = ").filter(|(name, _)| !name.trim().is_empty()) {
            part = name.trim();
        }
        *listed.entry(part).or_default() += 1;
    }
    let mut real: BTreeMap<&str, usize> = BTreeMap::new();
    let productions = &GRAMMAR[GRAMMAR.find("pub Entry").expect("the entry is public")..];
    for line in productions.lines().filter(|l| !l.trim().is_empty() && !l.starts_with("//") && *l != "};") {
        match line.strip_prefix("    ") {
            Some(_) => *real.entry(part).or_default() += 1,
            None => {
                part = line.trim_start_matches("pub ").split(':').next().unwrap_or_default();
                real.insert(part, usize::from(line.ends_with(';')));
            }
        }
    }
    assert_eq!(listed, real);
}
