//! What the zero test knows of each node before any evaluation: bounds on degree and height, sign, flags, plan.

use super::assumptions::Assumptions;
use super::bounds::{
    angle_bounds, factor_bounds, far_start, is_standard_root, lcm, rational_height, sum_bounds, within,
};
use super::field::TURN;
use super::plan::{self, Kind, Made, Plan};
use super::signs::{self, Sign};
use super::table::LONG;
use crate::arena::{Arena, Expr, Node, Role};
use crate::budget::{Budget, Stopped};
use crate::function::Function;
use crate::rational::Rational;
use hashbrown::{HashMap, HashSet};

/// Bounds and flags of a node. Degrees and heights are of a numerator and a denominator that the value has as a
/// rational function of its atoms; they count from above and saturate.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Note {
    /// Degree of the numerator.
    pub num: f32,
    /// Degree of the denominator.
    pub den: f32,
    /// log₂ of the sum of the coefficients' absolute values, numerator.
    pub tall: f32,
    /// The same of the denominator.
    pub deep: f32,
    /// The greatest height of what stands in functions, roots and absolute values: values that are drawn from residues
    /// of arguments tell these apart only if the primes do.
    pub inner: f32,
    /// The least common multiple of the denominators under angles, exponents and roots.
    pub lcm: u32,
    /// The flags.
    pub flags: u16,
    /// What is known of the sign.
    pub sign: Sign,
    /// The bound indices that are free inside: bit k for the one of nesting depth k.
    pub free: u32,
    /// Index of the plan, plus one.
    plan: u32,
}

/// Beyond this a degree bound says nothing.
pub(crate) const MAX_DEGREE: f32 = 1e9;

/// The notes of the arena's nodes, made once for each node.
pub(crate) struct Notes {
    list: Vec<Note>,
    plans: Vec<Plan>,
    pending: HashMap<Expr, Made>,
    /// Enclosures of the constant nodes that are no plain numbers.
    constants: HashMap<Expr, super::interval::Interval>,
}

const BLANK: Note = Note {
    num: 0.0,
    den: 0.0,
    tall: 0.0,
    deep: 0.0,
    inner: 0.0,
    lcm: 1,
    flags: 0,
    sign: Sign::Unknown,
    free: 0,
    plan: 0,
};

impl Notes {
    const DONE: u16 = 1;
    /// Trigonometric functions inside.
    pub const ANGLE: u16 = 2;
    /// Exponentials inside.
    pub const EXPONENTIAL: u16 = 4;
    /// Roots inside.
    pub const ROOT: u16 = 8;
    /// Absolute values or signs of something whose sign is not known.
    pub const SIGN: u16 = 16;
    /// Functions whose relations are not all known: log, inverse functions, min, max of many, symbolic powers.
    pub const OPAQUE: u16 = 32;
    /// Unspecified functions.
    pub const UNSPECIFIED: u16 = 64;
    /// Roots inside roots, or of numbers that hide their factors.
    pub const HIDDEN: u16 = 128;
    /// An argument was too large to be multiplied out.
    pub const INCOMPLETE: u16 = 256;
    /// An exponent, a range or a nesting out of all bounds.
    pub const TOO_LARGE: u16 = 512;
    /// A value that does not exist.
    pub const UNDEFINED: u16 = 1024;
    /// Atoms inside: no constant.
    pub const ATOMS: u16 = 2048;
    /// A sum with symbolic bounds or a member at a free index.
    pub const SYMBOLIC: u16 = 4096;
    /// Functions of constants, such as sin 1 or √2.
    pub const CONSTANTS: u16 = 8192;
    /// Roots of numbers or parts of a turn: algebraic numbers, whose conjugates multiply the height.
    pub const ALGEBRAIC: u16 = 16384;
    /// Sums over long ranges.
    pub const LONG: u16 = 32768;

    pub fn new() -> Notes {
        Notes { list: Vec::new(), plans: Vec::new(), pending: HashMap::new(), constants: HashMap::new() }
    }

