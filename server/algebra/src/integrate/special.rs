//! Functions that an integral may have and its integrand has not: logarithms and inverse tangents of the factors of
//! denominators and of quadratics under roots [Bronstein, Symbolic Integration I, ch. 2 and 5; the parallel form: Norman,
//! Moore 1977].

use super::polynomial::{Poly, exponent, power_of};
use super::tower::{Frac, Kind, Res, Tower};
use crate::arena::{Arena, Expr};
use crate::function::Function;
use crate::rational::Rational;

/// A function with its derivative in the generators.
#[derive(Clone, Debug)]
pub(super) struct Extra {
    pub expr: Expr,
    pub rate: Frac,
}

/// ±√p with what is known of the sign of p.
enum Root {
    /// p = R².
    Of(Frac),
    /// p = −R².
    OfNegative(Frac),
    Unknown,
}

fn two() -> Rational {
    Rational::integer(2)
}

impl Tower<'_, '_> {
    /// What may stand in the integral beside the generators, simplest first.
    pub fn extras(&mut self, v: &Frac) -> Res<Vec<Extra>> {
        let mut out = Vec::new();
        let low = v.num.lowest();
        for k in 0..self.generators.len() {
            let plain = matches!(self.generators[k].kind, Kind::Base | Kind::Cosine(_) | Kind::Cosh(_) | Kind::Other);
            if plain && exponent(&low, k) < 0 {
                let rate = self.generators[k].rate.clone();
                let Some(rate) = rate else { continue };
                let rate = self.mul(&rate, &Frac::of(Poly::monomial(power_of(k, -1), Rational::ONE)))?;
                self.log(&Poly::variable(k), rate, &mut out)?;
            }
        }
        // Factors below, those of the derivatives of inverse functions and logarithms included.
        let mut below: Vec<usize> = (0..self.factors.len()).filter(|&k| v.power_of_factor(k) > 0).collect();
        for g in v.num.variables() {
            if self.generators[g].kind == Kind::Other
                && let Some(rate) = &self.generators[g].rate
            {
                below.extend((0..rate.den.len()).filter(|&k| rate.den[k] > 0));
            }
        }
        below.sort_unstable();
        below.dedup();
        let present: Vec<usize> = below.into_iter().filter(|&k| !self.factors[k].constant).collect();
        self.of_pairs(&low, &present, &mut out)?;
        for &k in &present {
            let rate = self.rate_of_log_factor(k)?;
            let p = self.factors[k].poly.clone();
            self.log(&p, rate, &mut out)?;
        }
        for &k in &present {
            let p = self.factors[k].poly.clone();
            self.of_quadratic(&p, &mut out)?;
            self.of_turning(k, &mut out)?;
        }
        for g in 0..self.generators.len() {
            if self.generators[g].kind == Kind::Root && !self.is_constant(g) && v.num.has(g) {
                for &k in &present {
                    self.of_root_below(g, k, &mut out)?;
                }
                self.of_root(g, &low, &present, &mut out)?;
            }
        }
        Ok(out)
    }

    /// log p, of the absolute value where the sign is not known.
    fn log(&mut self, p: &Poly, rate: Frac, out: &mut Vec<Extra>) -> Res<()> {
        let e = self.write_poly(p)?;
        // A quadratic without real zeros has the sign of its first coefficient.
        for k in p.variables() {
            if p.degree(k) == 2 && !self.is_constant(k) && p.lowest().is_empty() {
                let parts = p.coefficients(k);
                let disc = self.discriminant(&parts)?;
                if self.sign(&disc)?.is_negative() && self.sign(&parts[2])?.is_positive() {
                    let expr = self.arena.call(Function::Log, &[e]);
                    out.push(Extra { expr, rate });
                    return Ok(());
                }
            }
        }
        let expr = self.log_of(e);
        out.push(Extra { expr, rate });
        Ok(())
    }

    fn log_of(&mut self, e: Expr) -> Expr {
        let sign = (self.signs)(self.arena, e, self.budget);
        let e = if sign.is_nonnegative() {
            e
        } else if sign.is_nonpositive() {
            self.arena.neg(e)
        } else {
            self.arena.call(Function::Abs, &[e])
        };
        self.arena.call(Function::Log, &[e])
    }

