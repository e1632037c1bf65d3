//! The syntax tree: what a model file says, before any name is looked up.
//!
//! Every position is a byte range relative to the start of the item, so that an item that only moves down the file
//! stays equal to itself and everything derived from it can be kept.

use std::fmt;

/// A half-open byte range, relative to the start of its item.
#[derive(Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord, Default)]
pub struct Span {
    /// First byte.
    pub start: u32,
    /// One past the last byte.
    pub end: u32,
}

impl Span {
    /// The range from `start` to `end`.
    pub fn new(start: usize, end: usize) -> Span {
        debug_assert!(start <= end);
        Span { start: start as u32, end: end as u32 }
    }

    /// The smallest range that holds both.
    pub fn to(self, other: Span) -> Span {
        Span { start: self.start.min(other.start), end: self.end.max(other.end) }
    }

    /// The same range as a `std` range of byte offsets.
    pub fn range(self) -> std::ops::Range<usize> {
        self.start as usize..self.end as usize
    }
}

impl fmt::Debug for Span {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}..{}", self.start, self.end)
    }
}

/// A name as it is compared: NFC, look-alikes folded, without dots or primes.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Name {
    /// The folded text.
    pub text: String,
    /// Where it stands.
    pub span: Span,
}

/// A literal number, exactly as written: `digits * 10^exponent`.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Number {
    /// Decimal digits without point or leading zeros (at least one digit).
    pub digits: String,
    /// The power of ten. `0.15` is 15 and −2, `1.2e-3` is 12 and −4.
    pub exponent: i32,
}

/// A formula with its place.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Formula {
    /// What it is.
    pub kind: FormulaKind,
    /// Where it stands.
    pub span: Span,
}

/// How a product is written.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Times {
    /// Two factors side by side.
    Juxtaposed,
    /// `*`.
    Star,
    /// `·`, the dot product where both sides are vectors.
    Dot,
    /// `×`, the cross product.
    Cross,
}

impl Formula {
    /// The formulas that it is made of, in the order of the text.
    pub fn parts(&self) -> Vec<&Formula> {
        match &self.kind {
            FormulaKind::Number(_) | FormulaKind::Name(_) | FormulaKind::Missing => Vec::new(),
            FormulaKind::Prime { base, .. } => vec![base],
            FormulaKind::Neg(inner) | FormulaKind::Bars(inner) | FormulaKind::Paren(inner) => vec![inner],
            FormulaKind::Add(left, right)
            | FormulaKind::Sub(left, right)
            | FormulaKind::Div(left, right)
            | FormulaKind::Pow(left, right)
            | FormulaKind::Mul { left, right, .. } => vec![left, right],
            FormulaKind::Tuple(parts) => parts.iter().collect(),
            FormulaKind::Index { base, indices } => std::iter::once(&**base).chain(indices).collect(),
            FormulaKind::Call { power, args, .. } => power.as_deref().into_iter().chain(args).collect(),
            FormulaKind::Sum { range, body, .. } => {
                let ends = range.iter().flat_map(|(lower, upper)| [&**lower, &**upper]);
                ends.chain(std::iter::once(&**body)).collect()
            }
        }
    }
}

/// The kinds of formula.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub enum FormulaKind {
    /// A literal number.
    Number(Number),
    /// A name: coordinate, parameter, `t`, `π`, `let`, index, …
    Name(String),
    /// A time derivative of order `order ≥ 1`: `x'`, `ẍ`, `(r cos θ)'`.
    Prime {
        /// What is differentiated.
        base: Box<Formula>,
        /// How often.
        order: u32,
    },
    /// `x[i+1]`, `P[3]`, `R[1, 2]`. Of `x'[3]` and `x[3]'` both are read as the prime of the index.
    /// The member of a family of functions, `u[i](t)` or `u[i]'(t)`, is the index of the call `u(t)` or `u'(t)`.
    Index {
        /// The family, vector or matrix.
        base: Box<Formula>,
        /// One or more index formulas.
        indices: Vec<Formula>,
    },
    /// A call of a known or declared function.
    Call {
        /// The function's name.
        function: Name,
        /// How the derivative is marked: none, `U''(r)`, `U'[1,2](x, y)`.
        derivative: Derivative,
        /// The exponent in `sin² θ` or `sin^2 θ`: the value is raised to it.
        power: Option<Box<Formula>>,
        /// The arguments, at least one.
        args: Vec<Formula>,
        /// Whether the arguments stand in parentheses.
        parenthesised: bool,
    },
    /// `-a`.
    Neg(Box<Formula>),
    /// `a + b`.
    Add(Box<Formula>, Box<Formula>),
    /// `a - b`.
    Sub(Box<Formula>, Box<Formula>),
    /// A product.
    Mul {
        /// Left factor.
        left: Box<Formula>,
        /// Right factor.
        right: Box<Formula>,
        /// How it is written.
        times: Times,
    },
    /// `a / b`.
    Div(Box<Formula>, Box<Formula>),
    /// `a ^ b` and `a²`.
    Pow(Box<Formula>, Box<Formula>),
    /// A vector of two or more components, or a matrix as a vector of rows.
    Tuple(Vec<Formula>),
    /// `|a|`: the absolute value of a scalar, the norm of a vector.
    Bars(Box<Formula>),
    /// `sum(i: body)`, `sum(i in lower..upper: body)`.
    Sum {
        /// The bound index.
        index: Name,
        /// Its range, where it is written.
        range: Option<(Box<Formula>, Box<Formula>)>,
        /// The summand.
        body: Box<Formula>,
    },
    /// `(a)`, kept so that the formatter gives back what was typed.
    Paren(Box<Formula>),
    /// A place where no formula could be read; a slip says why.
    Missing,
}

