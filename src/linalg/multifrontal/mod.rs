//! Multifrontal LU of matrices with a symmetric pattern, as finite elements make them.
//!
//! Elimination tree, dense fronts, update matrices added into the parent's front (Duff and Reid, ACM Trans. Math.
//! Softw. 9, 302, 1983). Everything that depends on the pattern alone (order, fronts, where each entry and each
//! update goes) is made once by [`Multifrontal::analyse`]; [`Symbolic::factor`] then works without search and without
//! allocation in its loop. Rows are exchanged only within the pivots of a front; that this is enough for saddle points
//! is due to the order (see [`Unknowns`]). Pivots too small to divide by are replaced, counted, and repaired by
//! iteration; a system that stays inaccurate is told singular.

mod front;
mod order;
mod plan;
mod scale;
mod solve;
mod tree;

use super::{Factor, LinalgError, Pattern, Sparse, Symbolic};
use plan::Plan;
use solve::Numeric;
use std::sync::Arc;

/// What an unknown is to the order of elimination.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Role {
    /// Nothing special.
    Plain,
    /// Its elimination fills the diagonal of the constraints it couples to (velocities of edges).
    Filling,
    /// A row whose diagonal is zero until a filling unknown is eliminated (pressures).
    Constraint,
}

/// What is known of the unknowns beside the pattern.
#[derive(Clone, Debug, PartialEq)]
pub struct Unknowns {
    /// Group of each row, shape `(size,)`: rows of one group couple to the same others (all that sit on one edge) and
    /// are ordered as one. Numbered from zero without gaps.
    pub group: Vec<u32>,
    /// Role of each row, shape `(size,)`.
    pub role: Vec<Role>,
}

impl Unknowns {
    /// Each row for itself.
    pub fn single(size: usize) -> Self {
        Self {
            group: (0..size as u32).collect(),
            role: vec![Role::Plain; size],
        }
    }
}

/// An analysed pattern.
pub struct Multifrontal {
    plan: Arc<Plan>,
}

impl Multifrontal {
    /// Order and analyse a pattern, which must be symmetric (as a set of places; values need not be).
    ///
    /// # Errors
    /// [`LinalgError::Memory`] from the ordering.
    pub fn analyse(pattern: &Pattern, unknowns: &Unknowns) -> Result<Self, LinalgError> {
        Self::with_fronts(pattern, unknowns, true)
    }

    /// As [`Self::analyse`], without joining fronts: each item for itself, where nothing hides a wrong order. For tests.
    ///
    /// # Errors
    /// [`LinalgError::Memory`] from the ordering.
    pub fn analyse_apart(pattern: &Pattern, unknowns: &Unknowns) -> Result<Self, LinalgError> {
        Self::with_fronts(pattern, unknowns, false)
    }

    fn with_fronts(
        pattern: &Pattern,
        unknowns: &Unknowns,
        amalgamate: bool,
    ) -> Result<Self, LinalgError> {
        let (item, items) = order::items(pattern, unknowns)?;
        let mut rows = vec![0u32; items];
        for &i in &item {
            rows[i as usize] += 1;
        }
        let graph = order::Graph::quotient(pattern, &item, items);
        let nodes = tree::fronts(&graph, &rows, amalgamate);
        Ok(Self {
            plan: Arc::new(Plan::new(pattern, &item, &unknowns.role, &nodes)),
        })
    }

    /// Numbers in the factors.
    pub fn factor_nonzeros(&self) -> usize {
        self.plan.factor_values
    }

    /// Multiply-adds of a factorisation.
    pub fn work(&self) -> f64 {
        let fronts = self.plan.fronts.iter();
        fronts
            .map(|f| {
                let (p, b) = (f.pivots.len() as f64, f.below.len() as f64);
                p * p * p / 3.0 + p * p * b + p * b * b
            })
            .sum()
    }

    /// Number of fronts.
    pub fn fronts(&self) -> usize {
        self.plan.fronts.len()
    }

    /// Factorise, and keep the count of replaced pivots.
    ///
    /// # Errors
    /// [`LinalgError::Singular`] where iteration cannot repair what was replaced.
    pub fn factorise(&self, matrix: &Sparse) -> Result<MultifrontalFactor, LinalgError> {
        let size = matrix.pattern.size;
        let numeric = Numeric::new(&self.plan, matrix);
        let factor = MultifrontalFactor {
            plan: self.plan.clone(),
            numeric,
            matrix: matrix.clone(),
        };
        let mut probe = matrix.apply(&vec![1.0; size]);
        factor.solve(&mut probe);
        let wrong = probe.iter().fold(0.0, |w: f64, x| w.max((x - 1.0).abs()));
        let finite = probe.iter().all(|x| x.is_finite());
        if finite && (factor.numeric.replaced == 0 || wrong < REPAIRED) {
            Ok(factor)
        } else {
            Err(LinalgError::Singular { size })
        }
    }
}

/// A vector of ones must come back to this part of itself where pivots were replaced; else the system is singular
/// to working precision.
const REPAIRED: f64 = 1e-4;

impl Symbolic for Multifrontal {
    fn factor(&self, matrix: &Sparse) -> Result<Box<dyn Factor>, LinalgError> {
        Ok(Box::new(self.factorise(matrix)?))
    }
}

/// A factorised matrix.
pub struct MultifrontalFactor {
    plan: Arc<Plan>,
    numeric: Numeric,
    matrix: Sparse,
}

/// Steps of refinement where pivots were replaced.
const REPAIRS: usize = 8;

impl MultifrontalFactor {
    /// Pivots that were too small and were replaced.
    pub fn replaced_pivots(&self) -> usize {
        self.numeric.replaced
    }

    fn refined(
        &self,
        b: &mut [f64],
        apply: impl Fn(&[f64]) -> Vec<f64>,
        solve: impl Fn(&mut [f64]),
    ) {
        let right = b.to_vec();
        solve(b);
        // One step always (Higham, Accuracy and Stability of Numerical Algorithms, SIAM 2002, chapter 12).
        let steps = if self.numeric.replaced == 0 {
            1
        } else {
            REPAIRS
        };
        for _ in 0..steps {
            let mut residual = apply(b);
            for (r, b) in residual.iter_mut().zip(&right) {
                *r = b - *r;
            }
            solve(&mut residual);
            for (x, d) in b.iter_mut().zip(&residual) {
                *x += d;
            }
        }
    }
}

impl Factor for MultifrontalFactor {
    fn solve(&self, b: &mut [f64]) {
        self.refined(
            b,
            |x| self.matrix.apply(x),
            |r| self.numeric.solve(&self.plan, r),
        );
    }
    fn solve_transposed(&self, b: &mut [f64]) {
        self.refined(
            b,
            |x| self.matrix.apply_transposed(x),
            |r| self.numeric.solve_transposed(&self.plan, r),
        );
    }
}
