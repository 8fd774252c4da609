//! Convex quadratic programs by the interior-point library `clarabel`.

use clarabel::algebra::CscMatrix;
use clarabel::solver::{
    DefaultSettingsBuilder, DefaultSolver, IPSolver, NonnegativeConeT, SolverStatus, ZeroConeT,
};
use nalgebra::DMatrix;

/// min 1/2 d'Hd + g'd + weight sum(slack)
/// subject to  a_i d + c_i = 0,  a_j d + c_j <= slack_k (elastic) or <= 0,  |d| <= reach.
pub struct Program<'a> {
    /// H, shape `(n, n)`, symmetric positive definite.
    pub hessian: &'a DMatrix<f64>,
    /// g, shape `(n,)`.
    pub gradient: &'a [f64],
    /// Equalities (a, c).
    pub equalities: Vec<(&'a [f64], f64)>,
    /// Inequalities (a, c).
    pub inequalities: Vec<(&'a [f64], f64)>,
    /// Inequalities that may be violated at a price (a, c).
    pub elastic: Vec<(&'a [f64], f64)>,
    /// Price of a violation.
    pub weight: f64,
    /// Largest change of any variable.
    pub reach: f64,
}

/// Solution of a program.
#[derive(Clone, Debug)]
pub struct Solution {
    /// d, shape `(n,)`.
    pub step: Vec<f64>,
    /// Multipliers of the equalities.
    pub equalities: Vec<f64>,
    /// Multipliers of the inequalities, not negative.
    pub inequalities: Vec<f64>,
    /// Multipliers of the elastic inequalities, between 0 and the price.
    pub elastic: Vec<f64>,
}

/// A program that could not be solved.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
pub enum QpError {
    /// The limits contradict one another within reach.
    #[error("the limits cannot all be met within the step allowed")]
    Infeasible,
    /// The solver gave up.
    #[error("the quadratic program could not be solved")]
    Numerical,
}

impl Program<'_> {
    /// Solve.
    ///
    /// # Errors
    /// [`QpError`].
    pub fn solve(&self) -> Result<Solution, QpError> {
        let n = self.gradient.len();
        let slacks = self.elastic.len();
        let size = n + slacks;
        let (equal, hard) = (self.equalities.len(), self.inequalities.len());
        // The objective is scaled so that its largest slope is one: tolerances of the solver are absolute too.
        let scale = self.gradient.iter().fold(0.0, |m: f64, g| m.max(g.abs()));
        let scale = 1.0
            / if scale > 0.0 {
                scale
            } else {
                self.hessian.amax().max(f64::MIN_POSITIVE)
            };
        let mut columns: Vec<Vec<(usize, f64)>> = vec![Vec::new(); size];
        let mut right = Vec::new();
        let mut row = 0;
        for (list, slack_from) in [
            (&self.equalities, None),
            (&self.inequalities, None),
            (&self.elastic, Some(n)),
        ] {
            for (k, (a, c)) in list.iter().enumerate() {
                for (j, &value) in a.iter().enumerate() {
                    if value != 0.0 {
                        columns[j].push((row, value));
                    }
                }
                if let Some(first) = slack_from {
                    columns[first + k].push((row, -1.0));
                }
                right.push(-c);
                row += 1;
            }
        }
        for k in 0..slacks {
            columns[n + k].push((row, -1.0));
            right.push(0.0);
            row += 1;
        }
        for (j, column) in columns.iter_mut().enumerate().take(n) {
            column.push((row + 2 * j, 1.0));
            column.push((row + 2 * j + 1, -1.0));
        }
        right.extend(std::iter::repeat_n(self.reach, 2 * n));
        row += 2 * n;
        let constraints = compressed(row, size, &columns);
        let quadratic: Vec<Vec<(usize, f64)>> = (0..size)
            .map(|j| {
                if j < n {
                    (0..=j).map(|i| (i, self.hessian[(i, j)] * scale)).collect()
                } else {
                    Vec::new()
                }
            })
            .collect();
        let hessian = compressed(size, size, &quadratic);
        let mut linear: Vec<f64> = self.gradient.iter().map(|g| g * scale).collect();
        linear.extend(std::iter::repeat_n(self.weight * scale, slacks));
        let settings = DefaultSettingsBuilder::default()
            .verbose(false)
            .max_iter(100)
            .tol_gap_abs(1e-10)
            .tol_gap_rel(1e-10)
            .tol_feas(1e-11)
            .build()
            .map_err(|_| QpError::Numerical)?;
        let cones = [ZeroConeT(equal), NonnegativeConeT(row - equal)];
        let mut solver =
            DefaultSolver::new(&hessian, &linear, &constraints, &right, &cones, settings)
                .map_err(|_| QpError::Numerical)?;
        solver.solve();
        let solution = &solver.solution;
        match solution.status {
            SolverStatus::Solved | SolverStatus::AlmostSolved => {}
            SolverStatus::PrimalInfeasible | SolverStatus::AlmostPrimalInfeasible => {
                return Err(QpError::Infeasible);
            }
            _ => return Err(QpError::Numerical),
        }
        let multipliers: Vec<f64> = solution.z.iter().map(|z| z / scale).collect();
        Ok(Solution {
            step: solution.x[..n].to_vec(),
            equalities: multipliers[..equal].to_vec(),
            inequalities: multipliers[equal..equal + hard].to_vec(),
            elastic: multipliers[equal + hard..equal + hard + slacks].to_vec(),
        })
    }
}

fn compressed(rows: usize, columns: usize, entries: &[Vec<(usize, f64)>]) -> CscMatrix<f64> {
    let mut starts = vec![0];
    let (mut places, mut values) = (Vec::new(), Vec::new());
    for column in entries {
        for &(row, value) in column {
            places.push(row);
            values.push(value);
        }
        starts.push(places.len());
    }
    CscMatrix::new(rows, columns, starts, places, values)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Hock and Schittkowski, Test Examples for Nonlinear Programming Codes (1981), problem 76, a convex QP with
    /// its non-negativity left out where it is not active (from memory; the optimality conditions are checked).
    #[test]
    fn optimality_conditions_hold() {
        let hessian = DMatrix::from_row_slice(
            4,
            4,
            &[
                2.0, 0.0, -1.0, 0.0, 0.0, 1.0, 0.0, 0.0, -1.0, 0.0, 2.0, 1.0, 0.0, 0.0, 1.0, 1.0,
            ],
        );
        let gradient = [-1.0, -3.0, 1.0, -1.0];
        let rows = [
            ([1.0, 2.0, 1.0, 1.0], -5.0),
            ([3.0, 1.0, 2.0, -1.0], -4.0),
            ([0.0, -1.0, -4.0, 0.0], 1.5),
            ([0.0, 0.0, -1.0, 0.0], 0.0),
        ];
        let program = Program {
            hessian: &hessian,
            gradient: &gradient,
            equalities: vec![],
            inequalities: rows.iter().map(|(a, c)| (&a[..], *c)).collect(),
            elastic: vec![],
            weight: 0.0,
            reach: 100.0,
        };
        let solution = program.solve().unwrap();
        let x = nalgebra::DVector::from_vec(solution.step.clone());
        let value =
            0.5 * (&hessian * &x).dot(&x) + nalgebra::DVector::from_row_slice(&gradient).dot(&x);
        assert!((value + 4.681818181).abs() < 1e-6, "{value}");
        let mut residual = &hessian * &x + nalgebra::DVector::from_row_slice(&gradient);
        for ((a, _), z) in rows.iter().zip(&solution.inequalities) {
            assert!(*z >= -1e-9);
            residual += nalgebra::DVector::from_row_slice(a) * *z;
        }
        assert!(residual.amax() < 1e-7);
    }

    #[test]
    fn contradicting_limits_are_told() {
        let hessian = DMatrix::identity(1, 1);
        let program = Program {
            hessian: &hessian,
            gradient: &[1.0],
            equalities: vec![],
            inequalities: vec![(&[1.0], 1.0), (&[-1.0], 1.0)],
            elastic: vec![],
            weight: 0.0,
            reach: 10.0,
        };
        assert_eq!(program.solve().unwrap_err(), QpError::Infeasible);
    }
}
