//! Verdicts on whole models: chains of rods, the Kepler problem in the plane.

use super::super::Motion;
use super::*;

/// A Lagrangian with its coordinates.
struct Model {
    lab: Lab,
    q: Vec<Expr>,
    v: Vec<Expr>,
    a: Vec<Expr>,
    lagrangian: Expr,
}

impl Model {
    fn new(names: &[String]) -> Model {
        let mut lab = Lab::new();
        let s: Vec<_> = names.iter().map(|n| lab.arena.symbol(n, None, Role::Coordinate)).collect();
        let jets = |lab: &mut Lab, k: u16| s.iter().map(|s| lab.arena.jet(*s, k)).collect::<Vec<_>>();
        let (q, v, a) = (jets(&mut lab, 0), jets(&mut lab, 1), jets(&mut lab, 2));
        Model { lab, q, v, a, lagrangian: Arena::ZERO }
    }

    fn partial(&mut self, e: Expr, x: Expr) -> Expr {
        self.lab.arena.partial(e, x, &mut Budget::new(100_000_000)).unwrap()
    }

    /// M a = rhs from ∂L/∂q − d/dt ∂L/∂q̇ = 0.
    fn motion(&mut self) -> Motion {
        let mut motion = Motion::default();
        for i in 0..self.q.len() {
            let p = self.partial(self.lagrangian, self.v[i]);
            let row: Vec<Expr> = (0..self.q.len()).map(|j| self.partial(p, self.v[j])).collect();
            let mut rhs = self.partial(self.lagrangian, self.q[i]);
            for j in 0..self.q.len() {
                let d = self.partial(p, self.q[j]);
                let d = self.lab.arena.mul(d, self.v[j]);
                rhs = self.lab.arena.sub(rhs, d);
            }
            motion.mass.push(row);
            motion.rhs.push(rhs);
        }
        motion
    }

    /// Σ q̇ ∂L/∂q̇ − L.
    fn energy(&mut self) -> Expr {
        let mut h = self.lab.arena.neg(self.lagrangian);
        for i in 0..self.q.len() {
            let p = self.partial(self.lagrangian, self.v[i]);
            let pv = self.lab.arena.mul(p, self.v[i]);
            h = self.lab.arena.add(h, pv);
        }
        h
    }

    /// Whether a function of coordinates and velocities is constant along motions.
    fn conserved(&mut self, test: &mut ZeroTest, quantity: Expr, motion: &Motion) -> Verdict {
        let mut c0 = Arena::ZERO;
        let mut c = Vec::new();
        for i in 0..self.q.len() {
            let d = self.partial(quantity, self.q[i]);
            let d = self.lab.arena.mul(d, self.v[i]);
            c0 = self.lab.arena.add(c0, d);
            c.push(self.partial(quantity, self.v[i]));
        }
        test.rate_is_zero(&mut self.lab.arena, c0, &c, motion, &mut Budget::new(100_000_000))
    }
}

/// A chain of n rods with masses at the joints.
fn chain(n: usize) -> Model {
    let names: Vec<String> = (1..=n).map(|k| format!("θ{k}")).collect();
    let mut m = Model::new(&names);
    let g = m.lab.parameter("g");
    let (mut vx, mut vy, mut y) = (Arena::ZERO, Arena::ZERO, Arena::ZERO);
    let mut terms = Vec::new();
    for k in 0..n {
        let (l, mass) = (m.lab.parameter(&format!("l{k}")), m.lab.parameter(&format!("m{k}")));
        let (s, c) = (m.lab.call(Function::Sin, m.q[k]), m.lab.call(Function::Cos, m.q[k]));
        let a = &mut m.lab.arena;
        let (dx, dy, up) = (a.product(&[l, c, m.v[k]]), a.product(&[l, s, m.v[k]]), a.product(&[l, c]));
        vx = a.add(vx, dx);
        vy = a.add(vy, dy);
        y = a.sub(y, up);
        let (x2, y2) = (a.pow(vx, 2), a.pow(vy, 2));
        let v2 = a.add(x2, y2);
        let t = a.mul(mass, v2);
        let t = a.scale(t, &Rational::HALF);
        let u = a.product(&[mass, g, y]);
        terms.push(a.sub(t, u));
    }
    m.lagrangian = m.lab.arena.sum(&terms);
    m
}

