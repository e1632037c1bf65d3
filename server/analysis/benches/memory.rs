//! Memory over 100 000 edits: a line that must stay flat.
//!
//! A session is edited as by a hand, each text never seen before; after each edit come the findings, a hover and the
//! hints. Linux tells the resident memory of the process; elsewhere only the arena is looked at.

#![allow(clippy::print_stdout)]

use leastwise_analysis::{Files, Session};
use std::process::ExitCode;

/// All edits.
const EDITS: usize = 100_000;
/// Edits after which nothing may grow any more: several epochs have passed.
const SETTLED: usize = 40_000;
/// How far the memory may lie above what it was when settled, in parts of it and in bytes.
const GROWTH: f64 = 0.10;
const SLACK: u64 = 16 << 20;
/// No arena of these models may have more nodes.
const ARENA: usize = 600_000;

struct NoFiles;

impl Files for NoFiles {
    fn read(&self, _: &str, include: &str) -> Result<(String, String), String> {
        Err(format!("{include} is not read here"))
    }
}

/// Bytes of memory that this process has.
fn resident() -> Option<u64> {
    let text = std::fs::read_to_string("/proc/self/statm").ok()?;
    let pages: u64 = text.split(' ').nth(1)?.parse().ok()?;
    Some(pages * 4096)
}

/// A text never seen before: a summand changes, a definition changes, the text is broken and mended.
fn edited(base: &str, k: usize) -> String {
    let n = k + 3;
    match k % 4 {
        0 => base.replace("1/2 m ", &format!("{n}/1009 m ")),
        1 => base.replace("-r cos θ)", &format!("-r cos θ + {n}/1013 r)")),
        2 => base.replace("m g P[3]", &format!("m g P[3] + {n} + (")),
        _ => base.replace("m g P[3]", &format!("m g P[3] + {n}/7 m g r sin θ")),
    }
}

fn work() -> Result<String, String> {
    let base = include_str!("../../../grammar/examples/shaft_winch.least");
    let mut session = Session::new();
    let (mut settled, mut highest, mut nodes) = (0, 0, 0);
    for k in 0..EDITS {
        let text = edited(base, k);
        let checked = session.check("winch.least", &text, &NoFiles);
        let derived = session.derive(&checked);
        std::hint::black_box(session.findings(&checked, &derived));
        let place = (k * 37) % text.len();
        std::hint::black_box(session.hover(&checked, &derived, place));
        std::hint::black_box(session.inlays(&checked, &derived, 0..text.len()));
        nodes = nodes.max(session.arena().len());
        if k % 20 == 0
            && let Some(bytes) = resident()
        {
            // The highest point of several epochs counts, not where one of them happens to be.
            if k <= SETTLED {
                settled = settled.max(bytes);
            }
            highest = highest.max(bytes);
        }
    }
    let mib = |bytes: u64| bytes as f64 / f64::from(1 << 20);
    let told = format!(
        "{EDITS} edits: {:.0} MiB after {SETTLED}, at most {:.0} MiB, at most {nodes} nodes",
        mib(settled),
        mib(highest)
    );
    let allowed = (settled as f64 * (1.0 + GROWTH)) as u64 + SLACK;
    if highest > allowed || nodes > ARENA { Err(told) } else { Ok(told) }
}

fn main() -> ExitCode {
    // Deep expressions need a deep stack, as in the program.
    let thread = std::thread::Builder::new().stack_size(256 << 20).spawn(work);
    match thread.map(std::thread::JoinHandle::join) {
        Ok(Ok(Ok(told))) => {
            println!("ok   {told}\n1 passed, 0 failed");
            ExitCode::SUCCESS
        }
        Ok(Ok(Err(told))) => {
            println!("FAIL {told}\n0 passed, 1 failed");
            ExitCode::FAILURE
        }
        _ => ExitCode::FAILURE,
    }
}
