//! Assumptions, and the signs that follow from them.

use crate::arena::{Arena, Expr, Node, Symbol, mix, mix_text};
use crate::function::Function;
use crate::rational::Rational;
use hashbrown::HashMap;

/// What is known of the sign of a real number.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Sign {
    /// > 0
    Positive,
    /// = 0
    Zero,
    /// ≥ 0
    NonNegative,
    /// < 0
    Negative,
    /// ≠ 0
    NonZero,
    /// ≤ 0
    NonPositive,
    /// Nothing is known.
    Unknown,
}

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

impl Sign {
    // The set of possible signs: bit 0 positive, bit 1 zero, bit 2 negative.
    const fn bits(self) -> u8 {
        match self {
            Sign::Positive => 1,
            Sign::Zero => 2,
            Sign::NonNegative => 3,
            Sign::Negative => 4,
            Sign::NonZero => 5,
            Sign::NonPositive => 6,
            Sign::Unknown => 7,
        }
    }

    const fn from_bits(b: u8) -> Sign {
        match b {
            1 => Sign::Positive,
            2 => Sign::Zero,
            3 => Sign::NonNegative,
            4 => Sign::Negative,
            5 => Sign::NonZero,
            6 => Sign::NonPositive,
            _ => Sign::Unknown,
        }
    }

    /// The sign of a number.
    pub fn of_number(r: &Rational) -> Sign {
        match r.signum() {
            1 => Sign::Positive,
            0 => Sign::Zero,
            _ => Sign::Negative,
        }
    }

    /// Whether it is > 0 for certain.
    pub fn is_positive(self) -> bool {
        self == Sign::Positive
    }

    /// Whether it is ≥ 0 for certain.
    pub fn is_nonnegative(self) -> bool {
        self.bits() & 4 == 0
    }

    /// Whether it is < 0 for certain.
    pub fn is_negative(self) -> bool {
        self == Sign::Negative
    }

    /// Whether it is ≤ 0 for certain.
    pub fn is_nonpositive(self) -> bool {
        self.bits() & 1 == 0
    }

    /// Whether it is ≠ 0 for certain.
    pub fn is_nonzero(self) -> bool {
        self.bits() & 2 == 0
    }

    /// The sign of the negative.
    pub fn negate(self) -> Sign {
        let b = self.bits();
        Sign::from_bits(b & 2 | (b & 1) << 2 | b >> 2)
    }

    /// The sign, when the value is known to be not zero.
    pub fn without_zero(self) -> Sign {
        if self == Sign::Zero { Sign::Unknown } else { Sign::from_bits(self.bits() & 5) }
    }

    /// What both facts together say.
    pub fn and(self, other: Sign) -> Sign {
        match self.bits() & other.bits() {
            0 => self,
            b => Sign::from_bits(b),
        }
    }

    /// The sign of a sum.
    pub fn plus(self, other: Sign) -> Sign {
        let (a, b) = (self.bits(), other.bits());
        if a == 2 {
            return other;
        }
        if b == 2 {
            return self;
        }
        let both = a | b;
        if both & 4 == 0 {
            // One that is surely positive makes the sum positive.
            return if a & 2 == 0 || b & 2 == 0 { Sign::Positive } else { Sign::NonNegative };
        }
        if both & 1 == 0 {
            return if a & 2 == 0 || b & 2 == 0 { Sign::Negative } else { Sign::NonPositive };
        }
        Sign::Unknown
    }

    /// The sign of a product.
    pub fn times(self, other: Sign) -> Sign {
        let (a, b) = (self.bits(), other.bits());
        let mut r = (a | b) & 2;
        if a & 1 != 0 && b & 1 != 0 || a & 4 != 0 && b & 4 != 0 {
            r |= 1;
        }
        if a & 1 != 0 && b & 4 != 0 || a & 4 != 0 && b & 1 != 0 {
            r |= 4;
        }
        Sign::from_bits(r)
    }

