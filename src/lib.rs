//! Stillwarm: transient answers for electrically heated lines.
#![warn(missing_docs)]
pub mod answer;
pub mod case;
pub mod faults;
pub mod history;
pub mod library;
pub mod march;
pub mod material;
pub mod mesh;
pub mod report;
pub mod section;
pub mod series;
pub mod units;
