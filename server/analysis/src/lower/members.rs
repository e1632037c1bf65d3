//! Members of families and components of vectors.

use super::{Binding, Foreign, Lowerer, role};
use crate::codes;
use crate::finding::{LocalFinding, Place};
use crate::scope::{Decl, SymbolKind};
use crate::values::{Shape, Value};
use leastwise_algebra::{Arena, Expr, Node, Rational, Role};
use leastwise_grammar::tree::*;

impl<'a> Lowerer<'a> {
    /// `x[i]`, `P[3]`, `X[i][2]`, `R[1, 2]`, `u[i](t)`.
    pub(super) fn index(&mut self, base: &Formula, indices: &[Formula], span: Span) -> Value {
        let family = match &base.kind {
            FormulaKind::Name(name) if !self.is_bound(name) => self.scope.get(name),
            FormulaKind::Call { function, .. } => self.scope.get(&function.text).filter(|d| d.is_family()),
            _ => None,
        };
        let Some(decl) = family.filter(|d| d.is_family() || d.kind == SymbolKind::Undeclared) else {
            let value = self.lower(base);
            return indices.iter().fold(value, |v, i| self.component(v, i, base, span));
        };
        let Some(first) = indices.first() else { return Value::Missing };
        let Some(at) = self.member_index(decl, first) else { return Value::Missing };
        let value = if matches!(base.kind, FormulaKind::Call { .. }) {
            self.call(base, Some(at))
        } else {
            self.member(decl, at, span)
        };
        indices[1..].iter().fold(value, |v, i| self.component(v, i, base, span))
    }

    /// The index of a member of a family, in its range.
    fn member_index(&mut self, decl: &'a Decl, f: &Formula) -> Option<Expr> {
        let at = self.index_value(f)?;
        if let Some((lower, upper)) = decl.range {
            let (low, high) = (self.extreme(at, false), self.extreme(at, true));
            let outside = low.is_some_and(|l| l < lower) || high.is_some_and(|h| h > upper);
            if outside {
                let which = match self.arena.as_i64(at) {
                    Some(k) => format!("{}[{k}]", decl.name),
                    None => format!("{}[…]", decl.name),
                };
                let reach = match (self.arena.as_i64(at), low, high) {
                    (None, Some(l), Some(h)) => format!("; the index here runs from {l} to {h}"),
                    _ => self.circumstances(),
                };
                let message = format!(
                    "`{which}` does not exist: the index of `{}` runs from {lower} to {upper}{reach}",
                    decl.name
                );
                let finding = LocalFinding::error(codes::INDEX_OUT_OF_RANGE, f.span, message)
                    .related(Place::Declaration(decl.name.clone()), format!("`{}` is declared here", decl.name));
                self.report(finding);
                return None;
            }
        }
        if decl.failed {
            self.failed = true;
            return None;
        }
        Some(at)
    }

    /// The values of the indices where they are numbers: `, where i = 8`.
    fn circumstances(&self) -> String {
        let values: Vec<String> = self.bindings[self.base..]
            .iter()
            .filter(|b| b.index)
            .filter_map(|b| Some(format!("{} = {}", b.name, self.arena.as_i64(b.value.scalar()?)?)))
            .collect();
        if values.is_empty() { String::new() } else { format!(" ({})", values.join(", ")) }
    }

    /// The member of a coordinate, parameter, input, definition at an index.
    pub(super) fn member(&mut self, decl: &'a Decl, at: Expr, span: Span) -> Value {
        match decl.kind {
            SymbolKind::Definition if decl.formals.is_empty() => self.definition_at(decl, at, span),
            SymbolKind::Definition | SymbolKind::Function => self.without_arguments(decl, span),
            kind => {
                let family = self.arena.symbol(&decl.name, None, role(kind));
                Value::Scalar(self.arena.member(family, at, 0))
            }
        }
    }

    /// The member of a family of definitions, from its formula.
    fn definition_at(&mut self, decl: &'a Decl, at: Expr, span: Span) -> Value {
        let known = self.definitions.get(&decl.fingerprint).and_then(|d| d.calls.get(&(Some(at), Vec::new())));
        if let Some(v) = known {
            return v.clone();
        }
        let value = self.expand(decl, Some(at), &[], span);
        if !self.stopped
            && let Some(d) = self.definitions.get_mut(&decl.fingerprint)
        {
            d.calls.insert((Some(at), Vec::new()), value.clone());
        }
        value
    }

