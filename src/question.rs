//! The questions: a case, a verb, and what is found out.
//!
//! Every answer carries its numerical error. The question is solved three times: at the default settings, on a mesh twice
//! as fine, and at tolerances ten times tighter; the error is a stated factor times the sum of the two differences. Beside
//! it stands the cautious answer, for the inputs are known less well than the solution.

mod cautions;
mod outage;
mod run;
mod steady;
mod told;
mod warmup;

use crate::answer::{Answer, Findings, OtherStart, Outcome};
use crate::case::Loaded;
use crate::march::{self, CyclePhase, End, Hold, MarchError, Plan, Recording, Settings, Sighting, Trace};
use crate::section::{Change, Condition, Place, Section};
use std::sync::Arc;
use thiserror::Error;

/// Numerical error over the sum of the differences to the refined and to the tighter solution. A second-order scheme leaves
/// a third of the difference to the mesh twice as fine beyond it; two covers that and what the differences hide by chance
/// (measured over every exact case in `validation/`).
pub const ERROR_FACTOR: f64 = 2.0;
/// Mesh refinement and tightening of the tolerances of the two further solves.
const FINER_MESH: f64 = 2.0;
const TIGHTER: f64 = 0.1;
/// How much more the lagging conducts in the cautious answer.
pub const CAUTIOUS_CONDUCTIVITY: f64 = 1.25;
/// A layer that conducts less than this near 10 degC is lagging [W/(m K)]; plastics conduct more.
const LAGGING_CONDUCTS_LESS: f64 = 0.12;
/// No line takes longer than this to come to rest [s]: a bound against endless runs.
const LONGEST_S: f64 = 1e9;

/// Which question is asked.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Verb {
    /// Temperatures and heat flows at rest, and the watts that hold each target.
    Steady,
    /// The case's own events, hour by hour.
    Run,
    /// From cold with every heater on.
    Warmup,
    /// The supply is lost at 0 h.
    Outage,
}

/// How a question is asked.
#[derive(Debug, Clone, Copy, Default)]
pub struct Options {
    /// Solve once only, without numerical error and cautious answer.
    pub quick: bool,
    /// Settings of the default solve.
    pub settings: Settings,
}

