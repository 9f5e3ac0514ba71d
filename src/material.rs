//! What a material does with heat: conductivity, storage and freezing as functions of temperature.
//!
//! Three functions of the temperature `T` describe a material, all exact integrals of piecewise linear tables:
//!
//! ```text
//!  k(T)                          conductivity                        [W/(m K)]
//!  theta(T) = int_Tref^T k dT    Kirchhoff integral of conductivity  [W/m]
//!  h(T) = rho int_Tref^T c dT    enthalpy, with latent heat          [J/m3]
//! ```
//!
//! A steady source-free flux between two radii is `2 pi (theta(T1) - theta(T2)) / ln(r2 / r1)` whatever `k` does
//! between them. A material that freezes sharply has a jump in `h` and in `k` at its freezing point; one that freezes
//! over a range releases its latent heat evenly over the range. One density serves both phases (that of the liquid at
//! its freezing point), so that mass and cells stay where they are. Beyond a table its end value holds.

use thiserror::Error;

/// What is known of a material, as read from a library or a case file: SI units, kelvin.
#[derive(Debug, Clone, Default)]
pub struct MaterialSpec {
    /// Name by which cases call it.
    pub name: String,
    /// Density for storage [kg/m3].
    pub density: f64,
    /// Conductivity over temperature `(K, W/(m K))`, ascending; of the liquid where it freezes.
    pub conductivity: Vec<(f64, f64)>,
    /// Specific heat over temperature `(K, J/(kg K))`, ascending; of the liquid where it freezes.
    pub specific_heat: Vec<(f64, f64)>,
    /// Freezing, where it does.
    pub freezing: Option<FreezingSpec>,
    /// Lowest temperature at which a content that does not freeze is of use [K] (an oil's pumping limit, say).
    pub lowest_use_k: Option<f64>,
    /// Where the figures come from, and whether they were looked up or recalled.
    pub provenance: Provenance,
}

/// Freezing of a material.
#[derive(Debug, Clone, Default)]
pub struct FreezingSpec {
    /// Temperature at which the last liquid is frozen [K].
    pub solidus_k: f64,
    /// Temperature at which freezing begins [K]; equal to the solidus where freezing is sharp.
    pub liquidus_k: f64,
    /// Latent heat [J/kg].
    pub latent_heat: f64,
    /// Conductivity of the solid over temperature `(K, W/(m K))`, ascending.
    pub solid_conductivity: Vec<(f64, f64)>,
    /// Specific heat of the solid over temperature `(K, J/(kg K))`, ascending.
    pub solid_specific_heat: Vec<(f64, f64)>,
}

/// Where a material's figures come from.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Provenance {
    /// The source in words; for a case's own material, the case.
    pub source: String,
    /// Whether any figure was recalled rather than looked up.
    pub from_memory: bool,
    /// Whether the case file defines it itself.
    pub own: bool,
    /// Whether it replaces a built-in material of the same name.
    pub overrides_built_in: bool,
}

/// What is wrong with a [`MaterialSpec`].
#[derive(Debug, Clone, PartialEq, Error)]
pub enum MaterialFault {
    /// A table has no rows.
    #[error("{property} has no value")]
    Empty {
        /// Which table.
        property: &'static str,
    },
    /// A table's temperatures do not ascend.
    #[error("{property}: temperatures must ascend, but {later_k:.2} K follows {earlier_k:.2} K")]
    NotAscending {
        /// Which table.
        property: &'static str,
        /// The earlier temperature [K].
        earlier_k: f64,
        /// The later one [K].
        later_k: f64,
    },
    /// A value is not positive and finite.
    #[error("{property} must be positive, not {value}")]
    NotPositive {
        /// Which property.
        property: &'static str,
        /// The value met.
        value: f64,
    },
    /// The solidus lies above the liquidus.
    #[error("freezing must end below where it begins: {solidus_k:.2} K against {liquidus_k:.2} K")]
    RangeReversed {
        /// Solidus [K].
        solidus_k: f64,
        /// Liquidus [K].
        liquidus_k: f64,
    },
}

