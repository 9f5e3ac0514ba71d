//! What a march is asked for and what it gives back.

use crate::history::{Effort, Energy, History, Mark, Snapshot};
use crate::section::Condition;
use thiserror::Error;

/// How finely a march is solved.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Settings {
    /// Tolerance of one step on temperatures [K].
    pub temperature_tolerance_k: f64,
    /// Tolerance of one step on the frozen share of the whole content [-].
    pub share_tolerance: f64,
    /// Multiplies the number of cells that the mesh chooses by itself [-].
    pub refinement: f64,
    /// How a freezing cell conducts.
    pub front: FrontTreatment,
}

/// How a freezing cell conducts. The default is the one that the work-precision table in `validation/` chose.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum FrontTreatment {
    /// From the cell's own point, each half in its neighbour's phase.
    CellPoint,
    /// From the front's radius inside the cell; the cell's sensible heat is left out.
    Placed,
    /// From the front's radius inside the cell, the sub-cooling of its ice and the warmth of its liquid counted.
    PlacedWithSensible,
}

/// Where in a thermostat's cycle a held line starts.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum CyclePhase {
    /// The instant before it switches on: the coldest, the cautious one.
    BeforeOn,
    /// The instant after it switches off: the warmest.
    AfterOff,
}

/// What a march is asked for.
#[derive(Debug, Clone)]
pub struct Plan {
    /// When to stop at the latest [s].
    pub until_s: f64,
    /// Whether to stop as soon as every watch has fired.
    pub stop_when_answered: bool,
    /// Whether to stop when the line has come to rest and no event is left.
    pub stop_when_settled: bool,
    /// Conditions to be located.
    pub watches: Vec<Condition>,
    /// Where in a thermostat's cycle a held line starts.
    pub cycle_phase: CyclePhase,
    /// What is recorded.
    pub record: Recording,
}

/// What is recorded.
#[derive(Debug, Clone, PartialEq)]
pub enum Recording {
    /// The start and the end only.
    Ends,
    /// Every accepted step, thinned to what a smooth figure needs.
    Steps,
    /// The start and every multiple of this up to the end [s].
    Every(f64),
    /// The start and exactly these times [s], ascending.
    At(Vec<f64>),
}

/// Why a march ended.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum End {
    /// Every watch had fired.
    Answered,
    /// The line came to rest.
    Settled,
    /// `until_s` was reached.
    Until,
    /// A table of the outside's temperature ended first.
    WeatherEnded,
}

/// What became of one watch.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Sighting {
    /// When it first fired [s]; 0 where it held from the start.
    pub time_s: Option<f64>,
    /// Closest value to the threshold so far (K, or a share) and when it stood there.
    pub closest_value: f64,
    /// When the closest value stood [s].
    pub closest_time_s: f64,
}

/// The settled state or cycle that a held line starts from.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Hold {
    /// The start is no hold.
    None,
    /// In balance, with the total output of the heaters [W per metre of line].
    Balance {
        /// Output of all heaters together [W/m].
        heater_w_per_m: f64,
    },
    /// A thermostat cycles.
    Cycle {
        /// Length of a cycle [s].
        period_s: f64,
        /// Share of the cycle during which it is on [-].
        duty: f64,
    },
}

/// What a march leaves behind.
#[derive(Debug, Clone)]
pub struct Trace {
    /// One sighting for each watch, in order.
    pub sightings: Vec<Sighting>,
    /// Why it ended.
    pub end: End,
    /// When it ended [s].
    pub end_time_s: f64,
    /// The state at the start.
    pub start: Snapshot,
    /// How a hold settled.
    pub hold: Hold,
    /// The state at the end.
    pub finish: Snapshot,
    /// Recorded states.
    pub history: History,
    /// Events and switchings met.
    pub marks: Vec<Mark>,
    /// Switchings of each heater by its thermostat: (on, off).
    pub switchings: Vec<(usize, usize)>,
    /// Energy account.
    pub energy: Energy,
    /// Work done, the start's included.
    pub effort: Effort,
}

/// Why a march failed: where, what, how large, and what to try.
#[derive(Debug, Clone, Error)]
pub enum MarchError {
    /// Newton's iterations did not settle however short the step.
    #[error(
        "at {time_s:.3} s the step fell to {step_s:.1e} s without a solution ({attempts} attempts): worst is {place} at \
         {temperature_degc:.4} degC, off by {residual_k:.1e} K; last event: {last_event}\nhint: {hint}"
    )]
    StepTooSmall {
        /// Time reached [s].
        time_s: f64,
        /// Last step tried [s].
        step_s: f64,
        /// Attempts made at this time.
        attempts: usize,
        /// Layer and radius of the worst cell.
        place: String,
        /// Its temperature [degC].
        temperature_degc: f64,
        /// Its residual [K].
        residual_k: f64,
        /// The event met last.
        last_event: String,
        /// One thing to try.
        hint: &'static str,
    },
    /// The steady state could not be found.
    #[error("no steady state was found: {reason}")]
    NoSteadyState {
        /// Why, in words.
        reason: String,
    },
    /// A held line under its thermostat reaches no repeating cycle.
    #[error("the line does not settle into a cycle under its thermostat: {reason}")]
    NoCycle {
        /// Why, in words.
        reason: String,
    },
    /// The case asks for something that the model cannot follow.
    #[error("{reason}")]
    NotModelled {
        /// Why, in words.
        reason: String,
    },
    /// Whoever watched the progress asked to stop.
    #[error("stopped at {time_s:.0} s as asked")]
    Stopped {
        /// Time reached [s].
        time_s: f64,
    },
}

impl Default for Settings {
    fn default() -> Self {
        Settings {
            temperature_tolerance_k: 1e-3,
            share_tolerance: 1e-5,
            refinement: 1.0,
            front: FrontTreatment::PlacedWithSensible,
        }
    }
}
