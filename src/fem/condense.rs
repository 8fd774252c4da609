//! A linearised system: element matrices, their interiors condensed, the rest factorised.
//!
//! With outer unknowns `b` and interior unknowns `i` of an element:
//!   S = A_bb - A_bi A_ii^-1 A_ib,   r_b' = r_b - A_bi A_ii^-1 r_i,   x_i = A_ii^-1 (r_i - A_ib x_b)
//! (static condensation: Guyan, AIAA J. 3, 380, 1965). The transposed system has the same factors.

use super::{FemError, Layout};
use crate::base::Watch;
use crate::linalg::dense::{axpy, lu_factor, lu_solve, lu_solve_transposed};
use crate::linalg::{Factor, LinalgError, Sparse};
use std::sync::Arc;

/// Elements between two looks at the watch.
const ELEMENTS_A_LOOK: usize = 1000;

/// A factorised linear system on a [`Layout`].
pub struct Linearised {
    /// Layout.
    pub layout: Arc<Layout>,
    /// Element matrices, unscaled, shape `(elements, local, local)`, row = test, column = unknown.
    pub matrices: Vec<f64>,
    interiors: Vec<Interior>,
    factor: Box<dyn Factor>,
}

/// What is kept of an element's interior, scaled.
struct Interior {
    lu: Vec<f64>,
    pivots: Vec<usize>,
    /// A_ii^-1 A_ib, shape (interior, outer).
    lifted: Vec<f64>,
    /// A_bi, shape (outer, interior).
    outer_rows: Vec<f64>,
}

impl Linearised {
    /// Condense and factorise.
    ///
    /// # Errors
    /// A singular interior or system, or the watch's stop.
    pub fn new(layout: &Arc<Layout>, matrices: Vec<f64>, watch: &Watch) -> Result<Self, FemError> {
        let (skeleton, interiors) = Self::condense(layout, &matrices, watch)?;
        let factor = layout.symbolic.factor(&skeleton)?;
        watch.check()?;
        Ok(Self {
            layout: layout.clone(),
            matrices,
            interiors,
            factor,
        })
    }

    /// The condensed matrix that is factorised, scaled.
    ///
    /// # Errors
    /// A singular interior, or the watch's stop.
    pub fn skeleton(&self, watch: &Watch) -> Result<Sparse, FemError> {
        Ok(Self::condense(&self.layout, &self.matrices, watch)?.0)
    }

    fn condense(
        layout: &Layout,
        matrices: &[f64],
        watch: &Watch,
    ) -> Result<(Sparse, Vec<Interior>), FemError> {
        let (local, outer) = (layout.local, layout.outer);
        let inner = local - outer;
        let mut values = vec![0.0; layout.pattern.nonzeros()];
        let mut interiors = Vec::with_capacity(layout.elements);
        let mut scaled = vec![0.0; local * local];
        for e in 0..layout.elements {
            if e % ELEMENTS_A_LOOK == 0 {
                watch.check()?;
            }
            let numbers = layout.element(e);
            let matrix = &matrices[e * local * local..(e + 1) * local * local];
            for i in 0..local {
                let row_scale = layout.scale[numbers[i] as usize];
                for j in 0..local {
                    scaled[i * local + j] =
                        matrix[i * local + j] * row_scale * layout.scale[numbers[j] as usize];
                }
            }
            let interior = Interior::new(&scaled, local, outer)
                .ok_or(FemError::Linear(LinalgError::Element { element: e }))?;
            let mut row = vec![0.0; outer];
            for i in 0..outer {
                row.copy_from_slice(&scaled[i * local..i * local + outer]);
                for k in 0..inner {
                    axpy(
                        -interior.outer_rows[i * inner + k],
                        &interior.lifted[k * outer..(k + 1) * outer],
                        &mut row,
                    );
                }
                let positions =
                    &layout.positions[(e * outer + i) * outer..(e * outer + i + 1) * outer];
                for (&position, &value) in positions.iter().zip(&row) {
                    if position != u32::MAX {
                        values[position as usize] += value;
                    }
                }
            }
            interiors.push(interior);
        }
        watch.check()?;
        let pattern = layout.pattern.clone();
        Ok((Sparse { pattern, values }, interiors))
    }

    /// Solve `A x = r` with zero at fixed unknowns; `r` and the result have shape `(total,)`.
    pub fn solve(&self, right: &[f64]) -> Vec<f64> {
        self.solve_either(right, false)
    }

    /// Solve `A^T x = r` with zero at fixed unknowns.
    pub fn solve_transposed(&self, right: &[f64]) -> Vec<f64> {
        self.solve_either(right, true)
    }

