//! Lexemes to pieces: wrong signs and numbers are mended with a slip, bars get their side, brackets their partner.

use crate::codes;
use crate::lexer::{Kind, Lexeme, lex};
use crate::names::begins_name;
use crate::slips::{Completed, Slips, point};
use crate::tree::Span;

/// The deepest nesting of brackets, and of formulas.
pub const NESTING: usize = 256;

/// A lexeme with its place among brackets and lines.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Piece {
    /// What it is; bars have sides.
    pub kind: Kind,
    /// Where it stands; of no length where it was put in.
    pub span: Span,
    /// How many brackets are around it.
    pub depth: u16,
    /// Whether it is the first on its line.
    pub begins_line: bool,
}

/// The pieces of an item.
pub fn pieces(text: &str, slips: &mut Slips) -> Vec<Piece> {
    let lexemes = mended(text, slips);
    Balance { slips, out: Vec::with_capacity(lexemes.len()), stack: Vec::new() }.all(&lexemes)
}

/// The lexemes without comments and line ends, wrong signs put right; with each, whether it begins a line.
fn mended(text: &str, slips: &mut Slips) -> Vec<(Lexeme, bool)> {
    let mut out: Vec<(Lexeme, bool)> = Vec::new();
    let mut begins_line = true;
    let mut braces = false;
    for mut lexeme in lex(text) {
        let span = lexeme.span;
        let touching = out.last().filter(|(last, _)| last.span.end == span.start).map(|(last, _)| *last);
        match lexeme.kind {
            Kind::Comment => continue,
            Kind::Newline => {
                begins_line = true;
                continue;
            }
            Kind::Unknown => {
                if touching.is_some_and(|last| last.kind == Kind::Unknown) {
                    let last = out.len() - 1;
                    out[last].0.span.end = span.end;
                    slips.extend_last(span.end);
                    continue;
                }
                unknown(&text[span.range()], span, slips);
            }
            Kind::Point => {
                if touching.is_some_and(|last| last.kind == Kind::Number) {
                    let number = touching.map_or(span, |last| last.span);
                    let digits = &text[number.range()];
                    if text[span.end as usize..].starts_with(|c: char| c.is_ascii_digit()) {
                        slips
                            .error(codes::NUMBER_FORM, span, "a number has one decimal point")
                            .help("a range is written `1..7`");
                        continue;
                    }
                    slips
                        .error(codes::NUMBER_FORM, number.to(span), "a decimal point is followed by a digit")
                        .mend(format!("write {digits}"), number.to(span), digits)
                        .mend(format!("write {digits}.0"), number.to(span), format!("{digits}.0"));
                    continue;
                }
            }
            Kind::Number => {
                if let Some(last) = touching.filter(|last| last.kind == Kind::Point) {
                    out.pop();
                    let digits = &text[span.range()];
                    lexeme.span = last.span.to(span);
                    slips.error(codes::NUMBER_FORM, lexeme.span, "a number begins with a digit").mend(
                        format!("write 0.{digits}"),
                        lexeme.span,
                        format!("0.{digits}"),
                    );
                }
            }
            Kind::OpenText => {
                slips.error(codes::UNTERMINATED_TEXT, span, "the closing quote of this name is missing").mend(
                    "add the quote",
                    point(span.end),
                    "\"",
                );
                lexeme.kind = Kind::Text;
            }
            Kind::OpenBrace => {
                let slip = slips.error(codes::WRONG_SIGN, span, "braces are not used; write ( and )");
                let close = text[span.end as usize..].find('}').map(|at| span.end + at as u32);
                let edits = std::iter::once((span, "(".to_owned()));
                let close = close.map(|at| (Span { start: at, end: at + 1 }, ")".to_owned()));
                slip.mends("write ( and )", edits.chain(close).collect());
                lexeme.kind = Kind::Open;
                braces = true;
            }
            Kind::CloseBrace if braces => lexeme.kind = Kind::Close,
            kind => {
                if let Some((right, text)) = right_sign(kind) {
                    slips.error(codes::WRONG_SIGN, span, format!("this sign is written `{text}` here")).mend(
                        format!("write {text}"),
                        span,
                        text,
                    );
                    lexeme.kind = right;
                }
            }
        }
        out.push((lexeme, std::mem::take(&mut begins_line)));
    }
    out
}

