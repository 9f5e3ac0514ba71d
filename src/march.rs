//! The time march of one section: state, step, events.
//!
//! [`run`] takes a [`Section`] and a [`Plan`] and gives back a [`Trace`]. Nothing here reads a file or prints.
//!
//! | file | what |
//! |---|---|
//! | `plan` | what is asked and what comes back |
//! | `chain` | heat flows between cells, residuals, Newton |
//! | `link` | an interface: contact, heaters, both faces eliminated |
//! | `front` | a freezing front inside a cell |
//! | `scheme` | the implicit Runge-Kutta coefficients |
//! | `runner` | the time loop, switching, the energy account |
//! | `start` | the state at 0 h: uniform, reading, held, cycling |
//! | `controls` | supply, heaters, thermostats, outside, content |
//! | `view`, `record` | named temperatures of a state, rows of a history |
//! | `network` | the sparse conductance matrix against which steady states are held |
//! | `steady` | the steady state and the output that holds a temperature |

mod chain;
mod controls;
#[cfg(test)]
mod fixtures;
mod front;
mod link;
mod network;
pub mod plan;
mod record;
mod runner;
mod scheme;
mod start;
pub mod steady;
#[cfg(test)]
mod tests;
mod view;

pub use plan::*;

use crate::history::Mark;
use crate::mesh::Mesh;
use crate::section::{Change, Condition, Place, Section};
use crate::series::Series;
use record::Recorder;
use runner::{Flow, Runner, Stop};
use view::View;

/// A line has come to rest when what is left of its change is below this [K].
pub const SETTLED_K: f64 = 1e-3;
/// The same for a frozen share.
pub const SETTLED_SHARE: f64 = 1e-6;
/// Shortest step that can tell rest, over the section's time scale [-].
const SHORTEST_AT_REST: f64 = 1e-3;
/// Steps between two reports of progress.
const PROGRESS_STEPS: usize = 64;
/// A recording of every step is thinned beyond this many rows.
const MOST_ROWS: usize = 20_000;

/// A step longer than this share of the time reached is recorded in parts.
const LONG_STEP_SHARE: f64 = 0.003;
const STEP_PARTS: u32 = 4;

/// One watched condition.
struct Watch {
    condition: Condition,
    liquidus_k: f64,
    before: f64,
    sighting: Sighting,
}

impl Watch {
    /// Positive until the condition is met [K or share].
    fn value(&self, view: &View) -> f64 {
        match self.condition {
            Condition::Below(place, limit) => view.temperature(place) - limit,
            Condition::Above(place, limit) => limit - view.temperature(place),
            Condition::Frozen(0.0) => view.temperature(Place::ContentSurface) - self.liquidus_k,
            Condition::Frozen(share) => share - view.frozen_share(),
            Condition::Thawed(share) => view.frozen_share() - share,
        }
    }

    /// The watched quantity itself at a value of [`value`](Self::value): K or share.
    fn measured(&self, value: f64) -> f64 {
        match self.condition {
            Condition::Below(_, limit) => limit + value,
            Condition::Above(_, limit) => limit - value,
            Condition::Frozen(0.0) => self.liquidus_k + value,
            Condition::Frozen(share) => share - value,
            Condition::Thawed(share) => share + value,
        }
    }

    fn note(&mut self, time_s: f64, value: f64, closest: &mut f64) {
        if value < *closest {
            *closest = value;
            self.sighting.closest_value = self.measured(value);
            self.sighting.closest_time_s = time_s;
        }
    }
}

/// Shortest time after a sudden change at which the plan asks for the state [s]: the mesh resolves what heat reaches by
/// then.
fn shortest_time_s(section: &Section, plan: &Plan) -> Option<f64> {
    match &plan.record {
        Recording::Ends | Recording::Steps => None,
        Recording::Every(interval) => Some(*interval),
        Recording::At(times) => times
            .iter()
            .filter(|&&time| time > 0.0)
            .map(|&time| {
                let since =
                    section.events.iter().map(|event| event.time_s).filter(|&event| event < time).fold(0.0, f64::max);
                time - since
            })
            .min_by(f64::total_cmp),
    }
}

