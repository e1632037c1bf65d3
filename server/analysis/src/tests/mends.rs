//! Every code has a mend, or a reason why it has none.

use crate::Session;
use crate::features::actions::{Action, actions};
use crate::features::models::{broken, with_models};
use crate::fixture::Folder;
use crate::report::Finding;
use leastwise_grammar::tree::Severity;
use std::collections::HashSet;

/// A code, a text with it, the title of a mend, and the text after the mend.
const MENDED: &[(&str, &str, &str, &str)] = &[
    // Of the text.
    ("no-keyword", "coordinate x\nx = 1\nkinetic x'^2\n", "Make it a comment", "coordinate x\n# x = 1\nkinetic x'^2\n"),
    (
        "no-keyword",
        "kinetic T = x'^2\n+ x\ncoordinate x\n",
        "Indent the line",
        "kinetic T = x'^2\n    + x\ncoordinate x\n",
    ),
    ("unknown-keyword", "coordinate x\nkinetc x'^2\n", "Write kinetic", "coordinate x\nkinetic x'^2\n"),
    (
        "unknown-keyword",
        "cyclic cordinate x\nkinetic x'^2\n",
        "Write coordinate",
        "cyclic coordinate x\nkinetic x'^2\n",
    ),
    (
        "indented-keyword",
        "coordinate x\n  kinetic x'^2\n",
        "Move it to the first column",
        "coordinate x\nkinetic x'^2\n",
    ),
    ("unknown-character", "coordinate x\nkinetic x’^2\n", "Write '", "coordinate x\nkinetic x'^2\n"),
    ("unknown-character", "coordinate x\nkinetic x'^2 $\n", "Take it away", "coordinate x\nkinetic x'^2 \n"),
    ("unterminated-text", "include \"a.least\ncoordinate x\n", "Add the quote", "include \"a.least\"\ncoordinate x\n"),
    ("number-form", "coordinate x\nkinetic .5 x'^2\n", "Write 0.5", "coordinate x\nkinetic 0.5 x'^2\n"),
    ("number-form", "coordinate x\nkinetic 5. x'^2\n", "Write 5", "coordinate x\nkinetic 5 x'^2\n"),
    ("decimal-comma", "coordinate x\nkinetic 0,5 x'^2\n", "Write 0.5", "coordinate x\nkinetic 0.5 x'^2\n"),
    ("wrong-sign", "coordinate x\nkinetic x'**2\n", "Write ^", "coordinate x\nkinetic x'^2\n"),
    ("wrong-sign", "coordinate x\nkinetic {x}'^2\n", "Write ( and )", "coordinate x\nkinetic (x)'^2\n"),
    ("unbalanced-bracket", "coordinate x\nkinetic (x'^2\n", "Close it with )", "coordinate x\nkinetic (x'^2)\n"),
    ("unbalanced-bracket", "coordinate x\nkinetic x'^2)\n", "Take it away", "coordinate x\nkinetic x'^2\n"),
    ("missing-operand", "coordinate x\nkinetic x'^2 +\n", "Take `+` away", "coordinate x\nkinetic x'^2 \n"),
    (
        "missing-operator",
        "coordinate x\nkinetic x'^2\n    x^2\n",
        "Put in `+`",
        "coordinate x\nkinetic x'^2\n    + x^2\n",
    ),
    ("missing-equals", "coordinate x\nkinetic bob 1/2 x'^2\n", "Put in `=`", "coordinate x\nkinetic bob = 1/2 x'^2\n"),
    ("missing-part", "cyclic x\nkinetic x'^2\n", "Write cyclic coordinate", "cyclic coordinate x\nkinetic x'^2\n"),
    (
        "missing-separator",
        "coordinate x y\nkinetic x'^2 + y'^2\n",
        "Put in `,`",
        "coordinate x, y\nkinetic x'^2 + y'^2\n",
    ),
    (
        "unexpected",
        "coordinate x: length, θ: angle\nkinetic x'^2 + θ'^2\n",
        "Begin another item",
        "coordinate x: length\ncoordinate θ: angle\nkinetic x'^2 + θ'^2\n",
    ),
    (
        "function-argument",
        "coordinate x\nkinetic T = x'^2 sin 2x\n",
        "Write sin(2x)",
        "coordinate x\nkinetic T = x'^2 sin(2x)\n",
    ),
    (
        "function-power",
        "coordinate x\nkinetic T = x'^2 sin x²\n",
        "Write sin(x)²",
        "coordinate x\nkinetic T = x'^2 sin(x)²\n",
    ),
    (
        "inverse-or-reciprocal",
        "coordinate x\nkinetic T = x'^2 sin⁻¹ x\n",
        "Write asin",
        "coordinate x\nkinetic T = x'^2 asin x\n",
    ),
    (
        "dotted-function",
        "coordinate x\nfunction U(s)\nkinetic x'^2\nlagrangian U̇((x)) x\n",
        "Write U'(…), by its argument",
        "coordinate x\nfunction U(s)\nkinetic x'^2\nlagrangian U'((x)) x\n",
    ),
    (
        "dotted-function",
        "coordinate x\nfunction U(s)\nkinetic x'^2\nlagrangian U̇((x)) x\n",
        "Write U(…)', by the time",
        "coordinate x\nfunction U(s)\nkinetic x'^2\nlagrangian U((x))' x\n",
    ),
    ("prime-on-power", "coordinate x\nkinetic x^2'\n", "Write (x^2)'", "coordinate x\nkinetic (x^2)'\n"),
    ("declared-derivative", "coordinate ẋ\nkinetic x'^2\n", "Declare x", "coordinate x\nkinetic x'^2\n"),
    ("head-name", "coordinate x\nkinetic my bob = x'^2\n", "Write my_bob", "coordinate x\nkinetic my_bob = x'^2\n"),
    ("quotient-unit", "parameter c = 1 N/m s\n", "Write N/(m s)", "parameter c = 1 N/(m s)\n"),
    ("value-form", "parameter k\nparameter K = k/2\n", "Make it a definition with `let`", "parameter k\nlet K = k/2\n"),
    ("value-form", "parameter K = 2 3 m\n", "Put in `*`", "parameter K = 2 * 3 m\n"),
    (
        "unit-in-formula",
        "coordinate x\nkinetic x'^2 cos(60°)\n",
        "Write (60 π/180)",
        "coordinate x\nkinetic x'^2 cos((60 π/180))\n",
    ),
    (
        "unit-in-formula",
        "coordinate m\nparameter s\nlet g = 9.81 m/s^2\nkinetic m'^2 g\n",
        "Make it a parameter with this value",
        "coordinate m\nparameter s\nparameter g = 9.81 m/s^2\nkinetic m'^2 g\n",
    ),
    (
        "system-option",
        "system s, dimensionles\ncoordinate x\nkinetic x'^2\n",
        "Write dimensionless",
        "system s, dimensionless\ncoordinate x\nkinetic x'^2\n",
    ),
    (
        "read-quotient",
        "coordinate x\nparameter a, b\nkinetic a/b x'^2\n",
        "Write (a/b) x'^2",
        "coordinate x\nparameter a, b\nkinetic (a/b) x'^2\n",
    ),
    (
        "read-function",
        "coordinate θ\nkinetic T = θ'^2 + cos θ/2\n",
        "Write cos(θ/2)",
        "coordinate θ\nkinetic T = θ'^2 + cos(θ/2)\n",
    ),
    // Names.
    (
        "undeclared-name",
        "coordinate x\nkinetic m x'^2\n",
        "Declare `parameter m`",
        "coordinate x\nparameter m\nkinetic m x'^2\n",
    ),
    (
        "undeclared-name",
        "parameter mass1\nkinetic mas1 x'^2\ncoordinate x\n",
        "Write mass1",
        "parameter mass1\nkinetic mass1 x'^2\ncoordinate x\n",
    ),
    (
        "undeclared-name",
        "coordinate x\nlet g = 9.81 m/s^2\nkinetic g x'^2\n",
        "Make it a parameter with this value",
        "coordinate x\nparameter g = 9.81 m/s^2\nkinetic g x'^2\n",
    ),
    ("undeclared-index", "coordinate x[i]\n", "Declare `index i: 1..3`", "index i: 1..3\ncoordinate x[i]\n"),
    (
        "declared-twice",
        "coordinate x\nparameter k, x\nkinetic k x'^2\n",
        "Remove this declaration",
        "coordinate x\nparameter k\nkinetic k x'^2\n",
    ),
    (
        "named-twice",
        "coordinate x\nkinetic T = x'^2\npotential T = x\n",
        "Call it T_2",
        "coordinate x\nkinetic T = x'^2\npotential T_2 = x\n",
    ),
    ("unused-name", "parameter m\ncoordinate x\nkinetic x'^2\n", "Remove `m`", "coordinate x\nkinetic x'^2\n"),
    (
        "system-place",
        "# A swing.\ncoordinate x\nsystem swing  # of mine\nkinetic x'^2\n",
        "Move it to the top",
        "system swing  # of mine\n# A swing.\ncoordinate x\nkinetic x'^2\n",
    ),
    (
        "system-place",
        "system a\ncoordinate x\nsystem b\nkinetic x'^2\n",
        "Remove this one",
        "system a\ncoordinate x\nkinetic x'^2\n",
    ),
    // Formulas.
    ("called-name", "coordinate θ\nkinetic θ'^2 + θ(t)\n", "Write θ alone", "coordinate θ\nkinetic θ'^2 + θ\n"),
    (
        "called-name",
        "coordinate θ\nparameter k\nkinetic θ'^2 + k(t)\n",
        "Write the product k t",
        "coordinate θ\nparameter k\nkinetic θ'^2 + k t\n",
    ),
    (
        "called-name",
        "coordinate θ\nkinetic θ'^2 + θ(2)\n",
        "Write the product with `·`",
        "coordinate θ\nkinetic θ'^2 + θ·(2)\n",
    ),
    (
        "two-vectors",
        "coordinate x, y\nlet P = (x, y)\nkinetic P' P'\n",
        "Write the dot product `·`",
        "coordinate x, y\nlet P = (x, y)\nkinetic P'·P'\n",
    ),
    (
        "two-vectors",
        "coordinate x, y\nlet P = (x, y)\nkinetic P'^2\n",
        "Write |…|²",
        "coordinate x, y\nlet P = (x, y)\nkinetic |P'|^2\n",
    ),
    (
        "two-vectors",
        "coordinate x, y\nlet P = (x, y)\nkinetic P'²\n",
        "Write P'·P'",
        "coordinate x, y\nlet P = (x, y)\nkinetic P'·P'\n",
    ),
    (
        "free-index",
        "index i: 1..3\ncoordinate x[i]\nkinetic T = 3 + 1/2 x'[i]^2 - 1\n",
        "Sum over i",
        "index i: 1..3\ncoordinate x[i]\nkinetic T = 3 + sum(i: 1/2 x'[i]^2) - 1\n",
    ),
    (
        "family-without-index",
        "index i: 1..3\ncoordinate x[i]\nkinetic sum(j in 1..3: x'^2)\n",
        "Write x[j]",
        "index i: 1..3\ncoordinate x[i]\nkinetic sum(j in 1..3: x[j]'^2)\n",
    ),
    (
        "no-family",
        "coordinate x\nparameter m\nkinetic m[2] x'^2\n",
        "Leave out the index",
        "coordinate x\nparameter m\nkinetic m x'^2\n",
    ),
    (
        "sum-range",
        "index i: 3..1\ncoordinate x[i]\nkinetic sum(i: x'[i]^2)\n",
        "Write 1..3",
        "index i: 1..3\ncoordinate x[i]\nkinetic sum(i: x'[i]^2)\n",
    ),
    (
        "prime-of-constant",
        "coordinate x\nparameter m\nkinetic x'^2 + m'\n",
        "Write m without its prime",
        "coordinate x\nparameter m\nkinetic x'^2 + m\n",
    ),
    (
        "unit-vector",
        "coordinate α\nlet n = (1, 1, 0)\nlet R = turn(n, α)\nkinetic |spin(R)|^2\n",
        "Write n/|n|",
        "coordinate α\nlet n = (1, 1, 0)\nlet R = turn(n/|n|, α)\nkinetic |spin(R)|^2\n",
    ),
    (
        "not-a-number",
        "coordinate x, y\nkinetic abs((x', y'))^2\n",
        "Write norm for the length",
        "coordinate x, y\nkinetic norm((x', y'))^2\n",
    ),
    (
        "read-function-of-parameter",
        "coordinate x\nparameter Ω\nkinetic T = x'^2 + cos Ω t\n",
        "Put both into the argument",
        "coordinate x\nparameter Ω\nkinetic T = x'^2 + cos(Ω t)\n",
    ),
    // Quantities.
    (
        "unknown-quantity",
        "coordinate x: lenght\nkinetic x'^2\n",
        "Write length",
        "coordinate x: length\nkinetic x'^2\n",
    ),
    (
        "unknown-unit",
        "coordinate x\nparameter m = 1 Kg\nkinetic m x'^2\n",
        "Write kg",
        "coordinate x\nparameter m = 1 kg\nkinetic m x'^2\n",
    ),
    (
        "missing-unit",
        "coordinate x\nparameter m: mass = 2\nkinetic m x'^2\n",
        "Write the unit kg",
        "coordinate x\nparameter m: mass = 2 kg\nkinetic m x'^2\n",
    ),
    (
        "missing-unit",
        "coordinate x\nparameter k: N/m = 2\nkinetic k x'^2\n",
        "Write the unit N/m",
        "coordinate x\nparameter k: N/m = 2 N/m\nkinetic k x'^2\n",
    ),
    (
        "missing-unit",
        "coordinate x: length\nkinetic x'^2\nrun a: from x' = 2, over 1 s\n",
        "Write the unit m/s",
        "coordinate x: length\nkinetic x'^2\nrun a: from x' = 2 m/s, over 1 s\n",
    ),
    (
        "hertz",
        "coordinate x\nparameter Ω: angular_velocity = 50 Hz\nkinetic Ω x'^2\n",
        "Write r/s, turns per second",
        "coordinate x\nparameter Ω: angular_velocity = 50 r/s\nkinetic Ω x'^2\n",
    ),
    (
        "include-circle",
        "include \"folder/model.least\"\ncoordinate x\nkinetic x'^2\n",
        "Remove this line",
        "coordinate x\nkinetic x'^2\n",
    ),
    // Mechanics.
    (
        "not-cyclic",
        "cyclic coordinate x\nkinetic x'^2\npotential x\n",
        "Take `cyclic` away: the claim is dropped",
        "coordinate x\nkinetic x'^2\npotential x\n",
    ),
    (
        "symmetry-broken",
        "coordinate x\nkinetic x'^2\npotential x^2\nsymmetry s: x -> x + ε\n",
        "Declare `s` broken: it is known to give no constant of the motion",
        "coordinate x\nkinetic x'^2\npotential x^2\nbroken symmetry s: x -> x + ε\n",
    ),
    (
        "broken-symmetry-holds",
        "coordinate x\nkinetic x'^2\nbroken  symmetry s: x -> x + ε\n",
        "Take `broken` away",
        "coordinate x\nkinetic x'^2\nsymmetry s: x -> x + ε\n",
    ),
    (
        "not-the-identity",
        "coordinate x\nkinetic x'^2\nsymmetry s: x -> 2 ε\n",
        "Write x -> x + 2 ε",
        "coordinate x\nkinetic x'^2\nsymmetry s: x -> x + 2 ε\n",
    ),
    (
        "not-periodic",
        "coordinate θ: angle\nkinetic θ'^2\npotential θ^2\n",
        "Declare θ as `twist`: it counts its turns",
        "coordinate θ: twist\nkinetic θ'^2\npotential θ^2\n",
    ),
];

