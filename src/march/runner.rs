//! The time loop: adaptive implicit steps that land on everything that switches, with fronts, thermostats and an exact
//! energy account.

mod structure;
mod triggers;

use super::chain::{Chain, Joint, NotConverged, Stage, Workspace};
use super::controls::Controls;
use super::front::Front;
use super::plan::{FrontTreatment, MarchError, Settings};
use super::scheme::{self, MOST_STAGES, Scheme};
use super::view::View;
use crate::history::{Effort, Energy};
use crate::mesh::Mesh;
use crate::section::Section;
use triggers::Trigger;

/// Newton's residual over the step's tolerance.
const NEWTON_SHARE: f64 = 0.01;
/// Attempts to land on one trigger before it is taken to fire where the step stands.
const LANDING_TRIES: usize = 8;
/// A section that has taken this many steps without getting on is stuck.
const STUCK_STEPS: usize = 2000;
/// Shortest step over the time scale of the section.
const SHORTEST_STEP: f64 = 1e-16;

/// Why [`Runner::advance`] came back.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Stop {
    /// The time was reached.
    Time,
    /// A thermostat switched.
    Switched { heater: usize, on: bool },
    /// The observer asked to stop.
    Asked,
}

/// What an observer answers.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Flow {
    /// Go on.
    Go,
    /// Stop here.
    Stop,
}

/// A section under way.
#[derive(Clone)]
pub(super) struct Runner<'a> {
    pub section: &'a Section,
    pub mesh: &'a Mesh,
    settings: Settings,
    scheme: Scheme,
    pub chain: Chain,
    pub controls: Controls,
    /// Time now [s].
    pub time: f64,
    /// Enthalpy of every cell [J/m]; of a merged liquid in its last cell.
    h: Vec<f64>,
    /// Unknown of every cell.
    x: Vec<f64>,
    /// Net heat into every cell [W/m].
    f: Vec<f64>,
    ws: Workspace,
    h_next: Vec<f64>,
    /// Enthalpy at the scheme's inner stage, for dense output [J/m].
    h_middle: Vec<f64>,
    x_next: Vec<f64>,
    known: Vec<f64>,
    weight: Vec<f64>,
    stages: Vec<Vec<f64>>,
    stage_lost: [f64; MOST_STAGES],
    stage_carried: [f64; MOST_STAGES],
    triggers: Vec<Trigger>,
    entering: Vec<(usize, Front, f64)>,
    /// The last step: its start and length [s].
    step_start: f64,
    step_length: f64,
    dense_h: Vec<f64>,
    dense_x: Vec<f64>,
    dense_ws: Workspace,
    step_ws: Workspace,
    dense_outside_k: f64,
    /// Step to try next [s].
    next_step: f64,
    /// Time scale of the section [s].
    pub time_scale: f64,
    pub energy: Energy,
    gross: f64,
    h_start_sum: f64,
    pub effort: Effort,
    /// What happened last, for messages.
    pub last_event: String,
    /// Switchings of each heater's thermostat: (on, off).
    pub switchings: Vec<(usize, usize)>,
    /// Since when each thermostat's recent switchings are counted [s], and how many there were.
    recent_switchings: Vec<(f64, usize)>,
    /// Whether any ice has appeared in the content, or was there from the start.
    pub content_has_frozen: bool,
}

