//! Reads the tables of a case file: which keys must stand, which exclude one another, which words are known.

use super::keys;
use super::raw::*;
use super::walk::{Fields, Node, Value, list_of, quantity_of, tolerance_of};
use crate::faults::{Fault, Faults, nearest, quoted};
use crate::units::{CONTACT, Kind};

impl Case {
    pub(super) fn read(root: &Node, faults: &mut Faults) -> Option<Case> {
        let fields = Fields::open(root, &keys::CASE, faults)?;
        let require_table = |name, table, faults: &mut Faults| {
            let found = fields.table(name, table, faults);
            if !fields.says(&[name]) {
                faults.push(
                    Fault::error(fields.span, format!("the case has no [{name}]"))
                        .label("not in this file")
                        .note(format!("the keys of [{name}]: {}", table.modelled())),
                );
            }
            found
        };
        let content = require_table("content", &keys::CONTENT, faults).map(|fields| Content::read(fields, faults));
        let outside = require_table("outside", &keys::OUTSIDE, faults).map(|fields| Outside::read(fields, faults));
        let start = require_table("start", &keys::START, faults).and_then(|fields| Start::read(fields, faults));
        let each = |name, table, faults: &mut Faults| fields.tables(name, table, faults);
        Some(Case {
            span: fields.span,
            title: fields.text("title", faults),
            line: fields.table("line", &keys::LINE, faults).map(|f| Line::read(f, faults)).unwrap_or_default(),
            content,
            layers: each("layer", &keys::LAYER, faults).into_iter().map(|f| Layer::read(f, faults)).collect(),
            materials: each("material", &keys::MATERIAL, faults)
                .into_iter()
                .map(|f| Material::read(f, faults))
                .collect(),
            heaters: each("heater", &keys::HEATER, faults).into_iter().map(|f| Heater::read(f, faults)).collect(),
            outside,
            start,
            events: each("event", &keys::EVENT, faults).into_iter().map(|f| Event::read(f, faults)).collect(),
            targets: each("target", &keys::TARGET, faults).into_iter().map(|f| Target::read(f, faults)).collect(),
            limits: each("limit", &keys::LIMIT, faults).into_iter().map(|f| Limit::read(f, faults)).collect(),
            probes: each("probe", &keys::PROBE, faults).into_iter().map(|f| Probe::read(f, faults)).collect(),
            run: fields.table("run", &keys::RUN, faults).map(|f| Run::read(f, faults)).unwrap_or_default(),
        })
    }
}

impl Line {
    fn read(fields: Fields<'_>, faults: &mut Faults) -> Line {
        let length = positive(fields.quantity("length", Kind::Length, faults), faults);
        let extra_length = fields.quantity("extra_length", Kind::Length, faults);
        if let (Some(extra), None) = (fields.key_span("extra_length"), fields.key_span("length")) {
            faults.push(Fault::error(extra, "`extra_length` adds to a `length` that is not stated").label("to what?"));
        }
        Line { tag: fields.text("tag", faults), length, extra_length }
    }
}

impl Content {
    fn read(fields: Fields<'_>, faults: &mut Faults) -> Content {
        fields.at_most_one(
            &["state", "held_at"],
            "a surface that is held needs no state of what lies inside it",
            faults,
        );
        let held_at = fields.quantity("held_at", Kind::Temperature, faults);
        let state = match (fields.get("state"), fields.key_span("held_at")) {
            (Some(_), _) => fields.text("state", faults).and_then(|word| State::read(&word, "state", fields, faults)),
            (None, Some(span)) => {
                stray(fields, &["temperature", "film"], "a content whose surface is held", faults);
                held_at.map(|quantity| Located { value: State::HeldAt(quantity), span })
            }
            (None, None) => {
                fields.missing("state", faults);
                None
            }
        };
        let diameter = positive(fields.quantity("diameter", Kind::Length, faults), faults);
        Content {
            span: fields.span,
            material: fields.text("material", faults),
            lacks_material: !fields.says(&["material"]),
            state,
            diameter,
        }
    }
}

