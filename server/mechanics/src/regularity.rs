//! Whether the mass matrix is regular, and whether it is positive definite as far as signs can tell.

use crate::context::Context;
use crate::forms::at_member;
use crate::mass::{MassRows, blocks, dense, sparse_mass_matrix, without_inertia};
use crate::model::Model;
use leastwise_algebra::{Arena, Rational, Reason, Sign, Stopped, Verdict};
use std::collections::BTreeMap;

/// What is said of the mass matrix.
#[derive(Clone, PartialEq, Debug)]
pub enum MassVerdict {
    /// Regular, as far as is asked.
    Regular,
    /// det M ≡ 0; the coordinates without any kinetic term.
    Singular(Vec<usize>),
    /// A principal minor is nowhere positive: the coordinates of the minor.
    NotPositive(Vec<usize>),
    /// Not decided.
    Undecided(String),
    /// Not asked: large families that couple to each other's accelerations.
    NotAsked,
}

impl MassVerdict {
    /// Whether every state is passed by a motion: det M is not zero.
    pub fn is_regular(&self) -> bool {
        matches!(self, MassVerdict::Regular | MassVerdict::NotPositive(_))
    }
}

/// The mass matrix of large families: regular where it is diagonal without a zero.
pub(crate) fn judge_families(cx: &mut Context<'_>, model: &Model) -> Result<MassVerdict, Stopped> {
    for row in sparse_mass_matrix(cx, model)? {
        let q = &model.coordinates[row.coordinate];
        let mut own = q.jet(cx.arena, 1);
        if let (Some((a, b)), Some(m)) = (row.range, q.members)
            && a == b
        {
            own = at_member(cx.arena, own, m.index, a, cx.budget)?;
        }
        match row.entries[..] {
            [(velocity, entry)] if velocity == own && !row.dense => {
                if !cx.vanishes(&[(entry, Rational::ONE)]).is_refuted() {
                    return Ok(MassVerdict::NotAsked);
                }
            }
            _ => return Ok(MassVerdict::NotAsked),
        }
    }
    Ok(MassVerdict::Regular)
}

/// The verdict on the mass matrix, remembered as long as it does not change.
pub(crate) fn mass_verdict(cx: &mut Context<'_>, rows: &MassRows) -> Result<MassVerdict, Stopped> {
    let facts = cx.zero.assumptions().fingerprint();
    if let Some((f, known, verdict)) = &cx.memory.mass
        && *f == facts
        && known == rows
    {
        return Ok(verdict.clone());
    }
    let verdict = judge_mass(cx, rows)?;
    // What was not decided may be another time: the budget may have been spent, or the derivation cancelled.
    if !matches!(verdict, MassVerdict::Undecided(_)) {
        cx.memory.mass = Some((facts, rows.clone(), verdict.clone()));
    }
    Ok(verdict)
}

/// More coordinates than this in one block are not eliminated.
const MAX_BLOCK: usize = 128;

fn judge_mass(cx: &mut Context<'_>, rows: &MassRows) -> Result<MassVerdict, Stopped> {
    let idle = without_inertia(rows);
    if !idle.is_empty() {
        return Ok(MassVerdict::Singular(idle));
    }
    let block = blocks(rows);
    let mut members: BTreeMap<usize, Vec<usize>> = BTreeMap::new();
    for (i, &b) in block.iter().enumerate() {
        members.entry(b).or_default().push(i);
    }
    let mut undecided = None;
    let mut matrices = Vec::new();
    for of in members.values() {
        if of.len() > MAX_BLOCK {
            undecided = Some(Reason::TooLarge.to_string());
            continue;
        }
        let matrix = dense(cx, rows, of)?;
        match cx.zero.determinant_is_zero(cx.arena, &matrix, cx.budget) {
            Verdict::Proved => return Ok(MassVerdict::Singular(Vec::new())),
            Verdict::Undecided(r) => undecided = Some(r.to_string()),
            Verdict::Refuted(_) => {}
        }
        matrices.push((of, matrix));
    }
    if let Some(reason) = undecided {
        return Ok(MassVerdict::Undecided(reason));
    }
    // A positive definite matrix has positive principal minors; one that is never positive refutes it.
    for (of, matrix) in matrices {
        for i in 0..of.len() {
            let sign = cx.zero.sign_of(cx.arena, matrix[i][i], cx.budget);
            if matches!(sign, Sign::Negative | Sign::NonPositive | Sign::Zero) {
                return Ok(MassVerdict::NotPositive(vec![of[i]]));
            }
        }
        for i in 0..of.len().min(24) {
            for j in 0..i {
                if matrix[i][j] == Arena::ZERO {
                    continue;
                }
                let (a, b) = (cx.arena.mul(matrix[i][i], matrix[j][j]), cx.arena.pow(matrix[i][j], 2));
                let minor = cx.arena.sub(a, b);
                if matches!(cx.zero.sign_of(cx.arena, minor, cx.budget), Sign::Negative | Sign::NonPositive) {
                    return Ok(MassVerdict::NotPositive(vec![of[j], of[i]]));
                }
            }
        }
    }
    Ok(MassVerdict::Regular)
}
