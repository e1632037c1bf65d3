//! Builds the tree: the grammar's actions. Keeps every formula's depth within the nesting limit.

use std::convert::Infallible;

use lalrpop_util::{ErrorRecovery, ParseError};

use crate::codes;
use crate::pieces::{NESTING, too_deep};
use crate::slips::{Completed, Slips};
use crate::token::Token;
use crate::tree::*;

/// A longer sum becomes a balanced tree, so that its depth grows with the logarithm of its length.
const LONG_SUM: usize = 32;

/// A formula with its depth.
pub struct Built {
    /// The formula.
    pub formula: Formula,
    depth: usize,
}

/// What was read.
pub enum Entry {
    /// An item.
    Item(Box<ItemKind>),
    /// A formula alone.
    Formula(Formula),
}

/// What stands between two factors.
#[derive(Clone, Copy)]
pub enum Operator {
    /// A product.
    Times(Times),
    /// A quotient.
    Over,
}

/// What stands between a function's name and its arguments, with its end.
pub enum Mark {
    /// Primes.
    Prime(u32, usize),
    /// A member of a family, or the positions of arguments.
    Index(Vec<Built>, usize),
    /// `sin² θ`.
    Power(Option<i32>, Span),
}

/// One part of a run.
pub enum Part {
    /// An initial value.
    From(Formula, Option<Value>),
    /// The time span.
    Over(Option<Value>, Span),
    /// The stopping condition.
    Until(Comparison, Span),
    /// A formula for an input.
    With(Formula, Formula),
}

/// An error of the parser.
pub type Failure = ParseError<usize, Token, Infallible>;

/// The state of the grammar's actions.
pub struct Builder {
    /// Where slips go.
    pub slips: Slips,
    /// What the parser recovered from.
    pub failures: Vec<Failure>,
}

impl Builder {
    /// Notes what the parser recovered from.
    pub fn recovered<T>(&mut self, error: ErrorRecovery<usize, Token, Infallible>, instead: T) -> T {
        self.failures.push(error.error);
        instead
    }

    /// A formula that could not be read.
    pub fn missing(&mut self, error: ErrorRecovery<usize, Token, Infallible>, l: usize, r: usize) -> Built {
        self.failures.push(error.error);
        self.leaf(FormulaKind::Missing, l, r.max(l))
    }

    /// A formula without parts.
    pub fn leaf(&mut self, kind: FormulaKind, l: usize, r: usize) -> Built {
        Built { formula: Formula { kind, span: Span::new(l, r.max(l)) }, depth: 0 }
    }

    /// A formula over parts whose greatest depth is `below`; a gap with a slip where it is nested too deeply.
    fn over(&mut self, kind: FormulaKind, span: Span, below: usize) -> Built {
        if below < NESTING {
            return Built { formula: Formula { kind, span }, depth: below + 1 };
        }
        if !self.slips.has(codes::NESTING) {
            too_deep(&mut self.slips, span);
        }
        Built { formula: Formula { kind: FormulaKind::Missing, span }, depth: 0 }
    }

    /// A sum of signed summands, of which the first has no sign.
    pub fn sum(&mut self, mut summands: Vec<(bool, Built)>) -> Built {
        if summands.len() > LONG_SUM {
            return self.balanced(summands, false);
        }
        let rest = summands.split_off(1);
        let first = summands.pop().map(|(_, first)| first);
        rest.into_iter().fold(first.unwrap_or_else(|| self.leaf(FormulaKind::Missing, 0, 0)), |left, (minus, right)| {
            self.pair(left, right, minus)
        })
    }

    fn pair(&mut self, left: Built, right: Built, minus: bool) -> Built {
        let span = left.formula.span.to(right.formula.span);
        let below = left.depth.max(right.depth);
        let (left, right) = (Box::new(left.formula), Box::new(right.formula));
        let kind = if minus { FormulaKind::Sub(left, right) } else { FormulaKind::Add(left, right) };
        self.over(kind, span, below)
    }

