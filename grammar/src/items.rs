//! The splitter: cuts a file into items, and finds the names that are functions.

use std::ops::Range;

use crate::keywords::{begins_item, near_keyword};
use crate::lexer::{Kind, lex};
use crate::names::{CallableNames, begins_name, continues_name, fold_name};

/// One item cut out of a file.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct RawItem {
    /// Bytes in the file, from the keyword to the end of the last line that belongs to it.
    pub range: Range<usize>,
    /// The text of that range.
    pub text: String,
    /// The comment on the item's first line, or else the block of comments right above it.
    pub description: Option<String>,
}

/// Cuts a file at the keywords in the first column; indented lines continue an item.
///
/// Lines in the first column that begin with no keyword, and indented lines before any item, are items of their own,
/// which are read as broken. Linear in the text.
pub fn split(text: &str) -> Vec<RawItem> {
    let mut cuts: Vec<Cut> = Vec::new();
    let mut block: Option<Range<usize>> = None;
    for line in lines(text) {
        let content = &text[line.clone()];
        let bare = content.trim();
        if bare.is_empty() {
            block = None;
        } else if bare.starts_with('#') {
            let flush = content.starts_with('#');
            block = flush.then(|| block.map_or(line.start, |b| b.start)..line.end);
        } else {
            let end = line.start + content.trim_end().len();
            let indented = content.starts_with(char::is_whitespace);
            let word = first_word(content);
            let keyword = !indented && (begins_item(word) || near_keyword(word).is_some());
            match cuts.last_mut() {
                Some(cut) if indented || (!keyword && cut.stray) => cut.range.end = end,
                _ => {
                    let start = end - content.trim().len();
                    cuts.push(Cut { range: start..end, stray: !keyword, block: block.take(), first_line: line.end });
                }
            }
            block = None;
        }
    }
    cuts.into_iter().map(|cut| cut.finish(text)).collect()
}

/// An item while it grows.
struct Cut {
    range: Range<usize>,
    stray: bool,
    block: Option<Range<usize>>,
    first_line: usize,
}

impl Cut {
    fn finish(self, text: &str) -> RawItem {
        let line = &text[self.range.start..self.first_line];
        let description = comment_of(line).or_else(|| {
            let block = &text[self.block.clone()?];
            let lines: Vec<&str> = lines(block).map(|l| strip_comment(&block[l])).collect();
            Some(lines.join("\n").trim().to_owned())
        });
        let description = description.filter(|d| !d.is_empty());
        RawItem { text: text[self.range.clone()].to_owned(), range: self.range, description }
    }
}

/// The comment at the end of the line of an item's text that holds the byte `offset`.
///
/// Gives each declaration of a long `parameter` item its own description.
pub fn description_at(text: &str, offset: usize) -> Option<String> {
    let line = lines(text).find(|line| line.start <= offset && offset <= line.end)?;
    comment_of(&text[line])
}

/// The comment at the end of a line, without its mark.
fn comment_of(line: &str) -> Option<String> {
    let mut quoted = false;
    let at = line.char_indices().find(|(_, c)| {
        quoted ^= *c == '"';
        *c == '#' && !quoted
    });
    at.map(|(at, _)| strip_comment(&line[at..]).trim().to_owned())
}

fn strip_comment(line: &str) -> &str {
    let line = line.trim().trim_start_matches('#');
    line.strip_prefix(' ').unwrap_or(line).trim_end()
}

/// The lines of a text without their ends: `\n`, `\r\n` or `\r`. A byte order mark at the beginning is left out.
pub(crate) fn lines(text: &str) -> impl Iterator<Item = Range<usize>> + '_ {
    let mut at = Some(if text.starts_with('\u{feff}') { 3 } else { 0 });
    std::iter::from_fn(move || {
        let start = at?;
        let Some(length) = text[start..].find(['\n', '\r']) else {
            at = None;
            return Some(start..text.len());
        };
        let end = start + length;
        let width = if text[end..].starts_with("\r\n") { 2 } else { 1 };
        at = Some(end + width);
        Some(start..end)
    })
}

