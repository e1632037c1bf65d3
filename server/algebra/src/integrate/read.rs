//! From expressions to fractions over generators.

use super::polynomial::{Poly, power_of};
use super::span::Span;
use super::tower::{Fail, Frac, Generator, Kind, Pair, Res, Signs, Tower};
use crate::arena::{Arena, Expr, Node, Symbol};
use crate::budget::Budget;
use crate::function::Function;
use crate::rational::Rational;
use hashbrown::HashMap;

/// Nested more deeply, nothing is read.
const MAX_NESTING: u32 = 256;
/// Powers of sums above this are not multiplied out.
const MAX_POWER: i64 = 24;

impl<'a, 'b> Tower<'a, 'b> {
    /// The generators of an integrand. `variables` are atoms with their rates.
    pub fn new(
        arena: &'a mut Arena,
        budget: &'a mut Budget,
        signs: &'a mut Signs<'b>,
        variables: &[(Expr, Expr)],
        integrand: Expr,
    ) -> Res<Tower<'a, 'b>> {
        let mut arguments = [Vec::new(), Vec::new()];
        let mut hyperbolic = Vec::new();
        let mut tangents = Vec::new();
        let mut orders: HashMap<(Symbol, Option<Expr>), u16> = HashMap::new();
        arena.visit(integrand, &mut |_, node| match node {
            Node::Call(f, args) => match f {
                Function::Sin | Function::Cos => arguments[0].push(args[0]),
                Function::Tan => {
                    arguments[0].push(args[0]);
                    tangents.push(args[0]);
                }
                Function::Exp => arguments[1].push(args[0]),
                Function::Sinh | Function::Cosh | Function::Tanh => {
                    arguments[1].push(args[0]);
                    hyperbolic.push(args[0]);
                    if *f == Function::Tanh {
                        tangents.push(args[0]);
                    }
                }
                _ => {}
            },
            Node::Unspecified { function, index, orders: o, .. } => {
                let total = o.iter().fold(0u16, |a, b| a.saturating_add(*b));
                let slot = orders.entry((*function, *index)).or_default();
                *slot = total.max(*slot);
            }
            _ => {}
        });
        let circular = Span::of(arena, &arguments[0], budget)?.ok_or(Fail::Unsupported)?;
        let exponential = Span::of(arena, &arguments[1], budget)?.ok_or(Fail::Unsupported)?;
        let mut t = Tower {
            arena,
            budget,
            signs,
            generators: Vec::new(),
            factors: Vec::new(),
            circular: vec![None; circular.basis.len()],
            hyperbolic: vec![None; exponential.basis.len()],
            spans: [circular, exponential],
            tangents,
            paired: Vec::new(),
            atoms: HashMap::new(),
            memo: HashMap::new(),
            orders,
        };
        // Rates that are no variables themselves come first: they are constants to the derivation.
        for &(_, rate) in variables {
            let atom = matches!(t.arena.node(rate), Node::Symbol(_) | Node::Jet(..) | Node::Member { .. });
            if atom && !variables.iter().any(|v| v.0 == rate) && !t.atoms.contains_key(&rate) {
                t.atom(rate, Kind::Rate, Some(Frac::zero()))?;
            }
        }
        for &(atom, _) in variables {
            t.atom(atom, Kind::Base, None)?;
        }
        for &(atom, rate) in variables {
            let rate = t.read(rate, 0)?;
            let k = t.atoms[&atom];
            t.generators[k].rate = Some(rate);
        }
        // Exponentials are written with sinh and cosh where those are in the integrand.
        t.paired = (0..t.spans[1].basis.len())
            .map(|i| hyperbolic.iter().any(|a| t.spans[1].multiples(*a).is_some_and(|m| m[i] != 0)))
            .collect();
        Ok(t)
    }

    fn atom(&mut self, e: Expr, kind: Kind, rate: Option<Frac>) -> Res<usize> {
        let k = self.push(Generator { expr: e, kind, rate, relation: None, inside: None })?;
        self.atoms.insert(e, k);
        Ok(k)
    }

