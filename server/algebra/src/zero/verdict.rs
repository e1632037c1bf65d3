//! The verdicts, and how many points each needs.

use super::evaluate::{FieldPoint, exists};
use super::field::Element;
use super::interval::Interval;
use super::notes::{MAX_DEGREE, Note, Notes, lcm, sum_bounds};
use super::points::{self, Fields, NO_ENV, Point};
use super::roots::{Radicals, RankMemo};
use super::signs::{Assumptions, Relation, Sign};
use super::table::{Place, Table};
use super::witness::{ATTEMPTS, RealPoint, Witness};
use crate::arena::{Arena, Expr, Node};
use crate::budget::{Budget, Stopped};
use crate::rational::Rational;
use hashbrown::HashMap;
use std::fmt;

/// The answer to `is this zero?`.
#[derive(Clone, Copy, PartialEq, Debug)]
pub enum Verdict {
    /// Zero, with an error probability below 10⁻³⁰. Equality is generic: off poles.
    Proved,
    /// Not zero; with a real point where it is not, if one was found.
    Refuted(Option<Witness>),
    /// Neither, and why.
    Undecided(Reason),
}

impl Verdict {
    /// Whether it is proved to be zero.
    pub fn is_proved(self) -> bool {
        self == Verdict::Proved
    }

    /// Whether it is proved to be not zero.
    pub fn is_refuted(self) -> bool {
        matches!(self, Verdict::Refuted(_))
    }
}

/// Why something is undecided.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Reason {
    /// The budget is used up.
    TooLarge,
    /// Degree or exponents are out of all bounds.
    DegreeTooHigh,
    /// The text has changed meanwhile.
    Cancelled,
    /// A division by zero.
    Undefined,
    /// A denominator vanished at every point tried.
    DenominatorsVanish,
    /// The mass matrix was singular at every point tried.
    Degenerate,
    /// It hangs on functions whose relations are not all known.
    Functions,
    /// It hangs on the signs of expressions, and they are not known.
    SignsUnknown,
    /// Roots depend on each other in a way that was not resolved.
    RelatedRoots,
    /// A sum has symbolic bounds.
    SymbolicRange,
    /// It would have to be tested on a constraint surface.
    Constraints,
    /// No real point was found that satisfies the assumptions and shows a value other than zero.
    NoWitness,
}

impl fmt::Display for Reason {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Reason::TooLarge => "the expression is too large to be tested",
            Reason::DegreeTooHigh => "the exponents are too large to be tested",
            Reason::Cancelled => "the test was cancelled",
            Reason::Undefined => "the expression divides by zero",
            Reason::DenominatorsVanish => "a denominator seems to vanish everywhere",
            Reason::Degenerate => "the mass matrix seems to be singular everywhere",
            Reason::Functions => {
                "it depends on identities of functions that are not all known (log, inverse functions)"
            }
            Reason::SignsUnknown => "it depends on signs that are not known; an assumption may help",
            Reason::RelatedRoots => "it depends on roots that are related to each other",
            Reason::SymbolicRange => "it contains a sum whose range is not a range of numbers",
            Reason::Constraints => "it would have to be tested on the surface of the constraints",
            Reason::NoWitness => {
                "no real point was found that satisfies the assumptions and shows a value other than 0"
            }
        })
    }
}

impl From<Stopped> for Reason {
    fn from(s: Stopped) -> Reason {
        match s {
            Stopped::Cancelled => Reason::Cancelled,
            _ => Reason::TooLarge,
        }
    }
}

/// The zero test with its tables: residues per node and point, kept across edits.
///
/// It belongs to one arena. When the assumptions change, [`ZeroTest::set_assumptions`] drops what depends on them.
pub struct ZeroTest {
    pub(super) facts: Assumptions,
    pub(super) notes: Notes,
    pub(super) fields: Fields,
    tables: HashMap<Point, Table<FieldPoint>>,
    real: Vec<Table<RealPoint>>,
    /// Whether the real points satisfy the assumptions, as far as that has been looked at.
    fits: Vec<Option<bool>>,
    pub(super) ranks: RankMemo,
}

/// Error probability below 2⁻¹⁰⁰ < 10⁻³⁰.
const BITS: f32 = 100.0;
/// Points tried when denominators keep vanishing.
const POLES: u32 = 24;
/// Signs that are not known, beyond which patterns are not enumerated.
const MAX_SIGNS: usize = 3;
/// Relations among roots, beyond which they are not sampled.
const MAX_RELATIONS: usize = 2;

