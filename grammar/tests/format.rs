//! The formatter: spacing, alignment, comments; idempotent, and without effect on what is read.

mod common;

use common::{item, read_all};
use leastwise_grammar::{format, split};
use proptest::prelude::*;

#[track_caller]
fn check(text: &str, expected: &str) {
    assert_eq!(format(text), expected);
    assert_eq!(format(expected), expected, "formatting is idempotent");
}

#[test]
fn one_way_to_space() {
    check("kinetic a=1/2*m*(x'+b)^2", "kinetic a = 1/2 * m * (x' + b)^2\n");
    check("let a = x ^ 2 / y  ·  z", "let a = x^2/y·z\n");
    check("let a = k(x-l) + sin  ( x ) - sin² (x)", "let a = k (x - l) + sin(x) - sin²(x)\n");
    check("let a = - x +-y", "let a = -x + -y\n");
    check("let a = | P ' |² + 2θ", "let a = |P'|² + 2 θ\n");
    check("let a=sum( i in 1 .. 7 : x [ i + 1 ] )", "let a = sum(i in 1..7: x[i+1])\n");
    check("let a=sum(j in i + 1..8- k : x [ (j + 1) ]-b)", "let a = sum(j in i+1..8-k: x[(j + 1)] - b)\n");
    check("index i: 1 .. N - 1", "index i: 1..N-1\n");
    check("let f (x,y) = x", "let f(x, y) = x\n");
    check("function U (r) :energy\nlet a = U (r) + U' (r)", "function U(r): energy\nlet a = U(r) + U'(r)\n");
    check("cyclic   coordinate x,y:N/m", "cyclic coordinate x, y: N/m\n");
    check("parameter α=4 °30 ′10″,m = 3kg  m ^ -2", "parameter α = 4° 30′ 10″, m = 3 kg m^-2\n");
    check("symmetry a:(x,y)->(x,y+ε)", "symmetry a: (x, y) -> (x, y + ε)\n");
    check("assume a>0,b<=2", "assume a > 0, b <= 2\n");
    check("run a:from x=1m,over 2 s", "run a: from x = 1 m, over 2 s\n");
    check("parameter a = 5%, T = 21°C", "parameter a = 5 %, T = 21 °C\n");
    check("dissipation a = b\nforce c on x = F", "dissipation a = b\nforce c on x = F\n");
    check("include   \"a b.least\"", "include \"a b.least\"\n");
}

#[test]
fn spellings_are_kept() {
    check("let a = pi ẋ² + x′ → b", "let a = pi ẋ² + x′ → b\n");
    check("symmetry a: x → x + eps", "symmetry a: x → x + eps\n");
}

#[test]
fn terms_of_a_block_are_aligned() {
    check(
        "kinetic bob = a\npotential weight = b\ndissipation 1/2 c\nforce  push on x = F\n\nkinetic c = d",
        "kinetic     bob    = a\npotential   weight = b\ndissipation 1/2 c\nforce       push on x = F\n\nkinetic c = d\n",
    );
}

#[test]
fn comments_of_a_block_are_aligned() {
    check(
        "coordinate x # one\ncoordinate long_name: length#two\nlet a = b\n\nlet c = d     # three\nlet e = f # four\n\nlet g = h    # five",
        "coordinate x                   # one\ncoordinate long_name: length   #two\nlet a = b\n\nlet c = d   # three\nlet e = f   # four\n\nlet g = h    # five\n",
    );
    // One column for most of a block is kept.
    check(
        "let a=b      # one\nlet c = d    # two\nlet efghij = klmn # three",
        "let a = b    # one\nlet c = d    # two\nlet efghij = klmn   # three\n",
    );
    check("let a=b      # one\nlet c = d    # two", "let a = b    # one\nlet c = d    # two\n");
}

#[test]
fn lines_and_comments_stay_where_they_are() {
    check(
        "# head\n\n\n\nsymmetry a: # one\n# two\n x -> x,\n\n\t# three\n      y -> y # four\n  # five\n# six\nlet a = b\n\n",
        "# head\n\nsymmetry a: # one\n    # two\n    x -> x,\n    # three\n    y -> y   # four\n    # five\n# six\nlet a = b\n",
    );
    check("", "");
    check("\n\n# only\n", "# only\n");
}

#[test]
fn a_broken_item_is_copied_as_it_is() {
    check("kinetic  a = b + \n  *c   # why\nlet a=b", "kinetic  a = b + \n  *c   # why\nlet a = b\n");
    check("   coordinate   x\nnot  an item\nlet a=b", "   coordinate   x\nnot  an item\nlet a = b\n");
}

#[test]
fn the_kind_of_line_end_stays() {
    check("let a=b\r\nlet c=d\r\n", "let a = b\r\nlet c = d\r\n");
    check("\u{feff}let a=b", "\u{feff}let a = b\n");
}

/// In a file that includes others, a name before `(` may be a function of theirs.
#[test]
fn included_functions_are_not_pulled_apart() {
    check("include \"a.least\"\nlet a = G(x) + k (x)", "include \"a.least\"\nlet a = G(x) + k (x)\n");
}

