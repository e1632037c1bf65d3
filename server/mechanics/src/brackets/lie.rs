//! Real Lie algebras with rational structure constants: invariants, and names where these determine the algebra.
//!
//! What is used: Cartan's criterion (the radical is the complement of [g, g] with respect to the Killing form), Levi's
//! decomposition, Sylvester's inertia of the Killing form, the classification of real semisimple algebras of dimension
//! 3, 6 and (compact) 8 [Knapp, *Lie Groups Beyond an Introduction*, §§I.7–8, VI.10], of the real algebras of dimension
//! 3, and Darboux' theorem for the Heisenberg algebras. The Galilei algebras: Lévy-Leblond 1971, *Galilei group and
//! Galilean invariance*; in three dimensions, for a Levi factor so(3) =: s and the radical r with lower central series of
//! dimensions 8, 4, 1, 0, Schur's lemma on the s-modules r/[r, r] = vector ⊕ scalar, [r, r]/Z = vector and Z leaves the
//! brackets {G, H} ∝ P, {G, P} ∝ 1 alone.

use super::rows::{Vector, add_multiple, coordinates, echelon, kernel, signature};
use leastwise_algebra::Rational;

/// A Lie algebra by its structure constants: `constants[i][j]` holds [eᵢ, eⱼ] in the basis e.
#[derive(Clone, PartialEq, Debug)]
pub struct Lie {
    constants: Vec<Vec<Vector>>,
}

/// Larger algebras are not looked into.
pub const MAX_DIMENSION: usize = 32;

impl Lie {
    /// The algebra with these brackets [eᵢ, eⱼ] for i < j, in coordinates; `None` where Jacobi's identity fails or the
    /// dimension is above [`MAX_DIMENSION`].
    pub fn new(n: usize, brackets: &[(usize, usize, Vec<Rational>)]) -> Option<Lie> {
        if n > MAX_DIMENSION {
            return None;
        }
        let mut constants = vec![vec![vec![Rational::ZERO; n]; n]; n];
        for (i, j, v) in brackets {
            constants[*j][*i] = v.iter().map(Rational::neg).collect();
            constants[*i][*j] = v.clone();
        }
        let g = Lie { constants };
        g.jacobi().then_some(g)
    }

    /// The dimension.
    pub fn dimension(&self) -> usize {
        self.constants.len()
    }

    fn jacobi(&self) -> bool {
        let n = self.dimension();
        (0..n).all(|i| {
            (i + 1..n).all(|j| {
                (j + 1..n).all(|k| {
                    let mut sum = vec![Rational::ZERO; n];
                    for (a, b, c) in [(i, j, k), (j, k, i), (k, i, j)] {
                        let inner = &self.constants[b][c];
                        for (l, x) in inner.iter().enumerate() {
                            add_multiple(&mut sum, x, &self.constants[a][l]);
                        }
                    }
                    sum.iter().all(Rational::is_zero)
                })
            })
        })
    }

    fn unit(&self, i: usize) -> Vector {
        let mut v = vec![Rational::ZERO; self.dimension()];
        v[i] = Rational::ONE;
        v
    }

    fn all(&self) -> Vec<Vector> {
        (0..self.dimension()).map(|i| self.unit(i)).collect()
    }

    fn bracket(&self, u: &[Rational], v: &[Rational]) -> Vector {
        let mut out = vec![Rational::ZERO; self.dimension()];
        for (i, a) in u.iter().enumerate().filter(|x| !x.1.is_zero()) {
            for (j, b) in v.iter().enumerate().filter(|x| !x.1.is_zero()) {
                add_multiple(&mut out, &a.mul(b), &self.constants[i][j]);
            }
        }
        out
    }

    /// A basis of the span of [u, v].
    fn product(&self, us: &[Vector], vs: &[Vector]) -> Vec<Vector> {
        // Reduced as it grows, so that it stays short.
        let mut span = Vec::new();
        for u in us {
            span.extend(vs.iter().map(|v| self.bracket(u, v)).filter(|w| w.iter().any(|x| !x.is_zero())));
            span = echelon(span).0;
        }
        span
    }

    /// A basis of [g, g].
    pub fn derived(&self) -> Vec<Vec<Rational>> {
        self.product(&self.all(), &self.all())
    }

    /// A basis of the centre.
    pub fn centre(&self) -> Vec<Vec<Rational>> {
        let n = self.dimension();
        let mut rows = Vec::new();
        for j in 0..n {
            for k in 0..n {
                let row: Vector = (0..n).map(|i| self.constants[i][j][k].clone()).collect();
                if row.iter().any(|x| !x.is_zero()) {
                    rows.push(row);
                }
            }
        }
        kernel(rows, n)
    }

