//! Parametric curves on `0..=1`, and the pieces a duct outline is made of.

use crate::base::Vec2;
use serde::{Deserialize, Serialize};

/// A smooth parametric curve, parameter `t` in `0..=1` (closed curves have period one).
pub trait Curve: Send + Sync {
    /// Point at `t`, m.
    fn point(&self, t: f64) -> Vec2;
    /// Derivative by `t`, m.
    fn derivative(&self, t: f64) -> Vec2;
    /// Second derivative by `t`, m.
    fn second_derivative(&self, t: f64) -> Vec2;
    /// Signed curvature, 1/m: positive where the curve turns left.
    fn curvature(&self, t: f64) -> f64 {
        let d = self.derivative(t);
        d.cross(self.second_derivative(t)) / d.norm().powi(3)
    }
}

/// Shape of one piece of a duct outline, as stored in a project file; its ends come from the chain.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(tag = "kind", rename_all = "snake_case", deny_unknown_fields)]
pub enum PieceShape {
    /// Straight line.
    Line {},
    /// Circular arc through a point between its ends.
    Arc {
        /// A point of the arc between its ends, m.
        through_m: Vec2,
    },
    /// Cubic spline through points between its ends (chord-length knots, not-a-knot ends).
    Spline {
        /// Points between the ends, in order, m.
        through_m: Vec<Vec2>,
    },
}

/// A piece with its ends: what can be evaluated. Built by [`Segment::new`].
#[derive(Clone, Debug, PartialEq)]
pub enum Segment {
    /// Straight from `from` to `to`.
    Line {
        /// Start, m.
        from: Vec2,
        /// End, m.
        to: Vec2,
    },
    /// Circular arc.
    Arc {
        /// Centre, m.
        centre: Vec2,
        /// Radius, m.
        radius_m: f64,
        /// Angle of the start, rad.
        start_rad: f64,
        /// Angle swept, rad; positive counter-clockwise.
        sweep_rad: f64,
        /// Exact ends, m.
        ends: [Vec2; 2],
    },
    /// Cubic spline by knots `t` (0 to 1), points and second derivatives.
    Spline {
        /// Knots, increasing from 0 to 1.
        knots: Vec<f64>,
        /// Points at the knots, m.
        points: Vec<Vec2>,
        /// Second derivatives at the knots, m.
        seconds: Vec<Vec2>,
    },
}

impl Segment {
    /// The piece from `from` to `to` with a stored shape.
    pub fn new(shape: &PieceShape, from: Vec2, to: Vec2) -> Self {
        match shape {
            PieceShape::Line {} => Self::Line { from, to },
            PieceShape::Arc { through_m } => arc_through(from, *through_m, to),
            PieceShape::Spline { through_m } => {
                let mut points = vec![from];
                points.extend(through_m);
                points.push(to);
                super::open_spline::through(points)
            }
        }
    }
}

/// The circle through three points, run from the first over the second to the third; a straight line where
/// they lie on one.
fn arc_through(from: Vec2, through: Vec2, to: Vec2) -> Segment {
    let (a, b) = (through - from, to - from);
    let twice_area = a.cross(b);
    if twice_area.abs() <= FLATTEST_ARC * a.norm() * b.norm() {
        return Segment::Line { from, to };
    }
    let offset = (b * a.norm_squared() - a * b.norm_squared()).right() / (2.0 * twice_area);
    let centre = from + offset;
    let start = from - centre;
    let end = to - centre;
    let mut sweep_rad = start.cross(end).atan2(start.dot(end));
    if twice_area > 0.0 && sweep_rad < 0.0 {
        sweep_rad += 2.0 * std::f64::consts::PI;
    } else if twice_area < 0.0 && sweep_rad > 0.0 {
        sweep_rad -= 2.0 * std::f64::consts::PI;
    }
    Segment::Arc {
        centre,
        radius_m: start.norm(),
        start_rad: start.y.atan2(start.x),
        sweep_rad,
        ends: [from, to],
    }
}

/// Below this sine of the angle between the chords an arc is a straight line: at 1e-9 its sagitta is a
/// billionth of its length, far below any machining tolerance.
const FLATTEST_ARC: f64 = 1e-9;

impl Curve for Segment {
    fn point(&self, t: f64) -> Vec2 {
        match self {
            Self::Line { from, to } => from.lerp(*to, t),
            Self::Arc {
                centre,
                radius_m,
                start_rad,
                sweep_rad,
                ends,
            } => {
                if t == 0.0 || t == 1.0 {
                    return ends[t as usize];
                }
                *centre + Vec2::from_angle(start_rad + sweep_rad * t) * *radius_m
            }
            Self::Spline {
                knots,
                points,
                seconds,
            } => super::open_spline::evaluate(knots, points, seconds, t)[0],
        }
    }
    fn derivative(&self, t: f64) -> Vec2 {
        match self {
            Self::Line { from, to } => *to - *from,
            Self::Arc {
                radius_m,
                start_rad,
                sweep_rad,
                ..
            } => Vec2::from_angle(start_rad + sweep_rad * t).left() * (*radius_m * *sweep_rad),
            Self::Spline {
                knots,
                points,
                seconds,
            } => super::open_spline::evaluate(knots, points, seconds, t)[1],
        }
    }
    fn second_derivative(&self, t: f64) -> Vec2 {
        match self {
            Self::Line { .. } => Vec2::ZERO,
            Self::Arc {
                radius_m,
                start_rad,
                sweep_rad,
                ..
            } => {
                -Vec2::from_angle(start_rad + sweep_rad * t) * (*radius_m * *sweep_rad * *sweep_rad)
            }
            Self::Spline {
                knots,
                points,
                seconds,
            } => super::open_spline::evaluate(knots, points, seconds, t)[2],
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::base::vec2;

    /// Both ways round, short and long: the arc passes its middle point and keeps its radius.
    #[test]
    fn arcs_pass_through_their_three_points() {
        for (from, through, to) in [
            (vec2(1.0, 0.0), vec2(0.0, 1.0), vec2(-1.0, 0.0)),
            (vec2(-5.0, -3.0), vec2(0.0, -1.6), vec2(5.0, -3.0)),
            (vec2(1.0, 0.0), vec2(-1.0, 0.1), vec2(0.0, -1.0)),
            (vec2(2.0, 1.0), vec2(3.0, 0.0), vec2(2.2, -0.9)),
        ] {
            let arc = Segment::new(&PieceShape::Arc { through_m: through }, from, to);
            let Segment::Arc {
                centre, radius_m, ..
            } = arc
            else {
                panic!("not an arc")
            };
            let nearest = (0..=1000)
                .map(|i| arc.point(i as f64 / 1000.0).distance(through))
                .fold(f64::INFINITY, f64::min);
            assert!(nearest < 1e-2, "{nearest}");
            assert!((through.distance(centre) / radius_m - 1.0).abs() < 1e-12);
            assert!(
                arc.point(0.999999).distance(to) < 1e-4 && arc.point(1e-6).distance(from) < 1e-4
            );
        }
    }
}
