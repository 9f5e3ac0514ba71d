//! Temperatures, shares and heat flows of one evaluated state, by the names that people use.

use super::chain::{Chain, Joint, Workspace};
use super::controls::Controls;
use crate::history::Snapshot;
use crate::mesh::Mesh;
use crate::section::{ContentState, Place, Section, Side};

/// One evaluated state.
pub(super) struct View<'a> {
    pub section: &'a Section,
    pub mesh: &'a Mesh,
    pub chain: &'a Chain,
    pub controls: &'a Controls,
    pub x: &'a [f64],
    pub ws: &'a Workspace,
    /// Temperature of the outside [K].
    pub outside_k: f64,
}

impl View<'_> {
    /// Whether the content has cells that take part.
    pub fn content_is_meshed(&self) -> bool {
        !self.mesh.content.is_empty() && self.chain.first < self.mesh.content.end
    }

    fn cell_temperature(&self, cell: usize) -> f64 {
        self.ws.temperature[cell.max(self.chain.first)]
    }

    /// Temperature of the content's surface [K]; NaN where the content has none of its own.
    pub fn content_surface(&self) -> f64 {
        match self.controls.content {
            ContentState::HeldAt { temperature_k } => temperature_k,
            ContentState::Empty => f64::NAN,
            _ => {
                let link = self.mesh.content.end;
                let (left, _) = self.chain.face_temperatures(link, self.outside_k, self.ws);
                left - self.ws.q_left[link] * self.chain.links[link].film_resistance
            }
        }
    }

    /// Temperature of a place [K]; NaN where the place has none (the centre of an empty line).
    pub fn temperature(&self, place: Place) -> f64 {
        match place {
            Place::Air => self.outside_k,
            Place::Centre => self.centre(),
            Place::ContentMean => self.content_mean(),
            Place::ContentSurface => self.content_surface(),
            Place::Face(face) => {
                let range = &self.mesh.layers[face.layer];
                match face.side {
                    Side::Inside => self.chain.face_temperatures(range.start, self.outside_k, self.ws).1,
                    Side::Outside => self.chain.face_temperatures(range.end, self.outside_k, self.ws).0,
                }
            }
            Place::LayerMean(layer) => {
                let (mut sum, mut whole) = (0.0, 0.0);
                for cell in self.mesh.layers[layer].clone() {
                    sum += self.mesh.cells[cell].area_m2 * self.ws.temperature[cell];
                    whole += self.mesh.cells[cell].area_m2;
                }
                sum / whole
            }
            Place::Radius(radius) => self.at_radius(radius),
        }
    }

    fn content_mean(&self) -> f64 {
        match self.controls.content {
            ContentState::Flowing { temperature_k, .. } => temperature_k,
            ContentState::HeldAt { temperature_k } => temperature_k,
            ContentState::Empty => f64::NAN,
            _ if self.content_is_meshed() => {
                let (mut sum, mut whole) = (0.0, 0.0);
                for cell in self.chain.first..self.mesh.content.end {
                    sum += self.chain.area[cell] * self.ws.temperature[cell];
                    whole += self.chain.area[cell];
                }
                sum / whole
            }
            _ => f64::NAN,
        }
    }

    /// Centre line: cell means of a parabola in r lie at their mean r^2.
    fn centre(&self) -> f64 {
        if !self.content_is_meshed() {
            return self.content_mean();
        }
        if self.chain.first > 0 {
            return self.cell_temperature(0);
        }
        let middle = |cell: usize| 0.5 * (self.chain.inner2[cell] + self.chain.outer2[cell]);
        let t0 = self.ws.temperature[0];
        let (x, t) = if self.mesh.content.len() > 1 {
            if self.chain.fronts[0].is_some() || self.chain.fronts[1].is_some() {
                return t0;
            }
            (middle(1), self.ws.temperature[1])
        } else {
            (self.chain.outer2[0], self.content_surface())
        };
        t0 - (t - t0) * middle(0) / (x - middle(0))
    }

    /// Frozen share of the content's area [-].
    pub fn frozen_share(&self) -> f64 {
        if !self.content_is_meshed() {
            return 0.0;
        }
        let mut frozen = 0.0;
        let mut whole = 0.0;
        for cell in self.chain.first..self.mesh.content.end {
            frozen += self.chain.area[cell] * self.chain.frozen_share(cell, self.x);
            whole += self.chain.area[cell];
        }
        frozen / whole
    }

    /// Heat leaving the outermost surface [W/m].
    pub fn lost(&self) -> f64 {
        self.ws.q_right[self.chain.cells()]
    }

    /// Heat that a flow or a held surface brings into the section [W/m].
    pub fn carried(&self) -> f64 {
        match self.chain.links[self.chain.first].joint {
            Joint::FixedInside(_) => self.ws.q_left[self.chain.first],
            _ => 0.0,
        }
    }

    /// Heat that passes from the wall into the content [W/m].
    pub fn content_inflow(&self) -> f64 {
        match self.controls.content {
            ContentState::Empty => 0.0,
            _ => -self.ws.q_left[self.mesh.content.end],
        }
    }

    /// Rate at which the section stores heat [W/m].
    pub fn stored(&self) -> f64 {
        (self.chain.first..self.chain.cells()).map(|cell| self.chain.net(cell, self.ws)).sum()
    }

    /// Every (radius, temperature) known in a region, from its inner to its outer face; a front stands for its cell's point.
    fn nodes(&self, region: Region) -> Vec<(f64, f64)> {
        let range = region.range(self.mesh);
        let mut nodes = Vec::with_capacity(range.len() + 2);
        match region {
            Region::Content => nodes.push((0.0, self.centre())),
            Region::Layer(_) => nodes.push((
                self.mesh.cells[range.start].inner_m,
                self.chain.face_temperatures(range.start, self.outside_k, self.ws).1,
            )),
        }
        for cell in range.clone() {
            let point = match self.chain.fronts[cell] {
                Some(front) => {
                    super::front::cut(
                        front.solid_outside,
                        self.x[cell],
                        self.chain.inner2[cell],
                        self.chain.outer2[cell],
                    )
                    .radius
                    .0
                }
                None => self.mesh.cells[cell].point_m,
            };
            nodes.push((point, self.cell_temperature(cell)));
        }
        nodes.push((
            self.mesh.cells[range.end - 1].outer_m,
            self.chain.face_temperatures(range.end, self.outside_k, self.ws).0,
        ));
        nodes
    }

    fn at_radius(&self, radius: f64) -> f64 {
        if radius <= self.section.content.radius_m && !self.section.layers.iter().any(|l| l.inside_radius_m == radius) {
            if !self.content_is_meshed() {
                return self.content_mean();
            }
            let changing = self.mesh.content.clone().any(|cell| {
                self.chain.fronts[cell].is_some()
                    || (0.0 < self.chain.frozen_share(cell, self.x) && self.chain.frozen_share(cell, self.x) < 1.0)
            });
            return interpolate(&self.nodes(Region::Content), radius, !changing && self.chain.first == 0);
        }
        for (index, layer) in self.section.layers.iter().enumerate() {
            if radius <= layer.outside_radius_m {
                let smooth = !self.mesh.layers[index].clone().any(|cell| self.chain.fronts[cell].is_some());
                return interpolate(&self.nodes(Region::Layer(index)), radius, smooth);
            }
        }
        f64::NAN
    }

    /// Writes the temperatures of [`profile_radii`] into `row`.
    pub fn profile(&self, row: &mut Vec<f64>) {
        row.clear();
        if !self.mesh.content.is_empty() {
            if self.content_is_meshed() {
                row.push(self.centre());
                row.extend(self.mesh.content.clone().map(|cell| self.cell_temperature(cell)));
                row.push(self.content_surface());
            } else {
                let value = self.content_mean();
                row.extend(std::iter::repeat_n(value, self.mesh.content.len() + 2));
            }
        }
        for range in &self.mesh.layers {
            row.push(self.chain.face_temperatures(range.start, self.outside_k, self.ws).1);
            row.extend(range.clone().map(|cell| self.ws.temperature[cell]));
            row.push(self.chain.face_temperatures(range.end, self.outside_k, self.ws).0);
        }
    }

    /// The state in words and numbers.
    pub fn snapshot(&self) -> Snapshot {
        let finite = |value: f64| value.is_finite().then_some(value);
        Snapshot {
            faces: self
                .section
                .faces()
                .map(|face| (self.section.face_name(face), self.temperature(Place::Face(face))))
                .collect(),
            content_mean_k: finite(self.content_mean()),
            centre_k: finite(self.centre()),
            frozen_share: self.frozen_share(),
            heater_w_per_m: self.controls.total_power(),
            lost_w_per_m: self.lost(),
            into_content_w_per_m: self.content_inflow(),
        }
    }
}

