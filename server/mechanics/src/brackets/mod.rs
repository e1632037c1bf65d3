//! The algebra of charges: Poisson brackets in velocity space, closed into structure constants, and named where proved.
//!
//! With {q, p} = +1, M = ∂p/∂q̇ and Gᵢⱼ = ∂pⱼ/∂qⁱ − ∂pᵢ/∂qʲ,
//!
//! {A, C} = ∂A/∂q · c − ∂C/∂q · a + aᵀ G c,  a = M⁻¹ ∂A/∂q̇,  c = M⁻¹ ∂C/∂q̇
//!
//! from ∂/∂p = M⁻¹ ∂/∂q̇ and (∂A/∂q)ₚ = ∂A/∂q − (∂p/∂q)ᵀ M⁻¹ ∂A/∂q̇ in {A, C} = Σ ∂A/∂qⁱ ∂C/∂pᵢ − ∂A/∂pᵢ ∂C/∂qⁱ [GPS §9.5; A §40].
//! So {m ẋ, m ẏ} = q B for L = ½ m v² + q A · v, B = ∂A_y/∂x − ∂A_x/∂y, and {A, h} is the rate of an A without explicit
//! time. Equally {A, C} is the derivative of A along δq = c, M δq̇ = G c − ∂C/∂q, the flow of C: linear systems, which are
//! solved in the field at each point of the zero test.

mod closure;
mod flow;
mod galilei;
mod lie;
mod naming;
mod rows;

pub use closure::Summand;
pub use lie::{Lie, MAX_DIMENSION};
pub use naming::{Condition, Named, Sign};

use crate::context::Context;
use crate::lagrange::jet_order;
use crate::mass::mass_rows;
use crate::model::{Model, time};
use crate::regularity::{MassVerdict, mass_verdict};
use closure::{Found, Values, coefficients, search, value};
pub(crate) use flow::invert;
use flow::{Flow, Phase};
use leastwise_algebra::{Arena, Expr, Rational, Stopped, Verdict};

/// A conserved quantity with the name under which it is listed. That it is conserved has been proved before.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Charge {
    /// Its name, for messages.
    pub name: String,
    /// A function of time, coordinates and velocities.
    pub value: Expr,
}

/// Why there are no brackets.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Refusal {
    /// With constraints motions lie on a surface, on which the bracket is another one or, with constraints that are not
    /// integrable, none.
    Constraints,
    /// Families that are not written out.
    LargeFamily,
    /// The mass matrix is singular: momenta are not independent.
    Singular,
    /// It was not decided whether the mass matrix is regular.
    Undecided(String),
    /// This charge contains accelerations.
    Accelerations(usize),
    /// More charges than [`MAX_CHARGES`].
    TooMany,
}

impl std::fmt::Display for Refusal {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match self {
            Refusal::Constraints => f.write_str("no brackets: the motions lie on the surface of the constraints"),
            Refusal::LargeFamily => f.write_str("no brackets: a family is not written out"),
            Refusal::Singular => f.write_str("no brackets: the mass matrix is singular"),
            Refusal::Undecided(why) => write!(f, "no brackets: whether the mass matrix is regular is undecided: {why}"),
            Refusal::Accelerations(_) => f.write_str("no brackets: a charge contains accelerations"),
            Refusal::TooMany => write!(f, "no brackets: more than {MAX_CHARGES} charges"),
        }
    }
}

/// More charges are refused.
pub const MAX_CHARGES: usize = 24;
/// Products of all pairs are tried for so many charges only.
const MAX_FACTORS: usize = 10;

/// What a bracket is.
#[derive(Clone, PartialEq, Debug)]
pub enum Outcome {
    /// The combination, proved; empty for zero.
    Closed(Vec<Summand>),
    /// No combination, linear or quadratic, was found; the bracket itself, unexpanded. Where both charges are conserved
    /// and there are no forces beside L, it is conserved too (Poisson's theorem) [GPS §9.7].
    NotClosed(Expr),
    /// A combination was found but not proved, or residues are not to be had.
    Undecided(String),
}

/// {left, right}, by numbers of charges, left < right.
#[derive(Clone, PartialEq, Debug)]
pub struct Bracket {
    /// Number of the first charge.
    pub left: usize,
    /// Number of the second.
    pub right: usize,
    /// Its value.
    pub outcome: Outcome,
}

/// A charge that is a combination of those before it, with constant coefficients.
#[derive(Clone, PartialEq, Debug)]
pub struct Dependent {
    /// Number of the charge.
    pub charge: usize,
    /// What it is, proved.
    pub combination: Vec<Summand>,
}

