//! Rows and columns brought to a common size, so that a small pivot means cancellation and not a small unit.

use crate::linalg::Sparse;

/// Factors of rows and columns: powers of two, so that scaling does not round.
pub(super) struct Scale {
    pub(super) rows: Vec<f64>,
    pub(super) columns: Vec<f64>,
}

impl Scale {
    /// The greatest entry of every row, then of every column, comes to lie in [1/2, 2) (equilibration: Golub and Van
    /// Loan, Matrix Computations, 2013, section 3.5.2). Empty rows and columns keep the factor one. Also returns the scaled
    /// values.
    pub(super) fn equilibrate(matrix: &Sparse) -> (Self, Vec<f64>) {
        let pattern = &*matrix.pattern;
        let mut rows = vec![0.0f64; pattern.size];
        for (&r, v) in pattern.rows.iter().zip(&matrix.values) {
            rows[r] = rows[r].max(v.abs());
        }
        for r in &mut rows {
            *r = reciprocal(*r);
        }
        let mut scaled = matrix.values.clone();
        let columns = (0..pattern.size)
            .map(|j| {
                let entries = pattern.column_starts[j]..pattern.column_starts[j + 1];
                let mut most = 0.0f64;
                for (v, &r) in scaled[entries.clone()]
                    .iter_mut()
                    .zip(&pattern.rows[entries.clone()])
                {
                    *v *= rows[r];
                    most = most.max(v.abs());
                }
                let factor = reciprocal(most);
                for v in &mut scaled[entries] {
                    *v *= factor;
                }
                factor
            })
            .collect();
        (Self { rows, columns }, scaled)
    }
}

/// Power of two nearest below the reciprocal.
fn reciprocal(most: f64) -> f64 {
    if most > 0.0 && most.is_finite() {
        2f64.powi(-(most.log2().floor().clamp(-1000.0, 1000.0) as i32))
    } else {
        1.0
    }
}
