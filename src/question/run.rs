//! `run`: the case's own events, hour by hour.

use super::{
    LONGEST_S, Options, QuestionError, answers, cautions, findings, from_the_warm_end, limits_asked, plan, solve, told,
};
use crate::answer::Findings;
use crate::case::Loaded;
use crate::duration::{Rounding, words};
use crate::history::Energy;
use crate::march::{CyclePhase, End, Hold, Plan, Recording};
use crate::section::Record;

pub(super) fn ask(
    loaded: &Loaded,
    options: &Options,
    progress: &mut dyn FnMut(f64) -> bool,
) -> Result<Findings, QuestionError> {
    let section = loaded.section.clone();
    let asked = limits_asked(&section);
    let record = match &section.run.record {
        Record::Auto => Recording::Steps,
        Record::Every(interval) => Recording::Every(*interval),
        Record::At(times) => Recording::At(times.clone()),
    };
    let until = section.run.until_s;
    let plan = Plan {
        // A run of stated length runs its length; one without ends when all is answered or at rest.
        stop_when_answered: until.is_none() && !asked.is_empty(),
        stop_when_settled: until.is_none(),
        ..plan(&asked, until.unwrap_or(LONGEST_S), CyclePhase::BeforeOn, record)
    };
    let solved = solve(&section, &plan, options, progress)?;
    let (hold, finish) = (solved.main.hold, solved.main.finish.clone());
    let (end, end_s) = (solved.main.end, solved.main.end_time_s);
    let found = answers(&section, &asked, &solved);
    let other_start = from_the_warm_end(&section, &asked, &plan, hold, options, progress)?;
    let mut findings = findings("run", loaded, section, solved, found, options);
    findings.other_start = other_start;
    findings.headline.extend(told::in_order(&findings.answers).into_iter().map(told::sentence));
    let at_the_end = told::state(&findings.section, &finish);
    let end_words = words(end_s, Rounding::Nearest);
    findings.headline.push(match end {
        End::Settled if findings.section.events.is_empty() && matches!(hold, Hold::Balance { .. }) => {
            format!("Nothing changes: {at_the_end}.")
        }
        End::Settled => format!("At rest after {end_words}: {at_the_end}."),
        End::WeatherEnded => format!("The weather's table ends at {end_words}: {at_the_end}."),
        End::Answered | End::Until => format!("After {end_words}: {at_the_end}."),
    });
    findings.headline.push(account(&findings.energy));
    for heater in &findings.section.heaters {
        let count = |way: &str| {
            let label = format!("{} {way}", heater.name);
            findings.marks.iter().filter(|mark| mark.label == label).count()
        };
        let (on, off) = (count("on"), count("off"));
        if on + off > 0 {
            findings.headline.push(format!("Its thermostat switched '{}' on {on} × and off {off} ×.", heater.name));
        }
    }
    findings.headline.extend(told::start(&findings.section, &findings.start, hold));
    let warm = findings.other_start.as_ref().and_then(told::from_the_warm_end);
    findings.headline.extend(warm);
    if findings.other_start.is_some() && findings.section.events.iter().any(|event| event.time_s > 0.0) {
        findings.assumptions.insert(
            0,
            "What a later event meets depends on where the thermostat's cycle stands then: the two starts are two chances of \
             it, not its bounds."
                .into(),
        );
    }
    findings.cautions = cautions::that_apply(&findings);
    Ok(findings)
}

/// Where the heat came from and went, in words.
fn account(energy: &Energy) -> String {
    let kwh = |joules: f64| told::plain(joules.abs() / 3.6e6);
    let mut parts = vec![
        format!("{} kWh supplied", kwh(energy.supplied_j_per_m)),
        format!(
            "{} kWh {}",
            kwh(energy.lost_j_per_m),
            if energy.lost_j_per_m < 0.0 { "taken up from outside" } else { "lost" }
        ),
        format!(
            "{} kWh {}",
            kwh(energy.stored_j_per_m),
            if energy.stored_j_per_m < 0.0 { "given up by the line" } else { "stored in the line" }
        ),
    ];
    if energy.carried_j_per_m != 0.0 {
        parts.push(format!(
            "{} kWh {} by the content",
            kwh(energy.carried_j_per_m),
            if energy.carried_j_per_m < 0.0 { "taken away" } else { "brought" }
        ));
    }
    format!("Energy per metre of line: {}.", told::enumerated(&parts))
}
