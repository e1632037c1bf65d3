//! What the parser could not read, said in the language's own words: what stands there, and what to do.

use lalrpop_util::ParseError;

use crate::build::Failure;
use crate::codes;
use crate::keywords::keywords;
use crate::slips::{Completed, Slips, point};
use crate::token::{Spanned, Token};
use crate::tree::Span;

/// Turns the parser's failures into slips, except where a slip tells of the place already.
pub fn report(text: &str, tokens: &[Spanned], failures: &[Failure], slips: &mut Slips) {
    if slips.has(codes::UNBALANCED_BRACKET) || slips.has(codes::NESTING) {
        // What follows from a bracket or a gap put in by guess is not the writer's slip.
        return;
    }
    for failure in failures {
        let at = place(tokens, failure);
        let span = tokens.get(at).map_or_else(|| point(tokens.last().map_or(0, |t| t.span.end)), |t| t.span);
        let before = tokens[..at.min(tokens.len())].last().map_or(span, |t| t.span);
        let said = slips.touches(span) || at == tokens.len() && slips.touches(before);
        if !said {
            Report { text, tokens, at, span, slips }.say();
        }
    }
}

/// The number of the token that could not be read; beyond the last at the end.
fn place(tokens: &[Spanned], failure: &Failure) -> usize {
    let (start, token) = match failure {
        ParseError::UnrecognizedToken { token: (start, token, _), .. } => (*start, token),
        ParseError::ExtraToken { token: (start, token, _) } => (*start, token),
        _ => return tokens.len(),
    };
    let first = tokens.partition_point(|t| (t.span.start as usize) < start);
    let here = tokens[first..].iter().position(|t| t.span.start as usize == start && t.token == *token);
    first + here.unwrap_or(0)
}

struct Report<'r> {
    text: &'r str,
    tokens: &'r [Spanned],
    at: usize,
    span: Span,
    slips: &'r mut Slips,
}

