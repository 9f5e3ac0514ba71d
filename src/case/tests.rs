//! What cases mean, that every key is read or refused, and that no text whatever ends in a panic.

use super::keys::{self, Key, Table};
use super::*;
use crate::section::{Change, Condition, ContentState, Face, Place, Record, Seat, Side, Start};
use crate::series::Series;
use proptest::prelude::*;
use std::collections::BTreeSet;
use std::f64::consts::PI;
use std::path::PathBuf;

const DESIGN: &str = include_str!("../../tests/good/design.toml");
const OWN_MATERIALS: &str = include_str!("../../tests/good/own_materials.toml");
const BARE_CORE: &str = include_str!("../../tests/good/bare_core.toml");
const HELD_BORE: &str = include_str!("../../tests/good/held_bore.toml");
const GOOD: [&str; 4] = [DESIGN, OWN_MATERIALS, BARE_CORE, HELD_BORE];

fn folder() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/good")
}

fn read(text: &str, overrides: &[&str]) -> Result<Loaded, Faults> {
    let overrides: Vec<_> = overrides.iter().map(|text| (*text).to_owned()).collect();
    load_text("case.toml", text, &folder(), &overrides)
}

fn sound(text: &str, overrides: &[&str]) -> Loaded {
    read(text, overrides).unwrap_or_else(|faults| panic!("{faults}"))
}

fn close(value: f64, expected: f64) {
    assert!((value - expected).abs() <= 1e-12 * expected.abs().max(1.0), "{value}, not {expected}");
}

#[test]
fn the_case_of_the_design_means_what_it_says() {
    let section = sound(DESIGN, &[]).section;
    assert_eq!(section.title, "Wash-water branch to the lower orchard");
    assert_eq!(section.line.tag.as_deref(), Some("WW-07"));
    assert_eq!(section.line.effective_length_m(), Some(40.0));
    close(section.content.radius_m, (0.0889 - 2.0 * 0.00549) / 2.0);
    assert_eq!(section.content.material.as_ref().unwrap().name, "water");
    let names: Vec<_> = section.layers.iter().map(|layer| layer.name.as_str()).collect();
    assert_eq!(names, ["wall", "lagging", "jacket"]);
    for pair in section.layers.windows(2) {
        assert_eq!(pair[0].outside_radius_m, pair[1].inside_radius_m);
    }
    close(section.outermost_radius_m(), 0.04445 + 0.05 + 0.0006);
    close(section.layers[1].contact.resistance_m_k_per_w, 1.0 / (2.0 * PI * 0.04445 * 400.0));
    let outer_wall = Face { layer: 0, side: Side::Outside };
    let heater = &section.heaters[0];
    assert_eq!((heater.seat, heater.output_w_per_m, heater.output_low_w_per_m), (Seat::Face(outer_wall), 15.0, 15.0));
    let thermostat = heater.thermostat.unwrap();
    assert_eq!((thermostat.senses, thermostat.on_below_k), (Place::Face(outer_wall), 278.15));
    close(section.outside.temperature_k.at(0.0), 248.15);
    assert_eq!(section.outside.film, Some(18.0));
    assert_eq!(section.start, Start::Hold);
    assert!(matches!(section.events[0].change, Change::Supply(false)));
    assert_eq!(section.limits[0].condition, Condition::Frozen(0.0));
    assert_eq!(section.limits[1].condition, Condition::Below(Place::Face(outer_wall), 275.15));
    assert_eq!(section.run.until_s, Some(96.0 * 3600.0));
    assert_eq!(section.run.record, Record::At(vec![3600.0, 7200.0, 14400.0]));
}

