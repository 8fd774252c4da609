//! Scalars taken from a state, each with its derivatives by flow, temperature and node places.
//!
//! Heat at fixed temperature and forces are reactions: the residual of the equation tested with a function that
//! is one on the boundary's nodes. They converge at twice the order of the fields (Babuska and Miller, Int. J.
//! Numer. Meth. Eng. 20, 1085, 1984). Everything else is an integral along boundary edges.

use super::solve::State;
use crate::base::{Dual, Real, Vec2};
use crate::fem::PointMap;
use crate::fem::table::EDGE_DIRECTION;
use crate::geometry::BoundaryTag;

/// A scalar of a state and its derivatives.
///
/// The total derivative by a change of the state is `flow · dU + heat · dT + flow_test · dR_flow +
/// heat_test · dR_heat`, with R the residual rows.
#[derive(Clone, Debug)]
pub struct Measured {
    /// Value, SI.
    pub value: f64,
    /// Derivative by the flow unknowns, or empty.
    pub flow: Vec<f64>,
    /// Derivative by the temperatures, or empty.
    pub heat: Vec<f64>,
    /// Explicit derivative by the node places, or empty.
    pub nodes: Vec<Vec2>,
    /// Weights of the flow's residual rows, or empty.
    pub flow_test: Vec<f64>,
    /// Weights of heat's residual rows, or empty.
    pub heat_test: Vec<f64>,
}

impl Measured {
    /// A constant.
    pub fn constant(value: f64) -> Self {
        Self {
            value,
            flow: Vec::new(),
            heat: Vec::new(),
            nodes: Vec::new(),
            flow_test: Vec::new(),
            heat_test: Vec::new(),
        }
    }

    /// `sum_k coefficient_k part_k` with the given value: the chain rule for a function of several measures.
    pub fn combine(value: f64, parts: &[(f64, &Measured)]) -> Self {
        let mut sum = Self::constant(value);
        for &(c, part) in parts {
            add(&mut sum.flow, c, &part.flow);
            add(&mut sum.heat, c, &part.heat);
            add(&mut sum.flow_test, c, &part.flow_test);
            add(&mut sum.heat_test, c, &part.heat_test);
            if !part.nodes.is_empty() {
                sum.nodes.resize(part.nodes.len(), Vec2::ZERO);
                for (s, p) in sum.nodes.iter_mut().zip(&part.nodes) {
                    *s += *p * c;
                }
            }
        }
        sum
    }

    /// Sum of measures.
    pub fn sum(parts: &[Measured]) -> Self {
        let value = parts.iter().map(|p| p.value).sum();
        Self::combine(value, &parts.iter().map(|p| (1.0, p)).collect::<Vec<_>>())
    }
}

fn add(to: &mut Vec<f64>, c: f64, part: &[f64]) {
    if !part.is_empty() {
        to.resize(part.len(), 0.0);
        crate::linalg::dense::axpy(c, part, to);
    }
}

/// What a boundary integrand sees at a point.
#[derive(Clone, Copy, Debug)]
pub struct EdgePoint<S> {
    /// Velocity, m/s.
    pub u: [S; 2],
    /// Pressure from the pressure unknowns, Pa.
    pub p: S,
    /// Temperature, K.
    pub t: S,
    /// Outward normal of the fluid times the length element, m.
    pub outward: [S; 2],
}

impl<S: Real> EdgePoint<S> {
    /// Length element, m.
    pub fn length(&self) -> S {
        (self.outward[0] * self.outward[0] + self.outward[1] * self.outward[1]).sqrt()
    }

    /// Volume flow outwards through the length element, m^2/s.
    pub fn outflow(&self) -> S {
        self.u[0] * self.outward[0] + self.u[1] * self.outward[1]
    }
}

