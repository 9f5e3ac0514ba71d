//! Stillwarm: transient answers for electrically heated lines.
#![warn(missing_docs)]
// Units stand in brackets at the end of a description: `[W/m]` is no link.
#![allow(rustdoc::broken_intra_doc_links)]

pub mod answer;
pub mod case;
pub mod cli;
pub mod duration;
pub mod faults;
pub mod history;
pub mod library;
pub mod march;
pub mod material;
pub mod mesh;
pub mod question;
pub mod report;
pub mod section;
pub mod series;
pub mod shipped;
pub mod units;
