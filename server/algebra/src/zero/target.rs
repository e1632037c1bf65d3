//! What is tested: a sum of parts, the rate of a quantity along motions, a determinant.

use super::bounds::{lcm, sum_bounds};
use super::evaluate::{exists, number};
use super::field::Element;
use super::interval::Interval;
use super::linear;
use super::notes::{Note, Notes};
use super::points::Point;
use super::test::ZeroTest;
use crate::arena::{Arena, Expr};
use crate::budget::{Budget, Stopped};
use crate::rational::Rational;

/// The accelerations a of a motion: mass · a = rhs, one row for each coordinate.
#[derive(Clone, PartialEq, Eq, Hash, Debug, Default)]
pub struct Motion {
    /// The mass matrix, by rows.
    pub mass: Vec<Vec<Expr>>,
    /// The right-hand sides.
    pub rhs: Vec<Expr>,
}

/// A value to be tested.
pub(super) enum Target<'a> {
    /// Σ coefficient · part.
    Sum(&'a [(Expr, Rational)]),
    /// c₀ + Σ cᵢ aᵢ with the accelerations of a motion.
    Rate(Expr, &'a [Expr], &'a Motion),
    /// A determinant, by rows.
    Determinant(&'a [Vec<Expr>]),
}

/// What a value is at a point.
pub(super) enum At<V> {
    /// The value.
    Value(V),
    /// A denominator vanishes.
    Pole,
    /// The mass matrix is singular.
    Singular,
}

impl Target<'_> {
    /// All expressions in it.
    pub fn expressions(&self) -> Vec<Expr> {
        match self {
            Target::Sum(parts) => parts.iter().map(|p| p.0).collect(),
            Target::Rate(c0, c, motion) => {
                let mut v = vec![*c0];
                v.extend_from_slice(c);
                motion.mass.iter().for_each(|r| v.extend_from_slice(r));
                v.extend_from_slice(&motion.rhs);
                v
            }
            Target::Determinant(rows) => rows.iter().flatten().copied().collect(),
        }
    }

    /// Makes the notes of all parts and bounds the value.
    pub fn analyse(&self, test: &mut ZeroTest, arena: &mut Arena, budget: &mut Budget) -> Result<Note, Stopped> {
        let list = self.expressions();
        for e in &list {
            test.notes.analyse(arena, &test.facts, *e, budget)?;
        }
        let notes = &test.notes;
        if let [e] = list.as_slice()
            && matches!(self, Target::Sum(_))
        {
            return Ok(notes.note(*e));
        }
        let mut note = notes.note(Arena::ZERO);
        for e in &list {
            let n = notes.note(*e);
            note.flags |= n.flags;
            note.lcm = lcm(note.lcm, n.lcm);
            note.inner = note.inner.max(n.inner);
        }
        match self {
            Target::Sum(parts) => {
                sum_bounds(&mut note, &Rational::ZERO, parts.iter().map(|(e, c)| (notes.note(*e), c)));
            }
            Target::Rate(c0, c, motion) => {
                let one = Rational::ONE;
                let all = std::iter::once(c0).chain(c.iter());
                sum_bounds(&mut note, &Rational::ZERO, all.map(|e| (notes.note(*e), &one)));
                // Cramer: each aᵢ is a quotient of determinants that take one entry from each row.
                for (row, r) in motion.mass.iter().zip(&motion.rhs) {
                    row_bounds(notes, &mut note, row.iter().chain(std::iter::once(r)));
                }
            }
            Target::Determinant(rows) => {
                (note.num, note.den, note.tall, note.deep) = (0.0, 0.0, 0.0, 0.0);
                rows.iter().for_each(|row| row_bounds(notes, &mut note, row.iter()));
            }
        }
        Ok(note)
    }

    /// The residue at a point.
    pub fn residue(
        &self,
        test: &mut ZeroTest,
        arena: &Arena,
        point: Point,
        budget: &mut Budget,
    ) -> Result<At<Element>, Stopped> {
        let f = test.fields.get(point.field);
        macro_rules! value {
            ($e:expr) => {
                match test.value_at(arena, $e, point, budget)? {
                    Some(v) => v,
                    None => return Ok(At::Pole),
                }
            };
        }
        Ok(At::Value(match self {
            Target::Sum(parts) => {
                let mut sum = Element::ZERO;
                for (e, c) in *parts {
                    let c = number(&f, c);
                    if !exists(c) {
                        return Ok(At::Pole);
                    }
                    sum = f.add2(sum, f.mul2(value!(*e), c));
                }
                sum
            }
            Target::Rate(c0, c, motion) => {
                let mut sum = value!(*c0);
                if c.iter().all(|e| *e == Arena::ZERO) {
                    return Ok(At::Value(sum));
                }
                let mut rows = Vec::with_capacity(motion.mass.len());
                for (row, r) in motion.mass.iter().zip(&motion.rhs) {
                    let mut out = Vec::with_capacity(row.len() + 1);
                    for e in row {
                        out.push(value!(*e));
                    }
                    out.push(value!(*r));
                    rows.push(out);
                }
                budget.charge(linear::work(rows.len()))?;
                let Some(a) = linear::solve(&f, rows) else { return Ok(At::Singular) };
                for (e, a) in c.iter().zip(a) {
                    sum = f.add2(sum, f.mul2(value!(*e), a));
                }
                sum
            }
            Target::Determinant(rows) => {
                let mut out = Vec::with_capacity(rows.len());
                for row in *rows {
                    let mut line = Vec::with_capacity(row.len());
                    for e in row {
                        line.push(value!(*e));
                    }
                    out.push(line);
                }
                budget.charge(linear::work(out.len()))?;
                linear::determinant(&f, out)
            }
        }))
    }

    /// The enclosure at a real point, given by its number and the roots that take their other value.
    pub fn enclosure(
        &self,
        test: &mut ZeroTest,
        arena: &Arena,
        point: (u32, u16),
        budget: &mut Budget,
    ) -> Result<Interval, Stopped> {
        let matrix = |test: &mut ZeroTest, rows: &[Vec<Expr>], extra: Option<&[Expr]>, budget: &mut Budget| {
            let mut out = Vec::with_capacity(rows.len());
            for (i, row) in rows.iter().enumerate() {
                let mut line = Vec::with_capacity(row.len() + 1);
                for e in row.iter().chain(extra.and_then(|x| x.get(i))) {
                    line.push(test.real_value(arena, *e, point, budget)?);
                }
                out.push(line);
            }
            budget.charge(linear::work(rows.len()))?;
            Ok::<_, Stopped>(out)
        };
        Ok(match self {
            Target::Sum(parts) => {
                let mut sum = Interval::exactly(0.0);
                for (e, c) in *parts {
                    sum = sum.plus(test.real_value(arena, *e, point, budget)?.times(Interval::of(c)));
                }
                sum
            }
            Target::Rate(c0, c, motion) => {
                let mut sum = test.real_value(arena, *c0, point, budget)?;
                if c.iter().all(|e| *e == Arena::ZERO) {
                    return Ok(sum);
                }
                let rows = matrix(test, &motion.mass, Some(&motion.rhs), budget)?;
                let Some(a) = linear::solve_enclosed(rows) else { return Ok(Interval::NONE) };
                for (e, a) in c.iter().zip(a) {
                    sum = sum.plus(test.real_value(arena, *e, point, budget)?.times(a));
                }
                sum
            }
            Target::Determinant(rows) => linear::determinant_enclosed(matrix(test, rows, None, budget)?),
        })
    }
}

/// Adds the bounds of a row after its common denominator is multiplied in.
fn row_bounds<'a>(notes: &Notes, note: &mut Note, row: impl Iterator<Item = &'a Expr>) {
    let (mut num, mut den, mut tall, mut deep, mut count) = (0f32, 0f32, 0f32, 0f32, 0f32);
    for e in row.filter(|e| **e != Arena::ZERO) {
        let n = notes.note(*e);
        num = num.max(n.num);
        den += n.den;
        tall = tall.max(n.tall);
        deep += n.deep;
        count += 1.0;
    }
    note.num += num + den;
    note.den += num + den;
    note.tall += tall + deep + count.max(1.0).log2();
    note.deep += tall + deep + count.max(1.0).log2();
}
