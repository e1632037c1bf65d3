//! The linear system for the coefficients: its solution is found modulo a prime, with constants replaced by residues;
//! the coefficients that are not zero are then solved for exactly.

use super::polynomial::{Monomial, Poly, times, trim};
use super::tower::{Res, Tower};
use crate::arena::mix;
use crate::budget::{Budget, Stopped};
use crate::rational::Rational;
use hashbrown::HashMap;
use std::collections::BTreeMap;

/// Primes below 2⁶¹ that are 3 modulo 4, by their distance: where constants under roots are no squares modulo one of them,
/// the next is tried.
const PRIMES: [u64; 32] = [
    1, 45, 229, 465, 829, 985, 1153, 1281, 1425, 1489, 1525, 1533, 1609, 1621, 1669, 1741, 1753, 1813, 1845, 1849,
    1869, 1909, 1921, 1945, 2133, 2185, 2373, 2385, 2401, 2605, 2665, 3045,
];
/// How often other residues are tried for each prime.
const TRIES: u64 = 4;
/// More coefficients than this are not solved for exactly.
const MAX_EXACT: usize = 90;

/// An unknown: a monomial over a denominator, or none for another function, and the numerator of its derivative.
pub(super) struct Column {
    pub of: Option<(Vec<u16>, Monomial)>,
    pub image: Poly,
}

/// A quotient of polynomials in constants.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Coefficient {
    pub num: Poly,
    pub den: Poly,
}

/// A prime field.
#[derive(Clone, Copy)]
struct Modulus(u64);

impl Modulus {
    fn mul(self, a: u64, b: u64) -> u64 {
        (a as u128 * b as u128 % self.0 as u128) as u64
    }

    fn pow(self, mut a: u64, mut n: u64) -> u64 {
        let mut out = 1;
        while n > 0 {
            if n & 1 == 1 {
                out = self.mul(out, a);
            }
            a = self.mul(a, a);
            n >>= 1;
        }
        out
    }

    fn inverse(self, a: u64) -> u64 {
        self.pow(a, self.0 - 2)
    }

    fn add(self, a: u64, b: u64) -> u64 {
        let r = a + b;
        if r >= self.0 { r - self.0 } else { r }
    }

    fn neg(self, a: u64) -> u64 {
        if a == 0 { 0 } else { self.0 - a }
    }
}

/// A prime, and residues of the generators that are constants.
struct Residues {
    modulus: Modulus,
    values: Vec<u64>,
}

type Sparse = BTreeMap<usize, u64>;

/// Columns in echelon form.
struct Echelon {
    modulus: Modulus,
    /// By pivot row: the column's number and its entries, scaled to one at the pivot.
    pivots: HashMap<usize, usize>,
    columns: Vec<(Sparse, Vec<(usize, u64)>)>,
}

impl Echelon {
    fn new(modulus: Modulus) -> Echelon {
        Echelon { modulus, pivots: HashMap::new(), columns: Vec::new() }
    }

    /// Subtracts what is known; what is left, and how often each was subtracted.
    fn reduce(&self, mut c: Sparse, budget: &mut Budget) -> Result<(Sparse, Vec<(usize, u64)>), Stopped> {
        let p = self.modulus;
        let mut used = Vec::new();
        let mut from = 0;
        while let Some((&row, &x)) = c.range(from..).find(|(r, _)| self.pivots.contains_key(*r)) {
            let k = self.pivots[&row];
            let minus = p.neg(x);
            budget.charge(self.columns[k].0.len() / 4 + 1)?;
            for (&r, &y) in &self.columns[k].0 {
                let slot = c.entry(r).or_insert(0);
                *slot = p.add(*slot, p.mul(minus, y));
                if *slot == 0 {
                    c.remove(&r);
                }
            }
            used.push((k, x));
            from = row;
        }
        Ok((c, used))
    }

    /// Takes a column in; its pivot row where it is independent.
    fn push(&mut self, c: Sparse, budget: &mut Budget) -> Result<Option<usize>, Stopped> {
        let p = self.modulus;
        let (mut c, mut used) = self.reduce(c, budget)?;
        let k = self.columns.len();
        let Some((&row, &x)) = c.iter().next() else {
            self.columns.push((Sparse::new(), Vec::new()));
            return Ok(None);
        };
        let scale = p.inverse(x);
        c.values_mut().for_each(|v| *v = p.mul(*v, scale));
        // Its own column is scale · (column − Σ used).
        used.push((usize::MAX, scale));
        self.columns.push((c, used));
        self.pivots.insert(row, k);
        Ok(Some(row))
    }

