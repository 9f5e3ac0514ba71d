//! The composite freezing benchmark: a water line under lagging loses its heater.

use crate::harness::{Check, Class, Group, Row, case, read};
use crate::known::{Known, sightings};
use crate::parts::{march, watching};
use crate::plot::{Curve, Plot};
use stillwarm::march::{Recording, Settings};

const FOLDER: &str = "freezing-line";
/// Relative error of a time at default settings.
const LIMIT: f64 = 1e-3;
/// Start: wall inside, lagging inside and outside, jacket outside [degC]; the reference's own digits.
const START_DEGC: [(usize, f64); 4] = [(0, 28.967604648), (2, 28.833334448), (3, -23.604562820), (5, -23.604638409)];
const START_LIMIT: f64 = 1e-9;

/// The check.
pub fn check() -> Check {
    let known = known();
    let (times, trace) = known.solve(&Settings::default());
    let rows = known.expected.iter().zip(&times).map(|((what, want), got)| Row::relative(what, *want, *got, LIMIT));
    let rows: Vec<Row> = rows.collect();
    let start = START_DEGC.iter().map(|&(face, want)| {
        let (name, kelvin) = &trace.start.faces[face];
        Row::scaled(name, want, kelvin - 273.15, 53.97, START_LIMIT)
    });
    let start = start.collect();
    let mut plan = known.plan.clone();
    plan.record = Recording::Steps;
    let smooth = march(&known.section, &plan, &Settings::default()).history;
    let hours = smooth.times_s.iter().map(|time| time / 3600.0);
    let frozen = hours.zip(smooth.frozen_share.iter().map(|share| 100.0 * share)).collect();
    let marks = [0.0, 10.0, 50.0, 90.0, 100.0].into_iter().zip(&known.expected[1..6]);
    let marks = marks.map(|(share, known)| (known.1 / 3600.0, share)).collect();
    Check {
        folder: FOLDER,
        title: "A water line freezes",
        class: Class::Benchmark,
        groups: vec![
            Group { title: "Time after the loss of power, s".into(), measure: "relative", rows },
            Group { title: "The held start, degC".into(), measure: "of range", rows: start },
        ],
        listings: vec![],
        plots: vec![(
            "figure.svg",
            Plot {
                title: "Frozen share of the content after the loss of power".into(),
                x: "time, h",
                y: "frozen share, %",
                log: (false, false),
                curves: vec![Curve::line("computed", frozen), Curve::marks("reference", marks)],
            },
        )],
    }
}

/// The benchmark with its times.
pub fn known() -> Known {
    let section = case(FOLDER, "case.toml");
    let text = read(FOLDER, "reference.csv");
    let mut reader = csv::Reader::from_reader(text.as_bytes());
    let expected: Vec<(String, f64)> = reader.deserialize().map(|row| row.expect("a name and a time")).collect();
    // The case's limits are the reference's rows, in the same order.
    assert!(section.limits.iter().map(|limit| &limit.name).eq(expected.iter().map(|known| &known.0)));
    let plan = watching(section.limits.iter().map(|limit| limit.condition).collect());
    Known { name: "water line".into(), section, plan, expected, read: sightings() }
}