/// The derivative mark of a called function.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub enum Derivative {
    /// `U(r)`.
    None,
    /// `U'(r)`, `U''(r)`: the order.
    Order(u32),
    /// `U'[1,2](x, y)`: the arguments' positions, from 1.
    Arguments(Vec<u32>),
}

/// A unit or a quantity name: a quotient of products of powers, as written.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct UnitText {
    /// The factors in order; those after `/` have negative exponents.
    pub factors: Vec<UnitFactor>,
    /// Where it stands.
    pub span: Span,
}

/// One factor of a unit.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct UnitFactor {
    /// `kg`, `m`, `°`, `Ω`, or a quantity's name.
    pub symbol: Name,
    /// Numerator and denominator of its exponent.
    pub exponent: (i32, u32),
}

/// A parameter's or a run's value: constant arithmetic without names, then a unit.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Value {
    /// The number, or a `Tuple` of numbers for a family.
    pub number: Formula,
    /// The unit, where there is one.
    pub unit: Option<UnitText>,
    /// The whole.
    pub span: Span,
}

/// A declared name, with the index it runs over: `x`, `x[i]`.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Declared {
    /// The name.
    pub name: Name,
    /// The index, for a family.
    pub index: Option<Name>,
}

/// `m: mass = 1 kg`, one of the declarations of a `parameter` item.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Declaration {
    /// What is declared.
    pub declared: Declared,
    /// The quantity or unit behind the colon. `m₁, m₂: mass = 1 kg` gives it to both.
    pub quantity: Option<UnitText>,
    /// The value.
    pub value: Option<Value>,
}

/// A comparison of `assume` and `until`: `0 < e < 1` is a chain.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Comparison {
    /// The leftmost formula.
    pub first: Formula,
    /// The further ones, each with the relation before it.
    pub rest: Vec<(Relation, Formula)>,
}

/// The relations of a comparison.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Relation {
    /// `<`
    Less,
    /// `<=`, `≤`
    LessEqual,
    /// `>`
    Greater,
    /// `>=`, `≥`
    GreaterEqual,
    /// `!=`, `≠`
    NotEqual,
    /// `=`
    Equal,
}

/// One arrow of a transformation: `x -> x + ε`, `(x, y) -> (…, …)`.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Arrow {
    /// What is transformed: names, members `x[i]`, or `t`. More than one for a tuple.
    pub sources: Vec<Formula>,
    /// As many images.
    pub targets: Vec<Formula>,
    /// The whole arrow.
    pub span: Span,
}

/// The three kinds of energy term.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum TermKind {
    /// Counted with +.
    Kinetic,
    /// Counted with −.
    Potential,
    /// Counted with +.
    Lagrangian,
}

/// An option behind the system's name.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub enum SystemOption {
    /// `dimensionless`.
    Dimensionless(Span),
    /// `with c = 1, ħ = 1`: the names set to one.
    With(Vec<Name>),
}