    /// A generator without relation, or the one that is there.
    fn generator(&mut self, e: Expr, kind: Kind, rate: Option<Frac>) -> Res<Frac> {
        let k = match self.atoms.get(&e) {
            Some(&k) => k,
            None => self.atom(e, kind, rate)?,
        };
        Ok(Frac::of(Poly::variable(k)))
    }

    /// The generators of an argument in the basis, made when they are first needed.
    fn circular_pair(&mut self, i: usize) -> Res<Pair> {
        if let Some(known) = &self.circular[i] {
            return Ok(known.clone());
        }
        let made = self.new_circular_pair(self.spans[0].basis[i], i)?;
        self.circular[i] = Some(made.clone());
        Ok(made)
    }

    fn new_circular_pair(&mut self, argument: Expr, i: usize) -> Res<Pair> {
        let inner = self.read(argument, 1)?;
        let rate = self.rate(&inner)?;
        let (s, c) = (self.arena.call(Function::Sin, &[argument]), self.arena.call(Function::Cos, &[argument]));
        let second = self.atom(c, Kind::Cosine(i), None)?;
        let first = self.atom(s, Kind::Sine(i), None)?;
        let one_less = Poly::one().sub(&Poly::monomial(power_of(second, 2), Rational::ONE));
        self.generators[first].relation = Some((2, one_less));
        let (sp, cp) = (Frac::of(Poly::variable(first)), Frac::of(Poly::variable(second)));
        self.generators[first].rate = Some(self.mul(&rate, &cp)?);
        self.generators[second].rate = Some(self.mul(&rate, &sp)?.neg());
        Ok(Pair { argument, first, second, rate })
    }

    fn exponential_pair(&mut self, i: usize) -> Res<Pair> {
        if let Some(known) = &self.hyperbolic[i] {
            return Ok(known.clone());
        }
        let made = self.new_exponential_pair(self.spans[1].basis[i], i)?;
        self.hyperbolic[i] = Some(made.clone());
        Ok(made)
    }

    fn new_exponential_pair(&mut self, argument: Expr, i: usize) -> Res<Pair> {
        let inner = self.read(argument, 1)?;
        let rate = self.rate(&inner)?;
        if !self.paired[i] {
            let e = self.arena.call(Function::Exp, &[argument]);
            let k = self.atom(e, Kind::Exponential, None)?;
            self.generators[k].rate = Some(self.mul(&rate, &Frac::of(Poly::variable(k)))?);
            return Ok(Pair { argument, first: k, second: k, rate });
        }
        let (s, c) = (self.arena.call(Function::Sinh, &[argument]), self.arena.call(Function::Cosh, &[argument]));
        let second = self.atom(c, Kind::Cosh(i), None)?;
        let first = self.atom(s, Kind::Sinh(i), None)?;
        let less_one = Poly::monomial(power_of(second, 2), Rational::ONE).sub(&Poly::one());
        self.generators[first].relation = Some((2, less_one));
        let (sp, cp) = (Frac::of(Poly::variable(first)), Frac::of(Poly::variable(second)));
        self.generators[first].rate = Some(self.mul(&rate, &cp)?);
        self.generators[second].rate = Some(self.mul(&rate, &sp)?);
        Ok(Pair { argument, first, second, rate })
    }

    /// An expression as a fraction.
    pub fn read(&mut self, e: Expr, level: u32) -> Res<Frac> {
        if level > MAX_NESTING {
            return Err(Fail::Unsupported);
        }
        if let Some(f) = self.memo.get(&e) {
            return Ok(f.clone());
        }
        self.budget.charge(1)?;
        let f = self.read_new(e, level)?;
        self.memo.insert(e, f.clone());
        Ok(f)
    }

