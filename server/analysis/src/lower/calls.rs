//! Calls: the language's functions, definitions with arguments, unspecified functions.

use super::Lowerer;
use super::products::{Operator, Product};
use crate::codes;
use crate::finding::{LocalFinding, Place};
use crate::scope::{Decl, SymbolKind};
use crate::values::{Shape, Value, Vector, spin, transpose, turn, turned_back};
use leastwise_algebra::{Arena, Expr, Function, Role};
use leastwise_grammar::tree::*;

/// Matrices have at most so many rows.
const MAX_ROWS: usize = 64;

impl<'a> Lowerer<'a> {
    /// A call, of the member `at` where the function is a family.
    pub(super) fn call(&mut self, f: &Formula, at: Option<Expr>) -> Value {
        let FormulaKind::Call { function, derivative, power, args, .. } = &f.kind else { return Value::Missing };
        let value = if leastwise_grammar::builtin(&function.text).is_some() {
            self.builtin(function, args, f.span)
        } else {
            self.declared_call(function, derivative, args, at, f.span)
        };
        let Some(power) = power else { return value };
        let exponent = self.lower(power);
        let (Some(x), Some(n)) = (value.scalar(), exponent.scalar()) else {
            if let Some(shape) = value.shape() {
                return self.power_of_vector(f, power, f.span, shape);
            }
            return Value::Missing;
        };
        let e = self.arena.power(x, n);
        self.existing(e, f.span)
    }

    fn count(&mut self, name: &Name, args: &[Formula], (least, most): (usize, usize), form: &str, span: Span) -> bool {
        if (least..=most).contains(&args.len()) {
            return true;
        }
        let needs = match (least, most) {
            (1, 1) => "one argument".to_owned(),
            (a, b) if a == b => format!("{a} arguments"),
            (a, _) => format!("{a} arguments or more"),
        };
        let message = format!("`{}` has {needs}, and here stand {}", name.text, args.len());
        let mut finding = LocalFinding::error(codes::ARGUMENT_COUNT, span, message);
        if !form.is_empty() {
            finding = finding.help(format!("write {form}"));
        }
        self.report(finding);
        false
    }

    fn builtin(&mut self, name: &Name, args: &[Formula], span: Span) -> Value {
        let (least, most, form) = match name.text.as_str() {
            "atan2" => (2, 2, "atan2(y, x)"),
            "dot" => (2, 2, "dot(P, Q), or P·Q"),
            "cross" => (2, 2, "cross(P, Q), or P×Q"),
            "turn" => (2, 2, "turn(n, α): the unit vector, then the angle"),
            "min" | "max" => (2, usize::MAX, ""),
            "diag" => (2, MAX_ROWS, "diag(A, B, C)"),
            _ => (1, 1, ""),
        };
        if !self.count(name, args, (least, most), form, span) {
            return Value::Missing;
        }
        if name.text == "momentum" {
            return self.momentum(&args[0], span);
        }
        let values: Vec<Value> = args.iter().map(|a| self.lower(a)).collect();
        if values.iter().any(Value::is_missing) {
            return Value::Missing;
        }
        match name.text.as_str() {
            "norm" => self.norm_of(values[0].clone(), span, false),
            "dot" | "cross" => {
                let times = if name.text == "dot" { Times::Dot } else { Times::Cross };
                let mut product = Product::default();
                let [a, b] = &values[..] else { return Value::Missing };
                if name.text == "dot" {
                    for (v, arg) in values.iter().zip(args) {
                        if let Some(Shape::Number) = v.shape() {
                            return self.error(
                                codes::SHAPE_MISMATCH,
                                arg.span,
                                "`dot` takes two vectors, and this is a number",
                            );
                        }
                    }
                }
                self.take(&mut product, Operator::Times(Times::Star), a.clone(), None, &args[0]);
                self.take(&mut product, Operator::Times(times), b.clone(), Some(&args[0]), &args[1]);
                self.finish(product, span)
            }
            "transpose" => self.transposed(&values[0], args[0].span),
            "diag" => self.diagonal(&values, args, span),
            "turn" => self.turn(&values, args),
            "spin" => {
                let result = spin(self.arena, &values[0], self.budget);
                match result {
                    Ok(Some(v)) => v,
                    Ok(None) => {
                        let shape = values[0].shape().unwrap_or(Shape::Number);
                        let message = format!("`spin` takes a rotation, a 3×3 matrix, and this is {shape}");
                        self.error(codes::SHAPE_MISMATCH, args[0].span, message)
                    }
                    Err(why) => self.stop(why, span),
                }
            }
            other => self.known(other, &values, args, span),
        }
    }

