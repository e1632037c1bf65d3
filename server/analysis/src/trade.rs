//! What transformations do, and what breaks them, in the words of the trade: each word only where it is proved to fit.

use crate::checked::Checked;
use crate::sheet::Maker;
use crate::verdicts::one_line;
use leastwise_algebra::{Arena, Expr};
use leastwise_mechanics::symmetry::Generator;

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
    /// Lengths turned pair by pair, (x, y) by (−y, x): the name of the axis, where it has its usual one.
    Turn(Option<char>),
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
        axes.push(axis(&name(arena, checked, i), &name(arena, checked, j)));
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

/// The name of a coordinate without its number.
fn name(arena: &Arena, checked: &Checked, i: usize) -> String {
    let label = checked.model().coordinates[i].label(arena);
    label.chars().take_while(|c| *c != '[' && !('₀'..='₉').contains(c)).collect()
}

/// The third axis of space.
fn axis(a: &str, b: &str) -> Option<char> {
    ["x", "y", "z"].iter().find(|c| {
        let others: Vec<&&str> = ["x", "y", "z"].iter().filter(|o| o != c).collect();
        others.contains(&&a) && others.contains(&&b) && a != b
    })?;
    ['x', 'y', 'z'].into_iter().find(|c| a != c.to_string() && b != c.to_string())
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
    let share = shown(maker, variation);
    match flow {
        Flow::Along(i) => format!("force {share} along {}", label(maker, i)),
        Flow::Together(of) => {
            let names: Vec<String> = of.iter().map(|&i| label(maker, i)).collect();
            format!("force {share} along {}", names.join(" + "))
        }
        Flow::About(i) => format!("torque {share} about the axis of {}", label(maker, i)),
        Flow::Turn(Some(axis)) => format!("torque {share} about the {axis} axis"),
        Flow::Turn(None) => format!("torque {share} about the origin"),
        Flow::Coordinate(i) => format!("generalised force {share} along {}", label(maker, i)),
        Flow::Delay | Flow::Other => format!("L changes at the rate {share}"),
    }
}
