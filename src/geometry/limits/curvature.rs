//! Curvature along a contour and its derivative by the control points.

use super::{Sample, parameters, smallest};
use crate::geometry::{ClosedSpline, Curve};

/// Signed curvature kappa at `t` with gradient: with d = dx/dt, e = d2x/dt2,
///   kappa = d x e / |d|^3,   dkappa = (dd x e + d x de)/|d|^3 - 3 kappa d.dd/|d|^2
/// (do Carmo, Differential Geometry of Curves and Surfaces, section 1-5).
pub fn at(contour: &ClosedSpline, t: f64) -> Sample {
    let (d, e) = (contour.derivative(t), contour.second_derivative(t));
    let speed = d.norm();
    let value = d.cross(e) / speed.powi(3);
    let first = contour.derivative_weights(t);
    let second = contour.second_derivative_weights(t);
    let gradient = first
        .iter()
        .zip(&second)
        .map(|(&a, &b)| {
            (e.right() * a + d.left() * b) / speed.powi(3) - d * (3.0 * value * a / (speed * speed))
        })
        .collect();
    Sample {
        t,
        place: contour.point(t),
        value,
        gradient,
        partner: None,
    }
}

/// Samples whose |kappa| exceeds `from`, 1/m.
pub fn sharper_than(contour: &ClosedSpline, from: f64) -> Vec<Sample> {
    parameters(contour.len())
        .filter(|&t| contour.curvature(t).abs() > from)
        .map(|t| at(contour, t))
        .collect()
}

/// Smallest radius of curvature, convex or concave: (t, radius in m).
pub fn smallest_radius(contour: &ClosedSpline) -> (f64, f64) {
    let (t, value) = smallest(contour.len(), |t| -contour.curvature(t).abs());
    (t, -1.0 / value)
}

#[cfg(test)]
mod tests {
    use super::super::tests::{difference, pebble};
    use super::*;
    use crate::base::{Vec2, vec2};

    #[test]
    fn gradient_agrees_with_differences_and_a_circle_has_its_radius() {
        let contour = pebble(Vec2::ZERO);
        for t in [0.03, 0.31, 0.77] {
            let sample = at(&contour, t);
            assert!(difference(&contour, |c| c.curvature(t), &sample.gradient) < 1e-6);
            let flawed: Vec<Vec2> = sample.gradient.iter().map(|&g| g * 1.001).collect();
            assert!(difference(&contour, |c| c.curvature(t), &flawed) > 5e-4);
        }
        let circle = ClosedSpline::new(
            (0..48)
                .map(|i| {
                    vec2(1.0, 2.0) + Vec2::from_angle(i as f64 * std::f64::consts::PI / 24.0) * 0.3
                })
                .collect(),
        );
        assert!((smallest_radius(&circle).1 / 0.3 - 1.0).abs() < 2e-3);
    }
}
