//! The dimension of each sub-formula of an item, and what is asked of them: that summands are alike, that arguments of
//! functions are numbers.

use super::size::Size;
use super::{Key, Why, Wish};
use crate::lower::products::{Operator, factors, summands};
use crate::scope::{Decl, Parsed, Scope, SymbolKind};
use leastwise_grammar::tree::*;
use leastwise_quantities::unify::Form;
use leastwise_quantities::{Base, Dimension, Exponent};
use std::collections::HashMap;
use std::sync::Arc;

/// Formulas are nested at most so deeply, definitions that are expanded included.
const MAX_LEVEL: u32 = 600;
/// An item visits at most so many formulas, definitions that are expanded included.
const MAX_VISITS: usize = 100_000;

/// A second, as a dimension.
pub(super) fn time() -> Form {
    Dimension::of(Base::Time).into()
}

/// A bound name: a formal argument with its size.
struct Binding {
    name: Arc<str>,
    size: Size,
}

/// Walks the formulas of one item.
pub(super) struct Walk<'a> {
    scope: &'a Scope,
    sources: &'a [Arc<Parsed>],
    shapes: &'a HashMap<Arc<str>, Size>,
    /// The unknowns of the item, by number.
    pub keys: Vec<Key>,
    numbers: HashMap<Key, usize>,
    locals: u32,
    /// What is asked.
    pub wishes: Vec<Wish>,
    /// The forms of sub-formulas.
    pub places: Vec<(Span, Form)>,
    bindings: Vec<Binding>,
    base: usize,
    /// How often a formal argument was read.
    read: usize,
    /// In a definition that is called: where, its name.
    calls: Vec<(Span, Arc<str>)>,
    level: u32,
    visits: usize,
    epsilon: Option<Size>,
}

