//! Mechanical similarity and the virial relation [LL §10].
//!
//! qⁱ → λ^{aᵢ} qⁱ, t → λ^b t takes L dt to λ^{c+b} L dt and so motions to motions where
//!
//! Σ aᵢ Vᵢ + b V_t − (c + b) L = 0
//!
//! with V the variations of the integrand under the generators ηⁱ = qⁱ and τ = t (Euler's identity for homogeneous functions,
//! prolonged). Linear in the weights: sampled at points of the field, solved over ℚ, each solution confirmed by the zero test.
//! A force 𝒬ᵢ must scale by λ^{c − aᵢ}, a constraint by some power.
//!
//! Virial relation: d/dt Σ aᵢ pᵢ qⁱ = Σ aᵢ (qⁱ ∂/∂qⁱ + q̇ⁱ ∂/∂q̇ⁱ) L = 2 T − k U where the weights make T homogeneous of degree 2
//! and U of degree k; its mean vanishes where Σ aᵢ pᵢ qⁱ stays bounded: 2⟨T⟩ = k⟨U⟩.

use crate::context::{Context, Parts};
use crate::lagrange::{depends_on_velocities, generalised, jet_order, signed_parts};
use crate::model::{Model, time};
use crate::symmetry::{Generator, variations, variations_of_functions};
use leastwise_algebra::{Arena, Expr, Rational, Reason, Stopped, Verdict};

/// One independent similarity; all multiples and sums of the solutions are similarities too.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Scaling {
    /// aᵢ, one for each coordinate; zero for angles.
    pub coordinates: Vec<Rational>,
    /// b.
    pub time: Rational,
    /// c: energies scale like L.
    pub lagrangian: Rational,
}

/// What is known of similarities.
#[derive(Clone, PartialEq, Debug)]
pub struct Similarity {
    /// A basis of the solutions, each proved; empty where only λ = 1 is left.
    pub scalings: Vec<Scaling>,
    /// Whether a candidate was found but not proved, or residues were not to be had, and why.
    pub undecided: Option<String>,
}

/// The virial relation 2⟨T⟩ = k⟨U⟩, for motions on which Σ aᵢ pᵢ qⁱ stays bounded only.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Virial {
    /// aᵢ, one for each coordinate: T is of degree 2, U of degree k.
    pub weights: Vec<Rational>,
    /// k.
    pub degree: Rational,
}

/// Why there is no answer.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum NoRelation {
    /// Forces or constraints are not in L.
    ForcesOrConstraints,
    /// A term is neither free of velocities nor quadratic in them.
    NotQuadratic,
    /// T and U are not homogeneous in common weights, or the degree is not determined.
    NotHomogeneous,
    /// There is no U.
    NoPotential,
    /// The zero test did not decide.
    Undecided(Reason),
}