/// A piece of an integral: `y = y0 + rate (x - x0) + slope (x - x0)^2 / 2`. An infinite rate is a jump in `y`.
#[derive(Debug, Clone, Copy, PartialEq)]
struct Piece {
    x0: f64,
    y0: f64,
    rate: f64,
    slope: f64,
}

/// Exact integral of a positive, piecewise linear function, with its inverse. End values of the rate hold beyond the table.
#[derive(Debug, Clone, PartialEq)]
pub struct Integral {
    pieces: Vec<Piece>,
}

impl Integral {
    /// Builds it from `(x, rate)` knots in ascending `x`. Two knots at one `x` are a jump of the rate; `jumps` are
    /// `(x, height)` of the integral itself, at knots that stand twice.
    fn new(knots: &[(f64, f64)], jump: Option<(f64, f64)>) -> Self {
        let mut pieces = Vec::with_capacity(knots.len() + 2);
        let (mut x, mut rate) = knots[0];
        let mut y = 0.0;
        pieces.push(Piece { x0: x, y0: y, rate, slope: 0.0 });
        for &(next_x, next_rate) in &knots[1..] {
            let width = next_x - x;
            if width > 0.0 {
                let slope = (next_rate - rate) / width;
                pieces.push(Piece { x0: x, y0: y, rate, slope });
                y += 0.5 * (rate + next_rate) * width;
            } else if let Some((at, height)) = jump
                && at == x
            {
                pieces.push(Piece { x0: x, y0: y, rate: f64::INFINITY, slope: 0.0 });
                y += height;
            }
            (x, rate) = (next_x, next_rate);
        }
        pieces.push(Piece { x0: x, y0: y, rate, slope: 0.0 });
        // Pieces of no extent (a lone knot gives the same piece twice) cost a comparison in every call.
        pieces.dedup_by(|later, earlier| {
            later.rate == earlier.rate && later.slope == 0.0 && earlier.slope == 0.0 && later.rate.is_finite() && {
                (earlier.y0 + earlier.rate * (later.x0 - earlier.x0) - later.y0).abs() == 0.0
            }
        });
        Integral { pieces }
    }

    #[inline]
    fn piece_of_x(&self, x: f64) -> &Piece {
        let mut found = &self.pieces[0];
        for piece in &self.pieces[1..] {
            if piece.x0 > x {
                break;
            }
            if piece.rate.is_finite() {
                found = piece;
            }
        }
        found
    }

    /// The integral at `x`; above a jump where `x` is on it.
    #[inline]
    pub fn at(&self, x: f64) -> f64 {
        let piece = self.piece_of_x(x);
        let dx = x - piece.x0;
        piece.y0 + dx * (piece.rate + 0.5 * piece.slope * dx)
    }

    /// The integrand at `x`.
    #[inline]
    pub fn rate(&self, x: f64) -> f64 {
        let piece = self.piece_of_x(x);
        piece.rate + piece.slope * (x - piece.x0)
    }

    /// The `x` at which the integral is `y`, and `dx/dy` there (0 on a jump).
    #[inline]
    pub fn inverse(&self, y: f64) -> (f64, f64) {
        let mut piece = &self.pieces[0];
        for later in &self.pieces[1..] {
            if later.y0 > y {
                break;
            }
            piece = later;
        }
        let dy = y - piece.y0;
        if piece.slope == 0.0 {
            return (piece.x0 + dy / piece.rate, 1.0 / piece.rate);
        }
        let root = (piece.rate * piece.rate + 2.0 * piece.slope * dy).max(0.0).sqrt();
        (piece.x0 + 2.0 * dy / (piece.rate + root), 1.0 / root.max(f64::MIN_POSITIVE))
    }

    /// The same with its rate multiplied; jumps of the integral itself with it.
    fn scaled(&self, factor: f64) -> Self {
        let scale = |piece: &Piece| Piece {
            y0: factor * piece.y0,
            rate: factor * piece.rate,
            slope: factor * piece.slope,
            ..*piece
        };
        Integral { pieces: self.pieces.iter().map(scale).collect() }
    }

