//! Linear transients of layered cylinders with contacts and heaters against exact references (`reference.json`).
//!
//! In each layer `rho c dT/dt = (1/r) d/dr (r k dT/dr) + q`; contacts by their resistance per length; every input a step.

use crate::harness::{Check, Class, Group, Listing, Row, read};
use crate::known::{Known, temperature, temperatures};
use crate::parts::{constant, heater, inside, kelvin, layer, outside, recording, section};
use crate::plot::{Curve, Plot};
use serde_json::Value;
use std::f64::consts::PI;
use stillwarm::march::Settings;
use stillwarm::section::*;
use stillwarm::series::Series;

const FOLDER: &str = "composite";
/// Share of a case's temperature range at default settings.
const LIMIT: f64 = 1e-4;
/// Second order, less what three meshes leave of its way there.
const ORDER: f64 = 2.0;
const ORDER_SHORTFALL: f64 = 0.3;
/// Tolerance [K] at which time adds nothing to the error of the mesh.
const TIGHT_K: f64 = 1e-6;
const REFINEMENTS: [f64; 3] = [1.0, 2.0, 4.0];

/// One case with the range of its temperatures [K].
pub struct Case {
    /// The section with its known temperatures.
    pub known: Known,
    /// Lowest to highest temperature met [K].
    pub range_k: f64,
    places: Vec<Place>,
    times_s: Vec<f64>,
}

impl Case {
    /// Names of the compared places, in the order of every time's row.
    pub fn place_names(&self) -> Vec<String> {
        self.places.iter().map(|&place| self.known.section.place_name(place)).collect()
    }
}

/// The check.
pub fn check() -> Check {
    let cases = cases();
    let mut rows = Vec::new();
    let mut curves = Vec::new();
    let mut orders = Vec::new();
    let mut listing = Vec::new();
    for case in &cases {
        let (values, trace) = case.known.solve(&Settings::default());
        let worst = case.known.worst(&values);
        let at = (0..values.len()).max_by(|&a, &b| {
            let distance = |index: usize| (values[index] - case.known.expected[index].1).abs();
            distance(a).total_cmp(&distance(b))
        });
        let at = at.expect("there are values");
        let (what, reference) = &case.known.expected[at];
        rows.push(Row {
            what: format!("{}: {what}", case.known.name),
            reference: *reference,
            computed: values[at],
            error: worst / case.range_k,
            limit: LIMIT,
        });
        if case.known.name == "heater-trip-and-restart" {
            curves = figure(case, &trace);
        }
        let errors: Vec<f64> = REFINEMENTS
            .iter()
            .map(|&refinement| {
                let settings = Settings {
                    refinement,
                    temperature_tolerance_k: TIGHT_K,
                    share_tolerance: 1e-2 * TIGHT_K,
                    ..Settings::default()
                };
                case.known.worst(&case.known.solve(&settings).0) / case.range_k
            })
            .collect();
        // The rate over the whole span: single pairs waver where the place of the largest error moves.
        let rate = (errors[0] / errors[2]).log2() / 2.0;
        orders.push(Row::at_least(case.known.name.clone(), ORDER, rate, ORDER_SHORTFALL));
        let mut cells = vec![case.known.name.clone()];
        cells.extend(errors.iter().map(|error| format!("{error:.1e}")));
        cells.push(format!("{rate:.2}"));
        listing.push(cells);
    }
    let head = ["case", "mesh x1", "x2", "x4", "rate"].map(str::to_owned).to_vec();
    Check {
        folder: FOLDER,
        title: "Layered cylinders",
        class: Class::Exact,
        groups: vec![
            Group { title: "Largest of all errors of each case, degC".into(), measure: "of range", rows },
            Group { title: "Rate at which the largest error falls".into(), measure: "short of 2", rows: orders },
        ],
        listings: vec![Listing { title: format!("Largest error, of range, at a tolerance of {TIGHT_K:.0e} K"), head, rows: listing }],
        plots: vec![(
            "figure.svg",
            Plot {
                title: "Heater trips at 2 h, restarts at twice the output at 12 h".into(),
                x: "time, h",
                y: "temperature, degC",
                log: (false, false),
                curves,
            },
        )],
    }
}

fn figure(case: &Case, trace: &stillwarm::march::Trace) -> Vec<Curve> {
    let mut curves = Vec::new();
    let columns = case.places.len();
    let rows = 0..case.times_s.len();
    let fine: Vec<f64> = (1..=200).map(|n| case.times_s.last().expect("times") * f64::from(n) / 200.0).collect();
    let smooth = crate::parts::march(&case.known.section, &recording(&fine), &Settings::default());
    assert!(trace.history.times_s.len() == case.times_s.len() + 1);
    for (column, &place) in case.places.iter().enumerate() {
        if column % 2 == 1 {
            continue;
        }
        let name = case.known.section.place_name(place);
        let line = (0..=fine.len())
            .map(|row| (smooth.history.times_s[row] / 3600.0, temperature(&case.known.section, &smooth, row, place)));
        curves.push(Curve::line(format!("computed, {name}"), line.collect()));
        let marks = rows.clone().map(|row| (case.times_s[row] / 3600.0, case.known.expected[row * columns + column].1));
        curves.push(Curve::marks(format!("exact, {name}"), marks.collect()));
    }
    curves
}

fn number(value: &Value) -> f64 {
    value.as_f64().unwrap_or_else(|| panic!("{value} is no number"))
}

fn numbers(value: &Value) -> Vec<f64> {
    value.as_array().expect("a list").iter().map(number).collect()
}

