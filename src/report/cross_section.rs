//! The cross-section drawn to scale, as SVG: rings with their names and dimensions, heaters on their faces, a scale bar.

use super::drawing::canvas::{Weight, shortened};
use super::figure::palette;
use super::text::{clean, figures, fixed};
use crate::section::{Face, Seat, Section, Side};
use maud::{Markup, html};
use std::f64::consts::PI;

const WIDTH: f64 = 900.0;
/// Height, where the names need no more.
const HEIGHT: f64 = 470.0;
/// Distance of one name from the next, at the least.
const NAME_ROW: f64 = 40.0;
/// Centre of the rings and radius of the outermost surface on the page.
const CENTRE: (f64, f64) = (225.0, 205.0);
const OUTERMOST: f64 = 190.0;
/// Left edge of the names.
const NAMES: f64 = 500.0;
/// Room for a name.
const ROOM: f64 = WIDTH - NAMES - 8.0;
/// A layer is drawn at least so thick.
const THINNEST: f64 = 2.5;

const CONTENT_TINT: &str = "#CFE3F3";
const LAYER_TINTS: [&str; 4] = ["#8F8A80", "#F1E9D8", "#B9B4A8", "#E2D9C5"];

/// A name on the right with a line to its place in the rings.
struct Name {
    at: (f64, f64),
    head: String,
    detail: String,
    swatch: Swatch,
}

