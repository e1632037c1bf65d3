//! Items to their meaning: terms, forces, constraints, transformations, claims, runs.

use super::{Lowerer, UNROLLED};
use crate::codes;
use crate::finding::{LocalFinding, Place};
use crate::scope::{Parsed, SymbolKind};
use crate::values::{Shape, Value};
use leastwise_algebra::{Arena, Expr, Node, Role};
use leastwise_grammar::tree::*;
use leastwise_mechanics::model::{Image, TermKind as Kind};

/// A family of constraints has at most so many members.
const MAX_CONSTRAINTS: i64 = 1000;

/// An additive part with its place in the item.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) struct Part {
    pub expr: Expr,
    pub span: Span,
}

/// A run.
#[derive(Clone, PartialEq, Debug)]
pub(crate) struct RunMeaning {
    /// A coordinate or velocity, its value, its unit.
    pub from: Vec<(Expr, Expr, Option<UnitText>, Span)>,
    pub over: Option<(Expr, Option<UnitText>)>,
    /// The difference of the two sides, compared with zero.
    pub until: Option<(Expr, Relation)>,
    /// An input, or a function at its formal arguments, and its formula.
    pub with: Vec<(Expr, Expr)>,
}

/// What an item means.
#[derive(Clone, PartialEq, Debug)]
pub(crate) enum Meaning {
    /// Nothing beyond names.
    Nothing,
    Term {
        kind: Kind,
        parts: Vec<Part>,
        written: Expr,
    },
    Dissipation {
        parts: Vec<Part>,
        written: Expr,
    },
    Force {
        pairs: Vec<(Expr, Expr)>,
        parts: Vec<Part>,
    },
    /// Each with the suffix of its name.
    Constraint(Vec<(String, Expr)>),
    /// The difference of the two sides, compared with zero.
    Assume(Vec<(Expr, Relation, Span)>),
    Symmetry(Vec<(Image, Span)>),
    /// The values of the names that a `parameter` item declares: numbers, unit.
    Values(Vec<Option<(Vec<Expr>, Option<UnitText>)>>),
    /// Each with the suffix of its name.
    Conserved(Vec<(String, Expr, Vec<Part>)>),
    Run(RunMeaning),
}

/// What was found out about an item.
#[derive(Debug)]
pub(crate) struct Lowered {
    pub meaning: Meaning,
    pub findings: Vec<LocalFinding>,
    /// Whether it has no meaning because something is wrong.
    pub failed: bool,
}

impl<'a> Lowerer<'a> {
    /// The meaning of an item that is no declaration.
    pub fn item(mut self, parsed: &Parsed, dimensionless: bool) -> Lowered {
        let meaning = match &parsed.item.kind {
            ItemKind::Parameter(list) => Some(self.values(list, dimensionless)),
            _ => self.meaning(&parsed.item),
        };
        let failed = meaning.is_none();
        Lowered { meaning: meaning.unwrap_or(Meaning::Nothing), findings: self.findings, failed }
    }

    fn meaning(&mut self, item: &Item) -> Option<Meaning> {
        match &item.kind {
            ItemKind::Term { kind, body, .. } => {
                let (kind, what) = match kind {
                    TermKind::Kinetic => (Kind::Kinetic, "a kinetic energy"),
                    TermKind::Potential => (Kind::Potential, "a potential energy"),
                    TermKind::Lagrangian => (Kind::Lagrangian, "a term of the Lagrangian"),
                };
                let (parts, written) = self.energy_parts(body, what)?;
                Some(Meaning::Term { kind, parts, written })
            }
            ItemKind::Dissipation { body, .. } => {
                let (parts, written) = self.energy_parts(body, "a dissipation function")?;
                Some(Meaning::Dissipation { parts, written })
            }
            ItemKind::Force { on, body, .. } => self.force(on, body),
            ItemKind::Constraint { declared, left, right } => self.constraint(declared.as_ref(), left, right),
            ItemKind::Assume(list) => self.assume(list),
            ItemKind::Symmetry { arrows, .. } => {
                self.epsilon = true;
                self.symmetry(arrows)
            }
            ItemKind::Conserved { body, .. } => self.conserved(body),
            ItemKind::Run { from, over, until, with, .. } => self.run(from, over.as_ref(), until.as_ref(), with),
            _ => Some(Meaning::Nothing),
        }
        .filter(|_| !self.failed)
    }