    /// A function of numbers.
    fn known(&mut self, name: &str, values: &[Value], args: &[Formula], span: Span) -> Value {
        let mut numbers = Vec::with_capacity(values.len());
        for (v, arg) in values.iter().zip(args) {
            match v.scalar() {
                Some(e) => numbers.push(e),
                None => {
                    let shape = v.shape().unwrap_or(Shape::Number);
                    let message = format!("`{name}` takes a number, and this is {shape}");
                    let mut finding = LocalFinding::error(codes::NOT_A_NUMBER, arg.span, message);
                    if name == "abs" {
                        let word = Span { start: span.start, end: span.start + name.len() as u32 };
                        finding = finding.help("the length of a vector is |P| or norm(P)");
                        finding = finding.fix("write norm for the length", word, "norm");
                    }
                    self.report(finding);
                    return Value::Missing;
                }
            }
        }
        if !self.charge(numbers.len(), span) {
            return Value::Missing;
        }
        let e = match Function::from_name(name) {
            Some(f) => self.arena.call(f, &numbers),
            None => self.arena.sqrt(numbers[0]),
        };
        self.existing(e, span)
    }

    fn transposed(&mut self, value: &Value, span: Span) -> Value {
        let Some(rows) = value.rows() else {
            let shape = value.shape().unwrap_or(Shape::Number);
            return self.error(codes::SHAPE_MISMATCH, span, format!("`transpose` takes a matrix, and this is {shape}"));
        };
        let mut out = Value::matrix(transpose(&rows));
        if let (Value::Vector(Vector { turns: Some(turns), .. }), Value::Vector(v)) = (value, &mut out) {
            v.turns = Some(turned_back(self.arena, turns));
        }
        out
    }

    fn diagonal(&mut self, values: &[Value], args: &[Formula], span: Span) -> Value {
        let mut rows = vec![vec![Arena::ZERO; values.len()]; values.len()];
        for (k, (v, arg)) in values.iter().zip(args).enumerate() {
            let Some(e) = v.scalar() else {
                return self.error(codes::NOT_A_NUMBER, arg.span, "`diag` takes the numbers of the diagonal");
            };
            rows[k][k] = e;
        }
        if !self.charge(values.len() * values.len(), span) {
            return Value::Missing;
        }
        Value::matrix(rows)
    }

    fn turn(&mut self, values: &[Value], args: &[Formula]) -> Value {
        let axis: Option<[Expr; 3]> = values[0].components().and_then(|c| c.try_into().ok());
        let Some(axis) = axis else {
            let shape = values[0].shape().unwrap_or(Shape::Number);
            let message = format!("the axis of a turn is a unit vector in space, and this is {shape}");
            self.report(
                LocalFinding::error(codes::SHAPE_MISMATCH, args[0].span, message).help("ex, ey and ez are built in"),
            );
            return Value::Missing;
        };
        let Some(angle) = values[1].scalar() else {
            return self.error(codes::NOT_A_NUMBER, args[1].span, "the angle of a turn is a number");
        };
        let square = crate::values::dot(self.arena, &axis, &axis);
        if square != Arena::ONE && self.arena.as_number(square).is_some() {
            let finding = LocalFinding::error(
                codes::UNIT_VECTOR,
                args[0].span,
                "the axis of a turn has length one, and this has not",
            )
            .help("divide it by its length: n/|n|");
            let end = Span { start: args[0].span.end, end: args[0].span.end };
            let components = match &args[0].kind {
                FormulaKind::Name(name) => Some(name.clone()),
                _ => None,
            };
            self.report(match components {
                Some(name) if square != Arena::ZERO => {
                    finding.fix(format!("write {name}/|{name}|"), end, format!("/|{name}|"))
                }
                _ => finding,
            });
            return Value::Missing;
        }
        turn(self.arena, axis, angle)
    }

    fn declared_call(
        &mut self,
        name: &Name,
        derivative: &Derivative,
        args: &[Formula],
        at: Option<Expr>,
        span: Span,
    ) -> Value {
        let Some(decl) = self.scope.get(&name.text) else {
            self.failed = true;
            return Value::Missing;
        };
        if !matches!(decl.kind, SymbolKind::Function | SymbolKind::Definition) || decl.formals.is_empty() {
            self.failed = true;
            return Value::Missing;
        }
        let form = format!("{}({})", decl.name, decl.formals.join(", "));
        if !self.count(name, args, (decl.formals.len(), decl.formals.len()), &form, span) {
            return Value::Missing;
        }
        if decl.is_family() && at.is_none() {
            let index = decl.index.as_ref().map_or("i", |i| i.text.as_str());
            let message = format!("`{}` is a family of functions, and no member is chosen", decl.name);
            let help = format!("write {}[{index}]({})", decl.name, decl.formals.join(", "));
            self.report(LocalFinding::error(codes::FAMILY_WITHOUT_INDEX, name.span, message).help(help));
            return Value::Missing;
        }
        let values: Vec<Value> = args.iter().map(|a| self.lower(a)).collect();
        let Some(orders) = self.orders(decl, derivative, name.span) else { return Value::Missing };
        if decl.failed {
            self.failed = true;
            return Value::Missing;
        }
        if decl.kind == SymbolKind::Function {
            return self.unspecified(decl, &orders, &values, args, at);
        }
        if orders.iter().any(|o| *o > 0) {
            return self.derived_definition(decl, &orders, &values, args, at, span);
        }
        // Without an argument there is no value; what is wrong with the definition is told there.
        if values.iter().any(Value::is_missing) {
            return Value::Missing;
        }
        let key = (at, values);
        let known = self.definitions.get(&decl.fingerprint).and_then(|d| d.calls.get(&key));
        if let Some(v) = known {
            self.failed |= v.is_missing();
            return v.clone();
        }
        let value = self.expand(decl, at, &key.1, span);
        // A call without value says why at each place, so it is not kept.
        if !self.stopped
            && !value.is_missing()
            && let Some(d) = self.definitions.get_mut(&decl.fingerprint)
        {
            d.calls.insert(key, value.clone());
        }
        value
    }

