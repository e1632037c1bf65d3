//! Instruction counts under callgrind, from text to verdicts, held to a table.
//!
//! `cargo bench -p leastwise-analysis` counts all cases and compares them with `tests/bench/instructions.tsv`; more than
//! 5 % above an entry fails. `-- --update` writes the table anew, `-- NAME…` counts these only, `-- --median CASE` prints
//! the median of the time in microseconds, for ratios within one run.

#![allow(clippy::print_stdout, clippy::print_stderr)]

mod models;

use leastwise_analysis::{Files, Session};
use std::process::{Command, ExitCode};

/// Cases by name, in the order of the table.
const CASES: &[&str] = &[
    "links_2",
    "links_3",
    "links_5",
    "links_10",
    "links_16",
    "links_24",
    "line_10",
    "line_50",
    "line_100",
    "line_1000",
    "line_10000",
    "bodies_2",
    "bodies_4",
    "bodies_8",
    "heavy_top",
    "central_field",
    "links_10 potential edited",
    "links_10 kinetic edited",
    "links_10 definition edited",
    "bodies_4 potential edited",
];

/// How far a count may lie above its entry.
const TOLERANCE: f64 = 0.05;

struct NoFiles;

impl Files for NoFiles {
    fn read(&self, _: &str, include: &str) -> Result<(String, String), String> {
        Err(format!("{include} is not read here"))
    }
}

/// What is counted: callgrind is told to collect inside this function only.
#[inline(never)]
fn measured_section(session: &mut Session, text: &str) -> usize {
    let checked = session.check("model.least", text, &NoFiles);
    let derived = session.derive(&checked);
    std::hint::black_box(derived.symmetries.len())
}

fn model(name: &str) -> String {
    let (family, n) = name.rsplit_once('_').unwrap_or((name, ""));
    match (family, n.parse::<usize>()) {
        ("links", Ok(n)) => models::links(n),
        ("line", Ok(n)) => models::line(n),
        ("bodies", Ok(n)) => models::bodies(n),
        _ if name == "heavy_top" => models::heavy_top(),
        _ => models::central_field(),
    }
}

/// The median over `times` runs in microseconds; an edited text is never one that was seen before.
fn median(case: &str, times: usize) -> f64 {
    let mut samples = Vec::with_capacity(times);
    let (name, edit) = case.split_once(' ').unwrap_or((case, ""));
    let base = model(name);
    let mut session = Session::new();
    measured_section(&mut session, &base);
    for k in 0..times + 5 {
        let text = edited(&base, edit, k);
        if edit.is_empty() {
            session = Session::new();
        }
        let start = std::time::Instant::now();
        measured_section(&mut session, &text);
        // The first few bring in what all later edits share.
        if k >= 5 {
            samples.push(start.elapsed().as_secs_f64() * 1e6);
        }
    }
    samples.sort_by(f64::total_cmp);
    samples[samples.len() / 2]
}

fn edited(base: &str, edit: &str, k: usize) -> String {
    match edit {
        "" => base.to_string(),
        "potential edited" => models::edit_potential(base, k),
        "kinetic edited" => models::edit_kinetic(base, k),
        _ => models::edit_let(base, k),
    }
}

/// Runs one case; in this process, and usually under callgrind.
fn run(case: &str) {
    let mut session = Session::new();
    let Some((name, edit)) = case.split_once(' ') else {
        measured_section(&mut session, &model(case));
        return;
    };
    let base = model(name);
    // A live session: the base and a few edits have been seen, the measured text never.
    let mut texts = vec![base.clone()];
    texts.extend((0..4).map(|k| edited(&base, edit, k)));
    for text in &texts {
        let checked = session.check("model.least", text, &NoFiles);
        std::hint::black_box(session.derive(&checked).symmetries.len());
    }
    measured_section(&mut session, &edited(&base, edit, 4));
}

fn count(case: &str) -> Option<u64> {
    let me = std::env::current_exe().ok()?;
    let out = Command::new("valgrind")
        .args(["--tool=callgrind", "--callgrind-out-file=/dev/null", "--toggle-collect=*measured_section*"])
        .arg(me)
        .args(["--case", case])
        .output()
        .ok()?;
    let text = String::from_utf8_lossy(&out.stderr);
    let line = text.lines().find(|l| l.contains("Collected :"))?;
    line.rsplit(' ').next()?.trim().parse().ok()
}

fn table_path() -> std::path::PathBuf {
    std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("../../tests/bench/instructions.tsv")
}

fn table() -> Vec<(String, u64)> {
    let text = std::fs::read_to_string(table_path()).unwrap_or_default();
    text.lines()
        .filter(|l| !l.starts_with('#'))
        .filter_map(|l| l.split_once('\t'))
        .filter_map(|(name, n)| Some((name.to_string(), n.trim().parse().ok()?)))
        .collect()
}

fn main() -> ExitCode {
    let args: Vec<String> = std::env::args().skip(1).filter(|a| a != "--bench").collect();
    if let [flag, case] = args.as_slice()
        && (flag == "--case" || flag == "--median")
    {
        let (case, timed) = (case.clone(), flag == "--median");
        // Deep expressions need a deep stack, as in the program.
        let thread = std::thread::Builder::new()
            .stack_size(256 << 20)
            .spawn(move || if timed { println!("{:.1}", median(&case, 101)) } else { run(&case) });
        return match thread.map(std::thread::JoinHandle::join) {
            Ok(Ok(())) => ExitCode::SUCCESS,
            _ => ExitCode::FAILURE,
        };
    }
    if Command::new("valgrind").arg("--version").output().is_err() {
        println!("not run: instruction counts (needs valgrind)");
        let strict = std::env::var_os("LEASTWISE_REQUIRE_ALL").is_some();
        return if strict { ExitCode::FAILURE } else { ExitCode::SUCCESS };
    }
    let update = args.iter().any(|a| a == "--update");
    let wanted: Vec<&String> = args.iter().filter(|a| !a.starts_with('-')).collect();
    let known = table();
    let mut fresh = String::from("# Instructions from text to verdicts, counted by callgrind.\n");
    let (mut passed, mut failed) = (0, 0);
    for case in CASES {
        if !wanted.is_empty() && !wanted.iter().any(|w| case.contains(w.as_str())) {
            continue;
        }
        let Some(n) = count(case) else {
            println!("FAIL {case}: callgrind gave no count");
            failed += 1;
            continue;
        };
        fresh.push_str(&format!("{case}\t{n}\n"));
        let entry = known.iter().find(|(name, _)| name == case).map(|e| e.1);
        let change = entry.map_or(0.0, |e| n as f64 / e as f64 - 1.0);
        let verdict = if update || entry.is_some() && change <= TOLERANCE { "ok  " } else { "FAIL" };
        if verdict == "FAIL" {
            failed += 1;
        } else {
            passed += 1;
        }
        println!("{verdict} {case:<32} {n:>14}  {:+.1} %", 100.0 * change);
    }
    if update && wanted.is_empty() && std::fs::write(table_path(), fresh).is_err() {
        println!("FAIL the table was not written");
        return ExitCode::FAILURE;
    }
    println!("{passed} passed, {failed} failed");
    if failed == 0 { ExitCode::SUCCESS } else { ExitCode::FAILURE }
}