    fn read_new(&mut self, e: Expr, level: u32) -> Res<Frac> {
        match self.arena.node(e).clone() {
            Node::Undefined => Err(Fail::Unsupported),
            Node::Number(r) => Ok(Frac::of(Poly::number(r))),
            Node::Pi | Node::Symbol(_) | Node::Jet(..) | Node::Member { .. } => {
                self.generator(e, Kind::Constant, Some(Frac::zero()))
            }
            Node::Sum(c, terms) => {
                let mut out = Frac::of(Poly::number(c));
                for (t, k) in terms.iter() {
                    let f = self.read(*t, level + 1)?;
                    out = self.add(&out, &f.scale(k))?;
                }
                self.cancel(out)
            }
            Node::Product(factors) => {
                let mut out = Frac::one();
                for (b, n) in factors.iter() {
                    let f = self.read_power(*b, n, level + 1)?;
                    out = self.mul(&out, &f)?;
                }
                self.cancel(out)
            }
            Node::Power(b, x) => self.read_symbolic_power(b, x, level + 1),
            Node::Bound { .. } => {
                if self.moves(e) {
                    return Err(Fail::Unsupported);
                }
                self.generator(e, Kind::Constant, Some(Frac::zero()))
            }
            Node::Unspecified { function, index, orders, args } => {
                if !self.moves(e) {
                    return self.generator(e, Kind::Constant, Some(Frac::zero()));
                }
                self.read_unspecified(function, index, &orders, &args, level + 1)
            }
            Node::Call(f, args) => self.read_call(e, f, &args, level + 1),
        }
    }

    /// Whether a variable is in it.
    fn moves(&self, e: Expr) -> bool {
        self.arena.atoms(e).iter().any(|a| {
            // What is no variable yet is a constant.
            self.atoms.get(a).is_some_and(|&k| matches!(self.generators[k].kind, Kind::Base | Kind::Rate))
        })
    }

    pub fn integer_power(&mut self, f: &Frac, n: i64) -> Res<Frac> {
        if n.abs() > MAX_POWER && f.num.as_monomial().is_none() || n.abs() > 150 {
            return Err(Fail::Unsupported);
        }
        let base = if n < 0 { self.invert(f)? } else { f.clone() };
        self.pow(&base, n.unsigned_abs() as u32)
    }

    fn read_power(&mut self, b: Expr, n: &Rational, level: u32) -> Res<Frac> {
        let (p, q) = n.small().ok_or(Fail::Unsupported)?;
        if q == 1 {
            let f = self.read(b, level)?;
            return self.integer_power(&f, p);
        }
        let inside = self.read(b, level)?;
        let (k, under) = self.root(b, &inside, q)?;
        let mut f = Frac::of(Poly::variable(k));
        f = self.mul(&f, &under)?;
        self.integer_power(&f, p)
    }

    /// The generator D f^(1/q) with the denominator D of f, and 1/D.
    fn root(&mut self, b: Expr, inside: &Frac, q: i64) -> Res<(usize, Frac)> {
        if !(2..=12).contains(&q) {
            return Err(Fail::Unsupported);
        }
        let under = Frac { num: Poly::one(), den: inside.den.clone() };
        let known = self
            .generators
            .iter()
            .position(|g| g.kind == Kind::Root && g.inside.as_ref().is_some_and(|(f, n)| *n == q && f == inside));
        if let Some(k) = known {
            return Ok((k, under));
        }
        let over = self.denominator(inside)?;
        let mut by = inside.num.clone();
        for _ in 1..q {
            by = self.mul_poly(&by, &over)?;
        }
        let log = {
            let d = self.rate(inside)?;
            let inverse = self.invert(inside)?;
            self.mul(&d, &inverse)?.scale(&Rational::new(1, q).unwrap_or(Rational::ONE))
        };
        let root = self.arena.pow_rational(b, &Rational::new(1, q).unwrap_or(Rational::ONE));
        let d = self.write_poly(&over)?;
        let expr = self.arena.mul(d, root);
        let k = self.push(Generator {
            expr,
            kind: Kind::Root,
            rate: None,
            relation: Some((q as i16, by)),
            inside: Some((inside.clone(), q)),
        })?;
        self.log_rate(k, log, &over)?;
        Ok((k, under))
    }