    /// The matrix of ad u, by rows.
    fn ad(&self, u: &[Rational]) -> Vec<Vector> {
        let columns: Vec<Vector> = self.all().iter().map(|v| self.bracket(u, v)).collect();
        transpose(&columns)
    }

    /// The Killing form tr(ad u ad v).
    pub fn killing(&self) -> Vec<Vec<Rational>> {
        let ads: Vec<Vec<Vector>> = self.all().iter().map(|u| self.ad(u)).collect();
        ads.iter().map(|a| ads.iter().map(|b| trace_of_product(a, b)).collect()).collect()
    }

    /// A basis of the radical.
    pub fn radical(&self) -> Vec<Vec<Rational>> {
        let killing = self.killing();
        let rows: Vec<Vector> = self.derived().iter().map(|u| apply(&killing, u)).collect();
        kernel(rows, self.dimension())
    }

    /// The algebra on a basis of a subalgebra.
    fn restricted(&self, basis: &[Vector]) -> Option<Lie> {
        let mut brackets = Vec::new();
        for j in 0..basis.len() {
            for i in 0..j {
                let w = self.bracket(&basis[i], &basis[j]);
                brackets.push((i, j, coordinates(basis, &w)?));
            }
        }
        Lie::new(basis.len(), &brackets)
    }

    /// The quotient by an ideal.
    fn quotient(&self, ideal: &[Vector]) -> Option<Lie> {
        let rest = complement(ideal, &self.all());
        let whole: Vec<Vector> = rest.iter().chain(ideal).cloned().collect();
        let mut brackets = Vec::new();
        for j in 0..rest.len() {
            for i in 0..j {
                let w = self.bracket(&rest[i], &rest[j]);
                let mut c = coordinates(&whole, &w)?;
                c.truncate(rest.len());
                brackets.push((i, j, c));
            }
        }
        Lie::new(rest.len(), &brackets)
    }

    /// The dimensions of g, [g, g], [g, [g, g]] … until they no longer fall.
    fn lower_central(&self) -> Vec<usize> {
        let all = self.all();
        let mut last = all.clone();
        let mut out = vec![last.len()];
        while !last.is_empty() {
            last = self.product(&all, &last);
            if out.last() == Some(&last.len()) {
                break;
            }
            out.push(last.len());
        }
        out
    }

    /// The algebra's name, where its invariants determine it.
    pub fn name(&self) -> Option<String> {
        let derived = self.derived();
        if derived.is_empty() {
            return Some(match self.dimension() {
                1 => "abelian, ℝ".into(),
                n => format!("abelian, ℝ{}", superscript(n)),
            });
        }
        // g = g₁ ⊕ a: a is what of the centre lies outside of [g, g], g₁ any complement that contains [g, g].
        let centre = self.centre();
        let outside = complement(&derived, &centre);
        let mut taken = derived.clone();
        taken.extend(outside.iter().cloned());
        let mut core = derived.clone();
        core.extend(complement(&taken, &self.all()));
        let core = if outside.is_empty() { self.clone() } else { self.restricted(&core)? };
        let name = core.core_name()?;
        Some(match outside.len() {
            0 => name,
            1 => format!("{name} ⊕ ℝ"),
            n => format!("{name} ⊕ ℝ{}", superscript(n)),
        })
    }

    /// The name of an algebra without an abelian direct summand.
    fn core_name(&self) -> Option<String> {
        let n = self.dimension();
        let (derived, centre) = (self.derived(), self.centre());
        let (plus, minus) = signature(self.killing());
        if plus + minus == n {
            return semisimple(n, plus).map(Into::into);
        }
        if derived.len() == 1 && centre.len() == 1 && self.product(&self.all(), &derived).is_empty() {
            return Some(match n {
                3 => "Heisenberg algebra".into(),
                _ => format!("Heisenberg algebra of {} pairs", n / 2),
            });
        }
        self.solvable_name(&derived, &centre)
            .map(String::from)
            .or_else(|| self.mixed_name(&centre).map(String::from))
            .or_else(|| {
                super::galilei::in_the_plane(self).then(|| "Galilei algebra of the plane, centrally extended".into())
            })
    }

