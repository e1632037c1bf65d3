//! Items to their meaning: terms, forces, constraints, transformations, claims, runs.

use super::Lowerer;
use crate::codes;
use crate::finding::{Change, LocalFinding, LocalFix, Place};
use crate::scope::{Parsed, SymbolKind};
use crate::values::{Shape, Value};
use leastwise_algebra::{Arena, Expr};
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
    },
    Dissipation {
        parts: Vec<Part>,
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
        self.own_units = dimensionless;
        let meaning = match &parsed.item.kind {
            ItemKind::Parameter(list) => Some(self.values(list, dimensionless)),
            _ => self.meaning(&parsed.item),
        };
        let failed = meaning.is_none();
        self.offer_sums(parsed);
        Lowered { meaning: meaning.unwrap_or(Meaning::Nothing), findings: self.findings, failed }
    }

    /// At a free index the mend is a sum over the summand that it stands in.
    fn offer_sums(&mut self, parsed: &Parsed) {
        let (ItemKind::Term { body, .. }
        | ItemKind::Dissipation { body, .. }
        | ItemKind::Force { body, .. }
        | ItemKind::Conserved { body, .. }) = &parsed.item.kind
        else {
            return;
        };
        let list = super::products::summands(body);
        let point = |at: u32| Span { start: at, end: at };
        for finding in self.findings.iter_mut().filter(|f| f.code == codes::FREE_INDEX) {
            let holds = |s: &Span| s.start <= finding.span.start && finding.span.end <= s.end;
            let named = parsed.uses.names.iter().find(|u| u.spans.contains(&finding.span));
            let Some(index) = named.map(|u| &u.name) else { continue };
            if let Some(whole) = list.iter().map(|(_, f)| f.span).find(holds) {
                let edits = vec![(point(whole.start), format!("sum({index}: ")), (point(whole.end), ")".to_owned())];
                let title = format!("sum over {index}");
                finding.fixes.push(LocalFix { title, change: Change::Edits(edits) });
            }
        }
    }

    fn meaning(&mut self, item: &Item) -> Option<Meaning> {
        match &item.kind {
            ItemKind::Term { kind, body, .. } => {
                let (kind, what) = match kind {
                    TermKind::Kinetic => (Kind::Kinetic, "a kinetic energy"),
                    TermKind::Potential => (Kind::Potential, "a potential energy"),
                    TermKind::Lagrangian => (Kind::Lagrangian, "a term of the Lagrangian"),
                };
                let parts = self.energy_parts(body, what)?;
                Some(Meaning::Term { kind, parts })
            }
            ItemKind::Dissipation { body, .. } => {
                let parts = self.energy_parts(body, "a dissipation function")?;
                Some(Meaning::Dissipation { parts })
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
    fn energy_parts(&mut self, body: &Formula, what: &str) -> Option<Vec<Part>> {
        let parts = self.parts(body, what)?;
        self.without_accelerations(&parts, what).then_some(parts)
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
        let linear = pairs.iter().all(|(e, _)| self.linear_in_velocities(*e, on.span, "what a force acts on"));
        if !linear || !self.without_accelerations(&parts, "a force") {
            return None;
        }
        Some(Meaning::Force { pairs, parts })
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
            if !self.linear_in_velocities(f, left.span.to(right.span), "a constraint") {
                return None;
            }
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

    fn conserved(&mut self, body: &Formula) -> Option<Meaning> {
        let value = self.lower(body);
        let shape = value.shape()?;
        if shape == Shape::Number {
            let parts = self.parts(body, "a claimed constant")?;
            if !self.without_accelerations(&parts, "a claimed constant") {
                return None;
            }
            return Some(Meaning::Conserved(vec![(String::new(), value.scalar()?, parts)]));
        }
        let claims = value
            .flat()
            .into_iter()
            .enumerate()
            .map(|(k, expr)| (format!("[{}]", k + 1), expr, vec![Part { expr, span: body.span }]));
        Some(Meaning::Conserved(claims.collect()))
    }
}
