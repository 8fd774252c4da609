//! Closed periodic cubic splines through their control points.
//!
//! Knots are evenly spaced in the parameter, so that every point of the curve is linear in the control
//! points (shape derivatives rest on this). Source: de Boor, A Practical Guide to Splines (Springer, 2001),
//! chapters IX and XII: cubic B-splines on uniform knots, interpolation by a circulant system.

use super::Curve;
use crate::base::Vec2;

/// Periodic cubic spline that passes through `controls()[i]` at `t = i / n`.
#[derive(Clone, Debug, PartialEq)]
pub struct ClosedSpline {
    controls: Vec<Vec2>,
    /// B-spline coefficients of the interpolant, m.
    coefficients: Vec<Vec2>,
    /// First column of the inverse of the circulant interpolation matrix.
    cardinal: Vec<f64>,
}

/// Fewest control points of a contour: below, a periodic cubic has no room to be a contour.
pub const FEWEST_CONTROLS: usize = 4;

impl ClosedSpline {
    /// The spline through the control points (shape `(n, 2)`, m). The points are not checked here:
    /// see the geometry checks for finite values, coincidence and crossings.
    pub fn new(controls: Vec<Vec2>) -> Self {
        let n = controls.len();
        let cardinal = circulant_inverse(n);
        let mut coefficients = vec![Vec2::ZERO; n];
        for (i, c) in coefficients.iter_mut().enumerate() {
            for (j, &p) in controls.iter().enumerate() {
                *c += p * cardinal[(i + n - j) % n];
            }
        }
        Self {
            controls,
            coefficients,
            cardinal,
        }
    }

    /// Control points, m: on the curve, counter-clockwise for a contour.
    pub fn controls(&self) -> &[Vec2] {
        &self.controls
    }

    /// Number of control points.
    pub fn len(&self) -> usize {
        self.controls.len()
    }

    /// Whether there are no control points.
    pub fn is_empty(&self) -> bool {
        self.controls.is_empty()
    }

    /// Weights of all control points in `point(t)`: `point(t) = sum_j weights[j] controls[j]`, shape `(n,)`.
    pub fn weights(&self, t: f64) -> Vec<f64> {
        self.spread(t, basis)
    }

    /// Weights of all control points in `derivative(t)`, shape `(n,)`.
    pub fn derivative_weights(&self, t: f64) -> Vec<f64> {
        let n = self.len() as f64;
        self.spread(t, |u| basis_slope(u).map(|b| b * n))
    }

    /// Weights of all control points in `second_derivative(t)`, shape `(n,)`.
    pub fn second_derivative_weights(&self, t: f64) -> Vec<f64> {
        let n = self.len() as f64;
        self.spread(t, |u| basis_bend(u).map(|b| b * n * n))
    }

    fn span(&self, t: f64) -> (usize, f64) {
        let n = self.len();
        let s = t.rem_euclid(1.0) * n as f64;
        let i = (s.floor() as usize).min(n - 1);
        (i, s - i as f64)
    }

    fn spread(&self, t: f64, basis: impl Fn(f64) -> [f64; 4]) -> Vec<f64> {
        let n = self.len();
        let (i, u) = self.span(t);
        let local = basis(u);
        let mut weights = vec![0.0; n];
        for (m, b) in local.into_iter().enumerate() {
            let row = (i + m + n - 1) % n;
            for (j, w) in weights.iter_mut().enumerate() {
                *w += b * self.cardinal[(row + n - j) % n];
            }
        }
        weights
    }

    fn evaluate(&self, t: f64, basis: impl Fn(f64) -> [f64; 4]) -> Vec2 {
        let n = self.len();
        let (i, u) = self.span(t);
        let local = basis(u);
        let mut sum = Vec2::ZERO;
        for (m, b) in local.into_iter().enumerate() {
            sum += self.coefficients[(i + m + n - 1) % n] * b;
        }
        sum
    }
}