impl<'a> Walk<'a> {
    pub fn new(scope: &'a Scope, sources: &'a [Arc<Parsed>], shapes: &'a HashMap<Arc<str>, Size>) -> Walk<'a> {
        Walk {
            scope,
            sources,
            shapes,
            keys: Vec::new(),
            numbers: HashMap::new(),
            locals: 0,
            wishes: Vec::new(),
            places: Vec::new(),
            bindings: Vec::new(),
            base: 0,
            read: 0,
            calls: Vec::new(),
            level: 0,
            visits: 0,
            epsilon: None,
        }
    }

    pub fn unknown(&mut self, key: Key) -> Form {
        let next = self.keys.len();
        let number = *self.numbers.entry(key.clone()).or_insert(next);
        if number == next {
            self.keys.push(key);
        }
        Form::unknown(number)
    }

    /// The dimension of L.
    pub fn energy(&mut self) -> Size {
        Size::Number(self.unknown(Key::Lagrangian))
    }

    /// An unknown of the item's own.
    pub fn fresh(&mut self) -> Form {
        self.locals += 1;
        self.unknown(Key::Local(self.locals))
    }

    /// ε, in transformations.
    pub fn with_epsilon(&mut self) {
        let form = self.fresh();
        self.epsilon = Some(Size::Number(form));
    }

    /// Binds formal arguments. How many names were bound before.
    pub fn bind(&mut self, names: &[Arc<str>], sizes: Vec<Size>) -> usize {
        let before = self.bindings.len();
        self.bindings.extend(names.iter().cloned().zip(sizes).map(|(name, size)| Binding { name, size }));
        before
    }

    /// Takes bindings back.
    pub fn unbind(&mut self, before: usize) {
        self.bindings.truncate(before);
    }

    /// Asks that two sizes are alike, component by component.
    pub fn alike(&mut self, a: &Size, b: &Size, firm: bool, why: &Why) {
        match (a, b) {
            (Size::Vector(x), Size::Vector(y)) if x.len() == y.len() => {
                for (x, y) in x.iter().zip(y) {
                    self.alike(x, y, firm, why);
                }
            }
            (Size::Number(x), Size::Number(y)) => {
                if let Some(gap) = x.over(y).filter(|gap| *gap != Form::one()) {
                    let why = match self.calls.first() {
                        Some((span, name)) => Why::Call { span: *span, name: name.clone() },
                        None => why.clone(),
                    };
                    self.wishes.push(Wish { gap, firm: firm && self.calls.is_empty(), why });
                }
            }
            _ => {}
        }
    }

    /// The same, of a definition that is called only where an argument is involved: of itself it asks in its own item.
    fn ask(&mut self, before: usize, a: &Size, b: &Size, why: Why) {
        if self.calls.is_empty() || self.read > before {
            // Of products that are added without being written none can be at fault alone.
            let firm = matches!(why, Why::Components { .. });
            self.alike(a, b, firm, &why);
        }
    }

    fn number(&mut self, before: usize, size: &Size, why: Why) {
        self.ask(before, size, &Size::one(), why);
    }

    pub fn size(&mut self, f: &Formula) -> Size {
        self.visits += 1;
        if self.level >= MAX_LEVEL || self.visits > MAX_VISITS {
            return Size::Open;
        }
        self.level += 1;
        let size = self.kind(f);
        self.level -= 1;
        // Numbers are what they are.
        let literal = matches!(f.kind, FormulaKind::Number(_));
        if let (Size::Number(form), true) = (&size, self.calls.is_empty() && !literal) {
            self.places.push((f.span, form.clone()));
        }
        size
    }

    fn kind(&mut self, f: &Formula) -> Size {
        match &f.kind {
            FormulaKind::Number(n) if n.digits == "0" => Size::Zero,
            FormulaKind::Number(_) => Size::one(),
            FormulaKind::Name(name) => self.name(name),
            FormulaKind::Prime { base, order } => {
                let size = self.size(base);
                size.times_power(&Size::Number(time()), inverse(*order))
            }
            FormulaKind::Index { base, indices } => self.member(base, indices),
            FormulaKind::Call { function, derivative, power, args, .. } => {
                let size = self.call(function, derivative, args, f.span);
                match power {
                    Some(power) => self.raised(size, power),
                    None => size,
                }
            }
            FormulaKind::Neg(inner) | FormulaKind::Paren(inner) => self.size(inner),
            FormulaKind::Add(..) | FormulaKind::Sub(..) => self.sum(f),
            FormulaKind::Mul { .. } | FormulaKind::Div(..) => self.product(f),
            FormulaKind::Pow(base, exponent) => {
                let size = self.size(base);
                self.raised(size, exponent)
            }
            FormulaKind::Tuple(items) => Size::Vector(items.iter().map(|i| self.size(i)).collect()),
            FormulaKind::Bars(inner) => {
                let before = self.read;
                let size = self.size(inner);
                self.norm(before, size, inner.span)
            }
            FormulaKind::Sum { range, body, .. } => {
                for f in range.iter().flat_map(|(a, b)| [&**a, &**b]) {
                    self.size(f);
                }
                self.size(body)
            }
            FormulaKind::Missing => Size::Open,
        }
    }

    fn name(&mut self, name: &str) -> Size {
        if let Some(b) = self.bindings[self.base..].iter().rev().find(|b| &*b.name == name) {
            self.read += 1;
            return b.size.clone();
        }
        match name {
            "t" => return Size::Number(time()),
            "π" => return Size::one(),
            "ex" | "ey" | "ez" => {
                let at = ["ex", "ey", "ez"].iter().position(|n| *n == name);
                return Size::Vector((0..3).map(|k| if Some(k) == at { Size::one() } else { Size::Zero }).collect());
            }
            "ε" if self.calls.is_empty() => {
                if let Some(e) = &self.epsilon {
                    return e.clone();
                }
            }
            // The claims' word for the energy function.
            "energy" if self.scope.get(name).is_none() => return self.energy(),
            _ => {}
        }
        let Some(decl) = self.scope.get(name) else {
            // An index that a sum binds.
            return Size::one();
        };
        self.declared(decl)
    }

    fn declared(&mut self, decl: &Decl) -> Size {
        match decl.kind {
            SymbolKind::Index => Size::one(),
            _ if decl.failed => Size::Open,
            SymbolKind::Definition if decl.formals.is_empty() => match self.shapes.get(&decl.name).cloned() {
                Some(shape) => self.shaped(&decl.name, &shape, &mut 0),
                None => Size::Open,
            },
            SymbolKind::Definition => Size::Open,
            _ => Size::Number(self.unknown(Key::Name(decl.name.clone(), 0))),
        }
    }

    /// The unknowns of a definition, in the shape of its formula.
    pub fn shaped(&mut self, name: &Arc<str>, shape: &Size, next: &mut u32) -> Size {
        match shape {
            Size::Vector(list) => Size::Vector(list.iter().map(|s| self.shaped(name, s, next)).collect()),
            Size::Number(_) => {
                *next += 1;
                Size::Number(self.unknown(Key::Name(name.clone(), *next - 1)))
            }
            Size::Zero => Size::Zero,
            Size::Open => Size::Open,
        }
    }

    /// Members of a family are alike; components of a vector have each their own.
    fn member(&mut self, base: &Formula, indices: &[Formula]) -> Size {
        for i in indices {
            self.size(i);
        }
        let family = match &base.kind {
            FormulaKind::Name(name) => {
                self.scope.get(name).is_some_and(|d| d.is_family() || d.kind == SymbolKind::Undeclared)
            }
            FormulaKind::Call { function, .. } => self.scope.get(&function.text).is_some_and(Decl::is_family),
            _ => false,
        };
        let size = self.size(base);
        indices[usize::from(family).min(indices.len())..].iter().fold(size, |size, i| match size {
            Size::Vector(mut list) => match whole(i) {
                Some(k) if k >= 1 && (k as usize) <= list.len() => list.swap_remove(k as usize - 1),
                _ => Size::Open,
            },
            _ => Size::Open,
        })
    }

    fn sum(&mut self, f: &Formula) -> Size {
        let list = summands(f);
        let mut sizes = Vec::with_capacity(list.len());
        let before = self.read;
        for (_, operand) in &list {
            sizes.push((self.size(operand), operand.span));
        }
        if sizes.iter().any(|(s, _)| *s == Size::Open) {
            // The others are still compared.
            sizes.retain(|(s, _)| *s != Size::Open);
        }
        let Some(first) = sizes.iter().map(|(s, _)| s).find(|s| **s != Size::Zero) else { return Size::Zero };
        if sizes.iter().filter(|(s, _)| *s != Size::Zero).count() == 1 {
            return first.clone();
        }
        let sum = self.like(&first.clone());
        for (size, span) in &sizes {
            self.ask(before, size, &sum, Why::Summand { span: *span, sum: f.span });
        }
        sum
    }

    /// Fresh unknowns in the shape of a size.
    pub fn like(&mut self, size: &Size) -> Size {
        match size {
            Size::Vector(list) => Size::Vector(list.iter().map(|s| self.like(s)).collect()),
            Size::Number(_) | Size::Zero => Size::Number(self.fresh()),
            Size::Open => Size::Open,
        }
    }

    fn product(&mut self, f: &Formula) -> Size {
        let mut out = Size::one();
        let before = self.read;
        for (operator, operand) in factors(f) {
            let size = self.size(operand);
            out = match (operator, &out, &size) {
                (Operator::Over, ..) => out.over(&size),
                (Operator::Times(Times::Cross), Size::Vector(_), Size::Vector(_)) => {
                    self.cross(before, &out, &size, f.span)
                }
                (_, Size::Vector(_), Size::Vector(_)) => self.contract(before, &out, &size, f.span),
                _ => out.times(&size),
            };
        }
        out
    }

    /// The size of a sum that is not written out.
    fn total(&mut self, before: usize, list: Vec<Size>, span: Span) -> Size {
        let there: Vec<Size> = list.into_iter().filter(|s| *s != Size::Zero).collect();
        match there.as_slice() {
            [] => Size::Zero,
            list if list.contains(&Size::Open) => Size::Open,
            [one] => one.clone(),
            [first, ..] => {
                // Alike already, as with most vectors.
                if there.iter().all(|s| s == first) {
                    return first.clone();
                }
                let sum = Size::Number(self.fresh());
                for s in &there {
                    self.ask(before, s, &sum, Why::Components { span });
                }
                sum
            }
        }
    }

    /// The dot product: of vectors, of matrices with either.
    fn contract(&mut self, before: usize, a: &Size, b: &Size, span: Span) -> Size {
        let (Size::Vector(x), Size::Vector(y)) = (a, b) else { return Size::Open };
        if let Some(Size::Vector(_)) = x.first() {
            return Size::Vector(x.iter().map(|row| self.contract(before, row, b, span)).collect());
        }
        if x.len() != y.len() {
            return Size::Open;
        }
        if let Some(Size::Vector(first)) = y.first() {
            let columns = (0..first.len()).map(|k| {
                let column = y.iter().map(|row| match row {
                    Size::Vector(row) => row.get(k).cloned().unwrap_or(Size::Open),
                    _ => Size::Open,
                });
                Size::Vector(column.collect())
            });
            let columns: Vec<Size> = columns.collect();
            return Size::Vector(columns.iter().map(|c| self.contract(before, a, c, span)).collect());
        }
        let products = x.iter().zip(y).map(|(x, y)| x.times(y)).collect();
        self.total(before, products, span)
    }

    fn cross(&mut self, before: usize, a: &Size, b: &Size, span: Span) -> Size {
        let (Size::Vector(x), Size::Vector(y)) = (a, b) else { return Size::Open };
        let mut minor = |i: usize, j: usize| self.total(before, vec![x[i].times(&y[j]), x[j].times(&y[i])], span);
        match (x.len(), y.len()) {
            (3, 3) => Size::Vector(vec![minor(1, 2), minor(2, 0), minor(0, 1)]),
            (2, 2) => minor(0, 1),
            _ => Size::Open,
        }
    }

    /// The norm of a vector, the absolute value of a number.
    fn norm(&mut self, before: usize, size: Size, span: Span) -> Size {
        match size {
            Size::Vector(list) => self.total(before, list, span),
            other => other,
        }
    }

    fn raised(&mut self, size: Size, exponent: &Formula) -> Size {
        let before = self.read;
        let of = self.size(exponent);
        match self.constant(exponent, 0) {
            Some(n) => size.power(n),
            None => {
                self.number(before, &of, Why::Exponent { span: exponent.span });
                match size {
                    Size::Number(f) if f == Form::one() => Size::one(),
                    // What comes out depends on the exponent's value.
                    Size::Number(_) => Size::Number(self.fresh()),
                    _ => Size::Open,
                }
            }
        }
    }

    /// The number that an exponent is, where it is one.
    fn constant(&self, f: &Formula, level: u32) -> Option<Exponent> {
        let next = |f: &Formula| self.constant(f, level + 1);
        match &f.kind {
            _ if level > 64 => None,
            FormulaKind::Number(n) => {
                let r = leastwise_algebra::Rational::from_decimal(&n.digits, n.exponent, 20)?;
                Exponent::from_rational(&r)
            }
            FormulaKind::Neg(inner) => next(inner).map(Exponent::negative),
            FormulaKind::Paren(inner) => next(inner),
            FormulaKind::Add(a, b) => next(a)?.plus(next(b)?),
            FormulaKind::Sub(a, b) => next(a)?.minus(next(b)?),
            FormulaKind::Mul { left, right, .. } => next(left)?.times(next(right)?),
            FormulaKind::Div(a, b) => next(a)?.over(next(b)?),
            FormulaKind::Name(name) if !self.bindings[self.base..].iter().any(|b| &*b.name == name.as_str()) => {
                let decl = self
                    .scope
                    .get(name)
                    .filter(|d| d.kind == SymbolKind::Definition && d.formals.is_empty() && !d.failed)?;
                match &self.sources.get(decl.entry?)?.item.kind {
                    ItemKind::Let { body, .. } => next(body),
                    _ => None,
                }
            }
            _ => None,
        }
    }
}

/// The exponent −n.
fn inverse(n: u32) -> Exponent {
    Exponent::whole(-(n.min(1000) as i16))
}

/// The whole number that is written here.
fn whole(f: &Formula) -> Option<i64> {
    match &f.kind {
        FormulaKind::Number(n) if n.exponent == 0 => n.digits.parse().ok(),
        FormulaKind::Paren(inner) => whole(inner),
        _ => None,
    }
}

// Calls.
impl<'a> Walk<'a> {
    fn call(&mut self, function: &Name, derivative: &Derivative, args: &[Formula], span: Span) -> Size {
        if leastwise_grammar::builtin(&function.text).is_some() {
            return self.builtin(&function.text, args, span);
        }
        let before = self.read;
        let sizes: Vec<Size> = args.iter().map(|a| self.size(a)).collect();
        let Some(decl) = self.scope.get(&function.text).filter(|d| !d.failed && d.formals.len() == args.len()) else {
            return Size::Open;
        };
        let orders = match derivative {
            Derivative::None => vec![0; args.len()],
            Derivative::Order(n) => vec![(*n).min(1000); args.len().min(1)],
            Derivative::Arguments(list) => {
                (1..=args.len()).map(|k| list.iter().filter(|&&at| at as usize == k).count() as u32).collect()
            }
        };
        let value = match decl.kind {
            SymbolKind::Function => {
                for (k, (size, arg)) in sizes.iter().zip(args).enumerate() {
                    let formal = Size::Number(self.unknown(Key::Argument(decl.name.clone(), k as u32)));
                    let why = Why::Argument { span: arg.span, function: decl.name.clone() };
                    self.ask(before, size, &formal, why);
                }
                Size::Number(self.unknown(Key::Name(decl.name.clone(), 0)))
            }
            SymbolKind::Definition => self.expand(decl, sizes.clone(), span),
            _ => return Size::Open,
        };
        sizes.iter().zip(orders).fold(value, |value, (size, n)| value.times_power(size, inverse(n)))
    }

