//! The reported numerical error against the true one, over every check that knows the truth.
//!
//! `reported = ERROR_FACTOR (|default - mesh x2| + |default - tolerances / 10|)`, as every question reports it.

use crate::harness::{Check, Class, Group, Listing, Row};
use crate::known::Known;
use crate::plot::{Curve, Plot};
use crate::{composite, cycling, cylinder, freezing, freezing_line, lumped, round_a_sink};
use stillwarm::march::Settings;
use stillwarm::question::ERROR_FACTOR;

const FOLDER: &str = "numerical-error";
/// Share of answers whose true error may exceed the reported one, and the largest median of reported over true.
const UNCOVERED: f64 = 0.05;
const MEDIAN_RATIO: f64 = 20.0;
/// True errors below this share of the answer's scale are the references' own digits: covered whatever is reported.
const REFERENCE_DIGITS: f64 = 1e-9;

struct Answer {
    check: &'static str,
    name: String,
    reported: f64,
    truth: f64,
    scale: f64,
}

fn answers(check: &'static str, known: &Known) -> Vec<Answer> {
    let settings = Settings::default();
    let refined = Settings { refinement: 2.0 * settings.refinement, ..settings };
    let tight = Settings {
        temperature_tolerance_k: 0.1 * settings.temperature_tolerance_k,
        share_tolerance: 0.1 * settings.share_tolerance,
        ..settings
    };
    let [main, refined, tight] = [settings, refined, tight].map(|settings| known.solve(&settings).0);
    (0..main.len())
        .map(|index| {
            let (what, expected) = &known.expected[index];
            Answer {
                check,
                name: format!("{}: {what}", known.name),
                reported: ERROR_FACTOR * ((main[index] - refined[index]).abs() + (main[index] - tight[index]).abs()),
                truth: (main[index] - expected).abs(),
                // Temperatures are tens of degrees; times and shares are their own scale.
                scale: expected.abs().max(1.0),
            }
        })
        .collect()
}

/// The check.
pub fn check() -> Check {
    let mut all: Vec<Answer> = Vec::new();
    for case in composite::cases() {
        all.extend(answers("layered cylinders", &case.known));
    }
    let groups: [(&str, Vec<Known>); 6] = [
        ("solid and hollow cylinder", cylinder::known()),
        ("inward freezing", freezing::known()),
        ("water line", vec![freezing_line::known()]),
        ("round a line sink", round_a_sink::known()),
        ("lumped", lumped::known()),
        ("cycling", cycling::known()),
    ];
    for (check, known) in &groups {
        for known in known {
            all.extend(answers(check, known));
        }
    }
    let covered = |answer: &&Answer| answer.truth <= answer.reported + REFERENCE_DIGITS * answer.scale;
    let told = |answer: &&Answer| answer.truth > REFERENCE_DIGITS * answer.scale;
    let median = |answers: &[&Answer]| {
        let mut ratios: Vec<f64> = answers.iter().filter(|a| told(a)).map(|a| a.reported / a.truth).collect();
        ratios.sort_by(f64::total_cmp);
        ratios.get(ratios.len() / 2).copied().unwrap_or(f64::NAN)
    };
    let everything: Vec<&Answer> = all.iter().collect();
    let share = everything.iter().filter(|a| covered(a)).count() as f64 / everything.len() as f64;
    let rows = vec![Row::at_least(format!("share covered of {} answers", all.len()), 1.0, share, UNCOVERED)];
    let ratio = median(&everything);
    let ratio = Row { what: "median".into(), reference: 1.0, computed: ratio, error: ratio, limit: MEDIAN_RATIO };
    let mut listing = Vec::new();
    for name in std::iter::once("layered cylinders").chain(groups.iter().map(|group| group.0)) {
        let part: Vec<&Answer> = all.iter().filter(|answer| answer.check == name).collect();
        let inside = part.iter().filter(|a| covered(a)).count();
        listing.push(vec![
            name.to_owned(),
            part.len().to_string(),
            format!("{:.1} %", 100.0 * inside as f64 / part.len() as f64),
            format!("{:.1}", median(&part)),
        ]);
    }
    let missed = all.iter().filter(|a| !covered(a));
    let missed = missed.map(|a| vec![a.name.clone(), format!("{:.1e}", a.truth), format!("{:.1e}", a.reported)]).collect();
    let relative = |answer: &&Answer| (answer.truth / answer.scale, answer.reported / answer.scale);
    let points = all.iter().filter(told).map(|a| relative(&a)).collect();
    Check {
        folder: FOLDER,
        title: "The reported numerical error",
        class: Class::Property,
        groups: vec![
            Group { title: "True error within the reported one".into(), measure: "share uncovered", rows },
            Group { title: "Reported over true error".into(), measure: "ratio", rows: vec![ratio] },
        ],
        listings: vec![
            Listing {
                title: "By check".into(),
                head: ["check", "answers", "covered", "median of reported over true"].map(str::to_owned).to_vec(),
                rows: listing,
            },
            Listing {
                title: "Answers that are not covered".into(),
                head: ["answer", "true error, K or s", "reported"].map(str::to_owned).to_vec(),
                rows: missed,
            },
        ],
        plots: vec![(
            "figure.svg",
            Plot {
                title: "Every answer that knows the truth; those above the line are covered".into(),
                x: "true error, of max(1, |answer|)",
                y: "reported error, of max(1, |answer|)",
                log: (true, true),
                curves: vec![
                    Curve::marks("answers", points),
                    Curve::line("reported = true", vec![(REFERENCE_DIGITS, REFERENCE_DIGITS), (1e-2, 1e-2)]),
                ],
            },
        )],
    }
}
