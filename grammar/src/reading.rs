//! Pieces to tokens, item by item: which part is a head, a formula, a value, a unit.
//!
//! A keyword is one only where it can stand. What a colleague would understand in spite of a slip is put right here,
//! so that the grammar goes on and the one slip has one message.

use crate::codes;
use crate::keywords::{begins_item, near_keyword, nearest};
use crate::lexer::Kind;
use crate::names::{CallableNames, read_name};
use crate::pieces::{Piece, pieces};
use crate::slips::{Completed, Slips, point};
use crate::token::{Spanned, Token};
use crate::tree::{Relation, Span, TermKind};

/// An item's tokens.
pub struct Reading {
    /// The tokens, the keyword first; empty where there is no keyword.
    pub tokens: Vec<Spanned>,
    /// The keyword or keywords.
    pub keyword: Span,
    /// From the keyword to the last piece.
    pub span: Span,
}

/// Reads an item's text into tokens.
pub fn read_item(text: &str, callable: &CallableNames, slips: &mut Slips) -> Reading {
    let pieces = pieces(text, slips);
    let mut reader = Reader::new(text, &pieces, callable, slips);
    let (first, last) = match (pieces.first(), pieces.last()) {
        (Some(first), Some(last)) => (first.span, last.span),
        _ => (Span::default(), Span::default()),
    };
    let keyword = reader.keyword();
    if let Some((token, span)) = &keyword {
        reader.emit(token.clone(), *span);
        reader.item(token, *span);
    }
    let tokens = reader.out;
    if pieces.is_empty() {
        slips.error(codes::NO_KEYWORD, Span::default(), "an item begins with a keyword in the first column");
    }
    let keyword = keyword.map_or(first, |(_, span)| span);
    Reading { tokens, keyword, span: first.to(last).to(keyword) }
}

/// Reads a formula alone into tokens.
pub fn read_formula(text: &str, callable: &CallableNames, slips: &mut Slips) -> Reading {
    let pieces = pieces(text, slips);
    let mut reader = Reader::new(text, &pieces, callable, slips);
    reader.emit(Token::FormulaAlone, Span::default());
    reader.formula(|_| false);
    Reading { tokens: reader.out, keyword: Span::default(), span: Span::new(0, text.len()) }
}

/// Goes through the pieces once.
pub(crate) struct Reader<'t> {
    pub(crate) text: &'t str,
    pub(crate) pieces: &'t [Piece],
    /// The next piece.
    pub(crate) at: usize,
    pub(crate) out: Vec<Spanned>,
    pub(crate) slips: &'t mut Slips,
    pub(crate) callable: &'t CallableNames,
    /// Formal arguments, which shadow functions in the whole item.
    pub(crate) formals: Vec<String>,
    /// Indices of sums, which shadow functions, with the depth where they end.
    pub(crate) bound: Vec<(u16, String)>,
}

