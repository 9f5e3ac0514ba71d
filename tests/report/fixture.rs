//! Findings of an invented line, marched by a small quasi-steady model that stands in for the solver: water in a steel
//! pipe under 50 mm of lagging, its supply lost at 0 h, air at -25 degC.

use ndarray::{Array1, Array2};
use std::f64::consts::PI;
use std::sync::Arc;
use stillwarm::answer::{Answer, Findings, Outcome};
use stillwarm::history::{Effort, Energy, History, Mark, Snapshot};
use stillwarm::march::{self, CyclePhase, Plan, Recording, Settings};
use stillwarm::material::{FreezingSpec, Material, MaterialSpec, Provenance};
use stillwarm::section::*;
use stillwarm::series::Series;

pub const ZERO: f64 = 273.15;

fn material(
    name: &str,
    conductivity: f64,
    density: f64,
    specific_heat: f64,
    source: &str,
    from_memory: bool,
) -> Arc<Material> {
    Arc::new(
        Material::new(MaterialSpec {
            name: name.into(),
            density,
            conductivity: vec![(ZERO, conductivity)],
            specific_heat: vec![(ZERO, specific_heat)],
            provenance: Provenance { source: source.into(), from_memory, ..Provenance::default() },
            ..MaterialSpec::default()
        })
        .unwrap(),
    )
}

fn water() -> Arc<Material> {
    Arc::new(
        Material::new(MaterialSpec {
            name: "water".into(),
            density: 1000.0,
            conductivity: vec![(ZERO, 0.56), (ZERO + 20.0, 0.60)],
            specific_heat: vec![(ZERO, 4217.0)],
            freezing: Some(FreezingSpec {
                solidus_k: ZERO,
                liquidus_k: ZERO,
                latent_heat: 333.6e3,
                solid_conductivity: vec![(ZERO, 2.22)],
                solid_specific_heat: vec![(ZERO, 2097.0)],
            }),
            provenance: Provenance { source: "a made-up table for tests".into(), ..Provenance::default() },
            ..MaterialSpec::default()
        })
        .unwrap(),
    )
}

/// Radii of the faces [m]: content, wall outside, lagging outside, jacket outside.
const RADII: [f64; 4] = [0.03895, 0.04445, 0.09445, 0.09505];
const AIR_C: f64 = -25.0;
const FILM: f64 = 18.0;
const CONTACT: f64 = 400.0;

fn resistances() -> [f64; 4] {
    [
        (RADII[1] / RADII[0]).ln() / (2.0 * PI * 50.0),
        1.0 / (2.0 * PI * RADII[1] * CONTACT),
        (RADII[2] / RADII[1]).ln() / (2.0 * PI * 0.04),
        1.0 / (2.0 * PI * RADII[3] * FILM),
    ]
}

pub fn section() -> Section {
    let layer = |name: &str, material, index: usize, resistance_m_k_per_w| Layer {
        name: name.into(),
        material,
        inside_radius_m: RADII[index],
        outside_radius_m: RADII[index + 1],
        contact: Contact { resistance_m_k_per_w, words: None },
    };
    let wall_outside = Place::Face(Face { layer: 0, side: Side::Outside });
    let mut lagging = layer(
        "lagging",
        material("mineral wool", 0.04, 100.0, 840.0, "a made-up table for tests", true),
        1,
        resistances()[1],
    );
    lagging.contact.words = Some(ContactWords { words: "strapped".into(), low: 200.0, high: 600.0 });
    Section {
        title: "Wash-water branch to the lower orchard".into(),
        line: Line { tag: Some("WW-07".into()), length_m: Some(36.0), extra_length_m: 4.0 },
        content: Content { radius_m: RADII[0], material: Some(water()), state: ContentState::Still },
        layers: vec![
            layer("wall", material("carbon steel", 50.0, 7850.0, 470.0, "a made-up table for tests", false), 0, 0.0),
            lagging,
            layer("jacket", material("aluminium", 220.0, 2700.0, 900.0, "a made-up table for tests", true), 2, 0.0),
        ],
        heaters: vec![Heater {
            name: "trace".into(),
            seat: Seat::Face(Face { layer: 0, side: Side::Outside }),
            output_w_per_m: 15.0,
            output_low_w_per_m: 13.5,
            runs: 1.0,
            thermostat: Some(Thermostat { senses: wall_outside, on_below_k: ZERO + 5.0, off_above_k: ZERO + 8.0 }),
        }],
        outside: Outside { temperature_k: Series::Constant(ZERO + AIR_C), film: Some(FILM) },
        start: Start::Hold,
        events: vec![Event { time_s: 0.0, change: Change::Supply(false) }],
        targets: vec![],
        limits: vec![
            Limit { name: "low alarm".into(), condition: Condition::Below(wall_outside, ZERO + 2.0) },
            Limit { name: "first ice".into(), condition: Condition::Frozen(0.0) },
            Limit { name: "half frozen".into(), condition: Condition::Frozen(0.5) },
            Limit { name: "all frozen".into(), condition: Condition::Frozen(1.0) },
        ],
        probes: vec![Probe { name: "mid lagging".into(), radius_m: 0.06945 }],
        run: Run { until_s: Some(96.0 * 3600.0), record: Record::Auto },
    }
}