/// All similarities. `angles` are the numbers of coordinates that cannot be scaled, `idle` the parts (term, part) that are
/// total time derivatives and so left out. Costs one variation of each part for each coordinate and the time.
pub fn similarity(
    cx: &mut Context<'_>,
    model: &Model,
    angles: &[usize],
    idle: &[(usize, usize)],
) -> Result<Similarity, Stopped> {
    let mut parts = Parts::new();
    for (t, list) in signed_parts(model).into_iter().enumerate() {
        for (p, part) in list.into_iter().enumerate() {
            if !idle.contains(&(t, p)) {
                parts.push(part);
            }
        }
    }
    if parts.is_empty() {
        return Ok(Similarity { scalings: Vec::new(), undecided: None });
    }
    let n = model.coordinates.len();
    let scaled: Vec<usize> = (0..n).filter(|i| !angles.contains(i)).collect();
    let flat: Vec<Expr> = parts.iter().map(|p| p.0).collect();
    let constraints: Vec<Expr> = model.constraints.iter().map(|c| c.f).collect();
    let mut forces: Vec<(usize, Expr)> = Vec::new();
    for (i, q) in model.coordinates.iter().enumerate() {
        let mut sum = Parts::new();
        for f in &model.forces {
            for (forms, c) in generalised(cx, f, q)? {
                if q.members.is_some() {
                    return Ok(Similarity {
                        scalings: Vec::new(),
                        undecided: Some("forces on a family that is not written out".into()),
                    });
                }
                sum.extend(forms.into_iter().map(|f| (f.expr, c.clone())));
            }
        }
        sum.retain(|p| p.0 != Arena::ZERO);
        if !sum.is_empty() {
            forces.push((i, cx.build(&sum)?));
        }
    }
    // Columns: c + b, b, the coordinates, the constraints' own degrees. Rows: L, the forces, the constraints.
    let lagrangian = cx.build(&parts)?;
    let height = 1 + forces.len() + constraints.len();
    let mut columns: Vec<Vec<Expr>> = Vec::new();
    let mut first = vec![cx.arena.neg(lagrangian)];
    for (_, f) in &forces {
        first.push(cx.arena.neg(*f));
    }
    first.resize(height, Arena::ZERO);
    columns.push(first);
    let t = time(cx.arena);
    let t = cx.arena.sym(t);
    let mut generators = vec![(None, Generator { tau: t, eta: vec![Arena::ZERO; n] })];
    for &i in &scaled {
        let mut eta = vec![Arena::ZERO; n];
        eta[i] = model.coordinates[i].jet(cx.arena, 0);
        generators.push((Some(i), Generator { tau: Arena::ZERO, eta }));
    }
    for (moved, g) in &generators {
        let varied = variations(cx, &model.coordinates, g, &flat)?;
        let list: Parts = varied.into_iter().zip(&parts).map(|(v, (_, c))| (v, c.clone())).collect();
        let mut column = vec![cx.build(&list)?];
        let of: Vec<Expr> = forces.iter().map(|f| f.1).collect();
        for ((i, f), v) in forces.iter().zip(variations_of_functions(cx, model, g, &of)?) {
            // X 𝒬ᵢ = (c − aᵢ) 𝒬ᵢ with c = (c + b) − b.
            let own = moved.is_none_or(|k| k == *i);
            column.push(if own { cx.arena.add(v, *f) } else { v });
        }
        column.extend(variations_of_functions(cx, model, g, &constraints)?);
        columns.push(column);
    }
    for (k, &f) in constraints.iter().enumerate() {
        let mut column = vec![Arena::ZERO; height];
        column[1 + forces.len() + k] = cx.arena.neg(f);
        columns.push(column);
    }
    let (solutions, undecided) = kernel(cx, &columns)?;
    let mut scalings = Vec::new();
    for s in solutions {
        let mut coordinates = vec![Rational::ZERO; n];
        for (&i, a) in scaled.iter().zip(&s[2..]) {
            coordinates[i] = a.clone();
        }
        let scaling = Scaling { coordinates, time: s[1].clone(), lagrangian: s[0].sub(&s[1]) };
        let idle = scaling.time.is_zero() && scaling.coordinates.iter().all(Rational::is_zero);
        if !idle {
            scalings.push(scaling);
        }
    }
    Ok(Similarity { scalings, undecided })
}

/// The rational relations of the columns, each confirmed; what was not.
fn kernel(cx: &mut Context<'_>, columns: &[Vec<Expr>]) -> Result<(Vec<Vec<Rational>>, Option<String>), Stopped> {
    let height = columns[0].len();
    let length = (columns.len() + 4).div_ceil(height).max(2);
    let residues = match cx.zero.residue_vectors(cx.arena, columns, length, cx.budget) {
        Ok(r) => r,
        Err(Reason::Cancelled) => return Err(Stopped::Cancelled),
        Err(Reason::TooLarge) => return Err(Stopped::TooLarge),
        Err(r) => return Ok((Vec::new(), Some(r.to_string()))),
    };
    let Some(relations) = residues.relations() else {
        return Ok((Vec::new(), Some("weights that are no small fractions".into())));
    };
    let (mut out, mut doubt) = (Vec::new(), None);
    for r in relations {
        let mut lists = Vec::new();
        for row in 0..height {
            let list: Parts = columns
                .iter()
                .zip(&r)
                .filter(|(c, x)| !x.is_zero() && c[row] != Arena::ZERO)
                .map(|(c, x)| (c[row], x.clone()))
                .collect();
            lists.push(list);
        }
        match cx.all_vanish(&lists) {
            Verdict::Proved => out.push(r),
            Verdict::Undecided(reason) => doubt = Some(reason.to_string()),
            Verdict::Refuted(_) => {}
        }
    }
    Ok((out, doubt))
}

