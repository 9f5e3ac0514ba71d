//! What `list` shows: the materials and pipe sizes as text for a terminal of 100 columns, or as data.

use super::materials::{Block, BuiltIn, Figure, Freezing, Mark, find, materials};
use super::pipes::{CatalogPipe, Schedule, pipes, pipes_named};
use crate::faults::nearest;
use serde::Serialize;
use std::fmt::Write as _;
use thiserror::Error;

/// Columns of a terminal.
const WIDTH: usize = 100;
/// Stands beside what is from memory.
const RECALLED: &str = "*";

/// Neither a material nor a pipe size.
#[derive(Debug, Clone, PartialEq, Eq, Error)]
#[error(
    "there is no material, group of materials or pipe size `{name}`{}",
    .nearest.as_ref().map(|near| format!("\nhint: did you mean `{near}`?")).unwrap_or_default()
)]
pub struct UnknownName {
    /// What was asked for.
    pub name: String,
    /// The name spelt most like it, if one is.
    pub nearest: Option<String>,
}

/// What a name stands for.
struct Chosen {
    materials: Vec<&'static BuiltIn>,
    pipes: Vec<&'static CatalogPipe>,
    /// Whether one material was asked for, with all its tables.
    in_full: bool,
}

/// Nothing is everything; `materials`, `pipes`, a group of materials, a material, a pipe size or a whole designation.
fn choose(what: Option<&str>) -> Result<Chosen, UnknownName> {
    let all_materials = || materials().iter().collect::<Vec<_>>();
    let all_pipes = || pipes().iter().collect::<Vec<_>>();
    let Some(name) = what.map(str::trim).filter(|name| !name.is_empty()) else {
        return Ok(Chosen { materials: all_materials(), pipes: all_pipes(), in_full: false });
    };
    let none = Vec::new();
    match name.to_lowercase().as_str() {
        "materials" | "material" => {
            return Ok(Chosen { materials: all_materials(), pipes: Vec::new(), in_full: false });
        }
        "pipes" | "pipe" => return Ok(Chosen { materials: none, pipes: all_pipes(), in_full: false }),
        _ => {}
    }
    if let Some(material) = find(name) {
        return Ok(Chosen { materials: vec![material], pipes: Vec::new(), in_full: true });
    }
    let of_group: Vec<_> = materials().iter().filter(|material| material.group.eq_ignore_ascii_case(name)).collect();
    if !of_group.is_empty() {
        return Ok(Chosen { materials: of_group, pipes: Vec::new(), in_full: false });
    }
    let of_size = pipes_named(name);
    if !of_size.is_empty() {
        return Ok(Chosen { materials: Vec::new(), pipes: of_size, in_full: true });
    }
    let known = materials().iter().flat_map(|material| material.names().chain([material.group.as_str()]));
    let nearest = nearest(name, known.chain(["materials", "pipes", "cases"])).map(str::to_owned);
    Err(UnknownName { name: name.to_owned(), nearest })
}

/// Text for a terminal of 100 columns: everything; or `materials`, `pipes`, a group of materials; or one material with
/// its tables and sources, or one pipe size.
///
/// # Errors
/// Where nothing bears the name.
pub fn list_text(what: Option<&str>) -> Result<String, UnknownName> {
    let chosen = choose(what)?;
    let mut out = String::new();
    match (chosen.materials.as_slice(), chosen.in_full) {
        ([material], true) => write_in_full(&mut out, material),
        ([], _) => {}
        (several, _) => write_table(&mut out, several),
    }
    if chosen.in_full && !chosen.pipes.is_empty() {
        write_sizes(&mut out, &chosen.pipes);
    } else if !chosen.pipes.is_empty() {
        if !out.is_empty() {
            out.push('\n');
        }
        write_grids(&mut out, &chosen.pipes);
    }
    Ok(out)
}

/// The same as data: an object with the lists `materials` and `pipes`.
///
/// # Errors
/// Where nothing bears the name.
pub fn list_json(what: Option<&str>) -> Result<serde_json::Value, UnknownName> {
    let chosen = choose(what)?;
    let materials: Vec<_> = chosen.materials.iter().map(|material| MaterialListing::of(material)).collect();
    let pipes: Vec<_> = chosen.pipes.iter().map(|pipe| PipeListing::of(pipe)).collect();
    Ok(serde_json::json!({ "materials": materials, "pipes": pipes }))
}

#[derive(Serialize)]
struct MaterialListing<'a> {
    name: &'a str,
    aliases: &'a [String],
    group: &'a str,
    note: &'a str,
    from_memory: bool,
    density_kg_per_m3: &'a Figure,
    conductivity_w_per_m_k: &'a [Block],
    specific_heat_j_per_kg_k: &'a [Block],
    freezing: &'a Option<Freezing>,
    #[serde(rename = "lowest_use_degC")]
    lowest_use: &'a Option<Figure>,
}

