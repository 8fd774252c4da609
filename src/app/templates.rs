//! Duct templates applied to the present study.

use super::studio::Studio;
use super::words::Edit;
use crate::geometry::duct::{Role, Template};
use crate::physics::{FlowCondition, ThermalCondition};
use crate::study::DuctPiece;

/// Replace the duct; inserts are moved to the template's place, fluid and conditions of ports are kept in kind.
pub fn apply(studio: &mut Studio, template: Template) {
    let mut design = studio.project().design.clone();
    let ports: Vec<&DuctPiece> = design.duct.iter().filter(|p| p.flow.is_port()).collect();
    let is_inlet = |p: &&&DuctPiece| matches!(p.thermal, ThermalCondition::FixedTemperature { .. });
    let height = ports
        .iter()
        .find(is_inlet)
        .and_then(|p| design.duct.iter().position(|q| q.name == p.name))
        .map_or(0.01, |i| design.from_m(i).distance(design.duct[i].to_m));
    let inlet = ports
        .iter()
        .find(is_inlet)
        .map(|p| (p.flow.clone(), p.thermal.clone()));
    let outlet = ports
        .iter()
        .find(|p| !is_inlet(p))
        .map(|p| (p.flow.clone(), p.thermal.clone()));
    let inflow = ThermalCondition::FixedTemperature {
        temperature_k: 293.15,
    };
    let conditions = |role: Role| match role {
        Role::Wall => (FlowCondition::Wall {}, ThermalCondition::Adiabatic {}),
        Role::Symmetry => (FlowCondition::Symmetry {}, ThermalCondition::Adiabatic {}),
        Role::Inlet if template == Template::OpenStream => (
            FlowCondition::Velocity {
                velocity_m_s: [0.1, 0.0],
            },
            inlet.clone().map_or(inflow.clone(), |i| i.1),
        ),
        Role::Inlet => inlet.clone().unwrap_or((
            FlowCondition::TotalPressure { pressure_pa: 0.1 },
            inflow.clone(),
        )),
        Role::Outlet => outlet.clone().unwrap_or((
            FlowCondition::StaticPressure { pressure_pa: 0.0 },
            ThermalCondition::Adiabatic {},
        )),
    };
    let duct = template.pieces(height).into_iter().map(|piece| {
        let (flow, thermal) = conditions(piece.role);
        DuctPiece {
            name: piece.name.into(),
            to_m: piece.to,
            shape: piece.shape,
            flow,
            thermal,
        }
    });
    let duct: Vec<DuctPiece> = duct.collect();
    let target = template.insert_place(height);
    if let Some(first) = design.inserts.first() {
        let by = target - first.contour().centroid();
        for insert in &mut design.inserts {
            insert.points_m.iter_mut().for_each(|p| *p += by);
        }
    }
    design.duct = duct;
    design.limits.retain(|l| {
        !matches!(
            l,
            crate::study::Limit::BoundingBox { .. } | crate::study::Limit::Centroid { .. }
        )
    });
    studio.edit_whole(Edit::Replace {
        to: Box::new(design),
        name: format!("{} template", template.name()),
    });
    studio.refit();
}
