//! Long formulas on several lines, broken before `+` and `-` as far out as possible. Cost: linear in the text.

use unicode_width::{UnicodeWidthChar, UnicodeWidthStr};

/// Columns that a text takes.
pub fn width(text: &str) -> usize {
    UnicodeWidthStr::width(text)
}

/// A place where a line may end.
struct Break {
    /// Where the next line begins, in bytes.
    at: usize,
    /// Columns before it.
    columns: usize,
    /// Brackets around it; spaces that are not before a sign count as deeper than any sign.
    depth: usize,
}

/// What is added to the depth of a break at a mere space.
const SPACE: usize = 1000;

/// The places where a formula may be broken, in order.
fn breaks(text: &str) -> Vec<Break> {
    let mut list = Vec::new();
    let (mut depth, mut columns) = (0usize, 0);
    let mut previous = ' ';
    let mut chars = text.char_indices().peekable();
    while let Some((i, c)) = chars.next() {
        match c {
            '(' | '[' => depth += 1,
            ')' | ']' => depth = depth.saturating_sub(1),
            // The right side of an equation is not left alone.
            ' ' if &text[i..] != " = 0" => {
                let sign =
                    matches!(chars.peek(), Some((_, '+' | '-' | '−' | '='))) && previous != ':' && previous != ',';
                let extra = if sign { 0 } else { SPACE };
                list.push(Break { at: i + 1, columns: columns + 1, depth: depth + extra });
            }
            _ => {}
        }
        // A space behind a sign is no place to break.
        if previous == ' ' && matches!(c, '+' | '-' | '−' | '=') && matches!(chars.peek(), Some((_, ' '))) {
            chars.next();
            columns += 1;
        }
        columns += c.width().unwrap_or(0);
        previous = c;
    }
    list
}

/// A line of a formula.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Line<'a> {
    /// Its part of the formula.
    pub text: &'a str,
    /// Columns that it is set in: a line that goes on inside brackets is set in with them.
    pub inset: usize,
}

/// Columns that a line is set in for each bracket around its beginning.
const INSET: usize = 2;
/// Brackets beyond this don't set it in further.
const DEEPEST: usize = 4;

/// The formula's lines, at most `room` columns wide with their inset, unless a single word is longer.
///
/// A line is broken at the outermost sign that leaves it at least a third full.
pub fn lines(text: &str, room: usize) -> Vec<Line<'_>> {
    let breaks = breaks(text);
    let total = width(text);
    let mut out = Vec::new();
    let (mut from, mut before, mut k, mut inset) = (0, 0, 0, 0);
    while total > before + room.saturating_sub(inset) {
        let room = room.saturating_sub(inset).max(1);
        // Those that fit; where none does, the next one.
        let fits = breaks[k..].partition_point(|b| b.columns - 1 - before <= room);
        let candidates = &breaks[k..(k + fits.max(1)).min(breaks.len())];
        let full = |b: &Break| b.columns - before >= room / 3;
        let outermost = candidates.iter().filter(|b| full(b)).map(|b| b.depth).min();
        let best = match outermost {
            Some(depth) => candidates.iter().rposition(|b| full(b) && b.depth == depth),
            None => candidates.len().checked_sub(1),
        };
        let Some(best) = best else { break };
        let b = &candidates[best];
        out.push(Line { text: text[from..b.at].trim_end(), inset });
        (from, before, k) = (b.at, b.columns, k + best + 1);
        inset = INSET * (b.depth % SPACE).min(DEEPEST);
    }
    out.push(Line { text: &text[from..], inset });
    out
}

/// Prose on lines of at most `room` columns.
pub fn prose(text: &str, room: usize) -> Vec<String> {
    let mut out = Vec::new();
    let mut line = String::new();
    let mut columns = 0;
    for word in text.split_whitespace() {
        let w = width(word);
        if columns > 0 && columns + 1 + w > room {
            out.push(std::mem::take(&mut line));
            columns = 0;
        }
        if columns > 0 {
            line.push(' ');
            columns += 1;
        }
        line.push_str(word);
        columns += w;
    }
    out.push(line);
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(text: &str, room: usize, expected: &[&str]) {
        let got = lines(text, room);
        let set: Vec<String> = got.iter().map(|l| format!("{}{}", " ".repeat(l.inset), l.text)).collect();
        assert_eq!(set, expected);
        let whole: Vec<&str> = got.iter().map(|l| l.text).collect();
        assert_eq!(whole.join(" "), text, "nothing is lost");
    }

    #[test]
    fn breaks_before_the_outermost_signs() {
        check("a b + c d - e f", 20, &["a b + c d - e f"]);
        check("a b + c d - e f", 10, &["a b + c d", "- e f"]);
        check("m (x' + y') + k (x - y) - g", 16, &["m (x' + y')", "+ k (x - y) - g"]);
    }

    #[test]
    fn goes_inside_brackets_where_a_line_would_be_empty() {
        check("a + 2 m (b + c + d + e + f + g)", 20, &["a + 2 m (b + c + d", "  + e + f + g)"]);
    }

    #[test]
    fn a_sign_stays_with_its_term() {
        check("aaaa + bbbb", 6, &["aaaa", "+ bbbb"]);
        check("aaaa = bbbb", 6, &["aaaa", "= bbbb"]);
    }

    #[test]
    fn products_are_broken_last_and_words_never() {
        check("aaa bbb ccc", 7, &["aaa bbb", "ccc"]);
        check("abcdefghijk", 4, &["abcdefghijk"]);
        check("abcdefghijk + b", 4, &["abcdefghijk", "+ b"]);
    }

    #[test]
    fn marks_take_no_columns() {
        check("θ̇₁ + θ̇₂", 7, &["θ̇₁ + θ̇₂"]);
    }

    #[test]
    fn long_text_takes_linear_time() {
        let text = vec!["x y"; 200_000].join(" + ");
        let got = lines(&text, 80);
        assert!(got.len() > 10_000 && got.iter().all(|l| width(l.text) <= 80));
    }

    #[test]
    fn prose_is_wrapped_at_words() {
        assert_eq!(prose("the weight breaks it", 12), ["the weight", "breaks it"]);
        assert_eq!(prose("", 12), [""]);
    }
}