#[test]
fn own_materials_contacts_events_and_series_mean_what_they_say() {
    let loaded = sound(OWN_MATERIALS, &[]);
    assert_eq!(loaded.notes, ["the case's own material `Mineral Wool` replaces the built-in material `mineral wool`"]);
    let section = loaded.section;
    let wax = section.content.material.as_ref().unwrap();
    assert_eq!(wax.freezing_k, Some((325.15, 331.15)));
    assert_eq!(wax.provenance.source, "data sheet of an invented maker");
    assert!(wax.provenance.own && !wax.provenance.overrides_built_in);
    assert!(section.layers[1].material.provenance.overrides_built_in);
    assert_eq!(section.content.state, ContentState::Flowing { temperature_k: 348.15, film: 150.0 });

    assert_eq!(section.layers[0].contact, crate::section::Contact::default());
    let taped = &section.layers[1].contact;
    close(taped.resistance_m_k_per_w, 1.0 / (2.0 * PI * 0.04445 * 125.0));
    let words = taped.words.as_ref().unwrap();
    assert_eq!((words.words.as_str(), words.low, words.high), ("under foil tape", 50.0, 200.0));
    assert_eq!(section.layers[2].contact.resistance_m_k_per_w, 0.009);

    let trace = &section.heaters[0];
    close(trace.output_per_line_w_per_m(), 9.0 / 0.3048);
    close(trace.output_low_w_per_m, 0.9 * trace.output_w_per_m);
    assert_eq!(trace.thermostat.unwrap().senses, Place::Air);
    assert_eq!((section.heaters[1].seat, section.heaters[1].output_low_w_per_m), (Seat::Layer(0), 1.5));
    assert_eq!(section.heaters[2].thermostat.unwrap().senses, Place::Radius(0.06));

    let Series::Table { times_s, source, .. } = &section.outside.temperature_k else { panic!("a constant") };
    assert_eq!((times_s.as_slice(), source.as_str()), ([0.0, 43200.0, 86400.0].as_slice(), "air.csv, column air_degC"));
    let Start::Reading { place, temperature_k } = section.start else { panic!("no reading") };
    assert_eq!((place, temperature_k), (Place::Face(Face { layer: 1, side: Side::Inside }), 343.15));

    let hours: Vec<_> = section.events.iter().map(|event| event.time_s / 3600.0).collect();
    assert_eq!(hours, [1.0, 2.0, 3.0, 4.0, 5.0, 5.0, 6.0, 7.0, 8.0, 9.0]);
    assert!(matches!(section.events[0].change, Change::HeaterTripped(0)));
    assert!(matches!(section.events[1].change, Change::Content(ContentState::Still)));
    assert!(matches!(section.events[2].change, Change::HeaterReset(0)));
    assert!(matches!(section.events[3].change, Change::HeaterOutput(2, 4.0)));
    assert!(matches!(section.events[5].change, Change::OutsideFilm(25.0)));
    assert!(matches!(section.events[6].change, Change::Content(ContentState::Stirred { film: Some(100.0) })));
    assert_eq!(section.limits[1].condition, Condition::Above(Place::LayerMean(0), 368.15));
    assert_eq!(section.limits[2].condition, Condition::Below(Place::Centre, 323.15));
    assert_eq!(section.run.record, Record::Every(600.0));
}

#[test]
fn bare_cores_and_held_bores_are_read() {
    let core = sound(BARE_CORE, &[]).section;
    assert_eq!((core.content.radius_m, core.layers.len(), core.outside.film), (0.04, 0, None));
    assert_eq!(core.limits[0].condition, Condition::Thawed(0.0));
    let hose = sound(HELD_BORE, &[]).section;
    assert_eq!(hose.content.state, ContentState::HeldAt { temperature_k: 313.15 });
    assert!(hose.content.material.is_none());
    close(hose.content.radius_m, 0.00635);
    assert!(matches!(hose.events[0].change, Change::Content(ContentState::HeldAt { temperature_k: 293.15 })));
}

#[test]
fn any_two_sizes_give_the_third_and_neighbours_share_a_face() {
    let size = |wall: &str, lagging: &str| {
        let text = DESIGN
            .replace("pipe = \"DN 80, schedule 40\"", wall)
            .replace("thickness = \"50 mm\"", lagging)
            .replace("radius = \"69.45 mm\"", "radius = \"60 mm\"");
        let layers = sound(&text, &[]).section.layers;
        for (value, expected) in [
            (layers[0].inside_radius_m, 0.0400),
            (layers[0].outside_radius_m, 0.0445),
            (layers[1].inside_radius_m, 0.0445),
            (layers[1].outside_radius_m, 0.0945),
        ] {
            assert!((value - expected).abs() < 1e-12, "{wall} | {lagging}: {value}, not {expected}");
        }
    };
    for wall in [
        "inside_diameter = \"80 mm\"\noutside_diameter = \"89 mm\"",
        "inside_diameter = \"80 mm\"\nthickness = \"4.5 mm\"",
        "outside_diameter = \"89 mm\"\nthickness = \"4.5 mm\"",
        "inside_diameter = \"80 mm\"\noutside_diameter = \"89 mm\"\nthickness = \"4.5 mm\"",
    ] {
        for lagging in [
            "thickness = \"50 mm\"",
            "outside_diameter = \"189 mm\"",
            "thickness = \"50 mm\"\ninside_diameter = \"89 mm\"",
        ] {
            size(wall, lagging);
        }
    }
    // The lagging's sizes give the pipe's outside.
    size("inside_diameter = \"80 mm\"", "outside_diameter = \"189 mm\"\nthickness = \"50 mm\"");
    size("thickness = \"4.5 mm\"", "outside_diameter = \"189 mm\"\nthickness = \"50 mm\"");
}

