//! From what the user wrote to what it means: names looked up, sizes worked out, contradictions told.

mod materials;
mod places;
mod sizes;

use super::raw::{self, Case, Course, Located, Quantity};
use super::series_file::SeriesFiles;
use crate::faults::{Fault, Faults, nearest, quoted};
use crate::material::Material;
use crate::section::{
    Change, Condition, Contact, ContactWords, Content, ContentState, Event, Heater, Layer, Limit, Line, Outside, Place,
    Probe, Record, Run, Seat, Section, Start, Target, Thermostat,
};
use crate::series::Series;
use materials::Materials;
use places::{Places, doubled, same};
use std::f64::consts::PI;
use std::sync::Arc;

/// A table of properties may be left by so much before a warning [K]: common practice, no source.
const BEYOND_TABLE_K: f64 = 10.0;
/// The same for built-in materials, whose tables seldom begin below 0 degC though little changes there [K].
const BEYOND_BUILT_IN_K: f64 = 50.0;
/// Most records of one run.
const MOST_RECORDS: f64 = 1e6;

/// The section that a case means, and facts for its report; `None` where a fault stands in the way.
pub(super) fn resolve(
    case: &Case,
    default_title: String,
    files: &mut SeriesFiles<'_>,
    faults: &mut Faults,
) -> Option<(Section, Vec<String>)> {
    let mut materials = Materials::of(case, faults);
    let radii = sizes::radii(case, faults);
    let states = states_over_time(case);
    let content = content(case, &radii, &states, &mut materials, faults);
    let layers: Vec<_> =
        case.layers.iter().zip(&radii).map(|(raw, radii)| layer(raw, *radii, &mut materials, faults)).collect();
    materials.report_unused(faults);

    let outermost_m = match (radii.last(), &content) {
        (Some(radii), _) => radii.map(|(_, outside)| outside),
        (None, content) => content.as_ref().map(|content| content.radius_m),
    };
    let mut places = Places::new(states.iter().any(|(_, state)| is_material(state)));
    places.add_layers(case.layers.iter().map(|layer| layer.name.as_ref()), faults);
    let seats: Vec<_> = case.heaters.iter().map(|raw| seat(raw, &mut places, faults)).collect();
    let bore_m = radii.first().copied().flatten().map(|(inside, _)| inside);
    let probes: Vec<_> = case.probes.iter().map(|raw| probe(raw, bore_m, outermost_m, &mut places, faults)).collect();
    let heaters: Vec<_> =
        case.heaters.iter().zip(seats).map(|(raw, seat)| heater(raw, seat, &places, faults)).collect();

    report_stream(case, &states, &heaters, faults);

    let outside = case.outside.as_ref().and_then(|raw| outside(raw, files, faults));
    let start = start(case, &places, &states, faults);
    let events = events(case, files, faults);
    let targets: Vec<_> = case.targets.iter().map(|raw| target(raw, &places, faults)).collect();
    let limits: Vec<_> = case.limits.iter().map(|raw| limit(raw, &places, content.as_ref(), faults)).collect();
    report_doubled("targets", case.targets.iter().map(|raw| raw.name.as_ref()), faults);
    report_doubled("limits", case.limits.iter().map(|raw| raw.name.as_ref()), faults);
    against_thermostats(case, &heaters, &targets, &limits, faults);
    let run = run(&case.run, faults);
    report_late_events(case, &run, faults);
    if let (Some(raw), Some(outside), Some(events)) = (&case.outside, &outside, &events) {
        report_short_series(raw, outside, events, case.run.until, faults);
    }

    let section = Section {
        title: case.title.as_ref().map_or(default_title, |title| title.value.clone()),
        line: line(&case.line),
        content: content?,
        layers: layers.into_iter().collect::<Option<_>>()?,
        heaters: heaters.into_iter().collect::<Option<_>>()?,
        outside: outside?,
        start: start?,
        events: events?,
        targets: targets.into_iter().collect::<Option<_>>()?,
        limits: limits.into_iter().collect::<Option<_>>()?,
        probes: probes.into_iter().collect::<Option<_>>()?,
        run,
    };
    report_beyond_tables(case, &section, faults);
    Some((section, materials.notes))
}

