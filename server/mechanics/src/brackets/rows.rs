//! Linear algebra over ℚ, for matrices of a few dozen rows.

use leastwise_algebra::Rational;

/// A vector.
pub(crate) type Vector = Vec<Rational>;

/// The product of a vector with a number, added to another.
pub(crate) fn add_multiple(to: &mut [Rational], c: &Rational, v: &[Rational]) {
    if c.is_zero() {
        return;
    }
    for (a, b) in to.iter_mut().zip(v) {
        if !b.is_zero() {
            *a = a.add(&c.mul(b));
        }
    }
}

/// Reduced echelon form without zero rows; the pivots' columns.
pub(crate) fn echelon(mut rows: Vec<Vector>) -> (Vec<Vector>, Vec<usize>) {
    let columns = rows.first().map_or(0, Vec::len);
    let mut pivots = Vec::new();
    for c in 0..columns {
        let r = pivots.len();
        let Some(p) = (r..rows.len()).find(|&i| !rows[i][c].is_zero()) else { continue };
        rows.swap(r, p);
        let Some(inverse) = rows[r][c].recip() else { continue };
        let pivot: Vector = rows[r].iter().map(|v| v.mul(&inverse)).collect();
        for (i, row) in rows.iter_mut().enumerate() {
            if i != r && !row[c].is_zero() {
                let k = row[c].neg();
                add_multiple(row, &k, &pivot);
            }
        }
        rows[r] = pivot;
        pivots.push(c);
    }
    rows.truncate(pivots.len());
    (rows, pivots)
}

/// A basis of the vectors x with `rows` · x = 0, in `columns` unknowns.
pub(crate) fn kernel(rows: Vec<Vector>, columns: usize) -> Vec<Vector> {
    let (reduced, pivots) = echelon(rows);
    let mut out = Vec::new();
    for k in (0..columns).filter(|k| !pivots.contains(k)) {
        let mut v = vec![Rational::ZERO; columns];
        v[k] = Rational::ONE;
        for (row, &p) in reduced.iter().zip(&pivots) {
            v[p] = row[k].neg();
        }
        out.push(v);
    }
    out
}

/// One solution of `rows` · x = `right`, or `None`.
pub(crate) fn solve(rows: &[Vector], right: &[Rational], columns: usize) -> Option<Vector> {
    let augmented: Vec<Vector> = rows
        .iter()
        .zip(right)
        .map(|(r, b)| {
            let mut r = r.clone();
            r.push(b.clone());
            r
        })
        .collect();
    let (reduced, pivots) = echelon(augmented);
    if pivots.contains(&columns) {
        return None;
    }
    let mut x = vec![Rational::ZERO; columns];
    for (row, &p) in reduced.iter().zip(&pivots) {
        x[p] = row[columns].clone();
    }
    Some(x)
}

/// Coordinates of `v` in a basis, or `None` where it is not in the span.
pub(crate) fn coordinates(basis: &[Vector], v: &[Rational]) -> Option<Vector> {
    let rows: Vec<Vector> = (0..v.len()).map(|i| basis.iter().map(|b| b[i].clone()).collect()).collect();
    solve(&rows, v, basis.len())
}

/// How many squares with a positive and with a negative sign a symmetric form has [Sylvester's law of inertia].
pub(crate) fn signature(mut form: Vec<Vector>) -> (usize, usize) {
    let n = form.len();
    let (mut plus, mut minus) = (0, 0);
    let mut left: Vec<usize> = (0..n).collect();
    while !left.is_empty() {
        if let Some(&p) = left.iter().find(|&&i| !form[i][i].is_zero()) {
            if form[p][p].is_negative() {
                minus += 1
            } else {
                plus += 1
            }
            left.retain(|&i| i != p);
            let Some(inverse) = form[p][p].recip() else { continue };
            for &i in &left {
                let k = form[i][p].mul(&inverse).neg();
                let row = form[p].clone();
                add_multiple(&mut form[i], &k, &row);
            }
            continue;
        }
        // Without a square: x y = ((x + y)² − (x − y)²)/4.
        let pair = left.iter().find_map(|&i| left.iter().find(|&&j| !form[i][j].is_zero()).map(|&j| (i, j)));
        let Some((i, j)) = pair else { break };
        let row = form[j].clone();
        add_multiple(&mut form[i], &Rational::ONE, &row);
        for r in &mut form {
            let v = r[j].clone();
            r[i] = r[i].add(&v);
        }
    }
    (plus, minus)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn matrix(rows: &[&[i64]]) -> Vec<Vector> {
        rows.iter().map(|r| r.iter().map(|&x| Rational::integer(x)).collect()).collect()
    }

    #[test]
    fn inertia_counts_signs() {
        assert_eq!(signature(matrix(&[&[0, 1], &[1, 0]])), (1, 1));
        assert_eq!(signature(matrix(&[&[2, 1, 0], &[1, 2, 0], &[0, 0, 0]])), (2, 0));
        assert_eq!(signature(matrix(&[&[-1, 0, 0], &[0, -1, 3], &[0, 3, -1]])), (1, 2));
        assert_eq!(signature(matrix(&[&[0, 0, 1], &[0, 0, 1], &[1, 1, 0]])), (1, 1));
    }

    #[test]
    fn systems_are_solved() {
        let m = matrix(&[&[1, 2, 3], &[2, 4, 6]]);
        assert_eq!(kernel(m.clone(), 3).len(), 2);
        assert_eq!(solve(&m, &matrix(&[&[1, 3]])[0], 3), None);
        let x = solve(&m, &matrix(&[&[1, 2]])[0], 3).unwrap();
        assert_eq!(x[0].add(&x[1].mul(&Rational::integer(2))).add(&x[2].mul(&Rational::integer(3))), Rational::ONE);
    }
}
