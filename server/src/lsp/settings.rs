//! Settings: one schema, by initialisation options and by pull.

use serde_json::Value;

/// What a person can set.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Settings {
    /// Hints behind coordinates.
    pub momentum_hints: bool,
    /// Hints behind claims.
    pub claim_hints: bool,
    /// The hint behind the last term.
    pub summary_hint: bool,
    /// Hints behind names without a declared quantity.
    pub quantity_hints: bool,
    /// The hint on what a search found.
    pub search_hint: bool,
    /// The longest hint, in characters.
    pub hint_length: usize,
    /// The longest hover, in lines.
    pub hover_lines: usize,
    /// Whether hints on how a formula was read are shown.
    pub readings: bool,
    /// Whether constants of the motion are looked for that nobody claimed.
    pub search_run: bool,
    /// The degree of the symmetries that are looked for.
    pub search_degree: usize,
    /// The most findings that are shown of one file.
    pub max_findings: usize,
}

impl Default for Settings {
    fn default() -> Settings {
        Settings {
            momentum_hints: true,
            claim_hints: true,
            summary_hint: true,
            quantity_hints: true,
            search_hint: true,
            hint_length: 60,
            hover_lines: 40,
            readings: true,
            search_run: true,
            search_degree: leastwise_analysis::search::DEGREE as usize,
            max_findings: 200,
        }
    }
}

/// The name under which clients keep the settings.
pub const SECTION: &str = "leastwise";

impl Settings {
    /// Reads what a client says; what it does not say is as usual. Also what is wrong with it, in sentences.
    pub fn read(value: &Value) -> (Settings, Vec<String>) {
        let mut settings = Settings::default();
        let mut wrong = Vec::new();
        let groups = match value {
            Value::Null => return (settings, wrong),
            // An empty table of Lua.
            Value::Array(list) if list.is_empty() => return (settings, wrong),
            Value::Object(groups) => groups,
            _ => return (settings, vec!["the settings are no object; the usual ones are used".into()]),
        };
        // Some clients send the section, others what is in it.
        let groups = match groups.get(SECTION) {
            Some(Value::Object(inner)) => inner,
            _ => groups,
        };
        for (group, entries) in groups {
            // Settings of clients, which are none of the server's.
            if matches!(group.as_str(), "server" | "trace") {
                continue;
            }
            let Value::Object(entries) = entries else {
                wrong
                    .push(format!("`{group}` is no group of settings; there are hints, hover, search and diagnostics"));
                continue;
            };
            for (name, value) in entries {
                settings.set(&format!("{group}.{name}"), value, &mut wrong);
            }
        }
        (settings, wrong)
    }

    fn set(&mut self, key: &str, value: &Value, wrong: &mut Vec<String>) {
        let mut switch = |place: &mut bool| match value {
            Value::Bool(on) => *place = *on,
            Value::Null => {}
            _ => wrong.push(format!("`{key}` is true or false, not {value}")),
        };
        match key {
            "hints.momentum" => return switch(&mut self.momentum_hints),
            "hints.claims" => return switch(&mut self.claim_hints),
            "hints.summary" => return switch(&mut self.summary_hint),
            "hints.quantities" => return switch(&mut self.quantity_hints),
            "hints.search" => return switch(&mut self.search_hint),
            "search.run" => return switch(&mut self.search_run),
            "diagnostics.readings" => return switch(&mut self.readings),
            _ => {}
        }
        let (place, least, most) = match key {
            "hints.maxLength" => (&mut self.hint_length, 10, 400),
            "hover.maxLines" => (&mut self.hover_lines, 5, 1000),
            "search.degree" => (&mut self.search_degree, 0, leastwise_analysis::search::MAX_DEGREE.into()),
            "diagnostics.max" => (&mut self.max_findings, 1, 10_000),
            _ => {
                wrong.push(format!("there is no setting `{key}`"));
                return;
            }
        };
        match value.as_u64() {
            Some(n) if (least..=most).contains(&n) => *place = n as usize,
            _ if value.is_null() => {}
            _ => wrong.push(format!("`{key}` is a whole number from {least} to {most}, not {value}")),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use serde_json::json;

    #[track_caller]
    fn check(value: Value, change: impl FnOnce(&mut Settings), complaints: &[&str]) {
        let mut expected = Settings::default();
        change(&mut expected);
        let (settings, wrong) = Settings::read(&value);
        assert_eq!(settings, expected);
        assert_eq!(wrong, complaints);
    }

    #[test]
    fn what_is_not_said_is_as_usual() {
        check(Value::Null, |_| {}, &[]);
        check(json!({}), |_| {}, &[]);
        check(json!([]), |_| {}, &[]);
        check(
            json!({"hints": {"claims": false, "maxLength": 20}}),
            |s| (s.claim_hints, s.hint_length) = (false, 20),
            &[],
        );
        check(
            json!({"hints": {"search": false}, "search": {"run": false, "degree": 0}}),
            |s| (s.search_hint, s.search_run, s.search_degree) = (false, false, 0),
            &[],
        );
        check(json!({"leastwise": {"hover": {"maxLines": 9}}}), |s| s.hover_lines = 9, &[]);
        check(json!({"server": {"path": "x"}, "hover": {"maxLines": null}}), |_| {}, &[]);
    }

    #[test]
    fn what_is_wrong_is_told_and_left_out() {
        check(
            json!({"hints": {"claims": 1, "momentum": false}}),
            |s| s.momentum_hints = false,
            &["`hints.claims` is true or false, not 1"],
        );
        check(
            json!({"diagnostics": {"max": 0}}),
            |_| {},
            &["`diagnostics.max` is a whole number from 1 to 10000, not 0"],
        );
        check(
            json!({"search": {"degree": 5, "run": "no"}}),
            |_| {},
            &["`search.degree` is a whole number from 0 to 4, not 5", "`search.run` is true or false, not \"no\""],
        );
        check(json!({"hover": {"lines": 3}}), |_| {}, &["there is no setting `hover.lines`"]);
        check(
            json!({"hover": 3}),
            |_| {},
            &["`hover` is no group of settings; there are hints, hover, search and diagnostics"],
        );
        check(json!([1]), |_| {}, &["the settings are no object; the usual ones are used"]);
    }
}
