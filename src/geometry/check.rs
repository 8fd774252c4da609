//! All geometry faults of a domain at once, each with its place: the only guard before meshing, which accepts
//! overlaps in silence.

use super::contour::{distance_to_chord, inside_polygon};
use super::{Curve, Domain, Segment};
use crate::base::{Vec2, vec2};

/// A fault of the drawing.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum GeometryFault {
    /// A coordinate is not a finite number.
    #[error("a coordinate of {name} is not a finite number; type it again")]
    NotFinite {
        /// Which curve.
        name: String,
    },
    /// Too few control points.
    #[error(
        "{name} has {count} control points, fewer than the {least} a closed contour needs; add points"
    )]
    TooFewPoints {
        /// Which insert.
        name: String,
        /// How many it has.
        count: usize,
        /// How many it needs.
        least: usize,
    },
    /// Two neighbouring points coincide.
    #[error("two neighbouring points of {name} coincide {}; move or remove one", near(.place))]
    Coincident {
        /// Which curve.
        name: String,
        /// Where.
        place: Vec2,
    },
    /// No size to speak of.
    #[error("{name} has no size {}; give it an area", near(.place))]
    ZeroSize {
        /// Which curve.
        name: String,
        /// Where.
        place: Vec2,
    },
    /// A curve crosses itself.
    #[error("{name} crosses itself {}; move its points apart there", near(.place))]
    SelfCrossing {
        /// Which curve.
        name: String,
        /// Where.
        place: Vec2,
    },
    /// Two curves cross.
    #[error("{first} and {second} cross {}; move one of them", near(.place))]
    Crossing {
        /// One.
        first: String,
        /// The other.
        second: String,
        /// Where.
        place: Vec2,
    },
    /// Two curves touch or nearly so.
    #[error("{first} and {second} leave a gap of only {:.4} mm {}; widen it", gap_m * 1e3, near(.place))]
    Touching {
        /// One.
        first: String,
        /// The other.
        second: String,
        /// Gap, m.
        gap_m: f64,
        /// Where.
        place: Vec2,
    },
    /// An insert lies outside the duct.
    #[error("{name} lies outside the duct {}; move it inside", near(.place))]
    Outside {
        /// Which insert.
        name: String,
        /// Where.
        place: Vec2,
    },
    /// An insert lies inside another.
    #[error("{inner} lies inside {outer} {}; move it out or remove it", near(.place))]
    Nested {
        /// The inner one.
        inner: String,
        /// The outer one.
        outer: String,
        /// Where.
        place: Vec2,
    },
    /// The outline runs the wrong way round.
    #[error(
        "the outline runs clockwise; list its pieces the other way round, with the fluid on the left"
    )]
    Clockwise,
    /// An outline needs at least two pieces.
    #[error("the outline has {count} pieces, too few to close; add pieces")]
    TooFewPieces {
        /// How many it has.
        count: usize,
    },
    /// A corner too sharp to mesh.
    #[error("the corner of the duct {} has an angle of only {degrees:.1} degrees; open it to at least {least:.0}", near(.place))]
    SharpCorner {
        /// Interior angle, degrees.
        degrees: f64,
        /// Least angle, degrees.
        least: f64,
        /// Where.
        place: Vec2,
    },
    /// Far from the origin for its size, so that digits are lost.
    #[error(
        "the drawing lies {:.3} m from the origin, too far for its size of {:.4} m; move it closer",
        distance_m,
        size_m
    )]
    FarAway {
        /// Distance, m.
        distance_m: f64,
        /// Size, m.
        size_m: f64,
    },
}

/// Place in words, mm.
fn near(place: &Vec2) -> String {
    format!("near ({:.3} mm, {:.3} mm)", place.x * 1e3, place.y * 1e3)
}

impl GeometryFault {
    /// Where to mark it, m.
    pub fn place(&self) -> Option<Vec2> {
        match self {
            Self::Coincident { place, .. }
            | Self::ZeroSize { place, .. }
            | Self::SelfCrossing { place, .. }
            | Self::Crossing { place, .. }
            | Self::Touching { place, .. }
            | Self::Outside { place, .. }
            | Self::Nested { place, .. }
            | Self::SharpCorner { place, .. } => Some(*place),
            _ => None,
        }
    }
}

