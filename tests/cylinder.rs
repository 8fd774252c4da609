//! The published cylinder benchmark 2D-1 at Re 20, and the same with heat.

mod common;

use flumeloft::base::Watch;
use flumeloft::geometry::BoundaryTag;
use flumeloft::mesh::{Fineness, MeshSettings, generate};
use flumeloft::physics::{
    Discretisation, FlowCondition, Fluid, Problem, Quantities, ThermalCondition, solve,
};
use std::sync::Arc;

fn figures(settings: &MeshSettings, prandtl: f64) -> (Quantities, usize) {
    let domain = common::benchmark_channel();
    let mesh = generate(&domain, settings, &Watch::idle()).unwrap();
    let problem = Problem {
        fluid: Fluid {
            name: "benchmark".into(),
            density_kg_m3: 1.0,
            viscosity_pa_s: 1e-3,
            conductivity_w_m_k: 1e-3 / prandtl,
            heat_capacity_j_kg_k: 1.0,
        },
        flow: vec![
            FlowCondition::Wall {},
            FlowCondition::StaticPressure { pressure_pa: 0.0 },
            FlowCondition::Wall {},
            FlowCondition::FlowRate {
                flow_rate_m2_s: 0.2 * 0.41,
            },
        ],
        piece_thermal: vec![
            ThermalCondition::Adiabatic {},
            ThermalCondition::Adiabatic {},
            ThermalCondition::Adiabatic {},
            ThermalCondition::FixedTemperature { temperature_k: 0.0 },
        ],
        insert_thermal: vec![ThermalCondition::FixedTemperature { temperature_k: 1.0 }],
    };
    let discretisation = Arc::new(Discretisation::new(&mesh, problem).unwrap());
    let triangles = mesh.mesh.triangles.len();
    let state = solve(&discretisation, mesh, None, &Watch::idle()).unwrap();
    println!(
        "{triangles} triangles, {} + {} unknowns, {} newton steps",
        discretisation.flow.layout.condensed(),
        discretisation.heat.layout.condensed(),
        state.newton_steps
    );
    assert!(
        discretisation
            .cells
            .edges_on(BoundaryTag::Insert(0))
            .count()
            >= 8
    );
    (Quantities::new(&state), triangles)
}

#[test]
fn drag_and_lift_on_the_design_mesh() {
    for fineness in [Fineness::Draft, Fineness::Design, Fineness::Final] {
        for order in 2..=5 {
            let start = std::time::Instant::now();
            let (q, _) = figures(&MeshSettings::preset(fineness, order), 0.7);
            let coefficient = |force: f64| 2.0 * force / (0.2 * 0.2 * 0.1);
            let (drag, lift) = (
                coefficient(q.inserts[0].drag_n_m),
                coefficient(q.inserts[0].lift_n_m),
            );
            println!(
                "{fineness:?} order {order} drag {:.2e} lift {:.2e} heat {:.2e} balance {:.1e} {:.1e} {:.1e} in {:.2}s",
                drag / 5.57953523384 - 1.0,
                lift / 0.010618948146 - 1.0,
                q.heat_w_m / (9.9686872 * 1e-3 / 0.7) - 1.0,
                q.mass_relative,
                q.heat_relative,
                q.energy_relative,
                start.elapsed().as_secs_f64()
            );
        }
    }
}
