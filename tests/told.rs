//! How the shipped cases are answered in words: the order, the safe side, what is left out and what is warned of.

use std::path::Path;
use stillwarm::answer::{Findings, Outcome};
use stillwarm::case;
use stillwarm::question::{self, Options, Verb};
use stillwarm::report::terminal;

fn ask_with(verb: Verb, name: &str, overrides: &[&str]) -> Findings {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("cases").join(format!("{name}.toml"));
    let overrides: Vec<_> = overrides.iter().map(|&text| text.to_owned()).collect();
    let loaded = case::load(&path, &overrides).unwrap_or_else(|faults| panic!("{name}:\n{faults}"));
    question::ask(verb, &loaded, &Options::default(), &mut |_| true).unwrap_or_else(|error| panic!("{name}: {error}"))
}

fn ask(verb: Verb, name: &str) -> Findings {
    ask_with(verb, name, &[])
}

fn line_of(found: &Findings, words: &str) -> usize {
    let lines = &found.headline;
    lines.iter().position(|line| line.contains(words)).unwrap_or_else(|| panic!("no '{words}' in {lines:#?}"))
}

#[test]
fn what_comes_first_is_told_first() {
    let found = ask(Verb::Outage, "lye-line-outage");
    // In the file 'sets' stands before 'low alarm'; the answers keep that order, the words do not.
    assert_eq!(found.answers[0].name, "sets");
    assert!(line_of(&found, "Low alarm after") < line_of(&found, "Sets after"));
    assert!(line_of(&found, "Sets after") < line_of(&found, "Hot for steel: never"));
}

/// The worse line's heater is too weak to pause: it starts warmer than the cold end of the stated line's cycle, and would
/// seem to last as long.
#[test]
fn a_worse_line_that_starts_warmer_is_not_taken_for_a_cautious_answer() {
    let found = ask(Verb::Outage, "plastic-pipe");
    for answer in found.answers.iter().filter(|answer| answer.time_s.is_some()) {
        let (time, cautious) = (answer.time_s.unwrap(), answer.cautious_time_s.unwrap());
        assert!(cautious < 0.9 * time, "{}: {cautious} s against {time} s", answer.name);
    }
}

#[test]
fn a_limit_on_heat_has_no_cautious_answer_and_that_is_said() {
    let found = ask(Verb::Outage, "plastic-pipe");
    let hot = found.answers.iter().find(|answer| answer.name == "hot for the plastic").unwrap();
    assert_eq!(hot.outcome, Outcome::SettlesShort);
    assert!(hot.cautious_outcome.is_none());
    assert!(found.assumptions.iter().any(|line| line.starts_with("A limit on heat has no cautious answer")));
}

#[test]
fn without_lagging_and_tolerance_there_is_no_cautious_answer() {
    let found =
        ask_with(Verb::Run, "heated-cylinder", &["limit=[{name='cold', where='shell outside', below='10 degC'}]"]);
    assert!(found.answers[0].cautious_outcome.is_none());
    assert!(found.assumptions.iter().any(|line| line.starts_with("No cautious answer")), "{:#?}", found.assumptions);
    assert!(!terminal::text(&found, false).contains("cautious: "));
}

#[test]
fn a_run_from_a_cycle_is_told_from_both_its_ends() {
    let found = ask(Verb::Run, "water-branch-trip");
    let other = found.other_start.as_ref().expect("the other end of the cycle");
    assert_eq!(other.answers.len(), found.answers.len());
    assert_ne!(other.answers[1].time_s, found.answers[1].time_s);
    assert!(found.assumptions.iter().any(|line| line.contains("where the thermostat's cycle stands")));
    line_of(&found, "From the warm end of that cycle: low alarm after");
}

#[test]
fn events_that_an_outage_keeps_are_named() {
    let found = ask(Verb::Outage, "flow-stops");
    assert!(
        found.assumptions.iter().any(|line| line.starts_with("The case's other events happen") && line.contains("6 h")),
        "{:#?}",
        found.assumptions
    );
}

#[test]
fn a_frozen_line_without_supply_stays_frozen_and_that_is_an_answer() {
    let found = ask(Verb::Outage, "frozen-line-thaw");
    assert!(found.answered);
    assert!(found.answers.iter().all(|answer| answer.outcome == Outcome::SettlesShort && !answer.danger));
    line_of(&found, "It is 100 % frozen at the start.");
    assert!(!found.cautions.iter().any(|line| line.contains("Supercooling")));
    assert!(found.cautions.iter().any(|line| line.contains("thawed from one end can burst")));
}

