//! LaTeX, as it stands between dollar signs.

use crate::display::form::{Form, Member, Name};
use crate::display::order::digit;
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

/// The LaTeX form of a tree; `abbreviations` are the letters of what is written apart.
pub(crate) fn render(form: &Form, abbreviations: &[String]) -> String {
    let mut out = Latex { out: String::new(), abbreviations };
    out.form(form, Place::Sum);
    out.out
}

struct Latex<'a> {
    out: String,
    abbreviations: &'a [String],
}

impl Latex<'_> {
    fn open(&mut self, needed: bool, inner: impl FnOnce(&mut Self)) {
        if needed {
            self.out.push_str("\\left(");
        }
        inner(self);
        if needed {
            self.out.push_str("\\right)");
        }
    }

    fn braces(&mut self, inner: impl FnOnce(&mut Self)) {
        self.out.push('{');
        inner(self);
        self.out.push('}');
    }

    fn form(&mut self, form: &Form, place: Place) {
        match form {
            Form::Number(r) => {
                self.open(!r.is_integer() && place == Place::Base, |p| p.number(r));
            }
            Form::Pi => self.out.push_str("\\pi"),
            Form::Undefined => self.out.push_str("\\mathrm{undefined}"),
            Form::Name(n) => self.name(n, None),
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
                self.open(place > Place::Factor, |p| p.product(coefficient, top, bottom));
            }
            Form::Power(base, exponent) => match (&**base, exponent.is_integer()) {
                (Form::Call(f, args), true) if args.len() == 1 && *f != Function::Abs => {
                    self.open(place == Place::Base, |p| {
                        p.function(*f);
                        let _ = write!(p.out, "^{{{exponent}}}");
                        p.argument(*f, args);
                    });
                }
                (Form::Name(n), _) => {
                    let shown = if n.order > 2 { None } else { Some(exponent.to_string()) };
                    match shown {
                        Some(e) => self.name(n, Some(&e)),
                        None => {
                            self.open(true, |p| p.name(n, None));
                            let _ = write!(self.out, "^{{{exponent}}}");
                        }
                    }
                }
                _ => {
                    self.form(base, Place::Base);
                    let _ = write!(self.out, "^{{{exponent}}}");
                }
            },
            Form::Exponential(base, exponent) => {
                self.form(base, Place::Base);
                self.out.push('^');
                self.braces(|p| p.form(exponent, Place::Sum));
            }
            Form::Root(base) => {
                self.out.push_str("\\sqrt");
                self.braces(|p| p.form(base, Place::Sum));
            }
            Form::Call(Function::Abs, args) => {
                self.out.push_str("\\left|");
                self.list(args);
                self.out.push_str("\\right|");
            }
            Form::Call(f, args) => self.open(place == Place::Base && short(*f, args), |p| {
                p.function(*f);
                p.argument(*f, args);
            }),
            Form::Unspecified { name, member, orders, args, .. } => {
                let (primes, partial) = match orders.as_ref() {
                    [order] => ("'".repeat(*order as usize), Vec::new()),
                    several => (
                        String::new(),
                        (1..).zip(several.iter()).filter(|(_, o)| **o > 0).collect::<Vec<(usize, &u16)>>(),
                    ),
                };
                for (k, o) in partial {
                    let _ = match o {
                        1 => write!(self.out, "\\partial_{{{k}}} "),
                        _ => write!(self.out, "\\partial_{{{k}}}^{{{o}}} "),
                    };
                }
                self.head(name, 0, member, None, &primes);
                self.out.push_str("\\left(");
                self.list(args);
                self.out.push_str("\\right)");
            }
            Form::Bound { name, lower, upper, body, .. } => self.open(place == Place::Base, |p| {
                p.out.push_str("\\sum_");
                p.braces(|p| {
                    p.head(name, 0, &Member::None, None, "");
                    p.out.push('=');
                    p.form(lower, Place::Sum);
                });
                p.out.push('^');
                p.braces(|p| p.form(upper, Place::Sum));
                p.out.push(' ');
                p.form(body, Place::Summand);
            }),
            Form::Abbreviation(k) => {
                let name = self.abbreviations.get(*k).map_or("?", String::as_str).to_string();
                self.head(&name, 0, &Member::None, None, "");
            }
        }
    }

    fn product(&mut self, coefficient: &Rational, top: &[Form], bottom: &[Form]) {
        let (n, d) = coefficient.digits();
        if bottom.is_empty() {
            if !coefficient.is_one() || top.is_empty() {
                self.number(coefficient);
                if !top.is_empty() {
                    self.out.push(' ');
                }
            }
            self.factors(top);
            return;
        }
        self.out.push_str("\\frac");
        let alone = |list: &[Form]| list.len() == 1;
        self.braces(|p| {
            if n != "1" || top.is_empty() {
                p.out.push_str(&n);
                if !top.is_empty() {
                    p.out.push(' ');
                }
            }
            match top {
                [only] if n == "1" && alone(top) => p.form(only, Place::Sum),
                _ => p.factors(top),
            }
        });
        self.braces(|p| {
            if d != "1" {
                p.out.push_str(&d);
                p.out.push(' ');
            }
            match bottom {
                [only] if d == "1" => p.form(only, Place::Sum),
                _ => p.factors(bottom),
            }
        });
    }

    /// Factors side by side. A sum sign reaches to the end of its term, so it stands in parentheses unless it is last.
    fn factors(&mut self, list: &[Form]) {
        for (i, f) in list.iter().enumerate() {
            if i > 0 {
                // A thin space where letters would run into each other.
                let wide = |f: &Form| match f {
                    Form::Power(base, _) => matches!(&**base, Form::Call(..) | Form::Name(_)) && wide(base),
                    f => wide(f),
                };
                self.out.push_str(if wide(&list[i - 1]) || wide(f) { " \\, " } else { " " });
            }
            let open = matches!(f, Form::Bound { .. }) && i + 1 < list.len();
            self.form(f, if open { Place::Base } else { Place::Factor });
        }
    }

    fn number(&mut self, r: &Rational) {
        let (n, d) = r.digits();
        let _ = if d == "1" { write!(self.out, "{n}") } else { write!(self.out, "\\frac{{{n}}}{{{d}}}") };
    }

    fn function(&mut self, f: Function) {
        let name = match f {
            Function::Asin => "\\arcsin",
            Function::Acos => "\\arccos",
            Function::Atan => "\\arctan",
            Function::Atan2 => "\\operatorname{atan2}",
            Function::Sign => "\\operatorname{sign}",
            Function::Log => "\\ln",
            other => {
                self.out.push('\\');
                other.name()
            }
        };
        self.out.push_str(name);
    }

    fn argument(&mut self, f: Function, args: &[Form]) {
        if short(f, args) {
            self.out.push(' ');
            self.form(&args[0], Place::Base);
        } else {
            self.out.push_str("\\left(");
            self.list(args);
            self.out.push_str("\\right)");
        }
    }

    fn list(&mut self, args: &[Form]) {
        for (i, a) in args.iter().enumerate() {
            if i > 0 {
                self.out.push_str(", ");
            }
            self.form(a, Place::Sum);
        }
    }

    fn name(&mut self, n: &Name, exponent: Option<&str>) {
        self.head(&n.name, n.order, &n.member, exponent, "");
    }

    /// A name: letters with dots or primes, subscripts, exponent.
    fn head(&mut self, name: &str, order: u16, member: &Member, exponent: Option<&str>, primes: &str) {
        let end = name.char_indices().find(|(i, c)| *i > 0 && (*c == '_' || digit(*c).is_some()));
        let (letters, sub) = name.split_at(end.map_or(name.len(), |e| e.0));
        let letters = letter_group(letters, "mathit");
        match order {
            0 => self.out.push_str(&letters),
            1 => drop(write!(self.out, "\\dot{{{letters}}}")),
            2 => drop(write!(self.out, "\\ddot{{{letters}}}")),
            n => drop(write!(self.out, "{letters}^{{({n})}}")),
        }
        self.out.push_str(primes);
        let mut subscripts: Vec<String> = subscript_groups(sub);
        match member {
            Member::None => {}
            Member::Number(k) => subscripts.push(k.to_string()),
            Member::Index(index) => {
                let mut inner = Latex { out: String::new(), abbreviations: self.abbreviations };
                inner.form(index, Place::Sum);
                subscripts.push(inner.out);
            }
        }
        if !subscripts.is_empty() {
            let _ = write!(self.out, "_{{{}}}", subscripts.join(","));
        }
        if let Some(e) = exponent {
            let _ = write!(self.out, "^{{{e}}}");
        }
    }
}

