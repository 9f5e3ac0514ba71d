//! Every shipped case is a test and a starting point: it is read without a word, runs, keeps its energy, and tells the
//! story that its head promises.

use std::path::{Path, PathBuf};
use stillwarm::case::{self, Loaded};
use stillwarm::march::{self, CyclePhase, Hold, Plan, Recording, Settings, Trace, steady};
use stillwarm::section::{Condition, ContentState, Place, Section, Start};
use stillwarm::series::Series;
use stillwarm::shipped;

const HOUR_S: f64 = 3600.0;

fn folder() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("cases")
}

fn names() -> Vec<String> {
    let entries =
        std::fs::read_dir(folder()).expect("the folder of cases").map(|entry| entry.expect("an entry").path());
    let is_case = |path: &PathBuf| path.extension().is_some_and(|ending| ending == "toml");
    let mut names: Vec<_> =
        entries.filter(is_case).map(|path| path.file_stem().expect("a name").to_string_lossy().into_owned()).collect();
    names.sort();
    names
}

fn load_with(name: &str, overrides: &[&str]) -> Loaded {
    let overrides: Vec<_> = overrides.iter().map(|&text| text.to_owned()).collect();
    case::load(&folder().join(format!("{name}.toml")), &overrides).unwrap_or_else(|faults| panic!("{name}:\n{faults}"))
}

fn section(name: &str) -> Section {
    load_with(name, &[]).section
}

fn march_of(section: &Section, until_s: f64, watches: Vec<Condition>, stop_when_answered: bool) -> Trace {
    let plan = Plan {
        until_s,
        stop_when_answered,
        stop_when_settled: false,
        watches,
        cycle_phase: CyclePhase::BeforeOn,
        record: if stop_when_answered { Recording::Ends } else { Recording::Every(until_s / 200.0) },
    };
    march::run(section, &plan, &Settings::default(), &mut |_| true)
        .unwrap_or_else(|error| panic!("{}: {error}", section.title))
}

/// The case as its own events have it, with its limits watched.
fn run(section: &Section) -> Trace {
    let limits = section.limits.iter().map(|limit| limit.condition).collect();
    march_of(section, section.run.until_s.unwrap_or(24.0 * HOUR_S), limits, false)
}

/// Hours until the limit of a name is passed.
fn passed_h(section: &Section, trace: &Trace, name: &str) -> Option<f64> {
    let number = section.limits.iter().position(|limit| limit.name == name).expect("a limit of this name");
    trace.sightings[number].time_s.map(|time_s| time_s / HOUR_S)
}

/// Hours from the start's temperature until a place is warm, with every heater on and no event.
fn warm_h(section: &Section, place: Place, at_least_k: f64) -> f64 {
    let mut section = section.clone();
    section.events.clear();
    if !matches!(section.start, Start::Uniform(_)) {
        section.start = Start::Uniform(section.outside.temperature_k.at(0.0));
    }
    let trace = march_of(&section, 200.0 * HOUR_S, vec![Condition::Above(place, at_least_k)], true);
    trace.sightings[0].time_s.expect("it becomes warm") / HOUR_S
}

/// Hours of the records at which the content holds ice.
fn hours_with_ice(trace: &Trace) -> (f64, f64) {
    let history = &trace.history;
    let icy: Vec<f64> = history
        .times_s
        .iter()
        .zip(&history.frozen_share)
        .filter(|&(_, &share)| share > 0.0)
        .map(|(time_s, _)| time_s / HOUR_S)
        .collect();
    (icy.first().copied().expect("ice"), icy.last().copied().expect("ice"))
}

#[test]
fn every_case_says_what_it_shows_and_stands_in_the_table() {
    let table = std::fs::read_to_string(folder().join("README.md")).expect("the table of cases");
    let names = names();
    assert!(names.len() >= 11, "only {names:?}");
    assert_eq!(table.matches("](").count(), names.len() + 1, "the table has rows of cases that are not there");
    for name in names {
        let text = std::fs::read_to_string(folder().join(format!("{name}.toml"))).expect("a case");
        assert!(text.starts_with("# Shows: "), "{name} does not say what it shows");
        let head: String = text.lines().take_while(|line| line.starts_with('#')).collect::<Vec<_>>().join("\n");
        assert!(head.contains("invented"), "{name} does not say that it is invented");
        assert!(head.contains(&format!("cases/{name}.toml")), "{name} does not say what to run");
        assert!(table.contains(&format!("({name}.toml)")), "{name} is not in the table");
        assert!(text.lines().all(|line| line.len() <= 120), "{name} has long lines");
    }
}

