//! ASCII operators, explicit products, primes: what other programs read.

use crate::display::form::{Form, Member, Name};
use crate::rational::Rational;
use std::fmt::Write;

/// What surrounds a form, from loose to tight.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
enum Place {
    Sum,
    Summand,
    Factor,
    Base,
}

/// The plain form of a tree.
pub(crate) fn render(form: &Form) -> String {
    render_with(form, &[])
}

/// The same with abbreviations written out.
pub(crate) fn render_with(form: &Form, abbreviations: &[String]) -> String {
    let mut out = Plain { out: String::new(), abbreviations };
    out.form(form, Place::Sum);
    out.out
}

struct Plain<'a> {
    out: String,
    abbreviations: &'a [String],
}

impl Plain<'_> {
    fn open(&mut self, needed: bool, inner: impl FnOnce(&mut Self)) {
        if needed {
            self.out.push('(');
        }
        inner(self);
        if needed {
            self.out.push(')');
        }
    }

    fn form(&mut self, form: &Form, place: Place) {
        match form {
            Form::Number(r) => self.open(!r.is_integer() && place > Place::Summand, |p| p.number(r)),
            Form::Pi => self.out.push_str("pi"),
            Form::Undefined => self.out.push_str("undefined"),
            Form::Name(n) => self.name(n),
            Form::Sum(list) => self.open(place > Place::Sum, |p| {
                for (i, s) in list.iter().enumerate() {
                    match (i, s.negative) {
                        (0, false) => {}
                        (0, true) => p.out.push('-'),
                        (_, false) => p.out.push_str(" + "),
                        (_, true) => p.out.push_str(" - "),
                    }
                    p.form(&s.form, Place::Summand);
                }
            }),
            Form::Product { coefficient, top, bottom } => {
                self.open(place > Place::Summand, |p| p.product(coefficient, top, bottom));
            }
            Form::Power(base, exponent) => self.open(place == Place::Base, |p| {
                p.form(base, Place::Base);
                p.out.push('^');
                if exponent.is_integer() {
                    p.number(exponent);
                } else {
                    p.open(true, |p| p.number(exponent));
                }
            }),
            Form::Exponential(base, exponent) => self.open(place == Place::Base, |p| {
                p.form(base, Place::Base);
                p.out.push('^');
                p.form(exponent, Place::Base);
            }),
            Form::Root(base) => {
                self.out.push_str("sqrt(");
                self.form(base, Place::Sum);
                self.out.push(')');
            }
            Form::Call(f, args) => {
                self.out.push_str(f.name());
                self.args(args);
            }
            Form::Unspecified { name, member, orders, args, .. } => {
                self.out.push_str(name);
                self.member(member);
                self.out.push_str(&derivative_marks(orders));
                self.args(args);
            }
            Form::Bound { name, lower, upper, body, .. } => {
                let _ = write!(self.out, "sum({name} in ");
                self.form(lower, Place::Sum);
                self.out.push_str("..");
                self.form(upper, Place::Sum);
                self.out.push_str(": ");
                self.form(body, Place::Sum);
                self.out.push(')');
            }
            Form::Abbreviation(k) => match self.abbreviations.get(*k) {
                Some(text) => {
                    self.out.push('(');
                    self.out.push_str(text);
                    self.out.push(')');
                }
                None => {
                    let _ = write!(self.out, "A{k}");
                }
            },
        }
    }

    fn product(&mut self, coefficient: &Rational, top: &[Form], bottom: &[Form]) {
        let (n, d) = coefficient.digits();
        let mut first = true;
        if n != "1" || top.is_empty() || (d != "1" && bottom.is_empty()) {
            self.out.push_str(&n);
            first = false;
            if d != "1" && bottom.is_empty() {
                self.out.push('/');
                self.out.push_str(&d);
            }
        }
        for f in top {
            if !first {
                self.out.push('*');
            }
            first = false;
            self.form(f, Place::Factor);
        }
        if bottom.is_empty() {
            return;
        }
        self.out.push('/');
        let count = bottom.len() + usize::from(d != "1");
        self.open(count > 1, |p| {
            let mut first = true;
            if d != "1" {
                p.out.push_str(&d);
                first = false;
            }
            for f in bottom {
                if !first {
                    p.out.push('*');
                }
                first = false;
                p.form(f, Place::Factor);
            }
        });
    }

    fn number(&mut self, r: &Rational) {
        let _ = write!(self.out, "{r}");
    }

    fn args(&mut self, args: &[Form]) {
        self.out.push('(');
        for (i, a) in args.iter().enumerate() {
            if i > 0 {
                self.out.push_str(", ");
            }
            self.form(a, Place::Sum);
        }
        self.out.push(')');
    }

    fn name(&mut self, n: &Name) {
        self.out.push_str(&n.name);
        self.member(&n.member);
        self.out.extend(std::iter::repeat_n('\'', n.order as usize));
    }

    fn member(&mut self, member: &Member) {
        match member {
            Member::None => {}
            Member::Number(k) => {
                let _ = write!(self.out, "[{k}]");
            }
            Member::Index(index) => {
                self.out.push('[');
                self.form(index, Place::Sum);
                self.out.push(']');
            }
        }
    }
}

/// `''` for a function of one argument, `'[1,1,2]` for one of several.
pub(crate) fn derivative_marks(orders: &[u16]) -> String {
    match orders {
        [order] => "'".repeat(*order as usize),
        _ if orders.iter().all(|o| *o == 0) => String::new(),
        _ => {
            let list: Vec<String> = orders
                .iter()
                .enumerate()
                .flat_map(|(k, o)| std::iter::repeat_n((k + 1).to_string(), *o as usize))
                .collect();
            format!("'[{}]", list.join(","))
        }
    }
}