/// What is to be done before a value that vanished counts as zero.
pub(super) struct Need {
    /// Points for each pattern of signs.
    pub points: u32,
    /// Further primes, because the coefficients could be divisible by the first two.
    pub primes: u32,
    /// Relations that the roots may have: as many bits per point are lost.
    pub relations: usize,
    /// The expressions whose signs are not known.
    pub signs: Vec<Expr>,
    /// Expressions that are known to be positive and stand under roots that may be related.
    pub positive: Vec<Expr>,
}

impl ZeroTest {
    /// A test under assumptions.
    pub fn new(assumptions: Assumptions) -> ZeroTest {
        ZeroTest {
            facts: assumptions,
            notes: Notes::new(),
            fields: Fields::new(),
            tables: HashMap::new(),
            real: (0..ATTEMPTS).map(|attempt| Table::new(RealPoint { attempt })).collect(),
            fits: vec![None; ATTEMPTS as usize],
            ranks: RankMemo::default(),
        }
    }

    /// The assumptions.
    pub fn assumptions(&self) -> &Assumptions {
        &self.facts
    }

    /// Replaces the assumptions; all tables are dropped where these differ.
    pub fn set_assumptions(&mut self, assumptions: Assumptions) {
        if assumptions != self.facts {
            *self = ZeroTest::new(assumptions);
        }
    }

    /// What is known of the sign of an expression under the assumptions. Sound, not complete.
    pub fn sign_of(&mut self, arena: &mut Arena, e: Expr, budget: &mut Budget) -> Sign {
        match self.notes.analyse(arena, &self.facts, e, budget) {
            Ok(()) => self.notes.sign(e),
            Err(_) => Sign::Unknown,
        }
    }

    /// Whether the expression is zero. Costs a visit per node that is new, at two to four points.
    pub fn is_zero(&mut self, arena: &mut Arena, e: Expr, budget: &mut Budget) -> Verdict {
        match arena.node(e) {
            Node::Number(r) if r.is_zero() => return Verdict::Proved,
            Node::Number(r) => {
                let v = Interval::of(r);
                return Verdict::Refuted(Some(Witness { point: 0, lower: v.lo, upper: v.hi }));
            }
            Node::Undefined => return Verdict::Undecided(Reason::Undefined),
            _ => {}
        }
        self.sum_is_zero(arena, &[(e, Rational::ONE)], budget)
    }

    /// Whether Σ coefficient · part is zero, without building the sum.
    pub fn sum_is_zero(&mut self, arena: &mut Arena, parts: &[(Expr, Rational)], budget: &mut Budget) -> Verdict {
        self.decide(arena, parts, budget).unwrap_or_else(|s| Verdict::Undecided(s.into()))
    }

    fn decide(
        &mut self,
        arena: &mut Arena,
        parts: &[(Expr, Rational)],
        budget: &mut Budget,
    ) -> Result<Verdict, Stopped> {
        if parts.iter().all(|(e, c)| *e == Arena::ZERO || c.is_zero()) {
            return Ok(Verdict::Proved);
        }
        let note = self.analyse(arena, parts, budget)?;
        if note.flags & Notes::UNDEFINED != 0 {
            return Ok(Verdict::Undecided(Reason::Undefined));
        }
        // Nearly everything that is not zero shows it at the first point where it has a value.
        let mut poles = 0;
        loop {
            match self.sum_at(arena, parts, points::standard(poles), budget)? {
                Some(v) if !v.is_zero() => return self.refute(arena, parts, &note, Reason::NoWitness, budget),
                Some(_) => break,
                None => poles += 1,
            }
            if poles > POLES {
                return self.refute(arena, parts, &note, Reason::DenominatorsVanish, budget);
            }
        }
        let need = match self.need(arena, parts, &note, budget)? {
            Ok(need) => need,
            Err(reason) => return self.refute(arena, parts, &note, reason, budget),
        };
        match self.sample(arena, parts, &need, budget)? {
            Sampled::Zero => Ok(Verdict::Proved),
            Sampled::NotZero if need.relations > 0 => self.refute(arena, parts, &note, Reason::RelatedRoots, budget),
            Sampled::NotZero => self.refute(arena, parts, &note, Reason::NoWitness, budget),
            Sampled::Unseen(reason) => self.refute(arena, parts, &note, reason, budget),
        }
    }

