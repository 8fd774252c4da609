//! Shape limits along contours: values with exact gradients by the control points.
//!
//! A limit along a contour is sampled; each sample is one inequality. Where a limit is close to its bound the
//! samples are dense enough that it slips by about 0.2 % between them.

pub mod curvature;
pub mod gap;
pub mod thickness;

use crate::base::Vec2;

/// Samples a span. Ten let a radius slip by 1 % between samples, twenty by 0.2 %.
pub const PER_SPAN: usize = 20;

/// A limited quantity at one place of a contour.
#[derive(Clone, Debug, PartialEq)]
pub struct Sample {
    /// Curve parameter.
    pub t: f64,
    /// Place, m.
    pub place: Vec2,
    /// Value (m for lengths, 1/m for curvature).
    pub value: f64,
    /// Derivative by the control points of the contour, shape `(n,)`.
    pub gradient: Vec<Vec2>,
    /// Derivative by the control points of another insert that takes part: (its index, shape `(m,)`).
    pub partner: Option<(usize, Vec<Vec2>)>,
}

/// The sampled parameters of a contour of `n` control points.
pub fn parameters(n: usize) -> impl Iterator<Item = f64> {
    let count = n * PER_SPAN;
    (0..count).map(move |i| i as f64 / count as f64)
}

/// Smallest value of a function along a contour: the smallest sample, refined between its neighbours. Returns
/// (t, value).
pub fn smallest(n: usize, f: impl Fn(f64) -> f64) -> (f64, f64) {
    let mut best = (0.0, f64::INFINITY);
    for t in parameters(n) {
        let value = f(t);
        if value < best.1 {
            best = (t, value);
        }
    }
    let t = super::contour::minimise(&f, best.0, 1.0 / (n * PER_SPAN) as f64);
    let refined = f(t);
    if refined < best.1 {
        (t.rem_euclid(1.0), refined)
    } else {
        best
    }
}

#[cfg(test)]
pub(super) mod tests {
    use crate::base::{Vec2, vec2};
    use crate::geometry::ClosedSpline;

    /// An uneven contour.
    pub fn pebble(centre: Vec2) -> ClosedSpline {
        ClosedSpline::new(
            (0..10)
                .map(|i| {
                    let a = 2.0 * std::f64::consts::PI * i as f64 / 10.0;
                    centre
                        + vec2(
                            1.5 * a.cos() + 0.1 * (2.0 * a).sin(),
                            0.7 * a.sin() + 0.08 * (3.0 * a).cos(),
                        )
                })
                .collect(),
        )
    }

    /// Largest difference between a gradient and central differences, relative to its largest entry.
    pub fn difference(
        base: &ClosedSpline,
        f: impl Fn(&ClosedSpline) -> f64,
        gradient: &[Vec2],
    ) -> f64 {
        let h = 1e-6;
        let largest = gradient.iter().map(|g| g.norm()).fold(0.0, f64::max);
        let mut worst: f64 = 0.0;
        for j in 0..base.len() {
            for (axis, g) in [(vec2(h, 0.0), gradient[j].x), (vec2(0.0, h), gradient[j].y)] {
                let moved = |s: f64| {
                    let mut c = base.controls().to_vec();
                    c[j] += axis * s;
                    f(&ClosedSpline::new(c))
                };
                worst = worst.max(((moved(1.0) - moved(-1.0)) / (2.0 * h) - g).abs() / largest);
            }
        }
        worst
    }
}