    /// Names of small solvable algebras.
    fn solvable_name(&self, derived: &[Vector], centre: &[Vector]) -> Option<&'static str> {
        let n = self.dimension();
        let abelian = self.product(derived, derived).is_empty();
        if n == 3 && derived.len() == 2 && abelian {
            // A traceless ad on the plane [g, g] is a turn where its square is negative, up to its scale.
            let (trace, determinant) = self.acts_on_plane(derived, &[])?;
            return match (trace.is_zero(), determinant.signum()) {
                (true, 1) => Some("e(2)"),
                (true, -1) => Some("e(1,1)"),
                _ => None,
            };
        }
        if n == 4 && self.lower_central() == [4, 2, 1, 0] {
            return Some("Galilei algebra of the line, centrally extended");
        }
        if n == 4 && derived.len() == 3 && centre.len() == 1 && self.product(derived, derived).len() == 1 {
            // Heisenberg = [g, g] with a turn of its plane; inner derivations remove the rest.
            let (trace, determinant) = self.acts_on_plane(derived, centre)?;
            if trace.is_zero() && determinant.signum() == 1 {
                return Some("oscillator algebra");
            }
        }
        None
    }

    /// Trace and determinant of ad u on the plane ideal/kernel, for the one direction u outside of the ideal.
    fn acts_on_plane(&self, ideal: &[Vector], kernel: &[Vector]) -> Option<(Rational, Rational)> {
        let outside = complement(ideal, &self.all());
        let plane = complement(kernel, ideal);
        let ([u], 2) = (outside.as_slice(), plane.len()) else { return None };
        let whole: Vec<Vector> = plane.iter().chain(kernel).cloned().collect();
        let a = coordinates(&whole, &self.bracket(u, &plane[0]))?;
        let b = coordinates(&whole, &self.bracket(u, &plane[1]))?;
        Some((a[0].add(&b[1]), a[0].mul(&b[1]).sub(&a[1].mul(&b[0]))))
    }

    /// Names of algebras with a Levi factor and a radical.
    fn mixed_name(&self, centre: &[Vector]) -> Option<&'static str> {
        let radical = self.radical();
        let levi = self.quotient(&radical)?;
        let (plus, minus) = signature(levi.killing());
        if plus + minus != 3 || levi.dimension() != 3 {
            return None;
        }
        let compact = minus == 3;
        let r = self.restricted(&radical)?;
        let nilpotent = r.lower_central();
        let moved = self.product(&self.all(), &radical);
        match (self.dimension(), compact) {
            // The only real representation of so(3) on ℝ³ that is not trivial is the vector.
            (6, true) if nilpotent == [3, 0] && moved.len() == 3 => Some("e(3)"),
            // sl(2,ℝ) acts on the plane of a Heisenberg algebra as sp(2,ℝ), or not at all.
            (6, false) if nilpotent == [3, 1, 0] && moved.len() == 3 => Some("Schrödinger algebra of the line"),
            (11, true) if nilpotent == [8, 4, 1, 0] && centre.len() == 1 => {
                let second = self.product(&radical, &radical);
                let third = self.product(&radical, &second);
                let mut span = self.product(&self.all(), &second);
                span.extend(centre.iter().cloned());
                let turned = echelon(span).0.len() == 4;
                let same = echelon(third.iter().chain(centre).cloned().collect()).0.len() == 1;
                (turned && same).then_some("Galilei algebra of space, centrally extended")
            }
            _ => None,
        }
    }

    /// What can be said without a name: abelian, nilpotent, solvable, or its Levi factor and radical.
    pub fn kind(&self) -> String {
        let n = self.dimension();
        if self.derived().is_empty() {
            return "abelian".into();
        }
        let series = self.lower_central();
        if series.last() == Some(&0) {
            return format!("nilpotent of class {}", series.len() - 1);
        }
        let radical = self.radical();
        if radical.len() == n {
            return "solvable".into();
        }
        let factor = self.quotient(&radical).and_then(|q| {
            let (plus, _) = signature(q.killing());
            semisimple(q.dimension(), plus)
        });
        match (factor, radical.len()) {
            (_, 0) => "semisimple".into(),
            (Some(f), r) => format!("semidirect sum of {f} and a solvable radical of dimension {r}"),
            (None, r) => {
                format!(
                    "semidirect sum of a semisimple algebra of dimension {} and a solvable radical of dimension {r}",
                    n - r
                )
            }
        }
    }

    /// What the search for explicit bases needs.
    pub(super) fn parts(&self) -> (Vec<Vector>, Vec<Vector>) {
        (self.all(), self.centre())
    }

    /// [u, v] in coordinates.
    pub(super) fn of(&self, u: &[Rational], v: &[Rational]) -> Vec<Rational> {
        self.bracket(u, v)
    }

    /// The matrix of ad u.
    pub(super) fn adjoint(&self, u: &[Rational]) -> Vec<Vec<Rational>> {
        self.ad(u)
    }
}

