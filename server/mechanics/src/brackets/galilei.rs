//! The centrally extended Galilei algebra of the plane, by an explicit basis.
//!
//! Let Z be the centre (one-dimensional), X an element whose ad is not nilpotent, K and W the Fitting components of ad X
//! (null and one). Looked for are H, L in K with, on W, N = ad H, N² = 0 ≠ N, and (ad L)² = −a²; and [W, W] = Z, a form of
//! rank 4 on W. Then P = N W is isotropic, since {N w, N w'} = −{w, N² w'} = 0; the form {N w, w'} on W/P is symmetric and
//! invariant under L, so a multiple of δ, not zero where the form has rank 4; and a remaining {G₁, G₂} = θ is removed by
//! G → G + α L P. These are the brackets {G, P} = m δ, {G, H} = P [Lévy-Leblond 1971].

use super::lie::{Lie, apply, complement, trace_of_product, transpose};
use super::rows::{Vector, coordinates, echelon, kernel};
use leastwise_algebra::Rational;

/// Whether it is that algebra.
pub(super) fn in_the_plane(g: &Lie) -> bool {
    g.dimension() == 7 && found(g).unwrap_or(false)
}

fn found(g: &Lie) -> Option<bool> {
    let (all, centre) = g.parts();
    let [z] = centre.as_slice() else { return None };
    for x in &all {
        let ad = g.adjoint(x);
        // Both components are stable from the seventh power on; the eighth is three squarings.
        let mut power = ad.clone();
        for _ in 0..3 {
            power = times(&power, &power);
        }
        let k = kernel(power.clone(), 7);
        let w = echelon(transpose(&power)).0;
        if k.len() != 3 || w.len() != 4 {
            continue;
        }
        return holds(g, x, &k, &w, z);
    }
    None
}

fn holds(g: &Lie, x: &Vector, k: &[Vector], w: &[Vector], z: &Vector) -> Option<bool> {
    if k.iter().any(|u| k.iter().any(|v| g.of(u, v).iter().any(|c| !c.is_zero()))) {
        return Some(false);
    }
    // The form on W.
    let mut form = Vec::new();
    for u in w {
        let mut row = Vec::new();
        for v in w {
            row.push(coordinates(std::slice::from_ref(z), &g.of(u, v))?.remove(0));
        }
        form.push(row);
    }
    if echelon(form).0.len() != 4 {
        return Some(false);
    }
    let on_w = |u: &Vector| -> Option<Vec<Vector>> {
        let columns: Option<Vec<Vector>> = w.iter().map(|v| coordinates(w, &g.of(u, v))).collect();
        Some(transpose(&columns?))
    };
    let turn = on_w(x)?;
    // H: in K, not central, without a component along X.
    let mut traces = Vec::new();
    for u in k {
        traces.push(trace_of_product(&turn, &on_w(u)?));
    }
    let without = kernel(vec![traces], k.len());
    let back: Vec<Vector> = without.iter().map(|c| apply(&transpose(k), c)).collect();
    let outside = complement(std::slice::from_ref(z), &back);
    let [h] = outside.as_slice() else { return Some(false) };
    let n = on_w(h)?;
    if !is_zero(&times(&n, &n)) || is_zero(&n) {
        return Some(false);
    }
    // (ad X − β N)² = −a²: linear in β, since N² = 0.
    let square = times(&turn, &turn);
    let cross = sum(&times(&turn, &n), &times(&n, &turn), &Rational::ONE);
    let entry = (0..4).flat_map(|i| (0..4).map(move |j| (i, j))).find(|&(i, j)| {
        // Where the square of a pure turn vanishes and the cross term does not, after the trace is taken off.
        !entry_without_trace(&cross, i, j).is_zero()
    });
    let beta = match entry {
        None => Rational::ZERO,
        Some((i, j)) => entry_without_trace(&square, i, j).div(&entry_without_trace(&cross, i, j))?,
    };
    let pure = sum(&square, &cross, &beta.neg());
    let a2 = pure[0][0].clone();
    let scalar = (0..4).all(|i| (0..4).all(|j| if i == j { pure[i][j] == a2 } else { pure[i][j].is_zero() }));
    Some(scalar && a2.is_negative())
}

/// The entry of m − tr(m)/4.
fn entry_without_trace(m: &[Vector], i: usize, j: usize) -> Rational {
    if i != j {
        return m[i][j].clone();
    }
    let trace = (0..4).fold(Rational::ZERO, |s, k| s.add(&m[k][k]));
    let quarter = Rational::HALF.mul(&Rational::HALF);
    m[i][i].sub(&trace.mul(&quarter))
}

fn times(a: &[Vector], b: &[Vector]) -> Vec<Vector> {
    let columns: Vec<Vector> = transpose(b).iter().map(|c| apply(a, c)).collect();
    transpose(&columns)
}

fn sum(a: &[Vector], b: &[Vector], c: &Rational) -> Vec<Vector> {
    a.iter().zip(b).map(|(x, y)| x.iter().zip(y).map(|(p, q)| p.add(&c.mul(q))).collect()).collect()
}

fn is_zero(m: &[Vector]) -> bool {
    m.iter().flatten().all(Rational::is_zero)
}
