//! The physics of one cross-section in SI units: validated, immutable, free of files and of text formats.
//!
//! A [`Section`] is what a case file means. It is axisymmetric, `r` runs from the centre outwards, and every
//! extensive quantity is per metre of line. Temperatures are in kelvin, times in seconds from the case's 0 h.
//!
//! ```text
//!  content | layer 0 | layer 1 | ... | outside
//!          ^ contact of layer 0 (between the content's surface and the layer's inside face)
//! ```

use crate::material::Material;
use crate::series::Series;
use std::sync::Arc;

/// One cross-section of a heated line with its start, its schedule and the questions asked of it.
#[derive(Debug, Clone)]
pub struct Section {
    /// The case's own title.
    pub title: String,
    /// Tag and length of the line.
    pub line: Line,
    /// What is inside.
    pub content: Content,
    /// Layers from the inside outwards; may be empty (a bare core).
    pub layers: Vec<Layer>,
    /// Electric heaters.
    pub heaters: Vec<Heater>,
    /// What the outermost surface meets.
    pub outside: Outside,
    /// The state at 0 h.
    pub start: Start,
    /// Changes, sorted by time; equal times keep the order of the file.
    pub events: Vec<Event>,
    /// What is wanted: `steady` and `warmup` answer these.
    pub targets: Vec<Target>,
    /// What must not be passed: `run` and `outage` answer these.
    pub limits: Vec<Limit>,
    /// Extra places to record.
    pub probes: Vec<Probe>,
    /// Length and records of `run`.
    pub run: Run,
}

/// Tag and length of the line.
#[derive(Debug, Clone, Default)]
pub struct Line {
    /// The plant's own name of the line.
    pub tag: Option<String>,
    /// Length of the line [m].
    pub length_m: Option<f64>,
    /// Valves, flanges and supports as an equivalent length [m].
    pub extra_length_m: f64,
}

impl Line {
    /// Length that turns W/m into W: line and equivalent length together [m].
    pub fn effective_length_m(&self) -> Option<f64> {
        self.length_m.map(|length| length + self.extra_length_m)
    }
}

/// What is inside the innermost layer.
#[derive(Debug, Clone)]
pub struct Content {
    /// Radius of the content's surface [m].
    pub radius_m: f64,
    /// Its material; `None` where the content is held at a temperature or empty from first to last.
    pub material: Option<Arc<Material>>,
    /// How it moves at 0 h.
    pub state: ContentState,
}

/// How the content moves.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum ContentState {
    /// Heat moves by conduction only.
    Still,
    /// One temperature while liquid; ice grows on the wall.
    Stirred {
        /// Film between the liquid and the wall or the ice [W/(m2 K)]; `None` for none (perfect).
        film: Option<f64>,
    },
    /// A stream of given bulk temperature.
    Flowing {
        /// Bulk temperature [K].
        temperature_k: f64,
        /// Film between the stream and the wall [W/(m2 K)].
        film: f64,
    },
    /// Nothing inside: no heat is stored and none passes the inner face.
    Empty,
    /// The content's surface is held at a temperature.
    HeldAt {
        /// Temperature of the content's surface [K].
        temperature_k: f64,
    },
}

/// One ring of one material.
#[derive(Debug, Clone)]
pub struct Layer {
    /// The case's name of the layer.
    pub name: String,
    /// What it is made of.
    pub material: Arc<Material>,
    /// Inside radius [m].
    pub inside_radius_m: f64,
    /// Outside radius [m].
    pub outside_radius_m: f64,
    /// Contact with what lies inside it.
    pub contact: Contact,
}

/// Thermal contact at the inside face of a layer.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Contact {
    /// Resistance per length [m K/W]; 0 is perfect contact.
    pub resistance_m_k_per_w: f64,
    /// The trade's words and the ends of their published range, as conductances [W/(m2 K)], where the case used words.
    pub words: Option<ContactWords>,
}

/// A contact named in words.
#[derive(Debug, Clone, PartialEq)]
pub struct ContactWords {
    /// The words of the case file.
    pub words: String,
    /// Lower end of the range [W/(m2 K)].
    pub low: f64,
    /// Upper end of the range [W/(m2 K)].
    pub high: f64,
}

/// The inner or the outer face of a layer.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Side {
    /// The face nearer the centre.
    Inside,
    /// The face farther from the centre.
    Outside,
}

/// One face of one layer.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Face {
    /// Index into [`Section::layers`].
    pub layer: usize,
    /// Which of its faces.
    pub side: Side,
}

/// A place that has a temperature.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Place {
    /// The centre line.
    Centre,
    /// The content's mean over its area.
    ContentMean,
    /// The content's own surface, inside any contact with the first layer.
    ContentSurface,
    /// A face of a layer.
    Face(Face),
    /// The mean of a layer over its area (the temperature of a heater spread through it).
    LayerMean(usize),
    /// A probe: a radius [m].
    Radius(f64),
    /// The air, or whatever the outside's temperature is.
    Air,
}

/// Where a heater releases its heat.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Seat {
    /// On a face, on the layer's own side of any contact.
    Face(Face),
    /// Spread evenly through a layer.
    Layer(usize),
    /// Spread evenly through the content.
    Content,
}

impl Seat {
    /// The place whose temperature stands for the heater's.
    pub fn place(&self) -> Place {
        match *self {
            Seat::Face(face) => Place::Face(face),
            Seat::Layer(layer) => Place::LayerMean(layer),
            Seat::Content => Place::ContentMean,
        }
    }
}