/// `₁₂_cart` as `12` and `\mathrm{cart}`.
fn subscript_groups(sub: &str) -> Vec<String> {
    let mut out = Vec::new();
    for part in sub.split('_').filter(|p| !p.is_empty()) {
        let digits: String = part.chars().map_while(|c| digit(c)?.to_string().chars().next()).collect();
        let rest: String = part.chars().skip(digits.chars().count()).collect();
        if !digits.is_empty() {
            out.push(digits);
        }
        if !rest.is_empty() {
            out.push(letter_group(&rest, "mathrm"));
        }
    }
    out
}

/// One letter as itself or its command, several in a font of their own.
fn letter_group(letters: &str, font: &str) -> String {
    let mut chars = letters.chars();
    match (chars.next(), chars.next()) {
        (Some(c), None) => greek(c).map_or_else(|| ordinary(c).to_string(), |g| format!("\\{g}")),
        _ => {
            let mut out = format!("\\{font}{{");
            for c in letters.chars() {
                match (greek(c), digit(c)) {
                    (Some(g), _) => drop(write!(out, "\\{g} ")),
                    (None, Some(d)) => drop(write!(out, "{d}")),
                    _ => out.push(ordinary(c)),
                }
            }
            out.truncate(out.trim_end().len());
            out.push('}');
            out
        }
    }
}

