//! Where the heat comes from and where it goes, over time.

use super::{Axis, Curve, Dash, Figure, Kind, Look, Panel, palette, switchings, time_axis, uprights};
use crate::answer::Findings;
use crate::report::axis::range;
use crate::report::text::clean;

/// Heaters that switch more often are shown by their mean over each cycle: the single strokes would be a solid block.
const MOST_SWITCHINGS: usize = 12;

/// Heat flows at one time [W/m].
#[derive(Clone, Copy)]
struct Flows {
    time_s: f64,
    heaters: f64,
    carried: f64,
    lost: f64,
    stored: f64,
}

/// Heat flows over time per metre of line: heater output, carried in by content, lost to the outside, stored.
pub fn heat_balance(findings: &Findings) -> Figure {
    let (unit, axis) = time_axis(findings);
    let recorded = recorded(findings);
    let cycles = switchings(recorded.iter().map(|flows| flows.heaters));
    let averaged = cycles.len() > MOST_SWITCHINGS;
    let flows = if averaged { cycle_means(&recorded, &cycles) } else { with_jumps(&recorded) };

    let mut curves = Vec::new();
    let mut add = |name: &str, look: Look, value: fn(&Flows) -> f64| {
        let points = flows.iter().map(|flows| (flows.time_s / unit.seconds, value(flows))).collect();
        curves.push(Curve { names: vec![name.into()], look, points });
    };
    if recorded.iter().any(|flows| flows.carried != 0.0) {
        add("carried in by content", Look::line(palette::GREEN, Dash::Short, 1.0), |flows| flows.carried);
    }
    add("stored", Look::line(palette::BLUE, Dash::Long, 1.2), |flows| flows.stored);
    add("lost to the outside", Look::line(palette::VERMILION, Dash::DashDot, 1.2), |flows| flows.lost);
    if !findings.section.heaters.is_empty() {
        let look = Look { filled: true, ..Look::line(palette::ORANGE, Dash::Solid, 1.0) };
        add("heaters", look, |flows| flows.heaters);
    }

    let values = curves.iter().flat_map(|curve| curve.points.iter().map(|point| point.1));
    let (low, high) = range(values).unwrap_or((0.0, 1.0));
    let panel = Panel {
        axis: Axis::around("Heat flow per metre of line [W/m]", [low.min(0.0), high.max(0.0)], 8),
        height: 4.0,
        curves,
        levels: Vec::new(),
        dots: Vec::new(),
    };
    let mut note =
        "Heaters + carried in = lost + stored. Stored is negative while the line gives up heat, latent heat included."
            .to_string();
    if averaged {
        note.push_str(" Where heaters cycle: means of each cycle.");
    }
    Figure {
        kind: Kind::HeatBalance,
        title: format!("{}: heat balance over time", clean(&findings.section.title)),
        note,
        uprights: uprights(findings, unit, &axis),
        axis,
        panels: vec![panel],
        bands: Vec::new(),
        listed: false,
    }
}

fn recorded(findings: &Findings) -> Vec<Flows> {
    let history = &findings.history;
    (0..history.times_s.len())
        .map(|row| Flows {
            time_s: history.times_s[row],
            heaters: history.heaters_w_per_m.row(row).sum(),
            carried: history.carried_w_per_m[row],
            lost: history.lost_w_per_m[row],
            stored: history.stored_w_per_m[row],
        })
        .collect()
}

/// The records, and before each that finds the heaters switched the state just before: output holds until then, and what the
/// heaters gain is stored.
fn with_jumps(recorded: &[Flows]) -> Vec<Flows> {
    let mut flows: Vec<Flows> = Vec::new();
    for &now in recorded {
        if let Some(&before) = flows.last()
            && before.heaters != now.heaters
        {
            flows.push(Flows { heaters: before.heaters, stored: now.stored - (now.heaters - before.heaters), ..now });
        }
        flows.push(now);
    }
    flows
}

/// The records up to the first switching, then the mean of each whole cycle from one switching to the next of its kind.
fn cycle_means(recorded: &[Flows], switchings: &[usize]) -> Vec<Flows> {
    let rises = |row: usize| recorded[row].heaters > recorded[row - 1].heaters;
    let alike: Vec<usize> = switchings.iter().copied().filter(|&row| rises(row) == rises(switchings[0])).collect();
    let first = recorded[alike[0]];
    let before = recorded[alike[0] - 1];
    let mut flows = recorded[..alike[0]].to_vec();
    flows.push(Flows { heaters: before.heaters, stored: first.stored - (first.heaters - before.heaters), ..first });
    for cycle in alike.windows(2) {
        let mean = mean(&recorded[cycle[0]..=cycle[1]]);
        flows.push(Flows { time_s: recorded[cycle[0]].time_s, ..mean });
        flows.push(Flows { time_s: recorded[cycle[1]].time_s, ..mean });
    }
    flows
}

/// Mean over time: the heaters hold from record to record, the other flows run straight; what is stored makes up the balance.
fn mean(recorded: &[Flows]) -> Flows {
    let span = recorded[recorded.len() - 1].time_s - recorded[0].time_s;
    let mut mean = Flows { time_s: recorded[0].time_s, heaters: 0.0, carried: 0.0, lost: 0.0, stored: 0.0 };
    for pair in recorded.windows(2) {
        let share = (pair[1].time_s - pair[0].time_s) / span;
        mean.heaters += share * pair[0].heaters;
        mean.carried += share * 0.5 * (pair[0].carried + pair[1].carried);
        mean.lost += share * 0.5 * (pair[0].lost + pair[1].lost);
    }
    mean.stored = mean.heaters + mean.carried - mean.lost;
    mean
}
