//! The bounded expanded form: polynomials in velocities, accelerations and trigonometric factors, with everything else
//! as atoms. Sums of parameters and of coordinates are such atoms.

use crate::arena::{Arena, Expr, Node, Role};
use crate::budget::{Budget, Stopped};
use crate::function::Function;
use crate::rational::Rational;
use hashbrown::{HashMap, HashSet};
use smallvec::SmallVec;

/// Powers of sums above this one stay unexpanded.
const MAX_POWER: i64 = 12;

/// Atoms with their exponents, ordered by atom, exponents not zero.
pub(crate) type Monomial = SmallVec<[(u32, i32); 8]>;

/// A monomial with its coefficient.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) struct Term {
    pub coefficient: Rational,
    pub monomial: Monomial,
}

/// A polynomial: terms ordered by monomial, coefficients not zero.
pub(crate) type Polynomial = Vec<Term>;

/// What an atom is to the printer.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) enum Kind {
    /// Built from parameters only.
    Parameter,
    /// A coordinate.
    Coordinate,
    /// Anything else without derivatives.
    Other,
    /// The sine of the angle with that number.
    Sine(u32),
    /// The cosine of the angle with that number.
    Cosine(u32),
    Velocity,
    Acceleration,
}

/// `base ^ (1/root)`.
#[derive(Clone, Debug)]
pub(crate) struct Atom {
    pub base: Expr,
    pub root: i64,
    pub kind: Kind,
    /// The degree in velocities.
    pub degree: i32,
    /// Whether there are accelerations.
    pub accelerated: bool,
}

/// The atoms of one print.
#[derive(Default)]
pub(crate) struct Table {
    pub atoms: Vec<Atom>,
    /// Arguments of sines and cosines.
    pub angles: Vec<Expr>,
    numbers: HashMap<(Expr, i64), u32>,
}

impl Table {
    /// The number of an atom.
    pub fn atom(&mut self, arena: &Arena, base: Expr, root: i64) -> u32 {
        if let Some(&n) = self.numbers.get(&(base, root)) {
            return n;
        }
        let n = self.atoms.len() as u32;
        let kind = match arena.node(base) {
            Node::Call(f @ (Function::Sin | Function::Cos), args) if root == 1 => {
                let angle = self.angles.iter().position(|a| *a == args[0]).unwrap_or_else(|| {
                    self.angles.push(args[0]);
                    self.angles.len() - 1
                }) as u32;
                if *f == Function::Sin { Kind::Sine(angle) } else { Kind::Cosine(angle) }
            }
            _ => match derivative(arena, base) {
                Some(1) => Kind::Velocity,
                Some(_) => Kind::Acceleration,
                None if is_coordinate(arena, base) => Kind::Coordinate,
                None if only_parameters(arena, base) => Kind::Parameter,
                None => Kind::Other,
            },
        };
        let (degree, accelerated) = if root == 1 { motion(arena, base, 0, &mut HashMap::new()) } else { (0, false) };
        self.atoms.push(Atom { base, root, kind, degree, accelerated });
        self.numbers.insert((base, root), n);
        n
    }

    /// The expression whose power an atom is.
    pub fn base(&self, atom: u32) -> Expr {
        self.atoms[atom as usize].base
    }

    pub fn kind(&self, atom: u32) -> Kind {
        self.atoms[atom as usize].kind
    }

    /// The degree of a monomial in the velocities, and whether it has accelerations.
    pub fn motion(&self, m: &Monomial) -> (i32, bool) {
        m.iter().fold((0, false), |(degree, accelerated), (a, e)| {
            let atom = &self.atoms[*a as usize];
            (degree + atom.degree.saturating_mul(*e), accelerated | atom.accelerated)
        })
    }

    /// The expression of a monomial with its coefficient.
    pub fn to_expr(&self, arena: &mut Arena, coefficient: &Rational, m: &Monomial) -> Expr {
        let factors: SmallVec<[(Expr, Rational); 8]> = m
            .iter()
            .map(|(a, e)| {
                let atom = &self.atoms[*a as usize];
                (atom.base, Rational::new(*e as i64, atom.root).unwrap_or(Rational::ONE))
            })
            .collect();
        let core = arena.monomial(&factors);
        arena.scale(core, coefficient)
    }

    /// The sum of all terms as an expression.
    pub fn sum(&self, arena: &mut Arena, p: &[Term]) -> Expr {
        let list: Vec<(Expr, Rational)> =
            p.iter().map(|t| (self.to_expr(arena, &t.coefficient, &t.monomial), Rational::ONE)).collect();
        arena.linear(&list)
    }

