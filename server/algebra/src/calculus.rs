//! Derivatives, the total time derivative, substitution and expansion.

use crate::arena::{Arena, Expr, Node, Role};
use crate::budget::{Budget, MAX_DEPTH, Stopped};
use crate::function::Function;
use crate::rational::Rational;
use hashbrown::HashMap;

/// A derivation: linear, Leibniz, chain rule; known by what it does to atoms.
pub struct Derivation<'a> {
    /// The derivative of an atom (a symbol, a jet, a member).
    pub atom: &'a mut dyn FnMut(&mut Arena, Expr) -> Result<Expr, Stopped>,
    /// Results so far.
    pub memo: HashMap<Expr, Expr>,
    /// A Bloom mask of the atoms with nonzero derivative: a node without a common bit has derivative zero.
    mask: u64,
}

impl<'a> Derivation<'a> {
    /// The derivation that does `atom` to atoms.
    pub fn new(atom: &'a mut dyn FnMut(&mut Arena, Expr) -> Result<Expr, Stopped>) -> Derivation<'a> {
        Derivation { atom, memo: HashMap::new(), mask: u64::MAX }
    }
}

impl Arena {
    /// The partial derivative by an atom. Memoised; costs one visit per node that contains the atom.
    pub fn partial(&mut self, e: Expr, atom: Expr, budget: &mut Budget) -> Result<Expr, Stopped> {
        if !self.may_contain(e, atom) {
            return Ok(Self::ZERO);
        }
        let memo = self.memo.partial.remove(&atom).unwrap_or_default();
        if let Some(&d) = memo.get(&e) {
            self.memo.partial.insert(atom, memo);
            return Ok(d);
        }
        let mask = self.meta(atom).mask;
        let mut rule = |arena: &mut Arena, x: Expr| {
            if x == atom { Ok(Self::ONE) } else { arena.member_derivative(x, atom) }
        };
        let mut d = Derivation { atom: &mut rule, memo, mask };
        let result = self.derive(e, &mut d, budget);
        let memo = d.memo;
        self.memo.partial.insert(atom, memo);
        result
    }

    /// ∂x[i]/∂x[k] outside of a sum: zero where the indices differ by a number, one where they are equal.
    fn member_derivative(&mut self, x: Expr, atom: Expr) -> Result<Expr, Stopped> {
        let (a, b) = (self.family_of(x), self.family_of(atom));
        match (a, b) {
            (Some((f, i, n)), Some((g, k, m))) if f == g && n == m => {
                let gap = self.sub(i, k);
                match self.as_number(gap) {
                    Some(r) if r.is_zero() => Ok(Self::ONE),
                    Some(_) => Ok(Self::ZERO),
                    None => Err(Stopped::FreeIndex),
                }
            }
            _ => Ok(Self::ZERO),
        }
    }

    /// Family name and role, index and derivative order, for a member of a family.
    #[allow(clippy::type_complexity)]
    fn family_of(&mut self, x: Expr) -> Option<((std::sync::Arc<str>, Role), Expr, u16)> {
        let (s, index, order) = match self.node(x) {
            Node::Symbol(s) => (*s, None, 0),
            Node::Jet(s, n) => (*s, None, *n),
            Node::Member { family, index, order } => (*family, Some(*index), *order),
            _ => return None,
        };
        let info = self.info(s);
        let id = (info.name.clone(), info.role);
        let member = info.member;
        let index = match index {
            Some(i) => i,
            None => self.integer(member?),
        };
        Some((id, index, order))
    }

    /// The time derivative along any curve: coordinates and inputs have jets, `t` has derivative one.
    pub fn total(&mut self, e: Expr, budget: &mut Budget) -> Result<Expr, Stopped> {
        let memo = std::mem::take(&mut self.memo.total);
        let mut rule = |arena: &mut Arena, x: Expr| Ok(arena.next_jet(x));
        let mut d = Derivation { atom: &mut rule, memo, mask: u64::MAX };
        let result = self.derive(e, &mut d, budget);
        let memo = d.memo;
        self.memo.total = memo;
        result
    }

    fn next_jet(&mut self, x: Expr) -> Expr {
        match *self.node(x) {
            Node::Symbol(s) => match self.info(s).role {
                Role::Coordinate | Role::Input => self.jet(s, 1),
                Role::Time => Self::ONE,
                _ => Self::ZERO,
            },
            Node::Jet(s, n) => self.jet(s, n.saturating_add(1)),
            Node::Member { family, index, order } => match self.info(family).role {
                Role::Coordinate | Role::Input => self.member(family, index, order.saturating_add(1)),
                _ => Self::ZERO,
            },
            _ => Self::ZERO,
        }
    }

