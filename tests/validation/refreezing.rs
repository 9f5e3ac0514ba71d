//! A line freezes in part, thaws, freezes again and thaws: back at its start, all the heat must be accounted for.

use crate::harness::{Check, Class, Group, Row, case};
use crate::parts::{march, watching};
use crate::plot::{Curve, Plot};
use std::f64::consts::PI;
use stillwarm::march::{Recording, Settings};
use stillwarm::section::Condition;

const FOLDER: &str = "refreezing";
/// Of the run's own energy audit.
const RESIDUAL: f64 = 1e-10;
/// Heat that may be left over after the return to the same steady state, of the content's latent heat: the march rests
/// when less than 1e-3 K is to come, 1e-3 K of this line being 3e-5 of that heat.
const LEFT_OVER: f64 = 1e-4;

/// The check.
pub fn check() -> Check {
    let section = case(FOLDER, "case.toml");
    let mut plan = watching(vec![Condition::Frozen(0.0), Condition::Frozen(0.3)]);
    plan.stop_when_answered = false;
    plan.stop_when_settled = true;
    plan.until_s = section.run.until_s.expect("the case has an end");
    plan.record = Recording::Steps;
    let trace = march(&section, &plan, &Settings::default());
    let radius = section.content.radius_m;
    let latent = section.content.material.as_ref().and_then(|material| material.sharp).expect("water freezes").latent;
    let latent = latent * PI * radius * radius;
    let history = &trace.history;
    let frozen = &history.frozen_share;
    // Largest share in each of the two outages, and what is left between them and at the end.
    let within = |from_h: f64, to_h: f64| {
        let rows = history.times_s.iter().zip(frozen).filter(move |row| *row.0 >= from_h * 3600.0 && *row.0 <= to_h * 3600.0);
        rows.map(|row| *row.1)
    };
    let most = |from_h: f64, to_h: f64| within(from_h, to_h).fold(0.0, f64::max);
    let least = |from_h: f64, to_h: f64| within(from_h, to_h).fold(1.0, f64::min);
    let frozen_rows = vec![
        Row::at_least("largest frozen share, first outage", 0.3, most(0.0, 60.0), 0.0),
        Row::scaled("frozen share after thawing", 0.0, least(150.0, 200.0), 1.0, 0.0),
        Row::at_least("largest frozen share, second outage", 0.3, most(200.0, 280.0), 0.0),
        Row::scaled("frozen share at the end", 0.0, trace.finish.frozen_share, 1.0, 0.0),
    ];
    let energy = trace.energy;
    let balance = vec![
        Row::scaled("residual of the run's audit", 0.0, energy.residual_relative, 1.0, RESIDUAL),
        Row::scaled("stored at the end, of the latent heat", 0.0, energy.stored_j_per_m / latent, 1.0, LEFT_OVER),
        Row::relative("heat lost over heat supplied", 1.0, energy.lost_j_per_m / energy.supplied_j_per_m, LEFT_OVER),
    ];
    let back = trace.start.faces.iter().zip(&trace.finish.faces);
    let back = back.map(|((name, start), (_, end))| Row::scaled(name, start - 273.15, end - 273.15, 1.0, 2e-3)).collect();
    let hours = || history.times_s.iter().map(|time| time / 3600.0);
    let to = hours().filter(|hour| *hour <= 420.0).count();
    let share = hours().zip(frozen.iter().map(|share| 100.0 * share)).take(to).collect();
    let wall = hours().zip(history.faces_k.column(0).iter().map(|kelvin| kelvin - 273.15)).take(to).collect();
    Check {
        folder: FOLDER,
        title: "Freezing, thawing and freezing again",
        class: Class::Property,
        groups: vec![
            Group { title: "What happens".into(), measure: "off by", rows: frozen_rows },
            Group { title: "Energy over the whole run".into(), measure: "off by", rows: balance },
            Group { title: "Temperatures at the end against the start, degC".into(), measure: "K", rows: back },
        ],
        listings: vec![],
        plots: vec![(
            "figure.svg",
            Plot {
                title: "Two outages, from 0 to 50 h and from 200 to 260 h".into(),
                x: "time, h",
                y: "frozen share, %; wall inside, degC",
                log: (false, false),
                curves: vec![Curve::line("frozen share", share), Curve::line("wall inside", wall)],
            },
        )],
    }
}
