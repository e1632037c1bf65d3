//! How a node that is more than a sum or an integer product of its children is evaluated.
//!
//! A plan rewrites the node by identities that hold wherever the node has a real value:
//! angles as rational multiples of base monomials, roots and absolute values factor by factor, logarithms as sums.

use super::assumptions::Assumptions;
use super::notes::Notes;
use super::signs::{self, Sign};
use crate::arena::{Arena, Expr, Node};
use crate::budget::Budget;
use crate::function::Function;
use crate::rational::Rational;

/// One factor of a product.
#[derive(Clone, Debug)]
pub(crate) struct Factor {
    /// The base.
    pub base: Expr,
    /// What is done to it.
    pub kind: Kind,
}

/// What is done to the base of a factor.
#[derive(Clone, PartialEq, Debug)]
pub(crate) enum Kind {
    /// bᵏ
    Integer(i64),
    /// |b|ᵏ, where the sign of b is not known.
    Absolute(i64),
    /// bᵏ √b
    Root(i64),
    /// sign b, where it is not known.
    Signum,
    /// b^(a/n) for n > 2.
    Other(Rational),
}

/// One summand of a logarithm: coefficient · log base, or coefficient · base.
#[derive(Clone, Debug)]
pub(crate) struct LogTerm {
    /// The argument.
    pub base: Expr,
    /// Its coefficient.
    pub coefficient: Rational,
    /// Whether the summand is the base itself: log exp x = x.
    pub plain: bool,
}

/// The multiple of an angle whose cosine and sine are known.
#[derive(Clone, Debug)]
pub(crate) struct Known {
    /// The cosine.
    pub cosine: Expr,
    /// The sine.
    pub sine: Expr,
    /// How many times.
    pub times: i64,
}

/// The plan of a node.
#[derive(Clone, Debug)]
pub(crate) enum Plan {
    /// sin, cos, tan of Σ coefficient · monomial + turn · π.
    /// And of multiples of angles whose cosine and sine are known, such as atan2(y, x).
    Angle { terms: Box<[(Expr, Rational)]>, turn: Rational, known: Box<[Known]> },
    /// exp, sinh, cosh, tanh: e^(Σ coefficient · monomial) Π factors.
    Exponential { terms: Box<[(Expr, Rational)]>, factors: Box<[Factor]> },
    /// b^x: Π factors · e^(Σ Σ coefficient · monomial · logarithm).
    Power { factors: Box<[Factor]>, terms: Box<[(Expr, Rational)]>, logs: Box<[LogTerm]> },
    /// Π factors.
    Product(Box<[Factor]>),
    /// Σ logarithms.
    Log(Box<[LogTerm]>),
    /// A sum over a range of numbers. `order`: the nodes that depend on this index and no inner one, children first.
    /// `far`: from this value of the index on all members in the summand are beyond [`super::points::NEAR`].
    Bound { order: Box<[Expr]>, outside: Box<[Expr]>, far: Option<i64> },
}

impl Plan {
    /// Calls `f` with each node whose value the plan needs.
    pub fn for_needs(&self, f: &mut dyn FnMut(Expr)) {
        match self {
            Plan::Angle { terms, known, .. } => {
                terms.iter().for_each(|t| f(t.0));
                known.iter().for_each(|k| {
                    f(k.cosine);
                    f(k.sine);
                });
            }
            Plan::Exponential { terms, factors } => {
                terms.iter().for_each(|t| f(t.0));
                factors.iter().for_each(|t| f(t.base));
            }
            Plan::Power { factors, terms, logs } => {
                factors.iter().for_each(|t| f(t.base));
                terms.iter().for_each(|t| f(t.0));
                logs.iter().for_each(|t| f(t.base));
            }
            Plan::Product(factors) => factors.iter().for_each(|t| f(t.base)),
            Plan::Log(logs) => logs.iter().for_each(|t| f(t.base)),
            Plan::Bound { outside, .. } => outside.iter().for_each(|e| f(*e)),
        }
    }

    /// The factors inside, for the collection of radicands and unknown signs.
    pub fn factors(&self) -> &[Factor] {
        match self {
            Plan::Exponential { factors, .. } | Plan::Power { factors, .. } => factors,
            Plan::Product(factors) => factors,
            _ => &[],
        }
    }
}

/// Summands of an argument beyond which it is not multiplied out.
const ARGUMENT: u64 = 400;
/// Arguments nested more deeply are not multiplied out.
const ARGUMENT_DEPTH: u32 = 200;