/// Mathematical alphanumerics stand for the letters that they are made from.
fn ordinary(c: char) -> char {
    let n = c as u32;
    match n {
        0x1D434..=0x1D44D => char::from_u32('A' as u32 + n - 0x1D434).unwrap_or(c),
        0x1D44E..=0x1D467 => char::from_u32('a' as u32 + n - 0x1D44E).unwrap_or(c),
        _ => c,
    }
}

fn greek(c: char) -> Option<&'static str> {
    Some(match c {
        'α' => "alpha",
        'β' => "beta",
        'γ' => "gamma",
        'δ' => "delta",
        'ε' => "varepsilon",
        'ζ' => "zeta",
        'η' => "eta",
        'θ' => "theta",
        'ι' => "iota",
        'κ' => "kappa",
        'λ' => "lambda",
        'μ' => "mu",
        'ν' => "nu",
        'ξ' => "xi",
        'π' => "pi",
        'ρ' => "rho",
        'σ' => "sigma",
        'ς' => "varsigma",
        'τ' => "tau",
        'υ' => "upsilon",
        'φ' => "varphi",
        'χ' => "chi",
        'ψ' => "psi",
        'ω' => "omega",
        'Γ' => "Gamma",
        'Δ' => "Delta",
        'Θ' => "Theta",
        'Λ' => "Lambda",
        'Ξ' => "Xi",
        'Π' => "Pi",
        'Σ' => "Sigma",
        'Υ' => "Upsilon",
        'Φ' => "Phi",
        'Ψ' => "Psi",
        'Ω' => "Omega",
        'ħ' => "hbar",
        'ℓ' => "ell",
        _ => return None,
    })
}

/// Calls without parentheses, sums over an index, and names of several letters.
fn wide(form: &Form) -> bool {
    match form {
        Form::Call(f, args) => short(*f, args),
        Form::Name(n) => n.name.chars().take_while(|c| *c != '_' && digit(*c).is_none()).count() > 1,
        Form::Bound { .. } => true,
        _ => false,
    }
}

/// Whether the argument is one name that the function takes without parentheses.
fn short(f: Function, args: &[Form]) -> bool {
    use Function::*;
    !matches!(f, Exp | Abs | Sign | Min | Max) && matches!(args, [Form::Name(_)])
}

#[cfg(test)]
mod tests {
    use super::*;

    fn check(name: &str, order: u16, expected: &str) {
        let mut out = Latex { out: String::new(), abbreviations: &[] };
        out.head(name, order, &Member::None, None, "");
        assert_eq!(out.out, expected);
    }

    #[test]
    fn names() {
        check("θ₁", 1, r"\dot{\theta}_{1}");
        check("x", 2, r"\ddot{x}");
        check("m_cart", 0, r"m_{\mathrm{cart}}");
        check("länge", 1, r"\dot{\mathit{länge}}");
        check("l₀", 0, "l_{0}");
        check("v_x2", 3, r"v^{(3)}_{\mathrm{x2}}");
        check("ħ", 0, r"\hbar");
        check("x12_θ", 0, r"x_{12,\theta}");
    }
}
