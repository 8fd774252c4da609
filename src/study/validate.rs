//! Whether a study can be computed: all faults at once, each with its key and place. Ports and limits have
//! rooms of their own.

use super::fault::Fault;
use super::{Case, Design, Insert, Project, RunSettings, validate_limits, validate_ports};
use crate::geometry::PieceShape;
use crate::geometry::spline::FEWEST_CONTROLS;
use crate::physics::{FlowCondition, ThermalCondition};
use std::collections::BTreeSet;
use std::sync::Arc;

/// Fewest triangles that a mesh may be asked to have: below there is no mesh of a duct with an insert.
const FEWEST_TRIANGLES: usize = 20;
/// Most triangles that may be asked for: a thousand times a usual mesh; beyond, memory ends before patience.
const MOST_TRIANGLES: usize = 1_000_000;
/// Most steps that may be asked for: hundred times a usual improvement.
const MOST_STEPS: usize = 10_000;

impl Project {
    /// All that keeps the study from being computed; empty when nothing does.
    pub fn faults(&self) -> Vec<Fault> {
        let mut faults = self.design.faults();
        faults.extend(self.run.faults());
        let names = self.variants.iter().map(|v| v.name.as_str());
        unique("variants", "variant", names, &mut faults);
        for (i, variant) in self.variants.iter().enumerate() {
            inserts(
                &format!("variants[{i}].inserts"),
                &variant.inserts,
                &mut faults,
            );
        }
        faults
    }

    /// The frozen copy that a run is given.
    pub fn case(&self) -> Case {
        Case {
            design: Arc::new(self.design.clone()),
            run: self.run.clone(),
        }
    }

    /// A sentence for each free insert that nothing keeps from lengthening or vanishing without end.
    pub fn bounding_limit_missing(&self) -> Option<String> {
        self.design.bounding_limit_missing()
    }
}

impl Design {
    /// All that keeps the design from being computed; empty when nothing does.
    pub fn faults(&self) -> Vec<Fault> {
        let mut faults = Vec::new();
        self.fluid_faults(&mut faults);
        let names = self.duct.iter().map(|p| p.name.as_str());
        unique("design.duct", "piece", names, &mut faults);
        inserts("design.inserts", &self.inserts, &mut faults);
        for (i, piece) in self.duct.iter().enumerate() {
            if !piece.to_m.is_finite() {
                let key = format!("design.duct[{i}].to_m");
                faults.push(Fault::new(
                    key,
                    "is not a finite point: type its coordinates again",
                ));
            }
            let straight = matches!(piece.shape, PieceShape::Line {});
            let needs_straight = match piece.flow {
                FlowCondition::Symmetry {} => Some("a symmetry plane"),
                FlowCondition::FlowRate { .. } => {
                    Some("a flow rate port (its profile is a parabola over a line)")
                }
                _ => None,
            };
            if let (Some(what), false) = (needs_straight, straight) {
                let sentence = format!(
                    "{what} must be straight, but \"{}\" is curved: make it a line or change its flow condition",
                    piece.name
                );
                faults.push(
                    Fault::new(format!("design.duct[{i}].shape"), sentence).at(self.middle_m(i)),
                );
            }
            let key = format!("design.duct[{i}].thermal");
            thermal(&key, &piece.name, &piece.thermal, false, &mut faults);
        }
        validate_ports::check(self, &mut faults);
        validate_limits::check(self, &mut faults);
        self.drawing_faults(&mut faults);
        faults
    }

    /// Crossings, overlaps and the like, once every curve can be made.
    fn drawing_faults(&self, faults: &mut Vec<Fault>) {
        let enough = |i: &Insert| i.points_m.len() >= FEWEST_CONTROLS;
        let told = |f: &Fault| f.key.contains("points_m") || f.key.contains("to_m");
        if self.duct.len() < 2 || !self.inserts.iter().all(enough) || faults.iter().any(told) {
            return;
        }
        for fault in crate::geometry::check(&self.sketch()) {
            let told = Fault::new("design", fault.to_string());
            faults.push(match fault.place() {
                Some(place_m) => told.at(place_m),
                None => told,
            });
        }
    }

    fn fluid_faults(&self, faults: &mut Vec<Fault>) {
        let fluid = &self.fluid;
        for (key, value, unit) in [
            ("density_kg_m3", fluid.density_kg_m3, "kg/m^3"),
            ("viscosity_pa_s", fluid.viscosity_pa_s, "Pa s"),
            ("conductivity_w_m_k", fluid.conductivity_w_m_k, "W/(m K)"),
            (
                "heat_capacity_j_kg_k",
                fluid.heat_capacity_j_kg_k,
                "J/(kg K)",
            ),
        ] {
            positive(&format!("design.fluid.{key}"), value, unit, faults);
        }
    }
}

