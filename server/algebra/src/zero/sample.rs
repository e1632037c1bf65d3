//! How many points decide, and their evaluation.

use super::notes::{MAX_DEGREE, Note, Notes};
use super::points::{self, Point, hash};
use super::roots::Radicals;
use super::target::{At, Target};
use super::test::{POLES, ZeroTest};
use super::verdict::Reason;
use crate::arena::{Arena, Expr};
use crate::budget::{Budget, Stopped};

/// Error probability below 2⁻¹⁰⁰ < 10⁻³⁰.
const BITS: f32 = 100.0;
/// Signs that are not known, beyond which patterns are not enumerated.
const MAX_SIGNS: usize = 3;
/// Relations among roots, beyond which they are not sampled.
const MAX_RELATIONS: usize = 2;
/// Primes that are the same for all expressions; beyond, some are drawn from the expression itself.
const SHARED_PRIMES: u32 = 6;
/// Beyond this many bits in a coefficient nothing is tested.
const MAX_BITS: f32 = 16_777_216.0;

/// What sampling found.
pub(super) enum Sampled {
    /// Zero at all points needed.
    Zero,
    /// Not zero at a point.
    NotZero,
    /// Not all that was needed could be seen.
    Unseen(Reason),
}

/// Points and primes that are needed.
pub(super) struct Need {
    /// Points, over the first two primes together.
    pub points: u32,
    /// Further primes, the same for all expressions, because the coefficients could be divisible by the first two.
    pub shared: u32,
    /// Further primes that are drawn from the expression: such that nobody has made its coefficients divisible.
    pub own: u32,
}

/// How many points and primes make sure that a value that vanishes is zero; `roots` of independent roots lose a bit
/// each, and so do unknown signs.
pub(super) fn need(note: &Note, lost: usize) -> Result<Need, Reason> {
    if note.flags & Notes::TOO_LARGE != 0 || note.num > MAX_DEGREE {
        return Err(Reason::DegreeTooHigh);
    }
    // Roots of unity narrow the draw to one in 2¹⁴; a circle meets a curve twice as often as a line does.
    let narrow = note.flags & (Notes::ANGLE | Notes::EXPONENTIAL) != 0;
    let uniform = if note.flags & Notes::ANGLE != 0 { 47.0 } else { 60.0 };
    let degree = note.num.max(1.0).log2() + if narrow { 2.0 + (note.lcm as f32).log2() } else { 1.0 };
    let bits = uniform - degree - lost as f32;
    if bits < 6.0 {
        return Err(Reason::DegreeTooHigh);
    }
    let points = ((BITS / bits).ceil() as u32).max(2);
    // Primes above 2⁶¹ whose product exceeds every coefficient cannot divide all of them.
    let tall = (note.tall * if narrow { note.lcm as f32 } else { 1.0 }).max(note.inner);
    if tall.is_nan() || tall > MAX_BITS {
        return Err(Reason::DegreeTooHigh);
    }
    let primes = ((tall / 61.0).floor() as u32 + 1).saturating_sub(2);
    if primes <= SHARED_PRIMES {
        // A prime divides an algebraic number in one of its embeddings more easily than an integer.
        let own = if note.flags & Notes::ALGEBRAIC != 0 { 2 } else { 0 };
        return Ok(Need { points, shared: primes, own });
    }
    // At most tall/61 of the 2³³ primes from which they are drawn can divide all coefficients.
    let each = 33.0 - (tall / 61.0).log2();
    let drawn = (BITS / each).ceil() as u32;
    Ok(Need { points, shared: drawn.saturating_sub(2), own: 2 })
}

