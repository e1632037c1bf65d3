//! Which parts get a letter of their own where a formula would not fit on a page.

use crate::arena::{Arena, Expr, Node};
use crate::display::DisplayOptions;
use hashbrown::{HashMap, HashSet};

/// Deeper nesting than this is cut by abbreviations, so that laying out may recurse.
const MAX_NESTING: u32 = 150;
/// A part that stands once gets a letter when it is larger than this share of the page.
const SHARE: usize = 4;

/// The parts to be written apart, inner ones first. None where the whole fits on the page.
///
/// Common parts are abbreviated where the formula is too long; parts that are too large or too deep are cut anyway, so
/// that the work stays proportional to the number of distinct nodes.
pub(crate) fn common_parts(arena: &Arena, root: Expr, options: &DisplayOptions) -> Vec<Expr> {
    let mut order = Vec::new();
    let mut uses: HashMap<Expr, usize> = HashMap::new();
    arena.visit(root, &mut |e, _| order.push(e));
    for &e in &order {
        arena.for_children(e, &mut |c| *uses.entry(c).or_default() += 1);
    }
    if measure(arena, &order, &|_, _, _| false).fits(root, options) {
        return Vec::new();
    }
    let worth = |e: Expr, size: usize, depth: u32| {
        if !cuttable(arena, e) || e == root {
            return false;
        }
        let shared = uses.get(&e).is_some_and(|n| *n > 1) && size >= 12;
        shared || size > options.page / SHARE || depth >= MAX_NESTING
    };
    let measured = measure(arena, &order, &worth);
    order.into_iter().filter(|e| measured.cut.contains(e)).collect()
}

/// Sums, products and calls may be cut out, unless a bound index is inside: its letter has no meaning outside.
fn cuttable(arena: &Arena, e: Expr) -> bool {
    let kind = match arena.node(e) {
        Node::Sum(c, terms) => !c.is_zero() || terms.len() > 1,
        Node::Product(_) | Node::Call(..) | Node::Power(..) => true,
        _ => false,
    };
    kind && arena.meta(e).depth > 1 && !has_free_index(arena, e)
}

fn has_free_index(arena: &Arena, e: Expr) -> bool {
    let mut found = false;
    let mut seen = HashSet::new();
    let mut stack = vec![e];
    while let Some(x) = stack.pop() {
        if !seen.insert(x) {
            continue;
        }
        if let Node::Symbol(s) = arena.node(x) {
            found |= arena.info(*s).name.starts_with('#');
        }
        if found || seen.len() > 2000 {
            // A part too large to look through is kept whole: it may hold an index.
            return found || seen.len() > 2000 && arena.meta(e).bound_depth > 0;
        }
        arena.for_children(x, &mut |c| stack.push(c));
    }
    false
}

struct Measured {
    sizes: HashMap<Expr, (usize, u32)>,
    cut: HashSet<Expr>,
}

impl Measured {
    fn fits(&self, root: Expr, options: &DisplayOptions) -> bool {
        self.sizes.get(&root).is_some_and(|(size, depth)| *size <= options.page && *depth < MAX_NESTING)
    }
}

/// Sizes as trees, parts for which `worth` holds counted as one letter.
fn measure(arena: &Arena, order: &[Expr], worth: &dyn Fn(Expr, usize, u32) -> bool) -> Measured {
    let mut out = Measured { sizes: HashMap::new(), cut: HashSet::new() };
    for &e in order {
        let (mut size, mut depth) = (1usize, 0u32);
        arena.for_children(e, &mut |c| {
            let (s, d) = out.sizes.get(&c).copied().unwrap_or((1, 0));
            size = size.saturating_add(s);
            depth = depth.max(d + 1);
        });
        if worth(e, size, depth) {
            out.cut.insert(e);
            (size, depth) = (1, 0);
        }
        out.sizes.insert(e, (size, depth));
    }
    out
}

/// Letters for so many abbreviations, those in use left out: A, B, …, then A₁, A₂, ….
pub(crate) fn names(arena: &Arena, root: Expr, count: usize, options: &DisplayOptions) -> Vec<String> {
    if count == 0 {
        return Vec::new();
    }
    let mut used = HashSet::new();
    arena.visit(root, &mut |_, node| {
        let s = match node {
            Node::Symbol(s) | Node::Jet(s, _) => *s,
            Node::Member { family, .. } => *family,
            Node::Unspecified { function, .. } => *function,
            _ => return,
        };
        used.insert(arena.info(s).name.to_string());
    });
    let numbered = (1..).map(|n: usize| {
        let digits: String =
            n.to_string().chars().filter_map(|c| char::from_u32('₀' as u32 + c.to_digit(10)?)).collect();
        format!("A{digits}")
    });
    let single = options.abbreviation_names.iter().cloned();
    if count <= options.abbreviation_names.len() {
        single.chain(numbered).filter(|n| !used.contains(n)).take(count).collect()
    } else {
        numbered.filter(|n| !used.contains(n)).take(count).collect()
    }
}
