//! Long equations on several lines, by an estimate of their width.

/// A formula's lines, broken before the signs outside braces, at the outermost sign that leaves a line at least a third
/// full; brackets that are cut get invisible partners.
pub fn broken(latex: &str, room: f64) -> Vec<String> {
    let pieces = pieces(latex);
    let mut out = Vec::new();
    // The first piece of the line, and the brackets open before it.
    let (mut from, mut before) = (0, 0);
    while from < pieces.len() {
        let inset = if from > 0 { 4.0 } else { 0.0 };
        let mut columns = inset;
        let mut best: Option<usize> = None;
        let mut fits = true;
        for (k, piece) in pieces.iter().enumerate().skip(from) {
            columns += piece.width;
            if columns > room && k > from {
                fits = false;
                break;
            }
            let full = columns >= room / 3.0;
            let outer = best.is_none_or(|b| piece.open <= pieces[b].open || columns - piece.width < room / 3.0);
            if outer || !full {
                best = Some(k);
            }
        }
        let last = if fits { pieces.len() - 1 } else { best.unwrap_or(from) };
        let text: String = pieces[from..=last].iter().map(|p| p.text).collect();
        let open = if last + 1 < pieces.len() { pieces[last].open } else { 0 };
        let lead = "\\left. ".repeat(before);
        out.push(format!("{lead}{}{}", if open > 0 { text.trim_end() } else { &text }, " \\right.".repeat(open)));
        (from, before) = (last + 1, open);
    }
    out
}

struct Piece<'a> {
    text: &'a str,
    /// How many `\left` are open at its end.
    open: usize,
    /// About how wide it is.
    width: f64,
}

fn pieces(latex: &str) -> Vec<Piece<'_>> {
    let mut out = Vec::new();
    let (mut braces, mut open, mut from) = (0usize, 0usize, 0);
    let bytes = latex.as_bytes();
    let mut i = 0;
    while i < bytes.len() {
        let rest = &latex[i..];
        match bytes[i] {
            b'{' => braces += 1,
            b'}' => braces = braces.saturating_sub(1),
            b'\\' if rest.starts_with("\\left") && !starts_word(rest, 5) => open += 1,
            b'\\' if rest.starts_with("\\right") && !starts_word(rest, 6) => open = open.saturating_sub(1),
            b' ' if braces == 0 && i > from && is_sign(rest) => {
                out.push(Piece { text: &latex[from..i], open, width: glyphs(&latex[from..i]) });
                from = i;
            }
            _ => {}
        }
        // The character behind a backslash is part of the command: `\{` opens nothing.
        i += if bytes[i] == b'\\' { 2 } else { 1 };
        while i < bytes.len() && !latex.is_char_boundary(i) {
            i += 1;
        }
    }
    let rest = &latex[from.min(latex.len())..];
    out.push(Piece { text: rest, open, width: glyphs(rest) });
    out
}

fn starts_word(rest: &str, at: usize) -> bool {
    rest[at..].starts_with(|c: char| c.is_ascii_alphabetic())
}

fn is_sign(rest: &str) -> bool {
    rest != " = 0" && [" + ", " - ", " = ", " \\quad "].iter().any(|s| rest.starts_with(s))
}

/// About how wide a formula is, in widths of a letter: the larger part of a fraction, scripts at seven tenths.
pub fn glyphs(latex: &str) -> f64 {
    let mut reader = Glyphs { rest: latex, depth: 0 };
    reader.until_brace()
}

struct Glyphs<'a> {
    rest: &'a str,
    depth: usize,
}

impl Glyphs<'_> {
    fn until_brace(&mut self) -> f64 {
        let mut sum = 0.0;
        while let Some(c) = self.rest.chars().next() {
            match c {
                '}' => break,
                '{' => sum += self.group(),
                '^' | '_' => {
                    self.rest = &self.rest[1..];
                    sum += 0.7 * self.argument();
                }
                '\\' => sum += self.command(),
                ' ' => self.rest = &self.rest[1..],
                '+' | '-' | '=' => {
                    self.rest = &self.rest[1..];
                    sum += 2.2;
                }
                _ => {
                    self.rest = &self.rest[c.len_utf8()..];
                    sum += 1.0;
                }
            }
        }
        sum
    }

    fn group(&mut self) -> f64 {
        self.rest = &self.rest[1..];
        self.depth += 1;
        // Nesting is bounded by the printer; past that the width does not matter.
        let w = if self.depth < 400 {
            self.until_brace()
        } else {
            self.rest = "";
            0.0
        };
        self.depth -= 1;
        self.rest = self.rest.strip_prefix('}').unwrap_or(self.rest);
        w
    }

    fn argument(&mut self) -> f64 {
        match self.rest.chars().next() {
            Some('{') => self.group(),
            Some('\\') => self.command(),
            Some(c) => {
                self.rest = &self.rest[c.len_utf8()..];
                1.0
            }
            None => 0.0,
        }
    }

    fn command(&mut self) -> f64 {
        let name: usize = self.rest[1..].chars().take_while(char::is_ascii_alphabetic).count();
        let end = 1 + name.max(self.rest[1..].chars().next().map_or(0, char::len_utf8));
        let word = &self.rest[..end];
        self.rest = &self.rest[end..];
        match word {
            "\\frac" => {
                let top = self.argument();
                top.max(self.argument()) + 0.5
            }
            "\\sqrt" => self.argument() + 1.5,
            "\\," | "\\;" | "\\:" | "\\ " => 0.3,
            "\\quad" => 2.0,
            "\\left" | "\\right" => 0.0,
            "\\text" | "\\mathrm" | "\\mathit" | "\\dot" | "\\ddot" | "\\mathbf" | "\\operatorname" => self.argument(),
            "\\sum" => 2.5,
            "\\sin" | "\\cos" | "\\tan" | "\\exp" | "\\ln" => 3.0,
            "\\arcsin" | "\\arccos" | "\\arctan" | "\\sinh" | "\\cosh" | "\\tanh" => 4.5,
            _ => 1.2,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn long_equations_are_broken_outside_braces() {
        assert_eq!(broken("a + \\frac{b + c}{d} - e", 10.0), ["a + \\frac{b + c}{d}", " - e"]);
    }

    #[test]
    fn an_argument_is_not_cut_where_the_line_can_end_before_it() {
        let cosine = " + i j \\cos\\left(g - h\\right)";
        assert_eq!(broken(&format!("a b c d e f g h{cosine}"), 18.0), ["a b c d e f g h", cosine]);
    }

    #[test]
    fn a_bracket_that_is_cut_gets_partners() {
        let lines = broken("m \\left(a + b + c\\right) + d", 6.0);
        for line in &lines {
            assert_eq!(line.matches("\\left").count(), line.matches("\\right").count(), "{line}");
        }
        assert!(lines.len() > 1, "{lines:?}");
        assert_eq!(lines[0], "m \\left(a \\right.");
    }

    #[test]
    fn widths_are_about_right() {
        assert!((glyphs("a b") - 2.0).abs() < 0.01);
        assert!(glyphs("\\frac{a}{b + c + d}") < 8.5);
        assert!(glyphs("\\frac{") >= 0.0, "broken input ends");
        assert!(glyphs(&"{".repeat(100_000)) >= 0.0);
    }
}
