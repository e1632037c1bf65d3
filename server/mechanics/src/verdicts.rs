//! All questions about a model, answered: what is cyclic, what is conserved, who breaks what. Nothing is printed here.

use crate::blame::{Blamed, blame};
use crate::claims::{self, Unanswered};
use crate::context::{Context, Parts};
use crate::energy::{Energy, energy};
use crate::forms::aligned;
use crate::gauge::gauge_term;
use crate::lagrange::{constraints_at_rest, force, generalised, multiplier, questions, residual, signed_parts};
use crate::mass::{MassRows, mass_rows};
use crate::model::{Image, Model};
pub use crate::regularity::MassVerdict;
use crate::regularity::{judge_families, mass_verdict};
use crate::surface;
use crate::symmetry::{self, Generator, NoGenerator, Status, Symmetry};
use leastwise_algebra::{Arena, Expr, Rational, Reason, Stopped, Verdict};

/// A culprit: a term, and its additive parts that break something.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Culprit {
    /// Which term.
    pub term: usize,
    /// Which of its parts.
    pub parts: Vec<usize>,
}

/// The verdict on one coordinate.
#[derive(Clone, PartialEq, Debug)]
pub struct Cyclic {
    /// Whether ∂L/∂q ≡ 0.
    pub cyclic: Verdict,
    /// Whether ∂L/∂q + 𝒬 ≡ 0 and no reaction can act.
    pub momentum: Verdict,
}

/// The answer to a symmetry claim.
#[derive(Clone, PartialEq, Debug)]
pub struct SymmetryAnswer {
    /// Variation and status.
    pub symmetry: Symmetry,
    /// The charge, gauge term included.
    pub charge: Expr,
    /// F, where it is not zero.
    pub gauge: Option<Expr>,
    /// Whether F exists but no closed form was found.
    pub gauge_unknown: bool,
    /// dQ/dt along motions, unsummed.
    pub rate: Parts,
    /// Whether it vanishes.
    pub conserved: Result<Verdict, Unanswered>,
    /// Whom to blame, for a broken one.
    pub culprits: Vec<Culprit>,
    /// Whether the culprits are a smallest set.
    pub smallest: bool,
    /// What each force takes from the charge.
    pub taken: Vec<Expr>,
    /// Whether the flow preserves the constraints, where that is decided.
    pub respects_constraints: Option<bool>,
}

/// The model's own answers.
pub struct Answers {
    /// For each coordinate.
    pub cyclic: Vec<Cyclic>,
    /// The energy function.
    pub energy: Energy,
    /// Whether it is conserved, reactions included.
    pub energy_conserved: Result<Verdict, Unanswered>,
    /// The parts that depend on the time, where the energy function is not conserved for that reason.
    pub timely: Vec<Culprit>,
    /// The mass matrix.
    pub mass: MassVerdict,
    /// The mass matrix's rows, where accelerations are solved for.
    pub rows: Option<MassRows>,
}