fn right_sign(kind: Kind) -> Option<(Kind, &'static str)> {
    Some(match kind {
        Kind::EqualsEquals | Kind::ColonEquals => (Kind::Equals, "="),
        Kind::StarStar => (Kind::Caret, "^"),
        Kind::FatArrow => (Kind::Arrow, "->"),
        Kind::EqualLess => (Kind::LessEqual, "<="),
        Kind::LessGreater => (Kind::NotEqual, "!="),
        Kind::Semicolon => (Kind::Comma, ","),
        Kind::CloseBrace => (Kind::Close, ")"),
        _ => return None,
    })
}

fn unknown(character: &str, span: Span, slips: &mut Slips) {
    let c = character.chars().next().unwrap_or('\u{fffd}');
    let instead = match c {
        '’' | '‘' | '`' | 'ʹ' | 'ʼ' | '´' => "'",
        '–' | '—' | '‐' | '‑' => "-",
        '∗' | '•' | '∙' => "·",
        '÷' => "/",
        'ⁿ' => "^n",
        'ⁱ' => "^i",
        'º' | '˚' => "°",
        '“' | '”' | '„' => "\"",
        '½' => "1/2",
        '¼' => "1/4",
        '¾' => "3/4",
        '⟶' | '↦' | '⇒' => "->",
        '∥' | '‖' => "|",
        _ => "",
    };
    let shown = if c.is_control() || !(c.is_ascii_graphic() || c.len_utf8() > 1) || begins_name(c) && instead.is_empty()
    {
        format!("U+{:04X}", u32::from(c))
    } else {
        format!("`{c}`")
    };
    let slip = slips.error(codes::UNKNOWN_CHARACTER, span, format!("the language has no character {shown}"));
    if instead.is_empty() {
        slip.help("take it away, or spell it in letters").mend("take it away", span, "");
    } else {
        slip.mend(format!("write {instead}"), span, instead);
    }
}

/// A stack machine that gives every bracket a partner.
struct Balance<'s> {
    slips: &'s mut Slips,
    out: Vec<Piece>,
    stack: Vec<Lexeme>,
}