    /// The parts of a formula, and the formula as written.
    fn energy_parts(&mut self, body: &Formula, what: &str) -> Option<(Vec<Part>, Expr)> {
        let parts = self.parts(body, what)?;
        let written = match parts.as_slice() {
            [one] => one.expr,
            _ => self.scalar(body, what)?,
        };
        Some((parts, written))
    }

    fn force(&mut self, on: &Formula, body: &Formula) -> Option<Meaning> {
        let (target, force) = (self.lower(on), self.lower(body));
        let (a, b) = (target.shape()?, force.shape()?);
        if a != b || matches!(a, Shape::Matrix(..)) {
            let message = format!("the force is {b}, what it acts on is {a}");
            let finding = LocalFinding::error(codes::SHAPE_MISMATCH, body.span, message)
                .help("a vector force acts on a vector, a number on a number")
                .related(Place::Here(on.span), format!("this is {a}"));
            self.report(finding);
            return None;
        }
        let pairs: Vec<(Expr, Expr)> = target.flat().into_iter().zip(force.flat()).collect();
        if !pairs.iter().any(|(e, _)| self.moves(*e)) {
            let finding = LocalFinding::error(
                codes::FORCE_TARGET,
                on.span,
                "a force acts on a coordinate, and this does not move",
            )
            .help("write a coordinate, or a quantity made from coordinates");
            self.report(finding);
            return None;
        }
        let parts = match pairs.as_slice() {
            [_] => self.parts(body, "a force")?,
            _ => pairs.iter().map(|(_, f)| Part { expr: *f, span: body.span }).collect(),
        };
        Some(Meaning::Force { pairs, parts })
    }

    /// Whether an expression names a coordinate or velocity.
    fn moves(&self, e: Expr) -> bool {
        self.arena.atoms(e).into_iter().any(|a| match *self.arena.node(a) {
            Node::Symbol(s) | Node::Jet(s, _) => self.arena.info(s).role == Role::Coordinate,
            Node::Member { family, .. } => self.arena.info(family).role == Role::Coordinate,
            _ => false,
        })
    }

    fn constraint(&mut self, declared: Option<&Declared>, left: &Formula, right: &Formula) -> Option<Meaning> {
        let mut out = Vec::new();
        match declared.and_then(|d| d.index.as_ref()) {
            None => self.equation("", left, right, &mut out)?,
            Some(index) => {
                let (lower, upper) = self.index_range(index)?;
                if upper - lower >= MAX_CONSTRAINTS {
                    let message = format!("a family of constraints has at most {MAX_CONSTRAINTS} members");
                    self.error(codes::TOO_LARGE, index.span, message);
                    return None;
                }
                for k in lower..=upper {
                    self.with_index(&index.text, k, |l| l.equation(&format!("[{k}]"), left, right, &mut out))?;
                }
            }
        }
        Some(Meaning::Constraint(out))
    }

    /// left − right, component by component.
    fn equation(&mut self, suffix: &str, left: &Formula, right: &Formula, out: &mut Vec<(String, Expr)>) -> Option<()> {
        let (a, b) = (self.lower(left), self.lower(right));
        let (sa, sb) = (a.shape()?, b.shape()?);
        // `P = 0` says that each component is zero.
        let b = if b == Value::Scalar(Arena::ZERO) && sa != Shape::Number {
            Value::numbers(a.flat().iter().map(|_| Arena::ZERO))
        } else if sa == sb {
            b
        } else {
            let finding = LocalFinding::error(
                codes::SHAPE_MISMATCH,
                right.span,
                format!("the left side is {sa}, the right side is {sb}"),
            )
            .related(Place::Here(left.span), format!("this is {sa}"));
            self.report(finding);
            return None;
        };
        let (a, b) = (a.flat(), b.flat());
        let single = a.len() == 1;
        for (k, (x, y)) in a.into_iter().zip(b).enumerate() {
            let f = self.arena.sub(x, y);
            let suffix = if single { suffix.to_owned() } else { format!("{suffix}[{}]", k + 1) };
            out.push((suffix, f));
        }
        Some(())
    }

    fn index_range(&mut self, index: &Name) -> Option<(i64, i64)> {
        let range =
            self.scope.get(&index.text).filter(|d| d.kind == SymbolKind::Index && !d.failed).and_then(|d| d.range);
        self.failed |= range.is_none();
        range
    }

