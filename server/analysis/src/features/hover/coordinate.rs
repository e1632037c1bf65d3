//! Hovers of coordinates: equation of motion, momentum, force, what is conserved, which claims move it.

use super::writer::{FormRow, List, SHOWN, Writer, counted, forms, labelled, quoted, short};
use crate::checked::SymbolRow;
use crate::features::place::{Place, formulas_at};
use crate::insights;
use leastwise_algebra::{Arena, Expr, Rational, Stopped, Verdict};
use leastwise_grammar::tree::*;
use leastwise_mechanics::lagrange::{self, signed_parts};
use leastwise_mechanics::model::Coordinate;

/// One form of a coordinate: all that is asked of it.
struct Row {
    /// `θ`, `x[3]`, `x[i]`.
    name: String,
    /// First and last member, of a part of a large family.
    range: Option<(i64, i64)>,
    /// `   (i = 2 … 9999)`, of a part of a large family.
    suffix: String,
    momentum: Expr,
    force: Expr,
    equation: Expr,
    reaction: Expr,
    /// The generalised forces by name; only nonzero ones.
    forces: Vec<(String, Expr)>,
    /// Whether ∂L/∂q vanishes.
    cyclic: Verdict,
    /// Whether ∂L/∂q + 𝒬 vanishes.
    balanced: Verdict,
}

impl Row {
    /// What the equation's left side is equal to.
    fn right_side(&self) -> String {
        if self.reaction == Arena::ZERO { " = 0".into() } else { format!(" = R_{}", self.name) }
    }
}

/// Says what is known of a coordinate.
pub(super) fn coordinate(w: &mut Writer<'_, '_>, row: &SymbolRow, place: &Place<'_>) {
    let checked = w.checked;
    let all: Vec<usize> = (0..checked.model.coordinates.len())
        .filter(|&i| *w.maker.arena.info(checked.model.coordinates[i].symbol).name == *row.name)
        .collect();
    let member = row.index.as_ref().and_then(|_| chosen(w, place));
    let of: Vec<usize> = match member {
        Some(k) => {
            let own = |&i: &usize| {
                let q = &checked.model.coordinates[i];
                q.members.is_some() || w.maker.arena.info(q.symbol).member == Some(k)
            };
            all.iter().copied().filter(own).collect()
        }
        None => all,
    };
    if of.is_empty() {
        w.prose(format!("`{}` is a coordinate without a place in the model", row.name));
        heading(w, row);
        return;
    }
    if of.len() == 1 {
        single(w, row, of[0], member);
    } else {
        family(w, row, &of);
    }
    let named = |k: &usize| checked.items[*k].parsed.uses.names.iter().any(|u| u.name == *row.name);
    let items: Vec<usize> = (0..checked.items.len()).filter(named).collect();
    super::name::assumptions(w, &row.name, &items);
    moved_by(w, &of);
    if let ([i], true) = (&of[..], checked.complete) {
        parity(w, *i);
    }
    w.missing();
}

/// Says whether the coordinate can be reflected.
fn parity(w: &mut Writer<'_, '_>, i: usize) {
    if w.checked.model.coordinates[i].members.is_some() {
        return;
    }
    if let Some(map) = insights::even(w.maker, w.checked, i) {
        w.prose(format!("L is even under {}.", map.words()));
    }
}

/// The number of the member that stands at the place.
fn chosen(w: &Writer<'_, '_>, place: &Place<'_>) -> Option<i64> {
    let item = &w.checked.items[place.item];
    let local = place.range.start.checked_sub(item.range.start)?;
    let path = formulas_at(&item.parsed.item.kind, local);
    path.into_iter().find_map(|f| match &f.kind {
        FormulaKind::Index { base, indices } if base.span.range().contains(&local) => {
            constant(w, indices.first()?, indices.len())
        }
        _ => None,
    })
}

/// The value of an index that is made of numbers and constant definitions.
fn constant(w: &Writer<'_, '_>, f: &Formula, count: usize) -> Option<i64> {
    if count != 1 {
        return None;
    }
    let of = |f: &Formula| constant(w, f, 1);
    match &f.kind {
        FormulaKind::Number(n) if n.exponent == 0 => n.digits.parse().ok(),
        FormulaKind::Name(name) => {
            let e = w.checked.symbol(name)?.definition.as_ref()?.scalar()?;
            w.maker.arena.as_i64(e)
        }
        FormulaKind::Paren(inner) => of(inner),
        FormulaKind::Add(a, b) => of(a)?.checked_add(of(b)?),
        FormulaKind::Sub(a, b) => of(a)?.checked_sub(of(b)?),
        FormulaKind::Mul { left, right, .. } => of(left)?.checked_mul(of(right)?),
        _ => None,
    }
}

