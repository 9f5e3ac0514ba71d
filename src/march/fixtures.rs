//! Sections for tests of the march.

use crate::material::{FreezingSpec, Material, MaterialSpec};
use crate::section::*;
use crate::series::Series;
use std::f64::consts::PI;
use std::sync::Arc;

fn table(k: &[(f64, f64)], capacity: f64) -> Arc<Material> {
    Arc::new(
        Material::new(MaterialSpec {
            name: "test".into(),
            density: 1.0,
            conductivity: k.to_vec(),
            specific_heat: vec![(273.15, capacity)],
            ..MaterialSpec::default()
        })
        .unwrap(),
    )
}

/// Water with constant properties in each phase; sharp, or frozen over a range [K] below 0 degC.
pub fn water(range_k: f64) -> Arc<Material> {
    Arc::new(
        Material::new(MaterialSpec {
            name: "water".into(),
            density: 1.0,
            conductivity: vec![(273.15, 0.57)],
            specific_heat: vec![(273.15, 4.2e6)],
            freezing: Some(FreezingSpec {
                solidus_k: 273.15 - range_k,
                liquidus_k: 273.15,
                latent_heat: 334e6,
                solid_conductivity: vec![(273.15, 2.2)],
                solid_specific_heat: vec![(273.15, 2.1e6)],
            }),
            ..MaterialSpec::default()
        })
        .unwrap(),
    )
}

/// A water-filled steel pipe in mineral wool and a jacket, 15 W/m on the wall's outside, air at -25 degC, held.
pub fn composite() -> Section {
    let layer = |name: &str, material: Arc<Material>, inside: f64, outside: f64, resistance: f64| Layer {
        name: name.into(),
        material,
        inside_radius_m: inside,
        outside_radius_m: outside,
        contact: Contact { resistance_m_k_per_w: resistance, words: None },
    };
    Section {
        title: "composite".into(),
        line: Line::default(),
        content: Content { radius_m: 0.03895, material: Some(water(0.0)), state: ContentState::Still },
        layers: vec![
            layer("wall", table(&[(273.15, 50.0)], 3.7e6), 0.03895, 0.04445, 0.0),
            layer(
                "lagging",
                table(&[(73.15, 0.010), (473.15, 0.058)], 8.4e4),
                0.04445,
                0.09445,
                1.0 / (2.0 * PI * 0.04445 * 400.0),
            ),
            layer("jacket", table(&[(273.15, 200.0)], 2.43e6), 0.09445, 0.09505, 0.0),
        ],
        heaters: vec![Heater {
            name: "trace".into(),
            seat: Seat::Face(Face { layer: 0, side: Side::Outside }),
            output_w_per_m: 15.0,
            output_low_w_per_m: 15.0,
            runs: 1.0,
            thermostat: None,
        }],
        outside: Outside { temperature_k: Series::Constant(248.15), film: Some(18.0) },
        start: Start::Hold,
        events: vec![],
        targets: vec![],
        limits: vec![],
        probes: vec![],
        run: Run { until_s: None, record: Record::Auto },
    }
}

/// The composite with its supply lost at 0 h.
pub fn outage() -> Section {
    let mut section = composite();
    section.events.push(Event { time_s: 0.0, change: Change::Supply(false) });
    section
}

/// The composite on a thermostat of 5 to 8 degC with 25 W/m.
pub fn thermostatted() -> Section {
    let mut section = composite();
    section.title = "thermostatted".into();
    section.heaters[0].output_w_per_m = 25.0;
    section.heaters[0].thermostat = Some(Thermostat {
        senses: Place::Face(Face { layer: 0, side: Side::Outside }),
        on_below_k: 278.15,
        off_above_k: 281.15,
    });
    section
}

/// Sections that differ in content, heaters and outside.
pub fn sections() -> Vec<Section> {
    let mut all = vec![composite()];
    let mut add = |title: &str, change: &dyn Fn(&mut Section)| {
        let mut section = composite();
        section.title = title.into();
        change(&mut section);
        all.push(section);
    };
    add("stirred", &|section| section.content.state = ContentState::Stirred { film: Some(50.0) });
    add("stirred without a film", &|section| section.content.state = ContentState::Stirred { film: None });
    add("flowing", &|section| {
        section.content.state = ContentState::Flowing { temperature_k: 283.15, film: 500.0 };
    });
    add("empty", &|section| section.content.state = ContentState::Empty);
    add("held inside and outside", &|section| {
        section.content =
            Content { radius_m: 0.03895, material: None, state: ContentState::HeldAt { temperature_k: 353.15 } };
        section.outside.film = None;
    });
    add("freezing over a range", &|section| section.content.material = Some(water(1.0)));
    add("heater outside the contact", &|section| {
        section.heaters[0].seat = Seat::Face(Face { layer: 1, side: Side::Inside });
    });
    add("heater through the wall", &|section| section.heaters[0].seat = Seat::Layer(0));
    add("heater through the content", &|section| section.heaters[0].seat = Seat::Content);
    add("wet layer outside the wall", &|section| {
        section.layers[1].material = water(0.0);
        section.heaters[0].output_w_per_m = 60.0;
    });
    all
}
