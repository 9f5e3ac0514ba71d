//! Freezing outward round a line sink, and melting round a line source: the similarity solution.
//!
//! Carslaw & Jaeger, *Conduction of Heat in Solids*, section 11.6 (Paterson 1952). The front is at
//! `R = 2 lambda sqrt(alpha_1 t)`; phase 1 lies inside it, phase 2, at `T_2` from the start, outside:
//!
//! ```text
//!  T_1 = T_f -/+ Q / (4 pi k_1) (E1(r^2 / 4 alpha_1 t) - E1(lambda^2))
//!  T_2 = T_i + (T_f - T_i) E1(r^2 / 4 alpha_2 t) / E1(lambda^2 alpha_1 / alpha_2)
//!  Q / (4 pi) exp(-lambda^2) - k_2 |T_i - T_f| exp(-lambda^2 a) / E1(lambda^2 a) = lambda^2 alpha_1 rho L,  a = alpha_1 / alpha_2
//! ```

use crate::harness::{Check, Class, Group, Row, case};
use crate::known::{Known, temperature};
use crate::parts::{Freezing, heater, inside, kelvin, layer, recording, section};
use crate::plot::{Curve, Plot};
use std::f64::consts::PI;
use stillwarm::march::{Settings, Trace};
use stillwarm::section::*;

const FOLDER: &str = "freezing-round-a-sink";
/// Relative error of the time at which the front passes, twice that of its radius.
const LIMIT: f64 = 2e-3;
/// Temperatures, of the case's range.
const TEMPERATURE_LIMIT: f64 = 2e-3;
const K_SOLID: f64 = 2.2;
const K_LIQUID: f64 = 0.57;
const RHO_C_SOLID: f64 = 2.1e6;
const RHO_C_LIQUID: f64 = 4.2e6;
const LATENT: f64 = 334e6;
/// The line has a radius: the front is ahead by what would have frozen in it, `pi a^2 rho L / Q`, 0.13 s of 3 h at worst
/// (1.2e-5).
const BORE_M: f64 = 0.05e-3;
/// The water ends: the wave of 10 K has left 5e-4 K there after a day.
const OUTER_M: f64 = 0.6;
/// Early times make the mesh fine where the front starts.
const TIMES_S: [f64; 6] = [60.0, 1800.0, 3.0 * 3600.0, 6.0 * 3600.0, 12.0 * 3600.0, 24.0 * 3600.0];
/// Times before this one are not compared: there the bore is still large.
const COMPARED_FROM_S: f64 = 10_000.0;
const PROBES_M: [f64; 3] = [0.01, 0.03, 0.1];
/// Q W/m, T_i degC, lambda and R after a day [mm] of the reference table.
const TABLE: [(f64, f64, f64, f64); 4] = [
    (20.0, 0.0, 0.06729021293216, 40.489318),
    (50.0, 0.0, 0.10603848285017, 63.804611),
    (50.0, 2.0, 0.09902927599924, 59.587088),
    (100.0, 10.0, 0.11860735920687, 71.367453),
];

/// The exponential integral E1, by its series below 2 and by its continued fraction above.
fn e1(x: f64) -> f64 {
    if x < 2.0 {
        const EULER: f64 = 0.577_215_664_901_532_9;
        let (mut sum, mut term) = (0.0, 1.0);
        for n in 1..60 {
            let n = f64::from(n);
            term *= -x / n;
            sum -= term / n;
        }
        return -EULER - x.ln() + sum;
    }
    let mut fraction = 0.0;
    for n in (1..200).rev() {
        let n = f64::from(n);
        fraction = n / (1.0 + n / (x + fraction));
    }
    (-x).exp() / (x + fraction)
}

/// The solution for a line of `q` W/m and a far temperature `difference` kelvin from the freezing point (both positive).
struct Similarity {
    q: f64,
    difference_k: f64,
    lambda: f64,
}

const ALPHA_1: f64 = K_SOLID / RHO_C_SOLID;
const ALPHA_2: f64 = K_LIQUID / RHO_C_LIQUID;