/// Why a question was not answered.
#[derive(Debug, Error)]
pub enum QuestionError {
    /// The computation failed.
    #[error(transparent)]
    March(#[from] MarchError),
    /// The question has no answer, or was not asked.
    #[error("{reason}")]
    NoAnswer {
        /// Why, in words, with a remedy.
        reason: String,
    },
}

/// Asks a question of a case. `progress` is told the line's time [s] now and then and answers whether to go on.
///
/// # Errors
/// [`QuestionError::March`] where the computation failed, [`QuestionError::NoAnswer`] where there is nothing to answer.
pub fn ask(
    verb: Verb,
    loaded: &Loaded,
    options: &Options,
    progress: &mut dyn FnMut(f64) -> bool,
) -> Result<Findings, QuestionError> {
    match verb {
        Verb::Steady => steady::ask(loaded, options),
        Verb::Run => run::ask(loaded, options, progress),
        Verb::Warmup => warmup::ask(loaded, options, progress),
        Verb::Outage => outage::ask(loaded, options, progress),
    }
}

/// One condition to be answered, with the name that the case gives it.
#[derive(Debug, Clone)]
struct Asked {
    name: String,
    condition: Condition,
    danger: bool,
}

/// One question solved in every way that its answer needs.
struct Solved {
    main: Trace,
    refined: Option<Trace>,
    tight: Option<Trace>,
    /// Under the cautious assumptions, from every start that may be the worst.
    cautious: Vec<Trace>,
    /// Why there is no cautious answer, where there is none.
    without_cautious: Option<String>,
}

/// The case's limits as what is asked.
fn limits_asked(section: &Section) -> Vec<Asked> {
    section
        .limits
        .iter()
        .map(|limit| Asked {
            name: limit.name.clone(),
            condition: limit.condition,
            // A thaw is what a frozen line waits for.
            danger: !matches!(limit.condition, Condition::Thawed(_)),
        })
        .collect()
}

fn plan(asked: &[Asked], until_s: f64, phase: CyclePhase, record: Recording) -> Plan {
    Plan {
        until_s,
        stop_when_answered: true,
        stop_when_settled: true,
        watches: asked.iter().map(|asked| asked.condition).collect(),
        cycle_phase: phase,
        record,
    }
}

/// Solves a plan at the default settings and, unless `quick`, refined, tightened and cautiously.
fn solve(
    section: &Section,
    plan: &Plan,
    options: &Options,
    progress: &mut dyn FnMut(f64) -> bool,
) -> Result<Solved, MarchError> {
    let settings = options.settings;
    let main = march::run(section, plan, &settings, progress)?;
    let mut solved = Solved { main, refined: None, tight: None, cautious: Vec::new(), without_cautious: None };
    if options.quick {
        return Ok(solved);
    }
    // The further solves are asked for numbers only, but resolve what the main one resolves.
    let bare = Plan { record: without_steps(&plan.record), ..plan.clone() };
    let refined = Settings { refinement: settings.refinement * FINER_MESH, ..settings };
    let tight = Settings {
        temperature_tolerance_k: settings.temperature_tolerance_k * TIGHTER,
        share_tolerance: settings.share_tolerance * TIGHTER,
        ..settings
    };
    // Side by side: neither knows of the other, so that the answer is the same on any number of threads.
    let alone = |settings: &Settings| march::run(section, &bare, settings, &mut |_| true);
    let (refined, tight) = rayon::join(|| alone(&refined), || alone(&tight));
    solved.refined = Some(refined?);
    solved.tight = Some(tight?);
    let Some(worse) = cautious_section(section) else {
        solved.without_cautious =
            Some("no cautious answer: there is no lagging to conduct more, and no heater states a tolerance".into());
        return Ok(solved);
    };
    match cautious(section, &worse, &solved.main, &bare, &settings, progress) {
        Ok(traces) => solved.cautious = traces,
        Err(stopped @ MarchError::Stopped { .. }) => return Err(stopped),
        // The answer itself stands.
        Err(error) => solved.without_cautious = Some(format!("no cautious answer was found: {error}")),
    }
    Ok(solved)
}

/// Solves under the cautious assumptions. A worse line may be held by heat that never pauses and so start warmer than the
/// cold end of the stated line's cycle: where heat matters for the start only, the cold end of a cycle is tried as well.
fn cautious(
    section: &Section,
    worse: &Section,
    main: &Trace,
    plan: &Plan,
    settings: &Settings,
    progress: &mut dyn FnMut(f64) -> bool,
) -> Result<Vec<Trace>, MarchError> {
    let mut traces = vec![march::run(worse, plan, settings, progress)?];
    let cycles = |trace: &Trace| matches!(trace.hold, Hold::Cycle { .. });
    if cycles(main) && !cycles(&traces[0]) && supply_stays_lost(worse) {
        let mut cycling = worse.clone();
        for (heater, stated) in cycling.heaters.iter_mut().zip(&section.heaters) {
            // As much more heat as is lost more: the thermostat is on for the same share of the time.
            heater.output_w_per_m = CAUTIOUS_CONDUCTIVITY * stated.output_w_per_m;
        }
        if let Ok(trace) = march::run(&cycling, plan, settings, progress)
            && cycles(&trace)
        {
            traces.push(trace);
        }
    }
    Ok(traces)
}

/// The answers from the warm end of the thermostat's cycle, where a line is held by one.
fn from_the_warm_end(
    section: &Section,
    asked: &[Asked],
    plan: &Plan,
    hold: Hold,
    options: &Options,
    progress: &mut dyn FnMut(f64) -> bool,
) -> Result<Option<OtherStart>, MarchError> {
    if !matches!(hold, Hold::Cycle { .. }) || asked.is_empty() {
        return Ok(None);
    }
    let plan = Plan { cycle_phase: CyclePhase::AfterOff, record: without_steps(&plan.record), ..plan.clone() };
    let solved = solve(section, &plan, options, progress)?;
    let description = "the warm end of the cycle, just after the thermostat switched off".into();
    Ok(Some(OtherStart { description, answers: answers(section, asked, &solved) }))
}

/// Whether no heater gives heat after the start.
fn supply_stays_lost(section: &Section) -> bool {
    let mut supply = section.events.iter().filter_map(|event| match event.change {
        Change::Supply(back) => Some((event.time_s, back)),
        _ => None,
    });
    supply.next() == Some((0.0, false)) && supply.all(|(_, back)| !back)
}

fn without_steps(recording: &Recording) -> Recording {
    match recording {
        Recording::Steps => Recording::Ends,
        other => other.clone(),
    }
}

/// Whether a layer counts as lagging.
fn is_lagging(layer: &crate::section::Layer) -> bool {
    layer.material.freezing_k.is_none() && layer.material.conductivity(283.15) < LAGGING_CONDUCTS_LESS
}

/// The section under the cautious assumptions: lagging that conducts more, heaters at their lower tolerance. `None` where
/// that changes nothing.
fn cautious_section(section: &Section) -> Option<Section> {
    let lagged = section.layers.iter().any(is_lagging);
    let tolerant = section.heaters.iter().any(|heater| heater.output_low_w_per_m != heater.output_w_per_m);
    if !lagged && !tolerant {
        return None;
    }
    let mut section = section.clone();
    for layer in &mut section.layers {
        if is_lagging(layer) {
            layer.material = Arc::new(layer.material.conducting(CAUTIOUS_CONDUCTIVITY));
        }
    }
    for event in &mut section.events {
        if let Change::HeaterOutput(heater, output_w_per_m) = &mut event.change {
            let heater = &section.heaters[*heater];
            if heater.output_w_per_m > 0.0 {
                *output_w_per_m *= heater.output_low_w_per_m / heater.output_w_per_m;
            }
        }
    }
    for heater in &mut section.heaters {
        heater.output_w_per_m = heater.output_low_w_per_m;
    }
    Some(section)
}

/// Numerical error of a number from its three solutions.
fn numerical_error(main: f64, refined: f64, tight: f64) -> f64 {
    ERROR_FACTOR * ((main - refined).abs() + (main - tight).abs())
}

/// Outcome of a watch that did not fire.
fn missed(end: End) -> Outcome {
    match end {
        End::Settled | End::Answered => Outcome::SettlesShort,
        End::Until => Outcome::RunEnded,
        End::WeatherEnded => Outcome::WeatherEnded,
    }
}

/// Turns watched conditions into answers.
fn answers(section: &Section, asked: &[Asked], solved: &Solved) -> Vec<Answer> {
    (0..asked.len()).map(|index| answer(section, &asked[index], index, solved)).collect()
}

fn answer(section: &Section, asked: &Asked, index: usize, solved: &Solved) -> Answer {
    let liquidus = section.content.material.as_ref().and_then(|material| material.freezing_k).map(|range| range.1);
    let (place, unit, limit, offset) = match asked.condition {
        Condition::Below(place, kelvin) | Condition::Above(place, kelvin) => {
            (section.place_name(place), "degC", kelvin - 273.15, 273.15)
        }
        Condition::Frozen(0.0) => {
            let point = liquidus.unwrap_or(f64::NAN);
            (section.place_name(Place::ContentSurface), "degC", point - 273.15, 273.15)
        }
        Condition::Frozen(share) | Condition::Thawed(share) => ("content".into(), "-", share, 0.0),
    };
    let sighting = |trace: &Trace| -> Sighting { trace.sightings[index] };
    let main = sighting(&solved.main);
    let others = solved.refined.as_ref().map(sighting).zip(solved.tight.as_ref().map(sighting));
    let mut outcome = if main.time_s.is_some() { Outcome::Reached } else { missed(solved.main.end) };
    let mut error_s = None;
    let mut closest_error = None;
    let mut earliest_time_s = None;
    if let Some((refined, tight)) = others {
        let error = numerical_error(main.closest_value, refined.closest_value, tight.closest_value);
        // A march that ends at rest leaves out what little would still have come.
        let left_out = match (solved.main.end, unit) {
            (End::Settled, "degC") => march::SETTLED_K,
            (End::Settled, _) => march::SETTLED_SHARE,
            _ => 0.0,
        };
        match (main.time_s, refined.time_s, tight.time_s) {
            (Some(main), Some(refined), Some(tight)) => error_s = Some(numerical_error(main, refined, tight)),
            (None, None, None) => {
                let error = error + left_out;
                closest_error = Some(error);
                if (main.closest_value - offset - limit).abs() <= error {
                    outcome = Outcome::TooClose;
                }
            }
            // Some solutions pass the limit and some do not: their difference is all that decides.
            (main, refined, tight) => {
                outcome = Outcome::TooClose;
                closest_error = main.is_none().then_some(error + left_out);
                earliest_time_s = [main, refined, tight].into_iter().flatten().min_by(f64::total_cmp);
            }
        }
    }
    let reached = main.time_s.is_some();
    // Less heat and worse lagging are the hopeful side of a limit on heat.
    let hopeful = asked.danger && matches!(asked.condition, Condition::Above(..));
    let cautious = (!hopeful).then(|| worst(&solved.cautious, index, asked.danger)).flatten();
    // The cautious answer is never the more hopeful of the two.
    let cautious_time_s = cautious.and_then(|(time_s, _)| match (time_s, main.time_s) {
        (Some(cautious), Some(main)) if asked.danger => Some(cautious.min(main)),
        (Some(cautious), Some(main)) => Some(cautious.max(main)),
        (None, Some(main)) if asked.danger => Some(main),
        (time_s, _) => time_s,
    });
    Answer {
        name: asked.name.clone(),
        outcome,
        time_s: main.time_s,
        earliest_time_s,
        error_s,
        value: None,
        unit: unit.into(),
        error: None,
        place,
        limit_value: Some(limit),
        closest_value: (!reached).then_some(main.closest_value - offset),
        closest_error,
        closest_time_s: (!reached).then_some(main.closest_time_s),
        cautious_time_s,
        cautious_outcome: cautious
            .map(|(_, end)| if cautious_time_s.is_some() { Outcome::Reached } else { missed(end) }),
        danger: asked.danger,
    }
}

/// The worst of several solutions for one watch: the earliest danger, the latest recovery.
fn worst(traces: &[Trace], index: usize, danger: bool) -> Option<(Option<f64>, End)> {
    let key = |time_s: Option<f64>| time_s.unwrap_or(f64::INFINITY);
    traces.iter().map(|trace| (trace.sightings[index].time_s, trace.end)).min_by(|a, b| {
        let order = key(a.0).total_cmp(&key(b.0));
        if danger { order } else { order.reverse() }
    })
}

/// The findings that every marched question shares.
fn findings(
    verb: &'static str,
    loaded: &Loaded,
    section: Section,
    solved: Solved,
    answers: Vec<Answer>,
    options: &Options,
) -> Findings {
    let trace = solved.main;
    let mut assumptions = told::assumptions(loaded, &section, &trace);
    if !options.quick {
        assumptions.extend(told::cautious_answer(&section, &answers, solved.without_cautious.as_deref()));
    }
    assumptions.extend(told::methods(options.quick));
    Findings {
        verb,
        input_digest: loaded.digest.clone(),
        headline: Vec::new(),
        answers,
        other_start: None,
        governs: told::governs(&section, &trace),
        assumptions,
        cautions: Vec::new(),
        start: trace.start,
        energy: trace.energy,
        effort: trace.effort,
        history: trace.history,
        marks: trace.marks,
        answered: true,
        section,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::case;
    use crate::section::Event;
    use std::path::Path;

    const LINE: &str = r#"
[content]
material = "water"
state = "stirred"
[[layer]]
name = "wall"
material = "carbon steel"
pipe = "DN 25, schedule 40"
[[layer]]
name = "lagging"
material = "mineral wool"
thickness = "30 mm"
[[heater]]
name = "trace"
face = "wall outside"
output = { value = "8 W/m", tolerance = "10 %" }
[outside]
air = "-10 degC"
film = "15 W/(m2 K)"
[start]
temperature = "20 degC"
[[event]]
time = "0 h"
supply = "lost"
[[limit]]
name = "low"
where = "wall outside"
below = "5 degC"
[[limit]]
name = "hot"
where = "wall outside"
above = "30 degC"
"#;

    fn section() -> Section {
        case::load_text("test", LINE, Path::new(""), &[]).unwrap_or_else(|faults| panic!("{faults}")).section
    }

    fn solved(section: &Section) -> (Vec<Asked>, Solved) {
        let asked = limits_asked(section);
        let plan = plan(&asked, LONGEST_S, CyclePhase::BeforeOn, Recording::Ends);
        let solved = solve(section, &plan, &Options::default(), &mut |_| true).unwrap();
        (asked, solved)
    }

    #[test]
    fn solutions_that_disagree_about_a_limit_leave_it_open_from_the_earliest_on() {
        let section = section();
        let (asked, mut solved) = solved(&section);
        let whole = answer(&section, &asked[0], 0, &solved);
        assert_eq!(whole.outcome, Outcome::Reached);
        assert!(whole.earliest_time_s.is_none() && whole.error_s.is_some());

        solved.main.sightings[0].time_s = None;
        let tight = solved.tight.as_mut().unwrap();
        tight.sightings[0].time_s = Some(100.0);
        let open = answer(&section, &asked[0], 0, &solved);
        assert_eq!(open.outcome, Outcome::TooClose);
        assert_eq!(open.earliest_time_s, Some(100.0));
        assert!(told::sentence(&open).contains("too close to call; if it happens, not before about 100 s"));
    }

    #[test]
    fn a_closest_approach_within_its_own_error_is_too_close_to_call() {
        let section = section();
        let (asked, mut solved) = solved(&section);
        let (main, limit) = (&mut solved.main, 303.15);
        for trace in [Some(main), solved.refined.as_mut(), solved.tight.as_mut()].into_iter().flatten() {
            trace.sightings[1].closest_value = limit - 0.1;
        }
        assert_eq!(answer(&section, &asked[1], 1, &solved).outcome, Outcome::SettlesShort);
        solved.refined.as_mut().unwrap().sightings[1].closest_value = limit - 0.04;
        let open = answer(&section, &asked[1], 1, &solved);
        assert_eq!(open.outcome, Outcome::TooClose);
        assert!((open.closest_error.unwrap() - ERROR_FACTOR * 0.06 - march::SETTLED_K).abs() < 1e-9);
    }

    #[test]
    fn the_cautious_answer_is_worse_and_never_flatters() {
        let section = section();
        let (asked, solved) = solved(&section);
        let low = answer(&section, &asked[0], 0, &solved);
        assert!(low.cautious_time_s.unwrap() < 0.9 * low.time_s.unwrap(), "{low:?}");
        let hot = answer(&section, &asked[1], 1, &solved);
        assert_eq!((hot.cautious_time_s, hot.cautious_outcome), (None, None), "less heat flatters a limit on heat");
    }

    #[test]
    fn worse_is_what_conducts_more_and_heats_less() {
        let mut section = section();
        section.events.push(Event { time_s: 60.0, change: Change::HeaterOutput(0, 20.0) });
        let worse = cautious_section(&section).unwrap();
        let ratio = |layer: usize| {
            worse.layers[layer].material.conductivity(283.15) / section.layers[layer].material.conductivity(283.15)
        };
        assert_eq!(ratio(0), 1.0);
        assert!((ratio(1) - CAUTIOUS_CONDUCTIVITY).abs() < 1e-12);
        assert!((worse.heaters[0].output_w_per_m - 7.2).abs() < 1e-12);
        assert!(matches!(worse.events[1].change, Change::HeaterOutput(0, watts) if (watts - 18.0).abs() < 1e-12));
        // Nothing to be worse: no cautious answer, rather than the same one twice.
        section.layers.pop();
        section.heaters[0].output_low_w_per_m = section.heaters[0].output_w_per_m;
        assert!(cautious_section(&section).is_none());
    }

    #[test]
    fn heat_counts_for_the_start_only_where_the_supply_stays_lost() {
        let mut section = section();
        assert!(supply_stays_lost(&section));
        section.events.push(Event { time_s: 60.0, change: Change::Supply(true) });
        assert!(!supply_stays_lost(&section));
        section.events.clear();
        assert!(!supply_stays_lost(&section));
    }

    #[test]
    fn whoever_watches_may_stop_it() {
        let section = section();
        let asked = limits_asked(&section);
        let plan = plan(&asked, LONGEST_S, CyclePhase::BeforeOn, Recording::Ends);
        let stopped = solve(&section, &plan, &Options::default(), &mut |_| false).map(|_| ()).unwrap_err();
        assert!(matches!(stopped, MarchError::Stopped { .. }), "{stopped}");
    }
}