    /// The sign of a rational power, which is assumed to exist.
    pub fn power(self, exponent: &Rational) -> Sign {
        let base = if exponent.is_negative() { self.without_zero() } else { self };
        if !exponent.is_integer() {
            // The base of a root is not negative, or the value would not exist.
            return if base.is_nonzero() { Sign::Positive } else { base.and(Sign::NonNegative) };
        }
        if exponent.is_even_integer() {
            return if base.is_nonzero() {
                Sign::Positive
            } else if base == Sign::Zero {
                Sign::Zero
            } else {
                Sign::NonNegative
            };
        }
        base
    }
}

/// Lower and upper bounds, each with whether it is strict.
#[derive(Clone, Default, PartialEq, Eq, Hash, Debug)]
pub(crate) struct Range {
    /// The greatest known lower bound.
    pub lower: Option<(Rational, bool)>,
    /// The least known upper bound.
    pub upper: Option<(Rational, bool)>,
    /// Known to be not zero.
    pub nonzero: bool,
}

impl Range {
    fn exactly(r: &Rational) -> Range {
        Range { lower: Some((r.clone(), false)), upper: Some((r.clone(), false)), nonzero: !r.is_zero() }
    }

    fn raise(&mut self, r: Rational, strict: bool) {
        if self.lower.as_ref().is_none_or(|(l, s)| r > *l || r == *l && strict && !s) {
            self.lower = Some((r, strict));
        }
    }

    fn cut(&mut self, r: Rational, strict: bool) {
        if self.upper.as_ref().is_none_or(|(u, s)| r < *u || r == *u && strict && !s) {
            self.upper = Some((r, strict));
        }
    }

    pub fn meet(&mut self, other: &Range) {
        if let Some((r, s)) = &other.lower {
            self.raise(r.clone(), *s);
        }
        if let Some((r, s)) = &other.upper {
            self.cut(r.clone(), *s);
        }
        self.nonzero |= other.nonzero;
    }

    /// The sign that the bounds leave.
    pub fn sign(&self) -> Sign {
        let mut s = if self.nonzero { Sign::NonZero } else { Sign::Unknown };
        if let Some((l, strict)) = &self.lower {
            s = s.and(match l.signum() {
                1 => Sign::Positive,
                0 if *strict => Sign::Positive,
                0 => Sign::NonNegative,
                _ => Sign::Unknown,
            });
        }
        if let Some((u, strict)) = &self.upper {
            s = s.and(match u.signum() {
                -1 => Sign::Negative,
                0 if *strict => Sign::Negative,
                0 => Sign::NonPositive,
                _ => Sign::Unknown,
            });
        }
        s
    }

    fn scale(&self, c: &Rational) -> Range {
        let map = |b: &Option<(Rational, bool)>| b.as_ref().map(|(r, s)| (r.mul(c), *s));
        let (lower, upper) = (map(&self.lower), map(&self.upper));
        if c.is_negative() {
            Range { lower: upper, upper: lower, nonzero: self.nonzero }
        } else {
            Range { lower, upper, nonzero: self.nonzero }
        }
    }

    fn plus(&self, other: &Range) -> Range {
        let sum = |a: &Option<(Rational, bool)>, b: &Option<(Rational, bool)>| match (a, b) {
            (Some((x, s)), Some((y, t))) => Some((x.add(y), *s || *t)),
            _ => None,
        };
        Range { lower: sum(&self.lower, &other.lower), upper: sum(&self.upper, &other.upper), nonzero: false }
    }
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

/// What may be taken for granted: signs, bounds of atoms, comparisons. Two with the same facts are equal.
#[derive(Clone, Default, Debug)]
pub struct Assumptions {
    facts: Vec<(Expr, Relation)>,
    atoms: HashMap<u64, Range>,
    families: HashMap<u64, Range>,
    /// The signs of other expressions, by structural key, for both the expression and its negative.
    signs: HashMap<u64, Sign>,
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
        if self.facts.contains(&(difference, relation)) {
            return;
        }
        self.facts.push((difference, relation));
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

