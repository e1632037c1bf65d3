//! Where models come from: files of all kinds, standard input, includes.

use crate::support::{Folder, Ran};

const GOOD: &str = "coordinate x\nparameter k\nkinetic T = 1/2 x'^2\npotential V = 1/2 k x^2\n";

#[track_caller]
fn check_unreadable(name: &str, reason: &str) {
    let folder = Folder::new();
    std::fs::create_dir(folder.path("folder.least")).expect("a folder");
    for command in ["check", "sheet", "format"] {
        let ran = folder.run(&[command, name]);
        assert_eq!((ran.code, ran.err), (2, format!("leastwise: {name}: {reason}\n")), "{command}");
    }
}

#[test]
fn what_is_no_file() {
    check_unreadable("missing.least", "no such file");
    check_unreadable("folder.least", "a folder, not a file");
    if cfg!(unix) {
        check_unreadable("/dev/zero", "not a regular file");
    }
}

#[test]
fn a_pipe_in_the_file_system_does_not_block() {
    let folder = Folder::new();
    let made = std::process::Command::new("mkfifo").arg(folder.path("pipe.least")).status();
    if !made.is_ok_and(|s| s.success()) {
        return; // no such pipes here
    }
    assert_eq!(folder.run(&["check", "pipe.least"]).err, "leastwise: pipe.least: not a regular file\n");
    folder.write("a.least", format!("include \"pipe.least\"\n{GOOD}"));
    let ran = folder.run(&["check", "a.least"]);
    assert!(ran.code == 1 && ran.out.contains("not a regular file"), "{}", ran.out);
}

#[test]
fn bytes_that_are_no_text() {
    let folder = Folder::with("a.least", b"coordinate x\nkinetic T = 1/2 \xff x'^2\n");
    let ran = folder.run(&["check", "a.least"]);
    assert_eq!(ran.code, 1);
    insta::assert_snapshot!(ran.out);
    let finding = &folder.run(&["check", "a.least", "--as", "json"]).json()["files"][0]["findings"][0];
    assert_eq!(finding["code"], "not-utf8");
    assert_eq!(finding["range"]["start"], serde_json::json!({ "line": 1, "character": 16 }));
    assert_eq!(folder.run(&["sheet", "a.least"]).code, 2);
    let refused = folder.run(&["format", "a.least"]);
    assert_eq!(refused.code, 2);
    assert!(refused.err.contains("byte 0xFF at position 29"), "{}", refused.err);
}

#[test]
fn standard_input() {
    let folder = Folder::new();
    let ran = folder.run_with(&["check", "-"], "kinetic T = 1/2 (x\n");
    assert_eq!(ran.code, 1);
    assert!(ran.out.contains("--> <stdin>:1:"), "{}", ran.out);
    let sheet = folder.run_with(&["sheet", "-", "--as", "json"], GOOD).json();
    assert_eq!(sheet["format"], "leastwise-sheet");
    assert_eq!(folder.run(&["check", "-"]).code, 0, "nothing on standard input is an empty model");
}

#[test]
fn several_files_and_one_that_is_missing() {
    let folder = Folder::with("good.least", GOOD);
    folder.write("bad.least", "kinetic = =\n");
    assert_eq!(folder.run(&["check", "good.least"]).code, 0);
    assert_eq!(folder.run(&["check", "good.least", "bad.least"]).code, 1);
    let Ran { code, out, err } = folder.run(&["check", "missing.least", "bad.least"]);
    assert_eq!(code, 2);
    assert!(out.contains("bad.least:1:") && err.contains("missing.least: no such file"), "{out}{err}");
    let report = folder.run(&["check", "missing.least", "bad.least", "--as", "json"]).json();
    assert_eq!(report["files"][0]["unreadable"], "no such file");
    assert_eq!(report["files"][1]["findings"][0]["severity"], "error");
}

#[test]
fn includes_beside_the_including_file() {
    let folder = Folder::new();
    std::fs::create_dir(folder.path("parts")).expect("a folder");
    folder.write("parts/site.least", "include \"more.least\"\n");
    folder.write("parts/more.least", "parameter k\n");
    folder.write("a.least", "include \"./parts/site.least\"\ncoordinate x\nkinetic T = 1/2 k x'^2\n");
    let ran = folder.run(&["check", "a.least"]);
    assert_eq!((ran.code, ran.out.as_str()), (0, "nothing found in 1 file\n"));
}

#[test]
fn columns_are_utf16_units() {
    // A letter beyond the basic plane, a combining dot, and the line breaks of another system.
    let folder = Folder::with("a.least", "coordinate 𝑥, θ\r\nkinetic T = 1/2 𝑥'^2 + 1/2 θ̇² + nowhere\r\n");
    let report = folder.run(&["check", "a.least", "--as", "json"]).json();
    let range = &report["files"][0]["findings"][0]["range"];
    assert_eq!(range["start"], serde_json::json!({ "line": 1, "character": 34 }));
    assert_eq!(range["end"], serde_json::json!({ "line": 1, "character": 41 }));
}
