//! Which summands break an identity: a smallest set without which the rest vanishes.
//!
//! Each summand is a vector of residues of what should vanish, at points of a finite field. The summands are split into
//! the components of linear dependence of these vectors: the total splits along them, so a smallest set is the union of
//! the components' smallest sets. Within a component subsets are tried up to size four, latest first; beyond that a set
//! that is minimal by inclusion is found, and it is said.

/// The prime of the residues.
pub const P: u64 = (1 << 61) - 1;

fn add(a: u64, b: u64) -> u64 {
    let s = a + b;
    if s >= P { s - P } else { s }
}

fn sub(a: u64, b: u64) -> u64 {
    if a >= b { a - b } else { a + P - b }
}

fn mul(a: u64, b: u64) -> u64 {
    let w = a as u128 * b as u128;
    let r = (w & P as u128) as u64 + (w >> 61) as u64;
    if r >= P { r - P } else { r }
}

fn inverse(a: u64) -> u64 {
    let (mut result, mut base, mut n) = (1, a, P - 2);
    while n > 0 {
        if n & 1 == 1 {
            result = mul(result, base);
        }
        base = mul(base, base);
        n >>= 1;
    }
    result
}

/// The breakers.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Blamed {
    /// Positions of the summands to blame, ascending.
    pub culprits: Vec<usize>,
    /// Whether no smaller set does; otherwise it is minimal by inclusion.
    pub smallest: bool,
}

/// The largest size of a component's set that is searched through.
const SEARCHED: usize = 4;
/// More subsets than this are not tried in one component.
const MAX_SUBSETS: usize = 400_000;

/// A smallest set of summands whose removal makes the rest vanish. `vectors[k]` are the residues of the k-th summand,
/// all of one length. Costs the cube of the number of summands, and the subsets.
pub fn blame(vectors: &[Vec<u64>]) -> Blamed {
    let mut culprits = Vec::new();
    let mut smallest = true;
    for component in components(vectors) {
        let (set, least) = in_component(vectors, &component);
        culprits.extend(set);
        smallest &= least;
    }
    culprits.sort_unstable();
    Blamed { culprits, smallest }
}

/// The classes of summands connected by linear dependence. Summands that vanish belong to none.
fn components(vectors: &[Vec<u64>]) -> Vec<Vec<usize>> {
    let live: Vec<usize> = (0..vectors.len()).filter(|&k| vectors[k].iter().any(|&x| x != 0)).collect();
    // Row echelon form; each row remembers which summands it is made of.
    let mut rows: Vec<(usize, Vec<u64>, Vec<usize>)> = Vec::new();
    let mut parent: Vec<usize> = (0..vectors.len()).collect();
    fn root(parent: &mut [usize], mut k: usize) -> usize {
        while parent[k] != k {
            parent[k] = parent[parent[k]];
            k = parent[k];
        }
        k
    }
    for &k in &live {
        let mut v = vectors[k].clone();
        let mut made_of = vec![k];
        for (pivot, row, of) in &rows {
            let c = v[*pivot];
            if c != 0 {
                for (x, y) in v.iter_mut().zip(row) {
                    *x = sub(*x, mul(c, *y));
                }
                made_of.extend(of.iter().copied());
            }
        }
        match v.iter().position(|&x| x != 0) {
            Some(pivot) => {
                let scale = inverse(v[pivot]);
                v.iter_mut().for_each(|x| *x = mul(*x, scale));
                made_of.sort_unstable();
                made_of.dedup();
                rows.push((pivot, v, made_of));
            }
            None => {
                // A dependence: find exactly the summands with a coefficient in it.
                for j in dependence(vectors, &made_of, k) {
                    let (a, b) = (root(&mut parent, k), root(&mut parent, j));
                    parent[a.max(b)] = a.min(b);
                }
            }
        }
    }
    let mut out: Vec<Vec<usize>> = Vec::new();
    for &k in &live {
        let r = root(&mut parent, k);
        match out.iter_mut().find(|c| root(&mut parent, c[0]) == r) {
            Some(c) => c.push(k),
            None => out.push(vec![k]),
        }
    }
    out
}

/// The summands among `pool` that the k-th depends on with nonzero coefficients.
fn dependence(vectors: &[Vec<u64>], pool: &[usize], k: usize) -> Vec<usize> {
    let mut pool: Vec<usize> = pool.to_vec();
    pool.sort_unstable();
    pool.dedup();
    pool.retain(|&j| j != k);
    // Echelon rows with their combination of the pool.
    let n = pool.len();
    let mut rows: Vec<(usize, Vec<u64>, Vec<u64>)> = Vec::new();
    let reduce = |rows: &[(usize, Vec<u64>, Vec<u64>)], v: &mut Vec<u64>, combo: &mut Vec<u64>| {
        for (pivot, row, of) in rows {
            let c = v[*pivot];
            if c != 0 {
                for (x, y) in v.iter_mut().zip(row) {
                    *x = sub(*x, mul(c, *y));
                }
                for (x, y) in combo.iter_mut().zip(of) {
                    *x = sub(*x, mul(c, *y));
                }
            }
        }
    };
    for (i, &j) in pool.iter().enumerate() {
        let mut v = vectors[j].clone();
        let mut combo = vec![0; n];
        combo[i] = 1;
        reduce(&rows, &mut v, &mut combo);
        if let Some(pivot) = v.iter().position(|&x| x != 0) {
            let scale = inverse(v[pivot]);
            v.iter_mut().for_each(|x| *x = mul(*x, scale));
            combo.iter_mut().for_each(|x| *x = mul(*x, scale));
            rows.push((pivot, v, combo));
        }
    }
    let mut v = vectors[k].clone();
    let mut combo = vec![0; n];
    reduce(&rows, &mut v, &mut combo);
    pool.into_iter().zip(combo).filter(|(_, c)| *c != 0).map(|(j, _)| j).collect()
}

