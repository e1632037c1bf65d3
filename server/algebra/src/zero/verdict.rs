//! The verdicts.

use super::witness::Witness;
use crate::budget::Stopped;
use std::fmt;

/// The answer to `is this zero?`.
#[derive(Clone, Copy, PartialEq, Debug)]
pub enum Verdict {
    /// Zero, with an error probability below 10⁻³⁰. Equality is generic: off poles.
    Proved,
    /// Not zero; with a real point where it is not, if one was found.
    Refuted(Option<Witness>),
    /// Neither, and why.
    Undecided(Reason),
}

impl Verdict {
    /// Whether it is proved to be zero.
    pub fn is_proved(self) -> bool {
        self == Verdict::Proved
    }

    /// Whether it is proved to be not zero.
    pub fn is_refuted(self) -> bool {
        matches!(self, Verdict::Refuted(_))
    }
}

/// Why something is undecided.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Reason {
    /// The budget is used up.
    TooLarge,
    /// Degree or exponents are out of all bounds.
    DegreeTooHigh,
    /// The text has changed meanwhile.
    Cancelled,
    /// A division by zero.
    Undefined,
    /// A denominator vanished at every point tried.
    DenominatorsVanish,
    /// The mass matrix was singular at every point tried.
    Degenerate,
    /// It hangs on functions whose relations are not all known.
    Functions,
    /// It hangs on the signs of expressions, and they are not known.
    SignsUnknown,
    /// Roots depend on each other in a way that was not resolved.
    RelatedRoots,
    /// A sum has symbolic bounds.
    SymbolicRange,
    /// It would have to be tested on a constraint surface.
    Constraints,
    /// No real point was found that satisfies the assumptions and shows a value other than zero.
    NoWitness,
}

impl fmt::Display for Reason {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Reason::TooLarge => "the expression is too large to be tested",
            Reason::DegreeTooHigh => "the exponents are too large to be tested",
            Reason::Cancelled => "the test was cancelled",
            Reason::Undefined => "the expression divides by zero",
            Reason::DenominatorsVanish => "a denominator seems to vanish everywhere",
            Reason::Degenerate => "the mass matrix seems to be singular everywhere",
            Reason::Functions => {
                "it depends on identities of functions that are not all known (log, inverse functions)"
            }
            Reason::SignsUnknown => "it depends on signs that are not known; an assumption may help",
            Reason::RelatedRoots => "it depends on roots that are related to each other",
            Reason::SymbolicRange => "it contains a sum whose range is not a range of numbers",
            Reason::Constraints => "it would have to be tested on the surface of the constraints",
            Reason::NoWitness => {
                "no real point was found that satisfies the assumptions and shows a value other than 0"
            }
        })
    }
}

impl From<Stopped> for Reason {
    fn from(s: Stopped) -> Reason {
        match s {
            Stopped::Cancelled => Reason::Cancelled,
            _ => Reason::TooLarge,
        }
    }
}
