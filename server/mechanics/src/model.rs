//! A Lagrangian model as the mechanics sees it: coordinates, named terms, forces, constraints. No text, no names of
//! items beyond those that results are labelled with.

use leastwise_algebra::{Arena, Expr, Role, Symbol};

/// A generalised coordinate, or all members of a family too large to be written out.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Coordinate {
    /// The symbol: `x`, the member `x[3]`, or the family `x`.
    pub symbol: Symbol,
    /// For a family: its members.
    pub members: Option<Members>,
}

/// The members of a family, addressed by a free index.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub struct Members {
    /// The free index in all forms of this family.
    pub index: Symbol,
    /// First member.
    pub lower: i64,
    /// Last member.
    pub upper: i64,
}

impl Coordinate {
    /// A single coordinate.
    pub fn single(symbol: Symbol) -> Coordinate {
        Coordinate { symbol, members: None }
    }

    /// A family `symbol[index]` for `lower ≤ index ≤ upper`, kept symbolic.
    pub fn family(symbol: Symbol, index: Symbol, lower: i64, upper: i64) -> Coordinate {
        Coordinate { symbol, members: Some(Members { index, lower, upper }) }
    }

    /// The coordinate's time derivative of order `order` as an expression; of a family at its free index.
    pub fn jet(&self, arena: &mut Arena, order: u16) -> Expr {
        match self.members {
            None => arena.jet(self.symbol, order),
            Some(m) => {
                let i = arena.sym(m.index);
                arena.member(self.symbol, i, order)
            }
        }
    }

    /// Its name as results are labelled: `x`, `x[3]`, `x[i]`.
    pub fn label(&self, arena: &Arena) -> String {
        match self.members {
            None => arena.name(self.symbol),
            Some(m) => format!("{}[{}]", arena.name(self.symbol), arena.name(m.index)),
        }
    }
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

/// A named term as a list of additive parts, each as written (U for a potential).
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Term {
    /// Its name; numbered where the model gives none.
    pub name: String,
    /// Its kind, which gives the sign in L.
    pub kind: TermKind,
    /// The additive parts; their sum is the term.
    pub parts: Vec<Expr>,
}

impl Term {
    /// +1 or −1: the sign in L.
    pub fn sign(&self) -> i64 {
        if self.kind == TermKind::Potential { -1 } else { 1 }
    }
}

/// What acts beside the Lagrangian.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub enum Action {
    /// An applied force on the coordinate or quantity `on`: Qᵢ = F ∂E/∂qⁱ for E(q, t), F ∂E/∂q̇ⁱ for E linear in the
    /// velocities. A vector force on a vector quantity is a list of pairs.
    Applied(Vec<(Expr, Expr)>),
    /// A Rayleigh function ℱ in additive parts: Qᵢ = −∂ℱ/∂q̇ⁱ.
    Dissipation(Vec<Expr>),
}

/// A named force or dissipation.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Force {
    /// Its name; numbered where the model gives none.
    pub name: String,
    /// What it does.
    pub action: Action,
}

/// A constraint f = 0, holonomic or linear in the velocities.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Constraint {
    /// Its name; numbered where the model gives none; `rod[3]` or `axis[1]` for families and vectors.
    pub name: String,
    /// Left side minus right side.
    pub f: Expr,
}

/// A model.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Model {
    /// The coordinates in order.
    pub coordinates: Vec<Coordinate>,
    /// The terms of L in order.
    pub terms: Vec<Term>,
    /// Forces and dissipations in order.
    pub forces: Vec<Force>,
    /// Constraints in order.
    pub constraints: Vec<Constraint>,
}

/// One arrow of a transformation: what is replaced, and its image, which contains ε.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Image {
    /// `t`, a coordinate's symbol (order 0), or a family at its free index.
    pub source: Expr,
    /// The image.
    pub target: Expr,
}

/// The symbol of the time.
pub fn time(arena: &mut Arena) -> Symbol {
    arena.symbol("t", None, Role::Time)
}

/// The parameter of transformations.
pub fn epsilon(arena: &mut Arena) -> Symbol {
    arena.symbol("ε", None, Role::Epsilon)
}
