//! The codes of all findings, with one line each. The codes are stable: users may name them in their tools.

pub use leastwise_grammar::codes::Code;

macro_rules! codes {
    ($($constant:ident = $name:literal, $explanation:literal;)*) => {
        $(#[doc = $explanation] pub const $constant: &str = $name;)*
        /// The codes that are not of the text alone.
        pub const CODES: &[Code] = &[$(Code { name: $name, explanation: $explanation }),*];
    };
}

codes! {
    // Names.
    UNDECLARED_NAME = "undeclared-name", "a name that is nowhere declared";
    UNDECLARED_INDEX = "undeclared-index", "an index that is nowhere declared";
    DECLARED_TWICE = "declared-twice", "a name that is declared more than once";
    NAMED_TWICE = "named-twice", "two items of one kind with the same name";
    RESERVED_NAME = "reserved-name", "a declaration of a name that the language reserves";
    SHADOWED_EPSILON = "shadowed-epsilon", "a declared ε that a transformation hides";
    LOOK_ALIKE_NAMES = "look-alike-names", "two names that read alike, such as theta and θ";
    CIRCULAR_DEFINITION = "circular-definition", "definitions that need each other";
    UNUSED_NAME = "unused-name", "a name that is declared and never used";
    SYSTEM_PLACE = "system-place", "a `system` item that is not the first, or not the only one";
    // Formulas.
    CALLED_NAME = "called-name", "a coordinate or parameter written like a function: θ(t)";
    FUNCTION_WITHOUT_ARGUMENTS = "function-without-arguments", "a function that is used without its arguments";
    ARGUMENT_COUNT = "argument-count", "a function with the wrong number of arguments";
    FUNCTION_DERIVATIVE = "function-derivative", "a derivative of a function by an argument that it does not have";
    ONLY_IN_CONSERVED = "only-in-conserved", "momentum(q) or energy outside of a claim";
    TWO_VECTORS = "two-vectors", "a product or power of vectors that does not say which product is meant";
    SHAPE_MISMATCH = "shape-mismatch", "numbers, vectors or matrices that do not fit together";
    INDEX_OUT_OF_RANGE = "index-out-of-range", "a member or component that does not exist";
    INDEX_FORM = "index-form", "an index that is not a whole number or an index plus a whole number";
    FREE_INDEX = "free-index", "an index that is not summed over";
    FAMILY_WITHOUT_INDEX = "family-without-index", "a family that is used without an index";
    NO_FAMILY = "no-family", "an index behind something that has no members or components";
    SUM_RANGE = "sum-range", "the range of a sum or index that is not made of whole numbers";
    PRIME_OF_NUMBER = "prime-of-number", "a time derivative of a number";
    PRIME_OF_CONSTANT = "prime-of-constant", "a time derivative of a constant, which is zero";
    DIVISION_BY_ZERO = "division-by-zero", "a value that does not exist, such as x/0";
    UNIT_VECTOR = "unit-vector", "an axis of a turn that is not a unit vector";
    TOO_LARGE = "too-large", "a formula or sum that is too large to be derived";
    READ_FUNCTION_OF_PARAMETER = "read-function-of-parameter", "how `cos Ω t` was read";
    // Items.
    NOT_A_NUMBER = "not-a-number", "a vector where the item needs a number";
    ACCELERATION = "acceleration", "an acceleration in a term, force, constraint or claim";
    NOT_LINEAR = "not-linear", "a constraint or a force's quantity that is not linear in the velocities";
    EMPTY_SUM = "empty-sum", "a sum whose range is empty for some values of an outer index";
    FORCE_TARGET = "force-target", "a force that acts on nothing which moves";
    NOT_A_COORDINATE = "not-a-coordinate", "something other than a coordinate where one is needed";
    TRANSFORMED_TWICE = "transformed-twice", "a coordinate that a transformation names twice";
    ASSUMED_EQUALITY = "assumed-equality", "an assumption with an equals sign";
    CONTRADICTION = "contradiction", "an assumption that cannot hold";
    RUN_VALUE = "run-value", "a value of a run that cannot be used";
    // Quantities and values.
    UNKNOWN_QUANTITY = "unknown-quantity", "a quantity or unit that is not known";
    UNKNOWN_UNIT = "unknown-unit", "a unit that is not known";
    MISSING_UNIT = "missing-unit", "a plain number for a quantity that has a unit";
    UNLIKE_QUANTITIES = "unlike-quantities", "quantities that are added, compared or asked for, and are not alike";
    UNIT_MISMATCH = "unit-mismatch", "a unit that does not belong to the quantity";
    HERTZ = "hertz", "an angular velocity in Hz, which counts turns";
    FAMILY_VALUES = "family-values", "not as many values as members";
    VALUE_NUMBER = "value-number", "a value that is not a number";
    // Files.
    INCLUDE_FILE = "include-file", "an included file that cannot be read";
    INCLUDE_CIRCLE = "include-circle", "a file that includes itself";
    INCLUDE_SIZE = "include-size", "included files that are too many, too large or too deeply nested";
    INCLUDED_ITEM = "included-item", "an item of an included file that is not taken in";
    INCLUDED_FINDING = "included-finding", "something wrong in an included file";
    MORE_FINDINGS = "more-findings", "a file with more findings than are told";
    // Mechanics.
    NOT_CYCLIC = "not-cyclic", "a coordinate claimed cyclic on which a term depends";
    SYMMETRY_BROKEN = "symmetry-broken", "an expected symmetry that a term breaks";
    BROKEN_SYMMETRY_HOLDS = "broken-symmetry-holds", "a symmetry declared broken whose charge is conserved";
    GAUGE_NOT_FOUND = "gauge-not-found", "a symmetry up to a total time derivative of which no closed form was found";
    GAUGE_MULTIVALUED = "gauge-multivalued", "a symmetry whose gauge term, and so its charge, changes when an angle makes a full turn, or on a way around an axis";
    CHARGE_TAKEN = "charge-taken", "a symmetry of the Lagrangian whose charge a force or damping changes";
    NOT_THE_IDENTITY = "not-the-identity", "a transformation that is not the identity at ε = 0";
    TRANSFORMATION_OF_VELOCITIES = "transformation-of-velocities", "a transformation whose image contains velocities";
    NO_COORDINATE = "no-coordinate", "a transformation of something that is neither a coordinate nor the time";
    SINGLE_MEMBER = "single-member", "a transformation of one member of a large family";
    NOT_CONSERVED = "not-conserved", "a claimed constant that is none";
    UNDECIDED = "undecided", "a claim about which nothing could be proved";
    SINGULAR_MASS_MATRIX = "singular-mass-matrix", "a mass matrix that is singular everywhere";
    MASS_MATRIX_NOT_POSITIVE = "mass-matrix-not-positive", "a mass matrix that is not positive definite";
    EXPLICIT_TIME = "explicit-time", "explicit time dependence that ends the conservation of the energy function";
    NOT_PERIODIC = "not-periodic", "a potential that is not 2π-periodic in an angle";
    IDLE_TERM = "idle-term", "a part of the Lagrangian that changes no equation of motion";
    UNDEFINED_EVERYWHERE = "undefined-everywhere", "a denominator that is zero at every point";
}

/// All codes: of the text, of names and formulas, of the mechanics.
pub fn all() -> impl Iterator<Item = &'static Code> {
    leastwise_grammar::codes::CODES.iter().chain(CODES)
}

