//! The textbook form: candidates, and the one with fewest operations.

use crate::arena::{Arena, Expr, Node};
use crate::budget::{Budget, Stopped};
use crate::display::DisplayOptions;
use crate::display::cost::Costs;
use crate::display::factor::{Collect, Factoriser, is_proper_sum};
use crate::display::order::Keys;
use crate::display::polynomial::{Expander, Polynomial, Table, derivative};
use crate::display::trigonometry::Rewriter;
use hashbrown::{HashMap, HashSet};

/// Insides nested more deeply than this stay as they are.
const MAX_INSIDE: u32 = 24;
/// Sums of parameters and coordinates are multiplied out only if that gives no more terms than this.
const MAX_WIDE: usize = 60;
/// Polynomials with more terms are collected in two ways only.
const MAX_WAYS: usize = 16;
/// How many times longer a source may be whose sums are still tried as they are.
const HOPELESS: usize = 3;

/// What a repeated acceleration must save: one operation in so many.
const REPEATED: usize = 15;

/// One print's work.
pub(crate) struct Simplifier<'a> {
    pub arena: &'a mut Arena,
    pub options: &'a DisplayOptions,
    pub keys: &'a mut Keys,
    pub costs: Costs,
    table: Table,
    open: HashMap<Expr, bool>,
    done: HashMap<Expr, Expr>,
    inside: HashMap<Expr, Expr>,
}

