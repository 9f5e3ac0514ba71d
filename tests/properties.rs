//! What holds for any line, over random sections: conservation, bounds, monotony, repeatability.

use proptest::prelude::*;
use std::sync::Arc;
use stillwarm::march::{self, CyclePhase, Plan, Recording, Settings, Trace};
use stillwarm::material::{FreezingSpec, Material, MaterialSpec};
use stillwarm::section::*;
use stillwarm::series::Series;

/// A random line: water or a plain content, a wall, lagging with a contact, perhaps a heater that trips and comes back.
#[derive(Debug, Clone)]
struct Line {
    radius_m: f64,
    wall_m: f64,
    lagging_m: f64,
    freezes: bool,
    stirred: bool,
    latent: f64,
    lagging_k: f64,
    contact: f64,
    film: f64,
    air_degc: f64,
    start_degc: f64,
    heater_w_per_m: f64,
    heater_inside_contact: bool,
    lost_h: f64,
}

fn lines() -> impl Strategy<Value = Line> {
    let sizes = (0.005..0.1f64, 0.001..0.01f64, 0.01..0.1f64);
    let content = (any::<bool>(), any::<bool>(), 1e7..4e8f64);
    let lagging = (0.02..0.3f64, 0.0..0.3f64, 2.0..40.0f64);
    let heat = (-40.0..-2.0f64, 0.5..40.0f64, 0.0..40.0f64, any::<bool>(), 0.5..40.0f64);
    (sizes, content, lagging, heat).prop_map(|(sizes, content, lagging, heat)| Line {
        radius_m: sizes.0,
        wall_m: sizes.1,
        lagging_m: sizes.2,
        freezes: content.0,
        stirred: content.1,
        latent: content.2,
        lagging_k: lagging.0,
        contact: lagging.1,
        film: lagging.2,
        air_degc: heat.0,
        start_degc: heat.1,
        heater_w_per_m: heat.2,
        heater_inside_contact: heat.3,
        lost_h: heat.4,
    })
}

impl Line {
    fn section(&self) -> Section {
        let at = |value: f64| vec![(273.15, value)];
        let content = Material::new(MaterialSpec {
            name: "content".into(),
            density: 1000.0,
            conductivity: at(0.57),
            specific_heat: at(4200.0),
            freezing: self.freezes.then(|| FreezingSpec {
                solidus_k: 273.15,
                liquidus_k: 273.15,
                latent_heat: self.latent / 1000.0,
                solid_conductivity: at(2.2),
                solid_specific_heat: at(2100.0),
            }),
            ..Default::default()
        });
        let layer = |name: &str, k: f64, rho_c: f64, from: f64, to: f64, contact: f64| Layer {
            name: name.into(),
            material: Arc::new(Material::constant(name, k, 1.0, rho_c)),
            inside_radius_m: from,
            outside_radius_m: to,
            contact: Contact { resistance_m_k_per_w: contact, words: None },
        };
        let (a, b) = (self.radius_m, self.radius_m + self.wall_m);
        let face = if self.heater_inside_contact {
            Face { layer: 0, side: Side::Outside }
        } else {
            Face { layer: 1, side: Side::Inside }
        };
        Section {
            title: "a property".into(),
            line: Default::default(),
            content: Content {
                radius_m: a,
                material: Some(Arc::new(content.expect("the properties are positive"))),
                state: if self.stirred { ContentState::Stirred { film: None } } else { ContentState::Still },
            },
            layers: vec![
                layer("wall", 50.0, 3.7e6, a, b, 0.0),
                layer("lagging", self.lagging_k, 8.4e4, b, b + self.lagging_m, self.contact),
            ],
            heaters: vec![Heater {
                name: "trace".into(),
                seat: Seat::Face(face),
                output_w_per_m: self.heater_w_per_m,
                output_low_w_per_m: self.heater_w_per_m,
                runs: 1.0,
                thermostat: None,
            }],
            outside: Outside { temperature_k: Series::Constant(self.air_degc + 273.15), film: Some(self.film) },
            start: Start::Uniform(self.start_degc + 273.15),
            events: vec![
                Event { time_s: 3600.0 * self.lost_h, change: Change::HeaterTripped(0) },
                Event { time_s: 7200.0 * self.lost_h, change: Change::HeaterReset(0) },
            ],
            targets: vec![],
            limits: vec![],
            probes: vec![],
            run: Run { until_s: None, record: Record::Auto },
        }
    }

