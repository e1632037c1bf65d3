//! Quantities, units and values to tokens, and the items made of them: parameters and runs.

use crate::codes;
use crate::keywords::nearest;
use crate::lexer::Kind;
use crate::names::{fold_letters, read_name};
use crate::pieces::Piece;
use crate::reading::Reader;
use crate::slips::{Completed, point};
use crate::token::{Spanned, Token};
use crate::tree::{Number, Span};

impl Reader<'_> {
    /// `m₁, m₂: mass = 1 kg, v: velocity = 2 m/s`.
    pub(crate) fn parameters(&mut self) {
        while self.at < self.pieces.len() {
            self.declared_parameter();
            if self.pass(Kind::Colon) {
                self.quantity(|kind| matches!(kind, Kind::Equals | Kind::Comma));
            }
            if self.pass(Kind::Equals) {
                self.value(|reader, at| reader.kind(at) == Some(Kind::Comma));
            }
            if !self.pass(Kind::Comma) {
                return;
            }
        }
    }

    /// The name of a parameter; before another name or a number a sign is missing.
    fn declared_parameter(&mut self) {
        let from = self.at;
        while let Some(piece) = self.piece(self.at) {
            if piece.depth == 0
                && (matches!(piece.kind, Kind::Colon | Kind::Equals | Kind::Comma) || self.indented_keyword())
            {
                return;
            }
            let follows = self.at > from && matches!(self.pieces[self.at - 1].kind, Kind::Word | Kind::CloseIndex);
            if follows && piece.depth == 0 && matches!(piece.kind, Kind::Word | Kind::Number | Kind::Minus) {
                let before = self.pieces[self.at - 1].span;
                let (sign, token) = match piece.kind {
                    Kind::Word => (",", Token::Comma),
                    _ => (" =", Token::Equals),
                };
                let code = if sign == "," { codes::MISSING_SEPARATOR } else { codes::MISSING_EQUALS };
                self.slips
                    .error(code, before.to(piece.span), format!("a `{}` is missing between these", sign.trim()))
                    .mend(format!("put in `{}`", sign.trim()), point(before.end), sign);
                self.emit(token, point(before.end));
                if sign != "," {
                    return self.value(|reader, at| reader.kind(at) == Some(Kind::Comma));
                }
            }
            self.plain();
        }
    }

    /// A colon and the quantity behind it, if there is a colon.
    pub(crate) fn quantity_at_colon(&mut self, stop: impl Fn(Kind) -> bool) {
        if self.pass(Kind::Colon) {
            self.quantity(stop);
        }
    }

    /// A quantity's name or a unit.
    pub(crate) fn quantity(&mut self, stop: impl Fn(Kind) -> bool) {
        self.emit(Token::Unit, point(self.end()));
        let end = (self.at..self.pieces.len()).find(|at| self.pieces[*at].depth == 0 && stop(self.pieces[*at].kind));
        self.unit(end.unwrap_or(self.pieces.len()));
    }

    /// A value up to a place outside of brackets: arithmetic of numbers, then a unit.
    pub(crate) fn value(&mut self, stop: impl Fn(&Self, usize) -> bool) {
        let end = (self.at..self.pieces.len())
            .find(|at| self.pieces[*at].depth == 0 && stop(self, *at))
            .unwrap_or(self.pieces.len());
        let begins_unit = |at: &usize| match self.pieces[*at].kind {
            Kind::Word | Kind::Degree | Kind::Prime(_) => true,
            // `3 1/(m s)`
            Kind::Open => self.kind(at + 1) == Some(Kind::Word),
            _ => false,
        };
        let unit = (self.at..end).find(|at| self.pieces[*at].depth == 0 && begins_unit(at));
        let mut start = unit.unwrap_or(end);
        if unit.is_some() && start > self.at && self.kind(start - 1) == Some(Kind::Slash) {
            let one =
                start >= self.at + 3 && self.text_at(start - 2) == "1" && self.pieces[start - 3].kind.ends_operand();
            start -= if one { 2 } else { 1 };
        }
        if self.at == end {
            // The grammar says that the value is missing.
            return;
        }
        if self.names_in_value(self.at, end, start) {
            self.at = end;
            return;
        }
        let first = self.out.len();
        self.constant(start);
        if start == end {
            return;
        }
        if !self.arcs(first, end) {
            self.emit(Token::Unit, point(self.end()));
            self.unit(end);
        }
    }

    /// Whether a value begins with a name or has one among its numbers; then a slip and a gap.
    fn names_in_value(&mut self, from: usize, end: usize, unit: usize) -> bool {
        let is_name = |at: &usize| self.kind(*at) == Some(Kind::Word) || self.kind(*at) == Some(Kind::Root);
        let is_pi = |at: &usize| self.kind(*at) == Some(Kind::Word) && read_name(self.text_at(*at)).0 == "π";
        let name = (from..unit).find(is_name).or_else(|| (from..end).find(is_pi)).or((unit == from).then_some(from));
        let Some(at) = name else { return false };
        if self.indented_keyword() {
            return false;
        }
        let span = self.pieces[at].span;
        let outside = |p: &Piece| p.depth == 0 && matches!(p.kind, Kind::Comma | Kind::Colon);
        let parameter = self.is_word(0, "parameter") && !self.pieces.iter().any(outside);
        let (keyword, word) = (self.pieces[0].span, self.kind(at) == Some(Kind::Word));
        // A word behind a number, or alone, may be a unit.
        let unit =
            self.kind(end - 1) == Some(Kind::Word) && (end == from + 1 || self.pieces[end - 2].kind.ends_operand());
        let slip = self
            .slips
            .error(codes::VALUE_FORM, span, "a value is arithmetic of numbers, then one unit; it has no names")
            .help("write the number, or define the quantity with `let`");
        if parameter && word && !unit {
            slip.mend("make it a definition with `let`", keyword, "let");
        }
        self.emit(Token::Gap, self.pieces[from].span.to(self.pieces[end - 1].span));
        true
    }

    /// Arithmetic of numbers up to a piece.
    fn constant(&mut self, end: usize) {
        let start = self.at;
        while self.at < end {
            let Some(piece) = self.piece(self.at) else { return };
            let side_by_side =
                self.at > start && self.pieces[self.at - 1].kind.ends_operand() && piece.kind.begins_operand();
            if side_by_side && !self.slips.touches(piece.span) {
                let span = self.pieces[self.at - 1].span.to(piece.span);
                let gap = Span { start: self.pieces[self.at - 1].span.end, end: piece.span.start };
                self.slips
                    .error(codes::VALUE_FORM, span, "two numbers stand side by side")
                    .help("write `*` between them, or take one away")
                    .mend("put in `*`", gap, " * ");
            }
            match piece.kind {
                Kind::Number => self.decimal(piece),
                Kind::Cross | Kind::Dot => {
                    self.at += 1;
                    self.emit(Token::Star, piece.span);
                }
                _ => self.plain(),
            }
        }
    }

    /// `4° 30′ 10″` is (4 + 30/60 + 10/3600)°: puts the parts behind the first into the number.
    ///
    /// `first` is the first token of the number.
    fn arcs(&mut self, first: usize, end: usize) -> bool {
        let sign = |reader: &Self, at: usize| reader.piece(at).filter(|_| at < end).and_then(|p| reader.arc(p));
        let Some(largest) = sign(self, self.at) else { return false };
        let mut parts = Vec::new();
        let mut at = self.at;
        let mut smaller = largest;
        while self.kind(at + 1) == Some(Kind::Number) && at + 1 < end {
            let Some(next) = sign(self, at + 2).filter(|next| *next > smaller) else { break };
            parts.push((at + 1, 60_u32.pow(u32::from(next - largest))));
            smaller = next;
            at += 2;
        }
        if parts.is_empty() {
            return false;
        }
        let negative = self.out.get(first).is_some_and(|s| s.token == Token::Negative);
        let open = point(self.pieces[self.at].span.start);
        if negative {
            self.out.insert(first + 1, Spanned { token: Token::Open, span: point(self.out[first].span.end) });
        }
        for (at, divisor) in parts {
            let span = self.pieces[at].span;
            self.emit(Token::Plus, point(span.start));
            let number = self.number(span);
            self.emit(number, span);
            self.emit(Token::Slash, point(span.end));
            self.emit(Token::Number(Number { digits: divisor.to_string(), exponent: 0 }), point(span.end));
        }
        if negative {
            self.emit(Token::Close, point(self.pieces[at].span.start));
        }
        // The unit is the first sign; it stands where the value's numbers begin to end.
        self.emit(Token::Unit, open);
        let symbol = ["°", "′", "″"][usize::from(largest)];
        self.emit(Token::Name(symbol.to_owned()), self.pieces[self.at].span);
        for sign in self.at..=at {
            self.typed_arc(sign);
        }
        self.at = at + 1;
        true
    }

    /// Arc minutes and seconds typed as quotes get a slip.
    fn typed_arc(&mut self, at: usize) {
        let span = self.pieces[at].span;
        if self.text[span.range()].starts_with('\'') {
            let symbol = if span.end - span.start == 1 { "′" } else { "″" };
            self.slips.error(codes::VALUE_FORM, span, "arc minutes are written `′`, arc seconds `″`").mend(
                format!("write {symbol}"),
                span,
                symbol,
            );
        }
    }

    /// 0 for degrees, 1 for arc minutes, 2 for arc seconds.
    fn arc(&self, piece: Piece) -> Option<u8> {
        match piece.kind {
            Kind::Degree if &self.text[piece.span.range()] == "°" => Some(0),
            Kind::Prime(1) => Some(1),
            Kind::Prime(2) => Some(2),
            _ => None,
        }
    }

    /// The factors of a unit up to a piece.
    fn unit(&mut self, end: usize) {
        let from = self.at;
        let mut slash = None;
        while self.at < end {
            let Some(piece) = self.piece(self.at) else { return };
            let exponent = self.at > from && self.pieces[self.at - 1].kind == Kind::Caret;
            let starts = matches!(piece.kind, Kind::Word | Kind::Degree | Kind::Open) && piece.depth == 0 && !exponent;
            if piece.begins_line && starts && self.at > from && self.indented_keyword() {
                return;
            }
            let more = starts || matches!(piece.kind, Kind::Slash | Kind::Dot | Kind::Star) && piece.depth == 0;
            if let Some(at) = slash.filter(|at| more && self.at > at + 1) {
                return self.quotient_unit(from, at, end);
            }
            if piece.kind == Kind::Slash && piece.depth == 0 {
                slash = Some(self.at);
            }
            self.unit_piece(piece, from);
        }
    }

    fn unit_piece(&mut self, piece: Piece, from: usize) {
        let span = piece.span;
        match piece.kind {
            Kind::Word | Kind::Degree => {
                self.at += 1;
                self.emit(Token::Name(fold_letters(&self.text[span.range()])), span);
            }
            Kind::Prime(order) if order <= 2 && self.at == from => {
                let symbol = if order == 1 { "′" } else { "″" };
                self.typed_arc(self.at);
                self.at += 1;
                self.emit(Token::Name(symbol.to_owned()), span);
            }
            _ => self.plain(),
        }
    }

    /// `N/m s`: both readings are offered; the rest of the unit is left out.
    fn quotient_unit(&mut self, from: usize, slash: usize, end: usize) {
        let span = self.pieces[from].span.to(self.pieces[end - 1].span);
        let text = |from: usize, to: usize| {
            // Above the `/` of `4 /m s` stands nothing.
            let (Some(first), true) = (self.piece(from), from < to) else { return String::new() };
            self.text[first.span.start as usize..self.pieces[to - 1].span.end as usize]
                .trim_matches(['/', '*', '·'])
                .replace('/', " ")
                .trim()
                .to_owned()
        };
        let (above, first, rest) = (text(from, slash), text(slash + 1, self.at), text(self.at, end));
        let twice = self.kind(self.at) == Some(Kind::Slash);
        let slip = self.slips.error(codes::QUOTIENT_UNIT, span, "behind `/` a product needs parentheses");
        let below = format!("{above}/({first} {rest})");
        slip.mend(format!("write {below}"), span, below);
        if !twice {
            let beside = format!("{above} {rest}/{first}").trim_start().to_owned();
            slip.mend(format!("write {beside}"), span, beside);
        }
        self.at = end;
    }

    /// `run NAME: from x = 1 m, x' = 0, over 20 s, until x < 0, with u = 2`.
    pub(crate) fn run(&mut self) {
        if self.find(Kind::Colon).is_some() {
            self.emit(Token::Named, point(self.end()));
            self.head(Kind::Colon, false);
            self.pass(Kind::Colon);
        } else if !self.named_run() {
            return;
        }
        let mut clause: Option<Token> = None;
        while let Some(piece) = self.piece(self.at) {
            if let Some(found) = self.clause(self.at) {
                self.at += 1;
                self.emit(found.clone(), piece.span);
                clause = Some(found);
            } else {
                let from = clause.clone().unwrap_or_else(|| self.unknown_clause(piece));
                // What goes on after a comma belongs to the clause before it.
                let at = self.end();
                self.emit(from.clone(), point(at));
                clause = Some(from);
            }
            let ends = |reader: &Self, at: usize| {
                reader.kind(at) == Some(Kind::Comma)
                    || reader.clause(at).is_some() && reader.pieces[at - 1].kind.ends_operand()
            };
            match clause {
                Some(Token::Over) => self.value(ends),
                Some(Token::Until) => self.formula_until(ends),
                ref other => {
                    self.formula_until(|reader, at| reader.kind(at) == Some(Kind::Equals) || ends(reader, at));
                    if self.pass(Kind::Equals) {
                        match other {
                            Some(Token::With) => self.formula_until(ends),
                            _ => self.value(ends),
                        }
                    } else {
                        self.unset_clause();
                    }
                }
            }
            if !self.pass(Kind::Comma) && self.clause(self.at).is_some() {
                let end = self.end();
                let next = self.pieces[self.at].span;
                let word = self.text_at(self.at);
                self.slips.error(codes::MISSING_SEPARATOR, next, format!("the comma before `{word}` is missing")).mend(
                    "put in `,`",
                    point(end),
                    ",",
                );
                self.emit(Token::Comma, point(end));
            } else if self.kind(self.at.wrapping_sub(1)) != Some(Kind::Comma) {
                return;
            }
        }
    }

    /// Passes the name of a run whose colon is missing; whether anything follows.
    fn named_run(&mut self) -> bool {
        let Some(name) = self.piece(self.at).filter(|p| p.kind == Kind::Word && self.clause(self.at).is_none()) else {
            return self.at < self.pieces.len();
        };
        let alone = self.at + 1 == self.pieces.len();
        if !alone && self.clause(self.at + 1).is_none() {
            return true;
        }
        if alone {
            self.slips
                .error(codes::MISSING_PART, name.span, "this run says nothing")
                .help("write `run NAME: from x = 1 m, over 20 s`");
        } else {
            self.slips.error(codes::MISSING_SEPARATOR, name.span, "the colon behind the run's name is missing").mend(
                "put in `:`",
                point(name.span.end),
                ":",
            );
        }
        self.emit(Token::Named, point(name.span.start));
        self.plain();
        self.emit(Token::Colon, point(name.span.end));
        !alone
    }

    /// A clause `x 3 m` without its `=`.
    fn unset_clause(&mut self) {
        let end = self.end();
        let span = self.out.last().map_or(point(end), |last| last.span);
        if !self.slips.touches(span) {
            self.slips
                .error(codes::MISSING_EQUALS, span, "what this is set to is missing")
                .help("write `x = 1 m`, `u = 2`, with a comma between");
        }
        self.emit(Token::Equals, point(end));
        self.emit(Token::Gap, point(end));
    }

    /// The clause that begins at a piece.
    fn clause(&self, at: usize) -> Option<Token> {
        let piece = self.piece(at).filter(|p| p.kind == Kind::Word && p.depth == 0)?;
        let next = self.kind(at + 1);
        // `from = 1 m` is the initial value of a coordinate called `from`.
        next.filter(|k| k.begins_operand() || matches!(k, Kind::Minus | Kind::Root))?;
        match &self.text[piece.span.range()] {
            "from" => Some(Token::From),
            "over" => Some(Token::Over),
            "until" => Some(Token::Until),
            "with" => Some(Token::With),
            _ => None,
        }
    }

    /// A run that begins with no clause.
    fn unknown_clause(&mut self, piece: Piece) -> Token {
        let word = self.text_at(self.at);
        let near = nearest(word, ["from", "over", "until", "with"].into_iter());
        let next = self.kind(self.at + 1);
        match near.filter(|_| piece.kind == Kind::Word && next.is_some_and(Kind::begins_operand)) {
            Some(near) => {
                let message = format!("`{word}` begins no clause of a run; did you mean `{near}`?");
                self.slips.error(codes::UNKNOWN_KEYWORD, piece.span, message).mend(
                    format!("write {near}"),
                    piece.span,
                    near,
                );
                self.at += 1;
                match near {
                    "over" => Token::Over,
                    "until" => Token::Until,
                    "with" => Token::With,
                    _ => Token::From,
                }
            }
            None => {
                let span = Span { start: piece.span.start, end: piece.span.start };
                self.slips
                    .error(codes::MISSING_PART, piece.span, "a run begins with `from`, `over`, `until` or `with`")
                    .mend("put in `from`", span, "from ");
                Token::From
            }
        }
    }
}
