//! Work and precision of the three treatments of a freezing cell, from which the default was chosen.

use crate::harness::{Check, Class, Group, Listing, Row};
use crate::known::Known;
use crate::plot::{Curve, Plot};
use crate::{freezing, freezing_line};
use std::time::Instant;
use stillwarm::march::{FrontTreatment, Settings};

const FOLDER: &str = "front-treatment";
const TREATMENTS: [(&str, FrontTreatment); 3] = [
    ("cell point", FrontTreatment::CellPoint),
    ("placed", FrontTreatment::Placed),
    ("placed, with sensible heat", FrontTreatment::PlacedWithSensible),
];
const REFINEMENTS: [f64; 4] = [0.5, 1.0, 2.0, 4.0];
const TOLERANCE_K: f64 = 1e-3;
/// The default must be at least this much more precise than either other, at default settings, in the worst of its times.
const GAIN: f64 = 2.0;
/// Each run is timed as the best of this many.
const REPEATS: usize = 3;

/// The check.
pub fn check() -> Check {
    let wall = freezing::known().into_iter().find(|known| known.name == "Ste = 0.1, fixed wall");
    let cases = [freezing_line::known(), wall.expect("the table has it")];
    let (mut rows, mut listings, mut curves) = (Vec::new(), Vec::new(), Vec::new());
    for (index, known) in cases.iter().enumerate() {
        let mut listing = Vec::new();
        let mut at_default = Vec::new();
        let mut first_time = None;
        for (name, front) in TREATMENTS {
            let mut points = Vec::new();
            for refinement in REFINEMENTS {
                let settings = Settings {
                    refinement,
                    temperature_tolerance_k: TOLERANCE_K,
                    share_tolerance: 1e-2 * TOLERANCE_K,
                    front,
                };
                let (worst, effort, seconds) = run(known, &settings);
                // The first run is the unit, so that the table does not depend on the machine.
                let unit = *first_time.get_or_insert(seconds);
                if refinement == 1.0 {
                    at_default.push(worst);
                }
                points.push((effort.newton_iterations as f64 * effort.cells as f64, worst));
                let counts = [effort.cells, effort.steps, effort.rejected_steps, effort.newton_iterations];
                let mut cells = vec![name.to_owned(), refinement.to_string(), format!("{worst:.1e}")];
                cells.extend(counts.map(|count| count.to_string()));
                cells.push(format!("{:.1}", seconds / unit));
                listing.push(cells);
            }
            if index == 0 {
                curves.push(Curve::line(name, points));
            }
        }
        for (other, (name, _)) in TREATMENTS.iter().enumerate().take(2) {
            let gain = at_default[other] / at_default[2];
            rows.push(Row { limit: 0.0, ..Row::at_least(format!("{}, over {name}", known.name), GAIN, gain, 0.0) });
        }
        listings.push(Listing {
            title: format!("{}: largest relative error of a time, and work", known.name),
            head: ["treatment", "mesh", "error", "cells", "steps", "rejected", "Newton iterations", "time over the first row's"]
                .map(str::to_owned)
                .to_vec(),
            rows: listing,
        });
    }
    Check {
        folder: FOLDER,
        title: "The treatment of a freezing cell",
        class: Class::Benchmark,
        groups: vec![Group {
            title: "How many times smaller the default's error is".into(),
            measure: "short of 2",
            rows,
        }],
        listings,
        plots: vec![(
            "figure.svg",
            Plot {
                title: "Water line: precision over work, mesh x0.5 to x4".into(),
                x: "cells times Newton iterations",
                y: "largest relative error of a time",
                log: (true, true),
                curves,
            },
        )],
    }
}

/// Largest relative error, effort and the shortest of a few durations [s].
fn run(known: &Known, settings: &Settings) -> (f64, stillwarm::history::Effort, f64) {
    let mut seconds = f64::INFINITY;
    let mut solved = None;
    for _ in 0..REPEATS {
        let from = Instant::now();
        solved = Some(known.solve(settings));
        seconds = seconds.min(from.elapsed().as_secs_f64());
    }
    let (times, trace) = solved.expect("it ran");
    let errors = known.expected.iter().zip(&times).map(|(expected, time)| (time / expected.1 - 1.0).abs());
    (errors.fold(0.0, f64::max), trace.effort, seconds)
}
