//! What formulas mean, as expressions.

use crate::checked::Checked;
use crate::database::Session;
use crate::include::NoFiles;
use leastwise_algebra::{Budget, DisplayOptions, verbatim};

/// Checks that two formulas are the same expression after expansion. `declarations` come before them.
fn same(declarations: &str, left: &str, right: &str) {
    let text = format!(
        "{declarations}\nlet whole = {left}\nlagrangian a = {left}\nlagrangian b = {right}\nlagrangian c = whole\n"
    );
    let (mut session, checked) = lowered(&text);
    let sums: Vec<_> = checked.model().terms.iter().map(|t| session.arena.sum(&t.parts)).collect();
    // The parts of `a` are its summands: together they are the whole, which `c` gives in one piece.
    for other in [sums[1], sums[2]] {
        let difference = session.arena.sub(sums[0], other);
        let rest = session.arena.expand(difference, &mut Budget::new(1_000_000)).unwrap();
        let shown = |e| verbatim(&session.arena, e, &DisplayOptions::default()).text();
        assert_eq!(shown(rest), "0", "{left} is {}, not {}", shown(sums[0]), shown(other));
    }
    for (term, place) in checked.model().terms.iter().zip(&checked.terms) {
        assert_eq!(term.parts.len(), place.parts.len());
    }
}

fn lowered(text: &str) -> (Session, Checked) {
    let mut session = Session::new();
    let checked = session.check("a.least", text, &NoFiles);
    assert_eq!(crate::fixture::errors(&checked), [""; 0], "{text}");
    (session, checked)
}

const PLANE: &str = "coordinate x, y, z, r, θ, φ\nparameter m, k, a\nlet P = (x, y)\nlet Q = (r, θ)\n\
                     let A = (x, y, z)\nlet B = (r, θ, φ)";

#[test]
fn vectors() {
    same(PLANE, "|P|^2", "x^2 + y^2");
    same(PLANE, "|P'|²", "x'^2 + y'^2");
    same(PLANE, "P·Q", "x r + y θ");
    same(PLANE, "1/2 m P'·P'", "1/2 m (x'^2 + y'^2)");
    same(PLANE, "dot(P, P')", "x x' + y y'");
    same(PLANE, "(A×B)[1]", "y φ - z θ");
    same(PLANE, "(A×B)·A", "0");
    same(PLANE, "cross(A, B)[2]", "z r - x φ");
    same(PLANE, "P×Q", "x θ - y r");
    same(PLANE, "(2 P - Q/k)[2]", "2 y - θ/k");
    same(PLANE, "norm(A)", "sqrt(x^2 + y^2 + z^2)");
    same(PLANE, "ez·A", "z");
    same(PLANE, "(P')[2] + P'[2] + P[2]'", "3 y'");
}

#[test]
fn matrices() {
    let declared = format!("{PLANE}\nlet R = ((1, 2), (3, k))");
    same(&declared, "P·R·Q", "x r + 2 x θ + 3 y r + k y θ");
    same(&declared, "(R·P)[2]", "3 x + k y");
    same(&declared, "(R·R)[1, 2]", "2 + 2 k");
    same(&declared, "transpose(R)[1, 2] + R[1][2]", "5");
    same(&declared, "B·diag(k, k, a)·B", "k r^2 + k θ^2 + a φ^2");
}

#[test]
fn turns_and_their_spin() {
    same(PLANE, "(turn(ez, θ)·A)[1]", "x cos θ - y sin θ");
    same(PLANE, "(turn(ex, θ)·ey)[3]", "sin θ");
    same(PLANE, "(turn(ey, θ)·ez)[1]", "sin θ");
    same(PLANE, "spin(turn(ex, θ)·turn(ez, φ))[1]", "θ' cos φ");
    same(PLANE, "spin(transpose(turn(ex, θ)))[1]", "-θ'");
    // Without the turns the same comes from the matrix.
    same(PLANE, "spin(((cos θ, -sin θ, 0), (sin θ, cos θ, 0), (0, 0, 1)))[3]", "θ' (cos² θ + sin² θ)");
}

#[test]
fn the_angular_velocity_in_the_bodys_axes_is_eulers() {
    // ω = (φ̇ sin θ sin ψ + θ̇ cos ψ, φ̇ sin θ cos ψ − θ̇ sin ψ, φ̇ cos θ + ψ̇) for the axes z, x, z.
    let declared = "coordinate φ, θ, ψ\nlet w = spin(turn(ez, φ)·turn(ex, θ)·turn(ez, ψ))";
    same(declared, "w[1]", "φ' sin θ sin ψ + θ' cos ψ");
    same(declared, "w[2]", "φ' sin θ cos ψ - θ' sin ψ");
    same(declared, "w[3]", "φ' cos θ + ψ'");
}

