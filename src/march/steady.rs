//! The steady state of a section.

use super::plan::MarchError;
use crate::history::{History, Snapshot};
use crate::section::{Place, Section};

/// A steady state.
#[derive(Debug, Clone)]
pub struct Steady {
    /// Faces, content, and where the heat goes.
    pub snapshot: Snapshot,
    /// The same as a history of one row at 0 s, profile included.
    pub history: History,
    /// Thermal resistances in series from the content's surface outwards: name and resistance per length [m K/W],
    /// worked out from the solution (temperature drop over heat flow).
    pub resistances: Vec<(String, f64)>,
}

/// Steady state with the outside's temperature at 0 h and the given output of each heater per metre of **line** [W/m].
///
/// # Errors
/// [`MarchError::NoSteadyState`] where nothing ties the section to a temperature or the iteration does not settle.
pub fn balance(_section: &Section, _heaters_w_per_m: &[f64]) -> Result<Steady, MarchError> {
    todo!("the core is being written")
}

/// The factor on every heater's own output at which `place` sits at `temperature_k` in steady state; with it that state.
/// A factor below zero means that the place would have to be cooled.
///
/// # Errors
/// [`MarchError::NoSteadyState`] also where no output of the heaters changes the place's temperature.
pub fn factor_that_holds(_section: &Section, _place: Place, _temperature_k: f64) -> Result<(f64, Steady), MarchError> {
    todo!("the core is being written")
}