impl<'a> MaterialListing<'a> {
    fn of(material: &'a BuiltIn) -> Self {
        MaterialListing {
            name: &material.spec.name,
            aliases: &material.aliases,
            group: &material.group,
            note: &material.note,
            from_memory: material.spec.provenance.from_memory,
            density_kg_per_m3: &material.density,
            conductivity_w_per_m_k: &material.conductivity,
            specific_heat_j_per_kg_k: &material.specific_heat,
            freezing: &material.freezing,
            lowest_use: &material.lowest_use,
        }
    }
}

#[derive(Serialize)]
struct PipeListing<'a> {
    designation: String,
    standard: &'a str,
    schedule: &'a str,
    nps: &'a str,
    dn: u32,
    outside_diameter_mm: f64,
    wall_mm: f64,
    inside_diameter_mm: f64,
    source: &'a str,
    mark: Mark,
}

impl<'a> PipeListing<'a> {
    fn of(pipe: &'a CatalogPipe) -> Self {
        PipeListing {
            designation: pipe.designation(),
            standard: &pipe.standard,
            schedule: &pipe.schedule,
            nps: &pipe.nps,
            dn: pipe.dn,
            outside_diameter_mm: pipe.outside_diameter_mm,
            wall_mm: pipe.wall_mm,
            inside_diameter_mm: pipe.inside_diameter_mm,
            source: &pipe.source,
            mark: pipe.mark,
        }
    }
}

/// Numbers the sources in the order in which they are met.
#[derive(Default)]
struct Sources<'a> {
    known: Vec<(&'a str, Mark)>,
}

impl<'a> Sources<'a> {
    fn number(&mut self, source: &'a str, mark: Mark) -> usize {
        match self.known.iter().position(|known| *known == (source, mark)) {
            Some(place) => place + 1,
            None => {
                self.known.push((source, mark));
                self.known.len()
            }
        }
    }

