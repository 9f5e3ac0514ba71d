//! Pipe sizes by their designations, as `pipes.csv` has them.

use super::materials::Mark;
use serde::Deserialize;
use std::fmt;
use std::sync::LazyLock;
use thiserror::Error;

/// Most suggestions beside a fault.
const MOST_SUGGESTIONS: usize = 3;

/// A pipe size: what a case needs of it.
#[derive(Debug, Clone, PartialEq)]
pub struct PipeSize {
    /// How it is written best.
    pub designation: String,
    /// The standard that has it.
    pub standard: &'static str,
    /// Outside diameter [m].
    pub outside_diameter_m: f64,
    /// Nominal wall [m].
    pub wall_m: f64,
}

/// A row of the data file.
#[derive(Debug, Clone, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct CatalogPipe {
    /// The standard that has it.
    pub standard: String,
    /// Schedule of ASME B36.10M or B36.19M, or the `normal` wall of EN 10220.
    pub schedule: String,
    /// Nominal pipe size, in inches and fractions.
    pub nps: String,
    /// Nominal diameter.
    pub dn: u32,
    /// Outside diameter [mm].
    pub outside_diameter_mm: f64,
    /// Nominal wall [mm].
    pub wall_mm: f64,
    /// Inside diameter [mm].
    pub inside_diameter_mm: f64,
    /// Where the sizes come from.
    pub source: String,
    /// How they came here.
    pub mark: Mark,
}

impl CatalogPipe {
    /// How it is written best, by its nominal diameter.
    pub fn designation(&self) -> String {
        format!("DN {}, {}", self.dn, Schedule(&self.schedule))
    }

    fn is_of(&self, size: &Size) -> bool {
        match size {
            Size::Dn(dn) => self.dn == *dn,
            Size::Nps(inches) => inches_of(&self.nps) == Some(*inches),
        }
    }

    fn size(&'static self, wanted: &Size) -> PipeSize {
        let size = match wanted {
            Size::Dn(_) => format!("DN {}", self.dn),
            Size::Nps(_) => format!("NPS {}", self.nps),
        };
        PipeSize {
            designation: format!("{size}, {}", Schedule(&self.schedule)),
            standard: &self.standard,
            outside_diameter_m: self.outside_diameter_mm * 1e-3,
            wall_m: self.wall_mm * 1e-3,
        }
    }
}

/// A schedule as a designation has it: `schedule 40`, but `normal` and `STD` as they are.
#[derive(Debug, Clone, Copy)]
pub struct Schedule<'a>(pub &'a str);

impl fmt::Display for Schedule<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if self.0.starts_with(|letter: char| letter.is_ascii_digit()) {
            f.write_str("schedule ")?;
        }
        f.write_str(self.0)
    }
}

static PIPES: LazyLock<Vec<CatalogPipe>> = LazyLock::new(|| {
    let mut reader = csv::Reader::from_reader(include_str!("pipes.csv").as_bytes());
    reader.deserialize().collect::<Result<_, _>>().expect("the shipped data file is sound")
});

/// Every pipe size, in the order of the data file: by standard, schedule, size.
pub fn pipes() -> &'static [CatalogPipe] {
    &PIPES
}

/// Why a designation gives no pipe size.
#[derive(Debug, Clone, PartialEq, Error)]
#[error("{reason}")]
pub struct PipeFault {
    /// What is wrong.
    pub reason: PipeFaultReason,
    /// Designations that may be meant, the likeliest first.
    pub suggestions: Vec<String>,
}

/// What is wrong with a designation.
#[derive(Debug, Clone, PartialEq, Error)]
pub enum PipeFaultReason {
    /// It does not begin with a nominal size.
    #[error(
        "a pipe size begins with DN or NPS and a number, as in \"DN 80, schedule 40\" or \"NPS 1 1/2, schedule 80S\""
    )]
    NoSize,
    /// It has no schedule.
    #[error("a pipe size needs its schedule too: {size} comes in {schedules}")]
    NoSchedule {
        /// The nominal size.
        size: String,
        /// The schedules of this size.
        schedules: String,
    },
    /// No standard that is built in has this size.
    #[error("there is no pipe size {size}")]
    UnknownSize {
        /// The nominal size.
        size: String,
    },
    /// The size does not come in this schedule.
    #[error("{size} does not come in {schedule}; it comes in {schedules}")]
    UnknownSchedule {
        /// The nominal size.
        size: String,
        /// The schedule asked for.
        schedule: String,
        /// The schedules of this size.
        schedules: String,
    },
}

/// A nominal size.
#[derive(Debug, Clone, Copy, PartialEq)]
enum Size {
    Dn(u32),
    /// In inches: every NPS is an exact binary fraction.
    Nps(f64),
}

