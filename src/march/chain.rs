//! The chain of cells: heat flows between neighbours, residuals of an implicit stage, and their Newton solution.
//!
//! Cell `i` obeys, per metre of line,
//!
//! ```text
//!  H_i(x) - H_i^known - g (q_i^right - q_{i+1}^left + S_i) = 0
//! ```
//!
//! where link `i` joins cells `i-1` and `i`, `q^left` is what leaves the cell on its left and `q^right` what enters the cell
//! on its right (they differ by the heaters between), `S_i` is heat released in the cell, and `g` is the stage's share of
//! the step (0 re-solves fronts and faces at given enthalpies). The unknown `x_i` is the enthalpy by volume, or the share of
//! solid in a cell that a front crosses (see [`front`](super::front)). Every row knows its two neighbours only, so the exact
//! Jacobian is tridiagonal.

use super::front::{Cut, Front, cut};
use super::link::{End, Through, faces, through};
use crate::material::Material;
use crate::mesh::Mesh;
use crate::section::{Contact, Section};
use std::f64::consts::PI;
use std::sync::Arc;

/// Film that stands for 'one temperature up to the front' in a stirred content without a film of its own [W/(m2 K)].
/// It leaves the liquid within `q / (2 pi s film)` of the freezing point, some 1e-5 K.
const PERFECT_STIRRING: f64 = 1e6;

/// Round-offs that a cell's net heat gathers.
const ROUND_OFFS: f64 = 8.0;

/// What joins two neighbouring cells.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Joint {
    /// Two cells of one material.
    Within,
    /// A face of a layer: half cells, contact, heaters on either face.
    Interface,
    /// The stirred liquid and the front in the next cell, through a film at the front [W/(m2 K)].
    Stirred(f64),
    /// No cell on the left and no heat from there.
    Closed,
    /// A fixed temperature on the left [K].
    FixedInside(f64),
    /// The outside's temperature on the right.
    FixedOutside,
}

/// A link of the chain.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Link {
    /// What it joins.
    pub joint: Joint,
    /// Contact and film resistance between its two faces [m K/W].
    pub resistance: f64,
    /// Part of that resistance that lies between content and the content's surface [m K/W].
    pub film_resistance: f64,
    /// Heat released on its left face [W/m].
    pub power_left: f64,
    /// Heat released on its right face [W/m].
    pub power_right: f64,
}

/// The cells in the chain, their links, and which of them a front crosses.
#[derive(Debug, Clone)]
pub(super) struct Chain {
    /// Index of the first cell that takes part; cells before it are merged into it (stirred) or absent.
    pub first: usize,
    /// Cross-section that the first cell stands for, or the cell's own [m2].
    pub area: Vec<f64>,
    pub inner2: Vec<f64>,
    pub outer2: Vec<f64>,
    lambda_in: Vec<f64>,
    lambda_out: Vec<f64>,
    /// Region of each cell: 0 the content (where it has a material), then the layers.
    pub region: Vec<usize>,
    pub materials: Vec<Arc<Material>>,
    constant_k: Vec<Option<f64>>,
    /// Cross-section of each region [m2].
    pub region_area: Vec<f64>,
    /// Link `i` lies left of cell `i`; the last one is the outermost surface.
    pub links: Vec<Link>,
    /// Heat released in each cell [W/m].
    pub source: Vec<f64>,
    /// The front in each cell that has one.
    pub fronts: Vec<Option<Front>>,
    /// Whether a front's cell counts its sensible heat.
    pub sensible: bool,
}

/// Buffers of one evaluation.
#[derive(Debug, Clone, Default)]
pub(super) struct Workspace {
    pub temperature: Vec<f64>,
    dt_dx: Vec<f64>,
    pub theta: Vec<f64>,
    dtheta_dx: Vec<f64>,
    cuts: Vec<Cut>,
    pub q_left: Vec<f64>,
    pub q_right: Vec<f64>,
    dq_by_left: Vec<f64>,
    dq_by_right: Vec<f64>,
    below: Vec<f64>,
    diagonal: Vec<f64>,
    above: Vec<f64>,
    pub residual: Vec<f64>,
    delta: Vec<f64>,
    /// Newton iterations made with this workspace.
    pub iterations: usize,
    /// The cell with the largest residual, and that residual over its tolerance, at the last evaluation.
    pub worst: (usize, f64),
}

