//! What the user wrote, table by table, each value with its place in the text: shape only, no meaning yet.
//!
//! A field is `None` where its key is absent or its value was faulty; the fault has then been told. Names are not yet
//! looked up, sizes not yet worked out. `read` fills these tables, `resolve` finds what they mean.

use crate::faults::Span;
use crate::units::Kind;

/// A value with its place in the text.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Located<T> {
    /// The value.
    pub value: T,
    /// Where it stands.
    pub span: Span,
}

/// A quantity in SI with what is known of it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Quantity {
    /// What it is.
    pub kind: Kind,
    /// Its value [SI].
    pub value_si: f64,
    /// Half width of what it may be, in the unit of the value (kelvin for a temperature).
    pub tolerance: Option<Located<f64>>,
    /// Where it stands.
    pub span: Span,
}

/// A whole case file.
#[derive(Debug, Clone)]
pub struct Case {
    /// What stands for the whole file in messages.
    pub span: Span,
    /// `title`.
    pub title: Option<Located<String>>,
    /// `[line]`.
    pub line: Line,
    /// `[content]`.
    pub content: Option<Content>,
    /// `[[layer]]`.
    pub layers: Vec<Layer>,
    /// `[[material]]`.
    pub materials: Vec<Material>,
    /// `[[heater]]`.
    pub heaters: Vec<Heater>,
    /// `[outside]`.
    pub outside: Option<Outside>,
    /// `[start]`.
    pub start: Option<Start>,
    /// `[[event]]`.
    pub events: Vec<Event>,
    /// `[[target]]`.
    pub targets: Vec<Target>,
    /// `[[limit]]`.
    pub limits: Vec<Limit>,
    /// `[[probe]]`.
    pub probes: Vec<Probe>,
    /// `[run]`.
    pub run: Run,
}

/// `[line]`.
#[derive(Debug, Clone, Default)]
pub struct Line {
    /// `tag`.
    pub tag: Option<Located<String>>,
    /// `length`.
    pub length: Option<Quantity>,
    /// `extra_length`.
    pub extra_length: Option<Quantity>,
}

/// `[content]`.
#[derive(Debug, Clone)]
pub struct Content {
    /// The table's head.
    pub span: Span,
    /// `material`.
    pub material: Option<Located<String>>,
    /// Whether the material is missing without a word.
    pub lacks_material: bool,
    /// `state` with what belongs to it, or `held_at`.
    pub state: Option<Located<State>>,
    /// `diameter`.
    pub diameter: Option<Quantity>,
}

/// How the content moves.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum State {
    /// `still`.
    Still,
    /// `stirred`, with its film.
    Stirred(Option<Quantity>),
    /// `flowing`, with its bulk temperature and its film.
    Flowing(Quantity, Quantity),
    /// `empty`.
    Empty,
    /// `held_at`, with the temperature of its surface.
    HeldAt(Quantity),
}

/// `[[layer]]`.
#[derive(Debug, Clone)]
pub struct Layer {
    /// The table's head.
    pub span: Span,
    /// `name`.
    pub name: Option<Located<String>>,
    /// `material`.
    pub material: Option<Located<String>>,
    /// `pipe`.
    pub pipe: Option<Located<String>>,
    /// `inside_diameter`.
    pub inside_diameter: Option<Quantity>,
    /// `outside_diameter`.
    pub outside_diameter: Option<Quantity>,
    /// `thickness`.
    pub thickness: Option<Quantity>,
    /// Whether a size was stated that could not be read.
    pub has_faulty_size: bool,
    /// `contact`.
    pub contact: Option<Located<Contact>>,
}

/// `contact`.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Contact {
    /// `"perfect"`.
    Perfect,
    /// One of the trade's words.
    Words(&'static ContactRange),
    /// A conductance or a resistance.
    Stated(Quantity),
}

/// Published range of a contact that goes by the trade's words.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct ContactRange {
    /// The words.
    pub words: &'static str,
    /// Lower end of the conductance [W/(m2 K)].
    pub low: f64,
    /// Upper end of the conductance [W/(m2 K)].
    pub high: f64,
}

/// Contacts of a heater with the face that it lies on, per area of heater: common practice, from memory, no source.
pub const CONTACT_RANGES: [ContactRange; 3] = [
    ContactRange { words: "strapped", low: 20.0, high: 100.0 },
    ContactRange { words: "under foil tape", low: 50.0, high: 200.0 },
    ContactRange { words: "in cement", low: 200.0, high: 600.0 },
];

/// `[[material]]`.
#[derive(Debug, Clone)]
pub struct Material {
    /// The table's head.
    pub span: Span,
    /// `name`.
    pub name: Option<Located<String>>,
    /// `source`.
    pub source: Option<Located<String>>,
    /// `density`.
    pub density: Option<Quantity>,
    /// `conductivity`.
    pub conductivity: Option<Property>,
    /// `specific_heat`.
    pub specific_heat: Option<Property>,
    /// `freezes_at`: solidus and liquidus.
    pub freezes_at: Option<Located<(f64, f64)>>,
    /// `latent_heat`.
    pub latent_heat: Option<Quantity>,
    /// `solid.conductivity`.
    pub solid_conductivity: Option<Property>,
    /// `solid.specific_heat`.
    pub solid_specific_heat: Option<Property>,
    /// Where `solid` stands, if it does.
    pub solid: Option<Span>,
    /// `lowest_use`.
    pub lowest_use: Option<Quantity>,
}