/// The virial relation, where T is quadratic in the velocities and T and U are homogeneous in common weights.
pub fn virial(cx: &mut Context<'_>, model: &Model, angles: &[usize]) -> Result<Result<Virial, NoRelation>, Stopped> {
    if !model.forces.is_empty() || !model.constraints.is_empty() {
        return Ok(Err(NoRelation::ForcesOrConstraints));
    }
    let n = model.coordinates.len();
    let (mut kinetic, mut potential) = (Parts::new(), Parts::new());
    for (e, c) in signed_parts(model).concat() {
        if depends_on_velocities(cx.arena, e) { kinetic.push((e, c)) } else { potential.push((e, c.neg())) }
    }
    if potential.is_empty() || cx.vanishes(&potential).is_proved() {
        return Ok(Err(NoRelation::NoPotential));
    }
    let (t, u) = (cx.build(&kinetic)?, cx.build(&potential)?);
    if jet_order(cx.arena, t) > 1 {
        return Ok(Err(NoRelation::NotQuadratic));
    }
    let stretch = |cx: &mut Context<'_>, of: &[usize], e: Expr| -> Result<Expr, Stopped> {
        let mut eta = vec![Arena::ZERO; n];
        for &i in of {
            eta[i] = model.coordinates[i].jet(cx.arena, 0);
        }
        let g = Generator { tau: Arena::ZERO, eta };
        Ok(variations(cx, &model.coordinates, &g, &[e])?[0])
    };
    // Under a change of the clock alone a quadratic T gets −2 T, density factor included −T.
    let clock = time(cx.arena);
    let clock = cx.arena.sym(clock);
    let g = Generator { tau: clock, eta: vec![Arena::ZERO; n] };
    let varied = variations(cx, &model.coordinates, &g, &[t])?[0];
    let explicit = cx.arena.partial(t, clock, cx.budget)?;
    let drift = cx.arena.mul(clock, explicit);
    let quadratic: Parts = vec![(varied, Rational::ONE), (drift, Rational::MINUS_ONE), (t, Rational::ONE)];
    match cx.vanishes(&quadratic) {
        Verdict::Proved => {}
        Verdict::Refuted(_) => return Ok(Err(NoRelation::NotQuadratic)),
        Verdict::Undecided(r) => return Ok(Err(NoRelation::Undecided(r))),
    }
    let scaled: Vec<usize> = (0..n).filter(|i| !angles.contains(i)).collect();
    // Columns: the degree of U, of T (times two), the coordinates.
    let minus_u = cx.arena.neg(u);
    let minus_t = cx.arena.scale(t, &Rational::integer(-2));
    let mut columns = vec![vec![Arena::ZERO, minus_u], vec![minus_t, Arena::ZERO]];
    for &i in &scaled {
        columns.push(vec![stretch(cx, &[i], t)?, stretch(cx, &[i], u)?]);
    }
    let (solutions, _) = kernel(cx, &columns)?;
    // Weights that leave T alone may not change the degree of U.
    let Some(first) = solutions.iter().find(|s| !s[1].is_zero()) else { return Ok(Err(NoRelation::NotHomogeneous)) };
    let Some(inverse) = first[1].recip() else { return Ok(Err(NoRelation::NotHomogeneous)) };
    let first: Vec<Rational> = first.iter().map(|x| x.mul(&inverse)).collect();
    if solutions.iter().any(|s| s[0] != first[0].mul(&s[1])) {
        return Ok(Err(NoRelation::NotHomogeneous));
    }
    let mut weights = vec![Rational::ZERO; n];
    for (&i, a) in scaled.iter().zip(&first[2..]) {
        weights[i] = a.clone();
    }
    Ok(Ok(Virial { weights, degree: first[0].clone() }))
}

impl Scaling {
    /// The common weight of all coordinates that are scaled, where they have one and it is not zero.
    fn length(&self) -> Option<Rational> {
        let mut seen = self.coordinates.iter().filter(|a| !a.is_zero());
        let first = seen.next()?;
        seen.all(|a| a == first).then(|| first.clone())
    }

    /// In words, for `labels` of the coordinates: `t² ∝ l³`, `the period does not depend on the amplitude`.
    pub fn words(&self, labels: &[String]) -> String {
        if self.coordinates.iter().all(Rational::is_zero) {
            return "the same paths at any speed".into();
        }
        if self.time.is_zero() {
            return match self.length() {
                Some(_) => "times do not depend on the size of the path: a period not on the amplitude".into(),
                None => format!("times stay when {}", self.stretches(labels)),
            };
        }
        let Some(a) = self.length() else {
            return format!("t → {} t when {}", power("λ", &self.time), self.stretches(labels));
        };
        let Some(ratio) = self.time.div(&a) else { return String::new() };
        let Some((n, d)) = ratio.small() else { return format!("t ∝ l^({ratio:?})") };
        if (n, d) == (1, 2) {
            return "t ∝ √l".into();
        }
        let left = power("t", &Rational::integer(d));
        format!("{left} ∝ {}", power("l", &Rational::integer(n)))
    }

