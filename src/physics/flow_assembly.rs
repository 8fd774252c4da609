//! Element residuals and Jacobians of the flow from the pointwise form.
//!
//! At each quadrature point the Jacobian of the pointwise fluxes (7 by 7) comes from dual numbers; the element
//! matrix is then a sum of products of tabulated functions. Zero coefficients of the pointwise Jacobian (most
//! of it) are skipped.

use super::flow::{FlowFlux, FlowPoint, dynamic_part, momentum_and_mass};
use super::flow_system::{FlowLocals, FlowSystem};
use crate::base::{Dual, Real, Watch};
use crate::fem::newton::{Nonlinear, Residual};
use crate::fem::parallel::for_each_element;
use crate::fem::table::EDGE_DIRECTION;
use crate::fem::{FemError, Linearised, PointMap};
use crate::mesh::CurvedMesh;

/// The flow on one mesh, with inertia multiplied by a factor (1 is the real one; less for continuation).
pub struct FlowOn<'a> {
    /// Unknowns.
    pub system: &'a FlowSystem,
    /// Mesh of that topology.
    pub mesh: &'a CurvedMesh,
    /// Factor of the density.
    pub inertia: f64,
}

/// Working storage of a thread.
struct Scratch {
    locals: FlowLocals,
    /// Values and physical gradients of the functions at the point, shape (3, functions).
    rows: [Vec<f64>; 3],
    velocity: Vec<[f64; 2]>,
    pressure: Vec<f64>,
    blocks: Vec<f64>,
    product: Vec<f64>,
}

