//! `run`: the case's own events, hour by hour.

use super::{Asked, LONGEST_S, Options, QuestionError, answers, cautions, findings, plan, solve, told};
use crate::answer::Findings;
use crate::case::Loaded;
use crate::duration::{Rounding, words};
use crate::march::{CyclePhase, Plan, Recording};
use crate::section::{Condition, Record};

pub(super) fn ask(
    loaded: &Loaded,
    options: &Options,
    progress: &mut dyn FnMut(f64) -> bool,
) -> Result<Findings, QuestionError> {
    let section = loaded.section.clone();
    let asked: Vec<Asked> = section
        .limits
        .iter()
        .map(|limit| Asked {
            name: limit.name.clone(),
            condition: limit.condition,
            danger: !matches!(limit.condition, Condition::Thawed(_)),
        })
        .collect();
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
    let (hold, finish, end_s) = (solved.main.hold, solved.main.finish.clone(), solved.main.end_time_s);
    let switchings = solved.main.switchings.clone();
    let found = answers(&section, &asked, &solved);
    let mut findings = findings("run", loaded, section, solved, found, options);
    findings.headline.extend(findings.answers.iter().map(told::sentence));
    findings.headline.push(format!(
        "After {}: {}.",
        words(end_s, Rounding::Nearest),
        told::state(&findings.section, &finish)
    ));
    let kwh = |joules: f64| told::plain(joules / 3.6e6);
    let mut account = format!(
        "Energy per metre of line: {} kWh supplied, {} kWh lost, {} kWh stored",
        kwh(findings.energy.supplied_j_per_m),
        kwh(findings.energy.lost_j_per_m),
        kwh(findings.energy.stored_j_per_m)
    );
    if findings.energy.carried_j_per_m != 0.0 {
        account.push_str(&format!(", {} kWh brought by the content", kwh(findings.energy.carried_j_per_m)));
    }
    findings.headline.push(account + ".");
    for (heater, (on, off)) in findings.section.heaters.iter().zip(switchings) {
        if on + off > 0 {
            findings.headline.push(format!("'{}' switched on {on} times and off {off} times.", heater.name));
        }
    }
    findings.headline.extend(told::start(&findings.section, &findings.start, hold));
    findings.cautions = cautions::that_apply(&findings);
    Ok(findings)
}
