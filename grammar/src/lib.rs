//! The syntax.
pub mod tree;
