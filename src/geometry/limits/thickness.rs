//! Thickness of a cross-section: the chord along the inward normal to the facing point, found anew each time.

use super::{PER_SPAN, Sample, parameters, smallest};
use crate::base::Vec2;
use crate::geometry::{ClosedSpline, Curve};

/// Newton steps on the facing point; three are usual.
const MOST_STEPS: usize = 30;

/// A contour sampled for chords.
pub struct Chords<'a> {
    contour: &'a ClosedSpline,
    samples: Vec<Vec2>,
}

impl<'a> Chords<'a> {
    /// Sample a contour.
    pub fn new(contour: &'a ClosedSpline) -> Self {
        Self {
            contour,
            samples: contour.samples(PER_SPAN),
        }
    }

    /// Chord from `t` along the inward normal: (length in m, parameter of the facing point).
    pub fn chord(&self, t: f64) -> Option<(f64, f64)> {
        let n = self.samples.len();
        let place = self.contour.point(t);
        let inward = self.contour.derivative(t).left().normalized();
        // Offsets across the normal of the samples; the chord crosses where they change sign.
        let across = |p: Vec2| (p - place).cross(inward);
        let along = |p: Vec2| (p - place).dot(inward);
        let own = (t.rem_euclid(1.0) * n as f64).round() as usize;
        let mut best: Option<(f64, f64)> = None;
        for i in 0..n {
            let away = (i + n - own) % n;
            if away <= 1 || away + 2 >= n {
                continue; // the chord's own start
            }
            let (p, q) = (self.samples[i], self.samples[(i + 1) % n]);
            let (a, b) = (across(p), across(q));
            if (a > 0.0) == (b > 0.0) {
                continue;
            }
            let part = a / (a - b);
            let length = along(p.lerp(q, part));
            if length > 0.0 && best.is_none_or(|(l, _)| length < l) {
                best = Some((length, (i as f64 + part) / n as f64));
            }
        }
        let (_, mut s) = best?;
        for _ in 0..MOST_STEPS {
            let step = across(self.contour.point(s)) / self.contour.derivative(s).cross(inward);
            s -= step.clamp(-1.0 / n as f64, 1.0 / n as f64);
            if step.abs() < 1e-14 {
                break;
            }
        }
        Some((along(self.contour.point(s)), s))
    }

    /// Thickness at `t` with gradient. With p + L nu = q and the normal m at the facing point q:
    ///   dL = (m.(dq - dp) + L (tau.m)(nu.dD)/|D|) / (nu.m),   D = dx/dt at p, tau its direction.
    pub fn at(&self, t: f64) -> Option<Sample> {
        let (value, s) = self.chord(t)?;
        let d = self.contour.derivative(t);
        let (tau, nu) = (d.normalized(), d.left().normalized());
        let m = self.contour.derivative(s).left().normalized();
        let facing = nu.dot(m);
        let turn = nu * (value * tau.dot(m) / d.norm());
        let (own, slope, other) = (
            self.contour.weights(t),
            self.contour.derivative_weights(t),
            self.contour.weights(s),
        );
        let gradient = (0..own.len())
            .map(|j| (m * (other[j] - own[j]) + turn * slope[j]) / facing)
            .collect();
        Some(Sample {
            t,
            place: self.contour.point(t),
            value,
            gradient,
            partner: None,
        })
    }

    /// Samples thinner than `below`, m.
    pub fn thinner_than(&self, below: f64) -> Vec<Sample> {
        parameters(self.contour.len())
            .filter(|&t| self.chord(t).is_some_and(|(l, _)| l < below))
            .filter_map(|t| self.at(t))
            .collect()
    }

    /// Smallest thickness: (t, thickness in m).
    pub fn smallest(&self) -> (f64, f64) {
        smallest(self.contour.len(), |t| {
            self.chord(t).map_or(f64::INFINITY, |c| c.0)
        })
    }
}

#[cfg(test)]
mod tests {
    use super::super::tests::{difference, pebble};
    use super::*;

    #[test]
    fn gradient_agrees_with_differences() {
        let contour = pebble(Vec2::ZERO);
        let chords = Chords::new(&contour);
        for t in [0.11, 0.2, 0.36, 0.71] {
            let sample = chords.at(t).unwrap();
            let f = |c: &ClosedSpline| Chords::new(c).chord(t).unwrap().0;
            let off = difference(&contour, f, &sample.gradient);
            assert!(off < 1e-5, "t {t}: {off}");
            let flawed: Vec<Vec2> = sample.gradient.iter().map(|&g| g * 1.001).collect();
            assert!(difference(&contour, f, &flawed) > 5e-4);
        }
    }

    #[test]
    fn a_circle_is_as_thick_as_its_diameter() {
        let circle = ClosedSpline::new(
            (0..32)
                .map(|i| Vec2::from_angle(i as f64 * std::f64::consts::PI / 16.0))
                .collect(),
        );
        assert!((Chords::new(&circle).smallest().1 - 2.0).abs() < 1e-4);
    }
}
