//! The questions: a case, a verb, and what is found out.
//!
//! Every answer carries its numerical error. The question is solved three times: at the default settings, on a mesh twice
//! as fine, and at tolerances ten times tighter; the error is a stated factor times the sum of the two differences. Beside
//! it stands the cautious answer, for the inputs are known less well than the solution.

mod cautions;
mod outage;
mod run;
mod steady;
mod told;
mod warmup;

use crate::answer::{Answer, Findings, Outcome};
use crate::case::Loaded;
use crate::march::{self, CyclePhase, End, MarchError, Plan, Recording, Settings, Sighting, Trace};
use crate::section::{Condition, Place, Section};
use std::sync::Arc;
use thiserror::Error;

/// Numerical error over the sum of the differences to the refined and to the tighter solution. A second-order scheme leaves
/// a third of the difference to the mesh twice as fine beyond it; two covers that and what the differences hide by chance
/// (measured over every exact case in `validation/`).
pub const ERROR_FACTOR: f64 = 2.0;
/// Mesh refinement and tightening of the tolerances of the two further solves.
const FINER_MESH: f64 = 2.0;
const TIGHTER: f64 = 0.1;
/// How much more the lagging conducts in the cautious answer.
pub const CAUTIOUS_CONDUCTIVITY: f64 = 1.25;
/// A layer that conducts less than this near 10 degC is lagging [W/(m K)]; plastics conduct more.
const LAGGING_CONDUCTS_LESS: f64 = 0.12;
/// No line takes longer than this to come to rest [s]: a bound against endless runs.
const LONGEST_S: f64 = 1e9;

/// Which question is asked.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Verb {
    /// Temperatures and heat flows at rest, and the watts that hold each target.
    Steady,
    /// The case's own events, hour by hour.
    Run,
    /// From cold with every heater on.
    Warmup,
    /// The supply is lost at 0 h.
    Outage,
}

/// How a question is asked.
#[derive(Debug, Clone, Copy, Default)]
pub struct Options {
    /// Solve once only, without numerical error and cautious answer.
    pub quick: bool,
    /// Settings of the default solve.
    pub settings: Settings,
}