impl RunSettings {
    /// All that keeps a run from being made with these settings.
    pub fn faults(&self) -> Vec<Fault> {
        let mut faults = Vec::new();
        for (key, value, low, high) in [
            ("order", self.order, 2, 5),
            (
                "most_triangles",
                self.most_triangles,
                FEWEST_TRIANGLES,
                MOST_TRIANGLES,
            ),
            ("steps", self.steps, 1, MOST_STEPS),
        ] {
            if !(low..=high).contains(&value) {
                let sentence = format!("is {value}, but must lie between {low} and {high}");
                faults.push(Fault::new(format!("run.{key}"), sentence));
            }
        }
        faults
    }
}

/// Inserts of the design or of a variant.
fn inserts(key: &str, inserts: &[Insert], faults: &mut Vec<Fault>) {
    unique(
        key,
        "insert",
        inserts.iter().map(|i| i.name.as_str()),
        faults,
    );
    for (i, insert) in inserts.iter().enumerate() {
        let points = &insert.points_m;
        let key = format!("{key}[{i}]");
        if points.len() < FEWEST_CONTROLS {
            let sentence = format!(
                "insert \"{}\" has {} control points, but a contour needs at least {FEWEST_CONTROLS}: add some",
                insert.name,
                points.len()
            );
            let fault = Fault::new(format!("{key}.points_m"), sentence);
            faults.push(match points.first() {
                Some(&p) => fault.at(p),
                None => fault,
            });
        }
        for (j, p) in points.iter().enumerate().filter(|(_, p)| !p.is_finite()) {
            let sentence = format!(
                "is ({}, {}), not a finite point: type its coordinates again",
                p.x, p.y
            );
            faults.push(Fault::new(format!("{key}.points_m[{j}]"), sentence));
        }
        thermal(
            &format!("{key}.thermal"),
            &insert.name,
            &insert.thermal,
            true,
            faults,
        );
    }
}

/// Ranges of a thermal condition.
fn thermal(
    key: &str,
    name: &str,
    condition: &ThermalCondition,
    is_insert: bool,
    faults: &mut Vec<Fault>,
) {
    use ThermalCondition::{Adiabatic, Convection, FixedFlux, FixedTemperature, Solid};
    match *condition {
        Adiabatic {} | FixedFlux { .. } => {}
        FixedTemperature { temperature_k } => {
            positive(&format!("{key}.temperature_k"), temperature_k, "K", faults);
        }
        Convection {
            coefficient_w_m2_k,
            ambient_k,
        } => {
            positive(
                &format!("{key}.coefficient_w_m2_k"),
                coefficient_w_m2_k,
                "W/(m^2 K)",
                faults,
            );
            positive(&format!("{key}.ambient_k"), ambient_k, "K", faults);
        }
        Solid {
            conductivity_w_m_k, ..
        } if is_insert => {
            positive(
                &format!("{key}.conductivity_w_m_k"),
                conductivity_w_m_k,
                "W/(m K)",
                faults,
            );
        }
        Solid { .. } => {
            let sentence = format!(
                "piece \"{name}\" is no body that heat could spread in: \"solid\" is for inserts only"
            );
            faults.push(Fault::new(key, sentence));
        }
    }
}

/// A finite number above zero.
pub(super) fn positive(key: &str, value: f64, unit: &str, faults: &mut Vec<Fault>) {
    if !(value.is_finite() && value > 0.0) {
        let sentence = format!("is {value} {unit}, but must be greater than zero");
        faults.push(Fault::new(key, sentence));
    }
}

/// Names are there and differ.
fn unique<'a>(
    key: &str,
    what: &str,
    names: impl Iterator<Item = &'a str>,
    faults: &mut Vec<Fault>,
) {
    let mut seen = BTreeSet::new();
    for (i, name) in names.enumerate() {
        let key = format!("{key}[{i}].name");
        if name.trim().is_empty() {
            faults.push(Fault::new(
                key,
                format!("a {what} needs a name: give it one"),
            ));
        } else if !seen.insert(name) {
            let sentence = format!("another {what} is called \"{name}\" too: rename one of them");
            faults.push(Fault::new(key, sentence));
        }
    }
}
