//! The time march of one section: state, step, events.
//!
//! [`run`] takes a [`Section`] and a [`Plan`] and gives back a [`Trace`]. Nothing here reads a file or prints.

pub mod plan;
pub mod steady;

pub use plan::*;

use crate::section::Section;

/// Marches a section through time as planned. `progress` is told the time reached [s] now and then and answers whether
/// to go on.
///
/// # Errors
/// A [`MarchError`]: where the computation failed and why.
pub fn run(
    _section: &Section,
    _plan: &Plan,
    _settings: &Settings,
    _progress: &mut dyn FnMut(f64) -> bool,
) -> Result<Trace, MarchError> {
    todo!("the core is being written")
}
