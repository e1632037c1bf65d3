//! Quantities with their names, units and items in ISO 80000 (the table is `tables/quantities.tsv`).

use crate::{Compound, Dimension, Exponent, table};
use std::collections::HashMap;
use std::sync::LazyLock;

/// A kind of quantity that a declaration may name.
#[derive(Debug)]
pub struct Quantity {
    /// Its name in the language: `moment_of_inertia`.
    pub name: &'static str,
    /// Its item in ISO 80000, or in IEC 80000 for part 6: `4-7`. Empty where it has none.
    pub item: &'static str,
    /// The coherent unit that the standard gives.
    pub unit: Compound,
    /// The unit in which it is usually given.
    pub usual: Compound,
    /// Whether a bare dimension is taken for this one.
    pub first: bool,
    /// What it is, in a few words.
    pub description: &'static str,
}

impl Quantity {
    /// Its dimension.
    pub fn dimension(&self) -> Dimension {
        self.unit.dimension()
    }

    /// The power of the radian in it: 1 for an angle or angular velocity.
    pub fn angle(&self) -> Exponent {
        self.unit.angle()
    }

    /// The name in words: `moment of inertia`.
    pub fn words(&self) -> String {
        self.name.replace('_', " ")
    }
}

struct Quantities {
    list: Vec<Quantity>,
    names: HashMap<&'static str, usize>,
}

static QUANTITIES: LazyLock<Quantities> =
    LazyLock::new(|| read(include_str!("../tables/quantities.tsv")).unwrap_or_else(|e| panic!("quantities.tsv: {e}")));

fn read(text: &'static str) -> Result<Quantities, String> {
    let mut out = Quantities { list: Vec::new(), names: HashMap::new() };
    for [name, item, unit, usual, dimension, first, description] in table::rows(text)? {
        let about = |e: &dyn std::fmt::Display| format!("{name}: {e}");
        let unit = Compound::read(unit).map_err(|e| about(&e))?;
        let usual = if usual.is_empty() { Ok(unit.clone()) } else { Compound::read(usual) }.map_err(|e| about(&e))?;
        if unit.dimension().to_string() != dimension || usual.dimension() != unit.dimension() {
            return Err(about(&format!("{unit}, {usual} and {dimension} are not the same dimension")));
        }
        if out.names.insert(name, out.list.len()).is_some() {
            return Err(about(&"stands twice"));
        }
        out.list.push(Quantity { name, item, unit, usual, first: first == "*", description });
    }
    Ok(out)
}

/// The quantity of a name.
pub fn quantity(name: &str) -> Option<&'static Quantity> {
    let table = &*QUANTITIES;
    table.list.get(*table.names.get(name)?)
}

/// All quantities: those of ISO 80000-3, then mechanics, heat, electromagnetism, and others.
pub fn quantities() -> &'static [Quantity] {
    &QUANTITIES.list
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn found_by_name() {
        let q = quantity("moment_of_inertia").expect("in the table");
        assert_eq!((q.item, q.unit.to_string().as_str(), q.words().as_str()), ("4-7", "kg·m²", "moment of inertia"));
        assert!(quantity("lenght").is_none());
    }

    #[test]
    fn units_of_the_standard_are_coherent() {
        for q in quantities() {
            assert!(q.unit.factor().is_ok_and(|f| f.is_one()), "{} in {}", q.name, q.unit);
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
            let same = first[..k].iter().find(|p| (p.dimension(), p.angle()) == (q.dimension(), q.angle()));
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
