//! Forward dual numbers: a formula written once for [`Real`] yields its value and exact derivatives.
//!
//! Source: forward-mode differentiation as in Griewank and Walther, Evaluating Derivatives (SIAM, 2008),
//! chapter 3.

use std::ops::{Add, Div, Mul, Neg, Sub};

/// What the pointwise formulas of flow and heat need of a number.
pub trait Real:
    Copy
    + Add<Output = Self>
    + Sub<Output = Self>
    + Mul<Output = Self>
    + Div<Output = Self>
    + Neg<Output = Self>
    + Mul<f64, Output = Self>
    + Add<f64, Output = Self>
{
    /// A constant: all derivatives zero.
    fn constant(value: f64) -> Self;
    /// The value without its derivatives.
    fn value(self) -> f64;
    /// Square root.
    fn sqrt(self) -> Self;
    /// Exponential.
    fn exp(self) -> Self;
}

impl Real for f64 {
    fn constant(value: f64) -> Self {
        value
    }
    fn value(self) -> f64 {
        self
    }
    fn sqrt(self) -> Self {
        f64::sqrt(self)
    }
    fn exp(self) -> Self {
        f64::exp(self)
    }
}

/// A value with its derivatives by `N` independent variables.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Dual<const N: usize> {
    /// Value.
    pub v: f64,
    /// Derivative by each variable.
    pub d: [f64; N],
}

impl<const N: usize> Dual<N> {
    /// The independent variable number `index` at `value`.
    pub fn variable(value: f64, index: usize) -> Self {
        let mut d = [0.0; N];
        d[index] = 1.0;
        Self { v: value, d }
    }

    fn chain(self, value: f64, slope: f64) -> Self {
        Self {
            v: value,
            d: self.d.map(|d| d * slope),
        }
    }
}

impl<const N: usize> Real for Dual<N> {
    fn constant(value: f64) -> Self {
        Self {
            v: value,
            d: [0.0; N],
        }
    }
    fn value(self) -> f64 {
        self.v
    }
    fn sqrt(self) -> Self {
        let root = self.v.sqrt();
        self.chain(root, 0.5 / root)
    }
    fn exp(self) -> Self {
        let e = self.v.exp();
        self.chain(e, e)
    }
}

impl<const N: usize> Add for Dual<N> {
    type Output = Self;
    fn add(mut self, o: Self) -> Self {
        self.v += o.v;
        for i in 0..N {
            self.d[i] += o.d[i];
        }
        self
    }
}
impl<const N: usize> Sub for Dual<N> {
    type Output = Self;
    fn sub(mut self, o: Self) -> Self {
        self.v -= o.v;
        for i in 0..N {
            self.d[i] -= o.d[i];
        }
        self
    }
}
impl<const N: usize> Mul for Dual<N> {
    type Output = Self;
    fn mul(self, o: Self) -> Self {
        let mut d = [0.0; N];
        for i in 0..N {
            d[i] = self.d[i] * o.v + self.v * o.d[i];
        }
        Self { v: self.v * o.v, d }
    }
}
impl<const N: usize> Div for Dual<N> {
    type Output = Self;
    fn div(self, o: Self) -> Self {
        let inverse = 1.0 / o.v;
        let quotient = self.v * inverse;
        let mut d = [0.0; N];
        for i in 0..N {
            d[i] = (self.d[i] - quotient * o.d[i]) * inverse;
        }
        Self { v: quotient, d }
    }
}
impl<const N: usize> Neg for Dual<N> {
    type Output = Self;
    fn neg(self) -> Self {
        Self {
            v: -self.v,
            d: self.d.map(|d| -d),
        }
    }
}
impl<const N: usize> Mul<f64> for Dual<N> {
    type Output = Self;
    fn mul(self, s: f64) -> Self {
        Self {
            v: self.v * s,
            d: self.d.map(|d| d * s),
        }
    }
}
impl<const N: usize> Add<f64> for Dual<N> {
    type Output = Self;
    fn add(mut self, s: f64) -> Self {
        self.v += s;
        self
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn derivatives_agree_with_the_calculus() {
        let x = Dual::<2>::variable(1.3, 0);
        let y = Dual::<2>::variable(0.7, 1);
        let f = (x * y + x / y).sqrt() * (y * 2.0 + 1.0) - x.exp();
        let g = (1.3f64 * 0.7 + 1.3 / 0.7).sqrt();
        let by_x = (0.7 + 1.0 / 0.7) / (2.0 * g) * 2.4 - 1.3f64.exp();
        let by_y = (1.3 - 1.3 / 0.49) / (2.0 * g) * 2.4 + 2.0 * g;
        assert!((f.d[0] - by_x).abs() < 1e-14 && (f.d[1] - by_y).abs() < 1e-14);
    }
}