/// The letters that a line begins with.
pub(crate) fn first_word(line: &str) -> &str {
    if !line.starts_with(begins_name) {
        return "";
    }
    &line[..line.find(|c| !continues_name(c)).unwrap_or(line.len())]
}

/// The functions that these items declare, `function U(…)` and `let f(…)`, from their heads alone.
pub fn callable_names<'a>(heads: impl Iterator<Item = &'a RawItem>) -> CallableNames {
    CallableNames::new(heads.filter_map(|item| callable_name(&item.text)).collect())
}

/// The function that an item declares.
fn callable_name(text: &str) -> Option<String> {
    let word = first_word(text);
    let keyword = if begins_item(word) { word } else { near_keyword(word)? };
    if keyword != "function" && keyword != "let" {
        return None;
    }
    // Heads are short; a definition of a megabyte is not read for its name.
    let mut head = lex(text).filter(|l| !matches!(l.kind, Kind::Newline | Kind::Comment)).skip(1);
    let name = head.next().filter(|l| l.kind == Kind::Word)?;
    let name = fold_name(&text[name.span.range()]);
    if keyword == "function" {
        return Some(name);
    }
    let mut next = head.next()?;
    if next.kind == Kind::OpenIndex {
        head.by_ref().take(64).find(|l| l.kind == Kind::CloseIndex)?;
        next = head.next()?;
    }
    // In `let P (a + b)` the equals sign is missing; `let f(x, y) = …` has names and commas only.
    (next.kind == Kind::Open).then_some(())?;
    let mut formals = head.take_while(|l| l.kind != Kind::Close).take(4096);
    let mut name_next = true;
    formals
        .all(|l| {
            let right = l.kind == if name_next { Kind::Word } else { Kind::Comma };
            name_next = !name_next;
            right
        })
        .then_some(name)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn check(text: &str, expected: &[&str]) {
        let items = split(text);
        let texts: Vec<&str> = items.iter().map(|i| i.text.as_str()).collect();
        assert_eq!(texts, expected);
        for item in &items {
            assert_eq!(&text[item.range.clone()], item.text);
        }
    }

    #[test]
    fn items_begin_with_a_keyword_in_the_first_column() {
        check("coordinate x\nkinetic 1/2 x'^2\n", &["coordinate x", "kinetic 1/2 x'^2"]);
        check(
            "symmetry a:\n    x -> x,\n\n# note\n    y -> y   \n# end\n",
            &["symmetry a:\n    x -> x,\n\n# note\n    y -> y"],
        );
    }

    #[test]
    fn other_lines_are_one_item_of_their_own() {
        check("hello\nworld\ncoordinate x", &["hello\nworld", "coordinate x"]);
        check("   coordinate x\n  y\nrun a", &["coordinate x\n  y", "run a"]);
        check("kinetic a = b\n+ c\n)\nrun a", &["kinetic a = b", "+ c\n)", "run a"]);
        check("potental a = b", &["potental a = b"]);
    }

    #[test]
    fn all_line_ends_and_a_byte_order_mark() {
        check("\u{feff}coordinate x\r\n  , y\rrun a\r\n", &["coordinate x\r\n  , y", "run a"]);
        check("", &[]);
        check("\n \n#", &[]);
    }

    #[test]
    fn descriptions_are_on_the_line_or_right_above() {
        let text = "# one\n# two\nsystem a\n# three\n\ncoordinate x # four\ncoordinate y\n  # five\nlet z = 1\n";
        let found: Vec<_> = split(text).into_iter().map(|i| i.description).collect();
        let expected = [Some("one\ntwo"), Some("four"), None, None];
        assert_eq!(found, expected.map(|d| d.map(str::to_owned)));
        assert_eq!(description_at("parameter a, # first\n  b # second", 24), Some("second".into()));
    }

    #[test]
    fn functions_are_found_in_heads() {
        let text = "function U(r)\nlet f(x, y) = x\nlet g[i](x) = x\nlet k = (x)\nlet P (a + b)\nfunction u[i](t): force\n\
                    kinetic V(x) = 2\nlet µ(x) = 1";
        assert_eq!(callable_names(split(text).iter()).names(), ["U", "f", "g", "u", "μ"]);
    }
}
