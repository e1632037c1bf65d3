//! Momenta p = ∂L/∂q̇, forces ∂L/∂q, and the Euler–Lagrange residuals d/dt ∂L/∂q̇ − ∂L/∂q − 𝒬 [GPS §1.4, LL §2].
//!
//! Each is a linear map of L: it is derived for each additive part by itself and summed last.

use crate::context::{Context, Parts};
use crate::forms::{self, Form};
use crate::model::{Action, Coordinate, Force, Model};
use leastwise_algebra::{Arena, Expr, Node, Rational, Role, Stopped};

/// The additive parts of L with their signs, term by term.
pub fn signed_parts(model: &Model) -> Vec<Parts> {
    model.terms.iter().map(|t| t.parts.iter().map(|&p| (p, Rational::integer(t.sign()))).collect()).collect()
}

/// L as one expression.
pub fn lagrangian(cx: &mut Context<'_>, model: &Model) -> Result<Expr, Stopped> {
    let parts: Parts = signed_parts(model).concat();
    cx.build(&parts)
}

/// A list of forms of one coordinate, with coefficients, that is not summed yet.
pub type FormParts = Vec<(Vec<Form>, Rational)>;

/// ∂/∂q⁽ⁿ⁾ of each part.
pub fn by_coordinate(cx: &mut Context<'_>, parts: &Parts, q: &Coordinate, order: u16) -> Result<FormParts, Stopped> {
    let mut out = Vec::new();
    for (part, c) in parts {
        let forms = forms::derivative(cx.arena, *part, q, order, cx.budget)?;
        if forms.iter().any(|f| f.expr != Arena::ZERO) {
            out.push((forms, c.clone()));
        }
    }
    Ok(out)
}

/// Sums a list of forms.
pub fn collect(cx: &mut Context<'_>, q: &Coordinate, parts: &FormParts) -> Result<Vec<Form>, Stopped> {
    let lists: Vec<(&[Form], Rational)> = parts.iter().map(|(f, c)| (f.as_slice(), c.clone())).collect();
    forms::combine(cx.arena, q, &lists, cx.budget)
}

/// The generalised momentum ∂L/∂q̇.
pub fn momentum(cx: &mut Context<'_>, parts: &Parts, q: &Coordinate) -> Result<FormParts, Stopped> {
    by_coordinate(cx, parts, q, 1)
}

/// The force ∂L/∂q.
pub fn force(cx: &mut Context<'_>, parts: &Parts, q: &Coordinate) -> Result<FormParts, Stopped> {
    by_coordinate(cx, parts, q, 0)
}

/// d/dt ∂L/∂q̇ − ∂L/∂q of the parts.
pub fn residual(cx: &mut Context<'_>, parts: &Parts, q: &Coordinate) -> Result<FormParts, Stopped> {
    let mut out = Vec::new();
    for (forms, c) in momentum(cx, parts, q)? {
        let rate = forms::map(&forms, |p| cx.arena.total(p, cx.budget))?;
        out.push((rate, c));
    }
    for (forms, c) in force(cx, parts, q)? {
        out.push((forms, c.neg()));
    }
    Ok(out)
}

/// The generalised force 𝒬 on `q`. Applied: F ∂E/∂q where E depends on positions and time only, F ∂E/∂q̇ where it
/// depends on velocities. Dissipation: −∂ℱ/∂q̇ [GPS §1.5].
pub fn generalised(cx: &mut Context<'_>, force: &Force, q: &Coordinate) -> Result<FormParts, Stopped> {
    match &force.action {
        Action::Dissipation(parts) => {
            let parts: Parts = parts.iter().map(|&p| (p, Rational::MINUS_ONE)).collect();
            by_coordinate(cx, &parts, q, 1)
        }
        Action::Applied(pairs) => {
            let mut out = Vec::new();
            for &(on, f) in pairs {
                let order = depends_on_velocities(cx.arena, on) as u16;
                let lever = forms::derivative(cx.arena, on, q, order, cx.budget)?;
                // A force given at the free index of a family acts on each member with its own value.
                let forms = forms::map(&lever, |l| Ok(cx.arena.mul(l, f)))?;
                if forms.iter().any(|x| x.expr != Arena::ZERO) {
                    out.push((forms, Rational::ONE));
                }
            }
            Ok(out)
        }
    }
}

