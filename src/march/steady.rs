//! The steady state of a section.
//!
//! At rest the heat that passes any radius is the sum of the heaters inside it and of what the content brings, so that
//! temperatures follow from the outside inwards, each exactly, by the Kirchhoff integrals of the layers; only a content at a
//! fixed temperature leaves one unknown, the heat that it brings.

use super::controls::Controls;
use super::network::Network;
use super::plan::{MarchError, Settings};
use super::record::Recorder;
use super::runner::Runner;
use super::start::{root, steady_profile};
use super::view::View;
use crate::history::{History, Snapshot};
use crate::mesh::Mesh;
use crate::section::{ContentState, Face, Place, Section, Side};

/// A steady state.
#[derive(Debug, Clone)]
pub struct Steady {
    /// Faces, content, and where the heat goes.
    pub snapshot: Snapshot,
    /// The same as a history of one row at 0 s, profile included.
    pub history: History,
    /// Thermal resistances in series from the content's surface outwards: name and resistance per length [m K/W],
    /// worked out from the solution (temperature drop over the heat flow that causes it). A layer that passes no heat is
    /// left out.
    pub resistances: Vec<(String, f64)>,
    /// Largest heat unaccounted for at any cell or face, by the sparse conductance matrix of the section [W/m]: the state's
    /// own audit.
    pub imbalance_w_per_m: f64,
    /// Temperatures of the places that a case can name [K].
    places: Vec<(Place, f64)>,
}

impl Steady {
    /// Temperature of a face, the centre, the content or a target's place [K]; NaN where the section has none such.
    pub fn temperature(&self, place: Place) -> f64 {
        self.places.iter().find(|known| known.0 == place).map_or(f64::NAN, |known| known.1)
    }
}

fn prepared<'a>(section: &'a Section, mesh: &'a Mesh, heaters_w_per_m: &[f64]) -> Result<Runner<'a>, MarchError> {
    let outside = section.outside.temperature_k.at(0.0);
    let mut runner = Runner::new(section, mesh, &Settings::default(), |_| outside);
    runner.controls = Controls::new(section);
    runner.controls.called.fill(true);
    runner.controls.output_w_per_m.copy_from_slice(heaters_w_per_m);
    let profile = steady_profile(&mut runner)?;
    runner.set_temperatures(&profile);
    // Thermostats do not answer here, so nothing is triggered.
    runner.make_consistent()?;
    Ok(runner)
}

/// Steady state with the outside's temperature at 0 h and the given output of each heater per metre of **line** [W/m].
/// Thermostats do not act. The mesh matters only where heat is spread through a layer; `refinement` multiplies its cells.
///
/// # Errors
/// [`MarchError::NoSteadyState`] where the iteration does not settle.
pub fn balance(section: &Section, heaters_w_per_m: &[f64], refinement: f64) -> Result<Steady, MarchError> {
    let mesh = Mesh::new(section, refinement, None);
    let runner = prepared(section, &mesh, heaters_w_per_m)?;
    Ok(describe(section, &mesh, &runner))
}

fn describe(section: &Section, mesh: &Mesh, runner: &Runner) -> Steady {
    let view = runner.view();
    let mut recorder = Recorder::new(section, mesh);
    recorder.push(0.0, &view);
    Steady {
        snapshot: view.snapshot(),
        history: recorder.finish(),
        resistances: resistances(&view),
        imbalance_w_per_m: Network::new(&view).imbalance(),
        places: section
            .faces()
            .map(Place::Face)
            .chain([Place::Centre, Place::ContentMean, Place::ContentSurface, Place::Air])
            .chain((0..section.layers.len()).map(Place::LayerMean))
            .chain(section.targets.iter().map(|target| target.place))
            .chain(section.probes.iter().map(|probe| Place::Radius(probe.radius_m)))
            .map(|place| (place, view.temperature(place)))
            .collect(),
    }
}