    /// `a - b - c + d` is (a − b) − (c − d): the signs behind a minus are turned.
    fn balanced(&mut self, mut summands: Vec<(bool, Built)>, turned: bool) -> Built {
        if summands.len() == 1 {
            return summands.remove(0).1;
        }
        let right = summands.split_off(summands.len() / 2);
        let minus = right[0].0 != turned;
        let left = self.balanced(summands, turned);
        let right = self.balanced(right, turned != minus);
        self.pair(left, right, minus)
    }

    /// A product, left to right.
    pub fn product(&mut self, factors: Vec<(Operator, Built)>) -> Built {
        let mut factors = factors.into_iter();
        let first = factors.next().map(|(_, first)| first);
        let first = first.unwrap_or_else(|| self.leaf(FormulaKind::Missing, 0, 0));
        factors.fold(first, |left, (operator, right)| {
            let span = left.formula.span.to(right.formula.span);
            let below = left.depth.max(right.depth);
            let (left, right) = (Box::new(left.formula), Box::new(right.formula));
            let kind = match operator {
                Operator::Times(times) => FormulaKind::Mul { left, right, times },
                Operator::Over => FormulaKind::Div(left, right),
            };
            self.over(kind, span, below)
        })
    }

    /// `-a`.
    pub fn negative(&mut self, l: usize, operand: Built) -> Built {
        let span = Span::new(l, l).to(operand.formula.span);
        self.over(FormulaKind::Neg(Box::new(operand.formula)), span, operand.depth)
    }

    /// `a^b`.
    pub fn power(&mut self, base: Built, exponent: Built) -> Built {
        let span = base.formula.span.to(exponent.formula.span);
        let below = base.depth.max(exponent.depth);
        self.over(FormulaKind::Pow(Box::new(base.formula), Box::new(exponent.formula)), span, below)
    }

    /// `a²`.
    pub fn raised(&mut self, base: Built, exponent: Option<i32>, l: usize, r: usize) -> Built {
        let exponent = self.integer(exponent, Span::new(l, r));
        self.power(base, exponent)
    }

    fn integer(&mut self, value: Option<i32>, span: Span) -> Built {
        let Some(value) = value else {
            self.slips
                .error(codes::NUMBER_FORM, span, "this raised number cannot be read")
                .help("raised are integers: x², x⁻¹; else write x^(…)");
            return Built { formula: Formula { kind: FormulaKind::Missing, span }, depth: 0 };
        };
        let digits = value.unsigned_abs().to_string();
        let number = Formula { kind: FormulaKind::Number(Number { digits, exponent: 0 }), span };
        if value < 0 {
            return Built { formula: Formula { kind: FormulaKind::Neg(Box::new(number)), span }, depth: 1 };
        }
        Built { formula: number, depth: 0 }
    }

    /// `a'`; primes on primes add up.
    pub fn prime(&mut self, base: Built, order: u32, r: usize) -> Built {
        let Built { formula: Formula { kind, span }, depth } = base;
        let whole = span.to(Span::new(r, r));
        let (inner, before, depth) = match kind {
            FormulaKind::Prime { base, order } => (*base, order, depth - 1),
            kind => (Formula { kind, span }, 0, depth),
        };
        let order = before.saturating_add(order);
        if order > NESTING as u32 {
            if !self.slips.has(codes::NESTING) {
                too_deep(&mut self.slips, whole);
            }
            return self.leaf(FormulaKind::Missing, whole.start as usize, r);
        }
        self.over(FormulaKind::Prime { base: Box::new(inner), order }, whole, depth)
    }

    /// `a[i]`; of `x'[3]` and `x[3]'` both are the prime of the index.
    pub fn index(&mut self, base: Built, indices: Vec<Built>, r: usize) -> Built {
        let Built { formula: Formula { kind, span }, depth } = base;
        let whole = span.to(Span::new(r, r));
        if let FormulaKind::Prime { base: inner, order } = kind {
            let indexed = self.index(Built { formula: *inner, depth: depth - 1 }, indices, r);
            return self.prime(indexed, order, r);
        }
        let below = indices.iter().map(|i| i.depth).max().unwrap_or(0).max(depth);
        let indices = indices.into_iter().map(|i| i.formula).collect();
        self.over(FormulaKind::Index { base: Box::new(Formula { kind, span }), indices }, whole, below)
    }

