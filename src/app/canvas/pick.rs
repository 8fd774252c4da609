//! What lies under the cursor: handle before contour before corner before piece before body.

use super::camera::Camera;
use crate::app::words::{CanvasInput, Selection};
use crate::geometry::contour::distance_to_chord;
use crate::geometry::{ClosedSpline, Curve, Segment};
use egui::{Pos2, Rect};

/// How near the cursor must be, points.
const HANDLE_REACH: f32 = 10.0;
const LINE_REACH: f32 = 6.0;

/// The thing under a screen place.
pub fn under(camera: &Camera, rect: Rect, input: &CanvasInput, cursor: Pos2) -> Selection {
    let near = |p| camera.screen_from_world(rect, p).distance(cursor);
    let mut best = (HANDLE_REACH, Selection::Nothing);
    if input.editable {
        for (i, insert) in input.design.inserts.iter().enumerate() {
            for (c, &p) in insert.points_m.iter().enumerate() {
                if near(p) < best.0 {
                    best = (
                        near(p),
                        Selection::Control {
                            insert: i,
                            control: c,
                        },
                    );
                }
            }
        }
        if best.1 != Selection::Nothing {
            return best.1;
        }
    }
    let world = camera.world_from_screen(rect, cursor);
    let reach = camera.world_length(LINE_REACH);
    for i in 0..input.design.inserts.len() {
        if contour_of(input, i).is_some_and(|c| c.nearest(world).1.distance(world) < reach) {
            return Selection::Insert(i);
        }
    }
    for (i, piece) in input.design.duct.iter().enumerate() {
        if near(piece.to_m) < HANDLE_REACH {
            return Selection::Corner(i);
        }
    }
    for (i, piece) in input.design.duct.iter().enumerate() {
        let segment = Segment::new(&piece.shape, input.design.from_m(i), piece.to_m);
        if nearest_on(&segment, world).1 < reach {
            return Selection::Piece(i);
        }
    }
    for i in 0..input.design.inserts.len() {
        if contour_of(input, i).is_some_and(|c| c.contains(world)) {
            return Selection::Insert(i);
        }
    }
    Selection::Nothing
}

/// Contour of an insert that can be drawn.
pub fn contour_of(input: &CanvasInput, insert: usize) -> Option<ClosedSpline> {
    let points = &input.design.inserts.get(insert)?.points_m;
    (points.len() >= 4 && points.iter().all(|p| p.is_finite()))
        .then(|| ClosedSpline::new(points.clone()))
}

/// Parameter and distance of the nearest point of a piece, m.
pub fn nearest_on(segment: &Segment, place: crate::base::Vec2) -> (f64, f64) {
    const CHORDS: usize = 64;
    let at = |i: usize| segment.point(i as f64 / CHORDS as f64);
    let mut best = (0.0, f64::INFINITY);
    for i in 0..CHORDS {
        let (a, b) = (at(i), at(i + 1));
        let distance = distance_to_chord(place, a, b);
        if distance < best.1 {
            let d = b - a;
            let s = ((place - a).dot(d) / d.norm_squared()).clamp(0.0, 1.0);
            best = ((i as f64 + s) / CHORDS as f64, distance);
        }
    }
    best
}