    /// Of 1/sin, 1/cos, 1/sinh, 1/cosh.
    fn of_pairs(&mut self, low: &super::polynomial::Monomial, present: &[usize], out: &mut Vec<Extra>) -> Res<()> {
        for circular in [true, false] {
            let pairs = if circular { self.circular.clone() } else { self.hyperbolic.clone() };
            for pair in pairs.iter().flatten() {
                if pair.first == pair.second {
                    continue;
                }
                let (s, c) = (Frac::of(Poly::variable(pair.first)), Frac::of(Poly::variable(pair.second)));
                let one = Poly::one();
                let ends = [c.num.sub(&one), c.num.add(&one)];
                let sine_below = present.iter().any(|&k| ends.contains(&self.factors[k].poly));
                let half = self.arena.scale(pair.argument, &Rational::HALF);
                if sine_below {
                    let inverse = self.invert(&s)?;
                    let plain = self.mul(&pair.rate, &inverse)?;
                    let rate = self.mul(&plain, &c)?;
                    let e = self.arena.call(if circular { Function::Sin } else { Function::Sinh }, &[pair.argument]);
                    out.push(Extra { expr: self.log_of(e), rate });
                    let e = self.arena.call(if circular { Function::Tan } else { Function::Tanh }, &[half]);
                    out.push(Extra { expr: self.log_of(e), rate: plain });
                }
                if exponent(low, pair.second) < 0 {
                    let inverse = self.invert(&c)?;
                    let rate = self.mul(&pair.rate, &inverse)?;
                    let s = self.generators[pair.first].expr;
                    if circular {
                        // ½ log((1 + sin)/(1 − sin)) has the derivative 1/cos.
                        let (up, down) = (self.arena.add(Arena::ONE, s), self.arena.sub(Arena::ONE, s));
                        let e = self.arena.div(up, down);
                        out.push(Extra { expr: self.arena.call(Function::Log, &[e]), rate: rate.scale(&two()) });
                    } else {
                        out.push(Extra { expr: self.arena.call(Function::Atan, &[s]), rate });
                    }
                }
            }
        }
        Ok(())
    }

    /// R with ±R² = p: a polynomial, or the root of a constant of known sign.
    fn root_of(&mut self, p: &Poly) -> Res<Root> {
        if p.is_zero() {
            return Ok(Root::Unknown);
        }
        if let Some(r) = p.sqrt(self.budget)? {
            return Ok(Root::Of(Frac::of(r)));
        }
        let minus = p.neg();
        if let Some(r) = minus.sqrt(self.budget)? {
            return Ok(Root::OfNegative(Frac::of(r)));
        }
        if !self.is_constant_poly(p) {
            return Ok(Root::Unknown);
        }
        let sign = self.sign(p)?;
        let of = if sign.is_nonnegative() {
            p
        } else if sign.is_nonpositive() {
            &minus
        } else {
            return Ok(Root::Unknown);
        };
        // Squares of constants are taken out; the sign of the root does not matter.
        let low = of.lowest();
        let half = |k: usize, e: i16| if self.generators[k].relation.is_none() { e.div_euclid(2) } else { 0 };
        let outside = super::polynomial::trim(low.iter().enumerate().map(|(k, &e)| half(k, e)).collect());
        let inside = of.shift(&super::polynomial::times(&Default::default(), &outside, -2), &Rational::ONE);
        let e = self.write_poly(&inside)?;
        let e = self.arena.sqrt(e);
        let r = self.read(e, 0)?;
        let r = self.mul(&r, &Frac::of(Poly::monomial(outside, Rational::ONE)))?;
        Ok(if sign.is_nonnegative() { Root::Of(r) } else { Root::OfNegative(r) })
    }