enum Swatch {
    Tint(&'static str),
    Heater,
}

/// The cross-section as an SVG element. Layers thinner than a stroke are drawn as one, and a line of text says so.
pub fn cross_section(section: &Section) -> Markup {
    let outermost_m = section.outermost_radius_m();
    let scale = OUTERMOST / outermost_m;
    let tint = |layer: usize| LAYER_TINTS[layer % LAYER_TINTS.len()];
    let thickened: Vec<String> = section
        .layers
        .iter()
        .filter(|layer| (layer.outside_radius_m - layer.inside_radius_m) * scale < THINNEST)
        .map(|layer| clean(&layer.name))
        .collect();
    let names = names(section, scale);
    let row = (360.0 / names.len() as f64).clamp(NAME_ROW, 58.0);
    let first = (CENTRE.1 - 0.5 * row * (names.len() - 1) as f64).max(28.0);
    let last = first + row * (names.len() - 1) as f64;
    let height = HEIGHT.max(last + 2.0 * NAME_ROW);
    let bar_m = round_length(0.45 * outermost_m);
    let bar = bar_m * scale;
    let base = CENTRE.1 + OUTERMOST + 26.0;
    html! {
        svg class="section" viewBox=(format!("0 0 {WIDTH} {height}")) role="img" xmlns="http://www.w3.org/2000/svg"
            font-family=(super::font::FAMILY) font-size="15" fill="#262626" {
            title { "Cross-section of " (clean(&section.title)) ", to scale" }
            @for (index, layer) in section.layers.iter().enumerate().rev() {
                circle cx=(CENTRE.0) cy=(CENTRE.1) r=(px(layer.outside_radius_m * scale))
                    fill=(tint(index)) stroke="#555" stroke-width="0.8" {}
            }
            circle cx=(CENTRE.0) cy=(CENTRE.1) r=(px(section.content.radius_m * scale))
                fill=(if section.content.material.is_some() { CONTENT_TINT } else { "#FFFFFF" }) stroke="#555" stroke-width="0.8" {}
            @for (index, layer) in section.layers.iter().enumerate() {
                @if (layer.outside_radius_m - layer.inside_radius_m) * scale < THINNEST {
                    circle cx=(CENTRE.0) cy=(CENTRE.1) r=(px(0.5 * (layer.inside_radius_m + layer.outside_radius_m) * scale))
                        fill="none" stroke=(tint(index)) stroke-width=(THINNEST) {}
                }
            }
            @for heater in &section.heaters { (heater_mark(section, heater.seat, scale)) }
            // Centre lines.
            path d=(format!("M{} {} h{} M{} {} v{}", CENTRE.0 - 8.0, CENTRE.1, 16.0, CENTRE.0, CENTRE.1 - 8.0, 16.0))
                stroke="#555" stroke-width="1" fill="none" {}
            @for (index, name) in names.iter().enumerate() {
                @let y = first + row * index as f64;
                path d=(format!("M{:.1} {:.1} L{:.1} {:.1} H{:.1}", name.at.0, name.at.1, NAMES - 36.0, y, NAMES - 26.0))
                    stroke="#262626" stroke-width="1" fill="none" {}
                circle cx=(px(name.at.0)) cy=(px(name.at.1)) r="2.6" fill="#262626" {}
                @match name.swatch {
                    Swatch::Tint(tint) => rect x=(NAMES - 22.0) y=(px(y - 8.0)) width="16" height="16" fill=(tint) stroke="#555" stroke-width="0.8" {},
                    Swatch::Heater => circle cx=(NAMES - 14.0) cy=(px(y)) r="6" fill=(orange()) stroke="#262626" stroke-width="1" {},
                }
                text x=(NAMES + 4.0) y=(px(y - 2.0)) font-weight="bold" { (shortened(&name.head, 15.0, Weight::SemiBold, ROOM)) }
                text x=(NAMES + 4.0) y=(px(y + 16.0)) font-size="13.5" fill="#4A4A4A" { (shortened(&name.detail, 13.5, Weight::Regular, ROOM)) }
            }
            // Overall diameter and scale bar.
            path d=(format!("M{0} {2} V{3} M{1} {2} V{3} M{0} {4} H{1}", CENTRE.0 - OUTERMOST, CENTRE.0 + OUTERMOST, CENTRE.1 + 40.0, base + 6.0, base))
                stroke="#6E6E6E" stroke-width="1" fill="none" {}
            (arrow_head(CENTRE.0 - OUTERMOST, base, 1.0)) (arrow_head(CENTRE.0 + OUTERMOST, base, -1.0))
            rect x=(CENTRE.0 - 58.0) y=(base - 10.0) width="116" height="20" fill="#FFFFFF" {}
            text x=(CENTRE.0) y=(base + 5.0) text-anchor="middle" { "Ø " (millimetres(2.0 * outermost_m)) " mm" }
            path d=(format!("M{0} {2} v8 h{1} v-8", CENTRE.0 - OUTERMOST, px(bar), base + 18.0)) stroke="#262626" stroke-width="1.6" fill="none" {}
            text x=(px(CENTRE.0 - OUTERMOST + bar + 8.0)) y=(base + 29.0) font-size="13.5" { (millimetres(bar_m)) " mm, to scale" }
            @if !thickened.is_empty() {
                text x=(NAMES + 4.0) y=(px(height - 20.0)) font-size="13.5" fill="#4A4A4A" {
                    (shortened(&format!("drawn thicker than to scale: {}", thickened.join(", ")), 13.5, Weight::Regular, ROOM))
                }
            }
        }
    }
}

fn px(length: f64) -> String {
    format!("{length:.2}")
}

fn orange() -> String {
    let (red, green, blue) = palette::ORANGE;
    format!("#{red:02X}{green:02X}{blue:02X}")
}

fn millimetres(length_m: f64) -> String {
    fixed(length_m * 1e3, if length_m < 0.1 { 2 } else { 1 })
}

/// 1, 2 or 5 times a power of ten, not above the length.
fn round_length(most_m: f64) -> f64 {
    let power = 10f64.powf(most_m.log10().floor());
    [5.0, 2.0, 1.0].map(|digit| digit * power).into_iter().find(|&length| length <= most_m).unwrap_or(power)
}

/// Names from the outside inwards, each at a place of its own on the right half, the outermost highest.
fn names(section: &Section, scale: f64) -> Vec<Name> {
    let mut regions: Vec<(f64, String, String, Swatch)> = Vec::new();
    for (index, layer) in section.layers.iter().enumerate() {
        let thickness_m = layer.outside_radius_m - layer.inside_radius_m;
        regions.push((
            0.5 * (layer.inside_radius_m + layer.outside_radius_m),
            format!("{}: {}", clean(&layer.name), clean(&layer.material.name)),
            format!(
                "Ø {} to {} mm, {} mm thick",
                millimetres(2.0 * layer.inside_radius_m),
                millimetres(2.0 * layer.outside_radius_m),
                millimetres(thickness_m)
            ),
            Swatch::Tint(LAYER_TINTS[index % LAYER_TINTS.len()]),
        ));
    }
    for heater in &section.heaters {
        let output = figures(heater.output_per_line_w_per_m(), 4);
        regions.push((
            seat_radius_m(section, heater.seat),
            format!("{}: {output} W per metre of line", clean(&heater.name)),
            seat_words(section, heater.seat),
            Swatch::Heater,
        ));
    }
    let (content, tint) = match &section.content.material {
        Some(material) => (clean(&material.name), CONTENT_TINT),
        None => ("empty, or held at a temperature".into(), "#FFFFFF"),
    };
    let bore = format!("Ø {} mm", millimetres(2.0 * section.content.radius_m));
    regions.push((0.35 * section.content.radius_m, format!("content: {content}"), bore, Swatch::Tint(tint)));
    regions.sort_by(|one, other| other.0.total_cmp(&one.0));

    let count = regions.len();
    regions
        .into_iter()
        .enumerate()
        .map(|(index, (radius_m, head, detail, swatch))| {
            let share = if count > 1 { index as f64 / (count - 1) as f64 } else { 0.5 };
            let mut angle = (-52.0 + 72.0 * share).to_radians();
            if matches!(swatch, Swatch::Heater) {
                let spacing = 2.0 * PI / f64::from(dots(radius_m * scale));
                angle = (angle / spacing).round() * spacing;
            }
            let at = (CENTRE.0 + radius_m * scale * angle.cos(), CENTRE.1 + radius_m * scale * angle.sin());
            Name { at, head, detail, swatch }
        })
        .collect()
}

fn face_radius_m(section: &Section, face: Face) -> f64 {
    match face.side {
        Side::Inside => section.layers[face.layer].inside_radius_m,
        Side::Outside => section.layers[face.layer].outside_radius_m,
    }
}

fn seat_radius_m(section: &Section, seat: Seat) -> f64 {
    match seat {
        Seat::Face(face) => face_radius_m(section, face),
        Seat::Layer(layer) => 0.5 * (section.layers[layer].inside_radius_m + section.layers[layer].outside_radius_m),
        Seat::Content => 0.6 * section.content.radius_m,
    }
}

/// Where a heater lies, in words.
pub(crate) fn seat_words(section: &Section, seat: Seat) -> String {
    match seat {
        Seat::Face(face) => format!("on {}, spread around the face", clean(&section.face_name(face))),
        Seat::Layer(layer) => format!("spread through {}", clean(&section.layers[layer].name)),
        Seat::Content => "spread through the content".into(),
    }
}

/// Number of dots that mark a heater on a radius of the page.
fn dots(radius: f64) -> u32 {
    (2.0 * PI * radius / 26.0).clamp(8.0, 48.0).floor() as u32
}

/// Dots around the heater's face, or over the ring that it heats.
fn heater_mark(section: &Section, seat: Seat, scale: f64) -> Markup {
    let radius = seat_radius_m(section, seat) * scale;
    let count = dots(radius);
    html! {
        g fill=(orange()) stroke="#262626" stroke-width="0.9" {
            @for index in 0..count {
                @let angle = f64::from(index) * 2.0 * PI / f64::from(count);
                circle cx=(px(CENTRE.0 + radius * angle.cos())) cy=(px(CENTRE.1 + radius * angle.sin())) r="3.6" {}
            }
        }
    }
}

/// The tip of a dimension line; `towards` is 1 where the line runs to the right of the tip.
fn arrow_head(x: f64, y: f64, towards: f64) -> Markup {
    html! {
        path d=(format!("M{x} {y} l{} -3.5 v7 z", 10.0 * towards)) fill="#6E6E6E" {}
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_scale_bar_is_round() {
        for (most, round) in [(0.045, 0.02), (0.05, 0.05), (0.0019, 0.001), (0.27, 0.2)] {
            assert!((round_length(most) / round - 1.0).abs() < 1e-9, "{most}: {}", round_length(most));
        }
    }

    #[test]
    fn many_layers_make_room_for_their_names() {
        use crate::section::{Contact, Content, ContentState, Layer, Line, Outside, Record, Run, Start};
        let material = std::sync::Arc::new(crate::material::Material::constant("m", 1.0, 1.0, 1.0));
        let layers = |count: u32| Section {
            title: String::new(),
            line: Line::default(),
            content: Content { radius_m: 0.01, material: None, state: ContentState::Empty },
            layers: (0..count)
                .map(|index| Layer {
                    name: format!("layer {index}"),
                    material: material.clone(),
                    inside_radius_m: 0.01 + 0.001 * f64::from(index),
                    outside_radius_m: 0.011 + 0.001 * f64::from(index),
                    contact: Contact::default(),
                })
                .collect(),
            heaters: vec![],
            outside: Outside { temperature_k: crate::series::Series::Constant(273.15), film: None },
            start: Start::Hold,
            events: vec![],
            targets: vec![],
            limits: vec![],
            probes: vec![],
            run: Run { until_s: None, record: Record::Auto },
        };
        let drawing = |count: u32| cross_section(&layers(count)).into_string();
        assert!(drawing(3).contains(r#"viewBox="0 0 900 470""#));
        assert!(drawing(14).contains(r#"viewBox="0 0 900 668""#), "{}", &drawing(14)[..120]);
        assert!(drawing(14).contains("layer 13: m"));
    }
}