impl ZeroTest {
    /// Whether a value that vanished at a point vanishes at as many as are needed, in every way that its roots and
    /// signs can turn out.
    pub(super) fn settle(
        &mut self,
        arena: &mut Arena,
        target: &Target<'_>,
        note: &Note,
        budget: &mut Budget,
    ) -> Result<Sampled, Stopped> {
        if note.flags & (Notes::ROOT | Notes::SIGN | Notes::HIDDEN) == 0 {
            return Ok(match need(note, 0) {
                Ok(need) => self.sample(arena, target, &need, &[], false, budget)?,
                Err(reason) => Sampled::Unseen(reason),
            });
        }
        // What holds whatever values roots and absolute values take needs no more.
        let points = match need(note, 0) {
            Ok(points) => points,
            Err(reason) => return Ok(Sampled::Unseen(reason)),
        };
        if let Sampled::Zero = self.sample(arena, target, &points, &[], true, budget)? {
            return Ok(Sampled::Zero);
        }
        let found = match Radicals::collect(self, arena, &target.expressions(), budget)? {
            Ok(found) => found,
            Err(reason) => return Ok(Sampled::Unseen(reason)),
        };
        if found.signs.len() > MAX_SIGNS {
            return Ok(Sampled::Unseen(Reason::SignsUnknown));
        }
        let relations = self.relations(arena, &found, budget)?;
        if relations == 0 {
            return Ok(match need(note, found.roots.len() + found.signs.len()) {
                Ok(need) => self.sample(arena, target, &need, &found.signs, false, budget)?,
                Err(reason) => Sampled::Unseen(reason),
            });
        }
        if relations > MAX_RELATIONS {
            return Ok(Sampled::Unseen(Reason::RelatedRoots));
        }
        if let Err(reason) = need(note, found.roots.len() + found.signs.len()) {
            return Ok(Sampled::Unseen(reason));
        }
        if found.signs.is_empty()
            && relations == found.constants.len()
            && self.only_branch(arena, target, note, &found, budget)?
        {
            return Ok(Sampled::Zero);
        }
        self.sample_related(arena, target, &found, relations, budget)
    }

    /// Roots of constants, such as √(5 + 2√6): if the product of the values for both signs of each vanishes, so does
    /// one of its factors; and it is the real one if all others are not zero at some real point.
    fn only_branch(
        &mut self,
        arena: &mut Arena,
        target: &Target<'_>,
        note: &Note,
        found: &Radicals,
        budget: &mut Budget,
    ) -> Result<bool, Stopped> {
        let branches = 1u16 << found.constants.len();
        let mut wide = *note;
        wide.num *= branches as f32;
        wide.tall *= branches as f32;
        let Ok(need) = need(&wide, found.roots.len()) else { return Ok(false) };
        self.flippable = found.constants.clone();
        let result = self.sample_branches(arena, target, branches, &need, budget);
        self.tables.retain(|p, _| p.flips == 0);
        self.real.retain(|(_, flips), _| *flips == 0);
        self.flippable.clear();
        result
    }

    fn sample_branches(
        &mut self,
        arena: &mut Arena,
        target: &Target<'_>,
        branches: u16,
        need: &Need,
        budget: &mut Budget,
    ) -> Result<bool, Stopped> {
        for flips in 1..branches {
            if self.witness(arena, target, flips, budget)?.is_none() {
                return Ok(false);
            }
        }
        let (mut seen, mut k) = (0, 0);
        // A prime of its own for each point.
        while seen < need.points + need.shared + need.own {
            if k > 2 * POLES + 4 * seen {
                return Ok(false);
            }
            let field = self.fields.drawn(0x100 + k as u64);
            let mut vanishes = Some(false);
            for flips in 0..branches {
                let point = Point { flips, ..points::once(field, k) };
                let v = target.residue(self, arena, point, budget);
                self.tables.remove(&point);
                match v? {
                    At::Value(v) => vanishes = vanishes.map(|x| x || v.is_zero()),
                    _ => vanishes = None,
                }
            }
            match vanishes {
                Some(false) => return Ok(false),
                Some(true) => seen += 1,
                None => {}
            }
            k += 1;
        }
        Ok(true)
    }

    /// How many relations roots may have; 0 is a proof that there are none.
    pub(super) fn relations(
        &mut self,
        arena: &mut Arena,
        found: &Radicals,
        budget: &mut Budget,
    ) -> Result<usize, Stopped> {
        let mut relations = found.hidden;
        if !found.roots.is_empty() {
            let first = self.dependent_roots(arena, &found.roots, 0, budget)?;
            let second = self.dependent_roots(arena, &found.roots, 1, budget)?;
            relations += first.max(second);
        }
        Ok(relations)
    }