    /// atan(a/b), or atan2(a, b) where b moves; its derivative is (b Da − a Db)/(a² + b²), with a² + b² given.
    fn inverse_tangent(&mut self, a: &Frac, b: &Frac, squares: &Frac, out: &mut Vec<Extra>) -> Res<()> {
        let (da, db) = (self.rate(a)?, self.rate(b)?);
        let (x, y) = (self.mul(b, &da)?, self.mul(a, &db)?);
        let over = self.sub(&x, &y)?;
        let inverse = self.invert(squares)?;
        let rate = self.mul(&over, &inverse)?;
        let rate = self.cancel(rate)?;
        let (a, b) = (self.write(a)?, self.write(b)?);
        // A common number is of no use; the second argument may lose its sign to the first.
        let (ca, ea) = content(self.arena, a);
        let (cb, eb) = content(self.arena, b);
        let Some(ratio) = ca.div(&cb) else { return Ok(()) };
        let sign = (self.signs)(self.arena, eb, self.budget);
        let moving = !self.read(b, 0).is_ok_and(|f| self.rate(&f).is_ok_and(|r| r.is_zero()));
        if moving && !sign.is_nonnegative() && !sign.is_nonpositive() {
            let unit = ratio.abs();
            let (n, d) = unit.small().unwrap_or((1, 1));
            let mut a = self.arena.scale(ea, &Rational::integer(n));
            let mut b = self.arena.scale(eb, &Rational::integer(d));
            if ca.is_negative() {
                a = self.arena.neg(a);
            }
            if cb.is_negative() {
                b = self.arena.neg(b);
            }
            out.push(Extra { expr: self.arena.call(Function::Atan2, &[a, b]), rate });
        } else {
            let q = self.arena.div(ea, eb);
            let q = self.arena.scale(q, &ratio);
            out.push(Extra { expr: self.arena.call(Function::Atan, &[q]), rate });
        }
        Ok(())
    }

    /// Of a factor a y² + b y + c of a denominator, for y a generator or a power of one.
    fn of_quadratic(&mut self, p: &Poly, out: &mut Vec<Extra>) -> Res<()> {
        // The variable declared last comes first, so that x² + y² gives atan2(y, x).
        for k in (0..self.generators.len()).rev() {
            let n = p.degree(k) / 2;
            if self.is_constant(k) || n < 1 || p.degree(k) % 2 != 0 || self.generators[k].rate.is_none() {
                continue;
            }
            let all = p.coefficients(k);
            let gaps = (0..all.len()).any(|j| j % n as usize != 0 && !all[j].is_zero());
            if gaps {
                continue;
            }
            let parts: Vec<Poly> = all.into_iter().step_by(n as usize).collect();
            let y = self.reduce(Poly::monomial(power_of(k, n), Rational::ONE))?;
            let disc = self.discriminant(&parts)?;
            let line = self.mul_poly(&parts[2].scale(&two()), &y)?.add(&parts[1]);
            match self.root_of(&disc)? {
                Root::OfNegative(s) => {
                    // A² + S² = 4 a p.
                    let squares = self.mul_poly(&parts[2], p)?.scale(&Rational::integer(4));
                    return self.inverse_tangent(&Frac::of(line), &s, &Frac::of(squares), out);
                }
                Root::Of(s) => {
                    // A² − S² = 4 a p.
                    let squares = self.mul_poly(&parts[2], p)?.scale(&Rational::integer(4));
                    return self.log_of_quotient(&Frac::of(line), &s, &Frac::of(squares), out);
                }
                Root::Unknown => {}
            }
        }
        Ok(())
    }

