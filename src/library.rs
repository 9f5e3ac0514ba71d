//! Built-in materials and pipe sizes.
//!
//! The figures stand in data files, `library/materials.toml` and `library/pipes.csv`, each beside its source and a
//! [`Mark`] that says whether it was read there, worked out anew, or recalled. A case may define a material of its own
//! instead. They are starting values: a maker's data sheet for the material at hand prevails.

mod materials;
mod pipes;

pub use materials::{Block, BuiltIn, Figure, Freezing, Mark, material, material_names, materials};
pub use pipes::{CatalogPipe, PipeFault, PipeFaultReason, PipeSize, Schedule, pipe, pipes};