    fn solve_either(&self, right: &[f64], transposed: bool) -> Vec<f64> {
        let layout = &*self.layout;
        let (local, outer) = (layout.local, layout.outer);
        let inner = local - outer;
        let mut skeleton: Vec<f64> = layout
            .unknown
            .iter()
            .map(|&n| right[n as usize] * layout.scale[n as usize])
            .collect();
        let mut own = vec![0.0; inner];
        for (e, interior) in self.interiors.iter().enumerate() {
            let numbers = layout.element(e);
            if inner == 0 {
                break;
            }
            gather(layout, &numbers[outer..], right, &mut own);
            if transposed {
                // r_b - A_ib^T A_ii^-T r_i = r_b - (A_ii^-1 A_ib)^T r_i
                for (i, &n) in numbers[..outer].iter().enumerate() {
                    let row = layout.row[n as usize];
                    if row != u32::MAX {
                        skeleton[row as usize] -= (0..inner)
                            .map(|k| interior.lifted[k * outer + i] * own[k])
                            .sum::<f64>();
                    }
                }
            } else {
                lu_solve(&interior.lu, &interior.pivots, &mut own, 1);
                for (i, &n) in numbers[..outer].iter().enumerate() {
                    let row = layout.row[n as usize];
                    if row != u32::MAX {
                        skeleton[row as usize] -= (0..inner)
                            .map(|k| interior.outer_rows[i * inner + k] * own[k])
                            .sum::<f64>();
                    }
                }
            }
        }
        if transposed {
            self.factor.solve_transposed(&mut skeleton);
        } else {
            self.factor.solve(&mut skeleton);
        }
        let mut x = vec![0.0; layout.total];
        for (&n, &s) in layout.unknown.iter().zip(&skeleton) {
            x[n as usize] = s * layout.scale[n as usize];
        }
        let mut outer_x = vec![0.0; outer];
        for (e, interior) in self.interiors.iter().enumerate() {
            if inner == 0 {
                break;
            }
            let numbers = layout.element(e);
            gather(layout, &numbers[outer..], right, &mut own);
            for (o, &n) in outer_x.iter_mut().zip(&numbers[..outer]) {
                let row = layout.row[n as usize];
                *o = if row == u32::MAX {
                    0.0
                } else {
                    skeleton[row as usize]
                };
            }
            if transposed {
                // x_i = A_ii^-T (r_i - A_bi^T x_b)
                for (k, r) in own.iter_mut().enumerate() {
                    *r -= (0..outer)
                        .map(|i| interior.outer_rows[i * inner + k] * outer_x[i])
                        .sum::<f64>();
                }
                lu_solve_transposed(&interior.lu, &interior.pivots, &mut own);
            } else {
                lu_solve(&interior.lu, &interior.pivots, &mut own, 1);
                for (k, r) in own.iter_mut().enumerate() {
                    *r -= (0..outer)
                        .map(|i| interior.lifted[k * outer + i] * outer_x[i])
                        .sum::<f64>();
                }
            }
            for (&n, &value) in numbers[outer..].iter().zip(&own) {
                x[n as usize] = value * layout.scale[n as usize];
            }
        }
        x
    }

    /// `A x` over all rows, fixed ones included, shape `(total,)`.
    pub fn apply(&self, x: &[f64]) -> Vec<f64> {
        self.apply_either(x, false)
    }

    /// `A^T x` over all rows, fixed ones included, shape `(total,)`.
    pub fn apply_transposed(&self, x: &[f64]) -> Vec<f64> {
        self.apply_either(x, true)
    }

    fn apply_either(&self, x: &[f64], transposed: bool) -> Vec<f64> {
        let local = self.layout.local;
        let mut y = vec![0.0; self.layout.total];
        for e in 0..self.layout.elements {
            let numbers = self.layout.element(e);
            let matrix = &self.matrices[e * local * local..(e + 1) * local * local];
            for i in 0..local {
                for j in 0..local {
                    let (to, from) = if transposed { (j, i) } else { (i, j) };
                    y[numbers[to] as usize] += matrix[i * local + j] * x[numbers[from] as usize];
                }
            }
        }
        y
    }
}

impl Interior {
    fn new(scaled: &[f64], local: usize, outer: usize) -> Option<Self> {
        let inner = local - outer;
        let mut lu = vec![0.0; inner * inner];
        let mut lifted = vec![0.0; inner * outer];
        let mut outer_rows = vec![0.0; outer * inner];
        for k in 0..inner {
            let row = &scaled[(outer + k) * local..(outer + k + 1) * local];
            lifted[k * outer..(k + 1) * outer].copy_from_slice(&row[..outer]);
            lu[k * inner..(k + 1) * inner].copy_from_slice(&row[outer..]);
        }
        for i in 0..outer {
            outer_rows[i * inner..(i + 1) * inner]
                .copy_from_slice(&scaled[i * local + outer..(i + 1) * local]);
        }
        let mut pivots = vec![0; inner];
        if !lu_factor(&mut lu, &mut pivots) {
            return None;
        }
        lu_solve(&lu, &pivots, &mut lifted, outer);
        Some(Self {
            lu,
            pivots,
            lifted,
            outer_rows,
        })
    }
}

fn gather(layout: &Layout, numbers: &[u32], from: &[f64], to: &mut [f64]) {
    for (t, &n) in to.iter_mut().zip(numbers) {
        *t = from[n as usize] * layout.scale[n as usize];
    }
}