    /// Applies a derivation. Costs one visit per distinct node that it does not annihilate.
    pub fn derive(&mut self, e: Expr, d: &mut Derivation<'_>, budget: &mut Budget) -> Result<Expr, Stopped> {
        if self.depth(e) > MAX_DEPTH {
            return Err(Stopped::TooDeep);
        }
        self.derive_node(e, d, budget)
    }

    fn derive_node(&mut self, e: Expr, d: &mut Derivation<'_>, budget: &mut Budget) -> Result<Expr, Stopped> {
        if self.meta(e).mask & d.mask == 0 {
            return Ok(Self::ZERO);
        }
        if let Some(&r) = d.memo.get(&e) {
            budget.charge(1)?;
            return Ok(r);
        }
        let r = match self.node(e).clone() {
            Node::Number(_) | Node::Pi => Self::ZERO,
            Node::Undefined => Self::UNDEFINED,
            Node::Symbol(_) | Node::Jet(..) | Node::Member { .. } => (d.atom)(self, e)?,
            Node::Sum(_, terms) => {
                budget.charge(terms.len())?;
                let mut out = Vec::with_capacity(terms.len());
                for (x, c) in terms.iter() {
                    let y = self.derive_node(*x, d, budget)?;
                    if y != Self::ZERO {
                        out.push((y, c.clone()));
                    }
                }
                self.linear(&out)
            }
            Node::Product(factors) => {
                budget.charge(factors.len())?;
                let mut out = Vec::new();
                for (i, (b, n)) in factors.iter().enumerate() {
                    let y = self.derive_node(*b, d, budget)?;
                    if y == Self::ZERO {
                        continue;
                    }
                    let mut list = factors.to_vec();
                    list[i].1 = n.sub(&Rational::ONE);
                    list.push((y, Rational::ONE));
                    budget.charge(list.len())?;
                    let m = self.monomial(&list);
                    out.push((m, n.clone()));
                }
                self.linear(&out)
            }
            Node::Power(b, x) => {
                // d(b^x) = b^x (x' log b + x b'/b).
                let (db, dx) = (self.derive_node(b, d, budget)?, self.derive_node(x, d, budget)?);
                let mut out = Vec::new();
                if dx != Self::ZERO {
                    let l = self.call(Function::Log, &[b]);
                    out.push(self.product(&[e, dx, l]));
                }
                if db != Self::ZERO {
                    out.push(self.monomial(&[
                        (e, Rational::ONE),
                        (x, Rational::ONE),
                        (db, Rational::ONE),
                        (b, Rational::MINUS_ONE),
                    ]));
                }
                self.sum(&out)
            }
            Node::Call(f, args) => {
                // d log|u| = u'/u, for either sign.
                let args = match self.node(args[0]) {
                    Node::Call(Function::Abs, inner) if f == Function::Log => inner.clone(),
                    _ => args,
                };
                let mut out = Vec::new();
                for (k, &a) in args.iter().enumerate() {
                    let da = self.derive_node(a, d, budget)?;
                    if da != Self::ZERO {
                        let outer = self.outer_derivative(f, &args, k);
                        out.push(self.mul(outer, da));
                    }
                }
                self.sum(&out)
            }
            Node::Unspecified { function, index, orders, args } => {
                let mut out = Vec::new();
                for (k, &a) in args.iter().enumerate() {
                    let da = self.derive_node(a, d, budget)?;
                    if da != Self::ZERO {
                        let mut orders = orders.to_vec();
                        orders[k] = orders[k].saturating_add(1);
                        let outer = self.unspecified(function, index, &orders, &args);
                        out.push(self.mul(outer, da));
                    }
                }
                self.sum(&out)
            }
            Node::Bound { index, lower, upper, body } => {
                let y = self.derive_node(body, d, budget)?;
                self.bound(index, lower, upper, y, budget)?
            }
        };
        budget.charge(1)?;
        d.memo.insert(e, r);
        Ok(r)
    }

