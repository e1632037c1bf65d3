//! The mass matrix M = ∂²L/∂q̇∂q̇ and what is left of the equations when the accelerations are taken away.

use crate::context::{Context, Parts};
use crate::lagrange::{by_coordinate, signed_parts};
use crate::model::Model;
use leastwise_algebra::{Arena, Derivation, Expr, Node, Role, Stopped};
use std::collections::{BTreeMap, HashMap};

/// The mass matrix of a model without large families: for each row the entries that are not zero, by column, each as
/// unsummed parts.
pub type MassRows = Vec<Vec<(usize, Parts)>>;

/// Up to so many coordinates every pair is asked; beyond, only the velocities that a momentum contains.
const ALL_PAIRS: usize = 64;

/// The rows of the mass matrix. Costs one partial derivative for each part, coordinate and velocity in it.
pub fn mass_rows(cx: &mut Context<'_>, model: &Model) -> Result<MassRows, Stopped> {
    let parts: Parts = signed_parts(model).concat();
    let velocities: Vec<Expr> = model.coordinates.iter().map(|q| q.jet(cx.arena, 1)).collect();
    let n = velocities.len();
    let column: HashMap<Expr, usize> = velocities.iter().enumerate().map(|(j, &v)| (v, j)).collect();
    let mut out: MassRows = vec![Vec::new(); n];
    for (i, q) in model.coordinates.iter().enumerate() {
        let mut row: BTreeMap<usize, Parts> = BTreeMap::new();
        for (forms, c) in by_coordinate(cx, &parts, q, 1)? {
            for f in forms {
                let columns: Vec<usize> = if n <= ALL_PAIRS {
                    (0..n).collect()
                } else {
                    cx.arena.atoms(f.expr).iter().filter_map(|a| column.get(a).copied()).collect()
                };
                for j in columns {
                    let d = cx.arena.partial(f.expr, velocities[j], cx.budget)?;
                    if d != Arena::ZERO {
                        row.entry(j).or_default().push((d, c.clone()));
                    }
                }
            }
        }
        out[i] = row.into_iter().collect();
    }
    Ok(out)
}

/// The coordinates that accelerate each other: for each coordinate the number of its block.
pub fn blocks(rows: &MassRows) -> Vec<usize> {
    let mut block: Vec<usize> = (0..rows.len()).collect();
    fn root(block: &mut [usize], mut k: usize) -> usize {
        while block[k] != k {
            block[k] = block[block[k]];
            k = block[k];
        }
        k
    }
    for (i, row) in rows.iter().enumerate() {
        for (j, _) in row {
            let (a, b) = (root(&mut block, i), root(&mut block, *j));
            block[a.max(b)] = a.min(b);
        }
    }
    (0..rows.len()).map(|k| root(&mut block, k)).collect()
}

/// The dense matrix of some coordinates.
pub fn dense(cx: &mut Context<'_>, rows: &MassRows, of: &[usize]) -> Result<Vec<Vec<Expr>>, Stopped> {
    let place: HashMap<usize, usize> = of.iter().enumerate().map(|(k, &i)| (i, k)).collect();
    let mut out = vec![vec![Arena::ZERO; of.len()]; of.len()];
    cx.budget.charge(of.len() * of.len())?;
    for (k, &i) in of.iter().enumerate() {
        for (j, parts) in &rows[i] {
            if let Some(&l) = place.get(j).filter(|&&l| l <= k) {
                out[k][l] = cx.build(parts)?;
                // ∂²L/∂q̇ⁱ∂q̇ʲ is symmetric.
                out[l][k] = out[k][l];
            }
        }
    }
    Ok(out)
}

/// Entries of the mass matrix of a model with large families: for each coordinate and range the velocities that its
/// momentum contains, with their coefficients. A sum in a momentum couples to all members and gives no entries.
pub struct SparseRow {
    /// Which coordinate.
    pub coordinate: usize,
    /// Which members.
    pub range: Option<(i64, i64)>,
    /// Velocity atoms and their coefficients.
    pub entries: Vec<(Expr, Expr)>,
    /// Whether a sum couples it to whole families.
    pub dense: bool,
}

