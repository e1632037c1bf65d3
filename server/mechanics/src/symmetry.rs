//! One-parameter families of transformations: generator, variation, gauge term, charge and balance law.
//!
//! Variation of the action's integrand (Rund–Trautman):
//!
//! V = (∂L/∂t) τ + Σ (∂L/∂qⁱ) ηⁱ + Σ (∂L/∂q̇ⁱ)(η̇ⁱ − q̇ⁱ τ̇) + L τ̇
//!
//! Exact symmetry: V ≡ 0. Up to a gauge term: the Euler operator of V vanishes, V = dF/dt with F(t, q). Charge
//! Q = Σ pᵢ (ηⁱ − q̇ⁱ τ) + L τ − F. On every motion, with forces 𝒬ᵢ,
//!
//! dQ/dt = (V − Ḟ) + Σ 𝒬ᵢ (ηⁱ − q̇ⁱ τ)
//!
//! [O §4.4; GPS §13.7].

use crate::context::{Context, Parts};
use crate::forms::{at_index, index_of};
use crate::lagrange::{self, jet_order, questions, residual, signed_parts};
use crate::model::{Action, Coordinate, Image, Model, epsilon, time};
use leastwise_algebra::{Arena, Budget, Derivation, Expr, Node, Rational, Role, Stopped, Symbol, Verdict};
use std::collections::HashMap;

/// The generator of a family: τ and ηⁱ, one for each coordinate, for a family at its free index.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub struct Generator {
    /// τ = ∂T/∂ε at ε = 0.
    pub tau: Expr,
    /// ηⁱ = ∂Qⁱ/∂ε at ε = 0.
    pub eta: Vec<Expr>,
}

/// Why a transformation has no generator.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum NoGenerator {
    /// At ε = 0 the image is not the source: the number of the image in the list.
    NotTheIdentity(usize),
    /// The image contains velocities: no point transformation.
    Velocities(usize),
    /// The source is no coordinate and not the time.
    NoCoordinate(usize),
    /// A single member of a family too large to be written out.
    SingleMember(usize),
    /// A bound was reached.
    Stopped(Stopped),
}

impl From<Stopped> for NoGenerator {
    fn from(s: Stopped) -> Self {
        NoGenerator::Stopped(s)
    }
}

/// The generator of a transformation.
pub fn generator(cx: &mut Context<'_>, model: &Model, images: &[Image]) -> Result<Generator, NoGenerator> {
    let eps = epsilon(cx.arena);
    let eps = cx.arena.sym(eps);
    let t = time(cx.arena);
    let t = cx.arena.sym(t);
    let mut g = Generator { tau: Arena::ZERO, eta: vec![Arena::ZERO; model.coordinates.len()] };
    for (k, image) in images.iter().enumerate() {
        if jet_order(cx.arena, image.target) > 0 {
            return Err(NoGenerator::Velocities(k));
        }
        let at_zero = |cx: &mut Context<'_>, e: Expr| {
            cx.arena.substitute(e, &[(eps, Arena::ZERO)].into_iter().collect(), cx.budget)
        };
        let start = at_zero(cx, image.target)?;
        if start != image.source {
            let gap: Parts = vec![(start, Rational::ONE), (image.source, Rational::MINUS_ONE)];
            if !matches!(cx.vanishes(&gap), Verdict::Proved) {
                return Err(NoGenerator::NotTheIdentity(k));
            }
        }
        let d = cx.arena.partial(image.target, eps, cx.budget)?;
        let d = at_zero(cx, d)?;
        if image.source == t {
            g.tau = d;
            continue;
        }
        let mut found = false;
        for (i, q) in model.coordinates.iter().enumerate() {
            if q.jet(cx.arena, 0) == image.source {
                g.eta[i] = d;
                found = true;
            }
        }
        if !found {
            let family = match cx.arena.node(image.source) {
                Node::Symbol(s) => cx.arena.info(*s).member.is_some(),
                Node::Member { .. } => true,
                _ => false,
            };
            return Err(if family { NoGenerator::SingleMember(k) } else { NoGenerator::NoCoordinate(k) });
        }
    }
    Ok(g)
}

