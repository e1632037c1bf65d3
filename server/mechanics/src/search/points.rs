//! Point symmetries of the action, up to gauge terms.
//!
//! For L = ½ M q̇ q̇ + A q̇ − V with M constant in time, V = dF/dt needs τ = τ(t), and at each time η a homothetic field of
//! M: ℒ_η M = τ̇ M [Prince & Eliezer, J. Phys. A 13 (1980) 815]. So the ansatz is t^j ∂_t and t^j ξ, with ξ from the
//! homothetic fields; what is left are a few coefficients, and the determining equations that the Euler operator of V
//! vanishes. For other L all components are polynomial in t and q and trigonometric in angles.

use super::integrals::{plain, times};
use super::kernel::{Halt, dependent, kernel};
use super::killing::{MAX_UNKNOWNS, combination, functions};
use super::kinetic::{Kinetic, raise};
use super::{Item, Origin, Scope, Stage};
use crate::context::{Context, Parts};
use crate::lagrange::{jet_order, questions, residual, signed_parts};
use crate::model::{Model, time};
use crate::symmetry::{Generator, Status, variations};
use crate::verdicts::{answer, answer_generator};
use leastwise_algebra::{Arena, Expr, Function, Node, Rational, Stopped, Verdict};

/// More coordinates than this are not searched: generators of degree 1 have too many coefficients.
const MAX_COORDINATES: usize = 14;

/// The point symmetries whose charges are constants, each proved; and why there may be others in the ansatz.
pub(super) fn points(
    cx: &mut Context<'_>,
    model: &Model,
    scope: &Scope,
    report: &mut dyn FnMut(Stage),
) -> Result<(Vec<Item>, Option<String>), Stopped> {
    match look(cx, model, scope, report) {
        Ok(found) => Ok(found),
        Err(Halt::Stopped(s)) => Err(s),
        Err(Halt::Unsolved(why)) => Ok((Vec::new(), Some(format!("point symmetries were not found: {why}")))),
    }
}

/// A term of the ansatz: a generator, and how far down the list its symmetries are told.
struct Candidate {
    generator: Generator,
    rank: u32,
}

fn look(
    cx: &mut Context<'_>,
    model: &Model,
    scope: &Scope,
    report: &mut dyn FnMut(Stage),
) -> Result<(Vec<Item>, Option<String>), Halt> {
    if model.coordinates.iter().any(|q| q.members.is_some()) {
        let why = "point symmetries were not looked for: a family is not written out";
        return Ok((Vec::new(), Some(why.into())));
    }
    if model.coordinates.is_empty() {
        return Ok((Vec::new(), None));
    }
    if model.coordinates.len() > MAX_COORDINATES {
        let why = format!("point symmetries were not looked for: there are more than {MAX_COORDINATES} coordinates");
        return Ok((Vec::new(), Some(why)));
    }
    let (candidates, mut incomplete) = match Kinetic::new(cx, model)? {
        Ok(kinetic) => homothetic(cx, model, &kinetic, scope)?,
        Err(_) => polynomial(cx, model, scope)?,
    };
    let mut columns = Vec::new();
    for c in &candidates {
        columns.push(determining(cx, model, &c.generator)?);
    }
    let solutions = kernel(cx, &columns)?;
    let regular = answer(cx, model)?.mass.is_regular();
    let mut found = Vec::new();
    for (k, c) in solutions.iter().enumerate() {
        report(Stage::Confirming(k, solutions.len()));
        let generator = combined(cx, &candidates, c)?;
        let answer = answer_generator(cx, model, regular, generator)?;
        if !matches!(answer.symmetry.status, Status::Exact | Status::UpToGauge) {
            incomplete.get_or_insert("a point symmetry was found but not proved".into());
            continue;
        }
        if answer.gauge_unknown {
            incomplete.get_or_insert("a gauge term exists, but no closed form was found".into());
            continue;
        }
        if matches!(answer.conserved, Ok(Verdict::Undecided(_)) | Err(_)) {
            incomplete.get_or_insert("whether the charge of a symmetry of L is conserved is undecided".into());
        }
        if matches!(answer.conserved, Ok(Verdict::Proved)) {
            // A number is constant on every curve: of an L that is degenerate.
            if is_number(cx, model, answer.charge)? {
                continue;
            }
            let used = c.iter().zip(&candidates).filter(|(x, _)| **x != Arena::ZERO);
            let rank = used.clone().map(|(_, c)| c.rank).max().unwrap_or(0);
            let origin = Origin::Symmetry { generator: answer.symmetry.generator, gauge: answer.gauge };
            found.push((rank, used.count(), Item { charge: answer.charge, origin, known: false }));
        } else if !model.constraints.is_empty() || !model.forces.is_empty() {
            incomplete
                .get_or_insert("with constraints or forces only symmetries of L were looked at, one by one".into());
        }
    }
    if !regular {
        let why = "L is degenerate: symmetries with arbitrary functions of the time were not looked for";
        incomplete.get_or_insert(why.into());
    }
    found.sort_by_key(|f| (f.0, f.1));
    let mut items: Vec<Item> = found.into_iter().map(|f| f.2).collect();
    if !regular {
        drop_dependent(cx, &mut items)?;
    }
    Ok((items, incomplete))
}

