//! Neovim's syntax file is what the table of keywords gives.
//!
//! `INSTA_UPDATE=always cargo test -p leastwise-grammar --test vim_syntax` writes it anew.

use std::fmt::Write as _;
use std::path::Path;

use leastwise_grammar::{KeywordRole, keywords};

fn list(wanted: impl Fn(KeywordRole) -> bool) -> String {
    keywords().iter().filter(|k| wanted(k.role)).map(|k| k.name).collect::<Vec<_>>().join(" ")
}

/// The file. Names are the server's to colour, by semantic tokens; this is what can be told without it.
fn syntax() -> String {
    let items = list(|r| r == KeywordRole::Item);
    let heads = items.replace(' ', r"\|");
    let modifiers = list(|r| r == KeywordRole::Modifier).replace(' ', r"\|");
    let mut out =
        String::from("\" Made from the table of keywords of the language; see grammar/tests/vim_syntax.rs.\n");
    out.push_str("if exists('b:current_syntax')\n  finish\nendif\n\n");
    out.push_str("\" Keywords begin an item in the first column only.\n");
    let _ = writeln!(out, r"syntax match leastwiseItem /^\%(\%({modifiers}\)\s\+\)\?\%({heads}\)\>/");
    // `on` and `in` stand between names, the other clauses behind a comma or colon.
    let (between, behind): (Vec<_>, Vec<_>) =
        keywords().iter().filter(|k| k.role == KeywordRole::Clause).map(|k| k.name).partition(|n| n.len() == 2);
    let _ = writeln!(out, "syntax keyword leastwiseClause {}", between.join(" "));
    let _ = writeln!(out, r"syntax match leastwiseOption /[,:]\s*\zs\%({}\)\>/", behind.join(r"\|"));
    let _ = writeln!(out, "syntax keyword leastwiseFunction {}", list(|r| r == KeywordRole::Function));
    let _ = writeln!(out, "syntax keyword leastwiseConstant {} pi eps", list(|r| r == KeywordRole::Constant));
    out.push_str(concat!(
        r"syntax match leastwiseNumber /\<\d\+\%(\.\d\+\)\?\%([eE][+-]\?\d\+\)\?/",
        "\n",
        r"syntax match leastwiseOperator /->\|→\|[-+*\/^=<>≤≥≠·×√|]/",
        "\n",
        "syntax region leastwiseText start=/\"/ end=/\"/ oneline\n",
        "syntax match leastwiseComment /#.*$/ contains=@Spell\n\n",
    ));
    for (group, link) in [
        ("Item", "Keyword"),
        ("Clause", "Keyword"),
        ("Option", "Keyword"),
        ("Function", "Function"),
        ("Constant", "Constant"),
        ("Number", "Number"),
        ("Operator", "Operator"),
        ("Text", "String"),
        ("Comment", "Comment"),
    ] {
        let _ = writeln!(out, "highlight default link leastwise{group} {link}");
    }
    out.push_str("\nlet b:current_syntax = 'leastwise'\n");
    out
}

#[test]
fn the_file_is_what_the_table_gives() {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("../editors/neovim/syntax/leastwise.vim");
    if std::env::var("INSTA_UPDATE").is_ok_and(|v| v == "always") {
        std::fs::write(&path, syntax()).expect("the file can be written");
    }
    let held = std::fs::read_to_string(&path).expect("the file is there");
    assert_eq!(held, syntax(), "write it anew: INSTA_UPDATE=always cargo test -p leastwise-grammar --test vim_syntax");
}

#[test]
fn every_word_is_in_the_file() {
    let text = syntax();
    for k in keywords() {
        assert!(text.contains(k.name), "{}", k.name);
    }
}