    fn assume(&mut self, list: &[Comparison]) -> Option<Meaning> {
        let mut out = Vec::new();
        for comparison in list {
            // Indices that are free here run over their whole range.
            let mut free: Vec<String> = Vec::new();
            let formulas = std::iter::once(&comparison.first).chain(comparison.rest.iter().map(|(_, f)| f));
            for name in formulas.flat_map(crate::uses::names_in) {
                if self.scope.get(&name).is_some_and(|d| d.kind == SymbolKind::Index) && !free.contains(&name) {
                    free.push(name);
                }
            }
            self.for_all(&free, &mut |l| l.compare(comparison, &mut out))?;
        }
        Some(Meaning::Assume(out))
    }

    fn compare(&mut self, comparison: &Comparison, out: &mut Vec<(Expr, Relation, Span)>) -> Option<()> {
        let mut left = &comparison.first;
        let mut a = self.scalar(left, "what is compared")?;
        for (relation, right) in &comparison.rest {
            let b = self.scalar(right, "what is compared")?;
            let span = left.span.to(right.span);
            if *relation == Relation::Equal {
                let finding =
                    LocalFinding::error(codes::ASSUMED_EQUALITY, span, "an assumption compares with <, ≤, >, ≥ or ≠")
                        .help("for an equality write a definition: let a = b");
                self.report(finding);
                return None;
            }
            let difference = self.arena.sub(a, b);
            if let Some(r) = self.arena.as_number(difference) {
                let sign = r.signum();
                let holds = match relation {
                    Relation::Less => sign < 0,
                    Relation::LessEqual => sign <= 0,
                    Relation::Greater => sign > 0,
                    Relation::GreaterEqual => sign >= 0,
                    Relation::NotEqual => sign != 0,
                    Relation::Equal => sign == 0,
                };
                if !holds {
                    self.error(codes::CONTRADICTION, span, "this assumption cannot hold");
                    return None;
                }
            } else {
                out.push((difference, *relation, span));
            }
            (left, a) = (right, b);
        }
        Some(())
    }

    /// Does something for all values of these indices: one by one in small ranges, once with the index open in large ones.
    fn for_all(&mut self, names: &[String], f: &mut dyn FnMut(&mut Self) -> Option<()>) -> Option<()> {
        let Some((name, rest)) = names.split_first() else { return f(self) };
        let (lower, upper) = self.scope.get(name).and_then(|d| d.range)?;
        if upper - lower < UNROLLED {
            for k in lower..=upper {
                self.with_index(name, k, |l| l.for_all(rest, f))?;
            }
            return Some(());
        }
        let symbol = self.arena.symbol(name, None, Role::Index);
        let e = self.arena.sym(symbol);
        let bounds = (self.arena.integer(lower), self.arena.integer(upper));
        self.with_open(name, e, bounds, |l| l.for_all(rest, f))
    }

    fn conserved(&mut self, body: &Formula) -> Option<Meaning> {
        let value = self.lower(body);
        let shape = value.shape()?;
        if shape == Shape::Number {
            let parts = self.parts(body, "a claimed constant")?;
            return Some(Meaning::Conserved(vec![(String::new(), value.scalar()?, parts)]));
        }
        let claims = value
            .flat()
            .into_iter()
            .enumerate()
            .map(|(k, expr)| (format!("[{}]", k + 1), expr, vec![Part { expr, span: body.span }]));
        Some(Meaning::Conserved(claims.collect()))
    }

    fn symmetry(&mut self, arrows: &[Arrow]) -> Option<Meaning> {
        let mut images: Vec<(Image, Span)> = Vec::new();
        let mut ok = true;
        for arrow in arrows {
            for (source, target) in arrow.sources.iter().zip(&arrow.targets) {
                ok &= self.image(source, target, &mut images).is_some();
            }
        }
        if !ok {
            return None;
        }
        Some(Meaning::Symmetry(images))
    }

