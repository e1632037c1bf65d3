//! What is printed reads back as what was meant, in all spellings.

mod cases;
mod properties;
mod reader;
mod system;
mod targets;
mod verbatim;
