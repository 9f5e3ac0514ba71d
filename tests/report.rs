//! The report: tables, JSON, figures and the page, from findings of an invented line.

#[path = "report/fixture.rs"]
mod fixture;

use std::fs;
use std::path::Path;
use stillwarm::answer::Findings;
use stillwarm::report::figure::{self, Figure};
use stillwarm::report::{self, ReportError, drawing, json, page, tables};

const HOUR: f64 = 3600.0;

fn all() -> Vec<(&'static str, Findings)> {
    vec![
        ("outage", fixture::outage(None)),
        ("back", fixture::outage(Some(36.0 * HOUR))),
        ("cycling", fixture::cycling()),
        ("steady", fixture::steady()),
        ("bare", fixture::bare_core()),
        ("hostile", fixture::hostile()),
    ]
}

/// Writes the reports where a person can look at them.
#[test]
#[ignore = "for people who want to look: writes target/look"]
fn look() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("target/look");
    let solved = [("solved", fixture::solved(None)), ("solved-back", fixture::solved(Some(36.0 * HOUR)))];
    for (name, findings) in all().into_iter().chain(solved) {
        report::write_folder(&folder.join(name), &findings).unwrap();
    }
}

fn history_rows(findings: &Findings) -> Vec<Vec<String>> {
    let mut bytes = Vec::new();
    tables::write_history(&mut bytes, findings).unwrap();
    read_rows(&bytes)
}

fn read_rows(bytes: &[u8]) -> Vec<Vec<String>> {
    let mut reader = csv::ReaderBuilder::new().has_headers(false).from_reader(bytes);
    reader.records().map(|record| record.unwrap().iter().map(String::from).collect()).collect()
}

#[test]
fn history_has_the_promised_columns_and_gives_the_numbers_back() {
    let findings = fixture::outage(Some(36.0 * HOUR));
    let rows = history_rows(&findings);
    assert_eq!(
        rows[0],
        [
            "time_s",
            "air_degC",
            "centre_degC",
            "content_mean_degC",
            "frozen_fraction",
            "wall_inside_degC",
            "wall_outside_degC",
            "lagging_inside_degC",
            "lagging_outside_degC",
            "jacket_inside_degC",
            "jacket_outside_degC",
            "trace_w_per_m",
            "lost_w_per_m",
            "mid lagging_degC",
        ]
    );
    let history = &findings.history;
    assert_eq!(rows.len(), 1 + history.times_s.len());
    for (row, cells) in rows[1..].iter().enumerate() {
        let value = |column: usize| cells[column].parse::<f64>().unwrap();
        let close =
            |read: f64, held: f64| assert!((read - held).abs() <= 1e-9 * held.abs().max(1.0), "{read} for {held}");
        close(value(0), history.times_s[row]);
        close(value(4), history.frozen_share[row]);
        close(value(7), history.faces_k[[row, 2]] - fixture::ZERO);
        close(value(11), history.heaters_w_per_m[[row, 0]]);
        close(value(12), history.lost_w_per_m[row]);
        close(value(13), history.probes_k[[row, 0]] - fixture::ZERO);
    }
}

#[test]
fn what_does_not_exist_is_an_empty_cell_and_no_head_is_a_formula() {
    let rows = history_rows(&fixture::hostile());
    assert_eq!((rows[1][2].as_str(), rows[1][3].as_str()), ("", ""));
    for head in &rows[0] {
        assert!(!head.starts_with(['=', '+', '-', '@']), "{head}");
        assert!(!head.chars().any(char::is_control), "{head}");
    }
    assert!(rows[0][5].starts_with("'=cmd"), "{}", rows[0][5]);
}

#[test]
fn profile_gives_both_temperatures_of_a_contact() {
    let findings = fixture::outage(None);
    let mut bytes = Vec::new();
    tables::write_profile(&mut bytes, &findings).unwrap();
    let rows = read_rows(&bytes);
    assert_eq!(rows[0], ["time_s", "radius_mm", "temperature_degC", "layer"]);
    let radii = findings.history.profile_radii_m.len();
    assert_eq!(rows.len(), 1 + radii * findings.history.times_s.len());
    let at_contact: Vec<&Vec<String>> = rows[1..=radii].iter().filter(|row| row[1] == "44.45").collect();
    assert_eq!(at_contact.iter().map(|row| row[3].as_str()).collect::<Vec<_>>(), ["wall", "lagging"]);
    assert_ne!(at_contact[0][2], at_contact[1][2]);
    assert_eq!(rows[1][3], "content");
    assert_eq!(rows[radii][3], "jacket");
}