impl Workspace {
    pub fn new(cells: usize) -> Self {
        Workspace {
            temperature: vec![0.0; cells],
            dt_dx: vec![0.0; cells],
            theta: vec![0.0; cells],
            dtheta_dx: vec![0.0; cells],
            cuts: vec![Cut::default(); cells],
            q_left: vec![0.0; cells + 1],
            q_right: vec![0.0; cells + 1],
            dq_by_left: vec![0.0; cells + 1],
            dq_by_right: vec![0.0; cells + 1],
            below: vec![0.0; cells],
            diagonal: vec![0.0; cells],
            above: vec![0.0; cells],
            residual: vec![0.0; cells],
            delta: vec![0.0; cells],
            iterations: 0,
            worst: (0, 0.0),
        }
    }
}

/// What one implicit stage asks of Newton.
#[derive(Clone, Copy)]
pub(super) struct Stage<'a> {
    /// Known part of every cell's enthalpy [J/m].
    pub known: &'a [f64],
    /// The stage's share of the step [s].
    pub g: f64,
    /// Temperature of the outside [K].
    pub outside_k: f64,
    /// One over each cell's tolerance [m/J].
    pub weight: &'a [f64],
    /// Largest residual over the cell's tolerance.
    pub tolerance: f64,
}

/// Newton's iteration did not settle.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct NotConverged;

impl Chain {
    /// Builds the chain of a mesh: geometry and contacts; content, heaters and outside are set by the controls.
    pub fn new(section: &Section, mesh: &Mesh) -> Self {
        let cells = mesh.cells.len();
        let mut materials = Vec::new();
        let mut region = Vec::with_capacity(cells);
        let mut region_area = Vec::new();
        let mut add = |material: &Arc<Material>, range: &std::ops::Range<usize>| {
            region.extend(std::iter::repeat_n(materials.len(), range.len()));
            region_area.push(mesh.cells[range.clone()].iter().map(|cell| cell.area_m2).sum());
            materials.push(Arc::clone(material));
        };
        if let Some(material) = &section.content.material {
            add(material, &mesh.content);
        }
        for (layer, range) in section.layers.iter().zip(&mesh.layers) {
            add(&layer.material, range);
        }
        let plain =
            Link { joint: Joint::Within, resistance: 0.0, film_resistance: 0.0, power_left: 0.0, power_right: 0.0 };
        let mut links = vec![plain; cells + 1];
        for (layer, range) in section.layers.iter().zip(&mesh.layers) {
            links[range.start] =
                Link { joint: Joint::Interface, resistance: layer.contact.resistance_m_k_per_w, ..plain };
        }
        links[cells].joint = Joint::FixedOutside;
        let lambda = |ratio: f64| ratio.ln() / (2.0 * PI);
        Chain {
            first: 0,
            area: mesh.cells.iter().map(|cell| cell.area_m2).collect(),
            inner2: mesh.cells.iter().map(|cell| cell.inner_m * cell.inner_m).collect(),
            outer2: mesh.cells.iter().map(|cell| cell.outer_m * cell.outer_m).collect(),
            lambda_in: mesh
                .cells
                .iter()
                .map(|cell| if cell.inner_m > 0.0 { lambda(cell.point_m / cell.inner_m) } else { 0.0 })
                .collect(),
            lambda_out: mesh.cells.iter().map(|cell| lambda(cell.outer_m / cell.point_m)).collect(),
            constant_k: materials.iter().map(|material| material.kirchhoff.constant_rate()).collect(),
            region,
            materials,
            region_area,
            links,
            source: vec![0.0; cells],
            fronts: vec![None; cells],
            sensible: true,
        }
    }

    pub fn cells(&self) -> usize {
        self.region.len()
    }

