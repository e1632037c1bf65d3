//! A small reader of formulas for the tests, written from the language's rules and not from the printer: products and
//! `/` have one rank, juxtaposition included; a known function takes one name without parentheses.

use crate::arena::{Arena, Expr, Role};
use crate::budget::Budget;
use crate::function::Function;
use crate::rational::Rational;

/// What the names of a test's formulas mean. Others are parameters.
#[derive(Default, Clone)]
pub struct Names {
    pub coordinates: Vec<String>,
    pub inputs: Vec<String>,
    pub functions: Vec<String>,
    /// Bound indices in scope, outermost first.
    indices: Vec<String>,
}

impl Names {
    pub fn new(coordinates: &str, functions: &str) -> Names {
        let list = |s: &str| s.split_whitespace().map(String::from).collect();
        Names { coordinates: list(coordinates), functions: list(functions), ..Names::default() }
    }
}

pub struct Reader<'a> {
    arena: &'a mut Arena,
    names: Names,
    text: Vec<char>,
    at: usize,
}

/// Reads a formula; panics with the place where it cannot.
pub fn read(arena: &mut Arena, names: &Names, text: &str) -> Expr {
    let mut r = Reader { arena, names: names.clone(), text: text.chars().collect(), at: 0 };
    let e = r.sum();
    r.space();
    assert!(r.at == r.text.len(), "unread: {}", r.text[r.at..].iter().collect::<String>());
    e
}

fn decompose(c: char) -> Option<(char, char)> {
    const DOT: &str = "ȧaḃbċcḋdėeḟfġgḣhṁmṅnȯoṗpṙrṡsṫtẇwẋxẏyżzẊXẎYŻZṘRṠSĖEĠGḢHİIṀMṄNȮOṖPṪTẆWȦAḂBĊCḊDḞF";
    const DOTS: &str = "äaëeḧhïiöoẗtüuẅwẍxÿyÄAËEḦHÏIÖOÜUẄWẌXŸY";
    let find = |table: &str| {
        let list: Vec<char> = table.chars().collect();
        list.chunks(2).find(|p| p[0] == c).map(|p| p[1])
    };
    find(DOT).map(|l| (l, '\u{307}')).or_else(|| find(DOTS).map(|l| (l, '\u{308}')))
}

