//! The report: tables, JSON, figures and the page, from findings of an invented line.

#[path = "report/fixture.rs"]
mod fixture;

use stillwarm::report;

/// Writes the figures where a person can look at them.
#[test]
#[ignore = "for people who want to look: writes target/look"]
fn look() {
    let folder = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("target/look");
    for (name, findings) in [("outage", fixture::outage(None)), ("back", fixture::outage(Some(36.0 * 3600.0)))] {
        report::write_folder(&folder.join(name), &findings).unwrap();
    }
}
