//! Derivatives of weighted residuals by the places of the geometry nodes: the domain form of the shape
//! derivative (Delfour and Zolesio, Shapes and Geometries, SIAM 2011, chapter 9), exact for the discrete system.
//!
//! At each quadrature point the integrand is a function of the Jacobian matrix F of the map (four numbers, as
//! duals); node i moves F by its reference gradient.

use crate::base::{Dual, Real, Vec2};
use crate::fem::PointMap;
use crate::fem::table::EDGE_DIRECTION;
use crate::geometry::BoundaryTag;
use crate::physics::State;
use crate::physics::flow::{FlowPoint, momentum_and_mass};
use crate::physics::heat::{HeatPoint, energy};

type D = Dual<4>;

/// det F and F^-1 as functions of the entries of F (variables 0 to 3, row-major).
fn map_of(jacobian: &[[f64; 2]; 2]) -> (D, [[D; 2]; 2]) {
    let f = |r: usize, c: usize| D::variable(jacobian[r][c], 2 * r + c);
    let determinant = f(0, 0) * f(1, 1) - f(0, 1) * f(1, 0);
    let one = D::constant(1.0) / determinant;
    let inverse = [
        [f(1, 1) * one, -f(0, 1) * one],
        [-f(1, 0) * one, f(0, 0) * one],
    ];
    (determinant, inverse)
}

/// Physical gradient F^-T g of a reference gradient.
fn physical(inverse: &[[D; 2]; 2], g: [f64; 2]) -> [D; 2] {
    [
        inverse[0][0] * g[0] + inverse[1][0] * g[1],
        inverse[0][1] * g[0] + inverse[1][1] * g[1],
    ]
}

fn dot(a: [D; 2], b: [D; 2]) -> D {
    a[0] * b[0] + a[1] * b[1]
}

/// Add the derivative of one point's integrand to the nodes.
fn spread(g: &D, weight: f64, by_x: &[f64], by_y: &[f64], nodes: &[u32], by_nodes: &mut [Vec2]) {
    for (i, &node) in nodes.iter().enumerate() {
        by_nodes[node as usize] += Vec2 {
            x: weight * (g.d[0] * by_x[i] + g.d[1] * by_y[i]),
            y: weight * (g.d[2] * by_x[i] + g.d[3] * by_y[i]),
        };
    }
}

/// Add `∂(psi · R_flow)/∂X`; `psi` in the nodes' frames, shape `(flow total,)`.
pub fn add_flow(state: &State, psi: &[f64], by_nodes: &mut [Vec2]) {
    let flow = &state.discretisation.flow;
    let cells = &state.discretisation.cells;
    let table = &cells.table;
    for &triangle in &cells.fluid {
        let triangle = triangle as usize;
        let nodes = cells.element(triangle);
        for q in 0..table.points {
            let (by_x, by_y) = table.derivative_rows(q);
            let values = table.value_row(q);
            let (mut u, mut v) = ([0.0; 2], [0.0; 2]);
            let (mut gu, mut gv) = ([[0.0; 2]; 2], [[0.0; 2]; 2]);
            for (i, &node) in nodes.iter().enumerate() {
                let a = state.velocity[node as usize];
                let b = flow.velocity(psi, node as usize);
                for c in 0..2 {
                    u[c] += a[c] * values[i];
                    v[c] += b[c] * values[i];
                    gu[c][0] += a[c] * by_x[i];
                    gu[c][1] += a[c] * by_y[i];
                    gv[c][0] += b[c] * by_x[i];
                    gv[c][1] += b[c] * by_y[i];
                }
            }
            let (mut p, mut w) = (0.0, 0.0);
            for (&node, value) in cells
                .pressure_element(triangle)
                .iter()
                .zip(table.pressure_row(q))
            {
                p += value * flow.pressure(&state.flow, node as usize);
                w += value * flow.pressure(psi, node as usize);
            }
            let map = PointMap::new(&state.mesh, triangle, table, q);
            let (determinant, inverse) = map_of(&map.jacobian);
            let at = FlowPoint {
                u: u.map(D::constant),
                grad_u: gu.map(|g| physical(&inverse, g)),
                p: D::constant(p),
            };
            let flux = momentum_and_mass(&at, flow.density, flow.viscosity);
            let mut g = flux.q * w;
            for c in 0..2 {
                g = g + flux.v[c] * v[c] + dot(flux.grad_v[c], physical(&inverse, gv[c]));
            }
            spread(
                &(g * determinant),
                table.weights[q],
                by_x,
                by_y,
                nodes,
                by_nodes,
            );
        }
    }
}

