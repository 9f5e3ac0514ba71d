//! What a figure shows, apart from how it is drawn: curves, limits, marks, bands and axes, built from the findings.
//!
//! Three figures are made: [`histories`] (temperatures over time, with the frozen share and the heaters beneath),
//! [`profiles`] (temperature over the radius at several times) and [`heat_balance`] (heat flows over time).
//!
//! Colours are those of Okabe and Ito ("Color Universal Design", 2008), which people with any common form of colour
//! blindness tell apart. Every curve differs from its neighbours in its dashes too, so that a grey print is still read.

mod heat_balance;
mod histories;
mod profiles;

pub use heat_balance::heat_balance;
pub use histories::histories;
pub use profiles::profiles;

use super::axis::Axis;
use super::text::label;
use crate::answer::{Answer, Findings};
use crate::history::Mark;
use crate::report::axis::TimeUnit;
use crate::section::{Condition, Section};

/// A colour as red, green, blue.
pub type Colour = (u8, u8, u8);

/// The colours of Okabe and Ito that stand out from white (their yellow does not), and two greys of ours.
pub mod palette {
    use super::Colour;
    /// Black.
    pub const BLACK: Colour = (0x00, 0x00, 0x00);
    /// Orange.
    pub const ORANGE: Colour = (0xE6, 0x9F, 0x00);
    /// Sky blue.
    pub const SKY: Colour = (0x56, 0xB4, 0xE9);
    /// Bluish green.
    pub const GREEN: Colour = (0x00, 0x9E, 0x73);
    /// Blue.
    pub const BLUE: Colour = (0x00, 0x72, 0xB2);
    /// Vermilion.
    pub const VERMILION: Colour = (0xD5, 0x5E, 0x00);
    /// Reddish purple.
    pub const PURPLE: Colour = (0xCC, 0x79, 0xA7);
    /// Text and axes.
    pub const INK: Colour = (0x26, 0x26, 0x26);
    /// What stays in the background.
    pub const GREY: Colour = (0x6E, 0x6E, 0x6E);
}

/// How a line is broken.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Dash {
    /// Not at all.
    Solid,
    /// Long dashes.
    Long,
    /// Short dashes.
    Short,
    /// Dots.
    Dotted,
    /// Dash and dot in turn.
    DashDot,
}

/// How a curve looks.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Look {
    /// Its colour.
    pub colour: Colour,
    /// Its dashes.
    pub dash: Dash,
    /// Its width, as a multiple of the ordinary.
    pub width: f64,
    /// Whether the area between the curve and zero is tinted.
    pub filled: bool,
}

impl Look {
    /// A line without tint.
    pub const fn line(colour: Colour, dash: Dash, width: f64) -> Self {
        Look { colour, dash, width, filled: false }
    }
}

/// One curve.
#[derive(Debug, Clone, PartialEq)]
pub struct Curve {
    /// What it shows; more than one name where several places differ by less than the eye can tell.
    pub names: Vec<String>,
    /// How it looks.
    pub look: Look,
    /// Its points in the axes' units; it is broken where one is not finite.
    pub points: Vec<(f64, f64)>,
}

/// A level that matters: a limit or a target.
#[derive(Debug, Clone, PartialEq)]
pub struct Level {
    /// Its name with its value.
    pub label: String,
    /// Its value in the axis's unit.
    pub value: f64,
}

/// A point that matters: a limit passed.
#[derive(Debug, Clone, PartialEq)]
pub struct Dot {
    /// Its place in the axes' units.
    pub at: (f64, f64),
    /// What it marks, with its time.
    pub label: String,
}

/// Something that happened, marked over all panels.
#[derive(Debug, Clone, PartialEq)]
pub struct Upright {
    /// Where on the horizontal axis.
    pub at: f64,
    /// What happened.
    pub label: String,
}

/// A named stretch of the horizontal axis: a layer.
#[derive(Debug, Clone, PartialEq)]
pub struct Band {
    /// Where it begins.
    pub from: f64,
    /// Where it ends.
    pub to: f64,
    /// Its name.
    pub label: String,
    /// Its tint.
    pub tint: Colour,
}

/// One panel: a vertical axis and what is drawn over it.
#[derive(Debug, Clone, PartialEq)]
pub struct Panel {
    /// The vertical axis.
    pub axis: Axis,
    /// Height as a multiple of a narrow panel's.
    pub height: f64,
    /// Curves, the most important last, so that it lies on top.
    pub curves: Vec<Curve>,
    /// Limits and targets.
    pub levels: Vec<Level>,
    /// Limits passed.
    pub dots: Vec<Dot>,
}

/// Which figure.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Kind {
    /// Temperatures over time.
    Histories,
    /// Temperature over the radius.
    Profiles,
    /// Heat flows over time.
    HeatBalance,
}

impl Kind {
    /// Its name, as files and links have it.
    pub fn name(self) -> &'static str {
        match self {
            Kind::Histories => "histories",
            Kind::Profiles => "profiles",
            Kind::HeatBalance => "heat-balance",
        }
    }
}

