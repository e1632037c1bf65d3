//! `leastwise format`.

use crate::support::Folder;

const UNTIDY: &str = "coordinate   x:length   # rail\nkinetic T=1/2 m x'^2\nparameter m :mass=2 kg\n";

#[test]
fn a_file_is_laid_out_in_place_and_then_stays() {
    let folder = Folder::with("a.least", UNTIDY);
    let ran = folder.run(&["format", "a.least"]);
    assert_eq!((ran.code, ran.out.as_str(), ran.err.as_str()), (0, "", ""));
    let text = folder.text("a.least");
    assert_ne!(text, UNTIDY);
    assert!(text.contains("# rail"));
    assert_eq!(folder.run(&["format", "a.least"]).code, 0);
    assert_eq!(folder.text("a.least"), text, "formatting twice is formatting once");
    assert_eq!(std::fs::read_dir(folder.path(".")).expect("a folder").count(), 1, "nothing is left behind");
}

#[test]
fn check_names_the_files_that_would_change() {
    let folder = Folder::with("a.least", UNTIDY);
    folder.write("b.least", UNTIDY);
    folder.run(&["format", "b.least"]);
    let ran = folder.run(&["format", "--check", "a.least", "b.least"]);
    assert_eq!((ran.code, ran.out.as_str()), (1, "a.least\n"));
    assert_eq!(folder.text("a.least"), UNTIDY);
    assert_eq!(folder.run(&["format", "--check", "b.least"]).code, 0);
    assert_eq!(folder.run(&["format", "--check", "a.least", "missing.least"]).code, 2);
}

#[test]
fn standard_input_goes_to_standard_output() {
    let folder = Folder::with("a.least", UNTIDY);
    folder.run(&["format", "a.least"]);
    let ran = folder.run_with(&["format", "-"], UNTIDY);
    assert_eq!((ran.code, ran.out), (0, folder.text("a.least")));
    let ran = folder.run_with(&["format", "--check", "-"], UNTIDY);
    assert_eq!((ran.code, ran.out.as_str()), (1, "<stdin>\n"));
}

#[test]
fn what_cannot_be_read_is_kept_as_typed() {
    let text = "kinetic T = 1/2 ((   x\n# a remark\npotential = = 3\n";
    let folder = Folder::with("a.least", text);
    folder.run(&["format", "a.least"]);
    assert_eq!(folder.text("a.least"), text);
}

#[test]
fn the_examples_are_laid_out() {
    let folder = crate::support::examples();
    let mut files: Vec<String> = std::fs::read_dir(&folder)
        .expect("the examples")
        .filter_map(|e| e.ok()?.file_name().into_string().ok())
        .filter(|n| n.ends_with(".least"))
        .collect();
    files.sort();
    assert!(files.len() >= 10);
    let mut arguments = vec!["format", "--check"];
    arguments.extend(files.iter().map(String::as_str));
    let ran = crate::support::run_in(&folder, &arguments, "");
    assert_eq!((ran.code, ran.out.as_str()), (0, ""), "{}", ran.err);
}
