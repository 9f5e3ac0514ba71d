//! The built-in materials and pipe sizes: sound, sourced, and the figures that they say they are.

use std::collections::HashSet;
use stillwarm::library::{self, BuiltIn, Mark, PipeFaultReason};
use stillwarm::material::Material;

fn built_in(name: &str) -> &'static BuiltIn {
    library::materials().iter().find(|built_in| built_in.spec.name == name).expect("a built-in material")
}

fn ready(name: &str) -> Material {
    Material::new(library::material(name).expect("a built-in material").clone()).expect("a sound material")
}

#[test]
fn every_material_is_sound() {
    assert!(library::materials().len() >= 40, "only {} materials", library::materials().len());
    for built_in in library::materials() {
        let name = &built_in.spec.name;
        // Tables that do not ascend or are not positive are faults of Material::new.
        let material = Material::new(built_in.spec.clone()).unwrap_or_else(|faults| panic!("{name}: {faults:?}"));
        assert!(material.covers_k.0 > 150.0 && material.covers_k.1 < 800.0, "{name} covers {:?} K", material.covers_k);
        assert!((0.5..10_000.0).contains(&built_in.spec.density), "{name}: density {}", built_in.spec.density);
        for &(_, k) in &built_in.spec.conductivity {
            assert!((0.015..450.0).contains(&k), "{name}: conductivity {k}");
        }
        for &(_, c) in &built_in.spec.specific_heat {
            assert!((300.0..4500.0).contains(&c), "{name}: specific heat {c}");
        }
        let groups = ["content", "metal", "plastic", "insulation", "soil"];
        assert!(groups.contains(&built_in.group.as_str()), "{name} is of group {}", built_in.group);
    }
}

#[test]
fn every_figure_has_its_source_and_the_mark_reaches_the_provenance() {
    for built_in in library::materials() {
        let name = &built_in.spec.name;
        let sources = built_in.sources();
        assert!(sources.len() >= 3, "{name} has {} sources", sources.len());
        for (what, source, _) in &sources {
            assert!(source.len() > 5, "{name}: the {what} has no source");
        }
        for block in built_in.conductivity.iter().chain(&built_in.specific_heat) {
            assert!(!block.rows.is_empty(), "{name}: a source without figures");
        }
        let recalled = sources.iter().any(|&(.., mark)| mark == Mark::FromMemory);
        assert_eq!(built_in.spec.provenance.from_memory, recalled, "{name}");
        assert_eq!(built_in.spec.provenance.source.contains("from memory"), recalled, "{name}");
        assert!(!built_in.spec.provenance.own && !built_in.spec.provenance.overrides_built_in, "{name}");
    }
    assert!(built_in("dry soil").spec.provenance.from_memory);
    assert!(!built_in("water").spec.provenance.from_memory);
}

#[test]
fn no_two_materials_answer_to_one_name() {
    let mut seen = HashSet::new();
    for built_in in library::materials() {
        for name in built_in.names() {
            let found = library::material(name).unwrap_or_else(|| panic!("{name} is not found"));
            assert_eq!(found.name, built_in.spec.name, "{name} finds another material");
            assert!(seen.insert(name.to_lowercase()), "{name} stands twice");
        }
    }
}

#[test]
fn names_are_found_however_they_are_written() {
    for (asked, name) in [
        ("Water", "water"),
        ("lye 50%", "lye 50 %"),
        ("Caustic soda 50 %", "lye 50 %"),
        ("sulfur", "sulphur"),
        ("Stainless steel 316L", "stainless 316"),
        ("aluminum", "aluminium"),
        ("fiberglass", "glass fibre"),
        ("PE-100", "PE100"),
    ] {
        assert_eq!(library::material(asked).map(|spec| spec.name.as_str()), Some(name), "{asked}");
    }
    // Carbon and stainless steel differ threefold in conductivity: `steel` alone must be told, not guessed.
    for asked in ["steel", "soil", "glycol", "plastic", ""] {
        assert!(library::material(asked).is_none(), "{asked} is ambiguous");
    }
}