    /// `(a)` or a tuple.
    pub fn parentheses(&mut self, parts: Vec<Built>, l: usize, r: usize) -> Built {
        let below = parts.iter().map(|p| p.depth).max().unwrap_or(0);
        let mut formulas: Vec<Formula> = parts.into_iter().map(|p| p.formula).collect();
        let kind = match formulas.len() {
            1 => FormulaKind::Paren(Box::new(formulas.remove(0))),
            _ => FormulaKind::Tuple(formulas),
        };
        self.over(kind, Span::new(l, r), below)
    }

    /// `|a|`.
    pub fn bars(&mut self, inner: Built, l: usize, r: usize) -> Built {
        self.over(FormulaKind::Bars(Box::new(inner.formula)), Span::new(l, r), inner.depth)
    }

    /// `sum(i in 1..3: a)`.
    pub fn sum_over(&mut self, index: Name, range: Option<(Built, Built)>, body: Built, l: usize, r: usize) -> Built {
        let ends = range.as_ref().map_or(0, |(lower, upper)| lower.depth.max(upper.depth));
        let range = range.map(|(lower, upper)| (Box::new(lower.formula), Box::new(upper.formula)));
        let kind = FormulaKind::Sum { index, range, body: Box::new(body.formula) };
        self.over(kind, Span::new(l, r), ends.max(body.depth))
    }

    /// A known function before a single name.
    pub fn bare(&mut self, name: String, l: usize, m: usize, mark: Option<Mark>, argument: Built) -> Built {
        let r = argument.formula.span.end as usize;
        self.function_call(name, (l, m), mark.into_iter().collect(), vec![argument], r, false)
    }

    /// A function before parentheses.
    pub fn call(&mut self, name: String, at: (usize, usize), marks: Vec<Mark>, args: Vec<Built>, r: usize) -> Built {
        self.function_call(name, at, marks, args, r, true)
    }

    fn function_call(
        &mut self,
        name: String,
        (l, m): (usize, usize),
        marks: Vec<Mark>,
        args: Vec<Built>,
        r: usize,
        parenthesised: bool,
    ) -> Built {
        let mut member: Option<Vec<Built>> = None;
        let mut derivative = Derivative::None;
        let mut power = None;
        for mark in marks {
            match (mark, &derivative) {
                (Mark::Prime(order, _), Derivative::None) => derivative = Derivative::Order(order),
                (Mark::Index(indices, _), Derivative::None) if member.is_none() => member = Some(indices),
                (Mark::Index(indices, r), Derivative::Order(order)) => {
                    derivative = self.positions(*order, indices, Span::new(m, r));
                }
                (Mark::Power(value, span), _) => power = Some(self.integer(value, span)),
                (Mark::Prime(_, r) | Mark::Index(_, r), _) => self.derivative_mark(Span::new(m, r)),
            }
        }
        let below = args.iter().map(|a| a.depth).max().unwrap_or(0).max(power.as_ref().map_or(0, |p| p.depth));
        let kind = FormulaKind::Call {
            function: Name { text: name, span: Span::new(l, m) },
            derivative,
            power: power.map(|p| Box::new(p.formula)),
            args: args.into_iter().map(|a| a.formula).collect(),
            parenthesised,
        };
        let call = self.over(kind, Span::new(l, r), below);
        match member {
            // The member of a family of functions is the index of the call.
            Some(indices) => self.index(call, indices, r),
            None => call,
        }
    }

    /// The positions in `U'[1,2](x, y)`.
    fn positions(&mut self, order: u32, indices: Vec<Built>, span: Span) -> Derivative {
        let count = indices.len();
        let numbers: Option<Vec<u32>> = indices
            .iter()
            .map(|i| match &i.formula.kind {
                FormulaKind::Number(n) if n.exponent == 0 => n.digits.parse().ok().filter(|n| *n > 0),
                _ => None,
            })
            .collect();
        match numbers {
            Some(numbers) if order == 1 || order as usize == count => Derivative::Arguments(numbers),
            _ => {
                self.derivative_mark(span);
                Derivative::Order(order)
            }
        }
    }

