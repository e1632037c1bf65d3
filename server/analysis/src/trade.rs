//! What transformations do, and what breaks them, in the words of the trade: each word only where it is proved to fit.

use crate::checked::Checked;
use crate::derive::total;
use crate::sheet::Maker;
use crate::verdicts::one_line;
use leastwise_algebra::{Arena, Expr};
use leastwise_mechanics::context::Parts;
use leastwise_mechanics::gauge::{Winding, multivalued};
use leastwise_mechanics::symmetry::Generator;
use leastwise_mechanics::verdicts::SymmetryAnswer;

/// What a flow does.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) enum Flow {
    /// t → t + ε.
    Delay,
    /// A shift of one length.
    Along(usize),
    /// The same shift of several lengths.
    Together(Vec<usize>),
    /// A shift of one angle.
    About(usize),
    /// Lengths turned pair by pair, (x, y) by (−y, x): the name of the axis, where it has its usual one, and whether the
    /// turn is left-handed about it.
    Turn(Option<(char, bool)>),
    /// A shift of one coordinate of another quantity.
    Coordinate(usize),
    /// Anything else.
    Other,
}

/// What a generator does.
pub(crate) fn flow(arena: &mut Arena, checked: &Checked, g: &Generator) -> Flow {
    let moved: Vec<usize> = (0..g.eta.len()).filter(|&i| g.eta[i] != Arena::ZERO).collect();
    if g.tau == Arena::ONE && moved.is_empty() {
        return Flow::Delay;
    }
    if g.tau != Arena::ZERO || moved.is_empty() {
        return Flow::Other;
    }
    let quantity = |i: usize| checked.coordinates[i].quantity.as_deref().map(str::trim).unwrap_or_default();
    let lengths = moved.iter().all(|&i| quantity(i) == "length");
    let family = |i: usize| checked.model().coordinates[i].members.is_some();
    if moved.iter().all(|&i| g.eta[i] == Arena::ONE) {
        return match moved[..] {
            [i] if family(i) => Flow::Other,
            [i] if lengths => Flow::Along(i),
            [i] if matches!(quantity(i), "angle" | "twist") => Flow::About(i),
            [i] => Flow::Coordinate(i),
            _ if lengths => Flow::Together(moved),
            _ => Flow::Other,
        };
    }
    if !lengths || moved.iter().any(|&i| family(i)) {
        return Flow::Other;
    }
    let mut axes = Vec::new();
    for &i in &moved {
        let Some(j) = partner(arena, checked, g, &moved, i) else { return Flow::Other };
        // ηⁱ = −qʲ turns from i to j.
        let from_i = {
            let minus_y = checked.model().coordinates[j].jet(arena, 0);
            arena.neg(minus_y) == g.eta[i]
        };
        let (a, b) = if from_i { (i, j) } else { (j, i) };
        axes.push(axis(&name(arena, checked, a), &name(arena, checked, b)));
    }
    let first = axes[0];
    Flow::Turn(if axes.iter().all(|a| *a == first) { first } else { None })
}

/// The coordinate with which one is turned.
fn partner(arena: &mut Arena, checked: &Checked, g: &Generator, moved: &[usize], i: usize) -> Option<usize> {
    let coordinates = &checked.model().coordinates;
    let x = coordinates[i].jet(arena, 0);
    let minus_x = arena.neg(x);
    moved.iter().copied().find(|&j| {
        let y = coordinates[j].jet(arena, 0);
        let minus_y = arena.neg(y);
        [(minus_y, x), (y, minus_x)].contains(&(g.eta[i], g.eta[j]))
    })
}

/// The name of a coordinate and its number.
fn name(arena: &Arena, checked: &Checked, i: usize) -> (String, String) {
    let label = checked.model().coordinates[i].label(arena);
    let letters = label.find(|c: char| c == '[' || ('₀'..='₉').contains(&c)).unwrap_or(label.len());
    (label[..letters].to_string(), label[letters..].to_string())
}

/// The third axis of space for a turn from one axis to another, and whether it is left-handed; the numbers of both
/// coordinates must be the same, else they belong to two bodies.
fn axis(from: &(String, String), to: &(String, String)) -> Option<(char, bool)> {
    const AXES: [char; 3] = ['x', 'y', 'z'];
    let place = |name: &str| AXES.iter().position(|c| c.to_string() == name);
    let (a, b) = (place(&from.0)?, place(&to.0)?);
    (a != b && from.1 == to.1).then(|| (AXES[3 - a - b], (a + 1) % 3 != b))
}

/// The variation of the parts to blame for a broken symmetry.
pub(crate) fn blamed_share(maker: &mut Maker<'_>, a: &SymmetryAnswer) -> Expr {
    let mut parts = Parts::new();
    for c in &a.culprits {
        let of = &a.symmetry.variations[c.term];
        match c.parts.is_empty() {
            true => parts.extend(of.iter().cloned()),
            false => parts.extend(c.parts.iter().filter_map(|&p| of.get(p).cloned())),
        }
    }
    total(maker.arena, &parts)
}

/// What a variation of L is: `torque -k a sin φ about the axis of φ`.
pub(crate) fn effect(maker: &mut Maker<'_>, checked: &Checked, g: &Generator, variation: Expr) -> String {
    let flow = flow(maker.arena, checked, g);
    let label = |maker: &Maker<'_>, i: usize| checked.model().coordinates[i].label(maker.arena);
    let shown = |maker: &mut Maker<'_>, e: Expr| one_line(&maker.prints.text(maker.arena, e));
    if flow == Flow::Delay {
        // What L loses by depending on the time, the energy function gains.
        let power = maker.arena.neg(variation);
        return format!("power {}", shown(maker, power));
    }
    // The torque about an axis is told in the right-handed sense.
    let left_handed = matches!(flow, Flow::Turn(Some((_, true))));
    let variation = if left_handed { maker.arena.neg(variation) } else { variation };
    let share = shown(maker, variation);
    match flow {
        Flow::Along(i) => format!("force {share} along {}", label(maker, i)),
        Flow::Together(of) => {
            let names: Vec<String> = of.iter().map(|&i| label(maker, i)).collect();
            format!("force {share} along {}", names.join(" + "))
        }
        Flow::About(i) => format!("torque {share} about the axis of {}", label(maker, i)),
        Flow::Turn(Some((axis, _))) => format!("torque {share} about the {axis} axis"),
        Flow::Turn(None) => format!("torque {share} about the origin"),
        Flow::Coordinate(i) => format!("generalised force {share} along {}", label(maker, i)),
        Flow::Delay | Flow::Other => format!("L changes at the rate {share}"),
    }
}

/// Where a gauge term is not single-valued: `when φ turns by 2π`, `on a way around the axis x = 0, y = 0`.
pub(crate) fn windings(maker: &mut Maker<'_>, checked: &Checked, gauge: Expr) -> Vec<String> {
    let model = checked.model();
    let angles: Vec<usize> = checked.angles().collect();
    let Ok(list) = multivalued(&mut maker.cx(), model, gauge, &angles) else { return Vec::new() };
    let mut out = Vec::new();
    for winding in list {
        out.push(match winding {
            Winding::Turn(i) => format!("when {} turns by 2π", model.coordinates[i].label(maker.arena)),
            Winding::Axis(y, x) => {
                let (x, y) = (maker.prints.text(maker.arena, x), maker.prints.text(maker.arena, y));
                format!("on a way around the axis {} = 0, {} = 0", one_line(&x), one_line(&y))
            }
        });
    }
    out
}
