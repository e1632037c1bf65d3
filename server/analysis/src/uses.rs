//! The names that an item mentions, found in its tree alone. What is bound in the item itself (formal arguments,
//! summation indices, ε in a transformation) is not among them.

use leastwise_grammar::tree::*;
use std::collections::HashMap;

/// A name that an item mentions.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Use {
    /// The folded name.
    pub name: String,
    /// Each place, in the order of the walk.
    pub spans: Vec<Span>,
    /// Whether it stands as a function.
    pub called: bool,
    /// Whether it is differentiated by time somewhere.
    pub primed: bool,
    /// Whether it stands as the index of a family or sum.
    pub index: bool,
}

/// What an item mentions.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Uses {
    /// Names that are declared elsewhere, each once.
    pub names: Vec<Use>,
    /// Whether it speaks of `energy` or `momentum(q)`, which depend on all terms.
    pub motion: bool,
}

/// The names that an item mentions.
pub fn uses(item: &Item) -> Uses {
    let mut walk = Walk::default();
    walk.item(&item.kind);
    walk.out
}

/// Whether a formula mentions this name freely.
pub fn mentions(formula: &Formula, name: &str) -> bool {
    let mut walk = Walk::default();
    walk.formula(formula);
    walk.places.contains_key(name)
}

/// The names that a formula mentions freely.
pub fn names_in(formula: &Formula) -> Vec<String> {
    let mut walk = Walk::default();
    walk.formula(formula);
    walk.out.names.into_iter().map(|u| u.name).collect()
}

#[derive(Default)]
struct Walk {
    out: Uses,
    places: HashMap<String, usize>,
    bound: Vec<String>,
    claims: bool,
}

#[derive(Clone, Copy, PartialEq)]
enum How {
    Plain,
    Called,
    Primed,
    Index,
}

/// Names that are never declared.
pub fn is_built_in(name: &str) -> bool {
    matches!(name, "t" | "π" | "ex" | "ey" | "ez")
}

impl Walk {
    fn name(&mut self, name: &str, span: Span, how: How) {
        if is_built_in(name) || self.bound.iter().any(|b| b == name) {
            return;
        }
        if self.claims && name == "energy" {
            self.out.motion = true;
            return;
        }
        let at = *self.places.entry(name.to_owned()).or_insert_with(|| {
            self.out.names.push(Use {
                name: name.to_owned(),
                spans: Vec::new(),
                called: false,
                primed: false,
                index: false,
            });
            self.out.names.len() - 1
        });
        let entry = &mut self.out.names[at];
        entry.spans.push(span);
        entry.called |= how == How::Called;
        entry.primed |= how == How::Primed;
        entry.index |= how == How::Index;
    }

    fn declared(&mut self, declared: &Declared) {
        if let Some(i) = &declared.index {
            self.name(&i.text, i.span, How::Index);
        }
    }

    fn with_bound(&mut self, names: impl IntoIterator<Item = String>, f: impl FnOnce(&mut Walk)) {
        let before = self.bound.len();
        self.bound.extend(names);
        f(self);
        self.bound.truncate(before);
    }

    fn item(&mut self, kind: &ItemKind) {
        match kind {
            ItemKind::System { .. } | ItemKind::Include { .. } | ItemKind::Broken => {}
            ItemKind::Coordinate { declared, .. } | ItemKind::Input { declared, .. } => {
                declared.iter().for_each(|d| self.declared(d));
            }
            ItemKind::Parameter(list) => list.iter().for_each(|d| self.declared(&d.declared)),
            ItemKind::Index { lower, upper, .. } => {
                self.formula(lower);
                self.formula(upper);
            }
            ItemKind::Let { declared, formals, body } => {
                self.declared(declared);
                let bound = formals.iter().chain(&declared.index).map(|n| n.text.clone());
                self.with_bound(bound.collect::<Vec<_>>(), |w| w.formula(body));
            }
            ItemKind::Function { declared, .. } => self.declared(declared),
            ItemKind::Assume(list) => list.iter().for_each(|c| self.comparison(c)),
            ItemKind::Term { body, .. } | ItemKind::Dissipation { body, .. } => self.formula(body),
            ItemKind::Force { on, body, .. } => {
                self.formula(on);
                self.formula(body);
            }
            ItemKind::Constraint { declared, left, right } => {
                declared.iter().for_each(|d| self.declared(d));
                let index = declared.iter().filter_map(|d| d.index.as_ref()).map(|n| n.text.clone());
                self.with_bound(index.collect::<Vec<_>>(), |w| {
                    w.formula(left);
                    w.formula(right);
                });
            }
            ItemKind::Symmetry { arrows, .. } => self.with_bound(["ε".to_owned()], |w| {
                for arrow in arrows {
                    arrow.sources.iter().chain(&arrow.targets).for_each(|f| w.formula(f));
                }
            }),
            ItemKind::Conserved { body, .. } => {
                self.claims = true;
                self.formula(body);
            }
            ItemKind::Run { from, until, with, .. } => {
                from.iter().for_each(|(what, _)| self.formula(what));
                until.iter().for_each(|c| self.comparison(c));
                for (what, formula) in with {
                    let formals = match &what.kind {
                        FormulaKind::Call { function, args, .. } => {
                            self.name(&function.text, function.span, How::Called);
                            args.iter().filter_map(plain_name).map(str::to_owned).collect()
                        }
                        _ => {
                            self.formula(what);
                            Vec::new()
                        }
                    };
                    self.with_bound(formals, |w| w.formula(formula));
                }
            }
        }
    }

