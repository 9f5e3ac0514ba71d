//! The cautions that apply to what was found. Each is a condition and a text; none replaces a qualified person.

use crate::answer::Findings;
use crate::section::Condition;

/// Surface temperature from which burns are warned of [degC]: the usual design limit of metal jackets (common practice).
const HOT_SURFACE_DEGC: f64 = 60.0;

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
        && (found.history.frozen_share.iter().any(|&share| share > 0.0)
            || found.section.limits.iter().any(|limit| matches!(limit.condition, Condition::Frozen(_))))
}

fn frozen_at_start(found: &Findings) -> bool {
    found.start.frozen_share > 0.0
}

fn hot(found: &Findings) -> bool {
    found.history.faces_k.iter().any(|&kelvin| kelvin - 273.15 > HOT_SURFACE_DEGC)
}

fn heated(found: &Findings) -> bool {
    !found.section.heaters.is_empty()
}

fn plastic_wall_heated(found: &Findings) -> bool {
    heated(found)
        && found.section.layers.iter().any(|layer| {
            let k = layer.material.conductivity(293.15);
            (0.12..0.6).contains(&k) && layer.material.freezing_k.is_none()
        })
}

const CAUTIONS: &[(Applies, &str)] = &[
    (
        |_| true,
        "An estimate for a qualified person to judge, for the middle of a run in sound, dry lagging: valves, flanges, supports, \
         instruments, dead legs and damaged or wet lagging cool and freeze earlier.",
    ),
    (
        icy,
        "Flow may be blocked soon after the first ice: a frozen share is no measure of passage (water that has cooled below its \
         freezing point can fill a bore with a web of under 10 % ice). Frozen content can burst what holds it.",
    ),
    (
        frozen_at_start,
        "A blocked line that is thawed from one end can burst. Whether a line that is or may be frozen is energised at all is \
         left to a qualified person.",
    ),
    (
        |found| icy(found) && content_is(found, &["water"]),
        "Supercooling is not modelled: real water often begins to freeze later than this and then suddenly.",
    ),
    (
        hot,
        "Surfaces above 60 °C (the usual design limit, common practice) burn skin; touch temperatures are set by standards and site \
         rules.",
    ),
    (|found| content_is(found, &["lye", "caustic", "naoh"]), "Hot lye attacks steel: the material's limits prevail."),
    (
        |found| content_is(found, &["sulphur", "sulfur"]),
        "Sulphur thickens when overheated, above about 160 °C; keep it between its melting point and that.",
    ),
    (
        plastic_wall_heated,
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
