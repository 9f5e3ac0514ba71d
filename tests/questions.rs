//! The questions through the library: answers against what can be worked out by hand or is known exactly.

use std::path::Path;
use stillwarm::answer::Outcome;
use stillwarm::case::{self, Loaded};
use stillwarm::question::{self, Options, QuestionError, Verb};

fn load(text: &str) -> Loaded {
    case::load_text("test", text, Path::new(""), &[]).unwrap_or_else(|faults| panic!("{faults}"))
}

fn ask(verb: Verb, loaded: &Loaded) -> stillwarm::answer::Findings {
    question::ask(verb, loaded, &Options::default(), &mut |_| true).unwrap()
}

/// The composite freezing benchmark (its reference stands in `validation/`): held under 15 W/m, then the power is lost.
const COMPOSITE: &str = r#"
title = "composite"
[[material]]
name = "test water"
conductivity = "0.57 W/(m K)"
density = "1000 kg/m3"
specific_heat = "4200 J/(kg K)"
freezes_at = "0 degC"
latent_heat = "334 kJ/kg"
solid = { conductivity = "2.2 W/(m K)", specific_heat = "2100 J/(kg K)" }
[[material]]
name = "test steel"
conductivity = "50 W/(m K)"
density = "1000 kg/m3"
specific_heat = "3700 J/(kg K)"
[[material]]
name = "test wool"
conductivity = [["-100 degC", "0.022 W/(m K)"], ["100 degC", "0.046 W/(m K)"]]
density = "100 kg/m3"
specific_heat = "840 J/(kg K)"
[[material]]
name = "test sheet"
conductivity = "200 W/(m K)"
density = "1000 kg/m3"
specific_heat = "2430 J/(kg K)"
[content]
material = "test water"
state = "still"
[[layer]]
name = "wall"
material = "test steel"
inside_diameter = "77.9 mm"
outside_diameter = "88.9 mm"
[[layer]]
name = "lagging"
material = "test wool"
thickness = "50 mm"
contact = "400 W/(m2 K)"
[[layer]]
name = "jacket"
material = "test sheet"
thickness = "0.6 mm"
[[heater]]
name = "trace"
face = "wall outside"
output = "15 W/m"
[outside]
air = "-25 degC"
film = "18 W/(m2 K)"
[start]
state = "hold"
"#;

#[test]
fn an_outage_without_limits_answers_the_freezing_with_errors_that_cover() {
    let found = ask(Verb::Outage, &load(COMPOSITE));
    let exact = [73_271.320, 98_540.35, 195_607.47, 320_697.67];
    assert_eq!(found.answers.len(), 4);
    for (answer, exact) in found.answers.iter().zip(exact) {
        let (time, error) = (answer.time_s.unwrap(), answer.error_s.unwrap());
        assert!((time / exact - 1.0).abs() < 1e-3, "{}: {time} against {exact}", answer.name);
        assert!((time - exact).abs() <= error, "{}: {time} +- {error} against {exact}", answer.name);
        assert!(answer.cautious_time_s.unwrap() < time);
        assert!(answer.danger);
    }
    assert!(found.headline.iter().any(|line| line.contains("optimistic start")), "{:?}", found.headline);
    assert!(found.energy.residual_relative < 1e-10);
}

#[test]
fn a_limit_that_is_never_passed_is_an_answer_with_its_closest_approach() {
    let text = COMPOSITE.replace("air = \"-25 degC\"", "air = \"3 degC\"");
    let found = ask(Verb::Outage, &load(&text));
    assert!(found.answered);
    let first = &found.answers[0];
    assert_eq!(first.outcome, Outcome::SettlesShort);
    assert!((first.closest_value.unwrap() - 3.0).abs() < 0.01, "{first:?}");
    assert!(first.closest_error.unwrap() < 0.1);
}

#[test]
fn a_limit_where_the_line_comes_to_rest_is_too_close_to_call() {
    let text = COMPOSITE.replace("air = \"-25 degC\"", "air = \"3 degC\"")
        + "[[limit]]\nname = \"at rest\"\nwhere = \"wall outside\"\nbelow = \"3.0001 degC\"\n";
    let found = ask(Verb::Outage, &load(&text));
    assert!(matches!(found.answers[0].outcome, Outcome::TooClose | Outcome::Reached), "{:?}", found.answers[0]);
}

