//! `report.html`: one page that stands alone, reads on a screen and prints on A4. The decision comes first.

use super::cross_section::{cross_section, seat_words};
use super::drawing::{DrawingError, svg};
use super::figure::{self, Figure};
use super::text::{aligned, clean, degc, figures, fixed};
use super::{duration_words, font};
use crate::answer::{Answer, Findings, Outcome};
use crate::material::Material;
use crate::section::{Change, ContentState, Section, Start};
use base64::Engine;
use base64::engine::general_purpose::STANDARD;
use maud::{DOCTYPE, Markup, PreEscaped, html};

const STYLE: &str = include_str!("page.css");

/// The page as HTML. It holds everything that it shows: no file or network is needed beside it.
///
/// # Errors
/// Where a figure cannot be drawn.
pub fn page(findings: &Findings) -> Result<String, DrawingError> {
    let section = &findings.section;
    let drawn =
        figure::all(findings).iter().map(|figure| Ok((figure.clone(), svg(figure)?))).collect::<Result<Vec<_>, _>>()?;
    let title = clean(&section.title);
    let page = html! {
        (DOCTYPE)
        html lang="en" {
            head {
                meta charset="utf-8";
                meta name="viewport" content="width=device-width, initial-scale=1";
                meta name="generator" content=(concat!("Stillwarm ", env!("CARGO_PKG_VERSION")));
                title { (title) ": " (findings.verb) }
                style { (PreEscaped(font_faces())) (PreEscaped(STYLE)) }
            }
            body {
                header {
                    p.kind { (kind(findings.verb)) @if let Some(tag) = &section.line.tag { " · line " (clean(tag)) } }
                    h1 { (title) }
                }
                (decision(findings))
                (answers(findings))
                (governs_and_cautions(findings))
                (line_as_solved(findings))
                (figures_of(&drawn))
                (audit(findings))
                (assumptions(findings))
                (provenance(findings))
            }
        }
    };
    Ok(page.into_string())
}

/// The bundled font within the page, so that texts of figures keep their widths.
fn font_faces() -> String {
    [("normal", font::REGULAR), ("bold", font::SEMI_BOLD)]
        .map(|(weight, bytes)| {
            let data = STANDARD.encode(bytes);
            format!(
                "@font-face{{font-family:\"Stillwarm Figures\";font-weight:{weight};src:url(data:font/otf;base64,{data}) format(\"opentype\")}}\n"
            )
        })
        .concat()
}

fn kind(verb: &str) -> String {
    match verb {
        "steady" => "Steady state".into(),
        "run" => "Run of a schedule".into(),
        "warmup" => "Warm-up".into(),
        "outage" => "Loss of supply".into(),
        other => clean(other),
    }
}

fn decision(findings: &Findings) -> Markup {
    html! {
        section.decision {
            @for (index, line) in findings.headline.iter().enumerate() {
                @if index == 0 { p.first { (clean(line)) } } @else { p { (clean(line)) } }
            }
        }
    }
}

/// The answers as a table; which columns it has depends on what there is to show.
fn answers(findings: &Findings) -> Markup {
    if findings.answers.is_empty() {
        return html! {};
    }
    html! {
        section {
            h2 { "Answers" }
            (answer_table(&findings.answers))
            p.small {
                @if findings.answers.iter().any(|answer| answer.time_s.is_some()) { "Times to a danger are rounded down, times to recover up. " }
                @if findings.answers.iter().any(|answer| answer.cautious_outcome.is_some()) {
                    "The cautious answer takes worse assumptions, stated below. "
                }
                "The numerical error is that of the solution only: it says nothing of the accuracy of the inputs."
            }
            @if let Some(other) = &findings.other_start {
                h3 { "From the other end of the cycle: " (clean(&other.description)) }
                (answer_table(&other.answers))
            }
        }
    }
}

