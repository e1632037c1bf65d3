//! A page for each code: a text that has it, and what mends it.

/// What is told of a code beside its explanation.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Page {
    /// A model with such a finding; empty where none is short enough.
    pub example: &'static str,
    /// A mend that editors offer, and the model after it.
    pub mended: Option<(&'static str, &'static str)>,
    /// What to do, where only the writer can do it.
    pub advice: &'static str,
}

/// The page of a code.
pub fn page(code: &str) -> Option<Page> {
    let mended = MENDED.iter().find(|m| m.0 == code);
    let told = WITHOUT.iter().find(|m| m.0 == code);
    match (mended, told) {
        (Some(m), _) => Some(Page { example: m.1, mended: Some((m.2, m.3)), advice: "" }),
        (None, Some(w)) => Some(Page { example: w.2, mended: None, advice: w.3 }),
        (None, None) => None,
    }
}

/// A code, a text with it, the title of a mend, and the text after the mend.
pub(crate) const MENDED: &[(&str, &str, &str, &str)] = &[
    // Of the text.
    ("no-keyword", "coordinate x\nx = 1\nkinetic x'^2\n", "Make it a comment", "coordinate x\n# x = 1\nkinetic x'^2\n"),
    (
        "no-keyword",
        "kinetic T = x'^2\n+ x\ncoordinate x\n",
        "Indent the line",
        "kinetic T = x'^2\n    + x\ncoordinate x\n",
    ),
    ("unknown-keyword", "coordinate x\nkinetc x'^2\n", "Write kinetic", "coordinate x\nkinetic x'^2\n"),
    (
        "unknown-keyword",
        "cyclic cordinate x\nkinetic x'^2\n",
        "Write coordinate",
        "cyclic coordinate x\nkinetic x'^2\n",
    ),
    (
        "indented-keyword",
        "coordinate x\n  kinetic x'^2\n",
        "Move it to the first column",
        "coordinate x\nkinetic x'^2\n",
    ),
    ("unknown-character", "coordinate x\nkinetic x’^2\n", "Write '", "coordinate x\nkinetic x'^2\n"),
    ("unknown-character", "coordinate x\nkinetic x'^2 $\n", "Take it away", "coordinate x\nkinetic x'^2 \n"),
    ("unterminated-text", "include \"a.least\ncoordinate x\n", "Add the quote", "include \"a.least\"\ncoordinate x\n"),
    ("number-form", "coordinate x\nkinetic .5 x'^2\n", "Write 0.5", "coordinate x\nkinetic 0.5 x'^2\n"),
    ("number-form", "coordinate x\nkinetic 5. x'^2\n", "Write 5", "coordinate x\nkinetic 5 x'^2\n"),
    ("decimal-comma", "coordinate x\nkinetic 0,5 x'^2\n", "Write 0.5", "coordinate x\nkinetic 0.5 x'^2\n"),
    ("wrong-sign", "coordinate x\nkinetic x'**2\n", "Write ^", "coordinate x\nkinetic x'^2\n"),
    ("wrong-sign", "coordinate x\nkinetic {x}'^2\n", "Write ( and )", "coordinate x\nkinetic (x)'^2\n"),
    ("unbalanced-bracket", "coordinate x\nkinetic (x'^2\n", "Close it with )", "coordinate x\nkinetic (x'^2)\n"),
    ("unbalanced-bracket", "coordinate x\nkinetic x'^2)\n", "Take it away", "coordinate x\nkinetic x'^2\n"),
    ("missing-operand", "coordinate x\nkinetic x'^2 +\n", "Take `+` away", "coordinate x\nkinetic x'^2 \n"),
    (
        "missing-operator",
        "coordinate x\nkinetic x'^2\n    x^2\n",
        "Put in `+`",
        "coordinate x\nkinetic x'^2\n    + x^2\n",
    ),
    ("missing-equals", "coordinate x\nkinetic bob 1/2 x'^2\n", "Put in `=`", "coordinate x\nkinetic bob = 1/2 x'^2\n"),
    ("missing-part", "cyclic x\nkinetic x'^2\n", "Write cyclic coordinate", "cyclic coordinate x\nkinetic x'^2\n"),
    (
        "missing-separator",
        "coordinate x y\nkinetic x'^2 + y'^2\n",
        "Put in `,`",
        "coordinate x, y\nkinetic x'^2 + y'^2\n",
    ),
    (
        "unexpected",
        "coordinate x: length, θ: angle\nkinetic x'^2 + θ'^2\n",
        "Begin another item",
        "coordinate x: length\ncoordinate θ: angle\nkinetic x'^2 + θ'^2\n",
    ),
    (
        "function-argument",
        "coordinate x\nkinetic T = x'^2 sin 2x\n",
        "Write sin(2x)",
        "coordinate x\nkinetic T = x'^2 sin(2x)\n",
    ),
    (
        "function-power",
        "coordinate x\nkinetic T = x'^2 sin x²\n",
        "Write sin(x)²",
        "coordinate x\nkinetic T = x'^2 sin(x)²\n",
    ),
    (
        "inverse-or-reciprocal",
        "coordinate x\nkinetic T = x'^2 sin⁻¹ x\n",
        "Write asin",
        "coordinate x\nkinetic T = x'^2 asin x\n",
    ),
    (
        "dotted-function",
        "coordinate x\nfunction U(s)\nkinetic x'^2\nlagrangian U̇((x)) x\n",
        "Write U'(…), by its argument",
        "coordinate x\nfunction U(s)\nkinetic x'^2\nlagrangian U'((x)) x\n",
    ),
    (
        "dotted-function",
        "coordinate x\nfunction U(s)\nkinetic x'^2\nlagrangian U̇((x)) x\n",
        "Write U(…)', by the time",
        "coordinate x\nfunction U(s)\nkinetic x'^2\nlagrangian U((x))' x\n",
    ),
    ("prime-on-power", "coordinate x\nkinetic x^2'\n", "Write (x^2)'", "coordinate x\nkinetic (x^2)'\n"),
    ("declared-derivative", "coordinate ẋ\nkinetic x'^2\n", "Declare x", "coordinate x\nkinetic x'^2\n"),
    ("head-name", "coordinate x\nkinetic my bob = x'^2\n", "Write my_bob", "coordinate x\nkinetic my_bob = x'^2\n"),
    ("quotient-unit", "parameter c = 1 N/m s\n", "Write N/(m s)", "parameter c = 1 N/(m s)\n"),
    ("value-form", "parameter k\nparameter K = k/2\n", "Make it a definition with `let`", "parameter k\nlet K = k/2\n"),
    ("value-form", "parameter K = 2 3 m\n", "Put in `*`", "parameter K = 2 * 3 m\n"),
    (
        "unit-in-formula",
        "coordinate x\nkinetic x'^2 cos(60°)\n",
        "Write (60 π/180)",
        "coordinate x\nkinetic x'^2 cos((60 π/180))\n",
    ),
    (
        "unit-in-formula",
        "coordinate m\nparameter s\nlet g = 9.81 m/s^2\nkinetic m'^2 g\n",
        "Make it a parameter with this value",
        "coordinate m\nparameter s\nparameter g = 9.81 m/s^2\nkinetic m'^2 g\n",
    ),
    (
        "system-option",
        "system s, dimensionles\ncoordinate x\nkinetic x'^2\n",
        "Write dimensionless",
        "system s, dimensionless\ncoordinate x\nkinetic x'^2\n",
    ),
    (
        "read-quotient",
        "coordinate x\nparameter a, b\nkinetic a/b x'^2\n",
        "Write (a/b) x'^2",
        "coordinate x\nparameter a, b\nkinetic (a/b) x'^2\n",
    ),
    (
        "read-function",
        "coordinate θ\nkinetic T = θ'^2 + cos θ/2\n",
        "Write cos(θ/2)",
        "coordinate θ\nkinetic T = θ'^2 + cos(θ/2)\n",
    ),
    // Names.
    (
        "undeclared-name",
        "coordinate x\nkinetic m x'^2\n",
        "Declare `parameter m`",
        "coordinate x\nparameter m\nkinetic m x'^2\n",
    ),
    (
        "undeclared-name",
        "parameter mass1\nkinetic mas1 x'^2\ncoordinate x\n",
        "Write mass1",
        "parameter mass1\nkinetic mass1 x'^2\ncoordinate x\n",
    ),
    (
        "undeclared-name",
        "coordinate x\nlet g = 9.81 m/s^2\nkinetic g x'^2\n",
        "Make it a parameter with this value",
        "coordinate x\nparameter g = 9.81 m/s^2\nkinetic g x'^2\n",
    ),
    ("undeclared-index", "coordinate x[i]\n", "Declare `index i: 1..3`", "index i: 1..3\ncoordinate x[i]\n"),
    (
        "declared-twice",
        "coordinate x\nparameter k, x\nkinetic k x'^2\n",
        "Remove this declaration",
        "coordinate x\nparameter k\nkinetic k x'^2\n",
    ),
    (
        "named-twice",
        "coordinate x\nkinetic T = x'^2\npotential T = x\n",
        "Call it T_2",
        "coordinate x\nkinetic T = x'^2\npotential T_2 = x\n",
    ),
    (
        "idle-term",
        "coordinate x\nparameter m, b\nkinetic 1/2 m x'^2 + b x x'\n",
        "Remove it: the equations of motion stay the same",
        "coordinate x\nparameter m, b\nkinetic 1/2 m x'^2\n",
    ),
    (
        "idle-term",
        "coordinate x\nparameter m, g, h\nkinetic 1/2 m x'^2\n# The height of the table.\npotential table = m g h\npotential weight = m g x\n",
        "Remove it: the equations of motion stay the same",
        "coordinate x\nparameter m, g, h\nkinetic 1/2 m x'^2\npotential weight = m g x\n",
    ),
    ("unused-name", "parameter m\ncoordinate x\nkinetic x'^2\n", "Remove `m`", "coordinate x\nkinetic x'^2\n"),
    (
        "system-place",
        "# A swing.\ncoordinate x\nsystem swing  # of mine\nkinetic x'^2\n",
        "Move it to the top",
        "system swing  # of mine\n# A swing.\ncoordinate x\nkinetic x'^2\n",
    ),
    (
        "system-place",
        "system a\ncoordinate x\nsystem b\nkinetic x'^2\n",
        "Remove this one",
        "system a\ncoordinate x\nkinetic x'^2\n",
    ),
    // Formulas.
    ("called-name", "coordinate θ\nkinetic θ'^2 + θ(t)\n", "Write θ alone", "coordinate θ\nkinetic θ'^2 + θ\n"),
    (
        "called-name",
        "coordinate θ\nparameter k\nkinetic θ'^2 + k(t)\n",
        "Write the product k t",
        "coordinate θ\nparameter k\nkinetic θ'^2 + k t\n",
    ),
    (
        "called-name",
        "coordinate θ\nkinetic θ'^2 + θ(2)\n",
        "Write the product with `·`",
        "coordinate θ\nkinetic θ'^2 + θ·(2)\n",
    ),
    (
        "two-vectors",
        "coordinate x, y\nlet P = (x, y)\nkinetic P' P'\n",
        "Write the dot product `·`",
        "coordinate x, y\nlet P = (x, y)\nkinetic P'·P'\n",
    ),
    (
        "two-vectors",
        "coordinate x, y\nlet P = (x, y)\nkinetic P'^2\n",
        "Write |…|²",
        "coordinate x, y\nlet P = (x, y)\nkinetic |P'|^2\n",
    ),
    (
        "two-vectors",
        "coordinate x, y\nlet P = (x, y)\nkinetic P'²\n",
        "Write P'·P'",
        "coordinate x, y\nlet P = (x, y)\nkinetic P'·P'\n",
    ),
    (
        "free-index",
        "index i: 1..3\ncoordinate x[i]\nkinetic T = 3 + 1/2 x'[i]^2 - 1\n",
        "Sum over i",
        "index i: 1..3\ncoordinate x[i]\nkinetic T = 3 + sum(i: 1/2 x'[i]^2) - 1\n",
    ),
    (
        "family-without-index",
        "index i: 1..3\ncoordinate x[i]\nkinetic sum(j in 1..3: x'^2)\n",
        "Write x[j]",
        "index i: 1..3\ncoordinate x[i]\nkinetic sum(j in 1..3: x[j]'^2)\n",
    ),
    (
        "no-family",
        "coordinate x\nparameter m\nkinetic m[2] x'^2\n",
        "Leave out the index",
        "coordinate x\nparameter m\nkinetic m x'^2\n",
    ),
    (
        "sum-range",
        "index i: 3..1\ncoordinate x[i]\nkinetic sum(i: x'[i]^2)\n",
        "Write 1..3",
        "index i: 1..3\ncoordinate x[i]\nkinetic sum(i: x'[i]^2)\n",
    ),
    (
        "prime-of-constant",
        "coordinate x\nparameter m\nkinetic x'^2 + m'\n",
        "Write m without its prime",
        "coordinate x\nparameter m\nkinetic x'^2 + m\n",
    ),
    (
        "unit-vector",
        "coordinate α\nlet n = (1, 1, 0)\nlet R = turn(n, α)\nkinetic |spin(R)|^2\n",
        "Write n/|n|",
        "coordinate α\nlet n = (1, 1, 0)\nlet R = turn(n/|n|, α)\nkinetic |spin(R)|^2\n",
    ),
    (
        "not-a-number",
        "coordinate x, y\nkinetic abs((x', y'))^2\n",
        "Write norm for the length",
        "coordinate x, y\nkinetic norm((x', y'))^2\n",
    ),
    (
        "read-function-of-parameter",
        "coordinate x\nparameter Ω\nkinetic T = x'^2 + cos Ω t\n",
        "Put both into the argument",
        "coordinate x\nparameter Ω\nkinetic T = x'^2 + cos(Ω t)\n",
    ),
    // Quantities.
    (
        "unknown-quantity",
        "coordinate x: lenght\nkinetic x'^2\n",
        "Write length",
        "coordinate x: length\nkinetic x'^2\n",
    ),
    (
        "unknown-unit",
        "coordinate x\nparameter m = 1 Kg\nkinetic m x'^2\n",
        "Write kg",
        "coordinate x\nparameter m = 1 kg\nkinetic m x'^2\n",
    ),
    (
        "missing-unit",
        "coordinate x\nparameter m: mass = 2\nkinetic m x'^2\n",
        "Write the unit kg",
        "coordinate x\nparameter m: mass = 2 kg\nkinetic m x'^2\n",
    ),
    (
        "missing-unit",
        "coordinate x\nparameter k: N/m = 2\nkinetic k x'^2\n",
        "Write the unit N/m",
        "coordinate x\nparameter k: N/m = 2 N/m\nkinetic k x'^2\n",
    ),
    (
        "missing-unit",
        "coordinate x: length\nkinetic x'^2\nrun a: from x' = 2, over 1 s\n",
        "Write the unit m/s",
        "coordinate x: length\nkinetic x'^2\nrun a: from x' = 2 m/s, over 1 s\n",
    ),
    (
        "hertz",
        "coordinate x\nparameter Ω: angular_velocity = 50 Hz\nkinetic Ω x'^2\n",
        "Write r/s, turns per second",
        "coordinate x\nparameter Ω: angular_velocity = 50 r/s\nkinetic Ω x'^2\n",
    ),
    (
        "include-circle",
        "include \"folder/model.least\"\ncoordinate x\nkinetic x'^2\n",
        "Remove this line",
        "coordinate x\nkinetic x'^2\n",
    ),
    // Mechanics.
    (
        "not-cyclic",
        "cyclic coordinate x\nkinetic x'^2\npotential x\n",
        "Take `cyclic` away: the claim is dropped",
        "coordinate x\nkinetic x'^2\npotential x\n",
    ),
    (
        "symmetry-broken",
        "coordinate x\nkinetic x'^2\npotential x^2\nsymmetry s: x -> x + ε\n",
        "Declare `s` broken: it is known to give no constant of the motion",
        "coordinate x\nkinetic x'^2\npotential x^2\nbroken symmetry s: x -> x + ε\n",
    ),
    (
        "broken-symmetry-holds",
        "coordinate x\nkinetic x'^2\nbroken  symmetry s: x -> x + ε\n",
        "Take `broken` away",
        "coordinate x\nkinetic x'^2\nsymmetry s: x -> x + ε\n",
    ),
    (
        "not-the-identity",
        "coordinate x\nkinetic x'^2\nsymmetry s: x -> 2 ε\n",
        "Write x -> x + 2 ε",
        "coordinate x\nkinetic x'^2\nsymmetry s: x -> x + 2 ε\n",
    ),
    (
        "not-periodic",
        "coordinate θ: angle\nkinetic θ'^2\npotential θ^2\n",
        "Declare θ as `twist`: it counts its turns",
        "coordinate θ: twist\nkinetic θ'^2\npotential θ^2\n",
    ),
    (
        "not-conserved",
        "coordinate z\nparameter m, g\nkinetic 1/2 m z'^2\npotential m g z\nconserved fall = z' - g t\n",
        "Change the sign of `g t`",
        "coordinate z\nparameter m, g\nkinetic 1/2 m z'^2\npotential m g z\nconserved fall = z' + g t\n",
    ),
];

