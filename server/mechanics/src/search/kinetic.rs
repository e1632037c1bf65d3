//! The equations of motion by degree in the velocities: q̈ = a₀(q) + a₁(q, q̇) + a₂(q, q̇), homogeneous of degree 0, 1, 2.
//!
//! For L = ½ M q̇ q̇ + A q̇ − V: M a₀ = −∂V/∂q, M a₁ is the gyroscopic force, and a₂ makes the geodesics of M [A §4, §19].

use crate::brackets::invert;
use crate::context::Context;
use crate::lagrange::jet_order;
use crate::mass::{MassRows, blocks, dense, mass_rows, right_sides};
use crate::model::Model;
use crate::regularity::{MassVerdict, mass_verdict};
use leastwise_algebra::{Arena, Expr, Node, Rational, Role, Stopped};

/// More coordinates than this are not searched.
const MAX_COORDINATES: usize = 6;
/// A mass matrix that depends on positions is inverted up to so many coordinates.
const MAX_CURVED: usize = 4;

/// The accelerations, split.
pub(super) struct Kinetic {
    /// M, as rows for the zero test.
    pub rows: MassRows,
    /// M⁻¹.
    pub inverse: Vec<Vec<Expr>>,
    /// q.
    pub positions: Vec<Expr>,
    /// q̇.
    pub velocities: Vec<Expr>,
    /// The parameters that are factors of every element of the diagonal of M.
    pub inertia: Vec<(Expr, Rational)>,
    /// ½ M q̇ q̇.
    pub energy: Expr,
    /// Whether M does not depend on q: the geodesics are straight.
    pub flat: bool,
    /// a₀.
    pub rest: Vec<Expr>,
    /// a₁; empty where there is none.
    pub gyroscopic: Vec<Expr>,
    /// a₂.
    pub geodesic: Vec<Expr>,
}

impl Kinetic {
    /// The accelerations, or why the search is not made.
    pub fn new(cx: &mut Context<'_>, model: &Model) -> Result<Result<Kinetic, String>, Stopped> {
        let refuse = |why: &str| Ok(Err(format!("integrals quadratic in the velocities were not looked for: {why}")));
        let n = model.coordinates.len();
        if !model.constraints.is_empty() {
            return refuse("there are constraints");
        }
        if !model.forces.is_empty() {
            return refuse("forces or dissipation act beside L");
        }
        if model.coordinates.iter().any(|q| q.members.is_some()) {
            return refuse("a family is not written out");
        }
        if n > MAX_COORDINATES {
            return refuse(&format!("there are more than {MAX_COORDINATES} coordinates"));
        }
        let rows = mass_rows(cx, model)?;
        let regular = match mass_verdict(cx, &rows)? {
            MassVerdict::Regular | MassVerdict::NotPositive(_) => true,
            MassVerdict::Singular(_) | MassVerdict::Undecided(_) | MassVerdict::NotAsked => false,
        };
        if !regular {
            return refuse("the mass matrix is not known to be regular");
        }
        let all: Vec<usize> = (0..n).collect();
        let mass = dense(cx, &rows, &all)?;
        let positions: Vec<Expr> = model.coordinates.iter().map(|q| q.jet(cx.arena, 0)).collect();
        let velocities: Vec<Expr> = model.coordinates.iter().map(|q| q.jet(cx.arena, 1)).collect();
        if mass.iter().flatten().any(|&e| jet_order(cx.arena, e) > 0) {
            return refuse("the kinetic energy is not quadratic in the velocities");
        }
        let mut forces = Vec::new();
        for b in right_sides(cx, model, &all)? {
            forces.push(cx.build(&b)?);
        }
        if mass.iter().flatten().chain(&forces).any(|&e| moves_with_time(cx, e)) {
            return refuse("the equations of motion depend on the time");
        }
        let flat = !mass.iter().flatten().any(|&e| positions.iter().any(|q| cx.arena.atoms(e).contains(q)));
        if !flat && n > MAX_CURVED {
            return refuse(&format!("the mass matrix of more than {MAX_CURVED} coordinates depends on them"));
        }
        let Some(inverse) = inverse(cx, &rows, &mass)? else {
            return refuse("the mass matrix was not inverted");
        };
        let parts = split(cx, &velocities, &forces, flat)?;
        let mut gyroscopic = raise(cx, &inverse, &parts.linear)?;
        if gyroscopic.iter().all(|&e| e == Arena::ZERO) {
            gyroscopic.clear();
        }
        let rest = raise(cx, &inverse, &parts.free)?;
        let geodesic = raise(cx, &inverse, &parts.quadratic)?;
        let mut inertia = cx.arena.factors(mass[0][0]);
        inertia.retain(|f| {
            let parameter = matches!(cx.arena.node(f.0), Node::Symbol(s) if cx.arena.info(*s).role == Role::Parameter);
            parameter && (0..n).all(|i| cx.arena.factors(mass[i][i]).contains(f))
        });
        let mut energy = Vec::new();
        for i in 0..n {
            for j in 0..n {
                energy.push((cx.arena.product(&[mass[i][j], velocities[i], velocities[j]]), Rational::HALF));
            }
        }
        let energy = cx.build(&energy)?;
        Ok(Ok(Kinetic { rows, inverse, positions, velocities, inertia, energy, flat, rest, gyroscopic, geodesic }))
    }
}