fn resistances(view: &View) -> Vec<(String, f64)> {
    let section = view.section;
    let mut found = Vec::new();
    let mut add = |name: String, drop_k: f64, flow: f64| {
        if drop_k.is_finite() && flow.abs() > 1e-12 && (drop_k / flow).is_finite() && drop_k / flow > 0.0 {
            found.push((name, drop_k / flow));
        }
    };
    let face = |layer: usize, side: Side| view.temperature(Place::Face(Face { layer, side }));
    if let ContentState::Flowing { temperature_k, .. } = view.controls.content {
        let link = view.mesh.content.end;
        add("film inside".into(), temperature_k - view.content_surface(), view.ws.q_left[link]);
    }
    for (index, layer) in section.layers.iter().enumerate() {
        let range = &view.mesh.layers[index];
        let link = range.start;
        if layer.contact.resistance_m_k_per_w > 0.0 {
            let before = if index == 0 { view.content_surface() } else { face(index - 1, Side::Outside) };
            let flow = view.ws.q_left[link] + view.chain.links[link].power_left;
            add(format!("contact inside {}", layer.name), before - face(index, Side::Inside), flow);
        }
        let flow = view.ws.q_left[range.end];
        add(layer.name.clone(), face(index, Side::Inside) - face(index, Side::Outside), flow);
    }
    if section.outside.film.is_some() {
        let last = section.layers.len();
        let surface = if last == 0 { view.content_surface() } else { face(last - 1, Side::Outside) };
        add("film outside".into(), surface - view.outside_k, view.lost());
    }
    found
}

/// The factor on every heater's own output at which `place` sits at `temperature_k` in steady state; with it that state.
/// A factor below zero means that the place would have to be cooled.
///
/// # Errors
/// [`MarchError::NoSteadyState`] also where no output of the heaters changes the place's temperature.
pub fn factor_that_holds(
    section: &Section,
    place: Place,
    temperature_k: f64,
    refinement: f64,
) -> Result<(f64, Steady), MarchError> {
    let mesh = Mesh::new(section, refinement, None);
    let full: Vec<f64> = section.heaters.iter().map(|heater| heater.output_per_line_w_per_m()).collect();
    let scaled = |factor: f64| -> Vec<f64> { full.iter().map(|output| factor * output).collect() };
    let mut failed = None;
    let mut miss = |factor: f64| match prepared(section, &mesh, &scaled(factor)) {
        Ok(runner) => runner.view().temperature(place) - temperature_k,
        Err(error) => {
            failed = Some(error);
            f64::NAN
        }
    };
    if (miss(1.0) - miss(0.0)).abs() < 1e-9 {
        return Err(MarchError::NoSteadyState {
            reason: format!("no heater moves the temperature of {}", section.place_name(place)),
        });
    }
    let found = root(&mut miss, 0.0, 1.0);
    if let Some(error) = failed {
        return Err(error);
    }
    let factor = found.ok_or_else(|| MarchError::NoSteadyState {
        reason: format!("no output holds {} at {:.2} degC", section.place_name(place), temperature_k - 273.15),
    })?;
    let runner = prepared(section, &mesh, &scaled(factor))?;
    Ok((factor, describe(section, &mesh, &runner)))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::march::fixtures;

    #[test]
    fn the_sparse_matrix_finds_nothing_unaccounted_for() {
        for section in fixtures::sections() {
            let outputs: Vec<f64> = section.heaters.iter().map(|heater| heater.output_per_line_w_per_m()).collect();
            let steady = balance(&section, &outputs, 1.0).unwrap();
            let scale = steady.snapshot.lost_w_per_m.abs().max(outputs.iter().sum());
            assert!(
                steady.imbalance_w_per_m < 1e-8 * scale.max(1.0),
                "{}: {:.1e} W/m of {scale:.1} W/m",
                section.title,
                steady.imbalance_w_per_m
            );
        }
    }

    #[test]
    fn the_sparse_matrix_sees_a_state_that_is_not_steady() {
        let section = fixtures::composite();
        let mesh = Mesh::new(&section, 1.0, None);
        let runner = prepared(&section, &mesh, &[15.0]).unwrap();
        let mut network = Network::new(&runner.view());
        assert!(network.imbalance() < 1e-8);
        let middle = network.temperature.len() / 2;
        network.temperature[middle] += 1e-3;
        assert!(network.imbalance() > 1e-6);
    }
}
