//! Discrete symmetries in words: `time reversal`, `x → −x`, `θ → θ + π`.

use super::asked;
use crate::checked::Checked;
use crate::report::Formula;
use crate::sheet::Maker;
use leastwise_algebra::{Stopped, Verdict};
use leastwise_mechanics::discrete::{self as mechanics, Discrete, DiscreteAnswer};

/// What is done.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Map {
    /// t → −t.
    TimeReversal,
    /// This coordinate changes sign.
    Reflection(String),
    /// All coordinates change sign.
    Inversion,
    /// This angle is turned by π.
    HalfTurn(String),
    /// t → −t, and this coordinate changes sign.
    ReversalWithReflection(String),
}

impl Map {
    /// In words.
    pub fn words(&self) -> String {
        match self {
            Map::TimeReversal => "time reversal".into(),
            Map::Reflection(q) => format!("{q} → −{q}"),
            Map::Inversion => "all coordinates reversed".into(),
            Map::HalfTurn(q) => format!("{q} → {q} + π"),
            Map::ReversalWithReflection(q) => format!("time reversal with {q} → −{q}"),
        }
    }
}

/// Whether it takes motions to motions.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Holds {
    /// L is the same.
    Exactly,
    /// L changes by the total time derivative of this, where a closed form was found.
    UpToDerivative(Option<Formula>),
    /// These terms break it.
    Broken(Vec<String>),
    /// L keeps it, and these forces break it.
    BrokenByForces(Vec<String>),
    /// Not decided.
    Undecided(String),
}

/// One answer.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct DiscreteRow {
    /// What is done.
    pub map: Map,
    /// Whether it takes motions to motions.
    pub holds: Holds,
}

/// All answers.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct DiscreteReport {
    /// Reversal of time first, then the coordinates in order.
    pub rows: Vec<DiscreteRow>,
    /// Why there are none.
    pub stopped: Option<String>,
}

impl DiscreteRow {
    /// `yes`, `broken by weight`.
    pub fn words(&self) -> String {
        let named = |list: &[String]| match list {
            [] => "the terms together".to_owned(),
            [one] => one.clone(),
            [rest @ .., last] => format!("{} and {last}", rest.join(", ")),
        };
        match &self.holds {
            Holds::Exactly => "yes".into(),
            Holds::UpToDerivative(Some(f)) if !f.text.contains('\n') => format!("yes, L changes by d/dt({})", f.text),
            Holds::UpToDerivative(_) => "yes, L changes by a total time derivative".into(),
            Holds::Broken(terms) => format!("broken by {}", named(terms)),
            Holds::BrokenByForces(forces) => format!("holds for L, broken by {}", named(forces)),
            Holds::Undecided(why) => format!("undecided: {why}"),
        }
    }
}

/// All discrete symmetries. A reflection of what is assumed to have a sign is none.
pub(crate) fn discrete(maker: &mut Maker<'_>, checked: &Checked) -> DiscreteReport {
    let model = checked.model();
    if model.coordinates.is_empty() || model.terms.is_empty() {
        return DiscreteReport::default();
    }
    let angles: Vec<usize> = checked.angles().collect();
    let answers = match asked(maker, |cx| mechanics::discrete(cx, model, &angles)) {
        Ok(answers) => answers,
        Err(stopped) => return DiscreteReport { rows: Vec::new(), stopped: Some(stopped.to_string()) },
    };
    let signed: Vec<bool> = (0..model.coordinates.len()).map(|i| has_sign(maker, checked, i)).collect();
    let rows = answers.iter().filter(|a| match a.kind {
        Discrete::Reflection(i) | Discrete::ReversalWithReflection(i) => !signed[i],
        Discrete::Inversion => !signed.contains(&true),
        Discrete::TimeReversal | Discrete::HalfTurn(_) => true,
    });
    DiscreteReport { rows: rows.map(|a| row(maker, checked, a)).collect(), stopped: None }
}

/// Whether time can be reversed.
pub(crate) fn reversal(maker: &mut Maker<'_>, checked: &Checked) -> Option<DiscreteRow> {
    one(maker, checked, Discrete::TimeReversal).ok()
}

/// Whether L, forces and constraints are even in a coordinate, not only up to a derivative; never where it is assumed to
/// have a sign.
pub(crate) fn even(maker: &mut Maker<'_>, checked: &Checked, coordinate: usize) -> Option<Map> {
    if has_sign(maker, checked, coordinate) {
        return None;
    }
    let kept = asked(maker, |cx| mechanics::keeps(cx, checked.model(), Discrete::Reflection(coordinate))).ok()?;
    kept.then(|| Map::Reflection(checked.model().coordinates[coordinate].label(maker.arena)))
}

fn one(maker: &mut Maker<'_>, checked: &Checked, kind: Discrete) -> Result<DiscreteRow, Stopped> {
    let model = checked.model();
    let answer = asked(maker, |cx| mechanics::examine(cx, model, kind))?;
    Ok(row(maker, checked, &answer))
}

fn has_sign(maker: &mut Maker<'_>, checked: &Checked, coordinate: usize) -> bool {
    let q = &checked.model().coordinates[coordinate];
    if q.members.is_some() {
        return false;
    }
    let e = q.jet(maker.arena, 0);
    let sign = maker.zero.sign_of(maker.arena, e, maker.budget);
    sign.is_nonnegative() || sign.is_nonpositive()
}

fn row(maker: &mut Maker<'_>, checked: &Checked, answer: &DiscreteAnswer) -> DiscreteRow {
    let model = checked.model();
    let label = |i: usize| model.coordinates[i].label(maker.arena);
    let map = match answer.kind {
        Discrete::TimeReversal => Map::TimeReversal,
        Discrete::Reflection(i) => Map::Reflection(label(i)),
        Discrete::Inversion => Map::Inversion,
        Discrete::HalfTurn(i) => Map::HalfTurn(label(i)),
        Discrete::ReversalWithReflection(i) => Map::ReversalWithReflection(label(i)),
    };
    let holds = match (&answer.lagrangian, &answer.rest) {
        (mechanics::Holds::Broken, _) => {
            Holds::Broken(answer.broken_by.iter().map(|&t| model.terms[t].name.clone()).collect())
        }
        (mechanics::Holds::Undecided(why), _) => Holds::Undecided(why.clone()),
        (_, Verdict::Refuted(_)) => {
            Holds::BrokenByForces(answer.forces.iter().map(|&f| model.forces[f].name.clone()).collect())
        }
        (_, Verdict::Undecided(why)) => Holds::Undecided(why.to_string()),
        (mechanics::Holds::Exactly, Verdict::Proved) => Holds::Exactly,
        (mechanics::Holds::UpToDerivative(f), Verdict::Proved) => Holds::UpToDerivative(f.map(|f| maker.print(f))),
    };
    DiscreteRow { map, holds }
}
