//! Heat through an interface: two half cells, a contact between them, and heaters on either of its faces.
//!
//! ```text
//!  left cell --lambda_l--> face a --R--> face b --lambda_r--> right cell
//!                          + P_a         + P_b
//!
//!  theta_l(T_a) = theta_l - q lambda_l                      lambda = ln(r_2 / r_1) / 2 pi
//!  T_a - T_b    = (q + P_a) R
//!  theta_r(T_b) = theta_r + (q + P_a + P_b) lambda_r
//! ```
//!
//! `q` is the heat that leaves the left cell [W/m, positive outwards]; `q + P_a + P_b` enters the right one. The two
//! face temperatures are eliminated exactly: one monotone equation in `q` is left, linear where both conductivities are
//! constant.

use crate::material::Integral;

/// One side of an interface.
#[derive(Clone, Copy)]
pub(super) struct End<'a> {
    /// Temperature of the cell's point [K].
    pub temperature: f64,
    /// Kirchhoff integral there [W/m]; for a fixed temperature the temperature itself.
    pub theta: f64,
    /// ln ratio from the point to the face over 2 pi [-].
    pub lambda: f64,
    /// Kirchhoff integral of the material; `None` for a fixed temperature.
    pub kirchhoff: Option<&'a Integral>,
    /// Its conductivity, where that is constant.
    pub constant: Option<f64>,
}

impl End<'_> {
    /// A fixed temperature [K].
    pub fn fixed(temperature: f64) -> Self {
        End { temperature, theta: temperature, lambda: 0.0, kirchhoff: None, constant: Some(1.0) }
    }

    /// Temperature of the face when `q` leaves the point towards it, and the conductivity there.
    fn face(&self, q: f64) -> (f64, f64) {
        match (self.constant, self.kirchhoff) {
            (Some(k), _) => (self.temperature - q * self.lambda / k, k),
            (None, Some(kirchhoff)) => {
                let (temperature, dt_dtheta) = kirchhoff.inverse(self.theta - q * self.lambda);
                (temperature, 1.0 / dt_dtheta)
            }
            (None, None) => (self.temperature, 1.0),
        }
    }
}

/// Heat through an interface and its derivatives.
#[derive(Debug, Clone, Copy, Default)]
pub(super) struct Through {
    /// Heat leaving the left cell [W/m].
    pub q: f64,
    /// Its derivative by the left Kirchhoff integral.
    pub by_theta_left: f64,
    /// Its derivative by the right Kirchhoff integral.
    pub by_theta_right: f64,
    /// Its derivative by the left lambda.
    pub by_lambda_left: f64,
    /// Its derivative by the right lambda.
    pub by_lambda_right: f64,
}

/// Solves an interface. `guess` is a flux to start from.
pub(super) fn through(left: End, resistance: f64, power_a: f64, power_b: f64, right: End, guess: f64) -> Through {
    let power = power_a + power_b;
    let linear = |k_a: f64, k_b: f64| {
        let total = (left.lambda / k_a + resistance + right.lambda / k_b).max(1e-12);
        let drive = left.temperature - right.temperature - power_a * resistance - power * right.lambda / k_b;
        (drive / total, total)
    };
    let (q, k_a, k_b, total) = match (left.constant, right.constant) {
        (Some(k_a), Some(k_b)) => {
            let (q, total) = linear(k_a, k_b);
            (q, k_a, k_b, total)
        }
        _ => {
            let mut q = guess;
            let (mut k_a, mut k_b, mut total);
            let mut rounds = 0;
            loop {
                let (temperature_a, conductivity_a) = left.face(q);
                let (temperature_b, conductivity_b) = right.face(-(q + power));
                (k_a, k_b) = (conductivity_a, conductivity_b);
                total = (left.lambda / k_a + resistance + right.lambda / k_b).max(1e-12);
                let miss = temperature_a - temperature_b - (q + power_a) * resistance;
                let change = miss / total;
                q += change;
                rounds += 1;
                if change.abs() <= 1e-13 * (q.abs() + power.abs()) + 1e-14 || rounds == 30 {
                    break;
                }
            }
            (q, k_a, k_b, total)
        }
    };
    Through {
        q,
        by_theta_left: 1.0 / (k_a * total),
        by_theta_right: -1.0 / (k_b * total),
        by_lambda_left: -q / (k_a * total),
        by_lambda_right: -(q + power) / (k_b * total),
    }
}

/// Temperatures of face a and face b for the flux found.
pub(super) fn faces(left: End, right: End, q: f64, power: f64) -> (f64, f64) {
    (left.face(q).0, right.face(-(q + power)).0)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::material::{Material, MaterialSpec};

    fn sloped() -> Material {
        Material::new(MaterialSpec {
            density: 100.0,
            conductivity: vec![(250.0, 0.03), (300.0, 0.05), (350.0, 0.04)],
            specific_heat: vec![(273.15, 840.0)],
            ..MaterialSpec::default()
        })
        .unwrap()
    }

    #[test]
    fn both_equations_hold_and_derivatives_match_differences() {
        let material = sloped();
        let end = |temperature: f64, lambda: f64| End {
            temperature,
            theta: material.kirchhoff.at(temperature),
            lambda,
            kirchhoff: Some(&material.kirchhoff),
            constant: None,
        };
        let steel = |temperature: f64| End {
            temperature,
            theta: 50.0 * temperature,
            lambda: 0.01,
            kirchhoff: None,
            constant: Some(50.0),
        };
        let (left, right) = (steel(320.0), end(260.0, 0.02));
        let found = through(left, 0.01, 7.0, 3.0, right, 0.0);
        let (a, b) = faces(left, right, found.q, 10.0);
        assert!((a - b - (found.q + 7.0) * 0.01).abs() < 1e-9);
        let d = 1e-4;
        let moved = through(left, 0.01, 7.0, 3.0, end(260.0 + d, 0.02), 0.0);
        let by_temperature = (moved.q - found.q) / d;
        let expected = found.by_theta_right * material.conductivity(260.0);
        assert!((by_temperature / expected - 1.0).abs() < 1e-4, "{by_temperature} against {expected}");
        let moved = through(left, 0.01, 7.0, 3.0, end(260.0, 0.02 + 1e-7), 0.0);
        assert!(((moved.q - found.q) / 1e-7 / found.by_lambda_right - 1.0).abs() < 1e-4);
    }
}