impl<'t> Reader<'t> {
    fn new(text: &'t str, pieces: &'t [Piece], callable: &'t CallableNames, slips: &'t mut Slips) -> Reader<'t> {
        Reader { text, pieces, at: 0, out: Vec::new(), slips, callable, formals: Vec::new(), bound: Vec::new() }
    }

    pub(crate) fn emit(&mut self, token: Token, span: Span) {
        self.out.push(Spanned { token, span });
    }

    pub(crate) fn piece(&self, at: usize) -> Option<Piece> {
        self.pieces.get(at).copied()
    }

    pub(crate) fn kind(&self, at: usize) -> Option<Kind> {
        self.pieces.get(at).map(|p| p.kind)
    }

    pub(crate) fn text_at(&self, at: usize) -> &'t str {
        self.pieces.get(at).map_or("", |p| &self.text[p.span.range()])
    }

    pub(crate) fn is_word(&self, at: usize, word: &str) -> bool {
        self.kind(at) == Some(Kind::Word) && self.text_at(at) == word
    }

    /// Where the pieces read so far end.
    pub(crate) fn end(&self) -> u32 {
        self.at.checked_sub(1).map_or(0, |last| self.pieces[last].span.end)
    }

    /// The first piece outside of brackets of this kind, from the next piece on.
    pub(crate) fn find(&self, kind: Kind) -> Option<usize> {
        (self.at..self.pieces.len()).find(|at| self.pieces[*at].depth == 0 && self.pieces[*at].kind == kind)
    }

    /// Reads the keyword, a misspelt one with a slip.
    fn keyword(&mut self) -> Option<(Token, Span)> {
        let first = self.piece(0)?;
        let mut word = self.text_at(0);
        if first.span.start > 0 && self.text[..first.span.start as usize].ends_with([' ', '\t'])
            || first.kind != Kind::Word
        {
            word = "";
        } else if !begins_item(word) {
            match near_keyword(word) {
                Some(near) => {
                    let span = first.span;
                    self.slips
                        .error(codes::UNKNOWN_KEYWORD, span, format!("`{word}` is no keyword; did you mean `{near}`?"))
                        .mend(format!("write {near}"), span, near);
                    word = near;
                }
                None => word = "",
            }
        }
        self.at = 1;
        let mut span = first.span;
        let token = match word {
            "system" => Token::System,
            "coordinate" => Token::Coordinate(false),
            "parameter" => Token::Parameter,
            "input" => Token::Input,
            "index" => Token::Index,
            "let" => Token::Let,
            "function" => Token::Function,
            "assume" => Token::Assume,
            "kinetic" => Token::Term(TermKind::Kinetic),
            "potential" => Token::Term(TermKind::Potential),
            "lagrangian" => Token::Term(TermKind::Lagrangian),
            "dissipation" => Token::Dissipation,
            "force" => Token::Force,
            "constraint" => Token::Constraint,
            "symmetry" => Token::Symmetry(false),
            "conserved" => Token::Conserved,
            "run" => Token::Run,
            "include" => Token::Include,
            "cyclic" => self.second_word("cyclic", "coordinate", &mut span, Token::Coordinate(true)),
            "broken" => self.second_word("broken", "symmetry", &mut span, Token::Symmetry(true)),
            _ => {
                self.no_keyword(first);
                return None;
            }
        };
        Some((token, span))
    }

    /// The word behind `cyclic` and `broken`.
    fn second_word(&mut self, first: &str, expected: &str, span: &mut Span, token: Token) -> Token {
        let word = self.text_at(1);
        if self.kind(1) == Some(Kind::Word) && (word == expected || nearest(word, [expected].into_iter()).is_some()) {
            let place = self.pieces[1].span;
            if word != expected {
                self.slips
                    .error(codes::UNKNOWN_KEYWORD, place, format!("`{word}` is no keyword; did you mean `{expected}`?"))
                    .mend(format!("write {expected}"), place, expected);
            }
            self.at = 2;
            *span = span.to(place);
        } else {
            self.slips.error(codes::MISSING_PART, *span, format!("`{first}` stands before `{expected}`")).mend(
                format!("write {first} {expected}"),
                point(span.end),
                format!(" {expected}"),
            );
        }
        token
    }

    fn no_keyword(&mut self, first: Piece) {
        let line_end = self.text.find(['\n', '\r']).unwrap_or(self.text.len());
        let on_line = |p: &&Piece| p.span.end as usize <= line_end.max(first.span.end as usize);
        let last = self.pieces.iter().take_while(on_line).last().map_or(first.span, |p| p.span);
        let span = first.span.to(last);
        if self.slips.touches(span) {
            return;
        }
        let slip = self.slips.error(codes::NO_KEYWORD, span, "an item begins with a keyword in the first column");
        if first.kind != Kind::Word || first.span.start > 0 {
            slip.help("to continue the item above, indent the line");
            slip.mend("indent the line", point(first.span.start), "    ");
        } else {
            slip.help("such as `coordinate`, `parameter`, `let`, `kinetic`, `potential`");
            slip.mend("make it a comment", point(first.span.start), "# ");
        }
    }

    /// The rest of an item behind its keyword.
    fn item(&mut self, token: &Token, keyword: Span) {
        match token {
            Token::System => self.system(),
            Token::Coordinate(_) | Token::Input => {
                self.head(Kind::Colon, true);
                self.quantity_at_colon(|_| false);
            }
            Token::Parameter => self.parameters(),
            Token::Index => {
                self.head(Kind::Colon, true);
                self.pass(Kind::Colon);
                self.formula(|_| false);
            }
            Token::Let => self.definition(),
            Token::Function => {
                self.collect_formals(Kind::Colon);
                self.head(Kind::Colon, false);
                self.quantity_at_colon(|_| false);
            }
            Token::Term(_) | Token::Dissipation | Token::Conserved => self.term(keyword),
            Token::Force => self.force(keyword),
            Token::Constraint => {
                if self.find(Kind::Colon).is_some() {
                    self.emit(Token::Named, point(self.end()));
                    self.head(Kind::Colon, false);
                    self.pass(Kind::Colon);
                }
                self.formula(|_| false);
            }
            Token::Symmetry(_) => self.symmetry(),
            Token::Run => self.run(),
            Token::Assume => self.formula(|_| false),
            Token::Include => self.file(),
            _ => self.head(Kind::Gap, false),
        }
        // What no part has read cannot stand there; the grammar says so at its place.
        while self.at < self.pieces.len() {
            self.plain();
        }
    }

    /// Emits one piece without looking at its surroundings; names are names.
    pub(crate) fn plain(&mut self) {
        let Some(piece) = self.piece(self.at) else { return };
        self.at += 1;
        let span = piece.span;
        let token = match piece.kind {
            Kind::Word => {
                let (name, order) = read_name(&self.text[span.range()]);
                self.emit(Token::Name(name), span);
                if order > 0 {
                    self.emit(Token::Prime(order), point(span.end));
                }
                return;
            }
            Kind::Number => self.number(span),
            Kind::Text => Token::Text(self.text[span.range()].trim_matches('"').to_owned()),
            Kind::Superscript => self.superscript(span),
            Kind::Prime(order) => Token::Prime(order),
            Kind::Plus => Token::Plus,
            Kind::Minus => {
                let binary = self.out.last().is_some_and(|last| last.token.ends_operand());
                if binary { Token::Minus } else { Token::Negative }
            }
            Kind::Star => Token::Star,
            Kind::Slash => Token::Slash,
            Kind::Caret => Token::Caret,
            Kind::Dot => Token::Dot,
            Kind::Cross => Token::Cross,
            Kind::Equals => Token::Equals,
            Kind::Arrow => Token::Arrow,
            Kind::Less => Token::Relation(Relation::Less),
            Kind::LessEqual => Token::Relation(Relation::LessEqual),
            Kind::Greater => Token::Relation(Relation::Greater),
            Kind::GreaterEqual => Token::Relation(Relation::GreaterEqual),
            Kind::NotEqual => Token::Relation(Relation::NotEqual),
            Kind::Comma => Token::Comma,
            Kind::Colon => Token::Colon,
            Kind::Range => Token::Range,
            Kind::Open => Token::Open,
            Kind::Close => Token::Close,
            Kind::OpenIndex => Token::OpenIndex,
            Kind::CloseIndex => Token::CloseIndex,
            Kind::OpenBar => Token::OpenBar,
            Kind::CloseBar => Token::CloseBar,
            Kind::Gap | Kind::Unknown => Token::Gap,
            Kind::Point => {
                self.slips
                    .error(codes::UNEXPECTED, span, "a point stands alone")
                    .help("a product is written with a space or `·`, a range with `..`");
                return;
            }
            _ => Token::Stray,
        };
        self.emit(token, span);
    }

    /// Emits the next piece if it is of this kind.
    pub(crate) fn pass(&mut self, kind: Kind) -> bool {
        let found = self.kind(self.at) == Some(kind);
        if found {
            self.plain();
        }
        found
    }

    /// Names up to a sign outside of brackets. In a list, two names side by side miss a comma.
    pub(crate) fn head(&mut self, stop: Kind, list: bool) {
        let from = self.at;
        while let Some(piece) = self.piece(self.at) {
            if piece.depth == 0 && (piece.kind == stop || self.indented_keyword()) {
                return;
            }
            let follows_name = self.at > from
                && matches!(self.pieces[self.at - 1].kind, Kind::Word | Kind::CloseIndex)
                && piece.kind == Kind::Word;
            if list && piece.depth == 0 && follows_name {
                self.missing_separator(piece.span, stop);
            }
            self.plain();
        }
    }

    fn missing_separator(&mut self, next: Span, stop: Kind) {
        let before = self.pieces[self.at - 1].span;
        let colon = stop == Kind::Colon && self.find(Kind::Colon).is_none() && self.at + 1 == self.pieces.len();
        let (what, sign) = if colon { ("a colon or comma", ":") } else { ("a comma", ",") };
        let slip =
            self.slips.error(codes::MISSING_SEPARATOR, before.to(next), format!("{what} is missing between these"));
        slip.mend(format!("put in `{sign}`"), point(before.end), sign);
        if colon {
            slip.mend("put in `,`", point(before.end), ",");
            // The quantity is read as one, so that the coordinate keeps it.
            self.emit(Token::Colon, point(before.end));
            self.quantity(|_| false);
        } else {
            self.emit(Token::Comma, point(before.end));
        }
    }

    /// At a keyword that begins an indented line where the item is complete: a slip, and the rest is left out.
    pub(crate) fn indented_keyword(&mut self) -> bool {
        let Some(piece) = self.piece(self.at) else { return false };
        let complete = self.at > 1 && self.pieces[self.at - 1].kind.ends_operand();
        if !(piece.begins_line && piece.depth == 0 && complete && piece.kind == Kind::Word) {
            return false;
        }
        let word = self.text_at(self.at);
        let item =
            begins_item(word) && !matches!(self.kind(self.at + 1), Some(Kind::Equals | Kind::Comma | Kind::Prime(_)));
        if item && self.at < self.pieces.len() {
            let start = self.text[..piece.span.start as usize].rfind(['\n', '\r']).map_or(0, |at| at as u32 + 1);
            self.slips
                .error(
                    codes::INDENTED_KEYWORD,
                    piece.span,
                    format!("`{word}` is indented, so it continues the item above"),
                )
                .help("an item begins in the first column")
                .mend("move it to the first column", Span { start, end: piece.span.start }, "");
            self.pieces = &self.pieces[..self.at];
        }
        item
    }

    fn system(&mut self) {
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

    fn definition(&mut self) {
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
    fn collect_formals(&mut self, stop: Kind) {
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
    fn file(&mut self) {
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

    fn term(&mut self, keyword: Span) {
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

    fn force(&mut self, keyword: Span) {
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

    fn symmetry(&mut self) {
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