/// One record of the quasi-steady model.
struct State {
    time_s: f64,
    content_c: f64,
    frozen: f64,
    lost: f64,
    heater: f64,
}

/// Marches content and wall as one lump behind the resistances, ice by its own resistance, until 96 h.
fn march(supply_back_s: f64) -> Vec<State> {
    let outer: f64 = resistances()[1..].iter().sum();
    let mass = PI * RADII[0] * RADII[0] * 1000.0;
    let wall = PI * (RADII[1].powi(2) - RADII[0].powi(2)) * 7850.0 * 470.0;
    let (mut content_c, mut frozen): (f64, f64) = (5.0, 0.0);
    let mut states = Vec::new();
    let step = 60.0;
    for index in 0..=(96 * 60) {
        let time_s = f64::from(index) * step;
        let heater = if time_s >= supply_back_s { 15.0 } else { 0.0 };
        let front = RADII[0] * (1.0 - frozen).max(1e-3).sqrt();
        let ice = if frozen > 0.0 && frozen < 1.0 { (RADII[0] / front).ln() / (2.0 * PI * 2.22) } else { 0.0 };
        let lost = (content_c - AIR_C) / (outer + ice);
        if index % 15 == 0 {
            states.push(State { time_s, content_c, frozen, lost, heater });
        }
        let given = (lost - heater) * step;
        if (content_c > 0.0 || given < 0.0) && frozen == 0.0 {
            content_c -= given / (mass * 4217.0 + wall);
            content_c = if given > 0.0 { content_c.max(0.0) } else { content_c };
        } else if frozen < 1.0 {
            frozen = (frozen + given / (mass * 333.6e3)).clamp(0.0, 1.0);
        } else {
            content_c -= given / (mass * 2097.0 + wall);
        }
    }
    states
}

fn radii() -> Vec<f64> {
    let mut radii: Vec<f64> = (0..=10).map(|cell| RADII[0] * f64::from(cell) / 10.0).collect();
    radii.extend([RADII[0], RADII[1], RADII[1]]);
    radii.extend((1..=20).map(|cell| RADII[1] + (RADII[2] - RADII[1]) * f64::from(cell) / 20.0));
    radii.extend([RADII[2], RADII[3]]);
    radii
}

fn profile(state: &State, radii: &[f64]) -> Vec<f64> {
    let [_, contact, _, _] = resistances();
    let front = RADII[0] * (1.0 - state.frozen).max(1e-3).sqrt();
    let wall = if state.frozen > 0.0 && state.frozen < 1.0 {
        state.content_c - state.lost * (RADII[0] / front).ln() / (2.0 * PI * 2.22)
    } else {
        state.content_c
    };
    let lagging = wall - (state.lost - state.heater) * contact;
    radii
        .iter()
        .enumerate()
        .map(|(index, &radius)| {
            let celsius = if radius < RADII[0] {
                if radius > front && state.frozen < 1.0 {
                    state.content_c - state.lost * (radius / front).ln() / (2.0 * PI * 2.22)
                } else {
                    state.content_c
                }
            } else if radius <= RADII[1] && index < 13 {
                wall
            } else {
                lagging - state.lost * (radius.min(RADII[2]) / RADII[1]).ln() / (2.0 * PI * 0.04)
            };
            celsius + ZERO
        })
        .collect()
}

