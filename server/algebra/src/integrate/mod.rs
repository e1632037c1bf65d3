//! Antiderivatives in closed form, as far as gauge terms need them.
//!
//! Two methods. *Rules* by name, one term after the other, are quick and keep what was written. *Parallel integration*
//! takes an ansatz over all variables at once. Whoever uses a result differentiates it and compares: a method that does
//! not fit costs an answer, never a wrong one.

mod ansatz;
mod common;
mod factor;
mod polynomial;
mod read;
mod rules;
mod solve;
mod span;
mod special;
mod tower;
mod write;

use crate::arena::{Arena, Expr};
use crate::budget::{Budget, Stopped};
use crate::zero::Sign;
use tower::{Fail, Tower};

pub use common::without_common_factor;
pub use rules::antiderivative;

/// What parallel integration may spend, in nodes; never more than a quarter of what there is.
const NODES: u64 = 2_000_000;

/// F with Σ ∂F/∂x · rate = `e` for the variables x with their rates, found by parallel integration (Risch and Norman): an
/// ansatz of monomials in the generators of `e` with undetermined coefficients, and logarithms and inverse tangents of
/// the factors of its denominators. `None` where there is none in this ansatz: that is no proof that there is none.
/// `signs` tells what is known of the sign of an expression. Costs a bounded number of nodes. F is to be confirmed.
pub fn primitive(
    arena: &mut Arena,
    e: Expr,
    variables: &[(Expr, Expr)],
    signs: &mut dyn FnMut(&mut Arena, Expr, &mut Budget) -> Sign,
    budget: &mut Budget,
) -> Result<Option<Expr>, Stopped> {
    let mut own = budget.part(NODES.min(budget.left() / 4));
    let before = own.left();
    let result = attempt(arena, e, variables, signs, &mut own);
    let spent = before - own.left();
    budget.charge(spent as usize)?;
    match result {
        Ok(f) => Ok(f),
        Err(Fail::Stopped(Stopped::Cancelled)) => Err(Stopped::Cancelled),
        Err(_) => Ok(None),
    }
}

fn attempt(
    arena: &mut Arena,
    e: Expr,
    variables: &[(Expr, Expr)],
    signs: &mut dyn FnMut(&mut Arena, Expr, &mut Budget) -> Sign,
    budget: &mut Budget,
) -> Result<Option<Expr>, Fail> {
    let e = arena.expand(e, budget)?;
    let mut tower = Tower::new(arena, budget, signs, variables, e)?;
    tower.integrate(e)
}
