//! The example models, as a newcomer sees them. The snapshots are read by eye: each must be right as physics.

use crate::support::{examples, run_in};

#[track_caller]
fn check(name: &str) {
    let file = format!("{name}.least");
    let checked = run_in(&examples(), &["check", &file], "");
    assert_eq!(checked.code, 0, "{}{}", checked.out, checked.err);
    let sheet = run_in(&examples(), &["sheet", &file], "");
    assert_eq!((sheet.code, sheet.err.as_str()), (0, ""));
    insta::assert_snapshot!(name, format!("{}\n----\n\n{}", checked.out, sheet.out));
}

macro_rules! examples {
    ($($name:ident)*) => {
        $(#[test] fn $name() { check(stringify!($name)); })*

        #[test]
        fn every_example_is_here() {
            let here = [$(stringify!($name)),*];
            let files = std::fs::read_dir(examples()).expect("the examples");
            for file in files.filter_map(Result::ok) {
                let name = file.file_name().to_string_lossy().replace(".least", "");
                // What the instruments share is no model.
                assert!(name == "site" || here.contains(&name.as_str()), "{name}");
            }
        }
    };
}

examples! {
    ballistic_gravimeter buoy_chain charged_drop elastic_gravimeter gimballed_rotor
    moving_coil_geophone sampling_arm seismometer shaft_winch tethered_buoys
}

#[test]
fn an_article() {
    let article = run_in(&examples(), &["sheet", "seismometer.least", "--as", "latex"], "");
    assert_eq!(article.code, 0);
    insta::assert_snapshot!(article.out);
}

#[test]
fn the_sheet_as_json_is_what_the_page_says() {
    let sheet = run_in(&examples(), &["sheet", "shaft_winch.least", "--as", "json"], "").json();
    assert_eq!((&sheet["format"], &sheet["version"]), (&"leastwise-sheet".into(), &1.into()));
    assert_eq!(sheet["system"], "shaft_winch");
    let names: Vec<&str> =
        sheet["coordinates"].as_array().expect("rows").iter().filter_map(|c| c["name"].as_str()).collect();
    assert_eq!(names, ["r", "θ", "φ"]);
    let statuses: Vec<&str> =
        sheet["symmetries"].as_array().expect("rows").iter().filter_map(|s| s["status"].as_str()).collect();
    assert_eq!(statuses, ["exact", "exact", "broken"]);
    assert_eq!(sheet["symmetries"][1]["taken_by"], serde_json::json!(["bearing", "brake"]));
    assert_eq!(sheet["conserved"][0]["holds"], true);
}
