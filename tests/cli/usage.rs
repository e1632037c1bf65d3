//! Help, versions, slips on the command line.

use crate::support::{Folder, examples, program};
use std::process::Stdio;

#[track_caller]
fn check_usage(arguments: &[&str], message: &str) {
    let ran = Folder::new().run(arguments);
    assert_eq!((ran.code, ran.out.as_str()), (2, ""));
    assert_eq!(ran.err.lines().next(), Some(message));
}

#[test]
fn help_pages() {
    let folder = Folder::new();
    for arguments in [
        &["help"][..],
        &["help", "check"],
        &["help", "sheet"],
        &["help", "format"],
        &["help", "explain"],
        &["help", "lsp"],
    ] {
        let ran = folder.run(arguments);
        assert_eq!(ran.code, 0);
        assert!(ran.out.starts_with("leastwise"), "{}", ran.out);
        assert!(ran.out.lines().all(|l| l.chars().count() <= 100), "{}", ran.out);
    }
    assert_eq!(folder.run(&["--help"]).out, folder.run(&["help"]).out);
    assert_eq!(folder.run(&["sheet", "--help"]).out, folder.run(&["help", "sheet"]).out);
    insta::assert_snapshot!(folder.run(&["help"]).out);
}

#[test]
fn the_version() {
    assert_eq!(Folder::new().run(&["--version"]).out, format!("leastwise {}\n", env!("CARGO_PKG_VERSION")));
}

#[test]
fn slips_on_the_command_line() {
    check_usage(&[], "leastwise: no command");
    check_usage(&["shet", "a.least"], "leastwise: no command `shet`; did you mean `sheet`?");
    check_usage(&["check"], "leastwise: check needs a file; `-` is standard input");
    check_usage(&["check", "--is", "json"], "leastwise: no option `--is`; did you mean `--as`?");
    check_usage(&["sheet", "a.least", "--as", "poem"], "leastwise: no form `poem`");
    check_usage(&["sheet", "a.least", "b.least"], "leastwise: sheet takes one file at a time");
}

#[test]
fn codes_are_explained() {
    let folder = Folder::new();
    let list = folder.run(&["explain"]);
    assert_eq!(list.code, 0);
    let codes: Vec<&str> =
        list.out.lines().filter(|l| !l.starts_with(' ')).filter_map(|l| l.split(' ').next()).collect();
    assert!(codes.len() > 60 && codes.is_sorted(), "{codes:?}");
    for code in codes {
        let ran = folder.run(&["explain", code]);
        assert!(ran.code == 0 && ran.out.lines().count() >= 3, "{code}: {}", ran.out);
        let own = ["not-utf8", "internal-error"].contains(&code);
        assert!(
            own || ran.out.contains("\nA mend that editors offer: ") || ran.out.contains("\nWhat to do: "),
            "{code}"
        );
    }
    // The example is a real one: the finding is as `check` tells it.
    insta::assert_snapshot!(folder.run(&["explain", "symmetry-broken"]).out);
    let slip = folder.run(&["explain", "not-utf9"]);
    assert_eq!((slip.code, slip.err.as_str()), (2, "leastwise: no code `not-utf9`; did you mean `not-utf8`?\n"));
}

#[test]
fn no_colours_outside_of_a_terminal() {
    let folder = Folder::with("a.least", "kinetic = =\n");
    for arguments in [&["check", "a.least"][..], &["sheet", "a.least"], &["explain", "not-utf8"]] {
        let ran = folder.run(arguments);
        assert!(!ran.out.contains('\x1b') && !ran.err.contains('\x1b'));
    }
}

#[test]
fn an_output_that_nobody_reads_is_no_error() {
    let (reading, writing) = std::io::pipe().expect("a pipe");
    drop(reading);
    let mut command = program(&examples());
    command.args(["sheet", "seismometer.least"]).stdin(Stdio::null()).stdout(writing).stderr(Stdio::piped());
    let output = command.spawn().and_then(|c| c.wait_with_output()).expect("an end");
    assert_eq!((output.status.code(), output.stderr.len()), (Some(0), 0));
}