/// What an item says.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub enum ItemKind {
    /// `system NAME, …`.
    System {
        /// The model's name.
        name: Name,
        /// Options in order.
        options: Vec<SystemOption>,
    },
    /// `coordinate x, y: length`.
    Coordinate {
        /// Whether `cyclic` stands before it.
        cyclic: bool,
        /// The names.
        declared: Vec<Declared>,
        /// The quantity of all of them.
        quantity: Option<UnitText>,
    },
    /// `parameter m: mass = 42 kg, …`.
    Parameter(Vec<Declaration>),
    /// `input u: torque`.
    Input {
        /// The names.
        declared: Vec<Declared>,
        /// The quantity of all of them.
        quantity: Option<UnitText>,
    },
    /// `index i: 1..8`.
    Index {
        /// The names.
        names: Vec<Name>,
        /// First value.
        lower: Formula,
        /// Last value.
        upper: Formula,
    },
    /// `let NAME = …`, `let f(x) = …`, `let X[i] = …`.
    Let {
        /// The name, and its index for a family.
        declared: Declared,
        /// The formal arguments; empty for a plain definition.
        formals: Vec<Name>,
        /// The definition.
        body: Formula,
    },
    /// `function U(r): energy`, `function u[i](t)`.
    Function {
        /// The name, and its index for a family.
        declared: Declared,
        /// The formal arguments.
        formals: Vec<Name>,
        /// The quantity of the value.
        quantity: Option<UnitText>,
    },
    /// `assume m > 0, 0 < e < 1`.
    Assume(Vec<Comparison>),
    /// `kinetic NAME = …` and the two others.
    Term {
        /// Which energy.
        kind: TermKind,
        /// The name, where there is one.
        name: Option<Name>,
        /// The energy.
        body: Formula,
    },
    /// `dissipation NAME = …`.
    Dissipation {
        /// The name, where there is one.
        name: Option<Name>,
        /// The Rayleigh function.
        body: Formula,
    },
    /// `force NAME on E = …`.
    Force {
        /// The name, where there is one.
        name: Option<Name>,
        /// The coordinate or quantity that it acts on.
        on: Formula,
        /// The force.
        body: Formula,
    },
    /// `constraint NAME: lhs = rhs`, `constraint rod[i]: …`.
    Constraint {
        /// The name, and its index for a family.
        declared: Option<Declared>,
        /// Left side.
        left: Formula,
        /// Right side.
        right: Formula,
    },
    /// `symmetry NAME: x -> …`, also `broken symmetry`.
    Symmetry {
        /// Whether `broken` stands before it.
        broken: bool,
        /// The name, where there is one.
        name: Option<Name>,
        /// The arrows.
        arrows: Vec<Arrow>,
    },
    /// `conserved NAME = …`.
    Conserved {
        /// The name, where there is one.
        name: Option<Name>,
        /// The claimed constant.
        body: Formula,
    },
    /// `run NAME: from x = 1 m, over 20 s`.
    Run {
        /// The name, where there is one.
        name: Option<Name>,
        /// Initial values.
        from: Vec<(Formula, Value)>,
        /// The time span.
        over: Option<Value>,
        /// A stopping condition.
        until: Option<Comparison>,
        /// Formulas for inputs and functions.
        with: Vec<(Formula, Formula)>,
    },
    /// `include "FILE.least"`.
    Include {
        /// The file name as written, without quotes.
        file: String,
        /// Where it stands, with quotes.
        span: Span,
    },
    /// An item of which nothing could be read; slips say why.
    Broken,
}

/// An item with the place of its keyword.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Item {
    /// What it says.
    pub kind: ItemKind,
    /// The keyword or keywords it begins with.
    pub keyword: Span,
    /// The whole item without trailing comments and blank lines.
    pub span: Span,
}

/// How grave a slip is.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug, PartialOrd, Ord)]
pub enum Severity {
    /// The model cannot be read as written.
    Error,
    /// It can, and is probably not what is meant.
    Warning,
    /// Worth knowing.
    Information,
    /// A remark on how it was read.
    Hint,
}

/// Something wrong or remarkable in the text, found while reading it.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Slip {
    /// A stable kebab-case code.
    pub code: &'static str,
    /// How grave.
    pub severity: Severity,
    /// One sentence, without a full stop at the end.
    pub message: String,
    /// What to do, where there is one thing to say.
    pub help: Option<String>,
    /// Where.
    pub span: Span,
    /// Replacements that mend it, each with a title, best first.
    pub mends: Vec<Mend>,
}

/// A textual mend.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Mend {
    /// What it does, in the imperative: `write sin(2θ)`.
    pub title: String,
    /// Places and their new text, in order, not overlapping.
    pub edits: Vec<(Span, String)>,
}