impl Balance<'_> {
    fn all(mut self, lexemes: &[(Lexeme, bool)]) -> Vec<Piece> {
        let mut at = 0;
        while let Some(&(lexeme, begins_line)) = lexemes.get(at) {
            at += 1;
            match lexeme.kind {
                Kind::Open | Kind::OpenIndex => {
                    if self.stack.len() >= NESTING {
                        at = self.cut_out(lexemes, at - 1);
                    } else {
                        self.open(lexeme, begins_line);
                    }
                }
                Kind::Bar if self.closes(lexeme) => {
                    self.close(Lexeme { kind: Kind::CloseBar, ..lexeme }, begins_line);
                }
                Kind::Bar => {
                    let around = self.stack.iter().any(|open| open.kind == Kind::OpenBar);
                    if around && !self.slips.has(codes::NESTED_BARS) {
                        self.slips
                            .error(codes::NESTED_BARS, lexeme.span, "bars do not nest")
                            .help("write norm(…) or abs(…) for the inner ones");
                    }
                    self.open(Lexeme { kind: Kind::OpenBar, ..lexeme }, begins_line);
                }
                Kind::Close | Kind::CloseIndex => self.close(lexeme, begins_line),
                kind => self.push(kind, lexeme.span, begins_line),
            }
        }
        self.close_all();
        self.out
    }

    /// Whether a bar closes one: the innermost, or, behind an operand, one outside of brackets left open.
    fn closes(&self, bar: Lexeme) -> bool {
        let behind_operand =
            self.out.last().is_some_and(|last| last.kind.ends_operand() && last.span.end <= bar.span.start);
        let open = |lexeme: &Lexeme| lexeme.kind == Kind::OpenBar;
        self.stack.last().is_some_and(open) || behind_operand && self.stack.iter().any(open)
    }

    fn push(&mut self, kind: Kind, span: Span, begins_line: bool) {
        self.out.push(Piece { kind, span, depth: self.stack.len() as u16, begins_line });
    }

    fn open(&mut self, lexeme: Lexeme, begins_line: bool) {
        self.push(lexeme.kind, lexeme.span, begins_line);
        self.stack.push(lexeme);
    }

    fn close(&mut self, lexeme: Lexeme, begins_line: bool) {
        let partner = |kind| match kind {
            Kind::Open => Kind::Close,
            Kind::OpenIndex => Kind::CloseIndex,
            _ => Kind::CloseBar,
        };
        let Some(at) = self.stack.iter().rposition(|open| partner(open.kind) == lexeme.kind) else {
            match self.stack.pop() {
                // `(a]`: the bracket has the wrong shape.
                Some(open) if open.kind != Kind::OpenBar => {
                    let right = if open.kind == Kind::Open { ")" } else { "]" };
                    self.unbalanced(lexeme.span, format!("this bracket is closed with `{right}`")).mend(
                        format!("write {right}"),
                        lexeme.span,
                        right,
                    );
                    self.push(partner(open.kind), lexeme.span, begins_line);
                }
                open => {
                    self.stack.extend(open);
                    let shown = if lexeme.kind == Kind::Close { ")" } else { "]" };
                    self.unbalanced(lexeme.span, format!("no bracket is open that this `{shown}` could close")).mend(
                        "take it away",
                        lexeme.span,
                        "",
                    );
                }
            }
            return;
        };
        if at + 1 < self.stack.len() {
            let open = self.stack[self.stack.len() - 1];
            self.unclosed(open, lexeme.span.start);
        }
        while self.stack.len() > at + 1 {
            if let Some(open) = self.stack.pop() {
                self.push(partner(open.kind), point(lexeme.span.start), false);
            }
        }
        self.stack.pop();
        self.push(lexeme.kind, lexeme.span, begins_line);
    }

    /// `f(x = …`, `U(r: …`: a list of names whose bracket is closed before the sign behind it.
    fn close_head(&mut self) {
        let [open] = self.stack[..] else { return };
        let Some(from) = self.out.iter().position(|p| p.span == open.span) else { return };
        let names = |p: &&Piece| matches!(p.kind, Kind::Word | Kind::Comma);
        let at = from + 1 + self.out[from + 1..].iter().take_while(names).count();
        let sign = self.out.get(at).is_some_and(|p| matches!(p.kind, Kind::Colon | Kind::Equals));
        if open.kind != Kind::Open || !sign || at == from + 1 || self.slips.has(codes::NESTING) {
            return;
        }
        self.stack.clear();
        let end = self.out[at - 1].span.end;
        self.unclosed(open, end);
        self.out[at..].iter_mut().for_each(|p| p.depth = p.depth.saturating_sub(1));
        self.out.insert(at, Piece { kind: Kind::Close, span: point(end), depth: 0, begins_line: false });
    }

    fn close_all(&mut self) {
        self.close_head();
        let end = self.out.last().map_or(0, |last| last.span.end);
        if let Some(open) = self.stack.last().copied().filter(|_| !self.slips.has(codes::NESTING)) {
            self.unclosed(open, end);
        }
        while let Some(open) = self.stack.pop() {
            let kind = match open.kind {
                Kind::Open => Kind::Close,
                Kind::OpenIndex => Kind::CloseIndex,
                _ => Kind::CloseBar,
            };
            self.push(kind, point(end), false);
        }
    }

    fn unclosed(&mut self, open: Lexeme, before: u32) {
        let (shown, missing) = match open.kind {
            Kind::Open => ("(", ")"),
            Kind::OpenIndex => ("[", "]"),
            _ => ("|", "|"),
        };
        let message = format!("this `{shown}` is never closed");
        let slip = self.unbalanced(open.span, message);
        slip.help(format!("the `{missing}` that belongs to it is missing"));
        slip.mend(format!("close it with {missing}"), point(before), missing);
    }

    fn unbalanced(&mut self, span: Span, message: String) -> &mut crate::tree::Slip {
        self.slips.error(codes::UNBALANCED_BRACKET, span, message)
    }

    /// Replaces the bracket at `from` and all in it by a gap; gives the place behind it.
    fn cut_out(&mut self, lexemes: &[(Lexeme, bool)], from: usize) -> usize {
        let mut open = 0_usize;
        let mut to = from;
        while let Some((lexeme, _)) = lexemes.get(to) {
            to += 1;
            match lexeme.kind {
                Kind::Open | Kind::OpenIndex => open += 1,
                Kind::Close | Kind::CloseIndex => open -= 1,
                _ => {}
            }
            if open == 0 {
                break;
            }
        }
        let first = lexemes[from].0.span;
        if !self.slips.has(codes::NESTING) {
            too_deep(self.slips, first);
        }
        self.push(Kind::Gap, first.to(lexemes[to - 1].0.span), lexemes[from].1);
        to
    }
}