    /// Sets the rate of D g where g has the logarithmic rate `log`.
    fn log_rate(&mut self, k: usize, log: Frac, over: &Poly) -> Res<()> {
        let d = self.rate_of_poly(over)?;
        let inverse = self.invert(&Frac::of(over.clone()))?;
        let more = self.mul(&d, &inverse)?;
        let sum = self.add(&log, &more)?;
        let rate = self.mul(&sum, &Frac::of(Poly::variable(k)))?;
        self.generators[k].rate = Some(self.cancel(rate)?);
        Ok(())
    }

    /// Π factor^den.
    pub fn denominator(&mut self, f: &Frac) -> Res<Poly> {
        self.raise(&Frac::one(), &f.den)
    }

    /// b^x for a symbolic exponent: whole multiples of known ones are their powers.
    fn read_symbolic_power(&mut self, b: Expr, x: Expr, level: u32) -> Res<Frac> {
        let (number, rest) = match self.arena.node(x).clone() {
            Node::Sum(c, _) => {
                let minus = c.neg();
                let minus = self.arena.number(minus);
                (c, self.arena.add(x, minus))
            }
            _ => (Rational::ZERO, x),
        };
        let whole = number.floor().filter(|w| Rational::integer(*w) == number).ok_or(Fail::Unsupported)?;
        let base = self.read(b, level)?;
        let (c, core) = self.arena.split_coefficient(rest);
        let found = (0..self.generators.len()).find_map(|k| {
            let Node::Power(b2, x2) = *self.arena.node(self.generators[k].expr) else { return None };
            let (c2, core2) = self.arena.split_coefficient(x2);
            let n = c.div(&c2)?.to_i64()?;
            (b2 == b && core2 == core).then_some((k, n))
        });
        let power = match found {
            Some((k, n)) => Frac::of(Poly::monomial(power_of(k, n.clamp(-100, 100) as i16), Rational::ONE)),
            None => {
                let e = self.arena.power(b, rest);
                let k = self.atom(e, Kind::Exponential, None)?;
                // The logarithmic rate: x' log b + x b'/b.
                let x = self.read(rest, level)?;
                let (db, dx) = (self.rate(&base)?, self.rate(&x)?);
                let inverse = self.invert(&base)?;
                let mut log = self.mul(&x, &db)?;
                log = self.mul(&log, &inverse)?;
                if !dx.is_zero() {
                    let l = self.arena.call(Function::Log, &[b]);
                    let l = self.read(l, level)?;
                    let more = self.mul(&dx, &l)?;
                    log = self.add(&log, &more)?;
                }
                self.generators[k].rate = Some(self.mul(&log, &Frac::of(Poly::variable(k)))?);
                Frac::of(Poly::variable(k))
            }
        };
        let outer = self.integer_power(&base, whole)?;
        self.mul(&power, &outer)
    }

    fn read_unspecified(
        &mut self,
        function: Symbol,
        index: Option<Expr>,
        orders: &[u16],
        args: &[Expr],
        level: u32,
    ) -> Res<Frac> {
        // All derivatives up to the highest order in the integrand, lowest first.
        let top = self.orders.get(&(function, index)).copied().unwrap_or(0).min(8);
        let mut inner = Vec::new();
        for &a in args {
            let f = self.read(a, level)?;
            inner.push(self.rate(&f)?);
        }
        let mut lists: Vec<Vec<u16>> = vec![Vec::new()];
        for d in &inner {
            let mut more = Vec::new();
            for l in &lists {
                let used: u16 = l.iter().sum();
                for k in 0..=if d.is_zero() { 0 } else { top.saturating_sub(used) } {
                    let mut l = l.clone();
                    l.push(k);
                    more.push(l);
                }
            }
            lists = more;
        }
        // Of an argument that does not move the order stays.
        for l in &mut lists {
            for (k, d) in inner.iter().enumerate() {
                if d.is_zero() {
                    l[k] = orders[k];
                }
            }
        }
        let mut numbers = HashMap::new();
        for l in &lists {
            let e = self.arena.unspecified(function, index, l, args);
            let kind = Kind::Unspecified { function, index, orders: l.clone() };
            let known = self.atoms.get(&e).copied();
            let k = match known {
                Some(k) => k,
                None => self.atom(e, kind, None)?,
            };
            numbers.insert(l.clone(), k);
        }
        for l in &lists {
            let mut rate = Some(Frac::zero());
            for (i, d) in inner.iter().enumerate() {
                if d.is_zero() {
                    continue;
                }
                let mut next = l.clone();
                next[i] += 1;
                rate = match (rate, numbers.get(&next)) {
                    (Some(r), Some(&k)) => {
                        let term = self.mul(d, &Frac::of(Poly::variable(k)))?;
                        Some(self.add(&r, &term)?)
                    }
                    _ => None,
                };
            }
            let k = numbers[l];
            self.generators[k].rate = rate;
        }
        let k = numbers.get(orders).copied().ok_or(Fail::Unsupported)?;
        Ok(Frac::of(Poly::variable(k)))
    }