/// Summands of a radicand beyond which it is left as it is.
const RADICAND: usize = 40;
/// Radicands nested more deeply are left as they are.
const RADICAND_DEPTH: u32 = 100;

/// What a plan could not do, as flags of the note.
pub(crate) struct Made {
    /// The plan; none where the node is evaluated from its children.
    pub plan: Option<Plan>,
    /// Flags to set.
    pub flags: u16,
}

/// Makes the plan of a node whose children have notes.
pub(crate) fn make(arena: &mut Arena, facts: &Assumptions, notes: &Notes, e: Expr) -> Made {
    let mut m = Maker { arena, facts, notes, flags: 0 };
    let plan = match m.arena.node(e) {
        Node::Product(list) if list.iter().any(|(_, r)| !r.is_integer()) => {
            let list = list.clone();
            let mut out = Vec::new();
            for (b, r) in list.iter() {
                m.raise(*b, r, false, &mut out, 0);
            }
            Some(Plan::Product(out.into()))
        }
        Node::Power(b, x) => {
            let (b, x) = (*b, *x);
            Some(m.symbolic_power(b, x))
        }
        Node::Call(f, args) => {
            let (f, x) = (*f, args[0]);
            match f {
                Function::Sin | Function::Cos | Function::Tan => Some(m.angle(x)),
                Function::Exp | Function::Sinh | Function::Cosh | Function::Tanh => Some(m.exponential(x)),
                Function::Log => {
                    let mut logs = Vec::new();
                    m.logarithm(x, &Rational::ONE, &mut logs, 0);
                    Some(Plan::Log(logs.into()))
                }
                Function::Abs | Function::Sign => {
                    let mut out = Vec::new();
                    m.absolute(x, f == Function::Sign, &mut out);
                    Some(Plan::Product(out.into()))
                }
                Function::Min | Function::Max if args.len() == 2 => {
                    let (a, b) = (x, args[1]);
                    let gap = m.arena.sub(a, b);
                    let s = signs::infer(m.arena, facts, gap, &|e| notes.sign(e));
                    let first = s.is_nonnegative() && f == Function::Max || s.is_nonpositive() && f == Function::Min;
                    let known = s.is_nonnegative() || s.is_nonpositive();
                    known.then(|| {
                        let base = if first { a } else { b };
                        Plan::Product([Factor { base, kind: Kind::Integer(1) }].into())
                    })
                }
                _ => None,
            }
        }
        _ => None,
    };
    Made { plan, flags: m.flags }
}

struct Maker<'a> {
    arena: &'a mut Arena,
    facts: &'a Assumptions,
    notes: &'a Notes,
    flags: u16,
}

