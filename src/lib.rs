//! Stillwarm: transient answers for electrically heated lines.
#![warn(missing_docs)]
pub mod answer;
pub mod history;
pub mod march;
pub mod material;
pub mod mesh;
pub mod report;
pub mod section;
pub mod series;
