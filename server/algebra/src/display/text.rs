//! Unicode for hovers and terminals; it parses back in the model language.
//!
//! Products are juxtaposed, and `/` has their rank, from left to right: so `m g/l`, `a/(2 b)`.

use crate::display::form::{Form, Member, Name};
use crate::display::order::digit;
use crate::display::plain::derivative_marks;
use crate::function::Function;
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

/// The Unicode form of a tree; `abbreviations` are the letters of what is written apart.
pub(crate) fn render(form: &Form, abbreviations: &[String]) -> String {
    let mut out = Text { out: String::new(), abbreviations };
    out.form(form, Place::Sum);
    out.out
}

struct Text<'a> {
    out: String,
    abbreviations: &'a [String],
}

impl Text<'_> {
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
            Form::Number(r) => self.open(!r.is_integer() && place > Place::Summand, |p| {
                let _ = write!(p.out, "{r}");
            }),
            Form::Pi => self.out.push('π'),
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
            Form::Power(base, exponent) => match (&**base, exponent.is_integer()) {
                (Form::Call(f, args), true) if args.len() == 1 => {
                    self.open(place == Place::Base, |p| {
                        p.out.push_str(f.name());
                        p.superscript(exponent);
                        p.argument(*f, args);
                    });
                }
                _ => self.open(place == Place::Base, |p| {
                    p.form(base, Place::Base);
                    if exponent.is_integer() {
                        p.superscript(exponent);
                    } else {
                        let _ = write!(p.out, "^({exponent})");
                    }
                }),
            },
            Form::Exponential(base, exponent) => self.open(place == Place::Base, |p| {
                p.form(base, Place::Base);
                p.out.push('^');
                p.form(exponent, Place::Base);
            }),
            Form::Root(base) => {
                self.out.push_str("√(");
                self.form(base, Place::Sum);
                self.out.push(')');
            }
            Form::Call(f, args) => self.open(place == Place::Base && short(*f, args), |p| {
                p.out.push_str(f.name());
                p.argument(*f, args);
            }),
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
            Form::Abbreviation(k) => {
                let name = self.abbreviations.get(*k).map_or("?", String::as_str);
                self.out.push_str(name);
            }
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
                self.out.push(' ');
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
                    p.out.push(' ');
                }
                first = false;
                p.form(f, Place::Factor);
            }
        });
    }

    fn superscript(&mut self, r: &Rational) {
        let (n, _) = r.digits();
        self.out.extend(n.chars().map(|c| match c {
            '1' => '¹',
            '2' => '²',
            '3' => '³',
            '-' => '⁻',
            _ => c.to_digit(10).and_then(|d| char::from_u32('⁰' as u32 + d)).unwrap_or(c),
        }));
    }

    /// A function takes one name without parentheses.
    fn argument(&mut self, f: Function, args: &[Form]) {
        if short(f, args) {
            self.out.push(' ');
            self.form(&args[0], Place::Base);
        } else {
            self.args(args);
        }
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
        let dotted = match n.order {
            1 | 2 if n.member == Member::None => dotted(&n.name, n.order),
            _ => None,
        };
        if let Some(name) = dotted {
            self.out.push_str(&name);
            return;
        }
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

/// Whether the argument is one name that the function takes without parentheses.
fn short(f: Function, args: &[Form]) -> bool {
    use Function::*;
    !matches!(f, Exp | Abs | Sign | Min | Max) && matches!(args, [Form::Name(_)])
}

/// The name with one or two of Newton's dots, where the language reads them as derivatives.
fn dotted(name: &str, order: u16) -> Option<String> {
    let mut letters = name.chars();
    let first = letters.next()?;
    let rest = letters.as_str();
    let mut tail = rest.chars().skip_while(|c| digit(*c).is_some());
    if !matches!(tail.next(), None | Some('_')) {
        return None;
    }
    // Letters that carry a mark already keep primes.
    if !(first.is_ascii_alphabetic() || ('Α'..='ω').contains(&first) || ('𝐀'..='𝟋').contains(&first)) {
        return None;
    }
    let (table, mark) = if order == 1 { (DOT, '\u{307}') } else { (DOTS, '\u{308}') };
    let composed = table.chars().zip(table.chars().skip(1)).step_by(2).find(|p| p.0 == first);
    Some(match composed {
        Some((_, c)) => format!("{c}{rest}"),
        None => format!("{first}{mark}{rest}"),
    })
}

/// Letters and their precomposed forms with a dot, as in NFC.
const DOT: &str = "aȧbḃcċdḋeėfḟgġhḣmṁnṅoȯpṗrṙsṡtṫwẇxẋyẏzżAȦBḂCĊDḊEĖFḞGĠHḢIİMṀNṄOȮPṖRṘSṠTṪWẆXẊYẎZŻ";
/// The same with two dots.
const DOTS: &str = "aäeëhḧiïoötẗuüwẅxẍyÿAÄEËHḦIÏOÖUÜWẄXẌYŸιϊυϋΙΪΥΫ";

#[cfg(test)]
mod tests {
    use super::*;

    fn check(name: &str, order: u16, expected: Option<&str>) {
        assert_eq!(dotted(name, order).as_deref(), expected);
    }

    #[test]
    fn dots_where_the_language_reads_them() {
        check("x", 1, Some("ẋ"));
        check("x", 2, Some("ẍ"));
        check("θ₁", 1, Some("θ\u{307}₁"));
        check("x_cart", 1, Some("ẋ_cart"));
        check("q12_a", 2, Some("q\u{308}12_a"));
        check("länge", 1, None);
        check("é", 1, None);
        check("𝑥", 1, Some("𝑥\u{307}"));
    }
}
