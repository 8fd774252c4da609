//! Direct factorisation behind two traits, so that the solver can be exchanged: `analyse` once a pattern,
//! `factor` once a matrix, `solve` and `solve_transposed` as often as wanted.

use super::{LinalgError, Pattern, Sparse};
use faer::prelude::*;
use faer::sparse::linalg::solvers::{Lu, SymbolicLu};
use faer::sparse::{SparseColMatRef, SymbolicSparseColMatRef};
use std::sync::Arc;

/// A factorised matrix.
pub trait Factor: Send + Sync {
    /// Solve `A x = b`, overwriting `b`.
    fn solve(&self, b: &mut [f64]);
    /// Solve `A^T x = b`, overwriting `b`.
    fn solve_transposed(&self, b: &mut [f64]);
}

/// An analysed pattern.
pub trait Symbolic: Send + Sync {
    /// Factorise a matrix of this pattern.
    ///
    /// # Errors
    /// [`LinalgError::Singular`] or [`LinalgError::Memory`].
    fn factor(&self, matrix: &Sparse) -> Result<Box<dyn Factor>, LinalgError>;
}

/// The general sparse LU of the library `faer` (columns ordered by approximate minimum degree, partial
/// pivoting, supernodes).
pub struct Direct {
    symbolic: SymbolicLu<usize>,
}

impl Direct {
    /// Order and analyse a pattern.
    ///
    /// # Errors
    /// [`LinalgError::Memory`].
    pub fn analyse(pattern: &Pattern) -> Result<Self, LinalgError> {
        let symbolic = SymbolicLu::try_new(view(pattern))
            .map_err(|_| LinalgError::Memory { size: pattern.size })?;
        Ok(Self { symbolic })
    }
}

fn view(pattern: &Pattern) -> SymbolicSparseColMatRef<'_, usize> {
    SymbolicSparseColMatRef::new_checked(
        pattern.size,
        pattern.size,
        &pattern.column_starts,
        None,
        &pattern.rows,
    )
}

struct DirectFactor {
    lu: Lu<usize, f64>,
    matrix: Sparse,
}

impl Symbolic for Direct {
    fn factor(&self, matrix: &Sparse) -> Result<Box<dyn Factor>, LinalgError> {
        let pattern: &Arc<Pattern> = &matrix.pattern;
        let size = pattern.size;
        let lu = Lu::try_new_with_symbolic(
            self.symbolic.clone(),
            SparseColMatRef::new(view(pattern), &matrix.values),
        )
        .map_err(|error| match error {
            faer::sparse::linalg::LuError::Generic(_) => LinalgError::Memory { size },
            faer::sparse::linalg::LuError::SymbolicSingular { .. } => {
                LinalgError::Singular { size }
            }
        })?;
        let factor = DirectFactor {
            lu,
            matrix: matrix.clone(),
        };
        let mut probe = vec![1.0; size];
        factor.once(&mut probe);
        if probe.iter().all(|x| x.is_finite()) {
            Ok(Box::new(factor))
        } else {
            Err(LinalgError::Singular { size })
        }
    }
}

impl DirectFactor {
    fn once(&self, b: &mut [f64]) {
        let size = b.len();
        self.lu
            .solve_in_place(MatMut::from_column_major_slice_mut(b, size, 1));
    }
    fn once_transposed(&self, b: &mut [f64]) {
        let size = b.len();
        self.lu
            .solve_transpose_in_place(MatMut::from_column_major_slice_mut(b, size, 1));
    }
}

impl Factor for DirectFactor {
    fn solve(&self, b: &mut [f64]) {
        let right = b.to_vec();
        self.once(b);
        refine(b, &right, |x| self.matrix.apply(x), |r| self.once(r));
    }
    fn solve_transposed(&self, b: &mut [f64]) {
        let right = b.to_vec();
        self.once_transposed(b);
        refine(
            b,
            &right,
            |x| self.matrix.apply_transposed(x),
            |r| self.once_transposed(r),
        );
    }
}

/// One step of iterative refinement (Higham, Accuracy and Stability of Numerical Algorithms, SIAM 2002,
/// chapter 12): it repairs what partial pivoting within supernodes loses.
fn refine(
    x: &mut [f64],
    b: &[f64],
    apply: impl Fn(&[f64]) -> Vec<f64>,
    solve: impl Fn(&mut [f64]),
) {
    let mut residual = apply(x);
    for (r, b) in residual.iter_mut().zip(b) {
        *r = b - *r;
    }
    solve(&mut residual);
    for (x, d) in x.iter_mut().zip(&residual) {
        *x += d;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn example() -> Sparse {
        // [[0, 2, 0], [1, 0, 3], [0, 4, 5]]: a zero diagonal needs a pivot.
        let pattern = Pattern {
            size: 3,
            column_starts: vec![0, 1, 3, 5],
            rows: vec![1, 0, 2, 1, 2],
        };
        Sparse {
            pattern: Arc::new(pattern),
            values: vec![1.0, 2.0, 4.0, 3.0, 5.0],
        }
    }

    #[test]
    fn solves_both_ways() {
        let a = example();
        let factor = Direct::analyse(&a.pattern).unwrap().factor(&a).unwrap();
        let x = vec![1.0, -2.0, 0.5];
        let (mut b, mut c) = (a.apply(&x), a.apply_transposed(&x));
        factor.solve(&mut b);
        factor.solve_transposed(&mut c);
        for i in 0..3 {
            assert!((b[i] - x[i]).abs() < 1e-14 && (c[i] - x[i]).abs() < 1e-14);
        }
    }

    #[test]
    fn a_singular_matrix_is_told() {
        let mut a = example();
        a.values = vec![0.0; 5];
        assert!(Direct::analyse(&a.pattern).unwrap().factor(&a).is_err());
    }
}