#[test]
fn a_contact_counts_at_its_own_radius_in_whatever_form() {
    let resistance = |contact: &str| {
        let text = DESIGN.replace("contact = \"400 W/(m2 K)\"", &format!("contact = {contact}"));
        sound(&text, &[]).section.layers[1].contact.resistance_m_k_per_w
    };
    close(resistance("\"strapped\""), 1.0 / (2.0 * PI * 0.04445 * 60.0));
    close(resistance("\"In Cement\""), 1.0 / (2.0 * PI * 0.04445 * 400.0));
    close(resistance("{ value = \"400 W/(m2 K)\", tolerance = \"30 %\" }"), 1.0 / (2.0 * PI * 0.04445 * 400.0));
    close(resistance("\"0.02 m K/W\""), 0.02);
    close(resistance("\"0.05 h ft degF/BTU\""), 0.05 / 1.730_734_666_371_391);
}

#[test]
fn overrides_change_replace_and_add() {
    let changed = |overrides: &[&str]| sound(DESIGN, overrides).section;
    close(changed(&["outside.air=\"-30 degC\""]).outside.temperature_k.at(0.0), 243.15);
    close(changed(&["outside.air=-30 degC"]).outside.temperature_k.at(0.0), 243.15);
    assert_eq!(changed(&["heater.trace.output=20 W/m"]).heaters[0].output_w_per_m, 20.0);
    assert_eq!(changed(&["heater.0.runs=2"]).heaters[0].runs, 2.0);
    assert_eq!(changed(&["heater.trace.output.tolerance=10 %"]).heaters[0].output_low_w_per_m, 13.5);
    assert_eq!(changed(&["limit.1.below = 1 degC"]).limits[1].condition, {
        Condition::Below(Place::Face(Face { layer: 0, side: Side::Outside }), 274.15)
    });
    let thick = changed(&["layer.\"lagging\".thickness='60 mm'", "probe.mid lagging.radius=75 mm"]);
    close(thick.layers[1].outside_radius_m, 0.10445);
    assert_eq!(thick.probes[0].radius_m, 0.075);
    assert!(matches!(changed(&["start={ temperature = \"2 degC\" }"]).start, Start::Uniform(275.15)));
    assert_eq!(changed(&["run.record=[\"3 h\"]"]).run.record, Record::At(vec![10800.0]));
    let titleless = DESIGN.replace("title = ", "#");
    assert_eq!(sound(&titleless, &[]).section.title, "case");
    assert_eq!(sound(&titleless, &["title=Another"]).section.title, "Another");
    assert_eq!(sound(DESIGN, &["outside.air=-30 degC"]).overrides, ["outside.air=-30 degC"]);
}

#[test]
fn the_digest_is_of_text_overrides_and_series() {
    let digest = |text: &str, overrides: &[&str]| sound(text, overrides).digest;
    let plain = digest(OWN_MATERIALS, &[]);
    assert_eq!(plain.len(), 64);
    assert_eq!(plain, digest(OWN_MATERIALS, &[]));
    assert_ne!(plain, digest(&format!("{OWN_MATERIALS}\n"), &[]));
    assert_ne!(plain, digest(OWN_MATERIALS, &["title=x"]));
    assert_ne!(digest(OWN_MATERIALS, &["title=ab", "title=c"]), digest(OWN_MATERIALS, &["title=a", "title=bc"]));

    let other = tempfile::tempdir().unwrap();
    std::fs::write(other.path().join("air.csv"), "elapsed_h,air_degC\n0,-4\n24,-7\n").unwrap();
    assert_ne!(plain, load_text("case.toml", OWN_MATERIALS, other.path(), &[]).unwrap().digest);
}

