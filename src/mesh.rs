//! Where a section is cut into cells.
//!
//! Each region (the content, each layer) is cut by a density that is fine at its faces, where heat arrives suddenly, and
//! coarser with the distance `x` from the nearest of them:
//!
//! ```text
//!  dx(x) = min(dx_face + growth x, widest) / refinement
//!  dx_face = face_share sqrt(alpha t)      alpha = k / (rho c),  t: the shortest time that matters
//! ```
//!
//! A layer that heat crosses much faster than that time is one cell. A cell's point is the radius at which a
//! logarithmic (steady, source-free) profile takes its mean over the cell's area, so that storage and steady
//! conduction agree whatever the mesh:
//!
//! ```text
//!  ln r_point = (r_o^2 ln r_o - r_i^2 ln r_i) / (r_o^2 - r_i^2) - 1/2
//! ```

use crate::material::Material;
use crate::section::{Change, Section, Start};
use std::f64::consts::PI;
use std::ops::Range;

/// How a mesh is graded: cell width at a face over the depth `sqrt(alpha t)` that heat reaches in the shortest time of
/// interest, and growth of the width with the distance from the face.
#[derive(Clone, Copy)]
struct Grading {
    face_share: f64,
    growth: f64,
    /// Growth in the content over that in layers: towards the centre line heat gathers from all sides.
    core: f64,
}

/// For answers late after a change (hours of an outage): early transients need only their energy right.
const LATE: Grading = Grading { face_share: 0.25, growth: 0.16, core: 1.0 };
/// For states asked for while heat is still on its way: at every instant the wave is resolved to about 1e-4 of the
/// temperature range. Its error goes with the square of both numbers (measured in `validation/`).
const EARLY: Grading = Grading { face_share: 0.05, growth: 0.04, core: 0.25 };
/// A layer is one cell where heat crosses it within this share of the shortest time of interest.
const THIN_SHARE: f64 = 0.05;
/// Cells across a layer at least, and along the content's radius at least, unless it is thin.
const FEWEST_IN_LAYER: f64 = 6.0;
const FEWEST_IN_CONTENT: f64 = 12.0;
/// A content that freezes has cells at its surface no wider than this share of its radius: young ice grows too fast to
/// be carried by the quasi-steady profile of one wide cell.
const FREEZING_FACE_SHARE: f64 = 1.0 / 60.0;
/// Cells of a freezing content are finer by one plus this many Stefan numbers, up to the largest that is followed.
const FINER_BY_STEFAN: f64 = 3.0;
const MOST_STEFAN: f64 = 2.0;
/// No region is cut finer than this.
const MOST_IN_REGION: f64 = 2000.0;
/// States are early where they are asked for within this share of the slowest region's diffusion time after a change.
const EARLY_SHARE: f64 = 0.5;
/// The shortest time of interest as a share of the slowest region's diffusion time, where nothing shorter is asked for.
const DEFAULT_SHORTEST: f64 = 0.01;

/// One ring of the mesh.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Cell {
    /// Inside radius [m].
    pub inner_m: f64,
    /// Outside radius [m].
    pub outer_m: f64,
    /// Radius that its temperature stands for [m].
    pub point_m: f64,
    /// Cross-section [m2].
    pub area_m2: f64,
}

impl Cell {
    fn new(inner_m: f64, outer_m: f64) -> Self {
        let (inner2, outer2) = (inner_m * inner_m, outer_m * outer_m);
        // ln(r_point / r_outer); its limit for a full core is -1/2.
        let ln_point = if inner_m > 0.0 {
            let ln_inner = (inner_m / outer_m).ln();
            // For a thin ring the quotient loses digits; its series is 1/2 ln + ... and the midpoint serves.
            if -ln_inner < 1e-5 { 0.5 * ln_inner } else { -inner2 * ln_inner / (outer2 - inner2) - 0.5 }
        } else {
            -0.5
        };
        Cell { inner_m, outer_m, point_m: outer_m * ln_point.exp(), area_m2: PI * (outer2 - inner2) }
    }
}

/// The cells of a section from the centre outwards.
#[derive(Debug, Clone, PartialEq)]
pub struct Mesh {
    /// All cells.
    pub cells: Vec<Cell>,
    /// The content's cells; empty where it has no material.
    pub content: Range<usize>,
    /// The cells of each layer.
    pub layers: Vec<Range<usize>>,
}