    fn derivative_mark(&mut self, span: Span) {
        self.slips
            .error(codes::DERIVATIVE_MARK, span, "this derivative cannot be read")
            .help("write U'(r), or U'[1,2](x, y) with the positions of the arguments; of a family, u[i]'(t)");
    }

    /// `x -> x + ε`: checks that the left side names coordinates and that there are as many images.
    pub fn arrow(&mut self, source: Formula, target: Formula, l: usize, r: usize) -> Arrow {
        let (source_span, target_span) = (source.span, target.span);
        let sources = parts(source);
        let mut targets = parts(target);
        for source in &sources {
            let named = match &source.kind {
                FormulaKind::Name(_) | FormulaKind::Missing => true,
                FormulaKind::Index { base, .. } => matches!(base.kind, FormulaKind::Name(_)),
                _ => false,
            };
            if !named && !self.slips.touches(source.span) {
                self.slips
                    .error(codes::TRANSFORMATION_SOURCE, source.span, "on the left of `->` stands a coordinate or `t`")
                    .help("velocities and defined quantities follow from it");
            }
        }
        if sources.len() != targets.len() {
            let (many, few) = (sources.len(), targets.len());
            if targets.iter().all(|t| t.kind != FormulaKind::Missing) {
                self.slips
                    .error(
                        codes::TRANSFORMATION_COUNT,
                        target_span,
                        format!("{many} on the left of `->`, {few} on the right"),
                    )
                    .help("write one image for each coordinate: (x, y) -> (…, …)");
            }
            targets.resize(many, Formula { kind: FormulaKind::Missing, span: target_span });
        }
        debug_assert!(source_span.start as usize >= l);
        Arrow { sources, targets, span: Span::new(l, r) }
    }

    /// An assumption or condition; without a relation it says nothing.
    pub fn comparison(&mut self, first: Formula, rest: Vec<(Relation, Formula)>) -> Comparison {
        if rest.is_empty() && first.kind != FormulaKind::Missing && !self.slips.touches(first.span) {
            self.slips
                .error(codes::MISSING_PART, first.span, "this compares nothing")
                .help("write a comparison, such as `m > 0`");
        }
        Comparison { first, rest }
    }

    /// `function U(r)`; without arguments a slip.
    pub fn function(
        &mut self,
        declared: Declared,
        formals: Option<Vec<Name>>,
        quantity: Option<UnitText>,
        _r: usize,
    ) -> ItemKind {
        if formals.is_none() {
            let name = declared.name.text.clone();
            self.slips
                .error(codes::MISSING_PART, declared.name.span, format!("`{name}` has no arguments"))
                .help("write what it depends on: `function U(r)`; a signal of time is an `input`");
        }
        ItemKind::Function { declared, formals: formals.unwrap_or_default(), quantity }
    }

    /// A declared derivative.
    pub fn declared_derivative(&mut self, name: Name, r: usize) -> Declared {
        let text = name.text.clone();
        self.slips
            .error(codes::DECLARED_DERIVATIVE, name.span.to(Span::new(r, r)), "a derivative is not declared")
            .mend(format!("declare {text}"), name.span.to(Span::new(r, r)), text);
        Declared { name, index: None }
    }

    /// A run from its parts.
    pub fn run(&mut self, name: Option<Name>, parts: Vec<Part>) -> ItemKind {
        let (mut from, mut with, mut over, mut until) = (Vec::new(), Vec::new(), None, None);
        let mut twice = |span, what: &str| {
            self.slips
                .error(codes::CLAUSE_TWICE, span, format!("`{what}` stands twice"))
                .help("a run has one of each clause");
        };
        let mut overs = 0;
        for part in parts {
            match part {
                Part::From(what, Some(value)) => from.push((what, value)),
                Part::From(what, None) => {
                    let number = Formula { kind: FormulaKind::Missing, span: what.span };
                    let span = what.span;
                    from.push((what, Value { number, unit: None, span }));
                }
                Part::Over(value, span) => {
                    overs += 1;
                    if overs > 1 {
                        twice(span, "over");
                    }
                    over = over.or(value);
                }
                Part::Until(condition, span) => {
                    if until.is_some() {
                        twice(span, "until");
                    }
                    until.get_or_insert(condition);
                }
                Part::With(what, formula) => with.push((what, formula)),
            }
        }
        ItemKind::Run { name, from, over, until, with }
    }

