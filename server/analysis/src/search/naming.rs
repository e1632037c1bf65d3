//! Names for what was found: by what it does to the coordinates, and none that the model has.

use crate::checked::Checked;
use crate::derive::Derived;
use crate::features::hover::charge_name;
use crate::scope::SymbolKind;
use crate::sheet::Maker;
use leastwise_algebra::{Arena, Expr, Node, Rational, Role, Verdict};
use leastwise_grammar::fold_name;
use leastwise_mechanics::context::Context;
use leastwise_mechanics::model::time;
use leastwise_mechanics::search::{Item, Origin};
use leastwise_mechanics::symmetry::{Generator, Status, Symmetry};
use leastwise_mechanics::verdicts::SymmetryAnswer;
use std::collections::HashSet;

/// A transformation that has no word of its own.
const FAMILY: &str = "family";
/// An integral that no transformation of coordinates and time gives.
const INTEGRAL: &str = "integral";

/// The names that are taken.
pub(super) struct Names(HashSet<String>);

impl Names {
    pub(super) fn new(checked: &Checked) -> Names {
        let model = checked.model();
        let symbols = checked.symbols.iter().map(|s| s.name.to_string());
        let terms = model.terms.iter().map(|t| t.name.clone());
        let forces = model.forces.iter().map(|f| f.name.clone());
        let constraints = model.constraints.iter().map(|c| c.name.split('[').next().unwrap_or_default().to_string());
        let symmetries = checked.symmetries.iter().map(|c| c.name.clone());
        let conserved = checked.conserved.iter().map(|c| c.name.clone());
        let runs = checked.runs.iter().map(|r| r.name.clone());
        let system = checked.system.iter().map(|s| s.name.clone());
        let all = symbols.chain(terms).chain(forces).chain(constraints).chain(symmetries).chain(conserved);
        Names(all.chain(runs).chain(system).map(|n| fold_name(&n)).collect())
    }

    /// The word, with a number where it is taken; what has no word of its own is always numbered.
    pub(super) fn fresh(&mut self, word: &str) -> String {
        let (mut name, mut number) = (word.to_string(), 1);
        if [FAMILY, INTEGRAL].contains(&word) {
            name = format!("{word}_1");
        }
        while !self.0.insert(fold_name(&name)) {
            number += 1;
            name = format!("{word}_{number}");
        }
        name
    }
}

/// A word for an item, and what its charge is called in the trade.
pub(super) fn named(
    maker: &mut Maker<'_>,
    checked: &Checked,
    derived: &Derived,
    item: &Item,
) -> (String, Option<String>) {
    let Origin::Symmetry { generator, gauge } = &item.origin else {
        return match super::hidden::named(maker, checked, item.charge) {
            Some((word, title)) => (word, Some(title)),
            None => (INTEGRAL.to_string(), None),
        };
    };
    let word = word(maker, checked, generator);
    let answer = SymmetryAnswer {
        symmetry: Symmetry { generator: generator.clone(), variations: Vec::new(), status: Status::Exact },
        charge: item.charge,
        gauge: *gauge,
        gauge_unknown: false,
        rate: Vec::new(),
        conserved: Ok(Verdict::Proved),
        culprits: Vec::new(),
        smallest: true,
        taken: Vec::new(),
        respects_constraints: None,
    };
    let model = checked.model();
    let moved: Vec<String> = model
        .coordinates
        .iter()
        .zip(&generator.eta)
        .filter(|(_, eta)| **eta != Arena::ZERO)
        .map(|(q, _)| q.label(maker.arena))
        .collect();
    let title = match charge_name(maker, checked, derived, &answer) {
        "charge" => return (word, None),
        "canonical momentum" => format!("canonical momentum p_{}", moved.join(", ")),
        "angular momentum" => about(checked, &moved),
        other => other.to_string(),
    };
    (word, Some(title))
}

