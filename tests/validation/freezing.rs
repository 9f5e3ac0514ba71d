//! Inward freezing of a cylinder of liquid at its freezing point: fixed wall and convection, and the quasi-steady limit.
//!
//! `Ste = c (T_f - T_0) / L`, `Bi = h R / k`, `tau = alpha t / R^2` when the front is at the share `s` of the radius.

use crate::harness::{Check, Class, Group, Row, read};
use crate::known::{Known, sightings};
use crate::parts::{Freezing, kelvin, section, still, watching};
use crate::plot::{Curve, Plot};
use stillwarm::march::Settings;
use stillwarm::section::Condition;

const FOLDER: &str = "freezing";
/// Relative error of a time at default settings.
const LIMIT: f64 = 2e-3;
const K: f64 = 2.0;
const RHO_C: f64 = 2e6;
const RADIUS_M: f64 = 0.04;
/// Freezing point over wall or ambient [K].
const DIFFERENCE_K: f64 = 20.0;
const FRONTS: [f64; 6] = [0.9, 0.7, 0.5, 0.3, 0.1, 0.0];

/// The check.
pub fn check() -> Check {
    let mut rows = Vec::new();
    let mut curves = Vec::new();
    let unit = RADIUS_M * RADIUS_M * RHO_C / K;
    for known in known() {
        let (times, _) = known.solve(&Settings::default());
        for ((what, want), got) in known.expected.iter().zip(&times) {
            rows.push(Row::relative(format!("{}: {what}", known.name), want / unit, got / unit, LIMIT));
        }
        if known.name.contains("Ste = 0.1") || known.name.contains("Ste = 1,") {
            let last = known.expected.last().expect("times").1;
            let line = times.iter().zip(FRONTS).map(|(time, s)| (time / last, s));
            curves.push(Curve::line(format!("computed, {}", known.name), line.collect()));
            let marks = known.expected.iter().zip(FRONTS).map(|(known, s)| (known.1 / last, s));
            curves.push(Curve::marks(format!("reference, {}", known.name), marks.collect()));
        }
    }
    let quasi_steady = quasi_steady();
    Check {
        folder: FOLDER,
        title: "Inward freezing of a cylinder",
        class: Class::Benchmark,
        groups: vec![
            Group { title: "tau when the front is at s".into(), measure: "relative", rows },
            Group {
                title: "The quasi-steady closed form as Ste goes to zero: tau Ste".into(),
                measure: "relative",
                rows: quasi_steady,
            },
        ],
        listings: vec![],
        plots: vec![(
            "figure.svg",
            Plot {
                title: "The front on its way to the centre".into(),
                x: "time over the time to freeze through",
                y: "front radius over radius",
                log: (false, false),
                curves,
            },
        )],
    }
}

/// A cylinder that freezes and is asked when the front passes each of [`FRONTS`].
pub fn cylinder(bi: f64, ste: f64, tau: impl Iterator<Item = (f64, f64)>) -> Known {
    let freezing = Freezing {
        point_k: kelvin(0.0),
        k: (K, K),
        rho_c: (RHO_C, RHO_C),
        latent: RHO_C * DIFFERENCE_K / ste,
    };
    let film = bi.is_finite().then_some(bi * K / RADIUS_M);
    let content = still(freezing.material(), RADIUS_M);
    let wall = if bi.is_finite() { format!("Bi = {bi}") } else { "fixed wall".to_owned() };
    let unit = RADIUS_M * RADIUS_M * RHO_C / K;
    let expected: Vec<(f64, f64)> = tau.collect();
    Known {
        name: format!("Ste = {ste}, {wall}"),
        section: section(content, vec![], kelvin(-DIFFERENCE_K), film, kelvin(0.0)),
        plan: watching(expected.iter().map(|(s, _)| Condition::Frozen(1.0 - s * s)).collect()),
        expected: expected.iter().map(|(s, tau)| (format!("s = {s}"), tau * unit)).collect(),
        read: sightings(),
    }
}

/// Every row of `reference.csv`, by boundary and Stefan number.
pub fn known() -> Vec<Known> {
    let text = read(FOLDER, "reference.csv");
    let mut reader = csv::Reader::from_reader(text.as_bytes());
    let rows: Vec<[f64; 4]> = reader.deserialize().map(|row| row.expect("four numbers")).collect();
    rows.chunk_by(|a, b| a[0] == b[0] && a[1] == b[1])
        .map(|rows| cylinder(rows[0][0], rows[0][1], rows.iter().map(|row| (row[2], row[3]))))
        .collect()
}

/// `tau Ste = s^2 ln(s) / 2 + (1 - s^2) / 4 + (1 - s^2) / (2 Bi)`, what is left of it at a small Stefan number.
fn quasi_steady() -> Vec<Row> {
    let mut rows = Vec::new();
    for bi in [f64::INFINITY, 10.0, 0.1] {
        for ste in [1e-2, 1e-3, 1e-4] {
            let closed = |s: f64| {
                let log = if s > 0.0 { 0.5 * s * s * s.ln() } else { 0.0 };
                log + 0.25 * (1.0 - s * s) + (1.0 - s * s) / (2.0 * bi)
            };
            let known = cylinder(bi, ste, [0.5, 0.0].map(|s| (s, closed(s) / ste)).into_iter());
            let (times, _) = known.solve(&Settings::default());
            // The solid's own heat adds up to 0.8 Ste; the rest is the limit above.
            let unit = RADIUS_M * RADIUS_M * RHO_C / K / ste;
            for ((what, want), got) in known.expected.iter().zip(times) {
                let limit = LIMIT + 0.8 * ste;
                rows.push(Row::relative(format!("{}: {what}", known.name), want / unit, got / unit, limit));
            }
        }
    }
    rows
}
