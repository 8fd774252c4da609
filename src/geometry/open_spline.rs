//! Open cubic splines through points: chord-length knots, not-a-knot ends.
//!
//! Source: de Boor, A Practical Guide to Splines (Springer, 2001), chapter IV: second-derivative form, with the
//! not-a-knot condition (one cubic over the first two and over the last two spans).

use super::Segment;
use crate::base::Vec2;

/// Spline through the points (at least two; two give the line, three the parabola).
pub(super) fn through(points: Vec<Vec2>) -> Segment {
    let n = points.len();
    let mut knots = vec![0.0; n];
    for i in 1..n {
        knots[i] = knots[i - 1] + points[i].distance(points[i - 1]);
    }
    let total = knots[n - 1];
    for (i, knot) in knots.iter_mut().enumerate() {
        *knot = if total > 0.0 {
            *knot / total
        } else {
            i as f64 / (n - 1) as f64
        };
    }
    let seconds = second_derivatives(&knots, &points);
    Segment::Spline {
        knots,
        points,
        seconds,
    }
}

fn second_derivatives(knots: &[f64], points: &[Vec2]) -> Vec<Vec2> {
    let n = points.len();
    if n < 3 {
        return vec![Vec2::ZERO; n];
    }
    let h: Vec<f64> = knots.windows(2).map(|k| k[1] - k[0]).collect();
    let slope: Vec<Vec2> = (0..n - 1)
        .map(|i| (points[i + 1] - points[i]) / h[i])
        .collect();
    if n == 3 {
        return vec![(slope[1] - slope[0]) * (2.0 / (h[0] + h[1])); 3];
    }
    let mut matrix = nalgebra::DMatrix::<f64>::zeros(n, n);
    let mut right = nalgebra::DMatrix::<f64>::zeros(n, 2);
    for i in 1..n - 1 {
        matrix[(i, i - 1)] = h[i - 1];
        matrix[(i, i)] = 2.0 * (h[i - 1] + h[i]);
        matrix[(i, i + 1)] = h[i];
        let bend = (slope[i] - slope[i - 1]) * 6.0;
        right[(i, 0)] = bend.x;
        right[(i, 1)] = bend.y;
    }
    for (row, a) in [(0, 0), (n - 1, n - 3)] {
        matrix[(row, a)] = h[a + 1];
        matrix[(row, a + 1)] = -(h[a] + h[a + 1]);
        matrix[(row, a + 2)] = h[a];
    }
    match matrix.lu().solve(&right) {
        Some(m) => (0..n)
            .map(|i| Vec2 {
                x: m[(i, 0)],
                y: m[(i, 1)],
            })
            .collect(),
        None => vec![Vec2::ZERO; n],
    }
}

/// Value, first and second derivative at `t`.
pub(super) fn evaluate(knots: &[f64], points: &[Vec2], seconds: &[Vec2], t: f64) -> [Vec2; 3] {
    let last = knots.len() - 2;
    let i = knots
        .partition_point(|&k| k <= t)
        .saturating_sub(1)
        .min(last);
    let h = knots[i + 1] - knots[i];
    let (a, b) = ((knots[i + 1] - t) / h, (t - knots[i]) / h);
    let (p, q, m, n) = (points[i], points[i + 1], seconds[i], seconds[i + 1]);
    [
        p * a + q * b + (m * (a * a * a - a) + n * (b * b * b - b)) * (h * h / 6.0),
        (q - p) / h + (n * (3.0 * b * b - 1.0) - m * (3.0 * a * a - 1.0)) * (h / 6.0),
        m * a + n * b,
    ]
}
