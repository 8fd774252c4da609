//! Unknowns, residual and Jacobian of heat on one topology: one temperature at each node of order k.

use super::cells::Cells;
use super::conditions::ThermalCondition;
use super::heat::{HeatPoint, Medium, energy};
use crate::base::{Dual, Real, Watch};
use crate::fem::newton::{Nonlinear, Residual};
use crate::fem::parallel::for_each_element;
use crate::fem::table::EDGE_DIRECTION;
use crate::fem::{FemError, Layout, Linearised, PointMap};
use crate::geometry::BoundaryTag;
use crate::mesh::CurvedMesh;
use std::sync::Arc;

/// A boundary with a given or temperature-dependent flux.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FluxBoundary {
    /// Curve.
    pub tag: BoundaryTag,
    /// Flux into the fluid at T = 0, W/m^2.
    pub flux_w_m2: f64,
    /// Change of that flux with the wall's temperature, W/(m^2 K): -h for convection.
    pub slope_w_m2_k: f64,
}

impl FluxBoundary {
    /// The flux boundary of a condition, if it is one.
    pub fn new(tag: BoundaryTag, condition: &ThermalCondition) -> Option<Self> {
        match *condition {
            ThermalCondition::FixedFlux { flux_w_m2 } => Some(Self {
                tag,
                flux_w_m2,
                slope_w_m2_k: 0.0,
            }),
            ThermalCondition::Convection {
                coefficient_w_m2_k: h,
                ambient_k,
            } => Some(Self {
                tag,
                flux_w_m2: h * ambient_k,
                slope_w_m2_k: -h,
            }),
            _ => None,
        }
    }

    /// Flux into the fluid at a wall temperature, W/m^2.
    pub fn at<S: Real>(&self, temperature: S) -> S {
        temperature * self.slope_w_m2_k + self.flux_w_m2
    }
}

/// Unknowns and constraints of heat on one topology.
pub struct HeatSystem {
    /// Spaces.
    pub cells: Arc<Cells>,
    /// Element systems over all triangles.
    pub layout: Arc<Layout>,
    /// Medium of each region.
    pub media: Vec<Medium>,
    /// Boundaries with flux terms.
    pub fluxes: Vec<FluxBoundary>,
    /// Curve whose fixed temperature holds at each node, if any, shape `(total,)`.
    pub owner: Vec<Option<BoundaryTag>>,
    /// Fixed temperatures in place, a mean elsewhere, shape `(total,)`.
    pub start: Vec<f64>,
}

impl HeatSystem {
    /// Set up for one condition a curve.
    ///
    /// # Errors
    /// From the analysis of the pattern.
    pub fn new(
        cells: &Arc<Cells>,
        conditions: &[(BoundaryTag, ThermalCondition)],
        ports: &[BoundaryTag],
        media: Vec<Medium>,
    ) -> Result<Self, FemError> {
        let total = cells.node_count;
        let mut owner = vec![None; total];
        let mut start = vec![f64::NAN; total];
        // Ports first, walls after: where they meet, the wall's temperature holds.
        for walls in [false, true] {
            for (tag, condition) in conditions {
                let ThermalCondition::FixedTemperature { temperature_k } = *condition else {
                    continue;
                };
                if ports.contains(tag) == walls {
                    continue;
                }
                for (triangle, edge) in cells.edges_on(*tag) {
                    for local in cells.edge_locals(edge) {
                        let node = cells.element(triangle)[local] as usize;
                        owner[node] = Some(*tag);
                        start[node] = temperature_k;
                    }
                }
            }
        }
        let (sum, count) = start
            .iter()
            .filter(|t| t.is_finite())
            .fold((0.0, 0usize), |(s, n), t| (s + t, n + 1));
        let mean = if count > 0 { sum / count as f64 } else { 0.0 };
        for t in &mut start {
            if !t.is_finite() {
                *t = mean;
            }
        }
        let fixed = owner.iter().map(Option::is_some).collect();
        let numbers = cells.nodes.to_vec();
        let local = cells.table.functions;
        let layout = Layout::new(
            local,
            3 * cells.order,
            total,
            numbers,
            fixed,
            vec![1.0; total],
        )?;
        let fluxes = conditions
            .iter()
            .filter_map(|(tag, c)| FluxBoundary::new(*tag, c))
            .collect();
        Ok(Self {
            cells: cells.clone(),
            layout: Arc::new(layout),
            media,
            fluxes,
            owner,
            start,
        })
    }

    /// Medium of a triangle.
    pub fn medium(&self, triangle: usize) -> &Medium {
        &self.media[self.cells.mesh.regions[triangle] as usize]
    }
}

/// Heat on one mesh in a given flow.
pub struct HeatOn<'a> {
    /// Unknowns.
    pub system: &'a HeatSystem,
    /// Mesh of that topology.
    pub mesh: &'a CurvedMesh,
    /// Velocity at the nodes, m/s, shape `(node_count, 2)`.
    pub velocity: &'a [[f64; 2]],
}