#[test]
fn primes_are_time_derivatives() {
    same(PLANE, "(r cos θ)'", "r' cos θ - r θ' sin θ");
    same("coordinate x\ninput u", "(u t)''", "u'' t + 2 u'");
    same("coordinate x\ninput u", "(u x)'", "u' x + u x'");
    same("coordinate x\nfunction U(s)", "U(x)' + U'(x)", "U'(x) x' + U'(x)");
    same("coordinate x, y\nfunction W(a, b)", "W(x, y)'", "W'[1](x, y) x' + W'[2](x, y) y'");
    same("coordinate x, y\nfunction W(a, b)", "W'[1,2](x, y)'", "W'[1,1,2](x, y) x' + W'[1,2,2](x, y) y'");
}

#[test]
fn definitions_with_arguments() {
    same("coordinate x, y\nlet f(a, b) = a - 2 b", "f(y, x)", "y - 2 x");
    // Arguments hide everything and inherit nothing.
    same("coordinate x, y\nlet f(x) = x' + y", "f(y^2)", "2 y y' + y");
    same("coordinate x\nlet len(P) = |P|\nlet two(x) = (x, 2 x)", "len(two(3))", "sqrt(45)");
    same("coordinate x\nlet f(a) = a^3", "f'(x) + f''(2)", "3 x^2 + 12");
    same("coordinate x\nlet g = 2 h\nlet h = x", "g", "2 x");
}

#[test]
fn families() {
    let three = "index i: 1..3\ncoordinate x[i]\nparameter m[i]\nfunction u[i](t)\nlet N = 3";
    same(three, "sum(i: m[i] x[i]'^2)", "m[1] x[1]'^2 + m[2] x'[2]^2 + m[3] x[3]'^2");
    same(three, "sum(i in 1..N-1: (x[i+1] - x[i])^2)", "(x[2] - x[1])^2 + (x[3] - x[2])^2");
    same(three, "sum(i in 1..2: sum(j in i+1..3: x[i] x[j]))", "x[1] x[2] + x[1] x[3] + x[2] x[3]");
    same(three, "sum(i: u[i](t) x[i])", "u[1](t) x[1] + u[2](t) x[2] + u[3](t) x[3]");
    same(three, "sum(k in 1..4: k)", "10");
    same(three, "sum(k in 1..0: k x[1])", "0");
    same(three, "sum(k in 1..1000: x[2])", "1000 x[2]");
    let chain = format!("{three}\nlet X[i] = sum(j in 1..i: x[j])\nlet P[i] = (x[i], i)");
    same(&chain, "X[2]'", "x[1]' + x[2]'");
    same(&chain, "sum(i: P[i][1] P[i][2])", "x[1] + 2 x[2] + 3 x[3]");
    same(&chain, "|P[2]'|^2", "x[2]'^2");
    same(&format!("{three}\nlet f[i](a) = a x[i]"), "f[2](5)", "5 x[2]");
}

#[test]
fn large_families_stay_symbolic() {
    let (session, checked) = lowered(
        "index i: 1..1000\ncoordinate x[i]\nkinetic T = sum(i: 1/2 x[i]'^2)\n\
         potential V = sum(i in 1..999: (x[i+1] - x[i])^2)\nsymmetry shift: x[i] -> x[i] + ε\n",
    );
    assert_eq!(checked.model().coordinates.len(), 1);
    assert!(checked.model().coordinates[0].members.is_some());
    assert!(session.arena.size(checked.model().terms[1].parts[0]) < 40);
    assert_eq!(checked.symmetries()[0].images.len(), 1);
    same(
        "index i: 1..100\ncoordinate x[i]\nlet X[i] = sum(j in 1..i: x[j])",
        "sum(i: X[i])",
        "sum(k in 1..100: sum(l in 1..k: x[l]))",
    );
    // The index of a definition and that of a sum around it may have one name.
    same(
        "index i: 1..100\ncoordinate x[i]\nlet X[i] = sum(j in i..100: x[j])",
        "sum(j in 1..100: X[j])",
        "sum(k in 1..100: sum(l in k..100: x[l]))",
    );
}

