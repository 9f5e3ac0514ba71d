//! What ends a step: thermostats, fronts that leave their cell, faces that reach a freezing point; and what then happens.

use super::super::chain::{Joint, Workspace};
use super::super::front::Front;
use super::super::plan::{FrontTreatment, MarchError};
use super::super::view::View;
use super::{NEWTON_SHARE, Runner};

/// How near a temperature comes to a switching point when a step lands on it, over the step's tolerance: no nearer than
/// Newton's residual leaves it known.
const LANDING_TEMPERATURE: f64 = 2.0 * NEWTON_SHARE;
/// How near a front comes to a cell's face when a step lands on it, in shares of the cell.
const LANDING_SHARE: f64 = 1e-5;
/// How far a front may go back behind the face by which it came, in shares of the cell, before the cell gives it back.
const DEAD_BAND: f64 = 1e-3;
/// A thermostat that switches this often within this time chatters [s].
const CHATTER_SWITCHINGS: usize = 200;
const CHATTER_S: f64 = 100.0;
/// A cell counts as all liquid (or all solid) while what is missing is worth this many temperature tolerances.
const WHOLE_TOLERANCES: f64 = 20.0;

/// A condition on which a step must land: positive before, negative after.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Trigger {
    /// The front has crossed its cell: all solid.
    Full(usize),
    /// The front has gone back through its cell: all liquid.
    Emptied(usize),
    /// The face of a region reaches the freezing point of its liquid, or the melting point of its solid.
    Onset { cell: usize, outer: bool, freezing: bool },
    /// A thermostat switches.
    Thermostat { heater: usize, on: bool },
}

