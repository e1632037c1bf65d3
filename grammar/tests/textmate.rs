//! The TextMate grammar of the editors is what the table of keywords gives.
//!
//! `INSTA_UPDATE=always cargo test -p leastwise-grammar --test textmate` writes it anew.
//!
//! A TextMate grammar sees one line at a time and knows no names. It colours what can be told from the words alone; the
//! server's semantic tokens do the rest. A line that begins with no keyword is coloured as a formula, for hovers.

use std::fmt::Write as _;
use std::path::Path;

use leastwise_grammar::{Keyword, KeywordRole, begins_name, continues_name, fold_name, keywords};

/// The character class of a name's first character.
const FIRST: &str = r"[\p{Alphabetic}&&[^\p{M}ⁿⁱªºʹ-ʼ]]";
/// The character class of its others.
const NEXT: &str = r"[[\p{Alphabetic}\p{M}0-9_₀-₉]&&[^ⁿⁱªºʹ-ʼ]]";
/// The next item begins, or a line in the first column that is none.
const ITEM_ENDS: &str = r"^(?=[^\s#])";
/// Words of the language that mean something in `conserved` only.
const CONSERVED_ONLY: [&str; 2] = ["energy", "momentum"];
/// Words of the language that mean something in `symmetry` only.
const SYMMETRY_ONLY: [&str; 1] = ["ε"];
/// Second spellings.
const SPELLINGS: [(&str, &str); 2] = [("π", "pi"), ("ε", "eps")];

/// As much of JSON as a grammar needs, in the order in which it is written.
#[derive(Clone)]
enum Json {
    Text(String),
    List(Vec<Json>),
    Map(Vec<(String, Json)>),
}

impl Json {
    fn write(&self, out: &mut String, depth: usize) {
        let indent = "  ".repeat(depth);
        match self {
            Json::Text(text) => write_text(out, text),
            Json::List(items) => {
                out.push('[');
                for (at, item) in items.iter().enumerate() {
                    let _ = write!(out, "{}\n{indent}  ", if at == 0 { "" } else { "," });
                    item.write(out, depth + 1);
                }
                let _ = write!(out, "\n{indent}]");
            }
            Json::Map(entries) => {
                out.push('{');
                for (at, (key, value)) in entries.iter().enumerate() {
                    let _ = write!(out, "{}\n{indent}  ", if at == 0 { "" } else { "," });
                    write_text(out, key);
                    out.push_str(": ");
                    value.write(out, depth + 1);
                }
                let _ = write!(out, "\n{indent}}}");
            }
        }
    }
}

fn write_text(out: &mut String, text: &str) {
    out.push('"');
    for c in text.chars() {
        match c {
            '"' => out.push_str("\\\""),
            '\\' => out.push_str("\\\\"),
            c if c.is_control() => unreachable!("no pattern has control characters"),
            c => out.push(c),
        }
    }
    out.push('"');
}

fn text(text: impl Into<String>) -> Json {
    Json::Text(text.into())
}

fn map(entries: Vec<(&str, Json)>) -> Json {
    Json::Map(entries.into_iter().map(|(key, value)| (key.to_owned(), value)).collect())
}

/// `{"1": {"name": …}, …}`
fn captures(scopes: &[&str]) -> Json {
    let named = scopes.iter().enumerate().filter(|(_, scope)| !scope.is_empty());
    Json::Map(named.map(|(at, scope)| ((at + 1).to_string(), map(vec![("name", text(scoped(scope)))]))).collect())
}

fn scoped(scope: &str) -> String {
    format!("{scope}.leastwise")
}

fn plain(scope: &str, pattern: impl Into<String>) -> Json {
    map(vec![("name", text(scoped(scope))), ("match", text(pattern))])
}

fn parts(pattern: impl Into<String>, scopes: &[&str]) -> Json {
    map(vec![("match", text(pattern)), ("captures", captures(scopes))])
}

/// Where its end has a group, that has the scope of the first group of its beginning.
fn region(begin: impl Into<String>, scopes: &[&str], end: impl Into<String>, inside: Vec<Json>) -> Json {
    let end = end.into();
    let closes = end.contains(r"(\))").then(|| ("endCaptures", captures(&scopes[..1])));
    let entries = [("begin", text(begin)), ("beginCaptures", captures(scopes)), ("end", text(end))];
    map(entries.into_iter().chain(closes).chain([("patterns", Json::List(inside))]).collect())
}

