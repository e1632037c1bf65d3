//! Runs: initial values, duration, stopping condition, signals.

use super::{Lowerer, Meaning, RunMeaning};
use crate::codes;
use crate::finding::LocalFinding;
use crate::values::Value;
use leastwise_algebra::{Arena, Expr, Node, Role};
use leastwise_grammar::tree::*;

impl Lowerer<'_> {
    pub(super) fn run(
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
            self.initial_unit(atom, order.unwrap_or(0), number, value);
            out.from.push((atom, number, value.unit.clone(), what.span));
        }
        if let Some(value) = over {
            let number = self.constant(&value.number);
            let dimension = value.unit.as_ref().filter(|_| !self.own_units).and_then(crate::quantities::dimension);
            if let (Some(unit), Some(d)) = (&value.unit, dimension)
                && d != [0, 0, 60, 0, 0, 0, 0]
            {
                self.error(codes::UNIT_MISMATCH, unit.span, "a run goes over a time, and this is no unit of time");
            }
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

    /// The unit of an initial value fits its coordinate, per time for a velocity.
    fn initial_unit(&mut self, atom: Expr, order: u16, number: Expr, value: &leastwise_grammar::tree::Value) {
        let (Node::Symbol(s) | Node::Jet(s, _)) = *self.arena.node(atom) else { return };
        let info = self.arena.info(s).clone();
        let Some(mut dimension) = self.scope.get(&info.name).and_then(|d| d.dimension).filter(|_| !self.own_units)
        else {
            return;
        };
        dimension[2] -= 60 * order as i64;
        let name = if order == 0 { info.name.to_string() } else { format!("{}'", info.name) };
        self.unit_of(&name, "", Some(dimension), number == Arena::ZERO, value);
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
}