#[test]
fn json_has_every_key_that_others_rely_on() {
    let object = json::answer_json(&fixture::outage(None));
    let keys = |value: &serde_json::Value, keys: &[&str]| {
        for key in keys {
            assert!(value.get(key).is_some(), "no {key} in {value}");
        }
    };
    keys(
        &object,
        &[
            "verb",
            "title",
            "version",
            "input_digest",
            "answers",
            "start",
            "energy",
            "effort",
            "cautions",
            "assumptions",
            "headline",
        ],
    );
    for answer in object["answers"].as_array().unwrap() {
        keys(
            answer,
            &[
                "name",
                "outcome",
                "time_s",
                "error_s",
                "value",
                "unit",
                "error",
                "where",
                "limit_value",
                "closest_value",
                "closest_error",
                "closest_time_s",
                "cautious_time_s",
            ],
        );
    }
    keys(&object["start"], &["faces", "content_mean_degC", "heater_w_per_m", "lost_w_per_m", "into_content_w_per_m"]);
    keys(
        &object["energy"],
        &["supplied_j_per_m", "lost_j_per_m", "stored_j_per_m", "carried_j_per_m", "residual_relative"],
    );
    keys(&object["effort"], &["cells", "steps", "rejected_steps", "newton_iterations"]);
    assert_eq!(object["version"], env!("CARGO_PKG_VERSION"));
    assert_eq!(object["start"]["faces"][0]["name"], "wall inside");
    assert_eq!(object["start"]["faces"][0]["temperature_degC"], 5.0);
    assert_eq!(object["answers"][0]["outcome"], "reached");
    assert!(object["answers"][0]["value"].is_null());
}

#[test]
fn json_says_null_where_there_is_no_content() {
    let object = json::answer_json(&fixture::hostile());
    assert!(object["start"]["content_mean_degC"].is_null());
    assert!(!object.to_string().chars().any(char::is_control));
}

fn names(figure: &Figure, panel: usize) -> Vec<&str> {
    figure.panels[panel].curves.iter().flat_map(|curve| curve.names.iter().map(String::as_str)).collect()
}

#[test]
fn histories_show_the_places_that_matter_with_limits_and_events() {
    let figure = figure::histories(&fixture::outage(Some(36.0 * HOUR)));
    assert_eq!(figure.axis.label, "Time [h]");
    assert_eq!((figure.axis.low, figure.axis.high), (0.0, 96.0));
    let labels: Vec<&str> = figure.panels.iter().map(|panel| panel.axis.label.as_str()).collect();
    assert_eq!(labels, ["Temperature [°C]", "Frozen share of the content [%]", "Heater output [W/m]"]);
    for name in ["water, mean", "wall outside (trace)", "jacket outside", "air", "mid lagging"] {
        assert!(names(&figure, 0).contains(&name), "{name} is missing");
    }
    assert!(!names(&figure, 0).contains(&"wall outside"), "the heater's face is named once");
    assert_eq!(figure.panels[0].levels.iter().map(|level| level.value).collect::<Vec<_>>(), [2.0]);
    let uprights: Vec<(f64, &str)> =
        figure.uprights.iter().map(|upright| (upright.at, upright.label.as_str())).collect();
    assert_eq!(uprights, [(0.0, "supply lost"), (36.0, "supply back")]);
}

#[test]
fn limits_passed_are_dots_on_their_own_panel() {
    let figure = figure::histories(&fixture::outage(None));
    let dots = |panel: usize| figure.panels[panel].dots.iter().map(|dot| dot.at.1).collect::<Vec<_>>();
    assert_eq!(dots(0), [2.0]);
    assert_eq!(dots(1), [0.0, 50.0, 100.0]);
    assert!(figure.panels[1].dots[0].label.starts_with("first ice, "));
}

#[test]
fn every_curve_lies_within_its_axis() {
    for (name, findings) in all() {
        for figure in figure::all(&findings) {
            for panel in &figure.panels {
                for point in panel.curves.iter().flat_map(|curve| &curve.points).filter(|point| point.1.is_finite()) {
                    let inside = (-1e-9..=1.0 + 1e-9).contains(&panel.axis.share(point.1))
                        && (-1e-9..=1.0 + 1e-9).contains(&figure.axis.share(point.0));
                    assert!(inside, "{name}, {}: {point:?} outside {:?}", figure.kind.name(), panel.axis);
                }
            }
        }
    }
}

#[test]
fn a_thermostat_that_goes_on_switching_has_a_panel_and_no_marks() {
    let figure = figure::histories(&fixture::cycling());
    assert!(figure.uprights.is_empty(), "{:?}", figure.uprights);
    assert_eq!(figure.panels.last().unwrap().axis.label, "Heater output [W/m]");
}

#[test]
fn profiles_shade_the_layers_and_jump_at_the_contact() {
    let figure = figure::profiles(&fixture::outage(None));
    assert_eq!(figure.axis.label, "Radius [mm]");
    let bands: Vec<&str> = figure.bands.iter().map(|band| band.label.as_str()).collect();
    assert_eq!(bands, ["water", "wall", "lagging", "jacket"]);
    assert_eq!(figure.uprights.len(), 1);
    let curves = &figure.panels[0].curves;
    assert!((3..=6).contains(&curves.len()), "{} profiles", curves.len());
    assert_eq!(curves[0].names, ["0 h"]);
    let at_contact: Vec<f64> =
        curves[0].points.iter().filter(|point| (point.0 - 44.45).abs() < 1e-9).map(|point| point.1).collect();
    assert_eq!(at_contact.len(), 2);
    assert!(at_contact[0] - at_contact[1] > 0.05, "{at_contact:?}");
}

