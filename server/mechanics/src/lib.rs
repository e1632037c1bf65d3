//! Lagrangian mechanics over exact expressions. Knows no text.

pub mod model;
pub mod forms;
pub mod blame;