impl Report<'_> {
    fn say(&mut self) {
        let here = self.tokens.get(self.at).map(|t| &t.token);
        let before = self.at.checked_sub(1).map(|at| self.tokens[at].clone());
        let Some(before) = before else { return self.unexpected() };
        let ends = matches!(here, None | Some(Token::Close | Token::CloseIndex | Token::CloseBar | Token::Comma));
        match (&before.token, here) {
            (Token::Range | Token::In, _) => self.nothing_behind(&before),
            _ if self.in_sum_head() => {
                self.slips
                    .error(codes::MISSING_PART, self.sum_head(), "this sum cannot be read")
                    .help("write sum(i: …) for a declared index, or sum(i in 1..7: …)");
            }
            (operator, Some(next)) if is_operator(operator) && is_operator(next) => self.two_operators(before.span),
            (operator, _) if is_operator(operator) && (ends || !begins_operand(here)) => {
                let shown = self.shown(before.span);
                self.slips
                    .error(codes::MISSING_OPERAND, before.span, format!("nothing stands behind {shown}"))
                    .help("write what it works on, or take it away")
                    .mend(format!("take {shown} away"), before.span, "");
            }
            (Token::Superscript(_), Some(Token::Caret | Token::Superscript(_))) => {
                self.slips
                    .error(codes::UNEXPECTED, before.span.to(self.span), "a power of a power needs parentheses")
                    .help("write (x²)^3 or x^(2^3)");
            }
            (_, Some(operator)) if is_operator(operator) && !before.token.ends_operand() => {
                let shown = self.shown(self.span);
                let span = self.span;
                self.slips
                    .error(codes::MISSING_OPERAND, span, format!("nothing stands before {shown}"))
                    .help("write what it works on, or take it away")
                    .mend(format!("take {shown} away"), span, "");
            }
            (Token::Name(_), Some(Token::Name(_))) if self.two_words() => {
                let (first, second) = (before.span, self.span);
                let joined = format!("{}_{}", &self.text[first.range()], &self.text[second.range()]);
                self.slips.error(codes::HEAD_NAME, first.to(second), "a name is one word").mend(
                    format!("write {joined}"),
                    first.to(second),
                    joined,
                );
            }
            _ if self.names_only(&before.token) && !matches!(here, Some(Token::Name(_))) => self.missing_name(here),
            _ if ends => self.nothing_behind(&before),
            (Token::Equals | Token::Arrow | Token::Relation(_) | Token::Colon | Token::On, Some(next))
                if separates(next) =>
            {
                self.nothing_behind(&before);
            }
            _ => self.cannot_stand(),
        }
    }

    fn shown(&self, span: Span) -> String {
        format!("`{}`", &self.text[span.range()])
    }

    /// Whether the item's name goes on with another word.
    fn two_words(&self) -> bool {
        matches!(self.tokens[..self.at - 1], [.., Spanned { token: Token::Named | Token::System, .. }])
    }

    /// Whether the innermost open bracket is a sum's whose colon has not come yet.
    fn in_sum_head(&self) -> bool {
        let mut closed = 0;
        for at in (0..self.at).rev() {
            match self.tokens[at].token {
                Token::Close | Token::CloseIndex | Token::CloseBar => closed += 1,
                Token::Open | Token::OpenIndex | Token::OpenBar if closed > 0 => closed -= 1,
                Token::Open => return at > 0 && self.tokens[at - 1].token == Token::Sum,
                Token::OpenIndex | Token::OpenBar => return false,
                Token::Colon if closed == 0 => return false,
                _ => {}
            }
        }
        false
    }

    fn sum_head(&self) -> Span {
        let sum = self.tokens[..self.at].iter().rev().find(|t| t.token == Token::Sum);
        sum.map_or(self.span, |t| t.span)
    }

    fn two_operators(&mut self, first: Span) {
        let (one, two) = (self.shown(first), self.shown(self.span));
        let second = self.span;
        self.slips
            .error(codes::MISSING_OPERAND, first.to(second), format!("nothing stands between {one} and {two}"))
            .help("write what is missing, or take one of them away")
            .mend(format!("take {two} away"), second, "")
            .mend(format!("take {one} away"), first, "");
    }

    /// Whether only a name may follow: behind the keyword of a declaration, and behind its commas.
    fn names_only(&self, before: &Token) -> bool {
        let declares = matches!(
            self.tokens[0].token,
            Token::System
                | Token::Coordinate(_)
                | Token::Parameter
                | Token::Input
                | Token::Index
                | Token::Let
                | Token::Function
        );
        let behind_unit = self.tokens[..self.at].iter().any(|t| matches!(t.token, Token::Unit | Token::Equals));
        let comma = *before == Token::Comma && (!behind_unit || self.tokens[0].token == Token::Parameter);
        let open = matches!(before, Token::Open | Token::OpenIndex) && !behind_unit;
        declares && (self.at == 1 || comma || open) || *before == Token::Named
    }

    fn missing_name(&mut self, here: Option<&Token>) {
        let keyword = self.shown(self.tokens[0].span);
        let form = self.form();
        let span = if here.is_some() { self.span } else { self.tokens[self.at - 1].span };
        let message = match here {
            Some(Token::Number(_)) => "a name begins with a letter".to_owned(),
            Some(_) => format!("a name is missing before {}", self.shown(self.span)),
            None if self.at == 1 => format!("behind {keyword} a name is missing"),
            None => format!("behind {} a name is missing", self.shown(span)),
        };
        self.slips.error(codes::MISSING_NAME, span, message).help(form);
    }

    /// How the item is written.
    fn form(&self) -> String {
        let span = self.tokens[0].span;
        let words = &self.text[span.range()];
        let last = words.split_whitespace().last().unwrap_or(words);
        match keywords().iter().find(|k| k.name == last) {
            Some(keyword) => {
                let forms: Vec<String> = keyword.follows.split(" | ").map(|f| format!("`{words} {f}`")).collect();
                format!("it is written {}", forms.join(" or "))
            }
            None => "see how such an item is written".to_owned(),
        }
    }

    /// The item, or a bracket, ends where something must follow.
    fn nothing_behind(&mut self, before: &Spanned) {
        let shown = self.shown(before.span);
        let end = self.tokens.get(self.at).is_none();
        let (code, span, message, help) = match &before.token {
            Token::Equals => (codes::MISSING_OPERAND, before.span, "nothing stands behind `=`".to_owned(), self.form()),
            Token::Arrow => (
                codes::MISSING_OPERAND,
                before.span,
                format!("nothing stands behind {shown}"),
                "write the image".to_owned(),
            ),
            Token::Relation(_) => (
                codes::MISSING_OPERAND,
                before.span,
                format!("nothing stands behind {shown}"),
                "write what it is compared with".to_owned(),
            ),
            Token::Range | Token::In => {
                let help = "write both ends: `1..7`".to_owned();
                (codes::MISSING_OPERAND, before.span, format!("nothing stands behind {shown}"), help)
            }
            Token::Unit | Token::Colon => {
                let colon =
                    self.tokens[..self.at].iter().rev().find(|t| t.token == Token::Colon).map_or(self.span, |t| t.span);
                (codes::MISSING_PART, colon, "nothing stands behind the colon".to_owned(), self.form())
            }
            Token::Comma => {
                let span = before.span;
                self.slips.error(codes::MISSING_OPERAND, span, "nothing stands behind this comma").mend(
                    "take the comma away",
                    span,
                    "",
                );
                return;
            }
            Token::Open | Token::OpenIndex | Token::OpenBar if !end => (
                codes::MISSING_OPERAND,
                before.span.to(self.span),
                "nothing stands between these brackets".to_owned(),
                "write what belongs there, or take them away".to_owned(),
            ),
            Token::On => (
                codes::MISSING_PART,
                before.span,
                "it is not said what the force acts on".to_owned(),
                "write a coordinate or a quantity behind `on`".to_owned(),
            ),
            _ if end && self.needs_more() => return,
            _ if end => {
                let words = self.shown(self.tokens[0].span);
                let span = if self.at == 1 { self.tokens[0].span } else { before.span };
                (codes::MISSING_PART, span, format!("this {words} ends too early"), self.form())
            }
            _ => return self.cannot_stand(),
        };
        self.slips.error(code, span, message).help(help);
    }

    /// A part that the item as a whole needs; says so.
    fn needs_more(&mut self) -> bool {
        let has = |token: &Token| self.tokens.iter().any(|t| t.token == *token);
        let whole = self.tokens.iter().skip(1).fold(self.tokens[0].span, |all, t| all.to(t.span));
        let (code, message, help) = match self.tokens[0].token {
            Token::Constraint if !has(&Token::Equals) => {
                (codes::MISSING_EQUALS, "a constraint has two sides", "write `constraint NAME: lhs = rhs`")
            }
            Token::Symmetry(_) if !has(&Token::Arrow) => {
                (codes::MISSING_PART, "a symmetry says what goes over into what", "write `symmetry NAME: x -> x + ε`")
            }
            Token::Index if !has(&Token::Range) => {
                (codes::MISSING_PART, "the range of this index is missing", "write `index i: 1..8`")
            }
            Token::Let if !has(&Token::Equals) => {
                (codes::MISSING_EQUALS, "this definition has no `=`", "write `let NAME = …`")
            }
            Token::Include => {
                (codes::MISSING_PART, "the name of the file is missing", "write `include \"FILE.least\"`")
            }
            Token::Run if self.at <= 4 => {
                (codes::MISSING_PART, "this run says nothing", "write `run NAME: from x = 1 m, over 20 s`")
            }
            _ => return false,
        };
        self.slips.error(code, whole, message).help(help);
        true
    }

    /// Something that does not belong there.
    fn cannot_stand(&mut self) {
        let Some(here) = self.tokens.get(self.at) else { return self.unexpected() };
        let shown = if here.span.start == here.span.end { "this".to_owned() } else { self.shown(here.span) };
        let unit = self.tokens[..self.at].iter().rev().find_map(|t| match t.token {
            Token::Unit => Some(true),
            Token::Comma | Token::Equals => Some(false),
            _ => None,
        });
        let span = self.span;
        let first = &self.tokens[0].token;
        let first_span = self.tokens[0].span;
        if here.token == Token::Comma && unit == Some(true) && matches!(first, Token::Coordinate(_) | Token::Input) {
            let keyword = &self.text[first_span.range()];
            let behind = self.tokens.get(self.at + 1).map_or(span.end, |next| next.span.start);
            self.slips
                .error(codes::UNEXPECTED, span, "the names of one item share one quantity")
                .help("begin another item for another quantity")
                .mend("begin another item", Span { start: span.start, end: behind }, format!("\n{keyword} "));
            return;
        }
        let help = match here.token {
            Token::Comma if unit == Some(true) => self.form(),
            Token::Comma => "a vector stands in parentheses: (a, b)".to_owned(),
            Token::Equals if matches!(first, Token::Term(_) | Token::Let | Token::Dissipation | Token::Conserved) => {
                "such an item has one `=`, behind its name".to_owned()
            }
            Token::Relation(_) => "comparisons stand in `assume` and behind `until`".to_owned(),
            Token::Range => "a range stands in `index i: 1..8` and in `sum(i in 1..7: …)`".to_owned(),
            Token::Arrow => "arrows stand in a `symmetry`".to_owned(),
            Token::Text(_) => "text in quotes stands behind `include`".to_owned(),
            Token::Prime(_) => "a prime stands behind what is differentiated".to_owned(),
            Token::Number(_) if unit == Some(true) => "a value is a number and one unit".to_owned(),
            _ => self.form(),
        };
        let code = codes::UNEXPECTED;
        self.slips.error(code, span, format!("{shown} cannot stand here")).help(help);
    }

    fn unexpected(&mut self) {
        let span = self.span;
        self.slips.error(codes::UNEXPECTED, span, "this cannot be read");
    }
}

fn is_operator(token: &Token) -> bool {
    matches!(
        token,
        Token::Plus
            | Token::Minus
            | Token::Negative
            | Token::Star
            | Token::Slash
            | Token::Dot
            | Token::Cross
            | Token::Caret
    )
}

fn begins_operand(token: Option<&Token>) -> bool {
    matches!(
        token,
        Some(
            Token::Name(_)
                | Token::Number(_)
                | Token::Call(_)
                | Token::Bare(_)
                | Token::Sum
                | Token::Open
                | Token::OpenBar
                | Token::Negative
                | Token::Gap
        )
    )
}

fn separates(token: &Token) -> bool {
    matches!(token, Token::Equals | Token::Arrow | Token::Relation(_) | Token::Comma | Token::Colon | Token::Range)
}