    fn read_call(&mut self, e: Expr, f: Function, args: &[Expr], level: u32) -> Res<Frac> {
        let x = args[0];
        match f {
            Function::Sin | Function::Cos | Function::Tan => {
                let (s, c) = self.multiple_angle(x)?;
                return match f {
                    Function::Sin => Ok(s),
                    Function::Cos => Ok(c),
                    _ => {
                        let inverse = self.invert(&c)?;
                        self.mul(&s, &inverse)
                    }
                };
            }
            Function::Exp => return self.exponential(x, 1),
            Function::Sinh | Function::Cosh | Function::Tanh => {
                let (up, down) = (self.exponential(x, 1)?, self.exponential(x, -1)?);
                let (s, c) = (self.sub(&up, &down)?, self.add(&up, &down)?);
                return match f {
                    Function::Sinh => Ok(s.scale(&Rational::HALF)),
                    Function::Cosh => Ok(c.scale(&Rational::HALF)),
                    _ => {
                        let inverse = self.invert(&c)?;
                        self.mul(&s, &inverse)
                    }
                };
            }
            _ => {}
        }
        if !self.moves(e) {
            return self.generator(e, Kind::Constant, Some(Frac::zero()));
        }
        if let Some(&k) = self.atoms.get(&e) {
            return Ok(Frac::of(Poly::variable(k)));
        }
        match f {
            Function::Log => {
                // |u| has the logarithmic rate of u.
                let u = match self.arena.node(x) {
                    Node::Call(Function::Abs, inner) => inner[0],
                    _ => x,
                };
                let u = self.read(u, level)?;
                let (d, inverse) = (self.rate(&u)?, self.invert(&u)?);
                let rate = self.mul(&d, &inverse)?;
                let rate = self.cancel(rate)?;
                self.generator(e, Kind::Other, Some(rate))
            }
            Function::Asin | Function::Acos | Function::Atan => {
                let x2 = self.arena.pow(x, 2);
                let sign = Rational::integer(if f == Function::Atan { 1 } else { -1 });
                let under = self.arena.linear(&[(Arena::ONE, Rational::ONE), (x2, sign)]);
                let power = if f == Function::Atan { Rational::MINUS_ONE } else { Rational::HALF.neg() };
                let outer = self.read_power(under, &power, level)?;
                let u = self.read(x, level)?;
                let d = self.rate(&u)?;
                let mut rate = self.mul(&outer, &d)?;
                if f == Function::Acos {
                    rate = rate.neg();
                }
                let rate = self.cancel(rate)?;
                self.generator(e, Kind::Other, Some(rate))
            }
            Function::Atan2 => {
                let (y, x) = (self.read(x, level)?, self.read(args[1], level)?);
                let (dy, dx) = (self.rate(&y)?, self.rate(&x)?);
                let (a, b) = (self.mul(&x, &dy)?, self.mul(&y, &dx)?);
                let (x2, y2) = (self.mul(&x, &x)?, self.mul(&y, &y)?);
                let (over, under) = (self.sub(&a, &b)?, self.add(&x2, &y2)?);
                let inverse = self.invert(&under)?;
                let rate = self.mul(&over, &inverse)?;
                let rate = self.cancel(rate)?;
                self.generator(e, Kind::Other, Some(rate))
            }
            Function::Abs => {
                let k = self.absolute(x, level)?;
                let under = self.generators[k].inside.as_ref().map(|i| i.0.den.clone()).unwrap_or_default();
                let f = Frac { num: Poly::variable(k), den: under };
                self.cancel(f)
            }
            Function::Sign => {
                // |u|/u.
                let a = self.arena.call(Function::Abs, &[x]);
                let a = self.read(a, level)?;
                let u = self.read(x, level)?;
                let inverse = self.invert(&u)?;
                self.mul(&a, &inverse)
            }
            Function::Min | Function::Max => {
                // (a + b ± |a − b|)/2, of the first and the rest.
                let rest = if args.len() == 2 { args[1] } else { self.arena.call(f, &args[1..]) };
                let gap = self.arena.sub(x, rest);
                let a = self.arena.call(Function::Abs, &[gap]);
                let (a, x, rest) = (self.read(a, level)?, self.read(x, level)?, self.read(rest, level)?);
                let sum = self.add(&x, &rest)?;
                let out = if f == Function::Max { self.add(&sum, &a)? } else { self.sub(&sum, &a)? };
                Ok(out.scale(&Rational::HALF))
            }
            _ => Err(Fail::Unsupported),
        }
    }

