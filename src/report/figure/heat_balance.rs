//! Where the heat comes from and where it goes, over time.

use super::{Axis, Curve, Dash, Figure, Kind, Look, Panel, jump_time, palette, time_axis, uprights};
use crate::answer::Findings;
use crate::history::Mark;
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

impl Flows {
    /// Flows of which the stored one makes up the balance.
    fn balanced(time_s: f64, heaters: f64, carried: f64, lost: f64) -> Self {
        Flows { time_s, heaters, carried, lost, stored: heaters + carried - lost }
    }
}

/// Heat flows over time per metre of line: heater output, carried in by content, lost to the outside, stored.
pub fn heat_balance(findings: &Findings) -> Figure {
    let (unit, axis) = time_axis(findings);
    let recorded = recorded(findings);
    let flows = with_jumps(&recorded, &findings.marks);
    let jumps: Vec<usize> =
        (1..flows.len()).filter(|&index| flows[index].heaters != flows[index - 1].heaters).collect();
    let averaged = jumps.len() > MOST_SWITCHINGS;
    let flows = if averaged { cycle_means(&flows, &jumps) } else { flows };

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

/// The records, and the states before and after each jump of the heaters: the other flows run straight from record to record,
/// and what is stored makes up the balance.
fn with_jumps(recorded: &[Flows], marks: &[Mark]) -> Vec<Flows> {
    let mut flows: Vec<Flows> = Vec::new();
    for &now in recorded {
        if let Some(&before) = flows.last()
            && before.heaters != now.heaters
        {
            let time_s = jump_time(marks, before.time_s, now.time_s);
            let share = (time_s - before.time_s) / (now.time_s - before.time_s).max(f64::MIN_POSITIVE);
            let carried = before.carried + share * (now.carried - before.carried);
            let lost = before.lost + share * (now.lost - before.lost);
            flows.extend([before.heaters, now.heaters].map(|heaters| Flows::balanced(time_s, heaters, carried, lost)));
        }
        flows.push(now);
    }
    flows
}

/// The flows up to the first jump, then the mean of each whole cycle from one jump to the next of its kind.
fn cycle_means(flows: &[Flows], jumps: &[usize]) -> Vec<Flows> {
    let rises = |index: usize| flows[index].heaters > flows[index - 1].heaters;
    let alike: Vec<usize> = jumps.iter().copied().filter(|&index| rises(index) == rises(jumps[0])).collect();
    let mut means = flows[..alike[0]].to_vec();
    for cycle in alike.windows(2) {
        let mean = mean(&flows[cycle[0]..cycle[1]]);
        means.push(mean);
        means.push(Flows { time_s: flows[cycle[1]].time_s, ..mean });
    }
    means
}

/// Mean over time of flows that run straight from one to the next.
fn mean(flows: &[Flows]) -> Flows {
    let span = flows[flows.len() - 1].time_s - flows[0].time_s;
    let of = |value: fn(&Flows) -> f64| {
        let halves =
            flows.windows(2).map(|pair| (pair[1].time_s - pair[0].time_s) * (value(&pair[0]) + value(&pair[1])));
        0.5 * halves.sum::<f64>() / span
    };
    Flows::balanced(flows[0].time_s, of(|flows| flows.heaters), of(|flows| flows.carried), of(|flows| flows.lost))
}
