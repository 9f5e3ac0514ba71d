//! Findings in words: sentences, what governs, what was assumed.

use super::{CAUTIOUS_CONDUCTIVITY, ERROR_FACTOR, is_lagging};
use crate::answer::{Answer, Outcome};
use crate::case::Loaded;
use crate::duration::{Rounding, words};
use crate::history::Snapshot;
use crate::march::{Hold, Trace, steady::balance};
use crate::section::{ContentState, Section, Start};

/// A number with three figures, without trailing zeros.
pub(super) fn plain(value: f64) -> String {
    if value == 0.0 || !value.is_finite() {
        return format!("{value}");
    }
    let decimals = (2 - value.abs().log10().floor() as i32).clamp(0, 9) as usize;
    let text = format!("{value:.decimals$}");
    if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.').into() } else { text }
}

/// The same rounded up in its third figure: heat that is needed is never understated.
pub(super) fn round_up(value: f64) -> String {
    if value == 0.0 || !value.is_finite() {
        return plain(value);
    }
    let unit = 10f64.powi(value.abs().log10().floor() as i32 - 2);
    plain((value / unit - 1e-9).ceil() * unit)
}

/// A temperature in degC with one decimal.
pub(super) fn degrees(kelvin: f64) -> String {
    format!("{:.1}", kelvin - 273.15)
}

fn capitalised(name: &str) -> String {
    let mut letters = name.chars();
    letters.next().map_or(String::new(), |first| first.to_uppercase().collect::<String>() + letters.as_str())
}

/// One answer as a sentence, rounded to the safe side, the cautious one beside it.
pub(super) fn sentence(answer: &Answer) -> String {
    let rounding = if answer.danger { Rounding::Down } else { Rounding::Up };
    let name = capitalised(&answer.name);
    let cautious = match (answer.cautious_outcome, answer.cautious_time_s) {
        (Some(_), Some(time_s)) => format!(" (cautious: {})", words(time_s, rounding)),
        (Some(_), None) => " (cautious: not reached)".to_string(),
        (None, _) => String::new(),
    };
    let short_of = || match (answer.closest_value, answer.limit_value, answer.unit.as_str()) {
        (Some(closest), Some(limit), "degC") => {
            format!("closest {closest:.2} °C at {}, {:.2} K from it", answer.place, (closest - limit).abs())
        }
        (Some(closest), ..) => format!("{:.1} % at the most extreme", 100.0 * closest),
        _ => "closest approach unknown".into(),
    };
    match (answer.outcome, answer.time_s) {
        (Outcome::Reached, Some(0.0)) => format!("{name} holds from the start."),
        (Outcome::Reached, Some(time_s)) => format!("{name} after {}{cautious}.", words(time_s, rounding)),
        (Outcome::TooClose, Some(time_s)) => format!(
            "{name}: too close to call, for the numerical error decides; about {}{cautious}.",
            words(time_s, rounding)
        ),
        (Outcome::TooClose, None) => {
            format!("{name}: too close to call, {}: within its own numerical error{cautious}.", short_of())
        }
        (Outcome::SettlesShort, _) => format!("{name}: never; the line comes to rest, {}{cautious}.", short_of()),
        (Outcome::RunEnded, _) => format!("{name}: not within the run, {}{cautious}.", short_of()),
        (Outcome::WeatherEnded, _) => {
            format!("{name}: not before the weather's table ends, {}{cautious}.", short_of())
        }
        (Outcome::Reached, None) => format!("{name} is reached."),
    }
}

/// How the line starts, where that has to be said beside the answer.
pub(super) fn start(section: &Section, start: &Snapshot, hold: Hold) -> Vec<String> {
    let place = start.faces.first().map_or_else(
        || start.content_mean_k.map_or(String::new(), |mean| format!("content at {} °C", degrees(mean))),
        |(name, kelvin)| format!("{name} at {} °C", degrees(*kelvin)),
    );
    match hold {
        Hold::None => Vec::new(),
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
    }
}

/// The state in a few words.
pub(super) fn state(section: &Section, state: &Snapshot) -> String {
    let mut parts = Vec::new();
    if let Some(mean) = state.content_mean_k {
        parts.push(format!("content {} °C", degrees(mean)));
    }
    parts.extend(state.faces.iter().map(|(name, kelvin)| format!("{name} {} °C", degrees(*kelvin))));
    if section.content.material.as_ref().is_some_and(|material| material.freezing_k.is_some()) {
        parts.push(format!("{:.1} % frozen", 100.0 * state.frozen_share));
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
    vec![format!("The way out resists by {} m K/W: {}.", plain(sum), shares.join(", "))]
}

/// What governs a march: the resistances at its start, and the heat that stands between it and freezing.
pub(super) fn governs(section: &Section, trace: &Trace) -> Vec<String> {
    let outputs: Vec<f64> = section.heaters.iter().map(|heater| heater.output_per_line_w_per_m().max(1.0)).collect();
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
        Start::Uniform(kelvin) => lines.push(format!("Everything starts at {} °C.", degrees(kelvin))),
        Start::Reading { place, temperature_k } => lines.push(format!(
            "Everything inside {} starts at the reading of {} °C, everything outside it in balance with the outside, without heat.",
            section.place_name(place),
            degrees(temperature_k)
        )),
        Start::Hold => {}
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
    if section.layers.iter().any(is_lagging) {
        let low = section.heaters.iter().any(|heater| heater.output_low_w_per_m < heater.output_w_per_m);
        lines.push(format!(
            "The cautious answer: lagging that conducts {:.0} % more{}.",
            100.0 * (CAUTIOUS_CONDUCTIVITY - 1.0),
            if low { ", heaters at the lower end of their tolerance" } else { "" }
        ));
    }
    lines
}

/// How the numbers were made.
pub(super) fn methods(quick: bool) -> Vec<String> {
    vec![if quick {
        "Solved once (--quick): the numerical error is not known and no cautious answer was worked out.".into()
    } else {
        format!(
            "The numerical error is {ERROR_FACTOR:.0} times the change on a mesh twice as fine plus that at tolerances ten times tighter. \
             It is the solution's, not the accuracy of the inputs."
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
