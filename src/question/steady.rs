//! `steady`: where each face sits, where the heat goes, and the watts that hold each target.

use super::{ERROR_FACTOR, FINER_MESH, Options, QuestionError, cautions, cautious_section, told};
use crate::answer::{Answer, Findings, Outcome};
use crate::case::Loaded;
use crate::history::{Effort, Energy};
use crate::march::MarchError;
use crate::march::steady::{Steady, balance, factor_that_holds};
use crate::section::{Section, Target};

/// Full output of each heater per metre of line [W/m].
fn full_output(section: &Section) -> Vec<f64> {
    section.heaters.iter().map(|heater| heater.output_per_line_w_per_m()).collect()
}

fn value_answer(name: String, value: f64, error: Option<f64>, unit: &str, place: String) -> Answer {
    Answer {
        name,
        outcome: Outcome::Reached,
        time_s: None,
        earliest_time_s: None,
        error_s: None,
        value: Some(value),
        unit: unit.into(),
        error,
        place,
        limit_value: None,
        closest_value: None,
        closest_error: None,
        closest_time_s: None,
        cautious_time_s: None,
        cautious_outcome: None,
        danger: false,
    }
}

pub(super) fn ask(loaded: &Loaded, options: &Options) -> Result<Findings, QuestionError> {
    let section = loaded.section.clone();
    let output = full_output(&section);
    let total: f64 = output.iter().sum();
    let solution = balance(&section, &output, options.settings.refinement)?;
    let finer =
        if options.quick { None } else { Some(balance(&section, &output, options.settings.refinement * FINER_MESH)?) };
    let mut findings = Findings {
        verb: "steady",
        input_digest: loaded.digest.clone(),
        headline: vec![heat_split(&section, &solution, total)],
        answers: Vec::new(),
        other_start: None,
        governs: told::resistances(&solution.resistances),
        assumptions: told::inputs(loaded, &section),
        cautions: Vec::new(),
        start: solution.snapshot.clone(),
        // Nothing runs through time; what the conductance matrix cannot account for stands for the residual.
        energy: Energy {
            residual_relative: solution.imbalance_w_per_m
                / total.abs().max(solution.snapshot.lost_w_per_m.abs()).max(1e-3),
            ..Energy::default()
        },
        effort: Effort { cells: solution.cells, ..Effort::default() },
        history: solution.history.clone(),
        marks: Vec::new(),
        answered: true,
        section,
    };
    findings.assumptions.insert(
        0,
        "At rest under the outside of 0 h, every heater on without pause at its stated output: thermostats do not act, so that \
         'with the given output' is also what a thermostat stuck on comes to."
            .into(),
    );
    let beyond = told::beyond_tables(&findings.section, &findings.history);
    findings.assumptions.extend(beyond);
    findings.assumptions.push(match options.quick {
        true => "Solved once (--quick): the numerical error is not known and no cautious answer was worked out.".into(),
        false => format!(
            "The numerical error is {ERROR_FACTOR:.0} times the change on a mesh twice as fine, and the heat that the conductance \
             matrix cannot account for. It is the solution's, not the accuracy of the inputs."
        ),
    });
    if !options.quick && !findings.section.targets.is_empty() {
        let about = told::cautious_meaning(&findings.section);
        findings.assumptions.extend(about);
    }
    for target in &findings.section.targets.clone() {
        target_answers(&mut findings, target, &solution, finer.as_ref(), total, options)?;
    }
    if findings.section.targets.is_empty() {
        findings.headline.push("The case names no target, so no output that holds one was looked for.".into());
    }
    findings.cautions = cautions::that_apply(&findings);
    Ok(findings)
}

