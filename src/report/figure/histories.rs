//! Temperatures over time with limits and events, the frozen share beneath, and the heaters where they switch.

use super::{
    Axis, Curve, Dash, Dot, Figure, Kind, Level, Look, Panel, condition_of, palette, stepped, time_axis, uprights,
};
use crate::answer::{Answer, Findings};
use crate::report::axis::range;
use crate::report::text::{clean, degc, fixed, label};
use crate::report::{duration_words, figure::Colour};
use crate::section::{Condition, ContentState, Face, Place, Seat, Side};

/// A place whose temperature is drawn.
struct Trace {
    names: Vec<String>,
    look: Look,
    values: Vec<f64>,
}

/// Traces that differ by less than this share of the figure's range are one curve with several names.
const TOLD_APART: f64 = 0.012;

/// Temperature histories of the faces that matter.
pub fn histories(findings: &Findings) -> Figure {
    let (unit, axis) = time_axis(findings);
    let times: Vec<f64> = findings.history.times_s.iter().map(|time_s| time_s / unit.seconds).collect();
    let mut panels = vec![temperatures(findings, &times, unit.seconds)];
    panels.extend(frozen_share(findings, &times, unit.seconds));
    panels.extend(heaters(findings, unit.seconds));
    Figure {
        kind: Kind::Histories,
        title: format!("{}: temperatures over time", clean(&findings.section.title)),
        note:
            "Mid-run section in sound lagging; faces that lie together share a curve. Dashed lines: limits and targets."
                .into(),
        uprights: uprights(findings, unit, &axis),
        axis,
        panels,
        bands: Vec::new(),
        listed: false,
    }
}

fn temperatures(findings: &Findings, times: &[f64], unit_s: f64) -> Panel {
    let levels: Vec<Level> = temperature_levels(findings);
    let dots = dots(findings, unit_s, false);
    let traces = told_apart(traces(findings));
    let curves: Vec<Curve> = traces
        .into_iter()
        .rev()
        .map(|trace| Curve {
            names: trace.names,
            look: trace.look,
            points: times.iter().copied().zip(trace.values).collect(),
        })
        .collect();
    let values = curves.iter().flat_map(|curve| curve.points.iter().map(|point| point.1));
    let (low, high) = range(values.clone()).unwrap_or((0.0, 0.0));
    let span = (high - low).max(1.0);
    // A limit far beyond anything that happens would squeeze the curves: it is left to the table of answers.
    let near = |value: &f64| *value > low - 0.6 * span && *value < high + 0.6 * span;
    let levels: Vec<Level> = levels.into_iter().filter(|level| near(&level.value)).collect();
    let axis = Axis::around("Temperature [°C]", values.chain(levels.iter().map(|level| level.value)), 9);
    Panel { axis, height: 4.0, curves, levels, dots }
}

/// Places that matter, the most important first.
fn traces(findings: &Findings) -> Vec<Trace> {
    let (section, history) = (&findings.section, &findings.history);
    let mut traces = Vec::new();
    let mut add = |name: String, look: Look, values: Vec<f64>| {
        if values.iter().any(|value| value.is_finite()) {
            traces.push(Trace { names: vec![clean(&name)], look, values });
        }
    };
    let of_place = |place: Place| place_degc(findings, place);

    let content = section.content.material.as_ref().map_or("content", |material| material.name.as_str()).to_string();
    if !matches!(section.content.state, ContentState::HeldAt { .. })
        || history.content_mean_k.iter().any(|k| k.is_finite())
    {
        add(format!("{content}, mean"), Look::line(palette::BLUE, Dash::Solid, 1.5), of_place(Place::ContentMean));
        add(format!("{content}, centre"), Look::line(palette::SKY, Dash::Long, 1.2), of_place(Place::Centre));
    }
    if !section.layers.is_empty() {
        let face = Face { layer: 0, side: Side::Outside };
        add(section.face_name(face), Look::line(palette::VERMILION, Dash::Solid, 1.0), of_place(Place::Face(face)));
    }
    for heater in &section.heaters {
        if let Seat::Face(face) = heater.seat {
            let name = format!("{} ({})", section.face_name(face), heater.name);
            add(name, Look::line(palette::PURPLE, Dash::DashDot, 1.2), of_place(Place::Face(face)));
        }
    }
    if section.layers.len() > 1 {
        let face = Face { layer: section.layers.len() - 1, side: Side::Outside };
        add(section.face_name(face), Look::line(palette::GREEN, Dash::Short, 1.0), of_place(Place::Face(face)));
    }
    const OTHERS: [(Colour, Dash); 4] = [
        (palette::ORANGE, Dash::Long),
        (palette::BLACK, Dash::DashDot),
        (palette::PURPLE, Dash::Short),
        (palette::GREEN, Dash::Long),
    ];
    let mut others = OTHERS.iter().cycle();
    let asked = asked_places(findings);
    for place in asked {
        let (colour, dash) = *others.next().expect("a cycle does not end");
        add(section.place_name(place), Look::line(colour, dash, 1.0), of_place(place));
    }
    add("air".into(), Look::line(palette::GREY, Dash::Dotted, 1.0), of_place(Place::Air));
    traces
}