/// Answers what concerns the model alone.
pub fn answer(cx: &mut Context<'_>, model: &Model) -> Result<Answers, Stopped> {
    let signed = signed_parts(model);
    let all: Parts = signed.concat();
    let mut cyclic = Vec::new();
    for q in &model.coordinates {
        let mut parts = force(cx, &all, q)?;
        let lists = questions(cx, q, &parts)?;
        let verdict = cx.all_vanish(&lists);
        let mut acted = false;
        for f in &model.forces {
            let more = generalised(cx, f, q)?;
            acted |= !more.is_empty();
            parts.extend(more);
        }
        let momentum = if acted {
            let lists = questions(cx, q, &parts)?;
            cx.all_vanish(&lists)
        } else {
            verdict
        };
        cyclic.push(Cyclic { cyclic: verdict, momentum });
    }
    let mut energy = energy(cx, model)?;
    let timely = if matches!(energy.autonomous, Verdict::Refuted(_)) {
        let g = symmetry::delay(model);
        let flat: Vec<Expr> = all.iter().map(|p| p.0).collect();
        let v = symmetry::variations(cx, &model.coordinates, &g, &flat)?;
        let mut rows = Vec::new();
        for (v, (_, c)) in v.into_iter().zip(&all) {
            rows.push(vec![cx.arena.scale(v, c)]);
        }
        culprits(cx, model, rows)?.0
    } else {
        Vec::new()
    };
    let large = model.coordinates.iter().any(|q| q.members.is_some());
    let mut rows = None;
    let mut mass = MassVerdict::Regular;
    if large {
        mass = judge_families(cx, model)?;
    } else if !model.coordinates.is_empty() {
        let found = mass_rows(cx, model)?;
        mass = mass_verdict(cx, &found)?;
        rows = Some(found);
    }
    let g = symmetry::delay(model);
    let work = symmetry::reaction_work(cx, model, &g)?;
    let regular = mass.is_regular();
    // dh/dt = rate − Σ λ work: its own sign, so that a witness shows its own value.
    let against: Vec<Expr> = work.iter().map(|&w| cx.arena.neg(w)).collect();
    let energy_conserved = on_motions(conserved_with_reactions(cx, model, &g, &energy.rate, &against)?, regular);
    if !idle_reactions(cx, model, &g, &work)? {
        // The charge of a delay is −h: what reactions take from it they give to h.
        for (c, w) in model.constraints.iter().zip(&work) {
            let lambda = multiplier(cx.arena, &c.name);
            energy.rate.push((cx.arena.mul(lambda, *w), Rational::MINUS_ONE));
        }
    }
    Ok(Answers { cyclic, energy, energy_conserved, timely, mass, rows })
}

/// The parts of terms that depend on a coordinate: a smallest set without which ∂L/∂q vanishes.
pub fn dependent_parts(cx: &mut Context<'_>, model: &Model, i: usize) -> Result<Vec<Culprit>, Stopped> {
    let q = &model.coordinates[i];
    let mut lists = Vec::new();
    for p in signed_parts(model).concat() {
        lists.push(force(cx, &vec![p], q)?);
    }
    let (_, rows) = aligned(cx.arena, q, &lists, cx.budget)?;
    Ok(culprits(cx, model, rows)?.0)
}

/// Whom to blame that the rows do not sum to zero. `rows` holds, for each additive part of each term in order, what
/// should vanish in sum. Terms are blamed first, then parts inside them.
fn culprits(cx: &mut Context<'_>, model: &Model, rows: Vec<Vec<Expr>>) -> Result<(Vec<Culprit>, bool), Stopped> {
    let width = rows.first().map_or(0, Vec::len);
    let mut first = 0;
    let mut spans = Vec::new();
    let mut terms = Vec::new();
    for t in &model.terms {
        let span = first..first + t.parts.len();
        first = span.end;
        let mut sums = Vec::with_capacity(width);
        for place in 0..width {
            let parts: Parts = rows[span.clone()].iter().map(|r| (r[place], Rational::ONE)).collect();
            sums.push(cx.build(&parts)?);
        }
        terms.push(sums);
        spans.push(span);
    }
    let Some(blamed) = blamed(cx, &terms)? else { return Ok((Vec::new(), true)) };
    let pool: Vec<(usize, usize)> =
        blamed.culprits.iter().flat_map(|&t| (0..spans[t].len()).map(move |p| (t, p))).collect();
    let vectors: Vec<Vec<Expr>> = pool.iter().map(|&(t, p)| rows[spans[t].start + p].clone()).collect();
    let inner = blamed_parts(cx, &vectors)?;
    // A term whose parts are cancelled by parts of others is not to blame.
    let own = |term: usize| inner.culprits.iter().map(|&k| pool[k]).filter(|x| x.0 == term).map(|x| x.1).collect();
    let out = blamed.culprits.iter().map(|&term| Culprit { term, parts: own(term) });
    Ok((out.filter(|c| !c.parts.is_empty()).collect(), blamed.smallest && inner.smallest))
}

/// More summands than this are not compared with each other: all that do not vanish are blamed.
const MAX_COMPARED: usize = 256;

