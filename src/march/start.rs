//! The state at 0 h: uniform, from a reading, or held, with or without a cycling thermostat.

use super::plan::{CyclePhase, Hold, MarchError, Settings};
use super::runner::{Flow, Runner, Stop};
use crate::mesh::Mesh;
use crate::section::{ContentState, Place, Section, Start};
use crate::series::Series;

/// Cycles tried before a thermostat is said not to settle.
const MOST_CYCLES: usize = 3000;
/// Remaining change of any cell from cycle to cycle, over the step's tolerance, at which the cycle counts as repeating.
const CYCLE_SHARE: f64 = 0.1;

/// A runner at 0 h as the section's start says.
pub(super) fn begin<'a>(
    section: &'a Section,
    mesh: &'a Mesh,
    settings: &Settings,
    phase: CyclePhase,
) -> Result<(Runner<'a>, Hold), MarchError> {
    let outside = section.outside.temperature_k.at(0.0);
    match section.start {
        Start::Uniform(temperature) => {
            let mut runner = Runner::new(section, mesh, settings, |_| temperature);
            call_thermostats(&mut runner, temperature);
            runner.begin()?;
            Ok((runner, Hold::None))
        }
        Start::Reading { place, temperature_k } => {
            let mut runner = Runner::new(section, mesh, settings, |_| temperature_k);
            runner.prepare();
            let profile = reading(&runner, place, temperature_k, outside)?;
            runner.set_temperatures(&profile);
            call_thermostats(&mut runner, temperature_k);
            runner.begin()?;
            Ok((runner, Hold::None))
        }
        Start::Hold => hold(section, mesh, settings, phase),
    }
}

/// A thermostat between its two points at the start could be either; it is taken as off until it falls to its lower one.
fn call_thermostats(runner: &mut Runner, inside_k: f64) {
    let air = runner.outside_k();
    for (index, heater) in runner.section.heaters.iter().enumerate() {
        if let Some(thermostat) = heater.thermostat {
            let sensed = if thermostat.senses == Place::Air { air } else { inside_k };
            runner.controls.called[index] = sensed <= thermostat.on_below_k;
        }
    }
}

/// Everything inside the place at the reading; outside it the steady profile between the reading and the outside, without
/// heaters.
fn reading(runner: &Runner, place: Place, reading_k: f64, outside_k: f64) -> Result<Vec<f64>, MarchError> {
    let mesh = runner.mesh;
    // First cell outside the place.
    let from = match place {
        Place::Centre | Place::ContentMean | Place::ContentSurface | Place::Air => mesh.content.end,
        Place::Face(face) => match face.side {
            crate::section::Side::Inside => mesh.layers[face.layer].start,
            crate::section::Side::Outside => mesh.layers[face.layer].end,
        },
        Place::LayerMean(layer) => mesh.layers[layer].end,
        Place::Radius(radius) => mesh.cells.partition_point(|cell| cell.point_m < radius),
    };
    let mut chain = runner.chain.clone();
    for link in &mut chain.links {
        link.power_left = 0.0;
        link.power_right = 0.0;
    }
    chain.source.fill(0.0);
    let mut temperature = vec![reading_k; mesh.cells.len()];
    if from < mesh.cells.len() {
        chain.first = from;
        if let Place::Face(face) = place
            && face.side == crate::section::Side::Inside
        {
            // The reading lies on the layer's own side of its contact.
            chain.links[from].resistance = 0.0;
        }
        solve_inflow(&chain, reading_k, outside_k, &mut temperature)?;
        temperature[..from].fill(reading_k);
    }
    Ok(temperature)
}

/// Finds the inflow at which the temperature left of the first link is `inside_k`. The sweep rises steadily with it.
pub(super) fn solve_inflow(
    chain: &super::chain::Chain,
    inside_k: f64,
    outside_k: f64,
    temperature: &mut [f64],
) -> Result<f64, MarchError> {
    let mut miss = |inflow: f64| chain.steady_sweep(inflow, outside_k, temperature) - inside_k;
    root(&mut miss, 0.0, 1.0).ok_or_else(|| MarchError::NoSteadyState {
        reason: "the heat flow from the inside could not be bracketed".into(),
    })
}

