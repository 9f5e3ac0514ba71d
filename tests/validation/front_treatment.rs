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
/// At default settings the default's worst time is at least this much better than the cell point's ...
const PRECISION_GAIN: f64 = 2.0;
/// ... and it is no worse than the placed front without sensible heat, for that much less work (Newton iterations).
const WORK_GAIN: f64 = 1.2;
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
                    at_default.push((worst, effort.newton_iterations));
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
        let [cell_point, placed, chosen]: [(f64, usize); 3] = at_default.try_into().expect("three treatments");
        let mut claim = |what: &str, least: f64, gain: f64| {
            rows.push(Row::at_least(format!("{}: {what}", known.name), least, gain, 0.0));
        };
        claim("error of the cell point over the default's", PRECISION_GAIN, cell_point.0 / chosen.0);
        claim("error of the placed front over the default's", 1.0, placed.0 / chosen.0);
        claim("Newton iterations of the placed front over the default's", WORK_GAIN, placed.1 as f64 / chosen.1 as f64);
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
            title: "What the default gains at default settings".into(),
            measure: "short of it",
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
