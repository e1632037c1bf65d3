//! Constructors of function calls and bound sums.
//!
//! Rules, by name, with their side conditions (all arguments are real):
//! - *parity*: f(−x) = ±f(x) for odd and even f; the first coefficient of the argument is made positive.
//! - *quarter turns*: sin, cos of x + k π/2 for integer k.
//! - *exact angles*: sin, cos, tan of multiples of π/12 and π/10 become radicals.
//! - *inverse*: exp(log x) = x, log(exp x) = x, sin(asin x) = x, cos(acos x) = x, tan(atan x) = x.
//! - *absolute value*: |c x| = |c| |x| for a number c; |x| = x for even powers, exponentials and square roots.
//! - *constant summand*, *linearity*: of bound sums; factors free of the index are taken out.

use crate::arena::{Arena, Expr, Node, Role, Symbol};
use crate::budget::{Budget, Stopped};
use crate::function::Function;
use crate::rational::Rational;
use hashbrown::HashMap;

impl Arena {
    /// A known function of its arguments. The number of arguments must be in [`Function::arity`].
    pub fn call(&mut self, f: Function, args: &[Expr]) -> Expr {
        debug_assert!(args.len() >= f.arity().0 && args.len() <= f.arity().1);
        if args.contains(&Self::UNDEFINED) {
            return Self::UNDEFINED;
        }
        let Some(&x) = args.first() else { return Self::UNDEFINED };
        match f {
            Function::Min | Function::Max => return self.extremum(f, args),
            Function::Atan2 => {
                if x == Self::ZERO && self.as_number(args[1]).is_some_and(|r| r.signum() > 0) {
                    return Self::ZERO;
                }
                return self.intern(Node::Call(f, args.into()));
            }
            Function::Abs => return self.absolute(x),
            _ => {}
        }
        if x == Self::ZERO {
            match f {
                Function::Cos | Function::Cosh | Function::Exp => return Self::ONE,
                Function::Acos => {
                    let pi = self.pi();
                    return self.scale(pi, &Rational::HALF);
                }
                Function::Log => return Self::UNDEFINED,
                _ => return Self::ZERO,
            }
        }
        if let Node::Call(g, inner) = self.node(x) {
            use Function::*;
            if matches!((f, g), (Exp, Log) | (Log, Exp) | (Sin, Asin) | (Cos, Acos) | (Tan, Atan)) {
                return inner[0];
            }
        }
        if f == Function::Log && x == Self::ONE {
            return Self::ZERO;
        }
        if f == Function::Sign
            && let Some(r) = self.as_number(x)
        {
            let s = r.signum();
            return self.integer(s as i64);
        }
        if matches!(f, Function::Sin | Function::Cos | Function::Tan)
            && let Some(e) = self.turned(f, x)
        {
            return e;
        }
        if (f.is_odd() || f.is_even()) && self.leads_negative(x) {
            let y = self.neg(x);
            let e = self.intern(Node::Call(f, [y].into()));
            return if f.is_odd() { self.neg(e) } else { e };
        }
        self.intern(Node::Call(f, [x].into()))
    }

    /// Whether the first coefficient is negative.
    fn leads_negative(&self, e: Expr) -> bool {
        match self.node(e) {
            Node::Number(r) => r.is_negative(),
            Node::Sum(_, terms) => terms[0].1.is_negative(),
            _ => false,
        }
    }

    fn absolute(&mut self, x: Expr) -> Expr {
        let (c, rest) = self.split_coefficient(x);
        if rest == Self::ONE {
            return self.number(c.abs());
        }
        let known = match self.node(rest) {
            Node::Call(Function::Abs | Function::Exp | Function::Cosh | Function::Acos, _) | Node::Pi => true,
            Node::Product(list) => list.iter().all(|(_, e)| !e.is_integer() || e.is_even_integer()),
            _ => false,
        };
        let core = if known {
            rest
        } else if self.leads_negative(rest) {
            let y = self.neg(rest);
            self.intern(Node::Call(Function::Abs, [y].into()))
        } else {
            self.intern(Node::Call(Function::Abs, [rest].into()))
        };
        self.scale(core, &c.abs())
    }