#[test]
fn every_case_is_shipped_with_the_binary() {
    let mut found: Vec<_> = shipped::names().map(str::to_owned).collect();
    found.sort();
    assert_eq!(found, names());
    for case in shipped::CASES {
        // What is named in the file must travel with it.
        assert_eq!(case.series.is_some(), case.text.contains(".csv\""), "{}", case.name);
        let command = format!("#     stillwarm {} cases/{}.toml", case.verb, case.name);
        assert!(case.text.lines().any(|line| line.starts_with(&command)), "{command} is not at the head of its case");
    }
}

#[test]
fn every_case_is_read_without_a_word() {
    for name in names() {
        let loaded = load_with(&name, &[]);
        assert_eq!(loaded.warnings.to_string(), "", "{name}");
    }
}

/// Energy to round-off; temperatures within what air, starts and stated contents span, and above it only by heat supplied.
#[test]
fn every_case_runs_and_keeps_its_energy() {
    for name in names() {
        let section = section(&name);
        let trace = run(&section);
        assert!(trace.energy.residual_relative < 1e-10, "{name}: {:e}", trace.energy.residual_relative);
        assert!(trace.effort.steps > 0, "{name} went nowhere");
        let mut coldest_k = section.outside.temperature_k.range().0;
        if let ContentState::Flowing { temperature_k, .. } | ContentState::HeldAt { temperature_k } =
            section.content.state
        {
            coldest_k = coldest_k.min(temperature_k);
        }
        if let Start::Uniform(temperature_k) = section.start {
            coldest_k = coldest_k.min(temperature_k);
        }
        for (row, &time_s) in trace.history.times_s.iter().enumerate() {
            for &face_k in trace.history.faces_k.row(row) {
                assert!(face_k > coldest_k - 0.01, "{name}: {face_k} K at {time_s} s, colder than all about it");
                assert!(face_k < 700.0, "{name}: {face_k} K at {time_s} s");
            }
        }
    }
}

/// A heater that could not hold its targets would make a poor start: every one has a tenth in hand at the least.
#[test]
fn heaters_hold_their_targets_with_a_margin() {
    for name in names() {
        let section = section(&name);
        for target in &section.targets {
            let (factor, _) = steady::factor_that_holds(&section, target.place, target.at_least_k, 1.0)
                .unwrap_or_else(|error| panic!("{name}, {}: {error}", target.name));
            assert!((0.05..0.9).contains(&factor), "{name}: {} needs {factor:.2} of the output", target.name);
        }
    }
}

#[test]
fn thermostats_cycle_where_a_case_starts_from_their_cycle() {
    let mut cycling = 0;
    for name in names() {
        let section = section(&name);
        let is_kept_by_flow = matches!(section.content.state, ContentState::Flowing { .. });
        let has_thermostat = section.heaters.iter().any(|heater| heater.thermostat.is_some());
        if matches!(section.start, Start::Hold) && has_thermostat && !is_kept_by_flow {
            let trace = march_of(&section, 1.0, Vec::new(), false);
            let Hold::Cycle { duty, .. } = trace.hold else { panic!("{name} starts from {:?}", trace.hold) };
            assert!((0.1..0.9).contains(&duty), "{name} is on {duty:.2} of the time");
            cycling += 1;
        }
    }
    assert!(cycling >= 6, "only {cycling} cases cycle");
}

#[test]
fn the_branch_lasts_longest_from_a_warm_reading_and_still_or_stirred_matters_little() {
    let [outage, stirred, reading] = ["outage", "stirred", "reading"].map(|kind| {
        let section = section(&format!("water-branch-{kind}"));
        let trace = run(&section);
        ["low alarm", "first ice", "bore in doubt"].map(|limit| passed_h(&section, &trace, limit).expect("passed"))
    });
    assert!(outage.is_sorted() && stirred.is_sorted() && reading.is_sorted());
    assert!(outage[1] > 3.0 && outage[2] < 24.0, "a night's worth: {outage:?} h");
    assert!(reading[1] > 1.5 * outage[1], "{reading:?} against {outage:?} h");
    for (stirred, still) in stirred.iter().zip(&outage) {
        assert!((stirred / still - 1.0).abs() < 0.05 && stirred != still, "{stirred} against {still} h");
    }
}

