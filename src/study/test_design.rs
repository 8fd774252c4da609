//! A small design for tests: a straight channel with a round tube.

use super::{Aim, Design, DuctPiece, Insert, Limit, Project, RunSettings, VERSION};
use crate::base::{Vec2, vec2};
use crate::geometry::PieceShape;
use crate::physics::{FlowCondition, Fluid, ThermalCondition};

fn piece(name: &str, to_m: Vec2, flow: FlowCondition, thermal: ThermalCondition) -> DuctPiece {
    DuctPiece {
        name: name.into(),
        to_m,
        shape: PieceShape::Line {},
        flow,
        thermal,
    }
}

/// 70 mm by 10 mm, a tube of 4 mm at 340 K, air at 293.15 K under 0.1 Pa.
pub(crate) fn channel_with_tube() -> Design {
    use FlowCondition::{StaticPressure, TotalPressure, Wall};
    use ThermalCondition::{Adiabatic, FixedTemperature};
    let circle = (0..16).map(|i| {
        let angle = std::f64::consts::TAU * f64::from(i) / 16.0;
        vec2(0.02, 0.005) + Vec2::from_angle(angle) * 0.002
    });
    Design {
        fluid: Fluid {
            name: "air at 300 K".into(),
            density_kg_m3: 1.177,
            viscosity_pa_s: 1.85373e-5,
            conductivity_w_m_k: 0.0263845,
            heat_capacity_j_kg_k: 1006.37,
        },
        duct: vec![
            piece("floor", vec2(0.07, 0.0), Wall {}, Adiabatic {}),
            piece(
                "outlet",
                vec2(0.07, 0.01),
                StaticPressure { pressure_pa: 0.0 },
                Adiabatic {},
            ),
            piece("ceiling", vec2(0.0, 0.01), Wall {}, Adiabatic {}),
            piece(
                "inlet",
                vec2(0.0, 0.0),
                TotalPressure { pressure_pa: 0.1 },
                FixedTemperature {
                    temperature_k: 293.15,
                },
            ),
        ],
        inserts: vec![Insert {
            name: "tube".into(),
            points_m: circle.collect(),
            frozen: false,
            thermal: FixedTemperature {
                temperature_k: 340.0,
            },
        }],
        aim: Aim::MostHeat {},
        limits: vec![Limit::Area {
            insert: None,
            equal_m2: Some(1.2e-5),
            at_least_m2: None,
            at_most_m2: None,
        }],
    }
}

/// The same as a project.
pub(crate) fn project() -> Project {
    Project {
        version: VERSION,
        name: "test".into(),
        notes: String::new(),
        design: channel_with_tube(),
        run: RunSettings::default(),
        variants: Vec::new(),
    }
}
