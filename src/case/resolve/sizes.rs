//! Radii of the layers from whatever diameters, thicknesses and pipe sizes were stated.
//!
//! Of a layer's inside diameter, outside diameter and thickness any two give the third; a neighbour gives the face
//! that both share. Whatever is stated beyond that must agree.

use crate::case::raw::{Case, Layer, Quantity};
use crate::faults::{Fault, Faults, Span};
use crate::library;

/// Sizes that differ by less agree [m]: what printed tables of pipes round to.
const ROUNDING_M: f64 = 2e-5;

/// A diameter or twice a thickness [m], and what it was taken from.
#[derive(Debug, Clone, Copy)]
struct Size {
    value_m: f64,
    span: Span,
}

#[derive(Debug, Clone, Copy, Default)]
struct Sizes {
    inside: Option<Size>,
    outside: Option<Size>,
    wall: Option<Size>,
}

impl Sizes {
    /// Works out the third of three; returns whether that was new.
    fn complete(&mut self) -> bool {
        match (self.inside, self.outside, self.wall) {
            (Some(inside), Some(outside), None) => {
                self.wall = Some(Size { value_m: (outside.value_m - inside.value_m) / 2.0, span: outside.span });
            }
            (Some(inside), None, Some(wall)) => {
                self.outside = Some(Size { value_m: inside.value_m + 2.0 * wall.value_m, span: wall.span });
            }
            (None, Some(outside), Some(wall)) => {
                self.inside = Some(Size { value_m: outside.value_m - 2.0 * wall.value_m, span: wall.span });
            }
            _ => return false,
        }
        true
    }
}

/// Inside and outside radius of each layer [m]; `None` where they cannot be known, which has then been told.
pub(super) fn radii(case: &Case, faults: &mut Faults) -> Vec<Option<(f64, f64)>> {
    let mut sizes: Vec<_> = case.layers.iter().map(|layer| stated(layer, faults)).collect();
    loop {
        let mut is_new = false;
        for layer in &mut sizes {
            is_new |= layer.complete();
        }
        for inner in 1..sizes.len() {
            let (before, after) = sizes.split_at_mut(inner);
            let (Some(within), Some(around)) = (before.last_mut(), after.first_mut()) else { continue };
            match (within.outside, around.inside) {
                (Some(face), None) => around.inside = Some(face),
                (None, Some(face)) => within.outside = Some(face),
                _ => continue,
            }
            is_new = true;
        }
        if !is_new {
            break;
        }
    }
    report_unknown(case, &sizes, faults);

    let mut radii: Vec<Option<(f64, f64)>> = Vec::with_capacity(sizes.len());
    let mut inner: Option<Size> = None;
    for (layer, size) in case.layers.iter().zip(&sizes) {
        let (Some(inside), Some(outside), Some(wall)) = (size.inside, size.outside, size.wall) else {
            inner = None;
            radii.push(None);
            continue;
        };
        if let Some(within) = inner
            && (within.value_m - inside.value_m).abs() > ROUNDING_M
        {
            let gap_m = (inside.value_m - within.value_m) / 2.0;
            let what = if gap_m > 0.0 { "leaves a gap to" } else { "overlaps" };
            faults.push(
                Fault::error(
                    inside.span,
                    format!("the layer {what} the one inside it, by {}", millimetres(gap_m.abs())),
                )
                .label(format!("makes the inside diameter {}", millimetres(inside.value_m)))
                .also(within.span, format!("makes the outside diameter {}", millimetres(within.value_m)))
                .help("layers lie on one another; an air gap is a layer of its own, or the contact of this one"),
            );
        }
        if (outside.value_m - inside.value_m - 2.0 * wall.value_m).abs() > ROUNDING_M {
            faults.push(
                Fault::error(layer.span, "the layer's sizes contradict each other")
                    .label(format!(
                        "{} inside and {} of wall do not make {} outside",
                        millimetres(inside.value_m),
                        millimetres(wall.value_m),
                        millimetres(outside.value_m)
                    ))
                    .help("two of the three are enough"),
            );
        }
        if inside.value_m <= 0.0 {
            faults.push(
                Fault::error(wall.span, format!("a wall of {} fills the pipe", millimetres(wall.value_m)))
                    .label(format!("does not fit into {} outside diameter", millimetres(outside.value_m)))
                    .help("a solid core is a content whose state is \"still\""),
            );
        } else if outside.value_m <= inside.value_m {
            faults.push(
                Fault::error(outside.span, "the outside diameter must be larger than the inside diameter")
                    .label(format!("{} outside", millimetres(outside.value_m)))
                    .also(inside.span, format!("{} inside", millimetres(inside.value_m))),
            );
        }
        // The inner layer's face is the one that both share, to the last digit.
        let inside_m = inner.map_or(inside.value_m, |within| within.value_m);
        inner = Some(outside);
        radii.push(Some((inside_m / 2.0, outside.value_m / 2.0)));
    }
    radii
}