    /// Evaluates at as many points as are needed, for each pattern of the given signs.
    fn sample(
        &mut self,
        arena: &mut Arena,
        target: &Target<'_>,
        need: &Need,
        signs: &[Expr],
        free: bool,
        budget: &mut Budget,
    ) -> Result<Sampled, Stopped> {
        for field in 0..2 {
            let wanted = if field == 0 { need.points.div_ceil(2) } else { (need.points / 2).max(1) };
            let at = |k: u32| if free { points::loose(2 * k + field) } else { points::standard(2 * k + field) };
            match self.sample_over(arena, target, signs, &at, wanted, budget)? {
                Sampled::Zero => {}
                other => return Ok(other),
            }
        }
        let own = if need.own == 0 {
            0
        } else {
            hash(&target.expressions().iter().map(|e| arena.key(*e)).collect::<Vec<_>>())
        };
        for j in 0..need.shared + need.own {
            let key = if j < need.shared { j as u64 } else { own ^ j as u64 };
            let field = self.fields.drawn(key);
            let at = |k: u32| Point { loose: free, sparse: j >= need.shared, ..points::over(field, k) };
            let result = self.sample_over(arena, target, signs, &at, 1, budget);
            if j >= need.shared {
                self.tables.retain(|p, _| p.field != field);
                self.fields.forget(field);
            }
            match result? {
                Sampled::Zero => {}
                other => return Ok(other),
            }
        }
        Ok(Sampled::Zero)
    }

    /// Evaluates at points of one field until each pattern of signs was seen often enough.
    fn sample_over(
        &mut self,
        arena: &mut Arena,
        target: &Target<'_>,
        signs: &[Expr],
        at: &dyn Fn(u32) -> Point,
        wanted: u32,
        budget: &mut Budget,
    ) -> Result<Sampled, Stopped> {
        let patterns = 1usize << signs.len();
        let mut counts = vec![0u32; patterns];
        let limit = POLES + 8 * wanted * patterns as u32 * (1 + signs.len() as u32);
        let (mut k, mut poles) = (0, 0);
        while counts.iter().any(|c| *c < wanted) {
            if k > limit {
                let reason = if poles + 1 >= k { Reason::DenominatorsVanish } else { Reason::SignsUnknown };
                return Ok(Sampled::Unseen(reason));
            }
            let point = at(k);
            k += 1;
            match target.residue(self, arena, point, budget)? {
                At::Value(v) if !v.is_zero() => return Ok(Sampled::NotZero),
                At::Value(_) => {
                    if let Some(p) = self.pattern(arena, signs, point, budget)? {
                        counts[p] += 1;
                    }
                }
                _ => poles += 1,
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
    /// a prime of its own, so that the real ones are among them. What is known to be positive is a square there.
    fn sample_related(
        &mut self,
        arena: &mut Arena,
        target: &Target<'_>,
        found: &Radicals,
        relations: usize,
        budget: &mut Budget,
    ) -> Result<Sampled, Stopped> {
        let positive: Vec<Expr> = found.roots.iter().copied().filter(|r| self.notes.sign(*r).is_positive()).collect();
        let wanted = 72u32 << relations;
        let patterns = 1usize << found.signs.len();
        let mut counts = vec![0u32; patterns];
        let limit = (wanted * patterns as u32) << (positive.len().min(3) + 1);
        for k in 0..limit {
            let field = self.fields.drawn(0x100 + (k % 512) as u64);
            let point = points::once(field, k);
            let outcome = self.at_positive(arena, target, &positive, point, budget);
            let pattern = match &outcome {
                Ok(Some(At::Value(v))) if v.is_zero() => self.pattern(arena, &found.signs, point, budget)?,
                _ => None,
            };
            self.tables.remove(&point);
            match (outcome?, pattern) {
                (Some(At::Value(v)), _) if !v.is_zero() => return Ok(Sampled::NotZero),
                (_, Some(p)) => counts[p] += 1,
                _ => {}
            }
            if counts.iter().all(|c| *c >= wanted) {
                return Ok(Sampled::Zero);
            }
        }
        Ok(Sampled::Unseen(Reason::RelatedRoots))
    }

    /// The residue at a point, if what is known to be positive is a square there.
    fn at_positive(
        &mut self,
        arena: &Arena,
        target: &Target<'_>,
        positive: &[Expr],
        point: Point,
        budget: &mut Budget,
    ) -> Result<Option<At<super::field::Element>>, Stopped> {
        let f = self.fields.get(point.field);
        for e in positive {
            match self.value_at(arena, *e, point, budget)? {
                Some(v) if v.is_real() && f.chi(v.re) == 1 => {}
                _ => return Ok(None),
            }
        }
        target.residue(self, arena, point, budget).map(Some)
    }
}
