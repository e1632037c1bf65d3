//! The zero test: its tables, and what can be asked.

use super::assumptions::Assumptions;
use super::evaluate::{FieldPoint, exists};
use super::field::Element;
use super::interval::Interval;
use super::linear::{self, Residues};
use super::notes::Notes;
use super::points::{self, Fields, NO_ENV, Point};
use super::refute::Fit;
use super::roots::{Radicals, RankMemo};
use super::sample::{self, Sampled};
use super::signs::Sign;
use super::table::{Place, Table};
use super::target::{At, Motion, Target};
use super::verdict::{Reason, Verdict};
use super::witness::{ATTEMPTS, RealPoint, Witness};
use crate::arena::{Arena, Expr, Node};
use crate::budget::{Budget, Stopped};
use crate::rational::Rational;
use hashbrown::HashMap;

/// The zero test with its tables: residues per node and point, kept across edits.
///
/// It belongs to one arena. When the assumptions change, [`ZeroTest::set_assumptions`] drops what depends on them.
pub struct ZeroTest {
    pub(super) facts: Assumptions,
    pub(super) notes: Notes,
    pub(super) fields: Fields,
    pub(super) tables: HashMap<Point, Table<FieldPoint>>,
    pub(super) real: HashMap<(u32, u16), Table<RealPoint>>,
    /// Roots of constants that may hide relations, while they are looked at.
    pub(super) flippable: Vec<Expr>,
    /// Whether the real points satisfy the assumptions, as far as that has been looked at.
    pub(super) fits: Vec<Option<Fit>>,
    pub(super) ranks: RankMemo,
}

/// Points tried when denominators keep vanishing.
pub(super) const POLES: u32 = 24;
/// Points tried when the mass matrix keeps being singular.
const SINGULAR: u32 = 8;