/// A figure: panels above each other over one horizontal axis.
#[derive(Debug, Clone, PartialEq)]
pub struct Figure {
    /// Which figure it is.
    pub kind: Kind,
    /// What it shows.
    pub title: String,
    /// What is needed to read it, in one line.
    pub note: String,
    /// The horizontal axis.
    pub axis: Axis,
    /// The panels from top to bottom.
    pub panels: Vec<Panel>,
    /// Events over all panels.
    pub uprights: Vec<Upright>,
    /// Layers behind all panels.
    pub bands: Vec<Band>,
    /// Whether the curves' names make a list in the order of the curves, as where their ends lie too close to name them there.
    pub listed: bool,
}

impl Figure {
    /// Names of the figure's files: SVG and PNG.
    pub fn file_names(&self) -> (&'static str, &'static str) {
        match self.kind {
            Kind::Histories => ("histories.svg", "histories.png"),
            Kind::Profiles => ("profiles.svg", "profiles.png"),
            Kind::HeatBalance => ("heat-balance.svg", "heat-balance.png"),
        }
    }
}

/// The figures that the findings can fill, in the order in which they are read: histories need at least two recorded times.
pub fn all(findings: &Findings) -> Vec<Figure> {
    let mut figures = Vec::new();
    if findings.history.times_s.len() > 1 {
        figures.push(histories(findings));
        figures.push(profiles(findings));
        figures.push(heat_balance(findings));
    } else if !findings.history.times_s.is_empty() {
        figures.push(profiles(findings));
    }
    figures
}

/// The time axis's unit and the axis itself, from the first record to the last.
fn time_axis(findings: &Findings) -> (TimeUnit, Axis) {
    let times = &findings.history.times_s;
    let (from_s, to_s) = (times[0], times[times.len() - 1]);
    let unit = TimeUnit::for_span(to_s - from_s);
    (unit, unit.axis(from_s, to_s, 12))
}

/// How often one thing may happen before its marks say no more.
const MOST_MARKS_ALIKE: usize = 6;

/// Events on the time axis. Those of one instant share a mark. A heater switched by its thermostat has none, for its output is
/// drawn, nor has a limit passed, which has its dot.
fn uprights(findings: &Findings, unit: TimeUnit, axis: &Axis) -> Vec<Upright> {
    let marks = &findings.marks;
    let switched = |label: &str| {
        let heater = label.strip_suffix(" on").or(label.strip_suffix(" off"));
        heater.is_some_and(|name| findings.section.heaters.iter().any(|heater| heater.name == name))
    };
    let mut uprights: Vec<Upright> = Vec::new();
    for mark in marks {
        let alike = marks.iter().filter(|other| other.label == mark.label).count();
        let at = mark.time_s / unit.seconds;
        let is_answer = findings.answers.iter().any(|answer| {
            mark.label.contains(&answer.name) && answer.time_s.is_some_and(|time_s| (time_s - mark.time_s).abs() < 1.0)
        });
        if alike > MOST_MARKS_ALIKE || switched(&mark.label) || is_answer || at < axis.low || at > axis.high {
            continue;
        }
        match uprights.iter_mut().find(|upright| (upright.at - at).abs() < 1e-3 * (axis.high - axis.low)) {
            Some(upright) => upright.label = format!("{}, {}", upright.label, label(&mark.label)),
            None => uprights.push(Upright { at, label: label(&mark.label) }),
        }
    }
    uprights.sort_by(|one, other| one.at.total_cmp(&other.at));
    uprights
}

/// The condition that an answer tells of: its limit's, or its target's.
fn condition_of(section: &Section, answer: &Answer) -> Option<Condition> {
    let limit = section.limits.iter().find(|limit| limit.name == answer.name).map(|limit| limit.condition);
    let target = section.targets.iter().find(|target| target.name == answer.name);
    limit.or(target.map(|target| Condition::Above(target.place, target.at_least_k)))
}

/// When a heater's output jumped between two records [s]: at the mark that lies there, else at the later record.
fn jump_time(marks: &[Mark], earlier_s: f64, later_s: f64) -> f64 {
    let within = marks.iter().map(|mark| mark.time_s).find(|&time_s| time_s >= earlier_s && time_s <= later_s);
    within.unwrap_or(later_s)
}

/// Points `(time, output)` of a heater: its output holds until it jumps. Also the number of jumps.
fn stepped(marks: &[Mark], times_s: &[f64], outputs: impl IntoIterator<Item = f64>) -> (Vec<(f64, f64)>, usize) {
    let mut points: Vec<(f64, f64)> = Vec::new();
    let mut jumps = 0;
    for (&time_s, output) in times_s.iter().zip(outputs) {
        if let Some(&(before_s, before)) = points.last()
            && before != output
        {
            let at = jump_time(marks, before_s, time_s);
            points.extend([(at, before), (at, output)]);
            jumps += 1;
        }
        points.push((time_s, output));
    }
    (points, jumps)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_switched_output_jumps_where_it_was_switched() {
        let marks = [Mark { time_s: 1.2, label: "trace off".into() }];
        let (points, jumps) = stepped(&marks, &[0.0, 1.0, 2.0, 3.0], [15.0, 15.0, 0.0, 0.0]);
        assert_eq!(points, vec![(0.0, 15.0), (1.0, 15.0), (1.2, 15.0), (1.2, 0.0), (2.0, 0.0), (3.0, 0.0)]);
        assert_eq!(jumps, 1);
    }
}