impl State {
    /// Reads the state that a word names with the keys `temperature` and `film` beside it.
    fn read(word: &Located<String>, key: &str, fields: Fields<'_>, faults: &mut Faults) -> Option<Located<State>> {
        #[derive(Clone, Copy)]
        enum Word {
            Still,
            Stirred,
            Flowing,
            Empty,
            HeldAt,
        }
        let mut options = vec![
            ("still", Word::Still),
            ("stirred", Word::Stirred),
            ("flowing", Word::Flowing),
            ("empty", Word::Empty),
        ];
        if key == "content" {
            options.push(("held_at", Word::HeldAt));
        }
        let state = match choice(word, key, &options, &[], faults)? {
            Word::Still => {
                stray(fields, &["temperature", "film"], "a still content", faults);
                State::Still
            }
            Word::Empty => {
                stray(fields, &["temperature", "film"], "an empty line", faults);
                State::Empty
            }
            Word::Stirred => {
                stray(fields, &["temperature"], "a stirred content", faults);
                State::Stirred(conducting(fields.quantity("film", Kind::Film, faults), faults))
            }
            Word::Flowing => {
                let temperature = fields.required_quantity("temperature", Kind::Temperature, faults);
                let film = conducting(fields.required_quantity("film", Kind::Film, faults), faults);
                State::Flowing(temperature?, film?)
            }
            Word::HeldAt => {
                stray(fields, &["film"], "a content whose surface is held", faults);
                State::HeldAt(fields.required_quantity("temperature", Kind::Temperature, faults)?)
            }
        };
        Some(Located { value: state, span: word.span })
    }
}

impl Layer {
    fn read(fields: Fields<'_>, faults: &mut Faults) -> Layer {
        let size = |key, faults: &mut Faults| positive(fields.quantity(key, Kind::Length, faults), faults);
        let inside_diameter = size("inside_diameter", faults);
        let outside_diameter = size("outside_diameter", faults);
        let thickness = size("thickness", faults);
        let pipe = fields.text("pipe", faults);
        let has_faulty_size = [
            ("inside_diameter", inside_diameter.is_none()),
            ("outside_diameter", outside_diameter.is_none()),
            ("thickness", thickness.is_none()),
            ("pipe", pipe.is_none()),
        ]
        .into_iter()
        .any(|(key, is_none)| is_none && fields.says(&[key]));
        Layer {
            span: fields.span,
            name: fields.required_text("name", faults),
            material: fields.required_text("material", faults),
            pipe,
            inside_diameter,
            outside_diameter,
            thickness,
            has_faulty_size,
            contact: fields.get("contact").and_then(|node| Contact::read(node, faults)),
        }
    }
}

impl Contact {
    fn read(node: &Node, faults: &mut Faults) -> Option<Located<Contact>> {
        let at = |value| Some(Located { value, span: node.span });
        if let Value::Text(text) = &node.value
            && text.trim_start().starts_with(char::is_alphabetic)
        {
            let words = Located { value: text.trim().to_owned(), span: node.span };
            let mut options = vec![("perfect", Contact::Perfect)];
            options.extend(CONTACT_RANGES.iter().map(|range| (range.words, Contact::Words(range))));
            return choice(&words, "contact", &options, &[], faults).and_then(at);
        }
        let quantity = quantity_of(node, CONTACT, faults)?;
        let quantity = if quantity.kind == Kind::Film { conducting(Some(quantity), faults)? } else { quantity };
        at(Contact::Stated(quantity))
    }
}

