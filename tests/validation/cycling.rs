//! A lumped line cycling on its thermostat: period and duty in closed form.
//!
//! With `C dT/dt = P on - (T - T_a) / R` and `T_m = T_a + P R`:
//!
//! ```text
//!  t_off = C R ln((T_off - T_a) / (T_on - T_a))    t_on = C R ln((T_m - T_on) / (T_m - T_off))
//!  period = t_on + t_off                           duty = t_on / period
//! ```

use crate::harness::{Check, Class, Group, Listing, Row, number};
use crate::known::Known;
use crate::parts::{constant, heater, kelvin, lagging_share, layer, march, recording, section};
use crate::plot::{Curve, Plot};
use std::f64::consts::{PI, TAU};
use stillwarm::march::{Hold, Recording, Settings};
use stillwarm::section::*;

const FOLDER: &str = "cycling";
/// Relative error of period and duty at default settings.
const LIMIT: f64 = 1e-3;
const BORE_M: f64 = 0.03895;
const WALL_M: f64 = 0.04445;
const LAGGING_M: f64 = 0.09445;
const RHO_C: f64 = 4.2e6;
const K_LAGGING: f64 = 0.036;
const FILM: f64 = 18.0;
const AIR_DEGC: f64 = -25.0;
const ON_DEGC: f64 = 5.0;
const OFF_DEGC: f64 = 8.0;
const OUTPUTS: [f64; 3] = [12.0, 15.0, 30.0];
/// Capacity of what shall have none [J/(m3 K)] (1e-4 of the content's), and conductivity of what shall not resist [W/(m K)].
const NO_CAPACITY: f64 = 100.0;
const NO_RESISTANCE: f64 = 1e4;

fn line(output: f64, lumped: bool) -> Section {
    let (wall, lagging) = if lumped {
        (constant(NO_RESISTANCE, NO_CAPACITY), constant(K_LAGGING, NO_CAPACITY))
    } else {
        (constant(50.0, 3.7e6), constant(K_LAGGING, 8.4e4))
    };
    let layers = vec![layer("wall", wall, BORE_M, WALL_M, 0.0), layer("lagging", lagging, WALL_M, LAGGING_M, 0.0)];
    let content = Content {
        radius_m: BORE_M,
        material: Some(constant(0.57, RHO_C)),
        state: ContentState::Stirred { film: None },
    };
    let mut section = section(content, layers, kelvin(AIR_DEGC), Some(FILM), kelvin(ON_DEGC));
    let wall = Face { layer: 0, side: Side::Outside };
    let thermostat =
        Thermostat { senses: Place::Face(wall), on_below_k: kelvin(ON_DEGC), off_above_k: kelvin(OFF_DEGC) };
    section.heaters.push(Heater { thermostat: Some(thermostat), ..heater(Seat::Face(wall), output) });
    section.start = Start::Hold;
    section
}

/// Period [s] and duty [-], with the little that wall and lagging still have beside the content.
fn closed_form(output: f64) -> (f64, f64) {
    let film = 1.0 / (TAU * LAGGING_M * FILM);
    let wall = NO_CAPACITY * PI * (WALL_M * WALL_M - BORE_M * BORE_M);
    let lagging = lagging_share(NO_CAPACITY, WALL_M, LAGGING_M, K_LAGGING, film);
    let capacity = RHO_C * PI * BORE_M * BORE_M + wall + lagging;
    let resistance = (LAGGING_M / WALL_M).ln() / (TAU * K_LAGGING) + film;
    let highest = AIR_DEGC + output * resistance;
    let off = capacity * resistance * ((OFF_DEGC - AIR_DEGC) / (ON_DEGC - AIR_DEGC)).ln();
    let on = capacity * resistance * ((highest - ON_DEGC) / (highest - OFF_DEGC)).ln();
    (off + on, on / (off + on))
}

fn cycle(hold: Hold) -> (f64, f64) {
    match hold {
        Hold::Cycle { period_s, duty } => (period_s, duty),
        other => panic!("the line does not cycle: {other:?}"),
    }
}

/// The lumped lines with their periods [s].
pub fn known() -> Vec<Known> {
    let of = |output: f64| Known {
        name: format!("{output} W/m"),
        section: line(output, true),
        plan: recording(&[1.0]),
        expected: vec![("period".into(), closed_form(output).0), ("duty".into(), closed_form(output).1)],
        read: Box::new(|_, trace| {
            let (period, duty) = cycle(trace.hold);
            vec![period, duty]
        }),
    };
    OUTPUTS.map(of).into()
}

/// The check.
pub fn check() -> Check {
    let mut rows = Vec::new();
    let mut listing = Vec::new();
    for (known, output) in known().iter().zip(OUTPUTS) {
        let (values, _) = known.solve(&Settings::default());
        for ((what, want), got) in known.expected.iter().zip(values) {
            rows.push(Row::relative(format!("{}: {what}", known.name), *want, got, LIMIT));
        }
        let real = march(&line(output, false), &recording(&[1.0]), &Settings::default());
        let ((period, duty), (closed_period, closed_duty)) = (cycle(real.hold), closed_form(output));
        let cells = [output, closed_period / 60.0, period / 60.0, closed_duty, duty];
        listing.push(cells.map(number).to_vec());
    }
    let section = line(15.0, true);
    let mut plan = recording(&[8.0 * 3600.0]);
    plan.record = Recording::Every(120.0);
    let history = march(&section, &plan, &Settings::default()).history;
    let wall = history.times_s.iter().zip(history.faces_k.column(1)).map(|(time, t)| (time / 3600.0, t - 273.15));
    Check {
        folder: FOLDER,
        title: "Cycling on a thermostat",
        class: Class::Exact,
        groups: vec![Group { title: "Period, s, and duty of a lumped line".into(), measure: "relative", rows }],
        listings: vec![Listing {
            title: "A steel wall and lagging with capacity: how far the closed form is from such a line".into(),
            head: ["output, W/m", "closed form, min", "line, min", "closed form, duty", "line, duty"]
                .map(str::to_owned)
                .to_vec(),
            rows: listing,
        }],
        plots: vec![(
            "figure.svg",
            Plot {
                title: "The lumped line at 15 W/m, from its own cycle".into(),
                x: "time, h",
                y: "wall outside, degC",
                log: (false, false),
                curves: vec![Curve::line("computed", wall.collect())],
            },
        )],
    }
}