    /// From the loss to well after the return.
    fn march(&self) -> Trace {
        let plan = Plan {
            until_s: 4.0 * 3600.0 * self.lost_h,
            stop_when_answered: false,
            stop_when_settled: false,
            watches: vec![],
            cycle_phase: CyclePhase::BeforeOn,
            record: Recording::Steps,
        };
        run(&self.section(), &plan)
    }

    /// Time until the content is frozen through with its heater off [s].
    fn frozen_through_s(&self) -> Option<f64> {
        let mut section = self.section();
        section.events.clear();
        section.heaters.clear();
        let plan = Plan {
            until_s: 1e9,
            stop_when_answered: true,
            stop_when_settled: false,
            watches: vec![Condition::Frozen(1.0)],
            cycle_phase: CyclePhase::BeforeOn,
            record: Recording::Ends,
        };
        run(&section, &plan).sightings[0].time_s
    }
}

fn run(section: &Section, plan: &Plan) -> Trace {
    march::run(section, plan, &Settings::default(), &mut |_| true).unwrap_or_else(|error| panic!("{error}"))
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 100, failure_persistence: None, ..ProptestConfig::default() })]

    /// Energy closes to round-off, through freezing and thawing.
    #[test]
    fn energy_is_conserved(line in lines()) {
        let trace = line.march();
        prop_assert!(trace.energy.residual_relative <= 1e-10, "residual {:e}", trace.energy.residual_relative);
        let energy = trace.energy;
        let left = energy.supplied_j_per_m + energy.carried_j_per_m - energy.lost_j_per_m - energy.stored_j_per_m;
        let gross = energy.supplied_j_per_m.abs().max(energy.lost_j_per_m.abs()).max(energy.stored_j_per_m.abs());
        prop_assert!(left.abs() <= 1e-9 * gross.max(1.0), "{left} J/m of {gross}");
    }

    /// Nothing is colder than the air. Nothing is warmer than the start by more than the heater's own steady rise (heat
    /// that is on its way outwards adds to what was there), and without a heater nothing is warmer than the start.
    #[test]
    fn temperatures_stay_between_their_sources(line in lines(), heated in any::<bool>()) {
        let line = Line { heater_w_per_m: if heated { line.heater_w_per_m } else { 0.0 }, ..line };
        let (coldest, start) = (line.air_degc + 273.15, line.start_degc + 273.15);
        let steady = march::steady::balance(&line.section(), &[line.heater_w_per_m], 1.0).expect("there is a balance");
        let rise = steady.snapshot.faces.iter().map(|face| face.1 - coldest).fold(0.0, f64::max);
        let warmest = start + rise;
        // The numerical error at default settings.
        let slack = 1e-3 * (warmest - coldest);
        let history = line.march().history;
        for &kelvin in history.profiles_k.iter().chain(history.faces_k.iter()) {
            prop_assert!(kelvin >= coldest - slack && kelvin <= warmest + slack, "{kelvin} K of {coldest} to {warmest} K");
        }
    }

    /// More resistance at the contact never freezes a line sooner.
    #[test]
    fn contact_resistance_delays_freezing(line in lines(), more in 0.01..0.5f64) {
        let line = Line { freezes: true, ..line };
        let worse = Line { contact: line.contact + more, ..line.clone() };
        let (before, after) = (line.frozen_through_s(), worse.frozen_through_s());
        let before = before.expect("the air is below freezing");
        // Both times are only good to the numerical error.
        prop_assert!(after.expect("the air is below freezing") >= before * (1.0 - 1e-3), "{after:?} before {before}");
    }

    /// The same question has the same answer, to the last bit.
    #[test]
    fn runs_repeat_exactly(line in lines()) {
        let (first, again) = (line.march(), line.march());
        prop_assert_eq!(first.history.times_s, again.history.times_s);
        let bits = |trace: &ndarray::Array2<f64>| trace.iter().map(|value| value.to_bits()).collect::<Vec<_>>();
        prop_assert_eq!(bits(&first.history.profiles_k), bits(&again.history.profiles_k));
        prop_assert_eq!(first.effort, again.effort);
    }
}
