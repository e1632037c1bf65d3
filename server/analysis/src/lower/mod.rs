//! Formulas to values: every rule of the language about what a formula means.
//!
//! Where something is wrong there is one finding, and the value is [`Value::Missing`], about which nothing more is said.

mod assumptions;
mod calls;
mod claims;
pub(crate) mod declarations;
mod items;
mod members;
mod motion;
mod parts;
pub(crate) mod products;
mod runs;
mod sums;
mod transformations;

use items::RunMeaning;
pub(crate) use items::{Lowered, Meaning, Part};

use crate::codes;
use crate::finding::{LocalFinding, Place};
use crate::scope::{Decl, Parsed, Scope, SymbolKind};
use crate::values::{Value, norm};
use leastwise_algebra::{Arena, Budget, Expr, Function, Rational, Role, Stopped};
use leastwise_grammar::tree::*;
use std::collections::{HashMap, HashSet};
use std::sync::Arc;

/// Families and sums of more members than this stay symbolic.
pub(crate) const UNROLLED: i64 = 64;
/// Formulas are nested at most so deeply, definitions that are expanded included.
const MAX_LEVEL: u32 = 600;
/// Vectors have at most so many components.
const MAX_COMPONENTS: usize = 256;
/// Numbers are kept exactly up to so many digits.
const MAX_DIGITS: usize = 2000;

/// What is known of a definition, kept as long as neither it nor what it needs changes.
#[derive(Default)]
pub(crate) struct Definition {
    /// Its value, for a plain one.
    pub value: Option<Value>,
    /// Values of members of a family, and of calls.
    pub calls: HashMap<(Option<Expr>, Vec<Value>), Value>,
    /// What is wrong with it.
    pub findings: Vec<LocalFinding>,
    /// When it was last used.
    pub generation: u64,
}

/// The definitions, by fingerprint.
pub(crate) type Definitions = HashMap<u64, Definition>;

/// What the claims know of the Lagrangian.
#[derive(Clone, Copy)]
pub(crate) struct Motion<'a> {
    /// L in additive parts with their signs.
    pub parts: &'a [(Expr, i64)],
}

/// A symbolic index with its bounds, which may name the indices outside of it.
#[derive(Clone, Copy)]
struct OpenIndex {
    symbol: Expr,
    lower: Expr,
    upper: Expr,
}

/// A name that is bound by a formal argument or a sum.
struct Binding {
    name: Arc<str>,
    value: Value,
    index: bool,
}

/// Where findings in another item's formula are reported: at the place that made it be read.
struct Foreign {
    /// The place in the item that is lowered.
    call: Span,
    /// The definition whose formula is read.
    name: Arc<str>,
}

/// Lowers the formulas of one item.
pub(crate) struct Lowerer<'a> {
    pub arena: &'a mut Arena,
    pub scope: &'a Scope,
    pub sources: &'a [Option<Arc<Parsed>>],
    pub definitions: &'a mut Definitions,
    pub budget: &'a mut Budget,
    pub motion: Option<Motion<'a>>,
    pub findings: Vec<LocalFinding>,
    said: HashSet<(&'static str, Span)>,
    epsilon: bool,
    /// Units are not looked at.
    own_units: bool,
    bindings: Vec<Binding>,
    /// Bindings before this one belong to other items' formulas.
    base: usize,
    open: Vec<OpenIndex>,
    foreign: Vec<Foreign>,
    level: u32,
    /// The outermost formula that is being lowered.
    whole: Span,
    stopped: bool,
    failed: bool,
}

