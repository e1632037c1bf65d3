//! Words and titles for integrals quadratic in the velocities, each only where the integral is that.

use super::naming::suffixed;
use crate::checked::Checked;
use crate::sheet::Maker;
use leastwise_algebra::Expr;
use leastwise_mechanics::context::Context;
use leastwise_mechanics::search::{Hidden, hidden};

/// A word for an integral, and its title.
pub(super) fn named(maker: &mut Maker<'_>, checked: &Checked, integral: Expr) -> Option<(String, String)> {
    let model = checked.model();
    let labels: Vec<String> = model.coordinates.iter().map(|q| q.label(maker.arena)).collect();
    if let Some(i) = alone(maker, checked, integral) {
        return Some((suffixed("energy", &labels[i..=i]), format!("energy of {} alone", labels[i])));
    }
    let mut cx = Context { arena: maker.arena, zero: maker.zero, budget: maker.budget, memory: maker.memory };
    let known = hidden(&mut cx, model, integral).ok()??;
    let (word, place) = match known {
        Hidden::LaplaceVector(i) => (suffixed("runge_lenz", &labels[i..=i]), format!("along {}", labels[i])),
        Hidden::FradkinTensor(i, j) => {
            let pair = [labels[i].clone(), labels[j].clone()];
            (suffixed("fradkin", &pair), pair.join(" "))
        }
    };
    Some((word, format!("{}, component {place}", known.name())))
}

/// The coordinate that alone occurs in an integral, of several.
fn alone(maker: &mut Maker<'_>, checked: &Checked, integral: Expr) -> Option<usize> {
    let coordinates = &checked.model().coordinates;
    if coordinates.iter().any(|q| q.members.is_some()) {
        return None;
    }
    let flat = maker.arena.expand(integral, maker.budget).ok()?;
    let atoms = maker.arena.atoms(flat);
    let mut occurs = |i: &usize| [0, 1].iter().any(|&k| atoms.contains(&coordinates[*i].jet(maker.arena, k)));
    let found: Vec<usize> = (0..coordinates.len()).filter(|i| occurs(i)).collect();
    match found[..] {
        [i] if coordinates.len() > 1 => Some(i),
        _ => None,
    }
}