/// The variations of expressions under one generator, memoised across edits.
pub fn variations(
    cx: &mut Context<'_>,
    coordinates: &[Coordinate],
    g: &Generator,
    parts: &[Expr],
) -> Result<Vec<Expr>, Stopped> {
    let by_symbol = index_of(coordinates);
    cx.memory.keep_only(coordinates);
    let memo = cx.memory.variations.remove(g).unwrap_or_default();
    let tau_rate = cx.arena.total(g.tau, cx.budget)?;
    let mut inner = Budget::new(cx.budget.left());
    let mut rule = |arena: &mut Arena, x: Expr| prolonged(arena, coordinates, &by_symbol, g, tau_rate, x, &mut inner);
    let mut d = Derivation::new(&mut rule);
    d.memo = memo;
    let mut out = Vec::with_capacity(parts.len());
    let mut failed = None;
    for &part in parts {
        match cx.arena.derive(part, &mut d, cx.budget) {
            Ok(v) => out.push(v),
            Err(s) => {
                failed = Some(s);
                break;
            }
        }
    }
    let memo = d.memo;
    cx.memory.variations.insert(g.clone(), memo);
    if let Some(s) = failed {
        return Err(s);
    }
    if tau_rate != Arena::ZERO {
        for (v, &part) in out.iter_mut().zip(parts) {
            let stretch = cx.arena.mul(part, tau_rate);
            *v = cx.arena.add(*v, stretch);
        }
    }
    Ok(out)
}

/// The derivatives of functions along the prolonged flow: of constraints, not of densities.
pub fn variations_of_functions(
    cx: &mut Context<'_>,
    model: &Model,
    g: &Generator,
    functions: &[Expr],
) -> Result<Vec<Expr>, Stopped> {
    let mut out = variations(cx, &model.coordinates, g, functions)?;
    let tau_rate = cx.arena.total(g.tau, cx.budget)?;
    for (v, &f) in out.iter_mut().zip(functions) {
        let stretch = cx.arena.mul(f, tau_rate);
        *v = cx.arena.sub(*v, stretch);
    }
    Ok(out)
}

/// The prolonged vector field on an atom: t ↦ τ, q ↦ η, q̇ ↦ η̇ − q̇ τ̇; what is a given function of time moves with τ.
fn prolonged(
    arena: &mut Arena,
    coordinates: &[Coordinate],
    by_symbol: &HashMap<Symbol, usize>,
    g: &Generator,
    tau_rate: Expr,
    x: Expr,
    budget: &mut Budget,
) -> Result<Expr, Stopped> {
    let (symbol, index, order) = match *arena.node(x) {
        Node::Symbol(s) => (s, None, 0),
        Node::Jet(s, n) => (s, None, n),
        Node::Member { family, index, order } => (family, Some(index), order),
        _ => return Ok(Arena::ZERO),
    };
    match arena.info(symbol).role {
        Role::Time => Ok(g.tau),
        Role::Input => {
            let rate = arena.total(x, budget)?;
            Ok(arena.mul(rate, g.tau))
        }
        Role::Coordinate => {
            // A concrete member of a family that is kept symbolic belongs to the family.
            let (k, index) = match by_symbol.get(&symbol) {
                Some(&k) => (k, index),
                None => {
                    let info = arena.info(symbol).clone();
                    let (Some(m), family) = (info.member, arena.symbol(&info.name, None, Role::Coordinate)) else {
                        return Ok(Arena::ZERO);
                    };
                    let Some(&k) = by_symbol.get(&family) else { return Ok(Arena::ZERO) };
                    (k, Some(arena.integer(m)))
                }
            };
            let mut e = match index {
                Some(i) => at_index(arena, g.eta[k], &coordinates[k], i, budget)?,
                None => g.eta[k],
            };
            let mut jet = match index {
                Some(i) => {
                    let family = symbol_of_family(arena, symbol);
                    arena.member(family, i, 0)
                }
                None => arena.sym(symbol),
            };
            for _ in 0..order {
                // pr η at the next order: D(η) − q⁽ⁿ⁺¹⁾ τ̇.
                jet = arena.total(jet, budget)?;
                e = arena.total(e, budget)?;
                if tau_rate != Arena::ZERO {
                    let drag = arena.mul(jet, tau_rate);
                    e = arena.sub(e, drag);
                }
            }
            Ok(e)
        }
        _ => Ok(Arena::ZERO),
    }
}

