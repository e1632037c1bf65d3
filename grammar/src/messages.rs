//! What the parser could not read, said in the language's own words.

use crate::build::Failure;
use crate::slips::Slips;
use crate::token::Spanned;

/// Turns the parser's failures into slips.
pub fn report(_text: &str, _tokens: &[Spanned], failures: &[Failure], slips: &mut Slips) {
    for failure in failures {
        slips.error(crate::codes::UNEXPECTED, Default::default(), format!("{failure:?}"));
    }
}
