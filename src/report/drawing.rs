//! Draws a [`Figure`]: one function for every figure and both kinds of file, so that SVG and PNG are the same picture.
//!
//! Lengths are in units of the canvas, of which a figure is [`WIDTH`] wide; a PNG has half as many pixels, each the mean
//! of four, which smooths its edges.

pub(crate) mod canvas;
mod placing;

use super::figure::{Colour, Curve, Dash, Figure, Look, Panel, palette};
use canvas::{Align, Canvas, Weight};
use image::{ImageFormat, RgbImage, imageops};
use placing::{Box2, Placer, spread};
use plotters::backend::{BitMapBackend, SVGBackend};
use plotters::coord::Shift;
use plotters::drawing::{DrawingArea, DrawingAreaErrorKind, IntoDrawingArea};
use plotters::prelude::DrawingBackend;
use std::io::Cursor;
use thiserror::Error;

/// Width of a figure in its own units.
pub const WIDTH: u32 = 3200;
/// Units to a pixel of a PNG.
const UNITS_PER_PIXEL: u32 = 2;

const TITLE: f64 = 64.0;
const TEXT: f64 = 50.0;
const SMALL: f64 = 44.0;
const MARGIN: f64 = 60.0;
const TICK_ROOM: f64 = 150.0;
const ROW: f64 = 62.0;
const PANEL_GAP: f64 = 150.0;
const PANEL_UNIT: f64 = 330.0;
const LINE: f64 = 7.0;

/// A figure could not be drawn.
#[derive(Debug, Error)]
#[error("the figure of {figure} could not be drawn: {reason}")]
pub struct DrawingError {
    /// Which figure.
    pub figure: &'static str,
    /// What the drawing library says.
    pub reason: String,
}

impl DrawingError {
    fn new(figure: &Figure, reason: impl ToString) -> Self {
        DrawingError { figure: figure.kind.name(), reason: reason.to_string() }
    }
}

/// The figure as an SVG document, with its title for those who hear it read.
///
/// # Errors
/// What the drawing library reports.
pub fn svg(figure: &Figure) -> Result<String, DrawingError> {
    let height = Layout::of(figure).height;
    let mut document = String::new();
    {
        let area = SVGBackend::with_string(&mut document, (WIDTH, height)).into_drawing_area();
        // A browser sets the middle of a small letter on the anchor.
        draw(figure, &area, 0.0).map_err(|error| DrawingError::new(figure, error))?;
        area.present().map_err(|error| DrawingError::new(figure, error))?;
    }
    let title = maud::html! { title { (figure.title) } }.into_string();
    let size = format!(r#"width="{WIDTH}" height="{height}""#);
    let shown = format!(r#"width="{}" height="{}" role="img""#, WIDTH / UNITS_PER_PIXEL, height / UNITS_PER_PIXEL);
    let document = document.replacen(&size, &shown, 1);
    Ok(document.replacen(">\n", &format!(">\n{title}\n"), 1))
}

/// The figure as a PNG file.
///
/// # Errors
/// What the drawing or the image library reports.
pub fn png(figure: &Figure) -> Result<Vec<u8>, DrawingError> {
    let height = Layout::of(figure).height;
    let mut pixels = vec![255; (WIDTH * height * 3) as usize];
    {
        let area = BitMapBackend::with_buffer(&mut pixels, (WIDTH, height)).into_drawing_area();
        // Baselines lie 0.27 em below the anchor in a browser (half of a small letter), 0.12 em in the bitmap.
        draw(figure, &area, 0.15).map_err(|error| DrawingError::new(figure, error))?;
        area.present().map_err(|error| DrawingError::new(figure, error))?;
    }
    let large = RgbImage::from_raw(WIDTH, height, pixels).expect("the buffer was made to this size");
    let (width, height) = (WIDTH / UNITS_PER_PIXEL, height / UNITS_PER_PIXEL);
    let small = imageops::resize(&large, width, height, imageops::FilterType::Triangle);
    let mut file = Cursor::new(Vec::new());
    small.write_to(&mut file, ImageFormat::Png).map_err(|error| DrawingError::new(figure, error))?;
    Ok(file.into_inner())
}

/// A short text over the panels with a line down to its place.
struct Tag<'f> {
    at: f64,
    label: &'f str,
    of_band: bool,
    /// A band's name is centred over it where it fits; other names stand right of their lines.
    centred: bool,
    row: usize,
    left: f64,
}

/// Where everything goes, in units of the canvas.
struct Layout<'f> {
    height: u32,
    left: f64,
    right: f64,
    panels: Vec<(f64, f64)>,
    tags: Vec<Tag<'f>>,
}