#[test]
fn marks_and_line_ends_of_any_kind_change_nothing() {
    let plain = format!("{:?}", sound(DESIGN, &[]).section);
    assert_eq!(plain, format!("{:?}", sound(&format!("\u{feff}{DESIGN}"), &[]).section));
    assert_eq!(plain, format!("{:?}", sound(&DESIGN.replace('\n', "\r\n"), &[]).section));
    let told = read(&DESIGN.replace("\"50 mm\"", "\"50 mn\"").replace('\n', "\r\n"), &[]).unwrap_err().to_string();
    assert!(told.contains("case.toml:19:17") && told.contains("19 | thickness = \"50 mn\"\n"), "{told}");
}

#[test]
fn a_file_that_cannot_be_read_is_told_with_its_remedy() {
    let told = load(&folder().join("nowhere.toml"), &[]).unwrap_err().to_string();
    assert!(told.starts_with("error: there is no file") && told.contains("nowhere.toml"), "{told}");
    let told = load(&folder(), &[]).unwrap_err().to_string();
    assert!(told.contains("is a folder, not a file"), "{told}");
    assert_eq!(load(&folder().join("design.toml"), &[]).unwrap().digest, sound(DESIGN, &[]).digest);
}

/// Which table a key of a table opens, if it opens one.
fn opened_by(table: &Table, key: &str, value: &toml::Value) -> Option<&'static Table> {
    let inner = match (table.title, key) {
        ("the case", "line") => &keys::LINE,
        ("the case", "content") => &keys::CONTENT,
        ("the case", "layer") => &keys::LAYER,
        ("the case", "material") => &keys::MATERIAL,
        ("the case", "heater") => &keys::HEATER,
        ("the case", "outside") => &keys::OUTSIDE,
        ("the case", "start") => &keys::START,
        ("the case", "event") => &keys::EVENT,
        ("the case", "target") => &keys::TARGET,
        ("the case", "limit") => &keys::LIMIT,
        ("the case", "probe") => &keys::PROBE,
        ("the case", "run") => &keys::RUN,
        ("[[material]]", "solid") => &keys::SOLID,
        ("[[heater]]", "thermostat") => &keys::THERMOSTAT,
        ("[start]", "reading") => &keys::READING,
        _ if value.get("file").is_some() => &keys::SERIES,
        _ if value.get("value").is_some() => &keys::QUANTITY,
        _ => return None,
    };
    Some(inner)
}

fn collect(value: &toml::Value, table: &'static Table, seen: &mut BTreeSet<(&'static str, String)>) {
    match value {
        toml::Value::Array(items) => items.iter().for_each(|item| collect(item, table, seen)),
        toml::Value::Table(entries) => {
            for (key, value) in entries {
                seen.insert((table.title, key.clone()));
                if let Some(inner) = opened_by(table, key, value) {
                    collect(value, inner, seen);
                }
            }
        }
        _ => {}
    }
}

#[test]
fn every_modelled_key_stands_in_a_good_case() {
    let mut seen = BTreeSet::new();
    for text in GOOD {
        collect(&toml::Value::Table(text.parse().unwrap()), &keys::CASE, &mut seen);
    }
    for table in keys::TABLES {
        for key in table.keys.iter().filter(|key| key.is_modelled()) {
            assert!(
                seen.contains(&(table.title, key.name.to_owned())),
                "no good case has `{}` in {}",
                key.name,
                table.title
            );
        }
    }
}

#[test]
fn every_key_of_later_work_is_refused_by_name() {
    let path_to = |table: &Table| match table.title {
        "the case" => "",
        "[line]" => "line.",
        "[content]" => "content.",
        "[[layer]]" => "layer.0.",
        "[[material]]" => "material.0.",
        "[material.solid]" => "material.0.solid.",
        "[[heater]]" => "heater.0.",
        "thermostat" => "heater.0.thermostat.",
        "[outside]" => "outside.",
        "a series" => "outside.air.",
        "[start]" => "start.",
        "reading" => "start.reading.",
        "[[event]]" => "event.0.",
        "[[target]]" => "target.keep.",
        "[[limit]]" => "limit.0.",
        "[[probe]]" => "probe.0.",
        "[run]" => "run.",
        "a quantity" => "line.length.",
        other => panic!("no path to {other}"),
    };
    let text =
        format!("{OWN_MATERIALS}\n[[target]]\nname = \"keep\"\nwhere = \"wall outside\"\nat_least = \"60 degC\"\n");
    sound(&text, &[]);
    let mut count = 0;
    for table in keys::TABLES {
        for key in table.keys.iter().filter(|key| !Key::is_modelled(key)) {
            let told = read(&text, &[&format!("{}{}=1", path_to(table), key.name)]).unwrap_err();
            let expected = format!("`{}` in {} is not yet modelled", key.name, table.title);
            assert!(told.iter().any(|fault| fault.message == expected), "{expected}:\n{told}");
            assert_eq!(
                told.iter().filter(|fault| fault.severity == crate::faults::Severity::Error).count(),
                1,
                "{told}"
            );
            count += 1;
        }
    }
    assert!(count > 30);
}

