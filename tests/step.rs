//! Flow over a backward-facing step at Re 800.
//!
//! Gartling, A test problem for outflow boundary conditions: flow over a backward-facing step, Int. J. Numer.
//! Meth. Fluids 11, 953 (1990): reattachment 6.10; to more digits 6.0962, computed for tests/check_values.

#[path = "../examples/reference_cases/shear.rs"]
mod shear;

use flumeloft::base::{Vec2, Watch, vec2};
use flumeloft::geometry::{Domain, Outline, OutlinePiece, Segment};
use flumeloft::mesh::{Fineness, MeshSettings, generate};
use flumeloft::physics::{Discretisation, FlowCondition, Fluid, Problem, ThermalCondition, solve};
use std::sync::Arc;

fn reattachment(reynolds: f64) -> f64 {
    let corners: [(Vec2, bool); 5] = [
        (vec2(0.0, -0.5), false),
        (vec2(30.0, -0.5), true),
        (vec2(30.0, 0.5), false),
        (vec2(0.0, 0.5), true),
        (vec2(0.0, 0.0), false),
    ];
    let pieces = (0..5)
        .map(|i| OutlinePiece {
            name: format!("piece {i}"),
            segment: Segment::Line {
                from: corners[i].0,
                to: corners[(i + 1) % 5].0,
            },
            is_port: corners[i].1,
        })
        .collect();
    let domain = Domain {
        outline: Outline { pieces },
        inserts: vec![],
    };
    let mut settings = MeshSettings::preset(Fineness::Design, 4);
    // The far size follows the narrower inlet, which is needed only near the step.
    settings.extra = vec![(vec2(0.0, 0.0), 0.01)];
    let mesh = generate(&domain, &settings, &Watch::idle()).unwrap();
    let adiabatic = ThermalCondition::Adiabatic {};
    let problem = Problem {
        fluid: Fluid {
            name: "unit".into(),
            density_kg_m3: 1.0,
            viscosity_pa_s: 1.0 / reynolds,
            conductivity_w_m_k: 1.0,
            heat_capacity_j_kg_k: 1.0,
        },
        flow: vec![
            FlowCondition::Wall {},
            FlowCondition::StaticPressure { pressure_pa: 0.0 },
            FlowCondition::Wall {},
            FlowCondition::FlowRate {
                flow_rate_m2_s: 0.5,
            },
            FlowCondition::Wall {},
        ],
        piece_thermal: vec![
            adiabatic.clone(),
            adiabatic.clone(),
            adiabatic.clone(),
            ThermalCondition::FixedTemperature { temperature_k: 0.0 },
            adiabatic,
        ],
        insert_thermal: vec![],
    };
    let discretisation = Arc::new(Discretisation::new(&mesh, problem).unwrap());
    println!("{} triangles", mesh.mesh.triangles.len());
    let state = solve(&discretisation, mesh, None, &Watch::idle()).unwrap();
    println!("{} newton steps", state.newton_steps);
    shear::sign_changes(&state, -0.5, 0.0, 20.0)
        .last()
        .copied()
        .unwrap()
}

#[test]
fn reattachment_at_re_800() {
    let length = reattachment(800.0);
    println!("reattachment {length:.5}");
    assert!((length / 6.096 - 1.0).abs() < 5e-3, "reattachment {length}");
}

#[test]
#[should_panic(expected = "reattachment")]
fn the_band_sees_a_reynolds_number_of_780() {
    let length = reattachment(780.0);
    assert!((length / 6.096 - 1.0).abs() < 5e-3, "reattachment {length}");
}