#[test]
fn models_keep_their_meaning() {
    for model in MODELS {
        same(model);
    }
}

const MODELS: &[&str] = &[
    include_str!("models/shaft_winch.least"),
    include_str!("models/heavy_top.least"),
    include_str!("models/mass_chain.least"),
    include_str!("models/geophone.least"),
    include_str!("models/two_body_plane.least"),
    include_str!("models/mass_pair.least"),
    include_str!("models/half_plane.least"),
    include_str!("models/lc_pair.least"),
];

/// What a reader of the file learns: the items, their slips and descriptions, all comments.
fn meaning(text: &str) -> (Vec<String>, Vec<String>) {
    let descriptions = split(text).into_iter().map(|i| i.description);
    let items = read_all(text).into_iter().zip(descriptions).map(|((_, parsed), description)| {
        let codes: Vec<&str> = parsed.slips.iter().map(|s| s.code).collect();
        format!("{} {codes:?} {description:?}", item(&parsed.item.kind))
    });
    let mut quoted = false;
    let comments = text.lines().filter_map(|line| {
        quoted = false;
        let at = line.char_indices().find(|(_, c)| {
            quoted ^= *c == '"';
            *c == '#' && !quoted
        });
        at.map(|(at, _)| line[at..].trim_end().to_owned())
    });
    (items.collect(), comments.collect())
}

#[track_caller]
fn same(text: &str) {
    let formatted = format(text);
    assert_eq!(meaning(&formatted), meaning(text), "{text}");
    assert_eq!(format(&formatted), formatted, "{text}");
}

/// Pieces of text that make up models, sound and broken ones.
fn pieces() -> impl Strategy<Value = String> {
    let piece = prop::sample::select(vec![
        "x",
        "y'",
        "ẍ",
        "θ₁",
        "U",
        "sin",
        "sum",
        "(",
        ")",
        "[",
        "]",
        "|",
        "+",
        "-",
        "*",
        "/",
        "^",
        "²",
        "'",
        "·",
        "×",
        ",",
        ":",
        "=",
        "->",
        "→",
        "<",
        ">=",
        "..",
        "1",
        "2.5",
        ".5",
        "3e2",
        "30",
        "°",
        "′",
        "kg",
        "m/s",
        " ",
        "  ",
        "\n",
        "\n    ",
        "\r\n ",
        "# note",
        "\n# block\n",
        "in",
        "on",
        "from",
        "over",
        "with",
        "i",
        "t",
        "π",
        "\"a\"",
        "§",
        ";",
        "\t",
        "√",
        "\u{307}",
        "𝑥",
    ]);
    let keyword = prop::sample::select(vec![
        "system a",
        "coordinate ",
        "cyclic coordinate ",
        "parameter ",
        "input ",
        "index ",
        "let a = ",
        "let f(x) = ",
        "function U(r)",
        "assume ",
        "kinetic ",
        "kinetic a = ",
        "potential ",
        "lagrangian ",
        "dissipation ",
        "force ",
        "force b on x = ",
        "constraint c: ",
        "symmetry s: ",
        "broken symmetry ",
        "conserved ",
        "run r: from ",
        "include ",
        "# comment",
        "nonsense",
    ]);
    let item = (keyword, prop::collection::vec(piece, 0..14))
        .prop_map(|(keyword, rest)| format!("{keyword}{}\n", rest.concat()));
    prop::collection::vec(item, 0..5).prop_map(|items| items.concat())
}

/// Formulas that are sound by construction.
fn formula() -> impl Strategy<Value = String> {
    let leaf =
        prop::sample::select(vec!["x", "y'", "ẍ", "2", "0.5", "θ₁", "P[2]", "sin θ", "cos² φ", "U'(r)", "|P|", "√2"]);
    leaf.prop_map(str::to_owned).prop_recursive(4, 40, 3, |inner| {
        let sign = prop::sample::select(vec![" + ", "-", " ", "*", " / ", "·", " ×"]);
        prop_oneof![
            (inner.clone(), sign, inner.clone()).prop_map(|(a, sign, b)| format!("{a}{sign}{b}")),
            inner.clone().prop_map(|a| format!("({a})")),
            inner.clone().prop_map(|a| format!("-({a}) ^2")),
            inner.clone().prop_map(|a| format!("exp ({a})")),
            inner.clone().prop_map(|a| format!("( {a} )'")),
            inner.prop_map(|a| format!("sum( i in 1..3 :{a})")),
        ]
    })
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 400, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn any_text_keeps_its_meaning(text in pieces()) {
        same(&text);
    }

    #[test]
    fn sound_formulas_keep_their_meaning(formula in formula(), comment in "(  # [a-z]{0,5})?") {
        same(&format!("let a = {formula}{comment}"));
    }

    #[test]
    fn any_characters_at_all(text in "\\PC{0,80}") {
        same(&text);
    }
}
