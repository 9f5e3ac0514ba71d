//! Materials by their names: the case's own first, then the built-in ones.

use crate::case::raw::{self, Case, Located, Property};
use crate::faults::{Fault, Faults, Span, nearest, quoted};
use crate::library;
use crate::material::{FreezingSpec, Material, MaterialSpec, Provenance};
use std::collections::HashMap;
use std::sync::Arc;

/// Temperature of the one row of a property without a table [K]: it holds at all temperatures.
const ANY_K: f64 = 273.15;

/// The materials that a case can name.
pub(super) struct Materials {
    /// By the name in lower case; `None` for one whose faults have been told.
    own: HashMap<String, Own>,
    built_in: HashMap<String, Arc<Material>>,
    /// Built-in materials that the case replaces, for the report.
    pub notes: Vec<String>,
}

struct Own {
    span: Span,
    material: Option<Arc<Material>>,
    is_used: bool,
}

impl Materials {
    pub fn of(case: &Case, faults: &mut Faults) -> Self {
        let mut materials = Materials { own: HashMap::new(), built_in: HashMap::new(), notes: Vec::new() };
        for raw in &case.materials {
            let material = own_material(raw, faults);
            let Some(name) = &raw.name else { continue };
            let key = name.value.to_lowercase();
            if let Some(first) = materials.own.get(&key) {
                faults.push(
                    Fault::error(name.span, format!("two materials are named {}", quoted(&name.value)))
                        .label("again here")
                        .also(first.span, "first here"),
                );
                continue;
            }
            if let Some(built_in) = library::material(&name.value) {
                materials.notes.push(format!(
                    "the case's own material `{}` replaces the built-in material `{}`",
                    name.value, built_in.name
                ));
            }
            materials.own.insert(key, Own { span: name.span, material, is_used: false });
        }
        materials
    }

    /// A material by its name.
    pub fn find(&mut self, name: &Located<String>, faults: &mut Faults) -> Option<Arc<Material>> {
        if let Some(own) = self.own.get_mut(&name.value.to_lowercase()) {
            own.is_used = true;
            return own.material.clone();
        }
        let Some(spec) = library::material(&name.value) else {
            let mut names: Vec<_> = self.own.keys().map(String::as_str).collect();
            names.extend(library::material_names());
            faults.push(
                Fault::error(name.span, format!("there is no material {}", quoted(&name.value)))
                    .label("unknown material")
                    .note("`stillwarm list` shows the built-in materials; a case defines its own under [[material]]")
                    .help_if(nearest(&name.value, names).map(|near| format!("did you mean \"{near}\"?"))),
            );
            return None;
        };
        if let Some(known) = self.built_in.get(&spec.name) {
            return Some(Arc::clone(known));
        }
        match Material::new(spec.clone()) {
            Ok(material) => {
                let material = Arc::new(material);
                self.built_in.insert(spec.name.clone(), Arc::clone(&material));
                Some(material)
            }
            Err(found) => {
                for fault in found {
                    faults.push(Fault::error(name.span, format!("built-in material {}: {fault}", quoted(&spec.name))));
                }
                None
            }
        }
    }

    /// Warns of materials that nothing is made of.
    pub fn report_unused(&self, faults: &mut Faults) {
        for own in self.own.values().filter(|own| !own.is_used) {
            faults.push(Fault::warning(own.span, "nothing in the case is made of this material").label("not used"));
        }
    }
}

fn own_material(raw: &raw::Material, faults: &mut Faults) -> Option<Arc<Material>> {
    let rows = |property: &Property| property.rows.iter().map(|&(at, value)| (at.unwrap_or(ANY_K), value)).collect();
    if let Some(freezes_at) = raw.freezes_at {
        let lacks = match (&raw.solid_conductivity, &raw.solid_specific_heat) {
            (None, None) => Some("conductivity and specific heat are"),
            (None, Some(_)) => Some("conductivity is"),
            (Some(_), None) => Some("specific heat is"),
            (Some(_), Some(_)) => None,
        };
        if let Some(lacks) = lacks.filter(|_| !faults.has_errors()) {
            faults.push(
                Fault::warning(
                    raw.solid.unwrap_or(freezes_at.span),
                    format!("the solid's {lacks} not stated: the liquid's figures are taken"),
                )
                .label("freezes into what?")
                .help("add `solid = { conductivity = ..., specific_heat = ... }`, or [material.solid]"),
            );
        }
    }
    let name = raw.name.as_ref()?;
    let conductivity = raw.conductivity.as_ref()?;
    let specific_heat = raw.specific_heat.as_ref()?;
    let freezing = match raw.freezes_at {
        Some(freezes_at) => Some(FreezingSpec {
            solidus_k: freezes_at.value.0,
            liquidus_k: freezes_at.value.1,
            latent_heat: raw.latent_heat?.value_si,
            solid_conductivity: rows(raw.solid_conductivity.as_ref().unwrap_or(conductivity)),
            solid_specific_heat: rows(raw.solid_specific_heat.as_ref().unwrap_or(specific_heat)),
        }),
        None => None,
    };
    let spec = MaterialSpec {
        name: name.value.clone(),
        density: raw.density?.value_si,
        conductivity: rows(conductivity),
        specific_heat: rows(specific_heat),
        freezing,
        lowest_use_k: raw.lowest_use.map(|lowest| lowest.value_si),
        provenance: Provenance {
            source: raw.source.as_ref().map_or_else(|| "the case".into(), |source| source.value.clone()),
            from_memory: false,
            own: true,
            overrides_built_in: library::material(&name.value).is_some(),
        },
    };
    match Material::new(spec) {
        Ok(material) => Some(Arc::new(material)),
        Err(found) => {
            for fault in found {
                faults.push(Fault::error(raw.span, fault.to_string()));
            }
            None
        }
    }
}
