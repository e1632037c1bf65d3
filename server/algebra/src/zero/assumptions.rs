//! What may be taken for granted.

use super::points::NEAR;
use super::ranges::Range;
use super::signs::Sign;
use crate::arena::{Arena, Expr, Node, Symbol, mix, mix_text};
use crate::rational::Rational;
use hashbrown::{HashMap, HashSet};

/// A comparison with zero.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Relation {
    /// > 0
    Greater,
    /// ≥ 0
    GreaterEqual,
    /// < 0
    Less,
    /// ≤ 0
    LessEqual,
    /// ≠ 0
    NotEqual,
}

/// The name of an atom as a number: the same in every session.
pub(crate) fn atom_key(arena: &Arena, s: Symbol, member: Option<i64>, order: u16) -> u64 {
    let info = arena.info(s);
    let h = mix_text(info.role as u64 + 101, &info.name);
    let h = match member.or(info.member) {
        Some(k) => mix(mix(h, 1), k as u64),
        None => mix(h, 0),
    };
    mix(h, order as u64)
}

fn family_key(arena: &Arena, s: Symbol, order: u16) -> u64 {
    let info = arena.info(s);
    mix(mix(mix_text(info.role as u64 + 101, &info.name), 2), order as u64)
}

/// Beyond this many facts none are combined.
const MANY_FACTS: usize = 300;

/// What may be taken for granted: signs, bounds of atoms, comparisons. Two with the same facts are equal.
#[derive(Clone, Default, Debug)]
pub struct Assumptions {
    facts: Vec<(Expr, Relation)>,
    seen: HashSet<(Expr, Relation)>,
    atoms: HashMap<u64, Range>,
    families: HashMap<u64, Range>,
    /// The signs of other expressions, by structural key, for both the expression and its negative.
    signs: HashMap<u64, Sign>,
    /// Whether something is known of a far member alone.
    members: bool,
    fingerprint: u64,
}

impl PartialEq for Assumptions {
    fn eq(&self, other: &Assumptions) -> bool {
        self.fingerprint == other.fingerprint
    }
}

impl Eq for Assumptions {}

impl Assumptions {
    /// No assumptions.
    pub fn new() -> Assumptions {
        Assumptions::default()
    }

    /// Takes `difference ⋚ 0` for granted. A fact of the member of a family at a symbolic index holds for all members.
    pub fn assume(&mut self, arena: &mut Arena, difference: Expr, relation: Relation) {
        if !self.seen.insert((difference, relation)) {
            return;
        }
        self.facts.push((difference, relation));
        self.members |= arena.atoms(difference).iter().any(|x| match arena.node(*x) {
            Node::Symbol(s) | Node::Jet(s, _) => arena.info(*s).member.is_some_and(|k| k > NEAR),
            _ => false,
        });
        // The order of the facts does not matter.
        self.fingerprint = self.fingerprint.wrapping_add(mix(mix(0xA55, arena.key(difference)), relation as u64 + 1));
        if let Some((atom, slope, constant)) = linear_in_one_atom(arena, difference) {
            let at = match constant.neg().div(&slope) {
                Some(r) => r,
                None => return,
            };
            let up = !slope.is_negative();
            let mut range = Range::default();
            match relation {
                Relation::Greater | Relation::GreaterEqual | Relation::Less | Relation::LessEqual => {
                    let strict = matches!(relation, Relation::Greater | Relation::Less);
                    let greater = matches!(relation, Relation::Greater | Relation::GreaterEqual);
                    if greater == up { range.raise(at, strict) } else { range.cut(at, strict) }
                }
                Relation::NotEqual => range.nonzero = at.is_zero(),
            }
            let slot = match arena.node(atom) {
                Node::Symbol(s) => self.atoms.entry(atom_key(arena, *s, None, 0)),
                Node::Jet(s, n) => self.atoms.entry(atom_key(arena, *s, None, *n)),
                Node::Member { family, order, .. } => self.families.entry(family_key(arena, *family, *order)),
                _ => return,
            };
            slot.or_default().meet(&range);
            self.propagate(arena);
            return;
        }
        let sign = match relation {
            Relation::Greater => Sign::Positive,
            Relation::GreaterEqual => Sign::NonNegative,
            Relation::Less => Sign::Negative,
            Relation::LessEqual => Sign::NonPositive,
            Relation::NotEqual => Sign::NonZero,
        };
        let (e, scale) = primitive(arena, difference);
        let sign = if scale.is_negative() { sign.negate() } else { sign };
        let minus = arena.neg(e);
        for (e, s) in [(e, sign), (minus, sign.negate())] {
            let slot = self.signs.entry(arena.key(e)).or_insert(Sign::Unknown);
            *slot = slot.and(s);
        }
        self.propagate(arena);
    }

