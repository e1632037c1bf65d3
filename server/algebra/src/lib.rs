//! Exact expressions: hash-consed, differentiated, tested for zero, printed. This crate knows no physics.

mod arena;
mod build;
mod function;
mod rational;

pub use arena::{Arena, Expr, Node, Role, Symbol, SymbolInfo};
pub use function::Function;
pub use rational::Rational;
