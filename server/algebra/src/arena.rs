//! Hash-consed expressions: equal expressions are the same small integer.
//!
//! Children of sums and products are ordered by a key made from names, never by arena index, so that results do not
//! depend on the history of the session.

use crate::function::Function;
use crate::rational::Rational;
use hashbrown::{HashMap, HashTable};
use std::sync::Arc;

/// An expression: an index into its arena. Equal expressions of one arena are equal indices.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub struct Expr(pub(crate) u32);

impl Expr {
    /// The position in the arena, for side tables.
    pub fn index(self) -> usize {
        self.0 as usize
    }
}

/// A name with its role, interned.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub struct Symbol(pub(crate) u32);

impl Symbol {
    /// The position in the table of symbols, for side tables.
    pub fn index(self) -> usize {
        self.0 as usize
    }
}

/// What a name stands for. Two names of different roles are different symbols.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug, PartialOrd, Ord)]
pub enum Role {
    /// A constant.
    Parameter,
    /// A generalised coordinate; it has time derivatives.
    Coordinate,
    /// A signal from outside: an unspecified function of time with time derivatives, independent of the motion.
    Input,
    /// The time `t`.
    Time,
    /// The parameter ε of a transformation.
    Epsilon,
    /// A bound or free index of a family.
    Index,
    /// The multiplier of a constraint.
    Multiplier,
    /// The formal argument of a definition.
    Formal,
    /// An unspecified function.
    Function,
}

/// What is known of a symbol.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct SymbolInfo {
    /// The name as the model spells it, folded.
    pub name: Arc<str>,
    /// The member's number, for a member of a family.
    pub member: Option<i64>,
    /// Its role.
    pub role: Role,
}

/// The kinds of node. Values can only be made by the arena's constructors, which keep the canonical form.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub enum Node {
    /// A rational number.
    Number(Rational),
    /// π.
    Pi,
    /// A division by zero or another value that does not exist; it swallows what contains it.
    Undefined,
    /// A symbol.
    Symbol(Symbol),
    /// The time derivative of order ≥ 1 of a coordinate or an input.
    Jet(Symbol, u16),
    /// The member of a family at a symbolic index, differentiated `order` times by time.
    Member {
        /// The family (a symbol without member number).
        family: Symbol,
        /// An affine expression in indices that is no number.
        index: Expr,
        /// Order of the time derivative.
        order: u16,
    },
    /// `constant + Σ coefficient · term`: terms are no numbers and no sums, coefficients not zero, ordered by key.
    /// There are two summands or more, or one term with a coefficient other than one.
    Sum(Rational, Arc<[(Expr, Rational)]>),
    /// `Π base^exponent`: no numeric factor except radicals of integers, bases no products under integer exponents,
    /// exponents not zero, ordered by key. Not a single factor with exponent one.
    Product(Arc<[(Expr, Rational)]>),
    /// A power whose exponent is not a rational number.
    Power(Expr, Expr),
    /// A known function of one argument or more.
    Call(Function, Arc<[Expr]>),
    /// An unspecified function, differentiated `orders[k]` times by its k-th argument.
    Unspecified {
        /// The function.
        function: Symbol,
        /// The member's index where it is a family of functions with a symbolic index.
        index: Option<Expr>,
        /// Derivative orders, as many as arguments.
        orders: Arc<[u16]>,
        /// The arguments.
        args: Arc<[Expr]>,
    },
    /// `Σ body` for the index from `lower` to `upper`, both included. The index is named by its nesting depth, so that
    /// sums that differ in the name of the index only are the same.
    Bound {
        /// The bound index, made by [`Arena::bound_index`].
        index: Symbol,
        /// First value.
        lower: Expr,
        /// Last value.
        upper: Expr,
        /// The summand.
        body: Expr,
    },
}

/// What is stored beside each node.
#[derive(Clone, Copy)]
pub(crate) struct Meta {
    /// The ordering key, made from names.
    pub key: u64,
    /// A Bloom mask of the atoms inside.
    pub mask: u64,
    /// Nesting depth.
    pub depth: u32,
    /// How many nested bound sums are inside.
    pub bound_depth: u16,
    /// For a sum: whether its content is one and its first coefficient positive.
    pub primitive: bool,
}

/// The store of all expressions of one epoch, with the memo tables of the derivations.
pub struct Arena {
    nodes: Vec<Node>,
    metas: Vec<Meta>,
    table: HashTable<u32>,
    symbols: Vec<SymbolInfo>,
    symbol_table: HashMap<SymbolInfo, Symbol>,
    pub(crate) memo: Memo,
}

/// Results of derivations, kept as long as the arena.
#[derive(Default)]
pub(crate) struct Memo {
    pub partial: HashMap<Expr, HashMap<Expr, Expr>>,
    pub total: HashMap<Expr, Expr>,
    pub expand: HashMap<Expr, Expr>,
}

pub(crate) fn mix(h: u64, x: u64) -> u64 {
    let h = (h ^ x).wrapping_mul(0x9E37_79B9_7F4A_7C15);
    (h ^ (h >> 29)).wrapping_mul(0xBF58_476D_1CE4_E5B9).rotate_left(31)
}