/// Piecewise constant history: (from [s], value).
fn steps(value: &Value) -> Vec<(f64, f64)> {
    value.as_array().expect("a list").iter().map(|pair| (number(&pair[0]), number(&pair[1]))).collect()
}

/// The cases of `reference.json`.
pub fn cases() -> Vec<Case> {
    let file: Value = serde_json::from_str(&read(FOLDER, "reference.json")).expect("the reference is JSON");
    file["cases"].as_array().expect("a list of cases").iter().map(case).collect()
}

fn case(json: &Value) -> Case {
    let rings = json["layers"].as_array().expect("a list of layers");
    let contacts = numbers(&json["contact_R"]);
    let solid = json["inner"]["kind"] == "solid";
    // The innermost ring of a solid stack is the content.
    let shift = usize::from(solid);
    let ring = |index: usize, key: &str| number(&rings[index][key]);
    let layers: Vec<Layer> = (shift..rings.len())
        .map(|index| {
            let material = constant(ring(index, "k"), ring(index, "rho_c"));
            let contact = if index == 0 { 0.0 } else { contacts[index - 1] };
            layer(&format!("layer {index}"), material, ring(index, "r_in"), ring(index, "r_out"), contact)
        })
        .collect();
    let mut events = Vec::new();
    let inner = &json["inner"];
    let content = match inner["kind"].as_str() {
        Some("solid") => Content {
            radius_m: ring(0, "r_out"),
            material: Some(constant(ring(0, "k"), ring(0, "rho_c"))),
            state: ContentState::Still,
        },
        Some("lump") => {
            let radius_m = ring(0, "r_in");
            let rho_c = number(&inner["C"]) / (PI * radius_m * radius_m);
            let state = ContentState::Stirred { film: inner["h"].as_f64() };
            Content { radius_m, material: Some(constant(0.6, rho_c)), state }
        }
        Some("fixed") => {
            let held = |celsius: f64| ContentState::HeldAt { temperature_k: kelvin(celsius) };
            let history = steps(&inner["T"]);
            for &(time_s, celsius) in &history[1..] {
                events.push(Event { time_s, change: Change::Content(held(celsius)) });
            }
            Content { radius_m: ring(0, "r_in"), material: None, state: held(history[0].1) }
        }
        other => panic!("an inside of kind {other:?}"),
    };
    let air = steps(&json["outer"]["T"]);
    for &(time_s, celsius) in &air[1..] {
        events.push(Event { time_s, change: Change::OutsideTemperature(Series::Constant(kelvin(celsius))) });
    }
    let start_k = json["initial"]["T"].as_f64().map_or(f64::NAN, kelvin);
    let mut section = section(content, layers, kelvin(air[0].1), json["outer"]["h"].as_f64(), start_k);
    if json["initial"]["kind"] == "steady" {
        section.start = Start::Hold;
    }
    for (index, source) in json["heaters"].as_array().expect("a list of heaters").iter().enumerate() {
        let which = |key: &str| number(&source[key]) as usize;
        let seat = match source["at"].as_str() {
            Some("interface") if source["side"] == "in" => Seat::Face(outside(which("interface") - 1 - shift)),
            Some("interface") => Seat::Face(inside(which("interface") - shift)),
            Some("layer") if solid && which("layer") == 0 => Seat::Content,
            Some("layer") => Seat::Layer(which("layer") - shift),
            _ => Seat::Content,
        };
        let output = steps(&source["W_per_m"]);
        section.heaters.push(heater(seat, output[0].1));
        for &(time_s, watts) in &output[1..] {
            events.push(Event { time_s, change: Change::HeaterOutput(index, watts) });
        }
    }
    events.sort_by(|a, b| a.time_s.total_cmp(&b.time_s));
    section.events = events;

    let places: Vec<Place> = json["probes"]
        .as_array()
        .expect("a list of probes")
        .iter()
        .map(|probe| {
            if probe["lump"] == true {
                return Place::ContentMean;
            }
            let index = number(&probe["layer"]) as usize;
            let radius = number(&probe["r"]);
            if index < shift {
                match radius {
                    0.0 => Place::Centre,
                    radius if radius == ring(0, "r_out") => Place::ContentSurface,
                    radius => Place::Radius(radius),
                }
            } else if radius == ring(index, "r_in") {
                Place::Face(inside(index - shift))
            } else if radius == ring(index, "r_out") {
                Place::Face(outside(index - shift))
            } else {
                Place::Radius(radius)
            }
        })
        .collect();
    for &place in &places {
        if let Place::Radius(radius_m) = place {
            section.probes.push(Probe { name: format!("radius {:.1} mm", radius_m * 1e3), radius_m });
        }
    }
    let times_s = numbers(&json["times"]);
    let expected: Vec<(String, f64)> = json["T"]
        .as_array()
        .expect("rows")
        .iter()
        .zip(&times_s)
        .flat_map(|(row, time)| {
            let name = |place: &Place| format!("{} at {time} s", section.place_name(*place));
            places.iter().map(name).zip(numbers(row)).collect::<Vec<_>>()
        })
        .collect();
    let met = expected.iter().map(|known| known.1).chain(air.iter().map(|step| step.1));
    let (low, high) = met.fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), t| (low.min(t), high.max(t)));
    Case {
        known: Known {
            name: json["name"].as_str().expect("a name").to_owned(),
            section,
            plan: recording(&times_s),
            expected,
            read: temperatures(places.clone()),
        },
        range_k: high - low,
        places,
        times_s,
    }
}