fn stated(layer: &Layer, faults: &mut Faults) -> Sizes {
    let size = |quantity: Option<Quantity>| quantity.map(|size| Size { value_m: size.value_si, span: size.span });
    let mut sizes = Sizes {
        inside: size(layer.inside_diameter),
        outside: size(layer.outside_diameter),
        wall: size(layer.thickness),
    };
    let Some(designation) = &layer.pipe else { return sizes };
    let pipe = match library::pipe(&designation.value) {
        Ok(pipe) => pipe,
        Err(fault) => {
            let mut told = Fault::error(designation.span, fault.to_string()).label("no such pipe size");
            if !fault.suggestions.is_empty() {
                let near: Vec<_> = fault.suggestions.iter().map(|near| format!("\"{near}\"")).collect();
                told = told.help(format!("did you mean {}?", near.join(" or ")));
            }
            faults.push(told);
            return sizes;
        }
    };
    let by_pipe = |value_m| Size { value_m, span: designation.span };
    let inside_m = pipe.outside_diameter_m - 2.0 * pipe.wall_m;
    for (own, of_pipe, what) in [
        (&mut sizes.outside, pipe.outside_diameter_m, "outside diameter"),
        (&mut sizes.wall, pipe.wall_m, "wall"),
        (&mut sizes.inside, inside_m, "inside diameter"),
    ] {
        if let Some(own) = own
            && (own.value_m - of_pipe).abs() > ROUNDING_M
        {
            faults.push(
                Fault::error(own.span, format!("the pipe size and the {what} contradict each other"))
                    .label(format!("{} here", millimetres(own.value_m)))
                    .also(designation.span, format!("{what} {} by the pipe size", millimetres(of_pipe)))
                    .help("take out one of the two"),
            );
        }
        *own = Some(by_pipe(of_pipe));
    }
    sizes
}

/// Tells the innermost layer whose size is missing; what lies outside it depends on it.
fn report_unknown(case: &Case, sizes: &[Sizes], faults: &mut Faults) {
    let is_known = |size: &Sizes| size.inside.is_some() && size.outside.is_some();
    if case.layers.iter().any(|layer| layer.has_faulty_size) {
        return;
    }
    let Some(number) = sizes.iter().position(|size| !is_known(size)) else { return };
    let layer = &case.layers[number];
    // A pipe size that was not found has been told.
    if layer.pipe.is_some() {
        return;
    }
    let needs = if number > 0 && sizes[number].inside.is_some() {
        "`thickness` or `outside_diameter`"
    } else {
        "two of `inside_diameter`, `outside_diameter` and `thickness`, or a `pipe` size"
    };
    faults.push(
        Fault::error(layer.span, format!("the size of this layer is not stated: it needs {needs}")).label("how large?"),
    );
}

fn millimetres(value_m: f64) -> String {
    let text = format!("{:.3}", value_m * 1e3);
    format!("{} mm", text.trim_end_matches('0').trim_end_matches('.'))
}