/// Add `∂(psi · R_heat)/∂X`, shape of `psi` `(node_count,)`.
pub fn add_heat(state: &State, psi: &[f64], by_nodes: &mut [Vec2]) {
    let cells = &state.discretisation.cells;
    let heat = &state.discretisation.heat;
    let table = &cells.table;
    for triangle in 0..cells.mesh.triangles.len() {
        let nodes = cells.element(triangle);
        let medium = heat.medium(triangle);
        for q in 0..table.points {
            let (by_x, by_y) = table.derivative_rows(q);
            let values = table.value_row(q);
            let (mut u, mut v, mut gt, mut gv) = ([0.0; 2], 0.0, [0.0; 2], [0.0; 2]);
            for (i, &node) in nodes.iter().enumerate() {
                let node = node as usize;
                u[0] += state.velocity[node][0] * values[i];
                u[1] += state.velocity[node][1] * values[i];
                v += psi[node] * values[i];
                gt[0] += state.temperature[node] * by_x[i];
                gt[1] += state.temperature[node] * by_y[i];
                gv[0] += psi[node] * by_x[i];
                gv[1] += psi[node] * by_y[i];
            }
            let map = PointMap::new(&state.mesh, triangle, table, q);
            let (determinant, inverse) = map_of(&map.jacobian);
            let at = HeatPoint {
                u: u.map(D::constant),
                grad_t: physical(&inverse, gt),
            };
            let flux = energy(&at, medium);
            let g = (flux.v * v + dot(flux.grad_v, physical(&inverse, gv))) * determinant;
            spread(&g, table.weights[q], by_x, by_y, nodes, by_nodes);
        }
    }
    for boundary in heat
        .fluxes
        .iter()
        .filter(|b| matches!(b.tag, BoundaryTag::Insert(_)))
    {
        for (triangle, edge) in cells.edges_on(boundary.tag) {
            let table = &cells.edge_table.edges[edge];
            let nodes = cells.element(triangle);
            let direction = EDGE_DIRECTION[edge];
            for q in 0..table.points {
                let values = table.value_row(q);
                let (mut t, mut v) = (0.0, 0.0);
                for (&node, value) in nodes.iter().zip(values) {
                    t += value * state.temperature[node as usize];
                    v += value * psi[node as usize];
                }
                let tangent = PointMap::new(&state.mesh, triangle, table, q).along(direction);
                let unit = tangent.normalized();
                let factor = -boundary.at(t) * v * table.weights[q];
                let (by_x, by_y) = table.derivative_rows(q);
                for (i, &node) in nodes.iter().enumerate() {
                    let along = by_x[i] * direction[0] + by_y[i] * direction[1];
                    by_nodes[node as usize] += unit * (factor * along);
                }
            }
        }
    }
}

/// `(∂R_heat/∂U)^T psi` by the flow unknowns in their frames, shape `(flow total,)`.
pub fn heat_by_flow(state: &State, psi: &[f64]) -> Vec<f64> {
    let flow = &state.discretisation.flow;
    let cells = &state.discretisation.cells;
    let heat = &state.discretisation.heat;
    let table = &cells.table;
    let mut by_flow = vec![0.0; flow.layout.total];
    for &triangle in &cells.fluid {
        let triangle = triangle as usize;
        let nodes = cells.element(triangle);
        let medium = heat.medium(triangle);
        let mut own = vec![[0.0; 2]; nodes.len()];
        for q in 0..table.points {
            let map = PointMap::new(&state.mesh, triangle, table, q);
            let (by_x, by_y) = table.derivative_rows(q);
            let values = table.value_row(q);
            let (mut u, mut v, mut gt, mut gv) = ([0.0; 2], 0.0, [0.0; 2], [0.0; 2]);
            for (i, &node) in nodes.iter().enumerate() {
                let node = node as usize;
                let [gx, gy] = map.gradient(by_x[i], by_y[i]);
                u[0] += state.velocity[node][0] * values[i];
                u[1] += state.velocity[node][1] * values[i];
                v += psi[node] * values[i];
                gt[0] += state.temperature[node] * gx;
                gt[1] += state.temperature[node] * gy;
                gv[0] += psi[node] * gx;
                gv[1] += psi[node] * gy;
            }
            let at = HeatPoint {
                u: [Dual::<2>::variable(u[0], 0), Dual::variable(u[1], 1)],
                grad_t: gt.map(Dual::constant),
            };
            let flux = energy(&at, medium);
            let g = flux.v * v + flux.grad_v[0] * gv[0] + flux.grad_v[1] * gv[1];
            let weight = table.weights[q] * map.determinant;
            for (o, value) in own.iter_mut().zip(values) {
                o[0] += weight * g.d[0] * value;
                o[1] += weight * g.d[1] * value;
            }
        }
        for (&node, o) in nodes.iter().zip(&own) {
            let node = node as usize;
            let [a, b] = flow.into_frame(*o, node);
            by_flow[2 * node] += a;
            by_flow[2 * node + 1] += b;
        }
    }
    by_flow
}
