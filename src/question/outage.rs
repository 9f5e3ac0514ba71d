//! `outage`: the supply is lost at 0 h; when is each limit passed?

use super::{
    LONGEST_S, Options, QuestionError, answers, cautions, findings, from_the_warm_end, limits_asked, plan, solve, told,
};
use crate::answer::Findings;
use crate::case::Loaded;
use crate::march::{CyclePhase, Recording};
use crate::section::{Change, Condition, Event, Limit, Place, Section};

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
    let asked = limits_asked(&section);

    let cold = plan(&asked, LONGEST_S, CyclePhase::BeforeOn, Recording::Steps);
    let solved = solve(&section, &cold, options, progress)?;
    let hold = solved.main.hold;
    let found = answers(&section, &asked, &solved);
    let other_start = from_the_warm_end(&section, &asked, &cold, hold, options, progress)?;

    let mut findings = findings("outage", loaded, section, solved, found, options);
    findings.other_start = other_start;
    findings.headline.push("The power is lost at 0 h.".into());
    findings.headline.extend(told::in_order(&findings.answers).into_iter().map(told::sentence));
    findings.headline.extend(told::start(&findings.section, &findings.start, hold));
    let warm = findings.other_start.as_ref().and_then(told::from_the_warm_end);
    findings.headline.extend(warm);
    if let Some(line) = told::events_kept(&findings.section, &findings.marks) {
        findings.assumptions.insert(0, line);
    }
    findings.assumptions.insert(
        0,
        match supply_events {
            0 => "The supply stays lost.".into(),
            _ => "The supply stays lost: the case's own events of the supply are left out.".into(),
        },
    );
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
    let reason = material.map_or_else(
        || format!("the case names no limit, and without a content nothing can freeze\n{hint}"),
        |material| {
            format!("the case names no limit, and no freezing or setting point of '{}' is known\n{hint}", material.name)
        },
    );
    Err(QuestionError::NoAnswer { reason })
}
