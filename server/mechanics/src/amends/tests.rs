use super::*;
use crate::energy::energy;
use crate::fixture::{Fixture, kepler};
use crate::mass::mass_rows;
use crate::model::TermKind;

/// Each part stands for itself.
fn check(f: &mut Fixture, parts: &[Expr], want: &[Amend]) {
    let model = f.model.clone();
    let rows = mass_rows(&mut f.cx(), &model).unwrap();
    let groups: Vec<Vec<usize>> = (0..parts.len()).map(|k| vec![k]).collect();
    let got = amends(&mut f.cx(), &model, Some(&rows), parts, &groups, &[]).unwrap();
    assert_eq!(got, want);
}

/// A stone under gravity: L = ½ m ż² − m g z.
fn stone() -> (Fixture, [Expr; 4]) {
    let mut f = Fixture::new();
    let (z, vz) = f.coordinate("z");
    let (m, g) = (f.parameter("m"), f.parameter("g"));
    let kinetic = f.half_square(m, vz);
    let weight = f.arena.product(&[m, g, z]);
    f.term(TermKind::Kinetic, "stone", &[kinetic]);
    f.term(TermKind::Potential, "weight", &[weight]);
    let t = f.time();
    let gt = f.arena.mul(g, t);
    (f, [kinetic, weight, vz, gt])
}

#[test]
fn the_sign_of_the_fall() {
    let (mut f, [_, _, vz, gt]) = stone();
    let minus = f.arena.neg(gt);
    check(&mut f, &[vz, minus], &[Amend::Sign(1), Amend::Sign(0)]);
}

#[test]
fn twice_the_kinetic_energy_is_half_too_much() {
    let (mut f, [kinetic, weight, ..]) = stone();
    let twice = f.arena.scale(kinetic, &Rational::integer(2));
    check(&mut f, &[twice, weight], &[Amend::Factor(1, Rational::integer(2)), Amend::Factor(0, Rational::HALF)]);
}

#[test]
fn a_velocity_that_falls_misses_what_gravity_gave() {
    let (mut f, [_, _, vz, gt]) = stone();
    check(&mut f, &[vz], &[Amend::Missing(gt)]);
}

#[test]
fn a_part_that_is_too_much() {
    let (mut f, [kinetic, weight, vz, gt]) = stone();
    // Or what goes with it is missing.
    check(&mut f, &[kinetic, weight, vz], &[Amend::Missing(gt), Amend::Without(2)]);
}

#[test]
fn what_is_wrong_in_two_places_is_left() {
    let mut f = kepler();
    let q: Vec<(Expr, Expr)> =
        f.model.coordinates.clone().iter().map(|q| (q.jet(&mut f.arena, 0), q.jet(&mut f.arena, 1))).collect();
    let cube = f.arena.pow(q[0].1, 3);
    let other = f.arena.mul(q[0].0, q[0].0);
    check(&mut f, &[cube, other], &[]);
}

fn check_source(f: &mut Fixture, claim: Expr, want: &dyn Fn(&Source) -> bool) {
    let model = f.model.clone();
    let rows = mass_rows(&mut f.cx(), &model).unwrap();
    let h = energy(&mut f.cx(), &model).unwrap().function;
    let got = source(&mut f.cx(), &model, Some(&rows), h, &[], claim).unwrap();
    assert!(want(&got), "{got:?}");
}

#[test]
fn angular_momentum_comes_from_rotations_and_the_laplace_vector_from_none() {
    let mut f = kepler();
    let q: Vec<(Expr, Expr)> =
        f.model.coordinates.clone().iter().map(|q| (q.jet(&mut f.arena, 0), q.jet(&mut f.arena, 1))).collect();
    let ((x, vx), (y, vy)) = (q[0], q[1]);
    let (m, k) = (f.parameter("m"), f.parameter("k"));
    let (a, b) = (f.arena.mul(x, vy), f.arena.mul(y, vx));
    let areal = f.arena.sub(a, b);
    let minus_y = f.arena.neg(y);
    let momentum = f.arena.mul(m, areal);
    check_source(&mut f, momentum, &|s| matches!(s, Source::Symmetry(g) if g.eta == [minus_y, x]));
    // The x component of the Laplace–Runge–Lenz vector [GPS §3.9].
    let first = f.arena.product(&[m, areal, vy]);
    let (x2, y2) = (f.arena.pow(x, 2), f.arena.pow(y, 2));
    let r2 = f.arena.add(x2, y2);
    let second = f.arena.monomial(&[(k, Rational::ONE), (x, Rational::ONE), (r2, Rational::HALF.neg())]);
    let laplace = f.arena.sub(first, second);
    check_source(&mut f, laplace, &|s| *s == Source::Hidden(2));
    let model = f.model.clone();
    let h = energy(&mut f.cx(), &model).unwrap().function;
    let twice = f.arena.neg(h);
    check_source(&mut f, twice, &|s| *s == Source::Energy);
}