fn answer_table(answers: &[Answer]) -> Markup {
    let timed = answers.iter().any(|answer| answer.time_s.is_some() || answer.value.is_none());
    let valued = answers.iter().any(|answer| answer.value.is_some());
    let cautious = answers.iter().any(|answer| answer.cautious_outcome.is_some());
    html! {
        table.answers {
            thead { tr {
                th { "Question" } th { "Where" } th { "Limit" }
                @if timed { th { "When" } th.number { "Hours" } }
                @if valued { th.number { "Value" } }
                @if cautious { th { "Cautious" } }
                th.small { "Numerical error" }
            } }
            tbody {
                @for answer in answers {
                    tr {
                        th scope="row" { (clean(&answer.name)) }
                        td { (clean(&answer.place)) }
                        td.tight { (quantity(answer.limit_value, &answer.unit)) }
                        @if timed {
                            td.key { (when(answer)) }
                            td.number { @if let Some(time_s) = answer.time_s { (hours(time_s, answer.danger)) } }
                        }
                        @if valued { td.number.key { (quantity(answer.value, &answer.unit)) } }
                        @if cautious { td.tight[answer.cautious_time_s.is_some()] { (cautious_words(answer)) } }
                        td.small { (error_words(answer)) }
                    }
                }
            }
        }
    }
}

/// Hours with two decimals, rounded to the safe side.
fn hours(time_s: f64, danger: bool) -> String {
    let hundredths = time_s / 36.0;
    let hundredths = if danger { hundredths.floor() } else { hundredths.ceil() };
    format!("{:.2}", hundredths / 100.0)
}

fn when(answer: &Answer) -> Markup {
    match (answer.time_s, answer.outcome) {
        (Some(time_s), Outcome::TooClose) => {
            html! { "about " (duration_words(time_s, answer.danger)) ", too close to call" }
        }
        (Some(time_s), _) => html! { (duration_words(time_s, answer.danger)) },
        (None, outcome) => html! {
            (outcome_words(outcome))
            @if let Some(value) = answer.closest_value {
                br;
                span.small { "closest " (quantity(Some(value), &answer.unit))
                    @if let Some(time_s) = answer.closest_time_s { " at " (duration_words(time_s, answer.danger)) }
                }
            }
        },
    }
}

fn outcome_words(outcome: Outcome) -> &'static str {
    match outcome {
        Outcome::Reached => "reached",
        Outcome::SettlesShort => "never: the line settles before it",
        Outcome::RunEnded => "not within the run",
        Outcome::WeatherEnded => "not before the weather's table ends",
        Outcome::TooClose => "too close to call",
    }
}

fn cautious_words(answer: &Answer) -> String {
    match (answer.cautious_time_s, answer.cautious_outcome) {
        (Some(time_s), _) => duration_words(time_s, answer.danger),
        (None, Some(outcome)) => outcome_words(outcome).into(),
        (None, None) => String::new(),
    }
}

fn error_words(answer: &Answer) -> String {
    let mut words = Vec::new();
    if let Some(error_s) = answer.error_s {
        words.push(if error_s < 120.0 {
            format!("± {} s", figures(error_s, 2))
        } else {
            format!("± {} min", figures(error_s / 60.0, 2))
        });
    }
    if let Some(error) = answer.error {
        words.push(format!("± {}", quantity(Some(error), if answer.unit == "degC" { "K" } else { &answer.unit })));
    }
    if words.is_empty()
        && let Some(error) = answer.closest_error
    {
        words.push(format!(
            "± {} on the closest",
            quantity(Some(error), if answer.unit == "degC" { "K" } else { &answer.unit })
        ));
    }
    if words.is_empty() { "–".into() } else { words.join(", ") }
}

/// A value with its unit as people write it; a share as a percentage.
fn quantity(value: Option<f64>, unit: &str) -> String {
    let Some(value) = value else { return String::new() };
    match unit {
        "-" | "1" | "" => format!("{} %", figures(100.0 * value, 3)),
        "degC" => format!("{} °C", figures(value, 4)),
        other => format!("{} {}", figures(value, 4), clean(other)),
    }
}

fn governs_and_cautions(findings: &Findings) -> Markup {
    html! {
        @if !findings.governs.is_empty() {
            section { h2 { "What governs it" } ul { @for line in &findings.governs { li { (clean(line)) } } } }
        }
        @if !findings.cautions.is_empty() {
            section.cautions { h2 { "Cautions" } ul { @for line in &findings.cautions { li { (clean(line)) } } } }
        }
    }
}

