//! Every rule about names and formulas, once.

mod blame;
mod formulas;
mod history;
mod incremental;
mod lies;
mod lowering;
mod mends;
mod names;
mod values;
mod verdicts;