impl FlowOn<'_> {
    fn density(&self) -> f64 {
        self.system.density * self.inertia
    }

    fn scratch(&self) -> Scratch {
        let cells = &self.system.cells;
        let (n, m) = (cells.table.functions, cells.table.pressure_functions);
        Scratch {
            locals: FlowLocals::new(cells),
            rows: [vec![0.0; n], vec![0.0; n], vec![0.0; n]],
            velocity: vec![[0.0; 2]; n],
            pressure: vec![0.0; m],
            blocks: vec![0.0; 4 * n * n + 4 * n * m],
            product: vec![0.0; n],
        }
    }

    /// Element residuals (and matrices behind them, when asked for), shape `(fluid elements, stride)`.
    fn elements(&self, x: &[f64], jacobian: bool) -> (Vec<f64>, usize) {
        let cells = &self.system.cells;
        let local = self.system.layout.local;
        let stride = local + if jacobian { local * local } else { 0 };
        let mut slots = vec![0.0; cells.fluid.len() * stride];
        for_each_element(
            cells.fluid.len(),
            &mut slots,
            stride,
            || self.scratch(),
            |e, slot, scratch| {
                let (residual, matrix) = slot.split_at_mut(local);
                self.element(e, x, residual, matrix, scratch);
            },
        );
        self.port_terms(x, &mut slots, stride, jacobian);
        (slots, stride)
    }

    fn element(
        &self,
        e: usize,
        x: &[f64],
        residual: &mut [f64],
        matrix: &mut [f64],
        s: &mut Scratch,
    ) {
        let cells = &self.system.cells;
        let triangle = cells.fluid[e] as usize;
        let table = &cells.table;
        let (n, m) = (table.functions, table.pressure_functions);
        for (u, &node) in s.velocity.iter_mut().zip(cells.element(triangle)) {
            *u = self.system.velocity(x, node as usize);
        }
        for (p, &node) in s.pressure.iter_mut().zip(cells.pressure_element(triangle)) {
            *p = self.system.pressure(x, node as usize);
        }
        let wanted = !matrix.is_empty();
        if wanted {
            s.blocks.fill(0.0);
        }
        for q in 0..table.points {
            let map = PointMap::new(self.mesh, triangle, table, q);
            let weight = table.weights[q] * map.determinant;
            let (by_x, by_y) = table.derivative_rows(q);
            s.rows[0].copy_from_slice(table.value_row(q));
            for i in 0..n {
                let [gx, gy] = map.gradient(by_x[i], by_y[i]);
                s.rows[1][i] = gx;
                s.rows[2][i] = gy;
            }
            let pressures = table.pressure_row(q);
            let at = point_values(s, pressures);
            let flux = momentum_and_mass(&at, self.density(), self.system.viscosity);
            for i in 0..n {
                for c in 0..2 {
                    residual[s.locals.velocity[i][c]] += weight
                        * (flux.v[c] * s.rows[0][i]
                            + flux.grad_v[c][0] * s.rows[1][i]
                            + flux.grad_v[c][1] * s.rows[2][i]);
                }
            }
            for j in 0..m {
                residual[s.locals.pressure[j]] += weight * flux.q * pressures[j];
            }
            if wanted {
                let slopes = pointwise_jacobian(&at, self.density(), self.system.viscosity);
                add_point(&slopes, weight, pressures, s, n, m);
            }
        }
        if wanted {
            scatter(matrix, s, n, m);
        }
        self.rotate(triangle, residual, matrix, &s.locals);
    }

    /// Pressure terms of the ports.
    fn port_terms(&self, x: &[f64], slots: &mut [f64], stride: usize, jacobian: bool) {
        let cells = &self.system.cells;
        let local = self.system.layout.local;
        let locals = FlowLocals::new(cells);
        for port in &self.system.ports {
            for (triangle, edge) in cells.edges_on(port.tag) {
                // Fluid triangles are sorted, so the search always finds the edge's triangle.
                let Ok(e) = cells.fluid.binary_search(&(triangle as u32)) else {
                    continue;
                };
                let (residual, matrix) = slots[e * stride..(e + 1) * stride].split_at_mut(local);
                let mut own = vec![0.0; local];
                let mut own_matrix = vec![0.0; if jacobian { local * local } else { 0 }];
                let table = &cells.edge_table.edges[edge];
                let on_edge = cells.edge_locals(edge);
                for q in 0..table.points {
                    let map = PointMap::new(self.mesh, triangle, table, q);
                    let outward = map.along(EDGE_DIRECTION[edge]).right();
                    let normal = [outward.x * table.weights[q], outward.y * table.weights[q]];
                    let values = table.value_row(q);
                    let mut u = [0.0; 2];
                    for &i in &on_edge {
                        let node = self.system.velocity(x, cells.element(triangle)[i] as usize);
                        u[0] += values[i] * node[0];
                        u[1] += values[i] * node[1];
                    }
                    let mut pressure = Dual::<2>::constant(port.pressure_pa);
                    if port.total {
                        pressure = pressure
                            + dynamic_part(
                                [Dual::variable(u[0], 0), Dual::variable(u[1], 1)],
                                self.density(),
                            );
                    }
                    for &i in &on_edge {
                        for c in 0..2 {
                            let row = locals.velocity[i][c];
                            own[row] += pressure.v * normal[c] * values[i];
                            if jacobian && port.total {
                                for &j in &on_edge {
                                    for d in 0..2 {
                                        own_matrix[row * local + locals.velocity[j][d]] +=
                                            pressure.d[d] * normal[c] * values[i] * values[j];
                                    }
                                }
                            }
                        }
                    }
                }
                self.rotate(triangle, &mut own, &mut own_matrix, &locals);
                for (r, o) in residual.iter_mut().zip(&own) {
                    *r += o;
                }
                if jacobian {
                    for (r, o) in matrix.iter_mut().zip(&own_matrix) {
                        *r += o;
                    }
                }
            }
        }
    }

    /// Turn rows and columns of nodes with a frame of their own into it.
    fn rotate(
        &self,
        triangle: usize,
        residual: &mut [f64],
        matrix: &mut [f64],
        locals: &FlowLocals,
    ) {
        let local = self.system.layout.local;
        for (i, &node) in self.system.cells.element(triangle).iter().enumerate() {
            let Some(d) = self.system.frames[node as usize] else {
                continue;
            };
            let [a, b] = locals.velocity[i];
            (residual[a], residual[b]) = (
                residual[a] * d.x + residual[b] * d.y,
                residual[b] * d.x - residual[a] * d.y,
            );
            if matrix.is_empty() {
                continue;
            }
            for j in 0..local {
                let (p, q) = (matrix[a * local + j], matrix[b * local + j]);
                matrix[a * local + j] = p * d.x + q * d.y;
                matrix[b * local + j] = q * d.x - p * d.y;
            }
            for j in 0..local {
                let (p, q) = (matrix[j * local + a], matrix[j * local + b]);
                matrix[j * local + a] = p * d.x + q * d.y;
                matrix[j * local + b] = q * d.x - p * d.y;
            }
        }
    }
}

impl Nonlinear for FlowOn<'_> {
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

/// Velocity, gradient and pressure at the point from the element's nodes.
fn point_values(s: &Scratch, pressures: &[f64]) -> FlowPoint<f64> {
    let mut at = FlowPoint {
        u: [0.0; 2],
        grad_u: [[0.0; 2]; 2],
        p: 0.0,
    };
    for (i, u) in s.velocity.iter().enumerate() {
        for c in 0..2 {
            at.u[c] += u[c] * s.rows[0][i];
            at.grad_u[c][0] += u[c] * s.rows[1][i];
            at.grad_u[c][1] += u[c] * s.rows[2][i];
        }
    }
    for (p, psi) in s.pressure.iter().zip(pressures) {
        at.p += p * psi;
    }
    at
}

