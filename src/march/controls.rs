//! What is switched and set from outside the heat balance: supply, heaters, thermostats, outside, content.

use super::chain::{Chain, Joint};
use crate::mesh::Mesh;
use crate::section::{Change, ContentState, Seat, Section, Side};
use crate::series::Series;

/// The switchable state of a section.
#[derive(Debug, Clone)]
pub(super) struct Controls {
    pub supply: bool,
    pub tripped: Vec<bool>,
    /// What each thermostat asks for; `true` for a heater without one.
    pub called: Vec<bool>,
    /// Output of each heater per metre of line while on [W/m].
    pub output_w_per_m: Vec<f64>,
    pub outside_k: Series,
    pub outside_film: Option<f64>,
    pub content: ContentState,
}

impl Controls {
    pub fn new(section: &Section) -> Self {
        Controls {
            supply: true,
            tripped: vec![false; section.heaters.len()],
            called: section.heaters.iter().map(|heater| heater.thermostat.is_none()).collect(),
            output_w_per_m: section.heaters.iter().map(|heater| heater.output_per_line_w_per_m()).collect(),
            outside_k: section.outside.temperature_k.clone(),
            outside_film: section.outside.film,
            content: section.content.state,
        }
    }

    /// Output of a heater now, per metre of line [W/m].
    pub fn power(&self, heater: usize) -> f64 {
        if self.supply && !self.tripped[heater] && self.called[heater] { self.output_w_per_m[heater] } else { 0.0 }
    }

    /// Output of all heaters now [W/m].
    pub fn total_power(&self) -> f64 {
        (0..self.tripped.len()).map(|heater| self.power(heater)).sum()
    }

    /// Applies a change other than the content's, which also moves heat; gives its name.
    pub fn apply(&mut self, section: &Section, change: &Change) -> String {
        match change {
            Change::Supply(back) => {
                self.supply = *back;
                if *back { "supply back".into() } else { "supply lost".into() }
            }
            Change::HeaterTripped(heater) => {
                self.tripped[*heater] = true;
                format!("{} tripped", section.heaters[*heater].name)
            }
            Change::HeaterReset(heater) => {
                self.tripped[*heater] = false;
                format!("{} reset", section.heaters[*heater].name)
            }
            Change::HeaterOutput(heater, output) => {
                self.output_w_per_m[*heater] = output * section.heaters[*heater].runs;
                format!("{} at {output:.3} W/m", section.heaters[*heater].name)
            }
            Change::OutsideTemperature(series) => {
                self.outside_k = series.clone();
                match series {
                    Series::Constant(value) => format!("outside at {:.1} degC", value - 273.15),
                    Series::Table { source, .. } => format!("outside from {source}"),
                }
            }
            Change::OutsideFilm(film) => {
                self.outside_film = Some(*film);
                format!("film {film:.1} W/(m2 K)")
            }
            Change::Content(state) => {
                self.content = *state;
                match state {
                    ContentState::Still => "content still".into(),
                    ContentState::Stirred { .. } => "content stirred".into(),
                    ContentState::Flowing { .. } => "content flows".into(),
                    ContentState::Empty => "content drained".into(),
                    ContentState::HeldAt { temperature_k } => {
                        format!("content held at {:.1} degC", temperature_k - 273.15)
                    }
                }
            }
        }
    }

    /// Puts the heaters' outputs and the outside's film into the chain.
    pub fn write(&self, section: &Section, mesh: &Mesh, chain: &mut Chain) {
        for link in &mut chain.links {
            link.power_left = 0.0;
            link.power_right = 0.0;
        }
        chain.source.fill(0.0);
        for (index, heater) in section.heaters.iter().enumerate() {
            let power = self.power(index);
            match heater.seat {
                Seat::Face(face) => {
                    let range = &mesh.layers[face.layer];
                    match face.side {
                        Side::Inside => chain.links[range.start].power_right += power,
                        Side::Outside => chain.links[range.end].power_left += power,
                    }
                }
                Seat::Layer(layer) => spread(chain, mesh, mesh.layers[layer].clone(), power),
                Seat::Content => spread(chain, mesh, mesh.content.clone(), power),
            }
        }
        let last = chain.cells();
        let radius = section.outermost_radius_m();
        chain.links[last].resistance = self.outside_film.map_or(0.0, |film| Chain::film_resistance(film, radius));
    }

    /// Puts the content's own boundary into the chain: what lies left of the first layer where no content cell takes part.
    pub fn write_inner(&self, section: &Section, mesh: &Mesh, chain: &mut Chain) {
        let link = mesh.content.end;
        let bare = section.layers.is_empty();
        let contact = section.layers.first().map(|layer| layer.contact.clone()).unwrap_or_default();
        let radius = section.content.radius_m;
        let (joint, film) = match self.content {
            ContentState::Still => (Joint::Interface, None),
            ContentState::Stirred { film } => (Joint::Interface, film),
            ContentState::Flowing { temperature_k, film } => (Joint::FixedInside(temperature_k), Some(film)),
            ContentState::Empty => (Joint::Closed, None),
            ContentState::HeldAt { temperature_k } => (Joint::FixedInside(temperature_k), None),
        };
        if mesh.content.is_empty() || !matches!(joint, Joint::Interface) {
            // The link at the first layer is the inner boundary.
            chain.links[link].joint =
                if mesh.content.is_empty() && joint == Joint::Interface { Joint::Closed } else { joint };
        } else {
            chain.links[0].joint = Joint::Closed;
            if !bare {
                chain.links[link].joint = Joint::Interface;
            }
        }
        if !bare {
            let film = film.map_or(0.0, |film| Chain::film_resistance(film, radius));
            chain.set_inner_contact(link, &contact, film);
        }
    }
}

/// Spreads a power evenly over the cells of a region.
fn spread(chain: &mut Chain, mesh: &Mesh, range: std::ops::Range<usize>, power: f64) {
    let whole: f64 = range.clone().map(|cell| mesh.cells[cell].area_m2).sum();
    for cell in range {
        chain.source[cell] += power * mesh.cells[cell].area_m2 / whole;
    }
}