impl ZeroTest {
    /// A test under assumptions.
    pub fn new(assumptions: Assumptions) -> ZeroTest {
        ZeroTest {
            facts: assumptions,
            notes: Notes::new(),
            fields: Fields::new(),
            tables: HashMap::new(),
            real: HashMap::new(),
            flippable: Vec::new(),
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
        if parts.iter().all(|(e, c)| *e == Arena::ZERO || c.is_zero()) {
            return Verdict::Proved;
        }
        if parts.len() > 1 && like_terms_cancel(arena, parts) {
            return Verdict::Proved;
        }
        self.test(arena, &Target::Sum(parts), budget)
    }

    /// Whether a quantity is constant along motions: c₀ + Σ cᵢ aᵢ = 0 for the accelerations a of the motion, where
    /// c₀ is the rate without accelerations and cᵢ = ∂C/∂q̇ⁱ. The accelerations are solved for at each point.
    pub fn rate_is_zero(
        &mut self,
        arena: &mut Arena,
        c0: Expr,
        c: &[Expr],
        motion: &Motion,
        budget: &mut Budget,
    ) -> Verdict {
        let n = motion.rhs.len();
        if motion.mass.len() != n || motion.mass.iter().any(|r| r.len() != n) || c.len() != n {
            return Verdict::Undecided(Reason::Degenerate);
        }
        self.test(arena, &Target::Rate(c0, c, motion), budget)
    }

    /// Whether the determinant of a square matrix, by rows, is zero.
    pub fn determinant_is_zero(&mut self, arena: &mut Arena, rows: &[Vec<Expr>], budget: &mut Budget) -> Verdict {
        if rows.iter().any(|r| r.len() != rows.len()) {
            return Verdict::Undecided(Reason::Degenerate);
        }
        self.test(arena, &Target::Determinant(rows), budget)
    }

    /// The generic rank of a matrix, by rows. Errors: where it hangs on signs or roots that are not resolved.
    pub fn rank(&mut self, arena: &mut Arena, rows: &[Vec<Expr>], budget: &mut Budget) -> Result<usize, Reason> {
        let target = Target::Determinant(rows);
        let note = target.analyse(self, arena, budget)?;
        if note.flags & Notes::UNDEFINED != 0 {
            return Err(Reason::Undefined);
        }
        let found = Radicals::collect(self, arena, &target.expressions(), budget)??;
        if !found.signs.is_empty() {
            return Err(Reason::SignsUnknown);
        }
        if self.relations(arena, &found, budget)? > 0 {
            return Err(Reason::RelatedRoots);
        }
        let need = sample::need(&note, found.roots.len())?;
        let (mut best, mut seen, mut k) = (0, 0, 0);
        while seen < need.points {
            let point = points::standard(k);
            k += 1;
            if k > POLES + need.points {
                return Err(Reason::DenominatorsVanish);
            }
            let f = self.fields.get(point.field);
            let mut values = Vec::with_capacity(rows.len());
            for row in rows {
                let mut line = Vec::with_capacity(row.len());
                for e in row {
                    line.extend(self.value_at(arena, *e, point, budget)?);
                }
                values.push(line);
            }
            if values.iter().zip(rows).all(|(v, r)| v.len() == r.len()) {
                budget.charge(linear::work(rows.len()))?;
                best = best.max(linear::rank(&f, values));
                seen += 1;
            }
        }
        Ok(best)
    }

    /// The residues of parts at `length` points of one field, for the search of parts that cancel. A part is a list
    /// of expressions; its row has the residues of all of them. What is found there is to be confirmed by a verdict.
    pub fn residue_vectors(
        &mut self,
        arena: &mut Arena,
        parts: &[Vec<Expr>],
        length: usize,
        budget: &mut Budget,
    ) -> Result<Residues, Reason> {
        for e in parts.iter().flatten() {
            self.notes.analyse(arena, &self.facts, *e, budget)?;
        }
        let field = self.fields.get(0);
        let mut rows: Vec<Vec<Element>> = vec![Vec::new(); parts.len()];
        let (mut seen, mut k) = (0, 0);
        while seen < length {
            let point = points::standard(2 * k);
            k += 1;
            if k as usize > length + POLES as usize {
                return Err(Reason::DenominatorsVanish);
            }
            let mut columns = Vec::with_capacity(parts.len());
            for part in parts {
                let mut column = Vec::with_capacity(part.len());
                for e in part {
                    column.extend(self.value_at(arena, *e, point, budget)?);
                }
                if column.len() < part.len() {
                    break;
                }
                columns.push(column);
            }
            if columns.len() == parts.len() {
                rows.iter_mut().zip(columns).for_each(|(row, column)| row.extend(column));
                seen += 1;
            }
        }
        Ok(Residues::new(field, rows))
    }

    fn test(&mut self, arena: &mut Arena, target: &Target<'_>, budget: &mut Budget) -> Verdict {
        self.decide(arena, target, budget).unwrap_or_else(|s| Verdict::Undecided(s.into()))
    }

    fn decide(&mut self, arena: &mut Arena, target: &Target<'_>, budget: &mut Budget) -> Result<Verdict, Stopped> {
        let note = target.analyse(self, arena, budget)?;
        if note.flags & Notes::UNDEFINED != 0 {
            return Ok(Verdict::Undecided(Reason::Undefined));
        }
        if note.flags & Notes::TOO_LARGE != 0 {
            return self.refute(arena, target, &note, Reason::DegreeTooHigh, budget);
        }
        // Long sums are short where far members agree; what is not zero there is not zero.
        if note.flags & Notes::LONG != 0
            && let At::Value(v) = target.residue(self, arena, points::near(), budget)?
            && !v.is_zero()
        {
            return self.refute(arena, target, &note, Reason::NoWitness, budget);
        }
        // Nearly everything that is not zero shows it at the first point where it has a value.
        let (mut k, mut poles, mut singular) = (0, 0, 0);
        loop {
            match target.residue(self, arena, points::standard(k), budget)? {
                At::Value(v) if !v.is_zero() => return self.refute(arena, target, &note, Reason::NoWitness, budget),
                At::Value(_) => break,
                At::Pole => poles += 1,
                At::Singular => singular += 1,
            }
            if singular >= SINGULAR {
                return Ok(Verdict::Undecided(Reason::Degenerate));
            }
            if poles > POLES {
                return self.refute(arena, target, &note, Reason::DenominatorsVanish, budget);
            }
            k += 1;
        }
        match self.settle(arena, target, &note, budget)? {
            Sampled::Zero => Ok(Verdict::Proved),
            Sampled::NotZero => self.refute(arena, target, &note, Reason::NoWitness, budget),
            Sampled::Unseen(reason) => self.refute(arena, target, &note, reason, budget),
        }
    }

    /// The residue of a node with a note at a point; `None` where it has none.
    pub(super) fn value_at(
        &mut self,
        arena: &Arena,
        e: Expr,
        point: Point,
        budget: &mut Budget,
    ) -> Result<Option<Element>, Stopped> {
        let (fields, flippable) = (&self.fields, &self.flippable);
        let table = self.tables.entry(point).or_insert_with(|| {
            let domain = FieldPoint { point, field: fields.get(point.field), negated: flipped(flippable, point.flips) };
            if point.sparse { Table::sparse(domain) } else { Table::new(domain) }
        });
        let at = Place { arena, notes: &self.notes, facts: &self.facts };
        let v = table.value(at, e, budget)?;
        Ok(exists(v).then_some(v))
    }

    /// The enclosure of a node with a note at a real point.
    pub(super) fn real_value(
        &mut self,
        arena: &Arena,
        e: Expr,
        (k, flips): (u32, u16),
        budget: &mut Budget,
    ) -> Result<Interval, Stopped> {
        let at = Place { arena, notes: &self.notes, facts: &self.facts };
        let flippable = &self.flippable;
        let table = self
            .real
            .entry((k, flips))
            .or_insert_with(|| Table::new(RealPoint { attempt: k, negated: flipped(flippable, flips) }));
        table.value(at, e, budget)
    }

    /// The coordinates of a witness: the atoms of the expression with their values, ordered as in the arena.
    pub fn witness_values(&self, arena: &Arena, e: Expr, witness: &Witness) -> Vec<(Expr, Rational)> {
        let point = RealPoint { attempt: witness.point, negated: Vec::new() };
        arena.atoms(e).into_iter().filter_map(|x| Some((x, point.atom(arena, &self.facts, x, &NO_ENV)?))).collect()
    }
}

/// Those of a list whose bits are set.
fn flipped(list: &[Expr], flips: u16) -> Vec<Expr> {
    list.iter().enumerate().filter(|(k, _)| flips >> k & 1 == 1).map(|(_, e)| *e).collect()
}

/// Whether the parts' summands cancel as they stand, so that nothing needs to be evaluated.
fn like_terms_cancel(arena: &Arena, parts: &[(Expr, Rational)]) -> bool {
    let mut sum: HashMap<Expr, Rational> = HashMap::new();
    for (e, c) in parts {
        for (x, d) in arena.summands(*e) {
            let slot = sum.entry(x).or_insert(Rational::ZERO);
            *slot = slot.add(&c.mul(&d));
        }
    }
    sum.values().all(Rational::is_zero)
}