impl<'a> Runner<'a> {
    /// A runner at 0 h with every cell at its given temperature [K].
    pub fn new(section: &'a Section, mesh: &'a Mesh, settings: &Settings, temperature: impl Fn(usize) -> f64) -> Self {
        let mut chain = Chain::new(section, mesh);
        chain.sensible = settings.front != FrontTreatment::Placed;
        let cells = chain.cells();
        let x: Vec<f64> = (0..cells).map(|cell| chain.material(cell).enthalpy.at(temperature(cell))).collect();
        let h: Vec<f64> = (0..cells).map(|cell| chain.area[cell] * x[cell]).collect();
        let capacity: f64 =
            (0..cells).map(|cell| chain.area[cell] * chain.material(cell).enthalpy.rate(temperature(cell))).sum();
        let mut runner = Runner {
            section,
            mesh,
            settings: *settings,
            scheme: scheme::THIRD,
            chain,
            controls: Controls::new(section),
            time: 0.0,
            h_next: h.clone(),
            h_middle: h.clone(),
            x_next: x.clone(),
            f: vec![0.0; cells],
            ws: Workspace::new(cells),
            known: vec![0.0; cells],
            weight: vec![0.0; cells],
            stages: vec![vec![0.0; cells]; MOST_STAGES],
            stage_lost: [0.0; MOST_STAGES],
            stage_carried: [0.0; MOST_STAGES],
            triggers: Vec::with_capacity(cells + 8),
            entering: Vec::with_capacity(8),
            step_start: 0.0,
            step_length: 0.0,
            dense_h: h.clone(),
            dense_x: x.clone(),
            dense_ws: Workspace::new(cells),
            step_ws: Workspace::new(cells),
            dense_outside_k: 0.0,
            next_step: 0.0,
            time_scale: 0.0,
            energy: Energy::default(),
            gross: 0.0,
            h_start_sum: 0.0,
            effort: Effort { cells, ..Effort::default() },
            last_event: "start".into(),
            switchings: vec![(0, 0); section.heaters.len()],
            recent_switchings: vec![(0.0, 0); section.heaters.len()],
            content_has_frozen: false,
            h,
            x,
        };
        runner.time_scale = capacity * runner.resistance_to_outside();
        runner.next_step = 1e-3 * runner.time_scale;
        runner
    }

    /// Rough resistance from the innermost cell to the outside [m K/W].
    fn resistance_to_outside(&self) -> f64 {
        let mut sum = 0.0;
        for (index, layer) in self.section.layers.iter().enumerate() {
            let first = self.mesh.layers[index].start;
            let conductivity =
                layer.material.conductivity(self.chain.material(first).enthalpy.inverse(self.x[first]).0);
            sum += (layer.outside_radius_m / layer.inside_radius_m).ln() / (2.0 * std::f64::consts::PI * conductivity)
                + layer.contact.resistance_m_k_per_w;
        }
        if let Some(material) = &self.section.content.material {
            sum += 1.0 / (4.0 * std::f64::consts::PI * material.conductivity(273.15));
        }
        if let Some(film) = self.section.outside.film {
            sum += Chain::film_resistance(film, self.section.outermost_radius_m());
        }
        sum.max(1e-6)
    }

    /// Makes the state that was set consistent and answers what it triggers: content, heaters, fronts, fluxes. The account
    /// starts here.
    pub fn begin(&mut self) -> Result<(), MarchError> {
        self.make_consistent()?;
        self.settle_triggers()?;
        self.start_account();
        Ok(())
    }

    /// Makes the state that was set consistent without letting anything switch.
    pub fn make_consistent(&mut self) -> Result<(), MarchError> {
        self.transition(|_| {})
    }

    fn start_account(&mut self) {
        self.energy = Energy::default();
        self.gross = 0.0;
        self.h_start_sum = self.h_sum();
        self.content_has_frozen = self.view().frozen_share() > 0.0 || self.content_front();
    }

    fn content_front(&self) -> bool {
        self.mesh.content.clone().any(|cell| self.chain.fronts[cell].is_some())
    }

    fn h_sum(&self) -> f64 {
        self.h[self.chain.first..].iter().sum()
    }

    /// Temperature of the outside now [K].
    pub fn outside_k(&self) -> f64 {
        self.controls.outside_k.at(self.time)
    }

