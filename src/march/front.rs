//! A freezing front inside a cell.
//!
//! A cell that a front crosses holds solid on one side of the front's radius `s` and liquid on the other. Its share of
//! solid `u` is its unknown; the radius follows from the area, `s^2 = r_o^2 - u (r_o^2 - r_i^2)` with the solid
//! outside, `s^2 = r_i^2 + u (r_o^2 - r_i^2)` with it inside. Heat enters and leaves the front through the part of the
//! cell that lies between, by the logarithmic profile of a steady flow `q` (W/m, positive outwards):
//!
//! ```text
//!  T(r) = T_f - q_out / (2 pi k) ln(r / s)          s <= r <= r_o
//!  T(r) = T_f + q_in  / (2 pi k) ln(s / r)          r_i <= r <= s
//! ```
//!
//! These parts hold sensible heat, which is counted, so that nothing jumps when the front leaves the cell:
//!
//! ```text
//!  E_out = -(rho c / k) q_out J_out,  J_out = int_s^r_o ln(r/s) r dr = r_o^2/2 ln(r_o/s) - (r_o^2 - s^2)/4
//!  E_in  = +(rho c / k) q_in  J_in,   J_in  = int_r_i^s ln(s/r) r dr = (s^2 - r_i^2)/4 - r_i^2/2 ln(s/r_i)
//! ```
//!
//! What the cell held beyond that when the front entered (its profile was not logarithmic) is given back in proportion
//! as it changes, so that the front enters at the cell's face exactly and energy is conserved exactly.

use std::f64::consts::PI;

/// Thinnest solid (or liquid) part of a cell, as a share of its area, whose conduction is still followed. It bounds the
/// infinite flux of young ice on a held wall; the time that it stands for is the square of it, 1e-10 of the cell's.
const THINNEST: f64 = 1e-5;
/// Smallest front radius in the core, squared, over the cell's own outer radius squared.
const CORE_SHARE: f64 = 1e-3;

/// A front in a cell.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Front {
    /// Whether the solid lies outside the front (`true`: ice on the wall) or inside it (`false`: a melting core).
    pub solid_outside: bool,
    /// Whether the cell was liquid (`true`) or solid when the front entered it.
    pub from_liquid: bool,
    /// Enthalpy that the cell held beyond the logarithmic profile when the front entered it [J/m].
    pub offset: f64,
}

impl Front {
    /// Share of the offset that is still held, and its derivative by the share of solid `u`.
    pub fn offset_share(&self, u: f64) -> (f64, f64) {
        if self.from_liquid { (1.0 - u, -1.0) } else { (u, 1.0) }
    }
}

/// Geometry of both parts of a cut cell, with derivatives by the share of solid `u`.
#[derive(Debug, Clone, Copy, Default)]
pub(super) struct Cut {
    /// ln(s / r_i) / 2 pi, and its derivative [-].
    pub lambda_in: (f64, f64),
    /// ln(r_o / s) / 2 pi, and its derivative [-].
    pub lambda_out: (f64, f64),
    /// J_in, and its derivative [m2].
    pub j_in: (f64, f64),
    /// J_out, and its derivative [m2].
    pub j_out: (f64, f64),
    /// s, and its derivative [m].
    pub radius: (f64, f64),
}

/// The cut of a cell between `r_i^2` and `r_o^2` at a share of solid `u`.
pub(super) fn cut(solid_outside: bool, u: f64, inner2: f64, outer2: f64) -> Cut {
    let width2 = outer2 - inner2;
    // Thin parts next to either face keep a least thickness; there the derivative is zero.
    let bounded = u.clamp(THINNEST, 1.0 - THINNEST);
    let mut slope = if solid_outside { -width2 } else { width2 };
    let mut s2 = if solid_outside { outer2 - bounded * width2 } else { inner2 + bounded * width2 };
    if bounded != u {
        slope = 0.0;
    }
    if s2 < CORE_SHARE * outer2 {
        s2 = CORE_SHARE * outer2;
        slope = 0.0;
    }
    let quarter_pi = 0.25 / PI;
    let ln_out = (outer2 / s2).ln();
    let lambda_out = (quarter_pi * ln_out, -quarter_pi * slope / s2);
    let j_out = (0.25 * (outer2 * ln_out - (outer2 - s2)), 0.25 * slope * (1.0 - outer2 / s2));
    let (lambda_in, j_in) = if inner2 > 0.0 {
        let ln_in = (s2 / inner2).ln();
        (
            (quarter_pi * ln_in, quarter_pi * slope / s2),
            (0.25 * (s2 - inner2 - inner2 * ln_in), 0.25 * slope * (1.0 - inner2 / s2)),
        )
    } else {
        ((0.0, 0.0), (0.25 * s2, 0.25 * slope))
    };
    let radius = s2.sqrt();
    Cut { lambda_in, lambda_out, j_in, j_out, radius: (radius, 0.5 * slope / radius) }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_integrals_are_those_of_their_definition() {
        let (inner, outer) = (0.03_f64, 0.036_f64);
        for solid_outside in [true, false] {
            let cut = cut(solid_outside, 0.4, inner * inner, outer * outer);
            let s = cut.radius.0;
            let integrate = |from: f64, to: f64, f: &dyn Fn(f64) -> f64| {
                let steps = 20_000;
                let dr = (to - from) / f64::from(steps);
                (0..steps).map(|i| f(from + (f64::from(i) + 0.5) * dr) * dr).sum::<f64>()
            };
            let j_out = integrate(s, outer, &|r| (r / s).ln() * r);
            let j_in = integrate(inner, s, &|r| (s / r).ln() * r);
            assert!((cut.j_out.0 / j_out - 1.0).abs() < 1e-6, "{} against {j_out}", cut.j_out.0);
            assert!((cut.j_in.0 / j_in - 1.0).abs() < 1e-6, "{} against {j_in}", cut.j_in.0);
        }
    }

    #[test]
    fn derivatives_match_differences() {
        for solid_outside in [true, false] {
            for inner in [0.0, 0.03_f64] {
                let at = |u: f64| cut(solid_outside, u, inner * inner, 0.036 * 0.036);
                let (low, middle, high) = (at(0.4 - 1e-6), at(0.4), at(0.4 + 1e-6));
                type Pair = fn(&Cut) -> (f64, f64);
                let pairs: [Pair; 5] = [|c| c.lambda_in, |c| c.lambda_out, |c| c.j_in, |c| c.j_out, |c| c.radius];
                for pair in pairs {
                    let difference = (pair(&high).0 - pair(&low).0) / 2e-6;
                    assert!((difference - pair(&middle).1).abs() <= 1e-6 * difference.abs().max(1e-9));
                }
            }
        }
    }
}
