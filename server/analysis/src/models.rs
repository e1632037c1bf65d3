//! Every model of the project is lowered without an error.

use crate::database::Session;
use crate::fixture::errors;
use crate::include::Files;
use std::path::{Path, PathBuf};

/// The files of a folder.
pub(crate) struct Disk;

impl Files for Disk {
    fn read(&self, from: &str, include: &str) -> Result<(String, String), String> {
        let path = Path::new(from).parent().unwrap_or(Path::new("")).join(include);
        let text = std::fs::read_to_string(&path).map_err(|e| e.to_string())?;
        Ok((path.to_string_lossy().into_owned(), text))
    }
}

/// The models of a folder, by name.
pub(crate) fn models(folder: &Path) -> Vec<PathBuf> {
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

/// Edits as a hand makes them: letters lost, doubled, swapped, words copied elsewhere.
fn slip(text: &str, state: &mut u64) -> String {
    let mut next = |n: usize| {
        *state = state.wrapping_mul(6364136223846793005).wrapping_add(1442695040888963407);
        (*state >> 33) as usize % n.max(1)
    };
    let mut letters: Vec<char> = text.chars().collect();
    for _ in 0..1 + next(6) {
        let at = next(letters.len());
        match next(6) {
            0 => drop(letters.remove(at)),
            1 => letters.insert(at, letters[at]),
            2 => {
                let other = next(letters.len());
                letters.swap(at, other);
            }
            3 => {
                let from = next(letters.len());
                let piece: Vec<char> = letters[from..].iter().copied().take(next(20)).collect();
                letters.splice(at..at, piece);
            }
            4 => letters
                .insert(at, ['(', ')', '[', ']', '|', '\'', '^', '=', ',', '\n', '0', '/', '·', '×', 'ε'][next(15)]),
            _ => letters.truncate(at.max(letters.len() / 2)),
        }
        if letters.is_empty() {
            letters.push('x');
        }
    }
    letters.into_iter().collect()
}

#[test]
fn whatever_is_typed_has_its_findings_inside_the_text() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../grammar/examples");
    let mut session = Session::new();
    let mut state = 7;
    for path in models(&folder) {
        let original = std::fs::read_to_string(&path).unwrap();
        for _ in 0..60 {
            let text = slip(&original, &mut state);
            let checked = session.check(&path.to_string_lossy(), &text, &Disk);
            for f in &checked.findings {
                let places = f.related.iter().map(|r| &r.range).chain([&f.range]);
                let edits = f.fixes.iter().flat_map(|x| x.edits.iter().map(|e| &e.0));
                for range in places.chain(edits) {
                    assert!(text.get(range.clone()).is_some(), "{f:?} in\n{text}");
                }
            }
            // A session that has seen other texts says the same as a new one.
            let fresh = Session::new().check(&path.to_string_lossy(), &text, &Disk);
            assert_eq!(checked.findings, fresh.findings, "{text}");
            assert_eq!(checked.model().terms.len(), fresh.model().terms.len());
        }
    }
}