    /// ln ratio from a cell's point to its outer face over 2 pi [-].
    pub fn lambda_outer(&self, cell: usize) -> f64 {
        self.lambda_out[cell]
    }

    /// ln ratio from a cell's inner face to its point over 2 pi [-].
    pub fn lambda_inner(&self, cell: usize) -> f64 {
        self.lambda_in[cell]
    }

    pub fn material(&self, cell: usize) -> &Material {
        &self.materials[self.region[cell]]
    }

    /// Film resistance of a stirred or flowing content at a radius [m K/W].
    pub fn film_resistance(film: f64, radius: f64) -> f64 {
        1.0 / (2.0 * PI * radius * film)
    }

    /// Makes the cells before `lump` and itself one stirred liquid. `H` of the merged cells is summed by the caller.
    pub fn merge_inner(&mut self, lump: usize, cells: &[f64]) {
        self.first = lump;
        self.area[lump] = cells[..=lump].iter().sum();
        self.lambda_out[lump] = 0.0;
    }

    /// Undoes a merge: every content cell stands for itself again.
    pub fn split_inner(&mut self, mesh: &Mesh) {
        let lump = self.first;
        if lump < self.cells() {
            let cell = mesh.cells[lump];
            self.area[lump] = cell.area_m2;
            self.lambda_out[lump] = (cell.outer_m / cell.point_m).ln() / (2.0 * PI);
        }
        self.first = 0;
    }