#[derive(Clone, Copy)]
enum Region {
    Content,
    Layer(usize),
}

impl Region {
    fn range(self, mesh: &Mesh) -> std::ops::Range<usize> {
        match self {
            Region::Content => mesh.content.clone(),
            Region::Layer(layer) => mesh.layers[layer].clone(),
        }
    }
}

/// Radii of a profile: centre, cell points and surface of the content; faces and cell points of every layer [m].
pub(super) fn profile_radii(section: &Section, mesh: &Mesh) -> Vec<f64> {
    let mut radii = Vec::with_capacity(mesh.cells.len() + 2 * section.layers.len() + 2);
    if !mesh.content.is_empty() {
        radii.push(0.0);
        radii.extend(mesh.content.clone().map(|cell| mesh.cells[cell].point_m));
        radii.push(section.content.radius_m);
    }
    for (layer, range) in section.layers.iter().zip(&mesh.layers) {
        radii.push(layer.inside_radius_m);
        radii.extend(range.clone().map(|cell| mesh.cells[cell].point_m));
        radii.push(layer.outside_radius_m);
    }
    radii
}

/// Value at `r` among ascending nodes: a cubic through the four nearest where the profile is smooth, else a line in ln r.
fn interpolate(nodes: &[(f64, f64)], r: f64, smooth: bool) -> f64 {
    let after = nodes.partition_point(|node| node.0 < r).clamp(1, nodes.len() - 1);
    if smooth && nodes.len() >= 4 {
        let from = after.saturating_sub(2).min(nodes.len() - 4);
        let four = &nodes[from..from + 4];
        return (0..4)
            .map(|i| {
                (0..4).filter(|&j| j != i).fold(four[i].1, |value, j| value * (r - four[j].0) / (four[i].0 - four[j].0))
            })
            .sum();
    }
    let (low, high) = (nodes[after - 1], nodes[after]);
    if high.0 <= low.0 {
        return high.1;
    }
    let share = if low.0 > 0.0 { (r / low.0).ln() / (high.0 / low.0).ln() } else { (r - low.0) / (high.0 - low.0) };
    low.1 + (high.1 - low.1) * share
}
