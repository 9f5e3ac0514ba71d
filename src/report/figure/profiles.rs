//! Temperature over the radius at several times, with the layers shaded and named.

use super::{Axis, Band, Colour, Curve, Dash, Figure, Kind, Look, Panel, Upright};
use crate::answer::Findings;
use crate::history::History;
use crate::report::axis::{TimeUnit, range};
use crate::report::text::{clean, degc, fixed, label};
use ndarray::Array1;

/// As many profiles as can be told apart.
const MOST_PROFILES: usize = 6;

/// Up to so many records, profiles are drawn at recorded times only.
const FEW_RECORDS: usize = 40;

/// Profiles that differ by less than this share of the range are told apart no more.
const TOLD_APART: f64 = 0.03;

/// From the first to the last profile: growing darker all the way, so that a grey print keeps the order.
const RAMP: [Colour; 4] = [(0xE6, 0x9F, 0x00), (0xD5, 0x5E, 0x00), (0x8E, 0x2D, 0x6B), (0x1C, 0x24, 0x54)];

/// Neighbours differ in their dashes as well.
const DASHES: [Dash; 3] = [Dash::Solid, Dash::Long, Dash::DashDot];

const CONTENT_TINT: Colour = (0xE4, 0xEF, 0xF8);
const LAYER_TINTS: [Colour; 2] = [(0xE6, 0xE3, 0xDD), (0xF7, 0xF4, 0xEE)];

/// Radial profiles at the start and at the round times that differ most.
pub fn profiles(findings: &Findings) -> Figure {
    let (section, history) = (&findings.section, &findings.history);
    let radii_mm: Vec<f64> = history.profile_radii_m.iter().map(|radius_m| radius_m * 1e3).collect();
    let outermost_mm = section.outermost_radius_m() * 1e3;
    let chosen = chosen(history);
    let count = chosen.len();
    let unit = TimeUnit::for_span(history.times_s[history.times_s.len() - 1] - history.times_s[0]);
    let curves: Vec<Curve> = chosen
        .into_iter()
        .enumerate()
        .map(|(index, (time_s, profile))| {
            let colour = along_ramp(index as f64 / (count.max(2) - 1) as f64);
            let name = if history.times_s.len() == 1 {
                "settled".to_string()
            } else {
                format!("{} {}", fixed(time_s / unit.seconds, 2), unit.sign)
            };
            Curve {
                names: vec![name],
                look: Look::line(colour, DASHES[index % DASHES.len()], 1.1),
                points: radii_mm.iter().copied().zip(profile.iter().map(|&kelvin| degc(kelvin))).collect(),
            }
        })
        .collect();
    let innermost_mm = radii_mm.first().copied().unwrap_or(0.0);
    // The inside of an empty line holds no profile, but its width is part of the picture where it is not most of it.
    let from_mm = if innermost_mm < 0.3 * outermost_mm { 0.0 } else { innermost_mm };
    let values = curves.iter().flat_map(|curve| curve.points.iter().map(|point| point.1));
    let panel = Panel {
        axis: Axis::around("Temperature [°C]", values, 9),
        height: 4.0,
        curves,
        levels: Vec::new(),
        dots: Vec::new(),
    };
    Figure {
        kind: Kind::Profiles,
        title: format!("{}: temperature over the radius", clean(&section.title)),
        note: "A jump at a face is the temperature drop across its contact.".into(),
        axis: Axis::new("Radius [mm]", from_mm, outermost_mm, 10),
        panels: vec![panel],
        uprights: contacts(findings),
        bands: bands(findings, from_mm),
        listed: true,
    }
}

/// Contacts that resist, as marks on the radius.
fn contacts(findings: &Findings) -> Vec<Upright> {
    let layers = &findings.section.layers;
    let resisting = layers.iter().filter(|layer| layer.contact.resistance_m_k_per_w > 0.0);
    resisting.map(|layer| Upright { at: layer.inside_radius_m * 1e3, label: "contact".into() }).collect()
}