    /// Splits a product into coefficient and monomial.
    pub fn split(&mut self, arena: &Arena, e: Expr) -> Option<Term> {
        let (coefficient, core) = arena.split_coefficient(e);
        let mut monomial = Monomial::new();
        for (b, x) in arena.factors(core) {
            let (p, q) = x.small()?;
            monomial.push((self.atom(arena, b, q), i32::try_from(p).ok()?));
        }
        monomial.sort_unstable();
        Some(Term { coefficient, monomial })
    }
}

/// The order of the time derivative of a coordinate.
pub(crate) fn derivative(arena: &Arena, e: Expr) -> Option<u16> {
    let (s, order) = match arena.node(e) {
        Node::Jet(s, order) => (*s, *order),
        Node::Member { family, order, .. } => (*family, *order),
        _ => return None,
    };
    (order > 0 && arena.info(s).role == Role::Coordinate).then_some(order)
}

fn is_coordinate(arena: &Arena, e: Expr) -> bool {
    match arena.node(e) {
        Node::Symbol(s) | Node::Member { family: s, .. } => arena.info(*s).role == Role::Coordinate,
        _ => false,
    }
}

/// Degree in velocities and presence of accelerations, seen through sums and products. Insides nested very deeply count
/// as at rest.
fn motion(arena: &Arena, e: Expr, level: u32, memo: &mut HashMap<Expr, (i32, bool)>) -> (i32, bool) {
    if level > 20 {
        return (0, false);
    }
    // Shared parts are looked at once: as a tree the expression may be exponentially larger.
    if let Some(known) = memo.get(&e) {
        return *known;
    }
    let result = match arena.node(e) {
        Node::Jet(..) | Node::Member { .. } => match derivative(arena, e) {
            Some(1) => (1, false),
            Some(_) => (0, true),
            None => (0, false),
        },
        Node::Sum(_, list) => list.iter().fold((0, false), |(d, a), t| {
            let (x, y) = motion(arena, t.0, level + 1, memo);
            (d.max(x), a | y)
        }),
        Node::Product(list) => list.iter().fold((0i32, false), |(d, a), (b, e)| {
            let (x, y) = motion(arena, *b, level + 1, memo);
            (d.saturating_add(x.saturating_mul(e.to_i64().unwrap_or(0) as i32)), a | y)
        }),
        _ => (0, false),
    };
    memo.insert(e, result);
    result
}

fn only_parameters(arena: &Arena, e: Expr) -> bool {
    let mut yes = true;
    arena.visit(e, &mut |_, node| match node {
        Node::Symbol(s) => yes &= matches!(arena.info(*s).role, Role::Parameter | Role::Formal),
        Node::Jet(..) | Node::Member { .. } | Node::Unspecified { .. } | Node::Bound { .. } => yes = false,
        _ => {}
    });
    yes
}

/// The product of two monomials.
pub(crate) fn times(a: &Monomial, b: &Monomial) -> Option<Monomial> {
    let mut out = Monomial::with_capacity(a.len() + b.len());
    let (mut i, mut j) = (0, 0);
    while i < a.len() || j < b.len() {
        if j == b.len() || i < a.len() && a[i].0 < b[j].0 {
            out.push(a[i]);
            i += 1;
        } else if i == a.len() || b[j].0 < a[i].0 {
            out.push(b[j]);
            j += 1;
        } else {
            let e = a[i].1.checked_add(b[j].1)?;
            if e != 0 {
                out.push((a[i].0, e));
            }
            i += 1;
            j += 1;
        }
    }
    Some(out)
}

/// The quotient of two monomials.
pub(crate) fn over(a: &Monomial, b: &Monomial) -> Monomial {
    let inverse: Monomial = b.iter().map(|(x, e)| (*x, -e)).collect();
    times(a, &inverse).unwrap_or_else(|| a.clone())
}

/// Adds equal monomials and orders them.
pub(crate) fn gather(terms: impl IntoIterator<Item = Term>) -> Polynomial {
    let mut map: HashMap<Monomial, Rational> = HashMap::new();
    for t in terms {
        let c = map.entry(t.monomial).or_insert(Rational::ZERO);
        *c = c.add(&t.coefficient);
    }
    let mut out: Polynomial = map
        .into_iter()
        .filter(|(_, c)| !c.is_zero())
        .map(|(monomial, coefficient)| Term { coefficient, monomial })
        .collect();
    out.sort_by(|a, b| a.monomial.cmp(&b.monomial));
    out
}