impl Material {
    fn read(fields: Fields<'_>, faults: &mut Faults) -> Material {
        let property = |fields: Fields<'_>, key: &'static str, kind, faults: &mut Faults| {
            fields.get(key).and_then(|node| Property::read(node, key, kind, faults))
        };
        let solid = fields.table("solid", &keys::SOLID, faults);
        for key in ["conductivity", "specific_heat"] {
            fields.require(key, faults);
        }
        let freezes_at = fields.get("freezes_at").and_then(|node| freezing_range(node, faults));
        let freezing_keys = ["latent_heat", "solid"];
        match fields.key_span("freezes_at") {
            Some(_) => {
                fields.require("latent_heat", faults);
            }
            None => {
                for (key, span) in fields.present(&freezing_keys) {
                    faults.push(
                        Fault::error(span, format!("`{key}` belongs to a material that freezes"))
                            .label("freezes at what temperature?")
                            .help("add freezes_at = \"0 degC\", or a range of two temperatures"),
                    );
                }
            }
        }
        Material {
            span: fields.span,
            name: fields.required_text("name", faults),
            source: fields.text("source", faults),
            density: positive(fields.required_quantity("density", Kind::Density, faults), faults),
            conductivity: property(fields, "conductivity", Kind::Conductivity, faults),
            specific_heat: property(fields, "specific_heat", Kind::SpecificHeat, faults),
            freezes_at,
            latent_heat: positive(fields.quantity("latent_heat", Kind::LatentHeat, faults), faults),
            solid_conductivity: solid.and_then(|solid| property(solid, "conductivity", Kind::Conductivity, faults)),
            solid_specific_heat: solid.and_then(|solid| property(solid, "specific_heat", Kind::SpecificHeat, faults)),
            solid: fields.key_span("solid"),
            lowest_use: fields.quantity("lowest_use", Kind::Temperature, faults),
        }
    }
}

impl Property {
    fn read(node: &Node, key: &str, kind: Kind, faults: &mut Faults) -> Option<Property> {
        let Value::Array(items) = &node.value else {
            let quantity = positive(quantity_of(node, &[kind], faults), faults)?;
            return Some(Property { rows: vec![(None, quantity.value_si)], span: node.span });
        };
        let example = format!("[[\"0 degC\", \"{}\"], [\"50 degC\", \"{}\"]]", kind.example(), kind.example());
        if items.is_empty() {
            faults.push(
                Fault::error(node.span, format!("the table of `{key}` has no rows"))
                    .label("empty")
                    .help(format!("as in {example}")),
            );
            return None;
        }
        let mut rows: Vec<(Option<f64>, f64)> = Vec::with_capacity(items.len());
        let mut is_sound = true;
        for item in items {
            let Value::Array(pair) = &item.value else {
                faults.push(
                    Fault::error(item.span, format!("a row of `{key}` is a pair of temperature and value"))
                        .label("no pair")
                        .help(format!("as in {example}")),
                );
                return None;
            };
            let [temperature, value] = pair.as_slice() else {
                faults.push(
                    Fault::error(
                        item.span,
                        format!("a row of `{key}` is a pair of temperature and value, not {} items", pair.len()),
                    )
                    .label("no pair")
                    .help(format!("as in {example}")),
                );
                is_sound = false;
                continue;
            };
            let temperature = quantity_of(temperature, &[Kind::Temperature], faults);
            let value = positive(quantity_of(value, &[kind], faults), faults);
            let (Some(temperature), Some(value)) = (temperature, value) else {
                is_sound = false;
                continue;
            };
            if let Some((Some(before), _)) = rows.last()
                && temperature.value_si <= *before
            {
                faults.push(
                    Fault::error(temperature.span, format!("the temperatures of `{key}` must ascend"))
                        .label("not above the row before"),
                );
                is_sound = false;
            }
            rows.push((Some(temperature.value_si), value.value_si));
        }
        is_sound.then_some(Property { rows, span: node.span })
    }
}