/// Whether an expression is proved to depend neither on the time nor on positions and velocities.
fn is_number(cx: &mut Context<'_>, model: &Model, e: Expr) -> Result<bool, Stopped> {
    let t = time(cx.arena);
    let mut atoms = vec![cx.arena.sym(t)];
    for q in &model.coordinates {
        atoms.extend([q.jet(cx.arena, 0), q.jet(cx.arena, 1)]);
    }
    for a in atoms {
        let slope = cx.arena.partial(e, a, cx.budget)?;
        if slope != Arena::ZERO && !cx.vanishes(&[(slope, Rational::ONE)]).is_proved() {
            return Ok(false);
        }
    }
    Ok(true)
}

/// Takes out what is a combination of earlier charges and of numbers: of a degenerate L different symmetries may have one
/// charge.
fn drop_dependent(cx: &mut Context<'_>, items: &mut Vec<Item>) -> Result<(), Stopped> {
    let mut columns = vec![vec![Arena::ONE]];
    columns.extend(items.iter().map(|i| vec![i.charge]));
    let list = match dependent(cx, &columns) {
        Ok(list) => list,
        Err(Halt::Stopped(s)) => return Err(s),
        Err(Halt::Unsolved(_)) => return Ok(()),
    };
    let mut k = 0;
    items.retain(|_| {
        k += 1;
        !list.contains(&k)
    });
    Ok(())
}

/// The Euler operator of the variation, for each coordinate.
fn determining(cx: &mut Context<'_>, model: &Model, g: &Generator) -> Result<Vec<Expr>, Stopped> {
    let signed: Parts = signed_parts(model).concat();
    let flat: Vec<Expr> = signed.iter().map(|p| p.0).collect();
    let varied = variations(cx, &model.coordinates, g, &flat)?;
    let parts: Parts =
        varied.into_iter().zip(&signed).map(|(v, p)| (v, p.1.clone())).filter(|p| p.0 != Arena::ZERO).collect();
    let mut out = Vec::new();
    for q in &model.coordinates {
        let r = residual(cx, &parts, q)?;
        let mut all = Parts::new();
        for list in questions(cx, q, &r)? {
            all.extend(list);
        }
        out.push(cx.build(&all)?);
    }
    Ok(out)
}

/// The components of a field, and its degree.
type Field = (Vec<Expr>, u32);

