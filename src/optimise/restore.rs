//! Back onto the shape limits: the nearest point in the metric, by a few small quadratic programs, so that every
//! point that is evaluated meets all shape limits exactly.

use super::problem::{Geometry, Problem};
use super::qp::{Program, QpError};
use nalgebra::DMatrix;

/// Most programs; two or three are usual.
const MOST_ROUNDS: usize = 25;
/// Equalities are met to this (dimensionless).
pub const EQUAL: f64 = 1e-10;
/// Inequalities are aimed this far inside, growing with each round, so that they end up met, not nearly met.
const INSIDE: f64 = 1e-8;

/// Point near `x` that meets all shape limits, within `reach` of each variable a round.
///
/// # Errors
/// [`QpError::Infeasible`] with the last geometry when the limits cannot be met.
pub fn restore(
    problem: &impl Problem,
    metric: &DMatrix<f64>,
    x: &[f64],
    reach: f64,
) -> Result<Vec<f64>, (QpError, Geometry)> {
    let mut x = x.to_vec();
    let zero = vec![0.0; x.len()];
    for round in 0..MOST_ROUNDS {
        let geometry = problem.geometry(&x, reach);
        if is_met(&geometry) {
            return Ok(x);
        }
        let inside = INSIDE * 2f64.powi(round as i32);
        let program = Program {
            hessian: metric,
            gradient: &zero,
            equalities: geometry
                .equalities
                .iter()
                .map(|r| (&r.gradient[..], r.value))
                .collect(),
            inequalities: geometry
                .inequalities
                .iter()
                .map(|r| (&r.gradient[..], r.value + inside))
                .collect(),
            elastic: vec![],
            weight: 0.0,
            reach,
        };
        match program.solve() {
            Ok(solution) => {
                for (x, d) in x.iter_mut().zip(&solution.step) {
                    *x += d;
                }
            }
            Err(error) => return Err((error, geometry)),
        }
    }
    let geometry = problem.geometry(&x, reach);
    if is_met(&geometry) {
        Ok(x)
    } else {
        Err((QpError::Infeasible, geometry))
    }
}

/// Whether all shape limits hold: inequalities without any violation, equalities to [`EQUAL`].
pub fn is_met(geometry: &Geometry) -> bool {
    geometry.inequalities.iter().all(|r| r.value <= 0.0)
        && geometry.equalities.iter().all(|r| r.value.abs() <= EQUAL)
}