fn history(states: &[State]) -> History {
    let radii = radii();
    let profiles: Vec<Vec<f64>> = states.iter().map(|state| profile(state, &radii)).collect();
    let of = |value: fn(&State) -> f64| Array1::from_iter(states.iter().map(value));
    let column = |index: usize| Array1::from_iter(profiles.iter().map(|profile| profile[index]));
    // Indices into `radii` of wall inside and outside, lagging inside and outside, jacket inside and outside.
    let faces = [11, 12, 13, 33, 34, 35];
    let last = radii.len() - 1;
    let wall_mass = PI * (RADII[1].powi(2) - RADII[0].powi(2)) * 7850.0;
    assert!(wall_mass > 0.0 && faces[5] == last);
    let mean = |state: &State, profile: &[f64]| {
        ZERO + state.content_c + 0.5 * (profile[11] - ZERO - state.content_c) * state.frozen
    };
    History {
        times_s: of(|state| state.time_s),
        air_k: of(|_| ZERO + AIR_C),
        centre_k: column(0),
        content_mean_k: states.iter().zip(&profiles).map(|(state, profile)| mean(state, profile)).collect(),
        frozen_share: of(|state| state.frozen),
        faces_k: Array2::from_shape_fn((states.len(), 6), |(row, face)| profiles[row][faces[face]]),
        heaters_w_per_m: Array2::from_shape_fn((states.len(), 1), |(row, _)| states[row].heater),
        lost_w_per_m: of(|state| state.lost),
        carried_w_per_m: of(|_| 0.0),
        stored_w_per_m: of(|state| state.heater - state.lost),
        probes_k: Array2::from_shape_fn((states.len(), 1), |(row, _)| profiles[row][23]),
        profiles_k: Array2::from_shape_fn((states.len(), radii.len()), |(row, radius)| profiles[row][radius]),
        profile_radii_m: Array1::from(radii),
    }
}

/// First time at which a record satisfies the condition [s].
fn when(states: &[State], condition: impl Fn(&State) -> bool) -> Option<f64> {
    states.iter().find(|state| condition(state)).map(|state| state.time_s)
}

fn answer(name: &str, time_s: Option<f64>, limit_value: f64, unit: &str, place: &str) -> Answer {
    Answer {
        name: name.into(),
        outcome: if time_s.is_some() { Outcome::Reached } else { Outcome::RunEnded },
        time_s,
        earliest_time_s: None,
        error_s: time_s.map(|time| 1.5 + 1e-5 * time),
        value: None,
        unit: unit.into(),
        error: None,
        place: place.into(),
        limit_value: Some(limit_value),
        closest_value: time_s.is_none().then_some(0.93),
        closest_error: time_s.is_none().then_some(0.0004),
        closest_time_s: time_s.is_none().then_some(96.0 * 3600.0),
        cautious_time_s: time_s.map(|time| 0.81 * time),
        cautious_outcome: Some(Outcome::Reached),
        danger: true,
    }
}

