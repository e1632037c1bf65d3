//! Sparse elimination of unknown dimensions, with and without memory of which demands a row is made of.

use super::Demand;
use super::form::{Form, Unknown, combine};
use crate::{Dimension, Exponent};

/// Rows in echelon form: each determines its last unknown by earlier ones.
pub(super) struct Rows {
    rows: Vec<Option<Form>>,
}

/// The last unknown of a form, with its exponent.
fn lead(form: &Form) -> Option<(Unknown, Exponent)> {
    form.unknowns().last().copied()
}

impl Rows {
    pub(super) fn new(unknowns: usize) -> Rows {
        Rows { rows: vec![None; unknowns] }
    }

    /// Takes a form that has to be a number in. What is left of it, where nothing is unknown; `None` where it now
    /// determines an unknown, or its exponents are beyond all measure.
    pub(super) fn take(&mut self, gap: &Form) -> Option<Dimension> {
        let mut form = gap.clone();
        while let Some((u, a)) = lead(&form) {
            match &self.rows[u] {
                Some(row) => form = form.times_power(row, a.negative())?,
                None => {
                    self.rows[u] = Some(form.power(Exponent::ONE.over(a)?)?);
                    return None;
                }
            }
        }
        Some(form.factor())
    }

    /// Each unknown in the free ones.
    pub(super) fn values(&self) -> Vec<Form> {
        let mut values: Vec<Form> = Vec::with_capacity(self.rows.len());
        for (u, row) in self.rows.iter().enumerate() {
            let value = row.as_ref().and_then(|row| Rows::value(u, row, &values));
            values.push(value.unwrap_or_else(|| Form::unknown(u)));
        }
        values
    }

    /// u · rest = 1, with the values of the earlier unknowns.
    fn value(u: Unknown, row: &Form, values: &[Form]) -> Option<Form> {
        let mut value = Form::unknown(u).over(row)?;
        for (earlier, a) in value.unknowns().to_vec() {
            value = value.times_power(&Form::unknown(earlier), a.negative())?.times_power(&values[earlier], a)?;
        }
        Some(value)
    }
}

/// Σ λ_c g_c = ε: a combination of demands in which nothing is unknown.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Relation {
    /// The demands with their coefficients, ascending.
    pub(super) demands: Vec<(usize, Exponent)>,
    /// What the combination is; a number where it is consistent.
    pub(super) rest: Dimension,
}

/// A row with the demands that it is a combination of.
type Made = (Form, Vec<(usize, Exponent)>);

/// All relations between demands, in their order.
pub(super) fn relations(unknowns: usize, demands: &[Demand]) -> Vec<Relation> {
    let mut rows: Vec<Option<Made>> = vec![None; unknowns];
    // Exponents beyond all measure say nothing.
    demands.iter().enumerate().filter_map(|(k, demand)| relation(&mut rows, k, demand)).collect()
}

/// The relation that a demand is in, where it does not determine an unknown.
fn relation(rows: &mut [Option<Made>], k: usize, demand: &Demand) -> Option<Relation> {
    let mut form = demand.gap.clone();
    let mut of = vec![(k, Exponent::ONE)];
    while let Some((u, a)) = lead(&form) {
        match &rows[u] {
            Some((row, made)) => {
                form = form.times_power(row, a.negative())?;
                of = combine(&of, made, a.negative())?;
            }
            None => {
                let scale = Exponent::ONE.over(a)?;
                rows[u] = Some((form.power(scale)?, combine(&[], &of, scale)?));
                return None;
            }
        }
    }
    Some(Relation { demands: of, rest: form.factor() })
}