    /// A definition with its arguments bound.
    fn expand(&mut self, decl: &Decl, args: Vec<Size>, span: Span) -> Size {
        let Some(source) = decl.entry.and_then(|e| self.sources.get(e).cloned()) else { return Size::Open };
        let ItemKind::Let { body, .. } = &source.item.kind else { return Size::Open };
        let base = std::mem::replace(&mut self.base, self.bindings.len());
        self.bind(&decl.formals, args);
        self.calls.push((span, decl.name.clone()));
        let size = self.size(body);
        self.calls.pop();
        self.bindings.truncate(self.base);
        self.base = base;
        size
    }

    fn builtin(&mut self, name: &str, args: &[Formula], span: Span) -> Size {
        let before = self.read;
        let sizes: Vec<Size> = args.iter().map(|a| self.size(a)).collect();
        let argument = |k: usize| Why::Argument { span: args[k].span, function: name.into() };
        match (name, sizes.as_slice()) {
            ("abs", [x]) => x.clone(),
            ("norm", [x]) => self.norm(before, x.clone(), span),
            ("sqrt", [x]) => x.power(Exponent::HALF),
            ("sign", [_]) => Size::one(),
            ("min" | "max" | "atan2", [first, ..]) => {
                let alike = self.like(first);
                for (k, s) in sizes.iter().enumerate() {
                    let why = Why::Summand { span: args[k].span, sum: span };
                    self.ask(before, s, &alike, why);
                }
                if name == "atan2" { Size::one() } else { alike }
            }
            ("dot", [a, b]) => self.contract(before, a, b, span),
            ("cross", [a, b]) => self.cross(before, a, b, span),
            ("transpose", [Size::Vector(rows)]) => {
                let width = rows.first().map_or(0, |r| r.flat().len());
                let column = |k: usize| {
                    let entry = |row: &Size| match row {
                        Size::Vector(row) => row.get(k).cloned().unwrap_or(Size::Open),
                        _ => Size::Open,
                    };
                    Size::Vector(rows.iter().map(entry).collect())
                };
                Size::Vector((0..width).map(column).collect())
            }
            ("diag", list) => {
                let row = |k: usize| (0..list.len()).map(move |j| if j == k { list[k].clone() } else { Size::Zero });
                Size::Vector((0..list.len()).map(|k| Size::Vector(row(k).collect())).collect())
            }
            ("turn", [axis, angle]) => {
                for s in axis.flat() {
                    self.number(before, s, argument(0));
                }
                self.number(before, angle, argument(1));
                Size::Vector(vec![Size::Vector(vec![Size::one(); 3]); 3])
            }
            ("spin", [turn]) => {
                for s in turn.flat() {
                    self.number(before, s, argument(0));
                }
                let rate = Size::one().over(&Size::Number(time()));
                Size::Vector(vec![rate; 3])
            }
            ("momentum", [q]) => {
                let action = self.energy().times(&Size::Number(time()));
                action.over(q)
            }
            // All others map numbers to numbers.
            (_, list) => {
                for (k, s) in list.iter().enumerate() {
                    self.number(before, s, argument(k));
                }
                Size::one()
            }
        }
    }
}
