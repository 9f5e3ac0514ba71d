//! Solid and hollow cylinders that cool by surface convection, against series of Bessel functions.

use crate::bessel::{Hollow, Solid};
use crate::harness::{Check, Class, Group, Row};
use crate::known::{Known, temperature, temperatures};
use crate::parts::{constant, inside, kelvin, layer, march, outside, recording, section, still};
use crate::plot::{Curve, Plot};
use stillwarm::march::Settings;
use stillwarm::section::*;

const FOLDER: &str = "cylinder";
/// Share of the first temperature difference at default settings.
const LIMIT: f64 = 1e-4;
const K: f64 = 2.0;
const RHO_C: f64 = 2e6;
const RADIUS_M: f64 = 0.04;
const AIR_DEGC: f64 = -20.0;
const RANGE_K: f64 = 50.0;
const FOURIER: [f64; 6] = [0.01, 0.03, 0.1, 0.3, 1.0, 3.0];
/// Terms of the series: the last is below 1e-16 at the first time.
const TERMS: usize = 40;
/// Bi, first root and coefficient (Cengel, *Heat Transfer*, table 4-2), four decimals.
const PUBLISHED: [(f64, f64, f64); 8] = [
    (0.1, 0.4417, 1.0246),
    (0.5, 0.9408, 1.1143),
    (1.0, 1.2558, 1.2071),
    (2.0, 1.5994, 1.3384),
    (5.0, 1.9898, 1.5029),
    (10.0, 2.1795, 1.5677),
    (100.0, 2.3809, 1.6015),
    (f64::INFINITY, 2.4048, 1.6021),
];
/// Half of its last digit; the coefficient of the held surface is printed 1.6021 where 2 / (zeta J1(zeta)) is 1.60197.
const LAST_DIGIT: f64 = 5.1e-5;
const PUBLISHED_FAULT: f64 = 1.5e-4;

/// The check.
pub fn check() -> Check {
    let mut rows = Vec::new();
    let mut curves = Vec::new();
    for known in known() {
        let (values, _) = known.solve(&Settings::default());
        for ((what, want), got) in known.expected.iter().zip(values) {
            rows.push(Row::scaled(format!("{}: {what}", known.name), *want, got, RANGE_K, LIMIT));
        }
    }
    for bi in [0.5, 5.0, f64::INFINITY] {
        let section = solid(bi);
        let times: Vec<f64> = (1..=150).map(|n| seconds(1.5 * f64::from(n) / 150.0)).collect();
        let trace = march(&section, &recording(&times), &Settings::default());
        let share = |row: usize| (temperature(&section, &trace, row, Place::Centre) - AIR_DEGC) / RANGE_K;
        let line = (0..=times.len()).map(|row| (trace.history.times_s[row] / seconds(1.0), share(row)));
        curves.push(Curve::line(format!("computed, Bi = {bi}"), line.collect()));
        let series = Solid::new(bi, TERMS);
        let marks = (1..=15).map(|n| 0.1 * f64::from(n)).map(|fo| (fo, series.at(0.0, fo)));
        curves.push(Curve::marks(format!("series, Bi = {bi}"), marks.collect()));
    }
    let [late, published] = first_terms();
    Check {
        folder: FOLDER,
        title: "Solid and hollow cylinder",
        class: Class::Exact,
        groups: vec![
            Group { title: "Cooling by surface convection, degC".into(), measure: "of range", rows },
            late,
            published,
        ],
        listings: vec![],
        plots: vec![(
            "figure.svg",
            Plot {
                title: "Centre of a solid cylinder: share of the first difference".into(),
                x: "Fo = alpha t / R^2",
                y: "(T - T_air) / (T_0 - T_air)",
                log: (false, false),
                curves,
            },
        )],
    }
}

fn seconds(fo: f64) -> f64 {
    fo * RADIUS_M * RADIUS_M * RHO_C / K
}

fn solid(bi: f64) -> Section {
    let film = bi.is_finite().then_some(bi * K / RADIUS_M);
    section(still(constant(K, RHO_C), RADIUS_M), vec![], kelvin(AIR_DEGC), film, kelvin(AIR_DEGC + RANGE_K))
}