/// The algebra of the charges.
#[derive(Clone, PartialEq, Debug)]
pub struct ChargeAlgebra {
    /// Numbers of the charges that are no combinations of earlier ones and of constants.
    pub basis: Vec<usize>,
    /// The others.
    pub dependent: Vec<Dependent>,
    /// The brackets of all pairs of the basis.
    pub brackets: Vec<Bracket>,
    /// The charges whose brackets with all others are proved to vanish.
    pub central: Vec<usize>,
    /// The constants among the brackets' values, as the mass in {boost, momentum} = m: central charges.
    pub central_constants: Vec<Expr>,
    /// Names with their conditions; empty where none is proved.
    pub named: Vec<Named>,
    /// Whether forces beside L act: the brackets are L's alone, and Poisson's theorem is not used.
    pub forced: bool,
}

impl ChargeAlgebra {
    /// Whether every bracket is a combination of the charges.
    pub fn closed(&self) -> bool {
        self.brackets.iter().all(|b| matches!(b.outcome, Outcome::Closed(_)))
    }
}

/// The brackets of charges, closed and named. Costs one system of twice the coupled coordinates for each pair and point,
/// and an elimination in the number of candidates for each pair that does not vanish.
pub fn charge_algebra(
    cx: &mut Context<'_>,
    model: &Model,
    charges: &[Charge],
) -> Result<Result<ChargeAlgebra, Refusal>, Stopped> {
    if !model.constraints.is_empty() {
        return Ok(Err(Refusal::Constraints));
    }
    if model.coordinates.iter().any(|q| q.members.is_some()) {
        return Ok(Err(Refusal::LargeFamily));
    }
    if charges.len() > MAX_CHARGES {
        return Ok(Err(Refusal::TooMany));
    }
    if let Some(k) = (0..charges.len()).find(|&k| jet_order(cx.arena, charges[k].value) > 1) {
        return Ok(Err(Refusal::Accelerations(k)));
    }
    let rows = mass_rows(cx, model)?;
    match mass_verdict(cx, &rows)? {
        MassVerdict::Regular | MassVerdict::NotPositive(_) => {}
        MassVerdict::Singular(_) => return Ok(Err(Refusal::Singular)),
        MassVerdict::Undecided(why) => return Ok(Err(Refusal::Undecided(why))),
        MassVerdict::NotAsked => return Ok(Err(Refusal::LargeFamily)),
    }
    let values: Vec<Expr> = charges.iter().map(|c| c.value).collect();
    let mut table = Table { values, basis: Vec::new(), flows: Vec::new(), central: Vec::new() };
    let mut dependent = Vec::new();
    for k in 0..charges.len() {
        match table.close(cx, table.values[k], false, &mut |cx, gap| cx.vanishes(&[(gap, Rational::ONE)]))? {
            Outcome::Closed(combination) => dependent.push(Dependent { charge: k, combination }),
            _ => table.basis.push(k),
        }
    }
    let brackets = if table.basis.len() < 2 {
        table.central = table.basis.clone();
        Vec::new()
    } else {
        let Some(phase) = Phase::new(cx, model, &rows)? else {
            return Ok(Err(Refusal::Undecided("its inverse was not found".into())));
        };
        for &k in &table.basis {
            table.flows.push(phase.flow(cx, table.values[k])?);
        }
        table.fill(cx, &phase)?
    };
    let mut central_constants = Vec::new();
    for b in &brackets {
        let Outcome::Closed(list) = &b.outcome else { continue };
        for s in list.iter().filter(|s| s.charges.is_empty()) {
            let (_, c) = cx.arena.split_coefficient(s.coefficient);
            if !central_constants.contains(&c) {
                central_constants.push(c);
            }
        }
    }
    let mut named = naming::named(cx, &table.basis, &table.central, &brackets)?;
    // Charges with explicit time do not commute with the energy: time translation, dilation and expansion form what is
    // called sl(2,ℝ), the same algebra as so(2,1) [de Alfaro, Fubini, Furlan 1976].
    let clock = time(cx.arena);
    let clock = cx.arena.sym(clock);
    if table.basis.iter().any(|&k| cx.arena.atoms(table.values[k]).contains(&clock)) {
        for n in &mut named {
            n.name = n.name.take().map(|name| name.replace("so(2,1)", "sl(2,ℝ)"));
            n.kind = n.kind.replace("so(2,1)", "sl(2,ℝ)");
        }
    }
    let forced = !model.forces.is_empty();
    let Table { basis, central, .. } = table;
    Ok(Ok(ChargeAlgebra { basis, dependent, brackets, central, central_constants, named, forced }))
}

