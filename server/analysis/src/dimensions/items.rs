//! What each item asks of its formulas: a term is an energy, two sides of a constraint are alike.

use super::size::Size;
use super::walk::{Walk, time};
use super::{Asked, Key, Why};
use crate::scope::{Parsed, Scope};
use leastwise_grammar::tree::*;
use leastwise_quantities::unify::Form;
use leastwise_quantities::{Dimension, Exponent};
use std::collections::HashMap;
use std::sync::Arc;

/// What an item asks, in unknowns of its own numbering.
pub(super) fn ask(
    scope: &Scope,
    sources: &[Arc<Parsed>],
    shapes: &HashMap<Arc<str>, Size>,
    parsed: &Parsed,
    on_velocities: bool,
) -> Asked {
    let mut walk = Walk::new(scope, sources, shapes);
    let mut shape = Size::Open;
    match &parsed.item.kind {
        ItemKind::Term { kind, body, .. } => {
            let what = match kind {
                TermKind::Kinetic => "a kinetic term",
                TermKind::Potential => "a potential term",
                TermKind::Lagrangian => "a term of L",
            };
            let energy = walk.energy();
            walk.is(body, energy, what);
        }
        ItemKind::Dissipation { body, .. } => {
            let power = walk.energy().over(&Size::Number(time()));
            walk.is(body, power, "a dissipation function");
        }
        ItemKind::Force { on, body, .. } => {
            let (on_size, size) = (walk.size(on), walk.size(body));
            let energy = walk.energy();
            let what = if on_velocities { energy.over(&Size::Number(time())) } else { energy };
            let firm = is_sum(body);
            for (on_size, size) in on_size.flat().into_iter().zip(size.flat()) {
                let asked = what.over(on_size);
                walk.alike(size, &asked, firm, &Why::Force { span: body.span, on: on.span, velocities: on_velocities });
            }
        }
        ItemKind::Constraint { left, right, .. } => walk.sides(left, right),
        ItemKind::Assume(list) => list.iter().for_each(|c| walk.comparison(c)),
        ItemKind::Symmetry { arrows, .. } => {
            walk.with_epsilon();
            for (source, target) in arrows.iter().flat_map(|a| a.sources.iter().zip(&a.targets)) {
                let (a, b) = (walk.size(source), walk.size(target));
                walk.alike(&b, &a, is_sum(target), &Why::Image { span: target.span, source: source.span });
            }
        }
        ItemKind::Conserved { body, .. } => {
            walk.size(body);
        }
        ItemKind::Run { until, with, .. } => {
            with.iter().for_each(|(left, right)| walk.given(left, right));
            until.iter().for_each(|c| walk.comparison(c));
        }
        ItemKind::Let { declared, formals, body } => {
            let names: Vec<Arc<str>> = formals.iter().map(|f| f.text.as_str().into()).collect();
            let sizes = names.iter().map(|_| Size::Number(walk.fresh())).collect();
            walk.bind(&names, sizes);
            let size = walk.size(body);
            if formals.is_empty() {
                let name: Arc<str> = declared.name.text.as_str().into();
                let own = walk.shaped(&name, &size, &mut 0);
                walk.defined(body, &size, &own, &name);
                shape = size;
            }
        }
        _ => {}
    }
    walk.places.sort_by_key(|(span, _)| (span.start, std::cmp::Reverse(span.end)));
    walk.places.dedup_by_key(|(span, _)| *span);
    let declared = declared(parsed);
    Asked { keys: walk.keys, wishes: walk.wishes, places: walk.places, declared, shape: outline(&shape) }
}

/// The shape without its unknowns, which are the item's own.
fn outline(size: &Size) -> Size {
    match size {
        Size::Vector(list) => Size::Vector(list.iter().map(outline).collect()),
        Size::Number(_) => Size::one(),
        other => other.clone(),
    }
}

/// A formula without parentheses around it.
fn unwrapped(f: &Formula) -> &Formula {
    match &f.kind {
        FormulaKind::Paren(inner) => unwrapped(inner),
        _ => f,
    }
}

/// Whether a formula is a sum: then each summand can be at fault, and not the whole.
fn is_sum(f: &Formula) -> bool {
    match &f.kind {
        FormulaKind::Add(..) | FormulaKind::Sub(..) => true,
        FormulaKind::Paren(inner) | FormulaKind::Neg(inner) => is_sum(inner),
        FormulaKind::Sum { body, .. } => is_sum(body),
        _ => false,
    }
}