#[test]
fn the_watts_that_hold_a_target_are_the_drop_over_the_resistances() {
    let text = COMPOSITE.replace(
        "conductivity = [[\"-100 degC\", \"0.022 W/(m K)\"], [\"100 degC\", \"0.046 W/(m K)\"]]",
        "conductivity = \"0.04 W/(m K)\"",
    ) + "[[target]]\nname = \"keep\"\nwhere = \"wall outside\"\nat_least = \"5 degC\"\n";
    let found = ask(Verb::Steady, &load(&text));
    let pi = std::f64::consts::PI;
    let resistance = 1.0 / (2.0 * pi * 0.04445 * 400.0)
        + (0.09445_f64 / 0.04445).ln() / (2.0 * pi * 0.04)
        + (0.09505_f64 / 0.09445).ln() / (2.0 * pi * 200.0)
        + 1.0 / (2.0 * pi * 0.09505 * 18.0);
    let watts = found.answers[0].value.unwrap();
    assert!((watts * resistance / 30.0 - 1.0).abs() < 1e-9, "{watts} against {}", 30.0 / resistance);
    assert_eq!(found.answers[0].unit, "W/m");
    let held = found.answers[1].value.unwrap();
    assert!((held - (15.0 * resistance - 25.0)).abs() < 1e-8, "{held}");
}

/// Stirred water in a thin light wall behind a film: one capacity, one resistance.
const LUMPED: &str = r#"
title = "lumped"
[[material]]
name = "plain liquid"
conductivity = "0.6 W/(m K)"
density = "1000 kg/m3"
specific_heat = "4000 J/(kg K)"
[[material]]
name = "thin wall"
conductivity = "400 W/(m K)"
density = "1 kg/m3"
specific_heat = "1 J/(kg K)"
[content]
material = "plain liquid"
state = "stirred"
[[layer]]
name = "wall"
material = "thin wall"
inside_diameter = "100 mm"
thickness = "1 mm"
[[heater]]
name = "trace"
face = "wall outside"
output = "40 W/m"
[outside]
air = "0 degC"
film = "8 W/(m2 K)"
[start]
temperature = "0 degC"
[[target]]
name = "warm"
where = "content mean"
at_least = "10 degC"
"#;

#[test]
fn a_lumped_line_warms_by_its_exponential() {
    let found = ask(Verb::Warmup, &load(LUMPED));
    let pi = std::f64::consts::PI;
    let film = 2.0 * pi * 0.051 * 8.0;
    let capacity = pi * 0.05 * 0.05 * 4e6;
    // The wall's own resistance is 1e-5 of the film's.
    let exact = -(capacity / film) * (1.0 - 10.0 * film / 40.0).ln();
    let answer = &found.answers[0];
    let time = answer.time_s.unwrap();
    // The step tolerance is 1e-3 K of the 10 K here: a few seconds of 3 h 29 min, which the answer's own error covers.
    assert!((time / exact - 1.0).abs() < 1e-3, "{time} against {exact}");
    assert!((time - exact).abs() <= answer.error_s.unwrap(), "{time} against {exact}: {answer:?}");
    assert!((answer.value.unwrap() - 40.0 * time).abs() < 1e-6);
    assert!(!answer.danger);
}

#[test]
fn a_target_beyond_the_heater_settles_short() {
    let text = LUMPED.replace("at_least = \"10 degC\"", "at_least = \"60 degC\"");
    let found = ask(Verb::Warmup, &load(&text));
    assert_eq!(found.answers[0].outcome, Outcome::SettlesShort);
    let pi = std::f64::consts::PI;
    let rest = 40.0 / (2.0 * pi * 0.051 * 8.0);
    assert!((found.answers[0].closest_value.unwrap() - rest).abs() < 0.02, "{:?}", found.answers[0]);
}

#[test]
fn quick_leaves_error_and_caution_out_and_says_so() {
    let options = Options { quick: true, ..Options::default() };
    let found = question::ask(Verb::Outage, &load(COMPOSITE), &options, &mut |_| true).unwrap();
    assert!(found.answers.iter().all(|answer| answer.error_s.is_none() && answer.cautious_time_s.is_none()));
    assert!(found.assumptions.iter().any(|line| line.contains("--quick")));
}

#[test]
fn questions_that_the_case_does_not_pose_are_refused_with_a_remedy() {
    let no_target = LUMPED.split("[[target]]").next().unwrap();
    let error = question::ask(Verb::Warmup, &load(no_target), &Options::default(), &mut |_| true).unwrap_err();
    assert!(matches!(&error, QuestionError::NoAnswer { reason } if reason.contains("hint:")), "{error}");
    let error = question::ask(Verb::Outage, &load(LUMPED), &Options::default(), &mut |_| true).unwrap_err();
    assert!(matches!(&error, QuestionError::NoAnswer { reason } if reason.contains("hint:")), "{error}");
}

#[test]
fn the_supply_events_of_the_case_are_left_out_of_an_outage_and_that_is_said() {
    let text = COMPOSITE.to_string() + "[[event]]\ntime = \"1 h\"\nsupply = \"back\"\n";
    let found = ask(Verb::Outage, &load(&text));
    assert!((found.answers[0].time_s.unwrap() / 73_271.320 - 1.0).abs() < 1e-3);
    assert!(found.assumptions[0].contains("left out"), "{:?}", found.assumptions);
}
