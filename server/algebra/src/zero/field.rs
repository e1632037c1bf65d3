//! Finite fields with p = 2⁶² − c elements and their quadratic extension by i.
//!
//! All primes satisfy p ≡ −1 mod 20160 = 2⁶·3²·5·7. Therefore −1 is no square; 2, 3, 5 and 7 are; the multiplicative
//! group has exactly one root of every order 3, 5, 7; and the group of norm one, of order p + 1, has roots of unity
//! of order 20160, which are the values of e^{iπr}. The Legendre symbol plays the part of the sign: of the two roots
//! of a square exactly one is a square itself, and that one is the positive root.

/// The order of the roots of unity that every field has in its group of norm one.
pub(crate) const TURN: u64 = 20160;

const BITS: u32 = 62;
const MASK: u64 = (1 << BITS) - 1;

/// The first two primes. Beyond the conditions above, the primes up to 47 and 1 + √3 are squares, and the primes from
/// 11 to 47 divide neither p − 1 nor p + 1, so that such denominators divide exactly.
pub(crate) const FIRST: [u64; 2] = [755_532_545, 2_650_814_465];

/// An element a + b i.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub(crate) struct Element {
    /// The real part.
    pub re: u64,
    /// The imaginary part.
    pub im: u64,
}

impl Element {
    /// Zero.
    pub const ZERO: Element = Element { re: 0, im: 0 };
    /// One.
    pub const ONE: Element = Element { re: 1, im: 0 };
    /// i.
    pub const I: Element = Element { re: 0, im: 1 };

    /// An element of the prime field.
    pub fn real(re: u64) -> Element {
        Element { re, im: 0 }
    }

    /// Whether it is zero.
    pub fn is_zero(self) -> bool {
        self.re == 0 && self.im == 0
    }

    /// Whether it lies in the prime field.
    pub fn is_real(self) -> bool {
        self.im == 0
    }
}

/// The field of p = 2⁶² − c elements.
#[derive(Clone, Debug)]
pub(crate) struct Field {
    /// The prime.
    pub p: u64,
    c: u64,
    /// e^{2πi/20160}, consistent with the positive roots: cos 45° = √2/2, cos 30° = √3/2, sin 36° = √(10 − 2√5)/4.
    unit: Element,
    inverses: Vec<u64>,
}

impl Field {
    /// The field of the prime 2⁶² − c, which must satisfy the conditions of this module.
    pub fn new(c: u64) -> Field {
        let mut f = Field { p: (1 << BITS) - c, c, unit: Element::ONE, inverses: Vec::new() };
        // 1/n = −⌊p/n⌋ / (p mod n): each from a smaller one.
        f.inverses = vec![0, 1];
        for n in 2..64 {
            let smaller = f.inverses[(f.p % n) as usize];
            f.inverses.push(f.neg(f.mul(f.p / n, smaller)));
        }
        f.unit = f.root_of_unity();
        f
    }

    #[inline]
    fn reduce(&self, mut t: u128) -> u64 {
        while t >> BITS != 0 {
            t = (t >> BITS) * self.c as u128 + (t as u64 & MASK) as u128;
        }
        let r = t as u64;
        if r >= self.p { r - self.p } else { r }
    }

    /// The residue of a word.
    pub fn residue(&self, x: u64) -> u64 {
        self.reduce(x as u128)
    }

    #[inline]
    pub fn add(&self, a: u64, b: u64) -> u64 {
        let s = a + b;
        if s >= self.p { s - self.p } else { s }
    }

    #[inline]
    pub fn sub(&self, a: u64, b: u64) -> u64 {
        if a >= b { a - b } else { a + self.p - b }
    }

    #[inline]
    pub fn neg(&self, a: u64) -> u64 {
        if a == 0 { 0 } else { self.p - a }
    }

    #[inline]
    pub fn mul(&self, a: u64, b: u64) -> u64 {
        self.reduce(a as u128 * b as u128)
    }

    pub fn pow(&self, mut a: u64, mut n: u64) -> u64 {
        let mut r = 1;
        while n > 0 {
            if n & 1 == 1 {
                r = self.mul(r, a);
            }
            a = self.mul(a, a);
            n >>= 1;
        }
        r
    }

    /// The inverse; 0 for 0.
    pub fn inv(&self, a: u64) -> u64 {
        match self.inverses.get(a as usize) {
            Some(&r) => r,
            None => self.pow(a, self.p - 2),
        }
    }

    /// The Legendre symbol, which acts as the sign: −1, 0, 1.
    pub fn chi(&self, a: u64) -> i32 {
        // The binary algorithm of Jacobi symbols is several times faster than a power.
        let (mut a, mut n, mut s) = (a, self.p, 1);
        if a == 0 {
            return 0;
        }
        while a != 0 {
            let k = a.trailing_zeros();
            a >>= k;
            if k & 1 == 1 && matches!(n & 7, 3 | 5) {
                s = -s;
            }
            if a < n {
                if a & n & 3 == 3 {
                    s = -s;
                }
                std::mem::swap(&mut a, &mut n);
            }
            a -= n;
        }
        if n == 1 { s } else { 0 }
    }

