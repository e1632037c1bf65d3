//! The order in which a physicist writes factors and summands. It depends on names only, never on declaration order.
//!
//! Factors: numbers, parameters, time and inputs, coordinates, functions, velocities, accelerations. Among parameters:
//! G, masses (M, m), moments of inertia (I, J), stiffnesses and dampings (k, K, κ, c), then lower case, upper case,
//! Greek; each alphabetically, subscripts by their number. A sum in parentheses stands after the names of its class,
//! a sum of parameters after those of its leading name's kind.
//!
//! Summands: accelerations first, then velocities by falling degree; without them coordinates by rising degree, numbers,
//! parameters, functions.

use crate::arena::{Arena, Expr, Node, Role, Symbol};
use crate::rational::Rational;
use hashbrown::HashMap;
use std::cmp::Reverse;
use std::sync::Arc;

/// How a name sorts: script, letters, number of the subscript, the rest, the member.
#[derive(Clone, PartialEq, Eq, PartialOrd, Ord, Debug, Default)]
pub(crate) struct NameKey {
    script: u8,
    head: String,
    number: u64,
    rest: String,
    member: i64,
}

impl NameKey {
    pub fn new(name: &str, member: Option<i64>) -> NameKey {
        let head: String = name.chars().take_while(|c| digit(*c).is_none()).collect();
        let mut number = 0u64;
        let mut rest = String::new();
        let mut digits = true;
        for c in name.chars().skip(head.chars().count()) {
            match digit(c) {
                Some(d) if digits => number = number.saturating_mul(10).saturating_add(d as u64),
                _ => {
                    digits = false;
                    rest.push(c);
                }
            }
        }
        let first = head.chars().next().unwrap_or(' ');
        let script = match first {
            'a'..='z' => 0,
            'A'..='Z' => 1,
            'Α'..='ω' => 2,
            _ => 3,
        };
        NameKey { script, head, number, rest, member: member.unwrap_or(-1) }
    }

    /// The names of one kind differ by their subscripts only.
    pub fn same_kind(&self, other: &NameKey) -> bool {
        self.head == other.head && self.rest == other.rest
    }

    /// What physicists put first among parameters.
    fn preference(&self) -> u8 {
        let mut letters = self.head.chars();
        match letters.next() {
            Some('G') if letters.next().is_none() => 0,
            Some('M') => 1,
            Some('m') => 2,
            Some('I' | 'J') => 3,
            Some('k' | 'K' | 'κ' | 'c') => 4,
            _ => 5,
        }
    }
}

/// A digit, on the line or below it.
pub(crate) fn digit(c: char) -> Option<u32> {
    match c {
        '₀'..='₉' => Some(c as u32 - '₀' as u32),
        _ => c.to_digit(10),
    }
}

/// The classes of factors, in their order.
pub(crate) mod class {
    pub const NUMBER: u8 = 0;
    pub const PARAMETER: u8 = 2;
    pub const TIME: u8 = 3;
    pub const COORDINATE: u8 = 4;
    pub const FUNCTION: u8 = 5;
    pub const VELOCITY: u8 = 6;
    pub const ACCELERATION: u8 = 7;
}

/// How a base sorts among the factors of a product.
#[derive(Clone, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub(crate) struct FactorKey {
    /// Its class, the highest of what is inside.
    pub class: u8,
    preference: u8,
    compound: bool,
    /// Its first name.
    pub name: Arc<NameKey>,
    function: u8,
    structure: u64,
    /// Its degree in the velocities.
    degree: Rational,
}

/// Class, whether it is a sum, preference of a lone parameter, first name, function, exponent.
type FactorName = (Reverse<u8>, bool, u8, Arc<NameKey>, u8, Reverse<Rational>);

/// How a term sorts among the summands of a sum.
#[derive(Clone, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub(crate) struct TermKey {
    /// 2 for accelerations, 1 for velocities, 0 without.
    pub level: Reverse<u8>,
    /// The degree in the velocities.
    pub degree: Reverse<Rational>,
    /// Coordinates 1, numbers 2, parameters 3, functions 4; 0 where there are derivatives.
    pub kind: u8,
    functions: usize,
    coordinates: Rational,
    names: Vec<FactorName>,
    structure: u64,
}

