//! algebra.