    /// The derivative of a known function by its k-th argument.
    fn outer_derivative(&mut self, f: Function, args: &[Expr], k: usize) -> Expr {
        let x = args[0];
        let one_minus = |a: &mut Arena, e: Expr, c: Rational| a.linear(&[(Self::ONE, Rational::ONE), (e, c)]);
        match f {
            Function::Sin => self.call(Function::Cos, &[x]),
            Function::Cos => {
                let s = self.call(Function::Sin, &[x]);
                self.neg(s)
            }
            Function::Tan => {
                let c = self.call(Function::Cos, &[x]);
                self.pow(c, -2)
            }
            Function::Asin | Function::Acos => {
                let x2 = self.pow(x, 2);
                let r = one_minus(self, x2, Rational::MINUS_ONE);
                let e = self.pow_rational(r, &Rational::HALF.neg());
                if f == Function::Asin { e } else { self.neg(e) }
            }
            Function::Atan => {
                let x2 = self.pow(x, 2);
                let r = one_minus(self, x2, Rational::ONE);
                self.pow(r, -1)
            }
            Function::Atan2 => {
                // d atan2(y, x) = (x dy − y dx)/(x² + y²).
                let (y2, x2) = (self.pow(args[0], 2), self.pow(args[1], 2));
                let r2 = self.add(x2, y2);
                let e = self.div(args[1 - k], r2);
                if k == 0 { e } else { self.neg(e) }
            }
            Function::Sinh => self.call(Function::Cosh, &[x]),
            Function::Cosh => self.call(Function::Sinh, &[x]),
            Function::Tanh => {
                let c = self.call(Function::Cosh, &[x]);
                self.pow(c, -2)
            }
            Function::Exp => self.call(Function::Exp, &[x]),
            Function::Log => self.pow(x, -1),
            Function::Abs => self.call(Function::Sign, &[x]),
            Function::Sign => Self::ZERO,
            Function::Min | Function::Max => {
                // The share of an argument is one where it is the extremum: (1 ± sign(aₖ − rest))/2.
                let others: Vec<Expr> = args.iter().enumerate().filter(|(i, _)| *i != k).map(|(_, &a)| a).collect();
                let rest = if others.len() == 1 { others[0] } else { self.call(f, &others) };
                let gap = if f == Function::Max { self.sub(args[k], rest) } else { self.sub(rest, args[k]) };
                let s = self.call(Function::Sign, &[gap]);
                let sum = self.add(Self::ONE, s);
                self.scale(sum, &Rational::HALF)
            }
        }
    }

    /// Replaces atoms by expressions, all at once. Costs one visit per distinct node.
    pub fn substitute(&mut self, e: Expr, map: &HashMap<Expr, Expr>, budget: &mut Budget) -> Result<Expr, Stopped> {
        if self.depth(e) > MAX_DEPTH {
            return Err(Stopped::TooDeep);
        }
        let mask = map.keys().fold(0, |m, k| m | self.meta(*k).mask);
        let mut memo = HashMap::new();
        self.substitute_node(e, map, mask, &mut memo, budget)
    }

    fn substitute_node(
        &mut self,
        e: Expr,
        map: &HashMap<Expr, Expr>,
        mask: u64,
        memo: &mut HashMap<Expr, Expr>,
        budget: &mut Budget,
    ) -> Result<Expr, Stopped> {
        if self.meta(e).mask & mask == 0 {
            return Ok(e);
        }
        if let Some(&r) = map.get(&e) {
            return Ok(r);
        }
        if let Some(&r) = memo.get(&e) {
            return Ok(r);
        }
        budget.charge(1)?;
        macro_rules! go {
            ($x:expr) => {
                self.substitute_node($x, map, mask, memo, budget)?
            };
        }
        let r = match self.node(e).clone() {
            Node::Number(_) | Node::Pi | Node::Undefined | Node::Symbol(_) | Node::Jet(..) => e,
            Node::Member { family, index, order } => {
                let index = go!(index);
                let m = self.member(family, index, order);
                // The member may have become one that is replaced.
                map.get(&m).copied().unwrap_or(m)
            }
            Node::Sum(c, terms) => {
                budget.charge(terms.len())?;
                let mut out = Vec::with_capacity(terms.len() + 1);
                for (x, k) in terms.iter() {
                    out.push((go!(*x), k.clone()));
                }
                out.push((Self::ONE, c));
                self.linear(&out)
            }
            Node::Product(factors) => {
                budget.charge(factors.len())?;
                let mut out = Vec::with_capacity(factors.len());
                for (x, k) in factors.iter() {
                    out.push((go!(*x), k.clone()));
                }
                self.monomial(&out)
            }
            Node::Power(b, x) => {
                let (b, x) = (go!(b), go!(x));
                self.power(b, x)
            }
            Node::Call(f, args) => {
                let mut out = Vec::with_capacity(args.len());
                for x in args.iter() {
                    out.push(go!(*x));
                }
                self.call(f, &out)
            }
            Node::Unspecified { function, index, orders, args } => {
                let index = match index {
                    Some(i) => Some(go!(i)),
                    None => None,
                };
                let mut out = Vec::with_capacity(args.len());
                for x in args.iter() {
                    out.push(go!(*x));
                }
                self.unspecified(function, index, &orders, &out)
            }
            Node::Bound { index, lower, upper, body } => {
                let (lower, upper) = (go!(lower), go!(upper));
                let body = go!(body);
                self.bound(index, lower, upper, body, budget)?
            }
        };
        memo.insert(e, r);
        Ok(r)
    }

