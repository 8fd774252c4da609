//! Unknowns of the flow on one topology: frames, fixed values, and the layout of the element systems.
//!
//! Node `i` of order k carries two unknowns in its own frame: at most nodes the frame is (x, y); where the flow
//! may only go along a direction d (ports: normal to them; symmetry planes: along them) the first unknown is
//! u·d and the second, across, is fixed to zero.

use super::cells::Cells;
use super::conditions::FlowCondition;
use crate::base::{Vec2, vec2};
use crate::fem::{FemError, Layout, PointMap};
use crate::geometry::BoundaryTag;
use crate::mesh::CurvedMesh;
use std::sync::Arc;

/// Two directions closer than this sine are the same: where a port meets a symmetry plane at a right angle
/// both leave the same direction free.
const SAME_DIRECTION: f64 = 1e-6;

/// A port in the weak form.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PressurePort {
    /// Piece.
    pub tag: BoundaryTag,
    /// Pressure P, Pa.
    pub pressure_pa: f64,
    /// Whether it is a total pressure.
    pub total: bool,
}

/// What is left free at a node.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Freedom {
    Free,
    Along(Vec2),
    Fixed(Vec2),
    Wall,
}

/// Unknowns and constraints of the flow on one topology.
pub struct FlowSystem {
    /// Spaces.
    pub cells: Arc<Cells>,
    /// Element systems.
    pub layout: Arc<Layout>,
    /// Density, kg/m^3.
    pub density: f64,
    /// Viscosity, Pa s.
    pub viscosity: f64,
    /// Pressure ports.
    pub ports: Vec<PressurePort>,
    /// Direction of the first unknown at each node, where it is not x.
    pub frames: Vec<Option<Vec2>>,
    /// A start with all fixed values in place and zero elsewhere, shape `(total,)`.
    pub start: Vec<f64>,
}

impl FlowSystem {
    /// Set up for one condition a piece (`conditions[i]` holds on `BoundaryTag::Piece(i)`; inserts are walls).
    ///
    /// # Errors
    /// From the analysis of the pattern.
    pub fn new(
        mesh: &CurvedMesh,
        cells: &Arc<Cells>,
        conditions: &[FlowCondition],
        density: f64,
        viscosity: f64,
    ) -> Result<Self, FemError> {
        let freedoms = freedoms(mesh, cells, conditions);
        let nodes = cells.node_count;
        let total = 2 * nodes + cells.pressure_node_count;
        let mut fixed = vec![false; total];
        let mut start = vec![0.0; total];
        let mut frames = vec![None; nodes];
        for (i, freedom) in freedoms.iter().enumerate() {
            match *freedom {
                Freedom::Free => {}
                Freedom::Along(d) => {
                    frames[i] = Some(d);
                    fixed[2 * i + 1] = true;
                }
                Freedom::Fixed(u) => {
                    start[2 * i] = u.x;
                    start[2 * i + 1] = u.y;
                    fixed[2 * i] = true;
                    fixed[2 * i + 1] = true;
                }
                Freedom::Wall => {
                    fixed[2 * i] = true;
                    fixed[2 * i + 1] = true;
                }
            }
        }
        if !conditions.iter().any(|c| {
            matches!(
                c,
                FlowCondition::TotalPressure { .. } | FlowCondition::StaticPressure { .. }
            )
        }) {
            // Velocity is given all round: the level of the pressure is free and set to zero at one node.
            fixed[2 * nodes + cells.pressure_element(cells.fluid[0] as usize)[0] as usize] = true;
        }
        let cell = (mesh_area(mesh, cells) / cells.mesh.triangles.len() as f64).sqrt();
        let mut scale = vec![1.0; total];
        scale[2 * nodes..].fill(viscosity / cell);
        let locals = FlowLocals::new(cells);
        let mut numbers = Vec::with_capacity(cells.fluid.len() * locals.count);
        for &t in &cells.fluid {
            let mut element = vec![0; locals.count];
            for (i, &n) in cells.element(t as usize).iter().enumerate() {
                element[locals.velocity[i][0]] = 2 * n;
                element[locals.velocity[i][1]] = 2 * n + 1;
            }
            for (j, &n) in cells.pressure_element(t as usize).iter().enumerate() {
                element[locals.pressure[j]] = 2 * nodes as u32 + n;
            }
            numbers.extend(element);
        }
        let layout = Layout::saddle(
            locals.count,
            locals.outer,
            total,
            numbers,
            fixed,
            scale,
            2 * nodes,
        )?;
        let ports = conditions
            .iter()
            .enumerate()
            .filter_map(|(i, c)| {
                let (pressure_pa, total) = match *c {
                    FlowCondition::TotalPressure { pressure_pa } => (pressure_pa, true),
                    FlowCondition::StaticPressure { pressure_pa } => (pressure_pa, false),
                    _ => return None,
                };
                Some(PressurePort {
                    tag: BoundaryTag::Piece(i as u32),
                    pressure_pa,
                    total,
                })
            })
            .collect();
        Ok(Self {
            cells: cells.clone(),
            layout: Arc::new(layout),
            density,
            viscosity,
            ports,
            frames,
            start,
        })
    }

