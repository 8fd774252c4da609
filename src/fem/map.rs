//! The curved map from the reference triangle at one point.

use super::Table;
use crate::base::Vec2;
use crate::mesh::CurvedMesh;

/// Place, Jacobian matrix, its determinant and its inverse at one point.
#[derive(Clone, Copy, Debug)]
pub struct PointMap {
    /// Place, m.
    pub place: Vec2,
    /// Jacobian matrix F = dX/dxi, row-major, m.
    pub jacobian: [[f64; 2]; 2],
    /// det F, m^2.
    pub determinant: f64,
    /// F^-1, 1/m.
    pub inverse: [[f64; 2]; 2],
}

impl PointMap {
    /// The map of a triangle at one point of a table (of the geometry's order).
    pub fn new(mesh: &CurvedMesh, triangle: usize, table: &Table, point: usize) -> Self {
        let (by_x, by_y) = table.derivative_rows(point);
        let values = table.value_row(point);
        let mut place = Vec2::ZERO;
        let mut f = [[0.0; 2]; 2];
        for (i, &node) in mesh.element(triangle).iter().enumerate() {
            let x = mesh.nodes[node as usize];
            place += x * values[i];
            f[0][0] += x.x * by_x[i];
            f[0][1] += x.x * by_y[i];
            f[1][0] += x.y * by_x[i];
            f[1][1] += x.y * by_y[i];
        }
        let determinant = f[0][0] * f[1][1] - f[0][1] * f[1][0];
        let inverse = [
            [f[1][1] / determinant, -f[0][1] / determinant],
            [-f[1][0] / determinant, f[0][0] / determinant],
        ];
        Self {
            place,
            jacobian: f,
            determinant,
            inverse,
        }
    }

    /// Physical gradient from reference derivatives: F^-T (by_x, by_y).
    pub fn gradient(&self, by_x: f64, by_y: f64) -> [f64; 2] {
        [
            self.inverse[0][0] * by_x + self.inverse[1][0] * by_y,
            self.inverse[0][1] * by_x + self.inverse[1][1] * by_y,
        ]
    }

    /// Tangent dX/ds along a reference direction, m.
    pub fn along(&self, direction: [f64; 2]) -> Vec2 {
        let f = &self.jacobian;
        Vec2 {
            x: f[0][0] * direction[0] + f[0][1] * direction[1],
            y: f[1][0] * direction[0] + f[1][1] * direction[1],
        }
    }
}
