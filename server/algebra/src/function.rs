//! The known functions.

/// A known function. The square root is a power with exponent 1/2 and not among them.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug, PartialOrd, Ord)]
pub enum Function {
    /// Sine.
    Sin,
    /// Cosine.
    Cos,
    /// Tangent.
    Tan,
    /// Inverse sine.
    Asin,
    /// Inverse cosine.
    Acos,
    /// Inverse tangent.
    Atan,
    /// `atan2(y, x)`, the angle of the point (x, y).
    Atan2,
    /// Hyperbolic sine.
    Sinh,
    /// Hyperbolic cosine.
    Cosh,
    /// Hyperbolic tangent.
    Tanh,
    /// The exponential.
    Exp,
    /// The natural logarithm.
    Log,
    /// The absolute value.
    Abs,
    /// −1, 0 or 1.
    Sign,
    /// The smallest of its arguments.
    Min,
    /// The largest of its arguments.
    Max,
}

impl Function {
    /// All of them.
    pub const ALL: [Function; 16] = [
        Function::Sin,
        Function::Cos,
        Function::Tan,
        Function::Asin,
        Function::Acos,
        Function::Atan,
        Function::Atan2,
        Function::Sinh,
        Function::Cosh,
        Function::Tanh,
        Function::Exp,
        Function::Log,
        Function::Abs,
        Function::Sign,
        Function::Min,
        Function::Max,
    ];

    /// The name in the language.
    pub fn name(self) -> &'static str {
        match self {
            Function::Sin => "sin",
            Function::Cos => "cos",
            Function::Tan => "tan",
            Function::Asin => "asin",
            Function::Acos => "acos",
            Function::Atan => "atan",
            Function::Atan2 => "atan2",
            Function::Sinh => "sinh",
            Function::Cosh => "cosh",
            Function::Tanh => "tanh",
            Function::Exp => "exp",
            Function::Log => "log",
            Function::Abs => "abs",
            Function::Sign => "sign",
            Function::Min => "min",
            Function::Max => "max",
        }
    }

    /// The function of that name.
    pub fn from_name(name: &str) -> Option<Function> {
        Self::ALL.into_iter().find(|f| f.name() == name)
    }

    /// The smallest and the largest number of arguments.
    pub fn arity(self) -> (usize, usize) {
        match self {
            Function::Atan2 => (2, 2),
            Function::Min | Function::Max => (2, usize::MAX),
            _ => (1, 1),
        }
    }

    /// Whether f(−x) = −f(x).
    pub fn is_odd(self) -> bool {
        use Function::*;
        matches!(self, Sin | Tan | Asin | Atan | Sinh | Tanh | Sign)
    }

    /// Whether f(−x) = f(x).
    pub fn is_even(self) -> bool {
        matches!(self, Function::Cos | Function::Cosh | Function::Abs)
    }
}
