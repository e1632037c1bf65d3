//! Lagrangian mechanics over exact expressions. Knows no text.

pub mod model;