/// An electric heater without a body of its own.
#[derive(Debug, Clone)]
pub struct Heater {
    /// The case's name of the heater.
    pub name: String,
    /// Where its heat is released.
    pub seat: Seat,
    /// Output per metre of heater [W/m].
    pub output_w_per_m: f64,
    /// Lower end of the output's tolerance per metre of heater [W/m]; equal to the output where none was stated.
    pub output_low_w_per_m: f64,
    /// Metres of heater per metre of line [-].
    pub runs: f64,
    /// What switches it, if anything does.
    pub thermostat: Option<Thermostat>,
}

impl Heater {
    /// Output per metre of line while it is on [W/m].
    pub fn output_per_line_w_per_m(&self) -> f64 {
        self.output_w_per_m * self.runs
    }
}

/// A plain on/off thermostat.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Thermostat {
    /// Where it senses.
    pub senses: Place,
    /// It switches on when the sensed temperature falls to this [K].
    pub on_below_k: f64,
    /// It switches off when the sensed temperature rises to this [K].
    pub off_above_k: f64,
}

/// What the outermost surface meets.
#[derive(Debug, Clone)]
pub struct Outside {
    /// Temperature of the air, or of the held surface [K].
    pub temperature_k: Series,
    /// Film coefficient [W/(m2 K)]; `None` where the surface is held at the temperature.
    pub film: Option<f64>,
}

/// The state at 0 h.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Start {
    /// Everything at one temperature [K].
    Uniform(f64),
    /// The settled state under heaters and controls.
    Hold,
    /// Everything inside the place at the temperature, everything outside it in steady balance with the outside.
    Reading {
        /// Where it was measured.
        place: Place,
        /// What was measured [K].
        temperature_k: f64,
    },
}

/// A change at a stated time.
#[derive(Debug, Clone)]
pub struct Event {
    /// When [s].
    pub time_s: f64,
    /// What changes.
    pub change: Change,
}

/// What an event changes.
#[derive(Debug, Clone)]
pub enum Change {
    /// The supply of every heater is lost (`false`) or back (`true`).
    Supply(bool),
    /// A heater trips: it stays off until it is reset.
    HeaterTripped(usize),
    /// A tripped heater is reset.
    HeaterReset(usize),
    /// A heater's output per metre of heater becomes another [W/m].
    HeaterOutput(usize, f64),
    /// The outside's temperature becomes another.
    OutsideTemperature(Series),
    /// The outside's film coefficient becomes another [W/(m2 K)].
    OutsideFilm(f64),
    /// The content moves in another way.
    Content(ContentState),
}

/// What is wanted.
#[derive(Debug, Clone)]
pub struct Target {
    /// The case's name of the target.
    pub name: String,
    /// Where it holds.
    pub place: Place,
    /// Lowest wanted temperature [K].
    pub at_least_k: f64,
}

/// What must not be passed.
#[derive(Debug, Clone)]
pub struct Limit {
    /// The case's name of the limit.
    pub name: String,
    /// The condition that passes it.
    pub condition: Condition,
}

/// The condition of a limit.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Condition {
    /// The place falls to the temperature [K].
    Below(Place, f64),
    /// The place rises to the temperature [K].
    Above(Place, f64),
    /// The frozen share of the content rises to this [-]; 0 is first ice: the surface reaching its freezing point.
    Frozen(f64),
    /// The frozen share of the content falls to this [-]; 0 is fully thawed.
    Thawed(f64),
}

/// An extra place to record.
#[derive(Debug, Clone)]
pub struct Probe {
    /// The case's name of the probe.
    pub name: String,
    /// Its radius [m].
    pub radius_m: f64,
}

/// Length and records of `run`.
#[derive(Debug, Clone)]
pub struct Run {
    /// When `run` ends [s]; `None` runs until the line has settled or every limit is answered.
    pub until_s: Option<f64>,
    /// Which times are recorded.
    pub record: Record,
}

/// Which times are recorded.
#[derive(Debug, Clone, PartialEq)]
pub enum Record {
    /// As many as a smooth figure needs.
    Auto,
    /// Start, and every multiple of this [s].
    Every(f64),
    /// The start and exactly these times [s], ascending.
    At(Vec<f64>),
}

impl Section {
    /// Name of a place in the case's own words.
    pub fn place_name(&self, place: Place) -> String {
        match place {
            Place::Centre => "centre".into(),
            Place::ContentMean => "content mean".into(),
            Place::ContentSurface => "content surface".into(),
            Place::Face(face) => self.face_name(face),
            Place::LayerMean(layer) => format!("{} mean", self.layers[layer].name),
            Place::Radius(radius_m) => self
                .probes
                .iter()
                .find(|probe| probe.radius_m == radius_m)
                .map_or_else(|| format!("radius {:.2} mm", radius_m * 1e3), |probe| probe.name.clone()),
            Place::Air => "air".into(),
        }
    }

    /// Name of a face: the layer's name and `inside` or `outside`.
    pub fn face_name(&self, face: Face) -> String {
        let side = match face.side {
            Side::Inside => "inside",
            Side::Outside => "outside",
        };
        format!("{} {side}", self.layers[face.layer].name)
    }

    /// Every face from the inside outwards.
    pub fn faces(&self) -> impl Iterator<Item = Face> + '_ {
        (0..self.layers.len()).flat_map(|layer| [Side::Inside, Side::Outside].map(|side| Face { layer, side }))
    }

    /// Radius of the outermost surface [m].
    pub fn outermost_radius_m(&self) -> f64 {
        self.layers.last().map_or(self.content.radius_m, |layer| layer.outside_radius_m)
    }
}
