//! The font of the figures, bundled so that they look the same on a bare machine. Its licence lies beside it.

use plotters::style::{FontStyle, register_font};
use std::sync::Once;

/// Upright, normal weight.
pub(crate) const REGULAR: &[u8] = include_bytes!("font/figures-regular.otf");
/// Upright, heavier, for titles.
pub(crate) const SEMI_BOLD: &[u8] = include_bytes!("font/figures-semibold.otf");

/// The family as a style sheet names it: the bundled font first, then what a viewer is likely to have. A bitmap finds the
/// bundled font under the same words.
pub(crate) const FAMILY: &str = "Stillwarm Figures, Inter, Arial, sans-serif";

/// Makes the bundled font known to the drawing library; any number of calls do it once.
pub(crate) fn register() {
    static ONCE: Once = Once::new();
    ONCE.call_once(|| {
        for (style, bytes) in [(FontStyle::Normal, REGULAR), (FontStyle::Bold, SEMI_BOLD)] {
            assert!(register_font(FAMILY, style, bytes).is_ok(), "the bundled font is an OpenType font");
        }
    });
}
