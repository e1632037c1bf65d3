//! The words of the language: keywords, functions, constants.

/// What a word is for.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum KeywordRole {
    /// Begins an item, in the first column.
    Item,
    /// Stands before another keyword in the first column.
    Modifier,
    /// Has a meaning inside an item only.
    Clause,
    /// A function of the language.
    Function,
    /// A reserved or built-in name.
    Constant,
}

/// A word of the language with its explanation.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Keyword {
    /// The word.
    pub name: &'static str,
    /// What it is for.
    pub role: KeywordRole,
    /// What may follow it.
    pub follows: &'static str,
    /// One line.
    pub explanation: &'static str,
}

const fn word(role: KeywordRole, name: &'static str, follows: &'static str, explanation: &'static str) -> Keyword {
    Keyword { name, role, follows, explanation }
}

use KeywordRole::{Clause, Constant, Function, Item, Modifier};

/// Every word of the language; editors' grammars are made from this table.
pub fn keywords() -> &'static [Keyword] {
    KEYWORDS
}

const KEYWORDS: &[Keyword] = &[
    word(Item, "system", "NAME, dimensionless | NAME, with NAME = 1", "names the model; once, first"),
    word(Item, "coordinate", "NAME, …: QUANTITY", "generalised coordinates with their quantity"),
    word(Item, "parameter", "NAME: QUANTITY = VALUE, …", "constants, with quantity and value"),
    word(Item, "input", "NAME, …: QUANTITY", "a signal from outside, an unspecified function of time"),
    word(Item, "index", "NAME: LOWER..UPPER", "an index of families and its range"),
    word(Item, "let", "NAME = FORMULA | NAME(x, …) = FORMULA | NAME[i] = FORMULA", "a definition"),
    word(Item, "function", "NAME(x, …): QUANTITY", "an unspecified smooth function"),
    word(Item, "assume", "FORMULA > FORMULA, …", "what simplification, verdicts and lints may use"),
    word(Item, "kinetic", "NAME = FORMULA", "a term of the kinetic energy, counted with + in the Lagrangian"),
    word(Item, "potential", "NAME = FORMULA", "a term of the potential energy, counted with − in the Lagrangian"),
    word(Item, "lagrangian", "NAME = FORMULA", "any other term, counted with + in the Lagrangian"),
    word(Item, "dissipation", "NAME = FORMULA", "a Rayleigh dissipation function"),
    word(Item, "force", "NAME on FORMULA = FORMULA", "an applied force on a coordinate or quantity"),
    word(Item, "constraint", "NAME: FORMULA = FORMULA", "a constraint, holonomic or linear in the velocities"),
    word(Item, "symmetry", "NAME: x -> FORMULA, …", "an expected one-parameter family of transformations"),
    word(Item, "conserved", "NAME = FORMULA", "a claimed constant of the motion"),
    word(Item, "run", "NAME: from x = VALUE, …, over VALUE", "an initial-value run"),
    word(
        Item,
        "include",
        "\"FILE.least\"",
        "takes in another file's parameters, definitions, functions, indices, assumptions",
    ),
    word(Modifier, "cyclic", "coordinate", "claims that no term depends on the coordinate"),
    word(Modifier, "broken", "symmetry", "known not to give a constant of the motion"),
    word(Clause, "dimensionless", "", "switches quantities off, behind the system's name"),
    word(Clause, "with", "NAME = …", "constants set to one (system), formulas of inputs and functions (run)"),
    word(Clause, "on", "FORMULA", "what a force acts on"),
    word(Clause, "from", "NAME = VALUE, …", "initial values of a run"),
    word(Clause, "over", "VALUE", "the time span of a run"),
    word(Clause, "until", "FORMULA < FORMULA", "a condition that ends a run"),
    word(Clause, "in", "LOWER..UPPER", "the range of a sum's index"),
    word(Function, "sin", "(x)", "sine"),
    word(Function, "cos", "(x)", "cosine"),
    word(Function, "tan", "(x)", "tangent"),
    word(Function, "asin", "(x)", "inverse sine"),
    word(Function, "acos", "(x)", "inverse cosine"),
    word(Function, "atan", "(x)", "inverse tangent"),
    word(Function, "atan2", "(y, x)", "angle of the point (x, y)"),
    word(Function, "sinh", "(x)", "hyperbolic sine"),
    word(Function, "cosh", "(x)", "hyperbolic cosine"),
    word(Function, "tanh", "(x)", "hyperbolic tangent"),
    word(Function, "exp", "(x)", "exponential"),
    word(Function, "log", "(x)", "natural logarithm"),
    word(Function, "sqrt", "(x)", "square root, also √"),
    word(Function, "abs", "(x)", "absolute value"),
    word(Function, "sign", "(x)", "sign"),
    word(Function, "min", "(x, y, …)", "least value"),
    word(Function, "max", "(x, y, …)", "greatest value"),
    word(Function, "norm", "(P)", "length of a vector, also |P|"),
    word(Function, "dot", "(P, Q)", "dot product, also P·Q"),
    word(Function, "cross", "(P, Q)", "cross product, also P×Q"),
    word(Function, "transpose", "(R)", "transposed matrix"),
    word(Function, "diag", "(A, B, C)", "diagonal matrix"),
    word(Function, "turn", "(n, α)", "rotation matrix by the angle α about the unit vector n"),
    word(Function, "spin", "(R)", "angular velocity of the rotation R(t) in the body's axes"),
    word(Function, "momentum", "(q)", "generalised momentum of a coordinate, in conserved"),
    word(Function, "sum", "(i: …) | (i in 1..7: …)", "sum over an index"),
    word(Constant, "t", "", "time"),
    word(Constant, "π", "", "the number π, also pi"),
    word(Constant, "ε", "", "the parameter of a transformation, also eps"),
    word(Constant, "ex", "", "the unit vector (1, 0, 0)"),
    word(Constant, "ey", "", "the unit vector (0, 1, 0)"),
    word(Constant, "ez", "", "the unit vector (0, 0, 1)"),
    word(Constant, "energy", "", "the energy function, in conserved"),
];