impl<'a> Lowerer<'a> {
    pub fn new(
        arena: &'a mut Arena,
        scope: &'a Scope,
        sources: &'a [Option<Arc<Parsed>>],
        definitions: &'a mut Definitions,
        budget: &'a mut Budget,
    ) -> Lowerer<'a> {
        Lowerer {
            arena,
            scope,
            sources,
            definitions,
            budget,
            motion: None,
            findings: Vec::new(),
            said: HashSet::new(),
            epsilon: false,
            own_units: false,
            bindings: Vec::new(),
            base: 0,
            open: Vec::new(),
            foreign: Vec::new(),
            level: 0,
            whole: Span::default(),
            stopped: false,
            failed: false,
        }
    }

    /// Adds a finding, once per place; one in another item's formula lies at the place that made it be read.
    fn report(&mut self, mut finding: LocalFinding) {
        self.failed |= finding.severity == Severity::Error;
        if let Some(outer) = self.foreign.first() {
            if finding.severity != Severity::Error {
                return;
            }
            let inner = self.foreign.last().unwrap_or(outer);
            let place = Place::Declaring(inner.name.clone(), finding.span);
            let (span, name) = (outer.call, inner.name.clone());
            finding.related.clear();
            finding.fixes.clear();
            finding = finding.related(place, format!("in `{name}`"));
            finding.message = format!("{}, in `{name}`", finding.message);
            finding.span = span;
        }
        if self.said.insert((finding.code, finding.span)) {
            self.findings.push(finding);
        }
    }

    fn error(&mut self, code: &'static str, span: Span, message: impl Into<String>) -> Value {
        self.report(LocalFinding::error(code, span, message));
        Value::Missing
    }

    /// Ends the item: it is too large. Only one finding says so, on the whole formula where no part is to blame.
    fn stop(&mut self, why: Stopped, span: Span) -> Value {
        if !self.stopped {
            self.stopped = true;
            self.foreign.clear();
            let span = if why == Stopped::FreeIndex { span } else { self.whole };
            let message = match why {
                Stopped::TooDeep => "this is nested too deeply to be derived",
                Stopped::Cancelled => "the derivation was cancelled",
                Stopped::FreeIndex => "a member of a large family at a symbolic index cannot be told apart here",
                Stopped::TooLarge => "this is too large to be derived",
            };
            self.report(
                LocalFinding::error(codes::TOO_LARGE, span, message)
                    .help("the rest of the model is derived without it"),
            );
        }
        Value::Missing
    }

    fn checked(&mut self, result: Result<Value, Stopped>, span: Span) -> Value {
        match result {
            Ok(v) => v,
            Err(why) => self.stop(why, span),
        }
    }

    fn charge(&mut self, nodes: usize, span: Span) -> bool {
        if self.stopped {
            return false;
        }
        if let Err(why) = self.budget.charge(nodes) {
            self.stop(why, span);
            return false;
        }
        true
    }

    /// How much copying a value costs: the summands of its sums.
    fn width(&self, value: &Value) -> usize {
        match value {
            Value::Scalar(e) => breadth(self.arena, *e),
            Value::Missing => 1,
            Value::Vector(v) => v.items.iter().map(|x| self.width(x)).sum(),
        }
    }

    /// The value where it exists; a finding at the smallest formula where it does not.
    fn existing(&mut self, e: Expr, span: Span) -> Value {
        if e == Arena::UNDEFINED {
            return self.error(codes::DIVISION_BY_ZERO, span, "this has no value: it divides by zero");
        }
        Value::Scalar(e)
    }

    /// The value of a formula. Recursion is bounded by the nesting limit and by [`MAX_LEVEL`].
    pub fn lower(&mut self, f: &Formula) -> Value {
        if self.level == 0 {
            self.whole = f.span;
        }
        if !self.charge(1, f.span) {
            return Value::Missing;
        }
        if self.level >= MAX_LEVEL {
            return self.stop(Stopped::TooDeep, f.span);
        }
        self.level += 1;
        let value = match &f.kind {
            FormulaKind::Number(n) => self.number(n, f.span),
            FormulaKind::Name(name) => self.name(name, f.span),
            FormulaKind::Prime { base, order } => self.prime(base, *order, f.span),
            FormulaKind::Index { base, indices } => self.index(base, indices, f.span),
            FormulaKind::Call { .. } => self.call(f, None),
            FormulaKind::Neg(inner) => self.negative(inner),
            FormulaKind::Add(..) | FormulaKind::Sub(..) => self.sum_of(f),
            FormulaKind::Mul { .. } | FormulaKind::Div(..) => self.product_of(f),
            FormulaKind::Pow(base, exponent) => self.power(base, exponent, f.span),
            FormulaKind::Tuple(items) => self.tuple(items, f.span),
            FormulaKind::Bars(inner) => self.bars(inner, f.span),
            FormulaKind::Sum { index, range, body } => self.sum(index, range.as_ref(), body, f.span),
            FormulaKind::Paren(inner) => self.lower(inner),
            FormulaKind::Missing => {
                self.failed = true;
                Value::Missing
            }
        };
        self.level -= 1;
        value
    }

    /// The number that a formula stands for; a finding where it is a vector.
    pub fn scalar(&mut self, f: &Formula, what: &str) -> Option<Expr> {
        let value = self.lower(f);
        match value.shape() {
            Some(crate::values::Shape::Number) => value.scalar(),
            Some(shape) => {
                self.error(codes::NOT_A_NUMBER, f.span, format!("{what} is a number, and this is {shape}"));
                None
            }
            None => None,
        }
    }

    fn number(&mut self, n: &Number, span: Span) -> Value {
        match Rational::from_decimal(&n.digits, n.exponent, MAX_DIGITS) {
            Some(r) => Value::Scalar(self.arena.number(r)),
            None => self.error(codes::TOO_LARGE, span, "this number is too long to be kept exactly"),
        }
    }

    fn binding(&self, name: &str) -> Option<&Binding> {
        self.bindings[self.base..].iter().rev().find(|b| &*b.name == name)
    }

    fn name(&mut self, name: &str, span: Span) -> Value {
        if let Some(bound) = self.binding(name) {
            return bound.value.clone();
        }
        match name {
            "t" => {
                let t = leastwise_mechanics::model::time(self.arena);
                return Value::Scalar(self.arena.sym(t));
            }
            "π" => return Value::Scalar(self.arena.pi()),
            "ex" | "ey" | "ez" => {
                let at = ["ex", "ey", "ez"].iter().position(|n| *n == name);
                return Value::numbers((0..3).map(|k| if Some(k) == at { Arena::ONE } else { Arena::ZERO }));
            }
            "ε" if self.epsilon && self.foreign.is_empty() => {
                let e = leastwise_mechanics::model::epsilon(self.arena);
                return Value::Scalar(self.arena.sym(e));
            }
            "energy" if self.motion.is_some() && self.foreign.is_empty() => return self.energy(span),
            _ => {}
        }
        let Some(decl) = self.scope.get(name) else {
            self.failed = true;
            return Value::Missing;
        };
        if decl.failed {
            self.failed = true;
            return Value::Missing;
        }
        match decl.kind {
            SymbolKind::Index => {
                let (message, help) =
                    (format!("the index `{name}` is free here"), format!("sum over it: sum({name}: …)"));
                self.report(LocalFinding::error(codes::FREE_INDEX, span, message).help(help));
                Value::Missing
            }
            SymbolKind::Function => self.without_arguments(decl, span),
            SymbolKind::Definition if !decl.formals.is_empty() => self.without_arguments(decl, span),
            _ if decl.is_family() => {
                let index = decl.index.as_ref().map_or("i", |i| i.text.as_str());
                let finding = LocalFinding::error(
                    codes::FAMILY_WITHOUT_INDEX,
                    span,
                    format!("`{name}` has members, and none is chosen"),
                )
                .help(format!("write `{name}[{index}]` inside a sum over {index}, or a number for the index"));
                let inner = self.bindings[self.base..].iter().rev().find(|b| b.index).map(|b| b.name.clone());
                let end = Span { start: span.end, end: span.end };
                self.report(match inner {
                    Some(i) => finding.fix(format!("write {name}[{i}]"), end, format!("[{i}]")),
                    None => finding,
                });
                Value::Missing
            }
            SymbolKind::Definition => {
                let value = self.definitions.get(&decl.fingerprint).and_then(|d| d.value.clone());
                let value = value.unwrap_or(Value::Missing);
                self.failed |= value.is_missing();
                value
            }
            kind => {
                let symbol = self.arena.symbol(name, None, role(kind));
                Value::Scalar(self.arena.sym(symbol))
            }
        }
    }

    fn without_arguments(&mut self, decl: &Decl, span: Span) -> Value {
        let (name, formals) = (&decl.name, decl.formals.join(", "));
        let message = format!("the function `{name}` stands here without its arguments");
        let finding = LocalFinding::error(codes::FUNCTION_WITHOUT_ARGUMENTS, span, message)
            .help(format!("write {name}({formals}), with parentheses"))
            .related(Place::Declaration(name.clone()), format!("`{name}` is declared here"));
        self.report(finding);
        Value::Missing
    }

    fn prime(&mut self, base: &Formula, order: u32, span: Span) -> Value {
        let value = self.lower(base);
        if value.is_missing() {
            return Value::Missing;
        }
        if is_number(base) {
            let help = "a number does not change; is a name missing?";
            self.report(LocalFinding::error(codes::PRIME_OF_NUMBER, span, "this differentiates a number").help(help));
            return Value::Missing;
        }
        let mut out = value;
        for _ in 0..order {
            let arena = &mut *self.arena;
            let budget = &mut *self.budget;
            let result = out.map(&mut |e| arena.total(e, budget));
            out = self.checked(result, span);
            if out.is_missing() {
                return out;
            }
            if out.flat().iter().all(|e| *e == Arena::ZERO) {
                break;
            }
        }
        let constant = order > 0 && out.flat().iter().all(|e| *e == Arena::ZERO);
        if constant && self.constant_name(base).is_some_and(|d| d.kind != SymbolKind::Undeclared && !d.disputed) {
            let name = self.constant_name(base).map(|d| d.name.clone()).unwrap_or_default();
            let finding = LocalFinding::new(
                codes::PRIME_OF_CONSTANT,
                Severity::Hint,
                span,
                format!("`{name}` does not depend on time: its derivative is zero"),
            );
            self.report(match &base.kind {
                FormulaKind::Name(name) => finding.fix(format!("write {name} without its prime"), span, name.clone()),
                _ => finding,
            });
        }
        out
    }

    /// The declared name that is differentiated.
    fn constant_name(&self, base: &Formula) -> Option<&'a Decl> {
        match &base.kind {
            FormulaKind::Name(name) if self.binding(name).is_none() => self.scope.get(name),
            FormulaKind::Index { base, .. } | FormulaKind::Paren(base) => self.constant_name(base),
            _ => None,
        }
    }

    fn negative(&mut self, inner: &Formula) -> Value {
        let value = self.lower(inner);
        let arena = &mut *self.arena;
        let result = value.map(&mut |e| Ok(arena.neg(e)));
        self.checked(result, inner.span)
    }

    fn power(&mut self, base: &Formula, exponent: &Formula, span: Span) -> Value {
        let (b, e) = (self.lower(base), self.lower(exponent));
        if let Some(shape) = e.shape().filter(|s| *s != crate::values::Shape::Number) {
            return self.error(
                codes::NOT_A_NUMBER,
                exponent.span,
                format!("an exponent is a number, and this is {shape}"),
            );
        }
        match b.shape() {
            Some(crate::values::Shape::Number) => {}
            Some(shape) => return self.power_of_vector(base, exponent, span, shape),
            None => return Value::Missing,
        }
        let (Some(x), Some(n)) = (b.scalar(), e.scalar()) else { return Value::Missing };
        let e = self.arena.power(x, n);
        self.existing(e, span)
    }

    fn tuple(&mut self, items: &[Formula], span: Span) -> Value {
        if items.len() > MAX_COMPONENTS {
            return self.error(codes::TOO_LARGE, span, format!("a vector has at most {MAX_COMPONENTS} components"));
        }
        let values: Vec<Value> = items.iter().map(|i| self.lower(i)).collect();
        if values.iter().any(Value::is_missing) {
            return Value::Missing;
        }
        let first = values[0].shape();
        if let Some(k) = values.iter().position(|v| v.shape() != first) {
            let message = match (first, values[k].shape()) {
                (Some(a), Some(b)) => format!("the first component is {a}, this is {b}"),
                _ => "the components have different shapes".to_owned(),
            };
            return self.error(codes::SHAPE_MISMATCH, items[k].span, message);
        }
        if matches!(first, Some(crate::values::Shape::Matrix(..))) {
            return self.error(
                codes::SHAPE_MISMATCH,
                span,
                "the components of a vector are numbers, or vectors for a matrix",
            );
        }
        Value::vector(values)
    }

    fn bars(&mut self, inner: &Formula, span: Span) -> Value {
        let value = self.lower(inner);
        self.norm_of(value, span, true)
    }

    /// The norm of a vector, the absolute value of a number.
    fn norm_of(&mut self, value: Value, span: Span, number: bool) -> Value {
        match value.shape() {
            None => Value::Missing,
            Some(crate::values::Shape::Number) if number => {
                let Some(e) = value.scalar() else { return Value::Missing };
                Value::Scalar(self.arena.call(Function::Abs, &[e]))
            }
            Some(crate::values::Shape::Vector(n)) => {
                if !self.charge(n, span) {
                    return Value::Missing;
                }
                let components = value.components().unwrap_or_default();
                Value::Scalar(norm(self.arena, &components))
            }
            Some(shape) => {
                self.error(codes::SHAPE_MISMATCH, span, format!("the length of a vector is meant, and this is {shape}"))
            }
        }
    }
}

