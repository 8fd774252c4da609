//! All figures of a state at once, for reports.

use super::ThermalCondition;
use super::figures::{self, Ports};
use super::measures;
use super::solve::State;
use crate::fem::PointMap;
use crate::geometry::BoundaryTag;

/// Figures of one insert.
#[derive(Clone, Debug, PartialEq)]
pub struct InsertFigures {
    /// Heat into the fluid, W/m.
    pub heat_w_m: f64,
    /// Force along x, N/m.
    pub drag_n_m: f64,
    /// Force along y, N/m.
    pub lift_n_m: f64,
    /// Highest temperature of contour or solid, K.
    pub max_temperature_k: f64,
    /// Mean temperature of contour or solid, K.
    pub mean_temperature_k: f64,
    /// Highest temperature of the contour, K.
    pub surface_max_temperature_k: f64,
    /// Mean temperature of the contour, K.
    pub surface_mean_temperature_k: f64,
}

/// Figures of a state, per metre of depth.
#[derive(Clone, Debug, PartialEq)]
pub struct Quantities {
    /// Inlet ports.
    pub inlets: Vec<BoundaryTag>,
    /// Outlet ports.
    pub outlets: Vec<BoundaryTag>,
    /// Flow through the inlets, m^2/s.
    pub flow_rate_m2_s: f64,
    /// Width of the inlets, m.
    pub inlet_width_m: f64,
    /// Flow rate over inlet width, m/s.
    pub mean_velocity_m_s: f64,
    /// rho U 2 H/mu with H the inlets' width.
    pub reynolds: f64,
    /// Static pressure drop by width, Pa.
    pub static_pressure_drop_pa: f64,
    /// Total pressure drop by width, Pa.
    pub total_pressure_drop_by_width_pa: f64,
    /// Total pressure drop by flow, Pa.
    pub total_pressure_drop_pa: f64,
    /// Total pressure drop times flow rate, W/m.
    pub pumping_power_w_m: f64,
    /// Heat of all inserts, W/m.
    pub heat_w_m: f64,
    /// Heat through each piece of the outline that is not a port, W/m.
    pub piece_heat_w_m: Vec<f64>,
    /// Conduction into the fluid through ports of fixed temperature, W/m.
    pub port_conduction_w_m: f64,
    /// Mixed-mean temperature of the inflow, K.
    pub inlet_temperature_k: f64,
    /// Mixed-mean temperature at the outlets from the heat balance, K.
    pub outlet_bulk_temperature_k: f64,
    /// Highest speed among sampled points, m/s.
    pub max_speed_m_s: f64,
    /// Lowest and highest temperature among sampled points, K.
    pub temperature_range_k: [f64; 2],
    /// Inserts.
    pub inserts: Vec<InsertFigures>,
    /// Net flow over flow in.
    pub mass_relative: f64,
    /// Heat balance, relative to the largest part.
    pub heat_relative: f64,
    /// Dissipation against the ports' power, relative.
    pub energy_relative: f64,
    /// Area of the mesh, m^2.
    pub mesh_area_m2: f64,
}

/// Samples along an edge for extreme temperatures: between samples a quartic deviates by less than a thousandth
/// of its rise along the edge.
const EDGE_SAMPLES: usize = 24;

