//! What nobody claimed: point symmetries and quadratic first integrals, found by solving the determining equations.
//!
//! An unknown generator, polynomial in t and q and trigonometric in angles, or an unknown Killing tensor makes a linear
//! system for its coefficients; see `relations`. Each item is confirmed by the zero test before it is told. An empty
//! answer says only that there is none other in this ansatz.

mod hidden;
mod integrals;
mod kernel;
mod killing;
mod kinetic;
mod points;
mod primitive;
mod sums;

pub use hidden::{Hidden, hidden};

use crate::context::Context;
use crate::model::Model;
use crate::symmetry::Generator;
use leastwise_algebra::{Expr, Stopped};

/// How far the search goes.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Scope {
    /// The total degree in t and q of the generator's components.
    pub degree: u32,
    /// Positions of the coordinates that are angles: these enter by their sine and cosine, not by powers.
    pub angles: Vec<usize>,
    /// Whether integrals quadratic in the velocities are looked for, too.
    pub quadratic: bool,
}

/// Where a constant of the motion comes from.
#[derive(Clone, PartialEq, Debug)]
pub enum Origin {
    /// A point symmetry, with its gauge term where V is not zero.
    Symmetry {
        /// The generator.
        generator: Generator,
        /// F with V = dF/dt; `None` where V ≡ 0.
        gauge: Option<Expr>,
    },
    /// A hidden symmetry: the integral is quadratic in the velocities, and no point symmetry gives it.
    Quadratic,
}

/// A constant of the motion that was found, confirmed by the zero test.
#[derive(Clone, PartialEq, Debug)]
pub struct Item {
    /// The constant.
    pub charge: Expr,
    /// Where it comes from.
    pub origin: Origin,
    /// Whether it is a linear combination of the charges known beforehand, and of numbers.
    pub known: bool,
}

/// What a search found.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct Found {
    /// Linearly independent constants, the simplest first.
    pub items: Vec<Item>,
    /// Why the ansatz may not have been searched through; `None` where it was: then there is none other in it.
    pub incomplete: Option<String>,
}

/// What a search is doing, for those who wait.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Stage {
    /// Point symmetries are looked for.
    Symmetries,
    /// Integrals quadratic in the velocities are looked for.
    Integrals,
    /// Items are confirmed: this many of that many.
    Confirming(usize, usize),
}

/// Searches for constants of the motion. `known` are charges that need no search: what is a combination of them is marked.
/// Costs a few linear systems in the unknown coefficients of the ansatz, each at most 240; their number grows with the
/// degree and the coordinates. Errors: [`Stopped`] where the budget is spent or the search is cancelled.
pub fn search(
    cx: &mut Context<'_>,
    model: &Model,
    scope: &Scope,
    known: &[Expr],
    report: &mut dyn FnMut(Stage),
) -> Result<Found, Stopped> {
    report(Stage::Symmetries);
    let (mut items, mut incomplete) = points::points(cx, model, scope, report)?;
    if scope.quadratic {
        report(Stage::Integrals);
        let (more, why) = integrals::integrals(cx, model, scope, &items)?;
        items.extend(more);
        incomplete = incomplete.or(why);
    }
    points::mark_known(cx, &mut items, known)?;
    Ok(Found { items, incomplete })
}
