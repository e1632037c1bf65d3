//! Behind a coordinate: its momentum, and whether it is conserved.
//!
//! `cyclic: p = …` where ∂L/∂q ≡ 0 and nothing acts, so that p is conserved; `cyclic, but brake acts: p = …` where a force
//! or reaction takes it; `conserved: p = …` where force and ∂L/∂q cancel; else `p = …`. A family has one form for all its
//! members where there is one, else its first forms.

use super::{Desk, InlayKind, MORE, code_end, list, verb};
use crate::derive::Derived;
use leastwise_algebra::{Arena, Expr, Node, Rational, Role, Stopped, Verdict};
use leastwise_mechanics::context::Parts;
use leastwise_mechanics::forms::aligned;
use leastwise_mechanics::lagrange::{self, FormParts, signed_parts};
use leastwise_mechanics::model::Model;
use leastwise_mechanics::symmetry::shift;
use leastwise_mechanics::verdicts::{Answers, answer_generator, dependent_parts};
use std::ops::Range;

/// A hint longer than this is shown nowhere: further forms are not printed.
const LONGEST: usize = 400;

/// After so many members in a row of which none is like the next, the others are not looked at.
const MANY: usize = 4;

/// A name that declares one coordinate or a family.
struct Declared {
    /// Its place.
    range: Range<usize>,
    /// Its coordinates in the model.
    coordinates: Range<usize>,
}

pub(super) fn hints(desk: &mut Desk<'_, '_, '_>, derived: &Derived) {
    let Ok(answers) = &derived.answers else { return };
    let mut names: Vec<Declared> = Vec::new();
    for (i, place) in desk.checked.coordinates.iter().enumerate() {
        match names.last_mut() {
            Some(last) if last.range == place.range => last.coordinates.end = i + 1,
            _ => names.push(Declared { range: place.range.clone(), coordinates: i..i + 1 }),
        }
    }
    // Names on one line share a hint.
    let mut at = 0;
    while at < names.len() {
        let offset = code_end(desk.checked, names[at].range.end);
        let end = at + names[at..].iter().take_while(|n| n.range.end <= offset).count().max(1);
        if desk.wants(offset) {
            let of = &names[at..end];
            claimed(desk, answers, of, offset);
            // Beyond a bound nothing is said, rather than half of it.
            if let Ok((label, target)) = line(desk, answers, of) {
                desk.push(offset, InlayKind::Momentum, label, target);
            }
        }
        at = end;
    }
}

/// A momentum with what is said of it.
struct Momentum {
    /// `cyclic`, `cyclic, but brake acts`, or nothing.
    lead: String,
    /// `p`, `p_x`, `p[i]`.
    name: String,
    /// ∂L/∂q̇.
    value: Expr,
    /// The members that it is of, where they are not all of the family.
    members: Option<(String, i64, i64)>,
    /// What acts.
    target: Option<Range<usize>>,
}

/// All momenta of a line, those of which the same is said behind one colon.
fn line(
    desk: &mut Desk<'_, '_, '_>,
    answers: &Answers,
    names: &[Declared],
) -> Result<(String, Option<Range<usize>>), Stopped> {
    let mut label = String::new();
    let mut lead: Option<String> = None;
    let mut target = None;
    'names: for name in names {
        let (momenta, more) = momenta(desk, answers, name, names.len() > 1)?;
        for m in momenta {
            if label.chars().count() > LONGEST || label.ends_with(MORE) {
                label.push_str(", …");
                break 'names;
            }
            match &lead {
                Some(last) if *last == m.lead => label.push_str(", "),
                Some(_) => label.push_str("; "),
                None => {}
            }
            if lead.as_ref() != Some(&m.lead) && !m.lead.is_empty() {
                label.push_str(&m.lead);
                label.push_str(": ");
            }
            let value = desk.print(m.value);
            label.push_str(&format!("{} = {value}", m.name));
            if let Some((index, a, b)) = m.members {
                label.push_str(&format!(" for {index} = {a}..{b}"));
            }
            lead = Some(m.lead);
            target = target.or(m.target);
        }
        if more {
            label.push_str(", …");
        }
    }
    Ok((label, target))
}

/// What is said of a coordinate or member, or of members of a large family.
struct Said {
    lead: String,
    target: Option<Range<usize>>,
    value: Expr,
    /// Members; a single coordinate has none.
    range: Option<(i64, i64)>,
}

