//! Hints of an earlier text at their places in a later one, so that they stay while somebody types.
//!
//! Lines are matched first: those that both texts begin with, those that both end with, and of what is between, each line
//! with the one that is recognisably the same. A hint behind the code of a line goes to the end of its code again.

use super::Inlay;
use leastwise_grammar::{WordKind, words};
use std::collections::HashMap;
use std::ops::Range;

/// Hints of an earlier text at their places in a later one, in its order. Those whose line is gone, or no longer
/// recognisably the same, are dropped. Linear in the texts.
pub fn carried(hints: &[Inlay], before: &str, after: &str) -> Vec<Inlay> {
    if hints.is_empty() || before == after {
        return hints.to_vec();
    }
    let texts = Texts::of(before, after);
    let mut out: Vec<Inlay> = hints.iter().filter_map(|h| texts.moved(h)).collect();
    out.sort_by_key(|h| h.offset);
    out
}

/// Two texts, line by line.
struct Texts<'t> {
    before: &'t str,
    after: &'t str,
    old: Vec<Range<usize>>,
    new: Vec<Range<usize>>,
    /// For each line of the earlier text the line of the later one.
    partner: Vec<Option<usize>>,
}

impl<'t> Texts<'t> {
    fn of(before: &'t str, after: &'t str) -> Texts<'t> {
        let (old, new) = (lines(before), lines(after));
        let alike = |a: usize, b: usize| before[old[a].clone()] == after[new[b].clone()];
        let shorter = old.len().min(new.len());
        let head = (0..shorter).take_while(|&k| alike(k, k)).count();
        let tail = (0..shorter - head).take_while(|&k| alike(old.len() - 1 - k, new.len() - 1 - k)).count();
        let mut partner = vec![None; old.len()];
        (0..head).for_each(|k| partner[k] = Some(k));
        (0..tail).for_each(|k| partner[old.len() - 1 - k] = Some(new.len() - 1 - k));
        let (olds, news) = (head..old.len() - tail, head..new.len() - tail);
        if olds.len() == news.len() {
            for (a, b) in olds.zip(news) {
                if akin(&before[old[a].clone()], &after[new[b].clone()]) {
                    partner[a] = Some(b);
                }
            }
        } else {
            // Lines were put in or taken out: the same text, or else the same first two words.
            let mut places: HashMap<&str, Vec<usize>> = HashMap::new();
            for b in news.clone().rev() {
                places.entry(&after[new[b].clone()]).or_default().push(b);
            }
            let mut free = vec![true; new.len()];
            for a in olds.clone() {
                partner[a] = places.get_mut(&before[old[a].clone()]).and_then(Vec::pop);
                partner[a].into_iter().for_each(|b| free[b] = false);
            }
            let mut heads: HashMap<&str, Vec<usize>> = HashMap::new();
            for b in news.rev().filter(|&b| free[b]) {
                heads.entry(head_of(&after[new[b].clone()])).or_default().push(b);
            }
            for a in olds.filter(|&a| !head_of(&before[old[a].clone()]).is_empty()) {
                if partner[a].is_none() {
                    partner[a] = heads.get_mut(head_of(&before[old[a].clone()])).and_then(Vec::pop);
                }
            }
        }
        Texts { before, after, old, new, partner }
    }

    /// The line of the earlier text that holds an offset, or ends at it.
    fn line(&self, offset: usize) -> Option<usize> {
        let line = self.old.partition_point(|l| l.start <= offset).checked_sub(1)?;
        (offset <= self.old[line].end).then_some(line)
    }

    fn moved(&self, hint: &Inlay) -> Option<Inlay> {
        let line = self.line(hint.offset)?;
        let (old, new) = (self.old[line].clone(), self.new[self.partner[line]?].clone());
        let (was, is) = (&self.before[old.clone()], &self.after[new.clone()]);
        let column = hint.offset - old.start;
        let offset = if was == is {
            column
        } else if column == code_end(was) {
            code_end(is)
        } else {
            let (head, tail) = common(was, is);
            if column <= head {
                column
            } else if column >= was.len() - tail {
                is.len() - (was.len() - column)
            } else {
                return None;
            }
        };
        if !is.is_char_boundary(offset) {
            return None;
        }
        let target = hint.target.as_ref().and_then(|t| self.moved_target(t));
        Some(Inlay { offset: new.start + offset, target, ..hint.clone() })
    }

    /// A target goes with its line, as long as that is the same.
    fn moved_target(&self, target: &Range<usize>) -> Option<Range<usize>> {
        let (first, last) = (self.line(target.start)?, self.line(target.end)?);
        let to = |line: usize, offset: usize| {
            let (old, new) = (self.old[line].clone(), self.new[self.partner[line]?].clone());
            let same = self.before[old.clone()] == self.after[new.clone()];
            same.then_some(new.start + offset - old.start)
        };
        let range = to(first, target.start)?..to(last, target.end)?;
        (range.start <= range.end).then_some(range)
    }
}

/// The lines of a text without their ends; an empty one behind the last end.
fn lines(text: &str) -> Vec<Range<usize>> {
    let mut out = Vec::new();
    let mut start = 0;
    let bytes = text.as_bytes();
    let mut at = 0;
    while at < bytes.len() {
        if matches!(bytes[at], b'\n' | b'\r') {
            out.push(start..at);
            at += (bytes[at] == b'\r' && bytes.get(at + 1) == Some(&b'\n')) as usize;
            start = at + 1;
        }
        at += 1;
    }
    out.push(start..text.len());
    out
}

/// How many bytes two lines begin with and end with in common, in whole characters.
fn common(a: &str, b: &str) -> (usize, usize) {
    let head: usize = a.chars().zip(b.chars()).take_while(|(x, y)| x == y).map(|(c, _)| c.len_utf8()).sum();
    let (a, b) = (a[head..].chars().rev(), b[head..].chars().rev());
    (head, a.zip(b).take_while(|(x, y)| x == y).map(|(c, _)| c.len_utf8()).sum())
}

/// Whether a line is recognisably the same: half of the longer one has stayed, or its first two words have.
fn akin(a: &str, b: &str) -> bool {
    let (head, tail) = common(a, b);
    2 * (head + tail) >= a.len().max(b.len()) || !head_of(a).is_empty() && head_of(a) == head_of(b)
}

/// The first two words: keyword and name.
fn head_of(line: &str) -> &str {
    words(line).filter(|(_, kind)| *kind == WordKind::Word).nth(1).map_or("", |(span, _)| &line[..span.range().end])
}

fn code_end(line: &str) -> usize {
    words(line).filter(|(_, kind)| *kind != WordKind::Comment).last().map_or(0, |(span, _)| span.range().end)
}
