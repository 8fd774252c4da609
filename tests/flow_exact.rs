//! Flow and heat against exact solutions on meshes that are known.

use flumeloft::base::{Vec2, Watch, vec2};
use flumeloft::geometry::BoundaryTag;
use flumeloft::mesh::structured::mapped_square;
use flumeloft::physics::{
    Discretisation, FlowCondition, Fluid, Problem, ThermalCondition, measures, solve,
};
use std::sync::Arc;

fn fluid() -> Fluid {
    Fluid {
        name: "test".into(),
        density_kg_m3: 2.0,
        viscosity_pa_s: 0.05,
        conductivity_w_m_k: 0.3,
        heat_capacity_j_kg_k: 1.5,
    }
}

/// Plane Poiseuille flow between total and static pressure ports, in a channel turned by 0.4 rad:
/// u = dp/(2 mu L) y (H - y) is reached only where the total pressure port does not disturb it, so static ports
/// on both sides are used: exact for every order (Batchelor, An Introduction to Fluid Dynamics, 4.2).
#[test]
fn poiseuille_flow_in_a_turned_channel_is_exact() {
    let (length, height, drop) = (3.0, 1.0, 0.6);
    for order in 2..=5 {
        let mesh = mapped_square(3, 2, order, |p| {
            vec2(p.x * length, p.y * height).rotated(0.4)
        });
        let problem = Problem {
            fluid: fluid(),
            flow: vec![
                FlowCondition::Wall {},
                FlowCondition::StaticPressure { pressure_pa: 0.0 },
                FlowCondition::Wall {},
                FlowCondition::StaticPressure { pressure_pa: drop },
            ],
            piece_thermal: vec![
                ThermalCondition::FixedFlux { flux_w_m2: 2.0 },
                ThermalCondition::Adiabatic {},
                ThermalCondition::Adiabatic {},
                ThermalCondition::FixedTemperature {
                    temperature_k: 300.0,
                },
            ],
            insert_thermal: vec![],
        };
        let discretisation = Arc::new(Discretisation::new(&mesh, problem).unwrap());
        let state = solve(&discretisation, mesh, None, &Watch::idle()).unwrap();
        let exact = drop * height.powi(3) / (12.0 * 0.05 * length);
        let inflow = measures::inflow(&state, BoundaryTag::Piece(3)).value;
        assert!(
            (inflow / exact - 1.0).abs() < 1e-11,
            "order {order}: {inflow} {exact}"
        );
        let outflow = measures::inflow(&state, BoundaryTag::Piece(1)).value;
        assert!((inflow + outflow).abs() < 1e-12);
        let worst = state
            .mesh
            .nodes
            .iter()
            .zip(&state.velocity)
            .map(|(x, u)| {
                let flat = x.rotated(-0.4);
                let speed = drop / (2.0 * 0.05 * length) * flat.y * (height - flat.y);
                (vec2(u[0], u[1]) - Vec2::from_angle(0.4) * speed).norm()
            })
            .fold(0.0, f64::max);
        assert!(worst < 1e-11, "order {order}: {worst}");
    }
}

/// Half a channel below a symmetry plane carries half the flow of the whole at the same pressure gradient: the given
/// flow rate enters as half a parabola and stays so (Batchelor, 4.2).
#[test]
fn half_a_channel_under_a_symmetry_plane_is_exact() {
    let (length, half, flow) = (2.0, 0.5, 0.3);
    let mesh = mapped_square(3, 2, 3, |p| vec2(p.x * length, p.y * half));
    let adiabatic = ThermalCondition::Adiabatic {};
    let problem = Problem {
        fluid: fluid(),
        flow: vec![
            FlowCondition::Wall {},
            FlowCondition::StaticPressure { pressure_pa: 0.0 },
            FlowCondition::Symmetry {},
            FlowCondition::FlowRate {
                flow_rate_m2_s: flow,
            },
        ],
        piece_thermal: vec![
            adiabatic.clone(),
            adiabatic.clone(),
            adiabatic,
            ThermalCondition::FixedTemperature {
                temperature_k: 300.0,
            },
        ],
        insert_thermal: vec![],
    };
    let discretisation = Arc::new(Discretisation::new(&mesh, problem).unwrap());
    let state = solve(&discretisation, mesh, None, &Watch::idle()).unwrap();
    let q = flumeloft::physics::Quantities::new(&state);
    // dp/L = 12 mu (2 flow)/(2 half)^3 for the whole channel.
    let exact = 12.0 * 0.05 * 2.0 * flow / (2.0f64 * half).powi(3) * length;
    assert!(
        (q.static_pressure_drop_pa / exact - 1.0).abs() < 1e-9,
        "{} {exact}",
        q.static_pressure_drop_pa
    );
    // The flawed twin: a full parabola would need more.
    assert!((q.static_pressure_drop_pa / (4.0 * exact) - 1.0).abs() > 0.5);
}