/// The momenta that a name has, and whether there are more of them.
fn momenta(
    desk: &mut Desk<'_, '_, '_>,
    answers: &Answers,
    name: &Declared,
    several: bool,
) -> Result<(Vec<Momentum>, bool), Stopped> {
    let checked = desk.checked;
    let model = checked.model();
    let info = desk.maker.arena.info(model.coordinates[name.coordinates.start].symbol).clone();
    let row = checked.symbol(&info.name);
    let letter = if several { format!("p_{}", info.name) } else { desk.letter("p", &format!("p_{}", info.name)) };
    let letter = desk.letter(&letter, &format!("∂L/∂{}'", info.name));
    let Some((index, all)) = row.and_then(|r| r.index.clone().zip(r.members)) else {
        let said = said(desk, answers, name.coordinates.start)?;
        let momentum =
            |s: Said| Momentum { lead: s.lead, name: letter.clone(), value: s.value, members: None, target: s.target };
        return Ok((said.into_iter().map(momentum).collect(), false));
    };
    let variable = desk.maker.arena.symbol(&index, None, Role::Index);
    let variable = desk.maker.arena.sym(variable);
    // Neighbours of which the same is said, in terms of the index: put back at each member it is that member's own.
    let mut runs: Vec<Said> = Vec::new();
    let mut form: Option<Expr> = None;
    let mut more = false;
    let large = model.coordinates[name.coordinates.start].members.is_some();
    for (i, k) in name.coordinates.clone().zip(all.0..) {
        for s in said(desk, answers, i)? {
            let (a, b) = s.range.unwrap_or(if large { all } else { (k, k) });
            let own = if a == b { at_index(desk, s.value, variable, a)? } else { s.value };
            match runs.last_mut() {
                Some(last) if form == Some(own) && last.lead == s.lead => {
                    last.value = own;
                    last.range = last.range.map(|(first, _)| (first, b));
                }
                _ => {
                    runs.push(Said { range: Some((a, b)), ..s });
                    form = Some(own);
                }
            }
        }
        // The first ones stand for all.
        let alone = |s: &Said| s.range.is_none_or(|(a, b)| a == b);
        if runs.len() > MANY && runs[runs.len() - MANY..].iter().all(alone) {
            more = k < all.1;
            break;
        }
    }
    let mut out = Vec::new();
    for run in runs {
        let (a, b) = run.range.unwrap_or(all);
        let shown = if a == b { a.to_string() } else { index.to_string() };
        let part = a != b && (a, b) != all;
        out.push(Momentum {
            lead: run.lead,
            name: format!("{letter}[{shown}]"),
            value: run.value,
            members: part.then(|| (index.to_string(), a, b)),
            target: run.target,
        });
    }
    Ok((out, more))
}

/// An expression of the member `k` in terms of the index: `x[k + 1]` becomes `x[i + 1]`.
fn at_index(desk: &mut Desk<'_, '_, '_>, e: Expr, index: Expr, k: i64) -> Result<Expr, Stopped> {
    let arena = &mut *desk.maker.arena;
    let mut pairs = Vec::new();
    for atom in arena.atoms(e) {
        let (s, order) = match *arena.node(atom) {
            Node::Symbol(s) => (s, 0),
            Node::Jet(s, n) => (s, n),
            _ => continue,
        };
        let info = arena.info(s).clone();
        let Some(member) = info.member else { continue };
        let family = arena.symbol(&info.name, None, info.role);
        let place = arena.linear(&[(index, Rational::ONE), (Arena::ONE, Rational::integer(member - k))]);
        pairs.push((atom, arena.member(family, place, order)));
    }
    arena.substitute(e, &pairs.into_iter().collect(), desk.maker.budget)
}