    /// The note of a node that has been analysed.
    pub fn note(&self, e: Expr) -> Note {
        self.list.get(e.index()).copied().unwrap_or(BLANK)
    }

    fn done(&self, e: Expr) -> bool {
        self.list.get(e.index()).is_some_and(|n| n.flags & Self::DONE != 0)
    }

    /// Whether the node has been analysed.
    pub fn has(&self, e: Expr) -> bool {
        self.done(e)
    }

    /// The sign of a node, unknown before it is analysed.
    pub fn sign(&self, e: Expr) -> Sign {
        self.note(e).sign
    }

    /// The plan of a node, if its evaluation needs one.
    pub fn plan(&self, e: Expr) -> Option<&Plan> {
        let n = self.list.get(e.index())?;
        if n.plan == 0 { None } else { self.plans.get(n.plan as usize - 1) }
    }

    /// Calls `f` with each node whose value the evaluation of `e` needs, by its plan or by its children.
    pub fn for_needs(&self, arena: &Arena, e: Expr, by_plan: bool, f: &mut dyn FnMut(Expr)) {
        if let Some(p) = self.plan(e)
            && (by_plan || matches!(p, Plan::Bound { .. }))
        {
            return p.for_needs(f);
        }
        match arena.node(e) {
            // Indices are evaluated as affine forms, symbolic sums are atoms.
            Node::Member { .. } | Node::Bound { .. } => {}
            Node::Unspecified { args, .. } => args.iter().for_each(|x| f(*x)),
            _ => arena.for_children(e, f),
        }
    }

    /// Makes the notes of all nodes inside. Costs one visit per node that is new.
    pub fn analyse(
        &mut self,
        arena: &mut Arena,
        facts: &Assumptions,
        e: Expr,
        budget: &mut Budget,
    ) -> Result<(), Stopped> {
        if self.done(e) {
            return Ok(());
        }
        let mut stack = vec![e];
        while let Some(&x) = stack.last() {
            if self.done(x) {
                stack.pop();
                continue;
            }
            let before = stack.len();
            arena.for_children(x, &mut |c| {
                if !self.done(c) {
                    stack.push(c);
                }
            });
            if stack.len() > before {
                continue;
            }
            if !self.pending.contains_key(&x) {
                let made = plan::make(arena, facts, self, x);
                let needs = made.plan.is_some();
                if needs {
                    if let Some(p) = &made.plan {
                        p.for_needs(&mut |c| {
                            if !self.done(c) {
                                stack.push(c);
                            }
                        });
                    }
                    self.pending.insert(x, made);
                    if stack.len() > before {
                        continue;
                    }
                }
            }
            budget.charge(1)?;
            let made = self.pending.remove(&x).unwrap_or(Made { plan: None, flags: 0 });
            self.finish(arena, facts, x, made, budget)?;
            stack.pop();
        }
        Ok(())
    }

