//! Roots, absolute values and signs against doubles, in every quadrant that the assumptions leave.

use super::*;
use proptest::prelude::*;

/// A factor in x and y.
fn factor(l: &mut Lab, k: u8) -> Expr {
    let (x, y) = (l.x("x"), l.x("y"));
    let s = l.arena.add(x, y);
    let d = l.arena.sub(x, y);
    let power = |l: &mut Lab, e: Expr, n: i64| l.arena.pow(e, n);
    match k {
        0 => x,
        1 => y,
        2 => l.call(Function::Abs, x),
        3 => l.call(Function::Abs, y),
        4 => l.arena.sqrt(x),
        5 => l.arena.sqrt(y),
        6 => {
            let p = l.arena.mul(x, y);
            l.arena.sqrt(p)
        }
        7 => {
            let p = power(l, x, 2);
            l.arena.sqrt(p)
        }
        8 => {
            let x2 = power(l, x, 2);
            let p = l.arena.mul(x2, y);
            l.arena.sqrt(p)
        }
        9 => {
            let p = power(l, s, 2);
            let p = l.arena.expand(p, &mut Budget::new(100)).unwrap();
            l.arena.sqrt(p)
        }
        10 => s,
        11 => l.call(Function::Abs, s),
        12 => l.call(Function::Sign, x),
        13 => {
            let m = l.arena.call(Function::Max, &[x, y]);
            let n = l.arena.call(Function::Min, &[x, y]);
            l.arena.sub(m, n)
        }
        14 => d,
        15 => {
            let (s2, d2) = (power(l, s, 2), power(l, d, 2));
            let p = l.arena.sub(s2, d2);
            let r = l.arena.sqrt(p);
            l.over(r, 2)
        }
        16 => {
            let x3 = power(l, x, 3);
            l.arena.sqrt(x3)
        }
        17 => {
            let x3 = power(l, x, 3);
            let p = l.arena.mul(x3, y);
            l.arena.sqrt(p)
        }
        _ => {
            // √(x²/2) √2.
            let x2 = power(l, x, 2);
            let h = l.over(x2, 2);
            let two = l.n(2);
            let (a, b) = (l.arena.sqrt(h), l.arena.sqrt(two));
            l.arena.mul(a, b)
        }
    }
}

/// Products of up to three factors on either side, with a sign, under assumptions on x, y and x − y.
fn check(left: &[u8], right: &[u8], negative: bool, assume: (u8, u8, bool), wanted: &mut [u32; 3]) {
    let l = &mut Lab::new();
    let (x, y) = (l.x("x"), l.x("y"));
    for (e, k) in [(x, assume.0), (y, assume.1)] {
        match k {
            1 => l.positive(e),
            2 => l.facts.assume(&mut l.arena, e, Relation::Less),
            _ => {}
        }
    }
    if assume.2 {
        let d = l.arena.sub(x, y);
        l.positive(d);
    }
    let mut side = |list: &[u8]| {
        list.iter().fold(Arena::ONE, |e, k| {
            let f = factor(l, *k);
            l.arena.mul(e, f)
        })
    };
    let (a, b) = (side(left), side(right));
    let b = if negative { l.arena.neg(b) } else { b };
    let verdict = l.difference(a, b);
    let allowed = |k: u8, v: f64| k == 0 || k == 1 && v > 0.0 || k == 2 && v < 0.0;
    let (mut defined, mut differs) = (false, false);
    for (u, v) in [(0.7, 1.9), (2.3, 0.6), (0.31, 0.29), (1.7, 1.1)] {
        for (sx, sy) in [(1.0, 1.0), (1.0, -1.0), (-1.0, 1.0), (-1.0, -1.0)] {
            let (u, v) = (u * sx, v * sy);
            if !allowed(assume.0, u) || !allowed(assume.1, v) || assume.2 && u <= v {
                continue;
            }
            let at = [(x, u), (y, v)];
            let (p, q) = (value(l, a, &at), value(l, b, &at));
            if p.is_finite() && q.is_finite() {
                defined = true;
                differs |= (p - q).abs() > 1e-9 * (1.0 + p.abs());
            }
        }
    }
    let about = || format!("{left:?} {right:?} {negative} {assume:?}");
    match verdict {
        Verdict::Proved => {
            wanted[0] += 1;
            assert!(!differs, "{}", about());
        }
        Verdict::Refuted(_) => {
            wanted[1] += 1;
            // Where it has no value, nothing can be compared.
            assert!(differs || !defined, "{}", about());
        }
        Verdict::Undecided(_) => wanted[2] += 1,
    }
}

#[test]
fn every_pair_of_factors() {
    let mut seen = [0; 3];
    for a in 0..19u8 {
        for b in 0..19u8 {
            for assume in [(0, 0, false), (1, 0, false), (1, 1, false), (2, 2, false), (0, 2, true), (1, 1, true)] {
                check(&[a], &[b], false, assume, &mut seen);
            }
        }
    }
    // Most is decided, one way or the other.
    assert!(seen[0] > 200 && seen[1] > 1000 && seen[2] < 80, "{seen:?}");
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 600, failure_persistence: None, ..ProptestConfig::default() })]

    /// No verdict on products of roots, absolute values and signs is wrong.
    #[test]
    fn branches_are_never_wrong(
        left in proptest::collection::vec(0u8..19, 1..4),
        right in proptest::collection::vec(0u8..19, 1..4),
        negative: bool,
        assume in (0u8..3, 0u8..3, any::<bool>()),
    ) {
        // Contradictory assumptions leave no point.
        prop_assume!(!(assume.2 && assume.0 == 2 && assume.1 == 1));
        check(&left, &right, negative, assume, &mut [0; 3]);
    }
}
