//! Lists at a cursor, as a person meets them while typing a model.

mod cost;
mod properties;

use super::*;

const MODEL: &str = "\
system swing
coordinate θ: angle
coordinate x₁: length           # along the rail
parameter m: mass = 2 kg        # bob
parameter l = 1 m, c: damping = 3 N s/m
index i: 1..N
let N = 3
coordinate y[i]: length
let P = (l sin θ, -l cos θ)
function U(r): energy
input u: force
kinetic bob = 1/2 m l^2 θ'^2
";

/// The labels at `$0`; the line stands at the end of the model, unless it is a whole model.
fn labels(line: &str) -> Vec<String> {
    at(line).list.into_iter().map(|c| c.label).collect()
}

fn at(line: &str) -> Completions {
    let text = if line.starts_with("system") { line.to_owned() } else { format!("{MODEL}{line}") };
    let offset = text.find("$0").expect("a cursor");
    complete(&text.replace("$0", ""), offset, &[])
}

/// The first labels, parted by spaces; `-` for an empty list.
#[track_caller]
fn check(line: &str, expected: &str) {
    let labels = labels(line);
    let expected: Vec<&str> = expected.split(' ').filter(|l| *l != "-").collect();
    let shown = if expected.is_empty() { labels.len() } else { expected.len().min(labels.len()) };
    assert_eq!(labels[..shown], expected, "{line}: {labels:?}");
}

/// The whole list.
#[track_caller]
fn check_all(line: &str, expected: &[&str]) {
    assert_eq!(labels(line), expected, "{line}");
}

/// The one entry with this label.
#[track_caller]
fn entry(line: &str, label: &str) -> Completion {
    let list = at(line).list;
    let found = list.iter().find(|c| c.label == label);
    found.unwrap_or_else(|| panic!("no {label} in {:?}", labels(line))).clone()
}

#[test]
fn an_item_begins_with_a_keyword() {
    check("$0", "coordinate");
    check("po$0", "potential");
    check("kin$0etic T = m", "kinetic");
}

#[test]
fn a_modifier_brings_what_it_modifies() {
    assert_eq!(labels("cyc$0")[0], "cyclic coordinate");
    assert_eq!(labels("cyc$0 coordinate φ")[0], "cyclic");
    check_all("cyclic $0", &["coordinate"]);
    check_all("broken sy$0", &["symmetry"]);
    check_all("broken symmetry $0", &[]);
}

#[test]
fn a_system_stands_once_and_first() {
    let labels = |text: &str| complete(text, 0, &[]).list.into_iter().map(|c| c.label).collect::<Vec<_>>();
    assert_eq!(labels("")[0], "system");
    assert_eq!(labels("\ncoordinate x")[0], "system");
    assert_eq!(labels("\nsystem a")[0], "coordinate");
    assert!(!labels_at("coordinate x\n$0").contains(&"system".to_owned()));
    // A word that only begins alike.
    assert_eq!(labels("\nlet systematic = 1")[0], "system");
}

fn labels_at(fixture: &str) -> Vec<String> {
    let offset = fixture.find("$0").expect("a cursor");
    complete(&fixture.replace("$0", ""), offset, &[]).list.into_iter().map(|c| c.label).collect()
}

#[test]
fn keywords_show_their_shape() {
    let kinetic = entry("$0", "kinetic");
    assert_eq!((kinetic.insert.as_str(), kinetic.detail.as_str()), ("kinetic", "kinetic NAME = FORMULA"));
    assert!(kinetic.documentation.is_some_and(|d| d.contains("kinetic energy")));
}

#[test]
fn a_kinetic_energy_is_made_of_velocities_and_masses() {
    check("kinetic T = 1/2 $0", "θ' θ̇ x₁' ẋ₁ m P' P θ x₁ y l c N U u sum sin");
    check("kinetic T = sum(i: 1/2 $0", "i θ' θ̇ x₁' ẋ₁ y[i]' m");
    check("kinetic T = 1/2 m |$0", "θ' θ̇");
}

#[test]
fn a_potential_energy_is_made_of_coordinates() {
    check("potential V = $0", "θ x₁ y m l c P N U u θ' θ̇ x₁' ẋ₁ sum sin");
    check("potential V = 1/2 m$0", "m min max");
}

#[test]
fn other_items_want_other_names() {
    check("dissipation D = 1/2 $0", "θ' θ̇ x₁' ẋ₁ c P' P");
    check("force push on $0", "θ x₁ y P N θ' θ̇");
    check("force push on x₁ = $0", "u θ θ' θ̇ x₁");
    check("assume $0", "m l c θ x₁ y");
    check("constraint rod: $0", "θ θ' θ̇ x₁ x₁' ẋ₁ y m");
    check("let E = $0", "θ θ' θ̇ x₁ x₁' ẋ₁ y m");
    check("lagrangian L = $0", "θ θ' θ̇");
}

