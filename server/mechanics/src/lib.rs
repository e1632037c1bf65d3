//! Lagrangian mechanics over exact expressions: momenta, forces, equations of motion, energy, symmetries and their
//! charges, and which term breaks what. This crate knows no text.

pub mod amends;
pub mod blame;
pub mod brackets;
pub mod claims;
pub mod context;
pub mod discrete;
pub mod energy;
pub mod forms;
pub mod gauge;
pub mod idle;
pub mod lagrange;
pub mod mass;
pub mod model;
pub mod regularity;
pub mod search;
pub mod similarity;
pub mod surface;
pub mod symmetry;
pub mod verdicts;

#[cfg(test)]
mod fixture;