/// Every cylinder with its exact temperatures.
pub fn known() -> Vec<Known> {
    let times: Vec<f64> = FOURIER.iter().map(|&fo| seconds(fo)).collect();
    let mut all = Vec::new();
    for bi in [0.1, 1.0, 10.0, f64::INFINITY] {
        let mut section = solid(bi);
        let probe = 0.6 * RADIUS_M;
        section.probes.push(Probe { name: "r = 0.6 R".into(), radius_m: probe });
        let mut places = vec![(Place::Centre, 0.0), (Place::Radius(probe), 0.6)];
        if bi.is_finite() {
            places.push((Place::ContentSurface, 1.0));
        }
        let series = Solid::new(bi, TERMS);
        let expected = FOURIER.iter().flat_map(|&fo| {
            let name = |place: Place| format!("{} at Fo {fo}", section.place_name(place));
            let value = |r: f64| AIR_DEGC + RANGE_K * series.at(r, fo);
            places.iter().map(|&(place, r)| (name(place), value(r))).collect::<Vec<_>>()
        });
        all.push(Known {
            name: format!("solid, Bi = {bi}"),
            expected: expected.collect(),
            plan: recording(&times),
            read: temperatures(places.iter().map(|place| place.0).collect()),
            section,
        });
    }
    // Hollow: insulated inside, and a film on either side of the ring.
    for (name, film_in, film_out) in
        [("hollow, insulated inside", 0.0, 60.0), ("hollow, films inside and outside", 150.0, 40.0)]
    {
        let (a, b) = (0.4 * RADIUS_M, RADIUS_M);
        let state = if film_in > 0.0 {
            ContentState::Flowing { temperature_k: kelvin(AIR_DEGC), film: film_in }
        } else {
            ContentState::Empty
        };
        let content = Content { radius_m: a, material: (film_in > 0.0).then(|| constant(0.6, 4e6)), state };
        let ring = layer("ring", constant(K, RHO_C), a, b, 0.0);
        let mut section = section(content, vec![ring], kelvin(AIR_DEGC), Some(film_out), kelvin(AIR_DEGC + RANGE_K));
        let probe = 0.7 * RADIUS_M;
        section.probes.push(Probe { name: "r = 0.7 R".into(), radius_m: probe });
        let places = [(Place::Face(inside(0)), a), (Place::Radius(probe), probe), (Place::Face(outside(0)), b)];
        let series = Hollow::new(a, b, film_in / K, film_out / K, TERMS);
        let expected = FOURIER.iter().flat_map(|&fo| {
            let name = |place: Place| format!("{} at Fo {fo}", section.place_name(place));
            let value = |r: f64| AIR_DEGC + RANGE_K * series.at(r, fo * RADIUS_M * RADIUS_M);
            places.iter().map(|&(place, r)| (name(place), value(r))).collect::<Vec<_>>()
        });
        all.push(Known {
            name: name.to_owned(),
            expected: expected.collect(),
            plan: recording(&times),
            read: temperatures(places.iter().map(|place| place.0).collect()),
            section,
        });
    }
    all
}

/// Root and coefficient of the first term: the library's late decay at the centre against the series, and the published
/// table against the series.
fn first_terms() -> [Group; 2] {
    let settings = Settings { refinement: 12.0, temperature_tolerance_k: 1e-6, ..Settings::default() };
    let (mut computed, mut published) = (Vec::new(), Vec::new());
    for (bi, zeta, c) in PUBLISHED {
        let exact = Solid::new(bi, 1).terms[0];
        let section = solid(bi);
        // Late enough for the second term to have died down to 1e-7, early enough for something to be left.
        let (early, late) = if bi < 5.0 { (1.0, 1.3) } else { (0.6, 0.9) };
        let trace = march(&section, &recording(&[seconds(early), seconds(late)]), &settings);
        let share = |row: usize| (temperature(&section, &trace, row, Place::Centre) - AIR_DEGC) / RANGE_K;
        let decay = (share(1) / share(2)).ln() / (late - early);
        let row = |what, want: f64, got: f64, limit| Row::scaled(format!("Bi = {bi}: {what}"), want, got, 1.0, limit);
        computed.push(row("zeta1", exact.0, decay.sqrt(), LIMIT));
        computed.push(row("C1", exact.1, share(1) * (decay * early).exp(), LIMIT));
        published.push(row("zeta1", exact.0, zeta, LAST_DIGIT));
        published.push(row("C1", exact.1, c, if bi.is_finite() { LAST_DIGIT } else { PUBLISHED_FAULT }));
    }
    [
        Group { title: "First root and coefficient from the late decay".into(), measure: "absolute", rows: computed },
        Group { title: "The published table (\"computed\") against the series".into(), measure: "absolute", rows: published },
    ]
}