#[test]
fn ice_outlasts_the_reset_of_the_tripped_heater_by_hours() {
    let section = section("water-branch-trip");
    let trace = run(&section);
    assert!(passed_h(&section, &trace, "bore in doubt").is_some_and(|hours| hours < 18.0), "reset at 18 h");
    let (first, last) = hours_with_ice(&trace);
    assert!(first > 4.0 && last > 20.0 && last < 48.0, "ice from {first} to {last} h");
    assert_eq!(
        trace.marks.iter().filter(|mark| mark.label.contains("tripped") || mark.label.contains("reset")).count(),
        2
    );
}

#[test]
fn the_flow_hides_the_trip_until_it_stops() {
    let mut flowing = section("flow-stops");
    let trace = run(&flowing);
    assert!(matches!(trace.hold, Hold::Balance { heater_w_per_m: 0.0 }), "{:?}", trace.hold);
    let first_ice_h = passed_h(&flowing, &trace, "first ice").expect("it freezes");
    assert!(first_ice_h > 6.0 + 3.0, "first ice at {first_ice_h} h, the flow stops at 6 h");
    // Without the trip the heater holds.
    flowing.events.retain(|event| event.time_s > 0.0);
    assert_eq!(flowing.events.len(), 1);
    let held = run(&flowing);
    assert!(passed_h(&flowing, &held, "first ice").is_none() && held.switchings[0].0 > 0, "{:?}", held.switchings);
}

#[test]
fn sulphur_sets_in_hours_and_is_never_overheated_by_its_thermostat() {
    let section = section("sulphur-line-outage");
    let trace = run(&section);
    let [begins, half] = ["begins to set", "half set"].map(|name| passed_h(&section, &trace, name).expect("it sets"));
    assert!(begins > 1.0 && begins < half && half < 24.0, "{begins} and {half} h");
    assert!(passed_h(&section, &trace, "overheated").is_none());
    assert_eq!(trace.finish.frozen_share, 0.0, "molten again");
    let (_, last) = hours_with_ice(&trace);
    assert!(last - 24.0 > half, "it melts in {} h and was half set in {half} h", last - 24.0);
    // Without its thermostat it would be.
    let outputs: Vec<_> = section.heaters.iter().map(|heater| heater.output_per_line_w_per_m()).collect();
    let faces = steady::balance(&section, &outputs, 1.0).expect("a balance").snapshot.faces;
    assert!(faces[1].1 > 155.0 + 273.15, "{faces:?}");
}

#[test]
fn lye_reaches_its_setting_point_within_a_shift() {
    let section = section("lye-line-outage");
    let Condition::Below(_, sets_k) = section.limits[0].condition else { panic!("{:?}", section.limits[0]) };
    let material = section.content.material.as_ref().expect("lye");
    assert!(material.freezing_k.is_none());
    assert!((sets_k - material.lowest_use_k.expect("a minimum")).abs() < 1e-9, "the case and the library disagree");
    let trace = run(&section);
    let sets_h = passed_h(&section, &trace, "sets").expect("it sets");
    assert!(sets_h > 4.0 && sets_h < 12.0, "{sets_h} h");
    assert!(passed_h(&section, &trace, "low alarm").expect("an alarm first") < sets_h);
    assert!(passed_h(&section, &trace, "hot for steel").is_none());
}

#[test]
fn the_plastic_pipe_softens_on_a_hot_day_without_its_thermostat() {
    let winter = section("plastic-pipe");
    assert!(passed_h(&winter, &run(&winter), "first ice").is_some_and(|hours| hours > 1.0));
    let summer = load_with("plastic-pipe", &["outside.air=\"30 degC\""]).section;
    let faces = steady::balance(&summer, &[summer.heaters[0].output_per_line_w_per_m()], 1.0)
        .expect("a balance")
        .snapshot
        .faces;
    assert!(faces[1].1 > 60.0 + 273.15, "{faces:?}");
}

