//! How a wrong claimed constant is put right in the text, and where a right one comes from, in words.

use crate::checked::{Checked, ConservedClaim};
use crate::derive::Derived;
use crate::report::{Finding, Fix};
use crate::sheet::Maker;
use leastwise_algebra::{Arena, Expr, Node, Rational, Role, Verdict};
use leastwise_grammar::tree::*;
use leastwise_mechanics::amends::{self, Amend, Source};
use leastwise_mechanics::symmetry::Generator;
use std::ops::Range;

/// Byte ranges in the file and their new texts.
type Edits = Vec<(Range<usize>, String)>;

/// Nodes that the mending of one claim may visit or make: it runs with every change of the text.
const NODES: u64 = 4_000_000;

/// An operand of a sum: its place in the file, whether it is the first, and where its operator stands.
#[derive(Clone, Debug)]
pub(crate) struct Operand<'a> {
    pub formula: &'a Formula,
    /// Where it stands in the file.
    pub range: Range<usize>,
    /// The `+` or `-` before it; `None` for the first of a sum.
    operator: Option<Range<usize>>,
    /// Positions of the additive parts in it.
    pub parts: Vec<usize>,
}

/// The operands of all sums in a claim that hold whole additive parts of it, outer ones first.
pub(crate) fn operands<'a>(checked: &'a Checked, claim: &ConservedClaim) -> Vec<Operand<'a>> {
    let Some(row) = checked.items.iter().find(|i| i.range.start == claim.range.start) else { return Vec::new() };
    let ItemKind::Conserved { body, .. } = &row.parsed.item.kind else { return Vec::new() };
    let mut out = Vec::new();
    collect(&checked.text, row.range.start, body, claim, &mut out);
    out
}

/// Recursion follows the tree.
fn collect<'a>(text: &str, offset: usize, f: &'a Formula, claim: &ConservedClaim, out: &mut Vec<Operand<'a>>) {
    let at = |f: &Formula| offset + f.span.start as usize..offset + f.span.end as usize;
    match &f.kind {
        FormulaKind::Paren(inner) | FormulaKind::Neg(inner) => collect(text, offset, inner, claim, out),
        FormulaKind::Sum { body, .. } => collect(text, offset, body, claim, out),
        FormulaKind::Mul { left, right, .. } => {
            collect(text, offset, left, claim, out);
            collect(text, offset, right, claim, out);
        }
        FormulaKind::Div(left, _) => collect(text, offset, left, claim, out),
        FormulaKind::Add(..) | FormulaKind::Sub(..) => {
            let mut previous: Option<usize> = None;
            for formula in summands(f) {
                let range = at(formula);
                let operator = previous.and_then(|end| sign(text, end..range.start));
                if previous.is_some() && operator.is_none() {
                    return;
                }
                previous = Some(range.end);
                let inside = |r: &Range<usize>| range.start <= r.start && r.end <= range.end;
                let parts: Vec<usize> =
                    claim.parts.iter().enumerate().filter(|(_, p)| inside(&p.1)).map(|p| p.0).collect();
                if !parts.is_empty() {
                    out.push(Operand { formula, range, operator, parts });
                }
                collect(text, offset, formula, claim, out);
            }
        }
        _ => {}
    }
}

/// The operands of a sum from left to right.
fn summands(f: &Formula) -> Vec<&Formula> {
    let (mut out, mut stack) = (Vec::new(), vec![f]);
    while let Some(f) = stack.pop() {
        match &f.kind {
            FormulaKind::Add(a, b) | FormulaKind::Sub(a, b) => {
                stack.push(b);
                stack.push(a);
            }
            _ => out.push(f),
        }
    }
    out
}

const SIGNS: [char; 3] = ['+', '-', '−'];

/// The sign in a gap between two operands, comments left aside.
fn sign(text: &str, gap: Range<usize>) -> Option<Range<usize>> {
    let mut comment = false;
    for (k, c) in text.get(gap.clone())?.char_indices() {
        match c {
            '#' => comment = true,
            '\n' | '\r' => comment = false,
            c if !comment && SIGNS.contains(&c) => return Some(gap.start + k..gap.start + k + c.len_utf8()),
            _ => {}
        }
    }
    None
}