    fn finish(
        &mut self,
        arena: &mut Arena,
        facts: &Assumptions,
        e: Expr,
        made: Made,
        budget: &mut Budget,
    ) -> Result<(), Stopped> {
        let mut n = Note { flags: Self::DONE | made.flags, ..BLANK };
        let mut plan = made.plan;
        arena.for_children(e, &mut |c| {
            let c = self.note(c);
            n.flags |= c.flags & !Self::DONE;
            n.free |= c.free;
            n.inner = n.inner.max(c.inner);
            n.lcm = lcm(n.lcm, c.lcm);
        });
        match arena.node(e) {
            Node::Number(r) => {
                (n.tall, n.deep) = rational_height(r);
            }
            Node::Pi => {
                n.num = 1.0;
                n.flags |= Self::CONSTANTS;
            }
            Node::Undefined => n.flags |= Self::UNDEFINED,
            Node::Symbol(s) => {
                n.num = 1.0;
                n.flags |= Self::ATOMS;
                let info = arena.info(*s);
                if info.role == Role::Index
                    && let Some(level) = info.name.strip_prefix('#').and_then(|k| k.parse::<u32>().ok())
                {
                    if level < 32 { n.free |= 1 << level } else { n.flags |= Self::TOO_LARGE }
                }
            }
            Node::Jet(..) => {
                n.num = 1.0;
                n.flags |= Self::ATOMS;
            }
            Node::Member { .. } => {
                n.num = 1.0;
                n.flags |= Self::ATOMS;
                if n.free == 0 {
                    n.flags |= Self::SYMBOLIC;
                }
            }
            Node::Sum(k, terms) => {
                let list = terms.iter().map(|(x, c)| (self.note(*x), c));
                sum_bounds(&mut n, k, list);
            }
            Node::Product(list) => {
                if list.iter().any(|(_, r)| r.is_integer() && r.to_i64().is_none()) {
                    n.flags |= Self::TOO_LARGE;
                }
                if plan.is_none() {
                    for (b, r) in list.iter() {
                        let b = self.note(*b);
                        factor_bounds(&mut n, &b, r.to_f64() as f32);
                    }
                }
            }
            Node::Power(..) => n.flags |= Self::OPAQUE | Self::EXPONENTIAL,
            Node::Call(f, args) => {
                let degree: f32 = args.iter().map(|x| self.note(*x)).map(|a| a.num + a.den).sum();
                n.num = 1.0 + degree;
                args.iter().for_each(|x| within(&mut n, &self.note(*x)));
                match f {
                    Function::Sin | Function::Cos | Function::Tan => n.flags |= Self::ANGLE,
                    Function::Exp | Function::Sinh | Function::Cosh | Function::Tanh => {
                        n.flags |= Self::EXPONENTIAL;
                    }
                    Function::Abs | Function::Sign => n.num = 0.0,
                    Function::Min | Function::Max if plan.is_some() => n.num = 0.0,
                    Function::Min | Function::Max if args.len() == 2 => {
                        n.flags |= Self::SIGN;
                        let list: Vec<_> = args.iter().map(|x| (self.note(*x), &Rational::ONE)).collect();
                        sum_bounds(&mut n, &Rational::ZERO, list.into_iter());
                    }
                    _ => n.flags |= Self::OPAQUE,
                }
                if n.flags & Self::ATOMS == 0 {
                    n.flags |= Self::CONSTANTS;
                }
            }
            Node::Unspecified { args, index, .. } => {
                n.num = 1.0 + args.iter().map(|x| self.note(*x)).map(|a| a.num + a.den).sum::<f32>();
                args.iter().for_each(|x| within(&mut n, &self.note(*x)));
                n.flags |= Self::UNSPECIFIED | Self::ATOMS;
                if index.is_some() && n.free == 0 {
                    n.flags |= Self::SYMBOLIC;
                }
            }
            Node::Bound { index, lower, upper, body } => {
                let level = arena.info(*index).name.strip_prefix('#').and_then(|k| k.parse::<u32>().ok());
                let bit = level.filter(|l| *l < 32).map_or(0, |l| 1u32 << l);
                let body_note = self.note(*body);
                n.free = body_note.free & !bit | self.note(*lower).free | self.note(*upper).free;
                let index_like = |x: Expr| self.is_affine_in_bound_indices(arena, x);
                if bit != 0 && index_like(*lower) && index_like(*upper) {
                    let (order, outside) = self.bound_plan(arena, *body, bit, budget)?;
                    let far = far_start(arena, &order, *index);
                    plan = Some(Plan::Bound { order, outside, far });
                    // A range of k values: degrees of denominators add up, heights grow by log₂ k.
                    let count = match (arena.as_i64(*lower), arena.as_i64(*upper)) {
                        (Some(a), Some(b)) => (b.saturating_sub(a) as f32 + 1.0).max(1.0),
                        _ => 1000.0,
                    };
                    if count > LONG as f32 {
                        n.flags |= Self::LONG;
                    }
                    n.den = body_note.den * count;
                    n.num = body_note.num + n.den;
                    n.deep = body_note.deep * count;
                    n.tall = body_note.tall + n.deep + count.log2();
                } else {
                    n.num = 1.0;
                    n.flags |= Self::SYMBOLIC;
                }
            }
        }
        if let Some(p) = &plan {
            self.plan_bounds(arena, e, &mut n, p);
        }
        if let Some(p) = plan {
            self.plans.push(p);
            n.plan = self.plans.len() as u32;
        }
        n.sign = signs::infer(arena, facts, e, &|x| self.sign(x));
        if n.flags & (Self::ATOMS | Self::CONSTANTS | Self::UNDEFINED | Self::TOO_LARGE) == Self::CONSTANTS
            || matches!(arena.node(e), Node::Product(_)) && n.flags & Self::ATOMS == 0
        {
            let v = super::interval::constant(arena, e, &self.constants);
            self.constants.insert(e, v);
            n.sign = n.sign.and(v.sign());
        }
        if self.list.len() <= e.index() {
            self.list.resize(arena.len().max(e.index() + 1), BLANK);
        }
        self.list[e.index()] = n;
        Ok(())
    }