/// Integrate along a curve; the integrand includes its length element.
pub fn boundary_integral(
    state: &State,
    tag: BoundaryTag,
    integrand: impl Fn(&EdgePoint<Dual<6>>) -> Dual<6>,
) -> Measured {
    let discretisation = &state.discretisation;
    let (cells, flow) = (&discretisation.cells, &discretisation.flow);
    let mut measured = Measured {
        value: 0.0,
        flow: vec![0.0; flow.layout.total],
        heat: vec![0.0; cells.node_count],
        nodes: vec![Vec2::ZERO; cells.node_count],
        flow_test: Vec::new(),
        heat_test: Vec::new(),
    };
    for (triangle, edge) in cells.edges_on(tag) {
        let table = &cells.edge_table.edges[edge];
        let nodes = cells.element(triangle);
        let pressures = cells.pressure_element(triangle);
        let direction = EDGE_DIRECTION[edge];
        for q in 0..table.points {
            let tangent = PointMap::new(&state.mesh, triangle, table, q).along(direction);
            let (values, pressure_values) = (table.value_row(q), table.pressure_row(q));
            let (mut u, mut t, mut p) = ([0.0; 2], 0.0, 0.0);
            for (&node, v) in nodes.iter().zip(values) {
                let node = node as usize;
                u[0] += v * state.velocity[node][0];
                u[1] += v * state.velocity[node][1];
                t += v * state.temperature[node];
            }
            for (&node, v) in pressures.iter().zip(pressure_values) {
                p += v * flow.pressure(&state.flow, node as usize);
            }
            let (x, y) = (Dual::variable(tangent.x, 4), Dual::variable(tangent.y, 5));
            let point = EdgePoint {
                u: [Dual::variable(u[0], 0), Dual::variable(u[1], 1)],
                p: Dual::variable(p, 2),
                t: Dual::variable(t, 3),
                outward: [y, -x],
            };
            let g = integrand(&point) * table.weights[q];
            measured.value += g.v;
            let (by_x, by_y) = table.derivative_rows(q);
            for (i, &node) in nodes.iter().enumerate() {
                let node = node as usize;
                let [a, b] = flow.into_frame([g.d[0] * values[i], g.d[1] * values[i]], node);
                measured.flow[2 * node] += a;
                measured.flow[2 * node + 1] += b;
                measured.heat[node] += g.d[3] * values[i];
                let along = by_x[i] * direction[0] + by_y[i] * direction[1];
                measured.nodes[node] += Vec2 {
                    x: g.d[4],
                    y: g.d[5],
                } * along;
            }
            for (&node, v) in pressures.iter().zip(pressure_values) {
                measured.flow[2 * cells.node_count + node as usize] += g.d[2] * v;
            }
        }
    }
    measured
}

/// Heat into the fluid through a curve, W/m: reaction where the temperature is fixed, integral of the flux
/// where it is given or depends on the wall's temperature, zero where adiabatic. Solid inserts: the reaction of
/// the fluid side, which is their source.
pub fn heat_through(state: &State, tag: BoundaryTag) -> Measured {
    let heat = &state.discretisation.heat;
    if let Some(flux) = heat.fluxes.iter().find(|f| f.tag == tag) {
        return boundary_integral(state, tag, |at| flux.at(at.t) * at.length());
    }
    let weights: Vec<f64> = heat
        .owner
        .iter()
        .map(|o| f64::from(u8::from(*o == Some(tag))))
        .collect();
    let value = weights
        .iter()
        .zip(&state.heat_reactions)
        .map(|(w, r)| w * r)
        .sum();
    Measured {
        heat_test: weights,
        ..Measured::constant(value)
    }
}

/// Force of the fluid on an insert along a direction, N/m.
pub fn force(state: &State, insert: u32, direction: [f64; 2]) -> Measured {
    let cells = &state.discretisation.cells;
    let mut weights = vec![0.0; state.discretisation.flow.layout.total];
    for (triangle, edge) in cells.edges_on(BoundaryTag::Insert(insert)) {
        for local in cells.edge_locals(edge) {
            let node = cells.element(triangle)[local] as usize;
            weights[2 * node] = -direction[0];
            weights[2 * node + 1] = -direction[1];
        }
    }
    let value = weights
        .iter()
        .zip(&state.flow_reactions)
        .map(|(w, r)| w * r)
        .sum();
    Measured {
        flow_test: weights,
        ..Measured::constant(value)
    }
}

/// Flow into the duct through a port, m^2/s.
pub fn inflow(state: &State, port: BoundaryTag) -> Measured {
    boundary_integral(state, port, |at| -at.outflow())
}

/// Length of a curve, m.
pub fn length(state: &State, tag: BoundaryTag) -> Measured {
    boundary_integral(state, tag, EdgePoint::length)
}

/// Static pressure at a point of a port: what the port's condition says where it gives a pressure, else the
/// pressure unknowns.
fn port_pressure(state: &State, port: BoundaryTag, at: &EdgePoint<Dual<6>>) -> Dual<6> {
    let flow = &state.discretisation.flow;
    match flow.ports.iter().find(|p| p.tag == port) {
        Some(p) if p.total => super::flow::dynamic_part(at.u, flow.density) + p.pressure_pa,
        Some(p) => Dual::constant(p.pressure_pa),
        None => at.p,
    }
}

/// Static pressure integrated over a port's width, Pa m.
pub fn static_pressure(state: &State, port: BoundaryTag) -> Measured {
    boundary_integral(state, port, |at| {
        port_pressure(state, port, at) * at.length()
    })
}