    /// Bounds of atoms from linear comparisons: a > b and b > 0 make a positive.
    fn propagate(&mut self, arena: &Arena) {
        if self.facts.len() > MANY_FACTS {
            return;
        }
        // As many rounds as the longest chain of comparisons that is followed.
        for _ in 0..8 {
            let mut found = Vec::new();
            for (e, relation) in &self.facts {
                let Node::Sum(k, terms) = arena.node(*e) else { continue };
                if terms.len() < 2 || terms.len() > 16 || *relation == Relation::NotEqual {
                    continue;
                }
                let strict = matches!(relation, Relation::Greater | Relation::Less);
                let sign = if matches!(relation, Relation::Less | Relation::LessEqual) { -1 } else { 1 };
                let sign = Rational::integer(sign);
                let of = |x: Expr| match arena.node(x) {
                    Node::Symbol(s) => Some((*s, 0, self.range(arena, *s, None, 0))),
                    Node::Jet(s, n) => Some((*s, *n, self.range(arena, *s, None, *n))),
                    _ => None,
                };
                for (i, (x, c)) in terms.iter().enumerate() {
                    let Some((s, order, now)) = of(*x) else { continue };
                    // c x > −rest ≥ −upper(rest).
                    let mut rest = Range::exactly(&k.mul(&sign));
                    for (j, (y, d)) in terms.iter().enumerate() {
                        if i != j {
                            let r = of(*y).map_or(Range::default(), |y| y.2);
                            rest = rest.plus(&r.scale(&d.mul(&sign)));
                        }
                    }
                    let Some((upper, open)) = rest.upper else { continue };
                    let c = c.mul(&sign);
                    let Some(at) = upper.neg().div(&c) else { continue };
                    let mut better = now.clone();
                    if c.is_negative() {
                        better.cut(at, strict || open);
                    } else {
                        better.raise(at, strict || open);
                    }
                    if better != now {
                        found.push((atom_key(arena, s, None, order), better));
                    }
                }
            }
            if found.is_empty() {
                return;
            }
            for (key, range) in found {
                self.atoms.entry(key).or_default().meet(&range);
            }
        }
    }

    /// The bounds that hold for all members of a family.
    pub(crate) fn family(&self, arena: &Arena, family: Symbol, order: u16) -> Option<&Range> {
        self.families.get(&family_key(arena, family, order))
    }

    /// Whether the far members of a family do not all have the same bounds.
    pub(crate) fn tell_members_apart(&self) -> bool {
        self.members
    }

    /// Whether the difference is linear in one atom, so that its bounds say all.
    pub(crate) fn bounds_one_atom(arena: &Arena, difference: Expr) -> bool {
        linear_in_one_atom(arena, difference).is_some()
    }

    /// The facts as they were given.
    pub fn facts(&self) -> &[(Expr, Relation)] {
        &self.facts
    }

    /// The same for the same facts.
    pub fn fingerprint(&self) -> u64 {
        self.fingerprint
    }

    /// The bounds of an atom; `member` overrides the member's number of the symbol.
    pub(crate) fn range(&self, arena: &Arena, s: Symbol, member: Option<i64>, order: u16) -> Range {
        if self.atoms.is_empty() && self.families.is_empty() {
            return Range::default();
        }
        let mut r = self.atoms.get(&atom_key(arena, s, member, order)).cloned().unwrap_or_default();
        if let Some(f) = self.families.get(&family_key(arena, s, order)) {
            r.meet(f);
        }
        r
    }

    /// Whether nothing is assumed of any atom.
    pub(crate) fn says_nothing_of_atoms(&self) -> bool {
        self.atoms.is_empty() && self.families.is_empty()
    }

    pub(crate) fn known(&self, arena: &mut Arena, e: Expr) -> Sign {
        if self.signs.is_empty() {
            return Sign::Unknown;
        }
        if let Some(s) = self.signs.get(&arena.key(e)) {
            return *s;
        }
        if !matches!(arena.node(e), Node::Sum(..)) {
            return Sign::Unknown;
        }
        let (e, scale) = primitive(arena, e);
        let s = self.signs.get(&arena.key(e)).copied().unwrap_or(Sign::Unknown);
        if scale.is_negative() { s.negate() } else { s }
    }
}

/// e = scale · primitive.
fn primitive(arena: &mut Arena, e: Expr) -> (Expr, Rational) {
    let Node::Sum(k, terms) = arena.node(e) else { return (e, Rational::ONE) };
    let mut content = k.abs();
    for (_, c) in terms.iter() {
        content = if content.is_zero() { c.abs() } else { content.content(c) };
    }
    if terms[0].1.is_negative() {
        content = content.neg();
    }
    match content.recip() {
        Some(r) => (arena.scale(e, &r), content),
        None => (e, Rational::ONE),
    }
}

/// slope · atom + constant.
fn linear_in_one_atom(arena: &Arena, e: Expr) -> Option<(Expr, Rational, Rational)> {
    let atomic = |x: Expr| matches!(arena.node(x), Node::Symbol(_) | Node::Jet(..) | Node::Member { .. });
    match arena.node(e) {
        Node::Sum(k, terms) if terms.len() == 1 && atomic(terms[0].0) => {
            Some((terms[0].0, terms[0].1.clone(), k.clone()))
        }
        _ if atomic(e) => Some((e, Rational::ONE, Rational::ZERO)),
        _ => None,
    }
}
