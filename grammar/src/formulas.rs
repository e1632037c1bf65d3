//! Pieces of formulas to tokens: which names are functions, what their arguments are, where products end.

use crate::codes;
use crate::keywords::{Arity, builtin};
use crate::lexer::{Kind, superscript};
use crate::names::read_name;
use crate::pieces::Piece;
use crate::reading::Reader;
use crate::slips::{Completed, point};
use crate::token::Token;
use crate::tree::{Number, Span};

/// Numbers have at most so many digits and exponents of at most this size, so that exact arithmetic stays small.
const MOST_DIGITS: usize = 400;

impl Reader<'_> {
    /// Reads a formula up to a kind of piece outside of brackets.
    pub(crate) fn formula(&mut self, stop: impl Fn(Kind) -> bool) {
        self.formula_until(|reader, at| stop(reader.pieces[at].kind));
    }

    /// Reads a formula up to a place outside of brackets.
    pub(crate) fn formula_until(&mut self, stop: impl Fn(&Self, usize) -> bool) {
        let end = (self.at..self.pieces.len()).find(|at| self.pieces[*at].depth == 0 && stop(self, *at));
        self.formula_to(end.unwrap_or(self.pieces.len()));
    }

    /// Reads a formula up to a piece.
    fn formula_to(&mut self, end: usize) {
        let start = self.at;
        while self.at < end {
            let Some(piece) = self.piece(self.at) else { return };
            if self.at > start && piece.begins_line && piece.depth == 0 && self.breaks_product(piece) {
                if self.indented_keyword() {
                    return;
                }
                self.missing_operator(piece);
            }
            match piece.kind {
                Kind::Word => self.word(piece, end),
                Kind::Root => self.root(piece, end),
                Kind::Number => self.decimal(piece),
                Kind::Prime(_) => self.prime(piece),
                Kind::Degree => {
                    self.at += 1;
                    let number = self.pieces[..self.at - 1].last().filter(|p| p.kind == Kind::Number);
                    let degrees = number.map(|p| (p.span.to(piece.span), &self.text[p.span.range()]));
                    let slip = self.slips.error(codes::UNIT_IN_FORMULA, piece.span, "units do not stand in formulas");
                    slip.help("declare a parameter with this value and name it here");
                    if let Some((span, number)) = degrees.filter(|_| self.text[piece.span.range()] == *"°") {
                        let radians = format!("({number} π/180)");
                        slip.mend(format!("write {radians}"), span, radians);
                    }
                }
                Kind::Close => {
                    self.bound.retain(|(depth, _)| *depth != piece.depth);
                    self.plain();
                }
                _ => self.plain(),
            }
        }
    }

    /// Whether a product would go on over the line's end.
    fn breaks_product(&self, piece: Piece) -> bool {
        self.pieces[self.at - 1].kind.ends_operand() && (piece.kind.begins_operand() || piece.kind == Kind::OpenIndex)
    }

    fn missing_operator(&mut self, piece: Piece) {
        let end = self.end();
        self.slips
            .error(codes::MISSING_OPERATOR, piece.span, "a product does not go on over the end of a line")
            .help("begin the line with the missing operator, or put the formula in parentheses")
            .mend("put in `+`", point(piece.span.start), "+ ");
        self.emit(if piece.kind == Kind::OpenIndex { Token::Gap } else { Token::Plus }, point(end));
    }

    /// A number; with a decimal comma, both parts.
    pub(crate) fn decimal(&mut self, piece: Piece) {
        let touches = |a: Option<Piece>, b: Option<Piece>| a.zip(b).is_some_and(|(a, b)| a.span.end == b.span.start);
        let (comma, digits) = (self.piece(self.at + 1), self.piece(self.at + 2));
        let comma_like = piece.depth == 0
            && comma.is_some_and(|p| p.kind == Kind::Comma)
            && digits.is_some_and(|p| p.kind == Kind::Number)
            && touches(Some(piece), comma)
            && touches(comma, digits)
            && !self.text_at(self.at).contains(['.', 'e', 'E'])
            && !self.text_at(self.at + 2).contains('.');
        if comma_like {
            let span = piece.span.to(self.pieces[self.at + 2].span);
            let written = self.text[span.range()].replace(',', ".");
            self.slips.error(codes::DECIMAL_COMMA, span, "a decimal point is written `.`").mend(
                format!("write {written}"),
                span,
                written.clone(),
            );
            self.at += 3;
            let number = self.number_of(&written, span);
            self.emit(number, span);
        } else {
            self.plain();
        }
    }

    /// The number at this place.
    pub(crate) fn number(&mut self, span: Span) -> Token {
        let text = self.text;
        self.number_of(&text[span.range()], span)
    }

    fn number_of(&mut self, text: &str, span: Span) -> Token {
        let (mantissa, exponent) = text.split_once(['e', 'E']).unwrap_or((text, "0"));
        let (whole, fraction) = mantissa.split_once('.').unwrap_or((mantissa, ""));
        let mut digits = format!("{whole}{fraction}");
        let zeros = digits.bytes().take_while(|b| *b == b'0').count().min(digits.len() - 1);
        digits.drain(..zeros);
        let power = exponent.parse::<i32>().ok().and_then(|e| e.checked_sub(i32::try_from(fraction.len()).ok()?));
        match power.filter(|p| digits.len() <= MOST_DIGITS && p.unsigned_abs() as usize <= MOST_DIGITS) {
            Some(exponent) => Token::Number(Number { digits, exponent }),
            None => {
                self.slips
                    .error(codes::NUMBER_SIZE, span, "this number is too large or too long to be kept exactly")
                    .help(format!("at most {MOST_DIGITS} digits before and behind the point"));
                Token::Gap
            }
        }
    }

    /// The raised integer at this place.
    pub(crate) fn superscript(&mut self, span: Span) -> Token {
        let digits: String = self.text[span.range()].chars().filter_map(superscript).collect();
        Token::Superscript(digits.parse().ok())
    }

    /// A prime behind what it belongs to; not behind a number or power.
    fn prime(&mut self, piece: Piece) {
        let before = self.at.checked_sub(1).and_then(|at| self.kind(at));
        let power = match before {
            Some(Kind::Superscript) => Some(self.at - 1),
            Some(Kind::Number) if self.at >= 2 && self.kind(self.at - 2) == Some(Kind::Caret) => Some(self.at - 2),
            _ => None,
        };
        if power.is_none() && before != Some(Kind::Number) {
            return self.plain();
        }
        let last = self.pieces[self.at - 1];
        let prime = self.text_at(self.at);
        let what = if power.is_some() { "power" } else { "number" };
        let message = format!("a prime does not stand behind a {what}");
        let slip = self.slips.error(codes::PRIME_ON_POWER, last.span.to(piece.span), message);
        match power.filter(|at| *at > 0 && self.pieces[*at - 1].kind == Kind::Word) {
            Some(at) => {
                let base = self.pieces[at - 1].span;
                let (base_text, span) = (&self.text[base.range()], base.to(piece.span));
                let raised = &self.text[base.start as usize..last.span.end as usize];
                let exponent = &self.text[base.end as usize..last.span.end as usize];
                slip.mend(format!("write ({raised}){prime}"), span, format!("({raised}){prime}"));
                slip.mend(format!("write {base_text}{prime}{exponent}"), span, format!("{base_text}{prime}{exponent}"));
            }
            None => {
                slip.help("put what is differentiated in parentheses");
            }
        }
        self.at += 1;
    }

    fn shadowed(&self, name: &str) -> bool {
        self.formals.iter().any(|f| f == name) || self.bound.iter().any(|(_, b)| b == name)
    }

    /// A name in a formula: a function or not.
    fn word(&mut self, piece: Piece, end: usize) {
        let (name, order) = read_name(self.text_at(self.at));
        if self.shadowed(&name) {
            self.plain();
        } else if name == "sum" && self.kind(self.at + 1) == Some(Kind::Open) {
            self.sum(piece);
        } else if let Some(arity) = builtin(&name) {
            self.function(&name, arity, piece.span, end);
        } else if self.callable.declares(&name) && self.kind(self.marks_end(self.at + 1)) == Some(Kind::Open) {
            if order > 0 {
                let marks = "'".repeat(order.min(4) as usize);
                let open = self.marks_end(self.at + 1);
                let close = self.pieces[open..]
                    .iter()
                    .skip(1)
                    .find(|p| p.kind == Kind::Close && p.depth == self.pieces[open].depth)
                    .map(|p| point(p.span.end));
                let slip = self.slips.error(
                    codes::DOTTED_FUNCTION,
                    piece.span,
                    "a dot on a function may mean two derivatives",
                );
                slip.help(format!("by its argument write {name}{marks}(…), by the time {name}(…){marks}"));
                slip.mend(format!("write {name}{marks}(…), by its argument"), piece.span, format!("{name}{marks}"));
                if let Some(close) = close {
                    let edits = vec![(piece.span, name.clone()), (close, marks.clone())];
                    slip.mends(format!("write {name}(…){marks}, by the time"), edits);
                }
            }
            self.at += 1;
            self.emit(Token::Call(name), piece.span);
        } else {
            self.plain();
        }
    }

    /// Behind the primes and indices from a piece on.
    fn marks_end(&self, mut at: usize) -> usize {
        while let Some(piece) = self.piece(at) {
            match piece.kind {
                Kind::Prime(_) => at += 1,
                Kind::OpenIndex => at = self.behind_bracket(at),
                _ => break,
            }
        }
        at
    }

    /// Behind the partner of the bracket at this piece.
    fn behind_bracket(&self, open: usize) -> usize {
        let depth = self.pieces[open].depth;
        let close = (open + 1..self.pieces.len()).find(|at| self.pieces[*at].depth <= depth);
        close.map_or(self.pieces.len(), |at| at + 1)
    }

    fn sum(&mut self, piece: Piece) {
        self.at += 1;
        self.emit(Token::Sum, piece.span);
        self.pass(Kind::Open);
        if self.kind(self.at) == Some(Kind::Word) {
            let index = read_name(self.text_at(self.at)).0;
            self.bound.push((piece.depth, index));
            self.plain();
            if self.is_word(self.at, "in") {
                let span = self.pieces[self.at].span;
                self.at += 1;
                self.emit(Token::In, span);
            }
        }
    }

    /// A function of the language, its power, and the beginning of its argument.
    fn function(&mut self, name: &str, arity: Arity, span: Span, end: usize) {
        self.at += 1;
        if matches!(self.kind(self.at), Some(Kind::Prime(_))) {
            let prime = self.pieces[self.at].span;
            self.slips
                .error(codes::DERIVATIVE_MARK, span.to(prime), format!("a prime does not stand behind `{name}`"))
                .help(format!("write the derivative of {name} itself, or ({name}(…))' for the time derivative"));
            self.at += 1;
        }
        let power = self.power_of_function(name, span);
        let open = self.kind(self.at) == Some(Kind::Open);
        if open {
            self.emit(Token::Call(name.to_owned()), span);
            self.emit_all(power);
        } else {
            self.bare(name, arity, span, power, end, false);
        }
    }

    fn emit_all(&mut self, tokens: Vec<(Token, Span)>) {
        for (token, span) in tokens {
            self.emit(token, span);
        }
    }

    /// The power between a function's name and its argument: `sin² θ`, `sin^2 θ`.
    fn power_of_function(&mut self, name: &str, span: Span) -> Vec<(Token, Span)> {
        let Some(piece) = self.piece(self.at) else { return Vec::new() };
        let (token, exponent, behind) = match piece.kind {
            Kind::Superscript => (self.superscript(piece.span), piece.span, self.at + 1),
            Kind::Caret => {
                let minus = self.kind(self.at + 1) == Some(Kind::Minus);
                let at = self.at + 1 + usize::from(minus);
                let number = self.piece(at).filter(|p| p.kind == Kind::Number);
                let value = number.and_then(|p| self.text[p.span.range()].parse::<i32>().ok());
                match number.zip(value) {
                    Some((p, value)) => {
                        let value = if minus { -value } else { value };
                        (Token::Superscript(Some(value)), piece.span.to(p.span), at + 1)
                    }
                    None => {
                        self.slips
                            .error(
                                codes::FUNCTION_POWER,
                                span.to(piece.span),
                                format!("between `{name}` and its argument only an integer power may stand"),
                            )
                            .help(format!("write {name}(…)^(…)"));
                        let behind = if self.kind(self.at + 1) == Some(Kind::Open) {
                            self.behind_bracket(self.at + 1)
                        } else {
                            (self.at + 2).min(self.pieces.len())
                        };
                        self.at = behind;
                        return Vec::new();
                    }
                }
            }
            _ => return Vec::new(),
        };
        self.at = behind;
        if token == Token::Superscript(Some(-1)) {
            let shown = &self.text[exponent.range()];
            let slip = self.slips.error(
                codes::INVERSE_OR_RECIPROCAL,
                span.to(exponent),
                format!("`{name}{shown}` may mean the inverse function or 1/{name}"),
            );
            if matches!(name, "sin" | "cos" | "tan") {
                slip.mend(format!("write a{name}"), span.to(exponent), format!("a{name}"));
            }
            let edits = vec![(point(span.start), "1/".to_owned()), (exponent, String::new())];
            slip.mends(format!("write 1/{name}"), edits);
        }
        vec![(token, exponent)]
    }

    /// `√`: before a parenthesis, one name or one number.
    fn root(&mut self, piece: Piece, end: usize) {
        self.at += 1;
        if self.kind(self.at) == Some(Kind::Open) {
            self.emit(Token::Call("sqrt".to_owned()), piece.span);
        } else {
            self.bare("sqrt", Arity::One, piece.span, Vec::new(), end, true);
        }
    }

    /// The argument of a function without parentheses: one name with its index and primes.
    fn bare(&mut self, name: &str, arity: Arity, span: Span, power: Vec<(Token, Span)>, end: usize, root: bool) {
        let start = self.at;
        let first = self.piece(start).filter(|_| start < end).map(|p| p.kind);
        if matches!(first, Some(Kind::Gap | Kind::Unknown)) {
            // Of what stands there a slip tells already.
            return self.emit_call(name, span, power, Some(start + 1));
        }
        let written = if root { "√" } else { name };
        let gap = if root { "" } else { " " };
        let single_name = first == Some(Kind::Word) && arity == Arity::One && !self.is_call(start);
        let argument_end = match first {
            Some(Kind::Word) if single_name => self.marks_end(start + 1),
            Some(Kind::Number) => start + 1,
            Some(Kind::Minus) => self.operand_end(start + 1, end),
            Some(kind) if kind.begins_operand() || kind == Kind::Root => self.operand_end(start, end),
            _ => {
                // Where a power between the two could not be read, the argument went with it.
                if !self.slips.touches(span) {
                    self.slips
                        .error(codes::FUNCTION_ARGUMENT, span, format!("`{written}` has no argument"))
                        .help(format!("write its argument in parentheses: {written}(…)"));
                }
                return self.emit_call(name, span, power, None);
            }
        }
        .min(end);
        let argument = self.pieces[start].span.to(self.pieces[argument_end - 1].span);
        let shown = self.text[argument.range()].to_owned();
        let next = self.piece(argument_end).filter(|_| argument_end < end);
        let raised = next.filter(|p| matches!(p.kind, Kind::Superscript | Kind::Caret));
        if let Some(raised) = raised {
            let behind =
                if raised.kind == Kind::Caret { self.operand_end(argument_end + 1, end) } else { argument_end + 1 };
            let exponent = raised.span.to(self.pieces[behind.min(self.pieces.len()) - 1].span);
            let exponent = &self.text[exponent.range()];
            let whole = span.to(self.pieces[behind.min(self.pieces.len()) - 1].span);
            self.slips
                .error(
                    codes::FUNCTION_POWER,
                    whole,
                    format!("a power behind `{written}{gap}{shown}` may belong to either"),
                )
                .mend(format!("write {written}({shown}{exponent})"), whole, format!("{written}({shown}{exponent})"))
                .mend(format!("write {written}({shown}){exponent}"), whole, format!("{written}({shown}){exponent}"));
            return self.emit_call(name, span, power, Some(argument_end));
        }
        if single_name {
            self.emit(Token::Bare(name.to_owned()), span);
            self.emit_all(power);
            self.plain();
            return self.formula_to(argument_end);
        }
        if first == Some(Kind::Number) {
            let factor = next.filter(|p| p.kind.begins_operand() || p.kind == Kind::Root);
            let touches = factor.is_some_and(|p| p.span.start == argument.end);
            if root && !touches {
                self.emit(Token::Bare(name.to_owned()), span);
                return self.plain();
            }
            let behind = if factor.is_some() { self.operand_end(argument_end, end) } else { argument_end };
            let whole = span.to(self.pieces[behind - 1].span);
            let both = &self.text[argument.start as usize..whole.end as usize];
            let message = format!("the argument of `{written}` is one name, or stands in parentheses");
            let slip = self.slips.error(codes::FUNCTION_ARGUMENT, whole, message);
            slip.mend(format!("write {written}({both})"), whole, format!("{written}({both})"));
            if factor.is_some() {
                let rest = &self.text[argument.end as usize..whole.end as usize].trim_start();
                slip.mend(format!("write {written}({shown}) {rest}"), whole, format!("{written}({shown}) {rest}"));
            }
            return self.emit_call(name, span, power, Some(behind));
        }
        let message = if arity == Arity::One {
            format!("the argument of `{written}` is one name, or stands in parentheses")
        } else {
            format!("the arguments of `{written}` stand in parentheses")
        };
        self.slips.error(codes::FUNCTION_ARGUMENT, span.to(argument), message).mend(
            format!("write {written}({shown})"),
            Span { start: span.end, end: argument.end },
            format!("({shown})"),
        );
        self.emit_call(name, span, power, Some(argument_end));
    }

    /// Emits a call as if its argument, up to a piece, stood in parentheses.
    fn emit_call(&mut self, name: &str, span: Span, power: Vec<(Token, Span)>, argument_end: Option<usize>) {
        self.emit(Token::Call(name.to_owned()), span);
        self.emit_all(power);
        self.emit(Token::Open, point(span.end));
        match argument_end {
            Some(end) => self.formula_to(end),
            None => self.emit(Token::Gap, point(span.end)),
        }
        let end = self.end();
        self.emit(Token::Close, point(end));
    }

    /// Whether the name at a piece is a function here.
    fn is_call(&self, at: usize) -> bool {
        let name = read_name(self.text_at(at)).0;
        let sum = name == "sum" && self.kind(at + 1) == Some(Kind::Open);
        let declared = || self.callable.declares(&name) && self.kind(self.marks_end(at + 1)) == Some(Kind::Open);
        !self.shadowed(&name) && (sum || builtin(&name).is_some() || declared())
    }

    /// Behind the operand that begins at a piece.
    fn operand_end(&self, at: usize, end: usize) -> usize {
        let behind = match self.kind(at) {
            Some(Kind::Open | Kind::OpenBar) => self.marks_end(self.behind_bracket(at)),
            Some(Kind::Word) => {
                let marks = self.marks_end(at + 1);
                match self.kind(marks) {
                    Some(Kind::Open) if self.is_call(at) => self.marks_end(self.behind_bracket(marks)),
                    // `sin cos θ`: the inner argument too.
                    Some(Kind::Word) if self.is_call(at) => self.marks_end(marks + 1),
                    _ => marks,
                }
            }
            Some(Kind::Root) => match self.kind(at + 1) {
                Some(Kind::Open) => self.behind_bracket(at + 1),
                _ => at + 2,
            },
            Some(Kind::Minus) => at + 2,
            _ => at + 1,
        };
        behind.min(end).min(self.pieces.len()).max(at.min(self.pieces.len()))
    }
}