/// `angular momentum about z` where the axes have their usual names.
fn about(checked: &Checked, moved: &[String]) -> String {
    let axis = match moved {
        [a, b] => match (a.as_str(), b.as_str()) {
            ("x", "y") => Some("z"),
            ("y", "z") => Some("x"),
            ("x", "z") => Some("y"),
            _ => None,
        },
        _ => None,
    };
    match axis {
        // In the plane the third axis has no coordinate; in space it has one.
        Some(axis) if axis == "z" || checked.symbol(axis).is_some_and(|s| s.kind == SymbolKind::Coordinate) => {
            format!("angular momentum about {axis}")
        }
        _ => "angular momentum".to_string(),
    }
}

/// What the generator does, in one word with the coordinates that it moves.
fn word(maker: &mut Maker<'_>, checked: &Checked, g: &Generator) -> String {
    let model = checked.model();
    let t = time(maker.arena);
    let t = maker.arena.sym(t);
    let moved: Vec<usize> = (0..g.eta.len()).filter(|&i| g.eta[i] != Arena::ZERO).collect();
    let still = g.tau == Arena::ZERO;
    let of = |maker: &Maker<'_>, kind: &str| match moved[..] {
        [i] => suffixed(kind, &[model.coordinates[i].label(maker.arena)]),
        [i, j] if kind == "rotation" => {
            suffixed(kind, &[model.coordinates[i].label(maker.arena), model.coordinates[j].label(maker.arena)])
        }
        _ => kind.to_string(),
    };
    if moved.is_empty() && is_constant(maker, g.tau) {
        return "delay".to_string();
    }
    if still && moved.iter().all(|&i| is_constant(maker, g.eta[i])) {
        let turn = matches!(moved[..], [i] if checked.coordinates[i].angle);
        return of(maker, if turn { "turn" } else { "translation" });
    }
    if still && moved.iter().all(|&i| is_multiple(maker, g.eta[i], t)) {
        return of(maker, "boost");
    }
    let own = |maker: &mut Maker<'_>, i: usize| {
        let q = model.coordinates[i].jet(maker.arena, 0);
        is_multiple(maker, g.eta[i], q)
    };
    if moved.iter().all(|&i| own(maker, i)) && (still || is_multiple(maker, g.tau, t)) {
        return "dilation".to_string();
    }
    let square = maker.arena.pow(t, 2);
    if !still && is_multiple(maker, g.tau, square) {
        return "expansion".to_string();
    }
    if still && moved.len() == 2 {
        let (x, y) = (model.coordinates[moved[0]].jet(maker.arena, 0), model.coordinates[moved[1]].jet(maker.arena, 0));
        if is_multiple(maker, g.eta[moved[0]], y) && is_multiple(maker, g.eta[moved[1]], x) {
            return of(maker, "rotation");
        }
    }
    FAMILY.to_string()
}

/// `translation_x`, `rotation_xy`, `boost_x_3`.
pub(super) fn suffixed(kind: &str, labels: &[String]) -> String {
    let clean = |label: &String| label.replace(['[', ']', ','], "_").trim_matches('_').to_string();
    let labels: Vec<String> = labels.iter().map(clean).collect();
    let short = labels.iter().all(|l| l.chars().count() == 1);
    format!("{kind}_{}", labels.join(if short { "" } else { "_" }))
}

/// Whether an expression is made from parameters and numbers.
fn is_constant(maker: &Maker<'_>, e: Expr) -> bool {
    maker.arena.atoms(e).into_iter().all(|a| match maker.arena.node(a) {
        Node::Symbol(s) => maker.arena.info(*s).role == Role::Parameter,
        Node::Jet(..) | Node::Member { .. } => false,
        _ => true,
    })
}

/// Whether e is a constant times x.
fn is_multiple(maker: &mut Maker<'_>, e: Expr, x: Expr) -> bool {
    let factor = maker.arena.div(e, x);
    e != Arena::ZERO && is_constant(maker, factor) && {
        let back = maker.arena.mul(factor, x);
        let mut cx = Context { arena: maker.arena, zero: maker.zero, budget: maker.budget, memory: maker.memory };
        cx.vanishes(&[(e, Rational::ONE), (back, Rational::MINUS_ONE)]).is_proved()
    }
}
