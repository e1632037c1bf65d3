//! Interval arithmetic with outward rounding: the enclosure of a real value is a proof.
//!
//! Sums, products and quotients are off by at most half a unit in the last place, so one step outward encloses them.
//! The elementary functions of the platform are taken to be right within eight units in the last place.

use super::signs::Sign;
use crate::arena::{Arena, Expr, Node};
use crate::function::Function;
use crate::rational::Rational;
use hashbrown::HashMap;

/// A closed interval; without bounds (not a number) where the value does not exist or is not known to exist.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(crate) struct Interval {
    /// The lower end.
    pub lo: f64,
    /// The upper end.
    pub hi: f64,
}

fn down(x: f64) -> f64 {
    x.next_down()
}

fn up(x: f64) -> f64 {
    x.next_up()
}

/// Eight units in the last place outward, and never less than the smallest steps around zero.
fn widen(lo: f64, hi: f64) -> Interval {
    let slack = 8.0 * f64::EPSILON;
    let (l, h) = (lo - lo.abs() * slack, hi + hi.abs() * slack);
    Interval { lo: down(l), hi: up(h) }.checked()
}

impl Interval {
    /// No value.
    pub const NONE: Interval = Interval { lo: f64::NAN, hi: f64::NAN };

    /// A number that is exact as a double.
    pub fn exactly(x: f64) -> Interval {
        Interval { lo: x, hi: x }
    }

    /// The enclosure of a rational number.
    pub fn of(r: &Rational) -> Interval {
        if let Some((n, d)) = r.small()
            && n.unsigned_abs() < 1 << 53
            && d < 1 << 53
        {
            let q = n as f64 / d as f64;
            return if d == 1 { Interval::exactly(q) } else { Interval { lo: down(q), hi: up(q) } };
        }
        let q = r.to_f64();
        widen(q, q)
    }

    fn checked(self) -> Interval {
        if self.lo <= self.hi { self } else { Interval::NONE }
    }

    /// Whether there is an enclosure.
    pub fn exists(self) -> bool {
        self.lo <= self.hi
    }

    /// What the enclosure proves of the sign.
    pub fn sign(self) -> Sign {
        if !self.exists() {
            Sign::Unknown
        } else if self.lo > 0.0 {
            Sign::Positive
        } else if self.hi < 0.0 {
            Sign::Negative
        } else if self.lo == 0.0 && self.hi == 0.0 {
            Sign::Zero
        } else if self.lo == 0.0 {
            Sign::NonNegative
        } else if self.hi == 0.0 {
            Sign::NonPositive
        } else {
            Sign::Unknown
        }
    }

    /// Whether zero is certainly not inside, by bounds that are numbers.
    pub fn excludes_zero(self) -> bool {
        self.lo.is_finite() && self.hi.is_finite() && (self.lo > 0.0 || self.hi < 0.0)
    }

    pub fn plus(self, o: Interval) -> Interval {
        if self.lo == 0.0 && self.hi == 0.0 {
            return o;
        }
        if o.lo == 0.0 && o.hi == 0.0 {
            return self;
        }
        Interval { lo: down(self.lo + o.lo), hi: up(self.hi + o.hi) }.checked()
    }

    pub fn negate(self) -> Interval {
        Interval { lo: -self.hi, hi: -self.lo }
    }

    pub fn times(self, o: Interval) -> Interval {
        if !self.exists() || !o.exists() {
            return Interval::NONE;
        }
        let zero = |i: Interval| i.lo == 0.0 && i.hi == 0.0;
        if zero(self) || zero(o) {
            // Also for unbounded enclosures: the value behind them is a number.
            return Interval::exactly(0.0);
        }
        if o.lo == 1.0 && o.hi == 1.0 {
            return self;
        }
        let (mut lo, mut hi) = (f64::INFINITY, f64::NEG_INFINITY);
        for (x, y) in [(self.lo, o.lo), (self.lo, o.hi), (self.hi, o.lo), (self.hi, o.hi)] {
            let p = x * y;
            // 0 · ∞ at a corner is 0: the ends themselves are never taken.
            let p = if p.is_nan() { 0.0 } else { p };
            lo = lo.min(p);
            hi = hi.max(p);
        }
        Interval { lo: down(lo), hi: up(hi) }.checked()
    }

    pub fn recip(self) -> Interval {
        if self.lo > 0.0 || self.hi < 0.0 {
            Interval { lo: down(1.0 / self.hi), hi: up(1.0 / self.lo) }.checked()
        } else {
            Interval::NONE
        }
    }

    pub fn over(self, o: Interval) -> Interval {
        self.times(o.recip())
    }

