//! The program, run as users run it.

mod examples;
mod formatting;
mod readme;
mod sources;
mod support;
mod traps;
mod usage;