    fn stretches(&self, labels: &[String]) -> String {
        let list: Vec<String> = self
            .coordinates
            .iter()
            .zip(labels)
            .filter(|(a, _)| !a.is_zero())
            .map(|(a, q)| format!("{q} → {} {q}", power("λ", a)))
            .collect();
        list.join(", ")
    }
}

impl Virial {
    /// `2⟨T⟩ = −⟨U⟩ for bounded motion`.
    pub fn words(&self) -> String {
        let k = match self.degree.small() {
            Some((1, 1)) => String::new(),
            Some((-1, 1)) => "−".into(),
            Some((0, _)) => return "⟨T⟩ = 0 for bounded motion".into(),
            Some((n, 1)) => format!("{}{} ", if n < 0 { "−" } else { "" }, n.unsigned_abs()),
            Some((n, d)) => format!("{}{}/{d} ", if n < 0 { "−" } else { "" }, n.unsigned_abs()),
            None => format!("{:?} ", self.degree),
        };
        format!("2⟨T⟩ = {k}⟨U⟩ for bounded motion")
    }
}

/// `l`, `l³`, `l⁻¹`, `λ^(3/2)`.
fn power(base: &str, n: &Rational) -> String {
    match n.small() {
        Some((1, 1)) => base.into(),
        Some((n, 1)) => {
            let digits = n.unsigned_abs().to_string();
            let raised: String =
                digits.chars().filter_map(|c| "⁰¹²³⁴⁵⁶⁷⁸⁹".chars().nth(c.to_digit(10)? as usize)).collect();
            format!("{base}{}{raised}", if n < 0 { "⁻" } else { "" })
        }
        Some((n, d)) => format!("{base}^({}{}/{d})", if n < 0 { "−" } else { "" }, n.unsigned_abs()),
        None => format!("{base}^({n:?})"),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::fixture::{Fixture, double_pendulum, kepler, rod};
    use crate::model::{Action, Force, TermKind};

    fn words(f: &mut Fixture, angles: &[usize]) -> Vec<String> {
        let model = f.model.clone();
        let labels: Vec<String> = model.coordinates.iter().map(|q| q.label(&f.arena)).collect();
        let got = similarity(&mut f.cx(), &model, angles, &[]).unwrap();
        assert_eq!(got.undecided, None);
        got.scalings.iter().map(|s| s.words(&labels)).collect()
    }

    fn relation(f: &mut Fixture, angles: &[usize]) -> Result<String, NoRelation> {
        let model = f.model.clone();
        virial(&mut f.cx(), &model, angles).unwrap().map(|v| v.words())
    }

    /// A mass in the plane with the potential k (x² + y²)^{degree/2}.
    fn power_law(degree: i64) -> Fixture {
        let mut f = kepler();
        let q: Vec<Expr> = f.model.coordinates.clone().iter().map(|q| q.jet(&mut f.arena, 0)).collect();
        let (x2, y2) = (f.arena.pow(q[0], 2), f.arena.pow(q[1], 2));
        let (r2, k) = (f.arena.add(x2, y2), f.parameter("k"));
        let u = f.arena.monomial(&[(k, Rational::ONE), (r2, Rational::new(degree, 2).unwrap())]);
        f.model.terms[1].parts = vec![u];
        f
    }

    fn check(degree: i64, similar: &str, bounded: &str) {
        let mut f = power_law(degree);
        assert_eq!(words(&mut f, &[]), [similar]);
        assert_eq!(relation(&mut f, &[]).unwrap(), bounded);
    }

    #[test]
    fn the_potentials_of_the_textbook() {
        // t ∝ l^{1 − k/2}, 2⟨T⟩ = k⟨U⟩ [LL §10].
        check(-1, "t² ∝ l³", "2⟨T⟩ = −⟨U⟩ for bounded motion");
        check(1, "t ∝ √l", "2⟨T⟩ = ⟨U⟩ for bounded motion");
        check(
            2,
            "times do not depend on the size of the path: a period not on the amplitude",
            "2⟨T⟩ = 2 ⟨U⟩ for bounded motion",
        );
        check(4, "t ∝ l⁻¹", "2⟨T⟩ = 4 ⟨U⟩ for bounded motion");
        check(-2, "t ∝ l²", "2⟨T⟩ = −2 ⟨U⟩ for bounded motion");
    }

    #[test]
    fn two_powers_have_no_similarity() {
        let mut f = power_law(2);
        let x = f.model.coordinates[0].clone().jet(&mut f.arena, 0);
        let (k, x4) = (f.parameter("k₂"), f.arena.pow(x, 4));
        let u = f.arena.mul(k, x4);
        f.term(TermKind::Potential, "hardening", &[u]);
        assert!(words(&mut f, &[]).is_empty());
        assert_eq!(relation(&mut f, &[]), Err(NoRelation::NotHomogeneous));
    }

    #[test]
    fn a_free_body_has_two_weights() {
        let mut f = kepler();
        f.model.terms.pop();
        let model = f.model.clone();
        let got = similarity(&mut f.cx(), &model, &[], &[]).unwrap();
        assert_eq!(got.scalings.len(), 2);
        // c = 2 a − 2 b in both, and they are independent.
        for s in &got.scalings {
            let two = Rational::integer(2);
            assert_eq!(s.lagrangian, two.mul(&s.coordinates[0]).sub(&two.mul(&s.time)));
            assert_eq!(s.coordinates[0], s.coordinates[1]);
        }
        assert_ne!(got.scalings[0].time.is_zero(), got.scalings[1].time.is_zero());
        assert_eq!(relation(&mut f, &[]), Err(NoRelation::NoPotential));
    }

    #[test]
    fn in_polar_coordinates_the_angle_stays() {
        // ½ m (ṙ² + r² φ̇²) + k/r.
        let mut f = Fixture::new();
        let (r, vr) = f.coordinate("r");
        let (_, w) = f.coordinate("φ");
        let (m, k) = (f.parameter("m"), f.parameter("k"));
        let r2 = f.arena.pow(r, 2);
        let mr2 = f.arena.mul(m, r2);
        let parts = [f.half_square(m, vr), f.half_square(mr2, w)];
        f.term(TermKind::Kinetic, "body", &parts);
        let u = f.arena.div(k, r);
        f.term(TermKind::Lagrangian, "gravity", &[u]);
        assert_eq!(words(&mut f, &[1]), ["t² ∝ l³"]);
        assert_eq!(relation(&mut f, &[1]).unwrap(), "2⟨T⟩ = −⟨U⟩ for bounded motion");
    }

    #[test]
    fn swinging_bodies_scale_not() {
        // The length of a pendulum is a parameter: with angles alone nothing scales.
        let mut f = double_pendulum();
        assert!(words(&mut f, &[0, 1]).is_empty());
        // A rod of fixed length: paths stay, speeds do not matter without weight.
        let (mut f, _) = rod(false);
        assert_eq!(words(&mut f, &[]), ["the same paths at any speed"]);
    }

    #[test]
    fn drag_must_scale_along() {
        // −c v with a spring keeps the period free of the amplitude; with gravity k/r nothing is left [LL §25].
        for (degree, count) in [(2, 1), (-1, 0)] {
            let mut f = power_law(degree);
            let c = f.parameter("c");
            let mut losses = Vec::new();
            for q in f.model.coordinates.clone() {
                let v = q.jet(&mut f.arena, 1);
                losses.push(f.half_square(c, v));
            }
            f.model.forces.push(Force { name: "drag".into(), action: Action::Dissipation(losses) });
            assert_eq!(words(&mut f, &[]).len(), count);
            assert_eq!(relation(&mut f, &[]), Err(NoRelation::ForcesOrConstraints));
        }
    }

    #[test]
    fn a_magnetic_field_sets_a_time() {
        // ½ m v² + b x ẏ: a = 1, b = 0; and T is not all of the velocities' part.
        let mut f = kepler();
        f.model.terms.pop();
        let (x, vy) = {
            let q = f.model.coordinates.clone();
            (q[0].jet(&mut f.arena, 0), q[1].jet(&mut f.arena, 1))
        };
        let b = f.parameter("b");
        let field = f.arena.product(&[b, x, vy]);
        f.term(TermKind::Lagrangian, "field", &[field]);
        let k = f.parameter("k");
        assert_eq!(words(&mut f, &[]).len(), 1);
        let slope = f.arena.mul(k, x);
        f.term(TermKind::Potential, "slope", &[slope]);
        assert!(words(&mut f, &[]).is_empty());
        assert_eq!(relation(&mut f, &[]), Err(NoRelation::NotQuadratic));
    }
}
