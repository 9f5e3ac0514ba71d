//! Steady state: log-mean resistances in series, the Kirchhoff integral, published examples.
//!
//! ```text
//!  R_layer = ln(r2 / r1) / (2 pi k)    R_film = 1 / (2 pi r h)      [m K/W]
//!  R_contact as given                  q = (T1 - T2) / sum R        [W/m]
//! ```
//!
//! A heater of `P` on a face at `T_h`, with `R_in` to the held content and `R_out` to the air:
//! `T_h = (T_i/R_in + T_o/R_out + P) / (1/R_in + 1/R_out)`.

use crate::harness::{Check, Class, Group, Row, case};
use crate::parts::{Random, constant, heater, inside, kelvin, layer, outside, section};
use crate::plot::{Curve, Plot};
use std::f64::consts::TAU;
use std::sync::Arc;
use stillwarm::march::steady::{Steady, balance};
use stillwarm::material::{Material, MaterialSpec};
use stillwarm::section::*;

const FOLDER: &str = "steady";
/// Both sides are the same few logarithms; round-off of the sums is a few 1e-13.
const ROUND_OFF: f64 = 1e-9;
/// Random sections drawn, and the smallest range of temperature [K] at which one is compared.
const DRAWN: usize = 300;
const LEAST_RANGE_K: f64 = 0.1;
/// Heat lost is compared with the flow, or with what this difference [K] drives through the outermost resistance.
const SMALLEST_DROP_K: f64 = 1e-3;

/// The check.
pub fn check() -> Check {
    let (fixed, plot) = fixed_cases();
    Check {
        folder: FOLDER,
        title: "Steady state",
        class: Class::Exact,
        groups: vec![fixed, random_cases(), kirchhoff(), published()],
        listings: vec![],
        plots: vec![("figure.svg", plot)],
    }
}

fn solve(section: &Section) -> Steady {
    let outputs: Vec<f64> = section.heaters.iter().map(Heater::output_per_line_w_per_m).collect();
    balance(section, &outputs, 1.0).unwrap_or_else(|error| panic!("{error}"))
}

/// Every resistance from the content's surface to the air: contact, layer, contact, layer, ..., film.
fn resistances(section: &Section) -> Vec<f64> {
    let mut all = Vec::new();
    for layer in &section.layers {
        all.push(layer.contact.resistance_m_k_per_w);
        let k = layer.material.kirchhoff.constant_rate().expect("constant properties");
        all.push((layer.outside_radius_m / layer.inside_radius_m).ln() / (TAU * k));
    }
    all.push(section.outside.film.map_or(0.0, |film| 1.0 / (TAU * section.outermost_radius_m() * film)));
    all
}

/// Face temperatures [K] and heat lost [W/m] of a section with one heater on a face, by hand.
fn by_hand(section: &Section) -> (Vec<f64>, f64) {
    let r = resistances(section);
    let Seat::Face(face) = section.heaters[0].seat else { panic!("the heater is on a face") };
    let power = section.heaters[0].output_w_per_m;
    let air = section.outside.temperature_k.at(0.0);
    // Face n (inside and outside of each layer in turn) has the first n + 1 resistances inside it.
    let split = 2 * face.layer + usize::from(face.side == Side::Outside) + 1;
    let r_out: f64 = r[split..].iter().sum();
    let (heat_in, lost) = match section.content.state {
        ContentState::HeldAt { temperature_k } => {
            let r_in: f64 = r[..split].iter().sum();
            let at = (temperature_k / r_in + air / r_out + power) / (1.0 / r_in + 1.0 / r_out);
            ((temperature_k - at) / r_in, (at - air) / r_out)
        }
        _ => (0.0, power),
    };
    let faces = (0..2 * section.layers.len())
        .map(|face| {
            // Outwards from the air: what lies between the face and the air, with the heater's heat beyond its face.
            let (mut temperature, mut index) = (air, r.len());
            while index > face + 1 {
                index -= 1;
                temperature += r[index] * if index < split { heat_in } else { lost };
            }
            temperature
        })
        .collect();
    (faces, lost)
}

