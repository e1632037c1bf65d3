//! Points of the finite fields, drawn from keyed hashes of names: never from allocation order.

use super::assumptions::{Assumptions, atom_key};
use super::field::{Element, FIRST, Field, next_prime};
use super::signs::Sign;
use crate::arena::{Arena, Expr, Node, Symbol, mix};
use std::sync::{Arc, OnceLock};

/// One point: a field and a seed.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub(crate) struct Point {
    /// Which of the fields.
    pub field: u32,
    /// What the atoms' values are drawn from.
    pub seed: u64,
    /// Whether atoms of known sign are drawn like all others, so that their Legendre symbols tell them apart.
    pub free: bool,
    /// Whether roots and absolute values are drawn like atoms, by what stands in them.
    pub loose: bool,
    /// Which of the roots of constants in question take their other value.
    pub flips: u16,
    /// Whether the point is used for few nodes or only once.
    pub sparse: bool,
    /// Whether all far members of a family have the same value.
    pub near: bool,
}

/// The fields in use. The first two are fixed, further ones are drawn when many primes are needed.
pub(crate) struct Fields {
    list: Vec<Option<Arc<Field>>>,
}

const SEED: u64 = 0x1ea5_7015_e5ee_d001;

impl Fields {
    pub fn new() -> Fields {
        // Roots of unity and inverses are the same in every session.
        static STANDARD: OnceLock<[Arc<Field>; 2]> = OnceLock::new();
        let standard = STANDARD.get_or_init(|| FIRST.map(|c| Arc::new(Field::new(c))));
        Fields { list: standard.iter().cloned().map(Some).collect() }
    }

    pub fn get(&self, k: u32) -> Arc<Field> {
        self.list[k as usize].clone().unwrap_or_else(|| Arc::new(Field::new(FIRST[0])))
    }

    /// Forgets a field that will not be used again; its tables must go too.
    pub fn forget(&mut self, k: u32) {
        if k > 1 {
            self.list[k as usize] = None;
        }
    }

    /// The field of a prime drawn from a key; a prime that is there already is not made twice.
    pub fn drawn(&mut self, key: u64) -> u32 {
        let c = next_prime(mix(SEED, key) >> 24);
        let p = (1u64 << 62) - c;
        if let Some(k) = self.list.iter().position(|f| f.as_ref().is_some_and(|f| f.p == p)) {
            return k as u32;
        }
        if let Some(k) = self.list.iter().position(Option::is_none) {
            self.list[k] = Some(Arc::new(Field::new(c)));
            return k as u32;
        }
        self.list.push(Some(Arc::new(Field::new(c))));
        self.list.len() as u32 - 1
    }
}

/// The standard points, by turns over the first two primes.
pub(crate) fn standard(k: u32) -> Point {
    Point {
        field: k % 2,
        seed: mix(SEED, k as u64 + 1),
        free: false,
        loose: false,
        flips: 0,
        sparse: false,
        near: false,
    }
}

/// A point where roots and absolute values are atoms: what vanishes there vanishes whatever their values are.
pub(crate) fn loose(k: u32) -> Point {
    Point {
        field: k % 2,
        seed: mix(SEED, k as u64 + 0x40001),
        free: false,
        loose: true,
        flips: 0,
        sparse: false,
        near: false,
    }
}

/// A point where assumptions do not narrow the draw.
pub(crate) fn unconstrained(k: u32) -> Point {
    Point {
        field: k % 2,
        seed: mix(SEED, k as u64 + 0x20001),
        free: true,
        loose: false,
        flips: 0,
        sparse: true,
        near: false,
    }
}

/// A point over a field of its own.
pub(crate) fn over(field: u32, k: u32) -> Point {
    Point {
        field,
        seed: mix(SEED, k as u64 + 0x30001),
        free: false,
        loose: false,
        flips: 0,
        sparse: false,
        near: false,
    }
}

/// Members beyond this number are far.
pub(crate) const NEAR: i64 = 40;

/// A point where all far members of a family have the same value, so that long sums are short. What is not zero there
/// is not zero.
pub(crate) fn near() -> Point {
    Point { near: true, ..standard(0) }
}

/// The member whose value a member has where all far ones have the same: the first far one.
pub(crate) fn shared(arena: &Arena, s: Symbol, member: Option<i64>) -> Option<i64> {
    member.or(arena.info(s).member).map(|k| k.min(NEAR + 1))
}

/// A point over a field of its own that is used once.
pub(crate) fn once(field: u32, k: u32) -> Point {
    Point { sparse: true, ..over(field, k + 16) }
}