    pub fn powi(self, n: i64) -> Interval {
        if n == 1 || !self.exists() {
            return self;
        }
        if n < 0 {
            // No zero inside is needed first, so that 0^−2 is not positive infinity.
            return self.recip().powi(n.checked_neg().unwrap_or(i64::MAX));
        }
        let base = if n % 2 == 0 { self.abs() } else { self };
        let (mut square, mut left, mut r) = (base, n, Interval::exactly(1.0));
        // Monotone on either side of zero: by ends, so that nothing is widened by dependence.
        if base.lo >= 0.0 {
            while left > 0 {
                if left & 1 == 1 {
                    r = r.times(square);
                }
                square = square.times(square);
                left >>= 1;
            }
            r.lo = r.lo.max(0.0);
            return r.checked();
        }
        if base.hi <= 0.0 {
            return base.negate().powi(n).negate();
        }
        let (a, b) = (Interval::exactly(-base.lo).powi(n), Interval::exactly(base.hi).powi(n));
        Interval { lo: -a.hi, hi: b.hi }.checked()
    }

    pub fn sqrt(self) -> Interval {
        if self.lo < 0.0 || !self.exists() {
            return Interval::NONE;
        }
        Interval { lo: down(self.lo.sqrt()).max(0.0), hi: up(self.hi.sqrt()) }
    }

    /// A rational power; roots of negative numbers do not exist.
    pub fn power(self, r: &Rational) -> Interval {
        if let Some(n) = r.to_i64() {
            return self.powi(n);
        }
        if let Some((n, 2)) = r.small() {
            return self.sqrt().powi(n);
        }
        if self.lo > 0.0 { Interval::of(r).times(self.log()).exp() } else { Interval::NONE }
    }

    pub fn abs(self) -> Interval {
        if self.lo >= 0.0 {
            self
        } else if self.hi <= 0.0 {
            self.negate()
        } else {
            Interval { lo: 0.0, hi: self.hi.max(-self.lo) }.checked()
        }
    }

    pub fn exp(self) -> Interval {
        let r = widen(self.lo.exp(), self.hi.exp());
        Interval { lo: r.lo.max(0.0), hi: r.hi }.checked()
    }

    pub fn log(self) -> Interval {
        if self.lo > 0.0 { widen(self.lo.ln(), self.hi.ln()) } else { Interval::NONE }
    }

    /// |sin'| ≤ 1: the middle's value give or take half the width.
    fn wave(self, f: fn(f64) -> f64) -> Interval {
        if !self.exists() || !self.lo.is_finite() || !self.hi.is_finite() {
            return if self.exists() { Interval { lo: -1.0, hi: 1.0 } } else { Interval::NONE };
        }
        let mid = self.lo + (self.hi - self.lo) / 2.0;
        let half = up(up(self.hi - self.lo) / 2.0 + mid.abs() * f64::EPSILON);
        let half = if self.lo == self.hi { 0.0 } else { half };
        let v = f(mid);
        let r = widen(down(v - half), up(v + half));
        Interval { lo: (r.lo - 1e-300).max(-1.0), hi: (r.hi + 1e-300).min(1.0) }.checked()
    }

    fn monotone(self, f: fn(f64) -> f64) -> Interval {
        if !self.exists() {
            return Interval::NONE;
        }
        let r = widen(f(self.lo), f(self.hi));
        if self.lo == 0.0 && self.hi == 0.0 && f(0.0) == 0.0 { Interval::exactly(0.0) } else { r }
    }

    /// A known function of one argument.
    pub fn call(f: Function, x: Interval) -> Interval {
        use Function::*;
        match f {
            Sin => x.wave(f64::sin),
            Cos => x.wave(f64::cos),
            Tan => x.wave(f64::sin).over(x.wave(f64::cos)),
            Asin | Acos if !(x.lo >= -1.0 && x.hi <= 1.0) => Interval::NONE,
            Asin => x.monotone(f64::asin),
            Acos => x.negate().monotone(|y| (-y).acos()),
            Atan => x.monotone(f64::atan),
            Sinh => x.monotone(f64::sinh),
            Tanh => x.monotone(f64::tanh),
            Cosh => {
                let a = x.abs();
                let r = widen(a.lo.cosh(), a.hi.cosh());
                Interval { lo: r.lo.max(1.0), hi: r.hi }.checked()
            }
            Exp => x.exp(),
            Log => x.log(),
            Abs => x.abs(),
            Sign => match x.sign() {
                self::Sign::Positive => Interval::exactly(1.0),
                self::Sign::Negative => Interval::exactly(-1.0),
                self::Sign::Zero => Interval::exactly(0.0),
                _ if x.exists() => Interval { lo: -1.0, hi: 1.0 },
                _ => Interval::NONE,
            },
            Atan2 | Min | Max => Interval::NONE,
        }
    }

    /// The angle of the point (x, y).
    pub fn atan2(y: Interval, x: Interval) -> Interval {
        let quarter = Interval { lo: down(std::f64::consts::FRAC_PI_2), hi: up(std::f64::consts::FRAC_PI_2) };
        let atan = |i: Interval| i.monotone(f64::atan);
        if x.lo > 0.0 {
            atan(y.over(x))
        } else if y.lo > 0.0 {
            quarter.plus(atan(x.over(y)).negate())
        } else if y.hi < 0.0 {
            quarter.negate().plus(atan(x.over(y)).negate())
        } else {
            Interval::NONE
        }
    }