    /// Makes the notes and bounds the sum.
    pub(super) fn analyse(
        &mut self,
        arena: &mut Arena,
        parts: &[(Expr, Rational)],
        budget: &mut Budget,
    ) -> Result<Note, Stopped> {
        for (e, _) in parts {
            self.notes.analyse(arena, &self.facts, *e, budget)?;
        }
        if let [(e, _)] = parts {
            return Ok(self.notes.note(*e));
        }
        let mut note = self.notes.note(Arena::ZERO);
        for (e, _) in parts {
            let n = self.notes.note(*e);
            note.flags |= n.flags;
            note.lcm = lcm(note.lcm, n.lcm);
        }
        sum_bounds(&mut note, &Rational::ZERO, parts.iter().map(|(e, c)| (self.notes.note(*e), c)));
        Ok(note)
    }

    /// The residue of a node with a note at a point; `None` where it has none.
    pub(super) fn value_at(
        &mut self,
        arena: &Arena,
        e: Expr,
        point: Point,
        budget: &mut Budget,
    ) -> Result<Option<Element>, Stopped> {
        let fields = &self.fields;
        let table = self
            .tables
            .entry(point)
            .or_insert_with(|| Table::new(FieldPoint { point, field: fields.get(point.field) }));
        let at = Place { arena, notes: &self.notes, facts: &self.facts };
        let v = table.value(at, e, budget)?;
        Ok(exists(v).then_some(v))
    }

    /// Forgets the table of a point that will not be used again.
    pub(super) fn drop_point(&mut self, point: Point) {
        self.tables.remove(&point);
    }

    /// The residue of the sum at a point.
    pub(super) fn sum_at(
        &mut self,
        arena: &Arena,
        parts: &[(Expr, Rational)],
        point: Point,
        budget: &mut Budget,
    ) -> Result<Option<Element>, Stopped> {
        let field = self.fields.get(point.field);
        let mut sum = Element::ZERO;
        for (e, c) in parts {
            let Some(v) = self.value_at(arena, *e, point, budget)? else { return Ok(None) };
            let c = super::evaluate::number(&field, c);
            if !exists(c) {
                return Ok(None);
            }
            sum = field.add2(sum, field.mul2(v, c));
        }
        Ok(Some(sum))
    }

    /// How many points decide, or why none do.
    pub(super) fn need(
        &mut self,
        arena: &mut Arena,
        parts: &[(Expr, Rational)],
        note: &Note,
        budget: &mut Budget,
    ) -> Result<Result<Need, Reason>, Stopped> {
        if note.flags & Notes::TOO_LARGE != 0 {
            return Ok(Err(Reason::DegreeTooHigh));
        }
        let mut need = Need { points: 0, primes: 0, relations: 0, signs: Vec::new(), positive: Vec::new() };
        let mut roots = 0;
        if note.flags & (Notes::ROOT | Notes::SIGN | Notes::HIDDEN) != 0 {
            let list: Vec<Expr> = parts.iter().map(|p| p.0).collect();
            let found = match Radicals::collect(self, arena, &list, budget)? {
                Ok(found) => found,
                Err(reason) => return Ok(Err(reason)),
            };
            roots = found.roots.len();
            need.relations = found.hidden;
            if roots > 0 {
                need.relations += self.dependent_roots(arena, &found.roots, 0, budget)?;
                if need.relations == 0 {
                    need.relations = self.dependent_roots(arena, &found.roots, 1, budget)?;
                }
            }
            if need.relations > 0 {
                need.positive = found.roots.iter().copied().filter(|r| self.notes.sign(*r).is_positive()).collect();
            }
            need.signs = found.signs;
        }
        if need.signs.len() > MAX_SIGNS {
            return Ok(Err(Reason::SignsUnknown));
        }
        if need.relations > MAX_RELATIONS {
            return Ok(Err(Reason::RelatedRoots));
        }
        // A root counts twice; roots of unity and exponents narrow the draw to one in 2¹⁵.
        let degree = note.num.max(1.0).log2() + (note.lcm as f32).log2() + roots as f32;
        let uniform = if note.flags & Notes::ANGLE != 0 { 46.0 } else { 59.0 };
        let bits = uniform - degree - need.signs.len() as f32;
        if note.num > MAX_DEGREE || bits < 6.0 {
            return Ok(Err(Reason::DegreeTooHigh));
        }
        need.points = ((BITS / bits).ceil() as u32).max(2);
        // Primes below 2⁶² and above 2⁶¹ whose product exceeds every coefficient cannot divide all of them.
        let primes = (note.tall / 61.0).floor() + 1.0;
        if primes > 64.0 {
            return Ok(Err(Reason::DegreeTooHigh));
        }
        need.primes = (primes as u32).saturating_sub(2);
        Ok(Ok(need))
    }

