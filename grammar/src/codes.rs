//! The codes of all slips, with one line each. The codes are stable: users may name them in their tools.

/// A code and what it stands for.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Code {
    /// Kebab-case.
    pub name: &'static str,
    /// One line.
    pub explanation: &'static str,
}

macro_rules! codes {
    ($($constant:ident = $name:literal, $explanation:literal;)*) => {
        $(#[doc = $explanation] pub const $constant: &str = $name;)*
        /// All codes of slips.
        pub const CODES: &[Code] = &[$(Code { name: $name, explanation: $explanation }),*];
    };
}

codes! {
    NO_KEYWORD = "no-keyword", "a line in the first column that begins with no keyword";
    UNKNOWN_KEYWORD = "unknown-keyword", "a misspelt keyword";
    INDENTED_KEYWORD = "indented-keyword", "an item that does not begin in the first column";
    UNKNOWN_CHARACTER = "unknown-character", "a character that the language does not use";
    UNTERMINATED_TEXT = "unterminated-text", "a file name whose closing quote is missing";
    NUMBER_FORM = "number-form", "a number with no digit before or behind its decimal point";
    NUMBER_SIZE = "number-size", "a number with too many digits or too large an exponent";
    DECIMAL_COMMA = "decimal-comma", "a decimal comma in place of a decimal point";
    WRONG_SIGN = "wrong-sign", "a sign of another language, such as `==`, `**`, `;`";
    UNBALANCED_BRACKET = "unbalanced-bracket", "a bracket or bar without its partner";
    NESTED_BARS = "nested-bars", "bars inside bars";
    NESTING = "nesting", "nesting beyond 256 levels";
    MISSING_OPERAND = "missing-operand", "an operator or bracket with nothing on one side";
    MISSING_OPERATOR = "missing-operator", "a line that goes on without an operator";
    MISSING_EQUALS = "missing-equals", "an item without the `=` before its formula";
    MISSING_NAME = "missing-name", "an item without the name that it needs";
    MISSING_PART = "missing-part", "an item that ends too early";
    MISSING_SEPARATOR = "missing-separator", "two parts without the comma or colon between them";
    UNEXPECTED = "unexpected", "something that cannot stand at its place";
    FUNCTION_ARGUMENT = "function-argument", "an argument that needs parentheses: `sin 2θ`";
    FUNCTION_POWER = "function-power", "a power behind an argument without parentheses: `sin θ²`";
    INVERSE_OR_RECIPROCAL = "inverse-or-reciprocal", "`sin⁻¹`, which may mean `asin` or `1/sin`";
    DOTTED_FUNCTION = "dotted-function", "Newton's dot on a function, which may mean two derivatives";
    DERIVATIVE_MARK = "derivative-mark", "a derivative mark of a function that cannot be read";
    PRIME_ON_POWER = "prime-on-power", "a prime behind a power or number";
    DECLARED_DERIVATIVE = "declared-derivative", "a declaration of a derivative, such as `ẋ`";
    HEAD_NAME = "head-name", "a head that is not one name";
    QUOTIENT_UNIT = "quotient-unit", "a unit with more than one factor behind `/`";
    VALUE_FORM = "value-form", "a value that is not arithmetic of numbers and then one unit";
    TRANSFORMATION_SOURCE = "transformation-source", "a left side of `->` that is not a coordinate or the time";
    TRANSFORMATION_COUNT = "transformation-count", "not as many images as coordinates in a transformation";
    UNIT_IN_FORMULA = "unit-in-formula", "a unit sign in a formula";
    SYSTEM_OPTION = "system-option", "an option of the system that is not known";
    CLAUSE_TWICE = "clause-twice", "a clause of a run that stands twice";
    READ_QUOTIENT = "read-quotient", "how `a/b c` was read";
    READ_FUNCTION = "read-function", "how `cos θ/2` was read";
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn codes_are_kebab_case_and_stand_once() {
        let mut seen = std::collections::HashSet::new();
        for code in CODES {
            assert!(code.name.chars().all(|c| c.is_ascii_lowercase() || c == '-'), "{}", code.name);
            assert!(seen.insert(code.name), "{} stands twice", code.name);
        }
    }
}