impl HeatOn<'_> {
    fn elements(&self, x: &[f64], jacobian: bool) -> (Vec<f64>, usize) {
        let cells = &self.system.cells;
        let local = cells.table.functions;
        let stride = local + if jacobian { local * local } else { 0 };
        let triangles = cells.mesh.triangles.len();
        let mut slots = vec![0.0; triangles * stride];
        for_each_element(
            triangles,
            &mut slots,
            stride,
            || vec![[0.0; 3]; local],
            |triangle, slot, rows| {
                let (residual, matrix) = slot.split_at_mut(local);
                self.element(triangle, x, residual, matrix, rows);
            },
        );
        self.flux_terms(x, &mut slots, stride, jacobian);
        (slots, stride)
    }

    fn element(
        &self,
        triangle: usize,
        x: &[f64],
        residual: &mut [f64],
        matrix: &mut [f64],
        rows: &mut [[f64; 3]],
    ) {
        let cells = &self.system.cells;
        let table = &cells.table;
        let medium = self.system.medium(triangle);
        let nodes = cells.element(triangle);
        let n = nodes.len();
        for q in 0..table.points {
            let map = PointMap::new(self.mesh, triangle, table, q);
            let weight = table.weights[q] * map.determinant;
            let (by_x, by_y) = table.derivative_rows(q);
            let values = table.value_row(q);
            let (mut u, mut grad_t) = ([0.0; 2], [0.0; 2]);
            for i in 0..n {
                let [gx, gy] = map.gradient(by_x[i], by_y[i]);
                rows[i] = [values[i], gx, gy];
                let node = nodes[i] as usize;
                let velocity = self.velocity[node];
                u[0] += velocity[0] * values[i];
                u[1] += velocity[1] * values[i];
                grad_t[0] += x[node] * gx;
                grad_t[1] += x[node] * gy;
            }
            let at = HeatPoint {
                u: u.map(Dual::<2>::constant),
                grad_t: [Dual::variable(grad_t[0], 0), Dual::variable(grad_t[1], 1)],
            };
            let flux = energy(&at, medium);
            for i in 0..n {
                let [v, gx, gy] = rows[i];
                residual[i] +=
                    weight * (flux.v.v * v + flux.grad_v[0].v * gx + flux.grad_v[1].v * gy);
            }
            if matrix.is_empty() {
                continue;
            }
            for i in 0..n {
                let [v, gx, gy] = rows[i].map(|r| r * weight);
                let a = v * flux.v.d[0] + gx * flux.grad_v[0].d[0] + gy * flux.grad_v[1].d[0];
                let b = v * flux.v.d[1] + gx * flux.grad_v[0].d[1] + gy * flux.grad_v[1].d[1];
                for (m, row) in matrix[i * n..(i + 1) * n].iter_mut().zip(rows.iter()) {
                    *m += a * row[1] + b * row[2];
                }
            }
        }
    }

    fn flux_terms(&self, x: &[f64], slots: &mut [f64], stride: usize, jacobian: bool) {
        let cells = &self.system.cells;
        let local = cells.table.functions;
        for boundary in &self.system.fluxes {
            for (triangle, edge) in cells.edges_on(boundary.tag) {
                let slot = &mut slots[triangle * stride..(triangle + 1) * stride];
                let table = &cells.edge_table.edges[edge];
                let on_edge = cells.edge_locals(edge);
                let nodes = cells.element(triangle);
                for q in 0..table.points {
                    let length = PointMap::new(self.mesh, triangle, table, q)
                        .along(EDGE_DIRECTION[edge])
                        .norm()
                        * table.weights[q];
                    let values = table.value_row(q);
                    let t: f64 = on_edge
                        .iter()
                        .map(|&i| values[i] * x[nodes[i] as usize])
                        .sum();
                    for &i in &on_edge {
                        slot[i] -= length * values[i] * boundary.at(t);
                        if jacobian {
                            for &j in &on_edge {
                                slot[local + i * local + j] -=
                                    length * values[i] * values[j] * boundary.slope_w_m2_k;
                            }
                        }
                    }
                }
            }
        }
    }
}

impl Nonlinear for HeatOn<'_> {
    fn residual(&self, x: &[f64]) -> Residual {
        let (slots, stride) = self.elements(x, false);
        Residual::gather(&self.system.layout, &slots, stride)
    }

    fn linearise(&self, x: &[f64], watch: &Watch) -> Result<(Residual, Linearised), FemError> {
        let layout = &self.system.layout;
        let (slots, stride) = self.elements(x, true);
        watch.check()?;
        let residual = Residual::gather(layout, &slots, stride);
        Ok((
            residual,
            Linearised::new(layout, Residual::matrices(layout, &slots, stride), watch)?,
        ))
    }
}
