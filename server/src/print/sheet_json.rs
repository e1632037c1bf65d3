//! `sheet --as json`: everything derived, for programs. The fields are documented with the model language.

mod found;
mod insights;

use crate::lines::Lines;
use crate::print::findings_json;
use leastwise_analysis::report::{
    Answer, ConservedRow, CoordinateRow, EnergyRow, Finding, Formula, Sheet, Status, SymmetryRow,
};
use serde_json::{Map, Value, json};

/// The sheet as one object.
pub fn sheet(sheet: &Sheet, findings: &[Finding], lines: &Lines<'_>) -> Value {
    let mut object = Map::new();
    object.insert("format".into(), json!("leastwise-sheet"));
    object.insert("version".into(), json!(1));
    object.insert("system".into(), json!(sheet.system));
    object.insert("description".into(), json!(sheet.description));
    object.insert("lagrangian".into(), formula(&sheet.lagrangian));
    let terms = sheet.terms.iter().map(|t| json!({ "name": t.name, "kind": t.kind, "formula": formula(&t.formula) }));
    object.insert("terms".into(), terms.collect());
    object.insert("coordinates".into(), sheet.coordinates.iter().map(coordinate).collect());
    object.insert("mass_matrix".into(), mass_matrix(sheet));
    object.insert("energy".into(), energy(&sheet.energy));
    object.insert("symmetries".into(), sheet.symmetries.iter().map(|s| symmetry(s, lines)).collect());
    object.insert("conserved".into(), sheet.conserved.iter().map(|c| conserved(c, lines)).collect());
    object.insert("found".into(), found::found(sheet.found.as_ref()));
    insights::insights(&mut object, &sheet.insights, lines);
    object.insert("findings".into(), findings_json::list(findings, lines));
    Value::Object(object)
}

fn formula(f: &Formula) -> Value {
    let mut object = json!({ "text": f.text, "plain": f.plain, "latex": f.latex });
    if let (Some(m), Some(object)) = (&f.measured, object.as_object_mut()) {
        object.insert("quantity".into(), json!(m.quantity));
        object.insert("unit".into(), json!(m.unit));
    }
    object
}

/// Formulas by name, in order.
fn by_name(list: &[(String, Formula)]) -> Value {
    Value::Object(list.iter().map(|(name, f)| (name.clone(), formula(f))).collect())
}

/// The full matrix as rows; for large families the entries that are not zero, by the names of row and column.
fn mass_matrix(sheet: &Sheet) -> Value {
    if sheet.mass_entries.is_empty() {
        let row = |r: &Vec<Formula>| r.iter().map(formula).collect::<Value>();
        return sheet.mass_matrix.iter().map(row).collect();
    }
    let entry = |e: &leastwise_analysis::report::MassEntry| json!({ "row": e.row, "column": e.column, "formula": formula(&e.formula) });
    sheet.mass_entries.iter().map(entry).collect()
}

fn coordinate(c: &CoordinateRow) -> Value {
    let mut object = Map::new();
    object.insert("name".into(), json!(c.name));
    if let Some(m) = &c.members {
        object.insert("members".into(), json!({ "index": m.index, "first": m.range.0, "last": m.range.1 }));
    }
    object.insert("quantity".into(), json!(c.quantity));
    match &c.cyclic_undecided {
        Some(reason) => object.insert("undecided".into(), json!(reason)),
        None => object.insert("cyclic".into(), json!(c.cyclic)),
    };
    object.insert("momentum_conserved".into(), json!(c.momentum_conserved));
    object.insert("momentum".into(), formula(&c.momentum));
    object.insert("force".into(), formula(&c.force));
    object.insert("equation".into(), formula(&c.equation));
    if let Some(reaction) = &c.reaction {
        object.insert("reaction".into(), formula(reaction));
    }
    object.insert("by_term".into(), by_name(&c.by_term));
    Value::Object(object)
}

/// `field: true|false`, or `undecided: REASON` in its place; a witness beside a refutation.
fn answer(object: &mut Map<String, Value>, field: &str, answer: &Answer) {
    match answer {
        Answer::Yes => object.insert(field.into(), json!(true)),
        Answer::No(witness) => {
            object.insert(field.into(), json!(false));
            witness.as_ref().and_then(|w| object.insert("witness".into(), json!(w)))
        }
        Answer::Undecided(reason) => object.insert("undecided".into(), json!(reason)),
    };
}

fn energy(e: &EnergyRow) -> Value {
    let mut object = Map::new();
    object.insert("formula".into(), formula(&e.formula));
    answer(&mut object, "conserved", &e.conserved);
    object.insert("rate".into(), formula(&e.rate));
    object.insert("is_total_energy".into(), json!(e.is_total_energy));
    Value::Object(object)
}