/// t^j ∂_t, and t^j ξ for the homothetic fields.
fn homothetic(
    cx: &mut Context<'_>,
    model: &Model,
    kinetic: &Kinetic,
    scope: &Scope,
) -> Result<(Vec<Candidate>, Option<String>), Halt> {
    let n = kinetic.positions.len();
    let (fields, incomplete) = match kinetic.flat {
        true => (straight(cx, kinetic, scope)?, None),
        false => curved(cx, model, kinetic, scope)?,
    };
    let t = time(cx.arena);
    let t = cx.arena.sym(t);
    let mut out = Vec::new();
    for (xi, degree) in fields.into_iter().filter(|f| f.1 <= scope.degree) {
        for j in 0..=scope.degree - degree {
            let power = cx.arena.pow(t, i64::from(j));
            let eta = xi.iter().map(|&x| cx.arena.mul(power, x)).collect();
            out.push(Candidate { generator: Generator { tau: Arena::ZERO, eta }, rank: 2 * j });
        }
    }
    for j in 0..=scope.degree {
        let tau = cx.arena.pow(t, i64::from(j));
        out.push(Candidate { generator: Generator { tau, eta: vec![Arena::ZERO; n] }, rank: 2 * j + 1 });
    }
    Ok((out, incomplete))
}

/// The homothetic fields of a constant M, with their degrees: translations, rotations, the dilation.
fn straight(cx: &mut Context<'_>, kinetic: &Kinetic, scope: &Scope) -> Result<Vec<Field>, Stopped> {
    let (q, v) = (&kinetic.positions, &kinetic.velocities);
    let n = q.len();
    let mut out = Vec::new();
    for i in 0..n {
        out.push(((0..n).map(|j| if i == j { Arena::ONE } else { Arena::ZERO }).collect(), 0));
    }
    // An angle enters by its sine and cosine only, and these do not occur here.
    let plain = |i: &usize| !scope.angles.contains(i);
    for i in (0..n).filter(plain) {
        for j in (i + 1..n).filter(plain) {
            let mut lowered = vec![Arena::ZERO; n];
            (lowered[j], lowered[i]) = (q[i], cx.arena.neg(q[j]));
            out.push((raise(cx, &kinetic.inverse, &lowered)?, 1));
        }
    }
    if scope.angles.is_empty() && !v.is_empty() {
        out.push((q.clone(), 1));
    }
    Ok(out)
}

/// The homothetic fields of another M, ℒ_ξ ½ M q̇ q̇ = c ½ M q̇ q̇, in the ansatz of curvilinear coordinates.
fn curved(
    cx: &mut Context<'_>,
    model: &Model,
    kinetic: &Kinetic,
    scope: &Scope,
) -> Result<(Vec<Field>, Option<String>), Halt> {
    let n = kinetic.positions.len();
    for degree in (0..=scope.degree).rev() {
        let list = components(cx, kinetic, scope, degree);
        if list.len() * n >= MAX_UNKNOWNS {
            continue;
        }
        let fields: Vec<Vec<Expr>> = list
            .iter()
            .flat_map(|&f| (0..n).map(move |i| (0..n).map(|j| if i == j { f } else { Arena::ZERO }).collect()))
            .collect();
        let mut columns = vec![vec![kinetic.energy]];
        for eta in &fields {
            let g = Generator { tau: Arena::ZERO, eta: eta.clone() };
            columns.push(variations(cx, &model.coordinates, &g, &[kinetic.energy])?);
        }
        let mut out = Vec::new();
        for c in kernel(cx, &columns)? {
            let mut xi = Vec::new();
            for i in 0..n {
                let column: Vec<Expr> = fields.iter().map(|f| f[i]).collect();
                xi.push(combination(cx, &c[1..], &column)?);
            }
            out.push((xi, 0));
        }
        let less = format!(
            "point symmetries were looked for of degree {degree} only: for more there are too many unknown coefficients"
        );
        return Ok((out, (degree < scope.degree).then_some(less)));
    }
    let why = "of point symmetries that move coordinates only shifts were looked for: for more there are too many unknown coefficients";
    let shifts = shifts(n).into_iter().map(|c| (c.generator.eta, 0)).take(n);
    Ok((shifts.collect(), Some(why.into())))
}