/// The slip for what is nested too deeply.
pub fn too_deep(slips: &mut Slips, span: Span) {
    slips
        .error(codes::NESTING, span, format!("this is nested beyond {NESTING} levels"))
        .help("give parts of it names with `let`");
}

#[cfg(test)]
mod tests {
    use super::*;

    fn check(text: &str, kinds: &[Kind], code: Option<&str>) {
        let mut slips = Slips::default();
        let found: Vec<Kind> = pieces(text, &mut slips).iter().map(|p| p.kind).collect();
        assert_eq!(found, kinds, "{text}");
        let codes: Vec<&str> = slips.finish(text).iter().map(|s| s.code).collect();
        assert_eq!(codes, Vec::from_iter(code), "{text}");
    }

    #[test]
    fn bars_take_sides() {
        use Kind::*;
        check("|a||b|", &[OpenBar, Word, CloseBar, OpenBar, Word, CloseBar], None);
        check("|(|a|)|", &[OpenBar, Open, OpenBar, Word, CloseBar, Close, CloseBar], Some("nested-bars"));
    }

    #[test]
    fn every_bracket_gets_a_partner() {
        use Kind::*;
        check("(a", &[Open, Word, Close], Some("unbalanced-bracket"));
        check("a)", &[Word], Some("unbalanced-bracket"));
        check("(a]", &[Open, Word, Close], Some("unbalanced-bracket"));
        check("(|a)", &[Open, OpenBar, Word, CloseBar, Close], Some("unbalanced-bracket"));
        check("((a)", &[Open, Open, Word, Close, Close], Some("unbalanced-bracket"));
    }

    #[test]
    fn wrong_signs_are_mended() {
        use Kind::*;
        check("a == b", &[Word, Equals, Word], Some("wrong-sign"));
        check("a ** b", &[Word, Caret, Word], Some("wrong-sign"));
        check("a ; b", &[Word, Comma, Word], Some("wrong-sign"));
        check(".5", &[Number], Some("number-form"));
        check("5. a", &[Number, Word], Some("number-form"));
        check("§§ a", &[Unknown, Word], Some("unknown-character"));
    }

    #[test]
    fn deep_nesting_is_cut_out() {
        let text = format!("{}x{}", "(".repeat(100_000), ")".repeat(100_000));
        let mut slips = Slips::default();
        assert_eq!(pieces(&text, &mut slips).len(), 2 * NESTING + 1);
        assert_eq!(slips.finish(&text).len(), 1);
    }
}
