//! Where the heat comes from and where it goes, over time.

use super::{Axis, Curve, Dash, Figure, Look, Panel, palette, stepped, time_axis, uprights};
use crate::answer::Findings;
use crate::report::axis::range;
use crate::report::text::clean;

/// Heat flows over time per metre of line: heater output, carried by content, lost to the outside, stored.
pub fn heat_balance(findings: &Findings) -> Figure {
    let history = &findings.history;
    let (unit, axis) = time_axis(findings);
    let times: Vec<f64> = history.times_s.iter().map(|time_s| time_s / unit.seconds).collect();
    let heaters: Vec<f64> = history.heaters_w_per_m.rows().into_iter().map(|row| row.sum()).collect();

    let mut curves = Vec::new();
    let mut add = |name: &str, look: Look, points: Vec<(f64, f64)>| {
        curves.push(Curve { names: vec![name.into()], look, points });
    };
    if history.carried_w_per_m.iter().any(|&carried| carried != 0.0) {
        let points = times.iter().copied().zip(history.carried_w_per_m.iter().copied()).collect();
        add("carried in by content", Look::line(palette::GREEN, Dash::Short, 1.0), points);
    }
    add("stored", Look::line(palette::BLUE, Dash::Long, 1.2), stored(&times, &heaters, findings));
    let lost = times.iter().copied().zip(history.lost_w_per_m.iter().copied()).collect();
    add("lost to the outside", Look::line(palette::VERMILION, Dash::DashDot, 1.2), lost);
    if !findings.section.heaters.is_empty() {
        let look = Look { filled: true, ..Look::line(palette::ORANGE, Dash::Solid, 1.0) };
        add("heaters", look, stepped(times.iter().copied().zip(heaters.iter().copied())));
    }

    let (low, high) =
        range(curves.iter().flat_map(|curve| curve.points.iter().map(|point| point.1))).unwrap_or((0.0, 1.0));
    let panel = Panel {
        axis: Axis::around("Heat flow per metre of line [W/m]", [low.min(0.0), high.max(0.0)], 8),
        height: 4.0,
        curves,
        levels: Vec::new(),
        dots: Vec::new(),
    };
    Figure {
        stem: "heat-balance",
        title: format!("{}: heat balance over time", clean(&findings.section.title)),
        note: "Heaters + carried in = lost + stored. Stored is negative while the line gives up heat, latent heat included.".into(),
        uprights: uprights(findings, unit, &axis),
        axis,
        panels: vec![panel],
        bands: Vec::new(),
        listed: false,
    }
}

/// The rate of storage, which jumps with the heaters: just before a jump it is lower by what the heaters gain there.
fn stored(times: &[f64], heaters: &[f64], findings: &Findings) -> Vec<(f64, f64)> {
    let mut points: Vec<(f64, f64)> = Vec::new();
    for (row, &rate) in findings.history.stored_w_per_m.iter().enumerate() {
        if row > 0 && heaters[row] != heaters[row - 1] {
            points.push((times[row], rate - (heaters[row] - heaters[row - 1])));
        }
        points.push((times[row], rate));
    }
    points
}