/// Functions of q as components of fields have them in curvilinear coordinates: monomials, of what M depends on also the
/// inverse; sine and cosine of angles, where M depends on it also cotangent and the inverse of the sine.
fn components(cx: &mut Context<'_>, kinetic: &Kinetic, scope: &Scope, degree: u32) -> Vec<Expr> {
    let metric = cx.arena.atoms(kinetic.energy);
    let mut list = vec![(Arena::ONE, 0)];
    for (i, &q) in kinetic.positions.iter().enumerate() {
        let bent = metric.contains(&q);
        let mut own: Vec<(Expr, u32)> = Vec::new();
        if scope.angles.contains(&i) {
            let (s, c) = (cx.arena.call(Function::Sin, &[q]), cx.arena.call(Function::Cos, &[q]));
            own.extend([(Arena::ONE, 0), (c, 0), (s, 0)]);
            if bent {
                let inverse = cx.arena.pow(s, -1);
                own.extend([(cx.arena.mul(c, inverse), 0), (inverse, 0)]);
            }
        } else {
            own.extend((0..=degree).map(|k| (cx.arena.pow(q, i64::from(k)), k)));
            if bent {
                own.push((cx.arena.pow(q, -1), 0));
            }
        }
        let all = list.iter().flat_map(|&(f, d)| own.iter().map(move |&(g, e)| (f, g, d + e)));
        list = all.filter(|x| x.2 <= degree).map(|(f, g, d)| (cx.arena.mul(f, g), d)).collect();
    }
    list.into_iter().map(|f| f.0).collect()
}

/// Generators with one function of t and q as their only component.
fn polynomial(cx: &mut Context<'_>, model: &Model, scope: &Scope) -> Result<(Vec<Candidate>, Option<String>), Halt> {
    let n = model.coordinates.len();
    let t = time(cx.arena);
    let t = cx.arena.sym(t);
    let mut of = vec![t];
    of.extend(model.coordinates.iter().map(|q| q.jet(cx.arena, 0)));
    let angles: Vec<usize> = scope.angles.iter().map(|a| a + 1).collect();
    let still = still_quadratic(cx, model)?;
    for degree in (0..=scope.degree).rev() {
        let list = functions(cx, &of, &angles, degree);
        let times = if still { functions(cx, &of[..1], &[], degree) } else { list.clone() };
        if list.len() * n + times.len() > MAX_UNKNOWNS && degree > 0 {
            continue;
        }
        if list.len() * n + times.len() > MAX_UNKNOWNS {
            break;
        }
        let mut out = Vec::new();
        for &tau in &times {
            out.push(Candidate { generator: Generator { tau, eta: vec![Arena::ZERO; n] }, rank: 1 });
        }
        for i in 0..n {
            for &f in &list {
                let mut eta = vec![Arena::ZERO; n];
                eta[i] = f;
                out.push(Candidate { generator: Generator { tau: Arena::ZERO, eta }, rank: 2 });
            }
        }
        let less = format!("of degree {degree} only: for more there are too many unknown coefficients");
        return Ok((out, (degree < scope.degree).then_some(format!("point symmetries were looked for {less}"))));
    }
    let why =
        "of point symmetries only shifts and delays were looked for: for more there are too many unknown coefficients";
    Ok((shifts(n), Some(why.into())))
}

/// Shifts of each coordinate, and the delay.
fn shifts(n: usize) -> Vec<Candidate> {
    let moved = |i: usize| (0..n).map(|j| if i == j { Arena::ONE } else { Arena::ZERO }).collect();
    let mut out: Vec<Candidate> =
        (0..n).map(|i| Candidate { generator: Generator { tau: Arena::ZERO, eta: moved(i) }, rank: 0 }).collect();
    out.push(Candidate { generator: Generator { tau: Arena::ONE, eta: vec![Arena::ZERO; n] }, rank: 1 });
    out
}