    /// The positive root of a square; i times the positive root of −a where a is no square.
    pub fn sqrt(&self, a: u64) -> Element {
        let r = self.pow(a, (self.p + 1) / 4);
        if self.mul(r, r) == a { Element { re: r, im: 0 } } else { Element { re: 0, im: r } }
    }

    #[inline]
    pub fn add2(&self, a: Element, b: Element) -> Element {
        Element { re: self.add(a.re, b.re), im: if a.im | b.im == 0 { 0 } else { self.add(a.im, b.im) } }
    }

    pub fn sub2(&self, a: Element, b: Element) -> Element {
        Element { re: self.sub(a.re, b.re), im: self.sub(a.im, b.im) }
    }

    pub fn neg2(&self, a: Element) -> Element {
        Element { re: self.neg(a.re), im: self.neg(a.im) }
    }

    #[inline]
    pub fn mul2(&self, a: Element, b: Element) -> Element {
        if a.im | b.im == 0 {
            return Element { re: self.mul(a.re, b.re), im: 0 };
        }
        Element {
            re: self.sub(self.mul(a.re, b.re), self.mul(a.im, b.im)),
            im: self.add(self.mul(a.re, b.im), self.mul(a.im, b.re)),
        }
    }

    pub fn scale2(&self, a: Element, k: u64) -> Element {
        Element { re: self.mul(a.re, k), im: if a.im == 0 { 0 } else { self.mul(a.im, k) } }
    }

    pub fn pow2(&self, mut a: Element, mut n: u64) -> Element {
        if a.is_real() {
            return Element::real(self.pow(a.re, n));
        }
        let mut r = Element::ONE;
        while n > 0 {
            if n & 1 == 1 {
                r = self.mul2(r, a);
            }
            a = self.mul2(a, a);
            n >>= 1;
        }
        r
    }

    /// The inverse; zero for zero.
    pub fn inv2(&self, a: Element) -> Element {
        if a.is_real() {
            return Element::real(self.inv(a.re));
        }
        let n = self.inv(self.add(self.mul(a.re, a.re), self.mul(a.im, a.im)));
        Element { re: self.mul(a.re, n), im: self.neg(self.mul(a.im, n)) }
    }

    /// The element of norm one (1 + i u)² / (1 + u²).
    pub fn on_circle(&self, u: u64) -> Element {
        let u2 = self.mul(u, u);
        let n = self.inv(self.add(1, u2));
        Element { re: self.mul(self.sub(1, u2), n), im: self.mul(self.add(u, u), n) }
    }

    /// e^{2πi k/20160}.
    pub fn unit(&self, k: u64) -> Element {
        self.pow2(self.unit, k % TURN)
    }

    fn root_of_unity(&self) -> Element {
        let positive = |a: u64| self.chi(a) == 1;
        // Of order q^k exactly, for each prime power of 20160.
        let of_order = |order: u64, prime: u64| {
            (2u64..)
                .map(|u| self.pow2(self.on_circle(u), (self.p + 1) / order))
                .find(|&z| self.pow2(z, order / prime) != Element::ONE)
                .unwrap_or(Element::ONE)
        };
        // ζ₆₄ by halving the right angle, each time with a positive cosine: cos(α/2) = √((1 + cos α)/2).
        let half = self.inv(2);
        let mut two = Element::I;
        for _ in 0..4 {
            let c = self.sqrt(self.mul(self.add(1, two.re), half));
            let s = self.mul(self.mul(two.im, half), self.inv(c.re));
            two = Element { re: c.re, im: s };
        }
        // ζ₉ with ζ₃ = −1/2 + i √3/2.
        let mut nine = of_order(9, 3);
        if !positive(self.pow2(nine, 3).im) {
            nine = self.inv2(nine);
        }
        // ζ₅ = cos 72° + i sin 72° with 4 cos 72° + 1 = √5, and sin 72° positive.
        let mut five = of_order(5, 5);
        if !positive(self.add(self.mul(4, five.re), 1)) {
            five = self.mul2(five, five);
        }
        if !positive(five.im) {
            five = self.inv2(five);
        }
        // ζ₇ with 2 (sin 2α + sin 4α + sin 8α) = √7, α = π/7.
        let mut seven = of_order(7, 7);
        let sines = [1, 2, 4].iter().fold(0, |s, &k| self.add(s, self.pow2(seven, k).im));
        if !positive(sines) {
            seven = self.inv2(seven);
        }
        // 1/20160 = Σ u/q with u the inverse of 20160/q modulo q.
        let mut unit = Element::ONE;
        for (z, q) in [(two, 64u64), (nine, 9), (five, 5), (seven, 7)] {
            let m = TURN / q % q;
            let u = (1..q).find(|u| u * m % q == 1).unwrap_or(1);
            unit = self.mul2(unit, self.pow2(z, u));
        }
        unit
    }
}