    /// The coefficients of a combination of the original columns.
    fn coefficients(&self, used: Vec<(usize, u64)>) -> Vec<u64> {
        let p = self.modulus;
        let mut v = vec![0; self.columns.len()];
        used.into_iter().for_each(|(k, x)| v[k] = p.add(v[k], x));
        for k in (0..v.len()).rev() {
            if v[k] == 0 {
                continue;
            }
            let list = &self.columns[k].1;
            let scale = list.last().map_or(1, |l| l.1);
            v[k] = p.mul(v[k], scale);
            for &(j, x) in &list[..list.len().saturating_sub(1)] {
                v[j] = p.add(v[j], p.neg(p.mul(v[k], x)));
            }
        }
        v
    }
}

impl Tower<'_, '_> {
    /// Coefficients with Σ cᵢ columnᵢ = wanted: those that are not zero, exactly.
    pub fn solve(&mut self, columns: &[Column], wanted: &Poly) -> Res<Option<Vec<(usize, Coefficient)>>> {
        let Some(at) = self.residues()? else { return Ok(None) };
        let mut rows: HashMap<Monomial, usize> = HashMap::new();
        let mut sparse = Vec::new();
        for p in columns.iter().map(|c| &c.image).chain([wanted]) {
            self.budget.charge(p.0.len())?;
            match self.residue_column(p, &at, &mut rows) {
                Some(c) => sparse.push(c),
                None => return Ok(None),
            }
        }
        let Some(target) = sparse.pop() else { return Ok(None) };
        let mut echelon = Echelon::new(at.modulus);
        for c in &sparse {
            echelon.push(c.clone(), self.budget)?;
        }
        let (rest, used) = echelon.reduce(target, self.budget)?;
        if !rest.is_empty() {
            return Ok(None);
        }
        let residues = echelon.coefficients(used);
        let support: Vec<usize> = (0..columns.len()).filter(|&k| residues[k] != 0).collect();
        if support.len() > MAX_EXACT {
            return Ok(None);
        }
        // As many rows as unknowns, independent.
        let mut small = Echelon::new(at.modulus);
        let mut chosen = Vec::new();
        for &k in &support {
            match small.push(sparse[k].clone(), self.budget)? {
                Some(row) => chosen.push(row),
                None => return Ok(None),
            }
        }
        let names: HashMap<usize, Monomial> = rows.into_iter().map(|(m, r)| (r, m)).collect();
        let mut matrix: Vec<Vec<Poly>> = Vec::new();
        for row in &chosen {
            let name = &names[row];
            let mut line: Vec<Poly> = support.iter().map(|&k| self.constant_part(&columns[k].image, name)).collect();
            line.push(self.constant_part(wanted, name));
            matrix.push(line);
        }
        let Some(x) = self.solve_exactly(matrix)? else { return Ok(None) };
        Ok(Some(support.into_iter().zip(x).filter(|(_, c)| !c.num.is_zero()).collect()))
    }

    /// Residues of the constants that satisfy their relations.
    fn residues(&mut self) -> Res<Option<Residues>> {
        for seed in 0..TRIES * PRIMES.len() as u64 {
            let p = Modulus((1 << 61) - PRIMES[(seed / TRIES) as usize]);
            let mut at = Residues { modulus: p, values: vec![0u64; self.generators.len()] };
            let mut fits = true;
            for k in 0..self.generators.len() {
                if !self.is_constant_number(k) {
                    continue;
                }
                let free = mix(mix(0x6A11, seed), k as u64) % (p.0 - 1) + 1;
                at.values[k] = match &self.generators[k].relation {
                    Some((2, by)) => match self.residue(by, &at) {
                        Some(square) => {
                            let r = p.pow(square, p.0.div_ceil(4));
                            fits &= p.mul(r, r) == square && r != 0;
                            r
                        }
                        None => {
                            fits = false;
                            0
                        }
                    },
                    _ => free,
                };
            }
            if fits {
                return Ok(Some(at));
            }
        }
        Ok(None)
    }

    fn residue(&self, p: &Poly, at: &Residues) -> Option<u64> {
        let mut out = 0;
        for (m, r) in &p.0 {
            out = at.modulus.add(out, self.residue_of_term(m, r, at)?);
        }
        Some(out)
    }

    fn residue_of_term(&self, m: &Monomial, r: &Rational, at: &Residues) -> Option<u64> {
        let p = at.modulus;
        let (n, d) = r.modulo(p.0)?;
        let mut out = if d == 1 { n } else { p.mul(n, p.inverse(d)) };
        for (k, &e) in m.iter().enumerate() {
            if e != 0 && self.is_constant_number(k) {
                let base = if e < 0 { p.inverse(at.values[k]) } else { at.values[k] };
                out = p.mul(out, p.pow(base, e.unsigned_abs().into()));
            }
        }
        Some(out)
    }

    fn moving(&self, m: &Monomial) -> Monomial {
        trim(m.iter().enumerate().map(|(k, &e)| if self.is_constant_number(k) { 0 } else { e }).collect())
    }

