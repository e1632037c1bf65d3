//! Byte offsets and the protocol's positions, in the encoding that was agreed on.

use std::ops::Range;
use std::sync::Arc;
use tower_lsp::ls_types as lsp;

/// How columns are counted.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Encoding {
    /// In bytes.
    Utf8,
    /// In UTF-16 code units.
    Utf16,
    /// In characters.
    Utf32,
}

impl Encoding {
    /// The first of the client's encodings that is known; UTF-16 where it names none.
    pub fn agreed(offered: Option<&[lsp::PositionEncodingKind]>) -> Encoding {
        let known = |kind: &lsp::PositionEncodingKind| match kind.as_str() {
            "utf-8" => Some(Encoding::Utf8),
            "utf-16" => Some(Encoding::Utf16),
            "utf-32" => Some(Encoding::Utf32),
            _ => None,
        };
        offered.into_iter().flatten().find_map(known).unwrap_or(Encoding::Utf16)
    }

    /// The protocol's name.
    pub fn name(self) -> &'static str {
        match self {
            Encoding::Utf8 => "utf-8",
            Encoding::Utf16 => "utf-16",
            Encoding::Utf32 => "utf-32",
        }
    }

    /// The width of a text.
    pub fn width(self, text: &str) -> usize {
        match self {
            Encoding::Utf8 => text.len(),
            Encoding::Utf16 => text.chars().map(char::len_utf16).sum(),
            Encoding::Utf32 => text.chars().count(),
        }
    }

    /// The byte of a text at which a column begins; the end where it is past the end, the beginning of a character where
    /// it is inside.
    pub fn byte(self, text: &str, column: usize) -> usize {
        match self {
            Encoding::Utf8 => text.floor_char_boundary(column),
            Encoding::Utf16 => {
                let mut left = column;
                for (at, c) in text.char_indices() {
                    let Some(rest) = left.checked_sub(c.len_utf16()) else { return at };
                    left = rest;
                    if left == 0 {
                        return at + c.len_utf8();
                    }
                }
                if column == 0 { 0 } else { text.len() }
            }
            Encoding::Utf32 => text.char_indices().nth(column).map_or(text.len(), |(at, _)| at),
        }
    }
}

/// A text with its lines: where each begins and ends without its line break.
pub struct Positions {
    text: Arc<str>,
    starts: Vec<usize>,
    encoding: Encoding,
}

impl Positions {
    /// Finds the lines. A line ends with `\n`, `\r\n` or a lone `\r`, as the protocol says.
    pub fn new(text: Arc<str>, encoding: Encoding) -> Positions {
        let starts = crate::lines::starts(&text);
        Positions { text, starts, encoding }
    }

    /// The text.
    pub fn text(&self) -> &Arc<str> {
        &self.text
    }

    fn line(&self, line: usize) -> Range<usize> {
        let start = self.starts.get(line).copied().unwrap_or(self.text.len());
        let end = self.starts.get(line + 1).copied().unwrap_or(self.text.len());
        let content = self.text[start..end].trim_end_matches(['\n', '\r']).len();
        start..start + content
    }

    /// The byte at a position. Past the end of a line it is the line's end, past the last line the end of the text.
    pub fn offset(&self, position: lsp::Position) -> usize {
        let line = self.line(position.line as usize);
        line.start + self.encoding.byte(&self.text[line], position.character as usize)
    }

    /// The bytes of a range, the smaller end first.
    pub fn bytes(&self, range: lsp::Range) -> Range<usize> {
        let (a, b) = (self.offset(range.start), self.offset(range.end));
        a.min(b)..a.max(b)
    }

    /// The line that holds a byte.
    pub fn line_of(&self, offset: usize) -> usize {
        self.starts.partition_point(|s| *s <= offset) - 1
    }

    /// The position of a byte.
    pub fn position(&self, offset: usize) -> lsp::Position {
        let offset = self.text.floor_char_boundary(offset);
        let line = self.line_of(offset);
        // Inside of a line break is the line's end.
        let end = offset.min(self.line(line).end);
        let column = self.encoding.width(&self.text[self.starts[line]..end]);
        lsp::Position { line: line as u32, character: column as u32 }
    }

    /// The range of bytes as positions.
    pub fn range(&self, bytes: &Range<usize>) -> lsp::Range {
        lsp::Range { start: self.position(bytes.start), end: self.position(bytes.end) }
    }

    /// The width of a part of a line.
    pub fn width(&self, bytes: Range<usize>) -> u32 {
        self.encoding.width(&self.text[bytes]) as u32
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const ALL: [Encoding; 3] = [Encoding::Utf8, Encoding::Utf16, Encoding::Utf32];

    #[track_caller]
    fn check(fixture: &str, line: u32, columns: [u32; 3]) {
        let offset = fixture.find("$0").expect("a cursor");
        let text: Arc<str> = fixture.replace("$0", "").into();
        for (encoding, character) in ALL.into_iter().zip(columns) {
            let positions = Positions::new(text.clone(), encoding);
            assert_eq!(positions.position(offset), lsp::Position { line, character }, "{encoding:?}");
            assert_eq!(positions.offset(lsp::Position { line, character }), offset, "{encoding:?}");
        }
    }

    #[test]
    fn each_encoding_counts_its_own_way() {
        check("ab$0", 0, [2, 2, 2]);
        check("x\nθ̇$0 = 1", 1, [4, 2, 2]);
        check("x\r\n𝑥$0", 1, [4, 2, 1]);
        check("x\r\r\n$0y", 2, [0, 0, 0]);
    }

    #[test]
    fn positions_are_clamped() {
        for encoding in ALL {
            let positions = Positions::new("θ𝑥\r\ny".into(), encoding);
            let at = |line, character| positions.offset(lsp::Position { line, character });
            assert_eq!(at(0, 99), 6, "{encoding:?}");
            assert_eq!(at(7, 0), 9);
            assert_eq!(at(7, 99), 9);
            assert_eq!(at(u32::MAX, u32::MAX), 9);
            assert_eq!(positions.position(99), lsp::Position { line: 1, character: 1 });
        }
        // Half of a pair is its beginning.
        let positions = Positions::new("𝑥y".into(), Encoding::Utf16);
        assert_eq!(positions.offset(lsp::Position { line: 0, character: 1 }), 0);
        // Between \r and \n is the line's end.
        let positions = Positions::new("x\r\ny".into(), Encoding::Utf8);
        assert_eq!(positions.position(2), lsp::Position { line: 0, character: 1 });
    }

    #[test]
    fn the_clients_order_counts() {
        let kinds = |names: &[&'static str]| -> Vec<lsp::PositionEncodingKind> {
            names.iter().map(|n| lsp::PositionEncodingKind::new(n)).collect()
        };
        assert_eq!(Encoding::agreed(None), Encoding::Utf16);
        assert_eq!(Encoding::agreed(Some(&kinds(&["utf-32", "utf-8"]))), Encoding::Utf32);
        assert_eq!(Encoding::agreed(Some(&kinds(&["utf-7"]))), Encoding::Utf16);
    }
}