    /// Of a factor a + b cos φ + d sin φ with constant a, b, d.
    fn of_turning(&mut self, factor: usize, out: &mut Vec<Extra>) -> Res<()> {
        let p = self.factors[factor].poly.clone();
        for pair in self.circular.clone().iter().flatten() {
            let (s, c) = (pair.first, pair.second);
            if p.degree(s).max(p.degree(c)) != 1
                || !p.variables().iter().all(|&k| k == s || k == c || self.is_constant(k))
            {
                continue;
            }
            let b = p.derivative(c);
            let d = p.derivative(s);
            if b.has(s) || d.has(c) {
                continue;
            }
            let (sv, cv) = (Poly::variable(s), Poly::variable(c));
            let turning = b.mul(&cv, self.budget)?.add(&d.mul(&sv, self.budget)?);
            let a = p.sub(&turning);
            let squares = [self.mul_poly(&a, &a)?, self.mul_poly(&b, &b)?, self.mul_poly(&d, &d)?];
            let under = squares[0].sub(&squares[1]).sub(&squares[2]);
            let mut den = vec![0; factor + 1];
            den[factor] = 1;
            let over_p = Frac { num: Poly::one(), den };
            let share = self.mul(&pair.rate, &over_p)?;
            if under.is_zero() {
                // tan of half the angle, for a = b.
                continue;
            }
            match self.root_of(&under)? {
                Root::Of(mut r) => {
                    // atan2(b sin − d cos, a + R + b cos + d sin) has the derivative (1 − R/p) φ̇/2.
                    let sign = self.sign(&a)?;
                    let root_sign = {
                        let e = self.write(&r)?;
                        (self.signs)(self.arena, e, self.budget)
                    };
                    if sign.is_negative() != root_sign.is_negative() {
                        r = r.neg();
                    }
                    let y = b.mul(&sv, self.budget)?.sub(&d.mul(&cv, self.budget)?);
                    let x = self.add(&Frac::of(p.clone()), &r)?;
                    let drag = self.mul(&share, &r)?;
                    let rate = self.sub(&pair.rate, &drag)?.scale(&Rational::HALF);
                    let (y, x) = (self.write_poly(&y)?, self.write(&x)?);
                    let expr = if sign.is_positive() || sign.is_negative() {
                        let q = self.arena.div(y, x);
                        self.arena.call(Function::Atan, &[q])
                    } else {
                        self.arena.call(Function::Atan2, &[y, x])
                    };
                    out.push(Extra { expr, rate });
                }
                Root::OfNegative(r) if d.is_zero() => {
                    // log|(b + a cos + R sin)/p| has the derivative R φ̇/p.
                    let ac = a.mul(&cv, self.budget)?;
                    let rs = self.mul(&r, &Frac::of(sv))?;
                    let top = self.add(&Frac::of(b.add(&ac)), &rs)?;
                    let (top, down) = (self.write(&top)?, self.write_poly(&p)?);
                    let e = self.arena.div(top, down);
                    let expr = self.log_of(e);
                    let rate = self.mul(&share, &r)?;
                    out.push(Extra { expr, rate });
                }
                _ => {}
            }
        }
        Ok(())
    }

    /// Of √(a y² + b y + c), for y a generator, or a linear factor beside the root.
    fn of_root(
        &mut self,
        g: usize,
        low: &super::polynomial::Monomial,
        present: &[usize],
        out: &mut Vec<Extra>,
    ) -> Res<()> {
        let Some((2, square)) = self.generators[g].relation.clone() else { return Ok(()) };
        // Without negative powers: r² x^(2n) has none.
        let least = square.lowest();
        let mut lift = vec![0i16; least.len()];
        for (k, &e) in least.iter().enumerate() {
            if e < 0 {
                lift[k] = (1 - e) / 2;
            }
        }
        let lifted: super::polynomial::Monomial = super::polynomial::trim(lift.into());
        let square = square.shift(&super::polynomial::times(&lifted, &lifted, 1), &Rational::ONE);
        let r = Frac::of(Poly::variable(g).shift(&lifted, &Rational::ONE));
        for k in (0..self.generators.len()).rev() {
            if self.is_constant(k) || !(1..=2).contains(&square.degree(k)) || self.generators[k].relation.is_some() {
                continue;
            }
            if self.generators[k].rate.is_none() {
                continue;
            }
            let mut parts = square.coefficients(k);
            parts.resize(3, Poly::zero());
            let y = Frac::of(Poly::variable(k));
            self.outer_root(&parts, &y, &r, out)?;
            if exponent(low, k) < 0 || lifted.get(k).is_some_and(|&e| e > 0) {
                self.inner_root(&parts, &y, &r, out)?;
            }
            for &f in present {
                let p = self.factors[f].poly.clone();
                if p.degree(k) != 1 {
                    continue;
                }
                let line = p.coefficients(k);
                if !self.is_constant_poly(&line[0]) || !self.is_constant_poly(&line[1]) {
                    continue;
                }
                // With y = f₁ x + f₀: f₁² (a x² + b x + c) = a y² + (b f₁ − 2 a f₀) y + a f₀² − b f₀ f₁ + c f₁².
                let (f0, f1) = (line[0].clone(), line[1].clone());
                let af0 = self.mul_poly(&parts[2], &f0)?;
                let bf1 = self.mul_poly(&parts[1], &f1)?;
                let first = bf1.plus(&af0, &Rational::integer(-2));
                let gap = af0.sub(&bf1);
                let gap = self.mul_poly(&gap, &f0)?;
                let f12 = self.mul_poly(&f1, &f1)?;
                let last = self.mul_poly(&parts[0], &f12)?.add(&gap);
                let shifted = [last, first, parts[2].clone()];
                let r = self.mul(&Frac::of(f1), &r)?;
                self.inner_root(&shifted, &Frac::of(p), &r, out)?;
            }
        }
        Ok(())
    }