/// Whether the time or an input occurs.
fn moves_with_time(cx: &Context<'_>, e: Expr) -> bool {
    cx.arena.atoms(e).into_iter().any(|a| match cx.arena.node(a) {
        Node::Symbol(s) | Node::Jet(s, _) => matches!(cx.arena.info(*s).role, Role::Time | Role::Input),
        Node::Member { family, .. } => matches!(cx.arena.info(*family).role, Role::Time | Role::Input),
        _ => false,
    })
}

struct Split {
    free: Vec<Expr>,
    linear: Vec<Expr>,
    quadratic: Vec<Expr>,
}

/// Forces by degree in the velocities; what vanishes identically is dropped.
fn split(cx: &mut Context<'_>, velocities: &[Expr], forces: &[Expr], flat: bool) -> Result<Split, Stopped> {
    let at_rest: hashbrown::HashMap<Expr, Expr> = velocities.iter().map(|&v| (v, Arena::ZERO)).collect();
    let mut out = Split { free: Vec::new(), linear: Vec::new(), quadratic: Vec::new() };
    for &b in forces {
        out.free.push(cx.arena.substitute(b, &at_rest, cx.budget)?);
        let (mut linear, mut quadratic) = (Vec::new(), Vec::new());
        for &v in velocities {
            let slope = cx.arena.partial(b, v, cx.budget)?;
            let still = cx.arena.substitute(slope, &at_rest, cx.budget)?;
            if still != Arena::ZERO && !cx.vanishes(&[(still, Rational::ONE)]).is_proved() {
                linear.push((cx.arena.mul(still, v), Rational::ONE));
            }
            if !flat {
                // b₂ = ½ Σ (∂b/∂q̇ⁱ − its value at rest) q̇ⁱ by Euler's theorem.
                let bent = cx.arena.sub(slope, still);
                quadratic.push((cx.arena.mul(bent, v), Rational::HALF));
            }
        }
        out.linear.push(cx.build(&linear)?);
        let quadratic = cx.build(&quadratic)?;
        out.quadratic.push(cx.arena.expand(quadratic, cx.budget)?);
    }
    Ok(out)
}

/// M⁻¹, block by block.
fn inverse(cx: &mut Context<'_>, rows: &MassRows, mass: &[Vec<Expr>]) -> Result<Option<Vec<Vec<Expr>>>, Stopped> {
    let n = mass.len();
    let block = blocks(rows);
    let mut out = vec![vec![Arena::ZERO; n]; n];
    for b in 0..n {
        let of: Vec<usize> = (0..n).filter(|&i| block[i] == b).collect();
        match of[..] {
            [] => {}
            [i] => out[i][i] = cx.arena.pow(mass[i][i], -1),
            _ => {
                let small = of.iter().map(|&i| of.iter().map(|&j| mass[i][j]).collect()).collect();
                let Some(found) = invert(cx, small)? else { return Ok(None) };
                for (k, &i) in of.iter().enumerate() {
                    for (l, &j) in of.iter().enumerate() {
                        out[i][j] = found[k][l];
                    }
                }
            }
        }
    }
    Ok(Some(out))
}

/// M⁻¹ b.
pub(super) fn raise(cx: &mut Context<'_>, inverse: &[Vec<Expr>], b: &[Expr]) -> Result<Vec<Expr>, Stopped> {
    let mut out = Vec::new();
    for row in inverse {
        let mut parts = Vec::new();
        for (&w, &b) in row.iter().zip(b) {
            // Summand by summand, so that masses cancel.
            for (term, c) in cx.arena.summands(b) {
                parts.push((cx.arena.mul(w, term), c));
            }
        }
        parts.retain(|p| p.0 != Arena::ZERO);
        out.push(cx.build(&parts)?);
    }
    Ok(out)
}