/// Places that limits and targets ask about and the probes, each once.
fn asked_places(findings: &Findings) -> Vec<Place> {
    let section = &findings.section;
    let mut places: Vec<Place> = Vec::new();
    let limits = section.limits.iter().filter_map(|limit| match limit.condition {
        Condition::Below(place, _) | Condition::Above(place, _) => Some(place),
        Condition::Frozen(_) | Condition::Thawed(_) => None,
    });
    let probes = section.probes.iter().map(|probe| Place::Radius(probe.radius_m));
    for place in limits.chain(section.targets.iter().map(|target| target.place)).chain(probes) {
        if !places.contains(&place) {
            places.push(place);
        }
    }
    places
}

/// Temperature of a place at every record [degC]; empty where the history does not hold it.
fn place_degc(findings: &Findings, place: Place) -> Vec<f64> {
    let (section, history) = (&findings.section, &findings.history);
    let kelvin: Vec<f64> = match place {
        Place::Centre => history.centre_k.to_vec(),
        Place::ContentMean => history.content_mean_k.to_vec(),
        Place::Air => history.air_k.to_vec(),
        Place::Face(face) => history.faces_k.column(2 * face.layer + usize::from(face.side == Side::Outside)).to_vec(),
        Place::Radius(radius_m) => match section.probes.iter().position(|probe| probe.radius_m == radius_m) {
            Some(probe) => history.probes_k.column(probe).to_vec(),
            None => Vec::new(),
        },
        Place::ContentSurface => {
            let radii = &history.profile_radii_m;
            match radii
                .iter()
                .position(|radius| (radius - section.content.radius_m).abs() < 1e-9 * section.outermost_radius_m())
            {
                Some(column) => history.profiles_k.column(column).to_vec(),
                None => Vec::new(),
            }
        }
        Place::LayerMean(_) => Vec::new(),
    };
    kelvin.into_iter().map(degc).collect()
}

/// Joins traces that the eye cannot tell apart.
fn told_apart(traces: Vec<Trace>) -> Vec<Trace> {
    let (low, high) = range(traces.iter().flat_map(|trace| trace.values.iter().copied())).unwrap_or((0.0, 0.0));
    let close = TOLD_APART * (high - low);
    let mut kept: Vec<Trace> = Vec::new();
    for trace in traces {
        let twin = kept.iter_mut().find(|other| {
            other
                .values
                .iter()
                .zip(&trace.values)
                .all(|(one, two)| (one - two).abs() <= close || (!one.is_finite() && !two.is_finite()))
        });
        match twin {
            Some(twin) => {
                for name in trace.names {
                    if !twin.names.contains(&name)
                        && !twin.names.iter().any(|held| held.starts_with(&format!("{name} (")))
                    {
                        // `wall outside (trace)` says all that `wall outside` does.
                        twin.names.retain(|held| !name.starts_with(&format!("{held} (")));
                        twin.names.push(name);
                    }
                }
            }
            None => kept.push(trace),
        }
    }
    kept
}