/// Codes without a mend, and why.
const WITHOUT: &[(&str, &str)] = &[
    ("number-size", "which digits matter is the writer's to say"),
    ("nested-bars", "norm or abs, and which bars belong together, is the writer's to say"),
    ("nesting", "which part gets a name of its own is the writer's to say"),
    ("missing-name", "only the writer knows the name"),
    ("derivative-mark", "by which argument is the writer's to say"),
    ("transformation-source", "which coordinate is transformed is the writer's to say"),
    ("transformation-count", "the missing image is the writer's to say"),
    ("clause-twice", "which of the two is meant is the writer's to say"),
    ("reserved-name", "its uses mean the language's own: another name is the writer's to choose"),
    ("shadowed-epsilon", "renaming the declared ε mends it; the name is the writer's to choose"),
    ("look-alike-names", "renaming one of them mends it; the name is the writer's to choose"),
    ("circular-definition", "which of the definitions is wrong is the writer's to say"),
    ("function-without-arguments", "the argument is the writer's to say"),
    ("argument-count", "what is missing or too much is the writer's to say"),
    ("function-derivative", "by which argument is the writer's to say"),
    ("only-in-conserved", "the formula that is meant is the writer's to say"),
    ("shape-mismatch", "which of the two is wrong is the writer's to say"),
    ("index-out-of-range", "the range or the index may be wrong"),
    ("index-form", "the index is the writer's to say"),
    ("prime-of-number", "the name that is missing is the writer's to say"),
    ("division-by-zero", "the divisor is the writer's to say"),
    ("too-large", "what is left out is the writer's to say"),
    ("acceleration", "the term is the writer's to say"),
    ("not-linear", "the constraint is the writer's to say"),
    ("empty-sum", "which range is wrong is the writer's to say"),
    ("force-target", "what the force acts on is the writer's to say"),
    ("not-a-coordinate", "the coordinate is the writer's to say"),
    ("transformed-twice", "which of the two is meant is the writer's to say"),
    ("assumed-equality", "a definition or a comparison may be meant"),
    ("contradiction", "the assumption is the writer's to say"),
    ("run-value", "the value is the writer's to say"),
    ("unit-mismatch", "the unit or the quantity may be wrong"),
    ("family-values", "the values are the writer's to say"),
    ("value-number", "the number is the writer's to say"),
    ("include-file", "where the file is stored is not known"),
    ("include-size", "what is left out is the writer's to say"),
    ("included-item", "it is mended in the other file"),
    ("included-finding", "it is mended in the other file"),
    ("more-findings", "the findings that are told have their own"),
    ("gauge-not-found", "it tells a limit of the program"),
    ("gauge-multivalued", "it tells a fact, not a slip"),
    ("charge-taken", "it tells a fact, not a slip"),
    ("transformation-of-velocities", "the image is the writer's to say"),
    ("no-coordinate", "the coordinate is the writer's to say"),
    ("single-member", "the whole family, or another model, is the writer's to say"),
    ("not-conserved", "the claim or the model may be wrong"),
    ("undecided", "it tells a limit of the program"),
    ("singular-mass-matrix", "the missing inertia is the writer's to say"),
    ("mass-matrix-not-positive", "the term is the writer's to say"),
    ("explicit-time", "it tells a fact, not a slip"),
    ("undefined-everywhere", "the divisor is the writer's to say"),
];