fn include(rule: &str) -> Json {
    map(vec![("include", text(format!("#{rule}")))])
}

fn includes(rules: &[&str]) -> Vec<Json> {
    rules.iter().map(|rule| include(rule)).collect()
}

/// One of these words, whole. Longer words come first, so that none hides another.
fn one_of(words: &[&str]) -> String {
    let mut words = words.to_vec();
    words.sort_by_key(|word| (std::cmp::Reverse(word.chars().count()), *word));
    format!("(?:{})(?!{NEXT})", words.join("|"))
}

fn with_role(role: KeywordRole) -> Vec<&'static str> {
    keywords().iter().filter(|k| k.role == role).map(|k| k.name).collect()
}

/// An item's keyword, with the modifier that may stand before it.
fn head(item: &Keyword) -> String {
    let before: Vec<_> = keywords()
        .iter()
        .filter(|k| k.role == KeywordRole::Modifier && k.follows == item.name)
        .map(|k| k.name)
        .collect();
    match before.is_empty() {
        // The same groups, whether there is a modifier or not.
        true => format!("^()({})(?!{NEXT})", item.name),
        false => format!("^(?:({})[ \\t]+)?({})(?!{NEXT})", before.join("|"), item.name),
    }
}

const KEYWORD: [&str; 2] = ["storage.modifier", "keyword.control"];

/// The rule of one item, from what may follow its keyword.
fn item(keyword: &Keyword) -> Json {
    let head = head(keyword);
    let name = format!("({FIRST}{NEXT}*)");
    let begin = |rest: &str, scopes: &[&str], inside: Vec<Json>| {
        let scopes: Vec<&str> = KEYWORD.iter().chain(scopes).copied().collect();
        region(format!("{head}{rest}"), &scopes, ITEM_ENDS, inside)
    };
    let title = |scope: &'static str, sign: &str, inside: Vec<Json>| {
        // The name may be left out, and may have an index.
        let index = r"(?=[ \t]*(?:\[[^\]]*\][ \t]*)?";
        begin(&format!("(?:[ \\t]+{name}{index}{sign}))?"), &[scope], inside)
    };
    let special: &[&str] = match keyword.name {
        "conserved" => &["conserved-words"],
        "symmetry" => &["symmetry-words"],
        _ => &[],
    };
    let formula = || includes(&[special, &["formula"]].concat());
    match keyword.follows {
        "NAME, dimensionless | NAME, with NAME = 1" => {
            let options =
                plain("keyword.other", format!("(?<=,)[ \\t]*{}|^[ \\t]+{0}", one_of(&["dimensionless", "with"])));
            begin(&format!("(?:[ \\t]+{name})?"), &["entity.name.namespace"], [vec![options], formula()].concat())
        }
        "\"FILE.least\"" => begin("", &[], includes(&["text", "comment"])),
        // Any number of names, one quantity, and for each name a value.
        "NAME: QUANTITY = VALUE, …" => begin("", &[], includes(&["quantity", "value", "constant-names", "formula"])),
        "NAME, …: QUANTITY" => begin("", &[], includes(&["quantity", "formula"])),
        "NAME(x, …): QUANTITY" => {
            begin(&format!("(?:[ \\t]+{name})?"), &["entity.name.function"], includes(&["quantity", "formula"]))
        }
        "NAME = FORMULA | NAME(x, …) = FORMULA | NAME[i] = FORMULA" => {
            let formals = r"(?=[ \t]*\([^()]*\)[ \t]*=)";
            let either = format!("(?:[ \\t]+(?:{name}{formals}|{name}))?");
            begin(&either, &["entity.name.function", "variable.other.property"], formula())
        }
        "NAME: LOWER..UPPER" => begin(&format!("(?:[ \\t]+{name})?"), &["variable.other.enummember"], formula()),
        "NAME on FORMULA = FORMULA" => {
            let on = format!("(?:[ \\t]+{name})?[ \\t]+(on)(?!{NEXT})(?![ \\t]*=)");
            begin(&format!("(?:{on})?"), &["entity.name.type.term", "keyword.other"], formula())
        }
        "NAME = FORMULA" if keyword.name == "conserved" => title("entity.name.function.claim", "=", formula()),
        "NAME = FORMULA" => title("entity.name.type.term", "=", formula()),
        "NAME: FORMULA = FORMULA" => title("entity.name.type.term", ":", formula()),
        "NAME: x -> FORMULA, …" => title("entity.name.function.claim", ":", formula()),
        "NAME: from x = VALUE, …, over VALUE" => {
            title("entity.name.function.run", ":", includes(&["clauses", "formula"]))
        }
        "FORMULA > FORMULA, …" => begin("", &[], formula()),
        other => panic!("`{}` is followed by `{other}`: say here how that is coloured", keyword.name),
    }
}