impl Quantities {
    /// All figures of a state.
    pub fn new(state: &State) -> Self {
        let problem = &state.discretisation.problem;
        let ports = Ports::new(state);
        let fluid = &problem.fluid;
        let flow_rate = ports.flow_rate().value;
        let out: f64 = ports.outlets.iter().map(|(_, m)| m.value).sum();
        let inlet_width: f64 = ports
            .inlets
            .iter()
            .map(|(t, _)| measures::length(state, *t).value)
            .sum();
        let mean_velocity = if inlet_width > 0.0 {
            flow_rate / inlet_width
        } else {
            0.0
        };
        let total_drop = figures::total_pressure_drop(state, &ports).value;
        let capacity = fluid.density_kg_m3 * fluid.heat_capacity_j_kg_k;
        let is_port = |i: usize| problem.flow[i].is_port();
        let through = |tag| measures::heat_through(state, tag).value;
        let pieces = problem.flow.len();
        let heat_of = |i: usize| through(BoundaryTag::Piece(i as u32));
        let piece_heat: Vec<f64> = (0..pieces)
            .map(|i| if is_port(i) { 0.0 } else { heat_of(i) })
            .collect();
        let port_conduction: f64 = (0..pieces).filter(|&i| is_port(i)).map(heat_of).sum();
        let inserts: Vec<InsertFigures> = (0..problem.insert_thermal.len())
            .map(|i| insert_figures(state, i))
            .collect();
        let heat: f64 = inserts.iter().map(|i| i.heat_w_m).sum();
        let base = state.temperature.first().copied().unwrap_or(0.0);
        let carried = |group: &[(BoundaryTag, measures::Measured)]| {
            group
                .iter()
                .map(|(t, _)| measures::convected_heat(state, *t, base).value)
                .sum::<f64>()
        };
        let (carried_in, carried_out) = (carried(&ports.inlets), -carried(&ports.outlets));
        let inlet_temperature = if flow_rate > 0.0 {
            base + carried_in / (capacity * flow_rate)
        } else {
            base
        };
        let sources = heat + piece_heat.iter().sum::<f64>() + port_conduction;
        let largest = inserts
            .iter()
            .map(|i| i.heat_w_m.abs())
            .chain(piece_heat.iter().map(|h| h.abs()))
            .fold(0.0, f64::max);
        let power = port_power(state);
        let (dissipation, mesh_area) = dissipation_and_area(state);
        let relative =
            |difference: f64, scale: f64| if scale > 0.0 { difference / scale } else { 0.0 };
        Self {
            flow_rate_m2_s: flow_rate,
            inlet_width_m: inlet_width,
            mean_velocity_m_s: mean_velocity,
            reynolds: fluid.density_kg_m3 * mean_velocity * 2.0 * inlet_width
                / fluid.viscosity_pa_s,
            static_pressure_drop_pa: figures::static_pressure_drop(state, &ports).value,
            total_pressure_drop_by_width_pa: figures::total_pressure_drop_by_width(state, &ports)
                .value,
            total_pressure_drop_pa: total_drop,
            pumping_power_w_m: total_drop * flow_rate,
            heat_w_m: heat,
            port_conduction_w_m: port_conduction,
            inlet_temperature_k: inlet_temperature,
            outlet_bulk_temperature_k: if flow_rate > 0.0 {
                inlet_temperature + sources / (capacity * flow_rate)
            } else {
                inlet_temperature
            },
            max_speed_m_s: max_speed(state),
            temperature_range_k: temperature_range(state),
            mass_relative: relative(flow_rate - out, flow_rate),
            heat_relative: relative(sources - (carried_out - carried_in), largest),
            energy_relative: relative(dissipation - power, power.abs()),
            mesh_area_m2: mesh_area,
            piece_heat_w_m: piece_heat,
            inserts,
            inlets: ports.inlets.iter().map(|p| p.0).collect(),
            outlets: ports.outlets.iter().map(|p| p.0).collect(),
        }
    }
}

/// Power that the ports put in, W/m. With the flow itself as test function the weak form says
///   integral of mu |grad u|^2 = sum over fixed unknowns of u R - kinetic energy out - sum over pressure ports of P u.n,
/// so pressure ports count with their total pressure, given velocities with their reactions.
fn port_power(state: &State) -> f64 {
    let flow = &state.discretisation.flow;
    let rows = state
        .flow
        .iter()
        .zip(&state.flow_reactions)
        .zip(&flow.layout.fixed);
    let given: f64 = rows
        .filter(|(_, fixed)| **fixed)
        .map(|((u, r), _)| u * r)
        .sum();
    let by_pressure = |t: &BoundaryTag| flow.ports.iter().any(|p| p.tag == *t);
    let ports = state.discretisation.problem.ports();
    let others: f64 = ports
        .iter()
        .map(|t| {
            if by_pressure(t) {
                measures::mechanical_power(state, *t).value
            } else {
                measures::kinetic_inflow(state, *t).value
            }
        })
        .sum();
    given + others
}

fn insert_figures(state: &State, insert: usize) -> InsertFigures {
    let tag = BoundaryTag::Insert(insert as u32);
    let surface_mean =
        measures::surface_temperature(state, tag).value / measures::length(state, tag).value;
    let surface_max = surface_maximum(state, tag);
    let solid = matches!(
        state.discretisation.problem.insert_thermal[insert],
        ThermalCondition::Solid { .. }
    );
    let (max, mean) = if solid {
        solid_temperatures(state, insert as u16 + 1)
    } else {
        (surface_max, surface_mean)
    };
    InsertFigures {
        heat_w_m: figures::insert_heat(state, insert).value,
        drag_n_m: measures::force(state, insert as u32, [1.0, 0.0]).value,
        lift_n_m: measures::force(state, insert as u32, [0.0, 1.0]).value,
        max_temperature_k: max.max(surface_max),
        mean_temperature_k: mean,
        surface_max_temperature_k: surface_max,
        surface_mean_temperature_k: surface_mean,
    }
}

