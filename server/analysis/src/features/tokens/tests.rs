//! Each word of a text with its kind.

use super::*;
use crate::Session;
use crate::features::models::{broken, edited, with_models};
use crate::include::NoFiles;

fn of(session: &mut Session, text: &str) -> Vec<Token> {
    tokens(&session.check("model.least", text, &NoFiles))
}

/// Each line of a text, its words as `word:kind`. `+` marks a declaration, `'` a time derivative, `=` what never changes,
/// `*` what belongs to the language.
fn shown(text: &str) -> String {
    let mut out = String::new();
    let mut line = 0;
    for t in of(&mut Session::new(), text) {
        let here = text[..t.range.start].matches('\n').count();
        out.push_str(if here == line { " " } else { "\n" });
        line = here;
        let m = t.modifiers;
        let marks = [(m.declaration, "+"), (m.derivative, "'"), (m.readonly, "="), (m.built_in, "*")];
        let marks: String = marks.iter().filter(|(on, _)| *on).map(|(_, w)| *w).collect();
        let word = if t.kind == TokenKind::Comment { "#…" } else { &text[t.range] };
        let kind = format!("{:?}", t.kind).to_lowercase();
        match t.kind {
            TokenKind::Operator | TokenKind::Number => out.push_str(word),
            _ => out.push_str(&format!("{word}:{kind}{marks}")),
        }
    }
    out
}

/// The text's line that ends in `$0`, with its words.
#[track_caller]
fn check(text: &str, expected: &str) {
    let at = text.find("$0").expect("a mark");
    let line = text[..at].matches('\n').count();
    let text = text.replace("$0", "");
    let found = of(&mut Session::new(), &text);
    let here: Vec<String> = found
        .iter()
        .filter(|t| text[..t.range.start].matches('\n').count() == line)
        .map(|t| format!("{}:{:?}", &text[t.range.clone()], t.kind))
        .collect();
    assert_eq!(here.join(" "), expected);
}

#[test]
fn every_kind_of_word() {
    insta::assert_snapshot!(shown(
        "system swing  # a swing\n\
         include \"site.least\"\n\
         index i: 1..3\n\
         coordinate θ: angle\n\
         cyclic coordinate x[i], y\n\
         parameter m: mass = 2 kg, l = 1 m/s², β = 30° 10′\n\
         input u: torque\n\
         function U(s): energy\n\
         let f(x) = x² sin² x + 2·sum(j in 1..3: x[j])\n\
         let P = (l sin θ, -l cos θ)\n\
         assume m > 0, l >= 0\n\
         kinetic bob = 1/2 m |P'|^2 + f(θ') t + ẋ[1]^2\n\
         potential -m l π + U'(l)\n\
         force push on θ - y = -m θ' + √(u)\n\
         constraint rod[i]: x[i] = y\n\
         broken symmetry turn: θ -> θ + ε, t → t\n\
         conserved h = energy + momentum(y)\n\
         run r: from x[1] = 2 m, over 20 s, until x[1] < 0, with u = 0, U(s) = s\n"
    ));
}

#[test]
fn the_gimballed_rotor() {
    insta::assert_snapshot!(shown(include_str!("../../../../../grammar/examples/gimballed_rotor.least")));
}

#[test]
fn the_buoy_chain() {
    insta::assert_snapshot!(shown(include_str!("../../../../../grammar/examples/buoy_chain.least")));
}

#[test]
fn words_of_a_broken_item_keep_their_kinds() {
    let known = "coordinate θ: angle\nparameter m: mass\nfunction U(x)\n";
    check(
        &format!("{known}kinetic bob = 1/2 m θ'^2 + U(θ) + new + ($0\n"),
        "kinetic:Keyword bob:Term =:Operator 1:Number /:Operator 2:Number m:Parameter θ:Coordinate ':Operator \
         ^:Operator 2:Number +:Operator U:Function θ:Coordinate +:Operator new:Parameter +:Operator",
    );
    check(&format!("{known}parameter : mass = 2 kg$0"), "parameter:Keyword mass:Unit =:Operator 2:Number kg:Unit");
    check("knietic a = sin(2$0", "knietic:Keyword a:Term =:Operator sin:Function 2:Number");
    check("§ what is this?$0", "§:Operator what:Parameter is:Parameter this:Parameter ?:Operator");
}

#[test]
fn letters_of_all_kinds() {
    let text = "coordinate 𝑥, θ̂, länge\r\nkinetic 1/2 (𝑥̇² + θ̂'² + länge'^2 + ẍ_1)  # ẍ$0\r\n";
    check(
        text,
        "kinetic:Keyword 1:Number /:Operator 2:Number 𝑥̇:Coordinate ²:Number +:Operator θ̂:Coordinate ':Operator ²:Number \
         +:Operator länge:Coordinate ':Operator ^:Operator 2:Number +:Operator ẍ_1:Parameter # ẍ:Comment",
    );
}

#[test]
fn tokens_are_in_order_and_within_lines() {
    let mut session = Session::new();
    with_models(|text| {
        for text in broken(text) {
            let mut end = 0;
            for t in of(&mut session, &text) {
                assert!(end <= t.range.start && t.range.start < t.range.end, "{t:?}");
                let word = &text[t.range.clone()];
                assert!(!word.contains(['\n', '\r']), "{word:?}");
                // Between tokens there are spaces, brackets and commas only.
                assert!(!text[end..t.range.start].contains(char::is_alphanumeric), "{}", &text[end..t.range.start]);
                end = t.range.end;
            }
        }
    });
}

#[test]
fn a_session_that_has_lived_colours_like_a_new_one() {
    let mut session = Session::new();
    let mut state = 5;
    with_models(|original| {
        let mut text = original.to_string();
        for step in 0..40 {
            assert_eq!(of(&mut session, &text), of(&mut Session::new(), &text), "after step {step} of\n{text}");
            text = edited(&text, original, &mut state);
        }
    });
}
