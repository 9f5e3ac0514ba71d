//! Materials by their names, as `materials.toml` has them.

use crate::material::{FreezingSpec, MaterialSpec, Provenance};
use serde::{Deserialize, Serialize};
use std::sync::LazyLock;

/// 0 degC [K].
const ZERO_DEGC_K: f64 = 273.15;

/// How a figure came here.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Mark {
    /// Read in the source, or in a faithful copy of it.
    Read,
    /// Worked out anew from what the source states.
    Recomputed,
    /// Recalled; the source was not at hand.
    #[serde(alias = "from memory")]
    FromMemory,
}

impl Mark {
    /// What a reader must know of the figure: nothing where it was read.
    pub fn words(self) -> &'static str {
        match self {
            Mark::Read => "",
            Mark::Recomputed => "recomputed",
            Mark::FromMemory => "from memory",
        }
    }
}

/// One figure with its source.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Figure {
    /// The figure, in the unit of its place.
    pub value: f64,
    /// The temperature at which it holds [degC], where it has one.
    #[serde(default, rename(serialize = "at_degC"), skip_serializing_if = "Option::is_none")]
    pub at: Option<f64>,
    /// Where it comes from.
    pub source: String,
    /// How it came here.
    pub mark: Mark,
}

/// Rows of a table of one property, of one source.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Block {
    /// Where they come from.
    pub source: String,
    /// How they came here.
    pub mark: Mark,
    /// Temperature [degC] and value.
    pub rows: Vec<(f64, f64)>,
}

/// Freezing of a built-in material.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Freezing {
    /// What the solid is called.
    pub solid: String,
    /// Where freezing begins [degC].
    #[serde(rename(serialize = "begins_degC"))]
    pub begins: Figure,
    /// Where the last liquid is frozen [degC]; equal to the former where freezing is sharp.
    #[serde(rename(serialize = "ends_degC"))]
    pub ends: Figure,
    /// Latent heat [kJ/kg].
    #[serde(rename(serialize = "latent_heat_kj_per_kg"))]
    pub latent_heat: Figure,
    /// Conductivity of the solid [W/(m K)].
    #[serde(rename(serialize = "conductivity_w_per_m_k"))]
    pub conductivity: Vec<Block>,
    /// Specific heat of the solid [J/(kg K)].
    #[serde(rename(serialize = "specific_heat_j_per_kg_k"))]
    pub specific_heat: Vec<Block>,
}

/// What the data file says of one material.
#[derive(Debug, Clone, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
struct Entry {
    name: String,
    #[serde(default)]
    aliases: Vec<String>,
    group: String,
    #[serde(default)]
    note: String,
    density: Figure,
    conductivity: Vec<Block>,
    specific_heat: Vec<Block>,
    freezing: Option<Freezing>,
    lowest_use: Option<Figure>,
}

/// A built-in material: every figure beside its source, and the same in SI for the solver.
#[derive(Debug, Clone)]
pub struct BuiltIn {
    /// Other names for it.
    pub aliases: Vec<String>,
    /// What it is used as: content, metal, plastic, insulation, soil.
    pub group: String,
    /// What a user must know of it.
    pub note: String,
    /// Density [kg/m3]; of the liquid at its freezing point, where it freezes.
    pub density: Figure,
    /// Conductivity [W/(m K)]; of the liquid, where it freezes.
    pub conductivity: Vec<Block>,
    /// Specific heat [J/(kg K)]; of the liquid, where it freezes.
    pub specific_heat: Vec<Block>,
    /// Freezing, where it does.
    pub freezing: Option<Freezing>,
    /// Lowest temperature of use [degC] of a content that is not modelled as freezing.
    pub lowest_use: Option<Figure>,
    /// The same in SI.
    pub spec: MaterialSpec,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct File {
    material: Vec<Entry>,
}

static MATERIALS: LazyLock<Vec<BuiltIn>> = LazyLock::new(|| {
    let file: File = toml::from_str(include_str!("materials.toml")).expect("the shipped data file is sound");
    file.material.into_iter().map(BuiltIn::from).collect()
});

/// Every built-in material, in the order of the data file.
pub fn materials() -> &'static [BuiltIn] {
    &MATERIALS
}

/// A built-in material by its name or by another name for it; case, spaces, hyphens and commas do not count.
pub fn material(name: &str) -> Option<&'static MaterialSpec> {
    find(name).map(|built_in| &built_in.spec)
}

/// Names of the built-in materials, without the other names for them.
pub fn material_names() -> Vec<&'static str> {
    MATERIALS.iter().map(|built_in| built_in.spec.name.as_str()).collect()
}