#[test]
fn accelerations_come_last_and_in_definitions_alone() {
    let list = labels("let a = $0");
    assert_eq!(list[list.len() - 4..], ["θ''", "θ̈", "x₁''", "ẍ₁"]);
    assert!(!labels("kinetic T = $0").contains(&"θ''".to_owned()));
}

#[test]
fn both_spellings_of_a_velocity_answer_to_the_prime() {
    assert_eq!(entry("kinetic T = x1$0", "ẋ₁").filter, "x1'");
    assert_eq!(entry("kinetic T = x₁$0", "ẋ₁").filter, "x₁'");
    assert_eq!(entry("kinetic T = ẋ$0", "ẋ₁").filter, "ẋ₁");
    // A prime stands already.
    assert!(!labels("kinetic T = x$0'").contains(&"x₁'".to_owned()));
}

#[test]
fn names_that_the_item_binds_come_first() {
    check("let f(a, b) = a + $0", "a b θ");
    check("let Y[i] = sum(j in 1..i: $0", "j i θ");
    check("kinetic T = sum(j in 1..3: θ) + $0", "θ'");
    check("symmetry s: θ -> $0", "ε θ x₁ y t m");
    check("run a: from θ = 1, with U(s) = $0", "s t m");
}

#[test]
fn a_formal_argument_hides_a_name() {
    let list = labels("let f(θ) = $0");
    assert_eq!(list.iter().filter(|l| *l == "θ").count(), 1);
    assert!(!list.contains(&"θ'".to_owned()), "{list:?}");
    assert!(!labels("let z = $0").contains(&"z".to_owned()), "a definition is not made of itself");
}

#[test]
fn brackets_want_indices() {
    check_all("kinetic T = sum(j in 1..N: y[$0", &["j", "i", "N"]);
    check_all("kinetic T = y[$0]", &["i", "N"]);
    check_all("coordinate z[$0", &["i"]);
    check_all("parameter k[$0", &["i"]);
    check_all("constraint rod[$0", &["i"]);
    check_all("let Z[$0", &["i"]);
}

#[test]
fn sums_want_an_index_and_its_range() {
    check_all("kinetic T = sum($0", &["i"]);
    check_all("kinetic T = sum(j $0", &["in"]);
    check_all("kinetic T = sum(j in 1..$0", &["N"]);
    check_all("kinetic T = sum(i: sum(j in $0", &["i", "N"]);
    check_all("index j: 1..$0", &["N"]);
}

#[test]
fn a_member_is_offered_where_an_index_is_bound() {
    check("potential V = sum(i: 1/2 y$0", "y[i] y y[i]'");
    check_all("potential V = sum(i: $0[i]", &["y", "P", "N"]);
    check_all("symmetry s: $0", &["θ", "x₁", "y[i]", "t"]);
    check("symmetry s: y[i] -> $0", "ε i y[i] y θ");
}

#[test]
fn a_transformation_names_each_coordinate_once() {
    check_all("symmetry s: θ -> θ + ε, $0", &["x₁", "y[i]", "t"]);
    check_all("symmetry s: (θ, $0", &["x₁", "y[i]", "t"]);
    check_all("symmetry s: θ $0", &[]);
    check("symmetry s: x₁ -> $0", "ε x₁ θ");
    assert!(!labels("symmetry s: x₁ -> $0").contains(&"x₁'".to_owned()));
}

#[test]
fn claims_speak_of_momenta_and_the_energy() {
    check("conserved h = $0", "energy momentum θ θ' θ̇");
    check_all("conserved p = momentum($0", &["θ", "x₁", "y"]);
    for other in ["potential h = $0", "let h = $0"] {
        assert!(!labels(other).contains(&"energy".to_owned()), "{other}");
    }
}

#[test]
fn turns_want_an_axis_and_spins_a_rotation() {
    check("let R = turn($0", "ex ey ez P");
    check("let R = turn(ez, $0", "θ θ' θ̇");
    check("kinetic T = 1/2 m |spin($0", "P N θ");
}

#[test]
fn a_force_says_what_it_acts_on() {
    check_all("force push $0", &["on"]);
    check_all("force $0", &[]);
    check_all("force push o$0", &["on"]);
}