impl Similarity {
    fn new(q: f64, difference_k: f64) -> Self {
        let surplus = |lambda: f64| {
            let (x, y) = (lambda * lambda, lambda * lambda * ALPHA_1 / ALPHA_2);
            q / (4.0 * PI) * (-x).exp() - K_LIQUID * difference_k * (-y).exp() / e1(y) - x * ALPHA_1 * LATENT
        };
        let (mut low, mut high) = (1e-3, 1.0);
        for _ in 0..200 {
            let middle = 0.5 * (low + high);
            if surplus(middle) > 0.0 { low = middle } else { high = middle }
        }
        Similarity { q, difference_k, lambda: 0.5 * (low + high) }
    }

    fn front_m(&self, time_s: f64) -> f64 {
        2.0 * self.lambda * (ALPHA_1 * time_s).sqrt()
    }

    /// Kelvin from the freezing point, towards the far side positive.
    fn at(&self, r: f64, time_s: f64) -> f64 {
        if r < self.front_m(time_s) {
            let x = r * r / (4.0 * ALPHA_1 * time_s);
            -self.q / (4.0 * PI * K_SOLID) * (e1(x) - e1(self.lambda * self.lambda))
        } else {
            let x = r * r / (4.0 * ALPHA_2 * time_s);
            self.difference_k * (1.0 - e1(x) / e1(self.lambda * self.lambda * ALPHA_1 / ALPHA_2))
        }
    }
}

/// Radius of the front [m]: the profile inside it, carried on in ln r through three points to the freezing point. The
/// cell that the front left last is passed over: it still settles, by about 1e-3 K, which the way to the front would
/// magnify.
fn front_m(trace: &Trace, row: usize, point_k: f64, sign: f64) -> f64 {
    let history = &trace.history;
    let inner = history.profile_radii_m.iter().zip(history.profiles_k.row(row));
    // The cut cell itself is at the freezing point.
    let inner: Vec<(f64, f64)> =
        inner.map(|(r, t)| (sign * (t - point_k), r.ln())).take_while(|point| point.0 < -1e-6).collect();
    let last = &inner[inner.len() - 4..inner.len() - 1];
    // ln r as the parabola through three (temperature, ln r), at temperature 0.
    let at_zero = |i: usize| {
        (0..last.len()).filter(|&j| j != i).map(|j| last[j].0 / (last[j].0 - last[i].0)).product::<f64>() * last[i].1
    };
    (0..last.len()).map(at_zero).sum::<f64>().exp()
}

/// Probes and, last, the front: what is compared at each time.
fn known_of(name: String, mut section: Section, exact: Similarity, sign: f64) -> Known {
    section.probes = PROBES_M.map(|radius_m| Probe { name: format!("r = {:.0} mm", radius_m * 1e3), radius_m }).to_vec();
    let point_k = kelvin(0.0);
    let rows: Vec<usize> = (0..TIMES_S.len()).filter(|&row| TIMES_S[row] > COMPARED_FROM_S).collect();
    let mut expected = Vec::new();
    for &row in &rows {
        let time = TIMES_S[row];
        let hours = time / 3600.0;
        for r in PROBES_M {
            expected.push((format!("r = {:.0} mm at {hours} h", r * 1e3), sign * exact.at(r, time)));
        }
        expected.push((format!("front at {hours} h"), exact.front_m(time) * 1e3));
    }
    let read = move |section: &Section, trace: &Trace| {
        let row_of = |row: &usize| {
            let probes = section.probes.iter().map(|probe| Place::Radius(probe.radius_m));
            let mut values: Vec<f64> = probes.map(|place| temperature(section, trace, row + 1, place)).collect();
            values.push(front_m(trace, row + 1, point_k, sign) * 1e3);
            values
        };
        rows.iter().flat_map(row_of).collect()
    };
    Known { name, section, plan: recording(&TIMES_S), expected, read: Box::new(read) }
}

