//! Lines, areas and text on either backend.

use super::placing::Box2;
use super::{Colour, Dash, Drawn, Look};
use crate::report::font;
use plotters::coord::Shift;
use plotters::drawing::DrawingArea;
use plotters::element::{Circle, PathElement, Polygon, Rectangle};
use plotters::prelude::{Color, DrawingBackend, RGBColor, ShapeStyle, TextStyle, WHITE};
use plotters::style::text_anchor::{HPos, Pos, VPos};
use plotters::style::{FontDesc, FontFamily, FontStyle};

/// Weight of a text.
#[derive(Clone, Copy, PartialEq)]
pub enum Weight {
    Regular,
    SemiBold,
}

/// Which part of a text its place is.
#[derive(Clone, Copy, PartialEq)]
pub enum Align {
    Left,
    Centre,
    Right,
}

pub struct Canvas<'a, DB: DrawingBackend> {
    area: &'a DrawingArea<DB, Shift>,
    text_drop: f64,
}

/// The drawing library takes this many ems for a font's height, by which it measures sizes.
const HEIGHT_OF_EM: f64 = 1.24;

/// The font whose em is `size`.
fn font_of(size: f64, weight: Weight) -> FontDesc<'static> {
    font::register();
    let style = if weight == Weight::SemiBold { FontStyle::Bold } else { FontStyle::Normal };
    FontDesc::new(FontFamily::Name(font::FAMILY), HEIGHT_OF_EM * size, style)
}

/// Width of a text, from the bundled font's own measures, whatever the backend.
pub fn width(text: &str, size: f64, weight: Weight) -> f64 {
    font_of(size, weight).box_size(text).map_or(0.6 * size * text.chars().count() as f64, |(width, _)| f64::from(width))
}

/// A text cut to a width, with an ellipsis where something is missing.
pub fn shortened(text: &str, size: f64, weight: Weight, room: f64) -> String {
    if width(text, size, weight) <= room {
        return text.into();
    }
    let mut kept: Vec<char> = text.chars().collect();
    while kept.pop().is_some() {
        let short = format!("{}…", kept.iter().collect::<String>().trim_end());
        if width(&short, size, weight) <= room {
            return short;
        }
    }
    String::new()
}

fn rgb(colour: Colour) -> RGBColor {
    RGBColor(colour.0, colour.1, colour.2)
}

fn grid(point: (f64, f64)) -> (i32, i32) {
    (point.0.round() as i32, point.1.round() as i32)
}

impl<'a, DB: DrawingBackend> Canvas<'a, DB> {
    /// A canvas whose backend sets text too high by `text_drop` of its size.
    pub fn new(area: &'a DrawingArea<DB, Shift>, text_drop: f64) -> Self {
        Canvas { area, text_drop }
    }

    pub fn fill(&self) -> Drawn<DB> {
        self.area.fill(&WHITE)
    }

    /// A text whose small letters' middle lies at the place's height.
    pub fn text(
        &self,
        text: &str,
        at: (f64, f64),
        size: f64,
        weight: Weight,
        colour: Colour,
        align: Align,
    ) -> Drawn<DB> {
        let h_pos = match align {
            Align::Left => HPos::Left,
            Align::Centre => HPos::Center,
            Align::Right => HPos::Right,
        };
        let colour = rgb(colour);
        let style = TextStyle::from(font_of(size, weight)).color(&colour).pos(Pos::new(h_pos, VPos::Center));
        self.area.draw_text(text, &style, grid((at.0, at.1 + self.text_drop * size)))
    }

    /// A text in a box of its own size, on a veil that keeps what lies behind from troubling it.
    pub fn label(&self, text: &str, place: Box2, size: f64, weight: Weight, colour: Colour) -> Drawn<DB> {
        self.rectangle((place.left - 6.0, place.top), (place.right + 6.0, place.bottom), (0xFF, 0xFF, 0xFF), 0.72)?;
        self.text(text, (place.left, place.middle_y()), size, weight, colour, Align::Left)
    }