    fn extremum(&mut self, f: Function, args: &[Expr]) -> Expr {
        let mut list = Vec::new();
        let mut number: Option<Rational> = None;
        for &a in args {
            let inner = match self.node(a) {
                Node::Call(g, inner) if *g == f => inner.to_vec(),
                _ => vec![a],
            };
            for x in inner {
                match self.as_number(x) {
                    Some(r) => {
                        let better = number.as_ref().is_none_or(|n| if f == Function::Min { r < n } else { r > n });
                        if better {
                            number = Some(r.clone());
                        }
                    }
                    None => list.push(x),
                }
            }
        }
        if let Some(n) = number {
            let n = self.number(n);
            list.push(n);
        }
        list.sort_by(|a, b| self.order(*a, *b));
        list.dedup();
        if list.len() == 1 { list[0] } else { self.intern(Node::Call(f, list.into())) }
    }

    /// *Quarter turns* and *exact angles*.
    fn turned(&mut self, f: Function, x: Expr) -> Option<Expr> {
        let pi = self.pi();
        let turns = match self.node(x) {
            Node::Pi => Rational::ONE,
            Node::Sum(_, terms) => terms.iter().find(|t| t.0 == pi)?.1.clone(),
            _ => return None,
        };
        let rest = {
            let minus = turns.neg();
            self.linear(&[(x, Rational::ONE), (pi, minus)])
        };
        if rest == Self::ZERO {
            return self.exact_angle(f, &turns);
        }
        let quarters = turns.mul(&Rational::integer(2)).to_i64()?;
        if quarters == 0 {
            return None;
        }
        Some(match (f, quarters.rem_euclid(4)) {
            (_, 0) | (Function::Tan, 2) => self.call(f, &[rest]),
            (Function::Sin, 1) => self.call(Function::Cos, &[rest]),
            (Function::Sin, 3) => {
                let c = self.call(Function::Cos, &[rest]);
                self.neg(c)
            }
            (Function::Cos, 1) => {
                let s = self.call(Function::Sin, &[rest]);
                self.neg(s)
            }
            (Function::Cos, 3) => self.call(Function::Sin, &[rest]),
            (Function::Tan, _) => {
                let t = self.call(Function::Tan, &[rest]);
                self.monomial(&[(t, Rational::MINUS_ONE)]).pipe_neg(self)
            }
            _ => {
                let e = self.call(f, &[rest]);
                self.neg(e)
            }
        })
    }

    /// sin, cos, tan of `turns · π` as radicals, for multiples of π/12 and π/10.
    fn exact_angle(&mut self, f: Function, turns: &Rational) -> Option<Expr> {
        let (n, d) = turns.small()?;
        let n = n.rem_euclid(2 * d);
        if 12 % d != 0 && 10 % d != 0 {
            // The sine of the smallest equivalent angle keeps equal values equal.
            return None;
        }
        match f {
            Function::Sin => self.exact_sine(n * (60 / d)),
            Function::Cos => self.exact_sine(n * (60 / d) + 30),
            _ => {
                let s = self.exact_sine(n * (60 / d))?;
                let c = self.exact_sine(n * (60 / d) + 30)?;
                Some(self.div(s, c))
            }
        }
    }

