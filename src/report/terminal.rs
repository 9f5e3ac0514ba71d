//! What a verb says on the terminal: the answer first, then what it rests on.

use super::duration_words;
use super::text::{clean, degc, figures, fixed};
use crate::answer::{Answer, Findings, Outcome};
use crate::duration::error_words;
use std::fmt::Write;

/// Width that text is wrapped to.
const WIDTH: usize = 96;

/// The whole text of the findings; only their headline where `quiet`.
pub fn text(findings: &Findings, quiet: bool) -> String {
    let mut out = String::new();
    if quiet {
        for line in &findings.headline {
            let _ = writeln!(out, "{}", clean(line));
        }
        return out;
    }
    let tag = findings.section.line.tag.as_ref().map(|tag| format!(" ({tag})")).unwrap_or_default();
    let _ = writeln!(out, "{}{}", clean(&findings.section.title), clean(&tag));
    out.push('\n');
    for line in &findings.headline {
        wrapped(&mut out, "  ", "    ", line);
    }
    answers(&mut out, &findings.answers);
    if let Some(other) = &findings.other_start {
        out.push('\n');
        wrapped(&mut out, "", "", &format!("From {}:", other.description));
        answers(&mut out, &other.answers);
    }
    out.push('\n');
    start(&mut out, findings);
    list(&mut out, "What governs", &findings.governs);
    list(&mut out, "What it rests on", &findings.assumptions);
    list(&mut out, "Cautions", &findings.cautions);
    out.push('\n');
    wrapped(&mut out, "", "  ", &provenance(findings));
    out
}

/// How well the energy closes, what it cost, and what was solved by what.
fn provenance(findings: &Findings) -> String {
    let residual = findings.energy.residual_relative;
    let closes = if residual == 0.0 {
        "Energy closes to the last digit".into()
    } else {
        format!("Energy closes to {residual:.0e}")
    };
    let effort = &findings.effort;
    let marched = if effort.steps == 0 {
        String::new()
    } else {
        format!(
            ", {} steps ({} rejected), {} Newton iterations",
            effort.steps, effort.rejected_steps, effort.newton_iterations
        )
    };
    format!(
        "{closes}; {} cells{marched}. stillwarm {}, input {}",
        effort.cells,
        env!("CARGO_PKG_VERSION"),
        findings.input_digest.get(..12).unwrap_or(&findings.input_digest),
    )
}

/// A table of the answers; the numerical error stands apart, for it is not the accuracy of the inputs.
fn answers(out: &mut String, answers: &[Answer]) {
    if answers.is_empty() {
        return;
    }
    let mut rows = vec![["".to_string(), "answer".into(), "cautious".into(), "numerical error".into()]];
    for answer in answers {
        rows.push([clean(&answer.name), told(answer), cautious(answer), error(answer)]);
    }
    if rows[1..].iter().all(|row| row[2].is_empty()) {
        rows[0][2].clear();
    }
    let width = |column: usize| rows.iter().map(|row| row[column].chars().count()).max().unwrap_or(0);
    let widths = [width(0), width(1), width(2)];
    out.push('\n');
    for row in &rows {
        let mut line = String::from("  ");
        for (cell, width) in row.iter().zip(widths) {
            if width > 0 {
                let _ = write!(line, "{cell}{}", " ".repeat(width - cell.chars().count() + 3));
            }
        }
        line.push_str(&row[3]);
        let _ = writeln!(out, "{}", line.trim_end());
    }
}

/// The answer itself in a few words.
fn told(answer: &Answer) -> String {
    let time = answer.time_s.map(|time| duration_words(time, answer.danger));
    let value = answer.value.map(|value| quantity(value, 4, &answer.unit));
    match (answer.outcome, time) {
        (Outcome::Reached, Some(time)) => match value {
            Some(value) => format!("{time}, {value}"),
            None => time,
        },
        (Outcome::TooClose, _) => answer.earliest_time_s.map_or_else(
            || format!("too close to call{}", closest(answer)),
            |earliest| format!("too close to call, not before {}", duration_words(earliest, true)),
        ),
        (Outcome::Reached, None) => value.unwrap_or_else(|| "reached".into()),
        (Outcome::SettlesShort, _) => format!("never{}", closest(answer)),
        (Outcome::RunEnded, _) => format!("not within the run{}", closest(answer)),
        (Outcome::WeatherEnded, _) => format!("not before the weather's table ends{}", closest(answer)),
    }
}