    /// How often each argument is differentiated by.
    fn orders(&mut self, decl: &'a Decl, derivative: &Derivative, span: Span) -> Option<Vec<u16>> {
        let count = decl.formals.len();
        let mut orders = vec![0u16; count];
        match derivative {
            Derivative::None => {}
            Derivative::Order(n) if count == 1 && *n <= 64 => orders[0] = *n as u16,
            Derivative::Order(_) if count == 1 => {
                self.error(codes::FUNCTION_DERIVATIVE, span, "a function is differentiated at most 64 times");
                return None;
            }
            Derivative::Order(_) => {
                let message = format!("`{}` has {count} arguments: by which of them is it differentiated?", decl.name);
                let help = format!(
                    "write {}'[1]({}) for the derivative by `{}`",
                    decl.name,
                    decl.formals.join(", "),
                    decl.formals[0]
                );
                self.report(LocalFinding::error(codes::FUNCTION_DERIVATIVE, span, message).help(help));
                return None;
            }
            Derivative::Arguments(list) => {
                for k in list {
                    match orders.get_mut((*k as usize).wrapping_sub(1)) {
                        Some(o) => *o = o.saturating_add(1),
                        None => {
                            let message = format!("`{}` has no argument number {k}: it has {count}", decl.name);
                            let place = Place::Declaration(decl.name.clone());
                            let finding = LocalFinding::error(codes::FUNCTION_DERIVATIVE, span, message)
                                .related(place, format!("`{}` is declared here", decl.name));
                            self.report(finding);
                            return None;
                        }
                    }
                }
            }
        }
        Some(orders)
    }

    fn numbers(&mut self, decl: &Decl, values: &[Value], args: &[Formula]) -> Option<Vec<Expr>> {
        let mut out = Vec::with_capacity(values.len());
        for (v, arg) in values.iter().zip(args) {
            match (v.scalar(), v.shape()) {
                (Some(e), _) => out.push(e),
                (None, Some(shape)) => {
                    let message = format!("`{}` takes numbers, and this is {shape}", decl.name);
                    self.error(codes::NOT_A_NUMBER, arg.span, message);
                    return None;
                }
                (None, None) => return None,
            }
        }
        Some(out)
    }

    fn unspecified(
        &mut self,
        decl: &'a Decl,
        orders: &[u16],
        values: &[Value],
        args: &[Formula],
        at: Option<Expr>,
    ) -> Value {
        let Some(numbers) = self.numbers(decl, values, args) else { return Value::Missing };
        let symbol = self.arena.symbol(&decl.name, None, Role::Function);
        Value::Scalar(self.arena.unspecified(symbol, at, orders, &numbers))
    }

    /// The derivative of a definition by its arguments, at the arguments.
    fn derived_definition(
        &mut self,
        decl: &'a Decl,
        orders: &[u16],
        values: &[Value],
        args: &[Formula],
        at: Option<Expr>,
        span: Span,
    ) -> Value {
        let Some(numbers) = self.numbers(decl, values, args) else { return Value::Missing };
        // Each formal is a symbol of its own here: an argument may name one of the same name.
        let symbols: Vec<Expr> = decl
            .formals
            .iter()
            .map(|n| {
                let s = self.arena.symbol(&format!("{n}~"), None, Role::Formal);
                self.arena.sym(s)
            })
            .collect();
        let formals: Vec<Value> = symbols.iter().map(|e| Value::Scalar(*e)).collect();
        let value = self.expand(decl, at, &formals, span);
        let map = symbols.iter().copied().zip(numbers).collect();
        let (arena, budget) = (&mut *self.arena, &mut *self.budget);
        let result = value.map(&mut |e| {
            let mut e = e;
            for (symbol, order) in symbols.iter().zip(orders) {
                for _ in 0..*order {
                    e = arena.partial(e, *symbol, budget)?;
                }
            }
            arena.substitute(e, &map, budget)
        });
        self.checked(result, span)
    }
}