/// Derives the forms of a coordinate. Prints nothing.
fn rows(w: &mut Writer<'_, '_>, i: usize) -> Result<Vec<Row>, Stopped> {
    let model = &w.checked.model;
    let q = &model.coordinates[i];
    let all = signed_parts(model).concat();
    let mut lists = Vec::new();
    let mut cx = w.cx();
    lists.push(lagrange::momentum(&mut cx, &all, q)?);
    lists.push(lagrange::force(&mut cx, &all, q)?);
    lists.push(lagrange::equation(&mut cx, model, q)?);
    lists.push(lagrange::reaction(&mut cx, model, q)?);
    let mut names = Vec::new();
    for f in &model.forces {
        let acting = lagrange::generalised(&mut cx, f, q)?;
        if !acting.is_empty() {
            lists.push(acting);
            names.push(f.name.clone());
        }
    }
    let found = forms(w, q, &lists)?;
    let mut out = Vec::with_capacity(found.len());
    for FormRow { name, range, suffix, values } in found {
        let named = names.iter().cloned().zip(values[4..].iter().copied());
        let forces: Vec<(String, Expr)> = named.filter(|(_, e)| *e != Arena::ZERO).collect();
        let (cyclic, balanced) = match (&w.derived.answers, q.members) {
            (Ok(a), None) => (a.cyclic[i].cyclic, a.cyclic[i].momentum),
            _ => {
                let mut parts = vec![(values[1], Rational::ONE)];
                let cyclic = w.cx().vanishes(&parts);
                parts.extend(forces.iter().map(|(_, e)| (*e, Rational::ONE)));
                (cyclic, w.cx().vanishes(&parts))
            }
        };
        out.push(Row {
            name,
            range,
            suffix,
            momentum: values[0],
            force: values[1],
            equation: values[2],
            reaction: values[3],
            forces,
            cyclic,
            balanced,
        });
    }
    Ok(out)
}

/// The form that holds for a member of a family.
fn at(w: &mut Writer<'_, '_>, q: &Coordinate, rows: Vec<Row>, member: i64) -> Result<Vec<Row>, Stopped> {
    let Some(m) = q.members else { return Ok(rows) };
    let name = w.maker.arena.name(q.symbol);
    let own = format!("{name}[{member}]");
    for mut row in rows {
        let holds = row.range.is_some_and(|(a, b)| a <= member && member <= b);
        if !holds {
            continue;
        }
        let set = |w: &mut Writer<'_, '_>, e: &mut Expr| -> Result<(), Stopped> {
            let maker = &mut *w.maker;
            *e = leastwise_mechanics::forms::at_member(maker.arena, *e, m.index, member, maker.budget)?;
            Ok(())
        };
        set(w, &mut row.momentum)?;
        set(w, &mut row.force)?;
        set(w, &mut row.equation)?;
        set(w, &mut row.reaction)?;
        for (_, e) in &mut row.forces {
            set(w, e)?;
        }
        (row.name, row.suffix) = (own, String::new());
        return Ok(vec![row]);
    }
    Ok(Vec::new())
}

/// One coordinate, or one that stands for a large family.
fn single(w: &mut Writer<'_, '_>, row: &SymbolRow, i: usize, member: Option<i64>) {
    let q = w.checked.model.coordinates[i].clone();
    let found = rows(w, i).and_then(|rows| match member {
        Some(k) => at(w, &q, rows, k),
        None => Ok(rows),
    });
    let rows = match found {
        Ok(rows) => rows,
        Err(why) => {
            heading(w, row);
            return w.stopped("Equation of motion", why);
        }
    };
    let complete = w.checked.complete;
    let mut equations = Vec::new();
    for r in rows.iter().take(SHOWN) {
        let text = w.text(r.equation);
        equations.extend(labelled("", &text, &format!("{}{}", r.right_side(), r.suffix)));
    }
    if let [r] = &rows[..]
        && r.equation == Arena::ZERO
        && r.reaction == Arena::ZERO
    {
        w.prose(format!("`{}` stands in no term: no equation of motion determines it", r.name));
        return heading(w, row);
    }
    let first = if complete { rows.first().and_then(|r| conserved(w, r)) } else { None };
    let leads = match (first, rows.len()) {
        (Some(text), 1) => {
            w.prose(text);
            true
        }
        _ => {
            w.formulas(equations.clone());
            false
        }
    };
    heading(w, row);
    let mut lines = if leads { equations } else { Vec::new() };
    for r in rows.iter().take(SHOWN) {
        let p = w.text(r.momentum);
        lines.extend(labelled(&format!("p_{} = ", r.name), &p, &r.suffix));
        let f = if r.cyclic.is_proved() { Arena::ZERO } else { r.force };
        let f = w.text(f);
        lines.extend(labelled(&format!("∂L/∂{} = ", r.name), &f, &r.suffix));
        for (name, e) in r.forces.iter().take(SHOWN) {
            let text = w.text(*e);
            lines.extend(labelled(&format!("Q_{} = ", r.name), &text, &format!("   ({name}){}", r.suffix)));
        }
        if r.reaction != Arena::ZERO {
            let reaction = w.text(r.reaction);
            lines.extend(labelled(&format!("R_{} = ", r.name), &reaction, &r.suffix));
        }
    }
    if rows.len() > SHOWN {
        lines.push(format!("and {} more forms", rows.len() - SHOWN));
    }
    w.formulas(lines);
    if complete && !leads {
        for r in &rows {
            if let Some(text) = conserved(w, r) {
                w.prose(text);
            }
        }
    }
    for r in &rows {
        if complete && let Verdict::Undecided(why) = r.cyclic {
            w.prose(format!("Whether `{}` is cyclic is undecided: {why}", r.name));
        }
    }
}

