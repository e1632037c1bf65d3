//! The bracket in velocity space: M, the gyroscopic matrix G and the flow of a charge.

use crate::context::Context;
use crate::lagrange::{momentum, signed_parts};
use crate::mass::{MassRows, dense};
use crate::model::Model;
use leastwise_algebra::{Arena, Expr, Motion, Rational, Stopped, Verdict};

/// Larger coupled blocks are not inverted.
const MAX_BLOCK: usize = 24;

/// The symplectic form in (q, q̇), without coordinates that nothing couples.
pub(super) struct Phase {
    positions: Vec<Expr>,
    velocities: Vec<Expr>,
    mass: Vec<Vec<Expr>>,
    inverse: Vec<Vec<Expr>>,
    /// Gᵢⱼ = ∂pⱼ/∂qⁱ − ∂pᵢ/∂qʲ.
    gyro: Vec<Vec<Expr>>,
    /// For each coordinate the number of its block, coupled by M or G.
    block: Vec<usize>,
}

/// A charge's derivatives and its flow.
pub(super) struct Flow {
    by_position: Vec<Expr>,
    by_velocity: Vec<Expr>,
    /// δq = M⁻¹ ∂C/∂q̇.
    shift: Vec<Expr>,
    /// −δq̇ = M⁻¹ (∂C/∂q − G δq).
    kick: Vec<Expr>,
}

impl Phase {
    /// M, its inverse and G; `None` where a pivot is not known not to vanish or a block is too large. Costs n² partial
    /// derivatives of the momenta and n³ nodes for each block of n.
    pub fn new(cx: &mut Context<'_>, model: &Model, rows: &MassRows) -> Result<Option<Phase>, Stopped> {
        let n = model.coordinates.len();
        let parts = signed_parts(model).concat();
        let all: Vec<usize> = (0..n).collect();
        let mass = dense(cx, rows, &all)?;
        let positions: Vec<Expr> = model.coordinates.iter().map(|q| q.jet(cx.arena, 0)).collect();
        let velocities: Vec<Expr> = model.coordinates.iter().map(|q| q.jet(cx.arena, 1)).collect();
        let mut momenta = Vec::new();
        for q in &model.coordinates {
            let forms = momentum(cx, &parts, q)?;
            let list: Vec<(Expr, Rational)> =
                forms.iter().flat_map(|(f, c)| f.iter().map(|f| (f.expr, c.clone()))).collect();
            momenta.push(cx.build(&list)?);
        }
        let mut gyro = vec![vec![Arena::ZERO; n]; n];
        for i in 0..n {
            for j in 0..i {
                let a = cx.arena.partial(momenta[j], positions[i], cx.budget)?;
                let b = cx.arena.partial(momenta[i], positions[j], cx.budget)?;
                let g = cx.arena.sub(a, b);
                if g != Arena::ZERO && !cx.vanishes(&[(g, Rational::ONE)]).is_proved() {
                    gyro[i][j] = g;
                    gyro[j][i] = cx.arena.neg(g);
                }
            }
        }
        let mut block: Vec<usize> = all.clone();
        // Blocks are few and small: each pass joins what touches.
        let mut changed = true;
        while changed {
            changed = false;
            for i in 0..n {
                for j in 0..n {
                    if (mass[i][j] != Arena::ZERO || gyro[i][j] != Arena::ZERO) && block[i] != block[j] {
                        let least = block[i].min(block[j]);
                        (block[i], block[j]) = (least, least);
                        changed = true;
                    }
                }
            }
        }
        let mut inverse = vec![vec![Arena::ZERO; n]; n];
        // M alone couples less than M and G together.
        for members in crate::mass::blocks(rows).iter().enumerate().filter(|(i, b)| *i == **b).map(|(_, b)| *b) {
            let of: Vec<usize> = (0..n).filter(|&i| crate::mass::blocks(rows)[i] == members).collect();
            if of.len() > MAX_BLOCK {
                return Ok(None);
            }
            let small: Vec<Vec<Expr>> = of.iter().map(|&i| of.iter().map(|&j| mass[i][j]).collect()).collect();
            let Some(found) = invert(cx, small)? else { return Ok(None) };
            for (k, &i) in of.iter().enumerate() {
                for (l, &j) in of.iter().enumerate() {
                    inverse[i][j] = found[k][l];
                }
            }
        }
        Ok(Some(Phase { positions, velocities, mass, inverse, gyro, block }))
    }

    /// Derivatives and flow of a charge.
    pub fn flow(&self, cx: &mut Context<'_>, charge: Expr) -> Result<Flow, Stopped> {
        let mut by_position = Vec::new();
        let mut by_velocity = Vec::new();
        for (&q, &v) in self.positions.iter().zip(&self.velocities) {
            by_position.push(cx.arena.partial(charge, q, cx.budget)?);
            by_velocity.push(cx.arena.partial(charge, v, cx.budget)?);
        }
        let shift = apply(cx, &self.inverse, &by_velocity)?;
        let turned = apply(cx, &self.gyro, &shift)?;
        let pushed: Vec<Expr> = by_position.iter().zip(turned).map(|(&a, b)| cx.arena.sub(a, b)).collect();
        let kick = apply(cx, &self.inverse, &pushed)?;
        Ok(Flow { by_position, by_velocity, shift, kick })
    }