#[test]
fn the_hose_is_ready_and_lost_in_minutes() {
    let section = section("sample-hose");
    let target = &section.targets[0];
    let ready_min = warm_h(&section, target.place, target.at_least_k) * 60.0;
    assert!(ready_min > 0.5 && ready_min < 10.0, "{ready_min} min");
    let trace = run(&section);
    let lost_min = passed_h(&section, &trace, "gas condenses").expect("it is lost") * 60.0 - 10.0;
    assert!(lost_min > 0.5 && lost_min < 10.0, "{lost_min} min after the supply");
    assert!(trace.switchings[0].0 > 20, "{:?}", trace.switchings);
}

#[test]
fn the_cylinder_sends_its_heat_the_way_of_least_resistance() {
    let heat_inwards = |face: &str| {
        let section = load_with("heated-cylinder", &[&format!("heater.foil.face=\"{face}\"")]).section;
        let output = section.heaters[0].output_per_line_w_per_m();
        let found = steady::balance(&section, &[output], 1.0).expect("a balance").snapshot;
        (output - found.lost_w_per_m) / output
    };
    let (of_shell, of_tube) = (heat_inwards("shell inside"), heat_inwards("tube outside"));
    // The way in: tube ln(30/20)/(2 pi k), k = 15.0 W/(m K) at 28 degC; its contact 1/(2 pi 0.03 500). The way out: shell
    // ln(50/30)/(2 pi 160), film 1/(2 pi 0.05 60). Bath and air are at one temperature, so that resistances divide the heat.
    let ways = std::f64::consts::TAU;
    let tube = (30.0_f64 / 20.0).ln() / (ways * 14.95);
    let contact = 1.0 / (ways * 0.03 * 500.0);
    let out = (50.0_f64 / 30.0).ln() / (ways * 160.0) + 1.0 / (ways * 0.05 * 60.0);
    assert!((of_shell - out / (out + tube + contact)).abs() < 1e-3, "{of_shell}");
    assert!((of_tube - (out + contact) / (out + tube + contact)).abs() < 1e-3, "{of_tube}");
    let section = section("heated-cylinder");
    assert!(passed_h(&section, &run(&section), "shell hot to touch").is_some());
}

#[test]
fn the_frozen_line_opens_long_after_its_wall_is_warm() {
    let section = section("frozen-line-thaw");
    let [wall, core] = [0, 1].map(|at| warm_h(&section, section.targets[at].place, section.targets[at].at_least_k));
    assert!(core > wall + 4.0 && core < 24.0, "wall {wall} h, core {core} h");
    let trace = run(&section);
    let half_h = passed_h(&section, &trace, "half thawed").expect("half");
    let all_h = passed_h(&section, &trace, "all thawed").expect("all");
    assert!(half_h < all_h && (all_h - core).abs() < 0.5, "{half_h}, {all_h} h");
}

#[test]
fn the_wax_is_pumpable_after_hours_and_not_burnt() {
    let section = section("wax-line-warmup");
    let core_h = warm_h(&section, section.targets[1].place, section.targets[1].at_least_k);
    assert!(core_h > 4.0 && core_h < 24.0, "{core_h} h");
    let trace = run(&section);
    assert!(passed_h(&section, &trace, "hot for the wax").is_none());
    assert!(passed_h(&section, &trace, "all molten").is_some_and(|hours| hours > 0.0));
}

#[test]
fn the_weather_is_what_its_formula_says_and_freezes_the_line() {
    let section = section("cold-night");
    let Series::Table { times_s, values, .. } = &section.outside.temperature_k else { panic!("no table") };
    assert_eq!((times_s.len(), times_s[0], times_s[144]), (145, 0.0, 72.0 * HOUR_S));
    for (time_s, air_k) in times_s.iter().zip(values) {
        let t = time_s / HOUR_S;
        let front = 12.0 / (1.0 + (-(t - 28.0) / 3.0).exp());
        let day = 3.0 * (std::f64::consts::TAU * (t - 14.0) / 24.0).cos();
        assert!((air_k - 273.15 - (-4.0 - front + day)).abs() < 0.0501, "{t} h: {air_k} K");
    }
    let trace = run(&section);
    let [alarm, ice, doubt] =
        ["low alarm", "first ice", "bore in doubt"].map(|name| passed_h(&section, &trace, name).expect("passed"));
    assert!(20.0 < alarm && alarm < ice && ice < doubt && doubt < 34.0, "{alarm}, {ice}, {doubt} h");
    assert_eq!(trace.finish.frozen_share, 0.0, "thawed again");
}