/// The explanation of a code.
pub fn explanation(name: &str) -> Option<&'static str> {
    all().find(|c| c.name == name).map(|c| c.explanation)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn codes_are_kebab_case_and_stand_once() {
        let mut seen = std::collections::HashSet::new();
        for code in all() {
            assert!(code.name.chars().all(|c| c.is_ascii_lowercase() || c == '-'), "{}", code.name);
            assert!(seen.insert(code.name), "{} stands twice", code.name);
        }
        assert_eq!(
            explanation("two-vectors"),
            Some(CODES.iter().find(|c| c.name == "two-vectors").unwrap().explanation)
        );
    }

    #[test]
    fn the_codes_of_the_mechanics_are_in_the_table() {
        let source = [
            include_str!("verdicts/mod.rs"),
            include_str!("verdicts/claims.rs"),
            include_str!("verdicts/coordinates.rs"),
            include_str!("verdicts/system.rs"),
        ]
        .concat();
        let kebab = |t: &&str| t.contains('-') && t.chars().all(|c| c.is_ascii_lowercase() || c == '-');
        let found: Vec<&str> = source.split('"').skip(1).step_by(2).filter(kebab).collect();
        assert!(found.len() > 10);
        for code in found {
            assert!(explanation(code).is_some(), "{code} is not in the table");
        }
    }
}