/// Blames summands given by expressions; `None` where their residues cannot be told.
fn blamed(cx: &mut Context<'_>, summands: &[Vec<Expr>]) -> Result<Option<Blamed>, Stopped> {
    let live: Vec<usize> = (0..summands.len()).filter(|&k| summands[k].iter().any(|&e| e != Arena::ZERO)).collect();
    if live.len() > MAX_COMPARED {
        return Ok(Some(Blamed { culprits: live, smallest: false }));
    }
    if live.len() < summands.len() {
        let kept: Vec<Vec<Expr>> = live.iter().map(|&k| summands[k].clone()).collect();
        let found = blamed(cx, &kept)?;
        return Ok(found.map(|b| Blamed { culprits: b.culprits.iter().map(|&k| live[k]).collect(), ..b }));
    }
    // As many residues as summands and some more tell every dependence.
    let width = summands.first().map_or(1, Vec::len).max(1);
    let length = (summands.len() + 4).div_ceil(width).max(2);
    match cx.zero.residue_vectors(cx.arena, summands, length, cx.budget) {
        Ok(residues) => Ok(Some(blame(&residues))),
        Err(Reason::TooLarge) => Err(Stopped::TooLarge),
        Err(Reason::Cancelled) => Err(Stopped::Cancelled),
        Err(_) => Ok(None),
    }
}

fn blamed_parts(cx: &mut Context<'_>, summands: &[Vec<Expr>]) -> Result<Blamed, Stopped> {
    let all = || Blamed { culprits: (0..summands.len()).collect(), smallest: false };
    Ok(blamed(cx, summands)?.unwrap_or_else(all))
}

/// Answers a symmetry claim.
pub fn answer_symmetry(
    cx: &mut Context<'_>,
    model: &Model,
    regular: bool,
    images: &[Image],
) -> Result<SymmetryAnswer, NoGenerator> {
    let g = symmetry::generator(cx, model, images)?;
    Ok(answer_generator(cx, model, regular, g)?)
}

