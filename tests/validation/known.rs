//! A section whose answers are known, and what the library makes of it at any settings.

use crate::parts::march;
use stillwarm::march::{Plan, Settings, Trace};
use stillwarm::section::{Place, Section, Side};

/// Picks the compared values out of a trace, in the order of the expected ones.
type Read = Box<dyn Fn(&Section, &Trace) -> Vec<f64> + Send + Sync>;

/// A known answer.
pub struct Known {
    /// What it is.
    pub name: String,
    /// The section.
    pub section: Section,
    /// What is asked of it.
    pub plan: Plan,
    /// Names and values of what is known: degC, s or a share.
    pub expected: Vec<(String, f64)>,
    /// Picks the same values out of a trace.
    pub read: Read,
}

impl Known {
    /// The values that the library gives, and the trace that they were read from.
    pub fn solve(&self, settings: &Settings) -> (Vec<f64>, Trace) {
        let trace = march(&self.section, &self.plan, settings);
        let values = (self.read)(&self.section, &trace);
        assert_eq!(values.len(), self.expected.len(), "{}", self.name);
        (values, trace)
    }

    /// Largest distance from the known values.
    pub fn worst(&self, values: &[f64]) -> f64 {
        // A NaN is the worst of all.
        self.expected.iter().zip(values).fold(0.0, |most: f64, (expected, value)| {
            let distance = (expected.1 - value).abs();
            if distance.is_nan() { f64::INFINITY } else { most.max(distance) }
        })
    }
}

/// Reads the temperatures [degC] of places at every recorded time after the start, row by row.
pub fn temperatures(places: Vec<Place>) -> Read {
    Box::new(move |section, trace| {
        let rows = 1..trace.history.times_s.len();
        rows.flat_map(|row| places.iter().map(move |&place| temperature(section, trace, row, place))).collect()
    })
}

/// Reads when each watch fired [s].
pub fn sightings() -> Read {
    Box::new(|_, trace| trace.sightings.iter().map(|sighting| sighting.time_s.unwrap_or(f64::NAN)).collect())
}

/// A recorded temperature [degC].
pub fn temperature(section: &Section, trace: &Trace, row: usize, place: Place) -> f64 {
    let history = &trace.history;
    let kelvin = match place {
        Place::Centre => history.centre_k[row],
        Place::ContentMean => history.content_mean_k[row],
        Place::ContentSurface => {
            let column = history.profile_radii_m.iter().position(|&radius| radius == section.content.radius_m);
            history.profiles_k[[row, column.expect("the content has a surface")]]
        }
        Place::Face(face) => history.faces_k[[row, 2 * face.layer + usize::from(face.side == Side::Outside)]],
        Place::Radius(radius) => {
            let column = section.probes.iter().position(|probe| probe.radius_m == radius);
            history.probes_k[[row, column.expect("every radius has a probe")]]
        }
        other => panic!("{other:?} is not recorded"),
    };
    kelvin - 273.15
}