impl<'f> Layout<'f> {
    fn of(figure: &'f Figure) -> Self {
        let labels = figure.panels.iter().flat_map(|panel| panel.curves.iter().flat_map(|curve| &curve.names));
        let widest = labels.map(|name| canvas::width(name, TEXT, Weight::Regular)).fold(0.0, f64::max);
        let left = MARGIN + TICK_ROOM;
        let right = f64::from(WIDTH)
            - MARGIN
            - (widest + if figure.listed { 200.0 } else { 130.0 }).min(0.34 * f64::from(WIDTH));
        let mut layout = Layout { height: 0, left, right, panels: Vec::new(), tags: Vec::new() };
        layout.tags = layout.tags(figure);
        let mut top = MARGIN + TITLE + 3.9 * TEXT + layout.tag_rows() as f64 * ROW;
        for panel in &figure.panels {
            let bottom = top + PANEL_UNIT * panel.height;
            layout.panels.push((top, bottom));
            top = bottom + PANEL_GAP;
        }
        let height = top - PANEL_GAP + 2.6 * TEXT + MARGIN + 40.0;
        layout.height = UNITS_PER_PIXEL * (height / f64::from(UNITS_PER_PIXEL)).ceil() as u32;
        layout
    }

    fn tag_rows(&self) -> usize {
        self.tags.iter().map(|tag| tag.row + 1).max().unwrap_or(0)
    }

    fn x(&self, figure: &Figure, value: f64) -> f64 {
        self.left + figure.axis.share(value) * (self.right - self.left)
    }