#[test]
fn heat_passed_on_the_way_of_a_warm_up_is_told() {
    let warm = "target=[{name='warm', where='wall outside', at_least='30 degC'}]";
    let limit = |above: &str| format!("limit=[{{name='scorched', where='wall outside', above='{above}'}}]");
    let passed = ask_with(Verb::Warmup, "frozen-line-thaw", &[warm, &limit("20 degC")]);
    let scorched = passed.answers.last().unwrap();
    assert_eq!((scorched.name.as_str(), scorched.outcome, scorched.danger), ("scorched", Outcome::Reached, true));
    assert!(scorched.time_s.unwrap() < passed.answers[0].time_s.unwrap());
    line_of(&passed, "On the way, for nothing stops the heat here: Scorched after");
    let safe = ask_with(Verb::Warmup, "frozen-line-thaw", &[warm, &limit("40 degC")]);
    line_of(&safe, "Not passed on the way: 'scorched'.");
}

#[test]
fn tables_that_are_left_are_named() {
    // With a thermostat stuck on, sulphur goes far beyond what its tables cover.
    let found = ask(Verb::Steady, "sulphur-line-outage");
    assert!(found.assumptions.iter().any(|line| line.contains("sulphur covers 20 to 160")), "{:#?}", found.assumptions);
    assert!(!ask(Verb::Run, "sulphur-line-outage").assumptions.iter().any(|line| line.contains("sulphur covers")));
}

#[test]
fn cautions_are_those_of_the_content_and_the_wall() {
    let says = |name: &str, words: &str| ask(Verb::Outage, name).cautions.iter().any(|line| line.contains(words));
    assert!(says("sulphur-line-outage", "Sulphur thickens") && !says("water-branch-outage", "Sulphur thickens"));
    assert!(says("lye-line-outage", "Hot lye") && says("lye-line-outage", "lowest temperature of use"));
    assert!(says("plastic-pipe", "a plastic wall is hotter") && !says("frozen-line-thaw", "a plastic wall is hotter"));
    assert!(says("water-branch-outage", "Supercooling") && !says("sulphur-line-outage", "Supercooling"));
    // Steel under the heater, and no heater in sight of anybody: the general ones stay.
    assert!(says("heated-cylinder", "qualified person") && says("heated-cylinder", "licensed people"));
}

#[test]
fn the_watts_that_hold_are_set_against_the_heater_at_its_worst() {
    let found = ask(Verb::Steady, "water-branch-outage");
    let line = &found.headline[line_of(&found, "hold 'keep'")];
    assert!(line.contains("of 13.5 W/m at the lower tolerance"), "{line}");
    let weak =
        ask_with(Verb::Steady, "water-branch-outage", &["heater.trace.output={value='9 W/m', tolerance='10 %'}"]);
    let line = &weak.headline[line_of(&weak, "hold 'keep'")];
    assert!(line.contains("which would not hold it"), "{line}");
}

#[test]
fn the_text_fits_a_terminal_and_its_minus_signs_are_minus_signs() {
    for (verb, name) in [
        (Verb::Outage, "water-branch-outage"),
        (Verb::Steady, "sample-hose"),
        (Verb::Warmup, "wax-line-warmup"),
        (Verb::Run, "cold-night"),
    ] {
        let text = terminal::text(&ask(verb, name), false);
        for line in text.lines() {
            assert!(line.chars().count() <= 100, "{name}: {line}");
            // A hyphen before a figure that does not end a word stands for a minus sign.
            let minus = |(at, _): (usize, &str)| {
                line[at + 1..].starts_with(|next: char| next.is_ascii_digit())
                    && line[..at].ends_with(|before: char| before.is_whitespace() || before == '(')
            };
            assert!(!line.match_indices('-').any(minus), "{name}: {line}");
        }
    }
}

/// Every limit that a cold outage passes in a shipped case is passed by every solution of it, from either start: none takes
/// its first short step for rest.
#[test]
fn no_outage_of_a_shipped_case_comes_to_rest_before_it_has_begun() {
    for (name, passed) in [
        ("plastic-pipe", 2),
        ("sample-hose", 1),
        ("sulphur-line-outage", 2),
        ("lye-line-outage", 2),
        ("water-branch-stirred", 4),
        ("water-branch-outage", 4),
        ("water-branch-reading", 3),
        ("flow-stops", 3),
    ] {
        let found = ask(Verb::Outage, name);
        let starts = std::iter::once(&found.answers).chain(found.other_start.as_ref().map(|other| &other.answers));
        for answers in starts {
            let reached: Vec<_> = answers.iter().filter(|answer| answer.outcome == Outcome::Reached).collect();
            assert_eq!(reached.len(), passed, "{name}: {answers:#?}");
            assert!(reached.iter().all(|answer| answer.cautious_time_s.is_some()), "{name}: {answers:#?}");
        }
    }
}