pub(crate) fn mix_text(mut h: u64, s: &str) -> u64 {
    for c in s.as_bytes().chunks(8) {
        let mut word = [0u8; 8];
        word[..c.len()].copy_from_slice(c);
        h = mix(h, u64::from_le_bytes(word));
    }
    mix(h, s.len() as u64)
}

impl Default for Arena {
    fn default() -> Self {
        Arena::new()
    }
}

impl Arena {
    /// An arena with the constants that have fixed places.
    pub fn new() -> Arena {
        let mut a = Arena {
            nodes: Vec::new(),
            metas: Vec::new(),
            table: HashTable::new(),
            symbols: Vec::new(),
            symbol_table: HashMap::new(),
            memo: Memo::default(),
        };
        let zero = a.intern(Node::Number(Rational::ZERO));
        let one = a.intern(Node::Number(Rational::ONE));
        let undefined = a.intern(Node::Undefined);
        debug_assert!(zero == Self::ZERO && one == Self::ONE && undefined == Self::UNDEFINED);
        a
    }

    /// The expression 0.
    pub const ZERO: Expr = Expr(0);
    /// The expression 1.
    pub const ONE: Expr = Expr(1);
    /// The value that does not exist.
    pub const UNDEFINED: Expr = Expr(2);

    /// How many nodes there are. Grows only; the epoch ends when it is too many.
    pub fn len(&self) -> usize {
        self.nodes.len()
    }

    /// Never: the constants are always there.
    pub fn is_empty(&self) -> bool {
        self.nodes.is_empty()
    }

    /// The node of an expression.
    pub fn node(&self, e: Expr) -> &Node {
        &self.nodes[e.index()]
    }

    pub(crate) fn meta(&self, e: Expr) -> Meta {
        self.metas[e.index()]
    }

    /// The ordering key: a hash of the structure and of names, the same in every session.
    pub fn key(&self, e: Expr) -> u64 {
        self.metas[e.index()].key
    }

    /// The nesting depth, for bounds on recursion.
    pub fn depth(&self, e: Expr) -> u32 {
        self.metas[e.index()].depth
    }

    /// Interns a symbol.
    pub fn symbol(&mut self, name: &str, member: Option<i64>, role: Role) -> Symbol {
        let info = SymbolInfo { name: name.into(), member, role };
        if let Some(&s) = self.symbol_table.get(&info) {
            return s;
        }
        let s = Symbol(self.symbols.len() as u32);
        self.symbols.push(info.clone());
        self.symbol_table.insert(info, s);
        s
    }

    /// What is known of a symbol.
    pub fn info(&self, s: Symbol) -> &SymbolInfo {
        &self.symbols[s.index()]
    }

    /// The name of a symbol as it is printed plainly: `x`, `x[3]`.
    pub fn name(&self, s: Symbol) -> String {
        let info = self.info(s);
        match info.member {
            Some(k) => format!("{}[{k}]", info.name),
            None => info.name.to_string(),
        }
    }

    /// The bound index of nesting depth `level` (from 1 for the innermost sum).
    pub fn bound_index(&mut self, level: u16) -> Symbol {
        self.symbol(&format!("#{level}"), None, Role::Index)
    }

    fn symbol_key(&self, s: Symbol) -> u64 {
        let info = self.info(s);
        let h = mix_text(info.role as u64 + 17, &info.name);
        mix(h, info.member.map_or(0, |k| k as u64 ^ 0x5bd1))
    }

    pub(crate) fn rational_key(r: &Rational) -> u64 {
        match r.small() {
            Some((n, d)) => mix(mix(0x51, n as u64), d as u64),
            None => mix_text(0x52, &r.to_string()),
        }
    }

    /// Adds a node that is in canonical form already, or finds it.
    pub(crate) fn intern(&mut self, node: Node) -> Expr {
        let meta = self.measure(&node);
        let nodes = &self.nodes;
        if let Some(&i) = self.table.find(meta.key, |&i| nodes[i as usize] == node) {
            return Expr(i);
        }
        let i = self.nodes.len() as u32;
        self.nodes.push(node);
        self.metas.push(meta);
        let metas = &self.metas;
        self.table.insert_unique(meta.key, i, |&i| metas[i as usize].key);
        Expr(i)
    }