    /// Multiplies products and integer powers of sums out. Bounded by the budget, which counts the summands made.
    pub fn expand(&mut self, e: Expr, budget: &mut Budget) -> Result<Expr, Stopped> {
        if self.depth(e) > MAX_DEPTH {
            return Err(Stopped::TooDeep);
        }
        if let Some(&r) = self.memo.expand.get(&e) {
            return Ok(r);
        }
        let r = match self.node(e).clone() {
            Node::Sum(c, terms) => {
                let mut out = vec![(Self::ONE, c)];
                for (x, k) in terms.iter() {
                    out.push((self.expand(*x, budget)?, k.clone()));
                }
                budget.charge(out.len())?;
                self.linear(&out)
            }
            Node::Product(factors) => {
                let mut acc = Self::ONE;
                for (b, n) in factors.iter() {
                    let b = self.expand(*b, budget)?;
                    match n.to_i64() {
                        Some(n) if n > 0 && matches!(self.node(b), Node::Sum(..)) => {
                            for _ in 0..n {
                                acc = self.distribute(acc, b, budget)?;
                            }
                        }
                        _ => {
                            let p = self.pow_rational(b, n);
                            acc = self.distribute(acc, p, budget)?;
                        }
                    }
                }
                acc
            }
            _ => e,
        };
        self.memo.expand.insert(e, r);
        Ok(r)
    }

