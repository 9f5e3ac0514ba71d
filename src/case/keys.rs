//! The keys of a case file, table by table: what the reader accepts, what it names in messages, what documents list.
//!
//! A key of later work stands here as [`Standing::Later`]: it is refused as not yet modelled, never ignored.

use crate::faults::nearest;

/// Whether a key is modelled.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Standing {
    /// It is read.
    Modelled,
    /// It is refused for now.
    Later,
}

/// One key.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Key {
    /// How it is written.
    pub name: &'static str,
    /// What it is for, in a few words.
    pub about: &'static str,
    /// Whether it is modelled.
    pub standing: Standing,
}

impl Key {
    /// Whether it is read.
    pub fn is_modelled(&self) -> bool {
        self.standing == Standing::Modelled
    }
}

/// The keys of one table.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Table {
    /// How messages call the table.
    pub title: &'static str,
    /// Its keys, in the order in which they are best written.
    pub keys: &'static [Key],
}

impl Table {
    /// A key by its name.
    pub fn find(&self, name: &str) -> Option<&'static Key> {
        self.keys.iter().find(|key| key.name == name)
    }

    /// The key spelt most like a word that is none, if one is.
    pub fn nearest(&self, word: &str) -> Option<&'static str> {
        nearest(word, self.keys.iter().map(|key| key.name))
    }

    /// The modelled keys in one line.
    pub fn modelled(&self) -> String {
        let names: Vec<_> = self.keys.iter().filter(|key| key.is_modelled()).map(|key| key.name).collect();
        names.join(", ")
    }
}

const fn key(name: &'static str, about: &'static str) -> Key {
    Key { name, about, standing: Standing::Modelled }
}

const fn later(name: &'static str, about: &'static str) -> Key {
    Key { name, about, standing: Standing::Later }
}

/// The file itself.
pub const CASE: Table = Table {
    title: "the case",
    keys: &[
        key("title", "what the case shows, in one line"),
        key("line", "tag and length of the line"),
        key("content", "what is inside"),
        key("layer", "layers from the inside outwards"),
        key("material", "materials of the case's own"),
        key("heater", "electric heaters"),
        key("outside", "what the outermost surface meets"),
        key("start", "the state at 0 h"),
        key("event", "changes at stated times"),
        key("target", "what is wanted"),
        key("limit", "what must not be passed"),
        key("probe", "extra places to record"),
        key("run", "length and records of a run"),
        later("spread", "how tolerances are spread and correlated"),
        later("goal", "what an output or a thickness is sized for"),
        later("size", "what is to be sized"),
        later("fit", "what a measured log is to explain"),
        later("supply", "the voltage of the supply"),
        later("schedule", "switching by the clock"),
    ],
};

/// `[line]`.
pub const LINE: Table = Table {
    title: "[line]",
    keys: &[
        key("tag", "the plant's own name of the line"),
        key("length", "length of the line"),
        key("extra_length", "valves, flanges and supports as equivalent length"),
        later("circuit_length", "length of a heater's circuit"),
        later("rank", "how urgent the line is among others"),
    ],
};

/// `[content]`.
pub const CONTENT: Table = Table {
    title: "[content]",
    keys: &[
        key("material", "name of a built-in or of a [[material]]"),
        key("state", "still, stirred, flowing or empty"),
        key("temperature", "bulk temperature of a flowing content"),
        key("film", "film coefficient at the wall, of a flowing or stirred content"),
        key("held_at", "temperature at which the content's surface is held"),
        key("diameter", "diameter of a bare core, where there is no layer"),
        later("supercooling", "liquid cooling below its freezing point"),
        later("nucleates_at", "liquid cooling below its freezing point"),
        later("flow", "a film worked out from the flow"),
        later("velocity", "a film worked out from the flow"),
    ],
};