/// A property: one value, or rows of temperature and value.
#[derive(Debug, Clone, PartialEq)]
pub struct Property {
    /// Rows `(K, SI)`; a single value has one row and no temperature of its own.
    pub rows: Vec<(Option<f64>, f64)>,
    /// Where it stands.
    pub span: Span,
}

/// `[[heater]]`.
#[derive(Debug, Clone)]
pub struct Heater {
    /// The table's head.
    pub span: Span,
    /// `name`.
    pub name: Option<Located<String>>,
    /// `face`.
    pub face: Option<Located<String>>,
    /// `through`.
    pub through: Option<Located<String>>,
    /// `output`, its tolerance set by `tolerance` as well.
    pub output: Option<Quantity>,
    /// `runs`.
    pub runs: Option<Quantity>,
    /// `thermostat`.
    pub thermostat: Option<Thermostat>,
}

/// `thermostat = { ... }`.
#[derive(Debug, Clone)]
pub struct Thermostat {
    /// The table.
    pub span: Span,
    /// `senses`.
    pub senses: Option<Located<String>>,
    /// `on_below`.
    pub on_below: Option<Quantity>,
    /// `off_above`.
    pub off_above: Option<Quantity>,
}

/// A temperature over time.
#[derive(Debug, Clone, PartialEq)]
pub enum Course {
    /// The same at all times.
    Constant(Quantity),
    /// A column of a file.
    Series(SeriesFile),
}

/// `{ file, column }`.
#[derive(Debug, Clone, PartialEq)]
pub struct SeriesFile {
    /// `file`.
    pub file: Located<String>,
    /// `column`.
    pub column: Located<String>,
    /// `time`.
    pub time: Option<Located<String>>,
}

/// `[outside]`.
#[derive(Debug, Clone)]
pub struct Outside {
    /// The table's head.
    pub span: Span,
    /// `air`.
    pub air: Option<Course>,
    /// `film`.
    pub film: Option<Quantity>,
    /// `held_at`.
    pub held_at: Option<Course>,
    /// Whether `held_at` stands there, read or not.
    pub is_held: bool,
}

/// `[start]`.
#[derive(Debug, Clone, PartialEq)]
pub enum Start {
    /// `temperature`.
    Temperature(Quantity),
    /// `state = "hold"`.
    Hold(Span),
    /// `reading`.
    Reading(Located<String>, Quantity),
}

/// `[[event]]`.
#[derive(Debug, Clone)]
pub struct Event {
    /// The table's head.
    pub span: Span,
    /// `time`.
    pub time: Option<Quantity>,
    /// What changes.
    pub change: Option<Change>,
}

/// What an event changes.
#[derive(Debug, Clone, PartialEq)]
pub enum Change {
    /// `supply`: whether it is back.
    Supply(bool),
    /// `heater` and `becomes`: whether it is reset.
    HeaterReset(Located<String>, bool),
    /// `heater` and `output`.
    HeaterOutput(Located<String>, Quantity),
    /// `air`.
    Air(Course, Span),
    /// `held_at`, of the outside.
    HeldAt(Course, Span),
    /// `film`, of the outside.
    Film(Quantity),
    /// `content` with what belongs to it.
    Content(Located<State>),
}

/// `[[target]]`.
#[derive(Debug, Clone)]
pub struct Target {
    /// `name`.
    pub name: Option<Located<String>>,
    /// `where`.
    pub place: Option<Located<String>>,
    /// `at_least`.
    pub at_least: Option<Quantity>,
}

/// `[[limit]]`.
#[derive(Debug, Clone)]
pub struct Limit {
    /// `name`.
    pub name: Option<Located<String>>,
    /// The condition.
    pub condition: Option<Condition>,
}

/// The condition of a limit.
#[derive(Debug, Clone, PartialEq)]
pub enum Condition {
    /// `where` and `below`.
    Below(Located<String>, Quantity),
    /// `where` and `above`.
    Above(Located<String>, Quantity),
    /// `frozen`.
    Frozen(Quantity),
    /// `thawed`.
    Thawed(Quantity),
}

/// `[[probe]]`.
#[derive(Debug, Clone)]
pub struct Probe {
    /// `name`.
    pub name: Option<Located<String>>,
    /// `radius`.
    pub radius: Option<Quantity>,
}

/// `[run]`.
#[derive(Debug, Clone, Default)]
pub struct Run {
    /// `until`.
    pub until: Option<Quantity>,
    /// `record`.
    pub record: Option<Located<Vec<Quantity>>>,
    /// `every`.
    pub every: Option<Quantity>,
}
