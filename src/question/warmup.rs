//! `warmup`: from cold with every heater on; when is each target met, and at what energy?

use super::{Asked, LONGEST_S, Options, QuestionError, answers, cautions, findings, limits_asked, plan, solve, told};
use crate::answer::{Findings, Outcome};
use crate::case::Loaded;
use crate::march::{CyclePhase, Plan, Recording};
use crate::section::{Change, Condition, ContentState, Section, Start};

pub(super) fn ask(
    loaded: &Loaded,
    options: &Options,
    progress: &mut dyn FnMut(f64) -> bool,
) -> Result<Findings, QuestionError> {
    let mut section = loaded.section.clone();
    if section.heaters.is_empty() {
        return Err(QuestionError::NoAnswer { reason: "the case has no heater to warm the line with".into() });
    }
    section.events.retain(|event| {
        matches!(event.change, Change::OutsideTemperature(_) | Change::OutsideFilm(_) | Change::Content(_))
    });
    for heater in &mut section.heaters {
        heater.thermostat = None;
    }
    let start_k = match section.start {
        Start::Uniform(temperature) => temperature,
        Start::Hold | Start::Reading { .. } => section.outside.temperature_k.at(0.0),
    };
    section.start = Start::Uniform(start_k);
    let mut asked: Vec<Asked> = section
        .targets
        .iter()
        .map(|target| Asked {
            name: target.name.clone(),
            condition: Condition::Above(target.place, target.at_least_k),
            danger: false,
        })
        .collect();
    let frozen = section
        .content
        .material
        .as_ref()
        .and_then(|material| material.freezing_k)
        .is_some_and(|(_, liquidus)| start_k < liquidus)
        && matches!(section.content.state, ContentState::Still | ContentState::Stirred { .. });
    if frozen {
        asked.push(Asked { name: "thawed".into(), condition: Condition::Thawed(0.0), danger: false });
    }
    if asked.is_empty() {
        return Err(QuestionError::NoAnswer {
            reason: "the case names no target\nhint: add a [[target]] with a name, where and at_least".into(),
        });
    }
    let output_w_per_m: f64 = section.heaters.iter().map(|heater| heater.output_per_line_w_per_m()).sum();
    let solved = solve(&section, &plan(&asked, LONGEST_S, CyclePhase::BeforeOn, Recording::Steps), options, progress)?;
    let mut found = answers(&section, &asked, &solved);
    for answer in &mut found {
        // Every heater is on throughout: the energy is the output times the time.
        answer.value = answer.time_s.map(|time_s| output_w_per_m * time_s);
        if answer.value.is_some() {
            answer.error = answer.error_s.map(|error_s| output_w_per_m * error_s);
            answer.unit = "J/m".into();
        }
    }
    let length = section.line.effective_length_m();
    let (hot, end_s) = (limits_on_heat(&section), solved.main.end_time_s);
    // Nothing stops the heat here: what it passes on the way has to be known.
    let passed = if hot.is_empty() {
        Vec::new()
    } else {
        let to_the_end = Plan {
            stop_when_answered: false,
            stop_when_settled: false,
            ..plan(&hot, end_s, CyclePhase::BeforeOn, Recording::Ends)
        };
        let solved = solve(&section, &to_the_end, options, progress)?;
        let mut passed = answers(&section, &hot, &solved);
        passed.retain(|answer| answer.time_s.is_some() || answer.outcome == Outcome::TooClose);
        passed
    };
    let mut findings = findings("warmup", loaded, section, solved, found, options);
    findings.headline.push(format!(
        "From {} °C throughout, with every heater on ({} W per metre of line).",
        told::degrees(start_k),
        told::plain(output_w_per_m)
    ));
    let mut sentences = Vec::new();
    for answer in told::in_order(&findings.answers) {
        let mut sentence = told::sentence(answer);
        if let Some(joules) = answer.value {
            let kwh = joules / 3.6e6;
            let line = length.map_or(String::new(), |length| {
                format!(", {} kWh for the line's {} m", told::round_up(kwh * length), told::plain(length))
            });
            sentence.push_str(&format!(" It takes {} kWh/m{line}.", told::round_up(kwh)));
        }
        sentences.push(sentence);
    }
    findings.headline.extend(sentences);
    for answer in &passed {
        findings.headline.push(format!("On the way, for nothing stops the heat here: {}", told::sentence(answer)));
    }
    if !hot.is_empty() && passed.is_empty() {
        let names: Vec<String> = hot.iter().map(|asked| format!("'{}'", asked.name)).collect();
        findings.headline.push(format!("Not passed on the way: {}.", told::enumerated(&names)));
    }
    findings.answers.extend(passed);
    if let Some(line) = told::events_kept(&findings.section, &findings.marks) {
        findings.assumptions.insert(0, line);
    }
    findings.assumptions.insert(
        0,
        "Every heater is on from 0 h until the last target is met: thermostats and the case's own events of supply and \
         heaters are left out."
            .into(),
    );
    if !matches!(loaded.section.start, Start::Uniform(_)) {
        findings.assumptions.insert(1, "The line starts cold, at the outside's temperature of 0 h.".into());
    }
    findings.cautions = cautions::that_apply(&findings);
    Ok(findings)
}

/// The case's limits on heat.
fn limits_on_heat(section: &Section) -> Vec<Asked> {
    let mut limits = limits_asked(section);
    limits.retain(|asked| matches!(asked.condition, Condition::Above(..)));
    limits
}
