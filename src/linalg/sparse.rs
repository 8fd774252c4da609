//! Compressed-column matrices: the pattern is built once a topology, values many times.

use std::sync::Arc;

/// Where the nonzeros are; rows sorted within each column.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Pattern {
    /// Rows and columns.
    pub size: usize,
    /// Start of each column in `rows`, shape `(size + 1,)`.
    pub column_starts: Vec<usize>,
    /// Row of each nonzero.
    pub rows: Vec<usize>,
}

impl Pattern {
    /// Number of stored values.
    pub fn nonzeros(&self) -> usize {
        self.rows.len()
    }
}

/// A square sparse matrix.
#[derive(Clone, Debug)]
pub struct Sparse {
    /// Pattern, shared.
    pub pattern: Arc<Pattern>,
    /// Values in the order of the pattern.
    pub values: Vec<f64>,
}

impl Sparse {
    /// `y = A x`, shape `(size,)`.
    pub fn apply(&self, x: &[f64]) -> Vec<f64> {
        let mut y = vec![0.0; self.pattern.size];
        for (j, &xj) in x.iter().enumerate() {
            for k in self.pattern.column_starts[j]..self.pattern.column_starts[j + 1] {
                y[self.pattern.rows[k]] += self.values[k] * xj;
            }
        }
        y
    }

    /// `y = A^T x`, shape `(size,)`.
    pub fn apply_transposed(&self, x: &[f64]) -> Vec<f64> {
        (0..self.pattern.size)
            .map(|j| {
                (self.pattern.column_starts[j]..self.pattern.column_starts[j + 1])
                    .map(|k| self.values[k] * x[self.pattern.rows[k]])
                    .sum()
            })
            .collect()
    }
}