/// Figures of the sources themselves, typed here a second time.
#[test]
fn spot_figures_are_those_of_the_sources() {
    let near = |found: f64, wanted: f64| assert!((found - wanted).abs() < 1e-9 * wanted.abs(), "{found} for {wanted}");
    let water = library::material("water").expect("water");
    near(water.density, 999.84);
    let freezing = water.freezing.as_ref().expect("water freezes");
    near(freezing.latent_heat, 333.46e3);
    near(freezing.liquidus_k, 273.15);
    near(freezing.solidus_k, 273.15);
    near(ready("water").conductivity(263.15), 2.31437);
    near(ready("water").conductivity(293.15), 0.59801);
    // EN 1993-1-2, 3.4.1: k = 54 - 0.0333 T; c = 425 + 0.773 T - 1.69e-3 T^2 + 2.22e-6 T^3.
    let steel = library::material("carbon steel").expect("carbon steel");
    for (&(t_k, k), &(_, c)) in steel.conductivity.iter().zip(&steel.specific_heat) {
        let t = t_k - 273.15;
        assert!((k - (54.0 - 0.0333 * t)).abs() < 1e-3, "k at {t} degC: {k}");
        assert!((c - (425.0 + 0.773 * t - 1.69e-3 * t * t + 2.22e-6 * t.powi(3))).abs() < 0.06, "c at {t} degC: {c}");
    }
    // EN 1993-1-2, annex C: k = 14.6 + 0.0127 T.
    for &(t_k, k) in &library::material("stainless 304").expect("304").conductivity {
        assert!((k - (14.6 + 0.0127 * (t_k - 273.15))).abs() < 1e-3);
    }
    let sulphur = library::material("sulphur").and_then(|spec| spec.freezing.as_ref()).expect("sulphur freezes");
    near(sulphur.latent_heat, 53.7e3);
    near(sulphur.liquidus_k, 119.0 + 273.15);
    // 0.41 BTU in/(h ft2 degF) in SI.
    near((library::material("calcium silicate").expect("it").conductivity[0].1 * 1e4).round(), 591.0);
    let lye = library::material("lye 50 %").expect("lye");
    assert!(lye.freezing.is_none(), "no latent heat of lye is known: none may be invented");
    near(lye.lowest_use_k.expect("lye sets"), 12.3 + 273.15);
}

/// Enthalpy of liquid water from 0.01 to 20 degC: the IAPWS tables give 83.91 kJ/kg at 20 degC and 0.00 at 0.01 degC
/// (from memory). The trapezia of the few rows must not be far from it.
#[test]
fn water_holds_the_enthalpy_that_the_steam_tables_give() {
    let water = ready("water");
    let rise = (water.enthalpy.at(293.15) - water.enthalpy.at(273.16)) / water.density;
    assert!((rise - 83.91e3).abs() < 0.002 * 83.91e3, "{rise} J/kg");
    let by_rows = [(0.01, 4219.4), (5.0, 4205.0), (10.0, 4195.2), (20.0, 4184.1)]
        .windows(2)
        .map(|pair: &[(f64, f64)]| 0.5 * (pair[0].1 + pair[1].1) * (pair[1].0 - pair[0].0))
        .sum::<f64>();
    assert!((rise - by_rows).abs() < 1e-6 * by_rows, "{rise} against {by_rows} J/kg");
    let sharp = water.sharp.expect("sharp");
    assert!(((sharp.enthalpy_liquid - sharp.enthalpy_solid) / water.density - 333.46e3).abs() < 1e-3);
}

#[test]
fn lagging_conducts_more_when_warm() {
    for built_in in library::materials().iter().filter(|built_in| built_in.group == "insulation") {
        for pair in built_in.spec.conductivity.windows(2) {
            assert!(pair[1].1 > pair[0].1, "{}: {pair:?}", built_in.spec.name);
        }
    }
}

