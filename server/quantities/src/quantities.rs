//! Quantities with their names, units and items in ISO 80000 (the table is `tables/quantities.tsv`).

use crate::{Compound, Dimension, Exponent};
use std::sync::OnceLock;

/// A kind of quantity that a declaration may name.
#[derive(Debug)]
pub struct Quantity {
    /// Its name in the language: `moment_of_inertia`.
    pub name: &'static str,
    /// Its item in ISO 80000, or in IEC 80000 for part 6: `4-7`. Empty where it has none.
    pub item: &'static str,
    /// Its dimension.
    pub dimension: Dimension,
    /// Whether a bare dimension is taken for this one.
    pub first: bool,
    /// Whether it is in everyday use, and offered where names are listed.
    pub everyday: bool,
    /// What it is, in a few words.
    pub description: &'static str,
    /// The two units as the table spells them.
    spelled: [&'static str; 2],
    unit: OnceLock<Compound>,
    usual: OnceLock<Compound>,
}

// `QUANTITIES` and `NAMES`, their names with their places, from `tables/quantities.tsv`.
include!(concat!(env!("OUT_DIR"), "/quantities.rs"));

impl Quantity {
    /// The coherent unit that the standard gives.
    pub fn unit(&self) -> &Compound {
        self.unit.get_or_init(|| self.read(self.spelled[0]))
    }

    /// The unit in which it is usually given.
    pub fn usual(&self) -> &Compound {
        self.usual.get_or_init(|| self.read(self.spelled[1]))
    }

    fn read(&self, text: &str) -> Compound {
        Compound::read(text).unwrap_or_else(|e| panic!("quantities.tsv: {}: {e}", self.name))
    }

    /// The power of the radian in it: 1 for an angle or angular velocity.
    pub fn angle(&self) -> Exponent {
        self.unit().angle()
    }

    /// The name in words: `moment of inertia`.
    pub fn words(&self) -> String {
        self.name.replace('_', " ")
    }
}

/// The quantity of a name.
pub fn quantity(name: &str) -> Option<&'static Quantity> {
    let at = NAMES.binary_search_by(|(n, _)| (*n).cmp(name)).ok()?;
    Some(&QUANTITIES[NAMES[at].1])
}

/// All quantities: those of ISO 80000-3, then mechanics, heat, electromagnetism, and others.
pub fn quantities() -> &'static [Quantity] {
    &QUANTITIES
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn found_by_name() {
        let q = quantity("moment_of_inertia").expect("in the table");
        assert_eq!((q.item, q.unit().to_string().as_str(), q.words().as_str()), ("4-7", "kg·m²", "moment of inertia"));
        assert!(quantity("lenght").is_none());
    }

    #[test]
    fn units_of_the_standard_are_coherent() {
        for q in quantities() {
            assert!(q.unit().factor().is_ok_and(|f| f.is_one()), "{} in {}", q.name, q.unit());
            assert_eq!((q.unit().dimension(), q.usual().dimension()), (q.dimension, q.dimension), "{}", q.name);
        }
    }

    #[test]
    fn items_are_unique_and_in_order() {
        let key = |item: &str| -> Vec<u32> {
            item.split(['-', '.']).map(|n| n.parse().unwrap_or_else(|_| panic!("item {item}"))).collect()
        };
        let keys: Vec<Vec<u32>> = quantities().iter().filter(|q| !q.item.is_empty()).map(|q| key(q.item)).collect();
        assert!(keys.windows(2).all(|w| w[0] < w[1]), "{keys:?}");
        assert!(keys.iter().all(|k| (3..=9).contains(&k[0])));
        let parts = |part| keys.iter().filter(|k| k[0] == part).count();
        assert!(parts(3) > 30 && parts(4) > 40 && parts(6) > 40);
    }

    #[test]
    fn one_name_is_the_first_of_its_dimension_and_angle() {
        let first: Vec<&Quantity> = quantities().iter().filter(|q| q.first).collect();
        for (k, q) in first.iter().enumerate() {
            let same = first[..k].iter().find(|p| (p.dimension, p.angle()) == (q.dimension, q.angle()));
            assert!(same.is_none(), "{} and {}", q.name, same.map_or("", |p| p.name));
        }
    }

    #[test]
    fn names_are_names_of_the_language() {
        for q in quantities() {
            assert!(q.name.chars().all(|c| c.is_ascii_lowercase() || c == '_'), "{}", q.name);
            assert!(!q.description.is_empty() && !q.description.ends_with('.'), "{}", q.name);
        }
    }
}
