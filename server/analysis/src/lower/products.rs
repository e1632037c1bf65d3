//! Sums, products, quotients: which product is meant, and whether the shapes fit.

use super::Lowerer;
use crate::codes;
use crate::finding::LocalFinding;
use crate::values::{Shape, Value, combined, contract, cross, minor, scaled};
use leastwise_algebra::{Arena, Expr, Rational};
use leastwise_grammar::tree::*;

/// What stands before a factor.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(crate) enum Operator {
    Times(Times),
    Over,
}

/// The factors of a product from left to right, each with what stands before it.
pub(crate) fn factors(f: &Formula) -> Vec<(Operator, &Formula)> {
    let mut out = Vec::new();
    let mut at = f;
    loop {
        match &at.kind {
            FormulaKind::Mul { left, right, times } => {
                out.push((Operator::Times(*times), &**right));
                at = left;
            }
            FormulaKind::Div(left, right) => {
                out.push((Operator::Over, &**right));
                at = left;
            }
            _ => break,
        }
    }
    out.push((Operator::Times(Times::Star), at));
    out.reverse();
    out
}

/// The summands of a sum from left to right, each with whether it is subtracted. A long sum is a balanced tree.
pub(crate) fn summands(f: &Formula) -> Vec<(bool, &Formula)> {
    let mut out = Vec::new();
    let mut stack = vec![(false, f)];
    while let Some((minus, f)) = stack.pop() {
        match &f.kind {
            FormulaKind::Add(a, b) => {
                stack.push((minus, &**b));
                stack.push((minus, &**a));
            }
            FormulaKind::Sub(a, b) => {
                stack.push((!minus, &**b));
                stack.push((minus, &**a));
            }
            _ => out.push((minus, f)),
        }
    }
    out
}