    /// The state now.
    pub fn view(&self) -> View<'_> {
        View {
            section: self.section,
            mesh: self.mesh,
            chain: &self.chain,
            controls: &self.controls,
            x: &self.x,
            ws: &self.ws,
            outside_k: self.outside_k(),
        }
    }

    /// Start and end of the last step [s].
    pub fn last_step(&self) -> (f64, f64) {
        (self.step_start, self.step_start + self.step_length)
    }

    /// The state at a time within the last step, from the cubic through both ends and their rates; faces and fronts are
    /// solved again for the enthalpies found.
    pub fn dense(&mut self, time: f64) -> View<'_> {
        let dt = self.step_length;
        let tau = if dt > 0.0 { ((time - self.step_start) / dt).clamp(0.0, 1.0) } else { 1.0 };
        self.dense_outside_k = self.controls.outside_k.at(self.step_start + tau * dt);
        // After acceptance h_next and x_next hold the state at the step's start.
        self.fill_dense(tau, dt, true);
        View {
            section: self.section,
            mesh: self.mesh,
            chain: &self.chain,
            controls: &self.controls,
            x: &self.dense_x,
            ws: &self.dense_ws,
            outside_k: self.dense_outside_k,
        }
    }

    fn fill_dense(&mut self, tau: f64, dt: f64, accepted: bool) {
        let (h0, h1, x0, x1) = if accepted {
            (&self.h_next, &self.h, &self.x_next, &self.x)
        } else {
            (&self.h, &self.h_next, &self.x, &self.x_next)
        };
        // The cubic through the start, an inner stage and the end, with the end's rate. The start's rate is left out: after
        // a sudden change it is that of a stiff transient, long gone within the step.
        let last = self.scheme.stages - 1;
        let from_middle = 1.0 - self.scheme.c[self.scheme.middle];
        let from_end = 1.0 - tau;
        for i in self.chain.first..h0.len() {
            let change = dt * self.stages[last][i];
            let whole = h0[i] - h1[i] + change;
            let part = (self.h_middle[i] - h1[i] + from_middle * change) / (from_middle * from_middle);
            let cubic = (whole - part) / (1.0 - from_middle);
            self.dense_h[i] = h1[i] + from_end * (from_end * (whole - cubic + cubic * from_end) - change);
            self.dense_x[i] = if self.chain.fronts[i].is_some() {
                (1.0 - tau) * x0[i] + tau * x1[i]
            } else {
                self.dense_h[i] / self.chain.area[i]
            };
        }
        // Start from the same guess whatever was asked before: records must not change what is found.
        self.dense_ws.q_left.copy_from_slice(&self.ws.q_left);
        // A front that cannot be solved for keeps the interpolated place: the picture suffers, not the march.
        let _ = self.chain.solve(
            &mut self.dense_x,
            Stage {
                known: &self.dense_h,
                g: 0.0,
                outside_k: self.dense_outside_k,
                weight: &self.weight,
                tolerance: NEWTON_SHARE,
            },
            &mut self.dense_ws,
        );
    }

    /// One over each cell's tolerance [m/J].
    fn set_weights(&mut self) {
        for i in self.chain.first..self.h.len() {
            let material = self.chain.material(i);
            let share = self.chain.frozen_share(i, &self.x);
            let changing = self.chain.fronts[i].is_some() || (share > 0.0 && share < 1.0);
            let tolerance = if changing {
                let latent = match (&material.sharp, material.freezing_k) {
                    (Some(sharp), _) => sharp.latent,
                    (None, Some((solidus, liquidus))) => material.enthalpy.at(liquidus) - material.enthalpy.at(solidus),
                    _ => 1.0,
                };
                latent * self.chain.region_area[self.chain.region[i]] * self.settings.share_tolerance
            } else {
                let rate = material.enthalpy.rate(self.ws.temperature[i]);
                self.chain.area[i] * rate * self.settings.temperature_tolerance_k
            };
            self.weight[i] = 1.0 / tolerance;
        }
    }

    /// Re-solves fronts and fluxes at the enthalpies of now.
    fn refresh(&mut self) -> Result<(), MarchError> {
        for i in self.chain.first..self.h.len() {
            if self.chain.fronts[i].is_none() {
                self.x[i] = self.h[i] / self.chain.area[i];
            }
        }
        let outside = self.outside_k();
        self.chain.evaluate(&self.x, outside, &mut self.ws);
        self.set_weights();
        let solved = self.chain.solve(
            &mut self.x,
            Stage { known: &self.h, g: 0.0, outside_k: outside, weight: &self.weight, tolerance: NEWTON_SHARE },
            &mut self.ws,
        );
        if solved.is_err() {
            return Err(self.failure(0.0, 1));
        }
        for i in self.chain.first..self.h.len() {
            self.f[i] = self.chain.net(i, &self.ws);
        }
        Ok(())
    }

    /// One step of length `dt` into `h_next`, `x_next`; gives the error over the tolerance.
    fn attempt(&mut self, dt: f64) -> Result<f64, NotConverged> {
        let scheme = self.scheme;
        let first = self.chain.first;
        let cells = self.h.len();
        self.x_next.copy_from_slice(&self.x);
        self.stages[0][first..].copy_from_slice(&self.f[first..]);
        let view = self.view();
        let (lost, carried) = (view.lost(), view.carried());
        self.stage_lost[0] = lost;
        self.stage_carried[0] = carried;
        for stage in 1..scheme.stages {
            self.known[first..].copy_from_slice(&self.h[first..]);
            for earlier in 0..stage {
                let factor = dt * scheme.a[stage][earlier];
                if factor != 0.0 {
                    let rates = &self.stages[earlier];
                    for i in first..cells {
                        self.known[i] += factor * rates[i];
                    }
                }
            }
            let outside = self.controls.outside_k.at(self.time + scheme.c[stage] * dt);
            self.chain.solve(
                &mut self.x_next,
                Stage {
                    known: &self.known,
                    g: dt * scheme.gamma,
                    outside_k: outside,
                    weight: &self.weight,
                    tolerance: NEWTON_SHARE,
                },
                &mut self.step_ws,
            )?;
            for i in first..cells {
                self.stages[stage][i] = self.chain.net(i, &self.step_ws);
            }
            if stage == scheme.middle {
                for i in first..cells {
                    self.h_middle[i] = self.known[i] + dt * scheme.gamma * self.stages[stage][i];
                }
            }
            self.stage_lost[stage] = self.step_ws.q_right[cells];
            self.stage_carried[stage] = match self.chain.links[first].joint {
                Joint::FixedInside(_) => self.step_ws.q_left[first],
                _ => 0.0,
            };
        }
        let mut worst = 0.0_f64;
        for i in first..cells {
            let (mut change, mut error) = (0.0, 0.0);
            for stage in 0..scheme.stages {
                let b = scheme.b(stage);
                change += b * self.stages[stage][i];
                error += (b - scheme.embedded[stage]) * self.stages[stage][i];
            }
            self.h_next[i] = self.h[i] + dt * change;
            // What round-off leaves uncertain is no error of the step.
            let noise = self.chain.net_noise(i, &self.x_next, &self.step_ws);
            let size = dt * (error.abs() - noise).max(0.0) * self.weight[i];
            if size > worst || error.is_nan() {
                worst = if error.is_nan() { f64::NAN } else { size };
            }
        }
        Ok(worst)
    }

    /// Takes the step just attempted.
    fn accept(&mut self, dt: f64) {
        let first = self.chain.first;
        let scheme = self.scheme;
        std::mem::swap(&mut self.h, &mut self.h_next);
        std::mem::swap(&mut self.x, &mut self.x_next);
        std::mem::swap(&mut self.ws, &mut self.step_ws);
        self.f[first..].copy_from_slice(&self.stages[scheme.stages - 1][first..]);
        let (mut lost, mut carried) = (0.0, 0.0);
        for stage in 0..scheme.stages {
            lost += scheme.b(stage) * self.stage_lost[stage];
            carried += scheme.b(stage) * self.stage_carried[stage];
        }
        let supplied = self.controls.total_power();
        self.energy.supplied_j_per_m += dt * supplied;
        self.energy.lost_j_per_m += dt * lost;
        self.energy.carried_j_per_m += dt * carried;
        // The largest flow anywhere in the section bounds what round-off can be measured against.
        let exchanged = self.ws.q_left[first..].iter().fold(supplied, |most, q| most.max(q.abs()));
        self.gross += dt * exchanged.max(carried.abs());
        self.step_start = self.time;
        self.step_length = dt;
        self.time += dt;
        self.effort.steps += 1;
    }

    /// The energy account up to now.
    pub fn account(&self) -> Energy {
        let mut energy = self.energy;
        energy.stored_j_per_m = self.h_sum() - self.h_start_sum;
        let miss = energy.supplied_j_per_m + energy.carried_j_per_m - energy.lost_j_per_m - energy.stored_j_per_m;
        // The floor: what a thousandth of a kelvin of the whole section holds, so that nothing happening gives 0.
        let floor: f64 = 1e-3
            * (self.chain.first..self.h.len())
                .map(|i| self.chain.area[i] * self.chain.material(i).enthalpy.rate(self.ws.temperature[i]))
                .sum::<f64>();
        energy.residual_relative = miss.abs() / self.gross.max(floor);
        energy
    }

    /// The effort up to now.
    pub fn effort(&self) -> Effort {
        Effort {
            newton_iterations: self.ws.iterations + self.step_ws.iterations + self.dense_ws.iterations,
            ..self.effort
        }
    }

    /// After a sudden change the old step length means nothing: start from what the fastest cell allows.
    pub fn shorten_after_jump(&mut self) {
        let mut fastest = 0.0_f64;
        for i in self.chain.first..self.h.len() {
            fastest = fastest.max((self.f[i] * self.weight[i]).abs());
        }
        let step = if fastest > 0.0 { 10.0 / fastest } else { self.time_scale };
        self.next_step = self.next_step.min(step).max(1e-9 * self.time_scale);
        if fastest * self.next_step > 1e4 {
            self.next_step = 1e2 / fastest;
        }
    }

    /// What the last step changed, carried on for the section's time scale where the step was shorter: the largest change
    /// of a temperature [K], and of a region's frozen share [-]. (Rates of the moment would tell of Newton's residual.)
    pub fn change(&self) -> (f64, f64) {
        let (mut kelvin, mut share) = (0.0_f64, 0.0_f64);
        let longer = (self.time_scale / self.step_length).max(1.0);
        for i in self.chain.first..self.h.len() {
            let material = self.chain.material(i);
            let part = self.chain.frozen_share(i, &self.x);
            if let (Some(sharp), true) = (&material.sharp, self.chain.fronts[i].is_some() || (part > 0.0 && part < 1.0))
            {
                let change = (self.h[i] - self.h_next[i]).abs() * longer;
                share = share.max(change / (sharp.latent * self.chain.region_area[self.chain.region[i]]));
            } else {
                // By the solved temperature: round-off of the flows gathers in the enthalpy of a cell of next to no capacity.
                let before = material.enthalpy.inverse(self.x_next[i]).0;
                kelvin = kelvin.max((self.ws.temperature[i] - before).abs() * longer);
            }
        }
        (kelvin, share)
    }

    /// Puts every cell at a temperature [K], without fronts; [`begin`](Self::begin) makes it consistent.
    pub fn set_temperatures(&mut self, temperature: &[f64]) {
        self.chain.split_inner(self.mesh);
        for (cell, &kelvin) in temperature.iter().enumerate() {
            self.chain.fronts[cell] = None;
            self.x[cell] = self.chain.material(cell).enthalpy.at(kelvin);
            self.h[cell] = self.chain.area[cell] * self.x[cell];
        }
        self.chain.first = if self.content_takes_part() { 0 } else { self.mesh.content.end };
    }

    /// Writes content, heaters and outside into the chain without solving for anything.
    pub fn prepare(&mut self) {
        self.spread_lump();
        self.controls.write(self.section, self.mesh, &mut self.chain);
        self.controls.write_inner(self.section, self.mesh, &mut self.chain);
        self.gather_lump();
        self.place_content_joints();
    }

    /// Starts the clock, the account and the counts of switchings anew at 0 h; the state and the effort stay.
    pub fn restart(&mut self) -> Result<(), MarchError> {
        self.reset_clock();
        self.begin()
    }

    /// The same, but nothing switches yet: what the state triggers is answered at the first event or step.
    pub fn restart_without_switching(&mut self) -> Result<(), MarchError> {
        self.reset_clock();
        self.make_consistent()?;
        self.start_account();
        Ok(())
    }

    fn reset_clock(&mut self) {
        self.time = 0.0;
        self.step_length = 0.0;
        self.switchings.fill((0, 0));
    }

    /// Temperature of every cell [K]; merged cells at the temperature of their liquid.
    pub fn temperatures(&self) -> Vec<f64> {
        (0..self.h.len()).map(|cell| self.ws.temperature[cell.max(self.chain.first)]).collect()
    }

    // ---- the loop ------------------------------------------------------------------------------------------------

    /// Marches to `until`, landing on it, telling the observer of every accepted step before anything switches.
    pub fn advance(
        &mut self,
        until: f64,
        observer: &mut dyn FnMut(&mut Self) -> Result<Flow, MarchError>,
    ) -> Result<Stop, MarchError> {
        let resolution = |time: f64| 4.0 * f64::EPSILON * time.abs();
        let growth_power = -1.0 / f64::from(self.scheme.order);
        let mut stuck = (self.time, 0);
        while until - self.time > resolution(until) {
            let remaining = until - self.time;
            let mut dt = self.next_step.min(remaining);
            if remaining - dt < 0.01 * dt {
                dt = remaining;
            }
            self.list_triggers();
            self.set_weights();
            let mut attempts = 0;
            let mut wished = f64::INFINITY;
            // The landings tried: step length and value there of the trigger aimed at.
            let mut landing: Option<(Trigger, f64, f64)> = None;
            let mut landing_tries = 0;
            let mut landed = None;
            loop {
                attempts += 1;
                if attempts > 80 || dt < SHORTEST_STEP * self.time_scale || dt <= resolution(self.time) * 0.25 {
                    return Err(self.failure(dt, attempts));
                }
                let Ok(error) = self.attempt(dt) else {
                    self.effort.rejected_steps += 1;
                    dt *= 0.25;
                    continue;
                };
                if error > 1.0 || error.is_nan() {
                    self.effort.rejected_steps += 1;
                    let factor = if error.is_finite() { 0.9 * error.powf(growth_power) } else { 0.1 };
                    dt *= factor.clamp(0.1, 0.8);
                    continue;
                }
                if landing_tries == 0 {
                    wished = dt * (0.9 * error.max(1e-10).powf(growth_power)).clamp(0.2, 6.0);
                }
                // A landing that falls short of its trigger by less than its tolerance has landed.
                if let Some((trigger, ..)) = landing {
                    let outside = self.controls.outside_k.at(self.time + dt);
                    let value = self.trigger_value(trigger, &self.x_next, &self.step_ws, outside);
                    if value.abs() <= self.landing(trigger) {
                        landed = Some(trigger);
                        break;
                    }
                }
                let Some((index, share, start, end)) = self.earliest(dt) else { break };
                let trigger = self.triggers[index];
                if share >= 1.0 || landing_tries >= LANDING_TRIES {
                    landed = Some(trigger);
                    break;
                }
                // The first landing trusts dense output; later ones the attempts themselves, by the secant through the
                // last two (the start stands in for the one before the first).
                let next = match landing {
                    Some((same, length, value)) if same == trigger && value != end => {
                        let guess = dt - end * (dt - length) / (end - value);
                        if guess > 0.0 && guess < dt { guess } else { dt * start / (start - end) }
                    }
                    _ => dt * share,
                };
                landing = Some((trigger, dt, end));
                landing_tries += 1;
                self.effort.rejected_steps += 1;
                // Never stand on the spot: what fires at once is taken after the shortest step that time can tell.
                let shortest = 8.0 * resolution(self.time).max(2.0 * SHORTEST_STEP * self.time_scale);
                if next <= shortest {
                    landing_tries = LANDING_TRIES;
                }
                dt = next.max(shortest).min(dt);
            }
            self.accept(dt);
            if (until - self.time).abs() <= resolution(until) {
                self.time = until;
            }
            self.next_step = wished.max(dt);
            if self.time - stuck.0 > 1e-9 * self.time_scale {
                stuck = (self.time, 0);
            }
            stuck.1 += 1;
            if stuck.1 > STUCK_STEPS {
                return Err(self.failure(dt, attempts));
            }
            if observer(self)? == Flow::Stop {
                return Ok(Stop::Asked);
            }
            if let Some((heater, on)) = self.settle_landed(landed)? {
                return Ok(Stop::Switched { heater, on });
            }
        }
        Ok(Stop::Time)
    }

    fn failure(&self, step_s: f64, attempts: usize) -> MarchError {
        let (cell, size) = if self.step_ws.worst.1 > self.ws.worst.1 { self.step_ws.worst } else { self.ws.worst };
        let region = self.chain.region[cell];
        let content = usize::from(!self.mesh.content.is_empty());
        let name = if region < content { "content" } else { &self.section.layers[region - content].name };
        let point = self.mesh.cells[cell];
        MarchError::StepTooSmall {
            time_s: self.time,
            step_s,
            attempts,
            place: format!("{name} at radius {:.3} mm", 1e3 * point.point_m),
            temperature_degc: self.ws.temperature[cell] - 273.15,
            residual_k: size * self.settings.temperature_tolerance_k,
            last_event: self.last_event.clone(),
            hint: "check the properties of the layer named, above all steep tables and extreme ratios between neighbours",
        }
    }
}
