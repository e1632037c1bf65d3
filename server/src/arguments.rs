//! The command line: words to commands, and what to say where they make none.

use crate::help;
use leastwise_analysis::search::{DEGREE, MAX_DEGREE};
use leastwise_grammar::nearest;
use lexopt::Arg;
use std::ffi::OsString;
use std::path::PathBuf;

/// A model named on the command line.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Source {
    /// A file.
    File(PathBuf),
    /// Standard input, written `-`.
    Stdin,
}

/// How `check` prints.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum CheckForm {
    /// For people.
    Text,
    /// For programs.
    Json,
    /// For services that collect findings.
    Sarif,
}

/// How `sheet` prints.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum SheetForm {
    /// For a terminal.
    Text,
    /// For programs.
    Json,
    /// An article.
    Latex,
}

/// What to do.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Command {
    /// Print findings.
    Check {
        /// The models.
        sources: Vec<Source>,
        /// The form.
        form: CheckForm,
    },
    /// Print all that is derived.
    Sheet {
        /// The model.
        source: Source,
        /// The form.
        form: SheetForm,
        /// The degree of the search for what nobody claimed; none where it is not made.
        search: Option<u32>,
    },
    /// Lay models out.
    Format {
        /// The models.
        sources: Vec<Source>,
        /// Only say which would change.
        check: bool,
    },
    /// Explain a finding's code, or list all codes.
    Explain(Option<String>),
    /// Talk to an editor.
    Lsp,
    /// Print a help page.
    Help(&'static str),
    /// Print the version.
    Version,
}

/// The commands, as they are typed.
pub const COMMANDS: [&str; 6] = ["check", "sheet", "format", "explain", "lsp", "help"];

/// Reads the command line, without the program's name.
///
/// # Errors
/// What is wrong and what was meant, as one or two lines.
pub fn read(arguments: impl IntoIterator<Item = OsString>) -> Result<Command, String> {
    let mut parser = lexopt::Parser::from_args(arguments);
    match parser.next().map_err(told)? {
        None => Err(format!("no command\n{}", help::SEE)),
        Some(Arg::Short('h') | Arg::Long("help")) => Ok(Command::Help(help::OVERVIEW)),
        Some(Arg::Short('V') | Arg::Long("version")) => Ok(Command::Version),
        Some(Arg::Value(word)) => {
            let word = word.to_string_lossy().into_owned();
            match word.as_str() {
                "check" => check(parser),
                "sheet" => sheet(parser),
                "format" => format(parser),
                "explain" => explain(parser),
                "lsp" => lsp(parser),
                "help" => topic(parser),
                _ => Err(unknown("command", &word, COMMANDS.iter().copied())),
            }
        }
        Some(option) => Err(unknown_option(&option, &["--help", "--version"])),
    }
}

/// What one command's words may be.
struct Words {
    sources: Vec<OsString>,
    form: Option<String>,
    search: Option<String>,
    check: bool,
    help: bool,
}

