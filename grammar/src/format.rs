//! The formatter: one way to space and align, every comment kept, a broken item copied as it is.
//!
//! Neither the meaning of a text nor the set of its slips is changed, and a formatted text stays as it is.

use std::collections::{HashMap, HashSet};

use unicode_normalization::char::is_combining_mark;

use crate::items::{callable_names, lines, split};
use crate::lexer::{Kind, Lexeme, lex};
use crate::names::CallableNames;
use crate::parse::parse_with_tokens;
use crate::token::{Spanned, Token};
use crate::tree::Severity;

/// Between the longest line of a block and its comments.
const COMMENT_GAP: usize = 3;

/// A comment farther away is moved nearer.
const MOST_GAP: usize = 60;

/// Formats a file.
pub fn format(text: &str) -> String {
    format_with(text, &callable_names(split(text).iter()))
}

/// Formats a file whose functions, those of included files too, are known.
pub fn format_with(text: &str, callable: &CallableNames) -> String {
    let end = if text.contains("\r\n") { "\r\n" } else { "\n" };
    let mut rows = Vec::new();
    let mut at = if text.starts_with('\u{feff}') { 3 } else { 0 };
    let items = split(text);
    // A function may come from an included file: then the writer's space before `(` is kept.
    let includes = items.iter().any(|i| i.text.starts_with("include"));
    for (number, item) in items.iter().enumerate() {
        outside(&text[at..item.range.start], number > 0, true, &mut rows);
        let line = text[..item.range.start].rfind(['\n', '\r']).map_or(0, |at| at + 1);
        let indent = text[line..item.range.start].trim_start_matches('\u{feff}');
        let (parsed, tokens) = parse_with_tokens(&item.text, callable);
        if indent.is_empty() && parsed.slips.iter().all(|s| s.severity != Severity::Error) {
            rows.extend(Typesetter::new(&item.text, &tokens, includes).rows());
        } else {
            rows.push(Row::Verbatim(format!("{indent}{}", item.text)));
        }
        at = item.range.end;
    }
    outside(&text[at..], !items.is_empty(), false, &mut rows);
    align_terms(&mut rows);
    write(&rows, end, text.starts_with('\u{feff}'))
}

/// A line of the result.
enum Row {
    Blank,
    /// A comment alone on its line; indented ones belong to the item above.
    Comment {
        text: String,
        indented: bool,
    },
    Code {
        code: String,
        comment: Option<Comment>,
        term: Option<Term>,
    },
    Verbatim(String),
}

/// A comment behind code.
struct Comment {
    text: String,
    /// The column where it was typed; none where tabs stand before it.
    typed: Option<usize>,
}

/// The first line of a term, dissipation or force: these are aligned in a block.
struct Term {
    keyword: String,
    /// The name of an item that is aligned at its `=`.
    name: Option<String>,
    rest: String,
}

/// Comments and blank lines around items. The first line belongs to the item before, the last to the item behind.
fn outside(text: &str, behind_item: bool, before_item: bool, rows: &mut Vec<Row>) {
    let all: Vec<_> = lines(text).collect();
    let from = usize::from(behind_item);
    let to = all.len() - usize::from(before_item);
    for line in all.into_iter().take(to).skip(from) {
        let content = &text[line];
        let bare = content.trim();
        if !bare.is_empty() {
            rows.push(Row::Comment { text: bare.to_owned(), indented: !content.starts_with('#') });
        } else if !matches!(rows.last(), None | Some(Row::Blank)) {
            rows.push(Row::Blank);
        }
    }
}

/// Sets the lines of one item.
struct Typesetter<'t> {
    text: &'t str,
    item: Token,
    roles: HashMap<u32, &'t Token>,
    /// The parentheses of calls.
    calls: HashSet<u32>,
    /// Signs in indices and ranges, which stand without spaces: `x[i+1]`.
    tight: HashSet<u32>,
    includes: bool,
}

