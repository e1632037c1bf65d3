//! The Leastwise model language: text to syntax tree and back.
//!
//! [`split`] cuts a file into items, [`callable_names`] finds the functions that they declare, [`parse_item`] reads one
//! item. An item's parse depends on its text and on those of the callable names that occur in it, on nothing else.

mod build;
pub mod codes;
mod format;
mod formulas;
mod heads;
mod hints;
mod items;
mod keywords;
mod lexer;
mod messages;
mod names;
mod parse;
mod pieces;
mod reading;
mod slips;
mod token;
pub mod tree;
mod values;

#[allow(missing_docs, clippy::all, clippy::pedantic, unused, trivial_casts, unreachable_pub)]
#[rustfmt::skip]
mod model {
    lalrpop_util::lalrpop_mod!(generated, "/model.rs");
    pub use generated::EntryParser;
}

pub use format::{format, format_with};
pub use items::{RawItem, callable_names, description_at, split};
pub use keywords::{Arity, Keyword, KeywordRole, builtin, keywords, nearest};
pub use lexer::{WordKind, words};
pub use names::{CallableNames, begins_name, continues_name, fold_letters, fold_name, read_name};
pub use parse::{ParsedItem, parse_formula, parse_item};
pub use pieces::NESTING;