    /// The sine of `k` sixtieths of π.
    fn exact_sine(&mut self, k: i64) -> Option<Expr> {
        let k = k.rem_euclid(120);
        if k >= 60 {
            let s = self.exact_sine(k - 60)?;
            return Some(self.neg(s));
        }
        let k = if k > 30 { 60 - k } else { k };
        let root = |a: &mut Arena, n: i64, num: i64, den: i64| {
            let n = a.integer(n);
            let r = a.sqrt(n);
            a.scale(r, &Rational::new(num, den).unwrap_or(Rational::ONE))
        };
        Some(match k {
            0 => Self::ZERO,
            // 15°: (√6 − √2)/4.
            5 => {
                let (a, b) = (root(self, 6, 1, 4), root(self, 2, -1, 4));
                self.add(a, b)
            }
            // 18°: (√5 − 1)/4.
            6 => {
                let (a, b) = (root(self, 5, 1, 4), Rational::new(-1, 4)?);
                let b = self.number(b);
                self.add(a, b)
            }
            10 => self.number(Rational::HALF),
            // 36°: √(10 − 2√5)/4.
            12 => {
                let (a, b) = (self.integer(10), root(self, 5, -2, 1));
                let s = self.add(a, b);
                let r = self.sqrt(s);
                self.scale(r, &Rational::new(1, 4)?)
            }
            15 => root(self, 2, 1, 2),
            // 54°: (√5 + 1)/4.
            18 => {
                let (a, b) = (root(self, 5, 1, 4), Rational::new(1, 4)?);
                let b = self.number(b);
                self.add(a, b)
            }
            20 => root(self, 3, 1, 2),
            // 72°: √(10 + 2√5)/4.
            24 => {
                let (a, b) = (self.integer(10), root(self, 5, 2, 1));
                let s = self.add(a, b);
                let r = self.sqrt(s);
                self.scale(r, &Rational::new(1, 4)?)
            }
            // 75°: (√6 + √2)/4.
            25 => {
                let (a, b) = (root(self, 6, 1, 4), root(self, 2, 1, 4));
                self.add(a, b)
            }
            30 => Self::ONE,
            _ => return None,
        })
    }

    /// An unspecified function, differentiated `orders[k]` times by its k-th argument.
    pub fn unspecified(&mut self, function: Symbol, index: Option<Expr>, orders: &[u16], args: &[Expr]) -> Expr {
        debug_assert_eq!(orders.len(), args.len());
        if args.contains(&Self::UNDEFINED) {
            return Self::UNDEFINED;
        }
        let (function, index) = match index.map(|i| (i, self.as_i64(i))) {
            // At a number it is that member's own function.
            Some((_, Some(k))) => {
                let name = self.info(function).name.clone();
                (self.symbol(&name, Some(k), Role::Function), None)
            }
            Some((i, None)) => (function, Some(i)),
            None => (function, None),
        };
        self.intern(Node::Unspecified { function, index, orders: orders.into(), args: args.into() })
    }

    /// `Σ body` for `index` from `lower` to `upper`, both included; zero where the range is empty.
    pub fn bound(
        &mut self,
        index: Symbol,
        lower: Expr,
        upper: Expr,
        body: Expr,
        budget: &mut Budget,
    ) -> Result<Expr, Stopped> {
        if body == Self::UNDEFINED {
            return Ok(Self::UNDEFINED);
        }
        if let (Some(a), Some(b)) = (self.as_i64(lower), self.as_i64(upper)) {
            if a > b {
                return Ok(Self::ZERO);
            }
            if a == b {
                let i = self.sym(index);
                return self.substitute(body, &HashMap::from_iter([(i, lower)]), budget);
            }
        }
        let i = self.sym(index);
        let mut out = Vec::new();
        for (term, c) in self.summands(body) {
            let mut outside = Vec::new();
            let mut inside = Vec::new();
            for (b, e) in self.factors(term) {
                if self.may_contain(b, i) && self.atoms(b).contains(&i) {
                    inside.push((b, e));
                } else {
                    outside.push((b, e));
                }
            }
            budget.charge(1 + inside.len() + outside.len())?;
            let outside = self.monomial(&outside);
            let summed = if inside.is_empty() {
                let count = self.sub(upper, lower);
                self.add(count, Self::ONE)
            } else {
                let inside = self.monomial(&inside);
                let (k, inside) = self.split_coefficient(inside);
                debug_assert!(k.is_one());
                let level = self.meta(inside).bound_depth + 1;
                let own = self.bound_index(level);
                let body = if own == index {
                    inside
                } else {
                    let own = self.sym(own);
                    self.substitute(inside, &HashMap::from_iter([(i, own)]), budget)?
                };
                self.intern(Node::Bound { index: own, lower, upper, body })
            };
            let e = self.mul(outside, summed);
            out.push((e, c));
        }
        Ok(self.linear(&out))
    }
}

trait PipeNeg {
    fn pipe_neg(self, arena: &mut Arena) -> Expr;
}

impl PipeNeg for Expr {
    fn pipe_neg(self, arena: &mut Arena) -> Expr {
        arena.neg(self)
    }
}