    /// The image of one coordinate, of `t`, or of all members of a family.
    fn image(&mut self, source: &Formula, target: &Formula, images: &mut Vec<(Image, Span)>) -> Option<()> {
        let (base, index) = match &source.kind {
            FormulaKind::Index { base, indices } if indices.len() == 1 => (&**base, Some(&indices[0])),
            FormulaKind::Paren(inner) => return self.image(inner, target, images),
            _ => (source, None),
        };
        let FormulaKind::Name(name) = &base.kind else {
            self.failed = true;
            return None;
        };
        if name == "t" && index.is_none() {
            let t = leastwise_mechanics::model::time(self.arena);
            let t = self.arena.sym(t);
            return self.push_image(t, source, target, images);
        }
        let decl = self.scope.get(name)?;
        if decl.kind == SymbolKind::Undeclared || decl.failed {
            self.failed = true;
            return None;
        }
        if decl.kind != SymbolKind::Coordinate {
            let message =
                format!("`{name}` is {}: a transformation changes coordinates and the time", decl.kind.described());
            let finding = LocalFinding::error(codes::NOT_A_COORDINATE, source.span, message)
                .help("what is made from coordinates changes with them")
                .related(Place::Declaration(decl.name.clone()), format!("`{name}` is declared here"));
            self.report(finding);
            return None;
        }
        // A free index: all members. For a large family the image holds at the family's own index.
        let free = index.and_then(|i| match &i.kind {
            FormulaKind::Name(n) if self.scope.get(n).is_some_and(|d| d.kind == SymbolKind::Index) => Some(n),
            _ => None,
        });
        let (Some(free), Some((lower, upper)), Some(own)) = (free, decl.range, &decl.index) else {
            let e = self.lower(source).scalar()?;
            return self.push_image(e, source, target, images);
        };
        let (a, b) = self.scope.get(free).and_then(|d| d.range)?;
        if a < lower || b > upper {
            let message = format!("`{free}` runs from {a} to {b}, the index of `{name}` from {lower} to {upper}");
            let place = Place::Declaration(decl.name.clone());
            self.report(
                LocalFinding::error(codes::INDEX_OUT_OF_RANGE, source.span, message)
                    .related(place, format!("`{name}` is declared here")),
            );
            return None;
        }
        if upper - lower < UNROLLED {
            for k in a..=b {
                self.with_index(free, k, |l| {
                    let e = l.lower(source).scalar()?;
                    l.push_image(e, source, target, images)
                })?;
            }
            return Some(());
        }
        if (a, b) != (lower, upper) {
            let message = format!("a transformation of a family of more than {UNROLLED} members changes all of them");
            self.error(codes::TOO_LARGE, source.span, message);
            return None;
        }
        let symbol = self.arena.symbol(&own.text, None, Role::Index);
        let e = self.arena.sym(symbol);
        let bounds = (self.arena.integer(lower), self.arena.integer(upper));
        self.with_open(free, e, bounds, |l| {
            let e = l.lower(source).scalar()?;
            l.push_image(e, source, target, images)
        })
    }

    fn push_image(
        &mut self,
        e: Expr,
        source: &Formula,
        target: &Formula,
        images: &mut Vec<(Image, Span)>,
    ) -> Option<()> {
        if let Some((_, first)) = images.iter().find(|(image, _)| image.source == e) {
            let first = *first;
            let finding = LocalFinding::error(codes::TRANSFORMED_TWICE, source.span, "this is transformed twice")
                .help("a transformation names each coordinate once")
                .related(Place::Here(first), "here first");
            self.report(finding);
            return None;
        }
        let target = self.scalar(target, "the image of a coordinate")?;
        images.push((Image { source: e, target }, source.span));
        Some(())
    }

    fn run(
        &mut self,
        from: &[(Formula, leastwise_grammar::tree::Value)],
        over: Option<&leastwise_grammar::tree::Value>,
        until: Option<&Comparison>,
        with: &[(Formula, Formula)],
    ) -> Option<Meaning> {
        let mut out = RunMeaning { from: Vec::new(), over: None, until: None, with: Vec::new() };
        for (what, value) in from {
            let atom = self.scalar(what, "an initial value's coordinate");
            let number = self.constant(&value.number);
            let (Some(atom), Some(number)) = (atom, number) else { continue };
            let order = match *self.arena.node(atom) {
                Node::Symbol(s) if self.arena.info(s).role == Role::Coordinate => Some(0),
                Node::Jet(s, n) if self.arena.info(s).role == Role::Coordinate => Some(n),
                _ => None,
            };
            if order.is_none_or(|n| n > 1) {
                let declared =
                    crate::uses::names_in(what).iter().all(|n| self.scope.get(n).is_some_and(|d| d.entry.is_some()));
                if declared {
                    let finding = LocalFinding::error(
                        codes::NOT_A_COORDINATE,
                        what.span,
                        "a run begins from coordinates and velocities",
                    )
                    .help(
                        "formulas of inputs and functions stand behind `with`; a parameter's value in its declaration",
                    );
                    self.report(finding);
                }
                self.failed = true;
                continue;
            }
            if out.from.iter().any(|f| f.0 == atom) {
                self.error(codes::RUN_VALUE, what.span, "this initial value is given twice");
                continue;
            }
            out.from.push((atom, number, value.unit.clone(), what.span));
        }
        if let Some(value) = over {
            let number = self.constant(&value.number);
            if let Some(n) = number {
                if self.arena.as_number(n).is_some_and(|r| r.signum() <= 0) {
                    self.error(codes::RUN_VALUE, value.span, "a run goes over a time longer than zero");
                }
                out.over = Some((n, value.unit.clone()));
            }
        }
        if let Some(until) = until {
            let mut list = Vec::new();
            let a = self.scalar(&until.first, "what is compared");
            if let (Some(a), [(relation, right)]) = (a, until.rest.as_slice()) {
                let b = self.scalar(right, "what is compared")?;
                list.push((self.arena.sub(a, b), *relation));
            } else if until.rest.len() > 1 {
                self.error(codes::RUN_VALUE, until.first.span, "a stopping condition is one comparison");
            }
            out.until = list.pop();
        }
        for (what, formula) in with {
            if let Some(pair) = self.signal(what, formula) {
                out.with.push(pair);
            }
        }
        Some(Meaning::Run(out))
    }

