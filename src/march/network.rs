//! The conductance matrix of a section: an independent account of a steady state.
//!
//! Every cell and every face is a node; between two nodes stands a conductance `G`, in one material
//! `2 pi k_m / ln(r_2 / r_1)` with the mean conductivity `k_m = (theta_1 - theta_2) / (T_1 - T_2)` of the two
//! temperatures, at a contact or film `1 / R`. The matrix `K` with `K_ij = -G_ij`, `K_ii = sum_j G_ij` turns
//! temperatures into the heat that leaves each node, so that in a steady state
//!
//! ```text
//!  K T = P        P: heat released at each node [W/m]
//! ```
//!
//! where nodes of fixed temperature (the outside, a flow, a held surface) take whatever their row gives. The solver
//! never uses this matrix; what it finds is held against it.

use super::chain::Joint;
use super::view::View;
use crate::material::Integral;
use sprs::{CsMat, TriMat};

/// Nodes, their temperatures, the heat released at each, and which are fixed.
pub(super) struct Network {
    pub matrix: CsMat<f64>,
    pub temperature: Vec<f64>,
    pub power: Vec<f64>,
    pub fixed: Vec<bool>,
}

#[derive(Default)]
struct Builder {
    temperature: Vec<f64>,
    power: Vec<f64>,
    fixed: Vec<bool>,
    conductances: Vec<(usize, usize, f64)>,
}

impl Builder {
    fn node(&mut self, temperature: f64, power: f64, fixed: bool) -> usize {
        self.temperature.push(temperature);
        self.power.push(power);
        self.fixed.push(fixed);
        self.temperature.len() - 1
    }

    fn within(&mut self, kirchhoff: &Integral, from: usize, to: usize, lambda: f64) {
        let (t1, t2) = (self.temperature[from], self.temperature[to]);
        // Below a hundredth of a kelvin the quotient loses digits and the conductivity between is its middle.
        let mean = if (t1 - t2).abs() > 1e-2 {
            (kirchhoff.at(t1) - kirchhoff.at(t2)) / (t1 - t2)
        } else {
            kirchhoff.rate(0.5 * (t1 + t2))
        };
        self.conductances.push((from, to, mean / lambda));
    }
}

impl Network {
    /// The network of an evaluated state without fronts.
    pub fn new(view: &View) -> Self {
        let chain = view.chain;
        let mut builder = Builder::default();
        let mut previous: Option<usize> = None;
        for j in chain.first..=chain.cells() {
            let link = &chain.links[j];
            let is_last = j == chain.cells();
            if link.joint == Joint::Within {
                let cell = builder.node(view.ws.temperature[j], chain.source[j], false);
                let lambda = chain.lambda_outer(j - 1) + chain.lambda_inner(j);
                builder.within(&chain.material(j).kirchhoff, previous.expect("a cell lies inside"), cell, lambda);
                previous = Some(cell);
                continue;
            }
            let (face_a, face_b) = chain.face_temperatures(j, view.outside_k, view.ws);
            // The left face: of the cell inside, or the fixed temperature of the content; none where nothing lies inside.
            let a = match (previous, link.joint) {
                // A stirred liquid is at its surface's temperature: one node.
                (Some(cell), _) if chain.lambda_outer(j - 1) == 0.0 => {
                    builder.power[cell] += link.power_left;
                    Some(cell)
                }
                (Some(cell), _) => {
                    let face = builder.node(face_a, link.power_left, false);
                    builder.within(&chain.material(j - 1).kirchhoff, cell, face, chain.lambda_outer(j - 1));
                    Some(face)
                }
                (None, Joint::FixedInside(temperature)) => Some(builder.node(temperature, link.power_left, true)),
                (None, _) => None,
            };
            if is_last {
                let outside = builder.node(view.outside_k, 0.0, true);
                let resistance = link.resistance;
                if resistance > 0.0 {
                    builder.conductances.push((a.expect("a surface"), outside, 1.0 / resistance));
                } else if let Some(a) = a {
                    builder.fixed[a] = true;
                }
                break;
            }
            let cell_lambda = chain.lambda_inner(j);
            let is_core = chain.inner2[j] == 0.0;
            let b = match a {
                Some(a) if link.resistance == 0.0 => {
                    builder.power[a] += link.power_right;
                    Some(a)
                }
                Some(a) => {
                    let face = builder.node(face_b, link.power_right, false);
                    builder.conductances.push((a, face, 1.0 / link.resistance));
                    Some(face)
                }
                None if is_core || j > view.mesh.content.end || view.mesh.content.contains(&j) => None,
                None => Some(builder.node(face_b, link.power_left + link.power_right, false)),
            };
            let cell = builder.node(view.ws.temperature[j], chain.source[j], false);
            if let Some(b) = b {
                builder.within(&chain.material(j).kirchhoff, b, cell, cell_lambda);
            }
            previous = Some(cell);
        }
        let size = builder.temperature.len();
        let mut triplets = TriMat::new((size, size));
        for (i, j, conductance) in builder.conductances {
            triplets.add_triplet(i, i, conductance);
            triplets.add_triplet(j, j, conductance);
            triplets.add_triplet(i, j, -conductance);
            triplets.add_triplet(j, i, -conductance);
        }
        Network {
            matrix: triplets.to_csr(),
            temperature: builder.temperature,
            power: builder.power,
            fixed: builder.fixed,
        }
    }

    /// Largest heat that is not accounted for at any free node [W/m].
    pub fn imbalance(&self) -> f64 {
        // Differences of kelvin temperatures would lose digits in the product: refer them to the last node.
        let reference = *self.temperature.last().unwrap_or(&0.0);
        let mut leaving = vec![0.0; self.temperature.len()];
        for (row, vector) in self.matrix.outer_iterator().enumerate() {
            for (column, &value) in vector.iter() {
                leaving[row] += value * (self.temperature[column] - reference);
            }
        }
        (0..leaving.len())
            .filter(|&node| !self.fixed[node])
            .map(|node| (leaving[node] - self.power[node]).abs())
            .fold(0.0, f64::max)
    }
}
