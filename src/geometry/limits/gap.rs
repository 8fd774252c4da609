//! Gaps from a contour to the outline and to other contours.

use super::{Sample, parameters, smallest};
use crate::base::Vec2;
use crate::geometry::contour::{inside_polygon, minimise};
use crate::geometry::{ClosedSpline, Curve, Outline, Segment};

/// Chords a bent piece is searched by.
const PER_PIECE: usize = 64;

/// The outline prepared for distance questions.
#[derive(Clone, Debug)]
pub struct Walls {
    pieces: Vec<Segment>,
    chords: Vec<Vec<Vec2>>,
    polygon: Vec<Vec2>,
}

impl Walls {
    /// All pieces of an outline, ports as well: an insert must not leave through them either.
    pub fn new(outline: &Outline) -> Self {
        let pieces: Vec<Segment> = outline.pieces.iter().map(|p| p.segment.clone()).collect();
        let chords: Vec<Vec<Vec2>> = pieces
            .iter()
            .map(|s| {
                let cuts = if matches!(s, Segment::Line { .. }) {
                    1
                } else {
                    PER_PIECE
                };
                (0..=cuts)
                    .map(|i| s.point(i as f64 / cuts as f64))
                    .collect()
            })
            .collect();
        let polygon = chords
            .iter()
            .flat_map(|c| &c[..c.len() - 1])
            .copied()
            .collect();
        Self {
            pieces,
            chords,
            polygon,
        }
    }

    /// Nearest point of the outline.
    pub fn nearest(&self, place: Vec2) -> Vec2 {
        let mut best = (f64::INFINITY, place);
        for (piece, chords) in self.pieces.iter().zip(&self.chords) {
            let cuts = chords.len() - 1;
            for i in 0..cuts {
                let (a, b) = (chords[i], chords[i + 1]);
                let d = b - a;
                let s = ((place - a).dot(d) / d.norm_squared()).clamp(0.0, 1.0);
                let mut at = a + d * s;
                let mut distance = at.distance(place);
                // A bent piece bulges past its chord by far less than a tenth of it.
                if cuts > 1 && distance < best.0 + 0.1 * d.norm() {
                    let t = minimise(
                        |t| piece.point(t.clamp(0.0, 1.0)).distance(place),
                        (i as f64 + s) / cuts as f64,
                        1.0 / cuts as f64,
                    );
                    at = piece.point(t.clamp(0.0, 1.0));
                    distance = at.distance(place);
                }
                if distance < best.0 {
                    best = (distance, at);
                }
            }
        }
        best.1
    }

    /// Distance to the outline, m, negative outside, and its gradient (a unit vector).
    pub fn distance(&self, place: Vec2) -> (f64, Vec2) {
        let nearest = self.nearest(place);
        let away = place - nearest;
        let length = away.norm();
        let sign = if inside_polygon(&self.polygon, place) {
            1.0
        } else {
            -1.0
        };
        (sign * length, away / length.max(f64::MIN_POSITIVE) * sign)
    }
}

/// Samples of the gap to the walls below `below`, m.
pub fn to_walls(contour: &ClosedSpline, walls: &Walls, below: f64) -> Vec<Sample> {
    parameters(contour.len())
        .filter_map(|t| {
            let place = contour.point(t);
            let (value, direction) = walls.distance(place);
            (value < below).then(|| Sample {
                t,
                place,
                value,
                gradient: contour
                    .weights(t)
                    .into_iter()
                    .map(|w| direction * w)
                    .collect(),
                partner: None,
            })
        })
        .collect()
}

/// Smallest gap to the walls: (t, gap in m).
pub fn smallest_to_walls(contour: &ClosedSpline, walls: &Walls) -> (f64, f64) {
    smallest(contour.len(), |t| walls.distance(contour.point(t)).0)
}