/// `freezes_at`: one temperature, or solidus and liquidus.
fn freezing_range(node: &Node, faults: &mut Faults) -> Option<Located<(f64, f64)>> {
    let Value::Array(items) = &node.value else {
        let quantity = quantity_of(node, &[Kind::Temperature], faults)?;
        return Some(Located { value: (quantity.value_si, quantity.value_si), span: node.span });
    };
    let [solidus, liquidus] = items.as_slice() else {
        faults.push(
            Fault::error(node.span, "`freezes_at` is one temperature, or two: where freezing ends and where it begins")
                .label(format!("{} items", items.len())),
        );
        return None;
    };
    let solidus = quantity_of(solidus, &[Kind::Temperature], faults);
    let liquidus = quantity_of(liquidus, &[Kind::Temperature], faults);
    let (solidus, liquidus) = (solidus?.value_si, liquidus?.value_si);
    if solidus > liquidus {
        faults.push(
            Fault::error(node.span, "the lower temperature of `freezes_at`, where freezing ends, comes first")
                .label("the wrong way round"),
        );
        return None;
    }
    Some(Located { value: (solidus, liquidus), span: node.span })
}

impl Heater {
    fn read(fields: Fields<'_>, faults: &mut Faults) -> Heater {
        fields.at_most_one(&["face", "through"], "a heater lies on a face or is spread through a layer", faults);
        if !fields.says(&["face", "through"]) {
            faults.push(
                Fault::error(fields.span, "[[heater]] needs `face` or `through`: where it releases its heat")
                    .label("where is it?")
                    .help("as in face = \"wall outside\", through = \"wall\" or through = \"content\""),
            );
        }
        let runs = fields.quantity("runs", Kind::Number, faults);
        let runs = runs.filter(|runs| {
            let is_sound = runs.value_si > 0.0 && runs.value_si <= 1e4;
            if !is_sound {
                faults.push(
                    Fault::error(runs.span, "`runs` is metres of heater per metre of line, above 0")
                        .label("out of range"),
                );
            }
            is_sound
        });
        Heater {
            span: fields.span,
            name: fields.required_text("name", faults),
            face: fields.text("face", faults),
            through: fields.text("through", faults),
            output: Heater::read_output(fields, faults),
            runs,
            thermostat: fields
                .table("thermostat", &keys::THERMOSTAT, faults)
                .map(|fields| Thermostat::read(fields, faults)),
        }
    }

    fn read_output(fields: Fields<'_>, faults: &mut Faults) -> Option<Quantity> {
        let node = fields.require("output", faults)?;
        if let Value::Array(_) = node.value {
            faults.push(
                Fault::error(node.span, "an output over temperature (a self-limiting heater) is not yet modelled")
                    .label("not yet modelled")
                    .help("state one output, the one at the temperature that matters to the question"),
            );
            return None;
        }
        let mut output = quantity_of(node, &[Kind::Output], faults)?;
        if let Some(tolerance) = fields.get("tolerance") {
            if let Some(stated) = output.tolerance {
                faults.push(
                    Fault::error(tolerance.span, "the output's tolerance is stated twice")
                        .label("take out one of the two")
                        .also(stated.span, "the other"),
                );
            }
            output.tolerance = tolerance_of(tolerance, Kind::Output, output.value_si, faults);
        }
        Some(output)
    }
}

impl Thermostat {
    fn read(fields: Fields<'_>, faults: &mut Faults) -> Thermostat {
        Thermostat {
            span: fields.span,
            senses: fields.required_text("senses", faults),
            on_below: fields.required_quantity("on_below", Kind::Temperature, faults),
            off_above: fields.required_quantity("off_above", Kind::Temperature, faults),
        }
    }
}

impl Course {
    fn read(node: &Node, faults: &mut Faults) -> Option<Course> {
        if let Value::Table(entries) = &node.value
            && !entries.iter().any(|entry| entry.key == "value")
        {
            let fields = Fields::open(node, &keys::SERIES, faults)?;
            let (file, column) = (fields.required_text("file", faults), fields.required_text("column", faults));
            let time = fields.text("time", faults);
            return Some(Course::Series(SeriesFile { file: file?, column: column?, time }));
        }
        quantity_of(node, &[Kind::Temperature], faults).map(Course::Constant)
    }
}