    /// `u = F cos(Ω t)`, `U(s) = 1/2 k s^2`.
    fn signal(&mut self, what: &Formula, formula: &Formula) -> Option<(Expr, Expr)> {
        let before = self.bindings.len();
        let target = match &what.kind {
            FormulaKind::Call { args, .. } => {
                for arg in args {
                    let Some(name) = crate::uses::plain_name(arg) else {
                        self.error(codes::RUN_VALUE, arg.span, "the arguments here are names: U(s) = …");
                        return None;
                    };
                    let symbol = self.arena.symbol(name, None, if name == "t" { Role::Time } else { Role::Formal });
                    let value = Value::Scalar(self.arena.sym(symbol));
                    if name != "t" {
                        self.bindings.push(super::Binding { name: name.into(), value, index: false });
                    }
                }
                self.scalar(what, "a function")
            }
            _ => self.scalar(what, "an input"),
        };
        let value = self.scalar(formula, "a signal");
        self.bindings.truncate(before);
        let (target, value) = (target?, value?);
        let fits = match *self.arena.node(target) {
            Node::Symbol(s) => self.arena.info(s).role == Role::Input,
            Node::Unspecified { .. } => true,
            _ => false,
        };
        if !fits {
            let declared =
                crate::uses::names_in(what).iter().all(|n| self.scope.get(n).is_some_and(|d| d.entry.is_some()));
            if declared {
                let finding = LocalFinding::error(
                    codes::RUN_VALUE,
                    what.span,
                    "behind `with` stand formulas of inputs and functions",
                )
                .help("initial values of coordinates stand behind `from`");
                self.report(finding);
            }
            self.failed = true;
            return None;
        }
        Some((target, value))
    }

    /// The number of a value: arithmetic without names.
    pub fn constant(&mut self, f: &Formula) -> Option<Expr> {
        let e = self.scalar(f, "a value")?;
        if self.arena.atoms(e).is_empty() {
            return Some(e);
        }
        self.error(codes::VALUE_NUMBER, f.span, "a value is a number");
        None
    }
}

impl<'a> Lowerer<'a> {
    /// Checks a definition, and gives its value where it is a plain one. Of a family each member is looked at.
    pub fn definition(&mut self, decl: &'a crate::scope::Decl) -> Option<Value> {
        let source = self.sources.get(decl.entry?)?.clone()?;
        let ItemKind::Let { body, .. } = &source.item.kind else { return None };
        // The shapes of the arguments are known at the calls only.
        for formal in &decl.formals {
            self.bindings.push(super::Binding { name: formal.clone(), value: Value::Missing, index: false });
        }
        let value = match (&decl.index, decl.range) {
            (Some(index), Some((lower, upper))) if upper - lower < UNROLLED => {
                for k in lower..=upper {
                    let value = self.with_index(&index.text, k, |l| l.lower(body));
                    if self.failed || self.stopped {
                        break;
                    }
                    let at = self.arena.integer(k);
                    if decl.formals.is_empty()
                        && let Some(d) = self.definitions.get_mut(&decl.fingerprint)
                    {
                        d.calls.insert((Some(at), Vec::new()), value);
                    }
                }
                None
            }
            (Some(index), Some((lower, upper))) => {
                let symbol = self.arena.symbol(&index.text, None, Role::Index);
                let e = self.arena.sym(symbol);
                let bounds = (self.arena.integer(lower), self.arena.integer(upper));
                self.with_open(&index.text, e, bounds, |l| l.lower(body));
                None
            }
            (Some(_), None) => None,
            (None, _) => Some(self.lower(body)).filter(|_| decl.formals.is_empty()),
        };
        self.bindings.clear();
        value
    }

