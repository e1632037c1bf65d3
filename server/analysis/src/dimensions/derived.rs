//! The dimension of what is derived: of any expression, from the dimensions of the names in it.

use super::Dimensions;
use leastwise_algebra::{Arena, Expr, Function, Node, Rational, Role, Symbol};
use leastwise_quantities::{Base, Dimension, Exponent};
use std::collections::HashMap;

/// Expressions with more nodes than this are not measured.
const MAX_NODES: usize = 20_000;
/// Nor those nested more deeply.
const MAX_DEPTH: u32 = 300;

/// The dimension of an expression; `None` where it is not known. Sums are taken for alike: findings tell where they are not.
pub(crate) fn dimension(dimensions: &Dimensions, arena: &Arena, e: Expr) -> Option<Dimension> {
    let mut walk = Walk { dimensions, arena, known: HashMap::new() };
    if arena.depth(e) > MAX_DEPTH {
        return None;
    }
    match walk.of(e) {
        Size::Known(d) => Some(d),
        Size::Zero | Size::Unknown => None,
    }
}

#[derive(Clone, Copy)]
enum Size {
    Known(Dimension),
    /// Of any dimension.
    Zero,
    Unknown,
}

impl From<Option<Dimension>> for Size {
    fn from(d: Option<Dimension>) -> Size {
        d.map_or(Size::Unknown, Size::Known)
    }
}

struct Walk<'a> {
    dimensions: &'a Dimensions,
    arena: &'a Arena,
    known: HashMap<Expr, Size>,
}

impl Walk<'_> {
    fn of(&mut self, e: Expr) -> Size {
        if let Some(size) = self.known.get(&e) {
            return *size;
        }
        if self.known.len() > MAX_NODES {
            return Size::Unknown;
        }
        let size = self.fresh(e);
        self.known.insert(e, size);
        size
    }

    fn name(&self, s: Symbol, order: u16) -> Size {
        let info = self.arena.info(s);
        let d = match info.role {
            Role::Time => Some(self.dimensions.units.project(Dimension::of(Base::Time))),
            Role::Index => Some(Dimension::ONE),
            Role::Coordinate | Role::Parameter | Role::Input | Role::Function => self.dimensions.of_name(&info.name),
            _ => None,
        };
        let time = self.dimensions.units.project(Dimension::of(Base::Time));
        d.and_then(|d| d.over(time.pow(Exponent::whole(order as i16))?)).into()
    }

    fn power(&mut self, base: Expr, n: &Rational) -> Size {
        match (self.of(base), Exponent::from_rational(n)) {
            (Size::Known(d), Some(n)) => d.pow(n).into(),
            (Size::Zero, _) => Size::Zero,
            _ => Size::Unknown,
        }
    }

    fn fresh(&mut self, e: Expr) -> Size {
        let arena = self.arena;
        match arena.node(e) {
            Node::Number(n) if n.is_zero() => Size::Zero,
            Node::Number(_) | Node::Pi => Size::Known(Dimension::ONE),
            Node::Symbol(s) => self.name(*s, 0),
            Node::Jet(s, n) => self.name(*s, *n),
            Node::Member { family, order, .. } => self.name(*family, *order),
            Node::Sum(constant, list) => {
                if !constant.is_zero() {
                    return Size::Known(Dimension::ONE);
                }
                // One summand that is known tells all.
                list.iter().map(|(t, _)| self.of(*t)).find(|s| matches!(s, Size::Known(_))).unwrap_or(Size::Unknown)
            }
            Node::Product(list) => {
                let mut out = Some(Dimension::ONE);
                for (base, n) in list.iter() {
                    out = match self.power(*base, n) {
                        Size::Known(d) => out.and_then(|o| o.times(d)),
                        Size::Zero => return Size::Zero,
                        Size::Unknown => return Size::Unknown,
                    };
                }
                out.into()
            }
            Node::Power(base, _) => match self.of(*base) {
                Size::Known(d) if d.is_one() => Size::Known(d),
                _ => Size::Unknown,
            },
            Node::Call(function, args) => match function {
                Function::Abs | Function::Min | Function::Max => self.of(args[0]),
                _ => Size::Known(Dimension::ONE),
            },
            Node::Unspecified { function, orders, args, .. } => {
                let Size::Known(mut d) = self.name(*function, 0) else { return Size::Unknown };
                for (&arg, &n) in args.iter().zip(orders.iter()).filter(|(_, n)| **n > 0) {
                    let Size::Known(a) = self.of(arg) else { return Size::Unknown };
                    let Some(next) = a.pow(Exponent::whole(n as i16)).and_then(|a| d.over(a)) else {
                        return Size::Unknown;
                    };
                    d = next;
                }
                Size::Known(d)
            }
            Node::Bound { body, .. } => self.of(*body),
            _ => Size::Unknown,
        }
    }
}
