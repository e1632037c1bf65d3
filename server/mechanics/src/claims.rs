//! Claimed constants of the motion: dC/dt along motions, decided in the field with M a = b solved at each point.

use crate::context::{Context, Parts};
use crate::lagrange::jet_order;
use crate::mass::{MassRows, blocks, coasting, dense, right_sides};
use crate::model::Model;
use crate::surface;
use leastwise_algebra::{Arena, Expr, Motion, Stopped, Verdict};
use std::collections::HashSet;

/// The verdict on a claim, and its rate.
#[derive(Clone, PartialEq, Debug)]
pub struct Claim {
    /// dC/dt with the accelerations as they stand.
    pub rate: Expr,
    /// Whether it vanishes on motions.
    pub verdict: Result<Verdict, Unanswered>,
}

/// Why a claim is not decided before any zero test.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Unanswered {
    /// Motions lie on the constraint surface, and it is not solved for coordinates.
    Constraints,
    /// The system is a large family whose accelerations are not solved for.
    LargeFamily,
    /// The claim contains accelerations.
    Accelerations,
    /// The mass matrix is singular, or not proved to be regular: motions need not pass through every state.
    Degenerate,
}

impl std::fmt::Display for Unanswered {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(match self {
            Unanswered::Constraints => {
                "the constraints are not solved for coordinates, so that states on their surface are not known"
            }
            Unanswered::LargeFamily => "the accelerations of a family of more than 64 members are not solved for",
            Unanswered::Degenerate => "the mass matrix is singular or not known to be regular, so that motions need not pass through every state",
            Unanswered::Accelerations => "the claim contains accelerations",
        })
    }
}

/// The accelerations' linear system, of the coordinates whose accelerations are asked for and of those coupled to them.
pub(crate) fn motion(
    cx: &mut Context<'_>,
    model: &Model,
    rows: &MassRows,
    asked: &[bool],
) -> Result<(Vec<usize>, Motion), Stopped> {
    let block = blocks(rows);
    let wanted: HashSet<usize> = (0..asked.len()).filter(|&i| asked[i]).map(|i| block[i]).collect();
    let of: Vec<usize> = (0..asked.len()).filter(|&i| wanted.contains(&block[i])).collect();
    let mass = dense(cx, rows, &of)?;
    let mut rhs = Vec::new();
    for b in right_sides(cx, model, &of)? {
        rhs.push(cx.build(&b)?);
    }
    Ok((of, Motion { mass, rhs }))
}

/// Decides whether `claim` is constant along motions.
pub fn examine(cx: &mut Context<'_>, model: &Model, rows: Option<&MassRows>, claim: Expr) -> Result<Claim, Stopped> {
    let rate = cx.arena.total(claim, cx.budget)?;
    let refuse = |reason| Ok(Claim { rate, verdict: Err(reason) });
    if matches!(cx.vanishes(&[(rate, leastwise_algebra::Rational::ONE)]), Verdict::Proved) {
        // Constant on every curve, motion or not.
        return Ok(Claim { rate, verdict: Ok(Verdict::Proved) });
    }
    if jet_order(cx.arena, claim) > 1 {
        return refuse(Unanswered::Accelerations);
    }
    let Some(rows) = rows else { return refuse(Unanswered::LargeFamily) };
    let still = coasting(cx, claim)?;
    let mut slopes = Vec::new();
    for q in &model.coordinates {
        let v = q.jet(cx.arena, 1);
        slopes.push(cx.arena.partial(claim, v, cx.budget)?);
    }
    if !model.constraints.is_empty() {
        let idle = vec![Arena::ZERO; model.constraints.len()];
        return match surface::rate_is_zero(cx, model, still, &slopes, &idle)? {
            Some(verdict) => Ok(Claim { rate, verdict: Ok(verdict) }),
            None => refuse(Unanswered::Constraints),
        };
    }
    let asked: Vec<bool> = slopes.iter().map(|&s| s != Arena::ZERO).collect();
    let (of, motion) = motion(cx, model, rows, &asked)?;
    let slopes: Vec<Expr> = of.iter().map(|&i| slopes[i]).collect();
    let verdict = cx.zero.rate_is_zero(cx.arena, still, &slopes, &motion, cx.budget);
    Ok(Claim { rate, verdict: Ok(verdict) })
}

/// Whether a claim is ± a sum whose conservation is known already.
pub fn is_multiple(cx: &mut Context<'_>, claim: Expr, known: Expr) -> bool {
    for sign in [leastwise_algebra::Rational::MINUS_ONE, leastwise_algebra::Rational::ONE] {
        let parts: Parts = vec![(claim, leastwise_algebra::Rational::ONE), (known, sign)];
        if claim != Arena::ZERO && matches!(cx.vanishes(&parts), Verdict::Proved) {
            return true;
        }
    }
    false
}