/// The semisimple real algebras that dimension and inertia of the Killing form determine.
fn semisimple(dimension: usize, plus: usize) -> Option<&'static str> {
    Some(match (dimension, plus) {
        (3, 0) => "so(3)",
        (3, 2) => "so(2,1)",
        (6, 0) => "so(4)",
        (6, 2) => "so(3) ⊕ so(2,1)",
        (6, 3) => "so(3,1)",
        (6, 4) => "so(2,2)",
        (8, 0) => "su(3)",
        _ => return None,
    })
}

/// Those of `from` that enlarge the span of `span`, one after the other.
pub(super) fn complement(span: &[Vector], from: &[Vector]) -> Vec<Vector> {
    let mut whole = span.to_vec();
    let mut size = echelon(whole.clone()).0.len();
    let mut out = Vec::new();
    for v in from {
        whole.push(v.clone());
        let now = echelon(whole.clone()).0.len();
        if now > size {
            size = now;
            out.push(v.clone());
        } else {
            whole.pop();
        }
    }
    out
}

pub(super) fn transpose(m: &[Vector]) -> Vec<Vector> {
    let columns = m.first().map_or(0, Vec::len);
    (0..columns).map(|c| m.iter().map(|r| r[c].clone()).collect()).collect()
}

pub(super) fn apply(m: &[Vector], v: &[Rational]) -> Vector {
    m.iter().map(|row| row.iter().zip(v).fold(Rational::ZERO, |s, (a, b)| s.add(&a.mul(b)))).collect()
}

pub(super) fn trace_of_product(a: &[Vector], b: &[Vector]) -> Rational {
    let mut sum = Rational::ZERO;
    for (i, row) in a.iter().enumerate() {
        for (j, x) in row.iter().enumerate().filter(|x| !x.1.is_zero()) {
            sum = sum.add(&x.mul(&b[j][i]));
        }
    }
    sum
}