/// Marches a section through time as planned. `progress` is told the time reached [s] now and then and answers whether
/// to go on.
///
/// # Errors
/// A [`MarchError`]: where the computation failed and why.
pub fn run(
    section: &Section,
    plan: &Plan,
    settings: &Settings,
    progress: &mut dyn FnMut(f64) -> bool,
) -> Result<Trace, MarchError> {
    let mesh = Mesh::new(section, settings.refinement, shortest_time_s(section, plan));
    let (mut runner, hold) = start::begin(section, &mesh, settings, plan.cycle_phase)?;
    let start = runner.view().snapshot();
    let mut recorder = Recorder::new(section, &mesh);
    let mut marks = Vec::new();
    // A row at the instant of a switching tells the state before it, and so does the start.
    recorder.push(0.0, &runner.view());

    // Events at 0 h happen before anything is watched.
    let mut events = section.events.iter().filter(|event| event.time_s <= plan.until_s).peekable();
    while let Some(event) = events.next_if(|event| event.time_s <= 0.0) {
        let label = runner.apply(&event.change)?;
        marks.push(Mark { time_s: 0.0, label });
    }
    // A thermostat held the instant before it switches does so now.
    if let Some((heater, on)) = runner.settle_triggers()?
        && runner.controls.supply
        && !runner.controls.tripped[heater]
    {
        marks.push(Mark { time_s: 0.0, label: switching_label(section, heater, on) });
    }

    let liquidus_k =
        section.content.material.as_ref().and_then(|material| material.freezing_k).map_or(f64::NAN, |range| range.1);
    let mut watches: Vec<Watch> = plan
        .watches
        .iter()
        .map(|&condition| {
            let nothing = Sighting { time_s: None, closest_value: f64::NAN, closest_time_s: 0.0 };
            let mut watch = Watch { condition, liquidus_k, before: f64::NAN, sighting: nothing };
            watch.before = watch.value(&runner.view());
            watch.sighting.closest_value = watch.measured(watch.before);
            let frozen = condition == Condition::Frozen(0.0) && runner.content_has_frozen;
            // A share falls to its limit only after it has stood above it: what was never frozen does not thaw.
            let falls = matches!(condition, Condition::Thawed(_));
            if (watch.before <= 0.0 && !falls) || frozen {
                watch.sighting.time_s = Some(0.0);
            }
            watch
        })
        .collect();
    let mut closest: Vec<f64> = watches.iter().map(|watch| watch.before).collect();

    let mut records = Records::new(&plan.record);
    let mut steps = 0;
    let mut stopped = None;
    let mut settled = false;
    let mut cycle: Option<Vec<f64>> = None;
    let mut cycle_repeats = false;
    let end = loop {
        if plan.stop_when_answered && watches.iter().all(|watch| watch.sighting.time_s.is_some()) {
            break End::Answered;
        }
        if runner.time >= plan.until_s {
            break End::Until;
        }
        let constant = matches!(runner.controls.outside_k, Series::Constant(_));
        if let Some(ends) = runner.controls.outside_k.ends_s()
            && runner.time >= ends
        {
            break End::WeatherEnded;
        }
        if settled || (plan.stop_when_settled && constant && events.peek().is_none() && cycle_repeats) {
            break End::Settled;
        }
        let mut until = plan.until_s;
        if let Some(event) = events.peek() {
            until = until.min(event.time_s);
        }
        if let Some(kink) = runner.controls.outside_k.next_kink(runner.time) {
            until = until.min(kink);
        }
        let settles = plan.stop_when_settled && constant && events.peek().is_none();
        let stop = runner.advance(until, &mut |runner| {
            let (from, to) = runner.last_step();
            for (watch, closest) in watches.iter_mut().zip(&mut closest) {
                if watch.sighting.time_s.is_some() {
                    continue;
                }
                // First ice is the landing on the onset, which was handled after the step before this one.
                if watch.condition == Condition::Frozen(0.0) && runner.content_has_frozen {
                    watch.sighting.time_s = Some(from);
                    continue;
                }
                let value = watch.value(&runner.view());
                watch.note(to, value, closest);
                if value <= 0.0 && watch.before > 0.0 {
                    watch.sighting.time_s = Some(locate(runner, watch, from, to, value));
                }
                watch.before = value;
            }
            records.take(runner, &mut recorder, from, to);
            steps += 1;
            if steps % PROGRESS_STEPS == 1 && !progress(to) {
                stopped = Some(to);
                return Ok(Flow::Stop);
            }
            let answered = plan.stop_when_answered && watches.iter().all(|watch| watch.sighting.time_s.is_some());
            // Only an accepted step that no event cut short can tell rest from a pause.
            settled = settles && at_rest(runner);
            if answered || settled {
                return Ok(Flow::Stop);
            }
            Ok(Flow::Go)
        })?;
        if let Some(time_s) = stopped {
            return Err(MarchError::Stopped { time_s });
        }
        if runner.content_has_frozen {
            for watch in &mut watches {
                if watch.condition == Condition::Frozen(0.0) && watch.sighting.time_s.is_none() {
                    watch.sighting.time_s = Some(runner.time);
                }
            }
        }
        if let Stop::Switched { heater, on } = stop {
            let powered = runner.controls.supply && !runner.controls.tripped[heater];
            if powered {
                marks.push(Mark { time_s: runner.time, label: switching_label(section, heater, on) });
            }
            if on && settles {
                let state = runner.temperatures();
                if let Some(before) = &cycle {
                    let change =
                        state.iter().zip(before).fold(0.0_f64, |most, (now, then)| most.max((now - then).abs()));
                    cycle_repeats = change < SETTLED_K;
                }
                cycle = Some(state);
            }
        }
        while let Some(event) = events.next_if(|event| event.time_s <= runner.time) {
            let label = runner.apply(&event.change)?;
            marks.push(Mark { time_s: runner.time, label });
        }
    };

    if matches!(plan.record, Recording::Ends) && recorder.last_time() != Some(runner.time) {
        recorder.push(runner.time, &runner.view());
    }
    Ok(Trace {
        sightings: watches.into_iter().map(|watch| watch.sighting).collect(),
        end,
        end_time_s: runner.time,
        start,
        hold,
        finish: runner.view().snapshot(),
        history: recorder.finish(),
        marks,
        switchings: runner.switchings.clone(),
        energy: runner.account(),
        effort: runner.effort(),
    })
}