fn line(raw: &raw::Line) -> Line {
    Line {
        tag: raw.tag.as_ref().map(|tag| tag.value.clone()),
        length_m: raw.length.map(|length| length.value_si),
        extra_length_m: raw.extra_length.map_or(0.0, |length| length.value_si),
    }
}

/// The content's states with their times [s], the first one's before all events; in the order of time.
fn states_over_time(case: &Case) -> Vec<(f64, Located<raw::State>)> {
    let first = case.content.as_ref().and_then(|content| content.state).map(|state| (f64::NEG_INFINITY, state));
    let changes = case.events.iter().filter_map(|event| match (&event.change, event.time) {
        (Some(raw::Change::Content(state)), Some(time)) => Some((time.value_si, *state)),
        _ => None,
    });
    let mut states: Vec<_> = first.into_iter().chain(changes).collect();
    states.sort_by(|one, other| one.0.total_cmp(&other.0));
    states
}

/// Whether a content of some material is there.
fn is_material(state: &Located<raw::State>) -> bool {
    matches!(state.value, raw::State::Still | raw::State::Stirred(_) | raw::State::Flowing(..))
}

fn content_state(state: &raw::State) -> ContentState {
    match *state {
        raw::State::Still => ContentState::Still,
        raw::State::Stirred(film) => ContentState::Stirred { film: film.map(|film| film.value_si) },
        raw::State::Flowing(temperature, film) => {
            ContentState::Flowing { temperature_k: temperature.value_si, film: film.value_si }
        }
        raw::State::Empty => ContentState::Empty,
        raw::State::HeldAt(temperature) => ContentState::HeldAt { temperature_k: temperature.value_si },
    }
}

fn content(
    case: &Case,
    radii: &[Option<(f64, f64)>],
    states: &[(f64, Located<raw::State>)],
    materials: &mut Materials,
    faults: &mut Faults,
) -> Option<Content> {
    let raw = case.content.as_ref()?;
    let material = raw.material.as_ref().map(|name| materials.find(name, faults));
    match (&raw.material, states.iter().find(|(_, state)| is_material(state))) {
        (None, Some((_, state))) if raw.lacks_material => faults.push(
            Fault::error(raw.span, "[content] needs `material`: what is inside")
                .label("`material` is missing")
                .also(state.span, "of this"),
        ),
        (Some(name), None) if matches!(raw.state, Some(Located { value: raw::State::HeldAt(_), .. })) => faults.push(
            Fault::error(name.span, "a content whose surface is held needs no material")
                .label("has no effect")
                .help("take out `material`, or `held_at` in favour of a `state`"),
        ),
        _ => {}
    }
    for pair in states.windows(2) {
        let [(_, before), (_, after)] = pair else { continue };
        if before.value == raw::State::Empty && matches!(after.value, raw::State::Still | raw::State::Stirred(_)) {
            faults.push(
                Fault::error(after.span, "an empty line that is filled is not yet modelled")
                    .label("filled at what temperature?")
                    .also(before.span, "empty until then")
                    .help("let it be \"flowing\" with its temperature and film first, and still or stirred later"),
            );
        }
    }
    if let (Some(layer), Some(diameter)) = (case.layers.first(), raw.diameter) {
        faults.push(
            Fault::error(diameter.span, "`diameter` is for a bare core; here the innermost layer states the bore")
                .label("take it out")
                .also(layer.span, "the innermost layer"),
        );
    }
    let radius_m = match (radii.first(), raw.diameter) {
        (Some(radii), _) => radii.map(|(inside, _)| inside),
        (None, Some(diameter)) => Some(diameter.value_si / 2.0),
        (None, None) => {
            faults.push(
                Fault::error(raw.span, "the case has no layer and its content no `diameter`")
                    .label("how large?")
                    .help("add a [[layer]], or `diameter` for a bare core"),
            );
            None
        }
    };
    if let (None, Some(Located { value: raw::State::Empty, span })) = (case.layers.first(), raw.state) {
        faults.push(Fault::error(span, "an empty content without a layer is nothing at all").label("no heat path"));
    }
    let state = content_state(&raw.state.as_ref()?.value);
    // A material that is missing or could not be found has been told.
    let material = material.map_or(Some(None), |found| found.map(Some))?;
    Some(Content { radius_m: radius_m?, material, state })
}