fn superscript(n: usize) -> String {
    n.to_string().chars().filter_map(|c| "⁰¹²³⁴⁵⁶⁷⁸⁹".chars().nth(c.to_digit(10)? as usize)).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Brackets as (i, j, k, c): [eᵢ, eⱼ] = … + c eₖ.
    fn algebra(n: usize, brackets: &[(usize, usize, usize, i64)]) -> Option<Lie> {
        let mut list: Vec<(usize, usize, Vector)> = Vec::new();
        for &(i, j, k, c) in brackets {
            let (i, j, c) = if i < j { (i, j, c) } else { (j, i, -c) };
            let place = list.iter().position(|x| (x.0, x.1) == (i, j)).unwrap_or_else(|| {
                list.push((i, j, vec![Rational::ZERO; n]));
                list.len() - 1
            });
            list[place].2[k] = list[place].2[k].add(&Rational::integer(c));
        }
        Lie::new(n, &list)
    }

    /// The brackets that a rotation's generators `l` have with a vector's components `v`.
    fn turns(l: usize, v: usize) -> Vec<(usize, usize, usize, i64)> {
        let mut out = Vec::new();
        for i in 0..3 {
            let (j, k) = ((i + 1) % 3, (i + 2) % 3);
            out.push((l + i, v + j, v + k, 1));
            if l != v {
                out.push((l + i, v + k, v + j, -1));
            }
        }
        out
    }

    fn check(n: usize, brackets: &[(usize, usize, usize, i64)], name: Option<&str>) {
        let g = algebra(n, brackets).expect("a Lie algebra");
        assert_eq!(g.name().as_deref(), name, "{}", g.kind());
        // The name belongs to the algebra, not to its basis: e₀ + 2 e₁ … and the reverse order.
        let basis: Vec<Vector> = (0..n)
            .map(|i| {
                let mut v = vec![Rational::ZERO; n];
                v[n - 1 - i] = Rational::ONE;
                if i > 0 {
                    v[n - i] = Rational::integer(2);
                }
                v
            })
            .collect();
        let other = g.restricted(&basis).expect("the same algebra");
        assert_eq!(other.name().as_deref(), name, "in another basis");
    }

    #[test]
    fn small_algebras_are_named() {
        check(2, &[], Some("abelian, ℝ²"));
        check(3, &[(0, 1, 2, 1)], Some("Heisenberg algebra"));
        check(3, &turns(0, 0), Some("so(3)"));
        // [e, f] = h, [h, e] = 2e, [h, f] = −2f.
        check(3, &[(0, 1, 2, 1), (2, 0, 0, 2), (2, 1, 1, -2)], Some("so(2,1)"));
        check(3, &[(0, 1, 2, 1), (0, 2, 1, -1)], Some("e(2)"));
        check(3, &[(0, 1, 2, 1), (0, 2, 1, 1)], Some("e(1,1)"));
        check(4, &turns(0, 0), Some("so(3) ⊕ ℝ"));
        check(5, &[(0, 2, 4, 1), (1, 3, 4, 3)], Some("Heisenberg algebra of 2 pairs"));
        // e(2) with a contraction in the plane is no e(2): [e₀, e₁] = e₁ + e₂, [e₀, e₂] = e₂ − e₁.
        check(3, &[(0, 1, 1, 1), (0, 1, 2, 1), (0, 2, 2, 1), (0, 2, 1, -1)], None);
    }

    #[test]
    fn a_boost_of_the_line_and_an_oscillator() {
        // G, P, H, 1: {G, P} = 1, {G, H} = P.
        check(4, &[(0, 1, 3, 1), (0, 2, 1, 1)], Some("Galilei algebra of the line, centrally extended"));
        // X, Y, L, 1: {X, Y} = 1, {L, X} = Y, {L, Y} = −X.
        check(4, &[(0, 1, 3, 1), (2, 0, 1, 1), (2, 1, 0, -1)], Some("oscillator algebra"));
        // With a stretch instead of a turn it is none.
        check(4, &[(0, 1, 3, 1), (2, 0, 0, 1), (2, 1, 1, -1)], None);
    }

    #[test]
    fn semisimple_pairs_by_the_killing_form() {
        // so(4), so(3,1), e(3): {A, A} = ± L or 0.
        for (sign, name) in [(1, "so(4)"), (-1, "so(3,1)"), (0, "e(3)")] {
            let mut b = turns(0, 0);
            b.extend(turns(0, 3));
            for i in 0..3 {
                b.push((3 + i, 3 + (i + 1) % 3, (i + 2) % 3, sign));
            }
            check(6, &b, Some(name));
        }
        // so(3) beside ℝ³ that it does not turn is no e(3).
        check(6, &turns(0, 0), Some("so(3) ⊕ ℝ³"));
    }

    /// L, P, G, H, 1 in space; the masses of the three axes.
    fn galilei_of_space(masses: [i64; 3]) -> Vec<(usize, usize, usize, i64)> {
        let mut b = turns(0, 0);
        b.extend(turns(0, 3));
        b.extend(turns(0, 6));
        for (i, m) in masses.into_iter().enumerate() {
            b.push((6 + i, 3 + i, 10, m));
            b.push((6 + i, 9, 3 + i, 1));
        }
        b
    }

    #[test]
    fn a_free_particle_in_space() {
        check(11, &galilei_of_space([5, 5, 5]), Some("Galilei algebra of space, centrally extended"));
        // Unequal masses are not turned into each other: no Lie algebra.
        assert_eq!(algebra(11, &galilei_of_space([5, 5, 4])), None);
        // Without mass {G, P} = 0: another algebra, which is not named.
        check(11, &galilei_of_space([0, 0, 0]), None);
    }

    #[test]
    fn a_free_particle_in_the_plane() {
        // L, Px, Py, Gx, Gy, H, 1.
        let plane = |m: i64, push: i64| {
            vec![
                (0, 1, 2, 1),
                (0, 2, 1, -1),
                (0, 3, 4, 1),
                (0, 4, 3, -1),
                (3, 1, 6, m),
                (4, 2, 6, m),
                (3, 5, 1, push),
                (4, 5, 2, push),
            ]
        };
        check(7, &plane(3, 1), Some("Galilei algebra of the plane, centrally extended"));
        // Without mass, or with a time translation that does nothing, it is not.
        check(7, &plane(0, 1), None);
        check(7, &plane(3, 0), None);
        // A hyperbolic turn is no rotation.
        let mut boost = plane(3, 1);
        (boost[1].3, boost[3].3) = (1, 1);
        boost[5].3 = -3;
        assert_eq!(algebra(7, &boost).and_then(|g| g.name()), None);
    }

    #[test]
    fn dilation_and_expansion_close_on_the_line() {
        // P = p, G = x, 1, H = p²/2, D = −x p, K = x²/2 with {x, p} = 1: {x, p²/2} = p, {p, x²/2} = −x, {H, K} = −x p,
        // {D, H} = −p², {D, K} = x², {D, p} = −p, {D, x} = x.
        let mut all = vec![(1, 0, 2, 1), (1, 3, 0, 1), (0, 5, 1, -1), (3, 5, 4, 1)];
        all.extend([(4, 3, 3, -2), (4, 5, 5, 2), (4, 0, 0, -1), (4, 1, 1, 1)]);
        check(6, &all, Some("Schrödinger algebra of the line"));
    }
}
