//! What a search found, for programs.

use super::{by_name, formula};
use leastwise_analysis::search::{SearchReport, SearchRow};
use serde_json::{Value, json};

/// `null` where there was no search.
pub(super) fn found(found: Option<&SearchReport>) -> Value {
    let Some(found) = found else { return Value::Null };
    json!({
        "degree": found.degree,
        "complete": found.incomplete.is_none(),
        "incomplete": found.incomplete,
        "none_other": found.none_other(),
        "items": found.items.iter().map(row).collect::<Value>(),
    })
}

fn row(row: &SearchRow) -> Value {
    json!({
        "name": row.name,
        "title": row.title,
        "known": row.known,
        "hidden": row.generator.is_empty(),
        "generator": by_name(&row.generator),
        "gauge": row.gauge.as_ref().map_or(Value::Null, formula),
        "charge": formula(&row.charge),
        "source": row.source,
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::print::fixture;

    #[test]
    fn fields_of_a_search() {
        assert_eq!(found(None), Value::Null);
        let v = found(Some(&fixture::found()));
        assert_eq!((&v["degree"], &v["complete"], &v["none_other"]), (&json!(2), &json!(true), &json!(false)));
        assert_eq!(v["items"][0]["known"], true);
        let boost = &v["items"][1];
        assert_eq!((&boost["name"], &boost["hidden"]), (&json!("boost_x"), &json!(false)));
        assert_eq!(boost["generator"]["x"]["plain"], "t");
        assert_eq!(boost["source"], "symmetry boost_x: x -> x + ε t");
    }
}