fn symmetry(s: &SymmetryRow, lines: &Lines<'_>) -> Value {
    let status = match s.status {
        Status::Exact => "exact",
        Status::UpToGauge => "up_to_gauge",
        Status::Broken => "broken",
        Status::Undecided => "undecided",
    };
    let mut object = Map::new();
    object.insert("name".into(), json!(s.name));
    object.insert("expected_broken".into(), json!(s.expected_broken));
    object.insert("status".into(), json!(status));
    if let Some(reason) = &s.undecided {
        object.insert("undecided".into(), json!(reason));
    }
    object.insert("generator".into(), by_name(&s.generator));
    object.insert("charge".into(), formula(&s.charge));
    object.insert("gauge".into(), s.gauge.as_ref().map_or(Value::Null, formula));
    if let Some(reason) = &s.gauge_unknown {
        object.insert("gauge_unknown".into(), json!(reason));
    }
    object.insert("rate".into(), formula(&s.rate));
    let mut of_charge = Map::new();
    answer(&mut of_charge, "holds", &s.conserved);
    object.insert("conserved".into(), Value::Object(of_charge));
    let breakers = s.broken_by.iter().map(|b| json!({ "term": b.term, "variation": formula(&b.variation) }));
    object.insert("broken_by".into(), breakers.collect());
    object.insert("smallest".into(), json!(s.smallest));
    object.insert("taken_by".into(), json!(s.taken_by));
    if let Some(respects) = s.respects_constraints {
        object.insert("respects_constraints".into(), json!(respects));
    }
    object.insert("range".into(), findings_json::range(&s.range, lines));
    Value::Object(object)
}

fn conserved(c: &ConservedRow, lines: &Lines<'_>) -> Value {
    let mut object = Map::new();
    object.insert("name".into(), json!(c.name));
    object.insert("formula".into(), formula(&c.formula));
    answer(&mut object, "holds", &c.holds);
    object.insert("rate".into(), formula(&c.rate));
    if !c.origin.is_empty() {
        object.insert("origin".into(), json!(c.origin));
    }
    object.insert("range".into(), findings_json::range(&c.range, lines));
    Value::Object(object)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::print::fixture;

    fn printed(change: impl FnOnce(&mut Sheet)) -> Value {
        let mut derived = fixture::sheet();
        change(&mut derived);
        let outcome = fixture::outcome();
        sheet(&derived, &outcome.findings, &Lines::new(&outcome.text))
    }

    #[test]
    fn the_fields_of_the_language_page() {
        let v = printed(|_| ());
        assert_eq!((&v["format"], &v["version"]), (&json!("leastwise-sheet"), &json!(1)));
        assert_eq!(v["terms"][0], json!({ "name": "package", "kind": "kinetic", "formula": v["terms"][0]["formula"] }));
        assert_eq!(v["coordinates"][1]["cyclic"], true);
        assert_eq!(v["mass_matrix"][0][0]["plain"], "m + J/a^2");
        assert_eq!(v["energy"]["conserved"], false);
        let azimuth = &v["symmetries"][0];
        assert_eq!(azimuth["status"], "exact");
        assert_eq!(azimuth["gauge"], Value::Null);
        assert_eq!(azimuth["generator"]["φ"]["plain"], "1");
        assert_eq!(v["symmetries"][1]["broken_by"][0]["term"], "package");
        assert_eq!(v["symmetries"][1]["taken_by"], json!(["bearing", "brake"]));
        assert_eq!(v["conserved"][0]["holds"], true);
        assert_eq!(v["findings"][0]["range"]["start"]["line"], 1);
        assert!(v["coordinates"][0].get("reaction").is_none(), "there are no constraints");
    }

    #[test]
    fn what_is_undecided_says_why() {
        let v = printed(|s| {
            s.energy.conserved = Answer::Undecided("degree".into());
            s.conserved[0].holds = Answer::Undecided("degenerate".into());
            s.symmetries[0].status = Status::Undecided;
            s.symmetries[0].undecided = Some("degree".into());
            s.coordinates[0].cyclic_undecided = Some("degree".into());
        });
        assert_eq!(v["energy"]["undecided"], "degree");
        assert!(v["energy"].get("conserved").is_none());
        assert_eq!(v["conserved"][0]["undecided"], "degenerate");
        assert_eq!(v["symmetries"][0]["undecided"], "degree");
        assert_eq!(v["coordinates"][0]["undecided"], "degree");
    }

    #[test]
    fn large_families_have_a_sparse_matrix() {
        use leastwise_analysis::report::MassEntry;
        let v = printed(|s| {
            let formula = s.mass_matrix[0][0].clone();
            s.mass_matrix.clear();
            s.mass_entries = vec![MassEntry { row: "x[i]".into(), column: "x[i + 1]".into(), formula }];
        });
        assert_eq!(v["mass_matrix"][0]["column"], "x[i + 1]");
    }
}
