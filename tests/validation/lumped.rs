//! Lumped cooling and freezing: the closed forms of the trade, and what they leave out.
//!
//! ```text
//!  cooling   t = C R ln((T_i - T_a) / (T_f - T_a))              C = rho c pi (D_1/2)^2 [J/(m K)], R = ln(D_3/D_2) / (2 pi k)
//!  freezing  t = f rho L pi D_1^2 / (4 q),  q = (0 degC - T_a) / R
//! ```

use crate::harness::{Check, Class, Group, Listing, Row};
use crate::known::{Known, sightings};
use crate::parts::{Freezing, constant, kelvin, lagging_share, layer, outside, section, watching};
use crate::plot::{Curve, Plot};
use std::f64::consts::{PI, TAU};
use stillwarm::march::Settings;
use stillwarm::section::*;

const FOLDER: &str = "lumped";
/// The library against the closed form of the very same, stripped, section: relative error of a time at default settings.
const LIMIT: f64 = 1e-3;
const INCH_M: f64 = 0.0254;
/// NPS 2 (inside and outside) under 1.5 in of insulation.
const BORE_M: f64 = 0.5 * 2.067 * INCH_M;
const WALL_M: f64 = 0.5 * 2.375 * INCH_M;
const LAGGING_M: f64 = WALL_M + 1.5 * INCH_M;
/// 0.30 Btu in/(h ft2 degF) in W/(m K).
const K_LAGGING: f64 = 0.30 * 0.144_227_889;
/// 62.4 lb/ft3 and 1 Btu/(lb degF).
const RHO_C_WATER: f64 = 999.55 * 4186.8;
const LATENT: f64 = 999.55 * 334e3;
/// 42 degF [K].
const START_K: f64 = 273.15 + 10.0 / 1.8;
/// Share frozen at which ISO 12241 suggests to stop.
const FROZEN_SHARE: f64 = 0.25;
/// Capacity of what shall have none [J/(m3 K)] (1e-4 of the water's at most), and conductivity of what shall not resist
/// [W/(m K)].
const NO_CAPACITY: f64 = 100.0;
const NO_RESISTANCE: f64 = 1e4;
/// The same for ice, which the march follows through its front: 1e4 J/(m3 K) over 1 K are 3e-5 of its latent heat.
const ICE_WITHOUT_CAPACITY: f64 = 1e4;
const ICE_WITHOUT_RESISTANCE: f64 = 1e3;

/// What a section adds to the closed forms.
#[derive(Clone, Copy, Default)]
struct Added {
    wall: bool,
    lagging_capacity: bool,
    film: bool,
    real_ice: bool,
    still: bool,
}

fn line(air_degc: f64, added: Added) -> Section {
    let wall = if added.wall { constant(50.0, 3.7e6) } else { constant(NO_RESISTANCE, NO_CAPACITY) };
    let lagging = constant(K_LAGGING, if added.lagging_capacity { 8.4e4 } else { NO_CAPACITY });
    let water = Freezing {
        point_k: kelvin(0.0),
        k: (0.57, if added.real_ice { 2.2 } else { ICE_WITHOUT_RESISTANCE }),
        rho_c: (RHO_C_WATER, if added.real_ice { 2.1e6 } else { ICE_WITHOUT_CAPACITY }),
        latent: LATENT,
    };
    let state = if added.still { ContentState::Still } else { ContentState::Stirred { film: None } };
    let content = Content { radius_m: BORE_M, material: Some(water.material()), state };
    let layers = vec![layer("wall", wall, BORE_M, WALL_M, 0.0), layer("lagging", lagging, WALL_M, LAGGING_M, 0.0)];
    section(content, layers, kelvin(air_degc), added.film.then_some(10.0), START_K)
}

fn resistance() -> f64 {
    (LAGGING_M / WALL_M).ln() / (TAU * K_LAGGING)
}

/// Time to cool from 42 to 32 degF [s] with a capacity [J/(m K)] beside the water's.
fn cooling_s(air_degc: f64, beside: f64) -> f64 {
    let start = 10.0 / 1.8;
    (RHO_C_WATER * PI * BORE_M * BORE_M + beside) * resistance() * ((start - air_degc) / -air_degc).ln()
}

/// What the stripped line still has beside its water [J/(m K)].
fn left_over() -> f64 {
    NO_CAPACITY * PI * (WALL_M * WALL_M - BORE_M * BORE_M) + lagging_share(NO_CAPACITY, WALL_M, LAGGING_M, K_LAGGING, 0.0)
}

/// Time to freeze the share [s].
fn freezing_s(air_degc: f64) -> f64 {
    FROZEN_SHARE * LATENT * PI * BORE_M * BORE_M * resistance() / -air_degc
}