impl Runner<'_> {
    /// Conditions that may end the step that starts now.
    pub(super) fn list_triggers(&mut self) {
        self.triggers.clear();
        for (index, heater) in self.section.heaters.iter().enumerate() {
            if heater.thermostat.is_some() {
                self.triggers.push(Trigger::Thermostat { heater: index, on: !self.controls.called[index] });
            }
        }
        if self.settings.front == FrontTreatment::CellPoint {
            return;
        }
        let mut start = 0;
        for region in 0..self.chain.materials.len() {
            let end = self.chain.region[start..].partition_point(|&other| other == region) + start;
            let sharp = self.chain.materials[region].sharp.is_some();
            let first = start.max(self.chain.first);
            if sharp && first < end {
                for cell in first..end {
                    if self.chain.fronts[cell].is_some() {
                        self.triggers.push(Trigger::Full(cell));
                        self.triggers.push(Trigger::Emptied(cell));
                    }
                }
                for (cell, outer) in [(end - 1, true), (first, false)] {
                    let has_face =
                        outer || matches!(self.chain.links[cell].joint, Joint::Interface | Joint::FixedInside(_));
                    if has_face && self.chain.fronts[cell].is_none() {
                        let share = self.plain_share(cell);
                        if share == Some(0.0) {
                            self.triggers.push(Trigger::Onset { cell, outer, freezing: true });
                        } else if share == Some(1.0) {
                            self.triggers.push(Trigger::Onset { cell, outer, freezing: false });
                        }
                    }
                }
            }
            start = end;
        }
    }

    /// Value of a trigger in an evaluated state: positive before it fires, negative after.
    pub(super) fn trigger_value(&self, trigger: Trigger, x: &[f64], ws: &Workspace, outside_k: f64) -> f64 {
        match trigger {
            Trigger::Full(cell) => {
                let from_liquid = self.chain.fronts[cell].is_none_or(|front| front.from_liquid);
                if from_liquid { 1.0 - x[cell] } else { 1.0 + DEAD_BAND - x[cell] }
            }
            Trigger::Emptied(cell) => {
                let from_liquid = self.chain.fronts[cell].is_none_or(|front| front.from_liquid);
                if from_liquid { x[cell] + DEAD_BAND } else { x[cell] }
            }
            Trigger::Onset { cell, outer, freezing } => {
                let face = if outer {
                    let link = cell + 1;
                    self.chain.face_temperatures(link, outside_k, ws).0
                        - ws.q_left[link] * self.chain.links[link].film_resistance
                } else {
                    self.chain.face_temperatures(cell, outside_k, ws).1
                };
                let Some(sharp) = self.chain.material(cell).sharp else { return 1.0 };
                // A cell that changes phase stands at the freezing point, and so may its face: go by what it lacks.
                if freezing {
                    let lack = (x[cell] - sharp.enthalpy_liquid) / sharp.capacity_liquid;
                    (face - sharp.temperature_k).min(lack.max(-1.0))
                } else {
                    let lack = (sharp.enthalpy_solid - x[cell]) / sharp.capacity_liquid;
                    (sharp.temperature_k - face).min(lack.max(-1.0))
                }
            }
            Trigger::Thermostat { heater, on } => {
                let Some(thermostat) = self.section.heaters[heater].thermostat else { return 1.0 };
                let view = View {
                    section: self.section,
                    mesh: self.mesh,
                    chain: &self.chain,
                    controls: &self.controls,
                    x,
                    ws,
                    outside_k,
                };
                let sensed = view.temperature(thermostat.senses);
                if on { sensed - thermostat.on_below_k } else { thermostat.off_above_k - sensed }
            }
        }
    }

    /// How near a trigger's value must come to zero.
    pub(super) fn landing(&self, trigger: Trigger) -> f64 {
        match trigger {
            Trigger::Full(_) | Trigger::Emptied(_) => LANDING_SHARE,
            Trigger::Onset { .. } | Trigger::Thermostat { .. } => {
                LANDING_TEMPERATURE * self.settings.temperature_tolerance_k
            }
        }
    }

    /// The earliest trigger that fires within the attempted step: its index, its share of the step, its values at the
    /// start and the end. The share is located on the dense output of the attempt.
    pub(super) fn earliest(&mut self, dt: f64) -> Option<(usize, f64, f64, f64)> {
        let (start_outside, end_outside) = (self.outside_k(), self.controls.outside_k.at(self.time + dt));
        let mut found: Option<(usize, f64, f64, f64)> = None;
        for index in 0..self.triggers.len() {
            let trigger = self.triggers[index];
            let end = self.trigger_value(trigger, &self.x_next, &self.step_ws, end_outside);
            if end > 0.0 || end.is_nan() {
                continue;
            }
            let start = self.trigger_value(trigger, &self.x, &self.ws, start_outside).max(0.0);
            let share = if end >= -self.landing(trigger) { 1.0 } else { start / (start - end) };
            if found.is_none_or(|(_, least, ..)| share < least) {
                found = Some((index, share, start, end));
            }
        }
        let (index, share, start, end) = found?;
        if share >= 1.0 {
            return found;
        }
        let trigger = self.triggers[index];
        let close = 0.1 * self.landing(trigger);
        let mut low = (0.0, start);
        let mut high = (1.0, end);
        for _ in 0..40 {
            // Illinois' rule on a bracket.
            let mut tau = low.0 + (high.0 - low.0) * low.1 / (low.1 - high.1);
            if !(tau > low.0 && tau < high.0) {
                tau = 0.5 * (low.0 + high.0);
            }
            self.dense_outside_k = self.controls.outside_k.at(self.time + tau * dt);
            self.fill_dense(tau, dt, false);
            let value = self.trigger_value(trigger, &self.dense_x, &self.dense_ws, self.dense_outside_k);
            if value > 0.0 {
                low = (tau, value);
                high.1 *= 0.5;
            } else {
                high = (tau, value);
                low.1 *= 0.5;
            }
            if value.abs() < close || high.0 - low.0 < 1e-13 {
                high.0 = tau;
                break;
            }
        }
        Some((index, high.0, start, end))
    }

    /// Fires every trigger that has been reached, until none is left; `landed` fires whatever its value, for the step has
    /// landed on it as well as it can. Gives the thermostat that switched, if one did.
    pub fn settle_triggers(&mut self) -> Result<Option<(usize, bool)>, MarchError> {
        self.settle_landed(None)
    }

    pub(super) fn settle_landed(&mut self, landed: Option<Trigger>) -> Result<Option<(usize, bool)>, MarchError> {
        let mut switched = match landed {
            Some(trigger) => self.fire(trigger)?,
            None => None,
        };
        if switched.is_some() {
            return Ok(switched);
        }
        for _ in 0..4 * self.h.len() + 16 {
            self.list_triggers();
            let outside = self.outside_k();
            let reached = self
                .triggers
                .iter()
                .copied()
                .find(|&trigger| self.trigger_value(trigger, &self.x, &self.ws, outside) <= 0.0);
            if let Some(trigger) = reached {
                if let Some(switch) = self.fire(trigger)? {
                    // A thermostat whose own switching carries its sensor across the other point would switch back at
                    // once and for ever: one switching a call.
                    switched = Some(switch);
                    break;
                }
            } else if !self.straighten()? {
                break;
            }
        }
        Ok(switched)
    }

    pub(super) fn fire(&mut self, trigger: Trigger) -> Result<Option<(usize, bool)>, MarchError> {
        match trigger {
            Trigger::Thermostat { heater, on } => {
                self.controls.called[heater] = on;
                // A thermostat whose heater has no power asks in vain: nothing is switched.
                if self.controls.supply && !self.controls.tripped[heater] {
                    let count = &mut self.switchings[heater];
                    if on { count.0 += 1 } else { count.1 += 1 }
                }
                let name = &self.section.heaters[heater].name;
                let recent = &mut self.recent_switchings[heater];
                if self.time - recent.0 > CHATTER_S || self.time < recent.0 {
                    *recent = (self.time, 0);
                }
                recent.1 += 1;
                if recent.1 > CHATTER_SWITCHINGS {
                    return Err(MarchError::NotModelled {
                        reason: format!(
                            "around {:.0} s the thermostat of '{name}' switches {CHATTER_SWITCHINGS} times within {:.3} s: its own \
                             heater throws the place that it senses across the whole differential, as a face without heat \
                             capacity allows\nhint: let it sense a place that the heater does not sit on, or widen the \
                             differential",
                            self.time,
                            self.time - recent.0
                        ),
                    });
                }
                self.last_event = format!("{name} {}", if on { "on" } else { "off" });
                self.transition(|_| {})?;
                self.shorten_after_jump();
                return Ok(Some((heater, on)));
            }
            Trigger::Full(cell) => {
                let front = self.chain.fronts[cell].expect("a full cell had a front");
                self.last_event = "a front reached the next cell".into();
                self.transition(|runner| {
                    runner.chain.fronts[cell] = None;
                    let next = runner.neighbour(cell, !front.solid_outside);
                    if let Some(next) = next
                        && runner.plain_share(next) == Some(0.0)
                    {
                        let entering = Front { from_liquid: true, offset: 0.0, ..front };
                        runner.entering.push((next, entering, 0.0));
                    }
                })?;
            }
            Trigger::Emptied(cell) => {
                let front = self.chain.fronts[cell].expect("an emptied cell had a front");
                self.last_event = "a front went back to the cell it came from".into();
                self.transition(|runner| {
                    runner.chain.fronts[cell] = None;
                    let next = runner.neighbour(cell, front.solid_outside);
                    if let Some(next) = next
                        && runner.plain_share(next) == Some(1.0)
                    {
                        let entering = Front { from_liquid: false, offset: 0.0, ..front };
                        runner.entering.push((next, entering, 1.0));
                    }
                })?;
            }
            Trigger::Onset { cell, outer, freezing } => {
                if freezing && self.mesh.content.contains(&cell) {
                    self.content_has_frozen = true;
                }
                self.last_event = if freezing { "freezing began".into() } else { "melting began".into() };
                let front = Front { solid_outside: outer == freezing, from_liquid: freezing, offset: 0.0 };
                self.transition(|runner| {
                    runner.entering.push((cell, front, if freezing { 0.0 } else { 1.0 }));
                })?;
            }
        }
        Ok(None)
    }

    /// The neighbouring cell of the same region, outwards or inwards.
    pub(super) fn neighbour(&self, cell: usize, outwards: bool) -> Option<usize> {
        let next = if outwards { cell + 1 } else { cell.checked_sub(1)? };
        (next < self.h.len() && self.chain.region[next] == self.chain.region[cell]).then_some(next)
    }

    /// Frozen share of a cell without a front, from its enthalpy, taken whole where it differs from all liquid or all solid
    /// by no more than the step's tolerance leaves uncertain.
    pub(super) fn plain_share(&self, cell: usize) -> Option<f64> {
        if self.chain.fronts[cell].is_some() {
            return None;
        }
        let material = self.chain.material(cell);
        let share = material.frozen_share(self.h[cell] / self.chain.area[cell]);
        let slack = material.sharp.map_or(0.0, |sharp| {
            WHOLE_TOLERANCES * self.settings.temperature_tolerance_k * sharp.capacity_liquid / sharp.latent
        });
        Some(if share <= slack {
            0.0
        } else if share >= 1.0 - slack {
            1.0
        } else {
            share
        })
    }

    /// Puts right what no step lands on: a front whose solid side has warmed beyond the freezing point takes the plain
    /// form; a bare boundary between a solid and a liquid cell gets a front. Says whether anything changed.
    pub(super) fn straighten(&mut self) -> Result<bool, MarchError> {
        if self.settings.front == FrontTreatment::CellPoint {
            return Ok(false);
        }
        for i in self.chain.first..self.h.len() {
            let Some(front) = self.chain.fronts[i] else { continue };
            let (inflow, outflow) = (self.ws.q_right[i], self.ws.q_left[i + 1]);
            // Heat runs from liquid to solid; what a front's parts hold the other way cannot be told apart from noise.
            let slack = 1e-6 * (inflow.abs() + outflow.abs()).max(1e-6);
            let reversed = if front.solid_outside { outflow < -slack } else { inflow > slack && i > self.chain.first };
            let unsolid = if front.solid_outside { outflow } else { -inflow };
            if reversed && unsolid < 0.0 {
                self.last_event = "a front was reversed".into();
                self.transition(|runner| runner.chain.fronts[i] = None)?;
                return Ok(true);
            }
        }
        for i in self.chain.first + 1..self.h.len() {
            if self.chain.region[i] != self.chain.region[i - 1] || self.chain.material(i).sharp.is_none() {
                continue;
            }
            let (Some(inner), Some(outer)) = (self.plain_share(i - 1), self.plain_share(i)) else { continue };
            let (cell, solid_outside) = match (inner == 0.0, inner == 1.0, outer == 0.0, outer == 1.0) {
                (true, _, _, true) => (i - 1, true),
                (_, true, true, _) => (i, false),
                _ => continue,
            };
            if matches!(self.chain.links[i].joint, Joint::Within) {
                let front = Front { solid_outside, from_liquid: true, offset: 0.0 };
                self.transition(|runner| runner.entering.push((cell, front, 0.0)))?;
                return Ok(true);
            }
        }
        Ok(false)
    }
}
