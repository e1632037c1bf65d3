//! From a mend of one item to edits of the file: where a new line goes, and what goes with a declaration that is taken
//! out. Lines that are put in end like the file's own.

use crate::checked::Contents;
use crate::database::Reading;
use crate::finding::Change;
use crate::scope::Entry;
use leastwise_grammar::tree::*;
use leastwise_grammar::{WordKind, words};
use std::ops::Range;

/// Byte ranges in the file and their new texts.
pub(crate) type Edits = Vec<(Range<usize>, String)>;

/// The edits of a mend in an item of the model's own file.
pub(crate) fn edits(reading: &Reading, entry: &Entry, change: &Change) -> Edits {
    let file = &reading.sources[0].text;
    match change {
        Change::Edits(list) => {
            let mut out: Edits = Vec::with_capacity(list.len());
            for (span, text) in list {
                out.push((entry.offset + span.start as usize..entry.offset + span.end as usize, own_ends(file, text)));
            }
            out
        }
        Change::Declare(line) => declare(reading, entry, line),
        Change::Remove(k) => remove(file, entry.offset, &entry.parsed.item, entry.text.len(), *k),
        Change::MoveFirst => {
            let item = entry.offset..entry.offset + entry.text.len();
            let first = reading.entries.iter().filter(|e| e.file == 0).map(|e| e.offset).min().unwrap_or(0);
            let top = block_start(file, first);
            let moved = format!("{}{}", &file[item.clone()], line_end(file));
            vec![(top..top, moved), (whole_lines(file, item), String::new())]
        }
    }
}

/// The line end that the file uses.
pub(crate) fn line_end(file: &str) -> &'static str {
    match file.find(['\n', '\r']) {
        Some(at) if file[at..].starts_with("\r\n") => "\r\n",
        Some(at) if file[at..].starts_with('\r') => "\r",
        _ => "\n",
    }
}

fn own_ends(file: &str, text: &str) -> String {
    if text.contains('\n') { text.replace('\n', line_end(file)) } else { text.to_owned() }
}

/// A declaration behind the last of its kind, or else before the item and the comments that describe it.
fn declare(reading: &Reading, entry: &Entry, line: &str) -> Edits {
    let file = &reading.sources[0].text;
    let keyword = line.split(' ').next().unwrap_or_default();
    let same = |kind: &ItemKind| {
        matches!(
            (kind, keyword),
            (ItemKind::Parameter(_), "parameter")
                | (ItemKind::Coordinate { .. }, "coordinate")
                | (ItemKind::Input { .. }, "input")
                | (ItemKind::Function { .. }, "function")
                | (ItemKind::Index { .. }, "index")
        )
    };
    let last = reading.entries.iter().rev().find(|e| e.file == 0 && same(&e.parsed.item.kind));
    match last {
        Some(last) => {
            let end = last.offset + last.text.len();
            vec![(end..end, format!("{}{line}", line_end(file)))]
        }
        None => {
            let start = block_start(file, entry.offset);
            vec![(start..start, format!("{line}{}", line_end(file)))]
        }
    }
}

/// Where the comments begin that stand in the first column right above a line.
fn block_start(file: &str, line: usize) -> usize {
    let mut start = line_start(file, line);
    while let Some(before) = file[..start].strip_suffix('\n').map(|t| t.strip_suffix('\r').unwrap_or(t)) {
        let above = line_start(file, before.len());
        if !before[above..].trim_start_matches('\u{feff}').starts_with('#') {
            break;
        }
        start = above;
    }
    if start == 0 && file.starts_with('\u{feff}') { '\u{feff}'.len_utf8() } else { start }
}

fn line_start(file: &str, at: usize) -> usize {
    file[..at].rfind(['\n', '\r']).map_or(0, |k| k + 1)
}

