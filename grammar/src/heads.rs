//! Heads and bodies of the items, one method for each kind that needs more than names and a formula.

use crate::codes;
use crate::keywords::nearest;
use crate::lexer::Kind;
use crate::names::read_name;
use crate::reading::Reader;
use crate::slips::{Completed, point};
use crate::token::Token;
use crate::tree::Span;

impl Reader<'_> {
    pub(crate) fn system(&mut self) {
        while let Some(piece) = self.piece(self.at) {
            let after_comma = self.at > 1 && self.pieces[self.at - 1].kind == Kind::Comma;
            let word = self.text_at(self.at);
            if piece.kind == Kind::Word && after_comma && self.kind(self.at + 1) != Some(Kind::Equals) {
                let known = if word == "with" || word == "dimensionless" {
                    Some(word)
                } else {
                    let near = nearest(word, ["with", "dimensionless"].into_iter());
                    let message = format!("`{word}` is no option of a system");
                    let slip = self.slips.error(codes::SYSTEM_OPTION, piece.span, message);
                    slip.help("the options are `dimensionless` and `with c = 1`");
                    if let Some(near) = near {
                        slip.mend(format!("write {near}"), piece.span, near);
                    }
                    near
                };
                self.at += 1;
                match known {
                    Some("with") => self.emit(Token::With, piece.span),
                    Some(_) => self.emit(Token::Dimensionless, piece.span),
                    // The comma goes with it.
                    None => drop(self.out.pop()),
                }
                continue;
            }
            self.plain();
        }
    }

    pub(crate) fn definition(&mut self) {
        self.collect_formals(Kind::Equals);
        if self.find(Kind::Equals).is_some() {
            self.head(Kind::Equals, false);
        } else {
            // The head ends where it can no longer go on.
            self.plain();
            if self.pass(Kind::OpenIndex) {
                while self.piece(self.at).is_some_and(|p| p.depth > 0) {
                    self.plain();
                }
                self.pass(Kind::CloseIndex);
            }
            if !self.formals.is_empty() {
                while self.piece(self.at).is_some_and(|p| p.depth > 0 || p.kind == Kind::Open) {
                    self.plain();
                }
                self.pass(Kind::Close);
            }
            self.missing_equals("the definition");
        }
        self.pass(Kind::Equals);
        self.formula(|_| false);
    }

    pub(crate) fn missing_equals(&mut self, what: &str) {
        let span = self.piece(self.at).map_or(point(self.end()), |p| p.span);
        let end = self.end();
        self.slips.error(codes::MISSING_EQUALS, span, format!("the `=` before {what} is missing")).mend(
            "put in `=`",
            point(end),
            " =",
        );
        self.emit(Token::Equals, point(end));
        if self.at >= self.pieces.len() {
            self.emit(Token::Gap, point(end));
        }
    }

    /// Notes the formal arguments of a head: names and commas in parentheses.
    pub(crate) fn collect_formals(&mut self, stop: Kind) {
        let Some(open) = (self.at..self.pieces.len())
            .take_while(|at| self.kind(*at) != Some(stop))
            .find(|at| self.pieces[*at].depth == 0 && self.pieces[*at].kind == Kind::Open)
        else {
            return;
        };
        let mut names = Vec::new();
        for at in open + 1..self.pieces.len() {
            let name_next = self.pieces[at - 1].kind != Kind::Word;
            match self.pieces[at].kind {
                Kind::Close => {
                    self.formals = names;
                    return;
                }
                Kind::Word if name_next => names.push(read_name(self.text_at(at)).0),
                Kind::Comma if !name_next => {}
                _ => return,
            }
        }
    }

    /// The name of a file in quotes; without them a slip.
    pub(crate) fn file(&mut self) {
        if self.pass(Kind::Text) {
            return;
        }
        let (Some(first), Some(last)) = (self.piece(self.at), self.pieces.last()) else { return };
        let span = first.span.to(last.span);
        let name = self.text[span.range()].to_owned();
        self.slips.error(codes::MISSING_PART, span, "the name of a file stands in quotes").mend(
            "put it in quotes",
            span,
            format!("\"{name}\""),
        );
        self.emit(Token::Text(name), span);
        self.at = self.pieces.len();
    }

    pub(crate) fn term(&mut self, keyword: Span) {
        let first = self.at;
        if let Some(equals) = self.find(Kind::Equals) {
            if equals == first {
                let span = self.pieces[equals].span;
                self.slips
                    .error(codes::MISSING_NAME, span, "the name before `=` is missing")
                    .help("give the term a name, or leave out the `=` too")
                    .mend("leave out the `=`", span, "");
                self.at += 1;
                if self.find(Kind::Equals).is_some() {
                    return self.term(keyword);
                }
            } else if self.single_name(equals) {
                self.emit(Token::Named, point(keyword.end));
                self.plain();
                self.pass(Kind::Equals);
            } else {
                self.at = equals + 1;
            }
        } else if self.kind(first) == Some(Kind::Word) && self.kind(first + 1) == Some(Kind::Number) {
            // `kinetic bob 1/2 m x'^2`: nobody writes a number behind a factor.
            self.emit(Token::Named, point(keyword.end));
            self.plain();
            self.missing_equals("the formula");
        }
        self.formula(|_| false);
    }

    /// Whether the head up to `end` is one name; else a slip.
    fn single_name(&mut self, end: usize) -> bool {
        let first = self.pieces[self.at];
        let span = first.span.to(self.pieces[end - 1].span);
        if end == self.at + 1 && first.kind == Kind::Word && read_name(self.text_at(self.at)).1 == 0 {
            return true;
        }
        if self.slips.touches(span) {
            return false;
        }
        let indexed = first.kind == Kind::Word && self.kind(self.at + 1) == Some(Kind::OpenIndex);
        let slip = self.slips.error(codes::HEAD_NAME, span, "before `=` stands one name");
        if indexed {
            slip.help("a term has no index; write sum(i: …) over the family");
        } else if self.pieces[self.at..end].iter().all(|p| matches!(p.kind, Kind::Word | Kind::Minus | Kind::Number)) {
            let words: Vec<&str> = self.pieces[self.at..end]
                .iter()
                .filter(|p| p.kind != Kind::Minus)
                .map(|p| &self.text[p.span.range()])
                .collect();
            let joined = words.join("_");
            slip.mend(format!("write {joined}"), span, joined);
        } else {
            slip.help("the formula stands behind it");
        }
        false
    }

    pub(crate) fn force(&mut self, keyword: Span) {
        let equals = self.find(Kind::Equals);
        let end = equals.unwrap_or(self.pieces.len());
        let on = |reader: &Self, at: usize| at < end && reader.is_word(at, "on");
        let first = self.at;
        // `force on on = …` acts on a coordinate `on`; `force on on x = …` is called `on`.
        if on(self, first) && !(on(self, first + 1) && first + 2 < end) {
            self.at += 1;
            self.emit(Token::On, self.pieces[first].span);
        } else if on(self, first + 1) {
            self.emit(Token::Named, point(keyword.end));
            self.plain();
            self.at += 1;
            self.emit(Token::On, self.pieces[first + 1].span);
        } else {
            self.missing_on(end, keyword);
        }
        self.formula(|kind| kind == Kind::Equals);
        if equals.is_none() {
            self.missing_equals("the force");
        }
        self.pass(Kind::Equals);
        self.formula(|_| false);
    }

    fn missing_on(&mut self, end: usize, keyword: Span) {
        let first = self.at;
        let span = self.piece(first).map_or(keyword, |p| p.span);
        let two = end >= first + 2 && self.kind(first) == Some(Kind::Word) && self.kind(first + 1) == Some(Kind::Word);
        if two {
            let wrong =
                matches!(self.text_at(first + 1), "at" | "to" | "in" | "along" | "of" | "by") && end >= first + 3;
            let place = if wrong { self.pieces[first + 1].span } else { point(span.end) };
            self.slips
                .error(
                    codes::MISSING_PART,
                    span.to(self.pieces[first + 1].span),
                    "a force is written `force NAME on COORDINATE = …`",
                )
                .mend("put in `on`", place, if wrong { "on" } else { " on" });
            self.emit(Token::Named, point(keyword.end));
            self.plain();
            self.at += usize::from(wrong);
            self.emit(Token::On, point(self.end()));
        } else {
            self.slips
                .error(codes::MISSING_PART, span, "it is not said what the force acts on")
                .help("write `force NAME on COORDINATE = …`")
                .mend("put in `on`", point(keyword.end), " on");
            self.emit(Token::On, point(keyword.end));
        }
    }

    pub(crate) fn symmetry(&mut self) {
        if self.find(Kind::Colon).is_some() {
            self.emit(Token::Named, point(self.end()));
            self.head(Kind::Colon, false);
            self.pass(Kind::Colon);
        }
        let arrows = self.find(Kind::Arrow).is_some();
        loop {
            self.formula(|kind| kind == Kind::Equals);
            let Some(piece) = self.piece(self.at) else { return };
            // A coordinate goes over into its image; it is not equal to it.
            if !arrows && !self.slips.has(codes::WRONG_SIGN) {
                self.slips
                    .error(codes::WRONG_SIGN, piece.span, "a transformation is written with `->`")
                    .mend("write ->", piece.span, "->");
            }
            self.at += 1;
            self.emit(if arrows { Token::Equals } else { Token::Arrow }, piece.span);
        }
    }
}