    fn distribute(&mut self, a: Expr, b: Expr, budget: &mut Budget) -> Result<Expr, Stopped> {
        let (x, y) = (self.summands(a), self.summands(b));
        budget.charge(x.len().saturating_mul(y.len()))?;
        let mut out = Vec::with_capacity(x.len() * y.len());
        for (p, c) in &x {
            for (q, d) in &y {
                out.push((self.mul(*p, *q), c.mul(d)));
            }
        }
        Ok(self.linear(&out))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn budget() -> Budget {
        Budget::new(1_000_000)
    }

    fn coordinate(a: &mut Arena, name: &str) -> (Expr, Expr) {
        let s = a.symbol(name, None, Role::Coordinate);
        (a.sym(s), a.jet(s, 1))
    }

    #[test]
    fn equal_expressions_are_one_node() {
        let mut a = Arena::new();
        let (x, v) = coordinate(&mut a, "x");
        let p = a.mul(x, v);
        let q = a.mul(v, x);
        assert_eq!(p, q);
        let s = a.sub(p, q);
        assert_eq!(s, Arena::ZERO);
        // (2x + 2v)² = 4 (x + v)².
        let (x2, s) = (a.add(x, v), a.add(x, v));
        let twice = a.scale(x2, &Rational::integer(2));
        let (l, r) = (a.pow(twice, 2), a.pow(s, 2));
        let r = a.scale(r, &Rational::integer(4));
        assert_eq!(l, r);
        // (5/2 x + v)² = (5 x + 2 v)²/4: a fraction beside a one has a content.
        let fraction = a.linear(&[(x, Rational::new(5, 2).unwrap()), (v, Rational::ONE)]);
        let whole = a.linear(&[(x, Rational::integer(5)), (v, Rational::integer(2))]);
        let (l, r) = (a.pow(fraction, 2), a.pow(whole, 2));
        let r = a.scale(r, &Rational::new(1, 4).unwrap());
        assert_eq!(l, r);
        // (x − v)² = (v − x)².
        let (d, e) = (a.sub(x, v), a.sub(v, x));
        assert_eq!(a.pow(d, 2), a.pow(e, 2));
    }

    #[test]
    fn numeric_roots() {
        let mut a = Arena::new();
        let (two, six, twelve) = (a.integer(2), a.integer(6), a.integer(12));
        let (r2, r6, r12) = (a.sqrt(two), a.sqrt(six), a.sqrt(twelve));
        let p = a.mul(r2, r6);
        assert_eq!(p, r12);
        let p = a.mul(r2, r2);
        assert_eq!(p, two);
        let half = a.number(Rational::HALF);
        let rh = a.sqrt(half);
        let p = a.mul(rh, r2);
        assert_eq!(p, Arena::ONE);
        let m = a.integer(-1);
        let i = a.sqrt(m);
        let p = a.mul(i, i);
        assert_eq!(p, m);
    }

    #[test]
    fn the_root_of_a_square_stays() {
        let mut a = Arena::new();
        let (x, _) = coordinate(&mut a, "x");
        let x2 = a.pow(x, 2);
        let r = a.sqrt(x2);
        assert_ne!(r, x);
        let p = a.mul(r, r);
        assert_eq!(p, x2);
    }

    #[test]
    fn exact_angles() {
        let mut a = Arena::new();
        let pi = a.pi();
        let third = a.scale(pi, &Rational::new(2, 3).unwrap());
        let c = a.call(Function::Cos, &[third]);
        assert_eq!(c, a.number(Rational::new(-1, 2).unwrap()));
        let (x, _) = coordinate(&mut a, "x");
        let shifted = a.linear(&[(x, Rational::ONE), (pi, Rational::HALF)]);
        let (s, c) = (a.call(Function::Sin, &[shifted]), a.call(Function::Cos, &[x]));
        assert_eq!(s, c);
    }

    #[test]
    fn derivatives() {
        let mut a = Arena::new();
        let mut b = budget();
        let (x, v) = coordinate(&mut a, "x");
        let (s, c) = (a.call(Function::Sin, &[x]), a.call(Function::Cos, &[x]));
        let d = a.total(s, &mut b).unwrap();
        let cv = a.mul(c, v);
        assert_eq!(d, cv);
        // ∂/∂ẋ of ẋ²/2 is ẋ; its rate is ẍ.
        let t = a.pow(v, 2);
        let t = a.scale(t, &Rational::HALF);
        let p = a.partial(t, v, &mut b).unwrap();
        assert_eq!(p, v);
        let f = a.symbol("x", None, Role::Coordinate);
        let acc = a.jet(f, 2);
        assert_eq!(a.total(p, &mut b), Ok(acc));
    }

    #[test]
    fn a_power_too_large_stays_symbolic() {
        let mut a = Arena::new();
        let (x, _) = coordinate(&mut a, "x");
        let e = a.pow(x, 1_000_000_000);
        let d = a.partial(e, x, &mut budget()).unwrap();
        let lower = a.pow(x, 999_999_999);
        let want = a.scale(lower, &Rational::integer(1_000_000_000));
        assert_eq!(d, want);
        let two = a.integer(2);
        let big = a.pow(two, 1_000_000_000);
        assert!(a.as_number(big).is_none());
    }

    #[test]
    fn bound_sums_that_differ_in_the_index_are_one() {
        let mut a = Arena::new();
        let mut b = budget();
        let fam = a.symbol("x", None, Role::Coordinate);
        let make = |a: &mut Arena, b: &mut Budget, name: &str| {
            let i = a.symbol(name, None, Role::Index);
            let ie = a.sym(i);
            let m = a.member(fam, ie, 1);
            let body = a.pow(m, 2);
            let (one, n) = (a.integer(1), a.integer(1000));
            a.bound(i, one, n, body, b).unwrap()
        };
        let (s, t) = (make(&mut a, &mut b, "i"), make(&mut a, &mut b, "j"));
        assert_eq!(s, t);
        assert!(matches!(a.node(s), Node::Bound { .. }));
    }

    #[test]
    fn zero_to_a_negative_power_is_undefined() {
        let mut a = Arena::new();
        let (x, _) = coordinate(&mut a, "x");
        let d = a.div(x, Arena::ZERO);
        assert_eq!(d, Arena::UNDEFINED);
    }
}