fn line_as_solved(findings: &Findings) -> Markup {
    let section = &findings.section;
    html! {
        section.together {
            h2 { "The line as solved" }
            (cross_section(section))
        }
        section {
            (section_facts(section))
            @if !section.layers.is_empty() { h3 { "Layers, from the inside outwards" } (layer_table(section)) }
            @if !materials(section).is_empty() { h3 { "Materials" } (material_table(section)) }
            @if !section.heaters.is_empty() { h3 { "Heaters" } (heater_table(section)) }
        }
        section.together {
            h2 { @if findings.verb == "steady" { "The settled state" } @else { "State at the start" } }
            (start_state(findings))
        }
    }
}

fn section_facts(section: &Section) -> Markup {
    let line = &section.line;
    html! {
        dl {
            @if let Some(tag) = &line.tag { dt { "Tag" } dd { (clean(tag)) } }
            @if let Some(length_m) = line.length_m {
                dt { "Length" }
                dd { (figures(length_m, 4)) " m"
                    @if line.extra_length_m > 0.0 { " and " (figures(line.extra_length_m, 4)) " m for valves, flanges and supports" } }
            }
            dt { "Content" } dd { (content_words(section)) }
            dt { "Outside" } dd { (outside_words(section)) }
            dt { "Start" } dd { (start_words(section)) }
            @if !section.events.is_empty() {
                dt { "Events" }
                dd { @for event in &section.events { (duration_words(event.time_s, true)) ": " (change_words(section, &event.change)) br; } }
            }
        }
    }
}

fn state_words(state: ContentState) -> String {
    match state {
        ContentState::Still => "still: heat moves by conduction only".into(),
        ContentState::Stirred { film: None } => "stirred: one temperature while liquid".into(),
        ContentState::Stirred { film: Some(film) } => {
            format!("stirred: one temperature while liquid, film {} W/(m² K)", figures(film, 4))
        }
        ContentState::Flowing { temperature_k, film } => {
            format!("flowing at {} °C, film {} W/(m² K)", figures(degc(temperature_k), 4), figures(film, 4))
        }
        ContentState::Empty => "empty".into(),
        ContentState::HeldAt { temperature_k } => format!("surface held at {} °C", figures(degc(temperature_k), 4)),
    }
}

fn content_words(section: &Section) -> String {
    match &section.content.material {
        Some(material) => format!("{}, {}", clean(&material.name), state_words(section.content.state)),
        None => state_words(section.content.state),
    }
}

fn outside_words(section: &Section) -> String {
    use crate::series::Series;
    let temperature = match &section.outside.temperature_k {
        Series::Constant(kelvin) => format!("{} °C", figures(degc(*kelvin), 4)),
        table @ Series::Table { source, .. } => {
            let (low, high) = table.range();
            format!("{} to {} °C over time ({})", figures(degc(low), 3), figures(degc(high), 3), clean(source))
        }
    };
    match section.outside.film {
        Some(film) => format!("air at {temperature}, film {} W/(m² K)", figures(film, 4)),
        None => format!("surface held at {temperature}"),
    }
}

fn start_words(section: &Section) -> String {
    match section.start {
        Start::Uniform(kelvin) => format!("everything at {} °C", figures(degc(kelvin), 4)),
        Start::Hold => "settled under heaters and controls".into(),
        Start::Reading { place, temperature_k } => {
            format!("{} read at {} °C", clean(&section.place_name(place)), figures(degc(temperature_k), 4))
        }
    }
}

fn change_words(section: &Section, change: &Change) -> String {
    let heater = |index: usize| clean(&section.heaters[index].name);
    match change {
        Change::Supply(false) => "supply lost".into(),
        Change::Supply(true) => "supply back".into(),
        Change::HeaterTripped(index) => format!("{} tripped", heater(*index)),
        Change::HeaterReset(index) => format!("{} reset", heater(*index)),
        Change::HeaterOutput(index, output) => format!("{} gives {} W/m", heater(*index), figures(*output, 4)),
        Change::OutsideTemperature(crate::series::Series::Constant(kelvin)) => {
            format!("air at {} °C", figures(degc(*kelvin), 4))
        }
        Change::OutsideTemperature(_) => "air follows another table".into(),
        Change::OutsideFilm(film) => format!("outside film {} W/(m² K)", figures(*film, 4)),
        Change::Content(state) => format!("content {}", state_words(*state)),
    }
}