    /// The formula of a definition with its index and arguments bound; findings in it lie at `span`.
    pub(super) fn expand(&mut self, decl: &'a Decl, at: Option<Expr>, args: &[Value], span: Span) -> Value {
        let source = decl.entry.and_then(|e| self.sources.get(e).cloned().flatten());
        let Some(source) = source else { return Value::Missing };
        let ItemKind::Let { body, .. } = &source.item.kind else { return Value::Missing };
        let base = std::mem::replace(&mut self.base, self.bindings.len());
        if let (Some(index), Some(at)) = (&decl.index, at) {
            self.bindings.push(Binding { name: index.text.as_str().into(), value: Value::Scalar(at), index: true });
        }
        for (formal, value) in decl.formals.iter().zip(args) {
            self.bindings.push(Binding { name: formal.clone(), value: value.clone(), index: false });
        }
        let call = self.foreign.first().map_or(span, |f| f.call);
        self.foreign.push(Foreign { call, name: decl.name.clone() });
        let value = self.lower(body);
        self.foreign.pop();
        self.bindings.truncate(self.base);
        self.base = base;
        value
    }

    /// A component of a vector, a row of a matrix.
    fn component(&mut self, value: Value, f: &Formula, base: &Formula, whole: Span) -> Value {
        let items = match &value {
            Value::Missing => return Value::Missing,
            Value::Scalar(_) => {
                let message = "a number has no components";
                let finding = LocalFinding::error(codes::NO_FAMILY, f.span, message)
                    .help("an index stands behind a family or a vector; a product needs `*`")
                    .fix("leave out the index", Span { start: base.span.end, end: whole.end }, "");
                self.report(finding);
                return Value::Missing;
            }
            Value::Vector(v) => v.items.clone(),
        };
        let Some(at) = self.index_value(f) else { return Value::Missing };
        match self.arena.as_i64(at) {
            Some(k) if k >= 1 && k as usize <= items.len() => items[k as usize - 1].clone(),
            Some(k) => {
                let what = if matches!(value.shape(), Some(Shape::Matrix(..))) { "rows" } else { "components" };
                let circumstances = self.circumstances();
                let message = format!("there is no component {k}: this has {} {what}{circumstances}", items.len());
                self.error(codes::INDEX_OUT_OF_RANGE, f.span, message)
            }
            None => self.error(codes::INDEX_FORM, f.span, "the index of a component is a number"),
        }
    }

    /// A whole number, or whole multiples of symbolic indices plus a whole number.
    pub(super) fn index_value(&mut self, f: &Formula) -> Option<Expr> {
        let value = self.lower(f);
        if let Some(shape) = value.shape()
            && shape != Shape::Number
        {
            self.error(codes::INDEX_FORM, f.span, format!("an index is a whole number, and this is {shape}"));
            return None;
        }
        let e = value.scalar()?;
        let whole = self.arena.summands(e).iter().all(|(x, c)| {
            c.is_integer()
                && (*x == Arena::ONE
                    || matches!(self.arena.node(*x), Node::Symbol(s) if self.arena.info(*s).role == Role::Index))
        });
        let fits = self.arena.summands(e).iter().all(|(_, c)| c.to_i64().is_some_and(|n| n.unsigned_abs() < 1 << 40));
        if whole && fits {
            return Some(e);
        }
        let finding = LocalFinding::error(
            codes::INDEX_FORM,
            f.span,
            "an index is a whole number, or an index plus a whole number",
        )
        .help("write x[3], x[i] or x[i+1]");
        self.report(finding);
        None
    }

    /// The smallest or greatest value of an index formula over the ranges of the symbolic indices in it, exactly:
    /// the innermost index is put at one of its bounds, which name only indices outside of it.
    pub(super) fn extreme(&mut self, e: Expr, greatest: bool) -> Option<i64> {
        let mut e = e;
        for k in (0..self.open.len()).rev() {
            let open = self.open[k];
            let terms = self.arena.summands(e);
            let Some((_, c)) = terms.iter().find(|(x, _)| *x == open.symbol) else { continue };
            let bound = if c.is_negative() == greatest { open.lower } else { open.upper };
            let rest: Vec<(Expr, Rational)> =
                terms.iter().map(|(x, c)| (if *x == open.symbol { bound } else { *x }, c.clone())).collect();
            e = self.arena.linear(&rest);
        }
        self.arena.as_i64(e)
    }

    /// Does something with a symbolic index open.
    pub(super) fn with_open<T>(
        &mut self,
        name: &str,
        symbol: Expr,
        bounds: (Expr, Expr),
        f: impl FnOnce(&mut Self) -> T,
    ) -> T {
        self.open.push(super::OpenIndex { symbol, lower: bounds.0, upper: bounds.1 });
        self.bindings.push(Binding { name: name.into(), value: Value::Scalar(symbol), index: true });
        let out = f(self);
        self.bindings.pop();
        self.open.pop();
        out
    }

    /// Does something with an index bound to a number.
    pub(super) fn with_index<T>(&mut self, name: &str, k: i64, f: impl FnOnce(&mut Self) -> T) -> T {
        let value = Value::Scalar(self.arena.integer(k));
        self.bindings.push(Binding { name: name.into(), value, index: true });
        let out = f(self);
        self.bindings.pop();
        out
    }
}
