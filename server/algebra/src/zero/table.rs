//! Values of nodes at a point, kept by the node's place in the arena, so that an edit evaluates new nodes only.

use super::assumptions::Assumptions;
use super::notes::Notes;
use super::plan::Plan;
use super::points::{Env, Index, NO_ENV, index, level};
use crate::arena::{Arena, Expr, Node};
use crate::budget::{Budget, Stopped};
use hashbrown::HashMap;

/// Ranges from this length on are first looked at with a free index.
pub(crate) const LONG: i64 = 64;

/// What an evaluation reads beside the values.
#[derive(Clone, Copy)]
pub(crate) struct Place<'a> {
    pub arena: &'a Arena,
    pub notes: &'a Notes,
    pub facts: &'a Assumptions,
}

/// Values that nodes can take, and how a node's value comes from those that it needs.
pub(crate) trait Domain {
    /// A value.
    type Value: Copy + PartialEq;
    /// Marks a node that is not evaluated yet.
    const UNSET: Self::Value;
    /// Marks a value that does not exist at this point.
    const NOWHERE: Self::Value;
    /// Whether nodes are evaluated by their plans; else by their children.
    const PLANNED: bool;
    /// Zero.
    const ZERO: Self::Value;
    /// Whether there is a value.
    fn exists(v: Self::Value) -> bool;
    /// The sum.
    fn plus(&self, a: Self::Value, b: Self::Value) -> Self::Value;
    /// The product with a number of summands.
    fn times(&self, a: Self::Value, count: i64) -> Self::Value;
    /// Whether all far members of a family have the same value at this point.
    fn near(&self) -> bool;
    /// The value of any node but a sum over a range.
    fn compute(&self, at: Place<'_>, values: &Values<Self::Value>, e: Expr, env: &Env) -> Self::Value;
    /// The value of a sum over a range that is not a range of numbers.
    fn symbolic_sum(&self, at: Place<'_>, e: Expr) -> Self::Value;
}

/// The values of all nodes at one point: by the node's place, or sparsely where few nodes are asked for.
pub(crate) struct Values<V> {
    list: Vec<V>,
    sparse: Option<HashMap<Expr, V>>,
    unset: V,
}

impl<V: Copy + PartialEq> Values<V> {
    /// The value of a node.
    #[inline]
    pub fn get(&self, e: Expr) -> V {
        match &self.sparse {
            None => self.list.get(e.index()).copied().unwrap_or(self.unset),
            Some(map) => map.get(&e).copied().unwrap_or(self.unset),
        }
    }

    #[inline]
    fn put(&mut self, e: Expr, v: V) {
        match &mut self.sparse {
            None => self.list[e.index()] = v,
            Some(map) => {
                map.insert(e, v);
            }
        }
    }

    #[inline]
    fn is_set(&self, e: Expr) -> bool {
        self.get(e) != self.unset
    }
}

/// A point with its values.
pub(crate) struct Table<D: Domain> {
    /// The point.
    pub domain: D,
    values: Values<D::Value>,
}

impl<D: Domain> Table<D> {
    /// No node is evaluated.
    pub fn new(domain: D) -> Table<D> {
        Table { domain, values: Values { list: Vec::new(), sparse: None, unset: D::UNSET } }
    }

    /// No node is evaluated, and few will be.
    pub fn sparse(domain: D) -> Table<D> {
        Table { domain, values: Values { list: Vec::new(), sparse: Some(HashMap::new()), unset: D::UNSET } }
    }

    /// The value of a node that has a note. Costs one visit per node that is new at this point.
    pub fn value(&mut self, at: Place<'_>, e: Expr, budget: &mut Budget) -> Result<D::Value, Stopped> {
        if self.values.is_set(e) {
            return Ok(self.values.get(e));
        }
        if self.values.sparse.is_none() && self.values.list.len() < at.arena.len() {
            self.values.list.resize(at.arena.len(), D::UNSET);
        }
        let mut stack = vec![e];
        while let Some(&x) = stack.last() {
            if self.values.is_set(x) {
                stack.pop();
                continue;
            }
            let before = stack.len();
            at.notes.for_needs(at.arena, x, D::PLANNED, &mut |c| {
                if !self.values.is_set(c) {
                    stack.push(c);
                }
            });
            if stack.len() == before {
                budget.charge(1)?;
                let v = self.compute(at, x, &NO_ENV, budget)?;
                self.values.put(x, v);
                stack.pop();
            }
        }
        Ok(self.values.get(e))
    }

    fn compute(&mut self, at: Place<'_>, e: Expr, env: &Env, budget: &mut Budget) -> Result<D::Value, Stopped> {
        match at.notes.plan(e) {
            Some(Plan::Bound { order, far, .. }) => self.bound(at, e, order, *far, env, budget),
            _ => Ok(self.domain.compute(at, &self.values, e, env)),
        }
    }

    /// A sum over a range: the summand's nodes are evaluated anew for each value of the index.
    fn bound(
        &mut self,
        at: Place<'_>,
        e: Expr,
        order: &[Expr],
        far: Option<i64>,
        env: &Env,
        budget: &mut Budget,
    ) -> Result<D::Value, Stopped> {
        let Node::Bound { index: i, lower, upper, body } = at.arena.node(e) else { return Ok(D::NOWHERE) };
        let (Some(k), Index::At(a), Index::At(b)) =
            (level(at.arena, *i), index(at.arena, *lower, env), index(at.arena, *upper, env))
        else {
            return Ok(self.domain.symbolic_sum(at, e));
        };
        let mut inner = *env;
        let mut sum = D::ZERO;
        let mut stopped = None;
        if b.saturating_sub(a) >= LONG && D::PLANNED {
            // A summand that vanishes at a free index vanishes at every number.
            inner[k] = None;
            let v = self.summand(at, *body, order, &inner, budget);
            order.iter().for_each(|x| self.values.put(*x, D::UNSET));
            if v? == D::ZERO {
                return Ok(D::ZERO);
            }
        }
        // Far summands are all the same where far members are.
        let far = far.filter(|_| self.domain.near() && !at.facts.tell_members_apart()).map_or(b, |f| f.max(a));
        for v in a..=b.min(far) {
            inner[k] = Some(v);
            let count = if v == far { b - v + 1 } else { 1 };
            let v = match self.summand(at, *body, order, &inner, budget) {
                Ok(v) => v,
                Err(s) => {
                    stopped = Some(s);
                    break;
                }
            };
            if !D::exists(v) {
                sum = D::NOWHERE;
                break;
            }
            sum = self.domain.plus(sum, self.domain.times(v, count));
        }
        // A value that depends on the index is no value of the node.
        order.iter().for_each(|x| self.values.put(*x, D::UNSET));
        stopped.map_or(Ok(sum), Err)
    }

    /// The summand at a value of the index, or at a free index.
    fn summand(
        &mut self,
        at: Place<'_>,
        body: Expr,
        order: &[Expr],
        env: &Env,
        budget: &mut Budget,
    ) -> Result<D::Value, Stopped> {
        budget.charge(order.len() + 1)?;
        for &x in order {
            let v = self.compute(at, x, env, budget)?;
            self.values.put(x, v);
        }
        Ok(self.values.get(body))
    }
}