pub(super) fn find(name: &str) -> Option<&'static BuiltIn> {
    let wanted = letters(name);
    MATERIALS.iter().find(|built_in| built_in.names().any(|known| letters(known) == wanted))
}

/// A name without what people write differently.
fn letters(name: &str) -> String {
    let counts = |letter: &char| !letter.is_whitespace() && !matches!(letter, '-' | '_' | ',');
    name.chars().filter(counts).flat_map(char::to_lowercase).collect()
}

impl BuiltIn {
    /// Its name and the other names for it.
    pub fn names(&self) -> impl Iterator<Item = &str> {
        std::iter::once(self.spec.name.as_str()).chain(self.aliases.iter().map(String::as_str))
    }

    /// Every source that its figures rest on, with its mark; what it is the source of first.
    pub fn sources(&self) -> Vec<(&'static str, &str, Mark)> {
        fn of_figure<'a>(what: &'static str, figure: &'a Figure) -> (&'static str, &'a str, Mark) {
            (what, &figure.source, figure.mark)
        }
        fn of_blocks<'a>(
            what: &'static str,
            blocks: &'a [Block],
        ) -> impl Iterator<Item = (&'static str, &'a str, Mark)> {
            blocks.iter().map(move |block| (what, block.source.as_str(), block.mark))
        }
        let mut sources = vec![of_figure("density", &self.density)];
        sources.extend(of_blocks("conductivity", &self.conductivity));
        sources.extend(of_blocks("specific heat", &self.specific_heat));
        if let Some(freezing) = &self.freezing {
            sources.push(of_figure("freezing", &freezing.begins));
            if freezing.ends != freezing.begins {
                sources.push(of_figure("end of freezing", &freezing.ends));
            }
            sources.push(of_figure("latent heat", &freezing.latent_heat));
            sources.extend(of_blocks("conductivity of the solid", &freezing.conductivity));
            sources.extend(of_blocks("specific heat of the solid", &freezing.specific_heat));
        }
        sources.extend(self.lowest_use.as_ref().map(|lowest| of_figure("lowest use", lowest)));
        sources
    }
}

/// The sources in one line: each once, with what it is the source of.
fn in_one_line(sources: &[(&'static str, &str, Mark)]) -> String {
    let mut lines: Vec<(Vec<&str>, &str, Mark)> = Vec::new();
    for &(what, source, mark) in sources {
        match lines.iter_mut().find(|line| (line.1, line.2) == (source, mark)) {
            Some(line) => line.0.push(what),
            None => lines.push((vec![what], source, mark)),
        }
    }
    let text = |(what, source, mark): &(Vec<&str>, &str, Mark)| {
        let marked = if *mark == Mark::Read { String::new() } else { format!(" ({})", mark.words()) };
        format!("{}: {source}{marked}", what.join(", "))
    };
    lines.iter().map(text).collect::<Vec<_>>().join("; ")
}

/// Rows in SI: `(K, value)`.
fn rows_k(blocks: &[Block]) -> Vec<(f64, f64)> {
    blocks.iter().flat_map(|block| &block.rows).map(|&(degc, value)| (degc + ZERO_DEGC_K, value)).collect()
}

impl From<Entry> for BuiltIn {
    fn from(entry: Entry) -> Self {
        let spec = MaterialSpec {
            name: entry.name,
            density: entry.density.value,
            conductivity: rows_k(&entry.conductivity),
            specific_heat: rows_k(&entry.specific_heat),
            freezing: entry.freezing.as_ref().map(|freezing| FreezingSpec {
                solidus_k: freezing.ends.value + ZERO_DEGC_K,
                liquidus_k: freezing.begins.value + ZERO_DEGC_K,
                latent_heat: freezing.latent_heat.value * 1e3,
                solid_conductivity: rows_k(&freezing.conductivity),
                solid_specific_heat: rows_k(&freezing.specific_heat),
            }),
            lowest_use_k: entry.lowest_use.as_ref().map(|lowest| lowest.value + ZERO_DEGC_K),
            provenance: Provenance::default(),
        };
        let mut built_in = BuiltIn {
            aliases: entry.aliases,
            group: entry.group,
            note: entry.note,
            density: entry.density,
            conductivity: entry.conductivity,
            specific_heat: entry.specific_heat,
            freezing: entry.freezing,
            lowest_use: entry.lowest_use,
            spec,
        };
        let sources = built_in.sources();
        built_in.spec.provenance = Provenance {
            source: in_one_line(&sources),
            from_memory: sources.iter().any(|&(.., mark)| mark == Mark::FromMemory),
            own: false,
            overrides_built_in: false,
        };
        built_in
    }
}
