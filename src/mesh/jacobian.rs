//! The determinant of a cell's map, bounded over the whole cell: the proof that no curved cell is inside out.
//!
//! The determinant of a map of order `k` is a polynomial of degree `2 (k - 1)`, and a polynomial lies between its
//! least and its greatest Bernstein coefficient (Johnen, Remacle and Geuzaine, J. Comput. Phys. 233, 359, 2013).
//! Where the coefficients leave the sign open, the cell is cut in four and each part is looked at again.

use super::CurvedMesh;
use super::reference::Reference;

/// Cuts in four before an undecided cell counts as inverted.
const MOST_CUTS: usize = 3;

/// Bases for the proof of positive determinants.
pub struct JacobianProof {
    basis: Reference,
    determinant: Reference,
}

type Corners = [[f64; 2]; 3];

const WHOLE: Corners = [[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]];

impl JacobianProof {
    /// For geometry of an order.
    pub fn new(order: usize) -> Self {
        Self {
            basis: Reference::new(order),
            determinant: Reference::new((2 * (order - 1)).max(1)),
        }
    }

    /// Nodal values and Bernstein coefficients of the determinant on a part of the reference triangle.
    fn values(&self, f: &dyn Fn([f64; 2]) -> f64, part: Corners) -> (Vec<f64>, Vec<f64>) {
        let [a, b, c] = part;
        let place = |[x, y]: [f64; 2]| {
            let z = 1.0 - x - y;
            [
                z * a[0] + x * b[0] + y * c[0],
                z * a[1] + x * b[1] + y * c[1],
            ]
        };
        let nodes = self.determinant.nodes.iter();
        let nodal: Vec<f64> = nodes.map(|&n| f(place(n))).collect();
        let coefficients = self.determinant.bernstein_coefficients(&nodal);
        (nodal, coefficients)
    }

    fn positive(&self, f: &dyn Fn([f64; 2]) -> f64, part: Corners, cuts: usize) -> bool {
        let (nodal, coefficients) = self.values(f, part);
        if nodal.iter().any(|&v| v.is_nan() || v <= 0.0) {
            return false;
        }
        coefficients.iter().all(|&v| v > 0.0)
            || cuts > 0
                && quarters(part)
                    .into_iter()
                    .all(|quarter| self.positive(f, quarter, cuts - 1))
    }

    fn bounds(&self, f: &dyn Fn([f64; 2]) -> f64, part: Corners, cuts: usize) -> [f64; 2] {
        let (nodal, coefficients) = self.values(f, part);
        let [least, most] = range(&coefficients);
        let undecided = least <= 0.0 && range(&nodal)[0] > 0.0;
        if undecided && cuts > 0 {
            let parts = quarters(part).map(|quarter| self.bounds(f, quarter, cuts - 1));
            return [
                range(&parts.map(|p| p[0]))[0],
                range(&parts.map(|p| p[1]))[1],
            ];
        }
        [least, most]
    }
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

fn quarters([a, b, c]: Corners) -> [Corners; 4] {
    let middle = |p: [f64; 2], q: [f64; 2]| [0.5 * (p[0] + q[0]), 0.5 * (p[1] + q[1])];
    let (ab, bc, ca) = (middle(a, b), middle(b, c), middle(c, a));
    [[a, ab, ca], [ab, b, bc], [ca, bc, c], [ab, bc, ca]]
}

impl CurvedMesh {
    /// Determinant of a triangle's map at a reference point, m^2: twice the area of a straight cell.
    fn determinant<'a>(
        &'a self,
        triangle: usize,
        proof: &'a JacobianProof,
    ) -> impl Fn([f64; 2]) -> f64 + 'a {
        let element = self.element(triangle);
        move |at| {
            let mut f = [0.0; 4];
            for (g, &n) in proof.basis.gradients(at).iter().zip(element) {
                let x = self.nodes[n as usize];
                f[0] += x.x * g[0];
                f[1] += x.x * g[1];
                f[2] += x.y * g[0];
                f[3] += x.y * g[1];
            }
            f[0] * f[3] - f[1] * f[2]
        }
    }

    /// Whether the map of a triangle is proved to have a positive determinant everywhere.
    pub fn is_valid(&self, triangle: usize, proof: &JacobianProof) -> bool {
        proof.positive(&self.determinant(triangle, proof), WHOLE, MOST_CUTS)
    }

    /// Proved bounds `[lower, upper]` of the determinant over a triangle, m^2: it lies between them at every
    /// point, not at sampled ones only. The lower is positive exactly for cells that [`Self::is_valid`] accepts.
    pub fn jacobian_bounds(&self, triangle: usize, proof: &JacobianProof) -> [f64; 2] {
        proof.bounds(&self.determinant(triangle, proof), WHOLE, MOST_CUTS)
    }

    /// First triangle that is not proved valid.
    pub fn first_invalid(&self) -> Option<usize> {
        let proof = JacobianProof::new(self.order);
        (0..self.mesh.triangles.len()).find(|&t| !self.is_valid(t, &proof))
    }

    /// Area of a triangle, m^2, exact: the integral of a polynomial over the reference triangle is half the mean
    /// of its Bernstein coefficients (Farouki, Comput. Aided Geom. Des. 29, 379, 2012; from memory).
    pub fn cell_area(&self, triangle: usize, proof: &JacobianProof) -> f64 {
        let (_, c) = proof.values(&self.determinant(triangle, proof), WHOLE);
        0.5 * c.iter().sum::<f64>() / c.len() as f64
    }

    /// Area of the whole mesh, solids included, m^2.
    pub fn area(&self) -> f64 {
        let proof = JacobianProof::new(self.order);
        let cells = 0..self.mesh.triangles.len();
        cells.map(|t| self.cell_area(t, &proof)).sum()
    }
}