/// `[[layer]]`.
pub const LAYER: Table = Table {
    title: "[[layer]]",
    keys: &[
        key("name", "the case's name of the layer"),
        key("material", "name of a built-in or of a [[material]]"),
        key("pipe", "a pipe size, as in \"DN 80, schedule 40\""),
        key("inside_diameter", "inside diameter"),
        key("outside_diameter", "outside diameter"),
        key("thickness", "thickness"),
        key("contact", "contact with the layer inside it"),
        later("moisture", "wet lagging"),
        later("gap", "an air gap with radiation and convection"),
    ],
};

/// `[[material]]`.
pub const MATERIAL: Table = Table {
    title: "[[material]]",
    keys: &[
        key("name", "name by which the case calls it"),
        key("source", "where the figures come from"),
        key("density", "density (of the liquid at its freezing point, where it freezes)"),
        key("conductivity", "conductivity, or its table over temperature (of the liquid, where it freezes)"),
        key("specific_heat", "specific heat, or its table over temperature (of the liquid, where it freezes)"),
        key("freezes_at", "freezing point, or the two ends of its range"),
        key("latent_heat", "latent heat of freezing"),
        key("solid", "conductivity and specific heat of the solid"),
        key("lowest_use", "lowest temperature of use of a content that does not freeze"),
        later("supercooling", "liquid cooling below its freezing point"),
        later("viscosity", "films worked out from flow"),
        later("expansion", "films worked out from free convection"),
        later("emissivity", "a film worked out from radiation"),
    ],
};

/// `[material.solid]`.
pub const SOLID: Table = Table {
    title: "[material.solid]",
    keys: &[
        key("conductivity", "conductivity of the solid, or its table over temperature"),
        key("specific_heat", "specific heat of the solid, or its table over temperature"),
    ],
};

/// `[[heater]]`.
pub const HEATER: Table = Table {
    title: "[[heater]]",
    keys: &[
        key("name", "the case's name of the heater"),
        key("face", "the face it lies on, as in \"wall outside\""),
        key("through", "the layer it is spread through, or \"content\""),
        key("output", "output per length of heater"),
        key("tolerance", "tolerance of the output"),
        key("runs", "metres of heater per metre of line"),
        key("thermostat", "what switches it"),
        later("sheath", "a heater with a body of its own"),
        later("heat_capacity", "a heater with a body of its own"),
        later("conductance_in", "a heater with a body of its own"),
        later("conductance_out", "a heater with a body of its own"),
        later("resistance", "output from resistance and voltage"),
        later("resistance_per_length", "output from resistance and voltage"),
        later("temperature_coefficient", "output from resistance and voltage"),
        later("voltage", "output from resistance and voltage"),
        later("rated_voltage", "a self-limiting output"),
        later("circuit_length", "output from resistance and voltage"),
        later("against", "a self-limiting output"),
        later("schedule", "switching by the clock"),
        later("cut_out", "a temperature limiter that stays tripped"),
    ],
};

/// `thermostat = { ... }`.
pub const THERMOSTAT: Table = Table {
    title: "thermostat",
    keys: &[
        key("senses", "the place whose temperature it senses"),
        key("on_below", "it switches on below this"),
        key("off_above", "it switches off above this"),
        later("lag", "a sensor with a lag of its own"),
        later("proportional", "control of the share of time"),
    ],
};

/// `[outside]`.
pub const OUTSIDE: Table = Table {
    title: "[outside]",
    keys: &[
        key("air", "temperature of the air, or { file, column }"),
        key("film", "film coefficient of the outermost surface"),
        key("held_at", "temperature at which the outermost surface is held, or { file, column }"),
        later("wind", "a film worked out from wind"),
        later("emissivity", "a film worked out from radiation"),
        later("buried", "a buried line"),
        later("depth", "a buried line"),
        later("soil", "a buried line"),
        later("radiation", "a film worked out from radiation"),
    ],
};

/// `{ file, column }`.
pub const SERIES: Table = Table {
    title: "a series",
    keys: &[
        key("file", "a CSV file, relative to the case's folder"),
        key("column", "head of the column, with its unit, as in \"air_degC\""),
        key("time", "head of the column of times, as in \"time_h\""),
        later("repeat", "a series that repeats"),
        later("from", "a series that starts within its file"),
    ],
};