    /// Evaluates at as many points as are needed.
    pub(super) fn sample(
        &mut self,
        arena: &mut Arena,
        parts: &[(Expr, Rational)],
        need: &Need,
        budget: &mut Budget,
    ) -> Result<Sampled, Stopped> {
        if need.relations > 0 {
            return self.sample_related(arena, parts, need, budget);
        }
        for j in 0..need.primes {
            let field = self.fields.drawn(j as u64);
            // Two tries: the field may lack a root or a quotient.
            let mut seen = false;
            for k in 0..4 {
                match self.sum_at(arena, parts, points::over(field, k), budget)? {
                    Some(v) if !v.is_zero() => return Ok(Sampled::NotZero),
                    Some(_) => {
                        seen = true;
                        break;
                    }
                    None => {}
                }
            }
            if !seen {
                return Ok(Sampled::Unseen(Reason::DenominatorsVanish));
            }
        }
        let patterns = 1usize << need.signs.len();
        let mut counts = vec![[0u32; 2]; patterns];
        let mut poles = 0;
        let limit = POLES + 8 * need.points * patterns as u32 * (1 + need.signs.len() as u32);
        let mut k = 0;
        while counts.iter().any(|c| c[0] + c[1] < need.points || c[0] == 0 || c[1] == 0) {
            let point = points::standard(k);
            k += 1;
            if k > limit {
                let reason = if poles + 1 >= k { Reason::DenominatorsVanish } else { Reason::SignsUnknown };
                return Ok(Sampled::Unseen(reason));
            }
            match self.sum_at(arena, parts, point, budget)? {
                Some(v) if !v.is_zero() => return Ok(Sampled::NotZero),
                Some(_) => {
                    if let Some(p) = self.pattern(arena, &need.signs, point, budget)? {
                        counts[p][point.field as usize] += 1;
                    }
                }
                None => poles += 1,
            }
        }
        Ok(Sampled::Zero)
    }

    /// Signs at a point as bits; `None` where one vanishes or is not real.
    fn pattern(
        &mut self,
        arena: &Arena,
        signs: &[Expr],
        point: Point,
        budget: &mut Budget,
    ) -> Result<Option<usize>, Stopped> {
        let mut p = 0;
        for (k, e) in signs.iter().enumerate() {
            let field = self.fields.get(point.field);
            match self.value_at(arena, *e, point, budget)? {
                Some(v) if v.is_real() && !v.is_zero() => p |= ((field.chi(v.re) < 0) as usize) << k,
                _ => return Ok(None),
            }
        }
        Ok(Some(p))
    }

    /// Roots that may be related: the signs that the relations hide are drawn anew at each of many points, each with
    /// a prime of its own, so that the real ones are among them.
    fn sample_related(
        &mut self,
        arena: &mut Arena,
        parts: &[(Expr, Rational)],
        need: &Need,
        budget: &mut Budget,
    ) -> Result<Sampled, Stopped> {
        let wanted = 72u32 << need.relations;
        let patterns = 1usize << need.signs.len();
        let mut counts = vec![0u32; patterns];
        let limit = (wanted * patterns as u32) << (need.positive.len().min(4) + 1);
        for k in 0..limit {
            let field = self.fields.drawn(0x100 + (k % 1024) as u64);
            let point = points::over(field, k + 16);
            let mut fits = true;
            for e in &need.positive {
                let f = self.fields.get(field);
                fits &= match self.value_at(arena, *e, point, budget)? {
                    Some(v) => v.is_real() && f.chi(v.re) == 1,
                    None => false,
                };
                if !fits {
                    break;
                }
            }
            if fits {
                match self.sum_at(arena, parts, point, budget)? {
                    Some(v) if !v.is_zero() => {
                        self.drop_point(point);
                        return Ok(Sampled::NotZero);
                    }
                    Some(_) => {
                        if let Some(p) = self.pattern(arena, &need.signs, point, budget)? {
                            counts[p] += 1;
                        }
                    }
                    None => {}
                }
            }
            self.drop_point(point);
            if counts.iter().all(|c| *c >= wanted) {
                return Ok(Sampled::Zero);
            }
        }
        Ok(Sampled::Unseen(Reason::RelatedRoots))
    }

