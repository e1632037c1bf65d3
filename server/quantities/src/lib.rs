//! Quantities, units, their exact factors, and physical constants. This crate knows no text of a model.
//!
//! The tables are files: `tables/prefixes.tsv`, `units.tsv`, `quantities.tsv` (with the items of ISO 80000) and
//! `constants.tsv` (CODATA 2022). A unit comes as symbols and exponents, so that whoever reads text need not be known here.
//!
//! ```
//! use leastwise_quantities::{Compound, Exact, Exponent, Measure};
//!
//! let unit = Compound::new(&[("r", Exponent::ONE), ("min", Exponent::whole(-1))])?;
//! let speed = Measure::new(Exact::integer(1500), unit);
//! assert_eq!(speed.si()?.to_string(), "50π");
//! # Ok::<(), leastwise_quantities::UnitError>(())
//! ```

mod compound;
mod constants;
mod dimension;
mod exact;
mod exponent;
mod familiar;
mod measure;
mod prefixes;
mod quantities;
mod spelling;
mod table;
pub mod unify;
mod units;

pub use compound::{Compound, UnitError};
pub use constants::{Constant, constant, constants};
pub use dimension::{Base, Dimension};
pub use exact::Exact;
pub use exponent::Exponent;
pub use familiar::{Familiar, familiar, in_words};
pub use measure::Measure;
pub use prefixes::{Prefix, prefixes};
pub use quantities::{Quantity, quantities, quantity};
pub use units::{Group, Mark, Prefixes, Symbol, Unit, unit, units};