/// Gaps below this part of the duct's size count as touching: a mesh through them would need millions of cells.
const TOUCHING: f64 = 1e-4;
/// Points closer than this part of the curve's size coincide.
const COINCIDENT: f64 = 1e-6;
/// Least interior angle of a duct corner, degrees: below, cells degenerate.
const SHARPEST: f64 = 8.0;
/// Farthest from the origin in sizes: at 1e6 ten digits of the shape are left.
const FARTHEST: f64 = 1e6;
/// Chords an insert is cut in at least: their sagitta is then below the gap that counts as touching, however few
/// control points there are.
const PER_INSERT: usize = 256;
/// Chords a span is cut in at least.
const PER_SPAN: usize = 10;
/// Chords a bent outline piece is cut in.
const PER_PIECE: usize = 64;
/// Chords in a box.
const PER_BOX: usize = 8;

/// A curve as chords with boxes for quick rejection.
struct Polyline {
    name: String,
    points: Vec<Vec2>,
    closed: bool,
    boxes: Vec<[Vec2; 2]>,
}

impl Polyline {
    fn new(name: &str, points: Vec<Vec2>, closed: bool) -> Self {
        let mut line = Self {
            name: name.into(),
            points,
            closed,
            boxes: Vec::new(),
        };
        line.boxes = (0..line.chords().div_ceil(PER_BOX))
            .map(|b| {
                let mut bounds = [
                    vec2(f64::INFINITY, f64::INFINITY),
                    vec2(f64::NEG_INFINITY, f64::NEG_INFINITY),
                ];
                for i in b * PER_BOX..((b + 1) * PER_BOX).min(line.chords()) {
                    for p in line.chord(i) {
                        bounds[0] = vec2(bounds[0].x.min(p.x), bounds[0].y.min(p.y));
                        bounds[1] = vec2(bounds[1].x.max(p.x), bounds[1].y.max(p.y));
                    }
                }
                bounds
            })
            .collect();
        line
    }

    fn chords(&self) -> usize {
        if self.closed {
            self.points.len()
        } else {
            self.points.len() - 1
        }
    }

    fn chord(&self, i: usize) -> [Vec2; 2] {
        [self.points[i], self.points[(i + 1) % self.points.len()]]
    }

    fn in_box(&self, b: usize) -> std::ops::Range<usize> {
        b * PER_BOX..((b + 1) * PER_BOX).min(self.chords())
    }
}

/// Gap between two boxes.
fn box_gap(a: &[Vec2; 2], b: &[Vec2; 2]) -> f64 {
    let x = (b[0].x - a[1].x).max(a[0].x - b[1].x).max(0.0);
    let y = (b[0].y - a[1].y).max(a[0].y - b[1].y).max(0.0);
    x.hypot(y)
}

/// Crossing point of two chords, if they cross.
fn crossing([a, b]: [Vec2; 2], [c, d]: [Vec2; 2]) -> Option<Vec2> {
    let (r, s) = (b - a, d - c);
    let cross = r.cross(s);
    if cross == 0.0 {
        return None;
    }
    let (t, u) = ((c - a).cross(s) / cross, (c - a).cross(r) / cross);
    ((0.0..=1.0).contains(&t) && (0.0..=1.0).contains(&u)).then(|| a + r * t)
}

/// All faults of a domain; empty when it can be meshed.
pub fn check(domain: &Domain) -> Vec<GeometryFault> {
    let mut faults = Vec::new();
    points(domain, &mut faults);
    if !faults.is_empty() {
        return faults;
    }
    let outline = outline_polyline(domain);
    let size = outline
        .points
        .iter()
        .fold(0.0, |s: f64, p| s.max(p.distance(outline.points[0])));
    let inserts: Vec<Polyline> = domain
        .inserts
        .iter()
        .map(|i| {
            Polyline::new(
                &i.name,
                i.contour
                    .samples(PER_SPAN.max(PER_INSERT / i.contour.len().max(1))),
                true,
            )
        })
        .collect();
    outline_faults(domain, &outline, size, &mut faults);
    for (i, insert) in inserts.iter().enumerate() {
        let spline = &domain.inserts[i].contour;
        if spline.area().abs() < (COINCIDENT * size).powi(2) {
            faults.push(GeometryFault::ZeroSize {
                name: insert.name.clone(),
                place: insert.points[0],
            });
            continue;
        }
        self_crossings(insert, &mut faults);
        let crossed = pair(insert, &outline, size, &mut faults);
        if !crossed && !inside_polygon(&outline.points, insert.points[0]) {
            faults.push(GeometryFault::Outside {
                name: insert.name.clone(),
                place: spline.centroid(),
            });
        }
        for other in &inserts[..i] {
            if pair(insert, other, size, &mut faults) {
                continue;
            }
            for (inner, outer) in [(insert, other), (other, insert)] {
                if inside_polygon(&outer.points, inner.points[0]) {
                    faults.push(GeometryFault::Nested {
                        inner: inner.name.clone(),
                        outer: outer.name.clone(),
                        place: inner.points[0],
                    });
                }
            }
        }
    }
    faults
}