impl Outside {
    fn read(fields: Fields<'_>, faults: &mut Faults) -> Outside {
        let held = "a surface that is held at a temperature meets no air";
        fields.at_most_one(&["held_at", "air"], held, faults);
        fields.at_most_one(&["held_at", "film"], held, faults);
        if fields.key_span("held_at").is_none() {
            for key in ["air", "film"] {
                // Wind, radiation and soil stand for a film.
                if key != "film" || !fields.has_later() {
                    fields.require(key, faults);
                }
            }
        }
        let course = |key, faults: &mut Faults| fields.get(key).and_then(|node| Course::read(node, faults));
        Outside {
            span: fields.span,
            air: course("air", faults),
            film: conducting(fields.quantity("film", Kind::Film, faults), faults),
            held_at: course("held_at", faults),
            is_held: fields.key_span("held_at").is_some(),
        }
    }
}

impl Start {
    fn read(fields: Fields<'_>, faults: &mut Faults) -> Option<Start> {
        const WAYS: [&str; 3] = ["temperature", "state", "reading"];
        fields.at_most_one(&WAYS, "the line starts in one way", faults);
        let Some((way, _)) = fields.present(&WAYS).first().copied() else {
            if fields.says(&WAYS) || fields.has_later() {
                return None;
            }
            faults.push(
                Fault::error(fields.span, "[start] needs `temperature`, `state` or `reading`")
                    .label("how does it start?")
                    .help("state = \"hold\" for the settled state under heaters and controls"),
            );
            return None;
        };
        match way {
            "temperature" => fields.quantity("temperature", Kind::Temperature, faults).map(Start::Temperature),
            "state" => {
                let word = fields.text("state", faults)?;
                choice(&word, "state", &[("hold", ())], &[], faults)?;
                Some(Start::Hold(word.span))
            }
            _ => {
                let reading = fields.table("reading", &keys::READING, faults)?;
                let place = reading.required_text("where", faults);
                let temperature = reading.required_quantity("temperature", Kind::Temperature, faults);
                Some(Start::Reading(place?, temperature?))
            }
        }
    }
}

impl Event {
    fn read(fields: Fields<'_>, faults: &mut Faults) -> Event {
        let time = fields.required_quantity("time", Kind::Time, faults);
        Event { span: fields.span, time, change: Change::read(fields, faults) }
    }
}

impl Change {
    fn read(fields: Fields<'_>, faults: &mut Faults) -> Option<Change> {
        const SUBJECTS: [&str; 5] = ["supply", "heater", "air", "held_at", "content"];
        fields.at_most_one(&SUBJECTS, "one [[event]] changes one thing; write two with the same time", faults);
        if let (Some(air), Some(film)) = (fields.key_span("air"), fields.key_span("film")) {
            faults.push(
                Fault::error(film, "one [[event]] changes one thing; write two with the same time")
                    .label("take this into an event of its own")
                    .also(air, "changed here"),
            );
        }
        let subject = fields.present(&SUBJECTS).first().copied();
        if !matches!(subject, Some(("heater", _))) {
            stray(fields, &["becomes", "output"], "an event without `heater`", faults);
        }
        if !matches!(subject, Some(("content", _))) {
            stray(fields, &["temperature"], "an event without `content`", faults);
        }
        if matches!(subject, Some(("supply" | "heater" | "held_at", _))) {
            stray(fields, &["film"], "an event of this kind", faults);
        }
        match subject {
            Some(("supply", _)) => {
                let word = fields.text("supply", faults)?;
                let voltage = [("reduced", "a changed supply voltage")];
                choice(&word, "supply", &[("lost", false), ("back", true)], &voltage, faults).map(Change::Supply)
            }
            Some(("heater", span)) => {
                let heater = fields.text("heater", faults);
                fields.at_most_one(&["becomes", "output"], "write two events with the same time", faults);
                if fields.get("becomes").is_some() {
                    let word = fields.text("becomes", faults)?;
                    let stuck = [("stuck on", "a heater that fails on"), ("stuck off", "a heater that fails off")];
                    let is_reset = choice(&word, "becomes", &[("tripped", false), ("reset", true)], &stuck, faults)?;
                    return Some(Change::HeaterReset(heater?, is_reset));
                }
                if fields.get("output").is_some() {
                    let output = fields.quantity("output", Kind::Output, faults)?;
                    return Some(Change::HeaterOutput(heater?, output));
                }
                faults.push(
                    Fault::error(span, "the event names a heater but not what becomes of it")
                        .label("becomes what?")
                        .help("add becomes = \"tripped\", becomes = \"reset\" or output = \"15 W/m\""),
                );
                None
            }
            Some(("air", span)) => Course::read(fields.get("air")?, faults).map(|course| Change::Air(course, span)),
            Some(("held_at", span)) => {
                Course::read(fields.get("held_at")?, faults).map(|course| Change::HeldAt(course, span))
            }
            Some(_) => {
                let word = fields.text("content", faults)?;
                State::read(&word, "content", fields, faults).map(Change::Content)
            }
            None if fields.get("film").is_some() => {
                conducting(fields.quantity("film", Kind::Film, faults), faults).map(Change::Film)
            }
            None => {
                if !fields.says(&SUBJECTS) && !fields.says(&["film"]) && !fields.has_later() {
                    faults.push(
                        Fault::error(fields.span, "[[event]] changes nothing")
                            .label("what happens?")
                            .note("it holds one of: supply, heater, air, film, held_at, content"),
                    );
                }
                None
            }
        }
    }
}