fn closest(answer: &Answer) -> String {
    match answer.closest_value {
        Some(value) if answer.unit == "degC" => {
            let gap = answer
                .limit_value
                .map_or(String::new(), |limit| format!(", {} K off", figures((value - limit).abs(), 2)));
            format!(" (closest {} °C{gap})", fixed(value, 2))
        }
        Some(value) => format!(" (closest {} %)", fixed(100.0 * value, 1)),
        None => String::new(),
    }
}

fn cautious(answer: &Answer) -> String {
    match (answer.cautious_outcome, answer.cautious_time_s) {
        (_, Some(time)) => duration_words(time, answer.danger),
        (Some(Outcome::SettlesShort), None) => "never".into(),
        (Some(Outcome::RunEnded), None) => "not within the run".into(),
        (Some(Outcome::WeatherEnded), None) => "not before the table ends".into(),
        _ => String::new(),
    }
}

fn error(answer: &Answer) -> String {
    if let Some(error) = answer.error_s {
        return format!("± {}", error_words(error));
    }
    match (answer.error, answer.closest_error) {
        (Some(error), _) if answer.value.is_some() => small(error, &answer.unit),
        (_, Some(error)) if answer.unit == "degC" => small(error, "K"),
        (_, Some(error)) => small(100.0 * error, "%"),
        _ if answer.outcome == Outcome::TooClose => "decides".into(),
        _ => "not asked for".into(),
    }
}

/// An error; where it is too small to matter, so much is said.
fn small(error: f64, unit: &str) -> String {
    let unit = if unit == "degC" { "K" } else { unit };
    if error < 0.001 { format!("under 0.001 {unit}") } else { format!("± {}", quantity(error, 2, unit)) }
}

/// A value with its unit as people write it; energy in kWh.
fn quantity(value: f64, significant: usize, unit: &str) -> String {
    let (value, unit) = match unit {
        "degC" => (value, "°C"),
        "J/m" => (value / 3.6e6, "kWh/m"),
        "-" => (100.0 * value, "%"),
        other => (value, other),
    };
    format!("{} {unit}", figures(value, significant))
}

fn start(out: &mut String, findings: &Findings) {
    let start = &findings.start;
    let title = match findings.verb {
        "steady" => "At rest",
        // The state before the events of 0 h, those of the question itself among them.
        "outage" => "Just before the power is lost",
        _ => "At the start, before any event",
    };
    let mut words = Vec::new();
    if let Some(mean) = start.content_mean_k {
        words.push(format!("content {} °C", fixed(degc(mean), 2)));
    }
    for (name, kelvin) in &start.faces {
        words.push(format!("{name} {} °C", fixed(degc(*kelvin), 2)));
    }
    words.push(format!("heaters {} W/m", figures(start.heater_w_per_m, 4)));
    words.push(format!("lost {} W/m", figures(start.lost_w_per_m, 4)));
    if start.frozen_share > 0.0 {
        words.push(format!("{} % frozen", fixed(100.0 * start.frozen_share, 1)));
    }
    wrapped(out, "", "  ", &format!("{title}: {}.", clean(&words.join(", "))));
}

fn list(out: &mut String, title: &str, lines: &[String]) {
    if lines.is_empty() {
        return;
    }
    let _ = writeln!(out, "\n{title}");
    for line in lines {
        wrapped(out, "  - ", "    ", line);
    }
}

/// Wraps a paragraph at word ends.
fn wrapped(out: &mut String, first: &str, rest: &str, paragraph: &str) {
    let mut line = first.to_string();
    let mut empty = true;
    for word in clean(paragraph).split_whitespace() {
        if !empty && line.chars().count() + 1 + word.chars().count() > WIDTH {
            let _ = writeln!(out, "{line}");
            line = rest.to_string();
            empty = true;
        }
        if !empty {
            line.push(' ');
        }
        line.push_str(word);
        empty = false;
    }
    let _ = writeln!(out, "{line}");
}
