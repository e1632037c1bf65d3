//! Byte offsets to the protocol's positions: zero-based lines and UTF-16 columns.
//!
//! A line ends with `\n`, `\r\n` or a lone `\r`, as the protocol says; Unicode's other line breaks are ordinary characters.

use std::ops::Range;

/// A place in a text.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub struct Position {
    /// Zero-based.
    pub line: usize,
    /// Zero-based, in UTF-16 code units.
    pub column: usize,
}

/// A text with the starts of its lines.
pub struct Lines<'a> {
    text: &'a str,
    starts: Vec<usize>,
}

impl<'a> Lines<'a> {
    /// Finds the lines. Cost: one pass over the text.
    pub fn new(text: &'a str) -> Lines<'a> {
        Lines { text, starts: starts(text) }
    }

    /// The text.
    pub fn text(&self) -> &'a str {
        self.text
    }

    /// The line that holds the offset; offsets past the end count as the end.
    pub fn line_of(&self, offset: usize) -> usize {
        self.starts.partition_point(|s| *s <= offset) - 1
    }

    /// The bytes of a line with its line break; empty past the last line.
    pub fn range_of(&self, line: usize) -> Range<usize> {
        let at = |k: usize| self.starts.get(k).copied().unwrap_or(self.text.len());
        at(line)..at(line + 1)
    }

    /// The position of a byte offset. An offset inside a character counts as the character's start, one past the end of
    /// the text as the end.
    pub fn position(&self, offset: usize) -> Position {
        let offset = self.text.floor_char_boundary(offset);
        let line = self.line_of(offset);
        let before = &self.text[self.starts[line]..offset];
        Position { line, column: before.chars().map(char::len_utf16).sum() }
    }

    /// The column of an offset in characters, zero-based: what a person counts.
    pub fn character(&self, offset: usize) -> usize {
        let offset = self.text.floor_char_boundary(offset);
        self.text[self.starts[self.line_of(offset)]..offset].chars().count()
    }
}

/// Where each line begins. Cost: one pass over the text.
pub fn starts(text: &str) -> Vec<usize> {
    let bytes = text.as_bytes();
    let mut starts = vec![0];
    for (i, b) in bytes.iter().enumerate() {
        let ends = *b == b'\n' || (*b == b'\r' && bytes.get(i + 1) != Some(&b'\n'));
        if ends {
            starts.push(i + 1);
        }
    }
    starts
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The position of `$0` in the text.
    #[track_caller]
    fn check(fixture: &str, line: usize, column: usize) {
        let offset = fixture.find("$0").expect("a cursor");
        let text = fixture.replace("$0", "");
        assert_eq!(Lines::new(&text).position(offset), Position { line, column }, "{text:?}");
    }

    #[test]
    fn lines_and_columns_begin_at_zero() {
        check("$0", 0, 0);
        check("ab$0c", 0, 2);
        check("a\nb$0", 1, 1);
        check("a\n$0", 1, 0);
    }

    #[test]
    fn all_line_breaks_of_the_protocol() {
        check("a\r\nb\r\n$0c", 2, 0);
        check("a\rb$0", 1, 1);
        check("a\r\r\n$0", 2, 0);
        check("a\u{2028}b\u{b}$0", 0, 4);
    }

    #[test]
    fn columns_are_utf16_code_units() {
        check("θ̇₁$0 = 0", 0, 3); // a combining dot is a unit of its own
        check("𝑥$0", 0, 2); // beyond the basic plane: two
        check("coordinate 𝑥, θ$0", 0, 16);
        check("\u{feff}x$0", 0, 2);
    }

    #[test]
    fn offsets_are_clamped() {
        let lines = Lines::new("θ\nx");
        assert_eq!(lines.position(1), Position { line: 0, column: 0 });
        assert_eq!(lines.position(99), Position { line: 1, column: 1 });
        assert_eq!(lines.line_of(99), 1);
    }

    #[test]
    fn a_line_holds_its_break() {
        let lines = Lines::new("a\r\nbc\n");
        assert_eq!(lines.range_of(0), 0..3);
        assert_eq!(lines.range_of(1), 3..6);
        assert_eq!(lines.range_of(2), 6..6);
        assert_eq!(lines.range_of(7), 6..6);
    }

    #[test]
    fn people_count_characters() {
        assert_eq!(Lines::new("𝑥 θ̇").character("𝑥 θ̇".len()), 4);
    }
}