impl Target {
    fn read(fields: Fields<'_>, faults: &mut Faults) -> Target {
        Target {
            name: fields.required_text("name", faults),
            place: fields.required_text("where", faults),
            at_least: fields.required_quantity("at_least", Kind::Temperature, faults),
        }
    }
}

impl Limit {
    fn read(fields: Fields<'_>, faults: &mut Faults) -> Limit {
        Limit { name: fields.required_text("name", faults), condition: Condition::read(fields, faults) }
    }
}

impl Condition {
    fn read(fields: Fields<'_>, faults: &mut Faults) -> Option<Condition> {
        const WAYS: [&str; 4] = ["below", "above", "frozen", "thawed"];
        fields.at_most_one(&WAYS, "one [[limit]] holds one condition; write two", faults);
        let Some((way, _)) = fields.present(&WAYS).first().copied() else {
            if fields.says(&WAYS) {
                return None;
            }
            faults.push(
                Fault::error(fields.span, "[[limit]] needs a condition: `below`, `above`, `frozen` or `thawed`")
                    .label("passed when?"),
            );
            return None;
        };
        let share = |faults: &mut Faults| fields.quantity(way, Kind::Share, faults);
        match way {
            "frozen" | "thawed" => {
                stray(fields, &["where"], "a limit on the frozen share, which is the content's,", faults);
                let share = share(faults)?;
                Some(if way == "frozen" { Condition::Frozen(share) } else { Condition::Thawed(share) })
            }
            _ => {
                let place = fields.required_text("where", faults);
                let temperature = fields.quantity(way, Kind::Temperature, faults);
                let (place, temperature) = (place?, temperature?);
                Some(if way == "below" {
                    Condition::Below(place, temperature)
                } else {
                    Condition::Above(place, temperature)
                })
            }
        }
    }
}

impl Probe {
    fn read(fields: Fields<'_>, faults: &mut Faults) -> Probe {
        Probe {
            name: fields.required_text("name", faults),
            radius: fields.required_quantity("radius", Kind::Length, faults),
        }
    }
}