    /// Velocity of a node in x and y from the unknowns, m/s.
    pub fn velocity(&self, x: &[f64], node: usize) -> [f64; 2] {
        let (a, b) = (x[2 * node], x[2 * node + 1]);
        match self.frames[node] {
            None => [a, b],
            Some(d) => [a * d.x - b * d.y, a * d.y + b * d.x],
        }
    }

    /// A vector given in x and y at a node, in the node's frame (the transpose of [`FlowSystem::velocity`]).
    pub fn into_frame(&self, v: [f64; 2], node: usize) -> [f64; 2] {
        match self.frames[node] {
            None => v,
            Some(d) => [v[0] * d.x + v[1] * d.y, v[1] * d.x - v[0] * d.y],
        }
    }

    /// Pressure of a pressure node, Pa.
    pub fn pressure(&self, x: &[f64], node: usize) -> f64 {
        x[2 * self.cells.node_count + node]
    }
}

/// Places of velocity and pressure unknowns within an element's system: those that couple first.
#[derive(Clone, Debug)]
pub struct FlowLocals {
    /// Unknowns of an element.
    pub count: usize,
    /// How many couple to neighbours.
    pub outer: usize,
    /// Of node `i`, component `c`.
    pub velocity: Vec<[usize; 2]>,
    /// Of pressure node `j`.
    pub pressure: Vec<usize>,
}

impl FlowLocals {
    /// Order of unknowns: outer velocities, outer pressures, inner velocities, inner pressures.
    pub fn new(cells: &Cells) -> Self {
        let k = cells.order;
        let (functions, pressures) = (cells.table.functions, cells.table.pressure_functions);
        let (outer_nodes, outer_pressures) = (3 * k, if k == 2 { 3 } else { 3 * (k - 1) });
        let outer = 2 * outer_nodes + outer_pressures;
        let velocity = (0..functions)
            .map(|i| {
                let at = if i < outer_nodes {
                    2 * i
                } else {
                    outer + 2 * (i - outer_nodes)
                };
                [at, at + 1]
            })
            .collect();
        let inner_velocities = 2 * (functions - outer_nodes);
        let pressure = (0..pressures)
            .map(|j| {
                if j < outer_pressures {
                    2 * outer_nodes + j
                } else {
                    outer + inner_velocities + j - outer_pressures
                }
            })
            .collect();
        Self {
            count: 2 * functions + pressures,
            outer,
            velocity,
            pressure,
        }
    }
}

/// What each node may do. At corners the stricter condition wins: wall, then given velocity, then one free
/// direction; two different free directions leave none.
fn freedoms(mesh: &CurvedMesh, cells: &Cells, conditions: &[FlowCondition]) -> Vec<Freedom> {
    let mut freedoms = vec![Freedom::Free; cells.node_count];
    for boundary in &cells.mesh.boundary {
        let (triangle, edge) = (boundary.triangle as usize, boundary.local_edge as usize);
        let condition = match boundary.tag {
            BoundaryTag::Piece(i) => &conditions[i as usize],
            BoundaryTag::Insert(_) => &FlowCondition::Wall {},
        };
        for local in cells.edge_locals(edge) {
            let node = cells.element(triangle)[local] as usize;
            let tangent = PointMap::new(mesh, triangle, &cells.node_table, local)
                .along(crate::fem::table::EDGE_DIRECTION[edge])
                .normalized();
            let here = match condition {
                FlowCondition::Wall {} => Freedom::Wall,
                FlowCondition::Symmetry {} => Freedom::Along(tangent),
                FlowCondition::TotalPressure { .. } | FlowCondition::StaticPressure { .. } => {
                    Freedom::Along(tangent.right())
                }
                FlowCondition::Velocity {
                    velocity_m_s: [x, y],
                } => Freedom::Fixed(vec2(*x, *y)),
                FlowCondition::FlowRate { .. } => Freedom::Fixed(Vec2::ZERO),
            };
            freedoms[node] = stricter(freedoms[node], here);
        }
    }
    for (i, condition) in conditions.iter().enumerate() {
        if let FlowCondition::FlowRate { flow_rate_m2_s } = condition {
            let symmetry =
                |k: usize| matches!(conditions[k % conditions.len()], FlowCondition::Symmetry {});
            let ends = [symmetry(i + conditions.len() - 1), symmetry(i + 1)];
            let tag = BoundaryTag::Piece(i as u32);
            parabola(mesh, cells, tag, *flow_rate_m2_s, ends, &mut freedoms);
        }
    }
    freedoms
}