    /// A cell as the end of a link: its point, and the way from there to its outer (left end) or inner face (right end).
    fn end(&self, cell: usize, outer: bool, ws: &Workspace) -> End<'_> {
        let region = self.region[cell];
        let lambda = match (self.fronts[cell].is_some(), outer) {
            (true, true) => ws.cuts[cell].lambda_out.0,
            (true, false) => ws.cuts[cell].lambda_in.0,
            (false, true) => self.lambda_out[cell],
            (false, false) => self.lambda_in[cell],
        };
        End {
            temperature: ws.temperature[cell],
            theta: ws.theta[cell],
            lambda,
            kirchhoff: Some(&self.materials[region].kirchhoff),
            constant: self.constant_k[region],
        }
    }

    /// Both ends of a link that has faces.
    fn ends<'a>(&'a self, link: usize, outside_k: f64, ws: &Workspace) -> (End<'a>, End<'a>) {
        let left = match self.links[link].joint {
            Joint::FixedInside(temperature) => End::fixed(temperature),
            Joint::Closed => End::fixed(0.0),
            _ => self.end(link - 1, true, ws),
        };
        let right = match self.links[link].joint {
            Joint::FixedOutside => End::fixed(outside_k),
            _ => self.end(link, false, ws),
        };
        (left, right)
    }

    /// Temperatures of the two faces of a link, left and right [K], for the fluxes of the last evaluation.
    pub fn face_temperatures(&self, link: usize, outside_k: f64, ws: &Workspace) -> (f64, f64) {
        let (left, right) = self.ends(link, outside_k, ws);
        let power = self.links[link].power_left + self.links[link].power_right;
        let q = ws.q_left[link];
        if self.links[link].joint == Joint::Closed {
            // Nothing comes from the left: both faces lie on the right cell's side of the contact.
            let face = faces(left, right, 0.0, power).1;
            return (face + self.links[link].power_left * self.links[link].resistance, face);
        }
        faces(left, right, q, power)
    }

    /// Temperatures, fluxes and their derivatives at the unknowns `x`.
    pub fn evaluate(&self, x: &[f64], outside_k: f64, ws: &mut Workspace) {
        let cells = self.cells();
        for i in self.first..cells {
            let material = self.material(i);
            match (&self.fronts[i], &material.sharp) {
                (Some(front), Some(sharp)) => {
                    ws.temperature[i] = sharp.temperature_k;
                    ws.dt_dx[i] = 0.0;
                    ws.theta[i] = material.kirchhoff.at(sharp.temperature_k);
                    ws.dtheta_dx[i] = 0.0;
                    ws.cuts[i] = cut(front.solid_outside, x[i], self.inner2[i], self.outer2[i]);
                }
                _ => {
                    let (temperature, dt_dh) = material.enthalpy.inverse(x[i]);
                    ws.temperature[i] = temperature;
                    ws.dt_dx[i] = dt_dh;
                    if let Some(k) = self.constant_k[self.region[i]] {
                        ws.theta[i] = material.kirchhoff.at(temperature);
                        ws.dtheta_dx[i] = k * dt_dh;
                    } else {
                        ws.theta[i] = material.kirchhoff.at(temperature);
                        ws.dtheta_dx[i] = material.kirchhoff.rate(temperature) * dt_dh;
                    }
                }
            }
        }
        for j in self.first..=cells {
            let link = &self.links[j];
            let power = link.power_left + link.power_right;
            let (q, by_left, by_right) = match link.joint {
                Joint::Within => {
                    let (l, r) = (j - 1, j);
                    let (lambda_l, dl) = match self.fronts[l] {
                        Some(_) => ws.cuts[l].lambda_out,
                        None => (self.lambda_out[l], 0.0),
                    };
                    let (lambda_r, dr) = match self.fronts[r] {
                        Some(_) => ws.cuts[r].lambda_in,
                        None => (self.lambda_in[r], 0.0),
                    };
                    let conductance = 1.0 / (lambda_l + lambda_r);
                    let q = (ws.theta[l] - ws.theta[r]) * conductance;
                    (q, (ws.dtheta_dx[l] - q * dl) * conductance, (-ws.dtheta_dx[r] - q * dr) * conductance)
                }
                Joint::Stirred(film) => {
                    let (l, r) = (j - 1, j);
                    let (radius, dradius) = ws.cuts[r].radius;
                    let conductance = 2.0 * PI * film;
                    let difference = ws.temperature[l] - ws.temperature[r];
                    (
                        conductance * radius * difference,
                        conductance * radius * ws.dt_dx[l],
                        conductance * dradius * difference,
                    )
                }
                Joint::Closed => (0.0, 0.0, 0.0),
                Joint::Interface | Joint::FixedInside(_) | Joint::FixedOutside => {
                    let (left, right) = self.ends(j, outside_k, ws);
                    let found: Through =
                        through(left, link.resistance, link.power_left, link.power_right, right, ws.q_left[j]);
                    let by_left = if matches!(link.joint, Joint::FixedInside(_)) {
                        0.0
                    } else {
                        let l = j - 1;
                        let dl = if self.fronts[l].is_some() { ws.cuts[l].lambda_out.1 } else { 0.0 };
                        found.by_theta_left * ws.dtheta_dx[l] + found.by_lambda_left * dl
                    };
                    let by_right = if link.joint == Joint::FixedOutside {
                        0.0
                    } else {
                        let dr = if self.fronts[j].is_some() { ws.cuts[j].lambda_in.1 } else { 0.0 };
                        found.by_theta_right * ws.dtheta_dx[j] + found.by_lambda_right * dr
                    };
                    (found.q, by_left, by_right)
                }
            };
            ws.q_left[j] = q;
            ws.q_right[j] = q + power;
            ws.dq_by_left[j] = by_left;
            ws.dq_by_right[j] = by_right;
        }
    }

    /// Enthalpy of a cell at the last evaluation [J/m], with its derivatives by the unknowns left, own and right.
    fn enthalpy_row(&self, i: usize, x: &[f64], ws: &Workspace) -> (f64, f64, f64, f64) {
        let area = self.area[i];
        let (Some(front), Some(sharp)) = (&self.fronts[i], &self.material(i).sharp) else {
            return (area * x[i], 0.0, area, 0.0);
        };
        let u = x[i];
        let (held, dheld) = front.offset_share(u);
        let mut h = area * (sharp.enthalpy_liquid - u * sharp.latent) + front.offset * held;
        let mut own = -area * sharp.latent + front.offset * dheld;
        let (mut left, mut right) = (0.0, 0.0);
        if self.sensible {
            let cut = &ws.cuts[i];
            let (inertia_in, inertia_out) = if front.solid_outside {
                (sharp.inertia_liquid, sharp.inertia_solid)
            } else {
                (sharp.inertia_solid, sharp.inertia_liquid)
            };
            let q_out = ws.q_left[i + 1];
            h -= inertia_out * q_out * cut.j_out.0;
            own -= inertia_out * (ws.dq_by_left[i + 1] * cut.j_out.0 + q_out * cut.j_out.1);
            right -= inertia_out * ws.dq_by_right[i + 1] * cut.j_out.0;
            match self.links[i].joint {
                // A stirred liquid fills its part of the cell at its own temperature.
                Joint::Stirred(_) => {
                    let warmth = sharp.capacity_liquid * (ws.temperature[i - 1] - sharp.temperature_k);
                    h += area * (1.0 - u) * warmth;
                    own -= area * warmth;
                    left += area * (1.0 - u) * sharp.capacity_liquid * ws.dt_dx[i - 1];
                }
                Joint::Within | Joint::Interface if i > self.first => {
                    let q_in = ws.q_right[i];
                    h += inertia_in * q_in * cut.j_in.0;
                    own += inertia_in * (ws.dq_by_right[i] * cut.j_in.0 + q_in * cut.j_in.1);
                    left += inertia_in * ws.dq_by_left[i] * cut.j_in.0;
                }
                _ => {}
            }
        }
        (h, left, own, right)
    }

    /// Enthalpy of a cell at the last evaluation [J/m].
    pub fn enthalpy(&self, i: usize, x: &[f64], ws: &Workspace) -> f64 {
        self.enthalpy_row(i, x, ws).0
    }

    /// Net heat into a cell at the last evaluation [W/m].
    #[inline]
    pub fn net(&self, i: usize, ws: &Workspace) -> f64 {
        ws.q_right[i] - ws.q_left[i + 1] + self.source[i]
    }

    /// Frozen share of a cell at its unknown.
    #[inline]
    pub fn frozen_share(&self, i: usize, x: &[f64]) -> f64 {
        if self.fronts[i].is_some() { x[i].clamp(0.0, 1.0) } else { self.material(i).frozen_share(x[i]) }
    }

    /// Solves `H(x) - known - g F(x) = 0` for `x` by Newton's method with the exact Jacobian; on success the workspace
    /// holds the evaluation at the solution.
    pub fn solve(&self, x: &mut [f64], stage: Stage, ws: &mut Workspace) -> Result<(), NotConverged> {
        let Stage { known, g, outside_k, weight, tolerance } = stage;
        const MOST_ITERATIONS: usize = 14;
        let (first, cells) = (self.first, self.cells());
        // Where a cell of next to no capacity sits between large conductances, round-off alone keeps its residual up: a
        // change that is small enough is as good a sign.
        let mut hardly_changed = false;
        for round in 0..=MOST_ITERATIONS {
            self.evaluate(x, outside_k, ws);
            let mut worst = (first, 0.0_f64);
            for i in first..cells {
                let (h, left, own, right) = self.enthalpy_row(i, x, ws);
                let residual = h - known[i] - g * self.net(i, ws);
                ws.residual[i] = residual;
                ws.below[i] = left - g * ws.dq_by_left[i];
                ws.diagonal[i] = own - g * (ws.dq_by_right[i] - ws.dq_by_left[i + 1]);
                ws.above[i] = right + g * ws.dq_by_right[i + 1];
                let size = (residual * weight[i]).abs();
                if size > worst.1 || size.is_nan() {
                    worst = (i, size);
                }
            }
            ws.worst = worst;
            if worst.1 <= tolerance || (hardly_changed && worst.1.is_finite()) {
                return Ok(());
            }
            if round == MOST_ITERATIONS || !worst.1.is_finite() {
                return Err(NotConverged);
            }
            ws.iterations += 1;
            self.eliminate(ws);
            hardly_changed =
                (first..cells).all(|i| (self.unit_enthalpy(i) * ws.delta[i] * weight[i]).abs() <= tolerance);
            for i in first..cells {
                if self.fronts[i].is_some() {
                    // The flux bends sharply near thin parts: keep the iterate where the cut means something.
                    x[i] = (x[i] + ws.delta[i]).clamp(-0.5, 1.5);
                } else {
                    x[i] += ws.delta[i];
                }
            }
        }
        Err(NotConverged)
    }

    /// Enthalpy that a unit of a cell's unknown stands for [J/m].
    #[inline]
    fn unit_enthalpy(&self, i: usize) -> f64 {
        match (&self.fronts[i], &self.material(i).sharp) {
            (Some(_), Some(sharp)) => self.area[i] * sharp.latent,
            _ => self.area[i],
        }
    }

    /// Round-off of a cell's net heat at the last evaluation [W/m]: what its own temperature, known to sixteen digits, leaves
    /// uncertain of the flows to its neighbours. It rules where next to no capacity sits between large conductances.
    pub fn net_noise(&self, i: usize, x: &[f64], ws: &Workspace) -> f64 {
        if self.fronts[i].is_some() {
            return 0.0;
        }
        ROUND_OFFS * f64::EPSILON * (ws.dq_by_right[i].abs() + ws.dq_by_left[i + 1].abs()) * x[i].abs()
    }

    /// Thomas elimination of the tridiagonal system; `delta` becomes the Newton change.
    fn eliminate(&self, ws: &mut Workspace) {
        let (first, cells) = (self.first, self.cells());
        ws.delta[first] = -ws.residual[first];
        for i in first + 1..cells {
            let factor = ws.below[i] / ws.diagonal[i - 1];
            ws.diagonal[i] -= factor * ws.above[i - 1];
            ws.delta[i] = -ws.residual[i] - factor * ws.delta[i - 1];
        }
        ws.delta[cells - 1] /= ws.diagonal[cells - 1];
        for i in (first..cells - 1).rev() {
            ws.delta[i] = (ws.delta[i] - ws.above[i] * ws.delta[i + 1]) / ws.diagonal[i];
        }
    }

    /// Steady temperatures of the cells with `inflow` [W/m] entering from the left of the first link and the outside at
    /// `outside_k`, worked from the outside inwards; gives the temperature left of the first link [K]. Cells that change
    /// phase take the plain form.
    pub fn steady_sweep(&self, inflow: f64, outside_k: f64, temperature: &mut [f64]) -> f64 {
        let (first, cells) = (self.first, self.cells());
        let mut q_left = inflow;
        for i in first..cells {
            q_left += self.links[i].power_left + self.links[i].power_right + self.source[i];
        }
        // `q_left` leaves the last cell; its own heaters join it on the faces of the last link.
        let mut face = outside_k + (q_left + self.links[cells].power_left) * self.links[cells].resistance;
        for i in (first..cells).rev() {
            let kirchhoff = &self.material(i).kirchhoff;
            let theta = kirchhoff.at(face) + q_left * self.lambda_out[i];
            temperature[i] = kirchhoff.inverse(theta).0;
            let link = &self.links[i];
            let q_right = q_left - self.source[i];
            let inner_face = kirchhoff.inverse(theta + q_right * self.lambda_in[i]).0;
            q_left = q_right - link.power_left - link.power_right;
            face = inner_face + (q_left + link.power_left) * link.resistance;
        }
        for i in 0..first {
            temperature[i] = if first < cells { temperature[first] } else { outside_k };
        }
        face
    }

    /// Film at the front of a stirred content [W/(m2 K)].
    pub fn stirred_film(film: Option<f64>) -> f64 {
        film.unwrap_or(PERFECT_STIRRING)
    }

    /// Sets the link between content and first layer to the layer's own contact, with a film in series.
    pub fn set_inner_contact(&mut self, link: usize, contact: &Contact, film_resistance: f64) {
        self.links[link].resistance = contact.resistance_m_k_per_w + film_resistance;
        self.links[link].film_resistance = film_resistance;
    }
}