/// Heat's time across a region of thickness `d` [s]: `d^2 / alpha`.
fn diffusion_time_s(thickness_m: f64, diffusivity: f64) -> f64 {
    thickness_m * thickness_m / diffusivity
}

/// Number of cells (a real number, before rounding) over the half-width `half` from a face inwards.
fn density_integral(half: f64, dx_face: f64, widest: f64, growth: f64) -> f64 {
    let knee = ((widest - dx_face) / growth).clamp(0.0, half);
    (growth * knee / dx_face).ln_1p() / growth + (half - knee) / (dx_face + growth * knee)
}

/// Distance from the face at which the density integral is `count`.
fn density_inverse(count: f64, half: f64, dx_face: f64, widest: f64, growth: f64) -> f64 {
    let knee = ((widest - dx_face) / growth).clamp(0.0, half);
    let at_knee = (growth * knee / dx_face).ln_1p() / growth;
    if count <= at_knee {
        dx_face * (growth * count).exp_m1() / growth
    } else {
        knee + (count - at_knee) * (dx_face + growth * knee)
    }
}

/// Stefan number that the content's ice can come to: its sub-cooling at the wall when it is frozen through, as sensible over
/// latent heat. Ice that the lagging keeps near its freezing point has next to none, and few cells follow its front.
///
/// ```text
///  Ste = rho c (T_f - T_outside) / (rho L) * R_ice / (R_ice + R_outside),    R_ice = 1 / (4 pi k)
/// ```
fn stefan_number(section: &Section, material: &Material) -> f64 {
    let Some((solidus, liquidus)) = material.freezing_k else { return 0.0 };
    let mut coldest = section.outside.temperature_k.range().0;
    for event in &section.events {
        if let Change::OutsideTemperature(series) = &event.change {
            coldest = coldest.min(series.range().0);
        }
    }
    // A cold start melts with the same sensible heat.
    if let Start::Uniform(temperature) = section.start {
        coldest = coldest.min(temperature);
    }
    let latent = material.enthalpy.at(liquidus) - material.enthalpy.at(solidus - 1e-9);
    let capacity = material.enthalpy.rate(solidus - 1.0);
    let ice = 1.0 / (4.0 * PI * material.conductivity(solidus - 1.0));
    let mut outside: f64 = section
        .layers
        .iter()
        .map(|layer| {
            let ratio = layer.outside_radius_m / layer.inside_radius_m;
            ratio.ln() / (2.0 * PI * layer.material.conductivity(liquidus)) + layer.contact.resistance_m_k_per_w
        })
        .sum();
    if let Some(film) = section.outside.film {
        outside += 1.0 / (2.0 * PI * section.outermost_radius_m() * film);
    }
    (capacity * (liquidus - coldest).max(0.0) / latent * ice / (ice + outside)).min(MOST_STEFAN)
}

