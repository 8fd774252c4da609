//! Starting shapes for inserts, each as control points of a closed spline, counter-clockwise.

use super::ClosedSpline;
use crate::base::{Vec2, vec2};
use std::f64::consts::PI;

/// A starting shape with its dimensions, m.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Starter {
    /// Circle.
    Circle {
        /// Diameter, m.
        diameter_m: f64,
    },
    /// Ellipse.
    Ellipse {
        /// Length along its own axis, m.
        length_m: f64,
        /// Height across, m.
        height_m: f64,
    },
    /// Bar with rounded ends of half its height's radius.
    RoundedBar {
        /// Length, m.
        length_m: f64,
        /// Height, m.
        height_m: f64,
    },
    /// Round nose upstream, slender tail downstream.
    Drop {
        /// Length, m.
        length_m: f64,
        /// Height, m.
        height_m: f64,
    },
    /// Bent slender shape with rounded ends.
    Vane {
        /// Chord, m.
        length_m: f64,
        /// Thickness, m.
        height_m: f64,
        /// Rise of the middle line over the chord, m.
        camber_m: f64,
    },
}

/// Points of the ideal outline before re-spacing.
const DENSE: usize = 720;

impl Starter {
    /// `n` control points about a centre, turned counter-clockwise by an angle.
    pub fn controls(&self, centre: Vec2, angle_rad: f64, n: usize) -> Vec<Vec2> {
        let dense: Vec<Vec2> = (0..DENSE)
            .map(|i| self.outline(i as f64 / DENSE as f64))
            .collect();
        let spaced = even(&dense, n);
        // Turn about the area's centroid.
        let middle = ClosedSpline::new(spaced.clone()).centroid();
        spaced
            .into_iter()
            .map(|p| centre + (p - middle).rotated(angle_rad))
            .collect()
    }

    /// Point of the ideal outline at a fraction of its parameter, counter-clockwise.
    fn outline(&self, s: f64) -> Vec2 {
        let a = 2.0 * PI * s;
        match *self {
            Self::Circle { diameter_m } => Vec2::from_angle(a) * (0.5 * diameter_m),
            Self::Ellipse { length_m, height_m } => {
                vec2(0.5 * length_m * a.cos(), 0.5 * height_m * a.sin())
            }
            Self::RoundedBar { length_m, height_m } => bar(length_m, height_m, s),
            Self::Drop { length_m, height_m } => {
                // sin(a) (1 - 0.55 cos(a)) has its peak 1.1183 at 113 degrees: round nose at 180, slender tail at 0.
                let half = a.sin() * (1.0 - 0.55 * a.cos()) / 1.1183;
                vec2(0.5 * length_m * a.cos(), 0.5 * height_m * half)
            }
            Self::Vane {
                length_m,
                height_m,
                camber_m,
            } => {
                let p = bar(length_m, height_m, s);
                let x = (2.0 * p.x / length_m).clamp(-1.0, 1.0);
                // Parabolic middle line; thickness added across it.
                let slope = -4.0 * camber_m * x / length_m * 2.0;
                let across = vec2(-slope, 1.0).normalized();
                vec2(p.x, camber_m * (1.0 - x * x)) + across * p.y
            }
        }
    }
}

/// Stadium by arc length.
fn bar(length: f64, height: f64, s: f64) -> Vec2 {
    let r = 0.5 * height.min(length);
    let straight = (length - 2.0 * r).max(0.0);
    let total = 2.0 * straight + 2.0 * PI * r;
    let mut along = s * total;
    let half = PI * r;
    if along < 0.5 * half {
        return vec2(0.5 * straight, 0.0) + Vec2::from_angle(along / r) * r;
    }
    along -= 0.5 * half;
    if along < straight {
        return vec2(0.5 * straight - along, r);
    }
    along -= straight;
    if along < half {
        return vec2(-0.5 * straight, 0.0) + Vec2::from_angle(0.5 * PI + along / r) * r;
    }
    along -= half;
    if along < straight {
        return vec2(-0.5 * straight + along, -r);
    }
    along -= straight;
    vec2(0.5 * straight, 0.0) + Vec2::from_angle(1.5 * PI + along / r) * r
}

/// `n` points evenly by arc length along a closed polygon.
pub fn even(polygon: &[Vec2], n: usize) -> Vec<Vec2> {
    let count = polygon.len();
    let mut lengths = vec![0.0];
    for i in 0..count {
        lengths.push(lengths[i] + polygon[i].distance(polygon[(i + 1) % count]));
    }
    let total = lengths[count];
    (0..n)
        .map(|i| {
            let wanted = total * i as f64 / n as f64;
            let k = lengths.partition_point(|&l| l <= wanted).clamp(1, count);
            let part =
                (wanted - lengths[k - 1]) / (lengths[k] - lengths[k - 1]).max(f64::MIN_POSITIVE);
            polygon[k - 1].lerp(polygon[k % count], part)
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn starters_have_their_dimensions() {
        for (starter, length, height) in [
            (Starter::Circle { diameter_m: 4e-3 }, 4e-3, 4e-3),
            (
                Starter::Ellipse {
                    length_m: 6e-3,
                    height_m: 3e-3,
                },
                6e-3,
                3e-3,
            ),
            (
                Starter::RoundedBar {
                    length_m: 8e-3,
                    height_m: 2e-3,
                },
                8e-3,
                2e-3,
            ),
            (
                Starter::Drop {
                    length_m: 8e-3,
                    height_m: 3e-3,
                },
                8e-3,
                3e-3,
            ),
            (
                Starter::Vane {
                    length_m: 10e-3,
                    height_m: 1e-3,
                    camber_m: 0.0,
                },
                10e-3,
                1e-3,
            ),
        ] {
            let spline = ClosedSpline::new(starter.controls(vec2(0.03, 0.005), 0.0, 28));
            let [low, high] = spline.bounding_box();
            assert!(
                ((high.x - low.x) / length - 1.0).abs() < 0.03,
                "{starter:?} {}",
                high.x - low.x
            );
            assert!(
                ((high.y - low.y) / height - 1.0).abs() < 0.08,
                "{starter:?} {}",
                high.y - low.y
            );
            assert!(spline.area() > 0.0);
            assert!(spline.centroid().distance(vec2(0.03, 0.005)) < 1e-5);
        }
    }
}