    fn residue_column(&self, p: &Poly, at: &Residues, rows: &mut HashMap<Monomial, usize>) -> Option<Sparse> {
        let mut out = Sparse::new();
        for (m, r) in &p.0 {
            let n = rows.len();
            let row = *rows.entry(self.moving(m)).or_insert(n);
            let slot = out.entry(row).or_insert(0);
            *slot = at.modulus.add(*slot, self.residue_of_term(m, r, at)?);
        }
        out.retain(|_, v| *v != 0);
        Some(out)
    }

    /// The coefficient of a monomial of what moves.
    fn constant_part(&self, p: &Poly, of: &Monomial) -> Poly {
        let mut out = Poly::zero();
        for (m, r) in &p.0 {
            if self.moving(m) == *of {
                out.push(times(m, of, -1), r.clone());
            }
        }
        out
    }

    /// A square system with its right-hand sides at the ends of the rows.
    fn solve_exactly(&mut self, matrix: Vec<Vec<Poly>>) -> Res<Option<Vec<Coefficient>>> {
        let n = matrix.len();
        let mut rows: Vec<Vec<Coefficient>> = Vec::new();
        for line in matrix {
            // Negative powers are multiplied away.
            let mut low = Monomial::new();
            for p in &line {
                for (k, &e) in p.lowest().iter().enumerate() {
                    if low.len() <= k {
                        low.resize(k + 1, 0);
                    }
                    low[k] = low[k].min(e);
                }
            }
            let up = times(&Monomial::new(), &trim(low), -1);
            let mut row = Vec::new();
            for p in line {
                let num = self.reduce(p.shift(&up, &Rational::ONE))?;
                row.push(Coefficient { num, den: Poly::one() });
            }
            rows.push(row);
        }
        let mut places: Vec<usize> = vec![0; n];
        let mut free: Vec<usize> = (0..n).collect();
        let mut order = Vec::new();
        for _ in 0..n {
            // The shortest pivot in the emptiest row.
            let mut best: Option<(usize, usize, usize)> = None;
            for &i in &free {
                let filled = (0..n).filter(|&j| !rows[i][j].num.is_zero()).count();
                for (j, c) in rows[i][..n].iter().enumerate() {
                    if c.num.is_zero() || order.iter().any(|&(_, k)| k == j) {
                        continue;
                    }
                    let cost = filled * 16 + c.num.0.len() + c.den.0.len();
                    if best.is_none_or(|b| cost < b.0) {
                        best = Some((cost, i, j));
                    }
                }
            }
            let Some((_, i, j)) = best else { return Ok(None) };
            free.retain(|&r| r != i);
            order.push((i, j));
            places[j] = i;
            let pivot = rows[i][j].clone();
            for c in rows[i].iter_mut().filter(|c| !c.num.is_zero()) {
                *c = self.quotient(c, &pivot)?;
            }
            let line = rows[i].clone();
            for (r, row) in rows.iter_mut().enumerate() {
                if r == i || row[j].num.is_zero() {
                    continue;
                }
                let k = row[j].clone();
                for (c, by) in row.iter_mut().zip(&line).filter(|(_, by)| !by.num.is_zero()) {
                    let minus = self.product(&k, by)?;
                    *c = self.difference(c, &minus)?;
                }
            }
        }
        Ok(Some((0..n).map(|j| rows[places[j]][n].clone()).collect()))
    }

    fn normal(&mut self, c: Coefficient) -> Res<Coefficient> {
        if c.num.is_zero() {
            return Ok(Coefficient { num: c.num, den: Poly::one() });
        }
        let g = c.num.gcd(&c.den, self.budget)?;
        let (mut num, mut den) = match (c.num.divide(&g, self.budget)?, c.den.divide(&g, self.budget)?) {
            (Some(n), Some(d)) => (n, d),
            _ => (c.num, c.den),
        };
        let (k, primitive) = den.primitive();
        if let Some(inverse) = k.recip() {
            num = num.scale(&inverse);
            den = primitive;
        }
        Ok(Coefficient { num, den })
    }

    fn product(&mut self, a: &Coefficient, b: &Coefficient) -> Res<Coefficient> {
        let (num, den) = (self.mul_poly(&a.num, &b.num)?, self.mul_poly(&a.den, &b.den)?);
        self.normal(Coefficient { num, den })
    }

    fn quotient(&mut self, a: &Coefficient, b: &Coefficient) -> Res<Coefficient> {
        let (num, den) = (self.mul_poly(&a.num, &b.den)?, self.mul_poly(&a.den, &b.num)?);
        self.normal(Coefficient { num, den })
    }

    fn difference(&mut self, a: &Coefficient, b: &Coefficient) -> Res<Coefficient> {
        let (x, y) = (self.mul_poly(&a.num, &b.den)?, self.mul_poly(&b.num, &a.den)?);
        let den = self.mul_poly(&a.den, &b.den)?;
        self.normal(Coefficient { num: x.sub(&y), den })
    }
}
