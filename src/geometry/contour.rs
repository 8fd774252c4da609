//! Measures and changes of closed contours: area, perimeter, centroid, box, nearest point, re-spacing.

use super::{ClosedSpline, Curve};
use crate::base::{Vec2, vec2};

/// Gauss points of a span: the area's integrand is a quintic, the centroid's of degree eight, so both are exact;
/// lengths are not polynomials but good to about 1e-10 of the contour.
const GAUSS: [(f64, f64); 5] = [
    (0.046_910_077_030_668, 0.118_463_442_528_094_5),
    (0.230_765_344_947_158_5, 0.239_314_335_249_683_2),
    (0.5, 0.284_444_444_444_444_4),
    (0.769_234_655_052_841_5, 0.239_314_335_249_683_2),
    (0.953_089_922_969_332, 0.118_463_442_528_094_5),
];
/// Pieces a span is cut in for lengths.
const LENGTH_CUTS: usize = 4;

impl ClosedSpline {
    /// Quadrature points (t, weight) of the whole contour, `cuts` pieces a span.
    pub fn quadrature(&self, cuts: usize) -> Vec<(f64, f64)> {
        let pieces = self.len() * cuts;
        (0..pieces)
            .flat_map(|i| {
                GAUSS
                    .iter()
                    .map(move |(x, w)| ((i as f64 + x) / pieces as f64, w / pieces as f64))
            })
            .collect()
    }

    /// Enclosed area, m^2, positive counter-clockwise: half the integral of x cross dx.
    pub fn area(&self) -> f64 {
        self.quadrature(1)
            .iter()
            .map(|&(t, w)| 0.5 * w * self.point(t).cross(self.derivative(t)))
            .sum()
    }

    /// Derivative of the area by the control points, shape `(n,)`, m.
    pub fn area_gradient(&self) -> Vec<Vec2> {
        let mut gradient = vec![Vec2::ZERO; self.len()];
        for (t, w) in self.quadrature(1) {
            // dA = integral of V cross dx/dt: outward normal times speed is the tangent turned right.
            let normal = self.derivative(t).right() * w;
            for (g, weight) in gradient.iter_mut().zip(self.weights(t)) {
                *g += normal * weight;
            }
        }
        gradient
    }

    /// Length of the contour, m.
    pub fn perimeter(&self) -> f64 {
        self.quadrature(LENGTH_CUTS)
            .iter()
            .map(|&(t, w)| w * self.derivative(t).norm())
            .sum()
    }

    /// Derivative of the length by the control points, shape `(n,)`.
    pub fn perimeter_gradient(&self) -> Vec<Vec2> {
        let mut gradient = vec![Vec2::ZERO; self.len()];
        for (t, w) in self.quadrature(LENGTH_CUTS) {
            let unit = self.derivative(t).normalized() * w;
            for (g, weight) in gradient.iter_mut().zip(self.derivative_weights(t)) {
                *g += unit * weight;
            }
        }
        gradient
    }

    /// Centroid of the enclosed area, m.
    pub fn centroid(&self) -> Vec2 {
        let sum = self.quadrature(1).iter().fold(Vec2::ZERO, |sum, &(t, w)| {
            let (p, d) = (self.point(t), self.derivative(t));
            sum + vec2(p.x * p.x * d.y, -p.y * p.y * d.x) * (0.5 * w)
        });
        sum / self.area()
    }

    /// Derivatives of the centroid's x and y by the control points, each of shape `(n,)`.
    pub fn centroid_gradient(&self) -> [Vec<Vec2>; 2] {
        let (area, centroid) = (self.area(), self.centroid());
        let mut by_x = vec![Vec2::ZERO; self.len()];
        let mut by_y = by_x.clone();
        for (t, w) in self.quadrature(1) {
            // d(integral of x dA) = integral of x V.n ds, less the centroid's own share.
            let normal = self.derivative(t).right() * (w / area);
            let offset = self.point(t) - centroid;
            for (j, weight) in self.weights(t).into_iter().enumerate() {
                by_x[j] += normal * (weight * offset.x);
                by_y[j] += normal * (weight * offset.y);
            }
        }
        [by_x, by_y]
    }