/// Whether L is quadratic in the velocities: then the time is mapped to a function of itself.
fn still_quadratic(cx: &mut Context<'_>, model: &Model) -> Result<bool, Stopped> {
    let mut quadratic = false;
    for (part, _) in signed_parts(model).concat() {
        for q in &model.coordinates {
            let v = q.jet(cx.arena, 1);
            let once = cx.arena.partial(part, v, cx.budget)?;
            for r in &model.coordinates {
                let w = r.jet(cx.arena, 1);
                let twice = cx.arena.partial(once, w, cx.budget)?;
                if jet_order(cx.arena, twice) > 0 {
                    return Ok(false);
                }
                quadratic |= twice != Arena::ZERO;
            }
        }
    }
    Ok(quadratic)
}

/// A solution as a generator in textbook form: whole coefficients, forwards.
fn combined(cx: &mut Context<'_>, candidates: &[Candidate], c: &[Expr]) -> Result<Generator, Stopped> {
    let n = candidates.first().map_or(0, |c| c.generator.eta.len());
    let tau: Vec<Expr> = candidates.iter().map(|c| c.generator.tau).collect();
    let mut out = vec![combination(cx, c, &tau)?];
    for i in 0..n {
        let column: Vec<Expr> = candidates.iter().map(|c| c.generator.eta[i]).collect();
        out.push(combination(cx, c, &column)?);
    }
    // Each component beside a velocity of its own: t stands for the first.
    let mut parts = Vec::new();
    for (k, &e) in out.iter().enumerate() {
        let s = cx.arena.symbol(&format!("component {k}"), None, leastwise_algebra::Role::Coordinate);
        let mark = cx.arena.jet(s, 1);
        parts.push((cx.arena.mul(e, mark), Rational::ONE));
    }
    let whole = cx.build(&parts)?;
    let mut scale = plain(cx, whole)?;
    // Forwards, and counter-clockwise: y → y + ε x in a plane.
    let polynomial = out.iter().all(|&e| !has_angle(cx, e));
    // About the second of three axes from the third to the first: the right hand's rule.
    let axis: Vec<usize> = (0..n).filter(|&i| out[i + 1] != Arena::ZERO).map(|i| i % 3).collect();
    let second = n.is_multiple_of(3) && axis.contains(&0) && axis.contains(&2) && !axis.contains(&1);
    let mut moved = out.iter().filter(|&&e| e != Arena::ZERO).copied();
    let telling = if polynomial && !second { moved.next_back() } else { moved.next() }.unwrap_or(Arena::ZERO);
    let telling = cx.arena.expand(telling, cx.budget)?;
    if cx.arena.summands(telling).iter().all(|t| t.1.is_negative()) {
        scale = cx.arena.neg(scale);
    }
    for e in &mut out {
        *e = times(cx, *e, scale)?;
    }
    let eta = out.split_off(1);
    Ok(Generator { tau: out[0], eta })
}

/// Whether a sine or cosine occurs.
fn has_angle(cx: &Context<'_>, e: Expr) -> bool {
    let mut found = false;
    cx.arena
        .visit(e, &mut |_, node| found |= matches!(node, Node::Call(Function::Sin | Function::Cos | Function::Tan, _)));
    found
}

/// Marks the items whose charges are combinations of known ones, with functions of the parameters as coefficients.
pub(super) fn mark_known(cx: &mut Context<'_>, items: &mut [Item], known: &[Expr]) -> Result<(), Stopped> {
    for item in items {
        let mut columns: Vec<Vec<Expr>> = vec![vec![Arena::ONE]];
        columns.extend(known.iter().map(|&k| vec![k]));
        columns.push(vec![item.charge]);
        item.known = match kernel(cx, &columns) {
            Ok(relations) => relations.iter().any(|r| r.last().is_some_and(|&c| c != Arena::ZERO)),
            Err(Halt::Stopped(s)) => return Err(s),
            Err(Halt::Unsolved(_)) => false,
        };
    }
    Ok(())
}

#[cfg(test)]
mod tests;
