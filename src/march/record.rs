//! Rows of a history, gathered during a march.

use super::view::{View, profile_radii};
use crate::history::History;
use crate::mesh::Mesh;
use crate::section::{Place, Section};
use ndarray::{Array1, Array2};

/// Rows gathered so far.
pub(super) struct Recorder {
    times_s: Vec<f64>,
    single: [Vec<f64>; 7],
    faces_k: Vec<f64>,
    heaters: Vec<f64>,
    probes: Vec<f64>,
    profiles: Vec<f64>,
    row: Vec<f64>,
    radii: Vec<f64>,
    faces: usize,
    heater_count: usize,
    probe_count: usize,
}

impl Recorder {
    pub fn new(section: &Section, mesh: &Mesh) -> Self {
        Recorder {
            times_s: Vec::new(),
            single: Default::default(),
            faces_k: Vec::new(),
            heaters: Vec::new(),
            probes: Vec::new(),
            profiles: Vec::new(),
            row: Vec::new(),
            radii: profile_radii(section, mesh),
            faces: 2 * section.layers.len(),
            heater_count: section.heaters.len(),
            probe_count: section.probes.len(),
        }
    }

    /// Time of the last row [s].
    pub fn last_time(&self) -> Option<f64> {
        self.times_s.last().copied()
    }

    /// Number of rows.
    pub fn rows(&self) -> usize {
        self.times_s.len()
    }

    /// Drops every second row but the first and the last.
    pub fn thin(&mut self) {
        let rows = self.rows();
        let keep = |row: usize| row.is_multiple_of(2) || row + 1 == rows;
        fn sieve(values: &mut Vec<f64>, width: usize, keep: &dyn Fn(usize) -> bool) {
            let mut index = 0;
            values.retain(|_| {
                let stays = keep(index / width);
                index += 1;
                stays
            });
        }
        sieve(&mut self.times_s, 1, &keep);
        for column in &mut self.single {
            sieve(column, 1, &keep);
        }
        sieve(&mut self.faces_k, self.faces.max(1), &keep);
        sieve(&mut self.heaters, self.heater_count.max(1), &keep);
        sieve(&mut self.probes, self.probe_count.max(1), &keep);
        sieve(&mut self.profiles, self.radii.len().max(1), &keep);
    }

    /// Adds a state.
    pub fn push(&mut self, time_s: f64, view: &View) {
        self.times_s.push(time_s);
        let values = [
            view.outside_k,
            view.temperature(Place::Centre),
            view.temperature(Place::ContentMean),
            view.frozen_share(),
            view.lost(),
            view.carried(),
            view.stored(),
        ];
        for (column, value) in self.single.iter_mut().zip(values) {
            column.push(value);
        }
        self.faces_k.extend(view.section.faces().map(|face| view.temperature(Place::Face(face))));
        self.heaters.extend((0..self.heater_count).map(|heater| view.controls.power(heater)));
        self.probes.extend(view.section.probes.iter().map(|probe| view.temperature(Place::Radius(probe.radius_m))));
        view.profile(&mut self.row);
        self.profiles.extend_from_slice(&self.row);
    }

    /// The history.
    pub fn finish(self) -> History {
        let rows = self.times_s.len();
        let table = |columns: usize, values: Vec<f64>| {
            Array2::from_shape_vec((rows, columns), values).expect("every row has every column")
        };
        let [air, centre, mean, frozen, lost, carried, stored] = self.single.map(Array1::from_vec);
        History {
            times_s: Array1::from_vec(self.times_s),
            air_k: air,
            centre_k: centre,
            content_mean_k: mean,
            frozen_share: frozen,
            faces_k: table(self.faces, self.faces_k),
            heaters_w_per_m: table(self.heater_count, self.heaters),
            lost_w_per_m: lost,
            carried_w_per_m: carried,
            stored_w_per_m: stored,
            probes_k: table(self.probe_count, self.probes),
            profiles_k: table(self.radii.len(), self.profiles),
            profile_radii_m: Array1::from_vec(self.radii),
        }
    }
}