    /// Lower left and upper right corner of the box around the contour, m (by dense samples).
    pub fn bounding_box(&self) -> [Vec2; 2] {
        let (mut low, mut high) = (
            vec2(f64::INFINITY, f64::INFINITY),
            vec2(f64::NEG_INFINITY, f64::NEG_INFINITY),
        );
        for p in self.samples(16) {
            low = vec2(low.x.min(p.x), low.y.min(p.y));
            high = vec2(high.x.max(p.x), high.y.max(p.y));
        }
        [low, high]
    }

    /// Points at `per_span` evenly spaced parameters a span, m.
    pub fn samples(&self, per_span: usize) -> Vec<Vec2> {
        let n = self.len() * per_span;
        (0..n).map(|i| self.point(i as f64 / n as f64)).collect()
    }

    /// Parameter and place of the point of the contour nearest to a place.
    pub fn nearest(&self, place: Vec2) -> (f64, Vec2) {
        let n = self.len() * 16;
        let coarse = (0..n)
            .map(|i| i as f64 / n as f64)
            .min_by(|a, b| {
                self.point(*a)
                    .distance(place)
                    .total_cmp(&self.point(*b).distance(place))
            })
            .unwrap_or(0.0);
        let t = minimise(|t| self.point(t).distance(place), coarse, 1.0 / n as f64);
        (t.rem_euclid(1.0), self.point(t))
    }

    /// Whether a place is inside (even-odd rule on a dense polygon).
    pub fn contains(&self, place: Vec2) -> bool {
        inside_polygon(&self.samples(16), place)
    }

    /// The same shape with `n` control points evenly spaced by arc length; and the largest deviation, m.
    pub fn respaced(&self, n: usize) -> (Self, f64) {
        let dense = self.len().max(n) * 32;
        let mut lengths = vec![0.0];
        for i in 0..dense {
            let (a, b) = (i as f64 / dense as f64, (i + 1) as f64 / dense as f64);
            lengths.push(lengths[i] + self.point(a).distance(self.point(b)));
        }
        let total = lengths[dense];
        let controls = (0..n)
            .map(|i| {
                let wanted = total * i as f64 / n as f64;
                let k = lengths.partition_point(|&l| l <= wanted).clamp(1, dense);
                let part = (wanted - lengths[k - 1]) / (lengths[k] - lengths[k - 1]);
                self.point((k as f64 - 1.0 + part) / dense as f64)
            })
            .collect();
        let spaced = Self::new(controls);
        let deviation = self
            .samples(8)
            .iter()
            .map(|&p| spaced.nearest(p).1.distance(p))
            .fold(0.0, f64::max);
        (spaced, deviation)
    }

    /// Points of a polyline within `chord_m` of the contour, and the deviation actually reached, m. The list does
    /// not repeat its first point.
    pub fn flattened(&self, chord_m: f64) -> (Vec<Vec2>, f64) {
        let mut points = Vec::new();
        let mut reached: f64 = 0.0;
        for i in 0..self.len() {
            let span = [
                i as f64 / self.len() as f64,
                (i + 1) as f64 / self.len() as f64,
            ];
            points.push(self.point(span[0]));
            self.flatten_span(span, chord_m, &mut points, &mut reached, MOST_HALVINGS);
        }
        (points, reached)
    }

    fn flatten_span(
        &self,
        [a, b]: [f64; 2],
        chord: f64,
        points: &mut Vec<Vec2>,
        reached: &mut f64,
        left: usize,
    ) {
        let (p, q) = (self.point(a), self.point(b));
        let deviation = (1..8)
            .map(|i| distance_to_chord(self.point(a + (b - a) * i as f64 / 8.0), p, q))
            .fold(0.0, f64::max);
        if deviation <= chord || left == 0 {
            *reached = reached.max(deviation);
            return;
        }
        let middle = 0.5 * (a + b);
        self.flatten_span([a, middle], chord, points, reached, left - 1);
        points.push(self.point(middle));
        self.flatten_span([middle, b], chord, points, reached, left - 1);
    }
}

/// Halvings of a span while flattening: a millionth of a span is finer than any tolerance asked.
const MOST_HALVINGS: usize = 20;