/// a⁻¹ modulo m, where they have no common divisor.
pub(crate) fn inverse_modulo(a: u64, m: u64) -> Option<u64> {
    let (mut r0, mut r1) = (m as i128, (a % m) as i128);
    let (mut t0, mut t1) = (0i128, 1i128);
    while r1 != 0 {
        let q = r0 / r1;
        (r0, r1) = (r1, r0 - q * r1);
        (t0, t1) = (t1, t0 - q * t1);
    }
    (r0 == 1).then(|| t0.rem_euclid(m as i128) as u64)
}

/// a b modulo m for any modulus.
pub(crate) fn mul_modulo(a: u64, b: u64, m: u64) -> u64 {
    (a as u128 * b as u128 % m as u128) as u64
}

/// Whether n is prime: Miller–Rabin with the bases that decide every 64-bit number.
pub(crate) fn is_prime(n: u64) -> bool {
    const BASES: [u64; 12] = [2, 3, 5, 7, 11, 13, 17, 19, 23, 29, 31, 37];
    if n < 2 || BASES.iter().any(|b| n != *b && n.is_multiple_of(*b)) {
        return false;
    }
    if BASES.contains(&n) {
        return true;
    }
    let s = (n - 1).trailing_zeros();
    let d = (n - 1) >> s;
    let power = |mut a: u64, mut k: u64| {
        let mut r = 1;
        while k > 0 {
            if k & 1 == 1 {
                r = mul_modulo(r, a, n);
            }
            a = mul_modulo(a, a, n);
            k >>= 1;
        }
        r
    };
    BASES.iter().all(|&b| {
        let mut x = power(b, d);
        if x == 1 || x == n - 1 {
            return true;
        }
        for _ in 1..s {
            x = mul_modulo(x, x, n);
            if x == n - 1 {
                return true;
            }
        }
        false
    })
}

/// The c of the next prime 2⁶² − c with the conditions of this module, c from `start` (below 2⁴⁰) upwards.
pub(crate) fn next_prime(start: u64) -> u64 {
    // 2⁶² ≡ 4096 mod 20160; p ≡ −1 needs c ≡ 4097.
    let mut c = start - start % TURN + ((1u64 << BITS) % TURN + 1) % TURN;
    while !is_prime((1 << BITS) - c) {
        c += TURN;
    }
    c
}

#[cfg(test)]
mod tests {
    use super::*;

    fn check(f: &Field) {
        let p = f.p;
        assert!(is_prime(p));
        assert_eq!((p + 1) % TURN, 0);
        for q in [2, 3, 5, 7] {
            assert_eq!(f.chi(q), 1, "{q} is a square");
            let r = f.sqrt(q);
            assert!(r.is_real() && f.chi(r.re) == 1);
        }
        let (r2, r3, r5) = (f.sqrt(2).re, f.sqrt(3).re, f.sqrt(5).re);
        let cos = |turn: u64| f.unit(TURN / turn).re;
        let sin = |turn: u64| f.unit(TURN / turn).im;
        assert_eq!(f.add(cos(8), cos(8)), r2, "2 cos 45°");
        assert_eq!(f.add(cos(12), cos(12)), r3, "2 cos 30°");
        assert_eq!(f.sub(f.mul(4, cos(10)), 1), r5, "4 cos 36° - 1");
        assert_eq!(f.unit(TURN / 4), Element::I);
        assert_eq!(f.unit(TURN / 2), Element::real(p - 1));
        let nested = f.sqrt(f.sub(10, f.add(r5, r5)));
        assert_eq!(Element::real(f.mul(4, sin(10))), nested, "4 sin 36°");
        let nested = f.sqrt(f.add(2, r2));
        assert_eq!(Element::real(f.mul(2, cos(16))), nested, "2 cos 22.5°");
        let s = |k: u64| f.unit(TURN / 14 * k).im;
        assert_eq!(f.mul(8, f.mul(s(1), f.mul(s(2), s(3)))), f.sqrt(7).re, "8 sin 180°/7 …");
        let a = 123_456_789_012_345_678 % p;
        assert_eq!(f.mul(a, f.inv(a)), 1);
        assert_eq!(mul_modulo(a, a, p), f.mul(a, a));
        assert_eq!(f.chi(a) == 1, f.pow(a, (p - 1) / 2) == 1);
        let z = f.on_circle(a);
        assert_eq!(f.pow2(z, p + 1), Element::ONE);
        assert_eq!(f.mul2(z, f.inv2(z)), Element::ONE);
    }

    #[test]
    fn the_first_primes() {
        for c in FIRST {
            let f = Field::new(c);
            check(&f);
            for q in [11, 13, 17, 19, 23, 29, 31, 37, 41, 43, 47] {
                assert_eq!(f.chi(q), 1, "{q} is a square");
                assert!(inverse_modulo(q, f.p + 1).is_some() && inverse_modulo(q, f.p - 1).is_some());
            }
            assert_eq!(f.chi(f.add(1, f.sqrt(3).re)), 1);
        }
    }

    #[test]
    fn further_primes() {
        for start in [1u64 << 20, 1 << 33, (1 << 40) - 1] {
            check(&Field::new(next_prime(start)));
        }
    }
}