/// The edits that turn the sign of an operand.
pub(crate) fn turned(text: &str, operand: &Operand<'_>) -> Edits {
    match &operand.operator {
        Some(place) => {
            let minus = if text[place.clone()] == *"+" { "-" } else { "+" };
            vec![(place.clone(), minus.to_owned())]
        }
        None => {
            let own = &text[operand.range.clone()];
            match own.chars().next().filter(|c| SIGNS[1..].contains(c)) {
                Some(c) => {
                    let rest = own[c.len_utf8()..].trim_start();
                    let end = operand.range.end - rest.len();
                    vec![(operand.range.start..end, String::new())]
                }
                None => vec![(operand.range.start..operand.range.start, "-".to_owned())],
            }
        }
    }
}

/// The edits that multiply an operand by a number: the numbers that it begins and ends with are multiplied where it has
/// such, else the number is put before it.
pub(crate) fn multiplied(text: &str, operand: &Operand<'_>, by: &Rational) -> Edits {
    let mut out = if by.is_negative() { turned(text, operand) } else { Edits::new() };
    let offset = operand.range.start - operand.formula.span.start as usize;
    let mut formula = operand.formula;
    while let FormulaKind::Neg(inner) = &formula.kind {
        formula = inner;
    }
    let at = |span: Span| offset + span.start as usize..offset + span.end as usize;
    let whole = at(formula.span);
    let list = factors(formula);
    // `n`, then perhaps `/ d`, at the front; `/ d` at the end.
    let mut number = by.abs();
    let mut front = 0;
    let mut from = whole.start;
    let mut up_to = whole.end;
    if let Some(n) = literal(list[0].1) {
        number = number.mul(&n);
        front = 1;
        from = at(list[0].1.span).end;
        if let Some((true, d)) = list.get(1).map(|(over, f)| (*over, *f))
            && let Some(d) = literal(d).and_then(|d| d.recip())
        {
            number = number.mul(&d);
            from = at(list[1].1.span).end;
            front = 2;
        }
    }
    if list.len() > front.max(1)
        && let Some((true, d)) = list.last().map(|(over, f)| (*over, *f))
        && let Some(c) = literal(d).and_then(|d| d.recip())
    {
        number = number.mul(&c);
        up_to = at(list[list.len() - 2].1.span).end;
    }
    let rest = text[from..up_to].trim();
    let divided = list.get(front).is_some_and(|f| f.0) && front > 0;
    let rest = if divided { rest } else { rest.trim_start_matches(['*', '·']).trim_start() };
    let new = match (number.is_one(), divided) {
        _ if rest.is_empty() => number.to_string(),
        (true, false) => rest.to_owned(),
        (_, true) => format!("{number}{rest}"),
        (false, false) if rest.starts_with(|c: char| c.is_ascii_digit()) => format!("{number} * {rest}"),
        (false, false) => format!("{number} {rest}"),
    };
    // A sign that was put before the operand goes into the same edit.
    match out.first_mut().filter(|(place, _)| place.start == whole.start) {
        Some((place, sign)) => (*place, *sign) = (whole, format!("{sign}{new}")),
        None => out.push((whole, new)),
    }
    out
}

/// The factors of a product from left to right, each with whether it divides.
fn factors(f: &Formula) -> Vec<(bool, &Formula)> {
    let mut out = Vec::new();
    let mut at = f;
    loop {
        match &at.kind {
            FormulaKind::Mul { left, right, times: Times::Juxtaposed | Times::Star } => {
                out.push((false, &**right));
                at = left;
            }
            FormulaKind::Div(left, right) => {
                out.push((true, &**right));
                at = left;
            }
            _ => break,
        }
    }
    out.push((false, at));
    out.reverse();
    out
}

fn literal(f: &Formula) -> Option<Rational> {
    let FormulaKind::Number(n) = &f.kind else { return None };
    const DIGITS: usize = 12;
    Rational::from_decimal(&n.digits, n.exponent, DIGITS).filter(|r| !r.is_zero())
}

/// The edits that take an operand out of its sum; `None` where nothing would be left.
pub(crate) fn without(text: &str, operand: &Operand<'_>, next: Option<&Operand<'_>>) -> Option<Edits> {
    match (&operand.operator, next.and_then(|n| n.operator.clone())) {
        (Some(operator), _) => {
            let start = text[..operator.start].trim_end_matches([' ', '\t']).len();
            Some(vec![(start..operand.range.end, String::new())])
        }
        (None, Some(operator)) => {
            // What follows becomes the first: a plus is not needed there.
            let rest = &text[operator.end..];
            let end = operator.end + (rest.len() - rest.trim_start().len());
            let sign = if text[operator] == *"+" { "" } else { "-" };
            Some(vec![(operand.range.start..end, sign.to_owned())])
        }
        _ => None,
    }
}

