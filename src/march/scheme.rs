//! Implicit Runge-Kutta schemes: singly diagonal, explicit first stage, stiffly accurate, L-stable (ESDIRK).
//!
//! ```text
//!  Y_s = y_n + dt sum_{j<=s} a_sj F_j,   y_{n+1} = Y_last,   error = dt sum_j e_j F_j
//! ```
//!
//! Coefficients: C. A. Kennedy & M. H. Carpenter, Additive Runge-Kutta schemes for convection-diffusion-reaction equations,
//! Applied Numerical Mathematics 44 (2003), the implicit part of ARK3(2)4L\[2\]SA (from memory; the
//! tests below check every order condition up to the stated order, which fixes them as a scheme of that order).

/// Most stages of any scheme here.
pub(super) const MOST_STAGES: usize = 4;

/// One scheme.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Scheme {
    pub stages: usize,
    /// Order of the solution; the embedded one is one lower.
    pub order: i32,
    /// Diagonal coefficient of the implicit stages.
    pub gamma: f64,
    /// The stage whose state serves dense output, well inside the step.
    pub middle: usize,
    /// Times of the stages.
    pub c: [f64; MOST_STAGES],
    /// Coefficients below the diagonal; the last row with `gamma` is the solution's weights.
    pub a: [[f64; MOST_STAGES]; MOST_STAGES],
    /// Weights of the embedded solution.
    pub embedded: [f64; MOST_STAGES],
}

impl Scheme {
    /// Weight of stage `j` in the solution.
    pub fn b(&self, j: usize) -> f64 {
        if j + 1 == self.stages { self.gamma } else { self.a[self.stages - 1][j] }
    }
}

const G3: f64 = 1_767_732_205_903.0 / 4_055_673_282_236.0;

/// Third order, three implicit stages.
pub(super) const THIRD: Scheme = Scheme {
    stages: 4,
    order: 3,
    gamma: G3,
    middle: 2,
    c: [0.0, 2.0 * G3, 0.6, 1.0],
    a: [
        [0.0; MOST_STAGES],
        [G3, 0.0, 0.0, 0.0],
        [2_746_238_789_719.0 / 10_658_868_560_708.0, -640_167_445_237.0 / 6_845_629_431_997.0, 0.0, 0.0],
        [
            1_471_266_399_579.0 / 7_840_856_788_654.0,
            -4_482_444_167_858.0 / 7_529_755_066_697.0,
            11_266_239_266_428.0 / 11_593_286_722_821.0,
            0.0,
        ],
    ],
    embedded: [
        2_756_255_671_327.0 / 12_835_298_489_170.0,
        -10_771_552_573_575.0 / 22_201_958_757_719.0,
        9_247_589_265_047.0 / 10_645_013_368_117.0,
        2_193_209_047_091.0 / 5_459_859_503_100.0,
    ],
};

#[cfg(test)]
mod tests {
    use super::*;

    fn full(scheme: &Scheme) -> [[f64; MOST_STAGES]; MOST_STAGES] {
        let mut a = scheme.a;
        for (stage, row) in a.iter_mut().enumerate().take(scheme.stages).skip(1) {
            row[stage] = scheme.gamma;
        }
        a
    }

    /// Every order condition up to four, for weights `b`: (order, left side, right side).
    fn conditions(scheme: &Scheme, b: &[f64; MOST_STAGES]) -> Vec<(i32, f64, f64)> {
        let a = full(scheme);
        let c = scheme.c;
        let n = scheme.stages;
        let sum = |f: &dyn Fn(usize) -> f64| (0..n).map(f).sum::<f64>();
        let ac = |i: usize, power: i32| sum(&|j| a[i][j] * c[j].powi(power));
        vec![
            (1, sum(&|i| b[i]), 1.0),
            (2, sum(&|i| b[i] * c[i]), 0.5),
            (3, sum(&|i| b[i] * c[i].powi(2)), 1.0 / 3.0),
            (3, sum(&|i| b[i] * ac(i, 1)), 1.0 / 6.0),
            (4, sum(&|i| b[i] * c[i].powi(3)), 0.25),
            (4, sum(&|i| b[i] * c[i] * ac(i, 1)), 0.125),
            (4, sum(&|i| b[i] * ac(i, 2)), 1.0 / 12.0),
            (4, sum(&|i| b[i] * sum(&|j| a[i][j] * ac(j, 1))), 1.0 / 24.0),
        ]
    }

    #[test]
    fn order_conditions_hold_up_to_the_order_and_no_further() {
        for scheme in [THIRD] {
            let a = full(&scheme);
            for stage in 0..scheme.stages {
                let row: f64 = a[stage].iter().sum();
                assert!((row - scheme.c[stage]).abs() < 1e-12, "row {stage} sums to {row}");
            }
            let mut b = [0.0; MOST_STAGES];
            for (j, weight) in b.iter_mut().enumerate().take(scheme.stages) {
                *weight = scheme.b(j);
            }
            for (weights, order) in [(b, scheme.order), (scheme.embedded, scheme.order - 1)] {
                let mut fails_beyond = order == 4;
                for (condition, left, right) in conditions(&scheme, &weights) {
                    let miss = (left - right).abs();
                    if condition <= order {
                        assert!(miss < 1e-12, "order {condition}: {left} against {right}");
                    } else if miss > 1e-6 {
                        fails_beyond = true;
                    }
                }
                assert!(fails_beyond, "a scheme of order {order} meets every condition of a higher one");
            }
        }
    }

    #[test]
    fn stiff_decay_is_damped_to_nothing() {
        for scheme in [THIRD] {
            // y' = z y with z -> -infinity.
            let z = -1e9;
            let a = full(&scheme);
            let mut y = [1.0; MOST_STAGES];
            for s in 1..scheme.stages {
                let known: f64 = 1.0 + (0..s).map(|j| a[s][j] * z * y[j]).sum::<f64>();
                y[s] = known / (1.0 - scheme.gamma * z);
            }
            assert!(y[scheme.stages - 1].abs() < 1e-6, "amplification {}", y[scheme.stages - 1]);
        }
    }
}