/// Largest error of the face temperatures over the largest difference in the case, and relative error of the heat lost.
/// `None` where hardly any difference is left: a round-off of 300 K would be all there is to see.
fn errors(section: &Section) -> Option<(f64, f64)> {
    let (faces, lost) = by_hand(section);
    let air = section.outside.temperature_k.at(0.0);
    let range = faces.iter().fold(0.0_f64, |most, face| most.max((face - air).abs()));
    if range < LEAST_RANGE_K {
        return None;
    }
    let steady = solve(section);
    let worst = steady.snapshot.faces.iter().zip(&faces).fold(0.0_f64, |most, (a, b)| most.max((a.1 - b).abs()));
    let outermost = resistances(section).into_iter().rfind(|r| *r > 0.0).expect("a layer resists");
    let flow = lost.abs().max(section.heaters[0].output_w_per_m).max(SMALLEST_DROP_K / outermost);
    Some((worst / range, (steady.snapshot.lost_w_per_m - lost).abs() / flow))
}

/// A pipe of three layers with a contact under the second; the heater on either side of the contact.
fn fixed(held: bool, seat: Face) -> Section {
    let state = if held { ContentState::HeldAt { temperature_k: kelvin(5.0) } } else { ContentState::Empty };
    let content = Content { radius_m: 0.03895, material: None, state };
    let layers = vec![
        layer("wall", constant(50.0, 3.7e6), 0.03895, 0.04445, 0.0),
        layer("lagging", constant(0.036, 8.4e4), 0.04445, 0.09445, 0.119351),
        layer("jacket", constant(200.0, 2.43e6), 0.09445, 0.09505, 0.0),
    ];
    let mut section = section(content, layers, kelvin(-25.0), Some(18.0), kelvin(0.0));
    section.heaters.push(heater(Seat::Face(seat), 25.0));
    section
}

fn fixed_cases() -> (Group, Plot) {
    let mut rows = Vec::new();
    let mut curves = Vec::new();
    let sides = [("inside the contact", outside(0)), ("outside the contact", inside(1))];
    for (content, held) in [("content held", true), ("content empty", false)] {
        for (side, face) in sides {
            let section = fixed(held, face);
            let (steady, (faces, lost)) = (solve(&section), by_hand(&section));
            let range = faces[0] - kelvin(-25.0);
            for ((name, got), want) in steady.snapshot.faces.iter().zip(&faces) {
                let what = format!("heater {side}, {content}: {name}, degC");
                rows.push(Row::scaled(what, want - 273.15, got - 273.15, range.abs(), ROUND_OFF));
            }
            let what = format!("heater {side}, {content}: heat lost, W/m");
            rows.push(Row::relative(what, lost, steady.snapshot.lost_w_per_m, ROUND_OFF));
            if !held {
                let history = &steady.history;
                let profile = history.profile_radii_m.iter().zip(history.profiles_k.row(0));
                let profile = profile.map(|(r, t)| (r * 1e3, t - 273.15)).filter(|point| point.1.is_finite());
                curves.push(Curve::line(format!("computed, heater {side}"), profile.collect()));
                let radii = section.faces().map(|face| match face.side {
                    Side::Inside => section.layers[face.layer].inside_radius_m,
                    Side::Outside => section.layers[face.layer].outside_radius_m,
                });
                let marks = radii.zip(&faces).map(|(r, t)| (r * 1e3, t - 273.15)).collect();
                curves.push(Curve::marks(format!("by hand, heater {side}"), marks));
            }
        }
    }
    let plot = Plot {
        title: "An empty pipe at 25 W/m: the side of the contact on which the heater lies".into(),
        x: "radius, mm",
        y: "temperature, degC",
        log: (false, false),
        curves,
    };
    (Group { title: "Resistances in series with a contact".into(), measure: "of range, or relative", rows }, plot)
}