/// Faults of the given points, before any curve is trusted.
fn points(domain: &Domain, faults: &mut Vec<GeometryFault>) {
    let count = domain.outline.pieces.len();
    if count < 2 {
        faults.push(GeometryFault::TooFewPieces { count });
    }
    for piece in &domain.outline.pieces {
        let ends = [
            piece.segment.point(0.0),
            piece.segment.point(0.5),
            piece.segment.point(1.0),
        ];
        if !ends.iter().all(|p| p.is_finite()) {
            faults.push(GeometryFault::NotFinite {
                name: piece.name.clone(),
            });
        } else if ends[0] == ends[2] {
            faults.push(GeometryFault::ZeroSize {
                name: piece.name.clone(),
                place: ends[0],
            });
        }
    }
    for insert in &domain.inserts {
        let controls = insert.contour.controls();
        let name = insert.name.clone();
        if controls.len() < super::spline::FEWEST_CONTROLS {
            let least = super::spline::FEWEST_CONTROLS;
            faults.push(GeometryFault::TooFewPoints {
                name,
                count: controls.len(),
                least,
            });
            continue;
        }
        if !controls.iter().all(|p| p.is_finite()) {
            faults.push(GeometryFault::NotFinite { name });
            continue;
        }
        let size = controls
            .iter()
            .fold(0.0, |s: f64, p| s.max(p.distance(controls[0])));
        for (i, &p) in controls.iter().enumerate() {
            if p.distance(controls[(i + 1) % controls.len()]) <= COINCIDENT * size {
                faults.push(GeometryFault::Coincident {
                    name: name.clone(),
                    place: p,
                });
            }
        }
    }
}

fn outline_polyline(domain: &Domain) -> Polyline {
    let mut points = Vec::new();
    for piece in &domain.outline.pieces {
        let cuts = if matches!(piece.segment, Segment::Line { .. }) {
            1
        } else {
            PER_PIECE
        };
        points.extend((0..cuts).map(|i| piece.segment.point(i as f64 / cuts as f64)));
    }
    Polyline::new("the duct", points, true)
}

fn outline_faults(domain: &Domain, outline: &Polyline, size: f64, faults: &mut Vec<GeometryFault>) {
    let distance = outline.points.iter().fold(0.0, |d: f64, p| d.max(p.norm()));
    if distance > FARTHEST * size {
        faults.push(GeometryFault::FarAway {
            distance_m: distance,
            size_m: size,
        });
    }
    let n = outline.points.len();
    let twice_area: f64 = (0..n)
        .map(|i| outline.points[i].cross(outline.points[(i + 1) % n]))
        .sum();
    if twice_area < 0.0 {
        faults.push(GeometryFault::Clockwise);
    }
    self_crossings(outline, faults);
    let pieces = &domain.outline.pieces;
    for (i, piece) in pieces.iter().enumerate() {
        let next = &pieces[(i + 1) % pieces.len()].segment;
        let (back, ahead) = (-piece.segment.derivative(1.0), next.derivative(0.0));
        let degrees = ahead
            .cross(back)
            .atan2(ahead.dot(back))
            .to_degrees()
            .rem_euclid(360.0);
        if !(SHARPEST..=360.0 - SHARPEST).contains(&degrees) && twice_area > 0.0 {
            let place = piece.segment.point(1.0);
            faults.push(GeometryFault::SharpCorner {
                degrees: degrees.min(360.0 - degrees),
                least: SHARPEST,
                place,
            });
        }
    }
}

fn self_crossings(line: &Polyline, faults: &mut Vec<GeometryFault>) {
    let chords = line.chords();
    for a in 0..line.boxes.len() {
        for b in a..line.boxes.len() {
            if box_gap(&line.boxes[a], &line.boxes[b]) > 0.0 {
                continue;
            }
            for i in line.in_box(a) {
                for j in line
                    .in_box(b)
                    .filter(|&j| j > i + 1 && !(i == 0 && j + 1 == chords))
                {
                    if let Some(place) = crossing(line.chord(i), line.chord(j)) {
                        faults.push(GeometryFault::SelfCrossing {
                            name: line.name.clone(),
                            place,
                        });
                        return;
                    }
                }
            }
        }
    }
}

