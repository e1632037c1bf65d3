//! What is printed reads back as what was meant, in all spellings.

mod cases;
mod system;
mod targets;
mod verbatim;
