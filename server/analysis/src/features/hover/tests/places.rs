//! Where a hover looks: names, the innermost thing around a sign, at last the item.

use super::within;

const SWING: &str = "\
system swing             # a bob in a lift
coordinate θ: angle      # from the vertical
parameter m: mass = 2 kg, l: length = 1 m, g = 9.81 m/s^2
input z: length
function U(s): energy
let P = (l sin θ, z - l cos θ)
kinetic   bob    = 1/2 m |P'|^2   # all of it
potential weight = m g (P[2] - z) + U((l θ)')
symmetry delay: t -> t + ε
assume m > 0
";

/// The text that the hover is about, and its first line.
#[track_caller]
fn check(piece: &str, expected: &str) {
    let found = within(SWING, piece);
    assert_eq!(found.lines().take(2).collect::<Vec<_>>().join(" "), expected);
}

#[test]
fn names_at_their_ends_too() {
    check("coordinate $0θ: angle", "`θ`     l (l (m - U''(l θ̇)) θ̈ + m sin θ (z̈ + g)) = 0");
    check("parameter m$0: mass", "`m` parameter `m: mass = 2 kg`");
    check("l: l$0ength = 1 m, g", "`length` Quantity `length`: m");
}

#[test]
fn signs_belong_to_what_is_around_them() {
    check("|P$0'|^2", "`P`     P[1] = l sin θ");
    check("|P'$0|^2", "`1/2 m |P'|^2`     kinetic bob = 1/2 m ((ż + l sin θ θ̇)² + l² cos² θ θ̇²)");
    check("(P$0[2] - z)", "`P`     P[1] = l sin θ");
    check("(P[$02] - z)", "`P[2]`     P[1] = l sin θ");
    check("(P[2] $0- z)", "`m g (P[2] - z) + U((l θ)')`     potential weight = U(l θ̇) - m g l cos θ");
    check("U($0(l θ)')", "`U((l θ)')` function `U(s): energy`, unspecified and smooth");
    check("= $01/2 m |", "`1/2 m |P'|^2`     kinetic bob = 1/2 m ((ż + l sin θ θ̇)² + l² cos² θ θ̇²)");
}

#[test]
fn what_is_no_formula_belongs_to_the_item() {
    check("bob    $0= 1/2", "`=`     kinetic bob = 1/2 m ((ż + l sin θ θ̇)² + l² cos² θ θ̇²)");
    check("= $01 m, g", "`1` parameter `l: length = 1 m`");
    check("t $0-> t", "`-` `delay` is broken by `bob` (refuted): `dh/dt = -m (ż + l sin θ θ̇) z̈`");
}

#[test]
fn comments_and_blanks_say_nothing() {
    check("# all $0of it", "nothing");
    check("weight =$0 m g", "nothing");
    check("m > 0$0\n", "nothing");
}