const FILES: Folder = Folder(&[("a.least", "parameter unused_here\n"), ("folder/model.least", "")]);

fn found(text: &str) -> (Vec<Finding>, Vec<Action>) {
    let mut session = Session::new();
    let checked = session.check("folder/model.least", text, &FILES);
    let derived = session.derive(&checked);
    let findings = session.findings(&checked, &derived);
    let list = actions(&checked, &findings, 0..text.len());
    (findings, list)
}

#[test]
fn a_mend_takes_its_finding_away_and_adds_no_error() {
    let mut wrong = Vec::new();
    for (code, text, title, expected) in MENDED {
        for crlf in [false, true] {
            let ends = |text: &str| if crlf { text.replace('\n', "\r\n") } else { text.to_string() };
            let (text, expected) = (ends(text), ends(expected));
            let (findings, list) = found(&text);
            let Some(action) = list.iter().find(|a| a.title == *title && findings[a.mends].code == *code) else {
                let codes: Vec<&str> = findings.iter().map(|f| f.code).collect();
                let titles: Vec<&str> = list.iter().map(|a| a.title.as_str()).collect();
                wrong.push(format!("{code}: no `{title}` in {titles:?} of {codes:?}"));
                continue;
            };
            let after = crate::features::rename::edited(&text, &action.edits);
            if after != expected {
                wrong.push(format!("{code}: {after:?}, not {expected:?}"));
            }
            let (later, _) = found(&after);
            let count = |list: &[Finding]| list.iter().filter(|f| f.code == *code).count();
            let errors = |list: &[Finding]| list.iter().filter(|f| f.severity == Severity::Error).count();
            if count(&later) >= count(&findings) {
                wrong.push(format!("{code}: still there in {after:?}: {later:?}"));
            }
            if errors(&later) > errors(&findings) {
                wrong.push(format!("{code}: new errors in {after:?}: {later:?}"));
            }
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

#[test]
fn every_code_has_a_mend_or_a_reason_for_none() {
    let mended: HashSet<&str> = MENDED.iter().map(|m| m.0).collect();
    let without: HashSet<&str> = WITHOUT.iter().map(|m| m.0).collect();
    for code in crate::codes::all() {
        let (a, b) = (mended.contains(code.name), without.contains(code.name));
        assert!(a != b, "{}: {}", code.name, if a { "has a mend and a reason" } else { "has neither mend nor reason" });
    }
    let known: HashSet<&str> = crate::codes::all().map(|c| c.name).collect();
    assert!(mended.iter().chain(&without).all(|code| known.contains(code)));
    assert_eq!(without.len(), WITHOUT.len());
}

/// All mends of a text can be applied.
#[track_caller]
fn apply(text: &str) -> usize {
    let (_, list) = found(text);
    for action in &list {
        let mut end = 0;
        for (range, _) in &action.edits {
            assert!(end <= range.start && range.start <= range.end && range.end <= text.len(), "{action:?} of {text}");
            assert!(text.is_char_boundary(range.start) && text.is_char_boundary(range.end), "{action:?} of {text}");
            end = range.end;
        }
        assert!(action.title.starts_with(char::is_uppercase), "{}", action.title);
    }
    list.len()
}

#[test]
fn edits_are_in_order_and_within_the_text() {
    for (_, text, ..) in MENDED {
        assert!(apply(text) > 0);
        // Whatever stands around it, and however it is cut off.
        apply(&format!("\u{feff}# A model.\r{}", text.replace('\n', "\r")));
        for (at, _) in text.char_indices() {
            apply(&text[..at]);
        }
    }
    with_models(|text| {
        for text in broken(text) {
            apply(&text);
        }
    });
}