/// A set of one component whose removal leaves a sum of zero.
fn in_component(vectors: &[Vec<u64>], component: &[usize]) -> (Vec<usize>, bool) {
    let length = vectors[component[0]].len();
    let total = |set: &mut dyn Iterator<Item = usize>| {
        let mut v = vec![0; length];
        for k in set {
            for (x, y) in v.iter_mut().zip(&vectors[k]) {
                *x = add(*x, *y);
            }
        }
        v
    };
    let target = total(&mut component.iter().copied());
    if target.iter().all(|&x| x == 0) {
        return (Vec::new(), true);
    }
    if component.len() == 1 {
        return (component.to_vec(), true);
    }
    // One random functional of each vector: sums are compared by one number first.
    let weight = |i: usize| mul((i as u64 + 1).wrapping_mul(0x9E37_79B9_7F4A_7C15) >> 3, 0x0123_4567_89ab_cdef % P);
    let functional = |v: &[u64]| v.iter().enumerate().fold(0, |s, (i, &x)| add(s, mul(x, weight(i))));
    let latest: Vec<usize> = component.iter().rev().copied().collect();
    let values: Vec<u64> = latest.iter().map(|&k| functional(&vectors[k])).collect();
    let goal = functional(&target);
    let mut tried = 0;
    for size in 1..=SEARCHED.min(latest.len()) {
        let mut found: Option<Vec<usize>> = None;
        subsets(latest.len(), size, &mut |set| {
            tried += 1;
            if tried > MAX_SUBSETS {
                return true;
            }
            let s = set.iter().fold(0, |s, &i| add(s, values[i]));
            if s == goal && total(&mut set.iter().map(|&i| latest[i])) == target {
                found = Some(set.iter().map(|&i| latest[i]).collect());
                return true;
            }
            false
        });
        if let Some(set) = found {
            return (set, true);
        }
        if tried > MAX_SUBSETS {
            break;
        }
    }
    // Minimal by inclusion: take back from the front what need not be blamed.
    let mut set: Vec<usize> = component.to_vec();
    let mut k = 0;
    while k < set.len() {
        let mut fewer = set.clone();
        fewer.remove(k);
        if total(&mut fewer.iter().copied()) == target {
            set = fewer;
        } else {
            k += 1;
        }
    }
    // A component that fits into the searched sizes was searched wholly.
    let least = component.len() <= SEARCHED && tried <= MAX_SUBSETS;
    (set, least)
}

/// Calls `f` with the subsets of size `k` of 0..n in lexical order until it returns true.
fn subsets(n: usize, k: usize, f: &mut dyn FnMut(&[usize]) -> bool) {
    let mut set: Vec<usize> = (0..k).collect();
    if k > n {
        return;
    }
    loop {
        if f(&set) {
            return;
        }
        let Some(i) = (0..k).rev().find(|&i| set[i] < n - k + i) else { return };
        set[i] += 1;
        for j in i + 1..k {
            set[j] = set[j - 1] + 1;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn check(vectors: &[&[i64]], culprits: &[usize]) {
        let vectors: Vec<Vec<u64>> =
            vectors.iter().map(|v| v.iter().map(|&x| x.rem_euclid(P as i64) as u64).collect()).collect();
        let b = blame(&vectors);
        assert_eq!(b.culprits, culprits);
        assert!(b.smallest);
    }

    #[test]
    fn terms_that_cancel_are_not_blamed() {
        check(&[&[1, 2], &[-1, -2], &[0, 0]], &[]);
        check(&[&[1, 2, 0], &[-1, -2, 0], &[0, 0, 5]], &[2]);
    }

    #[test]
    fn of_several_smallest_sets_the_latest_is_blamed() {
        // Any one of the three would do: 1 + 1 − 2 + 1 breaks by one.
        check(&[&[1], &[1], &[-2], &[1]], &[3]);
    }

    #[test]
    fn independent_breakers_are_all_blamed() {
        check(&[&[1, 0, 0, 0, 0, 0], &[0, 1, 0, 0, 0, 0], &[0, 0, 1, 0, 0, 0], &[0, 0, 0, 1, 0, 0], &[0, 0, 0, 0, 1, 0], &[
            0, 0, 0, 0, 0, 1,
        ]], &[0, 1, 2, 3, 4, 5]);
    }

    #[test]
    fn unequal_springs_are_both_blamed() {
        // k₁ x y and −k₂ x y: dependent only if the numbers are; residues of independent monomials are not.
        check(&[&[3, 5], &[-7, -2]], &[0, 1]);
    }

    proptest! {
        /// What is left after removing the culprits vanishes, and no smaller set does it.
        #[test]
        fn the_rest_vanishes(vectors in prop::collection::vec(prop::collection::vec(-2i64..3, 2), 1..7)) {
            let v: Vec<Vec<u64>> =
                vectors.iter().map(|v| v.iter().map(|&x| x.rem_euclid(P as i64) as u64).collect()).collect();
            let b = blame(&v);
            let rest = |keep: &dyn Fn(usize) -> bool| {
                (0..2).all(|c| (0..v.len()).filter(|&k| keep(k)).map(|k| vectors[k][c]).sum::<i64>() == 0)
            };
            prop_assert!(rest(&|k| !b.culprits.contains(&k)));
            if b.smallest {
                for mask in 0u32..1 << v.len() {
                    if (mask.count_ones() as usize) < b.culprits.len() {
                        prop_assert!(!rest(&|k| mask & (1 << k) == 0));
                    }
                }
            }
        }
    }
}