    fn comparison(&mut self, comparison: &Comparison) {
        self.formula(&comparison.first);
        comparison.rest.iter().for_each(|(_, f)| self.formula(f));
    }

    fn formula(&mut self, f: &Formula) {
        match &f.kind {
            FormulaKind::Number(_) | FormulaKind::Missing => {}
            FormulaKind::Name(name) => self.name(name, f.span, How::Plain),
            FormulaKind::Prime { base, .. } => match &base.kind {
                FormulaKind::Name(name) => self.name(name, base.span, How::Primed),
                _ => self.formula(base),
            },
            FormulaKind::Index { base, indices } => {
                self.formula(base);
                indices.iter().for_each(|i| self.formula(i));
            }
            FormulaKind::Call { function, power, args, .. } => {
                if self.claims && function.text == "momentum" {
                    self.out.motion = true;
                }
                if leastwise_grammar::builtin(&function.text).is_none() {
                    self.name(&function.text, function.span, How::Called);
                }
                power.iter().for_each(|p| self.formula(p));
                args.iter().for_each(|a| self.formula(a));
            }
            FormulaKind::Neg(a) | FormulaKind::Bars(a) | FormulaKind::Paren(a) => self.formula(a),
            FormulaKind::Add(a, b) | FormulaKind::Sub(a, b) | FormulaKind::Div(a, b) | FormulaKind::Pow(a, b) => {
                self.formula(a);
                self.formula(b);
            }
            FormulaKind::Mul { left, right, .. } => {
                self.formula(left);
                self.formula(right);
            }
            FormulaKind::Tuple(items) => items.iter().for_each(|i| self.formula(i)),
            FormulaKind::Sum { index, range, body } => {
                match range {
                    Some((lower, upper)) => {
                        self.formula(lower);
                        self.formula(upper);
                    }
                    None => self.name(&index.text, index.span, How::Index),
                }
                self.with_bound([index.text.clone()], |w| w.formula(body));
            }
        }
    }
}

/// The name that a formula is, in parentheses or not.
pub fn plain_name(f: &Formula) -> Option<&str> {
    match &f.kind {
        FormulaKind::Name(name) => Some(name),
        FormulaKind::Paren(inner) => plain_name(inner),
        _ => None,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use leastwise_grammar::{callable_names, parse_item, split};

    fn check(text: &str, expected: &str) {
        let items = split(text);
        let callable = callable_names(items.iter());
        let found = uses(&parse_item(&items[0].text, &callable).item);
        let names: Vec<_> = found.names.iter().map(|u| u.name.as_str()).collect();
        assert_eq!(names.join(" "), expected);
    }

    #[test]
    fn what_is_bound_in_the_item_is_not_mentioned() {
        check("let f(x) = x y + sum(j in 1..n: j z[i])", "y n z i");
        check("let X[i] = sum(j in 1..i: l[j])", "i l");
        check("symmetry a: x -> x + ε y", "x y");
        check("kinetic T = 1/2 m |P'|^2 t π", "m P");
        check("kinetic T = U(r)\nfunction U(s)", "U r");
        check("run a: from x = 1 m, with U(s) = k s, u = 2\nfunction U(s)", "x U k u");
        check("conserved c = energy + momentum(x)", "x");
    }
}