impl<'t> Typesetter<'t> {
    fn new(text: &'t str, tokens: &'t [Spanned], includes: bool) -> Typesetter<'t> {
        let written = tokens.iter().filter(|t| t.span.start < t.span.end);
        let roles = written.map(|t| (t.span.start, &t.token)).collect();
        let item = tokens.first().map_or(Token::Stray, |t| t.token.clone());
        let mut calls = HashSet::new();
        let mut head = matches!(item, Token::Let | Token::Function);
        for (at, token) in tokens.iter().enumerate() {
            match token.token {
                Token::Call(_) | Token::Sum => calls.extend(arguments(&tokens[at + 1..])),
                Token::Equals | Token::Colon => head = false,
                Token::Open if head => drop(calls.insert(token.span.start)),
                _ => {}
            }
        }
        let tight = tight_signs(tokens);
        Typesetter { text, item, roles, calls, tight, includes }
    }

    fn rows(&self) -> Vec<Row> {
        let mut rows = Vec::new();
        let mut line: Vec<Lexeme> = Vec::new();
        for lexeme in lex(self.text) {
            if lexeme.kind == Kind::Newline {
                self.row(&mut line, &mut rows);
            } else {
                line.push(lexeme);
            }
        }
        self.row(&mut line, &mut rows);
        rows
    }

    fn row(&self, line: &mut Vec<Lexeme>, rows: &mut Vec<Row>) {
        let mut lexemes = std::mem::take(line);
        let comment = lexemes.pop_if(|l| l.kind == Kind::Comment).map(|l| self.comment(l));
        let first = rows.is_empty();
        if lexemes.is_empty() {
            rows.extend(comment.map(|comment| Row::Comment { text: comment.text, indented: true }));
            return;
        }
        let code = self.line(&lexemes);
        let term = if first { self.term(&lexemes) } else { None };
        let code = if first { code } else { format!("    {code}") };
        rows.push(Row::Code { code, comment, term });
    }

    fn comment(&self, lexeme: Lexeme) -> Comment {
        let before = &self.text[..lexeme.span.start as usize];
        let line = &before[before.rfind(['\n', '\r']).map_or(0, |at| at + 1)..];
        let typed = (!line.contains('\t')).then(|| width(line));
        Comment { text: self.of(lexeme).trim_end().to_owned(), typed }
    }

    fn of(&self, lexeme: Lexeme) -> &'t str {
        &self.text[lexeme.span.range()]
    }

    fn line(&self, lexemes: &[Lexeme]) -> String {
        let mut code = String::new();
        for (at, lexeme) in lexemes.iter().enumerate() {
            if at > 0 && self.space(&lexemes[..at], *lexeme) {
                code.push(' ');
            }
            code.push_str(self.of(*lexeme));
        }
        code
    }

    /// The parts of a term's first line that are aligned.
    fn term(&self, lexemes: &[Lexeme]) -> Option<Term> {
        if !matches!(self.item, Token::Term(_) | Token::Dissipation | Token::Force) || lexemes.len() < 2 {
            return None;
        }
        // Forces stand beside the energies only where the writer set them so.
        if self.item == Token::Force && lexemes[1].span.start < lexemes[0].span.end + 2 {
            return None;
        }
        let keyword = self.of(lexemes[0]).to_owned();
        let named = self.item != Token::Force && lexemes.get(2).is_some_and(|l| l.kind == Kind::Equals);
        let (name, rest) = if named { (Some(self.of(lexemes[1]).to_owned()), 2) } else { (None, 1) };
        Some(Term { keyword, name, rest: self.line(&lexemes[rest..]) })
    }

    /// Whether a space stands between the last of `before` and `next`.
    fn space(&self, before: &[Lexeme], next: Lexeme) -> bool {
        use Kind::*;
        let Some(last) = before.last() else { return false };
        let role = |l: Lexeme| self.roles.get(&l.span.start).copied();
        match next.kind {
            Comma | Colon | Close | CloseIndex | Superscript | Prime(_) | OpenIndex => return false,
            Bar if role(next) == Some(&Token::CloseBar) => return false,
            Degree if last.kind == Number => return self.of(next) != "°",
            _ => {}
        }
        match last.kind {
            Open | OpenIndex | Root => return false,
            Bar if role(*last) == Some(&Token::OpenBar) => return false,
            Minus if role(*last) == Some(&Token::Negative) => return false,
            Comma | Colon => return true,
            _ => {}
        }
        let tight = |kind| matches!(kind, Caret | Slash | Dot | Cross | Range);
        let in_index = |l: Lexeme| self.tight.contains(&l.span.start);
        if tight(last.kind) || tight(next.kind) || in_index(*last) || in_index(next) {
            return false;
        }
        if next.kind == Open {
            let typed = last.span.end < next.span.start;
            return !self.calls.contains(&next.span.start) && (!self.includes || last.kind != Word || typed);
        }
        true
    }
}

/// The places of `+` and `-` in indices and ranges.
fn tight_signs(tokens: &[Spanned]) -> HashSet<u32> {
    let mut tight = HashSet::new();
    // For every open bracket, whether signs in it are tight; a range is so up to its colon.
    let mut open = vec![false];
    for token in tokens {
        match token.token {
            Token::Open | Token::OpenBar => open.push(false),
            Token::OpenIndex => open.push(true),
            Token::Close | Token::CloseBar | Token::CloseIndex => drop(open.pop()),
            Token::In | Token::Colon => {
                open.pop();
                open.push(token.token == Token::In || tokens[0].token == Token::Index);
            }
            Token::Plus | Token::Minus if open.last() == Some(&true) => drop(tight.insert(token.span.start)),
            _ => {}
        }
    }
    tight
}