#[test]
fn the_heat_balance_closes_at_every_time() {
    for findings in [fixture::outage(Some(36.0 * HOUR)), fixture::cycling()] {
        let figure = figure::heat_balance(&findings);
        let points = |name: &str| {
            let curve = figure.panels[0].curves.iter().find(|curve| curve.names == [name]).unwrap();
            curve.points.clone()
        };
        let (stored, heaters, lost) = (points("stored"), points("heaters"), points("lost to the outside"));
        assert!(stored.len() == heaters.len() && stored.len() == lost.len(), "all have the same times");
        for ((stored, heater), lost) in stored.iter().zip(&heaters).zip(&lost) {
            let off = heater.1 - lost.1 - stored.1;
            assert!(off.abs() < 1e-9, "off by {off} at {}", stored.0);
        }
    }
}

#[test]
fn a_state_without_a_history_has_a_profile_only() {
    let figures = figure::all(&fixture::steady());
    assert_eq!(figures.iter().map(|figure| figure.kind.name()).collect::<Vec<_>>(), ["profiles"]);
    assert_eq!(figures[0].panels[0].curves[0].names, ["settled"]);
}

#[test]
fn svg_and_png_are_drawn_for_every_kind_of_findings() {
    for (name, findings) in all() {
        for figure in figure::all(&findings) {
            let svg = drawing::svg(&figure).unwrap();
            assert!(svg.starts_with("<svg") && svg.trim_end().ends_with("</svg>"), "{name}");
            assert!(!svg.contains("<script"), "{name}");
            assert!(!svg.contains("NaN"), "{name}");
            let png = drawing::png(&figure).unwrap();
            assert_eq!(&png[..8], b"\x89PNG\r\n\x1a\n", "{name}");
        }
    }
}

#[test]
fn the_page_stands_alone_and_names_cannot_change_it() {
    let page = page::page(&fixture::hostile()).unwrap();
    assert!(!page.contains("<script"));
    assert!(page.contains("&lt;script&gt;"));
    assert!(!page.contains('\u{1b}') && !page.contains('\u{202e}'));
    for outside in ["http://", "https://", "src=\"", "<link", "@import"] {
        let rest = page.replace("http://www.w3.org/2000/svg", "");
        assert!(!rest.contains(outside), "the page refers to {outside}");
    }
}

#[test]
fn the_page_has_the_decision_before_everything_else() {
    let findings = fixture::outage(None);
    let page = page::page(&findings).unwrap();
    let place = |text: &str| page.find(text).unwrap_or_else(|| panic!("no {text}"));
    let order = [
        place(&findings.headline[0]),
        place("Answers</h2>"),
        place("What governs it"),
        place("Cautions</h2>"),
        place("The line as solved"),
        place("from memory"),
        place("State at the start"),
        place("id=\"histories\""),
        place("Energy audit"),
        place("Assumptions</h2>"),
        place(&findings.input_digest),
    ];
    assert!(order.is_sorted(), "{order:?}");
}

fn names_in(folder: &Path) -> Vec<String> {
    let mut names: Vec<String> =
        fs::read_dir(folder).unwrap().map(|entry| entry.unwrap().file_name().into_string().unwrap()).collect();
    names.sort();
    names
}

#[test]
fn a_folder_is_written_whole_and_an_older_report_leaves_nothing_behind() {
    let parent = tempfile::tempdir().unwrap();
    let folder = parent.path().join("new/report");
    let written = report::write_folder(&folder, &fixture::outage(None)).unwrap();
    assert_eq!(written.len(), report::FILE_NAMES.len());
    assert!(written.iter().all(|path| path.is_file()));
    assert_eq!(names_in(&parent.path().join("new")), ["report"], "no temporary folder stays");

    fs::write(folder.join("notes.txt"), "mine").unwrap();
    report::write_folder(&folder, &fixture::steady()).unwrap();
    assert_eq!(
        names_in(&folder),
        ["answer.json", "history.csv", "notes.txt", "profile.csv", "profiles.png", "profiles.svg", "report.html"]
    );
}

#[test]
fn a_file_in_the_way_is_named_and_kept() {
    let parent = tempfile::tempdir().unwrap();
    let path = parent.path().join("report");
    fs::write(&path, "mine").unwrap();
    let error = report::write_folder(&path, &fixture::steady()).unwrap_err();
    assert!(matches!(error, ReportError::NotAFolder { .. }), "{error}");
    let error = report::write_folder(&path.join("below"), &fixture::steady()).unwrap_err();
    assert!(matches!(error, ReportError::NotAFolder { .. }), "{error}");
    assert_eq!(fs::read_to_string(&path).unwrap(), "mine");
}

#[cfg(target_os = "linux")]
#[test]
fn a_place_that_takes_no_files_is_named() {
    let error = report::write_folder(Path::new("/proc/report"), &fixture::steady()).unwrap_err();
    assert!(error.to_string().starts_with("cannot write the report to /proc/report"), "{error}");
}