/// The charges while their brackets are found.
struct Table {
    values: Vec<Expr>,
    basis: Vec<usize>,
    flows: Vec<Flow>,
    central: Vec<usize>,
}

impl Table {
    fn fill(&mut self, cx: &mut Context<'_>, phase: &Phase) -> Result<Vec<Bracket>, Stopped> {
        let n = self.basis.len();
        let pairs: Vec<(usize, usize)> = (0..n).flat_map(|i| (i + 1..n).map(move |j| (i, j))).collect();
        let mut zero = vec![vec![true; n]; n];
        for &(i, j) in &pairs {
            let vanishes = phase.equals(cx, &self.flows[i], &self.flows[j], Arena::ZERO).is_proved();
            zero[i][j] = vanishes;
            zero[j][i] = vanishes;
        }
        self.central = (0..n).filter(|&i| zero[i].iter().all(|&z| z)).map(|i| self.basis[i]).collect();
        let mut out = Vec::new();
        for (i, j) in pairs {
            let outcome = if zero[i][j] {
                Outcome::Closed(Vec::new())
            } else {
                let (a, c) = (&self.flows[i], &self.flows[j]);
                let target = phase.bracket(cx, a, c)?;
                // Confirmed with M solved in the field, not with the inverse that found it.
                self.close(cx, target, true, &mut |cx, gap| {
                    let claimed = cx.arena.sub(target, gap);
                    phase.equals(cx, a, c, claimed)
                })?
            };
            out.push(Bracket { left: self.basis[i], right: self.basis[j], outcome });
        }
        Ok(out)
    }

    /// A function as a combination of the basis: linear first, then with a central charge as factor, then quadratic.
    /// `confirm` is given the difference.
    fn close(
        &self,
        cx: &mut Context<'_>,
        target: Expr,
        quadratic: bool,
        confirm: &mut dyn FnMut(&mut Context<'_>, Expr) -> Verdict,
    ) -> Result<Outcome, Stopped> {
        let linear: Vec<Vec<usize>> = std::iter::once(Vec::new()).chain(self.basis.iter().map(|&k| vec![k])).collect();
        let mut stages = vec![linear.clone()];
        if quadratic {
            let mut more = linear.clone();
            for &z in &self.central {
                more.extend(self.basis.iter().filter(|&&k| k > z || !self.central.contains(&k)).map(|&k| pair(z, k)));
                more.push(vec![z, z]);
            }
            if !self.central.is_empty() {
                stages.push(more.clone());
            }
            if self.basis.len() <= MAX_FACTORS {
                for (i, &k) in self.basis.iter().enumerate() {
                    for &l in &self.basis[i..] {
                        if !more.contains(&pair(k, l)) {
                            more.push(pair(k, l));
                        }
                    }
                }
                stages.push(more);
            }
        }
        let mut doubt = None;
        let mut list = vec![target];
        list.extend(self.basis.iter().map(|&k| self.values[k]));
        for stage in stages {
            let candidates: Vec<Expr> = stage
                .iter()
                .map(|of| {
                    let factors: Vec<Expr> = of.iter().map(|&k| self.values[k]).collect();
                    cx.arena.product(&factors)
                })
                .collect();
            for square in [false, true] {
                let values = Values::new(cx, &list, square);
                let found = match search(cx, &values, &candidates, target)? {
                    Found::Combination(found) => found,
                    Found::Nothing => continue,
                    Found::Untold => {
                        doubt = Some("residues are not to be had".to_string());
                        continue;
                    }
                };
                for way in coefficients(cx, &values, &candidates, target, &found)? {
                    if way.contains(&Arena::UNDEFINED) {
                        continue;
                    }
                    let combination: Vec<Summand> = found
                        .iter()
                        .zip(way)
                        .map(|((k, _), coefficient)| Summand { coefficient, charges: stage[*k].clone() })
                        .collect();
                    let claimed = value(cx, &self.values, &combination)?;
                    let gap = cx.arena.sub(target, claimed);
                    match confirm(cx, gap) {
                        Verdict::Proved => return Ok(Outcome::Closed(combination)),
                        Verdict::Refuted(_) => {}
                        Verdict::Undecided(r) => doubt = Some(r.to_string()),
                    }
                }
            }
        }
        Ok(doubt.map_or(Outcome::NotClosed(target), Outcome::Undecided))
    }
}

fn pair(a: usize, b: usize) -> Vec<usize> {
    vec![a.min(b), a.max(b)]
}

#[cfg(test)]
mod tests;