    pub fn rectangle(&self, from: (f64, f64), to: (f64, f64), colour: Colour, opacity: f64) -> Drawn<DB> {
        self.area.draw(&Rectangle::new([grid(from), grid(to)], rgb(colour).mix(opacity).filled()))
    }

    pub fn area(&self, outline: &[(f64, f64)], colour: Colour, opacity: f64) -> Drawn<DB> {
        let outline: Vec<(i32, i32)> = outline.iter().map(|&point| grid(point)).collect();
        self.area.draw(&Polygon::new(outline, rgb(colour).mix(opacity)))
    }

    pub fn disc(&self, middle: (f64, f64), radius: f64, colour: Colour) -> Drawn<DB> {
        self.area.draw(&Circle::new(grid(middle), radius.round() as i32, rgb(colour).filled()))
    }

    pub fn line(&self, path: &[(f64, f64)], look: Look, width: f64) -> Drawn<DB> {
        let style = ShapeStyle { color: rgb(look.colour).to_rgba(), filled: false, stroke_width: width.round() as u32 };
        for dash in dashes(path, look.dash, width) {
            let mut dash: Vec<(i32, i32)> = dash.into_iter().map(grid).collect();
            dash.dedup();
            if dash.len() > 1 {
                self.area.draw(&PathElement::new(dash, style))?;
            }
        }
        Ok(())
    }
}

/// The path cut into dashes; lengths go with the line's width.
fn dashes(path: &[(f64, f64)], dash: Dash, width: f64) -> Vec<Vec<(f64, f64)>> {
    let pattern: &[f64] = match dash {
        Dash::Solid => return vec![path.to_vec()],
        Dash::Long => &[5.0, 2.5],
        Dash::Short => &[2.5, 2.0],
        Dash::Dotted => &[1.0, 1.7],
        Dash::DashDot => &[5.0, 1.8, 1.0, 1.8],
    };
    let length_of = |index: usize| pattern[index % pattern.len()] * width.max(4.0);
    let mut dashes = Vec::new();
    let (mut index, mut left) = (0, length_of(0));
    let mut current: Vec<(f64, f64)> = path.first().copied().into_iter().collect();
    for pair in path.windows(2) {
        let (mut from, to) = (pair[0], pair[1]);
        let mut rest = (to.0 - from.0).hypot(to.1 - from.1);
        while rest > left {
            let share = left / rest;
            from = (from.0 + share * (to.0 - from.0), from.1 + share * (to.1 - from.1));
            rest -= left;
            if index % 2 == 0 {
                current.push(from);
                dashes.push(std::mem::take(&mut current));
            }
            index += 1;
            left = length_of(index);
            current = vec![from];
        }
        left -= rest;
        current.push(to);
    }
    if index % 2 == 0 {
        dashes.push(current);
    }
    dashes
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn dashes_follow_the_path_and_leave_gaps() {
        let path = [(0.0, 0.0), (45.0, 0.0), (45.0, 50.0)];
        let dashes = dashes(&path, Dash::Long, 4.0);
        assert_eq!(dashes[0], vec![(0.0, 0.0), (20.0, 0.0)]);
        assert_eq!(dashes[1], vec![(30.0, 0.0), (45.0, 0.0), (45.0, 5.0)]);
        assert_eq!(dashes[2], vec![(45.0, 15.0), (45.0, 35.0)]);
    }

    #[test]
    fn the_bundled_font_measures_characters_not_bytes() {
        let degree = width("20 °C", 100.0, Weight::Regular);
        assert!(degree > 180.0 && degree < 330.0, "{degree}");
        assert!(width("°°", 100.0, Weight::Regular) < width("mm", 100.0, Weight::Regular));
    }

    #[test]
    fn a_long_text_is_cut_with_an_ellipsis() {
        let short = shortened("a line with a very long title indeed", 50.0, Weight::Regular, 300.0);
        assert!(short.ends_with('…') && width(&short, 50.0, Weight::Regular) <= 300.0, "{short}");
        assert_eq!(shortened("short", 50.0, Weight::Regular, 300.0), "short");
    }
}