/// What is conserved because of a coordinate, or why nothing is though it is cyclic.
fn conserved(w: &mut Writer<'_, '_>, r: &Row) -> Option<String> {
    let on = match r.suffix.trim_matches([' ', '(', ')']) {
        "" => String::new(),
        members => format!(" for {members}"),
    };
    let p = w.text(r.momentum);
    let p = match short(&p) {
        Some(p) => format!("`p_{} = {p}`", r.name),
        None => format!("its momentum `p_{}`", r.name),
    };
    let names: Vec<String> = r.forces.iter().map(|f| f.0.clone()).collect();
    if r.reaction != Arena::ZERO {
        return r.cyclic.is_proved().then(|| {
            format!("`{}` is cyclic{on}, but reactions act along it: {p} changes at the rate `R_{}`", r.name, r.name)
        });
    }
    match (r.cyclic, r.balanced) {
        (Verdict::Proved, Verdict::Proved) => Some(format!("`{}` is cyclic{on}: {p} is conserved (proved)", r.name)),
        (Verdict::Proved, Verdict::Refuted(_)) => {
            let verb = if names.len() == 1 { "changes" } else { "change" };
            Some(format!("`{}` is cyclic{on}, but {} {verb} {p}", r.name, quoted(&names)))
        }
        (Verdict::Proved, Verdict::Undecided(why)) => {
            Some(format!("`{}` is cyclic{on}; whether {p} is conserved is undecided: {why}", r.name))
        }
        (Verdict::Refuted(_), Verdict::Proved) => {
            Some(format!("{p} is conserved{on} (proved): {} cancel ∂L/∂{}", quoted(&names), r.name))
        }
        _ => None,
    }
}

/// A family that is written out: member by member.
fn family(w: &mut Writer<'_, '_>, row: &SymbolRow, of: &[usize]) {
    let (mut momenta, mut equations) = (List::new(), List::new());
    let (mut cyclic, mut kept) = (0, 0);
    for &i in of {
        if let Ok(a) = &w.derived.answers {
            cyclic += a.cyclic[i].cyclic.is_proved() as usize;
            kept += a.cyclic[i].momentum.is_proved() as usize;
        }
        let (first, second) = (equations.wants(), momenta.wants());
        if !first && !second {
            continue;
        }
        let rows = match rows(w, i) {
            Ok(rows) => rows,
            Err(why) => return w.stopped("Equations of motion", why),
        };
        for r in rows {
            if first {
                let text = w.text(r.equation);
                equations.add(labelled(&format!("{}: ", r.name), &text, &r.right_side()));
            }
            if second {
                let text = w.text(r.momentum);
                momenta.add(labelled(&format!("p_{} = ", r.name), &text, ""));
            }
        }
    }
    let (equations, momenta) = (equations.done(), momenta.done());
    heading(w, row);
    w.prose("Equations of motion:");
    w.formulas(equations);
    w.prose("Canonical momenta:");
    w.formulas(momenta);
    if w.checked.complete && cyclic > 0 {
        let kept = if w.checked.model.constraints.is_empty() {
            format!(
                ", {} of the momenta conserved (proved)",
                if kept == of.len() { "all".into() } else { kept.to_string() }
            )
        } else {
            String::new()
        };
        w.prose(format!("{cyclic} of the {} members are cyclic{kept}.", of.len()));
    }
}

/// `coordinate θ: angle`, and its description.
fn heading(w: &mut Writer<'_, '_>, row: &SymbolRow) {
    let quantity = row.quantity.as_ref().map_or(String::new(), |q| format!(": {q}"));
    let title = match (&row.index, row.members) {
        (Some(i), Some((a, b))) => {
            let count = counted(b - a + 1, "coordinate", "coordinates");
            format!("Family `{}[{i}]{quantity}`, {i} = {a} … {b}, {count}", row.name)
        }
        _ => format!("Coordinate `{}{quantity}`", row.name),
    };
    w.titled(title, row.description.as_deref());
}

/// The claims whose transformations move the coordinate.
fn moved_by(w: &mut Writer<'_, '_>, of: &[usize]) {
    let mut lines = Vec::new();
    for (claim, answer) in w.checked.symmetries.iter().zip(&w.derived.symmetries) {
        let Ok(a) = answer else { continue };
        let moved: Vec<Expr> = of.iter().filter_map(|&i| a.symmetry.generator.eta.get(i).copied()).collect();
        if moved.iter().all(|&e| e == Arena::ZERO) {
            continue;
        }
        lines.push(format!("`{}` ({})", claim.name, super::claim::verdict(w, a)));
    }
    let more = lines.len().saturating_sub(SHOWN);
    lines.truncate(SHOWN);
    if more > 0 {
        lines.push(format!("{more} more"));
    }
    if !lines.is_empty() {
        w.prose(format!("Moved by {}.", lines.join(", ")));
    }
}