fn layer(raw: &raw::Layer, radii: Option<(f64, f64)>, materials: &mut Materials, faults: &mut Faults) -> Option<Layer> {
    let material = raw.material.as_ref().and_then(|name| materials.find(name, faults));
    let (inside_radius_m, outside_radius_m) = radii?;
    Some(Layer {
        name: raw.name.as_ref()?.value.clone(),
        material: material?,
        inside_radius_m,
        outside_radius_m,
        contact: raw.contact.as_ref().map_or_else(Contact::default, |raw| contact(raw.value, inside_radius_m)),
    })
}

/// Resistance of a contact at its radius [m]: `R' = 1 / (2 pi r h)`.
fn contact(raw: raw::Contact, radius_m: f64) -> Contact {
    let resistance = |conductance: f64| 1.0 / (2.0 * PI * radius_m * conductance);
    match raw {
        raw::Contact::Perfect => Contact::default(),
        raw::Contact::Words(range) => Contact {
            resistance_m_k_per_w: resistance(0.5 * (range.low + range.high)),
            words: Some(ContactWords { words: range.words.into(), low: range.low, high: range.high }),
        },
        raw::Contact::Stated(quantity) if quantity.kind == crate::units::Kind::Resistance => {
            Contact { resistance_m_k_per_w: quantity.value_si, words: None }
        }
        raw::Contact::Stated(quantity) => Contact { resistance_m_k_per_w: resistance(quantity.value_si), words: None },
    }
}

fn seat(raw: &raw::Heater, places: &mut Places, faults: &mut Faults) -> Option<Seat> {
    let seat = match (&raw.face, &raw.through) {
        (Some(name), _) => places.face(name, faults).map(Seat::Face),
        (None, Some(name)) => places.through(name, faults),
        (None, None) => None,
    };
    if let Some(name) = &raw.name {
        places.add(name, seat.map(|seat| seat.place()), faults);
    }
    seat
}

fn heater(raw: &raw::Heater, seat: Option<Seat>, places: &Places, faults: &mut Faults) -> Option<Heater> {
    let thermostat = raw.thermostat.as_ref().map(|raw| thermostat(raw, places, faults));
    let output = raw.output?;
    Some(Heater {
        name: raw.name.as_ref()?.value.clone(),
        seat: seat?,
        output_w_per_m: output.value_si,
        output_low_w_per_m: output.value_si - output.tolerance.map_or(0.0, |tolerance| tolerance.value),
        runs: raw.runs.map_or(1.0, |runs| runs.value_si),
        thermostat: thermostat.map_or(Some(None), |read| read.map(Some))?,
    })
}

fn thermostat(raw: &raw::Thermostat, places: &Places, faults: &mut Faults) -> Option<Thermostat> {
    let senses = raw.senses.as_ref().and_then(|name| places.find(name, faults));
    let (on_below, off_above) = (raw.on_below?, raw.off_above?);
    if on_below.value_si >= off_above.value_si {
        faults.push(
            Fault::error(on_below.span, "a thermostat switches on below the temperature at which it switches off")
                .label("must be lower")
                .also(off_above.span, "than this"),
        );
        return None;
    }
    Some(Thermostat { senses: senses?, on_below_k: on_below.value_si, off_above_k: off_above.value_si })
}

