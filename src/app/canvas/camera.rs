//! From metres to screen points and back.

use crate::base::{Vec2, vec2};
use egui::{Pos2, Rect, pos2};

/// Where the drawing stands on the screen.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Camera {
    /// Place at the middle of the canvas, m.
    pub centre_m: Vec2,
    /// Points per metre.
    pub scale: f64,
}

/// Part of the canvas that a fitted drawing takes.
const FITTED: f64 = 0.9;
/// Closest and farthest zoom relative to the fitted one.
const ZOOM_RANGE: [f64; 2] = [0.2, 400.0];

impl Camera {
    /// The whole of a box in a rectangle.
    pub fn fit(bounds_m: [Vec2; 2], rect: Rect) -> Self {
        let size = bounds_m[1] - bounds_m[0];
        let fit = |screen: f32, world: f64| f64::from(screen) * FITTED / world.max(1e-12);
        Self {
            centre_m: bounds_m[0].lerp(bounds_m[1], 0.5),
            scale: fit(rect.width() - 150.0, size.x)
                .min(fit(rect.height() - 150.0, size.y))
                .max(1e-6),
        }
    }

    /// Screen place of a point.
    pub fn screen_from_world(&self, rect: Rect, p: Vec2) -> Pos2 {
        let d = (p - self.centre_m) * self.scale;
        pos2(rect.center().x + d.x as f32, rect.center().y - d.y as f32)
    }

    /// Point of a screen place, m.
    pub fn world_from_screen(&self, rect: Rect, p: Pos2) -> Vec2 {
        let d = p - rect.center();
        self.centre_m + vec2(f64::from(d.x), f64::from(-d.y)) / self.scale
    }

    /// Length of a number of points, m.
    pub fn world_length(&self, points: f32) -> f64 {
        f64::from(points) / self.scale
    }

    /// Zoom by a factor, keeping the point under a screen place; `fitted` bounds how far.
    pub fn zoom(&mut self, rect: Rect, at: Pos2, factor: f64, fitted: f64) {
        let kept = self.world_from_screen(rect, at);
        self.scale = (self.scale * factor).clamp(fitted * ZOOM_RANGE[0], fitted * ZOOM_RANGE[1]);
        self.centre_m += kept - self.world_from_screen(rect, at);
    }

    /// Move the drawing by screen points.
    pub fn pan(&mut self, by: egui::Vec2) {
        self.centre_m -= vec2(f64::from(by.x), f64::from(-by.y)) / self.scale;
    }
}

/// Lower left and upper right corner of points.
pub fn bounds(points: impl IntoIterator<Item = Vec2>) -> [Vec2; 2] {
    points.into_iter().filter(|p| p.is_finite()).fold(
        [
            vec2(f64::INFINITY, f64::INFINITY),
            vec2(f64::NEG_INFINITY, f64::NEG_INFINITY),
        ],
        |[low, high], p| {
            [
                vec2(low.x.min(p.x), low.y.min(p.y)),
                vec2(high.x.max(p.x), high.y.max(p.y)),
            ]
        },
    )
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn zoom_keeps_the_point_under_the_cursor() {
        let rect = Rect::from_min_size(pos2(10.0, 20.0), egui::vec2(800.0, 500.0));
        let mut camera = Camera::fit([vec2(0.0, 0.0), vec2(0.07, 0.01)], rect);
        let at = pos2(300.0, 200.0);
        let before = camera.world_from_screen(rect, at);
        camera.zoom(rect, at, 3.0, camera.scale);
        assert!(camera.world_from_screen(rect, at).distance(before) < 1e-12);
        assert!((camera.screen_from_world(rect, before) - at).length() < 1e-3);
    }
}