impl Curve for ClosedSpline {
    fn point(&self, t: f64) -> Vec2 {
        self.evaluate(t, basis)
    }
    fn derivative(&self, t: f64) -> Vec2 {
        self.evaluate(t, basis_slope) * self.len() as f64
    }
    fn second_derivative(&self, t: f64) -> Vec2 {
        let n = self.len() as f64;
        self.evaluate(t, basis_bend) * (n * n)
    }
}

/// Values of the four uniform cubic B-splines that live on a span, at `u` in `0..=1`.
fn basis(u: f64) -> [f64; 4] {
    let v = 1.0 - u;
    [
        v * v * v / 6.0,
        (3.0 * u * u * u - 6.0 * u * u + 4.0) / 6.0,
        (3.0 * v * v * v - 6.0 * v * v + 4.0) / 6.0,
        u * u * u / 6.0,
    ]
}

/// Their derivatives by `u`.
fn basis_slope(u: f64) -> [f64; 4] {
    let v = 1.0 - u;
    [
        -v * v / 2.0,
        (3.0 * u * u - 4.0 * u) / 2.0,
        (4.0 * v - 3.0 * v * v) / 2.0,
        u * u / 2.0,
    ]
}

/// Their second derivatives by `u`.
fn basis_bend(u: f64) -> [f64; 4] {
    let v = 1.0 - u;
    [v, 3.0 * u - 2.0, 3.0 * v - 2.0, u]
}

/// First column of the inverse of the circulant matrix with 4/6 on the diagonal and 1/6 beside it.
///
/// The symbol is `(4 + 2 cos(2 pi k/n))/6`, at least 1/3, so the inverse exists for every `n`.
fn circulant_inverse(n: usize) -> Vec<f64> {
    let step = 2.0 * std::f64::consts::PI / n as f64;
    (0..n)
        .map(|i| {
            (0..n)
                .map(|k| {
                    (step * ((k * i) % n) as f64).cos()
                        / ((4.0 + 2.0 * (step * k as f64).cos()) / 6.0)
                })
                .sum::<f64>()
                / n as f64
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::base::vec2;

    fn circle(n: usize) -> ClosedSpline {
        ClosedSpline::new(
            (0..n)
                .map(|i| Vec2::from_angle(2.0 * std::f64::consts::PI * i as f64 / n as f64))
                .collect(),
        )
    }

    #[test]
    fn passes_through_its_controls() {
        let spline = ClosedSpline::new(vec![
            vec2(0., 0.),
            vec2(2., 0.3),
            vec2(2.2, 1.),
            vec2(1., 1.5),
            vec2(-0.3, 1.),
        ]);
        for (i, &p) in spline.controls().iter().enumerate() {
            assert!(spline.point(i as f64 / 5.0).distance(p) < 1e-14);
        }
    }

    #[test]
    fn circle_error_falls_at_fourth_order() {
        let error = |n: usize| {
            (0..999)
                .map(|i| (circle(n).point(i as f64 / 999.0).norm() - 1.0).abs())
                .fold(0.0, f64::max)
        };
        let order = (error(16) / error(32)).log2();
        assert!((order - 4.0).abs() < 0.2, "order {order}");
    }

    #[test]
    fn weights_reproduce_point_and_derivatives() {
        let spline = circle(7);
        let sum = |w: Vec<f64>| {
            w.iter()
                .zip(spline.controls())
                .fold(Vec2::ZERO, |s, (&w, &p)| s + p * w)
        };
        for t in [0.0, 0.13, 0.5, 0.999] {
            assert!(sum(spline.weights(t)).distance(spline.point(t)) < 1e-14);
            assert!(sum(spline.derivative_weights(t)).distance(spline.derivative(t)) < 1e-13);
            assert!(
                sum(spline.second_derivative_weights(t)).distance(spline.second_derivative(t))
                    < 1e-12
            );
            let h = 1e-6;
            let slope = (spline.point(t + h) - spline.point(t - h)) / (2.0 * h);
            assert!(slope.distance(spline.derivative(t)) < 1e-8);
        }
    }
}