    fn plan_bounds(&self, arena: &Arena, e: Expr, n: &mut Note, p: &Plan) {
        let inherit = |n: &mut Note, x: Expr| {
            let x = self.note(x);
            n.flags |= x.flags & !Self::DONE;
            n.lcm = lcm(n.lcm, x.lcm);
            within(n, &x);
        };
        let linear = |n: &mut Note, terms: &[(Expr, Rational)]| {
            let mut total = 0.0;
            for (m, r) in terms {
                let x = self.note(*m);
                let (num, den) = r.small().unwrap_or((i64::MAX, 1));
                total += (num as f32 / den as f32).abs().ceil();
                n.lcm = lcm(n.lcm, u32::try_from(den).unwrap_or(u32::MAX));
                // Monomials that only happen to agree at a point count as well.
                total += (x.num + x.den - 1.0).max(0.0);
            }
            total.max(1.0)
        };
        match p {
            Plan::Angle { terms, turn, known } => {
                if !turn.small().is_some_and(|(_, d)| (TURN / 2).is_multiple_of(d as u64)) {
                    n.flags |= Self::INCOMPLETE;
                }
                if !turn.is_zero() {
                    n.flags |= Self::ALGEBRAIC;
                }
                terms.iter().for_each(|t| inherit(n, t.0));
                let d = linear(n, terms);
                let quotient = matches!(arena.node(e), Node::Call(Function::Tan, _));
                angle_bounds(n, d, quotient);
                for k in known {
                    for x in [k.cosine, k.sine] {
                        inherit(n, x);
                        let x = self.note(x);
                        let times = k.times.unsigned_abs() as f32;
                        factor_bounds(n, &x, times);
                        if quotient {
                            factor_bounds(n, &x, -times);
                        }
                    }
                }
            }
            Plan::Exponential { terms, factors } => {
                terms.iter().for_each(|t| inherit(n, t.0));
                let d = linear(n, terms);
                angle_bounds(n, d, matches!(arena.node(e), Node::Call(Function::Tanh, _)));
                self.factors_bounds(arena, n, factors);
            }
            Plan::Power { factors, terms, logs } => {
                for x in terms.iter().map(|t| t.0).chain(logs.iter().map(|l| l.base)) {
                    inherit(n, x);
                }
                let d = linear(n, terms) * logs.len().max(1) as f32;
                (n.num, n.den) = (d, d);
                self.factors_bounds(arena, n, factors);
            }
            Plan::Product(factors) => self.factors_bounds(arena, n, factors),
            Plan::Log(logs) => {
                for l in logs {
                    inherit(n, l.base);
                    if !l.plain {
                        n.flags |= Self::OPAQUE;
                    }
                }
                n.tall += 8.0;
                n.deep += 8.0;
            }
            Plan::Bound { .. } => {}
        }
    }

