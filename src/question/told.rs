//! Findings in words: sentences, what governs, what was assumed.

use super::{CAUTIOUS_CONDUCTIVITY, ERROR_FACTOR, is_lagging};
use crate::answer::{Answer, OtherStart, Outcome};
use crate::case::Loaded;
use crate::duration::{Rounding, words};
use crate::history::{History, Mark, Snapshot};
use crate::march::{Hold, Trace, steady::balance};
use crate::section::{ContentState, Section, Start};

/// How far beyond a material's tables temperatures may lie without a word [K].
const BEYOND_K: f64 = 15.0;

/// A number with three figures, without trailing zeros and with a real minus sign.
pub(super) fn plain(value: f64) -> String {
    if value == 0.0 || !value.is_finite() {
        return format!("{value}");
    }
    let decimals = (2 - value.abs().log10().floor() as i32).clamp(0, 9) as usize;
    let text = format!("{value:.decimals$}");
    let text = if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.') } else { &text };
    text.replace('-', "\u{2212}")
}

/// The same rounded up in its third figure: heat that is needed is never understated.
pub(super) fn round_up(value: f64) -> String {
    if value == 0.0 || !value.is_finite() {
        return plain(value);
    }
    let unit = 10f64.powi(value.abs().log10().floor() as i32 - 2);
    plain((value / unit - 1e-9).ceil() * unit)
}

/// A temperature in degC with one decimal and a real minus sign.
pub(super) fn degrees(kelvin: f64) -> String {
    with_decimals(kelvin - 273.15, 1)
}

fn with_decimals(value: f64, decimals: usize) -> String {
    let text = format!("{value:.decimals$}");
    match text.strip_prefix('-') {
        Some(digits) if digits.chars().all(|digit| matches!(digit, '0' | '.')) => digits.into(),
        Some(digits) => format!("\u{2212}{digits}"),
        None => text,
    }
}

/// A list in words: `a`, `a and b`, `a, b and c`.
pub(super) fn enumerated(items: &[String]) -> String {
    match items {
        [] => String::new(),
        [only] => only.clone(),
        [most @ .., last] => format!("{} and {last}", most.join(", ")),
    }
}

fn capitalised(name: &str) -> String {
    let mut letters = name.chars();
    letters.next().map_or(String::new(), |first| first.to_uppercase().collect::<String>() + letters.as_str())
}

fn time_words(answer: &Answer, time_s: f64) -> String {
    words(time_s, if answer.danger { Rounding::Down } else { Rounding::Up })
}

/// The answers in the order in which they happen; what never happens comes last.
pub(super) fn in_order(answers: &[Answer]) -> Vec<&Answer> {
    let mut sorted: Vec<_> = answers.iter().collect();
    let key = |answer: &Answer| answer.time_s.or(answer.earliest_time_s).unwrap_or(f64::INFINITY);
    sorted.sort_by(|a, b| key(a).total_cmp(&key(b)));
    sorted
}

/// One answer as a sentence, rounded to the safe side, the cautious one beside it.
pub(super) fn sentence(answer: &Answer) -> String {
    let name = capitalised(&answer.name);
    let cautious = match (answer.cautious_outcome, answer.cautious_time_s) {
        (Some(_), Some(time_s)) => format!(" (cautious: {})", time_words(answer, time_s)),
        (Some(Outcome::SettlesShort), None) => " (cautious: never)".to_string(),
        (Some(_), None) => " (cautious: not either)".to_string(),
        (None, _) => String::new(),
    };
    match (answer.outcome, answer.time_s) {
        (Outcome::Reached, Some(0.0)) => format!("{name}: so from the start."),
        (Outcome::Reached, Some(time_s)) => format!("{name} after {}{cautious}.", time_words(answer, time_s)),
        (Outcome::Reached, None) => format!("{name} is reached."),
        (Outcome::TooClose, _) => {
            let earliest = answer.earliest_time_s.map_or_else(
                || format!("{}, within its numerical error", closest(answer)),
                |time_s| format!("if it happens, not before about {}", words(time_s, Rounding::Down)),
            );
            format!("{name}: too close to call; {earliest}{cautious}.")
        }
        (Outcome::SettlesShort, _) => format!("{name}: never; {}{cautious}.", closest(answer)),
        (Outcome::RunEnded, _) => format!("{name}: not within the run; {}{cautious}.", closest(answer)),
        (Outcome::WeatherEnded, _) => {
            format!("{name}: not before the weather's table ends; {}{cautious}.", closest(answer))
        }
    }
}