/// An outage that freezes the line; the supply comes back after so many seconds, if it does.
pub fn outage(supply_back_s: Option<f64>) -> Findings {
    let states = march(supply_back_s.unwrap_or(f64::INFINITY));
    let history = history(&states);
    let mut section = section();
    let mut marks = vec![Mark { time_s: 0.0, label: "supply lost".into() }];
    if let Some(time_s) = supply_back_s {
        marks.push(Mark { time_s, label: "supply back".into() });
        section.events.push(Event { time_s, change: Change::Supply(true) });
    }
    let start = &states[0];
    let faces = section
        .faces()
        .enumerate()
        .map(|(index, face)| (section.face_name(face), history.faces_k[[0, index]]))
        .collect();
    let joules = |value: &Array1<f64>| value.iter().take(states.len() - 1).map(|value| value * 900.0).sum::<f64>();
    Findings {
        verb: "outage",
        input_digest: "3f0c9a1d5b7e2468ace013579bdf02468ace13579bdf02468ace13579bdf0246".into(),
        headline: vec![
            "First ice 4 h 0 min after the supply is lost; all frozen after 59 h 30 min.".into(),
            "To keep the line clear of ice on the cautious view, power must be back within 3 h 14 min.".into(),
        ],
        answers: vec![
            answer("low alarm", when(&states, |state| state.content_c <= 2.0), 2.0, "degC", "wall outside"),
            answer("first ice", when(&states, |state| state.content_c <= 0.0), 0.0, "-", "content surface"),
            answer("half frozen", when(&states, |state| state.frozen >= 0.5), 0.5, "-", "content"),
            answer("all frozen", when(&states, |state| state.frozen >= 1.0), 1.0, "-", "content"),
        ],
        other_start: None,
        start: Snapshot {
            faces,
            content_mean_k: Some(ZERO + start.content_c),
            centre_k: Some(ZERO + start.content_c),
            frozen_share: 0.0,
            heater_w_per_m: 0.0,
            lost_w_per_m: start.lost,
            into_content_w_per_m: -start.lost,
        },
        governs: vec!["lagging 3.00 m K/W (96 %)".into(), "film 0.093 m K/W (3 %)".into(), "contact of lagging 0.009 m K/W".into()],
        assumptions: vec![
            "The line starts in its thermostat's cycle, the instant before the heater switches on: the cautious start.".into(),
            "The cautious answer takes the lagging to conduct 25 % more.".into(),
        ],
        cautions: vec![
            "The answer is for the middle of a run in sound lagging: valves, flanges, supports and dead legs freeze earlier.".into(),
            "Flow may be blocked soon after first ice: a frozen share is no measure of passage.".into(),
        ],
        energy: Energy {
            supplied_j_per_m: 0.0,
            lost_j_per_m: joules(&history.lost_w_per_m),
            stored_j_per_m: joules(&history.stored_w_per_m),
            carried_j_per_m: 0.0,
            residual_relative: 3.1e-15,
        },
        effort: Effort { cells: 36, steps: 412, rejected_steps: 17, newton_iterations: 1311 },
        history,
        marks,
        answered: true,
        section,
    }
}

/// A bare heated core without a content of its own layer: one state only, as `steady` finds it.
pub fn steady() -> Findings {
    let mut findings = outage(None);
    findings.verb = "steady";
    findings.history = history(&march(f64::INFINITY)[..1]);
    findings.marks.clear();
    findings.section.limits.clear();
    findings.answers = vec![Answer {
        outcome: Outcome::Reached,
        time_s: None,
        error_s: None,
        value: Some(9.67468898),
        unit: "W/m".into(),
        error: Some(2e-9),
        closest_value: None,
        closest_error: None,
        closest_time_s: None,
        cautious_time_s: None,
        cautious_outcome: None,
        danger: false,
        ..answer("keep", None, 5.0, "W/m", "wall outside")
    }];
    findings.headline = vec!["9.68 W/m holds wall outside at 5 degC.".into()];
    findings
}

/// A rod of metal, no layer round it, no phase that freezes.
pub fn bare_core() -> Findings {
    let mut findings = outage(None);
    let section = &mut findings.section;
    section.layers.clear();
    section.heaters.clear();
    section.probes.clear();
    section.limits.clear();
    section.content.material = Some(material("brass", 110.0, 8500.0, 380.0, "a made-up table for tests", true));
    let history = &mut findings.history;
    let rows = history.times_s.len();
    history.faces_k = Array2::zeros((rows, 0));
    history.heaters_w_per_m = Array2::zeros((rows, 0));
    history.probes_k = Array2::zeros((rows, 0));
    history.frozen_share.fill(0.0);
    let within = 12;
    history.profiles_k = history.profiles_k.slice(ndarray::s![.., ..within]).to_owned();
    history.profile_radii_m = history.profile_radii_m.slice(ndarray::s![..within]).to_owned();
    findings.start.faces.clear();
    findings.answers.truncate(1);
    findings
}