/// The sparse mass matrix.
pub fn sparse_mass_matrix(cx: &mut Context<'_>, model: &Model) -> Result<Vec<SparseRow>, Stopped> {
    let parts: Parts = signed_parts(model).concat();
    let mut out = Vec::new();
    for (coordinate, q) in model.coordinates.iter().enumerate() {
        let p = by_coordinate(cx, &parts, q, 1)?;
        for form in crate::lagrange::collect(cx, q, &p)? {
            let mut entries = Vec::new();
            let mut dense = false;
            cx.arena.visit(form.expr, &mut |_, node| dense |= matches!(node, Node::Bound { .. }));
            if !dense {
                for a in cx.arena.atoms(form.expr) {
                    let velocity = match cx.arena.node(a) {
                        Node::Jet(s, 1) => cx.arena.info(*s).role == Role::Coordinate,
                        Node::Member { family, order: 1, .. } => cx.arena.info(*family).role == Role::Coordinate,
                        _ => false,
                    };
                    if velocity {
                        entries.push((a, cx.arena.partial(form.expr, a, cx.budget)?));
                    }
                }
            }
            out.push(SparseRow { coordinate, range: form.range, entries, dense });
        }
    }
    Ok(out)
}

/// The time derivative at zero acceleration: t ↦ 1, q ↦ q̇, q̇ ↦ 0; inputs move on.
pub fn coasting(cx: &mut Context<'_>, e: Expr) -> Result<Expr, Stopped> {
    let memo = std::mem::take(&mut cx.memory.coasting);
    let mut inner = leastwise_algebra::Budget::new(1 << 20);
    let mut rule = |arena: &mut Arena, x: Expr| {
        let moving = match arena.node(x) {
            Node::Jet(s, n) => *n >= 1 && arena.info(*s).role == Role::Coordinate,
            Node::Member { family, order, .. } => *order >= 1 && arena.info(*family).role == Role::Coordinate,
            _ => false,
        };
        if moving { Ok(Arena::ZERO) } else { arena.total(x, &mut inner) }
    };
    let mut d = Derivation::new(&mut rule);
    d.memo = memo;
    let result = cx.arena.derive(e, &mut d, cx.budget);
    cx.memory.coasting = d.memo;
    result
}

/// The right sides b of M a = b for some coordinates: minus the equations' residuals at zero acceleration, unsummed.
pub fn right_sides(cx: &mut Context<'_>, model: &Model, of: &[usize]) -> Result<Vec<Parts>, Stopped> {
    let parts: Parts = signed_parts(model).concat();
    let mut out = Vec::new();
    for &i in of {
        let q = &model.coordinates[i];
        let mut b = Parts::new();
        for (forms, c) in by_coordinate(cx, &parts, q, 1)? {
            for f in forms {
                let rate = coasting(cx, f.expr)?;
                if rate != Arena::ZERO {
                    b.push((rate, c.neg()));
                }
            }
        }
        for (forms, c) in by_coordinate(cx, &parts, q, 0)? {
            b.extend(forms.into_iter().map(|f| (f.expr, c.clone())));
        }
        for force in &model.forces {
            for (forms, c) in crate::lagrange::generalised(cx, force, q)? {
                b.extend(forms.into_iter().map(|f| (f.expr, c.clone())));
            }
        }
        b.retain(|p| p.0 != Arena::ZERO);
        out.push(b);
    }
    Ok(out)
}

/// The coordinates in whose equations of motion no acceleration of theirs or of others occurs: without kinetic term.
pub fn without_inertia(rows: &MassRows) -> Vec<usize> {
    (0..rows.len()).filter(|&i| rows[i].is_empty()).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::fixture::{Fixture, double_pendulum, kepler};
    use crate::lagrange::equation;
    use leastwise_algebra::{Rational, Verdict};

    /// M a − b is the equation of motion.
    fn check(mut f: Fixture) {
        let model = f.model.clone();
        let mut cx = f.cx();
        let m = mass_rows(&mut cx, &model).unwrap();
        let all: Vec<usize> = (0..m.len()).collect();
        let b = right_sides(&mut cx, &model, &all).unwrap();
        for (i, q) in model.coordinates.iter().enumerate() {
            let mut gap = Parts::new();
            for (j, entry) in &m[i] {
                let a = model.coordinates[*j].jet(cx.arena, 2);
                for (e, c) in entry {
                    gap.push((cx.arena.mul(*e, a), c.clone()));
                }
            }
            gap.extend(b[i].iter().map(|(e, c)| (*e, c.neg())));
            for (forms, c) in equation(&mut cx, &model, q).unwrap() {
                gap.extend(forms.into_iter().map(|f| (f.expr, c.neg())));
            }
            assert_eq!(cx.vanishes(&gap), Verdict::Proved);
            gap.push((Arena::ONE, Rational::ONE));
            assert!(cx.vanishes(&gap).is_refuted());
        }
    }

    #[test]
    fn the_equations_are_linear_in_the_accelerations() {
        check(double_pendulum());
        check(kepler());
    }
}