    fn factors_bounds(&self, arena: &Arena, n: &mut Note, factors: &[super::plan::Factor]) {
        for f in factors {
            let b = self.note(f.base);
            n.flags |= b.flags & !Self::DONE;
            n.lcm = lcm(n.lcm, b.lcm);
            n.inner = n.inner.max(b.inner);
            if !matches!(f.kind, Kind::Integer(_)) {
                within(n, &b);
            }
            match &f.kind {
                Kind::Integer(k) => factor_bounds(n, &b, *k as f32),
                Kind::Absolute(k) => {
                    n.flags |= Self::SIGN;
                    factor_bounds(n, &b, *k as f32);
                }
                Kind::Signum => n.flags |= Self::SIGN,
                Kind::Root(k) => {
                    let number = arena.as_number(f.base).is_some();
                    n.flags |= if number { Self::CONSTANTS | Self::ALGEBRAIC } else { Self::ROOT };
                    if b.flags & Self::ATOMS == 0 && !number && !is_standard_root(arena, f.base) {
                        n.flags |= Self::HIDDEN;
                    }
                    if b.flags & Self::ATOMS != 0 && b.flags & Self::ROOT != 0 {
                        n.flags |= Self::HIDDEN;
                    }
                    factor_bounds(n, &b, *k as f32 + if *k < 0 { 0.0 } else { 1.0 });
                }
                Kind::Other(r) => {
                    let den = r.small().and_then(|(_, d)| u32::try_from(d).ok()).unwrap_or(u32::MAX);
                    if den % 2 == 0 {
                        n.flags |= Self::ROOT;
                    }
                    if b.flags & Self::ATOMS == 0 {
                        n.flags |= Self::CONSTANTS | Self::ALGEBRAIC;
                    }
                    n.lcm = lcm(n.lcm, den);
                    factor_bounds(n, &b, r.to_f64() as f32);
                }
            }
        }
    }

    fn is_affine_in_bound_indices(&self, arena: &Arena, x: Expr) -> bool {
        let bound = |y: Expr| matches!(arena.node(y), Node::Symbol(_)) && self.note(y).free != 0;
        match arena.node(x) {
            Node::Number(r) => r.to_i64().is_some(),
            Node::Sum(k, terms) => k.to_i64().is_some() && terms.iter().all(|(y, c)| bound(*y) && c.to_i64().is_some()),
            _ => bound(x),
        }
    }

    /// The nodes of a summand that depend on the index (and on no inner one), children first, and those outside.
    #[allow(clippy::type_complexity)]
    fn bound_plan(
        &self,
        arena: &Arena,
        body: Expr,
        bit: u32,
        budget: &mut Budget,
    ) -> Result<(Box<[Expr]>, Box<[Expr]>), Stopped> {
        let below = (bit << 1).wrapping_sub(1);
        let (mut order, mut outside) = (Vec::new(), Vec::new());
        let mut seen = HashSet::new();
        let mut stack = vec![(body, false)];
        while let Some((x, children_done)) = stack.pop() {
            let free = self.note(x).free;
            if children_done {
                // The lowest bit is this index: inner sums evaluate what depends on inner ones.
                if free & below == bit {
                    order.push(x);
                }
            } else if seen.insert(x) {
                budget.charge(1)?;
                if free & below == 0 {
                    outside.push(x);
                    continue;
                }
                stack.push((x, true));
                self.for_needs(arena, x, true, &mut |c| stack.push((c, false)));
                self.for_needs(arena, x, false, &mut |c| stack.push((c, false)));
                if let Some(Plan::Bound { order: inner, .. }) = self.plan(x) {
                    inner.iter().for_each(|y| stack.push((*y, false)));
                }
            }
        }
        Ok((order.into(), outside.into()))
    }
}