/// The operand of the same sum that follows.
pub(crate) fn follower<'a, 'b>(list: &'b [Operand<'a>], k: usize) -> Option<&'b Operand<'a>> {
    list[k + 1..].iter().find(|o| o.range.start >= list[k].range.end && o.operator.is_some())
}

/// Says in a finding how a refuted claim is put right, and offers to.
pub(crate) fn mend(maker: &mut Maker<'_>, checked: &Checked, derived: &Derived, k: usize, finding: &mut Finding) {
    if !checked.complete {
        return;
    }
    let found = fixes(maker, checked, derived, k);
    if let Some((said, _)) = found.first() {
        finding.help = Some(said.clone());
    }
    finding.fixes.extend(found.into_iter().map(|(_, fix)| fix));
}

/// The changes that make a refuted claim true: each in words, and as edits; the best first.
pub(crate) fn fixes(maker: &mut Maker<'_>, checked: &Checked, derived: &Derived, k: usize) -> Vec<(String, Fix)> {
    const SHOWN: usize = 3;
    let claim = &checked.conserved[k];
    let Ok(answers) = &derived.answers else { return Vec::new() };
    let list = operands(checked, claim);
    let parts: Vec<Expr> = claim.parts.iter().map(|p| p.0).collect();
    let groups: Vec<Vec<usize>> = list.iter().map(|o| o.parts.clone()).collect();
    let mut known: Vec<Expr> = known(maker, checked, derived).into_iter().map(|k| k.0).collect();
    if matches!(answers.energy_conserved, Ok(Verdict::Proved)) {
        known.push(answers.energy.function);
    }
    let mut budget = maker.budget.part(NODES);
    let mut cx = maker.cx();
    cx.budget = &mut budget;
    let model = checked.model();
    let Ok(found) = amends::amends(&mut cx, model, answers.rows.as_ref(), &parts, &groups, &known) else {
        return Vec::new();
    };
    let text = &*checked.text;
    let mut out = Vec::new();
    for amend in found.into_iter().take(SHOWN) {
        let own = |g: usize| shortened(&text[list[g].range.clone()]);
        let (said, title, edits) = match &amend {
            Amend::Sign(g) => (
                format!("with the other sign before `{}` it is conserved", own(*g)),
                format!("change the sign of `{}`", own(*g)),
                turned(text, &list[*g]),
            ),
            Amend::Factor(g, by) => (
                format!("with the factor {by} at `{}` it is conserved", own(*g)),
                format!("multiply `{}` by {by}", own(*g)),
                multiplied(text, &list[*g], by),
            ),
            Amend::Without(g) => {
                let Some(edits) = without(text, &list[*g], follower(&list, *g)) else { continue };
                (format!("without `{}` it is conserved", own(*g)), format!("take `{}` away", own(*g)), edits)
            }
            Amend::Missing(term) => {
                let Some(end) = body_end(checked, claim) else { continue };
                let printed = maker.print(*term);
                let plain = printed.plain.trim();
                let added = match plain.strip_prefix('-') {
                    Some(rest) => format!(" - {}", rest.trim_start()),
                    None => format!(" + {plain}"),
                };
                let shown = crate::verdicts::one_line(&printed.text);
                (
                    format!("{shown} is missing: with it the sum is conserved"),
                    format!("add `{shown}`"),
                    vec![(end..end, added)],
                )
            }
        };
        out.push((said, Fix { title, edits }));
    }
    out
}

/// Where the formula of a claim that is a number ends.
fn body_end(checked: &Checked, claim: &ConservedClaim) -> Option<usize> {
    let row = checked.items.iter().find(|i| i.range.start == claim.range.start)?;
    let ItemKind::Conserved { body, .. } = &row.parsed.item.kind else { return None };
    let whole = row.range.start + body.span.start as usize..row.range.start + body.span.end as usize;
    // The components of a vector are all one part.
    let vector = checked.conserved.iter().filter(|c| c.range.start == claim.range.start).count() > 1;
    (!vector).then_some(whole.end)
}

fn shortened(text: &str) -> String {
    const LONGEST: usize = 60;
    let line = text.split_whitespace().collect::<Vec<_>>().join(" ");
    if line.chars().count() <= LONGEST { line } else { line.chars().take(LONGEST).chain(['…']).collect() }
}