impl Lowerer<'_> {
    pub(super) fn sum_of(&mut self, f: &Formula) -> Value {
        let list = summands(f);
        let mut terms: Vec<(bool, Value)> = Vec::with_capacity(list.len());
        let mut shape: Option<(Shape, Span)> = None;
        let mut missing = false;
        for (minus, operand) in list {
            let value = self.lower(operand);
            match (value.shape(), shape) {
                (None, _) => missing = true,
                (Some(s), None) => shape = Some((s, operand.span)),
                (Some(s), Some((first, _))) if s != first => {
                    missing = true;
                    let what = if minus { "taken from" } else { "added to" };
                    let message = format!("{s} cannot be {what} {first}");
                    let mut finding = LocalFinding::error(codes::SHAPE_MISMATCH, operand.span, message);
                    if matches!((s, first), (Shape::Vector(_), Shape::Number) | (Shape::Number, Shape::Vector(_))) {
                        finding = finding.help("a component of a vector P is P[1], its length |P|");
                    }
                    self.report(finding);
                }
                _ => {}
            }
            terms.push((minus, value));
        }
        let cost = terms.iter().map(|(_, v)| self.width(v)).sum();
        if missing || !self.charge(cost, f.span) {
            return Value::Missing;
        }
        combined(self.arena, &terms)
    }

    pub(super) fn product_of(&mut self, f: &Formula) -> Value {
        let list = factors(f);
        let mut product = Product::default();
        let mut previous: Option<&Formula> = None;
        for (operator, operand) in &list {
            if let Some(left) = previous
                && !self.reading_of(left, *operator, operand)
            {
                // What was meant is a function or its argument: the two together have no value.
                product.missing = true;
                previous = Some(operand);
                continue;
            }
            let value = self.lower(operand);
            self.take(&mut product, *operator, value, previous, operand);
            previous = Some(operand);
        }
        self.finish(product, f.span)
    }

    /// Takes a factor into a product.
    pub(super) fn take(
        &mut self,
        product: &mut Product,
        operator: Operator,
        value: Value,
        previous: Option<&Formula>,
        operand: &Formula,
    ) {
        let both = previous.map_or(operand.span, |p| p.span.to(operand.span));
        let Some(shape) = value.shape() else {
            product.missing = true;
            return;
        };
        if product.missing {
            return;
        }
        let failed = match (operator, &product.vector) {
            (Operator::Over, _) => match value.scalar() {
                Some(e) if e == Arena::ZERO => {
                    self.report(
                        LocalFinding::error(codes::DIVISION_BY_ZERO, both, "this divides by zero")
                            .help("the divisor is zero whatever the names in it stand for"),
                    );
                    true
                }
                Some(e) => {
                    product.numbers.push((e, Rational::MINUS_ONE));
                    false
                }
                None => {
                    self.error(
                        codes::SHAPE_MISMATCH,
                        operand.span,
                        format!("a divisor is a number, and this is {shape}"),
                    );
                    true
                }
            },
            (Operator::Times(Times::Cross), left) => {
                let vector = match left {
                    Some(left) => self.crossed(left.clone(), &value),
                    None => None,
                };
                match vector {
                    Some(v) => {
                        product.set(v);
                        false
                    }
                    None => {
                        let left = left.as_ref().and_then(Value::shape).unwrap_or(Shape::Number);
                        let finding = LocalFinding::error(
                            codes::SHAPE_MISMATCH,
                            both,
                            format!("`×` is the product of two vectors in space, and here stand {left} and {shape}"),
                        )
                        .help("the product of numbers is written `·`, `*`, or side by side");
                        self.report(finding);
                        true
                    }
                }
            }
            (_, None) => {
                match value {
                    Value::Scalar(e) => product.numbers.push((e, Rational::ONE)),
                    v => product.vector = Some(v),
                }
                false
            }
            (_, Some(_)) if shape == Shape::Number => {
                product.numbers.push((value.scalar().unwrap_or(Arena::UNDEFINED), Rational::ONE));
                false
            }
            (Operator::Times(Times::Dot), Some(left)) => match contract(self.arena, left, &value) {
                Some(v) => {
                    let cost = self.width(&v);
                    let ok = self.charge(cost.saturating_mul(4), both);
                    product.set(v);
                    !ok
                }
                None => {
                    let left = left.shape().unwrap_or(Shape::Number);
                    let message = format!("{left} and {shape} have no product");
                    self.error(codes::SHAPE_MISMATCH, both, message);
                    true
                }
            },
            (Operator::Times(_), Some(left)) => {
                self.two_vectors(left.shape().unwrap_or(Shape::Number), shape, previous, operand);
                true
            }
        };
        product.missing |= failed;
    }

    /// The product of what was taken.
    pub(super) fn finish(&mut self, product: Product, span: Span) -> Value {
        if product.missing {
            return Value::Missing;
        }
        let cost = product.numbers.iter().map(|(e, _)| super::breadth(self.arena, *e)).sum();
        if !self.charge(cost, span) {
            return Value::Missing;
        }
        let number = self.arena.monomial(&product.numbers);
        match (self.existing(number, span), product.vector) {
            (Value::Scalar(e), Some(v)) => {
                let cost = self.width(&v);
                if !self.charge(cost, span) {
                    return Value::Missing;
                }
                scaled(self.arena, &v, e)
            }
            (value, _) => value,
        }
    }

    /// The cross product of vectors in space; in the plane, its one component.
    pub(super) fn crossed(&mut self, a: Value, b: &Value) -> Option<Value> {
        let (a, b) = (a.components()?, b.components()?);
        match (a.len(), b.len()) {
            (3, 3) => Some(Value::numbers(cross(self.arena, &a, &b))),
            (2, 2) => Some(Value::Scalar(minor(self.arena, &a, &b, 0, 1))),
            _ => None,
        }
    }

    fn two_vectors(&mut self, left: Shape, right: Shape, previous: Option<&Formula>, operand: &Formula) {
        let span = previous.map_or(operand.span, |p| p.span.to(operand.span));
        let message = format!("{left} and {right} stand side by side: which product is meant?");
        let mut finding = LocalFinding::error(codes::TWO_VECTORS, span, message).help("write `·` for the dot product");
        if let Some(p) = previous {
            let gap = Span { start: p.span.end, end: operand.span.start.max(p.span.end) };
            finding = finding.fix("write the dot product `·`", gap, "·");
            if left == Shape::Vector(3) && right == Shape::Vector(3) {
                finding = finding.fix("write the cross product `×`", gap, "×").help("write `·` or `×`");
            }
        }
        self.report(finding);
    }

    pub(super) fn power_of_vector(&mut self, base: &Formula, exponent: &Formula, span: Span, shape: Shape) -> Value {
        let mut finding = LocalFinding::error(codes::TWO_VECTORS, span, format!("a power of {shape} is not defined"));
        let behind = Span { start: base.span.end, end: span.end };
        let square = matches!(&exponent.kind, FormulaKind::Number(n) if n.digits == "2" && n.exponent == 0);
        let name = match &base.kind {
            FormulaKind::Name(name) => Some(name.clone()),
            FormulaKind::Prime { base, order } => match &base.kind {
                FormulaKind::Name(name) => Some(format!("{name}{}", "'".repeat(*order as usize))),
                _ => None,
            },
            _ => None,
        };
        match shape {
            Shape::Vector(_) if square => {
                let before = Span { start: base.span.start, end: base.span.start };
                let raised = Span { start: base.span.end, end: base.span.end };
                finding = finding
                    .help("write P·P, or |P|² for the square of the length")
                    .fixes("write |…|²", vec![(before, "|".into()), (raised, "|".into())]);
                if let Some(name) = name {
                    finding = finding.fix(format!("write {name}·{name}"), behind, format!("·{name}"));
                }
            }
            Shape::Vector(_) => finding = finding.help("a power of its length is written |P|^n"),
            _ => {
                finding = finding.help("products of matrices are written R·R");
                if let Some(name) = name.filter(|_| square) {
                    finding = finding.fix(format!("write {name}·{name}"), behind, format!("·{name}"));
                }
            }
        }
        self.report(finding);
        Value::Missing
    }

    /// Hints on how two neighbours were read. Gives `false` where they were meant otherwise and have no value.
    fn reading_of(&mut self, left: &Formula, operator: Operator, right: &Formula) -> bool {
        if operator != Operator::Times(Times::Juxtaposed) {
            return true;
        }
        self.function_of_parameter(left, right);
        !self.called_name(left, right)
    }
}

/// A product while its factors are taken in.
#[derive(Default)]
pub(super) struct Product {
    pub numbers: Vec<(Expr, Rational)>,
    pub vector: Option<Value>,
    pub missing: bool,
}

impl Product {
    /// Replaces the vector by the product of vectors.
    fn set(&mut self, value: Value) {
        match value {
            Value::Scalar(e) => {
                self.vector = None;
                self.numbers.push((e, Rational::ONE));
            }
            v => self.vector = Some(v),
        }
    }
}
