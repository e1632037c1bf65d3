//! Sizes of printed residuals.

use super::system::System;

/// All residuals together take at most so many operations.
fn check(mut system: System, most: usize) -> usize {
    let mut sum = 0;
    for e in system.equations() {
        sum += system.print(e).operations();
    }
    assert!(sum <= most, "{sum} operations, at most {most} allowed");
    sum
}

fn chain(n: usize) -> System {
    let mut terms = Vec::new();
    for i in 1..=n {
        let x: Vec<String> = (1..=i).map(|j| format!("l{j} sin(θ{j})")).collect();
        let y: Vec<String> = (1..=i).map(|j| format!("-l{j} cos(θ{j})")).collect();
        let (x, y) = (x.join(" + "), y.join(" + ").replace("+ -", "- "));
        terms.push(format!("kinetic 1/2 m{i} (({x})'^2 + ({y})'^2)"));
        terms.push(format!("potential m{i} g ({y})"));
    }
    let names: Vec<String> = (1..=n).map(|i| format!("θ{i}")).collect();
    let terms: Vec<&str> = terms.iter().map(String::as_str).collect();
    System::new(&names.join(" "), "", &terms)
}

#[test]
fn chain_of_two() {
    check(chain(2), 40);
}

#[test]
fn chain_of_three() {
    check(chain(3), 120);
}

#[test]
fn chain_of_four() {
    check(chain(4), 250);
}

#[test]
fn chain_of_five() {
    check(chain(5), 450);
}

#[test]
fn heavy_top() {
    let top = System::new(
        "φ θ ψ",
        "",
        &["kinetic 1/2 I₁ (θ'^2 + φ'^2 sin² θ)", "kinetic 1/2 I₃ (ψ' + φ' cos θ)^2", "potential m g l cos θ"],
    );
    check(top, 55);
}

#[test]
fn central_field_in_spherical_coordinates() {
    let particle = System::new(
        "r θ φ",
        "U",
        &["kinetic 1/2 m ((r sin θ cos φ)'^2 + (r sin θ sin φ)'^2 + (r cos θ)'^2)", "potential U(r)"],
    );
    check(particle, 50);
}