/// Whether an expression contains a coordinate's velocity.
pub fn depends_on_velocities(arena: &Arena, e: Expr) -> bool {
    arena.atoms(e).into_iter().any(|a| match arena.node(a) {
        Node::Jet(s, _) => arena.info(*s).role == Role::Coordinate,
        Node::Member { family, order, .. } => *order > 0 && arena.info(*family).role == Role::Coordinate,
        _ => false,
    })
}

/// The highest order of a coordinate's time derivative in an expression.
pub fn jet_order(arena: &Arena, e: Expr) -> u16 {
    arena
        .atoms(e)
        .into_iter()
        .map(|a| match arena.node(a) {
            Node::Jet(s, n) if arena.info(*s).role == Role::Coordinate => *n,
            Node::Member { family, order, .. } if arena.info(*family).role == Role::Coordinate => *order,
            _ => 0,
        })
        .max()
        .unwrap_or(0)
}

/// The equation of motion's residual, forces included, as unsummed parts.
pub fn equation(cx: &mut Context<'_>, model: &Model, q: &Coordinate) -> Result<FormParts, Stopped> {
    let parts: Parts = signed_parts(model).concat();
    let mut out = residual(cx, &parts, q)?;
    for f in &model.forces {
        for (forms, c) in generalised(cx, f, q)? {
            out.push((forms, c.neg()));
        }
    }
    Ok(out)
}

/// Splits unsummed forms into the sums whose vanishing is asked: one for a single coordinate, one for each range of
/// a family.
pub fn questions(cx: &mut Context<'_>, q: &Coordinate, parts: &FormParts) -> Result<Vec<Parts>, Stopped> {
    if q.members.is_none() {
        return Ok(vec![parts.iter().flat_map(|(f, c)| f.iter().map(|f| (f.expr, c.clone()))).collect()]);
    }
    let forms = collect(cx, q, parts)?;
    Ok(forms.into_iter().map(|f| vec![(f.expr, Rational::ONE)]).collect())
}

/// The multiplier of a constraint, `λ_` and its name.
pub fn multiplier(arena: &mut Arena, name: &str) -> Expr {
    let s = arena.symbol(&format!("λ_{name}"), None, Role::Multiplier);
    arena.sym(s)
}

/// The reaction Rᵢ = Σ λₐ aₐᵢ with aₐᵢ = ∂fₐ/∂qⁱ for a holonomic constraint, ∂fₐ/∂q̇ⁱ for one linear in the velocities
/// (d'Alembert–Lagrange) [GPS §2.4].
pub fn reaction(cx: &mut Context<'_>, model: &Model, q: &Coordinate) -> Result<FormParts, Stopped> {
    let mut out = Vec::new();
    for c in &model.constraints {
        let order = depends_on_velocities(cx.arena, c.f) as u16;
        let slope = forms::derivative(cx.arena, c.f, q, order, cx.budget)?;
        let lambda = multiplier(cx.arena, &c.name);
        let forms = forms::map(&slope, |a| Ok(cx.arena.mul(lambda, a)))?;
        if forms.iter().any(|f| f.expr != Arena::ZERO) {
            out.push((forms, Rational::ONE));
        }
    }
    Ok(out)
}

/// Whether no constraint depends on the time, so that reactions do no work: holonomic ones free of `t`, others
/// homogeneous in the velocities.
pub fn constraints_at_rest(cx: &mut Context<'_>, model: &Model) -> Result<bool, Stopped> {
    let t = crate::model::time(cx.arena);
    let t = cx.arena.sym(t);
    for c in &model.constraints {
        if cx.arena.partial(c.f, t, cx.budget)? != Arena::ZERO {
            return Ok(false);
        }
        let driven = cx.arena.atoms(c.f).into_iter().any(|a| match cx.arena.node(a) {
            Node::Symbol(s) | Node::Jet(s, _) => cx.arena.info(*s).role == Role::Input,
            Node::Member { family, .. } => cx.arena.info(*family).role == Role::Input,
            _ => false,
        });
        if driven {
            return Ok(false);
        }
        if depends_on_velocities(cx.arena, c.f) {
            // What is left at zero velocity moves the constraint.
            let mut at_rest = hashbrown::HashMap::new();
            for a in cx.arena.atoms(c.f) {
                if jet_order(cx.arena, a) > 0 {
                    at_rest.insert(a, Arena::ZERO);
                }
            }
            if cx.arena.substitute(c.f, &at_rest, cx.budget)? != Arena::ZERO {
                return Ok(false);
            }
        }
    }
    Ok(true)
}