impl TermKey {
    /// Whether two terms may stand together in front of one numerical factor.
    pub fn alike(&self, other: &TermKey) -> bool {
        self.level == other.level
            && self.degree == other.degree
            && self.kind == other.kind
            && self.coordinates == other.coordinates
    }

    /// The name where the term is one name.
    pub fn only(&self) -> Option<&NameKey> {
        match self.names.as_slice() {
            [(_, false, _, name, 0, exponent)] if exponent.0.is_one() => Some(name),
            _ => None,
        }
    }

    /// The classes of its factors.
    pub fn classes(&self) -> impl Iterator<Item = u8> + '_ {
        self.names.iter().map(|n| n.0.0)
    }
}

/// Nesting beyond this is keyed bottom up.
const DEEP: u32 = 60;

/// Keys seen so far.
#[derive(Default)]
pub(crate) struct Keys {
    names: HashMap<Symbol, Arc<NameKey>>,
    factors: HashMap<Expr, Arc<FactorKey>>,
}

impl Keys {
    pub fn name(&mut self, arena: &Arena, s: Symbol) -> Arc<NameKey> {
        if let Some(k) = self.names.get(&s) {
            return k.clone();
        }
        let info = arena.info(s);
        let key = Arc::new(NameKey::new(&info.name, info.member));
        self.names.insert(s, key.clone());
        key
    }

    fn atom(&mut self, arena: &Arena, s: Symbol, order: u16, structure: u64) -> FactorKey {
        let name = self.name(arena, s);
        let class = match (arena.info(s).role, order) {
            (Role::Parameter | Role::Formal | Role::Multiplier | Role::Epsilon, 0) => class::PARAMETER,
            (Role::Time | Role::Input | Role::Index, 0) => class::TIME,
            (Role::Function, _) => class::FUNCTION,
            (_, 0) => class::COORDINATE,
            (_, 1) => class::VELOCITY,
            _ => class::ACCELERATION,
        };
        let preference = if class == class::PARAMETER { name.preference() } else { 0 };
        let degree = if class == class::VELOCITY { Rational::ONE } else { Rational::ZERO };
        FactorKey { class, preference, compound: false, name, function: 0, structure, degree }
    }

    /// The key of a base. Costs one visit per distinct node, once.
    pub fn factor(&mut self, arena: &Arena, e: Expr) -> Arc<FactorKey> {
        if let Some(k) = self.factors.get(&e) {
            return k.clone();
        }
        if arena.depth(e) > DEEP {
            // Bottom up, so that the recursion below ends at once.
            let mut order = Vec::new();
            arena.visit(e, &mut |x, _| order.push(x));
            for x in order {
                self.key(arena, x);
            }
        }
        self.key(arena, e)
    }