    fn known(&self, arena: &mut Arena, e: Expr) -> Sign {
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

/// The sign of a node whose children's signs are known.
pub(crate) fn infer(arena: &mut Arena, facts: &Assumptions, e: Expr, of: &dyn Fn(Expr) -> Sign) -> Sign {
    let known = facts.known(arena, e);
    let own = match arena.node(e) {
        Node::Number(r) => Sign::of_number(r),
        Node::Pi => Sign::Positive,
        Node::Undefined => Sign::Unknown,
        Node::Symbol(s) => facts.range(arena, *s, None, 0).sign(),
        Node::Jet(s, n) => facts.range(arena, *s, None, *n).sign(),
        Node::Member { family, order, .. } => {
            facts.families.get(&family_key(arena, *family, *order)).map_or(Sign::Unknown, Range::sign)
        }
        Node::Sum(k, terms) => {
            let mut s = Sign::of_number(k);
            for (x, c) in terms.iter() {
                s = s.plus(of(*x).times(Sign::of_number(c)));
            }
            if matches!(s, Sign::Unknown | Sign::NonNegative | Sign::NonPositive) {
                s = s.and(range(arena, facts, e, of, 0).sign());
            }
            s
        }
        Node::Product(factors) => factors.iter().fold(Sign::Positive, |s, (b, r)| s.times(of(*b).power(r))),
        Node::Power(b, _) => {
            if of(*b).is_positive() {
                Sign::Positive
            } else {
                Sign::Unknown
            }
        }
        Node::Call(f, args) => {
            let s = of(args[0]);
            match f {
                Function::Exp | Function::Cosh => Sign::Positive,
                Function::Abs => {
                    if s.is_nonzero() {
                        Sign::Positive
                    } else {
                        Sign::NonNegative
                    }
                }
                Function::Acos => Sign::NonNegative,
                Function::Sinh | Function::Tanh | Function::Atan | Function::Asin | Function::Sign => s,
                Function::Min | Function::Max => {
                    let all = |t: fn(Sign) -> bool| args.iter().all(|x| t(of(*x)));
                    if all(Sign::is_positive) {
                        Sign::Positive
                    } else if all(Sign::is_nonnegative) {
                        Sign::NonNegative
                    } else if all(Sign::is_negative) {
                        Sign::Negative
                    } else if all(Sign::is_nonpositive) {
                        Sign::NonPositive
                    } else {
                        Sign::Unknown
                    }
                }
                _ => Sign::Unknown,
            }
        }
        Node::Unspecified { .. } => Sign::Unknown,
        Node::Bound { lower, upper, body, .. } => {
            let s = of(*body);
            match (arena.as_i64(*lower), arena.as_i64(*upper)) {
                (Some(a), Some(b)) if a <= b && (s.is_nonnegative() || s.is_nonpositive()) => s,
                _ if s.is_nonnegative() => Sign::NonNegative,
                _ if s.is_nonpositive() => Sign::NonPositive,
                _ => Sign::Unknown,
            }
        }
    };
    own.and(known)
}

/// Bounds of an expression, from those of its atoms. Shallow: deep nesting is unknown.
fn range(arena: &Arena, facts: &Assumptions, e: Expr, of: &dyn Fn(Expr) -> Sign, level: u32) -> Range {
    let unit =
        || Range { lower: Some((Rational::MINUS_ONE, false)), upper: Some((Rational::ONE, false)), nonzero: false };
    if level > 6 {
        return Range::default();
    }
    let mut r = match arena.node(e) {
        Node::Number(r) => Range::exactly(r),
        Node::Symbol(s) => facts.range(arena, *s, None, 0),
        Node::Jet(s, n) => facts.range(arena, *s, None, *n),
        Node::Call(Function::Sin | Function::Cos | Function::Tanh | Function::Sign, _) => unit(),
        Node::Sum(k, terms) if terms.len() <= 64 => {
            let mut sum = Range::exactly(k);
            for (x, c) in terms.iter() {
                sum = sum.plus(&range(arena, facts, *x, of, level + 1).scale(c));
                if sum.lower.is_none() && sum.upper.is_none() {
                    break;
                }
            }
            sum
        }
        Node::Product(factors) => factors
            .iter()
            .map(|(b, n)| monotone_power(&range(arena, facts, *b, of, level + 1), n))
            .reduce(|a, b| range_product(&a, &b))
            .unwrap_or_default(),
        _ => Range::default(),
    };
    let s = of(e);
    if level > 0 {
        if s.is_nonnegative() {
            r.raise(Rational::ZERO, s.is_positive());
        }
        if s.is_nonpositive() {
            r.cut(Rational::ZERO, s.is_negative());
        }
    }
    r
}

fn monotone_power(r: &Range, n: &Rational) -> Range {
    let (Some(k), bits) = (n.to_i64(), 512) else { return Range::default() };
    if !(1..=64).contains(&k) {
        return Range::default();
    }
    let raise = |b: &Option<(Rational, bool)>| b.as_ref().and_then(|(x, s)| Some((x.pow(k, bits)?, *s)));
    let nonnegative = r.lower.as_ref().is_some_and(|(l, _)| !l.is_negative());
    if nonnegative || k % 2 == 1 {
        return Range { lower: raise(&r.lower), upper: raise(&r.upper), nonzero: r.nonzero };
    }
    // An even power of a range around zero.
    let upper = match (&r.lower, &r.upper) {
        (Some((l, s)), Some((u, t))) => {
            let (m, strict) =
                if l.abs() > u.abs() { (l.abs(), *s) } else { (u.abs(), *t && (l.abs() != u.abs() || *s)) };
            m.pow(k, bits).map(|m| (m, strict))
        }
        _ => None,
    };
    Range { lower: Some((Rational::ZERO, r.nonzero)), upper, nonzero: r.nonzero }
}

/// The product of two ranges; known only where both are not negative or both bounded.
fn range_product(a: &Range, b: &Range) -> Range {
    let nonnegative = |r: &Range| r.lower.as_ref().is_some_and(|(l, _)| !l.is_negative());
    if nonnegative(a) && nonnegative(b) {
        let both = |x: &Option<(Rational, bool)>, y: &Option<(Rational, bool)>| match (x, y) {
            (Some((p, s)), Some((q, t))) => Some((p.mul(q), *s && *t)),
            _ => None,
        };
        let lower = match both(&a.lower, &b.lower) {
            Some((r, s)) => Some((r, s)),
            None => Some((Rational::ZERO, false)),
        };
        return Range { lower, upper: both(&a.upper, &b.upper), nonzero: a.nonzero && b.nonzero };
    }
    let (Some(al), Some(au), Some(bl), Some(bu)) = (&a.lower, &a.upper, &b.lower, &b.upper) else {
        return Range::default();
    };
    let mut out = Range::default();
    let corners = [al.0.mul(&bl.0), al.0.mul(&bu.0), au.0.mul(&bl.0), au.0.mul(&bu.0)];
    let (lo, hi) = (corners.iter().min(), corners.iter().max());
    if let (Some(lo), Some(hi)) = (lo, hi) {
        out.raise(lo.clone(), false);
        out.cut(hi.clone(), false);
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn arithmetic_of_signs() {
        use Sign::*;
        assert_eq!(Positive.plus(NonNegative), Positive);
        assert_eq!(NonNegative.plus(NonNegative), NonNegative);
        assert_eq!(Positive.plus(Negative), Unknown);
        assert_eq!(Negative.times(Negative), Positive);
        assert_eq!(NonZero.power(&Rational::integer(2)), Positive);
        assert_eq!(Unknown.power(&Rational::HALF), NonNegative);
        assert_eq!(Unknown.power(&Rational::HALF.neg()), Positive);
        assert_eq!(NonPositive.negate(), NonNegative);
    }
}