fn layer_table(section: &Section) -> Markup {
    let millimetres = |metres: f64| fixed(metres * 1e3, 2);
    html! {
        table {
            thead { tr {
                th { "Layer" } th { "Material" } th.number { "Inside Ø [mm]" } th.number { "Outside Ø [mm]" } th.number { "Thickness [mm]" }
                th { "Contact with what lies inside it" }
            } }
            tbody {
                @for layer in &section.layers {
                    tr {
                        th scope="row" { (clean(&layer.name)) }
                        td { (clean(&layer.material.name)) }
                        td.number { (millimetres(2.0 * layer.inside_radius_m)) }
                        td.number { (millimetres(2.0 * layer.outside_radius_m)) }
                        td.number { (millimetres(layer.outside_radius_m - layer.inside_radius_m)) }
                        td { (contact_words(layer)) }
                    }
                }
            }
        }
    }
}

fn contact_words(layer: &crate::section::Layer) -> String {
    let resistance = layer.contact.resistance_m_k_per_w;
    if resistance == 0.0 {
        return "perfect".into();
    }
    let conductance = 1.0 / (2.0 * std::f64::consts::PI * layer.inside_radius_m * resistance);
    let figures_ = format!("{} W/(m² K), {} m K/W", figures(conductance, 4), figures(resistance, 4));
    match &layer.contact.words {
        Some(words) => format!(
            "“{}”: {figures_}; published range {} to {} W/(m² K)",
            clean(&words.words),
            figures(words.low, 3),
            figures(words.high, 3)
        ),
        None => figures_,
    }
}

/// Every material of the section, each once, the content's first.
fn materials(section: &Section) -> Vec<&Material> {
    let mut materials: Vec<&Material> = Vec::new();
    let of_layers = section.layers.iter().map(|layer| layer.material.as_ref());
    for material in section.content.material.as_deref().into_iter().chain(of_layers) {
        if !materials.iter().any(|held| held.name == material.name && *held == material) {
            materials.push(material);
        }
    }
    materials
}

fn material_table(section: &Section) -> Markup {
    html! {
        table {
            thead { tr {
                th { "Material" } th.number { "k at 0 °C [W/(m K)]" } th.number { "ρ [kg/m³]" } th { "Freezes" } th { "Source" }
            } }
            tbody {
                @for material in materials(section) {
                    tr {
                        th scope="row" { (clean(&material.name)) }
                        td.number { (figures(material.conductivity(super::text::ZERO_DEGC_K), 3)) }
                        td.number { (figures(material.density, 4)) }
                        td { (freezing_words(material)) }
                        td.source {
                            (clean(&material.provenance.source))
                            @if material.provenance.from_memory { " " strong.flag { "from memory" } }
                            @if material.provenance.overrides_built_in { " " strong.flag { "replaces the built-in material of this name" } }
                            @else if material.provenance.own { " " span.flag { "defined in the case" } }
                        }
                    }
                }
            }
        }
    }
}

fn freezing_words(material: &Material) -> String {
    match material.freezing_k {
        None => "no".into(),
        Some((solidus_k, liquidus_k)) if solidus_k == liquidus_k => format!("at {} °C", figures(degc(liquidus_k), 4)),
        Some((solidus_k, liquidus_k)) => {
            format!("{} to {} °C", figures(degc(liquidus_k), 4), figures(degc(solidus_k), 4))
        }
    }
}

fn heater_table(section: &Section) -> Markup {
    html! {
        table {
            thead { tr {
                th { "Heater" } th { "Where" } th.number { "Output [W/m of heater]" } th.number { "Runs" } th.number { "Output [W/m of line]" } th { "Thermostat" }
            } }
            tbody {
                @for heater in &section.heaters {
                    tr {
                        th scope="row" { (clean(&heater.name)) }
                        td { (seat_words(section, heater.seat)) }
                        td.number { (figures(heater.output_w_per_m, 4))
                            @if heater.output_low_w_per_m < heater.output_w_per_m { " (at least " (figures(heater.output_low_w_per_m, 4)) ")" } }
                        td.number { (figures(heater.runs, 4)) }
                        td.number { (figures(heater.output_per_line_w_per_m(), 4)) }
                        td { @match &heater.thermostat {
                            Some(thermostat) => {
                                "senses " (clean(&section.place_name(thermostat.senses))) ": on below " (figures(degc(thermostat.on_below_k), 4))
                                " °C, off above " (figures(degc(thermostat.off_above_k), 4)) " °C"
                            },
                            None => "none",
                        } }
                    }
                }
            }
        }
    }
}

