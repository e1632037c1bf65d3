//! The order of a list, and its end: what was begun comes first, and no kind of thing is crowded out by another.

use super::{Completion, letters};
use std::collections::HashSet;

/// No longer list is shown.
pub(super) const MOST: usize = 300;

/// Groups of completions, the best first, as one list; and whether it was cut. Each is there once.
pub(super) fn ordered(groups: Vec<Vec<Completion>>, typed: &str) -> (Vec<Completion>, bool) {
    let mut seen = HashSet::new();
    let mut groups: Vec<Vec<Completion>> = groups
        .into_iter()
        .map(|group| group.into_iter().filter(|c| seen.insert(c.label.clone())).map(|c| spelt(c, typed)).collect())
        .collect();
    let cut = groups.iter().map(Vec::len).sum::<usize>() > MOST;
    if cut {
        // An editor would not show what was not begun.
        groups.iter_mut().for_each(|group| group.retain(|c| agreement(c, typed) < Agreement::None));
        let most = share(&groups.iter().map(Vec::len).collect::<Vec<_>>());
        groups.iter_mut().for_each(|group| {
            group.sort_by_cached_key(|c| agreement(c, typed));
            group.truncate(most);
        });
    }
    let mut list: Vec<Completion> = groups.into_iter().flatten().collect();
    list.sort_by_cached_key(|c| agreement(c, typed));
    list.truncate(MOST);
    (list, cut)
}

/// The longest length at which groups of these sizes are cut, so that all together are no more than what is shown.
fn share(sizes: &[usize]) -> usize {
    let mut sizes = sizes.to_vec();
    sizes.sort_unstable();
    let mut left = MOST;
    for (k, size) in sizes.iter().enumerate() {
        let each = left / (sizes.len() - k);
        if *size > each {
            return each;
        }
        left -= size;
    }
    MOST
}

/// How well a completion agrees with what was typed.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
enum Agreement {
    /// It begins so.
    Begins,
    /// It begins so in other case.
    OtherCase,
    /// Its letters are there in this order.
    Scattered,
    None,
}

fn agreement(c: &Completion, typed: &str) -> Agreement {
    if c.filter.starts_with(typed) {
        return Agreement::Begins;
    }
    let lower = |text: &str| text.to_lowercase();
    let (filter, typed) = (lower(&c.filter), lower(typed));
    if filter.starts_with(&typed) {
        return Agreement::OtherCase;
    }
    let mut letters = filter.chars();
    if typed.chars().all(|t| letters.any(|l| l == t)) { Agreement::Scattered } else { Agreement::None }
}

/// Where a name was begun in the letters of a plain keyboard, the editor compares with that spelling: `theta` for θ, `x1` for
/// x₁. Where a velocity was begun with its dot, the dotted spelling is compared.
fn spelt(mut c: Completion, typed: &str) -> Completion {
    if typed.is_empty() || c.filter.starts_with(typed) {
        return c;
    }
    let begins = |text: &str| text.to_lowercase().starts_with(&typed.to_lowercase());
    if c.label != c.filter && c.label.starts_with(typed) {
        c.filter = c.label.clone();
    } else if let Some(name) = letters::spelt(&c.filter).filter(|name| begins(name)) {
        c.filter = name;
    }
    c
}

#[cfg(test)]
mod tests {
    use super::super::{CompletionKind, plain};
    use super::*;

    fn group(names: impl IntoIterator<Item = String>) -> Vec<Completion> {
        names.into_iter().map(|n| plain(&n, CompletionKind::Parameter, "", None)).collect()
    }

    #[test]
    fn a_large_group_leaves_room_for_the_others() {
        let large = || group((0..10_000).map(|k| format!("m_{k}")));
        let small = || group(["sin", "cos"].map(str::to_owned));
        let (list, cut) = ordered(vec![large(), small()], "");
        assert!(cut && list.len() == MOST);
        assert_eq!(list.last().map(|c| c.label.as_str()), Some("cos"));
        let (list, _) = ordered(vec![large(), small()], "m_777");
        assert_eq!(list.first().map(|c| c.label.as_str()), Some("m_777"));
    }

    #[test]
    fn shares_add_up() {
        assert_eq!(share(&[10, 20]), MOST);
        assert_eq!(share(&[1000, 1000, 1000]), MOST / 3);
        assert_eq!(share(&[10, 1000, 1000]), (MOST - 10) / 2);
        assert_eq!(share(&[]), MOST);
    }

    #[test]
    fn what_was_begun_comes_first() {
        let names = |typed| {
            let (list, _) = ordered(vec![group(["k", "M", "m", "omega_m"].map(str::to_owned))], typed);
            list.into_iter().map(|c| c.label).collect::<Vec<_>>()
        };
        assert_eq!(names("m"), ["m", "M", "omega_m", "k"]);
        assert_eq!(names(""), ["k", "M", "m", "omega_m"]);
    }
}
