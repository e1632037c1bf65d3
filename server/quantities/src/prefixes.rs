//! The prefixes of the SI.

use crate::{Exact, table};
use leastwise_algebra::Rational;
use std::sync::LazyLock;

/// A prefix: a power of ten before a unit.
#[derive(PartialEq, Eq, Debug)]
pub struct Prefix {
    /// `k`.
    pub symbol: &'static str,
    /// `kilo`.
    pub name: &'static str,
    /// The exponent of ten.
    pub exponent: i32,
}

impl Prefix {
    /// The power of ten.
    pub fn factor(&self) -> Exact {
        let power = Rational::integer(10).pow(self.exponent as i64, 256);
        Exact::rational(power.unwrap_or(Rational::ONE))
    }
}

static PREFIXES: LazyLock<Vec<Prefix>> = LazyLock::new(|| {
    let rows = table::rows(include_str!("../tables/prefixes.tsv")).unwrap_or_else(|e| panic!("prefixes.tsv: {e}"));
    let read = |[symbol, name, exponent]: [&'static str; 3]| Prefix {
        symbol,
        name,
        exponent: exponent.parse().unwrap_or_else(|_| panic!("prefixes.tsv: {name}: `{exponent}` is no number")),
    };
    rows.into_iter().map(read).collect()
});

/// All prefixes, from the largest to the smallest.
pub fn prefixes() -> &'static [Prefix] {
    &PREFIXES
}