    /// {A, C} as an expression: the rate of A along the flow of C.
    pub fn bracket(&self, cx: &mut Context<'_>, a: &Flow, c: &Flow) -> Result<Expr, Stopped> {
        let mut parts = Vec::new();
        for i in 0..self.positions.len() {
            parts.push((cx.arena.mul(a.by_position[i], c.shift[i]), Rational::ONE));
            parts.push((cx.arena.mul(a.by_velocity[i], c.kick[i]), Rational::MINUS_ONE));
        }
        parts.retain(|p| p.0 != Arena::ZERO);
        cx.build(&parts)
    }

    /// Whether {A, C} = `value`, with M solved at each point of the field:
    /// M δq = ∂C/∂q̇, G δq + M z = ∂C/∂q, {A, C} = ∂A/∂q δq − ∂A/∂q̇ z.
    pub fn equals(&self, cx: &mut Context<'_>, a: &Flow, c: &Flow, value: Expr) -> Verdict {
        let touched: Vec<usize> = (0..self.block.len())
            .filter(|&i| c.by_position[i] != Arena::ZERO || c.by_velocity[i] != Arena::ZERO)
            .map(|i| self.block[i])
            .collect();
        let of: Vec<usize> = (0..self.block.len()).filter(|&i| touched.contains(&self.block[i])).collect();
        let n = of.len();
        let mut motion = Motion::default();
        for &i in &of {
            let mut row: Vec<Expr> = of.iter().map(|&j| self.mass[i][j]).collect();
            row.resize(2 * n, Arena::ZERO);
            motion.mass.push(row);
            motion.rhs.push(c.by_velocity[i]);
        }
        for &i in &of {
            let mut row: Vec<Expr> = of.iter().map(|&j| self.gyro[i][j]).collect();
            row.extend(of.iter().map(|&j| self.mass[i][j]));
            motion.mass.push(row);
            motion.rhs.push(c.by_position[i]);
        }
        let mut slopes: Vec<Expr> = of.iter().map(|&i| a.by_position[i]).collect();
        slopes.extend(of.iter().map(|&i| cx.arena.neg(a.by_velocity[i])));
        let rest = cx.arena.neg(value);
        if slopes.iter().all(|&s| s == Arena::ZERO) {
            return cx.vanishes(&[(rest, Rational::ONE)]);
        }
        cx.zero.rate_is_zero(cx.arena, rest, &slopes, &motion, cx.budget)
    }
}

fn apply(cx: &mut Context<'_>, m: &[Vec<Expr>], v: &[Expr]) -> Result<Vec<Expr>, Stopped> {
    let mut out = Vec::with_capacity(m.len());
    for row in m {
        let mut parts = Vec::new();
        for (&a, &b) in row.iter().zip(v) {
            if a != Arena::ZERO && b != Arena::ZERO {
                parts.push((cx.arena.mul(a, b), Rational::ONE));
            }
        }
        out.push(cx.build(&parts)?);
    }
    Ok(out)
}

/// The inverse by elimination on the shared graph, unexpanded; `None` where no pivot is proved not to vanish.
pub(crate) fn invert(cx: &mut Context<'_>, m: Vec<Vec<Expr>>) -> Result<Option<Vec<Vec<Expr>>>, Stopped> {
    let n = m.len();
    if let [a, b] = m.as_slice() {
        // The adjugate prints better.
        let (p, q) = (cx.arena.mul(a[0], b[1]), cx.arena.mul(a[1], b[0]));
        let d = cx.arena.sub(p, q);
        if !cx.vanishes(&[(d, Rational::ONE)]).is_refuted() {
            return Ok(None);
        }
        let over = |cx: &mut Context<'_>, e: Expr| cx.arena.div(e, d);
        let (x, y) = (cx.arena.neg(a[1]), cx.arena.neg(b[0]));
        return Ok(Some(vec![vec![over(cx, b[1]), over(cx, x)], vec![over(cx, y), over(cx, a[0])]]));
    }
    let mut rows: Vec<Vec<Expr>> = m
        .into_iter()
        .enumerate()
        .map(|(i, mut r)| {
            r.extend((0..n).map(|j| if i == j { Arena::ONE } else { Arena::ZERO }));
            r
        })
        .collect();
    for c in 0..n {
        let mut pivot = None;
        for (i, row) in rows.iter().enumerate().skip(c) {
            if row[c] != Arena::ZERO && cx.vanishes(&[(row[c], Rational::ONE)]).is_refuted() {
                pivot = Some(i);
                break;
            }
        }
        let Some(p) = pivot else { return Ok(None) };
        rows.swap(c, p);
        let d = rows[c][c];
        let line: Vec<Expr> = rows[c].iter().map(|&e| cx.arena.div(e, d)).collect();
        rows[c] = line.clone();
        for (i, row) in rows.iter_mut().enumerate() {
            let k = row[c];
            if i == c || k == Arena::ZERO {
                continue;
            }
            cx.budget.charge(2 * n)?;
            for (a, &b) in row.iter_mut().zip(&line).skip(c) {
                if b != Arena::ZERO {
                    let x = cx.arena.mul(k, b);
                    *a = cx.arena.sub(*a, x);
                }
            }
        }
    }
    Ok(Some(rows.into_iter().map(|r| r[n..].to_vec()).collect()))
}