#[test]
fn nesting_without_end_and_texts_without_end_are_refused() {
    for opening in ["a = [", "a = { b = ", "[a."] {
        let text = format!("{opening}{}", opening.trim_start_matches("a = ").repeat(50_000));
        assert!(read(&text, &[]).is_err(), "{opening}");
    }
    assert!(read(DESIGN, &[&format!("title={}", "[".repeat(50_000))]).is_ok());
    assert!(read(&format!("{DESIGN}\n{}", "[[probe]]\n".repeat(2000)), &[]).is_err());
}

/// Loads and shows; panics only where the reader does, or where it refuses without a reason.
fn survives(text: &str, overrides: &[String]) {
    match load_text("case.toml", text, &folder(), overrides) {
        Ok(loaded) => drop(loaded.warnings.render(true)),
        Err(faults) => {
            assert!(faults.has_errors());
            let told = faults.render(false);
            assert!(!told.contains("no fault of it was found"), "{told}\n{text}");
            drop(faults.render(true));
        }
    }
}

const SNIPPETS: [&str; 16] = [
    "",
    "\"",
    "[",
    "]]",
    "=",
    "\n",
    "-",
    "0",
    "\"0 mm\"",
    "[[layer]]\n",
    "{ value = \"1 m\" }",
    "\\",
    "é",
    "\u{0}",
    "1e400",
    "\"wall outside\"",
];

proptest! {
    #[test]
    fn no_text_ends_in_a_panic(text in "(?s).{0,200}", set in "[a-z.\"=0-9]{0,30}") {
        survives(&text, &[]);
        survives(DESIGN, &[set]);
    }

    #[test]
    fn no_mutated_case_ends_in_a_panic(
        which in 0..GOOD.len(),
        cuts in prop::collection::vec((any::<prop::sample::Index>(), 0_usize..40, 0..SNIPPETS.len()), 1..4),
    ) {
        let mut text: Vec<char> = GOOD[which].chars().collect();
        for (at, length, snippet) in cuts {
            let start = at.index(text.len() + 1);
            let end = (start + length).min(text.len());
            text.splice(start..end, SNIPPETS[snippet].chars());
        }
        survives(&text.into_iter().collect::<String>(), &[]);
    }

    #[test]
    fn no_value_in_place_of_another_ends_in_a_panic(
        which in 0..GOOD.len(),
        line in any::<prop::sample::Index>(),
        value in prop::sample::select(vec!["1", "true", "\"\"", "[]", "{}", "[[]]", "\"1 W/m\"", "\"0 K\"", "2031-01-05", "\"air\"", "[\"5 degC\"]"]),
        is_dropped in any::<bool>(),
    ) {
        let mut lines: Vec<String> = GOOD[which].lines().map(str::to_owned).collect();
        let at = line.index(lines.len());
        match lines[at].split_once('=').map(|(key, _)| key.trim().to_owned()) {
            Some(key) if !is_dropped => lines[at] = format!("{key} = {value}"),
            _ => drop(lines.remove(at)),
        }
        survives(&lines.join("\n"), &[]);
    }

    #[test]
    fn no_series_ends_in_a_panic(text in "(?s)(time_h[,;]air_degC\n)?[-0-9.,;\"\n a-z]{0,80}") {
        let folder = tempfile::tempdir().unwrap();
        std::fs::write(folder.path().join("air.csv"), text).unwrap();
        let case = OWN_MATERIALS.replace(", time = \"elapsed_h\"", "");
        match load_text("case.toml", &case, folder.path(), &[]) {
            Ok(loaded) => drop(loaded.warnings.render(false)),
            Err(faults) => drop(faults.render(false)),
        }
    }
}