fn bands(findings: &Findings, from_mm: f64) -> Vec<Band> {
    let section = &findings.section;
    let content_mm = section.content.radius_m * 1e3;
    let content_name = section.content.material.as_ref().map_or("inside", |material| material.name.as_str());
    let mut bands = vec![Band { from: from_mm, to: content_mm, label: label(content_name), tint: CONTENT_TINT }];
    bands.extend(section.layers.iter().enumerate().map(|(index, layer)| Band {
        from: layer.inside_radius_m * 1e3,
        to: layer.outside_radius_m * 1e3,
        label: label(&layer.name),
        tint: LAYER_TINTS[index % 2],
    }));
    bands.retain(|band| band.to > band.from);
    bands
}

/// Times and profiles [K] to draw, in order of time: the start, then again and again the time whose profile is farthest from all
/// chosen ones.
fn chosen(history: &History) -> Vec<(f64, Array1<f64>)> {
    let times = history.times_s.as_slice().expect("times lie in one piece");
    let (first_s, last_s) = (times[0], times[times.len() - 1]);
    let unit = TimeUnit::for_span(last_s - first_s);
    // Few records are shown as they are; between many a straight line serves for a round time.
    let mut wanted: Vec<f64> = if times.len() <= FEW_RECORDS { times.to_vec() } else { unit.round_times(last_s) };
    wanted.retain(|&time_s| time_s > first_s && time_s < last_s);
    wanted.extend((last_s > first_s).then_some(last_s));
    let mut candidates: Vec<(f64, Array1<f64>)> =
        wanted.into_iter().map(|time_s| (time_s, profile_at(history, time_s))).collect();
    let mut chosen = vec![(first_s, history.profiles_k.row(0).to_owned())];
    let Some((low, high)) = range(history.profiles_k.iter().copied()) else { return chosen };
    while chosen.len() < MOST_PROFILES {
        let farthest = candidates
            .iter()
            .enumerate()
            .map(|(index, (_, profile))| {
                let nearest = chosen.iter().map(|(_, held)| distance(held, profile)).fold(f64::INFINITY, f64::min);
                (index, nearest)
            })
            .max_by(|one, other| one.1.total_cmp(&other.1));
        match farthest {
            Some((index, away)) if away > TOLD_APART * (high - low) => chosen.push(candidates.swap_remove(index)),
            _ => break,
        }
    }
    chosen.sort_by(|one, other| one.0.total_cmp(&other.0));
    chosen
}

/// The profile at a time, between the two records around it.
fn profile_at(history: &History, time_s: f64) -> Array1<f64> {
    let times = history.times_s.as_slice().expect("times lie in one piece");
    let after = times.partition_point(|&time| time < time_s).clamp(1, times.len() - 1);
    let span = times[after] - times[after - 1];
    let share = if span > 0.0 { ((time_s - times[after - 1]) / span).clamp(0.0, 1.0) } else { 1.0 };
    &history.profiles_k.row(after - 1) * (1.0 - share) + &history.profiles_k.row(after) * share
}

fn distance(one: &Array1<f64>, other: &Array1<f64>) -> f64 {
    one.iter().zip(other).map(|(a, b)| (a - b).abs()).filter(|away| away.is_finite()).fold(0.0, f64::max)
}

fn along_ramp(share: f64) -> Colour {
    let position = share.clamp(0.0, 1.0) * (RAMP.len() - 1) as f64;
    let below = (position.floor() as usize).min(RAMP.len() - 2);
    let part = position - below as f64;
    let mix = |low: u8, high: u8| (f64::from(low) + part * (f64::from(high) - f64::from(low))).round() as u8;
    let (low, high) = (RAMP[below], RAMP[below + 1]);
    (mix(low.0, high.0), mix(low.1, high.1), mix(low.2, high.2))
}