    fn absolute(&mut self, x: Expr, level: u32) -> Res<usize> {
        let inside = self.read(x, level)?;
        let minus = inside.neg();
        let known = self.generators.iter().position(|g| {
            g.kind == Kind::Absolute && g.inside.as_ref().is_some_and(|(f, _)| *f == inside || *f == minus)
        });
        if let Some(k) = known {
            return Ok(k);
        }
        let over = self.denominator(&inside)?;
        let by = self.mul_poly(&inside.num, &inside.num)?;
        let (d, inverse) = (self.rate(&inside)?, self.invert(&inside)?);
        let log = self.mul(&d, &inverse)?;
        let a = self.arena.call(Function::Abs, &[x]);
        let d = self.write_poly(&over)?;
        let expr = self.arena.mul(d, a);
        let k = self.push(Generator {
            expr,
            kind: Kind::Absolute,
            rate: None,
            relation: Some((2, by)),
            inside: Some((inside, 1)),
        })?;
        self.log_rate(k, log, &over)?;
        Ok(k)
    }

    /// sin and cos of an argument in the generators.
    fn multiple_angle(&mut self, x: Expr) -> Res<(Frac, Frac)> {
        let multiples = self.spans[0].multiples(x).ok_or(Fail::Unsupported)?.to_vec();
        let (mut s, mut c) = (Frac::zero(), Frac::one());
        for (i, n) in multiples.into_iter().enumerate() {
            if n == 0 {
                continue;
            }
            let pair = self.circular_pair(i)?;
            let si = Frac::of(Poly::variable(pair.first)).scale(&Rational::integer(n.signum()));
            let ci = Frac::of(Poly::variable(pair.second));
            for _ in 0..n.abs() {
                let (a, b) = (self.mul(&s, &ci)?, self.mul(&c, &si)?);
                let (d, e) = (self.mul(&c, &ci)?, self.mul(&s, &si)?);
                (s, c) = (self.add(&a, &b)?, self.sub(&d, &e)?);
            }
        }
        Ok((s, c))
    }

    /// exp(± x) in the generators.
    fn exponential(&mut self, x: Expr, sign: i64) -> Res<Frac> {
        let multiples = self.spans[1].multiples(x).ok_or(Fail::Unsupported)?.to_vec();
        let mut out = Frac::one();
        for (i, n) in multiples.into_iter().enumerate() {
            let n = n * sign;
            if n == 0 {
                continue;
            }
            let pair = self.exponential_pair(i)?;
            let power = if pair.first == pair.second {
                Frac::of(Poly::monomial(power_of(pair.first, n as i16), Rational::ONE))
            } else {
                // exp(±u) = cosh u ± sinh u.
                let s = Poly::variable(pair.first).scale(&Rational::integer(n.signum()));
                let sum = Frac::of(Poly::variable(pair.second).add(&s));
                self.pow(&sum, n.unsigned_abs() as u32)?
            };
            out = self.mul(&out, &power)?;
        }
        Ok(out)
    }
}