/// The role of a symbol of this kind.
pub(crate) fn role(kind: SymbolKind) -> Role {
    match kind {
        SymbolKind::Coordinate => Role::Coordinate,
        SymbolKind::Input => Role::Input,
        SymbolKind::Index => Role::Index,
        SymbolKind::Function => Role::Function,
        SymbolKind::Parameter | SymbolKind::Undeclared | SymbolKind::Definition => Role::Parameter,
    }
}

fn is_number(f: &Formula) -> bool {
    match &f.kind {
        FormulaKind::Number(_) => true,
        FormulaKind::Paren(inner) | FormulaKind::Neg(inner) => is_number(inner),
        _ => false,
    }
}

/// How many entries the topmost node has: what it costs to copy it.
pub(crate) fn breadth(arena: &Arena, e: Expr) -> usize {
    match arena.node(e) {
        leastwise_algebra::Node::Sum(_, list) | leastwise_algebra::Node::Product(list) => list.len(),
        _ => 1,
    }
}

impl Lowerer<'_> {
    /// Adds a finding about how a formula was read.
    pub(crate) fn hint(&mut self, finding: LocalFinding) {
        self.report(finding);
    }

    /// Whether a formal argument or an index hides the declared name.
    pub(crate) fn is_bound(&self, name: &str) -> bool {
        self.binding(name).is_some()
    }
}