/// The lines of a range with their ends; of a last line without an end, with the end before it.
fn whole_lines(file: &str, range: Range<usize>) -> Range<usize> {
    let start = line_start(file, range.start);
    let start = if start == 0 && file.starts_with('\u{feff}') { '\u{feff}'.len_utf8() } else { start };
    let end = range.end + file[range.end..].find(['\n', '\r']).unwrap_or(file.len() - range.end);
    if file[end..].starts_with("\r\n") {
        start..end + 2
    } else if end < file.len() {
        start..end + 1
    } else {
        let before = file[..start].strip_suffix('\n').unwrap_or(&file[..start]);
        before.strip_suffix('\r').unwrap_or(before).len()..end
    }
}

/// Takes an item out, or one of the names that it declares; `length` is that of its text.
fn remove(file: &str, offset: usize, item: &Item, length: usize, k: usize) -> Edits {
    let whole = || vec![(whole_lines(file, offset..offset + length), String::new())];
    let parts = declared(item);
    let at = |span: Span| offset + span.start as usize..offset + span.end as usize;
    let (Some(part), true) = (parts.get(k), parts.len() > 1) else { return whole() };
    let place = at(part.own);
    // A name that lends its quantity to those before it leaves the quantity behind.
    let lent = k > 0 && parts[k - 1].shares;
    if lent {
        return vec![(at(parts[k - 1].own).end..at(part.name).end, String::new())];
    }
    let comma = |from: usize, to: usize| {
        let signs = words(&file[from..to]).filter(|(_, kind)| *kind == WordKind::Sign);
        let found = signs.map(|(span, _)| from + span.start as usize).find(|&c| file[c..].starts_with(','));
        found.map(|c| c..c + 1)
    };
    let before = k.checked_sub(1).map(|b| at(parts[b].own).end);
    let after = parts.get(k + 1).map(|n| at(n.own).start);
    let lost = before.and_then(|b| comma(b, place.start));
    let kept = after.and_then(|a| comma(place.end, a));
    let start = line_start(file, place.start);
    let end = kept.as_ref().map_or(place.end, |c| c.end);
    let rest = &file[end..end + file[end..].find(['\n', '\r']).unwrap_or(file.len() - end)];
    let alone = start > offset
        && file[start..place.start].trim().is_empty()
        && (rest.trim().is_empty() || rest.trim_start().starts_with('#'));
    let mut out: Edits = Vec::new();
    if alone {
        if after.is_none() {
            out.extend(lost.map(|c| (c, String::new())));
        }
        out.push((whole_lines(file, place.start..end), String::new()));
        return out;
    }
    match (after, kept) {
        (Some(next), Some(comma)) => {
            // Up to the next name, or to the comment between.
            let gap = &file[comma.end..next];
            let end = if gap.trim().is_empty() && !gap.contains(['\n', '\r']) { next } else { comma.end };
            out.push((place.start..end, String::new()));
        }
        _ => {
            let from = lost.filter(|c| file[c.end..place.start].trim().is_empty()).map_or(place.start, |c| c.start);
            out.push((from..place.end, String::new()));
        }
    }
    out
}

/// The edit that takes an item out, with the comments that describe it.
pub(crate) fn without_item(checked: &Contents, item: &Range<usize>) -> Edits {
    let file = &*checked.text;
    let lines = whole_lines(file, item.clone());
    let start = block_start(file, item.start).min(lines.start);
    vec![(start..lines.end, String::new())]
}

/// One of the names that an item declares.
struct Part {
    name: Span,
    /// The name with the quantity and value that stand behind it.
    own: Span,
    /// Whether it takes quantity and value from the next.
    shares: bool,
}

fn declared(item: &Item) -> Vec<Part> {
    let name = |d: &Declared| {
        // The closing bracket of an index follows the index.
        let end = d.index.as_ref().map_or(d.name.span.end, |i| i.span.end + 1);
        Span { start: d.name.span.start, end }
    };
    let plain = |span: Span| Part { name: span, own: span, shares: false };
    match &item.kind {
        ItemKind::Coordinate { declared, .. } | ItemKind::Input { declared, .. } => {
            declared.iter().map(|d| plain(name(d))).collect()
        }
        ItemKind::Index { names, .. } => names.iter().map(|n| plain(n.span)).collect(),
        ItemKind::Parameter(list) => {
            let starts: Vec<u32> = list.iter().map(|d| d.declared.name.span.start).collect();
            let part = |(k, d): (usize, &Declaration)| {
                let name = name(&d.declared);
                let next = starts.get(k + 1).copied().unwrap_or(u32::MAX);
                let spans = d.quantity.iter().map(|q| q.span).chain(d.value.iter().map(|v| v.span));
                let (own, others): (Vec<Span>, Vec<Span>) = spans.partition(|s| s.start < next);
                let own = own.into_iter().fold(name, Span::to);
                Part { name, own, shares: !others.is_empty() }
            };
            list.iter().enumerate().map(part).collect()
        }
        _ => Vec::new(),
    }
}

