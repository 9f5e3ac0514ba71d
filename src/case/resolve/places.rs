//! Places by their names: faces, the centre, the content, the air, heaters and probes.

use crate::case::raw::Located;
use crate::faults::{Fault, Faults, Span, nearest, quoted};
use crate::section::{Face, Place, Seat, Side};

/// Names that every case has.
const FIXED: [(&str, Place); 4] = [
    ("centre", Place::Centre),
    ("content mean", Place::ContentMean),
    ("content surface", Place::ContentSurface),
    ("air", Place::Air),
];

/// The names that a case can call places by.
#[derive(Default)]
pub(super) struct Places {
    layers: Vec<String>,
    /// Name, where it was given, and the place; `None` for one whose faults have been told.
    own: Vec<(String, Span, Option<Place>)>,
    /// Whether a material content is there at some time.
    pub has_content: bool,
}

impl Places {
    /// The places of a case without layers; `has_content` says whether a material content is there at some time.
    pub fn new(has_content: bool) -> Self {
        Places { has_content, ..Places::default() }
    }

    /// Takes in the layers; their names are checked against one another.
    pub fn add_layers<'a>(&mut self, names: impl Iterator<Item = Option<&'a Located<String>>>, faults: &mut Faults) {
        let mut seen: Vec<&Located<String>> = Vec::new();
        for name in names {
            let known = name.map_or_else(String::new, |name| name.value.clone());
            if let Some(name) = name {
                match seen.iter().find(|earlier| same(&earlier.value, &name.value)) {
                    Some(first) => faults.push(doubled("layers", name, first.span)),
                    None => seen.push(name),
                }
                if same(&name.value, "content") {
                    faults.push(
                        Fault::error(name.span, "a layer cannot be named `content`")
                            .label("this name has a meaning of its own"),
                    );
                }
            }
            self.layers.push(known);
        }
    }

    /// Takes in a heater or a probe.
    pub fn add(&mut self, name: &Located<String>, place: Option<Place>, faults: &mut Faults) {
        let is_fixed = FIXED.iter().any(|(fixed, _)| same(fixed, &name.value)) || same(&name.value, "center");
        let is_face = self.names_of_layers().any(|(of_layer, _)| same(&of_layer, &name.value));
        if is_fixed || is_face {
            faults.push(
                Fault::error(name.span, format!("{} already names a place", quoted(&name.value)))
                    .label("this name has a meaning of its own")
                    .help("choose another name"),
            );
            return;
        }
        if let Some((_, first, _)) = self.own.iter().find(|(known, ..)| same(known, &name.value)) {
            faults.push(doubled("heaters or probes", name, *first));
            return;
        }
        self.own.push((name.value.clone(), name.span, place));
    }

    fn faces(&self) -> impl Iterator<Item = (String, Face)> + '_ {
        let named = self.layers.iter().enumerate().filter(|(_, name)| !name.is_empty());
        named.flat_map(|(layer, name)| {
            [(Side::Inside, "inside"), (Side::Outside, "outside")]
                .map(|(side, word)| (format!("{name} {word}"), Face { layer, side }))
        })
    }

    fn names_of_layers(&self) -> impl Iterator<Item = (String, Place)> + '_ {
        let means = self.layers.iter().enumerate().filter(|(_, name)| !name.is_empty());
        self.faces()
            .map(|(name, face)| (name, Place::Face(face)))
            .chain(means.map(|(layer, name)| (format!("{name} mean"), Place::LayerMean(layer))))
    }

    /// A place by its name; must have a temperature of its own.
    pub fn find(&self, name: &Located<String>, faults: &mut Faults) -> Option<Place> {
        let wanted = if same(&name.value, "center") { "centre" } else { &name.value };
        if let Some((_, _, place)) = self.own.iter().find(|(known, ..)| same(known, wanted)) {
            return *place;
        }
        let found = FIXED
            .iter()
            .map(|&(known, place)| (known.to_owned(), place))
            .chain(self.names_of_layers())
            .find(|(known, _)| same(known, wanted));
        match found {
            Some((_, Place::Centre | Place::ContentMean)) if !self.has_content => {
                faults.push(
                    Fault::error(name.span, format!("{} has no temperature: there is no content", quoted(&name.value)))
                        .label("nothing there")
                        .note("the content is empty or its surface is held from first to last"),
                );
                None
            }
            Some((_, place)) => Some(place),
            None => {
                faults.push(self.unknown(name));
                None
            }
        }
    }

    fn unknown(&self, name: &Located<String>) -> Fault {
        let own = self.own.iter().map(|(known, ..)| known.clone());
        let all: Vec<_> = FIXED
            .iter()
            .map(|(known, _)| (*known).to_owned())
            .chain(self.faces().map(|(known, _)| known))
            .chain(own)
            .collect();
        let fault = Fault::error(name.span, format!("there is no place {}", quoted(&name.value)))
            .label("unknown place")
            .note(format!("places of this case: {}", all.join(", ")));
        if let Some(layer) = self.layers.iter().find(|layer| same(layer, &name.value)) {
            return fault.help(format!("which face of it: \"{layer} inside\" or \"{layer} outside\"?"));
        }
        fault.help_if(
            nearest(&name.value, all.iter().map(String::as_str)).map(|near| format!("did you mean \"{near}\"?")),
        )
    }

    /// The face that a heater lies on.
    pub fn face(&self, name: &Located<String>, faults: &mut Faults) -> Option<Face> {
        if let Some((_, face)) = self.faces().find(|(known, _)| same(known, &name.value)) {
            return Some(face);
        }
        let all: Vec<_> = self.faces().map(|(known, _)| known).collect();
        let mut fault =
            Fault::error(name.span, format!("there is no face {}", quoted(&name.value))).label("unknown face");
        if all.is_empty() {
            fault = fault.help("the case has no layer; a bare core is heated through = \"content\"");
        } else {
            fault = fault.note(format!("faces of this case: {}", all.join(", ")));
            if let Some(layer) = self.layers.iter().find(|layer| same(layer, &name.value)) {
                fault = fault.help(format!("which face of it: \"{layer} inside\" or \"{layer} outside\"?"));
            } else if let Some(near) = nearest(&name.value, all.iter().map(String::as_str)) {
                fault = fault.help(format!("did you mean \"{near}\"?"));
            }
        }
        faults.push(fault);
        None
    }

    /// What a heater is spread through.
    pub fn through(&self, name: &Located<String>, faults: &mut Faults) -> Option<Seat> {
        if same(&name.value, "content") {
            if self.has_content {
                return Some(Seat::Content);
            }
            faults.push(
                Fault::error(name.span, "there is no content to heat: the line is empty, or its surface is held")
                    .label("nothing there"),
            );
            return None;
        }
        if let Some(layer) = self.layers.iter().position(|layer| same(layer, &name.value)) {
            return Some(Seat::Layer(layer));
        }
        let names = || self.layers.iter().map(String::as_str).filter(|name| !name.is_empty()).chain(["content"]);
        let mut fault = Fault::error(name.span, format!("there is no layer {}", quoted(&name.value)))
            .label("unknown layer")
            .note(format!("a heater can be spread through: {}", names().collect::<Vec<_>>().join(", ")));
        if self.faces().any(|(known, _)| same(&known, &name.value)) {
            fault = fault.help(format!("a heater on a face is written face = \"{}\"", name.value));
        } else if let Some(near) = nearest(&name.value, names()) {
            fault = fault.help(format!("did you mean \"{near}\"?"));
        }
        faults.push(fault);
        None
    }
}

/// Whether two names are one: the case of letters and the width of gaps do not count.
pub(super) fn same(one: &str, other: &str) -> bool {
    one.split_whitespace().map(str::to_lowercase).eq(other.split_whitespace().map(str::to_lowercase))
}

/// Two things of one name.
pub(super) fn doubled(what: &str, name: &Located<String>, first: Span) -> Fault {
    Fault::error(name.span, format!("two {what} are named {}", quoted(&name.value)))
        .label("again here")
        .also(first, "first here")
}