impl Reader<'_> {
    fn space(&mut self) {
        while self.peek() == Some(' ') {
            self.at += 1;
        }
    }

    fn peek(&self) -> Option<char> {
        self.text.get(self.at).copied()
    }

    fn eat(&mut self, c: char) -> bool {
        self.space();
        let found = self.peek() == Some(c);
        self.at += usize::from(found);
        found
    }

    fn expect(&mut self, c: char) {
        assert!(self.eat(c), "{c} expected at {}", self.text[self.at..].iter().collect::<String>());
    }

    fn sum(&mut self) -> Expr {
        let mut out = self.product();
        loop {
            if self.eat('+') {
                let e = self.product();
                out = self.arena.add(out, e);
            } else if self.eat('-') {
                let e = self.product();
                out = self.arena.sub(out, e);
            } else {
                return out;
            }
        }
    }

    fn product(&mut self) -> Expr {
        let mut out = self.unary();
        loop {
            if self.eat('*') {
                let e = self.unary();
                out = self.arena.mul(out, e);
            } else if self.eat('/') {
                let e = self.unary();
                out = self.arena.div(out, e);
            } else {
                self.space();
                match self.peek() {
                    Some(c) if c.is_alphanumeric() || c == '(' || c == '√' => {
                        let e = self.unary();
                        out = self.arena.mul(out, e);
                    }
                    _ => return out,
                }
            }
        }
    }

    fn unary(&mut self) -> Expr {
        if self.eat('-') {
            let e = self.unary();
            return self.arena.neg(e);
        }
        self.power()
    }

    fn power(&mut self) -> Expr {
        let base = self.primary();
        if let Some(n) = self.superscript() {
            return self.arena.pow(base, n);
        }
        if self.eat('^') {
            let e = self.unary();
            return self.arena.power(base, e);
        }
        base
    }

    fn superscript(&mut self) -> Option<i64> {
        let start = self.at;
        let mut text = String::new();
        while let Some(c) = self.peek() {
            let d = match c {
                '⁻' => '-',
                '¹' => '1',
                '²' => '2',
                '³' => '3',
                '⁰' | '⁴'..='⁹' => char::from_digit(c as u32 - '⁰' as u32, 10).unwrap(),
                _ => break,
            };
            text.push(d);
            self.at += 1;
        }
        (self.at > start).then(|| text.parse().unwrap())
    }

    fn primes(&mut self) -> u16 {
        let start = self.at;
        while self.peek() == Some('\'') {
            self.at += 1;
        }
        (self.at - start) as u16
    }

    fn word(&mut self) -> String {
        let mut out = String::new();
        while let Some(c) = self.peek() {
            if c.is_alphanumeric() && superscript_free(c) || c == '_' || ('₀'..='₉').contains(&c) || is_dot(c) {
                out.push(c);
                self.at += 1;
            } else {
                break;
            }
        }
        // Dots on a first letter with nothing but digits or a subscript behind it are derivatives, elsewhere letters.
        let first = out.chars().next().unwrap_or(' ');
        let rest: String = out.chars().skip(1).collect();
        match decompose(first) {
            Some((letter, mark)) if rest.chars().next().is_none_or(|c| !c.is_alphabetic()) => {
                format!("{letter}{mark}{rest}")
            }
            _ => out,
        }
    }

    fn list(&mut self) -> Vec<Expr> {
        let mut out = vec![self.sum()];
        while self.eat(',') {
            out.push(self.sum());
        }
        self.expect(')');
        out
    }

    fn primary(&mut self) -> Expr {
        self.space();
        let Some(c) = self.peek() else { panic!("a formula expected") };
        if self.eat('(') {
            let mut e = self.sum();
            self.expect(')');
            for _ in 0..self.primes() {
                e = self.arena.total(e, &mut Budget::new(10_000_000)).unwrap();
            }
            return e;
        }
        if self.eat('√') {
            self.expect('(');
            let e = self.sum();
            self.expect(')');
            return self.arena.sqrt(e);
        }
        if c.is_ascii_digit() {
            let mut text = String::new();
            while let Some(d) = self.peek().filter(char::is_ascii_digit) {
                text.push(d);
                self.at += 1;
            }
            return self.arena.number(Rational::from_decimal(&text, 0, 1000).unwrap());
        }
        let word = self.word();
        assert!(!word.is_empty(), "a name expected at {}", self.text[self.at..].iter().collect::<String>());
        match word.as_str() {
            "pi" | "π" => return self.arena.pi(),
            "sqrt" => {
                self.expect('(');
                let e = self.sum();
                self.expect(')');
                return self.arena.sqrt(e);
            }
            "sum" => return self.bound(),
            "undefined" => return Arena::UNDEFINED,
            _ => {}
        }
        if let Some(f) = Function::from_name(&word) {
            let exponent = self.superscript();
            let args = if self.peek() == Some('(') {
                self.expect('(');
                self.list()
            } else {
                self.space();
                let name = self.word();
                assert!(!name.is_empty(), "{word} takes one name");
                vec![self.name(&name)]
            };
            let call = self.arena.call(f, &args);
            return exponent.map_or(call, |n| self.arena.pow(call, n));
        }
        self.name(&word)
    }

    /// Names, members and calls of unspecified functions, with what follows them.
    fn name(&mut self, word: &str) -> Expr {
        let dots =
            word.chars().filter(|c| *c == '\u{307}').count() + 2 * word.chars().filter(|c| *c == '\u{308}').count();
        let spelled: String = word.chars().filter(|c| !is_dot(*c)).collect();
        let mut order = dots as u16;
        let mut index = None;
        if self.names.functions.contains(&spelled) {
            if self.peek() == Some('[') {
                self.expect('[');
                index = Some(self.sum());
                self.expect(']');
            }
            let primes = self.primes();
            let mut by = Vec::new();
            if primes > 0 && self.peek() == Some('[') {
                self.expect('[');
                loop {
                    let k = self.sum();
                    by.push(self.arena.as_i64(k).unwrap() as usize - 1);
                    if !self.eat(',') {
                        break;
                    }
                }
                self.expect(']');
            }
            self.expect('(');
            let args = self.list();
            let mut orders = vec![0u16; args.len()];
            if args.len() == 1 {
                orders[0] = primes;
            }
            by.into_iter().for_each(|k| orders[k] += 1);
            let f = self.arena.symbol(&spelled, None, Role::Function);
            return self.arena.unspecified(f, index, &orders, &args);
        }
        if let Some(i) = self.names.indices.iter().rposition(|n| *n == spelled) {
            let s = self.arena.symbol(&format!("@{i}"), None, Role::Index);
            return self.arena.sym(s);
        }
        order += self.primes();
        if self.peek() == Some('[') {
            self.expect('[');
            index = Some(self.sum());
            self.expect(']');
            order += self.primes();
        }
        let role = if self.names.coordinates.contains(&spelled) {
            Role::Coordinate
        } else if self.names.inputs.contains(&spelled) {
            Role::Input
        } else if spelled == "t" {
            Role::Time
        } else {
            Role::Parameter
        };
        let s = self.arena.symbol(&spelled, None, role);
        match index {
            Some(i) => self.arena.member(s, i, order),
            None => self.arena.jet(s, order),
        }
    }

    fn bound(&mut self) -> Expr {
        self.expect('(');
        self.space();
        let index = self.word();
        self.space();
        assert_eq!(self.word(), "in");
        let lower = self.sum();
        self.expect('.');
        self.expect('.');
        let upper = self.sum();
        self.expect(':');
        let s = self.arena.symbol(&format!("@{}", self.names.indices.len()), None, Role::Index);
        self.names.indices.push(index);
        let body = self.sum();
        self.names.indices.pop();
        self.expect(')');
        self.arena.bound(s, lower, upper, body, &mut Budget::new(1_000_000)).unwrap()
    }
}

fn is_dot(c: char) -> bool {
    matches!(c, '\u{307}' | '\u{308}')
}

fn superscript_free(c: char) -> bool {
    !matches!(c, '²' | '³' | '¹' | '⁰' | '⁴'..='⁹')
}
