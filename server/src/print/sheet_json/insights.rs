//! The algebra of charges, discrete symmetries, similarity, idle terms: for programs.

use super::formula;
use crate::lines::Lines;
use crate::print::findings_json;
use leastwise_analysis::insights::{
    AlgebraReport, BracketRow, BracketStatus, DiscreteRow, Holds, IdleRow, Insights, Map, NamedRow, Scaling,
    SimilarityReport, Source,
};
use serde_json::{Map as Object, Value, json};

/// The fields that follow one another in the sheet.
pub(super) fn insights(object: &mut Object<String, Value>, insights: &Insights, lines: &Lines<'_>) {
    object.insert("charge_algebra".into(), insights.algebra.as_ref().map_or(Value::Null, algebra));
    object.insert("discrete_symmetries".into(), insights.discrete.rows.iter().map(discrete).collect());
    if let Some(why) = &insights.discrete.stopped {
        object.insert("discrete_symmetries_undecided".into(), json!(why));
    }
    object.insert("similarity".into(), similarity(&insights.similarity));
    object.insert("idle_terms".into(), insights.idle.iter().map(|row| idle(row, lines)).collect());
}

fn algebra(report: &AlgebraReport) -> Value {
    let charges: Value = report
        .charges
        .iter()
        .map(|c| {
            let (kind, of) = match &c.source {
                Source::Energy => ("energy", None),
                Source::Momentum(q) => ("momentum", Some(q)),
                Source::Symmetry(name) => ("symmetry", Some(name)),
                Source::Conserved(name) => ("conserved", Some(name)),
            };
            json!({
                "name": c.name,
                "kind": kind,
                "of": of,
                "formula": formula(&c.formula),
                "dependent": c.dependent.as_ref().map_or(Value::Null, formula),
            })
        })
        .collect();
    let basis: Vec<&str> = report.basis().map(|c| c.name.as_str()).collect();
    match &report.algebra {
        Err(why) => json!({ "charges": charges, "refused": why }),
        Ok(a) => json!({
            "charges": charges,
            "basis": basis,
            "brackets": a.brackets.iter().map(bracket).collect::<Value>(),
            "closed": a.closed,
            "centre": a.central,
            "central_charges": a.central_constants.iter().map(formula).collect::<Value>(),
            "names": a.named.iter().map(named).collect::<Value>(),
            "not_zero": a.not_zero.iter().map(formula).collect::<Value>(),
            "forced": a.forced,
        }),
    }
}

fn bracket(b: &BracketRow) -> Value {
    let mut object = Object::new();
    object.insert("left".into(), json!(b.left));
    object.insert("right".into(), json!(b.right));
    let status = match &b.status {
        BracketStatus::Closed => "closed",
        BracketStatus::Open => "open",
        BracketStatus::Undecided(why) => {
            object.insert("undecided".into(), json!(why));
            "undecided"
        }
    };
    object.insert("status".into(), json!(status));
    object.insert("value".into(), formula(&b.value));
    let constants = b.summands.iter().map(|s| json!({ "coefficient": formula(&s.coefficient), "charges": s.charges }));
    object.insert("structure_constants".into(), constants.collect());
    Value::Object(object)
}

fn named(n: &NamedRow) -> Value {
    let conditions =
        n.conditions.iter().map(|c| json!({ "of": formula(&c.of), "relation": c.relation, "words": c.words }));
    json!({
        "name": n.name,
        "kind": n.kind,
        "dimension": n.dimension,
        "conditions": conditions.collect::<Value>(),
        "on_level_sets_of": n.on_level_sets_of,
        "words": n.words(),
    })
}

fn discrete(row: &DiscreteRow) -> Value {
    let (map, coordinate) = match &row.map {
        Map::TimeReversal => ("time_reversal", None),
        Map::Reflection(q) => ("reflection", Some(q)),
        Map::Inversion => ("inversion", None),
        Map::HalfTurn(q) => ("half_turn", Some(q)),
        Map::ReversalWithReflection(q) => ("time_reversal_with_reflection", Some(q)),
    };
    let mut object = Object::new();
    object.insert("map".into(), json!(map));
    object.insert("coordinate".into(), json!(coordinate));
    object.insert("words".into(), json!(format!("{}: {}", row.map.words(), row.words())));
    match &row.holds {
        Holds::Exactly => object.insert("holds".into(), json!(true)),
        Holds::UpToDerivative(f) => {
            object.insert("holds".into(), json!(true));
            object.insert("gauge".into(), f.as_ref().map_or(Value::Null, formula))
        }
        Holds::Broken(terms) => {
            object.insert("holds".into(), json!(false));
            object.insert("broken_by".into(), json!(terms))
        }
        Holds::BrokenByForces(forces) => {
            object.insert("holds".into(), json!(false));
            object.insert("broken_by_forces".into(), json!(forces))
        }
        Holds::Undecided(why) => object.insert("undecided".into(), json!(why)),
    };
    Value::Object(object)
}

fn similarity(report: &SimilarityReport) -> Value {
    let scaling = |s: &Scaling| {
        let coordinates: Object<String, Value> =
            s.coordinates.iter().map(|(q, a)| (q.clone(), json!(a.to_string()))).collect();
        json!({
            "coordinates": coordinates,
            "time": s.time.to_string(),
            "lagrangian": s.lagrangian.to_string(),
            "words": s.words(),
            "implies": s.implies,
        })
    };
    let mut object = Object::new();
    object.insert("scalings".into(), report.scalings.iter().map(scaling).collect());
    if let Some(why) = &report.undecided {
        object.insert("undecided".into(), json!(why));
    }
    let virial = report
        .virial
        .as_ref()
        .map(|k| json!({ "degree": k.to_string(), "words": report.relation(), "assumes": "bounded motion" }));
    object.insert("virial".into(), virial.unwrap_or(Value::Null));
    Value::Object(object)
}

fn idle(row: &IdleRow, lines: &Lines<'_>) -> Value {
    json!({
        "terms": row.terms,
        "derivative_of": row.derivative_of.as_ref().map_or(Value::Null, formula),
        "why": row.why,
        "ranges": row.parts.iter().map(|r| findings_json::range(r, lines)).collect::<Value>(),
    })
}