fn start_state(findings: &Findings) -> Markup {
    let start = &findings.start;
    let temperature = |kelvin: f64| format!("{} °C", aligned(degc(kelvin), 2));
    html! {
        div.pair {
        table.narrow {
            thead { tr { th { "Place" } th.number { "Temperature" } } }
            tbody {
                @if let Some(kelvin) = start.centre_k { tr { th scope="row" { "centre" } td.number { (temperature(kelvin)) } } }
                @if let Some(kelvin) = start.content_mean_k { tr { th scope="row" { "content, mean" } td.number { (temperature(kelvin)) } } }
                @for (name, kelvin) in &start.faces { tr { th scope="row" { (clean(name)) } td.number { (temperature(*kelvin)) } } }
            }
        }
        table.narrow {
            thead { tr { th { "Heat flow" } th.number { "W per metre of line" } @if let Some(length_m) = findings.section.line.effective_length_m() { th.number { "kW over " (figures(length_m, 4)) " m" } } } }
            tbody {
                @for (name, flow) in [("heaters", start.heater_w_per_m), ("into the content", start.into_content_w_per_m), ("lost to the outside", start.lost_w_per_m)] {
                    tr { th scope="row" { (name) } td.number { (figures(flow, 4)) }
                        @if let Some(length_m) = findings.section.line.effective_length_m() { td.number { (figures(flow * length_m / 1e3, 4)) } } }
                }
                @if start.frozen_share > 0.0 { tr { th scope="row" { "frozen share of the content" } td.number { (figures(100.0 * start.frozen_share, 3)) " %" } } }
            }
        }
        }
    }
}

fn figures_of(drawn: &[(Figure, String)]) -> Markup {
    html! {
        @for (figure, svg) in drawn {
            // The drawing library escapes what it writes.
            figure id=(figure.kind.name()) { (PreEscaped(svg)) }
        }
    }
}

fn audit(findings: &Findings) -> Markup {
    let energy = &findings.energy;
    let length_m = findings.section.line.effective_length_m();
    let rows = [
        ("supplied by heaters", energy.supplied_j_per_m),
        ("carried in by content", energy.carried_j_per_m),
        ("lost to the outside", energy.lost_j_per_m),
        ("stored in content and layers", energy.stored_j_per_m),
    ];
    html! {
        section.together {
            h2 { "Energy audit and effort" }
            table.narrow {
                thead { tr { th { "Energy of the default solve" } th.number { "kJ per metre of line" } @if length_m.is_some() { th.number { "kWh for the line" } } } }
                tbody {
                    @for (name, joules) in rows {
                        tr { th scope="row" { (name) } td.number { (figures(joules / 1e3, 5)) }
                            @if let Some(length_m) = length_m { td.number { (figures(joules * length_m / 3.6e6, 4)) } } }
                    }
                }
            }
            p.small {
                "Supplied + carried = lost + stored, to a residual of " (residual_words(energy.residual_relative))
                " of the largest gross heat. Effort: " (findings.effort.cells) " cells, " (findings.effort.steps) " steps ("
                (findings.effort.rejected_steps) " thrown away), " (findings.effort.newton_iterations) " Newton iterations."
            }
        }
    }
}

fn residual_words(residual: f64) -> String {
    if residual == 0.0 { "0".into() } else { format!("{residual:.1e}").replace('-', "\u{2212}") }
}

fn assumptions(findings: &Findings) -> Markup {
    html! {
        @if !findings.assumptions.is_empty() {
            section { h2 { "Assumptions" } ul { @for line in &findings.assumptions { li { (clean(line)) } } } }
        }
    }
}

fn provenance(findings: &Findings) -> Markup {
    html! {
        footer {
            p { "Stillwarm " (env!("CARGO_PKG_VERSION")) ", verb " code { (clean(findings.verb)) } ". Digest of the inputs (SHA-256): " code { (clean(&findings.input_digest)) } }
            p { "An estimate for a qualified person to judge. Local codes and the documents of heater and equipment prevail." }
        }
    }
}