/// Why a question was not answered.
#[derive(Debug, Error)]
pub enum QuestionError {
    /// The computation failed.
    #[error(transparent)]
    March(#[from] MarchError),
    /// The question has no answer, or was not asked.
    #[error("{reason}")]
    NoAnswer {
        /// Why, in words, with a remedy.
        reason: String,
    },
}

/// Asks a question of a case. `progress` is told the line's time [s] now and then and answers whether to go on.
///
/// # Errors
/// [`QuestionError::March`] where the computation failed, [`QuestionError::NoAnswer`] where there is nothing to answer.
pub fn ask(
    verb: Verb,
    loaded: &Loaded,
    options: &Options,
    progress: &mut dyn FnMut(f64) -> bool,
) -> Result<Findings, QuestionError> {
    match verb {
        Verb::Steady => steady::ask(loaded, options),
        Verb::Run => run::ask(loaded, options, progress),
        Verb::Warmup => warmup::ask(loaded, options, progress),
        Verb::Outage => outage::ask(loaded, options, progress),
    }
}

/// One condition to be answered, with the name that the case gives it.
#[derive(Debug, Clone)]
struct Asked {
    name: String,
    condition: Condition,
    danger: bool,
}

/// One question solved in every way that its answer needs.
struct Solved {
    main: Trace,
    refined: Option<Trace>,
    tight: Option<Trace>,
    cautious: Option<Trace>,
}

fn plan(asked: &[Asked], until_s: f64, phase: CyclePhase, record: Recording) -> Plan {
    Plan {
        until_s,
        stop_when_answered: true,
        stop_when_settled: true,
        watches: asked.iter().map(|asked| asked.condition).collect(),
        cycle_phase: phase,
        record,
    }
}

/// Solves a plan at the default settings and, unless `quick`, refined, tightened and cautiously.
fn solve(
    section: &Section,
    plan: &Plan,
    options: &Options,
    progress: &mut dyn FnMut(f64) -> bool,
) -> Result<Solved, MarchError> {
    let settings = options.settings;
    let main = march::run(section, plan, &settings, progress)?;
    if options.quick {
        return Ok(Solved { main, refined: None, tight: None, cautious: None });
    }
    // The further solves are asked for numbers only, but resolve what the main one resolves.
    let bare = Plan { record: without_steps(&plan.record), ..plan.clone() };
    let refined = Settings { refinement: settings.refinement * FINER_MESH, ..settings };
    let tight = Settings {
        temperature_tolerance_k: settings.temperature_tolerance_k * TIGHTER,
        share_tolerance: settings.share_tolerance * TIGHTER,
        ..settings
    };
    let refined = march::run(section, &bare, &refined, progress)?;
    let tight = march::run(section, &bare, &tight, progress)?;
    let cautious = march::run(&cautious_section(section), &bare, &settings, progress)?;
    Ok(Solved { main, refined: Some(refined), tight: Some(tight), cautious: Some(cautious) })
}

fn without_steps(recording: &Recording) -> Recording {
    match recording {
        Recording::Steps => Recording::Ends,
        other => other.clone(),
    }
}

/// Whether a layer counts as lagging.
fn is_lagging(layer: &crate::section::Layer) -> bool {
    layer.material.freezing_k.is_none() && layer.material.conductivity(283.15) < LAGGING_CONDUCTS_LESS
}

/// The section under the cautious assumptions: lagging that conducts more, heaters at their lower tolerance.
fn cautious_section(section: &Section) -> Section {
    let mut section = section.clone();
    for layer in &mut section.layers {
        if is_lagging(layer) {
            layer.material = Arc::new(layer.material.conducting(CAUTIOUS_CONDUCTIVITY));
        }
    }
    for heater in &mut section.heaters {
        heater.output_w_per_m = heater.output_low_w_per_m;
    }
    section
}

/// Numerical error of a number from its three solutions.
fn numerical_error(main: f64, refined: f64, tight: f64) -> f64 {
    ERROR_FACTOR * ((main - refined).abs() + (main - tight).abs())
}

/// Outcome of a watch that did not fire.
fn missed(end: End) -> Outcome {
    match end {
        End::Settled | End::Answered => Outcome::SettlesShort,
        End::Until => Outcome::RunEnded,
        End::WeatherEnded => Outcome::WeatherEnded,
    }
}

/// Turns watched conditions into answers.
fn answers(section: &Section, asked: &[Asked], solved: &Solved) -> Vec<Answer> {
    (0..asked.len()).map(|index| answer(section, &asked[index], index, solved)).collect()
}

fn answer(section: &Section, asked: &Asked, index: usize, solved: &Solved) -> Answer {
    let liquidus = section.content.material.as_ref().and_then(|material| material.freezing_k).map(|range| range.1);
    let (place, unit, limit, offset) = match asked.condition {
        Condition::Below(place, kelvin) | Condition::Above(place, kelvin) => {
            (section.place_name(place), "degC", kelvin - 273.15, 273.15)
        }
        Condition::Frozen(0.0) => {
            let point = liquidus.unwrap_or(f64::NAN);
            (section.place_name(Place::ContentSurface), "degC", point - 273.15, 273.15)
        }
        Condition::Frozen(share) | Condition::Thawed(share) => ("content".into(), "-", share, 0.0),
    };
    let sighting = |trace: &Trace| -> Sighting { trace.sightings[index] };
    let main = sighting(&solved.main);
    let others = solved.refined.as_ref().map(sighting).zip(solved.tight.as_ref().map(sighting));
    let mut outcome = if main.time_s.is_some() { Outcome::Reached } else { missed(solved.main.end) };
    let mut error_s = None;
    let mut closest_error = None;
    if let Some((refined, tight)) = others {
        match (main.time_s, refined.time_s, tight.time_s) {
            (Some(main), Some(refined), Some(tight)) => error_s = Some(numerical_error(main, refined, tight)),
            (None, None, None) => {
                let error = numerical_error(main.closest_value, refined.closest_value, tight.closest_value);
                closest_error = Some(error);
                if (main.closest_value - offset - limit).abs() <= error {
                    outcome = Outcome::TooClose;
                }
            }
            // Some solutions pass the limit and some do not: their difference is all that decides.
            _ => outcome = Outcome::TooClose,
        }
    }
    let reached = main.time_s.is_some();
    let cautious = solved.cautious.as_ref().map(|trace| (sighting(trace), trace.end));
    // A thermostat can leave a worse line warmer at the start; the cautious answer is never the more hopeful of the two.
    let cautious_time_s = cautious.and_then(|(sighting, _)| match (sighting.time_s, main.time_s) {
        (Some(cautious), Some(main)) if asked.danger => Some(cautious.min(main)),
        (Some(cautious), Some(main)) => Some(cautious.max(main)),
        (None, Some(main)) if asked.danger => Some(main),
        (time_s, _) => time_s,
    });
    Answer {
        name: asked.name.clone(),
        outcome,
        time_s: main.time_s,
        error_s,
        value: None,
        unit: unit.into(),
        error: None,
        place,
        limit_value: Some(limit),
        closest_value: (!reached).then_some(main.closest_value - offset),
        closest_error,
        closest_time_s: (!reached).then_some(main.closest_time_s),
        cautious_time_s,
        cautious_outcome: cautious.map(|(sighting, end)| {
            if sighting.time_s.is_some() || cautious_time_s.is_some() { Outcome::Reached } else { missed(end) }
        }),
        danger: asked.danger,
    }
}

/// The findings that every marched question shares.
fn findings(
    verb: &'static str,
    loaded: &Loaded,
    section: Section,
    solved: Solved,
    answers: Vec<Answer>,
    options: &Options,
) -> Findings {
    let trace = solved.main;
    let mut assumptions = told::assumptions(loaded, &section, &trace);
    assumptions.extend(told::methods(options.quick));
    Findings {
        verb,
        input_digest: loaded.digest.clone(),
        headline: Vec::new(),
        answers,
        other_start: None,
        governs: told::governs(&section, &trace),
        assumptions,
        cautions: Vec::new(),
        start: trace.start,
        energy: trace.energy,
        effort: trace.effort,
        history: trace.history,
        marks: trace.marks,
        answered: true,
        section,
    }
}
