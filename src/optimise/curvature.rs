//! Curvature of the Lagrangian learnt from its gradients: damped BFGS.
//!
//! Source: Powell, A fast algorithm for nonlinearly constrained optimization calculations (Lecture Notes in
//! Mathematics 630, 1978); Nocedal and Wright, Numerical Optimization (Springer, 2006), procedure 18.2.

use nalgebra::{DMatrix, DVector};

/// A symmetric positive definite model of the Hessian.
#[derive(Clone, Debug)]
pub struct CurvatureModel {
    /// B, shape `(n, n)`.
    pub matrix: DMatrix<f64>,
}

/// Powell's damping: curvature below a fifth of the model's is raised to it.
const LEAST_CURVATURE: f64 = 0.2;

impl CurvatureModel {
    /// The metric scaled so that the unconstrained step along -gradient moves the variables by at most
    /// `first_step`.
    pub fn from_metric(metric: &DMatrix<f64>, gradient: &[f64], first_step: f64) -> Self {
        let g = DVector::from_row_slice(gradient);
        let direction = metric
            .clone()
            .cholesky()
            .map_or_else(|| g.clone(), |c| c.solve(&g));
        let longest = direction.amax();
        let factor = if longest > 0.0 {
            longest / first_step
        } else {
            1.0
        };
        Self {
            matrix: metric * factor,
        }
    }

    /// Learn from a step `s` and the change `y` of the Lagrangian's gradient along it.
    pub fn update(&mut self, s: &[f64], y: &[f64]) {
        let (s, mut y) = (DVector::from_row_slice(s), DVector::from_row_slice(y));
        let bs = &self.matrix * &s;
        let sbs = s.dot(&bs);
        if !(sbs > 0.0 && sbs.is_finite()) {
            return;
        }
        let sy = s.dot(&y);
        if sy < LEAST_CURVATURE * sbs {
            let theta = (1.0 - LEAST_CURVATURE) * sbs / (sbs - sy);
            y = y * theta + &bs * (1.0 - theta);
        }
        let sy = s.dot(&y);
        self.matrix += &y * y.transpose() / sy - &bs * bs.transpose() / sbs;
    }

    /// s'Bs.
    pub fn quadratic(&self, s: &[f64]) -> f64 {
        let s = DVector::from_row_slice(s);
        s.dot(&(&self.matrix * &s))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn learns_a_quadratic_and_stays_positive() {
        let truth = DMatrix::from_row_slice(2, 2, &[3.0, 1.0, 1.0, 2.0]);
        let mut model = CurvatureModel {
            matrix: DMatrix::identity(2, 2),
        };
        for k in 0..30 {
            let a = k as f64;
            let s = DVector::from_row_slice(&[a.cos(), (1.7 * a).sin()]);
            let y = &truth * &s;
            model.update(s.as_slice(), y.as_slice());
        }
        assert!((&model.matrix - &truth).amax() < 1e-6);
        model.update(&[1.0, 0.0], &[-5.0, 0.0]);
        assert!(model.matrix.clone().cholesky().is_some());
    }
}
