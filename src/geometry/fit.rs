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

/// Largest distance between the two curves, m: of the listed points from the spline, and of the spline from the
/// polygon through the listed points (a square listed by its corners has few points to miss).
fn deviation(spline: &ClosedSpline, points: &[Vec2]) -> f64 {
    let n = spline.len() * 24;
    let dense: Vec<Vec2> = (0..n).map(|i| spline.point(i as f64 / n as f64)).collect();
    from_polygon(points, &dense).max(from_polygon(&dense, points))
}

/// Largest distance of places from a closed polygon, m.
fn from_polygon(places: &[Vec2], polygon: &[Vec2]) -> f64 {
    let n = polygon.len();
    let nearest = |p: Vec2| {
        (0..n)
            .map(|i| distance_to_chord(p, polygon[i], polygon[(i + 1) % n]))
            .fold(f64::INFINITY, f64::min)
    };
    places.iter().map(|&p| nearest(p)).fold(0.0, f64::max)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::base::vec2;

    /// A unit square by its four corners: a spline with few points leaves its sides, and that must be told.
    #[test]
    fn a_square_of_four_points_has_its_deviation_told() {
        let corners = [
            vec2(0.0, 0.0),
            vec2(1.0, 0.0),
            vec2(1.0, 1.0),
            vec2(0.0, 1.0),
        ];
        let fitted = closed_spline(&corners, Some(1e-3));
        assert!(
            fitted.deviation_m > 1e-3 && fitted.spline.len() == 120,
            "{fitted:?}"
        );
        assert!(deviation(&ClosedSpline::new(even(&corners, 8)), &corners) > 0.02);
    }

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
            fitted.deviation_m < 2e-6 && fitted.spline.len() <= 56,
            "{} {}",
            fitted.deviation_m,
            fitted.spline.len()
        );
    }
}