fn temperature_levels(findings: &Findings) -> Vec<Level> {
    let section = &findings.section;
    let limits = section.limits.iter().filter_map(|limit| match limit.condition {
        Condition::Below(_, kelvin) | Condition::Above(_, kelvin) => Some((&limit.name, degc(kelvin))),
        Condition::Frozen(_) | Condition::Thawed(_) => None,
    });
    let targets = section.targets.iter().map(|target| (&target.name, degc(target.at_least_k)));
    let mut levels: Vec<Level> = Vec::new();
    for (name, value) in limits.chain(targets) {
        let words = format!("{} {} °C", label(name), fixed(value, 2));
        match levels.iter_mut().find(|level| level.value == value) {
            Some(level) => level.label = format!("{}, {}", label(name), level.label),
            None => levels.push(Level { label: words, value }),
        }
    }
    levels
}

/// Limits and targets that were reached, in the panel of frozen shares or in that of temperatures.
fn dots(findings: &Findings, unit_s: f64, of_shares: bool) -> Vec<Dot> {
    let reached = |answer: &Answer| {
        let time_s = answer.time_s?;
        let value = match condition_of(&findings.section, answer) {
            Some(Condition::Frozen(share) | Condition::Thawed(share)) => of_shares.then_some(100.0 * share),
            Some(Condition::Below(_, kelvin) | Condition::Above(_, kelvin)) => (!of_shares).then_some(degc(kelvin)),
            None if answer.unit == "degC" => answer.limit_value.filter(|_| !of_shares),
            None if answer.unit == "-" => answer.limit_value.filter(|_| of_shares).map(|share| 100.0 * share),
            None => None,
        }?;
        let words = format!("{}, {}", label(&answer.name), duration_words(time_s, answer.danger));
        Some(Dot { at: (time_s / unit_s, value), label: words })
    };
    let last = findings.history.times_s.last().map_or(f64::INFINITY, |time_s| time_s / unit_s * (1.0 + 1e-9));
    findings.answers.iter().filter_map(reached).filter(|dot| dot.at.0 <= last).collect()
}

fn frozen_share(findings: &Findings, times: &[f64], unit_s: f64) -> Option<Panel> {
    let shares: Vec<f64> = findings.history.frozen_share.iter().map(|share| 100.0 * share).collect();
    if !shares.iter().any(|&share| share > 0.0) {
        return None;
    }
    let look = Look { filled: true, ..Look::line(palette::BLUE, Dash::Solid, 1.0) };
    let curve = Curve { names: Vec::new(), look, points: times.iter().copied().zip(shares).collect() };
    let axis = Axis::new("Frozen share of the content [%]", 0.0, 100.0, 4);
    Some(Panel { axis, height: 1.4, curves: vec![curve], levels: Vec::new(), dots: dots(findings, unit_s, true) })
}

fn heaters(findings: &Findings, unit_s: f64) -> Option<Panel> {
    let (section, history) = (&findings.section, &findings.history);
    let times_s = history.times_s.as_slice().expect("times lie in one piece");
    let switches =
        history.heaters_w_per_m.columns().into_iter().any(|column| column.iter().any(|&output| output != column[0]));
    if !switches {
        return None;
    }
    const LOOKS: [(Colour, Dash); 3] =
        [(palette::ORANGE, Dash::Solid), (palette::PURPLE, Dash::Long), (palette::GREEN, Dash::Short)];
    let curves: Vec<Curve> = section
        .heaters
        .iter()
        .zip(history.heaters_w_per_m.columns())
        .zip(LOOKS.iter().cycle())
        .map(|((heater, outputs), &(colour, dash))| {
            let (points, jumps) = stepped(&findings.marks, times_s, outputs.iter().copied());
            let width = if jumps > 40 { 0.4 } else { 1.0 };
            Curve {
                names: vec![clean(&heater.name)],
                look: Look { filled: true, ..Look::line(colour, dash, width) },
                points: points.into_iter().map(|(time_s, output)| (time_s / unit_s, output)).collect(),
            }
        })
        .collect();
    let highest = range(history.heaters_w_per_m.iter().copied()).map_or(1.0, |(_, high)| high);
    let axis = Axis::new("Heater output [W/m]", 0.0, 1.12 * highest, 4);
    Some(Panel { axis, height: 1.0, curves, levels: Vec::new(), dots: Vec::new() })
}
