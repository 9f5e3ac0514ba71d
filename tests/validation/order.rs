//! Rates of convergence in space and in time, on sections with a contact between their layers.

use crate::composite::{self, Case};
use crate::harness::{Check, Class, Group, Listing, Row};
use crate::plot::{Curve, Plot};
use stillwarm::march::Settings;

const FOLDER: &str = "order";
/// Cases of the layered cylinders: an interior at rest and a sudden change, and a solid core with a heater at the contact.
const CASES: [&str; 2] = ["fixed-both-surfaces", "heater-inside-contact"];
/// Cases swept in time: the same, and a mixed core under steps of the air.
const SWEPT: [&str; 3] = ["fixed-both-surfaces", "heater-inside-contact", "ambient-steps"];
const REFINEMENTS: [f64; 4] = [1.0, 2.0, 4.0, 8.0];
const SPACE_ORDER: f64 = 2.0;
/// Coarse meshes are still on the way to the rate.
const SHORTFALL: f64 = 0.3;
/// Tolerance [K] at which time adds nothing to the error of the mesh.
const TIGHT_K: f64 = 2e-7;
/// Errors below this [K] would prove nothing: the reference is stored to 1e-9 K.
const ROUND_OFF_K: f64 = 1e-7;
/// Tolerances of the sweep in time [K], and the one that stands for none.
const TOLERANCES_K: [f64; 4] = [1e-2, 1e-3, 1e-4, 1e-5];
const EXACT_TOLERANCE_K: f64 = 1e-7;
/// Order of the scheme; against the number of steps.
const TIME_ORDER: f64 = 3.0;
/// A step is chosen by its worst cell and its length changes along the run, so that the rate against the mean length wavers.
const TIME_SHORTFALL: f64 = 0.4;

fn settings(refinement: f64, tolerance_k: f64) -> Settings {
    Settings {
        refinement,
        temperature_tolerance_k: tolerance_k,
        share_tolerance: 1e-2 * tolerance_k,
        ..Settings::default()
    }
}

/// The check.
pub fn check() -> Check {
    let all = composite::cases();
    let cases: Vec<&Case> = all.iter().filter(|case| CASES.contains(&case.known.name.as_str())).collect();
    assert_eq!(cases.len(), CASES.len());
    let (mut space, mut space_listing, mut curves) = (Vec::new(), Vec::new(), Vec::new());
    for case in &cases {
        let errors: Vec<Vec<f64>> = REFINEMENTS.iter().map(|&refinement| place_errors(case, refinement)).collect();
        for (column, place) in case.place_names().into_iter().enumerate() {
            let name = format!("{}: {place}", case.known.name);
            let of_mesh: Vec<f64> = errors.iter().map(|errors| errors[column]).collect();
            let rate = (of_mesh[0] / of_mesh[3]).log2() / 3.0;
            let proves = of_mesh[3] > ROUND_OFF_K;
            space.push(Row::at_least(name.clone(), SPACE_ORDER, if proves { rate } else { f64::NAN }, SHORTFALL));
            let mut cells = vec![name];
            cells.extend(of_mesh.iter().map(|error| format!("{error:.1e}")));
            cells.push(format!("{rate:.2}"));
            space_listing.push(cells);
        }
        let worst = errors.iter().map(|errors| errors.iter().fold(0.0, |a: f64, b| a.max(*b)));
        curves.push(Curve::line(format!("mesh, {}", case.known.name), REFINEMENTS.into_iter().zip(worst).collect()));
    }
    let (mut time, mut time_listing) = (Vec::new(), Vec::new());
    for known in all.iter().map(|case| &case.known).filter(|known| SWEPT.contains(&known.name.as_str())) {
        // The same mesh at a tolerance of nothing: what is left is the error of time alone.
        let (exact, _) = known.solve(&settings(1.0, EXACT_TOLERANCE_K));
        let errors: Vec<(f64, f64)> = TOLERANCES_K
            .iter()
            .map(|&tolerance| {
                let (values, trace) = known.solve(&settings(1.0, tolerance));
                let error = values.iter().zip(&exact).fold(0.0, |most: f64, (a, b)| most.max((a - b).abs()));
                ((trace.effort.steps + trace.effort.rejected_steps) as f64, error)
            })
            .collect();
        let (first, last) = (errors[0], errors[TOLERANCES_K.len() - 1]);
        let rate = (first.1 / last.1).ln() / (last.0 / first.0).ln();
        let proves = last.1 > ROUND_OFF_K;
        let name = known.name.clone();
        time.push(Row::at_least(name.clone(), TIME_ORDER, if proves { rate } else { f64::NAN }, TIME_SHORTFALL));
        let mut cells = vec![name];
        cells.extend(errors.iter().map(|(steps, error)| format!("{error:.1e} ({steps} steps)")));
        cells.push(format!("{rate:.2}"));
        time_listing.push(cells);
    }
    let heads = |what: &str, of: Vec<String>| [vec![what.to_owned()], of, vec!["rate".into()]].concat();
    Check {
        folder: FOLDER,
        title: "Rates of convergence",
        class: Class::Exact,
        groups: vec![
            Group { title: "Rate in space, by place".into(), measure: "short of 2", rows: space },
            Group { title: "Rate in time, against steps".into(), measure: "short of 3", rows: time },
        ],
        listings: vec![
            Listing {
                title: format!("Largest error in K at a tolerance of {TIGHT_K:.0e} K"),
                head: heads("place", REFINEMENTS.iter().map(|x| format!("mesh x{x}")).collect()),
                rows: space_listing,
            },
            Listing {
                title: "Largest change in K to a tolerance of 1e-7 K on the same mesh".into(),
                head: heads("case", TOLERANCES_K.iter().map(|k| format!("{k:.0e} K")).collect()),
                rows: time_listing,
            },
        ],
        plots: vec![(
            "figure.svg",
            Plot {
                title: "Largest error over the refinement of the mesh".into(),
                x: "refinement",
                y: "largest error, K",
                log: (true, true),
                curves,
            },
        )],
    }
}

/// Largest error over all times at each place [K].
fn place_errors(case: &Case, refinement: f64) -> Vec<f64> {
    let (values, _) = case.known.solve(&settings(refinement, TIGHT_K));
    let columns = case.place_names().len();
    let mut worst = vec![0.0_f64; columns];
    for (index, (value, expected)) in values.iter().zip(&case.known.expected).enumerate() {
        worst[index % columns] = worst[index % columns].max((value - expected.1).abs());
    }
    worst
}