    /// Of a factor r² ± S² for a root r: atan(r/S), log|(r − S)/(r + S)|.
    fn of_root_below(&mut self, g: usize, factor: usize, out: &mut Vec<Extra>) -> Res<()> {
        let Some((2, square)) = self.generators[g].relation.clone() else { return Ok(()) };
        let p = self.factors[factor].poly.clone();
        let rest = p.sub(&square);
        let r = Frac::of(Poly::variable(g));
        match self.root_of(&rest)? {
            Root::Of(s) => self.inverse_tangent(&r, &s, &Frac::of(p), out),
            Root::OfNegative(s) => self.log_of_quotient(&r, &s, &Frac::of(p), out),
            Root::Unknown => Ok(()),
        }
    }

    /// log|(a − b)/(a + b)|; its derivative is 2 (b Da − a Db)/(a² − b²), with a² − b² given.
    fn log_of_quotient(&mut self, a: &Frac, b: &Frac, squares: &Frac, out: &mut Vec<Extra>) -> Res<()> {
        let (da, db) = (self.rate(a)?, self.rate(b)?);
        let (x, y) = (self.mul(b, &da)?, self.mul(a, &db)?);
        let over = self.sub(&x, &y)?.scale(&two());
        let inverse = self.invert(squares)?;
        let rate = self.mul(&over, &inverse)?;
        let rate = self.cancel(rate)?;
        let (down, up) = (self.sub(a, b)?, self.add(a, b)?);
        let (down, up) = (self.write(&down)?, self.write(&up)?);
        let e = self.arena.div(down, up);
        let expr = self.log_of(e);
        out.push(Extra { expr, rate });
        Ok(())
    }

    /// ∫ dy/√(a y² + b y + c).
    fn outer_root(&mut self, parts: &[Poly], y: &Frac, r: &Frac, out: &mut Vec<Extra>) -> Res<()> {
        let (a, b) = (&parts[2], &parts[1]);
        let disc = self.discriminant(parts)?;
        if a.is_zero() || disc.is_zero() {
            return Ok(());
        }
        let line = self.mul(&Frac::of(a.scale(&two())), y)?;
        let line = self.add(&line, &Frac::of(b.clone()))?;
        let inverse = self.invert(&Frac::of(disc.clone()))?;
        match self.root_of(a)? {
            Root::Of(w) => {
                let second = self.mul(&w, r)?.scale(&two());
                let rate = self.conjugate_rate(&line, &second, &inverse)?;
                let whole = self.add(&line, &second)?;
                let e = self.without_constants(&whole)?;
                // Where the quadratic has no real zero the root is the larger one.
                let e_w = self.write(&w)?;
                let upper = (self.signs)(self.arena, e_w, self.budget).is_positive();
                let positive = upper && self.sign(&disc)?.is_negative();
                let expr = if positive { self.arena.call(Function::Log, &[e]) } else { self.log_of(e) };
                out.push(Extra { expr, rate });
            }
            Root::OfNegative(w) => {
                let second = self.mul(&w, r)?.scale(&two());
                let minus = line.neg();
                // asin(−A/S) where S² is the discriminant and S is known to be positive.
                if let Root::Of(s) = self.root_of(&disc)? {
                    let e = self.write(&s)?;
                    let sign = (self.signs)(self.arena, e, self.budget);
                    if sign.is_positive() || sign.is_negative() {
                        let (n, d) = (self.write(&minus)?, if sign.is_positive() { e } else { self.arena.neg(e) });
                        let q = self.arena.div(n, d);
                        let mut sink = Vec::new();
                        self.inverse_tangent(&minus, &second, &Frac::of(disc), &mut sink)?;
                        let expr = self.arena.call(Function::Asin, &[q]);
                        out.extend(sink.into_iter().map(|x| Extra { expr, rate: x.rate }));
                        return Ok(());
                    }
                }
                self.inverse_tangent(&minus, &second, &Frac::of(disc), out)?;
            }
            Root::Unknown => {}
        }
        Ok(())
    }

