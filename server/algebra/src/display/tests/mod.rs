//! What is printed reads back as what was meant, in all spellings.

mod verbatim;