fn heat_split(section: &Section, solution: &Steady, total: f64) -> String {
    let lost = solution.snapshot.lost_w_per_m;
    let mut text = format!(
        "At {} °C outside the heaters give {} W per metre of line and {} W/m are lost",
        told::degrees(section.outside.temperature_k.at(0.0)),
        told::plain(total),
        told::plain(lost)
    );
    let into = solution.snapshot.into_content_w_per_m;
    if into.abs() > 1e-6 * lost.abs().max(1e-6) {
        text.push_str(&format!(
            ", {} W/m pass {} the content",
            told::plain(into.abs()),
            if into > 0.0 { "into" } else { "out of" }
        ));
    }
    if let Some(length) = section.line.effective_length_m() {
        text.push_str(&format!("; {} kW for the line's {} m", told::plain(lost * length / 1e3), told::plain(length)));
    }
    text + "."
}

fn target_answers(
    findings: &mut Findings,
    target: &Target,
    solution: &Steady,
    finer: Option<&Steady>,
    total: f64,
    options: &Options,
) -> Result<(), QuestionError> {
    let section = findings.section.clone();
    let place = section.place_name(target.place);
    let wanted = told::degrees(target.at_least_k);
    let refinement = options.settings.refinement;
    let given = solution.temperature(target.place);
    // Heat unaccounted for would raise the place by its share of the whole way out.
    let way_out: f64 = solution.resistances.iter().map(|(_, resistance)| resistance).sum();
    let given_error = finer.map(|finer| {
        ERROR_FACTOR * (given - finer.temperature(target.place)).abs() + solution.imbalance_w_per_m * way_out
    });
    let held = |section: &Section, refinement: f64| {
        let full: f64 = full_output(section).iter().sum();
        factor_that_holds(section, target.place, target.at_least_k, refinement)
            .map(|(factor, steady)| (factor * full, steady.imbalance_w_per_m))
    };
    match held(&section, refinement) {
        Ok((watts, imbalance)) => {
            let error = if options.quick {
                None
            } else {
                Some(ERROR_FACTOR * (watts - held(&section, refinement * FINER_MESH)?.0).abs() + imbalance)
            };
            let mut text = if watts <= 0.0 {
                format!("'{}' ({place} at {wanted} °C) needs no heat in this weather", target.name)
            } else {
                format!("{} W per metre of line hold '{}' ({place} at {wanted} °C)", told::round_up(watts), target.name)
            };
            if watts > 0.0 {
                let runs: f64 = section.heaters.iter().map(|heater| heater.runs).sum();
                if section.heaters.len() == 1 && runs != 1.0 {
                    text.push_str(&format!(", {} W per metre of heater", told::round_up(watts / runs)));
                }
                if let Some(length) = section.line.effective_length_m() {
                    text.push_str(&format!(", {} kW in all", told::round_up(watts * length / 1e3)));
                }
                text.push_str(&format!("; that is {} % of the given output", told::round_up(100.0 * watts / total)));
                if watts > total {
                    text.push_str(", which does not hold it");
                }
                if !options.quick
                    && let Some(worse) = cautious_section(&section)
                {
                    let (cautious, _) = held(&worse, refinement)?;
                    let low: f64 = full_output(&worse).iter().sum();
                    text.push_str(&format!(" (cautious: {} W/m", told::round_up(cautious)));
                    if low < total {
                        text.push_str(&format!(" of {} W/m at the lower tolerance", told::plain(low)));
                    }
                    if cautious > low && watts <= total {
                        text.push_str(", which would not hold it");
                    }
                    text.push(')');
                }
            }
            findings.headline.push(text + ".");
            // Below zero the place would have to be cooled to sit at the target: no heat is needed.
            findings.answers.push(value_answer(
                format!("output that holds {}", target.name),
                watts.max(0.0),
                error,
                "W/m",
                place.clone(),
            ));
        }
        Err(MarchError::NoSteadyState { reason }) => {
            findings.headline.push(format!("'{}': no output holds it: {reason}.", target.name));
            findings.answered = false;
        }
        Err(error) => return Err(error.into()),
    }
    findings
        .headline
        .push(format!("With the given output on without pause, {place} comes to {} °C.", told::degrees(given)));
    findings.answers.push(value_answer(
        format!("{place} with the given output"),
        given - 273.15,
        given_error,
        "degC",
        place,
    ));
    Ok(())
}