    /// The constant rate, where it is one over all `x`.
    pub fn constant_rate(&self) -> Option<f64> {
        (self.pieces.len() == 1).then(|| self.pieces[0].rate)
    }

    /// The `x` of every kink.
    pub fn kinks(&self) -> impl Iterator<Item = f64> + '_ {
        self.pieces[1..].iter().map(|piece| piece.x0)
    }
}

/// A sharp freezing point with what both phases are there. The front of a freezing cell needs no more.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Sharp {
    /// Freezing point [K].
    pub temperature_k: f64,
    /// Latent heat by volume [J/m3].
    pub latent: f64,
    /// Enthalpy of the solid at the freezing point [J/m3].
    pub enthalpy_solid: f64,
    /// Enthalpy of the liquid at the freezing point [J/m3].
    pub enthalpy_liquid: f64,
    /// `rho c / k` of the solid at the freezing point [s/m2].
    pub inertia_solid: f64,
    /// `rho c / k` of the liquid at the freezing point [s/m2].
    pub inertia_liquid: f64,
    /// `rho c` of the liquid at the freezing point [J/(m3 K)].
    pub capacity_liquid: f64,
}

/// A material ready for the solver.
#[derive(Debug, Clone, PartialEq)]
pub struct Material {
    /// Name by which cases call it.
    pub name: String,
    /// Density for storage [kg/m3].
    pub density: f64,
    /// Kirchhoff integral of the conductivity over temperature [W/m]; its rate is the conductivity.
    pub kirchhoff: Integral,
    /// Enthalpy over temperature [J/m3]; its rate is `rho c`.
    pub enthalpy: Integral,
    /// Solidus and liquidus [K], where it freezes.
    pub freezing_k: Option<(f64, f64)>,
    /// The sharp freezing point, where freezing is sharp.
    pub sharp: Option<Sharp>,
    /// Lowest temperature of use of a content that does not freeze [K].
    pub lowest_use_k: Option<f64>,
    /// Where the figures come from.
    pub provenance: Provenance,
    /// Lowest and highest temperature that the tables cover [K]; equal where a single value was given.
    pub covers_k: (f64, f64),
}

fn check_table(property: &'static str, table: &[(f64, f64)], faults: &mut Vec<MaterialFault>) {
    if table.is_empty() {
        faults.push(MaterialFault::Empty { property });
    }
    for pair in table.windows(2) {
        if pair[1].0 <= pair[0].0 {
            faults.push(MaterialFault::NotAscending { property, earlier_k: pair[0].0, later_k: pair[1].0 });
        }
    }
    for &(_, value) in table {
        if !(value > 0.0 && value.is_finite()) {
            faults.push(MaterialFault::NotPositive { property, value });
        }
    }
}

fn interpolate(table: &[(f64, f64)], x: f64) -> f64 {
    let after = table.partition_point(|knot| knot.0 <= x);
    if after == 0 {
        return table[0].1;
    }
    if after == table.len() {
        return table[after - 1].1;
    }
    let (low, high) = (table[after - 1], table[after]);
    low.1 + (high.1 - low.1) * (x - low.0) / (high.0 - low.0)
}

/// The part of a table below `x`, closed at `x`.
fn below(table: &[(f64, f64)], x: f64) -> Vec<(f64, f64)> {
    let mut part: Vec<_> = table.iter().copied().filter(|knot| knot.0 < x).collect();
    part.push((x, interpolate(table, x)));
    part
}

/// The part of a table above `x`, opened at `x`.
fn above(table: &[(f64, f64)], x: f64) -> Vec<(f64, f64)> {
    let mut part = vec![(x, interpolate(table, x))];
    part.extend(table.iter().copied().filter(|knot| knot.0 > x));
    part
}

fn scaled(table: &[(f64, f64)], factor: f64) -> Vec<(f64, f64)> {
    table.iter().map(|&(x, y)| (x, y * factor)).collect()
}