    fn measure(&self, node: &Node) -> Meta {
        let mut m = Meta { key: 0, mask: 0, depth: 1, bound_depth: 0, primitive: true };
        let take = |m: &mut Meta, e: Expr| {
            let c = self.metas[e.index()];
            m.key = mix(m.key, c.key);
            m.mask |= c.mask;
            m.depth = m.depth.max(c.depth.saturating_add(1));
            m.bound_depth = m.bound_depth.max(c.bound_depth);
        };
        match node {
            Node::Number(r) => m.key = mix(1, Self::rational_key(r)),
            Node::Pi => m.key = mix(2, 0),
            Node::Undefined => m.key = mix(3, 0),
            Node::Symbol(s) => {
                m.key = mix(4, self.symbol_key(*s));
                m.mask = 1 << (m.key % 64);
            }
            Node::Jet(s, order) => {
                m.key = mix(mix(5, self.symbol_key(*s)), *order as u64);
                m.mask = 1 << (m.key % 64);
            }
            Node::Member { family, index, order } => {
                // A member may turn out to be any of its family: its bit is that of the family at this order.
                let own = mix(mix(6, self.symbol_key(*family)), *order as u64);
                m.key = own;
                take(&mut m, *index);
                m.mask |= 1 << (own % 64);
            }
            Node::Sum(constant, terms) => {
                m.key = mix(7, Self::rational_key(constant));
                let mut content = constant.abs();
                for (e, c) in terms.iter() {
                    take(&mut m, *e);
                    m.key = mix(m.key, Self::rational_key(c));
                    // An integer does not change a content of one; a fraction does.
                    if !(content.is_one() && c.is_integer()) {
                        content = if content.is_zero() { c.abs() } else { content.content(c) };
                    }
                }
                m.primitive = content.is_one() && terms.first().is_some_and(|t| !t.1.is_negative());
            }
            Node::Product(factors) => {
                m.key = mix(8, 0);
                for (e, c) in factors.iter() {
                    take(&mut m, *e);
                    m.key = mix(m.key, Self::rational_key(c));
                }
            }
            Node::Power(b, e) => {
                m.key = mix(9, 0);
                take(&mut m, *b);
                take(&mut m, *e);
            }
            Node::Call(f, args) => {
                m.key = mix(10, *f as u64);
                args.iter().for_each(|a| take(&mut m, *a));
            }
            Node::Unspecified { function, index, orders, args } => {
                m.key = mix(11, self.symbol_key(*function));
                if let Some(i) = index {
                    take(&mut m, *i);
                }
                for o in orders.iter() {
                    m.key = mix(m.key, *o as u64);
                }
                args.iter().for_each(|a| take(&mut m, *a));
            }
            Node::Bound { index, lower, upper, body } => {
                m.key = mix(12, self.symbol_key(*index));
                take(&mut m, *lower);
                take(&mut m, *upper);
                take(&mut m, *body);
                m.bound_depth += 1;
            }
        }
        m
    }

    /// Whether the atom (a symbol or a jet) may occur in the expression: `false` is certain.
    pub(crate) fn may_contain(&self, e: Expr, atom: Expr) -> bool {
        self.metas[e.index()].mask & self.metas[atom.index()].mask != 0
    }

    /// The order of two expressions by key; equal keys of different nodes are told apart by their printed structure.
    pub(crate) fn order(&self, a: Expr, b: Expr) -> std::cmp::Ordering {
        if a == b {
            return std::cmp::Ordering::Equal;
        }
        self.key(a).cmp(&self.key(b)).then_with(|| format!("{:?}", self.node(a)).cmp(&format!("{:?}", self.node(b))))
    }

    /// All atoms in an expression: symbols, jets, members, each once, ordered by key. Costs one visit per node.
    pub fn atoms(&self, e: Expr) -> Vec<Expr> {
        let mut out = Vec::new();
        self.visit(e, &mut |x, node| {
            if matches!(node, Node::Symbol(_) | Node::Jet(..) | Node::Member { .. }) {
                out.push(x);
            }
        });
        out.sort_by(|a, b| self.order(*a, *b));
        out
    }

    /// Calls `f` once for each distinct node inside, children first.
    pub fn visit(&self, e: Expr, f: &mut dyn FnMut(Expr, &Node)) {
        let mut seen = hashbrown::HashSet::new();
        let mut stack = vec![(e, false)];
        while let Some((x, done)) = stack.pop() {
            if done {
                f(x, self.node(x));
            } else if seen.insert(x) {
                stack.push((x, true));
                self.for_children(x, &mut |c| stack.push((c, false)));
            }
        }
    }

    /// Calls `f` with each direct child.
    pub fn for_children(&self, e: Expr, f: &mut dyn FnMut(Expr)) {
        match self.node(e) {
            Node::Number(_) | Node::Pi | Node::Undefined | Node::Symbol(_) | Node::Jet(..) => {}
            Node::Member { index, .. } => f(*index),
            Node::Sum(_, list) | Node::Product(list) => list.iter().for_each(|(x, _)| f(*x)),
            Node::Power(b, x) => {
                f(*b);
                f(*x);
            }
            Node::Call(_, args) => args.iter().for_each(|x| f(*x)),
            Node::Unspecified { index, args, .. } => {
                index.iter().for_each(|x| f(*x));
                args.iter().for_each(|x| f(*x));
            }
            Node::Bound { lower, upper, body, .. } => {
                f(*lower);
                f(*upper);
                f(*body);
            }
        }
    }

    /// The number of distinct nodes inside.
    pub fn size(&self, e: Expr) -> usize {
        let mut n = 0;
        self.visit(e, &mut |_, _| n += 1);
        n
    }
}
