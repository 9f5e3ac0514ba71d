//! Series of Bessel functions for cylinders that cool by surface convection (Carslaw & Jaeger, *Conduction of Heat in
//! Solids*, chapter 7).
//!
//! Temperatures are shares of the first difference to the air, radii in metres, `k` over films in metres: `h/k` [1/m].

use libm::{j0, j1, y0, y1};

/// A zero of `f` between two arguments of opposite sign, to the last digit.
fn root(f: &dyn Fn(f64) -> f64, mut low: f64, mut high: f64) -> f64 {
    let sign = f(low).signum();
    loop {
        let middle = 0.5 * (low + high);
        if middle <= low || middle >= high {
            return middle;
        }
        if f(middle).signum() == sign { low = middle } else { high = middle }
    }
}

/// The first `count` positive zeros of `f`, found by a scan much finer than their spacing of about `spacing`.
fn roots(f: &dyn Fn(f64) -> f64, spacing: f64, count: usize) -> Vec<f64> {
    let step = spacing / 200.0;
    let mut found = Vec::with_capacity(count);
    let mut at = 1e-6 * spacing;
    while found.len() < count {
        let next = at + step;
        if f(at).signum() != f(next).signum() {
            found.push(root(f, at, next));
        }
        at = next;
    }
    found
}

/// A solid cylinder of radius `R`: `zeta J1(zeta) = Bi J0(zeta)`, `C = 2 J1 / (zeta (J0^2 + J1^2))`.
pub struct Solid {
    /// `(zeta, C)` of every term.
    pub terms: Vec<(f64, f64)>,
}

impl Solid {
    /// With `Bi = h R / k`; infinite for a held surface.
    pub fn new(bi: f64, count: usize) -> Self {
        let condition = |zeta: f64| if bi.is_finite() { zeta * j1(zeta) - bi * j0(zeta) } else { j0(zeta) };
        let terms = roots(&condition, std::f64::consts::PI, count)
            .into_iter()
            .map(|zeta| (zeta, 2.0 * j1(zeta) / (zeta * (j0(zeta).powi(2) + j1(zeta).powi(2)))))
            .collect();
        Solid { terms }
    }

    /// Share left at `r / R` after `Fo = alpha t / R^2`.
    pub fn at(&self, r: f64, fo: f64) -> f64 {
        self.terms.iter().map(|&(zeta, c)| c * j0(zeta * r) * (-zeta * zeta * fo).exp()).sum()
    }
}

/// A hollow cylinder between `a` and `b` with films on both surfaces.
///
/// `u = P_Y J0(beta r) - P_J Y0(beta r)`, `P_J = beta J1(beta a) + H_a J0(beta a)` and the same with Y, makes
/// `u' = H_a u` at `a`; `u' = -H_b u` at `b` gives the roots. With `v = P_Y J1 - P_J Y1`, `int u r dr = r v / beta` and
/// `int u^2 r dr = r^2 (u^2 + v^2) / 2`.
pub struct Hollow {
    terms: Vec<Term>,
}

struct Term {
    beta: f64,
    p: (f64, f64),
    c: f64,
}

impl Hollow {
    /// With `H = h / k` [1/m] at both surfaces; 0 for an insulated one.
    pub fn new(a: f64, b: f64, h_a: f64, h_b: f64, count: usize) -> Self {
        let p = |beta: f64| {
            let x = beta * a;
            (beta * j1(x) + h_a * j0(x), beta * y1(x) + h_a * y0(x))
        };
        let u = |beta: f64, r: f64| p(beta).1 * j0(beta * r) - p(beta).0 * y0(beta * r);
        let v = |beta: f64, r: f64| p(beta).1 * j1(beta * r) - p(beta).0 * y1(beta * r);
        let condition = |beta: f64| h_b * u(beta, b) - beta * v(beta, b);
        let terms = roots(&condition, std::f64::consts::PI / (b - a), count)
            .into_iter()
            .map(|beta| {
                let mean = (b * v(beta, b) - a * v(beta, a)) / beta;
                let norm = |r: f64| 0.5 * r * r * (u(beta, r).powi(2) + v(beta, r).powi(2));
                Term { beta, p: p(beta), c: mean / (norm(b) - norm(a)) }
            })
            .collect();
        Hollow { terms }
    }

    /// Share left at radius `r` [m] after `alpha t` [m2].
    pub fn at(&self, r: f64, alpha_t: f64) -> f64 {
        let term = |term: &Term| {
            let x = term.beta * r;
            term.c * (term.p.1 * j0(x) - term.p.0 * y0(x)) * (-term.beta * term.beta * alpha_t).exp()
        };
        self.terms.iter().map(term).sum()
    }
}
