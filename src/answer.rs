//! What a question gives back: answers with their numerical errors, and all that a report needs beside them.

use crate::history::{Effort, Energy, History, Mark, Snapshot};
use crate::section::Section;
use serde::Serialize;

/// How an answer came out.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Outcome {
    /// It happens, at the stated time.
    Reached,
    /// The line comes to rest before it.
    SettlesShort,
    /// The run ended before it.
    RunEnded,
    /// The weather's table ended before it.
    WeatherEnded,
    /// The closest approach lies within its own numerical error.
    TooClose,
}

/// One answer. Times are in seconds after 0 h; values in SI with temperatures in degC, as `unit` says.
#[derive(Debug, Clone, Serialize)]
pub struct Answer {
    /// The limit's or target's name, or the question's own.
    pub name: String,
    /// How it came out.
    pub outcome: Outcome,
    /// When it happens [s].
    pub time_s: Option<f64>,
    /// Where it is too close to call: the earliest time at which any of the solutions meets it [s].
    pub earliest_time_s: Option<f64>,
    /// Numerical error of the time [s]; `None` where it was not asked for (`--quick`).
    pub error_s: Option<f64>,
    /// A value other than a time: watts that hold, a temperature reached.
    pub value: Option<f64>,
    /// Unit of `value`, `error`, `limit_value` and `closest_value`.
    pub unit: String,
    /// Numerical error of the value.
    pub error: Option<f64>,
    /// Where, in the case's words.
    #[serde(rename = "where")]
    pub place: String,
    /// The value that passes the limit.
    pub limit_value: Option<f64>,
    /// Closest approach to it where it was not reached.
    pub closest_value: Option<f64>,
    /// Numerical error of the closest approach.
    pub closest_error: Option<f64>,
    /// When that was [s].
    pub closest_time_s: Option<f64>,
    /// The same time under the cautious assumptions [s].
    pub cautious_time_s: Option<f64>,
    /// How it came out under the cautious assumptions, where they were tried.
    pub cautious_outcome: Option<Outcome>,
    /// Whether passing it is a danger (`true`: times are rounded down) or a recovery (`false`: rounded up).
    pub danger: bool,
}

/// A second start of a thermostat's cycle, told beside the cautious one.
#[derive(Debug, Clone)]
pub struct OtherStart {
    /// What it is: `just after the thermostat switched off`.
    pub description: String,
    /// The answers from there, in the same order.
    pub answers: Vec<Answer>,
}

/// Everything that a verb found out.
#[derive(Debug, Clone)]
pub struct Findings {
    /// The verb: `steady`, `run`, `warmup`, `outage`.
    pub verb: &'static str,
    /// SHA-256 of the case's text with its overrides and series, in hex.
    pub input_digest: String,
    /// The physics that was solved, as the verb changed it.
    pub section: Section,
    /// One sentence a line: the answer, first, in words and rounded to the safe side.
    pub headline: Vec<String>,
    /// The answers.
    pub answers: Vec<Answer>,
    /// The answers from the other end of the thermostat's cycle, where there is one.
    pub other_start: Option<OtherStart>,
    /// The state at the start; for `steady` the solution.
    pub start: Snapshot,
    /// What governs the answer: the resistances in series, the largest first.
    pub governs: Vec<String>,
    /// What was assumed: how the line starts, what the cautious answer means, what was overridden.
    pub assumptions: Vec<String>,
    /// Cautions that apply to what was found.
    pub cautions: Vec<String>,
    /// Energy account of the default solve.
    pub energy: Energy,
    /// Effort of the default solve.
    pub effort: Effort,
    /// Recorded states; one row for `steady`.
    pub history: History,
    /// Events met, switchings, limits passed.
    pub marks: Vec<Mark>,
    /// Whether every question was answered (exit status 1 where not, with the reason in the headline).
    pub answered: bool,
}