    /// The smaller or the larger of two.
    pub fn extremum(self, o: Interval, largest: bool) -> Interval {
        if !self.exists() || !o.exists() {
            Interval::NONE
        } else if largest {
            Interval { lo: self.lo.max(o.lo), hi: self.hi.max(o.hi) }
        } else {
            Interval { lo: self.lo.min(o.lo), hi: self.hi.min(o.hi) }
        }
    }

    /// π.
    pub fn pi() -> Interval {
        Interval { lo: std::f64::consts::PI, hi: up(std::f64::consts::PI) }
    }
}

/// The value of a node from those of its children; atoms, unspecified functions and sums are the caller's.
pub(crate) fn combine(arena: &Arena, e: Expr, of: &mut dyn FnMut(Expr) -> Interval) -> Interval {
    match arena.node(e) {
        Node::Number(r) => Interval::of(r),
        Node::Pi => Interval::pi(),
        Node::Sum(k, terms) => {
            let mut s = Interval::of(k);
            for (x, c) in terms.iter() {
                s = s.plus(of(*x).times(Interval::of(c)));
            }
            s
        }
        Node::Product(list) => {
            let (mut num, mut den) = (Interval::exactly(1.0), Interval::exactly(1.0));
            for (b, r) in list.iter() {
                let b = of(*b);
                if r.is_negative() {
                    den = den.times(b.power(&r.neg()));
                } else {
                    num = num.times(b.power(r));
                }
            }
            if den == Interval::exactly(1.0) { num } else { num.over(den) }
        }
        Node::Power(b, x) => {
            let (b, x) = (of(*b), of(*x));
            if b.lo > 0.0 { x.times(b.log()).exp() } else { Interval::NONE }
        }
        Node::Call(Function::Atan2, args) => Interval::atan2(of(args[0]), of(args[1])),
        Node::Call(f @ (Function::Min | Function::Max), args) => {
            let mut r = of(args[0]);
            for x in &args[1..] {
                r = r.extremum(of(*x), *f == Function::Max);
            }
            r
        }
        Node::Call(f, args) => Interval::call(*f, of(args[0])),
        _ => Interval::NONE,
    }
}

/// The value of a constant node from those of its children.
pub(crate) fn constant(arena: &Arena, e: Expr, known: &HashMap<Expr, Interval>) -> Interval {
    combine(arena, e, &mut |x| match arena.node(x) {
        Node::Number(r) => Interval::of(r),
        Node::Pi => Interval::pi(),
        _ => known.get(&x).copied().unwrap_or(Interval::NONE),
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn known_enclosures() {
        let third = Interval::of(&Rational::new(1, 3).unwrap());
        assert!(third.lo < third.hi && third.times(Interval::exactly(3.0)).plus(Interval::exactly(-1.0)).lo <= 0.0);
        let s = Interval::call(Function::Sin, Interval::pi());
        assert!(s.lo <= 0.0 && s.hi >= 0.0 && s.hi - s.lo < 1e-14);
        assert!(!Interval { lo: -1.0, hi: 1.0 }.recip().exists());
        assert!(!Interval::exactly(-1.0).sqrt().exists());
        assert!(!Interval::exactly(f64::INFINITY).excludes_zero());
        assert!(!Interval::exactly(2.0).powi(1 << 40).excludes_zero());
        // (1/2)^(2⁶²) underflows, yet −1 plus it is enclosed away from zero.
        assert!(Interval::exactly(0.5).powi(1 << 62).plus(Interval::exactly(-1.0)).excludes_zero());
    }

    proptest! {
        /// The value at a point inside lies in the enclosure.
        #[test]
        fn enclosures_enclose(x in -20.0..20.0f64, w in 0.0..0.5f64, s in 0.0..1.0f64, n in -5i64..6) {
            let i = Interval { lo: x, hi: x + w };
            let y = x + w * s;
            let holds = |r: Interval, v: f64| !r.exists() || !v.is_finite() || r.lo <= v && v <= r.hi;
            for f in Function::ALL {
                let v = match f {
                    Function::Sin => y.sin(),
                    Function::Cos => y.cos(),
                    Function::Tan => y.tan(),
                    Function::Exp => y.exp(),
                    Function::Cosh => y.cosh(),
                    Function::Sinh => y.sinh(),
                    Function::Tanh => y.tanh(),
                    Function::Atan => y.atan(),
                    Function::Log => y.ln(),
                    Function::Abs => y.abs(),
                    _ => continue,
                };
                prop_assert!(holds(Interval::call(f, i), v), "{} of {y}", f.name());
            }
            prop_assert!(holds(i.powi(n), y.powi(n as i32)) || y.powi(n as i32).abs() > 1e5);
            prop_assert!(holds(i.sqrt(), y.sqrt()));
            prop_assert!(holds(Interval::atan2(i, Interval::exactly(s - 0.5)), y.atan2(s - 0.5)));
        }
    }
}
