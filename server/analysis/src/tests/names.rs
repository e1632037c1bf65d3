//! Rules about names, items and included files.

use crate::fixture::{Folder, check, check_in};
use crate::include::{Files, MAX_DEPTH};

#[test]
fn an_undeclared_name_is_told_once_and_taken_for_a_parameter() {
    let checked = check(
        "
coordinate x
kinetic T = 1/2 m x'^2
#               ^ undeclared-name: `m` is not declared
potential V = 1/2 m q x^2
#                   ^ undeclared-name: `q` is not declared
",
    );
    assert_eq!(checked.model().terms.len(), 2);
    let finding = &checked.findings[0];
    assert_eq!(&checked.text[finding.related[0].range.clone()], "m");
    assert_eq!(finding.fixes[0].title, "declare `parameter m`");
    assert_eq!(finding.fixes[0].edits[0].1, "parameter m\n");
}

#[test]
fn what_was_meant_is_offered() {
    let checked = check(
        "
coordinate length_of_rope
parameter mass, m₁
kinetic T = 1/2 mas m1 length_of_rop'^2 + mass + m₁
#               ^^^ undeclared-name: did you mean `mass`?
#                   ^^ undeclared-name: did you mean `m₁`?
#                      ^^^^^^^^^^^^^ undeclared-name: did you mean `length_of_rope`?
",
    );
    assert_eq!(checked.findings[0].fixes[0].title, "write mass");
}

#[test]
fn an_undeclared_function_is_offered_as_one() {
    let checked = check(
        "
coordinate r
kinetic T = 1/2 r'^2
potential V = U(r)
#             ^ undeclared-name: `U` is not declared
",
    );
    assert_eq!(checked.findings[0].fixes[0].title, "declare `function U(r)`");
}

#[test]
fn units_in_formulas() {
    let checked = check(
        "
coordinate x
kinetic T = 1/2 x'^2
potential V = 9.81 kg x
#                  ^^ undeclared-name: `kg` is not declared
",
    );
    assert!(checked.findings[0].help.as_ref().unwrap().starts_with("units do not stand in formulas"));
}

#[test]
fn a_name_is_declared_once() {
    let checked = check(
        "
coordinate x
parameter m, x
#            ^ declared-twice: `x` is declared twice
let m = 3
#   ^ declared-twice: `m` is declared twice
kinetic T = 1/2 m x'^2
function f(a, a)
#             ^ declared-twice: `a` stands twice among the arguments
#        ^ unused-name: the function `f` is not used
",
    );
    assert_eq!(&checked.text[checked.findings[0].related[0].range.clone()], "x");
}

#[test]
fn items_are_told_apart_by_their_names() {
    check(
        "
coordinate x
kinetic T = 1/2 x'^2
potential T = 1/2 x^2
#         ^ named-twice: another term or force is named `T` already
symmetry T: t -> t + ε
conserved T = energy
conserved T = energy
#         ^ named-twice: another claim is named `T` already
",
    );
}

#[test]
fn reserved_names() {
    check(
        "
coordinate x
parameter t, pi, ez, sin
#         ^ reserved-name: `t` is the time
#            ^^ reserved-name: `π` is the number π
#                ^^ reserved-name: `ez` is a unit vector
#                    ^^^ reserved-name: `sin` is a function of the language
kinetic T = 1/2 x'^2
",
    );
}

#[test]
fn a_declared_epsilon_hides_behind_that_of_a_transformation() {
    check(
        "
coordinate x
parameter ε
kinetic T = 1/2 ε x'^2
symmetry shift: x -> x + ε
^^^^^^^^ shadowed-epsilon: in a transformation ε is its parameter
",
    );
}

#[test]
fn names_that_read_alike() {
    check(
        "
coordinate θ, θ₁
parameter theta, m_1, m₁
#         ^^^^^ look-alike-names: `theta` and `θ` are two names
#                     ^^ look-alike-names: `m₁` and `m_1` are two names
kinetic T = 1/2 m_1 θ'^2 + m₁ theta θ₁'^2
",
    );
}

#[test]
fn circles_of_definitions() {
    check(
        "
coordinate x
let a = b + 1
#   ^ circular-definition: these definitions need each other: a → b → c → a
let b = 2 c
let c = a
let d = d
#   ^ circular-definition: `d` is defined by itself
let f(x) = g(x)
#   ^ circular-definition: f → g → f
let g(x) = f(x) + 1
let e = a + x
kinetic T = 1/2 x'^2 + e + d + f(x)
",
    );
}