    /// Numbers of several sources, each once and in ascending order.
    fn numbers(&mut self, sources: impl Iterator<Item = (&'a str, Mark)>) -> String {
        let mut numbers: Vec<usize> = sources.map(|(source, mark)| self.number(source, mark)).collect();
        numbers.sort_unstable();
        numbers.dedup();
        let marked = |number: &usize| {
            let mark = if self.known[number - 1].1 == Mark::FromMemory { RECALLED } else { "" };
            format!("{number}{mark}")
        };
        numbers.iter().map(marked).collect::<Vec<_>>().join(" ")
    }
}

fn write_table(out: &mut String, chosen: &[&BuiltIn]) {
    let mut sources = Sources::default();
    let row = |cells: [&str; 8]| {
        let [name, k, range, density, c, freezes, latent, source] = cells;
        let line = format!("{name:22}{k:>14}{range:>12}{density:>8}{c:>11}{freezes:>10}{latent:>7}  {source}");
        line.trim_end().to_owned() + "\n"
    };
    out.push_str("Built-in materials\n\n");
    out.push_str(&row(["", "k", "from, to", "density", "c", "freezes", "latent", ""]));
    out.push_str(&row(["", "W/(m K)", "degC", "kg/m3", "J/(kg K)", "degC", "kJ/kg", "sources"]));
    let mut group = "";
    for material in chosen {
        if group != material.group {
            group = &material.group;
            let _ = writeln!(out, "\n{}", group.to_uppercase());
        }
        let (freezes, latent) = match (&material.freezing, &material.lowest_use) {
            (Some(freezing), _) if freezing.begins.value == freezing.ends.value => {
                (plain(freezing.begins.value), plain(freezing.latent_heat.value))
            }
            (Some(freezing), _) => {
                (span(freezing.ends.value, freezing.begins.value), plain(freezing.latent_heat.value))
            }
            (None, Some(lowest)) => (format!("min {}", plain(lowest.value)), String::new()),
            (None, None) => (String::new(), String::new()),
        };
        let of_solid = |(what, _, _): &(&str, &str, Mark)| what.ends_with("the solid");
        let all = material.sources();
        let numbers = sources.numbers(all.iter().filter(|one| !of_solid(one)).map(|&(_, source, mark)| (source, mark)));
        out.push_str(&row([
            &material.spec.name,
            &values(&material.conductivity, three_digits),
            &temperatures(&material.conductivity),
            &density(material.density.value),
            &values(&material.specific_heat, |value| format!("{value:.0}")),
            &freezes,
            &latent,
            &numbers,
        ]));
        if let Some(freezing) = &material.freezing {
            let numbers =
                sources.numbers(all.iter().filter(|one| of_solid(one)).map(|&(_, source, mark)| (source, mark)));
            let name = if freezing.solid == "solid" { "  its solid".into() } else { format!("  {}", freezing.solid) };
            out.push_str(&row([
                &name,
                &values(&freezing.conductivity, three_digits),
                &temperatures(&freezing.conductivity),
                "",
                &values(&freezing.specific_heat, |value| format!("{value:.0}")),
                "",
                "",
                &numbers,
            ]));
        }
    }
    out.push_str("\nSources\n");
    for (place, (source, mark)) in sources.known.iter().enumerate() {
        let number = format!("{}{}", place + 1, if *mark == Mark::FromMemory { RECALLED } else { "" });
        let words = if mark.words().is_empty() { String::new() } else { format!(" ({})", mark.words()) };
        out.push_str(&wrapped(&format!("{number:>4}  "), &format!("{source}{words}")));
    }
    out.push('\n');
    let note = "Beyond a table its end value holds. One density serves all temperatures. \"min\": the lowest temperature \
                of use of a content that is not modelled as freezing. `stillwarm list NAME` shows a material's whole \
                tables; a case defines its own under [[material]]. A maker's data sheet prevails.";
    out.push_str(&wrapped("", &format!("{RECALLED} from memory: recalled, not looked up. {note}")));
}

fn write_in_full(out: &mut String, material: &BuiltIn) {
    let spec = &material.spec;
    let _ = writeln!(out, "{}  ({})", spec.name, material.group);
    if !material.aliases.is_empty() {
        out.push_str(&wrapped("also ", &material.aliases.join(", ")));
    }
    if spec.provenance.from_memory {
        out.push_str("some of its figures are from memory: recalled, not looked up\n");
    }
    if !material.note.is_empty() {
        out.push('\n');
        out.push_str(&wrapped("", &material.note));
    }
    let phase = if material.freezing.is_some() { " of the liquid" } else { "" };
    write_figure(out, "density", "kg/m3", &material.density);
    write_blocks(out, &format!("conductivity{phase}"), "W/(m K)", &material.conductivity);
    write_blocks(out, &format!("specific heat{phase}"), "J/(kg K)", &material.specific_heat);
    match &material.freezing {
        Some(freezing) => {
            if freezing.begins.value == freezing.ends.value {
                write_figure(out, "freezes at", "degC", &freezing.begins);
            } else {
                write_figure(out, "freezing begins at", "degC", &freezing.begins);
                write_figure(out, "freezing ends at", "degC", &freezing.ends);
            }
            write_figure(out, "latent heat", "kJ/kg", &freezing.latent_heat);
            let solid = if freezing.solid == "solid" { "the solid" } else { &freezing.solid };
            write_blocks(out, &format!("conductivity of {solid}"), "W/(m K)", &freezing.conductivity);
            write_blocks(out, &format!("specific heat of {solid}"), "J/(kg K)", &freezing.specific_heat);
        }
        None if material.group == "content" => out.push_str("\nlatent heat: none; freezing is not modelled\n"),
        None => {}
    }
    if let Some(lowest) = &material.lowest_use {
        write_figure(out, "lowest temperature of use", "degC", lowest);
    }
}

fn write_figure(out: &mut String, what: &str, unit: &str, figure: &Figure) {
    let at = figure.at.map(|at| format!(", at {} degC", plain(at))).unwrap_or_default();
    let _ = writeln!(out, "\n{what}: {} {unit}{at}", plain(figure.value));
    write_source(out, &figure.source, figure.mark);
}

fn write_blocks(out: &mut String, what: &str, unit: &str, blocks: &[Block]) {
    let _ = writeln!(out, "\n{what}, {unit}");
    for block in blocks {
        for (degc, value) in &block.rows {
            let _ = writeln!(out, "{:>10} degC  {:>10}", plain(*degc), plain(*value));
        }
        write_source(out, &block.source, block.mark);
    }
}

fn write_source(out: &mut String, source: &str, mark: Mark) {
    let words = if mark.words().is_empty() { String::new() } else { format!(" ({})", mark.words()) };
    out.push_str(&wrapped("    source: ", &format!("{source}{words}")));
}

/// One table a standard: sizes down, schedules across, walls in millimetres.
fn write_grids(out: &mut String, chosen: &[&CatalogPipe]) {
    out.push_str("Pipe sizes: outside diameters and nominal walls in mm\n");
    let mut is_recalled = false;
    for standard in in_order(chosen.iter().map(|pipe| pipe.standard.as_str())) {
        let of_standard: Vec<_> = chosen.iter().filter(|pipe| pipe.standard == standard).collect();
        let schedules = in_order(of_standard.iter().map(|pipe| pipe.schedule.as_str()));
        let sizes = in_order(of_standard.iter().map(|pipe| pipe.nps.as_str()));
        let _ = writeln!(out, "\n{standard}");
        let mut line = format!("{:>6} {:>5} {:>8}", "NPS", "DN", "OD");
        for schedule in &schedules {
            let _ = write!(line, "{schedule:>8} ");
        }
        let _ = writeln!(out, "{}", line.trim_end());
        for size in sizes {
            let of_size: Vec<_> = of_standard.iter().filter(|pipe| pipe.nps == size).collect();
            let Some(first) = of_size.first() else { continue };
            let mut line = format!("{:>6} {:>5} {:>8.1}", first.nps, first.dn, first.outside_diameter_mm);
            for schedule in &schedules {
                let wall = of_size.iter().find(|pipe| pipe.schedule == *schedule).map_or(String::new(), |pipe| {
                    is_recalled |= pipe.mark == Mark::FromMemory;
                    let mark = if pipe.mark == Mark::FromMemory { RECALLED } else { " " };
                    format!("{:.2}{mark}", pipe.wall_mm)
                });
                let _ = write!(line, "{wall:>9}");
            }
            let _ = writeln!(out, "{}", line.trim_end());
        }
        for source in in_order(of_standard.iter().map(|pipe| pipe.source.as_str())) {
            out.push_str(&wrapped("  source: ", source));
        }
    }
    let marked = if is_recalled { "* from memory: recalled, not looked up. " } else { "" };
    out.push('\n');
    out.push_str(&wrapped(
        "",
        &format!(
            "{marked}A case writes pipe = \"DN 80, schedule 40\", \"NPS 1 1/2, schedule 80S\", \"DN 80, STD\" or \
             \"DN 80, normal\" (EN 10220). Mill tolerances of walls are not counted."
        ),
    ));
}

/// One size in every schedule, or one pipe: a line each.
fn write_sizes(out: &mut String, chosen: &[&CatalogPipe]) {
    let _ = writeln!(out, "{:32}{:>7}{:>9}{:>9}  standard", "pipe", "OD mm", "wall mm", "ID mm");
    for pipe in chosen {
        let mark = if pipe.mark == Mark::FromMemory { " (from memory)" } else { "" };
        let _ = writeln!(
            out,
            "{:32}{:>7}{:>9}{:>9}  {}{mark}",
            format!("DN {} / NPS {}, {}", pipe.dn, pipe.nps, Schedule(&pipe.schedule)),
            format!("{:.1}", pipe.outside_diameter_mm),
            format!("{:.2}", pipe.wall_mm),
            format!("{:.2}", pipe.inside_diameter_mm),
            pipe.standard,
        );
    }
    out.push('\n');
    for source in in_order(chosen.iter().map(|pipe| pipe.source.as_str())) {
        out.push_str(&wrapped("source: ", source));
    }
}

/// Each text once, in the order in which it is first met.
fn in_order<'a>(texts: impl Iterator<Item = &'a str>) -> Vec<&'a str> {
    let mut seen = Vec::new();
    for text in texts {
        if !seen.contains(&text) {
            seen.push(text);
        }
    }
    seen
}