    /// A whole number.
    pub fn whole_number(&mut self, f: &Formula) -> Option<i64> {
        let value = self.lower(f);
        if value.is_missing() {
            return None;
        }
        let n = value.scalar().and_then(|e| self.arena.as_i64(e));
        if n.is_none() {
            let finding = LocalFinding::error(
                codes::SUM_RANGE,
                f.span,
                "the range of an index goes from a whole number to a whole number",
            )
            .help("write numbers, or an integer definition such as let N = 8");
            self.report(finding);
        }
        n
    }

    /// The values of parameters, with what is wrong in them.
    fn values(&mut self, list: &[Declaration], dimensionless: bool) -> Meaning {
        let mut out = Vec::with_capacity(list.len());
        for (k, d) in list.iter().enumerate() {
            let shared = k > 0 && d.value == list[k - 1].value;
            out.push(d.value.as_ref().and_then(|v| self.parameter_value(d, v, dimensionless, shared)));
        }
        Meaning::Values(out)
    }

    fn parameter_value(
        &mut self,
        d: &Declaration,
        value: &leastwise_grammar::tree::Value,
        dimensionless: bool,
        shared: bool,
    ) -> Option<(Vec<Expr>, Option<UnitText>)> {
        let numbers = match &value.number.kind {
            FormulaKind::Tuple(items) => {
                let range = d.declared.index.as_ref().and_then(|i| self.scope.get(&i.text)).and_then(|d| d.range);
                let members = range.map(|(a, b)| b - a + 1);
                match (&d.declared.index, members) {
                    (None, _) => {
                        let message = format!("`{}` is one parameter and has one value", d.declared.name.text);
                        let finding = LocalFinding::error(codes::FAMILY_VALUES, value.number.span, message)
                            .help(format!("a family has an index: parameter {}[i] = (…)", d.declared.name.text));
                        self.report(finding);
                        return None;
                    }
                    (Some(_), Some(n)) if n != items.len() as i64 => {
                        let message = format!(
                            "`{}` has {n} members, and here stand {} values",
                            d.declared.name.text,
                            items.len()
                        );
                        self.error(codes::FAMILY_VALUES, value.number.span, message);
                        return None;
                    }
                    _ => items.iter().map(|f| self.constant(f)).collect::<Option<Vec<_>>>()?,
                }
            }
            FormulaKind::Missing => return None,
            _ => vec![self.constant(&value.number)?],
        };
        let alone = d.quantity.as_ref().filter(|q| q.factors.len() == 1 && q.factors[0].exponent == (1, 1));
        let dimension = alone.and_then(|q| crate::quantities::quantity(&q.factors[0].symbol.text));
        let dimensioned = match &d.quantity {
            None => false,
            Some(q) => dimension.map_or_else(
                || {
                    q.factors
                        .iter()
                        .any(|f| crate::quantities::unit(&f.symbol.text).is_some_and(|d| d != crate::quantities::ONE))
                },
                |d| d != crate::quantities::ONE,
            ),
        };
        let zero = numbers.iter().all(|n| *n == Arena::ZERO);
        if dimensioned && value.unit.is_none() && !zero && !dimensionless && !shared {
            let name = d.quantity.as_ref().map_or("", |q| q.factors[0].symbol.text.as_str());
            let message = match dimension {
                Some(_) => format!("`{}` is {} {name}: its value needs a unit", d.declared.name.text, article(name)),
                None => format!("the value of `{}` needs a unit", d.declared.name.text),
            };
            let finding = LocalFinding::error(codes::MISSING_UNIT, value.span, message)
                .help("write the unit behind the number, or name the system `dimensionless`");
            self.report(finding);
        }
        Some((numbers, value.unit.clone()))
    }
}

fn article(name: &str) -> &'static str {
    if name.starts_with(['a', 'e', 'i', 'o', 'u']) { "an" } else { "a" }
}