    /// A real point where the value is not zero, or another proof that it is not.
    pub(super) fn refute(
        &mut self,
        arena: &mut Arena,
        parts: &[(Expr, Rational)],
        note: &Note,
        reason: Reason,
        budget: &mut Budget,
    ) -> Result<Verdict, Stopped> {
        if let Some(w) = self.witness(arena, parts, budget)? {
            return Ok(Verdict::Refuted(Some(w)));
        }
        if reason == Reason::NoWitness {
            if self.atoms_are_independent(note) {
                return Ok(Verdict::Refuted(None));
            }
            let named = [
                (Notes::SYMBOLIC, Reason::SymbolicRange),
                (Notes::OPAQUE | Notes::INCOMPLETE, Reason::Functions),
                (Notes::SIGN, Reason::SignsUnknown),
                (Notes::HIDDEN, Reason::RelatedRoots),
                (Notes::ROOT, Reason::SignsUnknown),
            ];
            for (flags, reason) in named {
                if note.flags & flags != 0 {
                    return Ok(Verdict::Undecided(reason));
                }
            }
        }
        Ok(Verdict::Undecided(reason))
    }

    /// Whether a value that is nonzero in a field is nonzero: the atoms satisfy no relation but those in use.
    fn atoms_are_independent(&self, note: &Note) -> bool {
        let related = Notes::EXPONENTIAL
            | Notes::ANGLE
            | Notes::ROOT
            | Notes::SIGN
            | Notes::OPAQUE
            | Notes::HIDDEN
            | Notes::INCOMPLETE
            | Notes::SYMBOLIC
            | Notes::CONSTANTS
            | Notes::TOO_LARGE
            | Notes::UNSPECIFIED;
        note.flags & related == 0 && note.lcm == 1
    }

    /// A real point that satisfies the assumptions and where the sum is enclosed away from zero.
    pub(super) fn witness(
        &mut self,
        arena: &mut Arena,
        parts: &[(Expr, Rational)],
        budget: &mut Budget,
    ) -> Result<Option<Witness>, Stopped> {
        for k in 0..ATTEMPTS {
            if !self.point_fits(arena, k, budget)? {
                continue;
            }
            let mut sum = Interval::exactly(0.0);
            for (e, c) in parts {
                sum = sum.plus(self.real_value(arena, *e, k, budget)?.times(Interval::of(c)));
            }
            if sum.excludes_zero() {
                return Ok(Some(Witness { point: k, lower: sum.lo, upper: sum.hi }));
            }
        }
        Ok(None)
    }

    /// The enclosure of a node with a note at a real point.
    pub(super) fn real_value(
        &mut self,
        arena: &Arena,
        e: Expr,
        k: u32,
        budget: &mut Budget,
    ) -> Result<Interval, Stopped> {
        let at = Place { arena, notes: &self.notes, facts: &self.facts };
        self.real[k as usize].value(at, e, budget)
    }

    /// Whether a real point satisfies the assumptions for certain.
    pub(super) fn point_fits(&mut self, arena: &mut Arena, k: u32, budget: &mut Budget) -> Result<bool, Stopped> {
        if let Some(fits) = self.fits[k as usize] {
            return Ok(fits);
        }
        let mut fits = true;
        for (e, relation) in self.facts.facts().to_vec() {
            self.notes.analyse(arena, &self.facts, e, budget)?;
            let v = self.real_value(arena, e, k, budget)?;
            // A member at a symbolic index stands for all of them, which are drawn inside their bounds.
            let family = matches!(arena.node(e), Node::Member { .. });
            fits &= family
                || v.exists()
                    && match relation {
                        Relation::Greater => v.lo > 0.0,
                        Relation::GreaterEqual => v.lo >= 0.0,
                        Relation::Less => v.hi < 0.0,
                        Relation::LessEqual => v.hi <= 0.0,
                        Relation::NotEqual => v.lo > 0.0 || v.hi < 0.0,
                    };
            if !fits {
                break;
            }
        }
        self.fits[k as usize] = Some(fits);
        Ok(fits)
    }

    /// The coordinates of a witness: the atoms of the expression with their values, ordered as in the arena.
    pub fn witness_values(&self, arena: &Arena, e: Expr, witness: &Witness) -> Vec<(Expr, Rational)> {
        let point = RealPoint { attempt: witness.point };
        arena.atoms(e).into_iter().filter_map(|x| Some((x, point.atom(arena, &self.facts, x, &NO_ENV)?))).collect()
    }
}

/// What sampling found.
pub(super) enum Sampled {
    /// Zero at all points needed.
    Zero,
    /// Not zero at a point.
    NotZero,
    /// Not all that was needed could be seen.
    Unseen(Reason),
}
