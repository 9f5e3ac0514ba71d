//! Sections put together in code, for checks that run over many of them.

use std::sync::Arc;
use stillwarm::march::{CyclePhase, Plan, Recording};
use stillwarm::material::{FreezingSpec, Material, MaterialSpec};
use stillwarm::section::*;
use stillwarm::series::Series;

/// Kelvin from degC.
pub fn kelvin(celsius: f64) -> f64 {
    celsius + 273.15
}

/// A material of constant properties; `rho_c` in J/(m3 K).
pub fn constant(k: f64, rho_c: f64) -> Arc<Material> {
    Arc::new(Material::constant("a material", k, 1.0, rho_c))
}

/// Both phases of a material that freezes sharply.
pub struct Freezing {
    /// Freezing point [K].
    pub point_k: f64,
    /// Conductivity of liquid and solid [W/(m K)].
    pub k: (f64, f64),
    /// Volumetric capacity of liquid and solid [J/(m3 K)].
    pub rho_c: (f64, f64),
    /// Latent heat [J/m3].
    pub latent: f64,
}

impl Freezing {
    /// The material.
    pub fn material(&self) -> Arc<Material> {
        let at = |value: f64| vec![(self.point_k, value)];
        let spec = MaterialSpec {
            name: "a freezing material".into(),
            density: 1.0,
            conductivity: at(self.k.0),
            specific_heat: at(self.rho_c.0),
            freezing: Some(FreezingSpec {
                solidus_k: self.point_k,
                liquidus_k: self.point_k,
                latent_heat: self.latent,
                solid_conductivity: at(self.k.1),
                solid_specific_heat: at(self.rho_c.1),
            }),
            ..Default::default()
        };
        Arc::new(Material::new(spec).expect("the properties are positive"))
    }
}

/// A layer; the contact's resistance in m K/W.
pub fn layer(name: &str, material: Arc<Material>, inside_m: f64, outside_m: f64, contact: f64) -> Layer {
    Layer {
        name: name.into(),
        material,
        inside_radius_m: inside_m,
        outside_radius_m: outside_m,
        contact: Contact { resistance_m_k_per_w: contact, words: None },
    }
}

/// A heater of one run without a thermostat.
pub fn heater(seat: Seat, output_w_per_m: f64) -> Heater {
    Heater {
        name: "heater".into(),
        seat,
        output_w_per_m,
        output_low_w_per_m: output_w_per_m,
        runs: 1.0,
        thermostat: None,
    }
}

/// The inside face of a layer.
pub fn inside(layer: usize) -> Face {
    Face { layer, side: Side::Inside }
}

/// The outside face of a layer.
pub fn outside(layer: usize) -> Face {
    Face { layer, side: Side::Outside }
}

/// A section without heaters and events, at one temperature, under a constant outside.
pub fn section(content: Content, layers: Vec<Layer>, air_k: f64, film: Option<f64>, start_k: f64) -> Section {
    Section {
        title: "a check".into(),
        line: Line::default(),
        content,
        layers,
        heaters: Vec::new(),
        outside: Outside { temperature_k: Series::Constant(air_k), film },
        start: Start::Uniform(start_k),
        events: Vec::new(),
        targets: Vec::new(),
        limits: Vec::new(),
        probes: Vec::new(),
        run: Run { until_s: None, record: Record::Auto },
    }
}

/// A still content.
pub fn still(material: Arc<Material>, radius_m: f64) -> Content {
    Content { radius_m, material: Some(material), state: ContentState::Still }
}

/// A plan that records the given times.
pub fn recording(times_s: &[f64]) -> Plan {
    Plan {
        until_s: *times_s.last().expect("at least one time"),
        stop_when_answered: false,
        stop_when_settled: false,
        watches: Vec::new(),
        cycle_phase: CyclePhase::BeforeOn,
        record: Recording::At(times_s.to_vec()),
    }
}

/// A plan that goes on until every condition is met.
pub fn watching(watches: Vec<Condition>) -> Plan {
    Plan {
        until_s: 1e12,
        stop_when_answered: true,
        stop_when_settled: false,
        watches,
        cycle_phase: CyclePhase::BeforeOn,
        record: Recording::Ends,
    }
}

/// Marches, and stops the test where the march fails.
pub fn march(section: &Section, plan: &Plan, settings: &stillwarm::march::Settings) -> stillwarm::march::Trace {
    stillwarm::march::run(section, plan, settings, &mut |_| true).unwrap_or_else(|error| panic!("{error}"))
}

/// Numbers in [0, 1) from a seed (SplitMix64), the same on every machine.
pub struct Random(pub u64);

impl Random {
    /// The next number.
    pub fn next(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        ((z ^ (z >> 31)) >> 11) as f64 / (1u64 << 53) as f64
    }

    /// A number between two.
    pub fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * self.next()
    }

    /// A number between two, spread evenly over its logarithm.
    pub fn decades(&mut self, low: f64, high: f64) -> f64 {
        (self.between(low.ln(), high.ln())).exp()
    }
}

/// Capacity of lagging between `a` and `b` that counts beside a lump inside it, as if all of it were at the lump's
/// temperature [J/(m K)]: its steady profile falls as `ln r` to the film, `int rho c (T - T_a) / (T_lump - T_a) dA`.
pub fn lagging_share(rho_c: f64, a: f64, b: f64, k: f64, film_resistance: f64) -> f64 {
    use std::f64::consts::{PI, TAU};
    let ln = (b / a).ln();
    let resistance = ln / (TAU * k);
    let part = resistance / (resistance + film_resistance);
    let falling = PI * ((b * b - a * a) / (2.0 * ln) - a * a);
    rho_c * (part * falling + (1.0 - part) * PI * (b * b - a * a))
}