/// Crossing or touching of two curves; whether they cross.
fn pair(a: &Polyline, b: &Polyline, size: f64, faults: &mut Vec<GeometryFault>) -> bool {
    let mut closest = (TOUCHING * size, Vec2::ZERO, false);
    for (i, box_a) in a.boxes.iter().enumerate() {
        for (j, box_b) in b.boxes.iter().enumerate() {
            if box_gap(box_a, box_b) > closest.0 {
                continue;
            }
            for k in a.in_box(i) {
                for l in b.in_box(j) {
                    let (p, q) = (a.chord(k), b.chord(l));
                    if let Some(place) = crossing(p, q) {
                        faults.push(GeometryFault::Crossing {
                            first: a.name.clone(),
                            second: b.name.clone(),
                            place,
                        });
                        return true;
                    }
                    for (point, [c, d]) in [(p[0], q), (q[0], p)] {
                        let gap = distance_to_chord(point, c, d);
                        if gap < closest.0 {
                            closest = (gap, point, true);
                        }
                    }
                }
            }
        }
    }
    if closest.2 {
        faults.push(GeometryFault::Touching {
            first: a.name.clone(),
            second: b.name.clone(),
            gap_m: closest.0,
            place: closest.1,
        });
    }
    false
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::geometry::{ClosedSpline, DomainInsert, Outline, OutlinePiece, Starter};
    use proptest::prelude::*;

    fn duct(inserts: Vec<(&str, Vec<Vec2>)>) -> Domain {
        let c = [
            vec2(0.0, 0.0),
            vec2(0.07, 0.0),
            vec2(0.07, 0.01),
            vec2(0.0, 0.01),
        ];
        Domain {
            outline: Outline {
                pieces: (0..4)
                    .map(|i| OutlinePiece {
                        name: format!("piece {i}"),
                        segment: Segment::Line {
                            from: c[i],
                            to: c[(i + 1) % 4],
                        },
                        is_port: i % 2 == 1,
                    })
                    .collect(),
            },
            inserts: inserts
                .into_iter()
                .map(|(name, points)| DomainInsert {
                    name: name.into(),
                    contour: ClosedSpline::new(points),
                    solid: false,
                    cell_size_m: None,
                })
                .collect(),
        }
    }

    fn tube(x: f64, y: f64, d: f64) -> Vec<Vec2> {
        Starter::Circle { diameter_m: d }.controls(vec2(x, y), 0.0, 16)
    }

    #[test]
    fn a_sound_duct_has_no_faults() {
        assert_eq!(
            check(&duct(vec![
                ("a", tube(0.02, 0.005, 0.004)),
                ("b", tube(0.03, 0.005, 0.004))
            ])),
            vec![]
        );
    }

    #[test]
    fn each_fault_is_told_with_its_place() {
        use GeometryFault as F;
        let one = |points| check(&duct(vec![("a", points)]));
        assert!(matches!(
            one(tube(0.02, 0.009, 0.004))[..],
            [F::Crossing { .. }]
        ));
        assert!(matches!(
            one(tube(0.02, 0.05, 0.004))[..],
            [F::Outside { .. }]
        ));
        assert!(matches!(
            one(tube(0.02, 0.008 - 5e-6, 0.004))[..],
            [F::Touching { .. }]
        ));
        assert!(matches!(
            one(vec![vec2(0.02, 0.004); 3])[..],
            [F::TooFewPoints { .. }]
        ));
        assert!(
            one(vec![vec2(0.02, 0.004); 6])
                .iter()
                .all(|f| matches!(f, F::Coincident { .. }))
        );
        let mut points = tube(0.02, 0.005, 0.004);
        points[3].x = f64::NAN;
        assert!(matches!(one(points)[..], [F::NotFinite { .. }]));
        let mut points = tube(0.02, 0.005, 0.004);
        points.swap(2, 9);
        assert!(
            one(points)
                .iter()
                .any(|f| matches!(f, F::SelfCrossing { .. }))
        );
        let two = |a, b| check(&duct(vec![("a", a), ("b", b)]));
        assert!(matches!(
            two(tube(0.02, 0.005, 0.004), tube(0.022, 0.005, 0.004))[..],
            [F::Crossing { .. }]
        ));
        assert!(matches!(
            two(tube(0.02, 0.005, 0.004), tube(0.02, 0.005, 0.002))[..],
            [F::Nested { .. }]
        ));
        let mut clockwise = duct(vec![]);
        clockwise.outline.pieces.reverse();
        for piece in &mut clockwise.outline.pieces {
            if let Segment::Line { from, to } = &mut piece.segment {
                std::mem::swap(from, to);
            }
        }
        assert!(check(&clockwise).contains(&F::Clockwise));
    }

    proptest! {
        #[test]
        fn no_input_panics(values in proptest::collection::vec(proptest::num::f64::ANY, 0..40)) {
            let points = values.chunks_exact(2).map(|c| vec2(c[0], c[1])).collect();
            check(&duct(vec![("a", points)]));
        }
    }
}