impl Walk<'_> {
    /// A formula has a dimension that is known.
    fn is(&mut self, body: &Formula, asked: Size, what: &'static str) {
        let size = self.size(body);
        self.alike(&size, &asked, is_sum(body), &Why::Is { span: body.span, what });
    }

    /// Two sides are alike. A side that is zero is of any dimension.
    fn sides(&mut self, left: &Formula, right: &Formula) {
        let (a, b) = (self.size(left), self.size(right));
        if a == Size::Zero || b == Size::Zero {
            return;
        }
        let firm = is_sum(left) && is_sum(right);
        self.alike(&b, &a, firm, &Why::Sides { span: right.span, left: left.span });
    }

    /// A name is what its definition is: as a whole, and of a vector each component.
    fn defined(&mut self, body: &Formula, size: &Size, own: &Size, name: &Arc<str>) {
        let why = |span: Span| Why::Definition { span, name: name.clone() };
        let (Size::Vector(sizes), Size::Vector(owns)) = (size, own) else {
            self.alike(size, own, is_sum(body), &why(body.span));
            return;
        };
        // One factor may be wrong in all components.
        let whole = Size::Number(self.fresh());
        self.alike(&whole, &Size::one(), is_sum(body), &why(body.span));
        let written = match &unwrapped(body).kind {
            FormulaKind::Tuple(items) if items.len() == sizes.len() => Some(items),
            _ => None,
        };
        for (k, (size, own)) in sizes.iter().zip(owns).enumerate() {
            let part = written.map(|w| &w[k]);
            let firm = part.is_none_or(is_sum);
            self.alike(&size.over(&whole), own, firm, &why(part.map_or(body.span, |p| p.span)));
        }
    }

    /// `U(s) = …`: the formula of an unspecified function, in arguments that are named here.
    fn given(&mut self, left: &Formula, right: &Formula) {
        let called = match &left.kind {
            FormulaKind::Index { base, .. } => base,
            _ => left,
        };
        let mut names: Vec<Arc<str>> = Vec::new();
        let mut sizes = Vec::new();
        if let FormulaKind::Call { function, args, .. } = &called.kind {
            for (k, arg) in args.iter().enumerate() {
                let FormulaKind::Name(name) = &arg.kind else { continue };
                names.push(name.as_str().into());
                sizes.push(Size::Number(self.unknown(Key::Argument(function.text.as_str().into(), k as u32))));
            }
        }
        let bound = self.bind(&names, sizes);
        self.sides(left, right);
        self.unbind(bound);
    }

    fn comparison(&mut self, c: &Comparison) {
        let mut left = &c.first;
        for (_, right) in &c.rest {
            self.sides(left, right);
            left = right;
        }
    }
}

/// What the declarations of an item say: the name, what it is, where it says so.
fn declared(parsed: &Parsed) -> Vec<(Arc<str>, Dimension, Span)> {
    let dimension = |unit: &UnitText| crate::quantities::dimension(unit).and_then(exact);
    let mut out = Vec::new();
    let mut say = |name: &Name, unit: Option<&UnitText>| {
        if let Some((unit, d)) = unit.and_then(|u| Some((u, dimension(u)?))) {
            out.push((name.text.as_str().into(), d, unit.span));
        }
    };
    match &parsed.item.kind {
        ItemKind::Coordinate { declared, quantity, .. } | ItemKind::Input { declared, quantity } => {
            declared.iter().for_each(|d| say(&d.name, quantity.as_ref()));
        }
        ItemKind::Parameter(list) => {
            for d in list {
                let unit = d.value.as_ref().and_then(|v| v.unit.as_ref());
                say(&d.declared.name, d.quantity.as_ref().or(unit));
            }
        }
        ItemKind::Function { declared, quantity, .. } => say(&declared.name, quantity.as_ref()),
        _ => {}
    }
    out
}

/// Whether an item may say what names are.
pub(super) fn declares(kind: &ItemKind) -> bool {
    matches!(
        kind,
        ItemKind::Coordinate { .. } | ItemKind::Input { .. } | ItemKind::Parameter(_) | ItemKind::Function { .. }
    )
}

/// From exponents in sixtieths.
fn exact(sixtieths: [i64; 7]) -> Option<Dimension> {
    let mut out = [Exponent::ZERO; 7];
    for (e, n) in out.iter_mut().zip(sixtieths) {
        *e = Exponent::new(n, 60)?;
    }
    Some(Dimension::new(out))
}

/// The number that an unspecified function has as its argument where it is a function of the time alone is the time.
pub(super) fn of_time(names: &[Arc<str>]) -> Option<Form> {
    matches!(names, [one] if &**one == "t").then(time)
}
