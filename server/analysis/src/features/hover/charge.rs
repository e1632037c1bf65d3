//! What charges are called in the trade, each only where it is that.

use super::writer::Writer;
use crate::derive::total;
use leastwise_algebra::{Arena, Expr, Node, Rational, Role};
use leastwise_mechanics::context::Parts;
use leastwise_mechanics::energy::is_total_energy;
use leastwise_mechanics::lagrange::{self, signed_parts};
use leastwise_mechanics::symmetry::Generator;
use leastwise_mechanics::verdicts::SymmetryAnswer;

/// The charge as it is presented.
pub(super) struct Charge {
    /// `p_φ`, `h`, `Q`.
    pub symbol: String,
    /// `canonical momentum`, `energy`, …
    pub name: &'static str,
    pub value: Expr,
    /// The charge is this times what is presented: −1 for an energy function.
    pub sign: i64,
}

/// What a symmetry's charge is called.
pub(super) fn charge(w: &mut Writer<'_, '_>, a: &SymmetryAnswer) -> Charge {
    let model = &w.checked.model;
    let g = &a.symmetry.generator;
    let moved: Vec<usize> = (0..g.eta.len()).filter(|&i| g.eta[i] != Arena::ZERO).collect();
    if a.gauge.is_none() && g.tau == Arena::ONE && moved.is_empty() {
        let value = w.maker.arena.neg(a.charge);
        return Charge { symbol: "h".into(), name: energy_name(w, value), value, sign: -1 };
    }
    let plain = Charge { symbol: "Q".to_owned(), name: "charge", value: a.charge, sign: 1 };
    if a.gauge.is_some() || a.gauge_unknown || g.tau != Arena::ZERO || moved.is_empty() {
        return plain;
    }
    if let [i] = moved[..]
        && g.eta[i] == Arena::ONE
        && model.coordinates[i].members.is_none()
    {
        let symbol = format!("p_{}", model.coordinates[i].label(w.maker.arena));
        return Charge { symbol, name: "canonical momentum", ..plain };
    }
    let shift = moved.iter().all(|&i| g.eta[i] == Arena::ONE);
    let turn = !shift && is_rotation(w, g, &moved);
    if !shift && !turn {
        return plain;
    }
    let mechanical = is_mechanical(w, g, &moved, shift);
    let name = match (shift, mechanical) {
        (true, true) => "total momentum",
        (true, false) => "total canonical momentum",
        (false, true) => "angular momentum",
        (false, false) => "canonical angular momentum",
    };
    Charge { name, ..plain }
}

/// `energy` where h is kinetic + potential, else `energy function`.
pub(super) fn energy_name(w: &mut Writer<'_, '_>, h: Expr) -> &'static str {
    let model = &w.checked.model;
    if is_total_energy(&mut w.cx(), model, h).is_proved() { "energy" } else { "energy function" }
}

/// Whether the moved coordinates are lengths and are turned pair by pair, (x, y) by (−y, x).
fn is_rotation(w: &mut Writer<'_, '_>, g: &Generator, moved: &[usize]) -> bool {
    let coordinates = &w.checked.coordinates;
    moved.iter().all(|&i| coordinates[i].quantity.as_deref().is_some_and(|q| q.trim() == "length"))
        && moved.iter().all(|&i| partner(w, g, moved, i).is_some())
}

/// The coordinate with which one is turned.
fn partner(w: &mut Writer<'_, '_>, g: &Generator, moved: &[usize], i: usize) -> Option<usize> {
    let coordinates = &w.checked.model.coordinates;
    let x = coordinates[i].jet(w.maker.arena, 0);
    let minus_x = w.maker.arena.neg(x);
    moved.iter().copied().find(|&j| {
        let y = coordinates[j].jet(w.maker.arena, 0);
        let minus_y = w.maker.arena.neg(y);
        coordinates[j].members.is_none() && [(minus_y, x), (y, minus_x)].contains(&(g.eta[i], g.eta[j]))
    })
}

/// Whether each momentum is mass times velocity: with one mass for both coordinates of a rotation; for a shift, of lengths
/// along one axis, which is known of the members of one family only.
fn is_mechanical(w: &mut Writer<'_, '_>, g: &Generator, moved: &[usize], shift: bool) -> bool {
    let checked = w.checked;
    let infos: Vec<_> =
        moved.iter().map(|&i| w.maker.arena.info(checked.model.coordinates[i].symbol).clone()).collect();
    let family = infos.iter().all(|s| s.name == infos[0].name && s.member.is_some());
    let lengths =
        moved.iter().all(|&i| checked.coordinates[i].quantity.as_deref().is_some_and(|q| q.trim() == "length"));
    if !lengths || shift && !family {
        return false;
    }
    moved.iter().all(|&i| {
        let Some(mass) = mass_of(w, i) else { return false };
        shift || partner(w, g, moved, i).is_some_and(|j| mass_of(w, j) == Some(mass))
    })
}

/// m where p = m q̇ and m is made from constants.
fn mass_of(w: &mut Writer<'_, '_>, i: usize) -> Option<Expr> {
    let model = &w.checked.model;
    let q = &model.coordinates[i];
    if q.members.is_some() {
        return None;
    }
    let all: Parts = signed_parts(model).concat();
    let parts = lagrange::momentum(&mut w.cx(), &all, q).ok()?;
    let parts: Parts = parts.iter().flat_map(|(f, c)| f.iter().map(|f| (f.expr, c.clone()))).collect();
    let p = total(w.maker.arena, &parts);
    let velocity = q.jet(w.maker.arena, 1);
    let maker = &mut *w.maker;
    let mass = maker.arena.partial(p, velocity, maker.budget).ok()?;
    let constant = maker.arena.atoms(mass).into_iter().all(|a| match maker.arena.node(a) {
        Node::Symbol(s) => maker.arena.info(*s).role == Role::Parameter,
        _ => false,
    });
    let rest = [(p, Rational::ONE), (maker.arena.mul(mass, velocity), Rational::MINUS_ONE)];
    (constant && w.cx().vanishes(&rest).is_proved()).then_some(mass)
}
