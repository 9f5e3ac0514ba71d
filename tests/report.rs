//! The report: tables, JSON, figures and the page, from findings of an invented line.

#[path = "report/fixture.rs"]
mod fixture;

use stillwarm::report::{drawing, figure};

/// Writes the figures where a person can look at them.
#[test]
#[ignore = "for people who want to look: writes target/look"]
fn look() {
    let folder = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("target/look");
    std::fs::create_dir_all(&folder).unwrap();
    for (name, findings) in [("outage", fixture::outage(None)), ("back", fixture::outage(Some(36.0 * 3600.0)))] {
        for figure in figure::all(&findings) {
            std::fs::write(folder.join(format!("{name}-{}.png", figure.stem)), drawing::png(&figure).unwrap()).unwrap();
            std::fs::write(folder.join(format!("{name}-{}.svg", figure.stem)), drawing::svg(&figure).unwrap()).unwrap();
        }
    }
}
