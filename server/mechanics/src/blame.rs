//! Which summands break an identity: a smallest set without which the rest vanishes.
//!
//! Each summand is a vector of residues of what should vanish, at points of a finite field. The summands are split into
//! the components of linear dependence of these vectors: the total splits along them, so a smallest set is the union of
//! the components' smallest sets. Within a component subsets are tried by size, latest first, as long as their number
//! allows: all sizes in components of up to 14, size four in components of up to 27. Beyond that groups of up to four that
//! cancel are taken out of the set, and it is said that a smaller one may exist.

use leastwise_algebra::Residues;

/// The breakers.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Blamed {
    /// Positions of the summands to blame, ascending.
    pub culprits: Vec<usize>,
    /// Whether no smaller set does, proved; otherwise no group of up to four of it cancels, as far as was looked.
    pub smallest: bool,
}

/// The largest group that is looked for in what is too large to be searched wholly.
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
    let without =
        |set: &[usize]| -> Vec<usize> { (0..latest.len()).filter(|i| !set.contains(i)).map(|i| latest[i]).collect() };
    let mut tries = MAX_SUBSETS;
    let mut excluded = 0;
    for size in 1..=latest.len() {
        match first_subset(latest.len(), size, &mut tries, &mut |set| summands.sum_vanishes(&without(set))) {
            Some(set) => return (set.into_iter().map(|i| latest[i]).collect(), true),
            None if tries == 0 => break,
            None => excluded = size,
        }
    }
    let set = reduced(summands, component);
    // All smaller sets were tried.
    let least = set.len() <= excluded + 1;
    (set, least)
}

/// What is left of a set when groups that cancel are taken out, the earliest first. A set is minimal by inclusion
/// where no group of it cancels; groups of up to four are looked for.
fn reduced(summands: &dyn Summands, component: &[usize]) -> Vec<usize> {
    let mut set = component.to_vec();
    let mut tries = MAX_SUBSETS;
    let mut size = 1;
    while size <= SEARCHED.min(set.len()) && tries > 0 {
        let cancels = |group: &[usize]| summands.sum_vanishes(&group.iter().map(|&i| set[i]).collect::<Vec<_>>());
        match first_subset(set.len(), size, &mut tries, &mut |group| cancels(group)) {
            Some(group) => set = (0..set.len()).filter(|i| !group.contains(i)).map(|i| set[i]).collect(),
            None => size += 1,
        }
    }
    set
}

/// The first subset of size `k` of 0..n that fits; `tries` is what may be tried, 0 where it was not enough.
fn first_subset(n: usize, k: usize, tries: &mut usize, fits: &mut dyn FnMut(&[usize]) -> bool) -> Option<Vec<usize>> {
    let mut found = None;
    subsets(n, k, &mut |set| {
        if *tries == 0 {
            return true;
        }
        *tries -= 1;
        if fits(set) {
            found = Some(set.to_vec());
        }
        found.is_some()
    });
    found
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

    /// Vectors that are all independent of each other.
    fn units(n: usize) -> Vec<Vec<i64>> {
        (0..n).map(|k| (0..n).map(|i| (i == k) as i64).collect()).collect()
    }

    #[test]
    fn sets_of_more_than_four_are_smallest_where_all_were_tried() {
        let b = blame(&Vectors(units(6)));
        assert_eq!(b, Blamed { culprits: vec![0, 1, 2, 3, 4, 5], smallest: true });
        // Five of seven: the first and the third cancel.
        check(&[&[9], &[1], &[-9], &[2], &[4], &[16], &[32]], &[1, 3, 4, 5, 6], true);
    }

    #[test]
    fn what_was_not_searched_wholly_is_said() {
        let mut vectors = units(20);
        vectors[3] = vectors[7].iter().map(|x| -x).collect();
        let culprits = (0..20).filter(|k| ![3, 7].contains(k)).collect();
        assert_eq!(blame(&Vectors(vectors)), Blamed { culprits, smallest: false });
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