fn probe(
    raw: &raw::Probe,
    bore_m: Option<f64>,
    outermost_m: Option<f64>,
    places: &mut Places,
    faults: &mut Faults,
) -> Option<Probe> {
    let radius = raw.radius.filter(|radius| match (bore_m, outermost_m) {
        (_, Some(outermost_m)) if radius.value_si > outermost_m * (1.0 + 1e-9) => {
            faults.push(
                Fault::error(radius.span, "the probe lies outside the line")
                    .label("too far out")
                    .note(format!("the outermost radius is {:.3} mm", outermost_m * 1e3)),
            );
            false
        }
        (Some(bore_m), _) if !places.has_content && radius.value_si < bore_m * (1.0 - 1e-9) => {
            faults.push(
                Fault::error(radius.span, "the probe lies in the bore, where there is no content")
                    .label("nothing there")
                    .note(format!("the innermost layer begins at a radius of {:.3} mm", bore_m * 1e3)),
            );
            false
        }
        _ => true,
    });
    let name = raw.name.as_ref()?;
    places.add(name, radius.map(|radius| Place::Radius(radius.value_si)), faults);
    Some(Probe { name: name.value.clone(), radius_m: radius?.value_si })
}

/// Warns of what has no effect on a content that does nothing but flow.
fn report_stream(case: &Case, states: &[(f64, Located<raw::State>)], heaters: &[Option<Heater>], faults: &mut Faults) {
    let is_stream = |(_, state): &(f64, Located<raw::State>)| matches!(state.value, raw::State::Flowing(..));
    let Some((_, stream)) = states.first().filter(|_| states.iter().all(is_stream)) else { return };
    for (raw, heater) in case.heaters.iter().zip(heaters) {
        if let (Some(through), Some(Seat::Content)) = (&raw.through, heater.as_ref().map(|heater| heater.seat)) {
            faults.push(
                Fault::warning(through.span, "this heater warms nothing: the stream's temperature is given")
                    .label("carried off by the stream")
                    .also(stream.span, "flows from first to last"),
            );
        }
    }
    for limit in &case.limits {
        if let Some(raw::Condition::Frozen(share) | raw::Condition::Thawed(share)) = &limit.condition {
            faults.push(
                Fault::warning(share.span, "a stream does not freeze in this model: its temperature is given")
                    .label("not reached")
                    .also(stream.span, "flows from first to last")
                    .help("let the flow stop by an [[event]] with content = \"still\""),
            );
        }
    }
}

fn course(raw: &Course, files: &mut SeriesFiles<'_>, faults: &mut Faults) -> Option<Series> {
    match raw {
        Course::Constant(quantity) => Some(Series::Constant(quantity.value_si)),
        Course::Series(wanted) => files.temperature(wanted, faults),
    }
}

fn outside(raw: &raw::Outside, files: &mut SeriesFiles<'_>, faults: &mut Faults) -> Option<Outside> {
    if raw.is_held {
        return Some(Outside { temperature_k: course(raw.held_at.as_ref()?, files, faults)?, film: None });
    }
    let temperature_k = raw.air.as_ref().and_then(|air| course(air, files, faults));
    Some(Outside { temperature_k: temperature_k?, film: Some(raw.film?.value_si) })
}

fn start(case: &Case, places: &Places, states: &[(f64, Located<raw::State>)], faults: &mut Faults) -> Option<Start> {
    match case.start.as_ref()? {
        raw::Start::Temperature(temperature) => Some(Start::Uniform(temperature.value_si)),
        raw::Start::Hold(span) => {
            let is_kept = states
                .first()
                .is_some_and(|(_, state)| matches!(state.value, raw::State::Flowing(..) | raw::State::HeldAt(_)));
            if case.heaters.is_empty() && !is_kept {
                faults.push(
                    Fault::warning(*span, "there is nothing to settle: no heater and no stream keeps the line warm")
                        .label("is everywhere at the temperature outside")
                        .help("state the starting temperature: temperature = \"5 degC\""),
                );
            }
            Some(Start::Hold)
        }
        raw::Start::Reading(place, temperature) => match places.find(place, faults)? {
            Place::Air => {
                faults.push(
                    Fault::error(place.span, "a reading of the air says nothing of the line")
                        .label("not in the line")
                        .help("name a place of the line, as in where = \"wall outside\""),
                );
                None
            }
            place => Some(Start::Reading { place, temperature_k: temperature.value_si }),
        },
    }
}