#[test]
fn a_run_has_clauses() {
    check_all("run a: $0", &["from", "over", "until", "with"]);
    check_all("run a: over 2 s, $0", &["from", "until", "with"]);
    check_all("run a: from $0", &["θ", "θ'", "θ̇", "x₁", "x₁'", "ẋ₁", "y"]);
    check_all("run a: from θ = 4°, $0", &["θ'", "θ̇", "x₁", "x₁'", "ẋ₁", "y", "over", "until", "with"]);
    check_all("run a: from $0, θ̇ = 1, over 2 s", &["θ", "x₁", "x₁'", "ẋ₁", "y"]);
    check_all("run a: over 2 s, with $0", &["u", "U"]);
    check("run a: over 2 s, until $0", "θ θ' θ̇");
    check("run a: with u = $0", "t m l");
    check_all("run a$0", &[]);
}

#[test]
fn values_of_a_run_have_the_units_of_their_coordinates() {
    check("run a: from x₁ = 4 $0", "m mm cm");
    check("run a: from θ' = 4 $0", "rad/s r/min °/s");
    check("run a: from ẋ₁ = 4 m/$0", "s");
    check("run a: over 20 $0", "s ms min h");
    check_all("run a: from x₁ = 4 m $0", &[]);
}

#[test]
fn a_system_has_options() {
    check_all("system s, $0", &["dimensionless", "with"]);
    check_all("system s, with $0\nparameter c, ħ", &["c", "ħ"]);
    check_all("system s, with c = 1, $0\nparameter c, ħ", &["c", "ħ"]);
    check_all("system $0", &[]);
}

#[test]
fn a_colon_is_followed_by_a_quantity() {
    check("coordinate z: $0", "length angle mass time");
    check("coordinate z:$0", "length");
    check("parameter J: mom$0", "moment_of_inertia momentum");
    check("function V(r): $0", "length");
    check("parameter k: N/$0", "m");
    check("parameter k: $0 s/m = 3 N s/m", "m mm");
    check_all("coordinate z: length $0", &[]);
    assert_eq!(entry("parameter k: $0", "stiffness").detail, "N/m");
}

#[test]
fn a_number_is_followed_by_a_unit() {
    check("parameter M: mass = 3 $0", "kg g t");
    check("parameter M: mass = 3k$0", "kg km");
    check("parameter F: force = 2 N, l₂: length = 3 $0", "m mm");
    check_all("parameter M: mass = $0", &[]);
    check_all("parameter M: mass = 3$0", &[]);
    check_all("parameter M: mass = 3 kg $0", &[]);
}

#[test]
fn a_new_name_is_one_that_is_missing() {
    check_all("parameter $0\npotential V = 1/2 k x₁^2 + c₂ + W(x₁) + z'^2", &["k", "c₂", "W", "z"]);
    check_all("coordinate $0\npotential V = 1/2 k x₁^2 + W(x₁) + z'^2", &["z", "k", "W"]);
    check_all("function $0\npotential V = 1/2 k x₁^2 + W(x₁)", &["W", "k"]);
    check_all("index $0\nkinetic T = sum(j: 1/2 m y[j]^2)", &["j"]);
    check_all("coordinate $0", &[]);
    check_all("parameter k$0\npotential V = 1/2 k x₁^2", &["k"]);
    check_all("parameter k, $0\npotential V = 1/2 k x₁^2 + d", &["d"]);
    assert_eq!(entry("parameter $0\npotential V = k", "k").detail, "used in potential V, nowhere declared");
}

#[test]
fn the_name_of_an_item_is_free() {
    for line in ["kinetic $0", "kinetic T$0", "kinetic T $0", "symmetry $0", "run $0", "constraint $0", "let f($0"] {
        check_all(line, &[]);
    }
}

#[test]
fn a_formula_without_a_name_is_seen_by_its_signs() {
    check("kinetic 1/2 $0", "θ' θ̇");
    check("constraint x₁^2 + $0", "θ");
    check("symmetry θ -> $0", "ε θ");
    check("run from $0", "θ");
}

#[test]
fn nothing_in_comments_texts_and_numbers() {
    for line in [
        "potential V = m # $0",
        "potential V = m # \\the$0",
        "# $0",
        "include \"si$0",
        "include \"si$0\"",
        "potential V = 1$0",
        "potential V = 1$02 m",
        "potential V = 1.2e$0",
        "potential V = 1.2e3$0",
        "potential V = x₁'$0",
        "potential V = (m + l)$0",
        "potential V = |P|$0",
        "potential V = r²$0",
    ] {
        check_all(line, &[]);
    }
}

#[test]
fn an_item_goes_on_over_lines() {
    check("potential V = m\n    + $0", "θ");
    check("potential V = m # (\n\n  + $0", "θ");
    check("potential V =\r\n\t$0\r\n", "θ");
    check("potential V = m\n$0", "coordinate");
}

