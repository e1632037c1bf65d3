//! Linear algebra over a finite field and over intervals.

use super::field::{Element, Field};
use super::interval::Interval;
use crate::rational::Rational;
use std::sync::Arc;

/// What an elimination costs, in nodes.
pub(super) fn work(n: usize) -> usize {
    n * n * n / 8 + n
}

/// Solves a square system whose rows carry their right-hand side at the end; `None` where it is singular.
pub(super) fn solve(f: &Field, mut rows: Vec<Vec<Element>>) -> Option<Vec<Element>> {
    let n = rows.len();
    for c in 0..n {
        let p = (c..n).find(|&i| !rows[i][c].is_zero())?;
        rows.swap(c, p);
        let inverse = f.inv2(rows[c][c]);
        let pivot: Vec<Element> = rows[c].iter().map(|v| f.mul2(*v, inverse)).collect();
        for row in rows.iter_mut().skip(c + 1) {
            eliminate(f, row, &pivot, c);
        }
        rows[c] = pivot;
    }
    let mut x = vec![Element::ZERO; n];
    for c in (0..n).rev() {
        let mut v = rows[c][n];
        for j in c + 1..n {
            v = f.sub2(v, f.mul2(rows[c][j], x[j]));
        }
        x[c] = v;
    }
    Some(x)
}

/// Subtracts the multiple of a pivot row, scaled to one, that clears column `c`.
fn eliminate(f: &Field, row: &mut [Element], pivot: &[Element], c: usize) {
    let k = row[c];
    if !k.is_zero() {
        for (a, b) in row.iter_mut().zip(pivot).skip(c) {
            *a = f.sub2(*a, f.mul2(k, *b));
        }
    }
}

/// The determinant.
pub(super) fn determinant(f: &Field, mut rows: Vec<Vec<Element>>) -> Element {
    let n = rows.len();
    let mut d = Element::ONE;
    for c in 0..n {
        let Some(p) = (c..n).find(|&i| !rows[i][c].is_zero()) else { return Element::ZERO };
        if p != c {
            rows.swap(c, p);
            d = f.neg2(d);
        }
        d = f.mul2(d, rows[c][c]);
        let inverse = f.inv2(rows[c][c]);
        let pivot: Vec<Element> = rows[c].iter().map(|v| f.mul2(*v, inverse)).collect();
        for row in rows.iter_mut().skip(c + 1) {
            eliminate(f, row, &pivot, c);
        }
    }
    d
}

/// The rank.
pub(super) fn rank(f: &Field, mut rows: Vec<Vec<Element>>) -> usize {
    echelon(f, &mut rows).len()
}

/// Brings rows to reduced echelon form; the pivots' columns.
pub(super) fn echelon(f: &Field, rows: &mut [Vec<Element>]) -> Vec<usize> {
    let columns = rows.first().map_or(0, Vec::len);
    let mut pivots = Vec::new();
    for c in 0..columns {
        let r = pivots.len();
        if r == rows.len() {
            break;
        }
        let Some(p) = (r..rows.len()).find(|&i| !rows[i][c].is_zero()) else { continue };
        rows.swap(r, p);
        let inverse = f.inv2(rows[r][c]);
        let pivot: Vec<Element> = rows[r].iter().map(|v| f.mul2(*v, inverse)).collect();
        for (i, row) in rows.iter_mut().enumerate() {
            if i != r {
                eliminate(f, row, &pivot, c);
            }
        }
        rows[r] = pivot;
        pivots.push(c);
    }
    pivots
}

/// Interval elimination with the pivot farthest from zero; `None` where no pivot excludes zero.
fn reduce_enclosed(rows: &mut [Vec<Interval>]) -> Option<bool> {
    let n = rows.len();
    let mut flipped = false;
    for c in 0..n {
        let distance = |v: Interval| if v.excludes_zero() { v.lo.abs().min(v.hi.abs()) } else { 0.0 };
        let p = (c..n).max_by(|&i, &j| distance(rows[i][c]).total_cmp(&distance(rows[j][c])))?;
        if distance(rows[p][c]) == 0.0 {
            return None;
        }
        if p != c {
            rows.swap(c, p);
            flipped = !flipped;
        }
        let (above, below) = rows.split_at_mut(c + 1);
        let pivot = &above[c];
        for row in below {
            let k = row[c].over(pivot[c]);
            for (a, b) in row.iter_mut().zip(pivot).skip(c + 1) {
                *a = a.plus(k.times(*b).negate());
            }
            row[c] = Interval::exactly(0.0);
        }
    }
    Some(flipped)
}