fn events(case: &Case, files: &mut SeriesFiles<'_>, faults: &mut Faults) -> Option<Vec<Event>> {
    let is_held = case.outside.as_ref().map(|outside| outside.is_held);
    let mut in_order: Vec<&raw::Event> = case.events.iter().collect();
    in_order.sort_by(|one, other| {
        let time = |event: &raw::Event| event.time.map_or(f64::INFINITY, |time| time.value_si);
        time(one).total_cmp(&time(other))
    });
    let mut is_supplied = true;
    let mut is_tripped = vec![false; case.heaters.len()];
    let mut events = Vec::with_capacity(in_order.len());
    for raw in in_order {
        let change = raw.change.as_ref().and_then(|change| match change {
            raw::Change::Supply(is_back) => {
                if *is_back == is_supplied {
                    let already = if is_supplied { "is not lost before" } else { "is already lost" };
                    faults.push(Fault::warning(raw.span, format!("the supply {already}: this event changes nothing")));
                }
                is_supplied = *is_back;
                Some(Change::Supply(*is_back))
            }
            raw::Change::HeaterReset(name, is_reset) => {
                let heater = heater_by_name(case, name, faults)?;
                if is_tripped[heater] != *is_reset {
                    let already = if *is_reset { "is not tripped before" } else { "is already tripped" };
                    faults.push(Fault::warning(name.span, format!("the heater {already}: this event changes nothing")));
                }
                is_tripped[heater] = !*is_reset;
                Some(if *is_reset { Change::HeaterReset(heater) } else { Change::HeaterTripped(heater) })
            }
            raw::Change::HeaterOutput(name, output) => {
                Some(Change::HeaterOutput(heater_by_name(case, name, faults)?, output.value_si))
            }
            raw::Change::Air(air, span) | raw::Change::HeldAt(air, span) => {
                let series = course(air, files, faults);
                let says_held = matches!(change, raw::Change::HeldAt(..));
                if is_held.is_some_and(|is_held| is_held != says_held) {
                    let (key, other) = if says_held { ("held_at", "air") } else { ("air", "held_at") };
                    faults.push(
                        Fault::error(*span, format!("`{key}` changes what [outside] does not have"))
                            .label(format!("[outside] has `{other}`"))
                            .help(format!("write {other} = ... here")),
                    );
                    return None;
                }
                series.map(Change::OutsideTemperature)
            }
            raw::Change::Film(film) => {
                if is_held == Some(true) {
                    faults.push(
                        Fault::error(film.span, "`film` changes what [outside] does not have")
                            .label("[outside] has `held_at`")
                            .help("give [outside] air and film"),
                    );
                }
                Some(Change::OutsideFilm(film.value_si))
            }
            raw::Change::Content(state) => Some(Change::Content(content_state(&state.value))),
        });
        events.push(raw.time.zip(change).map(|(time, change)| Event { time_s: time.value_si, change }));
    }
    events.into_iter().collect()
}

fn heater_by_name(case: &Case, name: &Located<String>, faults: &mut Faults) -> Option<usize> {
    let names: Vec<_> =
        case.heaters.iter().map(|heater| heater.name.as_ref().map_or("", |name| name.value.as_str())).collect();
    let found = names.iter().position(|known| same(known, &name.value));
    if found.is_none() {
        let known: Vec<_> = names.into_iter().filter(|name| !name.is_empty()).collect();
        let note = if known.is_empty() {
            "the case has no heater".into()
        } else {
            format!("its heaters: {}", known.join(", "))
        };
        faults.push(
            Fault::error(name.span, format!("there is no heater {}", quoted(&name.value)))
                .label("unknown heater")
                .note(note)
                .help_if(nearest(&name.value, known).map(|near| format!("did you mean \"{near}\"?"))),
        );
    }
    found
}

