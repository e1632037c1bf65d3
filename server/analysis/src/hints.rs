//! Where a formula may have been meant otherwise than it is read.

use crate::codes;
use crate::finding::{LocalFinding, Place};
use crate::lower::Lowerer;
use crate::scope::{Decl, SymbolKind};
use leastwise_grammar::tree::*;

impl Lowerer<'_> {
    /// `cos Ω t` is (cos Ω) t, which is seldom meant when Ω is a parameter.
    pub(crate) fn function_of_parameter(&mut self, left: &Formula, right: &Formula) {
        let FormulaKind::Call { function, args, parenthesised: false, .. } = &left.kind else { return };
        let [argument] = args.as_slice() else { return };
        let name = match &argument.kind {
            FormulaKind::Name(name) => name,
            FormulaKind::Index { base, .. } => match &base.kind {
                FormulaKind::Name(name) => name,
                _ => return,
            },
            _ => return,
        };
        if matches!(function.text.as_str(), "sqrt" | "abs" | "sign" | "norm" | "spin" | "transpose" | "momentum") {
            return;
        }
        let parameter = self.declared(name).is_some_and(|d| d.kind == SymbolKind::Parameter && !d.angle);
        if !parameter || !is_operand_of_function(right) {
            return;
        }
        let message = format!("`{} {name}` is read first, and multiplied by what follows", function.text);
        let end = right.span.end;
        let open = Span { start: function.span.end, end: argument.span.start };
        let close = Span { start: end, end };
        let alone = Span { start: argument.span.end, end: argument.span.end };
        let finding =
            LocalFinding::new(codes::READ_FUNCTION_OF_PARAMETER, Severity::Warning, left.span.to(right.span), message)
                .help("put the whole argument in parentheses, or the function before the product")
                .fixes("put both into the argument", vec![(open, "(".into()), (close, ")".into())])
                .fixes(format!("put `{name}` alone in parentheses"), vec![(open, "(".into()), (alone, ")".into())]);
        self.hint(finding);
    }

    /// `θ(t)`: a coordinate depends on time already, a parameter does not. Whether the two are no product.
    pub(crate) fn called_name(&mut self, left: &Formula, right: &Formula) -> bool {
        let FormulaKind::Paren(inner) = &right.kind else { return false };
        let touches = left.span.end == right.span.start;
        let of_time = matches!(&inner.kind, FormulaKind::Name(n) if n == "t");
        let of_number = touches && matches!(&inner.kind, FormulaKind::Number(_));
        if !of_time && !of_number {
            return false;
        }
        let Some((name, primed)) = called(left) else { return false };
        let Some(decl) = self.declared(name) else { return false };
        let (name, kind, known) = (decl.name.clone(), decl.kind, decl.entry.is_some());
        let moves = matches!(kind, SymbolKind::Coordinate | SymbolKind::Input | SymbolKind::Definition);
        if of_number && !(moves || primed) || kind == SymbolKind::Function || kind == SymbolKind::Index {
            return false;
        }
        let whole = left.span.to(right.span);
        if !known {
            // The finding about the undeclared name says what to do.
            return true;
        }
        let (message, help) = match kind {
            _ if of_number => (
                format!("`{name}` at a point of time has no value in a formula"),
                "initial values stand in a `run`; for a product write `·`".to_owned(),
            ),
            SymbolKind::Parameter => (
                format!("the parameter `{name}` is a constant, not a function of time"),
                format!("a signal of time is an `input {name}`; for a product write {name} t"),
            ),
            _ => (
                format!("`{name}` depends on time already: write {name}"),
                format!("{} needs no argument", kind.described()),
            ),
        };
        let mut finding = LocalFinding::error(codes::CALLED_NAME, whole, message)
            .help(help)
            .related(Place::Declaration(name.clone()), format!("`{name}` is declared here as {}", kind.described()))
            .fix(format!("write {name} alone"), right.span, "");
        let before = Span { start: left.span.end, end: right.span.start };
        if of_number {
            finding = finding.fix("write the product with `·`", before, "·");
        } else if kind == SymbolKind::Parameter {
            finding = finding.fix(format!("write the product {name} t"), before.to(right.span), " t");
        }
        self.hint(finding);
        true
    }

    fn declared(&self, name: &str) -> Option<&Decl> {
        if self.is_bound(name) { None } else { self.scope.get(name) }
    }
}

/// The name in `θ`, `θ[i]`, `θ'`, and whether it is differentiated.
fn called(f: &Formula) -> Option<(&str, bool)> {
    match &f.kind {
        FormulaKind::Name(name) => Some((name, false)),
        FormulaKind::Index { base, .. } => called(base),
        FormulaKind::Prime { base, .. } => called(base).map(|(name, _)| (name, true)),
        _ => None,
    }
}

/// Whether a factor may have been meant as part of the argument before it: a name, with index and primes.
fn is_operand_of_function(f: &Formula) -> bool {
    match &f.kind {
        FormulaKind::Name(_) => true,
        FormulaKind::Index { base, .. } => is_operand_of_function(base),
        FormulaKind::Pow(base, _) => is_operand_of_function(base),
        _ => false,
    }
}