/// The edits that make a coordinate claimed cyclic a plain one; others of its item stay cyclic.
pub(crate) fn without_cyclic(checked: &Contents, coordinate: &Range<usize>) -> Option<Edits> {
    let file = &*checked.text;
    let row = checked.items.iter().find(|i| i.range.start <= coordinate.start && coordinate.end <= i.range.end)?;
    let ItemKind::Coordinate { declared: list, quantity, .. } = &row.parsed.item.kind else { return None };
    let start = row.range.start;
    if list.len() == 1 {
        let keyword = row.parsed.item.keyword.range();
        return Some(vec![(start + keyword.start..start + keyword.end, "coordinate".to_owned())]);
    }
    let parts = declared(&row.parsed.item);
    let k = parts.iter().position(|p| start + p.name.start as usize == coordinate.start)?;
    let name = &file[start + parts[k].name.start as usize..start + parts[k].name.end as usize];
    let quantity = quantity.as_ref().map(|q| &file[start + q.span.start as usize..start + q.span.end as usize]);
    let quantity = quantity.map_or(String::new(), |q| format!(": {q}"));
    let mut out = remove(file, start, &row.parsed.item, row.range.len(), k);
    out.push((row.range.end..row.range.end, format!("{}coordinate {name}{quantity}", line_end(file))));
    Some(out)
}

/// The edits that take `broken` away from a symmetry, or put it there.
pub(crate) fn broken(checked: &Contents, claim: &Range<usize>, broken: bool) -> Option<Edits> {
    let row = checked.items.iter().find(|i| i.range.start == claim.start)?;
    let keyword = row.parsed.item.keyword.range();
    let place = row.range.start + keyword.start..row.range.start + keyword.end;
    Some(vec![(place, if broken { "broken symmetry".to_owned() } else { "symmetry".to_owned() })])
}

/// The edit that makes an angle count its turns, where it stands alone in its item.
pub(crate) fn twisted(checked: &Contents, coordinate: &Range<usize>) -> Option<Edits> {
    let row = checked.items.iter().find(|i| i.range.start <= coordinate.start && coordinate.end <= i.range.end)?;
    let ItemKind::Coordinate { declared, quantity: Some(quantity), .. } = &row.parsed.item.kind else { return None };
    let place = row.range.start + quantity.span.start as usize..row.range.start + quantity.span.end as usize;
    (declared.len() == 1).then(|| vec![(place, "twist".to_owned())])
}

/// The edit that puts the coordinate itself before its image: `x -> ε` to `x -> x + ε`.
pub(crate) fn with_source(checked: &Contents, claim: &Range<usize>, source: &Range<usize>) -> Option<(String, Edits)> {
    let row = checked.items.iter().find(|i| i.range.start == claim.start)?;
    let ItemKind::Symmetry { arrows, .. } = &row.parsed.item.kind else { return None };
    let start = row.range.start;
    let at = |span: Span| start + span.start as usize..start + span.end as usize;
    let mut pairs = arrows.iter().flat_map(|a| a.sources.iter().zip(&a.targets));
    let (_, target) = pairs.find(|(s, _)| at(s.span) == *source)?;
    let (source, target) = (&checked.text[source.clone()], at(target.span));
    let title = format!("write {source} -> {source} + {}", &checked.text[target.clone()]);
    Some((title, vec![(target.start..target.start, format!("{source} + "))]))
}
