//! The proved constants of a model with the names under which its sheet lists them.

use crate::checked::Checked;
use crate::derive::Derived;
use crate::sheet::Maker;
use leastwise_algebra::{Arena, Expr, Role, Verdict};
use leastwise_mechanics::lagrange;
use leastwise_mechanics::symmetry;
use std::collections::HashSet;

/// Where a constant comes from.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Source {
    /// The energy function; whether it is kinetic + potential energy is told with the energy.
    Energy,
    /// The momentum of this coordinate.
    Momentum(String),
    /// The charge of this claim.
    Symmetry(String),
    /// This claimed constant.
    Conserved(String),
}

/// A proved constant.
pub(super) struct Charge {
    /// A name that no symbol of the model and no other constant has.
    pub name: String,
    pub source: Source,
    pub value: Expr,
}

/// All constants that are proved: the energy function, momenta, charges of claims, claimed constants.
pub(super) fn charges(maker: &mut Maker<'_>, checked: &Checked, derived: &Derived) -> Vec<Charge> {
    let model = checked.model();
    let Ok(answers) = &derived.answers else { return Vec::new() };
    let mut names = Names::new(checked);
    let mut out = Vec::new();
    let mut add = |source: Source, wanted: String, value: Expr| {
        out.push(Charge { name: names.fresh(&wanted), source, value });
    };
    if matches!(answers.energy_conserved, Ok(Verdict::Proved)) && answers.energy.function != Arena::ZERO {
        add(Source::Energy, "h".into(), answers.energy.function);
    }
    for (i, q) in model.coordinates.iter().enumerate() {
        if q.members.is_some() || !answers.cyclic[i].momentum.is_proved() {
            continue;
        }
        let label = q.label(maker.arena);
        let mut cx = maker.cx();
        // With reactions the momentum may change though nothing else acts on it.
        if !model.constraints.is_empty() && !lagrange::reaction(&mut cx, model, q).is_ok_and(|r| r.is_empty()) {
            continue;
        }
        let Ok(p) = symmetry::charge(&mut cx, model, &symmetry::shift(model, i)) else { continue };
        if p != Arena::ZERO {
            add(Source::Momentum(label.clone()), format!("p_{label}"), p);
        }
    }
    for (claim, answer) in checked.symmetries().iter().zip(&derived.symmetries) {
        if let Ok(a) = answer
            && !a.gauge_unknown
            && matches!(a.conserved, Ok(Verdict::Proved))
        {
            add(Source::Symmetry(claim.name.clone()), claim.name.clone(), a.charge);
        }
    }
    for (claim, answer) in checked.conserved().iter().zip(&derived.conserved) {
        if answer.as_ref().is_ok_and(|c| matches!(c.verdict, Ok(Verdict::Proved))) {
            add(Source::Conserved(claim.name.clone()), claim.name.clone(), claim.expr);
        }
    }
    out
}

/// A name as a symbol, to be printed among coefficients; `L[1]` is the member of a family.
pub(super) fn symbol(arena: &mut Arena, name: &str) -> Expr {
    let member = name.strip_suffix(']').and_then(|n| n.rsplit_once('[')).and_then(|(n, k)| Some((n, k.parse().ok()?)));
    let s = match member {
        Some((family, k)) => arena.symbol(family, Some(k), Role::Coordinate),
        None => arena.symbol(&name.replace(' ', "_"), None, Role::Coordinate),
    };
    arena.sym(s)
}

struct Names {
    taken: HashSet<String>,
}

impl Names {
    fn new(checked: &Checked) -> Names {
        Names { taken: checked.symbols.iter().map(|s| s.name.to_string()).collect() }
    }

    /// The wanted name, or one like it that is free.
    fn fresh(&mut self, wanted: &str) -> String {
        let family = |name: &str| name.split('[').next().unwrap_or_default().to_owned();
        let mut name = wanted.to_owned();
        if wanted == "h" && self.taken.contains("h") {
            name = "energy".into();
        }
        while self.taken.contains(&name) || self.taken.contains(&family(&name)) {
            name = format!("Q_{name}");
        }
        self.taken.insert(name.clone());
        name
    }
}