#[test]
fn broken_text_is_read_as_far_as_it_goes() {
    check("potental V = $0", "θ");
    check("potential V = (((]] m * / $0", "θ");
    check("parameter k:: \npotential V = $0\nlet", "θ");
    check_all("hello $0", &[]);
}

#[test]
fn details_tell_quantity_and_value() {
    let of = |label| entry("potential V = $0", label);
    assert_eq!((of("m").detail.as_str(), of("m").documentation.as_deref()), ("mass = 2 kg", Some("bob")));
    assert_eq!(of("x₁").documentation.as_deref(), Some("along the rail"));
    assert_eq!((of("l").detail.as_str(), of("P").detail.as_str()), ("= 1 m", "= (l sin θ, -l cos θ)"));
    assert_eq!((of("U").detail.as_str(), of("U").insert.as_str()), ("U(r): energy", "U"));
    assert_eq!((of("u").detail.as_str(), of("sin").detail.as_str()), ("force", "sin(x)"));
    assert_eq!(of("x₁'").detail, "velocity of x₁");
}

#[test]
fn names_that_are_used_nearby_rank_higher() {
    let far = "let a = 1\n".repeat(4);
    let model = format!("system s\nparameter p\nparameter q\ncoordinate z\n{far}potential V = q z\npotential W = $0");
    check(&model, "z q p");
}

#[test]
fn letters_by_their_names() {
    let found = at("coordinate \\the$0");
    assert_eq!((found.list[0].insert.as_str(), found.list[0].filter.as_str()), ("θ", "\\theta"));
    assert_eq!(found.range.len(), 4);
    for (typed, sign) in
        [("\\cdot", "·"), ("\\to", "→"), ("\\^2", "²"), ("\\_1", "₁"), ("\\ddot", "\u{308}"), ("\\hbar", "ħ")]
    {
        assert_eq!(at(&format!("let z = r{typed}$0")).list[0].insert, sign);
    }
    assert_eq!(at("\\the$0").list[0].insert, "θ");
}

#[test]
fn a_letter_is_also_typed_without_a_backslash() {
    assert_eq!(entry("potential V = thet$0", "θ").filter, "theta");
    assert_eq!(entry("potential V = t$0", "θ'").filter, "theta'");
    // There is no φ: it comes last, behind what the model has.
    let phi = |line| {
        at(line).list.iter().filter(|c| c.kind == CompletionKind::Letter).map(|c| c.insert.clone()).collect::<Vec<_>>()
    };
    assert_eq!(phi("potential V = phi$0"), ["φ"]);
    assert_eq!(phi("coordinate phi1$0"), ["φ₁"]);
    assert_eq!(phi("potential V = theta$0"), [""; 0]);
}

#[test]
fn names_of_other_files_stand_behind_those_of_the_file() {
    use crate::fixture::Folder;
    let text = "system s\ninclude \"site.least\"\ncoordinate z: length\npotential V = ";
    let files = Folder(&[("site.least", "parameter g: acceleration = 9.8 m/s^2 # on the pier\nparameter z")]);
    let checked = crate::Session::new().check("folder/s.least", text, &files);
    let foreign: Vec<SymbolRow> = checked.symbols.iter().filter(|s| s.origin.is_some()).cloned().collect();
    let list = complete(text, text.len(), &foreign).list;
    let g = list.iter().find(|c| c.label == "g").expect("g");
    assert_eq!((g.detail.as_str(), g.documentation.as_deref()), ("acceleration, from site.least", Some("on the pier")));
    assert_eq!(list.iter().filter(|c| c.label == "z").count(), 1);
}

#[test]
fn the_word_under_the_cursor_is_replaced() {
    let word = |line: &str| {
        let text = format!("{MODEL}{}", line.replace("$0", ""));
        text[at(line).range].to_owned()
    };
    assert_eq!(word("potential V = m$0ass"), "mass");
    assert_eq!(word("potential V = 2x$0"), "x");
    assert_eq!(word("potential V = $0"), "");
    assert_eq!(word("potential V = θ̇$0"), "θ̇");
    assert_eq!(word("potential V = \\the$0ta + x"), "\\theta");
    assert_eq!(word("potential V = \\Delta$0x"), "\\Delta");
}

#[test]
fn lists_that_came_too_early_are_asked_for_again() {
    assert!(at("potential V = $0").incomplete && at("potential V = t$0").incomplete);
    assert!(!at("potential V = th$0").incomplete && !at("$0").incomplete);
}