/// Name of a thermostat's switching.
fn switching_label(section: &Section, heater: usize, on: bool) -> String {
    format!("{} {}", section.heaters[heater].name, if on { "on" } else { "off" })
}

/// Whether what is left of the line's change is too small to matter, judged by its last step.
fn at_rest(runner: &Runner) -> bool {
    // A step of milliseconds leaves temperatures as they are to their last digit: that is no rest.
    let (from, to) = runner.last_step();
    if to - from < SHORTEST_AT_REST * runner.time_scale {
        return false;
    }
    let (kelvin, share) = runner.change();
    kelvin < SETTLED_K && share < SETTLED_SHARE
}

/// Time within the last step at which a watch crosses zero, on the dense output (Illinois' rule).
fn locate(runner: &mut Runner, watch: &Watch, from: f64, to: f64, end_value: f64) -> f64 {
    let (mut low, mut high) = ((from, watch.before), (to, end_value));
    for _ in 0..60 {
        if high.0 - low.0 <= 1e-12 * to.abs() {
            break;
        }
        let mut middle = low.0 + (high.0 - low.0) * low.1 / (low.1 - high.1);
        if !(middle > low.0 && middle < high.0) {
            middle = 0.5 * (low.0 + high.0);
        }
        let value = watch.value(&runner.dense(middle));
        if value.abs() < 1e-12 {
            return middle;
        }
        if value > 0.0 {
            low = (middle, value);
            high.1 *= 0.5;
        } else {
            high = (middle, value);
            low.1 *= 0.5;
        }
    }
    high.0
}

/// Which rows are still to be recorded.
struct Records {
    every: Option<f64>,
    at: Vec<f64>,
    next: usize,
    steps: bool,
    stride: usize,
    seen: usize,
}

impl Records {
    fn new(recording: &Recording) -> Self {
        let (every, at, next, steps) = match recording {
            Recording::Ends => (None, Vec::new(), 0, false),
            Recording::Steps => (None, Vec::new(), 0, true),
            Recording::Every(interval) => (Some(*interval), Vec::new(), 1, false),
            Recording::At(times) => (None, times.iter().copied().filter(|&time| time > 0.0).collect(), 0, false),
        };
        Records { every, at, next, steps, stride: 1, seen: 0 }
    }

    /// Time of the next record [s]: the n-th is n intervals, never a running sum.
    fn upcoming(&self) -> Option<f64> {
        match self.every {
            Some(interval) => Some(self.next as f64 * interval),
            None => self.at.get(self.next).copied(),
        }
    }

    fn take(&mut self, runner: &mut Runner, recorder: &mut Recorder, from: f64, to: f64) {
        if self.steps {
            self.seen += 1;
            if self.seen.is_multiple_of(self.stride) {
                // A long step leaves a corner in a curve: show its inside too.
                if to - from > LONG_STEP_SHARE * to {
                    for part in 1..STEP_PARTS {
                        let time = from + (to - from) * f64::from(part) / f64::from(STEP_PARTS);
                        recorder.push(time, &runner.dense(time));
                    }
                }
                recorder.push(to, &runner.view());
            }
            if recorder.rows() > MOST_ROWS {
                recorder.thin();
                self.stride *= 2;
            }
            return;
        }
        while let Some(time) = self.upcoming() {
            if time > to {
                break;
            }
            if time >= from {
                let view = if time == to { runner.view() } else { runner.dense(time) };
                recorder.push(time, &view);
            }
            self.next += 1;
        }
    }
}

/// Events of a section without those of its supply.
pub fn without_supply_events(section: &Section) -> Section {
    let mut section = section.clone();
    section.events.retain(|event| !matches!(event.change, Change::Supply(_)));
    section
}