/// Codes without a mend: why there is none, a text with such a finding, and what to do.
#[rustfmt::skip]
pub(crate) const WITHOUT: &[(&str, &str, &str, &str)] = &[
    ("number-size", "which digits matter is the writer's to say",
        "coordinate x\nkinetic 1e99999 x'^2\n",
        "write fewer digits, or declare a parameter"),
    ("nested-bars", "norm or abs, and which bars belong together, is the writer's to say",
        "coordinate x, y\nkinetic |x' + (|y'|)|^2\n",
        "write `norm(…)` or `abs(…)` for the inner bars"),
    ("nesting", "which part gets a name of its own is the writer's to say",
        "",
        "give a part of the formula a name of its own with `let`"),
    ("missing-name", "only the writer knows the name",
        "coordinate : length\n",
        "write the name that is declared"),
    ("derivative-mark", "by which argument is the writer's to say",
        "coordinate x\nfunction U(s, r)\nkinetic x'^2\npotential U'[x](x, x)\n",
        "say by which argument: `U'[1](x, y)`"),
    ("transformation-source", "which coordinate is transformed is the writer's to say",
        "coordinate x\nkinetic x'^2\nsymmetry s: 2 x -> x + ε\n",
        "write a coordinate, a member of a family, or `t` before the arrow"),
    ("transformation-count", "the missing image is the writer's to say",
        "coordinate x, y\nkinetic x'^2 + y'^2\nsymmetry s: (x, y) -> (x + ε, y, 0)\n",
        "write one image for each coordinate"),
    ("clause-twice", "which of the two is meant is the writer's to say",
        "coordinate x\nkinetic x'^2\nrun a: from x = 1, over 2 s, over 3 s\n",
        "leave one of them out"),
    ("reserved-name", "its uses mean the language's own: another name is the writer's to choose",
        "coordinate t\nkinetic t'^2\n",
        "choose another name"),
    ("shadowed-epsilon", "renaming the declared ε mends it; the name is the writer's to choose",
        "coordinate x\nparameter ε\nkinetic ε x'^2\nsymmetry s: x -> x + ε\n",
        "give the declared one another name"),
    ("look-alike-names", "renaming one of them mends it; the name is the writer's to choose",
        "coordinate theta, θ\nkinetic theta'^2 + θ'^2\n",
        "rename one of them"),
    ("circular-definition", "which of the definitions is wrong is the writer's to say",
        "coordinate x\nlet a = b\nlet b = a\nkinetic a x'^2\n",
        "take one of the definitions out of the circle"),
    ("function-without-arguments", "the argument is the writer's to say",
        "coordinate x\nfunction U(s)\nkinetic x'^2\npotential U\n",
        "write the argument: `U(x)`"),
    ("argument-count", "what is missing or too much is the writer's to say",
        "coordinate x\nfunction U(s)\nkinetic x'^2\npotential U(x, x)\n",
        "give as many arguments as the function has"),
    ("function-derivative", "by which argument is the writer's to say",
        "coordinate x\nfunction U(s)\nkinetic x'^2\npotential U'[2](x)\n",
        "name an argument that the function has"),
    ("only-in-conserved", "the formula that is meant is the writer's to say",
        "coordinate x\nkinetic x'^2\npotential momentum(x)\n",
        "write the formula itself; `energy` and `momentum(q)` stand in claims only"),
    ("shape-mismatch", "which of the two is wrong is the writer's to say",
        "coordinate x, y\nlet P = (x, y) + x\nkinetic x'^2 + y'^2 + P·P\n",
        "add vectors to vectors of the same length"),
    ("index-out-of-range", "the range or the index may be wrong",
        "index i: 1..3\ncoordinate x[i]\nkinetic sum(i: x[i]'^2)\npotential x[4]\n",
        "choose a member that exists, or widen the index"),
    ("index-form", "the index is the writer's to say",
        "index i: 1..3\ncoordinate x[i]\nkinetic sum(i: x[i]'^2)\npotential x[3/2]\n",
        "write a whole number, or an index plus a whole number"),
    ("prime-of-number", "the name that is missing is the writer's to say",
        "coordinate x\nkinetic x'^2 + (2)'\n",
        "take the prime away"),
    ("division-by-zero", "the divisor is the writer's to say",
        "coordinate x\nkinetic x'^2\npotential 1/(x - x)\n",
        "look at the divisor: it is zero for every motion"),
    ("too-large", "what is left out is the writer's to say",
        "",
        "leave something out, or describe it by a family and a sum"),
    ("acceleration", "the term is the writer's to say",
        "coordinate x\nkinetic x''^2\n",
        "a term depends on coordinates, velocities and time only"),
    ("not-linear", "the constraint is the writer's to say",
        "coordinate x, y\nkinetic x'^2 + y'^2\nconstraint x'^2 = y'\n",
        "write constraints of positions, or such that are linear in the velocities"),
    ("empty-sum", "which range is wrong is the writer's to say",
        "index i: 1..100\ncoordinate x[i]\nkinetic sum(i: x[i]'^2)\npotential sum(i: sum(j in i+2..100: x[i] x[j]))\n",
        "begin the outer index later, if the empty sum is not meant to be zero"),
    ("force-target", "what the force acts on is the writer's to say",
        "coordinate x\nparameter k\nkinetic x'^2\nforce push on k = 1\n",
        "name a coordinate, or a quantity made of coordinates"),
    ("not-a-coordinate", "the coordinate is the writer's to say",
        "coordinate x\nparameter k\nkinetic k x'^2\nconserved p = momentum(k)\n",
        "name a coordinate"),
    ("transformed-twice", "which of the two is meant is the writer's to say",
        "coordinate x\nkinetic x'^2\nsymmetry s: x -> x + ε, x -> x - ε\n",
        "leave one of the images out"),
    ("assumed-equality", "a definition or a comparison may be meant",
        "coordinate x\nparameter k\nkinetic k x'^2\nassume k = 1\n",
        "write `let` for a definition, or a comparison"),
    ("contradiction", "the assumption is the writer's to say",
        "coordinate x\nparameter k\nkinetic k x'^2\nassume 1 < 0\n",
        "take one of the assumptions out"),
    ("run-value", "the value is the writer's to say",
        "coordinate x: length\nkinetic x'^2\nrun a: from x = 1 m, over 0 s\n",
        "write a value of the right quantity"),
    ("unlike-quantities", "which side is meant is the writer's to say",
        "coordinate x: length\nparameter m: mass, k: stiffness\nkinetic 1/2 m x'^2\npotential 1/2 k x\n",
        "look at both sides and where they come from; one factor may be missing, or one too many"),
    ("unit-mismatch", "the unit or the quantity may be wrong",
        "coordinate x: length\nparameter m: mass = 2 s\nkinetic m x'^2\n",
        "change the unit or the quantity"),
    ("family-values", "the values are the writer's to say",
        "index i: 1..3\ncoordinate x[i]\nparameter m[i] = (1, 2) kg\nkinetic sum(i: m[i] x[i]'^2)\n",
        "give one value, or as many as there are members"),
    ("value-number", "the number is the writer's to say",
        "",
        "write a number"),
    ("include-file", "where the file is stored is not known",
        "include \"none.least\"\ncoordinate x\nkinetic x'^2\n",
        "the name is relative to the file that includes it"),
    ("include-size", "what is left out is the writer's to say",
        "",
        "at most 256 files, 32 deep, 16 MB in all"),
    ("included-item", "it is mended in the other file",
        "",
        "coordinates, terms, claims and runs belong into the model itself"),
    ("included-finding", "it is mended in the other file",
        "",
        "mend it in the included file"),
    ("more-findings", "the findings that are told have their own",
        "",
        "mend the findings that are shown first"),
    ("gauge-not-found", "it tells a limit of the program",
        "",
        "the symmetry holds; only the gauge term is not shown in closed form"),
    ("gauge-multivalued", "it tells a fact, not a slip",
        "",
        "the charge changes by a constant with each turn; declare the coordinate `twist` if it counts its turns"),
    ("charge-taken", "it tells a fact, not a slip",
        "coordinate x\nparameter m, c\nkinetic 1/2 m x'^2\ndissipation 1/2 c x'^2\nsymmetry s: x -> x + ε\n",
        "nothing is wrong: the balance law tells how the charge changes"),
    ("transformation-of-velocities", "the image is the writer's to say",
        "coordinate x\nkinetic x'^2\nsymmetry s: x -> x + ε x'\n",
        "transform coordinates and the time only; claim a constant with `conserved`"),
    ("no-coordinate", "the coordinate is the writer's to say",
        "",
        "transform coordinates and the time"),
    ("single-member", "the whole family, or another model, is the writer's to say",
        "",
        "transform the whole family: `x[i] -> x[i] + ε`"),
    ("undecided", "it tells a limit of the program",
        "",
        "nothing was guessed: the reason says what stood in the way"),
    ("singular-mass-matrix", "the missing inertia is the writer's to say",
        "coordinate x, y\nparameter m\nkinetic 1/2 m x'^2\npotential x y\n",
        "add the missing kinetic energy, or replace the coordinate by a constraint"),
    ("mass-matrix-not-positive", "the term is the writer's to say",
        "coordinate x, y\nkinetic x'^2 - y'^2\n",
        "look at the signs of the kinetic terms, or assume that a parameter is positive"),
    ("explicit-time", "it tells a fact, not a slip",
        "coordinate x\nkinetic x'^2\npotential x sin(t)\n",
        "nothing is wrong: energy flows through what depends on the time"),
    ("undefined-everywhere", "the divisor is the writer's to say",
        "",
        "look at the divisor: it is zero at every point"),
];

#[cfg(test)]
mod tests {
    use super::*;
    use crate::Session;
    use crate::include::NoFiles;

    #[test]
    fn every_example_has_its_finding() {
        let mut wrong = Vec::new();
        for (code, _, text, advice) in WITHOUT {
            assert!(!advice.is_empty());
            if text.is_empty() {
                continue;
            }
            let mut session = Session::new();
            let checked = session.check("model.least", text, &NoFiles);
            let derived = session.derive(&checked);
            let found = session.findings(&checked, &derived);
            if !found.iter().any(|f| f.code == *code) {
                wrong.push(format!(
                    "{code} is not in {:?}",
                    found.iter().map(|f| (f.code, &f.message)).collect::<Vec<_>>()
                ));
            }
        }
        assert!(wrong.is_empty(), "{}", wrong.join("\n"));
    }

    #[test]
    fn every_code_has_a_page() {
        for code in crate::codes::all() {
            assert!(page(code.name).is_some(), "{}", code.name);
        }
    }
}
