//! How formulas are read: one test per rule of the language.

mod common;

use common::{read, shape};
use leastwise_grammar::parse_formula;
use leastwise_grammar::tree::{FormulaKind, Severity};

#[track_caller]
fn check(text: &str, expected: &str) {
    assert_eq!(shape(&read(text)), expected, "{text}");
}

#[test]
fn sums_are_loosest_then_products_minus_powers_postfix() {
    check("a + b c^d'", "(a + (b (c ^ d')))");
    check("a - b + c", "((a - b) + c)");
    check("-x^2", "(-(x ^ 2))");
    check("-a b", "((-a) b)");
    check("a * -b", "(a * (-b))");
    check("2^-1", "(2 ^ (-1))");
    check("a^b^c", "(a ^ (b ^ c))");
    check("a - -b", "(a - (-b))");
}

#[test]
fn products_are_of_one_rank_from_left_to_right() {
    check("a/b c", "((a / b) c)");
    check("a b/c d", "(((a b) / c) d)");
    check("a/b/c", "((a / b) / c)");
    check("a·b×c * d", "(((a · b) × c) * d)");
    check("1/2 m (x' + a)^2", "(((1 / 2) m) ((x' + a) ^ 2))");
    check("m g r", "((m g) r)");
}

#[test]
fn a_function_before_a_parenthesis_is_called_and_nothing_else() {
    check("k (x - l)", "(k (x - l))");
    check("k(x - l)", "(k (x - l))");
    check("U(r)", "U(r)");
    check("U (r) k", "(U(r) k)");
    check("θ(t)", "(θ t)");
    check("atan2(y, x)", "atan2(y, x)");
    check("2(a + b)", "(2 (a + b))");
}

#[test]
fn a_known_function_takes_one_name_without_parentheses() {
    check("sin θ cos φ", "(sin(θ) cos(φ))");
    check("sin² θ φ'", "(sin^2(θ) φ')");
    check("sin^2 θ φ'", "(sin^2(θ) φ')");
    check("cos θ[j]", "cos(θ[j])");
    check("cos θ[j]' x", "(cos(θ[j]') x)");
    check("sin θ'", "sin(θ')");
    check("sinh u/c", "(sinh(u) / c)");
    check("cos Ω t", "(cos(Ω) t)");
    check("sin θ (a + b)", "(sin(θ) (a + b))");
    check("sin(θ)^2", "(sin(θ) ^ 2)");
    check("sin²(2 θ)", "sin^2((2 θ))");
    check("2^sin θ", "(2 ^ sin(θ))");
}

#[test]
fn roots_are_sqrt() {
    check("√(x + 1)", "sqrt((x + 1))");
    check("√x y", "(sqrt(x) y)");
    check("√2 x", "(sqrt(2) x)");
    check("√3/2", "(sqrt(3) / 2)");
}

#[test]
fn primes_and_dots_are_time_derivatives() {
    check("ẋ", "x'");
    check("ẍ + θ̇₁ + ẋ_cart", "((x'' + θ₁') + x_cart')");
    check("ẋ²", "(x' ^ 2)");
    check("ẋ'", "x''");
    check("länge", "länge");
    check("P'", "P'");
    check("(r cos θ)'", "(r cos(θ))'");
    check("(r^2)'", "(r ^ 2)'");
    check("r'^2", "(r' ^ 2)");
    check("x‴ + x⁗", "(x''' + x'''')");
    check("U′(r)", "U'(r)");
}

#[test]
fn the_prime_of_a_member_is_written_either_way() {
    check("x[3]'", "x[3]'");
    check("x'[3]", "x[3]'");
    check("ẋ[i+1]", "x[(i + 1)]'");
    check("x'[3]'", "x[3]''");
    assert_eq!(read("x[3]'").kind, read("x[3]′").kind.clone());
}

#[test]
fn numbers_are_exact() {
    check("0.15", "15e-2");
    check("1.2e-3", "12e-4");
    check("007", "7");
    check("0.0", "0e-1");
    check("2e3 e", "(2e3 e)");
    check("2em", "(2 em)");
}

#[test]
fn raised_digits_are_powers() {
    check("r²", "(r ^ 2)");
    check("r⁻¹²", "(r ^ (-12))");
    check("|A|²", "(|A| ^ 2)");
    check("-x²", "(-(x ^ 2))");
    check("2^x²", "(2 ^ (x ^ 2))");
}

#[test]
fn signs_have_two_spellings() {
    assert_eq!(shape(&read("pi eps µ")), shape(&read("π ε μ")));
    check("a − b", "(a - b)");
    check("ϕ ϑ ϵ", "((φ θ) ε)");
    check("theta θ", "(theta θ)");
}