impl Maker<'_> {
    fn sign(&self, e: Expr) -> Sign {
        self.notes.sign(e)
    }

    /// The summands of an argument after it is multiplied out within bounds.
    fn argument(&mut self, x: Expr) -> Vec<(Expr, Rational)> {
        let expanded = if self.arena.depth(x) > ARGUMENT_DEPTH {
            None
        } else {
            self.arena.expand(x, &mut Budget::new(ARGUMENT)).ok()
        };
        if expanded.is_none() {
            self.flags |= Notes::INCOMPLETE;
        }
        self.arena.summands(expanded.unwrap_or(x))
    }

    fn angle(&mut self, x: Expr) -> Plan {
        let pi = self.arena.pi();
        let mut turn = Rational::ZERO;
        let mut terms = self.argument(x);
        terms.retain(|(m, r)| {
            if *m == pi {
                turn = r.clone();
            }
            *m != pi
        });
        let mut known = Vec::new();
        terms.retain(|(m, r)| match r.to_i64().filter(|k| k.abs() <= 64).zip(self.known_angle(*m)) {
            Some((times, (cosine, sine))) => {
                known.push(Known { cosine, sine, times });
                false
            }
            None => true,
        });
        Plan::Angle { terms: terms.into(), turn, known: known.into() }
    }

    /// Cosine and sine of the inverse functions, on their principal branches.
    fn known_angle(&mut self, m: Expr) -> Option<(Expr, Expr)> {
        let Node::Call(f, args) = self.arena.node(m) else { return None };
        let (f, u, v) = (*f, args[0], args.last().copied()?);
        let a = &mut *self.arena;
        let u2 = a.pow(u, 2);
        let legs = |a: &mut Arena, x: Expr, y: Expr, sum: Expr| {
            let r = a.sqrt(sum);
            (a.div(x, r), a.div(y, r))
        };
        let rest = a.sub(Arena::ONE, u2);
        match f {
            Function::Asin => Some((a.sqrt(rest), u)),
            Function::Acos => Some((u, a.sqrt(rest))),
            Function::Atan => {
                let sum = a.add(Arena::ONE, u2);
                Some(legs(a, Arena::ONE, u, sum))
            }
            Function::Atan2 => {
                let v2 = a.pow(v, 2);
                let sum = a.add(u2, v2);
                Some(legs(a, v, u, sum))
            }
            _ => None,
        }
    }

    fn exponential(&mut self, x: Expr) -> Plan {
        let mut factors = Vec::new();
        let mut terms = Vec::new();
        for (m, r) in self.argument(x) {
            match self.arena.node(m) {
                // e^(r log b) = b^r, and b > 0 where this is real.
                Node::Call(Function::Log, args) => {
                    let b = args[0];
                    self.raise(b, &r, true, &mut factors, 0);
                }
                _ => terms.push((m, r)),
            }
        }
        Plan::Exponential { terms: terms.into(), factors: factors.into() }
    }

    fn symbolic_power(&mut self, b: Expr, x: Expr) -> Plan {
        let mut logs = Vec::new();
        self.logarithm(b, &Rational::ONE, &mut logs, 0);
        let mut factors = Vec::new();
        let mut terms = Vec::new();
        for (m, r) in self.argument(x) {
            if m == Arena::ONE {
                // The integer part stays exact for every base; so does the rest for positive ones.
                self.raise(b, &r, false, &mut factors, 0);
            } else {
                terms.push((m, r));
            }
        }
        Plan::Power { factors: factors.into(), terms: terms.into(), logs: logs.into() }
    }

    /// coefficient · log x, split over factors that are known to be positive.
    fn logarithm(&mut self, x: Expr, coefficient: &Rational, out: &mut Vec<LogTerm>, level: u32) {
        let (c, rest) = self.arena.split_coefficient(x);
        let mut push = |base: Expr, coefficient: Rational, plain: bool| {
            if base != Arena::ONE {
                out.push(LogTerm { base, coefficient, plain });
            }
        };
        if c.signum() > 0 && !c.is_one() {
            match factorise(&c) {
                Some(primes) => {
                    for (q, n) in primes {
                        let base = self.arena.integer(q);
                        push(base, coefficient.mul(&Rational::integer(n)), false);
                    }
                }
                None => {
                    let base = self.arena.number(c);
                    push(base, coefficient.clone(), false);
                }
            }
            if rest != Arena::ONE {
                self.logarithm(rest, coefficient, out, level + 1);
            }
            return;
        }
        if c.is_one() && level < 16 {
            match self.arena.node(x).clone() {
                Node::Call(Function::Exp, args) => return push(args[0], coefficient.clone(), true),
                Node::Product(list) => {
                    let mut joint = Vec::new();
                    let mut split = Vec::new();
                    for (b, r) in list.iter() {
                        let s = self.sign(*b);
                        // The base of a root is positive where its logarithm is real.
                        if s.is_nonnegative() || !r.is_integer() {
                            split.push((*b, r.clone()));
                        } else {
                            joint.push((*b, r.clone()));
                        }
                    }
                    if let [(b, r)] = joint.as_slice()
                        && !r.is_even_integer()
                    {
                        split.push((*b, r.clone()));
                        joint.clear();
                    }
                    if !joint.is_empty() {
                        let j = self.arena.monomial(&joint);
                        if split.is_empty() || matches!(self.arena.node(j), Node::Product(_)) {
                            push(j, coefficient.clone(), false);
                        } else {
                            self.logarithm(j, coefficient, out, level + 1);
                        }
                    }
                    for (b, r) in split {
                        self.logarithm(b, &coefficient.mul(&r), out, level + 1);
                    }
                    return;
                }
                _ => {}
            }
        }
        push(x, coefficient.clone(), false);
    }

    /// b^r as factors; `positive`: b is known to be positive.
    fn raise(&mut self, b: Expr, r: &Rational, positive: bool, out: &mut Vec<Factor>, level: u32) {
        if r.is_zero() || b == Arena::ONE {
            return;
        }
        if let Some(k) = r.to_i64() {
            return out.push(Factor { base: b, kind: Kind::Integer(k) });
        }
        if level < 16 && !r.is_integer() {
            match self.arena.node(b).clone() {
                Node::Product(list) => return self.raise_product(&list, r, positive, out, level),
                Node::Sum(k, terms) => {
                    let mut content = k.abs();
                    for (_, c) in terms.iter() {
                        content = if content.is_zero() { c.abs() } else { content.content(c) };
                    }
                    if half_integer(r).is_some()
                        && let Some(simpler) = self.simpler_radicand(b)
                    {
                        return self.raise(simpler, r, positive, out, level + 1);
                    }
                    if let Some(inverse) = content.recip()
                        && !content.is_one()
                    {
                        let c = self.arena.number(content);
                        let root = self.arena.pow_rational(c, r);
                        let (c, root) = self.arena.split_coefficient(root);
                        let c = self.arena.number(c);
                        self.raise(c, &Rational::ONE, true, out, level + 1);
                        for (q, n) in self.arena.factors(root) {
                            self.raise(q, &n, true, out, level + 1);
                        }
                        let rest = self.arena.scale(b, &inverse);
                        return self.raise(rest, r, positive, out, level + 1);
                    }
                }
                Node::Number(n) => {
                    // A composite number that the constructors could not take apart hides relations.
                    let prime = n.to_i64().is_some_and(|n| n == -1 || n > 1 && super::field::is_prime(n as u64));
                    if !prime {
                        self.flags |= Notes::HIDDEN;
                    }
                }
                _ => {}
            }
        }
        let kind = half_integer(r).map_or_else(|| Kind::Other(r.clone()), Kind::Root);
        if matches!(&kind, Kind::Other(r) if r.small().is_none_or(|(_, d)| d % 4 == 0)) {
            self.flags |= Notes::HIDDEN;
        }
        out.push(Factor { base: b, kind });
    }

    fn raise_product(
        &mut self,
        list: &[(Expr, Rational)],
        r: &Rational,
        positive: bool,
        out: &mut Vec<Factor>,
        level: u32,
    ) {
        let mut joint = Vec::new();
        let mut unknown_roots = 0;
        for (c, s) in list {
            let total = s.mul(r);
            let sign = self.sign_of_new(*c, 0);
            let known = sign.is_nonnegative() || !s.is_integer() || positive && list.len() == 1;
            if known {
                self.raise(*c, &total, true, out, level + 1);
            } else if s.is_even_integer() && total.is_integer() {
                match total.to_i64() {
                    Some(k) if k % 2 == 0 => out.push(Factor { base: *c, kind: Kind::Integer(k) }),
                    Some(k) if sign.is_nonpositive() => {
                        let minus = self.arena.integer(-1);
                        out.push(Factor { base: minus, kind: Kind::Integer(1) });
                        out.push(Factor { base: *c, kind: Kind::Integer(k) });
                    }
                    Some(k) => out.push(Factor { base: *c, kind: Kind::Absolute(k) }),
                    None => joint.push((*c, s.clone())),
                }
            } else {
                unknown_roots += 1;
                joint.push((*c, s.clone()));
            }
        }
        if let [(c, s)] = joint.as_slice()
            && unknown_roots == 1
            && s.is_integer()
            && !s.is_even_integer()
        {
            // An odd power under a root is not negative only if its base is not.
            let total = s.mul(r);
            return self.raise(*c, &total, true, out, level + 1);
        }
        if !joint.is_empty() {
            let j = self.arena.monomial(&joint);
            let kind = half_integer(r).map_or_else(|| Kind::Other(r.clone()), Kind::Root);
            out.push(Factor { base: j, kind });
        }
    }

    /// A radicand multiplied out where that leaves less, or written as the square that it is.
    fn simpler_radicand(&mut self, b: Expr) -> Option<Expr> {
        if self.arena.depth(b) > RADICAND_DEPTH || self.arena.summands(b).len() > RADICAND {
            return None;
        }
        let expanded = self.arena.expand(b, &mut Budget::new(RADICAND as u64 * 4)).ok()?;
        let terms = self.arena.summands(expanded);
        if terms.len() <= 1 {
            return Some(expanded).filter(|e| *e != b);
        }
        // Σ tᵢ² + …: the signs of the tᵢ follow from their products with the first.
        let roots: Vec<Expr> = terms.iter().filter_map(|(t, c)| self.square_root(*t, c)).collect();
        if roots.len() < 2 || roots.len() * (roots.len() + 1) / 2 < terms.len() {
            return None;
        }
        let mut sum = vec![(roots[0], Rational::ONE)];
        for t in &roots[1..] {
            let cross = self.arena.mul(roots[0], *t);
            let (_, cross) = self.arena.split_coefficient(cross);
            let c = &terms.iter().find(|(e, _)| *e == cross)?.1;
            sum.push((*t, if c.is_negative() { Rational::MINUS_ONE } else { Rational::ONE }));
        }
        let root = self.arena.linear(&sum);
        let square = self.arena.pow(root, 2);
        let check = self.arena.expand(square, &mut Budget::new(RADICAND as u64 * 4)).ok()?;
        (check == expanded && square != b).then_some(square)
    }

    /// The root of c · t where it is rational in the factors of t.
    fn square_root(&mut self, t: Expr, c: &Rational) -> Option<Expr> {
        let (n, d) = c.small().filter(|(n, _)| *n > 0)?;
        let exact = |k: i64| Some(k.isqrt()).filter(|r| r * r == k);
        let c = Rational::new(exact(n)?, exact(d)?)?;
        let mut factors = self.arena.factors(t);
        for f in &mut factors {
            f.1 = f.1.mul(&Rational::HALF);
        }
        if !factors.iter().all(|f| f.1.is_integer()) {
            return None;
        }
        let root = self.arena.monomial(&factors);
        Some(self.arena.scale(root, &c))
    }

    /// The sign of a base, made from its parts where it has no note yet.
    fn sign_of_new(&mut self, e: Expr, level: u32) -> Sign {
        if level > 3 || self.notes.has(e) {
            return self.sign(e);
        }
        let mut children = Vec::new();
        self.arena.for_children(e, &mut |c| children.push(c));
        let known: Vec<(Expr, Sign)> = children.into_iter().map(|c| (c, self.sign_of_new(c, level + 1))).collect();
        signs::infer(self.arena, self.facts, e, &|x| known.iter().find(|k| k.0 == x).map_or(Sign::Unknown, |k| k.1))
    }

    /// |x| or sign x, factor by factor.
    fn absolute(&mut self, x: Expr, signum: bool, out: &mut Vec<Factor>) {
        let (c, rest) = self.arena.split_coefficient(x);
        let c = match (signum, c.is_negative()) {
            (true, true) => Rational::MINUS_ONE,
            (true, false) => Rational::ONE,
            _ => c.abs(),
        };
        if !c.is_one() {
            let c = self.arena.number(c);
            out.push(Factor { base: c, kind: Kind::Integer(1) });
        }
        for (b, r) in self.arena.factors(rest) {
            let s = self.sign(b);
            if s.is_nonnegative() || !r.is_integer() || r.is_even_integer() {
                if !signum {
                    self.raise(b, &r, true, out, 0);
                }
            } else if s.is_nonpositive() {
                let minus = self.arena.integer(-1);
                out.push(Factor { base: minus, kind: Kind::Integer(1) });
                if !signum {
                    self.raise(b, &r, true, out, 0);
                }
            } else {
                let kind = if signum { Kind::Signum } else { Kind::Absolute(r.to_i64().unwrap_or(1)) };
                if r.to_i64().is_none() {
                    self.flags |= Notes::TOO_LARGE;
                }
                out.push(Factor { base: b, kind });
            }
        }
    }
}

/// k where r = k + 1/2.
fn half_integer(r: &Rational) -> Option<i64> {
    match r.small() {
        Some((n, 2)) => Some((n - 1) / 2).filter(|k| 2 * k + 1 == n),
        _ => None,
    }
}

/// The prime factors of a positive rational with exponents, where trial division finds them.
fn factorise(r: &Rational) -> Option<Vec<(i64, i64)>> {
    let (num, den) = r.small()?;
    let mut out = Vec::new();
    for (mut n, sign) in [(num, 1), (den, -1)] {
        let mut q = 2;
        while q * q <= n && q < 2000 {
            let mut k = 0;
            while n % q == 0 {
                n /= q;
                k += 1;
            }
            if k > 0 {
                out.push((q, sign * k));
            }
            q += if q == 2 { 1 } else { 2 };
        }
        if n > 1 {
            if !super::field::is_prime(n as u64) {
                return None;
            }
            out.push((n, sign));
        }
    }
    Some(out)
}
