//! `outage`: the supply is lost at 0 h; when is each limit passed?

use super::{Asked, LONGEST_S, Options, QuestionError, answers, cautions, findings, plan, solve, told};
use crate::answer::{Findings, OtherStart};
use crate::case::Loaded;
use crate::march::{CyclePhase, Hold, Recording};
use crate::section::{Change, Condition, Event, Limit, Place, Section, Start};

pub(super) fn ask(
    loaded: &Loaded,
    options: &Options,
    progress: &mut dyn FnMut(f64) -> bool,
) -> Result<Findings, QuestionError> {
    let mut section = loaded.section.clone();
    let supply_events = section.events.iter().filter(|event| matches!(event.change, Change::Supply(_))).count();
    section.events.retain(|event| !matches!(event.change, Change::Supply(_)));
    section.events.insert(0, Event { time_s: 0.0, change: Change::Supply(false) });
    if section.limits.is_empty() {
        section.limits = default_limits(&section)?;
    }
    let asked: Vec<Asked> = section
        .limits
        .iter()
        .map(|limit| Asked { name: limit.name.clone(), condition: limit.condition, danger: true })
        .collect();

    let cold = plan(&asked, LONGEST_S, CyclePhase::BeforeOn, Recording::Steps);
    let solved = solve(&section, &cold, options, progress)?;
    let hold = solved.main.hold;
    let found = answers(&section, &asked, &solved);
    let other_start = if matches!(hold, Hold::Cycle { .. }) {
        let warm = plan(&asked, LONGEST_S, CyclePhase::AfterOff, Recording::Ends);
        let solved = solve(&section, &warm, options, progress)?;
        let description = "the warm end of the cycle, just after the thermostat switched off".into();
        Some(OtherStart { description, answers: answers(&section, &asked, &solved) })
    } else {
        None
    };

    let mut findings = findings("outage", loaded, section, solved, found, options);
    findings.other_start = other_start;
    findings.headline.push("The power is lost at 0 h.".into());
    findings.headline.extend(findings.answers.iter().map(told::sentence));
    findings.headline.extend(told::start(&findings.section, &findings.start, hold));
    if let (Some(other), Some(first)) = (&findings.other_start, findings.answers.first())
        && first.time_s.is_some()
    {
        findings.headline.push(format!(
            "From the warm end of that cycle: {}",
            told::sentence(&other.answers[0]).trim_end_matches('.').to_owned() + "."
        ));
    }
    if supply_events > 0 {
        findings.assumptions.insert(
            0,
            format!(
                "The case's own {supply_events} supply event(s) are left out: here the supply stays lost from 0 h on."
            ),
        );
    }
    findings.cautions = cautions::that_apply(&findings);
    Ok(findings)
}

/// What an outage endangers where the case names no limit: the content's freezing, or its own lowest temperature of use.
fn default_limits(section: &Section) -> Result<Vec<Limit>, QuestionError> {
    let limit = |name: &str, condition| Limit { name: name.into(), condition };
    let material = section.content.material.as_ref();
    if material.is_some_and(|material| material.freezing_k.is_some()) {
        return Ok(vec![
            limit("first ice", Condition::Frozen(0.0)),
            limit("10 % frozen", Condition::Frozen(0.1)),
            limit("50 % frozen", Condition::Frozen(0.5)),
            limit("all frozen", Condition::Frozen(1.0)),
        ]);
    }
    if let Some(lowest) = material.and_then(|material| material.lowest_use_k) {
        return Ok(vec![limit("lowest temperature of use", Condition::Below(Place::ContentSurface, lowest))]);
    }
    let hint = "hint: add a [[limit]] with a name, where and below";
    let reason = match (material, section.start) {
        (None, _) => format!("the case names no limit, and without a content nothing can freeze\n{hint}"),
        (Some(material), Start::Uniform(_) | Start::Hold | Start::Reading { .. }) => {
            format!("the case names no limit, and no freezing or setting point of '{}' is known\n{hint}", material.name)
        }
    };
    Err(QuestionError::NoAnswer { reason })
}