/// Samples of the gap to another contour below `below`, m; `partner` is that contour's index.
pub fn to_contour(
    contour: &ClosedSpline,
    other: &ClosedSpline,
    partner: usize,
    below: f64,
) -> Vec<Sample> {
    let [low, high] = other.bounding_box();
    let samples = other.samples(super::PER_SPAN);
    parameters(contour.len())
        .filter_map(|t| {
            let place = contour.point(t);
            let outside = (low.x - place.x)
                .max(place.x - high.x)
                .max(low.y - place.y)
                .max(place.y - high.y);
            if outside > below {
                return None;
            }
            let (s, at) = nearest_on(other, &samples, place);
            let away = place - at;
            let sign = if inside_polygon(&samples, place) {
                -1.0
            } else {
                1.0
            };
            let value = sign * away.norm();
            let direction = away / away.norm().max(f64::MIN_POSITIVE) * sign;
            (value < below).then(|| Sample {
                t,
                place,
                value,
                gradient: contour
                    .weights(t)
                    .into_iter()
                    .map(|w| direction * w)
                    .collect(),
                partner: Some((
                    partner,
                    other
                        .weights(s)
                        .into_iter()
                        .map(|w| direction * -w)
                        .collect(),
                )),
            })
        })
        .collect()
}

/// Smallest gap between two contours: (t on the first, gap in m).
pub fn smallest_between(contour: &ClosedSpline, other: &ClosedSpline) -> (f64, f64) {
    let samples = other.samples(super::PER_SPAN);
    smallest(contour.len(), |t| {
        let place = contour.point(t);
        nearest_on(other, &samples, place).1.distance(place)
    })
}

fn nearest_on(other: &ClosedSpline, samples: &[Vec2], place: Vec2) -> (f64, Vec2) {
    let n = samples.len();
    let coarse = (0..n)
        .min_by(|&a, &b| {
            samples[a]
                .distance(place)
                .total_cmp(&samples[b].distance(place))
        })
        .unwrap_or(0);
    let t = minimise(
        |t| other.point(t).distance(place),
        coarse as f64 / n as f64,
        1.0 / n as f64,
    );
    (t, other.point(t))
}

#[cfg(test)]
mod tests {
    use super::super::tests::{difference, pebble};
    use super::*;
    use crate::base::vec2;
    use crate::geometry::{OutlinePiece, PieceShape};

    fn bent() -> Walls {
        let c = [
            vec2(-5.0, -3.0),
            vec2(5.0, -3.0),
            vec2(5.0, 3.0),
            vec2(-5.0, 3.0),
        ];
        Walls::new(&Outline {
            pieces: (0..4)
                .map(|i| {
                    let shape = if i == 0 {
                        PieceShape::Arc {
                            through_m: vec2(0.0, -1.6),
                        }
                    } else {
                        PieceShape::Line {}
                    };
                    OutlinePiece {
                        name: i.to_string(),
                        segment: Segment::new(&shape, c[i], c[(i + 1) % 4]),
                        is_port: false,
                    }
                })
                .collect(),
        })
    }

    #[test]
    fn gradients_agree_with_differences() {
        let contour = pebble(vec2(0.2, 0.1));
        let walls = bent();
        for sample in to_walls(&contour, &walls, 1.3).iter().step_by(17) {
            let f = |c: &ClosedSpline| walls.distance(c.point(sample.t)).0;
            assert!(difference(&contour, f, &sample.gradient) < 1e-5);
        }
        let other = pebble(vec2(1.0, 2.2));
        let near = to_contour(&contour, &other, 1, 1.0);
        assert!(near.len() > 20);
        for sample in near.iter().step_by(13) {
            let gap = |c: &ClosedSpline, o: &ClosedSpline| {
                o.nearest(c.point(sample.t)).1.distance(c.point(sample.t))
            };
            assert!(difference(&contour, |c| gap(c, &other), &sample.gradient) < 1e-5);
            let (_, partner) = sample.partner.clone().unwrap();
            assert!(difference(&other, |o| gap(&contour, o), &partner) < 1e-5);
        }
    }

    #[test]
    fn outside_is_negative() {
        let walls = bent();
        assert!(
            walls.distance(vec2(0.0, -2.0)).0 < 0.0
                && (walls.distance(vec2(0.0, 2.0)).0 - 1.0).abs() < 1e-12
        );
        assert!(
            (walls.distance(vec2(0.0, -1.0)).0 - 0.6).abs() < 1e-9,
            "{:?}",
            walls.distance(vec2(0.0, -1.0))
        );
    }
}