    /// ∫ dy/(y √(a y² + b y + c)).
    fn inner_root(&mut self, parts: &[Poly], y: &Frac, r: &Frac, out: &mut Vec<Extra>) -> Res<()> {
        let (b, c) = (&parts[1], &parts[0]);
        let disc = self.discriminant(parts)?;
        if c.is_zero() || disc.is_zero() {
            return Ok(());
        }
        let line = self.mul(&Frac::of(b.clone()), y)?;
        let line = self.add(&line, &Frac::of(c.scale(&two())))?;
        let y2 = self.mul(y, y)?;
        let squares = self.mul(&y2, &Frac::of(disc))?;
        match self.root_of(c)? {
            Root::Of(w) => {
                let second = self.mul(&w, r)?.scale(&two());
                let inverse = self.invert(&squares)?;
                let rate = self.conjugate_rate(&line, &second, &inverse)?;
                let (dy, over) = (self.rate(y)?, self.invert(y)?);
                let minus = self.mul(&dy, &over)?;
                let rate = self.sub(&rate, &minus)?;
                let rate = self.cancel(rate)?;
                let whole = self.add(&line, &second)?;
                let (e, y) = (self.without_constants(&whole)?, self.write(y)?);
                let e = self.arena.div(e, y);
                out.push(Extra { expr: self.log_of(e), rate });
            }
            Root::OfNegative(w) => {
                let second = self.mul(&w, r)?.scale(&two());
                self.inverse_tangent(&line, &second, &squares, out)?;
            }
            Root::Unknown => {}
        }
        Ok(())
    }

    /// Without a number and powers of constants as factors, which a logarithm has no use for.
    fn without_constants(&mut self, f: &Frac) -> Res<Expr> {
        let low = f.num.lowest();
        let constants = low.iter().enumerate().map(|(k, &e)| if self.is_constant(k) { -e } else { 0 }).collect();
        let num = f.num.shift(&super::polynomial::trim(constants), &Rational::ONE);
        let e = self.write(&Frac { num, den: f.den.clone() })?;
        // All signs are plus where the terms are of one sign.
        let (c, e) = content(self.arena, e);
        let minus = self.arena.summands(e).iter().filter(|t| t.1.is_negative()).count();
        Ok(if c.is_negative() && minus > 0 { self.arena.neg(e) } else { e })
    }

    /// D log(a + b) = D(a + b) (a − b)/(a² − b²).
    fn conjugate_rate(&mut self, a: &Frac, b: &Frac, inverse: &Frac) -> Res<Frac> {
        let (sum, gap) = (self.add(a, b)?, self.sub(a, b)?);
        let d = self.rate(&sum)?;
        let over = self.mul(&d, &gap)?;
        let rate = self.mul(&over, inverse)?;
        self.cancel(rate)
    }
}

/// e = number · primitive.
fn content(arena: &mut Arena, e: Expr) -> (Rational, Expr) {
    let mut content = Rational::ZERO;
    for (_, c) in arena.summands(e) {
        content = if content.is_zero() { c.abs() } else { content.content(&c) };
    }
    if arena.summands(e).first().is_some_and(|t| t.1.is_negative()) {
        content = content.neg();
    }
    match content.recip() {
        Some(r) => (content, arena.scale(e, &r)),
        None => (Rational::ONE, e),
    }
}