fn random_cases() -> Group {
    let mut random = Random(20);
    let (mut worst_face, mut worst_lost) = (0.0_f64, 0.0_f64);
    let mut seen = 0;
    for number in 0..DRAWN {
        let mut radius = random.decades(0.005, 0.3);
        let content_radius = radius;
        let count = 1 + (random.next() * 4.0) as usize;
        let layers: Vec<Layer> = (0..count)
            .map(|index| {
                let from = radius;
                radius *= 1.0 + random.decades(0.01, 1.0);
                let contact = if random.next() < 0.3 { 0.0 } else { random.decades(1e-3, 1.0) };
                layer(&format!("layer {index}"), constant(random.decades(0.02, 400.0), 1e6), from, radius, contact)
            })
            .collect();
        let held = random.next() < 0.5;
        let state = if held {
            ContentState::HeldAt { temperature_k: kelvin(random.between(-20.0, 150.0)) }
        } else {
            ContentState::Empty
        };
        let content = Content { radius_m: content_radius, material: None, state };
        let film = (random.next() < 0.8).then(|| random.decades(1.0, 100.0));
        let mut section = section(content, layers, kelvin(random.between(-40.0, 40.0)), film, kelvin(0.0));
        // A heater on a surface that is itself held has no say; the outside of a wall does.
        let layer = (random.next() * count as f64) as usize;
        let side = if layer + 1 == count && film.is_none() { Side::Inside } else { Side::Outside };
        if layer == 0 && side == Side::Inside && section.layers[0].contact.resistance_m_k_per_w == 0.0 && held {
            continue;
        }
        let side = if layer > 0 && number % 2 == 0 { Side::Inside } else { side };
        section.heaters.push(heater(Seat::Face(Face { layer, side }), random.decades(1.0, 200.0)));
        let Some((face, lost)) = errors(&section) else { continue };
        seen += 1;
        worst_face = worst_face.max(face);
        worst_lost = worst_lost.max(lost);
    }
    let row = |what: &str, error: f64| Row { what: what.into(), reference: 0.0, computed: error, error, limit: ROUND_OFF };
    Group {
        title: format!("{seen} random sections of one to four layers"),
        measure: "largest error, of range or relative",
        rows: vec![row("face temperatures over the case's range", worst_face), row("heat lost", worst_lost)],
    }
}

/// `k = k0 (1 + b (T - 273.15 K))` as a table of two knots.
struct Sloped {
    k0: f64,
    b: f64,
}

impl Sloped {
    fn material(&self) -> Arc<Material> {
        let knot = |celsius: f64| (kelvin(celsius), self.k0 * (1.0 + self.b * celsius));
        Arc::new(
            Material::new(MaterialSpec {
                name: "sloped".into(),
                density: 1.0,
                conductivity: vec![knot(-100.0), knot(400.0)],
                specific_heat: vec![(273.15, 1e6)],
                ..Default::default()
            })
            .expect("the properties are positive"),
        )
    }

    /// Integral of k from 0 degC [W/m].
    fn theta(&self, celsius: f64) -> f64 {
        self.k0 * (celsius + 0.5 * self.b * celsius * celsius)
    }

    /// Temperature [degC] after a flow of `q` W/m outwards over `ln(r2/r1)`.
    fn after(&self, celsius: f64, q: f64, ln: f64) -> f64 {
        let theta = (self.theta(celsius) - q * ln / TAU) / self.k0;
        2.0 * theta / (1.0 + (1.0 + 2.0 * self.b * theta).sqrt())
    }
}

