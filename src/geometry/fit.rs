//! A closed spline through an imported contour, with its deviation.

use super::contour::distance_to_chord;
use super::starters::even;
use super::{ClosedSpline, Curve};
use crate::base::Vec2;

/// Deviation aimed at, in parts of the contour's size: finer than most shops hold.
const TOLERANCE: f64 = 5e-4;
/// Numbers of control points tried.
const COUNTS: [usize; 10] = [8, 12, 16, 20, 24, 32, 40, 56, 80, 120];

/// A fitted spline.
#[derive(Clone, Debug, PartialEq)]
pub struct Fitted {
    /// The spline.
    pub spline: ClosedSpline,
    /// Largest distance of a listed point from it, m.
    pub deviation_m: f64,
}

/// The spline with the fewest control points whose deviation meets a tolerance (m; a two-thousandth of the size
/// when none is given), or the closest of those tried. The points run counter-clockwise round the contour.
pub fn closed_spline(points_m: &[Vec2], tolerance_m: Option<f64>) -> Fitted {
    let size = points_m
        .iter()
        .fold(0.0, |s: f64, p| s.max(p.distance(points_m[0])));
    let tolerance = tolerance_m.unwrap_or(TOLERANCE * size);
    let mut best: Option<Fitted> = None;
    for count in COUNTS {
        let spline = ClosedSpline::new(even(points_m, count));
        let deviation_m = deviation(&spline, points_m);
        if best.as_ref().is_none_or(|b| deviation_m < b.deviation_m) {
            best = Some(Fitted {
                spline,
                deviation_m,
            });
        }
        if deviation_m <= tolerance {
            break;
        }
    }
    // The loop runs at least once, so there always is a best.
    best.unwrap_or_else(|| Fitted {
        spline: ClosedSpline::new(points_m.to_vec()),
        deviation_m: 0.0,
    })
}

/// Largest distance of the points from a dense polygon of the spline, m.
fn deviation(spline: &ClosedSpline, points: &[Vec2]) -> f64 {
    let n = spline.len() * 24;
    let dense: Vec<Vec2> = (0..n).map(|i| spline.point(i as f64 / n as f64)).collect();
    points
        .iter()
        .map(|&p| {
            (0..n)
                .map(|i| distance_to_chord(p, dense[i], dense[(i + 1) % n]))
                .fold(f64::INFINITY, f64::min)
        })
        .fold(0.0, f64::max)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::base::vec2;

    #[test]
    fn an_ellipse_is_fitted_within_the_tolerance() {
        let points: Vec<Vec2> = (0..500)
            .map(|i| {
                let a = 2.0 * std::f64::consts::PI * i as f64 / 500.0;
                vec2(3e-3 * a.cos(), 1e-3 * a.sin())
            })
            .collect();
        let fitted = closed_spline(&points, Some(2e-6));
        assert!(
            fitted.deviation_m < 2e-6 && fitted.spline.len() <= 40,
            "{} {}",
            fitted.deviation_m,
            fitted.spline.len()
        );
    }
}