/// Root of a rising function near two starting points: secant steps inside a bracket that is widened first.
pub(super) fn root(function: &mut dyn FnMut(f64) -> f64, first: f64, second: f64) -> Option<f64> {
    let (mut a, mut b) = (first, second);
    let (mut fa, mut fb) = (function(a), function(b));
    if fa == 0.0 {
        return Some(a);
    }
    // The secant of the two is exact where the function is a line; else it is where the bracket starts.
    if fb != fa {
        let guess = a - fa * (b - a) / (fb - fa);
        let width = 1e-3 * guess.abs().max(1e-3);
        let (low, high) = (guess - width, guess + width);
        let (f_low, f_high) = (function(low), function(high));
        (a, b, fa, fb) = (low, high, f_low, f_high);
    }
    let mut widen = (b - a).abs().max(1e-6);
    for _ in 0..80 {
        if fa <= 0.0 && fb >= 0.0 {
            break;
        }
        widen *= 2.0;
        if fa > 0.0 {
            a -= widen;
            fa = function(a);
        }
        if fb < 0.0 {
            b += widen;
            fb = function(b);
        }
    }
    if !(fa <= 0.0 && fb >= 0.0) {
        return None;
    }
    let mut best = if fa.abs() < fb.abs() { a } else { b };
    for _ in 0..200 {
        if fa == fb || (b - a).abs() <= 2.0 * f64::EPSILON * (a.abs() + b.abs()) {
            break;
        }
        let mut middle = a - fa * (b - a) / (fb - fa);
        if !(middle > a && middle < b) {
            middle = 0.5 * (a + b);
        }
        let f = function(middle);
        best = middle;
        if f == 0.0 {
            break;
        }
        if f < 0.0 {
            if middle - a <= f64::EPSILON * middle.abs() {
                break;
            }
            (a, fa) = (middle, f);
            fb *= 0.5;
        } else {
            if b - middle <= f64::EPSILON * middle.abs() {
                break;
            }
            (b, fb) = (middle, f);
            fa *= 0.5;
        }
    }
    function(best);
    Some(best)
}

/// Steady temperatures of every cell for the heaters as the controls have them.
pub(super) fn steady_profile(runner: &mut Runner) -> Result<Vec<f64>, MarchError> {
    runner.prepare();
    let outside = runner.outside_k();
    let mut temperature = vec![outside; runner.mesh.cells.len()];
    match runner.controls.content {
        ContentState::Flowing { temperature_k, .. } | ContentState::HeldAt { temperature_k } => {
            solve_inflow(&runner.chain, temperature_k, outside, &mut temperature)?;
        }
        _ => {
            runner.chain.steady_sweep(0.0, outside, &mut temperature);
        }
    }
    if temperature.iter().any(|kelvin| !kelvin.is_finite()) {
        return Err(MarchError::NoSteadyState { reason: "the temperatures are not finite".into() });
    }
    Ok(temperature)
}

/// Sets the controls' calls and the runner's state to the balance under them, without letting a thermostat answer.
fn balance_with(runner: &mut Runner, called: &[bool]) -> Result<(), MarchError> {
    runner.controls.called.copy_from_slice(called);
    let profile = steady_profile(runner)?;
    runner.set_temperatures(&profile);
    runner.make_consistent()
}