/// A sink in water, built in code (a case file knows no cooling heater).
fn sink(q: f64, initial_degc: f64) -> Known {
    let water = Freezing {
        point_k: kelvin(0.0),
        k: (K_LIQUID, K_SOLID),
        rho_c: (RHO_C_LIQUID, RHO_C_SOLID),
        latent: LATENT,
    };
    let content = Content { radius_m: BORE_M, material: None, state: ContentState::Empty };
    let layers = vec![layer("water", water.material(), BORE_M, OUTER_M, 0.0)];
    let mut section = section(content, layers, kelvin(initial_degc), None, kelvin(initial_degc));
    section.heaters.push(heater(Seat::Face(inside(0)), -q));
    known_of(format!("sink of {q} W/m, {initial_degc} degC"), section, Similarity::new(q, initial_degc), 1.0)
}

/// The mirror, a source in a solid with the phases' properties exchanged, as a case file.
fn source() -> Known {
    let section = case(FOLDER, "melting.toml");
    known_of("source of 50 W/m, -2 degC".into(), section, Similarity::new(50.0, 2.0), -1.0)
}

/// Every case with its exact temperatures and fronts.
pub fn known() -> Vec<Known> {
    let sinks = TABLE.iter().map(|&(q, initial, ..)| sink(q, initial));
    sinks.chain(std::iter::once_with(source)).collect()
}

/// The check.
pub fn check() -> Check {
    let mut roots = Vec::new();
    for (q, initial, lambda, front_mm) in TABLE {
        let exact = Similarity::new(q, initial);
        let name = format!("{q} W/m, {initial} degC");
        // Rounding of the last digits given.
        roots.push(Row::relative(format!("{name}: lambda"), lambda, exact.lambda, 1e-12));
        roots.push(Row::relative(format!("{name}: front, mm"), front_mm, exact.front_m(86_400.0) * 1e3, 1e-7));
    }
    let (mut fronts, mut temperatures, mut curves) = (Vec::new(), Vec::new(), Vec::new());
    for known in known() {
        let (values, trace) = known.solve(&Settings::default());
        let of_probes = || known.expected.iter().filter(|known| !known.0.starts_with("front")).map(|known| known.1);
        let range = of_probes().fold(0.0, f64::max) - of_probes().fold(0.0, f64::min);
        let mut points = Vec::new();
        for ((what, want), got) in known.expected.iter().zip(values) {
            let name = format!("{}: {what}", known.name);
            if what.starts_with("front") {
                let row = Row::relative(name, *want, got, LIMIT);
                // A front that goes with the square root of time is late by twice its relative lag.
                fronts.push(Row { error: 2.0 * row.error, ..row });
                points.push(got);
            } else {
                temperatures.push(Row::scaled(name, *want, got, range, TEMPERATURE_LIMIT));
            }
        }
        if known.name.contains("100") || known.name.contains("sink of 20") {
            let compared = TIMES_S.iter().filter(|time| **time > COMPARED_FROM_S);
            let marks = compared.map(|time| time / 3600.0).zip(points).collect();
            curves.push(Curve::marks(format!("computed, {}", known.name), marks));
            let lambda = TABLE.iter().find(|row| known.name.contains(&format!("of {} W", row.0))).expect("of the table").2;
            let line = (0..=100).map(|n| 24.0 * f64::from(n) / 100.0);
            let line = line.map(|hour| (hour, 2e3 * lambda * (ALPHA_1 * hour * 3600.0).sqrt())).collect();
            curves.push(Curve::line(format!("exact, {}", known.name), line));
        }
        assert!(trace.energy.residual_relative < 1e-10);
    }
    Check {
        folder: FOLDER,
        title: "Freezing round a line sink",
        class: Class::Exact,
        groups: vec![
            Group { title: "Radius of the front, mm".into(), measure: "relative, of its time", rows: fronts },
            Group { title: "Temperatures, degC".into(), measure: "of range", rows: temperatures },
            Group { title: "The transcendental equation".into(), measure: "relative", rows: roots },
        ],
        listings: vec![],
        plots: vec![(
            "figure.svg",
            Plot {
                title: "Ice round a line sink".into(),
                x: "time, h",
                y: "radius of the front, mm",
                log: (false, false),
                curves,
            },
        )],
    }
}
