//! The H1 metric along a contour: mass plus length^2 times stiffness, for one coordinate of its control points.

use super::{ClosedSpline, Curve};
use nalgebra::DMatrix;

/// M = 1/P integral of (b_i b_j + length^2 b_i' b_j') ds with b the spline's weights, ' along the arc and P the
/// perimeter, shape `(n, n)`: dimensionless, symmetric positive definite.
pub fn metric(contour: &ClosedSpline, length_m: f64) -> DMatrix<f64> {
    let n = contour.len();
    let perimeter = contour.perimeter();
    let mut matrix = DMatrix::zeros(n, n);
    for (t, w) in contour.quadrature(1) {
        let speed = contour.derivative(t).norm();
        let (b, slope) = (contour.weights(t), contour.derivative_weights(t));
        let mass = w * speed / perimeter;
        let stiffness = w * length_m * length_m / (speed * perimeter);
        for i in 0..n {
            for j in 0..n {
                matrix[(i, j)] += mass * b[i] * b[j] + stiffness * slope[i] * slope[j];
            }
        }
    }
    matrix
}
