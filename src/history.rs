//! What a march leaves behind: recorded states as arrays, the events met, the energy account and the effort.
//!
//! Temperatures are in kelvin, times in seconds, powers in W per metre of line, energies in J per metre of line.

use ndarray::{Array1, Array2};

/// Recorded states, one row a time. A row at the instant of an event or a switching tells the state before it, and so does
/// the start: heat flows and outputs of a row are those of the interval that ends with it.
#[derive(Debug, Clone)]
pub struct History {
    /// Recorded times, ascending, the start first [s].
    pub times_s: Array1<f64>,
    /// Temperature of the outside [K].
    pub air_k: Array1<f64>,
    /// Temperature of the centre line [K]; NaN where there is no content to have one.
    pub centre_k: Array1<f64>,
    /// The content's mean over its area [K]; NaN where there is no content.
    pub content_mean_k: Array1<f64>,
    /// Frozen share of the content's area [-].
    pub frozen_share: Array1<f64>,
    /// Temperatures of every layer's inside and outside face, in that order, from the inside outwards `[time, 2 layer + side]` [K].
    pub faces_k: Array2<f64>,
    /// Output of every heater per metre of line `[time, heater]` [W/m].
    pub heaters_w_per_m: Array2<f64>,
    /// Heat leaving the outermost surface, positive outwards [W/m].
    pub lost_w_per_m: Array1<f64>,
    /// Heat brought by the content's flow or its held surface, positive into the section [W/m].
    pub carried_w_per_m: Array1<f64>,
    /// Rate at which the section stores heat, positive while it warms [W/m].
    pub stored_w_per_m: Array1<f64>,
    /// Temperatures of the probes `[time, probe]` [K].
    pub probes_k: Array2<f64>,
    /// Radii of the profile: every cell's point and every face, ascending; a contact gives two equal radii [m].
    pub profile_radii_m: Array1<f64>,
    /// Temperatures at those radii `[time, radius]` [K].
    pub profiles_k: Array2<f64>,
}

/// Something that happened at a time, for figures and lists.
#[derive(Debug, Clone, PartialEq)]
pub struct Mark {
    /// When [s].
    pub time_s: f64,
    /// What, in the case's words: `supply lost`, `trace tripped`.
    pub label: String,
}

/// Energy account of a march, per metre of line. `supplied + carried = lost + stored` to round-off.
#[derive(Debug, Clone, Copy, Default, PartialEq, serde::Serialize)]
pub struct Energy {
    /// Put in by the heaters [J/m].
    pub supplied_j_per_m: f64,
    /// Left through the outermost surface, positive outwards [J/m].
    pub lost_j_per_m: f64,
    /// Gained by content and layers, latent heat included [J/m].
    pub stored_j_per_m: f64,
    /// Brought by flowing, exchanged or held content, positive into the section [J/m].
    pub carried_j_per_m: f64,
    /// |supplied + carried - lost - stored| over the largest gross heat supplied, lost, carried or exchanged between cells [-].
    pub residual_relative: f64,
}

/// Work done by the solver.
#[derive(Debug, Clone, Copy, Default, PartialEq, Eq, serde::Serialize)]
pub struct Effort {
    /// Cells of the mesh.
    pub cells: usize,
    /// Accepted steps.
    pub steps: usize,
    /// Steps thrown away.
    pub rejected_steps: usize,
    /// Newton iterations.
    pub newton_iterations: usize,
}

/// One state of the section, named for people.
#[derive(Debug, Clone)]
pub struct Snapshot {
    /// Name and temperature [K] of every face, from the inside outwards.
    pub faces: Vec<(String, f64)>,
    /// The content's mean temperature [K], where there is a content.
    pub content_mean_k: Option<f64>,
    /// Centre temperature [K], where there is a content.
    pub centre_k: Option<f64>,
    /// Frozen share of the content [-].
    pub frozen_share: f64,
    /// Output of all heaters together per metre of line [W/m].
    pub heater_w_per_m: f64,
    /// Heat leaving the outermost surface [W/m].
    pub lost_w_per_m: f64,
    /// Heat passing from the wall into the content [W/m].
    pub into_content_w_per_m: f64,
}
