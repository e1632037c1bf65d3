//! Mechanical similarity and the virial relation in words [LL §10].

use super::asked;
use super::idle::Found;
use crate::checked::Checked;
use crate::sheet::Maker;
use leastwise_algebra::Rational;
use leastwise_mechanics::similarity as mechanics;

/// Coordinates and time scaled by powers of λ; L is multiplied by one.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Scaling {
    /// Names of coordinates with their exponents; those that stay are left out.
    pub coordinates: Vec<(String, Rational)>,
    /// The exponent of the time.
    pub time: Rational,
    /// That of L and of all energies.
    pub lagrangian: Rational,
    /// What it implies: `periods of similar orbits scale as (size)^(3/2)`; nothing where there are other scalings beside it.
    pub implies: Option<String>,
}

/// What is known.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct SimilarityReport {
    /// Independent scalings; their products are scalings too.
    pub scalings: Vec<Scaling>,
    /// Why there may be others.
    pub undecided: Option<String>,
    /// k in 2⟨T⟩ = k⟨U⟩, for motions on which Σ p q stays bounded: which is not derived.
    pub virial: Option<Rational>,
}

impl Scaling {
    /// `x → λ x, t → λ^(3/2) t multiplies L by λ⁻¹`.
    pub fn words(&self) -> String {
        let mut maps: Vec<String> = self.coordinates.iter().map(|(q, a)| scaled(q, a)).collect();
        if !self.time.is_zero() {
            maps.push(scaled("t", &self.time));
        }
        let l = if self.lagrangian.is_zero() {
            "leaves L as it is".into()
        } else {
            format!("multiplies L by {}", power("λ", &self.lagrangian))
        };
        format!("{} {l}", maps.join(", "))
    }
}

impl SimilarityReport {
    /// `2⟨T⟩ = −⟨U⟩`, `⟨T⟩ = 2⟨U⟩`.
    pub fn relation(&self) -> Option<String> {
        let k = self.virial.as_ref()?;
        if k.is_zero() {
            return Some("⟨T⟩ = 0".into());
        }
        let half = k.mul(&Rational::HALF);
        let (left, k) = if half.is_integer() { ("⟨T⟩", &half) } else { ("2⟨T⟩", k) };
        let sign = if k.is_negative() { "−" } else { "" };
        let size = match k.abs() {
            one if one.is_one() => String::new(),
            size if size.is_integer() => size.to_string(),
            size => format!("{size} "),
        };
        Some(format!("{left} = {sign}{size}⟨U⟩"))
    }
}

fn scaled(q: &str, a: &Rational) -> String {
    format!("{q} → {} {q}", power("λ", a))
}

/// `λ`, `λ²`, `λ⁻¹`, `λ^(3/2)`.
fn power(base: &str, a: &Rational) -> String {
    if a.is_one() {
        return base.into();
    }
    match a.to_i64() {
        Some(n) => {
            let digits = n.unsigned_abs().to_string();
            let raised: String =
                digits.chars().filter_map(|c| "⁰¹²³⁴⁵⁶⁷⁸⁹".chars().nth(c.to_digit(10)? as usize)).collect();
            format!("{base}{}{raised}", if n < 0 { "⁻" } else { "" })
        }
        None => format!("{base}^({})", signed(a)),
    }
}

fn signed(a: &Rational) -> String {
    if a.is_negative() { format!("−{}", a.neg()) } else { a.to_string() }
}

/// All scalings of the model, idle parts aside; the virial relation where there is one.
pub(super) fn similarity(maker: &mut Maker<'_>, checked: &Checked, idle: &[Found]) -> SimilarityReport {
    let model = checked.model();
    if model.coordinates.is_empty() || model.terms.is_empty() {
        return SimilarityReport::default();
    }
    let angles: Vec<usize> = checked.angles().collect();
    let parts: Vec<(usize, usize)> = idle.iter().flat_map(|i| i.parts.iter().copied()).collect();
    let found = match asked(maker, |cx| mechanics::similarity(cx, model, &angles, &parts)) {
        Ok(found) => found,
        Err(stopped) => {
            return SimilarityReport { undecided: Some(stopped.to_string()), ..SimilarityReport::default() };
        }
    };
    let virial = match asked(maker, |cx| mechanics::virial(cx, model, &angles)) {
        Ok(Ok(v)) => Some(v.degree),
        _ => None,
    };
    let single = found.scalings.len() == 1;
    let labels: Vec<String> = model.coordinates.iter().map(|q| q.label(maker.arena)).collect();
    let scalings = found.scalings.iter().map(|s| scaling(s, &labels, single)).collect();
    SimilarityReport { scalings, undecided: found.undecided, virial }
}

/// A scaling by λ of the first coordinate that is scaled, else of the time.
fn scaling(s: &mechanics::Scaling, labels: &[String], single: bool) -> Scaling {
    let unit = s.coordinates.iter().find(|a| !a.is_zero()).unwrap_or(&s.time);
    let inverse = unit.recip().unwrap_or(Rational::ONE);
    let coordinates: Vec<(String, Rational)> = labels
        .iter()
        .zip(&s.coordinates)
        .filter(|(_, a)| !a.is_zero())
        .map(|(q, a)| (q.clone(), a.mul(&inverse)))
        .collect();
    let (time, lagrangian) = (s.time.mul(&inverse), s.lagrangian.mul(&inverse));
    let implies = single.then(|| implied(&coordinates, &time)).flatten();
    Scaling { coordinates, time, lagrangian, implies }
}

fn implied(coordinates: &[(String, Rational)], time: &Rational) -> Option<String> {
    if coordinates.is_empty() {
        return Some("every path can be run through at any speed".into());
    }
    if !coordinates.iter().all(|(_, a)| a.is_one()) {
        return None;
    }
    Some(if time.is_zero() {
        "periods of similar orbits do not depend on their size".into()
    } else if time.is_one() {
        "periods of similar orbits scale as their size".into()
    } else {
        match time.to_i64() {
            Some(_) => format!("periods of similar orbits scale as {}", power("(size)", time)),
            None => format!("periods of similar orbits scale as (size)^({})", signed(time)),
        }
    })
}