/// The product of two polynomials, bounded.
pub(crate) fn multiply(a: &Polynomial, b: &Polynomial, cap: usize, budget: &mut Budget) -> Result<Polynomial, Stopped> {
    budget.charge(a.len().saturating_mul(b.len()))?;
    if a.len().saturating_mul(b.len()) > 8 * cap {
        return Err(Stopped::TooLarge);
    }
    let mut out = Vec::with_capacity(a.len() * b.len());
    for x in a {
        for y in b {
            let monomial = times(&x.monomial, &y.monomial).ok_or(Stopped::TooLarge)?;
            out.push(Term { coefficient: x.coefficient.mul(&y.coefficient), monomial });
        }
    }
    let out = gather(out);
    if out.len() > cap { Err(Stopped::TooLarge) } else { Ok(out) }
}

/// Expands one expression.
pub(crate) struct Expander<'a> {
    pub arena: &'a mut Arena,
    pub table: &'a mut Table,
    /// Sums that stay atoms although there are velocities inside.
    pub opaque: &'a HashSet<Expr>,
    /// Whether a node has velocities, accelerations or trigonometric factors to expand.
    pub open: &'a mut HashMap<Expr, bool>,
    /// Whether sums of parameters and coordinates are expanded too; their powers are not.
    pub wide: bool,
    pub cap: usize,
}

impl Expander<'_> {
    /// Whether there is something to expand.
    pub fn is_open(&mut self, e: Expr) -> bool {
        if let Some(&known) = self.open.get(&e) {
            return known;
        }
        let found = match self.arena.node(e) {
            Node::Jet(..) | Node::Member { .. } => derivative(self.arena, e).is_some(),
            Node::Call(f, _) => matches!(f, Function::Sin | Function::Cos),
            Node::Sum(_, list) => {
                let list = list.clone();
                list.iter().any(|t| self.is_open(t.0))
            }
            Node::Product(list) => {
                let list = list.clone();
                list.iter().any(|t| self.is_open(t.0))
            }
            _ => false,
        };
        self.open.insert(e, found);
        found
    }

    /// The expanded form. The insides of atoms must be simplified already.
    pub fn expand(&mut self, e: Expr, budget: &mut Budget) -> Result<Polynomial, Stopped> {
        budget.charge(1)?;
        match self.arena.node(e) {
            Node::Sum(constant, list) => {
                let (constant, list) = (constant.clone(), list.clone());
                let mut out = Vec::new();
                if !constant.is_zero() {
                    out.push(Term { coefficient: constant, monomial: Monomial::new() });
                }
                for (x, c) in list.iter() {
                    for t in self.expand(*x, budget)? {
                        out.push(Term { coefficient: t.coefficient.mul(c), monomial: t.monomial });
                    }
                    if out.len() > 8 * self.cap {
                        return Err(Stopped::TooLarge);
                    }
                }
                let out = gather(out);
                if out.len() > self.cap { Err(Stopped::TooLarge) } else { Ok(out) }
            }
            Node::Number(r) => {
                let r = r.clone();
                Ok(if r.is_zero() { vec![] } else { vec![Term { coefficient: r, monomial: Monomial::new() }] })
            }
            _ => {
                let mut out = vec![Term { coefficient: Rational::ONE, monomial: Monomial::new() }];
                let mut monomial = Monomial::new();
                for (base, x) in self.arena.factors(e) {
                    let (p, q) = x.small().ok_or(Stopped::TooLarge)?;
                    let sum = matches!(self.arena.node(base), Node::Sum(..));
                    let wide = self.wide && p == 1;
                    let may = sum && q == 1 && (1..=MAX_POWER).contains(&p) && !self.opaque.contains(&base);
                    if may && (wide || self.is_open(base)) {
                        let inner = self.expand(base, budget)?;
                        for _ in 0..p {
                            out = multiply(&out, &inner, self.cap, budget)?;
                        }
                    } else {
                        let a = self.table.atom(self.arena, base, q);
                        let p = i32::try_from(p).map_err(|_| Stopped::TooLarge)?;
                        monomial = times(&monomial, &SmallVec::from_slice(&[(a, p)])).ok_or(Stopped::TooLarge)?;
                    }
                }
                for t in &mut out {
                    t.monomial = times(&t.monomial, &monomial).ok_or(Stopped::TooLarge)?;
                }
                out.sort_by(|a, b| a.monomial.cmp(&b.monomial));
                Ok(out)
            }
        }
    }
}
