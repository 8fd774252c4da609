//! The determinant of a cell's map, bounded over the whole cell: the proof that no curved cell is inside out.
//!
//! The determinant of a map of order `k` is a polynomial of degree `2 (k - 1)`, and a polynomial lies between its
//! least and its greatest Bernstein coefficient (Johnen, Remacle and Geuzaine, J. Comput. Phys. 233, 359, 2013).
//! Where the coefficients leave the sign open, the cell is cut in four and each part is looked at again.

use super::CurvedMesh;
use super::reference::Reference;
use crate::base::Vec2;

/// Cuts in four before an undecided cell counts as inverted.
const MOST_CUTS: usize = 3;

/// Bases for the proof of positive determinants.
pub struct JacobianProof {
    basis: Reference,
    determinant: Reference,
    /// Gradients of the map's basis at the determinant's nodes.
    at_nodes: Vec<Vec<[f64; 2]>>,
}

type Corners = [[f64; 2]; 3];

impl JacobianProof {
    /// For geometry of an order.
    pub fn new(order: usize) -> Self {
        let basis = Reference::new(order);
        let determinant = Reference::new((2 * (order - 1)).max(1));
        let nodes = determinant.nodes.iter();
        Self {
            at_nodes: nodes.map(|&at| basis.gradients(at)).collect(),
            basis,
            determinant,
        }
    }

    /// Nodal values and Bernstein coefficients of a cell's determinant on a part of the reference triangle; on the
    /// whole of it where there is none.
    fn values(&self, cell: &[Vec2], part: Option<Corners>) -> (Vec<f64>, Vec<f64>) {
        let nodal: Vec<f64> = if let Some([a, b, c]) = part {
            let at = |&[x, y]: &[f64; 2]| {
                let z = 1.0 - x - y;
                [
                    z * a[0] + x * b[0] + y * c[0],
                    z * a[1] + x * b[1] + y * c[1],
                ]
            };
            let nodes = self.determinant.nodes.iter();
            nodes
                .map(|n| determinant(cell, &self.basis.gradients(at(n))))
                .collect()
        } else {
            let gradients = self.at_nodes.iter();
            gradients.map(|g| determinant(cell, g)).collect()
        };
        let coefficients = self.determinant.bernstein_coefficients(&nodal);
        (nodal, coefficients)
    }

    fn positive(&self, cell: &[Vec2], part: Option<Corners>, cuts: usize) -> bool {
        let (nodal, coefficients) = self.values(cell, part);
        if nodal.iter().any(|&v| v.is_nan() || v <= 0.0) {
            return false;
        }
        coefficients.iter().all(|&v| v > 0.0)
            || cuts > 0
                && quarters(part)
                    .into_iter()
                    .all(|quarter| self.positive(cell, Some(quarter), cuts - 1))
    }

    fn bounds(&self, cell: &[Vec2], part: Option<Corners>, cuts: usize) -> [f64; 2] {
        let (nodal, coefficients) = self.values(cell, part);
        let [least, most] = range(&coefficients);
        let undecided = least <= 0.0 && range(&nodal)[0] > 0.0;
        if undecided && cuts > 0 {
            let parts = quarters(part).map(|quarter| self.bounds(cell, Some(quarter), cuts - 1));
            return [
                range(&parts.map(|p| p[0]))[0],
                range(&parts.map(|p| p[1]))[1],
            ];
        }
        [least, most]
    }
}

/// Determinant of a cell's map, m^2, from its nodes and the gradients of the basis: twice the area of a straight cell.
fn determinant(cell: &[Vec2], gradients: &[[f64; 2]]) -> f64 {
    let mut f = [0.0; 4];
    for (g, x) in gradients.iter().zip(cell) {
        f[0] += x.x * g[0];
        f[1] += x.x * g[1];
        f[2] += x.y * g[0];
        f[3] += x.y * g[1];
    }
    f[0] * f[3] - f[1] * f[2]
}

/// Least and greatest; NaN where one is NaN, so that no comparison takes it for sound.
fn range(values: &[f64]) -> [f64; 2] {
    if values.iter().any(|v| v.is_nan()) {
        return [f64::NAN; 2];
    }
    [
        values.iter().copied().fold(f64::INFINITY, f64::min),
        values.iter().copied().fold(f64::NEG_INFINITY, f64::max),
    ]
}

fn quarters(part: Option<Corners>) -> [Corners; 4] {
    let [a, b, c] = part.unwrap_or([[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]]);
    let middle = |p: [f64; 2], q: [f64; 2]| [0.5 * (p[0] + q[0]), 0.5 * (p[1] + q[1])];
    let (ab, bc, ca) = (middle(a, b), middle(b, c), middle(c, a));
    [[a, ab, ca], [ab, b, bc], [ca, bc, c], [ab, bc, ca]]
}

impl CurvedMesh {
    /// Nodes of a triangle, m.
    fn cell(&self, triangle: usize) -> Vec<Vec2> {
        let element = self.element(triangle).iter();
        element.map(|&n| self.nodes[n as usize]).collect()
    }

    /// Whether the map of a triangle is proved to have a positive determinant everywhere.
    pub fn is_valid(&self, triangle: usize, proof: &JacobianProof) -> bool {
        proof.positive(&self.cell(triangle), None, MOST_CUTS)
    }

    /// Proved bounds `[lower, upper]` of the determinant over a triangle, m^2: it lies between them at every
    /// point, not at sampled ones only. The lower is positive exactly for cells that [`Self::is_valid`] accepts.
    pub fn jacobian_bounds(&self, triangle: usize, proof: &JacobianProof) -> [f64; 2] {
        proof.bounds(&self.cell(triangle), None, MOST_CUTS)
    }

    /// First triangle that is not proved valid.
    pub fn first_invalid(&self) -> Option<usize> {
        let proof = JacobianProof::new(self.order);
        (0..self.mesh.triangles.len()).find(|&t| !self.is_valid(t, &proof))
    }

    /// Area of a triangle, m^2, exact: the integral of a polynomial over the reference triangle is half the mean
    /// of its Bernstein coefficients (Farouki, Comput. Aided Geom. Des. 29, 379, 2012; from memory).
    pub fn cell_area(&self, triangle: usize, proof: &JacobianProof) -> f64 {
        let (_, c) = proof.values(&self.cell(triangle), None);
        0.5 * c.iter().sum::<f64>() / c.len() as f64
    }

    /// Area of the whole mesh, solids included, m^2.
    pub fn area(&self) -> f64 {
        let proof = JacobianProof::new(self.order);
        let cells = 0..self.mesh.triangles.len();
        cells.map(|t| self.cell_area(t, &proof)).sum()
    }
}