/// Slots of the pointwise variables and fluxes: component c has value 3c and gradient 3c + 1, 3c + 2; pressure 6.
type Slopes = [[f64; 7]; 7];

fn pointwise_jacobian(at: &FlowPoint<f64>, rho: f64, mu: f64) -> Slopes {
    let v = Dual::<7>::variable;
    let dual = FlowPoint {
        u: [v(at.u[0], 0), v(at.u[1], 3)],
        grad_u: [
            [v(at.grad_u[0][0], 1), v(at.grad_u[0][1], 2)],
            [v(at.grad_u[1][0], 4), v(at.grad_u[1][1], 5)],
        ],
        p: v(at.p, 6),
    };
    let FlowFlux { v, grad_v, q } = momentum_and_mass(&dual, rho, mu);
    [
        v[0].d,
        grad_v[0][0].d,
        grad_v[0][1].d,
        v[1].d,
        grad_v[1][0].d,
        grad_v[1][1].d,
        q.d,
    ]
}

/// Add one point to the blocks: four velocity-velocity, then velocity-pressure and pressure-velocity.
fn add_point(slopes: &Slopes, weight: f64, pressures: &[f64], s: &mut Scratch, n: usize, m: usize) {
    let Scratch {
        rows,
        blocks,
        product,
        ..
    } = s;
    let (uu, mixed) = blocks.split_at_mut(4 * n * n);
    let (up, pu) = mixed.split_at_mut(2 * n * m);
    for a in 0..2 {
        for r in 0..3 {
            let test = &rows[r];
            for c in 0..2 {
                let coefficients = &slopes[3 * a + r][3 * c..3 * c + 3];
                if coefficients.iter().all(|&x| x == 0.0) {
                    continue;
                }
                combine(coefficients, weight, rows, product);
                outer(
                    test,
                    product,
                    &mut uu[(2 * a + c) * n * n..(2 * a + c + 1) * n * n],
                );
            }
            let by_p = slopes[3 * a + r][6] * weight;
            if by_p != 0.0 {
                let block = &mut up[a * n * m..(a + 1) * n * m];
                for (i, t) in test.iter().enumerate() {
                    for (b, psi) in block[i * m..(i + 1) * m].iter_mut().zip(pressures) {
                        *b += by_p * t * psi;
                    }
                }
            }
        }
        let coefficients = &slopes[6][3 * a..3 * a + 3];
        if coefficients.iter().any(|&x| x != 0.0) {
            combine(coefficients, weight, rows, product);
            outer(pressures, product, &mut pu[a * n * m..(a + 1) * n * m]);
        }
    }
}

fn combine(coefficients: &[f64], weight: f64, rows: &[Vec<f64>; 3], product: &mut [f64]) {
    let [a, b, c] = [
        coefficients[0] * weight,
        coefficients[1] * weight,
        coefficients[2] * weight,
    ];
    for (i, p) in product.iter_mut().enumerate() {
        *p = a * rows[0][i] + b * rows[1][i] + c * rows[2][i];
    }
}

/// `block += test product^T`, row-major.
fn outer(test: &[f64], product: &[f64], block: &mut [f64]) {
    for (&t, row) in test.iter().zip(block.chunks_exact_mut(product.len())) {
        for (b, p) in row.iter_mut().zip(product) {
            *b += t * p;
        }
    }
}

fn scatter(matrix: &mut [f64], s: &Scratch, n: usize, m: usize) {
    let local = s.locals.count;
    let (uu, mixed) = s.blocks.split_at(4 * n * n);
    let (up, pu) = mixed.split_at(2 * n * m);
    for a in 0..2 {
        for i in 0..n {
            let row = s.locals.velocity[i][a] * local;
            for c in 0..2 {
                for j in 0..n {
                    matrix[row + s.locals.velocity[j][c]] = uu[((2 * a + c) * n + i) * n + j];
                }
            }
            for j in 0..m {
                matrix[row + s.locals.pressure[j]] = up[(a * n + i) * m + j];
            }
        }
        for j in 0..m {
            let row = s.locals.pressure[j] * local;
            for i in 0..n {
                matrix[row + s.locals.velocity[i][a]] = pu[(a * m + j) * n + i];
            }
        }
    }
}
