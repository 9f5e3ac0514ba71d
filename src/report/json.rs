//! `answer.json`: everything that was found, for other programs.

use super::text::degc;
use crate::answer::Findings;
use serde_json::{Value, json};

/// The findings as one JSON object. Temperatures are in degC, times in seconds, energies in J per metre of line;
/// what does not apply is null.
pub fn answer_json(findings: &Findings) -> Value {
    let start = &findings.start;
    let faces: Vec<Value> = start
        .faces
        .iter()
        .map(|(name, temperature_k)| json!({ "name": name, "temperature_degC": degc(*temperature_k) }))
        .collect();
    let mut object = json!({
        "verb": findings.verb,
        "title": findings.section.title,
        "version": env!("CARGO_PKG_VERSION"),
        "input_digest": findings.input_digest,
        "answered": findings.answered,
        "headline": findings.headline,
        "answers": findings.answers,
        "governs": findings.governs,
        "start": {
            "faces": faces,
            "centre_degC": start.centre_k.map(degc),
            "content_mean_degC": start.content_mean_k.map(degc),
            "frozen_fraction": start.frozen_share,
            "heater_w_per_m": start.heater_w_per_m,
            "lost_w_per_m": start.lost_w_per_m,
            "into_content_w_per_m": start.into_content_w_per_m,
        },
        "energy": findings.energy,
        "effort": findings.effort,
        "marks": findings.marks.iter().map(|mark| json!({ "time_s": mark.time_s, "label": mark.label })).collect::<Vec<_>>(),
        "assumptions": findings.assumptions,
        "cautions": findings.cautions,
    });
    if let Some(line) = line_json(findings) {
        object["line"] = line;
    }
    if let Some(other) = &findings.other_start {
        object["other_start"] = json!({ "description": other.description, "answers": other.answers });
    }
    object
}

/// Tag and length, where the case states any.
fn line_json(findings: &Findings) -> Option<Value> {
    let line = &findings.section.line;
    (line.tag.is_some() || line.length_m.is_some()).then(|| {
        json!({
            "tag": line.tag,
            "length_m": line.length_m,
            "extra_length_m": line.extra_length_m,
            "effective_length_m": line.effective_length_m(),
        })
    })
}
