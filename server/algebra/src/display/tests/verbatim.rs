//! Printing without simplifying: order, signs, fractions, spelling.

use super::reader::{Names, read};
use crate::arena::Arena;
use crate::display::{DisplayOptions, verbatim};

/// Reads, prints, compares, and reads both spellings back.
fn check(source: &str, text: &str) {
    let names = Names::new("x y z r θ θ₁ θ₂ φ ψ x₁ x₂ länge q q₁ x_cart", "U V f");
    let mut arena = Arena::new();
    let e = read(&mut arena, &names, source);
    let layout = verbatim(&arena, e, &DisplayOptions::default());
    assert_eq!(layout.text(), text, "{}", layout.plain());
    for spelling in [layout.text(), layout.plain()] {
        let back = read(&mut arena, &names, &spelling);
        assert_eq!(back, e, "{spelling}");
    }
    assert_eq!(layout.to_expr(&mut arena), Ok(e));
}

#[test]
fn order_of_a_product() {
    check("θ'' l^2 m", "m l² θ̈");
    check("cos(θ) l g m", "m g l cos θ");
    check("m*g*R", "m g R");
    check("y' x B e", "e B x ẏ");
    check("φ' sin(θ)^2 m l^2", "m l² sin² θ φ̇");
    check("m₂ m₁ G/r", "G m₁ m₂/r");
    check("θ₁'' l₁^2 (m₂ + m₁)", "(m₁ + m₂) l₁² θ̈₁");
}

#[test]
fn signs() {
    check("k (x₂ - x₁)", "k (x₂ - x₁)");
    check("-k (x₁ - x₂)", "k (x₂ - x₁)");
    check("m x₁'' + κ x₁ - k (x₂ - x₁ - l)", "m ẍ₁ + κ x₁ - k (x₂ - x₁ - l)");
    check("1/2 k (x₂ - x₁ - l)^2", "1/2 k (x₂ - x₁ - l)²");
    check("1/2 k (r - l₀)^2", "1/2 k (r - l₀)²");
    check("m g l (1 - cos θ)", "m g l (1 - cos θ)");
    check("1 + ε₁ cos θ", "1 + ε₁ cos θ");
    check("-m g r cos θ", "-m g r cos θ");
    check("-(a+b) x", "-(a + b) x");
    check("cos(θ₂ - θ₁) sin(θ₂ - θ₁)", "-sin(θ₁ - θ₂) cos(θ₁ - θ₂)");
    check("-x", "-x");
    check("-x - y", "-x - y");
    check("-x - y (a - b)", "(b - a) y - x");
}

#[test]
fn fractions() {
    check("q₁^2/(2 C)", "q₁²/(2 C)");
    check("m g/l", "m g/l");
    check("m g/(2 l)", "m g/(2 l)");
    check("1/2 m x'^2", "1/2 m ẋ²");
    check("k x/(x^2+y^2)^(3/2)", "k x/(x² + y²)^(3/2)");
    check("k/sqrt(x^2+y^2)", "k/√(x² + y²)");
    check("J/a^2 + m", "m + J/a²");
    check("1/x", "1/x");
    check("3/(2 x)", "3/(2 x)");
    check("1/2 (x'^2 + y'^2)/y^2", "(ẋ² + ẏ²)/(2 y²)");
    check("1/2 (x^2 + y^2) + x^2 y - y^3/3", "1/2 (x² + y²) + x² y - 1/3 y³");
    check("2^(1/2) x", "√(2) x");
    check("a^n + 2^n + x^(n+1)", "2^n + x^(1 + n) + a^n");
    check("exp(-x/a)", "exp(-x/a)");
    check("1/sin(θ)^2", "1/sin² θ");
}

#[test]
fn spelling() {
    check("länge'^2 + x_cart'", "länge'² + ẋ_cart");
    check("x'''", "x'''");
    check("U(r) + U'(r) x + U''(r)", "U''(r) + U(r) + x U'(r)");
    check("V'[1,2](x, y)", "V'[1,2](x, y)");
    check("sin(2 θ) + sin(θ')", "sin(2 θ) + sin θ̇");
    check("abs(x) sign(y) atan2(y, x)", "atan2(y, x) abs(x) sign(y)");
    check("tanh(r'/v)", "tanh(ṙ/v)");
    check("cos(θ₁ - θ₂)^2", "cos²(θ₁ - θ₂)");
    check("x[3]'^2 + x[3]''", "x[3]'' + x[3]'²");
    check("1/2 k sum(i in 1..5: (x[i+1] - x[i])^2)", "1/2 k sum(i in 1..5: (x[i + 1] - x[i])²)");
    check("sum(i in 1..5: sum(j in i+1..6: f(x[i] - x[j])))", "sum(i in 1..5: sum(j in i + 1..6: f(x[i] - x[j])))");
    check("i sum(k in 1..5: x[k])", "i sum(j in 1..5: x[j])");
}

#[test]
fn latex() {
    let check = |source: &str, latex: &str| {
        let names = Names::new("x y θ₁ θ r", "U V");
        let mut arena = Arena::new();
        let e = read(&mut arena, &names, source);
        assert_eq!(verbatim(&arena, e, &DisplayOptions::default()).latex(), latex);
    };
    check("1/2 m l^2 θ₁'^2", r"\frac{1}{2} m l^{2} \dot{\theta}_{1}^{2}");
    check("m g/(2 l) sin(θ)^2", r"\frac{m g \, \sin^{2} \theta}{2 l}");
    check("k/sqrt(x^2+y^2)", r"\frac{k}{\sqrt{x^{2} + y^{2}}}");
    check("sum(i in 1..5: x[i+1]^2)", r"\sum_{i=1}^{5} x_{i + 1}^{2}");
    check("U'(r) V'[1,2,2](x,y)", r"U'\left(r\right) \partial_{1} \partial_{2}^{2} V\left(x, y\right)");
    check("m_cart abs(x) (x - Δ)", r"m_{\mathrm{cart}} \left(x - \Delta\right) \left|x\right|");
}
