//! Residues of rates along motions, for the search of quantities whose rates cancel.

use super::field::Element;
use super::linear::{self, Residues};
use super::points;
use super::target::Motion;
use super::test::{POLES, ZeroTest};
use super::verdict::Reason;
use crate::arena::{Arena, Expr};
use crate::budget::Budget;

/// A rate c₀ + Σ cᵢ aᵢ: what is free of accelerations, and the factors of these.
pub type Rate = (Expr, Vec<Expr>);

impl ZeroTest {
    /// The residues of rates c₀ + Σ cᵢ aᵢ along motions at `length` points of one field: the accelerations are solved for
    /// once at each point. What is found there is to be confirmed by a verdict. Errors: poles or a singular mass matrix
    /// at too many points, a spent budget.
    pub fn rate_residues(
        &mut self,
        arena: &mut Arena,
        rates: &[Rate],
        motion: &Motion,
        length: usize,
        budget: &mut Budget,
    ) -> Result<Residues, Reason> {
        let n = motion.rhs.len();
        if motion.mass.len() != n || motion.mass.iter().any(|r| r.len() != n) || rates.iter().any(|r| r.1.len() != n) {
            return Err(Reason::Degenerate);
        }
        let system = motion.mass.iter().flatten().chain(&motion.rhs);
        for e in rates.iter().flat_map(|(c0, c)| std::iter::once(c0).chain(c)).chain(system) {
            self.notes.analyse(arena, &self.facts, *e, budget)?;
        }
        let field = self.fields.get(0);
        let mut rows: Vec<Vec<Element>> = vec![Vec::new(); rates.len()];
        let (mut seen, mut k) = (0, 0);
        'points: while seen < length {
            let point = points::standard(2 * k);
            k += 1;
            if k as usize > length + POLES as usize {
                return Err(Reason::DenominatorsVanish);
            }
            macro_rules! value {
                ($e:expr) => {
                    match self.value_at(arena, $e, point, budget)? {
                        Some(v) => v,
                        None => continue 'points,
                    }
                };
            }
            let mut equations = Vec::with_capacity(n);
            for (row, b) in motion.mass.iter().zip(&motion.rhs) {
                let mut line = Vec::with_capacity(n + 1);
                for e in row {
                    line.push(value!(*e));
                }
                line.push(value!(*b));
                equations.push(line);
            }
            budget.charge(linear::work(n))?;
            let Some(a) = linear::solve(&field, equations) else { continue };
            let mut column = Vec::with_capacity(rates.len());
            for (c0, c) in rates {
                let mut sum = value!(*c0);
                for (e, a) in c.iter().zip(&a) {
                    if *e != Arena::ZERO {
                        sum = field.add2(sum, field.mul2(value!(*e), *a));
                    }
                }
                column.push(sum);
            }
            rows.iter_mut().zip(column).for_each(|(row, v)| row.push(v));
            seen += 1;
        }
        Ok(Residues::new(field, rows))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::{Assumptions, Rational, Role};

    #[test]
    fn a_falling_body_gains_velocity_at_the_rate_of_g() {
        // M a = b is m a = −m g; of v, g t and m v the rates are −g, g and −m g.
        let mut arena = Arena::new();
        let mut symbol = |name: &str| {
            let s = arena.symbol(name, None, Role::Parameter);
            arena.sym(s)
        };
        let (m, g) = (symbol("m"), symbol("g"));
        let weight = arena.mul(m, g);
        let motion = Motion { mass: vec![vec![m]], rhs: vec![arena.neg(weight)] };
        let rates = [(Arena::ZERO, vec![Arena::ONE]), (g, vec![Arena::ZERO]), (Arena::ZERO, vec![m])];
        let mut budget = Budget::new(1 << 20);
        let mut test = ZeroTest::new(Assumptions::new());
        let r = test.rate_residues(&mut arena, &rates, &motion, 5, &mut budget).unwrap();
        assert!(r.sum_vanishes(&[0, 1]) && !r.vanishes(2));
        assert_eq!(r.ratio(&[0], &[1]), Some(Rational::MINUS_ONE));
        // The ratio of the third to the second is −m, no number.
        assert_eq!(r.ratio(&[2], &[1]), None);
    }
}