/// The proved constants of a model with their sources.
fn known(maker: &mut Maker<'_>, checked: &Checked, derived: &Derived) -> Vec<(Expr, Source)> {
    let mut out = Vec::new();
    for a in derived.symmetries.iter().flatten() {
        if matches!(a.conserved, Ok(Verdict::Proved)) && !a.gauge_unknown {
            out.push((a.charge, Source::Symmetry(a.symmetry.generator.clone())));
        }
    }
    if let Ok(answers) = &derived.answers
        && checked.model().constraints.is_empty()
    {
        let cyclic: Vec<bool> = answers.cyclic.iter().map(|c| c.momentum.is_proved()).collect();
        out.extend(amends::momenta(&mut maker.cx(), checked.model(), &cyclic).unwrap_or_default());
    }
    out
}

/// Where a proved claim comes from, in words; empty where that is not told.
pub(crate) fn origin(maker: &mut Maker<'_>, checked: &Checked, derived: &Derived, k: usize) -> String {
    let Ok(answers) = &derived.answers else { return String::new() };
    let proved = derived.conserved[k].as_ref().is_ok_and(|c| matches!(c.verdict, Ok(Verdict::Proved)));
    if !proved || !checked.complete {
        return String::new();
    }
    let known = known(maker, checked, derived);
    let mut budget = maker.budget.part(NODES);
    let mut cx = maker.cx();
    cx.budget = &mut budget;
    let energy = answers.energy.function;
    let claim = checked.conserved[k].expr;
    match amends::source(&mut cx, checked.model(), answers.rows.as_ref(), energy, &known, claim) {
        Ok(Source::Energy) => "from the symmetry t → t + ε: L does not depend on the time".to_owned(),
        Ok(Source::Symmetry(g)) => format!("from the symmetry {}", arrows(maker, checked, &g)),
        Ok(Source::Composed) => "a combination of other constants".to_owned(),
        Ok(Source::Hidden(2)) => "from a hidden symmetry (quadratic in velocities)".to_owned(),
        Ok(Source::Hidden(d)) => format!("from a hidden symmetry (of degree {d} in velocities)"),
        Ok(Source::Unknown) | Err(_) => String::new(),
    }
}

/// The factors of a formula that are positive numbers and parameters.
fn constant_factor(arena: &mut Arena, e: Expr) -> Expr {
    let (number, e) = arena.split_coefficient(e);
    let mut out = vec![(arena.number(number.abs()), Rational::ONE)];
    for (base, exponent) in arena.factors(e) {
        let constant = match arena.node(base) {
            Node::Symbol(s) => arena.info(*s).role == Role::Parameter,
            _ => false,
        };
        if constant {
            out.push((base, exponent));
        }
    }
    arena.monomial(&out)
}

/// ε times a formula without a sign.
fn stepped(text: &str) -> String {
    match text.strip_prefix("1/") {
        Some(rest) => format!("ε/{rest}"),
        None => format!("ε {text}"),
    }
}

/// `x → x − ε y, y → y + ε x`, to first order in ε.
fn arrows(maker: &mut Maker<'_>, checked: &Checked, g: &Generator) -> String {
    const SHOWN: usize = 6;
    let mut list = Vec::new();
    if g.tau != Arena::ZERO {
        list.push(("t".to_owned(), g.tau));
    }
    for (q, &eta) in checked.model().coordinates.iter().zip(&g.eta) {
        if eta != Arena::ZERO {
            list.push((q.label(maker.arena), eta));
        }
    }
    // A generator is as good as any multiple of it.
    if let Some(c) = list.first().map(|(_, eta)| constant_factor(maker.arena, *eta))
        && c != Arena::ONE
    {
        list.iter_mut().for_each(|(_, eta)| *eta = maker.arena.div(*eta, c));
    }
    let more = list.len() > SHOWN;
    let mut out = Vec::new();
    for (name, eta) in list.into_iter().take(SHOWN) {
        let text = crate::verdicts::one_line(&maker.prints.text(maker.arena, eta));
        let several = maker.arena.summands(eta).len() > 1;
        out.push(match text.as_str() {
            "1" => format!("{name} → {name} + ε"),
            "−1" | "-1" => format!("{name} → {name} − ε"),
            text if several => format!("{name} → {name} + ε ({text})"),
            text => match text.strip_prefix(['−', '-']) {
                Some(rest) => format!("{name} → {name} − {}", stepped(rest.trim_start())),
                None => format!("{name} → {name} + {}", stepped(text)),
            },
        });
    }
    if more {
        out.push("…".to_owned());
    }
    out.join(", ")
}