    /// The options of a system; what goes on after a comma belongs to `with`.
    pub fn options(read: Vec<(Option<SystemOption>, Option<Name>)>) -> Vec<SystemOption> {
        let mut options = Vec::new();
        for (option, name) in read {
            options.extend(option);
            if let Some(name) = name {
                match options.last_mut() {
                    Some(SystemOption::With(names)) => names.push(name),
                    _ => options.push(SystemOption::With(vec![name])),
                }
            }
        }
        options
    }

    /// `c = 1`.
    pub fn unity(&mut self, name: Name, number: Number, l: usize, r: usize) -> Name {
        if number.digits != "1" || number.exponent != 0 {
            self.slips
                .error(codes::SYSTEM_OPTION, Span::new(l, r), "here a quantity is set to 1, which drops its dimension")
                .help("give another value with `parameter`");
        }
        name
    }

    /// Declarations; one with neither quantity nor value shares those of the next.
    pub fn shared(mut declarations: Vec<Declaration>) -> Vec<Declaration> {
        for at in (0..declarations.len().saturating_sub(1)).rev() {
            let next = declarations[at + 1].clone();
            let this = &mut declarations[at];
            if this.quantity.is_none() && this.value.is_none() {
                this.quantity = next.quantity;
                this.value = next.value;
            }
        }
        declarations
    }

    /// A quotient of units.
    pub fn quotient(mut above: Vec<UnitFactor>, below: Vec<UnitFactor>) -> Vec<UnitFactor> {
        above.extend(below.into_iter().map(|f| UnitFactor { exponent: (-f.exponent.0, f.exponent.1), ..f }));
        above
    }

    /// The 1 in `1/s`.
    pub fn unit_one(&mut self, one: Number, l: usize, r: usize) -> Vec<UnitFactor> {
        if one.digits != "1" || one.exponent != 0 {
            self.slips
                .error(codes::VALUE_FORM, Span::new(l, r), "a unit has no number but the 1 in 1/s")
                .help("a value stands behind `=`");
        }
        Vec::new()
    }

    /// `m²`.
    pub fn unit_power(&mut self, symbol: Name, power: Option<i32>, r: usize) -> UnitFactor {
        let span = symbol.span.to(Span::new(r, r));
        let exponent = self.unit_integer(power, span);
        UnitFactor { symbol, exponent: (exponent, 1) }
    }

    /// `s^-1`, `m^(1/2)`.
    pub fn unit_exponent(
        &mut self,
        symbol: Name,
        minus: bool,
        number: Number,
        below: Option<Number>,
        l: usize,
        r: usize,
    ) -> UnitFactor {
        let integer = |n: &Number| n.digits.parse::<i32>().ok().filter(|_| n.exponent == 0);
        let above = self.unit_integer(integer(&number), Span::new(l, r));
        let below = below.map_or(1, |n| self.unit_integer(integer(&n).filter(|n| *n > 0), Span::new(l, r)));
        UnitFactor { symbol, exponent: (if minus { -above } else { above }, below.unsigned_abs()) }
    }

    fn unit_integer(&mut self, value: Option<i32>, span: Span) -> i32 {
        value.filter(|v| v.unsigned_abs() <= 1000).unwrap_or_else(|| {
            self.slips
                .error(codes::NUMBER_FORM, span, "a unit's exponent is a small integer or a quotient of two")
                .help("such as `s^-2`, `m^(1/2)`");
            1
        })
    }
}

/// The components of a tuple, or the formula alone.
fn parts(formula: Formula) -> Vec<Formula> {
    match formula.kind {
        FormulaKind::Tuple(parts) => parts,
        FormulaKind::Paren(inner) => vec![*inner],
        kind => vec![Formula { kind, span: formula.span }],
    }
}