#[test]
fn vectors_matrices_bars() {
    check("(a, b)", "<a, b>");
    check("(a, b, c)[1]", "<a, b, c>[1]");
    check("((1, 0), (0, 1))", "<<1, 0>, <0, 1>>");
    check("|P'|^2 |Q|", "((|P'| ^ 2) |Q|)");
    check("P'·P'", "(P' · P')");
    check("R[1, 2]", "R[1, 2]");
    check("1/2 spin(R)·diag(A, A, C)·spin(R)", "((((1 / 2) spin(R)) · diag(A, A, C)) · spin(R))");
    check("f(x)[2]", "f(x)[2]");
}

#[test]
fn sums_over_an_index() {
    check("sum(i: 1/2 m[i] x[i]'^2)", "sum(i: (((1 / 2) m[i]) (x[i]' ^ 2)))");
    check("sum(i in 1..7: x[i+1])", "sum(i in 1..7: x[(i + 1)])");
    check("sum(i in 1..7: sum(j in i+1..8: a))", "sum(i in 1..7: sum(j in (i + 1)..8: a))");
    check("sum(in in 1..N: x[in])", "sum(in in 1..N: x[in])");
    check("sum a", "(sum a)");
}

#[test]
fn a_bound_index_and_a_formal_argument_shadow_functions() {
    check("sum(U in 1..3: U (x)) U(x)", "(sum(U in 1..3: (U x)) U(x))");
    let (_, parsed) = common::read_all("let g(U) = U (x + 1)\nfunction U(r)").swap_remove(0);
    assert_eq!(common::item(&parsed.item.kind), "let g(U) = (U (x + 1))");
}

#[test]
fn derivatives_of_functions() {
    check("U'(r)", "U'(r)");
    check("U''(r)", "U''(r)");
    check("f'[1](x, y)", "f'[1](x, y)");
    check("f'[1,2](x, y)", "f'[1, 2](x, y)");
    check("U(r)'", "U(r)'");
    check("u[i](t) + u[2]'(t)", "(u(t)[i] + u'(t)[2])");
}

#[test]
fn brackets_carry_a_product_over_lines() {
    check("(a\n    b)", "(a b)");
    check("a\n  + b\n  - c", "((a + b) - c)");
    check("a +\n  b", "(a + b)");
    check("sum(i:\n  x[i]\n  y[i])", "sum(i: (x[i] y[i]))");
}

#[test]
fn long_sums_are_balanced_and_keep_their_signs() {
    let text: String = (1..100).map(|n| format!("{} {n}", if n % 3 == 0 { "+" } else { "-" })).collect();
    fn total(f: &leastwise_grammar::tree::Formula) -> i64 {
        match &f.kind {
            FormulaKind::Number(n) => n.digits.parse().unwrap(),
            FormulaKind::Neg(a) => -total(a),
            FormulaKind::Add(a, b) => total(a) + total(b),
            FormulaKind::Sub(a, b) => total(a) - total(b),
            kind => panic!("{kind:?}"),
        }
    }
    let expected: i64 = (1..100).map(|n| if n % 3 == 0 { n } else { -n }).sum();
    assert_eq!(total(&read(&text)), expected);
}

#[test]
fn hints_show_how_quotients_were_read() {
    #[track_caller]
    fn check(text: &str, readings: &[(&str, &str)]) {
        let (_, slips) = parse_formula(text, &common::functions());
        assert!(slips.iter().all(|s| s.severity == Severity::Hint));
        let mended = |at: usize, mend: usize| {
            let (span, new) = &slips[at].mends[mend].edits[0];
            let mut text = text.to_owned();
            text.replace_range(span.range(), new);
            text
        };
        let found: Vec<_> = (0..slips.len()).map(|at| (mended(at, 0), mended(at, 1))).collect();
        let expected: Vec<_> = readings.iter().map(|(a, b)| ((*a).to_owned(), (*b).to_owned())).collect();
        assert_eq!(found, expected, "{text}");
        // The first mend is how it was read.
        for (first, _) in &found {
            assert_eq!(shape(&read(first)), shape(&read(text)));
        }
    }
    check("a/b c", &[("(a/b) c", "a/(b c)")]);
    check("a/2b", &[("(a/2) b", "a/(2b)")]);
    check("m a/b c d", &[("(m a/b) c d", "m a/(b c d)")]);
    check("cos θ/2", &[("(cos θ)/2", "cos(θ/2)")]);
    check("x sinh u/c", &[("x (sinh u)/c", "x sinh(u/c)")]);
    check("-cos θ/2", &[("-(cos θ)/2", "-cos(θ/2)")]);
    check("sin² θ/2", &[("(sin² θ)/2", "sin²(θ/2)")]);
    check("1/2 m", &[]);
    check("-1/2 m", &[]);
    check("(1/2)/3 m", &[]);
    check("a/b", &[]);
    check("a/b * c", &[]);
    check("-x^2", &[]);
    check("√3/2", &[]);
    check("(a/b) c", &[]);
}