#[test]
fn the_energy_of_a_chain_is_conserved() {
    let mut m = chain(4);
    let motion = m.motion();
    let h = m.energy();
    let mut test = ZeroTest::new(Assumptions::new());
    assert_eq!(m.conserved(&mut test, h, &motion), Verdict::Proved);
    let p = m.partial(m.lagrangian, m.v[0]);
    let v = m.conserved(&mut test, p, &motion);
    assert!(matches!(v, Verdict::Refuted(Some(_))), "{v:?}");
    // The residuals hold along the accelerations that are solved for.
    let e = m.partial(m.lagrangian, m.v[1]);
    let rate = m.lab.arena.total(e, &mut Budget::new(1_000_000)).unwrap();
    let force = m.partial(m.lagrangian, m.q[1]);
    let residual = m.lab.arena.sub(rate, force);
    let c: Vec<Expr> = (0..4).map(|j| m.partial(residual, m.a[j])).collect();
    let mut c0 = residual;
    for (c, a) in c.iter().zip(m.a.clone()) {
        let t = m.lab.arena.mul(*c, a);
        c0 = m.lab.arena.sub(c0, t);
    }
    let v = test.rate_is_zero(&mut m.lab.arena, c0, &c, &motion, &mut Budget::new(10_000_000));
    assert_eq!(v, Verdict::Proved);
}

#[test]
fn the_kepler_problem_in_cartesian_coordinates() {
    let mut m = Model::new(&["x".into(), "y".into()]);
    let (mass, k) = (m.lab.parameter("m"), m.lab.parameter("k"));
    let (q, v) = (m.q.clone(), m.v.clone());
    let a = &mut m.lab.arena;
    let (x2, y2, u2, w2) = (a.pow(q[0], 2), a.pow(q[1], 2), a.pow(v[0], 2), a.pow(v[1], 2));
    let (r2, s2) = (a.add(x2, y2), a.add(u2, w2));
    let t = a.mul(mass, s2);
    let t = a.scale(t, &Rational::HALF);
    let r = a.sqrt(r2);
    let u = a.div(k, r);
    m.lagrangian = a.add(t, u);
    let motion = m.motion();
    let h = m.energy();
    let mut test = ZeroTest::new(Assumptions::new());
    assert_eq!(m.conserved(&mut test, h, &motion), Verdict::Proved);
    // The Laplace–Runge–Lenz vector: y' (x y' − y x') m − k x/r.
    let a = &mut m.lab.arena;
    let (xw, yu) = (a.mul(q[0], v[1]), a.mul(q[1], v[0]));
    let l = a.sub(xw, yu);
    let first = a.product(&[mass, v[1], l]);
    let xr = a.div(q[0], r);
    let second = a.mul(k, xr);
    let (good, bad) = (a.sub(first, second), a.add(first, second));
    assert_eq!(m.conserved(&mut test, good, &motion), Verdict::Proved);
    assert!(matches!(m.conserved(&mut test, bad, &motion), Verdict::Refuted(Some(_))));
}

#[test]
fn many_distances() {
    // The energy of six bodies in the plane: fifteen roots.
    let n = 6;
    let names: Vec<String> = (0..n).flat_map(|k| [format!("x{k}"), format!("y{k}")]).collect();
    let mut m = Model::new(&names);
    let mut terms = Vec::new();
    let masses: Vec<Expr> = (0..n).map(|k| m.lab.parameter(&format!("m{k}"))).collect();
    for i in 0..n {
        let a = &mut m.lab.arena;
        let (u2, w2) = (a.pow(m.v[2 * i], 2), a.pow(m.v[2 * i + 1], 2));
        let s = a.add(u2, w2);
        let t = a.mul(masses[i], s);
        terms.push(a.scale(t, &Rational::HALF));
        for j in 0..i {
            let (dx, dy) = (a.sub(m.q[2 * i], m.q[2 * j]), a.sub(m.q[2 * i + 1], m.q[2 * j + 1]));
            let (dx2, dy2) = (a.pow(dx, 2), a.pow(dy, 2));
            let r2 = a.add(dx2, dy2);
            let r = a.sqrt(r2);
            let p = a.product(&[masses[i], masses[j]]);
            terms.push(a.div(p, r));
        }
    }
    m.lagrangian = m.lab.arena.sum(&terms);
    let motion = m.motion();
    let h = m.energy();
    let mut test = ZeroTest::new(Assumptions::new());
    assert_eq!(m.conserved(&mut test, h, &motion), Verdict::Proved);
    // The momentum of all together is conserved, that of one is not.
    let p: Vec<Expr> = (0..n).map(|i| m.partial(m.lagrangian, m.v[2 * i])).collect();
    let total = m.lab.arena.sum(&p);
    assert_eq!(m.conserved(&mut test, total, &motion), Verdict::Proved);
    assert!(m.conserved(&mut test, p[0], &motion).is_refuted());
}