/// Answers for a generator.
pub fn answer_generator(
    cx: &mut Context<'_>,
    model: &Model,
    regular: bool,
    g: Generator,
) -> Result<SymmetryAnswer, Stopped> {
    let symmetry = symmetry::examine(cx, model, g)?;
    let g = &symmetry.generator;
    let (mut culprit_list, mut smallest) = (Vec::new(), true);
    if symmetry.status == Status::Broken {
        let mut rows: Vec<Vec<Expr>> = vec![Vec::new(); symmetry.variations.iter().map(Vec::len).sum()];
        for q in &model.coordinates {
            let mut lists = Vec::new();
            for v in symmetry.variations.iter().flatten() {
                lists.push(if v.0 == Arena::ZERO { Vec::new() } else { residual(cx, &vec![v.clone()], q)? });
            }
            if lists.iter().all(Vec::is_empty) {
                continue;
            }
            for (row, more) in rows.iter_mut().zip(aligned(cx.arena, q, &lists, cx.budget)?.1) {
                row.extend(more);
            }
        }
        (culprit_list, smallest) = culprits(cx, model, rows)?;
    }
    // V without the parts to blame is exact or a total derivative.
    // A term's variation that vanishes without looking so would only be in the way.
    let mut kept = Parts::new();
    let mut varied = Parts::new();
    for (t, v) in symmetry.variations.iter().enumerate() {
        let v: Parts = v.iter().filter(|p| p.0 != Arena::ZERO).cloned().collect();
        if v.is_empty() || symmetry.status != Status::Exact && cx.vanishes(&v).is_proved() {
            continue;
        }
        let blamed = culprit_list.iter().find(|c| c.term == t);
        let innocent = |p: usize| blamed.is_none_or(|c| !c.parts.contains(&p));
        let whole = symmetry.variations[t].iter().enumerate();
        kept.extend(whole.filter(|(p, v)| v.0 != Arena::ZERO && innocent(*p)).map(|(_, v)| v.clone()));
        varied.extend(v);
    }
    let mut gauge = None;
    let mut gauge_unknown = false;
    let derivative_left = match symmetry.status {
        Status::UpToGauge => true,
        Status::Broken => !matches!(cx.vanishes(&kept), Verdict::Proved),
        _ => false,
    };
    if derivative_left {
        gauge = gauge_term(cx, model, &kept)?;
        gauge_unknown = gauge.is_none();
    }
    let mut charge = symmetry::charge(cx, model, g)?;
    if let Some(f) = gauge {
        charge = cx.arena.sub(charge, f);
    }
    let mut rate = Parts::new();
    let known = match symmetry.status {
        Status::Exact => true,
        Status::UpToGauge => gauge.is_some(),
        _ => false,
    };
    if !known {
        rate.extend(varied);
        if let Some(f) = gauge {
            rate.push((cx.arena.total(f, cx.budget)?, Rational::MINUS_ONE));
        }
    }
    let taken = symmetry::taken(cx, model, g)?;
    rate.extend(taken.iter().filter(|&&e| e != Arena::ZERO).map(|&e| (e, Rational::ONE)));
    let work = symmetry::reaction_work(cx, model, g)?;
    let conserved = on_motions(conserved_with_reactions(cx, model, g, &rate, &work)?, regular);
    if !idle_reactions(cx, model, g, &work)? {
        for (c, w) in model.constraints.iter().zip(&work) {
            let lambda = multiplier(cx.arena, &c.name);
            rate.push((cx.arena.mul(lambda, *w), Rational::ONE));
        }
        rate.retain(|p| p.0 != Arena::ZERO);
    }
    let mut respects = None;
    if !model.constraints.is_empty() {
        let functions: Vec<Expr> = model.constraints.iter().map(|c| c.f).collect();
        respects = Some(true);
        let none = vec![Arena::ZERO; model.coordinates.len()];
        let idle = vec![Arena::ZERO; model.constraints.len()];
        for v in symmetry::variations_of_functions(cx, model, g, &functions)? {
            if cx.vanishes(&[(v, Rational::ONE)]).is_proved() {
                continue;
            }
            // A flow that moves the constraint functions may still preserve their zeros.
            match surface::rate_is_zero(cx, model, v, &none, &idle)? {
                Some(Verdict::Proved) => {}
                Some(Verdict::Refuted(_)) => {
                    respects = Some(false);
                    break;
                }
                _ => respects = None,
            }
        }
    }
    Ok(SymmetryAnswer {
        charge,
        gauge,
        gauge_unknown,
        rate,
        conserved,
        culprits: culprit_list,
        smallest,
        taken,
        respects_constraints: respects,
        symmetry,
    })
}

/// With a singular mass matrix a rate that is not zero everywhere may still vanish on the motions that there are.
fn on_motions(verdict: Result<Verdict, Unanswered>, regular: bool) -> Result<Verdict, Unanswered> {
    match verdict {
        Ok(Verdict::Refuted(_)) if !regular => Err(Unanswered::Degenerate),
        other => other,
    }
}

/// Whether the reactions do no work against the flow: because it vanishes, or, for a delay, because the constraints are at
/// rest.
fn idle_reactions(cx: &mut Context<'_>, model: &Model, g: &Generator, work: &[Expr]) -> Result<bool, Stopped> {
    let mut idle = true;
    for &w in work {
        idle &= cx.vanishes(&[(w, Rational::ONE)]).is_proved();
    }
    let pure_delay = g.tau == Arena::ONE && g.eta.iter().all(|&e| e == Arena::ZERO);
    Ok(idle || pure_delay && constraints_at_rest(cx, model)?)
}

/// Whether a rate and the work of the reactions vanish together on all motions.
fn conserved_with_reactions(
    cx: &mut Context<'_>,
    model: &Model,
    g: &Generator,
    rate: &Parts,
    work: &[Expr],
) -> Result<Result<Verdict, Unanswered>, Stopped> {
    let verdict = cx.vanishes(rate);
    if model.constraints.is_empty() || verdict.is_proved() && idle_reactions(cx, model, g, work)? {
        return Ok(Ok(verdict));
    }
    let still = cx.build(rate)?;
    let none = vec![Arena::ZERO; model.coordinates.len()];
    Ok(surface::rate_is_zero(cx, model, still, &none, work)?.ok_or(Unanswered::Constraints))
}