/// A number as the data file has it.
fn plain(value: f64) -> String {
    format!("{value}")
}

fn three_digits(value: f64) -> String {
    let digits = (2.0 - value.abs().log10().floor()).max(0.0) as usize;
    format!("{value:.digits$}")
}

/// A density in whole kg/m3, of a gas with one digit.
fn density(value: f64) -> String {
    if value < 10.0 { format!("{value:.1}") } else { format!("{value:.0}") }
}

fn span(low: f64, high: f64) -> String {
    format!("{} to {}", plain(low), plain(high))
}

/// Lowest and highest value of a table, or its one value.
fn values(blocks: &[Block], text: impl Fn(f64) -> String) -> String {
    let all = blocks.iter().flat_map(|block| &block.rows).map(|row| row.1);
    let (low, high) =
        all.fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), value| (low.min(value), high.max(value)));
    let (low, high) = (text(low), text(high));
    if low == high { low } else { format!("{low}-{high}") }
}

/// Temperatures that a table covers, or those of its one row [degC].
fn temperatures(blocks: &[Block]) -> String {
    let mut all = blocks.iter().flat_map(|block| &block.rows).map(|row| row.0.round());
    let Some(first) = all.next() else { return String::new() };
    match all.next_back() {
        Some(last) => span(first, last),
        None => format!("at {}", plain(first)),
    }
}

/// Text in lines of the terminal's width: the lead first, what follows indented by its length.
fn wrapped(lead: &str, text: &str) -> String {
    let mut out = lead.to_owned();
    let mut column = lead.chars().count();
    let mut is_first = true;
    for word in text.split_whitespace() {
        let length = word.chars().count();
        if !is_first && column + 1 + length > WIDTH {
            out.push('\n');
            out.push_str(&" ".repeat(lead.chars().count()));
            column = lead.chars().count();
        } else if !is_first {
            out.push(' ');
            column += 1;
        }
        out.push_str(word);
        column += length;
        is_first = false;
    }
    out.push('\n');
    out
}
