//! Basis functions tabulated at quadrature points: velocity, temperature and geometry of order k, pressure of
//! order k - 1.

use super::quadrature;
use crate::mesh::reference::{self, Reference};

/// Functions at the points of one rule.
#[derive(Clone, Debug)]
pub struct Table {
    /// Order k.
    pub order: usize,
    /// Number of points.
    pub points: usize,
    /// Number of functions of order k.
    pub functions: usize,
    /// Number of pressure functions, order k - 1.
    pub pressure_functions: usize,
    /// Reference places, shape `(points, 2)`.
    pub places: Vec<[f64; 2]>,
    /// Weights, shape `(points,)`.
    pub weights: Vec<f64>,
    /// Values, shape `(points, functions)`.
    pub values: Vec<f64>,
    /// Reference derivatives by x, shape `(points, functions)`.
    pub by_x: Vec<f64>,
    /// Reference derivatives by y, shape `(points, functions)`.
    pub by_y: Vec<f64>,
    /// Pressure values, shape `(points, pressure_functions)`.
    pub pressure: Vec<f64>,
}

impl Table {
    /// Functions at given reference places with weights.
    pub fn at(order: usize, rule: &[([f64; 2], f64)]) -> Self {
        let basis = Reference::new(order);
        let pressure_basis = Reference::new(order - 1);
        let mut table = Self {
            order,
            points: rule.len(),
            functions: reference::count(order),
            pressure_functions: reference::count(order - 1),
            places: rule.iter().map(|r| r.0).collect(),
            weights: rule.iter().map(|r| r.1).collect(),
            values: Vec::new(),
            by_x: Vec::new(),
            by_y: Vec::new(),
            pressure: Vec::new(),
        };
        for &(place, _) in rule {
            table.values.extend(basis.values(place));
            for [x, y] in basis.gradients(place) {
                table.by_x.push(x);
                table.by_y.push(y);
            }
            table.pressure.extend(pressure_basis.values(place));
        }
        table
    }

    /// The rule used over cells: degree 3k - 1, exact for convection on straight cells (degrees k, k - 1, k).
    pub fn cells(order: usize) -> Self {
        Self::at(order, &quadrature::triangle(3 * order - 1))
    }

    /// Row of values at a point, shape `(functions,)`.
    pub fn value_row(&self, point: usize) -> &[f64] {
        &self.values[point * self.functions..(point + 1) * self.functions]
    }

    /// Rows of the reference derivatives at a point.
    pub fn derivative_rows(&self, point: usize) -> (&[f64], &[f64]) {
        let range = point * self.functions..(point + 1) * self.functions;
        (&self.by_x[range.clone()], &self.by_y[range])
    }

    /// Row of pressure values at a point.
    pub fn pressure_row(&self, point: usize) -> &[f64] {
        &self.pressure[point * self.pressure_functions..(point + 1) * self.pressure_functions]
    }
}

/// Functions at the points of each of the three edges, with the edge's direction.
#[derive(Clone, Debug)]
pub struct EdgeTable {
    /// One table an edge; weights are those of the parameter `0..=1` along the edge.
    pub edges: [Table; 3],
    /// Parameter along the edge of each point, shape `(points,)`.
    pub along: Vec<f64>,
}

/// Direction of the reference edges from vertex `e` to `e + 1`.
pub const EDGE_DIRECTION: [[f64; 2]; 3] = [[1.0, 0.0], [-1.0, 1.0], [0.0, -1.0]];
const EDGE_START: [[f64; 2]; 3] = [[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]];

impl EdgeTable {
    /// Rule of degree 4k - 1 on the edges: total-pressure terms have degree 3k, curved edges a little more.
    pub fn new(order: usize) -> Self {
        let rule = quadrature::edge(4 * order - 1);
        let edges = std::array::from_fn(|e| {
            let places: Vec<([f64; 2], f64)> = rule
                .iter()
                .map(|&(s, w)| {
                    let ([x, y], [dx, dy]) = (EDGE_START[e], EDGE_DIRECTION[e]);
                    ([x + s * dx, y + s * dy], w)
                })
                .collect();
            Table::at(order, &places)
        });
        Self {
            edges,
            along: rule.iter().map(|r| r.0).collect(),
        }
    }
}