fn target(raw: &raw::Target, places: &Places, faults: &mut Faults) -> Option<Target> {
    let place = raw.place.as_ref().and_then(|name| find_in_line(name, "target", places, faults));
    Some(Target { name: raw.name.as_ref()?.value.clone(), place: place?, at_least_k: raw.at_least?.value_si })
}

fn find_in_line(name: &Located<String>, what: &str, places: &Places, faults: &mut Faults) -> Option<Place> {
    let place = places.find(name, faults)?;
    if place == Place::Air {
        faults.push(
            Fault::error(name.span, format!("a {what} on the air says nothing of the line")).label("not in the line"),
        );
        return None;
    }
    Some(place)
}

fn limit(raw: &raw::Limit, places: &Places, content: Option<&Content>, faults: &mut Faults) -> Option<Limit> {
    let condition = match raw.condition.as_ref()? {
        raw::Condition::Below(place, temperature) => {
            find_in_line(place, "limit", places, faults).map(|place| Condition::Below(place, temperature.value_si))
        }
        raw::Condition::Above(place, temperature) => {
            find_in_line(place, "limit", places, faults).map(|place| Condition::Above(place, temperature.value_si))
        }
        raw::Condition::Frozen(share) => frozen(*share, places, content, faults).map(Condition::Frozen),
        raw::Condition::Thawed(share) => frozen(*share, places, content, faults).map(Condition::Thawed),
    };
    Some(Limit { name: raw.name.as_ref()?.value.clone(), condition: condition? })
}

/// A frozen share of a content that can freeze.
fn frozen(share: Quantity, places: &Places, content: Option<&Content>, faults: &mut Faults) -> Option<f64> {
    let material: Option<&Arc<Material>> = content.and_then(|content| content.material.as_ref());
    let why = match material {
        // A content that could not be read has been told.
        None if content.is_none() => return Some(share.value_si),
        Some(material) if material.freezing_k.is_none() => format!("`{}` has no freezing point", material.name),
        // So has a material that is missing.
        _ if places.has_content => return Some(share.value_si),
        _ => "there is no content that could freeze".to_owned(),
    };
    faults.push(
        Fault::error(share.span, format!("a limit on the frozen share, but {why}"))
            .label("never passed")
            .help("limit a temperature instead, by `where` and `below`"),
    );
    None
}

fn report_doubled<'a>(what: &str, names: impl Iterator<Item = Option<&'a Located<String>>>, faults: &mut Faults) {
    let mut seen: Vec<&Located<String>> = Vec::new();
    for name in names.flatten() {
        match seen.iter().find(|earlier| same(&earlier.value, &name.value)) {
            Some(first) => faults.push(doubled(what, name, first.span)),
            None => seen.push(name),
        }
    }
}