    /// Names of bands and events, each in the lowest row where neither its words nor its line meet another's: one whose words
    /// reach over the next lies above it.
    fn tags(&self, figure: &'f Figure) -> Vec<Tag<'f>> {
        const GAP: f64 = 30.0;
        let width = |label: &str| canvas::width(label, SMALL, Weight::Regular);
        let bands = figure.bands.iter().map(|band| {
            let (from, to) = (self.x(figure, band.from).max(self.left), self.x(figure, band.to));
            let centred = width(&band.label) <= to - from;
            Tag { at: 0.5 * (from + to), label: &band.label, of_band: true, centred, row: 0, left: 0.0 }
        });
        let events = figure.uprights.iter().map(|upright| {
            let at = self.x(figure, upright.at);
            Tag { at, label: &upright.label, of_band: false, centred: false, row: 0, left: 0.0 }
        });
        let mut tags: Vec<Tag> = bands.chain(events).collect();
        tags.sort_by(|one, other| one.at.total_cmp(&other.at));
        let most = f64::from(WIDTH) - MARGIN;
        for index in (0..tags.len()).rev() {
            let (tag, later) = tags[index..].split_first_mut().expect("the index is within");
            let width = width(tag.label);
            let wished = if tag.centred { tag.at - 0.5 * width } else { tag.at + 14.0 };
            tag.left = wished.min(most - width).max(MARGIN);
            let reached = later.iter().filter(|other| other.left.min(other.at) < tag.left + width + GAP);
            tag.row = reached.map(|other| other.row + 1).max().unwrap_or(0);
        }
        tags
    }
}

type Drawn<DB> = Result<(), DrawingAreaErrorKind<<DB as DrawingBackend>::ErrorType>>;

fn draw<DB: DrawingBackend>(figure: &Figure, area: &DrawingArea<DB, Shift>, text_drop: f64) -> Drawn<DB> {
    let layout = Layout::of(figure);
    let canvas = Canvas::new(area, text_drop);
    canvas.fill()?;

    let room = f64::from(WIDTH) - 2.0 * MARGIN;
    let title = canvas::shortened(&figure.title, TITLE, Weight::SemiBold, room);
    canvas.text(&title, (MARGIN, MARGIN + 0.5 * TITLE), TITLE, Weight::SemiBold, palette::INK, Align::Left)?;
    let note = canvas::shortened(&figure.note, SMALL, Weight::Regular, room);
    canvas.text(&note, (MARGIN, MARGIN + TITLE + 0.9 * TEXT), SMALL, Weight::Regular, palette::GREY, Align::Left)?;

    let (top, bottom) = (layout.panels[0].0, layout.panels[layout.panels.len() - 1].1);
    for band in &figure.bands {
        let from = layout.x(figure, band.from).max(layout.left);
        canvas.rectangle((from, top), (layout.x(figure, band.to), bottom), band.tint, 1.0)?;
    }
    for (panel, &(top, bottom)) in figure.panels.iter().zip(&layout.panels) {
        draw_grid(figure, panel, &layout, (top, bottom), &canvas)?;
    }
    draw_tags(figure, &layout, &canvas)?;
    for (panel, &(top, bottom)) in figure.panels.iter().zip(&layout.panels) {
        draw_panel(figure, panel, &layout, (top, bottom), &canvas)?;
    }
    for (&tick, label) in figure.axis.ticks.iter().zip(&figure.axis.tick_labels) {
        let x = layout.x(figure, tick);
        canvas.text(label, (x, bottom + 0.95 * TEXT), TEXT, Weight::Regular, palette::INK, Align::Centre)?;
    }
    let middle = 0.5 * (layout.left + layout.right);
    canvas.text(&figure.axis.label, (middle, bottom + 2.4 * TEXT), TEXT, Weight::Regular, palette::INK, Align::Centre)
}

fn draw_tags<DB: DrawingBackend>(figure: &Figure, layout: &Layout, canvas: &Canvas<DB>) -> Drawn<DB> {
    let top = layout.panels[0].0;
    let base = top - 0.62 * ROW;
    for tag in &layout.tags {
        let y = base - tag.row as f64 * ROW;
        let from = y + if tag.centred { 0.6 } else { -0.5 } * SMALL;
        canvas.line(&[(tag.at, from), (tag.at, top)], Look::line(palette::GREY, Dash::Solid, 1.0), 2.5)?;
        if !tag.of_band {
            // Over a band the line would hide the jump that it names.
            let look = Look::line(palette::GREY, if figure.bands.is_empty() { Dash::Short } else { Dash::Dotted }, 1.0);
            for &(top, bottom) in &layout.panels {
                canvas.line(&[(tag.at, top), (tag.at, bottom)], look, 3.5)?;
            }
        }
        canvas.text(tag.label, (tag.left, y), SMALL, Weight::Regular, palette::INK, Align::Left)?;
    }
    Ok(())
}

fn draw_grid<DB: DrawingBackend>(
    figure: &Figure,
    panel: &Panel,
    layout: &Layout,
    (top, bottom): (f64, f64),
    canvas: &Canvas<DB>,
) -> Drawn<DB> {
    // Tags stand between the uppermost panel and its axis's name.
    let tag_rows = if top == layout.panels[0].0 { layout.tag_rows() } else { 0 };
    let label_y = top - 1.35 * TEXT - tag_rows as f64 * ROW;
    const GRID: Look = Look::line((0xD9, 0xD9, 0xD9), Dash::Solid, 1.0);
    const FRAME: Look = Look::line(palette::GREY, Dash::Solid, 1.0);
    let y = |value: f64| bottom - panel.axis.share(value) * (bottom - top);
    for (&tick, label) in panel.axis.ticks.iter().zip(&panel.axis.tick_labels) {
        let level = y(tick);
        canvas.line(&[(layout.left, level), (layout.right, level)], GRID, 2.0)?;
        canvas.text(label, (layout.left - 24.0, level), TEXT, Weight::Regular, palette::INK, Align::Right)?;
    }
    for &tick in &figure.axis.ticks {
        let x = layout.x(figure, tick);
        canvas.line(&[(x, top), (x, bottom)], GRID, 2.0)?;
        canvas.line(&[(x, bottom), (x, bottom + 16.0)], FRAME, 3.0)?;
    }
    if panel.axis.low < 0.0 && panel.axis.high > 0.0 {
        canvas.line(&[(layout.left, y(0.0)), (layout.right, y(0.0))], FRAME, 3.0)?;
    }
    let corners = [(layout.left, top), (layout.left, bottom), (layout.right, bottom)];
    canvas.line(&corners, FRAME, 4.0)?;
    let label = (layout.left - TICK_ROOM + 30.0, label_y);
    canvas.text(&panel.axis.label, label, TEXT, Weight::SemiBold, palette::INK, Align::Left)
}

fn draw_panel<DB: DrawingBackend>(
    figure: &Figure,
    panel: &Panel,
    layout: &Layout,
    (top, bottom): (f64, f64),
    canvas: &Canvas<DB>,
) -> Drawn<DB> {
    let x = |value: f64| layout.x(figure, value);
    let y = |value: f64| bottom - panel.axis.share(value).clamp(0.0, 1.0) * (bottom - top);
    let paths: Vec<Vec<Vec<(f64, f64)>>> = panel.curves.iter().map(|curve| pieces(curve, x, y)).collect();

    for (curve, pieces) in panel.curves.iter().zip(&paths).filter(|(curve, _)| curve.look.filled) {
        let zero = y(0.0);
        for piece in pieces {
            let mut outline = piece.clone();
            outline.push((piece[piece.len() - 1].0, zero));
            outline.push((piece[0].0, zero));
            canvas.area(&outline, curve.look.colour, 0.16)?;
        }
    }
    for level in &panel.levels {
        let at = y(level.value);
        canvas.line(&[(layout.left, at), (layout.right, at)], Look::line(palette::INK, Dash::Long, 1.0), 4.0)?;
    }
    for (curve, pieces) in panel.curves.iter().zip(&paths) {
        for piece in pieces {
            canvas.line(piece, curve.look, LINE * curve.look.width)?;
        }
    }

    let frame = Box2 { left: layout.left, top, right: layout.right, bottom };
    let mut placer = Placer::new(frame);
    paths.iter().flatten().for_each(|piece| placer.avoid_line(piece));
    for level in &panel.levels {
        placer.avoid_line(&[(layout.left, y(level.value)), (layout.right, y(level.value))]);
    }
    for tag in layout.tags.iter().filter(|tag| !tag.of_band) {
        placer.avoid_line(&[(tag.at, top), (tag.at, bottom)]);
    }
    for dot in &panel.dots {
        let at = (x(dot.at.0), y(dot.at.1));
        placer.avoid_box(Box2 { left: at.0 - 20.0, top: at.1 - 20.0, right: at.0 + 20.0, bottom: at.1 + 20.0 });
    }
    for dot in &panel.dots {
        let at = (x(dot.at.0), y(dot.at.1));
        canvas.disc(at, 19.0, (0xFF, 0xFF, 0xFF))?;
        canvas.disc(at, 14.0, palette::INK)?;
        let size = (canvas::width(&dot.label, SMALL, Weight::SemiBold), SMALL);
        let place = placer.beside(at, size);
        let (edge, middle) = (place.nearest_x(at.0), place.middle_y());
        if (edge - at.0).hypot(middle - at.1) > 60.0 {
            canvas.line(&[at, (edge, middle)], Look::line(palette::INK, Dash::Solid, 1.0), 2.5)?;
        }
        canvas.label(&dot.label, place, SMALL, Weight::SemiBold, palette::INK)?;
    }
    for level in &panel.levels {
        let size = (canvas::width(&level.label, SMALL, Weight::Regular), SMALL);
        let place = placer.along(y(level.value), size);
        canvas.label(&level.label, place, SMALL, Weight::Regular, palette::INK)?;
    }
    if figure.listed {
        draw_list(panel, layout, top, canvas)
    } else {
        draw_line_ends(panel, &paths, layout, (top, bottom), canvas)
    }
}

/// Names at the right ends of the curves, each with a piece of its curve's line, moved apart where they would touch.
fn draw_line_ends<DB: DrawingBackend>(
    panel: &Panel,
    paths: &[Vec<Vec<(f64, f64)>>],
    layout: &Layout,
    (top, bottom): (f64, f64),
    canvas: &Canvas<DB>,
) -> Drawn<DB> {
    let mut ends: Vec<(f64, &str, Look)> = Vec::new();
    for (curve, pieces) in panel.curves.iter().zip(paths) {
        if let Some(&(_, y)) = pieces.last().and_then(|piece| piece.last()) {
            ends.extend(curve.names.iter().map(|name| (y, name.as_str(), curve.look)));
        }
    }
    ends.sort_by(|one, other| one.0.total_cmp(&other.0));
    let wished: Vec<f64> = ends.iter().map(|end| end.0).collect();
    let places = spread(&wished, 1.18 * TEXT, (top - 0.3 * TEXT, bottom + 0.3 * TEXT));
    for ((end, name, look), place) in ends.into_iter().zip(places) {
        let right = layout.right;
        let path = [(right + 6.0, end), (right + 34.0, place), (right + 104.0, place)];
        canvas.line(&path, look, LINE * look.width.min(1.2))?;
        let room = f64::from(WIDTH) - 0.4 * MARGIN - right - 122.0;
        let name = canvas::shortened(name, TEXT, Weight::Regular, room);
        canvas.text(&name, (right + 122.0, place), TEXT, Weight::Regular, palette::INK, Align::Left)?;
    }
    Ok(())
}

/// Names of the curves in their own order, each with a piece of its line.
fn draw_list<DB: DrawingBackend>(panel: &Panel, layout: &Layout, top: f64, canvas: &Canvas<DB>) -> Drawn<DB> {
    let named = panel.curves.iter().flat_map(|curve| curve.names.iter().map(move |name| (name, curve.look)));
    for (index, (name, look)) in named.enumerate() {
        let y = top + (0.6 + 1.3 * index as f64) * TEXT;
        let from = layout.right + 40.0;
        canvas.line(&[(from, y), (from + 130.0, y)], look, LINE * look.width)?;
        canvas.text(name, (from + 156.0, y), TEXT, Weight::Regular, palette::INK, Align::Left)?;
    }
    Ok(())
}

/// The curve on the canvas, broken where a point is not finite.
fn pieces(curve: &Curve, x: impl Fn(f64) -> f64, y: impl Fn(f64) -> f64) -> Vec<Vec<(f64, f64)>> {
    curve
        .points
        .split(|point| !point.0.is_finite() || !point.1.is_finite())
        .filter(|piece| !piece.is_empty())
        .map(|piece| thinned(piece.iter().map(|&point| (x(point.0), y(point.1)))))
        .collect()
}

/// A path with no more than four points to a unit of width: first, lowest, highest and last of each column.
fn thinned(points: impl Iterator<Item = (f64, f64)>) -> Vec<(f64, f64)> {
    let mut path: Vec<(f64, f64)> = Vec::new();
    let mut column: Vec<(f64, f64)> = Vec::new();
    let close = |column: &mut Vec<(f64, f64)>, path: &mut Vec<(f64, f64)>| {
        if column.len() > 4 {
            let index = |better: fn(f64, f64) -> bool| {
                (0..column.len()).reduce(|best, next| if better(column[next].1, column[best].1) { next } else { best })
            };
            let mut kept =
                vec![0, index(|a, b| a < b).unwrap_or(0), index(|a, b| a > b).unwrap_or(0), column.len() - 1];
            kept.sort_unstable();
            kept.dedup();
            path.extend(kept.into_iter().map(|index| column[index]));
        } else {
            path.extend(column.iter().copied());
        }
        column.clear();
    };
    for point in points {
        if column.first().is_some_and(|first| first.0.floor() != point.0.floor()) {
            close(&mut column, &mut path);
        }
        column.push(point);
    }
    close(&mut column, &mut path);
    path
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn thinning_keeps_ends_and_extremes() {
        let wave: Vec<(f64, f64)> =
            (0..10_000).map(|index| (f64::from(index) * 0.01, (f64::from(index) * 0.37).sin())).collect();
        let path = thinned(wave.iter().copied());
        assert!(path.len() <= 400, "{} points", path.len());
        assert_eq!((path.first(), path.last()), (wave.first(), wave.last()));
        let highest = |points: &[(f64, f64)]| points.iter().map(|point| point.1).fold(-9.0, f64::max);
        assert_eq!(highest(&path), highest(&wave));
    }
}