#[test]
fn momenta_and_energy_in_claims() {
    let (mut session, checked) = lowered(
        "coordinate x, y\nparameter m, k\nkinetic T = 1/2 m (x'^2 + y'^2)\npotential V = 1/2 k x^2\n\
         conserved p = momentum(x) y - x momentum(y)\nconserved h = energy\nconserved both = (momentum(x), x)\n",
    );
    let names: Vec<_> = checked.conserved().iter().map(|c| c.name.as_str()).collect();
    assert_eq!(names, ["p", "h", "both[1]", "both[2]"]);
    let shown = |session: &Session, k: usize| {
        verbatim(&session.arena, checked.conserved()[k].expr, &DisplayOptions::default()).plain()
    };
    assert_eq!(shown(&session, 2), "m*x'");
    let h = session.arena.expand(checked.conserved()[1].expr, &mut Budget::new(1000)).unwrap();
    let text = verbatim(&session.arena, h, &DisplayOptions::default()).plain();
    assert!(text.contains("x^2") && text.contains("x'^2") && !text.contains('-'), "{text}");
}

#[test]
fn momenta_of_large_families() {
    let (session, checked) = lowered(
        "index i: 1..100\ncoordinate x[i]\nparameter m\nkinetic T = sum(i: 1/2 m x[i]'^2) + x[3]' x[4]'\n\
         conserved a = momentum(x[3])\nconserved b = momentum(x[7])\n",
    );
    let shown = |k: usize| verbatim(&session.arena, checked.conserved()[k].expr, &DisplayOptions::default()).plain();
    assert_eq!(shown(0), "x[4]' + m*x[3]'");
    assert_eq!(shown(1), "m*x[7]'");
}

#[test]
fn parts_have_their_places() {
    let text = "coordinate θ, φ\nparameter m, l, g, b, k\n\
                potential pulls = m l (g (1 - cos θ) - b sin θ cos φ)\n\
                potential more = sum(i in 1..3: i θ - φ)/k\nkinetic whole = (θ' + φ')^2\n";
    let (session, checked) = lowered(text);
    let parts = |t: usize| checked.terms[t].parts.iter().map(|r| &text[r.clone()]).collect::<Vec<_>>();
    assert_eq!(parts(0), ["1", "cos θ", "b sin θ cos φ"]);
    assert_eq!(parts(1), ["i θ", "φ"]);
    assert_eq!(parts(2), ["(θ' + φ')^2"]);
    let shown = |t: usize, p: usize| {
        verbatim(&session.arena, checked.model().terms[t].parts[p], &DisplayOptions::default()).plain()
    };
    assert_eq!(shown(0, 2), "-m*b*l*sin(θ)*cos(φ)");
    assert_eq!(shown(1, 0), "6*θ/k");
    assert_eq!(shown(1, 1), "-3*φ/k");
}

#[test]
fn names_where_the_model_gives_none() {
    let (_, checked) = lowered(
        "coordinate x\nkinetic 1/2 x'^2\npotential V = x\nkinetic x'\nindex i: 1..2\nconstraint c[i]: (i x, x) = (1, 2)\n",
    );
    let names: Vec<_> = checked.model().terms.iter().map(|t| t.name.as_str()).collect();
    assert_eq!(names, ["kinetic 1", "V", "kinetic 2"]);
    let constraints: Vec<_> = checked.model().constraints.iter().map(|c| c.name.as_str()).collect();
    assert_eq!(constraints, ["c[1][1]", "c[1][2]", "c[2][1]", "c[2][2]"]);
}

#[test]
fn what_is_deep_or_long_ends() {
    let parentheses = format!("coordinate x\nkinetic T = {}x{}\n", "(".repeat(250), ")".repeat(250));
    lowered(&parentheses);
    let sines = format!("coordinate x\nkinetic T = {}x{}\n", "sin(1 + ".repeat(120), ")".repeat(120));
    lowered(&sines);
    let summands: Vec<String> = (1..=5000).map(|i| format!("{i} x^2 cos({i} x)")).collect();
    let (_, checked) = lowered(&format!("coordinate x\nkinetic T = {}\n", summands.join(" + ")));
    assert_eq!(checked.model().terms[0].parts.len(), 1);
    let chain: Vec<String> = (1..=2000).map(|i| format!("let c{i} = sin(c{}) + x", i - 1)).collect();
    lowered(&format!("coordinate x\nlet c0 = x\n{}\nkinetic T = c2000\n", chain.join("\n")));
    let mut session = Session::new();
    let calls: Vec<String> = (1..=2000).map(|i| format!("let f{i}(x) = f{}(x) + f{}(2 x)", i - 1, i - 1)).collect();
    let text = format!("coordinate x\nlet f0(x) = x\n{}\nkinetic T = f2000(x)\n", calls.join("\n"));
    let checked = session.check("a", &text, &NoFiles);
    assert_eq!(checked.findings.iter().map(|f| f.code).collect::<Vec<_>>(), ["too-large"]);
}
