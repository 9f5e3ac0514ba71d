//! The cautions that apply to what was found. Each is a condition and a text; none replaces a qualified person.

use crate::answer::Findings;
use crate::section::{Change, Condition, ContentState, Event, Face, Seat, Side};
use std::ops::Range;

/// Surface temperature from which burns are warned of [degC]: the usual design limit of metal jackets (common practice).
const HOT_SURFACE_DEGC: f64 = 60.0;

/// What plastics conduct near 20 degC [W/(m K)]; lagging conducts less, soil and metal more.
const PLASTIC_CONDUCTS: Range<f64> = 0.12..0.6;

type Applies = fn(&Findings) -> bool;

fn freezes(found: &Findings) -> bool {
    found.section.content.material.as_ref().is_some_and(|material| material.freezing_k.is_some())
}

fn content_is(found: &Findings, words: &[&str]) -> bool {
    found.section.content.material.as_ref().is_some_and(|material| {
        let name = material.name.to_lowercase();
        words.iter().any(|word| name.contains(word))
    })
}

/// Whether ice was there at any recorded time or asked for.
fn icy(found: &Findings) -> bool {
    freezes(found)
        && (found.start.frozen_share > 0.0
            || found.history.frozen_share.iter().any(|&share| share > 0.0)
            || found.section.limits.iter().any(|limit| matches!(limit.condition, Condition::Frozen(_))))
}

fn watery(found: &Findings) -> bool {
    content_is(found, &["water"])
}

/// Whether water stands still at some time, so that it may cool below its freezing point before it freezes.
fn may_supercool(found: &Findings) -> bool {
    let stops = |event: &Event| matches!(event.change, Change::Content(ContentState::Still));
    let still = matches!(found.section.content.state, ContentState::Still) || found.section.events.iter().any(stops);
    icy(found) && watery(found) && still && found.start.frozen_share == 0.0
}

fn hot(found: &Findings) -> bool {
    found.history.faces_k.iter().any(|&kelvin| kelvin - 273.15 > HOT_SURFACE_DEGC)
}

fn heated(found: &Findings) -> bool {
    !found.section.heaters.is_empty()
}

/// Whether a content that is not modelled as freezing was colder than it is of use.
fn below_use(found: &Findings) -> bool {
    found.section.content.material.as_ref().and_then(|material| material.lowest_use_k).is_some_and(|lowest| {
        found.history.content_mean_k.iter().chain(&found.history.centre_k).any(|&kelvin| kelvin < lowest)
    })
}

/// Whether a heater lies on a face of a plastic, or across a contact from one.
fn plastic_under_heater(found: &Findings) -> bool {
    let layers = &found.section.layers;
    let plastic = |layer: usize| {
        layers.get(layer).is_some_and(|layer| {
            layer.material.freezing_k.is_none() && PLASTIC_CONDUCTS.contains(&layer.material.conductivity(293.15))
        })
    };
    found.section.heaters.iter().any(|heater| match heater.seat {
        Seat::Face(Face { layer, side: Side::Inside }) => plastic(layer) || (layer > 0 && plastic(layer - 1)),
        Seat::Face(Face { layer, side: Side::Outside }) => plastic(layer) || plastic(layer + 1),
        Seat::Layer(_) | Seat::Content => false,
    })
}

const CAUTIONS: &[(Applies, &str)] = &[
    (
        |_| true,
        "An estimate for a qualified person to judge, for the middle of a run in sound, dry lagging: valves, flanges, supports, \
         instruments, dead legs and damaged or wet lagging cool and freeze earlier.",
    ),
    (
        |found| icy(found) && watery(found),
        "Flow may be blocked soon after the first ice: water that has cooled below its freezing point can fill a bore with a web of \
         under 10 % ice. A frozen share is no measure of passage. Freezing water expands and can burst what holds it.",
    ),
    (
        |found| icy(found) && !watery(found),
        "Flow may be blocked soon after the content begins to set: a set share is no measure of passage. What sets or melts changes \
         its volume and can burst what holds it.",
    ),
    (
        icy,
        "A blocked line that is thawed from one end can burst. Whether a line that is or may be frozen is energised at all is \
         left to a qualified person.",
    ),
    (
        may_supercool,
        "Supercooling is not modelled: real water often begins to freeze later than this and then suddenly.",
    ),
    (
        below_use,
        "The content was colder than its lowest temperature of use. It is not modelled as setting: what is told of later times \
         holds for a content that stays liquid.",
    ),
    (
        hot,
        "Surfaces above 60 °C (the usual design limit, common practice) burn skin, those under the lagging once it is opened; touch \
         temperatures are set by standards and site rules.",
    ),
    (|found| content_is(found, &["lye", "caustic", "naoh"]), "Hot lye attacks steel: the material's limits prevail."),
    (
        |found| content_is(found, &["sulphur", "sulfur"]),
        "Sulphur thickens when overheated, above about 160 °C; keep it between its melting point and that.",
    ),
    (
        plastic_under_heater,
        "The model is round: under a strip heater a plastic wall is hotter than told here, and colder opposite. The heater's and \
         the pipe's own limits prevail.",
    ),
    (
        heated,
        "In hazardous areas the certified temperature limits of the heater hold; electrical work is for licensed people; local \
         codes and the heater's own documents prevail.",
    ),
];

/// The cautions that apply.
pub(super) fn that_apply(found: &Findings) -> Vec<String> {
    CAUTIONS.iter().filter(|(applies, _)| applies(found)).map(|(_, text)| (*text).to_string()).collect()
}
