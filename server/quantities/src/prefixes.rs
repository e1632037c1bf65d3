//! The prefixes of the SI.

use crate::Exact;
use leastwise_algebra::Rational;

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

// `PREFIXES`, from `tables/prefixes.tsv`.
include!(concat!(env!("OUT_DIR"), "/prefixes.rs"));

/// All prefixes, from the largest to the smallest.
pub fn prefixes() -> &'static [Prefix] {
    &PREFIXES
}