impl Mesh {
    /// Cuts a section. `shortest_s` is the shortest time after a sudden change at which an answer is wanted, `None` for
    /// the default of a hundredth of the slowest region's diffusion time; `refinement` multiplies the number of cells.
    pub fn new(section: &Section, refinement: f64, shortest_s: Option<f64>) -> Self {
        let reference_k = section.outside.temperature_k.at(0.0);
        let diffusivity = |material: &Material| {
            let temperature = material.freezing_k.map_or(reference_k, |(_, liquidus)| liquidus + 1.0);
            material.conductivity(temperature) / material.enthalpy.rate(temperature)
        };
        let content = section.content.material.as_deref().map(|material| (section.content.radius_m, material));
        let slowest = content
            .iter()
            .map(|&(radius, material)| diffusion_time_s(radius, diffusivity(material)))
            .chain(section.layers.iter().map(|layer| {
                diffusion_time_s(layer.outside_radius_m - layer.inside_radius_m, diffusivity(&layer.material))
            }))
            .fold(0.0, f64::max);
        let shortest = shortest_s.unwrap_or(f64::INFINITY).min(DEFAULT_SHORTEST * slowest);

        let grading = if shortest_s.is_some_and(|time| time < EARLY_SHARE * slowest) { EARLY } else { LATE };

        let mut cells = Vec::new();
        let content_cells = content.map_or(0..0, |(radius, material)| {
            let alpha = diffusivity(material);
            if material.freezing_k.is_none() && diffusion_time_s(radius, alpha) < THIN_SHARE * shortest {
                push_even(&mut cells, 0.0, radius, refinement);
            } else {
                let finer = 1.0 + FINER_BY_STEFAN * stefan_number(section, material);
                let widest = radius / (FEWEST_IN_CONTENT * finer);
                let growth = grading.growth * grading.core / finer;
                let mut dx_face = grading.face_share * (alpha * shortest).sqrt();
                if material.freezing_k.is_some() {
                    dx_face = dx_face.min(FREEZING_FACE_SHARE * radius / finer.powf(1.5));
                }
                let dx_face = dx_face.clamp(radius / MOST_IN_REGION, widest);
                let count = density_integral(radius, dx_face, widest, growth);
                let whole = (count.ceil() * refinement).round().max(1.0) as usize;
                let edge = |index: usize| {
                    let from_face = (whole - index) as f64 / whole as f64 * count;
                    (radius - density_inverse(from_face, radius, dx_face, widest, growth)).max(0.0)
                };
                push_edges(&mut cells, 0.0, radius, whole, edge);
            }
            0..cells.len()
        });
        let mut layers = Vec::new();
        for layer in &section.layers {
            let first = cells.len();
            let (inner, outer) = (layer.inside_radius_m, layer.outside_radius_m);
            let alpha = diffusivity(&layer.material);
            let thickness = outer - inner;
            let freezes = layer.material.freezing_k.is_some();
            if !freezes && diffusion_time_s(thickness, alpha) < THIN_SHARE * shortest {
                push_even(&mut cells, inner, outer, refinement);
            } else {
                let half = 0.5 * thickness;
                let widest = thickness / FEWEST_IN_LAYER;
                let mut dx_face = grading.face_share * (alpha * shortest).sqrt();
                if freezes {
                    dx_face = dx_face.min(FREEZING_FACE_SHARE * thickness);
                }
                let dx_face = dx_face.clamp(thickness / MOST_IN_REGION, widest);
                let count = 2.0 * density_integral(half, dx_face, widest, grading.growth);
                let whole = (count.ceil() * refinement).round().max(1.0) as usize;
                let edge = |index: usize| {
                    let from_inner = index as f64 / whole as f64 * count;
                    if from_inner <= 0.5 * count {
                        inner + density_inverse(from_inner, half, dx_face, widest, grading.growth)
                    } else {
                        outer - density_inverse(count - from_inner, half, dx_face, widest, grading.growth)
                    }
                };
                push_edges(&mut cells, inner, outer, whole, edge);
            }
            layers.push(first..cells.len());
        }
        Mesh { cells, content: content_cells, layers }
    }
}

fn push_edges(cells: &mut Vec<Cell>, inner: f64, outer: f64, count: usize, edge: impl Fn(usize) -> f64) {
    let mut from = inner;
    for index in 1..=count {
        let to = if index == count { outer } else { edge(index) };
        cells.push(Cell::new(from, to));
        from = to;
    }
}

fn push_even(cells: &mut Vec<Cell>, inner: f64, outer: f64, refinement: f64) {
    let count = refinement.round().max(1.0) as usize;
    push_edges(cells, inner, outer, count, |index| inner + (outer - inner) * index as f64 / count as f64);
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_point_is_where_a_logarithmic_profile_takes_its_mean() {
        for (inner, outer) in [(0.01, 0.02), (0.04445, 0.0445), (1e-4, 0.05)] {
            let cell = Cell::new(inner, outer);
            let steps = 200_000;
            let mean = (0..steps)
                .map(|step| {
                    let r = inner + (outer - inner) * (f64::from(step) + 0.5) / f64::from(steps);
                    r.ln() * 2.0 * PI * r * (outer - inner) / f64::from(steps)
                })
                .sum::<f64>()
                / cell.area_m2;
            assert!(
                (cell.point_m.ln() - mean).abs() < 1e-8,
                "{inner} to {outer}: {} against {}",
                cell.point_m.ln(),
                mean
            );
        }
        assert!((Cell::new(0.0, 1.0).point_m - (-0.5_f64).exp()).abs() < 1e-15);
    }

    #[test]
    fn the_density_inverse_undoes_the_integral() {
        for x in [0.0, 1e-4, 0.003, 0.02, 0.025] {
            let count = density_integral(x, 1e-4, 0.004, 0.16);
            assert!((density_inverse(count, 0.025, 1e-4, 0.004, 0.16) - x).abs() < 1e-12);
        }
    }
}