fn kirchhoff() -> Group {
    let mut rows = Vec::new();
    let lagging = Sloped { k0: 0.034, b: 3.5e-3 };
    // One layer, both surfaces held.
    let content =
        Content { radius_m: 0.03, material: None, state: ContentState::HeldAt { temperature_k: kelvin(250.0) } };
    let layers = vec![layer("lagging", lagging.material(), 0.03, 0.08, 0.0)];
    let steady = solve(&section(content, layers, kelvin(20.0), None, kelvin(20.0)));
    let ln = (0.08_f64 / 0.03).ln();
    let q = TAU * (lagging.theta(250.0) - lagging.theta(20.0)) / ln;
    rows.push(Row::relative("one layer: heat lost, W/m", q, steady.snapshot.lost_w_per_m, ROUND_OFF));
    let profile = steady.history.profile_radii_m.iter().zip(steady.history.profiles_k.row(0));
    let worst = profile
        .filter(|(r, _)| **r > 0.03)
        .map(|(r, t)| (lagging.after(250.0, q, (r / 0.03).ln()) - (t - 273.15)).abs() / 230.0)
        .fold(0.0, f64::max);
    rows.push(Row { what: "one layer: profile".into(), reference: 0.0, computed: worst, error: worst, limit: ROUND_OFF });

    // Two layers, a contact with the heater on its outer side, a film: one unknown, the heat that leaves the content.
    let wall = Sloped { k0: 15.0, b: 1.0e-3 };
    let (contact, film, power, air) = (0.05, 9.0, 60.0, -15.0);
    let content =
        Content { radius_m: 0.03, material: None, state: ContentState::HeldAt { temperature_k: kelvin(120.0) } };
    let layers = vec![
        layer("wall", wall.material(), 0.03, 0.034, 0.0),
        layer("lagging", lagging.material(), 0.034, 0.08, contact),
    ];
    let mut two = section(content, layers, kelvin(air), Some(film), kelvin(20.0));
    two.heaters.push(heater(Seat::Face(inside(1)), power));
    let faces = |q: f64| {
        let wall_outside = wall.after(120.0, q, (0.034_f64 / 0.03).ln());
        let lagging_inside = wall_outside - q * contact;
        let lagging_outside = lagging.after(lagging_inside, q + power, (0.08_f64 / 0.034).ln());
        [120.0, wall_outside, lagging_inside, lagging_outside]
    };
    let surplus = |q: f64| faces(q)[3] - (q + power) / (TAU * 0.08 * film) - air;
    let (mut low, mut high) = (-200.0, 200.0);
    for _ in 0..200 {
        let middle = 0.5 * (low + high);
        // More heat outwards leaves a colder surface behind.
        if surplus(middle) > 0.0 { low = middle } else { high = middle }
    }
    let q = 0.5 * (low + high);
    let steady = solve(&two);
    for ((name, got), want) in steady.snapshot.faces.iter().zip(faces(q)) {
        let what = format!("two layers, contact, heater: {name}, degC");
        rows.push(Row::scaled(what, want, got - 273.15, 120.0 - air, ROUND_OFF));
    }
    rows.push(Row::relative("two layers: heat lost, W/m", q + power, steady.snapshot.lost_w_per_m, ROUND_OFF));
    Group { title: "Conductivity over temperature by the Kirchhoff integral".into(), measure: "of range, or relative", rows }
}

fn published() -> Group {
    let run = |file: &str| solve(&case(FOLDER, file));
    let celsius = |steady: &Steady, face: usize| steady.snapshot.faces[face].1 - 273.15;
    let mut rows = Vec::new();
    // Limits: half of the last printed digit.
    let pipe = run("layered-pipe.toml");
    rows.push(Row::relative("layered pipe: heat lost, W/m", 680.30, pipe.snapshot.lost_w_per_m, 0.005 / 680.30));
    rows.push(Row::scaled("layered pipe: interface, degC", 596.05, celsius(&pipe, 1), 500.0, 0.005 / 500.0));
    let pipe = run("insulated-pipe.toml");
    rows.push(Row::relative("insulated pipe: heat lost, W/m", 73.12000884, pipe.snapshot.lost_w_per_m, ROUND_OFF));
    for (what, kelvin, face) in [("wall inside", 453.15, 0), ("interface", 453.12265, 1), ("surface", 306.57853, 3)] {
        let what = format!("insulated pipe: {what}, degC");
        rows.push(Row::scaled(what, kelvin - 273.15, celsius(&pipe, face), 152.0, 0.5e-5 / 152.0));
    }
    let rig = run("laboratory-rig.toml");
    let resistance = 30.0 / rig.snapshot.lost_w_per_m;
    rows.push(Row::relative("laboratory rig: resistance, m K/W", 2.164, resistance, 0.0005 / 2.164));
    Group { title: "Published examples".into(), measure: "of range, or relative", rows }
}