/// The closest approach in words, with its distance.
fn closest(answer: &Answer) -> String {
    match (answer.closest_value, answer.limit_value, answer.unit.as_str()) {
        (Some(closest), Some(limit), "degC") => {
            let side = if closest > limit { "above" } else { "below" };
            format!(
                "{} comes no closer than {} °C, {} K {side} it",
                answer.place,
                with_decimals(closest, 2),
                plain((closest - limit).abs())
            )
        }
        // Round-off is no ice.
        (Some(closest), ..) if closest.abs() < 1e-9 => "nothing freezes".into(),
        (Some(closest), ..) => format!("the frozen share comes no closer than {} %", plain(100.0 * closest)),
        _ => "its closest approach is not known".into(),
    }
}

/// How the line starts, where that has to be said beside the answer.
pub(super) fn start(section: &Section, start: &Snapshot, hold: Hold) -> Vec<String> {
    let place = start.faces.first().map_or_else(
        || start.content_mean_k.map_or(String::new(), |mean| format!("content at {} °C", degrees(mean))),
        |(name, kelvin)| format!("{name} at {} °C", degrees(*kelvin)),
    );
    let mut lines = match hold {
        Hold::None => match section.start {
            Start::Uniform(kelvin) => vec![format!("It starts at {} °C throughout.", degrees(kelvin))],
            Start::Reading { place, temperature_k } => vec![format!(
                "It starts from the reading of {} °C at {}.",
                degrees(temperature_k),
                section.place_name(place)
            )],
            Start::Hold => Vec::new(),
        },
        Hold::Cycle { period_s, duty } => vec![format!(
            "It starts at the cold end of the thermostat's cycle ({place}), which lasts {} with the heater on for {:.0} % of it.",
            words(period_s, Rounding::Nearest),
            100.0 * duty
        )],
        Hold::Balance { heater_w_per_m } => {
            let controlled = section.heaters.iter().any(|heater| heater.thermostat.is_some());
            if heater_w_per_m == 0.0 {
                vec![format!("It starts at rest with no heat on ({place}).")]
            } else if controlled {
                vec![format!(
                    "It starts at rest with the heat on throughout ({place}): the thermostat never switches off."
                )]
            } else {
                vec![format!(
                    "It starts at rest under {} W/m without a thermostat ({place}). That is the optimistic start: a line that is \
                     colder when it happens has less time.",
                    plain(heater_w_per_m)
                )]
            }
        }
    };
    if start.frozen_share > 0.0 {
        lines.push(format!("It is {} % frozen at the start.", plain(100.0 * start.frozen_share)));
    }
    lines
}

/// The state in a few words.
pub(super) fn state(section: &Section, state: &Snapshot) -> String {
    let mut parts = Vec::new();
    if let Some(mean) = state.content_mean_k {
        parts.push(format!("content {} °C", degrees(mean)));
    }
    parts.extend(state.faces.iter().map(|(name, kelvin)| format!("{name} {} °C", degrees(*kelvin))));
    if section.content.material.as_ref().is_some_and(|material| material.freezing_k.is_some()) {
        parts.push(format!("{} % frozen", plain(100.0 * state.frozen_share)));
    }
    parts.join(", ")
}

/// Resistances in series as shares of their sum, the largest first.
pub(super) fn resistances(found: &[(String, f64)]) -> Vec<String> {
    let sum: f64 = found.iter().map(|(_, resistance)| resistance).sum();
    if sum <= 0.0 {
        return Vec::new();
    }
    let mut sorted: Vec<_> = found.iter().collect();
    sorted.sort_by(|a, b| b.1.total_cmp(&a.1));
    let shares: Vec<String> = sorted
        .iter()
        .filter(|(_, resistance)| *resistance >= 0.0005 * sum)
        .map(|(name, resistance)| format!("{name} {:.1} %", 100.0 * resistance / sum))
        .collect();
    vec![format!("The heat's way out resists by {} m K/W: {}.", plain(sum), shares.join(", "))]
}

