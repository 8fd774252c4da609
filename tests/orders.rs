//! Observed orders of convergence on a curved domain, orders 2 to 5.
//!
//! Exact flow: Kovasznay, Laminar flow behind a two-dimensional grid, Proc. Cambridge Phil. Soc. 44, 58 (1948).
//! Exact temperature: plane flow transports its vorticity w as heat is transported at Prandtl number one,
//! u·grad w = nu lap w, so T = w solves the heat equation of the same flow without a source.

use flumeloft::base::{Vec2, Watch, vec2};
use flumeloft::fem::PointMap;
use flumeloft::mesh::structured::mapped_square;
use flumeloft::physics::{
    Discretisation, FlowCondition, Fluid, Problem, State, ThermalCondition, solve,
};
use std::f64::consts::PI;
use std::sync::Arc;

const REYNOLDS: f64 = 20.0;

fn lambda() -> f64 {
    REYNOLDS / 2.0 - (REYNOLDS * REYNOLDS / 4.0 + 4.0 * PI * PI).sqrt()
}

fn velocity(x: Vec2) -> Vec2 {
    let (l, e) = (lambda(), (lambda() * x.x).exp());
    vec2(
        1.0 - e * (2.0 * PI * x.y).cos(),
        l / (2.0 * PI) * e * (2.0 * PI * x.y).sin(),
    )
}

fn pressure(x: Vec2) -> f64 {
    -0.5 * (2.0 * lambda() * x.x).exp()
}

fn vorticity(x: Vec2) -> f64 {
    let l = lambda();
    (l * l / (2.0 * PI) - 2.0 * PI) * (l * x.x).exp() * (2.0 * PI * x.y).sin()
}

/// A square with four curved sides.
fn map(p: Vec2) -> Vec2 {
    vec2(
        p.x + 0.08 * (2.0 * PI * p.y).sin(),
        p.y + 0.1 * (PI * p.x).sin() - 0.3,
    )
}

fn solved(cells: usize, order: usize, viscosity_factor: f64) -> State {
    let mesh = mapped_square(cells, cells, order, map);
    let nu = 1.0 / REYNOLDS;
    let problem = Problem {
        fluid: Fluid {
            name: "unit".into(),
            density_kg_m3: 1.0,
            viscosity_pa_s: nu * viscosity_factor,
            conductivity_w_m_k: nu * viscosity_factor,
            heat_capacity_j_kg_k: 1.0,
        },
        flow: vec![
            FlowCondition::Velocity {
                velocity_m_s: [0.0, 0.0]
            };
            4
        ],
        piece_thermal: vec![ThermalCondition::FixedTemperature { temperature_k: 0.0 }; 4],
        insert_thermal: vec![],
    };
    let mut discretisation = Discretisation::new(&mesh, problem).unwrap();
    for (i, &x) in mesh.nodes.iter().enumerate() {
        if discretisation.flow.layout.fixed[2 * i] {
            let u = velocity(x);
            discretisation.flow.start[2 * i] = u.x;
            discretisation.flow.start[2 * i + 1] = u.y;
        }
        if discretisation.heat.owner[i].is_some() {
            discretisation.heat.start[i] = vorticity(x);
        }
    }
    solve(&Arc::new(discretisation), mesh, None, &Watch::idle()).unwrap()
}

/// L2 errors of velocity, pressure (less its mean) and temperature.
fn errors(state: &State) -> [f64; 3] {
    let cells = &state.discretisation.cells;
    let table = &cells.table;
    let mut points = Vec::new();
    for t in 0..cells.mesh.triangles.len() {
        for q in 0..table.points {
            let at = PointMap::new(&state.mesh, t, table, q);
            let (mut u, mut temperature) = (Vec2::ZERO, 0.0);
            for (&node, v) in cells.element(t).iter().zip(table.value_row(q)) {
                let [x, y] = state.velocity[node as usize];
                u += vec2(x, y) * *v;
                temperature += v * state.temperature[node as usize];
            }
            let p: f64 = cells
                .pressure_element(t)
                .iter()
                .zip(table.pressure_row(q))
                .map(|(&n, v)| v * state.discretisation.flow.pressure(&state.flow, n as usize))
                .sum();
            points.push((
                table.weights[q] * at.determinant,
                (u - velocity(at.place)).norm(),
                p - pressure(at.place),
                temperature - vorticity(at.place),
            ));
        }
    }
    let area: f64 = points.iter().map(|p| p.0).sum();
    let mean = points.iter().map(|p| p.0 * p.2).sum::<f64>() / area;
    type Point = (f64, f64, f64, f64);
    let norm = |f: fn(&Point) -> f64| {
        points
            .iter()
            .map(|p| p.0 * f(p).powi(2))
            .sum::<f64>()
            .sqrt()
    };
    [
        norm(|p| p.1),
        points
            .iter()
            .map(|p| p.0 * (p.2 - mean).powi(2))
            .sum::<f64>()
            .sqrt(),
        norm(|p| p.3),
    ]
}

/// Observed orders between two meshes must be at least those of the theory less 0.35 (coarse meshes scatter).
fn assert_orders(order: usize, cells: usize, viscosity_factor: f64) {
    let coarse = errors(&solved(cells, order, viscosity_factor));
    let fine = errors(&solved(2 * cells, order, viscosity_factor));
    let expected = [order + 1, order, order + 1];
    for ((name, expected), (c, f)) in ["velocity", "pressure", "temperature"]
        .iter()
        .zip(expected)
        .zip(coarse.iter().zip(fine))
    {
        let observed = (c / f).log2();
        println!("order {order}: {name} {c:.2e} -> {f:.2e}, observed {observed:.2}");
        assert!(
            observed > expected as f64 - 0.35,
            "{name} order {observed:.2}, expected {expected}"
        );
    }
}

#[test]
fn order_2() {
    assert_orders(2, 12, 1.0);
}

#[test]
fn order_3() {
    assert_orders(3, 10, 1.0);
}

#[test]
fn order_4() {
    assert_orders(4, 6, 1.0);
}

#[test]
fn order_5() {
    assert_orders(5, 8, 1.0);
}

#[test]
#[should_panic(expected = "velocity order")]
fn the_test_sees_a_viscosity_wrong_by_one_percent() {
    assert_orders(4, 6, 1.01);
}
