//! Which summands break an identity: a smallest set without which the rest vanishes.
//!
//! Each summand is a vector of residues of what should vanish, at points of a finite field. The summands are split into
//! the components of linear dependence of these vectors: the total splits along them, so a smallest set is the union of
//! the components' smallest sets. Within a component subsets are tried up to size four, latest first; beyond that a set
//! that is minimal by inclusion is found, and it is said.

use leastwise_algebra::Residues;

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
const MAX_SUBSETS: usize = 20_000;

/// What is asked of the summands; residues, or numbers in tests.
pub trait Summands {
    /// The classes of summands connected by linear dependence.
    fn components(&self) -> Vec<Vec<usize>>;
    /// Whether these summands add up to zero.
    fn sum_vanishes(&self, of: &[usize]) -> bool;
}

impl Summands for Residues {
    fn components(&self) -> Vec<Vec<usize>> {
        Residues::components(self)
    }

    fn sum_vanishes(&self, of: &[usize]) -> bool {
        Residues::sum_vanishes(self, of)
    }
}

/// A smallest set of summands whose removal makes the rest vanish. Costs the elimination of the vectors, and the
/// subsets of each component.
pub fn blame(summands: &dyn Summands) -> Blamed {
    let mut culprits = Vec::new();
    let mut smallest = true;
    for component in summands.components() {
        let (set, least) = in_component(summands, &component);
        culprits.extend(set);
        smallest &= least;
    }
    culprits.sort_unstable();
    Blamed { culprits, smallest }
}

/// A set of one component whose removal leaves a sum of zero.
fn in_component(summands: &dyn Summands, component: &[usize]) -> (Vec<usize>, bool) {
    if summands.sum_vanishes(component) {
        return (Vec::new(), true);
    }
    if component.len() == 1 {
        return (component.to_vec(), true);
    }
    let latest: Vec<usize> = component.iter().rev().copied().collect();
    let mut tried = 0;
    for size in 1..=SEARCHED.min(latest.len()) {
        let mut found: Option<Vec<usize>> = None;
        subsets(latest.len(), size, &mut |set| {
            tried += 1;
            if tried > MAX_SUBSETS {
                return true;
            }
            let rest: Vec<usize> = (0..latest.len()).filter(|i| !set.contains(i)).map(|i| latest[i]).collect();
            if summands.sum_vanishes(&rest) {
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
        let rest: Vec<usize> = component.iter().copied().filter(|c| !set.contains(c) || *c == set[k]).collect();
        if summands.sum_vanishes(&rest) {
            set.remove(k);
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

    /// Vectors of integers. All are said to be one component: the search alone is tested.
    struct Vectors(Vec<Vec<i64>>);

    impl Summands for Vectors {
        fn components(&self) -> Vec<Vec<usize>> {
            vec![(0..self.0.len()).collect()]
        }

        fn sum_vanishes(&self, of: &[usize]) -> bool {
            (0..self.0[0].len()).all(|c| of.iter().map(|&k| self.0[k][c]).sum::<i64>() == 0)
        }
    }

    fn check(vectors: &[&[i64]], culprits: &[usize], smallest: bool) {
        let b = blame(&Vectors(vectors.iter().map(|v| v.to_vec()).collect()));
        assert_eq!(b, Blamed { culprits: culprits.to_vec(), smallest });
    }

    #[test]
    fn terms_that_cancel_are_not_blamed() {
        check(&[&[1, 2], &[-1, -2], &[0, 0]], &[], true);
        check(&[&[1, 2, 0], &[-1, -2, 0], &[0, 0, 5]], &[2], true);
    }

    #[test]
    fn of_several_smallest_sets_the_latest_is_blamed() {
        // Any one of the three would do: 1 + 1 − 2 + 1 breaks by one.
        check(&[&[1], &[1], &[-2], &[1]], &[3], true);
    }

    #[test]
    fn beyond_four_a_minimal_set_is_found_and_said() {
        let unit = |k: usize| (0..6).map(|i| (i == k) as i64).collect::<Vec<_>>();
        let vectors: Vec<Vec<i64>> = (0..6).map(unit).collect();
        let b = blame(&Vectors(vectors));
        assert_eq!(b, Blamed { culprits: vec![0, 1, 2, 3, 4, 5], smallest: false });
    }

    proptest! {
        /// What is left after removing the culprits vanishes, and no smaller set does it.
        #[test]
        fn the_rest_vanishes(vectors in prop::collection::vec(prop::collection::vec(-2i64..3, 2), 1..7)) {
            let v = Vectors(vectors.clone());
            let b = blame(&v);
            let rest = |keep: &dyn Fn(usize) -> bool| {
                v.sum_vanishes(&(0..vectors.len()).filter(|&k| keep(k)).collect::<Vec<_>>())
            };
            prop_assert!(rest(&|k| !b.culprits.contains(&k)));
            if b.smallest {
                for mask in 0u32..1 << vectors.len() {
                    if (mask.count_ones() as usize) < b.culprits.len() {
                        prop_assert!(!rest(&|k| mask & (1 << k) == 0));
                    }
                }
            }
        }
    }
}