fn symbol_of_family(arena: &mut Arena, s: Symbol) -> Symbol {
    let info = arena.info(s).clone();
    arena.symbol(&info.name, None, info.role)
}

/// The verdict on a symmetry of L.
#[derive(Clone, PartialEq, Debug)]
pub enum Status {
    /// V ≡ 0.
    Exact,
    /// The Euler operator of V vanishes identically.
    UpToGauge,
    /// It does not.
    Broken,
    /// Not decided.
    Undecided(String),
}

/// A symmetry's variation, term by term and part by part, and the verdict.
#[derive(Clone, PartialEq, Debug)]
pub struct Symmetry {
    /// The generator.
    pub generator: Generator,
    /// For each term the variation of each additive part, with the part's sign in L.
    pub variations: Vec<Parts>,
    /// The verdict.
    pub status: Status,
}

/// Derives the variation of L and decides.
pub fn examine(cx: &mut Context<'_>, model: &Model, generator: Generator) -> Result<Symmetry, Stopped> {
    let signed = signed_parts(model);
    let flat: Vec<Expr> = signed.iter().flatten().map(|p| p.0).collect();
    let mut varied = variations(cx, &model.coordinates, &generator, &flat)?.into_iter();
    let variations: Vec<Parts> = signed
        .iter()
        .map(|t| t.iter().map(|(_, c)| (varied.next().unwrap_or(Arena::ZERO), c.clone())).collect())
        .collect();
    let all: Parts = variations.concat().into_iter().filter(|p| p.0 != Arena::ZERO).collect();
    let status = match cx.vanishes(&all) {
        Verdict::Proved => Status::Exact,
        first => match euler_vanishes(cx, model, &all)? {
            Verdict::Proved => Status::UpToGauge,
            Verdict::Refuted(_) => Status::Broken,
            Verdict::Undecided(r) => match first {
                Verdict::Undecided(r) => Status::Undecided(r.to_string()),
                _ => Status::Undecided(r.to_string()),
            },
        },
    };
    Ok(Symmetry { generator, variations, status })
}

/// Whether the Euler operator of a sum vanishes identically: whether the sum is a total time derivative.
pub fn euler_vanishes(cx: &mut Context<'_>, model: &Model, parts: &Parts) -> Result<Verdict, Stopped> {
    let mut lists = Vec::new();
    for q in &model.coordinates {
        let r = residual(cx, parts, q)?;
        if !r.is_empty() {
            lists.extend(questions(cx, q, &r)?);
        }
    }
    Ok(cx.all_vanish(&lists))
}

/// The charge without its gauge term: Σ pᵢ (ηⁱ − q̇ⁱ τ) + L τ, a derivation of L in the velocities.
pub fn charge(cx: &mut Context<'_>, model: &Model, g: &Generator) -> Result<Expr, Stopped> {
    let parts: Parts = signed_parts(model).concat();
    let flat: Vec<Expr> = parts.iter().map(|p| p.0).collect();
    let flowed = flow_derivations(cx, model, g, &flat, 1)?;
    let mut out: Parts = flowed.into_iter().zip(&parts).map(|(e, (_, c))| (e, c.clone())).collect();
    if g.tau != Arena::ZERO {
        for (part, c) in &parts {
            out.push((cx.arena.mul(*part, g.tau), c.clone()));
        }
    }
    cx.build(&out)
}