/// Collects options and words. `options` are those that the command knows beside `--help`.
fn words(mut parser: lexopt::Parser, options: &[&'static str]) -> Result<Words, String> {
    let mut words = Words { sources: Vec::new(), form: None, search: None, check: false, help: false };
    while let Some(argument) = parser.next().map_err(told)? {
        match argument {
            Arg::Short('h') | Arg::Long("help") => words.help = true,
            Arg::Long("as") if options.contains(&"--as") => {
                let value = parser.value().map_err(|_| "--as needs a form behind it, such as --as json".to_string())?;
                words.form = Some(value.to_string_lossy().into_owned());
            }
            Arg::Long("search") if options.contains(&"--search") => {
                let value = parser.value().map_err(|_| format!("--search needs {} behind it", degrees()))?;
                words.search = Some(value.to_string_lossy().into_owned());
            }
            Arg::Long("stdio") if options.contains(&"--stdio") => {}
            Arg::Long("check") if options.contains(&"--check") => words.check = true,
            Arg::Value(word) => words.sources.push(word),
            option => {
                let mut known = options.to_vec();
                known.push("--help");
                return Err(unknown_option(&option, &known));
            }
        }
    }
    Ok(words)
}

fn check(parser: lexopt::Parser) -> Result<Command, String> {
    let words = words(parser, &["--as"])?;
    if words.help {
        return Ok(Command::Help(help::CHECK));
    }
    let forms = [("text", CheckForm::Text), ("json", CheckForm::Json), ("sarif", CheckForm::Sarif)];
    let form = pick(words.form.as_deref(), &forms)?;
    Ok(Command::Check { sources: sources(words.sources, "check")?, form })
}

fn sheet(parser: lexopt::Parser) -> Result<Command, String> {
    let words = words(parser, &["--as", "--search"])?;
    if words.help {
        return Ok(Command::Help(help::SHEET));
    }
    let forms = [("text", SheetForm::Text), ("json", SheetForm::Json), ("latex", SheetForm::Latex)];
    let form = pick(words.form.as_deref(), &forms)?;
    let search = degree(words.search.as_deref())?;
    let mut sources = sources(words.sources, "sheet")?;
    match (sources.pop(), sources.is_empty()) {
        (Some(source), true) => Ok(Command::Sheet { source, form, search }),
        _ => Err("sheet takes one file at a time".to_string()),
    }
}

fn format(parser: lexopt::Parser) -> Result<Command, String> {
    let words = words(parser, &["--check"])?;
    if words.help {
        return Ok(Command::Help(help::FORMAT));
    }
    Ok(Command::Format { sources: sources(words.sources, "format")?, check: words.check })
}

fn explain(parser: lexopt::Parser) -> Result<Command, String> {
    let words = words(parser, &[])?;
    if words.help {
        return Ok(Command::Help(help::EXPLAIN));
    }
    match words.sources.as_slice() {
        [] => Ok(Command::Explain(None)),
        [code] => Ok(Command::Explain(Some(code.to_string_lossy().into_owned()))),
        _ => Err("explain takes one code at a time".to_string()),
    }
}

fn lsp(parser: lexopt::Parser) -> Result<Command, String> {
    // Clients add `--stdio` by habit; there is no other way to talk.
    let words = words(parser, &["--stdio"])?;
    if words.help {
        return Ok(Command::Help(help::LSP));
    }
    if words.sources.is_empty() { Ok(Command::Lsp) } else { Err("lsp takes no file: an editor opens them".to_string()) }
}

fn topic(parser: lexopt::Parser) -> Result<Command, String> {
    let words = words(parser, &[])?;
    match words.sources.as_slice() {
        [] => Ok(Command::Help(help::OVERVIEW)),
        [word] => {
            let word = word.to_string_lossy();
            help::page(&word).map(Command::Help).ok_or_else(|| unknown("command", &word, COMMANDS.iter().copied()))
        }
        _ => Err("help takes one command at a time".to_string()),
    }
}

fn sources(words: Vec<OsString>, command: &str) -> Result<Vec<Source>, String> {
    if words.is_empty() {
        return Err(format!("{command} needs a file; `-` is standard input\nSee `leastwise help {command}`."));
    }
    if words.iter().filter(|w| *w == "-").count() > 1 {
        return Err("standard input can be read only once".to_string());
    }
    Ok(words.into_iter().map(|w| if w == "-" { Source::Stdin } else { Source::File(w.into()) }).collect())
}

fn pick<T: Copy>(word: Option<&str>, forms: &[(&'static str, T)]) -> Result<T, String> {
    let names = || forms.iter().map(|(n, _)| *n);
    match word {
        None => Ok(forms[0].1),
        Some(word) => forms.iter().find(|(n, _)| *n == word).map(|(_, f)| *f).ok_or_else(|| {
            let list: Vec<&str> = names().collect();
            format!("{}\nForms: {}.", unknown_line("form", word, names()), list.join(", "))
        }),
    }
}

/// `no`, or a degree that may be searched.
fn degree(word: Option<&str>) -> Result<Option<u32>, String> {
    match word {
        None => Ok(Some(DEGREE)),
        Some("no") => Ok(None),
        Some(word) => match word.parse() {
            Ok(n) if n <= MAX_DEGREE => Ok(Some(n)),
            _ => {
                let shown: String = word.chars().take(40).collect();
                Err(format!("--search takes {}, not `{shown}`", degrees()))
            }
        },
    }
}

fn degrees() -> String {
    format!("`no` or a degree from 0 to {MAX_DEGREE}")
}

fn unknown_line<'k>(what: &str, word: &str, known: impl Iterator<Item = &'k str>) -> String {
    let shown: String = word.chars().take(40).collect();
    match nearest(&shown, known) {
        Some(near) => format!("no {what} `{shown}`; did you mean `{near}`?"),
        None => format!("no {what} `{shown}`"),
    }
}

fn unknown<'k>(what: &str, word: &str, known: impl Iterator<Item = &'k str>) -> String {
    format!("{}\n{}", unknown_line(what, word, known), help::SEE)
}

fn unknown_option(option: &Arg<'_>, known: &[&str]) -> String {
    match option {
        Arg::Long(word) => unknown("option", &format!("--{word}"), known.iter().copied()),
        Arg::Short(letter) => unknown("option", &format!("-{letter}"), std::iter::empty()),
        Arg::Value(word) => unknown("option", &word.to_string_lossy(), known.iter().copied()),
    }
}

/// The argument parser's own complaints, about a value given to an option that takes none.
fn told(error: lexopt::Error) -> String {
    match error {
        lexopt::Error::UnexpectedValue { option, .. } => format!("{option} takes no value"),
        other => other.to_string(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn line(words: &str) -> Result<Command, String> {
        read(words.split_whitespace().map(OsString::from))
    }

    #[track_caller]
    fn check_error(words: &str, message: &str) {
        let error = line(words).expect_err("refused");
        assert_eq!(error.lines().next(), Some(message));
    }

    fn file(name: &str) -> Source {
        Source::File(name.into())
    }

    #[test]
    fn commands_and_their_words() {
        let sources = vec![file("a.least"), Source::Stdin];
        assert_eq!(line("check a.least -"), Ok(Command::Check { sources, form: CheckForm::Text }));
        let sheet = |form| Ok(Command::Sheet { source: file("a"), form, search: Some(2) });
        assert_eq!(line("sheet a --as json"), sheet(SheetForm::Json));
        assert_eq!(line("sheet --as=latex a"), sheet(SheetForm::Latex));
        assert_eq!(line("sheet --as text -- a"), sheet(SheetForm::Text));
        let sheet = |search| Ok(Command::Sheet { source: file("a"), form: SheetForm::Text, search });
        assert_eq!(line("sheet a --search no"), sheet(None));
        assert_eq!(line("sheet --search=4 a"), sheet(Some(4)));
        assert_eq!(line("format --check a"), Ok(Command::Format { sources: vec![file("a")], check: true }));
        assert_eq!(line("explain not-utf8"), Ok(Command::Explain(Some("not-utf8".into()))));
        assert_eq!(line("check -- --as"), Ok(Command::Check { sources: vec![file("--as")], form: CheckForm::Text }));
    }

    #[test]
    fn help_from_everywhere() {
        for words in ["help", "--help", "-h"] {
            assert_eq!(line(words), Ok(Command::Help(help::OVERVIEW)), "{words}");
        }
        for words in ["help sheet", "sheet --help", "sheet a -h"] {
            assert_eq!(line(words), Ok(Command::Help(help::SHEET)), "{words}");
        }
        for command in COMMANDS {
            assert!(help::page(command).is_some(), "{command}");
        }
        assert_eq!(line("--version"), Ok(Command::Version));
        assert_eq!(line("-V"), Ok(Command::Version));
    }

    #[test]
    fn a_slip_gets_a_suggestion() {
        check_error("chek a", "no command `chek`; did you mean `check`?");
        check_error("frobnicate", "no command `frobnicate`");
        check_error("sheet --ass json a", "no option `--ass`; did you mean `--as`?");
        check_error("--verson", "no option `--verson`; did you mean `--version`?");
        check_error("check a --as jsn", "no form `jsn`; did you mean `json`?");
        check_error("check a --as latex", "no form `latex`");
        check_error("help shet", "no command `shet`; did you mean `sheet`?");
        check_error("format -x", "no option `-x`");
        check_error("sheet a --search 5", "--search takes `no` or a degree from 0 to 4, not `5`");
        check_error("sheet a --search", "--search needs `no` or a degree from 0 to 4 behind it");
        check_error("check a --search no", "no option `--search`");
        check_error("format --check=yes a", "--check takes no value");
    }

    #[test]
    fn what_is_missing_is_said() {
        check_error("", "no command");
        check_error("check", "check needs a file; `-` is standard input");
        check_error("sheet a b", "sheet takes one file at a time");
        check_error("check - -", "standard input can be read only once");
        check_error("sheet a --as", "--as needs a form behind it, such as --as json");
    }
}