/// Limits and targets that a thermostat at the same place passes or misses in its everyday cycle.
fn against_thermostats(
    case: &Case,
    heaters: &[Option<Heater>],
    targets: &[Option<Target>],
    limits: &[Option<Limit>],
    faults: &mut Faults,
) {
    for (raw_heater, heater) in case.heaters.iter().zip(heaters) {
        let Some((raw_thermostat, thermostat)) =
            raw_heater.thermostat.as_ref().zip(heater.as_ref().and_then(|heater| heater.thermostat))
        else {
            continue;
        };
        let (Some(on), Some(off)) = (raw_thermostat.on_below, raw_thermostat.off_above) else { continue };
        for (raw_limit, limit) in case.limits.iter().zip(limits) {
            let Some(limit) = limit else { continue };
            let passed_by = match (&limit.condition, &raw_limit.condition) {
                (Condition::Below(place, below_k), Some(raw::Condition::Below(_, stated)))
                    if *place == thermostat.senses && *below_k >= thermostat.on_below_k =>
                {
                    Some((
                        stated.span,
                        on.span,
                        "the thermostat lets it fall to this",
                        "lower the limit, or raise `on_below`",
                    ))
                }
                (Condition::Above(place, above_k), Some(raw::Condition::Above(_, stated)))
                    if *place == thermostat.senses && *above_k <= thermostat.off_above_k =>
                {
                    Some((
                        stated.span,
                        off.span,
                        "the thermostat lets it rise to this",
                        "raise the limit, or lower `off_above`",
                    ))
                }
                _ => None,
            };
            if let Some((span, by, label, help)) = passed_by {
                faults.push(
                    Fault::error(span, "the thermostat's own cycle passes this limit")
                        .label("passed in every cycle")
                        .also(by, label)
                        .help(help),
                );
            }
        }
        for (raw_target, target) in case.targets.iter().zip(targets) {
            let Some((target, stated)) = target.as_ref().zip(raw_target.at_least) else { continue };
            if target.place == thermostat.senses && target.at_least_k > thermostat.on_below_k {
                let (label, help) = if target.at_least_k > thermostat.off_above_k {
                    ("the thermostat switches off before it is met", "lower the target, or raise the thermostat's band")
                } else {
                    ("the thermostat lets it fall below this", "lower the target, or raise `on_below`")
                };
                faults.push(
                    Fault::warning(stated.span, "the thermostat does not hold this target")
                        .label("wanted")
                        .also(if target.at_least_k > thermostat.off_above_k { off.span } else { on.span }, label)
                        .help(help),
                );
            }
        }
    }
}

fn run(raw: &raw::Run, faults: &mut Faults) -> Run {
    let until_s = raw.until.map(|until| until.value_si);
    let mut record = Record::Auto;
    if let Some(every) = raw.every {
        record = Record::Every(every.value_si);
        if let Some(until) = raw.until
            && until.value_si / every.value_si > MOST_RECORDS
        {
            faults.push(
                Fault::error(every.span, "more than a million records")
                    .label("too short an interval")
                    .also(until.span, "for this length"),
            );
        }
    }
    if let Some(times) = &raw.record {
        for pair in times.value.windows(2) {
            if pair[1].value_si <= pair[0].value_si {
                faults.push(
                    Fault::error(pair[1].span, "the times of `record` must ascend").label("not after the one before"),
                );
            }
        }
        if let Some(until) = raw.until {
            for time in times.value.iter().filter(|time| time.value_si > until.value_si) {
                faults.push(
                    Fault::error(time.span, "a record after the end of the run")
                        .label("too late")
                        .also(until.span, "the run ends here"),
                );
            }
        }
        record = Record::At(times.value.iter().map(|time| time.value_si).collect());
    }
    Run { until_s, record }
}

fn report_late_events(case: &Case, run: &Run, faults: &mut Faults) {
    let (Some(until_s), Some(until)) = (run.until_s, case.run.until) else { return };
    for time in case.events.iter().filter_map(|event| event.time).filter(|time| time.value_si > until_s) {
        faults.push(
            Fault::warning(time.span, "this event comes after the end of the run: `run` does not see it")
                .label("too late")
                .also(until.span, "the run ends here"),
        );
    }
}

/// Warns of a series that ends before the run, unless another temperature has taken its place by then.
fn report_short_series(
    raw: &raw::Outside,
    outside: &Outside,
    events: &[Event],
    until: Option<Quantity>,
    faults: &mut Faults,
) {
    let (Some(until), Some(Course::Series(file))) = (until, raw.air.as_ref().or(raw.held_at.as_ref())) else { return };
    let replaced = events.iter().find(|event| matches!(event.change, Change::OutsideTemperature(_)));
    let needed_s = replaced.map_or(until.value_si, |event| event.time_s.min(until.value_si));
    let Some(ends_s) = outside.temperature_k.ends_s().filter(|&ends_s| ends_s < needed_s) else { return };
    faults.push(
        Fault::warning(until.span, "the series ends before the run: the run stops with it")
            .label("not reached")
            .also(file.file.span, format!("ends at {} h", (ends_s / 36.0).round() / 100.0)),
    );
}