/// An empty line whose names try to steer terminals, pages and spreadsheets.
pub fn hostile() -> Findings {
    let mut findings = outage(Some(36.0 * 3600.0));
    let evil = "=cmd|'/c'!A1 <script>alert(1)</script> \u{1b}[31m \u{202e}&\"";
    findings.section.title = evil.into();
    findings.section.line.tag = Some(evil.into());
    for layer in &mut findings.section.layers {
        layer.name = format!("{evil}{}", layer.name);
    }
    findings.section.heaters[0].name = evil.into();
    findings.section.probes[0].name = format!("@{evil}");
    for limit in &mut findings.section.limits {
        limit.name = format!("{}{evil}", limit.name);
    }
    for answer in &mut findings.answers {
        answer.name = format!("{}{evil}", answer.name);
        answer.place = evil.into();
    }
    for lines in [&mut findings.headline, &mut findings.cautions, &mut findings.assumptions, &mut findings.governs] {
        lines.push(evil.into());
    }
    for mark in &mut findings.marks {
        mark.label = evil.into();
    }
    findings.section.content.state = ContentState::Empty;
    findings.section.content.material = None;
    findings.history.centre_k.fill(f64::NAN);
    findings.history.content_mean_k.fill(f64::NAN);
    findings.start.content_mean_k = None;
    findings.start.centre_k = None;
    findings
}

/// A warm-up under a thermostat that cycles: the heater switches every half hour once the line is warm.
pub fn cycling() -> Findings {
    let mut findings = outage(Some(0.0));
    findings.verb = "warmup";
    let history = &mut findings.history;
    findings.marks = vec![];
    for (row, &time_s) in history.times_s.iter().enumerate() {
        let on = time_s < 8.0 * 3600.0 || ((time_s / 1800.0).floor() as u64).is_multiple_of(2);
        history.heaters_w_per_m[[row, 0]] = if on { 15.0 } else { 0.0 };
        if row > 0 && history.heaters_w_per_m[[row, 0]] != history.heaters_w_per_m[[row - 1, 0]] {
            let label = if on { "trace on" } else { "trace off" };
            findings.marks.push(Mark { time_s, label: label.into() });
        }
        history.stored_w_per_m[row] = history.heaters_w_per_m[[row, 0]] - history.lost_w_per_m[row];
    }
    let wall_outside = Place::Face(Face { layer: 0, side: Side::Outside });
    findings.section.limits.clear();
    findings.section.targets = vec![Target { name: "keep".into(), place: wall_outside, at_least_k: ZERO + 10.0 }];
    let reached = history.times_s.iter().zip(history.faces_k.column(1)).find(|(_, kelvin)| **kelvin >= ZERO + 10.0);
    let time_s = reached.map(|(time_s, _)| *time_s);
    findings.answers = vec![Answer { danger: false, ..answer("keep", time_s, 10.0, "degC", "wall outside") }];
    findings
}

/// The same line marched by the solver: an outage from the thermostat's cycle with the supply back after so many seconds.
pub fn solved(supply_back_s: Option<f64>) -> Findings {
    let mut section = section();
    section.events.extend(supply_back_s.map(|time_s| Event { time_s, change: Change::Supply(true) }));
    let plan = Plan {
        until_s: 96.0 * 3600.0,
        stop_when_answered: false,
        stop_when_settled: false,
        watches: section.limits.iter().map(|limit| limit.condition).collect(),
        cycle_phase: CyclePhase::BeforeOn,
        record: Recording::Steps,
    };
    let trace = march::run(&section, &plan, &Settings::default(), &mut |_| true).expect("the line can be solved");
    let mut findings = outage(None);
    for (answer, sighting) in findings.answers.iter_mut().zip(&trace.sightings) {
        answer.time_s = sighting.time_s;
        answer.cautious_time_s = sighting.time_s.map(|time_s| 0.8 * time_s);
        answer.outcome = if sighting.time_s.is_some() { Outcome::Reached } else { Outcome::RunEnded };
    }
    Findings {
        section,
        start: trace.start,
        energy: trace.energy,
        effort: trace.effort,
        history: trace.history,
        marks: trace.marks,
        ..findings
    }
}