#[test]
fn every_pipe_adds_up_and_stands_once() {
    let mut seen = HashSet::new();
    assert_eq!(library::pipes().len(), 234);
    for pipe in library::pipes() {
        let name = format!("{} {}", pipe.standard, pipe.designation());
        let sum_mm = pipe.inside_diameter_mm + 2.0 * pipe.wall_mm;
        assert!((sum_mm - pipe.outside_diameter_mm).abs() < 0.005, "{name}: {sum_mm} mm");
        assert!(pipe.wall_mm > 1.0 && pipe.inside_diameter_mm > 10.0, "{name}");
        assert!(pipe.source.len() > 5, "{name} has no source");
        assert!(seen.insert(pipe.designation()), "{name} stands twice");
        for designation in [pipe.designation(), format!("NPS {}, schedule {}", pipe.nps, pipe.schedule)] {
            let found = library::pipe(&designation).unwrap_or_else(|fault| panic!("{designation}: {fault}"));
            assert_eq!(found.standard, pipe.standard, "{designation}");
            assert!((found.outside_diameter_m - pipe.outside_diameter_mm / 1e3).abs() < 1e-12, "{designation}");
            assert!((found.wall_m - pipe.wall_mm / 1e3).abs() < 1e-12, "{designation}");
        }
    }
}

#[test]
fn designations_are_read_however_they_are_written() {
    for (text, outside_mm, wall_mm) in [
        ("DN 80, schedule 40", 88.9, 5.49),
        ("dn80 sch40", 88.9, 5.49),
        ("NPS 3, Sch. 40", 88.9, 5.49),
        ("NPS 3 40", 88.9, 5.49),
        ("DN 80 40", 88.9, 5.49),
        ("NPS 1/2, schedule 80S", 21.3, 3.73),
        ("NPS 1 1/2, schedule 40", 48.3, 3.68),
        ("NPS 1-1/2 sch 40", 48.3, 3.68),
        ("nps 1.5 SCHEDULE 40", 48.3, 3.68),
        ("NPS 2\", schedule 80", 60.3, 5.54),
        ("DN 80, normal", 88.9, 3.2),
        ("DN 80, normal wall", 88.9, 3.2),
        ("DN 65, normal", 76.1, 2.9),
        ("DN 65, STD", 73.0, 5.16),
        ("DN 65, schedule std", 73.0, 5.16),
        ("  NPS 6 , schedule XS ", 168.3, 10.97),
    ] {
        let found = library::pipe(text).unwrap_or_else(|fault| panic!("{text}: {fault}"));
        assert!((found.outside_diameter_m * 1e3 - outside_mm).abs() < 1e-9, "{text}: {found:?}");
        assert!((found.wall_m * 1e3 - wall_mm).abs() < 1e-9, "{text}: {found:?}");
    }
    assert_eq!(library::pipe("nps 1-1/2 sch 40").expect("a pipe").designation, "NPS 1 1/2, schedule 40");
    assert_eq!(library::pipe("dn 80 normal wall").expect("a pipe").designation, "DN 80, normal");
}

#[test]
fn a_pipe_that_does_not_exist_brings_what_does() {
    let fault = |text: &str| library::pipe(text).expect_err(text);
    let unknown_size = fault("DN 81, schedule 40");
    assert_eq!(unknown_size.suggestions, ["DN 80, schedule 40", "DN 90, schedule 40"]);
    assert_eq!(unknown_size.to_string(), "there is no pipe size DN 81");
    assert_eq!(fault("NPS 3 1/4, schedule 80S").suggestions, ["NPS 3, schedule 80S", "NPS 3 1/2, schedule 80S"]);

    let unknown_schedule = fault("DN 80, schedule 41");
    assert!(unknown_schedule.suggestions[0].starts_with("DN 80, schedule 4"), "{:?}", unknown_schedule.suggestions);
    let message = unknown_schedule.to_string();
    assert!(message.starts_with("DN 80 does not come in schedule 41; it comes in schedule 10,"), "{message}");
    assert!(message.contains("normal") && message.contains("schedule 10S"), "{message}");

    let no_schedule = fault("NPS 3");
    assert!(matches!(no_schedule.reason, PipeFaultReason::NoSchedule { .. }));
    assert_eq!(no_schedule.suggestions[0], "NPS 3, schedule 40");

    for text in
        ["", "80 mm", "schedule 40", "DN", "DN eighty, schedule 40", "NPS 1/0, schedule 40", "NPS 1 2 3/4 sch 40"]
    {
        assert!(matches!(fault(text).reason, PipeFaultReason::NoSize), "{text}: {}", fault(text));
        assert!(!fault(text).suggestions.is_empty());
    }
}