/// Answers a claim of conservation. Where accelerations are not solved for, the claim is compared with the charges whose
/// rates are known, with momenta of cyclic coordinates, and with the energy function.
pub fn answer_claim(
    cx: &mut Context<'_>,
    model: &Model,
    answers: &Answers,
    known: &[(Expr, Verdict)],
    claim: Expr,
) -> Result<claims::Claim, Stopped> {
    let mut result = claims::examine(cx, model, answers.rows.as_ref(), claim)?;
    // With constraints the whole system is solved, and says itself where it is singular.
    if model.constraints.is_empty() {
        result.verdict = on_motions(result.verdict, answers.mass.is_regular());
    }
    if result.verdict.is_err() {
        let energy =
            (answers.energy.function, answers.energy_conserved.unwrap_or(Verdict::Undecided(Reason::Constraints)));
        let mut known: Vec<(Expr, Verdict)> = known.iter().copied().chain([energy]).collect();
        if model.constraints.is_empty() {
            for (i, q) in answers.cyclic.iter().enumerate() {
                if q.momentum.is_proved() {
                    known.push((symmetry::charge(cx, model, &symmetry::shift(model, i))?, Verdict::Proved));
                }
            }
        }
        for (charge, verdict) in known {
            let decided = !matches!(verdict, Verdict::Undecided(_));
            if decided && claims::is_multiple(cx, claim, charge) {
                result.verdict = Ok(verdict);
                break;
            }
        }
    }
    Ok(result)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::fixture::{Fixture, double_pendulum, kepler, rod, sleigh};
    use crate::model::TermKind;

    fn check(f: &mut Fixture, images: &[Image], status: Status, blamed: &[usize]) -> SymmetryAnswer {
        let model = f.model.clone();
        let a = answer_symmetry(&mut f.cx(), &model, true, images).expect("a generator");
        assert_eq!(a.symmetry.status, status);
        assert_eq!(a.culprits.iter().map(|c| c.term).collect::<Vec<_>>(), blamed);
        a
    }

    #[test]
    fn both_weights_break_the_turn_of_a_double_pendulum() {
        let mut f = double_pendulum();
        let q: Vec<Expr> = f.model.coordinates.clone().iter().map(|q| q.jet(&mut f.arena, 0)).collect();
        let images = f.shifts(&[(q[0], Arena::ONE), (q[1], Arena::ONE)]);
        check(&mut f, &images, Status::Broken, &[1, 3]);
    }

    #[test]
    fn a_rotation_leaves_the_orbit_problem_as_it_is() {
        let mut f = kepler();
        let q: Vec<Expr> = f.model.coordinates.clone().iter().map(|q| q.jet(&mut f.arena, 0)).collect();
        let minus_y = f.arena.neg(q[1]);
        let images = f.shifts(&[(q[0], minus_y), (q[1], q[0])]);
        let a = check(&mut f, &images, Status::Exact, &[]);
        assert!(matches!(a.conserved, Ok(Verdict::Proved)));
        // A shift of x is broken by gravity alone.
        let images = f.shifts(&[(q[0], Arena::ONE)]);
        check(&mut f, &images, Status::Broken, &[1]);
    }

    #[test]
    fn a_boost_holds_up_to_a_gauge_term() {
        let mut f = kepler();
        f.model.terms.pop();
        let q: Vec<Expr> = f.model.coordinates.clone().iter().map(|q| q.jet(&mut f.arena, 0)).collect();
        let t = f.time();
        let images = f.shifts(&[(q[0], t)]);
        let a = check(&mut f, &images, Status::UpToGauge, &[]);
        // F = m x.
        let m = f.parameter("m");
        let want = f.arena.mul(m, q[0]);
        assert_eq!(a.gauge, Some(want));
    }

    #[test]
    fn a_family_that_is_not_the_identity_is_refused() {
        let mut f = kepler();
        let q = f.model.coordinates[0].clone().jet(&mut f.arena, 0);
        let eps = f.epsilon();
        let target = f.arena.mul(q, eps);
        let model = f.model.clone();
        let got = answer_symmetry(&mut f.cx(), &model, true, &[Image { source: q, target }]);
        assert_eq!(got, Err(NoGenerator::NotTheIdentity(0)));
    }

    #[test]
    fn the_energy_is_conserved_and_claims_are_told_apart() {
        let mut f = kepler();
        let model = f.model.clone();
        let answers = answer(&mut f.cx(), &model).unwrap();
        assert_eq!(answers.energy.conserved, Verdict::Proved);
        assert_eq!(answers.mass, MassVerdict::Regular);
        // The x component of the Laplace–Runge–Lenz vector [GPS §3.9], and one with a wrong sign.
        let q: Vec<(Expr, Expr)> =
            model.coordinates.iter().map(|q| (q.jet(&mut f.arena, 0), q.jet(&mut f.arena, 1))).collect();
        let ((x, vx), (y, vy)) = (q[0], q[1]);
        let (m, k) = (f.parameter("m"), f.parameter("k"));
        let (a, b) = (f.arena.mul(x, vy), f.arena.mul(y, vx));
        let l = f.arena.sub(a, b);
        let first = f.arena.product(&[m, l, vy]);
        let (x2, y2) = (f.arena.pow(x, 2), f.arena.pow(y, 2));
        let r2 = f.arena.add(x2, y2);
        let second = f.arena.monomial(&[(k, Rational::ONE), (x, Rational::ONE), (r2, Rational::HALF.neg())]);
        let (right, wrong) = (f.arena.sub(first, second), f.arena.add(first, second));
        let got = answer_claim(&mut f.cx(), &model, &answers, &[], right).unwrap();
        assert!(matches!(got.verdict, Ok(Verdict::Proved)));
        let got = answer_claim(&mut f.cx(), &model, &answers, &[], wrong).unwrap();
        assert!(matches!(got.verdict, Ok(Verdict::Refuted(_))));
    }

    /// Energy, then the claims.
    fn check_constrained(mut f: Fixture, energy: bool, claims: &[(Expr, bool)]) {
        let model = f.model.clone();
        let answers = answer(&mut f.cx(), &model).unwrap();
        assert_eq!(answers.energy_conserved.map(Verdict::is_proved), Ok(energy));
        for (claim, holds) in claims {
            let got = answer_claim(&mut f.cx(), &model, &answers, &[], *claim).unwrap();
            let (proved, refuted) = (got.verdict.map(Verdict::is_proved), got.verdict.map(Verdict::is_refuted));
            assert_eq!((proved, refuted), (Ok(*holds), Ok(!*holds)));
        }
    }

    #[test]
    fn a_rod_keeps_the_energy_and_takes_the_momentum() {
        let (f, px) = rod(false);
        check_constrained(f, true, &[(px, false)]);
    }

    #[test]
    fn a_rod_that_grows_does_work() {
        let (f, px) = rod(true);
        check_constrained(f, false, &[(px, false)]);
    }

    #[test]
    fn a_blade_keeps_its_speed_along_itself() {
        // The sleigh with its centre of mass on the blade [NF ch. II].
        let (f, along, across, turning) = sleigh();
        check_constrained(f, true, &[(along, true), (turning, true), (across, false)]);
    }

    #[test]
    fn with_a_singular_mass_matrix_nothing_is_refuted() {
        // L = y ẋ: both coordinates rest, so that x is conserved though its rate ẋ is not zero by itself.
        let mut f = Fixture::new();
        let (x, vx) = f.coordinate("x");
        let (y, _) = f.coordinate("y");
        let l = f.arena.mul(y, vx);
        f.term(TermKind::Lagrangian, "first order", &[l]);
        let model = f.model.clone();
        let answers = answer(&mut f.cx(), &model).unwrap();
        let got = answer_claim(&mut f.cx(), &model, &answers, &[], x).unwrap();
        assert_eq!(got.verdict, Err(Unanswered::Degenerate));
        // y is the momentum of the cyclic x.
        let got = answer_claim(&mut f.cx(), &model, &answers, &[], y).unwrap();
        assert_eq!(got.verdict, Ok(Verdict::Proved));
    }
}