/// Air [degC], -18 and 20 degF, with the hours that the handbook prints.
const AIR: [(f64, f64); 2] = [(-50.0 / 1.8, 1.4), (-12.0 / 1.8, 4.6)];

/// The stripped lines with the closed forms' times.
pub fn known() -> Vec<Known> {
    let stripped = |&(air, _): &(f64, f64)| Known {
        name: format!("stripped line, air {air:.2} degC"),
        // Lagging that starts warm throughout would give its little heat to the water.
        section: Section {
            start: Start::Reading { place: Place::Face(outside(0)), temperature_k: START_K },
            ..line(air, Added::default())
        },
        plan: watching(vec![Condition::Frozen(0.0), Condition::Frozen(FROZEN_SHARE)]),
        expected: vec![
            ("cooled to freezing".into(), cooling_s(air, left_over())),
            ("a quarter frozen".into(), cooling_s(air, left_over()) + freezing_s(air)),
        ],
        read: sightings(),
    };
    AIR.iter().map(stripped).collect()
}

/// The check.
pub fn check() -> Check {
    let mut rows = Vec::new();
    let mut printed = Vec::new();
    for (known, (air, hours)) in known().iter().zip(AIR) {
        let (times, _) = known.solve(&Settings::default());
        for ((what, want), got) in known.expected.iter().zip(&times) {
            rows.push(Row::relative(format!("{}: {what}", known.name), want / 3600.0, got / 3600.0, LIMIT));
        }
        // Half of the last printed digit.
        printed.push(Row::scaled(format!("air {air:.2} degC: cooled to freezing"), hours, times[0] / 3600.0, 1.0, 0.05));
    }
    let steps = [
        ("the closed form's own line", Added::default()),
        ("and a steel wall of 50 W/(m K), 3.7e6 J/(m3 K)", Added { wall: true, ..Added::default() }),
        ("and lagging of 8.4e4 J/(m3 K)", Added { wall: true, lagging_capacity: true, ..Added::default() }),
        (
            "and a film of 10 W/(m2 K) outside",
            Added { wall: true, lagging_capacity: true, film: true, ..Added::default() },
        ),
        (
            "and ice of 2.2 W/(m K), 2.1e6 J/(m3 K)",
            Added { wall: true, lagging_capacity: true, film: true, real_ice: true, ..Added::default() },
        ),
        (
            "and still water of 0.57 W/(m K) instead of stirred",
            Added { wall: true, lagging_capacity: true, film: true, real_ice: true, still: true },
        ),
    ];
    let mut listing = Vec::new();
    let mut curves = [Vec::new(), Vec::new()];
    for (number, (name, added)) in steps.into_iter().enumerate() {
        let mut cells = vec![name.to_owned()];
        for (index, (air, _)) in AIR.into_iter().enumerate() {
            let plan = watching(vec![Condition::Frozen(0.0), Condition::Frozen(FROZEN_SHARE)]);
            let trace = crate::parts::march(&line(air, added), &plan, &Settings::default());
            let times: Vec<f64> = trace.sightings.iter().map(|sighting| sighting.time_s.unwrap_or(f64::NAN)).collect();
            let freezing = times[1] - times[0];
            cells.push(format!("{:.2} h ({:.2})", times[0] / 3600.0, times[0] / cooling_s(air, 0.0)));
            cells.push(format!("{:.2} h ({:.2})", freezing / 3600.0, freezing / freezing_s(air)));
            if index == 0 {
                curves[0].push((number as f64, times[0] / cooling_s(air, 0.0)));
                curves[1].push((number as f64, freezing / freezing_s(air)));
            }
        }
        listing.push(cells);
    }
    let head = |air: f64| [format!("cooling, air {air:.1} degC"), format!("a quarter freezing, air {air:.1} degC")];
    let heads = [vec!["what the line has".to_owned()], head(AIR[0].0).to_vec(), head(AIR[1].0).to_vec()].concat();
    let [cooling, freezing] = curves;
    Check {
        folder: FOLDER,
        title: "Lumped cooling and freezing",
        class: Class::ClosedForm,
        groups: vec![
            Group { title: "A line stripped to the closed form, h".into(), measure: "relative", rows },
            Group { title: "The handbook's printed hours".into(), measure: "h", rows: printed },
        ],
        listings: vec![Listing {
            title: "What the closed forms leave out, one after the other: times (over the closed form)".into(),
            head: heads,
            rows: listing,
        }],
        plots: vec![(
            "figure.svg",
            Plot {
                title: "Air at -27.8 degC: each further step of the table below".into(),
                x: "step",
                y: "time over the closed form",
                log: (false, false),
                curves: vec![Curve::marks("cooling to 0 degC", cooling), Curve::marks("freezing a quarter", freezing)],
            },
        )],
    }
}