/// Total pressure integrated over a port's width, Pa m.
pub fn total_pressure(state: &State, port: BoundaryTag) -> Measured {
    let density = state.discretisation.flow.density;
    boundary_integral(state, port, |at| {
        (port_pressure(state, port, at) - super::flow::dynamic_part(at.u, density)) * at.length()
    })
}

/// Total pressure carried in by the flow through a port, W/m.
pub fn mechanical_power(state: &State, port: BoundaryTag) -> Measured {
    let density = state.discretisation.flow.density;
    boundary_integral(state, port, |at| {
        -((port_pressure(state, port, at) - super::flow::dynamic_part(at.u, density))
            * at.outflow())
    })
}

/// Kinetic energy carried in by the flow through a port, W/m.
pub fn kinetic_inflow(state: &State, port: BoundaryTag) -> Measured {
    let density = state.discretisation.flow.density;
    boundary_integral(state, port, |at| {
        super::flow::dynamic_part(at.u, density) * at.outflow()
    })
}

/// Surface temperature integrated along a curve, K m.
pub fn surface_temperature(state: &State, tag: BoundaryTag) -> Measured {
    boundary_integral(state, tag, |at| at.t * at.length())
}

/// exp((T - reference)/width) integrated along a curve, m: the smooth maximum is made of it.
pub fn surface_exponential(
    state: &State,
    tag: BoundaryTag,
    reference_k: f64,
    width_k: f64,
) -> Measured {
    boundary_integral(state, tag, |at| {
        ((at.t + -reference_k) * (1.0 / width_k)).exp() * at.length()
    })
}

/// Heat carried in by the flow through a port relative to a temperature, W/m (the direct integral).
pub fn convected_heat(state: &State, port: BoundaryTag, reference_k: f64) -> Measured {
    let capacity = state.discretisation.heat.media[0].capacity_j_m3_k;
    boundary_integral(state, port, |at| {
        -((at.t + -reference_k) * at.outflow() * capacity)
    })
}

/// Area of a region of the mesh, m^2.
pub fn region_area(state: &State, region: u16) -> Measured {
    let cells = &state.discretisation.cells;
    let table = &cells.table;
    let mut measured = Measured::constant(0.0);
    measured.nodes = vec![Vec2::ZERO; cells.node_count];
    for triangle in 0..cells.mesh.triangles.len() {
        if cells.mesh.regions[triangle] != region {
            continue;
        }
        for q in 0..table.points {
            let map = PointMap::new(&state.mesh, triangle, table, q);
            let weight = table.weights[q];
            measured.value += weight * map.determinant;
            let (by_x, by_y) = table.derivative_rows(q);
            for (i, &node) in cells.element(triangle).iter().enumerate() {
                measured.nodes[node as usize] += by_node(&map, by_x[i], by_y[i]) * weight;
            }
        }
    }
    measured
}

/// Temperature integrated over a region, K m^2.
pub fn region_temperature(state: &State, region: u16) -> Measured {
    let cells = &state.discretisation.cells;
    let table = &cells.table;
    let mut measured = Measured::constant(0.0);
    measured.heat = vec![0.0; cells.node_count];
    measured.nodes = vec![Vec2::ZERO; cells.node_count];
    for triangle in (0..cells.mesh.triangles.len()).filter(|&t| cells.mesh.regions[t] == region) {
        for q in 0..table.points {
            let map = PointMap::new(&state.mesh, triangle, table, q);
            let weight = table.weights[q];
            let values = table.value_row(q);
            let nodes = cells.element(triangle);
            let t: f64 = nodes
                .iter()
                .zip(values)
                .map(|(&n, v)| v * state.temperature[n as usize])
                .sum();
            measured.value += weight * map.determinant * t;
            let (by_x, by_y) = table.derivative_rows(q);
            for (i, &node) in nodes.iter().enumerate() {
                let node = node as usize;
                measured.heat[node] += weight * map.determinant * values[i];
                measured.nodes[node] += by_node(&map, by_x[i], by_y[i]) * (weight * t);
            }
        }
    }
    measured
}

/// Temperature of a node that moves with the mesh, K.
pub fn node_temperature(state: &State, node: usize) -> Measured {
    let mut measured = Measured::constant(state.temperature[node]);
    measured.heat = vec![0.0; state.discretisation.cells.node_count];
    measured.heat[node] = 1.0;
    measured
}

/// Derivative of det F by the place of a node with these reference derivatives.
fn by_node(map: &PointMap, by_x: f64, by_y: f64) -> Vec2 {
    let f = &map.jacobian;
    Vec2 {
        x: f[1][1] * by_x - f[1][0] * by_y,
        y: f[0][0] * by_y - f[0][1] * by_x,
    }
}
