//! Exact expressions: hash-consed, differentiated, tested for zero, printed. This crate knows no physics.

mod arena;
mod budget;
mod build;
mod calculus;
mod call;
mod display;
mod function;
mod integrate;
mod rational;
mod zero;

pub use arena::{Arena, Expr, Node, Role, Symbol, SymbolInfo};
pub use budget::{Budget, MAX_DEPTH, Stopped};
pub use build::MAX_BITS;
pub use calculus::Derivation;
pub use display::{DisplayOptions, Layout, Printed, textbook, verbatim};
pub use function::Function;
pub use integrate::{antiderivative, primitive, without_common_factor};
pub use rational::Rational;
pub use zero::{Assumptions, Motion, Rate, Reason, Relation, Residues, Sign, Verdict, Witness, ZeroTest};