/// Encloses the solution of a square system whose rows carry their right-hand side at the end.
pub(super) fn solve_enclosed(mut rows: Vec<Vec<Interval>>) -> Option<Vec<Interval>> {
    reduce_enclosed(&mut rows)?;
    let n = rows.len();
    let mut x = vec![Interval::exactly(0.0); n];
    for c in (0..n).rev() {
        let mut v = rows[c][n];
        for j in c + 1..n {
            v = v.plus(rows[c][j].times(x[j]).negate());
        }
        x[c] = v.over(rows[c][c]);
    }
    Some(x)
}

/// Encloses the determinant.
pub(super) fn determinant_enclosed(mut rows: Vec<Vec<Interval>>) -> Interval {
    let Some(flipped) = reduce_enclosed(&mut rows) else { return Interval::NONE };
    let d = (0..rows.len()).fold(Interval::exactly(1.0), |d, i| d.times(rows[i][i]));
    if flipped { d.negate() } else { d }
}

/// Residues of a list of parts at the same points of one field: parts that add up to zero have rows that do.
#[derive(Clone)]
pub struct Residues {
    field: Arc<Field>,
    rows: Vec<Vec<Element>>,
}

impl Residues {
    pub(super) fn new(field: Arc<Field>, rows: Vec<Vec<Element>>) -> Residues {
        Residues { field, rows }
    }

    /// How many parts there are.
    pub fn len(&self) -> usize {
        self.rows.len()
    }

    /// Whether there are no parts.
    pub fn is_empty(&self) -> bool {
        self.rows.is_empty()
    }

    /// Whether the part vanishes at all points.
    pub fn vanishes(&self, part: usize) -> bool {
        self.rows[part].iter().all(|v| v.is_zero())
    }

    /// Whether the sum of some parts vanishes at all points.
    pub fn sum_vanishes(&self, parts: &[usize]) -> bool {
        let columns = self.rows.first().map_or(0, Vec::len);
        (0..columns).all(|c| parts.iter().fold(Element::ZERO, |s, &k| self.field.add2(s, self.rows[k][c])).is_zero())
    }

    /// The number c with Σ a = c Σ b at all points, lifted to a rational with small numerator and denominator; `None`
    /// where there is none, or Σ b vanishes. To be confirmed by the zero test.
    pub fn ratio(&self, a: &[usize], b: &[usize]) -> Option<Rational> {
        let f = &self.field;
        let sum = |list: &[usize], c: usize| list.iter().fold(Element::ZERO, |s, &k| f.add2(s, self.rows[k][c]));
        let columns = self.rows.first().map_or(0, Vec::len);
        let first = (0..columns).find(|&c| !sum(b, c).is_zero())?;
        let ratio = f.mul2(sum(a, first), f.inv2(sum(b, first)));
        let same = (0..columns).all(|c| f.sub2(sum(a, c), f.mul2(ratio, sum(b, c))).is_zero());
        if same && ratio.is_real() { lift(f, ratio.re) } else { None }
    }

    /// The components of linear dependence: parts in different components take part in no common relation.
    /// A part that depends on no other is a component of its own.
    pub fn components(&self) -> Vec<Vec<usize>> {
        let (reduced, pivots) = self.columns_reduced();
        let n = self.len();
        let mut parent: Vec<usize> = (0..n).collect();
        fn find(parent: &mut [usize], mut k: usize) -> usize {
            while parent[k] != k {
                parent[k] = parent[parent[k]];
                k = parent[k];
            }
            k
        }
        for k in (0..n).filter(|k| !pivots.contains(k)) {
            for (i, p) in pivots.iter().enumerate() {
                if !reduced[i][k].is_zero() {
                    let (a, b) = (find(&mut parent, k), find(&mut parent, *p));
                    parent[a.max(b)] = a.min(b);
                }
            }
        }
        let mut out: Vec<Vec<usize>> = vec![Vec::new(); n];
        for k in 0..n {
            let root = find(&mut parent, k);
            out[root].push(k);
        }
        out.retain(|c| !c.is_empty());
        out
    }

    /// A basis of the relations Σ cₖ partₖ = 0, lifted to rationals with small numerators and denominators; `None`
    /// where one has no such lift. There must be more points than parts. Each is to be confirmed by the zero test.
    pub fn relations(&self) -> Option<Vec<Vec<Rational>>> {
        let (reduced, pivots) = self.columns_reduced();
        let f = &self.field;
        let mut out = Vec::new();
        for k in (0..self.len()).filter(|k| !pivots.contains(k)) {
            let mut v = vec![Rational::ZERO; self.len()];
            v[k] = Rational::ONE;
            for (i, p) in pivots.iter().enumerate() {
                let c = f.neg2(reduced[i][k]);
                if !c.is_real() {
                    return None;
                }
                v[*p] = lift(f, c.re)?;
            }
            out.push(v);
        }
        Some(out)
    }