/// The opening parenthesis of a call's arguments, behind its marks.
fn arguments(tokens: &[Spanned]) -> Option<u32> {
    let mut depth = 0_usize;
    for token in tokens {
        match token.token {
            Token::OpenIndex => depth += 1,
            Token::CloseIndex => depth = depth.saturating_sub(1),
            Token::Open if depth == 0 => return Some(token.span.start),
            Token::Prime(_) | Token::Superscript(_) => {}
            _ if depth == 0 => return None,
            _ => {}
        }
    }
    None
}

/// In a block of terms, keywords have one width, and names before `=` too.
fn align_terms(rows: &mut [Row]) {
    let is_term = |row: &Row| matches!(row, Row::Code { term: Some(_), .. });
    let mut at = 0;
    while at < rows.len() {
        let length = rows[at..].iter().take_while(|row| is_term(row)).count();
        if length > 1 {
            align_block(&mut rows[at..at + length]);
        }
        at += length.max(1);
    }
}

fn align_block(rows: &mut [Row]) {
    let widest = |part: fn(&Term) -> usize, rows: &[Row]| {
        let terms = rows.iter().filter_map(|row| match row {
            Row::Code { term: Some(term), .. } => Some(part(term)),
            _ => None,
        });
        terms.max().unwrap_or(0)
    };
    let keyword_width = widest(|t| width(&t.keyword), rows);
    let name_width = widest(|t| t.name.as_deref().map_or(0, width), rows);
    for row in rows {
        let Row::Code { code, term: Some(term), .. } = row else { continue };
        let padded = |text: &str, to: usize| format!("{text}{}", " ".repeat(to.saturating_sub(width(text))));
        *code = match &term.name {
            Some(name) => {
                format!("{} {} {}", padded(&term.keyword, keyword_width), padded(name, name_width), term.rest)
            }
            None => format!("{} {}", padded(&term.keyword, keyword_width), term.rest),
        };
    }
}

/// How wide a text is on a screen, near enough: marks stand on their letter.
fn width(text: &str) -> usize {
    text.chars().filter(|c| !is_combining_mark(*c)).count()
}

/// Writes the rows; the comments of a block stand in one column.
fn write(rows: &[Row], end: &str, mark: bool) -> String {
    let mut out = String::from(if mark { "\u{feff}" } else { "" });
    let last = rows.iter().rposition(|row| !matches!(row, Row::Blank)).map_or(0, |at| at + 1);
    let mut column = 0;
    for at in 0..last {
        match &rows[at] {
            Row::Blank => {}
            Row::Comment { text, indented } => {
                out.push_str(if *indented { "    " } else { "" });
                out.push_str(text);
            }
            Row::Verbatim(text) => out.push_str(text),
            Row::Code { code, comment, .. } => {
                if at == 0 || !matches!(rows[at - 1], Row::Code { .. }) {
                    column = comment_column(&rows[at..]);
                }
                out.push_str(code);
                if let Some(comment) = comment {
                    let width = width(code);
                    out.push_str(&" ".repeat(if width < column { column - width } else { COMMENT_GAP }));
                    out.push_str(&comment.text);
                }
            }
        }
        out.push_str(end);
    }
    out
}

/// The column of the comments in the block that begins these rows: the writer's where most of them stand in one and fit,
/// or else a little behind the longest line.
fn comment_column(rows: &[Row]) -> usize {
    let block = rows.iter().map_while(|row| match row {
        Row::Code { code, comment, .. } => Some(comment.as_ref().map(|c| (width(code), c.typed))),
        _ => None,
    });
    let commented: Vec<(usize, Option<usize>)> = block.flatten().collect();
    let typed_there = |column: usize| {
        let fits = |&&(width, typed): &&(usize, Option<usize>)| typed == Some(column) && width < column;
        commented.iter().filter(fits).count()
    };
    let longest = commented.iter().map(|(width, _)| *width).max().unwrap_or(0);
    let columns = commented.iter().filter_map(|(_, typed)| *typed).filter(|c| *c < longest + MOST_GAP);
    let most = columns.map(|column| (typed_there(column), column)).max();
    match most {
        Some((count, column)) if 2 * count > commented.len() => column,
        _ => longest + COMMENT_GAP,
    }
}
