//! The README shows what the program prints, and its models are right.

use crate::support::{Folder, examples};
use std::path::Path;

/// The fenced blocks of the README in one language.
fn blocks(language: &str) -> Vec<String> {
    let readme =
        std::fs::read_to_string(Path::new(env!("CARGO_MANIFEST_DIR")).join("../README.md")).expect("the README");
    let fence = format!("\n```{language}\n");
    readme.split(&fence).skip(1).filter_map(|rest| Some(rest.split_once("\n```")?.0.to_string())).collect()
}

#[test]
fn the_first_model_and_its_sheet() {
    let model = std::fs::read_to_string(examples().join("seismometer.least")).expect("an example");
    assert_eq!(blocks("least")[0], model.trim_end());
    let folder = Folder::with("seismometer.least", &model);
    assert_eq!(blocks("text")[0], folder.run(&["sheet", "seismometer.least"]).out.trim_end());
    folder.write("seismometer.least", model.replace("broken symmetry lift", "symmetry lift"));
    assert_eq!(blocks("text")[1], folder.run(&["check", "seismometer.least"]).out.trim_end());
}

#[test]
fn every_model_checks_and_is_laid_out() {
    let models = blocks("least");
    assert!(models.len() >= 4);
    for model in models {
        let folder = Folder::with("a.least", format!("{model}\n"));
        let ran = folder.run(&["check", "a.least"]);
        assert_eq!(ran.code, 0, "{model}\n{}", ran.out);
        assert_eq!(folder.run(&["format", "--check", "a.least"]).code, 0, "{model}");
    }
}