/// The clauses of a run: what `from` and `over` bring are values, the others formulas.
fn clauses() -> Json {
    let words = one_of(&["from", "over", "until", "with"]);
    let begins = |word: &str| format!("(?:(?<=[,:])[ \\t]*|^[ \\t]+|(?<=^run)[ \\t]+)({word})(?!{NEXT})(?![ \\t]*=)");
    let ends = format!("(?=,[ \\t]*{words}(?![ \\t]*=))|^(?=[ \\t]+{words}(?![ \\t]*=))|{ITEM_ENDS}");
    let clause = |word: &str, inside: &[&str]| region(begins(word), &["keyword.other"], ends.clone(), includes(inside));
    map(vec![(
        "patterns",
        Json::List(vec![
            clause("from", &["value", "formula"]),
            clause("over", &["measure"]),
            clause("until|with", &["formula"]),
        ]),
    )])
}

fn list(rules: Vec<Json>) -> Json {
    map(vec![("patterns", Json::List(rules))])
}

fn grammar() -> Json {
    let name = format!("{FIRST}{NEXT}*");
    let items = keywords().iter().filter(|k| k.role == KeywordRole::Item).map(item).collect();
    let functions: Vec<_> = with_role(KeywordRole::Function);
    let everywhere: Vec<_> = functions.iter().copied().filter(|f| !CONSERVED_ONLY.contains(f) && *f != "sum").collect();
    let constants = with_role(KeywordRole::Constant);
    let conserved =
        |words: &[&'static str]| words.iter().copied().filter(|w| CONSERVED_ONLY.contains(w)).collect::<Vec<_>>();
    let others = constants.iter().copied().filter(|c| !CONSERVED_ONLY.contains(c) && !SYMMETRY_ONLY.contains(c));
    let spelled = |word: &str| SPELLINGS.iter().find(|(first, _)| *first == word).map(|(_, second)| *second);
    let others: Vec<_> = others.flat_map(|c| [Some(c), spelled(c)]).flatten().collect();
    let parameter: Vec<_> = SYMMETRY_ONLY.iter().flat_map(|c| [Some(*c), spelled(c)]).flatten().collect();
    let unit_names = plain("keyword.other.unit", format!("{name}|[°%′″]C?"));
    let rules = vec![
        ("items", list(items)),
        ("comment", plain("comment.line.number-sign", "#.*$")),
        ("text", plain("string.quoted.double", r#""[^"]*"?"#)),
        ("number", plain("constant.numeric", r"[0-9]+(?:\.[0-9]+)?(?:[eE][+-]?[0-9]+)?")),
        ("raised", plain("constant.numeric.power", "[⁺⁻⁰¹²³⁴-⁹]+")),
        ("prime", plain("keyword.operator.derivative", "['′″‴⁗]+")),
        (
            "operator",
            list(vec![
                plain("keyword.operator.arrow", "->|→"),
                plain("keyword.operator.comparison", "<=|>=|!=|[<>≤≥≠]"),
                plain("keyword.operator.range", r"\.\."),
                plain("keyword.operator.assignment", "="),
                plain("keyword.operator.arithmetic", "[-−+*/⁄∕^·⋅×√∂Σ]"),
            ]),
        ),
        ("punctuation", list(vec![plain("punctuation.separator", "[,:]"), plain("punctuation.bracket", r"[()\[\]|]")])),
        (
            "words",
            list(vec![
                // The index of a sum and its range.
                parts(
                    format!(r"(sum)[ \t]*(\()[ \t]*({name})(?:[ \t]+(in)(?!{NEXT}))?"),
                    &["support.function", "punctuation.bracket", "variable.other.enummember", "keyword.other"],
                ),
                plain("support.function", one_of(&[&everywhere[..], &["sum"]].concat())),
                plain("constant.language", one_of(&others)),
            ]),
        ),
        (
            "conserved-words",
            list(vec![
                plain("support.function", one_of(&conserved(&functions))),
                plain("constant.language", one_of(&conserved(&constants))),
            ]),
        ),
        ("symmetry-words", plain("constant.language", one_of(&parameter))),
        (
            "name",
            list(vec![
                // Without a space before its parenthesis a name is most often a function.
                plain("entity.name.function", format!("{name}(?=['′″]*\\()")),
                plain("variable.other", name.clone()),
            ]),
        ),
        // The names that a declaration of constants declares.
        ("constant-names", plain("variable.other.constant", format!("(?<![^ \\t,]){name}(?=[ \\t]*(?:[\\[,:=#]|$))"))),
        (
            "quantity",
            region(
                "(:)",
                &["punctuation.separator"],
                format!("(?=[=,#])|{ITEM_ENDS}"),
                [
                    vec![plain("support.type.quantity", name.clone())],
                    includes(&["number", "raised", "operator", "punctuation"]),
                ]
                .concat(),
            ),
        ),
        // Behind `=`, up to the comma that is in no bracket: arithmetic of numbers, then a unit.
        (
            "value",
            region(
                "(=)",
                &["keyword.operator.assignment"],
                format!("(?=[,#])|{ITEM_ENDS}"),
                includes(&["bracketed-measure", "measure"]),
            ),
        ),
        (
            "bracketed-measure",
            region(
                r"(\()",
                &["punctuation.bracket"],
                format!(r"(\))|(?=#)|{ITEM_ENDS}"),
                includes(&["bracketed-measure", "measure"]),
            ),
        ),
        (
            "measure",
            list(
                [
                    vec![include("comment"), include("number"), unit_names],
                    includes(&["raised", "operator", "punctuation"]),
                ]
                .concat(),
            ),
        ),
        ("clauses", clauses()),
        (
            "formula",
            list(includes(&[
                "comment",
                "text",
                "words",
                "name",
                "number",
                "raised",
                "prime",
                "operator",
                "punctuation",
            ])),
        ),
    ];
    map(vec![
        ("$comment", text("Made from the table of keywords by grammar/tests/textmate.rs. Change that, not this.")),
        ("name", text("Leastwise")),
        ("scopeName", text("source.leastwise")),
        ("fileTypes", Json::List(vec![text("least")])),
        ("patterns", Json::List(includes(&["items", "formula"]))),
        ("repository", map(rules)),
    ])
}

#[test]
fn the_file_is_what_the_table_gives() {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("../editors/vscode/syntaxes/leastwise.tmLanguage.json");
    let mut wanted = String::new();
    grammar().write(&mut wanted, 0);
    wanted.push('\n');
    if std::env::var("INSTA_UPDATE").is_ok_and(|update| update == "always") {
        std::fs::write(&path, &wanted).expect("the grammar is written");
    }
    let found = std::fs::read_to_string(&path).unwrap_or_default();
    let differs = found.lines().zip(wanted.lines()).position(|(a, b)| a != b);
    assert!(
        found == wanted,
        "{} is not what the table of keywords gives, first in line {}; INSTA_UPDATE=always writes it anew",
        path.display(),
        differs.map_or(found.lines().count().min(wanted.lines().count()), |at| at) + 1
    );
}

#[test]
fn every_clause_and_special_word_is_in_the_table() {
    let mut clauses = with_role(KeywordRole::Clause);
    clauses.sort_unstable();
    assert_eq!(clauses, ["dimensionless", "from", "in", "on", "over", "until", "with"], "the patterns name these");
    for word in CONSERVED_ONLY.iter().chain(&SYMMETRY_ONLY) {
        assert!(keywords().iter().any(|k| k.name == *word), "{word}");
    }
    for (first, second) in SPELLINGS {
        assert_eq!(fold_name(second), first);
    }
}

/// The classes say the same as the functions of the language, but for `\p{Alphabetic}` and `\p{M}` themselves.
#[test]
fn the_exceptions_of_names_are_those_of_the_language() {
    let exceptions: Vec<char> = "ⁿⁱªº".chars().chain('ʹ'..='ʼ').collect();
    for c in exceptions.iter().copied() {
        assert!(!begins_name(c) && !continues_name(c), "{c}");
    }
    for c in (0..=0x10_ffff).filter_map(char::from_u32).filter(|c| c.is_alphabetic()) {
        assert!(continues_name(c) || exceptions.contains(&c), "{c}");
    }
    for c in "0123456789_₀₁₉".chars() {
        assert!(continues_name(c) && !begins_name(c), "{c}");
    }
}
