//! The mass matrix M = ∂²L/∂q̇∂q̇ and what is left of the equations when the accelerations are taken away.

use crate::context::{Context, Parts};
use crate::lagrange::{by_coordinate, signed_parts};
use crate::model::Model;
use leastwise_algebra::{Arena, Derivation, Expr, Node, Role, Stopped};

/// The mass matrix of a model without large families, each entry as unsummed parts.
pub fn mass_matrix(cx: &mut Context<'_>, model: &Model) -> Result<Vec<Vec<Parts>>, Stopped> {
    let parts: Parts = signed_parts(model).concat();
    let velocities: Vec<Expr> = model.coordinates.iter().map(|q| q.jet(cx.arena, 1)).collect();
    let n = velocities.len();
    let mut out = vec![vec![Parts::new(); n]; n];
    for (i, q) in model.coordinates.iter().enumerate() {
        let p = by_coordinate(cx, &parts, q, 1)?;
        for j in i..n {
            let mut entry = Parts::new();
            for (forms, c) in &p {
                for f in forms {
                    let d = cx.arena.partial(f.expr, velocities[j], cx.budget)?;
                    if d != Arena::ZERO {
                        entry.push((d, c.clone()));
                    }
                }
            }
            out[j][i] = entry.clone();
            out[i][j] = entry;
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

/// The right sides b of M a = b: minus the equations' residuals at zero acceleration, unsummed.
pub fn right_sides(cx: &mut Context<'_>, model: &Model) -> Result<Vec<Parts>, Stopped> {
    let parts: Parts = signed_parts(model).concat();
    let mut out = Vec::new();
    for q in &model.coordinates {
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
pub fn without_inertia(matrix: &[Vec<Parts>]) -> Vec<usize> {
    (0..matrix.len()).filter(|&i| matrix[i].iter().all(Vec::is_empty)).collect()
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
        let m = mass_matrix(&mut cx, &model).unwrap();
        let b = right_sides(&mut cx, &model).unwrap();
        for (i, q) in model.coordinates.iter().enumerate() {
            let mut gap = Parts::new();
            for (j, other) in model.coordinates.iter().enumerate() {
                let a = other.jet(cx.arena, 2);
                for (e, c) in &m[i][j] {
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