    fn key(&mut self, arena: &Arena, e: Expr) -> Arc<FactorKey> {
        if let Some(k) = self.factors.get(&e) {
            return k.clone();
        }
        let structure = arena.key(e);
        let plain = |class| FactorKey {
            class,
            preference: 0,
            compound: false,
            name: Arc::new(NameKey::default()),
            function: 0,
            structure,
            degree: Rational::ZERO,
        };
        let join = |keys: &mut Keys, parts: &mut dyn Iterator<Item = Expr>| {
            let mut out: Option<FactorKey> = None;
            for p in parts {
                let k = keys.key(arena, p);
                out = Some(match out {
                    None => (*k).clone(),
                    // The first name of the highest class stands for the whole, the best preference counts.
                    Some(o) => {
                        let preference = o.preference.min(k.preference);
                        let better = (Reverse(k.class), &k.name) < (Reverse(o.class), &o.name);
                        let mut best = if better { (*k).clone() } else { o };
                        best.preference = preference;
                        best
                    }
                });
            }
            let mut k = out.unwrap_or_else(|| plain(class::NUMBER));
            if k.class != class::PARAMETER {
                k.preference = 0;
            }
            k.structure = structure;
            k
        };
        let key = match arena.node(e) {
            Node::Number(_) | Node::Undefined => plain(class::NUMBER),
            Node::Pi => FactorKey { class: class::NUMBER + 1, ..plain(class::NUMBER) },
            Node::Symbol(s) => self.atom(arena, *s, 0, structure),
            Node::Jet(s, order) => self.atom(arena, *s, *order, structure),
            Node::Member { family, index, order } => {
                let mut k = self.atom(arena, *family, *order, structure);
                // x[i] before x[i + 1].
                let offset = match arena.node(*index) {
                    Node::Sum(c, _) => c.to_i64().unwrap_or(0),
                    _ => 0,
                };
                k.name = Arc::new(NameKey { member: offset, ..(*k.name).clone() });
                k
            }
            Node::Sum(_, list) => {
                let single = list.len() == 1;
                let mut k = join(self, &mut list.iter().map(|t| t.0));
                k.compound |= !single;
                k.degree = list.iter().map(|t| self.key(arena, t.0).degree.clone()).max().unwrap_or(Rational::ZERO);
                k
            }
            Node::Product(list) => {
                let mut k = join(self, &mut list.iter().map(|t| t.0));
                k.degree = list.iter().fold(Rational::ZERO, |d, t| d.add(&self.key(arena, t.0).degree.mul(&t.1)));
                k
            }
            Node::Power(b, x) => {
                let mut k = join(self, &mut [*b, *x].into_iter());
                k.class = k.class.max(class::FUNCTION);
                k
            }
            Node::Call(f, args) => {
                let mut k = join(self, &mut args.iter().copied());
                k.class = class::FUNCTION;
                k.degree = Rational::ZERO;
                k.preference = 0;
                k.compound = false;
                k.function = 1 + *f as u8;
                k
            }
            Node::Unspecified { function, .. } => {
                let mut k = self.atom(arena, *function, 0, structure);
                k.class = class::FUNCTION;
                k.function = 100;
                k
            }
            Node::Bound { body, .. } => {
                let mut k = join(self, &mut [*body].into_iter());
                k.compound = true;
                k
            }
        };
        let key = Arc::new(key);
        self.factors.insert(e, key.clone());
        key
    }

    /// The key of a term, a product without its coefficient.
    pub fn term(&mut self, arena: &Arena, e: Expr) -> TermKey {
        let mut k = TermKey {
            level: Reverse(0),
            degree: Reverse(Rational::ZERO),
            kind: 2,
            functions: 0,
            coordinates: Rational::ZERO,
            names: Vec::new(),
            structure: arena.key(e),
        };
        let factors = arena.factors(e);
        let lone = factors.len() == 1 && factors[0].1.is_one();
        for (base, exponent) in factors {
            let f = self.factor(arena, base);
            match f.class {
                class::ACCELERATION => k.level = Reverse(2),
                class::VELOCITY => {
                    k.level = Reverse(k.level.0.max(1));
                    k.degree.0 = k.degree.0.add(&exponent.mul(&f.degree));
                }
                class::FUNCTION => {
                    k.functions += 1;
                    k.kind = 4;
                }
                class::COORDINATE | class::TIME => {
                    k.coordinates = k.coordinates.add(&exponent);
                    if k.kind != 4 {
                        k.kind = 1;
                    }
                }
                class::PARAMETER if k.kind == 2 => k.kind = 3,
                _ => {}
            }
            // Masses first where they stand alone: M + m, m + J/a², but k + m Ω².
            let preference = if lone { f.preference } else { u8::MAX };
            k.names.push((Reverse(f.class), f.compound, preference, f.name.clone(), f.function, Reverse(exponent)));
        }
        if k.level.0 > 0 {
            k.kind = 0;
        }
        k.names.sort();
        k
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn check(names: &[&str]) {
        for pair in names.windows(2) {
            assert!(NameKey::new(pair[0], None) < NameKey::new(pair[1], None), "{} before {}", pair[0], pair[1]);
        }
    }

    #[test]
    fn names_in_natural_order() {
        check(&["a", "l", "l₁", "l₂", "l₁₀", "l_x", "R", "R₂", "θ", "θ₂", "φ", "ω"]);
        check(&["x1", "x2", "x10", "y"]);
    }

    #[test]
    fn what_physicists_put_first() {
        let order = ["G", "M", "m₁", "J", "k", "g", "R", "Ω"].map(|n| {
            let k = NameKey::new(n, None);
            (k.preference(), k)
        });
        assert!(order.is_sorted());
    }
}
