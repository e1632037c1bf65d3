//! Every model of the project is lowered without an error.

use crate::database::Session;
use crate::fixture::errors;
use crate::include::Files;
use std::path::{Path, PathBuf};

/// The files of a folder.
struct Disk;

impl Files for Disk {
    fn read(&self, from: &str, include: &str) -> Result<(String, String), String> {
        let path = Path::new(from).parent().unwrap_or(Path::new("")).join(include);
        let text = std::fs::read_to_string(&path).map_err(|e| e.to_string())?;
        Ok((path.to_string_lossy().into_owned(), text))
    }
}

fn models(folder: &Path) -> Vec<PathBuf> {
    let Ok(entries) = std::fs::read_dir(folder) else { return Vec::new() };
    let mut paths: Vec<PathBuf> = entries.flatten().map(|e| e.path()).collect();
    paths.retain(|p| p.extension().is_some_and(|e| e == "least"));
    paths.sort();
    paths
}

fn check_folder(folder: &Path) -> Vec<String> {
    let mut wrong = Vec::new();
    let mut session = Session::new();
    for path in models(folder) {
        let text = std::fs::read_to_string(&path).unwrap();
        let checked = session.check(&path.to_string_lossy(), &text, &Disk);
        let name = path.file_stem().unwrap().to_string_lossy().into_owned();
        if name != "site" {
            assert!(!checked.model().terms.is_empty() && !checked.model().coordinates.is_empty(), "{name} is empty");
        }
        let warned = checked.findings.iter().map(|f| f.code);
        if std::env::var_os("SHOW").is_some() {
            eprintln!("{name}: {:?}", warned.collect::<Vec<_>>());
        }
        wrong.extend(errors(&checked).into_iter().map(|e| format!("{name}: {e}")));
    }
    wrong
}

#[test]
fn the_examples_have_no_error() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../grammar/examples");
    assert!(models(&folder).len() >= 10);
    assert_eq!(check_folder(&folder), [""; 0]);
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../tests/oracle/models");
    assert!(models(&folder).len() >= 10);
    assert_eq!(check_folder(&folder), [""; 0]);
}

#[test]
fn the_cases_have_no_error_but_the_names_that_are_not_declared() {
    let Some(shared) = std::env::var_os("LEASTWISE_SHARED") else {
        #[allow(clippy::print_stdout)]
        {
            println!("not run: LEASTWISE_SHARED names no folder");
        }
        return;
    };
    let folder = Path::new(&shared).join("cases");
    assert!(models(&folder).len() >= 28);
    let wrong = check_folder(&folder);
    let start = |name: &str| format!("shaft_winch: undeclared-name `{name}`: `{name}` is not declared");
    assert_eq!(wrong.len(), 3, "{wrong:?}");
    for (found, name) in wrong.iter().zip(["c", "F0", "v0"]) {
        assert!(found.starts_with(&start(name)), "{found}");
    }
}