/// A pipe size by its designation: nominal size and schedule, as in `DN 80, schedule 40`, `NPS 1 1/2, sch 80S`,
/// `NPS 3 STD`, `DN 80, normal`. Case, spaces and the comma do not count.
///
/// # Errors
/// Where the designation cannot be read, or no such size or schedule is built in; with what may be meant.
pub fn pipe(designation: &str) -> Result<PipeSize, PipeFault> {
    let text = designation.trim().to_lowercase();
    let Some((size, size_text, schedule)) = read(&text) else {
        let suggestions = vec!["DN 80, schedule 40".into(), "NPS 3, schedule 40".into()];
        return Err(PipeFault { reason: PipeFaultReason::NoSize, suggestions });
    };
    let of_size: Vec<&'static CatalogPipe> = PIPES.iter().filter(|pipe| pipe.is_of(&size)).collect();
    let propose = |pipes: &[&'static CatalogPipe]| {
        pipes.iter().take(MOST_SUGGESTIONS).map(|pipe| pipe.size(&size).designation).collect()
    };
    if of_size.is_empty() {
        let reason = PipeFaultReason::UnknownSize { size: size_text };
        return Err(PipeFault { reason, suggestions: propose(&nearest_sizes(&size, &schedule)) });
    }
    if let Some(found) = of_size.iter().find(|pipe| pipe.schedule.eq_ignore_ascii_case(&schedule)) {
        return Ok(found.size(&size));
    }
    let schedules = of_size.iter().map(|pipe| Schedule(&pipe.schedule).to_string()).collect::<Vec<_>>().join(", ");
    let mut nearest = of_size;
    nearest.sort_by(|one, other| likeness(&other.schedule, &schedule).total_cmp(&likeness(&one.schedule, &schedule)));
    let reason = if schedule.is_empty() {
        nearest.sort_by_key(|pipe| pipe.schedule != "40");
        PipeFaultReason::NoSchedule { size: size_text, schedules }
    } else {
        PipeFaultReason::UnknownSchedule {
            size: size_text,
            schedule: Schedule(&schedule.to_uppercase()).to_string(),
            schedules,
        }
    };
    Err(PipeFault { reason, suggestions: propose(&nearest) })
}

fn likeness(known: &str, asked: &str) -> f64 {
    strsim::jaro_winkler(&known.to_lowercase(), asked)
}

/// Nominal size, how it is written, and the schedule in lower case without its word; `None` where there is no size.
fn read(text: &str) -> Option<(Size, String, String)> {
    let (is_dn, rest) = match (text.strip_prefix("dn"), text.strip_prefix("nps")) {
        (Some(rest), _) => (true, rest),
        (None, Some(rest)) => (false, rest),
        (None, None) => return None,
    };
    let rest = rest.trim_start();
    // The size ends at the comma, at the first letter, or where a number cannot go on ("NPS 3 40").
    let end = rest.find(|letter: char| letter == ',' || letter.is_alphabetic()).unwrap_or(rest.len());
    let mut number = rest[..end].trim();
    let mut schedule = rest[end..].trim_start_matches(',').trim();
    if schedule.is_empty()
        && let Some((size, last)) = number.rsplit_once(' ')
        && !last.contains('/')
    {
        (number, schedule) = (size.trim_end(), last);
    }
    let size = if is_dn { Size::Dn(number.parse().ok()?) } else { Size::Nps(inches_of(number)?) };
    let written = format!("{} {number}", if is_dn { "DN" } else { "NPS" });
    Some((size, written, schedule_of(schedule)))
}

/// A schedule without the words around it.
fn schedule_of(text: &str) -> String {
    let mut rest = text;
    for word in ["schedule", "sched", "sch"] {
        if let Some(after) = rest.strip_prefix(word) {
            rest = after.trim_start_matches(['.', ':']).trim_start();
            break;
        }
    }
    let rest = rest.trim_end_matches("wall").trim_end();
    match rest {
        "standard" => "std".into(),
        "extra strong" => "xs".into(),
        _ => rest.chars().filter(|letter| !letter.is_whitespace()).collect(),
    }
}

/// Inches of `3`, `1/2`, `1 1/2`, `1-1/2`, `1.5`, with or without an inch mark.
fn inches_of(text: &str) -> Option<f64> {
    let text = text.trim_end_matches(['"', '\u{2033}']).trim();
    let mut parts = text.split([' ', '-']).filter(|part| !part.is_empty());
    let (first, second) = (parts.next()?, parts.next());
    if parts.next().is_some() {
        return None;
    }
    let fraction = |part: &str| {
        let (above, below) = part.split_once('/')?;
        let (above, below): (u32, u32) = (above.trim().parse().ok()?, below.trim().parse().ok()?);
        (below > 0).then(|| f64::from(above) / f64::from(below))
    };
    match second {
        Some(second) => Some(f64::from(first.parse::<u32>().ok()?) + fraction(second)?),
        None => fraction(first).or_else(|| first.parse().ok()),
    }
}

/// Pipes of the sizes nearest to one that does not exist, in the schedule asked for where they come in it.
fn nearest_sizes(size: &Size, schedule: &str) -> Vec<&'static CatalogPipe> {
    let distance = |pipe: &CatalogPipe| match size {
        Size::Dn(dn) => f64::from(pipe.dn.abs_diff(*dn)),
        Size::Nps(inches) => inches_of(&pipe.nps).map_or(f64::INFINITY, |of_pipe| (of_pipe - inches).abs()),
    };
    let mut near: Vec<&'static CatalogPipe> = Vec::new();
    let is_asked = |pipe: &CatalogPipe| pipe.schedule.eq_ignore_ascii_case(schedule);
    let has_schedule = PIPES.iter().any(is_asked);
    let wanted = |pipe: &&CatalogPipe| if has_schedule { is_asked(pipe) } else { pipe.schedule == "40" };
    near.extend(PIPES.iter().filter(wanted));
    near.sort_by(|one, other| distance(one).total_cmp(&distance(other)));
    near.truncate(2);
    near
}