/// The momentum of a coordinate, form by form, with what acts on it.
fn said(desk: &mut Desk<'_, '_, '_>, answers: &Answers, i: usize) -> Result<Vec<Said>, Stopped> {
    let checked = desk.checked;
    let model = checked.model();
    let q = &model.coordinates[i];
    let all: Parts = signed_parts(model).concat();
    let mut cx = desk.cx();
    let momentum = lagrange::momentum(&mut cx, &all, q)?;
    let verdict = &answers.cyclic[i];
    let mut lists: Vec<FormParts> = vec![momentum];
    if q.members.is_none() && !verdict.cyclic.is_proved() && !verdict.momentum.is_proved() {
        let value = aligned(cx.arena, q, &lists, cx.budget)?.1[0][0];
        return Ok(vec![Said { lead: String::new(), target: None, value, range: None }]);
    }
    lists.push(lagrange::force(&mut cx, &all, q)?);
    for f in &model.forces {
        lists.push(lagrange::generalised(&mut cx, f, q)?);
    }
    for c in &model.constraints {
        let alone = Model { coordinates: vec![], terms: vec![], forces: vec![], constraints: vec![c.clone()] };
        lists.push(lagrange::reaction(&mut cx, &alone, q)?);
    }
    let (ranges, rows) = aligned(cx.arena, q, &lists, cx.budget)?;
    let mut out = Vec::new();
    for (k, range) in ranges.iter().enumerate() {
        let value = rows[0][k];
        let mut acting: Vec<usize> = Vec::new();
        let mut certain = true;
        for (n, row) in rows[2..].iter().enumerate() {
            let verdict =
                if row[k] == Arena::ZERO { Verdict::Proved } else { desk.cx().vanishes(&[(row[k], Rational::ONE)]) };
            if !verdict.is_proved() {
                acting.push(n);
                certain &= verdict.is_refuted();
            }
        }
        let cyclic = verdict.cyclic.is_proved() || rows[1][k] == Arena::ZERO;
        let reacts = acting.iter().any(|&n| n >= model.forces.len());
        let mut conserved = acting.is_empty() && cyclic || !reacts && verdict.momentum.is_proved();
        if reacts && q.members.is_none() {
            // A reaction may act and yet do nothing on any motion.
            let regular = answers.mass.is_regular();
            let answer = answer_generator(&mut desk.cx(), model, regular, shift(model, i))?;
            conserved = matches!(answer.conserved, Ok(Verdict::Proved));
            certain = matches!(answer.conserved, Ok(Verdict::Refuted(_)));
        } else if reacts || !answers.mass.is_regular() {
            certain = false;
        }
        let lead = match (cyclic, conserved) {
            (true, true) => "cyclic".to_string(),
            (false, true) => "conserved".to_string(),
            (true, false) => {
                let (forces, constraints): (Vec<usize>, Vec<usize>) =
                    acting.iter().partition(|&&n| n < model.forces.len());
                let mut names: Vec<String> = forces.iter().map(|&n| model.forces[n].name.clone()).collect();
                names.extend(desk.constraint_names(constraints.iter().map(|n| n - model.forces.len())));
                let verb = if certain { verb(&names, "acts", "act") } else { "may act" };
                format!("cyclic, but {} {verb}", list(&names))
            }
            (false, false) => String::new(),
        };
        let target =
            acting.first().filter(|_| cyclic && !conserved).and_then(|&n| match n.checked_sub(model.forces.len()) {
                None => desk.force_place(n),
                Some(c) => checked.constraints.get(c).cloned(),
            });
        out.push(Said { lead, target, value, range: *range });
    }
    Ok(out)
}

/// What is wrong with `cyclic` before the names of a line.
fn claimed(desk: &mut Desk<'_, '_, '_>, answers: &Answers, names: &[Declared], offset: usize) {
    let checked = desk.checked;
    let model = checked.model();
    for name in names {
        // Of a family the first member that is not cyclic stands for all.
        let mut of = name.coordinates.clone().filter(|&i| checked.coordinates[i].cyclic);
        let Some(i) = of.find(|&i| !answers.cyclic[i].cyclic.is_proved()) else { continue };
        let q = model.coordinates[i].label(desk.maker.arena);
        let alone = names.len() == 1 && name.coordinates.len() == 1;
        match &answers.cyclic[i].cyclic {
            Verdict::Proved => {}
            Verdict::Undecided(reason) => {
                let what = if alone { "whether it" } else { &format!("whether {q}") };
                desk.push(offset, InlayKind::Claim, format!("undecided {what} is cyclic: {reason}"), None);
            }
            Verdict::Refuted(_) => {
                let culprits = dependent_parts(&mut desk.cx(), model, i).unwrap_or_default();
                let blamed: Vec<String> = culprits.iter().map(|c| model.terms[c.term].name.clone()).collect();
                let what = if alone { "not cyclic".to_string() } else { format!("{q} is not cyclic") };
                let label = if blamed.is_empty() { what } else { format!("{what}: {}", list(&blamed)) };
                desk.push(offset, InlayKind::Claim, label, super::claims::first_place(checked, &culprits));
            }
        }
    }
}