/// What governs a march: the resistances at its start, and the heat that stands between it and freezing.
pub(super) fn governs(section: &Section, trace: &Trace) -> Vec<String> {
    // With the heat that is lost at the start, so that conductivities are those of about its temperatures.
    let outputs: Vec<f64> = section.heaters.iter().map(|heater| heater.output_per_line_w_per_m().max(1.0)).collect();
    let total: f64 = outputs.iter().sum();
    let lost = trace.start.lost_w_per_m;
    let share = if lost > 0.0 && total > 0.0 { lost / total } else { 1.0 };
    let outputs: Vec<f64> = outputs.iter().map(|output| share * output).collect();
    let mut lines =
        balance(section, &outputs, 1.0).map_or_else(|_| Vec::new(), |steady| resistances(&steady.resistances));
    let still_there = matches!(section.content.state, ContentState::Still | ContentState::Stirred { .. });
    if let (Some(material), true, Some(mean)) = (&section.content.material, still_there, trace.start.content_mean_k)
        && let Some((solidus, liquidus)) = material.freezing_k
    {
        let area = std::f64::consts::PI * section.content.radius_m.powi(2);
        let latent = area * (material.enthalpy.at(liquidus) - material.enthalpy.at(solidus - 1e-9));
        if mean > liquidus {
            let sensible = area * (material.enthalpy.at(mean) - material.enthalpy.at(liquidus));
            lines.push(format!(
                "The content holds {} kJ/m above its freezing point and {} kJ/m of latent heat.",
                plain(sensible / 1e3),
                plain(latent / 1e3)
            ));
        } else {
            lines.push(format!("The content's latent heat is {} kJ/m.", plain(latent / 1e3)));
        }
    }
    lines
}

/// The case's own events that were met, in words; those of the supply are the question itself.
pub(super) fn events_kept(section: &Section, marks: &[Mark]) -> Option<String> {
    let switched = |label: &str| {
        section.heaters.iter().any(|heater| ["on", "off"].iter().any(|way| label == format!("{} {way}", heater.name)))
    };
    let met: Vec<String> = marks
        .iter()
        .filter(|mark| !switched(&mark.label) && !mark.label.starts_with("supply"))
        .map(|mark| format!("{} at {}", mark.label, words(mark.time_s, Rounding::Nearest)))
        .collect();
    (!met.is_empty()).then(|| format!("The case's other events happen as they stand: {}.", enumerated(&met)))
}

/// What the inputs rest on, whatever the verb.
pub(super) fn inputs(loaded: &Loaded, section: &Section) -> Vec<String> {
    let mut lines = Vec::new();
    for layer in &section.layers {
        if let Some(words) = &layer.contact.words {
            lines.push(format!(
                "The contact inside {} is '{}': {} to {} W/(m2 K) by common practice, the middle used.",
                layer.name,
                words.words,
                plain(words.low),
                plain(words.high)
            ));
        }
    }
    let mut recalled: Vec<&str> = section
        .layers
        .iter()
        .map(|layer| layer.material.as_ref())
        .chain(section.content.material.as_deref())
        .filter(|material| material.provenance.from_memory)
        .map(|material| material.name.as_str())
        .collect();
    recalled.sort_unstable();
    recalled.dedup();
    if !recalled.is_empty() {
        lines.push(format!("Some figures of these materials are from memory, not looked up: {}.", recalled.join(", ")));
    }
    lines.extend(loaded.notes.iter().cloned());
    lines.extend(loaded.overrides.iter().map(|set| format!("Changed from the command line: {set}.")));
    lines
}

/// What a march rests on.
pub(super) fn assumptions(loaded: &Loaded, section: &Section, trace: &Trace) -> Vec<String> {
    let mut lines = Vec::new();
    match section.start {
        Start::Reading { place, temperature_k } => lines.push(format!(
            "Everything inside {} starts at the reading of {} °C, everything outside it in balance with the outside, without heat.",
            section.place_name(place),
            degrees(temperature_k)
        )),
        Start::Uniform(_) | Start::Hold => {}
    }
    if section.heaters.iter().any(|heater| heater.thermostat.is_some()) && matches!(trace.hold, Hold::None) {
        lines.push("A thermostat that starts within its band is off until its sensor falls to the lower point.".into());
    }
    match section.content.state {
        ContentState::Still => {
            lines.push("The content is still: heat moves in it by conduction only. 'still' and 'stirred' usually bracket the truth.".into());
        }
        ContentState::Stirred { .. } => {
            lines.push(
                "The liquid content is stirred to one temperature. 'still' and 'stirred' usually bracket the truth."
                    .into(),
            );
        }
        _ => {}
    }
    if section.heaters.iter().any(|heater| matches!(heater.seat, crate::section::Seat::Face(_))) {
        lines.push("Heaters on a face have no thickness and no sheath temperature here; the wall is round and even, its hottest spot under a strip is not.".into());
    }
    lines.extend(inputs(loaded, section));
    lines.extend(beyond_tables(section, &trace.history));
    lines
}

