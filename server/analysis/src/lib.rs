//! From syntax trees to a model of mechanics, and findings about names and formulas.

mod amends;
mod assemble;
pub mod checked;
pub mod codes;
pub mod database;
mod derive;
mod dimensions;
pub mod features;
mod finding;
mod formula;
mod hints;
pub mod include;
pub mod insights;
mod lower;
mod mends;
mod names;
mod near;
pub mod pages;
pub mod quantities;
pub mod report;
pub mod scope;
pub mod search;
mod sheet;
mod trade;
pub mod uses;
mod values;
mod verdicts;

pub use checked::Checked;
pub use database::Session;
pub use derive::Derived;
pub use include::Files;

#[cfg(test)]
mod fixture;
#[cfg(test)]
mod models;
#[cfg(test)]
mod tests;
