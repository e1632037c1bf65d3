//! The help pages, written by hand.

/// The line that ends a complaint about the command line.
pub const SEE: &str = "See `leastwise help`.";

/// `leastwise help`.
pub const OVERVIEW: &str = "\
leastwise: Lagrangian mechanics from a model file, derived exactly

  leastwise check FILES…      what is wrong or worth knowing, with the place in the file
  leastwise sheet FILE        everything derived: equations, momenta, energy, symmetries
  leastwise format FILES…     lay models out in the one usual way
  leastwise explain [CODE]    what a finding's code stands for
  leastwise lsp               the language server, for editors
  leastwise help [COMMAND]    this page, or one about a command
  leastwise --version         the version

A model is a plain text file, NAME.least; `-` stands for standard input. A small one:

  coordinate θ: angle
  parameter m: mass = 2 kg, l: length = 1 m, g: acceleration = 9.81 m/s^2
  kinetic   bob    = 1/2 m l^2 θ'^2
  potential weight = -m g l cos θ

Exit status: 0 all is well, 1 something was found, 2 it could not run.
Colours are used on a terminal only, and not where NO_COLOR is set.
";

/// `leastwise help check`.
pub const CHECK: &str = "\
leastwise check FILES… [--as text|json|sarif]

Checks models and prints what was found, each with its place and what to do about it: slips of
spelling, unknown names, claims that do not hold and the term that breaks them, a mass matrix that
is singular.

  --as text    for people (the usual form)
  --as json    one object: files, their findings with code, severity, message, range (lines from
               zero, columns in UTF-16 units), help, related places and fixes
  --as sarif   SARIF 2.1.0, for services that collect findings

Exit status: 0 nothing worse than information, 1 a warning or an error, 2 a file could not be read.
A code in brackets, such as [not-cyclic], is explained by `leastwise explain CODE`.
";

/// `leastwise help sheet`.
pub const SHEET: &str = "\
leastwise sheet FILE [--as text|json|latex] [--search no|0…4]

Prints all that follows from a model: the Lagrangian and its terms, equations of motion, momenta,
mass matrix, energy, each symmetry with its charge and balance law, constants of the motion, and
those that nobody claimed.

  --as text    set for a terminal, to its width; 100 columns elsewhere (the usual form)
  --as json    for programs; each formula as text, plain and latex
  --as latex   a complete article; needs amsmath
  --search 3   looks for symmetries up to this degree in t and the coordinates, 0 to 4 (2), and for
               integrals quadratic in the velocities
  --search no  looks for nothing

An equation of motion is printed as zero; with constraints the reactions stand on its right side.

Exit status: 0 printed, 1 printed, but the model has errors and the sheet may lack parts,
2 the file could not be read.
";

/// `leastwise help format`.
pub const FORMAT: &str = "\
leastwise format FILES… [--check]

Lays models out in the one usual way and writes them back in place. Comments and the order of items
stay; an item that cannot be read stays as it was typed. `-` reads standard input and writes the
result to standard output.

  --check      change nothing, name the files that would change

Exit status: 0 done (with --check: nothing would change), 1 with --check: something would change,
2 a file could not be read or written.
";

/// `leastwise help explain`.
pub const EXPLAIN: &str = "\
leastwise explain [CODE]

Explains the code of a finding, such as the one in brackets in `warning[not-cyclic]`, with an
example and what to do about it. Without a code, lists all of them.

Exit status: 0 explained, 2 there is no such code.
";

/// `leastwise help lsp`.
pub const LSP: &str = "\
leastwise lsp

Talks the Language Server Protocol over standard input and output; an editor starts it. In an open
model it shows equations, momenta, verdicts and slips as hovers, hints and diagnostics while the
model is typed.

Settings, by initialisation options or by workspace/configuration (section `leastwise`):
  hints.momentum, hints.claims, hints.summary,
  hints.search                                   true or false: the kinds of hints
  hints.maxLength                                longer hints are cut, 10 to 400 (60)
  hover.maxLines                                 longer hovers are cut, 5 to 1000 (40)
  search.run                                     true or false: look for unclaimed constants
  search.degree                                  of the symmetries that are looked for, 0 to 4 (2)
  diagnostics.readings                           true or false: hints on how a formula was read
  diagnostics.max                                findings that are shown, 1 to 10000 (200)

Exit status: 0 after `shutdown` and `exit`, else 1.
";

/// `leastwise help help`.
pub const HELP: &str = "\
leastwise help [COMMAND]

Prints the overview, or the page of a command.
";

/// The page of a command.
pub fn page(command: &str) -> Option<&'static str> {
    Some(match command {
        "check" => CHECK,
        "sheet" => SHEET,
        "format" => FORMAT,
        "explain" => EXPLAIN,
        "lsp" => LSP,
        "help" => HELP,
        _ => return None,
    })
}