/// The power of each force against the flow: Σ 𝒬ᵢ (ηⁱ − q̇ⁱ τ), force by force.
pub fn taken(cx: &mut Context<'_>, model: &Model, g: &Generator) -> Result<Vec<Expr>, Stopped> {
    let mut out = Vec::new();
    for f in &model.forces {
        let parts: Parts = match &f.action {
            Action::Dissipation(list) => list.iter().map(|&p| (p, Rational::MINUS_ONE)).collect(),
            Action::Applied(pairs) => {
                let mut parts = Parts::new();
                for &(on, force) in pairs {
                    let moved = along_flow(cx, model, g, on)?;
                    parts.push((cx.arena.mul(force, moved), Rational::ONE));
                }
                out.push(cx.build(&parts)?);
                continue;
            }
        };
        let mut moved = Parts::new();
        for (p, c) in parts {
            moved.push((velocity_derivation(cx, model, g, p)?, c));
        }
        out.push(cx.build(&moved)?);
    }
    Ok(out)
}

/// The work of each reaction against the flow, for a multiplier of one: Σ aᵢ (ηⁱ − q̇ⁱ τ).
pub fn reaction_work(cx: &mut Context<'_>, model: &Model, g: &Generator) -> Result<Vec<Expr>, Stopped> {
    model.constraints.iter().map(|c| along_flow(cx, model, g, c.f)).collect()
}

/// Σ ∂E/∂qⁱ (ηⁱ − q̇ⁱ τ) for E(q, t), Σ ∂E/∂q̇ⁱ (ηⁱ − q̇ⁱ τ) for E linear in the velocities.
fn along_flow(cx: &mut Context<'_>, model: &Model, g: &Generator, on: Expr) -> Result<Expr, Stopped> {
    if lagrange::depends_on_velocities(cx.arena, on) {
        return velocity_derivation(cx, model, g, on);
    }
    flow_derivation(cx, model, g, on, 0)
}

fn velocity_derivation(cx: &mut Context<'_>, model: &Model, g: &Generator, e: Expr) -> Result<Expr, Stopped> {
    flow_derivation(cx, model, g, e, 1)
}

fn flow_derivation(cx: &mut Context<'_>, model: &Model, g: &Generator, e: Expr, order: u16) -> Result<Expr, Stopped> {
    Ok(flow_derivations(cx, model, g, &[e], order)?[0])
}

/// Σ ∂E/∂q⁽ⁿ⁾ⁱ (ηⁱ − q̇ⁱ τ) for the jets of order n, memoised across edits.
fn flow_derivations(
    cx: &mut Context<'_>,
    model: &Model,
    g: &Generator,
    of: &[Expr],
    order: u16,
) -> Result<Vec<Expr>, Stopped> {
    let by_symbol = index_of(&model.coordinates);
    let coordinates = &model.coordinates;
    let mut inner = Budget::new(cx.budget.left());
    let mut rule = |arena: &mut Arena, x: Expr| {
        let (position, n) = match *arena.node(x) {
            Node::Symbol(s) if arena.info(s).role == Role::Coordinate => (x, 0),
            Node::Jet(s, n) if arena.info(s).role == Role::Coordinate => (arena.sym(s), n),
            Node::Member { family, index, order } if arena.info(family).role == Role::Coordinate => {
                (arena.member(family, index, 0), order)
            }
            _ => return Ok(Arena::ZERO),
        };
        if n != order {
            return Ok(Arena::ZERO);
        }
        let eta = prolonged(arena, coordinates, &by_symbol, g, Arena::ZERO, position, &mut inner)?;
        let velocity = arena.total(position, &mut inner)?;
        let drag = arena.mul(velocity, g.tau);
        Ok(arena.sub(eta, drag))
    };
    let mut d = Derivation::new(&mut rule);
    let key = (g.clone(), order);
    cx.memory.keep_only(coordinates);
    d.memo = cx.memory.flows.remove(&key).unwrap_or_default();
    let result = of.iter().map(|&e| cx.arena.derive(e, &mut d, cx.budget)).collect();
    cx.memory.flows.insert(key, d.memo);
    result
}

/// The generator of a shift of one coordinate.
pub fn shift(model: &Model, i: usize) -> Generator {
    let mut eta = vec![Arena::ZERO; model.coordinates.len()];
    eta[i] = Arena::ONE;
    Generator { tau: Arena::ZERO, eta }
}

/// The generator of a delay, t → t + ε.
pub fn delay(model: &Model) -> Generator {
    Generator { tau: Arena::ONE, eta: vec![Arena::ZERO; model.coordinates.len()] }
}
