//! Line figures of a check as SVG. The report's own font measures the text; a viewer draws it in what it has.

use plotters::prelude::*;
use plotters::style::{FontStyle, register_font};
use std::sync::Once;

/// Width and height [px].
const SIZE: (u32, u32) = (900, 560);
/// Family as a viewer reads it, and the font that stands for it in measuring.
const FONT: &str = "Inter, Arial, sans-serif";
const MEASURED: &[u8] = include_bytes!("../../src/report/font/figures-regular.otf");
/// Colours that differ in lightness too.
const COLOURS: [RGBColor; 6] = [
    RGBColor(0, 73, 120),
    RGBColor(200, 90, 0),
    RGBColor(60, 140, 90),
    RGBColor(150, 50, 120),
    RGBColor(110, 110, 110),
    RGBColor(80, 170, 210),
];

/// One curve.
pub struct Curve {
    /// Its name.
    pub name: String,
    /// Its points.
    pub points: Vec<(f64, f64)>,
    /// Drawn as marks (references) or as a line (computed).
    pub marks: bool,
}

impl Curve {
    /// A line.
    pub fn line(name: impl Into<String>, points: Vec<(f64, f64)>) -> Self {
        Curve { name: name.into(), points, marks: false }
    }

    /// Marks.
    pub fn marks(name: impl Into<String>, points: Vec<(f64, f64)>) -> Self {
        Curve { name: name.into(), points, marks: true }
    }
}

/// One figure.
pub struct Plot {
    /// What it shows.
    pub title: String,
    /// Horizontal axis with its unit.
    pub x: &'static str,
    /// Vertical axis with its unit.
    pub y: &'static str,
    /// Whether the axes are logarithmic.
    pub log: (bool, bool),
    /// The curves.
    pub curves: Vec<Curve>,
}

impl Plot {
    /// Range of one coordinate over all curves, with some room.
    fn range(&self, log: bool, pick: fn(&(f64, f64)) -> f64) -> (f64, f64) {
        let values = self.curves.iter().flat_map(|curve| curve.points.iter().map(pick));
        let values = values.filter(|value| value.is_finite() && (!log || *value > 0.0));
        let (low, high) =
            values.fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), value| (low.min(value), high.max(value)));
        assert!(low.is_finite(), "a figure without points: {}", self.title);
        if log {
            let low = 10f64.powf((low.log10() - 0.05).floor());
            return (low, 10f64.powf((high.log10() + 0.05).ceil()));
        }
        let room = 0.04 * (high - low).max(1e-12);
        (low - room, high + room)
    }

    /// The figure as an SVG document. Both axes are drawn linear in what is plotted, so that a logarithmic axis is the
    /// decimal logarithm with labels in powers of ten.
    pub fn svg(&self) -> String {
        static ONCE: Once = Once::new();
        ONCE.call_once(|| assert!(register_font(FONT, FontStyle::Normal, MEASURED).is_ok(), "it is an OpenType font"));
        let (x, y) = (self.range(self.log.0, |point| point.0), self.range(self.log.1, |point| point.1));
        let scale = |value: f64, log: bool| if log { value.log10() } else { value };
        let (log_x, log_y) = self.log;
        let x = scale(x.0, log_x)..scale(x.1, log_x);
        let y = scale(y.0, log_y)..scale(y.1, log_y);
        let mut text = String::new();
        {
            let area = SVGBackend::with_string(&mut text, SIZE).into_drawing_area();
            area.fill(&WHITE).expect("a string takes everything");
            let mut chart = ChartBuilder::on(&area)
                .caption(&self.title, (FONT, 19))
                .margin(14)
                .x_label_area_size(52)
                .y_label_area_size(84)
                .build_cartesian_2d(x.clone(), y.clone())
                .expect("the ranges are finite");
            chart
                .configure_mesh()
                .light_line_style(WHITE)
                .bold_line_style(RGBColor(222, 222, 222))
                .x_desc(self.x)
                .y_desc(self.y)
                .label_style((FONT, 15))
                .x_labels(labels(&x, log_x))
                .y_labels(labels(&y, log_y))
                .x_label_formatter(&|value| label(*value, log_x))
                .y_label_formatter(&|value| label(*value, log_y))
                .draw()
                .expect("a string takes everything");
            for (index, curve) in self.curves.iter().enumerate() {
                let colour = COLOURS[index % COLOURS.len()];
                let points: Vec<(f64, f64)> = curve
                    .points
                    .iter()
                    .filter(|point| (!log_x || point.0 > 0.0) && (!log_y || point.1 > 0.0))
                    .map(|point| (scale(point.0, log_x), scale(point.1, log_y)))
                    .collect();
                if curve.marks {
                    let marks = points.into_iter().map(|point| Circle::new(point, 4, colour.stroke_width(2)));
                    let drawn = chart.draw_series(marks).expect("a string takes everything");
                    drawn.label(&curve.name).legend(move |(x, y)| Circle::new((x + 10, y), 4, colour.stroke_width(2)));
                } else {
                    let line = LineSeries::new(points, colour.stroke_width(2));
                    let drawn = chart.draw_series(line).expect("a string takes everything");
                    drawn
                        .label(&curve.name)
                        .legend(move |(x, y)| PathElement::new([(x, y), (x + 20, y)], colour.stroke_width(2)));
                }
            }
            chart
                .configure_series_labels()
                .background_style(WHITE.mix(0.85))
                .border_style(RGBColor(190, 190, 190))
                .label_font((FONT, 15))
                .position(self.emptiest_corner(&x, &y))
                .draw()
                .expect("a string takes everything");
        }
        text
    }

    /// The corner in which the fewest points lie: the legend goes there.
    fn emptiest_corner(&self, x: &std::ops::Range<f64>, y: &std::ops::Range<f64>) -> SeriesLabelPosition {
        let share = |value: f64, log: bool, range: &std::ops::Range<f64>| {
            ((if log { value.log10() } else { value }) - range.start) / (range.end - range.start)
        };
        let crowd = |right: bool, upper: bool| {
            let points = self.curves.iter().flat_map(|curve| &curve.points);
            let inside = points.filter(|point| {
                let (x, y) = (share(point.0, self.log.0, x), share(point.1, self.log.1, y));
                (x > 0.55) == right && (y > 0.6) == upper
            });
            inside.count()
        };
        let corners = [
            (crowd(true, true), SeriesLabelPosition::UpperRight),
            (crowd(true, false), SeriesLabelPosition::LowerRight),
            (crowd(false, true), SeriesLabelPosition::UpperLeft),
            (crowd(false, false), SeriesLabelPosition::LowerLeft),
        ];
        corners.into_iter().min_by_key(|corner| corner.0).expect("there are four").1
    }
}

/// Number of labels: whole powers of ten on a logarithmic axis.
fn labels(range: &std::ops::Range<f64>, log: bool) -> usize {
    if log { (range.end - range.start).round() as usize + 1 } else { 8 }
}

fn label(value: f64, log: bool) -> String {
    if log {
        return if value.fract().abs() < 1e-9 { format!("1e{value:.0}") } else { String::new() };
    }
    let size = value.abs();
    if size < 1e-12 {
        "0".into()
    } else if (0.01..1e5).contains(&size) {
        let text = format!("{value:.3}");
        text.trim_end_matches('0').trim_end_matches('.').to_owned()
    } else {
        format!("{value:.1e}")
    }
}