/// Warns of tables of properties that the case's stated temperatures leave.
fn report_beyond_tables(case: &Case, section: &Section, faults: &mut Faults) {
    let (mut coldest_k, mut hottest_k) = section.outside.temperature_k.range();
    let mut include = |temperature_k: f64| {
        coldest_k = coldest_k.min(temperature_k);
        hottest_k = hottest_k.max(temperature_k);
    };
    let include_state = |state: &ContentState, include: &mut dyn FnMut(f64)| match *state {
        ContentState::Flowing { temperature_k, .. } | ContentState::HeldAt { temperature_k } => include(temperature_k),
        _ => {}
    };
    include_state(&section.content.state, &mut include);
    match section.start {
        Start::Uniform(temperature_k) | Start::Reading { temperature_k, .. } => include(temperature_k),
        Start::Hold => {}
    }
    for event in &section.events {
        match &event.change {
            Change::OutsideTemperature(series) => {
                let (low, high) = series.range();
                include(low);
                include(high);
            }
            Change::Content(state) => include_state(state, &mut include),
            _ => {}
        }
    }
    for heater in &section.heaters {
        if let Some(thermostat) = heater.thermostat {
            include(thermostat.off_above_k);
        }
    }

    let degc = |low_k: f64, high_k: f64| format!("{:.0} to {:.0} degC", low_k - 273.15, high_k - 273.15);
    for raw in &case.materials {
        let (solidus_k, liquidus_k) = raw.freezes_at.map_or((f64::INFINITY, 0.0), |range| range.value);
        // A phase is asked only for the temperatures at which it is there.
        for (property, low_k, high_k) in [
            (&raw.conductivity, coldest_k.max(liquidus_k), hottest_k),
            (&raw.specific_heat, coldest_k.max(liquidus_k), hottest_k),
            (&raw.solid_conductivity, coldest_k, hottest_k.min(solidus_k)),
            (&raw.solid_specific_heat, coldest_k, hottest_k.min(solidus_k)),
        ] {
            let Some(raw::Property { rows, span }) = property else { continue };
            let [(Some(first_k), _), .., (Some(last_k), _)] = rows.as_slice() else { continue };
            if low_k < first_k - BEYOND_TABLE_K || high_k > last_k + BEYOND_TABLE_K {
                faults.push(
                    Fault::warning(*span, "the case names temperatures beyond this table")
                        .label(format!("covers {}; beyond, its end values are taken", degc(*first_k, *last_k)))
                        .note(format!("the case names temperatures of {}", degc(coldest_k, hottest_k))),
                );
            }
        }
    }
    let mut told: Vec<&str> = Vec::new();
    for (raw, layer) in case.layers.iter().zip(&section.layers) {
        let (Some(name), material) = (&raw.material, &layer.material) else { continue };
        let (low_k, high_k) = material.covers_k;
        let is_left = coldest_k < low_k - BEYOND_BUILT_IN_K || hottest_k > high_k + BEYOND_BUILT_IN_K;
        let is_asked = !material.provenance.own && material.freezing_k.is_none() && low_k < high_k;
        if is_asked && is_left && !told.contains(&material.name.as_str()) {
            told.push(&material.name);
            faults.push(
                Fault::warning(name.span, format!("the case goes far beyond the table of {}", quoted(&material.name)))
                    .label(format!("covers {}; beyond, its end values are taken", degc(low_k, high_k)))
                    .note(format!("the case names temperatures of {}", degc(coldest_k, hottest_k))),
            );
        }
    }
}