/// Whether a function of the language takes one argument, and so may stand before a single name without parentheses.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Arity {
    /// One argument.
    One,
    /// Two or more.
    Several,
}

/// The language's own function of this name. `sum` is not among them: it has a syntax of its own.
pub fn builtin(name: &str) -> Option<Arity> {
    match name {
        "sin" | "cos" | "tan" | "asin" | "acos" | "atan" | "sinh" | "cosh" | "tanh" | "exp" | "log" | "sqrt"
        | "abs" | "sign" | "norm" | "transpose" | "spin" | "momentum" => Some(Arity::One),
        "atan2" | "min" | "max" | "dot" | "cross" | "diag" | "turn" => Some(Arity::Several),
        _ => None,
    }
}

/// Whether an item begins with this word, modifiers included.
pub fn begins_item(word: &str) -> bool {
    KEYWORDS.iter().any(|k| k.name == word && matches!(k.role, Item | Modifier))
}

/// The item keyword or modifier that was probably meant.
pub fn near_keyword(word: &str) -> Option<&'static str> {
    nearest(word, KEYWORDS.iter().filter(|k| matches!(k.role, Item | Modifier)).map(|k| k.name))
}

/// The one of `known` that was probably meant: a slip of one letter in short words, of two in longer ones.
pub fn nearest<'k>(word: &str, known: impl Iterator<Item = &'k str>) -> Option<&'k str> {
    let word = Letters::of(word)?;
    let allowed = if word.length <= 4 { 1 } else { 2 };
    known
        .filter_map(|k| Some((word.distance(&Letters::of(k)?, allowed)?, k)))
        .min_by_key(|(far, _)| *far)
        .map(|(_, k)| k)
}

/// No longer word is taken for a slip of another.
const LONGEST: usize = 40;

/// A short word, without regard to case.
struct Letters {
    letters: [char; LONGEST],
    length: usize,
}

impl Letters {
    fn of(word: &str) -> Option<Letters> {
        let (mut letters, mut length) = (['\0'; LONGEST], 0);
        for c in word.chars() {
            *letters.get_mut(length)? = c.to_ascii_lowercase();
            length += 1;
        }
        Some(Letters { letters, length })
    }

    /// Insertions, deletions, substitutions and swaps of neighbours, if they are no more than allowed.
    fn distance(&self, other: &Letters, allowed: usize) -> Option<usize> {
        if self.length.abs_diff(other.length) > allowed {
            return None;
        }
        let mut rows = [[0_usize; LONGEST + 1]; 3];
        for (j, cell) in rows[1].iter_mut().enumerate() {
            *cell = j;
        }
        for i in 1..=self.length {
            let [before, last, row] = &mut rows;
            row[0] = i;
            let mut least = i;
            for j in 1..=other.length {
                let differs = |i: usize, j: usize| usize::from(self.letters[i - 1] != other.letters[j - 1]);
                let mut best = (last[j] + 1).min(row[j - 1] + 1).min(last[j - 1] + differs(i, j));
                if i > 1 && j > 1 && differs(i, j - 1) == 0 && differs(i - 1, j) == 0 {
                    best = best.min(before[j - 2] + 1);
                }
                row[j] = best;
                least = least.min(best);
            }
            // A later cell is at least as large as the least of two rows, less one for a swap.
            if least > allowed + 1 {
                return None;
            }
            rows.rotate_left(1);
        }
        Some(rows[1][other.length]).filter(|far| *far <= allowed)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn near_misses_are_understood() {
        assert_eq!(near_keyword("potental"), Some("potential"));
        assert_eq!(near_keyword("Kinetic"), Some("kinetic"));
        assert_eq!(near_keyword("paramter"), Some("parameter"));
        assert_eq!(near_keyword("lte"), Some("let"));
        assert_eq!(near_keyword("mass"), None);
        assert_eq!(near_keyword("x"), None);
        assert_eq!(near_keyword(&"kinetic".repeat(9)), None);
        assert_eq!(near_keyword("kínetic"), Some("kinetic"));
    }

    #[test]
    fn every_builtin_function_is_in_the_table() {
        for keyword in keywords().iter().filter(|k| k.role == Function && k.name != "sum") {
            assert!(builtin(keyword.name).is_some(), "{}", keyword.name);
        }
    }
}