/// Distance from a point to a straight piece, m.
pub fn distance_to_chord(p: Vec2, a: Vec2, b: Vec2) -> f64 {
    let d = b - a;
    let t = ((p - a).dot(d) / d.norm_squared()).clamp(0.0, 1.0);
    p.distance(a + d * if t.is_finite() { t } else { 0.0 })
}

/// Even-odd rule.
pub fn inside_polygon(polygon: &[Vec2], p: Vec2) -> bool {
    let next = polygon.iter().cycle().skip(1);
    let crossings = polygon.iter().zip(next).filter(|(a, b)| {
        (a.y > p.y) != (b.y > p.y) && p.x < a.x + (p.y - a.y) / (b.y - a.y) * (b.x - a.x)
    });
    crossings.count() % 2 == 1
}

/// Golden-section minimum near `start` within `reach` on both sides (Kiefer, Proc. AMS 4, 502, 1953).
pub fn minimise(f: impl Fn(f64) -> f64, start: f64, reach: f64) -> f64 {
    let golden = 0.5 * (5f64.sqrt() - 1.0);
    let (mut a, mut b) = (start - reach, start + reach);
    let (mut c, mut d) = (b - golden * (b - a), a + golden * (b - a));
    let (mut fc, mut fd) = (f(c), f(d));
    for _ in 0..60 {
        if fc < fd {
            b = d;
            (d, fd) = (c, fc);
            c = b - golden * (b - a);
            fc = f(c);
        } else {
            a = c;
            (c, fc) = (d, fd);
            d = a + golden * (b - a);
            fd = f(d);
        }
    }
    0.5 * (a + b)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn egg() -> ClosedSpline {
        ClosedSpline::new(
            (0..11)
                .map(|i| {
                    let a = 2.0 * std::f64::consts::PI * i as f64 / 11.0;
                    vec2(
                        1.3 * a.cos() + 0.1 * (2.0 * a).sin() + 0.2,
                        0.8 * a.sin() + 0.1 * (3.0 * a).cos(),
                    )
                })
                .collect(),
        )
    }

    /// Largest difference of a gradient to central differences, relative to its largest entry.
    fn difference(f: impl Fn(&ClosedSpline) -> f64, gradient: &[Vec2]) -> f64 {
        let base = egg();
        let h = 1e-5;
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

    #[test]
    fn gradients_agree_with_differences() {
        let e = egg();
        assert!(difference(|c| c.area(), &e.area_gradient()) < 1e-8);
        assert!(difference(|c| c.perimeter(), &e.perimeter_gradient()) < 1e-8);
        let [x, y] = e.centroid_gradient();
        assert!(
            difference(|c| c.centroid().x, &x) < 1e-7 && difference(|c| c.centroid().y, &y) < 1e-7
        );
        let flawed: Vec<Vec2> = e.area_gradient().iter().map(|&g| g * 1.001).collect();
        assert!(
            difference(|c| c.area(), &flawed) > 1e-4,
            "the check must see a gradient off by a thousandth"
        );
    }

    /// Perimeter of an ellipse 2:1 by the complete elliptic integral: 9.688448220547675 for semi-axes 2 and 1
    /// (Abramowitz and Stegun, table 17.1, E(0.75) = 1.211056027568459).
    #[test]
    fn ellipse_has_its_published_perimeter() {
        let ellipse = ClosedSpline::new(
            (0..96)
                .map(|i| {
                    let a = 2.0 * std::f64::consts::PI * i as f64 / 96.0;
                    vec2(2.0 * a.cos(), a.sin())
                })
                .collect(),
        );
        assert!((ellipse.perimeter() / 9.688448220547675 - 1.0).abs() < 1e-6);
        assert!((ellipse.area() / (2.0 * std::f64::consts::PI) - 1.0).abs() < 1e-6);
    }

    #[test]
    fn flattening_keeps_its_promise_and_respacing_its_shape() {
        let (points, reached) = egg().flattened(1e-4);
        assert!(reached <= 1e-4 && points.len() > 50);
        let (spaced, deviation) = egg().respaced(24);
        assert!(deviation < 1e-2 && spaced.len() == 24);
        let (t, p) = egg().nearest(vec2(2.0, 0.1));
        assert!(egg().point(t).distance(p) < 1e-12 && egg().contains(vec2(0.2, 0.0)));
    }
}