impl Material {
    /// Builds the integrals.
    ///
    /// # Errors
    /// Every fault of the tables: empty, not ascending, not positive, a reversed freezing range.
    pub fn new(spec: MaterialSpec) -> Result<Self, Vec<MaterialFault>> {
        let mut faults = Vec::new();
        check_table("conductivity", &spec.conductivity, &mut faults);
        check_table("specific heat", &spec.specific_heat, &mut faults);
        if !(spec.density > 0.0 && spec.density.is_finite()) {
            faults.push(MaterialFault::NotPositive { property: "density", value: spec.density });
        }
        if let Some(freezing) = &spec.freezing {
            check_table("conductivity of the solid", &freezing.solid_conductivity, &mut faults);
            check_table("specific heat of the solid", &freezing.solid_specific_heat, &mut faults);
            if !(freezing.latent_heat > 0.0 && freezing.latent_heat.is_finite()) {
                faults.push(MaterialFault::NotPositive { property: "latent heat", value: freezing.latent_heat });
            }
            if freezing.solidus_k > freezing.liquidus_k {
                faults.push(MaterialFault::RangeReversed {
                    solidus_k: freezing.solidus_k,
                    liquidus_k: freezing.liquidus_k,
                });
            }
        }
        if !faults.is_empty() {
            return Err(faults);
        }

        let covers_k = spec
            .conductivity
            .iter()
            .chain(spec.freezing.iter().flat_map(|freezing| &freezing.solid_conductivity))
            .fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), knot| (low.min(knot.0), high.max(knot.0)));
        let storage = scaled(&spec.specific_heat, spec.density);
        let Some(freezing) = &spec.freezing else {
            return Ok(Material {
                kirchhoff: Integral::new(&spec.conductivity, None),
                enthalpy: Integral::new(&storage, None),
                name: spec.name,
                density: spec.density,
                freezing_k: None,
                sharp: None,
                lowest_use_k: spec.lowest_use_k,
                provenance: spec.provenance,
                covers_k,
            });
        };

        let (solidus, liquidus) = (freezing.solidus_k, freezing.liquidus_k);
        let latent = spec.density * freezing.latent_heat;
        let solid_storage = scaled(&freezing.solid_specific_heat, spec.density);
        let mut conductivity = below(&freezing.solid_conductivity, solidus);
        conductivity.extend(above(&spec.conductivity, liquidus));
        let mut capacity = below(&solid_storage, solidus);
        let (c_solid, c_liquid) = (interpolate(&solid_storage, solidus), interpolate(&storage, liquidus));
        let is_sharp = solidus == liquidus;
        if !is_sharp {
            let spread = latent / (liquidus - solidus);
            capacity.push((solidus, c_solid + spread));
            capacity.push((liquidus, c_liquid + spread));
        }
        capacity.extend(above(&storage, liquidus));
        let enthalpy = Integral::new(&capacity, is_sharp.then_some((solidus, latent)));
        let kirchhoff = Integral::new(&conductivity, None);
        let sharp = is_sharp.then(|| {
            let enthalpy_liquid = enthalpy.at(liquidus);
            Sharp {
                temperature_k: liquidus,
                latent,
                enthalpy_solid: enthalpy_liquid - latent,
                enthalpy_liquid,
                inertia_solid: c_solid / interpolate(&freezing.solid_conductivity, solidus),
                inertia_liquid: c_liquid / interpolate(&spec.conductivity, liquidus),
                capacity_liquid: c_liquid,
            }
        });
        Ok(Material {
            kirchhoff,
            enthalpy,
            name: spec.name,
            density: spec.density,
            freezing_k: Some((solidus, liquidus)),
            sharp,
            lowest_use_k: spec.lowest_use_k,
            provenance: spec.provenance,
            covers_k,
        })
    }

    /// A material of constant properties that does not freeze; `density` 1 and `specific_heat` as `rho c` will do.
    ///
    /// # Panics
    /// Where a property is not positive.
    pub fn constant(name: &str, conductivity: f64, density: f64, specific_heat: f64) -> Self {
        Material::new(MaterialSpec {
            name: name.into(),
            density,
            conductivity: vec![(273.15, conductivity)],
            specific_heat: vec![(273.15, specific_heat)],
            ..MaterialSpec::default()
        })
        .expect("positive properties")
    }

    /// The same material conducting `factor` times as much.
    pub fn conducting(&self, factor: f64) -> Self {
        let sharp = self.sharp.map(|sharp| Sharp {
            inertia_solid: sharp.inertia_solid / factor,
            inertia_liquid: sharp.inertia_liquid / factor,
            ..sharp
        });
        Material { kirchhoff: self.kirchhoff.scaled(factor), sharp, ..self.clone() }
    }

    /// Conductivity at a temperature [W/(m K)]; of the liquid at a sharp freezing point.
    #[inline]
    pub fn conductivity(&self, temperature_k: f64) -> f64 {
        self.kirchhoff.rate(temperature_k)
    }

    /// Frozen share at an enthalpy [-].
    #[inline]
    pub fn frozen_share(&self, enthalpy: f64) -> f64 {
        if let Some(sharp) = &self.sharp {
            return ((sharp.enthalpy_liquid - enthalpy) / sharp.latent).clamp(0.0, 1.0);
        }
        match self.freezing_k {
            Some((solidus, liquidus)) => {
                ((liquidus - self.enthalpy.inverse(enthalpy).0) / (liquidus - solidus)).clamp(0.0, 1.0)
            }
            None => 0.0,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn water(range_k: f64) -> Material {
        Material::new(MaterialSpec {
            name: "water".into(),
            density: 1000.0,
            conductivity: vec![(273.15, 0.57), (293.15, 0.60)],
            specific_heat: vec![(273.15, 4200.0)],
            freezing: Some(FreezingSpec {
                solidus_k: 273.15 - range_k,
                liquidus_k: 273.15,
                latent_heat: 334e3,
                solid_conductivity: vec![(253.15, 2.4), (273.15, 2.2)],
                solid_specific_heat: vec![(253.15, 1950.0), (273.15, 2100.0)],
            }),
            ..MaterialSpec::default()
        })
        .unwrap()
    }

    #[test]
    fn inverse_undoes_the_integral_across_kinks_and_jumps() {
        for material in [water(0.0), water(0.5), Material::constant("steel", 50.0, 7850.0, 470.0)] {
            for integral in [&material.kirchhoff, &material.enthalpy] {
                for step in 0..200 {
                    let temperature = 233.15 + 0.4013 * f64::from(step);
                    let (back, dx_dy) = integral.inverse(integral.at(temperature));
                    assert!((back - temperature).abs() < 1e-9, "{temperature} came back as {back}");
                    assert!((dx_dy * integral.rate(temperature) - 1.0).abs() < 1e-9, "derivative at {temperature}");
                }
            }
        }
    }

    #[test]
    fn latent_heat_is_the_height_of_the_jump_and_the_area_of_the_range() {
        let sharp = water(0.0);
        let point = sharp.sharp.unwrap();
        assert_eq!(point.enthalpy_liquid - point.enthalpy_solid, 334e6);
        let middle = 0.5 * (point.enthalpy_liquid + point.enthalpy_solid);
        assert_eq!(sharp.enthalpy.inverse(middle), (273.15, 0.0));
        assert!((sharp.frozen_share(middle) - 0.5).abs() < 1e-12);

        let range = water(0.5);
        let sensible = 1000.0 * (2096.25 + 4200.0) / 2.0 * 0.5;
        let released = range.enthalpy.at(273.15) - range.enthalpy.at(272.65);
        assert!((released - 334e6 - sensible).abs() < 1.0, "released {released}");
        assert!((range.frozen_share(range.enthalpy.at(272.9)) - 0.5).abs() < 1e-9);
    }

    #[test]
    fn end_values_hold_beyond_the_tables() {
        let material = water(0.0);
        assert_eq!(material.conductivity(373.15), 0.60);
        assert_eq!(material.conductivity(200.0), 2.4);
    }

    #[test]
    fn every_fault_of_a_specification_is_named() {
        let faults = Material::new(MaterialSpec {
            conductivity: vec![(300.0, 1.0), (290.0, -1.0)],
            specific_heat: vec![],
            density: 0.0,
            ..MaterialSpec::default()
        })
        .unwrap_err();
        assert_eq!(faults.len(), 4, "{faults:?}");
    }
}