/// A hash that depends on every bit of a list of words.
pub(crate) fn hash(words: &[u64]) -> u64 {
    let mut h = 0x243f_6a88_85a3_08d3;
    for &w in words {
        h = mix(h, w);
        h ^= h >> 32;
    }
    let h = (h ^ (h >> 31)).wrapping_mul(0x7fb5_d329_728e_a185);
    (h ^ (h >> 27)).wrapping_mul(0x81da_def4_bc2d_d44d) ^ (h >> 33)
}

/// A residue that is not zero, drawn from words.
pub(crate) fn draw(f: &Field, words: &[u64]) -> u64 {
    // Two words make the residue uniform to far below 2⁻⁶².
    let (a, b) = (hash(words), hash(&[words[0] ^ 0x5555, *words.last().unwrap_or(&0), words.len() as u64]));
    let r = f.add(f.residue(a), f.residue(hash(&[a, b])));
    if r == 0 { 1 } else { r }
}

/// The values of the bound indices, by nesting depth.
pub(crate) type Env = [Option<i64>; 32];

/// No bound index has a value.
pub(crate) const NO_ENV: Env = [None; 32];

/// The nesting depth of a bound index.
pub(crate) fn level(arena: &Arena, s: Symbol) -> Option<usize> {
    let k: usize = arena.info(s).name.strip_prefix('#')?.parse().ok()?;
    (k < 32).then_some(k)
}

/// An affine form in indices: a number, or a number and a key that names the rest.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) enum Index {
    /// A number.
    At(i64),
    /// A symbolic index, named by a key.
    Free(u64),
}

/// The value of an index expression.
pub(crate) fn index(arena: &Arena, e: Expr, env: &Env) -> Index {
    let symbol = |e: Expr| -> Result<i64, u64> {
        if let Node::Symbol(s) = arena.node(e)
            && let Some(k) = level(arena, *s)
            && let Some(v) = env[k]
        {
            return Ok(v);
        }
        Err(arena.key(e))
    };
    match arena.node(e) {
        Node::Number(r) => r.to_i64().map_or(Index::Free(arena.key(e)), Index::At),
        Node::Sum(k, terms) => {
            let mut value = k.to_i64();
            let mut key = 0x1d;
            let mut free = false;
            for (x, c) in terms.iter() {
                match (symbol(*x), c.to_i64()) {
                    (Ok(v), Some(c)) => value = value.zip(v.checked_mul(c)).and_then(|(a, b)| a.checked_add(b)),
                    (Ok(v), None) => {
                        // A fraction of an index is no index.
                        free = true;
                        key = mix(key, mix(v as u64, Arena::rational_key(c)));
                    }
                    (Err(k), _) => {
                        free = true;
                        key = mix(key, mix(k, Arena::rational_key(c)));
                    }
                }
            }
            match (value, free) {
                (Some(v), false) => Index::At(v),
                (v, _) => Index::Free(mix(key, v.map_or(u64::MAX, |v| v as u64))),
            }
        }
        _ => match symbol(e) {
            Ok(v) => Index::At(v),
            // The same key as that of 0 + 1·e.
            Err(k) => Index::Free(mix(mix(0x1d, mix(k, Arena::rational_key(&crate::rational::Rational::ONE))), 0)),
        },
    }
}

/// The name of an atom as a number and what is known of its sign.
pub(crate) fn atom(arena: &Arena, facts: &Assumptions, e: Expr, env: &Env, near: bool) -> (u64, Sign) {
    let silent = facts.says_nothing_of_atoms();
    let sign = |s: Symbol, member: Option<i64>, order: u16| {
        if silent { Sign::Unknown } else { facts.range(arena, s, member, order).sign() }
    };
    let named = |s: Symbol, member: Option<i64>, order: u16| {
        atom_key(arena, s, if near { shared(arena, s, member) } else { member }, order)
    };
    match arena.node(e) {
        Node::Symbol(s) => (named(*s, None, 0), sign(*s, None, 0)),
        Node::Jet(s, n) => (named(*s, None, *n), sign(*s, None, *n)),
        Node::Member { family, index: i, order } => match index(arena, *i, env) {
            Index::At(k) => (named(*family, Some(k), *order), sign(*family, Some(k), *order)),
            Index::Free(key) => (hash(&[atom_key(arena, *family, None, *order), key]), sign(*family, None, *order)),
        },
        _ => (arena.key(e), Sign::Unknown),
    }
}

/// The residue of an atom: a square where it is known to be positive, minus a square where negative.
pub(crate) fn atom_value(f: &Field, point: &Point, key: u64, sign: Sign) -> Element {
    let u = draw(f, &[point.seed, f.p, key, 0xA]);
    if point.free {
        return Element::real(u);
    }
    Element::real(if sign.is_nonnegative() && sign != Sign::Zero {
        f.mul(u, u)
    } else if sign.is_nonpositive() && sign != Sign::Zero {
        f.neg(f.mul(u, u))
    } else {
        u
    })
}