/// Highest temperature along a contour.
fn surface_maximum(state: &State, tag: BoundaryTag) -> f64 {
    let cells = &state.discretisation.cells;
    let nodes = crate::mesh::reference::edge_nodes(cells.order);
    let mut highest = f64::NEG_INFINITY;
    for (triangle, edge) in cells.edges_on(tag) {
        let values: Vec<f64> = cells
            .edge_locals(edge)
            .iter()
            .map(|&i| state.temperature[cells.element(triangle)[i] as usize])
            .collect();
        for s in 0..=EDGE_SAMPLES {
            highest = highest.max(lagrange(&nodes, &values, s as f64 / EDGE_SAMPLES as f64));
        }
    }
    highest
}

/// Value at `s` of the polynomial through (nodes, values).
fn lagrange(nodes: &[f64], values: &[f64], s: f64) -> f64 {
    (0..nodes.len())
        .map(|i| {
            let basis: f64 = (0..nodes.len())
                .filter(|&j| j != i)
                .map(|j| (s - nodes[j]) / (nodes[i] - nodes[j]))
                .product();
            values[i] * basis
        })
        .sum()
}

/// Highest and mean temperature of a region.
fn solid_temperatures(state: &State, region: u16) -> (f64, f64) {
    let cells = &state.discretisation.cells;
    let table = &cells.table;
    let (mut highest, mut sum, mut area) = (f64::NEG_INFINITY, 0.0, 0.0);
    for t in (0..cells.mesh.triangles.len()).filter(|&t| cells.mesh.regions[t] == region) {
        let nodes = cells.element(t);
        highest = nodes
            .iter()
            .fold(highest, |h, &n| h.max(state.temperature[n as usize]));
        for q in 0..table.points {
            let values = table.value_row(q);
            let at: f64 = nodes
                .iter()
                .zip(values)
                .map(|(&n, v)| v * state.temperature[n as usize])
                .sum();
            let weight = table.weights[q] * PointMap::new(&state.mesh, t, table, q).determinant;
            highest = highest.max(at);
            sum += weight * at;
            area += weight;
        }
    }
    (highest, sum / area)
}

fn max_speed(state: &State) -> f64 {
    let cells = &state.discretisation.cells;
    let table = &cells.table;
    let mut highest = state
        .velocity
        .iter()
        .map(|u| u[0].hypot(u[1]))
        .fold(0.0, f64::max);
    for &t in &cells.fluid {
        for q in 0..table.points {
            let mut u = [0.0; 2];
            for (&n, v) in cells.element(t as usize).iter().zip(table.value_row(q)) {
                u[0] += v * state.velocity[n as usize][0];
                u[1] += v * state.velocity[n as usize][1];
            }
            highest = highest.max(u[0].hypot(u[1]));
        }
    }
    highest
}

fn temperature_range(state: &State) -> [f64; 2] {
    state
        .temperature
        .iter()
        .fold([f64::INFINITY, f64::NEG_INFINITY], |[low, high], &t| {
            [low.min(t), high.max(t)]
        })
}

/// Viscous dissipation (Laplacian form) mu |grad u|^2 integrated, W/m, and the area of the mesh, m^2.
fn dissipation_and_area(state: &State) -> (f64, f64) {
    let cells = &state.discretisation.cells;
    let table = &cells.table;
    let (mut dissipation, mut area) = (0.0, 0.0);
    for t in 0..cells.mesh.triangles.len() {
        let nodes = cells.element(t);
        for q in 0..table.points {
            let map = PointMap::new(&state.mesh, t, table, q);
            let (by_x, by_y) = table.derivative_rows(q);
            let mut g = [[0.0; 2]; 2];
            for (i, &n) in nodes.iter().enumerate() {
                let [gx, gy] = map.gradient(by_x[i], by_y[i]);
                let u = state.velocity[n as usize];
                for c in 0..2 {
                    g[c][0] += u[c] * gx;
                    g[c][1] += u[c] * gy;
                }
            }
            let weight = table.weights[q] * map.determinant;
            let square: f64 = g.iter().flatten().map(|x| x * x).sum();
            dissipation += weight * state.discretisation.flow.viscosity * square;
            area += weight;
        }
    }
    (dissipation, area)
}