fn hold<'a>(
    section: &'a Section,
    mesh: &'a Mesh,
    settings: &Settings,
    phase: CyclePhase,
) -> Result<(Runner<'a>, Hold), MarchError> {
    let outside = section.outside.temperature_k.at(0.0);
    let mut runner = Runner::new(section, mesh, settings, |_| outside);
    // A hold settles under the outside of 0 h, however long it takes: the weather waits.
    runner.controls.outside_k = Series::Constant(outside);
    let thermostats: Vec<_> =
        section.heaters.iter().enumerate().filter_map(|(index, heater)| Some((index, heater.thermostat?))).collect();
    let on_air = |index: &usize| section.heaters[*index].thermostat.is_some_and(|t| t.senses == Place::Air);
    let mut on = vec![true; section.heaters.len()];
    let mut off = on.clone();
    for (index, thermostat) in &thermostats {
        off[*index] = false;
        if on_air(index) {
            on[*index] = outside <= thermostat.on_below_k;
            off[*index] = on[*index];
        }
    }
    let sensing: Vec<_> = thermostats.iter().filter(|(index, _)| !on_air(index)).copied().collect();
    let balance = |runner: &mut Runner<'a>| -> Result<Hold, MarchError> {
        runner.controls.outside_k = section.outside.temperature_k.clone();
        runner.restart()?;
        Ok(Hold::Balance { heater_w_per_m: runner.controls.total_power() })
    };

    balance_with(&mut runner, &on)?;
    if sensing.iter().all(|(_, thermostat)| runner.view().temperature(thermostat.senses) < thermostat.off_above_k) {
        let held = balance(&mut runner)?;
        return Ok((runner, held));
    }
    balance_with(&mut runner, &off)?;
    if sensing.iter().all(|(_, thermostat)| runner.view().temperature(thermostat.senses) > thermostat.on_below_k) {
        let held = balance(&mut runner)?;
        return Ok((runner, held));
    }

    // Somewhere between: start from the balance that puts the first sensor in the middle of its band.
    let (lead, thermostat) = sensing[0];
    let middle = 0.5 * (thermostat.on_below_k + thermostat.off_above_k);
    let full = runner.controls.output_w_per_m.clone();
    let mut failed = None;
    let mut sensed = |share: f64| {
        for (index, _) in &sensing {
            runner.controls.output_w_per_m[*index] = share * full[*index];
        }
        match balance_with(&mut runner, &on) {
            Ok(()) => runner.view().temperature(thermostat.senses) - middle,
            Err(error) => {
                failed = Some(error);
                0.0
            }
        }
    };
    let found = root(&mut sensed, 0.4, 0.6);
    if let Some(error) = failed {
        return Err(error);
    }
    if found.is_none() {
        return Err(MarchError::NoCycle { reason: "the heaters do not move the thermostat's own sensor".into() });
    }
    runner.controls.output_w_per_m.clone_from(&full);
    runner.restart()?;

    let mut on_state: Option<(f64, Vec<f64>)> = None;
    let mut last_change = f64::INFINITY;
    let mut off_time = 0.0;
    let mut cycles = 0;
    let horizon = 1e3 * runner.time_scale;
    let mut quiet = |_: &mut Runner| Ok(Flow::Go);
    let mut settled: Option<(f64, f64)> = None;
    loop {
        let stop = runner.advance(horizon, &mut quiet)?;
        match stop {
            Stop::Time | Stop::Asked => {
                return Err(MarchError::NoCycle {
                    reason: format!("{cycles} cycles in {:.0} h, and then none", runner.time / 3600.0),
                });
            }
            Stop::Switched { heater, on: false } if heater == lead => {
                off_time = runner.time;
                if let Some((period_s, duty)) = settled {
                    // The cycle repeats: this is the instant after it switched off.
                    return finish(runner, Hold::Cycle { period_s, duty });
                }
            }
            Stop::Switched { heater, on: true } if heater == lead => {
                cycles += 1;
                let state = runner.temperatures();
                if let Some((since, before)) = &on_state {
                    let change =
                        state.iter().zip(before).fold(0.0_f64, |most, (now, then)| most.max((now - then).abs()));
                    // A geometric tail is what is left of the approach.
                    let ratio = (change / last_change).min(0.999);
                    let left = if last_change.is_finite() { change * ratio / (1.0 - ratio) } else { f64::INFINITY };
                    last_change = change;
                    let enough = CYCLE_SHARE * settings.temperature_tolerance_k;
                    if left < enough && change < 10.0 * enough {
                        let period_s = runner.time - since;
                        let duty = ((off_time - since) / period_s).clamp(0.0, 1.0);
                        let hold = Hold::Cycle { period_s, duty };
                        match phase {
                            CyclePhase::BeforeOn => {
                                runner.controls.called[lead] = false;
                                return finish(runner, hold);
                            }
                            CyclePhase::AfterOff => settled = Some((period_s, duty)),
                        }
                    }
                }
                on_state = Some((runner.time, state));
                if cycles > MOST_CYCLES {
                    return Err(MarchError::NoCycle {
                        reason: format!("after {cycles} cycles one still differs from the next by {last_change:.1e} K"),
                    });
                }
            }
            Stop::Switched { .. } => {}
        }
    }
}

fn finish(mut runner: Runner<'_>, hold: Hold) -> Result<(Runner<'_>, Hold), MarchError> {
    runner.controls.outside_k = runner.section.outside.temperature_k.clone();
    runner.restart_without_switching()?;
    Ok((runner, hold))
}