    /// The parts that are, at these points, combinations of those before them with numbers as coefficients. There must be
    /// more points than parts.
    pub fn dependent(&self) -> Vec<usize> {
        let (_, pivots) = self.columns_reduced();
        (0..self.len()).filter(|k| !pivots.contains(k)).collect()
    }

    /// The parts as columns, in reduced echelon form, with the pivots.
    fn columns_reduced(&self) -> (Vec<Vec<Element>>, Vec<usize>) {
        let columns = self.rows.first().map_or(0, Vec::len);
        let mut t: Vec<Vec<Element>> = (0..columns).map(|c| self.rows.iter().map(|r| r[c]).collect()).collect();
        let pivots = echelon(&self.field, &mut t);
        (t, pivots)
    }
}

/// The rational with numerator and denominator below 2³⁰ that has this residue.
fn lift(f: &Field, x: u64) -> Option<Rational> {
    const BOUND: u64 = 1 << 30;
    let (mut r0, mut r1) = (f.p as i128, x as i128);
    let (mut t0, mut t1) = (0i128, 1i128);
    while r1 >= BOUND as i128 {
        let q = r0 / r1;
        (r0, r1) = (r1, r0 - q * r1);
        (t0, t1) = (t1, t0 - q * t1);
    }
    if t1 == 0 || t1.unsigned_abs() >= BOUND as u128 {
        return None;
    }
    Rational::new(i64::try_from(r1).ok()?, i64::try_from(t1).ok()?)
}

#[cfg(test)]
mod tests {
    use super::super::field::FIRST;
    use super::*;

    fn row(f: &Field, list: &[i64]) -> Vec<Element> {
        list.iter().map(|&n| Element::real(if n < 0 { f.p - n.unsigned_abs() } else { n as u64 })).collect()
    }

    #[test]
    fn elimination() {
        let f = Arc::new(Field::new(FIRST[0]));
        let rows = vec![row(&f, &[0, 2, 4]), row(&f, &[3, 1, 8])];
        assert_eq!(solve(&f, rows), Some(row(&f, &[2, 2])));
        assert_eq!(solve(&f, vec![row(&f, &[1, 2, 0]), row(&f, &[2, 4, 1])]), None);
        let m = vec![row(&f, &[0, 2, 1]), row(&f, &[3, 1, 0]), row(&f, &[3, 3, 1])];
        assert_eq!(determinant(&f, m.clone()), Element::ZERO);
        assert_eq!(rank(&f, m), 2);
        let i = |x: f64| Interval::exactly(x);
        let x = solve_enclosed(vec![vec![i(0.0), i(2.0), i(4.0)], vec![i(3.0), i(1.0), i(8.0)]]).unwrap();
        assert!(x.iter().all(|v| v.lo <= 2.0 && v.hi >= 2.0 && v.hi - v.lo < 1e-12));
        let d = determinant_enclosed(vec![vec![i(0.0), i(2.0)], vec![i(3.0), i(1.0)]]);
        assert!(d.lo <= -6.0 && d.hi >= -6.0 && d.hi < -5.9);
    }

    #[test]
    fn relations_are_lifted() {
        let f = Arc::new(Field::new(FIRST[0]));
        // b = 2a/3 − c; d is on its own; e = 0.
        let rows = vec![
            row(&f, &[3, 6, 9, 30]),
            row(&f, &[1, 1, 5, 13]),
            row(&f, &[1, 3, 1, 7]),
            row(&f, &[5, 7, 11, 1]),
            row(&f, &[0, 0, 0, 0]),
        ];
        let r = Residues::new(f, rows);
        let q = |n, d| Rational::new(n, d).unwrap();
        let zero = Rational::ZERO;
        assert_eq!(
            r.relations(),
            Some(vec![
                vec![q(-2, 3), q(1, 1), q(1, 1), zero.clone(), zero.clone()],
                vec![zero.clone(), zero.clone(), zero.clone(), zero, q(1, 1)]
            ])
        );
        assert_eq!(r.components(), vec![vec![0, 1, 2], vec![3], vec![4]]);
        assert!(r.vanishes(4) && !r.sum_vanishes(&[0, 1]));
    }
}