impl<'a> Simplifier<'a> {
    pub fn new(arena: &'a mut Arena, options: &'a DisplayOptions, keys: &'a mut Keys) -> Simplifier<'a> {
        Simplifier {
            arena,
            options,
            keys,
            costs: Costs::default(),
            table: Table::default(),
            open: HashMap::new(),
            done: HashMap::new(),
            inside: HashMap::new(),
        }
    }

    fn cost(&mut self, e: Expr) -> usize {
        self.costs.of(self.arena, e)
    }

    /// The shortest form found. Equal to `e`: every step is an identity.
    pub fn simplify(&mut self, e: Expr, level: u32, budget: &mut Budget) -> Result<Expr, Stopped> {
        if let Some(&known) = self.done.get(&e) {
            return Ok(known);
        }
        budget.charge(1)?;
        let source = self.insides(e, level, budget)?;
        let out = self.shortest(source, budget)?;
        self.done.insert(e, out);
        Ok(out)
    }

    fn shortest(&mut self, source: Expr, budget: &mut Budget) -> Result<Expr, Stopped> {
        if !matches!(self.arena.node(source), Node::Sum(..) | Node::Product(_)) {
            return Ok(source);
        }
        let own = self.cost(source);
        let mut best = None;
        match self.expanded(source, &HashSet::new(), false, budget) {
            Ok(p) => self.candidates(&p, false, &mut best, budget)?,
            Err(Stopped::TooLarge) if budget.left() > 0 => {}
            Err(other) => return Err(other),
        }
        // A source that is several times as long has no parts worth keeping.
        if best.is_none_or(|(cost, _)| own <= HOPELESS * cost) {
            let kept = self.kept(source, budget)?;
            let (all, squares) = self.kinematic_sums(source);
            let mut tried = vec![HashSet::new()];
            for opaque in [kept, squares, all] {
                if tried.contains(&opaque) {
                    continue;
                }
                match self.expanded(source, &opaque, false, budget) {
                    Ok(p) => self.candidates(&p, true, &mut best, budget)?,
                    Err(Stopped::TooLarge) if budget.left() > 0 => {}
                    Err(other) => return Err(other),
                }
                tried.push(opaque);
            }
        }
        if self.has_closed_sums(source) {
            match self.expanded(source, &HashSet::new(), true, budget) {
                Ok(p) if p.len() <= MAX_WIDE => self.candidates(&p, false, &mut best, budget)?,
                Ok(_) => {}
                Err(Stopped::TooLarge) if budget.left() > 0 => {}
                Err(other) => return Err(other),
            }
        }
        Ok(match best {
            Some((cost, e)) if cost <= own => e,
            _ => source,
        })
    }

    /// How often accelerations stand in an expression as it is written, beyond once each.
    fn repeated_accelerations(&self, e: Expr) -> usize {
        fn count(arena: &Arena, e: Expr, memo: &mut HashMap<Expr, usize>, distinct: &mut usize) -> usize {
            if let Some(&n) = memo.get(&e) {
                return n;
            }
            let mut n = 0usize;
            if derivative(arena, e) >= Some(2) {
                *distinct += 1;
                n = 1;
            } else {
                let mut children = Vec::new();
                arena.for_children(e, &mut |c| children.push(c));
                for c in children {
                    n = n.saturating_add(count(arena, c, memo, distinct));
                }
            }
            memo.insert(e, n);
            n
        }
        let (mut memo, mut distinct) = (HashMap::new(), 0);
        let all = count(self.arena, e, &mut memo, &mut distinct);
        (all - distinct.min(all)).min(1000)
    }

    fn expanded(
        &mut self,
        e: Expr,
        opaque: &HashSet<Expr>,
        wide: bool,
        budget: &mut Budget,
    ) -> Result<Polynomial, Stopped> {
        Expander {
            arena: self.arena,
            table: &mut self.table,
            opaque,
            open: &mut self.open,
            wide,
            cap: self.options.monomials,
        }
        .expand(e, budget)
    }

    /// All rewritings and ways of collecting; the cheapest, of equal ones the first.
    fn candidates(
        &mut self,
        p: &Polynomial,
        kept: bool,
        best: &mut Option<(usize, Expr)>,
        budget: &mut Budget,
    ) -> Result<(), Stopped> {
        let versions =
            Rewriter { arena: self.arena, table: &mut self.table, cap: self.options.monomials }.versions(p, budget)?;
        for (p, expected) in &versions {
            let accelerated = p.iter().any(|t| self.table.motion(&t.monomial).1);
            let degree = p.iter().map(|t| self.table.motion(&t.monomial).0).max().unwrap_or(0);
            // Where velocities stand under a root, the mass matrix is no polynomial and is not collected for.
            let rooted = p.iter().flat_map(|t| t.monomial.iter()).any(|(a, _)| {
                let base = self.table.base(*a);
                is_proper_sum(self.arena, base) && self.moves(base)
            });
            let ways: &[Collect] = match (accelerated, p.len() > MAX_WAYS) {
                // What is long gains nothing by being collected less.
                (true, true) => &[Collect::Accelerations, Collect::Motion, Collect::Coefficients],
                (true, false) => &[
                    Collect::Accelerations,
                    Collect::Motion,
                    Collect::Coefficients,
                    Collect::Parameters,
                    Collect::Nothing,
                ],
                (false, true) => &[Collect::Accelerations, Collect::Motion],
                (false, false) => &[Collect::Accelerations, Collect::Motion, Collect::Parameters, Collect::Nothing],
            };
            for &collect in ways {
                let e = self.factored(p, collect, budget)?;
                let mut cost = self.cost(e);
                if !accelerated && degree == 1 && collect != Collect::Motion {
                    // A momentum is linear in the velocities, and so it reads.
                    cost += 2;
                }
                if accelerated && rooted && !matches!(collect, Collect::Accelerations | Collect::Motion) {
                    cost += 1;
                }
                if accelerated && !rooted {
                    // An acceleration in two places must be worth it: its coefficient is an entry of the mass matrix.
                    let repeated = self.repeated_accelerations(e);
                    cost += if kept { repeated.min(1) } else { (cost / REPEATED).max(1) * repeated };
                }
                if !expected {
                    // Forms that a reader would not expect must be clearly shorter.
                    cost += cost / 5 + 1;
                }
                if kept {
                    // A quadratic form is what a reader expects; sums kept in it must be worth it.
                    cost += cost / 10;
                }
                if best.as_ref().is_none_or(|b| cost < b.0) {
                    *best = Some((cost, e));
                }
            }
        }
        Ok(())
    }

    fn factored(&mut self, p: &Polynomial, collect: Collect, budget: &mut Budget) -> Result<Expr, Stopped> {
        let accelerated = p.iter().any(|t| self.table.motion(&t.monomial).1);
        let degree = p.iter().map(|t| self.table.motion(&t.monomial).0).max().unwrap_or(0);
        let (table, costs) = (&mut self.table, &mut self.costs);
        Factoriser { arena: self.arena, table, keys: self.keys, costs, accelerated, degree }.run(p, collect, budget)
    }

    /// Whether there are velocities or accelerations in a sum's own terms.
    fn moves(&mut self, e: Expr) -> bool {
        use crate::display::order::class;
        self.keys.factor(self.arena, e).class >= class::VELOCITY
    }

    /// Sums inside of summands that are shorter as they are than expanded.
    fn kept(&mut self, source: Expr, budget: &mut Budget) -> Result<HashSet<Expr>, Stopped> {
        let mut kept = HashSet::new();
        let summands = self.arena.summands(source);
        if summands.len() < 2 || summands.len() > 200 {
            return Ok(kept);
        }
        for (t, c) in summands {
            let (sums, _) = self.kinematic_sums(t);
            if sums.is_empty() {
                continue;
            }
            let t = self.arena.scale(t, &c);
            let mut best = None;
            match self.expanded(t, &HashSet::new(), false, budget) {
                Ok(p) if p.len() <= 64 => self.candidates(&p, false, &mut best, budget)?,
                Ok(_) | Err(Stopped::TooLarge) if budget.left() > 0 => {}
                Err(other) => return Err(other),
                Ok(_) => return Err(Stopped::TooLarge),
            }
            let own = self.cost(t);
            if best.is_none_or(|(cost, _)| own < cost) {
                kept.extend(sums);
            }
        }
        Ok(kept)
    }

    /// Whether a summand has a sum of parameters or coordinates as a factor.
    fn has_closed_sums(&mut self, e: Expr) -> bool {
        let summands = self.arena.summands(e);
        summands.len() > 1
            && summands.iter().any(|(t, _)| {
                let sum = |(b, x): &(Expr, crate::rational::Rational)| {
                    x.is_one() && is_proper_sum(self.arena, *b) && !self.is_open_now(*b)
                };
                self.arena.factors(*t).iter().any(sum)
            })
    }

    fn is_open_now(&self, e: Expr) -> bool {
        self.open.get(&e).copied().unwrap_or(false)
    }

    /// Sums with velocities that are multiplied by something or raised to a power, at this level; and those of them that
    /// are squared.
    fn kinematic_sums(&mut self, e: Expr) -> (HashSet<Expr>, HashSet<Expr>) {
        let (mut all, mut squares) = (HashSet::new(), HashSet::new());
        let mut stack: Vec<Expr> = self.arena.summands(e).into_iter().map(|t| t.0).collect();
        while let Some(t) = stack.pop() {
            for (b, x) in self.arena.factors(t) {
                if !x.is_integer() || !is_proper_sum(self.arena, b) || !self.moves(b) {
                    continue;
                }
                if x.is_even_integer() {
                    squares.insert(b);
                }
                if all.insert(b) {
                    stack.extend(self.arena.summands(b).into_iter().map(|t| t.0));
                }
            }
        }
        (all, squares)
    }

    /// The same structure with the insides of atoms simplified.
    fn insides(&mut self, e: Expr, level: u32, budget: &mut Budget) -> Result<Expr, Stopped> {
        if let Some(&known) = self.inside.get(&e) {
            return Ok(known);
        }
        budget.charge(1)?;
        if level > MAX_INSIDE || self.arena.depth(e) > 256 {
            return Ok(e);
        }
        let all = |s: &mut Self, list: &[Expr], budget: &mut Budget| -> Result<Vec<Expr>, Stopped> {
            list.iter().map(|a| s.simplify(*a, level + 1, budget)).collect()
        };
        let out = match self.arena.node(e) {
            Node::Number(_) | Node::Pi | Node::Undefined | Node::Symbol(_) | Node::Jet(..) | Node::Member { .. } => e,
            Node::Sum(c, terms) => {
                let (c, terms) = (c.clone(), terms.clone());
                let mut list = vec![(Arena::ONE, c)];
                for (t, k) in terms.iter() {
                    list.push((self.insides(*t, level, budget)?, k.clone()));
                }
                self.arena.linear(&list)
            }
            Node::Product(factors) => {
                let factors = factors.clone();
                let mut list = Vec::with_capacity(factors.len());
                for (b, x) in factors.iter() {
                    let whole = x.is_integer() && !x.is_negative();
                    // What will be expanded is not simplified before.
                    let open = whole && is_proper_sum(self.arena, *b) && self.is_open(*b);
                    let b = if open || !is_proper_sum(self.arena, *b) {
                        self.insides(*b, level, budget)?
                    } else {
                        self.simplify(*b, level + 1, budget)?
                    };
                    list.push((b, x.clone()));
                }
                self.arena.monomial(&list)
            }
            Node::Power(b, x) => {
                let list = [*b, *x];
                let list = all(self, &list, budget)?;
                self.arena.power(list[0], list[1])
            }
            Node::Call(f, args) => {
                let (f, args) = (*f, args.clone());
                let args = all(self, &args, budget)?;
                self.arena.call(f, &args)
            }
            Node::Unspecified { function, index, orders, args } => {
                let (function, index, orders, args) = (*function, *index, orders.clone(), args.clone());
                let args = all(self, &args, budget)?;
                self.arena.unspecified(function, index, &orders, &args)
            }
            Node::Bound { index, lower, upper, body } => {
                let (index, lower, upper, body) = (*index, *lower, *upper, *body);
                let body = self.simplify(body, level + 1, budget)?;
                self.arena.bound(index, lower, upper, body, budget)?
            }
        };
        self.inside.insert(e, out);
        Ok(out)
    }

    fn is_open(&mut self, e: Expr) -> bool {
        let opaque = HashSet::new();
        Expander {
            arena: self.arena,
            table: &mut self.table,
            opaque: &opaque,
            open: &mut self.open,
            wide: false,
            cap: self.options.monomials,
        }
        .is_open(e)
    }
}
