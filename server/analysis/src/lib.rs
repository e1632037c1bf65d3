//! analysis.
