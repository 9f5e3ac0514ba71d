//! Changes of the chain's structure while every cell keeps its enthalpy: content that comes, goes or is stirred, liquid merged
//! to one temperature, fronts that enter a cell.

use super::super::chain::{Chain, Joint};
use super::super::plan::MarchError;
use super::Runner;
use crate::section::{Change, ContentState};

impl Runner<'_> {
    /// Changes the structure of the chain while every cell keeps its enthalpy: merged liquid is spread over its cells, the
    /// change is made, liquid is merged again, new fronts get their offsets, and fluxes are solved anew.
    pub(super) fn transition(&mut self, change: impl FnOnce(&mut Self)) -> Result<(), MarchError> {
        self.spread_lump();
        change(self);
        self.controls.write(self.section, self.mesh, &mut self.chain);
        self.controls.write_inner(self.section, self.mesh, &mut self.chain);
        self.gather_lump();
        let outside = self.outside_k();
        for index in 0..self.entering.len() {
            let (cell, front, u) = self.entering[index];
            self.chain.fronts[cell] = Some(front);
            self.x[cell] = u;
        }
        self.place_content_joints();
        for i in self.chain.first..self.h.len() {
            if self.chain.fronts[i].is_none() {
                self.x[i] = self.h[i] / self.chain.area[i];
            }
        }
        if !self.entering.is_empty() {
            self.chain.evaluate(&self.x, outside, &mut self.ws);
            for index in 0..self.entering.len() {
                let cell = self.entering[index].0;
                let offset = self.h[cell] - self.chain.enthalpy(cell, &self.x, &self.ws);
                if let Some(front) = &mut self.chain.fronts[cell] {
                    front.offset = offset;
                }
            }
            self.entering.clear();
        }
        self.refresh()
    }

    /// Gives the merged liquid back to its cells.
    pub(super) fn spread_lump(&mut self) {
        let content = self.mesh.content.clone();
        let lump = self.chain.first;
        if content.is_empty() || lump >= content.end {
            self.chain.first = if self.content_takes_part() { 0 } else { content.end };
            return;
        }
        let by_volume = self.h[lump] / self.chain.area[lump];
        self.chain.split_inner(self.mesh);
        if lump > 0 {
            for cell in 0..=lump {
                self.h[cell] = self.chain.area[cell] * by_volume;
                self.x[cell] = by_volume;
            }
        }
        for cell in 1..content.end {
            self.chain.links[cell].joint = Joint::Within;
        }
        if !self.content_takes_part() {
            self.chain.first = content.end;
        }
    }

    pub(super) fn content_takes_part(&self) -> bool {
        !self.mesh.content.is_empty()
            && matches!(self.controls.content, ContentState::Still | ContentState::Stirred { .. })
    }

    /// Merges the stirred liquid inside the front, or all of it where nothing is frozen.
    pub(super) fn gather_lump(&mut self) {
        if !self.content_takes_part() {
            self.chain.first = self.mesh.content.end;
            return;
        }
        self.chain.first = 0;
        if !matches!(self.controls.content, ContentState::Stirred { .. }) {
            return;
        }
        let end = self.mesh.content.end;
        let entering = |cell: usize| self.entering.iter().any(|entry| entry.0 == cell);
        let liquid = (0..end).take_while(|&cell| self.plain_share(cell) == Some(0.0) && !entering(cell)).count();
        let closed_by_front = liquid < end
            && (self.chain.fronts[liquid].is_some_and(|front| front.solid_outside)
                || self.entering.iter().any(|(cell, front, _)| *cell == liquid && front.solid_outside));
        if liquid > 0 && (liquid == end || closed_by_front) {
            let lump = liquid - 1;
            let sum: f64 = self.h[..=lump].iter().sum();
            let areas: Vec<f64> = self.mesh.cells[..=lump].iter().map(|cell| cell.area_m2).collect();
            self.chain.merge_inner(lump, &areas);
            self.h[lump] = sum;
        }
    }

    /// Joints inside the content after merging.
    pub(super) fn place_content_joints(&mut self) {
        if !self.content_takes_part() {
            return;
        }
        let lump = self.chain.first;
        self.chain.links[lump].joint = Joint::Closed;
        self.chain.source[lump] = self.chain.source[..=lump].iter().sum();
        if let ContentState::Stirred { film } = self.controls.content {
            let merged = lump > 0 || self.mesh.content.len() == 1;
            let end = self.mesh.content.end;
            if lump + 1 < end
                && self.chain.fronts[lump + 1].is_some_and(|front| front.solid_outside)
                && self.chain.fronts[lump].is_none()
            {
                self.chain.links[lump + 1].joint = Joint::Stirred(Chain::stirred_film(film));
            }
            // The film lies at the wall only while liquid meets the wall.
            let meets_wall = merged && lump + 1 == end && self.chain.fronts[lump].is_none();
            if !meets_wall && !self.section.layers.is_empty() {
                let contact = self.section.layers[0].contact.clone();
                self.chain.set_inner_contact(end, &contact, 0.0);
            }
        }
    }

    /// Applies an event of the case now. Gives its name.
    pub fn apply(&mut self, change: &Change) -> Result<String, MarchError> {
        let label = if let Change::Content(state) = change {
            self.exchange_content(*state)?
        } else {
            let section = self.section;
            let label = self.controls.apply(section, change);
            self.transition(|_| {})?;
            label
        };
        self.last_event = label.clone();
        self.shorten_after_jump();
        self.settle_triggers()?;
        Ok(label)
    }

    /// The content moves in another way; what is carried in or out with it is entered in the account.
    pub(super) fn exchange_content(&mut self, state: ContentState) -> Result<String, MarchError> {
        let before = self.controls.content;
        let meshed_before = self.content_takes_part();
        if meshed_before && self.view().frozen_share() > 0.0 {
            let remains = matches!(state, ContentState::Still | ContentState::Stirred { .. });
            if !remains {
                return Err(MarchError::NotModelled {
                    reason: format!(
                        "at {:.0} s the content is to flow, to be drained or to be held while {:.1} % of it is frozen: \
                         whether that is possible is not modelled",
                        self.time,
                        100.0 * self.view().frozen_share()
                    ),
                });
            }
        }
        let end = self.mesh.content.end;
        self.spread_lump();
        let section = self.section;
        let label = self.controls.apply(section, &Change::Content(state));
        let meshed_after = self.content_takes_part();
        let held: f64 = self.h[..end].iter().sum();
        if meshed_before && !meshed_after {
            self.energy.carried_j_per_m -= held;
        } else if !meshed_before && meshed_after {
            let arriving_k = match before {
                ContentState::Flowing { temperature_k, .. } | ContentState::HeldAt { temperature_k } => temperature_k,
                _ => {
                    return Err(MarchError::NotModelled {
                        reason: format!(
                            "at {:.0} s the empty line is filled, but nothing says how warm: let it flow first",
                            self.time
                        ),
                    });
                }
            };
            for cell in 0..end {
                self.chain.fronts[cell] = None;
                self.x[cell] = self.chain.material(cell).enthalpy.at(arriving_k);
                self.h[cell] = self.mesh.cells[cell].area_m2 * self.x[cell];
                self.energy.carried_j_per_m += self.h[cell];
            }
        }
        self.chain.first = if meshed_after { 0 } else { end };
        self.transition(|_| {})?;
        Ok(label)
    }
}