fn stricter(a: Freedom, b: Freedom) -> Freedom {
    match (a, b) {
        (Freedom::Free, x) | (x, Freedom::Free) => x,
        (Freedom::Wall, _) | (_, Freedom::Wall) => Freedom::Wall,
        (Freedom::Fixed(u), _) | (_, Freedom::Fixed(u)) => Freedom::Fixed(u),
        (Freedom::Along(d), Freedom::Along(e)) => {
            if d.cross(e).abs() < SAME_DIRECTION {
                Freedom::Along(d)
            } else {
                Freedom::Wall
            }
        }
    }
}

/// Shape of the given inflow at a fraction `s` of the port: a parabola between walls, its half where one end meets
/// a symmetry plane (`ends`: at the start, at the end), uniform between two of them. Scaled by the caller.
fn profile_shape(s: f64, ends: [bool; 2]) -> f64 {
    match ends {
        [false, false] => s * (1.0 - s),
        [true, false] => 1.0 - s * s,
        [false, true] => s * (2.0 - s),
        [true, true] => 1.0,
    }
}

/// Parabolic inflow along a piece: u = -6 U s (1 - s) n with s the fraction of the arc through the nodes, scaled so that the discrete
/// flow rate is the given one to the last digit.
fn parabola(
    mesh: &CurvedMesh,
    cells: &Cells,
    tag: BoundaryTag,
    flow_rate: f64,
    ends: [bool; 2],
    freedoms: &mut [Freedom],
) {
    let mut along: Vec<(f64, usize)> = mesh
        .boundary_nodes
        .iter()
        .filter(|b| b.tag == tag)
        .map(|b| (b.t, b.node as usize))
        .collect();
    along.sort_by(|a, b| a.0.total_cmp(&b.0));
    let mut arc = vec![0.0];
    for pair in along.windows(2) {
        let chord = mesh.nodes[pair[0].1].distance(mesh.nodes[pair[1].1]);
        arc.push(arc[arc.len() - 1] + chord);
    }
    let length = arc[arc.len() - 1];
    let profile: Vec<(usize, f64)> = along
        .iter()
        .zip(&arc)
        .map(|(&(_, node), &a)| (node, profile_shape(a / length, ends)))
        .collect();
    let mut inward = vec![None; cells.node_count];
    let mut carried = 0.0;
    for (triangle, edge) in cells.edges_on(tag) {
        let table = &cells.edge_table.edges[edge];
        let element = cells.element(triangle);
        for local in cells.edge_locals(edge) {
            let tangent = PointMap::new(mesh, triangle, &cells.node_table, local)
                .along(crate::fem::table::EDGE_DIRECTION[edge])
                .normalized();
            inward[element[local] as usize] = Some(tangent.left());
        }
        for q in 0..table.points {
            let tangent = PointMap::new(mesh, triangle, table, q)
                .along(crate::fem::table::EDGE_DIRECTION[edge]);
            let values = table.value_row(q);
            for local in cells.edge_locals(edge) {
                let node = element[local] as usize;
                if let (Some(n), Some((_, u))) =
                    (inward[node], profile.iter().find(|p| p.0 == node))
                {
                    carried += table.weights[q] * values[local] * u * n.dot(tangent.left());
                }
            }
        }
    }
    for (node, shape) in profile {
        if let (Some(n), Freedom::Fixed(_)) = (inward[node], freedoms[node]) {
            freedoms[node] = Freedom::Fixed(n * (shape * flow_rate / carried));
        }
    }
}

fn mesh_area(mesh: &CurvedMesh, cells: &Cells) -> f64 {
    let mut area = 0.0;
    for t in 0..cells.mesh.triangles.len() {
        for q in 0..cells.table.points {
            area += cells.table.weights[q] * PointMap::new(mesh, t, &cells.table, q).determinant;
        }
    }
    area
}