#[test]
fn an_index_in_a_circle() {
    check(
        "
let N = sum(i: 1)
#   ^ circular-definition: N → i → N
index i: 1..N
coordinate x[i]
kinetic T = sum(i: x[i]'^2)
",
    );
}

#[test]
fn unused_names() {
    let checked = check(
        "
coordinate x
parameter m, k
#            ^ unused-name: the parameter `k` is not used
let a = 2
#   ^ unused-name: the definition `a` is not used
input u
#     ^ unused-name: the input `u` is not used
index i: 1..3
#     ^ unused-name: the index `i` is not used
kinetic T = 1/2 m x'^2
",
    );
    assert!(checked.complete);
    // A file to be included has no use for its own names.
    check("parameter g = 9.81 m/s^2\nlet a = 2");
}

#[test]
fn the_system_is_named_once_and_first() {
    check(
        "
coordinate x
system a
^^^^^^ system-place: `system` stands before all other items
kinetic T = 1/2 x'^2
system b
^^^^^^ system-place: a model has one `system`
",
    );
}

#[test]
fn indices_are_declared() {
    let checked = check(
        "
parameter m
coordinate x[i], y[m], z
#            ^ undeclared-index: the index `i` is not declared
#                  ^ undeclared-index: `m` is a parameter, not an index
kinetic T = 1/2 m z'^2 + sum(j: z'^2) + sum(m: z) + sum(i: x[i]'^2)
#                            ^ undeclared-index: the index `j` is not declared
#                                           ^ undeclared-index: `m` is a parameter, not an index
",
    );
    assert!(checked.model().terms.is_empty());
    assert_eq!(checked.findings[0].fixes[0].edits[0].1, "index i: 1..3\n");
}

const SITE: Folder = Folder(&[
    ("site.least", "parameter g = 9.81 m/s^2\nlet twice(x) = 2 x\nassume g > 0\n"),
    ("full.least", "parameter a\nkinetic T = 3\nlet b = +\n"),
    ("self.least", "include \"self.least\"\nparameter a\n"),
    ("one.least", "include \"two.least\"\n"),
    ("two.least", "include \"one.least\"\nparameter b\n"),
    ("wrong.least", "\nlet a = q\n"),
]);

#[test]
fn included_names_are_there() {
    let checked = check_in(
        "
include \"site.least\"
coordinate x
kinetic T = 1/2 x'^2
potential V = g twice(x)
",
        &SITE,
    );
    assert_eq!(checked.assumptions().len(), 1);
    assert_eq!(checked.symbol("g").unwrap().origin.as_ref().unwrap().0.as_ref(), "site.least");
}

#[test]
fn what_is_included_twice_counts_once() {
    check_in("include \"site.least\"\ninclude \"./site.least\"\ncoordinate x\nkinetic T = g x'^2\n", &SITE);
    check_in(
        "
include \"site.least\"
coordinate g
#          ^ declared-twice: `g` is declared in `site.least` already
kinetic T = 1/2 g'^2
",
        &SITE,
    );
}

#[test]
fn other_items_are_not_included() {
    check_in(
        "
include \"full.least\"
#       ^^^^^^^^^^^^ included-finding: `full.least`, line 2: `kinetic` is not taken in
#       ^^^^^^^^^^^^ included-finding: `full.least`, line 3: 
coordinate x
kinetic T = a x'^2
",
        &SITE,
    );
    check_in(
        "
include \"wrong.least\"
#       ^^^^^^^^^^^^^ included-finding: `wrong.least`, line 2: `q` is not declared
coordinate x
kinetic T = a x'^2
",
        &SITE,
    );
}

#[test]
fn included_files_that_are_not_there() {
    check_in(
        "
include \"nowhere.least\"
#       ^^^^^^^^^^^^^^^ include-file: `nowhere.least` cannot be read: there is no such file
include \"\"
#       ^^ include-file: no file is named
coordinate x
kinetic T = x'^2
",
        &SITE,
    );
}

#[test]
fn files_that_include_each_other() {
    check_in(
        "
include \"self.least\"
#       ^^^^^^^^^^^^ included-finding: `self.least`, line 1: `self.least` includes itself
include \"one.least\"
#       ^^^^^^^^^^^ included-finding: `two.least`, line 1: `one.least` includes this file
coordinate x
kinetic T = x'^2
",
        &SITE,
    );
}

/// File n includes file n + 1.
struct Ladder;

impl Files for Ladder {
    fn read(&self, _: &str, include: &str) -> Result<(String, String), String> {
        let n: usize = include.parse().map_err(|_| "no number".to_owned())?;
        Ok((include.to_owned(), format!("include \"{}\"\n", n + 1)))
    }
}

#[test]
fn included_files_are_not_nested_without_end() {
    let checked = check_in(
        "
include \"1\"
#       ^^^ included-finding: `33` is not taken in: the included files are too many or too deeply nested
coordinate x
kinetic T = x'^2
",
        &Ladder,
    );
    assert_eq!(MAX_DEPTH, 32);
    assert!(!checked.complete || checked.model().terms.len() == 1);
}

#[test]
fn a_text_that_cannot_be_read_brings_no_further_findings() {
    check(
        "
coordinate x
parameter m, k
let broken = k +
#              ^ missing-operand: 
kinetic T = 1/2 m x'^2 + broken
",
    );
    // `q` may be meant to be declared in the line that cannot be read.
    let checked = check_any("coordinate x\nparamete% q\nkinetic T = 1/2 q x'^2\n");
    assert!(checked.iter().all(|c| *c != "undeclared-name"), "{checked:?}");
}

fn check_any(text: &str) -> Vec<&'static str> {
    let checked = crate::database::Session::new().check("a", text, &SITE);
    assert!(!checked.findings.is_empty());
    checked.findings.iter().map(|f| f.code).collect()
}

#[test]
fn too_many_findings_are_not_all_told() {
    let text = format!("coordinate x\nkinetic T = x'^2\n{}", "potential = = =\n".repeat(3000));
    let found = check_any(&text);
    assert_eq!((found.len(), found.last()), (1001, Some(&"more-findings")));
}

#[test]
fn coordinates_of_included_files_are_not_there() {
    let folder = Folder(&[("other.least", "coordinate q\n")]);
    check_in(
        "
include \"other.least\"
#       ^^^^^^^^^^^^^ included-finding: `other.least`, line 1: `coordinate` is not taken in
coordinate x
kinetic T = x'^2 q
#                ^ undeclared-name: `q` is not declared
",
        &folder,
    );
}
