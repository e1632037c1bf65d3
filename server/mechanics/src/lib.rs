//! mechanics.