impl Run {
    fn read(fields: Fields<'_>, faults: &mut Faults) -> Run {
        fields.at_most_one(&["record", "every"], "records stand at a list of times or at an interval", faults);
        let record = fields.get("record").and_then(|node| {
            let items = list_of(node, "record", "times", faults)?;
            if items.is_empty() {
                faults.push(Fault::error(node.span, "`record` holds no time").label("empty"));
            }
            let times: Vec<_> = items.iter().map(|item| quantity_of(item, &[Kind::Time], faults)).collect();
            let times: Option<Vec<_>> = times.into_iter().collect();
            Some(Located { value: times?, span: node.span })
        });
        Run {
            until: positive(fields.quantity("until", Kind::Time, faults), faults),
            record,
            every: positive(fields.quantity("every", Kind::Time, faults), faults),
        }
    }
}

/// A quantity that must be above zero.
fn positive(quantity: Option<Quantity>, faults: &mut Faults) -> Option<Quantity> {
    let quantity = quantity?;
    if quantity.value_si > 0.0 {
        return Some(quantity);
    }
    faults.push(
        Fault::error(quantity.span, format!("a {} of nothing: it must be above 0", quantity.kind.name())).label("zero"),
    );
    None
}

/// A film or contact that must let heat pass.
fn conducting(quantity: Option<Quantity>, faults: &mut Faults) -> Option<Quantity> {
    let quantity = quantity?;
    if quantity.value_si > 0.0 {
        return Some(quantity);
    }
    faults.push(
        Fault::error(quantity.span, "no heat passes: a film or a contact must be above 0 W/(m2 K)")
            .label("no heat path")
            .help("for an insulated face give the insulation as a layer"),
    );
    None
}

/// Reports keys that mean nothing beside what else the table says.
fn stray(fields: Fields<'_>, names: &[&'static str], of: &str, faults: &mut Faults) {
    for (key, span) in fields.present(names) {
        faults.push(Fault::error(span, format!("`{key}` means nothing for {of}")).label("take it out"));
    }
}

/// One of several words; words of later work are told apart from unknown ones.
fn choice<T: Copy>(
    word: &Located<String>,
    key: &str,
    options: &[(&str, T)],
    later: &[(&str, &str)],
    faults: &mut Faults,
) -> Option<T> {
    let said = word.value.to_lowercase();
    if let Some((_, value)) = options.iter().find(|(name, _)| *name == said) {
        return Some(*value);
    }
    if let Some((name, about)) = later.iter().find(|(name, _)| *name == said) {
        faults.push(
            Fault::error(word.span, format!("`{key} = \"{name}\"` is not yet modelled"))
                .label("not yet modelled")
                .note(format!("meant for {about}")),
        );
        return None;
    }
    let names: Vec<_> = options.iter().map(|(name, _)| format!("\"{name}\"")).collect();
    let mut fault = Fault::error(word.span, format!("`{key}` cannot be {}", quoted(&word.value)))
        .label("unknown word")
        .note(format!("accepted: {}", names.join(", ")));
    if key == "contact" {
        fault = fault.note("or a conductance in W/(m2 K), or a resistance in m K/W");
    }
    if let Some(near) = nearest(&said, options.iter().map(|(name, _)| *name)) {
        fault = fault.help(format!("did you mean \"{near}\"?"));
    }
    faults.push(fault);
    None
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::case::walk;

    #[test]
    fn tolerances_are_kept_with_their_quantities() {
        let text = "[line]\nlength = { value = \"40 m\", tolerance = \"5 %\" }\n[content]\nheld_at = { value = \"5 degC\", \
                    tolerance = \"2 K\" }\n[outside]\nheld_at = \"0 degC\"\n[start]\ntemperature = \"0 degC\"\n";
        let mut faults = Faults::default();
        let source = faults.add_source("case", text);
        let root = walk::parse(source, text, &mut faults);
        let case = Case::read(&root, &mut faults).unwrap();
        assert!(faults.is_empty(), "{faults}");
        assert_eq!(case.line.length.unwrap().tolerance.unwrap().value, 2.0);
        let State::HeldAt(held_at) = case.content.unwrap().state.unwrap().value else { panic!() };
        assert_eq!((held_at.value_si, held_at.tolerance.unwrap().value), (278.15, 2.0));
    }
}
