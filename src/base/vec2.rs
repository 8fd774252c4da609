//! Plane vectors and points, in metres unless a name says otherwise.

use serde::{Deserialize, Serialize};
use std::ops::{Add, AddAssign, Div, Mul, Neg, Sub, SubAssign};

/// A point or vector in the plane; written to files as `[x, y]`.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(from = "[f64; 2]", into = "[f64; 2]")]
pub struct Vec2 {
    /// Along the drawing's horizontal axis.
    pub x: f64,
    /// Along the drawing's vertical axis, upwards.
    pub y: f64,
}

/// Shorthand for `Vec2 { x, y }`.
pub const fn vec2(x: f64, y: f64) -> Vec2 {
    Vec2 { x, y }
}

impl Vec2 {
    /// The origin.
    pub const ZERO: Self = vec2(0.0, 0.0);

    /// `(cos, sin)` of an angle in radians.
    pub fn from_angle(angle_rad: f64) -> Self {
        vec2(angle_rad.cos(), angle_rad.sin())
    }

    /// Scalar product.
    pub fn dot(self, other: Self) -> f64 {
        self.x * other.x + self.y * other.y
    }

    /// Out-of-plane part of the vector product: positive when `other` lies to the left of `self`.
    pub fn cross(self, other: Self) -> f64 {
        self.x * other.y - self.y * other.x
    }

    /// Euclidean length.
    pub fn norm(self) -> f64 {
        self.x.hypot(self.y)
    }

    /// Squared length.
    pub fn norm_squared(self) -> f64 {
        self.dot(self)
    }

    /// Turned by a quarter turn counter-clockwise.
    pub fn left(self) -> Self {
        vec2(-self.y, self.x)
    }

    /// Turned by a quarter turn clockwise: the outward normal of a counter-clockwise contour's tangent.
    pub fn right(self) -> Self {
        vec2(self.y, -self.x)
    }

    /// Same direction, length one; not finite for the zero vector.
    pub fn normalized(self) -> Self {
        self / self.norm()
    }

    /// Turned counter-clockwise by an angle in radians.
    pub fn rotated(self, angle_rad: f64) -> Self {
        let (s, c) = angle_rad.sin_cos();
        vec2(c * self.x - s * self.y, s * self.x + c * self.y)
    }

    /// Distance between two points.
    pub fn distance(self, other: Self) -> f64 {
        (self - other).norm()
    }

    /// Point a fraction `t` of the way to `other`.
    pub fn lerp(self, other: Self, t: f64) -> Self {
        self + (other - self) * t
    }

    /// Neither coordinate is infinite or not a number.
    pub fn is_finite(self) -> bool {
        self.x.is_finite() && self.y.is_finite()
    }
}

impl From<[f64; 2]> for Vec2 {
    fn from([x, y]: [f64; 2]) -> Self {
        vec2(x, y)
    }
}
impl From<Vec2> for [f64; 2] {
    fn from(v: Vec2) -> Self {
        [v.x, v.y]
    }
}
impl Add for Vec2 {
    type Output = Self;
    fn add(self, o: Self) -> Self {
        vec2(self.x + o.x, self.y + o.y)
    }
}
impl Sub for Vec2 {
    type Output = Self;
    fn sub(self, o: Self) -> Self {
        vec2(self.x - o.x, self.y - o.y)
    }
}
impl Mul<f64> for Vec2 {
    type Output = Self;
    fn mul(self, s: f64) -> Self {
        vec2(self.x * s, self.y * s)
    }
}
impl Div<f64> for Vec2 {
    type Output = Self;
    fn div(self, s: f64) -> Self {
        vec2(self.x / s, self.y / s)
    }
}
impl Neg for Vec2 {
    type Output = Self;
    fn neg(self) -> Self {
        vec2(-self.x, -self.y)
    }
}
impl AddAssign for Vec2 {
    fn add_assign(&mut self, o: Self) {
        *self = *self + o;
    }
}
impl SubAssign for Vec2 {
    fn sub_assign(&mut self, o: Self) {
        *self = *self - o;
    }
}