/// `[start]`.
pub const START: Table = Table {
    title: "[start]",
    keys: &[
        key("temperature", "one temperature everywhere"),
        key("state", "\"hold\": the settled state under heaters and controls"),
        key("reading", "{ where, temperature }: a measured temperature"),
        later("profile", "a measured profile"),
    ],
};

/// `reading = { ... }`.
pub const READING: Table = Table {
    title: "reading",
    keys: &[key("where", "the place that was measured"), key("temperature", "what was measured")],
};

/// `[[event]]`.
pub const EVENT: Table = Table {
    title: "[[event]]",
    keys: &[
        key("time", "when it happens"),
        key("supply", "\"lost\" or \"back\""),
        key("heater", "name of the heater that changes"),
        key("becomes", "\"tripped\" or \"reset\""),
        key("output", "the heater's new output"),
        key("air", "the new temperature of the air, or { file, column }"),
        key("film", "the new film coefficient: of the outside, or of the content that changes"),
        key("held_at", "the new temperature of a held outside, or { file, column }"),
        key("content", "still, stirred, flowing, empty or held_at"),
        key("temperature", "temperature of a content that flows or is held"),
        later("wind", "a film worked out from wind"),
        later("voltage", "a changed supply voltage"),
        later("thermostat", "changed set points"),
        later("cut_out", "a temperature limiter that stays tripped"),
        later("repeat", "events that repeat"),
    ],
};

/// `[[target]]`.
pub const TARGET: Table = Table {
    title: "[[target]]",
    keys: &[
        key("name", "the case's name of the target"),
        key("where", "the place"),
        key("at_least", "lowest wanted temperature"),
        later("at_most", "an upper bound of what is wanted"),
        later("within", "a warm-up that must be done in time"),
        later("margin", "what an output or a thickness is sized for"),
    ],
};

/// `[[limit]]`.
pub const LIMIT: Table = Table {
    title: "[[limit]]",
    keys: &[
        key("name", "the case's name of the limit"),
        key("where", "the place"),
        key("below", "passed when the place falls to this"),
        key("above", "passed when the place rises to this"),
        key("frozen", "passed when this share of the content is frozen; \"0 %\" is first ice"),
        key("thawed", "passed when no more than this share of the content is frozen; \"0 %\" is all thawed"),
        later("for", "a limit that must be passed for some time"),
        later("margin", "what an output or a thickness is sized for"),
    ],
};

/// `[[probe]]`.
pub const PROBE: Table = Table {
    title: "[[probe]]",
    keys: &[key("name", "the case's name of the probe"), key("radius", "distance from the centre line")],
};

/// `[run]`.
pub const RUN: Table = Table {
    title: "[run]",
    keys: &[
        key("until", "when a run ends"),
        key("record", "times that are recorded, as in [\"1 h\", \"2 h\"]"),
        key("every", "interval of the records"),
    ],
};

/// `{ value, tolerance }`.
pub const QUANTITY: Table = Table {
    title: "a quantity",
    keys: &[
        key("value", "the quantity"),
        key("tolerance", "half width of what it may be: a share, or a difference"),
        later("distribution", "how tolerances are spread"),
        later("correlation", "how tolerances are spread and correlated"),
    ],
};

/// Every table of a case file.
pub const TABLES: &[&Table] = &[
    &CASE,
    &LINE,
    &CONTENT,
    &LAYER,
    &MATERIAL,
    &SOLID,
    &HEATER,
    &THERMOSTAT,
    &OUTSIDE,
    &SERIES,
    &START,
    &READING,
    &EVENT,
    &TARGET,
    &LIMIT,
    &PROBE,
    &RUN,
    &QUANTITY,
];

/// The table that a key belongs to, where it is one key of one table.
pub(super) fn home_of(name: &str) -> Option<&'static str> {
    let mut homes = TABLES.iter().filter(|table| table.find(name).is_some());
    match (homes.next(), homes.next()) {
        (Some(home), None) => Some(home.title),
        _ => None,
    }
}
