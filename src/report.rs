//! Turns findings into what people read: files in a folder, figures, a page.
pub mod axis;

pub mod drawing;
pub mod figure;
mod font;
pub mod json;

pub mod tables;
pub mod text;

/// stand-in
pub(crate) fn duration_words(time_s: f64, danger: bool) -> String {
    let minutes = if danger { (time_s / 60.0).floor() } else { (time_s / 60.0).ceil() };
    let (hours, minutes) = ((minutes / 60.0).floor(), minutes % 60.0);
    if hours == 0.0 { format!("{minutes} min") } else { format!("{hours} h {minutes} min") }
}
