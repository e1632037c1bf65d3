//! What an editor asks for: functions from a checked model and an offset to plain data. One feature per file; none knows
//! the protocol. Offsets are bytes in the model's file, and clamped where they are past its end.

pub mod actions;
pub mod completion;
pub mod hover;
pub mod inlay;
pub mod navigation;
pub mod outline;
pub mod place;
pub mod rename;
pub mod tokens;

#[cfg(test)]
pub(crate) mod models;
