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
}