/// What is worse in the cautious answer; nothing where nothing is.
pub(super) fn cautious_meaning(section: &Section) -> Option<String> {
    let mut worse = Vec::new();
    let lagging: Vec<String> =
        section.layers.iter().filter(|layer| is_lagging(layer)).map(|layer| layer.name.clone()).collect();
    if !lagging.is_empty() {
        let more = 100.0 * (CAUTIOUS_CONDUCTIVITY - 1.0);
        worse.push(format!("{} conducting {more:.0} % more", enumerated(&lagging)));
    }
    if section.heaters.iter().any(|heater| heater.output_low_w_per_m < heater.output_w_per_m) {
        worse.push("heaters at the lower end of their tolerance".into());
    }
    (!worse.is_empty()).then(|| format!("The cautious answer: {}.", enumerated(&worse)))
}

/// What the cautious answer means, or why there is none.
pub(super) fn cautious_answer(section: &Section, answers: &[Answer], without: Option<&str>) -> Vec<String> {
    let mut lines = Vec::new();
    if let Some(why) = without {
        lines.push(format!("{}.", capitalised(why)));
    } else if answers.iter().any(|answer| answer.cautious_outcome.is_some()) {
        lines.extend(cautious_meaning(section));
    }
    let earlier = |answer: &Answer| {
        answer.danger && answer.time_s.is_some_and(|time| time > 0.0 && answer.cautious_time_s == Some(time))
    };
    if without.is_none() && answers.iter().any(earlier) {
        lines.push(
            "Where the cautious answer is the answer itself, the worse line happened to be warmer when the heat went, for its \
             thermostat stood at another point of its cycle: a worse moment may give less time than either."
                .into(),
        );
    }
    if answers.iter().any(|answer| answer.danger && answer.unit == "degC" && answer.cautious_outcome.is_none())
        && without.is_none()
    {
        lines.push("A limit on heat has no cautious answer: worse lagging and less heat would only flatter it.".into());
    }
    lines
}

/// Content and lagging that were far hotter or colder than what their tables cover; walls conduct well whatever they are at.
pub(super) fn beyond_tables(section: &Section, history: &History) -> Option<String> {
    let range = |values: Vec<f64>| {
        values
            .into_iter()
            .filter(|kelvin| kelvin.is_finite())
            .fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high): (f64, f64), kelvin| {
                (low.min(kelvin), high.max(kelvin))
            })
    };
    let mut met = Vec::new();
    if let Some(material) = &section.content.material {
        met.push((material, range(history.content_mean_k.iter().chain(&history.centre_k).copied().collect())));
    }
    for (index, layer) in section.layers.iter().enumerate().filter(|(_, layer)| is_lagging(layer)) {
        let faces = [2 * index, 2 * index + 1];
        met.push((
            &layer.material,
            range(faces.iter().flat_map(|&face| history.faces_k.column(face).to_vec()).collect()),
        ));
    }
    let beyond: Vec<String> = met
        .into_iter()
        // A single value claims no range.
        .filter(|(material, (low, high))| {
            let (from, to) = material.covers_k;
            to > from && (*low < from - BEYOND_K || *high > to + BEYOND_K)
        })
        .map(|(material, (low, high))| {
            let (from, to) = material.covers_k;
            format!(
                "{} covers {} to {} °C and is at {} to {} °C here",
                material.name,
                plain(from - 273.15),
                plain(to - 273.15),
                degrees(low),
                degrees(high)
            )
        })
        .collect();
    (!beyond.is_empty())
        .then(|| format!("Beyond a material's tables their end values are used: {}.", enumerated(&beyond)))
}

/// The answers from the other end of the thermostat's cycle in one sentence; nothing where none is reached.
pub(super) fn from_the_warm_end(other: &OtherStart) -> Option<String> {
    let times: Vec<String> = in_order(&other.answers)
        .into_iter()
        .filter_map(|answer| Some(format!("{} after {}", answer.name, time_words(answer, answer.time_s?))))
        .collect();
    (!times.is_empty()).then(|| format!("From the warm end of that cycle: {}.", enumerated(&times)))
}

/// How the numbers were made.
pub(super) fn methods(quick: bool) -> Vec<String> {
    vec![if quick {
        "Solved once (--quick): the numerical error is not known and no cautious answer was worked out.".into()
    } else {
        format!(
            "The numerical error is {ERROR_FACTOR:.0} times the sum of two changes: on a mesh twice as fine, and at tolerances ten \
             times tighter. It is the solution's, not the accuracy of the inputs."
        )
    }]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn needs_are_never_understated() {
        assert_eq!(round_up(7.301), "7.31");
        assert_eq!(round_up(7.3), "7.3");
        assert_eq!(round_up(12345.0), "12400");
        assert_eq!(plain(0.012345), "0.0123");
        assert_eq!(plain(0.0), "0");
    }
}
